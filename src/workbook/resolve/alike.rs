//! Sheets laid out like one that is valued, with no names of their own: most likely options that were left out.

use std::collections::BTreeSet;

use crate::appraisal::{Choice, Direction};
use crate::model::{SheetKind, SheetState};
use crate::problem::{Place, Problem};
use crate::reading::Value;
use crate::references::{Area, Cell, Range, SheetRange};
use crate::roles::key;

use super::Context;
use super::choices::Built;

/// Sheets that are looked at, at most.
const MAX_SHEETS: usize = 100;

/// Warns of sheets with the headings, years and numbers of a valued one in the same cells; `named` are the sheets on which
/// any role stands.
pub(super) fn tell(context: &mut Context, built: &Built, named: &BTreeSet<String>) {
    let others: Vec<String> = context
        .book
        .sheets
        .iter()
        .filter(|sheet| sheet.kind == SheetKind::Worksheet && sheet.state == SheetState::Visible)
        .map(|sheet| sheet.name.clone())
        .filter(|name| !named.contains(name))
        .take(MAX_SHEETS)
        .collect();
    for other in others {
        let like = built.choices.iter().find(|choice| is_alike(context, built, choice, &other));
        let Some(stream) = like.and_then(|choice| choice.streams.first()) else { continue };
        let (at, of) = (stream.at.on_sheet(&other), &stream.at.sheet);
        let option = key(&other).replace(' ', "_");
        context.report(
            Problem::warning(
                "sheet-alike",
                Place::area(&at),
                format!("is laid out like `{of}`, which is valued, and has no names: it is not valued"),
            )
            .hint(if context.planned {
                "if it is an option too, add it to the plan, beside the sheet that it is like".to_owned()
            } else {
                format!(
                    "if it is an option too, define the names of `{of}` again with this sheet as their scope, or add \
                     --role ROLE__{option}=CELLS for each of them"
                )
            }),
        );
    }
}

/// Whether a sheet holds the option's headings, its years and numbers for its streams, each where the option has them.
fn is_alike(context: &mut Context, built: &Built, choice: &Choice, other: &str) -> bool {
    let Some(sheet) = choice.streams.first().map(|stream| stream.at.sheet.clone()) else { return false };
    let axis = &built.axes[choice.axis];
    let streams: Vec<&Area> =
        choice.streams.iter().map(|stream| &stream.at).filter(|at| at.sheet == sheet).collect();
    let headed = streams.iter().all(|at| {
        let Some(heading) = before(at, axis.direction) else { return false };
        let read = |context: &mut Context, sheet: &str| {
            let cell = SheetRange { sheet: sheet.to_owned(), range: Range::cell(heading) };
            values(context, &cell.into()).and_then(|mut cells| cells.pop())
        };
        let same =
            |a: Value, b: Value| matches!((a, b), (Value::Text(a), Value::Text(b)) if key(&a) == key(&b));
        read(context, &sheet).zip(read(context, other)).is_some_and(|(a, b)| same(a, b))
    });
    let filled = |cells: &[Value]| {
        let number = |value: &Value| matches!(value, Value::Number(_));
        cells.iter().any(number) && cells.iter().all(|value| number(value) || *value == Value::Blank)
    };
    headed
        && (axis.at.sheet != sheet || values(context, &axis.at) == values(context, &axis.at.on_sheet(other)))
        && streams.iter().all(|at| values(context, &at.on_sheet(other)).is_some_and(|cells| filled(&cells)))
}

/// The cell in front of a row, or above a column.
fn before(at: &Area, direction: Direction) -> Option<Cell> {
    let first = at.nth(0);
    match direction {
        Direction::Across => Some(Cell { col: first.col.checked_sub(1)?, ..first }),
        Direction::Down => Some(Cell { row: first.row.checked_sub(1)?, ..first }),
    }
}

/// What the cells hold; what is wrong with a sheet that nobody named is no matter of the appraisal.
fn values(context: &mut Context, at: &Area) -> Option<Vec<Value>> {
    let mut values = Vec::new();
    for piece in at.pieces() {
        let grid = context.sheets.range(&piece).ok()?;
        values.extend(grid.iter().map(|(_, cell)| cell.value.clone()));
    }
    Some(values)
}
