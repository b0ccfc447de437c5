//! An uncertain discount rate: seeded draws of its parts, and what net present values come of them.

mod distribution;
mod flows;
mod normal;
mod philox;
mod spread;

use std::num::NonZeroUsize;
use std::thread;

use multiversion::multiversion;

use crate::curve::check_rate;
use crate::dd::{two_prod, two_sum};
use crate::{Error, ErrorKind, Result, percent};
use distribution::Sampler;
use flows::{ABREAST, Row, Valuer};

pub use distribution::{Distribution, Quantity};
pub use spread::{Chance, FirstPlace, Histogram, Spread, first_places, histogram, spread};

/// The most draws that are made: their values are all kept.
const MOST_DRAWS: usize = 10_000_000;

/// More threads than this would wait for one another.
const MOST_THREADS: usize = 256;

/// How draws are made.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Draws {
    /// How many, 1 to 10 million.
    pub count: usize,
    /// Another seed gives other random numbers.
    pub seed: u64,
    /// So many threads share the work, at most 256; they do not change the results.
    pub threads: NonZeroUsize,
}

/// The flows of one option, in the net: benefits positive.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct OptionFlows<'a> {
    /// Offsets in years from the base, whole or not, in any order, repeats allowed, -10,000 to 10,000.
    pub offsets: &'a [f64],
    /// As many flows.
    pub flows: &'a [f64],
    /// What goes on for ever.
    pub perpetual: &'a [Perpetual],
}

/// Flows that go on for ever after one at `start`: flow (1 + growth)^(k every) at start + k every, k = 1, 2, ...
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Perpetual {
    /// Offset of the last flow before them, in years.
    pub start: f64,
    /// That flow, with its sign in the net; it is not itself counted.
    pub flow: f64,
    /// Growth a year, above -1 to 1.
    pub growth: f64,
    /// Whole years between two flows, 1 or more.
    pub every: u32,
}

/// The parts of one draw and the rate they make.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct DrawnRate {
    /// Preference, hazard, elasticity and growth, as [`Quantity::ALL`].
    pub parts: [f64; 4],
    /// rho + eta g, rounded once.
    pub rate: f64,
}

/// What came of the draws, in their order.
#[derive(Clone, Debug, PartialEq)]
pub struct Drawn {
    /// Each draw's parts and rate.
    pub rates: Vec<DrawnRate>,
    /// For each option its net present value under each draw.
    pub values: Vec<Vec<f64>>,
}

/// What the draws say.
#[derive(Clone, Debug, PartialEq)]
pub struct DrawSummary {
    /// Of the rate.
    pub rate: Spread,
    /// Of each option's net present value.
    pub values: Vec<Spread>,
    /// How probable it is that each option ranks first.
    pub first: Vec<FirstPlace>,
}

impl Drawn {
    /// Spreads and first places, as [`spread`] and [`first_places`] give them.
    ///
    /// **Arguments**: `percentiles`, 0 to 100; `threads`, which share the work and do not change the results.
    ///
    /// **Errors**: those of [`spread`].
    pub fn summary(&self, percentiles: &[f64], threads: NonZeroUsize) -> Result<DrawSummary> {
        let rates: Vec<f64> = self.rates.iter().map(|drawn| drawn.rate).collect();
        let columns: Vec<&[f64]> = [&rates].into_iter().chain(&self.values).map(Vec::as_slice).collect();
        let share = columns.len().div_ceil(threads.get());
        let spreads = |columns: &[&[f64]]| -> Result<Vec<Spread>> {
            columns.iter().map(|values| spread(values, percentiles)).collect()
        };
        let parts = in_threads(columns.chunks(share).collect(), spreads);
        let mut spreads = parts.into_iter().collect::<Result<Vec<_>>>()?.concat().into_iter();
        let Some(rate) = spreads.next() else { return Err(no_option()) };
        Ok(DrawSummary { rate, values: spreads.collect(), first: first_places(&self.values)? })
    }
}

/// Works on each part in a thread of its own, the results in the order of the parts; a single part needs no thread.
fn in_threads<T: Send, R: Send>(parts: Vec<T>, work: impl Fn(T) -> R + Sync) -> Vec<R> {
    if parts.len() == 1 {
        return parts.into_iter().map(work).collect();
    }
    thread::scope(|scope| {
        let work = &work;
        let running: Vec<_> = parts.into_iter().map(|part| scope.spawn(move || work(part))).collect();
        let join = |thread: thread::ScopedJoinHandle<'_, R>| {
            thread.join().unwrap_or_else(|panic| std::panic::resume_unwind(panic))
        };
        running.into_iter().map(join).collect()
    })
}

fn no_option() -> Error {
    Error::new(ErrorKind::Shape, "options", "there is no option")
}

/// The discount rate as a distribution: preference, hazard, elasticity and growth, drawn independently of one another.
#[derive(Clone, Debug)]
pub struct RateDistribution {
    distributions: [Distribution; 4],
    samplers: [Sampler; 4],
}

impl RateDistribution {
    /// The distributions, checked.
    ///
    /// **Arguments**: one distribution for each of [`Quantity::ALL`], in that order.
    ///
    /// **Errors**: `RateRange` for values outside what a rate line may state (preference above -50% to 100%, hazard 0% to
    /// 100%, elasticity 0 to 20, growth above -100% to 100%), a standard deviation of 0 or less, ends out of order;
    /// `Weights`; `NoMeaning` for bounds that keep less than 1% of a normal distribution; `NotFinite`. The error's argument
    /// is the quantity's name.
    pub fn new(distributions: [Distribution; 4]) -> Result<Self> {
        let [a, b, c, d] = Quantity::ALL;
        let of = |quantity: Quantity| Sampler::new(quantity, &distributions[quantity as usize]);
        Ok(RateDistribution { samplers: [of(a)?, of(b)?, of(c)?, of(d)?], distributions })
    }

    /// The distribution of a quantity.
    pub fn of(&self, quantity: Quantity) -> &Distribution {
        &self.distributions[quantity as usize]
    }

    /// Draw number `k`, counted from 0: a function of seed and number alone.
    ///
    /// **Formula**: rate = preference + hazard + elasticity x growth. Each part is the quantile of its distribution at a
    /// number uniform between 0 and 1, so that another distribution for one part leaves the draws of the others as they
    /// are.
    ///
    /// **Source**: random numbers by Philox4x64-10 (Salmon, Moraes, Dror, Shaw, SC11, 2011), key (seed, 0), counter (k, 0,
    /// 0, 0); a word x gives (floor(x / 2^12) + 1/2) / 2^52. Normal quantiles by AS 241 (Wichura, Applied Statistics 37,
    /// 1988). No arithmetic of the platform enters, so the same draws come out everywhere.
    ///
    /// **Errors**: none; a part or rate outside its range is for [`draw_values`] to count.
    #[inline]
    pub fn draw(&self, seed: u64, k: u64) -> DrawnRate {
        let uniform = philox::uniforms(seed, k);
        DrawnRate::of(std::array::from_fn(|i| self.samplers[i].value(uniform[i])))
    }

    /// Draws number `k` and on, to the same bits.
    fn draws(&self, seed: u64, k: u64) -> [DrawnRate; ABREAST] {
        let mut uniform = [[0.0; ABREAST]; 4];
        for i in 0..ABREAST {
            // Places beyond the last draw there can be are never looked at.
            for (row, number) in uniform.iter_mut().zip(philox::uniforms(seed, k.wrapping_add(i as u64))) {
                row[i] = number;
            }
        }
        let parts: [Row; 4] = std::array::from_fn(|i| self.samplers[i].values(&uniform[i]));
        let rates = rates(&parts);
        std::array::from_fn(|i| DrawnRate {
            parts: [parts[0][i], parts[1][i], parts[2][i], parts[3][i]],
            rate: rates[i],
        })
    }
}

impl DrawnRate {
    #[inline]
    fn of(parts: [f64; 4]) -> Self {
        DrawnRate { parts, rate: rate(parts) }
    }
}

/// rho + eta g, rounded once.
#[inline(always)]
fn rate([preference, hazard, elasticity, growth]: [f64; 4]) -> f64 {
    // Adding zero turns -0 into 0.
    (two_sum(preference, hazard) + two_prod(elasticity, growth)).hi + 0.0
}

#[multiversion(targets = "simd")]
fn rates(parts: &[Row; 4]) -> Row {
    let mut rates = [0.0; _];
    for i in 0..ABREAST {
        rates[i] = rate([parts[0][i], parts[1][i], parts[2][i], parts[3][i]]);
    }
    rates
}

/// What a draw may be refused for: one of the four quantities, then these. The first that there is, is reported.
const REFUSALS: usize = 7;
const RATE: usize = 4;
const DIVERGES: usize = 5;
const TOO_LARGE: usize = 6;

/// How many draws were refused for a reason, and the first of them.
#[derive(Clone, Copy, Default)]
struct Refused {
    count: usize,
    first: Option<(usize, f64)>,
}

type Tally = [Refused; REFUSALS];

/// The net present value of every option under every draw of an uncertain rate.
///
/// **Formula**: in each draw the flat yearly rate r = rho + eta g, rho preference and hazard together, and for each option
/// the sum of flow_i (1 + r)^-t_i; flows without end are the geometric series
/// flow (1 + r)^-start / (((1 + r)/(1 + growth))^every - 1).
///
/// **Arguments**: `rate`, the distributions; `options`, one or more, each with its flows; `draws`, how many, the seed and
/// the number of threads.
///
/// **Returns**: every draw's parts, rate and values, in the order of the draws. They are the same, bit for bit, for any
/// number of threads and on every platform, and draw k does not depend on how many are made.
///
/// **Conventions**: yearly compounding; one rate for all years of a draw, so that the draws spread the views of what the
/// rate is, not its movements from year to year. Offsets are rounded to 2^-40 of a year.
///
/// **Edge cases**: no flows are worth 0.
///
/// **Accuracy**: with T the farthest offset, within (4 T + 30) 2^-53 of the gross present value at that rate (1.4e-13 for
/// 300 years), by Horner's rule in 1/(1 + r); a series is accurate to as much relative to itself.
///
/// **Errors**: `RateRange` where draws fall outside what a rate line may state or rates outside above -50% to 100%: it says
/// how many, and its index is the first such draw; the draws are not quietly left out, since that would be another
/// distribution. `Diverges` where rates do not exceed the growth of flows without end; `NotFinite` where a value is too
/// large; `Shape` for no option, arrays of unequal length, no draws or more than 10 million; `OutsideDomain` for an
/// offset too far from the base.
///
/// ```
/// use std::num::NonZeroUsize;
/// use hence_core::{Distribution, Draws, OptionFlows, Quantity, RateDistribution, draw_values, spread};
/// let parsed = |quantity, text| Distribution::parse(quantity, text);
/// let rate = RateDistribution::new([
///     parsed(Quantity::Preference, "1%")?,
///     parsed(Quantity::Hazard, "0%")?,
///     parsed(Quantity::Elasticity, "1")?,
///     parsed(Quantity::Growth, "0.25 at 1%, 0.75 at 3%")?,
/// ])?;
/// // 102 a year from now is worth 100 at 2% and 98.08 at 4%.
/// let option = OptionFlows { offsets: &[0.0, 1.0], flows: &[-99.0, 102.0], perpetual: &[] };
/// let draws = Draws { count: 10_000, seed: 1, threads: NonZeroUsize::MIN };
/// let drawn = draw_values(&rate, &[option], &draws)?;
/// let values = spread(&drawn.values[0], &[5.0, 95.0])?;
/// assert!((values.percentiles[0] - (102.0 / 1.04 - 99.0)).abs() < 1e-12);
/// assert!((values.percentiles[1] - 1.0).abs() < 1e-12);
/// assert!((values.positive.share - 0.25).abs() < 4.0 * values.positive.error);
///
/// let wide = Distribution::Normal { mean: 0.0, sd: 0.5, within: None };
/// let rate = RateDistribution::new([Distribution::Fixed(0.01), Distribution::Fixed(0.0), Distribution::Fixed(1.0), wide])?;
/// let error = draw_values(&rate, &[option], &draws).unwrap_err();
/// assert!(error.message().contains("of 10,000 draws"), "{error}");
/// # Ok::<(), hence_core::Error>(())
/// ```
pub fn draw_values(rate: &RateDistribution, options: &[OptionFlows], draws: &Draws) -> Result<Drawn> {
    if options.is_empty() {
        return Err(no_option());
    }
    if !(1..=MOST_DRAWS).contains(&draws.count) {
        let message = format!("{} draws, allowed 1 to {}", grouped(draws.count), grouped(MOST_DRAWS));
        return Err(Error::new(ErrorKind::Shape, "draws", message).with_hint("10000 draws"));
    }
    let valuer = Valuer::new(options)?;
    let mut drawn = Drawn {
        rates: vec![DrawnRate { parts: [0.0; 4], rate: 0.0 }; draws.count],
        values: vec![vec![0.0; draws.count]; options.len()],
    };
    // Each thread takes one stretch of the draws.
    let stretch = draws.count.div_ceil(draws.threads.get().min(MOST_THREADS)).next_multiple_of(ABREAST);
    let mut stretches: Vec<Stretch> = drawn
        .rates
        .chunks_mut(stretch)
        .enumerate()
        .map(|(i, rates)| Stretch { first: i * stretch, rates, values: Vec::with_capacity(options.len()) })
        .collect();
    for values in &mut drawn.values {
        for (stretch, values) in stretches.iter_mut().zip(values.chunks_mut(stretch)) {
            stretch.values.push(values);
        }
    }
    let tallies = in_threads(stretches, |stretch| stretch.fill(rate, &valuer, draws.seed));
    let mut tally = Tally::default();
    for part in tallies {
        for (all, part) in tally.iter_mut().zip(part) {
            all.count += part.count;
            all.first = all.first.or(part.first);
        }
    }
    match tally.iter().position(|refused| refused.count > 0) {
        None => Ok(drawn),
        Some(reason) => Err(refusal(reason, tally[reason], draws.count, &valuer)),
    }
}

/// Draws that follow one another, and where their results go.
struct Stretch<'a> {
    first: usize,
    rates: &'a mut [DrawnRate],
    values: Vec<&'a mut [f64]>,
}

impl Stretch<'_> {
    fn fill(mut self, rate: &RateDistribution, valuer: &Valuer, seed: u64) -> Tally {
        let mut tally = Tally::default();
        let mut shifts = Vec::new();
        let mut values = vec![[0.0; ABREAST]; self.values.len()];
        for (block, drawn) in self.rates.chunks_mut(ABREAST).enumerate() {
            let from = block * ABREAST;
            // What a last, shorter block leaves over, and draws that are refused, are valued at 0% for nothing.
            let mut rates: Row = [0.0; ABREAST];
            let new = rate.draws(seed, (self.first + from) as u64);
            drawn.copy_from_slice(&new[..drawn.len()]);
            for (i, place) in drawn.iter().enumerate() {
                rates[i] = place.rate;
                if let Some((reason, value)) = refused(place, valuer) {
                    count(&mut tally, reason, self.first + from + i, value);
                    rates[i] = 0.0;
                }
            }
            valuer.values(&rates, &mut shifts, &mut values);
            for (column, row) in self.values.iter_mut().zip(&values) {
                column[from..from + drawn.len()].copy_from_slice(&row[..drawn.len()]);
            }
            for (i, rate) in rates[..drawn.len()].iter().enumerate() {
                if !values.iter().all(|row| row[i].is_finite()) {
                    count(&mut tally, TOO_LARGE, self.first + from + i, *rate);
                }
            }
        }
        tally
    }
}

fn count(tally: &mut Tally, reason: usize, draw: usize, value: f64) {
    tally[reason].count += 1;
    tally[reason].first.get_or_insert((draw, value));
}

/// Why a draw cannot be valued, if so.
#[inline]
fn refused(drawn: &DrawnRate, valuer: &Valuer) -> Option<(usize, f64)> {
    for (quantity, value) in Quantity::ALL.into_iter().zip(drawn.parts) {
        if quantity.check(value).is_err() {
            return Some((quantity as usize, value));
        }
    }
    let rate = drawn.rate;
    if check_rate(rate).is_err() {
        return Some((RATE, rate));
    }
    valuer.fastest.filter(|growth| rate <= *growth).map(|_| (DIVERGES, rate))
}

/// The error for draws that cannot be valued.
fn refusal(reason: usize, refused: Refused, of: usize, valuer: &Valuer) -> Error {
    let (draw, value) = refused.first.unwrap_or_default();
    let many = format!("in {} of {} draws", grouped(refused.count), grouped(of));
    let first = |shown: String| format!("{shown} in draw {}", draw + 1);
    let error = match Quantity::ALL.get(reason) {
        Some(quantity) => {
            let allowed = quantity.check(value).err();
            let allowed = allowed.as_ref().and_then(|error| error.message().rsplit_once(", ")).map(|s| s.1);
            let message = format!(
                "{} is outside its range {many}: {}, {}",
                quantity.name(),
                first(quantity.text(value)),
                allowed.unwrap_or("which is no number")
            );
            Error::new(ErrorKind::RateRange, quantity.name(), message)
                .with_hint("bounds, as in `normal mean 1% sd 0.3% within 0% to 2%`")
        }
        None if reason == RATE => {
            let message = format!(
                "the rate is outside its range {many}: {}, allowed above -50% to 100%",
                first(percent(value))
            );
            Error::new(ErrorKind::RateRange, "rate", message)
                .with_hint("bounds on what is drawn, as in `normal mean 1% sd 0.3% within 0% to 2%`")
        }
        None if reason == DIVERGES => {
            let growth = percent(valuer.fastest.unwrap_or_default());
            let message = format!(
                "flows go on for ever growing by {growth} a year, and the rate does not exceed that {many}: {}",
                first(percent(value))
            );
            Error::new(ErrorKind::Diverges, "perpetual", message)
                .with_hint("bounds on what is drawn that keep the rate above the growth, or flows that end")
        }
        None => {
            let message =
                format!("a value is too large for a number {many}, the first at {}", first(percent(value)));
            Error::new(ErrorKind::NotFinite, "flows", message)
                .with_hint("larger units, or bounds that keep the rate from such depths")
        }
    };
    error.with_index(draw)
}

/// A count with its thousands apart: 10,000.
fn grouped(n: usize) -> String {
    let digits = n.to_string();
    let mut text = String::with_capacity(digits.len() + digits.len() / 3);
    for (i, digit) in digits.chars().enumerate() {
        if i > 0 && (digits.len() - i).is_multiple_of(3) {
            text.push(',');
        }
        text.push(digit);
    }
    text
}
