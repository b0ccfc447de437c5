//! Offsets from years and from dates.

use libc::c_char;

use chrono::NaiveDate;
use hence_core::{DayCount, TimedOffset, Timing, offset_of_dates};

use crate::arguments;
use crate::error::{Failure, guard, hence_error};
use crate::status::{HENCE_ERR_SYNTAX, HENCE_ERR_UNSUPPORTED};

/// Offsets of flows from their years: (year - base) + position of the flows - position of the base, in years, the
/// positions being start 0, middle 1/2 and end 1.
///
/// Arguments: `years` (in, `n` doubles, borrowed; NULL only when `n` is 0): calendar years, first years of financial
/// years, or year numbers; `n` (in); `base` (in): the base year, counted alike; `timing` (in, NUL-ended UTF-8, borrowed):
/// "flows middle, base start" and so on, NULL for end and end; `offsets` (out, `n` doubles, may not overlap `years`);
/// `error` (out, may be NULL).
/// Returns HENCE_OK; HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_LENGTH, HENCE_ERR_OVERLAP, HENCE_ERR_UTF8;
/// HENCE_ERR_NOT_FINITE with the index; HENCE_ERR_SYNTAX, or HENCE_ERR_NO_MEANING for an averaged base, with the
/// character of `timing` as index; HENCE_ERR_UNSUPPORTED for averaged flows, which stand at two offsets: call with
/// "flows start" and "flows end", and take the mean of the two factors. Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_offsets_from_years(
    years: *const f64,
    n: usize,
    base: f64,
    timing: *const c_char,
    offsets: *mut f64,
    error: *mut hence_error,
) -> i32 {
    let body = || {
        // SAFETY: the caller's contract for `years`.
        let years = unsafe { arguments::numbers(years, n, 1) }?;
        arguments::finite(base, 3)?;
        let timing = match timing.is_null() {
            true => Timing::default(),
            // SAFETY: not NULL, and NUL-ended by the caller's contract.
            false => unsafe { arguments::text(timing, 4) }?.parse().map_err(|e| Failure::core(&e, 4))?,
        };
        arguments::output(offsets, n, 5)?;
        arguments::apart(years.as_ptr(), n, offsets, n, 5)?;
        let offset = |i: usize| match timing.offset(years[i] - base).map_err(|e| Failure::at(&e, 1, i))? {
            TimedOffset::At(t) => Ok(t),
            TimedOffset::Averaged(..) => Err(Failure::new(
                HENCE_ERR_UNSUPPORTED,
                4,
                "averaged flows stand at two offsets. Try: flows start and flows end, and the mean of the factors",
            )),
        };
        // SAFETY: `offsets` is checked, and holds `n` doubles by the caller's contract.
        unsafe { arguments::fill(offsets, n, 2, offset) }
    };
    // SAFETY: the caller's contract for `error`.
    unsafe { guard(error, body) }
}

/// Offsets of dates from the base date, in years.
///
/// Arguments: `dates` (in, `n` int32_t, borrowed; NULL only when `n` is 0): yyyymmdd, such as 20260401; `n` (in); `base`
/// (in): the base date, written alike; `day_count` (in, NUL-ended UTF-8, borrowed): "anniversaries" (whole anniversaries
/// of the base date and actual days over the length of the last part-year), "actual/365", "actual/actual ISDA" or
/// "30E/360", NULL for anniversaries; `offsets` (out, `n` doubles, may not overlap `dates`); `error` (out, may be NULL).
/// Returns HENCE_OK; HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_LENGTH, HENCE_ERR_OVERLAP, HENCE_ERR_UTF8;
/// HENCE_ERR_SYNTAX for what is no date of the years 1000 to 9999, with the index, or no day count. Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_offsets_from_dates(
    dates: *const i32,
    n: usize,
    base: i32,
    day_count: *const c_char,
    offsets: *mut f64,
    error: *mut hence_error,
) -> i32 {
    let body = || {
        // SAFETY: the caller's contract for `dates`.
        let dates = unsafe { arguments::slice(dates, n, 1) }?;
        let base = date(base).map_err(|message| Failure::new(HENCE_ERR_SYNTAX, 3, message))?;
        let count = match day_count.is_null() {
            true => DayCount::default(),
            // SAFETY: not NULL, and NUL-ended by the caller's contract.
            false => unsafe { arguments::text(day_count, 4) }?.parse().map_err(|e| Failure::core(&e, 4))?,
        };
        arguments::output(offsets, n, 5)?;
        arguments::apart(dates.as_ptr(), n, offsets, n, 5)?;
        let offset = |i: usize| {
            let date =
                date(dates[i]).map_err(|message| Failure::new(HENCE_ERR_SYNTAX, 1, message).with_index(i))?;
            offset_of_dates(base, date, count).map_err(|e| Failure::at(&e, 1, i))
        };
        // SAFETY: `offsets` is checked, and holds `n` doubles by the caller's contract.
        unsafe { arguments::fill(offsets, n, 2, offset) }
    };
    // SAFETY: the caller's contract for `error`.
    unsafe { guard(error, body) }
}

fn date(number: i32) -> Result<NaiveDate, String> {
    let (year, month, day) = (number / 10_000, number / 100 % 100, number % 100);
    let found =
        (1000..=9999).contains(&year).then(|| NaiveDate::from_ymd_opt(year, month as u32, day as u32));
    found.flatten().ok_or_else(|| format!("{number} is no date, allowed is yyyymmdd, such as 20260401"))
}

#[cfg(test)]
mod tests {
    use super::date;

    #[test]
    fn dates_are_whole_and_real() {
        assert_eq!(date(20240229).map(|d| d.to_string()), Ok("2024-02-29".to_owned()));
        for wrong in [0, -20260401, 20230229, 20261301, 20260400, 9991231, 100000101, i32::MIN, i32::MAX] {
            assert!(date(wrong).is_err(), "{wrong}");
        }
    }
}
