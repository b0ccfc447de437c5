//! The handle of a parsed basis, and its texts.

use std::sync::LazyLock;

use libc::c_char;

use hence_core::{Basis, Catalogue, Curve, ErrorKind, Where};

use crate::arguments;
use crate::error::{Failure, Guarded, guard, hence_error};
use crate::status::{HENCE_ERR_RANGE, HENCE_ERR_SCHEDULE};

/// A parsed basis with its curve. Opaque and immutable: any number of threads may use one.
pub struct hence_basis {
    pub(crate) basis: Basis,
    pub(crate) at: Where,
    pub(crate) curve: Curve,
}

/// The built-in schedules: callers of the C interface know no others.
pub(crate) static CATALOGUE: LazyLock<Catalogue> = LazyLock::new(Catalogue::builtin);

/// Parses a rate line, a rate as text, or the id of a built-in schedule.
///
/// Arguments: `line` (in, NUL-ended UTF-8, borrowed, not NULL); `out` (out, not NULL): a new handle, caller
/// owns (free with hence_basis_free); `error` (out, may be NULL).
/// Returns HENCE_OK; HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT; HENCE_ERR_UTF8 with the byte as index; HENCE_ERR_SYNTAX,
/// HENCE_ERR_SCHEDULE with the character as index; HENCE_ERR_RANGE, HENCE_ERR_NOT_FINITE for a rate, weight, edge or
/// other parameter that cannot be, with the character as index where one number is to blame, else -1;
/// HENCE_ERR_UNSUPPORTED; HENCE_ERR_CONTEXT for curves with calendar edges or by project length, which
/// hence_basis_parse_at takes.
/// Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_basis_parse(
    line: *const c_char,
    out: *mut *mut hence_basis,
    error: *mut hence_error,
) -> i32 {
    // SAFETY: the caller's contracts, passed on.
    unsafe { guard(error, || parse(line, Where::default(), out, Places { base_year: 1, length: 1, out: 2 })) }
}

/// Parses a basis whose curve needs a base year or the appraisal's length.
///
/// Arguments: `line` as for hence_basis_parse; `base_year` (in): the calendar year of the base, 1000 to 9999, for edges in
/// calendar years; 0 where it is not given; `length` (in): the appraisal's length in years, above 0, for curves by
/// project length; 0 where it is not given; `out` and `error` as for hence_basis_parse.
/// Returns as hence_basis_parse, a base year or a length that is missing (HENCE_ERR_CONTEXT) or cannot be
/// (HENCE_ERR_RANGE, HENCE_ERR_NOT_FINITE) being the argument at fault; HENCE_ERR_DOMAIN for a length past the last edge
/// of the curve.
/// Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_basis_parse_at(
    line: *const c_char,
    base_year: i32,
    length: f64,
    out: *mut *mut hence_basis,
    error: *mut hence_error,
) -> i32 {
    let body = || {
        if base_year != 0 && !(1000..=9999).contains(&base_year) {
            let message = format!("base year is {base_year}, allowed 1000 to 9999, or 0 for none");
            return Err(Failure::new(HENCE_ERR_RANGE, 2, message));
        }
        arguments::finite(length, 3)?;
        if length < 0.0 {
            let message = format!("length is {length}, allowed above 0, or 0 for none");
            return Err(Failure::new(HENCE_ERR_RANGE, 3, message));
        }
        let at = Where {
            base_year: (base_year != 0).then_some(base_year),
            length: (length != 0.0).then_some(length),
        };
        // SAFETY: the caller's contracts, passed on.
        unsafe { parse(line, at, out, Places { base_year: 2, length: 3, out: 4 }) }
    };
    // SAFETY: the caller's contract for `error`.
    unsafe { guard(error, body) }
}

/// The numbers of the arguments beside the line. Where a function has no such argument, the line is at fault.
struct Places {
    base_year: i32,
    length: i32,
    out: i32,
}

impl Places {
    /// A failure to make the curve. The library's index is then the place of a band, which a caller cannot see.
    fn failure(&self, error: &hence_core::Error) -> Failure {
        let argument = match (error.kind(), error.argument()) {
            (ErrorKind::NeedsBase, _) => self.base_year,
            (_, "length") => self.length,
            _ => 1,
        };
        Failure { index: -1, ..Failure::core(error, argument) }
    }
}

/// # Safety
/// `line` is NULL or NUL-ended; `out` is NULL or writable.
unsafe fn parse(line: *const c_char, at: Where, out: *mut *mut hence_basis, places: Places) -> Guarded {
    // SAFETY: the caller's contract for `line`.
    let line = unsafe { arguments::text(line, 1) }?;
    arguments::output(out, 1, places.out)?;
    let basis = Basis::parse(line, &CATALOGUE).map_err(|e| Failure::core(&e, 1))?;
    let curve = basis.curve(&at).map_err(|e| places.failure(&e))?;
    let handle = Box::into_raw(Box::new(hence_basis { basis, at, curve }));
    // SAFETY: `out` is not NULL and aligned (checked), and writable by the caller's contract.
    unsafe { out.write(handle) };
    Ok(())
}

/// Frees a handle. NULL is allowed. Threads: no other thread may be using the handle.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_basis_free(basis: *mut hence_basis) {
    if !basis.is_null() {
        // SAFETY: not NULL, made by hence_basis_parse and not freed before, by the caller's contract.
        drop(unsafe { Box::from_raw(basis) });
    }
}

/// A text of a basis, into the caller's buffer.
///
/// # Safety
/// `basis` is NULL or a live handle; `buffer` is NULL or writable for `capacity` bytes; `error` as for [`guard`].
unsafe fn told(
    basis: *const hence_basis,
    buffer: *mut c_char,
    capacity: usize,
    error: *mut hence_error,
    words: impl Fn(&Basis) -> String,
) -> i32 {
    let body = || {
        // SAFETY: the caller's contracts for `basis` and `buffer`.
        unsafe { arguments::write_text(&words(&borrow(basis)?.basis), buffer, capacity, 2) }
    };
    // SAFETY: the caller's contract for `error`.
    unsafe { guard(error, body) }
}

/// The basis in words, with its source.
///
/// In cells: HENCE.EXPLAIN.
///
/// Arguments: `basis` (in, not NULL); `buffer` (out): `capacity` bytes of the caller's, gets NUL-ended UTF-8;
/// `capacity` (in); `error` (out, may be NULL). A buffer that is too small is HENCE_ERR_CAPACITY, with the bytes
/// needed as index, and stays untouched.
/// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_CAPACITY, HENCE_ERR_LENGTH. Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_basis_describe(
    basis: *const hence_basis,
    buffer: *mut c_char,
    capacity: usize,
    error: *mut hence_error,
) -> i32 {
    // SAFETY: the caller's contracts, passed on.
    unsafe { told(basis, buffer, capacity, error, Basis::words) }
}

/// The canonical text of the basis, which parses back to the same basis: its rate line, or its schedule's id, with the
/// timing that it states.
///
/// Arguments, statuses and threads as hence_basis_describe.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_basis_line(
    basis: *const hence_basis,
    buffer: *mut c_char,
    capacity: usize,
    error: *mut hence_error,
) -> i32 {
    // SAFETY: the caller's contracts, passed on.
    unsafe { told(basis, buffer, capacity, error, Basis::canonical) }
}

/// The timing that the basis states, its own before its schedule's, as hence_offsets_from_years takes it: "flows middle,
/// base end"; "flows end, base end" where it states none.
///
/// Arguments, statuses and threads as hence_basis_describe.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_basis_timing(
    basis: *const hence_basis,
    buffer: *mut c_char,
    capacity: usize,
    error: *mut hence_error,
) -> i32 {
    let words = |basis: &Basis| basis.timing().unwrap_or_default().to_string();
    // SAFETY: the caller's contracts, passed on.
    unsafe { told(basis, buffer, capacity, error, words) }
}

/// The rate line of a built-in schedule, with the timing it states.
///
/// In cells: HENCE.SCHEDULE.
///
/// Arguments: `id` (in, NUL-ended UTF-8, borrowed, not NULL; in any case); `buffer`, `capacity` and `error` as for
/// hence_basis_describe.
/// Returns as hence_basis_describe; HENCE_ERR_UTF8 with the byte as index; HENCE_ERR_SCHEDULE where no such schedule is
/// built in; HENCE_ERR_UNSUPPORTED for a table of factors, which no line can state. Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_schedule_line(
    id: *const c_char,
    buffer: *mut c_char,
    capacity: usize,
    error: *mut hence_error,
) -> i32 {
    let body = || {
        // SAFETY: the caller's contract for `id`.
        let id = unsafe { arguments::text(id, 1) }?;
        let schedule = CATALOGUE.get(id.trim()).ok_or_else(|| {
            Failure::new(HENCE_ERR_SCHEDULE, 1, format!("no schedule {} is known", id.trim()))
        })?;
        let line = schedule.line().map_err(|e| Failure::core(&e, 1))?;
        // SAFETY: the caller's contract for `buffer`.
        unsafe { arguments::write_text(&line, buffer, capacity, 2) }
    };
    // SAFETY: the caller's contract for `error`.
    unsafe { guard(error, body) }
}

/// # Safety
/// As [`arguments::handle`].
pub(crate) unsafe fn borrow<'a>(basis: *const hence_basis) -> Result<&'a hence_basis, Failure> {
    // SAFETY: the caller's contract, passed on.
    unsafe { arguments::handle(basis, "basis") }
}
