//! What a plan says of a workbook, and what becomes of the names that say otherwise.

use crate::model::DefinedName;
use crate::planfile::{Planned, Says};
use crate::problem::Problem;
use crate::reading::Value;
use crate::references::Area;
use crate::roles::{Role, RoleName};

use super::cells::shown;
use super::find::{Named, located};
use super::{Checked, Context};

/// An entry of a plan with its cells, or what it states without any.
pub(super) fn from_plan(context: &mut Context, planned: &Planned) -> Checked<Named> {
    let (name, from) = (planned.name.clone(), planned.from.clone());
    match &planned.says {
        Says::Value(value) => Ok(Named::without_cell(planned, value.clone())),
        Says::Cells(text) => {
            let area = located(context, planned.place(), text).map_err(|problem| {
                // What is wrong with a name that the plan uses is told at the plan's line.
                let called = problem.place.name.clone().filter(|name| *name != from);
                let message = called.map_or_else(String::new, |name| format!("the name {name} "));
                Problem { message: message + &problem.message, place: planned.place(), ..*problem }
            })?;
            Ok(Named { line: Some(planned.line), ..Named::at(name, from, area) })
        }
    }
}

/// Whether a name of the workbook can hold for each of several appraisals: it states something, or years, for all.
pub(super) fn belongs_to_all(name: &RoleName, defined: &DefinedName) -> bool {
    let along = matches!(name.role, Role::Years | Role::Offsets | Role::Prices | Role::Consumption);
    name.option.is_none() && defined.scope.is_none() && (along || name.role.is_setting())
}

/// Where plan and workbook state another base, basis, timing or price basis, the plan counts, and a warning says so.
pub(super) fn disagreement(context: &mut Context, planned: &Named, name: &str, area: Area) {
    let weighty = [Role::Base, Role::Basis, Role::Timing, Role::PriceBasis];
    if !weighty.contains(&planned.name.role) || (planned.stated.is_none() && planned.area == area) {
        return;
    }
    let named = Named::at(planned.name.clone(), name.to_owned(), area);
    let (held, said) = (held(context, &named), held(context, planned));
    if held.is_empty() || held.eq_ignore_ascii_case(&said) {
        return;
    }
    let message = format!(
        "the workbook says `{}`, and {} says `{}`: the plan counts",
        shown(&held),
        planned.from,
        shown(&said)
    );
    context.report(
        Problem::warning("plan-overrides", named.place(), message)
            .hint("take the role out of the plan to use what the workbook says"),
    );
}

/// What the first cell of a role holds, or a plan states, as text.
pub(super) fn held(context: &mut Context, named: &Named) -> String {
    let value = match &named.stated {
        Some(value) => Some(value.clone()),
        None => {
            context.grid(&named.at).and_then(|grid| grid.iter().next().map(|(_, cell)| cell.value.clone()))
        }
    };
    match value {
        Some(Value::Text(text)) => text.trim().to_owned(),
        Some(Value::Number(number) | Value::Date(number)) => number.to_string(),
        _ => String::new(),
    }
}
