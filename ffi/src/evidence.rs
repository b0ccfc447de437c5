//! Where a rate comes from, and single rates and weights.

use hence_core::TaxBracket;

use crate::error::{hence_error, named};
use crate::results::{compounding, over, single};

/// The Ramsey rate rho + eta g, a fraction per year.
///
/// Arguments: `rho` (in) time preference and hazard, a fraction per year; `eta` (in) elasticity of marginal utility, 0
/// to 20; `g` (in) growth of consumption per head, a fraction per year; `rate` (out, one double, not NULL); `error`
/// (out, may be NULL).
/// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_NOT_FINITE, HENCE_ERR_RANGE. Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_ramsey_rate(
    rho: f64,
    eta: f64,
    g: f64,
    rate: *mut f64,
    error: *mut hence_error,
) -> i32 {
    let names = ["rho", "elasticity", "g"];
    // SAFETY: the caller's contracts, passed on.
    unsafe { single(4, rate, error, || hence_core::ramsey_rate(rho, eta, g).map_err(named(&names))) }
}

/// The Ramsey rate where growth is uncertain and independent from year to year: rho + eta g - eta (eta + 1) sd^2 / 2, a
/// fraction per year.
///
/// In cells: HENCE.RAMSEY.
///
/// Arguments: `rho`, `eta` and `g` as for hence_ramsey_rate, `g` the expected growth; `sd` (in) its standard deviation, a
/// fraction per year, 0 or more; `rate` (out, one double, not NULL); `error` (out, may be NULL).
/// Returns and threads as hence_ramsey_rate.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_ramsey_rate_uncertain(
    rho: f64,
    eta: f64,
    g: f64,
    sd: f64,
    rate: *mut f64,
    error: *mut hence_error,
) -> i32 {
    let names = ["rho", "elasticity", "g", "sd"];
    // SAFETY: the caller's contracts, passed on.
    unsafe {
        single(5, rate, error, || hence_core::ramsey_rate_uncertain(rho, eta, g, sd).map_err(named(&names)))
    }
}

/// The elasticity of marginal utility that tax rates imply by equal absolute sacrifice: ln(1 - marginal) / ln(1 -
/// average), a pure number.
///
/// In cells: HENCE.ELASTICITY.
///
/// Arguments: `marginal` (in) the marginal rate of tax, a fraction from 0 to below 1; `average` (in) tax as a share of
/// the same income, a fraction above 0 and below 1; `elasticity` (out, one double, not NULL); `error` (out, may be
/// NULL).
/// Returns and threads as hence_ramsey_rate.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_elasticity_from_taxes(
    marginal: f64,
    average: f64,
    elasticity: *mut f64,
    error: *mut hence_error,
) -> i32 {
    let names = ["marginal", "average"];
    // SAFETY: the caller's contracts, passed on.
    unsafe {
        single(3, elasticity, error, || {
            hence_core::elasticity_from_taxes(marginal, average).map_err(named(&names))
        })
    }
}

/// The elasticity of marginal utility that several brackets of a tax schedule imply: the mean of what each implies by equal
/// absolute sacrifice, as for hence_elasticity_from_taxes, weighted by taxpayers; a pure number.
///
/// In cells: HENCE.BRACKETS.
///
/// Arguments: `marginal`, `average` (in, `n` doubles each, fractions as for hence_elasticity_from_taxes); `weights` (in, `n`
/// doubles, 0 or more): the taxpayers of each bracket, or their share; `n` (in, at least 1); `elasticity` (out, one double,
/// not NULL, may not overlap the inputs); `error` (out, may be NULL).
/// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_LENGTH, HENCE_ERR_OVERLAP, HENCE_ERR_NOT_FINITE;
/// HENCE_ERR_RANGE for a rate or a weight that cannot be, with its index, and for weights that sum to 0; HENCE_ERR_SHAPE
/// without brackets. Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_elasticity_from_brackets(
    marginal: *const f64,
    average: *const f64,
    weights: *const f64,
    n: usize,
    elasticity: *mut f64,
    error: *mut hence_error,
) -> i32 {
    // An error about the brackets as a whole is about their weights, or their number.
    let names = if n == 0 { ["", "", "", "brackets"] } else { ["marginal", "average", "brackets", ""] };
    // SAFETY: the caller's contracts, passed on.
    unsafe {
        over([marginal, average, weights], n, 5, elasticity, error, |[marginal, average, weights]| {
            let bracket =
                |i: usize| TaxBracket { marginal: marginal[i], average: average[i], weight: weights[i] };
            let brackets: Vec<TaxBracket> = (0..n).map(bracket).collect();
            hence_core::elasticity_from_tax_brackets(&brackets).map_err(named(&names))
        })
    }
}

/// The hazard, a fraction per year, of a yearly probability p that benefits end for good: p/(1 - p) with yearly
/// compounding, -ln(1 - p) with continuous.
///
/// In cells: HENCE.HAZARD.
///
/// Arguments: `probability` (in), a fraction from 0 to below 1; `compounding` (in), HENCE_COMPOUNDING_..., of the rate that
/// the hazard is part of; `hazard` (out, one double, not NULL); `error` (out, may be NULL).
/// Returns and threads as hence_ramsey_rate.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_hazard_from_probability(
    probability: f64,
    compounding: i32,
    hazard: *mut f64,
    error: *mut hence_error,
) -> i32 {
    let compute = || {
        let compounding = self::compounding(compounding, 2)?;
        hence_core::hazard_from_probability(probability, compounding).map_err(named(&["probability"]))
    };
    // SAFETY: the caller's contracts, passed on.
    unsafe { single(3, hazard, error, compute) }
}

/// The hazard, a fraction per year, of an expected waiting time until benefits end for good: 1/(years - 1) with yearly
/// compounding, 1/years with continuous.
///
/// In cells: HENCE.WAITING.
///
/// Arguments: `years` (in), the expected time, above 1 with yearly compounding, else above 0; `compounding`, `hazard` and
/// `error` as for hence_hazard_from_probability.
/// Returns and threads as hence_ramsey_rate.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_hazard_from_waiting_time(
    years: f64,
    compounding: i32,
    hazard: *mut f64,
    error: *mut hence_error,
) -> i32 {
    let compute = || {
        let compounding = self::compounding(compounding, 2)?;
        hence_core::hazard_from_waiting_time(years, compounding).map_err(named(&["years"]))
    };
    // SAFETY: the caller's contracts, passed on.
    unsafe { single(3, hazard, error, compute) }
}

/// The equity weight of a group: (reference / income)^elasticity, a pure number.
///
/// In cells: HENCE.WEIGHT.
///
/// Arguments: `income` (in) of the group and `reference` (in) income, in the same unit and above 0; `elasticity` (in) of
/// marginal utility, 0 to 20; `weight` (out, one double, not NULL); `error` (out, may be NULL).
/// Returns as hence_ramsey_rate; HENCE_ERR_NO_MEANING for an income of 0 or less. Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_equity_weight(
    income: f64,
    reference: f64,
    elasticity: f64,
    weight: *mut f64,
    error: *mut hence_error,
) -> i32 {
    let names = ["income", "reference", "elasticity"];
    // SAFETY: the caller's contracts, passed on.
    unsafe {
        single(4, weight, error, || {
            hence_core::equity_weight(income, reference, elasticity).map_err(named(&names))
        })
    }
}

/// The real rate behind a nominal rate: (1 + nominal) / (1 + inflation) - 1, a fraction per year.
///
/// In cells: HENCE.REAL.
///
/// Arguments: `nominal` (in) and `inflation` (in), fractions per year above -1; `rate` (out, one double, not NULL);
/// `error` (out, may be NULL).
/// Returns and threads as hence_ramsey_rate.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_real_rate(
    nominal: f64,
    inflation: f64,
    rate: *mut f64,
    error: *mut hence_error,
) -> i32 {
    let names = ["nominal", "inflation"];
    // SAFETY: the caller's contracts, passed on.
    unsafe { single(3, rate, error, || hence_core::real_rate(nominal, inflation).map_err(named(&names))) }
}
