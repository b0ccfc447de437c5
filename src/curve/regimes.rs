//! Growth that switches between states: a Markov chain with its own mean and spread of growth in each state.

use super::checks;
use super::ramsey::Ramsey;
use super::years::DOUBLINGS;
use crate::dd::{Dd, exp2_m1, log2};
use crate::{Error, ErrorKind, GrowthState, Result};

/// The most states.
const MOST_STATES: usize = 10;

/// The most years until the rates have settled.
const MOST_YEARS: u32 = 50_000;

/// How far apart rates that have settled may be, as a share.
const SETTLED: f64 = 1e-22;

/// How far the chances of a row may miss a sum of 1.
const TOLERANCE: f64 = 1e-12;

/// D(n) = exp(-rho n) pi' (P M)^n 1, M = diag(exp(-eta m_j + eta^2 s_j^2/2)).
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Regimes {
    rho: Dd,
    /// The chances at the base of the states that can be reached at all.
    start: Vec<Dd>,
    /// (P M)^1, ^2, ^4, ^8, ...
    doubled: Vec<Matrix>,
    bounded: bool,
}

/// A square matrix times 2^exponent, row by row, its largest number from 1 to 2. Nothing in it is negative, so that
/// products lose no digits.
#[derive(Clone, Debug, PartialEq)]
struct Matrix {
    numbers: Vec<Dd>,
    exponent: f64,
}

impl Regimes {
    pub(super) fn new(
        rule: Ramsey,
        states: &[GrowthState],
        transition: &[Vec<f64>],
        start: &[f64],
    ) -> Result<Regimes> {
        check_sizes(states, transition, start)?;
        let mut logs = Vec::with_capacity(states.len());
        for (index, state) in states.iter().enumerate() {
            let checked = checks::growth(state.mean).and_then(|()| checks::sd(state.sd));
            checked.map_err(|e| e.with_index(index))?;
            logs.push(rule.log_factor(state.mean, state.sd));
        }
        let start = chances("start", start)?;
        let mut rows = Vec::with_capacity(states.len());
        for (index, row) in transition.iter().enumerate() {
            rows.push(chances("transition", row).map_err(|e| e.with_index(index))?);
        }
        let kept = reached(&start, &rows);
        let factors: Vec<Dd> = logs.iter().map(|&log| exp2_m1(log * Dd::LOG2_E) + Dd::ONE).collect();
        let numbers = kept.iter().flat_map(|&i| kept.iter().map(move |&j| (i, j)));
        let one = scaled(numbers.map(|(i, j)| rows[i][j] * factors[j]).collect(), 0.0);
        let mut doubled = vec![one];
        while doubled.len() < DOUBLINGS {
            doubled.push(doubled[doubled.len() - 1].squared(kept.len()));
        }
        let rho = rule.rho_exactly();
        let bounded = kept.iter().all(|&j| logs[j].hi <= rho.hi);
        let start = kept.iter().map(|&i| start[i]).collect();
        Ok(Regimes { rho, start, doubled, bounded })
    }

    /// log2 D(n).
    pub(super) fn log2(&self, n: u64) -> Dd {
        let mut row = Matrix { numbers: self.start.clone(), exponent: 0.0 };
        for (power, matrix) in self.doubled.iter().enumerate() {
            if (n >> power) & 1 == 1 {
                row = row.times(matrix, self.start.len());
            }
        }
        let sum = row.numbers.iter().fold(Dd::ZERO, |sum, &number| sum + number);
        log2(sum) + Dd::of(row.exponent) - self.rho * Dd::LOG2_E * n as f64
    }

    /// A year after which every year has one continuous rate, and that rate; none where the years never come so near to
    /// one, as where states take turns for ever.
    ///
    /// D(n+1)/D(n) is a mean over the states of the ratios of (P M)^(n+1) 1 to (P M)^n 1, and in every later year a mean of
    /// the same ratios with other weights: where they are all alike, the rate is settled for good (after L. Collatz,
    /// Einschliessungssatz fuer die charakteristischen Zahlen von Matrizen, Mathematische Zeitschrift 48, 1942).
    pub(super) fn settled(&self) -> Option<(f64, f64)> {
        let size = self.start.len();
        let year = &self.doubled[0];
        let mut weights = vec![Dd::ONE; size];
        for n in 1..=MOST_YEARS {
            let next: Vec<Dd> = year
                .numbers
                .chunks(size)
                .map(|row| row.iter().zip(&weights).fold(Dd::ZERO, |sum, (&a, &b)| sum + a * b))
                .collect();
            let ratios = || next.iter().zip(&weights).map(|(&next, &before)| next / before);
            let lowest = ratios().map(|ratio| ratio.hi).fold(f64::INFINITY, f64::min);
            let first = ratios().next()?;
            if lowest.is_nan() || lowest <= 0.0 {
                return None;
            }
            if ratios().all(|ratio| ((ratio - first) / first).hi.abs() <= SETTLED) {
                let rate = self.rho - (log2(first) + Dd::of(year.exponent)) * Dd::LN2;
                return Some((f64::from(n), rate.hi));
            }
            weights = scaled(next, 0.0).numbers;
        }
        None
    }

    /// Whether no state's factor for a year is above 1.
    pub(super) fn bounded(&self) -> bool {
        self.bounded
    }
}

impl Matrix {
    fn squared(&self, size: usize) -> Matrix {
        self.times(self, size)
    }

    /// The product of a matrix, or of one row, and a square matrix of that size.
    fn times(&self, other: &Matrix, size: usize) -> Matrix {
        let mut numbers = Vec::with_capacity(self.numbers.len());
        for row in self.numbers.chunks(size) {
            for column in 0..size {
                let products = row.iter().enumerate().map(|(k, &x)| x * other.numbers[k * size + column]);
                numbers.push(products.fold(Dd::ZERO, |sum, product| sum + product));
            }
        }
        scaled(numbers, self.exponent + other.exponent)
    }
}

/// Numbers times 2^exponent, with powers of two moved between them.
fn scaled(numbers: Vec<Dd>, exponent: f64) -> Matrix {
    let largest = numbers.iter().fold(f64::MIN_POSITIVE, |largest, number| largest.max(number.hi));
    let shift = (largest.to_bits() >> 52) as i64 - 1023;
    let numbers = numbers.into_iter().map(|number| number.scaled(-shift)).collect();
    Matrix { numbers, exponent: exponent + shift as f64 }
}

/// The states that have a chance at the base or can be passed to, so that a state nobody enters cannot swamp the rest.
fn reached(start: &[Dd], rows: &[Vec<Dd>]) -> Vec<usize> {
    let mut known: Vec<bool> = start.iter().map(|chance| chance.hi > 0.0).collect();
    for _ in 0..start.len() {
        for (from, row) in rows.iter().enumerate() {
            if known[from] {
                for (to, chance) in row.iter().enumerate() {
                    known[to] |= chance.hi > 0.0;
                }
            }
        }
    }
    (0..start.len()).filter(|&state| known[state]).collect()
}

fn check_sizes(states: &[GrowthState], transition: &[Vec<f64>], start: &[f64]) -> Result<()> {
    let size = states.len();
    let refuse = |argument, message: String| Err(Error::new(ErrorKind::Shape, argument, message));
    if size == 0 || size > MOST_STATES {
        return refuse("states", format!("there are {size} states, allowed 1 to {MOST_STATES}"));
    }
    if start.len() != size {
        return refuse("start", format!("there are {} chances for {size} states", start.len()));
    }
    if transition.len() != size {
        return refuse("transition", format!("there are {} rows for {size} states", transition.len()));
    }
    match transition.iter().position(|row| row.len() != size) {
        Some(index) => refuse(
            "transition",
            format!("row {} has {} chances for {size} states", index + 1, transition[index].len()),
        )
        .map_err(|e| e.with_index(index)),
        None => Ok(()),
    }
}

/// Chances that sum to 1, divided by their sum.
fn chances(argument: &'static str, given: &[f64]) -> Result<Vec<Dd>> {
    for &chance in given {
        checks::finite(argument, chance)?;
        if chance < 0.0 {
            let message = format!("a chance is {chance}, allowed 0 to 1");
            return Err(Error::new(ErrorKind::Weights, argument, message));
        }
    }
    let total = given.iter().fold(Dd::ZERO, |sum, &chance| sum + Dd::of(chance));
    if ((total - Dd::ONE).hi).abs() > TOLERANCE {
        let message = format!("the chances sum to {}, not 1", total.hi);
        return Err(Error::new(ErrorKind::Weights, argument, message));
    }
    Ok(given.iter().map(|&chance| Dd::of(chance) / total).collect())
}
