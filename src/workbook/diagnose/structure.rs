//! Mistakes in how a workbook is put together: typed numbers among formulas, totals, signs, units.

use std::collections::HashSet;

use super::calc::Slopes;
use super::cells::Cells;
use super::effect::Effect;
use super::expr::At;
use super::lines::{Line, lines};
use super::{Compared, Seen};
use super::{rows, signs, sums, totals, units, years};
use crate::appraisal::{Choice, Held, Target, TargetRole};
use crate::findings::Finding;
use crate::problem::Result;
use crate::references::Area;

/// Every structural mistake of a workbook that could be read, in no particular order.
///
/// **Errors**: those of reading cells.
pub fn findings(seen: &Seen) -> Result<Vec<Finding>> {
    let look = Look::new(seen)?;
    let mut found = by_formulas(&look);
    found.extend(of_totals(&look, &found, |_| false));
    Ok(found)
}

/// Those that formulas, headings and flows show.
pub(super) fn by_formulas(look: &Look) -> Vec<Finding> {
    let mut found = years::findings(look);
    found.extend(rows::findings(look));
    found.extend(totals::findings(look));
    found.extend(signs::findings(look));
    found.extend(units::findings(look));
    found.iter_mut().for_each(|finding| call(finding, look.seen));
    found
}

/// Mistakes that the numbers of totals show, besides those `told`; totals that follow from other numbers are left out.
pub(super) fn of_totals(look: &Look, told: &[Finding], follows: impl Fn(&Compared) -> bool) -> Vec<Finding> {
    let mut found = sums::findings(look, told, follows);
    found.iter_mut().for_each(|finding| call(finding, look.seen));
    found
}

/// Adds the name that the cells of a finding go by.
fn call(finding: &mut Finding, seen: &Seen) {
    let (Some(sheet), Some(range), None) = (&finding.place.sheet, finding.place.range, &finding.place.name)
    else {
        return;
    };
    let inside = |at: &Area| at.contains(sheet, range.first) && at.contains(sheet, range.last);
    let choices = || seen.appraisal.choices.iter();
    let streams = choices().flat_map(|choice| &choice.streams).map(|stream| (&stream.at, &stream.from));
    let targets = choices().flat_map(|choice| &choice.targets).map(|target| (&target.at, &target.from));
    let name = streams.chain(targets).find(|(at, _)| inside(at)).map(|(_, from)| from.clone());
    finding.place.name = name;
}

/// What the diagnoses of structure share.
pub(super) struct Look<'s, 'p> {
    pub seen: &'s Seen<'p>,
    pub cells: Cells,
    /// Rows (or columns) along the years.
    pub lines: Vec<Line>,
    /// For each option, what its NPV cell rests on, where that holds a formula.
    pub npvs: Vec<Option<Slopes>>,
}

impl<'s, 'p> Look<'s, 'p> {
    /// **Errors**: those of reading cells.
    pub(super) fn new(seen: &'s Seen<'p>) -> Result<Self> {
        let cells = Cells::read(seen.package, seen.book, &seen.appraisal)?;
        let lines = lines(&seen.appraisal, &cells);
        let npv = |choice: &Choice| {
            let is_npv = |t: &&Target| matches!(t.role, TargetRole::Npv | TargetRole::PvTotal(None));
            let target =
                choice.targets.iter().find(|t| is_npv(t) && matches!(t.held[0], Held::Formula { .. }));
            target.map(|target| Slopes::of(cells.each(&target.at)[0], &cells, &HashSet::new()))
        };
        let npvs = seen.appraisal.choices.iter().map(npv).collect();
        Ok(Look { seen, cells, lines, npvs })
    }

    /// The effect of a mistake in results, from what it adds to the NPV that each option shows.
    pub(super) fn in_results(&self, added: &[f64]) -> Effect {
        let right = self.seen.npvs();
        let wrong: Vec<f64> = right.iter().zip(added).map(|(npv, added)| npv + added).collect();
        Effect::of(&self.seen.appraisal, &right, &wrong)
    }

    /// The effect of a mistake in flows, which the NPVs under the declared basis hold too, from what it adds to each
    /// option's own NPV.
    pub(super) fn in_flows(&self, added: &[f64]) -> Effect {
        let baseline = self.seen.appraisal.baseline.map_or(0.0, |b| added[b]);
        let wrong = self.seen.npvs();
        let right: Vec<f64> = wrong.iter().zip(added).map(|(npv, added)| npv - (added - baseline)).collect();
        Effect::of(&self.seen.appraisal, &right, &wrong)
    }

    /// What a change of one cell by so much does: through the formulas of the NPV cells, else through the stream or the
    /// factors that the cell is part of. None where neither tells.
    pub(super) fn changed(&self, cell: At, by: f64) -> Option<Effect> {
        let through: Vec<f64> =
            self.npvs.iter().map(|npv| npv.as_ref().map_or(0.0, |slopes| slopes.at(cell) * by)).collect();
        if through.iter().any(|added| *added != 0.0) && through.iter().all(|added| added.is_finite()) {
            let in_stream = self.stream_at(cell).next().is_some();
            return Some(if in_stream { self.in_flows(&through) } else { self.in_results(&through) });
        }
        let mut added = vec![0.0; self.seen.appraisal.choices.len()];
        let mut touched = false;
        for (choice, stream, year) in self.stream_at(cell) {
            added[choice] += by * self.worth(choice, stream, year);
            touched = true;
        }
        if touched {
            return Some(self.in_flows(&added));
        }
        for (c, choice) in self.seen.appraisal.choices.iter().enumerate() {
            let outcome = &self.seen.outcomes[c];
            let shared = |t: &&Target| t.role == TargetRole::Factor;
            for target in choice.targets.iter().filter(shared) {
                if let Some(i) = self.cells.each(&target.at).iter().position(|at| *at == cell) {
                    added[c] += by * outcome.net.get(i).copied().unwrap_or(0.0);
                    touched = true;
                }
            }
        }
        touched.then(|| self.in_results(&added))
    }

    /// The streams that hold a cell: option, stream and year.
    fn stream_at(&self, cell: At) -> impl Iterator<Item = (usize, usize, usize)> {
        let choices = self.seen.appraisal.choices.iter().enumerate();
        choices.flat_map(move |(c, choice)| {
            let streams = choice.streams.iter().enumerate();
            streams.filter_map(move |(s, stream)| {
                let year = self.cells.each(&stream.at).iter().position(|at| *at == cell)?;
                Some((c, s, year))
            })
        })
    }

    /// What one unit in the cell of a stream adds to its option's own NPV.
    pub(super) fn worth(&self, choice: usize, stream: usize, year: usize) -> f64 {
        let outcome = &self.seen.outcomes[choice];
        let what = &self.seen.appraisal.choices[choice].streams[stream];
        let multiplier = outcome.streams[stream].multipliers.as_ref().map_or(1.0, |all| all[year]);
        let scale = what.sign * what.unit * (1.0 + what.uplift.value) * multiplier;
        crate::formulas::side(what.kind) * scale * outcome.factors_of(stream)[year]
    }
}

/// A number in words: six digits, thousands apart.
pub(super) fn figure(x: f64) -> String {
    let digits = if x == 0.0 { 0 } else { (5 - x.abs().log10().floor() as i32).clamp(0, 10) };
    let text = format!("{:.*}", digits as usize, x.abs());
    let (whole, part) = text.split_once('.').unwrap_or((&text, ""));
    let mut grouped = String::new();
    for (i, digit) in whole.chars().enumerate() {
        if i > 0 && (whole.len() - i) % 3 == 0 && whole.len() > 4 {
            grouped.push(',');
        }
        grouped.push(digit);
    }
    let part = part.trim_end_matches('0');
    let sign = if x < 0.0 && text.contains(|c: char| matches!(c, '1'..='9')) { "-" } else { "" };
    if part.is_empty() { format!("{sign}{grouped}") } else { format!("{sign}{grouped}.{part}") }
}

/// A number as a cell holds it, to the fifteen digits that spreadsheet programs show.
pub(super) fn exact(x: f64) -> String {
    let shown: f64 = format!("{x:.14e}").parse().unwrap_or(x);
    shown.to_string()
}
