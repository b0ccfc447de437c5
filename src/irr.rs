//! Every internal rate of return in an interval, or the proof that there is none.

use crate::dd::{Dd, exp2_m1, log2_1p, two_diff, two_sum};
use crate::roots::{AtMost, Crossing, crossings};
use crate::{Error, ErrorKind, ExactSum, Result, check, sum};

/// The interval searched unless another is stated: -50% to 100%.
pub const IRR_INTERVAL: (f64, f64) = (-0.5, 1.0);

/// What the search found.
#[derive(Clone, Debug, PartialEq)]
pub struct IrrSearch {
    /// Every rate at which the net present value certainly changes its sign, rising; each is a single root.
    pub rates: Vec<f64>,
    /// Narrow intervals, rising, in which the flows as stored do not settle the number of roots: a double root
    /// where the net present value only touches zero, or roots too close together to tell apart.
    pub unresolved: Vec<(f64, f64)>,
    /// The interval searched.
    pub interval: (f64, f64),
}

/// All internal rates of return in an interval.
///
/// **Formula**: the rates r with sum of flow_i (1+r)^-t_i = 0.
///
/// **Arguments**: `offsets`, t_i in years, whole or not, any order, repeats allowed; `flows`, net flows, as many;
/// `interval`, the lowest and the highest rate of interest, both included (to 1e-13) and above -1, [`IRR_INTERVAL`] as a
/// rule.
///
/// **Returns**: the rates, rising; an empty list says there is none in the interval, unless `unresolved` says that
/// it could not be told. Every rate outside the unresolved intervals is found: the interval is split until on each
/// piece a bound on the sum shows that it has no root, or a bound on its slope that it has one at most.
///
/// **Edge cases**: flows of one sign (or a single flow) have no rate. A root shared by an even number of rates, where
/// the value touches zero without crossing it, is reported in `unresolved`, about 1e-13 wide; roots that rounding
/// cannot tell apart likewise.
///
/// **Accuracy**: the sum is formed in double-double arithmetic, exactly but for a relative 1e-25, and each rate is
/// bisected to neighbouring numbers (beside 0 to 1e-25): within 2 units in the last place of the root of the flows as
/// stored.
///
/// **Errors**: `Shape` where lengths differ; `NotFinite`, with the index; `RateRange` for an interval that is empty or
/// reaches -1; `NoMeaning` where every flow is 0, as every rate would do.
///
/// **Source**: bounds by Taylor expansion with remainder: R. E. Moore, Interval Analysis, 1966; one change of sign in
/// the flows, at most one root: Descartes's rule, for any exponents by E. Laguerre, Sur la theorie des equations
/// numeriques, 1883.
///
/// ```
/// use hence_core::{IRR_INTERVAL, internal_rates};
/// let found = internal_rates(&[0.0, 1.0], &[-100.0, 107.0], IRR_INTERVAL).unwrap();
/// assert!((found.rates[0] - 0.07).abs() < 1e-15);
/// let found = internal_rates(&[0.0, 1.0, 2.0], &[-100.0, 230.0, -132.0], IRR_INTERVAL).unwrap();
/// assert_eq!(found.rates.len(), 2); // 10% and 20%
/// let error = internal_rates(&[0.0, 1.0], &[0.0, 0.0], IRR_INTERVAL).unwrap_err();
/// assert_eq!(error.to_string(), "flows: every flow is 0, so every rate is one of return (no-meaning)");
/// ```
pub fn internal_rates(offsets: &[f64], flows: &[f64], interval: (f64, f64)) -> Result<IrrSearch> {
    check::same_length(("offsets", offsets), ("flows", flows))?;
    check::finite_all("offsets", offsets)?;
    check::finite_all("flows", flows)?;
    check::finite_all("interval", &[interval.0, interval.1])?;
    let (low, high) = interval;
    if !(low > -1.0 && low < high) {
        let message = format!("found {low} to {high}, allowed: a rising pair above -1");
        return Err(Error::new(ErrorKind::RateRange, "interval", message).with_hint("-0.5 to 1"));
    }

    let stream = Stream::new(offsets, flows)?;
    let mut found = IrrSearch { rates: Vec::new(), unresolved: Vec::new(), interval };
    if stream.sign_changes > 0 {
        (found.rates, found.unresolved) = crossings(&stream, interval);
    }
    Ok(found)
}

/// The net present value as a function of the rate, and its terms.
struct Stream {
    /// (t, c), t rising and each once, no c zero, the largest near 1.
    terms: Vec<(f64, f64)>,
    /// How often the terms change their sign.
    sign_changes: usize,
}

/// Terms of the Taylor expansion.
const TERMS: usize = 9;

/// The longest step between offsets that is taken by multiplication.
const LONGEST_STEP: f64 = 16.0;

/// A bound on the relative error of one step of double-double arithmetic here, with room to spare.
const STEP_ERROR: f64 = 1.0 / (1u128 << 94) as f64;

impl Stream {
    fn new(offsets: &[f64], flows: &[f64]) -> Result<Self> {
        // A power of two, so that scaling is exact.
        let largest = flows.iter().fold(f64::MIN_POSITIVE, |most, flow| most.max(flow.abs()));
        let scale = 2f64.powi(-largest.log2().floor().clamp(-1000.0, 1000.0) as i32);
        let mut terms: Vec<(f64, f64)> =
            offsets.iter().zip(flows).map(|(&t, flow)| (t, flow * scale)).collect();
        terms.sort_by(|a, b| a.0.total_cmp(&b.0));
        let merged = terms.chunk_by(|a, b| a.0 == b.0).map(|same| {
            let flows: Vec<f64> = same.iter().map(|term| term.1).collect();
            (same[0].0, sum(&flows))
        });
        let terms: Vec<(f64, f64)> = merged.filter(|term| term.1 != 0.0).collect();
        if terms.is_empty() {
            let message = if flows.iter().all(|&flow| flow == 0.0) {
                "every flow is 0, so every rate is one of return"
            } else {
                "the flows of each year cancel, so every rate is one of return"
            };
            return Err(Error::new(ErrorKind::NoMeaning, "flows", message).with_hint("flows other than 0"));
        }
        let sign_changes = terms.windows(2).filter(|pair| (pair[0].1 > 0.0) != (pair[1].1 > 0.0)).count();
        Ok(Stream { terms, sign_changes })
    }

    /// The net present value around a rate r, divided by a common factor: sum of w exp(-tau v) where
    /// ln(1 + rate) = ln(1 + r) + v.
    fn around(&self, rate: f64) -> Around {
        let log = rate.ln_1p();
        let size = |place: &usize| self.terms[*place].1.abs().ln() - self.terms[*place].0 * log;
        let largest = (0..self.terms.len()).max_by(|a, b| size(a).total_cmp(&size(b))).unwrap_or(0);
        let origin = self.terms[largest].0;

        // Powers of (1 + r), stepping outwards from the largest term, so that none overflows.
        let growth = Growth::new(rate);
        let mut powers = vec![Dd::ONE; self.terms.len()];
        for place in largest + 1..powers.len() {
            powers[place] = powers[place - 1] * growth.over(self.terms[place].0, self.terms[place - 1].0);
        }
        for place in (0..largest).rev() {
            powers[place] = powers[place + 1] * growth.over(self.terms[place].0, self.terms[place + 1].0);
        }
        let count = self.terms.len() as f64;
        let terms = self.terms.iter().zip(powers).map(|(&(t, c), power)| {
            let (w, tau) = (power * c, two_diff(t, origin));
            let (tau, exact) = (tau.hi, tau.lo == 0.0);
            Term { w, tau, exact, error: w.hi.abs() * STEP_ERROR * (count + (tau * log).abs()) }
        });
        Around { terms: terms.collect() }
    }
}

impl Crossing for Stream {
    fn value(&self, rate: f64) -> (f64, f64) {
        let around = self.around(rate);
        (around.value(), around.error())
    }

    fn at_most(&self, low: f64, high: f64) -> AtMost {
        if self.sign_changes == 1 {
            return AtMost::One;
        }
        let middle = low + 0.5 * (high - low);
        let around = self.around(middle);
        let expansion = around.expansion();
        // The lower half is the longer one in ln(1 + rate).
        let half_width = -((low - middle) / (1.0 + middle)).ln_1p() * (1.0 + 1e-12) + f64::MIN_POSITIVE;
        if around.keeps_sign(&expansion, 1, half_width) {
            AtMost::One
        } else if around.keeps_sign(&expansion, 0, half_width) {
            AtMost::None
        } else {
            AtMost::Several
        }
    }

    fn size(&self, rate: f64) -> f64 {
        1.0 + rate
    }

    // Neighbouring numbers are told apart.
    const FINEST: f64 = 0.0;
}

/// Powers of 1 + r.
struct Growth {
    up: Dd,
    down: Dd,
    log2: Dd,
}

impl Growth {
    fn new(rate: f64) -> Self {
        let up = two_sum(1.0, rate);
        Growth { up, down: Dd::ONE / up, log2: log2_1p(Dd::of(rate)) }
    }

    /// (1 + r)^(to - from).
    fn over(&self, from: f64, to: f64) -> Dd {
        let years = two_diff(to, from);
        let whole = years.hi.abs();
        if years.lo != 0.0 || whole.fract() != 0.0 || whole > LONGEST_STEP {
            return exp2_m1(self.log2 * years) + Dd::ONE;
        }
        let mut base = if years.hi < 0.0 { self.down } else { self.up };
        let (mut power, mut left) = (Dd::ONE, whole as u32);
        while left > 0 {
            if left % 2 == 1 {
                power = power * base;
            }
            base = base * base;
            left /= 2;
        }
        power
    }
}

/// One term of the sum near a rate, w exp(-tau v).
struct Term {
    w: Dd,
    tau: f64,
    /// Whether tau is without rounding.
    exact: bool,
    /// A bound on the error of w.
    error: f64,
}

/// The sum near one rate.
struct Around {
    terms: Vec<Term>,
}

impl Around {
    /// The sum at the rate itself.
    fn value(&self) -> f64 {
        let mut exact = ExactSum::new();
        for term in &self.terms {
            exact.add(term.w.hi);
            exact.add(term.w.lo);
        }
        exact.total()
    }

    /// A bound on the rounding error of the sum.
    fn error(&self) -> f64 {
        self.terms.iter().map(|term| term.error).sum()
    }

    /// The sum as a series in ln(1 + r).
    fn expansion(&self) -> Expansion {
        let mut parts: Vec<Dd> = self.terms.iter().map(|term| term.w).collect();
        let mut moments = [(0.0, 0.0); TERMS];
        for (order, (moment, error)) in moments.iter_mut().enumerate() {
            let mut total = Dd::ZERO;
            for (term, part) in self.terms.iter().zip(&mut parts) {
                if order > 0 {
                    *part = *part * term.tau;
                }
                total = total + *part;
                let tau = if term.exact { 0.0 } else { order as f64 * f64::EPSILON * part.hi.abs() };
                // Twice, as the products and the sum round as well.
                *error += tau + 2.0 * term.error * term.tau.abs().powi(order as i32);
            }
            *moment = total.hi;
        }
        Expansion { moments }
    }

    /// A bound on the remainder of the derivative of order `from` within `h`, after the moments.
    fn remainder(&self, from: usize, h: f64) -> f64 {
        let rest = |term: &Term| {
            let tau = term.tau.abs();
            // A flow that vanishes beside the others may meet an exponential that overflows.
            if term.w.hi == 0.0 { 0.0 } else { term.w.hi.abs() * tau.powi(TERMS as i32) * (tau * h).exp() }
        };
        let scale: f64 = (1..=TERMS - from).map(|order| h / order as f64).product();
        scale * self.terms.iter().map(rest).sum::<f64>() * (1.0 + 1e-12)
    }

    /// Whether the derivative of order `from` has no zero within `h` of the rate, in ln(1 + r).
    fn keeps_sign(&self, expansion: &Expansion, from: usize, h: f64) -> bool {
        let (value, error) = expansion.moments[from];
        let (mut bound, mut scale) = (error, 1.0);
        for (order, (moment, error)) in expansion.moments[from + 1..].iter().enumerate() {
            scale *= h / (order + 1) as f64;
            bound += scale * (moment.abs() + error);
        }
        value.abs() > bound * (1.0 + 1e-12) + self.remainder(from, h)
    }
}

/// The moments, sum of w tau^k, with bounds on their errors: but for the sign, the derivatives in ln(1 + r).
struct Expansion {
    moments: [(f64, f64); TERMS],
}
