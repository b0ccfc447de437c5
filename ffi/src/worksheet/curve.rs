//! The basis argument and its curve.

use chrono::Datelike;
use hence_core::{Basis, Curve, Where};

use super::Cell;
use super::arguments::{Arguments, Place, Year, is_blank, number, year};
use super::fault::{Fault, Outcome};
use crate::basis::CATALOGUE;

/// A basis: a rate line, the id of a schedule, or a rate as a number.
pub(super) fn basis(place: Place<'_>) -> Outcome<Basis> {
    let found = match place.cell() {
        Cell::Number(rate) => Basis::from_rate(*rate),
        Cell::Text(line) if !is_blank(place.cell()) => Basis::parse(line, &CATALOGUE),
        Cell::Error(error) => return Err(Fault::passed_on(*error, &place.words())),
        _ => {
            let words = format!("{} is blank or a logical value", place.words());
            return Err(Fault::value(words).hint("3.5%, or the id of a schedule such as uk-2003"));
        }
    };
    found.map_err(|e| Fault::core(&e, &place.words()))
}

/// The curve of a basis.
pub(super) fn curve(basis: &Basis, at: &Where, place: Place<'_>) -> Outcome<Curve> {
    basis.curve(at).map_err(|e| Fault::core(&e, &place.words()))
}

/// Base year and length as the arguments at these places state them.
pub(super) fn context(arguments: &Arguments<'_>, base: usize, length: Option<usize>) -> Outcome<Where> {
    let base_year = match arguments.single(base)? {
        None => None,
        Some(place) => Some(calendar_year(year(place)?).ok_or_else(|| {
            let words = format!("{} is a number below 1000", place.words());
            Fault::value(words).hint("the base year, such as 2026")
        })?),
    };
    let length = match length.map_or(Ok(None), |length| arguments.single(length))? {
        None => None,
        Some(place) => {
            let length = number(place)?;
            if length <= 0.0 {
                return Err(Fault::number(format!("{} is {length}, allowed above 0", place.words())));
            }
            Some(length)
        }
    };
    Ok(Where { base_year, length })
}

/// The calendar year of an entry; none for a year number.
pub(super) fn calendar_year(year: Year) -> Option<i32> {
    match year {
        Year::Calendar(year) | Year::Financial(year) => Some(year),
        Year::Date(date) => Some(date.year()),
        Year::Number(_) => None,
    }
}
