//! The second route under growth that persists or switches: year by year, with columns of its own in the yearly grid.

use hence_core::{GrowthState, Persistence};

/// Log growth that returns to its mean by a share each year.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Persistent {
    /// Pure time preference and hazard together.
    pub rho: f64,
    /// Elasticity of marginal utility.
    pub eta: f64,
    /// Mean of log growth.
    pub mean: f64,
    /// Standard deviation of the yearly shock.
    pub sd: f64,
    /// phi and y_0.
    pub persistence: Persistence,
}

/// Growth that switches between states.
#[derive(Clone, Debug, PartialEq)]
pub struct Regimes {
    /// Pure time preference and hazard together.
    pub rho: f64,
    /// Elasticity of marginal utility.
    pub eta: f64,
    /// Log growth in each state.
    pub states: Vec<GrowthState>,
    /// By state, the chances of passing into it from each state.
    pub into: Vec<Vec<f64>>,
    /// The chances of each state at the base.
    pub start: Vec<f64>,
}

/// What stands in the yearly grid beside rates and chain, one column each, from year 0.
pub(super) type Columns = Vec<Vec<f64>>;

impl Persistent {
    /// The expected departure of growth from its mean, and what a shock has moved growth by in n years.
    pub(super) fn columns(&self, years: usize) -> Columns {
        let Persistence { phi, start } = self.persistence;
        let (mut departure, mut weight) = (vec![start], vec![0.0]);
        for n in 0..years {
            departure.push(phi * departure[n]);
            weight.push(1.0 + phi * weight[n]);
        }
        vec![departure, weight]
    }

    /// The yearly rate of year n.
    pub(super) fn rate(&self, columns: &Columns, n: usize) -> f64 {
        let spread = self.eta * self.sd * columns[1][n];
        (self.rho + self.eta * (self.mean + columns[0][n]) - spread * spread / 2.0).exp() - 1.0
    }

    /// The inputs by name, a row each.
    pub(super) fn inputs(&self) -> [(&'static str, f64); 6] {
        let Persistence { phi, start } = self.persistence;
        [
            ("time preference and hazard", self.rho),
            ("elasticity", self.eta),
            ("mean of log growth", self.mean),
            ("standard deviation of the yearly shock", self.sd),
            ("persistence", phi),
            ("departure of growth at the base", start),
        ]
    }

    /// A column's formula in a year: `inputs` are the cells above, `before` the column's cell of the year before.
    pub(super) fn column(column: usize, year: u32, inputs: &[String], before: &str) -> String {
        match (column, year) {
            (0, 0) => inputs[5].clone(),
            (0, _) => format!("{}*{before}", inputs[4]),
            (_, 0) => "0".to_owned(),
            _ => format!("1+{}*{before}", inputs[4]),
        }
    }

    /// The formula of a year's rate, `row` being its cells in the columns.
    pub(super) fn rate_formula(inputs: &[String], row: &[String]) -> String {
        let [rho, eta, mean, sd, ..] = inputs else { return String::new() };
        format!("EXP({rho}+{eta}*({mean}+{})-({eta}*{sd}*{})^2/2)-1", row[0], row[1])
    }
}

impl Regimes {
    /// By state, the weight of a unit and the chance to be there, year by year, before preference and hazard.
    pub(super) fn columns(&self, years: usize) -> Columns {
        let mut columns: Columns = self.start.iter().map(|&chance| vec![chance]).collect();
        for n in 0..years {
            let row: Vec<f64> = columns.iter().map(|column| column[n]).collect();
            for (j, column) in columns.iter_mut().enumerate() {
                let passed: f64 = row.iter().zip(&self.into[j]).map(|(a, b)| a * b).sum();
                column.push(passed * self.weight(j));
            }
        }
        columns
    }

    fn weight(&self, j: usize) -> f64 {
        let state = self.states[j];
        let spread = self.eta * state.sd;
        (spread * spread / 2.0 - self.eta * state.mean).exp()
    }

    /// The yearly rate of year n.
    pub(super) fn rate(&self, columns: &Columns, n: usize) -> f64 {
        let sum = |n: usize| columns.iter().map(|column| column[n]).sum::<f64>();
        self.rho.exp() * sum(n - 1) / sum(n) - 1.0
    }

    /// A state's formula in a year. `eta` is the cell of the elasticity, `inputs` those of the state: mean, standard
    /// deviation, chance at the base, then the range of the chances of passing into it; `before` is the range of all
    /// states in the year before.
    pub(super) fn column(year: u32, eta: &str, inputs: &[String], before: &str) -> String {
        let [mean, sd, start, into] = inputs else { return String::new() };
        if year == 0 {
            return start.clone();
        }
        format!("SUMPRODUCT({before},{into})*EXP(({eta}*{sd})^2/2-{eta}*{mean})")
    }

    /// The formula of a year's rate from the states of the year before and of its own.
    pub(super) fn rate_formula(rho: &str, before: &str, now: &str) -> String {
        format!("EXP({rho})*SUM({before})/SUM({now})-1")
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn persistent_growth_by_hand() {
        // Growth 5% below its mean at the base, half of that left each year; shocks of 3%.
        let growth = Persistent {
            rho: 0.01,
            eta: 2.0,
            mean: 0.02,
            sd: 0.03,
            persistence: Persistence { phi: 0.5, start: -0.05 },
        };
        let columns = growth.columns(2);
        assert_eq!(columns, vec![vec![-0.05, -0.025, -0.0125], vec![0.0, 1.0, 1.5]]);
        let expected = 0.01 + 2.0 * (0.02 - 0.0125) - (0.06f64 * 1.5).powi(2) / 2.0;
        assert!((growth.rate(&columns, 2) - expected.exp_m1()).abs() < 1e-15);
    }

    #[test]
    fn two_states_by_hand() {
        let state = |mean| GrowthState { mean, sd: 0.0 };
        let growth = Regimes {
            rho: 0.01,
            eta: 2.0,
            states: vec![state(0.03), state(-0.01)],
            into: vec![vec![0.9, 0.5], vec![0.1, 0.5]],
            start: vec![1.0, 0.0],
        };
        let columns = growth.columns(1);
        let (boom, slump) = (0.9 * (-0.06f64).exp(), 0.1 * 0.02f64.exp());
        assert!((columns[0][1] - boom).abs() < 1e-15 && (columns[1][1] - slump).abs() < 1e-15);
        assert!((growth.rate(&columns, 1) - (0.01f64.exp() / (boom + slump) - 1.0)).abs() < 1e-15);
    }
}
