//! Answers become values that the host reads, copies and hands back to be freed.

use std::sync::atomic::{AtomicI64, Ordering};

use hence::worksheet::{Cell, CellError, Range};

use crate::xloper::{Array, COLUMNS_MAX, ROWS_MAX, TEXT_MAX, Xloper12, error, kind};

/// How many answers the host holds.
static LIVE: AtomicI64 = AtomicI64::new(0);

/// A value with all that it points to. The value stands first, so that its address is the address of the whole.
#[repr(C)]
pub(crate) struct Answer {
    value: Xloper12,
    cells: Vec<Xloper12>,
    texts: Vec<u16>,
}

impl Answer {
    /// The range as a value. A number that is not finite is `#NUM!`; a text longer than a cell holds is `#VALUE!`, and
    /// so is a range larger than a sheet: nothing is cut.
    pub(crate) fn new(range: &Range<'_>) -> Self {
        let (rows, columns) = (range.rows(), range.columns());
        if rows > ROWS_MAX || columns > COLUMNS_MAX {
            return Answer::error(error::VALUE);
        }
        let mut texts = Vec::new();
        let mut starts = Vec::new();
        let mut cells: Vec<Xloper12> = Vec::with_capacity(range.cells().len());
        for cell in range.cells() {
            cells.push(match cell {
                Cell::Number(number) if number.is_finite() => Xloper12::number(*number),
                Cell::Number(_) => Xloper12::error(error::NUMBER),
                Cell::Logical(logical) => Xloper12::logical(*logical),
                Cell::Error(error) => Xloper12::error(number_of(*error)),
                // The host would show 0 for a blank cell.
                Cell::Blank => placed("", cells.len(), &mut texts, &mut starts),
                Cell::Text(text) => placed(text, cells.len(), &mut texts, &mut starts),
            });
        }
        // Only now do the texts stand where they stay.
        for (cell, start) in starts {
            cells[cell].value.text = texts[start..].as_ptr();
        }
        let value = match cells[..] {
            [single] => single,
            _ => Xloper12::array(Array { cells: cells.as_ptr(), rows: rows as i32, columns: columns as i32 }),
        };
        Answer { value, cells, texts }
    }

    /// A single error value.
    pub(crate) fn error(number: i32) -> Self {
        Answer { value: Xloper12::error(number), cells: Vec::new(), texts: Vec::new() }
    }

    /// The value alone, for as long as the answer lives.
    pub(crate) fn value(&self) -> &Xloper12 {
        &self.value
    }

    /// Hands the answer to the host, which gives it back through [`free`].
    pub(crate) fn hand_over(mut self) -> *mut Xloper12 {
        self.value.kind |= kind::ADDIN_FREES;
        LIVE.fetch_add(1, Ordering::Relaxed);
        Box::into_raw(Box::new(self)).cast()
    }
}

/// Puts a text behind the others, and notes for which cell and where.
fn placed(text: &str, cell: usize, texts: &mut Vec<u16>, starts: &mut Vec<(usize, usize)>) -> Xloper12 {
    let count = text.encode_utf16().count();
    if count > TEXT_MAX {
        return Xloper12::error(error::VALUE);
    }
    starts.push((cell, texts.len()));
    texts.push(count as u16);
    texts.extend(text.encode_utf16());
    Xloper12::text(std::ptr::null())
}

fn number_of(error: CellError) -> i32 {
    match error {
        CellError::Null => error::NULL,
        CellError::Division => error::DIVISION,
        CellError::Value => error::VALUE,
        CellError::Reference => error::REFERENCE,
        CellError::Name => error::NAME,
        CellError::Number => error::NUMBER,
        CellError::NotAvailable => error::NOT_AVAILABLE,
    }
}

/// Frees an answer. NULL, and a value that the add-in does not free, are left alone.
///
/// # Safety
/// `pointer` is NULL, or comes from [`Answer::hand_over`] and was not freed before, or is a value that lacks the bit
/// [`kind::ADDIN_FREES`].
pub(crate) unsafe fn free(pointer: *mut Xloper12) {
    // SAFETY: NULL gives none; else readable by the caller's contract.
    match unsafe { pointer.as_ref() } {
        Some(value) if value.kind & kind::ADDIN_FREES != 0 => {}
        _ => return,
    }
    // SAFETY: with the bit set it comes from `hand_over`, and the value stands first in the answer.
    drop(unsafe { Box::from_raw(pointer.cast::<Answer>()) });
    LIVE.fetch_sub(1, Ordering::Relaxed);
}

/// How many answers the host has not handed back.
pub(crate) fn live() -> i64 {
    LIVE.load(Ordering::Relaxed)
}

/// Held by each test that hands answers over, so that one at a time counts them.
#[cfg(test)]
pub(crate) static COUNTING: std::sync::Mutex<()> = std::sync::Mutex::new(());

#[cfg(test)]
mod tests {
    use super::*;

    fn text_of(value: &Xloper12) -> String {
        assert_eq!(value.base_kind(), kind::TEXT);
        // SAFETY: a text of an answer that lives during the test.
        let units = unsafe {
            let text = value.value.text;
            std::slice::from_raw_parts(text.add(1), usize::from(text.read()))
        };
        String::from_utf16(units).expect("UTF-16")
    }

    fn single(cell: Cell<'_>) -> Answer {
        Answer::new(&Range::single(cell))
    }

    fn error_in(value: &Xloper12) -> i32 {
        assert_eq!(value.base_kind(), kind::ERROR);
        // SAFETY: the kind says so.
        unsafe { value.value.error }
    }

    #[test]
    fn single_values() {
        let number = single(Cell::Number(0.1));
        assert_eq!(number.value.kind, kind::NUMBER);
        // SAFETY: the kind says so.
        assert_eq!(unsafe { number.value.value.number }.to_bits(), 0.1f64.to_bits());
        let logical = single(Cell::Logical(true));
        // SAFETY: the kind is checked first.
        assert!(logical.value.kind == kind::LOGICAL && unsafe { logical.value.value.logical } == 1);
        assert_eq!(text_of(&single(Cell::Text("5 % – 𝄞".into())).value), "5 % – 𝄞");
        assert_eq!(text_of(&single(Cell::Blank).value), "");
    }

    #[test]
    fn what_is_not_finite_is_a_number_error() {
        for number in [f64::NAN, f64::INFINITY, f64::NEG_INFINITY] {
            assert_eq!(error_in(&single(Cell::Number(number)).value), 36);
        }
    }

    #[test]
    fn every_error_value_has_its_number() {
        let pairs = [
            (CellError::Null, 0),
            (CellError::Division, 7),
            (CellError::Value, 15),
            (CellError::Reference, 23),
            (CellError::Name, 29),
            (CellError::Number, 36),
            (CellError::NotAvailable, 42),
        ];
        for (error, number) in pairs {
            assert_eq!(error_in(&single(Cell::Error(error)).value), number);
        }
    }

    #[test]
    fn texts_at_and_above_the_limit() {
        let longest = "a".repeat(TEXT_MAX);
        assert_eq!(text_of(&single(Cell::Text(longest.as_str().into())).value), longest);
        assert_eq!(error_in(&single(Cell::Text("a".repeat(TEXT_MAX + 1).into())).value), 15);
        // Counted in UTF-16 units, not in bytes or characters: each of these is two.
        assert_eq!(error_in(&single(Cell::Text("𝄞".repeat(16_384).into())).value), 15);
    }

    #[test]
    fn an_array_keeps_its_shape_and_texts() {
        let cells = vec![
            Cell::Text("a".into()),
            Cell::Number(2.0),
            Cell::Text("bc".into()),
            Cell::Blank,
            Cell::Error(CellError::NotAvailable),
            Cell::Text("def".into()),
        ];
        let answer = Answer::new(&Range::new(3, 2, cells).expect("six cells"));
        assert_eq!(answer.value.kind, kind::ARRAY);
        // SAFETY: the kind says so.
        let array = unsafe { answer.value.value.array };
        assert_eq!((array.rows, array.columns), (3, 2));
        assert_eq!(array.cells, answer.cells.as_ptr());
        assert_eq!(text_of(&answer.cells[0]), "a");
        assert_eq!(text_of(&answer.cells[2]), "bc");
        assert_eq!(text_of(&answer.cells[3]), "");
        assert_eq!(error_in(&answer.cells[4]), 42);
        assert_eq!(text_of(&answer.cells[5]), "def");
    }

    #[test]
    fn ranges_larger_than_a_sheet_are_refused() {
        let column = |rows: usize| Range::new(rows, 1, vec![Cell::Number(1.0); rows]).expect("a column");
        assert_eq!(Answer::new(&column(ROWS_MAX)).value.base_kind(), kind::ARRAY);
        assert_eq!(error_in(&Answer::new(&column(ROWS_MAX + 1)).value), 15);
        let row = |columns: usize| Range::new(1, columns, vec![Cell::Number(1.0); columns]).expect("a row");
        assert_eq!(Answer::new(&row(COLUMNS_MAX)).value.base_kind(), kind::ARRAY);
        assert_eq!(error_in(&Answer::new(&row(COLUMNS_MAX + 1)).value), 15);
    }

    #[test]
    fn answers_are_counted_until_they_are_freed() {
        let _one = COUNTING.lock().expect("no test panicked");
        let before = live();
        let over = single(Cell::Text("held".into())).hand_over();
        assert_eq!(live(), before + 1);
        // SAFETY: just handed over; the static value and NULL are not freed.
        unsafe {
            assert_eq!((*over).kind, kind::TEXT | kind::ADDIN_FREES);
            free(std::ptr::null_mut());
            free((&raw const *single(Cell::Number(1.0)).value()).cast_mut());
            assert_eq!(live(), before + 1);
            free(over);
        }
        assert_eq!(live(), before);
    }
}
