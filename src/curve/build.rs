//! From what was stated to what can be computed: checks a spec and resolves its edges.

use super::checks;
use super::domain::FARTHEST;
use super::edges::Edges;
use super::gamma::Gamma;
use super::horizon::{ByFlow, RatePath};
use super::mixture::Mixture;
use super::persistent::Persistent;
use super::piecewise::{Flat, Piecewise};
use super::ramsey::{Ramsey, slope};
use super::regimes::Regimes;
use super::years::Years;
use super::{Curve, Domain, Form, Parts};
use crate::dd::{Dd, exp2_m1};
use crate::{Band, Compounding, Edge, Error, ErrorKind, HorizonRule, Persistence, Result, Spec, Where};

/// A standard deviation below which gamma factors equal those of the mean rate at every offset allowed.
const NO_SPREAD: f64 = 1e-40;

impl Spec {
    /// Makes the curve computable: checks every parameter, turns calendar edges into offsets, picks the rate that
    /// goes with the appraisal's length.
    ///
    /// **Arguments**: `at` states the base year, needed where edges are calendar years or count from one, and the
    /// length in years, needed for whole-horizon rates by length.
    ///
    /// **Ranges**: rates above -50% to 100%; preference above -50% to 100%; hazard 0 to 100%; elasticity 0 to 20;
    /// growth above -100% to 100%, and its departure at the base likewise; persistence above -1 and below 1; up to 10
    /// states of growth, whose chances at the base, and of each row, are 0 or more and sum to 1 within 1e-12 (they
    /// are divided by their sum); gamma mean above 0 to 100%; standard deviations 0 to 100% (0 is the certain
    /// case); weights from 0, summing to 1 within 1e-12 (they are divided by their sum, so that D(0) is 1); edges
    /// above 0 as stated and increasing; table factors positive and normal, 1 at offset 0.
    ///
    /// **Errors**: `RateRange`, `NotFinite`, `Weights`, `Edges`, `Shape` with the band, weight, point, state or row as
    /// index; `NeedsBase`, `NeedsLength`; `OutsideDomain` for a length past the last edge; `Unsupported` for
    /// persistence of other than log growth and for the exact Ramsey rule with continuous compounding.
    ///
    /// ```
    /// use hence_core::{Band, Compounding, Edge, Spec, Where};
    /// let flat = Spec::Flat { rate: 0.1, compounding: Compounding::Yearly };
    /// assert_eq!(flat.curve(&Where::default())?.factor(1.0)?, 1.0 / 1.1);
    ///
    /// let bands = vec![
    ///     Band { value: 0.025, to: Some(Edge::Year(2070)) },
    ///     Band { value: 0.015, to: None },
    /// ];
    /// let declining = Spec::Bands { bands, edges_from: None };
    /// let curve = declining.curve(&Where { base_year: Some(2026), length: None })?;
    /// assert_eq!(curve.forward_rate(45.0)?, 0.015);
    ///
    /// let slip = Spec::Flat { rate: 3.5, compounding: Compounding::Yearly };
    /// let error = slip.curve(&Where::default()).unwrap_err();
    /// assert_eq!(error.message(), "rate is 350% (stored 3.5), allowed above -50% to 100%");
    /// # Ok::<(), hence_core::Error>(())
    /// ```
    pub fn curve(&self, at: &Where) -> Result<Curve> {
        let (form, domain, parts) = match self {
            Spec::Flat { rate, compounding } => {
                checks::rate(*rate)?;
                flat(Dd::of(*rate), *compounding)
            }
            Spec::Bands { bands, edges_from } => {
                let edges = Edges::resolve(bands, *edges_from, at)?;
                let rates = values(bands, checks::rate)?;
                forward(edges, rates.into_iter().map(Dd::of).collect(), Compounding::Yearly)
            }
            Spec::HorizonSteps { bands, rule } => {
                let edges = Edges::resolve(bands, None, at)?;
                let rates = values(bands, checks::rate)?;
                horizon(RatePath::Steps { edges, rates }, *rule, at)?
            }
            Spec::HorizonPoints { points, rule } => {
                check_points(points)?;
                horizon(RatePath::Points(points.clone()), *rule, at)?
            }
            Spec::Ramsey { preference, hazard, elasticity, growth, exact, compounding } => {
                let rule = Ramsey::new(*preference, *hazard, *elasticity)?;
                let edges = Edges::resolve(growth, None, at)?;
                let path = values(growth, checks::growth)?;
                if *exact {
                    check_whole_years(growth)?;
                    check_yearly(*compounding)?;
                    exact_ramsey(rule, *elasticity, edges, path)
                } else {
                    let rates: Vec<Dd> = path.iter().map(|&g| rule.linear(g)).collect();
                    for (index, rate) in rates.iter().enumerate() {
                        checks::rate(rate.hi).map_err(|e| e.with_index(index))?;
                    }
                    if rates.len() == 1 && edges.open() {
                        flat(rates[0], *compounding)
                    } else {
                        forward(edges, rates, *compounding)
                    }
                }
            }
            Spec::UncertainGrowth {
                preference,
                hazard,
                elasticity,
                mean,
                sd,
                log,
                persistence,
                compounding,
            } => {
                let rule = Ramsey::new(*preference, *hazard, *elasticity)?;
                checks::growth(*mean)?;
                checks::sd(*sd)?;
                match persistence {
                    None => {
                        let rate = rule.uncertain(*mean, *sd, *log);
                        checks::rate(rate.hi)?;
                        flat(rate, if *log { Compounding::Continuous } else { *compounding })
                    }
                    Some(persistence) if *log => persistent(rule, *mean, *sd, *persistence)?,
                    Some(_) => {
                        let message = "persistence is that of log growth";
                        return Err(Error::new(ErrorKind::Unsupported, "persistence", message)
                            .with_hint("log growth in place of growth"));
                    }
                }
            }
            Spec::GrowthRegimes { preference, hazard, elasticity, states, transition, start } => {
                let rule = Ramsey::new(*preference, *hazard, *elasticity)?;
                let regimes = Regimes::new(rule, states, transition, start)?;
                let parts = Parts::GrowthRegimes {
                    rho: rule.rho(),
                    elasticity: *elasticity,
                    states: states.clone(),
                    transition: transition.clone(),
                    start: start.clone(),
                };
                (Form::Years(Years::Regimes(regimes)), Domain::FROM_ZERO, parts)
            }
            Spec::Gamma { mean, sd } => {
                checks::mean(*mean)?;
                checks::sd(*sd)?;
                gamma(*mean, *sd)
            }
            Spec::Mixture(components) => mixture(components, at)?,
            Spec::Table(points) => table(points)?,
        };
        Ok(Curve::new(self.clone(), form, domain, parts))
    }
}

type Built = (Form, Domain, Parts);

fn flat(rate: Dd, compounding: Compounding) -> Built {
    let parts = match compounding {
        Compounding::Yearly => Parts::Yearly { rate: rate.hi },
        Compounding::Continuous => Parts::Continuous { rate: rate.hi },
    };
    (Form::Flat(Flat::new(slope(rate, compounding))), Domain::ALL, parts)
}

fn forward(edges: Edges, rates: Vec<Dd>, compounding: Compounding) -> Built {
    let slopes: Vec<Dd> = rates.iter().map(|&rate| slope(rate, compounding)).collect();
    let yearly = match compounding {
        Compounding::Yearly => rates.iter().map(|rate| rate.hi).collect(),
        Compounding::Continuous => slopes.iter().map(|&slope| exp2_m1(-slope).hi).collect(),
    };
    let (domain, parts) = (Domain::ALL.to(edges.end()), Parts::bands(&edges, yearly));
    (Form::Lines(Piecewise::from_slopes(edges, slopes)), domain, parts)
}

fn exact_ramsey(rule: Ramsey, elasticity: f64, edges: Edges, growth: Vec<f64>) -> Built {
    let slopes = growth.iter().map(|&g| rule.exact_slope(g)).collect();
    let domain = Domain::FROM_ZERO.to(edges.end());
    let (closed, open) = (edges.closed(), edges.open());
    let parts = Parts::RamseyExact { rho: rule.rho(), elasticity, edges: closed, growth, open };
    (Form::Lines(Piecewise::from_slopes(edges, slopes)), domain, parts)
}

fn persistent(rule: Ramsey, mean: f64, sd: f64, persistence: Persistence) -> Result<Built> {
    checks::persistence(persistence.phi)?;
    checks::departure(persistence.start)?;
    let growth = Persistent::new(rule, mean, sd, persistence);
    let parts =
        Parts::PersistentGrowth { rho: rule.rho(), elasticity: rule.elasticity(), mean, sd, persistence };
    Ok((Form::Years(Years::Persistent(growth)), Domain::FROM_ZERO, parts))
}

fn horizon(path: RatePath, rule: HorizonRule, at: &Where) -> Result<Built> {
    let end = match &path {
        RatePath::Steps { edges, .. } => edges.end(),
        RatePath::Points(_) => f64::INFINITY,
    };
    match rule {
        HorizonRule::ByFlow => {
            let parts = match &path {
                RatePath::Steps { edges, rates } => {
                    Parts::HorizonSteps { edges: edges.closed(), rates: rates.clone(), open: edges.open() }
                }
                RatePath::Points(points) => Parts::HorizonPoints { points: points.clone() },
            };
            Ok((Form::ByFlow(ByFlow::new(path)), Domain::FROM_ZERO.to(end), parts))
        }
        HorizonRule::ByLength => {
            let Some(length) = at.length else {
                return Err(Error::new(
                    ErrorKind::NeedsLength,
                    "length",
                    "the rate depends on the appraisal's length, and no length is given",
                )
                .with_hint("state the length in years"));
            };
            checks::finite("length", length)?;
            if !(0.0..=end.min(FARTHEST)).contains(&length) {
                return Err(Error::new(
                    ErrorKind::OutsideDomain,
                    "length",
                    format!("length is {length} years, allowed 0 to {}", end.min(FARTHEST)),
                ));
            }
            let rate = path.rate(length);
            let (form, domain, _) = flat(rate, Compounding::Yearly);
            Ok((form, domain, Parts::OneRate { rate: rate.hi, length }))
        }
    }
}

fn gamma(mean: f64, sd: f64) -> Built {
    if sd < NO_SPREAD {
        return flat(Dd::of(mean), Compounding::Continuous);
    }
    let gamma = Gamma::new(mean, sd);
    let domain = Domain { lower: gamma.lower(), lower_included: false, ..Domain::ALL };
    (Form::Gamma(gamma), domain, Parts::Gamma { mean, sd })
}

fn mixture(components: &[(f64, Spec)], at: &Where) -> Result<Built> {
    let mut curves = Vec::with_capacity(components.len());
    for (index, (weight, spec)) in components.iter().enumerate() {
        curves.push((*weight, spec.curve(at).map_err(|e| e.with_index(index))?));
    }
    let parts = curves.iter().map(|(weight, curve)| (*weight, curve.parts().clone())).collect();
    let mixture = Mixture::new(curves)?;
    let domain = mixture.domain();
    Ok((Form::Mixture(mixture), domain, Parts::Mixture(parts)))
}

fn table(points: &[(f64, f64)]) -> Result<Built> {
    let refuse =
        |kind, index: usize, message: String| Err(Error::new(kind, "table", message).with_index(index));
    for (index, &(t, factor)) in points.iter().enumerate() {
        if !t.is_finite() || !factor.is_finite() {
            return refuse(ErrorKind::NotFinite, index, format!("the point is ({t}, {factor})"));
        }
        if factor < f64::MIN_POSITIVE {
            return refuse(ErrorKind::RateRange, index, format!("the factor is {factor}, allowed above 0"));
        }
        if index > 0 && t <= points[index - 1].0 {
            return refuse(ErrorKind::Edges, index, format!("offset {t} does not follow the one before it"));
        }
        if t == 0.0 && factor != 1.0 {
            return refuse(ErrorKind::RateRange, index, format!("the factor at offset 0 is {factor}, not 1"));
        }
    }
    if points.len() < 2 || !points.iter().any(|point| point.0 == 0.0) {
        return Err(Error::new(
            ErrorKind::Edges,
            "table",
            "a table holds offset 0 and at least one other offset",
        )
        .with_hint("add the point 0, 1"));
    }
    let domain = Domain { lower: points[0].0, ..Domain::ALL }.to(points[points.len() - 1].0);
    Ok((Form::Lines(Piecewise::through(points)), domain, Parts::Table(points.to_vec())))
}

/// The values of the bands, each in range.
fn values(bands: &[Band], check: fn(f64) -> Result<()>) -> Result<Vec<f64>> {
    for (index, band) in bands.iter().enumerate() {
        check(band.value).map_err(|e| e.with_index(index))?;
    }
    Ok(bands.iter().map(|band| band.value).collect())
}

fn check_points(points: &[(f64, f64)]) -> Result<()> {
    if points.is_empty() {
        return Err(Error::new(ErrorKind::Edges, "points", "there is no point")
            .with_hint("state at least one rate and its length"));
    }
    for (index, &(t, rate)) in points.iter().enumerate() {
        let refuse = |kind, message| Err(Error::new(kind, "points", message).with_index(index));
        if !t.is_finite() {
            return refuse(ErrorKind::NotFinite, format!("the offset is {t}"));
        }
        if t < 0.0 || (index > 0 && t <= points[index - 1].0) {
            return refuse(
                ErrorKind::Edges,
                format!("the point is at offset {t}; points start at 0 or later and increase"),
            );
        }
        checks::rate(rate).map_err(|e| e.with_index(index))?;
    }
    Ok(())
}

/// The exact rule has one growth rate per year, so a band cannot end within a year.
fn check_whole_years(growth: &[Band]) -> Result<()> {
    for (index, band) in growth.iter().enumerate() {
        if let Some(Edge::Offset(edge)) = band.to
            && edge.fract() != 0.0
        {
            return Err(Error::new(
                ErrorKind::Edges,
                "growth",
                format!("the band ends at offset {edge}; with the exact rule growth is by whole years"),
            )
            .with_index(index));
        }
    }
    Ok(())
}

fn check_yearly(compounding: Compounding) -> Result<()> {
    if compounding == Compounding::Yearly {
        return Ok(());
    }
    Err(Error::new(
        ErrorKind::Unsupported,
        "compounding",
        "the exact Ramsey rule compounds yearly; continuous compounding goes with the linear rule",
    )
    .with_hint("leave out \"exact\" or \"continuous\""))
}
