//! The exported functions called through raw pointers, small and without files, so that they also run under miri.

use std::ffi::{CStr, c_char};
use std::ptr::{null, null_mut};

use crate::error::guard;
use crate::*;

fn blank() -> hence_error {
    hence_error {
        struct_size: size_of::<hence_error>() as u32,
        code: 7,
        argument: 7,
        index: 7,
        message: [0; 256],
    }
}

/// A basis that is freed at the end.
struct Held(*mut hence_basis);

impl Held {
    fn new(line: &CStr) -> Self {
        let mut basis = null_mut();
        // SAFETY: a NUL-ended text and a place for the handle.
        assert_eq!(unsafe { hence_basis_parse(line.as_ptr(), &mut basis, null_mut()) }, HENCE_OK);
        Held(basis)
    }
}

impl Drop for Held {
    fn drop(&mut self) {
        // SAFETY: made by the library and freed once.
        unsafe { hence_basis_free(self.0) };
    }
}

/// Status, argument and index of a call.
macro_rules! refused {
    ($name:ident($($argument:expr),* $(,)?)) => {{
        let mut error = blank();
        // SAFETY: wrong pointers are those that the function promises to answer; the others are sound.
        let status = unsafe { $name($($argument,)* &mut error) };
        assert_eq!(status, error.code);
        (status, error.argument, error.index)
    }};
}

/// What a caller gets where the library is at fault, through the calling convention of C.
#[test]
fn a_panic_does_not_leave_an_export() {
    unsafe extern "C" fn faulty(index: usize, out: *mut f64, error: *mut hence_error) -> i32 {
        let body = || {
            let found = [1.0, 2.0][index];
            // SAFETY: the test hands over a place for the result.
            unsafe { out.write(found) };
            Ok(())
        };
        // SAFETY: the test hands over a whole struct.
        unsafe { guard(error, body) }
    }
    let mut out = -7.0;
    assert_eq!(refused!(faulty(2, &mut out)), (HENCE_ERR_INTERNAL, 0, -1));
    assert_eq!(out, -7.0);
    assert_eq!(refused!(faulty(1, &mut out)), (HENCE_OK, 0, -1));
    assert_eq!(out, 2.0);
}

#[test]
fn arrays_go_in_and_come_out() {
    let basis = Held::new(c"100%");
    let (offsets, flows) = ([0.0, 1.0, 2.0], [8.0, 8.0, 8.0, 0.0, 0.0, 4.0]);
    let mut out = [-7.0; 3];
    let factors = refused!(hence_factors(basis.0, offsets.as_ptr(), 3, out.as_mut_ptr()));
    assert_eq!((factors, out), ((HENCE_OK, 0, -1), [1.0, 0.5, 0.25]));
    let mut values = [-7.0; 2];
    let status =
        refused!(hence_present_values(basis.0, offsets.as_ptr(), flows.as_ptr(), 2, 3, values.as_mut_ptr()));
    assert_eq!((status, values), ((HENCE_OK, 0, -1), [14.0, 1.0]));
    let mut value = -7.0;
    refused!(hence_present_value(basis.0, offsets.as_ptr(), flows.as_ptr(), 3, &mut value));
    assert_eq!(value, 14.0);
    assert_eq!(refused!(hence_factors(basis.0, null(), 0, null_mut())), (HENCE_OK, 0, -1));
}

/// In one array, as a caller in C would do it: a neighbour that only touches is sound.
#[test]
fn an_output_within_an_input_is_refused() {
    let basis = Held::new(c"100%");
    let mut both = [0.0, 1.0, -7.0, -7.0];
    let start = both.as_mut_ptr();
    // SAFETY: within the array.
    let (second, third) = unsafe { (start.add(1), start.add(2)) };
    let overlap = |argument| (HENCE_ERR_OVERLAP, argument, -1);
    assert_eq!(refused!(hence_factors(basis.0, start, 2, second)), overlap(4));
    assert_eq!(refused!(hence_present_value(basis.0, start, third, 2, third)), overlap(5));
    assert_eq!(refused!(hence_factors(basis.0, start, 2, third)), (HENCE_OK, 0, -1));
    assert_eq!(both, [0.0, 1.0, 1.0, 0.5]);

    let (offsets, flows) = ([0.0, 1.0], [-100.0, 150.0]);
    let mut rates = [-7.0];
    let rate = rates.as_mut_ptr();
    let status = refused!(hence_irr_all(
        offsets.as_ptr(),
        flows.as_ptr(),
        2,
        -0.5,
        1.0,
        rate,
        1,
        rate.cast::<usize>()
    ));
    assert_eq!((status, rates), (overlap(8), [-7.0]));
}

#[test]
fn pointers_are_looked_at_before_they_are_used() {
    let basis = Held::new(c"100%");
    let offsets = [0.0, 1.0];
    let mut out = [-7.0; 2];
    let off = |pointer: *const f64| pointer.wrapping_byte_add(1);
    let odd_basis = basis.0.cast_const().wrapping_byte_add(1);
    assert_eq!(
        refused!(hence_factors(odd_basis, offsets.as_ptr(), 2, out.as_mut_ptr())),
        (HENCE_ERR_ALIGNMENT, 1, -1)
    );
    assert_eq!(
        refused!(hence_factors(basis.0, off(offsets.as_ptr()), 2, out.as_mut_ptr())),
        (HENCE_ERR_ALIGNMENT, 2, -1)
    );
    assert_eq!(
        refused!(hence_factors(basis.0, offsets.as_ptr(), 2, off(out.as_ptr()).cast_mut())),
        (HENCE_ERR_ALIGNMENT, 4, -1)
    );
    let huge = usize::MAX;
    assert_eq!(
        refused!(hence_factors(basis.0, offsets.as_ptr(), huge, out.as_mut_ptr())),
        (HENCE_ERR_LENGTH, 3, -1)
    );
    assert_eq!(
        refused!(hence_factors(null(), offsets.as_ptr(), 2, out.as_mut_ptr())),
        (HENCE_ERR_NULL, 1, -1)
    );
    assert_eq!(out, [-7.0; 2]);
}

/// The text, its NUL and nothing after it.
#[test]
fn a_text_takes_the_bytes_it_needs() {
    let basis = Held::new(c"3.5 %");
    let mut buffer = [0x55 as c_char; 8];
    assert_eq!(refused!(hence_basis_line(basis.0, buffer.as_mut_ptr(), 4)), (HENCE_ERR_CAPACITY, 3, 5));
    assert_eq!(buffer, [0x55; 8]);
    assert_eq!(refused!(hence_basis_line(basis.0, buffer.as_mut_ptr(), 5)), (HENCE_OK, 0, -1));
    // SAFETY: the function has ended the text with NUL.
    assert_eq!(unsafe { CStr::from_ptr(buffer.as_ptr()) }, c"3.5%");
    assert_eq!(buffer[5..], [0x55; 3]);
}

/// Ranges with texts, and an answer with its cells.
#[test]
fn cells_go_in_and_come_out() {
    let size = size_of::<hence_range>() as u32;
    let (line, numbers) = (c"100%", [0.0, 1.0]);
    let (kinds, texts) = ([HENCE_CELL_TEXT], [line.as_ptr()]);
    let basis = hence_range {
        struct_size: size,
        rows: 1,
        columns: 1,
        numbers: numbers.as_ptr(),
        kinds: kinds.as_ptr(),
        texts: texts.as_ptr(),
    };
    let offsets = hence_range {
        struct_size: size,
        rows: 2,
        columns: 1,
        numbers: numbers.as_ptr(),
        kinds: null(),
        texts: null(),
    };
    let given: [*const hence_range; 3] = [&basis, &offsets, null()];
    let mut answer = null_mut();
    let status = refused!(hence_worksheet_call(c"FACTOR".as_ptr(), given.as_ptr(), 3, &mut answer));
    assert_eq!(status, (HENCE_OK, 0, -1));
    let (mut rows, mut columns) = (0, 0);
    refused!(hence_answer_shape(answer, &mut rows, &mut columns));
    assert_eq!((rows, columns), (2, 1));
    let place = &raw mut rows;
    assert_eq!(refused!(hence_answer_shape(answer, place, place)), (HENCE_ERR_OVERLAP, 3, -1));
    let (mut found, mut kinds) = ([-7.0; 2], [9; 2]);
    refused!(hence_answer_cells(answer, found.as_mut_ptr(), kinds.as_mut_ptr(), 2));
    assert_eq!((found, kinds), ([1.0, 0.5], [HENCE_CELL_NUMBER; 2]));
    let start = found.as_mut_ptr();
    assert_eq!(
        refused!(hence_answer_cells(answer, start, start.cast::<u8>(), 2)),
        (HENCE_ERR_OVERLAP, 3, -1)
    );
    assert_eq!(found, [1.0, 0.5]);
    // SAFETY: made by the library and freed once.
    unsafe { hence_answer_free(answer) };
}

/// What cannot be is at the argument that says it; the place of a band is no index of a text.
#[test]
fn a_curve_that_cannot_be_made_names_its_argument() {
    let points = c"3.9% at 3, 4% at 10; whole horizon by length, interpolated";
    let mut basis = null_mut();
    let mut at = |line: &CStr, base_year, length| {
        refused!(hence_basis_parse_at(line.as_ptr(), base_year, length, &mut basis))
    };
    assert_eq!(at(c"3.5% to 2030, 1% after", 0, 0.0), (HENCE_ERR_CONTEXT, 2, -1));
    assert_eq!(at(points, 0, 0.0), (HENCE_ERR_CONTEXT, 3, -1));
    assert_eq!(at(c"3% to 10, 2% to 30; whole horizon by length", 0, 31.0), (HENCE_ERR_DOMAIN, 3, -1));
    assert_eq!(at(c"1% to 5, 3.5% to 2020, 1% after", 2026, 0.0), (HENCE_ERR_RANGE, 1, -1));
    assert!(basis.is_null());
    let plain = refused!(hence_basis_parse(points.as_ptr(), &mut basis));
    assert_eq!(plain, (HENCE_ERR_CONTEXT, 1, -1));
}

/// Structs of the caller's that grow: one of a later version keeps its end, one that is too small stays as it was.
#[test]
fn a_struct_of_results_says_its_size() {
    const SIZE: usize = size_of::<hence_growth>();
    let series = [1.0, 2.0, 4.0, 8.0];
    let mut storage = [f64::NAN; SIZE / 8 + 1];
    let growth = storage.as_mut_ptr().cast::<hence_growth>();
    for (size, status) in [(SIZE - 8, (HENCE_ERR_RANGE, 4, -1)), (SIZE + 8, (HENCE_OK, 0, -1))] {
        // SAFETY: within the array, which is larger than the struct, and aligned for it.
        unsafe { (&raw mut (*growth).struct_size).write(size as u32) };
        assert_eq!(refused!(hence_growth_estimate(series.as_ptr(), null(), 4, growth)), status);
        // SAFETY: as above; every bit pattern is a number.
        let found = unsafe { growth.read() };
        assert_eq!(found.struct_size as usize, size);
        assert_eq!(found.trend_growth == 1.0, status.0 == HENCE_OK);
        assert_eq!(found.trend.is_nan(), status.0 != HENCE_OK);
    }
    assert!(storage[SIZE / 8].is_nan());
}

#[test]
fn paths_and_draws_go_in_and_come_out() {
    let (consumption, offsets) = ([2.0, 4.0], [0.0, 1.0]);
    let mut value = -7.0;
    let welfare = refused!(hence_welfare(
        consumption.as_ptr(),
        offsets.as_ptr(),
        2,
        0.25,
        2.0,
        HENCE_COMPOUNDING_YEARLY,
        &mut value
    ));
    assert_eq!((welfare, value), ((HENCE_OK, 0, -1), 1.1));
    let flows = [0.0, 1.0, 0.0, 2.0];
    let (mut rates, mut values) = ([-7.0; 2], [-7.0; 4]);
    let drawn = refused!(hence_draws_value(
        c"100%".as_ptr(),
        null(),
        c"1".as_ptr(),
        c"0%".as_ptr(),
        offsets.as_ptr(),
        flows.as_ptr(),
        2,
        2,
        2,
        1,
        1,
        rates.as_mut_ptr(),
        values.as_mut_ptr()
    ));
    assert_eq!((drawn, rates, values), ((HENCE_OK, 0, -1), [1.0; 2], [0.5, 0.5, 1.0, 1.0]));
    let (mut alone, mut tied) = ([-7.0; 2], [-7.0; 2]);
    let rank = refused!(hence_draws_rank(values.as_ptr(), 2, 2, alone.as_mut_ptr(), tied.as_mut_ptr()));
    assert_eq!((rank, alone, tied), ((HENCE_OK, 0, -1), [0.0, 1.0], [0.0, 0.0]));

    let basis = Held::new(c"preference 1%, elasticity 1, growth 2%");
    let (net, mut found, mut count) = ([-100.0, 200.0], [-7.0; 2], 77);
    let switching = refused!(hence_switching_values(
        basis.0,
        HENCE_PARAMETER_RATE,
        offsets.as_ptr(),
        net.as_ptr(),
        2,
        -0.5,
        1.0,
        found.as_mut_ptr(),
        2,
        &mut count
    ));
    assert_eq!((switching, count, found), ((HENCE_OK, 0, -1), 1, [1.0, -7.0]));
}
