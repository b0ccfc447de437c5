//! Offsets by a second route: from the analyst's year and base cells, in plain arithmetic.

use chrono::{Datelike, Months, NaiveDate};
use hence_core::{Position, Timing};

use super::rebuild::{base_year, constant};
use crate::appraisal::{Base, Choice, Label};
use crate::formulas::refer;

/// The position of a year's flow, averaged ones at the year's end.
fn position(position: Position) -> f64 {
    match position {
        Position::Start => 0.0,
        Position::Middle => 0.5,
        Position::End | Position::Averaged => 1.0,
    }
}

/// What timing adds to the years between a flow and the base; an averaged flow counts at its year's end.
pub(super) fn shift(timing: Timing) -> f64 {
    position(timing.flows) - position(timing.base)
}

/// The offset of a label: (year - base year) + position of flows - position of base; for dates whole
/// anniversaries plus days over the length of the part-year; a stated offset as it is.
pub(super) fn rebuilt(label: &Label, base: &Base, timing: Timing) -> f64 {
    let shift = shift(timing);
    let from = f64::from(base_year(base).unwrap_or(0));
    match label {
        Label::Year(y) | Label::Financial(y, _) => f64::from(*y) - from + shift,
        Label::Number(n) => f64::from(*n) + shift,
        Label::Offset(t) => *t,
        Label::Date(date) => match base {
            Base::Date(base) => anniversaries(*base, *date),
            _ => f64::from(date.year()) - from + shift,
        },
    }
}

/// Anniversaries of the earlier of the two dates, and days over the length of the part-year.
fn anniversaries(base: NaiveDate, date: NaiveDate) -> f64 {
    if date < base {
        return -anniversaries(date, base);
    }
    let mut years = date.year() - base.year();
    let at = |years: i32| base.checked_add_months(Months::new(12 * years.unsigned_abs())).unwrap_or(base);
    if at(years) > date {
        years -= 1;
    }
    let (start, end) = (at(years), at(years + 1));
    f64::from(years) + (date - start).num_days() as f64 / (end - start).num_days() as f64
}

/// The same as a formula over the cell `label_cell` (the analyst's label, pulled to this sheet) and the
/// base cell; constants stand in where a cell cannot be computed with.
pub(super) fn formula(
    label_cell: &str,
    label: &Label,
    choice: &Choice,
    timing: Timing,
    home: &str,
) -> String {
    let shift = shift(timing);
    let plus = if shift == 0.0 { String::new() } else { format!("+{}", constant(shift)) };
    let base_cell = choice.base.at.as_ref().map(|at| refer(home, at));
    let base = match (&choice.base.value, base_cell) {
        (Base::Year(_), Some(cell)) => cell,
        (Base::Date(_), Some(cell)) => format!("YEAR({cell})"),
        (base, _) => base_year(base).unwrap_or(0).to_string(),
    };
    match label {
        Label::Year(_) => format!("{label_cell}-{base}{plus}"),
        Label::Number(_) => format!("{label_cell}{plus}"),
        Label::Offset(_) => label_cell.to_owned(),
        Label::Financial(y, text) if text.starts_with(&y.to_string()) => {
            format!("VALUE(LEFT({label_cell},4))-{base}{plus}")
        }
        // The text is compared, so that the constant counts only while the label stands.
        Label::Financial(y, text) => {
            format!("IF({label_cell}=\"{}\",{y},NA())-{base}{plus}", text.replace('"', "\"\""))
        }
        Label::Date(date) => match (&choice.base.value, &choice.base.at) {
            (Base::Date(from), Some(at)) if date >= from => {
                let base = refer(home, at);
                let years = format!("DATEDIF({base},{label_cell},\"y\")");
                let start = format!("EDATE({base},12*{years})");
                let end = format!("EDATE({base},12*{years}+12)");
                format!("{years}+({label_cell}-{start})/({end}-{start})")
            }
            (Base::Date(_), _) => {
                let offset = rebuilt(label, &choice.base.value, timing);
                let day = format!("DATE({},{},{})", date.year(), date.month(), date.day());
                format!("IF({label_cell}={day},{},NA())", constant(offset))
            }
            _ => format!("YEAR({label_cell})-{base}{plus}"),
        },
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn offsets_follow_the_rule_of_positions() {
        // Design: t = (year - base year) + position of flows - position of base.
        let timing = Timing { flows: Position::Middle, base: Position::Start };
        assert_eq!(rebuilt(&Label::Year(2030), &Base::Year(2026), timing), 4.5);
        assert_eq!(rebuilt(&Label::Year(2026), &Base::Year(2026), Timing::default()), 0.0);
        assert_eq!(rebuilt(&Label::Offset(7.25), &Base::Zero, timing), 7.25);
    }

    #[test]
    fn dates_count_anniversaries_and_days() {
        let day = |y, m, d| NaiveDate::from_ymd_opt(y, m, d).unwrap();
        let offset = |a, b| rebuilt(&Label::Date(b), &Base::Date(a), Timing::default());
        assert_eq!(offset(day(2026, 4, 1), day(2028, 4, 1)), 2.0);
        // 92 of the 366 days from 1 April 2027 to 1 April 2028.
        assert_eq!(offset(day(2026, 4, 1), day(2027, 7, 2)), 1.0 + 92.0 / 366.0);
        assert_eq!(offset(day(2026, 4, 1), day(2025, 4, 1)), -1.0);
        // Before the base the earlier date's anniversaries count: 123 of the 366 days from 1 October 2023.
        assert_eq!(offset(day(2024, 2, 1), day(2023, 10, 1)), -123.0 / 366.0);
    }
}
