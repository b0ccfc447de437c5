//! Every worksheet function and every argument rule, as a host calls them.
//!
//! Values are those of `hence_core`, which `tests/core` and `tests/reference` check against published ones; the few
//! worked out by hand say so.

use hence::worksheet::{Cell, CellError, FUNCTIONS, Function, Range, call};
use hence_core::{Basis, Catalogue, Curve, DayCount, Spec, Where};

use chrono::NaiveDate;

type Given = Option<Range<'static>>;

fn x(number: f64) -> Cell<'static> {
    Cell::Number(number)
}

fn text(words: &str) -> Cell<'static> {
    Cell::Text(words.to_owned().into())
}

const VALUE: Cell<'static> = Cell::Error(CellError::Value);
const NUM: Cell<'static> = Cell::Error(CellError::Number);
const NA: Cell<'static> = Cell::Error(CellError::NotAvailable);
const REF: Cell<'static> = Cell::Error(CellError::Reference);

fn one(cell: Cell<'static>) -> Given {
    Some(Range::single(cell))
}

fn n(number: f64) -> Given {
    one(x(number))
}

fn t(words: &str) -> Given {
    one(text(words))
}

fn column(cells: impl IntoIterator<Item = Cell<'static>>) -> Given {
    let cells: Vec<_> = cells.into_iter().collect();
    Range::new(cells.len(), 1, cells)
}

fn row(cells: impl IntoIterator<Item = Cell<'static>>) -> Given {
    let cells: Vec<_> = cells.into_iter().collect();
    Range::new(1, cells.len(), cells)
}

fn numbers(values: impl IntoIterator<Item = f64>) -> Vec<Cell<'static>> {
    values.into_iter().map(Cell::Number).collect()
}

fn sheet(name: &str, arguments: &[Given]) -> Range<'static> {
    call(Function::find(name).expect("the function is in the table"), arguments)
}

/// The one cell of an answer.
fn cell(name: &str, arguments: &[Given]) -> Cell<'static> {
    let answer = sheet(name, arguments);
    assert_eq!((answer.rows(), answer.columns()), (1, 1), "{name}");
    answer.cells()[0].clone()
}

fn words(name: &str, arguments: &[Given]) -> String {
    match cell(name, arguments) {
        Cell::Text(words) => words.into_owned(),
        other => panic!("{name} gives {other:?}"),
    }
}

fn curve(line: &str) -> Curve {
    Basis::parse(line, &Catalogue::builtin()).unwrap().curve(&Where::default()).unwrap()
}

#[test]
fn factors_and_rates_are_those_of_the_curve() {
    let offsets = [0.0, 0.5, 30.0, 31.0, 75.5, 300.0, 400.0];
    for line in ["3.5%", "3.5% to 30, 3% after", "uk-2003", "gamma mean 4% sd 3%", "0.035"] {
        let curve = curve(line);
        let given = || [t(line), column(numbers(offsets))];
        for (name, f) in [
            ("FACTOR", Curve::factor as fn(&Curve, f64) -> hence_core::Result<f64>),
            ("RATE", Curve::forward_rate),
            ("MEANRATE", Curve::mean_rate),
            ("INSTANT", Curve::instantaneous_rate),
        ] {
            let due: Vec<_> = offsets.iter().map(|t| f(&curve, *t).map_or(NA, Cell::Number)).collect();
            assert_eq!(sheet(name, &given()).cells(), due, "{name} of {line}");
        }
    }
    // By hand: half a unit a year later at 100%, a quarter two years later.
    assert_eq!(sheet("FACTOR", &[n(1.0), row(numbers([0.0, 1.0, 2.0]))]).cells(), numbers([1.0, 0.5, 0.25]));
    // The published first step of the UK's schedule of 2003: 3.5% to year 30, 3% after it.
    let Cell::Number(rate) = cell("RATE", &[t("uk-2003"), n(31.0)]) else { panic!("a number") };
    assert!((rate - 0.03).abs() < 1e-15, "{rate}");
}

/// Bases across, offsets down: a table of factors in one call. Single values are repeated.
#[test]
fn ranges_spread_like_the_hosts_own_operators() {
    let bases = row(["3.5%", "uk-2003"].map(text));
    let answer = sheet("FACTOR", &[bases, column(numbers([0.0, 10.0, 100.0]))]);
    assert_eq!((answer.rows(), answer.columns()), (3, 2));
    for (i, cell) in answer.cells().iter().enumerate() {
        let (line, t) = (["3.5%", "uk-2003"][i % 2], [0.0, 10.0, 100.0][i / 2]);
        assert_eq!(*cell, x(curve(line).factor(t).unwrap()), "{line} at {t}");
    }
    let answer = sheet("WEIGHT", &[column(numbers([20_000.0, 40_000.0])), n(40_000.0), n(1.0)]);
    assert_eq!(answer.cells(), numbers([2.0, 1.0]));
    // Two rows beside three do not go together.
    assert_eq!(cell("REAL", &[column(numbers([0.05, 0.06])), column(numbers([0.02, 0.02, 0.02]))]), VALUE);
}

#[test]
fn evidence_and_prices_are_those_of_the_library() {
    assert_eq!(cell("RAMSEY", &[n(0.015), n(1.0), n(0.02)]), x(0.035));
    assert_eq!(
        cell("RAMSEY", &[n(0.01), n(2.0), n(0.02), n(0.036)]),
        x(hence_core::ramsey_rate_uncertain(0.01, 2.0, 0.02, 0.036).unwrap())
    );
    assert_eq!(cell("ELASTICITY", &[n(0.3), n(0.3)]), x(1.0));
    assert_eq!(
        cell("ELASTICITY", &[n(0.4), n(0.25)]),
        x(hence_core::elasticity_from_taxes(0.4, 0.25).unwrap())
    );
    assert_eq!(cell("REAL", &[n(0.06), n(0.02)]), x(hence_core::real_rate(0.06, 0.02).unwrap()));
    let (annual, _) = hence_core::annual_equivalent(&curve("3.5%"), 1000.0, 60).unwrap();
    assert_eq!(cell("ANNUAL", &[t("3.5%"), n(1000.0), n(60.0)]), x(annual));
    // By hand: at 100% three service years have the annuity 1/2 + 1/4 + 1/8 = 7/8.
    assert_eq!(cell("ANNUAL", &[n(1.0), n(7.0), n(3.0)]), x(8.0));
}

#[test]
fn values_of_offsets_years_financial_years_and_dates() {
    let flows = || row(numbers([-100.0, 60.0, 60.0]));
    let due = |offsets: [f64; 3]| {
        x(hence_core::present_value(&curve("3.5%"), &offsets, &[-100.0, 60.0, 60.0]).unwrap())
    };
    let value =
        |years: Given, base: Given, timing: Given| cell("VALUE", &[t("3.5%"), years, flows(), base, timing]);
    assert_eq!(value(row(numbers([0.0, 1.0, 2.0])), None, None), due([0.0, 1.0, 2.0]));
    assert_eq!(value(row(numbers([0.5, 1.5, 2.5])), None, None), due([0.5, 1.5, 2.5]));
    let years = || row(numbers([2026.0, 2027.0, 2028.0]));
    assert_eq!(value(years(), n(2026.0), None), due([0.0, 1.0, 2.0]));
    assert_eq!(value(years(), n(2026.0), t("flows middle")), due([-0.5, 0.5, 1.5]));
    assert_eq!(value(years(), n(2026.0), t("flows middle, base start")), due([0.5, 1.5, 2.5]));
    let financial = || row(["2026/27", "2027/28", "FY29"].map(text));
    assert_eq!(value(financial(), t("2026/27"), None), due([0.0, 1.0, 2.0]));
    // 1 April 2026, 1 April 2027 and 1 October 2028, as spreadsheets number them (46113 is 1 April 2026).
    let date = |y, m, d| {
        let days = NaiveDate::from_ymd_opt(y, m, d).unwrap() - NaiveDate::from_ymd_opt(1899, 12, 30).unwrap();
        days.num_days() as f64
    };
    assert_eq!(date(2026, 4, 1), 46113.0);
    let dates = [(2026, 4, 1), (2027, 4, 1), (2028, 10, 1)];
    let base = NaiveDate::from_ymd_opt(2026, 4, 1).unwrap();
    let offsets = dates.map(|(y, m, d)| {
        let date = NaiveDate::from_ymd_opt(y, m, d).unwrap();
        hence_core::offset_of_dates(base, date, DayCount::Anniversary).unwrap()
    });
    let serials = || row(numbers(dates.map(|(y, m, d)| date(y, m, d))));
    assert_eq!(value(serials(), n(46113.0), None), due(offsets));
    // Dates say themselves where a flow stands.
    assert_eq!(value(serials(), n(46113.0), t("flows middle")), VALUE);
    // Kinds that do not go together, and years without a base.
    for (years, base) in
        [(years(), t("2026/27")), (financial(), n(2026.0)), (serials(), n(2026.0)), (years(), None)]
    {
        assert_eq!(value(years, base, None), VALUE);
    }
    // A timing needs whole years.
    assert_eq!(value(row(numbers([0.5, 1.5, 2.5])), None, t("flows middle")), VALUE);
}

/// The timing of the argument beats that of the line, and averaged flows take the mean of two factors.
#[test]
fn timing_of_the_argument_of_the_line_and_averaged() {
    let value = |line: &str, timing: Given| cell("VALUE", &[t(line), n(2027.0), n(100.0), n(2026.0), timing]);
    let factor = |offset: f64| curve("3.5%").factor(offset).unwrap();
    assert_eq!(value("3.5%; flows middle", None), x(100.0 * factor(0.5)));
    assert_eq!(value("3.5%; flows middle", t("flows start")), x(100.0 * factor(0.0)));
    let averaged = 0.5 * factor(0.0) + 0.5 * factor(1.0);
    let Cell::Number(found) = value("3.5%", t("flows averaged")) else { panic!("a number") };
    assert!((found - 100.0 * averaged).abs() < 1e-13, "{found}");
    assert_eq!(value("3.5%", t("flows late")), VALUE);
}

#[test]
fn several_streams_give_a_value_each() {
    let years = numbers([0.0, 1.0]);
    let flows = numbers([1.0, 2.0, 10.0, 20.0, 100.0, 200.0]);
    let at_one = |first: f64, second: f64| x(first + second * 0.5);
    let across = sheet("VALUE", &[n(1.0), row(years.clone()), Range::new(3, 2, flows.clone())]);
    assert_eq!((across.rows(), across.columns()), (3, 1));
    assert_eq!(across.cells(), [at_one(1.0, 2.0), at_one(10.0, 20.0), at_one(100.0, 200.0)]);
    let down = sheet("VALUE", &[n(1.0), column(years.clone()), Range::new(2, 3, flows.clone())]);
    assert_eq!((down.rows(), down.columns()), (1, 3));
    assert_eq!(down.cells(), [at_one(1.0, 20.0), at_one(2.0, 100.0), at_one(10.0, 200.0)]);
    // One stream with a text does not spoil the others.
    let mut spoilt = flows;
    spoilt[1] = text("tbc");
    let across = sheet("VALUE", &[n(1.0), row(years.clone()), Range::new(3, 2, spoilt)]);
    assert_eq!(across.cells(), [VALUE, at_one(10.0, 20.0), at_one(100.0, 200.0)]);
    // Years along a row, flows along a column; and too few flows.
    assert_eq!(cell("VALUE", &[n(1.0), row(years.clone()), column(numbers([1.0, 2.0]))]), VALUE);
    assert_eq!(cell("VALUE", &[n(1.0), row(years), n(1.0)]), VALUE);
}

#[test]
fn blanks_texts_logicals_and_errors_follow_the_rules() {
    // A blank cell within a range leaves its place empty, and texts and errors stay where they are.
    let offsets = column([x(1.0), Cell::Blank, text("x"), Cell::Logical(true), REF, text(" ")]);
    let answer = sheet("FACTOR", &[n(1.0), offsets]);
    assert_eq!(answer.cells(), [x(0.5), text(""), VALUE, VALUE, REF, text("")]);
    // A single blank cell where a value is due is an error, never 0.
    assert_eq!(cell("FACTOR", &[n(1.0), one(Cell::Blank)]), VALUE);
    assert_eq!(cell("FACTOR", &[n(1.0), one(text(""))]), VALUE);
    assert_eq!(cell("FACTOR", &[one(Cell::Blank), n(1.0)]), VALUE);
    assert_eq!(cell("FACTOR", &[one(Cell::Logical(true)), n(1.0)]), VALUE);
    assert_eq!(cell("FACTOR", &[one(REF), n(1.0)]), REF);
    // A blank optional argument is one left out; a blank flow is 0.
    assert_eq!(cell("FACTOR", &[n(1.0), n(1.0), one(Cell::Blank), one(text(""))]), x(0.5));
    let with_blank = [n(1.0), row(numbers([0.0, 1.0, 2.0])), row([x(4.0), Cell::Blank, x(4.0)])];
    assert_eq!(cell("VALUE", &with_blank), x(5.0));
    // A blank year is passed over with a blank flow; a flow beside a blank year would be lost.
    let years = || row([x(0.0), Cell::Blank, x(2.0)]);
    assert_eq!(cell("VALUE", &[n(1.0), years(), row([x(4.0), Cell::Blank, x(4.0)])]), x(5.0));
    assert_eq!(cell("VALUE", &[n(1.0), years(), row(numbers([4.0, 1.0, 4.0]))]), VALUE);
    assert_eq!(
        cell("VALUE", &[n(1.0), column([Cell::Blank, Cell::Blank]), column(numbers([1.0, 1.0]))]),
        VALUE
    );
    // Errors among flows come back.
    assert_eq!(cell("VALUE", &[n(1.0), row(numbers([0.0, 1.0])), row([x(4.0), REF])]), REF);
    // Left out, or too many.
    assert_eq!(cell("FACTOR", &[n(1.0), None]), VALUE);
    assert_eq!(cell("FACTOR", &[]), VALUE);
    assert_eq!(cell("REAL", &[n(0.05), n(0.02), n(0.02)]), VALUE);
}

/// Out of range or not finite is `#NUM!`, outside the curve `#N/A`, a text that is no basis `#VALUE!`.
#[test]
fn kinds_of_errors() {
    for (due, name, arguments) in [
        (NUM, "FACTOR", vec![n(3.5), n(1.0)]),
        (NUM, "FACTOR", vec![n(-0.5), n(1.0)]),
        (NUM, "FACTOR", vec![t("350%"), n(1.0)]),
        (NUM, "FACTOR", vec![n(0.035), n(f64::INFINITY)]),
        (NA, "FACTOR", vec![t("3.5% to 30"), n(31.0)]),
        (NA, "FACTOR", vec![t("4% to 10, 3% after; whole horizon by flow"), n(-1.0)]),
        (VALUE, "FACTOR", vec![t("3.5% until 30"), n(1.0)]),
        (VALUE, "FACTOR", vec![t("uk-1066"), n(1.0)]),
        (VALUE, "FACTOR", vec![t("2.5% to 2070, 1.5% after"), n(1.0)]),
        (VALUE, "FACTOR", vec![t("4% at 10, 3% at 30; whole horizon by length, interpolated"), n(1.0)]),
        (VALUE, "FACTOR", vec![n(0.035), n(1.0), t("soon")]),
        (NUM, "FACTOR", vec![n(0.035), n(1.0), None, n(0.0)]),
        (NUM, "RAMSEY", vec![n(0.01), n(21.0), n(0.02)]),
        (NUM, "RAMSEY", vec![n(0.01), n(1.0), n(0.02), n(-0.1)]),
        (VALUE, "RAMSEY", vec![t("1%"), n(1.0), n(0.02)]),
        (NUM, "ELASTICITY", vec![n(40.0), n(0.25)]),
        (NUM, "WEIGHT", vec![n(0.0), n(1.0), n(1.0)]),
        (NUM, "REAL", vec![n(0.05), n(-1.0)]),
        (NUM, "ANNUAL", vec![n(0.035), n(1.0), n(1.5)]),
        (NUM, "ANNUAL", vec![n(0.035), n(1.0), n(0.0)]),
        (NUM, "ANNUAL", vec![n(0.035), n(1.0), n(1e9)]),
        (NUM, "IRR", vec![row(numbers([0.0, 1.0])), row(numbers([1.0, 1.0]))]),
        (NUM, "MULTIPLIER", vec![n(1.0), n(0.0)]),
        (VALUE, "SWITCH", vec![t(RAMSEY), t("luck"), n(1.0), n(1.0)]),
        (VALUE, "SWITCH", vec![t("3.5%"), t("growth"), row(numbers([0.0, 1.0])), row(numbers([-1.0, 2.0]))]),
        (VALUE, "SWITCH", vec![t(RAMSEY), t("rate"), n(1.0), n(1.0), None, t("flows averaged")]),
        (NUM, "SWITCH", vec![t(RAMSEY), t("rate"), row(numbers([0.0, 1.0])), row(numbers([1.0, 1.0]))]),
        (VALUE, "DRAWS", vec![t("wide"), n(1.0), n(0.02), n(1.0), n(1.0)]),
        (NUM, "DRAWS", vec![n(0.01), n(21.0), n(0.02), n(1.0), n(1.0)]),
        (NUM, "DRAWS", vec![n(0.01), n(1.0), t("normal mean 0% sd 90%"), n(1.0), n(1.0)]),
        (NUM, "DRAWS", vec![n(0.01), n(1.0), n(0.02), n(1.0), n(1.0), None, None, None, n(101.0)]),
        (NUM, "DRAWS", vec![n(0.01), n(1.0), n(0.02), n(1.0), n(1.0), None, None, None, None, n(2e6)]),
        (NUM, "DRAWS", vec![n(0.01), n(1.0), n(0.02), n(1.0), n(1.0), None, None, None, None, None, n(0.5)]),
        (NUM, "HAZARD", vec![n(1.0)]),
        (VALUE, "HAZARD", vec![n(0.01), t("daily")]),
        (NUM, "WAITING", vec![n(1.0)]),
        (VALUE, "BRACKETS", vec![row(numbers([0.4, 0.3])), row(numbers([0.3, 0.2])), n(1.0)]),
        (NUM, "BRACKETS", vec![n(0.4), n(0.3), n(0.0)]),
        (VALUE, "GROWTH", vec![column(numbers([1.0, 2.0, 3.0]))]),
        (NUM, "GROWTH", vec![column(numbers([1.0, 2.0, 0.0, 3.0]))]),
        (
            VALUE,
            "GROWTH",
            vec![column(numbers([1.0, 2.0, 3.0, 4.0])), column(numbers([2020.0, 2021.0, 2023.0, 2024.0]))],
        ),
        (NUM, "UTILITY", vec![n(0.0), n(1.0)]),
        (NUM, "MARGINAL", vec![n(1.0), n(21.0)]),
        (VALUE, "WELFARE", vec![column(numbers([1.0, 2.0])), row(numbers([0.0, 1.0])), n(0.01), n(1.0)]),
        (
            VALUE,
            "WELFARE",
            vec![Range::new(2, 2, numbers([1.0; 4])), Range::new(2, 2, numbers([1.0; 4])), n(0.01), n(1.0)],
        ),
        (NUM, "COMPENSATION", vec![n(4.0), n(4.0), n(4.0), n(1.0), n(0.25), n(2.0)]),
        (NUM, "EXACT", vec![n(-4.0), n(4.0), n(1.0), n(4.0), n(2.0)]),
        (NUM, "EQUIVALENT", vec![row(numbers([1.0, 4.0])), row(numbers([0.5, 0.6])), n(1.0)]),
        (VALUE, "SCHEDULE", vec![t("uk-1066")]),
        (VALUE, "SCHEDULE", vec![n(1.0)]),
    ] {
        assert_eq!(cell(name, &arguments), due, "{name} {arguments:?}");
    }
}

#[test]
fn a_base_and_a_length_serve_the_curves_that_need_them() {
    let line = "2.5% to 2070, 1.5% after";
    let at = Where { base_year: Some(2026), length: None };
    let curve = Basis::parse(line, &Catalogue::builtin()).unwrap().curve(&at).unwrap();
    let due = x(curve.factor(60.0).unwrap());
    assert_eq!(cell("FACTOR", &[t(line), n(60.0), n(2026.0)]), due);
    assert_eq!(cell("FACTOR", &[t(line), n(60.0), t("2026/27")]), due);
    assert_eq!(cell("VALUE", &[t(line), n(2086.0), n(1.0), n(2026.0)]), due);
    let line = "4% at 10, 3% at 30; whole horizon by length, interpolated";
    let at = Where { base_year: None, length: Some(20.0) };
    let curve = Basis::parse(line, &Catalogue::builtin()).unwrap().curve(&at).unwrap();
    let due = x(curve.factor(20.0).unwrap());
    assert_eq!(cell("FACTOR", &[t(line), n(20.0), None, n(20.0)]), due);
    // The length of an appraisal is its largest offset.
    assert_eq!(cell("VALUE", &[t(line), row(numbers([0.0, 20.0])), row(numbers([0.0, 1.0]))]), due);
}

#[test]
fn every_rate_of_return_one_below_the_other() {
    // By hand: -100 (1+r)^2 + 230 (1+r) - 132 = 0 at 10% and 20%.
    let flows = || row(numbers([-100.0, 230.0, -132.0]));
    let answer = sheet("IRR", &[row(numbers([2026.0, 2027.0, 2028.0])), flows()]);
    let found: Vec<f64> =
        answer.cells().iter().map(|cell| if let Cell::Number(r) = cell { *r } else { f64::NAN }).collect();
    assert_eq!((answer.rows(), answer.columns()), (2, 1));
    assert!((found[0] - 0.1).abs() < 1e-12 && (found[1] - 0.2).abs() < 1e-12, "{found:?}");
    let above = sheet("IRR", &[row(numbers([0.0, 1.0, 2.0])), flows(), n(0.15)]);
    assert_eq!(above.cells(), [answer.cells()[1].clone()]);
    let below = sheet("IRR", &[row(numbers([0.0, 1.0, 2.0])), flows(), None, n(0.15)]);
    assert_eq!(below.cells(), [answer.cells()[0].clone()]);
    // A rate that only touches zero is told as not settled, not left out: (1+r)^2 - 2.2 (1+r) + 1.21.
    let touching = sheet("IRR", &[row(numbers([0.0, 1.0, 2.0])), row(numbers([100.0, -220.0, 121.0]))]);
    assert_eq!(touching.cells(), [NUM]);
}

const RAMSEY: &str = "preference 1.5%, elasticity 1, growth 2%";

fn found(answer: &Range<'_>) -> Vec<f64> {
    answer.cells().iter().map(|cell| if let Cell::Number(x) = cell { *x } else { f64::NAN }).collect()
}

/// By hand: 104 in a year are worth 100 at 4%, which is 1.5% + 1.25 x 2%, 1.5% + 1 x 2.5% and 2% + 1 x 2%.
#[test]
fn switching_values_of_each_parameter() {
    let flows = || column(numbers([-100.0, 104.0]));
    for (parameter, due) in [("rate", 0.04), ("preference", 0.02), ("ELASTICITY", 1.25), ("growth", 0.025)] {
        let answer = sheet(
            "SWITCH",
            &[t(RAMSEY), t(parameter), column(numbers([2026.0, 2027.0])), flows(), n(2026.0)],
        );
        assert_eq!((answer.rows(), answer.columns()), (1, 1));
        assert!((found(&answer)[0] - due).abs() < 1e-12, "{parameter}: {answer:?}");
    }
    // Two rates, rising; and one of them where the interval says so.
    let years = || row(numbers([0.0, 1.0, 2.0]));
    let two = || row(numbers([-100.0, 230.0, -132.0]));
    let answer = found(&sheet("SWITCH", &[t("3.5%"), t("rate"), years(), two()]));
    assert!(
        answer.len() == 2 && (answer[0] - 0.1).abs() < 1e-12 && (answer[1] - 0.2).abs() < 1e-12,
        "{answer:?}"
    );
    let high = sheet("SWITCH", &[t("3.5%"), t("rate"), years(), two(), None, None, n(0.15), n(0.5)]);
    assert_eq!(found(&high), answer[1..]);
    // Flows in the middle of their years, from a base at the start, stand half a year in each of the two bands.
    let bands = || t("preference 3%, elasticity 1, growth 2% to 1, 4% after");
    let flows = || row(numbers([-100.0, 100.0 * (1.03f64 * 1.05).sqrt()]));
    let years = || row(numbers([2026.0, 2027.0]));
    let middle = t("flows middle, base start");
    let given = [bands(), t("preference"), years(), flows(), n(2026.0), middle];
    assert!((found(&sheet("SWITCH", &given))[0] - 0.01).abs() < 1e-12);
    let at_the_end = found(&sheet("SWITCH", &[bands(), t("preference"), years(), flows(), n(2026.0)]));
    assert!((at_the_end[0] - ((1.03f64 * 1.05).sqrt() - 1.02)).abs() < 1e-12, "{at_the_end:?}");
    // By hand: 120 - 100 = 20 is 0 when costs rise by a fifth or benefits fall by a sixth.
    let multipliers = sheet("MULTIPLIER", &[n(20.0), row(numbers([-100.0, 120.0]))]);
    assert_eq!(multipliers.cells()[0], x(1.2));
    assert!((found(&multipliers)[1] - 5.0 / 6.0).abs() < 1e-15);
}

/// By hand: 102 in a year less 99 are worth 1 at 2% and 102/1.04 - 99 at 4%.
#[test]
fn draws_give_a_row_for_each_option() {
    let growth = || t("0.25 at 1%, 0.75 at 3%");
    let (better, worse) = (1.0, 102.0 / 1.04 - 99.0);
    let flows = || Range::new(2, 2, numbers([-99.0, 102.0, 0.0, 0.0]));
    let years = || row(numbers([2026.0, 2027.0]));
    let answer = sheet("DRAWS", &[n(0.01), n(1.0), growth(), years(), flows(), n(2026.0)]);
    assert_eq!((answer.rows(), answer.columns()), (2, 9));
    let all_cells = answer.cells().to_vec();
    let all = found(&answer);
    let (first, second) = all.split_at(9);
    // Share above 0 and first place are the quarter of draws at 2%, within four standard errors.
    let error = 4.0 * (0.25f64 * 0.75 / 10_000.0).sqrt();
    assert!((first[2] - 0.25).abs() < error && first[2] == first[3], "{first:?}");
    let mean = first[2] * better + (1.0 - first[2]) * worse;
    assert!((first[0] - mean).abs() < 1e-10, "{first:?}");
    // The percentiles 5 to 75 and 95.
    for (i, due) in [worse, worse, worse, better, better].into_iter().enumerate() {
        let unsure = i == 3 && (first[2] - 0.25).abs() < 0.01;
        assert!(unsure || (first[4 + i] - due).abs() < 1e-12, "{i}: {first:?}");
    }
    assert_eq!((second[0], second[1], second[2]), (0.0, 0.0, 0.0));
    assert!((first[3] + second[3] - 1.0).abs() < 1e-15);

    // Years down a column give a column for each option, of the percentiles asked for; the seed counts.
    let given = |seed: Given| {
        let flows = Range::new(2, 2, numbers([-99.0, 0.0, 102.0, 0.0]));
        let years = column(numbers([0.0, 1.0]));
        [n(0.01), n(1.0), growth(), years, flows, None, None, t("0%"), row(numbers([50.0])), n(400.0), seed]
    };
    let answer = sheet("DRAWS", &given(n(1.0)));
    assert_eq!((answer.rows(), answer.columns()), (5, 2));
    assert_eq!(answer, sheet("DRAWS", &given(None)));
    assert_ne!(answer, sheet("DRAWS", &given(n(2.0))));
    // So they do for one option.
    let one = [n(0.01), n(1.0), growth(), column(numbers([0.0, 1.0])), column(numbers([-99.0, 102.0]))];
    let one = sheet("DRAWS", &one);
    assert_eq!((one.rows(), one.columns(), &one.cells()[0]), (9, 1, &all_cells[0]));
    // Nothing is uncertain: every draw has the one value.
    let sure = found(&sheet(
        "DRAWS",
        &[n(0.01), t("1"), n(0.03), row(numbers([0.0, 1.0])), row(numbers([-99.0, 102.0]))],
    ));
    assert!((sure[0] - worse).abs() < 1e-12 && sure[1] < 1e-12 && sure[2..4] == [0.0, 1.0], "{sure:?}");
}

/// By hand, at numbers that give short fractions.
#[test]
fn hazards_growth_and_welfare() {
    assert_eq!(cell("HAZARD", &[n(0.2)]), x(0.25));
    assert_eq!(sheet("WAITING", &[row(numbers([101.0, 2.0]))]).cells(), numbers([0.01, 1.0]));
    assert_eq!(cell("WAITING", &[n(100.0), t(" Continuous")]), x(0.01));
    // Both brackets are proportional taxes, whose elasticity is 1.
    let taxes = || row(numbers([0.3, 0.2]));
    assert_eq!(cell("BRACKETS", &[taxes(), taxes(), row(numbers([3.0, 1.0]))]), x(1.0));

    let answer = sheet(
        "GROWTH",
        &[row(numbers([1.0, 2.0, 4.0, 8.0])), row(numbers([2020.0, 2021.0, 2022.0, 2023.0]))],
    );
    assert_eq!((answer.rows(), answer.columns()), (6, 2));
    let log = std::f64::consts::LN_2;
    let (all, blank) = (answer.cells(), || text(""));
    assert_eq!(all[..4], [x(1.0), blank(), x(1.0), blank()]);
    assert_eq!((&all[4], &all[6], &all[10..]), (&x(log), &x(log), &[blank(), blank()][..]));
    // Log growth of 1%, 3%, 2%: mean 2%, deviation 1%, persistence -1/2.
    let series = column(numbers([0.0f64, 0.01, 0.04, 0.06].map(f64::exp)));
    let all = found(&sheet("GROWTH", &[series]));
    for (place, due) in [(4, 0.021), (6, 0.02), (8, 0.01), (10, -0.5)] {
        assert!((all[place] - due).abs() < 1e-12, "{place}: {all:?}");
    }

    assert_eq!(sheet("UTILITY", &[column(numbers([4.0, 1.0])), n(2.0)]).cells(), numbers([0.75, 0.0]));
    assert_eq!(cell("MARGINAL", &[n(4.0), n(2.0)]), x(0.0625));
    // U(2) + U(4)/1.25 with U(c) = 1 - 1/c.
    assert_eq!(
        cell("WELFARE", &[row(numbers([2.0, 4.0])), row(numbers([0.0, 1.0])), n(0.25), n(2.0)]),
        x(1.1)
    );
    let answer = found(&sheet("COMPENSATION", &[n(0.8), n(4.0), n(4.0), n(1.0), n(0.25), n(2.0)]));
    assert!((answer[0] - 20.0 / 11.0).abs() < 1e-15, "{answer:?}");
    // 1 - 1/(1 + E/4) = 0.8 x (1 - 1/1.25) = 0.16. The blank flow is 0.
    let exact =
        [row([x(1.0), Cell::Blank]), row(numbers([4.0, 4.0])), row(numbers([0.8, 0.5])), n(4.0), n(2.0)];
    let answer = found(&sheet("EXACT", &exact));
    assert!((answer[0] - 4.0 * (1.0 / 0.84 - 1.0)).abs() < 1e-15, "{answer:?}");
    assert_eq!(
        cell("EQUIVALENT", &[column(numbers([1.0, 4.0])), column(numbers([0.5, 0.5])), n(1.0)]),
        x(2.0)
    );
}

/// The line of every built-in schedule gives the schedule's factors and timing.
#[test]
fn the_line_of_a_schedule_is_its_curve() {
    let catalogue = Catalogue::builtin();
    let mut lines = 0;
    for schedule in catalogue.schedules() {
        if matches!(schedule.spec(), Spec::Table(_)) {
            assert_eq!(cell("SCHEDULE", &[t(schedule.id())]), VALUE);
            continue;
        }
        let line = words("SCHEDULE", &[t(schedule.id())]);
        let basis = Basis::parse(&line, &catalogue).unwrap_or_else(|e| panic!("{line}: {e}"));
        assert_eq!((basis.spec(), basis.timing()), (schedule.spec(), schedule.timing()), "{line}");
        lines += 1;
    }
    assert!(lines > 20, "{lines} schedules have a line");
    assert_eq!(
        words("SCHEDULE", &[t("UK-2003")]),
        "3.5% to 30, 3% to 75, 2.5% to 125, 2% to 200, 1.5% to 300, 1% after"
    );
}

/// HENCE.EXPLAIN gives the basis in words with its source, and otherwise what is wrong, with what to do.
#[test]
fn explain_says_what_is_used_or_what_is_wrong() {
    let said = words("EXPLAIN", &[t("uk-2003; flows middle")]);
    for part in
        ["3.5% a year for years 0 to 30", "HM Treasury", "2003", "flows middle, base end", "superseded"]
    {
        assert!(said.contains(part), "{part} in {said}");
    }
    for (given, parts) in [
        (vec![t("3,5%")], vec!["#VALUE!", "basis", "3.5%"]),
        (vec![n(3.5)], vec!["#NUM!", "350%", "Try: enter 3.5% or 0.035"]),
        (vec![t("uk-1066")], vec!["#VALUE!", "uk-1066"]),
        (vec![one(REF)], vec!["#REF!", "basis"]),
        (vec![one(Cell::Blank)], vec!["#VALUE!", "basis"]),
        (vec![t("2.5% to 2070, 1.5% after")], vec!["2.5%", "Needs more"]),
        (vec![t("2.5% to 2070, 1.5% after"), None, None, n(2026.0)], vec!["2.5%"]),
        (vec![t("3.5%"), row(numbers([2026.0, 2027.0]))], vec!["#VALUE!", "no base", "Try:"]),
        (
            vec![t("3.5%"), row(numbers([2026.0, 2027.0])), None, n(2026.0)],
            vec!["a flow in 2026 has factor 1.0000, in 2027 0.9662"],
        ),
        (
            vec![t("3.5%"), column(numbers([2026.0, 2027.0])), column([x(1.0), text("tbc")]), n(2026.0)],
            vec!["#VALUE!", "flows, row 2", "tbc"],
        ),
        (
            vec![t("3.5%"), row(numbers([0.0, 1.0])), column(numbers([1.0, 1.0]))],
            vec!["#VALUE!", "same direction"],
        ),
        (vec![t("3.5% to 30"), row(numbers([0.0, 31.0]))], vec!["#N/A", "cell 2"]),
        (vec![t("3.5%"), row(numbers([2026.5])), None, n(2026.0)], vec!["#VALUE!", "whole years"]),
    ] {
        let said = words("EXPLAIN", &given);
        for part in parts {
            assert!(said.contains(part), "{part} in: {said}");
        }
    }
    assert!(!words("EXPLAIN", &[t("2.5% to 2070, 1.5% after"), None, None, n(2026.0)]).contains("Needs"));
}

/// HENCE.WHY gives the words behind an error value, of the call as a whole or of its first cell at fault.
#[test]
fn why_says_what_is_wrong_with_a_call() {
    let touching = row(numbers([100.0, -220.0, 121.0]));
    for (given, parts) in [
        (vec![t("FACTOR"), t("3,5%"), n(1.0)], vec!["#VALUE!", "basis", "3.5%"]),
        (
            vec![t("hence.factor"), t("3.5% to 30"), column(numbers([1.0, 31.0]))],
            vec!["#N/A", "offset, row 2"],
        ),
        (vec![t("FACTOR"), t("3.5%")], vec!["#VALUE!", "HENCE.FACTOR needs the argument offset"]),
        (
            vec![t("VALUE"), n(1.0), row(numbers([0.0, 1.0])), row([x(4.0), text("tbc")])],
            vec!["#VALUE!", "flows, column 2", "tbc"],
        ),
        (
            vec![t("DRAWS"), t("normal mean 1%"), n(1.0), n(0.02), n(1.0), n(1.0)],
            vec!["#VALUE!", "preference", "sd"],
        ),
        (
            vec![t("DRAWS"), n(0.01), n(1.0), n(0.02), n(1.0), n(1.0), None, None, None, None, None, n(-1.0)],
            vec!["#NUM!", "seed"],
        ),
        (
            vec![t("SWITCH"), t("3.5%"), t("growth"), row(numbers([0.0, 1.0])), row(numbers([-1.0, 2.0]))],
            vec!["#VALUE!", "not stated by growth", "Try:"],
        ),
        (vec![t("EXACT"), n(-4.0), n(4.0), n(1.0), n(4.0), n(2.0)], vec!["#NUM!", "leaves nothing"]),
        (vec![t("GROWTH"), row(numbers([1.0, 2.0]))], vec!["#VALUE!", "at least 4"]),
        (
            vec![t("IRR"), row(numbers([0.0, 1.0])), row(numbers([1.0, 1.0]))],
            vec!["#NUM!", "no rate of return"],
        ),
        (vec![t("IRR"), row(numbers([0.0, 1.0, 2.0])), touching], vec!["#NUM!", "settle"]),
        (vec![t("REAL"), n(0.05), one(REF)], vec!["#REF!", "inflation"]),
        (vec![t("REAL"), n(0.05), n(0.02), n(0.02)], vec!["#VALUE!", "at most 2"]),
        (vec![t("WHY"), t("WHY")], vec!["no function WHY"]),
        (vec![t("FACTORIAL"), n(1.0)], vec!["no function FACTORIAL"]),
        (vec![one(Cell::Blank)], vec!["function"]),
        (vec![t("FACTOR"), t("3.5%"), n(1.0), one(Cell::Blank)], vec!["nothing is wrong"]),
        (vec![t("EXPLAIN"), t("nowhere-1")], vec!["nothing is wrong"]),
    ] {
        let said = words("WHY", &given);
        for part in parts {
            assert!(said.contains(part), "{part} in: {said}");
        }
    }
}

/// Arguments that suit each function, and texts in their places.
#[test]
fn no_function_takes_a_text_for_a_number() {
    for function in
        FUNCTIONS.iter().filter(|function| !["EXPLAIN", "SCHEDULE", "WHY"].contains(&function.name))
    {
        let sound: Vec<Given> = match function.name {
            "FACTOR" | "RATE" | "MEANRATE" | "INSTANT" => vec![t("3.5%"), n(2.0)],
            "VALUE" => vec![t("3.5%"), n(2.0), n(100.0)],
            "ANNUAL" => vec![t("3.5%"), n(100.0), n(3.0)],
            "IRR" => vec![row(numbers([0.0, 1.0])), row(numbers([-100.0, 107.0]))],
            "RAMSEY" => vec![n(0.01), n(1.0), n(0.02)],
            "ELASTICITY" => vec![n(0.4), n(0.25)],
            "WEIGHT" => vec![n(1.0), n(2.0), n(1.0)],
            "REAL" => vec![n(0.05), n(0.02)],
            "SWITCH" => vec![t(RAMSEY), t("rate"), row(numbers([0.0, 1.0])), row(numbers([-100.0, 107.0]))],
            "MULTIPLIER" => vec![n(20.0), n(-100.0)],
            "DRAWS" => vec![t("1%"), t("1"), t("2%"), n(2.0), n(100.0)],
            "BRACKETS" => vec![n(0.4), n(0.25), n(1.0)],
            "HAZARD" => vec![n(0.01)],
            "WAITING" => vec![n(100.0)],
            "GROWTH" => vec![column(numbers([1.0, 2.0, 3.0, 4.0]))],
            "UTILITY" | "MARGINAL" => vec![n(2.0), n(1.5)],
            "WELFARE" => vec![n(2.0), n(1.0), n(0.01), n(1.5)],
            "COMPENSATION" => vec![n(1.0), n(100.0), n(110.0), n(10.0), n(0.01), n(1.5)],
            "EXACT" => vec![n(1.0), n(100.0), n(0.5), n(100.0), n(1.5)],
            "EQUIVALENT" => vec![n(2.0), n(1.0), n(1.5)],
            other => panic!("no arguments for {other}"),
        };
        assert_eq!(sound.len(), function.required(), "{}", function.name);
        assert!(matches!(sheet(function.name, &sound).cells()[0], Cell::Number(_)), "{}", function.name);
        // A basis, a parameter and a distribution are texts; everything else is a number, for which `two` and `2` as
        // texts are errors.
        let first = match function.name {
            "SWITCH" => 2,
            "DRAWS" => 3,
            _ => usize::from(function.arguments[0].name == "basis"),
        };
        for i in first..sound.len() {
            for wrong in ["two", "2"] {
                let mut arguments = sound.clone();
                arguments[i] = t(wrong);
                assert_eq!(cell(function.name, &arguments), VALUE, "{} {i} {wrong}", function.name);
            }
        }
    }
}
