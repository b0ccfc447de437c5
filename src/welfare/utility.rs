//! Isoelastic utility, its slope, and the equally-distributed equivalent of unequal consumption.

use crate::curve::{check_elasticity, check_finite as finite};
use crate::dd::{Dd, exp2, exp2_m1, log2, log2_1p, two_diff, two_sum};
use crate::{Error, ErrorKind, ExactSum, Result, check};

/// How far the shares may miss a sum of 1.
const SHARES: f64 = 1e-12;

/// The utility of a consumption, with a constant elasticity of its marginal utility.
///
/// **Formula**: U(c) = (c^(1-eta) - 1)/(1 - eta), and ln c at eta = 1, its limit there.
///
/// **Arguments**: `consumption`, c, a head and year, above 0 in any unit of money; `elasticity`, eta, of marginal
/// utility, 0 to 20.
///
/// **Returns**: utility, 0 at a consumption of 1. Its size depends on the unit of c; only which of two situations is
/// better, and ratios of differences, have a meaning.
///
/// **Accuracy**: within 1 unit in the last place, also for an elasticity as near to 1 as a double can be.
///
/// **Errors**: `NotFinite`; `NoMeaning` for a consumption of 0 or less; `RateRange` for the elasticity; a utility too
/// large for a number is `NotFinite`.
///
/// **Source**: A. B. Atkinson, "On the measurement of inequality", Journal of Economic Theory 2, 1970; the constant -1,
/// which makes the logarithm its limit, is the usual one and changes no comparison.
///
/// ```
/// use hence_core::utility;
/// assert_eq!(utility(4.0, 2.0)?, 0.75); // (1/4 - 1)/(-1)
/// assert_eq!(utility(30_000.0, 1.0)?, 30_000f64.ln());
/// assert_eq!(utility(0.0, 1.5).unwrap_err().to_string(),
///     "consumption: consumption is 0, and utility needs a consumption above 0 (no-meaning)");
/// # Ok::<(), hence_core::Error>(())
/// ```
pub fn utility(consumption: f64, elasticity: f64) -> Result<f64> {
    positive("consumption", consumption)?;
    check_elasticity(elasticity)?;
    let level = power_mean(complement(elasticity), log2(Dd::of(consumption)));
    check::result("consumption", level.hi)
}

/// The utility of one more unit of consumption.
///
/// **Formula**: U'(c) = c^-eta.
///
/// **Arguments**: `consumption`, c, above 0; `elasticity`, eta, 0 to 20.
///
/// **Returns**: utility per unit of consumption.
///
/// **Accuracy**: within 1 unit in the last place.
///
/// **Errors**: as for [`utility`].
///
/// **Source**: as for [`utility`].
///
/// ```
/// use hence_core::marginal_utility;
/// assert_eq!(marginal_utility(4.0, 2.0)?, 0.0625);
/// // One unit more is worth 1.3^1.5 times as much to a head with 20,000 as to one with 26,000.
/// let ratio = marginal_utility(20_000.0, 1.5)?/marginal_utility(26_000.0, 1.5)?;
/// assert!((ratio - 1.3f64.powf(1.5)).abs() < 1e-14);
/// assert!(marginal_utility(-4.0, 2.0).is_err());
/// # Ok::<(), hence_core::Error>(())
/// ```
pub fn marginal_utility(consumption: f64, elasticity: f64) -> Result<f64> {
    positive("consumption", consumption)?;
    check_elasticity(elasticity)?;
    check::result("consumption", exp2(-(log2(Dd::of(consumption)) * elasticity)).hi)
}

/// The consumption which, had everybody that much, would give the welfare that an unequal distribution gives.
///
/// **Formula**: (sum of s_i c_i^(1-eta))^(1/(1-eta)), and exp(sum of s_i ln c_i) at eta = 1.
///
/// **Arguments**: `consumption`, c_i, of each group a head, above 0; `shares`, s_i, of each group in the population, 0
/// or more, as many, summing to 1; `elasticity`, eta, 0 to 20.
///
/// **Returns**: consumption a head, in the unit of `consumption`: the mean at an elasticity of 0, less than the mean
/// above it unless all have the same.
///
/// **Edge cases**: no group is an error; a group with a share of 0 counts for nothing.
///
/// **Accuracy**: within 2 units in the last place, also near an elasticity of 1.
///
/// **Errors**: `Shape` for no group and for lengths that differ; `NotFinite`; `NoMeaning` for a consumption of 0 or
/// less; `Weights` for a negative share, and for shares that do not sum to 1; `RateRange` for the elasticity.
///
/// **Source**: A. B. Atkinson, "On the measurement of inequality", Journal of Economic Theory 2, 1970; his index of
/// inequality is 1 less this over the mean.
///
/// ```
/// use hence_core::equally_distributed_equivalent;
/// // Half the people with 1, half with 4: the geometric mean at 1, the harmonic mean at 2.
/// assert_eq!(equally_distributed_equivalent(&[1.0, 4.0], &[0.5, 0.5], 1.0)?, 2.0);
/// assert_eq!(equally_distributed_equivalent(&[1.0, 4.0], &[0.5, 0.5], 2.0)?, 1.6);
/// let error = equally_distributed_equivalent(&[1.0, 4.0], &[0.5, 0.6], 2.0).unwrap_err();
/// assert_eq!(error.to_string(), "shares: the shares sum to 1.1, not 1 (weights)");
/// # Ok::<(), hence_core::Error>(())
/// ```
pub fn equally_distributed_equivalent(consumption: &[f64], shares: &[f64], elasticity: f64) -> Result<f64> {
    check::same_length(("consumption", consumption), ("shares", shares))?;
    check_elasticity(elasticity)?;
    each_positive("consumption", consumption)?;
    let refuse = |message: String| Error::new(ErrorKind::Weights, "shares", message);
    for (index, &share) in shares.iter().enumerate() {
        finite("shares", share).map_err(|error| error.with_index(index))?;
        if share < 0.0 {
            return Err(refuse(format!("the share is {share}, allowed 0 to 1")).with_index(index));
        }
    }
    // The least consumption as the unit keeps high elasticities from overflowing.
    let Some(least) = consumption.iter().copied().reduce(f64::min) else {
        return Err(Error::new(ErrorKind::Shape, "consumption", "there is no group")
            .with_hint("the consumption and the share of at least one group"));
    };
    let all = add_up(shares.iter().map(|&share| Dd::of(share)));
    if (all - Dd::ONE).hi.abs() > SHARES {
        let all = all.hi;
        return Err(refuse(format!("the shares sum to {all}, not 1"))
            .with_hint(format!("each share divided by {all}")));
    }
    let (order, unit) = (complement(elasticity), log2(Dd::of(least)));
    let gains = consumption.iter().zip(shares).map(|(&c, &share)| {
        let gain = power_mean(order, log2(Dd::of(c)) - unit);
        gain * share
    });
    // Rounding of the shares' sum is not the distribution's doing.
    let mean = add_up(gains) / all;
    match back(order, mean) {
        Some(ratio) => check::result("consumption", (Dd::of(least) + Dd::of(least) * ratio).hi),
        None => Err(Error::new(
            ErrorKind::NotFinite,
            "consumption",
            "the groups differ by more than numbers can hold",
        )),
    }
}

/// 1 - eta, exactly.
pub(super) fn complement(elasticity: f64) -> Dd {
    two_diff(1.0, elasticity)
}

/// (x^k - 1)/k where x = 2^`log`, and ln x at k = 0.
pub(super) fn power_mean(k: Dd, log: Dd) -> Dd {
    if k.hi == 0.0 { log * Dd::LN2 } else { exp2_m1(k * log) / k }
}

/// The z for which ((1 + z)^k - 1)/k is `gain`; none where no z gives as much.
pub(super) fn back(k: Dd, gain: Dd) -> Option<Dd> {
    if k.hi == 0.0 {
        return Some(exp2_m1(gain * Dd::LOG2_E));
    }
    let reach = k * gain;
    // Below 1 less the last bit, the power is 0 or negative.
    ((Dd::ONE + reach).hi > 0.0).then(|| exp2_m1(log2_1p(reach) / k))
}

/// log2((c + x)/c), also where x is small against c; c and c + x are above 0.
pub(super) fn log_ratio(c: f64, x: f64) -> Dd {
    if x.abs() < c / 128.0 { log2_1p(Dd::of(x) / Dd::of(c)) } else { log2(two_sum(c, x)) - log2(Dd::of(c)) }
}

/// A sum of double-doubles whose order does not matter.
pub(super) fn add_up(terms: impl Iterator<Item = Dd>) -> Dd {
    let mut sum = ExactSum::new();
    for term in terms {
        sum.add(term.hi);
        sum.add(term.lo);
    }
    let hi = sum.total();
    sum.add(-hi);
    Dd { hi, lo: sum.total() }
}

/// Refuses a consumption that utility is not defined for.
pub(super) fn positive(name: &'static str, value: f64) -> Result<()> {
    finite(name, value)?;
    if value >= f64::MIN_POSITIVE {
        return Ok(());
    }
    let message = format!("{name} is {value}, and utility needs a consumption above 0");
    Err(Error::new(ErrorKind::NoMeaning, name, message))
}

/// Refuses such a consumption in an array, naming its index.
pub(super) fn each_positive(name: &'static str, values: &[f64]) -> Result<()> {
    let mut each = values.iter().enumerate();
    each.try_for_each(|(index, &value)| positive(name, value).map_err(|error| error.with_index(index)))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn gains_come_back_as_the_ratio_that_made_them() {
        for eta in [0.0, 0.5, 1.0 - f64::EPSILON, 1.0, 1.0 + f64::EPSILON, 1.5, 2.0, 20.0] {
            for ratio in [-0.9, -0.1, -1e-9, 0.0, 1e-12, 0.25, 3.0] {
                let k = complement(eta);
                let found = back(k, power_mean(k, log_ratio(1.0, ratio))).expect("within reach").hi;
                assert!((found - ratio).abs() <= 1e-15 * ratio.abs(), "{eta} {ratio}: {found}");
            }
        }
    }

    #[test]
    fn utility_has_a_ceiling_above_an_elasticity_of_1_and_a_floor_below() {
        // (x^-1 - 1)/(-1) stays below 1; (x^0.5 - 1)/0.5 stays above -2.
        assert!(
            back(complement(2.0), Dd::of(0.999)).is_some() && back(complement(2.0), Dd::of(1.0)).is_none()
        );
        assert!(
            back(complement(0.5), Dd::of(-1.999)).is_some() && back(complement(0.5), Dd::of(-2.0)).is_none()
        );
    }
}
