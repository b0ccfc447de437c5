//! The numbers of an appraisal under its basis: factors, present values and measures, by option.

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
