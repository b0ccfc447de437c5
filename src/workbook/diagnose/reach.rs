//! The cells of findings, and every formula that depends on them.

use std::collections::BTreeSet;

use super::Seen;
use crate::findings::Finding;
use crate::problem::Result;
use crate::references::{Cell, SheetRange};
use crate::stale;

/// Cells that findings explain.
#[derive(Debug, Default)]
pub struct Reach {
    places: Vec<SheetRange>,
    dependents: BTreeSet<(String, Cell)>,
}

impl Reach {
    /// Whether a cell is one of them.
    pub fn holds(&self, at: &SheetRange) -> bool {
        self.places.iter().any(|place| place.sheet == at.sheet && place.range.contains(at.range.first))
            || self.dependents.contains(&(at.sheet.clone(), at.range.first))
    }
}

/// The cells that findings are about, with all that depends on them.
pub fn of(seen: &Seen, findings: &[Finding]) -> Result<Reach> {
    let places: Vec<SheetRange> = findings
        .iter()
        .filter_map(|finding| Some(SheetRange::new(finding.place.sheet.as_ref()?, finding.place.range?)))
        .collect();
    if places.is_empty() {
        return Ok(Reach::default());
    }
    let found = stale::dependents(seen.package, seen.book, &places)?;
    let cells = found.cells.into_iter().flat_map(|(sheet, cells)| {
        let name = &seen.book.sheets[sheet].name;
        cells.into_iter().map(move |cell| (name.clone(), cell))
    });
    Ok(Reach { dependents: cells.collect(), places })
}
