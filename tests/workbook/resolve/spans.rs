//! Years per column: how they are read, which labels go with them, and what cannot follow them.

use hence_core::Catalogue;
use hence_workbook::fill::{FillRequest, fill};
use hence_workbook::references::Cell;
use hence_workbook::resolve::Options;
use hence_workbook::sheets::VERDICT_AGREES;
use hence_workbook::valuation::value;

use crate::small::{Small, codes, lines};

/// Five columns, years per column in row 3, labels in row 4.
fn book(spans: &str, labels: &str, more: &str, names: &str) -> Small {
    let cells = format!(
        "A1: 'Base | 2026\nA2: 'Basis | '3.5%\nA3: 'Span | {spans}\nA4: 'Year | {labels}\nA5: 'Works | 1 | 2 | 3 | 4 | 5\nA9: 'NPV\n{more}"
    );
    let all = "hence_base B1, hence_basis B2, hence_span B3:F3, hence_years B4:F4, hence_cost_works B5:F5, hence_npv B9";
    let small = Small::default().sheet("Plan", &cells).names(all);
    if names.is_empty() { small } else { small.names(names) }
}

/// Offsets in hundredths of a year.
fn offsets(small: &Small) -> Vec<f64> {
    let read = small.resolved();
    let (outcomes, _) = value(&read, &Catalogue::builtin()).unwrap_or_else(|error| panic!("{error}"));
    outcomes[0].offsets.iter().map(|t| (t * 100.0).round()).collect()
}

#[test]
fn labels_are_the_years_in_which_periods_begin_or_after_years_in_which_they_end() {
    let begin = book("1 | 1 | 5 | 5 | 10", "2026 | 2027 | 2028 | 2033 | 2038", "", "");
    assert_eq!(offsets(&begin), [0.0, 100.0, 600.0, 1100.0, 2100.0]);
    let end = book("1 | 1 | 5 | 5 | 10", "2026 | 2027 | 2032 | 2037 | 2047", "", "");
    assert_eq!(offsets(&end), offsets(&begin));
    assert_eq!(codes(&begin.resolved().problems), [""; 0], "no year is said to be left out");
    // Half-years by their number.
    let halves = book("0.5 | 0.5 | 0.5 | 0.5 | 1", "1 | 2 | 3 | 4 | 5", "", "");
    assert_eq!(offsets(&halves), [50.0, 100.0, 150.0, 200.0, 300.0]);
    // Year numbers that count years, not columns.
    let numbers = book("1 | 1 | 1 | 5 | 5", "0 | 1 | 2 | 3 | 8", "", "");
    assert_eq!(offsets(&numbers), [0.0, 100.0, 200.0, 700.0, 1200.0]);
}

/// Offsets of parts of a year are those of the sums of the years per column before them.
#[test]
fn parts_of_a_year_bear_the_label_of_the_year_in_which_they_begin() {
    let along = |spans: &[f64], labels: &[String]| {
        let row = |first: &str, cells: Vec<String>| format!("{first}: {}\n", cells.join(" | "));
        let cells = "B1: 2026\nB2: '4%\n".to_owned()
            + &row("B3", spans.iter().map(f64::to_string).collect())
            + &row("B4", labels.to_vec())
            + &row("B5", vec!["1".to_owned(); spans.len()]);
        let to = |row| Cell::new(row, spans.len() as u32).to_string();
        let names = format!(
            "hence_base B1, hence_basis B2, hence_span B3:{}, hence_years B4:{}, hence_cost_works B5:{}, hence_npv B9",
            to(2),
            to(3),
            to(4)
        );
        Small::default().sheet("Plan", &cells).names(&names)
    };
    let years = |from: i32, parts: usize, more: &[i32]| -> Vec<String> {
        let parts = std::iter::repeat_n(from, parts).chain(std::iter::repeat_n(from + 1, parts));
        parts.chain(more.iter().copied()).map(|year| year.to_string()).collect()
    };
    // Quarters of 2027 end 0.25, 0.5, ... years after 2026 does.
    let quarters = along(&[0.25; 8], &years(2027, 4, &[]));
    assert_eq!(offsets(&quarters), [25.0, 50.0, 75.0, 100.0, 125.0, 150.0, 175.0, 200.0]);
    let months = offsets(&along(&[1.0 / 12.0; 24], &years(2027, 12, &[])));
    assert_eq!((months[0], months[11], months[23]), (8.0, 100.0, 200.0));
    let mut mixed = vec![0.25; 8];
    mixed.extend([1.0, 5.0, 10.0]);
    let mixed = along(&mixed, &years(2027, 4, &[2029, 2030, 2035]));
    assert_eq!(offsets(&mixed)[7..], [200.0, 300.0, 800.0, 1800.0]);
    // A year that stands more often than it has parts is still refused.
    let twice = along(&[0.5; 4], &years(2027, 1, &[2028, 2028]));
    assert_eq!(twice.problems(), ["span-years Plan!C4 [hence_span]"]);
    // Financial years.
    let financial = Small::default()
        .sheet("Plan", "B1: '2026/27\nB2: '4%\nB3: 0.5\nB4: '2027/28 | '2027/28 | '2028/29 | '2028/29\nB5: 1 | 1 | 1 | 1\nB9: ")
        .names("hence_base B1, hence_basis B2, hence_span B3, hence_years B4:E4, hence_cost_works B5:E5, hence_npv B9");
    assert_eq!(offsets(&financial), [50.0, 100.0, 150.0, 200.0]);
}

#[test]
fn blocks_first_are_taken_to_be_labelled_by_where_they_begin() {
    let blocks = book("5 | 5 | 5 | 5 | 5", "2026 | 2031 | 2036 | 2041 | 2046", "", "");
    assert_eq!(offsets(&blocks), [400.0, 900.0, 1400.0, 1900.0, 2400.0]);
    let notes = blocks.resolved().problems;
    assert!(
        lines(&notes).iter().any(|line| line.contains("in which its 5 years begin")),
        "{:?}",
        lines(&notes)
    );
}

/// Year n is n years after the base year, whether it is written as a number or as a calendar year.
#[test]
fn blocks_stand_where_they_do_whichever_way_their_years_are_written() {
    let timed = |labels: &str, timing: &str| {
        let more = format!("A11: 'Timing | '{timing}");
        offsets(&book("5 | 5 | 5 | 5 | 5", labels, &more, "hence_timing B11"))
    };
    for (numbers, years, timing, first) in [
        ("1 | 6 | 11 | 16 | 21", "2027 | 2032 | 2037 | 2042 | 2047", "flows middle, base start", 350.0),
        ("0 | 5 | 10 | 15 | 20", "2026 | 2031 | 2036 | 2041 | 2046", "flows end, base end", 400.0),
    ] {
        let expected: Vec<f64> = (0..5).map(|i| first + 500.0 * f64::from(i)).collect();
        assert_eq!(timed(numbers, timing), expected, "{numbers}");
        assert_eq!(timed(years, timing), expected, "{years}");
    }
    // Numbers one by one count columns: period 0 is the base.
    assert_eq!(timed("0 | 1 | 2 | 3 | 4", "flows end, base end")[..2], [0.0, 500.0]);
    let filled = book("5 | 5 | 5 | 5 | 5", "1 | 6 | 11 | 16 | 21", "", "").open().0;
    let filled =
        fill(&filled, &FillRequest::default(), &Catalogue::builtin()).unwrap_or_else(|e| panic!("{e}"));
    assert_eq!(filled.report.verdict, VERDICT_AGREES);
}

/// Factors at 4% a year, by hand: 1.04^-6 = 0.7903, 1.04^-16 = 0.5339.
#[test]
fn the_timing_sentence_has_a_factor_for_each_length_of_column() {
    let sentence = |spans: &str, labels: &str| {
        let small = book(spans, labels, "B2: '4%", "");
        let (outcomes, _) = value(&small.resolved(), &Catalogue::builtin()).unwrap_or_else(|e| panic!("{e}"));
        outcomes[0].timing_sentence.clone()
    };
    let blocks = ", the 5 years from 2028 have factor 0.7903, the 10 years from 2033 have factor 0.5339";
    let begin = sentence("1 | 1 | 5 | 10 | 10", "2026 | 2027 | 2028 | 2033 | 2043");
    assert!(begin.ends_with(&format!("a flow in 2026 has factor 1.0000, in 2027 0.9615{blocks}")), "{begin}");
    let end = sentence("1 | 1 | 5 | 10 | 10", "2026 | 2027 | 2032 | 2042 | 2052");
    assert!(end.ends_with(blocks), "{end}");
    let numbered = sentence("1 | 1 | 1 | 5 | 5", "0 | 1 | 2 | 3 | 8");
    assert!(numbered.ends_with(", in year 3 (5 years) 0.7599"), "{numbered}");
}

/// Twelve months from the base on, at 4%: one service year, whose factor is 1/1.04.
#[test]
fn one_part_of_a_year_does_not_add_a_service_year() {
    let row = |of: &dyn Fn(u32) -> u32| (1..=12).map(|n| of(n).to_string()).collect::<Vec<_>>().join(" | ");
    let cells = format!(
        "B2: '4%\nB3: =1/12>0.08333333333333333\nB4: {}\nB5: {}\nB6: 'flows middle, base start\nB9: \nB10: ",
        row(&|n| n),
        row(&|_| 5)
    );
    let months = Small::default().sheet("Plan", &cells).names(
        "hence_basis B2, hence_span B3, hence_years B4:M4, hence_benefit_rent B5:M5, hence_timing B6, hence_npv B9, \
         hence_annual B10",
    );
    let out = fill(&months.open().0, &FillRequest::default(), &Catalogue::builtin());
    let out = out.unwrap_or_else(|e| panic!("{e}"));
    assert_eq!(out.report.verdict, VERDICT_AGREES);
    let option = &out.report.options[0];
    assert_eq!(option.service_years, 1);
    // A flow of month n stands at its middle, n/12 + 1/24 years after the start of month 0.
    let npv: f64 = (1..=12).map(|n| 5.0 / 1.04f64.powf(f64::from(n) / 12.0 + 1.0 / 24.0)).sum();
    assert!((option.absolute.annual.expect("a year") - npv * 1.04).abs() < 1e-9);
}

#[test]
fn one_cell_stands_for_all_columns() {
    let months = Small::default()
        .sheet("Plan", "A1: 'Basis | '3.5%\nA2: 'Span | =1/12>0.08333333333333333\nA4: 'Month | 0 | 1 | 2\nA5: 'Works | 1 | 2 | 3\nA9: 'NPV")
        .names("hence_basis B1, hence_span B2, hence_years B4:D4, hence_cost_works B5:D5, hence_npv B9");
    assert_eq!(offsets(&months), [0.0, 8.0, 17.0]);
    let read = months.resolved();
    let spans = read.axes[0].spans.as_ref().expect("spans");
    assert_eq!((spans.at.to_string(), spans.lengths.len()), ("Plan!B2".to_owned(), 3));
    assert!(read.settings.iter().any(|setting| setting.from == "hence_span"));
}

#[test]
fn lengths_that_are_none_are_told_by_their_cell() {
    let years = "2026 | 2027 | 2028 | 2029 | 2030";
    for (spans, found) in [
        ("1 | 0 | 1 | 1 | 1", "span-value Plan!C3 [hence_span]"),
        ("1 | -1 | 1 | 1 | 1", "span-value Plan!C3 [hence_span]"),
        ("1 | | 1 | 1 | 1", "span-value Plan!C3 [hence_span]"),
        ("1 | 1001 | 1 | 1 | 1", "span-value Plan!C3 [hence_span]"),
        ("1 | 'year | 1 | 1 | 1", "text-value Plan!C3 [hence_span]"),
        ("1 | @46357 | 1 | 1 | 1", "date-value Plan!C3 [hence_span]"),
    ] {
        assert_eq!(book(spans, years, "", "").problems(), [found], "{spans}");
    }
    let date = book("1 | @46357 | 1 | 1 | 1", years, "", "").resolve_with(&Options::default());
    let date = lines(&date.expect_err("a date"));
    assert!(date[0].contains("enter =1/12"), "{date:?}");
    let rounded = book("0.083 | 0.0833 | 0.25 | 1 | 1", "1 | 2 | 3 | 4 | 5", "", "");
    assert_eq!(
        rounded.problems(),
        ["span-rounded Plan!B3 [hence_span]", "span-rounded Plan!C3 [hence_span]"]
    );
}

#[test]
fn labels_that_do_not_go_with_the_lengths_are_refused() {
    for (spans, labels, found) in [
        ("1 | 1 | 5 | 5 | 10", "2026 | 2027 | 2028 | 2034 | 2038", "span-years Plan!E4 [hence_span]"),
        ("0.25 | 0.25 | 0.25 | 0.25 | 1", "2 | 3 | 4 | 5 | 6", "span-years Plan!B4 [hence_span]"),
        (
            "1 | 1 | 1 | 1 | 1",
            "@46113 | @46143 | @46174 | @46204 | @46235",
            "span-years Plan!B4 [hence_span]",
        ),
    ] {
        let problems = book(spans, labels, "", "").problems();
        assert!(problems.contains(&found.to_owned()), "{labels}: {problems:?}");
    }
    let offsets = Small::default()
        .sheet(
            "Plan",
            "A1: 'Basis | '3.5%\nA2: 'Span | 1\nA4: 't | 0.5 | 1.5 | 2.5\nA5: 'Works | 1 | 2 | 3\nA9: 'NPV",
        )
        .names("hence_basis B1, hence_span B2, hence_offsets B4:D4, hence_cost_works B5:D5, hence_npv B9");
    assert_eq!(offsets.problems(), ["span-years Plan!B4 [hence_span]"]);
}

#[test]
fn what_cannot_follow_is_refused_by_name() {
    let refused = |more: &str, names: &str| {
        let problems = book("1 | 1 | 1 | 1 | 5", "2026 | 2027 | 2028 | 2029 | 2030", more, names).problems();
        problems.into_iter().filter(|problem| problem.starts_with("span-")).collect::<Vec<_>>()
    };
    assert_eq!(
        refused("A10: 'Tail | 'for ever", "hence_tail_works B10"),
        ["span-role Plan!B10 [hence_tail_works]"]
    );
    assert_eq!(refused("A10: 'Rates", "hence_rates B10:F10"), ["span-role Plan!B10:F10 [hence_rates]"]);
    let path = "A10: 'Consumption | 9 | 9 | 9 | 9 | 9\nA11: 'Elasticity | 1";
    assert_eq!(
        refused(path, "hence_consumption B10:F10, hence_elasticity B11"),
        ["span-role Plan!B10:F10 [hence_consumption]"]
    );
    // A last column of one year may go on.
    let one = book(
        "5 | 1 | 1 | 1 | 1",
        "2026 | 2031 | 2032 | 2033 | 2034",
        "A10: 'Tail | 'for ever",
        "hence_tail_works B10",
    );
    assert_eq!(one.problems(), [""; 0]);
    let averaged = book(
        "1 | 1 | 1 | 1 | 5",
        "2026 | 2027 | 2028 | 2029 | 2030",
        "A10: 'Timing | 'flows averaged",
        "hence_timing B10",
    );
    let error = value(&averaged.resolved(), &Catalogue::builtin()).expect_err("averaged");
    assert_eq!(codes(error.problems()), ["span-role Plan!B3:F3 [hence_span]"]);
}

/// Left over at the end of 2034, the last of five years: 8 years after the end of 2026.
#[test]
fn what_is_left_over_is_left_at_the_end_of_the_last_column() {
    let left = |timing: &str, spans: &str, labels: &str| {
        let more = format!("A10: 'Residual | 100\nA11: 'Timing | '{timing}");
        let small = book(spans, labels, &more, "hence_residual_works B10, hence_timing B11");
        let found = value(&small.resolved(), &Catalogue::builtin());
        found.map(|(outcomes, _)| outcomes[0].absolute.pv_costs).map_err(|error| codes(error.problems()))
    };
    let (block, years) = ("1 | 1 | 1 | 1 | 5", "2026 | 2027 | 2028 | 2029 | 2030");
    let flows: f64 = (0..4).map(|n| f64::from(n + 1) / 1.035f64.powi(n)).sum();
    let pv = left("flows end", block, years).expect("at the end");
    assert!((pv - (flows + (5.0 - 100.0) / 1.035f64.powi(8))).abs() < 1e-9, "{pv}");
    for timing in ["flows middle", "flows start"] {
        assert_eq!(
            left(timing, block, years),
            Err(vec!["span-role Plan!B10 [hence_residual_works]".to_owned()])
        );
        assert!(left(timing, "5 | 1 | 1 | 1 | 1", "2026 | 2031 | 2032 | 2033 | 2034").is_ok());
    }
}

#[test]
fn options_may_have_periods_of_their_own() {
    let option = "A3: 'Span | 1 | 5\nA4: 'Year | 2026 | 2027\nA5: 'Works | 1 | 2\nA9: 'NPV";
    let own = "hence_cost_works B5:C5, hence_npv B9, hence_span B3:C3, hence_years B4:C4";
    let read = Small::default()
        .sheet("Inputs", "A1: 'Base | 2026\nA2: 'Basis | '3.5%")
        .names("hence_base B1, hence_basis B2")
        .sheet("Blocks", option)
        .own_names(own)
        .sheet("Years", &option.replace("1 | 5", "1 | 1"))
        .own_names(own)
        .resolved();
    let (outcomes, _) = value(&read, &Catalogue::builtin()).unwrap_or_else(|error| panic!("{error}"));
    assert_eq!((outcomes[0].offsets.clone(), outcomes[1].offsets.clone()), (vec![0.0, 5.0], vec![0.0, 1.0]));
}

/// Half-years against factors by position within a year (US Office of Management and Budget, Circular A-94, 1992,
/// Appendix B): the middle of year n is the end of half-year 2n - 1, its end that of half-year 2n.
#[test]
fn ends_of_half_years_are_middles_and_ends_of_years() {
    let table = include_str!("../../reference/midyear.csv");
    let rows: Vec<Vec<f64>> = table
        .lines()
        .filter(|line| !line.starts_with('#'))
        .skip(1)
        .map(|line| line.split(',').map(|x| x.parse().expect("a number")).collect())
        .collect();
    let mut compared = 0;
    for rate in [0.01, 0.035, 0.07] {
        let row = |first: &str, values: Vec<String>| format!("{first}: {}\n", values.join(" | "));
        let cells = format!("A1: 'Basis | {rate}\nA2: 'Span | 0.5\n")
            + &row("B4", (1..=60).map(|n| n.to_string()).collect())
            + &row("B5", vec!["1".into(); 60]);
        let small = Small::default().sheet("Plan", &cells).names(
            "hence_basis B1, hence_span B2, hence_years B4:BI4, hence_cost_works B5:BI5, hence_npv B9",
        );
        let (outcomes, _) = value(&small.resolved(), &Catalogue::builtin()).unwrap_or_else(|e| panic!("{e}"));
        for row in rows.iter().filter(|row| row[0] == rate && row[1] <= 30.0) {
            let half = 2 * row[1] as usize - 1;
            for (i, expected) in [(half - 1, row[3]), (half, row[2])] {
                let found = outcomes[0].factors[i];
                assert!((found - expected).abs() <= row[6], "{rate}, half-year {}: {found}", i + 1);
                compared += 1;
            }
        }
    }
    assert!(compared >= 20, "{compared} factors");
}

#[test]
fn rates_that_all_options_share_are_refused_too() {
    let option = "A5: 'Works | 1 | 2\nA9: 'NPV";
    let own = "hence_cost_works B5:C5, hence_npv B9";
    let found = Small::default()
        .sheet(
            "Inputs",
            "A1: 'Base | 2026\nA2: 'Basis | '3.5%\nA3: 'Span | 1 | 5\nA4: 'Year | 2026 | 2027\nA6: 'Rates",
        )
        .names("hence_base B1, hence_basis B2, hence_span B3:C3, hence_years B4:C4, hence_rates B6:C6")
        .sheet("Wells", option)
        .own_names(own)
        .sheet("Pumps", option)
        .own_names(own)
        .problems();
    assert_eq!(found, ["span-role Inputs!B6:C6 [hence_rates]"]);
}
