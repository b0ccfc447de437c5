//! Laws that a row of factors may follow: the declared curve, and what is commonly put in its place.

use std::rc::Rc;

use hence_core::{Curve, Parts, Timing};

/// Bands of rates by offset.
#[derive(Clone, Debug, PartialEq)]
pub struct Bands {
    /// The offset that closes each band.
    pub edges: Vec<f64>,
    /// The yearly rate of each band.
    pub rates: Vec<f64>,
    /// Whether the last rate has no end.
    pub open: bool,
}

/// A discount factor as a function of the offset.
#[derive(Clone, Debug, PartialEq)]
pub enum Law {
    /// The declared curve.
    Declared(Rc<Curve>),
    /// Another schedule's curve, by its id.
    Schedule(String, Rc<Curve>),
    /// (1 + rate)^-t.
    Flat(f64),
    /// exp(-rate t), band by band.
    Continuous(Bands),
    /// Forward rates of bands that lie elsewhere.
    Bands(Bands),
    /// (1 + r(t))^-t, r being the rate of the band that holds t moved by so many years; the edge year belongs to the
    /// earlier band, or to the later.
    WholeHorizon { bands: Bands, moved: f64, later: bool },
    /// The declared factor times (1 + inflation)^-t.
    Inflated(Rc<Curve>, f64),
}

/// When flows stand, against the declared timing.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct When {
    /// Years later than declared.
    pub later: f64,
    /// The mean of the factors at the start and at the end of the year.
    pub averaged: bool,
    /// Nothing stands before the base.
    pub clamped: bool,
    /// Only the first rate is applied to the part of a year, and bands stay where they are.
    pub chained: bool,
}

impl Bands {
    /// Forward bands of yearly rates that a curve is made of, where it is.
    pub fn forward(parts: &Parts) -> Option<Bands> {
        let flat = |rate: f64| Bands { edges: Vec::new(), rates: vec![rate], open: true };
        match parts {
            Parts::Yearly { rate } | Parts::OneRate { rate, .. } => Some(flat(*rate)),
            Parts::Continuous { rate } => Some(flat(rate.exp_m1())),
            Parts::Bands { edges, rates, open } => {
                Some(Bands { edges: edges.clone(), rates: rates.clone(), open: *open })
            }
            Parts::RamseyExact { rho, elasticity, edges, growth, open } => {
                let yearly = |g: &f64| (1.0 + rho) * (1.0 + g).powf(*elasticity) - 1.0;
                Some(Bands { edges: edges.clone(), rates: growth.iter().map(yearly).collect(), open: *open })
            }
            _ => None,
        }
    }

    /// The place of the band that holds an offset.
    pub fn at(&self, t: f64, later: bool) -> usize {
        let before = |edge: &&f64| if later { **edge <= t } else { **edge < t };
        self.edges.iter().filter(before).count().min(self.rates.len() - 1)
    }

    /// The integral of `f(rate)` from 0 to an offset; the first and last rate hold outside.
    pub fn integral(&self, t: f64, f: impl Fn(f64) -> f64) -> f64 {
        let (from, to, sign) = if t < 0.0 { (t, 0.0, -1.0) } else { (0.0, t, 1.0) };
        let mut total = 0.0;
        let mut begin = f64::NEG_INFINITY;
        for (k, rate) in self.rates.iter().enumerate() {
            let end = if k + 1 == self.rates.len() { f64::INFINITY } else { self.edges[k] };
            let years = end.min(to) - begin.max(from);
            if years > 0.0 {
                total += f(*rate) * years;
            }
            begin = begin.max(end);
        }
        sign * total
    }

    /// Whether there is more than one rate.
    pub fn several(&self) -> bool {
        self.rates.iter().any(|rate| rate != &self.rates[0])
    }
}

/// The factor of a curve; before the base, where the curve itself does not say, the inverse of the one after it.
fn of_curve(curve: &Curve, t: f64) -> Option<f64> {
    match curve.factor(t) {
        Ok(factor) => Some(factor),
        Err(_) if t < 0.0 => curve.factor(-t).ok().map(|factor| 1.0 / factor),
        Err(_) => None,
    }
}

impl Law {
    /// The factor at an offset; none outside the law's years.
    pub fn factor(&self, t: f64) -> Option<f64> {
        match self {
            Law::Declared(curve) | Law::Schedule(_, curve) => of_curve(curve, t),
            Law::Flat(rate) => Some((1.0 + rate).powf(-t)),
            Law::Continuous(bands) => Some((-bands.integral(t, |rate| rate)).exp()),
            Law::Bands(bands) => Some((-bands.integral(t, f64::ln_1p)).exp()),
            Law::WholeHorizon { bands, moved, later } => {
                let rate = bands.rates[bands.at(t + moved, *later)];
                Some((1.0 + rate).powf(-t))
            }
            Law::Inflated(curve, inflation) => {
                of_curve(curve, t).map(|factor| factor * (1.0 + inflation).powf(-t))
            }
        }
    }

    /// The factor of a flow at a declared offset that stands as `when` says.
    pub fn timed(&self, t: f64, when: When) -> Option<f64> {
        if when.chained {
            let part = When { later: 0.0, chained: false, ..when };
            return Some(self.timed(t, part)? * self.factor(1.0)?.powf(when.later));
        }
        let t = t + when.later;
        let t = if when.clamped { t.max(0.0) } else { t };
        match when.averaged {
            true => Some((self.factor(t - 1.0)? + self.factor(t)?) / 2.0),
            false => self.factor(t),
        }
    }
}

impl When {
    /// As declared.
    pub fn declared(timing: Timing) -> When {
        let averaged = timing.flows == hence_core::Position::Averaged;
        When { later: 0.0, averaged, clamped: false, chained: false }
    }
}

#[cfg(test)]
mod tests {
    use super::Bands;

    #[test]
    fn bands_add_up_on_both_sides_of_the_base() {
        let bands = Bands { edges: vec![2.0, 5.0], rates: vec![0.3, 0.2, 0.1], open: true };
        let integral = |t: f64| bands.integral(t, |rate| rate);
        for (t, sum) in [(0.0, 0.0), (1.5, 0.45), (2.0, 0.6), (4.0, 1.0), (7.0, 1.4), (-1.0, -0.3)] {
            assert!((integral(t) - sum).abs() < 1e-15, "{t}");
        }
        assert_eq!([1.0, 2.0, 2.5, 5.0, 9.0].map(|t| bands.at(t, false)), [0, 0, 1, 1, 2]);
        assert_eq!([1.0, 2.0, 2.5, 5.0, 9.0].map(|t| bands.at(t, true)), [0, 1, 1, 2, 2]);
        // An edge that was moved past the next one swallows the band between them.
        let moved = Bands { edges: vec![6.0, 5.0], ..bands };
        assert!((moved.integral(7.0, |rate| rate) - 1.9).abs() < 1e-15);
    }
}
