//! Dependents of filled cells, on sheets whose dependents are plain from their formulas.
//!
//! Source: the sheets here are written by hand and their dependents listed by hand; the meaning of shared,
//! array and data-table formulas is that of ISO/IEC 29500-1, 18.3.1.40.

use std::time::Instant;

use hence_workbook::model::Workbook;
use hence_workbook::references::quote_sheet;
use hence_workbook::stale::dependents;

use crate::bare::Small;

/// The dependents as `Sheet!A1`, sheets in order.
fn stale(small: &Small, filled: &[&str]) -> Vec<String> {
    let package = small.package();
    let book = Workbook::read(&package).unwrap();
    let filled: Vec<_> = filled.iter().map(|text| text.parse().unwrap()).collect();
    let found = dependents(&package, &book, &filled).unwrap();
    let named = |sheet: usize| quote_sheet(&book.sheets[sheet].name);
    found
        .cells
        .iter()
        .flat_map(|(s, cells)| cells.iter().map(move |c| format!("{}!{c}", named(*s))))
        .collect()
}

#[test]
fn direct_and_indirect_dependents_and_nothing_else() {
    let small = Small::new()
        .cells(
            "In",
            &[
                ("A1", "1"),
                ("B1", "=A1*2"),
                ("C1", "=B1+1"),
                ("D1", "=E1"),
                ("E1", "5"),
                ("A2", "=SUM(C1:C9)"),
            ],
        )
        .cells("Q1", &[("A1", "=In!A2"), ("B1", "='Q1'!A1"), ("C1", "=In!E1"), ("D1", "=[1]In!A1")]);
    assert_eq!(stale(&small, &["In!A1"]), ["In!B1", "In!C1", "In!A2", "'Q1'!A1", "'Q1'!B1"]);
    assert_eq!(stale(&small, &["In!E1"]), ["In!D1", "'Q1'!C1"]);
    assert_eq!(stale(&small, &["In!F7"]), [""; 0]);
    assert_eq!(stale(&small, &[]), [""; 0]);
}

#[test]
fn filled_cells_are_no_dependents_of_their_own_but_pass_changes_on() {
    let small = Small::new().cells("S", &[("A1", "=B1"), ("B1", "=C1"), ("C1", "3"), ("D1", "=A1")]);
    assert_eq!(stale(&small, &["S!B1:C1"]), ["S!A1", "S!D1"]);
}

#[test]
fn circles_end() {
    let small = Small::new().cells("S", &[("A1", "=B1+C1"), ("B1", "=A1"), ("D1", "=D1")]);
    assert_eq!(stale(&small, &["S!C1"]), ["S!A1", "S!B1"]);
}

#[test]
fn whole_columns_rows_and_several_sheets() {
    let small = Small::new()
        .cells("First", &[("B5", "1"), ("A1", "=SUM(B:B)"), ("C1", "=SUM($5:$5)"), ("D1", "=SUM(6:7)")])
        .cells("Mid dle", &[("B5", "2")])
        .cells("Last", &[("B5", "3"), ("A1", "=SUM('First:Last'!B5)"), ("A2", "=SUM(First:First!B5)")])
        .cells("After", &[("B5", "3"), ("A1", "=SUM(First:Last!B6)")]);
    assert_eq!(stale(&small, &["First!B5"]), ["First!A1", "First!C1", "Last!A1", "Last!A2"]);
    assert_eq!(stale(&small, &["'Mid dle'!B5"]), ["Last!A1"]);
    assert_eq!(stale(&small, &["After!B5"]), [""; 0]);
}

#[test]
fn names_by_scope_names_of_names_and_relative_names() {
    let small = Small::new()
        .cells("A", &[("A1", "1"), ("B1", "=rate"), ("C1", "=B!rate"), ("D1", "=twice"), ("E4", "=above")])
        .cells("B", &[("A1", "2"), ("B1", "=RATE+1"), ("C1", "=A!A1"), ("D1", "=fixed"), ("F1", "=unknown")])
        .name("rate", None, "A!$A$1")
        .name("rate", Some(1), "B!$A$1")
        .name("twice", None, "2*rate")
        .name("above", None, "A!A1048576")
        .name("fixed", None, "3.5%");
    // `above` is the cell over the one that uses it: E4 uses E3.
    assert_eq!(stale(&small, &["A!A1"]), ["A!B1", "A!D1", "B!C1", "B!F1"]);
    assert_eq!(stale(&small, &["B!A1"]), ["A!C1", "B!B1", "B!F1"]);
    assert_eq!(stale(&small, &["A!E3"]), ["A!E4", "B!F1"]);
}

#[test]
fn names_that_turn_in_circles_or_multiply_count_as_dependents() {
    let mut small = Small::new()
        .cells("S", &[("A1", "=circle"), ("A2", "=many_9"), ("A3", "=many_0"), ("B1", "1")])
        .name("circle", None, "circle+circle")
        .name("many_0", None, &["S!$C$1"; 60].join("+"));
    for i in 1..10 {
        small = small.name(&format!("many_{i}"), None, &vec![format!("many_{}", i - 1); 60].join("+"));
    }
    assert_eq!(stale(&small, &["S!B1"]), ["S!A1", "S!A2"]);
}

#[test]
fn tables_by_column_and_by_row() {
    let small = Small::new()
        .cells(
            "T",
            &[
                ("A1", "Year"),
                ("B1", "Works"),
                ("C1", "PV"),
                ("A2", "2026"),
                ("B2", "10"),
                ("C2", "=Costs[[#This Row],[Works]]*2"),
                ("A3", "2027"),
                ("B3", "20"),
                ("C3", "=[@Works]*2"),
                ("C4", "=SUBTOTAL(109,Costs[PV])"),
                ("E1", "=SUM(Costs[Works])"),
                ("E2", "=SUM(Costs[Year])"),
                ("E3", "=SUM(Costs)"),
                ("E4", "=Costs[[#Totals],[PV]]"),
                ("E5", "=SUM(Other[Works])"),
            ],
        )
        .table(0, "Costs", "A1:C4", true, &["Year", "Works", "PV"]);
    assert_eq!(stale(&small, &["T!B2"]), ["T!E1", "T!C2", "T!E3", "T!C4", "T!E4", "T!E5"]);
    assert_eq!(stale(&small, &["T!A3"]), ["T!E2", "T!E3", "T!E5"]);
}

#[test]
fn what_cannot_be_known_counts() {
    let formulas = [
        "INDIRECT(\"A\"&1)",
        "OFFSET(Z1,1,1)",
        "NOW()",
        "1+rand()",
        "_xlfn.RANDARRAY(2)",
        "SUM(Z1:INDEX(Z:Z,3))",
        "SUM((Z1):(Z2))",
        "no_such_name",
        "NoTable[x]",
        "Missing!A1",
        "'open",
        "CELL(\"row\",Z1)",
    ];
    let settled =
        ["Z1", "SUM(Z1:Z3)", "INDEX(Z:Z,3)", "\"NOW()\"", "Z2&\"INDIRECT(A1)\"", "1+1", "#REF!+1", "UDF(Z1)"];
    let cells: Vec<(String, String)> = formulas
        .iter()
        .chain(&settled)
        .enumerate()
        .map(|(i, formula)| (format!("B{}", i + 1), format!("={formula}")))
        .collect();
    let cells: Vec<(&str, &str)> = cells.iter().map(|(at, f)| (at.as_str(), f.as_str())).collect();
    let expected: Vec<String> = (1..=formulas.len()).map(|row| format!("S!B{row}")).collect();
    assert_eq!(stale(&Small::new().cells("S", &cells), &["S!A1"]), expected);
}

#[test]
fn shared_formulas_move_with_their_cells_even_before_their_master() {
    let small = Small::new().data(
        "S",
        "<row r=\"4\"><c r=\"B4\"><f t=\"shared\" si=\"0\"/><v>1</v></c></row>\
         <row r=\"1\"><c r=\"A1\"><v>1</v></c>\
         <c r=\"B1\"><f t=\"shared\" ref=\"B1:B4\" si=\"0\">A1+'Q1'!$C$9+Q1!A1</f><v>1</v></c></row>\
         <row><c r=\"A2\"><v>1</v></c><c><f t=\"shared\" si=\"0\"/><v>1</v></c><c><f t=\"shared\" si=\"7\"/></c></row>\
         <row r=\"3\"><c r=\"B3\"><f t=\"shared\" si=\"0\"></f><v>1</v></c></row>",
        "",
    );
    let small = small.cells("Q1", &[("A1", "1")]);
    // C2 belongs to a group without a master, so it counts always.
    assert_eq!(stale(&small, &["S!A2"]), ["S!B2", "S!C2"]);
    assert_eq!(stale(&small, &["S!A4"]), ["S!C2", "S!B4"]);
    assert_eq!(stale(&small, &["'Q1'!C9"]), ["S!B1", "S!B2", "S!C2", "S!B3", "S!B4"]);
    assert_eq!(stale(&small, &["'Q1'!A3"]), ["S!C2", "S!B3"]);
}

#[test]
fn arrays_and_what_if_tables_count_with_all_their_cells() {
    let small = Small::new().data(
        "S",
        "<row r=\"1\"><c r=\"A1\"><v>1</v></c>\
         <c r=\"C1\"><f t=\"array\" ref=\"C1:C3\">A1:A3*2</f><v>2</v></c></row>\
         <row r=\"2\"><c r=\"C2\"><v>2</v></c><c r=\"D2\"><f>C2</f><v>2</v></c></row>\
         <row r=\"3\"><c r=\"C3\"><v>2</v></c><c r=\"D3\"><v>9</v></c></row>\
         <row r=\"5\"><c r=\"F5\"><f>H1</f><v>1</v></c></row>\
         <row r=\"6\"><c r=\"E6\"><v>1</v></c>\
         <c r=\"F6\"><f t=\"dataTable\" ref=\"F6:F7\" dt2D=\"0\" dtr=\"0\" r1=\"H2\"/><v>1</v></c></row>\
         <row r=\"7\"><c r=\"E7\"><v>1</v></c><c r=\"F7\"><v>1</v></c></row>",
        "",
    );
    assert_eq!(stale(&small, &["S!A3"]), ["S!C1", "S!C2", "S!D2", "S!C3"]);
    assert_eq!(stale(&small, &["S!H1"]), ["S!F5", "S!F6", "S!F7"]);
    assert_eq!(stale(&small, &["S!H2"]), ["S!F6", "S!F7"]);
    assert_eq!(stale(&small, &["S!E7"]), ["S!F6", "S!F7"]);
}

#[test]
fn odd_but_lawful_xml_is_read() {
    let small = Small::new().sheet(
        "S",
        "<x:worksheet xmlns:x=\"http://schemas.openxmlformats.org/spreadsheetml/2006/main\"><x:sheetData><x:row>\
         <x:c><x:v>1</x:v></x:c><x:c><x:f><![CDATA[A1&]]>&quot;x&#34;</x:f><x:v>1</x:v></x:c>\
         <x:c><x:f>B<!-- no -->1</x:f></x:c></x:row></x:sheetData></x:worksheet>",
    );
    assert_eq!(stale(&small, &["S!A1"]), ["S!B1", "S!C1"]);
}

#[test]
fn settings_that_spoil_a_fill_are_warned_of() {
    let small = Small::new()
        .cells("S", &[("A1", "1")])
        .settings("<workbookPr date1904=\"1\"/><workbookProtection lockStructure=\"1\"/>");
    let package = small.package();
    let mut book = Workbook::read(&package).unwrap();
    let codes = |book: &Workbook| -> Vec<&str> {
        dependents(&package, book, &[]).unwrap().warnings.iter().map(|problem| problem.code).collect()
    };
    assert_eq!(codes(&book), ["date-1904", "protected-workbook"]);
    (book.calc_mode_manual, book.full_precision, book.has_revisions) = (true, false, true);
    assert_eq!(codes(&book).len(), 5);
}

#[test]
fn an_unknown_sheet_is_refused() {
    let package = Small::new().cells("S", &[("A1", "1")]).package();
    let book = Workbook::read(&package).unwrap();
    let error = dependents(&package, &book, &["T!A1".parse().unwrap()]).unwrap_err();
    assert_eq!(error.problems()[0].code, "unknown-sheet");
}

#[test]
fn cells_outside_the_sheet_are_refused() {
    for data in [
        "<row r=\"1048577\"><c><f>1</f></c></row>",
        "<row r=\"0\"/>",
        "<row r=\"1\"><c r=\"XFE1\"><f>1</f></c></row>",
        "<row r=\"1\"><c r=\"XFD1\"/><c><f>1</f></c></row>",
        "<row r=\"1048576\"/><row/>",
        "<row r=\"1\"><c r=\"A1\"><f t=\"array\" ref=\"A1:A9999999\">1</f></c></row>",
    ] {
        let package = Small::new().data("S", data, "").package();
        let book = Workbook::read(&package).unwrap();
        let error = dependents(&package, &book, &["S!A1".parse().unwrap()]).unwrap_err();
        assert_eq!(error.problems()[0].code, "cell-address", "{data}");
    }
}

/// Running totals and chains are what makes a plain search quadratic; this one has 18,000 formulas.
#[test]
fn long_chains_and_running_totals_stay_fast() {
    use std::fmt::Write;
    let mut data = String::new();
    for row in 1..=6_000 {
        write!(
            data,
            "<row r=\"{row}\"><c r=\"A{row}\"><v>1</v></c><c r=\"B{row}\"><f>SUM($A$1:A{row})</f><v>1</v></c>\
             <c r=\"C{row}\"><f>C{}+B{row}</f><v>1</v></c><c r=\"D{row}\"><f>SUM(A:A)-E{row}</f><v>1</v></c></row>",
            if row == 1 { "Z1".to_owned() } else { (row - 1).to_string() }
        )
        .unwrap();
    }
    let small = Small::new().data("S", &data, "");
    let started = Instant::now();
    let found = stale(&small, &["S!A3000"]);
    let taken = started.elapsed();
    assert_eq!(found.len(), 3_001 + 3_001 + 6_000);
    // Generous for a build without optimisation on a busy machine; a quadratic search takes minutes there.
    assert!(taken.as_secs() < 10, "{taken:?}");
}
