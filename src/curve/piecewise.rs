//! Curves whose logarithm is made of straight lines: one line (flat), or several (banded, Ramsey, tables).

use std::ops::RangeInclusive;

use super::edges::Edges;
use crate::dd::{Dd, log2, two_diff, two_prod};

/// One line through 0 without end: log2 D(t) = slope t.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Flat {
    slope: Dd,
}

impl Flat {
    pub(super) fn new(slope: Dd) -> Flat {
        Flat { slope }
    }

    #[inline(always)]
    pub(super) fn log2(&self, t: f64) -> Dd {
        let product = two_prod(self.slope.hi, t);
        Dd { hi: product.hi, lo: product.lo + self.slope.lo * t }
    }

    /// -D'/D, continuous.
    pub(super) fn instantaneous(&self) -> Dd {
        -(self.slope * Dd::LN2)
    }

    /// The offset from which on log2 D is below a level, itself below 0; infinite where it does not fall.
    pub(super) fn below(&self, level: f64) -> f64 {
        if self.falls() && self.slope.hi != 0.0 { level / self.slope.hi } else { f64::INFINITY }
    }

    /// Whether the factor never rises.
    pub(super) fn falls(&self) -> bool {
        self.slope.hi <= 0.0
    }
}

/// One line of several: log2 D(t) = value + slope (t - anchor).
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Line {
    anchor: f64,
    value: Dd,
    slope: Dd,
}

impl Line {
    #[inline(always)]
    pub(super) fn log2(&self, t: f64) -> Dd {
        let distance = two_diff(t, self.anchor);
        let product = two_prod(self.slope.hi, distance.hi);
        let rest = product.lo + (self.slope.hi * distance.lo + self.slope.lo * distance.hi);
        Dd { hi: product.hi, lo: rest } + self.value
    }
}

/// Lines side by side, continuous at the edges, through log2 D(0) = 0.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Piecewise {
    edges: Edges,
    lines: Vec<Line>,
}

impl Piecewise {
    /// The curve with one log2 factor per year in each band, both ways from 0.
    pub(super) fn from_slopes(edges: Edges, slopes: Vec<Dd>) -> Piecewise {
        let start = edges.band_after_zero();
        let uppers = edges.uppers();
        let mut lines: Vec<Line> =
            slopes.into_iter().map(|slope| Line { anchor: 0.0, value: Dd::ZERO, slope }).collect();
        for k in start + 1..lines.len() {
            let anchor = uppers[k - 1];
            (lines[k].anchor, lines[k].value) = (anchor, lines[k - 1].log2(anchor));
        }
        for k in (0..start).rev() {
            let anchor = uppers[k];
            (lines[k].anchor, lines[k].value) = (anchor, lines[k + 1].log2(anchor));
        }
        Piecewise { edges, lines }
    }

    /// The curve through the given factors (offsets increasing, at least two, factor 1 at 0).
    pub(super) fn through(points: &[(f64, f64)]) -> Piecewise {
        let lines = points
            .windows(2)
            .map(|pair| {
                let (value, next) = (log2(Dd::of(pair[0].1)), log2(Dd::of(pair[1].1)));
                let slope = (next - value) / two_diff(pair[1].0, pair[0].0);
                Line { anchor: pair[0].0, value, slope }
            })
            .collect();
        let uppers = points[1..].iter().map(|point| point.0).collect();
        Piecewise { edges: Edges::increasing(uppers), lines }
    }

    #[inline(always)]
    pub(super) fn log2(&self, t: f64) -> Dd {
        self.lines[self.edges.band(t)].log2(t)
    }

    /// The line on which t lies, and offsets around t that lie on it too.
    #[inline(always)]
    pub(super) fn line(&self, t: f64) -> (Line, RangeInclusive<f64>) {
        let k = self.edges.band(t);
        let uppers = self.edges.uppers();
        let from = if k == 0 { f64::NEG_INFINITY } else { uppers[k - 1].next_up() };
        (self.lines[k], from..=uppers[k])
    }

    /// -D'/D at t, continuous; at an edge that of the band it closes.
    pub(super) fn instantaneous(&self, t: f64) -> Dd {
        -(self.lines[self.edges.band(t)].slope * Dd::LN2)
    }

    /// -D'/D just after 0.
    pub(super) fn initial(&self) -> Dd {
        -(self.lines[self.edges.band_after_zero()].slope * Dd::LN2)
    }

    /// An offset on the last line from which on log2 D is below a level; infinite where the last line does not fall.
    pub(super) fn below(&self, level: f64) -> f64 {
        let last = &self.lines[self.lines.len() - 1];
        let distance = (level - last.value.hi) / last.slope.hi;
        if last.slope.hi < 0.0 { last.anchor + distance.max(0.0) } else { f64::INFINITY }
    }

    /// Whether the factor never rises after 0.
    pub(super) fn falls(&self) -> bool {
        self.lines[self.edges.band_after_zero()..].iter().all(|line| line.slope.hi <= 0.0)
    }
}
