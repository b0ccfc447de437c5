//! The cells of the sheets that an appraisal stands on, and of those that their formulas draw from, read once.

use std::collections::{BTreeMap, BTreeSet};

use super::expr::{At, Expr};
use crate::appraisal::Appraisal;
use crate::model::{SheetKind, Workbook};
use crate::package::Package;
use crate::problem::{Place, Result};
use crate::reading::{Sheets, Value};
use crate::references::{Area, Cell, Range, shift};

/// Sheets larger than this, unpacked, are not read: they hold data, not an appraisal.
const LARGEST: u64 = 40 << 20;

/// One cell that holds something.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Content {
    /// What it shows.
    pub value: Value,
    /// Its formula as a tree.
    pub expr: Option<Expr>,
    /// Its formula as it would read in A1: alike in every cell that it was copied to.
    pub shape: Option<String>,
    /// Its number format.
    pub format: Option<String>,
}

impl Content {
    /// The number that it shows.
    pub(crate) fn number(&self) -> Option<f64> {
        match self.value {
            Value::Number(number) | Value::Date(number) => Some(number),
            Value::Bool(truth) => Some(f64::from(u8::from(truth))),
            _ => None,
        }
    }

    /// A number that somebody typed.
    pub(crate) fn typed(&self) -> Option<f64> {
        if self.expr.is_none() { self.number() } else { None }
    }
}

/// The cells of a workbook, as far as its appraisal needs them.
pub(crate) struct Cells {
    /// The sheets by name.
    names: Vec<String>,
    read: BTreeMap<usize, BTreeMap<Cell, Content>>,
    /// The sheets that years, streams or targets stand on.
    pub home: BTreeSet<usize>,
}

impl Cells {
    /// Reads them.
    pub(crate) fn read(package: &Package, book: &Workbook, appraisal: &Appraisal) -> Result<Cells> {
        let names: Vec<String> = book.sheets.iter().map(|sheet| sheet.name.clone()).collect();
        let mut cells = Cells { names, read: BTreeMap::new(), home: BTreeSet::new() };
        let axes = appraisal.axes.iter().map(|axis| &axis.at);
        let streams = appraisal.choices.iter().flat_map(|choice| &choice.streams).map(|stream| &stream.at);
        let targets = appraisal.choices.iter().flat_map(|choice| &choice.targets).map(|target| &target.at);
        for at in axes.chain(streams).chain(targets) {
            cells.home.extend(book.sheet_index(&at.sheet));
        }
        let mut sheets = Sheets::open(package, book)?;
        let mut open: Vec<usize> = cells.home.iter().copied().collect();
        while let Some(sheet) = open.pop() {
            let part = &book.sheets[sheet];
            let small = package.part_size(&part.part).is_some_and(|size| size <= LARGEST);
            if cells.read.contains_key(&sheet) || !small || part.kind != SheetKind::Worksheet {
                continue;
            }
            let mut found = BTreeMap::new();
            for (at, cell) in sheets.all(&part.name)? {
                if cell.value == Value::Blank && cell.formula.is_none() {
                    continue;
                }
                let expr = cell.formula.as_ref().map(|text| Expr::read(text, sheet, book));
                if let Some(expr) = &expr {
                    open.extend(expr.ranges().into_iter().map(|(sheet, _)| sheet));
                }
                let back = |text: &String| shift(text, -i64::from(at.row), -i64::from(at.col));
                let shape = cell.formula.as_ref().map(back);
                let content = Content { value: cell.value.clone(), expr, shape, format: cell.format.clone() };
                found.insert(*at, content);
            }
            cells.read.insert(sheet, found);
        }
        Ok(cells)
    }

    /// What a cell holds; nothing where it is blank.
    pub(crate) fn get(&self, (sheet, cell): At) -> Option<&Content> {
        self.read.get(&sheet)?.get(&cell)
    }

    /// Whether a sheet was read.
    pub(crate) fn knows(&self, sheet: usize) -> bool {
        self.read.contains_key(&sheet)
    }

    /// Every cell of a sheet that holds something, row by row.
    pub(crate) fn of_sheet(&self, sheet: usize) -> impl Iterator<Item = (Cell, &Content)> {
        self.read.get(&sheet).into_iter().flatten().map(|(cell, content)| (*cell, content))
    }

    /// The cells of a range that hold something; of whole rows and columns, too.
    pub(crate) fn inside(&self, sheet: usize, range: Range) -> impl Iterator<Item = (Cell, &Content)> {
        let from = Cell::new(range.first.row, 0);
        let to = Cell::new(range.last.row, u32::MAX);
        let rows = self.read.get(&sheet).into_iter().flat_map(move |cells| cells.range(from..=to));
        rows.filter(move |(cell, _)| range.contains(**cell)).map(|(cell, content)| (*cell, content))
    }

    /// The place of a sheet by its name.
    pub(crate) fn sheet(&self, name: &str) -> Option<usize> {
        self.names.iter().position(|known| known == name)
    }

    /// The cells of an area by the place of its sheet, in order.
    pub(crate) fn each(&self, at: &Area) -> Vec<At> {
        let sheet = self.sheet(&at.sheet);
        sheet.map_or_else(Vec::new, |sheet| at.cells().map(|cell| (sheet, cell)).collect())
    }

    /// Cells for a report.
    pub(crate) fn place_of(&self, sheet: usize, range: Range) -> Place {
        Place::cells(&self.names[sheet], range)
    }
}
