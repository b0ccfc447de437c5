//! Which cells go stale when others are filled: every formula that depends on them, directly or not.
//!
//! Spreadsheet programs keep a stored result unless they are told otherwise, and some keep it even then,
//! so the stored results of exactly these cells have to go.

mod graph;
mod needs;
mod tree;

use std::collections::{BTreeMap, BTreeSet};

use crate::model::{SheetKind, Workbook};
use crate::package::Package;
use crate::problem::{Place, Problem, Result};
use crate::references::{Cell, Range, SheetRange};

use needs::Reader;

/// What depends on filled cells.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Dependents {
    /// The cells whose stored results have to go, by sheet (its place in [`Workbook::sheets`]).
    pub cells: BTreeMap<usize, BTreeSet<Cell>>,
    /// What about this workbook keeps results from being right after the fill.
    pub warnings: Vec<Problem>,
}

/// Finds every formula cell that depends on filled cells, directly or not.
///
/// Followed are references to cells, ranges, whole rows and columns, several sheets, defined names and
/// tables. Formulas whose cells cannot be known from their text (INDIRECT, OFFSET, ranges that end in a
/// function, names that do not exist, anything not understood) and those that change by themselves (NOW,
/// RAND, CELL and so on) count as dependents. Array formulas and what-if tables count with all their
/// cells. Filled cells themselves are left out. References to other workbooks are none to this one.
///
/// **Arguments**: the cells that are filled; sheets by name, case apart.
/// **Returns**: cells in order; nothing but warnings when nothing is filled. At most
/// [`MAX_REFERENCES`] references are kept; formulas after that count as dependents, with a warning.
/// **Errors**: `unknown-sheet`, `cell-address`, and those of reading XML.
pub fn dependents(package: &Package, book: &Workbook, filled: &[SheetRange]) -> Result<Dependents> {
    let mut found = Dependents { cells: BTreeMap::new(), warnings: warnings(book) };
    let mut changed = Vec::with_capacity(filled.len());
    for at in filled {
        let Some(sheet) = book.sheet_index(&at.sheet) else {
            return Err(Problem::error(
                "unknown-sheet",
                Place { sheet: Some(at.sheet.clone()), ..Place::default() },
                "the workbook has no sheet of this name",
            )
            .into());
        };
        changed.push((sheet, at.range));
    }
    if changed.is_empty() {
        return Ok(found);
    }

    let mut reader = Reader::new(book);
    for (index, sheet) in book.sheets.iter().enumerate() {
        if sheet.kind != SheetKind::Chartsheet
            && let Some(xml) = package.part(&sheet.part)?
        {
            reader.read_sheet(index, &sheet.part, &xml)?;
        }
    }
    let graph = reader.finish();
    if graph.is_full() {
        found.warnings.push(Problem::warning(
            "many-references",
            Place::default(),
            format!(
                "the workbook's formulas hold more than {MAX_REFERENCES} references; those after that are \
                 taken to depend on the filled cells"
            ),
        ));
    }

    let mut areas: BTreeMap<usize, Vec<Range>> = BTreeMap::new();
    for (sheet, range) in graph.reached_from(&changed) {
        if range.is_single() {
            found.cells.entry(sheet).or_default().insert(range.first);
        } else {
            areas.entry(sheet).or_default().push(range);
        }
    }
    // Only the cells of an array that are there: its range may be as large as the sheet.
    for (sheet, ranges) in areas {
        let part = &book.sheets[sheet].part;
        let xml = package.part(part)?.unwrap_or_default();
        found.cells.entry(sheet).or_default().extend(graph::cells_inside(part, &xml, &ranges)?);
    }
    for (sheet, range) in &changed {
        if let Some(cells) = found.cells.get_mut(sheet) {
            let (from, to) = (Cell::new(range.first.row, 0), Cell::new(range.last.row, u32::MAX));
            let own: Vec<Cell> =
                cells.range(from..=to).copied().filter(|cell| range.contains(*cell)).collect();
            for cell in own {
                cells.remove(&cell);
            }
        }
    }
    found.cells.retain(|_, cells| !cells.is_empty());
    Ok(found)
}

/// The most references kept, 16 bytes each. A workbook of a million formulas has two or three million.
pub const MAX_REFERENCES: usize = 8_000_000;

/// Settings that make a fill less than it seems.
fn warnings(book: &Workbook) -> Vec<Problem> {
    let warn = |on: bool, code, message: &str, hint: &str| {
        on.then(|| Problem::warning(code, Place::default(), message).hint(hint))
    };
    [
        warn(
            book.calc_mode_manual,
            "manual-calculation",
            "the workbook is set to manual calculation: cells that depend on filled ones show no result, or 0, \
             until it is calculated",
            "calculate once with F9, or set calculation to automatic",
        ),
        warn(
            !book.full_precision,
            "precision-as-displayed",
            "the workbook keeps values as displayed: filled values would be rounded for good when it is calculated",
            "switch off \"set precision as displayed\" first",
        ),
        warn(
            book.date1904,
            "date-1904",
            "the workbook counts days from 1904: dates copied to or from other workbooks shift by 1,462 days",
            "check dates that came from other workbooks",
        ),
        warn(
            book.has_revisions,
            "shared-workbook",
            "the workbook is shared and keeps a history of changes, in which the fill does not appear",
            "stop sharing the workbook before it is filled",
        ),
        warn(
            book.protected,
            "protected-workbook",
            "the workbook's structure is protected; hence's sheets are added all the same",
            "unprotect the workbook if its owner should decide on new sheets",
        ),
    ]
    .into_iter()
    .flatten()
    .collect()
}
