//! Curves of growth that are too rich for a rate line: by year, persistent from a stated start, in states.
use crate::{Band, Compounding, Edge, GrowthState, Persistence, Spec, Where};
use serde::Deserialize;

#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct GrowthByYear {
    first: i32,
    growth: Vec<f64>,
    after: Option<f64>,
    preference: f64,
    #[serde(default)]
    hazard: f64,
    elasticity: f64,
    #[serde(default)]
    exact: bool,
}

#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct PersistentGrowth {
    preference: f64,
    #[serde(default)]
    hazard: f64,
    elasticity: f64,
    mean: f64,
    sd: f64,
    persistence: f64,
    #[serde(default)]
    start: f64,
}

#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub(super) struct Regimes {
    preference: f64,
    #[serde(default)]
    hazard: f64,
    elasticity: f64,
    states: Vec<State>,
    transition: Vec<Vec<f64>>,
    start: Vec<f64>,
}

#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
struct State {
    mean: f64,
    sd: f64,
}

impl GrowthByYear {
    pub(super) fn spec(&self) -> std::result::Result<Spec, String> {
        let last = i64::from(self.first) + self.growth.len() as i64 - 1;
        let calendar = (1000..=9999).contains(&self.first) && last <= 9999;
        if !calendar && (self.first != 1 || last >= 1000) {
            let message = "allowed 1 (with growth to year 999 at most) or a calendar year";
            return Err(format!("first is {}, {message}", self.first));
        }
        if self.growth.is_empty() {
            return Err("growth is empty".into());
        }
        let numbers = [self.preference, self.hazard, self.elasticity];
        let all = self.growth.iter().chain(&self.after).chain(&numbers);
        if all.clone().any(|number| !number.is_finite()) {
            return Err("every number must be finite".into());
        }
        let edge = |year: i32| if calendar { Edge::Year(year) } else { Edge::Offset(f64::from(year)) };
        let years = self.growth.iter().zip(self.first..);
        let mut growth: Vec<Band> =
            years.map(|(&value, year)| Band { value, to: Some(edge(year)) }).collect();
        growth.extend(self.after.map(|value| Band { value, to: None }));
        Ok(Spec::Ramsey {
            preference: self.preference,
            hazard: self.hazard,
            elasticity: self.elasticity,
            growth,
            exact: self.exact,
            compounding: Compounding::Yearly,
        })
    }
}

impl PersistentGrowth {
    pub(super) fn spec(&self) -> std::result::Result<Spec, String> {
        checked(Spec::UncertainGrowth {
            preference: self.preference,
            hazard: self.hazard,
            elasticity: self.elasticity,
            mean: self.mean,
            sd: self.sd,
            log: true,
            // Adding zero turns -0 into 0, which a line can state.
            persistence: Some(Persistence { phi: self.persistence, start: self.start + 0.0 }),
            compounding: Compounding::Continuous,
        })
    }
}

impl Regimes {
    pub(super) fn spec(&self) -> std::result::Result<Spec, String> {
        checked(Spec::GrowthRegimes {
            preference: self.preference,
            hazard: self.hazard,
            elasticity: self.elasticity,
            states: self.states.iter().map(|state| GrowthState { mean: state.mean, sd: state.sd }).collect(),
            transition: self.transition.clone(),
            start: self.start.clone(),
        })
    }
}

/// A curve whose parameters are all in range; it needs neither base year nor length.
fn checked(spec: Spec) -> std::result::Result<Spec, String> {
    spec.curve(&Where::default()).map_err(|error| {
        let of = match (error.argument(), error.index()) {
            ("transition", Some(row)) => format!("row {} of transition: ", row + 1),
            ("start", _) => "start: ".to_string(),
            (_, Some(state)) => format!("state {}: ", state + 1),
            _ => String::new(),
        };
        format!("{of}{}", error.message())
    })?;
    Ok(spec)
}
