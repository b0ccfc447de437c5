//! Years and flows: streams, their offsets from the base, and their present values.

use hence_core::{Basis, DayCount, TimedOffset, Timing, Where, dot, offset_of_dates};

use super::arguments::{Arguments, Place, Year, flow, is_blank, number, text, year};
use super::curve::{calendar_year, curve};
use super::fault::{Fault, Outcome};
use super::{Cell, Range};

/// The years of the flows, each with the index of its cell; blank ones are left out.
pub(super) struct Axis {
    pub years: Vec<(usize, Year)>,
    /// As many cells as there are of years, blank ones counted.
    length: usize,
}

impl Axis {
    /// Reads one row or column of years.
    ///
    /// **Errors**: a block of cells; a cell that is no year; no year at all; years of different kinds.
    pub fn read(range: &Range<'_>, place: impl Fn(usize) -> Outcome<Option<Year>>) -> Outcome<Self> {
        if range.rows() > 1 && range.columns() > 1 {
            let (rows, columns) = (range.rows(), range.columns());
            let words =
                format!("years are {rows} rows by {columns} columns, allowed is one row or one column");
            return Err(Fault::value(words));
        }
        let length = range.cells().len();
        let mut years: Vec<(usize, Year)> = Vec::with_capacity(length);
        for index in 0..length {
            let Some(year) = place(index)? else { continue };
            if let Some((_, first)) = years.first()
                && first.kind() != year.kind()
            {
                return Err(Fault::value(format!("years hold {} beside {}", first.kind(), year.kind())));
            }
            years.push((index, year));
        }
        if years.is_empty() { Err(Fault::value("years are blank")) } else { Ok(Axis { years, length }) }
    }

    /// Reads the argument `i`.
    pub fn of(arguments: &Arguments<'_>, i: usize) -> Outcome<Self> {
        let range = arguments.required(i);
        Self::read(range, |index| {
            let place = arguments.place(i, range, index);
            if is_blank(place.cell()) { Ok(None) } else { year(place).map(Some) }
        })
    }

    /// The streams of a range of flows: the indices of their cells, and rows and columns of what they give.
    ///
    /// **Errors**: a range of another length or direction.
    fn streams(&self, years: &Range<'_>, flows: &Range<'_>) -> Outcome<(Vec<Vec<usize>>, usize, usize)> {
        let (rows, columns) = (flows.rows(), flows.columns());
        let down = |column: usize| (0..rows).map(|row| row * columns + column).collect();
        let across = |row: usize| (0..columns).map(|column| row * columns + column).collect();
        if years.rows() == 1 && columns == self.length {
            Ok(((0..rows).map(across).collect(), rows, 1))
        } else if years.columns() == 1 && rows == self.length {
            Ok(((0..columns).map(down).collect(), 1, columns))
        } else {
            let (along, cells) = if years.rows() == 1 { ("row", "columns") } else { ("column", "rows") };
            let length = self.length;
            let words =
                format!("years are one {along} of {length} {cells}, flows {rows} rows by {columns} columns");
            Err(Fault::value(words).hint("as many flows as years, in the same direction"))
        }
    }
}

/// The streams of the argument `flows` beside the years of the argument `years`.
pub(super) struct Streams {
    pub axis: Axis,
    /// One result a stream: its flows, as many as the axis has years, or what is wrong with them.
    pub flows: Vec<Outcome<Vec<f64>>>,
    pub rows: usize,
    pub columns: usize,
}

impl Streams {
    pub fn read(arguments: &Arguments<'_>, years: usize, flows: usize) -> Outcome<Self> {
        let axis = Axis::of(arguments, years)?;
        let range = arguments.required(flows);
        let (streams, rows, columns) = axis.streams(arguments.required(years), range)?;
        let read = |cells: Vec<usize>| {
            let mut valued = vec![false; cells.len()];
            let stream = axis.years.iter().map(|(index, _)| {
                valued[*index] = true;
                flow(arguments.place(flows, range, cells[*index]))
            });
            let stream: Outcome<Vec<f64>> = stream.collect();
            let stream = stream?;
            // A flow beside a blank year would be lost.
            for (cell, _) in cells.iter().zip(&valued).filter(|(_, valued)| !**valued) {
                let place = arguments.place(flows, range, *cell);
                if !is_blank(place.cell()) {
                    return Err(Fault::value(format!("{} has no year beside it", place.words())));
                }
            }
            Ok(stream)
        };
        let flows = streams.into_iter().map(read).collect();
        Ok(Streams { axis, flows, rows, columns })
    }

    /// The only stream, of the argument so called.
    pub fn only(&self, name: &str) -> Outcome<Vec<f64>> {
        match self.flows.as_slice() {
            [flows] => flows.clone(),
            all => Err(Fault::value(format!("{name} hold {} streams, allowed is one", all.len()))),
        }
    }
}

/// When the flows stand.
pub(super) struct Clock {
    pub timing: Timing,
    /// Years after the base, before timing.
    pub years: Vec<f64>,
    pub at: Where,
}

impl Clock {
    /// The argument `base` (or year number 0) and the timing in force: the argument `timing`, else the basis's own.
    pub fn read(
        arguments: &Arguments<'_>,
        axis: &Axis,
        own: Option<Timing>,
        base: usize,
        timing: usize,
    ) -> Outcome<Self> {
        let base = match arguments.single(base)? {
            None => Year::Number(0.0),
            Some(place) => year(place)?,
        };
        let stated = stated_timing(arguments, timing)?;
        let mut years = Vec::with_capacity(axis.years.len());
        for (_, year) in &axis.years {
            years.push(years_after(base, *year)?);
        }
        let dates = matches!(base, Year::Date(_));
        if dates && stated.is_some() {
            return Err(Fault::value(
                "timing does not apply to dates, which say themselves where a flow stands",
            )
            .hint("leave timing out"));
        }
        let timing = if dates { Timing::default() } else { stated.or(own).unwrap_or_default() };
        if timing != Timing::default() && years.iter().any(|year| year.fract() != 0.0) {
            return Err(Fault::value(format!(
                "years hold parts of years, to which the timing {timing} does not apply"
            ))
            .hint("whole years, or no timing"));
        }
        let mut clock = Clock { timing, years, at: Where { base_year: calendar_year(base), length: None } };
        clock.at.length = Some(clock.length());
        Ok(clock)
    }

    /// The largest offset; an averaged flow counts at its year's end.
    fn length(&self) -> f64 {
        let shift = |position: hence_core::Position| position.shift().unwrap_or(1.0);
        let shift = shift(self.timing.flows) - shift(self.timing.base);
        self.years.iter().map(|year| year + shift).fold(0.0, f64::max)
    }

    /// The offset of each year's flow.
    ///
    /// **Errors**: a timing that gives a flow two offsets.
    pub fn offsets(&self) -> Outcome<Vec<f64>> {
        let offset = |year: &f64| match self.timing.offset(*year) {
            Ok(TimedOffset::At(offset)) => Ok(offset),
            Ok(TimedOffset::Averaged(..)) => {
                let words = format!("the timing {} gives a flow two offsets", self.timing);
                Err(Fault::value(words).hint("flows middle"))
            }
            Err(error) => Err(Fault::core(&error, "timing")),
        };
        self.years.iter().map(offset).collect()
    }

    /// The factor of each year.
    pub fn factors(&self, basis: &Basis, place: Place<'_>, axis: &Axis) -> Outcome<Vec<f64>> {
        let curve = curve(basis, &self.at, place)?;
        let factor = |(year, (index, _)): (&f64, &(usize, Year))| {
            let place = format!("years, cell {}", index + 1);
            curve.timed_factor(*year, self.timing).map_err(|e| Fault::core(&e, &place))
        };
        self.years.iter().zip(&axis.years).map(factor).collect()
    }
}

/// The timing that the argument states.
pub(super) fn stated_timing(arguments: &Arguments<'_>, i: usize) -> Outcome<Option<Timing>> {
    let Some(place) = arguments.single(i)? else { return Ok(None) };
    text(place)?.parse().map(Some).map_err(|e| Fault::core(&e, &place.words()))
}

/// Years from the base to a year of the same kind; a year number counts from the base itself.
pub(super) fn years_after(base: Year, year: Year) -> Outcome<f64> {
    match (base, year) {
        (Year::Calendar(base), Year::Calendar(year)) | (Year::Financial(base), Year::Financial(year)) => {
            Ok(f64::from(year - base))
        }
        (Year::Date(base), Year::Date(date)) => {
            offset_of_dates(base, date, DayCount::Anniversary).map_err(|e| Fault::core(&e, "years"))
        }
        (Year::Number(base), Year::Number(year)) => Ok(year - base),
        (Year::Number(0.0), year) => {
            Err(Fault::value(format!("years hold {}, and there is no base", year.kind()))
                .hint("the base, such as 2026"))
        }
        (base, year) => {
            Err(Fault::value(format!("years hold {}, while the base is {}", year.kind(), base.kind()))
                .hint("the base in the same kind as the years"))
        }
    }
}

/// One row or column of numbers for each of the arguments, all of one shape. Blank cells of `flows` count as 0.
pub(super) fn lists<const N: usize>(
    arguments: &Arguments<'_>,
    places: [usize; N],
    flows: Option<usize>,
) -> Outcome<[Vec<f64>; N]> {
    let first = arguments.required(places[0]);
    let shape = |range: &Range<'_>| (range.rows(), range.columns());
    let mut lists = std::array::from_fn(|_| Vec::new());
    for (list, i) in lists.iter_mut().zip(places) {
        let range = arguments.required(i);
        let name = arguments.place(i, range, 0).name;
        let (rows, columns) = shape(range);
        if rows > 1 && columns > 1 {
            let words =
                format!("{name} are {rows} rows by {columns} columns, allowed is one row or one column");
            return Err(Fault::value(words));
        }
        if shape(range) != shape(first) {
            let other = arguments.place(places[0], first, 0).name;
            let words = format!("{name} are {rows} rows by {columns} columns, {other} are not");
            return Err(Fault::value(words).hint("as many cells in the same direction"));
        }
        let read = if flows == Some(i) { flow } else { number };
        let cells = (0..range.cells().len()).map(|index| read(arguments.place(i, range, index)));
        *list = cells.collect::<Outcome<_>>()?;
    }
    Ok(lists)
}

/// The present value of each stream.
pub(super) fn values(arguments: &Arguments<'_>, streams: &Streams, factors: &[f64]) -> Range<'static> {
    let value = |flows: &Outcome<Vec<f64>>| {
        arguments.note(flows.as_ref().map(|flows| dot(factors, flows)).map_err(Clone::clone))
    };
    let cells: Vec<Cell<'static>> =
        streams.flows.iter().map(|flows| super::spread::cell(value(flows))).collect();
    Range::new(streams.rows, streams.columns, cells).expect("one cell a stream")
}
