//! Status numbers, in blocks of ten, never reused.

use libc::c_char;

use hence_core::ErrorKind;

/// Done.
pub const HENCE_OK: i32 = 0;

/// A required pointer is NULL, or an array is NULL with a length above 0.
pub const HENCE_ERR_NULL: i32 = 10;
/// A pointer is not aligned for its type.
pub const HENCE_ERR_ALIGNMENT: i32 = 11;
/// A length is above HENCE_LENGTH_MAX, or there is no memory for as many results.
pub const HENCE_ERR_LENGTH: i32 = 12;
/// An output overlaps an input or another output.
pub const HENCE_ERR_OVERLAP: i32 = 13;
/// The caller's buffer is too small.
pub const HENCE_ERR_CAPACITY: i32 = 14;
/// A text is not UTF-8.
pub const HENCE_ERR_UTF8: i32 = 15;

/// An input is NaN or infinite, or the result would be.
pub const HENCE_ERR_NOT_FINITE: i32 = 20;
/// A rate or parameter is outside its range.
pub const HENCE_ERR_RANGE: i32 = 21;
/// An offset is outside the curve's domain.
pub const HENCE_ERR_DOMAIN: i32 = 22;
/// Arrays differ in length or are empty.
pub const HENCE_ERR_SHAPE: i32 = 23;
/// A sum does not converge, or the quantity has no meaning for these inputs.
pub const HENCE_ERR_NO_MEANING: i32 = 24;

/// A text does not follow its grammar.
pub const HENCE_ERR_SYNTAX: i32 = 30;
/// No schedule of that id is known.
pub const HENCE_ERR_SCHEDULE: i32 = 31;
/// The curve needs a base year or a length that was not given.
pub const HENCE_ERR_CONTEXT: i32 = 32;
/// This version does not offer what was asked.
pub const HENCE_ERR_UNSUPPORTED: i32 = 33;

/// A fault inside the library; nothing was written.
pub const HENCE_ERR_INTERNAL: i32 = 90;

/// The status of a library error.
pub(crate) fn of(kind: ErrorKind) -> i32 {
    match kind {
        ErrorKind::RateRange | ErrorKind::Weights | ErrorKind::Edges => HENCE_ERR_RANGE,
        ErrorKind::OutsideDomain => HENCE_ERR_DOMAIN,
        ErrorKind::NotFinite => HENCE_ERR_NOT_FINITE,
        ErrorKind::Shape => HENCE_ERR_SHAPE,
        ErrorKind::Syntax | ErrorKind::Date => HENCE_ERR_SYNTAX,
        ErrorKind::UnknownSchedule | ErrorKind::BadSchedule => HENCE_ERR_SCHEDULE,
        ErrorKind::NeedsBase | ErrorKind::NeedsLength => HENCE_ERR_CONTEXT,
        ErrorKind::Unsupported => HENCE_ERR_UNSUPPORTED,
        ErrorKind::Diverges | ErrorKind::NoMeaning => HENCE_ERR_NO_MEANING,
        _ => HENCE_ERR_INTERNAL,
    }
}

/// The name of a status, as static text: "HENCE_ERR_DOMAIN". Unknown numbers give "unknown status".
///
/// Returns: static, never NULL, not to be freed. Threads: any.
#[unsafe(no_mangle)]
pub extern "C" fn hence_status_name(code: i32) -> *const c_char {
    let name = match code {
        HENCE_OK => c"HENCE_OK",
        HENCE_ERR_NULL => c"HENCE_ERR_NULL",
        HENCE_ERR_ALIGNMENT => c"HENCE_ERR_ALIGNMENT",
        HENCE_ERR_LENGTH => c"HENCE_ERR_LENGTH",
        HENCE_ERR_OVERLAP => c"HENCE_ERR_OVERLAP",
        HENCE_ERR_CAPACITY => c"HENCE_ERR_CAPACITY",
        HENCE_ERR_UTF8 => c"HENCE_ERR_UTF8",
        HENCE_ERR_NOT_FINITE => c"HENCE_ERR_NOT_FINITE",
        HENCE_ERR_RANGE => c"HENCE_ERR_RANGE",
        HENCE_ERR_DOMAIN => c"HENCE_ERR_DOMAIN",
        HENCE_ERR_SHAPE => c"HENCE_ERR_SHAPE",
        HENCE_ERR_NO_MEANING => c"HENCE_ERR_NO_MEANING",
        HENCE_ERR_SYNTAX => c"HENCE_ERR_SYNTAX",
        HENCE_ERR_SCHEDULE => c"HENCE_ERR_SCHEDULE",
        HENCE_ERR_CONTEXT => c"HENCE_ERR_CONTEXT",
        HENCE_ERR_UNSUPPORTED => c"HENCE_ERR_UNSUPPORTED",
        HENCE_ERR_INTERNAL => c"HENCE_ERR_INTERNAL",
        _ => c"unknown status",
    };
    name.as_ptr()
}
