//! Factors under growth in states, as the elasticity moves: sums over paths of states, walked year by year.

use std::f64::consts::FRAC_PI_2;

use super::law::out_of_reach;
use super::series::{Around, CIRCLES, Factors, Series, TERMS, exponential, times};
use crate::dd::{Dd, exp2_m1, log2, two_prod, two_sum};
use crate::{Curve, Error, ErrorKind, GrowthState, OptionFlows, Result, Spec};

/// Growth is walked year by year up to so many years.
const MOST_YEARS: f64 = 10_000.0;

/// Beyond this a factor of one year is no longer bounded: its power would overflow.
const LARGE: f64 = 400.0;

/// More than the rounding of a bound's logarithm.
const SLACK: f64 = 1e-9;

/// D(n) = exp(-rho n) pi' (P M)^n 1, M = diag(exp(-x m_j + x^2 s_j^2/2)) with x the elasticity; log-linear between years.
pub(super) struct States {
    rho: Dd,
    states: Vec<GrowthState>,
    /// By state, the chances of passing from it to each state.
    transition: Vec<Vec<Dd>>,
    start: Vec<Dd>,
    /// By flow, whole years and the share of the next.
    offsets: Vec<(usize, f64)>,
    years: usize,
}

/// What a walk carries from state to state.
trait Carried: Copy {
    const NOTHING: Self;
    fn of(chance: Dd) -> Self;
    fn plus(self, other: Self) -> Self;
    fn times(self, other: &Self) -> Self;
    fn weighed(self, chance: Dd) -> Self;
    /// What it is scaled by.
    fn size(&self) -> f64;
    fn scaled(self, power: i64) -> Self;
}

impl Carried for Dd {
    const NOTHING: Dd = Dd::ZERO;
    fn of(chance: Dd) -> Dd {
        chance
    }
    fn plus(self, other: Dd) -> Dd {
        self + other
    }
    fn times(self, other: &Dd) -> Dd {
        self * *other
    }
    fn weighed(self, chance: Dd) -> Dd {
        self * chance
    }
    fn size(&self) -> f64 {
        self.hi
    }
    fn scaled(self, power: i64) -> Dd {
        Dd::scaled(self, power)
    }
}

impl Carried for Series {
    const NOTHING: Series = [0.0; TERMS];
    fn of(chance: Dd) -> Series {
        let mut series = [0.0; TERMS];
        series[0] = chance.hi;
        series
    }
    fn plus(self, other: Series) -> Series {
        std::array::from_fn(|n| self[n] + other[n])
    }
    fn times(self, other: &Series) -> Series {
        std::array::from_fn(|n| (0..=n).map(|j| self[j] * other[n - j]).sum())
    }
    fn weighed(self, chance: Dd) -> Series {
        self.map(|coefficient| coefficient * chance.hi)
    }
    fn size(&self) -> f64 {
        self[0]
    }
    fn scaled(self, power: i64) -> Series {
        self.map(|coefficient| Dd::of(coefficient).scaled(power).hi)
    }
}

impl Carried for f64 {
    const NOTHING: f64 = 0.0;
    fn of(chance: Dd) -> f64 {
        chance.hi
    }
    fn plus(self, other: f64) -> f64 {
        self + other
    }
    fn times(self, other: &f64) -> f64 {
        self * other
    }
    fn weighed(self, chance: Dd) -> f64 {
        self * chance.hi
    }
    fn size(&self) -> f64 {
        *self
    }
    fn scaled(self, power: i64) -> f64 {
        Dd::of(self).scaled(power).hi
    }
}

impl States {
    /// None for any other spec.
    pub fn of(spec: &Spec) -> Option<States> {
        let Spec::GrowthRegimes { preference, hazard, states, transition, start, .. } = spec else {
            return None;
        };
        let rho = two_sum(*preference, *hazard);
        let shares = |chances: &Vec<f64>| -> Vec<Dd> {
            let total = chances.iter().fold(Dd::ZERO, |sum, &chance| sum + Dd::of(chance));
            chances.iter().map(|&chance| Dd::of(chance) / total).collect()
        };
        let transition = transition.iter().map(shares).collect();
        let states = states.clone();
        Some(States { rho, states, transition, start: shares(start), offsets: Vec::new(), years: 0 })
    }

    /// Whether the elasticity moves anything.
    pub fn moves(&self) -> bool {
        self.states.iter().any(|state| state.mean != 0.0 || state.sd != 0.0)
    }

    /// The flows other than 0, and their factors; `curve` is that of the spec, which has been checked.
    pub fn over(mut self, curve: &Curve, net: &OptionFlows) -> Result<(Vec<f64>, States)> {
        if net.perpetual.iter().any(|endless| endless.flow != 0.0) {
            let message = "the elasticity of growth in states is not searched over flows for ever";
            return Err(Error::new(ErrorKind::Unsupported, "perpetual", message).with_hint("flows that end"));
        }
        let mut flows = Vec::new();
        for (index, (&t, &flow)) in net.offsets.iter().zip(net.flows).enumerate() {
            if flow == 0.0 {
                continue;
            }
            // The curve's own word on offsets it does not cover.
            curve.mean_rate_continuous(t).map_err(|error| error.with_index(index))?;
            if t > MOST_YEARS {
                return Err(out_of_reach(t, MOST_YEARS).with_index(index));
            }
            flows.push(flow);
            self.offsets.push((t as usize, t.fract()));
            self.years = self.years.max(t.ceil() as usize);
        }
        Ok((flows, self))
    }

    /// For every year from 0 the sum over paths of chances times factors, to be multiplied by 2^power.
    fn walk<T: Carried>(&self, factors: &[T]) -> Vec<(T, i64)> {
        let count = self.states.len();
        let mut row: Vec<T> = self.start.iter().map(|&chance| T::of(chance)).collect();
        let mut power = 0;
        let total = |row: &[T]| row.iter().fold(T::NOTHING, |sum, held| sum.plus(*held));
        let mut found = Vec::with_capacity(self.years + 1);
        found.push((total(&row), power));
        for _ in 0..self.years {
            let into = |to: usize| {
                let paths = (0..count).map(|from| row[from].weighed(self.transition[from][to]));
                paths.fold(T::NOTHING, T::plus).times(&factors[to])
            };
            row = (0..count).map(into).collect();
            let largest = row.iter().fold(f64::MIN_POSITIVE, |most, held| most.max(held.size()));
            let shift = (largest.to_bits() >> 52) as i64 - 1023;
            row = row.into_iter().map(|held| held.scaled(-shift)).collect();
            power += shift;
            found.push((total(&row), power));
        }
        found
    }

    /// b and c of each state's exp(b d + c d^2), its factor at x + d divided by that at x.
    fn slopes(&self, x: f64) -> Vec<(f64, f64)> {
        self.states
            .iter()
            .map(|state| (x * state.sd * state.sd - state.mean, state.sd * state.sd / 2.0))
            .collect()
    }

    /// Years walked times what one year takes.
    fn steps(&self) -> f64 {
        (self.years * (self.states.len() + 8)) as f64
    }
}

impl Factors for States {
    fn log2(&self, x: f64) -> Vec<(Dd, f64)> {
        let factor = |state: &GrowthState| {
            let spread = two_prod(x, state.sd);
            let log = spread * spread * 0.5 - two_prod(x, state.mean);
            exp2_m1(log * Dd::LOG2_E) + Dd::ONE
        };
        let factors: Vec<Dd> = self.states.iter().map(factor).collect();
        let years: Vec<Dd> =
            self.walk(&factors).into_iter().map(|(sum, power)| log2(sum) + Dd::of(power as f64)).collect();
        let rho = self.rho * Dd::LOG2_E;
        let row = |&(n, share): &(usize, f64)| {
            let whole = years[n];
            let within = if share == 0.0 { whole } else { whole + (years[n + 1] - whole) * share };
            let log = within - rho * n as f64 - rho * share;
            (log, 16.0 + self.steps() + 4.0 * (whole.hi.abs() + log.hi.abs()))
        };
        self.offsets.iter().map(row).collect()
    }

    fn around(&self, x: f64, h: f64) -> Vec<Around> {
        // Relative to the factors at x, which are weights of the states from here on.
        let slopes = self.slopes(x);
        let held: Vec<f64> = self
            .states
            .iter()
            .map(|state| (x * x * state.sd * state.sd / 2.0 - x * state.mean).exp())
            .collect();
        let series = |size: fn(f64) -> f64| -> Vec<Series> {
            let one = |(&(b, c), held): (&(f64, f64), &f64)| {
                let mut exponent = [0.0; TERMS];
                (exponent[1], exponent[2]) = (size(b), size(c));
                exponential(&exponent).map(|coefficient| coefficient * held)
            };
            slopes.iter().zip(&held).map(one).collect()
        };
        let exact = logarithms(&self.walk(&series(|slope| slope)), 1.0);
        let bound = logarithms(&self.walk(&series(f64::abs)), -1.0);
        let at_x = self.walk(&held);
        let circles: Vec<Option<Circle>> =
            (0..CIRCLES).map(|circle| self.circle(&slopes, &held, &at_x, times(circle) * h)).collect();
        let rounding = f64::EPSILON * (256.0 + (self.years * (self.states.len() + TERMS + 8)) as f64);
        let row = |&(n, share): &(usize, f64)| {
            let next = (n + 1).min(self.years);
            let power = |logs: &[Series]| {
                let between = |k: usize| (1.0 - share) * logs[n][k] + share * logs[next][k];
                exponential(&std::array::from_fn(between))
            };
            let within = |circle: &Option<Circle>| match circle {
                Some(circle) if share == 0.0 => circle.years[n],
                // A power of a sum is smooth where the sum has no zero.
                Some(circle) if circle.turn * (n + 1) as f64 <= FRAC_PI_2 => {
                    (1.0 - share) * circle.years[n] + share * circle.years[next]
                }
                _ => f64::INFINITY,
            };
            let bounds: [f64; CIRCLES] = std::array::from_fn(|k| within(&circles[k]));
            Around { series: power(&exact), bound: power(&bound), rounding, circles: bounds }
        };
        self.offsets.iter().map(row).collect()
    }
}

/// Bounds in one circle around x.
struct Circle {
    /// By year, the logarithm of a bound on the sum over paths, divided by the sum at x.
    years: Vec<f64>,
    /// How far a year's factors can be turned from a common direction, in radians: paths turned by less than a right angle in
    /// all cannot cancel.
    turn: f64,
}

impl States {
    /// None where the circle is too wide to be bounded.
    fn circle(
        &self,
        slopes: &[(f64, f64)],
        held: &[f64],
        at_x: &[(f64, i64)],
        radius: f64,
    ) -> Option<Circle> {
        let grown = |(b, c): &(f64, f64)| (b.abs() + c * radius) * radius;
        if slopes.iter().any(|slope| grown(slope) > LARGE) {
            return None;
        }
        let largest: Vec<f64> =
            slopes.iter().zip(held).map(|(slope, held)| held * grown(slope).exp()).collect();
        let log = |(sum, power): &(f64, i64)| sum.ln() + *power as f64 * std::f64::consts::LN_2;
        let years =
            self.walk(&largest).into_iter().zip(at_x).map(|(most, own)| log(&most) - log(own) + SLACK);
        let years = years.collect();
        let half = |of: fn(&(f64, f64)) -> f64| {
            let all = || slopes.iter().map(of);
            (all().fold(f64::MIN, f64::max) - all().fold(f64::MAX, f64::min)) / 2.0
        };
        let turn = (half(|slope| slope.0) + half(|slope| slope.1) * radius) * radius * (1.0 + 1e-12);
        Some(Circle { years, turn })
    }
}

/// By year, the logarithm of a series divided by its constant term; with sign -1 that of bounds, -ln(1 - ...), whose
/// coefficients bound those of any power between 0 and 1.
fn logarithms(sums: &[(Series, i64)], sign: f64) -> Vec<Series> {
    let log = |(series, _): &(Series, i64)| {
        let u = series.map(|coefficient| coefficient / series[0]);
        let mut log = [0.0; TERMS];
        for n in 1..TERMS {
            let before: f64 = (1..n).map(|j| j as f64 * log[j] * u[n - j]).sum();
            log[n] = u[n] - sign * before / n as f64;
        }
        log
    };
    sums.iter().map(log).collect()
}
