//! The library from outside: its specification, accuracy, properties, and what each part does at its limits.

mod accuracy;
mod basis;
mod calendar;
mod curves;
mod draws;
mod evidence;
mod exact;
mod growth;
mod irr;
mod measures;
mod prices;
mod properties;
mod rateline;
mod schedule_factors;
mod schedules;
mod sums;
mod switching;
mod switching_states;
mod tails;
mod timing;
mod welfare;

/// Property tests draw the same cases every time, and leave no files behind.
fn repeatable() -> proptest::test_runner::Config {
    proptest::test_runner::Config {
        cases: 512,
        failure_persistence: None,
        rng_seed: proptest::test_runner::RngSeed::Fixed(2_026),
        ..Default::default()
    }
}
