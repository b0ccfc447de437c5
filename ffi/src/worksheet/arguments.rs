//! The argument rules: what a cell counts as, where a number, a text or a year is due.

use hence_core::{Compounding, parse_financial_year};

use std::cell::RefCell;

use chrono::{Days, NaiveDate};

use super::fault::{Fault, Outcome};
use super::{Cell, Function, Range};

/// The arguments of one call, by their place in the function's list.
pub(super) struct Arguments<'a> {
    function: &'static Function,
    given: &'a [Option<Range<'a>>],
    /// The first fault of a cell of the answer, which shows an error value alone.
    fault: RefCell<Option<Fault>>,
}

/// One cell of an argument, with its words for messages.
#[derive(Clone, Copy)]
pub(super) struct Place<'a> {
    pub name: &'static str,
    pub range: &'a Range<'a>,
    pub index: usize,
}

impl<'a> Place<'a> {
    pub fn cell(&self) -> &'a Cell<'a> {
        &self.range.cells()[self.index]
    }

    /// "years", or "years, row 3" where it is one of several.
    pub fn words(&self) -> String {
        let (row, column) = (self.index / self.range.columns() + 1, self.index % self.range.columns() + 1);
        match (self.range.rows(), self.range.columns()) {
            (1, 1) => self.name.to_owned(),
            (_, 1) => format!("{}, row {row}", self.name),
            (1, _) => format!("{}, column {column}", self.name),
            _ => format!("{}, row {row}, column {column}", self.name),
        }
    }
}

impl<'a> Arguments<'a> {
    /// **Errors**: more arguments than the function has, or a required one left out.
    pub fn new(function: &'static Function, given: &'a [Option<Range<'a>>]) -> Outcome<Self> {
        let most = function.arguments.len();
        if let Some(beyond) = given.get(most..).and_then(|rest| rest.iter().flatten().next()) {
            let cells = beyond.cells().len();
            return Err(Fault::value(format!(
                "{} takes at most {most} arguments, found another one of {cells} cells",
                function.full_name()
            )));
        }
        let arguments = Arguments { function, given, fault: RefCell::new(None) };
        for i in 0..function.required() {
            if arguments.range(i).is_none() {
                let name = function.arguments[i].name;
                return Err(Fault::value(format!("{} needs the argument {name}", function.full_name())));
            }
        }
        Ok(arguments)
    }

    /// Those from the second one on, as they were given.
    pub fn rest(&self) -> &'a [Option<Range<'a>>] {
        self.given.get(1..).unwrap_or_default()
    }

    /// Keeps what is wrong with a cell of the answer, the first only.
    pub fn note<T>(&self, result: Outcome<T>) -> Outcome<T> {
        if let Err(fault) = &result {
            self.fault.borrow_mut().get_or_insert_with(|| fault.clone());
        }
        result
    }

    /// What was kept.
    pub fn noted(&self) -> Option<Fault> {
        self.fault.borrow().clone()
    }

    /// An argument, if it is given. A single blank cell counts as an optional argument left out.
    pub fn range(&self, i: usize) -> Option<&'a Range<'a>> {
        let range = self.given.get(i)?.as_ref()?;
        let left_out = self.function.arguments[i].optional && range.cells().iter().all(is_blank);
        (!left_out).then_some(range)
    }

    /// A cell of an argument that is given.
    pub fn place(&self, i: usize, range: &'a Range<'a>, index: usize) -> Place<'a> {
        Place { name: self.function.arguments[i].name, range, index }
    }

    /// An optional argument of one cell.
    pub fn single(&self, i: usize) -> Outcome<Option<Place<'a>>> {
        let Some(range) = self.range(i) else { return Ok(None) };
        let name = self.function.arguments[i].name;
        match range.cells().len() {
            1 => Ok(Some(self.place(i, range, 0))),
            cells => Err(Fault::value(format!("{name} has {cells} cells, allowed is one"))),
        }
    }

    /// A required argument that must be there by now.
    pub fn required(&self, i: usize) -> &'a Range<'a> {
        self.range(i).expect("a required argument was looked for")
    }
}

/// A blank cell, which some hosts hand over as an empty text.
pub(super) fn is_blank(cell: &Cell<'_>) -> bool {
    match cell {
        Cell::Blank => true,
        Cell::Text(text) => text.trim().is_empty(),
        _ => false,
    }
}

/// A number: a text is an error, never 0, and so is a logical value or a blank cell.
pub(super) fn number(place: Place<'_>) -> Outcome<f64> {
    let found = match place.cell() {
        Cell::Number(number) if number.is_finite() => return Ok(*number),
        Cell::Number(number) => {
            return Err(Fault::number(format!("{} is {number}, not a finite number", place.words())));
        }
        Cell::Error(error) => return Err(Fault::passed_on(*error, &place.words())),
        cell if is_blank(cell) => "a blank cell".to_owned(),
        Cell::Text(text) => format!("the text \"{}\"", shortened(text)),
        Cell::Logical(value) => value.to_string().to_uppercase(),
        Cell::Blank => unreachable!("blank cells are told above"),
    };
    Err(Fault::value(format!("{}: found {found}, allowed is a number", place.words())))
}

/// A flow: as [`number`], but a blank cell is 0.
pub(super) fn flow(place: Place<'_>) -> Outcome<f64> {
    if is_blank(place.cell()) { Ok(0.0) } else { number(place) }
}

/// A text, trimmed.
pub(super) fn text<'a>(place: Place<'a>) -> Outcome<&'a str> {
    match place.cell() {
        cell if is_blank(cell) => {
            Err(Fault::value(format!("{}: found a blank cell, allowed is a text", place.words())))
        }
        Cell::Text(text) => Ok(text.trim()),
        Cell::Error(error) => Err(Fault::passed_on(*error, &place.words())),
        Cell::Number(number) => {
            Err(Fault::value(format!("{}: found {number}, allowed is a text", place.words())))
        }
        _ => Err(Fault::value(format!("{}: found a logical value, allowed is a text", place.words()))),
    }
}

/// A whole number from `least` to `most`.
pub(super) fn whole(place: Place<'_>, least: u64, most: u64) -> Outcome<u64> {
    let found = number(place)?;
    if found.fract() == 0.0 && (least as f64..=most as f64).contains(&found) {
        return Ok(found as u64);
    }
    let words = place.words();
    Err(Fault::number(format!("{words} is {found}, allowed are whole numbers from {least} to {most}")))
}

/// The compounding that an argument states; yearly where it is left out.
pub(super) fn compounding(arguments: &Arguments<'_>, i: usize) -> Outcome<Compounding> {
    let Some(place) = arguments.single(i)? else { return Ok(Compounding::Yearly) };
    match text(place)?.to_lowercase().as_str() {
        "yearly" => Ok(Compounding::Yearly),
        "continuous" => Ok(Compounding::Continuous),
        other => {
            let words = format!("{}: found the text \"{}\"", place.words(), shortened(other));
            Err(Fault::value(words).hint("yearly or continuous"))
        }
    }
}

/// An entry among years, or a base.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Year {
    /// A whole number from 1000 to 9999.
    Calendar(i32),
    /// The first calendar year of a financial year.
    Financial(i32),
    /// A number of 10,000 or more, as spreadsheets count days.
    Date(NaiveDate),
    /// A number below 1000: years after the base.
    Number(f64),
}

impl Year {
    /// Its kind in words.
    pub fn kind(self) -> &'static str {
        match self {
            Year::Calendar(_) => "a calendar year",
            Year::Financial(_) => "a financial year",
            Year::Date(_) => "a date",
            Year::Number(_) => "a year number",
        }
    }
}

/// The day that both hosts number 0, by their count from 1 March 1900 on.
const DAY_ZERO: NaiveDate = NaiveDate::from_ymd_opt(1899, 12, 30).expect("a date");

/// The first number that is a date: from 18 May 1927 on, so that no year is taken for one.
const FIRST_DATE: f64 = 10_000.0;

/// Reads a calendar year, a financial year, a date or a year number.
pub(super) fn year(place: Place<'_>) -> Outcome<Year> {
    if let Cell::Text(written) = place.cell()
        && !is_blank(place.cell())
    {
        let financial = parse_financial_year(written).map_err(|e| Fault::core(&e, &place.words()))?;
        return Ok(Year::Financial(financial));
    }
    let found = number(place)?;
    if found < 1000.0 {
        Ok(Year::Number(found))
    } else if found >= FIRST_DATE {
        let date = DAY_ZERO.checked_add_days(Days::new(found as u64));
        let date = date.filter(|date| chrono::Datelike::year(date) <= 9999);
        date.map(Year::Date).ok_or_else(|| {
            Fault::number(format!("{}: {found} is beyond the last date of a spreadsheet", place.words()))
        })
    } else if found.fract() == 0.0 {
        Ok(Year::Calendar(found as i32))
    } else {
        let words = format!("{}: found {found}, allowed are whole years", place.words());
        Err(Fault::value(words).hint("a date, or offsets from the base below 1000"))
    }
}

fn shortened(text: &str) -> String {
    const MOST: usize = 40;
    if text.chars().count() <= MOST {
        return text.to_owned();
    }
    text.chars().take(MOST).chain("...".chars()).collect()
}
