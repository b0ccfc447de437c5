//! Roles of a workbook by its names, and a copy of it with suggested names.

use std::collections::BTreeMap;

use crate::fill::not_valued;
use crate::formulas::absolute;
use crate::model::Workbook;
use crate::names_edit::{BookEdit, NewName, edit_workbook};
use crate::package::{Changes, Package};
use crate::preflight::preflight;
use crate::problem::{Place, Problem, Result, Severity};
use crate::references::quote_sheet;
use crate::resolve::{Found, Options, names, resolve};
use crate::suggest::{Guess, suggest};

/// What the names say, and what was guessed.
#[derive(Clone, Debug, PartialEq)]
pub struct Naming {
    /// Roles found, in the order of options.
    pub found: Vec<Found>,
    /// What an appraisal needs and no name says; after a suggestion, what the guesses leave unsaid.
    pub missing: Vec<String>,
    /// Slips, and warnings about the file.
    pub problems: Vec<Problem>,
    /// Suggested names with their reasons; none unless asked for.
    pub guesses: Vec<Guess>,
    /// After a suggestion, rows of numbers along the years that got no name: heading and cells.
    pub not_named: Vec<String>,
}

/// Lists the roles of a workbook.
///
/// # Errors
/// The file cannot be read as a workbook.
pub fn roles_of(package: &Package) -> Result<Naming> {
    let mut problems = preflight(package)?;
    let report = names(package, &Workbook::read(package)?)?;
    problems.extend(report.slips);
    Ok(Naming {
        found: report.found,
        missing: report.missing,
        problems,
        guesses: Vec::new(),
        not_named: Vec::new(),
    })
}

/// Guesses years, flows, factors and results from headings and shapes, and writes names for them into a copy, whose
/// bytes are returned beside the report.
///
/// # Errors
/// As [`roles_of`]; nothing could be guessed.
pub fn with_suggestions(package: &Package) -> Result<(Naming, Vec<u8>)> {
    let mut report = roles_of(package)?;
    let book = Workbook::read(package)?;
    report.guesses = suggest(package, &book)?;
    if report.guesses.is_empty() {
        let message = "no row of years with flows beside it was found that has no names yet";
        return Err(Problem::error("nothing-to-suggest", Place::default(), message)
            .hint("name the cells by hand: hence_years, hence_cost_works and so on")
            .into());
    }
    let set_names = report
        .guesses
        .iter()
        .map(|guess| NewName {
            name: guess.name.clone(),
            scope: None,
            text: format!("{}!{}", quote_sheet(&guess.at.sheet), absolute(guess.at.range)),
            hidden: false,
            comment: None,
        })
        .collect();
    let part = package.workbook_part().to_owned();
    let xml = package.part(&part)?.unwrap_or_default();
    let edited = edit_workbook(&xml, &BookEdit { set_names, ..BookEdit::default() })?;
    let changes = Changes { replace: BTreeMap::from([(part, edited)]), ..Changes::default() };
    let bytes = package.write(&changes)?;
    // The copy is read back: names that cannot be used would be seen here, and what is still missing is told.
    let written = Package::from_bytes(package.file_name(), bytes.clone())?;
    let copy = roles_of(&written)?;
    report.missing = copy.missing;
    report.problems = copy.problems;
    // Any rate will do to see which rows would be left out, and what a fill would stop at.
    match resolve(&written, &Workbook::read(&written)?, &Options { basis: Some("0%"), ..Options::default() })
    {
        Ok(appraisal) => report.not_named = not_valued(&appraisal),
        Err(error) => {
            let stops = error.problems().iter().filter(|p| p.severity == Severity::Error);
            let missing = stops.filter(|p| p.code != "missing-role");
            report.problems.extend(missing.map(|p| Problem { severity: Severity::Warning, ..p.clone() }));
        }
    }
    Ok((report, bytes))
}
