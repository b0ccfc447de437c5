//! Every internal rate of return in an interval.
use crate::Result;

/// What the search found.
#[derive(Clone, Debug, PartialEq)]
pub struct IrrSearch {
    /// Every rate found, rising.
    pub rates: Vec<f64>,
    /// The interval searched.
    pub interval: (f64, f64),
}

/// All rates r in `interval` at which sum flows (1+r)^-t is zero.
pub fn internal_rates(_offsets: &[f64], _flows: &[f64], _interval: (f64, f64)) -> Result<IrrSearch> {
    unreachable!()
}
