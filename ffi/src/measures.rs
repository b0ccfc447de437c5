//! Measures over flows: present values, annual equivalents, internal rates of return.

use hence_core::{annual_equivalent, dot, internal_rates};

use crate::arguments;
use crate::basis::{borrow, hence_basis};
use crate::error::{Failure, guard, hence_error};
use crate::status::{HENCE_ERR_CAPACITY, HENCE_ERR_NO_MEANING, HENCE_ERR_NOT_FINITE, HENCE_ERR_SHAPE};

/// Present value of one stream: the sum of D(offset) x flow, correctly rounded from the factors.
///
/// Arguments: `basis` (in, not NULL); `offsets` (in, `n` doubles, years from the base); `flows` (in, `n` doubles,
/// any sign); `n` (in; 0 gives 0); `value` (out, one double, not NULL, may not overlap the inputs); `error` (out, may be
/// NULL).
/// Returns and threads as hence_factors.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_present_value(
    basis: *const hence_basis,
    offsets: *const f64,
    flows: *const f64,
    n: usize,
    value: *mut f64,
    error: *mut hence_error,
) -> i32 {
    let body = || {
        // SAFETY: the caller's contract for `basis`.
        let basis = unsafe { borrow(basis) }?;
        arguments::length(n, 4)?;
        // SAFETY: the caller's contracts for `offsets` and `flows`.
        let (offsets, flows) =
            unsafe { (arguments::numbers(offsets, n, 2)?, arguments::numbers(flows, n, 3)?) };
        arguments::output(value, 1, 5)?;
        arguments::apart(offsets.as_ptr(), n, value, 1, 5)?;
        arguments::apart(flows.as_ptr(), n, value, 1, 5)?;
        let mut factors = arguments::buffer(n, 4)?;
        basis.curve.factors(offsets, &mut factors).map_err(|e| Failure::core(&e, 2))?;
        let result = stream_value(&factors, flows)?;
        // SAFETY: `value` is not NULL and aligned (checked), and writable by the caller's contract.
        unsafe { value.write(result) };
        Ok(())
    };
    // SAFETY: the caller's contract for `error`.
    unsafe { guard(error, body) }
}

/// The present value of a stream at these factors; flows are the third argument.
fn stream_value(factors: &[f64], flows: &[f64]) -> Result<f64, Failure> {
    let value = dot(factors, flows);
    if value.is_finite() {
        return Ok(value);
    }
    Err(Failure::new(HENCE_ERR_NOT_FINITE, 3, "the present value is too large for a number"))
}

/// Present values of several streams at the same offsets, one a stream, each as hence_present_value gives it.
///
/// In cells: HENCE.VALUE.
///
/// Arguments: `basis` (in, not NULL); `offsets` (in, `n` doubles, years from the base); `flows` (in, `rows` x `n`
/// doubles, row by row: the stream i begins at number i x n); `rows` (in; 0 writes nothing); `n` (in; 0 gives 0 for each
/// stream); `values` (out, `rows` doubles, may not overlap the inputs); `error` (out, may be NULL).
/// Returns as hence_factors, an index of `flows` counting from its first. Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_present_values(
    basis: *const hence_basis,
    offsets: *const f64,
    flows: *const f64,
    rows: usize,
    n: usize,
    values: *mut f64,
    error: *mut hence_error,
) -> i32 {
    let body = || {
        // SAFETY: the caller's contract for `basis`.
        let basis = unsafe { borrow(basis) }?;
        arguments::length(n, 5)?;
        let total = rows.saturating_mul(n);
        arguments::length(rows.max(total), 4)?;
        // SAFETY: the caller's contract for `offsets`.
        let offsets = unsafe { arguments::numbers(offsets, n, 2) }?;
        // SAFETY: the caller's contract for `flows`.
        let flows = unsafe { arguments::numbers(flows, total, 3) }?;
        arguments::output(values, rows, 6)?;
        arguments::apart(offsets.as_ptr(), n, values, rows, 6)?;
        arguments::apart(flows.as_ptr(), total, values, rows, 6)?;
        let mut factors = arguments::buffer(n, 5)?;
        basis.curve.factors(offsets, &mut factors).map_err(|e| Failure::core(&e, 2))?;
        let value = |row: usize| {
            stream_value(&factors, &flows[row * n..(row + 1) * n])
                .map_err(|failure| failure.with_index(row * n))
        };
        // SAFETY: `values` is checked, and holds `rows` doubles by the caller's contract.
        unsafe { arguments::fill(values, rows, 4, value) }
    };
    // SAFETY: the caller's contract for `error`.
    unsafe { guard(error, body) }
}

/// The constant amount a year, over service years 1 to N, that has the present value given: value / (D(1) + ... + D(N)).
///
/// In cells: HENCE.ANNUAL.
///
/// Arguments: `basis` (in, not NULL); `value` (in), money at the base; `service_years` (in), N, 1 to 100,000; `annual`
/// (out, one double, not NULL), money per year; `error` (out, may be NULL).
/// Returns HENCE_OK; HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_NOT_FINITE; HENCE_ERR_NO_MEANING for other numbers of
/// years; HENCE_ERR_DOMAIN where the curve ends before N. Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_annual_equivalent(
    basis: *const hence_basis,
    value: f64,
    service_years: i32,
    annual: *mut f64,
    error: *mut hence_error,
) -> i32 {
    let body = || {
        // SAFETY: the caller's contract for `basis`.
        let basis = unsafe { borrow(basis) }?;
        arguments::finite(value, 2)?;
        arguments::output(annual, 1, 4)?;
        // What is negative has no meaning, as 0 has none.
        let years = u32::try_from(service_years).unwrap_or(0);
        let (result, _) = annual_equivalent(&basis.curve, value, years)
            .map_err(|e| Failure::core(&e, if e.argument() == "npv" { 2 } else { 3 }))?;
        // SAFETY: `annual` is not NULL and aligned (checked), and writable by the caller's contract.
        unsafe { annual.write(result) };
        Ok(())
    };
    // SAFETY: the caller's contract for `error`.
    unsafe { guard(error, body) }
}

/// Doubles for each flow that the search for rates of return surely fits in: it holds about a dozen.
const COPIES: usize = 24;

/// Every internal rate of return in an interval, rising: the rates r with sum of flow x (1+r)^-offset = 0.
///
/// In cells: HENCE.IRR.
///
/// Arguments: `offsets` (in, `n` doubles, years, in any order); `flows` (in, `n` doubles, net flows); `n` (in, at least
/// 1); `lowest`, `highest` (in), the interval, both above -1: -0.5 and 1 as a rule; `rates` (out, `capacity` doubles;
/// NULL only when `capacity` is 0; may not overlap the inputs); `capacity` (in): n - 1 is always enough for flows at
/// different offsets; `count` (out, one size_t, not NULL, may not overlap the arrays): how many there are, 0 for none;
/// `error` (out, may be NULL).
/// Returns HENCE_OK; HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_LENGTH, HENCE_ERR_OVERLAP, HENCE_ERR_NOT_FINITE;
/// HENCE_ERR_RANGE for an interval that is empty or reaches -1; HENCE_ERR_CAPACITY with the number of rates as index;
/// HENCE_ERR_SHAPE without flows; HENCE_ERR_NO_MEANING where every flow is 0, or where the flows do not settle how many
/// rates there are (the value only touches zero, or rates lie too close together to be told apart); the message then
/// says where. Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_irr_all(
    offsets: *const f64,
    flows: *const f64,
    n: usize,
    lowest: f64,
    highest: f64,
    rates: *mut f64,
    capacity: usize,
    count: *mut usize,
    error: *mut hence_error,
) -> i32 {
    let body = || {
        arguments::length(n, 3)?;
        // SAFETY: the caller's contracts for `offsets` and `flows`.
        let (offsets, flows) =
            unsafe { (arguments::numbers(offsets, n, 1)?, arguments::numbers(flows, n, 2)?) };
        arguments::finite(lowest, 4)?;
        arguments::finite(highest, 5)?;
        arguments::output(rates, capacity, 6)?;
        arguments::output(count, 1, 8)?;
        arguments::apart(offsets.as_ptr(), n, rates, capacity, 6)?;
        arguments::apart(flows.as_ptr(), n, rates, capacity, 6)?;
        arguments::apart(offsets.as_ptr(), n, count, 1, 8)?;
        arguments::apart(flows.as_ptr(), n, count, 1, 8)?;
        arguments::apart(rates, capacity, count, 1, 8)?;
        let argument = |e: &hence_core::Error| match e.argument() {
            "offsets" => 1,
            "interval" => 4,
            _ => 2,
        };
        if n == 0 {
            return Err(Failure::new(HENCE_ERR_SHAPE, 3, "there are no flows"));
        }
        // The search holds some copies of the flows, and would end the process without memory for them.
        drop(arguments::reserve::<[f64; COPIES]>(n, 3)?);
        let found =
            internal_rates(offsets, flows, (lowest, highest)).map_err(|e| Failure::core(&e, argument(&e)))?;
        if let Some((from, to)) = found.unresolved.first() {
            let message = format!(
                "the flows do not settle how many rates lie between {from} and {to}; {} are certain elsewhere",
                found.rates.len()
            );
            return Err(Failure::new(HENCE_ERR_NO_MEANING, 2, message));
        }
        let needed = found.rates.len();
        if needed > capacity {
            let message = format!("there are {needed} rates, and room for {capacity}");
            return Err(Failure::new(HENCE_ERR_CAPACITY, 7, message).with_index(needed));
        }
        // SAFETY: both are checked; `rates` holds `capacity` >= `needed` doubles by the caller's contract.
        unsafe {
            arguments::fill(rates, needed, 7, |i| Ok(found.rates[i]))?;
            count.write(needed);
        }
        Ok(())
    };
    // SAFETY: the caller's contract for `error`.
    unsafe { guard(error, body) }
}
