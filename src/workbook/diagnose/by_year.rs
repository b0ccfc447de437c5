//! Net present values by year that are typed: a stream counted twice, left out, or with the other sign in every year.

use super::structure::Look;
use crate::appraisal::{Held, StreamKind, Target, TargetRole};
use crate::findings::{Finding, Kind};
use crate::problem::Place;
use crate::tolerance;

/// Rows of net present values whose numbers are those with one stream counted otherwise than once.
pub(super) fn findings(look: &Look) -> Vec<Finding> {
    let mut found = Vec::new();
    for (c, choice) in look.seen.appraisal.choices.iter().enumerate() {
        let net = |target: &&Target| target.role == TargetRole::PvByYear(None);
        found.extend(choice.targets.iter().filter(net).filter_map(|target| finding(look, c, target)));
    }
    found
}

fn finding(look: &Look, c: usize, target: &Target) -> Option<Finding> {
    let choice = &look.seen.appraisal.choices[c];
    let outcome = &look.seen.outcomes[c];
    // Formulas tell more than their results.
    let held: Vec<f64> = target
        .held
        .iter()
        .map(|held| if let Held::Number(x) = held { Some(*x) } else { None })
        .collect::<Option<_>>()?;
    let row = choice.targets.iter().find(|other| other.role == TargetRole::Factor);
    let own: Option<Vec<f64>> = row.and_then(|row| row.held.iter().map(Held::number).collect());
    let factors: Vec<Vec<f64>> = std::iter::once(outcome.factors.clone()).chain(own).collect();
    if outcome.streams.iter().any(|stream| stream.own.is_some()) {
        return None;
    }
    // The net of each year with so much more of one stream.
    let fits = |factors: &[f64], extra: Option<(usize, f64)>| {
        held.iter().enumerate().all(|(i, held)| {
            let more = extra.map_or(0.0, |(s, times)| {
                times * crate::formulas::side(choice.streams[s].kind) * outcome.streams[s].flows[i]
            });
            let value = (outcome.net[i] + more) * factors[i];
            (held - value).abs() <= tolerance::of_cell(target, i, value).max(1e-9 * value.abs())
        })
    };
    if factors.iter().any(|factors| fits(factors, None)) {
        return None;
    }
    let streams = (0..choice.streams.len()).filter(|s| outcome.streams[*s].pv != 0.0);
    let readings = streams.flat_map(|s| {
        let cost = choice.streams[s].kind == StreamKind::Cost;
        let turned = (cost && choice.streams.len() > 1).then_some((
            s,
            -2.0,
            Kind::NegativeCost,
            "counted with the other sign",
        ));
        let left = (choice.streams.len() > 1).then_some((s, -1.0, Kind::ShortTotal, "left out"));
        [Some((s, 1.0, Kind::DoubleCount, "counted twice")), left, turned].into_iter().flatten()
    });
    let (s, times, kind, how) =
        readings.into_iter().find(|(s, times, ..)| factors.iter().any(|f| fits(f, Some((*s, *times)))))?;
    let name = &choice.streams[s].name;
    let mut added = vec![0.0; look.seen.appraisal.choices.len()];
    added[c] = times * crate::formulas::side(choice.streams[s].kind) * outcome.streams[s].pv;
    let effect = look.in_results(&added);
    Some(Finding {
        kind,
        place: Place::area(&target.at).called(&target.from),
        found: format!("net present values with {name} {how}"),
        expected: format!("{name} counted once"),
        effect_on_npv: effect.npv,
        ranking: effect.ranking,
        confidence: 0.9,
        words: format!("In every year the number is what the net present value would be with {name} {how}."),
    })
}
