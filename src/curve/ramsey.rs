//! The Ramsey rule: rates from time preference, hazard, elasticity and growth.

use super::checks;
use crate::dd::{Dd, log2_1p, two_prod, two_sum};
use crate::{Compounding, Result};

/// Preference, hazard and elasticity, checked.
#[derive(Clone, Copy)]
pub(super) struct Ramsey {
    /// Preference and hazard together, to more digits than a double.
    rho: Dd,
    elasticity: f64,
}

impl Ramsey {
    pub(super) fn new(preference: f64, hazard: f64, elasticity: f64) -> Result<Ramsey> {
        checks::preference(preference)?;
        checks::hazard(hazard)?;
        checks::elasticity(elasticity)?;
        Ok(Ramsey { rho: two_sum(preference, hazard), elasticity })
    }

    pub(super) fn rho(&self) -> f64 {
        self.rho.hi
    }

    /// Preference and hazard together, to more digits than a double.
    pub(super) fn rho_exactly(&self) -> Dd {
        self.rho
    }

    pub(super) fn elasticity(&self) -> f64 {
        self.elasticity
    }

    /// ln of the expected weight of a unit a year later, -eta m + eta^2 s^2/2 for log growth.
    pub(super) fn log_factor(&self, mean: f64, sd: f64) -> Dd {
        let spread = two_prod(self.elasticity, sd);
        spread * spread * 0.5 - two_prod(self.elasticity, mean)
    }

    /// rho + eta g.
    pub(super) fn linear(&self, growth: f64) -> Dd {
        self.rho + two_prod(self.elasticity, growth)
    }

    /// log2 of the factor for one year, -(log2(1 + rho) + eta log2(1 + g)).
    pub(super) fn exact_slope(&self, growth: f64) -> Dd {
        -(log2_1p(self.rho) + log2_1p(Dd::of(growth)) * self.elasticity)
    }

    /// rho + eta g - eta(eta+1)s^2/2, or of log growth rho + eta m - eta^2 s^2/2.
    pub(super) fn uncertain(&self, mean: f64, sd: f64, log: bool) -> Dd {
        let eta = Dd::of(self.elasticity);
        let other = if log { eta } else { two_sum(self.elasticity, 1.0) };
        let half_variance = two_prod(sd, sd) * 0.5;
        self.linear(mean) - eta * other * half_variance
    }
}

/// log2 of the factor for one year at a rate.
pub(super) fn slope(rate: Dd, compounding: Compounding) -> Dd {
    match compounding {
        Compounding::Yearly => -log2_1p(rate),
        Compounding::Continuous => -(rate * Dd::LOG2_E),
    }
}
