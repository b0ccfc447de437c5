//! Welfare: utility, paths of consumption, shifts between dates, and what a project is worth that is not small.

use crate::arguments;
use crate::error::{guard, hence_error, named};
use crate::results::{compounding, over, single};

/// The utility of a consumption: (c^(1-eta) - 1)/(1 - eta), and ln c at an elasticity eta of 1.
///
/// In cells: HENCE.UTILITY.
///
/// Arguments: `consumption` (in), a head and year, above 0 in any unit of money; `elasticity` (in) of marginal utility, 0
/// to 20; `utility` (out, one double, not NULL), 0 at a consumption of 1; `error` (out, may be NULL).
/// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_NOT_FINITE, HENCE_ERR_RANGE; HENCE_ERR_NO_MEANING for a
/// consumption of 0 or less. Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_utility(
    consumption: f64,
    elasticity: f64,
    utility: *mut f64,
    error: *mut hence_error,
) -> i32 {
    let names = ["consumption", "elasticity"];
    // SAFETY: the caller's contracts, passed on.
    unsafe {
        single(3, utility, error, || hence_core::utility(consumption, elasticity).map_err(named(&names)))
    }
}

/// The utility of one more unit of consumption: c^-eta.
///
/// In cells: HENCE.MARGINAL.
///
/// Arguments: `consumption` and `elasticity` (in) as for hence_utility; `utility` (out, one double, not NULL), per unit of
/// consumption; `error` (out, may be NULL).
/// Returns and threads as hence_utility.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_marginal_utility(
    consumption: f64,
    elasticity: f64,
    utility: *mut f64,
    error: *mut hence_error,
) -> i32 {
    let names = ["consumption", "elasticity"];
    let compute = || hence_core::marginal_utility(consumption, elasticity).map_err(named(&names));
    // SAFETY: the caller's contracts, passed on.
    unsafe { single(3, utility, error, compute) }
}

/// The welfare of a path of consumption: the sum of utilities over (1 + rho)^offset with yearly compounding, times
/// exp(-rho offset) with continuous. Only which of two paths is better, and ratios of differences, have a meaning.
///
/// In cells: HENCE.WELFARE.
///
/// Arguments: `consumption` (in, `n` doubles, a head, above 0); `offsets` (in, `n` doubles, years from the base, in any
/// order); `n` (in; 0 gives 0); `rho` (in), pure time preference and hazard together, a fraction per year, above -1 with
/// yearly compounding; `elasticity` (in) of marginal utility, 0 to 20; `compounding` (in), HENCE_COMPOUNDING_...;
/// `welfare` (out, one double, not NULL, may not overlap the inputs); `error` (out, may be NULL).
/// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_LENGTH, HENCE_ERR_OVERLAP, HENCE_ERR_RANGE;
/// HENCE_ERR_NOT_FINITE, and HENCE_ERR_NO_MEANING for a consumption of 0 or less, with the index. Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_welfare(
    consumption: *const f64,
    offsets: *const f64,
    n: usize,
    rho: f64,
    elasticity: f64,
    compounding: i32,
    welfare: *mut f64,
    error: *mut hence_error,
) -> i32 {
    let names = ["consumption", "offsets", "", "rho", "elasticity"];
    // SAFETY: the caller's contracts, passed on.
    unsafe {
        over([consumption, offsets], n, 7, welfare, error, |[consumption, offsets]| {
            let compounding = self::compounding(compounding, 6)?;
            hence_core::welfare(consumption, offsets, rho, elasticity, compounding).map_err(named(&names))
        })
    }
}

/// The discount factors along a path of consumption, what one small unit at each date is worth at the base:
/// (base/c)^eta over (1 + rho)^offset with yearly compounding, times exp(-rho offset) with continuous.
///
/// Arguments: `consumption`, `offsets`, `n`, `rho`, `elasticity`, `compounding` and `error` as for hence_welfare; `base`
/// (in), the consumption at the base, above 0; `factors` (out, `n` doubles, may not overlap the inputs).
/// Returns and threads as hence_welfare.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_welfare_factors(
    consumption: *const f64,
    offsets: *const f64,
    n: usize,
    base: f64,
    rho: f64,
    elasticity: f64,
    compounding: i32,
    factors: *mut f64,
    error: *mut hence_error,
) -> i32 {
    let body = || {
        // SAFETY: the caller's contracts for `consumption` and `offsets`.
        let [consumption, offsets] = unsafe { arguments::alike([consumption, offsets], n, 1) }?;
        let compounding = self::compounding(compounding, 7)?;
        arguments::output(factors, n, 8)?;
        arguments::apart(consumption.as_ptr(), n, factors, n, 8)?;
        arguments::apart(offsets.as_ptr(), n, factors, n, 8)?;
        drop(arguments::reserve::<[f64; 2]>(n, 3)?);
        let names = ["consumption", "offsets", "", "base", "rho", "elasticity"];
        let found = hence_core::welfare_factors(consumption, offsets, base, rho, elasticity, compounding)
            .map_err(named(&names))?;
        // SAFETY: `factors` is checked, and holds `n` doubles by the caller's contract.
        unsafe { arguments::fill(factors, n, 3, |i| Ok(found[i])) }
    };
    // SAFETY: the caller's contract for `error`.
    unsafe { guard(error, body) }
}

/// What must be received later so that giving up an amount now leaves welfare as it was. For small amounts the
/// rate of return between the two is the Ramsey rate.
///
/// In cells: HENCE.COMPENSATION.
///
/// Arguments: `amount` (in), given up now; negative where it is received now and given up later; `now`, `later` (in),
/// consumption at the two dates before the shift, above 0, in the unit of the amount; `years` (in) from the one to the
/// other; `rho`, `elasticity` and `compounding` (in) as for hence_welfare; `received` (out, one double, not NULL), in the
/// unit of the amount; `error` (out, may be NULL).
/// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_NOT_FINITE, HENCE_ERR_RANGE; HENCE_ERR_NO_MEANING for a
/// consumption of 0 or less, where the amount leaves nothing, and where no amount later is enough. Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_compensation(
    amount: f64,
    now: f64,
    later: f64,
    years: f64,
    rho: f64,
    elasticity: f64,
    compounding: i32,
    received: *mut f64,
    error: *mut hence_error,
) -> i32 {
    let names = ["amount", "now", "then", "years", "rho", "elasticity"];
    let compute = || {
        let compounding = self::compounding(compounding, 7)?;
        hence_core::compensation(amount, now, later, years, rho, elasticity, compounding)
            .map_err(named(&names))
    };
    // SAFETY: the caller's contracts, passed on.
    unsafe { single(8, received, error, compute) }
}

/// The exact value of flows that are not small against consumption: the amount at the base, without the project, that
/// changes welfare as much as they do (equivalent variation). The sum of factor x flow is its limit for small flows.
///
/// In cells: HENCE.EXACT.
///
/// Arguments: `flows` (in, `n` doubles), benefits less costs in the unit of consumption, both totals or both a head;
/// `consumption` (in, `n` doubles, above 0), at the date of each flow without the project; `factors` (in, `n` doubles, 0 or
/// more), the discount factor of each flow, as hence_factors and hence_welfare_factors give them; `n` (in; 0 gives 0);
/// `base` (in), the consumption at the base, above 0; `elasticity` (in) of marginal utility, 0 to 20; `value` (out, one
/// double, not NULL, may not overlap the inputs), money at the base; `error` (out, may be NULL).
/// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_LENGTH, HENCE_ERR_OVERLAP, HENCE_ERR_NOT_FINITE,
/// HENCE_ERR_RANGE; HENCE_ERR_NO_MEANING with the index for a factor below 0 and for a consumption of 0 or less, with the
/// flow or without; without an index where no amount at the base is worth as much. Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_equivalent_variation(
    flows: *const f64,
    consumption: *const f64,
    factors: *const f64,
    n: usize,
    base: f64,
    elasticity: f64,
    value: *mut f64,
    error: *mut hence_error,
) -> i32 {
    let names = ["flows", "consumption", "factors", "", "base", "elasticity"];
    // SAFETY: the caller's contracts, passed on.
    unsafe {
        over([flows, consumption, factors], n, 7, value, error, |[flows, consumption, factors]| {
            hence_core::equivalent_variation(flows, consumption, factors, base, elasticity)
                .map_err(named(&names))
        })
    }
}

/// The most that could be paid at the base for flows that are not small against consumption: the amount which, taken from
/// those who have the project, leaves them as well off as without it (compensating variation); negative for what must be
/// received. Not above hence_equivalent_variation.
///
/// Arguments: `flows`, `consumption`, `factors`, `n`, `base`, `elasticity`, `value` and `error` as for
/// hence_equivalent_variation; `base_flow` (in), the flow at the base itself, which the flows hold too; 0 where none
/// stands there.
/// Returns as hence_equivalent_variation; HENCE_ERR_NO_MEANING also where the base flow leaves no consumption. Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_compensating_variation(
    flows: *const f64,
    consumption: *const f64,
    factors: *const f64,
    n: usize,
    base: f64,
    base_flow: f64,
    elasticity: f64,
    value: *mut f64,
    error: *mut hence_error,
) -> i32 {
    let names = ["flows", "consumption", "factors", "", "base", "base_flow", "elasticity"];
    // SAFETY: the caller's contracts, passed on.
    unsafe {
        over([flows, consumption, factors], n, 8, value, error, |[flows, consumption, factors]| {
            hence_core::compensating_variation(flows, consumption, factors, base, base_flow, elasticity)
                .map_err(named(&names))
        })
    }
}

/// The consumption which, had everybody that much, would give the welfare of an unequal distribution:
/// (sum of share x c^(1-eta))^(1/(1-eta)), the geometric mean at an elasticity eta of 1. Divided by the
/// mean it is 1 less Atkinson's index of inequality.
///
/// In cells: HENCE.EQUIVALENT.
///
/// Arguments: `consumption` (in, `n` doubles, above 0), of each group a head; `shares` (in, `n` doubles, 0 or more, summing
/// to 1), of each group in the population; `n` (in, at least 1); `elasticity` (in) of marginal utility, 0 to 20;
/// `equivalent` (out, one double, not NULL, may not overlap the inputs), a head; `error` (out, may be NULL).
/// Returns HENCE_OK, HENCE_ERR_NULL, HENCE_ERR_ALIGNMENT, HENCE_ERR_LENGTH, HENCE_ERR_OVERLAP, HENCE_ERR_NOT_FINITE;
/// HENCE_ERR_NO_MEANING for a consumption of 0 or less, with the index; HENCE_ERR_RANGE for the elasticity, for a negative
/// share, with the index, and for shares that do not sum to 1; HENCE_ERR_SHAPE without groups. Threads: any.
#[unsafe(no_mangle)]
pub unsafe extern "C" fn hence_equally_distributed_equivalent(
    consumption: *const f64,
    shares: *const f64,
    n: usize,
    elasticity: f64,
    equivalent: *mut f64,
    error: *mut hence_error,
) -> i32 {
    let names = ["consumption", "shares", "", "elasticity"];
    // SAFETY: the caller's contracts, passed on.
    unsafe {
        over([consumption, shares], n, 5, equivalent, error, |[consumption, shares]| {
            hence_core::equally_distributed_equivalent(consumption, shares, elasticity).map_err(named(&names))
        })
    }
}
