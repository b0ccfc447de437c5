//! Double-double arithmetic: powers and logarithms to about 100 bits, the same bits on every platform.
//!
//! A value is the unevaluated sum of two doubles. The platform's mathematical library is not used, because its
//! last bit differs between systems, and neither is a fused multiply-add, which is slow where the processor
//! lacks it. Logarithms are to base 2, so that splitting off powers of two loses nothing.
//!
//! Methods: T. J. Dekker, "A floating-point technique for extending the available precision", Numerische
//! Mathematik 18 (1971); D. E. Knuth, "The Art of Computer Programming", volume 2, section 4.2.2.

use std::ops::{Add, Div, Mul, Neg, Sub};

/// The sum `hi + lo`, `lo` being at most about half a unit in the last place of `hi`.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(crate) struct Dd {
    pub hi: f64,
    pub lo: f64,
}

/// a + b without error.
#[inline(always)]
pub(crate) const fn two_sum(a: f64, b: f64) -> Dd {
    let hi = a + b;
    let part = hi - a;
    Dd { hi, lo: (a - (hi - part)) + (b - part) }
}

/// a - b without error.
#[inline(always)]
pub(crate) const fn two_diff(a: f64, b: f64) -> Dd {
    two_sum(a, -b)
}

/// a + b without error, where |a| >= |b|.
#[inline(always)]
const fn quick_sum(a: f64, b: f64) -> Dd {
    let hi = a + b;
    Dd { hi, lo: b - (hi - a) }
}

/// The leading 26 bits of a, and the rest.
#[inline(always)]
const fn split(a: f64) -> Dd {
    let scaled = 134_217_729.0 * a;
    let hi = scaled - (scaled - a);
    Dd { hi, lo: a - hi }
}

/// a b without error (barring underflow, and for |a|, |b| below 2^990).
#[inline(always)]
pub(crate) const fn two_prod(a: f64, b: f64) -> Dd {
    let hi = a * b;
    let (x, y) = (split(a), split(b));
    Dd { hi, lo: ((x.hi * y.hi - hi) + x.hi * y.lo + x.lo * y.hi) + x.lo * y.lo }
}

impl Dd {
    pub(crate) const ZERO: Dd = Dd::of(0.0);
    pub(crate) const ONE: Dd = Dd::of(1.0);
    /// ln 2.
    pub(crate) const LN2: Dd =
        Dd { hi: f64::from_bits(0x3FE6_2E42_FEFA_39EF), lo: f64::from_bits(0x3C7A_BC9E_3B39_803F) };
    /// 1 / ln 2.
    pub(crate) const LOG2_E: Dd = Dd::ONE.over(Dd::LN2);

    #[inline(always)]
    pub(crate) const fn of(value: f64) -> Dd {
        Dd { hi: value, lo: 0.0 }
    }

    #[inline(always)]
    const fn plus(self, other: Dd) -> Dd {
        let high = two_sum(self.hi, other.hi);
        let low = two_sum(self.lo, other.lo);
        let first = quick_sum(high.hi, high.lo + low.hi);
        quick_sum(first.hi, first.lo + low.lo)
    }

    #[inline(always)]
    const fn minus(self, other: Dd) -> Dd {
        self.plus(Dd { hi: -other.hi, lo: -other.lo })
    }

    #[inline(always)]
    const fn times(self, other: Dd) -> Dd {
        let high = two_prod(self.hi, other.hi);
        quick_sum(high.hi, high.lo + (self.hi * other.lo + self.lo * other.hi))
    }

    const fn over(self, other: Dd) -> Dd {
        let first = self.hi / other.hi;
        let rest = self.minus(other.times(Dd::of(first)));
        let second = rest.hi / other.hi;
        let rest = rest.minus(other.times(Dd::of(second)));
        let third = rest.hi / other.hi;
        let high = quick_sum(first, second);
        high.plus(Dd::of(third))
    }

    /// The value times 2^power.
    #[inline(always)]
    pub(crate) const fn scaled(self, power: i64) -> Dd {
        let (near, far) = (power_of_two(power >> 1), power_of_two(power - (power >> 1)));
        Dd { hi: self.hi * near * far, lo: self.lo * near * far }
    }
}

impl Add for Dd {
    type Output = Dd;
    #[inline(always)]
    fn add(self, other: Dd) -> Dd {
        self.plus(other)
    }
}

impl Sub for Dd {
    type Output = Dd;
    #[inline(always)]
    fn sub(self, other: Dd) -> Dd {
        self.minus(other)
    }
}

impl Mul for Dd {
    type Output = Dd;
    #[inline(always)]
    fn mul(self, other: Dd) -> Dd {
        self.times(other)
    }
}

impl Mul<f64> for Dd {
    type Output = Dd;
    #[inline(always)]
    fn mul(self, other: f64) -> Dd {
        self.times(Dd::of(other))
    }
}

impl Div for Dd {
    type Output = Dd;
    #[inline]
    fn div(self, other: Dd) -> Dd {
        self.over(other)
    }
}

impl Neg for Dd {
    type Output = Dd;
    #[inline(always)]
    fn neg(self) -> Dd {
        Dd { hi: -self.hi, lo: -self.lo }
    }
}

/// 2^power for |power| up to 1022.
#[inline(always)]
const fn power_of_two(power: i64) -> f64 {
    f64::from_bits(((power + 1023) as u64) << 52)
}

/// 2^(j/64) for j from 0 to 64.
static STEPS: [Dd; 65] = {
    let mut steps = [Dd::ONE; 65];
    let mut j = 1;
    while j < 64 {
        let x = Dd::LN2.times(Dd::of(j as f64 / 64.0));
        // The exponential series, from its last term inwards; x < 0.7 leaves a remainder below 2^-110.
        let mut term = 32;
        while term > 0 {
            steps[j] = Dd::ONE.plus(x.times(steps[j]).over(Dd::of(term as f64)));
            term -= 1;
        }
        j += 1;
    }
    steps[64] = Dd::of(2.0);
    steps
};

/// The coefficients ln(2)^n / n! of 2^f - 1, n from 1 to 6.
const SERIES: [f64; 6] = {
    let mut series = [0.0; 6];
    let mut power = Dd::ONE;
    let mut n = 0;
    while n < 6 {
        power = power.times(Dd::LN2).over(Dd::of((n + 1) as f64));
        series[n] = power.hi;
        n += 1;
    }
    series
};

/// 1 / n!, the coefficients of e^x - 1, n from 1 to 13.
static INVERSE_FACTORIALS: [Dd; 13] = {
    let mut inverses = [Dd::ONE; 13];
    let mut n = 1;
    while n < 13 {
        inverses[n] = inverses[n - 1].over(Dd::of((n + 1) as f64));
        n += 1;
    }
    inverses
};

/// 1 / (2n + 1), the coefficients of atanh(z) / z in z^2, n from 0 to 8.
static INVERSE_ODDS: [Dd; 9] = {
    let mut inverses = [Dd::ONE; 9];
    let mut n = 1;
    while n < 9 {
        inverses[n] = Dd::ONE.over(Dd::of((2 * n + 1) as f64));
        n += 1;
    }
    inverses
};

/// Adding this rounds a number below 2^51 to a whole one, which then stands in the low bits.
pub(crate) const ROUNDER: f64 = 6_755_399_441_055_744.0;

/// y as whole 64ths and a rest of at most 1/128.
#[inline(always)]
fn whole_64ths(y: f64) -> (i64, f64) {
    let shifted = y * 64.0 + ROUNDER;
    let whole = shifted - ROUNDER;
    (shifted.to_bits() as i64 - ROUNDER.to_bits() as i64, y - whole * (1.0 / 64.0))
}

/// 2^y with a relative error below 2^-58, so that `hi` is within 0.52 units in the last place.
///
/// Beyond the range of doubles the result is 0 or infinite.
#[inline(always)]
pub(crate) fn exp2(y: Dd) -> Dd {
    // Beyond 2040 either way the answer is settled, and the rounding trick would fail far out.
    let (k, rest) = whole_64ths(y.hi.clamp(-2040.0, 2040.0));
    let f = rest + y.lo;
    let step = STEPS[(k & 63) as usize];
    let c = SERIES;
    let f2 = f * f;
    let p = f * ((c[0] + c[1] * f) + f2 * ((c[2] + c[3] * f) + f2 * (c[4] + c[5] * f)));
    quick_sum(step.hi, step.lo + step.hi * p).scaled(k >> 6)
}

/// 2^y - 1 to about 100 bits, also where y is small.
pub(crate) fn exp2_m1(y: Dd) -> Dd {
    if y.hi.abs() > 1100.0 {
        return exp2(y) - Dd::ONE;
    }
    let (k, rest) = whole_64ths(y.hi);
    let x = two_sum(rest, y.lo) * Dd::LN2;
    // |x| < 0.0055 leaves a remainder below 2^-110 of the sum.
    let p = INVERSE_FACTORIALS.iter().rev().fold(Dd::ZERO, |sum, &c| (sum + c) * x);
    if k == 0 {
        return p;
    }
    let step = STEPS[(k & 63) as usize];
    (step + step * p).scaled(k >> 6) - Dd::ONE
}

/// log2(1 + u) for |u| up to 2^-7, relative error below 2^-98.
fn log2_near_one(u: Dd) -> Dd {
    // 2 atanh(u / (2 + u)), whose series has only odd powers.
    let z = u / (Dd::of(2.0) + u);
    let square = z * z;
    let sum = INVERSE_ODDS.iter().rev().fold(Dd::ZERO, |sum, &c| sum * square + c);
    z * sum * Dd::LOG2_E * 2.0
}

/// log2(v) for a positive normal v to about 100 bits.
pub(crate) fn log2(v: Dd) -> Dd {
    let exponent = (v.hi.to_bits() >> 52) as i64 - 1023;
    let m = v.scaled(-exponent);
    // The nearest 2^(j/64), from a guess that is never too high, since log2(m) >= m - 1 on [1, 2].
    let mut j = (((m.hi - 1.0) * 64.0) as usize).min(63);
    while j < 64 && m.hi * m.hi > STEPS[j].hi * STEPS[j + 1].hi {
        j += 1;
    }
    let u = m / STEPS[j] - Dd::ONE;
    Dd::of(exponent as f64 + j as f64 / 64.0) + log2_near_one(u)
}

/// log2(1 + x) for x > -1 to about 100 bits, also where x is small.
pub(crate) fn log2_1p(x: Dd) -> Dd {
    if x.hi.abs() < 0.0078 { log2_near_one(x) } else { log2(Dd::ONE + x) }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn near(found: Dd, hi: f64, lo: f64, bits: i32) {
        let error = (found - Dd { hi, lo }).hi.abs() / hi.abs();
        assert!(error < 2f64.powi(-bits), "{found:?} is not {hi:e} + {lo:e}: {error:e}");
    }

    #[test]
    fn sums_and_products_lose_nothing() {
        assert_eq!(two_sum(1.0, 1e-30), Dd { hi: 1.0, lo: 1e-30 });
        // (2^27 + 1)^2 = 2^54 + 2^28 + 1 has 55 bits.
        let product = two_prod(134_217_729.0, 134_217_729.0);
        assert_eq!(product.hi as i128 + product.lo as i128, 134_217_729i128 * 134_217_729);
    }

    #[test]
    fn powers_of_one_half_are_exact() {
        for n in 0..1074 {
            let exact = if n <= 1022 { power_of_two(-n) } else { f64::from_bits(1 << (1074 - n)) };
            assert_eq!(exp2(Dd::of(-n as f64)).hi, exact, "2^-{n}");
        }
        assert_eq!(exp2(Dd::of(1024.0)).hi, f64::INFINITY);
        assert_eq!(exp2(Dd::of(-1e15)).hi, 0.0);
        assert_eq!(exp2(Dd::of(1e15)).hi, f64::INFINITY);
    }

    #[test]
    fn logarithms_of_powers_of_two_are_exact() {
        for n in -1022..1023 {
            assert_eq!(log2(Dd::of(power_of_two(n))), Dd::of(n as f64));
        }
    }

    /// The square root of 2, log2(3) and e - 1 to 33 digits, computed with Python's decimal module.
    #[test]
    fn known_constants_come_out_to_100_bits() {
        near(exp2_m1(Dd::of(0.5)) + Dd::ONE, std::f64::consts::SQRT_2, -9.667_293_313_452_913e-17, 100);
        near(log2(Dd::of(3.0)), 1.584_962_500_721_156, 1.057_978_124_011_255_4e-16, 98);
        near(exp2_m1(Dd::LOG2_E), 1.718_281_828_459_045_3, -7.747_991_575_210_629e-17, 98);
    }

    #[test]
    fn small_arguments_keep_their_relative_accuracy() {
        for n in [10, 30, 100, 300] {
            let x = power_of_two(-n);
            near(exp2_m1(log2_1p(Dd::of(x))), x, 0.0, 96);
        }
    }
}
