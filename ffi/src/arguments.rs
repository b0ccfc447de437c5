//! Pointers and lengths become slices here, after every check that must come first.

use std::ffi::CStr;

use libc::c_char;

use crate::error::Failure;
use crate::status::{
    HENCE_ERR_ALIGNMENT, HENCE_ERR_CAPACITY, HENCE_ERR_LENGTH, HENCE_ERR_NOT_FINITE, HENCE_ERR_NULL,
    HENCE_ERR_OVERLAP, HENCE_ERR_RANGE, HENCE_ERR_UTF8,
};

/// The longest array accepted, in elements.
pub const HENCE_LENGTH_MAX: usize = 1_073_741_824;

/// Checks a length. `argument` counts from 1.
pub(crate) fn length(length: usize, argument: i32) -> Result<(), Failure> {
    if length <= HENCE_LENGTH_MAX {
        return Ok(());
    }
    let message = format!("length {length}, allowed at most {HENCE_LENGTH_MAX}");
    Err(Failure::new(HENCE_ERR_LENGTH, argument, message))
}

fn check<T>(pointer: *const T, count: usize, argument: i32) -> Result<(), Failure> {
    length(count, argument + 1)?;
    if pointer.is_null() {
        return Err(Failure::new(HENCE_ERR_NULL, argument, "the pointer is NULL"));
    }
    if !pointer.is_aligned() {
        return Err(Failure::new(HENCE_ERR_ALIGNMENT, argument, "the pointer is not aligned for its type"));
    }
    Ok(())
}

/// A handle that the library made. `noun` names it in the message.
///
/// # Safety
/// `pointer` is NULL, not aligned (both are answered), or a live handle.
pub(crate) unsafe fn handle<'a, T>(pointer: *const T, noun: &str) -> Result<&'a T, Failure> {
    if !pointer.is_null() && !pointer.is_aligned() {
        return Err(Failure::new(HENCE_ERR_ALIGNMENT, 1, format!("the {noun} is not a pointer to one")));
    }
    // SAFETY: NULL gives None; else aligned (checked) and a live handle by the caller's contract.
    unsafe { pointer.as_ref() }.ok_or_else(|| Failure::new(HENCE_ERR_NULL, 1, format!("the {noun} is NULL")))
}

/// Checks a pointer that is read from.
pub(crate) fn input<T>(pointer: *const T, length: usize, argument: i32) -> Result<(), Failure> {
    if length == 0 { Ok(()) } else { check(pointer, length, argument) }
}

/// A borrowed input array. `argument` counts from 1; the length is the next argument.
///
/// # Safety
/// `pointer` is NULL, or readable for `length` elements until the call returns.
pub(crate) unsafe fn slice<'a, T>(
    pointer: *const T,
    length: usize,
    argument: i32,
) -> Result<&'a [T], Failure> {
    if length == 0 {
        return Ok(&[]);
    }
    check(pointer, length, argument)?;
    // SAFETY: not NULL, aligned, and readable for `length` elements by the caller's contract.
    Ok(unsafe { std::slice::from_raw_parts(pointer, length) })
}

/// A borrowed input array of finite numbers. `argument` counts from 1; the length is the next argument.
///
/// # Safety
/// `pointer` is NULL, or readable for `length` doubles until the call returns.
pub(crate) unsafe fn numbers<'a>(
    pointer: *const f64,
    length: usize,
    argument: i32,
) -> Result<&'a [f64], Failure> {
    // SAFETY: the caller's contract, passed on.
    let slice = unsafe { slice(pointer, length, argument) }?;
    if let Some(i) = slice.iter().position(|x| !x.is_finite()) {
        let message = format!("{} is not finite", slice[i]);
        let mut failure = Failure::new(HENCE_ERR_NOT_FINITE, argument, message);
        failure.index = i as i64;
        return Err(failure);
    }
    Ok(slice)
}

/// Borrowed input arrays of finite numbers, of one length, which is the argument behind them. `first` counts from 1.
///
/// # Safety
/// Each pointer is NULL, or readable for `length` doubles until the call returns.
pub(crate) unsafe fn alike<'a, const N: usize>(
    pointers: [*const f64; N],
    length: usize,
    first: i32,
) -> Result<[&'a [f64]; N], Failure> {
    self::length(length, first + N as i32)?;
    let mut slices: [&[f64]; N] = [&[]; N];
    for ((slice, pointer), argument) in slices.iter_mut().zip(pointers).zip(first..) {
        // SAFETY: the caller's contract, passed on.
        *slice = unsafe { numbers(pointer, length, argument) }?;
    }
    Ok(slices)
}

/// A finite number.
pub(crate) fn finite(number: f64, argument: i32) -> Result<(), Failure> {
    if number.is_finite() {
        return Ok(());
    }
    Err(Failure::new(HENCE_ERR_NOT_FINITE, argument, format!("{number} is not finite")))
}

/// Checks an output array, to be written only once the result is known.
pub(crate) fn output<T>(pointer: *mut T, length: usize, argument: i32) -> Result<(), Failure> {
    if length == 0 { Ok(()) } else { check(pointer, length, argument) }
}

/// Refuses an output that overlaps another argument, an input or an output too.
pub(crate) fn apart<A, B>(
    other: *const A,
    length: usize,
    output: *const B,
    written: usize,
    argument: i32,
) -> Result<(), Failure> {
    let end = |start: usize, length: usize, size: usize| start.saturating_add(length.saturating_mul(size));
    let (a, b) = (other as usize, output as usize);
    let (a_end, b_end) = (end(a, length, size_of::<A>()), end(b, written, size_of::<B>()));
    if length > 0 && written > 0 && a < b_end && b < a_end {
        return Err(Failure::new(HENCE_ERR_OVERLAP, argument, "the output overlaps another argument"));
    }
    Ok(())
}

/// Memory for as many elements. An allocation that fails must not end the caller's process. `argument` is the length.
pub(crate) fn reserve<T>(length: usize, argument: i32) -> Result<Vec<T>, Failure> {
    let mut elements = Vec::new();
    if elements.try_reserve_exact(length).is_err() {
        return Err(Failure::new(
            HENCE_ERR_LENGTH,
            argument,
            format!("there is no memory for {length} elements"),
        ));
    }
    Ok(elements)
}

/// Numbers for results, of which none is written before all are known. `argument` is the length.
pub(crate) fn buffer(length: usize, argument: i32) -> Result<Vec<f64>, Failure> {
    let mut numbers = reserve(length, argument)?;
    numbers.resize(length, 0.0);
    Ok(numbers)
}

/// Writes `length` results, once all of them are known. `argument` is the length.
///
/// # Safety
/// `out` is writable for `length` doubles.
pub(crate) unsafe fn fill(
    out: *mut f64,
    length: usize,
    argument: i32,
    result: impl Fn(usize) -> Result<f64, Failure>,
) -> Result<(), Failure> {
    let mut results = buffer(length, argument)?;
    for (i, place) in results.iter_mut().enumerate() {
        *place = result(i)?;
    }
    if length > 0 {
        // SAFETY: `out` holds `length` doubles by the caller's contract, and `results` is memory of its own.
        unsafe { std::ptr::copy_nonoverlapping(results.as_ptr(), out, length) };
    }
    Ok(())
}

/// The size of a struct that the caller supplies for results, from its first field: as large as the library's, or larger.
///
/// # Safety
/// `out` is NULL, or points to a struct whose first field, a `u32`, says how many bytes of it are the caller's.
pub(crate) unsafe fn sized<T>(out: *mut T, argument: i32) -> Result<u32, Failure> {
    output(out, 1, argument)?;
    // SAFETY: not NULL and aligned (checked); the size comes first by the caller's contract.
    let size = unsafe { out.cast::<u32>().read() };
    if (size as usize) < size_of::<T>() {
        let message = format!("struct_size is {size}, due are {}", size_of::<T>());
        return Err(Failure::new(HENCE_ERR_RANGE, argument, message));
    }
    Ok(size)
}

/// A borrowed text.
///
/// # Safety
/// `pointer` is NULL or a NUL-ended text that lives until the call returns.
pub(crate) unsafe fn text<'a>(pointer: *const c_char, argument: i32) -> Result<&'a str, Failure> {
    if pointer.is_null() {
        return Err(Failure::new(HENCE_ERR_NULL, argument, "the text is NULL"));
    }
    // SAFETY: not NULL, and NUL-ended by the caller's contract.
    let bytes = unsafe { CStr::from_ptr(pointer) };
    bytes.to_str().map_err(|e| {
        let mut failure = Failure::new(HENCE_ERR_UTF8, argument, "the text is not UTF-8");
        failure.index = e.valid_up_to() as i64;
        failure
    })
}

/// Writes a text into the caller's buffer, ended by NUL. `argument` is that of the buffer; its capacity is the next.
///
/// # Safety
/// `buffer` is NULL, or writable for `capacity` bytes.
pub(crate) unsafe fn write_text(
    text: &str,
    buffer: *mut c_char,
    capacity: usize,
    argument: i32,
) -> Result<(), Failure> {
    let needed = text.len() + 1;
    if capacity < needed {
        let message = format!("the buffer holds {capacity} bytes, {needed} are needed");
        let mut failure = Failure::new(HENCE_ERR_CAPACITY, argument + 1, message);
        failure.index = needed as i64;
        return Err(failure);
    }
    output(buffer, capacity, argument)?;
    // SAFETY: `buffer` is not NULL and holds `capacity` >= `needed` bytes by the caller's contract.
    unsafe {
        std::ptr::copy_nonoverlapping(text.as_ptr().cast::<c_char>(), buffer, text.len());
        buffer.add(text.len()).write(0);
    }
    Ok(())
}
