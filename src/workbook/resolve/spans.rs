//! Years per column, where columns are not a year each.

use crate::appraisal::{Axis, Choice, Label, Spans, TargetRole};
use crate::periods::{cumulated, whole};
use crate::problem::{Place, Problem};
use crate::reading::{ReadCell, Value};
use crate::references::SheetRange;

use super::cells::{number, one, single};
use super::counted::check_aligned;
use super::find::Named;
use super::{Checked, Context, note, streams};

/// The longest period in years.
const LONGEST: f64 = 1_000.0;

/// Reads the years per column of an axis: one cell for all columns, or a cell each.
pub(super) fn spans(context: &mut Context, named: &Named, axis: &Axis) -> Option<Spans> {
    let count = axis.labels.len();
    let lengths = if named.area.len() == 1 {
        let cell = single(context, named)?;
        vec![checked(context, &cell, named.place())?; count]
    } else {
        if let Some(problem) = streams::wrong_shape(named, axis) {
            context.report(problem);
            return None;
        }
        check_aligned(context, &named.area, &named.from, &axis.at);
        let mut lengths = Vec::with_capacity(count);
        for (cell, content) in context.along(&named.area)? {
            let place = Place::cells(&named.at.sheet, one(cell)).called(&named.from);
            lengths.extend(checked(context, &content, place));
        }
        lengths
    };
    if lengths.len() < count {
        return None;
    }
    let spans = Spans { at: named.area.clone(), from: named.from.clone(), lengths };
    match labels_fit(&spans, axis) {
        Ok(remark) => {
            if let Some(remark) = remark {
                context.report(remark);
            }
            Some(spans)
        }
        Err(problem) => {
            context.report(*problem);
            None
        }
    }
}

/// One length, or nothing after a report.
fn checked(context: &mut Context, content: &ReadCell, place: Place) -> Option<f64> {
    let length = match length(content, place.clone()) {
        Ok(length) => length,
        Err(problem) => {
            context.report(*problem);
            return None;
        }
    };
    // Rounded parts of a year come short of one.
    let parts = (1.0 / length).round();
    let off = (length * parts - 1.0).abs();
    if length < 1.0 && off > 1e-9 && off < 0.005 {
        let message =
            format!("is {length}, which is not 1/{parts}: {parts} columns come to {} years", length * parts);
        context.report(Problem::warning("span-rounded", place, message).hint(format!("enter =1/{parts}")));
    }
    Some(length)
}

fn length(content: &ReadCell, place: Place) -> Checked<f64> {
    let wrong = |message: String| Problem::error("span-value", place.clone(), message);
    let problem = match number(content, place.clone()) {
        Ok(Some(length)) if length > 0.0 && length <= LONGEST => return Ok(length),
        Ok(Some(length)) => wrong(format!("is {length}, allowed is above 0 to {LONGEST} years"))
            .hint("enter the years of the column: =1/12 for a month, 0.25 for a quarter, 1, 5"),
        Ok(None) => wrong("is blank among the years per column".to_owned())
            .hint("enter the years of the column: =1/12 for a month, 0.25 for a quarter, 1, 5"),
        Err(problem) => match content.value {
            Value::Date(_) => {
                problem.hint("a spreadsheet takes 1/12 for a date: enter =1/12, and a number format")
            }
            _ => *problem,
        },
    };
    Err(problem.into())
}

/// Whether the labels are those of periods of these lengths; with a remark where they can be read in two ways.
fn labels_fit(spans: &Spans, axis: &Axis) -> Checked<Option<Problem>> {
    let at = |i: usize| {
        let range = one(axis.at.nth(i));
        SheetRange { sheet: axis.at.sheet.clone(), range }
    };
    let refuse = |i: usize, message: String, hint: &str| {
        let place = Place::cells(&axis.at.sheet, at(i).range).called(&spans.from);
        Err(Problem::error("span-years", place, message).hint(hint).into())
    };
    let mut values = Vec::with_capacity(axis.labels.len());
    for (i, label) in axis.labels.iter().enumerate() {
        match label {
            Label::Year(n) | Label::Number(n) | Label::Financial(n, _) => values.push(f64::from(*n)),
            Label::Date(_) | Label::Offset(_) => {
                return refuse(
                    i,
                    format!(
                        "dates and offsets say themselves where a flow stands, and {} is given beside them",
                        spans.from
                    ),
                    "leave the years per column out, or name a row of years or of period numbers hence_years",
                );
            }
        }
    }
    let starts = cumulated(&spans.lengths);
    let first = values[0];
    let numbered = matches!(axis.labels[0], Label::Number(_));
    if numbered && !(first == 0.0 || first == 1.0) {
        return refuse(
            0,
            format!("the periods are numbered from {first}, and the base is period 0"),
            "number the periods from 0 (the base) or from 1, or label them with calendar years",
        );
    }
    // A column is named by its number, by the year it begins in, or, after columns of one year, by the year it ends in.
    let begins = |i: usize| first + (starts[i] + 1e-9).floor();
    let ends = |i: usize| first + (starts[i] + spans.lengths[i] - 1e-9).ceil() - 1.0;
    let fits = |named: &dyn Fn(usize) -> f64| (0..values.len()).find(|i| values[*i] != named(*i));
    let by_begin = fits(&begins);
    let by_end = if whole(spans.lengths[0]) == 1.0 { fits(&ends) } else { Some(0) };
    if axis.numbers_columns() {
        return Ok(None);
    }
    if by_begin.is_none() {
        let long = spans.lengths[0] > 1.0;
        return Ok(long.then(|| {
            let message =
                format!("{first} is taken for the year in which its {} years begin", spans.lengths[0]);
            note("span-begins", Place::cells(&axis.at.sheet, at(0).range).called(&spans.from), message)
        }));
    }
    match (by_end, by_begin) {
        (Some(_), Some(i)) => refuse(
            i,
            format!("is {}, and by the years per column the period begins in {}", values[i], begins(i)),
            "label each column with the year in which it begins, or mend the years per column",
        ),
        _ => Ok(None),
    }
}

/// Reports what cannot follow periods of other lengths than a year.
pub(super) fn check(context: &mut Context, choice: &Choice, axis: &Axis) {
    let Some(spans) = &axis.spans else { return };
    let last = spans.lengths.last().copied().unwrap_or(1.0);
    let mut refuse = |place: Place, message: String, hint: &str| {
        context.report(Problem::error("span-role", place, message).hint(hint));
    };
    for stream in &choice.streams {
        if let Some(given) = stream.tail.as_ref().filter(|_| whole(last) != 1.0) {
            let at = given.at.as_ref();
            let place =
                at.map_or_else(Place::default, |at| Place::cells(&at.sheet, at.range)).called(&given.from);
            let message = format!(
                "a tail goes on from a flow of one year, and the last column is {last} years ({})",
                spans.from
            );
            refuse(
                place,
                message,
                "add a last column of one year, or let the columns run on instead of the tail",
            );
        }
    }
    if let Some(path) = &choice.welfare.consumption {
        let message = format!("consumption is by year, and the columns are not ({})", spans.from);
        refuse(
            Place::area(&path.at).called(&path.from),
            message,
            "leave hence_consumption out, or give years",
        );
    }
    if spans.lengths.iter().any(|length| *length > 1.0 + 1e-9) {
        for target in choice.targets.iter().filter(|target| target.role == TargetRole::Rates) {
            let message = "asks for yearly rates, and a column of several years may have several".to_owned();
            refuse(
                Place::area(&target.at).called(&target.from),
                message,
                "ask for factors (hence_factor) instead",
            );
        }
    }
}
