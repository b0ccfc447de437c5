//! The laws and timings that are tried on a row of factors, by the kind of mistake that each would be.

use std::rc::Rc;

use hence_core::{Curve, Parts, PriceBasis, Where};

use super::law::{Bands, Law, When};
use super::series::{Point, Series};
use crate::diagnose::Seen;
use crate::findings::Kind;

/// What is known of a row besides its numbers.
pub struct Known {
    /// The forward bands of the declared curve, where it is made of such.
    pub forward: Option<Bands>,
    /// The bands of whole-horizon rates, where the declared curve is made of such.
    pub horizon: Option<Bands>,
    /// One rate for all years is declared.
    pub flat: bool,
    /// Rates of inflation that the workbook states.
    pub inflation: Vec<f64>,
    /// The declared timing.
    pub declared: When,
    /// Curves of other schedules.
    pub schedules: Vec<(String, Option<PriceBasis>, Rc<Curve>)>,
    /// Whether the declared rates are real, as far as is said.
    pub real: bool,
}

impl Known {
    /// Of the options that use a series.
    pub fn of(seen: &Seen, series: &Series) -> Known {
        let parts = series.curve.parts();
        let forward = Bands::forward(parts);
        let horizon = match parts {
            Parts::HorizonSteps { edges, rates, open } => {
                Some(Bands { edges: edges.clone(), rates: rates.clone(), open: *open })
            }
            _ => None,
        };
        // Within the first band a declining curve is a flat one.
        let last = series.points.last().map_or(0.0, |p| p.t);
        let flat = forward.as_ref().is_some_and(|bands| !bands.several() || bands.edges[0] >= last);
        let (choice, stream) = series.users[0];
        let prices = &seen.appraisal.choices[choice].prices;
        let inflation = match prices.levels.as_ref().map(|given| &given.value) {
            Some(crate::appraisal::Levels::Inflation(rate)) => vec![*rate],
            _ => Vec::new(),
        };
        let outcome = &seen.outcomes[choice];
        let basis = stream.map_or(&outcome.basis, |s| outcome.basis_of(s));
        let length = outcome.offsets.iter().copied().fold(0.0, f64::max);
        let base = crate::clock::base_year(&seen.appraisal.choices[choice].base.value);
        let at = Where { base_year: base, length: Some(length) };
        let schedules = seen.catalogue.schedules().into_iter().filter_map(|schedule| {
            let curve = schedule.spec().curve(&at).ok()?;
            Some((schedule.id().to_owned(), schedule.prices(), Rc::new(curve)))
        });
        Known {
            schedules: schedules.collect(),
            real: basis.price_basis() != Some(PriceBasis::Nominal),
            forward,
            horizon,
            flat,
            inflation,
            declared: When::declared(series.timing),
        }
    }
}

/// Timings other than the declared one.
pub fn timings(known: &Known, far: bool) -> Vec<When> {
    let declared = known.declared;
    let reach = if far { 10 } else { 2 };
    let mut all = Vec::new();
    for half_years in 1..=reach {
        for later in [0.5 * f64::from(half_years), -0.5 * f64::from(half_years)] {
            all.push(When { later, ..declared });
        }
    }
    let near = |halves: i32| 0.5 * f64::from(halves);
    all.extend((-2..=3).map(near).map(|later| When { later, averaged: !declared.averaged, ..declared }));
    let earlier: Vec<When> = all.iter().copied().filter(|when| when.later < 0.0).collect();
    all.extend(earlier.into_iter().map(|when| When { clamped: true, ..when }));
    if known.forward.as_ref().is_some_and(Bands::several) {
        let halves = [0.5, -0.5, 1.0, -1.0];
        all.extend(halves.map(|later| When { later, chained: true, ..declared }));
    }
    all
}

/// Curves other than the declared one, by the kind of mistake, the likeliest first.
pub fn laws(series: &Series, known: &Known, when: When) -> Vec<(Kind, Law)> {
    let mut all: Vec<(Kind, Law)> = continuous(&series.curve, known).into_iter().collect();
    if !known.flat {
        let rates = fitted_rates(series, when);
        let stated = known.forward.iter().chain(&known.horizon).flat_map(|bands| bands.rates.clone());
        all.extend(stated.chain(rates).map(|rate| (Kind::FlatForBands, Law::Flat(rate))));
    }
    all.extend(whole_horizon(known));
    all.extend(inflations(series, known, when).map(|i| {
        let law = Law::Inflated(Rc::clone(&series.curve), i);
        (Kind::NominalOnReal, law)
    }));
    all.extend(moved_edges(series, known, when).into_iter().map(|law| (Kind::BandEdge, law)));
    all
}

/// The declared yearly rates, compounded continuously.
fn continuous(curve: &Curve, known: &Known) -> Option<(Kind, Law)> {
    let yearly = !matches!(curve.parts(), Parts::Continuous { .. });
    let bands = known.forward.clone().filter(|_| yearly)?;
    Some((Kind::ContinuousForYearly, Law::Continuous(bands)))
}

/// The declared rates, each over the whole time; the band is looked up by the offset, or by the year near to it.
fn whole_horizon(known: &Known) -> Vec<(Kind, Law)> {
    let Some(bands) = known.forward.as_ref().filter(|bands| bands.several()) else { return Vec::new() };
    let lookups = [(0.0, false), (0.0, true), (0.5, false), (-0.5, false), (1.0, false)];
    let law = |(moved, later)| Law::WholeHorizon { bands: bands.clone(), moved, later };
    lookups.into_iter().map(|lookup| (Kind::WholeHorizonForForward, law(lookup))).collect()
}

/// The curves of other schedules.
fn schedules(known: &Known) -> Vec<(Kind, Law)> {
    let of = |(id, prices, curve): &(String, Option<PriceBasis>, Rc<Curve>)| {
        let nominal = known.real && *prices == Some(PriceBasis::Nominal);
        let kind = if nominal { Kind::NominalOnReal } else { Kind::Differs };
        (kind, Law::Schedule(id.clone(), Rc::clone(curve)))
    };
    known.schedules.iter().map(of).collect()
}

/// Curves that are no known mistake, but a basis of their own.
pub fn others(series: &Series, known: &Known, when: When) -> Vec<(Kind, Law)> {
    let mut all = Vec::new();
    if known.flat {
        // A flat rate is told as such, whoever may have published it.
        all.extend(fitted_rates(series, when).into_iter().map(|rate| (Kind::Differs, Law::Flat(rate))));
    }
    all.extend(schedules(known));
    if let Some(bands) = &known.horizon {
        all.push((Kind::Differs, Law::Bands(bands.clone())));
    }
    all
}

/// Curves other than the declared one of which nothing need be fitted. `last` is the offset of the last year.
pub fn round_laws(curve: &Rc<Curve>, known: &Known, last: f64) -> Vec<(Kind, Law)> {
    let mut all = Vec::new();
    let bands = known.forward.iter().chain(&known.horizon);
    all.extend(continuous(curve, known));
    all.extend(whole_horizon(known));
    let kind = if known.flat { Kind::Differs } else { Kind::FlatForBands };
    let rates = bands.flat_map(|bands| bands.rates.clone());
    let rates = rates.filter(|_| !known.flat).chain((0..=60).map(|quarters| f64::from(quarters) / 400.0));
    let inflations = known.inflation.iter().copied().chain((1..=20).map(|halves| f64::from(halves) / 200.0));
    all.extend(inflations.map(|i| (Kind::NominalOnReal, Law::Inflated(Rc::clone(curve), i))));
    all.extend(rates.map(|rate| (kind, Law::Flat(rate))));
    all.extend(shifted_edges(known, last).into_iter().map(|law| (Kind::BandEdge, law)));
    all.extend(schedules(known));
    all
}

/// A few points from which a number may be fitted, the far end first.
fn anchors(series: &Series) -> impl Iterator<Item = &Point> {
    let n = series.points.len();
    let places = [n.saturating_sub(1), n * 3 / 4, n / 2, n / 4, n / 8];
    places.into_iter().filter_map(move |i| series.points.get(i)).filter(|p| p.found > 0.0 && p.t > 0.0)
}

/// Round numbers near a fitted one, and itself.
fn near(x: f64) -> impl Iterator<Item = f64> {
    let rounded = [3, 4, 5, 6, 8].map(|places| (x * 10f64.powi(places)).round() / 10f64.powi(places));
    rounded.into_iter().chain([x])
}

/// A number is fitted only where so many factors can show that it does not fit.
const ENOUGH: usize = 3;

/// Flat rates that give the factor of an anchor.
fn fitted_rates(series: &Series, when: When) -> Vec<f64> {
    let mut rates = Vec::new();
    if series.off().len() < ENOUGH {
        return rates;
    }
    for point in anchors(series) {
        let (mut low, mut high) = (-0.2, 1.0);
        let above = |rate: f64| Law::Flat(rate).timed(point.t, when).is_some_and(|f| f > point.found);
        if !above(low) || above(high) {
            continue;
        }
        for _ in 0..64 {
            let middle = f64::midpoint(low, high);
            if above(middle) { low = middle } else { high = middle }
        }
        rates.extend(near(f64::midpoint(low, high)));
    }
    rates
}

/// Yearly rates of inflation from the least that is taken for one to the most.
const INFLATION: std::ops::RangeInclusive<f64> = 0.001..=0.25;

/// Rates of inflation that, compounded with the declared curve, give the factor of an anchor. On one flat rate any
/// other flat rate would do: there the inflation must be a round one, or stated.
fn inflations(series: &Series, known: &Known, when: When) -> impl Iterator<Item = f64> {
    let mut all = known.inflation.clone();
    let enough = series.off().len() >= ENOUGH;
    for point in anchors(series).filter(|_| enough) {
        let Some(factor) = Law::Declared(Rc::clone(&series.curve)).timed(point.t, when) else { continue };
        let t = point.t + when.later - if when.averaged { 0.5 } else { 0.0 };
        let fitted = (factor / point.found).powf(1.0 / t) - 1.0;
        let round = |i: &f64| !known.flat || ((i * 2000.0).round() / 2000.0 - i).abs() < 1e-12;
        all.extend(near(fitted).filter(|i| INFLATION.contains(i)).filter(round));
    }
    all.into_iter()
}

/// The declared bands with edges in other years: one edge, all of them alike, or each where the yearly rate of the
/// row changes.
fn moved_edges(series: &Series, known: &Known, when: When) -> Vec<Law> {
    let last = series.points.last().map_or(0.0, |p| p.t);
    let mut all = shifted_edges(known, last);
    all.extend(known.forward.as_ref().and_then(|bands| stepped(series, bands, when)).map(Law::Bands));
    all
}

/// The declared bands with one edge in another year, or with all of them as many years off.
///
/// An edge beyond the last year would leave its band unseen: that is another rate, not another edge.
fn shifted_edges(known: &Known, last: f64) -> Vec<Law> {
    let mut all = Vec::new();
    let make = |bands: Bands| match known.horizon.is_some() {
        true => Law::WholeHorizon { bands, moved: 0.0, later: false },
        false => Law::Bands(bands),
    };
    let half_years = |from: i32, to: i32| (from..to).map(|half| 0.5 * f64::from(half));
    for bands in known.forward.iter().chain(&known.horizon).filter(|bands| bands.several()) {
        for k in (0..bands.rates.len() - 1).filter(|&k| k == 0 || bands.edges[k - 1] < last) {
            let others = half_years(0, 2 * (last.min(1_000.0).ceil() as i32));
            for edge in others.filter(|edge| *edge != bands.edges[k] && *edge < last) {
                let mut moved = bands.clone();
                moved.edges[k] = edge;
                all.push(make(moved));
            }
        }
        for by in half_years(-40, 41).filter(|by| *by != 0.0 && bands.edges[0] + by < last) {
            let edges = bands.edges.iter().map(|edge| edge + by).collect();
            all.push(make(Bands { edges, ..bands.clone() }));
        }
    }
    all
}

/// The declared rates with edges where the yearly rate between neighbouring points changes.
fn stepped(series: &Series, bands: &Bands, when: When) -> Option<Bands> {
    let mut edges = Vec::new();
    let mut k = 0;
    for pair in series.points.windows(2) {
        let years = pair[1].t - pair[0].t;
        let rate = (pair[0].found / pair[1].found).powf(1.0 / years) - 1.0;
        let same = |declared: &f64| (declared - rate).abs() < 1e-7;
        let found = k + bands.rates[k..].iter().position(same)?;
        edges.extend(std::iter::repeat_n(pair[0].t + when.later, found - k));
        k = found;
    }
    edges.extend(std::iter::repeat_n(f64::INFINITY, bands.rates.len() - 1 - k));
    (k > 0).then(|| Bands { edges, ..bands.clone() })
}

/// Bands of the row's own, where its yearly rates are few: each holds for three years or more on average.
pub fn own_bands(series: &Series) -> Option<Bands> {
    let mut bands = Bands { edges: Vec::new(), rates: Vec::new(), open: true };
    for pair in series.points.windows(2) {
        let rate = (pair[0].found / pair[1].found).powf(1.0 / (pair[1].t - pair[0].t)) - 1.0;
        if bands.rates.last().is_none_or(|last: &f64| (last - rate).abs() > 1e-7) {
            if !bands.rates.is_empty() {
                bands.edges.push(pair[0].t);
            }
            let round = (rate * 1e6).round() / 1e6;
            bands.rates.push(if (round - rate).abs() < 1e-10 { round } else { rate });
        }
    }
    (!bands.rates.is_empty() && 3 * bands.rates.len() < series.points.len()).then_some(bands)
}
