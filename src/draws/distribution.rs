//! What a quantity of the discount rate is drawn from.

use super::flows::Row;
use super::normal::{lower_probability, quantile, quantiles};
use crate::curve::{check_elasticity, check_growth, check_hazard, check_preference};
use crate::rateline::{percent, plain};
use crate::{Error, ErrorKind, Result, check};

/// A quantity of the discount rate that may be uncertain.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Quantity {
    /// Pure time preference, a fraction per year.
    Preference,
    /// Hazard, a fraction per year.
    Hazard,
    /// Elasticity of marginal utility, a plain number.
    Elasticity,
    /// Growth of consumption per head, a fraction per year.
    Growth,
}

impl Quantity {
    /// All of them, in the order in which a draw takes its random numbers.
    pub const ALL: [Quantity; 4] =
        [Quantity::Preference, Quantity::Hazard, Quantity::Elasticity, Quantity::Growth];

    /// Its word in a rate line.
    pub fn name(self) -> &'static str {
        match self {
            Quantity::Preference => "preference",
            Quantity::Hazard => "hazard",
            Quantity::Elasticity => "elasticity",
            Quantity::Growth => "growth",
        }
    }

    /// Whether texts state it in percent.
    pub fn is_share(self) -> bool {
        self != Quantity::Elasticity
    }

    /// A value of it as text: 0.01 is "1%", an elasticity "1.5".
    pub fn text(self, value: f64) -> String {
        if self.is_share() { percent(value) } else { plain(value) }
    }

    /// Refuses a value that a rate line could not state.
    pub(super) fn check(self, value: f64) -> Result<()> {
        match self {
            Quantity::Preference => check_preference(value),
            Quantity::Hazard => check_hazard(value),
            Quantity::Elasticity => check_elasticity(value),
            Quantity::Growth => check_growth(value),
        }
    }
}

/// A distribution, as a text states it.
///
/// ```text
/// 1%                                          a fixed value
/// normal mean 1% sd 0.3%
/// normal mean 1% sd 0.3% within 0% to 2%      cut off at the bounds, the rest made whole again
/// uniform 1% to 3%
/// triangular 1%, 1.5%, 2%                     lowest, most likely, highest
/// 0.3 at 1%, 0.7 at 2%                        values with their probabilities
/// ```
///
/// [`Distribution::parse`] reads such a text, [`Distribution::text`] prints the canonical one.
#[derive(Clone, Debug, PartialEq)]
pub enum Distribution {
    /// One value.
    Fixed(f64),
    /// The normal distribution.
    Normal {
        /// Its mean, before bounds.
        mean: f64,
        /// Its standard deviation, before bounds; above 0.
        sd: f64,
        /// The bounds it is cut off at, with what lies between them scaled to probability 1.
        within: Option<(f64, f64)>,
    },
    /// Every value of an interval alike.
    Uniform {
        /// Its lower end.
        lowest: f64,
        /// Its upper end.
        highest: f64,
    },
    /// A density that rises in a straight line and falls in another.
    Triangular {
        /// Where it rises from 0.
        lowest: f64,
        /// Where it is highest.
        mode: f64,
        /// Where it is 0 again.
        highest: f64,
    },
    /// Probabilities and values; the probabilities sum to 1.
    Discrete(Vec<(f64, f64)>),
}

/// Probabilities must sum to 1 within this, which leaves room for the rounding of their doubles only.
const WEIGHT_TOLERANCE: f64 = 1e-12;

/// Bounds that keep less of a normal distribution than this are taken for a slip.
const LEAST_KEPT: f64 = 0.01;

impl Distribution {
    /// Whether it holds one value only.
    pub fn is_fixed(&self) -> bool {
        matches!(self, Distribution::Fixed(_))
    }

    /// The value below which a draw falls with probability p.
    ///
    /// **Formula**: normal m + s z(p), z the standard normal quantile, and with bounds m + s z(F(a) + p (F(b) - F(a))), F
    /// its distribution function; uniform a + p (b - a); triangular a + sqrt(p (b - a)(c - a)) up to its mode c and
    /// b - sqrt((1 - p)(b - a)(b - c)) from there; discrete the first value, in the order stated, up to which the
    /// probabilities sum to p or more.
    ///
    /// **Arguments**: `quantity`, for the ranges; `p`, above 0 and below 1.
    ///
    /// **Accuracy**: a few units in the last place; the normal quantile is within 1e-15 of itself.
    ///
    /// **Errors**: `RateRange` for p, and as [`RateDistribution::new`](crate::RateDistribution::new).
    ///
    /// ```
    /// use hence_core::{Distribution, Quantity};
    /// let growth = Distribution::parse(Quantity::Growth, "triangular 1%, 1%, 3%")?;
    /// assert_eq!(growth.quantile(Quantity::Growth, 0.75)?, 0.02);
    /// assert!(growth.quantile(Quantity::Growth, 1.0).is_err());
    /// # Ok::<(), hence_core::Error>(())
    /// ```
    pub fn quantile(&self, quantity: Quantity, p: f64) -> Result<f64> {
        check::finite("p", p)?;
        if !(p > 0.0 && p < 1.0) {
            let message = format!("p is {p}, allowed above 0 and below 1");
            return Err(Error::new(ErrorKind::RateRange, "p", message).with_hint("0.5 for the median"));
        }
        Ok(Sampler::new(quantity, self)?.value(p))
    }

    /// Its least and its greatest value; infinite for a normal distribution without bounds.
    fn support(&self) -> (f64, f64) {
        match self {
            Distribution::Fixed(value) => (*value, *value),
            Distribution::Normal { within, .. } => within.unwrap_or((f64::NEG_INFINITY, f64::INFINITY)),
            Distribution::Uniform { lowest, highest } | Distribution::Triangular { lowest, highest, .. } => {
                (*lowest, *highest)
            }
            Distribution::Discrete(values) => {
                values.iter().fold((f64::INFINITY, f64::NEG_INFINITY), |(low, high), (_, value)| {
                    (low.min(*value), high.max(*value))
                })
            }
        }
    }

    /// Refuses what cannot be drawn from.
    pub(crate) fn check(&self, quantity: Quantity) -> Result<()> {
        Sampler::new(quantity, self).map(|_| ())
    }

    /// Refuses numbers that make no distribution, and values that a rate line could not state.
    fn check_numbers(&self, quantity: Quantity) -> Result<()> {
        let refuse = |message: String, hint: &str| {
            Err(Error::new(ErrorKind::RateRange, quantity.name(), message).with_hint(hint))
        };
        let show = |value: f64| quantity.text(value);
        match self {
            Distribution::Fixed(value) => check::finite(quantity.name(), *value)?,
            Distribution::Normal { mean, sd, within } => {
                quantity.check(*mean)?;
                check::finite("sd", *sd)?;
                if *sd <= 0.0 {
                    let message = format!("the standard deviation is {}, allowed above 0", show(*sd));
                    return refuse(message, "the mean alone, where nothing is uncertain");
                }
                if let Some((low, high)) = within {
                    ordered(quantity, &[*low, *high])?;
                }
            }
            Distribution::Uniform { lowest, highest } => ordered(quantity, &[*lowest, *highest])?,
            Distribution::Triangular { lowest, mode, highest } => {
                ordered(quantity, &[*lowest, *highest])?;
                if !(lowest <= mode && mode <= highest) {
                    let (low, high) = (show(*lowest), show(*highest));
                    let message =
                        format!("the most likely value, {}, is not from {low} to {high}", show(*mode));
                    return refuse(message, "lowest, most likely, highest, in that order");
                }
            }
            Distribution::Discrete(values) => weights(quantity, values)?,
        }
        let (low, high) = self.support();
        for end in [low, high].into_iter().filter(|end| end.is_finite()) {
            quantity.check(end)?;
        }
        Ok(())
    }
}

/// Ends of an interval, in their order.
fn ordered(quantity: Quantity, ends: &[f64; 2]) -> Result<()> {
    check::finite_all(quantity.name(), ends)?;
    if ends[0] < ends[1] {
        return Ok(());
    }
    let [low, high] = ends.map(|end| quantity.text(end));
    let message = format!("the highest value, {high}, is not above the lowest, {low}");
    Err(Error::new(ErrorKind::RateRange, quantity.name(), message).with_hint("the lowest value first"))
}

/// Probabilities of 0 to 1 that sum to 1.
fn weights(quantity: Quantity, values: &[(f64, f64)]) -> Result<()> {
    let refuse = |message: String| Err(Error::new(ErrorKind::Weights, quantity.name(), message));
    for (index, (weight, value)) in values.iter().enumerate() {
        check::finite_all(quantity.name(), &[*weight, *value]).map_err(|error| error.with_index(index))?;
        if !(0.0..=1.0).contains(weight) {
            return refuse(format!("a probability is {}, allowed 0 to 1", plain(*weight)));
        }
    }
    let total: f64 = values.iter().map(|(weight, _)| weight).sum();
    if (total - 1.0).abs() > WEIGHT_TOLERANCE {
        return refuse(format!("the probabilities sum to {}, and must sum to 1", plain(total)));
    }
    Ok(())
}

/// The largest probability that the quantile takes.
const BELOW_ONE: f64 = 1.0 - f64::EPSILON / 2.0;

/// A distribution made ready to draw from.
#[derive(Clone, Debug)]
pub(super) enum Sampler {
    Fixed(f64),
    Normal {
        mean: f64,
        sd: f64,
    },
    /// Probabilities from `from` over `span`; `sd` is negative where the distribution is mirrored.
    Bounded {
        mean: f64,
        sd: f64,
        from: f64,
        span: f64,
        within: (f64, f64),
    },
    Uniform {
        lowest: f64,
        width: f64,
    },
    /// `rise`: the probability up to the mode.
    Triangular {
        lowest: f64,
        highest: f64,
        rise: f64,
        up: f64,
        down: f64,
    },
    /// Sums of the probabilities, with the values.
    Discrete(Vec<(f64, f64)>),
}

impl Sampler {
    pub(super) fn new(quantity: Quantity, distribution: &Distribution) -> Result<Self> {
        distribution.check_numbers(quantity).map_err(|error| error.about(quantity.name()))?;
        Ok(match distribution {
            Distribution::Fixed(value) => Sampler::Fixed(*value),
            Distribution::Normal { mean, sd, within: None } => Sampler::Normal { mean: *mean, sd: *sd },
            Distribution::Normal { mean, sd, within: Some(within) } => {
                bounded(quantity, *mean, *sd, *within)?
            }
            Distribution::Uniform { lowest, highest } => {
                Sampler::Uniform { lowest: *lowest, width: highest - lowest }
            }
            Distribution::Triangular { lowest, mode, highest } => {
                let width = highest - lowest;
                Sampler::Triangular {
                    lowest: *lowest,
                    highest: *highest,
                    rise: (mode - lowest) / width,
                    up: width * (mode - lowest),
                    down: width * (highest - mode),
                }
            }
            Distribution::Discrete(values) => {
                let mut sum = 0.0;
                let mut sums: Vec<(f64, f64)> = Vec::with_capacity(values.len());
                for (weight, value) in values.iter().filter(|(weight, _)| *weight > 0.0) {
                    sum += weight;
                    sums.push((sum, *value));
                }
                if let Some(last) = sums.last_mut() {
                    // The rounding of the probabilities leaves no gap at the end.
                    last.0 = 1.0;
                }
                Sampler::Discrete(sums)
            }
        })
    }

    /// The value below which a draw falls with probability p, 0 < p < 1.
    #[inline]
    pub(super) fn value(&self, p: f64) -> f64 {
        match self {
            Sampler::Fixed(value) => *value,
            Sampler::Normal { mean, sd } => mean + sd * quantile(p),
            Sampler::Bounded { mean, sd, from, span, within } => {
                let p = if *sd < 0.0 { 1.0 - p } else { p };
                (mean + sd * quantile((from + p * span).min(BELOW_ONE))).clamp(within.0, within.1)
            }
            Sampler::Uniform { lowest, width } => lowest + p * width,
            Sampler::Triangular { lowest, highest, rise, up, down } => {
                if p <= *rise {
                    lowest + (p * up).sqrt()
                } else {
                    highest - ((1.0 - p) * down).sqrt()
                }
            }
            Sampler::Discrete(sums) => {
                sums.iter().find(|(sum, _)| p <= *sum).map_or(f64::NAN, |(_, value)| *value)
            }
        }
    }

    /// As [`Sampler::value`], of many at once and to the same bits.
    #[inline]
    pub(super) fn values(&self, p: &Row) -> Row {
        match self {
            Sampler::Fixed(value) => [*value; _],
            Sampler::Normal { mean, sd } => quantiles(p).map(|z| mean + sd * z),
            sampler => p.map(|p| sampler.value(p)),
        }
    }
}

/// A normal distribution between bounds. Bounds above the mean are mirrored to below it, where small probabilities keep
/// their digits.
fn bounded(quantity: Quantity, mean: f64, sd: f64, within: (f64, f64)) -> Result<Sampler> {
    let (low, high) = ((within.0 - mean) / sd, (within.1 - mean) / sd);
    let mirrored = low > 0.0;
    let (low, high) = if mirrored { (-high, -low) } else { (low, high) };
    let from = lower_probability(low);
    let upto = if high <= 0.0 { lower_probability(high) } else { 1.0 - lower_probability(-high) };
    let span = upto - from;
    if span < LEAST_KEPT {
        let kept = percent((span * 1e6).round() / 1e6);
        let message = format!("the bounds keep {kept} of the normal distribution, allowed 1% or more");
        return Err(Error::new(ErrorKind::NoMeaning, quantity.name(), message)
            .with_hint("bounds around the mean, or a distribution that lies between them"));
    }
    Ok(Sampler::Bounded { mean, sd: if mirrored { -sd } else { sd }, from, span, within })
}
