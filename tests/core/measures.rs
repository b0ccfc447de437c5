//! Measures of an appraisal: cases worked by hand, and properties that hold for any flows.

use hence_core::{
    Compounding, Curve, Eras, ErrorKind, Spec, Where, annual_equivalent, benefit_cost_ratio, cost_per_effect,
    discounted_payback, era_shares, incremental_ratios, mean_time, net_present_value, npv_per_budget,
    present_value, present_values, undiscounted_total,
};
use proptest::prelude::*;

fn flat(rate: f64) -> Curve {
    Spec::Flat { rate, compounding: Compounding::Yearly }.curve(&Where::default()).unwrap()
}

fn close(found: f64, due: f64) {
    assert!((found - due).abs() <= 1e-14 * due.abs(), "found {found}, due {due}");
}

#[test]
fn totals_and_present_values_by_hand() {
    assert_eq!(undiscounted_total(&[1.0, -2.0, 4.0]).unwrap(), 3.0);
    // At 100% factors are powers of two: 8/2 + 8/4 + 8/8.
    let curve = flat(1.0);
    assert_eq!(present_value(&curve, &[1.0, 2.0, 3.0], &[8.0; 3]).unwrap(), 7.0);
    assert_eq!(present_value(&curve, &[0.5, -1.0], &[2f64.sqrt(), 1.0]).unwrap(), 3.0);
    assert_eq!(present_values(&[1.0, 0.5], &[3.0, -3.0]).unwrap(), [3.0, -1.5]);
    assert_eq!(net_present_value(&[1.0, 0.5], &[0.0, 9.0], &[4.0, 0.5]).unwrap(), 0.25);
}

#[test]
fn nothing_is_worth_nothing() {
    assert_eq!(undiscounted_total(&[]).unwrap(), 0.0);
    assert_eq!(present_value(&flat(0.03), &[], &[]).unwrap(), 0.0);
    assert_eq!(present_values(&[], &[]).unwrap(), []);
    assert_eq!(net_present_value(&[], &[], &[]).unwrap(), 0.0);
    assert_eq!(incremental_ratios(&[]).unwrap(), []);
    assert_eq!(discounted_payback(&[], &[]).unwrap(), Default::default());
}

proptest! {
    #![proptest_config(crate::repeatable())]

    #[test]
    fn the_order_of_flows_does_not_matter(
        stream in prop::collection::vec((0.0f64..300.0, -1e12f64..1e12), 0..60),
        turn in 0usize..60,
    ) {
        let curve = flat(0.035);
        let of = |stream: &[(f64, f64)]| {
            let (offsets, flows): (Vec<f64>, Vec<f64>) = stream.iter().copied().unzip();
            let factors: Vec<f64> = offsets.iter().map(|&t| curve.factor(t).unwrap()).collect();
            let payback = discounted_payback(&offsets, &present_values(&factors, &flows).unwrap()).unwrap();
            let pv = present_value(&curve, &offsets, &flows).unwrap();
            (undiscounted_total(&flows).unwrap(), pv, payback, mean_time(&offsets, &flows).ok())
        };
        let mut other = stream.clone();
        other.rotate_left(turn % stream.len().max(1));
        other.reverse();
        prop_assert_eq!(of(&stream), of(&other));
    }

    #[test]
    fn value_is_linear_in_the_flows(
        flows in prop::collection::vec((-1e6f64..1e6, -1e6f64..1e6), 1..50), factor in -8.0f64..8.0,
    ) {
        let curve = flat(0.05);
        let offsets: Vec<f64> = (0..flows.len()).map(|t| t as f64).collect();
        let pv = |flows: Vec<f64>| present_value(&curve, &offsets, &flows).unwrap();
        let (a, b): (Vec<f64>, Vec<f64>) = flows.iter().copied().unzip();
        let both = pv(flows.iter().map(|(a, b)| a * factor + b).collect());
        prop_assert!((both - (pv(a) * factor + pv(b))).abs() < 1e-7);
    }

    #[test]
    fn eras_share_out_the_whole(
        stream in prop::collection::vec((-5.0f64..300.0, -1e6f64..1e6), 1..40),
        edges in prop::collection::btree_set(1u32..250, 0..5),
    ) {
        let (offsets, values): (Vec<f64>, Vec<f64>) = stream.iter().copied().unzip();
        let eras = Eras(edges.iter().map(|&edge| f64::from(edge)).collect());
        let shares = era_shares(&offsets, &values, &eras).unwrap();
        prop_assert_eq!(shares.len(), edges.len() + 1);
        prop_assert!((shares.iter().sum::<f64>() - 1.0).abs() < 1e-14);
    }
}

#[test]
fn ratios_need_something_below_the_line() {
    assert_eq!(benefit_cost_ratio(-3.0, 2.0).unwrap(), -1.5);
    assert_eq!(npv_per_budget(1.0, 4.0).unwrap(), 0.25);
    assert_eq!(cost_per_effect(10.0, 4.0).unwrap(), 2.5);
    for below in [0.0, -0.0, -1.0] {
        assert_eq!(benefit_cost_ratio(1.0, below).unwrap_err().kind(), ErrorKind::NoMeaning);
        assert_eq!(npv_per_budget(1.0, below).unwrap_err().argument(), "pv_budget");
        assert_eq!(cost_per_effect(1.0, below).unwrap_err().argument(), "effect");
    }
    assert_eq!(benefit_cost_ratio(f64::NAN, 1.0).unwrap_err().kind(), ErrorKind::NotFinite);
    assert_eq!(benefit_cost_ratio(1e300, 1e-300).unwrap_err().kind(), ErrorKind::NotFinite);
}

#[test]
fn the_annual_equivalent_has_the_same_present_value() {
    // 100% a year: 1/2 + 1/4 + 1/8.
    assert_eq!(annual_equivalent(&flat(1.0), 7.0, 3).unwrap(), (8.0, 0.875));
    assert_eq!(annual_equivalent(&flat(0.0), 7.0, 14).unwrap(), (0.5, 14.0));
    let curve = flat(0.035);
    let (annual, annuity) = annual_equivalent(&curve, -1e6, 60).unwrap();
    close(annuity, -(-60.0 * 0.035f64.ln_1p()).exp_m1() / 0.035);
    let offsets: Vec<f64> = (1..=60).map(f64::from).collect();
    close(present_value(&curve, &offsets, &[annual; 60]).unwrap(), -1e6);
    for years in [0, 100_001] {
        assert_eq!(annual_equivalent(&curve, 1.0, years).unwrap_err().kind(), ErrorKind::NoMeaning);
    }
    assert!(annual_equivalent(&curve, 1.0, 100_000).is_ok());
}

#[test]
fn payback_by_hand() {
    let payback = |pv: &[f64]| {
        let offsets: Vec<f64> = (0..pv.len()).map(|t| t as f64).collect();
        let back = discounted_payback(&offsets, pv).unwrap();
        (back.first, back.last)
    };
    assert_eq!(payback(&[-100.0, 50.0, 50.0]), (Some(2.0), Some(2.0)));
    assert_eq!(payback(&[-100.0, 60.0, 80.0]), (Some(1.5), Some(1.5)));
    assert_eq!(payback(&[-100.0, 60.0]), (None, None));
    // Cumulated: -100, 20, -80, 20; then with a last cost, -30.
    assert_eq!(payback(&[-100.0, 120.0, -100.0, 100.0]), (Some(1.0 - 20.0 / 120.0), Some(2.8)));
    assert_eq!(payback(&[-100.0, 120.0, -100.0, 100.0, -50.0]), (Some(1.0 - 20.0 / 120.0), None));
    // Benefits before the outlay: below zero only from year 1 to 2.
    assert_eq!(payback(&[50.0, -100.0, 100.0]), (Some(1.5), Some(1.5)));
    assert_eq!(payback(&[50.0, -100.0, 10.0]), (None, None));
    // Never below zero.
    assert_eq!(payback(&[0.0, 0.0, 3.0]), (Some(0.0), Some(0.0)));
    // Touching zero pays back.
    assert_eq!(payback(&[-1.0, 1.0, -1.0, 1.0]), (Some(1.0), Some(3.0)));
    assert_eq!(payback(&[-1.0, 1.0, 0.0]), (Some(1.0), Some(1.0)));
}

#[test]
fn payback_counts_in_offsets_and_joins_flows_of_one_moment() {
    let back = discounted_payback(&[10.0, 0.5, 0.5, 5.5], &[80.0, -150.0, 50.0, 60.0]).unwrap();
    assert_eq!(back.first, Some(5.5 + 4.5 * 40.0 / 80.0));
}

#[test]
fn mean_time_and_eras_by_hand() {
    assert_eq!(mean_time(&[0.0, 40.0], &[3.0, -1.0]).unwrap(), 10.0);
    // The edge year belongs to the earlier era; what lies before the base to the first.
    let shares = era_shares(&[-1.0, 30.0, 30.5, 100.0, 101.0], &[1.0, -1.0, 2.0, 2.0, 2.0], &Eras::default());
    assert_eq!(shares.unwrap(), [0.25, 0.5, 0.25]);
    assert_eq!(era_shares(&[3.0], &[-2.0], &Eras(vec![])).unwrap(), [1.0]);
    let error = mean_time(&[0.0, 1.0], &[0.0, 0.0]).unwrap_err();
    assert_eq!((error.kind(), error.argument()), (ErrorKind::NoMeaning, "gross_pv"));
    let error = era_shares(&[0.0], &[1.0], &Eras(vec![30.0, 30.0])).unwrap_err();
    assert_eq!((error.kind(), error.index()), (ErrorKind::Edges, Some(1)));
}

#[test]
fn increments_follow_the_cost() {
    let steps =
        incremental_ratios(&[(300.0, 420.0), (100.0, 200.0), (300.0, 400.0), (200.0, 260.0)]).unwrap();
    let order: Vec<(usize, usize)> = steps.iter().map(|step| (step.from, step.to)).collect();
    assert_eq!(order, [(1, 3), (3, 2), (2, 0)]);
    assert_eq!(steps[0].ratio, Some(0.6));
    assert_eq!(steps[1].ratio, Some(1.4));
    assert_eq!((steps[2].cost, steps[2].benefit, steps[2].ratio), (0.0, 20.0, None));
    let error = incremental_ratios(&[(1.0, 1.0), (1.0, f64::NAN)]).unwrap_err();
    assert_eq!((error.kind(), error.index()), (ErrorKind::NotFinite, Some(1)));
}

#[test]
fn every_array_is_checked() {
    let curve = flat(0.03);
    let (nan, short, two) = ([1.0, f64::NAN], [1.0], [1.0, 2.0]);
    let pv = |a: &[f64], b: &[f64]| present_value(&curve, a, b).map(|_| ());
    let pvs = |a: &[f64], b: &[f64]| present_values(a, b).map(|_| ());
    let payback = |a: &[f64], b: &[f64]| discounted_payback(a, b).map(|_| ());
    let mean = |a: &[f64], b: &[f64]| mean_time(a, b).map(|_| ());
    let eras = |a: &[f64], b: &[f64]| era_shares(a, b, &Eras::default()).map(|_| ());
    let benefits = |a: &[f64], b: &[f64]| net_present_value(a, b, &two).map(|_| ());
    let costs = |a: &[f64], b: &[f64]| net_present_value(a, &two, b).map(|_| ());
    type Two<'a> = (&'a dyn Fn(&[f64], &[f64]) -> hence_core::Result<()>, &'a str, &'a str);
    let functions: [Two; 7] = [
        (&pv, "offsets", "flows"),
        (&pvs, "factors", "flows"),
        (&payback, "offsets", "pv_by_year"),
        (&mean, "offsets", "gross_pv"),
        (&eras, "offsets", "gross_pv"),
        (&benefits, "factors", "benefits"),
        (&costs, "factors", "costs"),
    ];
    for (function, first, second) in functions {
        let refused = |a: &[f64], b: &[f64]| {
            let error = function(a, b).unwrap_err();
            (error.kind(), error.argument(), error.index())
        };
        assert!(function(&two, &two).is_ok());
        assert_eq!(refused(&two, &short), (ErrorKind::Shape, second, None));
        assert_eq!(refused(&nan, &two), (ErrorKind::NotFinite, first, Some(1)));
        assert_eq!(refused(&two, &nan), (ErrorKind::NotFinite, second, Some(1)));
    }
    let error = undiscounted_total(&[0.0, 0.0, f64::INFINITY]).unwrap_err();
    assert_eq!((error.kind(), error.argument(), error.index()), (ErrorKind::NotFinite, "flows", Some(2)));
    assert_eq!(undiscounted_total(&[1e308, 1e308]).unwrap_err().kind(), ErrorKind::NotFinite);
}
