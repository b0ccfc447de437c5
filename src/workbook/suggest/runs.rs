//! Runs of years: the row or column of a sheet that counts up by one.

use std::collections::BTreeMap;

use hence_core::parse_financial_year;

use crate::appraisal::Direction;
use crate::reading::Value;
use crate::references::{Cell, Range};
use crate::roles::key;

/// A run shorter than this is not taken for the years of an appraisal.
const SHORTEST: usize = 4;

/// A run of years.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Run {
    /// Its cells.
    pub range: Range,
    /// Which way it runs.
    pub direction: Direction,
    kind: Kind,
    from: i32,
    to: i32,
}

/// What counts up, from the least to the most likely.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
enum Kind {
    Numbers,
    Dates,
    Years,
    Financial,
}

impl Run {
    /// The row (or column) it stands in.
    pub(super) fn line(&self) -> u32 {
        self.turned(self.range.first).0
    }

    /// Where along it the first year is.
    pub(super) fn first(&self) -> u32 {
        self.turned(self.range.first).1
    }

    /// Where along it the last year is.
    pub(super) fn last(&self) -> u32 {
        self.turned(self.range.last).1
    }

    /// A cell as (line along the years, position on it).
    pub(super) fn turned(&self, cell: Cell) -> (u32, u32) {
        match self.direction {
            Direction::Across => (cell.row, cell.col),
            Direction::Down => (cell.col, cell.row),
        }
    }

    /// The cells of another line beside the years.
    pub(super) fn along(&self, line: u32) -> Range {
        let at = |position| match self.direction {
            Direction::Across => Cell { row: line, col: position },
            Direction::Down => Cell { row: position, col: line },
        };
        Range { first: at(self.first()), last: at(self.last()) }
    }

    /// Its first and last year.
    pub(super) fn years(&self) -> String {
        match self.kind {
            Kind::Financial => format!(
                "{}/{:02} to {}/{:02}",
                self.from,
                (self.from + 1) % 100,
                self.to,
                (self.to + 1) % 100
            ),
            Kind::Dates => format!("of {} dates", self.to - self.from + 1),
            Kind::Years | Kind::Numbers => format!("{} to {}", self.from, self.to),
        }
    }

    /// Why it was taken for the years.
    pub(super) fn why(&self) -> String {
        let what = match self.kind {
            Kind::Financial => "financial years",
            Kind::Years => "calendar years",
            Kind::Dates => "dates a year apart",
            Kind::Numbers => "year numbers",
        };
        format!("{} cells count up by one as {what}, {}", self.range.len(), self.years())
    }
}

/// The most likely run of years: calendar or financial years before dates and plain numbers, then the
/// longest, then the first.
pub(super) fn longest(cells: &BTreeMap<Cell, Value>) -> Option<Run> {
    let turned: BTreeMap<(u32, u32), &Value> =
        cells.iter().map(|(cell, value)| ((cell.col, cell.row), value)).collect();
    let across = cells.iter().map(|(cell, value)| ((cell.row, cell.col), value));
    let mut found = runs(across, Direction::Across);
    found.extend(runs(turned.into_iter(), Direction::Down));
    let rank = |run: &Run| (run.kind != Kind::Numbers, run.range.len(), run.kind);
    found.retain(|run| run.kind != Kind::Numbers || headed(cells, run));
    // The first of the best: `max_by_key` would take the last.
    found.into_iter().rev().max_by_key(rank)
}

/// Whether the cell before a run says that it counts years: any amounts may count up by one.
fn headed(cells: &BTreeMap<Cell, Value>, run: &Run) -> bool {
    let Cell { row, col } = run.range.first;
    let before = match run.direction {
        Direction::Across => col.checked_sub(1).map(|col| Cell { row, col }),
        Direction::Down => row.checked_sub(1).map(|row| Cell { row, col }),
    };
    let Some(Value::Text(text)) = before.and_then(|cell| cells.get(&cell)) else { return false };
    let heading = key(text);
    heading.split(' ').any(|word| matches!(word, "year" | "years" | "yr" | "period" | "time" | "t"))
}

fn runs<'v>(cells: impl Iterator<Item = ((u32, u32), &'v Value)>, direction: Direction) -> Vec<Run> {
    let mut found = Vec::new();
    let mut open: Vec<(u32, u32, Kind, i32)> = Vec::new();
    let mut close = |open: &mut Vec<(u32, u32, Kind, i32)>| {
        if open.len() >= SHORTEST {
            let ((line, first, kind, from), (_, last, _, to)) = (open[0], open[open.len() - 1]);
            let at = |position| match direction {
                Direction::Across => Cell { row: line, col: position },
                Direction::Down => Cell { row: position, col: line },
            };
            found.push(Run { range: Range { first: at(first), last: at(last) }, direction, kind, from, to });
        }
        open.clear();
    };
    for ((line, position), value) in cells {
        let Some((kind, year)) = year(value) else {
            close(&mut open);
            continue;
        };
        if let Some((last_line, last_position, last_kind, last_year)) = open.last().copied() {
            let next = line == last_line
                && position == last_position + 1
                && kind == last_kind
                && year == last_year + 1;
            if !next {
                close(&mut open);
            }
        }
        // Numbers count from 0 or 1; a run that begins at 7 is something else.
        if kind != Kind::Numbers || !open.is_empty() || year == 0 || year == 1 {
            open.push((line, position, kind, year));
        }
    }
    close(&mut open);
    found
}

/// What a cell counts as.
fn year(value: &Value) -> Option<(Kind, i32)> {
    match value {
        Value::Number(number) if number.fract() == 0.0 && (0.0..=9999.0).contains(number) => {
            let year = *number as i32; // whole and in range
            match year {
                1900..=2999 => Some((Kind::Years, year)),
                0..=999 => Some((Kind::Numbers, year)),
                _ => None,
            }
        }
        Value::Text(text) => parse_financial_year(text.trim()).ok().map(|year| (Kind::Financial, year)),
        // Dates a year apart fall into years 365.25 days long, whatever the day.
        Value::Date(serial) => Some((Kind::Dates, (serial / 365.25).floor() as i32)),
        _ => None,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn row(values: &[f64]) -> BTreeMap<Cell, Value> {
        (0..).zip(values).map(|(col, n)| (Cell { row: 2, col }, Value::Number(*n))).collect()
    }

    #[test]
    fn the_longest_run_of_calendar_years_wins() {
        let run = longest(&row(&[1.0, 2.0, 3.0, 4.0, 5.0, 2025.0, 2026.0, 2027.0, 2028.0])).unwrap();
        assert_eq!(run.range.to_string(), "F3:I3");
        assert_eq!(run.years(), "2025 to 2028");
        assert_eq!(longest(&row(&[7.0, 8.0, 9.0, 10.0])), None);
        assert_eq!(longest(&row(&[2025.0, 2026.0, 2027.0])), None);
    }
}
