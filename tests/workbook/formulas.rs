//! The live formulas of filled cells: their exact text, and their results. Expected texts are written
//! out by hand from the layout of the sheet Discounting.

use hence_core::{Position, Timing};
use hence_workbook::appraisal::{Direction, Held, TargetRole};
use hence_workbook::formulas::{pv_expression, target_writes};
use hence_workbook::layout::Layout;
use hence_workbook::patch::{Cached, CellWrite};
use hence_workbook::sheets::SheetNames;

use crate::scenario::{Case, Labels, appraisal, outcomes};

fn case(direction: Direction, factors: bool) -> Case {
    Case { basis: "3.5%", timing: Timing::default(), labels: Labels::Years, direction, years: 10, factors }
}

fn formula(write: &CellWrite) -> &str {
    match write {
        CellWrite::Formula(text, _) => text,
        other => panic!("no formula: {other:?}"),
    }
}

#[test]
fn factors_are_looked_up_by_the_analysts_year() {
    let case = case(Direction::Across, true);
    let (a, names) = (appraisal(&case), SheetNames::choose(&[]));
    let o = outcomes(&case, &a);
    let layout = Layout::new(&a, &o, &names);
    let target = &a.choices[1].targets[0];
    assert_eq!(target.role, TargetRole::Factor);
    let writes = target_writes(&a, &o, &layout, 1, target, true);
    assert_eq!(formula(&writes[1]), "INDEX(Discounting!$D$8:$D$17,MATCH(D$4,Discounting!$A$8:$A$17,0))");
    // 1/1.035, by hand.
    let CellWrite::Formula(_, Cached::Number(d)) = &writes[1] else { panic!() };
    assert!((d - 0.966_183_574_879_227).abs() < 1e-15);
    assert_eq!(target_writes(&a, &o, &layout, 1, target, false)[0], CellWrite::Number(1.0));
}

/// Two half-years of 2026 both bear its label, in rows 8 and 9 of Discounting.
#[test]
fn labels_that_repeat_are_told_apart_by_their_place() {
    let case = case(Direction::Across, false);
    let (mut a, names) = (appraisal(&case), SheetNames::choose(&[]));
    let o = outcomes(&case, &a);
    for axis in &mut a.axes {
        axis.labels[1] = axis.labels[0].clone();
    }
    let layout = Layout::new(&a, &o, &names);
    assert_eq!(
        pv_expression(&a, &o, &layout, 1, 1, "It's a liner").unwrap(),
        "SUMPRODUCT((Discounting!$A$8:$A$17=$C$4:$L$4)*(ROW(Discounting!$A$8:$A$17)-ROW(Discounting!$A$8)=\
         COLUMN($C$4:$L$4)-COLUMN($C$4))*Discounting!$D$8:$D$17*$C$11:$L$11)"
    );
    let net = a.choices[1].targets.iter().find(|t| t.role == TargetRole::PvByYear(None)).expect("a row");
    let writes = target_writes(&a, &o, &layout, 1, net, true);
    let looked_up = |label: &str, more: &str| {
        format!("*INDEX(Discounting!$D$8:$D$17,MATCH({label}$4,Discounting!$A$8:$A$17,0){more})")
    };
    assert!(formula(&writes[0]).ends_with(&looked_up("C", "")), "{}", formula(&writes[0]));
    assert!(formula(&writes[1]).ends_with(&looked_up("D", "+1")), "{}", formula(&writes[1]));
    assert!(formula(&writes[2]).ends_with(&looked_up("E", "")), "{}", formula(&writes[2]));
}

#[test]
fn present_values_multiply_flows_and_the_analysts_factors() {
    let case = case(Direction::Across, true);
    let (a, names) = (appraisal(&case), SheetNames::choose(&[]));
    let o = outcomes(&case, &a);
    let layout = Layout::new(&a, &o, &names);
    let writes = target_writes(&a, &o, &layout, 1, &a.choices[1].targets[1], true);
    assert_eq!(formula(&writes[0]), "-1000*(1+$F$1)*C10*C$5");
    assert_eq!(
        formula(&writes[9]),
        "(-1000*(1+$F$1)*L10-1000*$G$1)*L$5",
        "the residual lowers the last cost"
    );
    let net = target_writes(&a, &o, &layout, 1, &a.choices[1].targets[2], true);
    assert_eq!(formula(&net[0]), "(-(-1000*(1+$F$1)*C10)+C11-C12)*C$5");
    let total = pv_expression(&a, &o, &layout, 1, 1, "It's a liner").unwrap();
    assert_eq!(total, "SUMPRODUCT($C$11:$L$11,$C$5:$L$5)");
    let from_afar = pv_expression(&a, &o, &layout, 1, 1, "Discounting").unwrap();
    assert_eq!(from_afar, "SUMPRODUCT('It''s a liner'!$C$11:$L$11,'It''s a liner'!$C$5:$L$5)");
}

#[test]
fn without_factor_cells_present_values_use_discounting() {
    let names = SheetNames::choose(&[]);
    let across = case(Direction::Across, false);
    let a = appraisal(&across);
    let o = outcomes(&across, &a);
    let layout = Layout::new(&a, &o, &names);
    assert_eq!(
        pv_expression(&a, &o, &layout, 1, 1, "It's a liner").unwrap(),
        "SUMPRODUCT((Discounting!$A$8:$A$17=$C$4:$L$4)*Discounting!$D$8:$D$17*$C$11:$L$11)"
    );
    let down = case(Direction::Down, false);
    let a = appraisal(&down);
    let o = outcomes(&down, &a);
    let layout = Layout::new(&a, &o, &names);
    assert_eq!(
        pv_expression(&a, &o, &layout, 1, 1, "It's a liner").unwrap(),
        "SUMPRODUCT($K$3:$K$12,Discounting!$D$8:$D$17)"
    );
    let writes = target_writes(&a, &o, &layout, 1, &a.choices[1].targets[0], true);
    assert_eq!(
        formula(&writes[0]),
        "-1000*(1+$F$1)*J3*INDEX(Discounting!$D$8:$D$17,MATCH($D3,Discounting!$A$8:$A$17,0))"
    );
}

#[test]
fn totals_come_from_the_table_and_use_increments() {
    let case = case(Direction::Across, true);
    let (a, names) = (appraisal(&case), SheetNames::choose(&[]));
    let o = outcomes(&case, &a);
    let layout = Layout::new(&a, &o, &names);
    // One block (A to D) and a gap: the table starts at F, present values stand in K. The first option
    // has three streams, three sums, three increments and three measures in rows 8 to 19.
    let role = |role: TargetRole| a.choices[1].targets.iter().find(|t| t.role == role).unwrap();
    let npv = target_writes(&a, &o, &layout, 1, role(TargetRole::Npv), true);
    assert_eq!(
        npv[0],
        CellWrite::Formula("Discounting!$K$29".into(), Cached::Number(o[1].increment.unwrap().npv))
    );
    let net = target_writes(&a, &o, &layout, 1, role(TargetRole::PvTotal(None)), true);
    assert_eq!(net[0], CellWrite::Formula("Discounting!$K$26".into(), Cached::Number(o[1].absolute.npv)));
    let ratio = target_writes(&a, &o, &layout, 0, role(TargetRole::Ratio), false);
    assert_eq!(ratio[0], CellWrite::Text("no ratio: costs over the baseline are not positive".into()));
    let irr = target_writes(&a, &o, &layout, 1, role(TargetRole::Irr), true);
    assert_eq!(irr[0], CellWrite::Number(o[1].irr[0]), "rates of return are plain numbers");
    let none = target_writes(&a, &o, &layout, 0, role(TargetRole::Irr), true);
    assert_eq!(none[0], CellWrite::Text("none between -50% and 100%".into()));
}

#[test]
fn factor_cells_that_disagree_are_not_used() {
    let case = case(Direction::Across, true);
    let mut a = appraisal(&case);
    let o = outcomes(&case, &a);
    let layout = Layout::new(&a, &o, &SheetNames::choose(&[]));
    let own = "INDEX(Discounting!$D$8:$D$17,MATCH(D$4,Discounting!$A$8:$A$17,0))";
    for (held, used) in [
        (Held::Formula { text: "1/1.04".into(), value: Some(1.0 / 1.04), shown: None }, false),
        (Held::Formula { text: "1/1.035".into(), value: Some(1.0 / 1.035), shown: None }, true),
        (Held::Formula { text: own.into(), value: None, shown: None }, true),
        (Held::Text("n/a".into()), false),
    ] {
        a.choices[1].targets[0].held[1] = held.clone();
        let text = pv_expression(&a, &o, &layout, 1, 1, "It's a liner").unwrap();
        assert_eq!(text.contains("$C$5:$L$5"), used, "{held:?}");
    }
}

#[test]
fn a_formula_that_would_be_too_long_gives_way_to_the_table() {
    let case = case(Direction::Across, true);
    let mut a = appraisal(&case);
    let o = outcomes(&case, &a);
    // A sheet name is at most 31 characters; the uplift's is stretched here to reach the limit.
    a.choices[1].streams[0].uplift.at.as_mut().unwrap().sheet = "x".repeat(9_000);
    let layout = Layout::new(&a, &o, &SheetNames::choose(&[]));
    assert_eq!(pv_expression(&a, &o, &layout, 1, 0, "S"), None);
    let total =
        a.choices[1].targets.iter().find(|t| t.role == TargetRole::PvTotal(Some("works".into()))).unwrap();
    let writes = target_writes(&a, &o, &layout, 1, total, true);
    assert_eq!(formula(&writes[0]), "Discounting!$K$21");
}

#[test]
fn options_share_a_block_only_where_everything_agrees() {
    let case = case(Direction::Across, true);
    let mut a = appraisal(&case);
    let mut o = outcomes(&case, &a);
    let names = SheetNames::choose(&[]);
    assert_eq!(Layout::new(&a, &o, &names).blocks.len(), 1);
    o[1].timing = Timing { flows: Position::Middle, base: Position::End };
    assert_eq!(Layout::new(&a, &o, &names).blocks.len(), 2);
    o[1].timing = o[0].timing;
    a.axes[1].labels.pop();
    assert_eq!(Layout::new(&a, &o, &names).blocks.len(), 2);
}
