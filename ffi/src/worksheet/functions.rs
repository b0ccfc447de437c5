//! What each worksheet function does with its arguments.

use hence_core::{
    Curve, IRR_INTERVAL, Result, Where, annual_equivalent, elasticity_from_taxes, equity_weight,
    hazard_from_probability, hazard_from_waiting_time, internal_rates, marginal_utility,
    ramsey_rate_uncertain, real_rate, utility,
};

use super::arguments::{Arguments, Place, Year, number, text};
use super::curve::{basis, context, curve};
use super::fault::{Fault, Outcome};
use super::flows::{Clock, Streams, values, years_after};
use super::spread::spread;
use super::{Cell, CellError, Range, draws, evidence, explain, switching, welfare};
use crate::basis::CATALOGUE;

/// Runs the function of that name.
pub(super) fn run(name: &str, arguments: &Arguments<'_>) -> Outcome<Range<'static>> {
    match name {
        "FACTOR" => along(arguments, Curve::factor),
        "RATE" => along(arguments, Curve::forward_rate),
        "MEANRATE" => along(arguments, Curve::mean_rate),
        "INSTANT" => along(arguments, Curve::instantaneous_rate),
        "VALUE" => present_values(arguments),
        "ANNUAL" => annual(arguments),
        "IRR" => rates_of_return(arguments),
        "SWITCH" => switching::values(arguments),
        "MULTIPLIER" => switching::multiplier(arguments),
        "DRAWS" => draws::run(arguments),
        "RAMSEY" => spread(arguments, 4, |places| {
            let [rho, eta, g] = numbers(places)?;
            let sd = places[3].map_or(Ok(0.0), number)?;
            ramsey_rate_uncertain(rho, eta, g, sd).map_err(|e| about(&e))
        }),
        "ELASTICITY" => spread(arguments, 2, |places| {
            let [marginal, average] = numbers(places)?;
            elasticity_from_taxes(marginal, average).map_err(|e| about(&e))
        }),
        "BRACKETS" => evidence::brackets(arguments),
        "HAZARD" => evidence::hazard(arguments, hazard_from_probability),
        "WAITING" => evidence::hazard(arguments, hazard_from_waiting_time),
        "GROWTH" => evidence::growth(arguments),
        "UTILITY" => welfare::of_consumption(arguments, utility),
        "MARGINAL" => welfare::of_consumption(arguments, marginal_utility),
        "WELFARE" => welfare::path(arguments),
        "COMPENSATION" => welfare::shift(arguments),
        "EXACT" => welfare::exact(arguments),
        "EQUIVALENT" => welfare::equivalent(arguments),
        "WEIGHT" => spread(arguments, 3, |places| {
            let [income, reference, elasticity] = numbers(places)?;
            equity_weight(income, reference, elasticity).map_err(|e| about(&e))
        }),
        "REAL" => spread(arguments, 2, |places| {
            let [nominal, inflation] = numbers(places)?;
            real_rate(nominal, inflation).map_err(|e| about(&e))
        }),
        "SCHEDULE" => schedule(arguments),
        "EXPLAIN" => Ok(explain::run(arguments)),
        "WHY" => explain::why(arguments),
        _ => Err(Fault::value(format!("there is no function {name}"))),
    }
}

/// The first numbers of a call.
pub(super) fn numbers<const N: usize>(places: &[Option<Place<'_>>]) -> Outcome<[f64; N]> {
    let mut found = [0.0; N];
    for (number_found, place) in found.iter_mut().zip(places) {
        *number_found = number(place.expect("a required argument was looked for"))?;
    }
    Ok(found)
}

/// An error of the library about an argument that bears the same name here.
pub(super) fn about(error: &hence_core::Error) -> Fault {
    Fault::core(error, error.argument())
}

/// The curves of the cells of the basis argument, each made once however many offsets there are.
struct Curves<'a> {
    at: Where,
    made: Vec<Option<Outcome<Curve>>>,
    range: &'a Range<'a>,
}

impl<'a> Curves<'a> {
    fn new(arguments: &Arguments<'a>, base: usize, length: usize) -> Outcome<Self> {
        let range = arguments.required(0);
        let at = context(arguments, base, Some(length))?;
        Ok(Curves { at, made: vec![None; range.cells().len()], range })
    }

    fn get(&mut self, place: Place<'_>) -> Outcome<&Curve> {
        debug_assert!(std::ptr::eq(self.range.cells(), place.range.cells()));
        let made = self.made[place.index]
            .get_or_insert_with(|| basis(place).and_then(|basis| curve(&basis, &self.at, place)));
        made.as_ref().map_err(|fault| fault.clone())
    }
}

/// A number of the curve at each offset.
fn along(arguments: &Arguments<'_>, f: impl Fn(&Curve, f64) -> Result<f64>) -> Outcome<Range<'static>> {
    let mut curves = Curves::new(arguments, 2, 3)?;
    spread(arguments, 2, |places| {
        let [basis, offset] = [places[0], places[1]].map(|place| place.expect("a required argument"));
        let curve = curves.get(basis)?;
        f(curve, number(offset)?).map_err(|e| Fault::core(&e, &offset.words()))
    })
}

fn annual(arguments: &Arguments<'_>) -> Outcome<Range<'static>> {
    let mut curves = Curves::new(arguments, 3, 4)?;
    spread(arguments, 3, |places| {
        let [basis, value, years] =
            [places[0], places[1], places[2]].map(|place| place.expect("a required argument"));
        let curve = curves.get(basis)?;
        let (value, n) = (number(value)?, number(years)?);
        if n.fract() != 0.0 || !(1.0..=f64::from(u32::MAX)).contains(&n) {
            return Err(Fault::number(format!("{} is {n}, allowed are whole numbers from 1", years.words())));
        }
        annual_equivalent(curve, value, n as u32).map(|(annual, _)| annual).map_err(|e| about(&e))
    })
}

fn present_values(arguments: &Arguments<'_>) -> Outcome<Range<'static>> {
    let place = one_basis(arguments)?;
    let basis = basis(place)?;
    let streams = Streams::read(arguments, 1, 2)?;
    let clock = Clock::read(arguments, &streams.axis, basis.timing(), 3, 4)?;
    let factors = clock.factors(&basis, place, &streams.axis)?;
    Ok(values(arguments, &streams, &factors))
}

/// The basis argument of a function that takes one basis only.
pub(super) fn one_basis<'a>(arguments: &Arguments<'a>) -> Outcome<Place<'a>> {
    arguments.single(0)?.ok_or_else(|| Fault::value("the basis is left out"))
}

fn rates_of_return(arguments: &Arguments<'_>) -> Outcome<Range<'static>> {
    let streams = Streams::read(arguments, 0, 1)?;
    let flows = streams.only("flows")?;
    // Rates of return do not depend on the base.
    let first: Year = streams.axis.years[0].1;
    let offsets = streams.axis.years.iter().map(|(_, year)| years_after(first, *year));
    let offsets: Vec<f64> = offsets.collect::<Outcome<_>>()?;
    let interval = bounds(arguments, 2, IRR_INTERVAL)?;
    let found = internal_rates(&offsets, &flows, interval).map_err(|e| about(&e))?;
    rising(found.rates, &found.unresolved, "there is no rate of return")
}

/// The interval that two arguments state, or the usual one.
pub(super) fn bounds(arguments: &Arguments<'_>, first: usize, usual: (f64, f64)) -> Outcome<(f64, f64)> {
    let bound = |i, otherwise| arguments.single(i)?.map_or(Ok(otherwise), number);
    Ok((bound(first, usual.0)?, bound(first + 1, usual.1)?))
}

/// Values one below the other; `#NUM!` where there is none, and for each part of the interval in which the flows do not
/// settle how many there are.
pub(super) fn rising(values: Vec<f64>, unresolved: &[(f64, f64)], none: &str) -> Outcome<Range<'static>> {
    let mut cells: Vec<Cell<'static>> = values.into_iter().map(Cell::Number).collect();
    cells.extend(unresolved.iter().map(|_| Cell::Error(CellError::Number)));
    Range::new(cells.len(), 1, cells).ok_or_else(|| Fault::number(none))
}

fn schedule(arguments: &Arguments<'_>) -> Outcome<Range<'static>> {
    let place = arguments.single(0)?.ok_or_else(|| Fault::value("the id is left out"))?;
    let id = text(place)?;
    let line = CATALOGUE.get(id).map(hence_core::Schedule::line);
    match line {
        Some(line) => line.map(|line| Range::single(Cell::Text(line.into()))).map_err(|e| about(&e)),
        None => Err(Fault::value(format!("no schedule {id} is known"))),
    }
}
