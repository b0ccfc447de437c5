//! Outputs in which LibreOffice has computed every formula, so that nothing awaits recalculation.

use hence_core::Catalogue;
use hence_workbook::fill::{FillRequest, Filled, fill};
use hence_workbook::package::Package;
use hence_workbook::sheets::VERDICT_AGREES;

use crate::libreoffice::cells::{Stored, cells};
use crate::libreoffice::office::{Recalculate, saved, soffice};
use crate::small::Small;

/// Cost 100 in 2026, benefits of 60 in 2027 and 2028 at 5%. Formulas rest on the NPV: its double, a text, a truth value, an
/// error. The ratio is the analyst's own formula over cells that are filled.
fn plan() -> Small {
    let cells = "B1: 2026\nB2: '5%\nB4: 2026 | 2027 | 2028\nB5: 100 | 0 | 0\nB6: 0 | 60 | 60\n\
                 B9: | \nD9: =2*B9>0 | =IF(B9>0,\"worth it\",\"not\")>0 | =B9>0>0 | =1/(B9-B9)>0 | =B11/B10>0\n";
    Small::default().sheet("Plan", cells).names(
        "hence_base B1, hence_basis B2, hence_years B4:D4, hence_cost_works B5:D5, hence_benefit_floods B6:D6, hence_npv B9, \
         hence_pv_costs B10, hence_pv_benefits B11, hence_ratio H9",
    )
}

fn filled(small: &Small, settle: bool) -> Filled {
    let request = FillRequest { settle, ..FillRequest::default() };
    fill(&small.open().0, &request, &Catalogue::builtin()).unwrap_or_else(|error| panic!("{error}"))
}

fn npv() -> f64 {
    -100.0 + 60.0 / 1.05 + 60.0 / (1.05 * 1.05)
}

#[test]
fn without_it_the_report_says_which_cells_await_recalculation() {
    let found = filled(&plan(), false);
    assert_eq!(found.report.awaiting, ["5 cells in Plan!D9:H9"]);
    let all = cells(&found.bytes);
    for cell in ["D9", "E9", "F9", "G9", "H9"] {
        let cell = &all[&("Plan".to_owned(), cell.parse().unwrap())];
        assert!(cell.formula && cell.value == Stored::Nothing, "{cell:?}");
    }
}

#[test]
fn with_it_every_formula_has_its_result() {
    let Some(soffice) = soffice() else { return };
    let found = filled(&plan(), true);
    assert!(found.report.awaiting.is_empty());
    assert_eq!(found.report.verdict, VERDICT_AGREES);
    let all = cells(&found.bytes);
    let without: Vec<_> = all
        .iter()
        .filter(|(_, cell)| cell.formula && cell.value == Stored::Nothing)
        .map(|(at, _)| at)
        .collect();
    assert!(without.is_empty(), "{without:?}");
    let at = |cell: &str| all[&("Plan".to_owned(), cell.parse().unwrap())].value.clone();
    let Stored::Number(double) = at("D9") else { panic!("{:?}", at("D9")) };
    assert!((double - 2.0 * npv()).abs() < 1e-9, "{double}");
    assert_eq!(at("E9"), Stored::Text("worth it".into()));
    assert_eq!(at("G9"), Stored::Error("#DIV/0!".into()));
    let Stored::Number(ratio) = at("H9") else { panic!("{:?}", at("H9")) };
    assert!((ratio - (npv() + 100.0) / 100.0).abs() < 1e-12, "{ratio}");
    // A spreadsheet program that computes everything anew finds the same.
    let books = [("plan.xlsx".to_owned(), found.bytes.clone())];
    let again = cells(&saved(&soffice, &books, Recalculate::All)["plan.xlsx"]);
    let mut compared = 0;
    for (place, cell) in all.iter().filter(|(_, cell)| cell.formula) {
        match (&cell.value, &again[place].value) {
            (Stored::Number(a), Stored::Number(b)) => {
                assert!((a - b).abs() <= 1e-9 * a.abs().max(1.0), "{place:?}: {a}, {b}");
                compared += 1;
            }
            (a, b) => assert_eq!(a, b, "{place:?}"),
        }
    }
    assert!(compared > 20, "{compared}");
}

/// The net present value is the analyst's own formula over factors that the fill writes: it waits, unless it is settled.
#[test]
fn what_was_settled_awaits_nothing_any_more() {
    let cells = "B1: 2026\nB2: '5%\nB4: 2026 | 2027 | 2028\nB5: 100 | 0 | 0\nB6: 0 | 60 | 60\n\
                 B9: =SUMPRODUCT(B6:D6-B5:D5,B7:D7)>0";
    let small = Small::default().sheet("Plan", cells).names(
        "hence_base B1, hence_basis B2, hence_years B4:D4, hence_cost_works B5:D5, hence_benefit_floods B6:D6, \
         hence_factor B7:D7, hence_npv B9",
    );
    let waits = |found: &Filled| found.report.problems.iter().any(|p| p.code == "awaits-recalculation");
    let told = |found: &Filled| {
        let audit = cells_of(found);
        audit.iter().any(|text| text.contains("so nothing was compared"))
    };
    let open = filled(&small, false);
    assert!(waits(&open) && told(&open));
    if soffice().is_none() {
        return;
    }
    let found = filled(&small, true);
    assert_eq!(found.report.verdict, VERDICT_AGREES);
    assert!(!waits(&found) && !told(&found), "{:?}", found.report.problems);
}

fn cells_of(found: &Filled) -> Vec<String> {
    let text = |stored: Stored| if let Stored::Text(text) = stored { Some(text) } else { None };
    cells(&found.bytes).into_values().filter_map(|cell| text(cell.value)).collect()
}

#[test]
fn a_settled_output_is_made_alike_and_is_filled_again() {
    if soffice().is_none() {
        return;
    }
    let found = filled(&plan(), true);
    assert_eq!(found.bytes, filled(&plan(), true).bytes);
    let again = Package::from_bytes("plan.xlsx", found.bytes).expect("a package");
    let request = FillRequest { settle: true, ..FillRequest::default() };
    let again = fill(&again, &request, &Catalogue::builtin()).expect("filled");
    assert_eq!(again.report.verdict, VERDICT_AGREES);
}
