//! `hence check`: what is wrong with workbooks, against what their declared basis gives.

use std::path::{Path, PathBuf};

use hence_workbook::check::{CheckReport, CheckRequest, check};
use hence_workbook::findings::Finding;
use hence_workbook::marked::mark_file;
use hence_workbook::report::Status;
use serde::Serialize;

use crate::args::Check;
use crate::json::{Document, Found};
use crate::numbers::{count, money};
use crate::progress::Progress;
use crate::shelf::gather::gather;
use crate::shelf::walk::For;
use crate::terminal::{self, Terminal, escape};
use crate::{Failure, Outcome, input, render};

#[derive(Serialize)]
struct CheckedBook {
    input: String,
    status: Status,
    findings: Vec<FindingOut>,
    agree: usize,
    not_filled: Vec<String>,
    differences: Vec<DifferenceOut>,
    problems: Vec<Found>,
}

#[derive(Serialize)]
struct FindingOut {
    code: &'static str,
    place: String,
    found: String,
    expected: String,
    effect_on_npv: Option<f64>,
    #[serde(skip_serializing_if = "Option::is_none")]
    ranking: Option<String>,
    confidence: f64,
    words: String,
}

#[derive(Serialize)]
struct DifferenceOut {
    place: String,
    role: String,
    found: Content,
    expected: Option<Content>,
    difference: Option<f64>,
}

/// What a cell holds or should hold: numbers where both are, else texts.
#[derive(Serialize)]
#[serde(untagged)]
enum Content {
    Number(f64),
    Text(String),
}

/// Exit 0 when nothing is wrong, 1 on any finding.
pub fn run(args: &Check, schedules: &Option<PathBuf>, terminal: &Terminal) -> Result<Outcome, Failure> {
    let catalogue = super::catalogue(schedules)?;
    let (roles, plan) = (super::roles(&args.roles)?, super::planned(&args.roles, Some(&args.of))?);
    let request = CheckRequest { roles, plan };
    let gathered = gather(&args.books, For::Checking)?;
    let mut ended = gathered.tell(terminal);
    let paths: Vec<PathBuf> = gathered.inputs.into_iter().map(|input| input.path).collect();
    if let Some(out) = &args.out {
        one_output(&paths, out)?;
    }
    let (mut books, mut texts) = (Vec::new(), Vec::new());
    let progress = Progress::start();
    for (i, path) in paths.iter().enumerate() {
        let shown = input::shown(path);
        let of = if paths.len() > 1 { format!(" ({} of {})", i + 1, paths.len()) } else { String::new() };
        progress.doing(&format!("checking {shown}{of}"));
        let checked_book = input::open(path).and_then(|package| {
            let report = check(&package, &request, &catalogue)?;
            if let Some(out) = &args.out {
                let path = (!input::is_dash(path)).then_some(path.as_path());
                mark_file(&package, &report, path, out, args.overwrite.force)?;
            }
            Ok(report)
        });
        match checked_book {
            Ok(report) => {
                render::problems(terminal, &shown, &report.problems);
                let outcome = if report.agrees() { Outcome::Done } else { Outcome::Wrong };
                ended = ended.max(outcome);
                let marked = args.out.as_ref().map(|out| format!("{shown} -> {}\n", out.display()));
                texts.push(text(&shown, &report) + &escape(&marked.unwrap_or_default()));
                books.push(checked(shown, &report));
            }
            Err(error) => {
                render::problems(terminal, &shown, error.problems());
                if paths.len() > 1 {
                    terminal.complain(&format!("{shown}: not checked"));
                }
                ended = ended.max(Outcome::of(&error));
                books.push(CheckedBook {
                    input: shown,
                    status: Status::Failed,
                    findings: Vec::new(),
                    agree: 0,
                    not_filled: Vec::new(),
                    differences: Vec::new(),
                    problems: error.problems().iter().map(Found::from).collect(),
                });
            }
        }
    }
    drop(progress);
    terminal::print(&if args.document.json { Document::text(books) } else { texts.join("\n") })?;
    Ok(ended)
}

/// A marked copy is of one workbook, and a workbook.
fn one_output(books: &[PathBuf], out: &Path) -> Result<(), Failure> {
    let kind = out.extension().unwrap_or_default().to_ascii_lowercase();
    if kind != "xlsx" && kind != "xlsm" {
        let message = format!("--out {}: expected a file that ends in .xlsx or .xlsm", out.display());
        return Err(Failure::Message(message));
    }
    if books.len() > 1 {
        let message =
            format!("--out {} is one file, and {} workbooks are checked", out.display(), books.len());
        return Err(Failure::Message(format!("{message}\nTry: check each by itself, with --out of its own")));
    }
    Ok(())
}

fn checked(input: String, report: &CheckReport) -> CheckedBook {
    let findings = report.findings.iter().map(|finding| FindingOut {
        code: finding.kind.code(),
        place: finding.place.cells_words(),
        found: finding.found.clone(),
        expected: finding.expected.clone(),
        effect_on_npv: finding.effect_on_npv,
        ranking: finding.ranking.clone(),
        confidence: finding.confidence,
        words: finding.words.clone(),
    });
    let differences = report.differences.iter().map(|d| {
        let (found, expected) = match (d.number, d.expected) {
            (Some(found), Some(expected)) => (Content::Number(found), Some(Content::Number(expected))),
            (_, expected) => (Content::Text(d.found.clone()), expected.map(|x| Content::Text(x.to_string()))),
        };
        DifferenceOut {
            place: d.place.to_string(),
            role: d.role.clone(),
            found,
            expected,
            difference: d.difference,
        }
    });
    CheckedBook {
        input,
        status: report.status(),
        findings: findings.collect(),
        agree: report.agree,
        not_filled: report.not_filled.iter().map(ToString::to_string).collect(),
        differences: differences.collect(),
        problems: report.problems.iter().map(Found::from).collect(),
    }
}

/// What was found in one workbook, its name first.
fn text(input: &str, report: &CheckReport) -> String {
    let cells = match (report.differences.len(), report.agree) {
        (0, 0) => "nothing was filled, so nothing was compared".to_owned(),
        (0, 1) => "the one filled cell agrees with the declared basis".to_owned(),
        (0, agree) => format!("all {agree} filled cells agree with the declared basis"),
        (1, agree) => format!("1 cell differs, {agree} agree"),
        (differ, agree) => format!("{differ} cells differ, {agree} agree"),
    };
    let mut text = match report.findings.len() {
        0 => format!("{input}: {cells}\n"),
        n => format!("{input}: {}; {cells}\n", count(n, "finding")),
    };
    for finding in &report.findings {
        text.push_str(&told(finding));
    }
    for place in &report.not_filled {
        text.push_str(&format!("{place}: not filled\n"));
    }
    escape(&text)
}

/// A finding in a few lines: kind and place, the evidence, what is there and what should be, what it does.
fn told(finding: &Finding) -> String {
    let mut text = format!("{}  {}\n", finding.kind.code(), finding.place);
    text.push_str(&format!("    {}\n", finding.words));
    text.push_str(&format!("    found {}; expected {}\n", finding.found, finding.expected));
    let effect = match finding.effect_on_npv {
        Some(effect) if effect > 0.0 => format!("the NPV is {} too high", amount(effect)),
        Some(effect) if effect < 0.0 => format!("the NPV is {} too low", amount(-effect)),
        Some(_) => "the NPV stays as it is".to_owned(),
        None => "its effect on the NPV is not known".to_owned(),
    };
    let ranking = finding.ranking.as_ref().map(|ranking| format!("; {ranking}")).unwrap_or_default();
    // Nothing that is inferred is wholly sure.
    let sure = if finding.confidence > 0.99 {
        "over 99".to_owned()
    } else {
        format!("{:.0}", 100.0 * finding.confidence)
    };
    text.push_str(&format!("    {effect}{ranking}; {sure}% sure\n"));
    text
}

/// An amount as money; what money would show as nothing, by its first digits.
fn amount(x: f64) -> String {
    if x < 0.01 { format!("{x:.1e}") } else { money(x) }
}
