//! Prices: money of the day made real, prices that grow against others, and rates that do not go with flows.
//!
//! Expected numbers are worked out by hand from (1 + inflation)^-n, index of the price base over index of the year, and
//! (1 + growth)^n, n counting years from the price base.

use hence_core::Catalogue;
use hence_workbook::fill::{FillRequest, Filled, fill};
use hence_workbook::problem::{Problem, Severity};
use hence_workbook::sheets::VERDICT_AGREES;

use crate::small::Small;

const NAMES: &str = "hence_base B1, hence_basis B2, hence_years B4:D4, hence_cost_works B5:D5, \
    hence_benefit_access B6:D6, hence_npv B9";

/// Base 2025, years 2025 to 2027, costs of 100 in 2025, benefits of 100 in 2026 and 2027; more cells and names.
fn plan(basis: &str, more: &str, names: &str) -> Small {
    let cells =
        format!("B1: 2025\nB2: {basis}\nB4: 2025 | 2026 | 2027\nB5: 100 | 0 | 0\nB6: 0 | 100 | 100\n{more}");
    let all: Vec<&str> = [NAMES, names].into_iter().filter(|n| !n.is_empty()).collect();
    Small::default().sheet("Plan", &cells).names(&all.join(","))
}

fn run(small: &Small) -> Result<Filled, Vec<String>> {
    fill(&small.open().0, &FillRequest::default(), &Catalogue::builtin()).map_err(|error| {
        let problems = error.problems().iter().filter(|p| p.severity == Severity::Error);
        problems.map(|p| format!("{} {}", p.code, p.place)).collect()
    })
}

fn filled(small: &Small) -> Filled {
    let filled = run(small).unwrap_or_else(|problems| panic!("{problems:?}"));
    assert_eq!(filled.report.verdict, VERDICT_AGREES);
    filled
}

fn refused(small: &Small) -> Vec<String> {
    run(small).map(|filled| filled.report.options[0].absolute.npv).expect_err("refused")
}

fn warnings(filled: &Filled) -> Vec<&'static str> {
    // What is to be said of a schedule itself is no matter of prices.
    let wanted = |p: &&Problem| p.severity == Severity::Warning && p.code != "basis-note";
    filled.report.problems.iter().filter(wanted).map(|p| p.code).collect()
}

fn npv(small: &Small) -> f64 {
    filled(small).report.options[0].absolute.npv
}

#[track_caller]
fn close(found: f64, expected: f64) {
    assert!(
        (found - expected).abs() <= 1e-12 * expected.abs().max(1.0),
        "found {found}, expected {expected}"
    );
}

#[test]
fn inflation_makes_money_of_the_day_real_in_prices_of_the_base() {
    let out = filled(&plan("'4%", "F1: 'nominal | 0.25", "hence_price_basis F1, hence_prices G1"));
    let (a, b) = (1.25 * 1.04, 1.25f64.powi(2) * 1.04f64.powi(2));
    let option = &out.report.options[0];
    close(option.absolute.npv, 100.0 / a + 100.0 / b - 100.0);
    // Undiscounted totals are real: 80 and 64.
    close(option.absolute.benefits, 144.0);
    assert_eq!(
        option.prices.as_deref(),
        Some(
            "real: flows are entered in money of the day and made real by inflation of 25% a year (from hence_prices), \
             in prices of the base, 2025"
        )
    );
    assert_eq!(warnings(&out), [""; 0]);
    // The same is said by naming inflation alone.
    close(npv(&plan("'4%", "G1: 0.25", "hence_prices G1")), option.absolute.npv);
}

#[test]
fn the_price_base_need_not_be_the_base_of_discounting() {
    // Prices of 2022: the base year's 100 is 100/1.25^3 = 51.2.
    let more = "F1: 'real 2022 | 0.25";
    let names = "hence_price_basis F1, hence_prices G1";
    let expected = 100.0 / 1.25f64.powi(4) / 1.04 + 100.0 / 1.25f64.powi(5) / 1.04f64.powi(2) - 51.2;
    close(npv(&plan("'4%", more, names)), expected);
    // A later one, by an index: 2026 stands at 120, so that 2025 counts 120/96 and 2027 120/150.
    let more = "F1: 'real 2026\nB7: 96 | 120 | 150";
    let names = "hence_price_basis F1, hence_prices B7:D7";
    let out = filled(&plan("'4%", more, names));
    close(out.report.options[0].absolute.npv, 100.0 / 1.04 + 80.0 / 1.04f64.powi(2) - 125.0);
    assert_eq!(out.report.not_valued, [""; 0]);
}

/// Nominal flows at the nominal rate (1 + real)(1 + inflation) - 1 have the value of real flows at the real rate.
#[test]
fn both_ways_of_taking_inflation_out_agree() {
    let nominal = npv(&plan("'9.2%", "F1: 'nominal", "hence_price_basis F1")); // 1.04 x 1.05
    let real = npv(&plan("'4%", "F1: 'nominal | 0.05", "hence_price_basis F1, hence_prices G1"));
    close(nominal, real);
}

#[test]
fn a_price_that_grows_against_others_does_so_from_the_price_base() {
    // From the base, without prices: 100 x 1.1 in 2026, 100 x 1.21 in 2027; the works do not grow.
    let out = filled(&plan("'4%", "F2: 0.1", "hence_growth_access F2"));
    close(out.report.options[0].absolute.npv, 110.0 / 1.04 + 121.0 / 1.04f64.powi(2) - 100.0);
    assert_eq!(out.report.options[0].prices, None);
    // From 2024, after inflation is taken out to prices of 2024.
    let more = "F1: 'real 2024 | 0.25\nF2: 0.1";
    let names = "hence_price_basis F1, hence_prices G1, hence_growth_access F2";
    let flow = |n: i32| 100.0 * (1.1f64 / 1.25).powi(n);
    close(npv(&plan("'4%", more, names)), flow(2) / 1.04 + flow(3) / 1.04f64.powi(2) - 80.0);
}

/// What the command line says moves what values are expressed in, and leaves the prices of each year as they are.
#[test]
fn another_base_or_price_year_does_not_move_the_year_from_which_a_price_grows() {
    let told = |small: &Small, base: Option<&str>, prices: Option<&str>| {
        let (base, prices) = (base.map(str::to_owned), prices.map(str::to_owned));
        let request = FillRequest { base, prices, ..FillRequest::default() };
        let out = fill(&small.open().0, &request, &Catalogue::builtin()).unwrap_or_else(|e| panic!("{e}"));
        assert_eq!(out.report.verdict, VERDICT_AGREES);
        out.report.options[0].absolute.npv
    };
    // 100 x 1.1 in 2026 and 100 x 1.21 in 2027 for 100 in 2025, four years on.
    let grown = plan("'4%", "F2: 0.1", "hence_growth_access F2");
    let expected = 110.0 / 1.04 + 121.0 / 1.04f64.powi(2) - 100.0;
    close(told(&grown, Some("2029"), None), expected * 1.04f64.powi(4));
    // Inflation of 25% taken out to prices of 2025, then to those of 2029; growth stays from 2025.
    let flow = |n: i32| 100.0 * (1.1f64 / 1.25 / 1.04).powi(n);
    let expected = flow(1) + flow(2) - 100.0;
    let names = "hence_price_basis F1, hence_prices G1, hence_growth_access F2";
    let real = plan("'4%", "F1: 'real 2025 | 0.25\nF2: 0.1", names);
    close(told(&real, None, Some("real 2029")), expected * 1.25f64.powi(4));
    close(told(&real, Some("2029"), None), expected * 1.04f64.powi(4));
    let nominal = plan("'4%", "F1: 'nominal | 0.25\nF2: 0.1", names);
    close(told(&nominal, Some("2029"), None), expected * (1.25f64 * 1.04).powi(4));
    close(told(&nominal, None, Some("real 2029")), expected * 1.25f64.powi(4));
}

#[test]
fn what_is_left_over_and_what_goes_on_are_in_the_prices_of_their_years() {
    // 50 left over of the works in 2027 are 32 in prices of 2025.
    let more = "F1: 'nominal | 0.25\nF2: 50";
    let names = "hence_price_basis F1, hence_prices G1, hence_residual_works F2";
    let plain = npv(&plan("'4%", "F1: 'nominal | 0.25", "hence_price_basis F1, hence_prices G1"));
    close(npv(&plan("'4%", more, names)), plain + 32.0 / 1.04f64.powi(2));
    // 100 in 2027 go on, rising by 25% a year in money of the day: a level stream of 64 in real terms.
    let more = "F1: 'nominal | 0.25\nF2: 'growing 25%, for ever";
    let names = "hence_price_basis F1, hence_prices G1, hence_tail_access F2";
    close(npv(&plan("'4%", more, names)), plain + 64.0 / 0.04 / 1.04f64.powi(2));
    // Level as entered, its price growing by 2%.
    let more = "F1: 'for ever\nF2: 0.02";
    let names = "hence_tail_access F1, hence_growth_access F2";
    let grown = |n: i32| 100.0 * 1.02f64.powi(n);
    let listed = grown(1) / 1.04 + grown(2) / 1.04f64.powi(2) - 100.0;
    close(npv(&plan("'4%", more, names)), listed + grown(3) / 0.02 / 1.04f64.powi(2));
}

#[test]
fn a_rate_that_does_not_go_with_the_flows_is_refused_by_name() {
    let schedule = "'us-a94c-2000-nominal";
    let at = |code: &str| vec![format!("{code} Plan!B2 [hence_basis]")];
    assert_eq!(refused(&plan("'uk-2003", "F1: 'nominal", "hence_price_basis F1")), at("prices-differ"));
    assert_eq!(refused(&plan(schedule, "F1: 'real 2025", "hence_price_basis F1")), at("prices-differ"));
    assert_eq!(refused(&plan(schedule, "F1: 0.02", "hence_prices F1")), at("prices-differ"));
    // What goes together, and a plain rate, which records nothing.
    let quiet =
        |basis, more, names| assert_eq!(warnings(&filled(&plan(basis, more, names))), [""; 0], "{basis}");
    quiet("'uk-2026", "F1: 'real 2025", "hence_price_basis F1");
    quiet("'uk-2026", "F1: 'nominal | 0.02", "hence_price_basis F1, hence_prices G1");
    quiet("'4%", "F1: 'nominal", "hence_price_basis F1");
    quiet("'4%", "F1: 'real", "hence_price_basis F1");
    quiet("'4%", "", "");
    let message = fill(
        &plan("'uk-2003", "F1: 'nominal", "hence_price_basis F1").open().0,
        &FillRequest::default(),
        &Catalogue::builtin(),
    )
    .unwrap_err();
    let problem = message.problems().iter().find(|p| p.code == "prices-differ").unwrap();
    assert_eq!(problem.message, "uk-2003 holds real rates, and the flows are nominal (by hence_price_basis)");
}

#[test]
fn prices_that_nobody_states_are_a_warning_where_the_schedule_records_its_own() {
    let out = filled(&plan("'uk-2026", "", ""));
    assert_eq!(warnings(&out), ["prices-unstated"]);
    let problem = out.report.problems.iter().find(|p| p.code == "prices-unstated").unwrap();
    assert_eq!(problem.place.to_string(), "Plan!B2 [hence_basis]");
    assert!(problem.hint.as_deref().unwrap_or_default().contains("`real 2025`"), "{:?}", problem.hint);
}

#[test]
fn what_the_cells_of_prices_hold_is_checked() {
    let faults = |more: &str, names: &str| refused(&plan("'4%", more, names));
    let basis = "hence_price_basis F1";
    assert_eq!(faults("F1: 'yes", basis), ["price-basis Plan!F1 [hence_price_basis]"]);
    assert_eq!(faults("", basis), ["blank-setting Plan!F1 [hence_price_basis]"]);
    assert_eq!(faults("F1: 'nominal to real 2022", basis), ["price-basis Plan!F1 [hence_price_basis]"]);
    assert_eq!(faults("F1: 2.5", "hence_prices F1"), ["price-rate Plan!F1 [hence_prices]"]);
    assert_eq!(faults("F1: 'two", "hence_prices F1"), ["text-value Plan!F1 [hence_prices]"]);
    assert_eq!(faults("F1: -0.6", "hence_growth_access F1"), ["price-rate Plan!F1 [hence_growth_access]"]);
    assert_eq!(faults("F1: 0.01", "hence_growth_roads F1"), ["unknown-stream Plan!F1 [hence_growth_roads]"]);
    assert_eq!(faults("B7: 100 | 0 | 104", "hence_prices B7:D7"), ["price-index Plan!C7 [hence_prices]"]);
    assert_eq!(faults("B7: 100 |  | 104", "hence_prices B7:D7"), ["price-index Plan!C7 [hence_prices]"]);
    assert_eq!(faults("B7: 100 | 102", "hence_prices B7:C7"), ["shape Plan!B7:C7 [hence_prices]"]);
    // The index has no level for 2022, and none after the last year.
    let more = "F1: 'real 2022\nB7: 100 | 102 | 104\nF2: 'for ever";
    let names = "hence_price_basis F1, hence_prices B7:D7";
    assert_eq!(faults(more, names), ["price-year Plan!F1 [hence_price_basis]"]);
    let names = "hence_prices B7:D7, hence_tail_access F2";
    assert_eq!(faults(more, names), ["price-tail Plan!F2 [hence_tail_access]"]);
    // Years that count from 0, with no base year to place 2022 by.
    let numbered = Small::default()
        .sheet("Plan", "B2: '4%\nB4: 0 | 1\nB5: 100 | 0\nB6: 0 | 120\nF1: 'real 2022 | 0.02")
        .names(
            "hence_basis B2, hence_years B4:C4, hence_cost_works B5:C5, hence_benefit_access B6:C6, hence_npv B9, \
             hence_price_basis F1, hence_prices G1",
        );
    assert_eq!(refused(&numbered), ["price-year Plan!F1 [hence_price_basis]"]);
}

#[test]
fn options_may_have_prices_of_their_own() {
    let sheet = |name: &str, prices: &str, small: Small| {
        let cells = format!("B4: 2025 | 2026\nB5: 100 | 0\nB6: 0 | 150\n{prices}");
        let own = "hence_years B4:C4, hence_cost_works B5:C5, hence_benefit_access B6:C6, hence_npv B9";
        let own = if prices.is_empty() { own.to_owned() } else { format!("{own}, hence_prices F1") };
        small.sheet(name, &cells).own_names(&own)
    };
    let small = Small::default().sheet("Inputs", "B1: 2025\nB2: '4%").names("hence_base B1, hence_basis B2");
    let small = sheet("Low", "", sheet("High", "F1: 0.5", small));
    let out = filled(&small);
    let npv: Vec<f64> = out.report.options.iter().map(|option| option.absolute.npv).collect();
    close(npv[0], 100.0 / 1.04 - 100.0);
    close(npv[1], 150.0 / 1.04 - 100.0);
}
