//! Reading of cells: values through a streaming reader, formulas from the stored sheet, only what is needed.

mod scan;

use std::collections::BTreeMap;
use std::io::Cursor;

use calamine::{DataRef, Reader, Xlsx};

use crate::model::Workbook;
use crate::package::Package;
use crate::problem::{Place, Problem, Result};
use crate::references::{Cell, MAX_COLUMNS, MAX_ROWS, Range, SheetRange, shift};
use scan::{RawFormula, Scan};

/// The largest range that is read as one grid.
pub const MAX_CELLS: u64 = 1_000_000;

/// What a cell shows.
#[derive(Clone, Debug, Default, PartialEq)]
pub enum Value {
    /// Nothing.
    #[default]
    Blank,
    /// A number.
    Number(f64),
    /// A text.
    Text(String),
    /// True or false.
    Bool(bool),
    /// An error value, `#REF!`, say.
    Error(String),
    /// A number shown as a date: the day number in the workbook's own date system.
    Date(f64),
}

/// One cell as it was read.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct ReadCell {
    /// What it shows; of a formula, the stored result.
    pub value: Value,
    /// Its formula, without the equals sign.
    pub formula: Option<String>,
    /// Its number format code, where it has one.
    pub format: Option<String>,
}

impl ReadCell {
    /// Whether it is a formula whose result the file does not hold.
    pub fn lacks_result(&self) -> bool {
        self.formula.is_some() && self.value == Value::Blank
    }
}

/// The cells of a range, row by row.
#[derive(Clone, Debug, PartialEq)]
pub struct Grid {
    /// Where they are.
    pub at: SheetRange,
    cells: Vec<ReadCell>,
}

impl Grid {
    /// Every cell with its position, row by row.
    pub fn iter(&self) -> impl Iterator<Item = (Cell, &ReadCell)> {
        self.at.range.cells().zip(&self.cells)
    }

    /// The cell at a position of the sheet, where it lies in the range.
    pub fn get(&self, cell: Cell) -> Option<&ReadCell> {
        let Range { first, .. } = self.at.range;
        let width = self.at.range.cols() as usize;
        let inside = self.at.range.contains(cell);
        inside.then(|| &self.cells[(cell.row - first.row) as usize * width + (cell.col - first.col) as usize])
    }
}

/// The cells of a workbook, read when they are asked for.
pub struct Sheets<'a> {
    package: &'a Package,
    parts: BTreeMap<String, String>,
    values: Xlsx<Cursor<&'a [u8]>>,
    read: BTreeMap<String, Loaded>,
}

/// What has been read of one sheet.
#[derive(Default)]
struct Loaded {
    ranges: Vec<Range>,
    cells: BTreeMap<Cell, ReadCell>,
}

impl<'a> Sheets<'a> {
    /// Opens the cells of a package that has passed the preflight.
    ///
    /// **Errors**: `unreadable` where the reader cannot open the workbook.
    pub fn open(package: &'a Package, book: &Workbook) -> Result<Self> {
        let values = Xlsx::new(Cursor::new(package.bytes())).map_err(|e| unreadable(Place::default(), &e))?;
        let parts = book.sheets.iter().map(|sheet| (sheet.name.clone(), sheet.part.clone())).collect();
        Ok(Sheets { package, parts, values, read: BTreeMap::new() })
    }

    /// Reads many ranges with one pass over each sheet; [`Sheets::range`] then finds them read.
    ///
    /// **Errors**: `range-too-large`, `missing-sheet`, `unreadable`, `odd-value` (with the cell).
    pub fn load(&mut self, ranges: &[SheetRange]) -> Result<()> {
        let mut wanted: BTreeMap<&str, Vec<Range>> = BTreeMap::new();
        for range in ranges {
            let size = range.range.len();
            if size > MAX_CELLS {
                return Err(Problem::error(
                    "range-too-large",
                    Place::cells(&range.sheet, range.range),
                    format!("the range has {size} cells, allowed {MAX_CELLS}"),
                )
                .hint("name only the cells that hold the appraisal")
                .into());
            }
            let read = self.read.get(&range.sheet);
            if !read.is_some_and(|read| read.ranges.iter().any(|known| holds(known, &range.range))) {
                wanted.entry(&range.sheet).or_default().push(range.range);
            }
        }
        let mut problems = Vec::new();
        for (sheet, ranges) in wanted {
            if let Err(error) = self.load_sheet(sheet, ranges) {
                problems.extend(error.problems().iter().cloned());
            }
        }
        if problems.is_empty() { Ok(()) } else { Err(problems.into()) }
    }

    /// The cells of a range.
    ///
    /// **Errors**: as [`Sheets::load`].
    pub fn range(&mut self, at: &SheetRange) -> Result<Grid> {
        self.load(std::slice::from_ref(at))?;
        let read = self.read.entry(at.sheet.clone()).or_default();
        let cells = at.range.cells().map(|cell| read.cells.get(&cell).cloned().unwrap_or_default()).collect();
        Ok(Grid { at: at.clone(), cells })
    }

    /// Every stored cell of a sheet, row by row.
    ///
    /// **Errors**: `missing-sheet`, `unreadable`, `odd-value` (with the cell).
    pub fn all(&mut self, sheet: &str) -> Result<&BTreeMap<Cell, ReadCell>> {
        let whole = Range::new(Cell::new(0, 0), Cell::new(MAX_ROWS - 1, MAX_COLUMNS - 1));
        if !self.read.get(sheet).is_some_and(|read| read.ranges.contains(&whole)) {
            self.load_sheet(sheet, vec![whole])?;
        }
        Ok(&self.read.entry(sheet.to_owned()).or_default().cells)
    }

    /// Streams every stored value of a sheet past `see`, keeping none.
    ///
    /// **Errors**: `missing-sheet`, `unreadable`.
    pub fn visit(&mut self, sheet: &str, mut see: impl FnMut(Cell, Value)) -> Result<()> {
        let place = Place { sheet: Some(sheet.to_owned()), ..Place::default() };
        let mut reader =
            self.values.worksheet_cells_reader(sheet).map_err(|e| unreadable(place.clone(), &e))?;
        while let Some(cell) = reader.next_cell().map_err(|e| unreadable(place.clone(), &e))? {
            let (row, col) = cell.get_position();
            let value = value_of(cell.get_value());
            if value != Value::Blank {
                see(Cell { row, col }, value);
            }
        }
        Ok(())
    }

    fn load_sheet(&mut self, sheet: &str, ranges: Vec<Range>) -> Result<()> {
        let place = Place { sheet: Some(sheet.to_owned()), ..Place::default() };
        let Some(part) = self.parts.get(sheet) else {
            return Err(
                Problem::error("missing-sheet", place, "the workbook has no sheet of this name").into()
            );
        };
        let xml = self.package.part(part)?.unwrap_or_default();
        let found = scan::scan(part, &xml, &ranges)?;
        drop(xml);
        let mut reader =
            self.values.worksheet_cells_reader(sheet).map_err(|e| unreadable(place.clone(), &e))?;
        let formats: Vec<Option<String>> = reader
            .styles()
            .iter()
            .map(|style| style.number_format.as_ref().map(|format| format.format_code.clone()))
            .collect();
        let read = self.read.entry(sheet.to_owned()).or_default();
        let mut odd = Vec::new();
        let last = found.cells.keys().map(|cell| cell.row).max();
        while let Some((cell, style)) =
            reader.next_cell_with_style_id().map_err(|e| unreadable(place.clone(), &e))?
        {
            let (row, col) = cell.get_position();
            if last.is_none_or(|last| row > last) {
                break;
            }
            let at = Cell { row, col };
            let Some(raw) = found.cells.get(&at) else { continue };
            match exact(raw, value_of(cell.get_value())) {
                Ok(value) => {
                    let formula = formula_text(&found, at, raw);
                    let format = formats.get(style).cloned().flatten();
                    read.cells.insert(at, ReadCell { value, formula, format });
                }
                Err(stored) => odd.push(odd_value(sheet, at, &stored)),
            }
        }
        read.ranges.extend(ranges);
        if odd.is_empty() { Ok(()) } else { Err(odd.into()) }
    }
}

fn holds(outer: &Range, inner: &Range) -> bool {
    outer.contains(inner.first) && outer.contains(inner.last)
}

fn value_of(data: &DataRef) -> Value {
    match data {
        DataRef::Empty => Value::Blank,
        DataRef::Int(number) => Value::Number(*number as f64),
        DataRef::Float(number) => Value::Number(*number),
        DataRef::String(text) => Value::Text(text.clone()),
        DataRef::SharedString(text) => Value::Text((*text).to_owned()),
        DataRef::Bool(truth) => Value::Bool(*truth),
        DataRef::DateTime(date) => Value::Date(date.as_f64()),
        DataRef::DateTimeIso(text) | DataRef::DurationIso(text) => Value::Text(text.clone()),
        DataRef::Error(error) => Value::Error(error.to_string()),
    }
}

/// The value where the reader and the stored text say the same; else what is stored.
///
/// The reader drops values written as character data or with comments inside, and takes texts for
/// numbers that no number is: silence about either would be a wrong present value.
fn exact(raw: &scan::Raw, value: Value) -> std::result::Result<Value, String> {
    let stored = raw.value.as_deref().unwrap_or_default().trim();
    let numeric = matches!(raw.kind.as_str(), "" | "n") && !stored.is_empty();
    if !numeric {
        let lost = matches!(raw.kind.as_str(), "s" | "b" | "e" | "str")
            && value == Value::Blank
            && !stored.is_empty();
        return if lost { Err(stored.to_owned()) } else { Ok(value) };
    }
    match stored.parse::<f64>() {
        // Rust also reads "inf" and "nan", which the format does not allow.
        Ok(number) if number.is_finite() => Ok(match value {
            Value::Date(_) => Value::Date(number),
            _ => Value::Number(number),
        }),
        _ => Err(stored.to_owned()),
    }
}

fn formula_text(found: &Scan, at: Cell, raw: &scan::Raw) -> Option<String> {
    match raw.formula.as_ref()? {
        RawFormula::Text(text) => Some(text.clone()),
        RawFormula::Shared(group) => {
            let (from, text) = found.masters.get(group)?;
            let by = |to: u32, from: u32| i64::from(to) - i64::from(from);
            Some(shift(text, by(at.row, from.row), by(at.col, from.col)))
        }
    }
}

fn odd_value(sheet: &str, at: Cell, stored: &str) -> Problem {
    let shown: String = stored.chars().take(40).collect();
    Problem::error(
        "odd-value",
        Place::cells(sheet, Range::cell(at)),
        format!("the file stores `{shown}` here, which cannot be read exactly as a value"),
    )
    .hint("open the workbook in a spreadsheet program and save it again")
}

fn unreadable(place: Place, why: &dyn std::fmt::Display) -> Problem {
    Problem::error("unreadable", place, format!("the cells cannot be read: {why}"))
        .hint("open the workbook in a spreadsheet program and save it again")
}
