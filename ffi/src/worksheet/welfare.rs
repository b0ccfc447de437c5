//! HENCE.UTILITY, HENCE.MARGINAL, HENCE.WELFARE, HENCE.COMPENSATION, HENCE.EXACT and HENCE.EQUIVALENT.

use hence_core::{Result, compensation, equally_distributed_equivalent, equivalent_variation, welfare};

use super::Range;
use super::arguments::{Arguments, Place, compounding, number};
use super::fault::{Fault, Outcome};
use super::flows::lists;
use super::functions::{about, numbers};
use super::spread::{cell, spread};

/// Utility, or its slope.
pub(super) fn of_consumption(
    arguments: &Arguments<'_>,
    f: impl Fn(f64, f64) -> Result<f64>,
) -> Outcome<Range<'static>> {
    spread(arguments, 2, |places| {
        let [consumption, elasticity] = numbers(places)?;
        f(consumption, elasticity).map_err(|e| about(&e))
    })
}

pub(super) fn path(arguments: &Arguments<'_>) -> Outcome<Range<'static>> {
    let [consumption, offsets] = lists(arguments, [0, 1], None)?;
    let (rho, elasticity) = (one(arguments, 2)?, one(arguments, 3)?);
    single(welfare(&consumption, &offsets, rho, elasticity, compounding(arguments, 4)?))
}

pub(super) fn shift(arguments: &Arguments<'_>) -> Outcome<Range<'static>> {
    let compounding = compounding(arguments, 6)?;
    spread(arguments, 6, |places| {
        let [amount, now, later, years, rho, elasticity] = numbers(places)?;
        compensation(amount, now, later, years, rho, elasticity, compounding).map_err(|e| about(&e))
    })
}

pub(super) fn exact(arguments: &Arguments<'_>) -> Outcome<Range<'static>> {
    let [flows, consumption, factors] = lists(arguments, [0, 1, 2], Some(0))?;
    let (base, elasticity) = (one(arguments, 3)?, one(arguments, 4)?);
    single(equivalent_variation(&flows, &consumption, &factors, base, elasticity))
}

pub(super) fn equivalent(arguments: &Arguments<'_>) -> Outcome<Range<'static>> {
    let [consumption, shares] = lists(arguments, [0, 1], None)?;
    single(equally_distributed_equivalent(&consumption, &shares, one(arguments, 2)?))
}

/// A required argument of one number.
fn one(arguments: &Arguments<'_>, i: usize) -> Outcome<f64> {
    let place: Place<'_> = arguments.single(i)?.ok_or_else(|| Fault::value("a number is left out"))?;
    number(place)
}

fn single(found: Result<f64>) -> Outcome<Range<'static>> {
    found.map(|number| Range::single(cell(Ok(number)))).map_err(|e| about(&e))
}
