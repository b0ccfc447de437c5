//! What diagnoses look at: the workbook as it was read, valued and compared, and its cells.

use std::cell::RefCell;

use hence_core::Catalogue;

use super::rounding::Unit;
use crate::appraisal::{Appraisal, Held, Target};
use crate::formulas::expected;
use crate::layout::Layout;
use crate::model::Workbook;
use crate::outcome::ChoiceOutcome;
use crate::package::Package;
use crate::patch::Cached;
use crate::plan::same_text;
use crate::problem::{Problem, Result};
use crate::reading::{Grid, Sheets};
use crate::references::SheetRange;
use crate::resolve::{Options, resolve};
use crate::sheets::SheetNames;
use crate::tolerance;
use crate::valuation::{cell_of, value};

/// A workbook as a diagnosis sees it.
pub struct Seen<'a> {
    /// The file.
    pub package: &'a Package,
    /// Its sheets, names and tables.
    pub book: &'a Workbook,
    /// The schedules that ids are looked up in.
    pub catalogue: &'a Catalogue,
    /// What it says.
    pub appraisal: Appraisal,
    /// What each option comes to under the declared basis.
    pub outcomes: Vec<ChoiceOutcome>,
    /// The positions by which expected texts name hence's sheets.
    pub layout: Layout,
    /// Every target cell against what the basis gives, option by option and target by target.
    pub compared: Vec<Compared>,
    /// Every warning on the way.
    pub problems: Vec<Problem>,
    cells: RefCell<Sheets<'a>>,
}

/// One target cell against what the basis gives.
#[derive(Clone, Debug, PartialEq)]
pub struct Compared {
    /// The option: its place in [`Appraisal::choices`].
    pub choice: usize,
    /// The target: its place among the option's.
    pub target: usize,
    /// The cell's place in the target.
    pub index: usize,
    /// The cell.
    pub at: SheetRange,
    /// What the basis gives.
    pub expected: Cached,
    /// How far a number may be from it.
    pub tolerance: f64,
    /// How the two stand to each other.
    pub standing: Standing,
    /// The right number rounded to a unit larger than its format shows; the tolerance is half of that.
    pub rounded: bool,
}

/// How a target cell stands to what the basis gives.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Standing {
    /// The same, within the tolerance.
    Agrees,
    /// Not the same.
    Differs,
    /// Nothing is in the cell.
    Blank,
    /// Its formula has no result in the file, so nothing can be compared.
    Awaits,
}

impl<'a> Seen<'a> {
    /// Reads, values and compares a workbook, or one appraisal of it, after its preflight.
    ///
    /// **Errors**: everything that keeps it from being read and valued, each with its cell.
    pub fn look(
        package: &'a Package,
        book: &'a Workbook,
        options: &Options,
        catalogue: &'a Catalogue,
    ) -> Result<Self> {
        let mut appraisal = resolve(package, book, options)?;
        let mut problems = std::mem::take(&mut appraisal.problems);
        let (outcomes, found) = value(&appraisal, catalogue)?;
        problems.extend(found);
        let layout = Layout::new(&appraisal, &outcomes, &SheetNames::choose(&[]));
        let compared = compare(&appraisal, &outcomes, &layout);
        let cells = RefCell::new(Sheets::open(package, book)?);
        Ok(Seen { package, book, catalogue, appraisal, outcomes, layout, compared, problems, cells })
    }

    /// The cells of a range, with their formulas; none where they cannot be read.
    pub fn grid(&self, at: &SheetRange) -> Option<Grid> {
        self.cells.borrow_mut().range(at).ok()
    }

    /// Reads many ranges at once, for [`Seen::grid`] to find; what cannot be read is found missing there.
    pub fn load(&self, ranges: &[SheetRange]) {
        let _ = self.cells.borrow_mut().load(ranges);
    }

    /// The target of a compared cell.
    pub fn target(&self, compared: &Compared) -> &Target {
        &self.appraisal.choices[compared.choice].targets[compared.target]
    }

    /// What a compared cell holds.
    pub fn held(&self, compared: &Compared) -> &Held {
        &self.target(compared).held[compared.index]
    }

    /// Whether a cell's number was rounded, to what its format shows or to another unit.
    pub fn is_rounded(&self, compared: &Compared) -> bool {
        if compared.rounded {
            return true;
        }
        let unit = 2.0 * tolerance::of_cell(self.target(compared), compared.index, 0.0);
        let Some(value) = self.held(compared).number().filter(|_| unit > 0.0) else { return false };
        ((value / unit).round() * unit - value).abs() <= 1e-9 * unit.max(value.abs())
    }

    /// The net present value of every option under the declared basis, over the baseline where there is one.
    pub fn npvs(&self) -> Vec<f64> {
        self.outcomes.iter().map(|outcome| outcome.totals().npv).collect()
    }
}

/// Every target cell against what the basis gives.
fn compare(appraisal: &Appraisal, outcomes: &[ChoiceOutcome], layout: &Layout) -> Vec<Compared> {
    let mut compared = Vec::new();
    for (c, choice) in appraisal.choices.iter().enumerate() {
        for (t, target) in choice.targets.iter().enumerate() {
            let results = expected(appraisal, outcomes, layout, c, target);
            let unit = Unit::of(target, &results);
            for (i, (held, expected)) in target.held.iter().zip(results).enumerate() {
                let shown = match &expected {
                    Cached::Number(x) => tolerance::of_cell(target, i, *x),
                    _ => 0.0,
                };
                let rounds = |unit: &Unit| match (held.number(), &expected) {
                    (Some(held), Cached::Number(x)) => unit.gives(held, *x),
                    _ => false,
                };
                let half = unit.filter(rounds).map_or(0.0, |unit| unit.half() * (1.0 + 1e-9));
                let (tolerance, rounded) = (shown.max(half), half > shown);
                let standing = standing(held, &expected, tolerance);
                let at = cell_of(&target.at, i);
                compared.push(Compared {
                    choice: c,
                    target: t,
                    index: i,
                    at,
                    expected,
                    tolerance,
                    standing,
                    rounded,
                });
            }
        }
    }
    compared
}

impl Held {
    /// The number a cell shows; none where it is blank, awaits recalculation, or shows something else.
    pub fn number(&self) -> Option<f64> {
        match self {
            Held::Number(x) => Some(*x),
            Held::Formula { value, .. } => *value,
            Held::Blank | Held::Text(_) | Held::Error(_) => None,
        }
    }
}

fn standing(held: &Held, expected: &Cached, tolerance: f64) -> Standing {
    let agrees = match (held, expected) {
        (Held::Blank, _) => return Standing::Blank,
        (Held::Formula { value: None, shown: None, .. }, _) => return Standing::Awaits,
        (Held::Number(found) | Held::Formula { value: Some(found), .. }, Cached::Number(x)) => {
            (found - x).abs() <= tolerance
        }
        (Held::Text(found) | Held::Formula { shown: Some(found), .. }, Cached::Text(text)) => {
            same_text(found, text)
        }
        _ => false,
    };
    if agrees { Standing::Agrees } else { Standing::Differs }
}
