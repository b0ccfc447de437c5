//! Where another option becomes the best, as one parameter moves.

use hence_core::Parameter;

use super::Valued;
use super::search::{Entry, Moved, worths_at};
use crate::ranking::{Worth, level};

/// A value of a parameter at which other options become the best.
#[derive(Clone, Debug, PartialEq)]
pub struct Change {
    /// What moves.
    pub parameter: Parameter,
    /// The value.
    pub at: f64,
    /// The best below it: several where they are equal.
    pub from: Vec<usize>,
    /// The best above it.
    pub to: Vec<usize>,
}

/// Where in a stretch of values the options are valued, the middle first: a line states less than the search covers.
const PLACES: [f64; 9] = [0.5, 0.25, 0.75, 0.1, 0.9, 0.01, 0.99, 0.001, 0.999];

/// Where the best option changes: between the values at which any two swap, their order is fixed.
pub(super) fn best_changes(valued: &Valued, entries: &[Entry], parameter: Parameter) -> Vec<Change> {
    let moved = Moved::Parameter(parameter);
    let pairs: Vec<&Entry> =
        entries.iter().filter(|entry| entry.moved == moved && entry.against.is_some()).collect();
    let (mut values, mut low, mut high) = (Vec::new(), parameter.interval().0, parameter.interval().1);
    for entry in &pairs {
        values.extend(entry.values.iter().copied());
        (low, high) = (low.max(entry.interval.0), high.min(entry.interval.1));
    }
    values.retain(|x| *x > low && *x < high);
    values.sort_by(f64::total_cmp);
    values.dedup();
    let ends: Vec<f64> = [low].into_iter().chain(values.iter().copied()).chain([high]).collect();
    let found: Vec<Option<Anchor>> =
        ends.windows(2).map(|pair| valued_in(valued, parameter, (pair[0], pair[1]))).collect();
    let best = |k: usize| match &found[k] {
        Some(anchor) => Some(sorted(level(&anchor.worths))),
        // No line states these values: the order follows from the nearest ones that can be stated.
        None => {
            let known = (0..found.len()).filter(|other| found[*other].is_some());
            let nearest = known.min_by_key(|other| other.abs_diff(k))?;
            let x = 0.5 * (ends[k] + ends[k + 1]);
            found[nearest].as_ref().and_then(|anchor| anchor.level_at(x, &pairs))
        }
    };
    let change = |(i, &at): (usize, &f64)| match (best(i), best(i + 1)) {
        (Some(from), Some(to)) if from != to => Some(Change { parameter, at, from, to }),
        _ => None,
    };
    values.iter().enumerate().filter_map(change).collect()
}

fn sorted(mut options: Vec<usize>) -> Vec<usize> {
    options.sort_unstable();
    options
}

/// What the options are worth at one value.
struct Anchor {
    x: f64,
    worths: Vec<Worth>,
}

/// The options at a value between two, where any curve has one.
fn valued_in(valued: &Valued, parameter: Parameter, (low, high): (f64, f64)) -> Option<Anchor> {
    PLACES.iter().find_map(|place| {
        let x = low + place * (high - low);
        Some(Anchor { x, worths: worths_at(valued, &|spec| parameter.at(spec, x))? })
    })
}

impl Anchor {
    /// The best options at another value: of two, the better one changes at every value between at which they swap.
    fn level_at(&self, x: f64, pairs: &[&Entry]) -> Option<Vec<usize>> {
        let (low, high) = (self.x.min(x), self.x.max(x));
        let beats = |i: usize, j: usize| {
            let pair = pairs.iter().find(|entry| entry.option == i && entry.against == Some(j))?;
            if pair.unresolved.iter().any(|(from, to)| *from < high && *to > low) {
                return None;
            }
            let swaps = pair.values.iter().filter(|value| **value > low && **value < high).count();
            let (own, other) = (self.worths[i], self.worths[j]);
            Some(if swaps % 2 == 0 { own.beats(other) } else { other.beats(own) })
        };
        let mut best = Vec::new();
        for i in 0..self.worths.len() {
            let mut beaten = false;
            for j in (0..self.worths.len()).filter(|j| *j != i) {
                beaten |= beats(j, i)?;
            }
            if !beaten {
                best.push(i);
            }
        }
        Some(best)
    }
}
