//! The discount curve D(t) and its rates.

mod build;
mod checks;
mod domain;
mod edges;
mod gamma;
mod horizon;
mod many;
mod mixture;
mod parts;
mod persistent;
mod piecewise;
mod ramsey;
mod regimes;
mod years;

pub(crate) use checks::{
    elasticity as check_elasticity, finite as check_finite, growth as check_growth, hazard as check_hazard,
    preference as check_preference, rate as check_rate,
};
pub use domain::Domain;
pub use parts::Parts;
pub(crate) use persistent::settled;

use crate::dd::{Dd, exp2, exp2_m1};
use crate::{Error, ErrorKind, Position, Result, Spec, Timing};
use gamma::Gamma;
use horizon::ByFlow;
use many::Batch;
use mixture::Mixture;
use piecewise::{Flat, Piecewise};
use years::Years;

/// A factor with this logarithm to base 2 is 0, with room for the rounding of an offset: the least double is 2^-1074.
const VANISHED: f64 = -1100.0;

/// How the logarithm of the factor is computed.
#[derive(Clone, Debug, PartialEq)]
enum Form {
    Flat(Flat),
    Lines(Piecewise),
    ByFlow(ByFlow),
    Years(Years),
    Gamma(Gamma),
    Mixture(Mixture),
}

impl Form {
    /// log2 D(t) to about 100 bits; t lies in the domain.
    fn log2(&self, t: f64) -> Dd {
        match self {
            Form::Flat(flat) => flat.log2(t),
            Form::Lines(lines) => lines.log2(t),
            Form::ByFlow(horizon) => horizon.log2(t),
            Form::Years(years) => years.log2(t),
            Form::Gamma(gamma) => gamma.log2(t),
            Form::Mixture(mixture) => mixture.log2(t),
        }
    }

    /// D(t) to about 58 bits.
    fn factor(&self, t: f64) -> Dd {
        match self {
            Form::Mixture(mixture) => mixture.factor(t),
            _ => exp2(self.log2(t)),
        }
    }

    /// An offset from which on the factor is 0; infinite where there is none, or none is known.
    fn vanishes(&self) -> f64 {
        match self {
            Form::Flat(flat) => flat.below(VANISHED),
            Form::Lines(lines) => lines.below(VANISHED),
            _ => f64::INFINITY,
        }
    }

    /// -D'(t)/D(t).
    fn instantaneous(&self, t: f64) -> Dd {
        match self {
            Form::Flat(flat) => flat.instantaneous(),
            Form::Lines(lines) => lines.instantaneous(t),
            Form::ByFlow(horizon) => horizon.instantaneous(t),
            Form::Years(years) => years.instantaneous(t),
            Form::Gamma(gamma) => gamma.instantaneous(t),
            Form::Mixture(mixture) => mixture.instantaneous(t),
        }
    }

    /// -D'/D just after 0.
    fn initial(&self) -> Dd {
        match self {
            Form::Flat(flat) => flat.instantaneous(),
            Form::Lines(lines) => lines.initial(),
            Form::ByFlow(horizon) => horizon.initial(),
            Form::Years(years) => years.initial(),
            Form::Gamma(gamma) => gamma.instantaneous(0.0),
            Form::Mixture(mixture) => mixture.initial(),
        }
    }

    /// Whether factors from offset 0 on cannot exceed 1, so that none overflows.
    fn bounded(&self) -> bool {
        match self {
            Form::Flat(flat) => flat.falls(),
            Form::Lines(lines) => lines.falls(),
            Form::ByFlow(horizon) => horizon.bounded(),
            Form::Years(years) => years.bounded(),
            Form::Gamma(_) => true,
            Form::Mixture(mixture) => mixture.components().iter().all(|(_, curve)| curve.bounded),
        }
    }
}

/// A discount curve, ready to compute: D(t) is the value at the base of one unit at offset t years, D(0) = 1.
///
/// Made by [`Spec::curve`]. Immutable; cheap to share between threads.
///
/// **Accuracy**: factors are within 2 units in the last place of the exact function at the stored parameters, for
/// offsets to 1,000 years and factors that are not subnormal; rates likewise. Logarithms carry about 100 bits and
/// only the result is rounded, with the library's own arithmetic, so results are the same bits on every platform.
/// `tests/core/accuracy.rs` compares with an arbitrary-precision library. Beyond the range of doubles a factor
/// is 0, or the error `NotFinite`.
#[derive(Clone, Debug, PartialEq)]
pub struct Curve {
    spec: Spec,
    form: Form,
    domain: Domain,
    parts: Parts,
    bounded: bool,
}

impl Curve {
    fn new(spec: Spec, form: Form, domain: Domain, parts: Parts) -> Curve {
        let bounded = form.bounded();
        Curve { spec, form, domain, parts, bounded }
    }

    /// The spec it was made from, as stated (calendar edges and growth unresolved).
    pub fn spec(&self) -> &Spec {
        &self.spec
    }

    /// What it is made of once base year and length are known: offsets and rates.
    pub fn parts(&self) -> &Parts {
        &self.parts
    }

    /// The offsets at which it is defined.
    pub fn domain(&self) -> Domain {
        self.domain
    }

    /// The discount factor D(t).
    ///
    /// **Formula**: by kind of curve, (1+r)^-t (flat, yearly); exp(-r t) (flat, continuous); product over bands of
    /// (1+r_k)^-(years of (0,t] inside band k) (banded); (1+r(t))^-t (whole horizon by flow), (1+r(T))^-t (by
    /// length T); product over years of 1/((1+rho)(1+g)^eta) (Ramsey, exact); (1 + t s^2/m)^-(m^2/s^2) (gamma);
    /// sum of w_i D_i(t) (mixture); log-linear between given factors (table).
    ///
    /// Where growth is uncertain, with rho preference and hazard, eta elasticity, m and s mean and standard deviation
    /// of log growth: exp(-t(rho + eta m - eta^2 s^2/2)) where years are independent. Where growth persists by a share
    /// phi from y_0 at the base, at whole years n, ln D(n) = -rho n - eta E + eta^2 V/2 with
    /// E = n m + y_0 phi(1-phi^n)/(1-phi) and
    /// V = s^2/(1-phi)^2 (n - 2 phi(1-phi^n)/(1-phi) + phi^2(1-phi^(2n))/(1-phi^2)), s being that of the yearly shock.
    /// Where it switches between states by the chances P from the chances pi at the base,
    /// D(n) = exp(-rho n) pi' (P M)^n 1 with M = diag(exp(-eta m_j + eta^2 s_j^2/2)). Both log-linear between years.
    ///
    /// **Arguments**: `t`, offset in years from the base, within [`Curve::domain`]; fractions are allowed.
    ///
    /// **Returns**: the factor, a pure number, not rounded; exactly 1 at 0; 0 where it underflows.
    ///
    /// **Conventions**: an edge belongs to the earlier band; before 0 the first rate extends backwards; growth by
    /// path or by chance is known from 0 on only.
    ///
    /// **Errors**: `NotFinite` for an offset that is NaN or infinite, or a factor too large for a double;
    /// `OutsideDomain` elsewhere, never an extrapolation.
    ///
    /// **Source**: for the declining schedules HM Treasury, "The Green Book", 2003, Annex 6; for gamma
    /// M. Weitzman, "Gamma discounting", American Economic Review 91, 2001; for the Ramsey rule F. Ramsey, "A
    /// mathematical theory of saving", Economic Journal 38, 1928; for uncertain growth that persists or switches
    /// C. Gollier, "Pricing the Planet's Future", 2013, ch. 3 to 5, from memory: both follow from the mean of a
    /// log-normal variable, E exp(-eta x) = exp(-eta E x + eta^2 Var x/2).
    ///
    /// ```
    /// use hence_core::{Compounding, ErrorKind, Spec, Where};
    /// let million = |compounding| -> hence_core::Result<f64> {
    ///     let curve = Spec::Flat { rate: 0.1, compounding }.curve(&Where::default())?;
    ///     Ok(1_000_000.0 * curve.factor(140.0)?)
    /// };
    /// // 1,000,000 due in 140 years at 10%: whether it is worth "less than one" depends on the compounding.
    /// assert_eq!(format!("{:.3}", million(Compounding::Yearly)?), "1.603");
    /// assert_eq!(format!("{:.3}", million(Compounding::Continuous)?), "0.832");
    ///
    /// let table = Spec::Table(vec![(0.0, 1.0), (10.0, 0.7)]).curve(&Where::default())?;
    /// assert_eq!(table.factor(11.0).unwrap_err().kind(), ErrorKind::OutsideDomain);
    /// # Ok::<(), hence_core::Error>(())
    /// ```
    pub fn factor(&self, t: f64) -> Result<f64> {
        self.check("offset", t)?;
        finite_factor(t, self.form.factor(t).hi)
    }

    /// The factors of many offsets, in their order, each equal bit for bit to [`Curve::factor`].
    ///
    /// **Arguments**: `offsets` in years; `factors`, of the same length, receives the results. Both may be empty.
    ///
    /// **Errors**: `Shape` where the lengths differ; otherwise as for one offset, with the index of the first
    /// offset refused. `factors` is then untouched.
    pub fn factors(&self, offsets: &[f64], factors: &mut [f64]) -> Result<()> {
        if offsets.len() != factors.len() {
            return Err(Error::new(
                ErrorKind::Shape,
                "factors",
                format!("{} offsets, but room for {} factors", offsets.len(), factors.len()),
            ));
        }
        let batch = self.batch(offsets);
        if !batch.safe(offsets) {
            for (index, &t) in offsets.iter().enumerate() {
                self.factor(t).map_err(|e| e.with_index(index))?;
            }
        }
        for (offsets, factors) in offsets.chunks(1024).zip(factors.chunks_mut(1024)) {
            if batch.factors(offsets, factors).is_none() {
                batch.compute(offsets, factors);
            }
        }
        Ok(())
    }

    /// Makes ready for the factors of these offsets.
    pub(crate) fn batch(&self, offsets: &[f64]) -> Batch<'_> {
        Batch::new(self, offsets)
    }

    /// The factor of a flow in the year `years` after the base year, under a timing.
    ///
    /// **Formula**: D(years + position of flows - position of base), positions being start 0, middle 1/2, end 1;
    /// with `Averaged` flows the mean of the factors at the start and at the end of the year.
    ///
    /// **Errors**: as [`Curve::factor`]; `NoMeaning` for a base position `Averaged`. A flow before the base (the
    /// base year's own start, say) has a negative offset, which not every curve allows.
    pub fn timed_factor(&self, years: f64, timing: Timing) -> Result<f64> {
        let Some(base) = fraction(timing.base) else {
            return Err(Error::new(
                ErrorKind::NoMeaning,
                "timing",
                "the base stands at the start, middle or end of its year, not averaged",
            ));
        };
        if let Some(flows) = fraction(timing.flows) {
            return self.factor(years + (flows - base));
        }
        let (start, end) = (years - base, years + (1.0 - base));
        self.check("offset", start)?;
        self.check("offset", end)?;
        let mean = (self.form.factor(start) + self.form.factor(end)).hi * 0.5;
        finite_factor(start, mean)
    }

    /// The forward rate of year n, D(n-1)/D(n) - 1: what the factor loses over the year that ends at offset n.
    ///
    /// **Arguments**: `n`, an offset in years such that n - 1 and n are in the domain; usually whole.
    ///
    /// **Returns**: a fraction per year, yearly compounding; that of a flat yearly curve is its rate. Negative
    /// where the factor rises.
    ///
    /// **Errors**: as [`Curve::factor`].
    pub fn forward_rate(&self, n: f64) -> Result<f64> {
        self.check("offset", n)?;
        self.check("offset", n - 1.0)?;
        finite_rate(n, exp2_m1(self.form.log2(n - 1.0) - self.form.log2(n)).hi)
    }

    /// The mean rate to t with yearly compounding, D(t)^(-1/t) - 1: the flat rate with the same factor at t.
    ///
    /// **Returns**: a fraction per year; at t = 0 the limit from above.
    ///
    /// **Errors**: as [`Curve::factor`].
    pub fn mean_rate(&self, t: f64) -> Result<f64> {
        let mean = self.mean_log2(t)?;
        finite_rate(t, exp2_m1(mean).hi)
    }

    /// The mean rate to t with continuous compounding, -ln D(t)/t.
    ///
    /// **Returns**: a fraction per year; at t = 0 the limit from above.
    ///
    /// **Errors**: as [`Curve::factor`].
    pub fn mean_rate_continuous(&self, t: f64) -> Result<f64> {
        Ok((self.mean_log2(t)? * Dd::LN2).hi)
    }

    /// The instantaneous rate -D'(t)/D(t), continuous compounding.
    ///
    /// **Conventions**: at a band edge (or a point of a table or of interpolated rates) that of the band the edge
    /// belongs to, the earlier one. Where a whole-horizon rate steps, the jump itself has no rate.
    ///
    /// **Errors**: as [`Curve::factor`].
    pub fn instantaneous_rate(&self, t: f64) -> Result<f64> {
        self.check("offset", t)?;
        finite_rate(t, self.form.instantaneous(t).hi)
    }

    /// Under growth that persists or switches, a whole year after which every year has the same continuous rate to within
    /// rounding, and that rate; none for other curves, and where the years never settle.
    pub(crate) fn settled(&self) -> Option<(f64, f64)> {
        match &self.form {
            Form::Years(years) => years.settled(),
            _ => None,
        }
    }

    /// The curves that a mixture is made of, with their weights.
    pub(crate) fn components(&self) -> Option<&[(f64, Curve)]> {
        match &self.form {
            Form::Mixture(mixture) => Some(mixture.components()),
            _ => None,
        }
    }

    /// What a reader should be told of the curve, a sentence each: factors that jump up at an edge or rise, which
    /// whole-horizon rates by flow and lasting uncertainty of growth can cause. Empty for most curves.
    pub fn warnings(&self) -> Vec<String> {
        match &self.form {
            Form::ByFlow(horizon) => horizon.warnings(),
            Form::Years(years) if years.last_rate() < 0.0 => vec![format!(
                "far factors rise: the forward rate tends to {} a year, continuously compounded, since uncertainty \
                 of growth builds up over the years",
                checks::percent(years.last_rate())
            )],
            Form::Mixture(mixture) => {
                mixture.components().iter().flat_map(|(_, curve)| curve.warnings()).collect()
            }
            _ => Vec::new(),
        }
    }

    /// -log2 D(t) / t.
    fn mean_log2(&self, t: f64) -> Result<Dd> {
        self.check("offset", t)?;
        // So near to 0 the mean rate cannot be told from its limit, while products would underflow.
        if t.abs() < 1e-100 {
            return Ok(self.form.initial() * Dd::LOG2_E);
        }
        Ok(-(self.form.log2(t) / Dd::of(t)))
    }

    /// Refuses an offset at which the curve is not defined.
    fn check(&self, argument: &'static str, t: f64) -> Result<()> {
        checks::finite(argument, t)?;
        if self.domain.contains(t) && self.defined(t) {
            return Ok(());
        }
        let error = Error::new(
            ErrorKind::OutsideDomain,
            argument,
            format!("{argument} is {t} years; the curve is defined {}", self.domain),
        );
        if t > self.domain.upper {
            return Err(error.with_hint("a rate that holds after the last edge (\"1% after\")"));
        }
        Err(error)
    }

    fn defined(&self, t: f64) -> bool {
        match &self.form {
            Form::Gamma(gamma) => gamma.defined(t),
            Form::Mixture(mixture) => mixture.components().iter().all(|(_, curve)| curve.defined(t)),
            _ => true,
        }
    }
}

/// Where in its year a position stands; none for averaged.
fn fraction(position: Position) -> Option<f64> {
    match position {
        Position::Start => Some(0.0),
        Position::Middle => Some(0.5),
        Position::End => Some(1.0),
        Position::Averaged => None,
    }
}

fn finite_factor(t: f64, factor: f64) -> Result<f64> {
    if factor.is_finite() {
        return Ok(factor);
    }
    Err(Error::new(
        ErrorKind::NotFinite,
        "offset",
        format!("the factor at offset {t} is too large for a number"),
    ))
}

fn finite_rate(t: f64, rate: f64) -> Result<f64> {
    if rate.is_finite() {
        return Ok(rate);
    }
    Err(Error::new(
        ErrorKind::NotFinite,
        "offset",
        format!("the rate at offset {t} is too large for a number"),
    ))
}
