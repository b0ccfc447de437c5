//! Options put together: base, basis, timing, years, streams and targets of each.

use std::collections::BTreeMap;

use crate::appraisal::{Axis, Choice, Stream, StreamKind};
use crate::clock::base_year;
use crate::decide::Rule;
use crate::problem::{Place, Problem};
use crate::reading::Value;
use crate::references::Area;
use crate::roles::{PREFIX, ROLES, Role, key};

use super::cells::shown;
use super::find::Named;
use super::groups::{Group, Split, names_of};
use super::{Context, Options, counted, prices, settings, spans, streams, targets, texts, welfare, years};

/// The options, and what they share.
pub(super) struct Built {
    pub axes: Vec<Axis>,
    pub choices: Vec<Choice>,
    pub baseline: Option<usize>,
    pub decide: Rule,
}

/// Builds every option; what cannot be built is reported.
pub(super) fn build(context: &mut Context, split: &Split, told: &Options) -> Built {
    let mut built = Built { axes: Vec::new(), choices: Vec::new(), baseline: None, decide: Rule::default() };
    report_missing(context, split, told);
    let mut read: BTreeMap<(Area, Option<Area>), Option<usize>> = BTreeMap::new();
    for group in &split.groups {
        let Some(years) = years_of(context, split, group) else { continue };
        let span = split.of(group, Role::Span);
        let cells = (years.area.clone(), span.map(|span| span.area.clone()));
        let axis = match read.get(&cells) {
            Some(axis) => *axis,
            None => {
                let axis = years::axis(context, years, span).map(|axis| {
                    built.axes.push(axis);
                    built.axes.len() - 1
                });
                read.insert(cells, axis);
                axis
            }
        };
        let Some(index) = axis else { continue };
        let axis = built.axes[index].clone();
        if let Some(choice) = choice(context, split, group, &axis, index, told) {
            built.choices.push(choice);
        }
    }
    if built.choices.len() == split.groups.len() {
        targets::add_shared(context, split, &mut built.choices, &built.axes);
        check_settings(context, split, &built.choices);
        built.baseline = baseline(context, split);
        built.decide = decide(context, split);
        check_flows(context, split, &built.choices);
    }
    for choice in &built.choices {
        spans::check(context, choice, &built.axes[choice.axis]);
    }
    targets::check(context, &built.choices, &built.axes);
    built
}

fn choice(
    context: &mut Context,
    split: &Split,
    group: &Group,
    axis: &Axis,
    index: usize,
    told: &Options,
) -> Option<Choice> {
    let base = years::base(context, split.of(group, Role::Base), told.base, axis);
    let basis = settings::basis(context, split.of(group, Role::Basis), told.basis);
    let timing = split.of(group, Role::Timing).and_then(|named| settings::timing(context, named));
    let mut prices = prices::prices(context, split, group, told.prices, axis);
    let streams = streams::streams(context, split, group, axis);
    let welfare = welfare::welfare(context, split, group, axis, &streams);
    let effects = streams::effects(context, split, group, axis);
    let (base, basis) = (base?, basis?);
    if prices.growth_from.is_none() {
        let own = years::own_base_year(context, split.of(group, Role::Base), axis);
        prices.growth_from = own.or_else(|| base_year(&base.value));
    }
    let mut choice = Choice {
        name: group.name.clone(),
        base,
        basis,
        timing,
        prices,
        welfare,
        axis: index,
        streams,
        effects,
        budget: Vec::new(),
        targets: Vec::new(),
    };
    choice.budget = budget(context, split, group, &choice);
    choice.targets = targets::targets(context, &group.named, &choice, axis);
    counted::check(context, &choice);
    Some(choice)
}

/// The years or offsets of an option; both at once is a question.
fn years_of<'s>(context: &mut Context, split: &'s Split, group: &'s Group) -> Option<&'s Named> {
    let (years, offsets) = (split.of(group, Role::Years), split.of(group, Role::Offsets));
    if let (Some(years), Some(offsets)) = (years, offsets) {
        context.report(
            Problem::error(
                "years-and-offsets",
                offsets.place(),
                format!("offsets are given beside the years {} [{}]", years.at, years.from),
            )
            .hint("keep one of the two"),
        );
        return None;
    }
    years.or(offsets)
}

/// What the workbook does not say at all, in one problem with how to say it.
fn report_missing(context: &mut Context, split: &Split, told: &Options) {
    let lost = context.lost.clone();
    let all = || split.groups.iter().flat_map(|group| &group.named).chain(&split.shared);
    let roles = || all().map(|named| named.name.role).chain(lost.iter().copied());
    let has = |test: &dyn Fn(Role) -> bool| roles().any(test);
    let streams = has(&Role::is_stream);
    let mut lacks = Lacks::default();
    lacks.add(has(&|role| matches!(role, Role::Years | Role::Offsets)), "years", "hence_years");
    lacks.add(streams, "stream of flows", "hence_cost_works");
    lacks.add(has(&|role| role == Role::Basis) || told.basis.is_some(), "basis", "hence_basis");
    lacks.add(has(&Role::is_output), "range to fill", "hence_npv");
    let planned = context.planned;
    if let Some(problem) = lacks.problem(Place::default(), "the workbook", planned) {
        context.report(problem);
        return;
    }
    let among = |role: Role| lost.contains(&role);
    for group in &split.groups {
        let place = || {
            let first = group.named.iter().find(|named| named.stated.is_none());
            first.map_or_else(
                || Place::name(&group.name),
                |named| Place { sheet: Some(named.at.sheet.clone()), ..Place::name(&group.name) },
            )
        };
        let shared_stream = split.shared.iter().any(|named| named.name.role.is_stream());
        let mut lacks = Lacks::default();
        let dated = split.of(group, Role::Years).is_some() || among(Role::Years);
        lacks.add(dated || split.of(group, Role::Offsets).is_some(), "years", "hence_years");
        lacks.add(
            shared_stream
                || lost.iter().any(|role| role.is_stream())
                || group.named.iter().any(|named| named.name.role.is_stream()),
            "stream of flows",
            &format!("hence_cost_works__{}", key(&group.name).replace(' ', "_")),
        );
        let basis = split.of(group, Role::Basis).is_some() || told.basis.is_some();
        lacks.add(basis || among(Role::Basis), "basis", "hence_basis");
        if let Some(problem) = lacks.problem(place(), &format!("the option `{}`", group.name), planned) {
            context.report(problem);
        }
        if let Some(years) = split.of(group, Role::Years)
            && split.of(group, Role::Base).is_none()
            && !among(Role::Base)
            && told.base.is_none()
            && needs_base(context, years)
        {
            context.report(
                Problem::error(
                    "missing-role",
                    place(),
                    format!("the option `{}` has no base year", group.name),
                )
                .hint(if planned {
                    "add the year to which values are discounted to the plan: base = 2026 below [settings], or its cell below \
                     [roles]"
                } else {
                    "enter the year to which values are discounted in a cell, and name it hence_base"
                }),
            );
        }
    }
}

/// Years count from their own zero only where they are year numbers.
fn needs_base(context: &mut Context, years: &Named) -> bool {
    let first =
        context.grid(&years.at).and_then(|grid| grid.iter().next().map(|(_, cell)| cell.value.clone()));
    !matches!(first, Some(Value::Number(n)) if n < 1000.0)
}

/// Roles that are missing, and the names that would say them.
#[derive(Default)]
struct Lacks {
    what: Vec<&'static str>,
    names: Vec<String>,
}

impl Lacks {
    fn add(&mut self, found: bool, what: &'static str, name: &str) {
        if !found {
            self.what.push(what);
            self.names.push(name.to_owned());
        }
    }

    fn problem(self, place: Place, whose: &str, planned: bool) -> Option<Problem> {
        if self.what.is_empty() {
            return None;
        }
        let problem =
            Problem::error("missing-role", place, format!("{whose} has no {}", self.what.join(", no ")));
        let roles = self
            .names
            .iter()
            .map(|name| name.trim_start_matches(PREFIX).split("__").next().unwrap_or_default().to_owned());
        let roles: Vec<String> = roles.collect();
        if planned {
            let roles = roles.join(", ");
            return Some(problem.hint(format!(
                "add {roles} to the plan, with their cells; `hence plan BOOK` proposes a plan"
            )));
        }
        let role = &roles[0];
        Some(problem.hint(format!(
            "select the cells and type {} into the Name Box; or give them with --role, as --role \
                 {role}=Sheet1!C3:L3; `hence start FILE` makes a ready-named workbook",
            self.names.join(", ")
        )))
    }
}

/// The streams that are the constrained cost, by the names they bear in this option.
fn budget(context: &mut Context, split: &Split, group: &Group, choice: &Choice) -> Vec<String> {
    let Some(named) = split.of(group, Role::Budget).cloned() else { return Vec::new() };
    let shared = split.shared.contains(&named);
    let mut streams = Vec::new();
    for (text, cell) in texts::list(context, &named) {
        let is_cost = |stream: &&Stream| stream.kind == StreamKind::Cost && key(&stream.name) == key(&text);
        match choice.streams.iter().find(is_cost) {
            Some(stream) if !streams.contains(&stream.name) => streams.push(stream.name.clone()),
            Some(_) => {}
            // A list for all options may name streams that only some of them have.
            None if shared && has_cost(split, &text) => {}
            None => context.report(
                Problem::error(
                    "unknown-stream",
                    named.cell(cell),
                    format!("`{text}` is no cost of the option `{}`", choice.name),
                )
                .hint(format!("its costs are {}", names_of_kind(choice, |kind| kind == StreamKind::Cost))),
            ),
        }
    }
    streams
}

fn has_cost(split: &Split, text: &str) -> bool {
    split.groups.iter().flat_map(|group| &group.named).chain(&split.shared).any(|named| {
        named.name.role == Role::Cost && named.name.stream.as_deref().map(key) == Some(key(text))
    })
}

/// Where every flow of every option is blank, nothing has been entered yet.
fn check_flows(context: &mut Context, split: &Split, choices: &[Choice]) {
    let streams = || choices.iter().flat_map(|choice| &choice.streams);
    let entered = streams().any(|stream| {
        stream.residual.is_some()
            || context.along(&stream.at).is_some_and(|cells| {
                cells.iter().any(|(_, cell)| cell.value != Value::Blank || cell.formula.is_some())
            })
    });
    if entered || context.failed() {
        return;
    }
    let mut all = split.groups.iter().flat_map(|group| &group.named).chain(&split.shared);
    let place = all.find(|named| named.name.role.is_stream()).map_or_else(Place::default, Named::place);
    context.report(
        Problem::error(
            "no-flows",
            place,
            "every cell of every stream is blank: there is nothing to value yet",
        )
        .hint("enter the flows, one amount a year, and save the workbook"),
    );
}

/// The names of an option's streams in one phrase.
pub(super) fn stream_names(choice: &Choice) -> String {
    names_of_kind(choice, |_| true)
}

fn names_of_kind(choice: &Choice, wanted: fn(StreamKind) -> bool) -> String {
    let streams = choice.streams.iter().filter(|stream| wanted(stream.kind));
    let names: Vec<&str> = streams.map(|stream| stream.name.as_str()).collect();
    if names.is_empty() { "none".to_owned() } else { names.join(", ") }
}

/// Units, uplifts and the like of streams that there are none of.
fn check_settings(context: &mut Context, split: &Split, choices: &[Choice]) {
    let setting = |named: &&Named| {
        let about = matches!(
            named.name.role,
            Role::Unit
                | Role::Uplift
                | Role::Residual
                | Role::Tail
                | Role::Growth
                | Role::Basis
                | Role::Income
        );
        about && named.name.stream.is_some()
    };
    let own =
        split.groups.iter().zip(choices).map(|(group, choice)| (&group.named, std::slice::from_ref(choice)));
    let all: Vec<_> = own.chain(std::iter::once((&split.shared, choices))).collect();
    for (named, choices) in all {
        for named in named.iter().filter(setting) {
            let stream = named.name.stream.as_deref().unwrap_or_default();
            let known =
                choices.iter().flat_map(|choice| &choice.streams).any(|s| key(&s.name) == key(stream));
            let path = choices.iter().any(|choice| choice.welfare.consumption.is_some());
            let known = known
                || (named.name.role == Role::Income && key(stream) == welfare::REFERENCE)
                || (named.name.role == Role::Unit && key(stream) == Role::Consumption.word() && path);
            if !known {
                context.report(
                    Problem::error("unknown-stream", named.place(), format!("there is no stream `{stream}`"))
                        .hint(format!(
                            "the streams are {}",
                            choices.first().map(stream_names).unwrap_or_default()
                        )),
                );
            }
        }
    }
    let common: Vec<&String> = split.common.iter().collect();
    for stream in common {
        let blocks = ROLES.iter().any(|info| info.role.is_stream() && key(info.word) == *stream);
        let found =
            split.shared.iter().any(|named| named.name.stream.as_deref().map(key).as_ref() == Some(stream));
        if !found && !blocks {
            let named = split.shared.iter().find(|named| named.name.role == Role::Shared);
            let place = named.map_or_else(Place::default, Named::place);
            context.report(
                Problem::error("unknown-stream", place, format!("`{stream}` is no stream without an option"))
                    .hint("list only streams that are named without an option"),
            );
        }
    }
}

/// A setting for all options, wherever it is named.
fn for_all(split: &Split, role: Role) -> Option<&Named> {
    let own = split.groups.iter().flat_map(|group| &group.named);
    split.shared.iter().chain(own).find(|named| named.name.role == role)
}

/// What ranks the options.
fn decide(context: &mut Context, split: &Split) -> Rule {
    let Some(named) = for_all(split, Role::Decide) else { return Rule::default() };
    let Some(text) = texts::text(context, named) else { return Rule::default() };
    Rule::parse(&text).unwrap_or_else(|| {
        context.report(
            Problem::error(
                "decide",
                named.place(),
                format!("`{}` is no rule that ranks options", shown(&text)),
            )
            .hint("write `npv`, `ratio` or `least cost`"),
        );
        Rule::default()
    })
}

/// The option that the others are compared with.
fn baseline(context: &mut Context, split: &Split) -> Option<usize> {
    let named = for_all(split, Role::Baseline)?;
    let text = texts::text(context, named)?;
    let found = split.groups.iter().position(|group| key(&group.name) == key(&text));
    if found.is_none() {
        context.report(
            Problem::error(
                "unknown-option",
                named.place(),
                format!("`{text}` is no option of this workbook"),
            )
            .hint(format!("the options are {}", names_of(&split.groups))),
        );
    }
    found
}
