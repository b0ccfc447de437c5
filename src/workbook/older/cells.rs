//! The cells of one sheet of another format as a sheet to be written.

use calamine::{Data, ExcelDateTime, Range};
use chrono::{NaiveDate, NaiveDateTime, NaiveTime};

use crate::problem::{Place, Problem, Result};
use crate::references::{Cell, Range as Cells};
use crate::writer::{Sheet, Style};

/// Rows of an .xlsx sheet.
const ROWS: u32 = 1 << 20;
/// Its columns.
const COLUMNS: u32 = 1 << 14;
/// Cells that are carried at most: more than the readers' limits let pass in any format of today.
const MOST: usize = 4_000_000;

/// What was met that has no counterpart.
#[derive(Debug, Default)]
pub(super) struct Counts {
    pub(super) formulas: usize,
    errors: usize,
    unread: usize,
    cells: usize,
}

impl Counts {
    pub(super) fn words(&self) -> Vec<String> {
        let mut words = Vec::new();
        let cells = |n: usize| if n == 1 { "1 cell".to_owned() } else { format!("{n} cells") };
        if self.formulas > 0 {
            words.push(format!(
                "formulas in {}: their last results stand there as plain values",
                cells(self.formulas)
            ));
        }
        if self.errors > 0 {
            words.push(format!(
                "error values in {}: their texts stand there (#DIV/0! and so on)",
                cells(self.errors)
            ));
        }
        if self.unread > 0 {
            words.push(format!("numbers that are not finite in {}: a text stands there", cells(self.unread)));
        }
        words
    }
}

/// The sheet with every cell that is not empty.
///
/// # Errors
/// A cell outside an .xlsx sheet, or more cells than are carried.
pub(super) fn sheet(name: &str, range: &Range<Data>, counts: &mut Counts) -> Result<Sheet> {
    let mut sheet = Sheet::new(name);
    let (top, left) = range.start().unwrap_or_default();
    for (row, col, data) in range.used_cells() {
        let cell = Cell { row: top + row as u32, col: left + col as u32 };
        let place = || Place::cells(name, Cells { first: cell, last: cell });
        if cell.row >= ROWS || cell.col >= COLUMNS {
            let message = "stands outside the 1,048,576 rows and 16,384 columns of an .xlsx sheet";
            return Err(Problem::error("sheet-size", place(), message).into());
        }
        counts.cells += 1;
        if counts.cells > MOST {
            let message = format!("is the cell after {MOST} others, the most that are read of this format");
            return Err(Problem::error("sheet-size", place(), message)
                .hint("save the workbook as .xlsx in a spreadsheet program")
                .into());
        }
        put(&mut sheet, cell, data, counts);
    }
    Ok(sheet)
}

fn put(sheet: &mut Sheet, cell: Cell, data: &Data, counts: &mut Counts) {
    let (row, col) = (cell.row, cell.col);
    match data {
        Data::Empty => {}
        Data::Int(n) => sheet.number(row, col, Style::Text, *n as f64),
        Data::Float(x) if x.is_finite() => sheet.number(row, col, Style::Text, *x),
        Data::Float(x) => {
            counts.unread += 1;
            sheet.text(row, col, Style::Text, x.to_string());
        }
        Data::String(text) => sheet.text(row, col, Style::Text, text),
        Data::Bool(truth) => sheet.logical(row, col, Style::Text, *truth),
        Data::DateTime(time) if time.is_duration() => sheet.number(row, col, Style::Text, time.as_f64()),
        Data::DateTime(time) => sheet.number(row, col, Style::Date, serial_of(*time)),
        Data::DateTimeIso(text) => match iso(text) {
            Some(serial) => sheet.number(row, col, Style::Date, serial),
            None => sheet.text(row, col, Style::Text, text),
        },
        Data::DurationIso(text) => sheet.text(row, col, Style::Text, text),
        Data::Error(error) => {
            counts.errors += 1;
            sheet.text(row, col, Style::Text, error.to_string());
        }
    }
}

/// The serial number that counts from 1900, also of a workbook that counts from 1904.
fn serial_of(time: ExcelDateTime) -> f64 {
    let (year, month, day, hour, minute, second, milli) = time.to_ymd_hms_milli();
    NaiveDate::from_ymd_opt(i32::from(year), u32::from(month), u32::from(day))
        .and_then(|date| {
            date.and_hms_milli_opt(u32::from(hour), u32::from(minute), u32::from(second), u32::from(milli))
        })
        .map_or_else(|| time.as_f64(), serial)
}

/// `2026-04-01` or `2026-04-01T12:00:00`.
fn iso(text: &str) -> Option<f64> {
    let date = || NaiveDate::parse_from_str(text, "%Y-%m-%d").ok().map(|date| date.and_time(NaiveTime::MIN));
    let time = || NaiveDateTime::parse_from_str(text, "%Y-%m-%dT%H:%M:%S%.f").ok();
    date().or_else(time).map(serial)
}

fn serial(time: NaiveDateTime) -> f64 {
    // Day 60 is a 29 February 1900 that never was; dates from March 1900 on count from 30 December 1899.
    let day_0 = NaiveDate::from_ymd_opt(1899, 12, 30).expect("a date").and_time(NaiveTime::MIN);
    let since = time - day_0;
    let days = since.num_days();
    let rest = (since - chrono::TimeDelta::days(days)).num_milliseconds() as f64 / 86_400_000.0;
    let days = days as f64 + rest;
    if days < 61.0 { days - 1.0 } else { days }
}

#[cfg(test)]
mod tests {
    use super::iso;

    #[test]
    fn dates_become_serial_numbers() {
        // As both hosts show them: 1 January 1900 is 1, 1 March 1900 is 61, 1 January 2026 is 46023.
        assert_eq!(iso("1900-01-01"), Some(1.0));
        assert_eq!(iso("1900-03-01"), Some(61.0));
        assert_eq!(iso("2026-01-01"), Some(46_023.0));
        assert_eq!(iso("2026-01-01T18:00:00"), Some(46_023.75));
        assert_eq!(iso("next year"), None);
    }
}
