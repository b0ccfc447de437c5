//! Growth that persists: log growth returns to its mean by a share each year.

use super::ramsey::Ramsey;
use crate::Persistence;
use crate::dd::{Dd, two_prod};

/// ln D(n) = -(rho + eta m) n - eta y_0 phi w_n + eta^2 s^2/2 sum of w_k^2, k from 1 to n, w_k = 1 + ... + phi^(k-1).
///
/// Summed out, that is the closed form with E and V: a shock of year j moves the growth of n - j + 1 years by w_(n-j+1)
/// in all. The closed form itself loses most of its digits where phi is near 1; the sums lose none.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Persistent {
    /// rho + eta m, a year's share of -ln D(n) without the other two.
    steady: Dd,
    /// eta y_0 phi.
    departure: Dd,
    /// eta^2 s^2 / 2.
    caution: Dd,
    phi: f64,
    /// What 1, 2, 4, 8, ... years add up to.
    doubled: Vec<Sums>,
}

/// What some years add up to; two stretches of years make a longer one.
#[derive(Clone, Copy, Debug, PartialEq)]
struct Sums {
    years: f64,
    /// phi^n.
    power: Dd,
    /// w_n.
    weight: Dd,
    /// The sum of w_k.
    sum: Dd,
    /// The sum of w_k^2.
    squares: Dd,
}

impl Sums {
    const NONE: Sums =
        Sums { years: 0.0, power: Dd::ONE, weight: Dd::ZERO, sum: Dd::ZERO, squares: Dd::ZERO };

    fn year(phi: f64) -> Sums {
        Sums { years: 1.0, power: Dd::of(phi), weight: Dd::ONE, sum: Dd::ONE, squares: Dd::ONE }
    }

    /// These years and then those: w_(n+k) = w_n + phi^n w_k.
    fn and(self, then: Sums) -> Sums {
        let carried = self.power * then.sum;
        Sums {
            years: self.years + then.years,
            power: self.power * then.power,
            weight: self.weight + self.power * then.weight,
            sum: self.sum + self.weight * then.years + carried,
            squares: self.squares
                + self.weight * self.weight * then.years
                + self.weight * carried * 2.0
                + self.power * self.power * then.squares,
        }
    }
}

impl Persistent {
    pub(super) fn new(rule: Ramsey, mean: f64, sd: f64, persistence: Persistence) -> Persistent {
        let Persistence { phi, start } = persistence;
        let mut doubled = vec![Sums::year(phi)];
        while doubled.len() < super::years::DOUBLINGS {
            let last = doubled[doubled.len() - 1];
            doubled.push(last.and(last));
        }
        let eta = rule.elasticity();
        Persistent {
            steady: rule.linear(mean),
            departure: two_prod(start, phi) * eta,
            caution: two_prod(eta, sd) * two_prod(eta, sd) * 0.5,
            phi,
            doubled,
        }
    }

    /// log2 D(n).
    pub(super) fn log2(&self, n: u64) -> Dd {
        let held = self.doubled.iter().enumerate().filter(|(power, _)| (n >> power) & 1 == 1);
        let sums = held.fold(Sums::NONE, |sums, (_, &more)| sums.and(more));
        let exponent = self.caution * sums.squares - self.departure * sums.weight - self.steady * sums.years;
        exponent * Dd::LOG2_E
    }

    /// The first year from which the rates of all later years together are within rounding of their limit.
    pub(super) fn settled(&self) -> f64 {
        let weight = 1.0 / (1.0 - self.phi);
        settled(self.phi, self.departure.hi.abs() + 3.0 * self.caution.hi * weight * weight)
    }

    /// The continuous forward rate that the years tend to.
    pub(super) fn last_rate(&self) -> f64 {
        let weight = 1.0 / (1.0 - self.phi);
        self.steady.hi - self.caution.hi * weight * weight
    }

    /// Whether no year's rate is below 0, by bounds on its parts.
    pub(super) fn bounded(&self) -> bool {
        let weight = if self.phi > 0.0 { 1.0 / (1.0 - self.phi) } else { 1.0 };
        self.steady.hi - self.departure.hi.abs() - self.caution.hi * weight * weight >= 0.0
    }
}

/// The first whole year n from which most (|phi|^n + |phi|^(n+1) + ...) is lost in rounding.
pub(crate) fn settled(phi: f64, most: f64) -> f64 {
    const LOST: f64 = 1e-16;
    let (phi, enough) = (phi.abs(), LOST * (1.0 - phi.abs()) / most);
    if phi == 0.0 || enough >= 1.0 { 1.0 } else { (enough.ln() / phi.ln()).ceil().max(1.0) }
}
