//! What names and `--role` may refer to besides one range: parts of tables, and formulas, which are refused with their cells.

use hence_workbook::resolve::Options;

use super::{CELLS, named, plan};
use crate::small::{Small, lines};

/// A table A1:C5 of the sheet Flows, with a row of totals.
const TABLE: &str = r#"<table xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main" id="1" name="Flows" displayName="Flows" ref="A1:C5" totalsRowCount="1"><tableColumns count="3"><tableColumn id="1" name="Year"/><tableColumn id="2" name="Works [k]"/><tableColumn id="3" name="PV"/></tableColumns></table>"#;

fn in_table() -> Small {
    Small::default()
        .sheet("Inputs", "A1: 'Base | 2025\nA2: 'Basis | '3.5%\nA3: 'NPV")
        .names("hence_base B1, hence_basis B2, hence_npv B3")
        .sheet(
            "Flows",
            "A1: 'Year | 'Works [k] | 'PV\nA2: 2025 | 100\nA3: 2026 | 50\nA4: 2027 | 25\nA5: 'Total | 175",
        )
        .related("table", "tables/table1.xml", TABLE)
}

#[test]
fn columns_of_tables_are_years_flows_and_targets() {
    let read = in_table()
        .raw_name("hence_years", "Flows[Year]")
        .raw_name("hence_cost_works", "Flows[[#Data],[Works '[k']]]")
        .raw_name("hence_pv_works", "flows[pv]")
        .resolved();
    assert_eq!(read.axes[0].at.to_string(), "Flows!A2:A4");
    assert_eq!(read.choices[0].streams[0].raw, [100.0, 50.0, 25.0]);
    let targets: Vec<String> = read.choices[0].targets.iter().map(|t| t.at.to_string()).collect();
    assert_eq!(targets, ["Inputs!B3", "Flows!C2:C4"]);
}

#[test]
fn roles_on_the_command_line_take_columns_of_tables() {
    let roles =
        [("years", "Flows[Year]"), ("cost_works", "Flows[Works '[k']]"), ("pv_works", "Flows[[#Data],[PV]]")];
    let roles = roles.map(|(role, range)| (role.to_owned(), range.to_owned()));
    let read = in_table().resolve_with(&Options { roles: &roles, ..Options::default() });
    let read = read.unwrap_or_else(|problems| panic!("{}", lines(&problems).join("\n")));
    assert_eq!(read.choices[0].streams[0].at.to_string(), "Flows!B2:B4");
    assert_eq!(read.choices[0].streams[0].from, "--role cost_works");
}

#[test]
fn a_block_is_a_table_with_its_headings() {
    let read = in_table()
        .raw_name("hence_years", "Flows[Year]")
        .raw_name("hence_costs", "Flows[[#Headers],[#Data],[Year]:[Works '[k']]]");
    let read = read.resolved();
    let streams: Vec<&str> = read.choices[0].streams.iter().map(|stream| stream.name.as_str()).collect();
    assert_eq!(streams, ["Works [k]"]);
}

#[test]
fn parts_of_tables_that_cannot_be_read_are_refused_with_what_can() {
    let refused = |text: &str| {
        let small = in_table().raw_name("hence_cost_works", "Flows!$B$2:$B$4").raw_name("hence_years", text);
        let problems = small.resolve_with(&Options::default()).expect_err("refused");
        let found = problems.iter().find(|problem| problem.code == "name-table").expect(text);
        (found.message.clone(), found.hint.clone().expect("a hint"))
    };
    let (message, hint) = refused("Flows[@Year]");
    assert!(message.contains("another row"), "{message}");
    assert!(hint.contains("Flows[Year]"), "{hint}");
    assert!(refused("Flows[[#This Row],[Year]]").0.contains("another row"));
    let (message, hint) = refused("Flows[Jahr]");
    assert!(message.contains("Flows[Jahr]") && hint.contains("Year, Works [k], PV"), "{message} {hint}");
    let (message, hint) = refused("Costs[Year]");
    assert!(message.contains("`Costs`") && hint.contains("Flows"), "{message} {hint}");
}

#[test]
fn a_formula_is_refused_with_the_cells_that_it_gives_now() {
    for (text, cells) in [
        ("OFFSET(Plan!$A$5,0,1,1,3)", "Plan!$B$5:$D$5"),
        ("OFFSET(Plan!$B$4:$D$4,1,0)", "Plan!$B$5:$D$5"),
        ("OFFSET(Plan!$A$5,0,1,1,COUNT(Plan!$4:$4))", "Plan!$B$5:$D$5"),
        ("OFFSET(Plan!$A$5,,1,,COUNTA(Plan!$A$4:$Z$4)-1)", "Plan!$B$5:$D$5"),
        ("OFFSET(Plan!$D$5,0,0,1,-3)", "Plan!$B$5:$D$5"),
        ("Plan!$B$5:INDEX(Plan!$5:$5,4)", "Plan!$B$5:$D$5"),
        ("INDEX(Plan!$A$5:$Z$5,2):INDEX(Plan!$A$5:$Z$5,1+COUNT(Plan!$4:$4))", "Plan!$B$5:$D$5"),
        ("INDEX(Plan!$B$4:$D$6,2,0)", "Plan!$B$5:$D$5"),
        (
            "INDEX(Plan!$A$5:$Z$5,MATCH(2025,Plan!$A$4:$Z$4,0)):INDEX(Plan!$A$5:$Z$5,MATCH(9E+99,Plan!$A$4:$Z$4))",
            "Plan!$B$5:$D$5",
        ),
        ("INDEX(Plan!$A$4:$D$6,MATCH(\"works\",Plan!$A$4:$A$6,0),2):Plan!$D$5", "Plan!$B$5:$D$5"),
        ("CHOOSE(2,Plan!$B$4:$D$4,Plan!$B$5:$D$5)", "Plan!$B$5:$D$5"),
        ("INDIRECT(\"Plan!B5:D5\")", "Plan!$B$5:$D$5"),
        ("OFFSET(hence_years,1,0)", "Plan!$B$5:$D$5"),
    ] {
        let small = Small::default().sheet("Plan", CELLS);
        let names = "hence_base B1, hence_basis B2, hence_years B4:D4, hence_npv B9";
        let small = small.names(names).raw_name("hence_cost_works", text);
        let problems = small.resolve_with(&Options::default()).expect_err("refused");
        let found = problems.iter().find(|problem| problem.code == "name-dynamic").expect(text);
        let hint = found.hint.as_deref().unwrap_or_default();
        assert!(hint.starts_with(&format!("let hence_cost_works refer to {cells},")), "{text}: {hint}");
    }
}

#[test]
fn no_cells_are_printed_that_are_not_certain() {
    for text in [
        "OFFSET(Plan!A5,0,1,1,3)",
        "OFFSET(Plan!$A$5,-9,1,1,3)",
        "OFFSET(Plan!$A$5,0,1,1,0)",
        "OFFSET(Plan!$A$5,0,1,1,RANDBETWEEN(1,3))",
        "INDEX(Plan!$B$4:$D$6,2)",
        "INDEX(Plan!$B$5:$D$5,4)",
        "INDIRECT(Plan!$A$1)",
        "OFFSET(Plan!$A$5,0,MATCH(\"no such\",Plan!$A$4:$A$6,0))",
        "CHOOSE(3,Plan!$B$4:$D$4,Plan!$B$5:$D$5)",
        &format!("{}Plan!$B$5{}", "(".repeat(3000), ")".repeat(3000)),
        &format!("OFFSET(Plan!$B$5,0,0,{}1)", "-".repeat(3000)),
        "OFFSET(hence_annual,0,0)",
    ] {
        let problems = plan("").raw_name("hence_annual", text).resolve_with(&Options::default());
        let problems = problems.expect_err("refused");
        let found = problems.iter().find(|problem| problem.place.name.as_deref() == Some("hence_annual"));
        let hint = found.expect(text).hint.as_deref().unwrap_or_default();
        assert!(!hint.contains("gives now"), "{text}: {hint}");
    }
}

#[test]
fn a_formula_as_a_role_is_refused_with_the_address_to_give() {
    let roles = [("npv".to_owned(), "OFFSET(Plan!$A$9,0,1)".to_owned())];
    let problems = named("", "hence_npv").resolve_with(&Options { roles: &roles, ..Options::default() });
    let problems = problems.expect_err("refused");
    assert!(
        lines(&problems).iter().any(|line| line.contains("try: --role npv=Plan!B9,")),
        "{:?}",
        lines(&problems)
    );
}

#[test]
fn years_in_the_headings_of_a_table_are_told_from_mistyped_ones() {
    let table = r#"<table xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main" id="1" name="T" displayName="T" ref="A4:D6"><tableColumns count="4"><tableColumn id="1" name="Year"/><tableColumn id="2" name="2025"/><tableColumn id="3" name="2026"/><tableColumn id="4" name="2027"/></tableColumns></table>"#;
    let small = plan("A4: 'Year | '2025 | '2026 | '2027").related("table", "tables/table1.xml", table);
    let problems = small.resolve_with(&Options::default()).expect_err("refused");
    let found = problems.iter().find(|problem| problem.code == "text-number").expect("texts");
    assert_eq!(found.place.to_string(), "Plan!B4 [hence_years]");
    assert!(found.hint.as_deref().unwrap_or_default().contains("outside the table"), "{found:?}");
}

/// The plain appraisal with a subtotal between its years.
fn in_pieces() -> Small {
    let cells = "A1: 'Base | 2025\nA2: 'Basis | '3.5%\nA4: 'Year | 2025 | 2026 | 'Sum | 2027\n\
        A5: 'Works | 100 | 50 | 150 | 25\nA9: 'NPV";
    Small::default().sheet("Plan", cells).names("hence_base B1, hence_basis B2, hence_npv B9")
}

#[test]
fn pieces_of_one_row_are_one_stream() {
    let read = in_pieces()
        .raw_name("hence_years", "Plan!$B$4:$C$4,Plan!$E$4")
        .raw_name("hence_cost_works", "Plan!$E$5,Plan!$B$5:$C$5")
        .resolved();
    assert_eq!(read.axes[0].at.to_string(), "Plan!B4:C4,E4");
    assert_eq!(read.choices[0].streams[0].raw, [100.0, 50.0, 25.0], "in the order of the sheet");
    // The subtotal is no part of the row.
    let works = read.coverage.iter().find(|row| row.heading == "Works").expect("covered");
    assert_eq!((works.at.to_string(), works.total), ("Plan!B5:C5,E5".to_owned(), 175.0));
}

#[test]
fn roles_on_the_command_line_come_in_pieces_too() {
    for years in ["Plan!B4:C4,Plan!E4", "Plan!$B$4:$C$4,E4", "'Plan'!B4,C4,E4"] {
        let roles = [("years", years), ("cost_works", "Plan!B5:C5,E5")];
        let roles = roles.map(|(role, range)| (role.to_owned(), range.to_owned()));
        let read = in_pieces().resolve_with(&Options { roles: &roles, ..Options::default() });
        let read = read.unwrap_or_else(|problems| panic!("{}", lines(&problems).join("\n")));
        assert_eq!(read.axes[0].at.to_string(), "Plan!B4:C4,E4");
        assert_eq!(read.choices[0].streams[0].at.to_string(), "Plan!B5:C5,E5");
    }
}

#[test]
fn pieces_that_are_no_row_or_column_are_refused() {
    let refused = |name: &str, text: &str| {
        let small = in_pieces()
            .raw_name("hence_years", "Plan!$B$4:$C$4,Plan!$E$4")
            .raw_name("hence_cost_works", "Plan!$B$5:$C$5,Plan!$E$5");
        let problems = small.raw_name(name, text).resolve_with(&Options::default()).expect_err(text);
        let found = problems.iter().find(|problem| problem.place.name.as_deref() == Some(name)).expect(text);
        assert!(found.hint.is_some(), "{text}");
        format!("{}: {}", found.code, found.message)
    };
    for (text, why) in [
        ("Plan!$B$6:$C$6,Plan!$E$7", "neither in one row nor in one column"),
        ("Plan!$B$6:$C$7,Plan!$E$6:$E$7", "neither in one row nor in one column"),
        ("Plan!$B$6:$C$6,Plan!$C$6", "that share cells"),
        ("Plan!$B$6,Plan!$D$6", "has 2 cells across, allowed are 3 across"),
    ] {
        let found = refused("hence_benefit_gain", text);
        assert!(found.contains(why), "{text}: {found}");
    }
    // One cell is needed, or labels beside the numbers.
    assert!(refused("hence_ratio", "Plan!$B$10,Plan!$D$10").starts_with("name-union"));
    assert!(refused("hence_shared", "Plan!$B$10,Plan!$D$10").starts_with("name-union"));
    let many: Vec<String> = (0..101).map(|i| format!("Plan!$A${}", 2 * i + 20)).collect();
    assert!(refused("hence_benefit_gain", &many.join(",")).contains("101 ranges, allowed 100"));
}

#[test]
fn a_stream_in_other_cells_than_the_years_is_told_where_it_should_be() {
    let small = in_pieces()
        .raw_name("hence_years", "Plan!$B$4:$C$4,Plan!$E$4")
        .raw_name("hence_cost_works", "Plan!$B$5:$D$5");
    let read = small.resolved();
    assert_eq!(crate::small::codes(&read.problems), ["misaligned Plan!B5:D5 [hence_cost_works]"]);
    let whole = in_pieces()
        .raw_name("hence_years", "Plan!$B$4:$C$4,Plan!$E$4")
        .raw_name("hence_cost_works", "Plan!$B$5:$E$5");
    let problems = whole.resolve_with(&Options::default()).expect_err("four cells for three years");
    assert!(
        lines(&problems).iter().any(|line| line.contains("refer to Plan!B5:C5,E5")),
        "{:?}",
        lines(&problems)
    );
}
