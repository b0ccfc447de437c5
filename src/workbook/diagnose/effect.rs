//! What a mistake does to the net present values of the options, and to their ranking.

use crate::appraisal::{Appraisal, StreamKind};
use crate::decide::Rule;

/// What a mistake adds to the net present value of the option that it changes most, and the ranking where it changes.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Effect {
    /// With the mistake less without it.
    pub npv: Option<f64>,
    /// The ranking in words, where the mistake changes it and the net present values tell.
    pub ranking: Option<String>,
}

impl Effect {
    /// From the net present value of every option without and with the mistake.
    pub fn of(appraisal: &Appraisal, right: &[f64], wrong: &[f64]) -> Self {
        let changes = right.iter().zip(wrong).map(|(right, wrong)| wrong - right);
        let npv = changes.max_by(|a, b| a.abs().total_cmp(&b.abs()));
        let (before, after) = (order(appraisal, right), order(appraisal, wrong));
        let names = |order: &[usize]| {
            let names = order.iter().map(|&c| appraisal.choices[c].name.as_str());
            names.collect::<Vec<_>>().join(", ")
        };
        let ranking = (follows_npv(appraisal) && before != after).then(|| {
            format!("with it the options rank {}; under the declared basis {}", names(&after), names(&before))
        });
        Effect { npv, ranking }
    }
}

/// Whether the declared rule ranks options as their net present values do: always where it is least cost and nothing but
/// costs is valued. What a mistake does to ratios, or to costs beside benefits, its effect on the net does not tell.
fn follows_npv(appraisal: &Appraisal) -> bool {
    let mut streams = appraisal.choices.iter().flat_map(|choice| &choice.streams);
    match appraisal.decide {
        Rule::Npv => true,
        Rule::Ratio => false,
        Rule::LeastCost => streams.all(|stream| stream.kind == StreamKind::Cost),
    }
}

/// The options that have a rank, from the highest net present value to the lowest; equal ones in their own order.
fn order(appraisal: &Appraisal, npvs: &[f64]) -> Vec<usize> {
    let ranked = |c: &usize| appraisal.decide != Rule::LeastCost || appraisal.baseline != Some(*c);
    let mut order: Vec<usize> = (0..npvs.len()).filter(ranked).collect();
    order.sort_by(|&a, &b| npvs[b].total_cmp(&npvs[a]));
    order
}
