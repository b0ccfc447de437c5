//! What the host calls of an add-in itself: opening, closing, freeing, its name in the list of add-ins.

use std::panic::catch_unwind;
use std::sync::{LazyLock, Mutex, PoisonError};

use hence::worksheet::{Cell, Range};

use crate::answer::{self, Answer};
use crate::host::Host;
use crate::registration::{register, unregister};
use crate::xloper::{Xloper12, error, kind};

/// The numbers of the registrations, from opening to closing.
static REGISTERED: Mutex<Vec<f64>> = Mutex::new(Vec::new());

/// Called by the host when the add-in is opened: registers the functions. Gives 1 when all are, else 0.
#[unsafe(no_mangle)]
pub extern "system" fn xlAutoOpen() -> i32 {
    let opened = catch_unwind(|| {
        let numbers = Host::find().and_then(register)?;
        *REGISTERED.lock().unwrap_or_else(PoisonError::into_inner) = numbers;
        Some(())
    });
    i32::from(matches!(opened, Ok(Some(()))))
}

/// Called by the host when the add-in is closed: takes the registrations back. Gives 1, as the host wants it.
#[unsafe(no_mangle)]
pub extern "system" fn xlAutoClose() -> i32 {
    let _ = catch_unwind(|| {
        let numbers = std::mem::take(&mut *REGISTERED.lock().unwrap_or_else(PoisonError::into_inner));
        if let Some(host) = Host::find() {
            unregister(host, &numbers);
        }
    });
    1
}

/// Called by the host once it has copied a result. Threads: any.
///
/// # Safety
/// `value` is NULL, a result of one of the exported procedures not freed before, or a value without the bit that asks
/// for freeing.
#[unsafe(no_mangle)]
pub unsafe extern "system" fn xlAutoFree12(value: *mut Xloper12) {
    let freed = std::panic::AssertUnwindSafe(|| {
        // SAFETY: the caller's contract, passed on.
        unsafe { answer::free(value) }
    });
    let _ = catch_unwind(freed);
}

/// A value that stays for the life of the library, so that nobody need free it.
struct Resident(Answer);

// SAFETY: its pointers lead to vectors of its own, which nothing changes after it is made.
unsafe impl Send for Resident {}
// SAFETY: as above.
unsafe impl Sync for Resident {}

static LONG_NAME: LazyLock<Resident> = LazyLock::new(|| {
    let text = concat!("hence ", env!("CARGO_PKG_VERSION"), ": social discounting");
    Resident(Answer::new(&Range::single(Cell::Text(text.into()))))
});
static NOTHING_ELSE: LazyLock<Resident> = LazyLock::new(|| Resident(Answer::error(error::VALUE)));

/// Called by the host for its list of add-ins: the name of this one for the number 1, else `#VALUE!`. The result stays
/// the library's. Threads: any.
///
/// # Safety
/// `action` is NULL or a value of the host's that stays as it is during the call.
#[unsafe(no_mangle)]
pub unsafe extern "system" fn xlAddInManagerInfo12(action: *const Xloper12) -> *const Xloper12 {
    // SAFETY: NULL gives none; else readable by the caller's contract.
    let named = unsafe { action.as_ref() }.is_some_and(|action| match action.base_kind() {
        // SAFETY: the kind says which field holds.
        kind::INTEGER => unsafe { action.value.integer == 1 },
        // SAFETY: as above.
        kind::NUMBER => unsafe { action.value.number == 1.0 },
        _ => false,
    });
    if named { LONG_NAME.0.value() } else { NOTHING_ELSE.0.value() }
}

/// How many results the host has not handed back, for tests. Threads: any.
#[unsafe(no_mangle)]
pub extern "C" fn hence_xll_live() -> i64 {
    answer::live()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_program_that_is_no_host_opens_nothing() {
        if !cfg!(windows) {
            assert_eq!(xlAutoOpen(), 0);
            assert_eq!(xlAutoClose(), 1);
        }
    }

    #[test]
    fn the_name_is_given_for_the_number_one_only() {
        let kind_for = |action: Xloper12| {
            // SAFETY: the action lives during the call; the result stays.
            unsafe { (*xlAddInManagerInfo12(&action)).kind }
        };
        assert_eq!(kind_for(Xloper12::integer(1)), kind::TEXT);
        assert_eq!(kind_for(Xloper12::number(1.0)), kind::TEXT);
        for other in
            [Xloper12::integer(2), Xloper12::number(1.5), Xloper12::logical(true), Xloper12::missing()]
        {
            assert_eq!(kind_for(other), kind::ERROR);
        }
    }
}
