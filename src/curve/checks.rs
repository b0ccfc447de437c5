//! The allowed ranges of a curve's parameters, stated once.

use crate::{Error, ErrorKind, Result};

/// A fraction as a percentage, without the noise of its last bits: 0.035 as "3.5%".
pub(super) fn percent(fraction: f64) -> String {
    let digits = format!("{:.10}", fraction * 100.0);
    format!("{}%", digits.trim_end_matches('0').trim_end_matches('.'))
}

/// A parameter with its allowed range.
struct Range {
    name: &'static str,
    lower: f64,
    lower_included: bool,
    upper: f64,
    /// Whether messages speak in percent.
    share: bool,
}

const fn share(name: &'static str, lower: f64, lower_included: bool, upper: f64) -> Range {
    Range { name, lower, lower_included, upper, share: true }
}

const RATE: Range = share("rate", -0.5, false, 1.0);
const PREFERENCE: Range = share("preference", -0.5, false, 1.0);
const HAZARD: Range = share("hazard", 0.0, true, 1.0);
const GROWTH: Range = share("growth", -1.0, false, 1.0);
const DEPARTURE: Range = share("departure of growth at the base", -1.0, false, 1.0);
const MEAN: Range = share("mean", 0.0, false, 1.0);
const SD: Range = share("sd", 0.0, true, 1.0);
const ELASTICITY: Range =
    Range { name: "elasticity", lower: 0.0, lower_included: true, upper: 20.0, share: false };

impl Range {
    #[inline]
    fn check(&self, value: f64) -> Result<()> {
        let above = if self.lower_included { value >= self.lower } else { value > self.lower };
        if above && value <= self.upper { Ok(()) } else { Err(self.refusal(value)) }
    }

    #[cold]
    fn refusal(&self, value: f64) -> Error {
        if let Err(error) = finite(self.name, value) {
            return error;
        }
        let show = |number: f64| if self.share { percent(number) } else { number.to_string() };
        let found = if self.share {
            format!("{} is {} (stored {value})", self.name, show(value))
        } else {
            format!("{} is {value}", self.name)
        };
        let from = if self.lower_included { "" } else { "above " };
        let error = Error::new(
            ErrorKind::RateRange,
            self.name,
            format!("{found}, allowed {from}{} to {}", show(self.lower), show(self.upper)),
        );
        // A rate typed as a number of percent is the commonest slip.
        if self.share && value > self.upper && value <= 100.0 {
            let meant = value / 100.0;
            return error.with_hint(format!("{} or {meant}", percent(meant)));
        }
        error
    }
}

pub(crate) fn finite(name: &'static str, value: f64) -> Result<()> {
    if value.is_finite() {
        return Ok(());
    }
    Err(Error::new(ErrorKind::NotFinite, name, format!("{name} is {value}, not a finite number")))
}

#[inline]
pub(crate) fn rate(value: f64) -> Result<()> {
    RATE.check(value)
}

#[inline]
pub(crate) fn growth(value: f64) -> Result<()> {
    GROWTH.check(value)
}

pub(super) fn departure(value: f64) -> Result<()> {
    DEPARTURE.check(value)
}

pub(super) fn mean(value: f64) -> Result<()> {
    MEAN.check(value)
}

pub(super) fn sd(value: f64) -> Result<()> {
    SD.check(value)
}

pub(crate) fn elasticity(value: f64) -> Result<()> {
    ELASTICITY.check(value)
}

pub(crate) fn preference(value: f64) -> Result<()> {
    PREFERENCE.check(value)
}

pub(crate) fn hazard(value: f64) -> Result<()> {
    HAZARD.check(value)
}

/// phi lies between -1 and 1, neither included: growth would never return to its mean.
pub(super) fn persistence(value: f64) -> Result<()> {
    finite("persistence", value)?;
    if value > -1.0 && value < 1.0 {
        return Ok(());
    }
    let message = format!("persistence is {value}, allowed above -1 and below 1");
    Err(Error::new(ErrorKind::RateRange, "persistence", message)
        .with_hint("the first-order autocorrelation of yearly log growth: 0.7"))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_rate_ends_at_its_limits() {
        assert!(rate(-0.499_999).is_ok() && rate(1.0).is_ok() && rate(0.0).is_ok());
        assert_eq!(rate(-0.5).unwrap_err().kind(), ErrorKind::RateRange);
        assert_eq!(rate(1.000_001).unwrap_err().kind(), ErrorKind::RateRange);
        assert_eq!(rate(f64::NAN).unwrap_err().kind(), ErrorKind::NotFinite);
        let error = rate(3.5).unwrap_err();
        assert_eq!(error.message(), "rate is 350% (stored 3.5), allowed above -50% to 100%");
        assert_eq!(error.hint(), Some("3.5% or 0.035"));
    }

    #[test]
    fn the_other_ranges() {
        assert!(growth(-0.99).is_ok() && growth(-1.0).is_err() && growth(1.1).is_err());
        assert!(hazard(0.0).is_ok() && hazard(-0.01).is_err());
        assert!(preference(-0.01).is_ok() && preference(2.0).is_err());
        assert!(elasticity(0.0).is_ok() && elasticity(20.1).is_err() && elasticity(-0.1).is_err());
        assert!(mean(0.0).is_err() && mean(0.04).is_ok());
        assert!(sd(0.0).is_ok() && sd(-0.1).is_err());
        assert!(persistence(0.999_999).is_ok() && persistence(-0.5).is_ok());
        assert!(persistence(1.0).is_err() && persistence(-1.0).is_err() && persistence(f64::NAN).is_err());
    }

    #[test]
    fn percentages_drop_their_noise() {
        assert_eq!(percent(0.035), "3.5%");
        assert_eq!(percent(0.07), "7%");
        assert_eq!(percent(1.0), "100%");
        assert_eq!(percent(-0.5), "-50%");
    }
}
