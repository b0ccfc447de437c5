//! What follows filled cells: formulas whose results nobody knows until a spreadsheet program computes them.
//!
//! hence has no calculation engine. Where a value that it reads depends on a cell that it fills, the stored result is
//! that of before the fill: it is not judged by it, and whatever rests on it is left for the program to compute.

use std::collections::btree_map::Entry;
use std::collections::{BTreeMap, BTreeSet};

use crate::appraisal::Appraisal;
use crate::graft::GraftedSheet;
use crate::model::Workbook;
use crate::package::{Changes, Package};
use crate::patch::{Cached, CellWrite, patch_sheet};
use crate::plan::Stale;
use crate::problem::{Place, Problem, Result};
use crate::references::{Area, Cell, SheetRange};
use crate::sheets::TargetCell;
use crate::stale;

/// The verdict of a workbook in which something that hence compared or valued follows filled cells.
pub const AWAITS: &str = "awaits recalculation: open the output in a spreadsheet program and look there";

/// Whether one of the cells follows.
pub fn any(stale: &Stale, at: &SheetRange) -> bool {
    let (first, last) = (at.range.first, at.range.last);
    let cells = stale.get(&at.sheet);
    cells.is_some_and(|cells| cells.range(first..=last).any(|&cell| at.range.contains(cell)))
}

/// Whether one of the cells along a row or column follows.
fn any_along(stale: &Stale, at: &Area) -> bool {
    at.pieces().any(|piece| any(stale, &piece))
}

/// Marks the rows of the coverage that follow, and warns of flows that do.
pub fn mark(appraisal: &mut Appraisal, stale: &Stale, written: &[SheetRange], problems: &mut Vec<Problem>) {
    for row in &mut appraisal.coverage {
        let filled = |cell: &SheetRange| row.at.contains(&cell.sheet, cell.range.first);
        row.follows |= written.iter().any(filled) || any_along(stale, &row.at);
    }
    let mut seen = BTreeSet::new();
    for stream in appraisal.choices.iter().flat_map(|choice| &choice.streams) {
        if any_along(stale, &stream.at) && seen.insert(stream.at.clone()) {
            let place = Place::area(&stream.at).called(&stream.from);
            let message =
                "its formulas depend, or may depend, on cells that are filled: it was valued as it stood";
            problems.push(Problem::warning("flow-follows", place, message).hint(
                "open the output in a spreadsheet program, save it, and fill it again if the verdict differs",
            ));
        }
    }
}

/// The cells that hence's sheets read and whose values are not known: results that await recalculation, and flows, years
/// and settings that follow.
pub fn unknown(appraisal: &Appraisal, stale: &Stale, cells: &[TargetCell]) -> Vec<SheetRange> {
    let kept = cells.iter().filter(|cell| cell.awaits).map(|cell| &cell.at);
    let flows = appraisal.choices.iter().flat_map(|choice| &choice.streams).map(|stream| &stream.at);
    let years = appraisal.axes.iter().map(|axis| &axis.at);
    let paths = appraisal.choices.iter().filter_map(|choice| choice.welfare.consumption.as_ref());
    let spans = appraisal.axes.iter().filter_map(|axis| axis.spans.as_ref()).map(|spans| &spans.at);
    let along = flows.chain(years).chain(spans).chain(paths.map(|path| &path.at)).flat_map(Area::pieces);
    let settings = appraisal.settings.iter().map(|setting| &setting.at);
    let levels = appraisal.choices.iter().filter_map(|choice| choice.prices.levels.as_ref()?.at.as_ref());
    let follow = along.chain(settings.chain(levels).cloned()).filter(|at| any(stale, at));
    kept.cloned().chain(follow).collect()
}

/// Drops the stored result of everything that rests on unknown cells, on hence's own sheets and elsewhere.
///
/// A program that computes only formulas without a result would else show a verdict on results of before.
///
/// **Arguments**: `made`, the output as it is; `unknown`, the cells; `own`, hence's sheets in it; `writes` and
/// `changes`, what makes the output, from which results go.
pub fn forget(
    made: &Package,
    unknown: &[SheetRange],
    own: &[GraftedSheet],
    writes: &mut BTreeMap<String, BTreeMap<Cell, CellWrite>>,
    changes: &mut Changes,
) -> Result<()> {
    let book = Workbook::read(made)?;
    for (index, cells) in stale::dependents(made, &book, unknown)?.cells {
        let sheet = &book.sheets[index];
        if own.iter().any(|own| own.name == sheet.name) {
            let drops = cells.into_iter().map(|cell| (cell, CellWrite::DropValue)).collect();
            let xml = patch_sheet(&made.part(&sheet.part)?.unwrap_or_default(), &drops)?;
            let added = changes.add.iter_mut().find(|(part, _)| part.eq_ignore_ascii_case(&sheet.part));
            match added {
                Some((_, bytes)) => *bytes = xml,
                None => {
                    changes.replace.insert(sheet.part.clone(), xml);
                }
            }
            continue;
        }
        let writes = writes.entry(sheet.name.clone()).or_default();
        for cell in cells {
            match writes.entry(cell) {
                Entry::Vacant(free) => {
                    free.insert(CellWrite::DropValue);
                }
                Entry::Occupied(mut taken) => {
                    if let CellWrite::Formula(_, result) = taken.get_mut() {
                        *result = Cached::None;
                    }
                }
            }
        }
    }
    Ok(())
}
