//! What a call costs across the C interface, and through a worksheet function.

use std::ffi::{CStr, CString};
use std::hint::black_box;
use std::ptr::null_mut;

use hence::worksheet::{Cell, Function, Range, call};
use hence::{HENCE_OK, hence_basis, hence_basis_free, hence_basis_parse, hence_factors, hence_present_value};

use crate::best;

const CALLS: usize = 100_000;
const YEARS: usize = 100;

fn parsed(line: &CStr) -> *mut hence_basis {
    let mut basis = null_mut();
    // SAFETY: a NUL-ended text, a place for the handle, no error struct.
    let status = unsafe { hence_basis_parse(line.as_ptr(), &mut basis, null_mut()) };
    assert_eq!(status, HENCE_OK, "{line:?}");
    basis
}

fn row(what: &str, calls: usize, work: impl FnMut()) {
    let time = best(5, work);
    let ns = time.as_nanos() as f64 / calls as f64;
    println!("| {what} | {:.2} million | {ns:.0} |", 1e3 / ns);
}

pub fn calls() {
    println!("| call | calls per second | ns per call |");
    println!("| --- | --- | --- |");
    let bands = CString::new("3.5% to 30, 3% to 75, 2.5% to 125, 2% after").expect("no NUL");
    let basis = parsed(&bands);
    let offsets: Vec<f64> = (0..YEARS).map(|t| t as f64).collect();
    let flows = vec![1.0; YEARS];
    let mut factors = vec![0.0; YEARS];
    let mut value = 0.0;
    for n in [1, YEARS] {
        row(&format!("hence_factors, {n} offsets"), CALLS, || {
            for _ in 0..CALLS {
                // SAFETY: a live handle and arrays of `n` or more numbers.
                let status = unsafe {
                    hence_factors(basis, black_box(offsets.as_ptr()), n, factors.as_mut_ptr(), null_mut())
                };
                assert_eq!(status, HENCE_OK);
            }
        });
    }
    row(&format!("hence_present_value, {YEARS} flows"), CALLS, || {
        for _ in 0..CALLS {
            let (offsets, flows) = (black_box(offsets.as_ptr()), flows.as_ptr());
            // SAFETY: a live handle, arrays of that many numbers, a place for the value.
            let status = unsafe { hence_present_value(basis, offsets, flows, YEARS, &mut value, null_mut()) };
            assert_eq!(status, HENCE_OK);
        }
    });
    for line in [c"3.5%", c"uk-2003", bands.as_c_str()] {
        row(&format!("hence_basis_parse and hence_basis_free, `{}`", line.to_string_lossy()), CALLS, || {
            for _ in 0..CALLS {
                // SAFETY: made here and freed once.
                unsafe { hence_basis_free(parsed(black_box(line))) };
            }
        });
    }
    // SAFETY: made above and freed once.
    unsafe { hence_basis_free(basis) };

    let factor = Function::find("FACTOR").expect("it is in the table");
    for line in ["3.5%", "uk-2003"] {
        let basis = || Some(Range::single(Cell::Text(line.into())));
        row(&format!("HENCE.FACTOR of one offset, `{line}`"), CALLS, || {
            for i in 0..CALLS {
                let offset = Some(Range::single(Cell::Number((i % 300) as f64)));
                black_box(call(factor, &[basis(), offset]));
            }
        });
        let offsets: Vec<Cell> = (0..CALLS).map(|i| Cell::Number((i % 300) as f64)).collect();
        row(&format!("HENCE.FACTOR of {CALLS} offsets, an offset, `{line}`"), CALLS, || {
            let offsets = Range::new(CALLS, 1, offsets.clone());
            black_box(call(factor, &[basis(), offsets]));
        });
    }
    println!();
}
