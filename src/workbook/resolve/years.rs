//! The years of the flows, and the base they are counted from.

use chrono::{Datelike, Days, NaiveDate};
use hence_core::parse_financial_year;

use crate::appraisal::{Axis, Base, COMMAND_LINE, Direction, Given, Label};
use crate::clock::label_kind;
use crate::problem::{Place, Problem};
use crate::reading::{ReadCell, Value};
use crate::references::{Cell, SheetRange};
use crate::roles::Role;

use super::cells::{error_value, number, one, shown, single, text_as_number};
use super::find::Named;
use super::{Checked, Context, spans, texts};

/// The longest row of years: calendar years run from 1000 to 9999.
const MAX_YEARS: u64 = 9_000;

/// Which way a row or column runs; nothing for a block.
pub(super) fn direction(at: &SheetRange) -> Option<Direction> {
    match (at.range.rows(), at.range.cols()) {
        (1, _) => Some(Direction::Across),
        (_, 1) => Some(Direction::Down),
        _ => None,
    }
}

/// Reads the years (or the offsets) of a role with the years per column, or reports why they are none.
pub(super) fn axis(context: &mut Context, named: &Named, span: Option<&Named>) -> Option<Axis> {
    let count = named.area.len();
    let Some(direction) = direction(&named.at).filter(|_| (2..=MAX_YEARS).contains(&count)) else {
        let (rows, cols) = (named.at.range.rows(), named.at.range.cols());
        context.report(
            Problem::error(
                "years-shape",
                named.place(),
                format!("has {rows} rows and {cols} columns, allowed is one row or one column of 2 to {MAX_YEARS} cells"),
            )
            .hint("name only the cells of the years, from the first to the last"),
        );
        return None;
    };
    let cells = context.along(&named.area)?;
    let date1904 = context.book.date1904;
    let mut labels: Vec<Option<Label>> = Vec::new();
    for (cell, content) in cells {
        let content = &content;
        let place = Place::cells(&named.at.sheet, one(cell)).called(&named.from);
        let read = if named.name.role == Role::Offsets {
            offset(content, place.clone())
        } else {
            label(content, date1904, place.clone())
        };
        match read {
            Ok(label) => {
                let last = labels.last().and_then(Option::as_ref);
                // Where columns are not a year each, labels are judged by the years per column.
                if let Some(problem) = last.and_then(|last| step(last, &label, place))
                    && !(matches!(problem.code, "years-gap" | "years-repeat") && span.is_some())
                {
                    context.report(problem);
                }
                labels.push(Some(label));
            }
            Err(mut problem) => {
                if in_headings(context, &named.at.sheet, cell) {
                    let hint = "headings of a table are always texts: name a row of years outside the table";
                    problem.hint = Some(hint.to_owned());
                }
                context.report(*problem);
                labels.push(None);
            }
        }
    }
    // A faulty year ends the run, but not before the flows beside it are checked too.
    let any = labels.iter().flatten().next()?.clone();
    let labels = labels.into_iter().map(|label| label.unwrap_or_else(|| any.clone())).collect();
    let mut axis = Axis { at: named.area.clone(), direction, labels, spans: None };
    if let Some(span) = span {
        axis.spans = Some(spans::spans(context, span, &axis)?);
    }
    Some(axis)
}

/// Whether a cell is one of a table's headings.
fn in_headings(context: &mut Context, sheet: &str, cell: Cell) -> bool {
    let facts = context.facts(sheet);
    facts.is_some_and(|facts| {
        let headings = |table: &crate::model::Table| cell.row < table.range.first.row + table.header_rows;
        facts.tables.iter().any(|table| table.range.contains(cell) && headings(table))
    })
}

/// One cell of the years.
pub(super) fn label(content: &ReadCell, date1904: bool, place: Place) -> Checked<Label> {
    let wrong = |message: String| Problem::error("years-value", place.clone(), message);
    let problem = match &content.value {
        Value::Blank if content.lacks_result() => return number(content, place).map(|_| Label::Number(0)),
        Value::Blank => Problem::error("years-blank", place, "is blank among the years")
            .hint("enter the year, or let the name end before the blank"),
        Value::Number(number) => match whole_year(*number) {
            Some(label) => return Ok(label),
            None => wrong(format!("is {number}, and a year is a whole number up to 9999")).hint(
                if (20_000.0..80_000.0).contains(number) {
                    "give the cell a date format if it is a date"
                } else {
                    "enter a calendar year from 1000 to 9999, or a year number below 1000"
                },
            ),
        },
        Value::Date(serial) => match date(*serial, date1904) {
            Some(date) => return Ok(Label::Date(date)),
            None => wrong(format!("is no date (stored {serial})")).hint("enter a date with its year"),
        },
        Value::Text(text) => match parse_financial_year(text.trim()) {
            // As it stands in the cell, so that a look-up by the cell finds it.
            Ok(year) => return Ok(Label::Financial(year, text.clone())),
            Err(_) if text_as_number(text).is_some() => Problem::error(
                "text-number",
                place,
                format!("looks like a year, but the cell stores the text `{}`", shown(text)),
            )
            .hint("give the cell a number format and enter the year again"),
            Err(_) => wrong(format!("holds the text `{}`, which is no year", shown(text)))
                .hint("enter a calendar year, a financial year such as 2025/26, a year number or a date"),
        },
        Value::Error(error) => error_value(error, place),
        Value::Bool(_) => wrong("holds a logical value".to_owned()).hint("enter a year"),
    };
    Err(problem.into())
}

/// A calendar year or a year number, where the number is one.
fn whole_year(number: f64) -> Option<Label> {
    let whole = number.fract() == 0.0 && (-999.0..=9999.0).contains(&number);
    // In range and whole, so the conversion is exact.
    whole.then_some(number as i32).map(|n| if n >= 1000 { Label::Year(n) } else { Label::Number(n) })
}

fn offset(content: &ReadCell, place: Place) -> Checked<Label> {
    match number(content, place.clone())? {
        Some(offset) => Ok(Label::Offset(offset)),
        None => Err(Problem::error("years-blank", place, "is blank among the offsets")
            .hint("enter the offset in years from the base, or let the name end before the blank")
            .into()),
    }
}

/// What is wrong between one label and the next.
fn step(last: &Label, next: &Label, place: Place) -> Option<Problem> {
    let (ahead, repeated) = match (last, next) {
        (Label::Year(a), Label::Year(b))
        | (Label::Number(a), Label::Number(b))
        | (Label::Financial(a, _), Label::Financial(b, _)) => (b > a, a == b),
        (Label::Date(a), Label::Date(b)) => (b > a, a == b),
        (Label::Offset(a), Label::Offset(b)) => (b > a, a == b),
        _ => {
            return Some(
                Problem::error(
                    "years-mixed",
                    place,
                    format!("is {} after {}", label_kind(next), label_kind(last)),
                )
                .hint("enter all years in one way"),
            );
        }
    };
    if repeated {
        return Some(
            Problem::error("years-repeat", place, format!("repeats {}", words(next)))
                .hint("each year stands once; add the flows of a year up in one cell"),
        );
    }
    if !ahead {
        return Some(
            Problem::error("years-order", place, format!("{} comes after {}", words(next), words(last)))
                .hint("let the years run from the earliest to the latest"),
        );
    }
    let skipped = match (last, next) {
        (Label::Year(a), Label::Year(b))
        | (Label::Number(a), Label::Number(b))
        | (Label::Financial(a, _), Label::Financial(b, _)) => b - a - 1,
        _ => 0,
    };
    (skipped > 0).then(|| {
        let years = if skipped == 1 { "1 year is".to_owned() } else { format!("{skipped} years are") };
        Problem::warning(
            "years-gap",
            place,
            format!("{} follows {}: {years} left out", words(next), words(last)),
        )
        .hint("nothing flows in a year left out; where a column stands for several years, name the years per column hence_span")
    })
}

fn words(label: &Label) -> String {
    match label {
        Label::Year(year) | Label::Number(year) => year.to_string(),
        Label::Financial(_, text) => text.trim().to_owned(),
        Label::Date(date) => date.format("%-d %B %Y").to_string(),
        Label::Offset(offset) => offset.to_string(),
    }
}

/// The date of a day number. Days count from 1900 with a day that never was (29 February 1900), or from
/// 1 January 1904; a time of day is left off.
pub(super) fn date(serial: f64, date1904: bool) -> Option<NaiveDate> {
    if !(0.0..2_958_466.0).contains(&serial) {
        return None;
    }
    let days = serial.trunc() as u64;
    let (epoch, days) = match (date1904, days) {
        (true, days) => (NaiveDate::from_ymd_opt(1904, 1, 1)?, days),
        (false, 0 | 60) => return None,
        (false, days) if days < 60 => (NaiveDate::from_ymd_opt(1899, 12, 31)?, days),
        (false, days) => (NaiveDate::from_ymd_opt(1899, 12, 30)?, days),
    };
    epoch.checked_add_days(Days::new(days))
}

/// Reads the base for these years, the command line's before the workbook's, or reports why it is none.
pub(super) fn base(
    context: &mut Context,
    named: Option<&Named>,
    told: Option<&str>,
    axis: &Axis,
) -> Option<Given<Base>> {
    if let Some(told) = told {
        let instead = Named::told(Role::Base, "--base", told);
        let given = read_base(context, Some(&instead), axis)?;
        return Some(Given { at: named.and_then(Named::cells), from: COMMAND_LINE.to_owned(), ..given });
    }
    read_base(context, named, axis)
}

/// The calendar year of the base that the workbook states, whatever the command line says; nothing where it states
/// none, or where years are counted from the base, whichever it is.
pub(super) fn own_base_year(context: &mut Context, named: Option<&Named>, axis: &Axis) -> Option<i32> {
    let named = named?;
    if matches!(axis.labels.first(), Some(Label::Number(_) | Label::Offset(_))) {
        return None;
    }
    let content = match &named.stated {
        Some(value) => ReadCell { value: value.clone(), ..ReadCell::default() },
        None => context.grid(&named.at)?.get(named.at.range.first).cloned()?,
    };
    match label(&content, context.book.date1904, named.place()).ok()? {
        Label::Year(year) | Label::Financial(year, _) => Some(year),
        Label::Date(date) => Some(date.year()),
        Label::Number(_) | Label::Offset(_) => None,
    }
}

fn read_base(context: &mut Context, named: Option<&Named>, axis: &Axis) -> Option<Given<Base>> {
    let Some(named) = named else {
        // Numbers and offsets count from their own zero; anything else needs a base, reported as missing.
        let zero = matches!(axis.labels.first(), Some(Label::Number(_) | Label::Offset(_)));
        return zero.then(|| Given { value: Base::Zero, at: None, from: "year 0 of the years".to_owned() });
    };
    let cell = single(context, named)?;
    let stated = match label(&cell, context.book.date1904, named.place()) {
        Ok(label) => label,
        Err(problem) if problem.code == "years-blank" => {
            context.report(texts::blank(named));
            return None;
        }
        Err(problem) => {
            context.report(Problem {
                code: if problem.code == "years-value" { "base-value" } else { problem.code },
                ..*problem
            });
            return None;
        }
    };
    let given = |value| Some(Given { value, at: named.cells(), from: named.from.clone() });
    let first = axis.labels.first()?;
    match (&stated, first) {
        (Label::Year(year), Label::Year(_) | Label::Number(_) | Label::Offset(_)) => given(Base::Year(*year)),
        (Label::Year(year), Label::Financial(..)) => {
            context.report(
                Problem::warning(
                    "base-years",
                    named.place(),
                    format!("{year} is taken for the financial year that begins in {year}, as the years are financial"),
                )
                .hint("enter the base as a financial year, 2025/26"),
            );
            given(Base::Financial(*year))
        }
        (Label::Financial(year, _), Label::Financial(..)) => given(Base::Financial(*year)),
        (Label::Financial(year, _), Label::Number(_) | Label::Offset(_)) => given(Base::Financial(*year)),
        (Label::Date(date), Label::Date(_) | Label::Number(_) | Label::Offset(_)) => given(Base::Date(*date)),
        (Label::Number(0), Label::Number(_) | Label::Offset(_)) => given(Base::Zero),
        (Label::Number(n), Label::Number(_)) => {
            context.report(
                Problem::error(
                    "base-years",
                    named.place(),
                    format!("is {n}, and year numbers count from 0 at the base"),
                )
                .hint("enter 0 or the calendar year of year 0, and let the years count from there"),
            );
            None
        }
        _ => {
            context.report(
                Problem::error(
                    "base-years",
                    named.place(),
                    format!("the base is {} ({}) and the years are {}s", label_kind(&stated), words(&stated), plain(first)),
                )
                .hint("state base and years in one way: both calendar years, both financial years or both dates"),
            );
            None
        }
    }
}

fn plain(label: &Label) -> &'static str {
    let kind = label_kind(label);
    kind.strip_prefix("a ").or(kind.strip_prefix("an ")).unwrap_or(kind)
}

#[cfg(test)]
mod tests {
    use super::*;

    // Day numbers as spreadsheets show them: 1 is 1 January 1900, 61 is 1 March 1900, 45,748 is 1 April 2025;
    // from 1904, 1462 less (ISO/IEC 29500-1, 18.17.4).
    #[test]
    fn day_numbers_of_both_date_systems() {
        let of = |y, m, d| NaiveDate::from_ymd_opt(y, m, d);
        assert_eq!(date(1.0, false), of(1900, 1, 1));
        assert_eq!(date(59.0, false), of(1900, 2, 28));
        assert_eq!(date(60.0, false), None);
        assert_eq!(date(61.0, false), of(1900, 3, 1));
        assert_eq!(date(45_748.0, false), of(2025, 4, 1));
        assert_eq!(date(45_748.75, false), of(2025, 4, 1));
        assert_eq!(date(44_286.0, true), of(2025, 4, 1));
        assert_eq!(date(-1.0, false), None);
        assert_eq!(date(2_958_465.0, false), of(9999, 12, 31));
    }
}
