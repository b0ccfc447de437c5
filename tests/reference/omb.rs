//! Rates by length of project, interpolated, of the US Office of Management and Budget.

use crate::tables::{Row, Table};
use hence_core::{HorizonRule, Spec, Where};

fn lengths(name: &'static str, text: &'static str) {
    let table = Table::new(name, text);
    let mut checked = 0;
    for kind in ["nominal", "real"] {
        let of = |row: &Row| row.text("kind") == kind;
        let printed = table.rows().filter(|row| of(row) && row.text("provenance") == "seen");
        let points: Vec<(f64, f64)> =
            printed.map(|row| (row.number("project_years"), row.number("rate"))).collect();
        assert_eq!(points.len(), 5);
        let spec = Spec::HorizonPoints { points, rule: HorizonRule::ByLength };
        for row in table.rows().filter(of) {
            let length = row.number("project_years");
            let curve = spec.curve(&Where { base_year: None, length: Some(length) }).unwrap();
            // Interpolated rates are printed to six decimals.
            row.agrees(curve.mean_rate(length).unwrap(), "rate", 5e-7);
            assert_eq!(curve.forward_rate(1.0).unwrap(), curve.forward_rate(length).unwrap(), "one rate");
            checked += 1;
        }
    }
    table.checked(checked, 20);
}

#[test]
fn circular_a94_appendix_c_1999() {
    lengths("omb_a94c_1999.csv", include_str!("omb_a94c_1999.csv"));
}

#[test]
fn circular_a94_appendix_c_2000() {
    lengths("omb_a94c_2000.csv", include_str!("omb_a94c_2000.csv"));
}
