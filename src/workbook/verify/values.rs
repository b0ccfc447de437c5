//! Written cells read back by calamine.

use std::collections::BTreeMap;
use std::io::{Read, Seek};

use calamine::{DataRef, Xlsx};

use super::{differs, sheet_place};
use crate::patch::{Cached, CellWrite, Settled};
use crate::problem::{Place, Result};
use crate::references::{Cell, Range};

enum Wanted<'a> {
    Number(f64),
    Text(&'a str),
    Logical(bool),
    Error,
    Nothing,
}

/// Every written cell of a sheet holds the value it was given.
pub(super) fn check<R: Read + Seek>(
    book: &mut Xlsx<R>,
    sheet: &str,
    writes: &BTreeMap<Cell, CellWrite>,
) -> Result<()> {
    let unreadable = |error: calamine::XlsxError| {
        differs(sheet_place(sheet), format!("a second reader cannot read the sheet: {error}"))
    };
    let mut open: BTreeMap<Cell, Wanted> = writes.iter().map(|(at, write)| (*at, wanted(write))).collect();
    let last = writes.keys().map(|at| at.row).max();
    let mut cells = book.worksheet_cells_reader(sheet).map_err(unreadable)?;
    while let Some(cell) = cells.next_cell().map_err(unreadable)? {
        let (row, col) = cell.get_position();
        // Rows come in order, so that nothing written follows.
        if last.is_none_or(|last| row > last) {
            break;
        }
        let Some(wanted) = open.remove(&Cell { row, col }) else { continue };
        let value = cell.get_value();
        let holds = match wanted {
            Wanted::Number(number) => match value {
                DataRef::Float(found) => *found == number,
                DataRef::DateTime(found) => found.as_f64() == number,
                _ => false,
            },
            Wanted::Text(text) => match value {
                DataRef::String(found) => found == text,
                DataRef::SharedString(found) => *found == text,
                DataRef::Empty => text.is_empty(),
                _ => false,
            },
            Wanted::Logical(truth) => matches!(value, DataRef::Bool(found) if *found == truth),
            Wanted::Error => matches!(value, DataRef::Error(_)),
            Wanted::Nothing => matches!(value, DataRef::Empty),
        };
        if !holds {
            let place = Place::cells(sheet, Range::cell(Cell { row, col }));
            return Err(differs(place, format!("a second reader finds {value:?} in the written cell")));
        }
    }
    // A blank cell need not be reported.
    open.retain(|_, wanted| !matches!(wanted, Wanted::Nothing | Wanted::Text("")));
    match open.keys().next() {
        Some(at) => {
            let place = Place::cells(sheet, Range::cell(*at));
            Err(differs(place, "a second reader does not find the written cell"))
        }
        None => Ok(()),
    }
}

fn wanted(write: &CellWrite) -> Wanted<'_> {
    match write {
        CellWrite::Number(number) | CellWrite::Formula(_, Cached::Number(number)) => Wanted::Number(*number),
        CellWrite::Text(text) | CellWrite::Formula(_, Cached::Text(text)) => Wanted::Text(text),
        CellWrite::Formula(_, Cached::None) | CellWrite::DropValue => Wanted::Nothing,
        CellWrite::Result(Settled::Number(number)) => Wanted::Number(*number),
        CellWrite::Result(Settled::Text(text)) => Wanted::Text(text),
        CellWrite::Result(Settled::Logical(truth)) => Wanted::Logical(*truth),
        CellWrite::Result(Settled::Error(_)) => Wanted::Error,
    }
}
