//! Options valued again under the schedule that their own wants run beside it.

use std::collections::BTreeSet;

use hence_core::Catalogue;

use crate::appraisal::Appraisal;
use crate::outcome::ChoiceOutcome;
use crate::problem::{Place, Problem};
use crate::report::Companion;
use crate::valuation::value;

/// Every option again under the companion of its schedule, where years reach beyond the companion's horizon.
///
/// Where one option's years do, all options on that schedule are valued beside it, so that increments over the baseline
/// stand on one basis. A companion that cannot value the workbook is a warning.
pub(crate) fn companions(
    appraisal: &Appraisal,
    outcomes: &[ChoiceOutcome],
    catalogue: &Catalogue,
    problems: &mut Vec<Problem>,
) -> Vec<Option<Companion>> {
    let reaches = |outcome: &ChoiceOutcome| {
        let (id, beyond) = outcome.basis.companion()?;
        let reach = outcome.offsets.iter().copied().fold(0.0, f64::max);
        (reach > beyond).then(|| id.to_owned())
    };
    let wanted: BTreeSet<String> = outcomes.iter().filter_map(reaches).collect();
    let mut beside = appraisal.clone();
    let mut changed = vec![false; outcomes.len()];
    let mut failed = |message: String| {
        let problem = Problem::warning("companion", Place::default(), message);
        problems.push(problem.hint("value the workbook on the companion schedule by itself, with --basis"));
    };
    for (i, (choice, outcome)) in beside.choices.iter_mut().zip(outcomes).enumerate() {
        if outcome.basis.companion().is_none_or(|(id, _)| !wanted.contains(id)) {
            continue;
        }
        match outcome.basis.beside(catalogue) {
            Ok(Some(basis)) => {
                choice.basis.value = basis.canonical();
                changed[i] = true;
            }
            Ok(None) => {}
            Err(error) => failed(format!("the schedule to be run beside is not known: {error}")),
        }
    }
    if !changed.contains(&true) {
        return vec![None; outcomes.len()];
    }
    match value(&beside, catalogue) {
        Ok((outcomes, _)) => {
            let make = |(outcome, changed): (&ChoiceOutcome, bool)| {
                let id = outcome.basis.schedule().map(|schedule| schedule.id().to_owned());
                id.filter(|_| changed).map(|id| Companion {
                    id,
                    words: outcome.basis.words(),
                    totals: *outcome.totals(),
                })
            };
            outcomes.iter().zip(changed).map(make).collect()
        }
        Err(error) => {
            failed(format!("the schedule to be run beside cannot value the workbook: {error}"));
            vec![None; outcomes.len()]
        }
    }
}
