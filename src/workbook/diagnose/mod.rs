//! What kind of mistake a workbook's numbers and formulas show, each kind in a module of its own.
//!
//! One mistake gives one finding. What follows from it, by formula or because the workbook's own numbers give it, is
//! folded into it; a cell that differs for no reason that is known is a finding `differs`.

mod by_year;
mod calc;
mod cells;
mod consequences;
mod differs;
pub mod effect;
mod expr;
mod factors;
mod lines;
mod mend;
mod reach;
mod roots;
mod rounding;
mod rows;
mod seen;
mod signs;
pub mod structure;
mod sums;
mod totals;
mod units;
mod years;

pub(crate) use mend::{mend, unvalued};
pub use seen::{Compared, Seen, Standing};

use crate::findings::{Finding, Kind};
use crate::problem::Result;
use crate::references::SheetRange;

/// Every mistake of a workbook, `known` ones first; what only repeats those explains cells, and is not told again.
///
/// **Errors**: those of reading its formulas.
pub(crate) fn findings(
    seen: &Seen,
    known: Vec<Finding>,
    repeats: impl Fn(&Finding) -> bool,
) -> Result<Vec<Finding>> {
    let told = known.len();
    let mut findings = known;
    if seen.appraisal.axes.iter().any(|axis| axis.at.parts().len() > 1) {
        // Rows in pieces have other cells between them, which the readings below would take for years.
        differs::add(seen, &[], &mut findings)?;
        return Ok(findings);
    }
    let look = structure::Look::new(seen)?;
    findings.extend(structure::by_formulas(&look));
    let reach = reach::of(seen, &findings)?;
    let mut rows = factors::rows(seen);
    let known = |at: &SheetRange| reach.holds(at) || years::under_broken(seen, &findings, at);
    let by_factors = factors::findings(seen, &mut rows, known);
    findings.extend(by_factors);
    // What a total holds may be told by its numbers alone, where no factors give them.
    let consequences = consequences::Consequences::of(seen, &rows);
    let by_totals = structure::of_totals(&look, &findings, |cell| consequences.follows(cell));
    findings.extend(by_totals);
    differs::add(seen, &rows, &mut findings)?;
    // What only follows has explained its cells by now, and is not told again.
    let later = findings.split_off(told);
    for finding in &later {
        let cells = finding.place.sheet.as_ref().zip(finding.place.range);
        let at = cells.map(|(sheet, range)| SheetRange::new(sheet, range));
        let under = at.is_some_and(|at| {
            years::under_broken(seen, &later, &at) || years::under_broken(seen, &findings[..told], &at)
        });
        let follows = finding.kind == Kind::Differs && under;
        let again = finding.place.range.is_some_and(|range| range.is_single())
            && findings.iter().any(|earlier| sums::same(earlier, finding));
        if !follows && !again && !repeats(finding) {
            findings.push(finding.clone());
        }
    }
    Ok(findings)
}
