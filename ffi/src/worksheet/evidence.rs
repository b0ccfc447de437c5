//! HENCE.BRACKETS, HENCE.HAZARD, HENCE.WAITING and HENCE.GROWTH: where the parts of a rate come from.

use hence_core::{
    Compounding, Estimate, Result, TaxBracket, elasticity_from_tax_brackets, growth_from_consumption,
};

use super::arguments::{Arguments, Year, compounding};
use super::curve::calendar_year;
use super::fault::{Fault, Outcome};
use super::flows::{Axis, Streams, lists};
use super::functions::{about, numbers};
use super::spread::{cell, spread};
use super::{Cell, Range};

pub(super) fn brackets(arguments: &Arguments<'_>) -> Outcome<Range<'static>> {
    let [marginal, average, weights] = lists(arguments, [0, 1, 2], None)?;
    let brackets = marginal.into_iter().zip(average).zip(weights);
    let brackets: Vec<TaxBracket> =
        brackets.map(|((marginal, average), weight)| TaxBracket { marginal, average, weight }).collect();
    let found = elasticity_from_tax_brackets(&brackets).map_err(|e| about(&e))?;
    Ok(Range::single(cell(Ok(found))))
}

/// The hazard of a chance or a waiting time.
pub(super) fn hazard(
    arguments: &Arguments<'_>,
    f: impl Fn(f64, Compounding) -> Result<f64>,
) -> Outcome<Range<'static>> {
    let compounding = compounding(arguments, 1)?;
    spread(arguments, 1, |places| {
        let [of] = numbers(places)?;
        f(of, compounding).map_err(|e| about(&e))
    })
}

/// Six rows of a figure and its standard error; what is not known stays empty.
pub(super) fn growth(arguments: &Arguments<'_>) -> Outcome<Range<'static>> {
    let found = match arguments.range(1) {
        None => {
            let [series] = lists(arguments, [0], None)?;
            growth_from_consumption(&series, None)
        }
        Some(_) => {
            let streams = Streams::read(arguments, 1, 0)?;
            growth_from_consumption(&streams.only("consumption")?, Some(&calendar_years(&streams.axis)?))
        }
    };
    let found = found.map_err(|e| about(&e))?;
    let empty = || Cell::Text("".into());
    let figure = |number: f64| [cell(Ok(number)), empty()];
    let estimate = |found: Estimate| [cell(Ok(found.value)), cell(Ok(found.error))];
    let rows = [
        figure(found.trend_growth()),
        figure(found.geometric_mean),
        estimate(found.trend),
        estimate(found.mean),
        estimate(found.sd),
        found.persistence.map_or_else(|| [empty(), empty()], estimate),
    ];
    Ok(Range::new(rows.len(), 2, rows.into_iter().flatten().collect()).expect("two cells a row"))
}

/// The years of a series, which may be numbered from any year.
fn calendar_years(axis: &Axis) -> Outcome<Vec<i32>> {
    let year = |(_, year): &(usize, Year)| match (*year, calendar_year(*year)) {
        (_, Some(year)) => Ok(year),
        (Year::Number(number), None) if number.fract() == 0.0 && number.abs() < 1000.0 => Ok(number as i32),
        _ => Err(Fault::value("years hold parts of years").hint("whole years, one for each value")),
    };
    axis.years.iter().map(year).collect()
}
