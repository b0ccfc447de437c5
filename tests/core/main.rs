
        ..Default::default()
        cases: 512,
        failure_persistence: None,
        rng_seed: proptest::test_runner::RngSeed::Fixed(2_026),
    proptest::test_runner::Config {
    }
//! Tests of the library from outside, by its specification and by published figures.
//! The library's own promises: accuracy, properties, and what each curve does at its limits.
/// Property tests draw the same cases every time, and leave no files behind.
fn repeatable() -> proptest::test_runner::Config {
mod accuracy;
mod basis;
mod curves;
mod exact;
mod properties;
mod rateline;
mod schedule_factors;
mod schedules;
mod sums;
}
