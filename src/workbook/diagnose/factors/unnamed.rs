//! Rows of factors that no role names, where the results of an option were made with them.

use std::rc::Rc;

use super::series::{Point, Series, Source, implied_rows};
use crate::appraisal::{Covered, TargetRole};
use crate::diagnose::Seen;
use crate::diagnose::consequences::Consequences;
use crate::reading::Value;
use crate::references::{Area, SheetRange};
use crate::suggest::reads_as_factors;

/// So many rows that may be factors by their sum are looked at.
const MOST: usize = 200;

/// Rows along the years that hold factors by their heading or by their numbers, of options that name none.
///
/// A row counts where the present values of the option were made with it, or where the option shows no result at all
/// and it is the only row that is headed so: another row of factors may be there for comparison.
pub fn unnamed_rows(seen: &Seen) -> Vec<Series> {
    let implied = implied_rows(seen);
    let mut rows: Vec<Series> = Vec::new();
    for (c, choice) in seen.appraisal.choices.iter().enumerate() {
        if choice.targets.iter().any(|target| target.role == TargetRole::Factor) {
            continue;
        }
        let shown = choice.targets.iter().flat_map(|target| &target.held).any(|held| held.number().is_some());
        let candidates = seen.appraisal.coverage.iter().filter(|row| {
            let n = row.at.len() as f64;
            row.roles.is_empty() && row.total > 0.0 && row.total < 1.5 * n && along(seen, c, &row.at.hull())
        });
        let candidates: Vec<&Covered> = candidates.take(MOST).collect();
        seen.load(&candidates.iter().map(|row| row.at.hull()).collect::<Vec<_>>());
        let candidates: Vec<(&Covered, Series)> =
            candidates.into_iter().filter_map(|row| Some((row, series(seen, c, row)?))).collect();
        let headed: Vec<&(&Covered, Series)> =
            candidates.iter().filter(|(row, _)| reads_as_factors(&row.heading)).collect();
        let found = if shown {
            candidates.iter().find(|(_, row)| used(seen, c, row, &implied))
        } else {
            headed.first().copied().filter(|_| headed.len() == 1)
        };
        let Some((_, row)) = found else { continue };
        match rows.iter_mut().find(|known| known.ranges == row.ranges && known.curve == row.curve) {
            Some(known) => known.users.extend(row.users.clone()),
            None => rows.push(row.clone()),
        }
    }
    rows
}

/// Whether a row stands along the years of an option, on the sheet of the years or of a stream.
fn along(seen: &Seen, c: usize, at: &SheetRange) -> bool {
    let choice = &seen.appraisal.choices[c];
    let axis = &seen.appraisal.axes[choice.axis].at;
    let streams = choice.streams.iter().map(|stream| &stream.at);
    std::iter::once(axis).chain(streams).map(Area::hull).any(|other| {
        let (a, b) = (&at.range, &other.range);
        let across = a.first.col == b.first.col && a.last.col == b.last.col && b.rows() == 1;
        let down = a.first.row == b.first.row && a.last.row == b.last.row && b.cols() == 1;
        at.sheet == other.sheet && at.range.len() == other.range.len() && (across || down)
    })
}

/// The row as a series, where it looks like factors: it starts near 1 and ends lower.
fn series(seen: &Seen, c: usize, row: &Covered) -> Option<Series> {
    let grid = seen.grid(&row.at.hull())?;
    let outcome = &seen.outcomes[c];
    let mut points = Vec::new();
    for (index, (_, cell)) in grid.iter().enumerate() {
        let Value::Number(found) = cell.value else { continue };
        let (t, declared) = (*outcome.offsets.get(index)?, outcome.factors[index]);
        points.push(Point { range: 0, index, t, declared, found, slack: 0.0 });
    }
    let (first, last) = (points.first()?, points.last()?);
    let near = (0.5..=1.2).contains(&(first.found / first.declared));
    let falls = last.found < first.found && points.iter().all(|p| p.found > 0.0 && p.found < 1.5);
    (points.len() > 2 && near && falls).then(|| Series {
        source: Source::Factors,
        ranges: vec![row.at.hull()],
        called: row.heading.clone(),
        users: vec![(c, None)],
        curve: Rc::new(outcome.curve.clone()),
        timing: outcome.timing,
        points,
        agrees: false,
    })
}

/// Whether the results of the option follow from the row: its present values by year, or its totals. Where they follow
/// from the declared factors as well, the row tells nothing.
fn used(seen: &Seen, c: usize, row: &Series, implied: &[Series]) -> bool {
    let of_option: Vec<&Series> = implied.iter().filter(|other| other.users[0].0 == c).collect();
    let at = |index: usize| row.points.iter().find(|p| p.index == index).map(|p| p.found);
    let by_year = |other: &&Series| {
        other.points.iter().all(|p| {
            at(p.index).is_some_and(|factor| (p.found - factor).abs() <= Series::tolerance(p, factor))
        })
    };
    if !of_option.is_empty() {
        return of_option.iter().all(by_year);
    }
    let exactly = |rows: &[Series]| Consequences::of(seen, rows).gives(c, true).is_some();
    exactly(std::slice::from_ref(row)) && !exactly(&[])
}
