//! `hence fill`: the main job, on one workbook or several.

use std::path::{Path, PathBuf};

use hence_workbook::fill::{FillRequest, fill_file};

use crate::args::{Fill, WriteWhat};
use crate::json::{Document, FilledBook};
use crate::terminal::Terminal;
use crate::{Failure, Outcome, outputs, render, terminal};

/// Fills every workbook; one that fails does not keep the others from being filled.
pub fn run(args: &Fill, schedules: &Option<PathBuf>, terminal: &Terminal) -> Result<Outcome, Failure> {
    let catalogue = super::catalogue(schedules)?;
    let request = FillRequest {
        basis: args.basis.clone(),
        replace: args.replace.as_deref().map(|text| pair(text, "--replace", "OLD=NEW")).transpose()?,
        roles: roles(&args.roles)?,
        formulas: args.write == WriteWhat::Formulas,
        replace_formulas: args.replace_formulas,
        as_of: args.as_of.clone(),
        by: args.by.clone(),
    };
    let several = args.books.len() > 1;
    let mut outputs = Vec::new();
    for book in &args.books {
        outputs.push(outputs::output_for(book, args.out.as_deref(), several)?);
    }
    for (i, output) in outputs.iter().enumerate() {
        if let Some(j) = outputs[..i].iter().position(|other| other == output) {
            return Err(Failure::Message(format!(
                "{} and {} would both be written to {}\nTry: fill them into different folders",
                args.books[j].display(),
                args.books[i].display(),
                output.display()
            )));
        }
    }
    let mut books = Vec::new();
    let mut ended = Outcome::Done;
    let mut text = String::new();
    for (book, output) in args.books.iter().zip(&outputs) {
        let shown = book.display().to_string();
        match fill_file(book, output, &request, &catalogue, args.force) {
            Ok(report) => {
                render::problems(terminal, &file_name(book), &report.problems);
                if report.status() != hence_workbook::report::Status::Done {
                    ended = worse(ended, Outcome::Wrong);
                }
                if args.json {
                    books.push(FilledBook::filled(shown, output.display().to_string(), &report));
                } else {
                    if !text.is_empty() {
                        text.push('\n');
                    }
                    text.push_str(&render::report(&shown, &output.display().to_string(), &report));
                }
            }
            Err(error) => {
                render::problems(terminal, &file_name(book), error.problems());
                ended =
                    worse(ended, if error.is_about_files() { Outcome::CouldNotRun } else { Outcome::Wrong });
                books.push(FilledBook::failed(shown, error.problems()));
            }
        }
    }
    terminal::print(&if args.json { Document::text(books) } else { text })?;
    Ok(ended)
}

/// The worse of two ends.
fn worse(a: Outcome, b: Outcome) -> Outcome {
    match (a, b) {
        (Outcome::CouldNotRun, _) | (_, Outcome::CouldNotRun) => Outcome::CouldNotRun,
        (Outcome::Wrong, _) | (_, Outcome::Wrong) => Outcome::Wrong,
        _ => Outcome::Done,
    }
}

pub fn file_name(path: &Path) -> String {
    path.file_name().unwrap_or(path.as_os_str()).to_string_lossy().into_owned()
}

/// `A=B` in two.
fn pair(text: &str, flag: &str, shape: &str) -> Result<(String, String), Failure> {
    match text.split_once('=') {
        Some((a, b)) if !a.trim().is_empty() && !b.trim().is_empty() => {
            Ok((a.trim().into(), b.trim().into()))
        }
        _ => Err(Failure::Message(format!("{flag} {text}: expected {shape}"))),
    }
}

/// The `--role` pairs.
pub fn roles(texts: &[String]) -> Result<Vec<(String, String)>, Failure> {
    texts.iter().map(|text| pair(text, "--role", "ROLE=RANGE, as in years=\"Sheet1!C4:Z4\"")).collect()
}
