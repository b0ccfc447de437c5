//! Cells, ranges and sheet names in A1 notation, and the tokens of formulas.

use std::fmt;

/// The number of rows of a sheet.
pub const MAX_ROWS: u32 = 1_048_576;
/// The number of columns of a sheet.
pub const MAX_COLUMNS: u32 = 16_384;

/// A cell by row and column, both counted from 0.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Cell {
    /// Row, from 0.
    pub row: u32,
    /// Column, from 0.
    pub col: u32,
}

/// A rectangle of cells, both corners included.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
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
