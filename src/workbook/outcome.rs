//! The numbers of an appraisal under its basis: factors, present values and measures, by option.

use hence_core::{Basis, Curve, Endless, NetFlows, Payback, Timing};

/// What one stream comes to.
#[derive(Clone, Debug, PartialEq)]
pub struct StreamOutcome {
    /// The flows after sign, unit, uplift and residual, in the stream's own direction (a cost is positive).
    pub flows: Vec<f64>,
    /// Their sum.
    pub undiscounted: f64,
    /// flows x factors.
    pub pv_by_year: Vec<f64>,
    /// PV of what follows the last year; 0 without a tail.
    pub pv_tail: f64,
    /// The sum of both.
    pub pv: f64,
}

/// Totals of an option, or of its increment over the baseline.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Totals {
    /// Undiscounted benefits (damages count negative).
    pub benefits: f64,
    /// Undiscounted costs.
    pub costs: f64,
    /// PV of benefits.
    pub pv_benefits: f64,
    /// PV of costs.
    pub pv_costs: f64,
    /// PV of benefits less PV of costs.
    pub npv: f64,
    /// PV of benefits over PV of costs, where it has a meaning.
    pub ratio: Option<f64>,
    /// NPV over the sum of factors of service years 1 to N.
    pub annual: Option<f64>,
}

/// The net flows of an option as it stands, what follows the last year included.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Flows {
    /// Offsets in years, rising, each once; an averaged flow stands half at each end of its year.
    pub offsets: Vec<f64>,
    /// As many flows, benefits positive.
    pub flows: Vec<f64>,
    /// What goes on for ever.
    pub endless: Vec<Endless>,
}

impl Flows {
    /// As the library takes them.
    pub fn net(&self) -> NetFlows<'_> {
        NetFlows { offsets: &self.offsets, flows: &self.flows, endless: &self.endless }
    }
}

/// What one option comes to.
#[derive(Clone, Debug)]
pub struct ChoiceOutcome {
    /// The basis it was valued on.
    pub basis: Basis,
    /// The curve of that basis at this base and length.
    pub curve: Curve,
    /// The timing in force.
    pub timing: Timing,
    /// The base in words: "2026", "2025/26", "1 April 2026".
    pub base_words: String,
    /// The timing as a sentence with numbers.
    pub timing_sentence: String,
    /// Offset of each year's flow (with an averaged position: of the year's end).
    pub offsets: Vec<f64>,
    /// Factor of each year.
    pub factors: Vec<f64>,
    /// Forward rate of the year that holds each offset; at the base and before it the first rate extends backwards.
    /// None where the curve has none.
    pub forward: Vec<Option<f64>>,
    /// In the order of the choice's streams.
    pub streams: Vec<StreamOutcome>,
    /// Net flow of each year (benefits and flows less costs and damages).
    pub net: Vec<f64>,
    /// The same as dated flows, those that follow the last year included.
    pub dated: Flows,
    /// N of the annual equivalent.
    pub service_years: u32,
    /// Sum of the factors of service years 1 to N.
    pub annuity: f64,
    /// As they stand.
    pub absolute: Totals,
    /// Less the baseline, where there is one; nothing for the baseline itself.
    pub increment: Option<Totals>,
    /// Every internal rate of return of the net (or incremental) flows in the searched interval.
    pub irr: Vec<f64>,
    /// Narrow intervals in which the number of rates of return could not be settled.
    pub irr_unresolved: Vec<(f64, f64)>,
    /// Some flows go on for ever, and so no rate of return was searched for.
    pub endless: bool,
    /// Discounted payback of the net (or incremental) flows, those that follow the last year included.
    pub payback: Payback,
    /// PV-weighted mean time of the gross flows, in years; none where they go on for ever.
    pub mean_time: Option<f64>,
    /// Share of gross PV by era, what follows the last year included.
    pub era_shares: Vec<f64>,
    /// NPV per unit of the constrained cost.
    pub npv_per_budget: Option<f64>,
    /// PV of costs (over the baseline where there is one) per unit of each effect, undiscounted and discounted.
    pub effects: Vec<(Option<f64>, Option<f64>)>,
}

impl ChoiceOutcome {
    /// The totals that rank, ratio and NPV use: the increment where there is a baseline.
    pub fn totals(&self) -> &Totals {
        self.increment.as_ref().unwrap_or(&self.absolute)
    }
}
