//! Welfare by hand, at its limits, and against definitions written out to 240 bits.

use crate::exact::{Big, Worst, big};
use hence_core::Compounding::{self, Continuous, Yearly};
use hence_core::{
    ErrorKind, compensating_variation, compensation, compensation_rate, equally_distributed_equivalent,
    equity_weight, equivalent_variation, marginal_utility, ramsey_rate, ramsey_rate_exact, utility, welfare,
    welfare_factors,
};
use proptest::prelude::*;

const ELASTICITIES: [f64; 13] = [
    0.0,
    1e-9,
    0.5,
    0.999_999,
    1.0 - f64::EPSILON / 2.0,
    1.0,
    1.0 + f64::EPSILON,
    1.000_001,
    1.35,
    1.5,
    2.0,
    4.0,
    20.0,
];
const CONSUMPTIONS: [f64; 9] =
    [1e-3, 0.1, 0.999_999_999, 1.0, 1.000_000_001, 1.5, 417.25, 26_000.0, 2_471_000_000_000.0];

fn close(found: f64, due: f64, tolerance: f64) {
    assert!((found - due).abs() <= tolerance, "found {found}, due {due}");
}

// ---- definitions, to 240 bits -------------------------------------------------------------------------------------

fn power(base: &Big, exponent: &Big) -> Big {
    if *base == big(1.0) { big(1.0) } else { (base.ln() * exponent).exp() }
}

/// U(c) of a consumption that may itself be no double.
fn exact_utility(c: &Big, elasticity: f64) -> Big {
    let k = big(1.0) - big(elasticity);
    if elasticity == 1.0 {
        if *c == big(1.0) { big(0.0) } else { c.ln() }
    } else {
        (power(c, &k) - big(1.0)) / k
    }
}

/// The c of that utility.
fn exact_inverse(level: &Big, elasticity: f64) -> Big {
    let k = big(1.0) - big(elasticity);
    if elasticity == 1.0 { level.exp() } else { power(&(big(1.0) + level * &k), &(big(1.0) / k)) }
}

fn exact_factor(rho: f64, years: f64, compounding: Compounding) -> Big {
    match compounding {
        Yearly => crate::exact::yearly(&big(rho), &big(years)),
        Continuous => crate::exact::continuous(&big(rho), &big(years)),
    }
}

#[test]
fn utility_and_its_slope_to_the_last_place() {
    let (mut level, mut slope) = (Worst::new("utility", 1.0), Worst::new("marginal utility", 1.0));
    for elasticity in ELASTICITIES {
        for c in CONSUMPTIONS {
            level.compare(utility(c, elasticity).unwrap(), &exact_utility(&big(c), elasticity), || {
                format!("{c} at {elasticity}")
            });
            let exact = power(&big(c), &big(-elasticity));
            slope
                .compare(marginal_utility(c, elasticity).unwrap(), &exact, || format!("{c} at {elasticity}"));
        }
    }
    level.report(100);
    slope.report(100);
}

#[test]
fn welfare_of_a_path_to_the_last_place() {
    let mut worst = Worst::new("welfare", 1.0);
    let offsets: Vec<f64> = (0..300).map(|t| f64::from(t) + 0.5).collect();
    for elasticity in ELASTICITIES {
        for (rho, g) in [(0.0, 0.02), (0.015, 0.02), (0.03, -0.01), (-0.002, 0.0)] {
            let path: Vec<f64> = offsets.iter().map(|t| 26.0 * (1.0f64 + g).powf(*t)).collect();
            for compounding in [Yearly, Continuous] {
                let exact = path.iter().zip(&offsets).fold(big(0.0), |sum, (c, t)| {
                    sum + exact_utility(&big(*c), elasticity) * exact_factor(rho, *t, compounding)
                });
                let found = welfare(&path, &offsets, rho, elasticity, compounding).unwrap();
                worst.compare(found, &exact, || {
                    format!("eta {elasticity}, rho {rho}, g {g}, {compounding:?}")
                });
            }
        }
    }
    worst.report(100);
}

#[test]
fn factors_of_a_path_to_the_last_place() {
    let mut worst = Worst::new("factors of a path", 1.0);
    for elasticity in ELASTICITIES {
        for (c, t) in
            [(26_000.0, 0.0), (26_520.0, 1.0), (70_000.5, 50.25), (19_000.0, 300.0), (30_000.0, -1.5)]
        {
            for compounding in [Yearly, Continuous] {
                let exact =
                    power(&(big(26_000.0) / big(c)), &big(elasticity)) * exact_factor(0.013, t, compounding);
                let found = welfare_factors(&[c], &[t], 26_000.0, 0.013, elasticity, compounding).unwrap();
                worst.compare(found[0], &exact, || format!("{c} at {t}, eta {elasticity}, {compounding:?}"));
            }
        }
    }
    worst.report(100);
}

#[test]
fn compensations_to_the_last_place() {
    let mut worst = Worst::new("compensation", 2.0);
    for elasticity in ELASTICITIES {
        for amount in [-5.0, -1e-7, 1e-12, 1e-3, 1.0, 20.0] {
            for (then, years) in [(100.0, 1.0), (180.0, 30.0), (70.0, 10.5), (700.0, 100.0)] {
                for compounding in [Yearly, Continuous] {
                    let found = compensation(amount, 100.0, then, years, 0.013, elasticity, compounding);
                    let Ok(found) = found else { continue };
                    let lost = exact_utility(&big(100.0), elasticity)
                        - exact_utility(&(big(100.0) - big(amount)), elasticity);
                    let level = exact_utility(&big(then), elasticity)
                        + lost / exact_factor(0.013, years, compounding);
                    let exact = exact_inverse(&level, elasticity) - big(then);
                    worst.compare(found, &exact, || {
                        format!("{amount} against {then} in {years} years, eta {elasticity}, {compounding:?}")
                    });
                }
            }
        }
    }
    worst.report(450);
}

#[test]
fn variations_to_the_last_place() {
    let (mut equivalent, mut compensating) =
        (Worst::new("equivalent variation", 2.0), Worst::new("compensating variation", 2.0));
    let consumption: Vec<f64> = (0..60).map(|t| 100.0 * 1.015f64.powi(t)).collect();
    let factors: Vec<f64> = (0..60).map(|t| 1.03f64.powi(-t)).collect();
    for elasticity in ELASTICITIES {
        for size in [-15.0, -1e-8, 1e-3, 0.4, 2.0] {
            let flows: Vec<f64> = (0..60).map(|t| size * (1.0 + f64::from(t % 7)) / 7.0).collect();
            let gain = flows.iter().zip(&consumption).zip(&factors).fold(big(0.0), |sum, ((x, c), d)| {
                let (x, c) = (big(*x), big(*c));
                let slope = power(&(c.clone() / big(100.0)), &big(elasticity));
                let utilities = exact_utility(&(c.clone() + x), elasticity) - exact_utility(&c, elasticity);
                sum + big(*d) * slope * utilities
            });
            let level = |c: f64| exact_utility(&big(c), elasticity);
            let of = || format!("{size} at eta {elasticity}");
            if let Ok(found) = equivalent_variation(&flows, &consumption, &factors, 100.0, elasticity) {
                let exact = exact_inverse(&(level(100.0) + &gain), elasticity) - big(100.0);
                equivalent.compare(found, &exact, of);
            }
            if let Ok(found) =
                compensating_variation(&flows, &consumption, &factors, 100.0, flows[0], elasticity)
            {
                let with = big(100.0) + big(flows[0]);
                let exact =
                    with.clone() - exact_inverse(&(exact_utility(&with, elasticity) - &gain), elasticity);
                compensating.compare(found, &exact, of);
            }
        }
    }
    equivalent.report(55);
    compensating.report(55);
}

#[test]
fn equivalents_of_groups_to_the_last_place() {
    let mut worst = Worst::new("equally-distributed equivalent", 2.0);
    let distributions: [(&[f64], &[f64]); 4] = [
        (&[8_000.0, 15_000.0, 23_000.0, 33_000.0, 68_000.0], &[0.2; 5]),
        (&[1.0, 1e6], &[1e-6, 1.0 - 1e-6]),
        (&[26_000.0], &[1.0]),
        (&[500.0, 501.0, 500.5], &[0.25, 0.25, 0.5]),
    ];
    for elasticity in ELASTICITIES {
        for (consumption, shares) in distributions {
            let all = shares.iter().fold(big(0.0), |sum, share| sum + big(*share));
            let k = big(1.0) - big(elasticity);
            let mean = |of: &dyn Fn(Big) -> Big| {
                let groups = consumption.iter().zip(shares);
                groups.fold(big(0.0), |sum, (c, share)| sum + big(*share) * of(big(*c))) / &all
            };
            let exact = if elasticity == 1.0 {
                mean(&|c| c.ln()).exp()
            } else {
                power(&mean(&|c| power(&c, &k)), &(big(1.0) / &k))
            };
            let found = equally_distributed_equivalent(consumption, shares, elasticity).unwrap();
            worst.compare(found, &exact, || format!("{consumption:?} at {elasticity}"));
        }
    }
    worst.report(50);
}

// ---- by hand ------------------------------------------------------------------------------------------------------

#[test]
fn utility_by_hand() {
    assert_eq!(utility(9.0, 0.5).unwrap(), 4.0); // (3 - 1)/0.5
    assert_eq!(utility(2.0, 3.0).unwrap(), 0.375); // (1/4 - 1)/(-2)
    assert_eq!(utility(7.0, 0.0).unwrap(), 6.0);
    for elasticity in ELASTICITIES {
        assert_eq!(utility(1.0, elasticity).unwrap(), 0.0);
        assert_eq!(marginal_utility(1.0, elasticity).unwrap(), 1.0);
    }
    assert_eq!(marginal_utility(9.0, 0.5).unwrap(), 1.0 / 3.0);
}

#[test]
fn utility_runs_through_an_elasticity_of_1_without_a_step() {
    // dU/deta at 1 is -(ln c)^2/2; the next doubles of the elasticity differ by about 2e-16.
    for c in [0.01, 2.0, 26_000.0] {
        let at = |elasticity: f64| utility(c, elasticity).unwrap();
        let step = c.ln().powi(2) / 2.0;
        for width in [1e-15, 1e-12, 1e-9, 1e-6] {
            close(
                at(1.0 - width),
                at(1.0) + step * width,
                3.0 * f64::EPSILON * at(1.0).abs() + width * width * 1e4,
            );
            close(
                at(1.0 + width),
                at(1.0) - step * width,
                3.0 * f64::EPSILON * at(1.0).abs() + width * width * 1e4,
            );
        }
    }
}

/// A weight by income is the ratio of two marginal utilities.
#[test]
fn equity_weights_are_ratios_of_slopes() {
    for elasticity in [0.5, 1.0, 1.3, 2.0] {
        let ratio =
            marginal_utility(20_000.0, elasticity).unwrap() / marginal_utility(30_000.0, elasticity).unwrap();
        let weight = equity_weight(20_000.0, 30_000.0, elasticity).unwrap();
        close(ratio, weight, 4.0 * f64::EPSILON * weight);
    }
}

#[test]
fn the_neutral_rate_of_a_small_shift_is_the_ramsey_rate() {
    for (rho, eta, g) in
        [(0.015, 1.0, 0.02), (0.0, 2.0, 0.013), (0.011, 1.35, -0.01), (0.03, 0.0, 0.02), (0.005, 4.0, 0.0)]
    {
        for years in [1.0, 10.0, 75.0, -5.0] {
            let then = 26_000.0 * (1.0f64 + g).powf(years);
            let rate =
                |amount: f64| compensation_rate(amount, 26_000.0, then, years, rho, eta, Yearly).unwrap();
            let limit = ramsey_rate_exact(rho, eta, g).unwrap();
            close(rate(0.0), limit, 3e-16 * (1.0 + 26.0 / years.abs()));
            // The distance shrinks in proportion to the amount, whatever its sign.
            for amount in [1.0, 1e-3, 1e-6, -1e-3] {
                close(
                    rate(amount),
                    limit,
                    (4.0 * amount.abs() / 26_000.0 + 2e-15) * (1.0 + eta) / years.abs().min(1.0),
                );
            }
            let continuous = |amount: f64| {
                compensation_rate(amount, 26_000.0, 26_000.0 * (g * years).exp(), years, rho, eta, Continuous)
                    .unwrap()
            };
            let limit = ramsey_rate(rho, eta, g).unwrap();
            close(continuous(0.0), limit, 1e-15);
            close(continuous(1e-6), limit, 1e-9);
        }
    }
    assert_eq!(compensation_rate(f64::MIN_POSITIVE / 4.0, 1.0, 1.0, 1.0, 0.25, 2.0, Yearly).unwrap(), 0.25);
}

/// (1 + rho/n)(1 + g/n)^eta compounded n times a year comes to rho + eta g as n grows.
#[test]
fn the_exact_rule_comes_to_the_linear_one_in_short_periods() {
    let (rho, eta, g) = (0.015, 1.5, 0.02);
    let linear = ramsey_rate(rho, eta, g).unwrap();
    let by_parts = |n: f64| n * ramsey_rate_exact(rho / n, eta, g / n).unwrap();
    let distances: Vec<f64> = [1.0, 10.0, 100.0, 1e6].map(|n| (by_parts(n) - linear).abs()).to_vec();
    assert!(distances[0] > 5e-4 && distances[3] < 1e-9, "{distances:?}");
    for pair in distances[..3].windows(2) {
        close(pair[0] / pair[1], 10.0, 0.2);
    }
}

#[test]
fn exact_ramsey_rates_by_hand() {
    close(ramsey_rate_exact(0.02, 2.0, 0.01).unwrap(), 1.02 * 1.0201 - 1.0, 1e-16);
    assert_eq!(ramsey_rate_exact(0.0, 5.0, 0.0).unwrap(), 0.0);
    assert_eq!(ramsey_rate_exact(0.0, 1.0, -0.5).unwrap(), -0.5);
}

#[test]
fn shares_of_a_log_economy_by_hand() {
    // At an elasticity of 1 ratios count: losing half now asks for twice as much in a year, by 1 + rho twice over.
    let y = compensation(50.0, 100.0, 100.0, 1.0, 1.0, 1.0, Yearly).unwrap();
    close(y, 300.0, 1e-13); // 2^2 x 100 - 100
    assert_eq!(compensation(0.0, 100.0, 100.0, 1.0, 0.02, 1.0, Yearly).unwrap(), 0.0);
    // Doubling consumption for ever at an interest of 1/2: E/c_0 = 2^(sum of D) - 1, and sum of D over two years 1.5.
    let value = equivalent_variation(&[1.0, 1.0], &[1.0, 1.0], &[1.0, 0.5], 1.0, 1.0).unwrap();
    close(value, 2f64.powf(1.5) - 1.0, 1e-15);
    let value = compensating_variation(&[1.0, 1.0], &[1.0, 1.0], &[1.0, 0.5], 1.0, 1.0, 1.0).unwrap();
    close(value, 2.0 - 2.0 * 2f64.powf(-1.5), 1e-15);
    assert_eq!(equivalent_variation(&[], &[], &[], 1.0, 1.0).unwrap(), 0.0);
    assert_eq!(compensating_variation(&[], &[], &[], 1.0, 0.0, 1.0).unwrap().to_bits(), 0.0f64.to_bits());
}

/// The definition over again: welfare with the amount at the base and no project is welfare with the project.
#[test]
fn an_equivalent_amount_gives_the_welfare_of_the_project() {
    let offsets: Vec<f64> = (0..80).map(f64::from).collect();
    let path: Vec<f64> = offsets.iter().map(|t| 40.0 * 1.01f64.powf(*t)).collect();
    let flows: Vec<f64> = offsets.iter().map(|t| if *t < 5.0 { -6.0 } else { 4.0 - t / 20.0 }).collect();
    let with: Vec<f64> = path.iter().zip(&flows).map(|(c, x)| c + x).collect();
    for eta in [0.5, 1.0, 1.5, 3.0] {
        let of = |path: &[f64]| welfare(path, &offsets, 0.012, eta, Yearly).unwrap();
        let factors = welfare_factors(&path, &offsets, 40.0, 0.012, eta, Yearly).unwrap();
        let mut instead = path.clone();
        instead[0] += equivalent_variation(&flows, &path, &factors, 40.0, eta).unwrap();
        close(of(&instead), of(&with), 1e-13 * of(&path).abs());
        let mut taken = with.clone();
        taken[0] -= compensating_variation(&flows, &path, &factors, 40.0, flows[0], eta).unwrap();
        close(of(&taken), of(&path), 1e-13 * of(&path).abs());
    }
}

#[test]
fn what_has_no_meaning_is_refused_with_its_place() {
    let kind = |result: hence_core::Result<f64>| {
        let error = result.unwrap_err();
        (error.kind(), error.argument(), error.index())
    };
    assert_eq!(kind(utility(0.0, 1.0)), (ErrorKind::NoMeaning, "consumption", None));
    assert_eq!(kind(utility(1.0, 20.5)), (ErrorKind::RateRange, "elasticity", None));
    assert_eq!(kind(utility(f64::NAN, 1.0)), (ErrorKind::NotFinite, "consumption", None));
    assert_eq!(kind(utility(1e-300, 20.0)), (ErrorKind::NotFinite, "consumption", None));
    assert_eq!(kind(marginal_utility(1e-300, 20.0)), (ErrorKind::NotFinite, "consumption", None));
    assert_eq!(kind(welfare(&[1.0], &[], 0.0, 1.0, Yearly)), (ErrorKind::Shape, "offsets", None));
    assert_eq!(
        kind(welfare(&[1.0], &[f64::INFINITY], 0.0, 1.0, Yearly)),
        (ErrorKind::NotFinite, "offsets", Some(0))
    );
    assert_eq!(kind(welfare(&[1.0], &[1.0], -1.0, 1.0, Yearly)), (ErrorKind::RateRange, "rho", None));
    assert_eq!(welfare(&[1.0], &[1.0], -1.0, 1.0, Continuous).unwrap(), 0.0);
    assert_eq!(welfare(&[], &[], 0.0, 1.0, Yearly).unwrap(), 0.0);
    let variation =
        |flows: &[f64], factors: &[f64], eta| equivalent_variation(flows, &[4.0, 4.0], factors, 4.0, eta);
    assert_eq!(kind(variation(&[0.0, -4.0], &[1.0, 1.0], 1.0)), (ErrorKind::NoMeaning, "flows", Some(1)));
    assert_eq!(kind(variation(&[0.0, -5.0], &[1.0, 1.0], 0.0)), (ErrorKind::NoMeaning, "flows", Some(1)));
    assert_eq!(kind(variation(&[0.0, 1.0], &[1.0, -0.1], 1.0)), (ErrorKind::NoMeaning, "factors", Some(1)));
    assert_eq!(kind(variation(&[0.0], &[1.0, 1.0], 1.0)), (ErrorKind::Shape, "consumption", None));
    assert_eq!(kind(variation(&[0.0, 1.0], &[1.0], 1.0)), (ErrorKind::Shape, "factors", None));
    // 1 - 1/(1 + E/4) = 0.8 + 0.8 has no E.
    assert_eq!(kind(variation(&[16.0, 16.0], &[1.0, 1.0], 2.0)), (ErrorKind::NoMeaning, "flows", None));
    // Square root: all consumption at the base is worth 2; twice 3.9 of 4 gone is more.
    assert_eq!(kind(variation(&[-3.9, -3.9], &[1.0, 1.0], 0.5)), (ErrorKind::NoMeaning, "flows", None));
    let compensating = |x0, eta| compensating_variation(&[16.0], &[4.0], &[1.0], 4.0, x0, eta);
    assert_eq!(kind(compensating(-4.0, 2.0)), (ErrorKind::NoMeaning, "base_flow", None));
    assert_eq!(kind(compensating(0.0, 0.5)), (ErrorKind::NoMeaning, "flows", None));
    assert!(compensating(0.0, 2.0).unwrap() < 4.0);
    assert_eq!(
        kind(compensation(4.0, 4.0, 4.0, 1.0, 0.0, 1.0, Yearly)),
        (ErrorKind::NoMeaning, "amount", None)
    );
    assert_eq!(
        kind(compensation(1.0, 4.0, 0.0, 1.0, 0.0, 1.0, Yearly)),
        (ErrorKind::NoMeaning, "then", None)
    );
    assert_eq!(
        kind(compensation_rate(1.0, 4.0, 4.0, 0.0, 0.0, 1.0, Yearly)),
        (ErrorKind::NoMeaning, "years", None)
    );
    let groups = |c: &[f64], shares: &[f64]| equally_distributed_equivalent(c, shares, 1.0);
    assert_eq!(kind(groups(&[], &[])), (ErrorKind::Shape, "consumption", None));
    assert_eq!(kind(groups(&[1.0], &[0.5, 0.5])), (ErrorKind::Shape, "shares", None));
    assert_eq!(kind(groups(&[1.0, 0.0], &[0.5, 0.5])), (ErrorKind::NoMeaning, "consumption", Some(1)));
    assert_eq!(kind(groups(&[1.0, 2.0], &[1.5, -0.5])), (ErrorKind::Weights, "shares", Some(1)));
    assert_eq!(kind(groups(&[1.0, 2.0], &[50.0, 50.0])), (ErrorKind::Weights, "shares", None));
}

// ---- properties ---------------------------------------------------------------------------------------------------

fn elasticity() -> impl Strategy<Value = f64> {
    prop_oneof![Just(1.0), Just(1.0 + f64::EPSILON), 0.0..4.0f64]
}

proptest! {
    #![proptest_config(crate::repeatable())]

    #[test]
    fn utility_rises_and_bends_down(c in 0.01..10.0f64, ratio in 1.01..10.0f64, eta in 0.01..4.0f64) {
        let at = |c: f64| utility(c, eta).unwrap();
        prop_assert!(at(c * ratio) > at(c));
        let slope = (at(c * ratio) - at(c)) / (c * ratio - c);
        prop_assert!(slope <= marginal_utility(c, eta).unwrap() * (1.0 + 1e-9));
        prop_assert!(slope >= marginal_utility(c * ratio, eta).unwrap() * (1.0 - 1e-9));
    }

    #[test]
    fn shifting_there_and_back_changes_nothing(
        amount in -40.0..40.0f64, then in 60.0..200.0f64, years in 0.5..30.0f64, rho in -0.01..0.05f64, eta in elasticity()
    ) {
        if let Ok(y) = compensation(amount, 100.0, then, years, rho, eta, Yearly)
            && then + y > 1e-3
            && y < 1e6
        {
            // From the shifted state, giving y back is made good by the amount.
            let back = compensation(y, then + y, 100.0 - amount, -years, rho, eta, Yearly).unwrap();
            prop_assert!((back - amount).abs() <= 1e-9 * (1.0 + amount.abs()), "{back} {amount}");
        }
    }

    #[test]
    fn small_projects_are_worth_their_marginal_value(
        flows in prop::collection::vec(-1.0..1.0f64, 1..40), eta in elasticity(), size in -9..-5i32
    ) {
        let size = 10f64.powi(size);
        let flows: Vec<f64> = flows.iter().map(|x| x * size).collect();
        let offsets: Vec<f64> = (0..flows.len()).map(|t| t as f64).collect();
        let path: Vec<f64> = offsets.iter().map(|t| 10.0 + t).collect();
        let factors = welfare_factors(&path, &offsets, 10.0, 0.02, eta, Continuous).unwrap();
        let marginal = hence_core::dot(&flows, &factors);
        let gross: f64 = flows.iter().zip(&factors).map(|(x, d)| (x * d).abs()).sum();
        let found = [
            equivalent_variation(&flows, &path, &factors, 10.0, eta).unwrap(),
            compensating_variation(&flows, &path, &factors, 10.0, flows[0], eta).unwrap(),
        ];
        for value in found {
            // The next term of the series is at most eta x gross x the largest share of consumption.
            prop_assert!((value - marginal).abs() <= gross * (eta * (size + gross) + 1e-15), "{value} {marginal}");
        }
    }

    #[test]
    fn no_curvature_leaves_the_marginal_value(flows in prop::collection::vec(-5.0..50.0f64, 1..40)) {
        let ones = vec![10.0; flows.len()];
        let factors: Vec<f64> = (0..flows.len()).map(|t| 0.97f64.powi(t as i32)).collect();
        let marginal = hence_core::dot(&flows, &factors);
        prop_assume!(marginal > -10.0);
        let found = equivalent_variation(&flows, &ones, &factors, 10.0, 0.0).unwrap();
        prop_assert!((found - marginal).abs() <= 4e-15 * flows.iter().map(|x| x.abs()).sum::<f64>());
    }

    #[test]
    fn amounts_have_one_sign_and_compensating_is_the_smaller(
        flows in prop::collection::vec(-5.0..5.0f64, 2..30), eta in elasticity()
    ) {
        let path = vec![10.0; flows.len()];
        let factors: Vec<f64> = (0..flows.len()).map(|t| 0.97f64.powi(t as i32)).collect();
        let mut later = flows.clone();
        later[0] = 0.0;
        let e = equivalent_variation(&later, &path, &factors, 10.0, eta);
        let c = compensating_variation(&later, &path, &factors, 10.0, 0.0, eta);
        if let (Ok(e), Ok(c)) = (e, c) {
            prop_assert!(e * c >= 0.0 && c <= e + 1e-13 * e.abs(), "{e} {c}");
        }
    }

    #[test]
    fn the_unit_of_money_does_not_matter(
        flows in prop::collection::vec(-5.0..5.0f64, 2..30), eta in elasticity(), unit in -3..4i32
    ) {
        let path = vec![10.0; flows.len()];
        let factors: Vec<f64> = (0..flows.len()).map(|t| 0.97f64.powi(t as i32)).collect();
        let of = |unit: f64| {
            let scaled = |values: &[f64]| values.iter().map(|x| x * unit).collect::<Vec<_>>();
            equivalent_variation(&scaled(&flows), &scaled(&path), &factors, 10.0 * unit, eta).map(|e| e / unit)
        };
        // Powers of two scale without rounding.
        prop_assert_eq!(of(1.0), of(2f64.powi(unit)));
    }

    #[test]
    fn an_equivalent_lies_between_least_and_mean(
        groups in prop::collection::vec((1.0..1e5f64, 0.01..1.0f64), 1..8), eta in elasticity()
    ) {
        let all: f64 = hence_core::sum(&groups.iter().map(|g| g.1).collect::<Vec<_>>());
        let (c, shares): (Vec<f64>, Vec<f64>) = groups.iter().map(|(c, s)| (*c, s / all)).unzip();
        let mean = hence_core::dot(&c, &shares);
        let found = equally_distributed_equivalent(&c, &shares, eta).unwrap();
        let least = c.iter().copied().fold(f64::INFINITY, f64::min);
        prop_assert!(found >= least * (1.0 - 1e-14) && found <= mean * (1.0 + 1e-14), "{least} {found} {mean}");
        let more = equally_distributed_equivalent(&c, &shares, eta + 0.5).unwrap();
        prop_assert!(more <= found * (1.0 + 1e-14), "falls with the elasticity");
    }
}
