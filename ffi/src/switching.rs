//! Switching values: where a net present value is zero, or two options swap.

use hence_core::{OptionFlows, Parameter, switching_multiplier, switching_values};

use crate::arguments;
use crate::basis::{borrow, hence_basis};
use crate::error::{Failure, guard, hence_error, named};
use crate::results::single;
use crate::status::{HENCE_ERR_CAPACITY, HENCE_ERR_NO_MEANING, HENCE_ERR_RANGE, HENCE_ERR_SHAPE};

/// A flat yearly rate in place of the basis.
pub const HENCE_PARAMETER_RATE: i32 = 0;
/// Pure time preference of a basis that states it.
pub const HENCE_PARAMETER_PREFERENCE: i32 = 1;
/// Elasticity of marginal utility of a basis that states it.
pub const HENCE_PARAMETER_ELASTICITY: i32 = 2;
/// Growth of a basis that states it; of a path that of its first band, the others moving along.
pub const HENCE_PARAMETER_GROWTH: i32 = 3;

fn parameter(code: i32) -> Result<Parameter, Failure> {
    match code {
        HENCE_PARAMETER_RATE => Ok(Parameter::Rate),
        HENCE_PARAMETER_PREFERENCE => Ok(Parameter::Preference),
        HENCE_PARAMETER_ELASTICITY => Ok(Parameter::Elasticity),
        HENCE_PARAMETER_GROWTH => Ok(Parameter::Growth),
        _ => Err(Failure::new(HENCE_ERR_RANGE, 2, format!("parameter is {code}, allowed are 0 to 3"))),
    }
}

/// Doubles for each flow that the search surely fits in.
const COPIES: usize = 64;

/// Every value of a parameter of the basis, rising, at which the net present value is zero, all else as it is. For two
/// options to swap, give the flows of one less those of the other.
///
/// In cells: HENCE.SWITCH.
///
/// Arguments: `basis` (in, not NULL; of the rate it does not matter which); `parameter` (in), HENCE_PARAMETER_...; `offsets`
/// (in, `n` doubles, years from the base, in any order); `flows` (in, `n` doubles, net flows); `n` (in, at least 1);
/// `lowest`, `highest` (in), the interval: -0.5 and 1 as a rule, of the elasticity 0 and 20; what leaves rates of -90% and
/// below is left out of it; `values` (out, `capacity` doubles; NULL only when `capacity` is 0); `capacity` (in); `count`
/// (out, one size_t, not NULL): how many there are, 0 for none; outputs may overlap no other argument; `error` (out, may be
/// NULL).
/// Returns HENCE_OK; HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_LENGTH, HENCE_ERR_OVERLAP, HENCE_ERR_NOT_FINITE;
/// HENCE_ERR_RANGE for a parameter that is not known and for an interval that is empty; HENCE_ERR_CAPACITY with the number
/// of values as index; HENCE_ERR_SHAPE without flows; HENCE_ERR_DOMAIN for an offset where the curve is not defined;
/// HENCE_ERR_UNSUPPORTED where the basis is not stated by the parameter; HENCE_ERR_NO_MEANING where every flow is 0, or
/// where the flows do not settle how many values there are; the message then says where. Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_switching_values(
    basis: *const hence_basis,
    parameter: i32,
    offsets: *const f64,
    flows: *const f64,
    n: usize,
    lowest: f64,
    highest: f64,
    values: *mut f64,
    capacity: usize,
    count: *mut usize,
    error: *mut hence_error,
) -> i32 {
    let body = || {
        // SAFETY: the caller's contract for `basis`.
        let basis = unsafe { borrow(basis) }?;
        let parameter = self::parameter(parameter)?;
        // SAFETY: the caller's contracts for `offsets` and `flows`.
        let [offsets, flows] = unsafe { arguments::alike([offsets, flows], n, 3) }?;
        arguments::finite(lowest, 6)?;
        arguments::finite(highest, 7)?;
        arguments::output(values, capacity, 8)?;
        arguments::output(count, 1, 10)?;
        arguments::apart(offsets.as_ptr(), n, values, capacity, 8)?;
        arguments::apart(flows.as_ptr(), n, values, capacity, 8)?;
        arguments::apart(offsets.as_ptr(), n, count, 1, 10)?;
        arguments::apart(flows.as_ptr(), n, count, 1, 10)?;
        arguments::apart(values, capacity, count, 1, 10)?;
        if n == 0 {
            return Err(Failure::new(HENCE_ERR_SHAPE, 5, "there are no flows"));
        }
        drop(arguments::reserve::<[f64; COPIES]>(n, 5)?);
        let net = OptionFlows { offsets, flows, perpetual: &[] };
        let names = ["", "parameter", "offsets", "flows", "", "interval"];
        let found = switching_values(&net, basis.basis.spec(), &basis.at, parameter, (lowest, highest))
            .map_err(named(&names))?;
        if let Some((from, to)) = found.unresolved.first() {
            let message = format!(
                "the flows do not settle how many values lie between {from} and {to}; {} are certain elsewhere",
                found.values.len()
            );
            return Err(Failure::new(HENCE_ERR_NO_MEANING, 4, message));
        }
        let needed = found.values.len();
        if needed > capacity {
            let message = format!("there are {needed} values, and room for {capacity}");
            return Err(Failure::new(HENCE_ERR_CAPACITY, 9, message).with_index(needed));
        }
        // SAFETY: both are checked; `values` holds `capacity` >= `needed` doubles by the caller's contract.
        unsafe {
            arguments::fill(values, needed, 9, |i| Ok(found.values[i]))?;
            count.write(needed);
        }
        Ok(())
    };
    // SAFETY: the caller's contract for `error`.
    unsafe { guard(error, body) }
}

/// The multiple of one stream at which the net present value is zero: 1 - net/stream; 1 is the stream as it is.
///
/// In cells: HENCE.MULTIPLIER.
///
/// Arguments: `net` (in), the net present value, or that of one option less another's; `stream` (in), the part of it that
/// is multiplied, with its sign in the net: a cost is negative; `multiplier` (out, one double, not NULL); `error` (out, may
/// be NULL).
/// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_NOT_FINITE; HENCE_ERR_NO_MEANING for a stream that adds
/// nothing, so that no multiple of it changes the sign. Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_switching_multiplier(
    net: f64,
    stream: f64,
    multiplier: *mut f64,
    error: *mut hence_error,
) -> i32 {
    let compute = || {
        let found = switching_multiplier(net, stream).map_err(named(&["net", "stream"]))?;
        let message = "the stream adds nothing: no multiple of it changes the sign";
        found.ok_or_else(|| Failure::new(HENCE_ERR_NO_MEANING, 2, message))
    };
    // SAFETY: the caller's contracts, passed on.
    unsafe { single(3, multiplier, error, compute) }
}
