//! Cells, ranges and sheet names in A1 notation, and the tokens of formulas.

mod a1;
mod area;
mod shift;
mod target;
mod token;

use std::fmt;

pub use a1::{ReferenceError, quote_sheet};
pub use area::{Apart, Area};
pub use shift::shift;
pub use target::{Constant, NameTarget, parse_target};
pub use token::{Corner, Extent, Reference, Sheets, Spanned, TableRef, Token, Tokens, tokens};

/// The number of rows of a sheet.
pub const MAX_ROWS: u32 = 1_048_576;
/// The number of columns of a sheet.
pub const MAX_COLUMNS: u32 = 16_384;

/// A cell by row and column, both counted from 0.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash, serde::Serialize, serde::Deserialize)]
pub struct Cell {
    /// Row, from 0.
    pub row: u32,
    /// Column, from 0.
    pub col: u32,
}

/// A rectangle of cells, both corners included.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash, serde::Serialize, serde::Deserialize)]
pub struct Range {
    /// Upper left.
    pub first: Cell,
    /// Lower right.
    pub last: Cell,
}

/// A rectangle on a sheet, by the sheet's visible name.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct SheetRange {
    /// The sheet's name.
    pub sheet: String,
    /// The cells.
    pub range: Range,
}

impl Cell {
    /// The cell at a row and a column, both counted from 0.
    pub const fn new(row: u32, col: u32) -> Self {
        Cell { row, col }
    }
}

impl Range {
    /// The rectangle between two opposite corners, in whichever order they come.
    pub fn new(a: Cell, b: Cell) -> Self {
        Range {
            first: Cell::new(a.row.min(b.row), a.col.min(b.col)),
            last: Cell::new(a.row.max(b.row), a.col.max(b.col)),
        }
    }

    /// One cell.
    pub const fn cell(cell: Cell) -> Self {
        Range { first: cell, last: cell }
    }

    /// Number of rows.
    pub const fn rows(&self) -> u32 {
        self.last.row - self.first.row + 1
    }

    /// Number of columns.
    pub const fn cols(&self) -> u32 {
        self.last.col - self.first.col + 1
    }

    /// Number of cells; at least 1.
    #[expect(clippy::len_without_is_empty, reason = "a range holds at least one cell")]
    pub const fn len(&self) -> u64 {
        self.rows() as u64 * self.cols() as u64
    }

    /// Whether it is one cell.
    pub fn is_single(&self) -> bool {
        self.first == self.last
    }

    /// Whether the cell lies inside.
    pub const fn contains(&self, cell: Cell) -> bool {
        self.first.row <= cell.row
            && cell.row <= self.last.row
            && self.first.col <= cell.col
            && cell.col <= self.last.col
    }

    /// Whether the two share a cell.
    pub const fn intersects(&self, other: &Range) -> bool {
        self.first.row <= other.last.row
            && other.first.row <= self.last.row
            && self.first.col <= other.last.col
            && other.first.col <= self.last.col
    }

    /// The smallest rectangle that holds both.
    #[must_use]
    pub fn hull(&self, other: &Range) -> Range {
        Range {
            first: Cell::new(self.first.row.min(other.first.row), self.first.col.min(other.first.col)),
            last: Cell::new(self.last.row.max(other.last.row), self.last.col.max(other.last.col)),
        }
    }

    /// Its cells, row by row.
    pub fn cells(&self) -> impl Iterator<Item = Cell> + use<> {
        let Range { first, last } = *self;
        (first.row..=last.row).flat_map(move |row| (first.col..=last.col).map(move |col| Cell { row, col }))
    }
}

impl SheetRange {
    /// A rectangle on the sheet of that name.
    pub fn new(sheet: &str, range: Range) -> Self {
        SheetRange { sheet: sheet.to_owned(), range }
    }
}

/// A column's letters: 0 is A, 16,383 is XFD.
pub(crate) fn column_letters(col: u32) -> String {
    let mut letters = Vec::new();
    let mut n = col + 1;
    while n > 0 {
        letters.push(char::from(b'A' + ((n - 1) % 26) as u8));
        n = (n - 1) / 26;
    }
    letters.iter().rev().collect()
}

impl fmt::Display for Cell {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}{}", column_letters(self.col), self.row + 1)
    }
}

impl fmt::Display for Range {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        if self.first == self.last {
            write!(f, "{}", self.first)
        } else {
            write!(f, "{}:{}", self.first, self.last)
        }
    }
}

impl fmt::Display for SheetRange {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}!{}", quote_sheet(&self.sheet), self.range)
    }
}
