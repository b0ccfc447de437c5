//! From the parts to the rate: the steps as figures, and the derivation in words.

use super::{Figure, FigureKind, GrowthSource, RateParts};
use crate::rateline::{plain, rounded_number, rounded_percent};
use crate::{Compounding, Curve, Result, percent};

/// The parts as numbers, on their way to the rate.
pub(super) struct Sum {
    pub preference: f64,
    pub hazard: f64,
    pub elasticity: f64,
    pub growth: f64,
    pub sd: Option<f64>,
    pub persistence: Option<f64>,
    pub log: bool,
    pub compounding: Compounding,
}

impl Sum {
    /// Adds the steps and the rate to the figures; returns them as a sentence.
    pub(super) fn steps(&self, figures: &mut Vec<Figure>, curve: &Curve) -> Result<String> {
        let mut add = |kind, name: &str, symbol, value, origin: &str| {
            let (name, origin) = (name.to_string(), origin.to_string());
            figures.push(Figure { kind, name, symbol, value, share: true, error: None, origin });
        };
        let rho = self.preference + self.hazard;
        let wealth = self.elasticity * self.growth;
        let g = if self.log { "m" } else { "g" };
        add(FigureKind::Step, "preference and hazard", "rho", rho, "delta + L");
        let effect = format!("eta {g}");
        add(FigureKind::Step, "wealth effect", "", wealth, &effect);
        let mut text = format!(
            "rho {} + eta {g} {} ({} x {})",
            shown(rho),
            shown(wealth),
            number(self.elasticity),
            shown(self.growth)
        );
        if let Some(sd) = self.sd {
            let (formula, factor) = if self.log {
                ("eta^2 s^2/2", self.elasticity * self.elasticity)
            } else {
                ("eta (eta + 1) s^2/2", self.elasticity * (self.elasticity + 1.0))
            };
            let caution = factor * sd * sd / 2.0;
            let name = match self.persistence {
                Some(_) => "precautionary effect, year 1",
                None => "precautionary effect",
            };
            add(FigureKind::Step, name, "", -caution, &format!("-{formula}"));
            text.push_str(&format!(" - precaution {} ({formula})", shown(caution)));
        }
        let (yearly, continuous) = (curve.forward_rate(1.0)?, curve.instantaneous_rate(1.0)?);
        let first = if self.persistence.is_some() { "rate of year 1" } else { "rate" };
        let (own, other) = ("sum of the effects", ["exp(r) - 1", "ln(1 + r)"]);
        let ordered = match self.compounding {
            Compounding::Yearly => [(yearly, YEARLY, own), (continuous, CONTINUOUS, other[1])],
            Compounding::Continuous => [(continuous, CONTINUOUS, own), (yearly, YEARLY, other[0])],
        };
        for (value, compounded, origin) in ordered {
            add(FigureKind::Rate, &format!("{first}, {compounded}"), "r", value, origin);
        }
        let (rate, compounded, _) = ordered[0];
        text = format!("{first}: {text} = {} a year, {compounded}.", shown(rate));
        if let (Some(sd), Some(phi)) = (self.sd, self.persistence) {
            let spread = self.elasticity * sd / (1.0 - phi);
            let late = rho + wealth - spread * spread / 2.0;
            let origin = "rho + eta m - (eta s/(1 - phi))^2/2";
            add(FigureKind::Rate, "rate in the long run, compounded continuously", "", late, origin);
            text.push_str(&format!(
                " A shock to growth lasts, so its uncertainty builds up: in the long run the rate is {} ({origin}).",
                shown(late)
            ));
        }
        Ok(capital(&text))
    }

    /// What else has to be said of the parts.
    pub(super) fn remarks(&self, parts: &RateParts) -> Vec<String> {
        let mut remarks = Vec::new();
        match (&parts.growth, self.sd) {
            (GrowthSource::Series { estimate, .. }, None) => remarks.push(format!(
                "Growth is taken as certain: its standard deviation from year to year, {} in the series, is left out.",
                shown(estimate.sd.value)
            )),
            (_, None) => remarks.push("Growth is taken as certain.".into()),
            (_, Some(_)) if self.persistence.is_none() => {
                remarks.push("Growth is taken as independent from year to year.".into());
            }
            _ => remarks.push(
                "Factors are those of whole years, log-linear between; growth is at its mean in the year of the base."
                    .into(),
            ),
        }
        if self.log && !parts.log && matches!(parts.growth, GrowthSource::Given(_)) {
            remarks.push(
                "Growth that persists is stated as log growth: the growth given is taken as the mean of yearly log \
                 growth, the standard deviation as that of its yearly shock."
                    .into(),
            );
        }
        if matches!(parts.growth, GrowthSource::Series { .. }) {
            remarks.push(
                "The series is taken as real consumption per head, a value a year without gaps; standard errors are \
                 those of independent years, and say nothing of whether past growth goes on."
                    .into(),
            );
        }
        remarks
    }
}

const YEARLY: &str = "compounded yearly";
const CONTINUOUS: &str = "compounded continuously";

/// A rate to read, to four decimals of a percent.
fn shown(rate: f64) -> String {
    percent(rounded_percent(rate, 4))
}

fn number(value: f64) -> String {
    plain(rounded_number(value, 4))
}

fn capital(text: &str) -> String {
    let mut chars = text.chars();
    chars.next().map_or_else(String::new, |first| first.to_uppercase().chain(chars).collect())
}
