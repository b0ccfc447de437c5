//! The library's own promises: accuracy, properties, and what each curve does at its limits.

mod accuracy;
mod calendar;
mod curves;
mod exact;
mod irr;
mod measures;
mod prices;
mod properties;
mod sums;
mod tails;
mod timing;

/// Property tests draw the same cases every time, and leave no files behind.
fn repeatable() -> proptest::test_runner::Config {
    proptest::test_runner::Config {
        cases: 512,
        failure_persistence: None,
        rng_seed: proptest::test_runner::RngSeed::Fixed(2_026),
        ..Default::default()
    }
}
