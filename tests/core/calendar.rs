//! Dates, day counts and financial years. Expected values are worked from the definition of each count.

use chrono::NaiveDate;
use hence_core::{DayCount, ErrorKind, offset_of_dates, parse_financial_year, years_after_base};
use proptest::prelude::*;

const COUNTS: [(DayCount, &str); 4] = [
    (DayCount::Anniversary, "anniversaries"),
    (DayCount::Actual365, "actual/365"),
    (DayCount::ActualActualIsda, "actual/actual ISDA"),
    (DayCount::Thirty360E, "30E/360"),
];

fn day(text: &str) -> NaiveDate {
    text.parse().unwrap()
}

fn offset(base: &str, date: &str, count: DayCount) -> f64 {
    offset_of_dates(day(base), day(date), count).unwrap()
}

#[test]
fn whole_anniversaries_are_whole_numbers() {
    for years in 0..300 {
        let date = format!("{}-04-01", 2026 + years);
        assert_eq!(offset("2026-04-01", &date, DayCount::Anniversary), f64::from(years));
    }
}

#[test]
fn the_part_year_is_actual_days_over_its_own_length() {
    // 1 April 2026 to 1 October 2027: one anniversary, then 183 days of the 366 to 1 April 2028 (it holds
    // 29 February 2028).
    assert_eq!(offset("2026-04-01", "2027-10-01", DayCount::Anniversary), 1.0 + 183.0 / 366.0);
    assert_eq!(offset("2026-04-01", "2026-10-01", DayCount::Anniversary), 183.0 / 365.0);
}

#[test]
fn the_anniversary_of_a_leap_day_is_28_february() {
    let count = DayCount::Anniversary;
    assert_eq!(offset("2024-02-29", "2025-02-28", count), 1.0);
    assert_eq!(offset("2024-02-29", "2028-02-29", count), 4.0);
    assert_eq!(offset("2024-02-29", "2025-03-01", count), 1.0 + 1.0 / 365.0);
    // From 28 February 2027 to 29 February 2028 are 366 days.
    assert_eq!(offset("2024-02-29", "2028-02-28", count), 3.0 + 365.0 / 366.0);
    assert_eq!(offset("2023-02-28", "2024-02-29", count), 1.0 + 1.0 / 366.0);
}

#[test]
fn actual_365_counts_days() {
    assert_eq!(offset("2024-01-01", "2025-01-01", DayCount::Actual365), 366.0 / 365.0);
    assert_eq!(offset("2023-11-01", "2024-05-01", DayCount::Actual365), 182.0 / 365.0);
}

#[test]
fn actual_actual_splits_leap_and_common_years() {
    // 61 days in 2023 and 121 in 2024.
    let due = 61.0 / 365.0 + 121.0 / 366.0;
    assert!((offset("2023-11-01", "2024-05-01", DayCount::ActualActualIsda) - due).abs() < 1e-15);
    assert_eq!(offset("2023-01-01", "2029-01-01", DayCount::ActualActualIsda), 6.0);
    assert_eq!(offset("2024-01-01", "2024-07-01", DayCount::ActualActualIsda), 182.0 / 366.0);
}

#[test]
fn thirty_360_gives_every_month_thirty_days() {
    assert_eq!(offset("2024-01-31", "2024-02-28", DayCount::Thirty360E), 28.0 / 360.0);
    assert_eq!(offset("2024-01-30", "2024-03-31", DayCount::Thirty360E), 60.0 / 360.0);
    assert_eq!(offset("2024-02-29", "2025-02-28", DayCount::Thirty360E), 359.0 / 360.0);
    assert_eq!(offset("2026-04-01", "2126-04-01", DayCount::Thirty360E), 100.0);
}

#[test]
fn a_date_before_the_base_counts_from_itself() {
    // From 1 July 2023 its anniversaries run to 1 July 2024, 366 days; half a year later is 1 January 2024.
    assert_eq!(offset("2024-01-01", "2023-07-01", DayCount::Anniversary), -184.0 / 366.0);
    assert_eq!(offset("2026-04-01", "2016-04-01", DayCount::Anniversary), -10.0);
}

proptest! {
    #![proptest_config(crate::repeatable())]

    #[test]
    fn every_count_is_antisymmetric_and_rises(a in 400_000i32..1_500_000, b in 400_000i32..1_500_000) {
        let date = |days: i32| NaiveDate::from_num_days_from_ce_opt(days).unwrap();
        for (count, _) in COUNTS {
            let between = |from: i32, to: i32| offset_of_dates(date(from), date(to), count).unwrap();
            prop_assert_eq!(between(a, b), -between(b, a));
            prop_assert_eq!(between(a, a), 0.0);
            prop_assert!(between(a, b + 2) > between(a, b), "{count} {a} {b}");
            // No count strays from the mean year by more than its 5 days of 30-day months and its leap days.
            let mean = f64::from(b - a) / 365.2425;
            let slack = 0.02 + if count == DayCount::Actual365 { mean.abs() * 0.0007 } else { 0.0 };
            prop_assert!((between(a, b) - mean).abs() < slack);
        }
    }
}

#[test]
fn day_counts_print_and_parse_back() {
    for (count, name) in COUNTS {
        assert_eq!(count.to_string(), name);
        assert_eq!(name.to_uppercase().parse::<DayCount>().unwrap(), count);
    }
    assert_eq!("Act / Act ISDA".parse::<DayCount>().unwrap(), DayCount::ActualActualIsda);
    let error = "30/360".parse::<DayCount>().unwrap_err();
    assert_eq!(error.kind(), ErrorKind::Syntax);
    assert_eq!(
        error.message(),
        "found \"30/360\", allowed: anniversaries, actual/365, actual/actual ISDA, 30E/360"
    );
}

#[test]
fn dates_and_years_have_four_digits() {
    let refused = |base: &str, date: &str| {
        let error = offset_of_dates(day(base), day(date), DayCount::Anniversary).unwrap_err();
        (error.kind(), error.argument())
    };
    assert_eq!(refused("0999-12-31", "2026-01-01"), (ErrorKind::Date, "base"));
    assert_eq!(refused("2026-01-01", "+10000-01-01"), (ErrorKind::Date, "date"));
    assert_eq!(offset("1000-01-01", "9999-12-31", DayCount::Anniversary), 8999.0 + 364.0 / 365.0);
    assert_eq!(years_after_base(2026, 1000).unwrap(), -1026.0);
    assert_eq!(years_after_base(2026, 9999).unwrap(), 7973.0);
    assert_eq!(years_after_base(999, 2026).unwrap_err().argument(), "base_year");
    assert_eq!(years_after_base(2026, 10_000).unwrap_err().argument(), "year");
}

#[test]
fn financial_years_are_read_by_their_first_year() {
    let forms = [
        "2025/26",
        "2025-26",
        "2025/2026",
        "2025-2026",
        "2025\u{2013}26",
        "FY26",
        "FY2026",
        "FY2025/26",
        "fy 2025-26",
        " FY 26 ",
        "2025 / 26",
    ];
    for text in forms {
        assert_eq!(parse_financial_year(text).unwrap(), 2025, "{text}");
    }
    for (text, year) in [
        ("1999/00", 1999),
        ("1999-2000", 1999),
        ("2099/00", 2099),
        ("2011-12", 2011),
        ("FY00", 1999),
        ("FY99", 2098),
        ("1000/01", 1000),
        ("9998/99", 9998),
        ("FY1001", 1000),
        ("FY9999", 9998),
    ] {
        assert_eq!(parse_financial_year(text).unwrap(), year, "{text}");
    }
}

#[test]
fn other_texts_are_no_financial_years() {
    for (text, why, hint) in [
        ("2025/27", "2025 is followed by 2026", "2025/26"),
        ("2025-13", "2025 is followed by 2026", "2025/26"),
        ("2026/25", "2026 is followed by 2027", "2026/27"),
        ("1999/1900", "1999 is followed by 2000", "1999/00"),
        ("2025", "one year alone is a calendar year", "2025/26"),
        ("25/26", "its first year needs 4 digits", "2025/26, or FY26 for the year that ends in 2026"),
    ] {
        let error = parse_financial_year(text).unwrap_err();
        assert_eq!(error.kind(), ErrorKind::Date);
        assert_eq!(error.message(), format!("\"{text}\" is no financial year: {why}"));
        assert_eq!(error.hint(), Some(hint), "{text}");
    }
    for text in [
        "",
        "FY",
        "FY1000",
        "FY123",
        "26",
        "2025/",
        "/26",
        "2025/6",
        "2025-01-01",
        "9999/00",
        "0999/00",
        "2025/+6",
        "Q1 2025",
        "２０２５/26",
    ] {
        assert_eq!(parse_financial_year(text).unwrap_err().kind(), ErrorKind::Date, "{text}");
    }
}
