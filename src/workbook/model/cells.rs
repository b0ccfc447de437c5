//! Where the cells of a sheet part are, and what their formula elements say.

use quick_xml::events::{BytesStart, Event};

use crate::problem::{Place, Problem, Result};
use crate::references::{Cell, MAX_COLUMNS, MAX_ROWS, Range};
use crate::xml::{attribute, bad_xml};

/// Follows rows and cells, which may leave their address out and then come after the one before.
#[derive(Debug, Default)]
pub(crate) struct CellCursor {
    /// Row and column that come next.
    row: u32,
    col: u32,
    /// The row that is open.
    current: u32,
}

impl CellCursor {
    /// A `<row>` begins: its number from 0.
    pub(crate) fn row(&mut self, part: &str, tag: &BytesStart<'_>) -> Result<u32> {
        let row = match attribute(part, tag, "r")? {
            None => self.row,
            Some(text) => match text.trim().parse::<u32>() {
                Ok(row) if row >= 1 => row - 1,
                _ => return Err(outside(part, &format!("row {text}"))),
            },
        };
        if row >= MAX_ROWS {
            return Err(outside(part, &format!("row {}", u64::from(row) + 1)));
        }
        (self.current, self.row, self.col) = (row, row + 1, 0);
        Ok(row)
    }

    /// A `<c>` begins: its address.
    pub(crate) fn cell(&mut self, part: &str, tag: &BytesStart<'_>) -> Result<Cell> {
        let cell = match attribute(part, tag, "r")? {
            None => Cell { row: self.current, col: self.col },
            Some(text) => text.parse().map_err(|_| outside(part, &format!("cell {text}")))?,
        };
        if cell.col >= MAX_COLUMNS {
            return Err(outside(part, &format!("a cell beyond the last column in row {}", cell.row + 1)));
        }
        self.col = cell.col + 1;
        Ok(cell)
    }
}

fn outside(part: &str, what: &str) -> crate::problem::WorkbookError {
    let what: String = what.chars().take(60).collect();
    Problem::error(
        "cell-address",
        Place::default(),
        format!("{part} holds {what}; a sheet's cells are A1 to XFD1048576"),
    )
    .hint("open the file in a spreadsheet program and save it again")
    .into()
}

/// What kind of formula an `<f>` holds.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum FormulaKind {
    /// One of its own.
    Normal,
    /// One of a group, by its number; the master holds the text.
    Shared(u32),
    /// An array formula over a range.
    Array,
    /// A what-if table over a range, with its one or two input cells.
    DataTable(Option<Cell>, Option<Cell>),
}

/// The attributes of an `<f>`.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) struct FormulaTag {
    /// Its kind.
    pub(crate) kind: FormulaKind,
    /// The cells it covers, where stated.
    pub(crate) range: Option<Range>,
}

impl FormulaTag {
    /// Reads them.
    pub(crate) fn read(part: &str, tag: &BytesStart<'_>) -> Result<FormulaTag> {
        let kind = match attribute(part, tag, "t")?.as_deref() {
            None | Some("normal") => return Ok(FormulaTag { kind: FormulaKind::Normal, range: None }),
            Some("shared") => match attribute(part, tag, "si")?.and_then(|si| si.trim().parse().ok()) {
                Some(index) => FormulaKind::Shared(index),
                // Without its number it belongs to no group.
                None => FormulaKind::Normal,
            },
            Some("array") => FormulaKind::Array,
            Some("dataTable") => {
                let input = |name| -> Result<Option<Cell>> {
                    Ok(attribute(part, tag, name)?.and_then(|text| text.parse().ok()))
                };
                FormulaKind::DataTable(input("r1")?, input("r2")?)
            }
            Some(other) => {
                return Err(bad_xml(part, 0, &format!("a formula of unknown type {other:?}")).into());
            }
        };
        let range = match attribute(part, tag, "ref")? {
            Some(text) => {
                Some(Range::parse_any(&text).map_err(|_| outside(part, &format!("formula range {text}")))?)
            }
            None => None,
        };
        Ok(FormulaTag { kind, range })
    }
}

/// Adds the text of an event to a text under way: plain text, CDATA and character references alike.
pub(crate) fn text_of(part: &str, event: &Event<'_>, text: &mut String) -> Result<()> {
    let bad = |why: String| bad_xml(part, 0, &why);
    match event {
        Event::Text(piece) => text.push_str(&piece.decode().map_err(|e| bad(e.to_string()))?),
        Event::CData(piece) => text.push_str(&piece.decode().map_err(|e| bad(e.to_string()))?),
        Event::GeneralRef(piece) => {
            let named = match &**piece {
                b"lt" => Some('<'),
                b"gt" => Some('>'),
                b"amp" => Some('&'),
                b"apos" => Some('\''),
                b"quot" => Some('"'),
                _ => piece.resolve_char_ref().map_err(|e| bad(e.to_string()))?,
            };
            text.push(named.ok_or_else(|| bad("an unknown entity".to_owned()))?);
        }
        _ => {}
    }
    Ok(())
}
