//! HENCE.DRAWS: net present values under an uncertain rate.

use std::num::NonZeroUsize;

use hence_core::{Distribution, Draws, OptionFlows, Quantity, RateDistribution, draw_values};

use super::arguments::{Arguments, is_blank, number, text, whole};
use super::fault::Outcome;
use super::flows::{Clock, Streams};
use super::functions::about;
use super::spread::cell;
use super::{Cell, Range};

/// The most draws in a cell, so that a slip of the pen does not fill the host's memory.
const MOST: u64 = 1_000_000;

/// The largest whole number that a cell holds exactly.
const LARGEST: u64 = 1 << 53;

pub(super) fn run(arguments: &Arguments<'_>) -> Outcome<Range<'static>> {
    let rate = RateDistribution::new([
        distribution(arguments, 0, Quantity::Preference)?,
        distribution(arguments, 7, Quantity::Hazard)?,
        distribution(arguments, 1, Quantity::Elasticity)?,
        distribution(arguments, 2, Quantity::Growth)?,
    ]);
    let rate = rate.map_err(|e| about(&e))?;
    let streams = Streams::read(arguments, 3, 4)?;
    let offsets = Clock::read(arguments, &streams.axis, None, 5, 6)?.offsets()?;
    let flows = streams.flows.iter().cloned().collect::<Outcome<Vec<_>>>()?;
    let options: Vec<OptionFlows> =
        flows.iter().map(|flows| OptionFlows { offsets: &offsets, flows, perpetual: &[] }).collect();
    let percentiles = percentiles(arguments, 8)?;
    let counted = |i, least, most, otherwise| {
        arguments.single(i)?.map_or(Ok(otherwise), |place| whole(place, least, most))
    };
    let threads = NonZeroUsize::MIN;
    let draws =
        Draws { count: counted(9, 1, MOST, 10_000)? as usize, seed: counted(10, 0, LARGEST, 1)?, threads };
    let drawn = draw_values(&rate, &options, &draws).map_err(|e| about(&e))?;
    let summary = drawn.summary(&percentiles, threads).map_err(|e| about(&e))?;
    let each: Vec<Vec<Cell<'static>>> = (summary.values.iter().zip(&summary.first))
        .map(|(value, first)| {
            let numbers = [value.mean, value.sd, value.positive.share, first.alone.share];
            numbers.iter().chain(&value.percentiles).map(|number| cell(Ok(*number))).collect()
        })
        .collect();
    let years_run_down = arguments.required(3).rows() > 1;
    Ok(beside(&each, years_run_down))
}

/// A row for each stream, or a column where the years run down.
fn beside(each: &[Vec<Cell<'static>>], down: bool) -> Range<'static> {
    let (streams, figures) = (each.len(), each[0].len());
    let cells = |across: usize, along: usize| if down { &each[along][across] } else { &each[across][along] };
    let (rows, columns) = if down { (figures, streams) } else { (streams, figures) };
    let all = (0..rows).flat_map(|row| (0..columns).map(move |column| cells(row, column).clone()));
    Range::new(rows, columns, all.collect()).expect("a cell for each figure of each stream")
}

/// A distribution: a text, or a number for a fixed value; 0 where an optional one is left out.
fn distribution(arguments: &Arguments<'_>, i: usize, quantity: Quantity) -> Outcome<Distribution> {
    let Some(place) = arguments.single(i)? else { return Ok(Distribution::Fixed(0.0)) };
    match place.cell() {
        Cell::Text(_) if !is_blank(place.cell()) => {
            Distribution::parse(quantity, text(place)?).map_err(|e| about(&e))
        }
        _ => number(place).map(Distribution::Fixed),
    }
}

/// The percentiles asked for, or those that the command line prints.
fn percentiles(arguments: &Arguments<'_>, i: usize) -> Outcome<Vec<f64>> {
    let Some(range) = arguments.range(i) else { return Ok(vec![5.0, 25.0, 50.0, 75.0, 95.0]) };
    (0..range.cells().len()).map(|index| number(arguments.place(i, range, index))).collect()
}
