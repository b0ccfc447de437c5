//! What a rate line or a schedule says of a curve, before base year and length are known.

/// How a rate compounds.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Compounding {
    /// (1+r)^-t
    Yearly,
    /// exp(-r t)
    Continuous,
}

/// Where a band ends: an offset in years, or the end of a calendar year.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Edge {
    /// Years from the base (or from [`Spec::Bands::edges_from`]).
    Offset(f64),
    /// A calendar year (1000 or more); its offset is year - base year.
    Year(i32),
}

/// One band: a value (a rate, or a growth rate) and the edge up to which it holds; `None` is "after".
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Band {
    /// The rate or growth of the band, a fraction per year.
    pub value: f64,
    /// The last edge of the band, which belongs to it.
    pub to: Option<Edge>,
}

/// How a whole-horizon schedule picks its rate.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum HorizonRule {
    /// By the offset of each flow: (1 + r(t))^-t.
    ByFlow,
    /// By the length of the appraisal: (1 + r(T))^-t.
    ByLength,
}

/// A curve as stated. [`Spec::curve`] makes it computable; `Display` prints the canonical rate line.
#[derive(Clone, Debug, PartialEq)]
pub enum Spec {
    /// One rate for ever.
    Flat {
        /// Fraction per year.
        rate: f64,
        /// Yearly or continuous.
        compounding: Compounding,
    },
    /// Forward rates by band.
    Bands {
        /// In order of their edges.
        bands: Vec<Band>,
        /// The calendar year the offset edges count from, where it is not the base year.
        edges_from: Option<i32>,
    },
    /// Whole-horizon rates, stepped: the band that holds t (or T).
    HorizonSteps {
        /// In order of their edges.
        bands: Vec<Band>,
        /// By flow or by length.
        rule: HorizonRule,
    },
    /// Whole-horizon rates, interpolated linearly between points; the first and last rate hold outside.
    HorizonPoints {
        /// (offset, rate), offsets increasing.
        points: Vec<(f64, f64)>,
        /// By flow or by length.
        rule: HorizonRule,
    },
    /// The Ramsey rule; growth is constant (one band without edge) or a path by bands of years.
    Ramsey {
        /// Pure time preference, a fraction per year.
        preference: f64,
        /// Hazard, a fraction per year; 0 where not stated.
        hazard: f64,
        /// Elasticity of marginal utility.
        elasticity: f64,
        /// Growth of consumption per head by band.
        growth: Vec<Band>,
        /// False: rho + eta g. True: (1+rho)(1+g)^eta - 1.
        exact: bool,
        /// Yearly, unless the line says continuous (only where not exact).
        compounding: Compounding,
    },
    /// The Ramsey rule with uncertain growth.
    UncertainGrowth {
        /// Pure time preference.
        preference: f64,
        /// Hazard.
        hazard: f64,
        /// Elasticity of marginal utility.
        elasticity: f64,
        /// Expected growth, or with `log` the mean of log growth.
        mean: f64,
        /// Standard deviation of growth (of log growth with `log`).
        sd: f64,
        /// Growth is stated as log growth; compounding is then continuous.
        log: bool,
        /// First-order persistence; only `None` is computed in this version.
        persistence: Option<f64>,
        /// Yearly, unless the line says continuous; always continuous with `log`.
        compounding: Compounding,
    },
    /// Gamma-distributed continuous rates.
    Gamma {
        /// Mean rate.
        mean: f64,
        /// Standard deviation.
        sd: f64,
    },
    /// A weighted sum of the factors of other curves.
    Mixture(Vec<(f64, Spec)>),
    /// Factors by offset, log-linear between; in schedule files only.
    Table(Vec<(f64, f64)>),
}

/// What a curve may need to know of the appraisal.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Where {
    /// The calendar year of the base (a financial year's or date's year), for calendar edges.
    pub base_year: Option<i32>,
    /// The appraisal's length in years: the largest offset of its flows, unless stated.
    pub length: Option<f64>,
}
