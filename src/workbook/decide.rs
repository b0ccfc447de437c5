//! The rule by which options are ranked, and how an option stands under a basis.

use serde::{Deserialize, Serialize};

use crate::outcome::ChoiceOutcome;
use crate::ranking::{Worth, ranks};
use crate::tolerance::RELATIVE;

/// What ranks the options, from the role `decide`.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Rule {
    /// The highest net present value first.
    #[default]
    Npv,
    /// The highest benefit-cost ratio first; an option without one has no rank.
    Ratio,
    /// The lowest present value of costs first, for options that serve the same end; the baseline has no rank.
    LeastCost,
}

impl Rule {
    /// Reads `npv`, `ratio` or `least cost`, or the names in full.
    pub fn parse(text: &str) -> Option<Self> {
        let words: Vec<String> = text.split(|c: char| !c.is_alphanumeric()).map(str::to_lowercase).collect();
        let words: Vec<&str> = words.iter().map(String::as_str).filter(|word| !word.is_empty()).collect();
        match words.as_slice() {
            ["npv"] | ["net", "present", "value"] => Some(Rule::Npv),
            ["ratio"] | ["benefit", "cost", "ratio"] | ["bcr"] => Some(Rule::Ratio),
            ["least", "cost"] | ["lowest", "cost"] => Some(Rule::LeastCost),
            _ => None,
        }
    }

    /// In words.
    pub fn words(self) -> &'static str {
        match self {
            Rule::Npv => "net present value",
            Rule::Ratio => "benefit-cost ratio",
            Rule::LeastCost => "least cost",
        }
    }

    /// How every option stands, over the baseline where there is one.
    pub(crate) fn stands(self, outcomes: &[ChoiceOutcome], baseline: Option<usize>) -> Vec<Stand> {
        let ranks = match self {
            Rule::Npv => ranks(&Worth::of_outcomes(outcomes, baseline)).into_iter().map(Some).collect(),
            Rule::Ratio => {
                highest_first(&outcomes.iter().map(|outcome| outcome.totals().ratio).collect::<Vec<_>>())
            }
            Rule::LeastCost => {
                let costs = outcomes.iter().enumerate();
                let costs = costs.map(|(i, own)| (baseline != Some(i)).then_some(-own.absolute.pv_costs));
                highest_first(&costs.collect::<Vec<_>>())
            }
        };
        let stand = |(outcome, rank): (&ChoiceOutcome, Option<usize>)| {
            let totals = outcome.totals();
            Stand { npv: totals.npv, ratio: totals.ratio, pv_costs: outcome.absolute.pv_costs, rank }
        };
        outcomes.iter().zip(ranks).map(stand).collect()
    }
}

/// The rank of each number, 1 for the highest; what differs by rounding alone shares a rank.
fn highest_first(values: &[Option<f64>]) -> Vec<Option<usize>> {
    let beats = |a: f64, b: f64| a - b > RELATIVE * a.abs().max(b.abs());
    let rank =
        |own: &Option<f64>| own.map(|own| 1 + values.iter().flatten().filter(|x| beats(**x, own)).count());
    values.iter().map(rank).collect()
}

/// How an option stands under a basis.
#[derive(Clone, Copy, Debug, Default, PartialEq, Serialize, Deserialize)]
pub struct Stand {
    /// Net present value, over the baseline where there is one.
    pub npv: f64,
    /// Benefit-cost ratio, where it has a meaning.
    pub ratio: Option<f64>,
    /// Present value of its own costs.
    pub pv_costs: f64,
    /// Its rank by the declared rule; none where the rule gives it none.
    pub rank: Option<usize>,
}

/// An option from what its workbook held to how it stands now, step by step.
#[derive(Clone, Copy, Debug, Default, PartialEq, Serialize, Deserialize)]
pub struct Bridge {
    /// The net present value that its cell held; none where it was blank, awaits recalculation or has no cell.
    pub held: Option<f64>,
    /// Whether that is not what its own basis gives: off by more than a millionth, and by more than half of the last digit
    /// that the cell shows.
    pub wrong: bool,
    /// On the basis, base and prices that the workbook itself declares; none where it declares none.
    pub declared: Option<Stand>,
    /// On its own basis at the base and in the prices asked for.
    pub moved: Option<Stand>,
    /// As asked for.
    pub now: Stand,
}

#[cfg(test)]
mod tests {
    use super::{Rule, highest_first};

    #[test]
    fn rules_are_read_in_words() {
        assert_eq!(Rule::parse("NPV"), Some(Rule::Npv));
        assert_eq!(Rule::parse("Benefit-cost ratio"), Some(Rule::Ratio));
        assert_eq!(Rule::parse(" least  cost "), Some(Rule::LeastCost));
        assert_eq!(Rule::parse("the cheapest"), None);
    }

    #[test]
    fn what_has_no_number_has_no_rank_and_ties_share_one() {
        let values = [Some(1.5), None, Some(2.5), Some(1.5 + 1e-12), Some(-1.0)];
        assert_eq!(highest_first(&values), [Some(2), None, Some(1), Some(2), Some(4)]);
    }
}
