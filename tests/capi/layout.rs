//! The header as a C compiler sees it against the library as Rust sees it: macros, sizes, offsets.

use std::mem::{align_of, offset_of, size_of};

use hence::*;

use crate::library;

/// Every constant that the header defines.
fn constants() -> Vec<(&'static str, i64)> {
    macro_rules! named {
        ($($name:ident),* $(,)?) => { vec![$((stringify!($name), i64::try_from($name).expect("it fits"))),*] };
    }
    named![
        HENCE_ABI_VERSION,
        HENCE_LENGTH_MAX,
        HENCE_OK,
        HENCE_ERR_NULL,
        HENCE_ERR_ALIGNMENT,
        HENCE_ERR_LENGTH,
        HENCE_ERR_OVERLAP,
        HENCE_ERR_CAPACITY,
        HENCE_ERR_UTF8,
        HENCE_ERR_NOT_FINITE,
        HENCE_ERR_RANGE,
        HENCE_ERR_DOMAIN,
        HENCE_ERR_SHAPE,
        HENCE_ERR_NO_MEANING,
        HENCE_ERR_SYNTAX,
        HENCE_ERR_SCHEDULE,
        HENCE_ERR_CONTEXT,
        HENCE_ERR_UNSUPPORTED,
        HENCE_ERR_INTERNAL,
        HENCE_CELL_NUMBER,
        HENCE_CELL_TEXT,
        HENCE_CELL_BLANK,
        HENCE_CELL_LOGICAL,
        HENCE_CELL_ERROR,
        HENCE_COMPOUNDING_YEARLY,
        HENCE_COMPOUNDING_CONTINUOUS,
        HENCE_PARAMETER_RATE,
        HENCE_PARAMETER_PREFERENCE,
        HENCE_PARAMETER_ELASTICITY,
        HENCE_PARAMETER_GROWTH,
    ]
}

#[test]
fn c_and_rust_see_one_layout() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let program = library::compile("layout.c", folder.path(), &[]);
    let printed = library::run(&[program.to_str().expect("a path in UTF-8")], &[]);

    let mut due: Vec<String> = constants().iter().map(|(name, value)| format!("{name} {value}")).collect();
    macro_rules! layout {
        ($type:ident: $($field:ident),*) => {
            due.push(format!("sizeof {} {} {}", stringify!($type), size_of::<$type>(), align_of::<$type>()));
            $(due.push(format!("offset {}.{} {}", stringify!($type), stringify!($field), offset_of!($type, $field)));)*
        };
    }
    layout!(hence_error: struct_size, code, argument, index, message);
    layout!(hence_range: struct_size, rows, columns, numbers, kinds, texts);
    layout!(hence_growth: struct_size, has_persistence, trend, trend_error, mean, mean_error, trend_growth, mean_growth, sd, sd_error, persistence, persistence_error);
    layout!(hence_spread: struct_size, mean, mean_error, sd, lowest, highest, positive, positive_error);
    due.push(format!("abi {HENCE_ABI_VERSION}"));
    assert_eq!(printed.lines().collect::<Vec<_>>(), due);
}

/// A constant that is added to the header has to be added here and to layout.c.
#[test]
fn every_macro_of_the_header_is_compared() {
    let header = std::fs::read_to_string(library::root().join("include/hence.h")).expect("include/hence.h");
    let defined =
        header.lines().filter_map(|line| line.strip_prefix("#define HENCE_")).filter(|l| l.contains(' '));
    assert_eq!(defined.count(), constants().len());
}

/// Names are unique, and every status has its own.
#[test]
fn every_status_has_a_name() {
    let statuses =
        constants().into_iter().filter(|(name, _)| *name == "HENCE_OK" || name.starts_with("HENCE_ERR"));
    for (name, value) in statuses {
        // SAFETY: the name is static text, ended by NUL.
        let said = unsafe { std::ffi::CStr::from_ptr(hence_status_name(value as i32)) };
        assert_eq!(said.to_str(), Ok(name));
    }
    // SAFETY: as above.
    let unknown = unsafe { std::ffi::CStr::from_ptr(hence_status_name(-1)) };
    assert_eq!(unknown.to_str(), Ok("unknown status"));
}
