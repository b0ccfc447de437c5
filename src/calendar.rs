//! Offsets from dates by named day counts, and financial years.

use std::fmt;
use std::str::FromStr;

use chrono::{Datelike, NaiveDate};

use crate::{Error, ErrorKind, Result};

/// The first and the last calendar year that is read as a year.
const YEARS: std::ops::RangeInclusive<i32> = 1000..=9999;

/// How the years between two dates are counted.
///
/// `Display` prints the names `anniversaries`, `actual/365`, `actual/actual ISDA` and `30E/360`; `FromStr` reads
/// them in any case and spacing, also with `act` for `actual`, and refuses others with [`ErrorKind::Syntax`].
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash)]
pub enum DayCount {
    /// Whole anniversaries of the base date, then actual days over the length of the last part-year: the default.
    #[default]
    Anniversary,
    /// Actual/365 (fixed): actual days over 365.
    Actual365,
    /// Actual/actual ISDA: days in leap years over 366, the other days over 365.
    ActualActualIsda,
    /// 30E/360: every month has 30 days, a 31st counts as the 30th.
    Thirty360E,
}

impl fmt::Display for DayCount {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            DayCount::Anniversary => "anniversaries",
            DayCount::Actual365 => "actual/365",
            DayCount::ActualActualIsda => "actual/actual ISDA",
            DayCount::Thirty360E => "30E/360",
        })
    }
}

impl FromStr for DayCount {
    type Err = Error;

    fn from_str(text: &str) -> Result<Self> {
        let plain: String = text.chars().filter(|c| !c.is_whitespace()).collect();
        match plain.to_ascii_lowercase().replace("actual", "act").as_str() {
            "anniversaries" => Ok(DayCount::Anniversary),
            "act/365" => Ok(DayCount::Actual365),
            "act/actisda" => Ok(DayCount::ActualActualIsda),
            "30e/360" => Ok(DayCount::Thirty360E),
            _ => {
                let message = format!(
                    "found \"{}\", allowed: anniversaries, actual/365, actual/actual ISDA, 30E/360",
                    text.trim()
                );
                Err(Error::new(ErrorKind::Syntax, "day_count", message).with_hint("anniversaries"))
            }
        }
    }
}

/// The offset in years of a date from the base date.
///
/// **Formula**, for a date on or after the base, n the actual days between the two:
/// - `anniversaries`: k + d/l, k the whole anniversaries of the base date gone by, d the days since the last of
///   them, l the days from it to the next. The anniversary of 29 February in a common year is 28 February.
/// - `actual/365`: n/365.
/// - `actual/actual ISDA`: days in leap years/366 + days in common years/365, the first date counted, the last
///   not.
/// - `30E/360`: (360 (y2 - y1) + 30 (m2 - m1) + min(d2, 30) - min(d1, 30))/360.
///
/// **Arguments**: `base` and `date`, years 1000 to 9999; `count`, the day count.
///
/// **Returns**: years; 0 at the base, negative before it. Every count is antisymmetric: the offset of a date
/// before the base is minus the offset of the base from that date, so with `anniversaries` it is the earlier
/// date's anniversaries that are counted.
///
/// **Accuracy**: one rounding (`anniversaries`: two).
///
/// **Errors**: `Date` for a year outside 1000 to 9999.
///
/// **Source**: ISDA, 2006 ISDA Definitions, section 4.16 (b), (d) and (g), for the three named counts;
/// `anniversaries` is hence's own default.
///
/// ```
/// use chrono::NaiveDate;
/// use hence_core::{DayCount, offset_of_dates};
/// let day = |y, m, d| NaiveDate::from_ymd_opt(y, m, d).unwrap();
/// let t = offset_of_dates(day(2026, 4, 1), day(2036, 4, 1), DayCount::Anniversary).unwrap();
/// assert_eq!(t, 10.0);
/// let t = offset_of_dates(day(2023, 11, 1), day(2024, 5, 1), DayCount::ActualActualIsda).unwrap();
/// assert!((t - (61.0 / 365.0 + 121.0 / 366.0)).abs() < 1e-15);
/// let error = offset_of_dates(day(2026, 4, 1), day(26, 4, 1), DayCount::Anniversary).unwrap_err();
/// assert_eq!(error.to_string(), "date: the year of 0026-04-01 is outside 1000 to 9999 (date)");
/// ```
pub fn offset_of_dates(base: NaiveDate, date: NaiveDate, count: DayCount) -> Result<f64> {
    for (argument, value) in [("base", base), ("date", date)] {
        if !YEARS.contains(&value.year()) {
            let message = format!("the year of {value} is outside 1000 to 9999");
            return Err(
                Error::new(ErrorKind::Date, argument, message).with_hint("write the year with 4 digits")
            );
        }
    }
    Ok(if date < base { -years_between(date, base, count) } else { years_between(base, date, count) })
}

fn years_between(first: NaiveDate, last: NaiveDate, count: DayCount) -> f64 {
    let days = |from: NaiveDate, to: NaiveDate| (to - from).num_days();
    match count {
        DayCount::Anniversary => {
            let mut whole = last.year() - first.year();
            if anniversary(first, whole) > last {
                whole -= 1;
            }
            let start = anniversary(first, whole);
            let length = days(start, anniversary(first, whole + 1));
            f64::from(whole) + days(start, last) as f64 / length as f64
        }
        DayCount::Actual365 => days(first, last) as f64 / 365.0,
        DayCount::ActualActualIsda => {
            // The day within the year over its length, on one denominator so that it rounds once.
            let length = |date: NaiveDate| if date.leap_year() { 366 } else { 365 };
            let (l1, l2) = (length(first), length(last));
            let (d1, d2) = (i64::from(first.ordinal0()), i64::from(last.ordinal0()));
            let whole = i64::from(last.year() - first.year());
            (whole * l1 * l2 + d2 * l1 - d1 * l2) as f64 / (l1 * l2) as f64
        }
        DayCount::Thirty360E => {
            let day = |date: NaiveDate| date.day().min(30) as i32;
            let months = 12 * (last.year() - first.year()) + last.month() as i32 - first.month() as i32;
            f64::from(30 * months + day(last) - day(first)) / 360.0
        }
    }
}

/// The k-th anniversary of a date; that of 29 February in a common year is 28 February.
fn anniversary(date: NaiveDate, k: i32) -> NaiveDate {
    let year = date.year() + k;
    date.with_year(year).or_else(|| NaiveDate::from_ymd_opt(year, 2, 28)).expect("years are at most 10000")
}

/// The years from the base year to a calendar year, before timing ([`crate::Timing::offset`]) is applied.
///
/// **Arguments**: `base_year`, `year`, calendar years (of a financial year, its first one), 1000 to 9999.
///
/// **Returns**: year - base year, exact; negative before the base.
///
/// **Errors**: `Date` for a year outside 1000 to 9999.
///
/// ```
/// assert_eq!(hence_core::years_after_base(2026, 2100).unwrap(), 74.0);
/// assert!(hence_core::years_after_base(26, 2100).is_err());
/// ```
pub fn years_after_base(base_year: i32, year: i32) -> Result<f64> {
    for (argument, value) in [("base_year", base_year), ("year", year)] {
        if !YEARS.contains(&value) {
            let message = format!("found the year {value}, allowed 1000 to 9999");
            return Err(
                Error::new(ErrorKind::Date, argument, message).with_hint("write the year with 4 digits")
            );
        }
    }
    Ok(f64::from(year - base_year))
}

/// The first calendar year of a financial year written as text.
///
/// **Arguments**: `text`, one of `2025/26`, `2025-26`, `2025/2026`, `2025-2026` (a dash may be an en dash), each
/// also after `FY`, or `FY26`, `FY2026`. Case and spacing do not matter.
///
/// **Returns**: the calendar year in which the financial year begins, 1000 to 9998.
///
/// **Conventions**: `FY26` and `FY2026` are the financial year that *ends* in 2026, so 2025/26 and the result
/// 2025 (common practice, no source). Two digits after `FY` are years 2000 to 2099. `2011-12` is read as the
/// financial year 2011/12, not as December 2011.
///
/// **Errors**: `Date` where the two years do not follow each other (`2025/27`, `2025-13`), where one year stands
/// alone (`2025`), where the first has two digits (`25/26`), or where the text is something else.
///
/// ```
/// use hence_core::parse_financial_year;
/// assert_eq!(parse_financial_year("2025/26").unwrap(), 2025);
/// assert_eq!(parse_financial_year("FY26").unwrap(), 2025);
/// let error = parse_financial_year("2025/27").unwrap_err();
/// assert_eq!(error.message(), "\"2025/27\" is no financial year: 2025 is followed by 2026");
/// assert_eq!(error.hint(), Some("2025/26"));
/// ```
pub fn parse_financial_year(text: &str) -> Result<i32> {
    let refuse = |why: String, hint: &str| {
        let message = format!("\"{}\" is no financial year: {why}", text.trim());
        Err(Error::new(ErrorKind::Date, "year", message).with_hint(hint))
    };
    let general = "2025/26, or FY26 for the year that ends in 2026";

    let plain: String = text.chars().filter(|c| !c.is_whitespace()).collect();
    let plain = plain.to_ascii_lowercase();
    let (fy, rest) = match plain.strip_prefix("fy") {
        Some(rest) => (true, rest),
        None => (false, plain.as_str()),
    };
    let number = |part: &str| match part.len() {
        2 | 4 if part.bytes().all(|b| b.is_ascii_digit()) => part.parse::<i32>().ok(),
        _ => None,
    };

    let Some((first, second)) = rest.split_once(['/', '-', '\u{2013}']) else {
        return match (fy, number(rest)) {
            (true, Some(year)) if rest.len() == 2 => Ok(1999 + year),
            (true, Some(year)) if year > *YEARS.start() => Ok(year - 1),
            (false, Some(year)) if rest.len() == 4 => {
                refuse("one year alone is a calendar year".into(), &format!("{year}/{:02}", (year + 1) % 100))
            }
            _ => refuse("expected two years, or FY and a year".into(), general),
        };
    };
    let (Some(start), Some(end)) = (number(first), number(second)) else {
        return refuse("expected a year of 4 digits and the next one, of 2 or 4".into(), general);
    };
    if first.len() != 4 {
        return refuse("its first year needs 4 digits".into(), general);
    }
    if !YEARS.contains(&start) || start == *YEARS.end() {
        return refuse("its years must be 1000 to 9999".into(), general);
    }
    let next = start + 1;
    if end != if second.len() == 2 { next % 100 } else { next } {
        return refuse(format!("{start} is followed by {next}"), &format!("{start}/{:02}", next % 100));
    }
    Ok(start)
}
