//! Costs entered with the other sign than the rest of the costs.

use std::collections::HashMap;

use super::lines::line_of;
use super::structure::{Look, figure};
use crate::appraisal::{Stream, StreamKind};
use crate::findings::{Finding, Kind};
use crate::problem::Place;
use crate::references::{Cell, Range};

/// How far a flow may be from the usual size of its row before it is taken for something else, such as a credit.
const USUAL: f64 = 3.0;
/// How close it has to be to a cost beside it to be that cost with the other sign.
const ALIKE: f64 = 0.1;

/// How far two credits of one size may be from each other.
const ONE_SIZE: f64 = 0.02;

/// Costs whose sign is not that of their row, or of the costs as the workbook declares them.
pub(super) fn findings(look: &Look) -> Vec<Finding> {
    let mut found: Vec<Finding> = Vec::new();
    for (c, choice) in look.seen.appraisal.choices.iter().enumerate() {
        for (s, stream) in choice.streams.iter().enumerate() {
            if stream.kind != StreamKind::Cost {
                continue;
            }
            let new = if turned(stream, 1.0).is_empty() && stream.sign < 0.0 {
                whole(look, c, s)
            } else {
                single(look, c, s)
            };
            found.extend(new.filter(|new| found.iter().all(|other| other.place != new.place)));
        }
    }
    found
}

/// The years whose flow counts for the option, times `side` 1, or against it, times -1.
fn turned(stream: &Stream, side: f64) -> Vec<usize> {
    (0..stream.raw.len()).filter(|i| stream.raw[*i] * stream.sign * side > 0.0).collect()
}

/// A stream of positive numbers where costs are declared to be entered negative.
fn whole(look: &Look, c: usize, s: usize) -> Option<Finding> {
    let stream = &look.seen.appraisal.choices[c].streams[s];
    if turned(stream, -1.0).is_empty() {
        return None;
    }
    let mut added = vec![0.0; look.seen.appraisal.choices.len()];
    added[c] = (0..stream.raw.len()).map(|i| 2.0 * stream.raw[i] * look.worth(c, s, i)).sum();
    let effect = look.in_flows(&added);
    Some(Finding {
        kind: Kind::NegativeCost,
        place: Place::area(&stream.at).called(&stream.from),
        found: "positive in every year".to_owned(),
        expected: "negative, as hence_signs says of costs".to_owned(),
        effect_on_npv: effect.npv,
        ranking: effect.ranking,
        confidence: 0.9,
        words: "The workbook declares that costs are entered negative, and this cost is positive: it counts for the option."
            .to_owned(),
    })
}

/// Single costs of the other sign than the rest of their row, of a size that is usual in it.
fn single(look: &Look, c: usize, s: usize) -> Option<Finding> {
    let stream = &look.seen.appraisal.choices[c].streams[s];
    let (against, odd) = (turned(stream, 1.0), turned(stream, -1.0));
    let line = line_of(&stream.at.hull(), &look.cells)?;
    let cells: Vec<_> = line.each().collect();
    // What one formula gives along the row may well pass through zero.
    let shape = |i: usize| look.cells.get(cells[i]).and_then(|content| content.shape.as_deref());
    let mut counts: HashMap<&str, usize> = HashMap::new();
    (0..cells.len()).filter_map(shape).for_each(|shape| *counts.entry(shape).or_insert(0) += 1);
    let odd: Vec<usize> =
        odd.into_iter().filter(|i| shape(*i).is_none_or(|shape| counts[shape] * 3 < cells.len())).collect();
    if odd.is_empty() || odd.len() * 2 > against.len() {
        return None;
    }
    let mut sizes: Vec<f64> = against.iter().map(|i| stream.raw[*i].abs()).collect();
    sizes.sort_by(f64::total_cmp);
    let usual = sizes[sizes.len() / 2];
    let size = |i: usize| stream.raw[i].abs();
    // In the last year a credit may be what is left over.
    let (low, high) = (sizes[0] / 2.0, sizes[sizes.len() - 1] * 2.0);
    let ordinary = |i: &usize| {
        let in_row = (low..=high).contains(&size(*i)) && *i + 1 < stream.raw.len();
        in_row || (usual / USUAL..=usual * USUAL).contains(&size(*i))
    };
    let odd: Vec<usize> = odd.into_iter().filter(ordinary).collect();
    if are_credits(stream, &against, &odd) {
        return None;
    }
    let (first, last) = (*odd.first()?, *odd.last()?);
    let near = |i: usize| {
        let beside = against.iter().min_by_key(|j| j.abs_diff(i)).map_or(0.0, |j| size(*j));
        (size(i) - beside).abs() <= ALIKE * beside || (size(i) - usual).abs() <= ALIKE * usual
    };
    let confidence = if odd.iter().all(|i| near(*i)) { 0.8 } else { 0.55 };
    let mut added = vec![0.0; look.seen.appraisal.choices.len()];
    added[c] = odd.iter().map(|i| 2.0 * stream.raw[*i] * look.worth(c, s, *i)).sum();
    let effect = look.in_flows(&added);
    let range = Range::new(at(&line.range, first), at(&line.range, last));
    let sign = if stream.sign > 0.0 { ("negative", "positive") } else { ("positive", "negative") };
    let held: Vec<String> = odd.iter().map(|i| figure(stream.raw[*i])).collect();
    Some(Finding {
        kind: Kind::NegativeCost,
        place: Place::cells(&stream.at.sheet, range).called(&stream.from),
        found: held.join(", "),
        expected: format!("{}, as the rest of the row", sign.1),
        effect_on_npv: effect.npv,
        ranking: effect.ranking,
        confidence,
        words: format!(
            "{} of the costs of `{}` are {} and of a size that is usual in the row ({}), as a cost with a slip of its sign \
             is; a credit would be as well, so look at what it stands for.",
            odd.len(),
            stream.name,
            sign.0,
            figure(usual)
        ),
    })
}

/// Whether several odd costs of one size come at even distances of more than a year, or are each smaller than the costs
/// before and after: what is sold or paid back now and then, and no slip.
fn are_credits(stream: &Stream, against: &[usize], odd: &[usize]) -> bool {
    let size = |i: usize| stream.raw[i].abs();
    let alike = odd.windows(2).all(|pair| (size(pair[0]) / size(pair[1]) - 1.0).abs() <= ONE_SIZE);
    let apart: Vec<usize> = odd.windows(2).map(|pair| pair[1] - pair[0]).collect();
    let even = apart.len() > 1 && apart[0] > 1 && apart.iter().all(|years| *years == apart[0]);
    let smaller = |i: &usize| {
        let before = against.iter().rfind(|j| *j < i);
        let after = against.iter().find(|j| *j > i);
        before.into_iter().chain(after).all(|j| size(*i) < size(*j) * (1.0 - ONE_SIZE))
    };
    odd.len() > 1 && alike && (even || odd.iter().all(smaller))
}

fn at(range: &Range, i: usize) -> Cell {
    crate::formulas::nth(*range, i)
}
