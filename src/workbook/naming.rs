//! Roles of a workbook by its names, and a copy of it with suggested names.

use std::path::Path;

use crate::model::Workbook;
use crate::names_edit::{BookEdit, NewName, edit_workbook};
use crate::package::{Changes, Package, same_file, write_atomically};
use crate::preflight::preflight;
use crate::problem::{Place, Problem, Result};
use crate::resolve::{Found, names};
use crate::suggest::{Guess, suggest};

/// What the names say, and what was guessed.
#[derive(Clone, Debug, PartialEq)]
pub struct Naming {
    /// Roles found, in the order of options.
    pub found: Vec<Found>,
    /// What an appraisal needs and no name says.
    pub missing: Vec<String>,
    /// Slips, and warnings about the file.
    pub problems: Vec<Problem>,
    /// Suggested names with their reasons; none unless asked for.
    pub guesses: Vec<Guess>,
}

/// Lists the roles of a workbook file.
///
/// # Errors
/// The file cannot be read as a workbook.
pub fn names_file(path: &Path) -> Result<Naming> {
    let (package, book, problems) = open(path)?;
    naming(&package, &book, problems)
}

/// Guesses years, flows, factors and results from headings and shapes, and writes names for them into a copy.
///
/// # Errors
/// As [`names_file`]; nothing could be guessed; the copy exists and `force` is false, or is the workbook itself.
pub fn suggest_file(path: &Path, copy: &Path, force: bool) -> Result<Naming> {
    let (package, book, problems) = open(path)?;
    if same_file(path, copy) {
        let place = Place::name(&copy.display().to_string());
        return Err(Problem::error("output-is-input", place, "the copy would replace the workbook")
            .hint("give --out another name")
            .into());
    }
    let mut report = naming(&package, &book, problems)?;
    report.guesses = suggest(&package, &book)?;
    if report.guesses.is_empty() {
        return Err(Problem::error("nothing-to-suggest", Place::default(), "no row of years with flows beside it was found")
            .hint("name the cells by hand: hence_years, hence_cost_works and so on")
            .into());
    }
    let set_names = report
        .guesses
        .iter()
        .map(|guess| NewName {
            name: guess.name.clone(),
            scope: guess.scope.clone(),
            text: guess.target(),
            hidden: false,
            comment: None,
        })
        .collect();
    let edit = BookEdit { set_names, ..BookEdit::default() };
    let part = package.workbook_part().to_owned();
    let xml = package.part(&part)?.unwrap_or_default();
    let mut changes = Changes::default();
    changes.replace.insert(part, edit_workbook(&xml, &edit)?);
    write_atomically(copy, &package.write(&changes)?, force)?;
    Ok(report)
}

fn open(path: &Path) -> Result<(Package, Workbook, Vec<Problem>)> {
    let package = Package::open(path)?;
    let problems = preflight(&package)?;
    let book = Workbook::read(&package)?;
    Ok((package, book, problems))
}

fn naming(package: &Package, book: &Workbook, mut problems: Vec<Problem>) -> Result<Naming> {
    let report = names(package, book)?;
    problems.extend(report.slips);
    Ok(Naming { found: report.found, missing: report.missing, problems, guesses: Vec::new() })
}
