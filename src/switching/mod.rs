//! Switching values: where a net present value is zero, or two options swap, as one parameter of the basis moves.

mod exponents;
mod flows;
mod law;
mod series;
mod states;

use std::fmt;

use crate::roots::crossings;
use crate::{Error, ErrorKind, OptionFlows, Result, Spec, Where, check, internal_rates};
use exponents::Exponents;
use flows::Row;
use law::{Law, Part};
use series::Sum;
use states::States;

/// A parameter of the basis.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Parameter {
    /// A flat yearly rate in place of the basis.
    Rate,
    /// Pure time preference of a Ramsey line.
    Preference,
    /// Elasticity of marginal utility of a Ramsey line.
    Elasticity,
    /// Growth of a Ramsey line: of log growth its mean, of a path that of its first band, the others moving along.
    Growth,
}

impl Parameter {
    /// All of them.
    pub const ALL: [Parameter; 4] =
        [Parameter::Rate, Parameter::Preference, Parameter::Elasticity, Parameter::Growth];

    /// The interval searched unless another is stated: -50% to 100%, an elasticity from 0 to 20.
    pub fn interval(self) -> (f64, f64) {
        if self == Parameter::Elasticity { (0.0, 20.0) } else { (-0.5, 1.0) }
    }

    /// What it is in a spec; none where the spec is not stated by it.
    ///
    /// ```
    /// use hence_core::{Parameter, RateLine};
    /// let line = RateLine::parse("preference 0.5%, hazard 1%, elasticity 1, growth 2%")?;
    /// assert_eq!(Parameter::Growth.of(line.spec()), Some(0.02));
    /// assert_eq!(Parameter::Growth.of(RateLine::parse("4%")?.spec()), None);
    /// # Ok::<(), hence_core::Error>(())
    /// ```
    pub fn of(self, spec: &Spec) -> Option<f64> {
        match (self, spec) {
            (Parameter::Rate, Spec::Flat { rate, .. }) => Some(*rate),
            (
                Parameter::Preference,
                Spec::Ramsey { preference, .. }
                | Spec::UncertainGrowth { preference, .. }
                | Spec::GrowthRegimes { preference, .. },
            ) => Some(*preference),
            (
                Parameter::Elasticity,
                Spec::Ramsey { elasticity, .. }
                | Spec::UncertainGrowth { elasticity, .. }
                | Spec::GrowthRegimes { elasticity, .. },
            ) => Some(*elasticity),
            (Parameter::Growth, Spec::Ramsey { growth, .. }) => growth.first().map(|band| band.value),
            (Parameter::Growth, Spec::UncertainGrowth { mean, .. }) => Some(*mean),
            (Parameter::Growth, Spec::GrowthRegimes { states, .. }) => states.first().map(|state| state.mean),
            _ => None,
        }
    }

    /// The spec with this parameter at another value, all else as it is; none where the spec is not stated by it. The
    /// rate replaces any spec. Growth of several bands or states moves by as much in each.
    ///
    /// ```
    /// use hence_core::{Parameter, RateLine};
    /// let line = RateLine::parse("preference 1%, elasticity 2, growth 2% to 50, 1% after")?;
    /// let moved = Parameter::Growth.at(line.spec(), 0.025).unwrap();
    /// assert_eq!(moved.to_string(), "preference 1%, elasticity 2, growth 2.5% to 50, 1.5% after");
    /// # Ok::<(), hence_core::Error>(())
    /// ```
    pub fn at(self, spec: &Spec, value: f64) -> Option<Spec> {
        if self == Parameter::Rate {
            return Some(Spec::Flat { rate: value, compounding: crate::Compounding::Yearly });
        }
        let by = value - self.of(spec)?;
        let mut spec = spec.clone();
        match (self, &mut spec) {
            (
                Parameter::Preference,
                Spec::Ramsey { preference: held, .. }
                | Spec::UncertainGrowth { preference: held, .. }
                | Spec::GrowthRegimes { preference: held, .. },
            )
            | (
                Parameter::Elasticity,
                Spec::Ramsey { elasticity: held, .. }
                | Spec::UncertainGrowth { elasticity: held, .. }
                | Spec::GrowthRegimes { elasticity: held, .. },
            )
            | (Parameter::Growth, Spec::UncertainGrowth { mean: held, .. }) => *held = value,
            (Parameter::Growth, Spec::Ramsey { growth, .. }) => {
                let values = growth.iter_mut().map(|band| &mut band.value);
                move_all(values, value, by);
            }
            (Parameter::Growth, Spec::GrowthRegimes { states, .. }) => {
                let values = states.iter_mut().map(|state| &mut state.mean);
                move_all(values, value, by);
            }
            _ => return None,
        }
        Some(spec)
    }
}

/// The first becomes `value`, the others move along, without the noise that a difference of decimals leaves.
fn move_all<'a>(values: impl Iterator<Item = &'a mut f64>, value: f64, by: f64) {
    for (i, held) in values.enumerate() {
        *held = if i == 0 { value } else { ((*held + by) * 1e15).round() / 1e15 };
    }
}

impl fmt::Display for Parameter {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Parameter::Rate => "rate",
            Parameter::Preference => "preference",
            Parameter::Elasticity => "elasticity",
            Parameter::Growth => "growth",
        })
    }
}

/// What the search found.
#[derive(Clone, Debug, PartialEq)]
pub struct Switching {
    /// Every value at which the net present value certainly changes its sign, rising.
    pub values: Vec<f64>,
    /// Narrow intervals, rising, in which the number of values could not be settled: the net present value only touches
    /// zero there, or changes its sign at values too close together to tell apart.
    pub unresolved: Vec<(f64, f64)>,
    /// The interval searched: the one asked for, less what leaves rates of -90% and below, or flows without end that
    /// have no value.
    pub interval: (f64, f64),
    /// Whether the parameter moves the net present value at all: elasticity does not where growth is 0.
    pub moves: bool,
}

/// All values of a parameter in an interval at which the net present value is zero.
///
/// **Formula**: the x with sum of flow_i D(t_i; x) = 0, D the curve of `spec` with the parameter at x, all else as it
/// is. For two options to swap, give the flows of one less those of the other.
///
/// **Arguments**: `net`, offsets and flows, those without end included; `spec` and `at`, the basis (not looked at for
/// [`Parameter::Rate`]); `interval`, the lowest and the highest value of interest, both included (to 1e-13),
/// [`Parameter::interval`] as a rule.
///
/// **Returns**: the values, rising; an empty list says that there is none in the interval, unless `unresolved` says that
/// it could not be told. Every value outside the unresolved intervals is found, however close together: the interval is
/// split until on each piece a bound on the sum shows that it has no root, or a bound on its slope that it has one at
/// most.
///
/// **Conventions**: where the curve is one yearly rate r(x) (flat, Ramsey with one growth, growth uncertain and
/// independent) the values are the internal rates of return put through r(x) = r, an exact relation; else the factors'
/// logarithms, linear in the years of each band, are expanded in x. Flows without end are multiplied out of their
/// geometric series; rates that do not exceed their growth are left out of the interval.
///
/// **Edge cases**: a parameter that moves nothing has no value, and `moves` is false. Where the value touches zero
/// without crossing it, the place is in `unresolved`.
///
/// **Accuracy**: put back, a value makes the net present value zero within 1e-12 of the gross present value, or within
/// rounding of the value itself where that is more.
///
/// **Errors**: those of [`Spec::curve`]; `Shape`, `NotFinite`; `RateRange` for an interval that is empty; `NoMeaning`
/// where every flow is 0, as every value would do; `OutsideDomain` for an offset where the curve is not defined;
/// `Unsupported` where the spec is not stated by the parameter, and for flows without end where growth switches between
/// states: for its elasticity, and where the yearly rates never settle; `Diverges` where flows without end have no value anywhere
/// in the interval.
///
/// **Source**: as for [`internal_rates`]; power series of composed functions with majorants: R. E. Moore, Interval
/// Analysis, 1966.
///
/// ```
/// use hence_core::{OptionFlows, Parameter, RateLine, Where, switching_values};
/// let net = OptionFlows { offsets: &[0.0, 1.0], flows: &[-100.0, 104.0], perpetual: &[] };
/// let spec = RateLine::parse("preference 1.5%, elasticity 1, growth 2%")?.spec().clone();
/// let search = |parameter: Parameter| {
///     switching_values(&net, &spec, &Where::default(), parameter, parameter.interval())
/// };
/// // 4% = 1.5% + elasticity x 2%
/// let found = search(Parameter::Elasticity)?;
/// assert!((found.values[0] - 1.25).abs() < 1e-13 && found.values.len() == 1);
/// assert!((search(Parameter::Growth)?.values[0] - 0.025).abs() < 1e-15);
///
/// let none = OptionFlows { flows: &[0.0, 0.0], ..net };
/// let error = switching_values(&none, &spec, &Where::default(), Parameter::Rate, (0.0, 0.1)).unwrap_err();
/// assert_eq!(error.to_string(), "flows: every flow is 0, so every rate is one of return (no-meaning)");
/// # Ok::<(), hence_core::Error>(())
/// ```
pub fn switching_values(
    net: &OptionFlows,
    spec: &Spec,
    at: &Where,
    parameter: Parameter,
    interval: (f64, f64),
) -> Result<Switching> {
    net.check()?;
    check::finite_all("interval", &[interval.0, interval.1])?;
    if interval.0 >= interval.1 {
        let message = format!("found {} to {}, allowed: a rising pair", interval.0, interval.1);
        return Err(Error::new(ErrorKind::RateRange, "interval", message).with_hint("-0.5 to 1"));
    }
    if let (Parameter::Elasticity, Some(states)) = (parameter, States::of(spec)) {
        let mut found =
            Switching { values: Vec::new(), unresolved: Vec::new(), interval, moves: states.moves() };
        let (flows, factors) = states.over(&spec.curve(at)?, net)?;
        if let (true, Some(sum)) = (found.moves, Sum::new(flows, factors)?) {
            (found.values, found.unresolved) = crossings(&sum, interval);
        }
        return Ok(found);
    }
    let law = Law::of(spec, at, parameter)?;
    let terms = net.terms(&law)?;
    let Some(interval) = terms.clip(&law, interval) else {
        let message = "the parameter leaves no rate at which all flows have a value";
        return Err(Error::new(ErrorKind::Diverges, "interval", message).with_hint("a wider interval"));
    };
    let moves = law.parts.iter().any(Part::moves);
    let mut found = Switching { values: Vec::new(), unresolved: Vec::new(), interval, moves };
    if !moves {
        return Ok(found);
    }
    match law.parts.as_slice() {
        [part] if part.log && part.scale == 1.0 => by_rate(&terms.rows, part, &mut found)?,
        _ => {
            let (flows, factors) = Exponents::of(&law.parts, terms.rows);
            let Some(sum) = Sum::new(flows, factors)? else { return Ok(found) };
            (found.values, found.unresolved) = crossings(&sum, interval);
        }
    }
    Ok(found)
}

/// Through the internal rates of return, where the curve is one yearly rate.
fn by_rate(rows: &[Row], part: &Part, found: &mut Switching) -> Result<()> {
    let (offsets, flows): (Vec<f64>, Vec<f64>) = rows.iter().map(|(flow, years)| (years[0], *flow)).unzip();
    let (low, high) = found.interval;
    let rates = internal_rates(&offsets, &flows, part.image(found.interval))?;
    let slack = |x: f64| 1e-12 * (1.0 + x.abs());
    let within = |x: &f64| (low - slack(low)..=high + slack(high)).contains(x);
    for rate in rates.rates {
        found.values.extend(part.inverse(rate).into_iter().filter(within).map(|x| x.clamp(low, high)));
    }
    for open in rates.unresolved {
        found.unresolved.extend(part.inverses(open).into_iter().filter_map(|(a, b)| {
            let (a, b) = (a.max(low), b.min(high));
            (a <= b).then_some((a, b))
        }));
    }
    found.values.sort_by(f64::total_cmp);
    found.unresolved.sort_by(|a, b| a.0.total_cmp(&b.0));
    Ok(())
}

/// The multiplier of one stream at which the net present value is zero: 1 is the stream as it is.
///
/// **Formula**: 1 - net / stream, since the net present value is linear in the multiplier.
///
/// **Arguments**: `net`, the net present value (or that of one option less another's); `stream`, the part of it that the
/// multiplier scales, with its sign in the net: a cost is negative.
///
/// **Returns**: the multiplier; none where the stream adds nothing, so that no multiple of it changes the sign.
/// Negative where the stream would have to turn into its opposite.
///
/// **Errors**: `NotFinite`.
///
/// ```
/// use hence_core::switching_multiplier;
/// // Benefits 120, costs 100: the cost may rise by a fifth, the benefits fall by a sixth.
/// assert_eq!(switching_multiplier(20.0, -100.0)?, Some(1.2));
/// assert!((switching_multiplier(20.0, 120.0)?.unwrap() - 5.0 / 6.0).abs() < 1e-15);
/// assert_eq!(switching_multiplier(20.0, 0.0)?, None);
/// assert_eq!(switching_multiplier(f64::NAN, 1.0).unwrap_err().code(), "not-finite");
/// # Ok::<(), hence_core::Error>(())
/// ```
pub fn switching_multiplier(net: f64, stream: f64) -> Result<Option<f64>> {
    check::finite("net", net)?;
    check::finite("stream", stream)?;
    // Adding zero turns -0 into 0.
    Ok(Some(1.0 - net / stream + 0.0).filter(|x| x.is_finite()))
}

/// The error where every value of a parameter would do.
fn no_flows() -> Error {
    Error::new(ErrorKind::NoMeaning, "flows", "every flow is 0, so every value makes the net present value 0")
        .with_hint("flows other than 0")
}
