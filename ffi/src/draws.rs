//! An uncertain discount rate: seeded draws of it, and what the values under them say.

use std::num::NonZeroUsize;

use libc::c_char;

use hence_core::{
    Distribution, Draws, OptionFlows, Quantity, RateDistribution, draw_values, first_places, spread,
};

use crate::arguments;
use crate::error::{Failure, guard, hence_error, named};
use crate::status::HENCE_ERR_RANGE;

/// How values, one a draw, are spread, written into the caller's own struct.
#[repr(C)]
#[derive(Clone, Copy)]
pub struct hence_spread {
    /// In: sizeof(hence_spread), set by the caller.
    pub struct_size: u32,
    /// Out: their mean.
    pub mean: f64,
    /// Out: the mean's standard error.
    pub mean_error: f64,
    /// Out: their standard deviation; 0 of a single value.
    pub sd: f64,
    /// Out: the least.
    pub lowest: f64,
    /// Out: the greatest.
    pub highest: f64,
    /// Out: the share of values above 0, which is how probable such a value is.
    pub positive: f64,
    /// Out: the standard error of that share.
    pub positive_error: f64,
}

/// Doubles that the library holds for each draw (its parts and rate) beside the values.
const PARTS: usize = 5;

/// Doubles for each flow that the work on draws surely fits in where flows stand at whole years.
const COPIES: usize = 8;

/// The distribution that a text states; a hazard left out is none.
///
/// # Safety
/// `text` is NULL or NUL-ended.
unsafe fn distribution(text: *const c_char, quantity: Quantity) -> Result<Distribution, Failure> {
    if text.is_null() && quantity == Quantity::Hazard {
        return Ok(Distribution::Fixed(0.0));
    }
    let argument = quantity as i32 + 1;
    // SAFETY: the caller's contract, passed on.
    let text = unsafe { arguments::text(text, argument) }?;
    Distribution::parse(quantity, text).map_err(|e| Failure::core(&e, argument))
}

/// Net present values of options under seeded draws of the discount rate: in each draw one flat yearly rate, preference +
/// hazard + elasticity x growth, each part drawn from its own distribution.
///
/// The same seed gives the same draws, to the last bit, on every platform and for any number of threads; draw k does not
/// depend on how many are made.
///
/// In cells: HENCE.DRAWS.
///
/// Arguments: `preference`, `hazard`, `elasticity`, `growth` (in, NUL-ended UTF-8, borrowed, not NULL but for `hazard`, where
/// NULL is none): a value ("1%", of the elasticity "1.5", of the hazard also "every 100 years"), "normal mean 1% sd 0.3%", the
/// same with "within 0% to 2%", "uniform 1% to 3%", "triangular 1%, 1.5%, 2%" or "0.3 at 1%, 0.7 at 2%"; `offsets` (in, `n`
/// doubles, years from the base, -10,000 to 10,000); `flows` (in, `rows` x `n` doubles, net, row by row: the option i begins
/// at number i x n); `rows` (in, at least 1); `n` (in; 0 makes every value 0); `count` (in), how many draws, 1 to 10,000,000;
/// `seed` (in); `threads` (in, at least 1) that share the work; `rates` (out, `count` doubles, or NULL where they are not
/// wanted), the rate of each draw; `values` (out, `rows` x `count` doubles, row by row: the draws of option i begin at number
/// i x count); outputs may overlap no other argument; `error` (out, may be NULL).
/// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_LENGTH, HENCE_ERR_OVERLAP; HENCE_ERR_UTF8 with the byte
/// and HENCE_ERR_SYNTAX with the character as index; HENCE_ERR_NOT_FINITE, HENCE_ERR_DOMAIN with the index of the offset or
/// flow; HENCE_ERR_SHAPE without options or for another number of draws; HENCE_ERR_RANGE for a distribution, and for no
/// threads; HENCE_ERR_NO_MEANING for bounds that keep less than 1% of a normal distribution. Where draws fall outside what a
/// rate line may state, HENCE_ERR_RANGE is about their distribution (or, where only the rate falls outside -50% to 100%,
/// about no argument) with the first such draw as index: draws are never left out quietly. A value too large is
/// HENCE_ERR_NOT_FINITE about no argument, with the draw as index. Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_draws_value(
    preference: *const c_char,
    hazard: *const c_char,
    elasticity: *const c_char,
    growth: *const c_char,
    offsets: *const f64,
    flows: *const f64,
    rows: usize,
    n: usize,
    count: usize,
    seed: u64,
    threads: u32,
    rates: *mut f64,
    values: *mut f64,
    error: *mut hence_error,
) -> i32 {
    let body = || {
        // SAFETY: the caller's contracts for the texts.
        let distributions = unsafe {
            [
                distribution(preference, Quantity::Preference)?,
                distribution(hazard, Quantity::Hazard)?,
                distribution(elasticity, Quantity::Elasticity)?,
                distribution(growth, Quantity::Growth)?,
            ]
        };
        let names = Quantity::ALL.map(Quantity::name);
        let rate = RateDistribution::new(distributions).map_err(named(&names))?;
        arguments::length(n, 8)?;
        let total = rows.saturating_mul(n);
        arguments::length(rows.max(total), 7)?;
        let drawn = rows.saturating_mul(count);
        arguments::length(count.max(drawn), 9)?;
        // SAFETY: the caller's contract for `offsets`.
        let offsets = unsafe { arguments::numbers(offsets, n, 5) }?;
        // SAFETY: the caller's contract for `flows`.
        let flows = unsafe { arguments::numbers(flows, total, 6) }?;
        let threads = NonZeroUsize::new(threads as usize)
            .ok_or_else(|| Failure::new(HENCE_ERR_RANGE, 11, "threads is 0, allowed 1 or more"))?;
        let wanted = if rates.is_null() { 0 } else { count };
        arguments::output(rates, wanted, 12)?;
        arguments::output(values, drawn, 13)?;
        arguments::apart(offsets.as_ptr(), n, rates, wanted, 12)?;
        arguments::apart(flows.as_ptr(), total, rates, wanted, 12)?;
        arguments::apart(offsets.as_ptr(), n, values, drawn, 13)?;
        arguments::apart(flows.as_ptr(), total, values, drawn, 13)?;
        arguments::apart(rates, wanted, values, drawn, 13)?;
        drop(arguments::reserve::<[f64; COPIES]>(total, 7)?);
        // The draws, and one row more as what is asked for is made before it is written.
        drop(arguments::reserve::<f64>(drawn + count.saturating_mul(PARTS + 1), 9)?);

        let option =
            |row: usize| OptionFlows { offsets, flows: &flows[row * n..(row + 1) * n], perpetual: &[] };
        let options: Vec<OptionFlows> = (0..rows).map(option).collect();
        let names = ["preference", "hazard", "elasticity", "growth", "offsets", "", "options", "", "draws"];
        let found = draw_values(&rate, &options, &Draws { count, seed, threads }).map_err(named(&names))?;
        // SAFETY: `rates` is checked, and holds `wanted` doubles by the caller's contract.
        unsafe { arguments::fill(rates, wanted, 9, |k| Ok(found.rates[k].rate)) }?;
        for (row, column) in found.values.iter().enumerate() {
            // SAFETY: `values` is checked, and holds `rows` x `count` doubles by the caller's contract.
            unsafe { std::ptr::copy_nonoverlapping(column.as_ptr(), values.add(row * count), count) };
        }
        Ok(())
    };
    // SAFETY: the caller's contract for `error`.
    unsafe { guard(error, body) }
}

/// Percentiles, mean, standard deviation and the share above 0 of values, one a draw.
///
/// Arguments: `values` (in, `n` doubles, in any order); `n` (in, at least 1); `percentiles` (in, `count` doubles, 0 to 100,
/// in any order; NULL only when `count` is 0); `count` (in); `found` (out, `count` doubles): the value below which as many
/// percent of the values fall, linear between neighbours; `spread` (out, not NULL, with its struct_size set); outputs may
/// overlap no other argument; `error` (out, may be NULL).
/// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_LENGTH, HENCE_ERR_OVERLAP; HENCE_ERR_NOT_FINITE with the
/// index; HENCE_ERR_RANGE for a percentile, with its index, and for a struct_size that is too small; HENCE_ERR_SHAPE
/// without values. Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_draws_spread(
    values: *const f64,
    n: usize,
    percentiles: *const f64,
    count: usize,
    found: *mut f64,
    spread: *mut hence_spread,
    error: *mut hence_error,
) -> i32 {
    let body = || {
        // SAFETY: the caller's contract for `values`.
        let values = unsafe { arguments::numbers(values, n, 1) }?;
        // SAFETY: the caller's contract for `percentiles`.
        let percentiles = unsafe { arguments::numbers(percentiles, count, 3) }?;
        arguments::output(found, count, 5)?;
        arguments::output(spread, 1, 6)?;
        arguments::apart(values.as_ptr(), n, found, count, 5)?;
        arguments::apart(percentiles.as_ptr(), count, found, count, 5)?;
        arguments::apart(values.as_ptr(), n, spread, 1, 6)?;
        arguments::apart(percentiles.as_ptr(), count, spread, 1, 6)?;
        arguments::apart(found, count, spread, 1, 6)?;
        // SAFETY: the caller's contract for `spread`.
        let struct_size = unsafe { arguments::sized(spread, 6) }?;
        // The values sorted, and their keys.
        drop(arguments::reserve::<[f64; 2]>(n, 2)?);
        drop(arguments::reserve::<[f64; 2]>(count, 4)?);
        let said = told(values, percentiles)?;
        // SAFETY: both are checked; `found` holds `count` doubles and `spread` as many bytes as it says.
        unsafe {
            arguments::fill(found, count, 4, |i| Ok(said.percentiles[i]))?;
            spread.write(hence_spread {
                struct_size,
                mean: said.mean,
                mean_error: said.mean_error,
                sd: said.sd,
                lowest: said.lowest,
                highest: said.highest,
                positive: said.positive.share,
                positive_error: said.positive.error,
            });
        }
        Ok(())
    };
    // SAFETY: the caller's contract for `error`.
    unsafe { guard(error, body) }
}

fn told(values: &[f64], percentiles: &[f64]) -> Result<hence_core::Spread, Failure> {
    spread(values, percentiles).map_err(named(&["values", "", "percentiles"]))
}

/// How probable it is that each option ranks first: the share of draws in which its value is above every other's.
///
/// Arguments: `values` (in, `rows` x `count` doubles, row by row, as hence_draws_value gives them); `rows` (in, at least 1);
/// `count` (in, at least 1); `alone` (out, `rows` doubles), the share of draws in which the option is first alone; `tied`
/// (out, `rows` doubles), in which it is first with another one; outputs may overlap no other argument; `error` (out, may
/// be NULL).
/// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_LENGTH, HENCE_ERR_OVERLAP; HENCE_ERR_NOT_FINITE with the
/// index; HENCE_ERR_SHAPE without values. Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_draws_rank(
    values: *const f64,
    rows: usize,
    count: usize,
    alone: *mut f64,
    tied: *mut f64,
    error: *mut hence_error,
) -> i32 {
    let body = || {
        arguments::length(count, 3)?;
        let total = rows.saturating_mul(count);
        arguments::length(rows.max(total), 2)?;
        // SAFETY: the caller's contract for `values`.
        let values = unsafe { arguments::numbers(values, total, 1) }?;
        arguments::output(alone, rows, 4)?;
        arguments::output(tied, rows, 5)?;
        arguments::apart(values.as_ptr(), total, alone, rows, 4)?;
        arguments::apart(values.as_ptr(), total, tied, rows, 5)?;
        arguments::apart(alone, rows, tied, rows, 5)?;
        drop(arguments::reserve::<f64>(total, 3)?);
        drop(arguments::reserve::<[f64; COPIES]>(rows, 2)?);
        let columns: Vec<Vec<f64>> =
            (0..rows).map(|row| values[row * count..(row + 1) * count].to_vec()).collect();
        let places = first_places(&columns).map_err(named(&["values"]))?;
        for (row, place) in places.iter().enumerate() {
            // SAFETY: both are checked, and hold `rows` doubles by the caller's contract.
            unsafe {
                alone.add(row).write(place.alone.share);
                tied.add(row).write(place.shared.share);
            }
        }
        Ok(())
    };
    // SAFETY: the caller's contract for `error`.
    unsafe { guard(error, body) }
}
