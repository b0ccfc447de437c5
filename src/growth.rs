//! Growth of consumption from a series: trend, mean, spread and persistence, each with its standard error.

use crate::check::finite_all;
use crate::dd::{Dd, exp2_m1, log2};
use crate::{Error, ErrorKind, Result};

/// The fewest values: three yearly growth rates.
const FEWEST: usize = 4;

/// Below this standard deviation yearly growth differs by the rounding of the series only.
const NO_VARIATION: f64 = 1e-12;

/// An estimated figure and its standard error.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Estimate {
    /// The figure.
    pub value: f64,
    /// Its standard error.
    pub error: f64,
}

/// What a series of consumption says of its growth, by [`growth_from_consumption`].
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct GrowthEstimate {
    /// How many values the series has; there is one yearly growth rate fewer.
    pub values: usize,
    /// Log growth per year along the straight line through ln c, by least squares.
    pub trend: Estimate,
    /// Mean of yearly log growth, which depends on the first and the last value only.
    pub mean: Estimate,
    /// Geometric mean growth, (c_N/c_1)^(1/(N-1)) - 1, a fraction per year.
    pub geometric_mean: f64,
    /// Standard deviation of yearly log growth.
    pub sd: Estimate,
    /// First-order autocorrelation of yearly log growth; none where growth is the same every year.
    pub persistence: Option<Estimate>,
}

impl GrowthEstimate {
    /// The growth rate a year of the trend, exp(b) - 1.
    ///
    /// ```
    /// let doubling = hence_core::growth_from_consumption(&[1.0, 2.0, 4.0, 8.0], None)?;
    /// assert_eq!(doubling.trend_growth(), 1.0);
    /// # Ok::<(), hence_core::Error>(())
    /// ```
    pub fn trend_growth(&self) -> f64 {
        exp2_m1(Dd::of(self.trend.value) * Dd::LOG2_E).hi
    }

    /// The standard deviation of the yearly shock that goes with a persistence: sd sqrt(1 - phi^2).
    ///
    /// Growth that persists varies by more than its shocks, whose standard deviation is what a curve of persistent
    /// growth asks for.
    pub fn shock_sd(&self, phi: f64) -> f64 {
        self.sd.value * ((1.0 - phi) * (1.0 + phi)).sqrt()
    }
}

/// Growth estimated from a series of consumption (per head, in prices of one year).
///
/// **Formula**: with N values c_i, n = N - 1 yearly log growth rates x_i = ln(c_(i+1)/c_i) and their mean x:
/// trend b = sum (i - mean i) ln c_i / sum (i - mean i)^2, its standard error
/// sqrt(sum of squared residuals / (N - 2) / sum (i - mean i)^2); mean x = ln(c_N/c_1)/n with standard error s/sqrt(n);
/// standard deviation s = sqrt(sum (x_i - x)^2 / (n - 1)) with standard error s/sqrt(2(n - 1)); persistence
/// phi = sum (x_i - x)(x_(i-1) - x) / sum (x_i - x)^2 with standard error sqrt((1 - phi^2)/n).
///
/// **Arguments**: `consumption`, a value a year, above 0, at least four, in any unit; `years`, where given, the calendar
/// year of each, which must follow on each other.
///
/// **Returns**: log growth per year, fractions; nothing is rounded.
///
/// **Conventions**: least squares minimise squared distances of ln c, so no single year weighs as the first and the
/// last do in the mean. Standard errors hold for independent residuals (trend), independent years (mean), normal growth
/// (standard deviation) and long series (persistence, which short series understate).
///
/// **Edge cases**: the same growth every year has no persistence.
///
/// **Accuracy**: a few units in the last place of the statistics of the stored values: logarithms and sums carry about
/// 100 bits.
///
/// **Errors**: `Shape` for fewer than four values or years of another number; `NotFinite`; `NoMeaning` for a value of 0
/// or less; `Date` where a year does not follow the one before it; each with the index.
///
/// **Source**: textbook least squares and moments; the large-sample error of an autocorrelation after M. S. Bartlett, "On
/// the theoretical specification and sampling properties of autocorrelated time-series", Supplement to the Journal of
/// the Royal Statistical Society 8, 1946, from memory.
///
/// ```
/// use hence_core::growth_from_consumption;
/// // Growth of e^0.01, e^0.03, e^0.02: mean 2%, spread 1%, and the trend through ln c = 0, 0.01, 0.04, 0.06.
/// let series: Vec<f64> = [0.0f64, 0.01, 0.04, 0.06].iter().map(|x| x.exp()).collect();
/// let growth = growth_from_consumption(&series, Some(&[2019, 2020, 2021, 2022]))?;
/// assert!((growth.mean.value - 0.02).abs() < 1e-15 && (growth.sd.value - 0.01).abs() < 1e-15);
/// assert!((growth.trend.value - 0.021).abs() < 1e-15);
/// // (-1)(1) + (1)(0) over 1 + 1 + 0.
/// assert!((growth.persistence.unwrap().value + 0.5).abs() < 1e-13);
/// let error = growth_from_consumption(&series, Some(&[2019, 2020, 2022, 2023])).unwrap_err();
/// assert_eq!(error.message(), "the year after 2020 is 2022: growth from year to year needs every year");
/// # Ok::<(), hence_core::Error>(())
/// ```
pub fn growth_from_consumption(consumption: &[f64], years: Option<&[i32]>) -> Result<GrowthEstimate> {
    check(consumption, years)?;
    let logs: Vec<Dd> = consumption.iter().map(|&value| log2(Dd::of(value)) * Dd::LN2).collect();
    let steps: Vec<Dd> = logs.windows(2).map(|pair| pair[1] - pair[0]).collect();
    let n = steps.len() as f64;
    let mean = (logs[logs.len() - 1] - logs[0]) / Dd::of(n);
    let apart: Vec<Dd> = steps.iter().map(|&step| step - mean).collect();
    let squares = total(apart.iter().map(|&x| x * x));
    let sd = (squares / Dd::of(n - 1.0)).hi.max(0.0).sqrt();
    let persistence = (sd >= NO_VARIATION).then(|| {
        let phi = (total(apart.windows(2).map(|pair| pair[0] * pair[1])) / squares).hi;
        Estimate { value: phi, error: ((1.0 - phi) * (1.0 + phi) / n).sqrt() }
    });
    Ok(GrowthEstimate {
        values: consumption.len(),
        trend: trend(&logs),
        mean: Estimate { value: mean.hi, error: sd / n.sqrt() },
        geometric_mean: exp2_m1(mean * Dd::LOG2_E).hi,
        sd: Estimate { value: sd, error: sd / (2.0 * (n - 1.0)).sqrt() },
        persistence,
    })
}

/// The slope of the least-squares line through equally spaced points, and its standard error.
fn trend(logs: &[Dd]) -> Estimate {
    let count = logs.len() as f64;
    let middle = (count - 1.0) / 2.0;
    let place = |i: usize| i as f64 - middle;
    let level = total(logs.iter().copied()) / Dd::of(count);
    let spread = total((0..logs.len()).map(|i| Dd::of(place(i)) * place(i)));
    let slope = total(logs.iter().enumerate().map(|(i, &log)| log * place(i))) / spread;
    let left = total(logs.iter().enumerate().map(|(i, &log)| {
        let residual = log - level - slope * place(i);
        residual * residual
    }));
    let variance = left / Dd::of(count - 2.0) / spread;
    Estimate { value: slope.hi, error: variance.hi.max(0.0).sqrt() }
}

fn total(terms: impl Iterator<Item = Dd>) -> Dd {
    terms.fold(Dd::ZERO, |sum, term| sum + term)
}

fn check(consumption: &[f64], years: Option<&[i32]>) -> Result<()> {
    if consumption.len() < FEWEST {
        let message = format!(
            "the series has {} values, and growth needs at least {FEWEST} to be estimated",
            consumption.len()
        );
        return Err(Error::new(ErrorKind::Shape, "consumption", message).with_hint("a longer series"));
    }
    finite_all("consumption", consumption)?;
    if let Some(index) = consumption.iter().position(|&value| value < f64::MIN_POSITIVE) {
        let message = format!("consumption is {}, which has no growth; allowed above 0", consumption[index]);
        return Err(Error::new(ErrorKind::NoMeaning, "consumption", message).with_index(index));
    }
    let Some(years) = years else { return Ok(()) };
    if years.len() != consumption.len() {
        let message = format!("there are {} years for {} values", years.len(), consumption.len());
        return Err(Error::new(ErrorKind::Shape, "years", message));
    }
    match years.windows(2).position(|pair| i64::from(pair[1]) != i64::from(pair[0]) + 1) {
        None => Ok(()),
        Some(before) => {
            let message = format!(
                "the year after {} is {}: growth from year to year needs every year",
                years[before],
                years[before + 1]
            );
            Err(Error::new(ErrorKind::Date, "years", message).with_index(before + 1))
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn equal_growth_has_neither_spread_nor_persistence() {
        let growth = growth_from_consumption(&[100.0, 110.0, 121.0, 133.1, 146.41], None).unwrap();
        assert!((growth.geometric_mean - 0.1).abs() < 1e-14 && (growth.trend_growth() - 0.1).abs() < 1e-14);
        assert!(growth.sd.value < 1e-14 && growth.trend.error < 1e-14);
        assert_eq!((growth.values, growth.persistence), (5, None));
    }

    #[test]
    fn what_has_no_growth_is_refused() {
        let refused = |series: &[f64], years: Option<&[i32]>| {
            let error = growth_from_consumption(series, years).unwrap_err();
            (error.kind(), error.argument(), error.index())
        };
        assert_eq!(refused(&[1.0, 2.0, 3.0], None), (ErrorKind::Shape, "consumption", None));
        assert_eq!(refused(&[1.0, 2.0, 0.0, 3.0], None), (ErrorKind::NoMeaning, "consumption", Some(2)));
        assert_eq!(refused(&[1.0, f64::NAN, 1.0, 3.0], None), (ErrorKind::NotFinite, "consumption", Some(1)));
        let four = [1.0, 2.0, 3.0, 4.0];
        assert_eq!(refused(&four, Some(&[1, 2, 3])), (ErrorKind::Shape, "years", None));
        assert_eq!(refused(&four, Some(&[1, 2, 2, 3])), (ErrorKind::Date, "years", Some(2)));
        assert_eq!(refused(&four, Some(&[i32::MAX, i32::MIN, 1, 2])), (ErrorKind::Date, "years", Some(1)));
    }
}
