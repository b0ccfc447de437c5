//! Streams of flows and physical effects, with what is said of each.

use std::collections::BTreeMap;

use crate::appraisal::{Axis, Direction, Effect, Given, Stream, StreamKind};
use crate::problem::Problem;
use crate::references::{Area, Range, SheetRange};
use crate::roles::{Role, key};

use super::cells::numbers;
use super::counted::{check_aligned, place};
use super::find::Named;
use super::groups::{Group, Split};
use super::settings::{self, Signs};
use super::years::direction;
use super::{Context, blocks, note, prices, welfare};

/// The streams of an option, its own first, then the shared ones.
pub(super) fn streams(context: &mut Context, split: &Split, group: &Group, axis: &Axis) -> Vec<Stream> {
    let signs =
        split.of(group, Role::Signs).and_then(|named| settings::signs(context, named)).unwrap_or_default();
    let mut streams = Vec::new();
    for named in own_and_common(split, group, Role::is_stream) {
        match named.name.role {
            Role::Costs | Role::Benefits => streams.extend(blocks::streams(context, named, axis)),
            role => {
                let kind = match role {
                    Role::Cost => StreamKind::Cost,
                    Role::Benefit => StreamKind::Benefit,
                    Role::Damage => StreamKind::Damage,
                    _ => StreamKind::Flow,
                };
                let Some(raw) = row(context, named, axis) else { continue };
                streams.push(Stream {
                    name: named.name.stream.clone().unwrap_or_default(),
                    kind,
                    from: named.from.clone(),
                    at: named.area.clone(),
                    raw,
                    sign: 1.0,
                    unit: 1.0,
                    uplift: Given { value: 0.0, at: None, from: "default".to_owned() },
                    residual: None,
                    tail: None,
                    growth: None,
                    basis: None,
                    income: None,
                });
            }
        }
    }
    for stream in &mut streams {
        stream.sign = signs.of(stream.kind);
        check_sign(context, stream, signs);
        add_settings(context, split, group, stream);
    }
    check_names(context, &streams);
    streams
}

/// The physical effects of an option.
pub(super) fn effects(context: &mut Context, split: &Split, group: &Group, axis: &Axis) -> Vec<Effect> {
    let mut effects = Vec::new();
    for named in own_and_common(split, group, |role| role == Role::Effect) {
        if let Some(raw) = row(context, named, axis) {
            let name = named.name.stream.clone().unwrap_or_default();
            effects.push(Effect { name, at: named.area.clone(), raw });
        }
    }
    effects
}

fn own_and_common<'s>(split: &'s Split, group: &'s Group, test: fn(Role) -> bool) -> Vec<&'s Named> {
    let common = split.shared.iter().filter(|named| {
        split.common.contains(&key(named.name.stream.as_deref().unwrap_or(named.name.role.word())))
    });
    group.named.iter().chain(common).filter(|named| test(named.name.role)).collect()
}

/// The numbers of one row, as long as the years and in their direction.
fn row(context: &mut Context, named: &Named, axis: &Axis) -> Option<Vec<f64>> {
    if let Some(problem) = wrong_shape(named, axis) {
        context.report(problem);
        return None;
    }
    check_merged(context, named);
    check_aligned(context, &named.area, &named.from, &axis.at);
    let read = numbers(context, named)?;
    if read.blanks.len() == read.values.len() {
        context.report(
            Problem::warning("stream-blank", named.place(), "is blank in every year and counts as 0")
                .hint("enter the flows, or check what the name refers to"),
        );
    } else if !read.blanks.is_empty() {
        let verbs = if read.blanks.len() == 1 { ("is", "counts") } else { ("are", "count") };
        let message = format!(
            "{} of {} cells {} blank and {} as 0",
            read.blanks.len(),
            read.values.len(),
            verbs.0,
            verbs.1
        );
        context.report(note("blank-zero", named.place(), message));
    }
    Some(read.values)
}

/// Why a range is not as long as the years and in their direction, with the range that would be.
pub(super) fn wrong_shape(named: &Named, axis: &Axis) -> Option<Problem> {
    let years = axis.labels.len() as u64;
    if direction(&named.at) == Some(axis.direction) && named.area.len() == years {
        return None;
    }
    let found = match direction(&named.at) {
        Some(Direction::Across) => format!("{} cells across", named.area.len()),
        Some(Direction::Down) => format!("{} cells down", named.area.len()),
        None => format!("{} rows and {} columns", named.at.range.rows(), named.at.range.cols()),
    };
    let way = match axis.direction {
        Direction::Across => "across",
        Direction::Down => "down",
    };
    Some(
        Problem::error(
            "shape",
            named.place(),
            format!("has {found}, allowed are {years} {way}, as the years {}", axis.at),
        )
        .hint(format!("let {} refer to {}", named.from, beside_years(&named.at, axis))),
    )
}

/// The row (or column) of a range, in the columns (or rows) of the years.
fn beside_years(at: &SheetRange, axis: &Axis) -> Area {
    let beside = |mut piece: Range| {
        match axis.direction {
            Direction::Across => (piece.first.row, piece.last.row) = (at.range.first.row, at.range.first.row),
            Direction::Down => (piece.first.col, piece.last.col) = (at.range.first.col, at.range.first.col),
        }
        SheetRange { sheet: at.sheet.clone(), range: piece }
    };
    let pieces: Vec<SheetRange> = axis.at.parts().iter().map(|piece| beside(*piece)).collect();
    Area::join(&pieces).unwrap_or_else(|_| axis.at.clone())
}

/// Only the first cell of a merged area holds anything; the others would count as 0 unnoticed.
fn check_merged(context: &mut Context, named: &Named) {
    let Some(facts) = context.facts(&named.at.sheet) else { return };
    let touches = |merged: &Range| named.area.parts().iter().any(|part| part.intersects(merged));
    for merged in facts.merged.iter().filter(|merged| touches(merged)) {
        context.report(
            Problem::error(
                "merged",
                place(&named.at, merged.first, &named.from),
                format!("is part of the merged cells {merged}, of which only the first holds a flow"),
            )
            .hint("unmerge the cells and enter one flow a year"),
        );
    }
}

fn add_settings(context: &mut Context, split: &Split, group: &Group, stream: &mut Stream) {
    let about = |role| split.about(group, role, &stream.name);
    if let Some(unit) = about(Role::Unit).and_then(|named| settings::unit(context, named)) {
        stream.unit = unit;
    }
    if let Some(uplift) = settings::uplift(context, about(Role::Uplift)) {
        stream.uplift = uplift;
    }
    let residual = about(Role::Residual);
    stream.residual = residual.and_then(|named| settings::residual(context, named));
    if let (Some(named), Some(given)) = (residual, &stream.residual)
        && given.value < 0.0
    {
        let effect = if stream.kind == StreamKind::Cost { "raises" } else { "lowers" };
        context.report(
            Problem::warning(
                "residual-sign",
                named.place(),
                format!("is negative, so it {effect} the last year of `{}`", stream.name),
            )
            .hint("enter a value that is left over as a positive number, whatever the signs of the stream"),
        );
    }
    stream.tail = about(Role::Tail).and_then(|named| settings::tail(context, named));
    stream.income = about(Role::Income).and_then(|named| welfare::income(context, named));
    stream.basis = about(Role::Basis).and_then(|named| settings::basis(context, Some(named), None));
    stream.growth = about(Role::Growth).and_then(|named| prices::growth(context, named));
}

/// A cost stream wholly negative with nothing declared is a question, not a benefit.
fn check_sign(context: &mut Context, stream: &Stream, signs: Signs) {
    let has = |sign: f64| stream.raw.iter().any(|flow| flow * sign > 0.0);
    let place = || crate::problem::Place::area(&stream.at).called(&stream.from);
    let wholly_negative = has(-1.0) && !has(1.0);
    match stream.kind {
        StreamKind::Cost if wholly_negative && !signs.declared => context.report(
            Problem::error(
                "cost-sign",
                place(),
                "is negative in every year, and costs are positive unless said otherwise",
            )
            .hint("if costs are entered negative, write `costs negative` in a cell named hence_signs"),
        ),
        StreamKind::Cost if signs.costs && has(1.0) && !has(-1.0) => context.report(
            Problem::warning(
                "cost-sign",
                place(),
                "is positive in every year, and hence_signs says costs are negative",
            )
            .hint("check the sign of this stream"),
        ),
        StreamKind::Cost if has(1.0) && has(-1.0) && stream.raw.iter().sum::<f64>() * stream.sign < 0.0 => {
            context.report(
                Problem::warning(
                    "cost-sign",
                    place(),
                    "holds flows of both signs and adds up to less than nothing",
                )
                .hint("check its signs: a cost below zero counts for the option"),
            );
        }
        StreamKind::Benefit if wholly_negative => context.report(
            Problem::warning("benefit-sign", place(), "is negative in every year, and benefits are positive")
                .hint("check the sign, or name it hence_cost_ or hence_flow_"),
        ),
        _ => {}
    }
}

/// Two streams of one kind with one name could not be told apart.
fn check_names(context: &mut Context, streams: &[Stream]) {
    let mut seen: BTreeMap<(String, String), &Stream> = BTreeMap::new();
    for stream in streams {
        let id = (format!("{:?}", stream.kind), key(&stream.name));
        if let Some(twin) = seen.insert(id, stream) {
            context.report(
                Problem::error(
                    "duplicate-stream",
                    place(&stream.at.hull(), stream.at.nth(0), &stream.from),
                    format!("the stream `{}` is also {} [{}]", stream.name, twin.at, twin.from),
                )
                .hint("give each stream its own name"),
            );
        }
    }
}
