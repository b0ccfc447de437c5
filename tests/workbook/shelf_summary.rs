//! The bridge from what workbooks held to what they come to now, and the summary of a shelf.
//!
//! Expected values are worked out by hand from 1/(1+r)^t.

use std::collections::BTreeMap;
use std::path::Path;

use hence_core::Catalogue;
use hence_workbook::decide::{Bridge, Rule};
use hence_workbook::fill::{FillRequest, fill};
use hence_workbook::problem::{Place, Problem, Severity};
use hence_workbook::references::Cell;
use hence_workbook::report::{Report, Status};
use hence_workbook::shelf::{Record, summary};

use crate::libreoffice::cells::{FileCell, Stored, cells};
use crate::libreoffice::office::{Recalculate, saved, soffice};
use crate::small::Small;

/// 100 spent in 2026, 60 back in 2027 and in 2028; the NPV cell holds something.
fn dyke(basis: &str, held: &str) -> Small {
    let cells = format!(
        "B1: 2026\nB2: '{basis}\nB4: 2026 | 2027 | 2028\nB5: 100 | 0 | 0\nB6: 0 | 60 | 60\nB9: {held}"
    );
    Small::default().sheet("Plan", &cells).names(
        "hence_base B1, hence_basis B2, hence_years B4:D4, hence_cost_works B5:D5, hence_benefit_floods B6:D6, hence_npv B9",
    )
}

fn npv(rate: f64) -> f64 {
    -100.0 + 60.0 / (1.0 + rate) + 60.0 / (1.0 + rate).powi(2)
}

fn reported(small: &Small, request: &FillRequest) -> Report {
    let filled = fill(&small.open().0, request, &Catalogue::builtin());
    filled.unwrap_or_else(|error| panic!("{error}")).report
}

fn bridge(small: &Small, request: &FillRequest) -> Bridge {
    reported(small, request).options[0].bridge
}

fn on(basis: &str) -> FillRequest {
    FillRequest { basis: Some(basis.to_owned()), ..FillRequest::default() }
}

#[track_caller]
fn close(found: f64, expected: f64) {
    assert!((found - expected).abs() <= 1e-10, "found {found}, expected {expected}");
}

#[test]
fn a_bridge_goes_from_what_was_held_by_the_own_basis_to_the_new_one() {
    let found = bridge(&dyke("3.5%", "=B6-B5>20"), &on("15%"));
    assert_eq!(found.held, Some(20.0));
    close(found.declared.unwrap().npv, npv(0.035));
    close(found.moved.unwrap().npv, npv(0.035));
    close(found.now.npv, npv(0.15));
}

#[test]
fn a_moved_base_is_a_step_of_its_own() {
    let request = FillRequest { base: Some("2027".to_owned()), ..on("15%") };
    let found = bridge(&dyke("3.5%", ""), &request);
    assert_eq!(found.held, None);
    close(found.declared.unwrap().npv, npv(0.035));
    // All is one year nearer to the base.
    close(found.moved.unwrap().npv, npv(0.035) * 1.035);
    close(found.now.npv, npv(0.15) * 1.15);
    // Without another basis, the move is the whole of it.
    let found = bridge(&dyke("3.5%", ""), &FillRequest { basis: None, ..request });
    close(found.moved.unwrap().npv, npv(0.035) * 1.035);
    assert_eq!(found.moved, Some(found.now));
}

#[test]
fn the_new_base_is_written_into_the_base_cell() {
    let request = FillRequest { base: Some("2027".to_owned()), ..FillRequest::default() };
    let filled = fill(&dyke("3.5%", "").open().0, &request, &Catalogue::builtin()).expect("filled");
    let at = |cell: &str| cells(&filled.bytes)[&("Plan".to_owned(), cell.parse().unwrap())].value.clone();
    assert_eq!(at("B1"), Stored::Number(2027.0));
    let Stored::Number(npv_cell) = at("B9") else { panic!("no number") };
    close(npv_cell, npv(0.035) * 1.035);
}

#[test]
fn prices_of_another_year_need_to_know_how_prices_change() {
    let request = FillRequest { prices: Some("real 2027".to_owned()), ..FillRequest::default() };
    let error = fill(&dyke("3.5%", "").open().0, &request, &Catalogue::builtin()).expect_err("refused");
    assert_eq!(error.problems().iter().find(|p| p.severity == Severity::Error).unwrap().code, "price-basis");
    // Money of the day, inflation 10%: in prices of 2027 all is worth 1.1 times what it is in those of 2026.
    let cells = "B1: 2026\nB2: '5%\nC1: 'real 2026\nC2: 0.1\nB4: 2026 | 2027 | 2028\nB5: 100 | 0 | 0\nB6: 0 | 66 | 72.6";
    let small = Small::default().sheet("Plan", cells).names(
        "hence_base B1, hence_basis B2, hence_price_basis C1, hence_prices C2, hence_years B4:D4, hence_cost_works B5:D5, \
         hence_benefit_floods B6:D6, hence_npv B9",
    );
    let found = bridge(&small, &request);
    close(found.declared.unwrap().npv, npv(0.05));
    close(found.now.npv, npv(0.05) * 1.1);
}

/// Two options that serve the same end: one dear now, one dear later.
fn ends(decide: &str) -> Small {
    let option = |now: u32, later: u32| format!("B4: 2026 | 2046\nB5: {now} | {later}\nB6: 0 | 0");
    let names = "hence_years B4:C4, hence_cost_works B5:C5, hence_benefit_use B6:C6, hence_npv B9";
    Small::default()
        .sheet("In", &format!("B1: 2026\nB2: '1%\nB3: '{decide}"))
        .names("hence_base B1, hence_basis B2, hence_decide B3")
        .sheet("Wall", &option(100, 0))
        .own_names(names)
        .sheet("Pumps", &option(20, 110))
        .own_names(names)
}

#[test]
fn options_are_ranked_by_the_declared_rule() {
    // Pumps at 1%: 20 + 110/1.01^20 = 110.1; at 6%: 20 + 110/1.06^20 = 54.3.
    let report = reported(&ends("least cost"), &on("6%"));
    assert!(report.options.iter().all(|option| option.decide == Rule::LeastCost));
    let ranks = |now: bool| -> Vec<Option<usize>> {
        let bridges = report.options.iter().map(|option| option.bridge);
        bridges.map(|b| if now { b.now.rank } else { b.declared.unwrap().rank }).collect()
    };
    assert_eq!((ranks(false), ranks(true)), (vec![Some(1), Some(2)], vec![Some(2), Some(1)]));
    let error = fill(&ends("the cheapest").open().0, &on("6%"), &Catalogue::builtin()).expect_err("refused");
    assert!(error.problems().iter().any(|p| p.code == "decide" && p.place.to_string().starts_with("In!B3")));
}

fn record(input: &str, report: Report) -> Record {
    Record {
        input: input.to_owned(),
        output: Some(format!("out/{}", input.replace(".xlsx", ".audited.xlsx"))),
        status: report.status(),
        report,
        ..Record::failed(String::new(), &[])
    }
}

/// Three workbooks: one that turns negative, one in which another option comes first, one that failed.
fn shelf() -> Vec<u8> {
    let problem =
        Problem::error("truncated", Place::default(), "the end of the file is missing").hint("get it again");
    let records = [
        record("east/dyke.xlsx", reported(&dyke("3.5%", "20"), &on("15%"))),
        record("mere.xlsx", reported(&ends("least cost"), &on("6%"))),
        Record { input: "torn.xlsx".to_owned(), ..Record::failed(String::new(), &[problem]) },
    ];
    assert_eq!(records[2].status, Status::Failed);
    summary::write(&records, Path::new("summary.xlsx")).expect("a workbook")
}

/// Wrong is what is off by more than a millionth.
#[test]
fn a_summary_says_which_held_numbers_were_wrong() {
    let right = npv(0.035);
    let wrong = |held: &str| bridge(&dyke("3.5%", held), &on("15%")).wrong;
    assert!(wrong("20") && wrong(&(right * 1.000_002).to_string()));
    assert!(!wrong("") && !wrong(&(right * 1.000_000_5).to_string()));
    let dust = (right * (1.0 + 1e-12)).to_string();
    let records = [
        record("wrong.xlsx", reported(&dyke("3.5%", "20"), &on("15%"))),
        record("right.xlsx", reported(&dyke("3.5%", &dust), &on("15%"))),
    ];
    let all = cells(&summary::write(&records, Path::new("summary.xlsx")).expect("a workbook"));
    let told = texts(&all, "Summary");
    let lines: Vec<&String> = told.iter().filter(|text| text.contains("held ")).collect();
    assert!(lines.contains(&&format!("Plan: held 20, right {right:.6}")), "{lines:?}");
    // The decision of both flips as well.
    let named = |name: &str| told.iter().filter(|text| *text == name).count();
    assert_eq!((named("wrong.xlsx"), named("right.xlsx")), (2, 1));
    let label = all.iter().find(|((sheet, cell), found)| {
        let text = Stored::Text("Held numbers that were wrong before".to_owned());
        sheet == "Summary" && cell.col == 0 && found.value == text
    });
    let at = Cell { col: 1, ..label.expect("a count").0.1 };
    assert_eq!(all[&("Summary".to_owned(), at)].value, Stored::Text("1".to_owned()));
    // What rounding alone moves is shown as nothing.
    assert_eq!(all[&("Bridge".to_owned(), "G6".parse().unwrap())].value, Stored::Number(0.0));
}

#[test]
fn the_largest_stands_on_top_and_labels_clear_of_the_bars() {
    let package = hence_workbook::package::Package::from_bytes("summary.xlsx", shelf()).expect("a package");
    for n in 1..=2 {
        let xml = package.part(&format!("xl/charts/chart{n}.xml")).expect("read").expect("a chart");
        let xml = String::from_utf8(xml.to_vec()).expect("text");
        for part in ["<c:orientation val=\"maxMin\"/>", "<c:tickLblPos val=\"low\"/>"] {
            assert!(xml.contains(part), "{part} in {xml}");
        }
    }
}

/// 100 now for 150 or for 103.51 in a year: at 3.5% worth 44.9 and 0.01.
#[test]
fn shares_of_next_to_nothing_are_left_out() {
    let option = |later: f64| format!("B4: 2026 | 2027\nB5: 100 | 0\nB6: 0 | {later}");
    let names = "hence_years B4:C4, hence_cost_works B5:C5, hence_benefit_use B6:C6, hence_npv B9";
    let small = Small::default()
        .sheet("In", "B1: 2026\nB2: '3.5%")
        .names("hence_base B1, hence_basis B2")
        .sheet("Wall", &option(150.0))
        .own_names(names)
        .sheet("Pumps", &option(103.51))
        .own_names(names);
    let records = [record("east/ends.xlsx", reported(&small, &on("5%")))];
    let all = cells(&summary::write(&records, Path::new("summary.xlsx")).expect("a workbook"));
    let told = texts(&all, "Largest movers");
    let named = |name: &str| told.iter().filter(|text| *text == name).count();
    // By share and by amount; by amount alone.
    assert_eq!((named("east/ends.xlsx: Wall"), named("east/ends.xlsx: Pumps")), (2, 1), "{told:?}");
}

fn texts(cells: &BTreeMap<(String, Cell), FileCell>, sheet: &str) -> Vec<String> {
    let own = cells.iter().filter(|((name, _), _)| name == sheet);
    own.filter_map(|(_, cell)| if let Stored::Text(text) = &cell.value { Some(text.clone()) } else { None })
        .collect()
}

#[test]
fn a_summary_says_what_moved_what_flipped_and_what_failed() {
    let bytes = shelf();
    let all = cells(&bytes);
    let flips = texts(&all, "Summary");
    assert!(
        flips.contains(&"net present value of Plan was positive, and is negative now".to_owned()),
        "{flips:?}"
    );
    assert!(flips.contains(&"first by least cost was Wall, and is Pumps now".to_owned()), "{flips:?}");
    assert!(flips.iter().any(|text| text.contains("set by the body")), "the caution: {flips:?}");
    assert!(texts(&all, "Failures").contains(&"the end of the file is missing".to_owned()));
    let at = |cell: &str| all[&("Bridge".to_owned(), cell.parse().unwrap())].value.clone();
    let number =
        |cell: &str| if let Stored::Number(x) = at(cell) { x } else { panic!("{cell}: {:?}", at(cell)) };
    assert_eq!(at("A5"), Stored::Text("east/dyke.xlsx".to_owned()));
    for (cell, expected) in [
        ("C5", 20.0),
        ("D5", npv(0.035)),
        ("F5", npv(0.15)),
        ("G5", npv(0.035) - 20.0),
        ("H5", 0.0),
        ("I5", npv(0.15) - npv(0.035)),
    ] {
        close(number(cell), expected);
    }
    assert_eq!((number("L6"), number("M6"), number("L7"), number("M7")), (1.0, 2.0, 2.0, 1.0));
    assert_eq!(bytes, shelf(), "the same bytes every time");
}

#[test]
fn a_spreadsheet_program_computes_the_steps_alike() {
    let Some(soffice) = soffice() else { return };
    let bytes = shelf();
    let books = [("summary.xlsx".to_owned(), bytes.clone())];
    let again = cells(&saved(&soffice, &books, Recalculate::All)["summary.xlsx"]);
    let mut steps = 0;
    for ((sheet, cell), found) in cells(&bytes).iter().filter(|(_, cell)| cell.formula) {
        let same = &again[&(sheet.clone(), *cell)].value;
        match (&found.value, same) {
            (Stored::Number(a), Stored::Number(b)) => {
                close(*b, *a);
                steps += 1;
            }
            (a, b) => assert_eq!(a, b, "{sheet}!{cell}"),
        }
    }
    assert!(steps > 5, "{steps} steps");
}
