//! `hence check`: what a workbook holds against what its declared basis gives.

use std::path::PathBuf;

use hence_workbook::check::{CheckReport, CheckRequest, check};
use serde::Serialize;

use crate::args::Check;
use crate::json::{Document, Found};
use crate::numbers::shortest;
use crate::progress::Progress;
use crate::terminal::{self, Terminal, escape};
use crate::{Failure, Outcome, input, render};

#[derive(Serialize)]
struct CheckedBook {
    input: String,
    status: hence_workbook::report::Status,
    agree: usize,
    not_filled: Vec<String>,
    differences: Vec<DifferenceOut>,
    problems: Vec<Found>,
}

#[derive(Serialize)]
struct DifferenceOut {
    place: String,
    role: String,
    found: String,
    expected: Option<f64>,
    difference: Option<f64>,
}

/// Exit 0 when all agree, 1 on any difference.
pub fn run(args: &Check, schedules: &Option<PathBuf>, terminal: &Terminal) -> Result<Outcome, Failure> {
    let catalogue = super::catalogue(schedules)?;
    let (roles, plan) = (super::roles(&args.roles)?, super::planned(&args.roles, Some(&args.of))?);
    let request = CheckRequest { roles, plan };
    let shown = input::shown(&args.source.book);
    let progress = Progress::start();
    progress.doing(&format!("checking {shown}"));
    let checked = input::open(&args.source.book).and_then(|package| check(&package, &request, &catalogue));
    drop(progress);
    match checked {
        Ok(report) => {
            render::problems(terminal, &shown, &report.problems);
            terminal::print(&if args.document.json { json(shown, &report) } else { text(&shown, &report) })?;
            Ok(if report.agrees() { Outcome::Done } else { Outcome::Wrong })
        }
        Err(error) => {
            render::problems(terminal, &shown, error.problems());
            if args.document.json {
                let book = CheckedBook {
                    input: shown,
                    status: hence_workbook::report::Status::Failed,
                    agree: 0,
                    not_filled: Vec::new(),
                    differences: Vec::new(),
                    problems: error.problems().iter().map(Found::from).collect(),
                };
                terminal::print(&Document::text(vec![book]))?;
            }
            Ok(Outcome::of(&error))
        }
    }
}

fn json(input: String, report: &CheckReport) -> String {
    let differences = report
        .differences
        .iter()
        .map(|d| DifferenceOut {
            place: d.place.to_string(),
            role: d.role.clone(),
            found: d.found.clone(),
            expected: d.expected,
            difference: d.difference,
        })
        .collect();
    Document::text(vec![CheckedBook {
        input,
        status: report.status(),
        agree: report.agree,
        not_filled: report.not_filled.iter().map(ToString::to_string).collect(),
        differences,
        problems: report.problems.iter().map(Found::from).collect(),
    }])
}

fn text(input: &str, report: &CheckReport) -> String {
    let mut text = String::new();
    if !report.differences.is_empty() {
        let mut rows = vec![["Cell", "Role", "Found", "Expected", "Difference"].map(String::from).to_vec()];
        for d in &report.differences {
            rows.push(vec![
                d.place.to_string(),
                d.role.clone(),
                d.found.clone(),
                d.expected.map_or_else(|| "no number".into(), shortest),
                d.difference.map(shortest).unwrap_or_default(),
            ]);
        }
        text.push_str(&render::table(&rows));
        text.push('\n');
    }
    for place in &report.not_filled {
        text.push_str(&format!("{place}: not filled\n"));
    }
    let verdict = match (report.differences.len(), report.agree) {
        (0, 0) => "nothing was filled, so nothing was compared".to_owned(),
        (0, 1) => "the one filled cell agrees with the declared basis".to_owned(),
        (0, agree) => format!("all {agree} filled cells agree with the declared basis"),
        (1, agree) => format!("1 cell differs, {agree} agree"),
        (differ, agree) => format!("{differ} cells differ, {agree} agree"),
    };
    text.push_str(&format!("{input}: {verdict}\n"));
    escape(&text)
}
