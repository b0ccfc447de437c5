//! What single cells may hold: numbers, and why something else is not one.

use crate::appraisal::{Setting, Stated};
use crate::problem::{Place, Problem};
use crate::reading::{ReadCell, Value};
use crate::references::{Cell, Range, SheetRange};

use super::find::Named;
use super::{Checked, Context};

/// The number in a cell, or nothing where it is blank; else what is wrong with it.
pub(super) fn number(cell: &ReadCell, place: Place) -> Checked<Option<f64>> {
    let problem = match &cell.value {
        Value::Blank if cell.lacks_result() => {
            Problem::error("no-result", place, "the formula has no stored result")
                .hint("open the workbook in a spreadsheet program, recalculate and save it")
        }
        Value::Blank => return Ok(None),
        Value::Number(number) => return Ok(Some(*number)),
        Value::Text(text) if text_as_number(text).is_some() => Problem::error(
            "text-number",
            place,
            format!("looks like a number, but the cell stores the text `{}`", shown(text)),
        )
        .hint("give the cell a number format and enter the number again"),
        Value::Text(text) => {
            let what = if text.trim().is_empty() { "an empty text" } else { "the text" };
            Problem::error(
                "text-value",
                place,
                format!("holds {what} `{}`, allowed is a number or a blank", shown(text)),
            )
            .hint("enter a number, or clear the cell: a blank counts as 0")
        }
        Value::Bool(truth) => {
            let word = if *truth { "TRUE" } else { "FALSE" };
            Problem::error("logical-value", place, format!("holds {word}, allowed is a number"))
                .hint("enter a number")
        }
        Value::Error(error) => error_value(error, place),
        Value::Date(serial) => Problem::error(
            "date-value",
            place,
            format!("holds a date (stored {serial}), allowed is a number"),
        )
        .hint("give the cell a number format, or name other cells"),
    };
    Err(problem.into())
}

/// A cell that shows an error value.
pub(super) fn error_value(error: &str, place: Place) -> Problem {
    Problem::error("error-value", place, format!("holds the error {error}"))
        .hint("mend the formula that gives the error")
}

/// The numbers of a row or column in order, blanks as 0, each problem reported with its cell.
pub(super) struct Numbers {
    /// One a cell.
    pub values: Vec<f64>,
    /// How many cells were blank.
    pub blanks: Vec<Cell>,
}

/// Reads every cell of a row or column as a number.
pub(super) fn numbers(context: &mut Context, named: &Named) -> Option<Numbers> {
    let mut read = Numbers { values: Vec::new(), blanks: Vec::new() };
    for (cell, content) in context.along(&named.area)? {
        let place = Place::cells(&named.at.sheet, one(cell)).called(&named.from);
        match number(&content, place) {
            Ok(Some(number)) => read.values.push(number),
            Ok(None) => {
                read.values.push(0.0);
                read.blanks.push(cell);
            }
            Err(problem) => {
                read.values.push(0.0);
                context.report(*problem);
            }
        }
    }
    Some(read)
}

/// The one cell of a role that takes one, or nothing after a report. What it states is kept for the audit.
pub(super) fn single(context: &mut Context, named: &Named) -> Option<ReadCell> {
    if let Some(value) = &named.stated {
        return Some(ReadCell { value: value.clone(), ..ReadCell::default() });
    }
    if named.at.range.first != named.at.range.last {
        context.report(
            Problem::error(
                "one-cell",
                named.place(),
                format!("covers {} cells, allowed is one", size(&named.at)),
            )
            .hint(format!("let {} refer to {}", named.from, first_cell(&named.at))),
        );
        return None;
    }
    let grid = context.grid(&named.at)?;
    let cell = grid.get(named.at.range.first).cloned().unwrap_or_default();
    if cell.lacks_result() {
        if let Err(problem) = number(&cell, named.place()) {
            context.report(*problem);
        }
        return None;
    }
    if let Value::Error(error) = &cell.value {
        context.report(error_value(error, named.place()));
        return None;
    }
    let value = match &cell.value {
        Value::Number(number) => Some(Stated::Number(*number)),
        Value::Date(serial) => Some(Stated::Date(*serial)),
        Value::Text(text) => Some(Stated::Text(text.clone())),
        Value::Blank | Value::Bool(_) | Value::Error(_) => None,
    };
    if let Some(value) = value {
        let setting = Setting { at: named.at.clone(), from: named.from.clone(), value };
        context.settings.insert((named.at.sheet.clone(), named.at.range.first), setting);
    }
    Some(cell)
}

/// The cell alone, as a range.
pub(super) fn one(cell: Cell) -> Range {
    Range { first: cell, last: cell }
}

/// The first cell of a range in words: `Sheet1!B2`.
fn first_cell(at: &SheetRange) -> SheetRange {
    SheetRange { sheet: at.sheet.clone(), range: one(at.range.first) }
}

/// How many cells a range has.
pub(super) fn size(at: &SheetRange) -> u64 {
    at.range.len()
}

/// A text cut to what fits a message.
pub(super) fn shown(text: &str) -> String {
    let cut: String = text.chars().take(40).collect();
    if cut.len() < text.len() { format!("{cut}...") } else { cut }
}

/// The number that a person would read in a text: `1,200`, `£3.5`, `(4)`, `20%`, `7 `.
pub(crate) fn text_as_number(text: &str) -> Option<f64> {
    let text = text.trim().trim_start_matches('\'');
    let bracketed = text.strip_prefix('(').and_then(|rest| rest.strip_suffix(')'));
    let (text, sign) = bracketed.map_or((text, 1.0), |inner| (inner, -1.0));
    let (text, share) = text.strip_suffix('%').map_or((text, 1.0), |rest| (rest, 0.01));
    let plain: String = text
        .chars()
        .filter(|c| !c.is_whitespace() && !matches!(c, '£' | '$' | '€' | ',' | '\u{a0}' | '_'))
        .collect();
    let looks = plain.chars().any(|c| c.is_ascii_digit())
        && plain.chars().all(|c| c.is_ascii_digit() || matches!(c, '.' | '-' | '+' | 'e' | 'E'));
    looks.then(|| plain.parse::<f64>().ok()).flatten().map(|number| sign * share * number)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn texts_that_look_like_numbers() {
        for (text, number) in [
            ("1,200", 1200.0),
            ("£3.5", 3.5),
            ("(4)", -4.0),
            (" 7 ", 7.0),
            ("'2026", 2026.0),
            ("1e3", 1000.0),
        ] {
            assert_eq!(text_as_number(text), Some(number), "{text}");
        }
        assert!((text_as_number("20%").unwrap() - 0.2).abs() < 1e-15);
        for text in ["n/a", "-", "", "2025/26", "FY26", "e", "E", "12 March"] {
            assert_eq!(text_as_number(text), None, "{text}");
        }
    }
}
