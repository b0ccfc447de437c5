//! One number as the result: of numbers, or of arrays of one length.

use hence_core::Compounding;

use crate::arguments;
use crate::error::{Failure, guard, hence_error};
use crate::status::HENCE_ERR_RANGE;

/// Yearly compounding: a year of waiting divides by 1 + rate.
pub const HENCE_COMPOUNDING_YEARLY: i32 = 0;
/// Continuous compounding: a year of waiting multiplies by exp(-rate).
pub const HENCE_COMPOUNDING_CONTINUOUS: i32 = 1;

/// The compounding of a code. `argument` counts from 1.
pub(crate) fn compounding(code: i32, argument: i32) -> Result<Compounding, Failure> {
    match code {
        HENCE_COMPOUNDING_YEARLY => Ok(Compounding::Yearly),
        HENCE_COMPOUNDING_CONTINUOUS => Ok(Compounding::Continuous),
        _ => {
            let message = format!("compounding is {code}, allowed are 0 (yearly) and 1 (continuous)");
            Err(Failure::new(HENCE_ERR_RANGE, argument, message))
        }
    }
}

/// One number from some numbers; `place` is the number of the output's argument.
///
/// # Safety
/// `out` is NULL or writable; `error` as for [`guard`].
pub(crate) unsafe fn single(
    place: i32,
    out: *mut f64,
    error: *mut hence_error,
    compute: impl Fn() -> Result<f64, Failure>,
) -> i32 {
    let body = || {
        arguments::output(out, 1, place)?;
        let result = compute()?;
        // SAFETY: `out` is not NULL and aligned (checked), and writable by the caller's contract.
        unsafe { out.write(result) };
        Ok(())
    };
    // SAFETY: the caller's contract for `error`.
    unsafe { guard(error, body) }
}

/// Doubles for each element that a computation over arrays surely fits in.
const COPIES: usize = 16;

/// One number from arrays of `n` finite numbers each, which are the first arguments, and others behind `n`; `place` is the
/// number of the output's argument.
///
/// # Safety
/// Each array is NULL, or readable for `n` doubles until the call returns; `out` and `error` as for [`single`].
pub(crate) unsafe fn over<const N: usize>(
    arrays: [*const f64; N],
    n: usize,
    place: i32,
    out: *mut f64,
    error: *mut hence_error,
    compute: impl Fn([&[f64]; N]) -> Result<f64, Failure>,
) -> i32 {
    let body = || {
        // SAFETY: the caller's contract for the arrays.
        let slices = unsafe { arguments::alike(arrays, n, 1) }?;
        arguments::output(out, 1, place)?;
        for slice in slices {
            arguments::apart(slice.as_ptr(), n, out, 1, place)?;
        }
        drop(arguments::reserve::<[f64; COPIES]>(n, N as i32 + 1)?);
        let result = compute(slices)?;
        // SAFETY: `out` is not NULL and aligned (checked), and writable by the caller's contract.
        unsafe { out.write(result) };
        Ok(())
    };
    // SAFETY: the caller's contract for `error`.
    unsafe { guard(error, body) }
}
