//! The main job: an analyst's workbook in, its targets filled, an audited workbook out.

use std::collections::{BTreeMap, BTreeSet};
use std::path::Path;

use hence_core::{Basis, Catalogue, Compounding, Spec};
use sha2::{Digest, Sha256};

use crate::appraisal::{Appraisal, Covered, Given, Setting, Stated};
use crate::companions::companions;
use crate::compare::sensitivity;
use crate::follow;
use crate::graft::{Graft, graft};
use crate::layout::Layout;
use crate::model::Workbook;
use crate::outcome::ChoiceOutcome;
use crate::own::{self, OwnSheet};
use crate::package::{Changes, Package, may_write, same_file, write_atomically};
use crate::patch::{CellWrite, patch_sheet};
use crate::plan::{Plan, Stale, Ways, plan_targets};
use crate::preflight::preflight;
use crate::problem::{Place, Problem, Result, Severity, WorkbookError};
use crate::reading::{ReadCell, Sheets, Value};
use crate::references::{Cell, SheetRange};
use crate::report::{Report, option_reports};
use crate::resolve::{Options, resolve};
use crate::sheets::{AuditInput, Meta, SheetNames, VERDICT_AGREES, build};
use crate::stale;
use crate::valuation::{from_core, value};
use crate::verify::{Expected, verify};

/// What the run is told besides the workbook.
#[derive(Clone, Debug)]
pub struct FillRequest {
    /// Value on this basis, and write it into the basis cell.
    pub basis: Option<String>,
    /// Change the basis from the first to the second; another basis is refused.
    pub replace: Option<(String, String)>,
    /// Roles for cells without a defined name: role, range.
    pub roles: Vec<(String, String)>,
    /// Targets get live formulas; else plain numbers.
    pub formulas: bool,
    /// Formulas found in targets are replaced, not compared.
    pub replace_formulas: bool,
    /// Rate lines or ids of schedules to value it on besides, for the sensitivity sheet.
    pub against: Vec<String>,
    /// For the audit summary.
    pub as_of: Option<String>,
    /// For the audit summary.
    pub by: Option<String>,
}

impl Default for FillRequest {
    fn default() -> Self {
        FillRequest {
            basis: None,
            replace: None,
            roles: Vec::new(),
            formulas: true,
            replace_formulas: false,
            against: Vec::new(),
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
        let message = format!("the output {} is the input, which is never written", output.display());
        return Err(Problem::error("output-is-input", Place::default(), message)
            .hint("give --out another name")
            .into());
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
    let mut problems = preflight(package)?;
    package.graftable().map_err(|problem| WorkbookError::from(*problem))?;
    if package.is_template() {
        let message =
            format!("the file is a template: the output is a workbook (.{})", package.format().extension());
        let template = Problem::error("template", Place::default(), message);
        problems.push(Problem { severity: Severity::Note, ..template });
    }
    let book = Workbook::read(package)?;
    let previous = own::own_sheets(&book);
    let stated = request.replace.as_ref().map(|(_, new)| new).or(request.basis.as_ref());
    // A basis given on the command line stands in where the workbook has none; where it has one, the cell is kept so
    // that the new basis can be written into it.
    let mut appraisal =
        resolve(package, &book, &Options { roles: &request.roles, basis: stated.map(String::as_str) })?;
    problems.append(&mut appraisal.problems);
    // What the workbook itself declares, where it does.
    let declared = match stated {
        Some(_) => resolve(package, &book, &Options { roles: &request.roles, basis: None }).ok(),
        None => None,
    };
    if let Some((old, _)) = &request.replace {
        require_basis(&appraisal, declared.as_ref(), old, catalogue)?;
    }
    let (outcomes, found) = value(&appraisal, catalogue)?;
    problems.extend(found);
    let companions = companions(&appraisal, &outcomes, catalogue, &mut problems);
    let sensitivity = sensitivity(&appraisal, &outcomes, &request.against, catalogue)?;
    problems.extend(sensitivity.comparison.problems.iter().cloned());
    let names = SheetNames::choose(&foreign_sheets(&book, &previous));
    let layout = Layout::new(&appraisal, &outcomes, &names);

    let earlier = own::written(package, &book, &previous, &names)?;
    let plan_with = |stale: &Stale| -> Result<Plan> {
        let ways = Ways {
            previous: &previous,
            written: &earlier,
            formulas: request.formulas,
            replace_formulas: request.replace_formulas,
            stale,
        };
        let mut plan = plan_targets(&appraisal, &outcomes, &layout, &ways);
        if let Some(basis) = stated {
            plan_basis(&mut plan, package, &book, &appraisal, &outcomes, basis)?;
        }
        Ok(plan)
    };
    let mut plan = plan_with(&Stale::new())?;
    let carried = own::carried(package, &book, &previous, &names)?;

    let written: Vec<SheetRange> = plan.changed.clone();
    let dependents = stale::dependents(package, &book, &written)?;
    let foreign =
        dependents.cells.iter().filter(|(sheet, _)| !previous.iter().any(|own| own.index == **sheet));
    let stale: Stale =
        foreign.map(|(sheet, cells)| (book.sheets[*sheet].name.clone(), cells.clone())).collect();
    if plan.cells.iter().any(|cell| !cell.filled && follow::any(&stale, &cell.at)) {
        // Formulas left in targets that depend on what is written: what they show is from before.
        plan = plan_with(&stale)?;
    }
    problems.append(&mut plan.problems);
    state(&mut appraisal, &plan, package, &book)?;
    follow::mark(&mut appraisal, &stale, &written, &mut problems);
    problems.extend(dependents.warnings);
    let unknown = follow::unknown(&appraisal, &stale, &plan.cells);
    for (name, cells) in stale {
        let writes = plan.writes.entry(name).or_default();
        for cell in cells {
            writes.entry(cell).or_insert(CellWrite::DropValue);
        }
    }

    let meta = meta(package, &outcomes, request);
    let input = AuditInput {
        appraisal: &appraisal,
        outcomes: &outcomes,
        names: &names,
        meta: &meta,
        cells: &plan.cells,
        changes: &plan.changes,
        problems: &problems,
        companions: &companions,
        sensitivity: &sensitivity,
        carried: &carried,
        differs: &differs(),
    };
    let built = build(&input, &layout)?;
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
    let mut verdict = built.verdict;
    patch(&mut changes, package, &book, &plan.writes)?;
    let mut bytes = package.write(&changes)?;
    if !unknown.is_empty() {
        let made = Package::from_bytes(package.file_name(), bytes)?;
        follow::forget(&made, &unknown, &grafted.sheets, &mut plan.writes, &mut changes)?;
        patch(&mut changes, package, &book, &plan.writes)?;
        bytes = package.write(&changes)?;
        if verdict == VERDICT_AGREES {
            verdict = follow::AWAITS.to_owned();
        }
    }
    changes.forget_contents();
    verify(
        package,
        &bytes,
        &Expected { changes: &changes, writes: &plan.writes, own_sheets: &grafted.sheets },
    )?;
    let options = option_reports(&appraisal, &outcomes, &companions);
    let not_valued = not_valued(&appraisal);
    let report = Report { options, problems, filled: plan.filled, ticked: plan.ticked, not_valued, verdict };
    Ok(Filled { bytes, report })
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

/// The basis that the workbook itself declares must be OLD in every option.
fn require_basis(
    appraisal: &Appraisal,
    declared: Option<&Appraisal>,
    old: &str,
    catalogue: &Catalogue,
) -> Result<()> {
    let parse = |text: &str, place: Place| -> Result<Basis> {
        Basis::parse(text, catalogue).map_err(|error| from_core(&error, place).into())
    };
    let wanted = parse(old, Place::name("--replace"))?.canonical();
    let Some(declared) = declared else {
        let place = Place::name(&appraisal.choices[0].name);
        let message = format!("the workbook declares no basis, so it is not {wanted}");
        return Err(Problem::error("basis-differs", place, message)
            .hint("--basis instead of --replace")
            .into());
    };
    let mut problems = Vec::new();
    for choice in &declared.choices {
        let place = given_place(&choice.basis);
        let found = parse(&choice.basis.value, place.clone())?.canonical();
        let problem = Problem::error("basis-differs", place, format!("the basis is {found}, not {wanted}"))
            .hint("leave this workbook out, or name its basis in --replace");
        if found != wanted && !problems.contains(&problem) {
            problems.push(problem);
        }
    }
    if problems.is_empty() { Ok(()) } else { Err(problems.into()) }
}

/// The new basis goes into every cell that states the old one, and a timing that it states into the timing's cell.
fn plan_basis(
    plan: &mut Plan,
    package: &Package,
    book: &Workbook,
    appraisal: &Appraisal,
    outcomes: &[ChoiceOutcome],
    basis: &str,
) -> Result<()> {
    let mut seen = BTreeSet::new();
    for (choice, outcome) in appraisal.choices.iter().zip(outcomes) {
        let Some(at) = &choice.basis.at else {
            let problem = Problem::warning(
                "no-basis-cell",
                Place::name(&choice.name),
                "the workbook states no basis in a cell, so the new one stands on the audit sheets alone",
            )
            .hint("name a cell hence_basis");
            plan.problems.push(problem);
            continue;
        };
        if let Some(timing) = &choice.timing
            && let Some(cell) = &timing.at
            && timing.value != outcome.timing
            && outcome.basis.stated() != (None, None)
            && seen.insert(cell.clone())
        {
            let held = cell_held(package, book, cell)?;
            let write = CellWrite::Text(outcome.timing.to_string());
            overwrite(plan, timing, &held, "timing", write)?;
        }
        if !seen.insert(at.clone()) {
            continue;
        }
        let held = cell_held(package, book, at)?;
        if shown(&held) == basis {
            continue;
        }
        // Where the cell held a number, formulas may count with it: a flat yearly rate stays a number.
        let write = match (&held.value, outcome.basis.spec()) {
            (Value::Number(old), Spec::Flat { rate, compounding: Compounding::Yearly })
                if outcome.basis.stated() == (None, None) && outcome.basis.schedule().is_none() =>
            {
                if old == rate {
                    continue;
                }
                CellWrite::Number(*rate)
            }
            (Value::Number(_), _) => {
                let message = "the cell held a number and now holds a text, which formulas cannot count with";
                plan.problems.push(
                    Problem::warning("basis-text", given_place(&choice.basis), message)
                        .hint("look at the formulas that use the cell"),
                );
                CellWrite::Text(basis.to_owned())
            }
            _ => CellWrite::Text(basis.to_owned()),
        };
        overwrite(plan, &choice.basis, &held, "basis", write)?;
    }
    Ok(())
}

/// The settings as the output will hold them: a basis (or a timing) that this fill writes is what it states.
fn state(appraisal: &mut Appraisal, plan: &Plan, package: &Package, book: &Workbook) -> Result<()> {
    // The workbook's own basis is not read where the command line gives one.
    for choice in &appraisal.choices {
        let Some(at) = &choice.basis.at else { continue };
        if appraisal.settings.iter().any(|setting| setting.at == *at) {
            continue;
        }
        let value = match cell_held(package, book, at)?.value {
            Value::Number(x) => Stated::Number(x),
            Value::Text(text) => Stated::Text(text),
            _ => Stated::Text(String::new()),
        };
        let from = choice.basis.from.clone();
        appraisal.settings.push(Setting { at: at.clone(), from, value });
    }
    for setting in &mut appraisal.settings {
        let writes = plan.writes.get(&setting.at.sheet);
        match writes.and_then(|writes| writes.get(&setting.at.range.first)) {
            Some(CellWrite::Number(x)) => setting.value = Stated::Number(*x),
            Some(CellWrite::Text(text)) => setting.value = Stated::Text(text.clone()),
            _ => {}
        }
    }
    Ok(())
}

/// Writes into a cell that was read, unless it holds a formula.
fn overwrite<T>(
    plan: &mut Plan,
    given: &Given<T>,
    held: &ReadCell,
    what: &str,
    write: CellWrite,
) -> Result<()> {
    let Some(at) = &given.at else { return Ok(()) };
    if held.formula.is_some() {
        let message = format!("the {what} cell holds a formula, which would be lost");
        return Err(Problem::error("basis-formula", given_place(given), message)
            .hint(format!("give the name hence_{what} to the cell that the formula takes it from"))
            .into());
    }
    plan.write(at.clone(), what.to_owned(), shown(held), write);
    Ok(())
}

fn cell_held(package: &Package, book: &Workbook, at: &SheetRange) -> Result<ReadCell> {
    let held = Sheets::open(package, book)?.range(at)?;
    Ok(held.get(at.range.first).cloned().unwrap_or_default())
}

fn shown(held: &ReadCell) -> String {
    match &held.value {
        Value::Number(x) => x.to_string(),
        Value::Text(text) => text.trim().to_owned(),
        _ => String::new(),
    }
}

fn given_place<T>(given: &Given<T>) -> Place {
    match &given.at {
        Some(at) => Place::cells(&at.sheet, at.range).called(&given.from),
        None => Place::name(&given.from),
    }
}

/// The names of sheets that are not hence's own.
fn foreign_sheets(book: &Workbook, previous: &[OwnSheet]) -> Vec<String> {
    let own: BTreeSet<usize> = previous.iter().map(|sheet| sheet.index).collect();
    let sheets = book.sheets.iter().enumerate();
    sheets.filter(|(i, _)| !own.contains(i)).map(|(_, sheet)| sheet.name.clone()).collect()
}

fn meta(package: &Package, outcomes: &[ChoiceOutcome], request: &FillRequest) -> Meta {
    let of = |outcome: &ChoiceOutcome| -> String {
        let own = outcome.streams.iter().filter_map(|stream| stream.own.as_ref()).map(|own| &own.basis);
        std::iter::once(&outcome.basis).chain(own).map(|basis| basis.canonical() + "\n").collect()
    };
    let bases: String = outcomes.iter().map(of).collect();
    Meta {
        input_name: package.file_name().to_owned(),
        input_sha256: sha256(package.bytes()),
        basis_sha256: sha256(bases.as_bytes()),
        version: env!("CARGO_PKG_VERSION").to_owned(),
        as_of: request.as_of.clone(),
        by: request.by.clone(),
        formulas: request.formulas,
    }
}

fn sha256(bytes: &[u8]) -> String {
    Sha256::digest(bytes).iter().map(|byte| format!("{byte:02x}")).collect()
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
fn differs() -> Vec<String> {
    [
        "Filled cells and hence's own sheets; every other cell is as it was.",
        "The sheet list, the names hence_verdict, hence_own and hence_digest, and cell formats appended for the new sheets.",
        "The list of content types and the workbook's relationships; the calculation chain is removed.",
        "The workbook is marked to be calculated when it is opened.",
        "Stored results of formulas that depend on filled cells are removed, so that nothing stale can be read.",
    ]
    .map(String::from)
    .to_vec()
}
