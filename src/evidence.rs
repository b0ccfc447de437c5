//! Where the parts of a rate come from: the Ramsey rule, equity weights, elasticity from tax rates, hazard from chances.

use crate::curve::{check_elasticity, check_finite as finite};
use crate::dd::{Dd, exp2, log2, log2_1p, two_prod};
use crate::{Compounding, Error, ErrorKind, Result};

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

/// One bracket of a tax schedule, for [`elasticity_from_tax_brackets`].
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct TaxBracket {
    /// The marginal rate of tax in it, 0 to below 1.
    pub marginal: f64,
    /// Tax as a share of income at an income typical of it, above 0 and below 1.
    pub average: f64,
    /// How much it counts: the number of taxpayers in it, or their share; 0 or more.
    pub weight: f64,
}

/// The elasticity of marginal utility that several brackets of a tax schedule imply, by equal absolute sacrifice.
///
/// **Formula**: sum of w_i eta_i / sum of w_i, with eta_i = ln(1 - marginal_i)/ln(1 - average_i): the weighted mean of the
/// brackets' elasticities, as for [`elasticity_from_taxes`].
///
/// **Arguments**: `brackets`, at least one; their weights in any unit, since they are divided by their sum.
///
/// **Returns**: a pure number.
///
/// **Errors**: `Shape` without a bracket; those of [`elasticity_from_taxes`], and `Weights` for a weight below 0 or a sum
/// of 0, with the bracket as index.
///
/// **Source**: as for [`elasticity_from_taxes`]; the mean over brackets weighted by taxpayers is common practice.
///
/// ```
/// use hence_core::{TaxBracket, elasticity_from_tax_brackets};
/// let brackets = [
///     TaxBracket { marginal: 0.3, average: 0.3, weight: 3.0 },  // 1
///     TaxBracket { marginal: 0.4, average: 0.25, weight: 1.0 }, // 1.77566
/// ];
/// let eta = elasticity_from_tax_brackets(&brackets)?;
/// assert_eq!(format!("{eta:.5}"), "1.19392");
/// let error = elasticity_from_tax_brackets(&[TaxBracket { weight: -1.0, ..brackets[0] }]).unwrap_err();
/// assert_eq!(error.message(), "the weight is -1, allowed 0 or more");
/// # Ok::<(), hence_core::Error>(())
/// ```
pub fn elasticity_from_tax_brackets(brackets: &[TaxBracket]) -> Result<f64> {
    if brackets.is_empty() {
        let message = "there is no bracket";
        return Err(Error::new(ErrorKind::Shape, "brackets", message)
            .with_hint("state at least one marginal and average rate"));
    }
    let (mut sum, mut weights) = (Dd::ZERO, Dd::ZERO);
    for (index, bracket) in brackets.iter().enumerate() {
        let eta = elasticity_from_taxes(bracket.marginal, bracket.average);
        let eta = eta.map_err(|e| e.with_index(index))?;
        finite("weight", bracket.weight).map_err(|e| e.with_index(index))?;
        if bracket.weight < 0.0 {
            let message = format!("the weight is {}, allowed 0 or more", bracket.weight);
            return Err(Error::new(ErrorKind::Weights, "brackets", message).with_index(index));
        }
        sum = sum + two_prod(eta, bracket.weight);
        weights = weights + Dd::of(bracket.weight);
    }
    if weights.hi == 0.0 {
        return Err(Error::new(ErrorKind::Weights, "brackets", "the weights sum to 0"));
    }
    let eta = (sum / weights).hi;
    finite("elasticity", eta)?;
    Ok(eta)
}

/// The hazard that a yearly probability stands for: the rate that takes account of the chance that all ends.
///
/// **Formula**: p/(1 - p) with yearly compounding, so that 1/(1 + L) = 1 - p; -ln(1 - p) with continuous compounding, so
/// that exp(-L) = 1 - p.
///
/// **Arguments**: `probability`, the chance p in a year that benefits end for good (of a catastrophe, of a project's
/// failure), 0 to below 1.
///
/// **Returns**: L, a fraction per year, rounded once.
///
/// **Errors**: `NotFinite`; `RateRange` outside that range.
///
/// ```
/// use hence_core::{Compounding, hazard_from_probability};
/// assert_eq!(hazard_from_probability(0.2, Compounding::Yearly)?, 0.25);
/// let hazard = hazard_from_probability(0.01, Compounding::Continuous)?;
/// assert_eq!(format!("{hazard:.6}"), "0.010050");
/// assert!(hazard_from_probability(1.0, Compounding::Yearly).is_err());
/// # Ok::<(), hence_core::Error>(())
/// ```
pub fn hazard_from_probability(probability: f64, compounding: Compounding) -> Result<f64> {
    finite("probability", probability)?;
    if !(0.0..1.0).contains(&probability) {
        let message = format!("probability is {probability}, allowed 0 to below 1");
        return Err(Error::new(ErrorKind::RateRange, "probability", message)
            .with_hint("the chance in one year as a fraction: 0.01 for 1%"));
    }
    let p = Dd::of(probability);
    let hazard = match compounding {
        Compounding::Yearly => p / (Dd::ONE - p),
        Compounding::Continuous => -(log2_1p(-p) * Dd::LN2),
    };
    finite("hazard", hazard.hi)?;
    // A probability of 0 gives a zero of either sign.
    Ok(hazard.hi + 0.0)
}

/// The hazard that an expected waiting time stands for.
///
/// **Formula**: with yearly compounding 1/(years - 1), which is p/(1 - p) for a chance of p = 1/years in every year: the
/// event is then expected in that many years, its own year counted. With continuous compounding 1/years.
///
/// **Arguments**: `years`, the expected time until the event; above 1 with yearly compounding, else above 0.
///
/// **Returns**: a fraction per year, rounded once.
///
/// **Errors**: `NotFinite`; `RateRange` outside that range.
///
/// ```
/// use hence_core::{Compounding, hazard_from_waiting_time};
/// assert_eq!(hazard_from_waiting_time(101.0, Compounding::Yearly)?, 0.01);
/// assert_eq!(hazard_from_waiting_time(100.0, Compounding::Continuous)?, 0.01);
/// assert!(hazard_from_waiting_time(1.0, Compounding::Yearly).is_err());
/// # Ok::<(), hence_core::Error>(())
/// ```
pub fn hazard_from_waiting_time(years: f64, compounding: Compounding) -> Result<f64> {
    finite("years", years)?;
    let least = if compounding == Compounding::Yearly { 1.0 } else { 0.0 };
    if years <= least {
        let message = format!("the waiting time is {years} years, allowed above {least}");
        return Err(Error::new(ErrorKind::RateRange, "years", message)
            .with_hint("the number of years after which the event is expected: 100"));
    }
    let hazard = (Dd::ONE / (Dd::of(years) - Dd::of(least))).hi;
    finite("hazard", hazard)?;
    Ok(hazard)
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

    #[test]
    fn hazards_end_where_they_say() {
        use Compounding::{Continuous, Yearly};
        for compounding in [Yearly, Continuous] {
            assert_eq!(hazard_from_probability(0.0, compounding).unwrap().to_bits(), 0.0f64.to_bits());
            for (probability, kind) in
                [(1.0, ErrorKind::RateRange), (-0.01, ErrorKind::RateRange), (f64::NAN, ErrorKind::NotFinite)]
            {
                assert_eq!(hazard_from_probability(probability, compounding).unwrap_err().kind(), kind);
            }
            for (years, kind) in [
                (0.0, ErrorKind::RateRange),
                (-3.0, ErrorKind::RateRange),
                (f64::INFINITY, ErrorKind::NotFinite),
            ] {
                assert_eq!(hazard_from_waiting_time(years, compounding).unwrap_err().kind(), kind);
            }
        }
        // The chance of a year and the waiting time say the same with yearly compounding.
        let by_chance = hazard_from_probability(0.125, Yearly).unwrap();
        assert_eq!(hazard_from_waiting_time(8.0, Yearly).unwrap(), by_chance);
        // The hazard takes the chance off a year's factor.
        let continuous = hazard_from_probability(0.3, Continuous).unwrap();
        assert!(((-continuous).exp() - 0.7).abs() < 1e-15);
        assert_eq!(hazard_from_waiting_time(0.5, Continuous).unwrap(), 2.0);
    }

    #[test]
    fn brackets_are_a_weighted_mean() {
        let bracket = |marginal, average, weight| TaxBracket { marginal, average, weight };
        let (a, b) = (bracket(0.32, 0.2, 2.0), bracket(0.45, 0.31, 6.0));
        let [eta_a, eta_b] = [a, b].map(|b| elasticity_from_taxes(b.marginal, b.average).unwrap());
        let mean = elasticity_from_tax_brackets(&[a, b]).unwrap();
        assert!((mean - (0.25 * eta_a + 0.75 * eta_b)).abs() < 1e-15);
        assert_eq!(elasticity_from_tax_brackets(&[a]).unwrap(), eta_a);
        assert_eq!(elasticity_from_tax_brackets(&[bracket(0.9, 0.1, 0.0), b]).unwrap(), eta_b);
        for (brackets, kind, index) in [
            (vec![], ErrorKind::Shape, None),
            (vec![a, bracket(1.0, 0.2, 1.0)], ErrorKind::RateRange, Some(1)),
            (vec![a, bracket(0.4, 0.2, f64::NAN)], ErrorKind::NotFinite, Some(1)),
            (vec![bracket(0.4, 0.2, -1.0)], ErrorKind::Weights, Some(0)),
            (vec![bracket(0.4, 0.2, 0.0)], ErrorKind::Weights, None),
        ] {
            let error = elasticity_from_tax_brackets(&brackets).unwrap_err();
            assert_eq!((error.kind(), error.index()), (kind, index));
        }
    }
}
