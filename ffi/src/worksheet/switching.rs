//! HENCE.SWITCH and HENCE.MULTIPLIER: where a net present value is zero, or two options swap.

use hence_core::{OptionFlows, Parameter, switching_multiplier, switching_values};

use super::Range;
use super::arguments::{Arguments, text};
use super::curve::basis;
use super::fault::{Fault, Outcome};
use super::flows::{Clock, Streams};
use super::functions::{about, bounds, numbers, one_basis, rising};
use super::spread::spread;

pub(super) fn values(arguments: &Arguments<'_>) -> Outcome<Range<'static>> {
    let basis = basis(one_basis(arguments)?)?;
    let parameter = parameter(arguments)?;
    let streams = Streams::read(arguments, 2, 3)?;
    let flows = streams.only("flows")?;
    let clock = Clock::read(arguments, &streams.axis, basis.timing(), 4, 5)?;
    let net = OptionFlows { offsets: &clock.offsets()?, flows: &flows, perpetual: &[] };
    let interval = bounds(arguments, 6, parameter.interval())?;
    let found =
        switching_values(&net, basis.spec(), &clock.at, parameter, interval).map_err(|e| about(&e))?;
    rising(found.values, &found.unresolved, "there is no such value")
}

fn parameter(arguments: &Arguments<'_>) -> Outcome<Parameter> {
    let place = arguments.single(1)?.ok_or_else(|| Fault::value("the parameter is left out"))?;
    let said = text(place)?;
    let found = Parameter::ALL.into_iter().find(|one| one.to_string().eq_ignore_ascii_case(said));
    found.ok_or_else(|| {
        let names = Parameter::ALL.map(|one| one.to_string()).join(", ");
        Fault::value(format!("{} is \"{said}\", allowed are {names}", place.words()))
    })
}

pub(super) fn multiplier(arguments: &Arguments<'_>) -> Outcome<Range<'static>> {
    spread(arguments, 2, |places| {
        let [net, stream] = numbers(places)?;
        let found = switching_multiplier(net, stream).map_err(|e| about(&e))?;
        found.ok_or_else(|| Fault::number("the stream adds nothing: no multiple of it changes the sign"))
    })
}
