//! Sums in two parts, with a bound on what they lack: quick, and mostly enough to tell the rounded exact sum.
//!
//! Many sums run side by side, so that loops use registers of any width. Each keeps the rounding errors of its additions
//! in a second number: T. Ogita, S. M. Rump and S. Oishi, "Accurate sum and dot product", SIAM Journal on Scientific
//! Computing 26 (2005). Where the bound leaves open which double is nearest, there is no answer, and the long register
//! has to be asked. So the way a machine takes changes no result.

use multiversion::multiversion;
use multiversion::target::target_cfg_f;

use crate::dd::{two_prod, two_sum};

/// So many sums side by side.
const LANES: usize = 16;

type Lanes = [f64; LANES];

/// Half a unit in the last place of 1.
const UNIT: f64 = f64::EPSILON / 2.0;

/// Sums side by side, of terms that are added to each in turn.
#[derive(Clone, Debug)]
pub(crate) struct Compensated {
    high: Lanes,
    /// What rounding took from `high`.
    low: Lanes,
    /// The sums of the terms without their signs.
    gross: Lanes,
    /// How many terms each lane holds.
    depth: usize,
}

impl Compensated {
    pub(crate) fn new() -> Self {
        Compensated { high: [0.0; LANES], low: [0.0; LANES], gross: [0.0; LANES], depth: 0 }
    }

    /// Adds terms.
    pub(super) fn add(&mut self, terms: &[f64]) {
        add(self, terms);
    }

    /// Adds the products a_i b_i; the arrays have one length.
    pub(crate) fn add_products(&mut self, a: &[f64], b: &[f64]) {
        add_products(self, a, b);
    }

    /// The double nearest to the exact sum, if it can be told; not where the sum is 0 or not finite.
    pub(crate) fn total(self) -> Option<f64> {
        total(self)
    }

    /// Adds a term to each lane, given with what its own rounding took from it.
    #[inline(always)]
    fn step(&mut self, term: &Lanes, rest: &Lanes) {
        for i in 0..LANES {
            let sum = two_sum(self.high[i], term[i]);
            self.high[i] = sum.hi;
            self.low[i] += sum.lo + rest[i];
            self.gross[i] += term[i].abs();
        }
        self.depth += 1;
    }
}

/// The last, shorter chunk, filled up with zeros.
#[inline(always)]
fn padded(terms: &[f64]) -> Lanes {
    let mut lanes = [0.0; LANES];
    lanes[..terms.len()].copy_from_slice(terms);
    lanes
}

#[multiversion(targets = "simd")]
fn add(sums: &mut Compensated, terms: &[f64]) {
    let (chunks, rest) = terms.as_chunks();
    let mut sum = sums.clone();
    for chunk in chunks {
        sum.step(chunk, &[0.0; LANES]);
    }
    if !rest.is_empty() {
        sum.step(&padded(rest), &[0.0; LANES]);
    }
    *sums = sum;
}

#[multiversion(targets = "simd")]
fn add_products(sums: &mut Compensated, a: &[f64], b: &[f64]) {
    // Only where the processor has it is the fused operation the quicker.
    let fused = target_cfg_f!(target_feature = "fma");
    let mut sum = sums.clone();
    let ((a, end_a), (b, end_b)) = (a.as_chunks(), b.as_chunks());
    for (a, b) in a.iter().zip(b) {
        let (product, rest) = multiplied(a, b, fused);
        sum.step(&product, &rest);
    }
    if !end_a.is_empty() {
        let (product, rest) = multiplied(&padded(end_a), &padded(end_b), fused);
        sum.step(&product, &rest);
    }
    *sums = sum;
}

/// The rounded products and what rounding took from them, without error either way.
#[inline(always)]
fn multiplied(a: &Lanes, b: &Lanes, fused: bool) -> (Lanes, Lanes) {
    let (mut product, mut rest) = ([0.0; LANES], [0.0; LANES]);
    for i in 0..LANES {
        product[i] = a[i] * b[i];
        rest[i] = if fused { a[i].mul_add(b[i], -product[i]) } else { two_prod(a[i], b[i]).lo };
    }
    (product, rest)
}

#[multiversion(targets = "simd")]
fn total(sums: Compensated) -> Option<f64> {
    let Compensated { mut high, mut low, mut gross, depth } = sums;
    let mut half = LANES / 2;
    while half > 0 {
        for i in 0..half {
            let sum = two_sum(high[i], high[i + half]);
            high[i] = sum.hi;
            low[i] = low[i] + low[i + half] + sum.lo;
            gross[i] += gross[i + half];
        }
        half /= 2;
    }
    let (high, low, gross) = (high[0], low[0], gross[0]);
    // With m terms in a lane and u half a unit, a low part is below (m + 1) u gross, and each of the m + 10 steps that
    // made it lost at most u of that: (m + 10)^2 u^2 gross in all, taken four times, which covers the rounding of the
    // bound itself. Products too small for a normal number lose less than 2^-1070 each.
    let steps = (depth + LANES) as f64;
    let least = steps * LANES as f64 * f64::from_bits(1 << 4);
    let bound = 4.0 * (steps * UNIT) * (steps * UNIT) * gross + least + 4.0 * UNIT * low.abs();
    let (from, to) = (high + (low - bound), high + (low + bound));
    (from == to && from.is_finite()).then_some(from)
}
