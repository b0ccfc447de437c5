//! Mixtures: the weighted mean of the factors of other curves.

use super::{Curve, Domain};
use crate::dd::{Dd, exp2_m1, log2_1p, two_prod};
use crate::{Error, ErrorKind, Result};

/// How far the weights may miss a sum of 1.
const TOLERANCE: f64 = 1e-12;

/// D(t) = sum of w_i D_i(t) / sum of w_i.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Mixture {
    components: Vec<(f64, Curve)>,
    total: Dd,
}

impl Mixture {
    pub(super) fn new(components: Vec<(f64, Curve)>) -> Result<Mixture> {
        let refuse = |message: String| Error::new(ErrorKind::Weights, "weights", message);
        if components.is_empty() {
            return Err(refuse("the mixture has no component".into()));
        }
        for (index, &(weight, _)) in components.iter().enumerate() {
            if !weight.is_finite() || weight < 0.0 {
                return Err(refuse(format!("the weight is {weight}, allowed 0 to 1")).with_index(index));
            }
        }
        let total = components.iter().fold(Dd::ZERO, |sum, &(weight, _)| sum + Dd::of(weight));
        if ((total - Dd::ONE).hi).abs() > TOLERANCE {
            let error = refuse(format!("the weights sum to {}, not 1", total.hi));
            return Err(error.with_hint(format!("each weight divided by {}", total.hi)));
        }
        Ok(Mixture { components, total })
    }

    pub(super) fn components(&self) -> &[(f64, Curve)] {
        &self.components
    }

    pub(super) fn domain(&self) -> Domain {
        self.components.iter().fold(Domain::ALL, |domain, (_, curve)| domain.and(curve.domain()))
    }

    /// The factor, from the components' factors before they are rounded.
    pub(super) fn factor(&self, t: f64) -> Dd {
        let weighted = self.components.iter().map(|(weight, curve)| {
            let factor = curve.form.factor(t);
            let product = two_prod(*weight, factor.hi);
            Dd { hi: product.hi, lo: product.lo + weight * factor.lo }
        });
        self.shared(weighted.fold(Dd::ZERO, |sum, term| sum + term))
    }

    /// A weighted sum over the sum of the weights, which mostly is 1.
    fn shared(&self, sum: Dd) -> Dd {
        if self.total == Dd::ONE { sum } else { sum / self.total }
    }

    pub(super) fn log2(&self, t: f64) -> Dd {
        let logs: Vec<Dd> = self.components.iter().map(|(_, curve)| curve.form.log2(t)).collect();
        let largest = largest(&logs);
        // Near t = 0 every logarithm is small, and only differences from 0 keep their relative accuracy; far out
        // the factors would underflow, and only differences from the largest do not.
        let from = if logs.iter().all(|log| log.hi.abs() < 1.0) { Dd::ZERO } else { largest };
        let excess = self.mean(|k| exp2_m1(logs[k] - from));
        from + log2_1p(excess)
    }

    /// The mean of the components' rates, weighted by their shares in the factor.
    pub(super) fn instantaneous(&self, t: f64) -> Dd {
        let logs: Vec<Dd> = self.components.iter().map(|(_, curve)| curve.form.log2(t)).collect();
        let largest = largest(&logs);
        let share: Vec<Dd> = logs.iter().map(|&log| exp2_m1(log - largest) + Dd::ONE).collect();
        self.mean(|k| share[k] * self.components[k].1.form.instantaneous(t)) / self.mean(|k| share[k])
    }

    pub(super) fn initial(&self) -> Dd {
        self.mean(|k| self.components[k].1.form.initial())
    }

    fn mean(&self, value: impl Fn(usize) -> Dd) -> Dd {
        let sum = (0..self.components.len()).fold(Dd::ZERO, |sum, k| sum + value(k) * self.components[k].0);
        self.shared(sum)
    }
}

fn largest(logs: &[Dd]) -> Dd {
    logs.iter().copied().fold(logs[0], |best, log| if log.hi > best.hi { log } else { best })
}
