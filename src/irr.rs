//! Every internal rate of return in an interval, or the proof that there is none.

use crate::{Error, ErrorKind, Result, check, sum};

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
/// the value touches zero without crossing it, is reported in `unresolved`, about 1e-7 wide; roots closer together than
/// that likewise.
///
/// **Accuracy**: the bounds allow for rounding. Each rate is bisected to neighbouring numbers, so it is within 1e-15 of
/// the root, times what the flows themselves amplify where roots are close.
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
    let (Some(first), Some(last)) = (stream.end(1.0 + low, -1.0), stream.end(1.0 + high, 1.0)) else {
        found.unresolved.push(interval);
        return Ok(found);
    };
    let (brackets, unresolved) = stream.isolate(first, last, changes == 1);
    for (a, b) in brackets {
        let rate = stream.bisect(a, b) - 1.0;
        let slack = AT_AN_END * (1.0 + rate);
        if rate >= low - slack && rate <= high + slack {
            found.rates.push(rate.clamp(low, high));
        }
    }
    for (a, b) in unresolved {
        let (a, b) = ((a - 1.0).max(low), (b - 1.0).min(high));
        if a <= b {
            found.unresolved.push((a, b));
        }
    }
    Ok(found)
}

/// The net present value as a function of q = 1 + r: a sum of c q^-t.
struct Stream {
    /// (t, c), t rising and each once, no c zero, the largest near 1.
    terms: Vec<(f64, f64)>,
}

/// A value q whose sign is certain.
#[derive(Clone, Copy)]
struct Signed {
    q: f64,
    positive: bool,
}

/// Pieces between two values of q: with one root each, and not settled.
type Isolated = (Vec<(Signed, Signed)>, Vec<(f64, f64)>);

/// So near to an end of the interval, relative to 1 + r, a root counts as lying on it: the flows are rounded, too.
const AT_AN_END: f64 = 1e-13;

/// Terms of the Taylor expansion, the remainder being of this order.
const ORDER: usize = 8;

/// The most pieces looked at; what is left then is unresolved.
const PIECES: usize = 100_000;

impl Stream {
    fn new(offsets: &[f64], flows: &[f64]) -> Result<Self> {
        let largest = flows.iter().fold(0.0_f64, |most, flow| most.max(flow.abs()));
        if largest == 0.0 {
            let message = "every flow is 0, so every rate is one of return";
            return Err(Error::new(ErrorKind::NoMeaning, "flows", message).with_hint("flows other than 0"));
        }
        // A power of two, so that scaling is exact.
        let scale = 2f64.powi(-largest.log2().floor().clamp(-1000.0, 1000.0) as i32);
        let mut terms: Vec<(f64, f64)> =
            offsets.iter().zip(flows).map(|(&t, &flow)| (t, flow * scale)).collect();
        terms.sort_by(|a, b| a.0.total_cmp(&b.0));
        let merged = terms.chunk_by(|a, b| a.0 == b.0).map(|same| {
            let flows: Vec<f64> = same.iter().map(|term| term.1).collect();
            (same[0].0, sum(&flows))
        });
        let terms: Vec<(f64, f64)> = merged.filter(|term| term.1 != 0.0).collect();
        if terms.is_empty() {
            let message = "the flows of each year cancel, so every rate is one of return";
            return Err(Error::new(ErrorKind::NoMeaning, "flows", message).with_hint("flows other than 0"));
        }
        Ok(Stream { terms })
    }

    fn sign_changes(&self) -> usize {
        self.terms.windows(2).filter(|pair| (pair[0].1 > 0.0) != (pair[1].1 > 0.0)).count()
    }

    /// The sum around q, as far as a common factor: sum of w exp(-tau v) at q e^v.
    fn around(&self, q: f64) -> Around {
        let log = q.ln();
        let size = |term: &&(f64, f64)| term.1.abs().ln() - term.0 * log;
        let largest = self.terms.iter().max_by(|a, b| size(a).total_cmp(&size(b)));
        let origin = largest.map_or(0.0, |term| term.0);
        let terms = self.terms.iter().map(|&(t, c)| {
            let tau = t - origin;
            let inexact = tau + origin != t || t - tau != origin;
            // The power in two halves, so that it cannot overflow before the flow makes it small.
            let half = q.powf(-0.5 * tau);
            let w = c * half * half;
            let roundings = 4.0 + if inexact { (t.abs() + origin.abs()) * log.abs() } else { 0.0 };
            (w, tau, w.abs() * roundings * f64::EPSILON)
        });
        Around { terms: terms.collect() }
    }

    /// The sign at q, where rounding cannot have changed it.
    fn sign(&self, q: f64) -> Option<Signed> {
        let around = self.around(q);
        let (value, error) = (around.value(), around.error(0));
        (value.abs() > error).then_some(Signed { q, positive: value > 0.0 })
    }

    /// An end of the search, a little outside the interval so that a root on its end is seen.
    fn end(&self, q: f64, outwards: f64) -> Option<Signed> {
        let steps = (0..30).map(|k| AT_AN_END * 2f64.powi(k));
        steps.map(|step| q * (1.0 + outwards * step)).find_map(|q| self.sign(q))
    }

    /// A point inside (a, b) whose sign is certain, the middle if possible.
    fn split(&self, a: f64, b: f64) -> Option<Signed> {
        let parts = [0.5, 0.47, 0.53, 0.42, 0.58, 0.35, 0.65, 0.27, 0.73, 0.18, 0.82, 0.08, 0.92, 0.02, 0.98];
        let at = |part: f64| a * (b / a).powf(part);
        parts.iter().map(|&part| at(part)).filter(|&q| q > a && q < b).find_map(|q| self.sign(q))
    }

    /// Pieces (in q, rising) that hold one root each, and pieces that could not be settled.
    fn isolate(&self, first: Signed, last: Signed, one_at_most: bool) -> Isolated {
        let (mut brackets, mut unresolved) = (Vec::new(), Vec::<(f64, f64)>::new());
        let mut pieces = vec![(first, last)];
        let mut seen = 0;
        while let Some((a, b)) = pieces.pop() {
            seen += 1;
            let middle = (a.q * b.q).sqrt();
            let around = self.around(middle);
            let half_width = (b.q / middle).ln().max((middle / a.q).ln()) * (1.0 + 1e-12) + 1e-15;
            if one_at_most || around.monotone(half_width) {
                if a.positive != b.positive {
                    brackets.push((a, b));
                }
                continue;
            }
            if around.without_root(half_width) {
                continue;
            }
            let point = if seen < PIECES { self.split(a.q, b.q) } else { None };
            match (point, unresolved.last_mut()) {
                (Some(point), _) => pieces.extend([(point, b), (a, point)]),
                (None, Some(before)) if before.1 == a.q => before.1 = b.q,
                (None, _) => unresolved.push((a.q, b.q)),
            }
        }
        (brackets, unresolved)
    }

    /// The root between two points of different sign, to neighbouring numbers.
    fn bisect(&self, a: Signed, b: Signed) -> f64 {
        let (mut low, mut high) = (a.q, b.q);
        loop {
            let middle = low + 0.5 * (high - low);
            if middle <= low || middle >= high {
                break;
            }
            let value = self.around(middle).value();
            if value == 0.0 {
                return middle;
            }
            if (value > 0.0) == a.positive { low = middle } else { high = middle }
        }
        let size = |q: f64| self.around(q).value().abs();
        if size(low) <= size(high) { low } else { high }
    }
}

/// The sum near one point: (w, tau, bound on the error of w).
struct Around {
    terms: Vec<(f64, f64, f64)>,
}

impl Around {
    /// The sum at the point itself.
    fn value(&self) -> f64 {
        sum(&self.terms.iter().map(|term| term.0).collect::<Vec<_>>())
    }

    /// A bound on the rounding error of the k-th moment, sum of w tau^k.
    fn error(&self, k: i32) -> f64 {
        let slack = f64::from(k + 2) * f64::EPSILON;
        self.terms.iter().map(|&(w, tau, error)| (error + w.abs() * slack) * tau.abs().powi(k)).sum()
    }

    /// No zero within `h` of the point, in ln q.
    fn without_root(&self, h: f64) -> bool {
        self.value().abs() > self.error(0) + self.variation(0, h)
    }

    /// The slope has no zero within `h` of the point.
    fn monotone(&self, h: f64) -> bool {
        let slope = sum(&self.terms.iter().map(|&(w, tau, _)| w * tau).collect::<Vec<_>>());
        slope.abs() > self.error(1) + self.variation(1, h)
    }

    /// A bound on how far the derivative of order `from` departs from its value at the point within `h` of it:
    /// the Taylor terms of the next orders, and the remainder.
    fn variation(&self, from: i32, h: f64) -> f64 {
        let count = self.terms.len() as f64;
        let mut bound = 0.0;
        let mut scale = 1.0;
        for order in 1..ORDER as i32 {
            scale *= h / f64::from(order);
            let (mut moment, mut absolute) = (0.0, 0.0);
            for &(w, tau, _) in &self.terms {
                let term = w * tau.powi(from + order);
                moment += term;
                absolute += term.abs();
            }
            bound +=
                scale * (moment.abs() + (count + 8.0) * f64::EPSILON * absolute + self.error(from + order));
        }
        scale *= h / ORDER as f64;
        let remainder = |&(w, tau, _): &(f64, f64, f64)| {
            // The power and the exponential together, as one may overflow where w vanishes.
            if w == 0.0 { 0.0 } else { w.abs() * tau.abs().powi(from + ORDER as i32) * (tau.abs() * h).exp() }
        };
        bound + 1.000_001 * scale * self.terms.iter().map(remainder).sum::<f64>()
    }
}
