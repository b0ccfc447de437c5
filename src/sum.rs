//! Sums that do not depend on the order of their terms.

/// Exact accumulator.
#[derive(Clone, Debug, Default)]
pub struct ExactSum {}

/// The correctly rounded sum.
pub fn sum(_terms: &[f64]) -> f64 {
    unreachable!()
}
/// The correctly rounded sum of products.
pub fn dot(_a: &[f64], _b: &[f64]) -> f64 {
    unreachable!()
}
