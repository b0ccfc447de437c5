//! What a fill does to each target cell: write it, tick it, or report it.

use std::collections::BTreeMap;

use crate::appraisal::{Appraisal, Held, Target};
use crate::formulas::{expected, is_own_text, target_writes};
use crate::layout::Layout;
use crate::outcome::ChoiceOutcome;
use crate::own::OwnSheet;
use crate::patch::{Cached, CellWrite};
use crate::problem::{Place, Problem};
use crate::references::{Cell, Range, SheetRange, quote_sheet};
use crate::sheets::{Change, TargetCell, role_words};
use crate::tolerance;
use crate::valuation::cell_of;

/// Everything that is to be written, and what was found on the way.
#[derive(Debug, Default)]
pub struct Plan {
    /// By sheet name and cell.
    pub writes: BTreeMap<String, BTreeMap<Cell, CellWrite>>,
    /// The cells that are written, for the dependents.
    pub changed: Vec<SheetRange>,
    /// For the changes sheet.
    pub changes: Vec<Change>,
    /// For the checks.
    pub cells: Vec<TargetCell>,
    /// Cells that hold text, formulas that differ, formulas without a result.
    pub problems: Vec<Problem>,
    /// How many target cells were written.
    pub filled: usize,
    /// How many formulas were left and agree, once they are compared.
    pub ticked: usize,
    /// Formulas that were left and whose result is not known, once they are compared.
    pub unknown: Vec<SheetRange>,
    kept: Vec<(TargetCell, Held, Cached)>,
}

impl Plan {
    /// Compares the cells that are left as they are. Those that follow filled cells hold a result of before, which says
    /// nothing of what they come to.
    pub fn compare(&mut self, appraisal: &Appraisal, follows: impl Fn(&SheetRange) -> bool) {
        let mut by_target: BTreeMap<(usize, usize), Kept> = BTreeMap::new();
        for (cell, held, expected) in &self.kept {
            let kept = by_target.entry((cell.choice, cell.target)).or_default();
            kept.compare(held, expected, cell, follows(&cell.at));
        }
        for ((choice, target), kept) in by_target {
            self.ticked += kept.ticked;
            self.unknown.extend(kept.waiting.iter().chain(&kept.following).cloned());
            self.problems.extend(kept.problems(&appraisal.choices[choice].targets[target]));
        }
    }

    /// Writes a cell, and keeps what it held before.
    pub fn write(&mut self, at: SheetRange, role: String, before: String, write: CellWrite) {
        let after = match &write {
            CellWrite::Number(x) => x.to_string(),
            CellWrite::Text(text) => text.clone(),
            CellWrite::Formula(text, _) => format!("={text}"),
            CellWrite::DropValue => String::new(),
        };
        self.writes.entry(at.sheet.clone()).or_default().insert(at.range.first, write);
        self.changes.push(Change { at: at.clone(), role, before, after });
        self.changed.push(at);
    }
}

/// Decides every target cell of every option.
pub fn plan_targets(
    appraisal: &Appraisal,
    outcomes: &[ChoiceOutcome],
    layout: &Layout,
    previous: &[OwnSheet],
    formulas: bool,
    replace_formulas: bool,
) -> Plan {
    let mut plan = Plan::default();
    let own: Vec<String> = previous.iter().map(|sheet| format!("{}!", quote_sheet(&sheet.name))).collect();
    for (c, choice) in appraisal.choices.iter().enumerate() {
        for (t, target) in choice.targets.iter().enumerate() {
            let results = expected(appraisal, outcomes, layout, c, target);
            let writes = target_writes(appraisal, outcomes, layout, c, target, formulas);
            for (i, (write, result)) in writes.into_iter().zip(&results).enumerate() {
                let held = target.held.get(i).unwrap_or(&Held::Blank);
                let replaceable = match held {
                    Held::Blank | Held::Number(_) | Held::Error(_) => true,
                    Held::Text(text) => is_own_text(text),
                    Held::Formula { text, .. } => {
                        replace_formulas
                            || own.iter().any(|sheet| text.contains(sheet.as_str()))
                            || matches!(&write, CellWrite::Formula(new, _) if same_formula(new, text))
                    }
                };
                let expected = if let Cached::Number(x) = result { Some(*x) } else { None };
                let cell = TargetCell {
                    choice: c,
                    target: t,
                    index: i,
                    at: cell_of(&target.at, i),
                    expected,
                    filled: replaceable,
                    tolerance: expected.map_or(0.0, |x| tolerance::of_cell(target, i, x)),
                };
                if replaceable {
                    plan.filled += 1;
                    plan.write(cell.at.clone(), role_words(&target.role), words(held), write);
                    plan.cells.push(cell);
                } else {
                    plan.kept.push((cell.clone(), held.clone(), result.clone()));
                    // Text is reported and has no place among the checks.
                    if matches!(held, Held::Formula { .. }) {
                        plan.cells.push(cell);
                    }
                }
            }
        }
    }
    plan
}

/// Formulas are the same when they differ only in spacing, case and dollar signs.
fn same_formula(a: &str, b: &str) -> bool {
    let fold = |text: &str| -> String {
        text.chars().filter(|c| !c.is_whitespace() && *c != '$').flat_map(char::to_uppercase).collect()
    };
    fold(a) == fold(b)
}

/// Whether a text found in a cell says what the text expected says: that there is no number. The analyst may say so
/// in other words; an error value is not one, and neither is another of the texts that a fill writes.
pub(crate) fn same_text(found: &str, expected: &str) -> bool {
    found == expected || !(found.starts_with('#') || is_own_text(found))
}

/// What a cell held, for the changes sheet.
pub fn words(held: &Held) -> String {
    match held {
        Held::Blank => String::new(),
        Held::Number(x) => x.to_string(),
        Held::Text(text) | Held::Error(text) => text.clone(),
        Held::Formula { text, .. } => format!("={text}"),
    }
}

/// The cells of one target that were left as they are.
#[derive(Default)]
struct Kept {
    texts: Vec<SheetRange>,
    waiting: Vec<SheetRange>,
    following: Vec<SheetRange>,
    differing: Vec<(SheetRange, String, Cached, Option<f64>)>,
    ticked: usize,
}

impl Kept {
    /// Compares one cell.
    fn compare(&mut self, held: &Held, expected: &Cached, cell: &TargetCell, follows: bool) {
        let Held::Formula { value, shown, .. } = held else {
            self.texts.push(cell.at.clone());
            return;
        };
        match (value, shown, expected) {
            _ if follows => self.following.push(cell.at.clone()),
            (None, None, _) => self.waiting.push(cell.at.clone()),
            (Some(found), _, Cached::Number(x)) if (found - x).abs() <= cell.tolerance => self.ticked += 1,
            (None, Some(shown), Cached::Text(text)) if same_text(shown, text) => self.ticked += 1,
            (value, shown, expected) => {
                let found = value.map(|x| x.to_string()).or(shown.clone()).unwrap_or_default();
                let difference = match expected {
                    Cached::Number(x) => value.map(|found| found - x),
                    _ => None,
                };
                self.differing.push((cell.at.clone(), found, expected.clone(), difference));
            }
        }
    }

    /// One problem a cause, over the cells it concerns.
    fn problems(self, target: &Target) -> Vec<Problem> {
        let mut problems = Vec::new();
        let total = target.held.len();
        if let Some(place) = span(&self.texts) {
            let message =
                format!("{} of {total} cells hold text, which is never overwritten", self.texts.len());
            problems.push(
                Problem::error("target-text", place.called(&target.from), message)
                    .hint("clear the cells, or point the name at others"),
            );
        }
        if let Some(place) = span(&self.waiting) {
            let message = format!(
                "{} of {total} formulas have no result in the file, so nothing was compared",
                self.waiting.len()
            );
            problems.push(
                Problem::warning("awaits-recalculation", place.called(&target.from), message)
                    .hint("open and save the workbook in a spreadsheet program first"),
            );
        }
        if let Some(place) = span(&self.following) {
            let message = format!(
                "{} of {total} formulas depend on cells that are filled, so they are compared when the output is \
                 computed",
                self.following.len()
            );
            problems.push(
                Problem::warning("awaits-recalculation", place.called(&target.from), message)
                    .hint("open the output in a spreadsheet program and look at the verdict"),
            );
        }
        let cells: Vec<SheetRange> = self.differing.iter().map(|(at, ..)| at.clone()).collect();
        if let (Some(place), Some((at, found, expected, difference))) = (span(&cells), self.differing.first())
        {
            let expected = match (expected, difference) {
                (Cached::Number(x), Some(difference)) => format!("{x} (difference {difference})"),
                (Cached::Number(x), None) => x.to_string(),
                (Cached::Text(text), _) => format!("no number: {text}"),
                (Cached::None, _) => "no number".to_owned(),
            };
            let message = format!(
                "{} of {total} formulas differ from the declared basis; {} holds {found}, expected {expected}",
                self.differing.len(),
                at.range
            );
            problems.push(
                Problem::error("differs", place.called(&target.from), message)
                    .hint("look at the formula, or --replace-formulas to have it replaced"),
            );
        }
        problems
    }
}

/// The smallest rectangle around cells of one sheet.
pub fn span(cells: &[SheetRange]) -> Option<Place> {
    let first = cells.first()?;
    let mut range = first.range;
    for cell in cells {
        range = Range {
            first: Cell {
                row: range.first.row.min(cell.range.first.row),
                col: range.first.col.min(cell.range.first.col),
            },
            last: Cell {
                row: range.last.row.max(cell.range.last.row),
                col: range.last.col.max(cell.range.last.col),
            },
        };
    }
    Some(Place::cells(&first.sheet, range))
}

#[cfg(test)]
mod tests {
    use super::same_formula;

    #[test]
    fn formulas_are_told_apart_by_more_than_their_looks() {
        assert!(same_formula("SUM($A$1:B2)", "sum( A1:B2 )"));
        assert!(!same_formula("A1*B1", "A1*B2"));
    }
}
