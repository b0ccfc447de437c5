//! Factors that are exponentials of smooth functions: exp(-(years . parts(x))).

use super::flows::Row;
use super::law::Part;
use super::series::{Around, CIRCLES, Factors, TERMS, exponential, times};
use crate::dd::Dd;

/// A bound on the relative error of a coefficient of a series, with room to spare.
const SERIES_ERROR: f64 = 256.0 * f64::EPSILON;

/// The parts, and by row what multiplies them.
pub(super) struct Exponents {
    parts: Vec<Part>,
    years: Vec<Vec<f64>>,
}

impl Exponents {
    /// The flows of rows, and their factors.
    pub fn of(parts: &[Part], mut rows: Vec<Row>) -> (Vec<f64>, Exponents) {
        rows.retain(|row| row.0 != 0.0);
        let (flows, years) = rows.into_iter().unzip();
        (flows, Exponents { parts: parts.to_vec(), years })
    }
}

impl Factors for Exponents {
    fn log2(&self, x: f64) -> Vec<(Dd, f64)> {
        let parts: Vec<Dd> = self.parts.iter().map(|part| part.log2(x)).collect();
        let row = |years: &Vec<f64>| {
            let (mut exponent, mut size) = (Dd::ZERO, 0.0);
            for (part, &years) in parts.iter().zip(years) {
                exponent = exponent - *part * years;
                size += (part.hi * years).abs();
            }
            (exponent, self.parts.len() as f64 * (16.0 + size))
        };
        self.years.iter().map(row).collect()
    }

    fn around(&self, x: f64, h: f64) -> Vec<Around> {
        let series: Vec<([f64; TERMS], [f64; 2])> = self.parts.iter().map(|part| part.series(x)).collect();
        let circles: Vec<[f64; CIRCLES]> = self
            .parts
            .iter()
            .zip(&series)
            .map(|(part, (_, u))| std::array::from_fn(|circle| part.majorant(*u, times(circle) * h)))
            .collect();
        let row = |years: &Vec<f64>| {
            let (mut exponent, mut bound) = ([0.0; TERMS], [0.0; TERMS]);
            let mut bounds = [0.0; CIRCLES];
            for ((coefficients, _), (circles, &years)) in series.iter().zip(circles.iter().zip(years)) {
                for n in 1..TERMS {
                    exponent[n] -= years * coefficients[n];
                    bound[n] += (years * coefficients[n]).abs();
                }
                for (sum, circle) in bounds.iter_mut().zip(circles) {
                    *sum += if years == 0.0 { 0.0 } else { years.abs() * circle };
                }
            }
            Around {
                series: exponential(&exponent),
                bound: exponential(&bound),
                rounding: SERIES_ERROR,
                circles: bounds,
            }
        };
        self.years.iter().map(row).collect()
    }
}
