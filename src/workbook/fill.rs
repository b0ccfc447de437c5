//! The main job: an analyst's workbook in, its targets filled, an audited workbook out.

mod basis;
mod bridge;
mod work;

use std::collections::{BTreeMap, BTreeSet};
use std::path::Path;

use hence_core::Catalogue;
use serde::{Deserialize, Serialize};

use crate::appraisal::{Appraisal, Covered};
use crate::follow;
use crate::graft::{Graft, graft};
use crate::model::Workbook;
use crate::own;
use crate::package::{Changes, Package, may_write, same_file, write_atomically};
use crate::patch::{Cached, CellWrite, patch_sheet};
use crate::plan::Stale;
use crate::planfile::{Part, PlanFile};
use crate::preflight::preflight;
use crate::problem::{Place, Problem, Result, Severity, WorkbookError};
use crate::references::{Cell, SheetRange};
use crate::report::Report;
use crate::settle;
use crate::sheets::{self, Composed, Meta, VERDICT_AGREES};
use crate::shelf::{Record, output_is_input, prepare, record_part, sealed};
use crate::stale;
use crate::verify::{Expected, verify};

use work::{Run, Work};

/// What the run is told besides the workbook.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct FillRequest {
    /// Value on this basis, and write it into the basis cell.
    pub basis: Option<String>,
    /// Value at this base, and write it into the base cell.
    pub base: Option<String>,
    /// Value in these prices (`real 2026`), and write them into the price basis cell.
    pub prices: Option<String>,
    /// Change the basis from the first to the second; another basis is refused.
    pub replace: Option<(String, String)>,
    /// Roles for cells without a defined name: role, range.
    pub roles: Vec<(String, String)>,
    /// What is where, for a workbook without names.
    pub plan: Option<PlanFile>,
    /// Targets get live formulas; else plain numbers.
    pub formulas: bool,
    /// Formulas found in targets are replaced, not compared.
    pub replace_formulas: bool,
    /// Rate lines or ids of schedules to value it on besides, for the sensitivity sheet.
    pub against: Vec<String>,
    /// LibreOffice computes what has no result, so that every formula of the output has one.
    pub settle: bool,
    /// For the audit summary.
    pub as_of: Option<String>,
    /// For the audit summary.
    pub by: Option<String>,
}

impl Default for FillRequest {
    fn default() -> Self {
        FillRequest {
            basis: None,
            base: None,
            prices: None,
            replace: None,
            roles: Vec::new(),
            plan: None,
            formulas: true,
            replace_formulas: false,
            against: Vec::new(),
            settle: false,
            as_of: None,
            by: None,
        }
    }
}

/// A filled workbook that has not been written yet.
#[derive(Debug)]
pub struct Filled {
    /// The output package.
    pub bytes: Vec<u8>,
    /// What was found and done.
    pub report: Report,
    /// From what it was made: hashes and version.
    pub meta: Meta,
}

/// Fills one workbook file. The output appears whole under its name, or not at all; the input is never written.
///
/// # Errors
/// Everything that keeps the workbook from being filled, each with its cell; or that the output exists and `force` is
/// false, or is the input.
pub fn fill_file(
    input: &Path,
    output: &Path,
    request: &FillRequest,
    catalogue: &Catalogue,
    force: bool,
) -> Result<Report> {
    let package = Package::open(input)?;
    if same_file(input, output) {
        return Err(output_is_input(output));
    }
    may_write(output, force)?;
    let filled = fill(&package, request, catalogue)?;
    write_atomically(output, &filled.bytes, force)?;
    Ok(filled.report)
}

/// Fills one workbook in memory.
///
/// # Errors
/// As [`fill_file`].
pub fn fill(package: &Package, request: &FillRequest, catalogue: &Catalogue) -> Result<Filled> {
    let mut noticed = preflight(package)?;
    package.graftable().map_err(|problem| WorkbookError::from(*problem))?;
    if package.is_template() {
        let message =
            format!("the file is a template: the output is a workbook (.{})", package.format().extension());
        let template = Problem::error("template", Place::default(), message);
        noticed.push(Problem { severity: Severity::Note, ..template });
    }
    let book = Workbook::read(package)?;
    let parts = match &request.plan {
        Some(plan) => plan.parts(&book)?.into_iter().map(Some).collect(),
        None => vec![None],
    };
    let own = own::own_sheets(&book);
    let left = work::left_for(&parts, &own);
    let previous: Vec<own::OwnSheet> = left.iter().flatten().cloned().collect();
    let run = Run { package, book: &book, request, catalogue, own: &own, previous: &previous };
    let mut works = begun(&run, &parts, &left)?;
    for work in &mut works {
        work.problems.splice(0..0, noticed.iter().cloned());
    }
    work::check_apart(&works)?;

    let written: Vec<SheetRange> = works.iter().flat_map(|work| work.plan.changed.clone()).collect();
    let dependents = stale::dependents(package, &book, &written)?;
    let foreign =
        dependents.cells.iter().filter(|(sheet, _)| !previous.iter().any(|own| own.index == **sheet));
    let stale: Stale =
        foreign.map(|(sheet, cells)| (book.sheets[*sheet].name.clone(), cells.clone())).collect();
    let mut writes: BTreeMap<String, BTreeMap<Cell, CellWrite>> = BTreeMap::new();
    for work in &mut works {
        work.follow(&run, &stale, &written)?;
        work.problems.extend(dependents.warnings.iter().cloned());
        for (sheet, cells) in std::mem::take(&mut work.plan.writes) {
            writes.entry(sheet).or_default().extend(cells);
        }
    }
    for (name, cells) in stale {
        let writes = writes.entry(name).or_default();
        for cell in cells {
            writes.entry(cell).or_insert(CellWrite::DropValue);
        }
    }

    let built = composed(&works)?;
    let ours = Package::from_bytes("audit.xlsx", built.bytes)?;
    let leaving: Vec<String> = previous.iter().map(|sheet| sheet.name.clone()).collect();
    let grafted = graft(
        package,
        &Graft {
            ours: &ours,
            previous: &leaving,
            set_names: &built.names,
            remove_names: &[],
            charts: &built.charts,
        },
    )?;
    let mut changes = grafted.changes;
    prepare(package, &mut changes)?;
    patch(&mut changes, package, &book, &writes)?;
    let mut bytes = package.write(&changes)?;
    let unknown: Vec<SheetRange> = works.iter().flat_map(|work| work.unknown.clone()).collect();
    if !unknown.is_empty() {
        let made = Package::from_bytes(package.file_name(), bytes)?;
        follow::forget(&made, &unknown, &grafted.sheets, &mut writes, &mut changes)?;
        patch(&mut changes, package, &book, &writes)?;
        bytes = package.write(&changes)?;
    }
    let (mut report, meta) = (report(&works, built.verdicts), work::meta_of_all(&works));
    if !request.settle {
        report.awaiting = awaiting(&writes);
        let bytes = sealed(bytes, &Record::filled(&meta, &report))?;
        changes.add.push((record_part().to_owned(), Vec::new()));
        changes.forget_contents();
        verify(
            package,
            &bytes,
            &Expected { changes: &changes, writes: &writes, own_sheets: &grafted.sheets },
        )?;
        return Ok(Filled { bytes, report, meta });
    }
    changes.forget_contents();
    verify(package, &bytes, &Expected { changes: &changes, writes: &writes, own_sheets: &grafted.sheets })?;
    let bytes = settled(package.file_name(), bytes, &meta, &mut report)?;
    Ok(Filled { bytes, report, meta })
}

/// The output with a result in every formula, sealed; and a verdict that rested on such results as it is now.
fn settled(name: &str, bytes: Vec<u8>, meta: &Meta, report: &mut Report) -> Result<Vec<u8>> {
    let made = Package::from_bytes(name, bytes)?;
    let book = Workbook::read(&made)?;
    let writes = settle::settled(&made, &book)?;
    settle::settle_verdicts(&book, &writes, report);
    let mut changes = Changes::default();
    patch(&mut changes, &made, &book, &writes)?;
    let bytes = sealed(made.write(&changes)?, &Record::filled(meta, report))?;
    changes.add.push((record_part().to_owned(), Vec::new()));
    changes.forget_contents();
    verify(&made, &bytes, &Expected { changes: &changes, writes: &writes, own_sheets: &[] })?;
    Ok(bytes)
}

/// The formulas that have no result until a spreadsheet program opens the output, by sheet in words.
fn awaiting(writes: &settle::Writes) -> Vec<String> {
    let blank =
        |write: &CellWrite| matches!(write, CellWrite::DropValue | CellWrite::Formula(_, Cached::None));
    let cells = |cells: &BTreeMap<Cell, CellWrite>| -> Vec<Cell> {
        cells.iter().filter(|(_, write)| blank(write)).map(|(cell, _)| *cell).collect()
    };
    writes.iter().filter_map(|(sheet, all)| settle::in_words(sheet, &cells(all))).collect()
}

/// Every appraisal, resolved, valued and decided.
fn begun(run: &Run<'_>, parts: &[Option<Part>], left: &[Vec<own::OwnSheet>]) -> Result<Vec<Work>> {
    let mut taken = foreign_sheets(run.book, run.previous);
    let (mut works, mut problems) = (Vec::new(), Vec::new());
    for (part, left) in parts.iter().zip(left) {
        match Work::begin(run, part.as_ref(), left, &taken) {
            Ok(work) => {
                taken.extend(work.names.all().map(str::to_owned));
                works.push(work);
            }
            Err(error) => problems.extend(error.problems().iter().cloned()),
        }
    }
    if problems.is_empty() { Ok(works) } else { Err(each_once(problems).into()) }
}

/// hence's sheets of every appraisal in one package.
struct Built {
    bytes: Vec<u8>,
    charts: Vec<crate::graft::ChartFinish>,
    names: Vec<crate::names_edit::NewName>,
    /// One an appraisal.
    verdicts: Vec<String>,
}

/// Composes the sheets of every appraisal; the first one's summary gathers the verdicts of several.
fn composed(works: &[Work]) -> Result<Built> {
    let differs = differs(works.len() > 1 || works[0].name.is_some());
    let mut siblings: Vec<sheets::Sibling> = Vec::new();
    let mut all: Vec<Composed> = Vec::new();
    for work in works.iter().rev() {
        let first = all.len() + 1 == works.len();
        let composed =
            sheets::compose(&work.audit(&differs, if first { &siblings } else { &[] }), &work.layout);
        siblings.insert(0, sheets::Sibling::of(&work.names, work.name.as_deref(), &composed));
        all.insert(0, composed);
    }
    let mut verdicts: Vec<String> = all.iter().map(|composed| composed.built.verdict.clone()).collect();
    for (verdict, work) in verdicts.iter_mut().zip(works) {
        if !work.unknown.is_empty() && verdict == VERDICT_AGREES {
            follow::AWAITS.clone_into(verdict);
        }
    }
    let bytes = sheets::package(&all)?;
    let (mut charts, mut names) = (Vec::new(), Vec::new());
    for composed in all {
        charts.extend(composed.built.charts);
        names.extend(composed.built.names);
    }
    Ok(Built { bytes, charts, names, verdicts })
}

fn report(works: &[Work], verdicts: Vec<String>) -> Report {
    let problems = works.iter().flat_map(|work| work.problems.iter().cloned()).collect();
    let appraisals = works.iter().zip(&verdicts).filter_map(|(work, verdict)| work.report(verdict)).collect();
    let all = works.iter().map(|work| work.name.as_deref().unwrap_or_default()).zip(verdicts);
    Report {
        options: works.iter().flat_map(Work::options).collect(),
        appraisals,
        problems: each_once(problems),
        filled: works.iter().map(|work| work.plan.filled).sum(),
        ticked: works.iter().map(|work| work.plan.ticked).sum(),
        not_valued: works.iter().flat_map(Work::not_valued).collect(),
        awaiting: Vec::new(),
        verdict: sheets::overall(&all.collect::<Vec<_>>()),
    }
}

/// What several appraisals have in common is said once.
fn each_once(problems: Vec<Problem>) -> Vec<Problem> {
    let mut seen = BTreeSet::new();
    let id = |problem: &Problem| format!("{problem} {:?} {:?}", problem.severity, problem.hint);
    problems.into_iter().filter(|problem| seen.insert(id(problem))).collect()
}

/// Rows of numbers along the years that no role names.
pub(crate) fn rows_not_valued(appraisal: &Appraisal) -> impl Iterator<Item = &Covered> {
    appraisal.coverage.iter().filter(|row| row.roles.is_empty() && !row.follows)
}

/// The same in words: heading and cells.
pub(crate) fn not_valued(appraisal: &Appraisal) -> Vec<String> {
    rows_not_valued(appraisal)
        .map(|row| match row.heading.as_str() {
            "" => row.at.to_string(),
            heading => format!("{heading} ({})", row.at),
        })
        .collect()
}

/// The sheets with what is written into them.
fn patch(
    changes: &mut Changes,
    package: &Package,
    book: &Workbook,
    writes: &BTreeMap<String, BTreeMap<Cell, CellWrite>>,
) -> Result<()> {
    for (name, writes) in writes {
        let Some(index) = book.sheet_index(name) else { continue };
        let part = &book.sheets[index].part;
        let xml = package.part(part)?.unwrap_or_default();
        let new = patch_sheet(&xml, writes).map_err(|error| in_sheet(error, name))?;
        changes.replace.insert(part.clone(), new);
    }
    Ok(())
}

/// The names of sheets that are not hence's own.
fn foreign_sheets(book: &Workbook, previous: &[own::OwnSheet]) -> Vec<String> {
    let own: BTreeSet<usize> = previous.iter().map(|sheet| sheet.index).collect();
    let sheets = book.sheets.iter().enumerate();
    sheets.filter(|(i, _)| !own.contains(i)).map(|(_, sheet)| sheet.name.clone()).collect()
}

/// A patch knows the cell but not the sheet: the sheet's name is added here.
fn in_sheet(error: WorkbookError, sheet: &str) -> WorkbookError {
    let mut problems = error.problems().to_vec();
    for problem in &mut problems {
        if problem.place.range.is_some() {
            problem.place.sheet = Some(sheet.to_owned());
        }
    }
    problems.into()
}

/// What differs in the package by design, a sentence each, for the audit summary.
fn differs(several: bool) -> Vec<String> {
    let names = match several {
        false => "the names hence_verdict, hence_own and hence_digest",
        true => {
            "the names hence_verdict, one that begins so for each appraisal, hence_own, hence_digest and hence_appraisal"
        }
    };
    let sheets = format!("The sheet list, {names}, and cell formats appended for the new sheets.");
    [
        "Filled cells and hence's own sheets; every other cell is as it was.",
        &sheets,
        "The list of content types and the workbook's relationships; the calculation chain is removed.",
        "A record of this fill for later runs (the part hence/record.json), which spreadsheet programs pass over.",
        "The workbook is marked to be calculated when it is opened.",
        "Stored results of formulas that depend on filled cells are removed, so that nothing stale can be read.",
    ]
    .map(String::from)
    .to_vec()
}
