//! The worksheet functions for add-ins in other languages: cells in, cells out.

use std::borrow::Cow;

use libc::c_char;

use crate::arguments;
use crate::error::{Failure, Guarded, guard, hence_error};
use crate::status::{
    HENCE_ERR_CAPACITY, HENCE_ERR_LENGTH, HENCE_ERR_RANGE, HENCE_ERR_SHAPE, HENCE_ERR_SYNTAX,
};
use crate::worksheet::{Cell, CellError, Function, Range, call};

/// A cell holds a number; a date is its serial number, day 0 being 30 December 1899.
pub const HENCE_CELL_NUMBER: u8 = 0;
/// A cell holds a text.
pub const HENCE_CELL_TEXT: u8 = 1;
/// A cell is blank.
pub const HENCE_CELL_BLANK: u8 = 2;
/// A cell holds TRUE (number 1) or FALSE (number 0).
pub const HENCE_CELL_LOGICAL: u8 = 3;
/// A cell holds an error value; its number is that of ERROR.TYPE: 1 #NULL!, 2 #DIV/0!, 3 #VALUE!, 4 #REF!, 5 #NAME?,
/// 6 #NUM!, 7 #N/A.
pub const HENCE_CELL_ERROR: u8 = 4;

/// A range of cells that a caller hands over, row by row. One value is a range of one cell.
#[repr(C)]
#[derive(Clone, Copy)]
pub struct hence_range {
    /// sizeof(hence_range), set by the caller.
    pub struct_size: u32,
    /// The number of rows, at least 1.
    pub rows: usize,
    /// The number of columns, at least 1.
    pub columns: usize,
    /// rows x columns numbers; where a cell holds no number, its place is not looked at.
    pub numbers: *const f64,
    /// rows x columns kinds, HENCE_CELL_...; NULL where every cell holds a number.
    pub kinds: *const u8,
    /// rows x columns texts, each NUL-ended UTF-8; NULL where no cell holds a text. Only the places of texts are looked
    /// at.
    pub texts: *const *const c_char,
}

/// The range that a worksheet function gives back. Opaque and immutable: any number of threads may use one.
pub struct hence_answer {
    range: Range<'static>,
}

/// The cells of one argument.
///
/// # Safety
/// `range` is NULL or points to a range whose arrays are as its fields say, all readable until the call returns.
unsafe fn read<'a>(range: *const hence_range, index: usize) -> Result<Option<Range<'a>>, Failure> {
    let about = |mut failure: Failure| {
        failure.argument = 2;
        failure.index = index as i64;
        failure
    };
    if range.is_null() {
        return Ok(None);
    }
    arguments::input(range, 1, 2).map_err(about)?;
    // SAFETY: not NULL and aligned (checked); readable by the caller's contract. The size comes first.
    let size = unsafe { (&raw const (*range).struct_size).read() } as usize;
    if size < std::mem::size_of::<hence_range>() {
        let message = format!("struct_size is {size}, due are {}", std::mem::size_of::<hence_range>());
        return Err(about(Failure::new(HENCE_ERR_RANGE, 2, message)));
    }
    // SAFETY: the whole struct is the caller's, by its size.
    let given = unsafe { range.read() };
    let n = given.rows.saturating_mul(given.columns);
    if n == 0 {
        return Err(about(Failure::new(HENCE_ERR_SHAPE, 2, "a range has no cells; one left out is NULL")));
    }
    // SAFETY: checked inside for NULL, alignment and length; readable by the caller's contract.
    let numbers = unsafe { arguments::slice(given.numbers, n, 2) }.map_err(about)?;
    let mut cells = arguments::reserve(n, 2).map_err(about)?;
    if given.kinds.is_null() {
        cells.extend(numbers.iter().copied().map(Cell::Number));
        return Ok(Range::new(given.rows, given.columns, cells));
    }
    // SAFETY: as above.
    let kinds = unsafe { arguments::slice(given.kinds, n, 2) }.map_err(about)?;
    let texts = match given.texts.is_null() {
        true => None,
        // SAFETY: as above.
        false => Some(unsafe { arguments::slice(given.texts, n, 2) }.map_err(about)?),
    };
    let cell = |i: usize| {
        Ok(match kinds[i] {
            HENCE_CELL_NUMBER => Cell::Number(numbers[i]),
            HENCE_CELL_TEXT => {
                let text = texts.map_or(std::ptr::null(), |texts| texts[i]);
                // SAFETY: NULL, or a NUL-ended text by the caller's contract.
                Cell::Text(Cow::Borrowed(unsafe { arguments::text(text, 2) }.map_err(about)?))
            }
            HENCE_CELL_BLANK => Cell::Blank,
            HENCE_CELL_LOGICAL => Cell::Logical(numbers[i] != 0.0),
            HENCE_CELL_ERROR => Cell::Error(CellError::of(numbers[i])),
            kind => {
                let message = format!("cell {i} has the kind {kind}, allowed are 0 to {HENCE_CELL_ERROR}");
                return Err(about(Failure::new(HENCE_ERR_RANGE, 2, message)));
            }
        })
    };
    for i in 0..n {
        cells.push(cell(i)?);
    }
    Ok(Range::new(given.rows, given.columns, cells))
}

/// Calls a worksheet function, as the add-ins do.
///
/// What is wrong with an argument becomes an error value in the cells concerned; a status other than HENCE_OK says that
/// the call itself was not sound. The function "WHY" calls another one, and says in words what is wrong.
///
/// In cells: HENCE.WHY.
///
/// Arguments: `function` (in, NUL-ended UTF-8, borrowed, not NULL): "FACTOR" or "HENCE.FACTOR", in any case;
/// `arguments` (in, `n` pointers, borrowed with all they point to; NULL only when `n` is 0): a NULL pointer among them
/// is an argument left out; `n` (in); `out` (out, not NULL): a new answer, caller owns (free with hence_answer_free);
/// `error` (out, may be NULL).
/// Returns HENCE_OK; HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_LENGTH, HENCE_ERR_UTF8; HENCE_ERR_SYNTAX where there
/// is no such function; HENCE_ERR_SHAPE for a range without cells, HENCE_ERR_RANGE for a struct_size that is too small or
/// a kind that is not known, each with the number of the argument, from 0, as index.
/// Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_worksheet_call(
    function: *const c_char,
    arguments: *const *const hence_range,
    n: usize,
    out: *mut *mut hence_answer,
    error: *mut hence_error,
) -> i32 {
    let body = || {
        // SAFETY: the caller's contract for `function`.
        let name = unsafe { arguments::text(function, 1) }?;
        let function = Function::find(name)
            .ok_or_else(|| Failure::new(HENCE_ERR_SYNTAX, 1, format!("there is no function {name}")))?;
        // SAFETY: the caller's contract for `arguments`.
        let pointers = unsafe { arguments::slice(arguments, n, 2) }?;
        arguments::output(out, 1, 4)?;
        // SAFETY: each is NULL or a range by the caller's contract.
        let given = pointers.iter().enumerate().map(|(i, range)| unsafe { read(*range, i) });
        let given = given.collect::<Result<Vec<_>, _>>()?;
        let answer = Box::into_raw(Box::new(hence_answer { range: call(function, &given) }));
        // SAFETY: `out` is not NULL and aligned (checked), and writable by the caller's contract.
        unsafe { out.write(answer) };
        Ok(())
    };
    // SAFETY: the caller's contract for `error`.
    unsafe { guard(error, body) }
}

/// Frees an answer. NULL is allowed. Threads: no other thread may be using it.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_answer_free(answer: *mut hence_answer) {
    if !answer.is_null() {
        // SAFETY: not NULL, made by hence_worksheet_call and not freed before, by the caller's contract.
        drop(unsafe { Box::from_raw(answer) });
    }
}

/// The numbers of rows and columns of an answer.
///
/// Arguments: `answer` (in, not NULL); `rows`, `columns` (out, not NULL, both at least 1); `error` (out, may be NULL).
/// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_OVERLAP. Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_answer_shape(
    answer: *const hence_answer,
    rows: *mut usize,
    columns: *mut usize,
    error: *mut hence_error,
) -> i32 {
    let body = || {
        // SAFETY: the caller's contract for `answer`.
        let range = &unsafe { borrow(answer) }?.range;
        arguments::output(rows, 1, 2)?;
        arguments::output(columns, 1, 3)?;
        arguments::apart(rows, 1, columns, 1, 3)?;
        // SAFETY: both are not NULL and aligned (checked), and writable by the caller's contract.
        unsafe {
            rows.write(range.rows());
            columns.write(range.columns());
        }
        Ok(())
    };
    // SAFETY: the caller's contract for `error`.
    unsafe { guard(error, body) }
}

/// The cells of an answer, row by row.
///
/// Arguments: `answer` (in, not NULL); `numbers` (out, `n` doubles): the number of a cell, the ERROR.TYPE number of an
/// error value, 0 for a text; `kinds` (out, `n` bytes): HENCE_CELL_NUMBER, HENCE_CELL_TEXT or HENCE_CELL_ERROR; `n` (in):
/// rows x columns; `error` (out, may be NULL).
/// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_OVERLAP; HENCE_ERR_CAPACITY with the number of cells
/// as index where `n` is another. Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_answer_cells(
    answer: *const hence_answer,
    numbers: *mut f64,
    kinds: *mut u8,
    n: usize,
    error: *mut hence_error,
) -> i32 {
    let body = || {
        // SAFETY: the caller's contract for `answer`.
        let cells = unsafe { borrow(answer) }?.range.cells();
        if n != cells.len() {
            let mut failure =
                Failure::new(HENCE_ERR_CAPACITY, 4, format!("n is {n}, the cells are {}", cells.len()));
            failure.index = cells.len() as i64;
            return Err(failure);
        }
        arguments::output(numbers, n, 2)?;
        arguments::output(kinds, n, 3)?;
        arguments::apart(numbers, n, kinds, n, 3)?;
        for (i, cell) in cells.iter().enumerate() {
            let (number, kind) = match cell {
                Cell::Number(number) => (*number, HENCE_CELL_NUMBER),
                Cell::Text(_) => (0.0, HENCE_CELL_TEXT),
                Cell::Blank => (0.0, HENCE_CELL_BLANK),
                Cell::Logical(value) => (f64::from(u8::from(*value)), HENCE_CELL_LOGICAL),
                Cell::Error(error) => (f64::from(*error as u8), HENCE_CELL_ERROR),
            };
            // SAFETY: both are not NULL and aligned (checked), and hold `n` elements by the caller's contract.
            unsafe {
                numbers.add(i).write(number);
                kinds.add(i).write(kind);
            }
        }
        Ok(())
    };
    // SAFETY: the caller's contract for `error`.
    unsafe { guard(error, body) }
}

/// The text of a cell of an answer; empty where it holds no text.
///
/// Arguments: `answer` (in, not NULL); `cell` (in): its place, row by row from 0; `buffer` (out): `capacity` bytes of the
/// caller's, gets NUL-ended UTF-8; `capacity` (in); `error` (out, may be NULL). A buffer that is too small is
/// HENCE_ERR_CAPACITY, with the bytes needed as index, and stays untouched.
/// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_CAPACITY; HENCE_ERR_LENGTH where there is no such
/// cell. Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_answer_text(
    answer: *const hence_answer,
    cell: usize,
    buffer: *mut c_char,
    capacity: usize,
    error: *mut hence_error,
) -> i32 {
    let body = || -> Guarded {
        // SAFETY: the caller's contract for `answer`.
        let cells = unsafe { borrow(answer) }?.range.cells();
        let Some(held) = cells.get(cell) else {
            let message = format!("cell {cell} of {} cells", cells.len());
            return Err(Failure::new(HENCE_ERR_LENGTH, 2, message));
        };
        let text = if let Cell::Text(text) = held { text.as_ref() } else { "" };
        // SAFETY: the caller's contract for `buffer`.
        unsafe { arguments::write_text(text, buffer, capacity, 3) }
    };
    // SAFETY: the caller's contract for `error`.
    unsafe { guard(error, body) }
}

/// # Safety
/// As [`arguments::handle`].
unsafe fn borrow<'a>(answer: *const hence_answer) -> Result<&'a hence_answer, Failure> {
    // SAFETY: the caller's contract, passed on.
    unsafe { arguments::handle(answer, "answer") }
}
