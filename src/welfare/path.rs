//! Consumption over time: its welfare, the factors it implies, and shifts that leave welfare as it was.

use super::utility::{back, complement, each_positive, log_ratio, positive, power_mean};
use crate::curve::{check_elasticity, check_finite as finite};
use crate::dd::{Dd, exp2, exp2_m1, log2, log2_1p};
use crate::{Compounding, Error, ErrorKind, ExactSum, Result, check};

/// The welfare of a path of consumption.
///
/// **Formula**: sum over t of U(c_t)/(1 + rho)^t with yearly compounding, of U(c_t) exp(-rho t) with continuous, U being
/// [`crate::utility`].
///
/// **Arguments**: `consumption`, c_t, a head, above 0; `offsets`, t, in years from the base, as many, in any order;
/// `rho`, pure time preference and hazard together, a fraction per year, above -1 with yearly compounding;
/// `elasticity`, eta, 0 to 20.
///
/// **Returns**: utility at the base. As for utility, only which of two paths is better, and ratios of differences, have
/// a meaning.
///
/// **Edge cases**: no year gives 0.
///
/// **Accuracy**: each term to 57 bits, and the sum rounded once, whatever the order.
///
/// **Errors**: `Shape` where lengths differ; `NotFinite`, with the index; `NoMeaning` for a consumption of 0 or less,
/// with the index; `RateRange` for rho and the elasticity.
///
/// **Source**: F. Ramsey, "A mathematical theory of saving", Economic Journal 38, 1928, with discounting of utility as
/// in T. C. Koopmans, "Stationary ordinal utility and impatience", Econometrica 28, 1960.
///
/// ```
/// use hence_core::{Compounding::Yearly, welfare};
/// // U(c) = 1 - 1/c at an elasticity of 2: 0.5 + 0.75/1.25.
/// assert_eq!(welfare(&[2.0, 4.0], &[0.0, 1.0], 0.25, 2.0, Yearly)?, 1.1);
/// let growing: Vec<f64> = (0..100).map(|t| 26_000.0 * 1.02f64.powi(t)).collect();
/// let years: Vec<f64> = (0..100).map(f64::from).collect();
/// assert!(welfare(&growing, &years, 0.015, 1.0, Yearly)? > welfare(&[26_000.0; 100], &years, 0.015, 1.0, Yearly)?);
/// let error = welfare(&[2.0, 0.0], &[0.0, 1.0], 0.015, 2.0, Yearly).unwrap_err();
/// assert_eq!((error.code(), error.index()), ("no-meaning", Some(1)));
/// # Ok::<(), hence_core::Error>(())
/// ```
pub fn welfare(
    consumption: &[f64],
    offsets: &[f64],
    rho: f64,
    elasticity: f64,
    compounding: Compounding,
) -> Result<f64> {
    check::same_length(("consumption", consumption), ("offsets", offsets))?;
    each_positive("consumption", consumption)?;
    check::finite_all("offsets", offsets)?;
    let (slope, k) = (preference_slope(rho, compounding)?, checked_complement(elasticity)?);
    let mut sum = ExactSum::new();
    for (&c, &t) in consumption.iter().zip(offsets) {
        let term = exp2(slope * t) * power_mean(k, log2(Dd::of(c)));
        sum.add(term.hi);
        sum.add(term.lo);
    }
    check::result("consumption", sum.total())
}

/// The discount factors along a path of consumption: what one small unit at each date is worth at the base.
///
/// **Formula**: D(t) = (c_0/c_t)^eta/(1 + rho)^t with yearly compounding, (c_0/c_t)^eta exp(-rho t) with continuous.
///
/// **Arguments**: as for [`welfare`]; `base`, c_0, the consumption at the base, above 0.
///
/// **Returns**: a factor for each offset, in order. Their sum of products with a project's flows
/// ([`crate::net_present_value`] and its like) is the marginal value of the project; on a path that grows at g a year
/// they are the factors of [`ramsey_rate_exact`].
///
/// **Accuracy**: within 1 unit in the last place.
///
/// **Errors**: as for [`welfare`].
///
/// **Source**: C. Gollier, Pricing the Planet's Future, 2013, ch. 2 (marginal rate of substitution), from memory.
///
/// ```
/// use hence_core::{Compounding::Yearly, welfare_factors};
/// let factors = welfare_factors(&[100.0, 125.0], &[0.0, 1.0], 100.0, 0.25, 2.0, Yearly)?;
/// assert_eq!(factors, [1.0, 0.512]); // (100/125)^2/1.25
/// assert!(welfare_factors(&[100.0], &[0.0, 1.0], 100.0, 0.25, 2.0, Yearly).is_err());
/// # Ok::<(), hence_core::Error>(())
/// ```
pub fn welfare_factors(
    consumption: &[f64],
    offsets: &[f64],
    base: f64,
    rho: f64,
    elasticity: f64,
    compounding: Compounding,
) -> Result<Vec<f64>> {
    check::same_length(("consumption", consumption), ("offsets", offsets))?;
    each_positive("consumption", consumption)?;
    check::finite_all("offsets", offsets)?;
    positive("base", base)?;
    check_elasticity(elasticity)?;
    let (slope, at_base) = (preference_slope(rho, compounding)?, log2(Dd::of(base)));
    let factor = |(index, (&c, &t)): (usize, (&f64, &f64))| {
        let factor = exp2(slope * t + (at_base - log2(Dd::of(c))) * elasticity).hi;
        check::result("consumption", factor).map_err(|error| error.with_index(index))
    };
    consumption.iter().zip(offsets).enumerate().map(factor).collect()
}

/// The social discount rate by the exact Ramsey rule with yearly compounding.
///
/// **Formula**: (1 + rho)(1 + g)^eta - 1. With continuous compounding the rule is rho + eta g for g = ln(c_t/c_0)/t,
/// which is [`crate::ramsey_rate`].
///
/// **Arguments**: `rho`, a fraction per year above -1; `eta`, elasticity of marginal utility, 0 to 20; `g`, growth of
/// consumption per head, a fraction per year above -1.
///
/// **Returns**: a fraction per year.
///
/// **Accuracy**: within 1 unit in the last place of the exact rate, also near 0.
///
/// **Errors**: `NotFinite`; `RateRange` at or below -1, and for the elasticity.
///
/// **Source**: as for [`crate::ramsey_rate`]; the exact form follows from [`welfare_factors`].
///
/// ```
/// use hence_core::ramsey_rate_exact;
/// assert_eq!(ramsey_rate_exact(0.25, 2.0, 0.5)?, 1.8125); // 1.25 x 2.25 - 1
/// // 3.53%, where the linear rule gives 3.5%.
/// assert_eq!(format!("{:.4}", ramsey_rate_exact(0.015, 1.0, 0.02)?), "0.0353");
/// assert_eq!(ramsey_rate_exact(0.015, 1.0, -1.0).unwrap_err().code(), "rate-range");
/// # Ok::<(), hence_core::Error>(())
/// ```
pub fn ramsey_rate_exact(rho: f64, eta: f64, g: f64) -> Result<f64> {
    above_minus_one("rho", rho)?;
    check_elasticity(eta)?;
    above_minus_one("g", g)?;
    check::result("rate", exp2_m1(log2_1p(Dd::of(rho)) + log2_1p(Dd::of(g)) * eta).hi)
}

/// What must be received later so that giving up an amount now leaves welfare as it was.
///
/// **Formula**: the y for which U(now) - U(now - x) = d [U(then + y) - U(then)], with d = (1 + rho)^-t or exp(-rho t).
///
/// **Arguments**: `amount`, x, given up now; negative where it is received now and y is given up later; `now` and
/// `then`, consumption at the two dates before the shift, above 0, in the unit of x; `years`, t, from the one to the
/// other, of either sign; `rho`, a fraction per year; `elasticity`, eta, 0 to 20.
///
/// **Returns**: y, in the unit of x and of its sign.
///
/// **Accuracy**: within 2 units in the last place, however small x is; where y comes near to all there is to give, of
/// `then`.
///
/// **Errors**: `NotFinite`; `NoMeaning` where `now` less `amount` is not above 0, and where no y is enough: above an
/// elasticity of 1 utility has a ceiling, below it a floor at 0 consumption; `RateRange` for rho and the elasticity.
///
/// **Source**: the definition of the marginal rate of substitution, not only at its limit; see [`compensation_rate`].
///
/// ```
/// use hence_core::{Compounding::Yearly, compensation};
/// // U(c) = 1 - 1/c. Given up: 1/3.2 - 1/4 = 1/16. Received: 1/1.25 of 1/4 - 1/(4 + y), as much at y = 20/11.
/// let y = compensation(0.8, 4.0, 4.0, 1.0, 0.25, 2.0, Yearly)?;
/// assert!((y - 20.0 / 11.0).abs() < 1e-15);
/// // Giving up 1/2 - 1/4 is more than 1/1.25 of the 1/4 that could ever be gained.
/// let error = compensation(2.0, 4.0, 4.0, 1.0, 0.25, 2.0, Yearly).unwrap_err();
/// assert_eq!(error.message(), "no amount later is enough: utility has a ceiling above an elasticity of 1");
/// # Ok::<(), hence_core::Error>(())
/// ```
pub fn compensation(
    amount: f64,
    now: f64,
    then: f64,
    years: f64,
    rho: f64,
    elasticity: f64,
    compounding: Compounding,
) -> Result<f64> {
    let received = shift(amount, now, then, years, rho, elasticity, compounding)?;
    check::result("amount", (received * then).hi)
}

/// The rate of return at which giving up an amount now for one later leaves welfare as it was.
///
/// **Formula**: (y/x)^(1/t) - 1 with yearly compounding, ln(y/x)/t with continuous, y being the [`compensation`] of x.
/// As x shrinks this is the Ramsey rate: (1 + rho)(then/now)^(eta/t) - 1, or rho + eta ln(then/now)/t.
///
/// **Arguments**: as for [`compensation`]; an `amount` of 0 gives the limit; `years` other than 0.
///
/// **Returns**: a fraction per year in the compounding asked for. Above the Ramsey rate for x above 0 (and eta above
/// 0): a large sacrifice asks for more.
///
/// **Accuracy**: within 2 units in the last place of the larger of the rate and 1/|years|, however small x is.
///
/// **Errors**: as for [`compensation`]; `NoMeaning` where `years` is 0.
///
/// **Source**: F. Ramsey, "A mathematical theory of saving", Economic Journal 38, 1928 (the limit).
///
/// ```
/// use hence_core::{Compounding::{Continuous, Yearly}, compensation_rate, ramsey_rate_exact};
/// let then = 100.0 * 1.02f64.powi(10);
/// let rate = |amount: f64| compensation_rate(amount, 100.0, then, 10.0, 0.015, 2.0, Yearly);
/// assert!((rate(0.0)? - ramsey_rate_exact(0.015, 2.0, 0.02)?).abs() < 1e-15);
/// assert!((rate(1e-6)? - rate(0.0)?).abs() < 1e-8 && rate(5.0)? > rate(1.0)? && rate(1.0)? > rate(0.0)?);
/// let continuous = compensation_rate(0.0, 100.0, 100.0 * 0.2f64.exp(), 10.0, 0.015, 2.0, Continuous)?;
/// assert!((continuous - 0.055).abs() < 1e-15); // 0.015 + 2 x 0.02
/// assert!(compensation_rate(1.0, 100.0, then, 0.0, 0.015, 2.0, Yearly).is_err());
/// # Ok::<(), hence_core::Error>(())
/// ```
pub fn compensation_rate(
    amount: f64,
    now: f64,
    then: f64,
    years: f64,
    rho: f64,
    elasticity: f64,
    compounding: Compounding,
) -> Result<f64> {
    finite("years", years)?;
    if years == 0.0 {
        let message = "the two dates are the same, and a rate needs a time between them";
        return Err(Error::new(ErrorKind::NoMeaning, "years", message));
    }
    let received = shift(amount, now, then, years, rho, elasticity, compounding)?;
    // So small an amount is its own limit, and has no logarithm here.
    let return_log = if !amount.is_normal() || !received.hi.is_normal() {
        growth_log(now, then) * elasticity - preference_slope(rho, compounding)? * years
    } else {
        // y/x = (y/then) (now/x) (then/now); y has the sign of x.
        let received = if received.hi < 0.0 { -received } else { received };
        log2(received) - log2(Dd::of(amount.abs())) + log2(Dd::of(then))
    };
    let yearly = return_log / Dd::of(years);
    let rate = match compounding {
        Compounding::Yearly => exp2_m1(yearly),
        Compounding::Continuous => yearly * Dd::LN2,
    };
    check::result("amount", rate.hi)
}

/// The compensation as a share of the consumption it is added to.
fn shift(
    amount: f64,
    now: f64,
    then: f64,
    years: f64,
    rho: f64,
    elasticity: f64,
    compounding: Compounding,
) -> Result<Dd> {
    finite("amount", amount)?;
    positive("now", now)?;
    positive("then", then)?;
    finite("years", years)?;
    let (slope, k) = (preference_slope(rho, compounding)?, checked_complement(elasticity)?);
    if now - amount < f64::MIN_POSITIVE {
        let message = format!("{amount} given up of a consumption of {now} leaves nothing");
        return Err(Error::new(ErrorKind::NoMeaning, "amount", message)
            .with_hint("state amount and consumption in one unit"));
    }
    let lost = -power_mean(k, log_ratio(now, -amount));
    // In units of the later utility: (now/then)^(1-eta)/d, from logarithms.
    let scale = exp2_m1(-(growth_log(now, then) * k) - slope * years) + Dd::ONE;
    back(k, lost * scale).ok_or_else(|| {
        let bound = if k.hi < 0.0 {
            "no amount later is enough: utility has a ceiling above an elasticity of 1"
        } else {
            "all consumption later is not as much"
        };
        Error::new(ErrorKind::NoMeaning, "amount", bound).with_hint("a smaller amount")
    })
}

/// log2(then/now).
fn growth_log(now: f64, then: f64) -> Dd {
    log2(Dd::of(then)) - log2(Dd::of(now))
}

/// log2 of the factor for one year of waiting.
fn preference_slope(rho: f64, compounding: Compounding) -> Result<Dd> {
    match compounding {
        Compounding::Yearly => {
            above_minus_one("rho", rho)?;
            Ok(-log2_1p(Dd::of(rho)))
        }
        Compounding::Continuous => {
            finite("rho", rho)?;
            Ok(-(Dd::LOG2_E * rho))
        }
    }
}

fn checked_complement(elasticity: f64) -> Result<Dd> {
    check_elasticity(elasticity)?;
    Ok(complement(elasticity))
}

fn above_minus_one(name: &'static str, rate: f64) -> Result<()> {
    finite(name, rate)?;
    if rate > -1.0 {
        return Ok(());
    }
    let message = format!("{name} is {}%, allowed above -100%", 100.0 * rate);
    Err(Error::new(ErrorKind::RateRange, name, message).with_hint("a fraction, 0.015 for 1.5%"))
}
