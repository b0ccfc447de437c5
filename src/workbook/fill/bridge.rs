//! From what a workbook held to how its options stand now, step by step.

use hence_core::Catalogue;

use crate::appraisal::{Appraisal, Choice, Held, TargetRole};
use crate::decide::{Bridge, Stand};
use crate::outcome::ChoiceOutcome;
use crate::tolerance::half_unit;
use crate::valuation::value;

/// Of a net present value: what differs by less is how it was rounded, not a mistake.
const MILLIONTH: f64 = 1e-6;

/// One bridge an option. `declared` is the workbook as it states itself where the command line tells (`told`) another
/// basis, base or prices; `moved` the workbook's own basis at the base and in the prices told, where a basis is told too.
pub(super) fn bridges(
    appraisal: &Appraisal,
    outcomes: &[ChoiceOutcome],
    declared: Option<&Appraisal>,
    moved: Option<&Appraisal>,
    told: bool,
    catalogue: &Catalogue,
) -> Vec<Bridge> {
    let now = appraisal.decide.stands(outcomes, appraisal.baseline);
    let valued = |other: Option<&Appraisal>| -> Option<Vec<Stand>> {
        let other = other.filter(|other| other.choices.len() == now.len())?;
        let (outcomes, _) = value(other, catalogue).ok()?;
        Some(other.decide.stands(&outcomes, other.baseline))
    };
    let own = if told { valued(declared) } else { Some(now.clone()) };
    let moved = valued(moved).or_else(|| own.clone());
    let of = |stands: &Option<Vec<Stand>>, i: usize| stands.as_ref().map(|stands| stands[i]);
    let bridge = |(i, choice): (usize, &Choice)| {
        let (held, declared) = (held(choice), of(&own, i));
        let wrong = held.zip(declared).is_some_and(|((held, half), own)| is_wrong(held, half, own.npv));
        Bridge { held: held.map(|(x, _)| x), wrong, declared, moved: of(&moved, i), now: now[i] }
    };
    appraisal.choices.iter().enumerate().map(bridge).collect()
}

/// The net present value in its cell, and half of the last digit that the cell shows.
fn held(choice: &Choice) -> Option<(f64, f64)> {
    let target = choice.targets.iter().find(|target| target.role == TargetRole::Npv)?;
    let format = target.formats.first().and_then(Option::as_deref);
    let half = format.and_then(half_unit).unwrap_or_default();
    match target.held.first()? {
        Held::Number(x) | Held::Formula { value: Some(x), .. } => Some((*x, half)),
        _ => None,
    }
}

/// Off by more than a millionth, and by more than what the cell shows.
fn is_wrong(held: f64, half: f64, right: f64) -> bool {
    (held - right).abs() > half.max(MILLIONTH * right.abs())
}
