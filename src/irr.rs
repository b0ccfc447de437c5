//! Every internal rate of return in an interval, or the proof that there is none.

use crate::dd::{Dd, exp2_m1, log2_1p, two_diff, two_sum};
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
    let changes = stream.sign_changes();
    if changes == 0 {
        return Ok(found);
    }
    let (Some(first), Some(last)) = (stream.end(low, -1.0), stream.end(high, 1.0)) else {
        found.unresolved.push(interval);
        return Ok(found);
    };
    let (brackets, unresolved) = stream.isolate(first, last, changes == 1);
    let slack = |rate: f64| 2.0 * AT_AN_END * (1.0 + rate);
    let rates = brackets.into_iter().map(|(a, b)| stream.bisect(a, b));
    let inside = rates.filter(|rate| (low - slack(low)..=high + slack(high)).contains(rate));
    found.rates = inside.map(|rate| rate.clamp(low, high)).collect();
    let cut = unresolved.into_iter().map(|(a, b)| (a.max(low), b.min(high)));
    found.unresolved = cut.filter(|(a, b)| a <= b).collect();
    Ok(found)
}

/// The net present value as a function of the rate, and its terms.
struct Stream {
    /// (t, c), t rising and each once, no c zero, the largest near 1.
    terms: Vec<(f64, f64)>,
}

/// A rate at which the sign of the net present value is certain.
#[derive(Clone, Copy)]
struct Signed {
    rate: f64,
    positive: bool,
}

/// Pieces between two rates, rising: those with one root each, and those not settled.
type Isolated = (Vec<(Signed, Signed)>, Vec<(f64, f64)>);

/// So near to an end of the interval, relative to 1 + r, a root counts as lying on it: the flows are rounded, too.
const AT_AN_END: f64 = 1e-13;

/// Terms of the Taylor expansion.
const TERMS: usize = 9;

/// The most pieces looked at; what is left then is unresolved.
const PIECES: usize = 100_000;

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
        Ok(Stream { terms })
    }

    fn sign_changes(&self) -> usize {
        self.terms.windows(2).filter(|pair| (pair[0].1 > 0.0) != (pair[1].1 > 0.0)).count()
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

    /// The sign at a rate, where rounding cannot have changed it.
    fn sign(&self, rate: f64) -> Option<Signed> {
        let around = self.around(rate);
        let (value, error) = (around.value(), around.error());
        (value.abs() > error).then_some(Signed { rate, positive: value > 0.0 })
    }

    /// An end of the search, a little outside the interval so that a root on its end is seen.
    fn end(&self, rate: f64, outwards: f64) -> Option<Signed> {
        let steps = (0..30).map(|k| AT_AN_END * 2f64.powi(k));
        steps.map(|step| rate + outwards * step * (1.0 + rate)).find_map(|rate| self.sign(rate))
    }

    /// A point inside (a, b) whose sign is certain, the middle if possible.
    fn split(&self, a: f64, b: f64) -> Option<Signed> {
        let parts = [0.5, 0.47, 0.53, 0.42, 0.58, 0.35, 0.65, 0.27, 0.73, 0.18, 0.82, 0.08, 0.92, 0.02, 0.98];
        let points = parts.iter().map(|part| a + part * (b - a));
        points.filter(|&rate| rate > a && rate < b).find_map(|rate| self.sign(rate))
    }

    fn isolate(&self, first: Signed, last: Signed, one_at_most: bool) -> Isolated {
        let (mut brackets, mut unresolved) = (Vec::new(), Vec::<(f64, f64)>::new());
        let mut pieces = vec![(first, last)];
        let mut seen = 0;
        while let Some((a, b)) = pieces.pop() {
            seen += 1;
            let middle = a.rate + 0.5 * (b.rate - a.rate);
            let around = self.around(middle);
            let expansion = around.expansion();
            // The lower half is the longer one in ln(1 + rate).
            let half_width =
                -((a.rate - middle) / (1.0 + middle)).ln_1p() * (1.0 + 1e-12) + f64::MIN_POSITIVE;
            if one_at_most || around.keeps_sign(&expansion, 1, half_width) {
                if a.positive != b.positive {
                    brackets.push((a, b));
                }
                continue;
            }
            if around.keeps_sign(&expansion, 0, half_width) {
                continue;
            }
            let point = if seen < PIECES { self.split(a.rate, b.rate) } else { None };
            match (point, unresolved.last_mut()) {
                (Some(point), _) => pieces.extend([(point, b), (a, point)]),
                (None, Some(before)) if before.1 == a.rate => before.1 = b.rate,
                (None, _) => unresolved.push((a.rate, b.rate)),
            }
        }
        (brackets, unresolved)
    }

    /// The root between two points of different sign, to neighbouring numbers.
    fn bisect(&self, a: Signed, b: Signed) -> f64 {
        let (mut low, mut high) = (a.rate, b.rate);
        while high - low > 1e-25 {
            // Zero first, as numbers lie too densely around it to be halved down to it.
            let middle = if low < 0.0 && high > 0.0 { 0.0 } else { low + 0.5 * (high - low) };
            if middle <= low || middle >= high {
                break;
            }
            let value = self.around(middle).value();
            if value == 0.0 {
                return middle;
            }
            if (value > 0.0) == a.positive { low = middle } else { high = middle }
        }
        let size = |rate: f64| self.around(rate).value().abs();
        if size(low) <= size(high) { low } else { high }
    }
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
