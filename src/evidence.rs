//! Where the parts of a rate come from.
use crate::Result;

/// Stub.
pub fn ramsey_rate(_rho: f64, _eta: f64, _g: f64) -> Result<f64> {
    unreachable!()
}
/// Stub.
pub fn equity_weight(_income: f64, _reference: f64, _elasticity: f64) -> Result<f64> {
    unreachable!()
}
/// Stub.
pub fn elasticity_from_taxes(_marginal: f64, _average: f64) -> Result<f64> {
    unreachable!()
}
