//! Factors within 2 units in the last place of the exact function at the stored doubles (design, section 3).
//!
//! The exact values are computed here with the arbitrary-precision crate dashu-float, from the definitions of the
//! curves and by other routes than the library's: products over bands, weighted sums, powers.

use crate::exact::{Big, Worst, big, continuous, yearly};
use hence_core::{Band, Compounding, Curve, Edge, GrowthState, HorizonRule, Persistence, Spec, Where};

const RATES: [f64; 20] = [
    -0.4999, -0.3, -0.1, -0.01, -1e-9, 0.0, 1e-12, 1e-4, 0.0086, 0.01, 0.014, 0.02, 0.035, 0.0325, 0.07, 0.1,
    0.25, 0.5, 0.999, 1.0,
];

/// Whole, half, odd and awkward offsets to 1,000.
fn offsets() -> Vec<f64> {
    let mut offsets = vec![0.0, 1e-9, 0.1, 1.0 / 3.0, 0.5, 365.2425, 999.999, 1000.0];
    offsets.extend((1..=30).map(f64::from));
    offsets.extend((1..60).map(|k| f64::from(k) * 16.37));
    offsets.extend([30.5, 75.0, 75.25, 99.99, 125.0, 199.999_999, 200.5, 300.0, 300.000_000_1, 500.0, 731.0]);
    offsets
}

fn both_ways() -> Vec<f64> {
    offsets().into_iter().flat_map(|t| [t, -t]).collect()
}

fn made(spec: &Spec) -> Curve {
    spec.curve(&Where { base_year: Some(2026), length: Some(20.0) }).expect("a valid curve")
}

/// Compares the factors of a curve with `exact` at the offsets, leaving out those that overflow a double.
fn factors(worst: &mut Worst, spec: &Spec, offsets: &[f64], exact: impl Fn(f64) -> Big) {
    let curve = made(spec);
    for &t in offsets {
        let expected = exact(t);
        if expected.to_f64().value().is_normal() {
            let found = curve.factor(t).unwrap_or_else(|e| panic!("{spec:?} at {t}: {e}"));
            worst.compare(found, &expected, || format!("{spec:?} at {t}"));
        }
    }
}

fn band(value: f64, to: f64) -> Band {
    Band { value, to: Some(Edge::Offset(to)) }
}

fn after(value: f64) -> Band {
    Band { value, to: None }
}

/// The bands of HM Treasury's Green Book of 2003, and harder ones: fractional edges, negative and tiny rates.
fn band_sets() -> Vec<Vec<Band>> {
    let uk = [(0.035, 30.0), (0.03, 75.0), (0.025, 125.0), (0.02, 200.0), (0.015, 300.0)];
    vec![
        uk.iter().map(|&(rate, to)| band(rate, to)).chain([after(0.01)]).collect(),
        vec![band(0.1, 0.3), band(-0.02, 7.7), band(1e-7, 33.333), band(0.5, 34.1), after(0.02)],
        (1..=200).map(|k| band(0.05 / f64::from(k), f64::from(k) * 4.1)).chain([after(1e-3)]).collect(),
    ]
}

/// The product over bands of each band's own factor for the years of (0, t] inside it.
fn product(bands: &[Band], t: f64, factor: impl Fn(f64, &Big) -> Big) -> Big {
    if t <= 0.0 {
        return factor(bands[0].value, &big(t));
    }
    let mut from = 0.0;
    let mut value = big(1.0);
    for band in bands {
        let to = match band.to {
            Some(Edge::Offset(edge)) => edge.min(t),
            _ => t,
        };
        if to > from {
            value *= factor(band.value, &(big(to) - big(from)));
            from = to;
        }
    }
    value
}

#[test]
fn flat_factors() {
    let mut worst = Worst::new("flat, yearly", 2.0);
    let mut other = Worst::new("flat, continuous", 2.0);
    for rate in RATES {
        let spec = Spec::Flat { rate, compounding: Compounding::Yearly };
        factors(&mut worst, &spec, &both_ways(), |t| yearly(&big(rate), &big(t)));
        let spec = Spec::Flat { rate, compounding: Compounding::Continuous };
        factors(&mut other, &spec, &both_ways(), |t| continuous(&big(rate), &big(t)));
    }
    worst.report(3500);
    other.report(3500);
}

#[test]
fn banded_factors() {
    let mut worst = Worst::new("banded", 2.0);
    for bands in band_sets() {
        let spec = Spec::Bands { bands: bands.clone(), edges_from: None };
        let mut at = both_ways();
        for band in &bands {
            if let Some(Edge::Offset(edge)) = band.to {
                at.extend([edge, edge - 0.01, edge + 0.01, edge.next_up(), edge.next_down()]);
            }
        }
        factors(&mut worst, &spec, &at, |t| product(&bands, t, |rate, years| yearly(&big(rate), years)));
    }
    worst.report(1500);
}

#[test]
fn whole_horizon_factors() {
    let mut worst = Worst::new("whole horizon", 2.0);
    for bands in band_sets() {
        let spec = Spec::HorizonSteps { bands: bands.clone(), rule: HorizonRule::ByFlow };
        factors(&mut worst, &spec, &offsets(), |t| {
            let holds = |band: &&Band| !matches!(band.to, Some(Edge::Offset(edge)) if edge < t);
            yearly(&big(bands.iter().find(holds).unwrap().value), &big(t))
        });
    }
    let points = vec![(3.0, 0.039), (10.0, 0.04), (30.0, 0.042), (77.7, 0.03)];
    let interpolated = |t: f64| {
        if t <= 3.0 {
            return big(0.039);
        }
        let Some(pair) = points.windows(2).find(|pair| t <= pair[1].0) else { return big(0.03) };
        let ((from, low), (to, high)) = (pair[0], pair[1]);
        big(low) + (big(high) - big(low)) * (big(t) - big(from)) / (big(to) - big(from))
    };
    let spec = Spec::HorizonPoints { points: points.clone(), rule: HorizonRule::ByFlow };
    factors(&mut worst, &spec, &offsets(), |t| yearly(&interpolated(t), &big(t)));
    let spec = Spec::HorizonPoints { points: points.clone(), rule: HorizonRule::ByLength };
    factors(&mut worst, &spec, &both_ways(), |t| yearly(&interpolated(20.0), &big(t)));
    worst.report(500);
}

#[test]
fn ramsey_factors() {
    let mut linear = Worst::new("Ramsey, linear", 2.0);
    let mut exact = Worst::new("Ramsey, exact", 2.0);
    for (preference, hazard, elasticity) in
        [(0.005, 0.01, 1.0), (0.001, 0.0, 1.45), (0.03, 0.013, 2.7), (0.0, 0.0, 0.0)]
    {
        let rho = big(preference) + big(hazard);
        let eta = big(elasticity);
        for growth in [
            vec![after(0.02)],
            vec![after(-0.07)],
            vec![band(0.02, 50.0), after(0.01)],
            vec![band(0.031, 3.0), band(-0.05, 5.0), band(0.0, 80.0), after(0.013)],
        ] {
            for compounding in [Compounding::Yearly, Compounding::Continuous] {
                let growth = growth.clone();
                let spec = Spec::Ramsey {
                    preference,
                    hazard,
                    elasticity,
                    growth: growth.clone(),
                    exact: false,
                    compounding,
                };
                factors(&mut linear, &spec, &both_ways(), |t| {
                    product(&growth, t, |g, years| {
                        let rate = rho.clone() + eta.clone() * big(g);
                        match compounding {
                            Compounding::Yearly => yearly(&rate, years),
                            Compounding::Continuous => continuous(&rate, years),
                        }
                    })
                });
            }
            let compounding = Compounding::Yearly;
            let spec = Spec::Ramsey {
                preference,
                hazard,
                elasticity,
                growth: growth.clone(),
                exact: true,
                compounding,
            };
            factors(&mut exact, &spec, &offsets(), |t| {
                product(&growth, t, |g, years| yearly(&rho, years) * yearly(&big(g), &(eta.clone() * years)))
            });
        }
    }
    linear.report(3000);
    exact.report(1500);
}

#[test]
fn uncertain_growth_factors() {
    let mut worst = Worst::new("uncertain growth", 2.0);
    for (preference, elasticity, mean, sd) in
        [(0.0, 2.0, 0.02, 0.036), (0.015, 1.0, 0.02, 0.02), (0.01, 3.3, 0.017, 0.05)]
    {
        for (log, compounding) in
            [(false, Compounding::Yearly), (false, Compounding::Continuous), (true, Compounding::Continuous)]
        {
            let spec = Spec::UncertainGrowth {
                preference,
                hazard: 0.001,
                elasticity,
                mean,
                sd,
                log,
                persistence: None,
                compounding,
            };
            let eta = big(elasticity);
            let other = if log { eta.clone() } else { eta.clone() + big(1.0) };
            let rate = big(preference) + big(0.001) + eta.clone() * big(mean)
                - eta * other * big(sd) * big(sd) / big(2.0);
            factors(&mut worst, &spec, &both_ways(), |t| match compounding {
                Compounding::Yearly => yearly(&rate, &big(t)),
                Compounding::Continuous => continuous(&rate, &big(t)),
            });
        }
    }
    worst.report(1500);
}

/// Log-linear between the whole years n of `log_factor`, which holds ln D(n).
fn between_years(log_factor: &[Big], t: f64) -> Big {
    let n = t.floor() as usize;
    let (before, after) = (log_factor[n].clone(), &log_factor[n + 1]);
    let step = after - &before;
    (before + step * (big(t) - big(t.floor()))).exp()
}

/// ln D(n) by the closed form of the design, n from 0 to 1001.
fn persistent(rho: &Big, eta: f64, mean: f64, sd: f64, persistence: Persistence) -> Vec<Big> {
    let (one, two) = (big(1.0), big(2.0));
    let (eta, phi) = (big(eta), big(persistence.phi));
    let rest = one.clone() - &phi;
    let mut power = one.clone(); // phi^n
    let log_factor = (0..=1001).map(|n| {
        let n = big(f64::from(n));
        let gone = one.clone() - &power;
        let mean = n.clone() * big(mean) + big(persistence.start) * &phi * &gone / &rest;
        let sum = n.clone() - two.clone() * &phi * &gone / &rest
            + phi.clone() * &phi * (one.clone() - power.clone() * &power)
                / (one.clone() - phi.clone() * &phi);
        let variance = big(sd) * big(sd) / (rest.clone() * &rest) * sum;
        power *= &phi;
        eta.clone() * &eta * variance / &two - eta.clone() * mean - rho.clone() * n
    });
    log_factor.collect()
}

#[test]
fn persistent_growth_factors() {
    let mut worst = Worst::new("persistent growth", 2.0);
    let mut rates = Worst::new("rates under persistent growth", 2.0);
    let phis = [-0.999_999, -0.6, -1e-9, 0.0, 1e-5, 0.3, 0.7, 0.95, 0.999, 0.999_999, 1.0 - 1e-12];
    for (k, phi) in phis.into_iter().enumerate() {
        for (preference, elasticity, mean, sd, start) in
            [(0.01, 2.0, 0.02, 0.036, 0.0), (0.0, 1.3, 0.017, 0.001, -0.05), (0.03, 0.5, -0.004, 1e-4, 0.3)]
        {
            let persistence = Persistence { phi, start };
            let spec = Spec::UncertainGrowth {
                preference,
                hazard: 0.001,
                elasticity,
                mean,
                sd,
                log: true,
                persistence: Some(persistence),
                compounding: Compounding::Continuous,
            };
            let rho = big(preference) + big(0.001);
            let log_factor = persistent(&rho, elasticity, mean, sd, persistence);
            factors(&mut worst, &spec, &offsets(), |t| between_years(&log_factor, t));
            let curve = made(&spec);
            for n in [1, 2, 30 + k, 1000] {
                let t = n as f64;
                let step = log_factor[n - 1].clone() - &log_factor[n];
                if let Ok(forward) = curve.forward_rate(t) {
                    rates.compare(forward, &step.clone().exp_m1(), || format!("{spec:?} at {n}"));
                }
                let found = curve.instantaneous_rate(t).unwrap();
                rates.compare(found, &step, || format!("instantaneous, {spec:?} at {n}"));
                let mean = -(log_factor[n].clone() / big(t));
                let found = curve.mean_rate_continuous(t).unwrap();
                rates.compare(found, &mean, || format!("mean, {spec:?} at {n}"));
            }
        }
    }
    worst.report(2500);
    rates.report(350);
}

#[test]
fn growth_regime_factors() {
    let mut worst = Worst::new("growth regimes", 2.0);
    let state = |mean, sd| GrowthState { mean, sd };
    let third = 1.0 / 3.0;
    let sets = [
        (
            vec![state(0.025, 0.02), state(-0.01, 0.04)],
            vec![vec![0.95, 0.05], vec![0.3, 0.7]],
            vec![1.0, 0.0],
        ),
        // Growth that stays what it is for ever, and a state that is left for good.
        (vec![state(0.01, 0.0), state(0.03, 0.0)], vec![vec![1.0, 0.0], vec![0.0, 1.0]], vec![0.5, 0.5]),
        (vec![state(-0.4, 0.3), state(0.02, 0.01)], vec![vec![0.0, 1.0], vec![0.0, 1.0]], vec![0.9, 0.1]),
        (
            vec![state(0.02, 0.01), state(0.1, 0.2), state(-0.05, 0.1)],
            vec![vec![third, third, third], vec![0.1, 0.2, 0.7], vec![0.25, 0.5, 0.25]],
            vec![0.2, 0.3, 0.5],
        ),
    ];
    for (states, transition, start) in sets {
        for (preference, elasticity) in [(0.01, 2.0), (0.0, 0.7), (0.05, 20.0)] {
            let spec = Spec::GrowthRegimes {
                preference,
                hazard: 0.002,
                elasticity,
                states: states.clone(),
                transition: transition.clone(),
                start: start.clone(),
            };
            // The row of chances year by year, each divided by its own sum as stored.
            let of_one = |row: &[f64]| {
                let sum = row.iter().fold(big(0.0), |sum, &chance| sum + big(chance));
                row.iter().map(|&chance| big(chance) / &sum).collect::<Vec<Big>>()
            };
            let eta = big(elasticity);
            let rho = big(preference) + big(0.002);
            let factor = |state: &GrowthState| {
                let spread = eta.clone() * big(state.sd);
                continuous(&(eta.clone() * big(state.mean) - spread.clone() * spread / big(2.0)), &big(1.0))
            };
            let weight: Vec<Big> = states.iter().map(factor).collect();
            let rows: Vec<Vec<Big>> = transition.iter().map(|row| of_one(row)).collect();
            let mut row = of_one(&start);
            let mut log_factor = vec![big(0.0)];
            for n in 1..=1001 {
                let passed = |to: usize| {
                    let into = row.iter().zip(&rows).map(|(chance, row)| chance.clone() * &row[to]);
                    into.fold(big(0.0), |sum, chance| sum + chance) * &weight[to]
                };
                row = (0..row.len()).map(passed).collect();
                let sum = row.iter().fold(big(0.0), |sum, x| sum + x);
                log_factor.push(sum.ln() - rho.clone() * big(f64::from(n)));
            }
            factors(&mut worst, &spec, &offsets(), |t| between_years(&log_factor, t));
        }
    }
    worst.report(800);
}

fn gamma(mean: f64, sd: f64, t: f64) -> Big {
    let (mean, variance) = (big(mean), big(sd) * big(sd));
    let shape = mean.clone() * &mean / &variance;
    let base = big(1.0) + big(t) * variance / mean;
    if base == big(1.0) { base } else { (-(base.ln() * shape)).exp() }
}

#[test]
fn gamma_factors() {
    let mut worst = Worst::new("gamma", 2.0);
    for mean in [1e-3, 0.0396, 0.04, 0.1, 1.0] {
        for sd in [1e-12, 1e-6, 0.003, 0.0294, 0.03, 0.2, 1.0] {
            let lower = -mean / (sd * sd);
            let mut at = offsets();
            at.extend(offsets().into_iter().map(|t| -t).filter(|&t| t > lower * 0.999));
            at.push((lower * 0.99).max(-1000.0));
            factors(&mut worst, &Spec::Gamma { mean, sd }, &at, |t| gamma(mean, sd, t));
        }
    }
    worst.report(4000);
}

#[test]
fn mixture_factors() {
    let mut worst = Worst::new("mixture", 2.0);
    let flat = |rate, compounding| Spec::Flat { rate, compounding };
    let third = 1.0 / 3.0;
    let spec = Spec::Mixture(vec![
        (third, flat(0.01, Compounding::Yearly)),
        (third, flat(0.07, Compounding::Continuous)),
        (third, Spec::Gamma { mean: 0.04, sd: 0.03 }),
    ]);
    factors(&mut worst, &spec, &offsets(), |t| {
        // The three stored weights are equal, and divided by their sum.
        (yearly(&big(0.01), &big(t)) + continuous(&big(0.07), &big(t)) + gamma(0.04, 0.03, t)) / big(3.0)
    });
    let spec = Spec::Mixture(vec![
        (0.1, flat(0.0, Compounding::Yearly)),
        (0.2, flat(0.5, Compounding::Yearly)),
        (0.7, flat(-0.01, Compounding::Yearly)),
    ]);
    factors(&mut worst, &spec, &both_ways(), |t| {
        let sum = big(0.1) + big(0.2) * yearly(&big(0.5), &big(t)) + big(0.7) * yearly(&big(-0.01), &big(t));
        sum / (big(0.1) + big(0.2) + big(0.7))
    });
    worst.report(300);
}

#[test]
fn table_factors() {
    let mut worst = Worst::new("table", 2.0);
    let points = vec![(-5.0, 1.3), (0.0, 1.0), (1.0, 0.97), (30.5, 0.4), (100.0, 0.05), (1000.0, 1e-9)];
    let at: Vec<f64> = offsets().into_iter().chain([-5.0, -4.9, -0.1]).collect();
    factors(&mut worst, &Spec::Table(points.clone()), &at, |t| {
        let pair = points.windows(2).find(|pair| t <= pair[1].0).unwrap();
        let ((from, start), (to, end)) = (pair[0], pair[1]);
        let ln = |v: f64| if v == 1.0 { big(0.0) } else { big(v).ln() };
        (ln(start) + (ln(end) - ln(start)) * (big(t) - big(from)) / (big(to) - big(from))).exp()
    });
    worst.report(100);
    let curve = made(&Spec::Table(points.clone()));
    for (t, factor) in points {
        assert_eq!(curve.factor(t).unwrap(), factor, "a given factor comes back as given");
    }
}

#[test]
fn rates_of_flat_curves_are_the_rate() {
    for rate in RATES {
        let curve = made(&Spec::Flat { rate, compounding: Compounding::Yearly });
        for n in [1.0, 2.0, 30.0, 125.0, 999.0] {
            assert_eq!(curve.forward_rate(n).unwrap(), rate, "forward, {n}");
            assert_eq!(curve.mean_rate(n).unwrap(), rate, "mean, {n}");
        }
        assert_eq!(curve.mean_rate(0.0).unwrap(), rate);
        let curve = made(&Spec::Flat { rate, compounding: Compounding::Continuous });
        assert_eq!(curve.instantaneous_rate(17.3).unwrap(), rate);
        assert_eq!(curve.mean_rate_continuous(17.3).unwrap(), rate);
        assert_eq!(curve.mean_rate_continuous(0.0).unwrap(), rate);
    }
}

#[test]
fn rates_of_other_curves() {
    let mut worst = Worst::new("forward, mean and instantaneous rates", 2.0);
    let uk = band_sets().remove(0);
    let low = Spec::Flat { rate: 0.01, compounding: Compounding::Yearly };
    let high = Spec::Flat { rate: 0.07, compounding: Compounding::Yearly };
    let mixed = |t: f64| (yearly(&big(0.01), &big(t)) + yearly(&big(0.07), &big(t))) / big(2.0);
    type Exact<'a> = Box<dyn Fn(f64) -> Big + 'a>;
    let curves: Vec<(Spec, Exact)> = vec![
        (Spec::Gamma { mean: 0.04, sd: 0.03 }, Box::new(|t| gamma(0.04, 0.03, t))),
        (Spec::Mixture(vec![(0.5, low), (0.5, high)]), Box::new(mixed)),
        (
            Spec::Bands { bands: uk.clone(), edges_from: None },
            Box::new(|t| product(&uk, t, |rate, years| yearly(&big(rate), years))),
        ),
    ];
    for (spec, exact) in &curves {
        let curve = made(spec);
        for t in [1e-6, 0.01, 0.5, 1.0, 2.0, 30.0, 30.5, 31.0, 75.0, 100.0, 200.0, 500.0, 1000.0] {
            let mean = (-(exact(t).ln() / big(t))).exp_m1();
            worst.compare(curve.mean_rate(t).unwrap(), &mean, || format!("mean rate of {spec:?} at {t}"));
            let mean = -(exact(t).ln() / big(t));
            worst.compare(curve.mean_rate_continuous(t).unwrap(), &mean, || {
                format!("ln mean of {spec:?} at {t}")
            });
            if t >= 1.0 {
                let forward = exact(t - 1.0) / exact(t) - big(1.0);
                worst.compare(curve.forward_rate(t).unwrap(), &forward, || {
                    format!("forward of {spec:?} at {t}")
                });
            }
        }
    }
    let curve = made(&curves[1].0);
    for t in [0.0, 0.01, 1.0, 100.0, 1000.0] {
        // -D'/D, each component's rate weighted by its factor.
        let (a, b) = (yearly(&big(0.01), &big(t)), yearly(&big(0.07), &big(t)));
        let ln = |rate: f64| (big(1.0) + big(rate)).ln();
        let rate = (ln(0.01) * &a + ln(0.07) * &b) / (a + b);
        worst.compare(curve.instantaneous_rate(t).unwrap(), &rate, || format!("instantaneous at {t}"));
    }
    worst.report(100);
}
