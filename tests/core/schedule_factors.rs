//! The factors of the built-in schedules against published and recomputed tables.
//!
//! `schedule-factors.csv`: the factor table of the Northern Ireland practical guide to the Green Book (Appendix 4,
//! Table 1; 46 rows, 4 decimals), and factors recomputed from the published bands, at and around every edge.
//! The interpolated rates of Appendix C are those of its rule: 4 years is the mean of the 3 and 5 year rates, and the
//! 30 year rate holds beyond 30.
use super::schedules::rows;
use hence_core::{Basis, Catalogue, Where};

#[test]
fn factors_are_as_published() {
    let catalogue = Catalogue::builtin();
    for (id, rows) in rows(include_str!("schedule-factors.csv")) {
        let curve = Basis::parse(id, &catalogue).and_then(|basis| basis.curve(&Where::default())).unwrap();
        for row in rows {
            let [year, factor, tolerance] = [row[0], row[1], row[2]].map(|cell| cell.parse::<f64>().unwrap());
            let found = curve.factor(year).unwrap();
            assert!(
                (found - factor).abs() <= tolerance,
                "{id}, year {year}: {found}, published {factor} ({})",
                row[3]
            );
        }
    }
}

#[test]
fn a_year_past_the_last_band_is_refused() {
    let catalogue = Catalogue::builtin();
    let curve = Basis::parse("uk-2018", &catalogue).and_then(|basis| basis.curve(&Where::default())).unwrap();
    assert!(curve.factor(125.0).is_ok());
    assert_eq!(curve.factor(126.0).unwrap_err().code(), "outside-domain");
}

#[test]
fn rates_by_length_are_interpolated() {
    let catalogue = Catalogue::builtin();
    for (id, length, rate) in [
        ("us-a94c-2000-real", 4.0, 0.0385),
        ("us-a94c-2000-real", 20.0, 0.041),
        ("us-a94c-2000-real", 40.0, 0.042),
        ("us-a94c-2000-nominal", 8.0, 0.061 - 0.001 * 2.0 / 3.0),
        ("us-a94c-1999-nominal", 20.0, 0.0495),
        ("us-a94c-1999-real", 20.0, 0.028),
    ] {
        let at = Where { base_year: None, length: Some(length) };
        let curve = Basis::parse(id, &catalogue).and_then(|basis| basis.curve(&at)).unwrap();
        let mean = curve.mean_rate(2.0).unwrap();
        assert!((mean - rate).abs() < 1e-14, "{id} at {length} years: {mean}, published rule {rate}");
        let needs = Basis::parse(id, &catalogue).and_then(|basis| basis.curve(&Where::default()));
        assert_eq!(needs.unwrap_err().code(), "needs-length");
    }
}
