//! A second basis for one stream: its factors, what it comes to, and what is said of it.
//!
//! Expected numbers are worked out by hand: each stream's flows over (1 + its own rate)^n.

use hence_core::Catalogue;
use hence_workbook::fill::{FillRequest, Filled, fill};
use hence_workbook::problem::{Problem, Severity};
use hence_workbook::sheets::VERDICT_AGREES;

use crate::numbers::cells;
use crate::numbers::published::number_at;
use crate::small::Small;

const NAMES: &str = "hence_base B1, hence_basis B2, hence_years B4:D4, hence_cost_works B5:D5, \
    hence_benefit_access B6:D6, hence_benefit_health B7:D7, hence_npv B9, hence_basis_health F1";

/// Base 2025 at 4%, costs of 100 in 2025, access worth 60 and health worth 50 in 2026 and 2027.
fn plan(own: &str, more: &str, names: &str) -> Small {
    let cells = format!(
        "B1: 2025\nB2: '4%\nB4: 2025 | 2026 | 2027\nB5: 100 | 0 | 0\nB6: 0 | 60 | 60\nB7: 0 | 50 | 50\nF1: {own}\n{more}"
    );
    let all: Vec<&str> = [NAMES, names].into_iter().filter(|n| !n.is_empty()).collect();
    Small::default().sheet("Plan", &cells).names(&all.join(","))
}

fn filled(small: &Small) -> Filled {
    let filled = fill(&small.open().0, &FillRequest::default(), &Catalogue::builtin());
    let filled = filled.unwrap_or_else(|error| panic!("{error}"));
    assert_eq!(filled.report.verdict, VERDICT_AGREES);
    filled
}

fn problems(small: &Small) -> Vec<String> {
    let error = fill(&small.open().0, &FillRequest::default(), &Catalogue::builtin()).expect_err("refused");
    error.problems().iter().map(|p| format!("{} {}", p.code, p.place)).collect()
}

#[track_caller]
fn close(found: f64, expected: f64) {
    assert!(
        (found - expected).abs() <= 1e-12 * expected.abs().max(1.0),
        "found {found}, expected {expected}"
    );
}

#[test]
fn a_stream_is_discounted_on_its_own_basis() {
    let names = "hence_factor B10:D10, hence_factor_health B11:D11, hence_pv B12:D12, hence_pv_health B13:D13, \
                 hence_pv_access F2, hence_payback F3";
    let out = filled(&plan("0.01", "", names));
    let held = cells(&out.bytes);
    let at = |cell: &str| number_at(&held, "Plan", cell).expect("a number");
    let access = 60.0 / 1.04 + 60.0 / 1.04f64.powi(2);
    let health = 50.0 / 1.01 + 50.0 / 1.01f64.powi(2);
    close(at("B9"), access + health - 100.0);
    close(at("F2"), access);
    close(at("C10"), 1.0 / 1.04);
    close(at("D11"), 1.0 / 1.01f64.powi(2));
    close(at("C12"), 60.0 / 1.04 + 50.0 / 1.01);
    close(at("D13"), 50.0 / 1.01f64.powi(2));
    // Paid back in the second year, linear within it.
    let first = 60.0 / 1.04 + 50.0 / 1.01;
    let second = 60.0 / 1.04f64.powi(2) + 50.0 / 1.01f64.powi(2);
    assert!(first > 100.0, "{first} {second}");
    close(at("F3"), 100.0 / first);
    let option = &out.report.options[0];
    assert_eq!(option.basis, "4%");
    let own: Vec<(&str, &str)> =
        option.stream_bases.iter().map(|(s, b, _)| (s.as_str(), b.as_str())).collect();
    assert_eq!(own, [("health", "1%")]);
    // Its factors are told as they are: a flow of health in 2026 has 1/1.01.
    let told = held.values().any(|cell| cell.to_string().contains("in 2026 0.9901"));
    assert!(told, "the timing of the stream's own basis");
    // The mean time weighs each flow by its own factor.
    let gross = 100.0 + access + health;
    close(option.mean_time.unwrap(), (first + 2.0 * second) / gross);
}

#[test]
fn factors_of_a_stream_without_a_basis_of_its_own_are_the_options() {
    let out = filled(&plan("0.01", "", "hence_factor_access B10:D10"));
    close(number_at(&cells(&out.bytes), "Plan", "C10").unwrap(), 1.0 / 1.04);
}

#[test]
fn what_follows_the_last_year_and_flat_rates_keep_to_the_own_basis() {
    let out = filled(&plan("0.02", "F2: 'for ever", "hence_tail_health F2"));
    let access = 60.0 / 1.04 + 60.0 / 1.04f64.powi(2);
    close(out.report.options[0].absolute.npv, access + 50.0 / 0.02 - 100.0);
}

#[test]
fn a_basis_that_cannot_be_used_is_reported_at_its_cell() {
    let at = |code: &str| vec![format!("{code} Plan!F1 [hence_basis_health]")];
    assert_eq!(problems(&plan("'3,5%", "", "")), at("syntax"));
    assert_eq!(problems(&plan("3.5", "", "")), at("rate-range"));
    assert_eq!(problems(&plan("'uk-2099", "", "")), at("unknown-schedule"));
    assert_eq!(problems(&plan("", "", "")), at("blank-setting"));
    let stray = problems(&plan("0.01", "G1: 0.02", "hence_basis_roads G1"));
    assert_eq!(stray, ["unknown-stream Plan!G1 [hence_basis_roads]"]);
    let clash = problems(&plan("'us-a94c-2000-nominal", "G1: 'real", "hence_price_basis G1"));
    assert!(clash.contains(&"prices-differ Plan!F1 [hence_basis_health]".to_owned()), "{clash:?}");
    let over = problems(&plan("0.01", "", "hence_pv F1"));
    assert!(over.iter().any(|p| p.starts_with("target-overlap Plan!F1")), "{over:?}");
}

#[test]
fn flows_stand_where_the_appraisal_puts_them() {
    let out = filled(&plan("'1%; flows start", "", ""));
    let wanted = |p: &&Problem| p.severity == Severity::Warning;
    let warnings: Vec<&str> = out.report.problems.iter().filter(wanted).map(|p| p.code).collect();
    assert_eq!(warnings, ["timing-differs"]);
    let access = 60.0 / 1.04 + 60.0 / 1.04f64.powi(2);
    close(out.report.options[0].absolute.npv, access + 50.0 / 1.01 + 50.0 / 1.01f64.powi(2) - 100.0);
}

/// Beyond 50 years the standard and the health rates of 2018 are run beside as their reduced ones.
#[test]
fn a_companion_of_each_basis_is_run_beside() {
    let cells = "B1: 2025\nB2: 'uk-2018\nB4: 2025 | 2026 | 2095\nB5: 1 | 0 | 0\nB6: 0 | 60 | 60\nB7: 0 | 50 | 50\n\
                 F1: 'uk-2018-health\nF2: 'real";
    let names = format!("{NAMES}, hence_price_basis F2");
    let out = filled(&Small::default().sheet("Plan", cells).names(&names));
    let beside = out.report.options[0].companion.as_ref().expect("a companion");
    assert_eq!(beside.id, "uk-2018-reduced (health on uk-2018-health-reduced)");
    let factor = |id: &str, t: f64| {
        let basis = hence_core::Basis::parse(id, &Catalogue::builtin()).unwrap();
        basis.curve(&hence_core::Where::default()).unwrap().factor(t).unwrap()
    };
    let of = |id, flow: f64| flow * (factor(id, 1.0) + factor(id, 70.0));
    close(beside.totals.npv, of("uk-2018-reduced", 60.0) + of("uk-2018-health-reduced", 50.0) - 1.0);
}

#[test]
fn options_share_a_stream_basis_and_its_factors() {
    let option = |small: Small, name: &str, health: &str| {
        let cells = format!("B5: 100 | 0\nB7: 0 | {health}");
        small
            .sheet(name, &cells)
            .own_names("hence_cost_works B5:C5, hence_benefit_health B7:C7, hence_npv B9")
    };
    let small = Small::default()
        .sheet("Inputs", "B1: 2025\nB2: '4%\nB3: '1%\nB4: 2025 | 2026\nB8: 'Low")
        .names(
            "hence_base B1, hence_basis B2, hence_basis_health B3, hence_years B4:C4, hence_factor_health B6:C6, \
             hence_baseline B8",
        );
    let out = filled(&option(option(small, "Low", "120"), "High", "140"));
    close(out.report.options[1].increment.unwrap().npv, 20.0 / 1.01);
    close(number_at(&cells(&out.bytes), "Inputs", "C6").unwrap(), 1.0 / 1.01);
    assert_eq!(out.report.problems.iter().filter(|p| p.severity == Severity::Warning).count(), 0);
}
