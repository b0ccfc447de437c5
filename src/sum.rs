//! Sums that do not depend on the order of their terms.
//!
//! Terms and products are added as whole numbers into one long fixed-point register that spans every double and
//! every product of two doubles, so nothing is lost on the way and one rounding is left for the end. The idea of a
//! long accumulator is U. Kulisch's ("Computer Arithmetic and Validity", 2nd edition, 2013, chapter 8).

mod compensated;

pub(crate) use compensated::Compensated;

/// The weight of the register's lowest bit, 2^-2176: below the last bit of the smallest product, 2^-2148.
const LOWEST: i64 = -2176;
/// Limbs of 32 bits; the highest bit, 2^2207, leaves room for 2^159 products of the largest doubles.
const LIMBS: usize = 137;
/// Each addition puts less than 2^32 into a limb of 63 bits, so carries can wait this long.
const PATIENCE: u32 = 1 << 30;

/// An accumulator whose total is the exact sum, rounded once (to nearest, ties to even).
///
/// **Accuracy**: [`ExactSum::total`] is the double nearest to the exact sum of everything added, products being
/// exact too. So the order does not matter, and large terms that cancel leave nothing behind.
///
/// **Edge cases**: nothing added is 0. Infinities and NaN follow the usual rules (infinity less infinity is NaN);
/// a sum beyond the largest double is infinite, though intermediate sums never overflow.
///
/// ```
/// use hence_core::ExactSum;
/// let mut sum = ExactSum::default();
/// for term in [1e300, 1.0, -1e300] {
///     sum.add(term);
/// }
/// assert_eq!(sum.total(), 1.0);
/// ```
#[derive(Clone, Debug)]
pub struct ExactSum {
    limbs: [i64; LIMBS],
    /// Additions since the carries were last passed on.
    pending: u32,
    /// The sum of the terms that are not finite.
    unbounded: f64,
}

impl Default for ExactSum {
    fn default() -> Self {
        ExactSum { limbs: [0; LIMBS], pending: 0, unbounded: 0.0 }
    }
}

impl ExactSum {
    /// An empty sum.
    pub fn new() -> Self {
        ExactSum::default()
    }

    /// Adds a term.
    pub fn add(&mut self, term: f64) {
        if term.is_finite() {
            let (negative, digits, exponent) = parts(term);
            self.add_scaled(negative, u128::from(digits), exponent);
        } else {
            self.unbounded += term;
        }
    }

    /// Adds the product of two numbers without rounding it.
    pub fn add_product(&mut self, a: f64, b: f64) {
        if a.is_finite() && b.is_finite() {
            let (x, y) = (parts(a), parts(b));
            self.add_scaled(x.0 != y.0, u128::from(x.1) * u128::from(y.1), x.2 + y.2);
        } else {
            self.unbounded += a * b;
        }
    }

    /// The sum of everything added, rounded once.
    pub fn total(&self) -> f64 {
        if self.unbounded != 0.0 || self.unbounded.is_nan() {
            return self.unbounded;
        }
        let mut limbs = self.limbs;
        pass_carries(&mut limbs);
        let negative = limbs[LIMBS - 1] < 0;
        if negative {
            for limb in &mut limbs {
                *limb = -*limb;
            }
            pass_carries(&mut limbs);
        }
        let magnitude = rounded(&limbs);
        if negative { -magnitude } else { magnitude }
    }

    /// Adds digits 2^exponent.
    fn add_scaled(&mut self, negative: bool, digits: u128, exponent: i64) {
        if digits == 0 {
            return;
        }
        let place = exponent - LOWEST;
        let (mut limb, shift) = ((place / 32) as usize, place % 32);
        // The lowest limb takes what fits below its end; the rest is then aligned.
        let low = (digits << shift) as u32;
        let mut rest = digits >> (32 - shift);
        let signed = |part: u32| if negative { -i64::from(part) } else { i64::from(part) };
        self.limbs[limb] += signed(low);
        while rest != 0 {
            limb += 1;
            self.limbs[limb] += signed(rest as u32);
            rest >>= 32;
        }
        self.pending += 1;
        if self.pending == PATIENCE {
            pass_carries(&mut self.limbs);
            self.pending = 0;
        }
    }
}

/// Sign, digits and exponent of a finite number: digits 2^exponent.
fn parts(value: f64) -> (bool, u64, i64) {
    let bits = value.to_bits();
    let (exponent, fraction) = ((bits >> 52 & 0x7FF) as i64, bits & ((1 << 52) - 1));
    let digits = if exponent == 0 { fraction } else { fraction | 1 << 52 };
    (value.is_sign_negative(), digits, exponent.max(1) - 1075)
}

/// Leaves 0 to 2^32 - 1 in every limb but the highest, which keeps the sign.
fn pass_carries(limbs: &mut [i64; LIMBS]) {
    let mut carry = 0;
    for limb in &mut limbs[..LIMBS - 1] {
        let value = *limb + carry;
        *limb = value & 0xFFFF_FFFF;
        carry = value >> 32;
    }
    limbs[LIMBS - 1] += carry;
}

/// The double nearest to a register that is not negative and has no carries.
fn rounded(limbs: &[i64; LIMBS]) -> f64 {
    let Some(top) = limbs.iter().rposition(|&limb| limb != 0) else { return 0.0 };
    // The leading 97 to 128 bits, the last of which records whether anything follows.
    let window = |k: usize| if top >= k { limbs[top - k] as u128 } else { 0 };
    let mut digits = window(0) << 96 | window(1) << 64 | window(2) << 32 | window(3);
    if top > 3 && limbs[..top - 3].iter().any(|&limb| limb != 0) {
        digits |= 1;
    }
    let length = 128 - i64::from(digits.leading_zeros());
    let bottom = LOWEST + 32 * (top as i64 - 3);
    let highest = bottom + length - 1;
    // 53 bits, or as many as stand above the last bit of the smallest double.
    let kept = (highest + 1075).min(53);
    if kept < 0 {
        return 0.0;
    }
    let dropped = length - kept;
    let (mut whole, rest) =
        if dropped >= 128 { (0, digits) } else { (digits >> dropped, digits & ((1 << dropped) - 1)) };
    let half = 1u128 << (dropped - 1);
    if rest > half || (rest == half && whole & 1 == 1) {
        whole += 1;
    }
    let exponent = bottom + dropped;
    if exponent == -1074 {
        // Below twice the smallest normal number, the bits of a double count its units of 2^-1074.
        return f64::from_bits(whole as u64);
    }
    if exponent > 971 {
        return f64::INFINITY;
    }
    let biased = (exponent + 1075) as u64;
    if whole == 1 << 53 {
        // Rounding up reached the next power of two; at the top of the range that is infinity, whose bits follow.
        return f64::from_bits((biased + 1) << 52);
    }
    f64::from_bits(biased << 52 | (whole as u64 & ((1 << 52) - 1)))
}

/// The sum of the terms, rounded once, whatever their order.
///
/// **Arguments**: `terms`, any length; none gives 0.
///
/// **Accuracy**: the double nearest to the exact sum; see [`ExactSum`].
///
/// ```
/// assert_eq!(hence_core::sum(&[0.1; 10]), 1.0);
/// assert_eq!(hence_core::sum(&[1e16, 1.0, -1e16]), 1.0);
/// ```
pub fn sum(terms: &[f64]) -> f64 {
    let mut quick = Compensated::new();
    quick.add(terms);
    quick.total().unwrap_or_else(|| {
        let mut sum = ExactSum::new();
        for &term in terms {
            sum.add(term);
        }
        sum.total()
    })
}

/// The sum of the products a_i b_i, rounded once, whatever their order.
///
/// **Arguments**: `a` and `b` of the same length (flows and factors, say); none gives 0.
///
/// **Accuracy**: the double nearest to the exact sum of the exact products; see [`ExactSum`].
///
/// # Panics
///
/// Where the lengths differ, as slices do: pairing what is left would give a sum of something else. Functions of this
/// library that take such arrays from a user return a `Shape` error before they come here.
///
/// ```
/// assert_eq!(hence_core::dot(&[100.0, 100.0], &[1.0, 0.5]), 150.0);
/// ```
pub fn dot(a: &[f64], b: &[f64]) -> f64 {
    assert_eq!(a.len(), b.len(), "a sum of products needs two arrays of the same length");
    let mut quick = Compensated::new();
    quick.add_products(a, b);
    quick.total().unwrap_or_else(|| {
        let mut sum = ExactSum::new();
        for (&x, &y) in a.iter().zip(b) {
            sum.add_product(x, y);
        }
        sum.total()
    })
}
