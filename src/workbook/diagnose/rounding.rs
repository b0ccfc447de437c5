//! Results that were rounded before they were kept: the right ones, rounded, are no mistake.

use crate::appraisal::{Held, Target, TargetRole};
use crate::patch::Cached;

/// The decimals that are tried, the fewest first.
const DECIMALS: std::ops::RangeInclusive<i32> = -3..=6;
/// The largest unit that says anything, as a share of the largest result.
const COARSEST: f64 = 0.1;

/// A power of ten that results were rounded to.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Unit(i32);

impl Unit {
    /// The unit to which the results of a target were rounded: that of four fifths of them at least, so that a wrong one
    /// stands out among the others. Factors and rates are inputs of all else, and none of theirs is looked for.
    pub(super) fn of(target: &Target, expected: &[Cached]) -> Option<Unit> {
        if matches!(target.role, TargetRole::Factor | TargetRole::StreamFactor(_) | TargetRole::Rates) {
            return None;
        }
        let number = |(held, expected): (&Held, &Cached)| match expected {
            Cached::Number(x) => held.number().map(|held| (held, *x)),
            _ => None,
        };
        let told = |(held, x): &(f64, f64)| *held != 0.0 || *x != 0.0;
        let numbers: Vec<(f64, f64)> =
            target.held.iter().zip(expected).filter_map(number).filter(told).collect();
        let largest = numbers.iter().map(|(_, x)| x.abs()).fold(0.0, f64::max);
        let coarsest = COARSEST * largest;
        let mut units = DECIMALS.map(Unit).filter(|unit| 2.0 * unit.half() <= coarsest);
        units.find(|unit| {
            let rounded = numbers.iter().filter(|(held, x)| unit.gives(*held, *x)).count();
            rounded > 0 && 5 * rounded >= 4 * numbers.len()
        })
    }

    /// Half of it.
    pub(super) fn half(&self) -> f64 {
        let power = 10f64.powi(self.0.abs());
        if self.0 < 0 { 0.5 * power } else { 0.5 / power }
    }

    /// Whether a number is what another one rounds to.
    pub(super) fn gives(&self, held: f64, x: f64) -> bool {
        let power = 10f64.powi(self.0.abs());
        let count = if self.0 < 0 { held / power } else { held * power };
        let whole = (count - count.round()).abs() <= 4.0 * f64::EPSILON * count.abs();
        whole && (held - x).abs() <= self.half() * (1.0 + 1e-9)
    }
}
