//! Net present values at flat rates, for the chart and its table.

use hence_core::{Basis, Where};

use crate::appraisal::Appraisal;
use crate::clock::base_year;
use crate::outcome::ChoiceOutcome;
use crate::valuation::npv_on;

/// Flat rates in steps of a quarter of a point.
const STEP: f64 = 0.0025;
const STEPS: usize = 40;

/// Every option at every flat rate, over the baseline where there is one.
pub(super) struct FlatRates {
    /// The rates.
    pub rates: Vec<f64>,
    /// One row an option; nothing where a sum does not converge.
    pub values: Vec<Vec<Option<f64>>>,
}

impl FlatRates {
    /// Rates from 0% to 10%.
    pub fn of(appraisal: &Appraisal, outcomes: &[ChoiceOutcome]) -> Self {
        let rates: Vec<f64> = (0..=STEPS).map(|k| k as f64 * STEP).collect();
        let own = |c: usize| rates.iter().map(|&rate| npv_at(appraisal, outcomes, c, rate)).collect();
        let mut values: Vec<Vec<Option<f64>>> = (0..outcomes.len()).map(own).collect();
        if let Some(baseline) = appraisal.baseline {
            let base = values[baseline].clone();
            for row in &mut values {
                for (value, base) in row.iter_mut().zip(&base) {
                    *value = value.zip(*base).map(|(value, base)| value - base);
                }
            }
        }
        FlatRates { rates, values }
    }

    /// The option with the highest value at every one of these rates where all have one; none where it is not the same
    /// one, or shares the place.
    pub fn always_best(&self) -> Option<usize> {
        let mut found = None;
        for k in 0..self.rates.len() {
            let Some(values) = self.values.iter().map(|row| row[k]).collect::<Option<Vec<f64>>>() else {
                continue;
            };
            let most = values.iter().copied().fold(f64::NEG_INFINITY, f64::max);
            let mut first = (0..values.len()).filter(|&i| values[i] == most);
            match (first.next(), first.next(), found) {
                (Some(i), None, None) => found = Some(i),
                (Some(i), None, Some(j)) if i == j => {}
                _ => return None,
            }
        }
        found
    }
}

/// Net present value of an option as it stands at a flat yearly rate.
fn npv_at(appraisal: &Appraisal, outcomes: &[ChoiceOutcome], c: usize, rate: f64) -> Option<f64> {
    let choice = &appraisal.choices[c];
    let at = Where { base_year: base_year(&choice.base.value), length: None };
    let curve = Basis::from_rate(rate).ok()?.curve(&at).ok()?;
    npv_on(appraisal, choice, &outcomes[c], &curve).ok().filter(|npv| npv.is_finite())
}
