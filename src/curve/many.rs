//! Factors of many offsets at once, in loops without branches.
//!
//! Such loops are compiled for several widths of registers, and the widest that the processor has is taken when the
//! program runs. The operations are the same for each number, none is fused with another, so the width changes no bit.

use multiversion::multiversion;

use super::domain::FARTHEST;
use super::piecewise::{Flat, Line, Piecewise};
use super::{Curve, Form};
use crate::dd::{Dd, ROUNDER, exp2};

/// Whole years whose factors are kept where there are many offsets.
const YEARS: usize = 1024;

/// As many offsets as are worth the making of that table.
const WORTH: usize = 4 * YEARS;

/// So many offsets are looked up together.
const TOGETHER: usize = 32;

/// A curve and what speeds up the factors of many offsets.
pub(crate) struct Batch<'a> {
    curve: &'a Curve,
    /// The factors at 0, 1, 2 years and so on.
    years: Option<Box<[f64; YEARS]>>,
    /// The last offset that the curve allows.
    last: f64,
    /// The factor is 0 from here on.
    vanishes: f64,
}

impl<'a> Batch<'a> {
    /// Makes ready for these offsets.
    pub(super) fn new(curve: &'a Curve, offsets: &[f64]) -> Self {
        let farthest = curve.domain.upper.min(FARTHEST);
        let mut batch = Batch { curve, years: None, last: farthest, vanishes: curve.form.vanishes() };
        let last = (YEARS - 1) as f64;
        let whole = |offsets: &[f64]| offsets.iter().all(|&t| t.fract() == 0.0);
        if offsets.len() >= WORTH && whole(&offsets[..TOGETHER]) && batch.safe(&[0.0, last]) {
            let years: [f64; YEARS] = std::array::from_fn(|year| year as f64);
            let mut factors = Box::new([0.0; YEARS]);
            batch.compute(&years, factors.as_mut_slice());
            batch.years = Some(factors);
        }
        batch
    }

    /// The factors of offsets of which none is refused, else nothing: `factors` is then of no use.
    pub(crate) fn factors(&self, offsets: &[f64], factors: &mut [f64]) -> Option<()> {
        if self.years.as_ref().is_some_and(|years| look_up(years, offsets, factors)) {
            return Some(());
        }
        self.safe(offsets).then(|| self.compute(offsets, factors))
    }

    /// Whether it is plain that all factors are 0.
    pub(crate) fn vanish(&self, offsets: &[f64]) -> bool {
        offsets.first().is_some_and(|&t| t >= self.vanishes) && within(offsets, self.vanishes, self.last)
    }

    /// Whether it is plain that no offset is refused.
    pub(super) fn safe(&self, offsets: &[f64]) -> bool {
        self.curve.bounded && within(offsets, 0.0, self.last)
    }

    /// The factors of offsets that were found to be in the domain.
    pub(super) fn compute(&self, offsets: &[f64], factors: &mut [f64]) {
        match &self.curve.form {
            Form::Flat(line) => flat(line, offsets, factors),
            Form::Lines(several) => lines(several, offsets, factors),
            form => each(offsets, factors, |t| form.factor(t)),
        }
    }
}

/// Whether every offset is in the interval; none is NaN then.
#[multiversion(targets = "simd")]
fn within(offsets: &[f64], from: f64, to: f64) -> bool {
    offsets.iter().fold(true, |all, &t| all & (from <= t) & (t <= to))
}

/// Looks up the factors of offsets that all are among the years kept.
#[multiversion(targets = "simd")]
fn look_up(years: &[f64; YEARS], offsets: &[f64], factors: &mut [f64]) -> bool {
    let last = (YEARS - 1) as f64;
    let place = |t: f64| (t + ROUNDER).to_bits() as usize % YEARS;
    for (offsets, factors) in offsets.chunks(TOGETHER).zip(factors.chunks_mut(TOGETHER)) {
        let first = offsets[0];
        let (mut kept, mut in_order) = (true, true);
        for (i, &t) in offsets.iter().enumerate() {
            kept &= (0.0 <= t) & (t <= last) & ((t + ROUNDER) - ROUNDER == t);
            in_order &= t == first + i as f64;
        }
        if !kept {
            return false;
        }
        if in_order {
            factors.copy_from_slice(&years[place(first)..][..offsets.len()]);
        } else {
            for (factor, &t) in factors.iter_mut().zip(offsets) {
                *factor = years[place(t)];
            }
        }
    }
    true
}

#[inline(always)]
fn each(offsets: &[f64], factors: &mut [f64], factor: impl Fn(f64) -> Dd) {
    for (result, &t) in factors.iter_mut().zip(offsets) {
        *result = factor(t).hi;
    }
}

#[multiversion(targets = "simd")]
fn flat(line: &Flat, offsets: &[f64], factors: &mut [f64]) {
    each(offsets, factors, |t| exp2(line.log2(t)));
}

/// Offsets mostly come in their order, so that many in a row lie on one line.
fn lines(lines: &Piecewise, mut offsets: &[f64], mut factors: &mut [f64]) {
    while let [first, others @ ..] = offsets {
        let (line, span) = lines.line(*first);
        let together = 1 + others.iter().position(|t| !span.contains(t)).unwrap_or(others.len());
        let (here, rest) = factors.split_at_mut(together);
        along(line, &offsets[..together], here);
        (offsets, factors) = (&offsets[together..], rest);
    }
}

#[multiversion(targets = "simd")]
fn along(line: Line, offsets: &[f64], factors: &mut [f64]) {
    each(offsets, factors, |t| exp2(line.log2(t)));
}
