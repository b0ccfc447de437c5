//! The C interface of hence: handles, arrays, statuses. No arithmetic of its own.
//!
//! Every function returns a status ([`HENCE_OK`] is 0) and leaves its outputs untouched unless it
//! succeeds. No function keeps a caller's pointer, prints, or changes a mode of the process.
#![allow(clippy::missing_safety_doc)] // the contract is each function's documentation, which the header carries
#![allow(non_camel_case_types)] // the names are those of the C interface

mod answer;
mod arguments;
mod basis;
mod calendar;
mod curves;
mod draws;
mod error;
mod evidence;
mod growth;
mod measures;
mod results;
mod status;
mod switching;
#[cfg(test)]
mod tests;
mod welfare;
pub mod worksheet;

pub use answer::{
    HENCE_CELL_BLANK, HENCE_CELL_ERROR, HENCE_CELL_LOGICAL, HENCE_CELL_NUMBER, HENCE_CELL_TEXT, hence_answer,
    hence_answer_cells, hence_answer_free, hence_answer_shape, hence_answer_text, hence_range,
    hence_worksheet_call,
};
pub use arguments::HENCE_LENGTH_MAX;
pub use basis::{
    hence_basis, hence_basis_describe, hence_basis_free, hence_basis_line, hence_basis_parse,
    hence_basis_parse_at, hence_basis_timing, hence_schedule_line,
};
pub use calendar::{hence_offsets_from_dates, hence_offsets_from_years};
pub use curves::{hence_factors, hence_forward_rates, hence_instantaneous_rates, hence_mean_rates};
pub use draws::{hence_draws_rank, hence_draws_spread, hence_draws_value, hence_spread};
pub use error::hence_error;
pub use evidence::{
    hence_elasticity_from_brackets, hence_elasticity_from_taxes, hence_equity_weight,
    hence_hazard_from_probability, hence_hazard_from_waiting_time, hence_ramsey_rate,
    hence_ramsey_rate_uncertain, hence_real_rate,
};
pub use growth::{hence_growth, hence_growth_estimate};
pub use measures::{hence_annual_equivalent, hence_irr_all, hence_present_value, hence_present_values};
pub use results::{HENCE_COMPOUNDING_CONTINUOUS, HENCE_COMPOUNDING_YEARLY};
pub use status::*;
pub use switching::{
    HENCE_PARAMETER_ELASTICITY, HENCE_PARAMETER_GROWTH, HENCE_PARAMETER_PREFERENCE, HENCE_PARAMETER_RATE,
    hence_switching_multiplier, hence_switching_values,
};
pub use welfare::{
    hence_compensating_variation, hence_compensation, hence_equally_distributed_equivalent,
    hence_equivalent_variation, hence_marginal_utility, hence_utility, hence_welfare, hence_welfare_factors,
};

/// The version of the binary interface: raised when a function, struct or constant changes its meaning.
pub const HENCE_ABI_VERSION: u32 = 1;

/// The version of the binary interface that this library was built with.
///
/// A program compares it with HENCE_ABI_VERSION of its header. Threads: any.
#[unsafe(no_mangle)]
pub extern "C" fn hence_abi_version() -> u32 {
    HENCE_ABI_VERSION
}
