//! Gamma discounting: continuous rates that are gamma-distributed.

use crate::dd::{Dd, exp2, log2_1p, log2_1p_quick, two_prod};

/// D(t) = (1 + t s^2/m)^-(m^2/s^2), s above 0.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Gamma {
    mean: Dd,
    /// s^2 / m, in years^-1.
    scale: Dd,
    /// m^2 / s^2.
    shape: Dd,
}

impl Gamma {
    pub(super) fn new(mean: f64, sd: f64) -> Gamma {
        let variance = two_prod(sd, sd);
        Gamma { mean: Dd::of(mean), scale: variance / Dd::of(mean), shape: two_prod(mean, mean) / variance }
    }

    /// The offset at and before which the factor is infinite, -m/s^2.
    pub(super) fn lower(&self) -> f64 {
        -(Dd::ONE / self.scale).hi
    }

    /// Whether 1 + t s^2/m is above 0.
    pub(super) fn defined(&self, t: f64) -> bool {
        (Dd::ONE + self.scale * t).hi > 0.0
    }

    pub(super) fn log2(&self, t: f64) -> Dd {
        -(self.shape * log2_1p(self.scale * t))
    }

    /// D(t) to about 58 bits.
    pub(super) fn factor(&self, t: f64) -> Dd {
        exp2(-(self.shape * log2_1p_quick(self.scale * t)))
    }

    /// m / (1 + t s^2/m).
    pub(super) fn instantaneous(&self, t: f64) -> Dd {
        self.mean / (Dd::ONE + self.scale * t)
    }
}
