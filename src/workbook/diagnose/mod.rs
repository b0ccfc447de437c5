//! What kind of mistake a workbook's numbers and formulas show, each kind in a module of its own.
//!
//! One mistake gives one finding. What follows from it, by formula or because the workbook's own numbers give it, is
//! folded into it; a cell that differs for no reason that is known is a finding `differs`.

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

use crate::findings::Finding;
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
    findings.extend(structure::findings(seen)?);
    let reach = reach::of(seen, &findings)?;
    let mut rows = factors::rows(seen);
    findings.extend(factors::findings(seen, &mut rows, |at: &SheetRange| reach.holds(at)));
    differs::add(seen, &rows, &mut findings)?;
    let later = findings.split_off(told);
    findings.extend(later.into_iter().filter(|finding| !repeats(finding)));
    Ok(findings)
}
