//! Equity weights by income, and projects that are not small against consumption.
//!
//! Expected numbers are worked out by hand: (reference/income)^elasticity, and utility ln c or -1/c over the years.

use hence_core::Catalogue;
use hence_workbook::fill::{FillRequest, Filled, fill};
use hence_workbook::problem::{Problem, Severity};
use hence_workbook::sheets::VERDICT_AGREES;

use crate::numbers::cells;
use crate::numbers::published::number_at;
use crate::small::Small;

const NAMES: &str = "hence_base B1, hence_basis B2, hence_years B4:D4, hence_cost_works B5:D5, \
    hence_benefit_low B6:D6, hence_benefit_high B7:D7, hence_npv B9";

/// Base 2025, years 2025 to 2027, costs of 100 in 2025, benefits of 60 to the poorer and the richer in both later years.
fn plan(basis: &str, more: &str, names: &str) -> Small {
    let cells = format!(
        "B1: 2025\nB2: {basis}\nB4: 2025 | 2026 | 2027\nB5: 100 | 0 | 0\nB6: 0 | 60 | 60\nB7: 0 | 60 | 60\n{more}"
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

fn refused(small: &Small) -> Vec<String> {
    let error = fill(&small.open().0, &FillRequest::default(), &Catalogue::builtin()).expect_err("refused");
    let problems = error.problems().iter().filter(|p| p.severity == Severity::Error);
    problems.map(|p| format!("{} {}", p.code, p.place)).collect()
}

fn warnings(filled: &Filled) -> Vec<&'static str> {
    // Both groups receive the same here, which is no matter of welfare.
    let wanted = |p: &&Problem| p.severity == Severity::Warning && p.code != "same-numbers";
    filled.report.problems.iter().filter(wanted).map(|p| p.code).collect()
}

#[track_caller]
fn close(found: f64, expected: f64) {
    assert!(
        (found - expected).abs() <= 1e-12 * expected.abs().max(1.0),
        "found {found}, expected {expected}"
    );
}

// ---- weights by income --------------------------------------------------------------------------------------------

const INCOMES: &str =
    "hence_income_low F1, hence_income_high G1, hence_income_reference H1, hence_elasticity F2";

/// The ratio of the first row is that of the Green Book: at an elasticity of 1, half the income counts twice.
#[test]
fn flows_are_weighted_by_the_income_of_their_group() {
    let out =
        filled(&plan("'4%", "F1: 20000 | 80000 | 40000\nF2: 1", &format!("{INCOMES}, hence_pv_low F3")));
    let two_years = 60.0 / 1.04 + 60.0 / 1.04f64.powi(2);
    let held = cells(&out.bytes);
    close(number_at(&held, "Plan", "F3").unwrap(), 2.0 * two_years);
    close(number_at(&held, "Plan", "B9").unwrap(), 2.5 * two_years - 100.0);
    let option = &out.report.options[0];
    assert_eq!(option.weights, [("low".to_owned(), 2.0), ("high".to_owned(), 0.5)]);
    close(option.absolute.benefits, 300.0);
    assert_eq!(warnings(&out), [""; 0]);
    // With an elasticity of 1.3: 2^1.3 and 2^-1.3.
    let out = filled(&plan("'4%", "F1: 20000 | 80000 | 40000\nF2: 1.3", INCOMES));
    let weights = 2f64.powf(1.3) + 2f64.powf(-1.3);
    close(out.report.options[0].absolute.npv, weights * two_years - 100.0);
}

#[test]
fn the_elasticity_is_the_cells_else_the_basis() {
    let line = "'preference 1%, elasticity 2, growth 2%"; // 5%
    let names = "hence_income_low F1, hence_income_reference H1";
    let two_years = 60.0 / 1.05 + 60.0 / 1.05f64.powi(2);
    let out = filled(&plan(line, "F1: 20000 | | 40000", names));
    close(out.report.options[0].absolute.npv, 5.0 * two_years - 100.0);
    assert_eq!(warnings(&out), [""; 0]);
    let out = filled(&plan(line, "F1: 20000 | | 40000\nF2: 1", &format!("{names}, hence_elasticity F2")));
    close(out.report.options[0].absolute.npv, 3.0 * two_years - 100.0);
    assert_eq!(warnings(&out), ["elasticity-differs"]);
}

#[test]
fn what_incomes_need_is_asked_for() {
    let faults = |more: &str, names: &str| refused(&plan("'4%", more, names));
    assert_eq!(
        faults("F1: 20000\nF2: 1", "hence_income_low F1, hence_elasticity F2"),
        ["income-reference Plan!F1 [hence_income_low]"]
    );
    assert_eq!(
        faults("F1: 20000 | 40000", "hence_income_low F1, hence_income_reference G1"),
        ["elasticity-missing Plan!F1 [hence_income_low]"]
    );
    let both = "hence_income_low F1, hence_income_reference G1, hence_elasticity F2";
    assert_eq!(faults("F1: 0 | 40000\nF2: 1", both), ["income Plan!F1 [hence_income_low]"]);
    assert_eq!(faults("F1: 1 | -4\nF2: 1", both), ["income Plan!G1 [hence_income_reference]"]);
    assert_eq!(faults("F1: 1 | 4\nF2: 21", both), ["elasticity Plan!F2 [hence_elasticity]"]);
    let stray = "hence_income_middle F1, hence_income_reference G1, hence_elasticity F2";
    assert_eq!(faults("F1: 1 | 4\nF2: 1", stray), ["unknown-stream Plan!F1 [hence_income_middle]"]);
    let alone = filled(&plan("'4%", "F1: 40000", "hence_income_reference F1"));
    assert_eq!(warnings(&alone), ["income-reference"]);
}

// ---- against consumption ------------------------------------------------------------------------------------------

const PATH: &str = "hence_consumption B8:D8";

/// Small against 1,000,000 a year: the same to the warning's 1%, and nothing said.
#[test]
fn a_small_project_is_worth_its_net_present_value() {
    let basis = "'preference 1%, elasticity 1.5, growth 2%";
    let out = filled(&plan(basis, "B8: 1000000 | 1020000 | 1040400", PATH));
    let (exact, _) = out.report.options[0].exact.clone().expect("an exact value");
    let npv = out.report.options[0].absolute.npv;
    close(exact.marginal, npv);
    assert!((exact.equivalent.unwrap() / npv - 1.0).abs() < 3e-4, "{exact:?} {npv}");
    assert_eq!(exact.elasticity, 1.5);
    assert_eq!(warnings(&out), [""; 0]);
}

/// Consumption of 200 a year, logarithmic utility, factors 1, 0.96..: sum of D (c/c_0) ln((c + x)/c), c_0 = 200.
#[test]
fn a_large_project_has_its_exact_value_beside_and_a_warning() {
    let out = filled(&plan("'4%", "B8: 200 | 200 | 200\nF2: 1", &format!("{PATH}, hence_elasticity F2")));
    let gain = 0.5f64.ln() + 1.6f64.ln() / 1.04 + 1.6f64.ln() / 1.04f64.powi(2);
    let (exact, words) = out.report.options[0].exact.clone().expect("an exact value");
    close(exact.equivalent.unwrap(), 200.0 * (gain.exp() - 1.0));
    // With the project 100 are left at the base, and may go down by this much.
    close(exact.compensating.unwrap(), 100.0 * (1.0 - (-gain).exp()));
    let marginal = 120.0 / 1.04 + 120.0 / 1.04f64.powi(2) - 100.0;
    close(exact.marginal, marginal);
    assert_eq!(warnings(&out), ["not-marginal"]);
    let problem = out.report.problems.iter().find(|p| p.code == "not-marginal").unwrap();
    assert_eq!(problem.place.to_string(), "Plan!B8:D8 [hence_consumption]");
    let off = 100.0 * (marginal / exact.equivalent.unwrap() - 1.0);
    let value =
        format!("at {marginal:.3}, which is {off:.1}% above the exact {:.3}", exact.equivalent.unwrap());
    assert!(problem.message.contains(&value), "{}", problem.message);
    assert!(words.contains("elasticity 1 (from hence_elasticity)"), "{words}");
}

/// At an elasticity of 2 and utility -1/c: 1/c_0 - 1/(c_0 + E) is the sum of D (c/c_0)^2 (1/c - 1/(c + x)).
#[test]
fn consumption_may_be_in_another_unit_and_the_base_between_two_years() {
    // Offsets -1 and 1: consumption at the base is the geometric mean of 100k and 400k, 200k.
    let cells = "B2: '0%\nB4: -1 | 1\nB5: 50000 | 0\nB6: 0 | 100000\nB8: 100 | 400\nF1: 2\nF2: 'k";
    let names = "hence_basis B2, hence_offsets B4:C4, hence_cost_works B5:C5, hence_benefit_low B6:C6, hence_npv B9, \
                 hence_consumption B8:C8, hence_elasticity F1, hence_unit_consumption F2";
    let out = filled(&Small::default().sheet("Plan", cells).names(names));
    let (exact, _) = out.report.options[0].exact.clone().unwrap();
    // In thousands: 100^2/200^2 (1/100 - 1/50) + 400^2/200^2 (1/400 - 1/500) = -1/400 + 1/500.
    let gain = -1.0 / 400.0 + 1.0 / 500.0;
    close(exact.equivalent.unwrap(), 1_000.0 * (1.0 / (1.0 / 200.0 - gain) - 200.0));
}

#[test]
fn over_a_baseline_the_increment_is_compared() {
    let option = |small: Small, name: &str, cost: f64, more: &str| {
        let cells = format!("B5: {cost} | 0\nB6: 0 | 60\n{more}");
        let path = if more.is_empty() { "" } else { ", hence_consumption B8:C8" };
        let own = format!("hence_cost_works B5:C5, hence_benefit_low B6:C6, hence_npv B9{path}");
        small.sheet(name, &cells).own_names(&own)
    };
    let small = Small::default()
        .sheet("Inputs", "B1: 2025\nB2: '4%\nB3: 'Nothing\nB4: 2025 | 2026\nB5: 1")
        .names("hence_base B1, hence_basis B2, hence_baseline B3, hence_years B4:C4, hence_elasticity B5");
    let out = filled(&option(option(small, "Nothing", 10.0, ""), "Wall", 60.0, "B8: 100 | 100"));
    assert_eq!(out.report.options[0].exact, None);
    let (exact, _) = out.report.options[1].exact.clone().unwrap();
    close(exact.equivalent.unwrap(), -50.0);
    close(exact.marginal, -50.0);
}

#[test]
fn a_project_worth_more_than_any_amount_is_said_to_be() {
    // -1/c: 0.25 of gain is all there is above 4; twice 16 more a year is worth 0.4.
    let cells = "B1: 2025\nB2: '0%\nB4: 2025 | 2026\nB5: 0 | 0\nB6: 16 | 16\nB8: 4 | 4\nF1: 2";
    let names = "hence_base B1, hence_basis B2, hence_years B4:C4, hence_cost_works B5:C5, hence_benefit_low B6:C6, \
                 hence_npv B9, hence_consumption B8:C8, hence_elasticity F1";
    let out = filled(&Small::default().sheet("Plan", cells).names(names));
    let (exact, words) = out.report.options[0].exact.clone().unwrap();
    assert_eq!(exact.equivalent, None);
    assert!(words.contains("none is as much"), "{words}");
    assert!(warnings(&out).contains(&"not-marginal"));
}

#[test]
fn what_cannot_be_compared_with_consumption_is_refused_at_its_cells() {
    let faults = |more: &str, names: &str| refused(&plan("'4%", more, &format!("{PATH}, {names}")));
    let path = |code: &str| vec![format!("{code} Plan!B8:D8 [hence_consumption]")];
    assert_eq!(refused(&plan("'4%", "B8: 900 | 900 | 900", PATH)), path("elasticity-missing"));
    let eta = "hence_elasticity F2";
    assert_eq!(faults("B8: 900 | 0 | 900\nF2: 1", eta), ["consumption Plan!C8 [hence_consumption]"]);
    assert_eq!(faults("B8: 900 |  | 900\nF2: 1", eta), ["consumption Plan!C8 [hence_consumption]"]);
    // The works leave nothing of the first year.
    assert_eq!(faults("B8: 100 | 900 | 900\nF2: 1", eta), ["no-meaning Plan!B8 [hence_consumption]"]);
    let weighted = "hence_elasticity F2, hence_income_low F1, hence_income_reference G1";
    assert_eq!(faults("B8: 900 | 900 | 900\nF2: 1\nF1: 1 | 2", weighted), path("consumption-mixed"));
    let own = "hence_elasticity F2, hence_basis_low F1";
    assert_eq!(faults("B8: 900 | 900 | 900\nF2: 1\nF1: 0.01", own), path("consumption-mixed"));
    let short = refused(&plan("'4%", "B8: 900 | 900\nF2: 1", "hence_consumption B8:C8, hence_elasticity F2"));
    assert_eq!(short, ["shape Plan!B8:C8 [hence_consumption]"]);
    // A base before the first year.
    let early = plan("'4%", "B8: 900 | 900 | 900\nF2: 1\nH1: 2020", &format!("{PATH}, {eta}")).open().0;
    let request = FillRequest { roles: vec![("base".into(), "Plan!H1".into())], ..FillRequest::default() };
    let error = fill(&early, &request, &Catalogue::builtin()).expect_err("refused");
    assert!(error.problems().iter().any(|p| p.code == "consumption-base"), "{error}");
}

#[test]
fn consumption_is_covered_by_its_role() {
    let out = filled(&plan("'4%", "B8: 9e6 | 9e6 | 9e6\nF2: 1", &format!("{PATH}, hence_elasticity F2")));
    assert_eq!(out.report.not_valued, [""; 0]);
}
