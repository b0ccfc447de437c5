//! How the logarithm of a curve's factors depends on one parameter: a sum of simple parts, each times a number of years.

use super::Parameter;
use crate::curve::settled;
use crate::dd::{Dd, log2_1p, two_prod};
use crate::{Compounding, Curve, Error, ErrorKind, Parts, Persistence, Result, Spec, Where};

/// One part: scale x ln(1 + p(x)), or scale x p(x), with p(x) = p0 + p1 x + p2 x^2 and p2 at most 0 inside a logarithm.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Part {
    pub log: bool,
    pub scale: f64,
    pub p: [f64; 3],
}

/// What multiplies the parts at an offset.
#[derive(Clone, Debug, PartialEq)]
enum Years {
    /// The offset itself.
    All,
    /// The years in each band.
    Bands(Vec<f64>),
    /// The offset, then the years in each band.
    AllAndBands(Vec<f64>),
    /// The offset, then what persistence adds: the expected departure from mean growth, and the variance.
    Persistent { persistence: Persistence, sd: f64 },
    /// The offset, then -ln D(t) of the curve as it is.
    Curve(Box<Curve>),
}

/// -ln D(t; x) as the sum of parts times years.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Law {
    pub parts: Vec<Part>,
    years: Years,
    curve: Option<Curve>,
}

/// The lowest rate searched.
const LOWEST: f64 = -0.9;
/// Persistence is summed year by year up to so many years.
const MOST_YEARS: f64 = 100_000.0;

fn log(p0: f64, p1: f64, p2: f64) -> Part {
    Part { log: true, scale: 1.0, p: [p0, p1, p2] }
}

fn plain(p0: f64, p1: f64, p2: f64) -> Part {
    Part { log: false, scale: 1.0, p: [p0, p1, p2] }
}

impl Law {
    pub fn of(spec: &Spec, at: &Where, parameter: Parameter) -> Result<Law> {
        if parameter == Parameter::Rate {
            return Ok(Law { parts: vec![log(0.0, 1.0, 0.0)], years: Years::All, curve: None });
        }
        let curve = spec.curve(at)?;
        let (parts, years) = parts_of(spec, &curve, parameter)?;
        Ok(Law { parts, years, curve: Some(curve) })
    }

    /// What multiplies each part at an offset.
    pub fn weights(&self, t: f64) -> Result<Vec<f64>> {
        if let Some(curve) = &self.curve {
            // The curve's own word on offsets it does not cover.
            curve.mean_rate_continuous(t)?;
        }
        Ok(match &self.years {
            Years::All => vec![t],
            Years::Bands(edges) => in_bands(edges, self.parts.len(), t),
            Years::AllAndBands(edges) => [vec![t], in_bands(edges, self.parts.len() - 1, t)].concat(),
            Years::Persistent { persistence, sd } => {
                let (departure, variance) = persistent(*persistence, *sd, t)?;
                vec![t, departure, variance]
            }
            Years::Curve(curve) => vec![t, curve.mean_rate_continuous(t)? * t],
        })
    }

    /// The last edge, and what multiplies each part for one year after it; none where no rate lasts.
    pub fn lasting(&self) -> Option<(f64, Vec<f64>)> {
        let last_only = |count: usize| {
            let mut weights = vec![0.0; count];
            weights[count - 1] = 1.0;
            weights
        };
        let edge = |edges: &[f64]| edges.last().copied().unwrap_or(f64::NEG_INFINITY);
        let open = self.curve.as_ref().is_none_or(|curve| curve.domain().upper == f64::INFINITY);
        // The sums grow by as much every year in the end, within rounding at any elasticity that is searched.
        let persistent = |Persistence { phi, start }: Persistence, sd: f64| {
            let most = Parameter::Elasticity.interval().1;
            let variance = (sd / (1.0 - phi)).powi(2);
            let edge = settled(phi, most * start.abs() + 1.5 * most * most * variance);
            Some((edge, vec![1.0, 0.0, variance]))
        };
        match &self.years {
            _ if !open => None,
            Years::All => Some((f64::NEG_INFINITY, vec![1.0])),
            Years::Bands(edges) => Some((edge(edges), last_only(self.parts.len()))),
            Years::AllAndBands(edges) => {
                let weights = [vec![1.0], last_only(self.parts.len() - 1)].concat();
                Some((edge(edges), weights))
            }
            Years::Persistent { persistence, sd } => persistent(*persistence, *sd),
            Years::Curve(curve) => curve.settled().map(|(edge, rate)| (edge, vec![1.0, rate])),
        }
    }

    /// The part of an interval where every rate is above the lowest searched.
    pub fn clip(&self, interval: (f64, f64)) -> Option<(f64, f64)> {
        let logs = self.parts.iter().filter(|part| part.log && part.scale != 0.0);
        logs.map(|part| part.p).try_fold(interval, |interval, p| at_least(p, LOWEST, interval))
    }

    /// The part of an interval where the last rate, in continuous compounding, exceeds another.
    pub fn clip_lasting(&self, lasting: &[f64], rate: f64, interval: (f64, f64)) -> Option<(f64, f64)> {
        // Parts that are no logarithm add up to one polynomial.
        let (mut plain, mut moving) = ([-rate, 0.0, 0.0], None);
        for (part, &weight) in self.parts.iter().zip(lasting).filter(|(_, weight)| **weight != 0.0) {
            match (part.log, part.moves()) {
                (true, true) => moving = Some((part, weight * part.scale)),
                (true, false) => plain[0] += weight * part.value(interval.0),
                (false, _) => {
                    for (sum, coefficient) in plain.iter_mut().zip(part.p) {
                        *sum += weight * part.scale * coefficient;
                    }
                }
            }
        }
        let (low, high) = match moving {
            Some((part, weight)) => at_least(part.p, (-plain[0] / weight).exp_m1(), interval)?,
            None if plain[1] == 0.0 && plain[2] == 0.0 => return (plain[0] > 0.0).then_some(interval),
            None => at_least(plain, 0.0, interval)?,
        };
        // A little inside, as a value without end lies on the bound.
        let inside =
            |clipped: f64, asked: f64, step: f64| if clipped == asked { asked } else { clipped + step };
        let (low, high) = (inside(low, interval.0, 1e-6), inside(high, interval.1, -1e-6));
        (low < high).then_some((low, high))
    }
}

/// The parts of -ln D and the years that go with them.
fn parts_of(spec: &Spec, curve: &Curve, parameter: Parameter) -> Result<(Vec<Part>, Years)> {
    let edges = || match curve.parts() {
        Parts::Bands { edges, .. } | Parts::RamseyExact { edges, .. } => edges.clone(),
        _ => Vec::new(),
    };
    match spec {
        Spec::Ramsey { preference, hazard, elasticity, growth, exact: false, compounding } => {
            let (rho, eta) = (preference + hazard, *elasticity);
            let first = growth.first().map_or(0.0, |band| band.value);
            let make = if *compounding == Compounding::Yearly { log } else { plain };
            let part = |g: f64| match parameter {
                Parameter::Preference => make(hazard + eta * g, 1.0, 0.0),
                Parameter::Elasticity => make(rho, g, 0.0),
                _ => make(rho + eta * (g - first), eta, 0.0),
            };
            let parts: Vec<Part> = growth.iter().map(|band| part(band.value)).collect();
            let years =
                if parts.len() == 1 && edges().is_empty() { Years::All } else { Years::Bands(edges()) };
            Ok((parts, years))
        }
        Spec::Ramsey { preference, hazard, elasticity, growth, exact: true, .. } => {
            let (rho, eta) = (preference + hazard, *elasticity);
            let first = growth.first().map_or(0.0, |band| band.value);
            let time =
                if parameter == Parameter::Preference { log(*hazard, 1.0, 0.0) } else { log(rho, 0.0, 0.0) };
            let part = |g: f64| match parameter {
                Parameter::Preference => plain(eta * g.ln_1p(), 0.0, 0.0),
                Parameter::Elasticity => plain(0.0, g.ln_1p(), 0.0),
                _ => Part { scale: eta, ..log(g - first, 1.0, 0.0) },
            };
            let parts = std::iter::once(time).chain(growth.iter().map(|band| part(band.value)));
            Ok((parts.collect(), Years::AllAndBands(edges())))
        }
        Spec::UncertainGrowth {
            preference,
            hazard,
            elasticity,
            mean,
            sd,
            log: logs,
            persistence,
            compounding,
        } => {
            let (rho, eta, half) = (preference + hazard, *elasticity, sd * sd / 2.0);
            if let Some(persistence) = persistence {
                let (steady, departure, caution) = match parameter {
                    Parameter::Preference => {
                        ((hazard + eta * mean, 1.0), (eta, 0.0), (-eta * eta / 2.0, 0.0))
                    }
                    Parameter::Elasticity => ((rho, *mean), (0.0, 1.0), (0.0, -0.5)),
                    _ => ((rho, eta), (eta, 0.0), (-eta * eta / 2.0, 0.0)),
                };
                let parts = vec![
                    plain(steady.0, steady.1, 0.0),
                    plain(departure.0, departure.1, 0.0),
                    plain(caution.0, 0.0, caution.1),
                ];
                return Ok((parts, Years::Persistent { persistence: *persistence, sd: *sd }));
            }
            // Of log growth the caution is eta^2 s^2/2, of growth eta (eta + 1) s^2/2.
            let more = if *logs { 0.0 } else { half };
            let caution = eta * eta * half + eta * more;
            let make = if *logs || *compounding == Compounding::Continuous { plain } else { log };
            let part = match parameter {
                Parameter::Preference => make(hazard + eta * mean - caution, 1.0, 0.0),
                Parameter::Elasticity => make(rho, mean - more, -half),
                _ => make(rho - caution, eta, 0.0),
            };
            Ok((vec![part], Years::All))
        }
        Spec::GrowthRegimes { preference, .. } if parameter == Parameter::Preference => {
            let parts = vec![plain(-preference, 1.0, 0.0), plain(1.0, 0.0, 0.0)];
            Ok((parts, Years::Curve(Box::new(curve.clone()))))
        }
        // Means that move together by d turn every D(n) into D(n) exp(-eta d n).
        Spec::GrowthRegimes { elasticity, states, .. } if parameter == Parameter::Growth => {
            let first = states.first().map_or(0.0, |state| state.mean);
            let parts = vec![plain(-elasticity * first, *elasticity, 0.0), plain(1.0, 0.0, 0.0)];
            Ok((parts, Years::Curve(Box::new(curve.clone()))))
        }
        _ => {
            let message = format!("the basis is not stated by {parameter}");
            Err(Error::new(ErrorKind::Unsupported, "parameter", message)
                .with_hint("a line with preference, elasticity and growth"))
        }
    }
}

/// The years of (0, t] in each band; negative before the base.
fn in_bands(edges: &[f64], bands: usize, t: f64) -> Vec<f64> {
    let mut below = f64::NEG_INFINITY;
    (0..bands)
        .map(|band| {
            let above = edges.get(band).copied().filter(|_| band + 1 < bands).unwrap_or(f64::INFINITY);
            let years = t.clamp(below, above) - 0.0_f64.clamp(below, above);
            below = above;
            years
        })
        .collect()
}

/// An offset too far for growth that is followed year by year.
pub(super) fn out_of_reach(t: f64, most: f64) -> Error {
    let message = format!("offset {t} is too far for growth that persists or switches, allowed up to {most}");
    Error::new(ErrorKind::Unsupported, "offsets", message).with_hint("a nearer last flow")
}

/// The sums y_0 phi w_n and s^2 (w_1^2 + ... + w_n^2), w_n = 1 + phi + ... + phi^(n-1), linear within a year.
fn persistent(Persistence { phi, start }: Persistence, sd: f64, t: f64) -> Result<(f64, f64)> {
    if t > MOST_YEARS {
        return Err(out_of_reach(t, MOST_YEARS));
    }
    let (mut weight, mut departure, mut variance) = (0.0, 0.0, 0.0);
    let mut years = 0.0;
    while years < t {
        let share = (t - years).min(1.0);
        let next = 1.0 + phi * weight;
        departure += share * start * phi * (next - weight);
        variance += share * sd * sd * next * next;
        weight = next;
        years += 1.0;
    }
    Ok((departure, variance))
}

/// The part of an interval where p(x) is at least a value; p2 is at most 0.
fn at_least(p: [f64; 3], value: f64, (low, high): (f64, f64)) -> Option<(f64, f64)> {
    let allowed = match solve(p, value).as_slice() {
        [] if p[2] == 0.0 && p[1] == 0.0 && p[0] >= value => (low, high),
        [] => return None,
        [x] if p[1] > 0.0 => (*x, f64::INFINITY),
        [x] => (f64::NEG_INFINITY, *x),
        [a, b, ..] => (*a, *b),
    };
    let (low, high) = (low.max(allowed.0), high.min(allowed.1));
    (low < high).then_some((low, high))
}

/// Where p(x) has a value, rising.
fn solve([p0, p1, p2]: [f64; 3], value: f64) -> Vec<f64> {
    let rest = p0 - value;
    if p2 == 0.0 {
        return if p1 == 0.0 { Vec::new() } else { vec![-rest / p1 + 0.0] };
    }
    let discriminant = p1 * p1 - 4.0 * p2 * rest;
    if discriminant < 0.0 {
        return Vec::new();
    }
    let half = -0.5 * (p1 + discriminant.sqrt().copysign(p1));
    let (a, b) = (half / p2, if half == 0.0 { 0.0 } else { rest / half });
    vec![a.min(b), a.max(b)]
}

impl Part {
    pub fn moves(&self) -> bool {
        self.scale != 0.0 && (self.p[1] != 0.0 || self.p[2] != 0.0)
    }

    fn polynomial(&self, x: f64) -> f64 {
        self.p[0] + x * (self.p[1] + x * self.p[2])
    }

    fn value(&self, x: f64) -> f64 {
        let p = self.polynomial(x);
        self.scale * if self.log { p.ln_1p() } else { p }
    }

    /// The part at x to about 100 bits, as a logarithm to base 2.
    pub fn log2(&self, x: f64) -> Dd {
        let p = Dd::of(self.p[0]) + two_prod(self.p[1], x) + two_prod(x, x) * self.p[2];
        (if self.log { log2_1p(p) } else { p * Dd::LOG2_E }) * self.scale
    }

    /// The coefficients of the Taylor series around x from the first order on, and what (u1, u2) make of it: ln(1 + u1 d +
    /// u2 d^2), or u1 d + u2 d^2.
    pub fn series<const N: usize>(&self, x: f64) -> ([f64; N], [f64; 2]) {
        let mut u = [self.p[1] + 2.0 * self.p[2] * x, self.p[2]];
        let mut series = [0.0; N];
        if !self.log {
            for order in 1..N.min(3) {
                series[order] = self.scale * u[order - 1];
            }
            return (series, u);
        }
        let at = 1.0 + self.polynomial(x);
        u = u.map(|coefficient| coefficient / at);
        for n in 1..N {
            let mut total = if n <= 2 { n as f64 * u[n - 1] } else { 0.0 };
            for j in n.saturating_sub(2).max(1)..n {
                total -= j as f64 * series[j] * u[n - j - 1];
            }
            series[n] = total / n as f64;
        }
        (series.map(|coefficient| coefficient * self.scale), u)
    }

    /// A bound on the sum of the absolute values of the series' terms at a distance; infinite where it does not converge.
    pub fn majorant(&self, u: [f64; 2], distance: f64) -> f64 {
        let sum = (u[0].abs() + u[1].abs() * distance) * distance;
        let bound = match (self.log, sum < 1.0) {
            (false, _) => sum,
            (true, true) => -(-sum).ln_1p(),
            (true, false) => f64::INFINITY,
        };
        if self.scale == 0.0 || sum == 0.0 { 0.0 } else { self.scale.abs() * bound }
    }

    /// The values that p takes on an interval.
    pub fn image(&self, (low, high): (f64, f64)) -> (f64, f64) {
        let vertex = -self.p[1] / (2.0 * self.p[2]);
        let points = [low, high, if vertex > low && vertex < high { vertex } else { low }];
        let values = points.map(|x| self.polynomial(x));
        (
            values.iter().copied().fold(f64::INFINITY, f64::min),
            values.iter().copied().fold(f64::MIN, f64::max),
        )
    }

    /// Where p has a value.
    pub fn inverse(&self, value: f64) -> Vec<f64> {
        solve(self.p, value)
    }

    /// Where p lies between two values.
    pub fn inverses(&self, (low, high): (f64, f64)) -> Vec<(f64, f64)> {
        let (a, b) = (solve(self.p, low), solve(self.p, high));
        match (a.as_slice(), b.as_slice()) {
            ([x], [y]) => vec![(x.min(*y), x.max(*y))],
            ([x0, x1], [y0, y1]) => vec![(*x0, *y0), (*y1, *x1)],
            // The vertex lies between the two.
            ([x0, x1], []) => vec![(*x0, *x1)],
            _ => Vec::new(),
        }
    }
}
