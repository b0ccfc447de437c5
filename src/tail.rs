//! What follows the last year of a stream.
use crate::{Curve, Result};

/// A stream that goes on after its last year.
#[derive(Clone, Debug, PartialEq)]
pub struct Tail {
    /// Growth of each further flow over the one before, a fraction per year.
    pub growth: f64,
    /// A flow every so many years.
    pub every: u32,
    /// The last offset or calendar year; none is for ever.
    pub to: Option<i32>,
}

impl Tail {
    /// "for ever", "growing 1%, for ever", "every 25 years, to 2300".
    pub fn parse(_text: &str) -> Result<Self> {
        unreachable!()
    }
    /// PV of what follows `last_flow` at offset `last_offset`.
    pub fn present_value(
        &self,
        _curve: &Curve,
        _last_offset: f64,
        _last_flow: f64,
        _base_year: Option<i32>,
    ) -> Result<f64> {
        unreachable!()
    }
}
