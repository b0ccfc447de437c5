//! Internal rates of return. Flows are made from rates chosen beforehand: the product over rates of
//! (x (1 + r) - 1), x = 1/(1 + r'), has exactly those rates.

use hence_core::{ErrorKind, IRR_INTERVAL, IrrSearch, internal_rates};
use proptest::prelude::*;

fn years(count: usize) -> Vec<f64> {
    (0..count).map(|t| t as f64).collect()
}

fn search(flows: &[f64]) -> IrrSearch {
    internal_rates(&years(flows.len()), flows, IRR_INTERVAL).unwrap()
}

/// Yearly flows whose rates of return are these.
fn flows_of(rates: &[f64]) -> Vec<f64> {
    let mut flows = vec![1.0];
    for rate in rates {
        let mut next = vec![0.0; flows.len() + 1];
        for (t, flow) in flows.iter().enumerate() {
            next[t] -= flow;
            next[t + 1] += flow * (1.0 + rate);
        }
        flows = next;
    }
    flows
}

fn assert_rates(found: &IrrSearch, due: &[f64], tolerance: f64) {
    assert_eq!(found.rates.len(), due.len(), "{found:?}, due {due:?}");
    assert!(found.unresolved.is_empty(), "{found:?}");
    for (rate, due) in found.rates.iter().zip(due) {
        assert!((rate - due).abs() <= tolerance, "{found:?}, due {due:?}");
    }
}

#[test]
fn one_rate_to_the_last_digits() {
    assert_rates(&search(&[-100.0, 107.0]), &[0.07], 2.3e-16);
    assert_rates(&search(&[-100.0, 0.0, 121.0]), &[0.1], 2.3e-16);
    assert_rates(&search(&[-100.0, 100.0]), &[0.0], 0.0);
    assert_rates(&search(&[-1e12, 1e12 + 1e-3]), &[9.765_625e-16], 1e-24);
    // A saving account in reverse has the same rate.
    assert_rates(&search(&[100.0, -107.0]), &[0.07], 2.3e-16);
    // 200 years at 3% and the capital back; 1e9 in units.
    let mut flows = vec![3e7; 201];
    flows[0] = -1e9;
    flows[200] += 1e9;
    assert_rates(&search(&flows), &[0.03], 1e-15);
}

#[test]
fn several_rates() {
    assert_rates(&search(&flows_of(&[0.1, 0.2])), &[0.1, 0.2], 1e-14);
    assert_rates(&search(&flows_of(&[-0.2, 0.05, 0.4])), &[-0.2, 0.05, 0.4], 1e-14);
    let five = [-0.3, 0.0, 0.1, 0.3, 0.8];
    assert_rates(&search(&flows_of(&five)), &five, 1e-12);
}

#[test]
fn rates_that_lie_close_together_are_told_apart() {
    assert_rates(&search(&flows_of(&[0.1, 0.100_001])), &[0.1, 0.100_001], 1e-9);
    assert_rates(&search(&flows_of(&[0.03, 0.0301, 0.4])), &[0.03, 0.0301, 0.4], 1e-10);
    let three = [0.05, 0.051, 0.052];
    assert_rates(&search(&flows_of(&three)), &three, 1e-9);
}

#[test]
fn a_rate_that_is_only_touched_is_reported_as_unresolved() {
    // (11 x - 10)^2: the value touches zero at 10% and is positive on both sides.
    let found = search(&[100.0, -220.0, 121.0]);
    assert_eq!(found.rates, []);
    assert_eq!(found.unresolved.len(), 1, "{found:?}");
    let (low, high) = found.unresolved[0];
    assert!(low < 0.1 && 0.1 < high && high - low < 1e-12, "{found:?}");
}

#[test]
fn a_rate_that_is_nearly_touched_is_settled() {
    // 121 - 1e-12 in place of 121: rates apart by some 2e-7; 121 + 1e-12: none.
    let found = search(&[100.0, -220.0, 121.0 - 1e-12]);
    assert_eq!(found.rates.len(), 2, "{found:?}");
    let apart = found.rates[1] - found.rates[0];
    // 100 q^2 - 220 q + c = 0 has roots apart by sqrt(220^2 - 400 c)/100; c is 121 less 70 units of 2^-46.
    assert!((apart - (400.0 * 70.0 * 2f64.powi(-46)).sqrt() / 100.0).abs() < 1e-15, "{apart}");
    assert_rates(&search(&[100.0, -220.0, 121.0 + 1e-12]), &[], 0.0);
}

#[test]
fn a_triple_rate_is_unresolved_and_other_rates_are_still_found() {
    // (5 x - 4)^3 (9 x - 10), whole numbers.
    let found = search(&[640.0, -2976.0, 5160.0, -3950.0, 1125.0]);
    assert_eq!(found.rates.len(), 1, "{found:?}");
    assert!((found.rates[0] + 0.1).abs() < 1e-16);
    assert_eq!(found.unresolved.len(), 1, "{found:?}");
    let (low, high) = found.unresolved[0];
    assert!(low < 0.25 && 0.25 < high && high - low < 1e-7, "{found:?}");
}

#[test]
fn no_rate() {
    assert_rates(&search(&[-100.0, -7.0]), &[], 0.0);
    assert_rates(&search(&[0.0, 100.0, 0.0]), &[], 0.0);
    // 1 - 2 x + 1.5 x^2 has no real root.
    assert_rates(&search(&[1.0, -2.0, 1.5]), &[], 0.0);
    // 150% lies above the interval, -60% below it.
    assert_rates(&search(&[-100.0, 250.0]), &[], 0.0);
    assert_rates(&search(&[-100.0, 40.0]), &[], 0.0);
    assert_rates(&internal_rates(&years(2), &[-100.0, 250.0], (-0.9, 5.0)).unwrap(), &[1.5], 1e-15);
}

#[test]
fn the_ends_of_the_interval_belong_to_it() {
    assert_rates(&search(&[-100.0, 200.0]), &[1.0], 0.0);
    assert_rates(&search(&[-100.0, 50.0]), &[-0.5], 0.0);
    let at = |interval| internal_rates(&years(3), &flows_of(&[0.1, 0.3]), interval).unwrap();
    assert_rates(&at((0.1, 0.2)), &[0.1], 1e-15);
    assert_rates(&at((0.2, 0.3)), &[0.3], 1e-15);
    assert_rates(&at((0.11, 0.29)), &[], 0.0);
}

#[test]
fn long_streams() {
    // Mine: outlay, 40 years of income, 460 years of aftercare. From the closed form of both annuities the value is
    // -100 + 9 (1 - v^40)/r - 0.1 (v^40 - v^500)/r, v = 1/(1+r); every root of it is looked for on a fine grid.
    let mut flows = vec![-100.0];
    flows.extend(vec![9.0; 40]);
    flows.extend(vec![-0.1; 460]);
    let value = |r: f64| {
        let v = |n: f64| (-n * r.ln_1p()).exp_m1();
        -100.0 - 9.0 * v(40.0) / r - 0.1 * (v(40.0) - v(500.0)) / r
    };
    let found = search(&flows);
    let grid: Vec<f64> = (0..60_000).map(|k| -0.499_99 + f64::from(k) * 2.5e-5 + 1e-7).collect();
    let crossings: Vec<f64> = grid
        .windows(2)
        .filter(|pair| (value(pair[0]) > 0.0) != (value(pair[1]) > 0.0))
        .map(|pair| pair[0])
        .collect();
    assert_rates(&found, &crossings, 2.6e-5);
    assert_eq!(found.rates.len(), 2);
    for rate in found.rates {
        assert!(value(rate).abs() < 1e-9, "{rate} {}", value(rate));
    }
}

#[test]
fn scale_does_not_matter() {
    let flows = flows_of(&[0.02, 0.3]);
    for scale in [1e-300, 1e-9, 1e9, 1e300] {
        let scaled: Vec<f64> = flows.iter().map(|flow| flow * scale).collect();
        assert_rates(&search(&scaled), &[0.02, 0.3], 1e-13);
    }
}

#[test]
fn offsets_need_not_be_whole() {
    // sqrt(1+r) = 1.05.
    let found = internal_rates(&[0.0, 0.5], &[-100.0, 105.0], IRR_INTERVAL).unwrap();
    assert_rates(&found, &[0.1025], 1e-15);
    // With y = (1+r)^-0.37: (1.1^0.37 y - 1)(1.4^0.37 y - 1).
    let (a, b) = (1.1f64.powf(0.37), 1.4f64.powf(0.37));
    let found = internal_rates(&[0.0, 0.37, 0.74], &[1.0, -(a + b), a * b], IRR_INTERVAL).unwrap();
    assert_rates(&found, &[0.1, 0.4], 1e-13);
    // A common shift of all offsets changes no rate.
    let found = internal_rates(&[-3.2, -2.83, -2.46], &[1.0, -(a + b), a * b], IRR_INTERVAL).unwrap();
    assert_rates(&found, &[0.1, 0.4], 1e-13);
}

#[test]
fn the_order_of_flows_and_split_flows_do_not_matter() {
    let found = search(&[-350.0, 950.0, -620.0]);
    let mixed = internal_rates(
        &[2.0, 1.0, 0.0, 1.0, 0.0, 5.0],
        &[-620.0, 900.0, -300.0, 50.0, -50.0, 0.0],
        IRR_INTERVAL,
    );
    assert_eq!(mixed.unwrap(), found);
}

#[test]
fn what_cannot_be_searched_is_refused() {
    let refused = |offsets: &[f64], flows: &[f64], interval| {
        let error = internal_rates(offsets, flows, interval).unwrap_err();
        (error.kind(), error.argument(), error.index())
    };
    let whole = IRR_INTERVAL;
    assert_eq!(refused(&[], &[], whole), (ErrorKind::NoMeaning, "flows", None));
    assert_eq!(refused(&[0.0, 0.0], &[1.0, -1.0], whole), (ErrorKind::NoMeaning, "flows", None));
    assert_eq!(refused(&[0.0], &[1.0, 2.0], whole), (ErrorKind::Shape, "flows", None));
    assert_eq!(refused(&[0.0, f64::NAN], &[1.0, 2.0], whole), (ErrorKind::NotFinite, "offsets", Some(1)));
    assert_eq!(refused(&[0.0, 1.0], &[1.0, f64::INFINITY], whole), (ErrorKind::NotFinite, "flows", Some(1)));
    for interval in [(-1.0, 1.0), (0.5, 0.5), (1.0, 0.0)] {
        assert_eq!(refused(&[0.0, 1.0], &[1.0, -2.0], interval), (ErrorKind::RateRange, "interval", None));
    }
    let nan = (f64::NAN, 1.0);
    assert_eq!(refused(&[0.0, 1.0], &[1.0, -2.0], nan), (ErrorKind::NotFinite, "interval", Some(0)));
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 64, ..crate::repeatable() })]

    #[test]
    fn chosen_rates_are_found(places in prop::collection::btree_set(0u32..28, 1..5)) {
        // Rates at least 5 points apart, from -45% to 90%.
        let rates: Vec<f64> = places.iter().map(|place| -0.45 + 0.05 * f64::from(*place)).collect();
        assert_rates(&search(&flows_of(&rates)), &rates, 1e-9);
    }

    #[test]
    fn no_change_of_sign_is_missed(flows in prop::collection::vec(-100.0f64..100.0, 2..40)) {
        let found = search(&flows);
        let value = |r: f64| flows.iter().enumerate().map(|(t, flow)| flow * (1.0 + r).powf(-(t as f64))).sum::<f64>();
        let grid: Vec<f64> = (0..=3000).map(|k| -0.5 + f64::from(k) * 5e-4).collect();
        for pair in grid.windows(2) {
            let (a, b) = (value(pair[0]), value(pair[1]));
            let inside = found.rates.iter().filter(|&&rate| rate > pair[0] && rate < pair[1]).count();
            let unclear = found.unresolved.iter().any(|piece| piece.0 <= pair[1] && piece.1 >= pair[0]);
            prop_assert!(unclear || (inside % 2 == 1) == ((a > 0.0) != (b > 0.0)), "{:?} {:?}", pair, found);
        }
    }
}
