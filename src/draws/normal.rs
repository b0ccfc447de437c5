//! The quantiles of the normal distribution, and its distribution function.

use multiversion::multiversion;

use super::flows::{ABREAST, Row};

/// Numerators and denominators of the three pieces, from the constant term up.
#[expect(clippy::excessive_precision, reason = "as published")]
const CENTRE: [[f64; 8]; 2] = [
    [
        3.387_132_872_796_366_608e0,
        1.331_416_678_917_843_774_5e2,
        1.971_590_950_306_551_442_7e3,
        1.373_169_376_550_946_112_5e4,
        4.592_195_393_154_987_145_7e4,
        6.726_577_092_700_870_085_3e4,
        3.343_057_558_358_812_810_5e4,
        2.509_080_928_730_122_672_7e3,
    ],
    [
        1.0,
        4.231_333_070_160_091_125_2e1,
        6.871_870_074_920_579_083e2,
        5.394_196_021_424_751_107_7e3,
        2.121_379_430_158_659_586_7e4,
        3.930_789_580_009_271_061e4,
        2.872_908_573_572_194_267_4e4,
        5.226_495_278_852_854_561e3,
    ],
];
#[expect(clippy::excessive_precision, reason = "as published")]
const TAIL: [[f64; 8]; 2] = [
    [
        1.423_437_110_749_683_577_34e0,
        4.630_337_846_156_545_295_9e0,
        5.769_497_221_460_691_405_5e0,
        3.647_848_324_763_204_605_04e0,
        1.270_458_252_452_368_382_58e0,
        2.417_807_251_774_506_117_7e-1,
        2.272_384_498_926_918_458_33e-2,
        7.745_450_142_783_414_076_4e-4,
    ],
    [
        1.0,
        2.053_191_626_637_758_821_87e0,
        1.676_384_830_183_803_849_4e0,
        6.897_673_349_851_000_045_5e-1,
        1.481_039_764_274_800_745_9e-1,
        1.519_866_656_361_645_719_66e-2,
        5.475_938_084_995_344_946e-4,
        1.050_750_071_644_416_843_24e-9,
    ],
];
#[expect(clippy::excessive_precision, reason = "as published")]
const FAR: [[f64; 8]; 2] = [
    [
        6.657_904_643_501_103_777_2e0,
        5.463_784_911_164_114_369_9e0,
        1.784_826_539_917_291_335_8e0,
        2.965_605_718_285_048_912_3e-1,
        2.653_218_952_657_612_309_3e-2,
        1.242_660_947_388_078_438_6e-3,
        2.711_555_568_743_487_578_15e-5,
        2.010_334_399_292_288_132_65e-7,
    ],
    [
        1.0,
        5.998_322_065_558_879_376_9e-1,
        1.369_298_809_227_358_053_1e-1,
        1.487_536_129_085_061_485_25e-2,
        7.868_691_311_456_132_591e-4,
        1.846_318_317_510_054_681_8e-5,
        1.421_511_758_316_445_888_7e-7,
        2.044_263_103_389_939_785_64e-15,
    ],
];

#[inline(always)]
fn ratio([top, bottom]: &[[f64; 8]; 2], x: f64) -> f64 {
    let polynomial = |c: &[f64; 8]| c.iter().rev().fold(0.0, |sum, c| sum * x + c);
    polynomial(top) / polynomial(bottom)
}

/// Probabilities nearer to 1/2 than this are in the centre, where a rational function alone gives the quantile.
const CENTRAL: f64 = 0.425;

/// The x below which a standard normal number falls with probability p, 0 < p < 1.
///
/// Relative error below 1e-15 (`tests/core/draws.rs` compares with arbitrary precision). The method is algorithm AS 241,
/// PPND16, of M. J. Wichura, "The percentage points of the normal distribution", Applied Statistics 37, 1988. Square
/// roots are correctly rounded and the logarithm is made of plain arithmetic, so that results are the same bits
/// everywhere.
#[inline]
pub(super) fn quantile(p: f64) -> f64 {
    if (p - 0.5).abs() <= CENTRAL { central(p) } else { outer(p) }
}

/// As [`quantile`], of many at once and to the same bits.
#[multiversion(targets = "simd")]
pub(super) fn quantiles(p: &Row) -> Row {
    let (mut x, mut far) = ([0.0; _], false);
    for i in 0..ABREAST {
        let r = depth(p[i]);
        x[i] = if (p[i] - 0.5).abs() <= CENTRAL { central(p[i]) } else { tail(p[i], r) };
        far |= r > NEAR;
    }
    if far { p.map(quantile) } else { x }
}

#[inline(always)]
fn central(p: f64) -> f64 {
    let q = p - 0.5;
    q * ratio(&CENTRE, CENTRAL * CENTRAL - q * q)
}

fn outer(p: f64) -> f64 {
    let r = depth(p);
    if r <= NEAR { tail(p, r) } else { signed(p, ratio(&FAR, r - 5.0)) }
}

/// How far a probability is out, sqrt(-ln p) or as much of 1 - p.
#[inline(always)]
fn depth(p: f64) -> f64 {
    (-ln(p.min(1.0 - p))).sqrt()
}

/// The depth beyond which a third rational function is needed; few draws in a hundred thousand million go there.
const NEAR: f64 = 5.0;

#[inline(always)]
fn tail(p: f64, depth: f64) -> f64 {
    signed(p, ratio(&TAIL, depth - 1.6))
}

#[inline(always)]
fn signed(p: f64, x: f64) -> f64 {
    if p < 0.5 { -x } else { x }
}

/// The natural logarithm of a normal number below 0.1, within two units in the last place.
#[inline(always)]
fn ln(p: f64) -> f64 {
    // p = 2^exponent m with m from sqrt(1/2) to sqrt(2), and ln m = 2 atanh((m - 1)/(m + 1)), whose terms fall fast.
    let bits = p.to_bits() + (0x3FF0_0000_0000_0000 - std::f64::consts::FRAC_1_SQRT_2.to_bits());
    let exponent = (bits >> 52) as i64 - 1023;
    let m = f64::from_bits(p.to_bits().wrapping_sub((exponent as u64) << 52));
    let z = (m - 1.0) / (m + 1.0);
    let square = z * z;
    let series = (1..12).rev().fold(0.0, |sum, n| (sum + 1.0 / f64::from(2 * n + 1)) * square);
    let near = 2.0 * z + 2.0 * z * series;
    exponent as f64 * std::f64::consts::LN_2 + near
}

/// The probability that a standard normal number falls below x, for x of 0 or less: the p whose quantile is x.
pub(super) fn lower_probability(x: f64) -> f64 {
    // Positive doubles are ordered as their bits are.
    let (mut low, mut high) = (f64::MIN_POSITIVE.to_bits(), 0.5f64.to_bits());
    while high - low > 1 {
        let middle = low + (high - low) / 2;
        if quantile(f64::from_bits(middle)) < x { low = middle } else { high = middle }
    }
    f64::from_bits(high)
}
