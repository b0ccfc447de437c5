//! The rules of roles in the specification (section 6), one small workbook a rule, each problem with its cell.

use chrono::NaiveDate;
use hence_core::{Position, Timing};
use hence_workbook::appraisal::{Base, Direction, Held, Label, StreamKind, TargetRole};
use hence_workbook::problem::Severity;
use hence_workbook::resolve::Options;

use crate::small::{Small, codes, lines};

mod meant;
mod options;
mod refusals;
mod spans;

const CELLS: &str = "
    A1: 'Base | 2025
    A2: 'Basis | '3.5%
    A4: 'Year | 2025 | 2026 | 2027
    A5: 'Works | 100 | 50 | 25
    A6: 'Access | 0 | 80 | 90
    A7: 'Factor
    A9: 'NPV";
const NAMES: &str = "hence_base B1, hence_basis B2, hence_years B4:D4, hence_cost_works B5:D5, \
    hence_benefit_access B6:D6, hence_factor B7:D7, hence_npv B9";

/// The plain appraisal, with lines that begin at the same cell replaced and others added.
fn cells(changes: &str) -> String {
    let first = |line: &str| line.split(':').next().unwrap_or_default().trim().to_owned();
    let changed: Vec<String> = changes.lines().map(first).collect();
    let kept = CELLS.lines().filter(|line| line.trim().is_empty() || !changed.contains(&first(line)));
    kept.chain(changes.lines()).collect::<Vec<_>>().join("\n")
}

fn plan(changes: &str) -> Small {
    Small::default().sheet("Plan", &cells(changes)).names(NAMES)
}

/// The plain appraisal with other names: those of the same role are replaced.
fn named(changes: &str, names: &str) -> Small {
    let role = |item: &str| item.trim().split(' ').next().unwrap_or_default().to_owned();
    let changed: Vec<String> = names.split(',').map(role).collect();
    let kept = NAMES.split(',').filter(|item| !changed.contains(&role(item)));
    let gone = |item: &&str| item.trim().contains(' ');
    let all: Vec<&str> = kept.chain(names.split(',')).filter(gone).collect();
    Small::default().sheet("Plan", &cells(changes)).names(&all.join(","))
}

#[test]
fn a_plain_appraisal_is_read_whole() {
    let read = plan("").resolved();
    assert_eq!(codes(&read.problems), [""; 0]);
    assert_eq!(read.axes.len(), 1);
    assert_eq!(read.axes[0].labels, [2025, 2026, 2027].map(Label::Year));
    assert_eq!(read.axes[0].direction, Direction::Across);
    let [choice] = &read.choices[..] else { panic!("one option") };
    assert_eq!(choice.name, "Plan");
    assert_eq!((&choice.base.value, choice.base.from.as_str()), (&Base::Year(2025), "hence_base"));
    assert_eq!((choice.basis.value.as_str(), choice.basis.from.as_str()), ("3.5%", "hence_basis"));
    assert_eq!(choice.timing, None);
    let streams: Vec<_> = choice.streams.iter().map(|s| (s.name.as_str(), s.kind, s.raw.clone())).collect();
    assert_eq!(
        streams,
        [
            ("works", StreamKind::Cost, vec![100.0, 50.0, 25.0]),
            ("access", StreamKind::Benefit, vec![0.0, 80.0, 90.0])
        ]
    );
    let targets: Vec<_> = choice.targets.iter().map(|t| (t.role.clone(), t.at.to_string())).collect();
    assert_eq!(
        targets,
        [(TargetRole::Factor, "Plan!B7:D7".to_owned()), (TargetRole::Npv, "Plan!B9".to_owned())]
    );
    assert_eq!(choice.targets[0].held, [Held::Blank, Held::Blank, Held::Blank]);
    assert!(!read.date1904);
}

#[test]
fn years_may_run_down_a_column() {
    let read = Small::default()
        .sheet(
            "Plan",
            "A1: 'Year | 'Works | 'Factor\nA2: 2025 | 1\nA3: 2026 | 2\nA4: 2027 | 3\nF1: 2025 | 0.035 | 0",
        )
        .names("hence_years A2:A4, hence_cost_works B2:B4, hence_factor C2:C4, hence_base F1, hence_basis G1")
        .resolved();
    assert_eq!(read.axes[0].direction, Direction::Down);
    assert_eq!(read.choices[0].streams[0].raw, [1.0, 2.0, 3.0]);
    assert_eq!(read.choices[0].basis.value, "0.035");
    // The factors are still blank.
    let rows: Vec<_> = read.coverage.iter().map(|row| (row.heading.as_str(), row.total)).collect();
    assert_eq!(rows, [("Works", 6.0), ("Factor", 0.0)]);
}

#[test]
fn financial_years_numbers_dates_and_offsets() {
    let labels = |years: &str, base: &str| {
        let read = plan(&format!("A1: 'Base | {base}\nA4: 'Year | {years}")).resolved();
        (read.axes[0].labels.clone(), read.choices[0].base.value.clone())
    };
    let (years, base) = labels("'2025/26 | '2026/27 | '2027-28", "'2025/26");
    assert_eq!(base, Base::Financial(2025));
    assert_eq!(years[2], Label::Financial(2027, "2027-28".to_owned()));
    let (years, _) = labels("'FY26 | 'FY27 | 'FY28", "'FY26");
    assert!(matches!(&years[0], Label::Financial(_, text) if text == "FY26"));
    let (years, base) = labels("0 | 1 | 2", "0");
    assert_eq!((years[1].clone(), base), (Label::Number(1), Base::Zero));
    let (_, base) = labels("0 | 1 | 2", "2025");
    assert_eq!(base, Base::Year(2025));
    // 45748 is 1 April 2025 in the 1900 system.
    let (years, base) = labels("@45748 | @46113 | @46478", "@45748");
    let april = |year| NaiveDate::from_ymd_opt(year, 4, 1).unwrap();
    assert_eq!(base, Base::Date(april(2025)));
    assert_eq!(years, [2025, 2026, 2027].map(|year| Label::Date(april(year))));
}

#[test]
fn dates_of_a_1904_workbook_are_1462_days_later() {
    let read =
        plan("A1: 'Base | @44286\nA4: 'Year | @44286 | @44651 | @45016").counting_from_1904().resolved();
    assert!(read.date1904);
    assert_eq!(read.axes[0].labels[0], Label::Date(NaiveDate::from_ymd_opt(2025, 4, 1).unwrap()));
}

#[test]
fn offsets_stand_instead_of_years() {
    let offsets = NAMES.replace("hence_years", "hence_offsets").replace("hence_base B1,", "");
    let small = Small::default().sheet("Plan", &cells("A4: 'Offset | 0 | 0.5 | 30")).names(&offsets);
    let read = small.resolved();
    assert_eq!(read.axes[0].labels, [0.0, 0.5, 30.0].map(Label::Offset));
    assert_eq!(read.choices[0].base.value, Base::Zero);
    let both = small.names("hence_years B5:D5").problems();
    assert!(both.contains(&"years-and-offsets Plan!B4:D4 [hence_offsets]".to_owned()), "{both:?}");
}

#[test]
fn every_fault_in_the_years_has_its_cell() {
    let faults = |years: &str| plan(&format!("A4: 'Year | {years}")).problems();
    assert_eq!(faults("2025 | 2025 | 2026"), ["years-repeat Plan!C4 [hence_years]"]);
    assert_eq!(
        faults("2025 | 2024 | 2026"),
        ["years-order Plan!C4 [hence_years]", "years-gap Plan!D4 [hence_years]"]
    );
    assert_eq!(faults("2025 | 2027 | 2028"), ["years-gap Plan!C4 [hence_years]"]);
    assert_eq!(faults("2025 | | 2027"), ["years-blank Plan!C4 [hence_years]"]);
    assert_eq!(faults("2025 | '2026 | 2027")[0], "text-number Plan!C4 [hence_years]");
    assert_eq!(faults("2025 | #REF! | 2027")[0], "error-value Plan!C4 [hence_years]");
    assert_eq!(faults("2025 | 2026.5 | 2027")[0], "years-value Plan!C4 [hence_years]");
    assert_eq!(faults("2025 | 46023 | 2027")[0], "years-value Plan!C4 [hence_years]");
    assert_eq!(faults("2025 | 'later | 2027")[0], "years-value Plan!C4 [hence_years]");
    assert_eq!(faults("2025 | 1 | 2027")[0], "years-mixed Plan!C4 [hence_years]");
    assert_eq!(faults("2025 | =B4+1> | 2027")[0], "no-result Plan!C4 [hence_years]");
}

#[test]
fn a_faulty_year_does_not_hide_faulty_flows() {
    let problems = plan("A4: 'Year | 2025 | '2026 | 2027\nA5: 'Works | 1 | 2 | 'x").problems();
    assert_eq!(problems, ["text-number Plan!C4 [hence_years]", "text-value Plan!D5 [hence_cost_works]"]);
}

#[test]
fn a_gap_in_the_years_is_a_warning_and_the_rest_is_read() {
    let read = plan("A4: 'Year | 2025 | 2030 | 2035").resolved();
    assert_eq!(read.axes[0].labels[2], Label::Year(2035));
    assert!(read.problems.iter().all(|p| p.severity < Severity::Error));
    assert!(read.problems[0].message.contains("4 years are left out"), "{}", read.problems[0]);
}

#[test]
fn base_and_years_speak_one_language() {
    let base = |base: &str, years: &str| plan(&format!("A1: 'Base | {base}\nA4: 'Year | {years}")).problems();
    let calendar = "2025 | 2026 | 2027";
    assert_eq!(base("'2025/26", calendar), ["base-years Plan!B1 [hence_base]"]);
    assert_eq!(base("@45748", calendar), ["base-years Plan!B1 [hence_base]"]);
    assert_eq!(base("1", "1 | 2 | 3"), ["base-years Plan!B1 [hence_base]"]);
    assert_eq!(base("'soon", calendar), ["base-value Plan!B1 [hence_base]"]);
    assert_eq!(base("'2025", calendar), ["text-number Plan!B1 [hence_base]"]);
    assert_eq!(base("#N/A", calendar), ["error-value Plan!B1 [hence_base]"]);
    assert_eq!(base("", calendar), ["blank-setting Plan!B1 [hence_base]"]);
    // A bare year beside financial years is read, and said.
    let read = plan("A1: 'Base | 2025\nA4: 'Year | '2025/26 | '2026/27 | '2027/28").resolved();
    assert_eq!(read.choices[0].base.value, Base::Financial(2025));
    assert_eq!(codes(&read.problems), ["base-years Plan!B1 [hence_base]"]);
}

#[test]
fn timing_and_basis_cells() {
    let small = named("A3: 'Timing | 'flows middle, base start", "hence_timing B3");
    let timing = small.resolved().choices[0].timing.clone().unwrap();
    assert_eq!(timing.value, Timing { flows: Position::Middle, base: Position::Start });
    assert_eq!(timing.at.unwrap().to_string(), "Plan!B3");
    let truth = named("A3: 'Timing | TRUE", "hence_timing B3").problems();
    assert_eq!(truth, ["text-expected Plan!B3 [hence_timing]"]);
    let wrong = named("A3: 'Timing | 'flows noon", "hence_timing B3").problems();
    assert_eq!(wrong, ["syntax Plan!B3 [hence_timing]"]);
    assert_eq!(plan("A2: 'Basis | 3.5").problems(), ["rate-range Plan!B2 [hence_basis]"]);
    let Err(problems) = plan("A2: 'Basis | 3.5").resolve_with(&Options::default()) else { panic!("refused") };
    assert_eq!(
        lines(&problems),
        [
            "Plan!B2 [hence_basis]: rate is 350% (stored 3.5), allowed -50% to 100% (rate-range) try: enter 3.5% or 0.035"
        ]
    );
    assert_eq!(plan("A2: 'Basis | @45748").problems(), ["basis-value Plan!B2 [hence_basis]"]);
    assert_eq!(plan("A2: 'Basis | ").problems(), ["blank-setting Plan!B2 [hence_basis]"]);
    let wide = named("", "hence_basis A2:B2").problems();
    assert_eq!(wide, ["one-cell Plan!A2:B2 [hence_basis]"]);
}

#[test]
fn the_command_lines_basis_beats_the_cell_and_says_so() {
    let options = Options { basis: Some("uk-2003"), ..Options::default() };
    let read = plan("").resolve_with(&options).unwrap();
    assert_eq!(
        (read.choices[0].basis.value.as_str(), read.choices[0].basis.from.as_str()),
        ("uk-2003", "command line")
    );
    assert_eq!(codes(&read.problems), ["basis-overridden Plan!B2 [hence_basis]"]);
    let same = Options { basis: Some("3.5%"), ..Options::default() };
    assert_eq!(codes(&plan("").resolve_with(&same).unwrap().problems), [""; 0]);
}

#[test]
fn flows_are_numbers_or_blank_and_nothing_else() {
    let faults = |flows: &str| plan(&format!("A5: 'Works | {flows}")).problems();
    assert_eq!(faults("100 | '1,200 | 25"), ["text-number Plan!C5 [hence_cost_works]"]);
    assert_eq!(faults("100 | 'n/a | 'n/a"), ["text-value Plan!C5:D5 [hence_cost_works]"]);
    assert_eq!(faults("#DIV/0! | 50 | #REF!").len(), 2);
    assert_eq!(faults("100 | TRUE | 25"), ["logical-value Plan!C5 [hence_cost_works]"]);
    assert_eq!(faults("100 | @45748 | 25"), ["date-value Plan!C5 [hence_cost_works]"]);
    assert_eq!(faults("100 | =B5/2> | 25"), ["no-result Plan!C5 [hence_cost_works]"]);
    assert_eq!(faults(" | | "), ["stream-blank Plan!B5:D5 [hence_cost_works]"]);
    let Err(problems) = plan("A5: 'Works | 100 | '1,200 | 25").resolve_with(&Options::default()) else {
        panic!()
    };
    assert!(problems[0].message.contains("stores the text `1,200`"), "{}", problems[0]);
    let read = plan("A5: 'Works | 100 | | 25").resolved();
    assert_eq!(read.choices[0].streams[0].raw, [100.0, 0.0, 25.0]);
    assert_eq!((read.problems[0].code, read.problems[0].severity), ("blank-zero", Severity::Note));
}

#[test]
fn values_that_the_file_stores_oddly_are_refused_not_dropped() {
    assert_eq!(plan("A5: 'Works | NaN | 50 | 25").problems(), ["odd-value Plan!B5"]);
    assert_eq!(plan("A5: 'Works | 1e400 | 50 | 25").problems(), ["odd-value Plan!B5"]);
    let read = plan("A5: 'Works | <![CDATA[7]]> | 1<!-- -->2 | &#56;").resolved();
    assert_eq!(read.choices[0].streams[0].raw, [7.0, 12.0, 8.0]);
}

#[test]
fn a_stream_is_as_long_as_the_years_and_the_fix_is_offered() {
    let small = named("", "hence_cost_works B5:C5");
    let Err(problems) = small.resolve_with(&Options::default()) else { panic!("refused") };
    assert_eq!(
        lines(&problems),
        [
            "Plan!B5:C5 [hence_cost_works]: has 2 cells across, allowed are 3 across, as the years Plan!B4:D4 (shape) \
          try: let hence_cost_works refer to Plan!B5:D5"
        ]
    );
    assert_eq!(named("", "hence_cost_works B5:B7").problems(), ["shape Plan!B5:B7 [hence_cost_works]"]);
    let shifted = named("E5: 1", "hence_cost_works C5:E5").problems();
    assert_eq!(shifted, ["misaligned Plan!C5:E5 [hence_cost_works]"]);
    assert_eq!(named("", "hence_factor B7:C7").problems(), ["shape Plan!B7:C7 [hence_factor]"]);
    assert_eq!(named("", "hence_years B4:D5").problems(), ["years-shape Plan!B4:D5 [hence_years]"]);
    assert_eq!(named("", "hence_npv B9:C9").problems(), ["one-cell Plan!B9:C9 [hence_npv]"]);
}

#[test]
fn costs_wholly_negative_stop_and_ask_unless_declared() {
    let small = plan("A5: 'Works | -100 | 0 | -25");
    assert_eq!(small.problems(), ["cost-sign Plan!B5:D5 [hence_cost_works]"]);
    for words in ["costs negative", "costs entered negative"] {
        let read = named(&format!("A5: 'Works | -100 | 0 | -25\nA3: 'Signs | '{words}"), "hence_signs B3")
            .resolved();
        assert_eq!(read.choices[0].streams.iter().map(|s| s.sign).collect::<Vec<_>>(), [-1.0, 1.0]);
    }
    let unclear = named("A3: 'Signs | 'yes", "hence_signs B3").problems();
    assert_eq!(unclear, ["signs Plan!B3 [hence_signs]"]);
    assert_eq!(
        plan("A6: 'Access | -1 | 0 | -2").problems(),
        ["benefit-sign Plan!B6:D6 [hence_benefit_access]"]
    );
    // A credit among costs is no question.
    assert_eq!(plan("A5: 'Works | 100 | -5 | 25").problems(), [""; 0]);
}

#[test]
fn units_uplifts_residuals_and_tails_are_of_their_stream() {
    let read = named(
        "F1: '£k | 0.2 | 40 | 'growing 1%, for ever",
        "hence_unit_works F1, hence_uplift_works G1, hence_residual_works H1, hence_tail_works I1",
    )
    .resolved();
    let works = &read.choices[0].streams[0];
    assert_eq!((works.unit, works.uplift.value), (1e3, 0.2));
    assert_eq!(works.residual.as_ref().unwrap().value, 40.0);
    let tail = &works.tail.as_ref().unwrap().value;
    assert_eq!((tail.growth, tail.every, tail.to), (0.01, 1, None));
    let access = &read.choices[0].streams[1];
    assert_eq!((access.unit, access.uplift.value, access.residual.is_none()), (1.0, 0.0, true));
    let faults = named(
        "F1: 'dozen | 44 | 'forty | 'sometimes",
        "hence_unit_works F1, hence_uplift_works G1, hence_residual_works H1, hence_tail_works I1",
    )
    .problems();
    assert_eq!(
        faults,
        [
            "unit Plan!F1 [hence_unit_works]",
            "uplift-range Plan!G1 [hence_uplift_works]",
            "text-value Plan!H1 [hence_residual_works]",
            "syntax Plan!I1 [hence_tail_works]"
        ]
    );
    assert_eq!(
        named("F1: 'k", "hence_unit_wrks F1").problems(),
        ["unknown-stream Plan!F1 [hence_unit_wrks]"]
    );
}

#[test]
fn effects_and_budget() {
    let read =
        named("A8: 'Tonnes | 1 | 2 | 3\nF1: 'Works", "hence_effect_tonnes_of_carbon B8:D8, hence_budget F1")
            .resolved();
    let choice = &read.choices[0];
    assert_eq!((choice.effects[0].name.as_str(), choice.effects[0].raw[2]), ("tonnes of carbon", 3.0));
    assert_eq!(choice.budget, ["works"]);
    let wrong = named("F1: 'works, roads", "hence_budget F1").problems();
    assert_eq!(wrong, ["unknown-stream Plan!F1 [hence_budget]"]);
}

#[test]
fn blocks_hold_a_stream_a_row_and_subtotals_are_left_out_by_name() {
    let small = named(
        "A5: 'Civil works | 100 | 50 | 25
         A6: 'Pumps | 10 | | 5
         A7: 'All costs | =SUM(B5:B6)>110 | =SUM(C5:C6)>50 | =SUM(D5:D6)>30
         A8: 'Running
         A10: 'Power | 1 | 2 | =C10*1.5>3",
        "hence_cost_works, hence_benefit_access, hence_factor B12:D12, hence_npv F9, hence_costs A5:D10, hence_pv_civil_works F10",
    );
    let read = small.resolved();
    let names: Vec<_> =
        read.choices[0].streams.iter().map(|s| (s.name.as_str(), s.at.cells_text())).collect();
    assert_eq!(
        names,
        [("Civil works", "B5:D5".to_owned()), ("Pumps", "B6:D6".to_owned()), ("Power", "B10:D10".to_owned())]
    );
    let notes: Vec<_> = read.problems.iter().map(|p| format!("{} {}", p.code, p.place)).collect();
    assert!(notes.contains(&"subtotal-left-out Plan!B7:D7 [All costs]".to_owned()), "{notes:?}");
    assert!(notes.contains(&"block-heading Plan!B8:D8 [Running]".to_owned()), "{notes:?}");
    let pv = read.choices[0].targets.iter().find(|t| t.from == "hence_pv_civil_works").unwrap();
    assert_eq!(pv.role, TargetRole::PvTotal(Some("Civil works".to_owned())));
}

#[test]
fn faults_of_blocks() {
    let block = |changes: &str, at: &str| {
        named(changes, &format!("hence_cost_works, hence_benefit_access, hence_costs {at}")).problems()
    };
    assert_eq!(block("", "B5:D6"), ["block-shape Plan!B5:D6 [hence_costs]"]);
    assert_eq!(block("A6: 'Works | 1 | 2 | 3", "A5:D6"), ["block-label Plan!B6:D6 [Works]"]);
    assert_eq!(
        block("A5: 'Works\nA6: 'Pumps", "A5:D6"),
        ["block-empty Plan!A5:D6 [hence_costs]", "no-flows Plan!A5:D6 [hence_costs]"]
    );
    let beside = named("A6: 'Pumps", "hence_benefit_access, hence_costs A6:D6");
    assert_eq!(
        beside.problems(),
        ["block-empty Plan!A6:D6 [hence_costs]"],
        "a warning where other flows are entered"
    );
    assert_eq!(block("", "A4:D5"), [""; 0], "the years may head the block");
    assert_eq!(block("A6: | 1 | 2 | 3", "A5:D6"), ["block-label Plan!A6 [hence_costs]"]);
    assert_eq!(block("A6: 'Pumps | 1 | 'x | 3", "A5:D6"), ["text-value Plan!C6 [Pumps]"]);
}

#[test]
fn a_stream_and_its_own_total_count_twice() {
    let total = "A8: 'Total | =B5+B6>100 | =SUM(C5:C6)>130 | =D5+D6>115";
    let small = named(total, "hence_cost_all B8:D8");
    let problems = small.problems();
    assert!(problems.contains(&"double-count Plan!B8:D8 [hence_cost_all]".to_owned()), "{problems:?}");
    // The parts named through a subtotal that is not named.
    let deep = named(
        "A8: 'Subtotal | =SUM(B5:B6)>100 | =SUM(C5:C6)>130 | =SUM(D5:D6)>115
         A10: 'Total | =B8+B11>101 | =C8+C11>131 | =D8+D11>116
         A11: 'Other | 1 | 1 | 1",
        "hence_cost_all B10:D10",
    );
    assert!(deep.problems().contains(&"double-count Plan!B10:D10 [hence_cost_all]".to_owned()));
    // A flow computed from another is no total of it.
    let scaled = named("A8: 'Risk | =B5*0.1>10 | =C5*0.1>5 | =D5*0.1>2.5", "hence_cost_risk B8:D8");
    assert_eq!(scaled.problems(), [""; 0]);
    let linked = named("A8: 'Again | =B5>100 | =C5>50 | =D5>25", "hence_cost_again B8:D8");
    assert_eq!(linked.problems(), ["linked-streams Plan!B8:D8 [hence_cost_again]"]);
    assert!(
        named("", "hence_cost_more B5:D5")
            .problems()
            .contains(&"overlap Plan!B5:D5 [hence_cost_works]".to_owned())
    );
}

/// Values pasted over formulas count twice as formulas do.
#[test]
fn pasted_numbers_of_other_streams_are_told() {
    let one = "A8: 'Pumps | 3 | 4 | 6";
    let sum = format!("{one}\nA10: 'Total costs | 103 | 54 | 31");
    let (two, three) = ("hence_cost_pumps B8:D8", "hence_cost_pumps B8:D8, hence_cost_all B10:D10");
    assert_eq!(named(one, two).problems(), [""; 0]);
    assert_eq!(named(&sum, three).problems(), ["same-numbers Plan!B10:D10 [hence_cost_all]"]);
    let copy = named("A8: 'Again | 100 | 50 | 25", "hence_cost_again B8:D8");
    assert_eq!(copy.problems(), ["same-numbers Plan!B8:D8 [hence_cost_again]"]);
    let level = named("A8: 'A | 5 | 5 | 5\nA10: 'B | 5 | 5 | 5", "hence_cost_a B8:D8, hence_cost_b B10:D10");
    assert_eq!(level.problems(), [""; 0], "flows that never change are alike by chance");
}

#[test]
fn a_cost_that_adds_up_to_less_than_nothing_is_told() {
    let mixed = named("A8: 'Pumps | -30 | -4 | 6", "hence_cost_pumps B8:D8");
    assert_eq!(mixed.problems(), ["cost-sign Plan!B8:D8 [hence_cost_pumps]"]);
    let refund = named("A8: 'Pumps | 30 | 4 | -6", "hence_cost_pumps B8:D8");
    assert_eq!(refund.problems(), [""; 0]);
}

#[test]
fn held_contents_and_number_formats_of_targets() {
    let read = plan("A7: 'Factor | 1 | =B7/1.035>0.966183574879227 | 'x\nA9: 'NPV | {3}").resolved();
    let targets = &read.choices[0].targets;
    assert_eq!(
        targets[0].held,
        [
            Held::Number(1.0),
            Held::Formula { text: "B7/1.035".to_owned(), value: Some(0.966183574879227), shown: None },
            Held::Text("x".to_owned())
        ]
    );
    assert_eq!(targets[1].held, [Held::Blank]);
    assert_eq!(targets[1].formats, [Some("#,##0.00".to_owned())]);
}

#[test]
fn shared_formulas_of_targets_are_expanded_where_they_stand() {
    // Two cells of one group, the text with the first (ISO/IEC 29500-1, 18.3.1.40).
    let small = plan(
        "A7: 'Factor | 1 | =[t=\"shared\" ref=\"C7:D7\" si=\"0\"]B7/(1+$B$2)>0.9 | =[t=\"shared\" si=\"0\"]>0.8",
    );
    let read = small.resolved();
    let text = |held: &Held| match held {
        Held::Formula { text, .. } => text.clone(),
        other => panic!("{other:?}"),
    };
    assert_eq!(text(&read.choices[0].targets[0].held[1]), "B7/(1+$B$2)");
    assert_eq!(text(&read.choices[0].targets[0].held[2]), "C7/(1+$B$2)");
}

#[test]
fn coverage_lists_every_numeric_row_with_its_role_or_none() {
    let read = plan("A10: 'Fees | 5 | | \nA11: 'Comment | 'none\nA12: 'Noise | '£k | 4 | 4 | 4").resolved();
    let rows: Vec<_> = read
        .coverage
        .iter()
        .map(|row| (row.heading.as_str(), row.roles.join(","), row.total, row.at.cells_text()))
        .collect();
    assert_eq!(
        rows,
        [
            ("Works", "cost: works".to_owned(), 175.0, "B5:D5".to_owned()),
            ("Access", "benefit: access".to_owned(), 170.0, "B6:D6".to_owned()),
            // Still blank: a fill writes numbers here.
            ("Factor", "factor".to_owned(), 0.0, "B7:D7".to_owned()),
            ("Fees", String::new(), 5.0, "B10:D10".to_owned()),
            ("Noise", String::new(), 8.0, "B12:D12".to_owned()),
        ]
    );
}

#[test]
fn roles_from_the_command_line_beat_names() {
    let given = [
        ("cost_works".to_owned(), "Plan!B6:D6".to_owned()),
        ("hence_years".to_owned(), "The_years".to_owned()),
        ("npv".to_owned(), "'Plan'!$B$9".to_owned()),
        ("base".to_owned(), "Plan!B1".to_owned()),
    ];
    let options = Options { roles: &given, basis: Some("3.5%"), ..Options::default() };
    let small = Small::default().sheet("Plan", &cells("")).names("The_years B4:D4, hence_cost_works B5:D5");
    let read = small.resolve_with(&options).unwrap();
    assert_eq!(read.choices[0].streams.len(), 1);
    assert_eq!(read.choices[0].streams[0].at.to_string(), "Plan!B6:D6");
    assert_eq!(read.choices[0].streams[0].from, "--role cost_works");
    for (role, range, code) in [
        ("cost_works", "Nowhere!B6", "role-range [--role cost_works]"),
        ("wurks", "Plan!B6:D6", "unknown-role [--role wurks]"),
        ("verdict", "Plan!B6", "unknown-role [--role verdict]"),
    ] {
        let given = [(role.to_owned(), range.to_owned())];
        let Err(problems) = plan("").resolve_with(&Options { roles: &given, ..Options::default() }) else {
            panic!()
        };
        assert_eq!(codes(&problems), [code]);
    }
}

#[test]
fn a_workbook_without_roles_says_what_is_missing_and_how_to_say_it() {
    let Err(problems) = Small::default().sheet("Empty", "A1: 1").resolve_with(&Options::default()) else {
        panic!()
    };
    assert_eq!(problems.len(), 1);
    assert_eq!(problems[0].code, "missing-role");
    for word in ["years", "stream", "basis", "range to fill"] {
        assert!(problems[0].message.contains(word), "{}", problems[0]);
    }
    for word in ["hence_years", "hence start", "--role"] {
        assert!(problems[0].hint.as_deref().unwrap().contains(word));
    }
    let Err(problems) = named("", "hence_base").resolve_with(&Options::default()) else { panic!() };
    assert_eq!((problems[0].code, problems.len()), ("missing-role", 1));
    assert!(problems[0].message.contains("no base year"), "{}", problems[0]);
}

#[test]
fn slips_are_warnings_with_the_nearest_role() {
    let read = named("", "hence_factr B7:D7").resolved();
    assert_eq!(codes(&read.problems), ["unknown-name [hence_factr]"]);
    assert!(read.problems[0].message.contains("hence_factor"), "{}", read.problems[0]);
}

#[test]
fn the_report_on_names_lists_found_missing_and_slips() {
    let report =
        named("", "hence_npv, hence_factor, hence_base, hence_yaers B4:D4, hence_verdict F1").report();
    let found: Vec<_> =
        report.found.iter().map(|f| (f.name.as_str(), f.role.as_str(), f.place.to_string())).collect();
    assert!(found.contains(&("hence_cost_works", "cost: works", "Plan!B5:D5".to_owned())), "{found:?}");
    assert!(found.iter().any(|(name, ..)| *name == "hence_verdict"));
    assert_eq!(report.missing.len(), 2, "{:?}", report.missing);
    assert_eq!(codes(&report.slips), ["unknown-name [hence_yaers]"]);
    assert!(report.found.iter().all(|found| found.option.is_none()));
}
