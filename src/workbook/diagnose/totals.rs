//! Totals by formulas: what each flow counts in them against what it should count.

use std::collections::HashMap;

use super::calc::Slopes;
use super::expr::At;
use super::structure::{Look, figure};
use crate::appraisal::{Choice, Held, Stream, StreamKind, Target, TargetRole};
use crate::clock::label_words;
use crate::findings::{Finding, Kind};
use crate::problem::Place;
use crate::references::{Cell, Range, SheetRange};

/// How close to a whole multiple a flow counts.
const CLOSE: f64 = 1e-6;

/// What is wrong with how a stream counts in a total.
#[derive(Clone, Copy, Debug, PartialEq)]
enum Slip {
    /// It does not count at all.
    Absent,
    /// It counts in no year from this one on.
    Ends(usize),
    /// It counts in no year before this one.
    Begins(usize),
    /// It counts so many times.
    Times(f64),
    /// It counts a thousand or a million times too much or too little.
    Scaled(f64),
    /// It counts with the other sign.
    Turned,
}

/// A stream of an option with what is wrong with it in a total, and the cell where that comes about.
struct Suspect {
    choice: usize,
    stream: usize,
    slip: Slip,
    years: Vec<usize>,
    root: At,
    target: At,
    role: TargetRole,
}

/// Totals that leave out years or rows, count a stream twice, or count it in another unit or with the other sign.
///
/// A flow counts in a total by the slope of the total on its cell. That is compared with sign x unit x factor of the flow,
/// the factors being those of the basis or the workbook's own, whichever fit, so that wrong factors are no finding here.
pub(super) fn findings(look: &Look) -> Vec<Finding> {
    let mut suspects: Vec<Suspect> = Vec::new();
    for (c, choice) in look.seen.appraisal.choices.iter().enumerate() {
        // Totals of parts come before the totals that are made of them.
        let mut targets: Vec<&Target> = choice.targets.iter().filter(|t| rank(&t.role).is_some()).collect();
        targets.sort_by_key(|target| rank(&target.role));
        for target in targets.into_iter().filter(|t| matches!(t.held[0], Held::Formula { .. })) {
            let Some(&at) = look.cells.each(&target.at).first() else { continue };
            let slopes = slopes(look, choice, at);
            for suspect in suspected(look, c, choice, target, at, &slopes) {
                // A total that rests on another repeats what is wrong with that.
                let known = suspects.iter().any(|other| {
                    (other.choice, other.stream, other.slip) == (suspect.choice, suspect.stream, suspect.slip)
                        && (other.root == suspect.root || slopes.reaches(other.target))
                });
                if !known {
                    suspects.push(suspect);
                }
            }
        }
    }
    told(look, suspects)
}

fn rank(role: &TargetRole) -> Option<u8> {
    match role {
        TargetRole::PvTotal(Some(_)) => Some(0),
        TargetRole::PvCosts | TargetRole::PvBenefits => Some(1),
        TargetRole::PvTotal(None) | TargetRole::Npv => Some(2),
        _ => None,
    }
}

/// +1, -1 or 0: how a stream counts in a total.
fn side(role: &TargetRole, stream: &Stream) -> f64 {
    let (above, below) = match stream.kind {
        StreamKind::Cost => (0.0, 1.0),
        StreamKind::Benefit | StreamKind::Flow => (1.0, 0.0),
        StreamKind::Damage => (-1.0, 0.0),
    };
    match role {
        TargetRole::PvTotal(Some(name)) if *name == stream.name => 1.0,
        TargetRole::PvCosts => below,
        TargetRole::PvBenefits => above,
        TargetRole::PvTotal(None) | TargetRole::Npv => above - below,
        _ => 0.0,
    }
}

/// How often each flow of a stream counts in a total: years with a flow, and the multiple; none where it is not known.
fn multiples(
    look: &Look,
    c: usize,
    s: usize,
    role: &TargetRole,
    slopes: &Slopes,
) -> Option<Vec<(usize, f64)>> {
    let choice = &look.seen.appraisal.choices[c];
    let stream = &choice.streams[s];
    let sign = side(role, stream) / crate::formulas::side(stream.kind);
    let own = own_factors(choice);
    let cells = look.cells.each(&stream.at);
    let mut found = Vec::new();
    for (i, cell) in cells.iter().enumerate().filter(|(i, _)| stream.raw[*i] != 0.0) {
        let slope = slopes.at(*cell);
        let worth = look.worth(c, s, i) * sign;
        if !slope.is_finite() || worth == 0.0 {
            return None;
        }
        let factor = look.seen.outcomes[c].factors_of(s)[i];
        let by_own = own.as_ref().and_then(|own| own[i]).map(|own| slope / (worth * own / factor));
        // Of the two readings the simpler one: a flow that counts once, or a whole number of times.
        let simple = |x: &f64| (x - x.round()).abs() <= CLOSE;
        let multiple = by_own.filter(|x| x.is_finite() && simple(x)).unwrap_or(slope / worth);
        found.push((i, multiple));
    }
    Some(found)
}

/// The factors that the workbook itself holds, year by year.
fn own_factors(choice: &Choice) -> Option<Vec<Option<f64>>> {
    let target = choice.targets.iter().find(|target| target.role == TargetRole::Factor)?;
    Some(target.held.iter().map(Held::number).collect())
}

/// How a total moves with each flow by its own cell, whatever other flows are worked out from it.
fn slopes(look: &Look, choice: &Choice, at: At) -> Slopes {
    let flows = choice.streams.iter().flat_map(|stream| look.cells.each(&stream.at)).collect();
    Slopes::of(at, &look.cells, &flows)
}

fn suspected(
    look: &Look,
    c: usize,
    choice: &Choice,
    target: &Target,
    at: At,
    slopes: &Slopes,
) -> Vec<Suspect> {
    if slopes.unsettled {
        return Vec::new();
    }
    let counted: Vec<(usize, Vec<(usize, f64)>)> = (0..choice.streams.len())
        .filter(|s| side(&target.role, &choice.streams[*s]) != 0.0)
        .filter_map(|s| Some((s, multiples(look, c, s, &target.role, slopes)?)))
        .filter(|(_, years)| !years.is_empty())
        .collect();
    // A total over typed numbers, or one that a person typed: its formulas say nothing of the flows.
    if counted.iter().all(|(_, years)| years.iter().all(|(_, m)| *m == 0.0)) {
        return Vec::new();
    }
    let mut found = Vec::new();
    for (s, years) in &counted {
        // Where factors are off, the stream that counts most nearly once shows by how much.
        let usual = |i: usize| -> f64 {
            let at_year = counted.iter().filter_map(|(_, ys)| ys.iter().find(|(y, m)| *y == i && *m > 0.0));
            let nearest = at_year.map(|(_, m)| *m).min_by(|a, b| a.ln().abs().total_cmp(&b.ln().abs()));
            nearest.filter(|m| (0.5..1.6).contains(m)).unwrap_or(1.0)
        };
        let relative: Vec<(usize, f64)> = years.iter().map(|(i, m)| (*i, m / usual(*i))).collect();
        let Some((slip, wrong)) = slip(&relative) else { continue };
        let cells = look.cells.each(&choice.streams[*s].at);
        let root = match slip {
            Slip::Ends(_) | Slip::Begins(_) => {
                let counted = relative.iter().filter(|(_, m)| *m != 0.0).map(|(i, _)| *i);
                let near = counted.min_by_key(|i| i.abs_diff(wrong[0]));
                near.map(|i| left_out(look, slopes, cells[i], cells[wrong[0]]))
            }
            Slip::Absent => {
                let peers = counted.iter().filter(|(p, ys)| p != s && ys.iter().any(|(_, m)| *m != 0.0));
                let same = |p: usize| choice.streams[p].kind == choice.streams[*s].kind;
                let peer = peers.clone().find(|(p, _)| same(*p)).or_else(|| peers.clone().next());
                peer.and_then(|(p, ys)| {
                    let (i, _) = ys.iter().find(|(_, m)| *m != 0.0)?;
                    let theirs = look.cells.each(&choice.streams[*p].at)[*i];
                    Some(left_out(look, slopes, theirs, cells[*i]))
                })
            }
            Slip::Times(_) => doubled(look, slopes, cells[wrong[0]]),
            Slip::Scaled(_) | Slip::Turned => None,
        };
        let root = root.unwrap_or(at);
        // A typed number in a row of formulas cuts a flow off, too; that is told as such.
        if look.cells.get(root).is_some_and(|content| content.typed().is_some()) {
            continue;
        }
        found.push(Suspect {
            choice: c,
            stream: *s,
            slip,
            years: wrong,
            root,
            target: at,
            role: target.role.clone(),
        });
    }
    found
}

/// What is wrong with the multiples of a stream, and in which years; none where every flow counts once, or nothing that is
/// known here fits.
fn slip(years: &[(usize, f64)]) -> Option<(Slip, Vec<usize>)> {
    let those = |wanted: &dyn Fn(f64) -> bool| -> Vec<usize> {
        years.iter().filter(|(_, m)| wanted(*m)).map(|(i, _)| *i).collect()
    };
    let is = |value: f64| move |m: f64| (m / value - 1.0).abs() <= CLOSE;
    let all = |wanted: &dyn Fn(f64) -> bool| years.iter().all(|(_, m)| wanted(*m));
    let indices: Vec<usize> = years.iter().map(|(i, _)| *i).collect();
    let zero = those(&|m| m == 0.0);
    if zero.len() == years.len() {
        return Some((Slip::Absent, indices));
    }
    if !zero.is_empty() {
        let gone = zero.len();
        let (first, last) = (&indices[..gone], &indices[indices.len() - gone..]);
        let slip = if zero == last {
            Slip::Ends(zero[0])
        } else if zero == first {
            Slip::Begins(indices[gone])
        } else {
            return None;
        };
        // A year that counts for next to nothing tells nothing.
        return Some((slip, zero));
    }
    for times in [2.0, 3.0] {
        let twice = those(&is(times));
        let others = years.iter().filter(|(i, _)| !twice.contains(i));
        if !twice.is_empty() && others.clone().all(|(_, m)| is(1.0)(*m)) {
            return Some((Slip::Times(times), twice));
        }
    }
    for scale in [1e-6, 1e-3, 1e3, 1e6] {
        if all(&is(scale)) {
            return Some((Slip::Scaled(scale), indices));
        }
    }
    all(&is(-1.0)).then_some((Slip::Turned, indices))
}

/// The cell moved as far as `to` is from `from`.
fn beside((sheet, cell): At, from: At, to: At) -> Option<At> {
    let step =
        |at: u32, from: u32, to: u32| u32::try_from(i64::from(at) + i64::from(to) - i64::from(from)).ok();
    (from.0 == to.0).then_some(())?;
    let row = step(cell.row, from.1.row, to.1.row)?;
    let col = step(cell.col, from.1.col, to.1.col)?;
    Some((sheet, Cell::new(row, col)))
}

/// The formula in which one flow counts and the other does not, though the formulas beside it are alike.
fn left_out(look: &Look, slopes: &Slopes, counted: At, missing: At) -> At {
    let (mut counted, mut missing) = (counted, missing);
    'up: for _ in 0..slopes.order.len() {
        for &formula in slopes.order.iter().filter(|at| slopes.at(**at) != 0.0) {
            if !names(look, formula, counted) || names(look, formula, missing) {
                continue;
            }
            let Some(twin) = beside(formula, counted, missing) else { return formula };
            let shape = |at: At| look.cells.get(at).and_then(|content| content.shape.as_ref());
            if shape(twin).is_some() && shape(twin) == shape(formula) && names(look, twin, missing) {
                (counted, missing) = (formula, twin);
                continue 'up;
            }
            // In a row along the years, the odd cell is the one that leaves the flow out.
            let along = look.lines.iter().any(|line| {
                line.sheet == formula.0 && line.range.contains(formula.1) && line.range.contains(twin.1)
            });
            return if along && look.cells.get(twin).is_some() { twin } else { formula };
        }
        break;
    }
    counted
}

/// The first formula that a flow comes into by two ways.
fn doubled(look: &Look, slopes: &Slopes, flow: At) -> Option<At> {
    let mut ways: HashMap<At, u64> = HashMap::from([(flow, 1)]);
    for &formula in &slopes.order {
        if formula == flow || !slopes.reaches(formula) {
            continue;
        }
        let ranges = look.cells.get(formula).and_then(|content| content.expr.as_ref())?.ranges();
        let through = |(sheet, range): &(usize, Range)| -> u64 {
            ways.iter().filter(|(at, _)| at.0 == *sheet && range.contains(at.1)).map(|(_, n)| *n).sum()
        };
        let count: u64 = ranges.iter().map(through).sum();
        if count > 1 {
            return Some(formula);
        }
        if count == 1 {
            ways.insert(formula, 1);
        }
    }
    None
}

fn names(look: &Look, formula: At, cell: At) -> bool {
    let expr = look.cells.get(formula).and_then(|content| content.expr.as_ref());
    expr.is_some_and(|expr| {
        expr.ranges().iter().any(|(sheet, range)| *sheet == cell.0 && range.contains(cell.1))
    })
}

/// One finding for each cell where something goes wrong in one way.
fn told(look: &Look, suspects: Vec<Suspect>) -> Vec<Finding> {
    let mut groups: Vec<Vec<Suspect>> = Vec::new();
    for suspect in suspects {
        let place = whole(look, suspect.root);
        let alike = |group: &&mut Vec<Suspect>| {
            let other = &group[0];
            kind(other.slip) == kind(suspect.slip)
                && other.choice == suspect.choice
                && whole(look, other.root) == place
        };
        match groups.iter_mut().find(alike) {
            Some(group) => group.push(suspect),
            None => groups.push(vec![suspect]),
        }
    }
    groups.iter().map(|group| finding(look, group)).collect()
}

/// The run of cells of a row along the years that hold the same formula as this one; else the cell itself.
fn whole(look: &Look, root: At) -> SheetRange {
    let shape = |at: At| look.cells.get(at).and_then(|content| content.shape.clone());
    let line = look.lines.iter().find(|line| line.sheet == root.0 && line.range.contains(root.1));
    let run = line.filter(|line| {
        let own = shape(root);
        own.is_some() && line.each().filter(|at| shape(*at) == own).count() * 10 >= line.len() * 9
    });
    let range = run.map_or(Range::cell(root.1), |line| line.range);
    SheetRange::new(&look.seen.book.sheets[root.0].name, range)
}

fn kind(slip: Slip) -> Kind {
    match slip {
        Slip::Absent | Slip::Ends(_) | Slip::Begins(_) => Kind::ShortTotal,
        Slip::Times(_) => Kind::DoubleCount,
        Slip::Scaled(_) => Kind::UnitMismatch,
        Slip::Turned => Kind::NegativeCost,
    }
}

fn finding(look: &Look, group: &[Suspect]) -> Finding {
    let first = &group[0];
    let choice = &look.seen.appraisal.choices[first.choice];
    let axis = &look.seen.appraisal.axes[choice.axis];
    let mut streams: Vec<&str> = Vec::new();
    for suspect in group {
        let name = choice.streams[suspect.stream].name.as_str();
        if !streams.contains(&name) {
            streams.push(name);
        }
    }
    let streams = streams.join(", ");
    let year = |i: usize| label_words(&axis.labels[i]);
    let count = first.years.len();
    let years = if count == 1 { "1 year".to_owned() } else { format!("{count} years") };
    let span = format!("{} to {}", year(first.years[0]), year(first.years[count - 1]));
    let (found, expected, words, confidence) = match first.slip {
        Slip::Absent => (
            format!("leaves out {streams}"),
            format!("{streams} counted too"),
            format!("The total counts the other streams of the option, and not {streams}."),
            0.85,
        ),
        Slip::Ends(_) => (
            format!("leaves out the last {years} of {streams}"),
            format!("every year to {}", year(axis.labels.len() - 1)),
            format!("The total ends before the row does: the flows of {span} do not count in it."),
            0.95,
        ),
        Slip::Begins(from) => (
            format!("leaves out the first {years} of {streams}"),
            format!("every year from {}", year(0)),
            format!(
                "The total begins in {}, after the row does: the flows of {span} do not count in it.",
                year(from)
            ),
            0.95,
        ),
        Slip::Times(times) => (
            format!("counts {streams} {} times", figure(times)),
            format!("{streams} counted once"),
            format!(
                "By its formulas the total moves by {} for each 1 of {streams} in {span}.",
                figure(times)
            ),
            0.95,
        ),
        Slip::Scaled(scale) => (
            format!("counts {streams} {} times", figure(scale)),
            format!("{streams} counted in the unit of its cells"),
            format!(
                "By its formulas the total moves by {} for each 1 of {streams}, as if one of the two were in other units.",
                figure(scale)
            ),
            0.8,
        ),
        Slip::Turned => (
            format!("counts {streams} with the other sign"),
            format!(
                "{streams} with the sign of a {}",
                if choice.streams[first.stream].kind == StreamKind::Cost { "cost" } else { "benefit" }
            ),
            format!(
                "By its formulas the total rises by 1 where {streams} should lower it, or the other way round."
            ),
            0.85,
        ),
    };
    let effect = effect(look, group);
    let at = whole(look, first.root);
    let named = choice.targets.iter().find(|target| target.at.hull() == at);
    let place = Place::cells(&at.sheet, at.range);
    let place = named.map_or_else(|| place.clone(), |target| place.clone().called(&target.from));
    Finding {
        kind: kind(first.slip),
        place,
        found,
        expected,
        effect_on_npv: effect.0,
        ranking: effect.1,
        confidence,
        words,
    }
}

/// What the flows of a group add to the NPV that the option shows: less than nothing where flows are left out.
fn effect(look: &Look, group: &[Suspect]) -> (Option<f64>, Option<String>) {
    let mut added = vec![0.0; look.seen.appraisal.choices.len()];
    let mut done: Vec<usize> = Vec::new();
    for suspect in group.iter().filter(|suspect| counts_in_npv(look, suspect)) {
        if done.contains(&suspect.stream) {
            continue;
        }
        done.push(suspect.stream);
        let stream = &look.seen.appraisal.choices[suspect.choice].streams[suspect.stream];
        let times = match suspect.slip {
            Slip::Absent | Slip::Ends(_) | Slip::Begins(_) => -1.0,
            Slip::Times(times) | Slip::Scaled(times) => times - 1.0,
            Slip::Turned => -2.0,
        };
        for &i in &suspect.years {
            added[suspect.choice] += times * stream.raw[i] * look.worth(suspect.choice, suspect.stream, i);
        }
    }
    let effect = look.in_results(&added);
    (effect.npv, effect.ranking)
}

/// Whether the NPV of the option goes wrong with the total: it is that total, rests on it, or is no formula.
fn counts_in_npv(look: &Look, suspect: &Suspect) -> bool {
    match &look.npvs[suspect.choice] {
        Some(npv) => {
            npv.reaches(suspect.root) || npv.reaches(suspect.target) || rank(&suspect.role) == Some(2)
        }
        None => true,
    }
}
