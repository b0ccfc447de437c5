//! The JSON documents: one shape a command, with a schema number.

use std::collections::BTreeMap;

use hence_workbook::problem::{Problem, Severity};
use hence_workbook::report::{Exact, OptionReport, Status};
use hence_workbook::shelf::Record;
use serde::Serialize;

#[derive(Serialize)]
pub struct Document<T: Serialize> {
    pub schema: u32,
    pub books: Vec<T>,
}

impl<T: Serialize> Document<T> {
    /// The document as text.
    pub fn text(books: Vec<T>) -> String {
        let document = Document { schema: 1, books };
        let mut text = serde_json::to_string_pretty(&document).unwrap_or_default();
        text.push('\n');
        text
    }
}

#[derive(Serialize)]
pub struct FilledBook {
    pub input: String,
    pub output: Option<String>,
    pub status: Status,
    pub options: Vec<FilledOption>,
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub appraisals: Vec<FilledAppraisal>,
    pub problems: Vec<Found>,
}

/// One of several appraisals in a workbook; its options bear its name.
#[derive(Serialize)]
pub struct FilledAppraisal {
    pub appraisal: String,
    pub verdict: String,
}

#[derive(Serialize)]
pub struct FilledOption {
    pub option: String,
    #[serde(skip_serializing_if = "Option::is_none")]
    pub appraisal: Option<String>,
    pub npv: f64,
    pub pv_benefits: f64,
    pub pv_costs: f64,
    pub ratio: Option<f64>,
    pub annual: Option<f64>,
    #[serde(skip_serializing_if = "Option::is_none")]
    pub prices: Option<String>,
    #[serde(skip_serializing_if = "BTreeMap::is_empty")]
    pub stream_bases: BTreeMap<String, String>,
    #[serde(skip_serializing_if = "BTreeMap::is_empty")]
    pub weights: BTreeMap<String, f64>,
    #[serde(skip_serializing_if = "Option::is_none")]
    pub exact: Option<Exact>,
}

#[derive(Serialize)]
pub struct Found {
    pub code: &'static str,
    pub severity: Severity,
    pub place: String,
    pub message: String,
    #[serde(rename = "try")]
    pub hint: Option<String>,
}

impl From<&OptionReport> for FilledOption {
    fn from(option: &OptionReport) -> Self {
        let totals = option.totals();
        FilledOption {
            option: option.name.clone(),
            appraisal: option.appraisal.clone(),
            npv: totals.npv,
            pv_benefits: totals.pv_benefits,
            pv_costs: totals.pv_costs,
            ratio: totals.ratio,
            annual: totals.annual,
            prices: option.prices.clone(),
            stream_bases: option.stream_bases.iter().map(|(s, b, _)| (s.clone(), b.clone())).collect(),
            weights: option.weights.iter().cloned().collect(),
            exact: option.exact.as_ref().map(|(exact, _)| *exact),
        }
    }
}

impl From<&Problem> for Found {
    fn from(problem: &Problem) -> Self {
        Found {
            code: problem.code,
            severity: problem.severity,
            place: problem.place.to_string(),
            message: problem.message.clone(),
            hint: problem.hint.clone(),
        }
    }
}

impl FilledBook {
    /// A workbook of a run, filled or not.
    pub fn of(record: &Record) -> Self {
        FilledBook {
            input: record.input.clone(),
            output: record.output.clone(),
            status: record.status,
            options: record.report.options.iter().map(FilledOption::from).collect(),
            appraisals: record
                .report
                .appraisals
                .iter()
                .map(|appraisal| FilledAppraisal {
                    appraisal: appraisal.name.clone(),
                    verdict: appraisal.verdict.clone(),
                })
                .collect(),
            problems: record.report.problems.iter().map(Found::from).collect(),
        }
    }
}
