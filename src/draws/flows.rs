//! Net present values of one set of flows at many yearly rates: polynomials in the factor of one year.

use std::collections::BTreeMap;

use multiversion::multiversion;

use super::Perpetual;
use crate::dd::{Dd, exp2, log2_1p};
use crate::{Error, ErrorKind, Result, check, sum};

/// So many rates are valued together: as many as the processor's registers hold sums for, two in each.
pub(super) const ABREAST: usize = 48;

/// One number for each rate that is valued together.
pub(super) type Row = [f64; ABREAST];

/// The farthest offset, in years: as far as calendar years go.
const FARTHEST: f64 = 10_000.0;

/// Parts of a year to which offsets are rounded, 2^40: a thirtieth of a millisecond.
const PARTS: f64 = (1u64 << 40) as f64;

/// Flows that stand at one part of their years: a polynomial in v = 1/(1 + r), times v^lowest.
struct Polynomial {
    /// Index into the parts of a year.
    part: usize,
    lowest: i32,
    /// From the constant term up, a term a year.
    terms: Vec<f64>,
}

/// Where a flow without end starts.
struct Series {
    part: usize,
    years: i32,
    flow: f64,
    growth: f64,
    every: u32,
}

/// The flows of one option.
struct Flows {
    polynomials: Vec<Polynomial>,
    series: Vec<Series>,
}

/// The flows of all options, made ready to be valued at any rate.
pub(super) struct Valuer {
    /// The parts of a year at which flows stand, each in [0, 1).
    parts: Vec<f64>,
    options: Vec<Flows>,
    /// The fastest growth of flows that go on for ever, which the rate must exceed.
    pub fastest: Option<f64>,
}

/// Whole years and what is over, in parts.
fn split(t: f64) -> (i32, u64) {
    let years = t.floor();
    let over = ((t - years) * PARTS).round();
    if over == PARTS { (years as i32 + 1, 0) } else { (years as i32, over as u64) }
}

impl Valuer {
    pub(super) fn new(options: &[super::OptionFlows]) -> Result<Self> {
        let mut parts: BTreeMap<u64, usize> = BTreeMap::new();
        for option in options {
            check_option(option)?;
            let starts = option.perpetual.iter().map(|perpetual| perpetual.start);
            for t in option.offsets.iter().copied().chain(starts) {
                parts.insert(split(t).1, 0);
            }
        }
        for (index, place) in parts.values_mut().enumerate() {
            *place = index;
        }
        let fastest = options.iter().flat_map(|option| option.perpetual).map(|p| p.growth);
        Ok(Valuer {
            options: options.iter().map(|option| Flows::new(option, &parts)).collect(),
            fastest: fastest.max_by(f64::total_cmp),
            parts: parts.keys().map(|&over| over as f64 / PARTS).collect(),
        })
    }

    /// The value of every option at these rates.
    pub(super) fn values(&self, rates: &Row, shifts: &mut Vec<Row>, values: &mut [Row]) {
        let v: Row = std::array::from_fn(|i| 1.0 / (1.0 + rates[i]));
        shifts.clear();
        shifts.extend(self.parts.iter().map(|&part| shift(part, &v, rates)));
        for (flows, value) in self.options.iter().zip(values) {
            *value = [0.0; ABREAST];
            for polynomial in &flows.polynomials {
                let sums = horner(&polynomial.terms, &v);
                for i in 0..ABREAST {
                    let scale = shifts[polynomial.part][i] * power(v[i], rates[i], polynomial.lowest);
                    value[i] += scale * sums[i];
                }
            }
            for series in &flows.series {
                for i in 0..ABREAST {
                    let start = shifts[series.part][i] * power(v[i], rates[i], series.years);
                    value[i] += start * series.flow / series.excess(rates[i]);
                }
            }
        }
    }
}

fn check_option(option: &super::OptionFlows) -> Result<()> {
    check::same_length(("offsets", option.offsets), ("flows", option.flows))?;
    check::finite_all("offsets", option.offsets)?;
    check::finite_all("flows", option.flows)?;
    if let Some(index) = option.offsets.iter().position(|t| t.abs() > FARTHEST) {
        return Err(too_far("offsets", option.offsets[index]).with_index(index));
    }
    for (index, perpetual) in option.perpetual.iter().enumerate() {
        let Perpetual { start, flow, growth, every } = *perpetual;
        check::finite_all("perpetual", &[start, flow, growth]).map_err(|e| e.with_index(index))?;
        if start.abs() > FARTHEST {
            return Err(too_far("perpetual", start).with_index(index));
        }
        if !(growth > -1.0 && growth <= 1.0 && every > 0) {
            let message = format!("growth is {growth}, a flow every {every} years");
            return Err(Error::new(ErrorKind::RateRange, "perpetual", message)
                .with_index(index)
                .with_hint("growth above -1 up to 1, every 1 year or more"));
        }
    }
    Ok(())
}

fn too_far(argument: &'static str, t: f64) -> Error {
    let message = format!("an offset is {t} years, allowed -{FARTHEST} to {FARTHEST}");
    Error::new(ErrorKind::OutsideDomain, argument, message).with_hint("offsets in years from the base")
}

impl Flows {
    fn new(option: &super::OptionFlows, parts: &BTreeMap<u64, usize>) -> Self {
        let mut moments: Vec<(u64, i32, f64)> = option
            .offsets
            .iter()
            .zip(option.flows)
            .map(|(&t, &flow)| {
                let (years, over) = split(t);
                (over, years, flow)
            })
            .collect();
        moments.sort_by_key(|&(over, years, _)| (over, years));
        let mut polynomials: Vec<Polynomial> = Vec::new();
        for moment in moments.chunk_by(|a, b| (a.0, a.1) == (b.0, b.1)) {
            let (over, years, _) = moment[0];
            let part = parts[&over];
            if polynomials.last().is_none_or(|last| last.part != part) {
                // A first flow after the base needs no factor of its own before it.
                polynomials.push(Polynomial { part, lowest: years.min(0), terms: Vec::new() });
            }
            if let Some(last) = polynomials.last_mut() {
                let place = (years - last.lowest) as usize;
                last.terms.resize(place + 1, 0.0);
                // All flows of a moment are one term; their sum is exact, so that the order of streams does not matter.
                last.terms[place] = match moment {
                    [one] => one.2,
                    [one, other] => one.2 + other.2,
                    several => sum(&several.iter().map(|moment| moment.2).collect::<Vec<_>>()),
                };
            }
        }
        let series = option.perpetual.iter().filter(|perpetual| perpetual.flow != 0.0).map(|perpetual| {
            let (years, over) = split(perpetual.start);
            let Perpetual { flow, growth, every, .. } = *perpetual;
            Series { part: parts[&over], years, flow, growth, every }
        });
        Flows { polynomials, series: series.collect() }
    }
}

impl Series {
    /// ((1 + r)/(1 + x))^m - 1, by doubling, without cancellation: the sum of the series is flow / that.
    fn excess(&self, rate: f64) -> f64 {
        let both = |a: f64, b: f64| a + b + a * b;
        let mut single = (rate - self.growth) / (1.0 + self.growth);
        let (mut excess, mut left) = (0.0, self.every);
        while left > 0 {
            if left & 1 == 1 {
                excess = both(excess, single);
            }
            single = both(single, single);
            left >>= 1;
        }
        excess
    }
}

/// The polynomial with these terms, by Horner's rule.
#[multiversion(targets = "simd")]
fn horner(terms: &[f64], v: &Row) -> Row {
    let mut sums = [0.0; ABREAST];
    for &term in terms.iter().rev() {
        for i in 0..ABREAST {
            sums[i] = sums[i] * v[i] + term;
        }
    }
    sums
}

/// v^part, for a part of a year.
fn shift(part: f64, v: &Row, rates: &Row) -> Row {
    if part == 0.0 {
        [1.0; ABREAST]
    } else if part == 0.5 {
        v.map(f64::sqrt)
    } else {
        rates.map(|rate| exp2(-(log2_1p(Dd::of(rate)) * part)).hi)
    }
}

/// v^years by repeated squaring; of years before the base, (1 + r)^-years.
#[inline]
fn power(v: f64, rate: f64, years: i32) -> f64 {
    let (mut base, mut left) = (if years < 0 { 1.0 + rate } else { v }, years.unsigned_abs());
    let mut product = 1.0;
    while left > 0 {
        if left & 1 == 1 {
            product *= base;
        }
        base *= base;
        left >>= 1;
    }
    product
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn offsets_are_split_into_years_and_parts() {
        assert_eq!(split(3.0), (3, 0));
        assert_eq!(split(2.5), (2, 1 << 39));
        assert_eq!(split(-0.5), (-1, 1 << 39));
        assert_eq!(split(1.0 - 1e-16), (1, 0), "rounding makes a whole year");
    }

    #[test]
    fn powers_and_series_are_those_of_their_formulas() {
        assert_eq!(power(0.5, 1.0, 10), 1.0 / 1024.0);
        assert_eq!(power(0.5, 1.0, -3), 8.0);
        assert_eq!(power(0.5, 1.0, 0), 1.0);
        let series = Series { part: 0, years: 0, flow: 1.0, growth: 0.25, every: 3 };
        // (1.5 / 1.25)^3 - 1 = 1.728 - 1
        assert!((series.excess(0.5) - 0.728).abs() < 1e-15);
    }
}
