//! Every point of an interval at which a function changes its sign, with the proof that none is missed.

/// How many roots a piece of the interval is proved to have at most.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum AtMost {
    /// A bound on the function shows that it has none.
    None,
    /// A bound on its slope shows that it has one at most.
    One,
    /// Neither is shown.
    Several,
}

/// A function that can be bounded on pieces of an interval.
pub(crate) trait Crossing {
    /// The value, and a bound on its rounding error.
    fn value(&self, x: f64) -> (f64, f64);

    /// How many roots the piece between two points has.
    fn at_most(&self, low: f64, high: f64) -> AtMost;

    /// The size of x to which a small step is relative, above 0.
    fn size(&self, x: f64) -> f64;

    /// The narrowest piece, relative to the size of x, on which the bounds still tell anything.
    const FINEST: f64;
}

/// A point at which the sign is certain.
#[derive(Clone, Copy)]
struct Signed {
    x: f64,
    positive: bool,
}

/// So near to an end of the interval, relative to the size of x, a root counts as lying on it: the flows are rounded, too.
const AT_AN_END: f64 = 1e-13;

/// The most pieces looked at; what is left then is unresolved.
const PIECES: usize = 100_000;

/// Every crossing in the interval (both ends included), rising, and the narrow intervals that could not be settled:
/// there the function touches zero, or has crossings too close together to tell apart.
///
/// The interval is split until on each piece the function is proved to have no root, or at most one.
pub(crate) fn crossings(f: &impl Crossing, (low, high): (f64, f64)) -> (Vec<f64>, Vec<(f64, f64)>) {
    let (Some(first), Some(last)) = (end(f, low, -1.0), end(f, high, 1.0)) else {
        return (Vec::new(), vec![(low, high)]);
    };
    let (brackets, unresolved) = isolate(f, first, last);
    let slack = |x: f64| 2.0 * AT_AN_END * f.size(x);
    let found = brackets.into_iter().map(|(a, b)| bisect(f, a, b));
    let inside = found.filter(|x| (low - slack(low)..=high + slack(high)).contains(x));
    let cut = unresolved.into_iter().map(|(a, b)| (a.max(low), b.min(high)));
    (inside.map(|x| x.clamp(low, high)).collect(), cut.filter(|(a, b)| a <= b).collect())
}

/// The sign at a point, where rounding cannot have changed it.
fn sign(f: &impl Crossing, x: f64) -> Option<Signed> {
    let (value, error) = f.value(x);
    (value.abs() > error).then_some(Signed { x, positive: value > 0.0 })
}

/// An end of the search, a little outside the interval so that a root on its end is seen.
fn end(f: &impl Crossing, x: f64, outwards: f64) -> Option<Signed> {
    let steps = (0..30).map(|k| AT_AN_END * 2f64.powi(k));
    steps.map(|step| x + outwards * step * f.size(x)).find_map(|x| sign(f, x))
}

/// A point inside (a, b) whose sign is certain, the middle if possible.
fn split<F: Crossing>(f: &F, a: f64, b: f64) -> Option<Signed> {
    let parts = [0.5, 0.47, 0.53, 0.42, 0.58, 0.35, 0.65, 0.27, 0.73, 0.18, 0.82, 0.08, 0.92, 0.02, 0.98];
    if b - a <= F::FINEST * f.size(a) {
        return None;
    }
    let points = parts.iter().map(|part| a + part * (b - a));
    points.filter(|&x| x > a && x < b).find_map(|x| sign(f, x))
}

/// Pieces between two points, rising: those with one root each, and those not settled.
type Isolated = (Vec<(Signed, Signed)>, Vec<(f64, f64)>);

fn isolate(f: &impl Crossing, first: Signed, last: Signed) -> Isolated {
    let (mut brackets, mut unresolved) = (Vec::new(), Vec::<(f64, f64)>::new());
    let mut pieces = vec![(first, last)];
    let mut seen = 0;
    while let Some((a, b)) = pieces.pop() {
        seen += 1;
        match f.at_most(a.x, b.x) {
            AtMost::One if a.positive != b.positive => brackets.push((a, b)),
            AtMost::One | AtMost::None => {}
            AtMost::Several => {
                let point = if seen < PIECES { split(f, a.x, b.x) } else { None };
                match (point, unresolved.last_mut()) {
                    (Some(point), _) => pieces.extend([(point, b), (a, point)]),
                    (None, Some(before)) if before.1 == a.x => before.1 = b.x,
                    (None, _) => unresolved.push((a.x, b.x)),
                }
            }
        }
    }
    (brackets, unresolved)
}

/// The root between two points of different sign, to neighbouring numbers.
fn bisect(f: &impl Crossing, a: Signed, b: Signed) -> f64 {
    let (mut low, mut high) = (a.x, b.x);
    while high - low > 1e-25 {
        // Zero first, as numbers lie too densely around it to be halved down to it.
        let middle = if low < 0.0 && high > 0.0 { 0.0 } else { low + 0.5 * (high - low) };
        if middle <= low || middle >= high {
            break;
        }
        let (value, _) = f.value(middle);
        if value == 0.0 {
            return middle;
        }
        if (value > 0.0) == a.positive { low = middle } else { high = middle }
    }
    let size = |x: f64| f.value(x).0.abs();
    if size(low) <= size(high) { low } else { high }
}
