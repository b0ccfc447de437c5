//! The numbers of an appraisal under its basis: factors, present values and measures, by option.

use crate::appraisal::Given;
use hence_core::{Basis, Curve, Payback, Timing, sum};

use crate::dated::Flows;

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
    /// What multiplied the flow of each year besides sign, unit and uplift (prices); none where nothing did.
    pub multipliers: Option<Vec<f64>>,
    /// What it was discounted on, where that is not the option's basis.
    pub own: Option<OwnBasis>,
    /// What a unit of it counts, by the income of its group; part of the multipliers.
    pub weight: Option<f64>,
}

/// The basis of a stream that has its own, at the option's base, length and timing.
#[derive(Clone, Debug, PartialEq)]
pub struct OwnBasis {
    /// The basis.
    pub basis: Basis,
    /// Its curve.
    pub curve: Curve,
    /// Factor of each year.
    pub factors: Vec<f64>,
    /// Forward rate of each year, as for an option.
    pub forward: Vec<Option<f64>>,
    /// The timing as a sentence with its numbers.
    pub timing_sentence: String,
}

/// Totals of an option, or of its increment over the baseline.
#[derive(Clone, Copy, Debug, Default, PartialEq, serde::Serialize, serde::Deserialize)]
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
    /// The prices of the flows in words, where the workbook says anything of them.
    pub prices: Option<String>,
    /// The elasticity of marginal utility, where the workbook or the basis states one.
    pub elasticity: Option<Given<f64>>,
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
    /// The same one by one as they are dated, those that follow the last year included.
    pub dated: Flows,
    /// The length of the appraisal in years: the offset of the last flow, or of the last year of a last period of several.
    pub length: f64,
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
    /// The exact value of its flows, where a path of consumption is given; over the baseline where there is one.
    pub exact: Option<ExactValue>,
    /// NPV per unit of the constrained cost.
    pub npv_per_budget: Option<f64>,
    /// PV of costs (over the baseline where there is one) per unit of each effect, undiscounted and discounted.
    pub effects: Vec<(Option<f64>, Option<f64>)>,
}

impl ChoiceOutcome {
    /// The basis that a stream was discounted on.
    pub fn basis_of(&self, stream: usize) -> &Basis {
        self.streams[stream].own.as_ref().map_or(&self.basis, |own| &own.basis)
    }

    /// The factors that a stream was discounted with.
    pub fn factors_of(&self, stream: usize) -> &[f64] {
        self.streams[stream].own.as_ref().map_or(&self.factors, |own| &own.factors)
    }

    /// The present value of the net flow of a year; `sides` are +1 or -1 a stream.
    pub(crate) fn net_value(&self, i: usize, sides: impl Iterator<Item = f64>) -> f64 {
        if self.streams.iter().all(|stream| stream.own.is_none()) {
            return self.net[i] * self.factors[i];
        }
        let terms = self.streams.iter().zip(sides).map(|(stream, side)| side * stream.pv_by_year[i]);
        sum(&terms.collect::<Vec<_>>())
    }

    /// The totals that rank, ratio and NPV use: the increment where there is a baseline.
    pub fn totals(&self) -> &Totals {
        self.increment.as_ref().unwrap_or(&self.absolute)
    }
}

/// What flows that are not small against consumption are worth at the base.
#[derive(Clone, Debug, PartialEq)]
pub struct ExactValue {
    /// The sum of flows times factors, which is right for small flows.
    pub marginal: f64,
    /// The amount at the base that changes welfare as much as the flows do; none where no amount does.
    pub equivalent: Option<f64>,
    /// The amount which, taken at the base beside the flows, leaves welfare as it was; none where no amount does.
    pub compensating: Option<f64>,
    /// Elasticity of marginal utility.
    pub elasticity: Given<f64>,
    /// Where the base stands among the years.
    pub at_base: AtBase,
    /// Consumption at the base.
    pub base: f64,
    /// The flow at the base itself.
    pub base_flow: f64,
    /// The net flow of each year that is valued.
    pub flows: Vec<f64>,
    /// Consumption of each year without the project, in units of one.
    pub consumption: Vec<f64>,
    /// Flows go on after the last year, and are not part of these values.
    pub tail: bool,
}

impl ExactValue {
    /// How far the marginal value is off, as a share of the equivalent one; none where there is no such amount.
    pub fn off(&self) -> Option<f64> {
        let exact = self.equivalent?;
        Some(if self.marginal == exact { 0.0 } else { (self.marginal - exact) / exact.abs() })
    }
}

/// Where the base stands among the years: at one of them, or between two.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct AtBase {
    /// The year at or before the base.
    pub before: usize,
    /// How far the base is from it to the next year, 0 to below 1.
    pub share: f64,
}

impl AtBase {
    /// Finds it; none where the base lies outside the years.
    pub(crate) fn find(years: &[f64]) -> Option<AtBase> {
        let before = years.iter().rposition(|n| *n <= 0.0)?;
        let share = match (years[before], years.get(before + 1)) {
            (0.0, _) => 0.0,
            (from, Some(to)) => -from / (to - from),
            (_, None) => return None,
        };
        Some(AtBase { before, share })
    }

    /// The consumption at the base, log-linear between two years.
    pub(crate) fn of(self, consumption: &[f64]) -> f64 {
        let from = consumption[self.before];
        if self.share == 0.0 { from } else { from * (consumption[self.before + 1] / from).powf(self.share) }
    }
}
