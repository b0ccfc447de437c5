//! The host's arguments become ranges of cells.

use std::borrow::Cow;

use hence::worksheet::{Cell, CellError, Range};

use crate::xloper::{Array, COLUMNS_MAX, ROWS_MAX, TEXT_MAX, Xloper12, error, kind};

/// One argument; none where it was left out.
///
/// # Safety
/// `pointer` is NULL or a value of the host's that stays as it is during the call.
pub(crate) unsafe fn argument<'a>(pointer: *const Xloper12) -> Option<Range<'a>> {
    // SAFETY: NULL gives none; else readable by the caller's contract.
    let Some(value) = (unsafe { pointer.as_ref() }) else {
        return Some(refused());
    };
    match value.base_kind() {
        kind::MISSING => None,
        // SAFETY: the kind says that the content is an array.
        kind::ARRAY => Some(unsafe { range(value.value.array) }),
        // SAFETY: the caller's contract, passed on.
        _ => Some(Range::single(unsafe { cell(value) })),
    }
}

fn refused<'a>() -> Range<'a> {
    Range::single(Cell::Error(CellError::Value))
}

/// # Safety
/// The cells of `array` stay as they are during the call.
unsafe fn range<'a>(array: Array) -> Range<'a> {
    let (Ok(rows), Ok(columns)) = (usize::try_from(array.rows), usize::try_from(array.columns)) else {
        return refused();
    };
    if array.cells.is_null() || rows > ROWS_MAX || columns > COLUMNS_MAX {
        return refused();
    }
    // SAFETY: not NULL, and as many cells by the host's contract for an array.
    let cells = unsafe { std::slice::from_raw_parts(array.cells, rows * columns) };
    // SAFETY: the caller's contract, passed on.
    let cells = cells.iter().map(|value| unsafe { cell(value) }).collect();
    Range::new(rows, columns, cells).unwrap_or_else(refused)
}

/// One cell. References, which the registration does not ask for, and kinds that a cell cannot hold are `#VALUE!`.
///
/// # Safety
/// A text of `value` stays as it is during the call.
unsafe fn cell<'a>(value: &Xloper12) -> Cell<'a> {
    let content = value.value;
    match value.base_kind() {
        // SAFETY: the kind says which field holds.
        kind::NUMBER => Cell::Number(unsafe { content.number }),
        // SAFETY: as above.
        kind::INTEGER => Cell::Number(f64::from(unsafe { content.integer })),
        // SAFETY: as above.
        kind::LOGICAL => Cell::Logical(unsafe { content.logical } != 0),
        // SAFETY: as above.
        kind::ERROR => Cell::Error(error_of(unsafe { content.error })),
        // SAFETY: as above, and the caller's contract for the text.
        kind::TEXT => unsafe { text(content.text) },
        kind::BLANK | kind::MISSING => Cell::Blank,
        _ => Cell::Error(CellError::Value),
    }
}

/// A counted text. An unpaired surrogate becomes the replacement character, so that a message can quote the text.
///
/// # Safety
/// `text` is NULL or a counted text that stays as it is during the call.
unsafe fn text<'a>(text: *const u16) -> Cell<'a> {
    if text.is_null() {
        return Cell::Error(CellError::Value);
    }
    // SAFETY: not NULL, and the count comes first by the host's contract for a text.
    let count = usize::from(unsafe { text.read() });
    if count > TEXT_MAX {
        return Cell::Error(CellError::Value);
    }
    // SAFETY: as many units follow the count.
    let units = unsafe { std::slice::from_raw_parts(text.add(1), count) };
    Cell::Text(Cow::Owned(String::from_utf16_lossy(units)))
}

fn error_of(number: i32) -> CellError {
    match number {
        error::NULL => CellError::Null,
        error::DIVISION => CellError::Division,
        error::REFERENCE => CellError::Reference,
        error::NAME => CellError::Name,
        error::NUMBER => CellError::Number,
        error::NOT_AVAILABLE | error::GETTING_DATA => CellError::NotAvailable,
        _ => CellError::Value,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn read(value: Xloper12) -> Option<Range<'static>> {
        // SAFETY: the tests hand over values whose contents live until their end.
        unsafe { argument(&value) }
    }

    fn one(value: Xloper12) -> Cell<'static> {
        let range = read(value).expect("an argument that was given");
        assert_eq!((range.rows(), range.columns()), (1, 1));
        range.cells()[0].clone()
    }

    fn counted(units: &[u16]) -> Vec<u16> {
        std::iter::once(units.len() as u16).chain(units.iter().copied()).collect()
    }

    #[test]
    fn single_values_are_one_cell() {
        assert_eq!(one(Xloper12::number(-0.5)), Cell::Number(-0.5));
        assert_eq!(one(Xloper12::integer(-7)), Cell::Number(-7.0));
        assert_eq!(one(Xloper12::logical(true)), Cell::Logical(true));
        assert_eq!(one(Xloper12 { kind: kind::BLANK, ..Xloper12::missing() }), Cell::Blank);
        let text = counted(&"3.5 % – é 𝄞".encode_utf16().collect::<Vec<_>>());
        assert_eq!(one(Xloper12::text(text.as_ptr())), Cell::Text("3.5 % – é 𝄞".into()));
    }

    #[test]
    fn a_text_ends_where_its_count_says() {
        let text = [2, u16::from(b'u'), u16::from(b'k'), u16::from(b'!')];
        assert_eq!(one(Xloper12::text(text.as_ptr())), Cell::Text("uk".into()));
        let empty = [0];
        assert_eq!(one(Xloper12::text(empty.as_ptr())), Cell::Text("".into()));
    }

    #[test]
    fn texts_at_and_above_the_limit() {
        let longest = counted(&vec![u16::from(b'a'); TEXT_MAX]);
        assert_eq!(one(Xloper12::text(longest.as_ptr())), Cell::Text("a".repeat(TEXT_MAX).into()));
        let longer = counted(&vec![u16::from(b'a'); TEXT_MAX + 1]);
        assert_eq!(one(Xloper12::text(longer.as_ptr())), Cell::Error(CellError::Value));
        assert_eq!(one(Xloper12::text(std::ptr::null())), Cell::Error(CellError::Value));
    }

    #[test]
    fn an_unpaired_surrogate_is_replaced() {
        let text = counted(&[0xd834, u16::from(b'%')]);
        assert_eq!(one(Xloper12::text(text.as_ptr())), Cell::Text("\u{fffd}%".into()));
    }

    #[test]
    fn every_error_value_has_its_number() {
        let pairs = [
            (0, CellError::Null),
            (7, CellError::Division),
            (15, CellError::Value),
            (23, CellError::Reference),
            (29, CellError::Name),
            (36, CellError::Number),
            (42, CellError::NotAvailable),
            (43, CellError::NotAvailable),
            (99, CellError::Value),
        ];
        for (number, expected) in pairs {
            assert_eq!(one(Xloper12::error(number)), Cell::Error(expected), "{number}");
        }
    }

    #[test]
    fn an_array_keeps_its_shape() {
        let cells: Vec<Xloper12> = (0..6).map(|i| Xloper12::number(f64::from(i))).collect();
        let range =
            read(Xloper12::array(Array { cells: cells.as_ptr(), rows: 2, columns: 3 })).expect("given");
        assert_eq!((range.rows(), range.columns()), (2, 3));
        assert_eq!(range.cells()[4], Cell::Number(4.0));
    }

    #[test]
    fn what_cannot_be_is_a_value_error() {
        let cell = Xloper12::number(1.0);
        let array = |rows, columns| Xloper12::array(Array { cells: &cell, rows, columns });
        for odd in [array(0, 1), array(1, 0), array(-1, 1), array(1, -1), array(ROWS_MAX as i32 + 1, 1)] {
            assert_eq!(one(odd), Cell::Error(CellError::Value));
        }
        let nowhere = Array { cells: std::ptr::null(), rows: 1, columns: 1 };
        assert_eq!(one(Xloper12::array(nowhere)), Cell::Error(CellError::Value));
        // References to one area and to several, a flow of control, a block of bytes, an array within an array.
        for kind in [0x400, 0x8, 0x20, 0x802] {
            assert_eq!(
                one(Xloper12 { kind, ..Xloper12::missing() }),
                Cell::Error(CellError::Value),
                "{kind:#x}"
            );
        }
        let inner = array(1, 1);
        let outer = Xloper12::array(Array { cells: &inner, rows: 1, columns: 1 });
        assert_eq!(one(outer), Cell::Error(CellError::Value));
        // SAFETY: NULL is allowed.
        let null = unsafe { argument(std::ptr::null()) }.expect("not taken for an argument left out");
        assert_eq!(null.cells(), [Cell::Error(CellError::Value)]);
    }

    #[test]
    fn an_argument_left_out_is_none() {
        assert!(read(Xloper12::missing()).is_none());
    }
}
