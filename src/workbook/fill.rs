//! The main job: an analyst's workbook in, its targets filled, an audited workbook out.

use std::collections::{BTreeMap, BTreeSet};
use std::path::Path;

use hence_core::{Basis, Catalogue, Compounding, Spec};
use sha2::{Digest, Sha256};

use crate::appraisal::{Appraisal, Given, Setting, Stated};
use crate::graft::{Graft, graft};
use crate::layout::Layout;
use crate::model::Workbook;
use crate::outcome::ChoiceOutcome;
use crate::own::{self, OwnSheet};
use crate::package::{Package, same_file, write_atomically};
use crate::patch::{CellWrite, patch_sheet};
use crate::plan::{Plan, Ways, plan_targets};
use crate::preflight::preflight;
use crate::problem::{Place, Problem, Result, WorkbookError};
use crate::reading::{ReadCell, Sheets, Value};
use crate::references::SheetRange;
use crate::report::{Companion, Report, option_reports};
use crate::resolve::{Options, inputs, resolve};
use crate::sheets::{AuditInput, Meta, SheetNames, Touched, build};
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
    let refuse = |code, message: String, hint: &str| {
        Err(Problem::error(code, Place::default(), message).hint(hint).into())
    };
    if same_file(input, output) {
        let message = format!("the output {} is the input, which is never written", output.display());
        return refuse("output-is-input", message, "give --out another name");
    }
    if output.exists() && !force {
        let message = format!("the output {} exists already", output.display());
        return refuse("output-exists", message, "--force to replace it, or --out with another name");
    }
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
    let names = SheetNames::choose(&foreign_sheets(&book, &previous));
    let layout = Layout::new(&appraisal, &outcomes, &names);

    let written = own::written(package, &book, &previous, &names)?;
    let plan_with = |stale: &Touched| -> Result<(Plan, Vec<Setting>)> {
        let ways = Ways {
            previous: &previous,
            written: &written,
            formulas: request.formulas,
            replace_formulas: request.replace_formulas,
            stale,
        };
        let mut plan = plan_targets(&appraisal, &outcomes, &layout, &ways);
        let settings = match stated {
            Some(basis) => plan_basis(&mut plan, package, &book, &appraisal, &outcomes, basis)?,
            None => Vec::new(),
        };
        Ok((plan, settings))
    };
    let (mut plan, mut settings) = plan_with(&Touched::new())?;
    let carried = own::carried(package, &book, &previous, &names)?;

    let dependents = stale::dependents(package, &book, &plan.changed)?;
    problems.extend(dependents.warnings);
    let foreign =
        dependents.cells.into_iter().filter(|(sheet, _)| !previous.iter().any(|own| own.index == *sheet));
    let stale: Touched = foreign.map(|(sheet, cells)| (book.sheets[sheet].name.clone(), cells)).collect();
    if plan.cells.iter().any(|cell| !cell.filled && holds(&stale, &cell.at)) {
        // Formulas left in targets that depend on what is written: what they show is from before.
        (plan, settings) = plan_with(&stale)?;
    }
    problems.append(&mut plan.problems);
    problems.extend(stale_inputs(&appraisal, &stale));
    let mut touched = stale.clone();
    for at in &plan.changed {
        touched.entry(at.sheet.clone()).or_default().insert(at.range.first);
    }
    for (name, cells) in &stale {
        let writes = plan.writes.entry(name.clone()).or_default();
        for cell in cells {
            writes.entry(*cell).or_insert(CellWrite::DropValue);
        }
    }
    for setting in settings {
        appraisal.settings.retain(|old| old.at != setting.at);
        appraisal.settings.push(setting);
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
        carried: &carried,
        differs: &differs(),
        touched: &touched,
    };
    let built = build(&input, &layout)?;
    let mut patched: BTreeMap<String, Vec<u8>> = BTreeMap::new();
    for (name, writes) in &plan.writes {
        let Some(index) = book.sheet_index(name) else { continue };
        let part = &book.sheets[index].part;
        let xml = package.part(part)?.unwrap_or_default();
        let new = patch_sheet(&xml, writes).map_err(|error| in_sheet(error, name))?;
        patched.insert(part.clone(), new);
    }
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
    changes.replace.extend(patched);
    let bytes = package.write(&changes)?;
    verify(
        package,
        &bytes,
        &Expected { changes: &changes, writes: &plan.writes, own_sheets: &grafted.sheets },
    )?;
    let options = option_reports(&appraisal, &outcomes, &companions);
    let report = Report {
        options,
        problems,
        filled: plan.filled,
        ticked: plan.ticked,
        verdict: built.verdict.clone(),
    };
    Ok(Filled { bytes, report })
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
/// What those cells state then is returned.
fn plan_basis(
    plan: &mut Plan,
    package: &Package,
    book: &Workbook,
    appraisal: &Appraisal,
    outcomes: &[ChoiceOutcome],
    basis: &str,
) -> Result<Vec<Setting>> {
    let mut settings = Vec::new();
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
            settings.push(overwrite(plan, cell, timing, &held, "timing", write)?);
        }
        if !seen.insert(at.clone()) {
            continue;
        }
        let held = cell_held(package, book, at)?;
        if shown(&held) == basis {
            settings.push(Setting {
                at: at.clone(),
                from: choice.basis.from.clone(),
                value: stated_by(&held),
            });
            continue;
        }
        // Where the cell held a number, formulas may count with it: a flat yearly rate stays a number.
        let write = match (&held.value, outcome.basis.spec()) {
            (Value::Number(old), Spec::Flat { rate, compounding: Compounding::Yearly })
                if outcome.basis.stated() == (None, None) && outcome.basis.schedule().is_none() =>
            {
                if old == rate {
                    let from = choice.basis.from.clone();
                    settings.push(Setting { at: at.clone(), from, value: Stated::Number(*old) });
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
        settings.push(overwrite(plan, at, &choice.basis, &held, "basis", write)?);
    }
    Ok(settings)
}

/// Writes into a cell that was read, unless it holds a formula; what the cell states then.
fn overwrite<T>(
    plan: &mut Plan,
    at: &SheetRange,
    given: &Given<T>,
    held: &ReadCell,
    what: &str,
    write: CellWrite,
) -> Result<Setting> {
    if held.formula.is_some() {
        let message = format!("the {what} cell holds a formula, which would be lost");
        return Err(Problem::error("basis-formula", given_place(given), message)
            .hint(format!("give the name hence_{what} to the cell that the formula takes it from"))
            .into());
    }
    let value = match &write {
        CellWrite::Number(x) => Stated::Number(*x),
        CellWrite::Text(text) => Stated::Text(text.clone()),
        _ => stated_by(held),
    };
    plan.write(at.clone(), what.to_owned(), shown(held), write);
    Ok(Setting { at: at.clone(), from: given.from.clone(), value })
}

fn stated_by(held: &ReadCell) -> Stated {
    match held.value {
        Value::Number(x) => Stated::Number(x),
        _ => Stated::Text(shown(held)),
    }
}

fn holds(cells: &Touched, at: &SheetRange) -> bool {
    cells.get(&at.sheet).is_some_and(|cells| cells.contains(&at.range.first))
}

/// Inputs that depend on cells this fill changes: what was read of them is from before.
fn stale_inputs(appraisal: &Appraisal, stale: &Touched) -> Vec<Problem> {
    let mut found = Vec::new();
    for (at, from) in inputs(&appraisal.choices, &appraisal.axes) {
        let Some(cells) = stale.get(&at.sheet) else { continue };
        let Some(cell) = at.range.cells().find(|cell| cells.contains(cell)) else { continue };
        let message = format!(
            "its formulas depend on cells that this fill changes (first {cell}), so what was read may be stale"
        );
        let problem =
            Problem::warning("stale-input", Place::cells(&at.sheet, at.range).called(&from), message)
                .hint("open and save the output in a spreadsheet program, and fill it again");
        if !found.contains(&problem) {
            found.push(problem);
        }
    }
    found
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

/// Every option again under the companion of its schedule, where years reach beyond the companion's horizon.
///
/// Where one option's years do, all options on that schedule are valued beside it, so that increments over the baseline
/// stand on one basis. A companion that cannot value the workbook is a warning.
fn companions(
    appraisal: &Appraisal,
    outcomes: &[ChoiceOutcome],
    catalogue: &Catalogue,
    problems: &mut Vec<Problem>,
) -> Vec<Option<Companion>> {
    let reaches = |outcome: &ChoiceOutcome| {
        let (id, beyond) = outcome.basis.companion()?;
        let reach = outcome.offsets.iter().copied().fold(0.0, f64::max);
        (reach > beyond).then(|| id.to_owned())
    };
    let wanted: BTreeSet<String> = outcomes.iter().filter_map(reaches).collect();
    let mut beside = appraisal.clone();
    let mut changed = vec![false; outcomes.len()];
    let mut failed = |message: String| {
        let problem = Problem::warning("companion", Place::default(), message);
        problems.push(problem.hint("value the workbook on the companion schedule by itself, with --basis"));
    };
    for (i, (choice, outcome)) in beside.choices.iter_mut().zip(outcomes).enumerate() {
        if outcome.basis.companion().is_none_or(|(id, _)| !wanted.contains(id)) {
            continue;
        }
        match outcome.basis.beside(catalogue) {
            Ok(Some(basis)) => {
                choice.basis.value = basis.canonical();
                changed[i] = true;
            }
            Ok(None) => {}
            Err(error) => failed(format!("the schedule to be run beside is not known: {error}")),
        }
    }
    if !changed.contains(&true) {
        return vec![None; outcomes.len()];
    }
    match value(&beside, catalogue) {
        Ok((outcomes, _)) => {
            let make = |(outcome, changed): (&ChoiceOutcome, bool)| {
                let id = outcome.basis.schedule().map(|schedule| schedule.id().to_owned());
                id.filter(|_| changed).map(|id| Companion {
                    id,
                    words: outcome.basis.words(),
                    totals: *outcome.totals(),
                })
            };
            outcomes.iter().zip(changed).map(make).collect()
        }
        Err(error) => {
            failed(format!("the schedule to be run beside cannot value the workbook: {error}"));
            vec![None; outcomes.len()]
        }
    }
}

fn meta(package: &Package, outcomes: &[ChoiceOutcome], request: &FillRequest) -> Meta {
    let bases: String = outcomes.iter().map(|outcome| outcome.basis.canonical() + "\n").collect();
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
