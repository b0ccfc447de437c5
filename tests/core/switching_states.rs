//! Switching values and endless flows under growth that persists or switches between states: values found are put back
//! through the curve itself, and endless flows are summed one by one. All parameters are made up.

use hence_core::{
    Curve, ErrorKind, GrowthState, OptionFlows, Parameter, Perpetual, RateLine, Spec, Switching, Tail, Where,
    dot, sum, switching_values,
};
use proptest::prelude::*;

use Parameter::{Elasticity, Growth, Preference};

const NO_BASE: Where = Where { base_year: None, length: None };

fn two_states(first: (f64, f64), second: (f64, f64), stay: (f64, f64)) -> Spec {
    let state = |(mean, sd)| GrowthState { mean, sd };
    Spec::GrowthRegimes {
        preference: 0.01,
        hazard: 0.0,
        elasticity: 2.0,
        states: vec![state(first), state(second)],
        transition: vec![vec![stay.0, 1.0 - stay.0], vec![1.0 - stay.1, stay.1]],
        start: vec![1.0, 0.0],
    }
}

fn boom_and_bust() -> Spec {
    two_states((0.03, 0.02), (-0.01, 0.04), (0.9, 0.7))
}

fn line(text: &str) -> Spec {
    RateLine::parse(text).unwrap().spec().clone()
}

fn search(spec: &Spec, parameter: Parameter, offsets: &[f64], flows: &[f64]) -> Switching {
    let net = OptionFlows { offsets, flows, perpetual: &[] };
    switching_values(&net, spec, &NO_BASE, parameter, parameter.interval()).unwrap()
}

fn curve(spec: &Spec, parameter: Parameter, value: f64) -> Curve {
    parameter.at(spec, value).unwrap().curve(&NO_BASE).unwrap()
}

/// Net and gross present value.
fn worth(curve: &Curve, offsets: &[f64], flows: &[f64]) -> (f64, f64) {
    let mut factors = vec![0.0; offsets.len()];
    curve.factors(offsets, &mut factors).unwrap();
    let sizes: Vec<f64> = flows.iter().map(|flow| flow.abs()).collect();
    (dot(&factors, flows), dot(&factors, &sizes))
}

#[test]
fn equal_states_are_independent_years() {
    let equal = two_states((0.02, 0.03), (0.02, 0.03), (0.9, 0.7));
    let independent = line("preference 1%, elasticity 2, log growth 2% sd 3%");
    let offsets = [0.0, 10.0, 40.5];
    let flows = [-100.0, 90.0, 60.0];
    for parameter in [Preference, Elasticity, Growth] {
        let [states, years] = [&equal, &independent].map(|spec| search(spec, parameter, &offsets, &flows));
        assert!(!years.values.is_empty() && states.values.len() == years.values.len(), "{states:?}");
        for (a, b) in states.values.iter().zip(&years.values) {
            assert!((a - b).abs() < 1e-11, "{parameter}: {a} and {b}");
        }
    }
}

#[test]
fn growth_in_states_moves_every_state() {
    // All means d higher make every factor exp(-eta d n) times as large.
    let offsets = [0.0, 8.0];
    let boom = boom_and_bust();
    let factor = boom.curve(&NO_BASE).unwrap().factor(8.0).unwrap();
    let flows = [-factor * (-2.0f64 * 0.013 * 8.0).exp(), 1.0];
    let found = search(&boom, Growth, &offsets, &flows);
    assert!(found.values.len() == 1 && (found.values[0] - 0.043).abs() < 1e-12, "{found:?}");
}

#[test]
fn close_elasticities_are_told_apart() {
    // Three flows, made such that the value is zero at elasticities 1.5 and 1.5 + apart.
    for (offsets, apart) in [
        ([0.0, 25.0, 60.0], 0.1),
        ([0.0, 25.0, 60.0], 1e-3),
        ([0.0, 25.5, 60.25], 0.1),
        ([0.0, 24.5, 60.5], 1e-3),
    ] {
        let boom = boom_and_bust();
        let factors = |value: f64| {
            let curve = curve(&boom, Elasticity, value);
            [curve.factor(offsets[1]).unwrap(), curve.factor(offsets[2]).unwrap()]
        };
        let ([a, b], [c, d]) = (factors(1.5), factors(1.5 + apart));
        let determinant = a * d - b * c;
        let flows = [1.0, (b - d) / determinant, (c - a) / determinant];
        let found = search(&boom, Elasticity, &offsets, &flows);
        let near: Vec<f64> = found.values.iter().copied().filter(|x| (x - 1.5).abs() < 2.0 * apart).collect();
        assert!(near.len() == 2 && found.unresolved.is_empty(), "{apart}: {found:?}");
        assert!((near[0] - 1.5).abs() < 0.05 * apart, "{apart}: {found:?}");
        assert!((near[1] - 1.5 - apart).abs() < 0.05 * apart, "{apart}: {found:?}");
    }
}

#[test]
fn an_elasticity_that_moves_nothing_says_so() {
    let still = two_states((0.0, 0.0), (0.0, 0.0), (0.5, 0.5));
    let found = search(&still, Elasticity, &[0.0, 1.0], &[-1.0, 1.01]);
    assert_eq!((found.values.len(), found.moves), (0, false));
}

/// Offsets, and flows of either sign.
fn dated() -> impl Strategy<Value = Vec<(f64, f64)>> {
    prop::collection::vec((0..200u32, -10i32..=10), 2..20).prop_map(|list| {
        list.into_iter().map(|(quarters, flow)| (f64::from(quarters) / 4.0, f64::from(flow))).collect()
    })
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 48, ..super::repeatable() })]

    /// Elasticities put back give zero, and no change of sign on a grid is without a value.
    #[test]
    fn elasticities_put_back_give_zero_and_none_is_missed(
        dated in dated(),
        numbers in (-20..50i32, 0..60i32, -30..40i32, 0..60i32, 1..10i32, 1..10i32),
    ) {
        let (m, s, n, t, stay, back) = numbers;
        let [m, s, n, t] = [m, s, n, t].map(|tenths| f64::from(tenths) / 1000.0);
        let spec = two_states((m, s), (n, t), (f64::from(stay) / 10.0, f64::from(back) / 10.0));
        let (offsets, flows): (Vec<f64>, Vec<f64>) = dated.into_iter().unzip();
        prop_assume!(flows.iter().any(|flow| *flow != 0.0));
        let found = search(&spec, Elasticity, &offsets, &flows);
        for &value in &found.values {
            let (net, gross) = worth(&curve(&spec, Elasticity, value), &offsets, &flows);
            prop_assert!(net.abs() <= 1e-9 * gross, "{value}: {net} of {gross}");
        }
        let narrow = |open: &(f64, f64)| open.1 - open.0 < 1e-6;
        prop_assert!(found.unresolved.iter().all(narrow), "{found:?}");
        let grid: Vec<f64> = (0..=40).map(|k| f64::from(k) / 2.0).collect();
        for pair in grid.windows(2) {
            let [a, b] = [pair[0], pair[1]].map(|x| worth(&curve(&spec, Elasticity, x), &offsets, &flows));
            let certain = |(net, gross): (f64, f64)| net.abs() > 1e-12 * gross;
            if certain(a) && certain(b) && (a.0 > 0.0) != (b.0 > 0.0) {
                let open = found.unresolved.iter().any(|(a, b)| *b >= pair[0] && *a <= pair[1]);
                let held = found.values.iter().any(|x| *x >= pair[0] && *x <= pair[1]);
                prop_assert!(open || held, "{pair:?}: {found:?}");
            }
        }
    }
}

/// Flow by flow, until what is left cannot matter.
fn one_by_one(tail: &Tail, curve: &Curve, last: f64) -> f64 {
    let every = f64::from(tail.every);
    let one = |k: u32| {
        let years = f64::from(k) * every;
        curve.factor(last + years).unwrap() * (years * tail.growth.ln_1p()).exp()
    };
    sum(&(1..=(4000.0 / every) as u32).map(one).collect::<Vec<_>>())
}

fn persistent() -> Spec {
    line("preference 1%, elasticity 2, log growth 2% sd 1% persistence 0.8")
}

#[test]
fn endless_flows_are_what_they_sum_to() {
    let three = Spec::GrowthRegimes {
        preference: 0.02,
        hazard: 0.005,
        elasticity: 1.5,
        states: [(0.03, 0.01), (0.01, 0.02), (-0.02, 0.05)].map(|(mean, sd)| GrowthState { mean, sd }).into(),
        transition: vec![vec![0.8, 0.15, 0.05], vec![0.3, 0.6, 0.1], vec![0.1, 0.4, 0.5]],
        start: vec![0.2, 0.5, 0.3],
    };
    let mixture = Spec::Mixture(vec![(0.5, boom_and_bust()), (0.5, persistent())]);
    for spec in [persistent(), boom_and_bust(), three, mixture] {
        let curve = spec.curve(&NO_BASE).unwrap();
        for text in ["for ever", "growing 0.5%, for ever", "growing -1%, every 7 years, for ever"] {
            for last in [0.0, 3.5, 60.0] {
                let tail = Tail::parse(text).unwrap();
                let found = tail.present_value(&curve, last, 1.0, None).unwrap();
                let due = one_by_one(&tail, &curve, last);
                assert!((found - due).abs() <= 1e-12 * due, "{text} after {last}: {found}, due {due}");
            }
        }
    }
}

#[test]
fn endless_flows_need_rates_that_settle_above_their_growth() {
    let value = |spec: &Spec, text: &str| {
        let curve = spec.curve(&NO_BASE).unwrap();
        Tail::parse(text).unwrap().present_value(&curve, 0.0, 1.0, None)
    };
    // The limit of the persistent rate: 1% + 2 x 2% - (2 x 1%/0.2)^2/2 = 4.5%, continuous: 4.6028% a year.
    assert!(value(&persistent(), "growing 4.6%, for ever").is_ok());
    let error = value(&persistent(), "growing 4.61%, for ever").unwrap_err();
    assert_eq!(error.kind(), ErrorKind::Diverges);
    assert!(error.message().contains("the curve's last rate is 4.602786%"), "{error}");
    // States that take turns for ever.
    let turns = two_states((0.03, 0.0), (0.0, 0.0), (0.0, 0.0));
    let error = value(&turns, "for ever").unwrap_err();
    assert_eq!(error.kind(), ErrorKind::Unsupported);
    assert!(error.message().contains("do not settle"), "{error}");
}

#[test]
fn values_with_endless_flows_put_back_give_zero() {
    for (spec, parameters) in
        [(persistent(), &[Preference, Elasticity, Growth][..]), (boom_and_bust(), &[Preference, Growth][..])]
    {
        for (start, offsets) in [(2.0, [0.0, 2.0]), (2.5, [0.5, 2.5])] {
            let tail = Tail::parse("growing 0.5%, every 3 years, for ever").unwrap();
            let perpetual = [Perpetual { start, flow: 12.0, growth: 0.005, every: 3 }];
            let net = OptionFlows { offsets: &offsets, flows: &[-120.0, 12.0], perpetual: &perpetual };
            for &parameter in parameters {
                let found = switching_values(&net, &spec, &NO_BASE, parameter, parameter.interval()).unwrap();
                assert!(!found.values.is_empty() && found.unresolved.is_empty(), "{parameter}: {found:?}");
                for &value in &found.values {
                    let curve = curve(&spec, parameter, value);
                    let (finite, gross) = worth(&curve, &offsets, &[-120.0, 12.0]);
                    let npv = finite + tail.present_value(&curve, start, 12.0, None).unwrap();
                    assert!(npv.abs() < 1e-9 * gross, "{parameter} {value}: {npv}");
                }
            }
        }
    }
}

#[test]
fn the_elasticity_of_states_is_not_searched_over_endless_flows() {
    let perpetual = [Perpetual { start: 1.0, flow: 1.0, growth: 0.0, every: 1 }];
    let net = OptionFlows { offsets: &[0.0, 1.0], flows: &[-1.0, 2.0], perpetual: &perpetual };
    let error = switching_values(&net, &boom_and_bust(), &NO_BASE, Elasticity, (0.0, 20.0)).unwrap_err();
    assert_eq!((error.kind(), error.argument()), (ErrorKind::Unsupported, "perpetual"));
}
