//! What a run found, for those who print it: one report a workbook, one entry an option.

use hence_core::Payback;
use serde::{Deserialize, Serialize};

use crate::appraisal::{Appraisal, StreamKind};
use crate::decide::{Bridge, Rule};
use crate::outcome::{ChoiceOutcome, Totals};
use crate::problem::{Problem, Severity};
use crate::welfare;

/// How a run on one workbook ended.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Status {
    /// Nothing is wrong with it.
    Done,
    /// It was read (and filled), and something in it is wrong.
    Problems,
    /// It could not be read or filled; no output was left.
    Failed,
}

impl Status {
    /// Done, unless a problem is an error.
    pub(crate) fn of(problems: &[Problem]) -> Self {
        let wrong = problems.iter().any(|problem| problem.severity == Severity::Error);
        if wrong { Status::Problems } else { Status::Done }
    }
}

/// The same option under the schedule that its body wants run beside the declared one.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Companion {
    /// The schedule's id.
    pub id: String,
    /// In words, with its source.
    pub words: String,
    /// Totals under it (over the baseline where there is one).
    pub totals: Totals,
}

/// What flows that are not small against consumption are worth at the base.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Exact {
    /// The amount that changes welfare as much; none where no amount does.
    pub equivalent: Option<f64>,
    /// The amount that undoes the change; none where no amount does.
    pub compensating: Option<f64>,
    /// By the marginal method.
    pub marginal: f64,
    /// Elasticity of marginal utility.
    pub elasticity: f64,
}

/// What one option comes to.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct OptionReport {
    /// Its name.
    pub name: String,
    /// Which of several appraisals of the workbook it is of.
    pub appraisal: Option<String>,
    /// It is the baseline.
    pub baseline: bool,
    /// The canonical basis.
    pub basis: String,
    /// The canonical basis that the workbook itself declares, where it was valued on another.
    pub declared: Option<String>,
    /// The basis in words, with its source.
    pub basis_words: String,
    /// The base in words.
    pub base: String,
    /// The timing as a sentence with numbers.
    pub timing: String,
    /// The prices of the flows in words, where the workbook says anything of them.
    pub prices: Option<String>,
    /// As it stands.
    pub absolute: Totals,
    /// Over the baseline, where there is one.
    pub increment: Option<Totals>,
    /// Names of the streams above the line of the ratio.
    pub above: Vec<String>,
    /// Names of the streams below it.
    pub below: Vec<String>,
    /// N of the annual equivalent.
    pub service_years: u32,
    /// Every internal rate of return found.
    pub irr: Vec<f64>,
    /// Narrow intervals in which the number of rates of return could not be settled.
    pub irr_unresolved: Vec<(f64, f64)>,
    /// Some flows go on for ever, and so no rate of return was searched for.
    pub endless: bool,
    /// Discounted payback.
    pub payback: Payback,
    /// PV-weighted mean time of the gross flows, years.
    pub mean_time: Option<f64>,
    /// Share of gross PV by era.
    pub era_shares: Vec<f64>,
    /// NPV per unit of the constrained cost.
    pub npv_per_budget: Option<f64>,
    /// Streams that have a basis of their own: name, the basis and in words.
    pub stream_bases: Vec<(String, String, String)>,
    /// Streams whose flows are weighted by the income of their group: name and weight.
    pub weights: Vec<(String, f64)>,
    /// The exact value where a path of consumption is given, and in words.
    pub exact: Option<(Exact, String)>,
    /// Effects by name: cost per unit undiscounted, cost per unit discounted.
    pub effects: Vec<(String, Option<f64>, Option<f64>)>,
    /// The same under the companion schedule.
    pub companion: Option<Companion>,
    /// What ranks it among the options.
    pub decide: Rule,
    /// From what its workbook held to how it stands now.
    pub bridge: Bridge,
}

impl OptionReport {
    /// Its name, after that of its appraisal where the workbook has several.
    pub fn called(&self) -> String {
        match &self.appraisal {
            Some(appraisal) if *appraisal != self.name => format!("{appraisal}: {}", self.name),
            _ => self.name.clone(),
        }
    }

    /// The totals that rank, ratio and NPV use.
    pub fn totals(&self) -> &Totals {
        self.increment.as_ref().unwrap_or(&self.absolute)
    }
}

/// One of several appraisals in a workbook.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct AppraisalReport {
    /// Its name, which its options bear too.
    pub name: String,
    /// The verdict as written to its audit summary.
    pub verdict: String,
}

/// The report on one workbook.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
pub struct Report {
    /// Its options; of several appraisals, all of them in order.
    pub options: Vec<OptionReport>,
    /// The appraisals, where the workbook has several.
    pub appraisals: Vec<AppraisalReport>,
    /// Everything found.
    pub problems: Vec<Problem>,
    /// Cells written, and cells found filled and compared.
    pub filled: usize,
    /// Formula cells that agreed and were left.
    pub ticked: usize,
    /// Rows of numbers along the years that no role names: heading and cells.
    pub not_valued: Vec<String>,
    /// Formulas of the workbook that have no result until a spreadsheet program opens the output, by sheet in words.
    pub awaiting: Vec<String>,
    /// The verdict as written to the audit summary; of several appraisals, that of all.
    pub verdict: String,
}

impl Report {
    /// Done, unless a problem is an error.
    pub fn status(&self) -> Status {
        Status::of(&self.problems)
    }
}

/// One entry an option.
pub(crate) fn option_reports(
    appraisal: &Appraisal,
    outcomes: &[ChoiceOutcome],
    companions: &[Option<Companion>],
) -> Vec<OptionReport> {
    let names = |i: usize, wanted: &dyn Fn(StreamKind) -> bool| {
        let streams = &appraisal.choices[i].streams;
        streams.iter().filter(|s| wanted(s.kind)).map(|s| s.name.clone()).collect()
    };
    appraisal
        .choices
        .iter()
        .zip(outcomes)
        .enumerate()
        .map(|(i, (choice, outcome))| OptionReport {
            name: choice.name.clone(),
            appraisal: None,
            baseline: appraisal.baseline == Some(i),
            basis: outcome.basis.canonical(),
            declared: None,
            basis_words: outcome.basis.words(),
            base: outcome.base_words.clone(),
            timing: outcome.timing_sentence.clone(),
            prices: outcome.prices.clone(),
            absolute: outcome.absolute,
            increment: outcome.increment,
            above: names(i, &|kind| kind != StreamKind::Cost),
            below: names(i, &|kind| kind == StreamKind::Cost),
            service_years: outcome.service_years,
            irr: outcome.irr.clone(),
            irr_unresolved: outcome.irr_unresolved.clone(),
            endless: outcome.endless,
            payback: outcome.payback,
            mean_time: outcome.mean_time,
            era_shares: outcome.era_shares.clone(),
            npv_per_budget: outcome.npv_per_budget,
            stream_bases: choice
                .streams
                .iter()
                .zip(&outcome.streams)
                .filter_map(|(stream, valued)| {
                    let basis = &valued.own.as_ref()?.basis;
                    Some((stream.name.clone(), basis.canonical(), basis.words()))
                })
                .collect(),
            weights: choice
                .streams
                .iter()
                .zip(&outcome.streams)
                .filter_map(|(stream, valued)| Some((stream.name.clone(), valued.weight?)))
                .collect(),
            exact: outcome.exact.as_ref().map(|value| {
                let exact = Exact {
                    equivalent: value.equivalent,
                    compensating: value.compensating,
                    marginal: value.marginal,
                    elasticity: value.elasticity.value,
                };
                (exact, welfare::words(value))
            }),
            effects: choice
                .effects
                .iter()
                .zip(&outcome.effects)
                .map(|(effect, (plain, discounted))| (effect.name.clone(), *plain, *discounted))
                .collect(),
            companion: companions.get(i).cloned().flatten(),
            decide: appraisal.decide,
            bridge: Bridge::default(),
        })
        .collect()
}
