//! A series of consumption, a value a year, from which growth is estimated.

use chrono::Datelike;
use hence_core::{GrowthEstimate, growth_from_consumption};

use crate::appraisal::Label;
use crate::model::Workbook;
use crate::package::Package;
use crate::preflight::preflight;
use crate::problem::{Place, Problem, Result};
use crate::reading::{Grid, ReadCell};
use crate::references::{Cell, Range, SheetRange};
use crate::roles::{Role, RoleName};
use crate::valuation::from_core;

use super::cells::{number, one};
use super::find::{Named, located, shrink_to_merged, whole};
use super::years::label;
use super::{Checked, Context};

/// Growth as a workbook's series of consumption says.
#[derive(Clone, Debug, PartialEq)]
pub struct SeriesGrowth {
    /// Its cells.
    pub at: SheetRange,
    /// The first and the last year, where the series stands beside its years.
    pub years: Option<(i32, i32)>,
    /// What it says.
    pub estimate: GrowthEstimate,
    /// Warnings about the file.
    pub problems: Vec<Problem>,
}

/// Estimates growth from cells of a workbook.
///
/// # Arguments
/// `package`: the workbook. `cells`: `Sheet1!B2:B40` or a defined name; one row or column of values, or two, the first of
/// which holds the years.
///
/// # Errors
/// Every cell that is blank or no number, with its place; a range of another shape; a year left out; what
/// [`growth_from_consumption`] refuses.
pub fn growth_of_series(package: &Package, cells: &str) -> Result<SeriesGrowth> {
    let problems = preflight(package)?;
    let book = Workbook::read(package)?;
    let mut context = Context::open(package, &book)?;
    let named = named(&mut context, cells).map_err(|problem| *problem)?;
    let grid = context.sheets.range(&named.at)?;
    let columns = split(&named).map_err(|problem| *problem)?;
    let values = read(&mut context, &named, &grid, &columns.values, |content, place, _| {
        match number(content, place.clone()).map_err(needed)? {
            Some(number) => Ok(number),
            None => {
                let message = "is blank, and growth from year to year needs a value for every year";
                Err(Problem::error("series-gap", place, message)
                    .hint("enter the value, or give a range without the gap")
                    .into())
            }
        }
    });
    let years = columns.years.as_ref().map(|years| {
        read(&mut context, &named, &grid, years, |content, place, date1904| {
            Ok(match label(content, date1904, place)? {
                Label::Year(year) | Label::Number(year) | Label::Financial(year, _) => year,
                Label::Date(date) => date.year(),
                Label::Offset(offset) => offset as i32,
            })
        })
    });
    if context.failed() {
        return Err(context.ended());
    }
    let estimate = growth_from_consumption(&values, years.as_deref()).map_err(|error| {
        let cells = if error.argument() == "years" { columns.years.as_ref() } else { Some(&columns.values) };
        let cell = error.index().and_then(|index| cells.and_then(|cells| cells.get(index)));
        from_core(&error, place(&named, cell.map_or(named.at.range, |&cell| one(cell))))
    })?;
    let years = years.and_then(|years| Some((*years.first()?, *years.last()?)));
    Ok(SeriesGrowth { at: named.at, years, estimate, problems })
}

/// Among flows a blank would do instead of a text; here it would not.
fn needed(mut problem: Box<Problem>) -> Box<Problem> {
    if problem.code == "text-value" {
        problem.message = problem.message.replace("a number or a blank", "a number");
        problem.hint = Some("enter the number, or give cells without headings and remarks".to_owned());
    }
    problem
}

fn place(named: &Named, range: Range) -> Place {
    let place = Place::cells(&named.at.sheet, range);
    // Cells that were given as such need no name beside them.
    if named.from.contains('!') { place } else { place.called(&named.from) }
}

fn named(context: &mut Context, cells: &str) -> Checked<Named> {
    let area = located(context, Place::name(cells), cells)?;
    let name = RoleName { role: Role::Consumption, stream: None, option: None };
    let mut named =
        Named { name, from: cells.to_owned(), at: area.hull(), area, scope: None, stated: None, line: None };
    if named.area.parts().len() > 1 {
        return Err(Problem::error("name-union", named.place(), "comes in pieces, and one range is needed")
            .hint("give the cells of the series without a gap")
            .into());
    }
    shrink_to_merged(context, &mut named);
    match whole(&named) {
        Some(problem) => Err(problem.into()),
        None => Ok(named),
    }
}

/// The cells of the values, and of the years beside them.
struct Columns {
    years: Option<Vec<Cell>>,
    values: Vec<Cell>,
}

fn split(named: &Named) -> Checked<Columns> {
    let range = named.at.range;
    let (rows, cols) = (range.rows(), range.cols());
    let all: Vec<Cell> = range.cells().collect();
    let line = |test: &dyn Fn(&Cell) -> bool| all.iter().copied().filter(|cell| test(cell)).collect();
    match (rows, cols) {
        (1, _) | (_, 1) => Ok(Columns { years: None, values: all }),
        (_, 2) => {
            let first = range.first.col;
            Ok(Columns { years: Some(line(&|c| c.col == first)), values: line(&|c| c.col != first) })
        }
        (2, _) => {
            let first = range.first.row;
            Ok(Columns { years: Some(line(&|c| c.row == first)), values: line(&|c| c.row != first) })
        }
        _ => {
            let message = format!(
                "has {rows} rows and {cols} columns, allowed is one row or column of values, or two, the years first"
            );
            Err(Problem::error("series-shape", place(named, range), message)
                .hint("give the cells of the series only, without headings")
                .into())
        }
    }
}

/// Every cell as a value; what is wrong with it is reported, and the value then does not count.
fn read<T: Default>(
    context: &mut Context,
    named: &Named,
    grid: &Grid,
    cells: &[Cell],
    value: impl Fn(&ReadCell, Place, bool) -> Checked<T>,
) -> Vec<T> {
    let mut values = Vec::with_capacity(cells.len());
    for &cell in cells {
        let content = grid.get(cell).cloned().unwrap_or_default();
        match value(&content, place(named, one(cell)), context.book.date1904) {
            Ok(value) => values.push(value),
            Err(problem) => {
                context.report(*problem);
                values.push(T::default());
            }
        }
    }
    values
}
