//! Where a workbook's factors are: in cells of that role, or implied by its present values.

use std::rc::Rc;

use hence_core::{Curve, Timing};

use crate::appraisal::{Held, StreamKind, Target, TargetRole};
use crate::diagnose::{Compared, Seen, Standing};
use crate::formulas::find;
use crate::references::SheetRange;
use crate::tolerance;
use crate::valuation::{cell_of, side};

/// How a series was read.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Source {
    /// Cells that hold factors.
    Factors,
    /// Cells that hold yearly rates, by the factors that they would make.
    Rates,
    /// Present values by year over the flows they came from.
    Present,
    /// A reading that gives the totals.
    Totals,
}

/// One factor that a workbook uses.
#[derive(Clone, Debug, PartialEq)]
pub struct Point {
    /// Which range of the series it stands in.
    pub range: usize,
    /// Its place among the years.
    pub index: usize,
    /// Years after the base, as declared.
    pub t: f64,
    /// What the declared basis gives.
    pub declared: f64,
    /// What the workbook uses.
    pub found: f64,
    /// How far the two may be apart beyond the tolerance of factors, as present values were entered to so many digits.
    pub slack: f64,
}

/// An option, and one of its streams; no stream where all that have no basis of their own are meant.
pub type User = (usize, Option<usize>);

/// The factors that a workbook uses for an option, or for one of its streams.
#[derive(Clone, Debug)]
pub struct Series {
    /// How it was read.
    pub source: Source,
    /// Its cells: one range, or several streams' present values that imply the same factors.
    pub ranges: Vec<SheetRange>,
    /// The name that the first of them goes by.
    pub called: String,
    /// What is discounted by it.
    pub users: Vec<User>,
    /// The declared curve.
    pub curve: Rc<Curve>,
    /// The declared timing.
    pub timing: Timing,
    /// Factors in the order of the years, at most one a year; none where a cell is blank or awaits recalculation.
    pub points: Vec<Point>,
    /// All cells agree with the declared basis as they are shown.
    pub agrees: bool,
}

impl Series {
    /// Adds the points of a row that implies the same factors: those of other years, and those that say more.
    fn join(&mut self, row: Series) {
        let range = self.ranges.len();
        for point in row.points {
            let point = Point { range, ..point };
            match self.points.iter_mut().find(|own| own.index == point.index) {
                Some(own) if own.slack > point.slack => *own = point,
                Some(_) => {}
                None => self.points.push(point),
            }
        }
        self.points.sort_by_key(|point| point.index);
        self.ranges.extend(row.ranges);
        self.users.extend(row.users);
        self.agrees &= row.agrees;
    }

    /// Whether it is what yearly rates would make.
    pub fn is_made_of_rates(&self) -> bool {
        self.source == Source::Rates
    }

    /// The cell of a point.
    pub fn cell(&self, point: &Point) -> SheetRange {
        cell_of(&self.ranges[point.range].clone().into(), point.index)
    }

    /// How far a factor may be from what a law gives.
    pub fn tolerance(point: &Point, factor: f64) -> f64 {
        point.slack + tolerance::RELATIVE * factor.abs()
    }

    /// The points that are not as declared.
    pub fn off(&self) -> Vec<&Point> {
        let off = |p: &&Point| (p.found - p.declared).abs() > Series::tolerance(p, p.declared);
        self.points.iter().filter(off).collect()
    }
}

/// Every range of factors.
pub fn factor_rows(seen: &Seen) -> Vec<Series> {
    let mut rows: Vec<Series> = Vec::new();
    for (c, choice) in seen.appraisal.choices.iter().enumerate() {
        for target in &choice.targets {
            let stream = match &target.role {
                TargetRole::Factor => None,
                TargetRole::StreamFactor(name) => find(choice, name),
                _ => continue,
            };
            let row =
                series(seen, Source::Factors, (c, stream), target, |_, held| Some((held.number()?, 0.0)));
            // Options that share a range and a basis show one mistake.
            let same = |other: &&mut Series| other.ranges == row.ranges && other.curve == row.curve;
            match rows.iter_mut().find(same) {
                Some(known) => known.users.extend(row.users),
                None => rows.push(row),
            }
        }
    }
    rows
}

/// The factors that present values by year imply; years without a flow say nothing. Streams of an option that imply the
/// same factors are one series.
pub fn implied_rows(seen: &Seen) -> Vec<Series> {
    let mut rows: Vec<Series> = Vec::new();
    for (c, choice) in seen.appraisal.choices.iter().enumerate() {
        let mut own: Vec<Series> =
            choice.targets.iter().filter_map(|target| implied(seen, c, target)).collect();
        // Streams with the most flows say most; the others follow one of them.
        own.sort_by_key(|row| std::cmp::Reverse(row.points.len()));
        let mut together: Vec<Series> = Vec::new();
        for row in own {
            match together.iter_mut().find(|other| other.curve == row.curve && alike(other, &row)) {
                Some(other) => other.join(row),
                None => together.push(row),
            }
        }
        rows.extend(together);
    }
    rows
}

/// The factors that the present values of one target imply.
fn implied(seen: &Seen, c: usize, target: &Target) -> Option<Series> {
    let (choice, outcome) = (&seen.appraisal.choices[c], &seen.outcomes[c]);
    let (stream, flows) = match &target.role {
        TargetRole::PvByYear(Some(name)) => {
            let s = find(choice, name)?;
            (Some(s), &outcome.streams[s].flows)
        }
        // Where a stream has a basis of its own, the net has no single factor.
        TargetRole::PvByYear(None) if outcome.streams.iter().all(|s| s.own.is_none()) => (None, &outcome.net),
        _ => return None,
    };
    let entered = entered(seen, c, target);
    let implied = |i: usize, held: &Held| {
        let (value, flow) = (held.number()?, flows[i]);
        let slack = entered[i] / flow.abs();
        // A flow that is nothing, or lost in the digits, tells nothing of its factor.
        (flow != 0.0 && slack < 0.02 * outcome.factors[i].abs()).then(|| (value / flow, slack))
    };
    let row = series(seen, Source::Present, (c, stream), target, implied);
    (!row.points.is_empty()).then_some(row)
}

/// Half of the unit that each cell was rounded to: its own, or that which its format shows, where the numbers of the row
/// were rounded to it; else nothing.
fn entered(seen: &Seen, c: usize, target: &Target) -> Vec<f64> {
    let cells: Vec<&Compared> =
        seen.compared.iter().filter(|cell| cell.choice == c && seen.target(cell).at == target.at).collect();
    let rounded = cells.iter().all(|cell| seen.held(cell).number().is_none() || seen.is_rounded(cell));
    let half = |i: usize| match cells.iter().find(|cell| cell.index == i && cell.rounded) {
        Some(cell) => cell.tolerance,
        None if rounded => tolerance::of_cell(target, i, 0.0),
        None => 0.0,
    };
    (0..target.held.len()).map(half).collect()
}

/// Whether two rows imply the same factors in the years that both have.
fn alike(a: &Series, b: &Series) -> bool {
    a.points.iter().all(|p| {
        let other = b.points.iter().find(|q| q.index == p.index);
        other.is_none_or(|q| (p.found - q.found).abs() <= Series::tolerance(p, p.found) + q.slack)
    })
}

fn series(
    seen: &Seen,
    source: Source,
    (choice, stream): User,
    target: &Target,
    read: impl Fn(usize, &Held) -> Option<(f64, f64)>,
) -> Series {
    let outcome = &seen.outcomes[choice];
    let own = stream.and_then(|s| outcome.streams[s].own.as_ref());
    let factors = stream.map_or(&outcome.factors[..], |s| outcome.factors_of(s));
    let points = target.held.iter().enumerate().filter_map(|(index, held)| {
        let (found, slack) = read(index, held)?;
        Some(Point { range: 0, index, t: outcome.offsets[index], declared: factors[index], found, slack })
    });
    Series {
        source,
        ranges: vec![target.at.hull()],
        called: target.from.clone(),
        users: vec![(choice, stream)],
        curve: Rc::new(own.map_or(&outcome.curve, |own| &own.curve).clone()),
        timing: outcome.timing,
        points: points.collect(),
        agrees: !seen.compared.iter().any(|cell| {
            cell.standing == Standing::Differs && cell.choice == choice && seen.target(cell).at == target.at
        }),
    }
}

/// The net present value of every option, over the baseline where there is one, when series of factors stand in for
/// the declared ones.
pub fn npvs_with(seen: &Seen, rows: &[(&[User], &[Point])]) -> Vec<f64> {
    let absolute = |c: usize| {
        let (choice, outcome) = (&seen.appraisal.choices[c], &seen.outcomes[c]);
        let mut npv = outcome.absolute.npv;
        for (s, (stream, valued)) in choice.streams.iter().zip(&outcome.streams).enumerate() {
            let takes = |(users, _): &&(&[User], &[Point])| {
                users.iter().any(|&(choice, stream)| {
                    choice == c && stream.map_or(valued.own.is_none(), |stream| stream == s)
                })
            };
            let Some((_, points)) = rows.iter().find(takes) else { continue };
            let factors = outcome.factors_of(s);
            let mut more: f64 =
                points.iter().map(|p| valued.flows[p.index] * (p.found - factors[p.index])).sum();
            if let Some(last) = points.iter().find(|p| p.index + 1 == factors.len()) {
                // What follows the last year is discounted on from there.
                more += valued.pv_tail * (last.found / last.declared - 1.0);
            }
            npv += more * signed(stream.kind);
        }
        npv
    };
    let all: Vec<f64> = (0..seen.outcomes.len()).map(absolute).collect();
    match seen.appraisal.baseline {
        Some(baseline) => all.iter().map(|npv| npv - all[baseline]).collect(),
        None => all,
    }
}

/// +1 where a stream counts for the net, -1 where against.
fn signed(kind: StreamKind) -> f64 {
    let (above, below) = side(kind);
    above - below
}
