//! Welfare: isoelastic utility, paths of consumption, and what a project is worth that is not small against them.
//!
//! The marginal method of an appraisal weights each flow by the marginal utility of consumption at its date. That is
//! right for a project that leaves consumption much as it was. The functions here also give the exact answer, so that
//! the difference can be seen.

mod path;
mod utility;
mod variation;

pub use path::{compensation, compensation_rate, ramsey_rate_exact, welfare, welfare_factors};
pub use utility::{equally_distributed_equivalent, marginal_utility, utility};
pub use variation::{compensating_variation, equivalent_variation};
