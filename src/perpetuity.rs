//! The sum to infinity of equal or growing flows under a curve, for tails that go on for ever.

use crate::Curve;
use crate::curve::Parts;
use crate::{Error, ErrorKind, Result, sum};

/// Flows of (1 + growth)^(k every) at offsets start + k every, k = 1, 2, ... without end.
#[derive(Clone, Copy)]
pub(crate) struct Perpetuity {
    pub start: f64,
    pub growth: f64,
    pub every: f64,
}

/// Growth under a gamma curve that falls more slowly than this would take too many terms.
const SLOWEST_FALL: f64 = -1e-4;

/// The most flows that are summed one by one.
pub(crate) const MOST: f64 = 1e6;

impl Perpetuity {
    /// The present value.
    ///
    /// Where the curve's rate is constant in the end, the flows up to its last edge are summed one by one and the
    /// rest is a geometric series; a mixture is the sum of its components' values.
    pub fn value(&self, curve: &Curve) -> Result<f64> {
        if let Some(components) = curve.components() {
            let held = components.iter().filter(|component| component.0 > 0.0);
            let values: Result<Vec<f64>> =
                held.map(|(weight, curve)| Ok(weight * self.value(curve)?)).collect();
            let weights: Vec<f64> = components.iter().map(|component| component.0).collect();
            return Ok(sum(&values?) / sum(&weights));
        }
        let parts = curve.parts();
        match parts {
            Parts::Gamma { mean, sd } if *sd == 0.0 => {
                self.geometric((f64::NEG_INFINITY, *mean), |t| Ok(-t * mean))
            }
            Parts::Gamma { mean, sd } => self.gamma(*mean, *sd),
            Parts::PersistentGrowth { .. } | Parts::GrowthRegimes { .. } => {
                let settled = curve.settled().ok_or_else(unsettled)?;
                self.geometric(settled, |t| Ok(-t * curve.mean_rate_continuous(t)?))
            }
            _ => self.geometric(last_rate(parts)?, |t| Ok(log_factor(parts, t))),
        }
    }

    fn offset(&self, k: f64) -> f64 {
        self.start + k * self.every
    }

    /// The growth to the k-th further flow, as a logarithm.
    fn log_growth(&self, k: f64) -> f64 {
        k * self.every * self.growth.ln_1p()
    }

    /// From the last edge and the continuous rate after it, and ln D(t).
    fn geometric(&self, (edge, rate): (f64, f64), log_factor: impl Fn(f64) -> Result<f64>) -> Result<f64> {
        // Logarithm of the ratio of one flow's value to the next one's.
        let fall = self.every * (rate - self.growth.ln_1p());
        if fall <= 0.0 {
            let message = format!(
                "the flows grow by {}% a year for ever and the curve's last rate is {}%, so their value has no end",
                shown(self.growth),
                shown(rate.exp_m1())
            );
            return Err(diverges(message));
        }
        if (edge - self.start) / self.every > MOST {
            let message =
                format!("the curve's last edge at offset {edge} is too far for a tail to be summed");
            return Err(Error::new(ErrorKind::Unsupported, "tail", message).with_hint("an earlier last edge"));
        }
        let mut values = Vec::new();
        let mut k = 0.0;
        while self.offset(k) <= edge {
            k += 1.0;
            values.push((log_factor(self.offset(k))? + self.log_growth(k)).exp());
        }
        let last = (log_factor(self.offset(k))? + self.log_growth(k)).exp();
        values.push(last / fall.exp_m1());
        Ok(sum(&values))
    }

    /// D(t) = (1 + t/scale)^-shape with shape = mean^2/sd^2 and scale = mean/sd^2.
    fn gamma(&self, mean: f64, sd: f64) -> Result<f64> {
        let shape = (mean / sd).powi(2);
        let scale = mean / (sd * sd);
        let value = |k: f64| (self.log_growth(k) - shape * (self.offset(k) / scale).ln_1p()).exp();
        if self.growth > 0.0 {
            let message = format!(
                "the flows grow by {}% a year for ever and a gamma curve's rate falls to 0, so their value has no end",
                shown(self.growth)
            );
            return Err(diverges(message));
        }
        if self.growth < 0.0 {
            return self.falling(value);
        }
        if shape <= 1.0 {
            let message = format!(
                "the gamma curve's mean {}% does not exceed its standard deviation {}%, so a level flow for ever \
                 has a value without end",
                shown(mean),
                shown(sd)
            );
            return Err(diverges(message));
        }
        // Euler and Maclaurin's formula on the Hurwitz zeta function, from where its terms fall fast.
        let place = |k: f64| (self.offset(k) + scale) / self.every;
        let (mut values, mut so_far, mut k) = (Vec::new(), 0.0, 1.0);
        while place(k) < 2.0 * (shape + 14.0) {
            let term = value(k);
            values.push(term);
            so_far += term;
            k += 1.0;
            if term * place(k) / (shape - 1.0) < 1e-17 * so_far {
                break;
            }
        }
        let (q, first) = (place(k), value(k));
        values.extend([first * q / (shape - 1.0), first / 2.0]);
        let mut rising = shape / q; // shape (shape + 1) ... (shape + 2j - 2) / q^(2j - 1)
        for (j, coefficient) in BERNOULLI.iter().enumerate() {
            values.push(first * coefficient * rising);
            let next = shape + 2.0 * j as f64 + 1.0;
            rising *= next * (next + 1.0) / (q * q);
        }
        Ok(sum(&values))
    }

    /// Flows that fall: one by one until what is left is below rounding.
    fn falling(&self, value: impl Fn(f64) -> f64) -> Result<f64> {
        if self.growth > SLOWEST_FALL {
            let message = format!(
                "under a gamma curve flows that fall by less than {}% a year are not summed for ever",
                shown(-SLOWEST_FALL)
            );
            return Err(Error::new(ErrorKind::Unsupported, "tail", message).with_hint("level, for ever"));
        }
        let rest = 1.0 / -self.log_growth(1.0).exp_m1();
        let (mut values, mut so_far, mut k) = (Vec::new(), 0.0, 1.0);
        loop {
            let term = value(k);
            values.push(term);
            so_far += term;
            k += 1.0;
            if term * rest <= 1e-17 * so_far {
                return Ok(sum(&values));
            }
        }
    }
}

/// B_2j/(2j)! for j from 1.
const BERNOULLI: [f64; 8] = [
    1.0 / 12.0,
    -1.0 / 720.0,
    1.0 / 30_240.0,
    -1.0 / 1_209_600.0,
    1.0 / 47_900_160.0,
    -691.0 / 1_307_674_368_000.0,
    1.0 / 74_724_249_600.0,
    -3617.0 / 10_670_622_842_880_000.0,
];

fn diverges(message: String) -> Error {
    Error::new(ErrorKind::Diverges, "tail", message).with_hint("a tail that ends: to 2300")
}

/// A rate as a percentage to read, not to parse.
fn shown(rate: f64) -> f64 {
    (rate * 1e8).round() / 1e6
}

/// The last edge and the rate after it as ln(1 + r), where there is one for ever.
fn last_rate(parts: &Parts) -> Result<(f64, f64)> {
    let after = |edges: &[f64], rates: &[f64], open: bool| match (open, rates.last()) {
        (true, Some(rate)) => Ok((edges.last().copied().unwrap_or(f64::NEG_INFINITY), rate.ln_1p())),
        _ => Err(ends()),
    };
    match parts {
        Parts::Yearly { rate } | Parts::OneRate { rate, .. } => Ok((f64::NEG_INFINITY, rate.ln_1p())),
        Parts::Continuous { rate } => Ok((f64::NEG_INFINITY, *rate)),
        Parts::Bands { edges, rates, open } | Parts::HorizonSteps { edges, rates, open } => {
            after(edges, rates, *open)
        }
        Parts::HorizonPoints { points } => {
            points.last().map(|&(edge, rate)| (edge, rate.ln_1p())).ok_or_else(ends)
        }
        Parts::RamseyExact { rho, elasticity, edges, growth, open } => {
            let (edge, growth) = after(edges, growth, *open)?;
            Ok((edge, rho.ln_1p() + elasticity * growth))
        }
        Parts::Table(_) => Err(ends()),
        Parts::Gamma { .. }
        | Parts::Mixture(_)
        | Parts::PersistentGrowth { .. }
        | Parts::GrowthRegimes { .. } => unreachable!("summed by their own formulas"),
    }
}

/// Growth in states whose yearly rates never come near to one rate.
fn unsettled() -> Error {
    let message =
        "the yearly rates under this growth in states do not settle, so a tail is not summed for ever";
    Error::new(ErrorKind::Unsupported, "tail", message).with_hint("a tail that ends: to 2300")
}

fn ends() -> Error {
    let message = "the curve ends and has no last rate, so nothing can be valued for ever";
    Error::new(ErrorKind::OutsideDomain, "tail", message)
        .with_hint("a tail that ends within the curve, or a rate for the years after its last edge")
}

/// ln D(t), for the kinds of curve that have a last rate.
fn log_factor(parts: &Parts, t: f64) -> f64 {
    match parts {
        Parts::Yearly { rate } | Parts::OneRate { rate, .. } => -t * rate.ln_1p(),
        Parts::Continuous { rate } => -t * rate,
        Parts::Bands { edges, rates, .. } => -accumulated(edges, t, |band| rates[band].ln_1p()),
        Parts::RamseyExact { rho, elasticity, edges, growth, .. } => {
            -accumulated(edges, t, |band| rho.ln_1p() + elasticity * growth[band].ln_1p())
        }
        Parts::HorizonSteps { edges, rates, .. } => {
            -t * rates[edges.partition_point(|&edge| edge < t)].ln_1p()
        }
        Parts::HorizonPoints { points } => {
            let above = points.partition_point(|point| point.0 < t);
            let rate = match (above.checked_sub(1).map(|below| points[below]), points.get(above)) {
                (Some((t0, r0)), Some(&(t1, r1))) => r0 + (r1 - r0) * (t - t0) / (t1 - t0),
                (Some((_, rate)), None) => rate,
                (None, first) => first.map_or(0.0, |point| point.1),
            };
            -t * rate.ln_1p()
        }
        Parts::Gamma { .. }
        | Parts::Mixture(_)
        | Parts::Table(_)
        | Parts::PersistentGrowth { .. }
        | Parts::GrowthRegimes { .. } => unreachable!("no last rate"),
    }
}

/// The sum over bands of a log rate times the years of (0, t] inside the band.
fn accumulated(edges: &[f64], t: f64, rate: impl Fn(usize) -> f64) -> f64 {
    let mut below = f64::NEG_INFINITY;
    let mut terms = Vec::with_capacity(edges.len() + 1);
    for band in 0..=edges.len() {
        let above = edges.get(band).copied().unwrap_or(f64::INFINITY);
        let years = t.clamp(below, above) - 0.0_f64.clamp(below, above);
        terms.push(if years == 0.0 { 0.0 } else { years * rate(band) });
        below = above;
    }
    sum(&terms)
}
