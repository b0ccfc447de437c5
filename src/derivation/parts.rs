//! The parts of a rate as figures, each with where it came from.

use super::{ElasticitySource, Figure, FigureKind, GrowthBy, GrowthSource, Hazard, RateParts, Stated};
use crate::rateline::{plain, rounded_number, rounded_percent};
use crate::{
    Compounding, Error, ErrorKind, Result, TaxBracket, elasticity_from_tax_brackets, elasticity_from_taxes,
    hazard_from_probability, hazard_from_waiting_time, percent,
};

/// The figures so far.
pub(super) struct Work<'a> {
    parts: &'a RateParts,
    figures: Vec<Figure>,
}

impl<'a> Work<'a> {
    pub(super) fn new(parts: &'a RateParts) -> Self {
        Work { parts, figures: Vec::new() }
    }

    pub(super) fn figures(self) -> Vec<Figure> {
        self.figures
    }

    pub(super) fn preference(&mut self) {
        self.given("pure time preference", "delta", self.parts.preference);
    }

    fn add(&mut self, kind: FigureKind, name: &str, symbol: &'static str, value: f64, origin: String) {
        let share = !matches!(symbol, "eta" | "phi");
        self.figures.push(Figure { kind, name: name.into(), symbol, value, share, error: None, origin });
    }

    fn given(&mut self, name: &str, symbol: &'static str, value: f64) {
        self.add(FigureKind::Part, name, symbol, value, "as given".into());
    }

    /// A part that was computed, rounded where that is asked for.
    fn computed(&mut self, name: &str, symbol: &'static str, value: f64, origin: String) -> f64 {
        let share = !matches!(symbol, "eta" | "phi");
        let (value, origin) = match self.parts.decimals {
            None => (value, origin),
            Some(decimals) => {
                let round = if share { rounded_percent } else { rounded_number };
                (round(value, decimals), format!("{origin}, rounded to {decimals} decimals"))
            }
        };
        self.add(FigureKind::Part, name, symbol, value, origin);
        value
    }

    pub(super) fn hazard(&mut self, compounding: Compounding) -> Result<f64> {
        const NAME: &str = "hazard";
        let yearly = compounding == Compounding::Yearly;
        match self.parts.hazard {
            Hazard::Rate(rate) => {
                let origin = if rate == 0.0 { "none" } else { "as given" };
                self.add(FigureKind::Part, NAME, "L", rate, origin.into());
                Ok(rate)
            }
            Hazard::Probability(p) => {
                let rate = hazard_from_probability(p, compounding)?;
                let formula = if yearly { "p/(1 - p)" } else { "-ln(1 - p)" };
                let origin = format!("{formula} of a yearly probability p of {}", percent(p));
                Ok(self.computed(NAME, "L", rate, origin))
            }
            Hazard::Every(years) => {
                let rate = hazard_from_waiting_time(years, compounding)?;
                let formula = if yearly { "1/(W - 1)" } else { "1/W" };
                let origin = format!("{formula} of an expected waiting time W of {} years", plain(years));
                Ok(self.computed(NAME, "L", rate, origin))
            }
        }
    }

    pub(super) fn elasticity(&mut self) -> Result<f64> {
        const NAME: &str = "elasticity of marginal utility";
        let brackets = match &self.parts.elasticity {
            ElasticitySource::Given(eta) => {
                self.given(NAME, "eta", *eta);
                return Ok(*eta);
            }
            ElasticitySource::Taxes(brackets) => brackets,
        };
        let eta = elasticity_from_tax_brackets(brackets)?;
        let rates = |bracket: &TaxBracket| {
            format!(
                "ln(1 - {})/ln(1 - {}), marginal and average rate of tax",
                percent(bracket.marginal),
                percent(bracket.average)
            )
        };
        if let [bracket] = brackets.as_slice() {
            let origin = format!("{}, by equal absolute sacrifice", rates(bracket));
            return Ok(self.computed(NAME, "eta", eta, origin));
        }
        let origin = format!("weighted mean of {} tax brackets, by equal absolute sacrifice", brackets.len());
        let eta = self.computed(NAME, "eta", eta, origin);
        for (i, bracket) in brackets.iter().enumerate() {
            let value = elasticity_from_taxes(bracket.marginal, bracket.average)?;
            let name = format!("elasticity of bracket {}, weight {}", i + 1, plain(bracket.weight));
            self.add(FigureKind::Evidence, &name, "eta", value, rates(bracket));
        }
        Ok(eta)
    }

    pub(super) fn growth(&mut self, log: bool) -> Result<f64> {
        let (name, symbol) =
            if log { ("mean of log growth of consumption", "m") } else { ("growth of consumption", "g") };
        let (estimate, series, by) = match &self.parts.growth {
            GrowthSource::Given(growth) => {
                self.given(name, symbol, *growth);
                return Ok(*growth);
            }
            GrowthSource::Series { estimate, name, by } => (*estimate, name.clone(), *by),
        };
        let (value, what) = match (by, log) {
            (GrowthBy::Trend, true) => (estimate.trend.value, "log-linear trend"),
            (GrowthBy::Trend, false) => (estimate.trend_growth(), "exp(b) - 1 of the log-linear trend b"),
            (GrowthBy::Mean, true) => (estimate.mean.value, "mean of yearly log growth"),
            (GrowthBy::Mean, false) => (estimate.geometric_mean, "geometric mean"),
        };
        let origin = format!("{what} of the {} values of {series}", estimate.values);
        let value = self.computed(name, symbol, value, origin);
        let mut evidence = |name: &str, symbol, value, error, how: &str| {
            self.add(FigureKind::Evidence, name, symbol, value, how.into());
            if let Some(figure) = self.figures.last_mut() {
                figure.error = error;
            }
        };
        let (trend, mean, sd) = (estimate.trend, estimate.mean, estimate.sd);
        evidence(
            "log-linear trend",
            "b",
            trend.value,
            Some(trend.error),
            "least squares of ln c on the year",
        );
        evidence("mean of yearly log growth", "", mean.value, Some(mean.error), "ln(last/first)/years");
        evidence("geometric mean growth", "", estimate.geometric_mean, None, "(last/first)^(1/years) - 1");
        let name = "standard deviation of yearly log growth";
        evidence(name, "", sd.value, Some(sd.error), "about its mean");
        if let Some(phi) = estimate.persistence {
            let how = "first-order autocorrelation";
            evidence("persistence of yearly log growth", "phi", phi.value, Some(phi.error), how);
        }
        Ok(value)
    }

    pub(super) fn persistence(&mut self) -> Result<Option<f64>> {
        let refuse = |message: &str, hint: &str| {
            Err(Error::new(ErrorKind::NoMeaning, "persistence", message).with_hint(hint))
        };
        let Some(stated) = self.parts.persistence else { return Ok(None) };
        if self.parts.sd.is_none() {
            let message =
                "persistence says how shocks to growth last, and no standard deviation of growth is given";
            return refuse(message, "a standard deviation too, or no persistence");
        }
        const NAME: &str = "persistence of log growth";
        match (stated, &self.parts.growth) {
            (Stated::Given(phi), _) => {
                self.given(NAME, "phi", phi);
                Ok(Some(phi))
            }
            (Stated::Estimated, GrowthSource::Given(_)) => {
                let message = "persistence is to be estimated, and growth is given without a series";
                refuse(message, "a series of consumption, or a number such as 0.7")
            }
            (Stated::Estimated, GrowthSource::Series { estimate, .. }) => {
                let Some(phi) = estimate.persistence else {
                    let message =
                        "growth is the same every year of the series, so its persistence has no meaning";
                    return refuse(message, "leave persistence out");
                };
                let origin = "first-order autocorrelation in the series".to_string();
                Ok(Some(self.computed(NAME, "phi", phi.value, origin)))
            }
        }
    }

    pub(super) fn sd(&mut self, persistence: Option<f64>) -> Result<Option<f64>> {
        let name = match (persistence, self.parts.is_log()) {
            (Some(_), _) => "standard deviation of the yearly shock",
            (None, true) => "standard deviation of log growth",
            (None, false) => "standard deviation of growth",
        };
        match (self.parts.sd, &self.parts.growth) {
            (None, _) => Ok(None),
            (Some(Stated::Given(sd)), _) => {
                self.given(name, "s", sd);
                Ok(Some(sd))
            }
            (Some(Stated::Estimated), GrowthSource::Given(_)) => {
                let message =
                    "the standard deviation is to be estimated, and growth is given without a series";
                Err(Error::new(ErrorKind::NoMeaning, "sd", message)
                    .with_hint("a series of consumption, or a percentage such as 3.6%"))
            }
            (Some(Stated::Estimated), GrowthSource::Series { estimate, .. }) => {
                let (sd, origin) = match persistence {
                    None => (estimate.sd.value, "yearly log growth in the series"),
                    Some(phi) => (
                        estimate.shock_sd(phi),
                        "sqrt(1 - phi^2) times the standard deviation of yearly log growth in the series",
                    ),
                };
                Ok(Some(self.computed(name, "s", sd, origin.into())))
            }
        }
    }
}
