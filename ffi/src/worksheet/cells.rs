//! The values that hosts hand over and take back: cells in ranges.

use std::borrow::Cow;

/// An error value of a cell, numbered as the spreadsheet function ERROR.TYPE does.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
#[repr(u8)]
pub enum CellError {
    /// `#NULL!`
    Null = 1,
    /// `#DIV/0!`
    Division = 2,
    /// `#VALUE!`: a wrong type, shape or text.
    Value = 3,
    /// `#REF!`
    Reference = 4,
    /// `#NAME?`
    Name = 5,
    /// `#NUM!`: out of range, or not finite.
    Number = 6,
    /// `#N/A`: an offset where the curve is not defined.
    NotAvailable = 7,
}

impl CellError {
    /// The error with a number of ERROR.TYPE; `#VALUE!` for a number that it does not have.
    pub fn of(number: f64) -> Self {
        match number as i64 {
            1 => CellError::Null,
            2 => CellError::Division,
            4 => CellError::Reference,
            5 => CellError::Name,
            6 => CellError::Number,
            7 => CellError::NotAvailable,
            _ => CellError::Value,
        }
    }

    /// As a cell shows it.
    pub fn text(self) -> &'static str {
        match self {
            CellError::Null => "#NULL!",
            CellError::Division => "#DIV/0!",
            CellError::Value => "#VALUE!",
            CellError::Reference => "#REF!",
            CellError::Name => "#NAME?",
            CellError::Number => "#NUM!",
            CellError::NotAvailable => "#N/A",
        }
    }
}

/// What one cell holds.
#[derive(Clone, Debug, PartialEq)]
pub enum Cell<'a> {
    /// A number; a date is its serial number.
    Number(f64),
    /// A text.
    Text(Cow<'a, str>),
    /// Nothing. Hosts that hand a blank cell over as an empty text are read alike.
    Blank,
    /// TRUE or FALSE.
    Logical(bool),
    /// An error value.
    Error(CellError),
}

/// A range, or a single value as a range of one cell. Row by row.
#[derive(Clone, Debug, PartialEq)]
pub struct Range<'a> {
    rows: usize,
    columns: usize,
    cells: Vec<Cell<'a>>,
}

impl<'a> Range<'a> {
    /// A range of `rows` times `columns` cells, row by row; none where the number of cells is another, or 0.
    pub fn new(rows: usize, columns: usize, cells: Vec<Cell<'a>>) -> Option<Self> {
        let fits = !cells.is_empty() && rows.checked_mul(columns) == Some(cells.len());
        fits.then_some(Range { rows, columns, cells })
    }

    /// One cell.
    pub fn single(cell: Cell<'a>) -> Self {
        Range { rows: 1, columns: 1, cells: vec![cell] }
    }

    /// The number of rows, at least 1.
    pub fn rows(&self) -> usize {
        self.rows
    }

    /// The number of columns, at least 1.
    pub fn columns(&self) -> usize {
        self.columns
    }

    /// The cells, row by row.
    pub fn cells(&self) -> &[Cell<'a>] {
        &self.cells
    }
}
