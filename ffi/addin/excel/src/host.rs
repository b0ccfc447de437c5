//! The host's own entry, through which the add-in registers its functions.

use std::ptr;

use crate::xloper::Xloper12;

/// The host's entry as it exports it: a function number, how many arguments, the arguments, where the result goes.
pub(crate) type Entry = unsafe extern "system" fn(
    function: i32,
    count: i32,
    arguments: *const *const Xloper12,
    result: *mut Xloper12,
) -> i32;

/// The numbers of the host's functions that the add-in calls.
pub(crate) mod function {
    /// Frees a value whose content the host allocated.
    pub const FREE: i32 = 0x4000;
    /// The path of the add-in.
    pub const GET_NAME: i32 = 0x4009;
    /// Sets a name, or without a value deletes it.
    pub const SET_NAME: i32 = 88;
    /// Registers a procedure as a worksheet function.
    pub const REGISTER: i32 = 149;
    /// Takes a registration back.
    pub const UNREGISTER: i32 = 201;
}

/// The host.
#[derive(Clone, Copy)]
pub(crate) struct Host(Entry);

impl Host {
    /// The host that loaded this library; none where the program is no such host.
    #[cfg(windows)]
    pub(crate) fn find() -> Option<Self> {
        use std::ffi::{c_char, c_void};

        #[link(name = "kernel32")]
        unsafe extern "system" {
            fn GetModuleHandleW(name: *const u16) -> *mut c_void;
            fn GetProcAddress(module: *mut c_void, name: *const c_char) -> *mut c_void;
        }
        // SAFETY: NULL names the program itself, whose module is never unloaded; the name is NUL-ended.
        let entry = unsafe { GetProcAddress(GetModuleHandleW(ptr::null()), c"MdCallBack12".as_ptr()) };
        if entry.is_null() {
            return None;
        }
        // SAFETY: a program that exports this name exports it with this signature: it is the documented interface.
        Some(Host(unsafe { std::mem::transmute::<*mut c_void, Entry>(entry) }))
    }

    /// Excel for Windows is the only host there is.
    #[cfg(not(windows))]
    pub(crate) fn find() -> Option<Self> {
        None
    }

    #[cfg(test)]
    pub(crate) fn stand_in(entry: Entry) -> Self {
        Host(entry)
    }

    /// Calls one of the host's functions; none where it did not succeed.
    pub(crate) fn call(self, function: i32, arguments: &[&Xloper12]) -> Option<Xloper12> {
        let pointers: Vec<*const Xloper12> = arguments.iter().map(|value| ptr::from_ref(*value)).collect();
        let mut result = Xloper12::missing();
        // SAFETY: the arguments live during the call and are only read; the result is ours to be written.
        let status = unsafe { (self.0)(function, pointers.len() as i32, pointers.as_ptr(), &mut result) };
        (status == 0).then_some(result)
    }

    /// Gives back a value whose content the host allocated.
    pub(crate) fn free(self, value: &Xloper12) {
        let pointer = ptr::from_ref(value);
        // SAFETY: one value, read during the call; this function has no result.
        unsafe { (self.0)(function::FREE, 1, &pointer, ptr::null_mut()) };
    }
}
