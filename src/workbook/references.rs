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

/// A sheet's name as formulas write it: quoted where it needs to be.
pub fn quote_sheet(name: &str) -> String {
    let plain = name
        .chars()
        .enumerate()
        .all(|(i, c)| c == '_' || c.is_ascii_alphabetic() || (i > 0 && c.is_ascii_digit()));
    if plain { name.to_owned() } else { format!("'{}'", name.replace('\'', "''")) }
}

impl fmt::Display for Cell {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let mut letters = Vec::new();
        let mut n = self.col + 1;
        while n > 0 {
            letters.push(b'A' + ((n - 1) % 26) as u8);
            n = (n - 1) / 26;
        }
        letters.reverse();
        write!(f, "{}{}", String::from_utf8_lossy(&letters), self.row + 1)
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
