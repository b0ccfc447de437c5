//! The search for the reading that fits a row of factors: the fewest departures from the declared basis that give it.

use std::rc::Rc;

use super::candidates::{Known, laws, others, own_bands, timings};
use super::law::{Law, When};
use super::mixed::{Mixed, mixed};
use super::reading::{Fit, Reading, Rounding, Strictness, roundings};
use super::series::Series;
use crate::findings::Kind;

/// What a row of factors shows.
#[derive(Clone, Debug, PartialEq)]
pub enum Shown {
    /// What is declared.
    Declared,
    /// Another reading.
    Reading(Found),
    /// Two timings.
    Mixed(Mixed),
    /// What is declared, but for some points: their places in the series.
    SomeOff(Vec<usize>),
    /// Nothing that is known.
    Unknown,
}

/// A reading that fits.
#[derive(Clone, Debug, PartialEq)]
pub struct Found {
    /// The reading.
    pub reading: Reading,
    /// How it fits.
    pub fit: Fit,
    /// Kinds of mistake that fit as well, this one left out.
    pub ties: Vec<Kind>,
}

/// What a series shows.
pub fn search(series: &Series, known: &Known) -> Shown {
    let off = series.off();
    if off.is_empty() {
        return Shown::Declared;
    }
    let apart = off.iter().map(|p| (p.found - p.declared).abs() / p.declared.abs());
    let apart = apart.fold(0.0, f64::max);
    let (n, off) = (series.points.len(), off.len());
    let exact = Strictness::default();
    // A few points may have mistakes of their own, if the reading explains most of what is off.
    let few = Strictness { off: (n / 5).min(off / 4), more: 0.0 };
    // Nearly so: a thousandth of what is off is left unexplained.
    let nearly = Strictness { off: 0, more: (apart * 1e-3).min(1e-4) };
    let mixed_rounded = || roundings(series).into_iter().find_map(|r| mixed(series, known, Some(r)));
    singles(series, known, exact)
        .map(Shown::Reading)
        .or_else(|| mixed(series, known, None).map(Shown::Mixed))
        .or_else(|| doubles(series, known, exact).map(Shown::Reading))
        .or_else(|| mixed_rounded().map(Shown::Mixed))
        .or_else(|| known_curves(series, known, exact).map(Shown::Reading))
        .or_else(|| singles(series, known, few).filter(|_| few.off > 0).map(Shown::Reading))
        .or_else(|| some_off(series))
        .or_else(|| singles(series, known, nearly).map(Shown::Reading))
        .or_else(|| known_curves(series, known, nearly).map(Shown::Reading))
        .or_else(|| bands_of_its_own(series, known).map(Shown::Reading))
        .unwrap_or(Shown::Unknown)
}

/// The points that are off, where most are not.
fn some_off(series: &Series) -> Option<Shown> {
    let n = series.points.len();
    let off = |i: &usize| {
        let p = &series.points[*i];
        (p.found - p.declared).abs() > Series::tolerance(p, p.declared)
    };
    let off: Vec<usize> = (0..n).filter(off).collect();
    (2 * off.len() < n).then_some(Shown::SomeOff(off))
}

fn reading(kind: Option<Kind>, law: Law, when: When, rounding: Option<Rounding>) -> Reading {
    Reading { law, kind, when, rounding }
}

/// The first reading of each kind that fits, in the order of likelihood.
struct Fitting<'a> {
    series: &'a Series,
    strictness: Strictness,
    best: Option<(Reading, Fit)>,
    kinds: Vec<Vec<Kind>>,
    declared: When,
}

impl Fitting<'_> {
    fn offer(&mut self, reading: Reading) {
        let kinds = reading.kinds(self.declared);
        if self.kinds.contains(&kinds) {
            return;
        }
        if let Some(fit) = reading.fit(self.series, self.strictness) {
            self.kinds.push(kinds);
            // Of readings that miss some points, the one that misses least.
            let better = |(_, best): &(Reading, Fit)| fit.off.len() < best.off.len();
            if self.best.as_ref().is_none_or(better) {
                self.best = Some((reading, fit));
            }
        }
    }

    fn done(self) -> Option<Found> {
        let (reading, fit) = self.best?;
        let own = reading.kinds(self.declared);
        let mut ties: Vec<Kind> =
            self.kinds.into_iter().flatten().filter(|kind| !own.contains(kind)).collect();
        if reading.when.clamped {
            // Nothing before the base: then the first year is timed as declared, and the rest is not.
            ties.push(Kind::MixedTiming);
        }
        ties.sort_unstable();
        ties.dedup();
        Some(Found { reading, fit, ties })
    }
}

fn fitting<'a>(series: &'a Series, known: &Known, strictness: Strictness) -> Fitting<'a> {
    Fitting { series, strictness, best: None, kinds: Vec::new(), declared: known.declared }
}

/// One departure: rounding, timing or curve.
fn singles(series: &Series, known: &Known, strictness: Strictness) -> Option<Found> {
    let mut all = fitting(series, known, strictness);
    let declared = || Law::Declared(Rc::clone(&series.curve));
    let roundings = if strictness.more > 0.0 { Vec::new() } else { roundings(series) };
    for rounding in roundings {
        all.offer(reading(None, declared(), known.declared, Some(rounding)));
    }
    for when in timings(known, true) {
        all.offer(reading(None, declared(), when, None));
    }
    for (kind, law) in laws(series, known, known.declared) {
        all.offer(reading(Some(kind), law, known.declared, None));
    }
    all.done()
}

/// A curve that is a basis of its own.
fn known_curves(series: &Series, known: &Known, strictness: Strictness) -> Option<Found> {
    let mut all = fitting(series, known, strictness);
    for (kind, law) in others(series, known, known.declared) {
        all.offer(reading(Some(kind), law, known.declared, None));
    }
    all.done()
}

/// Bands that nobody is known to have published.
fn bands_of_its_own(series: &Series, known: &Known) -> Option<Found> {
    let mut all = fitting(series, known, Strictness::default());
    let law = Law::Bands(own_bands(series)?);
    all.offer(reading(Some(Kind::Differs), law, known.declared, None));
    all.done()
}

/// Two departures, and three.
fn doubles(series: &Series, known: &Known, strictness: Strictness) -> Option<Found> {
    let roundings = roundings(series);
    let declared = || Law::Declared(Rc::clone(&series.curve));
    let mut all = fitting(series, known, strictness);
    for &rounding in &roundings {
        for when in timings(known, true) {
            all.offer(reading(None, declared(), when, Some(rounding)));
        }
        for (kind, law) in laws(series, known, known.declared) {
            all.offer(reading(Some(kind), law, known.declared, Some(rounding)));
        }
    }
    for when in timings(known, false) {
        for (kind, law) in laws(series, known, when) {
            all.offer(reading(Some(kind), law, when, None));
        }
    }
    if all.best.is_some() {
        return all.done();
    }
    for &rounding in &roundings {
        for when in timings(known, false) {
            for (kind, law) in laws(series, known, when) {
                all.offer(reading(Some(kind), law, when, Some(rounding)));
            }
        }
        for (kind, law) in others(series, known, known.declared) {
            all.offer(reading(Some(kind), law, known.declared, Some(rounding)));
        }
    }
    all.done()
}
