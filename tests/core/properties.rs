//! Properties that hold for every curve.

use hence_core::{
    Band, Compounding, Curve, Edge, ErrorKind, HorizonRule, Spec, Timing, Where, dot, present_value,
};
use proptest::prelude::*;

fn made(spec: &Spec) -> Curve {
    spec.curve(&Where { base_year: Some(2026), length: Some(40.0) }).expect("a valid curve")
}

fn ulps(a: f64, b: f64) -> u64 {
    a.to_bits().abs_diff(b.to_bits())
}

fn compounding() -> impl Strategy<Value = Compounding> {
    prop_oneof![Just(Compounding::Yearly), Just(Compounding::Continuous)]
}

/// Bands with edges 0.25 to 60 years apart, the last without end.
fn bands(values: std::ops::Range<f64>) -> impl Strategy<Value = Vec<Band>> {
    prop::collection::vec((values, 1..240u32), 1..7).prop_map(|steps| {
        let last = steps.len() - 1;
        let mut edge = 0.0;
        steps
            .iter()
            .enumerate()
            .map(|(k, &(value, quarters))| {
                edge += f64::from(quarters) / 4.0;
                Band { value, to: (k < last).then_some(Edge::Offset(edge)) }
            })
            .collect()
    })
}

fn simple() -> impl Strategy<Value = Spec> {
    prop_oneof![
        (-0.4..1.0f64, compounding()).prop_map(|(rate, compounding)| Spec::Flat { rate, compounding }),
        bands(-0.1..0.3).prop_map(|bands| Spec::Bands { bands, edges_from: None }),
        bands(0.0..0.3).prop_map(|bands| Spec::HorizonSteps { bands, rule: HorizonRule::ByFlow }),
        bands(0.0..0.3).prop_map(|bands| Spec::HorizonSteps { bands, rule: HorizonRule::ByLength }),
        Just(Spec::HorizonPoints { points: vec![(3.0, 0.039), (30.0, 0.042)], rule: HorizonRule::ByFlow }),
        (0.0..0.03f64, 0.0..3.0f64, bands(-0.03..0.05), compounding()).prop_map(
            |(preference, elasticity, growth, compounding)| Spec::Ramsey {
                preference,
                hazard: 0.01,
                elasticity,
                growth,
                exact: false,
                compounding
            }
        ),
        (1e-3..0.2f64, 0.0..0.1f64).prop_map(|(mean, sd)| Spec::Gamma { mean, sd }),
        Just(Spec::Table(vec![(-10.0, 1.4), (0.0, 1.0), (2.5, 0.8), (2000.0, 1e-6)])),
    ]
}

fn any_spec() -> impl Strategy<Value = Spec> {
    prop_oneof![
        4 => simple(),
        1 => (simple(), simple(), 0.0..1.0f64).prop_map(|(a, b, w)| Spec::Mixture(vec![(w, a), (1.0 - w, b)])),
    ]
}

/// Enough offsets that whole years are looked up in a table: in order, by 300 again and again, shuffled, with fractions
/// among them, and so far out that factors are 0.
fn many_offsets() -> Vec<Vec<f64>> {
    let years = |n: usize| (0..n).map(|year| year as f64).collect::<Vec<f64>>();
    let mut mixed: Vec<f64> = (0..6000).map(|i| ((i * 7919) % 1024) as f64).collect();
    for (place, t) in
        [(3000, 0.5), (3001, -0.0), (4000, 1023.0), (4500, 1023.5), (4501, 1024.0), (5999, 40_000.0)]
    {
        mixed[place] = t;
    }
    let again = (0..6000).map(|i| (i % 300) as f64).collect();
    let later = (0..6000).map(|i| (i % 300) as f64 + 0.25).collect();
    vec![years(40_000), again, mixed, later, years(100)]
}

#[test]
fn many_factors_are_their_scalars() {
    let to = |edge| Some(Edge::Offset(edge));
    let bands = vec![Band { value: 0.035, to: to(30.0) }, Band { value: 0.03, to: to(75.5) }];
    let after = |rate| Spec::Bands {
        bands: [bands.clone(), vec![Band { value: rate, to: None }]].concat(),
        edges_from: None,
    };
    let flat = |rate| Spec::Flat { rate, compounding: Compounding::Yearly };
    for spec in [
        flat(0.035),
        flat(0.0),
        flat(1.0),
        after(0.01),
        after(0.0),
        Spec::Gamma { mean: 0.04, sd: 0.03 },
        Spec::Mixture(vec![(0.5, flat(0.01)), (0.5, flat(0.07))]),
    ] {
        let curve = made(&spec);
        for offsets in many_offsets() {
            let mut factors = vec![f64::NAN; offsets.len()];
            curve.factors(&offsets, &mut factors).unwrap();
            for (&t, factor) in offsets.iter().zip(&factors) {
                assert_eq!(factor.to_bits(), curve.factor(t).unwrap().to_bits(), "{spec:?} at {t}");
            }
            // So a present value is the sum over those factors, in any order of the flows.
            let flows: Vec<f64> =
                (0..offsets.len()).map(|i| (i as f64 * 0.618).fract() * 100.0 - 30.0).collect();
            let value = present_value(&curve, &offsets, &flows).unwrap();
            assert_eq!(value.to_bits(), dot(&factors, &flows).to_bits(), "{spec:?}");
            let back = |values: &[f64]| values.iter().rev().copied().collect::<Vec<f64>>();
            let other = present_value(&curve, &back(&offsets), &back(&flows)).unwrap();
            assert_eq!(value.to_bits(), other.to_bits(), "{spec:?}");
        }
    }
}

#[test]
fn one_bad_number_among_many_is_found() {
    let spec = Spec::Table(vec![(0.0, 1.0), (2000.0, 1e-6)]);
    let falling = Spec::Flat { rate: 1.0, compounding: Compounding::Yearly };
    let years: Vec<f64> = (0..10_000).map(|i| (i % 300) as f64).collect();
    let far: Vec<f64> = (0..10_000).map(|i| f64::from(i) + 5000.0).collect();
    let flows = vec![1.0; years.len()];
    for (spec, years) in [(&spec, &years), (&falling, &years), (&falling, &far)] {
        let curve = made(spec);
        for place in [0, 31, 5000, 9999] {
            for bad in [f64::NAN, f64::INFINITY] {
                let (mut offsets, mut amounts) = (years.clone(), flows.clone());
                offsets[place] = bad;
                let error = present_value(&curve, &offsets, &flows).unwrap_err();
                assert_eq!((error.kind(), error.index()), (ErrorKind::NotFinite, Some(place)));
                let mut factors = vec![7.0; offsets.len()];
                let error = curve.factors(&offsets, &mut factors).unwrap_err();
                assert_eq!((error.kind(), error.index()), (ErrorKind::NotFinite, Some(place)));
                assert!(factors.iter().all(|&factor| factor == 7.0));
                amounts[place] = bad;
                let error = present_value(&curve, years, &amounts).unwrap_err();
                assert_eq!((error.kind(), error.index()), (ErrorKind::NotFinite, Some(place)));
            }
        }
    }
    let mut offsets = years.clone();
    offsets[7777] = 2001.0;
    let error = present_value(&made(&spec), &offsets, &flows).unwrap_err();
    assert_eq!((error.kind(), error.index()), (ErrorKind::OutsideDomain, Some(7777)));
}

proptest! {
    #![proptest_config(crate::repeatable())]

    #[test]
    fn the_factor_at_the_base_is_1(spec in any_spec()) {
        let curve = made(&spec);
        prop_assert_eq!(curve.factor(0.0).unwrap(), 1.0);
        prop_assert_eq!(curve.factor(-0.0).unwrap(), 1.0);
        prop_assert_eq!(curve.timed_factor(0.0, Timing::default()).unwrap(), 1.0);
    }

    #[test]
    fn an_array_is_its_scalars(spec in any_spec(), offsets in prop::collection::vec(0.0..1000.0f64, 0..50)) {
        let curve = made(&spec);
        let mut factors = vec![f64::NAN; offsets.len()];
        curve.factors(&offsets, &mut factors).unwrap();
        for (&t, &factor) in offsets.iter().zip(&factors) {
            prop_assert_eq!(factor.to_bits(), curve.factor(t).unwrap().to_bits());
        }
    }

    #[test]
    fn a_refused_offset_leaves_the_array_untouched(spec in any_spec(), place in 0..5usize) {
        let curve = made(&spec);
        let mut offsets = [0.0, 1.0, 2.0, 3.0, 4.0];
        offsets[place] = f64::NAN;
        let mut factors = [-7.0; 5];
        let error = curve.factors(&offsets, &mut factors).unwrap_err();
        prop_assert_eq!((error.kind(), error.index()), (ErrorKind::NotFinite, Some(place)));
        prop_assert_eq!(factors, [-7.0; 5]);
    }

    #[test]
    fn splitting_a_band_changes_nothing(
        bands in bands(-0.1..0.3), share in 0.01..0.99f64, which in 0..7usize, t in -50.0..1000.0f64,
    ) {
        let which = which % bands.len();
        let from = if which == 0 { 0.0 } else { offset(&bands[which - 1]) };
        let to = if bands[which].to.is_some() { offset(&bands[which]) } else { from + 300.0 };
        let edge = Some(Edge::Offset(from + share * (to - from)));
        let mut split = bands.clone();
        split.insert(which, Band { value: bands[which].value, to: edge });
        let whole = made(&Spec::Bands { bands, edges_from: None }).factor(t).unwrap();
        let halves = made(&Spec::Bands { bands: split, edges_from: None }).factor(t).unwrap();
        prop_assert!(ulps(whole, halves) <= 2, "{} and {}", whole, halves);
    }

    #[test]
    fn one_band_without_end_is_flat(rate in -0.4..1.0f64, t in 0.0..1000.0f64) {
        let flat = made(&Spec::Flat { rate, compounding: Compounding::Yearly });
        let band = vec![Band { value: rate, to: None }];
        let banded = made(&Spec::Bands { bands: band, edges_from: None });
        prop_assert_eq!(flat.factor(t).unwrap().to_bits(), banded.factor(t).unwrap().to_bits());
    }

    #[test]
    fn the_mean_rate_of_a_mixture_falls(
        rates in prop::collection::vec(0.0..0.3f64, 2..5), t in 0.0..900.0f64, step in 1.0..100.0f64,
    ) {
        let weight = 1.0 / rates.len() as f64;
        let flat = |rate| Spec::Flat { rate, compounding: Compounding::Yearly };
        let curve = made(&Spec::Mixture(rates.iter().map(|&rate| (weight, flat(rate))).collect()));
        let (before, after) = (curve.mean_rate(t).unwrap(), curve.mean_rate(t + step).unwrap());
        prop_assert!(after <= before, "{} at {}, {} at {}", before, t, after, t + step);
        let lowest = rates.iter().copied().fold(f64::INFINITY, f64::min);
        prop_assert!(after >= lowest);
    }

    #[test]
    fn the_factor_is_the_chain_of_forward_rates(spec in any_spec(), n in 1..200u32) {
        let curve = made(&spec);
        let growth = |year| 1.0 + curve.forward_rate(f64::from(year)).unwrap();
        let chain: f64 = (1..=n).map(growth).product();
        // A factor that jumps up has a forward rate near -1, and 1 + rate then keeps few digits.
        let slack: f64 = (1..=n).map(|year| 4e-16 * (1.0 + 1.0 / growth(year))).sum();
        let factor = curve.factor(f64::from(n)).unwrap();
        prop_assert!((chain * factor - 1.0).abs() < slack, "{} and {}", chain, factor);
    }

    #[test]
    fn the_mean_rate_gives_the_factor_back(spec in any_spec(), t in 0.01..1000.0f64) {
        let curve = made(&spec);
        let factor = curve.factor(t).unwrap();
        prop_assume!(factor > 1e-250);
        let flat = (-t * (1.0 + curve.mean_rate(t).unwrap()).ln()).exp();
        prop_assert!((flat / factor - 1.0).abs() < 1e-11);
        let continuous = (-t * curve.mean_rate_continuous(t).unwrap()).exp();
        prop_assert!((continuous / factor - 1.0).abs() < 1e-11);
    }
}

fn offset(band: &Band) -> f64 {
    match band.to {
        Some(Edge::Offset(edge)) => edge,
        _ => unreachable!("only bands with an offset edge are asked"),
    }
}
