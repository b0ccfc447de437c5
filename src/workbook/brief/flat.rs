//! Net present values at flat rates, for the chart and its table.

use hence_core::{Basis, Where};

use crate::appraisal::Appraisal;
use crate::clock::base_year;
use crate::outcome::ChoiceOutcome;
use crate::ranking::{Worth, best, over};
use crate::valuation::worth_on;

/// Flat rates in steps of a quarter of a point.
const STEP: f64 = 0.0025;
const STEPS: usize = 40;

/// Every option at every flat rate, over the baseline where there is one.
pub(super) struct FlatRates {
    /// The rates.
    pub rates: Vec<f64>,
    /// One row an option; nothing where a sum does not converge.
    pub values: Vec<Vec<Option<f64>>>,
    /// The option with the highest value at every one of these rates where all have one; none where it is not the same
    /// one, or shares the place.
    pub always_best: Option<usize>,
}

impl FlatRates {
    /// Rates from 0% to 10%.
    pub fn of(appraisal: &Appraisal, outcomes: &[ChoiceOutcome]) -> Self {
        let rates: Vec<f64> = (0..=STEPS).map(|k| k as f64 * STEP).collect();
        let mut values = vec![Vec::with_capacity(rates.len()); outcomes.len()];
        let mut bests = Vec::new();
        for &rate in &rates {
            let own: Vec<Option<Worth>> =
                (0..outcomes.len()).map(|c| worth_at(appraisal, outcomes, c, rate)).collect();
            if let Some(worths) = own.iter().copied().collect::<Option<Vec<Worth>>>() {
                bests.push(best(&over(worths, appraisal.baseline)));
            }
            let base = appraisal.baseline.map(|baseline| own[baseline].map(|worth| worth.npv));
            for (row, worth) in values.iter_mut().zip(&own) {
                let npv = worth.map(|worth| worth.npv);
                row.push(match base {
                    Some(base) => npv.zip(base).map(|(npv, base)| npv - base),
                    None => npv,
                });
            }
        }
        let first = bests.first().copied().flatten();
        let always_best = first.filter(|_| bests.iter().all(|best| *best == first));
        FlatRates { rates, values, always_best }
    }
}

/// What an option is worth as it stands at a flat yearly rate.
fn worth_at(appraisal: &Appraisal, outcomes: &[ChoiceOutcome], c: usize, rate: f64) -> Option<Worth> {
    let choice = &appraisal.choices[c];
    let at = Where { base_year: base_year(&choice.base.value), length: None };
    let curve = Basis::from_rate(rate).ok()?.curve(&at).ok()?;
    worth_on(appraisal, choice, &outcomes[c], &curve).ok().filter(|worth| worth.npv.is_finite())
}
