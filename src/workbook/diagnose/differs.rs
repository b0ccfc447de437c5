//! Cells that differ for no reason that is known.

use super::consequences::Consequences;
use super::factors::Series;
use super::{Compared, Seen, Standing, reach};
use crate::appraisal::{Held, TargetRole};
use crate::findings::{Finding, Kind};
use crate::patch::Cached;
use crate::plan::{span, words};
use crate::preflight::ERRORS;
use crate::problem::{Place, Result};
use crate::references::SheetRange;
use crate::sheets::role_words;
use crate::tolerance;

/// Adds a finding for every range that differs and that no finding explains, from the factors to the totals.
pub fn add(seen: &Seen, rows: &[Series], findings: &mut Vec<Finding>) -> Result<()> {
    let consequences = Consequences::of(seen, rows);
    let mut rest: Vec<&Compared> =
        seen.compared.iter().filter(|cell| cell.standing == Standing::Differs).collect();
    rest.sort_by_key(|cell| order(&seen.target(cell).role));
    let mut explained = reach::of(seen, findings)?;
    let rounded = seen.compared.iter().any(|cell| cell.rounded);
    let mut places: Vec<SheetRange> = Vec::new();
    for cells in rest.chunk_by(|a, b| (a.choice, a.target) == (b.choice, b.target)) {
        let role = &seen.target(cells[0]).role;
        // Without a finding or rounded results there is nothing to follow from; an error value follows from no rounding.
        let told = !findings.is_empty();
        let measured = matches!(role, TargetRole::Payback | TargetRole::Annual);
        let follows = |cell: &Compared| {
            (told || rounded && seen.held(cell).number().is_some())
                && (consequences.follows(cell) || measured && consequences.differs_before(cell.choice))
        };
        let unexplained =
            |cell: &&&Compared| !(explained.holds(&cell.at) || follows(cell) || places.contains(&cell.at));
        let cells: Vec<&Compared> = cells.iter().filter(unexplained).copied().collect();
        let Some(finding) = finding(seen, &cells) else { continue };
        places.extend(cells.iter().map(|cell| cell.at.clone()));
        findings.push(finding);
        explained = reach::of(seen, findings)?;
    }
    Ok(())
}

/// What comes first in a workbook comes first here.
fn order(role: &TargetRole) -> u8 {
    match role {
        TargetRole::Rates => 0,
        TargetRole::Factor => 1,
        TargetRole::StreamFactor(_) => 2,
        TargetRole::PvByYear(Some(_)) => 3,
        TargetRole::PvByYear(None) => 4,
        TargetRole::PvTotal(_) => 5,
        TargetRole::PvCosts | TargetRole::PvBenefits => 6,
        TargetRole::Npv => 7,
        TargetRole::Ratio | TargetRole::Annual | TargetRole::Irr | TargetRole::Payback => 8,
    }
}

fn finding(seen: &Seen, cells: &[&Compared]) -> Option<Finding> {
    let first = cells.first()?;
    let target = seen.target(first);
    let places: Vec<SheetRange> = cells.iter().map(|cell| cell.at.clone()).collect();
    let place: Place = span(&places)?.called(&target.from);
    let held = seen.held(first);
    let error = error_value(held);
    let found = match (held.number(), error) {
        (Some(x), _) => x.to_string(),
        (None, Some(error)) => error.to_owned(),
        (None, None) => words(held),
    };
    let expected = match &first.expected {
        Cached::Number(x) => x.to_string(),
        Cached::Text(text) => text.clone(),
        Cached::None => "no number".to_owned(),
    };
    let role = role_words(&target.role);
    let in_error = cells.iter().filter(|cell| error_value(seen.held(cell)).is_some()).count();
    let words = match (cells.len(), target.held.len()) {
        (1, 1) if in_error == 1 => format!("{role} holds the error value {found}, and no number"),
        (n, all) if in_error == n => {
            format!("{n} of {all} cells ({role}) hold an error value ({found}), and no numbers")
        }
        (1, 1) => format!("{role} is not what the declared basis gives, and no reason is known"),
        (n, all) => format!(
            "{n} of {all} cells ({role}) do not hold what the declared basis gives, and no reason is known"
        ),
    };
    let difference = held.number().zip(match first.expected {
        Cached::Number(x) => Some(x),
        _ => None,
    });
    let effect_on_npv =
        difference.filter(|_| target.role == TargetRole::Npv).map(|(found, expected)| found - expected);
    Some(Finding {
        kind: Kind::Differs,
        place,
        found,
        expected,
        effect_on_npv,
        ranking: None,
        confidence: surely(first, difference),
        words,
    })
}

/// The error value that a cell shows, where it shows one.
fn error_value(held: &Held) -> Option<&str> {
    match held {
        Held::Error(error) => Some(error),
        Held::Formula { value: None, shown: Some(shown), .. } => {
            ERRORS.contains(&shown.as_str()).then_some(shown)
        }
        _ => None,
    }
}

/// How sure it is that a number differs: 1 less the tolerance over the difference; what is no number surely does.
fn surely(cell: &Compared, difference: Option<(f64, f64)>) -> f64 {
    let Some((found, expected)) = difference else { return 1.0 };
    let tolerance = cell.tolerance.max(tolerance::RELATIVE * expected.abs());
    1.0 - tolerance / (found - expected).abs()
}
