//! The cell in which a total goes wrong: up from the flows through the formulas that they come into.

use std::collections::HashMap;

use super::calc::Slopes;
use super::expr::At;
use super::structure::Look;
use crate::references::{Cell, Range, SheetRange};

/// The cell moved as far as `to` is from `from`.
fn beside((sheet, cell): At, from: At, to: At) -> Option<At> {
    let step =
        |at: u32, from: u32, to: u32| u32::try_from(i64::from(at) + i64::from(to) - i64::from(from)).ok();
    (from.0 == to.0).then_some(())?;
    let row = step(cell.row, from.1.row, to.1.row)?;
    let col = step(cell.col, from.1.col, to.1.col)?;
    Some((sheet, Cell::new(row, col)))
}

/// The formula in which one flow counts and the other does not, though the formulas beside it are alike.
pub(super) fn left_out(look: &Look, slopes: &Slopes, counted: At, missing: At) -> At {
    let (mut counted, mut missing) = (counted, missing);
    'up: for _ in 0..slopes.order.len() {
        for &formula in slopes.order.iter().filter(|at| slopes.at(**at) != 0.0) {
            if !names(look, formula, counted) || names(look, formula, missing) {
                continue;
            }
            let Some(twin) = beside(formula, counted, missing) else { return formula };
            let shape = |at: At| look.cells.get(at).and_then(|content| content.shape.as_ref());
            if shape(twin).is_some() && shape(twin) == shape(formula) && names(look, twin, missing) {
                (counted, missing) = (formula, twin);
                continue 'up;
            }
            // In a row along the years, the odd cell is the one that leaves the flow out.
            let along = look.lines.iter().any(|line| {
                line.sheet == formula.0 && line.range.contains(formula.1) && line.range.contains(twin.1)
            });
            return if along && look.cells.get(twin).is_some() { twin } else { formula };
        }
        break;
    }
    counted
}

/// The first formula that a flow comes into by two ways.
pub(super) fn doubled(look: &Look, slopes: &Slopes, flow: At) -> Option<At> {
    let mut ways: HashMap<At, u64> = HashMap::from([(flow, 1)]);
    for &formula in &slopes.order {
        if formula == flow || !slopes.reaches(formula) {
            continue;
        }
        let ranges = look.cells.get(formula).and_then(|content| content.expr.as_ref())?.ranges();
        let through = |(sheet, range): &(usize, Range)| -> u64 {
            ways.iter().filter(|(at, _)| at.0 == *sheet && range.contains(at.1)).map(|(_, n)| *n).sum()
        };
        let count: u64 = ranges.iter().map(through).sum();
        if count > 1 {
            return Some(formula);
        }
        if count == 1 {
            ways.insert(formula, 1);
        }
    }
    None
}

fn names(look: &Look, formula: At, cell: At) -> bool {
    let expr = look.cells.get(formula).and_then(|content| content.expr.as_ref());
    expr.is_some_and(|expr| {
        expr.ranges().iter().any(|(sheet, range)| *sheet == cell.0 && range.contains(cell.1))
    })
}

/// The run of cells of a row along the years that hold the same formula as this one; else the cell itself.
pub(super) fn whole(look: &Look, root: At) -> SheetRange {
    let shape = |at: At| look.cells.get(at).and_then(|content| content.shape.clone());
    let line = look.lines.iter().find(|line| line.sheet == root.0 && line.range.contains(root.1));
    let run = line.filter(|line| {
        let own = shape(root);
        own.is_some() && line.each().filter(|at| shape(*at) == own).count() * 10 >= line.len() * 9
    });
    let range = run.map_or(Range::cell(root.1), |line| line.range);
    SheetRange::new(&look.seen.book.sheets[root.0].name, range)
}
