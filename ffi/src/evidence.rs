//! Where a rate comes from.

use crate::arguments;
use crate::error::{Failure, guard, hence_error};

/// The Ramsey rate rho + eta g, a fraction per year.
///
/// Arguments: `rho` (in) time preference and hazard, a fraction per year; `eta` (in) elasticity of marginal utility;
/// `g` (in) growth of consumption per head, a fraction per year; `rate` (out, one double, not NULL); `error` (out, may
/// be NULL).
/// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_NOT_FINITE, HENCE_ERR_RANGE. Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_ramsey_rate(
    rho: f64,
    eta: f64,
    g: f64,
    rate: *mut f64,
    error: *mut hence_error,
) -> i32 {
    let body = || {
        arguments::output(rate, 1, 4)?;
        let argument = |e: &hence_core::Error| match e.argument() {
            "rho" => 1,
            "eta" => 2,
            "g" => 3,
            _ => 0,
        };
        let result = hence_core::ramsey_rate(rho, eta, g).map_err(|e| Failure::core(&e, argument(&e)))?;
        // SAFETY: `rate` is not NULL and aligned (checked), and writable by the caller's contract.
        unsafe { rate.write(result) };
        Ok(())
    };
    // SAFETY: the caller's contract for `error`.
    unsafe { guard(error, body) }
}
