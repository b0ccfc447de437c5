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

/// First-order persistence: log growth is its mean plus y_n, where y_n = phi y_(n-1) + e_n with a yearly shock e_n.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Persistence {
    /// The share of a year's departure from mean growth that is left a year later, between -1 and 1.
    pub phi: f64,
    /// y_0, the departure from mean log growth in the year that ends at the base; other than 0 in schedule files only.
    pub start: f64,
}

/// One state of growth: log growth is normal with this mean and standard deviation.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct GrowthState {
    /// Mean of log growth, a fraction per year.
    pub mean: f64,
    /// Its standard deviation.
    pub sd: f64,
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
        /// First-order persistence of log growth (only with `log`); `None`: independent from year to year. With it,
        /// `sd` is that of the yearly shock.
        persistence: Option<Persistence>,
        /// Yearly, unless the line says continuous; always continuous with `log`.
        compounding: Compounding,
    },
    /// The Ramsey rule with growth that switches between states from year to year; in schedule files only.
    GrowthRegimes {
        /// Pure time preference, continuous.
        preference: f64,
        /// Hazard, continuous.
        hazard: f64,
        /// Elasticity of marginal utility.
        elasticity: f64,
        /// Log growth in each state.
        states: Vec<GrowthState>,
        /// The chances of passing from a state (row) to each state (column) before the next year's growth is drawn.
        transition: Vec<Vec<f64>>,
        /// The chances of being in each state at the base.
        start: Vec<f64>,
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

impl Spec {
    /// The spec with every rate moved by as much: flat, band and whole-horizon rates, the preference of a Ramsey rule, the
    /// components of a mixture. None for gamma-distributed rates and tables, which state no rate that could be moved.
    ///
    /// **Arguments**: `by`, a fraction per year: 0.01 is a point more. Whether the rates stay in their range is
    /// [`Spec::curve`]'s to say.
    ///
    /// ```
    /// let line = hence_core::RateLine::parse("3.5% to 30, 3% after")?;
    /// assert_eq!(line.spec().shifted(0.01).unwrap().to_string(), "4.5% to 30, 4% after");
    /// # Ok::<(), hence_core::Error>(())
    /// ```
    pub fn shifted(&self, by: f64) -> Option<Spec> {
        // Without the noise that a sum of decimals leaves.
        let moved = |rate: f64| ((rate + by) * 1e15).round() / 1e15;
        let mut spec = self.clone();
        match &mut spec {
            Spec::Flat { rate, .. } => *rate = moved(*rate),
            Spec::Bands { bands, .. } | Spec::HorizonSteps { bands, .. } => {
                bands.iter_mut().for_each(|band| band.value = moved(band.value));
            }
            Spec::HorizonPoints { points, .. } => {
                points.iter_mut().for_each(|point| point.1 = moved(point.1));
            }
            Spec::Ramsey { preference, .. }
            | Spec::UncertainGrowth { preference, .. }
            | Spec::GrowthRegimes { preference, .. } => *preference = moved(*preference),
            Spec::Mixture(components) => {
                for (_, component) in components {
                    *component = component.shifted(by)?;
                }
            }
            Spec::Gamma { .. } | Spec::Table(_) => return None,
        }
        Some(spec)
    }

    /// Whether a rate line can state it. A table of factors, growth in states, and growth that departs from its mean
    /// at the base live in schedule files only.
    pub fn fits_a_line(&self) -> bool {
        match self {
            Spec::Table(_) | Spec::GrowthRegimes { .. } => false,
            Spec::UncertainGrowth { persistence: Some(persistence), .. } => persistence.start == 0.0,
            Spec::Mixture(parts) => parts.iter().all(|(_, spec)| spec.fits_a_line()),
            _ => true,
        }
    }
}
