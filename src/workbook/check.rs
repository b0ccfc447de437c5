//! What a workbook holds in its targets against what its declared basis gives, and what kind of mistake that shows.

use hence_core::Catalogue;

use crate::appraisal::Held;
use crate::diagnose::{self, Compared, Seen, Standing};
use crate::findings::Finding;
use crate::model::Workbook;
use crate::package::Package;
use crate::patch::Cached;
use crate::plan::{span, words};
use crate::planfile::PlanFile;
use crate::preflight::preflight;
use crate::problem::{Place, Problem, Result, Severity};
use crate::references::SheetRange;
use crate::report::Status;
use crate::resolve::Options;
use crate::sheets::role_words;

/// One cell that does not hold what the basis gives.
#[derive(Clone, Debug, PartialEq)]
pub struct Difference {
    /// The cell.
    pub place: Place,
    /// Its role in words.
    pub role: String,
    /// What it holds.
    pub found: String,
    /// The same, where it is a number.
    pub number: Option<f64>,
    /// What the basis gives; none where the measure is no number.
    pub expected: Option<f64>,
    /// Found less expected, where both are numbers.
    pub difference: Option<f64>,
}

/// What a check found.
#[derive(Clone, Debug, PartialEq)]
pub struct CheckReport {
    /// How many cells agree.
    pub agree: usize,
    /// Every cell that does not.
    pub differences: Vec<Difference>,
    /// The mistakes behind them, and others; what follows from one is not listed again.
    pub findings: Vec<Finding>,
    /// Blank targets.
    pub not_filled: Vec<Place>,
    /// Warnings, and cells that could not be compared.
    pub problems: Vec<Problem>,
}

impl CheckReport {
    /// Whether nothing is wrong.
    pub fn agrees(&self) -> bool {
        self.findings.is_empty() && self.problems.iter().all(|p| p.severity != Severity::Error)
    }

    /// For the report.
    pub fn status(&self) -> Status {
        if self.agrees() { Status::Done } else { Status::Problems }
    }
}

/// What the run is told besides the workbook.
#[derive(Clone, Debug, Default)]
pub struct CheckRequest {
    /// Roles for cells without a defined name: role, range.
    pub roles: Vec<(String, String)>,
    /// What is where, for a workbook without names; every appraisal of it is checked.
    pub plan: Option<PlanFile>,
}

/// Checks one workbook; nothing is written.
///
/// Years and signs that keep it from being valued are findings, and are set right in memory so that the rest is checked, too.
///
/// # Errors
/// Everything else that keeps the workbook from being read and valued, each with its cell.
pub fn check(package: &Package, request: &CheckRequest, catalogue: &Catalogue) -> Result<CheckReport> {
    let problems = preflight(package)?;
    let book = Workbook::read(package)?;
    let mut checked = CheckReport {
        agree: 0,
        differences: Vec::new(),
        findings: Vec::new(),
        not_filled: Vec::new(),
        problems,
    };
    let parts = match &request.plan {
        Some(plan) => plan.parts(&book)?.into_iter().map(Some).collect(),
        None => vec![None],
    };
    for part in parts {
        let options = Options { roles: &request.roles, plan: part.as_ref(), ..Options::default() };
        check_appraisal(package, &book, &options, catalogue, &mut checked)?;
    }
    Ok(checked)
}

/// Checks one appraisal of a workbook.
fn check_appraisal(
    package: &Package,
    book: &Workbook,
    options: &Options,
    catalogue: &Catalogue,
    checked: &mut CheckReport,
) -> Result<()> {
    let error = match Seen::look(package, book, options, catalogue) {
        Ok(seen) => {
            checked.findings.extend(diagnose::findings(&seen, Vec::new(), |_| false)?);
            report(&seen, checked);
            return Ok(());
        }
        Err(error) => error,
    };
    if let Some(mended) = diagnose::mend(package, book, options.roles, error.problems())? {
        let book = Workbook::read(&mended.package)?;
        if let Ok(seen) = Seen::look(&mended.package, &book, options, catalogue) {
            let found = mended.findings(&seen);
            checked.findings.extend(diagnose::findings(&seen, found, |finding| mended.repeats(finding))?);
            report(&seen, checked);
            return Ok(());
        }
    }
    let findings = diagnose::unvalued(error.problems());
    if findings.is_empty() {
        return Err(error);
    }
    checked.findings.extend(findings);
    checked.problems.extend(error.problems().iter().cloned());
    Ok(())
}

/// The comparison cell by cell. What was said of the workbook for another appraisal of it is not said again.
fn report(seen: &Seen, report: &mut CheckReport) {
    for problem in &seen.problems {
        if !report.problems.contains(problem) {
            report.problems.push(problem.clone());
        }
    }
    for cells in seen.compared.chunk_by(|a, b| (a.choice, a.target) == (b.choice, b.target)) {
        let cells_that = |standing: Standing| -> Vec<SheetRange> {
            cells.iter().filter(|cell| cell.standing == standing).map(|cell| cell.at.clone()).collect()
        };
        report.agree += cells_that(Standing::Agrees).len();
        let differ = cells.iter().filter(|cell| cell.standing == Standing::Differs);
        report.differences.extend(differ.map(|cell| difference(seen, cell)));
        let target = seen.target(&cells[0]);
        if let Some(place) = span(&cells_that(Standing::Blank)) {
            report.not_filled.push(place.called(&target.from));
        }
        let waiting = cells_that(Standing::Awaits);
        if let Some(place) = span(&waiting) {
            let message = format!(
                "{} of {} formulas have no result in the file, so nothing was compared",
                waiting.len(),
                target.held.len()
            );
            report.problems.push(
                Problem::warning("awaits-recalculation", place.called(&target.from), message)
                    .hint("open and save the workbook in a spreadsheet program first"),
            );
        }
    }
}

fn difference(seen: &Seen, cell: &Compared) -> Difference {
    let (target, held) = (seen.target(cell), seen.held(cell));
    let expected = if let Cached::Number(x) = cell.expected { Some(x) } else { None };
    let found = match held {
        Held::Formula { shown: Some(shown), .. } => shown.clone(),
        held => held.number().map_or_else(|| words(held), |x| x.to_string()),
    };
    Difference {
        place: Place::cells(&cell.at.sheet, cell.at.range).called(&target.from),
        role: role_words(&target.role),
        found,
        number: held.number(),
        expected,
        difference: held.number().zip(expected).map(|(found, expected)| found - expected),
    }
}
