//! Options whose totals were not made with any factors that they show: which reading gives the totals.
//!
//! One total has room for many readings, so only those are tried that leave nothing to fit: declared and round rates,
//! moved edges, round inflation, timings, roundings. How sure such a finding is: 1 - (readings tried) x (distance of
//! the total from the reading, or its tolerance where it was rounded) / |found - expected|, which is how unlikely a total
//! is met by chance, divided by the number of kinds that give it.

use std::rc::Rc;

use super::candidates::{Known, round_laws, timings};
use super::law::{Law, When};
use super::reading::{Reading, Rounding};
use super::series::{Point, Series, Source, User};
use crate::appraisal::{StreamKind, TargetRole};
use crate::diagnose::consequences::Consequences;
use crate::diagnose::{Compared, Seen, Standing};
use crate::findings::Kind;
use crate::patch::Cached;
use crate::tolerance;

/// A second timing.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Second {
    /// Of all streams but costs.
    Others(When),
    /// Of all years from one on.
    From(usize, When),
}

/// A reading that gives every total of an option.
pub struct Total {
    /// The kinds of mistake.
    pub kinds: Vec<Kind>,
    /// The factors as they would be; a row for costs and one for all else where timings are mixed.
    pub rows: Vec<Series>,
    /// The reading; of costs or of the first years, where timings are mixed.
    pub reading: Reading,
    /// Where timings are mixed, the other one and what follows it.
    pub second: Option<Second>,
    /// The cell that shows it best: the net present value, where that differs.
    pub cell: Compared,
    /// How many totals it gives.
    pub given: usize,
    /// Kinds of mistake that give them as well.
    pub ties: Vec<Kind>,
    /// How likely the total is met by chance.
    pub chance: f64,
    /// How sure it is.
    pub confidence: f64,
}

/// A reading that gives them, and the factors of the option under it.
struct Gives {
    kinds: Vec<Kind>,
    reading: Reading,
    second: Option<Second>,
    rows: Vec<Series>,
    /// The largest distance of a total from it.
    away: f64,
}

/// The reading of an option's totals, where one is found.
///
/// `rows` are the factors that the workbook shows; cells that `explained` says need no reading.
pub fn total(seen: &Seen, c: usize, rows: &[Series], explained: impl Fn(&Compared) -> bool) -> Option<Total> {
    let shown = Consequences::of(seen, rows);
    let cells: Vec<&Compared> = shown.totals(c).collect();
    // Within the digits shown, a total may still hold digits of its own.
    let off = |cell: &&&Compared| match cell.standing {
        Standing::Differs => !explained(cell) && !shown.follows(cell),
        _ => !explained(cell) && !seen.is_rounded(cell) && !shown.gives_exactly(cell) && apart(seen, cell),
    };
    let mut differing: Vec<&Compared> = cells.iter().filter(off).copied().collect();
    differing.sort_by_key(|cell| seen.target(cell).role != TargetRole::Npv);
    let cell = (*differing.first()?).clone();
    let known = Known::of(seen, &as_declared(seen, c, vec![(c, None)]));
    // The same mistake in every option of that basis, or in this one alone.
    let alike =
        (0..seen.outcomes.len()).filter(|&other| seen.outcomes[other].curve == seen.outcomes[c].curve);
    let alike: Vec<usize> = alike.collect();
    // A reading gives all the digits that a total holds; fewer only where the total was entered so.
    let exactly = !cells.iter().all(|cell| seen.is_rounded(cell));
    let mut tried = 0;
    let mut found: Vec<Gives> = Vec::new();
    for (reading, second) in readings(seen, c, &known) {
        let kinds = match second {
            Some(_) => vec![Kind::MixedTiming],
            None => reading.kinds(known.declared),
        };
        tried += 1;
        if found.iter().any(|known| known.kinds == kinds) {
            continue;
        }
        let options: &[&[usize]] = if alike.len() > 1 { &[&alike, &[c]] } else { &[&[c]] };
        for options in options {
            let made: Vec<Series> =
                options.iter().flat_map(|&option| made(seen, option, &reading, second)).collect();
            if let Some(away) = Consequences::of(seen, &[rows, &made[..]].concat()).gives(c, exactly) {
                let rows = made.into_iter().filter(|row| row.users[0].0 == c).collect();
                found.push(Gives { kinds: kinds.clone(), reading: reading.clone(), second, rows, away });
                break;
            }
        }
    }
    let (Some(held), Cached::Number(expected)) = (seen.held(&cell).number(), &cell.expected) else {
        return None;
    };
    // As near as sums of products come to the last digit.
    let near = |away: f64| away.max(1e-12 * expected.abs());
    let nearest = found.iter().map(|gives| near(gives.away)).fold(f64::INFINITY, f64::min);
    let mut all = found.into_iter().filter(|gives| near(gives.away) <= 100.0 * nearest);
    let Gives { kinds, reading, second, rows, away } = all.next()?;
    let within = if exactly { near(away) } else { cell.tolerance };
    let chance = f64::from(tried) * within / (held - expected).abs();
    let mut ties: Vec<Kind> = all.flat_map(|other| other.kinds).collect();
    ties.sort_unstable();
    ties.dedup();
    let confidence = (1.0 - chance).max(0.0) / (1 + ties.len()) as f64;
    Some(Total { kinds, rows, reading, second, given: cells.len(), cell, ties, chance, confidence })
}

/// Whether a number is farther from what the basis gives than the tolerance of factors.
fn apart(seen: &Seen, cell: &Compared) -> bool {
    match (seen.held(cell).number(), &cell.expected) {
        (Some(held), Cached::Number(x)) => (held - x).abs() > tolerance::RELATIVE * x.abs(),
        _ => false,
    }
}

/// What is tried, the simplest first.
fn readings(seen: &Seen, c: usize, known: &Known) -> Vec<(Reading, Option<Second>)> {
    let declared = || Law::Declared(Rc::new(seen.outcomes[c].curve.clone()));
    let plain = |kind: Option<Kind>, law: Law, when: When, rounding: Option<Rounding>| Reading {
        law,
        kind,
        when,
        rounding,
    };
    let mut all = Vec::new();
    for places in 2..=6 {
        let rounding = Some(Rounding::Places(places));
        all.push((plain(None, declared(), known.declared, rounding), None));
    }
    all.extend(timings(known, true).into_iter().map(|when| (plain(None, declared(), when, None), None)));
    let last = seen.outcomes[c].offsets.last().copied().unwrap_or(0.0);
    let laws = round_laws(&Rc::new(seen.outcomes[c].curve.clone()), known, last);
    all.extend(laws.into_iter().map(|(kind, law)| (plain(Some(kind), law, known.declared, None), None)));
    let near = [0.0, 0.5, -0.5, 1.0, -1.0].map(|later| When { later, ..known.declared });
    for costs in near {
        for others in near.into_iter().filter(|when| *when != costs) {
            all.push((plain(None, declared(), costs, None), Some(Second::Others(others))));
        }
    }
    let other = near.into_iter().filter(|when| *when != known.declared);
    for (first, then) in other.flat_map(|when| [(known.declared, when), (when, known.declared)]) {
        for year in 1..seen.outcomes[c].offsets.len() {
            all.push((plain(None, declared(), first, None), Some(Second::From(year, then))));
        }
    }
    all
}

/// The factors of an option under a reading.
fn made(seen: &Seen, c: usize, reading: &Reading, second: Option<Second>) -> Vec<Series> {
    let all = |reading: &Reading| read(as_declared(seen, c, vec![(c, None)]), reading);
    let users = |costs: bool| -> Vec<User> {
        let streams = seen.appraisal.choices[c].streams.iter().enumerate();
        streams.filter(|(_, s)| (s.kind == StreamKind::Cost) == costs).map(|(s, _)| (c, Some(s))).collect()
    };
    match second {
        None => vec![all(reading)],
        Some(Second::From(year, when)) => {
            let mut row = all(reading);
            let then = all(&Reading { when, ..reading.clone() });
            row.points.truncate(year);
            row.points.extend_from_slice(&then.points[year..]);
            vec![row]
        }
        Some(Second::Others(when)) => [(users(true), reading.when), (users(false), when)]
            .into_iter()
            .filter(|(users, _)| !users.is_empty())
            .map(|(users, when)| read(as_declared(seen, c, users), &Reading { when, ..reading.clone() }))
            .collect(),
    }
}

fn read(row: Series, reading: &Reading) -> Series {
    let round = |x: f64| match reading.rounding {
        Some(Rounding::Places(places)) => (x * 10f64.powi(places)).round() / 10f64.powi(places),
        _ => x,
    };
    let points =
        row.points.iter().map(|p| Point { found: reading.factor(p).map_or(p.declared, round), ..p.clone() });
    Series { points: points.collect(), ..row }
}

/// The option's factors as declared.
fn as_declared(seen: &Seen, c: usize, users: Vec<User>) -> Series {
    let outcome = &seen.outcomes[c];
    let axis = &seen.appraisal.axes[seen.appraisal.choices[c].axis];
    let point = |(index, (t, declared)): (usize, (&f64, &f64))| Point {
        range: 0,
        index,
        t: *t,
        declared: *declared,
        found: *declared,
        slack: 0.0,
    };
    Series {
        source: Source::Totals,
        ranges: vec![axis.at.hull()],
        called: String::new(),
        users,
        curve: Rc::new(outcome.curve.clone()),
        timing: outcome.timing,
        points: outcome.offsets.iter().zip(&outcome.factors).enumerate().map(point).collect(),
        agrees: false,
    }
}
