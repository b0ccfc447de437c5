//! The one handle: a parsed basis.

use libc::c_char;

use hence_core::{Basis, Catalogue, Curve, Where};

use crate::arguments;
use crate::error::{Failure, guard, hence_error};
use crate::status::HENCE_ERR_NULL;

/// A parsed basis with its curve. Opaque and immutable: any number of threads may use one.
pub struct hence_basis {
    pub(crate) basis: Basis,
    pub(crate) curve: Curve,
}

/// Parses a rate line, a rate as text, or the id of a built-in schedule.
///
/// Arguments: `line` (in, NUL-ended UTF-8, borrowed, not NULL); `out` (out, not NULL): a new handle, caller
/// owns (free with hence_basis_free); `error` (out, may be NULL).
/// Returns HENCE_OK; HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_UTF8; HENCE_ERR_SYNTAX with the character as index;
/// HENCE_ERR_SCHEDULE; HENCE_ERR_RANGE; HENCE_ERR_CONTEXT for curves with calendar edges or by project length.
/// Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_basis_parse(
    line: *const c_char,
    out: *mut *mut hence_basis,
    error: *mut hence_error,
) -> i32 {
    let body = || {
        // SAFETY: the caller's contract for `line`.
        let line = unsafe { arguments::text(line, 1) }?;
        arguments::output(out, 1, 2)?;
        let basis = Basis::parse(line, &Catalogue::builtin()).map_err(|e| Failure::core(&e, 1))?;
        let curve = basis.curve(&Where::default()).map_err(|e| Failure::core(&e, 1))?;
        let handle = Box::into_raw(Box::new(hence_basis { basis, curve }));
        // SAFETY: `out` is not NULL and aligned (checked), and writable by the caller's contract.
        unsafe { out.write(handle) };
        Ok(())
    };
    // SAFETY: the caller's contract for `error`.
    unsafe { guard(error, body) }
}

/// Frees a handle. NULL is allowed. Threads: no other thread may be using the handle.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_basis_free(basis: *mut hence_basis) {
    if !basis.is_null() {
        // SAFETY: not NULL, made by hence_basis_parse and not freed before, by the caller's contract.
        drop(unsafe { Box::from_raw(basis) });
    }
}

/// The basis in words, with its source.
///
/// Arguments: `basis` (in, not NULL); `buffer` (out): `capacity` bytes of the caller's, gets NUL-ended UTF-8;
/// `capacity` (in); `error` (out, may be NULL). A buffer that is too small is HENCE_ERR_CAPACITY, with the bytes
/// needed as index, and stays untouched.
/// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_CAPACITY. Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_basis_describe(
    basis: *const hence_basis,
    buffer: *mut c_char,
    capacity: usize,
    error: *mut hence_error,
) -> i32 {
    let body = || {
        // SAFETY: the caller's contract for `basis`.
        let basis = unsafe { borrow(basis) }?;
        let words = basis.basis.words();
        // SAFETY: the caller's contract for `buffer`.
        unsafe { arguments::write_text(&words, buffer, capacity, 2) }
    };
    // SAFETY: the caller's contract for `error`.
    unsafe { guard(error, body) }
}

/// # Safety
/// `basis` is NULL or a live handle.
pub(crate) unsafe fn borrow<'a>(basis: *const hence_basis) -> Result<&'a hence_basis, Failure> {
    // SAFETY: NULL gives None; else a live handle by the caller's contract.
    unsafe { basis.as_ref() }.ok_or_else(|| Failure::new(HENCE_ERR_NULL, 1, "the basis is NULL"))
}
