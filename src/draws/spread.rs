//! What many draws say: percentiles, mean, probabilities with their standard errors, first places, a histogram.

use crate::sum::Compensated;
use crate::{Error, ErrorKind, Result, check, dot, sum};

/// A probability as the share of the draws, with its standard error.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Chance {
    /// In so many draws.
    pub count: usize,
    /// Of so many.
    pub draws: usize,
    /// count / draws.
    pub share: f64,
    /// sqrt(share (1 - share) / draws): how far the share is, typically, from the probability. At a share of 0 or 1 it is
    /// 0, which says little: see [`Chance::bound`].
    pub error: f64,
}

impl Chance {
    /// At a share of 0 or 1, how far from it the probability is at most, with a confidence of 95%: 3 / draws.
    ///
    /// **Source**: J. A. Hanley and A. Lippman-Hand, "If nothing goes wrong, is everything all right?", Journal of the
    /// American Medical Association 249, 1983.
    ///
    /// ```
    /// let found = hence_core::spread(&[1.0; 600], &[])?;
    /// assert_eq!((found.positive.share, found.positive.bound()), (1.0, Some(0.005)));
    /// # Ok::<(), hence_core::Error>(())
    /// ```
    pub fn bound(&self) -> Option<f64> {
        (self.count == 0 || self.count == self.draws).then(|| (3.0 / self.draws as f64).min(1.0))
    }

    fn of(count: usize, draws: usize) -> Self {
        let share = count as f64 / draws as f64;
        Chance { count, draws, share, error: (share * (1.0 - share) / draws as f64).sqrt() }
    }
}

/// How the values of many draws are spread.
#[derive(Clone, Debug, PartialEq)]
pub struct Spread {
    /// Their mean.
    pub mean: f64,
    /// The mean's standard error, sd / sqrt(draws).
    pub mean_error: f64,
    /// Their standard deviation, with draws - 1 in the denominator; 0 of a single draw.
    pub sd: f64,
    /// The least.
    pub lowest: f64,
    /// The greatest.
    pub highest: f64,
    /// One for each percentile asked for.
    pub percentiles: Vec<f64>,
    /// How probable a value above 0 is; 0 itself does not count.
    pub positive: Chance,
}

/// Mean, standard deviation, percentiles and the probability of a value above 0.
///
/// **Formula**: the p-th percentile of n sorted values x_1 to x_n is x_k + f (x_(k+1) - x_k), k and f the whole and the
/// fractional part of 1 + (n - 1) p/100: linear between the values, the least at 0 and the greatest at 100.
///
/// **Arguments**: `values`, one a draw, at least one; `percentiles`, 0 to 100, in any order.
///
/// **Returns**: the [`Spread`]; percentiles in the order asked for.
///
/// **Accuracy**: the mean is that of the exact sum, rounded twice, and the squares of the distances from it are summed
/// exactly, so that the order of the values does not matter.
///
/// **Errors**: `Shape` without values; `NotFinite`; `RateRange` for a percentile outside 0 to 100, with its index.
///
/// **Source**: R. J. Hyndman and Y. Fan, "Sample quantiles in statistical packages", The American Statistician 50, 1996,
/// definition 7 (as in spreadsheet programs).
///
/// ```
/// use hence_core::spread;
/// let found = spread(&[4.0, -1.0, 2.0, 3.0, 0.0], &[0.0, 50.0, 90.0])?;
/// assert_eq!(found.percentiles, [-1.0, 2.0, 3.6]);
/// assert_eq!((found.mean, found.positive.share), (1.6, 0.6));
/// assert_eq!(spread(&[1.0], &[101.0]).unwrap_err().message(), "a percentile is 101, allowed 0 to 100");
/// # Ok::<(), hence_core::Error>(())
/// ```
pub fn spread(values: &[f64], percentiles: &[f64]) -> Result<Spread> {
    if values.is_empty() {
        return Err(Error::new(ErrorKind::Shape, "values", "there is no value"));
    }
    check::finite_all("values", values)?;
    for (index, p) in percentiles.iter().enumerate() {
        if !(0.0..=100.0).contains(p) {
            let message = format!("a percentile is {p}, allowed 0 to 100");
            return Err(Error::new(ErrorKind::RateRange, "percentiles", message)
                .with_index(index)
                .with_hint("5 for the value that 5% of the draws fall below"));
        }
    }
    let n = values.len();
    let mean = check::result("values", sum(values) / n as f64)?;
    let sd = if n == 1 { 0.0 } else { (squares(values, mean) / (n - 1) as f64).sqrt() };
    check::result("values", sd)?;
    // Each percentile lies between two places of the sorted values.
    let place = |p: &f64| {
        let place = (n - 1) as f64 * p / 100.0;
        let k = (place as usize).min(n - 1);
        (k, place - k as f64)
    };
    let mut places: Vec<usize> = percentiles.iter().map(|p| place(p).0).flat_map(|k| [k, k + 1]).collect();
    places.retain(|&k| k < n);
    places.extend([0, n - 1]);
    places.sort_unstable();
    places.dedup();
    let sorted = sorted_at(&places, values);
    let percentile = |p: &f64| {
        let (k, over) = place(p);
        let (here, next) = (sorted.at(k), sorted.at((k + 1).min(n - 1)));
        here + over * (next - here)
    };
    Ok(Spread {
        mean,
        mean_error: sd / (n as f64).sqrt(),
        sd,
        lowest: sorted.at(0),
        highest: sorted.at(n - 1),
        percentiles: percentiles.iter().map(percentile).collect(),
        positive: Chance::of(values.iter().filter(|&&value| value > 0.0).count(), n),
    })
}

/// The sum of the squared distances from the mean, exact but for the rounding of each distance and of the result.
fn squares(values: &[f64], mean: f64) -> f64 {
    let mut sum = Compensated::new();
    let mut block = [0.0; 256];
    for values in values.chunks(block.len()) {
        let distances = &mut block[..values.len()];
        for (distance, value) in distances.iter_mut().zip(values) {
            *distance = value - mean;
        }
        sum.add_products(distances, distances);
    }
    sum.total().unwrap_or_else(|| {
        let distances: Vec<f64> = values.iter().map(|value| value - mean).collect();
        dot(&distances, &distances)
    })
}

/// Values of which some stand where sorting would put them.
struct Sorted(Vec<i64>);

impl Sorted {
    fn at(&self, place: usize) -> f64 {
        f64::from_bits(turned(self.0[place]) as u64)
    }
}

/// Doubles are ordered as their bits are, negative ones the other way round; -0 comes before 0. Turning back is the same.
fn turned(bits: i64) -> i64 {
    if bits < 0 { bits ^ i64::MAX } else { bits }
}

/// Puts the values of these places, which rise, where sorting would; the others in between, in any order.
fn sorted_at(places: &[usize], values: &[f64]) -> Sorted {
    fn part(keys: &mut [i64], from: usize, places: &[usize]) {
        // From the middle outwards, so that each selection is among as few as may be.
        let Some(&middle) = places.get(places.len() / 2) else { return };
        let (before, after) = places.split_at(places.len() / 2);
        let (lower, _, upper) = keys.select_nth_unstable(middle - from);
        part(lower, from, before);
        part(upper, middle + 1, &after[1..]);
    }
    let mut keys: Vec<i64> = values.iter().map(|value| turned(value.to_bits() as i64)).collect();
    part(&mut keys, 0, places);
    Sorted(keys)
}

/// How probable it is that an option ranks first.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct FirstPlace {
    /// Its value is above that of every other option.
    pub alone: Chance,
    /// No option is above it, and at least one is level with it.
    pub shared: Chance,
}

/// For each option the probability that its value is the highest.
///
/// **Arguments**: `values`, for each option one value a draw, all of one length.
///
/// **Returns**: one entry an option. The shares of being first alone, and one for each draw with a shared first place, sum
/// to 1. A single option is always first.
///
/// **Errors**: `Shape` for no option, no draw, or unequal lengths; `NotFinite`, with the index of the draw.
///
/// ```
/// use hence_core::first_places;
/// let found = first_places(&[vec![1.0, 2.0, 3.0, 5.0], vec![2.0, 2.0, 1.0, 4.0]])?;
/// assert_eq!((found[0].alone.share, found[0].shared.share), (0.5, 0.25));
/// assert_eq!((found[1].alone.share, found[1].shared.share), (0.25, 0.25));
/// # Ok::<(), hence_core::Error>(())
/// ```
pub fn first_places(values: &[Vec<f64>]) -> Result<Vec<FirstPlace>> {
    let Some(first) = values.first().filter(|first| !first.is_empty()) else {
        return Err(Error::new(ErrorKind::Shape, "values", "there is no value"));
    };
    for column in values {
        check::same_length(("values", first), ("values", column))?;
        check::finite_all("values", column)?;
    }
    let draws = first.len();
    let mut counts = vec![(0, 0); values.len()];
    for k in 0..draws {
        let mut best = f64::NEG_INFINITY;
        let mut level = 0;
        for column in values {
            if column[k] > best {
                (best, level) = (column[k], 1);
            } else if column[k] == best {
                level += 1;
            }
        }
        for (count, column) in counts.iter_mut().zip(values) {
            if column[k] == best {
                if level == 1 { count.0 += 1 } else { count.1 += 1 }
            }
        }
    }
    let place =
        |(alone, shared)| FirstPlace { alone: Chance::of(alone, draws), shared: Chance::of(shared, draws) };
    Ok(counts.into_iter().map(place).collect())
}

/// How many values fall between round edges.
#[derive(Clone, Debug, PartialEq)]
pub struct Histogram {
    /// Edges from the lowest to the highest, one more than counts; each interval holds its lower edge, the last both.
    pub edges: Vec<f64>,
    /// The values in each interval.
    pub counts: Vec<usize>,
}

/// A histogram with edges at round numbers: 6 to 15 intervals, each 1, 2 or 5 times a power of ten wide.
///
/// **Arguments**: `values`, at least one.
///
/// **Edge cases**: values that are all alike stand in one interval of width 0.
///
/// **Errors**: `Shape` without values; `NotFinite`, also for values so far apart that their distance is no number.
///
/// ```
/// let found = hence_core::histogram(&[0.5, 1.0, 9.0, 9.5])?;
/// assert_eq!(found.edges, [0.0, 1.0, 2.0, 3.0, 4.0, 5.0, 6.0, 7.0, 8.0, 9.0, 10.0]);
/// assert_eq!(found.counts, [1, 1, 0, 0, 0, 0, 0, 0, 0, 2]);
/// # Ok::<(), hence_core::Error>(())
/// ```
pub fn histogram(values: &[f64]) -> Result<Histogram> {
    if values.is_empty() {
        return Err(Error::new(ErrorKind::Shape, "values", "there is no value"));
    }
    check::finite_all("values", values)?;
    let lowest = values.iter().copied().fold(f64::INFINITY, f64::min);
    let highest = values.iter().copied().fold(f64::NEG_INFINITY, f64::max);
    check::finite("values", highest - lowest)?;
    // Values that differ by their last digits alone have no round edges between them.
    if highest - lowest <= 1e-9 * highest.abs().max(lowest.abs()) {
        return Ok(Histogram { edges: vec![lowest, highest], counts: vec![values.len()] });
    }
    let (from, to, width) = round_edges(lowest, highest);
    let intervals = (to - from) as usize;
    let mut counts = vec![0; intervals];
    let edges: Vec<f64> = (0..=intervals).map(|i| width.times(from + i as f64)).collect();
    for value in values {
        counts[edges[1..intervals].partition_point(|edge| edge <= value)] += 1;
    }
    Ok(Histogram { edges, counts })
}

/// A width of 1, 2 or 5 times a power of ten.
#[derive(Clone, Copy)]
struct Width {
    digit: f64,
    power: i32,
}

impl Width {
    /// So many widths, as the double nearest to the decimal: 3 times 0.1 is 0.3.
    fn times(self, n: f64) -> f64 {
        let units = n * self.digit;
        // The text is a whole number and a power of ten, which always reads.
        format!("{units:.0}e{}", self.power).parse::<f64>().unwrap_or(units) + 0.0
    }
}

/// Lowest and highest edge, in widths, and the width.
fn round_edges(lowest: f64, highest: f64) -> (f64, f64, Width) {
    let range = highest - lowest;
    let mut found = (0.0, 1.0, Width { digit: 1.0, power: 0 });
    let start = range.log10().floor() as i32 - 2;
    for (power, digit) in (start..start + 5).flat_map(|power| [1.0, 2.0, 5.0].map(|digit| (power, digit))) {
        let width = Width { digit, power };
        let one = width.times(1.0);
        let (from, to) = ((lowest / one).floor(), (highest / one).ceil().max((lowest / one).floor() + 1.0));
        found = (from, to, width);
        if to - from <= 15.0 {
            break;
        }
    }
    found
}
