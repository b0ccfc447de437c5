//! From what a workbook held to how its options stand now, step by step.

use hence_core::Catalogue;

use crate::appraisal::{Appraisal, Choice, Held, TargetRole};
use crate::decide::{Bridge, Stand};
use crate::outcome::ChoiceOutcome;
use crate::valuation::value;

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
    let bridge = |(i, choice): (usize, &Choice)| Bridge {
        held: held(choice),
        declared: of(&own, i),
        moved: of(&moved, i),
        now: now[i],
    };
    appraisal.choices.iter().enumerate().map(bridge).collect()
}

/// The net present value in its cell.
fn held(choice: &Choice) -> Option<f64> {
    let target = choice.targets.iter().find(|target| target.role == TargetRole::Npv)?;
    match target.held.first()? {
        Held::Number(x) | Held::Formula { value: Some(x), .. } => Some(*x),
        _ => None,
    }
}
