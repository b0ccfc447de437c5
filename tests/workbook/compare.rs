//! Ranks, ties and changes of the best option, on workbooks whose results are worked out here by hand. Figures and names
//! are made up.

use hence_core::{Catalogue, Parameter};
use hence_workbook::compare::{Change, CompareRequest, Comparison, Moved, compare};
use hence_workbook::package::Package;

use crate::small::Small;

/// An option: its name, its costs and its benefits of 2026, 2027 and 2028.
type Way<'a> = (&'a str, [f64; 3], [f64; 3]);

const ALPHA: Way = ("Alpha", [100.0, 0.0, 0.0], [0.0, 0.0, 242.0]);
const BETA: Way = ("Beta", [50.0, 0.0, 0.0], [0.0, 110.0, 0.0]);

fn compared(basis: &str, ways: &[Way]) -> Comparison {
    let mut cells = format!("A1: 'Base | 2026\nA2: 'Rate | '{basis}\nA4: 'Year | 2026 | 2027 | 2028\n");
    let mut names = "hence_base B1, hence_basis B2, hence_years B4:D4".to_owned();
    for (i, (name, costs, benefits)) in ways.iter().enumerate() {
        let (own, next) = (5 + 2 * i, 6 + 2 * i);
        let row = |values: &[f64; 3]| values.map(|x| format!("{x:?}")).join(" | ");
        cells += &format!("A{own}: 'Costs | {}\nA{next}: 'Sales | {}\n", row(costs), row(benefits));
        names += &format!(
            ", hence_cost_works__{name} B{own}:D{own}, hence_benefit_sales__{name} B{next}:D{next}, hence_npv__{name} F{own}"
        );
    }
    let book = Small::default().sheet("Plan", &cells).names(&names);
    let package = Package::from_bytes("small.xlsx", book.bytes()).expect("a package");
    compare(&package, &CompareRequest::default(), &Catalogue::builtin())
        .unwrap_or_else(|error| panic!("{error}"))
}

fn ranks(found: &Comparison) -> Vec<usize> {
    found.sides[0].standings.iter().map(|standing| standing.rank).collect()
}

fn changes(found: &Comparison, parameter: Parameter) -> Vec<&Change> {
    found.changes.iter().filter(|change| change.parameter == parameter).collect()
}

#[test]
fn options_that_differ_by_rounding_alone_share_a_rank() {
    // At 10% Alpha has costs of 100 and benefits of 200: 1e-9 of the gross present value is 3e-7.
    let twin = |more: f64| ("Twin", [100.0, 0.0, 0.0], [0.0, 0.0, 242.0 + 1.21 * more]);
    let near = compared("10%", &[ALPHA, twin(2e-7), BETA]);
    assert_eq!((ranks(&near), near.sides[0].best), (vec![1, 1, 3], None));
    let apart = compared("10%", &[ALPHA, twin(4e-7), BETA]);
    assert_eq!((ranks(&apart), apart.sides[0].best), (vec![2, 1, 3], Some(1)));
}

/// Alpha and Beta are equal where 50 q^2 + 110 q = 242, q = 1 + rate.
fn rate() -> f64 {
    (-110.0 + (110.0f64 * 110.0 + 200.0 * 242.0).sqrt()) / 100.0 - 1.0
}

#[test]
fn a_change_is_found_where_no_line_states_the_middle_beyond() {
    // Half-way from there to an elasticity of 20 the rate is above 100%, which no line states.
    let found = compared("preference 1%, elasticity 1, growth 9%", &[ALPHA, BETA]);
    let [change] = changes(&found, Parameter::Elasticity)[..] else { panic!("{:?}", found.changes) };
    assert!((change.at - (rate() - 0.01) / 0.09).abs() < 1e-12, "{change:?}");
    assert_eq!((&change.from[..], &change.to[..]), (&[0][..], &[1][..]));
}

#[test]
fn the_order_beyond_all_that_a_line_states_follows_from_the_pairs() {
    // At an elasticity of 20 a growth of 4.95% is a rate of 100%, beyond which no line goes; Gamma is the best only at
    // rates above 120%, as Beta and Gamma are equal where 30 = 66/2.2.
    let gamma = ("Gamma", [20.0, 0.0, 0.0], [0.0, 44.0, 0.0]);
    let found = compared("preference 1%, elasticity 20, growth 1%", &[ALPHA, BETA, gamma]);
    let growths = changes(&found, Parameter::Growth);
    let due = [(rate() - 0.01) / 20.0, (1.2 - 0.01) / 20.0];
    assert_eq!(growths.len(), 2, "{growths:?}");
    for (change, (due, (from, to))) in growths.iter().zip(due.into_iter().zip([(0, 1), (1, 2)])) {
        assert!((change.at - due).abs() < 1e-12, "{change:?}, due {due}");
        assert_eq!((&change.from[..], &change.to[..]), (&[from][..], &[to][..]));
    }
}

#[test]
fn equals_are_told_together_where_another_overtakes_them() {
    let twin = ("Twin", ALPHA.1, ALPHA.2);
    let found = compared("10%", &[ALPHA, twin, BETA]);
    let [change] = changes(&found, Parameter::Rate)[..] else { panic!("{:?}", found.changes) };
    assert!((change.at - rate()).abs() < 1e-12);
    assert_eq!((&change.from[..], &change.to[..]), (&[0, 1][..], &[2][..]));
    let entry = found.switching.iter().find(|entry| {
        entry.option == 0 && entry.against == Some(1) && entry.moved == Moved::Parameter(Parameter::Rate)
    });
    assert_eq!(entry.unwrap().note.as_deref(), Some("the two are equal at every value"));
}
