//! What welfare measures need: a path of consumption, the elasticity of marginal utility, incomes of groups.

use crate::appraisal::{Axis, Consumption, Given, Stream, Welfare};
use crate::problem::Problem;
use crate::roles::{Role, key};

use super::cells::number;
use super::counted::{check_aligned, place};
use super::find::Named;
use super::groups::{Group, Split};
use super::{Context, settings, streams};

/// The group whose income counts once.
pub(super) const REFERENCE: &str = "reference";
/// The highest elasticity of marginal utility.
const STEEPEST: f64 = 20.0;

/// What an option says for welfare measures.
pub(super) fn welfare(
    context: &mut Context,
    split: &Split,
    group: &Group,
    axis: &Axis,
    all: &[Stream],
) -> Welfare {
    let elasticity = split.of(group, Role::Elasticity).and_then(|named| elasticity(context, named));
    let reference = split.about(group, Role::Income, REFERENCE);
    let path = split.of(group, Role::Consumption);
    let welfare = Welfare {
        elasticity,
        reference: reference.and_then(|named| income(context, named)),
        consumption: path.and_then(|named| consumption(context, split, group, named, axis)),
    };
    let weighted = all.iter().find_map(|stream| stream.income.as_ref());
    match (weighted, reference) {
        (Some(given), None) => {
            let place =
                given.at.as_ref().map(|at| place(at, at.range.first, &given.from)).unwrap_or_default();
            context.report(
                Problem::error(
                    "income-reference",
                    place,
                    "gives the income of a group, and no income is said to count once",
                )
                .hint("enter the income that the weights refer to (the median, say) in a cell named hence_income_reference"),
            );
        }
        (None, Some(named)) if !names_incomes(split, group) => context.report(
            Problem::warning(
                "income-reference",
                named.place(),
                "is there, and no stream is of a group with an income",
            )
            .hint("name the income of each group as its stream: hence_income_low beside hence_benefit_low"),
        ),
        _ => {}
    }
    welfare
}

/// Whether incomes of groups are named for an option; what is wrong with them is reported where they are read.
fn names_incomes(split: &Split, group: &Group) -> bool {
    group.named.iter().chain(&split.shared).any(|named| {
        named.name.role == Role::Income && named.name.stream.as_deref().map(key).as_deref() != Some(REFERENCE)
    })
}

/// The income of a group.
pub(super) fn income(context: &mut Context, named: &Named) -> Option<Given<f64>> {
    let value = settings::amount(context, named)?;
    if value > 0.0 {
        return Some(Given { value, at: named.cells(), from: named.from.clone() });
    }
    context.report(
        Problem::error("income", named.place(), format!("is {value}, and an income is above 0"))
            .hint("enter the yearly income of the group, in the same unit as hence_income_reference"),
    );
    None
}

fn elasticity(context: &mut Context, named: &Named) -> Option<Given<f64>> {
    let value = settings::amount(context, named)?;
    if (0.0..=STEEPEST).contains(&value) {
        return Some(Given { value, at: named.cells(), from: named.from.clone() });
    }
    context.report(
        Problem::error("elasticity", named.place(), format!("is {value}, allowed 0 to {STEEPEST}"))
            .hint("enter the elasticity of marginal utility, a number such as 1 or 1.5"),
    );
    None
}

/// A level of consumption for each year, all above 0.
fn consumption(
    context: &mut Context,
    split: &Split,
    group: &Group,
    named: &Named,
    axis: &Axis,
) -> Option<Consumption> {
    if let Some(problem) = streams::wrong_shape(named, axis) {
        context.report(problem);
        return None;
    }
    check_aligned(context, &named.area, &named.from, &axis.at);
    let unit = split.about(group, Role::Unit, Role::Consumption.word());
    let unit = unit.map_or(Some(1.0), |named| settings::unit(context, named))?;
    let mut raw = Vec::new();
    for (cell, content) in context.along(&named.area)? {
        let place = place(&named.at, cell, &named.from);
        match number(&content, place.clone()) {
            Ok(Some(level)) if level > 0.0 => raw.push(level),
            Ok(level) => {
                let found = level.map_or_else(|| "is blank".to_owned(), |level| format!("is {level}"));
                context.report(
                    Problem::error("consumption", place, format!("{found}, and consumption is above 0"))
                        .hint("enter the consumption of every year without the project"),
                );
            }
            Err(problem) => context.report(*problem),
        }
    }
    let whole = raw.len() == axis.labels.len();
    whole.then(|| Consumption { at: named.area.clone(), from: named.from.clone(), raw, unit })
}
