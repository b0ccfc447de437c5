//! `hence brief`: one page for those who decide.

use std::path::{Path, PathBuf};

use hence_workbook::brief::{self, BriefRequest, brief};
use hence_workbook::package::write_atomically;
use hence_workbook::problem::Problem;
use hence_workbook::report::Status;
use serde::Serialize;

use crate::args::Brief;
use crate::input::is_dash;
use crate::json::{Document, FilledOption, Found};
use crate::outputs::{Output, stream};
use crate::progress::Progress;
use crate::terminal::{self, Terminal, escape};
use crate::{Failure, Outcome, input, render};

#[derive(Serialize)]
struct BriefedBook {
    input: String,
    output: Option<String>,
    status: Status,
    question: String,
    answer: Vec<String>,
    options: Vec<BriefedOption>,
    not_valued: Vec<String>,
    problems: Vec<Found>,
    caution: &'static str,
}

#[derive(Serialize)]
struct BriefedOption {
    #[serde(flatten)]
    totals: FilledOption,
    basis: String,
    baseline: bool,
    rank: usize,
}

/// How the page is written.
#[derive(Clone, Copy)]
enum Form {
    Html,
    Markdown,
}

/// Makes the page and writes it.
pub fn run(args: &Brief, schedules: &Option<PathBuf>, terminal: &Terminal) -> Result<Outcome, Failure> {
    let catalogue = super::catalogue(schedules)?;
    let request = BriefRequest {
        question: args.question.clone(),
        against: super::against(&args.against, &catalogue)?,
        roles: super::roles(&args.roles)?,
        plan: super::planned(&args.roles, Some(&args.of))?,
        as_of: args.signature.as_of.clone(),
        by: args.signature.by.clone(),
    };
    let (output, form) = output(&args.out)?;
    if output == Output::Stream && args.document.json {
        return Err(Failure::Message(
            "--out - and --json both want standard output\nTry: --out with a file".to_owned(),
        ));
    }
    let shown = input::shown(&args.source.book);
    let progress = Progress::start();
    progress.doing(&format!("briefing on {shown}"));
    let made = output.may_write(&args.source.book, args.overwrite.force).and_then(|()| {
        let found = brief(&input::open(&args.source.book)?, &request, &catalogue)?;
        let page = match form {
            Form::Html => brief::html(&found),
            Form::Markdown => brief::markdown(&found),
        };
        if let Output::File(path) = &output {
            write_atomically(path, page.as_bytes(), args.overwrite.force)?;
        }
        Ok((found, page))
    });
    drop(progress);
    match made {
        Ok((found, page)) => {
            render::problems(terminal, &shown, &found.problems);
            let text = text(&shown, &output.shown(), &found);
            if output == Output::Stream {
                stream(page.as_bytes())?;
                terminal.tell(&text);
            } else if args.document.json {
                terminal::print(&json(&shown, Some(output.shown()), &found))?;
            } else {
                terminal::print(&text)?;
            }
            Ok(if found.status() == Status::Done { Outcome::Done } else { Outcome::Wrong })
        }
        Err(error) => {
            render::problems(terminal, &shown, error.problems());
            if args.document.json {
                terminal::print(&failed(shown, error.problems()))?;
            }
            Ok(Outcome::of(&error))
        }
    }
}

/// Where the page goes, and how it is written.
fn output(path: &Path) -> Result<(Output, Form), Failure> {
    if is_dash(path) {
        return Ok((Output::Stream, Form::Html));
    }
    let ends = |extension: &str| path.extension().is_some_and(|e| e.eq_ignore_ascii_case(extension));
    let form = if ends("md") {
        Form::Markdown
    } else if ends("html") || ends("htm") {
        Form::Html
    } else {
        return Err(Failure::Message(format!(
            "--out {}: a brief is an .html or an .md file\nTry: --out {}, which a browser shows and prints",
            path.display(),
            path.with_extension("html").display()
        )));
    };
    Ok((Output::File(path.to_owned()), form))
}

fn text(input: &str, output: &str, found: &brief::Brief) -> String {
    let answer = found.answer.join("\n");
    escape(&format!("{input} -> {output}\n\n{}\n{answer}\n\n{}\n", found.question, hence_core::CAUTION))
}

fn json(input: &str, output: Option<String>, found: &brief::Brief) -> String {
    let options = found.options.iter().zip(&found.ranks).map(|(option, &rank)| BriefedOption {
        totals: FilledOption::from(option),
        basis: option.basis.clone(),
        baseline: option.baseline,
        rank,
    });
    Document::text(vec![BriefedBook {
        input: input.to_owned(),
        output,
        status: found.status(),
        question: found.question.clone(),
        answer: found.answer.clone(),
        options: options.collect(),
        not_valued: found.not_valued.clone(),
        problems: found.problems.iter().map(Found::from).collect(),
        caution: hence_core::CAUTION,
    }])
}

/// The document on a workbook that could not be briefed on.
fn failed(input: String, problems: &[Problem]) -> String {
    Document::text(vec![BriefedBook {
        input,
        output: None,
        status: Status::Failed,
        question: String::new(),
        answer: Vec::new(),
        options: Vec::new(),
        not_valued: Vec::new(),
        problems: problems.iter().map(Found::from).collect(),
        caution: hence_core::CAUTION,
    }])
}
