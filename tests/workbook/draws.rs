//! Draws of a workbook's rate: what each kind of stream comes to, and what is said of those that are not drawn.
//!
//! Expected numbers are worked out by hand from the rate of each draw.

use std::num::NonZeroUsize;

use hence_core::{Catalogue, Distribution, Draws, Quantity};
use hence_workbook::draws::{DrawsReport, DrawsRequest, Origin, Prepared, prepare};
use hence_workbook::problem::Severity;

use crate::small::Small;

const NAMES: &str = "hence_base B1, hence_basis B2, hence_years B4:D4, hence_cost_works B5:D5, \
    hence_benefit_access B6:D6, hence_npv B9";

/// Base 2025, years 2025 to 2027, costs of 100 in 2025, benefits of 60 in 2026 and 2027; more cells and names.
fn plan(more: &str, names: &str) -> Small {
    let cells =
        format!("B1: 2025\nB2: '4%\nB4: 2025 | 2026 | 2027\nB5: 100 | 0 | 0\nB6: 0 | 60 | 60\n{more}");
    let all: Vec<&str> = [NAMES, names].into_iter().filter(|n| !n.is_empty()).collect();
    Small::default().sheet("Plan", &cells).names(&all.join(","))
}

/// The rate is a preference from 2% to 6%.
fn prepared(small: &Small) -> Prepared {
    let parsed = |of: Quantity, text: &str| Some(Distribution::parse(of, text).unwrap());
    let distributions = [
        parsed(Quantity::Preference, "uniform 2% to 6%"),
        None,
        parsed(Quantity::Elasticity, "1"),
        parsed(Quantity::Growth, "0%"),
    ];
    let request = DrawsRequest { distributions, ..DrawsRequest::default() };
    prepare(&small.open().0, &request, &Catalogue::builtin()).unwrap_or_else(|error| panic!("{error}"))
}

fn drawn(prepared: &Prepared) -> DrawsReport {
    prepared.draw(&Draws { count: 50, seed: 3, threads: NonZeroUsize::MIN }, &[50.0]).unwrap()
}

fn warnings(prepared: &Prepared) -> Vec<String> {
    let warnings = prepared.problems.iter().filter(|problem| problem.severity == Severity::Warning);
    warnings.map(|problem| format!("{} {}", problem.code, problem.place)).collect()
}

/// Every draw against the value by hand at its rate.
#[track_caller]
fn values(small: &Small, by_hand: impl Fn(f64) -> f64) {
    let report = drawn(&prepared(small));
    for (drawn, found) in report.drawn.rates.iter().zip(&report.drawn.values[0]) {
        let expected = by_hand(drawn.rate);
        assert!((found - expected).abs() < 1e-10, "found {found}, expected {expected} at {}", drawn.rate);
    }
}

#[test]
fn plain_flows_and_their_declared_value() {
    let small = plan("", "");
    values(&small, |r| 60.0 / (1.0 + r) + 60.0 / (1.0 + r).powi(2) - 100.0);
    let ready = prepared(&small);
    assert_eq!(warnings(&ready), [] as [&str; 0]);
    assert_eq!(
        ready.parts.iter().map(|part| part.origin.clone()).filter(|o| *o == Origin::Unstated).count(),
        1
    );
    let option = &drawn(&ready).options[0];
    let declared = option.declared().unwrap();
    assert!((declared - (60.0 / 1.04 + 60.0 / 1.04f64.powi(2) - 100.0)).abs() < 1e-12);
    assert_eq!((option.base.as_str(), option.timing.as_str()), ("2025", "flows end, base end"));
}

#[test]
fn averaged_flows_stand_at_both_ends_of_their_year() {
    let small = plan("F1: 'flows averaged", "hence_timing F1");
    values(&small, |r| {
        let v = 1.0 / (1.0 + r);
        60.0 * (0.5 + v + 0.5 * v * v) - 100.0 * (0.5 * (1.0 + r) + 0.5)
    });
}

#[test]
fn a_stream_on_a_basis_of_its_own_keeps_it_and_says_so() {
    let small = plan("B7: 0 | 50 | 50\nF1: 0.01", "hence_benefit_health B7:D7, hence_basis_health F1");
    let health = 50.0 / 1.01 + 50.0 / 1.01f64.powi(2);
    values(&small, |r| 60.0 / (1.0 + r) + 60.0 / (1.0 + r).powi(2) - 100.0 + health);
    assert_eq!(warnings(&prepared(&small)), ["not-drawn Plan!F1 [hence_basis_health]"]);
}

#[test]
fn prices_growth_residual_values_and_tails_are_valued_as_in_a_fill() {
    // Money of the day at 25% inflation; access grows by 10% a year against other prices; 20 are left over at the end.
    let more = "F1: 'nominal\nG1: 0.25\nF2: 0.1\nF3: 20\nF4: 'growing 1%, every 2 years, for ever";
    let names = "hence_price_basis F1, hence_prices G1, hence_growth_access F2, hence_residual_access F3, \
                 hence_tail_access F4";
    values(&plan(more, names), |r| {
        let real = 1.1f64 / 1.25;
        let last = 60.0 * real * real;
        // Every second year for ever after 2027, growing by 1%, by 10% against other prices, less inflation.
        let step = (1.01 * real / (1.0 + r)).powi(2);
        let tail = last * step / (1.0 - step);
        60.0 * real / (1.0 + r) + (last + 20.0 * real * real + tail) / (1.0 + r).powi(2) - 100.0
    });
    // To a year: 2029 and 2031.
    let ending = plan("F4: 'every 2 years, to 2032", "hence_tail_access F4");
    values(&ending, |r| {
        let v = 1.0 / (1.0 + r);
        60.0 * (v + v.powi(2) + v.powi(4) + v.powi(6)) - 100.0
    });
}

#[test]
fn money_of_the_day_warns() {
    let small = plan("F1: 'nominal", "hence_price_basis F1");
    assert_eq!(warnings(&prepared(&small)), ["prices-differ [Plan]"]);
}

#[test]
fn a_tail_that_outgrows_a_draw_is_refused() {
    let small = plan("F4: 'growing 3.9%, for ever", "hence_tail_access F4");
    let ready = prepared(&small);
    let error = ready.draw(&Draws { count: 50, seed: 3, threads: NonZeroUsize::MIN }, &[]).unwrap_err();
    assert_eq!(error.code(), "diverges");
    assert!(error.message().contains("growing by 3.9% a year"), "{}", error.message());
}

#[test]
fn options_of_different_base_years_do_not_rank() {
    let page = |base: i32| {
        format!("B1: {base}\nB2: '4%\nB4: 2025 | 2026 | 2027\nB5: 100 | 0 | 0\nB6: 0 | 60 | 60\n")
    };
    let names = |option: &str| {
        let roles =
            ["base B1", "basis B2", "years B4:D4", "cost_works B5:D5", "benefit_access B6:D6", "npv B9"];
        let name = |role: &&str| {
            let (role, cells) = role.split_once(' ').unwrap();
            format!("hence_{role}__{option} {cells}")
        };
        roles.iter().map(name).collect::<Vec<_>>().join(",")
    };
    let both = |second: i32| {
        Small::default()
            .sheet("A", &page(2025))
            .names(&names("liner"))
            .sheet("B", &page(second))
            .names(&names("pump"))
    };
    assert_eq!(warnings(&prepared(&both(2024))), ["base-differs [liner, pump]"]);
    let same = prepared(&both(2025));
    assert_eq!(warnings(&same), [] as [&str; 0]);
    let report = drawn(&same);
    assert!(report.options.iter().all(|option| option.first.shared.share == 1.0));
}
