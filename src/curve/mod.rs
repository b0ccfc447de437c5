//! The discount curve D(t) and its rates.
use crate::{Result, Spec, Timing};

/// A discount curve, ready to compute.
#[derive(Clone, Debug, PartialEq)]
pub struct Curve {
    spec: Spec,
}

impl Curve {
    /// The spec it was made from.
    pub fn spec(&self) -> &Spec {
        &self.spec
    }
    /// D(t).
    pub fn factor(&self, _t: f64) -> Result<f64> {
        unreachable!()
    }
    /// D(t) of many offsets.
    pub fn factors(&self, _offsets: &[f64], _factors: &mut [f64]) -> Result<()> {
        unreachable!()
    }
    /// The factor of a flow in a year `years` after the base year.
    pub fn timed_factor(&self, _years: f64, _timing: Timing) -> Result<f64> {
        unreachable!()
    }
    /// D(n-1)/D(n) - 1.
    pub fn forward_rate(&self, _n: f64) -> Result<f64> {
        unreachable!()
    }
    /// D(t)^(-1/t) - 1.
    pub fn mean_rate(&self, _t: f64) -> Result<f64> {
        unreachable!()
    }
    /// -ln D(t)/t.
    pub fn mean_rate_continuous(&self, _t: f64) -> Result<f64> {
        unreachable!()
    }
    /// -D'(t)/D(t).
    pub fn instantaneous_rate(&self, _t: f64) -> Result<f64> {
        unreachable!()
    }
    /// Things to say of it: factors that jump at an edge, and the like.
    pub fn warnings(&self) -> Vec<String> {
        Vec::new()
    }
}

impl Spec {
    /// Not yet.
    pub fn curve(&self, _at: &crate::Where) -> Result<Curve> {
        Err(crate::Error::new(crate::ErrorKind::Unsupported, "basis", "curves are not computed yet"))
    }
}
