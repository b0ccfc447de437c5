//! Rows and columns of cells along the years, as formulas and typed numbers fill them.

use std::collections::{BTreeMap, BTreeSet};

use super::cells::{Cells, Content};
use super::expr::At;
use crate::appraisal::{Appraisal, Direction};
use crate::references::{Cell, Range, SheetRange};

/// A row (or column) of a stretch of years.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Line {
    pub sheet: usize,
    pub range: Range,
    pub direction: Direction,
}

impl Line {
    /// Its cells in order.
    pub(super) fn each(&self) -> impl Iterator<Item = At> + use<> {
        let sheet = self.sheet;
        self.range.cells().map(move |cell| (sheet, cell))
    }

    /// How many cells it has.
    pub(super) fn len(&self) -> usize {
        self.range.len() as usize
    }

    /// The texts before it on its own row (or above it in its column), nearest last.
    pub(super) fn headings(&self, cells: &Cells) -> Vec<String> {
        let Range { first, .. } = self.range;
        let before = match self.direction {
            Direction::Across if first.col > 0 => {
                Range::new(Cell::new(first.row, 0), Cell::new(first.row, first.col - 1))
            }
            Direction::Down if first.row > 0 => {
                Range::new(Cell::new(0, first.col), Cell::new(first.row - 1, first.col))
            }
            _ => return Vec::new(),
        };
        let text = |content: &Content| match &content.value {
            crate::reading::Value::Text(text) => Some(text.trim().to_owned()),
            _ => None,
        };
        cells.inside(self.sheet, before).filter_map(|(_, content)| text(content)).collect()
    }
}

/// The line that a stream or another range along the years is.
pub(super) fn line_of(at: &SheetRange, cells: &Cells) -> Option<Line> {
    let direction = if at.range.rows() == 1 { Direction::Across } else { Direction::Down };
    Some(Line { sheet: cells.sheet(&at.sheet)?, range: at.range, direction })
}

/// Every line that holds numbers, on the sheets of years, streams and targets.
pub(super) fn lines(appraisal: &Appraisal, cells: &Cells) -> Vec<Line> {
    let mut bands: BTreeSet<(usize, bool, u32, u32)> = BTreeSet::new();
    let mut add = |at: &SheetRange, direction: Direction| {
        let Range { first, last } = at.range;
        let Some(sheet) = cells.sheet(&at.sheet) else { return };
        bands.insert(match direction {
            Direction::Across => (sheet, false, first.col, last.col),
            Direction::Down => (sheet, true, first.row, last.row),
        });
    };
    for axis in &appraisal.axes {
        add(&axis.at.hull(), axis.direction);
    }
    for choice in &appraisal.choices {
        let axis = &appraisal.axes[choice.axis];
        let targets = choice.targets.iter().map(|target| &target.at);
        for at in choice.streams.iter().map(|stream| &stream.at).chain(targets) {
            if at.len() == axis.at.len() {
                add(&at.hull(), axis.direction);
            }
        }
    }
    let mut found = Vec::new();
    for (sheet, down, first, last) in bands {
        let mut filled: BTreeMap<u32, usize> = BTreeMap::new();
        for (cell, content) in cells.of_sheet(sheet) {
            let (index, along) = if down { (cell.col, cell.row) } else { (cell.row, cell.col) };
            if (first..=last).contains(&along) && (content.expr.is_some() || content.number().is_some()) {
                *filled.entry(index).or_insert(0) += 1;
            }
        }
        for (index, _) in filled.into_iter().filter(|(_, count)| *count > 1) {
            let (range, direction) = if down {
                (Range::new(Cell::new(first, index), Cell::new(last, index)), Direction::Down)
            } else {
                (Range::new(Cell::new(index, first), Cell::new(index, last)), Direction::Across)
            };
            found.push(Line { sheet, range, direction });
        }
    }
    found
}
