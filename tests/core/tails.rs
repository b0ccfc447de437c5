//! Tails: the grammar, sums against closed forms worked out here, sums by brute force, and what diverges.

use hence_core::{
    Band, Compounding, Curve, Edge, ErrorKind, HorizonRule, Position, Spec, Tail, Timing, Where,
};
use proptest::prelude::*;

fn curve(spec: Spec) -> Curve {
    spec.curve(&Where { base_year: Some(2026), length: Some(60.0) }).unwrap()
}

fn flat(rate: f64) -> Spec {
    Spec::Flat { rate, compounding: Compounding::Yearly }
}

fn bands(list: &[(f64, Option<f64>)]) -> Vec<Band> {
    list.iter().map(|&(value, to)| Band { value, to: to.map(Edge::Offset) }).collect()
}

fn declining() -> Spec {
    let bands = bands(&[
        (0.035, Some(30.0)),
        (0.03, Some(75.0)),
        (0.025, Some(125.0)),
        (0.02, Some(200.0)),
        (0.015, Some(300.0)),
        (0.01, None),
    ]);
    Spec::Bands { bands, edges_from: None }
}

fn tail(text: &str) -> Tail {
    Tail::parse(text).unwrap()
}

fn value(text: &str, spec: Spec, last_offset: f64) -> f64 {
    tail(text).present_value(&curve(spec), last_offset, 1.0, Some(2026)).unwrap()
}

fn close(found: f64, due: f64, tolerance: f64) {
    assert!((found - due).abs() <= tolerance * due.abs(), "found {found}, due {due}");
}

/// Flow by flow, until what is left cannot matter.
fn brute(text: &str, spec: Spec, last_offset: f64, flows: usize) -> f64 {
    let (tail, curve) = (tail(text), curve(spec));
    let one = |k: usize| {
        let years = k as f64 * f64::from(tail.every);
        curve.factor(last_offset + years).unwrap() * (years * tail.growth.ln_1p()).exp()
    };
    hence_core::sum(&(1..=flows).map(one).collect::<Vec<_>>())
}

#[test]
fn texts_parse_and_print_in_one_form() {
    for (text, canonical) in [
        ("for ever", "for ever"),
        (" Forever ", "for ever"),
        ("level, to 2300", "to 2300"),
        ("to 300,every 1 year", "to 300"),
        ("every year, for ever", "for ever"),
        ("For  Ever, Growing 1%", "growing 1%, for ever"),
        ("to 2300, every 25 years, growing -0.5%", "growing -0.5%, every 25 years, to 2300"),
        ("growing 0%, for ever", "for ever"),
        ("growing -0%, for ever", "for ever"),
        ("growing +1.50%, to 9999", "growing 1.5%, to 9999"),
        ("growing 100%, to 1", "growing 100%, to 1"),
        ("growing 0.001%, for ever", "growing 0.001%, for ever"),
    ] {
        assert_eq!(tail(text).to_string(), canonical);
        assert_eq!(tail(canonical), tail(text));
    }
    assert_eq!(tail("growing 0.7%, to 2300"), Tail { growth: 0.007, every: 1, to: Some(2300) });
}

proptest! {
    #![proptest_config(crate::repeatable())]

    #[test]
    fn every_tail_prints_to_a_text_that_parses_back(
        growth in prop_oneof![-0.999f64..1.0, -1e-9f64..1e-9, Just(0.0), Just(0.1)],
        every in 1u32..=1000,
        to in prop::option::of(1i32..=9999),
    ) {
        let tail = Tail { growth, every, to };
        prop_assert_eq!(Tail::parse(&tail.to_string()).unwrap(), tail);
    }
}

#[test]
fn errors_point_at_the_phrase() {
    for (text, at, message) in [
        ("", 0, "found \"\", expected for ever, to 2300, growing 1%, every 25 years or level"),
        ("growing 1%", 0, "the tail does not say how long it goes on"),
        ("for ever, growing 1", 10, "found \"1\", expected a percentage such as 1% or -0.5%"),
        ("for ever, growing 1e0%", 10, "found \"1e0%\", expected a percentage such as 1% or -0.5%"),
        ("for ever, growing %", 10, "found \"%\", expected a percentage such as 1% or -0.5%"),
        ("to 0", 0, "found \"0\", expected a whole number from 1 to 9999"),
        ("to 2300.5", 0, "found \"2300.5\", expected a whole number from 1 to 9999"),
        ("for ever, every 0 years", 10, "found \"0\", expected a whole number from 1 to 1000"),
        ("for ever, to 2300", 10, "\"to 2300\" says again what was said before"),
        ("level, growing 1%, for ever", 7, "\"growing 1%\" says again what was said before"),
        (
            "until 2300",
            0,
            "found \"until 2300\", expected for ever, to 2300, growing 1%, every 25 years or level",
        ),
    ] {
        let error = Tail::parse(text).unwrap_err();
        assert_eq!(
            (error.kind(), error.at(), error.message()),
            (ErrorKind::Syntax, Some(at), message),
            "{text}"
        );
    }
    for text in ["growing -100%, for ever", "growing 101%, to 2300"] {
        assert_eq!(Tail::parse(text).unwrap_err().kind(), ErrorKind::RateRange);
    }
}

#[test]
fn a_tail_that_ends_is_the_sum_of_its_flows() {
    // At 100%: 1/2 + 1/4 + 1/8, whether the end is an offset, a year, or falls between flows.
    assert_eq!(value("to 3", flat(1.0), 0.0), 0.875);
    assert_eq!(value("to 2029", flat(1.0), 0.0), 0.875);
    assert_eq!(value("every 2 years, to 2031", flat(1.0), 0.0), 0.25 + 0.0625);
    assert_eq!(value("growing 50%, to 2", flat(1.0), 0.0), 0.75 + 0.5625);
    // The end before the next flow is due.
    assert_eq!(value("every 10 years, to 9", flat(1.0), 0.0), 0.0);
    assert_eq!(value("to 5", flat(1.0), 5.0), 0.0);
    // 1e9 as the last flow.
    let paid = tail("to 3").present_value(&curve(flat(1.0)), 0.0, -1e9, None).unwrap();
    assert_eq!(paid, -0.875e9);
}

#[test]
fn timing_moves_the_flows_and_not_the_number_of_them() {
    let middle = Timing { flows: Position::Middle, base: Position::Start };
    let start = Timing { flows: Position::Start, base: Position::End };
    let averaged = Timing { flows: Position::Averaged, base: Position::End };
    let curve = curve(flat(1.0));
    for (timing, factor) in [(middle, 0.5f64.sqrt()), (start, 2.0), (averaged, 1.5)] {
        for text in ["to 2029", "to 3", "for ever"] {
            let plain = tail(text).present_value(&curve, 0.0, 1.0, Some(2026)).unwrap();
            let timed = tail(text).timed_present_value(&curve, 0.0, timing, 1.0, Some(2026)).unwrap();
            close(timed, plain * factor, 1e-15);
        }
    }
}

#[test]
fn level_flows_for_ever_are_worth_one_over_the_rate() {
    for rate in [0.001, 0.035, 0.1, 1.0] {
        close(value("for ever", flat(rate), 0.0), 1.0 / rate, 1e-14);
        let continuous = Spec::Flat { rate, compounding: Compounding::Continuous };
        close(value("for ever", continuous, 0.0), 1.0 / rate.exp_m1(), 1e-14);
    }
    // 40 years on.
    close(value("for ever", flat(0.035), 40.0), 1.035f64.powi(-40) / 0.035, 1e-13);
}

#[test]
fn growing_flows_for_ever() {
    // Next flow over rate less growth.
    close(value("growing 1%, for ever", flat(0.035), 0.0), 1.01 / 0.025, 1e-13);
    close(value("growing -2%, for ever", flat(0.035), 0.0), 0.98 / 0.055, 1e-13);
    // A negative rate, and flows that fall faster.
    close(value("growing -3%, for ever", flat(-0.01), 0.0), 0.97 / 0.02, 1e-13);
    // Rate and growth almost alike: 1.02/(1e-9) years.
    close(value("growing 2%, for ever", flat(0.020_000_001), 0.0), 1.02e9, 1e-6);
}

#[test]
fn renewals_every_m_years_for_ever() {
    // 1/((1+r)^m - 1), the form for renewals without limit.
    for m in [2, 25, 70, 1000] {
        let due = 1.0 / (1.04f64.powi(m) - 1.0);
        close(value(&format!("every {m} years, for ever"), flat(0.04), 0.0), due, 1e-12);
    }
}

#[test]
fn declining_rates_for_ever_agree_with_a_long_sum() {
    // What is left after 6000 years at 1% is below 1e-22.
    for (text, start) in [
        ("for ever", 0.0),
        ("for ever", 49.5),
        ("for ever", 300.0),
        ("for ever", 400.25),
        ("growing -1%, for ever", 0.0),
        ("every 25 years, for ever", 50.0),
        ("growing 0.5%, every 7 years, for ever", 10.0),
    ] {
        close(value(text, declining(), start), brute(text, declining(), start, 14_000), 1e-13);
    }
}

#[test]
fn whole_horizon_rates_use_their_last_rate() {
    let steps = Spec::HorizonSteps {
        bands: bands(&[(0.04, Some(10.0)), (0.03, Some(30.0)), (0.02, None)]),
        rule: HorizonRule::ByFlow,
    };
    for start in [0.0, 29.0, 30.0, 31.0] {
        close(value("for ever", steps.clone(), start), brute("for ever", steps.clone(), start, 4000), 1e-13);
    }
    let points = |rule| Spec::HorizonPoints { points: vec![(3.0, 0.02), (10.0, 0.03), (30.0, 0.04)], rule };
    for start in [0.0, 5.0, 30.0] {
        let spec = points(HorizonRule::ByFlow);
        close(value("for ever", spec.clone(), start), brute("for ever", spec, start, 2000), 1e-13);
    }
    // By length, one rate: here that of 60 years.
    close(value("for ever", points(HorizonRule::ByLength), 0.0), 25.0, 1e-13);
}

#[test]
fn growth_in_the_rate_by_the_ramsey_rule() {
    let ramsey = |growth, exact| Spec::Ramsey {
        preference: 0.01,
        hazard: 0.0,
        elasticity: 2.0,
        growth,
        exact,
        compounding: Compounding::Yearly,
    };
    close(value("for ever", ramsey(bands(&[(0.02, None)]), false), 0.0), 20.0, 1e-13);
    let exact: f64 = 1.01 * 1.02 * 1.02 - 1.0;
    close(value("for ever", ramsey(bands(&[(0.02, None)]), true), 0.0), 1.0 / exact, 1e-13);
    for exact in [false, true] {
        let path = || ramsey(bands(&[(0.02, Some(50.0)), (0.005, None)]), exact);
        close(value("for ever", path(), 3.0), brute("for ever", path(), 3.0, 4000), 1e-13);
    }
}

#[test]
fn a_mixture_is_worth_the_mixture_of_its_parts() {
    let mixture = Spec::Mixture(vec![(0.5, flat(0.01)), (0.3, flat(0.07)), (0.2, declining())]);
    let due = 0.5 / 0.01 + 0.3 / 0.07 + 0.2 * value("for ever", declining(), 0.0);
    close(value("for ever", mixture, 0.0), due, 1e-13);
}

#[test]
fn a_gamma_curve_with_a_shape_known_in_closed_form() {
    // Mean m, deviation s with m^2/s^2 = 2 and s^2/m = 1: D(t) = (1+t)^-2, so the sum from t = 1 is pi^2/6 - 1.
    let gamma = Spec::Gamma { mean: 0.02, sd: 0.02 / 2f64.sqrt() };
    // D(t) = (1 + 0.01 t)^-2, every 100 years: (1 + k)^-2.
    let due = std::f64::consts::PI.powi(2) / 6.0 - 1.0;
    close(value("every 100 years, for ever", gamma, 0.0), due, 1e-13);
    // m^2/s^2 = 4 and s^2/m = 0.01: zeta(4) - 1 = pi^4/90 - 1.
    let gamma = Spec::Gamma { mean: 0.04, sd: 0.02 };
    let due = std::f64::consts::PI.powi(4) / 90.0 - 1.0;
    close(value("every 100 years, for ever", gamma, 0.0), due, 1e-13);
}

#[test]
fn a_gamma_curve_agrees_with_a_long_sum_and_its_integral() {
    for (mean, sd, every, start) in [
        (0.04, 0.03, 1.0, 0.0),
        (0.04, 0.03, 25.0, 49.5),
        (0.02, 0.019_9, 1.0, 10.0),
        (0.05, 0.001, 40.0, 0.0),
    ] {
        let spec = Spec::Gamma { mean, sd };
        let flows = 100_000;
        let text = format!("every {every} years, for ever");
        // The rest by the midpoint rule: from half a step before the first flow left out. Its error is below
        // every^2 D''/24 of that, a relative 1e-10.
        let rest_from = start + (flows as f64 + 0.5) * every;
        let (shape, scale): (f64, f64) = ((mean / sd) * (mean / sd), mean / (sd * sd));
        let rest = (1.0 + rest_from / scale).powf(1.0 - shape) * scale / (shape - 1.0) / every;
        close(value(&text, spec.clone(), start), brute(&text, spec, start, flows) + rest, 2e-11);
    }
    let spec = Spec::Gamma { mean: 0.04, sd: 0.05 };
    close(
        value("growing -1%, for ever", spec.clone(), 5.0),
        brute("growing -1%, for ever", spec, 5.0, 5000),
        1e-13,
    );
    // Without spread the rate is the mean.
    close(value("for ever", Spec::Gamma { mean: 0.04, sd: 0.0 }, 0.0), 1.0 / 0.04f64.exp_m1(), 1e-13);
}

#[test]
fn what_grows_as_fast_as_the_curve_falls_diverges() {
    let gamma = |mean, sd| Spec::Gamma { mean, sd };
    for (text, spec) in [
        ("growing 3.5%, for ever", flat(0.035)),
        ("growing 4%, for ever", flat(0.035)),
        ("for ever", flat(0.0)),
        ("for ever", flat(-0.01)),
        ("growing 1%, for ever", declining()),
        ("growing 2%, for ever", Spec::Mixture(vec![(0.9, flat(0.07)), (0.1, flat(0.02))])),
        ("for ever", gamma(0.03, 0.03)),
        ("for ever", gamma(0.03, 0.04)),
        ("growing 0.1%, for ever", gamma(0.04, 0.01)),
    ] {
        let error = tail(text).present_value(&curve(spec), 0.0, 1.0, None).unwrap_err();
        assert_eq!(
            (error.kind(), error.hint()),
            (ErrorKind::Diverges, Some("a tail that ends: to 2300")),
            "{text}"
        );
    }
    let error = tail("growing 2%, for ever").present_value(&curve(flat(0.01)), 0.0, 1.0, None).unwrap_err();
    assert_eq!(
        error.message(),
        "the flows grow by 2% a year for ever and the curve's last rate is 1%, so their value has no end"
    );
    // Whatever diverges for ever has a value to a year.
    assert_eq!(value("growing 100%, to 40", flat(0.0), 38.0), 2.0 + 4.0);
}

#[test]
fn what_cannot_be_valued_is_refused() {
    let kind = |tail: &Tail, spec: Spec, last: f64, base| {
        tail.present_value(&curve(spec), last, 1.0, base).unwrap_err().kind()
    };
    let ends = Spec::Bands { bands: bands(&[(0.03, Some(100.0))]), edges_from: None };
    let table = Spec::Table(vec![(0.0, 1.0), (100.0, 0.1)]);
    assert_eq!(kind(&tail("for ever"), ends.clone(), 0.0, None), ErrorKind::OutsideDomain);
    assert_eq!(kind(&tail("for ever"), table.clone(), 0.0, None), ErrorKind::OutsideDomain);
    assert_eq!(kind(&tail("to 101"), ends.clone(), 0.0, None), ErrorKind::OutsideDomain);
    assert!(tail("to 100").present_value(&curve(ends), 0.0, 1.0, None).is_ok());
    assert!(tail("to 100").present_value(&curve(table), 0.0, 1.0, None).is_ok());
    assert_eq!(kind(&tail("to 2300"), flat(0.03), 0.0, None), ErrorKind::NeedsBase);
    assert_eq!(kind(&tail("to 2030"), flat(0.03), 5.0, Some(2026)), ErrorKind::NoMeaning);
    assert_eq!(kind(&tail("for ever"), flat(0.03), f64::NAN, None), ErrorKind::NotFinite);
    let slow = tail("growing -0.001%, for ever");
    assert_eq!(kind(&slow, Spec::Gamma { mean: 0.03, sd: 0.04 }, 0.0, None), ErrorKind::Unsupported);
    for broken in [
        Tail { growth: -1.0, every: 1, to: None },
        Tail { growth: 0.0, every: 0, to: None },
        Tail { growth: 0.0, every: 1001, to: None },
    ] {
        assert_eq!(kind(&broken, flat(0.03), 0.0, None), ErrorKind::RateRange);
    }
    let infinite = tail("for ever").present_value(&curve(flat(0.03)), 0.0, f64::INFINITY, None).unwrap_err();
    assert_eq!((infinite.kind(), infinite.argument()), (ErrorKind::NotFinite, "last_flow"));
}
