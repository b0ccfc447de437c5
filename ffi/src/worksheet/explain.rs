//! HENCE.EXPLAIN and HENCE.WHY: the basis in words, or what is wrong, since an error value in a cell carries no message.

use hence_core::{Basis, timing_sentence};

use super::arguments::{Arguments, Place, Year, text};
use super::curve::{basis, calendar_year, context, curve};
use super::fault::{Fault, Outcome};
use super::flows::{Axis, Clock, Streams, stated_timing};
use super::functions::{self, one_basis};
use super::{Cell, Function, Range};

/// Always a text.
pub(super) fn run(arguments: &Arguments<'_>) -> Range<'static> {
    let words = explained(arguments).unwrap_or_else(|fault| fault.told());
    Range::single(Cell::Text(words.into()))
}

/// What is wrong with a call of another function; always a text, which says so where nothing is.
pub(super) fn why(arguments: &Arguments<'_>) -> Outcome<Range<'static>> {
    let place = arguments.single(0)?.ok_or_else(|| Fault::value("the function is left out"))?;
    let name = text(place)?;
    let function = Function::find(name).filter(|function| function.name != "WHY");
    let function = function.ok_or_else(|| {
        Fault::value(format!("there is no function {name} to ask about")).hint("FACTOR, VALUE or DRAWS")
    })?;
    let asked = Arguments::new(function, arguments.rest());
    let answered = asked.and_then(|asked| Ok((functions::run(function.name, &asked)?, asked.noted())));
    let words = match answered {
        Err(fault) | Ok((_, Some(fault))) => fault.told(),
        Ok((answer, None)) => match answer.cells().iter().find_map(|cell| match cell {
            Cell::Error(error) => Some(error.text()),
            _ => None,
        }) {
            Some(error) => format!("{error} - the numbers do not settle what the answer is"),
            None => "nothing is wrong".to_owned(),
        },
    };
    Ok(Range::single(Cell::Text(words.into())))
}

fn explained(arguments: &Arguments<'_>) -> Outcome<String> {
    let place = one_basis(arguments)?;
    let basis = basis(place)?;
    let mut words = basis.words();
    let stated = stated_timing(arguments, 4)?;
    if let Some(timing) = stated.or(basis.timing()) {
        words.push_str(&format!("; {timing}"));
    }
    for warning in basis.warnings() {
        words.push_str(&format!(". Note: {warning}"));
    }
    match arguments.range(1) {
        Some(_) => words.push_str(&format!(". {}", timed(arguments, place, &basis)?)),
        // Curves by calendar year or by length are told apart from faulty ones: they are sound, but need more.
        None => match context(arguments, 3, None).map(|at| curve(&basis, &at, place)) {
            Ok(Ok(curve)) => {
                for warning in curve.warnings() {
                    words.push_str(&format!(". Note: {warning}"));
                }
            }
            Ok(Err(needs)) => words.push_str(&format!(". Needs more: {}", needs.words)),
            Err(fault) => return Err(fault),
        },
    }
    Ok(words)
}

/// The timing sentence of the years, after every check that HENCE.VALUE makes.
fn timed(arguments: &Arguments<'_>, place: Place<'_>, basis: &Basis) -> Outcome<String> {
    let axis = match arguments.range(2) {
        Some(_) => {
            let streams = Streams::read(arguments, 1, 2)?;
            for flows in &streams.flows {
                flows.as_ref().map_err(Clone::clone)?;
            }
            streams.axis
        }
        None => Axis::of(arguments, 1)?,
    };
    let clock = Clock::read(arguments, &axis, basis.timing(), 3, 4)?;
    let factors = clock.factors(basis, place, &axis)?;
    let labels: Vec<String> = axis.years.iter().map(|(_, year)| label(*year)).collect();
    let named: Vec<(&str, f64)> =
        labels.iter().map(String::as_str).zip(factors.iter().copied()).take(2).collect();
    Ok(format!("{}: {}", clock.timing, timing_sentence(&named)))
}

fn label(year: Year) -> String {
    match (year, calendar_year(year)) {
        (Year::Financial(year), _) => format!("{year}/{:02}", (year + 1).rem_euclid(100)),
        (Year::Date(date), _) => date.to_string(),
        (Year::Number(number), _) => format!("year {number}"),
        (_, year) => year.map_or_else(String::new, |year| year.to_string()),
    }
}
