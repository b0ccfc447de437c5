//! Ranges to be filled: their shape, what they hold now, and why some may not be written to.

use crate::appraisal::{Axis, Choice, Held, StreamKind, Target, TargetRole};
use crate::model::SheetFacts;
use crate::problem::{Place, Problem};
use crate::reading::{ReadCell, Value};
use crate::references::{Area, Cell, Range, SheetRange};
use crate::roles::{Role, key};

use super::Context;
use super::cells::one;
use super::choices::stream_names;
use super::counted::check_aligned;
use super::find::Named;
use super::groups::Split;
use super::streams::wrong_shape;

/// The targets of an option among its names.
pub(super) fn targets(context: &mut Context, named: &[Named], choice: &Choice, axis: &Axis) -> Vec<Target> {
    named
        .iter()
        .filter(|named| named.name.role.is_output())
        .filter_map(|named| target(context, named, choice, axis))
        .collect()
}

/// Targets without an option: filled once where every option gives the same, refused otherwise.
pub(super) fn add_shared(context: &mut Context, split: &Split, choices: &mut [Choice], axes: &[Axis]) {
    for named in split.shared.iter().filter(|named| named.name.role.is_output()) {
        let alike = choices.windows(2).all(|pair| {
            (pair[0].axis, &pair[0].base.value, &pair[0].basis.value)
                == (pair[1].axis, &pair[1].base.value, &pair[1].basis.value)
                && pair[0].timing.as_ref().map(|t| t.value) == pair[1].timing.as_ref().map(|t| t.value)
        });
        let own_basis = |choice: &Choice| {
            let stream = named.name.stream.as_deref().map(key)?;
            let stream = choice.streams.iter().find(|s| key(&s.name) == stream)?;
            stream.basis.as_ref().map(|given| given.value.clone())
        };
        let alike = alike && choices.windows(2).all(|pair| own_basis(&pair[0]) == own_basis(&pair[1]));
        let by_year = matches!(named.name.role, Role::Factor | Role::Rates);
        if by_year
            && alike
            && let Some(choice) = choices.first_mut()
        {
            let axis = &axes[choice.axis];
            if let Some(target) = target(context, named, choice, axis) {
                choice.targets.push(target);
            }
            continue;
        }
        let stream = named.name.stream.as_deref().map(key);
        let common = stream.filter(|stream| split.common.contains(stream));
        if let (true, Some(_), Some(choice)) = (alike, common, choices.first_mut()) {
            let axis = &axes[choice.axis];
            if let Some(target) = target(context, named, choice, axis) {
                choice.targets.push(target);
            }
            continue;
        }
        let option = choices.first().map(|choice| key(&choice.name).replace(' ', "_")).unwrap_or_default();
        context.report(
            Problem::error(
                "loose-target",
                named.place(),
                format!("`{}` has no option, and the options give different values", named.name.words()),
            )
            .hint(format!("name it {}__{option}, and a cell for each other option", named.name)),
        );
    }
}

fn target(context: &mut Context, named: &Named, choice: &Choice, axis: &Axis) -> Option<Target> {
    let single = named.at.range.is_single();
    let role = match named.name.role {
        Role::Factor => match stream_of(context, named, choice)? {
            Some(stream) => TargetRole::StreamFactor(stream),
            None => TargetRole::Factor,
        },
        Role::Rates => TargetRole::Rates,
        Role::Pv if single => TargetRole::PvTotal(stream_of(context, named, choice)?),
        Role::Pv => TargetRole::PvByYear(stream_of(context, named, choice)?),
        Role::PvCosts => TargetRole::PvCosts,
        Role::PvBenefits => TargetRole::PvBenefits,
        Role::Npv => TargetRole::Npv,
        Role::Ratio => TargetRole::Ratio,
        Role::Annual => TargetRole::Annual,
        Role::Irr => TargetRole::Irr,
        Role::Payback => TargetRole::Payback,
        _ => return None,
    };
    let by_year = matches!(
        role,
        TargetRole::Factor | TargetRole::StreamFactor(_) | TargetRole::Rates | TargetRole::PvByYear(_)
    );
    if by_year {
        if let Some(problem) = wrong_shape(named, axis) {
            context.report(problem);
            return None;
        }
        check_aligned(context, &named.area, &named.from, &axis.at);
    } else if !single {
        let first = SheetRange { sheet: named.at.sheet.clone(), range: one(named.at.range.first) };
        context.report(
            Problem::error(
                "one-cell",
                named.place(),
                format!("covers {} cells, allowed is one", named.at.range.len()),
            )
            .hint(format!("let {} refer to {first}", named.from)),
        );
        return None;
    }
    let cells = context.along(&named.area)?;
    let (held, formats) = cells.iter().map(|(_, cell)| (held(cell), cell.format.clone())).unzip();
    Some(Target { role, from: named.from.clone(), at: named.area.clone(), held, formats })
}

/// The stream that a target is about: none for the net, nothing after a report.
fn stream_of(context: &mut Context, named: &Named, choice: &Choice) -> Option<Option<String>> {
    let Some(wanted) = &named.name.stream else { return Some(None) };
    let found: Vec<_> = choice.streams.iter().filter(|stream| key(&stream.name) == key(wanted)).collect();
    match found.as_slice() {
        [stream] => Some(Some(stream.name.clone())),
        [] => {
            context.report(
                Problem::error(
                    "unknown-stream",
                    named.place(),
                    format!("there is no stream `{wanted}` in the option `{}`", choice.name),
                )
                .hint(format!("its streams are {}", stream_names(choice))),
            );
            None
        }
        [first, second, ..] => {
            let word = |kind| match kind {
                StreamKind::Cost => "cost",
                StreamKind::Benefit => "benefit",
                StreamKind::Flow => "flow",
                StreamKind::Damage => "damage",
            };
            context.report(
                Problem::error(
                    "ambiguous-stream",
                    named.place(),
                    format!("`{wanted}` is both a {} and a {}", word(first.kind), word(second.kind)),
                )
                .hint("give the two streams different names"),
            );
            None
        }
    }
}

fn held(cell: &ReadCell) -> Held {
    if let Some(text) = &cell.formula {
        let (value, shown) = match &cell.value {
            Value::Number(number) | Value::Date(number) => (Some(*number), None),
            Value::Text(text) | Value::Error(text) => (None, Some(text.clone())),
            Value::Bool(truth) => (None, Some(if *truth { "TRUE" } else { "FALSE" }.to_owned())),
            Value::Blank => (None, None),
        };
        return Held::Formula { text: text.clone(), value, shown };
    }
    match &cell.value {
        Value::Blank => Held::Blank,
        Value::Number(number) | Value::Date(number) => Held::Number(*number),
        Value::Text(text) => Held::Text(text.clone()),
        Value::Bool(truth) => Held::Text(if *truth { "TRUE" } else { "FALSE" }.to_owned()),
        Value::Error(error) => Held::Error(error.clone()),
    }
}

/// Checks every target against the others, the inputs and what the sheet allows.
pub(super) fn check(context: &mut Context, choices: &[Choice], axes: &[Axis]) {
    let inputs = inputs(choices, axes);
    let targets: Vec<&Target> = choices.iter().flat_map(|choice| &choice.targets).collect();
    for (i, target) in targets.iter().enumerate() {
        let place = || Place::area(&target.at).called(&target.from);
        if let Some(other) = targets[..i].iter().find(|other| other.at.intersects(&target.at)) {
            context.report(
                Problem::error(
                    "target-overlap",
                    place(),
                    format!("shares cells with {} [{}]", other.at, other.from),
                )
                .hint("give each result its own cells"),
            );
        }
        if let Some((at, from)) = inputs.iter().find(|(at, _)| at.intersects(&target.at)) {
            context.report(
                Problem::error(
                    "target-overlap",
                    place(),
                    format!("would overwrite {at} [{from}], which is read"),
                )
                .hint("let the result go to cells of its own"),
            );
        }
        if let Some(facts) = context.facts(&target.at.sheet) {
            for problem in refusals(target, &facts).into_iter().chain(warnings(target, &facts)) {
                context.report(problem);
            }
        }
    }
}

/// Every range that is read.
fn inputs(choices: &[Choice], axes: &[Axis]) -> Vec<(Area, String)> {
    let mut along: Vec<(Area, String)> =
        axes.iter().map(|axis| (axis.at.clone(), "the years".to_owned())).collect();
    along.extend(
        axes.iter()
            .filter_map(|axis| axis.spans.as_ref())
            .map(|spans| (spans.at.clone(), spans.from.clone())),
    );
    let mut inputs: Vec<(SheetRange, String)> = Vec::new();
    for choice in choices {
        inputs.extend(choice.base.at.iter().map(|at| (at.clone(), choice.base.from.clone())));
        inputs.extend(choice.basis.at.iter().map(|at| (at.clone(), choice.basis.from.clone())));
        inputs.extend(
            choice.timing.iter().filter_map(|timing| Some((timing.at.clone()?, timing.from.clone()))),
        );
        let prices = &choice.prices;
        inputs
            .extend(prices.declared.iter().filter_map(|given| Some((given.at.clone()?, given.from.clone()))));
        inputs.extend(prices.levels.iter().filter_map(|given| Some((given.at.clone()?, given.from.clone()))));
        let welfare = &choice.welfare;
        for given in welfare.elasticity.iter().chain(&welfare.reference) {
            inputs.extend(given.at.iter().map(|at| (at.clone(), given.from.clone())));
        }
        along.extend(welfare.consumption.iter().map(|path| (path.at.clone(), path.from.clone())));
        along.extend(choice.effects.iter().map(|effect| (effect.at.clone(), effect.name.clone())));
        for stream in &choice.streams {
            along.push((stream.at.clone(), stream.from.clone()));
            inputs.extend(
                stream.basis.iter().filter_map(|given| Some((given.at.clone()?, given.from.clone()))),
            );
            inputs.extend(stream.uplift.at.iter().map(|at| (at.clone(), stream.uplift.from.clone())));
            inputs.extend(
                stream.residual.iter().filter_map(|given| Some((given.at.clone()?, given.from.clone()))),
            );
            inputs.extend(
                stream.income.iter().filter_map(|given| Some((given.at.clone()?, given.from.clone()))),
            );
            inputs.extend(
                stream.growth.iter().filter_map(|given| Some((given.at.clone()?, given.from.clone()))),
            );
            inputs
                .extend(stream.tail.iter().filter_map(|given| Some((given.at.clone()?, given.from.clone()))));
        }
    }
    along.extend(inputs.into_iter().map(|(at, from)| (at.into(), from)));
    along
}

/// Cells that cannot be written one by one.
fn refusals(target: &Target, facts: &SheetFacts) -> Vec<Problem> {
    let mut found = Vec::new();
    for cell in target.at.cells() {
        let mut refuse = |code, message: String, hint: &str| {
            let place = Place::cells(&target.at.sheet, one(cell)).called(&target.from);
            found.push(Problem::error(code, place, message).hint(hint));
        };
        if let Some(merged) = facts.merged.iter().find(|merged| merged.contains(cell) && merged.first != cell)
        {
            refuse(
                "target-merged",
                format!("is hidden inside the merged cells {merged}"),
                "unmerge the cells",
            );
        }
        if let Some(array) = facts.array_formulas.iter().find(|array| array.contains(cell)) {
            refuse(
                "target-array",
                format!("is part of the array formula {array}"),
                "replace the array formula by single cells, or name other cells",
            );
        }
        if let Some(table) = facts.data_tables.iter().find(|table| table.contains(cell)) {
            refuse("target-data-table", format!("is part of the what-if table {table}"), "name other cells");
        }
        for table in &facts.tables {
            if let Some(what) = table_edge(table, cell) {
                refuse(
                    "target-table",
                    format!("is in the {what} of the table `{}`", table.name),
                    "name cells of the table's body, or cells beside it",
                );
            }
        }
        if let Some(held) = facts.pivots.iter().chain(&facts.query_tables).find(|range| range.contains(cell))
            && !facts.tables.iter().any(|table| table.range == *held)
        {
            refuse(
                "target-refreshed",
                format!("is filled by a pivot table or query ({held}), which would overwrite it"),
                "name other cells",
            );
        }
    }
    found
}

/// `header row` or `total row` where the cell is in one.
fn table_edge(table: &crate::model::Table, cell: Cell) -> Option<&'static str> {
    if !table.range.contains(cell) {
        return None;
    }
    if cell.row < table.range.first.row + table.header_rows {
        return Some("header row");
    }
    (cell.row + table.totals_rows > table.range.last.row).then_some("total row")
}

/// What a person should know of the cells that are filled.
fn warnings(target: &Target, facts: &SheetFacts) -> Vec<Problem> {
    let mut found = Vec::new();
    let around = target.at.hull().range;
    let mut warn = |code, range: Range, message: String, hint: &str| {
        let place = Place::cells(&target.at.sheet, range).called(&target.from);
        found.push(Problem::warning(code, place, message).hint(hint));
    };
    if facts.protected {
        let hint = "the cells are filled all the same; unprotect the sheet to edit them by hand";
        warn("protected", around, "is on a protected sheet".to_owned(), hint);
    }
    if target.at.cells().any(|cell| facts.row_hidden(cell.row) || facts.column_hidden(cell.col)) {
        let hint = "show the rows or columns to see what is filled";
        warn("hidden", around, "has cells in hidden rows or columns".to_owned(), hint);
    }
    let ruled = |range: &Range| target.at.parts().iter().any(|part| part.intersects(range));
    if let Some(rule) =
        facts.validations.iter().find(|rule| rule.kind != "none" && rule.ranges.iter().any(ruled))
    {
        let hint = "check that the rule allows the results";
        warn("validation", around, format!("has a validation rule ({})", rule.kind), hint);
    }
    for (cell, format) in target.at.cells().zip(&target.formats) {
        if format.as_deref() == Some("@") {
            let hint = "give the cell a number format: a formula typed into it would show as text";
            warn("text-format", one(cell), "is formatted as text".to_owned(), hint);
        }
    }
    found
}
