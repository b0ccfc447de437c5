//! A sum of flows times factors that are smooth in x, bounded on pieces of an interval by power series.

use std::f64::consts::LN_2;

use crate::dd::{Dd, exp2_m1};
use crate::roots::{AtMost, Crossing};
use crate::{ExactSum, Result};

/// Terms of a series, the constant one included.
pub(super) const TERMS: usize = 9;

/// The coefficients of a power series.
pub(super) type Series = [f64; TERMS];

/// A bound on the relative error of one step of double-double arithmetic here, with room to spare.
const STEP_ERROR: f64 = 1.0 / (1u128 << 90) as f64;

/// The circles on which a remainder is bounded: 2, 4, 8, ... times as wide as the piece. For each row the best counts.
pub(super) const CIRCLES: usize = 32;

pub(super) fn times(circle: usize) -> f64 {
    (1u64 << (circle + 1)) as f64
}

/// How the factor of each row depends on x.
pub(super) trait Factors {
    /// The logarithm of each factor at x, to base 2, and how many steps of arithmetic it took.
    fn log2(&self, x: f64) -> Vec<(Dd, f64)>;

    /// Each factor around x, divided by what it is at x; h is the width of the piece.
    fn around(&self, x: f64, h: f64) -> Vec<Around>;
}

/// One factor around a point, divided by what it is there.
pub(super) struct Around {
    /// Its power series, from 1 on.
    pub series: Series,
    /// Bounds on the absolute values of what the coefficients were summed from.
    pub bound: Series,
    /// A bound on the errors of the coefficients, relative to those.
    pub rounding: f64,
    /// The logarithm of a bound on it in each circle.
    pub circles: [f64; CIRCLES],
}

/// The sum over rows of flow x factor.
pub(super) struct Sum<F> {
    /// The largest near 1.
    flows: Vec<f64>,
    factors: F,
}

/// A row at one x.
struct Term {
    /// flow x factor, divided by a factor common to all rows.
    w: Dd,
    /// A bound on the error of w.
    error: f64,
}

impl<F: Factors> Sum<F> {
    /// None where all flows have one sign, so that no value of x gives zero.
    pub fn new(mut flows: Vec<f64>, factors: F) -> Result<Option<Self>> {
        if flows.iter().all(|flow| *flow == 0.0) {
            return Err(super::no_flows());
        }
        if flows.iter().all(|flow| *flow >= 0.0) || flows.iter().all(|flow| *flow <= 0.0) {
            return Ok(None);
        }
        // A power of two, so that scaling is exact.
        let largest = flows.iter().fold(f64::MIN_POSITIVE, |most, flow| most.max(flow.abs()));
        let scale = 2f64.powi(-largest.log2().floor().clamp(-1000.0, 1000.0) as i32);
        flows.iter_mut().for_each(|flow| *flow *= scale);
        Ok(Some(Sum { flows, factors }))
    }

    fn terms(&self, x: f64) -> Vec<Term> {
        let logs = self.factors.log2(x);
        let rows = || self.flows.iter().zip(&logs);
        let size = |(flow, (log, _)): &(&f64, &(Dd, f64))| flow.abs().log2() + log.hi;
        let largest = rows().max_by(|a, b| size(a).total_cmp(&size(b)));
        let (origin, at) = largest.map_or((Dd::ZERO, 0.0), |(_, (log, steps))| (*log, *steps));
        let term = |(flow, (log, steps)): (&f64, &(Dd, f64))| {
            let w = (exp2_m1(*log - origin) + Dd::ONE) * *flow;
            Term { w, error: w.hi.abs() * STEP_ERROR * (steps + at) }
        };
        rows().map(term).collect()
    }

    fn sum(terms: &[Term]) -> (f64, f64) {
        let mut exact = ExactSum::new();
        for term in terms {
            exact.add(term.w.hi);
            exact.add(term.w.lo);
        }
        (exact.total(), terms.iter().map(|term| term.error).sum())
    }

    /// Coefficients of the sum as a power series around x, with bounds on their errors, and a bound on the remainders of
    /// the sum and of its slope within h.
    fn expansion(&self, x: f64, h: f64) -> ([(f64, f64); TERMS], [f64; 2]) {
        let terms = self.terms(x);
        let mut coefficients = [(0.0, 0.0); TERMS];
        coefficients[0] = Self::sum(&terms);
        let mut remainders = [0.0; 2];
        for (term, around) in terms.iter().zip(self.factors.around(x, h)) {
            let w = term.w.hi;
            if w == 0.0 {
                continue;
            }
            let series = around.series.iter().zip(&around.bound);
            for ((sum, error), (coefficient, bound)) in coefficients.iter_mut().zip(series).skip(1) {
                *sum += w * coefficient;
                *error += w.abs() * bound * around.rounding;
            }
            // The sum on a circle, over its width to the power TERMS.
            let circles = &around.circles;
            let worth = |circle: usize| circles[circle] - (circle + 1) as f64 * TERMS as f64 * LN_2;
            let best = (0..CIRCLES).min_by(|&a, &b| worth(a).total_cmp(&worth(b))).unwrap_or(0);
            for (slope, remainder) in remainders.iter_mut().enumerate() {
                *remainder += w.abs() * tail(times(best), slope) * circles[best].exp();
            }
        }
        let slope = remainders[1] / h;
        (coefficients, [remainders[0] * (1.0 + 1e-12), slope * (1.0 + 1e-12)])
    }
}

/// The coefficients of exp(a series without a constant term).
pub(super) fn exponential(series: &Series) -> Series {
    let mut result = [0.0; TERMS];
    result[0] = 1.0;
    for n in 1..TERMS {
        let sum: f64 = (1..=n).map(|j| j as f64 * series[j] * result[n - j]).sum();
        result[n] = sum / n as f64;
    }
    result
}

/// What the terms beyond the last add at most, for a sum bounded by 1 on a circle so many times wider: the sum of q^n from
/// TERMS on, or for its slope (times the width) of n q^n.
fn tail(times: f64, slope: usize) -> f64 {
    let q = 1.0 / times;
    let first = q.powi(TERMS as i32);
    if slope == 0 { first / (1.0 - q) } else { first * (TERMS as f64 / (1.0 - q) + q / (1.0 - q).powi(2)) }
}

impl<F: Factors> Crossing for Sum<F> {
    fn value(&self, x: f64) -> (f64, f64) {
        Self::sum(&self.terms(x))
    }

    fn at_most(&self, low: f64, high: f64) -> AtMost {
        let middle = low + 0.5 * (high - low);
        let h = (high - middle).max(middle - low) * (1.0 + 1e-12) + f64::MIN_POSITIVE;
        let (coefficients, remainders) = self.expansion(middle, h);
        // Whether the sum (from 0) or its slope (from 1) has no zero within h.
        let keeps_sign = |from: usize| {
            let (value, mut bound) = coefficients[from];
            let mut power = 1.0;
            for (n, (coefficient, error)) in coefficients.iter().enumerate().skip(from + 1) {
                power *= h;
                bound += power * (coefficient.abs() + error) * if from == 0 { 1.0 } else { n as f64 };
            }
            value.abs() > bound * (1.0 + 1e-12) + remainders[from]
        };
        if keeps_sign(1) {
            AtMost::One
        } else if keeps_sign(0) {
            AtMost::None
        } else {
            AtMost::Several
        }
    }

    fn size(&self, x: f64) -> f64 {
        1.0 + x.abs()
    }

    // The series are in single doubles.
    const FINEST: f64 = 1e-13;
}
