//! Growth, welfare, switching values and draws through C and through Rust: equal to the last bit on the parts of published
//! rates, published tax rates and incomes, and the flows of published worked examples.

use std::num::NonZeroUsize;

use hence::{HENCE_COMPOUNDING_CONTINUOUS, HENCE_COMPOUNDING_YEARLY};
use hence_core::{
    Compounding, Distribution, Draws, Estimate, OptionFlows, Parameter, Quantity, RateDistribution, RateLine,
    TaxBracket, Where, draw_values, percent,
};

use crate::loaded;
use crate::reference::{equal, table};

const COMPOUNDINGS: [(Compounding, i32); 2] = [
    (Compounding::Yearly, HENCE_COMPOUNDING_YEARLY),
    (Compounding::Continuous, HENCE_COMPOUNDING_CONTINUOUS),
];

/// Time preference and hazard together, elasticity and growth of each published rate.
fn rates() -> Vec<[f64; 3]> {
    let table = table!("ramsey_components.csv");
    let rows = table
        .rows()
        .map(|row| [row.number("delta") + row.number("L_catastrophe"), row.number("eta"), row.number("g")]);
    let rows: Vec<[f64; 3]> = rows.collect();
    assert_eq!(rows.len(), 7);
    rows
}

/// Consumption that grows at g from 26,000 on, a little more in every third year.
fn path(g: f64) -> (Vec<f64>, Vec<f64>) {
    let offsets: Vec<f64> = (0..60).map(f64::from).collect();
    let growing = |t: &f64| 26_000.0 * (1.0 + g).powf(*t) * if t % 3.0 == 0.0 { 1.01 } else { 1.0 };
    (offsets.iter().map(growing).collect(), offsets)
}

#[test]
fn hazards_and_brackets() {
    for (compounding, code) in COMPOUNDINGS {
        for [rho, ..] in rates() {
            equal(
                &[hence_core::hazard_from_probability(rho, compounding).unwrap()],
                &[loaded::hazard_from_probability(rho, code)],
            );
            equal(
                &[hence_core::hazard_from_waiting_time(100.0 + 1000.0 * rho, compounding).unwrap()],
                &[loaded::hazard_from_waiting_time(100.0 + 1000.0 * rho, code)],
            );
        }
    }
    let table = table!("equal_sacrifice.csv");
    let brackets: Vec<TaxBracket> = (table.rows().enumerate())
        .map(|(i, row)| TaxBracket {
            marginal: row.number("marginal_tax_rate"),
            average: row.number("average_tax_rate"),
            weight: i as f64 + 0.5,
        })
        .collect();
    table.checked(brackets.len(), 5);
    let column = |f: fn(&TaxBracket) -> f64| brackets.iter().map(f).collect::<Vec<f64>>();
    let c = loaded::elasticity_from_brackets(
        &column(|b| b.marginal),
        &column(|b| b.average),
        &column(|b| b.weight),
    );
    equal(&[hence_core::elasticity_from_tax_brackets(&brackets).unwrap()], &[c]);
}

#[test]
fn growth_of_a_series() {
    for [_, _, g] in rates() {
        let (series, _) = path(g);
        let years: Vec<i32> = (1960..).take(series.len()).collect();
        let rust = hence_core::growth_from_consumption(&series, Some(&years)).unwrap();
        for years in [None, Some(years.as_slice())] {
            let c = loaded::growth_estimate(&series, years);
            let estimate = |found: Estimate| [found.value, found.error];
            equal(&estimate(rust.trend), &[c.trend, c.trend_error]);
            equal(&estimate(rust.mean), &[c.mean, c.mean_error]);
            equal(&[rust.trend_growth(), rust.geometric_mean], &[c.trend_growth, c.mean_growth]);
            equal(&estimate(rust.sd), &[c.sd, c.sd_error]);
            equal(&estimate(rust.persistence.unwrap()), &[c.persistence, c.persistence_error]);
            assert_eq!(c.has_persistence, 1);
        }
    }
}

#[test]
fn utility_and_equivalents_of_groups() {
    let table = table!("equity_weights.csv");
    let mut rows = 0;
    for row in table.rows() {
        let (income, reference) = (row.number("group_income"), row.number("reference_income"));
        let eta = row.number("elasticity");
        equal(&[hence_core::utility(income, eta).unwrap()], &[loaded::utility(income, eta)]);
        equal(
            &[hence_core::marginal_utility(income, eta).unwrap()],
            &[loaded::marginal_utility(income, eta)],
        );
        let (groups, shares) = ([income, reference], [0.3, 0.7]);
        equal(
            &[hence_core::equally_distributed_equivalent(&groups, &shares, eta).unwrap()],
            &[loaded::equally_distributed_equivalent(&groups, &shares, eta)],
        );
        rows += 1;
    }
    table.checked(rows, 6);
}

#[test]
fn welfare_of_paths() {
    for [rho, eta, g] in rates() {
        let (consumption, offsets) = path(g);
        let flows: Vec<f64> = consumption.iter().zip(&offsets).map(|(c, t)| c * (t / 600.0 - 0.03)).collect();
        for (compounding, code) in COMPOUNDINGS {
            equal(
                &[hence_core::welfare(&consumption, &offsets, rho, eta, compounding).unwrap()],
                &[loaded::welfare(&consumption, &offsets, rho, eta, code)],
            );
            let base = consumption[0];
            let factors =
                hence_core::welfare_factors(&consumption, &offsets, base, rho, eta, compounding).unwrap();
            equal(&factors, &loaded::welfare_factors(&consumption, &offsets, base, rho, eta, code));
            let of = [flows.as_slice(), &consumption, &factors];
            equal(
                &[hence_core::equivalent_variation(of[0], of[1], of[2], base, eta).unwrap()],
                &[loaded::equivalent_variation(of, base, eta)],
            );
            equal(
                &[hence_core::compensating_variation(of[0], of[1], of[2], base, flows[0], eta).unwrap()],
                &[loaded::compensating_variation(of, base, flows[0], eta)],
            );
            for amount in [1e-6, 500.0, -2000.0] {
                let (now, later) = (consumption[0], consumption[20]);
                equal(
                    &[hence_core::compensation(amount, now, later, 20.0, rho, eta, compounding).unwrap()],
                    &[loaded::compensation([amount, now, later, 20.0], rho, eta, code)],
                );
            }
        }
    }
}

/// The published flows by their example.
fn examples() -> Vec<(Vec<f64>, Vec<f64>)> {
    let table = table!("npv_cash_flows.csv");
    let mut all: Vec<(&str, Vec<f64>, Vec<f64>)> = Vec::new();
    for row in table.rows() {
        let name = row.text("example");
        if all.last().is_none_or(|(last, ..)| *last != name) {
            all.push((name, Vec::new(), Vec::new()));
        }
        let (_, offsets, flows) = all.last_mut().expect("an example");
        offsets.push(row.number("year"));
        flows.push(row.number("flow"));
    }
    assert!(all.len() > 5, "{} examples", all.len());
    all.into_iter().map(|(_, offsets, flows)| (offsets, flows)).collect()
}

#[test]
fn switching_values_of_published_flows() {
    let line = "preference 1.5%, elasticity 1.2, growth 2%; exact";
    let (spec, basis) = (RateLine::parse(line).unwrap().spec().clone(), loaded::Basis::parse(line));
    let mut found = 0;
    for (offsets, flows) in examples() {
        for (parameter, code) in Parameter::ALL.into_iter().zip(0..) {
            let net = OptionFlows { offsets: &offsets, flows: &flows, perpetual: &[] };
            let interval = parameter.interval();
            let rust =
                hence_core::switching_values(&net, &spec, &Where::default(), parameter, interval).unwrap();
            assert!(rust.unresolved.is_empty(), "{flows:?}");
            equal(&rust.values, &basis.switching_values(code, &offsets, &flows, interval));
            found += rust.values.len();
        }
        let (costs, benefits) = flows.iter().partition::<Vec<f64>, _>(|flow| **flow < 0.0);
        let (net, cost) = (costs.iter().chain(&benefits).sum::<f64>(), costs.iter().sum::<f64>());
        if let Some(rust) = hence_core::switching_multiplier(net, cost).unwrap() {
            equal(&[rust], &[loaded::switching_multiplier(net, cost)]);
        }
    }
    assert!(found > 10, "{found} values");
}

/// For any number of threads.
#[test]
fn draws_over_published_flows() {
    const PERCENTILES: [f64; 4] = [0.0, 5.0, 62.5, 100.0];
    let texts =
        ["normal mean 1% sd 0.3%", "0.3 at 0%, 0.7 at 1%", "triangular 1, 1.2, 2", "uniform 1% to 3%"];
    let distributions: Vec<Distribution> = (Quantity::ALL.into_iter().zip(texts))
        .map(|(quantity, text)| Distribution::parse(quantity, text).unwrap())
        .collect();
    let rate = RateDistribution::new(distributions.try_into().unwrap()).unwrap();
    for (offsets, flows) in examples() {
        let doubled: Vec<f64> = flows.iter().map(|flow| 2.0 * flow).collect();
        let rows = [&flows, &doubled].map(|flows| OptionFlows { offsets: &offsets, flows, perpetual: &[] });
        let draws = Draws { count: 1000, seed: 2026, threads: NonZeroUsize::MIN };
        let drawn = draw_values(&rate, &rows, &draws).unwrap();
        let summary = drawn.summary(&PERCENTILES, NonZeroUsize::MIN).unwrap();
        let both = [flows, doubled].concat();
        for threads in [1, 3] {
            let (rates, values) = loaded::draws_value(texts, &offsets, &both, (1000, 2026, threads));
            equal(&drawn.rates.iter().map(|drawn| drawn.rate).collect::<Vec<_>>(), &rates);
            equal(&drawn.values.concat(), &values);
            for (values, rust) in values.chunks(1000).zip(&summary.values) {
                let (percentiles, c) = loaded::draws_spread(values, &PERCENTILES);
                equal(&rust.percentiles, &percentiles);
                equal(&[rust.mean, rust.mean_error, rust.sd], &[c.mean, c.mean_error, c.sd]);
                equal(&[rust.lowest, rust.highest], &[c.lowest, c.highest]);
                equal(&[rust.positive.share, rust.positive.error], &[c.positive, c.positive_error]);
            }
            let (alone, tied) = loaded::draws_rank(&values, 2);
            equal(&summary.first.iter().map(|first| first.alone.share).collect::<Vec<_>>(), &alone);
            equal(&summary.first.iter().map(|first| first.shared.share).collect::<Vec<_>>(), &tied);
        }
    }
}

/// The rates published for these parts are what a flat rate has to be where the parts make it so.
#[test]
fn the_switching_elasticity_of_a_published_rate_is_its_own() {
    for [rho, eta, g] in rates() {
        // Worth as much at the base as later at the linear rate of these parts.
        let line = format!("preference {}, elasticity 3, growth {}", percent(rho), percent(g));
        let flows = [-1.0, 1.0 + rho + eta * g];
        let values = loaded::Basis::parse(&line).switching_values(2, &[0.0, 1.0], &flows, (0.0, 20.0));
        // Without growth the elasticity moves nothing.
        let due: &[f64] = if g == 0.0 { &[] } else { &[eta] };
        assert_eq!(values.len(), due.len(), "{line}: {values:?}");
        assert!(values.iter().zip(due).all(|(x, due)| (x - due).abs() < 1e-12), "{line}: {values:?}");
    }
}
