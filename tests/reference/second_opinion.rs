//! General-purpose libraries on the same questions: every row of second_opinion.csv, which second_opinion.py makes with
//! mpmath and numpy.

use std::path::{Path, PathBuf};
use std::process::Command;

use crate::tables::{Row, Table, flat, made};
use hence_core::{Basis, Catalogue, Curve, IRR_INTERVAL, Where, internal_rates, present_value};

const TABLE: &str = include_str!("second_opinion.csv");

fn table() -> Table {
    Table::new("second_opinion.csv", TABLE)
}

/// How many doubles lie between two numbers of one sign.
fn ulps(a: f64, b: f64) -> u64 {
    if a == b {
        return 0;
    }
    assert!(a.is_finite() && b.is_finite() && (a < 0.0) == (b < 0.0), "{a} {b}");
    a.to_bits().abs_diff(b.to_bits())
}

#[track_caller]
fn near(what: &str, row: &Row, found: f64, column: &str, most: u64) {
    let expected = row.number(column);
    let apart = ulps(found, expected);
    assert!(
        apart <= most,
        "{what}, {column}: {found} is {apart} doubles from {expected}, allowed {most} ({})",
        row.text("line")
    );
}

/// Factors and rates are rounded once by the table and once here: at most two units in the last place apart.
#[test]
fn curves_agree_with_arbitrary_precision() {
    let catalogue = Catalogue::builtin();
    let table = table();
    let mut comparisons = 0;
    let mut curve: Option<(&str, Curve)> = None;
    for row in table.rows().filter(|row| row.text("what") == "curve") {
        let line = row.text("line");
        if curve.as_ref().is_none_or(|(made, _)| *made != line) {
            let basis = Basis::parse(line, &catalogue).unwrap_or_else(|error| panic!("{line}: {error}"));
            curve = Some((line, basis.curve(&Where::default()).expect("a curve")));
        }
        let (_, curve) = curve.as_ref().expect("a curve");
        let t = row.number("offset");
        let what = format!("{line} at {t}");
        near(&what, &row, curve.factor(t).expect("a factor"), "factor", 2);
        near(&what, &row, curve.mean_rate(t).expect("a rate"), "mean_rate", 2);
        comparisons += 2;
        if row.optional("forward_rate").is_some() {
            near(&what, &row, curve.forward_rate(t).expect("a rate"), "forward_rate", 2);
            comparisons += 1;
        }
    }
    table.checked(comparisons, CURVES);
}

/// Rows of curves with a factor and a mean rate; of 17 curves, forward rates at 11 whole offsets.
const CURVES: usize = 2 * 362 + 17 * 11;

#[test]
fn present_values_and_rates_of_return_agree_with_arbitrary_precision() {
    let table = table();
    let mut comparisons = 0;
    for row in table.rows().filter(|row| row.text("what") == "flows") {
        let numbers = |column: &str| -> Vec<f64> {
            row.text(column).split_whitespace().map(|x| x.parse().expect("a number")).collect()
        };
        let flows = numbers("flows");
        let offsets: Vec<f64> = (0..flows.len()).map(|t| t as f64).collect();
        let curve = made(&flat(row.number("line")));
        let npv = present_value(&curve, &offsets, &flows).expect("a value");
        // Each factor may be two units off; the sum adds next to nothing.
        let gross: f64 =
            offsets.iter().zip(&flows).map(|(&t, x)| x.abs() * curve.factor(t).expect("a factor")).sum();
        row.agrees(npv, "npv", 2.0 * f64::EPSILON * gross);
        let found = internal_rates(&offsets, &flows, IRR_INTERVAL).expect("rates");
        let expected = numbers("rates_of_return");
        assert_eq!(found.unresolved, [], "{flows:?}");
        assert_eq!(found.rates.len(), expected.len(), "{flows:?}");
        for (rate, expected) in found.rates.iter().zip(&expected) {
            assert!(ulps(*rate, *expected) <= 2, "{rate} {expected} of {flows:?}");
        }
        comparisons += 1 + expected.len();
    }
    table.checked(comparisons, FLOWS);
}

/// Vectors of flows, and their rates of return.
const FLOWS: usize = 30 + 42;

/// A Python with both libraries: the one of HENCE_PYTHON, else `python3`.
fn python() -> Option<PathBuf> {
    let python = PathBuf::from(std::env::var_os("HENCE_PYTHON").unwrap_or_else(|| "python3".into()));
    let works = Command::new(&python).args(["-c", "import numpy, mpmath"]).output();
    if works.is_ok_and(|output| output.status.success()) {
        return Some(python);
    }
    let message =
        "no Python with numpy and mpmath (HENCE_PYTHON): the table was not made again, this test did not run";
    assert!(std::env::var_os("HENCE_REQUIRE_TOOLS").is_none(), "{message}");
    eprintln!("{message}");
    None
}

#[test]
fn the_table_is_what_its_script_makes() {
    let Some(python) = python() else { return };
    let script = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/reference/second_opinion.py");
    let path = std::env::temp_dir().join(format!("second-opinion-{}.csv", std::process::id()));
    let run = Command::new(python).arg(script).arg(&path).output().expect("the script runs");
    assert!(run.status.success(), "{}", String::from_utf8_lossy(&run.stderr));
    let made = std::fs::read_to_string(&path).expect("the table");
    std::fs::remove_file(&path).expect("the table was there");
    for (i, (new, old)) in made.lines().zip(TABLE.lines()).enumerate() {
        assert_eq!(new, old, "line {}", i + 1);
    }
    assert_eq!(made, TABLE);
}
