//! Blocks of streams: labels in the first column (or row), one stream a row (or column).

use crate::appraisal::{Axis, Direction, Given, Label, Stream, StreamKind};
use crate::problem::{Place, Problem};
use crate::reading::{Grid, ReadCell, Value};
use crate::references::{Area, Cell, Range, SheetRange};
use crate::roles::{Role, key};

use super::cells::{number, one};
use super::counted::sum_of;
use super::find::Named;
use super::{Context, note};

/// One row of a block (or column, where the years run down).
struct Line {
    label: Value,
    label_at: Cell,
    at: Area,
    cells: Vec<(Cell, ReadCell)>,
}

/// The streams of a block, raw; subtotals and headings are left out by name.
pub(super) fn streams(context: &mut Context, named: &Named, axis: &Axis) -> Vec<Stream> {
    let Some(grid) = context.grid(&named.at) else { return Vec::new() };
    let kind = if named.name.role == Role::Costs { StreamKind::Cost } else { StreamKind::Benefit };
    if let Some(problem) = wrong_shape(named, axis) {
        context.report(problem);
        return Vec::new();
    }
    let mut streams: Vec<Stream> = Vec::new();
    for line in lines(&grid, axis) {
        let Some(name) = label(context, named, &line) else { continue };
        let place = Place::area(&line.at).called(&name);
        if line.cells.iter().all(|(_, cell)| cell.value == Value::Blank && cell.formula.is_none()) {
            context.report(note("block-heading", place, "has no numbers and is taken for a heading"));
            continue;
        }
        if is_years(&line, axis) {
            context.report(note("block-years", place, "repeats the years and is left out"));
            continue;
        }
        if is_subtotal(&line, named, axis.direction) {
            context.report(note(
                "subtotal-left-out",
                place,
                "is made of other rows of the block by its formulas, and is left out so that nothing counts twice",
            ));
            continue;
        }
        if let Some(twin) = streams.iter().find(|stream| key(&stream.name) == key(&name)) {
            context.report(
                Problem::error(
                    "block-label",
                    place,
                    format!("has the same label as {}", twin.at.cells_text()),
                )
                .hint("give each row its own label"),
            );
            continue;
        }
        let mut raw = Vec::new();
        for (cell, content) in &line.cells {
            match number(content, Place::cells(&named.at.sheet, one(*cell)).called(&name)) {
                Ok(value) => raw.push(value.unwrap_or(0.0)),
                Err(problem) => {
                    context.report(*problem);
                    raw.push(0.0);
                }
            }
        }
        streams.push(Stream {
            name,
            kind,
            from: format!("{}, row {}", named.from, line.at.cells_text()),
            at: line.at.clone(),
            raw,
            sign: 1.0,
            unit: 1.0,
            uplift: Given { value: 0.0, at: None, from: "default".to_owned() },
            residual: None,
            tail: None,
            growth: None,
            basis: None,
            income: None,
        });
    }
    if streams.is_empty() && !context.failed() {
        context.report(
            Problem::warning("block-empty", named.place(), "holds no numbers and counts for nothing")
                .hint("enter the flows, or let the block cover the labels and the numbers of its streams"),
        );
    }
    streams
}

/// A block is as long as the years, and one more for the labels.
fn wrong_shape(named: &Named, axis: &Axis) -> Option<Problem> {
    // Where the years come in pieces, the block reaches over what stands between.
    let around = axis.at.hull().range;
    let years = around.len();
    let (long, what) = match axis.direction {
        Direction::Across => (named.at.range.cols(), "columns"),
        Direction::Down => (named.at.range.rows(), "rows"),
    };
    if u64::from(long) == years + 1 {
        return None;
    }
    let mut fixed = named.at.range;
    match axis.direction {
        Direction::Across if around.first.col > 0 => {
            fixed.first.col = around.first.col - 1;
            fixed.last.col = around.last.col;
        }
        Direction::Down if around.first.row > 0 => {
            fixed.first.row = around.first.row - 1;
            fixed.last.row = around.last.row;
        }
        _ => {}
    }
    let fixed = SheetRange { sheet: named.at.sheet.clone(), range: fixed };
    let problem = Problem::error(
        "block-shape",
        named.place(),
        format!(
            "has {long} {what}, allowed are {}: one of labels and {years} as the years {}",
            years + 1,
            axis.at
        ),
    );
    Some(problem.hint(format!("let {} refer to {fixed}", named.from)))
}

fn lines(grid: &Grid, axis: &Axis) -> Vec<Line> {
    let Range { first, last } = grid.at.range;
    let around = axis.at.hull().range;
    let direction = axis.direction;
    let count = match direction {
        Direction::Across => first.row..=last.row,
        Direction::Down => first.col..=last.col,
    };
    count
        .map(|i| {
            let label_at = match direction {
                Direction::Across => Cell { row: i, col: first.col },
                Direction::Down => Cell { row: first.row, col: i },
            };
            let beside = |year: Cell| match direction {
                Direction::Across => Cell { row: i, col: first.col + 1 + year.col - around.first.col },
                Direction::Down => Cell { row: first.row + 1 + year.row - around.first.row, col: i },
            };
            let pieces = axis.at.parts().iter().map(|piece| {
                let range = Range { first: beside(piece.first), last: beside(piece.last) };
                SheetRange { sheet: grid.at.sheet.clone(), range }
            });
            // They lie in one row as the years do.
            let at = Area::join(&pieces.collect::<Vec<_>>()).unwrap_or_else(|_| axis.at.clone());
            let cells = at.cells().map(|cell| (cell, grid.get(cell).cloned().unwrap_or_default())).collect();
            let label = grid.get(label_at).map(|cell| cell.value.clone()).unwrap_or_default();
            Line { label, label_at, at, cells }
        })
        .collect()
}

/// The name of a row; nothing for an empty row, or after a report.
fn label(context: &mut Context, named: &Named, line: &Line) -> Option<String> {
    let numbers = line.cells.iter().any(|(_, cell)| cell.value != Value::Blank || cell.formula.is_some());
    match &line.label {
        Value::Text(text) if !key(text).is_empty() => {
            Some(text.split_whitespace().collect::<Vec<_>>().join(" "))
        }
        Value::Blank | Value::Text(_) if !numbers => None,
        _ => {
            let place = Place::cells(&named.at.sheet, one(line.label_at)).called(&named.from);
            context.report(
                Problem::error("block-label", place, "should label the numbers beside it with a text")
                    .hint("enter the name of the stream, or let the block end before this row"),
            );
            None
        }
    }
}

/// Whether a row only repeats the labels of the years.
fn is_years(line: &Line, axis: &Axis) -> bool {
    line.cells.iter().zip(&axis.labels).all(|((_, cell), label)| match (&cell.value, label) {
        (Value::Number(n), Label::Year(year) | Label::Number(year)) => *n == f64::from(*year),
        (Value::Text(text), Label::Financial(_, year)) => text.trim() == year.trim(),
        (Value::Date(_), Label::Date(_)) => true,
        _ => false,
    })
}

/// Whether every number of a row is a sum of other rows of the block in the same column.
fn is_subtotal(line: &Line, named: &Named, direction: Direction) -> bool {
    let filled: Vec<_> = line.cells.iter().filter(|(_, cell)| cell.value != Value::Blank).collect();
    !filled.is_empty()
        && filled.iter().all(|(at, cell)| {
            let Some(parts) = cell.formula.as_deref().and_then(|text| sum_of(text, &named.at.sheet)) else {
                return false;
            };
            let cells: u64 = parts.iter().map(|part| part.range.len()).sum();
            let beside = |part: &SheetRange| {
                let inside = part.sheet == named.at.sheet
                    && named.at.range.contains(part.range.first)
                    && named.at.range.contains(part.range.last);
                let same = match direction {
                    Direction::Across => part.range.first.col == at.col && part.range.last.col == at.col,
                    Direction::Down => part.range.first.row == at.row && part.range.last.row == at.row,
                };
                inside && same && !part.range.contains(*at)
            };
            cells > 1 && parts.iter().all(beside)
        })
}
