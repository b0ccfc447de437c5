//! A rate built from its parts: every figure with where it came from, and the curve they make.

mod file;
mod parts;
mod steps;

use crate::{Band, Compounding, Curve, GrowthEstimate, Persistence, Result, Spec, TaxBracket, Where};
use parts::Work;
use steps::Sum;

/// A hazard as it is stated.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Hazard {
    /// A rate, a fraction per year.
    Rate(f64),
    /// A yearly probability.
    Probability(f64),
    /// An expected waiting time in years.
    Every(f64),
}

/// A figure that is given, or taken from the series that growth is estimated from.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Stated {
    /// As given.
    Given(f64),
    /// As estimated.
    Estimated,
}

impl Stated {
    /// Reads a standard deviation: `3.6%` or `estimated`.
    ///
    /// **Errors**: as [`parse_percentage`](crate::parse_percentage), about the argument "sd".
    pub fn parse_sd(text: &str) -> Result<Self> {
        Stated::read(text, |text| crate::parse_percentage("sd", text))
    }

    /// Reads a persistence: `0.7` or `estimated`.
    ///
    /// **Errors**: as [`parse_number`](crate::parse_number), about the argument "persistence".
    pub fn parse_persistence(text: &str) -> Result<Self> {
        Stated::read(text, |text| crate::parse_number("persistence", text))
    }
}

/// Where the elasticity of marginal utility comes from.
#[derive(Clone, Debug, PartialEq)]
pub enum ElasticitySource {
    /// As given.
    Given(f64),
    /// Tax brackets, by equal absolute sacrifice.
    Taxes(Vec<TaxBracket>),
}

/// Which estimate of a series is its growth.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum GrowthBy {
    /// The log-linear trend.
    Trend,
    /// The mean, from the first value to the last.
    Mean,
}

/// Where growth comes from.
#[derive(Clone, Debug, PartialEq)]
pub enum GrowthSource {
    /// As given: of log growth its mean.
    Given(f64),
    /// A series of consumption.
    Series {
        /// What it says.
        estimate: GrowthEstimate,
        /// What to call it: the workbook and the cells.
        name: String,
        /// Which estimate counts.
        by: GrowthBy,
    },
}

/// The parts of a Ramsey rate, as they are stated; [`RateParts::derive`] puts them together.
#[derive(Clone, Debug, PartialEq)]
pub struct RateParts {
    /// Pure time preference, a fraction per year.
    pub preference: f64,
    /// Hazard.
    pub hazard: Hazard,
    /// Elasticity of marginal utility.
    pub elasticity: ElasticitySource,
    /// Growth of consumption per head.
    pub growth: GrowthSource,
    /// Standard deviation of yearly growth, with persistence that of its yearly shock; none takes growth as certain.
    pub sd: Option<Stated>,
    /// First-order persistence of log growth; none takes years as independent.
    pub persistence: Option<Stated>,
    /// Growth and its standard deviation are those of log growth. So they are, too, where growth persists, and where the
    /// growth of a series is uncertain.
    pub log: bool,
    /// Continuous compounding; that of log growth always is.
    pub continuous: bool,
    /// Figures that are not given but computed (hazard, elasticity, growth, its spread and persistence) are rounded to so
    /// many decimals, rates as percentages, before they are used; none does not round.
    pub decimals: Option<u8>,
}

/// What a figure is to the rate.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum FigureKind {
    /// One that the rate is built from.
    Part,
    /// An estimate that stands behind a part, or beside it.
    Evidence,
    /// A step on the way.
    Step,
    /// The rate itself.
    Rate,
}

/// A figure and where it came from.
#[derive(Clone, Debug, PartialEq)]
pub struct Figure {
    /// What it is to the rate.
    pub kind: FigureKind,
    /// In words, its compounding included where it has one.
    pub name: String,
    /// As formulas call it; empty where none does.
    pub symbol: &'static str,
    /// Its value, of rates a fraction.
    pub value: f64,
    /// Whether it reads as a percentage.
    pub share: bool,
    /// Its standard error, where it is estimated.
    pub error: Option<f64>,
    /// Where it came from.
    pub origin: String,
}

/// A rate with its derivation.
#[derive(Clone, Debug, PartialEq)]
pub struct Derivation {
    figures: Vec<Figure>,
    sentences: Vec<String>,
    spec: Spec,
    curve: Curve,
}

impl Derivation {
    /// Every figure, in the order of the derivation.
    pub fn figures(&self) -> &[Figure] {
        &self.figures
    }

    /// The derivation in words, a sentence each.
    pub fn sentences(&self) -> &[String] {
        &self.sentences
    }

    /// The curve as a spec, whose `Display` is the rate line.
    pub fn spec(&self) -> &Spec {
        &self.spec
    }

    /// The curve.
    pub fn curve(&self) -> &Curve {
        &self.curve
    }
}

impl RateParts {
    /// Puts the parts together.
    ///
    /// **Formula**: rho + eta g, less the precautionary effect where growth is uncertain: eta (eta + 1) s^2/2 of growth,
    /// eta^2 s^2/2 of log growth, (eta s/(1 - phi))^2/2 in the long run of log growth that persists.
    ///
    /// **Returns**: every figure with its origin, the curve, and the rate in both compoundings.
    ///
    /// **Errors**: those of the functions that each figure comes from and of [`Spec::curve`]; `NoMeaning` where an
    /// estimate is asked for and growth is given, or a persistence without a standard deviation.
    ///
    /// ```
    /// use hence_core::{ElasticitySource, GrowthSource, Hazard, RateParts};
    /// // HM Treasury, The Green Book, 2003, Annex 6: 0.5% + 1% + 1 x 2% = 3.5%.
    /// let parts = RateParts {
    ///     preference: 0.005,
    ///     hazard: Hazard::Rate(0.01),
    ///     elasticity: ElasticitySource::Given(1.0),
    ///     growth: GrowthSource::Given(0.02),
    ///     sd: None,
    ///     persistence: None,
    ///     log: false,
    ///     continuous: false,
    ///     decimals: None,
    /// };
    /// let rate = parts.derive()?;
    /// assert_eq!(rate.spec().to_string(), "preference 0.5%, hazard 1%, elasticity 1, growth 2%");
    /// assert_eq!(rate.curve().forward_rate(1.0)?, 0.035);
    /// assert!(rate.sentences()[0].ends_with("= 3.5% a year, compounded yearly."));
    /// # Ok::<(), hence_core::Error>(())
    /// ```
    pub fn derive(&self) -> Result<Derivation> {
        let mut work = Work::new(self);
        let log = self.is_log();
        let compounding = if log || self.continuous { Compounding::Continuous } else { Compounding::Yearly };
        work.preference();
        let hazard = work.hazard(compounding)?;
        let elasticity = work.elasticity()?;
        let growth = work.growth(log)?;
        let persistence = work.persistence()?;
        let sd = work.sd(persistence)?;
        let preference = self.preference;
        let spec = match sd {
            None => Spec::Ramsey {
                preference,
                hazard,
                elasticity,
                growth: vec![Band { value: growth, to: None }],
                exact: false,
                compounding,
            },
            Some(sd) => Spec::UncertainGrowth {
                preference,
                hazard,
                elasticity,
                mean: growth,
                sd,
                log,
                persistence: persistence.map(|phi| Persistence { phi, start: 0.0 }),
                compounding,
            },
        };
        let curve = spec.curve(&Where::default())?;
        let sum = Sum { preference, hazard, elasticity, growth, sd, persistence, log, compounding };
        let mut figures = work.figures();
        let mut sentences = vec![sum.steps(&mut figures, &curve)?];
        sentences.extend(sum.remarks(self));
        Ok(Derivation { figures, sentences, spec, curve })
    }

    /// Whether growth is log growth.
    fn is_log(&self) -> bool {
        let of_series = matches!(self.growth, GrowthSource::Series { .. });
        self.log || self.persistence.is_some() || (of_series && self.sd.is_some())
    }
}
