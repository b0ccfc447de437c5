//! Published worked examples and tables, put into a workbook as an analyst would and filled.

use std::collections::BTreeMap;

use calamine::Data;
use hence_core::Catalogue;
use hence_workbook::fill::{FillRequest, fill};
use hence_workbook::references::Cell;
use hence_workbook::report::OptionReport;
use hence_workbook::sheets::VERDICT_AGREES;

use super::cells;
use crate::small::Small;

/// Sources are named in the files.
const RESULTS: &str = include_str!("../../reference/npv_results.csv");
const FLOWS: &str = include_str!("../../reference/npv_cash_flows.csv");
const UK: &str = include_str!("../../reference/uk_factors.csv");
const BEWG: &str = include_str!("../../reference/bewg_9a.csv");
const MIDYEAR: &str = include_str!("../../reference/midyear.csv");
const OMB: &str = include_str!("../../reference/omb_a94c_2000.csv");

fn rows(text: &'static str) -> Vec<Vec<&'static str>> {
    text.lines().filter(|line| !line.starts_with('#')).skip(1).map(|line| line.split(',').collect()).collect()
}

fn number(text: &str) -> f64 {
    text.parse().unwrap_or_else(|_| panic!("`{text}` is no number"))
}

/// An option filled: its report, its factors and its net present value by year.
struct Filled {
    report: OptionReport,
    factors: Vec<f64>,
    by_year: Vec<f64>,
}

/// Fills a workbook of years (a role and its values), net flows and a basis.
fn filled(role: &str, years: &[f64], flows: &[f64], basis: &str, more: &[(&str, &str)]) -> Filled {
    let line = |row: usize, values: Vec<String>| format!("B{row}: {}\n", values.join(" | "));
    let mut text = line(3, years.iter().map(f64::to_string).collect());
    text += &line(4, flows.iter().map(|x| (-x).max(0.0).to_string()).collect());
    text += &line(5, flows.iter().map(|x| x.max(0.0).to_string()).collect());
    let last = Cell { row: 0, col: years.len() as u32 }.to_string();
    let last = last.trim_end_matches('1');
    let mut names = vec![
        format!("hence_{role} B3:{last}3"),
        format!("hence_cost_outlay B4:{last}4"),
        format!("hence_benefit_income B5:{last}5"),
        format!("hence_factor B6:{last}6"),
        format!("hence_pv B7:{last}7"),
        "hence_basis B1".to_owned(),
    ];
    text += &format!("B1: '{basis}\n");
    for (k, (name, value)) in more.iter().enumerate() {
        let cell = Cell { row: 0, col: 2 + k as u32 };
        text += &format!("{cell}: {value}\n");
        names.push(format!("{name} {cell}"));
    }
    let (package, _) = Small::default().sheet("Plan", &text).names(&names.join(",")).open();
    let filled = fill(&package, &FillRequest::default(), &Catalogue::builtin())
        .unwrap_or_else(|error| panic!("{basis}: {error}"));
    assert_eq!(filled.report.verdict, VERDICT_AGREES, "{basis}");
    let values = cells(&filled.bytes);
    let row = |row: u32| -> Vec<f64> {
        let at = |i: usize| values.get(&("Plan".to_owned(), Cell { row, col: 1 + i as u32 }));
        (0..years.len()).map(|i| at(i).and_then(calamine::DataType::as_f64).expect("a number")).collect()
    };
    Filled { factors: row(5), by_year: row(6), report: filled.report.options[0].clone() }
}

/// What the filled workbook says for a measure; none where it holds no such measure.
fn found(measure: &str, f: &Filled) -> Option<f64> {
    let o = &f.report;
    let words: Vec<&str> = measure.split('_').collect();
    let single = |rates: &[f64]| {
        assert_eq!(rates.len(), 1, "{measure}");
        rates[0]
    };
    Some(match words.as_slice() {
        ["npv"] | ["pv"] | ["pv", "5", "years", ..] => o.absolute.npv,
        ["pv", "of", "inflows" | "benefits" | "repayments"] => o.absolute.pv_benefits,
        ["pv", "of", "period", year] => f.by_year[number(year) as usize],
        ["cumulative", "pv", "to", year] => f.by_year[..=number(year) as usize].iter().sum(),
        ["profitability", "index"] => o.absolute.ratio.expect("a ratio"),
        ["irr"] => single(&o.irr),
        ["irr", which] => {
            assert_eq!(o.irr.len(), 2, "{measure}");
            o.irr[usize::from(*which == "high")]
        }
        ["discounted", "payback", "years"] => {
            assert_eq!(o.payback.first, o.payback.last);
            o.payback.first.expect("a payback")
        }
        ["equivalent", "annual", "value", years] => {
            assert_eq!(format!("{}y", o.service_years), *years);
            o.absolute.annual.expect("an annual equivalent")
        }
        _ => return None,
    })
}

#[test]
fn worked_examples_come_out_of_a_workbook_as_published() {
    let mut flows: BTreeMap<&str, (Vec<f64>, Vec<f64>)> = BTreeMap::new();
    for row in rows(FLOWS) {
        let example = flows.entry(row[0]).or_default();
        example.0.push(number(row[1]));
        // ECHA prints its annual cost as 73,582; the rows use it unrounded: 1,000,000 over 20 years at 4%.
        let flow = if row[2] == "73582" { 1e6 * 0.04 / (1.0 - 1.04_f64.powi(-20)) } else { number(row[2]) };
        example.1.push(flow);
    }
    let mut fills: BTreeMap<(&str, &str), Filled> = BTreeMap::new();
    let mut checked = 0;
    for row in rows(RESULTS) {
        let (example, measure, rate) = (row[0], row[1], row[2]);
        // Rows that disagree with their own formula are misprints.
        let Some((years, amounts)) = flows.get(example).filter(|_| row[6] != "NO") else { continue };
        let rate = if rate.is_empty() { "0.05" } else { rate };
        let fill = fills.entry((example, rate)).or_insert_with(|| filled("years", years, amounts, rate, &[]));
        let Some(found) = found(measure, fill) else { continue };
        if !row[3].is_empty() {
            let published = number(row[3]);
            assert!((found - published).abs() <= number(row[5]), "{example} {measure}: {found}, {published}");
        }
        let exact = number(row[4]);
        assert!(
            (found - exact).abs() <= 6e-11 + 1e-12 * exact.abs(),
            "{example} {measure}: {found}, {exact}"
        );
        checked += 1;
    }
    assert_eq!(checked, 58);
}

#[test]
fn flows_within_the_year_come_out_as_recomputed() {
    // University of Queensland, Social Cost Benefit Analysis, about 2023, chapter 3: 10,000 now, 5,000 in each of three
    // years, at 5%; the flows at the end, the middle and the start of their years.
    let exact = |measure: &str| {
        let row = rows(RESULTS).into_iter().find(|row| row[0] == "uq_timing" && row[1] == measure).unwrap();
        number(row[4])
    };
    for (position, measure) in
        [("end", "npv_end_of_year"), ("middle", "npv_mid_year_flows_at_half"), ("start", "npv_start_of_year")]
    {
        let basis = format!("5%; flows {position}");
        let income = filled("years", &[1.0, 2.0, 3.0], &[5_000.0; 3], &basis, &[]);
        let npv = income.report.absolute.npv - 10_000.0;
        assert!((npv - exact(measure)).abs() < 1e-9, "{position}: {npv}");
    }
}

#[test]
fn perpetuities_come_out_as_published() {
    // Brealey, Myers, Principles of Corporate Finance, about 2003, answers to chapter 3: 11,400 a year for ever, and
    // 6,500 growing at 5%, both at 12% and from year 1 on.
    for (measure, first, tail) in [
        ("perpetuity_11400", 11_400.0, "for ever"),
        ("growing_perpetuity_6500_growth_0.05", 6_500.0, "growing 5%, for ever"),
    ] {
        let row = rows(RESULTS).into_iter().find(|row| row[1] == measure).unwrap();
        let tail = format!("'{tail}");
        let out = filled("years", &[0.0, 1.0], &[0.0, first], row[2], &[("hence_tail_income", &tail)]);
        assert!((out.report.absolute.npv - number(row[3])).abs() <= number(row[5]), "{measure}");
        assert!((out.report.absolute.npv - number(row[4])).abs() <= 1e-6, "{measure}");
    }
}

#[test]
fn the_green_book_table_stands_in_the_factor_row() {
    let years: Vec<f64> = (2026..=2526).map(f64::from).collect();
    let out = filled("years", &years, &vec![1.0; years.len()], "uk-2003", &[("hence_base", "2026")]);
    let mut checked = 0;
    for row in rows(UK) {
        let n = number(row[0]) as usize;
        let found = out.factors[n];
        assert!((found - number(row[1])).abs() <= number(row[5]), "year {n}: {found}, published {}", row[1]);
        assert!((found - number(row[2])).abs() <= 1e-12, "year {n}: {found}, recomputed {}", row[2]);
        checked += 1;
    }
    assert_eq!(checked, 46);
    assert_eq!(out.factors.len(), 501);
}

#[test]
fn the_german_annuities_stand_under_averaged_flows() {
    // Anlage 9a: 1 a year paid in the middle of the year, reckoned as the mean of payment at its start and its end.
    for row in rows(BEWG) {
        let n = number(row[1]);
        if ![2.0, 3.0, 10.0, 35.0, 101.0].contains(&n) {
            continue;
        }
        let years: Vec<f64> = (1..=n as u32).map(f64::from).collect();
        let out = filled("years", &years, &vec![1.0; years.len()], "5.5%; flows averaged", &[]);
        let npv = out.report.absolute.npv;
        assert!((npv - number(row[2])).abs() <= number(row[7]), "{n}: {npv}, published {}", row[2]);
        assert!((npv - number(row[3])).abs() <= 1e-9, "{n}: {npv}, recomputed {}", row[3]);
    }
}

#[test]
fn positions_within_the_year_stand_in_the_factor_row() {
    let mut by_rate: BTreeMap<&str, Vec<Vec<&str>>> = BTreeMap::new();
    for row in rows(MIDYEAR) {
        by_rate.entry(row[0]).or_default().push(row);
    }
    for (rate, rows) in by_rate {
        let years: Vec<f64> = rows.iter().map(|row| number(row[1])).collect();
        for (column, position) in [(2, "end"), (3, "middle"), (4, "start"), (5, "averaged")] {
            let timing = format!("'flows {position}");
            let flows = vec![1.0; years.len()];
            let out = filled("years", &years, &flows, rate, &[("hence_timing", &timing)]);
            for (row, found) in rows.iter().zip(&out.factors) {
                assert!((found - number(row[column])).abs() <= number(row[6]), "{rate} {position}: {row:?}");
            }
        }
    }
}

#[test]
fn a_rate_by_length_of_project_is_that_of_its_years() {
    // Circular A-94, Appendix C, 2000: the rate belongs to the length of the project, here its last year.
    for row in rows(OMB) {
        let (kind, length, rate) = (row[0], number(row[1]), number(row[2]));
        let years: Vec<f64> = (0..=length as u32).map(f64::from).collect();
        let out = filled("years", &years, &vec![1.0; years.len()], &format!("us-a94c-2000-{kind}"), &[]);
        // Interpolated rates are printed to six decimals.
        let found = out.factors[years.len() - 1].powf(-1.0 / length) - 1.0;
        assert!((found - rate).abs() <= 6e-7, "{kind}, {length} years: {found}, printed {rate}");
    }
}

#[test]
fn a_common_check_of_compounding() {
    // Common practice, no source: 1,000,000 due in 140 years at 10% is 1.603 with yearly and 0.832 with continuous
    // compounding.
    for (basis, value) in [("10%", "1.603"), ("10% continuous", "0.832")] {
        let out = filled("offsets", &[0.0, 140.0], &[0.0, 1e6], basis, &[]);
        assert_eq!(format!("{:.3}", out.report.absolute.npv), value);
    }
}

/// A number in a cell of the output; used by the rules.
pub fn number_at(values: &BTreeMap<(String, Cell), Data>, sheet: &str, cell: &str) -> Option<f64> {
    let cell: Cell = cell.parse().expect("a cell");
    values.get(&(sheet.to_owned(), cell)).and_then(calamine::DataType::as_f64)
}
