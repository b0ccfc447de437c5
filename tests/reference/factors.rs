//! Published factor tables: single payments, annuities, capital recovery, gradients; positions within the year.

use crate::tables::{Table, flat, made};
use hence_core::{Curve, Position, Timing, dot, sum};

/// The factors of years 1 to n.
fn years(curve: &Curve, n: u32, position: Position) -> Vec<f64> {
    let timing = Timing { flows: position, base: Position::End };
    (1..=n).map(|year| curve.timed_factor(f64::from(year), timing).unwrap()).collect()
}

/// A factor by its usual symbol: P present, F future, A yearly amount, G yearly increase from year 2.
fn factor(symbol: &str, rate: f64, n: u32) -> f64 {
    let curve = made(&flat(rate));
    let end = f64::from(n);
    let annuity = sum(&years(&curve, n, Position::End));
    // Compounding to year n is discounting to a base n years later: offsets -(n-1) to 0.
    let future = || sum(&(0..n).map(|k| curve.factor(-f64::from(k)).unwrap()).collect::<Vec<_>>());
    let gradient = || {
        let increases: Vec<f64> = (0..n).map(f64::from).collect();
        dot(&increases, &years(&curve, n, Position::End))
    };
    match symbol {
        "P/F" => curve.factor(end).unwrap(),
        "F/P" => curve.factor(-end).unwrap(),
        "P/A" => annuity,
        "A/P" => 1.0 / annuity,
        "F/A" => future(),
        "A/F" => 1.0 / future(),
        "P/G" => gradient(),
        "A/G" => gradient() / annuity,
        other => panic!("{other} is not a factor"),
    }
}

#[test]
fn published_factor_tables() {
    let table = Table::new("factor_tables.csv", include_str!("factor_tables.csv"));
    let (mut published, mut recomputed) = (0, 0);
    for row in table.rows() {
        let symbol = row.text("factor");
        let found = factor(symbol, row.number("rate"), row.number("n") as u32);
        // The recomputed gradients were taken from a closed form that cancels some digits.
        row.agrees(found, "recomputed", if symbol.ends_with('G') { 1e-9 } else { 1e-12 * found.max(1.0) });
        recomputed += 1;
        if row.text("agrees") == "yes" {
            // Half of the last printed decimal, and nothing for the binary form of a tie.
            row.agrees(found, "published", 0.5 * 10f64.powi(-(row.number("decimals") as i32)) + 1e-12);
            published += 1;
        }
    }
    table.checked(recomputed + published, 505 + 456);
}

#[test]
fn positions_within_the_year() {
    let table = Table::new("midyear.csv", include_str!("midyear.csv"));
    let mut checked = 0;
    for row in table.rows() {
        let curve = made(&flat(row.number("rate")));
        for (flows, column) in [
            (Position::End, "end_of_year"),
            (Position::Middle, "half_year_exponent"),
            (Position::Start, "start_of_year"),
            (Position::Averaged, "mean_of_start_and_end"),
        ] {
            let timing = Timing { flows, base: Position::End };
            row.agrees(
                curve.timed_factor(row.number("year"), timing).unwrap(),
                column,
                row.number("tolerance"),
            );
            checked += 1;
        }
    }
    table.checked(checked, 4 * 49);
}

/// The statute takes the mean of the annuities paid at the start and at the end of the year. Its last line, 18.600
/// for any longer term, is above the limit of its own formula rounded to three decimals and is left out.
#[test]
fn the_statutory_annuity_paid_in_the_middle_of_the_year() {
    let table = Table::new("bewg_9a.csv", include_str!("bewg_9a.csv"));
    let mut checked = 0;
    for row in table.rows() {
        let curve = made(&flat(row.number("rate")));
        let annuity = |position| sum(&years(&curve, row.number("n") as u32, position));
        let averaged = annuity(Position::Averaged);
        row.agrees(averaged, "published", row.number("tolerance"));
        row.agrees(averaged, "recomputed_mean_of_due_and_immediate", 1e-12);
        row.agrees(annuity(Position::Middle), "half_year_exponent_variant", 1e-12);
        row.agrees(annuity(Position::End), "end_of_year", 1e-12);
        row.agrees(annuity(Position::Start), "start_of_year", 1e-12);
        checked += 5;
    }
    table.checked(checked, 5 * 101);
}
