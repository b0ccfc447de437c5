//! Certainty equivalents: gamma-distributed rates, two rates at even odds, uncertain growth.

use crate::tables::{Row, Table, continuous, flat, made};
use hence_core::{Compounding, Curve, GrowthState, Persistence, Spec};

fn even(low: Spec, high: Spec) -> Curve {
    made(&Spec::Mixture(vec![(0.5, low), (0.5, high)]))
}

/// A named number among the parameters, written name=number.
fn parameter(row: &Row, name: &str) -> f64 {
    let text = row.text("parameters");
    let parts = text.split([';', ',', ' ']).filter_map(|part| part.split_once('='));
    let found = parts.filter(|(key, _)| *key == name).map(|(_, value)| value.parse().unwrap()).next();
    found.unwrap_or_else(|| panic!("no {name} in {text}"))
}

fn gamma(row: &Row) -> f64 {
    let curve = made(&Spec::Gamma { mean: parameter(row, "mean"), sd: parameter(row, "sd") });
    match row.text("quantity") {
        "instantaneous_rate" => curve.instantaneous_rate(row.number("t")).unwrap(),
        "factor" => curve.factor(row.number("t")).unwrap(),
        other => panic!("{other} is not known"),
    }
}

fn two_rates(row: &Row) -> f64 {
    let t = row.number("t");
    let curve = match row.text("parameters") {
        "1 or 7 percent, even odds, continuous" => even(continuous(0.01), continuous(0.07)),
        "1 or 7 percent, even odds, annual compounding" => even(flat(0.01), flat(0.07)),
        "1 or 5 percent, even odds, annual compounding" => even(flat(0.01), flat(0.05)),
        other => panic!("{other} is not known"),
    };
    let yearly = row.text("parameters").ends_with("annual compounding");
    match row.text("quantity") {
        "expected_factor" => curve.factor(t).unwrap(),
        "instantaneous_certainty_equivalent_rate" => curve.instantaneous_rate(t).unwrap(),
        "average_certainty_equivalent_rate" if yearly => curve.mean_rate(t).unwrap(),
        "average_certainty_equivalent_rate" => curve.mean_rate_continuous(t).unwrap(),
        // The continuous form of the forward rate, ln(D(t)/D(t+1)).
        "forward_rate_t_to_t_plus_1" => curve.forward_rate(t + 1.0).unwrap().ln_1p(),
        "forward_rate_t_minus_1_to_t" => curve.forward_rate(t).unwrap(),
        "factor_at_0.01" => made(&flat(0.01)).factor(t).unwrap(),
        "factor_at_0.05" => made(&flat(0.05)).factor(t).unwrap(),
        other => panic!("{other} is not known"),
    }
}

fn precautionary(row: &Row, log: bool) -> f64 {
    let none = Persistence { phi: 0.0, start: 0.0 };
    if log {
        row.agrees(precautionary_rate(row, true, Some(none)), "recomputed", 1e-12);
    }
    precautionary_rate(row, log, None)
}

fn precautionary_rate(row: &Row, log: bool, persistence: Option<Persistence>) -> f64 {
    let curve = made(&Spec::UncertainGrowth {
        preference: parameter(row, "delta"),
        hazard: 0.0,
        elasticity: parameter(row, "eta"),
        mean: parameter(row, if log { "mu" } else { "g" }),
        sd: parameter(row, "sigma"),
        log,
        persistence,
        compounding: Compounding::Continuous,
    });
    curve.mean_rate_continuous(50.0).unwrap()
}

/// Growth of 1% or 3% for ever, elasticity 2: rates of 2% or 6%, or two states that are never left.
fn persistent_growth(row: &Row) -> f64 {
    assert_eq!(parameter(row, "eta"), 2.0);
    assert!(row.text("parameters").contains("growth 1 or 3 percent, even odds"));
    let states = made(&Spec::GrowthRegimes {
        preference: 0.0,
        hazard: 0.0,
        elasticity: 2.0,
        states: vec![GrowthState { mean: 0.01, sd: 0.0 }, GrowthState { mean: 0.03, sd: 0.0 }],
        transition: vec![vec![1.0, 0.0], vec![0.0, 1.0]],
        start: vec![0.5, 0.5],
    });
    let t = row.number("t");
    row.agrees(states.mean_rate_continuous(t).unwrap(), "recomputed", 1e-12);
    even(continuous(0.02), continuous(0.06)).mean_rate_continuous(t).unwrap()
}

#[test]
fn certainty_equivalents() {
    let table = Table::new("certainty_equivalents.csv", include_str!("certainty_equivalents.csv"));
    let (mut checked, mut published) = (0, 0);
    for row in table.rows() {
        let found = match row.text("model") {
            "gamma" => gamma(&row),
            "gamma_bands" => {
                made(&Spec::Gamma { mean: 0.04, sd: 0.03 }).instantaneous_rate(row.number("t")).unwrap()
            }
            "two_rate" => two_rates(&row),
            "precautionary_arith_mean" => precautionary(&row, false),
            "precautionary_log_mean" => precautionary(&row, true),
            "uncertain_growth" => persistent_growth(&row),
            other => panic!("{other} is not known"),
        };
        row.agrees(found, "recomputed", 1e-12);
        checked += 1;
        if row.optional("published").is_some() {
            row.agrees(found, "published", row.number("tolerance"));
            published += 1;
        }
    }
    // Published are the five bands of the step schedule and three figures of Posner's.
    table.checked(checked + published, 109 + 8);
}
