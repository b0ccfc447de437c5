//! Rules of precedence, warnings and limits (specification, sections 2, 3 and 6), one small workbook a rule.

use hence_core::Catalogue;
use hence_workbook::check::{CheckRequest, check};
use hence_workbook::fill::{FillRequest, Filled, fill};
use hence_workbook::problem::Severity;
use hence_workbook::sheets::VERDICT_AGREES;

use super::cells;
use super::published::number_at;
use crate::small::Small;

const NAMES: &str = "hence_base B1, hence_basis B2, hence_years B4:D4, hence_cost_works B5:D5, \
    hence_benefit_access B6:D6, hence_factor B7:D7, hence_npv B9, hence_ratio B10, hence_irr B11, hence_payback B12, \
    hence_annual B13";

/// Base 2025, years 2025 to 2027, costs 100 in the base year, benefits 80 and 90 after it; lines of `more` that begin at
/// the same cell stand instead.
fn plan(basis: &str, more: &str, names: &str) -> Small {
    let plain = format!("B1: 2025\nB2: {basis}\nB4: 2025 | 2026 | 2027\nB5: 100 | 0 | 0\nB6: 0 | 80 | 90");
    let first = |line: &str| line.split(':').next().unwrap_or_default().to_owned();
    let changed: Vec<String> = more.lines().map(first).collect();
    let kept = plain.lines().filter(|line| !changed.contains(&first(line)));
    let cells = kept.chain(more.lines()).collect::<Vec<_>>().join("\n");
    let all: Vec<&str> = [NAMES, names].into_iter().filter(|n| !n.is_empty()).collect();
    Small::default().sheet("Plan", &cells).names(&all.join(","))
}

fn run(small: &Small, request: &FillRequest) -> Result<Filled, String> {
    fill(&small.open().0, request, &Catalogue::builtin()).map_err(|error| error.to_string())
}

fn filled(small: &Small) -> Filled {
    run(small, &FillRequest::default()).unwrap_or_else(|error| panic!("{error}"))
}

fn basis(text: &str) -> FillRequest {
    FillRequest { basis: Some(text.to_owned()), ..FillRequest::default() }
}

fn warnings(filled: &Filled) -> Vec<&'static str> {
    let loud = filled.report.problems.iter().filter(|p| p.severity == Severity::Warning);
    loud.map(|p| p.code).collect()
}

fn factor(filled: &Filled, cell: &str) -> f64 {
    number_at(&cells(&filled.bytes), "Plan", cell).expect("a factor")
}

#[track_caller]
fn close(found: f64, expected: f64) {
    assert!(
        (found - expected).abs() <= 1e-12 * expected.abs().max(1.0),
        "found {found}, expected {expected}"
    );
}

#[test]
fn the_command_line_beats_the_cell_the_cell_the_line_the_line_its_schedule() {
    let timed = |basis: &str, timing: &str| plan(basis, &format!("F1: {timing}"), "hence_timing F1");
    let own = filled(&timed("'4%; flows start", "'flows middle"));
    close(factor(&own, "C7"), 1.04_f64.powf(-0.5));
    assert_eq!(warnings(&own), ["timing-differs"]);

    let agreed = filled(&timed("'4%; flows middle", "'flows middle"));
    assert_eq!(warnings(&agreed), [""; 0]);

    // Of the command line's two positions the one that it leaves out is the cell's.
    let told = run(&timed("'4%", "'flows middle, base start"), &basis("5%; flows end")).unwrap();
    close(factor(&told, "C7"), 1.05_f64.powf(-2.0));
    assert_eq!(warnings(&told), ["basis-overridden", "timing-differs"]);
    let silent = run(&timed("'4%", "'flows middle"), &basis("5%")).unwrap();
    close(factor(&silent, "C7"), 1.05_f64.powf(-0.5));

    let line = filled(&plan("'5%; flows start, base start", "", ""));
    close(factor(&line, "C7"), 1.0 / 1.05);
}

#[test]
fn a_basis_from_the_command_line_leaves_a_workbook_that_declares_what_was_used() {
    let small = plan("'4%", "F1: 'flows middle, base start", "hence_timing F1");
    let told = run(&small, &basis("5%; flows end")).unwrap();
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("told.xlsx");
    std::fs::write(&path, &told.bytes).unwrap();
    let package = hence_workbook::package::Package::open(&path).unwrap();
    let report = check(&package, &CheckRequest::default(), &Catalogue::builtin()).unwrap();
    assert!(report.agrees(), "{:?}", report.differences);
    // Filled again, nothing differs either.
    let again = fill(&package, &FillRequest::default(), &Catalogue::builtin()).unwrap();
    close(again.report.options[0].absolute.npv, told.report.options[0].absolute.npv);
}

#[test]
fn a_flat_rate_for_a_cell_that_held_a_number_stays_a_number() {
    let held = plan("0.04", "", "");
    let told = run(&held, &basis("3%")).unwrap();
    let values = cells(&told.bytes);
    assert_eq!(number_at(&values, "Plan", "B2"), Some(0.03));
    assert!(!warnings(&told).contains(&"basis-text"));
    // Formulas that count with the cell cannot count with a text.
    let text = run(&held, &basis("uk-2003")).unwrap();
    assert!(warnings(&text).contains(&"basis-text"), "{:?}", warnings(&text));
    assert_eq!(number_at(&cells(&text.bytes), "Plan", "B2"), None);
    // The same rate in other words is the same rate: the cell keeps its number.
    let same = run(&held, &basis("4.0%")).unwrap();
    assert_eq!(number_at(&cells(&same.bytes), "Plan", "B2"), Some(0.04));
}

#[test]
fn a_timing_where_dates_or_offsets_say_when_is_ignored_with_a_warning() {
    let cells = "B2: '4%\nB4: 0 | 1.5\nB5: 100 | 0\nB6: 0 | 120\nF1: 'flows middle";
    let names = "hence_basis B2, hence_offsets B4:C4, hence_cost_works B5:C5, hence_benefit_access B6:C6, \
        hence_factor B7:C7, hence_timing F1";
    let out = filled(&Small::default().sheet("Plan", cells).names(names));
    close(factor(&out, "C7"), 1.04_f64.powf(-1.5));
    assert_eq!(warnings(&out), ["timing-ignored"]);
}

#[test]
fn financial_years_match_with_spaces_around_them() {
    let small = plan("'4%", "B1: '2025/26\nB4: ' 2025/26 | '2026/27 | '2027/28", "");
    assert_eq!(filled(&small).report.verdict, VERDICT_AGREES);
}

#[test]
fn a_residual_lowers_a_cost_and_raises_a_benefit_whatever_the_signs() {
    let residuals = "F1: 10 | 20";
    let names = "hence_residual_works F1, hence_residual_access G1";
    let positive = filled(&plan("0.0", residuals, names)).report.options[0].absolute;
    assert_eq!((positive.costs, positive.benefits), (90.0, 190.0));
    let cells = format!("{residuals}\nH1: 'costs negative\nB5: -100 | 0 | 0");
    let negative = filled(&plan("0.0", &cells, &format!("{names}, hence_signs H1")));
    assert_eq!((negative.report.options[0].absolute.costs, warnings(&negative).len()), (90.0, 0));
    let doubtful = filled(&plan("0.0", "F1: -10", "hence_residual_works F1"));
    assert_eq!(warnings(&doubtful), ["residual-sign"]);
}

#[test]
fn the_uplift_is_on_the_flows_and_on_what_follows_but_not_on_the_residual() {
    // 100 a year with 20% added, at 10%, 5 left over at year 2, 3 more years: 120 (1/1.1 + ... + 1/1.1^5) - 5/1.21.
    let small = plan(
        "0.1",
        "B5: 0 | 100 | 100\nF1: 0.2 | 5 | 'to 2030",
        "hence_uplift_works F1, hence_residual_works G1, hence_tail_works H1",
    );
    let out = filled(&small);
    let annuity: f64 = (1..=5).map(|n| 1.1_f64.powi(-n)).sum();
    close(out.report.options[0].absolute.pv_costs, 120.0 * annuity - 5.0 / 1.21);
    close(out.report.options[0].absolute.costs, 235.0);
}

#[test]
fn what_follows_the_last_year_counts_in_rates_payback_and_eras() {
    // 1,000 now, 100 a year in years 1 and 2 and 18 years more: the rate of return of a level annuity of 20 years.
    let small = plan("0.05", "B5: 1000 | 0 | 0\nB6: 0 | 100 | 100\nF1: 'to 2045", "hence_tail_access F1");
    let out = &filled(&small).report.options[0];
    let npv = |rate: f64| (1..=20).map(|n| 100.0 * (1.0_f64 + rate).powi(-n)).sum::<f64>() - 1000.0;
    assert_eq!(out.irr.len(), 1);
    assert!(npv(out.irr[0]).abs() < 1e-9, "{:?}", out.irr);
    // Cumulated at 5%: 100 (1 - 1.05^-n)/0.05 reaches 1,000 at n = ln 2/ln 1.05 = 14.2.
    let back = out.payback.first.expect("a payback");
    assert!((14.0..15.0).contains(&back) && out.payback.last == Some(back), "{back}");

    let endless = plan("0.05", "B5: 1000 | 0 | 0\nB6: 0 | 100 | 100\nF1: 'for ever", "hence_tail_access F1");
    let out = filled(&endless);
    let option = &out.report.options[0];
    close(option.absolute.pv_benefits, 2000.0);
    assert!(option.endless && option.irr.is_empty() && option.mean_time.is_none());
    // 1,000 of cost and 2,000 (1 - 1.05^-30) of benefit to year 30, 2,000 1.05^-100 after year 100.
    close(option.era_shares[0], (1000.0 + 2000.0 * (1.0 - 1.05_f64.powi(-30))) / 3000.0);
    close(option.era_shares[2], 2000.0 * 1.05_f64.powi(-100) / 3000.0);
    assert_eq!(out.report.verdict, VERDICT_AGREES);
}

#[test]
fn the_edge_year_is_in_the_earlier_era_and_the_earlier_band() {
    let small = Small::default()
        .sheet("Plan", "B2: '4% to 30, 2% after\nB4: 0 | 30 | 31\nB5: 1 | 0 | 0\nB6: 0 | 1 | 1")
        .names(
            "hence_basis B2, hence_years B4:D4, hence_cost_works B5:D5, hence_benefit_access B6:D6, hence_factor B7:D7",
        );
    let out = filled(&small);
    let (at, after) = (1.04_f64.powi(-30), 1.04_f64.powi(-30) / 1.02);
    close(factor(&out, "C7"), at);
    close(factor(&out, "D7"), after);
    close(out.report.options[0].era_shares[1], after / (1.0 + at + after));
}

#[test]
fn measures_without_a_number_have_words() {
    let out = filled(&plan("0.04", "B5: 0 | 0 | 0\nB6: 0 | 0 | 0", ""));
    let option = &out.report.options[0];
    assert_eq!((option.absolute.npv, option.absolute.ratio, option.irr.len()), (0.0, None, 0));
    assert_eq!(out.report.verdict, VERDICT_AGREES);
    // Every flow in the base year: no service year, so no annual equivalent.
    let now = filled(&plan("0.04", "B1: 2027", ""));
    assert_eq!(now.report.options[0].service_years, 0);
    assert_eq!(now.report.options[0].absolute.annual, None);
    assert_eq!(now.report.verdict, VERDICT_AGREES);
    // Two rates of return, 9.18% and 62.2%: Dahlquist, Knight, Principles of Finance 2e, OpenStax, 2022.
    let two = filled(&plan("0.04", "B5: 350 | 0 | 620\nB6: 0 | 950 | 0", ""));
    assert_eq!(two.report.options[0].irr.len(), 2);
    let text = cells(&two.bytes)[&("Plan".to_owned(), "B11".parse().unwrap())].to_string();
    assert!(text.starts_with("several rates: see "), "{text}");
    // (1 + r - 1.1)^2 = 0 touches zero at 10% and never crosses.
    let touching = filled(&plan("0.04", "B5: 100 | 0 | 121\nB6: 0 | 220 | 0", ""));
    let option = &touching.report.options[0];
    assert_eq!((option.irr.len(), option.irr_unresolved.len()), (0, 1), "{:?}", option.irr);
    let text = cells(&touching.bytes)[&("Plan".to_owned(), "B11".parse().unwrap())].to_string();
    assert!(text.starts_with("not settled: see "), "{text}");
}

#[test]
fn numbers_that_cannot_be_held_are_refused_and_long_horizons_are_not() {
    let error = run(&plan("0.04", "B5: 1e308 | 1e308 | 1e308", ""), &FillRequest::default()).unwrap_err();
    assert!(error.contains("too large"), "{error}");
    // Each option can be held, the difference to the baseline cannot.
    let years: Vec<String> = (0..1000).map(|i| (2000 + i).to_string()).collect();
    let flows: Vec<String> = (0..1000).map(|i| (1 + i % 7).to_string()).collect();
    let text = format!("B1: 2000\nB2: 'uk-2003\nB4: {}\nB5: {}", years.join(" | "), flows.join(" | "));
    let small = Small::default()
        .sheet("Plan", &text)
        .names("hence_base B1, hence_basis B2, hence_years B4:ALM4, hence_cost_works B5:ALM5, hence_npv B7");
    let out = filled(&small);
    let factor = |n: i32| {
        let bands = [(30, 1.035_f64), (75, 1.03), (125, 1.025), (200, 1.02), (300, 1.015), (1000, 1.01)];
        let mut lower = 0;
        bands.iter().fold(1.0, |d, &(upper, growth)| {
            let inside = (n.min(upper) - lower).max(0);
            lower = upper;
            d * growth.powi(-inside)
        })
    };
    let expected: f64 = (0..1000).map(|n| f64::from(1 + n % 7) * factor(n)).sum();
    close(out.report.options[0].absolute.pv_costs, expected);
    assert_eq!(out.report.verdict, VERDICT_AGREES);
}

/// Two options on sheets of their own, the first the baseline; `more` goes to the second.
fn options(first: &str, second: &str, names: [&str; 2]) -> Small {
    let cells = |text: &str| format!("B1: 2025\nB2: '4%\nB4: 2025 | 2026 | 2027\nH1: 'Nothing\n{text}");
    let named = |own: &str, option: &str| {
        let shared = format!("hence_years__{option} B4:D4, hence_npv__{option} B9");
        let own = own.split(',').map(|item| {
            let (name, at) = item.trim().split_once(' ').unwrap();
            format!("{name}__{option} {at}")
        });
        std::iter::once(shared).chain(own).collect::<Vec<_>>().join(",")
    };
    Small::default()
        .sheet("Nothing", &cells(first))
        .names(&format!("hence_base B1, hence_basis B2, hence_baseline H1, {}", named(names[0], "nothing")))
        .sheet("Works", &cells(second))
        .names(&named(names[1], "works"))
}

#[test]
fn a_damage_counts_where_it_falls_below_the_baselines() {
    let both = options(
        "B5: 50 | 50 | 50",
        "B5: 20 | 20 | 20\nB6: 60 | 0 | 0",
        ["hence_damage_flood B5:D5", "hence_damage_flood B5:D5, hence_cost_wall B6:D6"],
    );
    let out = filled(&both);
    let avoided = 30.0 * (1.0 + 1.0 / 1.04 + 1.04_f64.powi(-2));
    let increment = out.report.options[1].increment.expect("an increment");
    close(increment.pv_benefits, avoided);
    close(increment.npv, avoided - 60.0);
    close(increment.ratio.unwrap(), avoided / 60.0);
    assert_eq!(warnings(&out), [""; 0]);
    // The option does not say what becomes of the damage: it counts as gone, and that is said.
    let lacking =
        options("B5: 50 | 50 | 50", "B6: 60 | 0 | 0", ["hence_damage_flood B5:D5", "hence_cost_wall B6:D6"]);
    let out = filled(&lacking);
    assert_eq!(warnings(&out), ["baseline-damage"]);
    close(out.report.options[1].increment.unwrap().pv_benefits, avoided * 50.0 / 30.0);
}

#[test]
fn an_increment_between_two_timings_is_warned_of_and_dates_each_sides_flows_by_its_own() {
    let small = options(
        "B5: 100 | 0 | 0",
        "B5: 300 | 0 | 0\nB6: 0 | 0 | 260\nF1: 'flows averaged, base start",
        ["hence_cost_upkeep B5:D5", "hence_cost_upkeep B5:D5, hence_benefit_use B6:D6, hence_timing F1"],
    );
    let out = filled(&small);
    assert!(warnings(&out).contains(&"baseline-basis"), "{:?}", warnings(&out));
    // Averaged from the start of 2025: 2025 stands at 0 and 1, 2027 at 2 and 3; the baseline's 2025 at 0.
    let npv = |r: f64| {
        let v = 1.0 / (1.0 + r);
        -150.0 - 150.0 * v + 130.0 * v * v + 130.0 * v * v * v + 100.0
    };
    let [rate] = out.report.options[1].irr[..] else { panic!("{:?}", out.report.options[1].irr) };
    assert!(npv(rate).abs() < 1e-9, "{rate}");
}

#[test]
fn a_budget_is_of_costs_and_names_do_not_mind_case() {
    let small = plan("0.0", "F1: 'Works", "hence_budget F1");
    let option = filled(&small).report.options[0].clone();
    close(option.npv_per_budget.unwrap(), 0.7);
    let wrong = run(&plan("0.0", "F1: 'access", "hence_budget F1"), &FillRequest::default()).unwrap_err();
    assert!(wrong.contains("`access` is no cost"), "{wrong}");
}

#[test]
fn a_companion_keeps_the_timing_and_one_basis_for_all_options() {
    // The UK's reduced rates stand beside the standard ones beyond 50 years (uk-2018's companion).
    let years: Vec<String> = (0..=60).map(|i| (2025 + i).to_string()).collect();
    let ones = vec!["1"; 61].join(" | ");
    let text =
        format!("B1: 2025\nB2: 'uk-2018; flows start, base start\nB4: {}\nB5: {ones}", years.join(" | "));
    let small = Small::default()
        .sheet("Plan", &text)
        .names("hence_base B1, hence_basis B2, hence_years B4:BJ4, hence_cost_works B5:BJ5, hence_npv B7");
    let out = filled(&small);
    let companion = out.report.options[0].companion.clone().expect("a companion");
    assert_eq!(companion.id, "uk-2018-reduced");
    let reduced =
        fill(&small.open().0, &basis("uk-2018-reduced; flows start, base start"), &Catalogue::builtin());
    close(companion.totals.npv, reduced.unwrap().report.options[0].absolute.npv);
}

#[test]
fn check_compares_what_formulas_show_and_takes_no_error_for_a_missing_result() {
    let differing = |held: &str| {
        let small = plan("0.04", held, "");
        let report = check(&small.open().0, &CheckRequest::default(), &Catalogue::builtin()).unwrap();
        let found: Vec<String> = report.differences.iter().map(|d| d.found.clone()).collect();
        (found, report.problems.iter().filter(|p| p.code == "awaits-recalculation").count())
    };
    assert_eq!(differing("B10: =1/0>"), (vec![], 1));
    assert_eq!(differing("B10: 3"), (vec!["3".to_owned()], 0));
    assert_eq!(differing("B10: #DIV/0!"), (vec!["#DIV/0!".to_owned()], 0));
    assert_eq!(differing("B5: 0 | 0 | 0\nB10: 'n/a"), (vec![], 0));
    assert_eq!(differing("B5: 0 | 0 | 0\nB10: 1.5"), (vec!["1.5".to_owned()], 0));
}

#[test]
fn formulas_that_depend_on_what_is_filled_wait_for_a_spreadsheet_program() {
    // The analyst's own net present value over a factor row that was blank: its stored 0 is from before the fill.
    let small = plan("0.04", "B9: =SUMPRODUCT(B6:D6-B5:D5,B7:D7)>0", "");
    let out = filled(&small);
    assert_eq!(warnings(&out), ["awaits-recalculation"]);
    assert!(out.report.verdict.starts_with("awaits recalculation: 1 of "), "{}", out.report.verdict);
    // Factors that count with the basis cell, which the command line changes.
    let factors = "B7: =(1+$B$2)^-0>1 | =(1+$B$2)^-1>0.961538461538461 | =(1+$B$2)^-2>0.924556213017751";
    let own = filled(&plan("0.04", factors, ""));
    assert_eq!((warnings(&own).len(), own.report.ticked), (0, 3));
    let told = run(&plan("0.04", factors, ""), &basis("3%")).unwrap();
    let found = warnings(&told);
    assert_eq!(found, ["basis-overridden", "awaits-recalculation"]);
    assert!(told.report.problems.iter().all(|p| p.severity < Severity::Error));
    // A flow that counts with a filled cell was read before the fill.
    let circular = filled(&plan("0.04", "B5: 100 | =C7*100>0 | 0", ""));
    assert!(warnings(&circular).contains(&"flow-follows"), "{:?}", warnings(&circular));
}

#[test]
fn formulas_of_an_earlier_fill_are_replaced_where_more_is_said_since() {
    let small = plan("0.04", "F1: 'k", "hence_pv B14:D14");
    let first = filled(&small);
    let package = hence_workbook::package::Package::from_bytes("again.xlsx", first.bytes).unwrap();
    let roles = vec![("unit_works".to_owned(), "Plan!F1".to_owned())];
    let request = FillRequest { roles, ..basis("5%") };
    let again = fill(&package, &request, &Catalogue::builtin()).unwrap_or_else(|error| panic!("{error}"));
    assert_eq!(again.report.verdict, VERDICT_AGREES);
    assert!(again.report.problems.iter().all(|p| p.severity < Severity::Error));
    close(number_at(&cells(&again.bytes), "Plan", "B14").unwrap(), -100_000.0);
    // The totals of filled rows are not held to what they were before.
    let values = cells(&again.bytes);
    let results: Vec<String> = values
        .iter()
        .filter(|((sheet, cell), _)| sheet == "Audit coverage" && cell.col == 7 && cell.row > 3)
        .map(|(_, data)| data.to_string())
        .collect();
    assert_eq!(results[..2], ["agrees", "agrees"]);
    assert!(results[2..].iter().all(|text| text.contains("follows filled cells")), "{results:?}");
}

#[test]
fn costs_entered_negative_leave_no_minus_zero() {
    let small =
        plan("0.04", "B5: -100 | 0 | 0\nF1: 'costs negative", "hence_signs F1, hence_pv_works B14:D14");
    let out = fill(
        &small.open().0,
        &FillRequest { formulas: false, ..FillRequest::default() },
        &Catalogue::builtin(),
    );
    let values = cells(&out.unwrap().bytes);
    for cell in ["C14", "D14"] {
        let found = number_at(&values, "Plan", cell).unwrap();
        assert!(found == 0.0 && found.is_sign_positive(), "{cell}: {found}");
    }
}
