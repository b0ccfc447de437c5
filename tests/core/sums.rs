//! Sums are exact, rounded once, and do not depend on order. Compared with dashu-float; known cases by hand.

use crate::exact::{Big, big};
use hence_core::{ExactSum, dot, sum};
use proptest::prelude::*;

#[test]
fn known_sums() {
    assert_eq!(sum(&[]), 0.0);
    assert_eq!(sum(&[0.1; 10]), 1.0, "the exact sum of ten doubles 0.1 is nearest to 1");
    assert_eq!(sum(&[1.0, 1e100, 1.0, -1e100]), 2.0);
    assert_eq!(
        sum(&[f64::MAX, f64::MAX, -f64::MAX, -f64::MAX]),
        0.0,
        "sums on the way may exceed any double"
    );
    assert_eq!(sum(&[f64::MAX, f64::MAX]), f64::INFINITY);
    assert_eq!(sum(&[-f64::MAX, -f64::MAX]), f64::NEG_INFINITY);
    assert_eq!(sum(&[f64::INFINITY, 1.0]), f64::INFINITY);
    assert!(sum(&[f64::INFINITY, f64::NEG_INFINITY]).is_nan());
    assert!(sum(&[f64::NAN, 1.0]).is_nan());
}

#[test]
fn ties_go_to_even_and_one_bit_more_decides() {
    let half_unit = 2f64.powi(-53);
    assert_eq!(sum(&[1.0, half_unit]), 1.0);
    assert_eq!(sum(&[1.0 + 2.0 * half_unit, half_unit]), 1.0 + 4.0 * half_unit);
    assert_eq!(sum(&[1.0, half_unit, f64::from_bits(1)]), 1.0 + 2.0 * half_unit);
    assert_eq!(sum(&[1.0, half_unit, -f64::from_bits(1)]), 1.0);
    // The largest double and half its last unit lie half way to 2^1024.
    assert_eq!(sum(&[f64::MAX, 2f64.powi(970)]), f64::INFINITY);
    assert_eq!(sum(&[f64::MAX, 2f64.powi(970), -1e-300]), f64::MAX);
}

#[test]
fn subnormal_sums_and_products() {
    let tiny = f64::from_bits(1);
    assert_eq!(sum(&[tiny, tiny, tiny]), f64::from_bits(3));
    assert_eq!(sum(&[f64::MIN_POSITIVE, -tiny]), f64::MIN_POSITIVE.next_down());
    assert_eq!(dot(&[tiny], &[0.5]), 0.0, "half of the smallest double is a tie, and 0 is even");
    assert_eq!(dot(&[tiny, tiny], &[0.5, 0.25]), tiny);
    assert_eq!(dot(&[tiny], &[tiny]), 0.0);
    assert_eq!(dot(&[1e-200, 1e200, -1e200], &[1e-200, 1.0, 1.0]), 0.0);
}

#[test]
fn known_products() {
    assert_eq!(dot(&[], &[]), 0.0);
    assert_eq!(dot(&[3.0, -2.0], &[4.0, 5.0]), 2.0);
    // 0.1 x 10 is 1 when rounded, but the stored 0.1 is above one tenth: the rest must survive.
    assert_eq!(dot(&[0.1, -1.0], &[10.0, 1.0]), 5.551_115_123_125_783e-17);
    assert!(dot(&[f64::INFINITY], &[0.0]).is_nan());
    assert_eq!(dot(&[f64::MAX, f64::MAX], &[f64::MAX, -f64::MAX]), 0.0);
}

#[test]
#[should_panic(expected = "same length")]
fn products_of_unequal_lengths_panic() {
    dot(&[1.0], &[1.0, 2.0]);
}

/// Terms one after the other through the long register alone.
fn registered(terms: &[f64], factors: &[f64]) -> (f64, f64) {
    let (mut sums, mut products) = (ExactSum::new(), ExactSum::new());
    for (&term, &factor) in terms.iter().zip(factors) {
        sums.add(term);
        products.add_product(term, factor);
    }
    (sums.total(), products.total())
}

#[test]
fn long_arrays_are_rounded_once_too() {
    let half_unit = 2f64.powi(-53);
    let cancelling = |n: usize| (0..n).flat_map(|i| [1e9 + i as f64 / 7.0, -(1e9 + i as f64 / 7.0)]);
    for n in [5, 8, 16, 100, 1000] {
        for rest in [0.0, 1e-300, -1e-300, 1e-12, half_unit] {
            // Half way between two doubles, or just beside: the least term decides.
            let mut terms = vec![1.0, half_unit];
            terms.extend(cancelling(n));
            terms.push(rest);
            let due = if rest > 0.0 { 1.0 + 2.0 * half_unit } else { 1.0 };
            let due = if rest == 1e-12 { 1.0 + (1e-12 + half_unit) } else { due };
            assert_eq!(sum(&terms), due, "{n} pairs and {rest:e}");
            assert_eq!(dot(&terms, &vec![1.0; terms.len()]), due, "{n} pairs and {rest:e}");
        }
        let all: Vec<f64> = cancelling(n).collect();
        assert_eq!((sum(&all), dot(&all, &vec![0.1; all.len()])), (0.0, 0.0));
    }
    let large = vec![1e300; 50];
    assert_eq!(dot(&large, &large), f64::INFINITY);
    let tiny = vec![1e-160; 50];
    assert_eq!(dot(&tiny, &tiny), registered(&tiny, &tiny).1);
}

/// The exact sum through arbitrary precision; terms are within 2^120 of each other.
fn exact(terms: impl Iterator<Item = Big>) -> f64 {
    terms.fold(big(0.0), |sum, term| sum + term).to_f64().value()
}

fn term() -> impl Strategy<Value = f64> {
    (-1.0..1.0f64, -20..20i32).prop_map(|(digits, power)| digits * 2f64.powi(power))
}

proptest! {
    #![proptest_config(crate::repeatable())]

    #[test]
    fn the_sum_is_the_exact_one_rounded(terms in prop::collection::vec(term(), 0..60)) {
        prop_assert_eq!(sum(&terms), exact(terms.iter().map(|&term| big(term))));
    }

    #[test]
    fn the_sum_of_products_is_the_exact_one_rounded(pairs in prop::collection::vec((term(), term()), 0..60)) {
        let (a, b): (Vec<f64>, Vec<f64>) = pairs.iter().copied().unzip();
        prop_assert_eq!(dot(&a, &b), exact(pairs.iter().map(|&(x, y)| big(x) * big(y))));
    }

    #[test]
    fn the_quick_way_and_the_register_agree(
        pairs in prop::collection::vec((term(), term()), 0..400),
        cancel in any::<bool>(),
    ) {
        let (mut a, mut b): (Vec<f64>, Vec<f64>) = pairs.into_iter().unzip();
        if cancel {
            let rest: Vec<f64> = a.iter().map(|term| -term * (1.0 + f64::EPSILON)).collect();
            (a, b) = ([a, rest].concat(), [b.clone(), b].concat());
        }
        prop_assert_eq!((sum(&a), dot(&a, &b)), registered(&a, &b));
    }

    #[test]
    fn order_does_not_matter(
        mut terms in prop::collection::vec(prop::num::f64::NORMAL | prop::num::f64::SUBNORMAL, 1..80),
        seed in any::<u64>(),
    ) {
        let first = sum(&terms);
        // A shuffle by a multiplicative generator, so that a failure is repeated by its seed.
        let mut state = seed | 1;
        for k in (1..terms.len()).rev() {
            state = state.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1);
            terms.swap(k, (state >> 33) as usize % (k + 1));
        }
        prop_assert_eq!(sum(&terms).to_bits(), first.to_bits());
    }

    #[test]
    fn what_is_taken_away_again_leaves_nothing(terms in prop::collection::vec(prop::num::f64::NORMAL, 0..40)) {
        let mut total = ExactSum::new();
        for &term in &terms {
            total.add(term);
            total.add_product(term, 0.5);
        }
        for &term in &terms {
            total.add_product(-term, 1.5);
        }
        prop_assert_eq!(total.total(), 0.0);
    }
}
