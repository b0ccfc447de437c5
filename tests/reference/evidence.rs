//! Elasticity from tax rates and equity weights.

use crate::tables::Table;
use hence_core::{elasticity_from_taxes, equity_weight};

#[test]
fn elasticity_by_equal_sacrifice() {
    let table = Table::new("equal_sacrifice.csv", include_str!("equal_sacrifice.csv"));
    let mut checked = 0;
    for row in table.rows() {
        let (marginal, average) = (row.number("marginal_tax_rate"), row.number("average_tax_rate"));
        row.agrees(elasticity_from_taxes(marginal, average).unwrap(), "eta", 1e-12);
        checked += 1;
    }
    table.checked(checked, 5);
}

#[test]
fn weights_by_income() {
    let table = Table::new("equity_weights.csv", include_str!("equity_weights.csv"));
    let mut checked = 0;
    for row in table.rows() {
        let (income, reference) = (row.number("group_income"), row.number("reference_income"));
        let weight = equity_weight(income, reference, row.number("elasticity")).unwrap();
        row.agrees(weight, "recomputed", 1e-12);
        checked += 1;
    }
    table.checked(checked, 6);
}
