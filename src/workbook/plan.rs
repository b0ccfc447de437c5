//! What a fill does to each target cell: write it, tick it, or report it.

use std::collections::{BTreeMap, BTreeSet};

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
    /// How many formulas were left and agree.
    pub ticked: usize,
}

impl Plan {
    /// Writes a cell, and keeps what it held before.
    pub fn write(&mut self, at: SheetRange, role: String, before: String, write: CellWrite) {
        let after = match &write {
            CellWrite::Number(x) => x.to_string(),
            CellWrite::Text(text) => text.clone(),
            CellWrite::Formula(text, _) => format!("={text}"),
            CellWrite::DropValue | CellWrite::Result(_) => String::new(),
        };
        self.writes.entry(at.sheet.clone()).or_default().insert(at.range.first, write);
        self.changes.push(Change { at: at.clone(), role, before, after });
        self.changed.push(at);
    }
}

/// Cells by sheet whose stored results a fill makes stale.
pub type Stale = BTreeMap<String, BTreeSet<Cell>>;

/// What an earlier fill left, and how this one is to go about targets.
pub struct Ways<'a> {
    /// hence's own sheets in the workbook.
    pub own: &'a [OwnSheet],
    /// Formulas that an earlier fill wrote, by place.
    pub written: &'a BTreeMap<String, String>,
    /// Write formulas, not numbers.
    pub formulas: bool,
    /// Replace formulas that are found, instead of comparing them.
    pub replace_formulas: bool,
    /// Formulas among these cells cannot be compared.
    pub stale: &'a Stale,
}

/// Decides every target cell of every option.
pub fn plan_targets(
    appraisal: &Appraisal,
    outcomes: &[ChoiceOutcome],
    layout: &Layout,
    ways: &Ways<'_>,
) -> Plan {
    let mut plan = Plan::default();
    let own: Vec<String> = ways.own.iter().map(|sheet| format!("{}!", quote_sheet(&sheet.name))).collect();
    for (c, choice) in appraisal.choices.iter().enumerate() {
        for (t, target) in choice.targets.iter().enumerate() {
            let results = expected(appraisal, outcomes, layout, c, target);
            let writes = target_writes(appraisal, outcomes, layout, c, target, ways.formulas);
            let mut kept = Kept::default();
            for (i, (write, result)) in writes.into_iter().zip(&results).enumerate() {
                let held = target.held.get(i).unwrap_or(&Held::Blank);
                let at = cell_of(&target.at, i);
                let expected = if let Cached::Number(x) = result { Some(*x) } else { None };
                let tolerance = expected.map_or(0.0, |x| tolerance::of_cell(target, i, x));
                let stale = ways.stale.get(&target.at.sheet).is_some_and(|s| s.contains(&at.range.first));
                let replaceable = match held {
                    Held::Blank | Held::Number(_) | Held::Error(_) => true,
                    Held::Text(text) => is_own_text(text),
                    Held::Formula { text, .. } => {
                        ways.replace_formulas
                            || own.iter().any(|sheet| text.contains(sheet.as_str()))
                            || ways.written.get(&at.to_string()).is_some_and(|own| same_formula(own, text))
                            // The analyst's own, in the very words that a fill would write: it stays where it shows what is
                            // expected, so that what rests on it is compared; else writing it brings its result up to date.
                            || matches!(&write, CellWrite::Formula(new, _) if same_formula(new, text))
                                && (stale || !shows(held, result, tolerance))
                    }
                };
                let cell = TargetCell {
                    choice: c,
                    target: t,
                    index: i,
                    at,
                    expected,
                    filled: replaceable,
                    tolerance,
                    awaits: false,
                };
                let awaits = stale || matches!(held, Held::Formula { value: None, shown: None, .. });
                let cell = TargetCell { awaits: awaits && !replaceable, ..cell };
                if replaceable {
                    if let (Held::Number(typed), Some(x)) = (held, expected)
                        && (typed - x).abs() > cell.tolerance
                        && !ways.written.get(&cell.at.to_string()).is_some_and(|w| w.parse() == Ok(*typed))
                    {
                        kept.typed.push((cell.at.clone(), *typed));
                    }
                    plan.filled += 1;
                    plan.write(cell.at.clone(), role_words(&target.role), words(held), write);
                    plan.cells.push(cell);
                } else {
                    kept.compare(held, result, &cell);
                    plan.ticked += kept.take_tick();
                    plan.cells.push(cell);
                }
            }
            plan.problems.extend(kept.problems(target));
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

/// Whether a formula's stored result is the one expected.
fn shows(held: &Held, expected: &Cached, tolerance: f64) -> bool {
    let Held::Formula { value, shown, .. } = held else { return false };
    match (value, shown, expected) {
        (Some(found), _, Cached::Number(x)) => (found - x).abs() <= tolerance,
        (None, Some(shown), Cached::Text(text)) => same_text(shown, text),
        _ => false,
    }
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

/// The cells of one target that were left as they are, and typed numbers that were not.
#[derive(Default)]
struct Kept {
    texts: Vec<SheetRange>,
    typed: Vec<(SheetRange, f64)>,
    waiting: Vec<SheetRange>,
    differing: Vec<(SheetRange, String, Cached, Option<f64>)>,
    fresh_tick: bool,
}

impl Kept {
    /// Compares one cell.
    fn compare(&mut self, held: &Held, expected: &Cached, cell: &TargetCell) {
        let Held::Formula { value, shown, .. } = held else {
            self.texts.push(cell.at.clone());
            return;
        };
        if cell.awaits {
            self.waiting.push(cell.at.clone());
        } else if shows(held, expected, cell.tolerance) {
            self.fresh_tick = true;
        } else {
            let found = value.map(|x| x.to_string()).or(shown.clone()).unwrap_or_default();
            let difference = match expected {
                Cached::Number(x) => value.map(|found| found - x),
                _ => None,
            };
            self.differing.push((cell.at.clone(), found, expected.clone(), difference));
        }
    }

    fn take_tick(&mut self) -> usize {
        usize::from(std::mem::take(&mut self.fresh_tick))
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
        let cells: Vec<SheetRange> = self.typed.iter().map(|(at, _)| at.clone()).collect();
        if let (Some(place), Some((at, typed))) = (span(&cells), self.typed.first()) {
            let message = format!(
                "{} of {total} cells held typed numbers that differ from the declared basis and were replaced; {} held \
                 {typed}",
                self.typed.len(),
                at.range
            );
            problems.push(
                Problem::warning("number-replaced", place.called(&target.from), message)
                    .hint("Audit changes keeps every number that was replaced"),
            );
        }
        if let Some(place) = span(&self.waiting) {
            let message = format!(
                "{} of {total} formulas have no result yet, or one from before this fill, so nothing was compared",
                self.waiting.len()
            );
            problems
                .push(Problem::warning("awaits-recalculation", place.called(&target.from), message).hint(
                    "open and save the output in a spreadsheet program, and look at the verdict there",
                ));
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
