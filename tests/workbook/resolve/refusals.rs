//! What is refused by name, and what is warned of, with the cell.

use hence_workbook::problem::Severity;
use hence_workbook::resolve::Options;

use super::{named, plan};
use crate::small::Small;

#[test]
fn targets_that_names_do_not_pin_down() {
    for (text, code) in [
        ("Plan!$B$7:$C$7,Plan!$E$8", "name-union"),
        ("OFFSET(Plan!$B$7,0,0,1,3)", "name-dynamic"),
        ("INDIRECT(\"Plan!B7:D7\")", "name-dynamic"),
        ("Plan!B7:D7", "name-relative"),
        ("#REF!", "name-lost"),
        ("Plan!#REF!", "name-lost"),
        ("[1]Plan!$B$7:$D$7", "name-external"),
        ("Gone!$B$7:$D$7", "name-missing-sheet"),
        ("0.035", "name-constant"),
        ("\"3.5%\"", "name-constant"),
        ("Costs[Works]", "name-table"),
        ("Plan:Plan!$B$7:$D$7", "name-sheets"),
    ] {
        let problems = plan("").raw_name("hence_annual", text).problems();
        let expected = format!("{code} [hence_annual]");
        assert!(problems.contains(&expected), "{text}: {problems:?}");
    }
}

#[test]
fn every_refusal_says_what_to_do() {
    let small = plan("").raw_name("hence_annual", "OFFSET(Plan!$B$7,0,0,1,3)");
    let Err(problems) = small.resolve_with(&Options::default()) else { panic!("refused") };
    assert!(problems.iter().all(|problem| problem.hint.is_some() || problem.severity < Severity::Error));
}

#[test]
fn whole_rows_and_columns() {
    let small = plan("").raw_name("hence_pv", "Plan!$8:$8");
    assert_eq!(small.problems(), ["whole-range Plan!A8:XFD8 [hence_pv]"]);
    let small = plan("").raw_name("hence_pv", "Plan!$H:$H");
    assert_eq!(small.problems(), ["whole-range Plan!H1:H1048576 [hence_pv]"]);
    let small = plan("").raw_name("hence_pv", "Plan!$A$2:$XFC$1048576");
    assert_eq!(small.problems(), ["range-too-large Plan!A2:XFC1048576 [hence_pv]"]);
}

#[test]
fn a_target_may_not_overwrite_what_is_read_or_another_target() {
    assert_eq!(named("", "hence_pv_works B6:D6").problems(), ["target-overlap Plan!B6:D6 [hence_pv_works]"]);
    assert_eq!(named("", "hence_npv B1").problems(), ["target-overlap Plan!B1 [hence_npv]"]);
    assert_eq!(named("", "hence_ratio B9").problems(), ["target-overlap Plan!B9 [hence_ratio]"]);
}

#[test]
fn present_values_of_streams_that_are_not_there_or_twice() {
    assert_eq!(named("", "hence_pv_roads F9").problems(), ["unknown-stream Plan!F9 [hence_pv_roads]"]);
    let both = named("A8: 'Works | 1 | 2 | 3", "hence_benefit_works B8:D8, hence_pv_works F9").problems();
    assert_eq!(both, ["ambiguous-stream Plan!F9 [hence_pv_works]"]);
    let twice = named("A8: 'Works | 1 | 2 | 3", "hence_costs A8:D8").problems();
    assert_eq!(twice, ["duplicate-stream Plan!B8 [hence_costs, row B8:D8]"]);
}

#[test]
fn cells_that_cannot_be_written_one_by_one() {
    let merged = "<mergeCells count=\"1\"><mergeCell ref=\"B7:D7\"/></mergeCells>";
    assert_eq!(
        plan("").after_cells(merged).problems(),
        ["shape Plan!B7 [hence_factor]"],
        "a name on one merged area means its first cell"
    );
    let part = "<mergeCells count=\"1\"><mergeCell ref=\"C7:C8\"/><mergeCell ref=\"A9:B9\"/></mergeCells>";
    assert_eq!(plan("").after_cells(part).problems(), ["target-merged Plan!B9 [hence_npv]"]);
    let flows = "<mergeCells count=\"1\"><mergeCell ref=\"B5:C5\"/></mergeCells>";
    assert_eq!(plan("").after_cells(flows).problems(), ["merged Plan!B5 [hence_cost_works]"]);
}

#[test]
fn formulas_that_fill_many_cells_are_not_overwritten() {
    let array = plan("A9: 'NPV | =[t=\"array\" ref=\"B9:B10\"]B5:B6*1>1");
    assert_eq!(array.problems(), ["target-array Plan!B9 [hence_npv]"]);
    let table = plan("A9: 'NPV | =[t=\"dataTable\" ref=\"B9:B10\" dt2D=\"0\" dtr=\"0\" r1=\"B1\"]>1");
    assert_eq!(table.problems(), ["target-data-table Plan!B9 [hence_npv]"]);
}

#[test]
fn headers_and_totals_of_tables_are_not_overwritten() {
    let table = "<table xmlns=\"http://schemas.openxmlformats.org/spreadsheetml/2006/main\" id=\"1\" name=\"Sums\" \
                 displayName=\"Sums\" ref=\"A9:B12\" totalsRowCount=\"1\"><tableColumns count=\"2\">\
                 <tableColumn id=\"1\" name=\"NPV\"/><tableColumn id=\"2\" name=\"x\"/></tableColumns></table>";
    let small = |npv: &str| {
        named("A9: 'NPV | 'x", &format!("hence_npv {npv}"))
            .after_cells("<tableParts count=\"1\"><tablePart r:id=\"rId1\"/></tableParts>")
            .related("table", "tables/table1.xml", table)
    };
    assert_eq!(small("B9").problems(), ["target-table Plan!B9 [hence_npv]"]);
    assert_eq!(small("B12").problems(), ["target-table Plan!B12 [hence_npv]"]);
    assert_eq!(small("B10").problems(), [""; 0]);
}

#[test]
fn cells_that_a_pivot_table_fills_are_not_overwritten() {
    let pivot = "<pivotTableDefinition xmlns=\"http://schemas.openxmlformats.org/spreadsheetml/2006/main\" \
                 name=\"p\" cacheId=\"1\"><location ref=\"A9:C12\"/></pivotTableDefinition>";
    let small = plan("").related("pivotTable", "pivotTables/pivotTable1.xml", pivot);
    assert_eq!(small.problems(), ["target-refreshed Plan!B9 [hence_npv]"]);
}

#[test]
fn what_is_warned_of_and_filled_all_the_same() {
    let protected = plan("").after_cells("<sheetProtection sheet=\"1\"/>");
    assert_eq!(
        protected.problems(),
        ["protected Plan!B7:D7 [hence_factor]", "protected Plan!B9 [hence_npv]"]
    );
    let rule = "<dataValidations count=\"1\"><dataValidation type=\"whole\" sqref=\"B9\"><formula1>1</formula1>\
                <formula2>9</formula2></dataValidation></dataValidations>";
    assert_eq!(plan("").after_cells(rule).problems(), ["validation Plan!B9 [hence_npv]"]);
    assert_eq!(plan("A9: 'NPV | {2}").problems(), ["text-format Plan!B9 [hence_npv]"]);
    let hidden = plan("").before_cells("<cols><col min=\"3\" max=\"3\" hidden=\"1\"/></cols>");
    assert_eq!(hidden.problems(), ["hidden Plan!B7:D7 [hence_factor]"]);
    assert_eq!(Small::resolved(&protected).choices.len(), 1);
}

#[test]
fn problems_come_in_sheet_order_and_neighbours_as_one() {
    let problems =
        plan("A1: 'Base | 'soon\nA5: 'Works | 'a | 'a | 'a\nA6: 'Access | #N/A | 80 | 90").problems();
    assert_eq!(
        problems,
        [
            "base-value Plan!B1 [hence_base]",
            "text-value Plan!B5:D5 [hence_cost_works]",
            "error-value Plan!B6 [hence_benefit_access]"
        ]
    );
}
