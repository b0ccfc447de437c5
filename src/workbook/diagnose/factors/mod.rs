//! Factors that are not those of the declared basis: which mistake gives them, from the numbers alone.
//!
//! Every row of factors, given or implied by present values, is held against readings: the declared curve rounded, at
//! another timing, or another curve in its place. The fewest departures that give the row to the tolerance of factors
//! are its mistakes, one finding each.
//!
//! How sure a finding is: (share of the row's factors that the reading gives) x n/(n + 1), n being the factors that are
//! not as declared and that the reading gives, divided by the number of kinds of mistake that give them equally well;
//! where the reading gives them only nearly, nine tenths of it.

mod candidates;
mod law;
mod mixed;
mod rates;
mod reading;
mod search;
mod series;
mod totals;
mod unnamed;
mod words;

use candidates::Known;
use mixed::Mixed;
use rates::{makes, rates_off, rates_rows};
use reading::Reading;
use search::{Found, Shown, search};
pub use series::Series;
use series::{Point, Source, User, factor_rows, implied_rows, npvs_with};
use totals::{Total, total};
use unnamed::unnamed_rows;

use crate::diagnose::effect::Effect;
use crate::diagnose::{Compared, Seen};
use crate::findings::{Finding, Kind};
use crate::plan::span;
use crate::problem::Place;
use crate::references::SheetRange;
use crate::valuation::cell_of;

/// Every row of factors that a workbook shows: those that its yearly rates would make, those of that role, and those
/// that its results were made with.
pub fn rows(seen: &Seen) -> Vec<Series> {
    [rates_rows(seen), unnamed_rows(seen), factor_rows(seen)].concat()
}

/// What is wrong with the factors of a workbook; cells that `known` says are explained already are left out.
///
/// `rows` are the factors that the workbook shows; those that its totals alone tell of are added.
pub fn findings(seen: &Seen, rows: &mut Vec<Series>, known: impl Fn(&SheetRange) -> bool) -> Vec<Finding> {
    let mut findings = of_rows(seen, rows, &known);
    for c in 0..seen.outcomes.len() {
        let found = |cell: &Compared| {
            findings.iter().any(|finding: &Finding| finding.place.holds(&cell.at)) || known(&cell.at)
        };
        // A reading that is more likely met by chance than not says nothing.
        if let Some(total) = total(seen, c, rows, found).filter(|total| total.chance < 0.5) {
            findings.push(of_total(seen, &total));
            rows.extend(total.rows);
        }
    }
    findings
}

/// What the rows of factors show, and those that present values imply.
fn of_rows(seen: &Seen, rows: &mut Vec<Series>, known: &impl Fn(&SheetRange) -> bool) -> Vec<Finding> {
    let made = |row: &&Series| {
        let rates = |other: &Series| {
            other.source == Source::Rates && !rates_off(seen, other).is_empty() && makes(other, row)
        };
        row.source == Source::Rates || !rows.iter().any(rates)
    };
    let mut all: Vec<Series> = rows.iter().filter(made).cloned().collect();
    all.extend(implied_rows(seen).into_iter().filter(|row| !follows(row, rows)));
    for row in &mut all {
        let ranges = row.ranges.clone();
        row.points.retain(|p| !known(&cell_of(&ranges[p.range].clone().into(), p.index)));
    }
    let read = |row: &Series| {
        let known = Known::of(seen, row);
        let shown = match row.source {
            Source::Rates => of_rates(seen, row, &known),
            _ => search(row, &known),
        };
        (known, shown)
    };
    let shown: Vec<(Known, Shown)> = all.iter().map(read).collect();
    let (mut findings, mut whole) = (Vec::new(), Vec::new());
    for (row, (known, found)) in all.iter().zip(&shown) {
        match found {
            // Within the digits shown, only a reading that gives every factor exactly says more than the comparison.
            _ if row.agrees && !exact(found) => {}
            Shown::Declared => {}
            Shown::Mixed(found) => findings.push(of_mixed(seen, row, known, found)),
            Shown::SomeOff(off) => findings.push(some_off(seen, row, off)),
            Shown::Unknown => findings.push(unknown(seen, row)),
            Shown::Reading(found) => {
                let right = |j: usize| same_option(row, &all[j]) && shown[j].1 == Shown::Declared;
                let mixed = (0..all.len()).any(right);
                findings.extend(of_reading(seen, row, known, found, mixed));
                whole.push(completed(seen, row, &found.reading));
                continue;
            }
        }
        whole.push(row.clone());
    }
    rows.extend(whole);
    findings
}

/// Whether a row shows a mistake without any doubt.
fn exact(shown: &Shown) -> bool {
    match shown {
        Shown::Reading(found) => {
            found.fit.off.is_empty() && found.reading.kind != Some(Kind::Differs) && !words::nearly(found)
        }
        Shown::Mixed(_) => true,
        _ => false,
    }
}

/// A row with the factors that its blank and waiting cells would have, and with all digits of those that were rounded.
fn completed(seen: &Seen, row: &Series, reading: &Reading) -> Series {
    let outcome = &seen.outcomes[row.users[0].0];
    let mut row = row.clone();
    for point in row.points.iter_mut().filter(|point| point.slack > 0.0) {
        point.found = reading.factor(point).unwrap_or(point.found);
    }
    for (index, t) in outcome.offsets.iter().enumerate() {
        let point =
            Point { range: 0, index, t: *t, declared: outcome.factors[index], found: 0.0, slack: 0.0 };
        if row.points.iter().all(|p| p.index != index)
            && let Some(found) = reading.factor(&point)
        {
            row.points.push(Point { found, ..point });
        }
    }
    row
}

/// What a row of yearly rates shows. A rate that is wrong makes every factor after it wrong: where no reading gives the
/// factors, the rates themselves say how many are off.
fn of_rates(seen: &Seen, row: &Series, known: &Known) -> Shown {
    let off = rates_off(seen, row);
    if off.is_empty() {
        return Shown::Declared;
    }
    match search(row, known) {
        Shown::Reading(found) if found.reading.kind != Some(Kind::Differs) && found.fit.off.is_empty() => {
            Shown::Reading(found)
        }
        _ if 2 * off.len() < row.points.len() => Shown::SomeOff(off),
        shown @ Shown::Reading(_) => shown,
        _ => Shown::Unknown,
    }
}

/// A reading that gives the totals of an option.
fn of_total(seen: &Seen, total: &Total) -> Finding {
    let with: Vec<(&[User], &[Point])> =
        total.rows.iter().map(|row| (&row.users[..], &row.points[..])).collect();
    let effect = Effect::of(&seen.appraisal, &seen.npvs(), &npvs_with(seen, &with));
    let target = seen.target(&total.cell);
    let place = Place::cells(&total.cell.at.sheet, total.cell.at.range).called(&target.from);
    let known = Known::of(seen, &total.rows[0]);
    let said = words::of_total(seen, total, &known, effect.npv);
    finding(total.kinds[0], place, said, effect, total.confidence)
}

/// Whether two rows of present values are of streams of one option.
fn same_option(a: &Series, b: &Series) -> bool {
    a.source == Source::Present && b.source == Source::Present && a.users[0].0 == b.users[0].0
}

/// Whether present values were made with factors that the workbook shows.
fn follows(implied: &Series, rows: &[Series]) -> bool {
    let (choice, stream) = implied.users[0];
    let theirs =
        |row: &&Series| row.users.iter().any(|user| *user == (choice, stream) || *user == (choice, None));
    let Some(row) = rows.iter().rfind(theirs) else { return false };
    let shown = |index: usize| row.points.iter().find(|p| p.index == index);
    implied.points.iter().all(|p| {
        let factor = shown(p.index).map_or(p.declared, |p| p.found);
        (p.found - factor).abs() <= Series::tolerance(p, factor)
    })
}

/// One finding a departure, its effect being what it adds to that of the ones before it. Where other streams of the
/// option are timed as declared, timings are mixed.
fn of_reading(seen: &Seen, row: &Series, known: &Known, found: &Found, mixed: bool) -> Vec<Finding> {
    let Found { reading, fit, .. } = found;
    let law = Reading { when: known.declared, rounding: None, ..reading.clone() };
    let timed = Reading { rounding: None, ..reading.clone() };
    let mut stages: Vec<(Kind, Vec<Point>)> = Vec::new();
    if let Some(kind) = reading.kind {
        stages.push((kind, with(row, |p| law.factor(p))));
    }
    if reading.when != known.declared {
        let kind = if mixed { Kind::MixedTiming } else { Kind::OffByPeriod };
        stages.push((kind, with(row, |p| timed.factor(p))));
    }
    if reading.rounding.is_some() {
        stages.push((Kind::RoundedFactors, row.points.clone()));
    }
    let confidence = confidence(row, &fit.off, found.ties.len());
    let confidence = if words::nearly(found) { 0.9 * confidence } else { confidence };
    let mut before = seen.npvs();
    let mut findings = Vec::new();
    for (kind, points) in stages {
        let after = npvs_with(seen, &[(&row.users, &points)]);
        let effect = Effect::of(&seen.appraisal, &before, &after);
        let said = words::of_reading(seen, row, known, found, kind, effect.npv);
        findings.push(finding(kind, place(row), said, effect, confidence));
        before = after;
    }
    if !fit.off.is_empty() {
        findings.push(some_off(seen, row, &fit.off));
    }
    findings
}

fn of_mixed(seen: &Seen, row: &Series, known: &Known, found: &Mixed) -> Finding {
    // Where neither timing is the declared one, the whole row is off.
    let wrong = |i: &usize| match (found.most == known.declared, found.rest == known.declared) {
        (true, _) => found.others.contains(i),
        (_, true) => !found.others.contains(i),
        _ => true,
    };
    let wrong: Vec<usize> = (0..row.points.len()).filter(wrong).map(|i| row.points[i].index).collect();
    let first = &row.ranges[0];
    let beside = row.ranges.iter().filter(|range| range.sheet == first.sheet);
    let cells: Vec<SheetRange> =
        beside.flat_map(|range| wrong.iter().map(|&index| cell_of(&range.clone().into(), index))).collect();
    let effect = effect(seen, row);
    let said = words::of_mixed(seen, row, found);
    let place = span(&cells).unwrap_or_else(|| place(row)).called(&row.called);
    finding(Kind::MixedTiming, place, said, effect, confidence(row, &[], 0))
}

/// A few factors that are not as declared, in a row that otherwise is (or follows one reading).
fn some_off(seen: &Seen, row: &Series, off: &[usize]) -> Finding {
    let cells: Vec<SheetRange> = off.iter().map(|&i| row.cell(&row.points[i])).collect();
    let place = span(&cells).unwrap_or_else(|| place(row)).called(&row.called);
    // A wrong rate moves every factor after it.
    let points: Vec<Point> = match row.source {
        Source::Rates => row.points.clone(),
        _ => off.iter().map(|&i| row.points[i].clone()).collect(),
    };
    let effect = Effect::of(&seen.appraisal, &seen.npvs(), &npvs_with(seen, &[(&row.users, &points)]));
    let share = (row.points.len() - off.len()) as f64 / row.points.len() as f64;
    finding(Kind::Differs, place, words::some_off(seen, row, off), effect, share)
}

/// A row that nothing gives. Present values over flows are factors only if they look like such.
fn unknown(seen: &Seen, row: &Series) -> Finding {
    let near = row.points.iter().all(|p| p.found > 0.0 && p.found < 1.6);
    let falls = row.points.windows(2).filter(|pair| pair[1].found <= pair[0].found).count();
    let like = near && (row.ranges.len() > 1 || 2 * falls > row.points.len());
    let kind = if row.source != Source::Present || like { Kind::NoKnownRate } else { Kind::Differs };
    // The more factors, the less likely that a reading was missed by chance.
    finding(kind, place(row), words::unknown(seen, row), effect(seen, row), confidence(row, &[], 0))
}

fn effect(seen: &Seen, row: &Series) -> Effect {
    let wrong = npvs_with(seen, &[(&row.users, &row.points)]);
    Effect::of(&seen.appraisal, &seen.npvs(), &wrong)
}

/// The points of a row with factors of another law; as declared where it has none.
fn with(row: &Series, factor: impl Fn(&Point) -> Option<f64>) -> Vec<Point> {
    let with = |p: &Point| Point { found: factor(p).unwrap_or(p.declared), ..p.clone() };
    row.points.iter().map(with).collect()
}

/// The cells of a row: all of them, where its ranges stand side by side, else those of the first.
fn place(row: &Series) -> Place {
    let first = &row.ranges[0];
    let mut range = first.range;
    let mut others: Vec<&SheetRange> = row.ranges.iter().filter(|other| other.sheet == first.sheet).collect();
    others.sort();
    // Those before the first range join it from the nearest on.
    let at = others.iter().position(|other| *other == first).unwrap_or(0);
    let (before, after) = others.split_at(at);
    for other in before.iter().rev().chain(after) {
        let hull = range.hull(&other.range);
        if hull.len() == range.len() + other.range.len() {
            range = hull;
        }
    }
    Place::cells(&first.sheet, range).called(&row.called)
}

fn confidence(row: &Series, off: &[usize], ties: usize) -> f64 {
    let share = (row.points.len() - off.len()) as f64 / row.points.len() as f64;
    let told = row.off().len().saturating_sub(off.len()) as f64;
    share * told / (told + 1.0) / (1 + ties) as f64
}

fn finding(kind: Kind, place: Place, said: words::Said, effect: Effect, confidence: f64) -> Finding {
    Finding {
        kind,
        place,
        found: said.found,
        expected: said.expected,
        effect_on_npv: effect.npv,
        ranking: effect.ranking,
        confidence,
        words: said.words,
    }
}
