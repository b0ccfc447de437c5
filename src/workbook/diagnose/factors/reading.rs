//! A reading of a row of factors: a law, when flows stand, and to how many places it was rounded; and how it fits.

use super::law::{Law, When};
use super::series::{Point, Series};
use crate::findings::Kind;

/// To what factors were rounded.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Rounding {
    /// To so many decimal places.
    Places(i32),
    /// Cut off after so many decimal places.
    Cut(i32),
    /// To so many significant digits.
    Digits(i32),
}

/// What a row of factors may have been made by.
#[derive(Clone, Debug, PartialEq)]
pub struct Reading {
    /// The curve.
    pub law: Law,
    /// What kind of mistake that curve is; nothing where it is the declared one.
    pub kind: Option<Kind>,
    /// When flows stand.
    pub when: When,
    /// How factors were rounded.
    pub rounding: Option<Rounding>,
}

/// How strictly a reading must fit.
#[derive(Clone, Copy, Debug, Default)]
pub struct Strictness {
    /// So many points may be off.
    pub off: usize,
    /// A relative distance that is allowed besides the tolerance of factors.
    pub more: f64,
}

/// How a reading fits a series.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Fit {
    /// Places in the series of the points that it does not give.
    pub off: Vec<usize>,
    /// The largest relative distance of those that it gives.
    pub worst: f64,
}

impl Reading {
    /// The factor at a point before rounding.
    pub fn factor(&self, point: &Point) -> Option<f64> {
        self.law.timed(point.t, self.when)
    }

    /// How far the found factor is from the reading beyond what it allows, and the plain relative distance.
    fn distance(&self, point: &Point, more: f64) -> Option<(bool, f64)> {
        let factor = self.factor(point)?;
        let away = point.found - factor;
        let tolerance = Series::tolerance(point, factor) + more * factor.abs();
        let fits = match self.rounding {
            None => away.abs() <= tolerance,
            Some(Rounding::Places(places)) => away.abs() <= 0.5 * unit(places) + tolerance,
            Some(Rounding::Cut(places)) => away <= tolerance && -away <= unit(places) + tolerance,
            Some(Rounding::Digits(digits)) => {
                let leading = factor.abs().log10().floor() as i32;
                away.abs() <= 0.5 * unit(digits - 1 - leading) + tolerance
            }
        };
        Some((fits, away.abs() / factor.abs().max(f64::MIN_POSITIVE)))
    }

    /// How it fits; none where more points are off than may be.
    pub fn fit(&self, series: &Series, strictness: Strictness) -> Option<Fit> {
        let n = series.points.len();
        let mut fit = Fit { off: Vec::new(), worst: 0.0 };
        // The far end and the middle tell readings apart soonest.
        let order = [n.checked_sub(1), Some(n / 2), Some(n / 4)].into_iter().flatten().filter(|&i| i < n);
        let first: Vec<usize> = order.collect();
        let rest = (0..n).filter(|i| !first.contains(i));
        let mut seen = vec![false; n];
        for i in first.iter().copied().chain(rest) {
            if std::mem::replace(&mut seen[i], true) {
                continue;
            }
            match self.distance(&series.points[i], strictness.more) {
                Some((true, away)) => fit.worst = fit.worst.max(away),
                _ => {
                    fit.off.push(i);
                    if fit.off.len() > strictness.off {
                        return None;
                    }
                }
            }
        }
        fit.off.sort_unstable();
        Some(fit)
    }

    /// The kinds of mistake that it is made of: curve, timing, rounding.
    pub fn kinds(&self, declared: When) -> Vec<Kind> {
        let timing = (self.when != declared).then_some(Kind::OffByPeriod);
        let rounding = self.rounding.map(|_| Kind::RoundedFactors);
        [self.kind, timing, rounding].into_iter().flatten().collect()
    }
}

/// 10^-places.
pub fn unit(places: i32) -> f64 {
    if places < 0 { 10f64.powi(-places) } else { 1.0 / 10f64.powi(places) }
}

/// The coarsest rounding under which every factor stays as it is, if one is coarser than the digits of a number.
pub fn roundings(series: &Series) -> Vec<Rounding> {
    const MOST: i32 = 12;
    let kept = |round: &dyn Fn(f64) -> f64| {
        let told = |p: &&Point| p.slack == 0.0 || p.slack < 1e-7;
        let stays = |p: &Point| (round(p.found) - p.found).abs() <= p.slack + 1e-14 * p.found.abs();
        let told: Vec<&Point> = series.points.iter().filter(told).collect();
        told.len() >= 2 && told.into_iter().all(stays)
    };
    let to_places = |places: i32| move |x: f64| (x * 10f64.powi(places)).round() / 10f64.powi(places);
    let to_digits = |digits: i32| {
        move |x: f64| if x == 0.0 { x } else { format!("{x:.*e}", digits as usize - 1).parse().unwrap_or(x) }
    };
    let places = (1..=MOST).find(|&places| kept(&to_places(places)));
    let digits = (2..=MOST - 2).find(|&digits| kept(&to_digits(digits)));
    let mut all = Vec::new();
    all.extend(places.map(Rounding::Places));
    all.extend(digits.map(Rounding::Digits));
    all.extend(places.map(Rounding::Cut));
    all
}
