//! Functions of single values over ranges: one result a cell, single rows and columns repeated.

use super::arguments::{Arguments, Place, is_blank};
use super::fault::{Fault, Outcome};
use super::{Cell, CellError, Range};

/// Applies `f` to the cells of the first `count` arguments, as the hosts do with their own operators: an argument with
/// one row (or column) is repeated down (or across). An argument left out is None. A blank cell within a range leaves
/// its place empty.
///
/// **Errors**: shapes that do not go together.
pub(super) fn spread<'a>(
    arguments: &Arguments<'a>,
    count: usize,
    mut f: impl FnMut(&[Option<Place<'a>>]) -> Outcome<f64>,
) -> Outcome<Range<'static>> {
    let ranges: Vec<Option<&Range<'a>>> = (0..count).map(|i| arguments.range(i)).collect();
    let rows = extent(ranges.iter().flatten().map(|range| range.rows()), "rows")?;
    let columns = extent(ranges.iter().flatten().map(|range| range.columns()), "columns")?;
    let mut cells = Vec::with_capacity(rows * columns);
    let mut places: Vec<Option<Place<'a>>> = vec![None; count];
    for row in 0..rows {
        for column in 0..columns {
            let mut empty = false;
            for (i, range) in ranges.iter().enumerate() {
                places[i] = range.map(|range| {
                    let (row, column) = (row.min(range.rows() - 1), column.min(range.columns() - 1));
                    arguments.place(i, range, row * range.columns() + column)
                });
                let blank = places[i].filter(|place| place.range.cells().len() > 1);
                empty |= blank.is_some_and(|place| is_blank(place.cell()));
            }
            cells.push(if empty { Cell::Text("".into()) } else { cell(arguments.note(f(&places))) });
        }
    }
    Range::new(rows, columns, cells).ok_or_else(|| Fault::value("the arguments have no cells"))
}

/// A result as a cell.
pub(super) fn cell(result: Outcome<f64>) -> Cell<'static> {
    match result {
        Ok(number) if number.is_finite() => Cell::Number(number),
        Ok(_) => Cell::Error(CellError::Number),
        Err(fault) => Cell::Error(fault.error),
    }
}

/// The common number of rows (or columns), where each is that or 1.
fn extent(all: impl Iterator<Item = usize> + Clone, word: &str) -> Outcome<usize> {
    let most = all.clone().max().unwrap_or(1);
    match all.into_iter().find(|one| *one != 1 && *one != most) {
        None => Ok(most),
        Some(other) => Err(Fault::value(format!("the arguments have {most} and {other} {word}"))),
    }
}
