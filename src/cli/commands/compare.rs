//! `hence compare`: the options under several bases, and where the decision switches.

use std::path::PathBuf;

use hence_core::Parameter;
use hence_workbook::compare::{CompareRequest, Comparison, book, compare, picture as draw};
use hence_workbook::package::write_atomically;
use hence_workbook::report::Status;

use crate::args::{Compare, MapOver};
use crate::outputs::{Output, stream};
use crate::progress::Progress;
use crate::terminal::{self, Terminal};
use crate::{Failure, Outcome, comparison, input, render};

/// Compares, prints, and writes the tables where asked.
pub fn run(args: &Compare, schedules: &Option<PathBuf>, terminal: &Terminal) -> Result<Outcome, Failure> {
    let catalogue = super::catalogue(schedules)?;
    let map = args.map.map(|map| match map {
        MapOver::Elasticity => Parameter::Elasticity,
        MapOver::Growth => Parameter::Growth,
    });
    let request = CompareRequest {
        against: super::against(&args.against, &catalogue)?,
        roles: super::roles(&args.roles)?,
        plan: super::planned(&args.roles, Some(&args.of))?,
        map,
    };
    let output = output(args)?;
    let picture = picture_output(args)?;
    let shown = input::shown(&args.source.book);
    let progress = Progress::start();
    progress.doing(&format!("comparing {shown}"));
    let outputs = output.iter().chain(&picture);
    let compared = outputs
        .clone()
        .try_for_each(|output| output.may_write(&args.source.book, args.overwrite.force))
        .and_then(|()| {
            let package = input::open(&args.source.book)?;
            let found = compare(&package, &request, &catalogue)?;
            let bytes = output.as_ref().map(|_| book(&package, &found)).transpose()?;
            if let (Some(Output::File(path)), Some(bytes)) = (&output, &bytes) {
                write_atomically(path, bytes, args.overwrite.force)?;
            }
            if let (Some(Output::File(path)), Some(map)) = (&picture, &found.map) {
                write_atomically(path, draw(&found, map).as_bytes(), args.overwrite.force)?;
            }
            Ok((found, bytes))
        });
    drop(progress);
    match compared {
        Ok((found, bytes)) => {
            render::problems(terminal, &shown, &found.problems);
            print(args, &shown, output.as_ref(), &found, terminal)?;
            if let (Some(Output::Stream), Some(bytes)) = (&output, bytes) {
                stream(&bytes)?;
            }
            Ok(if found.status() == Status::Done { Outcome::Done } else { Outcome::Wrong })
        }
        Err(error) => {
            render::problems(terminal, &shown, error.problems());
            if args.document.json {
                terminal::print(&comparison::failed(error.problems()))?;
            }
            Ok(Outcome::of(&error))
        }
    }
}

fn print(
    args: &Compare,
    shown: &str,
    output: Option<&Output>,
    found: &Comparison,
    terminal: &Terminal,
) -> Result<(), Failure> {
    if args.document.json {
        return terminal::print(&comparison::json(found));
    }
    if args.csv {
        return terminal::print(&comparison::csv(found));
    }
    let text = comparison::text(shown, output.map(Output::shown).as_deref(), found);
    if output == Some(&Output::Stream) {
        terminal.tell(&text);
        return Ok(());
    }
    terminal::print(&text)
}

/// Where the tables go.
fn output(args: &Compare) -> Result<Option<Output>, Failure> {
    let Some(path) = &args.out else { return Ok(None) };
    let output = Output::named(path)?;
    if output == Output::Stream && (args.document.json || args.csv) {
        return Err(Failure::Message(
            "--out - and --json or --csv both want standard output\nTry: --out with a file".to_owned(),
        ));
    }
    if let Output::File(path) = &output
        && !path.extension().is_some_and(|e| e.eq_ignore_ascii_case("xlsx"))
    {
        return Err(Failure::Message(format!(
            "--out {}: the tables are an .xlsx file\nTry: --out {}",
            path.display(),
            path.with_extension("xlsx").display()
        )));
    }
    Ok(Some(output))
}

/// Where the picture goes: a file.
fn picture_output(args: &Compare) -> Result<Option<Output>, Failure> {
    let Some(path) = &args.picture else { return Ok(None) };
    if path.extension().is_some_and(|e| e.eq_ignore_ascii_case("svg")) {
        return Ok(Some(Output::File(path.clone())));
    }
    let instead = path.with_extension("svg");
    let message =
        format!("--picture {}: the picture is an .svg file\nTry: {}", path.display(), instead.display());
    Err(Failure::Message(message))
}
