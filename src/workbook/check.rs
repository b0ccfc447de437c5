//! What a workbook holds in its targets against what its declared basis gives.

use hence_core::Catalogue;

use crate::appraisal::{Appraisal, Held, Target};
use crate::formulas::expected;
use crate::layout::Layout;
use crate::model::Workbook;
use crate::package::Package;
use crate::patch::Cached;
use crate::plan::{same_text, span, words};
use crate::planfile::PlanFile;
use crate::preflight::preflight;
use crate::problem::{Place, Problem, Result, Severity};
use crate::references::SheetRange;
use crate::report::Status;
use crate::resolve::{Options, resolve};
use crate::sheets::{SheetNames, role_words};
use crate::tolerance;
use crate::valuation::{cell_of, value};

/// One cell that does not hold what the basis gives.
#[derive(Clone, Debug, PartialEq)]
pub struct Difference {
    /// The cell.
    pub place: Place,
    /// Its role in words.
    pub role: String,
    /// What it holds.
    pub found: String,
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
    /// Blank targets.
    pub not_filled: Vec<Place>,
    /// Warnings, and cells that could not be compared.
    pub problems: Vec<Problem>,
}

impl CheckReport {
    /// Whether all filled cells agree.
    pub fn agrees(&self) -> bool {
        self.differences.is_empty() && self.problems.iter().all(|p| p.severity != Severity::Error)
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
/// # Errors
/// Everything that keeps the workbook from being read and valued, each with its cell.
pub fn check(package: &Package, request: &CheckRequest, catalogue: &Catalogue) -> Result<CheckReport> {
    let problems = preflight(package)?;
    let book = Workbook::read(package)?;
    let mut report = CheckReport { agree: 0, differences: Vec::new(), not_filled: Vec::new(), problems };
    let parts = match &request.plan {
        Some(plan) => plan.parts(&book)?.into_iter().map(Some).collect(),
        None => vec![None],
    };
    for part in parts {
        let options = Options { roles: &request.roles, basis: None, plan: part.as_ref() };
        check_appraisal(&resolve(package, &book, &options)?, catalogue, &mut report)?;
    }
    Ok(report)
}

/// Checks the targets of one appraisal.
fn check_appraisal(appraisal: &Appraisal, catalogue: &Catalogue, report: &mut CheckReport) -> Result<()> {
    let (outcomes, found) = value(appraisal, catalogue)?;
    for problem in appraisal.problems.iter().chain(&found) {
        if !report.problems.contains(problem) {
            report.problems.push(problem.clone());
        }
    }
    let layout = Layout::new(appraisal, &outcomes, &SheetNames::choose(&[]));
    for (c, choice) in appraisal.choices.iter().enumerate() {
        for target in &choice.targets {
            let results = expected(appraisal, &outcomes, &layout, c, target);
            report.target(target, &results);
        }
    }
    Ok(())
}

fn number(result: &Cached) -> Option<f64> {
    if let Cached::Number(x) = result { Some(*x) } else { None }
}

impl CheckReport {
    fn target(&mut self, target: &Target, results: &[Cached]) {
        let mut blank = Vec::new();
        let mut waiting = Vec::new();
        for (i, (held, result)) in target.held.iter().zip(results).enumerate() {
            let at = cell_of(&target.at, i);
            match (held, result) {
                (Held::Blank, _) => blank.push(at),
                (Held::Formula { value: None, shown: None, .. }, _) => waiting.push(at),
                (Held::Number(found) | Held::Formula { value: Some(found), .. }, Cached::Number(x)) => {
                    if (found - x).abs() <= tolerance::of_cell(target, i, *x) {
                        self.agree += 1;
                    } else {
                        self.differ(target, &at, found.to_string(), Some(*x), Some(found - x));
                    }
                }
                (Held::Text(found) | Held::Formula { shown: Some(found), .. }, Cached::Text(text))
                    if same_text(found, text) =>
                {
                    self.agree += 1;
                }
                (Held::Formula { shown: Some(found), .. }, result) => {
                    self.differ(target, &at, found.clone(), number(result), None);
                }
                (held, result) => self.differ(target, &at, words(held), number(result), None),
            }
        }
        if let Some(place) = span(&blank) {
            self.not_filled.push(place.called(&target.from));
        }
        if let Some(place) = span(&waiting) {
            let message = format!(
                "{} of {} formulas have no result in the file, so nothing was compared",
                waiting.len(),
                target.held.len()
            );
            self.problems.push(
                Problem::warning("awaits-recalculation", place.called(&target.from), message)
                    .hint("open and save the workbook in a spreadsheet program first"),
            );
        }
    }

    fn differ(
        &mut self,
        target: &Target,
        at: &SheetRange,
        found: String,
        expected: Option<f64>,
        difference: Option<f64>,
    ) {
        self.differences.push(Difference {
            place: Place::cells(&at.sheet, at.range).called(&target.from),
            role: role_words(&target.role),
            found,
            expected,
            difference,
        });
    }
}
