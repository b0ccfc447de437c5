//! One appraisal of a workbook that is being filled: resolved, valued, and every target cell decided.

use std::collections::{BTreeMap, BTreeSet};

use hence_core::{Basis, Catalogue};

use crate::appraisal::{Appraisal, Choice};
use crate::companions::companions;
use crate::compare::{Sensitivity, sensitivity};
use crate::decide::Bridge;
use crate::follow;
use crate::layout::Layout;
use crate::model::Workbook;
use crate::outcome::ChoiceOutcome;
use crate::own::{self, OwnSheet};
use crate::package::Package;
use crate::plan::{Plan, Stale, Ways, plan_targets};
use crate::planfile::Part;
use crate::problem::{Place, Problem, Result};
use crate::references::SheetRange;
use crate::report::{AppraisalReport, Companion, OptionReport, option_reports};
use crate::resolve::{Options, resolve};
use crate::roles::key;
use crate::sheets::{AuditInput, Carried, Meta, SheetNames, Sibling};
use crate::shelf::sha256;
use crate::valuation::value;

use super::basis::{plan_basis, plan_settings, require_basis, state};
use super::{FillRequest, bridge, not_valued};

/// What every appraisal of a workbook is filled with.
pub(super) struct Run<'a> {
    pub package: &'a Package,
    pub book: &'a Workbook,
    pub request: &'a FillRequest,
    pub catalogue: &'a Catalogue,
    /// All of hence's own sheets: formulas that refer to them are its own.
    pub own: &'a [OwnSheet],
    /// Those that this fill replaces.
    pub previous: &'a [OwnSheet],
}

/// One appraisal.
pub(super) struct Work {
    /// Its name, where the workbook has several.
    pub name: Option<String>,
    pub appraisal: Appraisal,
    pub outcomes: Vec<ChoiceOutcome>,
    pub companions: Vec<Option<Companion>>,
    pub sensitivity: Sensitivity,
    /// From what each option's cells held to how it stands now.
    bridges: Vec<Bridge>,
    /// Its own sheets.
    pub names: SheetNames,
    pub layout: Layout,
    pub plan: Plan,
    pub problems: Vec<Problem>,
    /// What people typed on the sheets that are replaced.
    pub carried: Vec<Carried>,
    /// Cells whose values are not known until a spreadsheet program computes them.
    pub unknown: Vec<SheetRange>,
    /// The canonical basis that each option declares itself, where the command line gives another.
    declared: Vec<Option<String>>,
    /// What an earlier fill wrote, by place.
    earlier: BTreeMap<String, String>,
    meta: Meta,
}

impl Work {
    /// Resolves and values an appraisal, and decides its targets as if nothing followed them. `left` are the sheets that
    /// an earlier fill made for it, `taken` the names of sheets that stay or are made.
    pub(super) fn begin(
        run: &Run<'_>,
        part: Option<&Part>,
        left: &[OwnSheet],
        taken: &[String],
    ) -> Result<Work> {
        let Run { package, book, request, catalogue, .. } = *run;
        let stated = stated(request);
        let roles = &request.roles;
        // A basis given on the command line stands in where the workbook has none; where it has one, the cell is kept so
        // that the new basis can be written into it.
        let (base, prices) = (request.base.as_deref(), request.prices.as_deref());
        let mut appraisal =
            resolve(package, book, &Options { roles, basis: stated, base, prices, plan: part })?;
        let mut problems = std::mem::take(&mut appraisal.problems);
        if request.replace.is_some() {
            // The old basis is named, so nobody takes the change for a slip.
            problems.retain(|problem| problem.code != "basis-overridden");
        }
        // What the workbook itself declares, where it does.
        let own = Options { roles, plan: part, ..Options::default() };
        let told = stated.is_some() || base.is_some() || prices.is_some();
        let declared = if told { resolve(package, book, &own).ok() } else { None };
        if let Some((old, _)) = &request.replace {
            require_basis(&appraisal, declared.as_ref(), old, catalogue)?;
        }
        let (outcomes, found) = value(&appraisal, catalogue)?;
        problems.extend(found);
        let companions = companions(&appraisal, &outcomes, catalogue, &mut problems);
        let sensitivity = sensitivity(&appraisal, &outcomes, &request.against, catalogue)?;
        problems.extend(sensitivity.comparison.problems.iter().cloned());
        let elsewhere = match (base.or(prices), stated) {
            (Some(_), Some(_)) => resolve(package, book, &Options { base, prices, ..own }).ok(),
            _ => None,
        };
        let moved = if stated.is_none() { Some(&appraisal) } else { elsewhere.as_ref() };
        let bridges = bridge::bridges(&appraisal, &outcomes, declared.as_ref(), moved, told, catalogue);
        let name = part.and_then(|part| part.appraisal.clone());
        let names = SheetNames::choose_for(name.as_deref(), taken);
        let layout = Layout::new(&appraisal, &outcomes, &names);
        let earlier = own::written(package, book, left, &names)?;
        let carried = own::carried(package, book, left, &names)?;
        let meta = meta(run, &outcomes, name.as_deref());
        let canonical = |choice: &Choice| {
            Basis::parse(&choice.basis.value, catalogue).ok().map(|basis| basis.canonical())
        };
        let mut work = Work {
            name,
            appraisal,
            outcomes,
            companions,
            sensitivity,
            bridges,
            names,
            layout,
            plan: Plan::default(),
            problems,
            carried,
            unknown: Vec::new(),
            declared: declared.iter().flat_map(|declared| &declared.choices).map(canonical).collect(),
            earlier,
            meta,
        };
        work.plan = work.decided(run, &Stale::new())?;
        Ok(work)
    }

    fn decided(&self, run: &Run<'_>, stale: &Stale) -> Result<Plan> {
        let ways = Ways {
            own: run.own,
            written: &self.earlier,
            formulas: run.request.formulas,
            replace_formulas: run.request.replace_formulas,
            stale,
        };
        let mut plan = plan_targets(&self.appraisal, &self.outcomes, &self.layout, &ways);
        if let Some(basis) = stated(run.request) {
            plan_basis(&mut plan, run.package, run.book, &self.appraisal, &self.outcomes, basis)?;
        }
        plan_settings(&mut plan, run, &self.appraisal)?;
        Ok(plan)
    }

    /// Takes account of the cells that follow what is `written`.
    pub(super) fn follow(&mut self, run: &Run<'_>, stale: &Stale, written: &[SheetRange]) -> Result<()> {
        if self.plan.cells.iter().any(|cell| !cell.filled && follow::any(stale, &cell.at)) {
            // Formulas left in targets that depend on what is written: what they show is from before.
            self.plan = self.decided(run, stale)?;
        }
        if run.request.settle {
            // They get their results before the output is done, and a verdict that differs then is told.
            self.plan.problems.retain(|problem| problem.code != "awaits-recalculation");
        }
        self.problems.append(&mut self.plan.problems);
        state(&mut self.appraisal, &self.plan, run.package, run.book)?;
        follow::mark(&mut self.appraisal, stale, written, &mut self.problems);
        self.unknown = follow::unknown(&self.appraisal, stale, &self.plan.cells);
        Ok(())
    }

    /// What its audit sheets are made from.
    pub(super) fn audit<'a>(&'a self, differs: &'a [String], siblings: &'a [Sibling]) -> AuditInput<'a> {
        AuditInput {
            appraisal: &self.appraisal,
            outcomes: &self.outcomes,
            names: &self.names,
            meta: &self.meta,
            cells: &self.plan.cells,
            changes: &self.plan.changes,
            problems: &self.problems,
            companions: &self.companions,
            sensitivity: &self.sensitivity,
            carried: &self.carried,
            differs,
            siblings,
        }
    }

    /// What it comes to, an entry an option.
    pub(super) fn options(&self) -> Vec<OptionReport> {
        let mut options = option_reports(&self.appraisal, &self.outcomes, &self.companions);
        for option in &mut options {
            option.appraisal.clone_from(&self.name);
        }
        for (option, declared) in options.iter_mut().zip(&self.declared) {
            option.declared.clone_from(declared);
        }
        for (option, bridge) in options.iter_mut().zip(&self.bridges) {
            option.bridge = *bridge;
        }
        options
    }

    /// Its part of the report, where the workbook has several.
    pub(super) fn report(&self, verdict: &str) -> Option<AppraisalReport> {
        Some(AppraisalReport { name: self.name.clone()?, verdict: verdict.to_owned() })
    }

    /// Rows of numbers along the years that no role names.
    pub(super) fn not_valued(&self) -> Vec<String> {
        not_valued(&self.appraisal)
    }
}

/// The basis that the command line gives.
fn stated(request: &FillRequest) -> Option<&str> {
    request.replace.as_ref().map(|(_, new)| new).or(request.basis.as_ref()).map(String::as_str)
}

/// Two appraisals that fill one cell would each undo the other.
pub(super) fn check_apart(works: &[Work]) -> Result<()> {
    let mut filled: BTreeMap<&SheetRange, (usize, &str)> = BTreeMap::new();
    let mut seen = BTreeSet::new();
    let mut problems = Vec::new();
    for (w, work) in works.iter().enumerate() {
        for cell in &work.plan.cells {
            let target = &work.appraisal.choices[cell.choice].targets[cell.target];
            let Some((first, from)) =
                filled.insert(&cell.at, (w, &target.from)).filter(|(first, _)| *first != w)
            else {
                continue;
            };
            let of = |w: usize| works[w].name.as_deref().unwrap_or_default();
            if seen.insert((w, &target.from)) {
                let message =
                    format!("is filled by the appraisal `{}`, and by `{}` as {from}", of(w), of(first));
                let place = Place::area(&target.at).called(&target.from);
                problems.push(
                    Problem::error("target-overlap", place, message)
                        .hint("give each appraisal cells of its own"),
                );
            }
        }
    }
    if problems.is_empty() { Ok(()) } else { Err(problems.into()) }
}

/// Which of hence's sheets an earlier fill made for each of the parts, those for none of them left out.
///
/// Sheets of a fill without a plan go to the first part: a plan with appraisals takes their place.
pub(super) fn left_for(parts: &[Option<Part>], own: &[OwnSheet]) -> Vec<Vec<OwnSheet>> {
    let mut left: Vec<Vec<OwnSheet>> = parts.iter().map(|_| Vec::new()).collect();
    let names: Vec<Option<String>> =
        parts.iter().map(|part| part.as_ref()?.appraisal.as_deref().map(key)).collect();
    for sheet in own {
        let wanted = sheet.appraisal.as_deref().map(key);
        let part = names.iter().position(|name| *name == wanted);
        if let Some(part) = part.or(wanted.is_none().then_some(0)) {
            left[part].push(sheet.clone());
        }
    }
    left
}

/// From what an output is made, whichever of its appraisals is meant.
pub(super) fn meta_of_all(works: &[Work]) -> Meta {
    let outcomes = works.iter().flat_map(|work| &work.outcomes);
    Meta { basis_sha256: basis_sha256(outcomes), appraisal: None, ..works[0].meta.clone() }
}

/// From what an appraisal's sheets are made.
fn meta(run: &Run<'_>, outcomes: &[ChoiceOutcome], appraisal: Option<&str>) -> Meta {
    let Run { package, request, catalogue, .. } = *run;
    Meta {
        input_name: package.file_name().to_owned(),
        input_sha256: package.sha256(),
        basis_sha256: basis_sha256(outcomes.iter()),
        plan: request.plan.as_ref().map(|plan| (plan.name().to_owned(), plan.sha256())),
        appraisal: appraisal.map(str::to_owned),
        request_sha256: request.sha256(catalogue),
        version: env!("CARGO_PKG_VERSION").to_owned(),
        as_of: request.as_of.clone(),
        by: request.by.clone(),
        formulas: request.formulas,
    }
}

/// SHA-256 of the canonical basis texts, one a line, by option.
fn basis_sha256<'a>(outcomes: impl Iterator<Item = &'a ChoiceOutcome>) -> String {
    let of = |outcome: &ChoiceOutcome| -> String {
        let own = outcome.streams.iter().filter_map(|stream| stream.own.as_ref()).map(|own| &own.basis);
        std::iter::once(&outcome.basis).chain(own).map(|basis| basis.canonical() + "\n").collect()
    };
    sha256(outcomes.map(of).collect::<String>().as_bytes())
}
