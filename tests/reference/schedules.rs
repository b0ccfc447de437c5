//! Factors of published declining schedules, by each way of applying their rates.

use crate::tables::{Table, bands, flat, made};
use hence_core::{Curve, HorizonRule, Spec, sum};

fn forward(schedule: &str) -> Curve {
    made(&Spec::Bands { bands: bands(schedule), edges_from: None })
}

fn whole_horizon(schedule: &str) -> Curve {
    made(&Spec::HorizonSteps { bands: bands(schedule), rule: HorizonRule::ByFlow })
}

#[test]
fn ten_schedules_at_and_around_every_edge() {
    let table = Table::new("schedule_factors.csv", include_str!("schedule_factors.csv"));
    let mut checked = 0;
    let mut current = ("", None);
    for row in table.rows() {
        let id = row.text("schedule_id");
        if current.0 != id {
            current = (id, Some(forward(id)));
        }
        let curve = current.1.as_ref().unwrap();
        let (year, tolerance) = (row.number("year"), row.number("tolerance"));
        row.agrees(curve.factor(year).unwrap(), "factor", tolerance);
        let years: Vec<f64> = (1..=year as u32).map(f64::from).collect();
        let mut factors = vec![0.0; years.len()];
        curve.factors(&years, &mut factors).unwrap();
        row.agrees(sum(&factors), "pv_of_1_per_year_years_1_to_t", tolerance);
        checked += 2;
        if year > 0.0 {
            assert_eq!(curve.forward_rate(year).unwrap(), row.number("forward_rate_of_year"), "{id}, {year}");
            row.agrees(curve.mean_rate(year).unwrap(), "equivalent_constant_rate", tolerance);
            checked += 2;
        }
    }
    // 344 rows, ten of which are year 0 and have no rates.
    table.checked(checked, 4 * 344 - 2 * 10);
}

#[test]
fn the_published_uk_factor_table() {
    let table = Table::new("uk_factors.csv", include_str!("uk_factors.csv"));
    let (forward, whole, flat) = (forward("uk_gb_2003"), whole_horizon("uk_gb_2003"), made(&flat(0.035)));
    let mut checked = 0;
    for row in table.rows() {
        let year = row.number("year");
        let factor = forward.factor(year).unwrap();
        row.agrees(factor, "published_factor", row.number("tolerance"));
        row.agrees(factor, "recomputed_forward", 1e-12);
        row.agrees(whole.factor(year).unwrap(), "recomputed_whole_horizon", 1e-12);
        row.agrees(flat.factor(year).unwrap(), "recomputed_flat_035", 1e-12);
        checked += 4;
    }
    table.checked(checked, 4 * 46);
}

#[test]
fn the_printed_new_zealand_factors() {
    let table = Table::new("nz_factors.csv", include_str!("nz_factors.csv"));
    let mut checked = 0;
    for row in table.rows() {
        let (by_year, whole, first) = match row.text("schedule_id") {
            "nz_2024_noncomm" => {
                (forward("nz_2024_noncomm"), whole_horizon("nz_2024_noncomm"), made(&flat(0.02)))
            }
            "nz_pre2024_default" => (made(&flat(0.05)), made(&flat(0.05)), made(&flat(0.05))),
            other => panic!("{other} is not known"),
        };
        let year = row.number("year");
        row.agrees(by_year.factor(year).unwrap(), "published_factor", row.number("tolerance"));
        row.agrees(by_year.factor(year).unwrap(), "recomputed_forward", 1e-12);
        row.agrees(whole.factor(year).unwrap(), "recomputed_whole_horizon", 1e-12);
        row.agrees(first.factor(year).unwrap(), "recomputed_flat_first_rate", 1e-12);
        checked += 4;
    }
    table.checked(checked, 4 * 6);
}
