//! Every row of the reference tables through C and through Rust: equal to the last bit.
//!
//! The sources stand in the tables of `tests/reference/`, whose own tests compare the values. Here a row says which
//! curves, offsets, flows and parameters to compare on; the worked examples have a module of their own.

#[path = "../reference/tables.rs"]
#[allow(dead_code)]
mod tables;

use std::collections::BTreeMap;

use hence_core::{
    Basis, Catalogue, Curve, IRR_INTERVAL, Timing, Where, annual_equivalent, internal_rates, percent,
    present_value,
};
pub use tables::Table;
use tables::{Row, bands};

use crate::library::root;
use crate::loaded;

macro_rules! table {
    ($name:literal) => {
        $crate::reference::Table::new($name, include_str!(concat!("../reference/", $name)))
    };
}
pub(crate) use table;

/// The same basis in both.
pub struct Both {
    pub rust: Curve,
    pub c: loaded::Basis,
}

impl Both {
    pub fn new(line: &str) -> Self {
        Both::at(line, 0.0)
    }

    /// A length of 0 is none.
    fn at(line: &str, length: f64) -> Self {
        let at = Where { base_year: None, length: (length != 0.0).then_some(length) };
        let basis = Basis::parse(line, &Catalogue::builtin()).unwrap_or_else(|e| panic!("{line}: {e}"));
        Both { rust: basis.curve(&at).unwrap(), c: loaded::Basis::parse_at(line, 0, length) }
    }

    /// Factors at all offsets; rates at those from year 1 on.
    fn along(&self, offsets: &[f64]) {
        let mut factors = vec![0.0; offsets.len()];
        self.rust.factors(offsets, &mut factors).unwrap();
        equal(&factors, &self.c.factors(offsets));
        let instantaneous: Vec<f64> =
            offsets.iter().map(|t| self.rust.instantaneous_rate(*t).unwrap()).collect();
        equal(&instantaneous, &self.c.instantaneous_rates(offsets));
        let years: Vec<f64> = offsets.iter().copied().filter(|t| *t >= 1.0).collect();
        let each = |f: &dyn Fn(f64) -> hence_core::Result<f64>| -> Vec<f64> {
            years.iter().map(|t| f(*t).unwrap()).collect()
        };
        equal(&each(&|t| self.rust.forward_rate(t)), &self.c.forward_rates(&years));
        equal(&each(&|t| self.rust.mean_rate(t)), &self.c.mean_rates(&years));
    }

    fn annual(&self, years: u32) {
        let (rust, _) = annual_equivalent(&self.rust, 1e6, years).unwrap();
        equal(&[rust], &[self.c.annual_equivalent(1e6, years as i32)]);
    }
}

#[track_caller]
pub fn equal(rust: &[f64], c: &[f64]) {
    assert_eq!(rust.len(), c.len());
    for (i, (a, b)) in rust.iter().zip(c).enumerate() {
        assert!(a.is_finite() && a.to_bits() == b.to_bits(), "[{i}]: Rust gives {a:?}, C {b:?}");
    }
}

fn to(n: f64) -> Vec<f64> {
    (0..=n as u32).map(f64::from).collect()
}

/// The rate line of a published schedule.
fn line_of(schedule: &str, rule: &str) -> String {
    let one = |band: &hence_core::Band| match band.to {
        Some(hence_core::Edge::Offset(edge)) => format!("{} to {edge}", percent(band.value)),
        _ => format!("{} after", percent(band.value)),
    };
    let bands = bands(schedule);
    match bands.as_slice() {
        [only] if only.to.is_none() => percent(only.value),
        all => all.iter().map(one).collect::<Vec<_>>().join(", ") + rule,
    }
}

#[test]
fn factor_tables() {
    let table = table!("factor_tables.csv");
    let mut rows = 0;
    for row in table.rows() {
        let (basis, n) = (Both::new(&percent(row.number("rate"))), row.number("n"));
        basis.along(&to(n));
        basis.along(&to(n).into_iter().map(|t| -t).collect::<Vec<_>>());
        basis.annual(n as u32);
        rows += 1;
    }
    table.checked(rows, 505);
    let table = table!("bewg_9a.csv");
    let mut rows = 0;
    for row in table.rows() {
        let (basis, n) = (Both::new(&percent(row.number("rate"))), row.number("n"));
        basis.along(&to(n));
        basis.along(&to(n).into_iter().map(|t| t + 0.5).collect::<Vec<_>>());
        basis.annual(n as u32);
        rows += 1;
    }
    table.checked(rows, 101);
}

#[test]
fn positions_within_the_year() {
    let table = table!("midyear.csv");
    let mut rows = 0;
    for row in table.rows() {
        let basis = Both::new(&percent(row.number("rate")));
        let years = [row.number("year")];
        for timing in ["flows end", "flows middle", "flows start", "flows middle, base start"] {
            let rust: Timing = timing.parse().unwrap();
            let hence_core::TimedOffset::At(offset) = rust.offset(years[0]).unwrap() else {
                panic!("one offset")
            };
            let c = loaded::offsets_from_years(&years, 0.0, timing);
            equal(&[offset], &c);
            basis.along(&c);
        }
        rows += 1;
    }
    table.checked(rows, 49);
}

#[test]
fn schedules() {
    let table = table!("schedule_factors.csv");
    let mut rows = 0;
    let mut made: BTreeMap<&str, [Both; 2]> = BTreeMap::new();
    for row in table.rows() {
        let id = row.text("schedule_id");
        let rules = made
            .entry(id)
            .or_insert_with(|| ["", "; whole horizon by flow"].map(|rule| Both::new(&line_of(id, rule))));
        for basis in rules {
            basis.along(&to(row.number("year")));
        }
        rows += 1;
    }
    table.checked(rows, 344);

    let table = table!("uk_factors.csv");
    let three = [line_of("uk_gb_2003", ""), line_of("uk_gb_2003", "; whole horizon by flow"), "3.5%".into()];
    let mut rows = 0;
    for row in table.rows() {
        for line in &three {
            Both::new(line).along(&[row.number("year")]);
        }
        rows += 1;
    }
    table.checked(rows, 46);

    let table = table!("nz_factors.csv");
    let mut rows = 0;
    for row in table.rows() {
        let lines = match row.text("schedule_id") {
            "nz_2024_noncomm" => vec![
                line_of("nz_2024_noncomm", ""),
                line_of("nz_2024_noncomm", "; whole horizon by flow"),
                "2%".into(),
            ],
            _ => vec!["5%".to_owned()],
        };
        for line in lines {
            Both::new(&line).along(&[row.number("year")]);
        }
        rows += 1;
    }
    table.checked(rows, 6);
}

#[test]
fn rates_by_length_of_project() {
    for table in [table!("omb_a94c_1999.csv"), table!("omb_a94c_2000.csv")] {
        let mut rows = 0;
        for row in table.rows() {
            let printed = table
                .rows()
                .filter(|other| other.text("kind") == row.text("kind") && other.text("provenance") == "seen");
            let points: Vec<String> = printed
                .map(|row| format!("{} at {}", percent(row.number("rate")), row.number("project_years")))
                .collect();
            let line = format!("{}; whole horizon by length, interpolated", points.join(", "));
            Both::at(&line, row.number("project_years")).along(&to(row.number("project_years")));
            rows += 1;
        }
        table.checked(rows, 20);
    }
}

/// The rate line of a row of certainty equivalents.
fn certainty_line(row: &Row) -> String {
    let text = row.text("parameters");
    let parts = text.split([';', ',', ' ']).filter_map(|part| part.split_once('='));
    let given: BTreeMap<&str, f64> =
        parts.filter_map(|(key, value)| Some((key, value.parse().ok()?))).collect();
    let p = |name: &str| percent(given[name]);
    match (row.text("model"), text) {
        ("gamma", _) => format!("gamma mean {} sd {}", p("mean"), p("sd")),
        ("gamma_bands", _) => "gamma mean 4% sd 3%".into(),
        ("two_rate", text) => {
            let high = if text.starts_with("1 or 7") { "7%" } else { "5%" };
            let word = if text.ends_with("annual compounding") { "" } else { " continuous" };
            format!("0.5 of (1%{word}), 0.5 of ({high}{word})")
        }
        ("precautionary_arith_mean", _) => format!(
            "preference {}, elasticity {}, growth {} sd {}; continuous",
            p("delta"),
            given["eta"],
            p("g"),
            p("sigma")
        ),
        ("precautionary_log_mean", _) => format!(
            "preference {}, elasticity {}, log growth {} sd {}",
            p("delta"),
            given["eta"],
            p("mu"),
            p("sigma")
        ),
        ("uncertain_growth", _) => "0.5 of (2% continuous), 0.5 of (6% continuous)".into(),
        other => panic!("{other:?} is not known"),
    }
}

#[test]
fn certainty_equivalents() {
    let table = table!("certainty_equivalents.csv");
    let mut rows = 0;
    for row in table.rows() {
        let t = row.optional("t").unwrap_or(50.0);
        Both::new(&certainty_line(&row)).along(&[t, t + 1.0]);
        rows += 1;
    }
    table.checked(rows, 109);
}

#[test]
fn evidence() {
    let table = table!("ramsey_components.csv");
    let mut rows = 0;
    for row in table.rows() {
        let (rho, eta, g) =
            (row.number("delta") + row.number("L_catastrophe"), row.number("eta"), row.number("g"));
        equal(&[hence_core::ramsey_rate(rho, eta, g).unwrap()], &[loaded::ramsey_rate(rho, eta, g)]);
        for sd in [0.0, 0.036] {
            equal(
                &[hence_core::ramsey_rate_uncertain(rho, eta, g, sd).unwrap()],
                &[loaded::ramsey_rate_uncertain(rho, eta, g, sd)],
            );
        }
        equal(&[hence_core::real_rate(rho + g, g).unwrap()], &[loaded::real_rate(rho + g, g)]);
        rows += 1;
    }
    table.checked(rows, 7);
    let table = table!("equal_sacrifice.csv");
    let mut rows = 0;
    for row in table.rows() {
        let (marginal, average) = (row.number("marginal_tax_rate"), row.number("average_tax_rate"));
        equal(
            &[hence_core::elasticity_from_taxes(marginal, average).unwrap()],
            &[loaded::elasticity_from_taxes(marginal, average)],
        );
        rows += 1;
    }
    table.checked(rows, 5);
    let table = table!("equity_weights.csv");
    let mut rows = 0;
    for row in table.rows() {
        let (income, reference) = (row.number("group_income"), row.number("reference_income"));
        let eta = row.number("elasticity");
        equal(
            &[hence_core::equity_weight(income, reference, eta).unwrap()],
            &[loaded::equity_weight(income, reference, eta)],
        );
        rows += 1;
    }
    table.checked(rows, 6);
}

/// The rows made with arbitrary precision.
#[test]
fn second_opinion() {
    let table = table!("second_opinion.csv");
    let (mut curves, mut streams) = (0, 0);
    for row in table.rows() {
        let basis = Both::new(row.text("line"));
        if row.text("what") == "curve" {
            basis.along(&[row.number("offset")]);
            curves += 1;
            continue;
        }
        let flows: Vec<f64> = row.text("flows").split([' ', ';']).map(|flow| flow.parse().unwrap()).collect();
        let offsets = to((flows.len() - 1) as f64);
        let rust = present_value(&basis.rust, &offsets, &flows).unwrap();
        equal(&[rust], &[basis.c.present_value(&offsets, &flows)]);
        let rust = internal_rates(&offsets, &flows, IRR_INTERVAL).unwrap();
        assert!(rust.unresolved.is_empty(), "{flows:?}");
        equal(&rust.rates, &loaded::irr_all(&offsets, &flows, IRR_INTERVAL));
        streams += 1;
    }
    assert_eq!((curves, streams), (362, 30));
    table.checked(curves + streams, table.rows().count());
}

/// A table that is added to `tests/reference/` is compared here too, or named with the reason why it cannot be.
#[test]
fn every_table_is_compared() {
    // The bands are the lines of the schedules.
    const ELSEWHERE: [&str; 1] = ["schedule_bands.csv"];
    let folder = std::fs::read_dir(root().join("tests/reference")).expect("tests/reference");
    let names = folder.map(|entry| entry.expect("an entry").file_name().into_string().expect("a name"));
    let tables: Vec<String> = names.filter(|name| name.ends_with(".csv")).collect();
    assert!(tables.len() > 10, "{tables:?}");
    for name in tables {
        let read = [include_str!("reference.rs"), include_str!("examples.rs")]
            .iter()
            .any(|source| source.contains(&format!("table!(\"{name}\")")));
        assert!(read || ELSEWHERE.contains(&name.as_str()), "{name} is not compared through C");
    }
}
