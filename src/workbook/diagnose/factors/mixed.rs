//! Rows in which some years follow one timing and the rest another.

use std::rc::Rc;

use super::candidates::Known;
use super::law::{Law, When};
use super::reading::{Reading, Rounding, Strictness};
use super::series::Series;

/// Two timings that between them give every factor of a row.
#[derive(Clone, Debug, PartialEq)]
pub struct Mixed {
    /// The timing of most points.
    pub most: When,
    /// The other one.
    pub rest: When,
    /// Places in the series of the points that follow only the other one.
    pub others: Vec<usize>,
    /// How factors were rounded.
    pub rounding: Option<Rounding>,
}

/// The pair of timings, at most a year from the declared one, that gives every point; the pair with the declared one
/// comes first. One point alone counts only at the beginning or end of the row, where a formula of its own is common.
pub fn mixed(series: &Series, known: &Known, rounding: Option<Rounding>) -> Option<Mixed> {
    let n = series.points.len();
    let law = Law::Declared(Rc::clone(&series.curve));
    let given: Vec<(When, Vec<bool>)> = [0.0, 0.5, -0.5, 1.0, -1.0]
        .into_iter()
        .map(|later| When { later, ..known.declared })
        .map(|when| {
            let reading = Reading { law: law.clone(), kind: None, when, rounding };
            let fit = reading.fit(series, Strictness { off: n, more: 0.0 }).unwrap_or_default();
            (when, (0..n).map(|i| !fit.off.contains(&i)).collect())
        })
        .collect();
    for (i, (a, by_a)) in given.iter().enumerate() {
        for (b, by_b) in &given[i + 1..] {
            if !(0..n).all(|k| by_a[k] || by_b[k]) {
                continue;
            }
            let only = |this: &[bool]| (0..n).filter(|&k| !this[k]).collect::<Vec<usize>>();
            // Points that only the one gives are what the other lacks.
            let (only_a, only_b) = (only(by_b), only(by_a));
            let (most, rest, others) =
                if only_a.len() >= only_b.len() { (*a, *b, only_b) } else { (*b, *a, only_a) };
            let alone = others.len() == 1 && others[0] != 0 && others[0] + 1 != n;
            if !others.is_empty() && !alone && n > 2 {
                return Some(Mixed { most, rest, others, rounding });
            }
        }
    }
    None
}
