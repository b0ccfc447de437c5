//! Options over the baseline: their increments, and what keeps increments from having a plain meaning.

use crate::appraisal::{Appraisal, Choice, StreamKind};
use crate::outcome::{ChoiceOutcome, Totals};
use crate::problem::{Place, Problem};
use crate::roles::key;
use crate::valuation::{finish_totals, push_once};

/// The totals over the baseline.
pub(crate) fn increment(outcome: &ChoiceOutcome, base: &ChoiceOutcome) -> Totals {
    let (own, base) = (&outcome.absolute, &base.absolute);
    let less = Totals {
        benefits: own.benefits - base.benefits,
        costs: own.costs - base.costs,
        pv_benefits: own.pv_benefits - base.pv_benefits,
        pv_costs: own.pv_costs - base.pv_costs,
        ..Totals::default()
    };
    finish_totals(less, outcome.annuity)
}

/// What keeps an increment over the baseline from having a plain meaning.
pub(crate) fn warn_baseline(
    outcome: &ChoiceOutcome,
    base: &ChoiceOutcome,
    choice: &Choice,
    base_choice: &Choice,
    problems: &mut Vec<Problem>,
) {
    if outcome.basis != base.basis || outcome.base_words != base.base_words || outcome.timing != base.timing {
        problems.push(
            Problem::warning(
                "baseline-basis",
                Place::name(&choice.name),
                format!("its basis, base or timing is not that of the baseline `{}`", base_choice.name),
            )
            .hint("value both on one basis from one base year, or the increment has no meaning"),
        );
    }
    for (stream, valued) in choice.streams.iter().zip(&outcome.streams) {
        let twin = base_choice.streams.iter().position(|other| key(&other.name) == key(&stream.name));
        let Some(twin) = twin.filter(|s| base.streams[*s].own != valued.own) else { continue };
        let message = format!(
            "its stream `{}` is discounted on {}, in the baseline `{}` on {}",
            stream.name,
            valued.own.as_ref().map_or(&outcome.basis, |own| &own.basis).canonical(),
            base_choice.name,
            base.basis_of(twin).canonical()
        );
        push_once(
            problems,
            Problem::warning("baseline-basis", Place::name(&choice.name), message)
                .hint("discount a stream on one basis in every option"),
        );
    }
    // A damage that one side does not state would count as wholly avoided, or wholly new.
    for (has, lacks) in [(base_choice, choice), (choice, base_choice)] {
        let damages = |choice: &Choice| {
            let damages = choice.streams.iter().filter(|s| s.kind == StreamKind::Damage);
            damages.map(|s| (key(&s.name), s.name.clone())).collect::<Vec<_>>()
        };
        let known = damages(lacks);
        for (id, name) in damages(has).into_iter().filter(|(id, _)| known.iter().all(|k| k.0 != *id)) {
            let message = format!(
                "`{}` has the damage `{name}`, `{}` has no damage of that name: it counts as 0 there",
                has.name, lacks.name
            );
            push_once(
                problems,
                Problem::warning("baseline-damage", Place::name(&choice.name), message)
                    .hint(format!("name the cells hence_damage_{id} of both, zeros included")),
            );
        }
    }
}

/// Annual equivalents over unequal lives are not comparable under a declining curve.
pub(crate) fn warn_unequal_lives(
    appraisal: &Appraisal,
    outcomes: &[ChoiceOutcome],
    problems: &mut Vec<Problem>,
) {
    let lives: std::collections::BTreeSet<u32> = outcomes.iter().map(|o| o.service_years).collect();
    let declining = outcomes.iter().any(|o| {
        let end = f64::from(o.service_years);
        let rate = |t: f64| o.curve.mean_rate(t).unwrap_or(0.0);
        (rate(1.0) - rate(end)).abs() > 1e-9
    });
    if lives.len() > 1 && declining {
        let names: Vec<&str> = appraisal.choices.iter().map(|c| c.name.as_str()).collect();
        problems.push(
            Problem::warning(
                "unequal-lives",
                Place::name(&names.join(", ")),
                "annual equivalents over unequal lives are not comparable under a declining curve",
            )
            .hint("appraise every option over the same years"),
        );
    }
}
