//! The workbook's own yearly rates, as the factors that they would make.

use std::rc::Rc;

use super::law::{Bands, Law, When};
use super::series::{Point, Series, Source};
use crate::appraisal::{Held, TargetRole};
use crate::diagnose::{Seen, Standing};

/// Every whole row of yearly rates. The rate of a year holds over the year that ends at its offset.
pub fn rates_rows(seen: &Seen) -> Vec<Series> {
    let mut rows: Vec<Series> = Vec::new();
    for (c, choice) in seen.appraisal.choices.iter().enumerate() {
        let outcome = &seen.outcomes[c];
        for target in choice.targets.iter().filter(|target| target.role == TargetRole::Rates) {
            let held: Option<Vec<f64>> = target.held.iter().map(Held::number).collect();
            let Some(rates) = held.filter(|_| outcome.forward.iter().all(Option::is_some)) else { continue };
            if let Some(row) = rows
                .iter_mut()
                .find(|row| row.ranges[0] == target.at.hull() && row.curve.as_ref() == &outcome.curve)
            {
                row.users.push((c, None));
                continue;
            }
            let edges = outcome.offsets.iter().map(|t| t.ceil()).collect();
            let law = Law::Bands(Bands { edges, rates, open: true });
            let when = When::declared(outcome.timing);
            let point = |(index, (t, declared)): (usize, (&f64, &f64))| {
                let found = law.timed(*t, when).unwrap_or(*declared);
                Point { range: 0, index, t: *t, declared: *declared, found, slack: 0.0 }
            };
            rows.push(Series {
                source: Source::Rates,
                ranges: vec![target.at.hull()],
                called: target.from.clone(),
                users: vec![(c, None)],
                curve: Rc::new(outcome.curve.clone()),
                timing: outcome.timing,
                points: outcome.offsets.iter().zip(&outcome.factors).enumerate().map(point).collect(),
                agrees: false,
            });
        }
    }
    rows
}

/// Places of the rates that are not as declared.
pub fn rates_off(seen: &Seen, row: &Series) -> Vec<usize> {
    let at = &row.ranges[0];
    let off = seen.compared.iter().filter(|cell| {
        cell.standing == Standing::Differs
            && at.sheet == cell.at.sheet
            && at.range.contains(cell.at.range.first)
            && seen.target(cell).role == TargetRole::Rates
    });
    let mut off: Vec<usize> = off.map(|cell| cell.index).collect();
    off.sort_unstable();
    off.dedup();
    off
}

/// Whether a row of factors was made with the rates of another row.
pub fn makes(rates: &Series, row: &Series) -> bool {
    let same = |p: &Point| {
        let made = rates.points.iter().find(|made| made.index == p.index);
        made.is_some_and(|made| (p.found - made.found).abs() <= Series::tolerance(p, made.found))
    };
    row.users.iter().all(|(c, _)| rates.users.iter().any(|(own, _)| own == c)) && row.points.iter().all(same)
}
