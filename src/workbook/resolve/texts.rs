//! Cells that hold names and settings in words.

use crate::problem::Problem;
use crate::reading::{Grid, Value};
use crate::references::Cell;

use super::Context;
use super::cells::{error_value, single};
use super::find::Named;

/// The text of a role's one cell; a number gives its shortest text. Nothing where it is blank.
pub(super) fn text(context: &mut Context, named: &Named) -> Option<String> {
    match single(context, named)?.value {
        Value::Text(text) if !text.trim().is_empty() => Some(text.trim().to_owned()),
        Value::Number(number) => Some(number.to_string()),
        Value::Blank | Value::Text(_) => {
            context.report(blank(named));
            None
        }
        other => {
            context.report(
                Problem::error(
                    "text-expected",
                    named.place(),
                    format!("holds {}, allowed is a text", kind(&other)),
                )
                .hint(format!(
                    "enter what `{}` takes: {}",
                    named.name.words(),
                    named.name.role.info().what
                )),
            );
            None
        }
    }
}

/// A setting that was named and left blank.
pub(super) fn blank(named: &Named) -> Problem {
    Problem::error("blank-setting", named.place(), "is blank").hint(format!(
        "enter what `{}` takes: {}; or delete the name",
        named.name.words(),
        named.name.role.info().what
    ))
}

/// What kind of value a cell holds, in words.
pub(super) fn kind(value: &Value) -> &'static str {
    match value {
        Value::Blank => "nothing",
        Value::Number(_) => "a number",
        Value::Text(_) => "a text",
        Value::Bool(_) => "a logical value",
        Value::Error(_) => "an error",
        Value::Date(_) => "a date",
    }
}

/// The names listed in a role's cells, parted by commas, semicolons or lines, each with its cell.
pub(super) fn list(context: &mut Context, named: &Named) -> Vec<(String, Cell)> {
    let stated = named.stated.clone().map(|value| vec![(named.at.range.first, value)]);
    let read = |grid: Grid| grid.iter().map(|(cell, content)| (cell, content.value.clone())).collect();
    let Some(held) = stated.or_else(|| context.grid(&named.at).map(read)) else { return Vec::new() };
    let mut names = Vec::new();
    for (cell, value) in held {
        let place = || named.cell(cell);
        match &value {
            Value::Blank => {}
            Value::Text(text) => {
                let parts = text.split([',', ';', '\n']).map(str::trim).filter(|part| !part.is_empty());
                names.extend(parts.map(|part| (part.to_owned(), cell)));
            }
            Value::Error(error) => context.report(error_value(error, place())),
            other => context.report(
                Problem::error("text-expected", place(), format!("holds {}, allowed are names", kind(other)))
                    .hint("enter the names of streams, parted by commas"),
            ),
        }
    }
    names
}
