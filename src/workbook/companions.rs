//! Options valued again under the schedule that their own wants run beside it.

use std::collections::BTreeSet;

use hence_core::{Basis, Catalogue};

use crate::appraisal::{Appraisal, Choice};
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
    let reaches = |outcome: &ChoiceOutcome| -> Vec<String> {
        let reach = outcome.length;
        let own = outcome.streams.iter().filter_map(|stream| stream.own.as_ref()).map(|own| &own.basis);
        let all = std::iter::once(&outcome.basis).chain(own).filter_map(Basis::companion);
        all.filter(|(_, beyond)| reach > *beyond).map(|(id, _)| id.to_owned()).collect()
    };
    let wanted: BTreeSet<String> = outcomes.iter().flat_map(reaches).collect();
    let wants = |basis: &Basis| basis.companion().is_some_and(|(id, _)| wanted.contains(id));
    let mut beside = appraisal.clone();
    let mut changed = vec![false; outcomes.len()];
    let mut failed = |message: String| {
        let problem = Problem::warning("companion", Place::default(), message);
        problems.push(problem.hint("value the workbook on the companion schedule by itself, with --basis"));
    };
    for (i, (choice, outcome)) in beside.choices.iter_mut().zip(outcomes).enumerate() {
        let own = choice.streams.iter_mut().zip(&outcome.streams);
        let own = own.filter_map(|(s, o)| Some((s.basis.as_mut()?, &o.own.as_ref()?.basis)));
        for (given, basis) in std::iter::once((&mut choice.basis, &outcome.basis)).chain(own) {
            if !wants(basis) {
                continue;
            }
            match basis.beside(catalogue) {
                Ok(Some(basis)) => {
                    given.value = basis.canonical();
                    changed[i] = true;
                }
                Ok(None) => {}
                Err(error) => failed(format!("the schedule to be run beside is not known: {error}")),
            }
        }
    }
    if !changed.contains(&true) {
        return vec![None; outcomes.len()];
    }
    match value(&beside, catalogue) {
        Ok((outcomes, _)) => {
            let make = |((outcome, choice), changed): ((&ChoiceOutcome, &Choice), bool)| {
                changed.then(|| companion(outcome, choice))
            };
            outcomes.iter().zip(&appraisal.choices).zip(changed).map(make).collect()
        }
        Err(error) => {
            failed(format!("the schedule to be run beside cannot value the workbook: {error}"));
            vec![None; outcomes.len()]
        }
    }
}

/// What an option comes to beside, with every schedule it was valued on.
fn companion(outcome: &ChoiceOutcome, choice: &Choice) -> Companion {
    let id =
        |basis: &Basis| basis.schedule().map_or_else(|| basis.canonical(), |known| known.id().to_owned());
    let mut companion =
        Companion { id: id(&outcome.basis), words: outcome.basis.words(), totals: *outcome.totals() };
    for (stream, valued) in choice.streams.iter().zip(&outcome.streams) {
        if let Some(own) = &valued.own {
            companion.id.push_str(&format!(" ({} on {})", stream.name, id(&own.basis)));
            companion.words.push_str(&format!(". {} on {}", stream.name, own.basis.words()));
        }
    }
    companion
}
