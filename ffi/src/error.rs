//! The plain error struct that a caller supplies, and the guard around every export.

use std::panic::{AssertUnwindSafe, catch_unwind};

use libc::c_char;

use crate::status;

// The guard turns a panic into a status only where panics unwind.
#[cfg(not(panic = "unwind"))]
compile_error!(
    "hence-ffi needs panic = \"unwind\": with another setting a fault would end the caller's process"
);

/// What went wrong, written into the caller's own struct, which may overlap no other argument. Nothing in it is
/// allocated or freed.
#[repr(C)]
#[derive(Clone, Copy)]
pub struct hence_error {
    /// In: sizeof(hence_error), set by the caller. A smaller size gets only the fields that fit.
    pub struct_size: u32,
    /// Out: the status, as returned.
    pub code: i32,
    /// Out: the argument it is about, counted from 1; 0 where it is about none.
    pub argument: i32,
    /// Out: the index within that argument, from 0; within a text the character (HENCE_ERR_UTF8: the byte); what is needed
    /// (HENCE_ERR_CAPACITY); -1 where there is none.
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

/// Turns a library error into a failure: `names` are the library's names of the arguments in their order, "" where it has
/// none. An error about none of them is about no argument.
pub(crate) fn named(names: &[&str]) -> impl Fn(hence_core::Error) -> Failure {
    move |error| {
        let place = names.iter().position(|name| *name == error.argument());
        Failure::core(&error, place.map_or(0, |place| place as i32 + 1))
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
    // Whole fields only; the message alone may be cut.
    let message = std::mem::offset_of!(hence_error, message);
    let ends = [std::mem::offset_of!(hence_error, argument), std::mem::offset_of!(hence_error, argument) + 4];
    let known = match size {
        size if size >= message => size.min(size_of::<hence_error>()),
        size => ends.into_iter().rfind(|end| *end <= size).unwrap_or(0),
    };
    let mut full = hence_error {
        struct_size: size as u32,
        code: failure.code,
        argument: failure.argument,
        index: failure.index,
        message: [0; 256],
    };
    // At a character, with room for the NUL that is there already.
    let room = known.saturating_sub(message).saturating_sub(1);
    let mut end = failure.message.len().min(room);
    while !failure.message.is_char_boundary(end) {
        end -= 1;
    }
    for (to, from) in full.message.iter_mut().zip(&failure.message.as_bytes()[..end]) {
        *to = *from as c_char;
    }
    // SAFETY: `known` bytes belong to the caller by its `struct_size`, and `full` holds at least as many.
    unsafe { std::ptr::copy_nonoverlapping((&raw const full).cast::<u8>(), error.cast::<u8>(), known) };
}

#[cfg(test)]
mod tests {
    use std::ffi::CStr;

    use super::*;

    fn blank() -> hence_error {
        hence_error {
            struct_size: size_of::<hence_error>() as u32,
            code: 7,
            argument: 7,
            index: 7,
            message: [0x55; 256],
        }
    }

    fn message(error: &hence_error) -> &str {
        // SAFETY: every message ends in NUL within the struct.
        unsafe { CStr::from_ptr(error.message.as_ptr()) }.to_str().expect("a message is UTF-8")
    }

    /// A panic inside an export comes out as a status, and what the body would have written is not written.
    #[test]
    fn a_panic_is_a_status() {
        let mut error = blank();
        let mut output = -7.0;
        let body = || {
            output = [1.0][std::hint::black_box(1)];
            Ok(())
        };
        // SAFETY: a whole error struct.
        assert_eq!(unsafe { guard(&mut error, body) }, status::HENCE_ERR_INTERNAL);
        assert_eq!((error.code, error.argument, error.index), (status::HENCE_ERR_INTERNAL, 0, -1));
        assert!(message(&error).contains("nothing was written"));
        assert_eq!(output, -7.0);
        // SAFETY: NULL is allowed.
        assert_eq!(
            unsafe { guard(std::ptr::null_mut(), || panic!("a forced fault")) },
            status::HENCE_ERR_INTERNAL
        );
    }

    #[test]
    fn success_clears_the_struct() {
        let mut error = blank();
        // SAFETY: a whole error struct.
        assert_eq!(unsafe { guard(&mut error, || Ok(())) }, status::HENCE_OK);
        assert_eq!((error.code, error.argument, error.index, message(&error)), (0, 0, -1, ""));
    }

    /// At 255 bytes and above, in characters of one byte to four.
    #[test]
    fn a_long_message_is_cut_at_a_character() {
        for c in ['a', 'é', '€', '𝄞'] {
            for length in [254 / c.len_utf8(), 255 / c.len_utf8(), 300] {
                let text: String = std::iter::repeat_n(c, length).collect();
                let mut error = blank();
                // SAFETY: a whole error struct.
                unsafe { guard(&mut error, || Err(Failure::new(10, 1, text.clone()))) };
                let said = message(&error);
                assert!(text.starts_with(said) && said.len() > 251.min(text.len() - 1), "{c} {length}");
            }
        }
    }

    /// No byte beyond the caller's struct_size is written.
    #[test]
    fn a_smaller_struct_keeps_its_end() {
        for size in 0..=size_of::<hence_error>() as u32 {
            let mut error = blank();
            error.struct_size = size;
            // SAFETY: as many bytes as struct_size says, and more.
            unsafe { guard(&mut error, || Err(Failure::new(10, 1, "x".repeat(300)))) };
            assert_eq!(error.code == 10, size >= 8, "{size}");
            let kept = error.message.iter().rev().take_while(|c| **c == 0x55).count();
            let within = (size as usize).saturating_sub(std::mem::offset_of!(hence_error, message));
            assert_eq!(kept, 256 - within, "{size}");
        }
    }
}
