//! Factors and rates over arrays.

use hence_core::{Curve, Result};

use crate::arguments;
use crate::basis::{borrow, hence_basis};
use crate::error::{Failure, guard, hence_error};

/// One number an offset, from the curve.
unsafe fn each(
    basis: *const hence_basis,
    offsets: *const f64,
    n: usize,
    out: *mut f64,
    error: *mut hence_error,
    compute: impl Fn(&Curve, &[f64], &mut [f64]) -> Result<()>,
) -> i32 {
    let body = || {
        // SAFETY: the caller's contracts for `basis` and `offsets`.
        let basis = unsafe { borrow(basis) }?;
        let offsets = unsafe { arguments::numbers(offsets, n, 2) }?;
        arguments::output(out, n, 4)?;
        arguments::apart(offsets.as_ptr(), n, out, n, 4)?;
        let mut results = arguments::buffer(n, 3)?;
        compute(&basis.curve, offsets, &mut results).map_err(|e| Failure::core(&e, 2))?;
        if n > 0 {
            // SAFETY: `out` is checked, does not overlap and holds `n` doubles by the caller's contract.
            unsafe { std::ptr::copy_nonoverlapping(results.as_ptr(), out, n) };
        }
        Ok(())
    };
    // SAFETY: the caller's contract for `error`.
    unsafe { guard(error, body) }
}

/// Fills `out` one offset at a time, with the index in the error.
fn scalar(f: impl Fn(&Curve, f64) -> Result<f64>) -> impl Fn(&Curve, &[f64], &mut [f64]) -> Result<()> {
    move |curve, offsets, out| {
        for (i, (t, x)) in offsets.iter().zip(out).enumerate() {
            *x = f(curve, *t).map_err(|e| e.with_index(i))?;
        }
        Ok(())
    }
}

/// Discount factors D(t), one an offset.
///
/// In cells: HENCE.FACTOR.
///
/// Arguments: `basis` (in, not NULL); `offsets` (in, years from the base, `n` doubles, borrowed; NULL only when `n` is
/// 0); `n` (in); `factors` (out, `n` doubles, may not overlap `offsets`); `error` (out, may be NULL).
/// Returns HENCE_OK; HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_LENGTH, HENCE_ERR_OVERLAP; HENCE_ERR_NOT_FINITE or
/// HENCE_ERR_DOMAIN with the index. Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_factors(
    basis: *const hence_basis,
    offsets: *const f64,
    n: usize,
    factors: *mut f64,
    error: *mut hence_error,
) -> i32 {
    // SAFETY: the caller's contract, passed on.
    unsafe { each(basis, offsets, n, factors, error, Curve::factors) }
}

/// Forward rates of the years that end at the offsets: D(t-1)/D(t) - 1, fractions per year.
///
/// In cells: HENCE.RATE.
///
/// Arguments, statuses and threads as hence_factors.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_forward_rates(
    basis: *const hence_basis,
    offsets: *const f64,
    n: usize,
    rates: *mut f64,
    error: *mut hence_error,
) -> i32 {
    // SAFETY: the caller's contract, passed on.
    unsafe { each(basis, offsets, n, rates, error, scalar(Curve::forward_rate)) }
}

/// Mean yearly rates to the offsets: D(t)^(-1/t) - 1, at 0 its limit, fractions per year. With continuous compounding the
/// mean rate is ln(1 + this).
///
/// In cells: HENCE.MEANRATE.
///
/// Arguments, statuses and threads as hence_factors.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_mean_rates(
    basis: *const hence_basis,
    offsets: *const f64,
    n: usize,
    rates: *mut f64,
    error: *mut hence_error,
) -> i32 {
    // SAFETY: the caller's contract, passed on.
    unsafe { each(basis, offsets, n, rates, error, scalar(Curve::mean_rate)) }
}

/// Instantaneous rates at the offsets: -D'(t)/D(t), fractions per year with continuous compounding; at an edge that of the
/// earlier band.
///
/// In cells: HENCE.INSTANT.
///
/// Arguments, statuses and threads as hence_factors.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_instantaneous_rates(
    basis: *const hence_basis,
    offsets: *const f64,
    n: usize,
    rates: *mut f64,
    error: *mut hence_error,
) -> i32 {
    // SAFETY: the caller's contract, passed on.
    unsafe { each(basis, offsets, n, rates, error, scalar(Curve::instantaneous_rate)) }
}
