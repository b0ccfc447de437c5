//! Real from nominal.
use crate::Result;

/// (1+nominal)/(1+inflation) - 1.
pub fn real_rate(_nominal: f64, _inflation: f64) -> Result<f64> {
    unreachable!()
}
/// (1+real)(1+inflation) - 1.
pub fn nominal_rate(_real: f64, _inflation: f64) -> Result<f64> {
    unreachable!()
}
/// Nominal flows by a price index, in the prices of the index entry `base`.
pub fn real_flows(_flows: &[f64], _index: &[f64], _base: usize) -> Result<Vec<f64>> {
    unreachable!()
}
