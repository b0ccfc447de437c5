//! One module a command.

pub mod brief;
pub mod check;
pub mod compare;
pub mod curve;
pub mod draws;
pub mod fill;
pub mod names;
pub mod plan;
pub mod rate;
pub mod schedules;
pub mod start;

use std::path::PathBuf;

use hence_core::{Basis, Catalogue};
use hence_workbook::planfile::PlanFile;

use crate::Failure;
use crate::args::{Against, OfSeveral, Roles};

/// The schedules in force: the user's folder first, then the built-in ones.
pub fn catalogue(folder: &Option<PathBuf>) -> Result<Catalogue, Failure> {
    hence_workbook::schedules::catalogue(folder.as_deref())
        .map_err(|error| Failure::Message(error.to_string()))
}

/// A library error about something typed on the command line, with the character it points at.
pub fn typed(error: &hence_core::Error, text: &str) -> Failure {
    let mut message = format!("{}: {} ({})", error.argument(), error.message(), error.code());
    if let Some(at) = error.at() {
        message.push_str(&format!("\n  {text}\n  {}^", " ".repeat(at)));
    }
    if let Some(hint) = error.hint() {
        message.push_str(&format!("\nTry: {hint}"));
    }
    Failure::Message(message)
}

/// The lines and ids that `--against` names, each looked at before any workbook is read.
pub fn against(args: &Against, catalogue: &Catalogue) -> Result<Vec<String>, Failure> {
    for line in &args.against {
        Basis::parse(line, catalogue).map_err(|error| typed(&error, line))?;
    }
    Ok(args.against.clone())
}

/// The `--role` pairs.
pub fn roles(args: &Roles) -> Result<Vec<(String, String)>, Failure> {
    let shape = "ROLE=RANGE, as in years=\"Sheet1!C4:Z4\"";
    args.roles.iter().map(|text| pair(text, "--role", shape)).collect()
}

/// The plan that `--plan` names, for all of its appraisals or for the one that is wanted.
pub fn planned(args: &Roles, of: Option<&OfSeveral>) -> Result<Option<PlanFile>, Failure> {
    let Some(path) = &args.plan else { return Ok(None) };
    let plan = PlanFile::open(path).map_err(|error| {
        let lines = error.problems().iter().map(|problem| {
            let place = problem.place.line.map(|line| format!(" line {line}")).unwrap_or_default();
            let hint = problem.hint.as_ref().map(|hint| format!("\nTry: {hint}")).unwrap_or_default();
            format!("{}{place}: {} ({}){hint}", path.display(), problem.message, problem.code)
        });
        Failure::Message(lines.collect::<Vec<_>>().join("\n"))
    })?;
    Ok(Some(plan.only(of.and_then(|of| of.appraisal.clone()))))
}

/// `A=B` in two.
pub fn pair(text: &str, flag: &str, shape: &str) -> Result<(String, String), Failure> {
    match text.split_once('=') {
        Some((a, b)) if !a.trim().is_empty() && !b.trim().is_empty() => {
            Ok((a.trim().into(), b.trim().into()))
        }
        _ => Err(Failure::Message(format!("{flag} {text}: expected {shape}"))),
    }
}
