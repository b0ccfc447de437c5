//! Published rates and the time preference, hazard, elasticity and growth they are made of.

use crate::tables::{Table, made};
use hence_core::{Band, Compounding, Spec, ramsey_rate};

#[test]
fn published_rates_from_their_parts() {
    let table = Table::new("ramsey_components.csv", include_str!("ramsey_components.csv"));
    let mut checked = 0;
    for row in table.rows() {
        let (preference, hazard) = (row.number("delta"), row.number("L_catastrophe"));
        let (elasticity, growth) = (row.number("eta"), row.number("g"));
        row.agrees(ramsey_rate(preference + hazard, elasticity, growth).unwrap(), "published_rate", 1e-15);
        let curve = made(&Spec::Ramsey {
            preference,
            hazard,
            elasticity,
            growth: vec![Band { value: growth, to: None }],
            exact: false,
            compounding: Compounding::Yearly,
        });
        row.agrees(curve.mean_rate(100.0).unwrap(), "published_rate", 1e-15);
        checked += 2;
    }
    table.checked(checked, 2 * 7);
}
