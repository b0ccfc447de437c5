//! Social discounting: curves, rate lines, schedules, timing and the measures of an appraisal.
//!
//! The library is pure: it opens no file, knows no sheet and prints nothing. Texts (rate lines,
//! schedules) come in as strings, numbers as slices, and every failure is an [`Error`] that names the
//! argument and the index it is about.
//!
//! Rates are fractions per year (0.035 is 3.5%), offsets are years from the base. Nothing is rounded.

mod basis;
mod calendar;
mod catalogue;
mod check;
mod curve;
mod dd;
mod derivation;
mod draws;
mod error;
mod evidence;
mod growth;
mod irr;
mod measures;
mod perpetuity;
mod prices;
mod rateline;
mod roots;
mod schedule;
mod spec;
mod sum;
mod switching;
mod tail;
mod timing;
mod welfare;

pub use basis::{Basis, CAUTION, PriceBasis};
pub use calendar::{DayCount, offset_of_dates, parse_financial_year, years_after_base};
pub use catalogue::Catalogue;
pub use curve::{Curve, Domain, Parts};
pub use derivation::{
    Derivation, ElasticitySource, Figure, FigureKind, GrowthBy, GrowthSource, Hazard, RateParts, Stated,
};
pub use draws::{
    Chance, Distribution, DrawSummary, Drawn, DrawnRate, Draws, FirstPlace, Histogram, OptionFlows,
    Perpetual, Quantity, RateDistribution, Spread, draw_values, first_places, histogram, spread,
};
pub use error::{Error, ErrorKind, Result};
pub use evidence::{
    TaxBracket, elasticity_from_tax_brackets, elasticity_from_taxes, equity_weight, hazard_from_probability,
    hazard_from_waiting_time, ramsey_rate, ramsey_rate_uncertain,
};
pub use growth::{Estimate, GrowthEstimate, growth_from_consumption};
pub use irr::{IRR_INTERVAL, IrrSearch, internal_rates};
pub use measures::{
    Eras, Increment, Payback, annual_equivalent, benefit_cost_ratio, cost_per_effect, discounted_payback,
    era_shares, incremental_ratios, mean_time, net_present_value, npv_per_budget, present_value,
    present_values, undiscounted_total,
};
pub use prices::{nominal_rate, real_flows, real_flows_by_inflation, real_rate};
pub use rateline::{RateLine, distance, parse_number, parse_percentage, percent};
pub use schedule::{Schedule, ScheduleStatus};
pub use spec::{Band, Compounding, Edge, GrowthState, HorizonRule, Persistence, Spec, Where};
pub use sum::{ExactSum, dot, sum};
pub use switching::{Parameter, Switching, switching_multiplier, switching_values};
pub use tail::Tail;
pub use timing::{Position, TimedOffset, Timing, timing_sentence};
pub use welfare::{
    compensating_variation, compensation, compensation_rate, equally_distributed_equivalent,
    equivalent_variation, marginal_utility, ramsey_rate_exact, utility, welfare, welfare_factors,
};
