//! The plain error struct that a caller supplies, and the guard around every export.

use std::panic::{AssertUnwindSafe, catch_unwind};

use libc::c_char;

use crate::status;

/// What went wrong, written into the caller's own struct. Nothing in it is allocated or freed.
#[repr(C)]
#[derive(Clone, Copy)]
pub struct hence_error {
    /// In: sizeof(hence_error), set by the caller. A smaller size gets only the fields that fit.
    pub struct_size: u32,
    /// Out: the status, as returned.
    pub code: i32,
    /// Out: the argument it is about, counted from 1; 0 where it is about none.
    pub argument: i32,
    /// Out: the index within that argument, or the character within a text; -1 where there is none.
    pub index: i64,
    /// Out: the message, UTF-8, always ended by NUL, cut at a character.
    pub message: [c_char; 256],
}

/// A failure inside an export, before it is written out.
pub(crate) struct Failure {
    pub code: i32,
    pub argument: i32,
    pub index: i64,
    pub message: String,
}

impl Failure {
    pub fn new(code: i32, argument: i32, message: impl Into<String>) -> Self {
        Failure { code, argument, index: -1, message: message.into() }
    }

    /// With the index within the argument.
    pub fn with_index(mut self, index: usize) -> Self {
        self.index = i64::try_from(index).unwrap_or(-1);
        self
    }

    /// A library error about one element of the given argument.
    pub fn at(error: &hence_core::Error, argument: i32, index: usize) -> Self {
        Failure::core(error, argument).with_index(index)
    }

    /// A library error about the given argument.
    pub fn core(error: &hence_core::Error, argument: i32) -> Self {
        let index = error.index().or(error.at()).and_then(|i| i64::try_from(i).ok()).unwrap_or(-1);
        let mut message = error.message().to_owned();
        if let Some(hint) = error.hint() {
            message.push_str(". Try: ");
            message.push_str(hint);
        }
        Failure { code: status::of(error.kind()), argument, index, message }
    }
}

pub(crate) type Guarded = Result<(), Failure>;

/// Runs the body of an export: no panic crosses into the caller, and the error struct is filled.
///
/// # Safety
/// `error` is NULL or points to a struct whose `struct_size` the caller has set to the bytes it owns.
pub(crate) unsafe fn guard(error: *mut hence_error, body: impl FnOnce() -> Guarded) -> i32 {
    let result = catch_unwind(AssertUnwindSafe(body)).unwrap_or_else(|_| {
        Err(Failure::new(status::HENCE_ERR_INTERNAL, 0, "a fault inside the library; nothing was written"))
    });
    let failure = match result {
        Ok(()) => Failure { code: status::HENCE_OK, argument: 0, index: -1, message: String::new() },
        Err(failure) => failure,
    };
    // SAFETY: the caller's contract, passed on.
    unsafe { write(error, &failure) };
    failure.code
}

/// # Safety
/// As [`guard`].
unsafe fn write(error: *mut hence_error, failure: &Failure) {
    if error.is_null() || !error.is_aligned() {
        return;
    }
    // SAFETY: not NULL and aligned; `struct_size` is the first field and set by the caller.
    let size = unsafe { (&raw const (*error).struct_size).read() } as usize;
    let mut full = hence_error {
        struct_size: size as u32,
        code: failure.code,
        argument: failure.argument,
        index: failure.index,
        message: [0; 256],
    };
    let mut end = failure.message.len().min(full.message.len() - 1);
    while !failure.message.is_char_boundary(end) {
        end -= 1;
    }
    for (to, from) in full.message.iter_mut().zip(&failure.message.as_bytes()[..end]) {
        *to = *from as c_char;
    }
    let known = size.min(std::mem::size_of::<hence_error>());
    if known < std::mem::size_of::<u32>() {
        return;
    }
    // SAFETY: `known` bytes belong to the caller by its `struct_size`, and `full` holds at least as many.
    unsafe { std::ptr::copy_nonoverlapping((&raw const full).cast::<u8>(), error.cast::<u8>(), known) };
    if known < std::mem::size_of::<hence_error>() && known > std::mem::offset_of!(hence_error, message) {
        // A shorter message field of an older caller still ends in NUL.
        // SAFETY: byte `known - 1` is within the caller's struct.
        unsafe { error.cast::<u8>().add(known - 1).write(0) };
    }
}
