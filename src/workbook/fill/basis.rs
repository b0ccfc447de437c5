//! The basis of a fill: what the workbook declares, and a new one written where the old one stood.

use std::collections::BTreeSet;

use hence_core::{Basis, Catalogue, Compounding, Spec};

use crate::appraisal::{Appraisal, Given, Setting, Stated};
use crate::model::Workbook;
use crate::outcome::ChoiceOutcome;
use crate::package::Package;
use crate::patch::CellWrite;
use crate::plan::Plan;
use crate::problem::{Place, Problem, Result};
use crate::reading::{ReadCell, Sheets, Value};
use crate::references::SheetRange;
use crate::valuation::{from_core, place_of};

use super::work::Run;

/// The basis that the workbook itself declares must be OLD in every option.
pub(super) fn require_basis(
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
        let place = place_of(&choice.basis.at, &choice.basis.from);
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
pub(super) fn plan_basis(
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
                    Problem::warning("basis-text", place_of(&choice.basis.at, &choice.basis.from), message)
                        .hint("--replace-formulas lets hence write the factors; look at other formulas that use the cell"),
                );
                CellWrite::Text(basis.to_owned())
            }
            _ => CellWrite::Text(basis.to_owned()),
        };
        overwrite(plan, &choice.basis, &held, "basis", write)?;
    }
    Ok(())
}

/// A base or prices that the command line gives go into the cells that state others.
pub(super) fn plan_settings(plan: &mut Plan, run: &Run<'_>, appraisal: &Appraisal) -> Result<()> {
    for choice in &appraisal.choices {
        if let Some(told) = &run.request.base {
            plan_setting(plan, run, &choice.base, "base", told)?;
        }
        if let (Some(told), Some(declared)) = (&run.request.prices, &choice.prices.declared) {
            plan_setting(plan, run, declared, "price_basis", told)?;
        }
    }
    Ok(())
}

fn plan_setting<T>(plan: &mut Plan, run: &Run<'_>, given: &Given<T>, what: &str, told: &str) -> Result<()> {
    let told = told.trim();
    let Some(at) = &given.at else {
        let message = format!(
            "the workbook states no {what} in a cell, so the new one stands on the audit sheets alone"
        );
        plan.problems.push(
            Problem::warning("no-basis-cell", Place::name(&given.from), message)
                .hint(format!("name a cell hence_{what}")),
        );
        return Ok(());
    };
    let planned = plan.writes.get(&at.sheet).is_some_and(|writes| writes.contains_key(&at.range.first));
    let held = cell_held(run.package, run.book, at)?;
    if planned || shown(&held) == told {
        return Ok(());
    }
    let write = told.parse().map_or_else(|_| CellWrite::Text(told.to_owned()), CellWrite::Number);
    overwrite(plan, given, &held, what, write)
}

/// The settings as the output will hold them: a basis (or a timing) that this fill writes is what it states.
pub(super) fn state(
    appraisal: &mut Appraisal,
    plan: &Plan,
    package: &Package,
    book: &Workbook,
) -> Result<()> {
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
        return Err(Problem::error("basis-formula", place_of(&given.at, &given.from), message)
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
