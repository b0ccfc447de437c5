//! Where a rate comes from, and single rates and weights.

use crate::arguments;
use crate::error::{Failure, guard, hence_error};

/// One number from some numbers: `names` are the library's names of the arguments, in order; the output comes next.
///
/// # Safety
/// `out` is NULL or writable; `error` as for [`guard`].
unsafe fn single(
    names: &[&str],
    out: *mut f64,
    error: *mut hence_error,
    compute: impl Fn() -> hence_core::Result<f64>,
) -> i32 {
    let body = || {
        arguments::output(out, 1, names.len() as i32 + 1)?;
        let place = |e: &hence_core::Error| names.iter().position(|name| *name == e.argument());
        let argument = |e: &hence_core::Error| place(e).map_or(0, |place| place as i32 + 1);
        let result = compute().map_err(|e| Failure::core(&e, argument(&e)))?;
        // SAFETY: `out` is not NULL and aligned (checked), and writable by the caller's contract.
        unsafe { out.write(result) };
        Ok(())
    };
    // SAFETY: the caller's contract for `error`.
    unsafe { guard(error, body) }
}

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
    // SAFETY: the caller's contracts, passed on.
    unsafe { single(&["rho", "elasticity", "g"], rate, error, || hence_core::ramsey_rate(rho, eta, g)) }
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
    let compute = || hence_core::ramsey_rate_uncertain(rho, eta, g, sd);
    // SAFETY: the caller's contracts, passed on.
    unsafe { single(&["rho", "elasticity", "g", "sd"], rate, error, compute) }
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
    let compute = || hence_core::elasticity_from_taxes(marginal, average);
    // SAFETY: the caller's contracts, passed on.
    unsafe { single(&["marginal", "average"], elasticity, error, compute) }
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
    let compute = || hence_core::equity_weight(income, reference, elasticity);
    // SAFETY: the caller's contracts, passed on.
    unsafe { single(&["income", "reference", "elasticity"], weight, error, compute) }
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
    let compute = || hence_core::real_rate(nominal, inflation);
    // SAFETY: the caller's contracts, passed on.
    unsafe { single(&["nominal", "inflation"], rate, error, compute) }
}
