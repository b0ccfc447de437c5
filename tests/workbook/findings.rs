//! Mistakes that a check finds, and names. Every number in these workbooks is worked out by plain arithmetic.

mod plan;

use std::path::Path;

use hence_core::Catalogue;
use hence_workbook::check::{CheckRequest, check};
use hence_workbook::fill::{FillRequest, fill};
use hence_workbook::findings::Kind;
use hence_workbook::package::Package;

use crate::small::Small;
use plan::{Plan, Shows, UK, banded, codes, flat, rounded, show, uk};

#[track_caller]
fn close(found: f64, expected: f64) {
    assert!((found - expected).abs() <= 1e-9 * expected.abs().max(1.0), "found {found}, expected {expected}");
}

/// What the mistake adds to the net present value, worked out here.
fn added(wrong: &Plan, right: impl Fn(f64) -> f64) -> f64 {
    let right: Vec<f64> = (0..wrong.factors.len()).map(|i| right(i as f64)).collect();
    Plan::npv(&wrong.factors) - Plan::npv(&right)
}

#[test]
fn right_factors_give_no_finding() {
    for shows in [Shows::All, Shows::Present, Shows::Npv] {
        for years in [5, 29, 31, 100, 350] {
            assert_eq!(Plan::new(UK, years, uk).shows(shows).codes(), [""; 0], "{years} years");
        }
        let middle = Plan::new(UK, 60, |i| uk(i + 0.5)).timed("flows middle, base start").shows(shows);
        assert_eq!(middle.codes(), [""; 0]);
        assert_eq!(Plan::new("4%", 40, flat(0.04)).shows(shows).codes(), [""; 0]);
        let gamma = |t: f64| (1.0 + t * 0.03 * 0.03 / 0.04).powf(-(0.04f64 / 0.03).powi(2));
        assert_eq!(Plan::new("gamma mean 4% sd 3%", 80, gamma).shows(shows).codes(), [""; 0]);
        let mixture = |t: f64| 0.5 * 1.01f64.powf(-t) + 0.5 * (-0.07 * t).exp();
        let line = "0.5 of (1%), 0.5 of (7% continuous)";
        assert_eq!(Plan::new(line, 80, mixture).shows(shows).codes(), [""; 0]);
        let ramsey = Plan::new("preference 1%, elasticity 1.5, growth 2%", 50, flat(0.04));
        assert_eq!(ramsey.shows(shows).codes(), [""; 0]);
    }
}

/// Cells of columns E and F, shown as `#,##0.00` and rounded to that where so wanted.
fn shown_to_pennies(plan: &Plan, round: bool) -> String {
    let cell = |x: f64| if round { rounded(x, 2) } else { x };
    let row = |(i, d): (usize, &f64)| {
        let (cost, benefit) = Plan::flows(i);
        format!("E{}: {{3}}{} | {{3}}{}\n", 10 + i, cell(cost * d), cell(benefit * d))
    };
    plan.factors.iter().enumerate().map(row).collect()
}

#[test]
fn digits_that_are_shown_or_typed_are_no_mistake() {
    let plan = |factor: &dyn Fn(f64) -> f64| Plan::new(UK, 100, factor);
    // Typed with the fifteen digits that a spreadsheet program shows.
    let typed = |t: f64| -> f64 { format!("{:.14e}", uk(t)).parse().unwrap() };
    assert_eq!(plan(&typed).codes(), [""; 0]);
    for round in [true, false] {
        let right = plan(&uk).shows(Shows::Present);
        let cells = shown_to_pennies(&right, round);
        assert_eq!(right.with(&cells, "").codes(), [""; 0]);
        // A mistake shows through the digits.
        let wrong = plan(&flat(0.035)).shows(Shows::Present);
        let cells = shown_to_pennies(&wrong, round);
        wrong.with(&cells, "").only(Kind::FlatForBands);
    }
}

#[test]
fn cells_that_hold_an_error_value_are_said_to() {
    let plan = Plan::new(UK, 20, uk);
    let cells: String = (0..=20).map(|i| format!("D{}: #VALUE!\n", 10 + i)).collect();
    let finding = plan.with(&format!("{cells}B4: #REF!\n"), "").checked().findings;
    let [factors, npv] = &finding[..] else { panic!("{finding:?}") };
    assert_eq!((factors.found.as_str(), npv.found.as_str()), ("#VALUE!", "#REF!"));
    assert!(
        factors.words.contains("21 of 21 cells") && factors.words.contains("hold an error value (#VALUE!)")
    );
    assert!(npv.words.contains("holds the error value #REF!"), "{}", npv.words);
    for finding in [factors, npv] {
        assert!(!finding.words.contains("no reason"), "{}", finding.words);
    }
}

/// The present values of a plan by year, and its totals, rounded to so many decimals.
fn rounded_results(plan: &Plan, places: i32) -> String {
    let mut cells = String::new();
    let (mut costs, mut benefits) = (0.0, 0.0);
    for (i, d) in plan.factors.iter().enumerate() {
        let (cost, benefit) = Plan::flows(i);
        let (cost, benefit) = (rounded(cost * d, places), rounded(benefit * d, places));
        (costs, benefits) = (costs + cost, benefits + benefit);
        cells.push_str(&format!("E{}: {cost} | {benefit}\n", 10 + i));
    }
    format!("{cells}B4: {}\nB5: {costs}\nB6: {benefits}\n", benefits - costs)
}

#[test]
fn present_values_that_are_rounded_are_no_mistake() {
    for shows in [Shows::All, Shows::Present] {
        for places in [0, 1, 2] {
            // Totals that are the sums of rounded numbers, and the ratio of their exact values.
            let right = Plan::new(UK, 60, uk).shows(shows);
            let cells = rounded_results(&right, places);
            let report = right.with(&cells, "").checked();
            assert_eq!(codes(&report), [""; 0], "{places}: {:?}", report.findings);
        }
        // One wrong number among them is still told.
        let right = Plan::new(UK, 60, uk).shows(shows);
        let cells = rounded_results(&right, 1);
        let value = rounded(Plan::flows(12).1 * uk(12.0), 1);
        let wrong = right.with(&format!("{cells}F22: {}\n", value + 3.0), "").checked();
        assert_eq!(wrong.findings[0].place.to_string(), "Plan!F22 [hence_pv_water]", "{:?}", wrong.findings);
    }
    // And so are wrong factors beside them.
    let wrong = Plan::new(UK, 60, flat(0.05));
    let cells = rounded_results(&wrong, 2);
    let found = wrong.with(&cells, "").checked().findings;
    assert_eq!(found[0].kind, Kind::FlatForBands, "{}", show(&found[0]));
}

#[test]
fn a_total_that_is_the_right_one_rounded_is_no_mistake() {
    let right = Plan::npv(&Plan::new(UK, 60, uk).factors);
    for shows in [Shows::All, Shows::Npv] {
        for places in [-1, 0, 1, 2, 3, 6] {
            let plan = Plan::new(UK, 60, uk).shows(shows);
            let cell = |npv: f64| format!("B4: {}", rounded(npv, places));
            assert_eq!(plan.with(&cell(right), "").codes(), [""; 0], "{right} to {places}");
        }
        // One unit of the last digit is no rounding.
        let plan = Plan::new(UK, 60, uk).shows(shows).with(&format!("B4: {}", rounded(right, 0) + 1.0), "");
        assert_eq!(plan.checked().findings[0].place.to_string(), "Plan!B4 [hence_npv]");
    }
}

#[test]
fn filled_samples_have_no_finding() {
    for sample in ["mine-drainage.xlsx", "mine-drainage-libreoffice.xlsx"] {
        let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../samples").join(sample);
        let package = Package::open(&path).expect("the sample opens");
        let catalogue = Catalogue::builtin();
        for formulas in [true, false] {
            let filled = fill(&package, &FillRequest { formulas, ..FillRequest::default() }, &catalogue);
            let filled = Package::from_bytes(sample, filled.expect("it is filled").bytes).unwrap();
            let report = check(&filled, &CheckRequest::default(), &catalogue).expect("it is checked");
            assert_eq!((codes(&report), report.agree), (vec![], 1628), "{sample}");
        }
    }
}

#[test]
fn one_rate_for_all_years() {
    for shows in [Shows::All, Shows::Present] {
        let plan = Plan::new(UK, 100, flat(0.035)).shows(shows);
        let finding = plan.only(Kind::FlatForBands);
        close(finding.effect_on_npv.unwrap(), added(&plan, uk));
        assert!(finding.confidence > 0.9, "{}", show(&finding));
        assert!(finding.words.contains("a flat 3.5%"), "{}", show(&finding));
        assert!(finding.words.contains("3% to 75"), "{}", show(&finding));
    }
    // A rate that is none of the bands'.
    let finding = Plan::new(UK, 100, flat(0.0325)).only(Kind::FlatForBands);
    assert!(finding.words.contains("a flat 3.25%"), "{}", show(&finding));
    assert_eq!(finding.place.to_string(), "Plan!D10:D110 [hence_factor]");
}

#[test]
fn a_whole_or_half_year_off() {
    for (later, said) in [
        (0.5, "half a year later"),
        (-0.5, "half a year earlier"),
        (1.0, "a whole year later"),
        (-1.0, "a whole year earlier"),
    ] {
        for (basis, factor) in [(UK, &uk as &dyn Fn(f64) -> f64), ("5%", &flat(0.05))] {
            for shows in [Shows::All, Shows::Present] {
                let plan = Plan::new(basis, 60, |i| factor(i + later)).shows(shows);
                for finding in plan.checked().findings {
                    assert_eq!(finding.kind, Kind::OffByPeriod, "{basis} {later}: {}", show(&finding));
                    assert!(finding.words.contains(said), "{}", show(&finding));
                }
                assert!(!plan.codes().is_empty(), "{basis} {later}");
                if shows == Shows::All {
                    close(plan.only(Kind::OffByPeriod).effect_on_npv.unwrap(), added(&plan, factor));
                }
            }
        }
    }
    // The first year undiscounted, and the second too.
    Plan::new(UK, 60, |i| uk((i - 1.0).max(0.0))).only(Kind::OffByPeriod);
    let middle = Plan::new(UK, 60, uk).timed("flows middle, base start");
    middle.only(Kind::OffByPeriod);
}

#[test]
fn two_timings_in_one_row() {
    for from in [2, 17, 59] {
        let plan = Plan::new(UK, 60, |i| if i < f64::from(from) { uk(i) } else { uk(i - 0.5) });
        let finding = plan.only(Kind::MixedTiming);
        close(finding.effect_on_npv.unwrap(), added(&plan, uk));
    }
    let finding =
        Plan::new("4%", 30, |i| flat(0.04)(if i < 10.0 { i } else { i + 1.0 })).only(Kind::MixedTiming);
    assert_eq!(finding.place.to_string(), "Plan!D20:D40 [hence_factor]");
    assert!(
        finding
            .words
            .contains("21 of 31 factors (2036 to 2056) have every flow a whole year later than declared"),
        "{}",
        show(&finding)
    );
}

#[test]
fn streams_of_two_timings() {
    let plan = Plan::new(UK, 60, uk).shows(Shows::Present);
    let late: String = (1..=60).map(|i| format!("E{}: {}\n", 10 + i, 20.0 * uk(i as f64 + 0.5))).collect();
    let plan = plan.with(&format!("E10: {}\n{late}", 1000.0 * uk(0.5)), "");
    let finding = plan.only(Kind::MixedTiming);
    assert_eq!(finding.place.to_string(), "Plan!E10:E70 [hence_pv_works]");
    let wrong: f64 =
        (0..=60).map(|i| if i == 0 { 1000.0 } else { 20.0 } * (uk(i as f64 + 0.5) - uk(i as f64))).sum();
    close(finding.effect_on_npv.unwrap(), -wrong);
}

#[test]
fn continuous_compounding_of_a_yearly_rate() {
    let plan = Plan::new("3.5%", 50, |t| (-0.035 * t).exp());
    let finding = plan.only(Kind::ContinuousForYearly);
    close(finding.effect_on_npv.unwrap(), added(&plan, flat(0.035)));
    let bands = |t: f64| (-(0.035 * t.min(30.0) + 0.03 * (t - 30.0).max(0.0))).exp();
    Plan::new(UK, 70, bands).only(Kind::ContinuousForYearly);
}

#[test]
fn an_edge_in_another_year() {
    for (edge, years) in [(25.0, 100), (29.0, 100), (31.0, 100), (35.0, 40), (60.0, 100), (2.0, 32)] {
        let wrong = move |t: f64| banded(&[(edge, 0.035), (75.0, 0.03), (125.0, 0.025)], t);
        for shows in [Shows::All, Shows::Present] {
            let plan = Plan::new(UK, years, wrong).shows(shows);
            let report = plan.checked();
            assert!(!report.findings.is_empty(), "{edge}");
            for finding in &report.findings {
                assert_eq!(finding.kind, Kind::BandEdge, "{edge}: {}", show(finding));
                let said = format!("{edge} years instead of 30");
                assert!(finding.words.contains(&said), "{}", show(finding));
            }
        }
    }
    // All edges a year late, as where the year is compared the wrong way.
    Plan::new(UK, 100, |t| banded(&[(31.0, 0.035), (76.0, 0.03), (126.0, 0.025)], t)).only(Kind::BandEdge);
    // Two of them, each by its own number of years.
    Plan::new(UK, 100, |t| banded(&[(20.0, 0.035), (80.0, 0.03), (126.0, 0.025)], t)).only(Kind::BandEdge);
}

#[test]
fn a_bands_rate_over_the_whole_time() {
    let rate = |t: f64| -> f64 {
        if t <= 30.0 {
            0.035
        } else if t <= 75.0 {
            0.03
        } else {
            0.025
        }
    };
    for years in [40, 100] {
        let plan = Plan::new(UK, years, |t| (1.0 + rate(t)).powf(-t));
        let finding = plan.only(Kind::WholeHorizonForForward);
        close(finding.effect_on_npv.unwrap(), added(&plan, uk));
    }
}

#[test]
fn factors_of_so_many_places() {
    for places in 2..=6 {
        for (basis, factor) in [(UK, &uk as &dyn Fn(f64) -> f64), ("4%", &flat(0.04))] {
            let plan = Plan::new(basis, 60, |t| rounded(factor(t), places));
            let finding = plan.only(Kind::RoundedFactors);
            assert!(finding.words.contains(&format!("rounded to {places} places")), "{}", show(&finding));
            close(finding.effect_on_npv.unwrap(), added(&plan, factor));
            assert!(finding.words.contains("the NPV"), "{}", show(&finding));
        }
    }
}

#[test]
fn a_nominal_rate_on_real_flows() {
    for (basis, factor) in [(UK, &uk as &dyn Fn(f64) -> f64), ("3.5%", &flat(0.035))] {
        for inflation in [0.02f64, 0.025, 0.031] {
            let plan = Plan::new(basis, 60, |t| factor(t) * (1.0 + inflation).powf(-t));
            let finding = plan.only(Kind::NominalOnReal);
            let said = format!("inflation of {}", hence_core::percent(inflation));
            assert!(finding.words.contains(&said), "{}", show(&finding));
            close(finding.effect_on_npv.unwrap(), added(&plan, factor));
        }
    }
}

#[test]
fn factors_that_no_rate_gives() {
    Plan::new(UK, 60, |t| 1.0 / (1.0 + 0.035 * t)).only(Kind::NoKnownRate);
    Plan::new("4%", 40, |t| 1.0 - 0.02 * t).only(Kind::NoKnownRate);
    // Pseudo-random wobbles of up to a twentieth.
    let wobble = |t: f64| 1.0 + 0.05 * (12.9898 * t + 1.0).sin();
    let plan = Plan::new(UK, 60, |t| uk(t) * wobble(t));
    let finding = plan.only(Kind::NoKnownRate);
    close(finding.effect_on_npv.unwrap(), added(&plan, uk));
}

#[test]
fn another_rate_that_is_no_kind_of_mistake() {
    let finding = Plan::new("3.5%", 60, flat(0.04)).only(Kind::Differs);
    assert!(finding.words.contains("a flat 4%"), "{}", show(&finding));
}

#[test]
fn days_over_365_for_years_between_dates() {
    // 1 April 2026 (serial 46113) and its anniversaries; 29 February of 2028, 2032 and 2036 lie between.
    let days = [0, 365, 731, 1096, 1461, 1826, 2192, 2557, 2922, 3287, 3653];
    let right: Vec<f64> = (0..=10).map(|n| flat(0.05)(f64::from(n))).collect();
    let plan = |factors: &[f64]| {
        let row = |(n, d): (usize, &f64)| {
            format!("A{}: @{} | {} | {d}\n", 5 + n, 46113 + days[n], 100 - 10 * n as i32)
        };
        let rows: String = factors.iter().enumerate().map(row).collect();
        let cells = format!("B1: @46113\nB2: '5%\n{rows}");
        let names =
            "hence_base B1, hence_basis B2, hence_years A5:A15, hence_flow_net B5:B15, hence_factor C5:C15";
        plan::checked(&Small::default().sheet("Plan", &cells).names(names))
    };
    assert_eq!(codes(&plan(&right)), [""; 0]);
    let report = plan(&days.map(|n| flat(0.05)(f64::from(n) / 365.0)));
    assert_eq!(codes(&report), ["differs"]);
    assert!(
        report.findings[0].words.contains("days from the base over 365"),
        "{}",
        show(&report.findings[0])
    );
}

#[test]
fn one_cell_alone_differs() {
    let plan = Plan::new(UK, 60, |t| if t == 20.0 { 0.51 } else { uk(t) });
    let finding = plan.only(Kind::Differs);
    assert_eq!(finding.place.to_string(), "Plan!D30 [hence_factor]");
    close(finding.effect_on_npv.unwrap(), added(&plan, uk));
}

#[test]
fn two_mistakes_at_once() {
    let plan = Plan::new(UK, 100, |t| rounded(flat(0.035)(t), 4));
    assert_eq!(plan.codes(), ["flat-for-bands", "rounded-factors"]);
    let both: f64 = plan.checked().findings.iter().map(|f| f.effect_on_npv.unwrap()).sum();
    close(both, added(&plan, uk));
    assert_eq!(Plan::new(UK, 60, |t| rounded(uk(t + 0.5), 4)).codes(), ["off-by-period", "rounded-factors"]);
    assert_eq!(Plan::new(UK, 60, |t| flat(0.035)(t + 0.5)).codes(), ["flat-for-bands", "off-by-period"]);
    assert_eq!(
        Plan::new("4%", 60, |t| (-0.04 * (t - 0.5)).exp()).codes(),
        ["continuous-for-yearly", "off-by-period"]
    );
    // A reading, and one cell that is not as the rest of the row.
    let plan = Plan::new(UK, 100, |t| if t == 50.0 { 0.2 } else { flat(0.035)(t) });
    assert_eq!(plan.codes(), ["flat-for-bands", "differs"]);
}

#[test]
fn nearly_a_reading() {
    let noise = |t: f64| 1.0 + 1e-7 * (12.9898 * t + 1.0).sin();
    let finding = Plan::new(UK, 100, |t| flat(0.035)(t) * noise(t)).only(Kind::FlatForBands);
    assert!(finding.confidence < 0.95, "{}", finding.confidence);
}

#[test]
fn a_total_of_wrong_present_values_is_no_mistake_of_its_own() {
    let plan = Plan::new(UK, 100, flat(0.035));
    let report = plan.checked();
    // Every factor and present value after year 30, and four totals.
    assert!(report.differences.len() > 200, "{}", report.differences.len());
    assert_eq!(codes(&report), ["flat-for-bands"]);
}

#[test]
fn blank_and_waiting_cells_are_no_zeros() {
    let plan = Plan::new(UK, 40, flat(0.035))
        .with("D50: =1/1.035^40>\nE50: =B50*D50>\nF50: =C50*D50>\nB4: =F50>", "");
    let report = plan.checked();
    // Year 40 awaits recalculation; years 31 to 39 show the mistake. Three totals have results, the fourth has none.
    assert_eq!(codes(&report), ["flat-for-bands"]);
    assert_eq!(report.problems.iter().filter(|p| p.code == "awaits-recalculation").count(), 4);
    let blank: String = (0..=40).map(|i| format!("D{0}: {{3}}\n", 10 + i)).collect();
    assert_eq!(Plan::new(UK, 40, uk).with(&blank, "").codes(), [""; 0]);
}

#[test]
fn a_net_present_value_alone_says_what_it_was_made_with() {
    let npv =
        |basis: &str, years, factor: &dyn Fn(f64) -> f64| Plan::new(basis, years, factor).shows(Shows::Npv);
    let edge = |t: f64| banded(&[(35.0, 0.035), (75.0, 0.03), (125.0, 0.025)], t);
    let rate = |t: f64| -> f64 {
        if t <= 30.0 {
            0.035
        } else if t <= 75.0 {
            0.03
        } else {
            0.025
        }
    };
    for (kind, plan) in [
        (Kind::FlatForBands, npv(UK, 100, &flat(0.035))),
        (Kind::OffByPeriod, npv(UK, 100, &|t| uk(t + 1.0))),
        (Kind::OffByPeriod, npv("5%", 40, &|t| flat(0.05)(t - 0.5))),
        (Kind::ContinuousForYearly, npv("5%", 40, &|t| (-0.05 * t).exp())),
        (Kind::BandEdge, npv(UK, 100, &edge)),
        (Kind::WholeHorizonForForward, npv(UK, 100, &|t| (1.0 + rate(t)).powf(-t))),
        (Kind::RoundedFactors, npv(UK, 100, &|t| rounded(uk(t), 4))),
        (Kind::NominalOnReal, npv(UK, 100, &|t| uk(t) * 1.025f64.powf(-t))),
    ] {
        let finding = plan.only(kind);
        let right: &dyn Fn(f64) -> f64 = if plan.basis == UK { &uk } else { &flat(0.05) };
        close(finding.effect_on_npv.unwrap(), added(&plan, right));
        assert_eq!(finding.place.to_string(), "Plan!B4 [hence_npv]");
        assert!(finding.confidence > 0.5, "{}", show(&finding));
    }
    // Costs as declared, benefits half a year later.
    let plan = npv(UK, 100, &uk);
    let mixed: f64 = (1..=100).map(f64::from).map(|i| (40.0 + 0.25 * i) * uk(i + 0.5) - 20.0 * uk(i)).sum();
    plan.with(&format!("B4: {}", mixed - 1000.0), "").only(Kind::MixedTiming);
    // A number that nothing gives.
    let finding = npv(UK, 100, &uk).with("B4: 123.456", "").only(Kind::Differs);
    assert!(finding.effect_on_npv.is_some());
}

#[test]
fn the_workbooks_own_yearly_rates() {
    let rates = |rate: &dyn Fn(usize) -> f64, years: usize| -> String {
        (0..=years).map(|i| format!("G{}: {}\n", 10 + i, rate(i))).collect()
    };
    let declared = |i: usize| {
        if i <= 30 {
            0.035
        } else if i <= 75 {
            0.03
        } else {
            0.025
        }
    };
    let names = "hence_rates G10:G110";
    assert_eq!(Plan::new(UK, 100, uk).with(&rates(&declared, 100), names).codes(), [""; 0]);
    // Factors made with wrong rates have no mistake of their own.
    let plan = Plan::new(UK, 100, flat(0.035)).with(&rates(&|_| 0.035, 100), names);
    let finding = plan.only(Kind::FlatForBands);
    assert_eq!(finding.place.to_string(), "Plan!G10:G110 [hence_rates]");
    close(finding.effect_on_npv.unwrap(), added(&plan, uk));
    let late = |i: usize| if i <= 33 { 0.035 } else { declared(i) };
    let edge = |t: f64| banded(&[(33.0, 0.035), (75.0, 0.03), (125.0, 0.025)], t);
    Plan::new(UK, 100, edge).with(&rates(&late, 100), names).only(Kind::BandEdge);
    let nominal = |i: usize| (1.0 + declared(i)) * 1.02 - 1.0;
    Plan::new(UK, 100, |t| uk(t) * 1.02f64.powf(-t))
        .with(&rates(&nominal, 100), names)
        .only(Kind::NominalOnReal);
    let slip = |i: usize| if i == 12 { 0.35 } else { declared(i) };
    let plan = Plan::new(UK, 100, |t| uk(t) * if t >= 12.0 { 1.035 / 1.35 } else { 1.0 });
    let finding = plan.with(&rates(&slip, 100), names).only(Kind::Differs);
    assert_eq!(finding.place.to_string(), "Plan!G22 [hence_rates]");
    assert_eq!(finding.found, "35% in 2038");
}

#[test]
fn a_row_of_factors_without_a_name() {
    let row = |factor: &dyn Fn(f64) -> f64| -> String {
        (0..=60).map(|i| format!("G{}: {}\n", 10 + i, factor(f64::from(i)))).collect()
    };
    // The totals were made with it.
    for shows in [Shows::Present, Shows::Npv] {
        let plan = Plan::new(UK, 60, flat(0.035)).shows(shows).with(&row(&flat(0.035)), "");
        let finding = plan.only(Kind::FlatForBands);
        assert_eq!(finding.place.cells_words(), "Plan!G10:G70");
        close(finding.effect_on_npv.unwrap(), added(&plan, uk));
    }
    // They were not: it is there for comparison.
    for shows in [Shows::Present, Shows::Npv] {
        assert_eq!(Plan::new(UK, 60, uk).shows(shows).with(&row(&flat(0.07)), "").codes(), [""; 0]);
    }
}

#[test]
fn a_formula_is_part_of_the_evidence() {
    // NPV() discounts the first flow, too: a year too much.
    let plan = Plan::new("5%", 40, |t| flat(0.05)(t + 1.0)).shows(Shows::Npv);
    let net = Plan::npv(&plan.factors);
    let finding = plan.with(&format!("B4: =NPV(0.05,G10:G50)>{net}"), "").only(Kind::OffByPeriod);
    assert!(finding.words.contains("=NPV(0.05,G10:G50)"), "{}", show(&finding));
    assert!(finding.words.contains("a whole year later"), "{}", show(&finding));
}

/// Two options of 41 years against a baseline: Dams cost 900 now and gain 50 a year; Dunes cost 150 and gain 20 a year,
/// and from year 31 on 60.
fn options(factor: impl Fn(f64) -> f64) -> Small {
    decided(factor, 900.0, "npv")
}

/// The same with another cost of Dams, ranked by a rule.
fn decided(factor: impl Fn(f64) -> f64, dams: f64, rule: &str) -> Small {
    let years = 0..=40;
    let mut small = Small::default();
    for (name, first, gain) in [
        ("Nothing", 0.0, &(|_| 0.0) as &dyn Fn(usize) -> f64),
        ("Dams", dams, &|_| 50.0),
        ("Dunes", 150.0, &|i| if i > 30 { 60.0 } else { 20.0 }),
    ] {
        let (mut cells, mut npv) = (String::new(), 0.0);
        for i in years.clone() {
            let (cost, benefit) = if i == 0 { (first, 0.0) } else { (5.0, gain(i)) };
            let d = factor(i as f64);
            npv += (benefit - cost) * d;
            cells.push_str(&format!("A{}: {} | {cost} | {benefit} | {d}\n", 10 + i, 2026 + i));
        }
        // Over the baseline, which costs 5 a year.
        let nothing: f64 = years.clone().skip(1).map(|i| -5.0 * factor(i as f64)).sum();
        let cells = format!(
            "B1: 2026\nB2: '3.5% to 30, 0.5% after\nB3: 'Nothing\nB4: {}\nB5: '{rule}\n{cells}",
            npv - nothing
        );
        small = small.sheet(name, &cells).own_names(
            "hence_base B1, hence_basis B2, hence_years A10:A50, hence_cost_works B10:B50, \
             hence_benefit_safety C10:C50, hence_factor D10:D50, hence_npv B4",
        );
    }
    small.names("hence_baseline B3, hence_decide B5")
}

#[test]
fn the_ranking_is_that_of_the_declared_rule() {
    let right = |t: f64| banded(&[(30.0, 0.035), (f64::INFINITY, 0.005)], t);
    let gains = |gain: &dyn Fn(i32) -> f64, factor: &dyn Fn(f64) -> f64| -> f64 {
        (1..=40).map(|i| (gain(i) - 5.0) * factor(f64::from(i))).sum()
    };
    let dunes = |factor: &dyn Fn(f64) -> f64| gains(&|i| if i > 30 { 60.0 } else { 20.0 }, factor) - 150.0;
    // Dams come to less than Dunes as declared, and to more than Dunes with one rate for all years.
    let between = (dunes(&right) + dunes(&flat(0.035))) / 2.0;
    let dams = gains(&|_| 50.0, &right) - between;
    let ranking = |rule: &str| {
        let report = plan::checked(&decided(flat(0.035), dams, rule));
        let of_dunes = report.findings.into_iter().find(|f| f.place.sheet.as_deref() == Some("Dunes"));
        of_dunes.expect("a finding on the sheet of Dunes").ranking
    };
    let by_npv = ranking("npv").expect("the order of net present values changes");
    assert!(by_npv.contains("rank Dams, Dunes"), "{by_npv}");
    // By benefits over costs, Dunes stay first with either factors; by costs, too, and the factors move both alike.
    for rule in ["ratio", "least cost"] {
        assert_eq!(ranking(rule), None, "{rule}");
    }
}

#[test]
fn the_ranking_of_options_over_a_baseline() {
    let right = |t: f64| banded(&[(30.0, 0.035), (f64::INFINITY, 0.005)], t);
    let clean = plan::checked(&options(right));
    assert!(clean.findings.is_empty(), "{}", clean.findings.iter().map(show).collect::<Vec<_>>().join("\n"));
    let report = plan::checked(&options(flat(0.035)));
    let shown: Vec<String> = report.findings.iter().map(show).collect();
    // One row of factors an option.
    assert_eq!(codes(&report), ["flat-for-bands"; 3], "{}", shown.join("\n"));
    let npv = |name: &str, factor: &dyn Fn(f64) -> f64| -> f64 {
        let (first, gain): (f64, fn(i32) -> f64) =
            if name == "Dams" { (900.0, |_| 50.0) } else { (150.0, |i| if i > 30 { 60.0 } else { 20.0 }) };
        (1..=40).map(|i| gain(i) * factor(f64::from(i))).sum::<f64>() - first
    };
    let dunes = report.findings.iter().find(|f| f.place.sheet.as_deref() == Some("Dunes")).unwrap();
    // Only this option's own factors: the baseline and its costs of 5 a year stay as declared.
    let own: f64 = (1..=40).map(f64::from).map(|i| 5.0 * (flat(0.035)(i) - right(i))).sum();
    close(dunes.effect_on_npv.unwrap(), npv("Dunes", &flat(0.035)) - npv("Dunes", &right) - own);
}
