//! Real and nominal rates and flows, from (1 + nominal) = (1 + real)(1 + inflation).

use hence_core::{ErrorKind, nominal_rate, real_flows, real_flows_by_inflation, real_rate};
use proptest::prelude::*;

fn close(found: f64, due: f64, tolerance: f64) {
    assert!((found - due).abs() <= tolerance, "found {found}, due {due}");
}

#[test]
fn rates_by_hand() {
    close(real_rate(0.0712, 0.03).unwrap(), 0.04, 1e-16); // 1.04 × 1.03 = 1.0712
    close(nominal_rate(0.04, 0.03).unwrap(), 0.0712, 1e-16);
    assert_eq!(real_rate(0.02, 0.02).unwrap(), 0.0);
    close(real_rate(0.0, 0.25).unwrap(), -0.2, 0.0);
    close(nominal_rate(-0.2, 0.25).unwrap(), 0.0, 1e-16);
}

proptest! {
    #![proptest_config(crate::repeatable())]

    #[test]
    fn real_undoes_nominal(real in -0.4f64..1.0, inflation in -0.4f64..1.0) {
        let back = real_rate(nominal_rate(real, inflation).unwrap(), inflation).unwrap();
        prop_assert!((back - real).abs() < 2e-15);
    }
}

#[test]
fn rates_above_minus_one_only() {
    assert!(real_rate(-0.999, 0.0).is_ok());
    for (error, argument) in [
        (real_rate(-1.0, 0.0).unwrap_err(), "nominal"),
        (real_rate(0.05, -1.5).unwrap_err(), "inflation"),
        (nominal_rate(-1.0, 0.0).unwrap_err(), "real"),
        (nominal_rate(0.05, -1.0).unwrap_err(), "inflation"),
        (real_flows_by_inflation(&[1.0], &[1.0], -1.0).unwrap_err(), "inflation"),
    ] {
        assert_eq!((error.kind(), error.argument()), (ErrorKind::RateRange, argument));
    }
    assert_eq!(real_rate(f64::NAN, 0.0).unwrap_err().kind(), ErrorKind::NotFinite);
    assert_eq!(nominal_rate(0.0, f64::INFINITY).unwrap_err().kind(), ErrorKind::NotFinite);
}

#[test]
fn flows_by_index_are_in_prices_of_the_base() {
    let index = [80.0, 100.0, 125.0];
    assert_eq!(real_flows(&[8.0, 10.0, -12.5], &index, 1).unwrap(), [10.0, 10.0, -10.0]);
    assert_eq!(real_flows(&[8.0, 10.0, -12.5], &index, 2).unwrap(), [12.5, 12.5, -12.5]);
}

#[test]
fn flows_by_inflation_agree_with_the_index_it_makes() {
    let years = [-1.0, 0.0, 1.0, 30.0];
    let index: Vec<f64> = years.iter().map(|&n| 1.025f64.powf(n)).collect();
    let flows = [5.0, 6.0, 7.0, 8.0];
    let by_index = real_flows(&flows, &index, 1).unwrap();
    for (a, b) in by_index.iter().zip(real_flows_by_inflation(&flows, &years, 0.025).unwrap()) {
        close(*a, b, 1e-14);
    }
}

#[test]
fn bad_arrays_are_refused_with_their_place() {
    let refused = |flows: &[f64], index: &[f64], base| {
        let error = real_flows(flows, index, base).unwrap_err();
        (error.kind(), error.argument(), error.index())
    };
    assert_eq!(refused(&[1.0], &[1.0, 2.0], 0), (ErrorKind::Shape, "index", None));
    assert_eq!(refused(&[1.0], &[1.0], 1), (ErrorKind::Shape, "base", None));
    assert_eq!(refused(&[], &[], 0), (ErrorKind::Shape, "base", None));
    assert_eq!(refused(&[1.0, f64::NAN], &[1.0, 1.0], 0), (ErrorKind::NotFinite, "flows", Some(1)));
    assert_eq!(refused(&[1.0, 1.0], &[1.0, f64::INFINITY], 0), (ErrorKind::NotFinite, "index", Some(1)));
    assert_eq!(refused(&[1.0, 1.0], &[1.0, 0.0], 0), (ErrorKind::NoMeaning, "index", Some(1)));
    assert_eq!(refused(&[1e308, 1e308], &[1e300, 1.0], 0), (ErrorKind::NotFinite, "flows", Some(1)));
    let error = real_flows_by_inflation(&[1.0], &[], 0.02).unwrap_err();
    assert_eq!((error.kind(), error.argument()), (ErrorKind::Shape, "years"));
}
