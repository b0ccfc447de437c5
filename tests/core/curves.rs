//! What each curve does at its edges and limits, by the design's table of formulas and small hand calculations.

use hence_core::{
    Band, Compounding, Curve, Edge, Error, ErrorKind, HorizonRule, Parts, Persistence, Position, Spec,
    Timing, Where,
};

const AT: Where = Where { base_year: Some(2026), length: None };

fn made(spec: Spec) -> Curve {
    spec.curve(&AT).expect("a valid curve")
}

fn refused(spec: Spec) -> Error {
    spec.curve(&AT).expect_err("refused")
}

fn flat(rate: f64) -> Spec {
    Spec::Flat { rate, compounding: Compounding::Yearly }
}

fn to(value: f64, edge: f64) -> Band {
    Band { value, to: Some(Edge::Offset(edge)) }
}

fn year(value: f64, year: i32) -> Band {
    Band { value, to: Some(Edge::Year(year)) }
}

fn after(value: f64) -> Band {
    Band { value, to: None }
}

fn forward(bands: Vec<Band>) -> Spec {
    Spec::Bands { bands, edges_from: None }
}

fn ramsey(growth: Vec<Band>, exact: bool) -> Spec {
    Spec::Ramsey {
        preference: 0.01,
        hazard: 0.0,
        elasticity: 2.0,
        growth,
        exact,
        compounding: Compounding::Yearly,
    }
}

#[track_caller]
fn near(found: f64, expected: f64) {
    assert!((found / expected - 1.0).abs() < 1e-14, "{found} is not {expected}");
}

/// Common practice, no source: whether a million in 140 years is "less than one" depends on the compounding.
#[test]
fn a_million_in_140_years() {
    let yearly = made(flat(0.1)).factor(140.0).unwrap() * 1e6;
    let continuous =
        made(Spec::Flat { rate: 0.1, compounding: Compounding::Continuous }).factor(140.0).unwrap() * 1e6;
    assert_eq!(format!("{yearly:.3} {continuous:.3}"), "1.603 0.832");
}

#[test]
fn rates_at_their_limits() {
    for (rate, allowed) in
        [(-0.5, false), (-0.499, true), (1.0, true), (1.001, false), (f64::INFINITY, false)]
    {
        assert_eq!(flat(rate).curve(&AT).is_ok(), allowed, "{rate}");
    }
    assert_eq!(made(flat(1.0)).factor(3.0).unwrap(), 0.125);
    assert_eq!(made(flat(0.0)).factor(1e15).unwrap(), 1.0);
    assert_eq!(made(flat(1.0)).factor(-10.0).unwrap(), 1024.0);
}

#[test]
fn factors_beyond_a_double() {
    assert_eq!(made(flat(1.0)).factor(1100.0).unwrap(), 0.0);
    assert_eq!(made(flat(1.0)).factor(1074.0).unwrap(), f64::from_bits(1));
    let error = made(flat(-0.4)).factor(1e6).unwrap_err();
    assert_eq!(error.kind(), ErrorKind::NotFinite);
    let mut factors = [5.0; 2];
    let error = made(flat(-0.4)).factors(&[1.0, 1e6], &mut factors).unwrap_err();
    assert_eq!((error.kind(), error.index(), factors), (ErrorKind::NotFinite, Some(1), [5.0; 2]));
    assert_eq!(made(flat(0.1)).factor(1e16).unwrap_err().kind(), ErrorKind::OutsideDomain);
}

#[test]
fn the_edge_year_belongs_to_the_earlier_band() {
    let curve = made(forward(vec![to(0.04, 30.0), to(0.02, 40.0)]));
    assert_eq!(curve.forward_rate(30.0).unwrap(), 0.04);
    assert_eq!(curve.forward_rate(31.0).unwrap(), 0.02);
    near(curve.instantaneous_rate(30.0).unwrap(), 0.04f64.ln_1p());
    near(curve.instantaneous_rate(30.000_001).unwrap(), 0.02f64.ln_1p());
    near(curve.factor(-2.0).unwrap(), 1.04 * 1.04);
    assert!(curve.factor(40.0).is_ok());
    let error = curve.factor(40.5).unwrap_err();
    assert_eq!(error.kind(), ErrorKind::OutsideDomain);
    assert_eq!(error.message(), "offset is 40.5 years; the curve is defined up to 40 years");
    assert!(error.hint().unwrap().contains("after"));
}

#[test]
fn calendar_edges_before_the_base_lie_where_they_are() {
    let curve = made(forward(vec![year(0.05, 2020), year(0.03, 2026), after(0.01)]));
    // From 2026 only the last band matters; before it 3% to the end of 2020, 5% before that.
    near(curve.factor(10.0).unwrap(), 1.01f64.powi(-10));
    near(curve.factor(-6.0).unwrap(), 1.03f64.powi(6));
    near(curve.factor(-8.0).unwrap(), 1.03f64.powi(6) * 1.05f64.powi(2));
    assert_eq!(curve.mean_rate(0.0).unwrap(), 0.01, "the limit from above");
    near(curve.instantaneous_rate(0.0).unwrap(), 0.03f64.ln_1p());
    let ended = forward(vec![year(0.05, 2020)]);
    assert_eq!(refused(ended).kind(), ErrorKind::Edges);
    let calendar = forward(vec![year(0.05, 2030), after(0.01)]);
    assert_eq!(calendar.curve(&Where::default()).unwrap_err().kind(), ErrorKind::NeedsBase);
}

#[test]
fn edges_counted_from_another_year() {
    let bands = vec![to(0.04, 10.0), after(0.02)];
    let curve = made(Spec::Bands { bands, edges_from: Some(2020) });
    assert_eq!(curve.parts(), &Parts::Bands { edges: vec![4.0], rates: vec![0.04, 0.02], open: true });
    assert_eq!((curve.forward_rate(4.0).unwrap(), curve.forward_rate(5.0).unwrap()), (0.04, 0.02));
}

#[test]
fn whole_horizon_by_flow_jumps_and_says_so() {
    let bands = vec![to(0.04, 10.0), after(0.02)];
    let curve = made(Spec::HorizonSteps { bands, rule: HorizonRule::ByFlow });
    near(curve.factor(10.0).unwrap(), 1.04f64.powi(-10));
    near(curve.factor(11.0).unwrap(), 1.02f64.powi(-11));
    assert_eq!(curve.mean_rate(11.0).unwrap(), 0.02);
    assert!(curve.forward_rate(11.0).unwrap() < 0.0);
    assert_eq!(curve.factor(-1.0).unwrap_err().kind(), ErrorKind::OutsideDomain);
    let warnings = curve.warnings();
    assert_eq!(warnings.len(), 1);
    assert!(warnings[0].contains("just after offset 10") && warnings[0].contains("4% to 2%"), "{warnings:?}");
    let rising = vec![to(0.02, 10.0), after(0.04)];
    assert!(made(Spec::HorizonSteps { bands: rising, rule: HorizonRule::ByFlow }).warnings().is_empty());
}

#[test]
fn interpolated_rates_hold_outside_their_points() {
    let points = vec![(3.0, 0.039), (10.0, 0.04), (30.0, 0.042)];
    let curve = made(Spec::HorizonPoints { points, rule: HorizonRule::ByFlow });
    for (t, rate) in [(1.0, 0.039), (3.0, 0.039), (20.0, 0.041), (30.0, 0.042), (60.0, 0.042)] {
        near(curve.mean_rate(t).unwrap(), rate);
    }
    assert!(curve.warnings().is_empty());
    let falling = vec![(10.0, 0.05), (20.0, 0.01)];
    let curve = made(Spec::HorizonPoints { points: falling, rule: HorizonRule::ByFlow });
    // At 20 the factor is above that at 19: (1.01)^-20 = 0.820 against (1.014)^-19 = 0.768.
    assert!(curve.factor(20.0).unwrap() > curve.factor(19.0).unwrap());
    assert_eq!(curve.warnings().len(), 1);
    assert!(curve.instantaneous_rate(20.0).unwrap() < 0.0);
}

#[test]
fn one_rate_for_the_length_of_the_appraisal() {
    let spec =
        Spec::HorizonSteps { bands: vec![to(0.04, 30.0), to(0.02, 60.0)], rule: HorizonRule::ByLength };
    let rate =
        |length| spec.curve(&Where { base_year: None, length }).map(|curve| curve.mean_rate(7.0).unwrap());
    assert_eq!(rate(Some(30.0)).unwrap(), 0.04);
    assert_eq!(rate(Some(31.0)).unwrap(), 0.02);
    assert_eq!(rate(None).unwrap_err().kind(), ErrorKind::NeedsLength);
    assert_eq!(rate(Some(61.0)).unwrap_err().kind(), ErrorKind::OutsideDomain);
    assert_eq!(rate(Some(f64::NAN)).unwrap_err().kind(), ErrorKind::NotFinite);
}

#[test]
fn the_ramsey_rule_linear_and_exact() {
    assert_eq!(made(ramsey(vec![after(0.02)], false)).forward_rate(9.0).unwrap(), 0.05);
    // 1.01 x 1.02^2 = 1.050804.
    near(made(ramsey(vec![after(0.02)], true)).forward_rate(9.0).unwrap(), 0.050_804);
    let falling = made(ramsey(vec![after(-0.02)], false));
    near(falling.forward_rate(1.0).unwrap(), -0.03);
    assert!(falling.factor(10.0).unwrap() > 1.0);
    let path = made(ramsey(vec![to(0.02, 50.0), after(0.01)], false));
    assert_eq!((path.forward_rate(50.0).unwrap(), path.forward_rate(51.0).unwrap()), (0.05, 0.03));
    assert!(path.factor(-1.0).is_ok());
    let exact = made(ramsey(vec![to(0.02, 2.0), after(0.0)], true));
    near(exact.factor(2.5).unwrap(), 1.050_804f64.powi(-2) * 1.01f64.powf(-0.5));
    assert_eq!(exact.factor(-0.5).unwrap_err().kind(), ErrorKind::OutsideDomain);
    assert_eq!(refused(ramsey(vec![to(0.02, 2.5), after(0.0)], true)).kind(), ErrorKind::Edges);
    assert_eq!(refused(ramsey(vec![after(-1.0)], true)).kind(), ErrorKind::RateRange);
    assert_eq!(refused(ramsey(vec![after(-0.3)], false)).kind(), ErrorKind::RateRange, "a rate of -59%");
}

#[test]
fn what_this_version_does_not_compute_is_refused() {
    let half = Persistence { phi: 0.5, start: 0.0 };
    let uncertain = |persistence, sd| Spec::UncertainGrowth {
        preference: 0.01,
        hazard: 0.0,
        elasticity: 2.0,
        mean: 0.02,
        sd,
        log: false,
        persistence,
        compounding: Compounding::Yearly,
    };
    assert_eq!(refused(uncertain(Some(half), 0.036)).kind(), ErrorKind::Unsupported);
    assert_eq!(refused(uncertain(None, -0.1)).kind(), ErrorKind::RateRange);
    // Without spread it is the linear rule: 1% + 2 x 2%.
    assert_eq!(made(uncertain(None, 0.0)).forward_rate(1.0).unwrap(), 0.05);
    let Spec::Ramsey { preference, hazard, elasticity, growth, .. } = ramsey(vec![after(0.02)], true) else {
        unreachable!()
    };
    let compounding = Compounding::Continuous;
    let exact = Spec::Ramsey { preference, hazard, elasticity, growth, exact: true, compounding };
    assert_eq!(refused(exact).kind(), ErrorKind::Unsupported);
}

#[test]
fn gamma_ends_where_its_factor_is_infinite() {
    let curve = made(Spec::Gamma { mean: 0.04, sd: 0.03 });
    near(curve.domain().lower, -0.04 / 0.0009);
    assert!(!curve.domain().lower_included && curve.domain().upper == f64::INFINITY);
    assert!(curve.factor(-44.4).unwrap() > 1.0);
    assert_eq!(curve.factor(-44.5).unwrap_err().kind(), ErrorKind::OutsideDomain);
    assert_eq!(curve.mean_rate_continuous(0.0).unwrap(), 0.04);
    let certain = made(Spec::Gamma { mean: 0.04, sd: 0.0 });
    let flat = made(Spec::Flat { rate: 0.04, compounding: Compounding::Continuous });
    assert_eq!(certain.factor(33.3).unwrap(), flat.factor(33.3).unwrap());
    assert_eq!(refused(Spec::Gamma { mean: 0.0, sd: 0.01 }).kind(), ErrorKind::RateRange);
}

#[test]
fn mixtures_need_weights_that_sum_to_one() {
    let half = |second| Spec::Mixture(vec![(0.5, flat(0.01)), (second, flat(0.07))]);
    assert!(half(0.5 + 9e-13).curve(&AT).is_ok());
    let error = refused(half(0.5 + 2e-12));
    assert_eq!(error.kind(), ErrorKind::Weights);
    let error = refused(Spec::Mixture(vec![(1.5, flat(0.01)), (-0.5, flat(0.07))]));
    assert_eq!((error.kind(), error.index()), (ErrorKind::Weights, Some(1)));
    assert_eq!(refused(Spec::Mixture(vec![])).kind(), ErrorKind::Weights);
    let error = refused(Spec::Mixture(vec![(0.5, flat(0.01)), (0.5, flat(7.0))]));
    assert_eq!((error.kind(), error.index()), (ErrorKind::RateRange, Some(1)));
    let bounded = Spec::Mixture(vec![(0.5, flat(0.01)), (0.5, forward(vec![to(0.03, 30.0)]))]);
    let curve = made(bounded);
    assert_eq!(curve.domain().upper, 30.0);
    assert_eq!(curve.factor(31.0).unwrap_err().kind(), ErrorKind::OutsideDomain);
}

#[test]
fn mixtures_keep_their_rates_where_factors_underflow() {
    let curve = made(Spec::Mixture(vec![(0.5, flat(0.5)), (0.5, flat(1.0))]));
    assert_eq!(curve.factor(5000.0).unwrap(), 0.0);
    assert_eq!(curve.forward_rate(5000.0).unwrap(), 0.5, "the lowest rate is all that is left");
    near(curve.instantaneous_rate(5000.0).unwrap(), 0.5f64.ln_1p());
}

#[test]
fn tables_are_refused_outside_and_in_disorder() {
    let curve = made(Spec::Table(vec![(0.0, 1.0), (10.0, 0.81), (20.0, 0.5)]));
    // Half way in years is half way in logarithms: the square root of 0.81.
    near(curve.factor(5.0).unwrap(), 0.9);
    assert_eq!(curve.factor(20.0).unwrap(), 0.5);
    assert_eq!(curve.factor(20.1).unwrap_err().kind(), ErrorKind::OutsideDomain);
    assert_eq!(curve.factor(-0.1).unwrap_err().kind(), ErrorKind::OutsideDomain);
    for (points, kind) in [
        (vec![(1.0, 0.9), (2.0, 0.8)], ErrorKind::Edges),
        (vec![(0.0, 1.0)], ErrorKind::Edges),
        (vec![(0.0, 0.99), (2.0, 0.8)], ErrorKind::RateRange),
        (vec![(0.0, 1.0), (2.0, 0.0)], ErrorKind::RateRange),
        (vec![(0.0, 1.0), (2.0, 0.9), (2.0, 0.8)], ErrorKind::Edges),
        (vec![(0.0, 1.0), (2.0, f64::NAN)], ErrorKind::NotFinite),
    ] {
        assert_eq!(refused(Spec::Table(points)).kind(), kind);
    }
}

#[test]
fn timing_moves_the_offset() {
    let curve = made(flat(0.035));
    let factor = |years, flows, base| curve.timed_factor(years, Timing { flows, base });
    use Position::{Averaged, End, Middle, Start};
    assert_eq!(factor(0.0, End, End).unwrap(), 1.0);
    assert_eq!(factor(1.0, End, End).unwrap(), curve.factor(1.0).unwrap());
    assert_eq!(factor(1.0, Middle, End).unwrap(), curve.factor(0.5).unwrap());
    assert_eq!(factor(0.0, End, Start).unwrap(), curve.factor(1.0).unwrap());
    assert_eq!(factor(0.0, Start, Middle).unwrap(), curve.factor(-0.5).unwrap());
    near(factor(1.0, Averaged, End).unwrap(), (1.0 + 1.0 / 1.035) / 2.0);
    assert_eq!(factor(1.0, End, Averaged).unwrap_err().kind(), ErrorKind::NoMeaning);
    let from_zero = made(ramsey(vec![after(0.02)], true));
    let averaged = Timing { flows: Averaged, base: End };
    assert_eq!(from_zero.timed_factor(0.0, averaged).unwrap_err().kind(), ErrorKind::OutsideDomain);
}

#[test]
fn arrays_of_different_lengths_are_refused() {
    let error = made(flat(0.035)).factors(&[1.0, 2.0], &mut [0.0]).unwrap_err();
    assert_eq!(error.kind(), ErrorKind::Shape);
}

/// Rebuilds factors from the parts by the formulas of their documentation.
#[test]
fn the_parts_suffice_for_a_second_route() {
    let continuous = Compounding::Continuous;
    let growth = vec![to(0.02, 50.0), after(0.01)];
    let spec = Spec::Ramsey {
        preference: 0.01,
        hazard: 0.002,
        elasticity: 1.5,
        growth,
        exact: false,
        compounding: continuous,
    };
    let curve = made(spec);
    let Parts::Bands { edges, rates, open: true } = curve.parts() else { panic!("{:?}", curve.parts()) };
    let rebuilt = (1.0 + rates[0]).powf(-edges[0]) * (1.0 + rates[1]).powf(-30.0);
    assert!((curve.factor(80.0).unwrap() / rebuilt - 1.0).abs() < 1e-13);

    let curve = made(ramsey(vec![to(0.02, 50.0), after(-0.01)], true));
    let Parts::RamseyExact { rho, elasticity, edges, growth, open: true } = curve.parts() else {
        panic!("{:?}", curve.parts())
    };
    let year = |g: f64| (1.0 + rho) * (1.0 + g).powf(*elasticity);
    let rebuilt = year(growth[0]).powf(-edges[0]) * year(growth[1]).powf(-30.0);
    assert!((curve.factor(80.0).unwrap() / rebuilt - 1.0).abs() < 1e-13);

    let mixture = made(Spec::Mixture(vec![(0.5, flat(0.01)), (0.5, Spec::Gamma { mean: 0.04, sd: 0.03 })]));
    let Parts::Mixture(parts) = mixture.parts() else { panic!("{:?}", mixture.parts()) };
    assert_eq!(parts[0], (0.5, Parts::Yearly { rate: 0.01 }));
    assert_eq!(parts[1], (0.5, Parts::Gamma { mean: 0.04, sd: 0.03 }));
}
