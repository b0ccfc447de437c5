//! `hence curve`: factors and rates of a curve at many offsets.

use std::path::PathBuf;

use hence_core::{Basis, Where};

use crate::args::Curve;
use crate::numbers::{shortest, shortest_or_blank};
use crate::terminal::{self, Terminal};
use crate::{Failure, Outcome};

struct Row {
    t: f64,
    factor: f64,
    forward: Option<f64>,
    mean: Option<f64>,
    instantaneous: Option<f64>,
}

/// What the three forms of a rate at t are, as they are called in the headings.
const FORMS: &str = "forward_rate: of the year that ends at t, compounded yearly, D(t-1)/D(t) - 1\n\
                     mean_rate: from the base to t, compounded yearly, D(t)^(-1/t) - 1\n\
                     instantaneous_rate: at t, compounded continuously, -D'(t)/D(t)\n";

/// Prints columns t, factor, forward_rate (of the year that ends at t) and mean_rate (to t); in the table and in JSON also
/// instantaneous_rate.
pub fn run(args: &Curve, schedules: &Option<PathBuf>, terminal: &Terminal) -> Result<Outcome, Failure> {
    let catalogue = super::catalogue(schedules)?;
    let basis = Basis::parse(&args.line, &catalogue).map_err(|e| super::typed(&e, &args.line))?;
    let offsets: Vec<f64> =
        if args.at.is_empty() { (0..=args.to).map(f64::from).collect() } else { args.at.clone() };
    let longest = offsets.iter().copied().fold(0.0, f64::max);
    let at = Where { base_year: args.base, length: Some(args.length.unwrap_or(longest)) };
    let curve = basis.curve(&at).map_err(|e| super::typed(&e, &args.line))?;
    let mut rows = Vec::with_capacity(offsets.len());
    for t in offsets {
        let factor = curve.factor(t).map_err(|e| super::typed(&e, &args.line))?;
        let forward = if t > 0.0 { curve.forward_rate(t).ok() } else { None };
        let (mean, instantaneous) = (curve.mean_rate(t).ok(), curve.instantaneous_rate(t).ok());
        rows.push(Row { t, factor, forward, mean, instantaneous });
    }
    let warnings: Vec<String> = basis.warnings().into_iter().chain(curve.warnings()).collect();
    for warning in &warnings {
        terminal.say("warning", &format!("{}: {warning}", basis.canonical()));
    }
    let text = if args.document.json {
        json(&basis, &warnings, &rows)
    } else if args.csv {
        csv(&rows)
    } else {
        table(&basis, &rows)
    };
    terminal::print(&text)?;
    Ok(Outcome::Done)
}

fn csv(rows: &[Row]) -> String {
    let mut text = String::from("t,factor,forward_rate,mean_rate\n");
    for row in rows {
        text.push_str(&format!(
            "{},{},{},{}\n",
            shortest(row.t),
            shortest(row.factor),
            shortest_or_blank(row.forward),
            shortest_or_blank(row.mean)
        ));
    }
    text
}

fn json(basis: &Basis, warnings: &[String], rows: &[Row]) -> String {
    let rows: Vec<_> = rows
        .iter()
        .map(|row| {
            serde_json::json!({
                "t": row.t, "factor": row.factor, "forward_rate": row.forward, "mean_rate": row.mean,
                "instantaneous_rate": row.instantaneous
            })
        })
        .collect();
    let document = serde_json::json!({
        "schema": 1, "basis": basis.canonical(), "words": basis.words(), "warnings": warnings, "rows": rows
    });
    format!("{document:#}\n")
}

fn table(basis: &Basis, rows: &[Row]) -> String {
    let mut text = format!(
        "{}\n{}\n{}\n\n{FORMS}\n{:>8}  {:>22}  {:>22}  {:>22}  {:>22}\n",
        basis.canonical(),
        basis.words(),
        hence_core::CAUTION,
        "t",
        "factor",
        "forward_rate",
        "mean_rate",
        "instantaneous_rate"
    );
    for row in rows {
        text.push_str(&format!(
            "{:>8}  {:>22}  {:>22}  {:>22}  {:>22}\n",
            shortest(row.t),
            shortest(row.factor),
            shortest_or_blank(row.forward),
            shortest_or_blank(row.mean),
            shortest_or_blank(row.instantaneous)
        ));
    }
    text
}
