//! When the flows stand: years after the base, offsets under a timing, and both in words.

use chrono::{Datelike, NaiveDate};
use hence_core::{Curve, DayCount, Position, Timing, offset_of_dates};

use crate::appraisal::{Axis, Base, Label, Spans};
use crate::periods::{Periods, cumulated};
use crate::problem::{Place, Problem, Result};
use crate::valuation::{cell_of, from_core};

/// Years from the base year to each label, and whether timing still applies to them.
fn years_after_base(axis: &Axis, base: &Base) -> Result<(Vec<f64>, bool)> {
    let mut problems = Vec::new();
    let mut years = Vec::with_capacity(axis.labels.len());
    let mut timed = true;
    for (i, label) in axis.labels.iter().enumerate() {
        let place = || {
            let at = cell_of(&axis.at, i);
            Place::cells(&at.sheet, at.range)
        };
        let value = match (label, base) {
            (Label::Offset(t), _) => {
                timed = false;
                Ok(*t)
            }
            (Label::Number(n), _) => Ok(f64::from(*n)),
            (Label::Year(y), Base::Year(b)) => Ok(f64::from(y - b)),
            (Label::Financial(y, _), Base::Financial(b)) => Ok(f64::from(y - b)),
            (Label::Date(date), Base::Date(b)) => {
                timed = false;
                offset_of_dates(*b, *date, DayCount::Anniversary).map_err(|e| from_core(&e, place()))
            }
            _ => Err(Problem::error(
                "base-kind",
                place(),
                format!("the year is {}, while the base is {}", label_kind(label), base_kind(base)),
            )
            .hint("state the base in the same kind as the years")),
        };
        match value {
            Ok(value) => years.push(value),
            Err(problem) => {
                problems.push(problem);
                break;
            }
        }
    }
    if problems.is_empty() { Ok((years, timed)) } else { Err(problems.into()) }
}

/// What kind of entry a label is, in words.
pub(crate) fn label_kind(label: &Label) -> &'static str {
    match label {
        Label::Year(_) => "a calendar year",
        Label::Number(_) => "a year number",
        Label::Financial(..) => "a financial year",
        Label::Date(_) => "a date",
        Label::Offset(_) => "an offset",
    }
}

fn base_kind(base: &Base) -> &'static str {
    match base {
        Base::Year(_) => "a calendar year",
        Base::Financial(_) => "a financial year",
        Base::Date(_) => "a date",
        Base::Zero => "year number 0",
    }
}

/// The base in words.
pub fn base_words(base: &Base) -> String {
    match base {
        Base::Year(year) => year.to_string(),
        Base::Financial(year) => format!("{year}/{:02}", (year + 1).rem_euclid(100)),
        Base::Date(date) => date_words(*date),
        Base::Zero => "year 0".to_owned(),
    }
}

fn date_words(date: NaiveDate) -> String {
    const MONTHS: [&str; 12] = [
        "January",
        "February",
        "March",
        "April",
        "May",
        "June",
        "July",
        "August",
        "September",
        "October",
        "November",
        "December",
    ];
    format!("{} {} {}", date.day(), MONTHS[date.month0() as usize], date.year())
}

/// A label in words.
pub fn label_words(label: &Label) -> String {
    match label {
        Label::Year(year) => year.to_string(),
        Label::Number(n) => format!("year {n}"),
        Label::Financial(_, text) => text.trim().to_owned(),
        Label::Date(date) => date_words(*date),
        Label::Offset(t) => format!("offset {t}"),
    }
}

/// The calendar year of a base.
pub(crate) fn base_year(base: &Base) -> Option<i32> {
    match base {
        Base::Year(year) | Base::Financial(year) => Some(*year),
        Base::Date(date) => Some(date.year()),
        Base::Zero => None,
    }
}

/// The times in force.
pub(crate) struct Clock {
    /// Columns are not a year each: flows stand at `offsets`, whatever a year's timing would say.
    spanned: bool,
    /// Default where the timing does not apply.
    pub timing: Timing,
    /// Dates and offsets say themselves where a flow stands; a timing applies to all else.
    pub timed: bool,
    length: f64,
    /// Years after the base, such that a flow of a year that begins there has the offset of the timing.
    pub years: Vec<f64>,
    /// Offsets of the flows (their years' ends where averaged).
    pub offsets: Vec<f64>,
}

impl Clock {
    pub fn new(axis: &Axis, base: &Base, timing: Timing) -> Result<Self> {
        let (years, timed) = years_after_base(axis, base)?;
        let timing = if timed { timing } else { Timing::default() };
        if let (Some(spans), Some(periods)) = (&axis.spans, periods_of(axis, &years)) {
            if timing.flows == Position::Averaged {
                let place = Place::area(&spans.at).called(&spans.from);
                let message =
                    "columns that are not a year each are given, and averaged flows are means over a year";
                return Err(Problem::error("span-role", place, message)
                    .hint("state where flows stand in their periods: flows middle, or flows end")
                    .into());
            }
            let (flows, base) = (position(timing.flows), position(timing.base));
            let offset = |(i, length): (usize, &f64)| periods.offset(i, *length, flows, base);
            let offsets: Vec<f64> = spans.lengths.iter().enumerate().map(offset).collect();
            let last_years =
                offsets.iter().zip(&spans.lengths).map(|(t, s)| t + (1.0 - flows) * (s - 1.0).max(0.0));
            let length = last_years.fold(0.0, f64::max);
            let years = periods.starts.iter().map(|start| start + base * (1.0 - periods.base)).collect();
            return Ok(Clock { spanned: true, timing, timed, length, years, offsets });
        }
        let shift = shift_of(timing);
        let offsets: Vec<f64> = years.iter().map(|y| y + shift).collect();
        let length = offsets.iter().copied().fold(0.0, f64::max);
        Ok(Clock { spanned: false, timing, timed, length, years, offsets })
    }

    /// The factor of the i-th year.
    pub fn factor(&self, curve: &Curve, i: usize) -> hence_core::Result<f64> {
        if self.spanned {
            curve.factor(self.offsets[i])
        } else {
            curve.timed_factor(self.years[i], self.timing)
        }
    }

    /// The length of the appraisal: the largest offset, 0 where no flow stands after the base. A period of several years
    /// counts to where the flow of its last year would stand.
    pub fn length(&self) -> f64 {
        self.length
    }

    /// The offset of a year that is `years` after the base.
    pub fn offset(&self, years: f64) -> f64 {
        years + shift_of(self.timing)
    }

    /// The moments at which one unit in the year that has offset `t` stands, with their shares: an averaged flow
    /// stands half at each end of its year.
    pub fn moments(&self, t: f64) -> Vec<(f64, f64)> {
        match self.timing.flows {
            Position::Averaged => vec![(t - 1.0, 0.5), (t, 0.5)],
            _ => vec![(t, 1.0)],
        }
    }
}

/// Position of the flows less position of the base; an averaged flow counts at its year's end.
pub(crate) fn shift_of(timing: Timing) -> f64 {
    position(timing.flows) - position(timing.base)
}

fn position(position: Position) -> f64 {
    match position {
        Position::Start => 0.0,
        Position::Middle => 0.5,
        Position::End | Position::Averaged => 1.0,
    }
}

/// The periods of an axis, `years` being the years from the base to its labels; none where columns are a year each.
fn periods_of(axis: &Axis, years: &[f64]) -> Option<Periods> {
    Some(Periods::new(axis.spans.as_ref()?, axis.numbers_columns(), *years.first()?))
}

/// Years from the middle of the base period to the middle of each period; none where columns are a year each.
pub(crate) fn years_between_middles(axis: &Axis, base: &Base) -> Result<Option<Vec<f64>>> {
    let (years, _) = years_after_base(axis, base)?;
    let Some((periods, spans)) = periods_of(axis, &years).zip(axis.spans.as_ref()) else { return Ok(None) };
    let middle = |(i, length): (usize, &f64)| periods.offset(i, *length, 0.5, 0.5);
    Ok(Some(spans.lengths.iter().enumerate().map(middle).collect()))
}

/// How long the columns are: "periods of 0.083333 to 5 years".
fn span_words(spans: &Spans) -> String {
    let of = |fold: fn(f64, f64) -> f64| spans.lengths.iter().copied().reduce(fold).unwrap_or(1.0);
    let (short, long) = (rounded(of(f64::min)), rounded(of(f64::max)));
    if short == long {
        format!("periods of {short} years")
    } else {
        format!("periods of {short} to {long} years")
    }
}

/// A factor of each length that the first two columns do not have: ", the 5 years from 2028 have factor 0.7903".
fn blocks(axis: &Axis, spans: &Spans, factors: &[f64], words: &dyn Fn(&Label) -> String) -> String {
    let starts = cumulated(&spans.lengths);
    let new = |i: &usize| !spans.lengths[..*i].iter().any(|length| (length - spans.lengths[*i]).abs() < 1e-9);
    let shown = (2..factors.len()).filter(new).map(|i| {
        let (length, factor) = (spans.lengths[i], factors[i]);
        match &axis.labels[0] {
            // Labels may say where a block ends: it begins after the columns before it.
            Label::Year(first) if length > 1.0 && starts[i].fract() == 0.0 => {
                let from = f64::from(*first) + starts[i];
                format!(", the {} years from {from} have factor {factor:.4}", rounded(length))
            }
            _ => format!(", in {} ({}) {factor:.4}", words(&axis.labels[i]), years_long(length)),
        }
    });
    shown.collect()
}

/// A length of time without its rounding.
fn rounded(years: f64) -> f64 {
    (years * 1e6).round() / 1e6
}

fn years_long(length: f64) -> String {
    if length == 1.0 { "1 year".to_owned() } else { format!("{} years", rounded(length)) }
}

/// "a flow in 2026 has factor 1.0000, in 2027 0.9662".
pub(crate) fn sentence(axis: &Axis, clock: &Clock, factors: &[f64]) -> String {
    let words = |label: &Label| match label {
        Label::Number(n) if clock.spanned && axis.numbers_columns() => format!("period {n}"),
        label => label_words(label),
    };
    let mut text = format!("a flow in {} has factor {:.4}", words(&axis.labels[0]), factors[0]);
    if let (Some(label), Some(factor)) = (axis.labels.get(1), factors.get(1)) {
        text.push_str(&format!(", in {} {factor:.4}", words(label)));
    }
    if let Some(spans) = &axis.spans {
        text.push_str(&blocks(axis, spans, factors, &words));
        return format!("{}, in {}: {text}", clock.timing, span_words(spans));
    }
    if clock.timed { format!("{}: {text}", clock.timing) } else { text }
}
