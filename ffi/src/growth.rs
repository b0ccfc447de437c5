//! Growth of consumption estimated from a series.

use hence_core::{Estimate, growth_from_consumption};

use crate::arguments;
use crate::error::{Failure, guard, hence_error};

/// What a series of consumption says of its growth, written into the caller's own struct. Every rate is a fraction per
/// year; standard errors bear the name of their figure.
#[repr(C)]
#[derive(Clone, Copy)]
pub struct hence_growth {
    /// In: sizeof(hence_growth), set by the caller.
    pub struct_size: u32,
    /// Out: 1 where the persistence is known, 0 where growth is the same every year.
    pub has_persistence: i32,
    /// Out: log growth along the straight line through ln c, by least squares.
    pub trend: f64,
    /// Out: its standard error.
    pub trend_error: f64,
    /// Out: the mean of yearly log growth, which depends on the first and the last value only.
    pub mean: f64,
    /// Out: its standard error.
    pub mean_error: f64,
    /// Out: growth along the trend, exp(trend) - 1.
    pub trend_growth: f64,
    /// Out: geometric mean growth, exp(mean) - 1.
    pub mean_growth: f64,
    /// Out: the standard deviation of yearly log growth.
    pub sd: f64,
    /// Out: its standard error.
    pub sd_error: f64,
    /// Out: the first-order autocorrelation of yearly log growth; 0 where it is not known.
    pub persistence: f64,
    /// Out: its standard error; 0 where it is not known.
    pub persistence_error: f64,
}

/// Doubles for each value that the estimate surely fits in: logarithms, steps and their distances, two doubles each.
const COPIES: usize = 8;

/// Estimates growth of consumption from a series: trend, mean, standard deviation and persistence.
///
/// In cells: HENCE.GROWTH.
///
/// Arguments: `consumption` (in, `n` doubles, a value a year, a head and in prices of one year, above 0, in any unit);
/// `years` (in, `n` int32_t, may be NULL), the calendar year of each value, which must follow on each other; `n` (in, at
/// least 4); `growth` (out, not NULL, with its struct_size set, may not overlap the inputs); `error` (out, may be NULL).
/// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_LENGTH, HENCE_ERR_OVERLAP; HENCE_ERR_RANGE for a
/// struct_size that is too small; HENCE_ERR_SHAPE for fewer than four values; HENCE_ERR_NOT_FINITE, HENCE_ERR_NO_MEANING for
/// a value of 0 or less, and HENCE_ERR_SYNTAX for a year that does not follow the one before it, each with the index.
/// Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_growth_estimate(
    consumption: *const f64,
    years: *const i32,
    n: usize,
    growth: *mut hence_growth,
    error: *mut hence_error,
) -> i32 {
    let body = || {
        arguments::length(n, 3)?;
        // SAFETY: the caller's contract for `consumption`.
        let series = unsafe { arguments::numbers(consumption, n, 1) }?;
        let years = match years.is_null() {
            true => None,
            // SAFETY: the caller's contract for `years`.
            false => Some(unsafe { arguments::slice(years, n, 2) }?),
        };
        arguments::output(growth, 1, 4)?;
        arguments::apart(series.as_ptr(), n, growth, 1, 4)?;
        if let Some(years) = years {
            arguments::apart(years.as_ptr(), n, growth, 1, 4)?;
        }
        // SAFETY: the caller's contract for `growth`.
        let struct_size = unsafe { arguments::sized(growth, 4) }?;
        drop(arguments::reserve::<[f64; COPIES]>(n, 3)?);
        let argument = |e: &hence_core::Error| if e.argument() == "years" { 2 } else { 1 };
        let found = growth_from_consumption(series, years).map_err(|e| Failure::core(&e, argument(&e)))?;
        let none = Estimate { value: 0.0, error: 0.0 };
        let persistence = found.persistence.unwrap_or(none);
        let estimate = hence_growth {
            struct_size,
            has_persistence: found.persistence.is_some().into(),
            trend: found.trend.value,
            trend_error: found.trend.error,
            mean: found.mean.value,
            mean_error: found.mean.error,
            trend_growth: found.trend_growth(),
            mean_growth: found.geometric_mean,
            sd: found.sd.value,
            sd_error: found.sd.error,
            persistence: persistence.value,
            persistence_error: persistence.error,
        };
        // SAFETY: not NULL, aligned, and as large as this struct (checked); writable by the caller's contract.
        unsafe { growth.write(estimate) };
        Ok(())
    };
    // SAFETY: the caller's contract for `error`.
    unsafe { guard(error, body) }
}
