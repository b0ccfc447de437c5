//! Options: by suffix, by the scope of a sheet; what they share; the baseline.

use hence_workbook::appraisal::{Appraisal, StreamKind, TargetRole};

use crate::small::Small;

const OPTION: &str = "A4: 'Year | 2025 | 2026 | 2027\nA5: 'Works | 100 | 50 | 25\nA9: 'NPV | ";

fn inputs() -> Small {
    Small::default()
        .sheet("Inputs", "A1: 'Base | 2025\nA2: 'Basis | '3.5%\nA3: 'Baseline | 'Do nothing\nA4: 'Year | 2025 | 2026 | 2027\nA5: 'Carbon | 1 | 2 | 3\nA6: 'Shared | 'carbon")
        .names("hence_base B1, hence_basis B2, hence_years B4:D4")
}

fn names(read: &Appraisal) -> Vec<&str> {
    read.choices.iter().map(|choice| choice.name.as_str()).collect()
}

#[test]
fn a_sheet_with_its_own_stream_and_output_is_an_option() {
    let own = "hence_cost_works B5:D5, hence_npv B9";
    let read =
        inputs().sheet("Pumps", OPTION).own_names(own).sheet("Do nothing", OPTION).own_names(own).resolved();
    // In the order of the sheets.
    assert_eq!(names(&read), ["Pumps", "Do nothing"]);
    assert_eq!(read.axes.len(), 1);
    assert_eq!(read.baseline, None);
    assert_eq!(read.choices[1].streams[0].at.to_string(), "'Do nothing'!B5:D5");
    assert_eq!(read.choices[0].basis.from, "hence_basis");
}

#[test]
fn own_years_and_basis_of_a_sheet_win_over_shared_ones() {
    let read = inputs()
        .sheet("Pumps", &format!("{OPTION}\nF1: '5%"))
        .own_names("hence_cost_works B5:D5, hence_npv B9, hence_years B4:D4, hence_basis F1")
        .sheet("Wells", OPTION)
        .own_names("hence_cost_works B5:D5, hence_npv B9")
        .resolved();
    assert_eq!(read.axes.len(), 2);
    assert_eq!((read.choices[0].basis.value.as_str(), read.choices[1].basis.value.as_str()), ("5%", "3.5%"));
}

#[test]
fn scoped_names_of_a_sheet_without_an_output_are_shared() {
    let read = Small::default()
        .sheet("Inputs", "A1: 2025 | 0.035\nA4: 'Year | 2025 | 2026 | 2027\nA5: 'Works | 1 | 2 | 3")
        .own_names("hence_base A1, hence_basis B1, hence_years B4:D4, hence_cost_works B5:D5")
        .sheet("Results", "A1: 'NPV")
        .own_names("hence_npv B1")
        .resolved();
    assert_eq!(names(&read), ["Inputs"]);
    assert_eq!(read.choices[0].targets[0].at.to_string(), "Results!B1");
}

#[test]
fn options_by_suffix_in_the_order_of_their_cells() {
    let read = inputs()
        .sheet("Flows", "A5: 'b | 1 | 2 | 3\nA6: 'a | 4 | 5 | 6\nA7: 'c | 7 | 8 | 9")
        .names(
            "hence_cost_works__zeta B5:D5, hence_cost_works__Alpha B6:D6, hence_benefit_x.zeta B7:D7, \
             hence_npv__zeta F5, hence_npv__ALPHA F6",
        )
        .resolved();
    assert_eq!(names(&read), ["zeta", "Alpha"]);
    assert_eq!(read.choices[0].streams.len(), 2);
    assert_eq!(read.choices[0].targets[0].role, TargetRole::Npv);
}

#[test]
fn a_stream_without_an_option_is_a_question_unless_listed_as_shared() {
    let own = "hence_cost_works B5:D5, hence_npv B9";
    let loose =
        |small: Small| small.sheet("Pumps", OPTION).own_names(own).sheet("Wells", OPTION).own_names(own);
    let small = loose(inputs().names("hence_cost_carbon B5:D5"));
    assert_eq!(small.problems(), ["loose-stream Inputs!B5:D5 [hence_cost_carbon]"]);
    let read = loose(inputs().names("hence_cost_carbon B5:D5, hence_shared B6")).resolved();
    for choice in &read.choices {
        let streams: Vec<_> = choice.streams.iter().map(|s| s.name.as_str()).collect();
        assert_eq!(streams, ["works", "carbon"]);
    }
    let unknown = loose(inputs().names("hence_shared B6")).problems();
    assert_eq!(unknown, ["unknown-stream Inputs!B6 [hence_shared]"]);
}

#[test]
fn a_result_without_an_option_is_refused_beside_options() {
    let own = "hence_cost_works B5:D5, hence_npv B9";
    let two =
        |small: Small| small.sheet("Pumps", OPTION).own_names(own).sheet("Wells", OPTION).own_names(own);
    let small = two(inputs().names("hence_ratio F1"));
    assert_eq!(small.problems(), ["loose-target Inputs!F1 [hence_ratio]"]);
    // Factors are the same for options of one basis, so that one range serves all.
    let read = two(inputs().names("hence_factor B8:D8")).resolved();
    let factors: Vec<usize> = read
        .choices
        .iter()
        .map(|choice| choice.targets.iter().filter(|t| t.role == TargetRole::Factor).count())
        .collect();
    assert_eq!(factors, [1, 0]);
}

#[test]
fn the_order_of_names_in_the_file_does_not_matter() {
    let list = ["hence_cost_works B5:D5", "hence_benefit_year B4:D4", "hence_npv B9", "hence_factor B7:D7"];
    let read = |list: &[&str]| inputs().sheet("Pumps", OPTION).names(&list.join(",")).resolved();
    let reversed: Vec<&str> = list.iter().rev().copied().collect();
    assert_eq!(read(&list), read(&reversed));
}

#[test]
fn the_baseline_is_named_by_its_option() {
    let own = "hence_damage_floods B5:D5, hence_npv B9";
    let two =
        |small: Small| small.sheet("Pumps", OPTION).own_names(own).sheet("Do nothing", OPTION).own_names(own);
    let read = two(inputs().names("hence_baseline B3")).resolved();
    assert_eq!(read.baseline, Some(1));
    assert_eq!(read.choices[0].streams[0].kind, StreamKind::Damage);
    let wrong = two(inputs().names("hence_baseline B6")).problems();
    assert_eq!(wrong, ["unknown-option Inputs!B6 [hence_baseline]"]);
}

#[test]
fn two_ranges_for_one_role_are_a_question() {
    let small = inputs()
        .sheet("Flows", OPTION)
        .own_names("hence_cost_works B5:D5")
        .names("hence_cost_Works B4:D4, hence_npv B9");
    assert_eq!(small.problems(), ["duplicate-role Flows!B5:D5 [hence_cost_works]"]);
}

#[test]
fn an_option_that_lacks_something_is_named() {
    let small =
        inputs().sheet("Pumps", OPTION).names("hence_cost_works__a B5:D5, hence_npv__a B9, hence_npv__b F9");
    let problems = small.problems();
    assert_eq!(problems, ["missing-role Pumps [b]"]);
}

#[test]
fn settings_reach_the_option_they_are_named_for() {
    let read = inputs()
        .sheet("Flows", "A5: 'a | 1 | 2 | 3\nA6: 'b | 4 | 5 | 6\nF1: 0.1 | 0.2")
        .names(
            "hence_cost_works__a B5:D5, hence_cost_works__b B6:D6, hence_uplift_works F1, \
             hence_uplift_works__b G1, hence_npv__a H1, hence_npv__b H2",
        )
        .resolved();
    let uplifts: Vec<f64> = read.choices.iter().map(|choice| choice.streams[0].uplift.value).collect();
    assert_eq!(uplifts, [0.1, 0.2]);
}

/// An option's sheet with its own years, as a spreadsheet program copies it: the first keeps the names of the workbook.
const WHOLE: &str = "hence_years B4:D4, hence_cost_works B5:D5, hence_npv B9";

#[test]
fn names_of_the_workbook_belong_to_the_sheet_that_others_were_copied_from() {
    let read = Small::default()
        .sheet("Inputs", "A1: 'Base | 2025\nA2: 'Basis | '3.5%")
        .names("hence_base B1, hence_basis B2")
        .sheet("Pumps", OPTION)
        .names(WHOLE)
        .sheet("Wells", &OPTION.replace("100", "70"))
        .own_names(WHOLE)
        .sheet("Dams", &OPTION.replace("100", "900"))
        .own_names(WHOLE)
        .resolved();
    assert_eq!(names(&read), ["Pumps", "Wells", "Dams"]);
    let flows: Vec<f64> = read.choices.iter().map(|choice| choice.streams[0].raw[0]).collect();
    assert_eq!(flows, [100.0, 70.0, 900.0]);
    assert_eq!(read.choices[0].targets[0].at.to_string(), "Pumps!B9");
}

#[test]
fn a_stream_of_the_workbook_in_other_cells_than_the_copies_is_still_a_question() {
    let moved = "A4: 'Year | 2025 | 2026 | 2027\nA6: 'Works | 100 | 50 | 25\nA9: 'NPV | ";
    let found = Small::default()
        .sheet("Inputs", "A1: 'Base | 2025\nA2: 'Basis | '3.5%")
        .names("hence_base B1, hence_basis B2")
        .sheet("Pumps", moved)
        .names("hence_years B4:D4, hence_cost_works B6:D6, hence_npv B9")
        .sheet("Wells", OPTION)
        .own_names(WHOLE)
        .problems();
    assert!(found.contains(&"loose-stream Pumps!B6:D6 [hence_cost_works]".to_owned()), "{found:?}");
}

#[test]
fn sheets_laid_out_alike_without_names_are_told() {
    let two = |other: &str| {
        Small::default()
            .sheet("Inputs", "A1: 'Base | 2025\nA2: 'Basis | '3.5%")
            .names("hence_base B1, hence_basis B2")
            .sheet("Pumps", OPTION)
            .names(WHOLE)
            .sheet("Deep wells", other)
    };
    let alike = two(&OPTION.replace("100", "70"));
    assert_eq!(alike.problems(), ["sheet-alike 'Deep wells'!B5:D5"]);
    let read = alike.resolved();
    let hint = read.problems[0].hint.clone().unwrap_or_default();
    assert!(read.problems[0].message.contains("`Pumps`") && hint.contains("__deep_wells"), "{hint}");
    // Other years, another heading, no numbers, or names of their own.
    for other in [
        OPTION.replace("2026", "2030"),
        OPTION.replace("'Works", "'Pipes"),
        OPTION.replace("100 | 50 | 25", ""),
        OPTION.replace("50", "'n/a"),
    ] {
        assert_eq!(two(&other).problems(), [""; 0], "{other}");
    }
    let own = two(OPTION).names("hence_pv_works B8");
    assert_eq!(own.problems(), [""; 0], "a sheet with a name is no sheet left out");
}
