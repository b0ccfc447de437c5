//! The second route to a factor: yearly chains and closed forms, in plain floating point and as cells.
//!
//! It shares nothing with the library's own arithmetic but the stated basis. What it cannot rebuild
//! (tables, edges within a year) it leaves out, and the checks say so.

use hence_core::{Band, Compounding, Edge, HorizonRule, Spec, Where};

use super::growth_route::{Columns, Persistent, Regimes};

/// How a yearly rate follows from its inputs.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Rule {
    /// The rate as stated.
    Given,
    /// rho + eta g.
    Linear,
    /// exp(rho + eta g) - 1, the yearly rate of a continuous one.
    LinearContinuous,
    /// (1 + rho)(1 + g)^eta - 1.
    Exact,
    /// rho + eta g - eta (eta + 1) s^2 / 2.
    Uncertain,
    /// rho + eta m - eta^2 s^2 / 2.
    UncertainLog,
}

/// What the rules need besides a rate or a growth rate.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Preferences {
    /// Pure time preference and hazard together.
    pub rho: f64,
    /// Elasticity of marginal utility.
    pub eta: f64,
    /// Standard deviation of growth.
    pub sd: f64,
}

impl Rule {
    /// The rate from `x`, a rate or a growth rate.
    pub fn rate(self, x: f64, p: Preferences) -> f64 {
        match self {
            Rule::Given => x,
            Rule::Linear => p.rho + p.eta * x,
            Rule::LinearContinuous => (p.rho + p.eta * x).exp() - 1.0,
            Rule::Exact => (1.0 + p.rho) * (1.0 + x).powf(p.eta) - 1.0,
            Rule::Uncertain => p.rho + p.eta * x - p.eta * (p.eta + 1.0) * p.sd * p.sd / 2.0,
            Rule::UncertainLog => p.rho + p.eta * x - p.eta * p.eta * p.sd * p.sd / 2.0,
        }
    }

    /// The same as a formula over cells.
    pub fn formula(self, x: &str, rho: &str, eta: &str, sd: &str) -> String {
        match self {
            Rule::Given => x.to_owned(),
            Rule::Linear => format!("{rho}+{eta}*{x}"),
            Rule::LinearContinuous => format!("EXP({rho}+{eta}*{x})-1"),
            Rule::Exact => format!("(1+{rho})*(1+{x})^{eta}-1"),
            Rule::Uncertain => format!("{rho}+{eta}*{x}-{eta}*({eta}+1)*{sd}^2/2"),
            Rule::UncertainLog => format!("{rho}+{eta}*{x}-{eta}^2*{sd}^2/2"),
        }
    }
}

/// One curve of the second route.
#[derive(Clone, Debug, PartialEq)]
pub enum Form {
    /// One rate for ever, yearly or continuous.
    Rate {
        /// How the rate follows from `x`.
        rule: Rule,
        /// Its other inputs.
        preferences: Preferences,
        /// A rate or a growth rate.
        x: f64,
        /// exp(-rt) instead of (1+r)^-t.
        continuous: bool,
    },
    /// Gamma-distributed rates.
    Gamma {
        /// Mean rate.
        mean: f64,
        /// Standard deviation.
        sd: f64,
    },
    /// A yearly chain C(n) = C(n-1)/(1+r(n)); the first rate extends before the base.
    Chain {
        /// How a year's rate follows from the band's number.
        rule: Rule,
        /// Its other inputs.
        preferences: Preferences,
        /// (offset after which the band begins, rate or growth rate), increasing.
        bands: Vec<(f64, f64)>,
    },
    /// A yearly chain under log growth that persists; nothing before the base.
    Persistent(Persistent),
    /// A yearly chain under growth that switches between states; nothing before the base.
    Regimes(Regimes),
    /// (1 + r(t))^-t with r stepped: (last offset of the band, rate).
    Steps(Vec<(f64, f64)>, Option<f64>),
    /// (1 + r(t))^-t with r interpolated: (offset, rate).
    Points(Vec<(f64, f64)>, Option<f64>),
}

/// An offset beyond every edge: stands for "after".
pub const BEYOND: f64 = 1e6;

/// The second route of a basis: weighted forms.
#[derive(Clone, Debug, PartialEq)]
pub struct Route {
    /// (weight, form); weights sum to 1.
    pub parts: Vec<(f64, Form)>,
    grids: Vec<Grid>,
    /// The last year of the yearly chains.
    pub years: usize,
}

/// What a form needs of every year, from year 0: nothing where it has a closed form.
#[derive(Clone, Debug, Default, PartialEq)]
struct Grid {
    columns: Columns,
    rates: Vec<f64>,
    chain: Vec<f64>,
}

impl Route {
    /// The second route to a spec, for offsets up to `reach` years; none where there is none.
    pub fn of(spec: &Spec, at: &Where, lowest: f64, reach: f64) -> Option<Route> {
        let mut parts = Vec::new();
        collect(spec, at, 1.0, &mut parts)?;
        let whole = |edge: f64| edge.fract() == 0.0;
        for (_, form) in &parts {
            let fits = match form {
                Form::Chain { bands, .. } => {
                    bands.iter().all(|b| whole(b.0)) && (lowest >= 0.0 || bands.iter().all(|b| b.0 >= 0.0))
                }
                Form::Steps(..) | Form::Points(..) | Form::Persistent(_) | Form::Regimes(_) => lowest >= 0.0,
                _ => true,
            };
            if !fits {
                return None;
            }
        }
        let years = reach.max(1.0).ceil() as usize + 1;
        let grids = parts.iter().map(|(_, form)| form.grid(years)).collect();
        Some(Route { parts, grids, years })
    }

    /// The factor at offset `t`, at most [`Route::years`] - 1.
    pub fn factor(&self, t: f64) -> f64 {
        self.parts.iter().zip(&self.grids).map(|((w, form), grid)| w * form.factor(t, grid)).sum()
    }

    /// The factor of one part at offset `t`, without its weight.
    pub fn part_factor(&self, part: usize, t: f64) -> f64 {
        self.parts[part].1.factor(t, &self.grids[part])
    }

    /// The yearly chain of a part, from year 0; empty where it is not a chain.
    pub fn chain(&self, part: usize) -> &[f64] {
        &self.grids[part].chain
    }

    /// The rate of a part's chain in a year from 1 on.
    pub fn yearly(&self, part: usize, n: usize) -> f64 {
        self.grids[part].rates[n]
    }

    /// What else stands in the yearly grid of a part, by column from year 0.
    pub(super) fn columns(&self, part: usize) -> &Columns {
        &self.grids[part].columns
    }
}

impl Form {
    fn factor(&self, t: f64, grid: &Grid) -> f64 {
        match self {
            Form::Rate { rule, preferences, x, continuous } => {
                let rate = rule.rate(*x, *preferences);
                if *continuous { (-rate * t).exp() } else { (1.0 + rate).powf(-t) }
            }
            Form::Gamma { mean, sd } => (1.0 + t * sd * sd / mean).powf(-(mean * mean / (sd * sd))),
            Form::Chain { .. } if t < 0.0 => (1.0 + grid.rates[1]).powf(-t),
            Form::Chain { .. } | Form::Persistent(_) | Form::Regimes(_) => {
                let n = t.floor();
                grid.chain[n as usize] / (1.0 + grid.rates[n as usize + 1]).powf(t - n)
            }
            Form::Steps(bands, at) => (1.0 + stepped(bands, at.unwrap_or(t))).powf(-t),
            Form::Points(points, at) => (1.0 + interpolated(points, at.unwrap_or(t))).powf(-t),
        }
    }

    /// Whether it is a yearly chain.
    pub fn is_chain(&self) -> bool {
        matches!(self, Form::Chain { .. } | Form::Persistent(_) | Form::Regimes(_))
    }

    fn grid(&self, years: usize) -> Grid {
        let columns = match self {
            Form::Persistent(growth) => growth.columns(years),
            Form::Regimes(growth) => growth.columns(years),
            Form::Chain { .. } => Vec::new(),
            _ => return Grid::default(),
        };
        let rate = |n: usize| match self {
            Form::Persistent(growth) => growth.rate(&columns, n),
            Form::Regimes(growth) => growth.rate(&columns, n),
            Form::Chain { rule, preferences, bands } => {
                let before = n as f64 - 1.0;
                let band = bands.iter().rev().find(|b| b.0 <= before).unwrap_or(&bands[0]);
                rule.rate(band.1, *preferences)
            }
            _ => 0.0,
        };
        // Year 0 has no rate.
        let (mut rates, mut chain) = (vec![0.0], vec![1.0]);
        for n in 1..=years {
            rates.push(rate(n));
            chain.push(chain[n - 1] / (1.0 + rates[n]));
        }
        Grid { columns, rates, chain }
    }
}

/// The rate of the first band whose last offset is not before `t`.
pub fn stepped(bands: &[(f64, f64)], t: f64) -> f64 {
    let k = bands.iter().filter(|b| b.0 < t).count();
    bands[k.min(bands.len() - 1)].1
}

/// The rate at `t` on straight lines between points (the first and last stand far outside).
pub fn interpolated(points: &[(f64, f64)], t: f64) -> f64 {
    let k = points.iter().filter(|p| p.0 <= t).count().clamp(1, points.len() - 1);
    let (a, b) = (points[k - 1], points[k]);
    a.1 + (t - a.0) * (b.1 - a.1) / (b.0 - a.0)
}

fn collect(spec: &Spec, at: &Where, weight: f64, parts: &mut Vec<(f64, Form)>) -> Option<()> {
    let form = match spec {
        Spec::Flat { rate, compounding } => Form::Rate {
            rule: Rule::Given,
            preferences: Preferences::default(),
            x: *rate,
            continuous: *compounding == Compounding::Continuous,
        },
        Spec::Bands { bands, edges_from } => {
            let shift = edges_from.map_or(Some(0.0), |from| Some(f64::from(from - at.base_year?)))?;
            let bands = lower_edges(bands, at, shift)?;
            Form::Chain { rule: Rule::Given, preferences: Preferences::default(), bands }
        }
        Spec::HorizonSteps { bands, rule } => Form::Steps(upper_edges(bands, at, 0.0)?, length(*rule, at)?),
        Spec::HorizonPoints { points, rule } => {
            let (first, last) = (points.first()?, points.last()?);
            let mut padded = vec![(-BEYOND, first.1)];
            padded.extend(points);
            padded.push((BEYOND, last.1));
            Form::Points(padded, length(*rule, at)?)
        }
        Spec::Ramsey { preference, hazard, elasticity, growth, exact, compounding } => {
            let preferences = Preferences { rho: preference + hazard, eta: *elasticity, sd: 0.0 };
            let continuous = *compounding == Compounding::Continuous;
            if let [Band { value, to: None }] = growth.as_slice() {
                let rule = if *exact { Rule::Exact } else { Rule::Linear };
                Form::Rate { rule, preferences, x: *value, continuous: continuous && !exact }
            } else {
                let rule = match (exact, continuous) {
                    (true, _) => Rule::Exact,
                    (false, true) => Rule::LinearContinuous,
                    (false, false) => Rule::Linear,
                };
                Form::Chain { rule, preferences, bands: lower_edges(growth, at, 0.0)? }
            }
        }
        Spec::UncertainGrowth {
            preference,
            hazard,
            elasticity,
            mean,
            sd,
            log: true,
            persistence: Some(persistence),
            ..
        } => Form::Persistent(Persistent {
            rho: preference + hazard,
            eta: *elasticity,
            mean: *mean,
            sd: *sd,
            persistence: *persistence,
        }),
        Spec::GrowthRegimes { preference, hazard, elasticity, states, transition, start } => {
            let column = |j: usize| transition.iter().map(|row| row.get(j).copied()).collect();
            Form::Regimes(Regimes {
                rho: preference + hazard,
                eta: *elasticity,
                states: states.clone(),
                into: (0..states.len()).map(column).collect::<Option<_>>()?,
                start: start.clone(),
            })
        }
        Spec::UncertainGrowth {
            preference,
            hazard,
            elasticity,
            mean,
            sd,
            log,
            persistence: None,
            compounding,
        } => Form::Rate {
            rule: if *log { Rule::UncertainLog } else { Rule::Uncertain },
            preferences: Preferences { rho: preference + hazard, eta: *elasticity, sd: *sd },
            x: *mean,
            continuous: *log || *compounding == Compounding::Continuous,
        },
        Spec::Gamma { mean, sd } if *sd > 0.0 && *mean > 0.0 => Form::Gamma { mean: *mean, sd: *sd },
        Spec::Mixture(of) => {
            for (w, spec) in of {
                collect(spec, at, weight * w, parts)?;
            }
            return Some(());
        }
        // Tables and whatever else a later version states have no second route here.
        _ => return None,
    };
    parts.push((weight, form));
    Some(())
}

fn length(rule: HorizonRule, at: &Where) -> Option<Option<f64>> {
    match rule {
        HorizonRule::ByFlow => Some(None),
        HorizonRule::ByLength => at.length.map(Some),
    }
}

fn upper_edges(bands: &[Band], at: &Where, shift: f64) -> Option<Vec<(f64, f64)>> {
    let edge = |band: &Band| match band.to {
        None => Some(BEYOND),
        Some(Edge::Offset(t)) => Some(t + shift),
        Some(Edge::Year(y)) => Some(f64::from(y - at.base_year?)),
    };
    let edges: Option<Vec<_>> = bands.iter().map(|band| Some((edge(band)?, band.value))).collect();
    edges.filter(|edges| !edges.is_empty())
}

fn lower_edges(bands: &[Band], at: &Where, shift: f64) -> Option<Vec<(f64, f64)>> {
    let upper = upper_edges(bands, at, shift)?;
    let mut lower = vec![(0.0_f64.min(upper[0].0 - 1.0), upper[0].1)];
    lower.extend(upper.windows(2).map(|pair| (pair[0].0, pair[1].1)));
    Some(lower)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn band(value: f64, to: Option<f64>) -> Band {
        Band { value, to: to.map(Edge::Offset) }
    }

    #[test]
    fn the_chain_follows_the_bands() {
        // By hand: 30 years at 3.5%, then 3%; half of year 31 at 3%.
        let spec = Spec::Bands { bands: vec![band(0.035, Some(30.0)), band(0.03, None)], edges_from: None };
        let route = Route::of(&spec, &Where::default(), -1.0, 40.0).unwrap();
        let thirty = 1.035_f64.powi(-30);
        assert!((route.factor(30.0) / thirty - 1.0).abs() < 1e-14);
        assert!((route.factor(30.5) / (thirty * 1.03_f64.powf(-0.5)) - 1.0).abs() < 1e-14);
        assert!((route.factor(-1.0) - 1.035).abs() < 1e-15);
    }

    #[test]
    fn calendar_edges_count_from_the_base() {
        let bands = vec![Band { value: 0.025, to: Some(Edge::Year(2070)) }, band(0.015, None)];
        let spec = Spec::Bands { bands, edges_from: None };
        let at = Where { base_year: Some(2060), length: None };
        let route = Route::of(&spec, &at, 0.0, 20.0).unwrap();
        let expected = 1.025_f64.powi(-10) * 1.015_f64.powi(-1);
        assert!((route.factor(11.0) / expected - 1.0).abs() < 1e-14);
        assert_eq!(Route::of(&spec, &Where::default(), 0.0, 20.0), None, "a base is needed");
    }

    #[test]
    fn gamma_and_mixtures_have_closed_forms() {
        // Gamma with mean 4%, sd 3% at 100 years: (1 + 100 x 0.0225)^-(16/9).
        let gamma = Spec::Gamma { mean: 0.04, sd: 0.03 };
        let route = Route::of(&gamma, &Where::default(), 0.0, 100.0).unwrap();
        assert!((route.factor(100.0) - 3.25_f64.powf(-16.0 / 9.0)).abs() < 1e-15);
        let flat = |rate| Spec::Flat { rate, compounding: Compounding::Yearly };
        let mixture = Spec::Mixture(vec![(0.5, flat(0.01)), (0.5, flat(0.07))]);
        let route = Route::of(&mixture, &Where::default(), 0.0, 10.0).unwrap();
        let expected = 0.5 * 1.01_f64.powi(-10) + 0.5 * 1.07_f64.powi(-10);
        assert!((route.factor(10.0) - expected).abs() < 1e-15);
    }

    #[test]
    fn tables_have_no_second_route() {
        assert_eq!(Route::of(&Spec::Table(vec![(0.0, 1.0)]), &Where::default(), 0.0, 10.0), None);
    }

    #[test]
    fn whole_horizon_rates_step_and_interpolate() {
        // OMB-style points: between 3.9% at 3 and 4.0% at 10, year 6.5 has 3.95%.
        let points = [(-BEYOND, 0.039), (3.0, 0.039), (10.0, 0.04), (BEYOND, 0.04)];
        assert!((interpolated(&points, 6.5) - 0.0395).abs() < 1e-15);
        assert_eq!(interpolated(&points, 1.0), 0.039);
        assert_eq!(interpolated(&points, 11.0), 0.04);
        let bands = [(10.0, 0.04), (30.0, 0.03), (BEYOND, 0.02)];
        assert_eq!(stepped(&bands, 10.0), 0.04);
        assert_eq!(stepped(&bands, 10.5), 0.03);
        assert_eq!(stepped(&bands, 31.0), 0.02);
    }
}
