//! A sum of flows times exponentials of smooth functions, bounded on pieces of an interval by power series.

use std::f64::consts::LN_2;

use super::flows::Row;
use super::law::{Law, Part};
use crate::dd::{Dd, exp2_m1};
use crate::roots::{AtMost, Crossing};
use crate::{ExactSum, Result};

/// Terms of a series, the constant one included.
const TERMS: usize = 9;

/// A bound on the relative error of one step of double-double arithmetic here, with room to spare.
const STEP_ERROR: f64 = 1.0 / (1u128 << 90) as f64;

/// A bound on the relative error of a coefficient of a series, with room to spare.
const SERIES_ERROR: f64 = 256.0 * f64::EPSILON;

/// The circles on which a remainder is bounded: 2, 4, 8, ... times as wide as the piece. For each row the best counts.
const CIRCLES: usize = 32;

fn times(circle: usize) -> f64 {
    (1u64 << (circle + 1)) as f64
}

/// The sum over rows of flow x exp(-(years . parts(x))).
pub(super) struct Exponents {
    parts: Vec<Part>,
    /// The largest flow near 1, none 0.
    rows: Vec<Row>,
}

/// A row at one x.
struct Term {
    /// flow x exp(-...), divided by a factor common to all rows.
    w: Dd,
    /// A bound on the error of w.
    error: f64,
}

impl Exponents {
    /// None where all flows have one sign, so that no value of x gives zero.
    pub fn new(law: &Law, mut rows: Vec<Row>) -> Result<Option<Self>> {
        rows.retain(|row| row.0 != 0.0);
        if rows.is_empty() {
            return Err(super::no_flows());
        }
        if rows.iter().all(|row| row.0 > 0.0) || rows.iter().all(|row| row.0 < 0.0) {
            return Ok(None);
        }
        // A power of two, so that scaling is exact.
        let largest = rows.iter().fold(f64::MIN_POSITIVE, |most, row| most.max(row.0.abs()));
        let scale = 2f64.powi(-largest.log2().floor().clamp(-1000.0, 1000.0) as i32);
        rows.iter_mut().for_each(|row| row.0 *= scale);
        Ok(Some(Exponents { parts: law.parts.clone(), rows }))
    }

    fn terms(&self, x: f64) -> Vec<Term> {
        let parts: Vec<Dd> = self.parts.iter().map(|part| part.log2(x)).collect();
        let exponents = self.rows.iter().map(|(flow, years)| {
            let (mut exponent, mut size) = (Dd::ZERO, 0.0);
            for (part, &years) in parts.iter().zip(years) {
                exponent = exponent - *part * years;
                size += (part.hi * years).abs();
            }
            (*flow, exponent, size)
        });
        let exponents: Vec<(f64, Dd, f64)> = exponents.collect();
        let largest = exponents.iter().max_by(|a, b| {
            let size = |(flow, exponent, _): &(f64, Dd, f64)| flow.abs().log2() + exponent.hi;
            size(a).total_cmp(&size(b))
        });
        let (origin, at) = largest.map_or((Dd::ZERO, 0.0), |(_, exponent, size)| (*exponent, *size));
        let term = |(flow, exponent, size): (f64, Dd, f64)| {
            let w = (exp2_m1(exponent - origin) + Dd::ONE) * flow;
            let steps = self.parts.len() as f64 * (16.0 + size + at);
            Term { w, error: w.hi.abs() * STEP_ERROR * steps }
        };
        exponents.into_iter().map(term).collect()
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
        let series: Vec<([f64; TERMS], [f64; 2])> = self.parts.iter().map(|part| part.series(x)).collect();
        let around: Vec<[f64; CIRCLES]> = self
            .parts
            .iter()
            .zip(&series)
            .map(|(part, (_, u))| std::array::from_fn(|circle| part.majorant(*u, times(circle) * h)))
            .collect();
        let mut coefficients = [(0.0, 0.0); TERMS];
        coefficients[0] = Self::sum(&terms);
        let mut remainders = [0.0; 2];
        for (term, (_, years)) in terms.iter().zip(&self.rows) {
            let w = term.w.hi;
            if w == 0.0 {
                continue;
            }
            let (mut exponent, mut bound) = ([0.0; TERMS], [0.0; TERMS]);
            let mut circles = [0.0; CIRCLES];
            for ((coefficients, _), (around, &years)) in series.iter().zip(around.iter().zip(years)) {
                for n in 1..TERMS {
                    exponent[n] -= years * coefficients[n];
                    bound[n] += (years * coefficients[n]).abs();
                }
                for (circle, around) in circles.iter_mut().zip(around) {
                    *circle += if years == 0.0 { 0.0 } else { years.abs() * around };
                }
            }
            let (exact, bound) = (exponential(&exponent), exponential(&bound));
            for n in 1..TERMS {
                coefficients[n].0 += w * exact[n];
                coefficients[n].1 += w.abs() * bound[n] * SERIES_ERROR;
            }
            // The sum on a circle, over its width to the power TERMS.
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
fn exponential(series: &[f64; TERMS]) -> [f64; TERMS] {
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

impl Crossing for Exponents {
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
