//! Where the parts of a rate come from: the Ramsey rule, equity weights, elasticity from tax rates.

use crate::curve::{check_elasticity, check_finite as finite};
use crate::dd::{Dd, exp2, log2, log2_1p, two_prod};
use crate::{Error, ErrorKind, Result};

/// The social discount rate by the linear Ramsey rule.
///
/// **Formula**: rho + eta g.
///
/// **Arguments**: `rho`, pure time preference and hazard together, a fraction per year; `eta`, elasticity of
/// marginal utility, 0 to 20; `g`, growth of consumption per head, a fraction per year, may be negative.
///
/// **Returns**: a fraction per year, rounded once.
///
/// **Errors**: `NotFinite`; `RateRange` for an elasticity outside its range.
///
/// **Source**: F. Ramsey, "A mathematical theory of saving", Economic Journal 38, 1928; with the parts as
/// HM Treasury states them, "The Green Book", 2003, Annex 6: 0.5% + 1% + 1 x 2% = 3.5%.
///
/// ```
/// assert_eq!(hence_core::ramsey_rate(0.015, 1.0, 0.02)?, 0.035);
/// # Ok::<(), hence_core::Error>(())
/// ```
pub fn ramsey_rate(rho: f64, eta: f64, g: f64) -> Result<f64> {
    finite("rho", rho)?;
    check_elasticity(eta)?;
    finite("g", g)?;
    let rate = (Dd::of(rho) + two_prod(eta, g)).hi;
    finite("rate", rate)?;
    Ok(rate)
}

/// The social discount rate where growth is uncertain and independent from year to year.
///
/// **Formula**: rho + eta g - eta (eta + 1) sd^2 / 2, the last term the precautionary effect.
///
/// **Arguments**: as for [`ramsey_rate`], `g` the expected growth; `sd` its standard deviation, a fraction per year, 0
/// or more.
///
/// **Returns**: a fraction per year in the compounding of the parts, rounded once.
///
/// **Errors**: `NotFinite`; `RateRange` for an elasticity or a standard deviation outside its range.
///
/// **Source**: C. Gollier, Pricing the Planet's Future, 2013, ch. 3 (the extended Ramsey rule), from memory.
///
/// ```
/// use hence_core::ramsey_rate_uncertain;
/// // 0.01 + 2 x 0.02 - 2 x 3 x 0.036^2 / 2 = 0.046112
/// assert_eq!(ramsey_rate_uncertain(0.01, 2.0, 0.02, 0.036)?, 0.046112);
/// assert_eq!(ramsey_rate_uncertain(0.015, 1.0, 0.02, 0.0)?, 0.035);
/// assert_eq!(ramsey_rate_uncertain(0.015, 1.0, 0.02, -0.1).unwrap_err().code(), "rate-range");
/// # Ok::<(), hence_core::Error>(())
/// ```
pub fn ramsey_rate_uncertain(rho: f64, eta: f64, g: f64, sd: f64) -> Result<f64> {
    finite("rho", rho)?;
    check_elasticity(eta)?;
    finite("g", g)?;
    finite("sd", sd)?;
    if sd < 0.0 {
        return Err(Error::new(ErrorKind::RateRange, "sd", format!("sd is {sd}, allowed 0 or more"))
            .with_hint("the standard deviation of growth as a fraction: 0.036 for 3.6%"));
    }
    let caution = two_prod(sd, sd) * eta * (Dd::of(eta) + Dd::of(1.0)) * 0.5;
    let rate = (Dd::of(rho) + two_prod(eta, g) - caution).hi;
    finite("rate", rate)?;
    Ok(rate)
}

/// The weight of a unit of money to a group, relative to one at the reference income.
///
/// **Formula**: (reference / income)^elasticity, the ratio of marginal utilities under isoelastic utility.
///
/// **Arguments**: `income` of the group and `reference` income (often the median), in the same unit and above 0;
/// `elasticity` of marginal utility, 0 to 20.
///
/// **Returns**: a pure number; 1 at the reference income, above 1 below it.
///
/// **Errors**: `NotFinite`; `NoMeaning` for an income of 0 or less; `RateRange` for the elasticity; a weight too
/// large for a number is `NotFinite`.
///
/// **Accuracy**: within 1 unit in the last place of the exact weight.
///
/// **Source**: HM Treasury, "The Green Book", 2018 or later, A3.12 to A3.22.
///
/// ```
/// // At an elasticity of 1 a pound is worth twice as much to someone with half the income.
/// assert_eq!(hence_core::equity_weight(20_000.0, 40_000.0, 1.0)?, 2.0);
/// assert!(hence_core::equity_weight(0.0, 40_000.0, 1.0).is_err());
/// # Ok::<(), hence_core::Error>(())
/// ```
pub fn equity_weight(income: f64, reference: f64, elasticity: f64) -> Result<f64> {
    for (name, value) in [("income", income), ("reference", reference)] {
        finite(name, value)?;
        if value < f64::MIN_POSITIVE {
            return Err(Error::new(
                ErrorKind::NoMeaning,
                name,
                format!("{name} is {value}; marginal utility needs a consumption above 0"),
            ));
        }
    }
    check_elasticity(elasticity)?;
    let weight = exp2((log2(Dd::of(reference)) - log2(Dd::of(income))) * elasticity).hi;
    finite("weight", weight)?;
    Ok(weight)
}

/// The elasticity of marginal utility that a tax schedule implies, by equal absolute sacrifice.
///
/// **Formula**: ln(1 - marginal) / ln(1 - average).
///
/// **Arguments**: `marginal`, the marginal rate of tax, 0 to below 1; `average`, tax as a share of income, above 0
/// and below 1; both of the same income.
///
/// **Returns**: a pure number; 1 for a proportional tax, above 1 for a progressive one.
///
/// **Errors**: `NotFinite`; `RateRange` outside those ranges, an average rate of 0 included, which leaves nothing
/// to compare with.
///
/// **Accuracy**: within 1 unit in the last place of the exact ratio.
///
/// **Source**: D. Evans and H. Sezer, "Social discount rates for member countries of the European Union", Journal
/// of Economic Studies 32, 2005.
///
/// ```
/// let eta = hence_core::elasticity_from_taxes(0.4, 0.25)?;
/// assert_eq!(format!("{eta:.4}"), "1.7757");
/// assert_eq!(hence_core::elasticity_from_taxes(0.3, 0.3)?, 1.0);
/// assert!(hence_core::elasticity_from_taxes(40.0, 0.25).is_err());
/// # Ok::<(), hence_core::Error>(())
/// ```
pub fn elasticity_from_taxes(marginal: f64, average: f64) -> Result<f64> {
    finite("marginal", marginal)?;
    finite("average", average)?;
    let refuse = |name, value, allowed| {
        Err(Error::new(ErrorKind::RateRange, name, format!("{name} is {value}, allowed {allowed}"))
            .with_hint("the tax rate as a fraction: 0.4 for 40%"))
    };
    if !(0.0..1.0).contains(&marginal) {
        return refuse("marginal", marginal, "0 to below 1");
    }
    if !(average > 0.0 && average < 1.0) {
        return refuse("average", average, "above 0 and below 1");
    }
    let eta = log2_1p(Dd::of(-marginal)) / log2_1p(Dd::of(-average));
    finite("elasticity", eta.hi)?;
    // A marginal rate of 0 gives a zero of either sign.
    Ok(eta.hi + 0.0)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_ranges_end_where_they_say() {
        assert_eq!(elasticity_from_taxes(0.0, 0.2).unwrap().to_bits(), 0.0f64.to_bits());
        for (marginal, average, kind) in [
            (1.0, 0.2, ErrorKind::RateRange),
            (-0.1, 0.2, ErrorKind::RateRange),
            (0.4, 0.0, ErrorKind::RateRange),
            (0.4, 1.0, ErrorKind::RateRange),
            (f64::NAN, 0.2, ErrorKind::NotFinite),
        ] {
            assert_eq!(elasticity_from_taxes(marginal, average).unwrap_err().kind(), kind);
        }
        assert_eq!(equity_weight(1e-300, 1e300, 20.0).unwrap_err().kind(), ErrorKind::NotFinite);
        assert_eq!(equity_weight(-1.0, 1.0, 1.0).unwrap_err().kind(), ErrorKind::NoMeaning);
        assert_eq!(equity_weight(1.0, 1.0, 21.0).unwrap_err().kind(), ErrorKind::RateRange);
        assert_eq!(ramsey_rate(0.01, 1.0, f64::INFINITY).unwrap_err().kind(), ErrorKind::NotFinite);
        assert_eq!(ramsey_rate(0.015, 1.0, -0.02).unwrap(), 0.015 - 0.02);
    }
}
