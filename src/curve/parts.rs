//! What a curve is made of, for whoever rebuilds its factors by a second, independent route.

use super::edges::Edges;
use crate::{GrowthState, Persistence};

/// The resolved make-up of a [`Curve`](crate::Curve): offsets instead of calendar years, rates instead of
/// preference and growth, enough to recompute every factor without this library.
///
/// **Conventions**: rates are fractions per year, edges offsets in years. `edges[k]` closes band k and belongs to
/// it; `rates` has one entry per band, so `rates.len()` is `edges.len() + 1` where the last band is `open`, else
/// `edges.len()`. An edge may be 0 or negative (a calendar band that ended before the base).
///
/// **Accuracy**: rates derived from preference, elasticity and growth are rounded to doubles here, while the curve
/// itself keeps more digits; factors rebuilt from them agree to about 1e-13 over centuries.
#[derive(Clone, Debug, PartialEq)]
#[non_exhaustive]
pub enum Parts {
    /// (1 + rate)^-t.
    Yearly {
        /// The yearly rate.
        rate: f64,
    },
    /// exp(-rate t).
    Continuous {
        /// The continuous rate.
        rate: f64,
    },
    /// Forward: product over bands of (1 + rate)^-(years of (0, t] inside the band); before 0, the bands extend
    /// backwards as they lie.
    Bands {
        /// The offset that closes each band.
        edges: Vec<f64>,
        /// The yearly forward rate of each band (a continuous rate x as exp(x) - 1).
        rates: Vec<f64>,
        /// Whether the last rate has no end.
        open: bool,
    },
    /// (1 + r(t))^-t with r the rate of the band that holds t.
    HorizonSteps {
        /// The offset that closes each band.
        edges: Vec<f64>,
        /// The rate of each band.
        rates: Vec<f64>,
        /// Whether the last rate has no end.
        open: bool,
    },
    /// (1 + r(t))^-t with r interpolated linearly in t, the first and last rate holding outside.
    HorizonPoints {
        /// (offset, rate), offsets increasing.
        points: Vec<(f64, f64)>,
    },
    /// (1 + rate)^-t with the one rate that belongs to an appraisal of this length.
    OneRate {
        /// The rate picked, or interpolated.
        rate: f64,
        /// The length it was picked for, in years.
        length: f64,
    },
    /// Product over years of 1 / ((1 + rho)(1 + growth)^elasticity).
    RamseyExact {
        /// Pure time preference and hazard together.
        rho: f64,
        /// Elasticity of marginal utility.
        elasticity: f64,
        /// The offset that closes each band of growth.
        edges: Vec<f64>,
        /// The growth of each band.
        growth: Vec<f64>,
        /// Whether the last growth has no end.
        open: bool,
    },
    /// Log growth mean + y_n, y_n = phi y_(n-1) + a shock of standard deviation sd, from y_0 at the base: the continuous
    /// rate of year n is rho + elasticity (mean + phi^n y_0) - elasticity^2 sd^2 ((1 - phi^n)/(1 - phi))^2 / 2.
    PersistentGrowth {
        /// Pure time preference and hazard together, continuous.
        rho: f64,
        /// Elasticity of marginal utility.
        elasticity: f64,
        /// Mean of log growth.
        mean: f64,
        /// Standard deviation of the yearly shock.
        sd: f64,
        /// phi and y_0.
        persistence: Persistence,
    },
    /// exp(-rho n) times the sum of a row that begins as the chances at the base and is multiplied every year by the
    /// transition and then by each state's exp(-elasticity mean + elasticity^2 sd^2/2); log-linear between years.
    GrowthRegimes {
        /// Pure time preference and hazard together, continuous.
        rho: f64,
        /// Elasticity of marginal utility.
        elasticity: f64,
        /// Log growth in each state.
        states: Vec<GrowthState>,
        /// The chances of passing from a state (row) to each state.
        transition: Vec<Vec<f64>>,
        /// The chances of each state at the base.
        start: Vec<f64>,
    },
    /// (1 + t sd^2/mean)^-(mean^2/sd^2), continuous rates.
    Gamma {
        /// The mean rate.
        mean: f64,
        /// The standard deviation of the rates.
        sd: f64,
    },
    /// Sum of weight times factor, divided by the sum of the weights.
    Mixture(Vec<(f64, Parts)>),
    /// Factors by offset, log-linear between.
    Table(Vec<(f64, f64)>),
}

impl Parts {
    pub(super) fn bands(edges: &Edges, rates: Vec<f64>) -> Parts {
        Parts::Bands { edges: edges.closed(), rates, open: edges.open() }
    }
}
