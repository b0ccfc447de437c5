//! `hence fill`: the main job, on one workbook or several.

use std::path::{Path, PathBuf};

use hence_core::Catalogue;
use hence_workbook::fill::{FillRequest, fill, fill_file};
use hence_workbook::package::write_atomically;
use hence_workbook::problem::Result as BookResult;
use hence_workbook::report::{Report, Status};

use crate::args::{Fill, WriteWhat};
use crate::json::{Document, FilledBook};
use crate::outputs::{Folder, Output, outputs_for, stream};
use crate::progress::Progress;
use crate::terminal::{self, Terminal};
use crate::{Failure, Outcome, input, render};

/// Fills every workbook; one that fails does not keep the others from being filled.
pub fn run(args: &Fill, schedules: &Option<PathBuf>, terminal: &Terminal) -> Result<Outcome, Failure> {
    let catalogue = super::catalogue(schedules)?;
    let request = FillRequest {
        basis: args.basis.clone(),
        base: args.base.clone(),
        prices: args.prices.clone(),
        replace: args.replace.as_deref().map(|text| super::pair(text, "--replace", "OLD=NEW")).transpose()?,
        roles: super::roles(&args.roles)?,
        plan: super::planned(&args.roles, None)?,
        formulas: args.write == WriteWhat::Formulas,
        replace_formulas: args.replace_formulas,
        against: super::against(&args.against, &catalogue)?,
        as_of: args.signature.as_of.clone(),
        by: args.signature.by.clone(),
    };
    let outputs = outputs_for(&args.books, args.out.as_deref())?;
    let streams = outputs.contains(&Output::Stream);
    if streams && args.document.json {
        return Err(Failure::Message(
            "--json and a workbook both want standard output\nTry: --out with a file".into(),
        ));
    }
    let _folder = Folder::make(args.out.as_deref())?;
    let progress = Progress::start();
    let mut books = Vec::new();
    let mut texts = Vec::new();
    let mut ended = Outcome::Done;
    for (i, (book, output)) in args.books.iter().zip(&outputs).enumerate() {
        let (shown, written) = (input::shown(book), output.shown());
        progress.doing(&match args.books.len() {
            1 => format!("filling {shown}"),
            n => format!("filling {} of {n}: {shown}", i + 1),
        });
        let filled = fill_one(book, output, &request, &catalogue, args.overwrite.force);
        progress.pause();
        match filled {
            Ok((report, bytes)) => {
                render::problems(terminal, &shown, &report.problems);
                if report.status() != Status::Done {
                    ended = ended.max(Outcome::Wrong);
                }
                if let Some(bytes) = bytes {
                    stream(&bytes)?;
                }
                texts.push(render::report(&shown, &written, &report));
                books.push(FilledBook::filled(shown, written, &report));
            }
            Err(error) => {
                render::problems(terminal, &shown, error.problems());
                terminal.complain(&format!("{shown}: not filled"));
                ended = ended.max(Outcome::of(&error));
                books.push(FilledBook::failed(shown, error.problems()));
            }
        }
    }
    drop(progress);
    let text = texts.join("\n");
    if args.document.json {
        terminal::print(&Document::text(books))?;
    } else if streams {
        terminal.tell(&text);
    } else {
        terminal::print(&text)?;
    }
    Ok(ended)
}

/// Fills one; the bytes come back where they go to standard output.
fn fill_one(
    book: &Path,
    output: &Output,
    request: &FillRequest,
    catalogue: &Catalogue,
    force: bool,
) -> BookResult<(Report, Option<Vec<u8>>)> {
    match output {
        Output::File(path) if !input::is_dash(book) => {
            fill_file(book, path, request, catalogue, force).map(|report| (report, None))
        }
        Output::File(path) => {
            let filled = fill(&input::open(book)?, request, catalogue)?;
            write_atomically(path, &filled.bytes, force)?;
            Ok((filled.report, None))
        }
        Output::Stream => {
            let filled = fill(&input::open(book)?, request, catalogue)?;
            Ok((filled.report, Some(filled.bytes)))
        }
    }
}
