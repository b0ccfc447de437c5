//! 100,000 factors in the cells of a real LibreOffice: each by a call of its own, by a built-in function of as many
//! arguments, and all by one call.

/// The throw-away LibreOffice of the tests.
#[path = "../../addin/calc/office.rs"]
#[allow(dead_code)]
mod office;

use std::path::Path;
use std::process::Command;

const CELLS: usize = 100_000;

pub fn calc() {
    let root = Path::new(env!("CARGO_MANIFEST_DIR")).join("../..");
    let target = tempfile::tempdir().expect("a temporary folder");
    let mut build = Command::new("bash");
    build.arg("ffi/addin/build.sh").arg("calc").current_dir(&root);
    if std::env::var_os("CARGO_TARGET_DIR").is_none() {
        build.env("CARGO_TARGET_DIR", target.path());
    }
    let output = build.output().expect("bash runs");
    assert!(output.status.success(), "build.sh: {}", String::from_utf8_lossy(&output.stderr));
    let path = String::from_utf8_lossy(&output.stdout).trim().to_owned();
    let extension = std::fs::read(root.join(path)).expect("the extension");

    println!("| {CELLS} factors in LibreOffice Calc | time | microseconds a factor |");
    println!("| --- | --- | --- |");
    let Some(office) = office::Office::new(None) else {
        println!("| not measured: LibreOffice is not here | | |\n");
        return;
    };
    office.install(&extension).unwrap_or_else(|said| panic!("{said}"));
    for line in office.ask(&["timed", &CELLS.to_string()]).lines() {
        let (name, time) = line.split_once('\t').expect("a name and a time");
        let name = match name {
            "POWER" => "`=POWER(v, A1)` in each cell, a built-in function",
            "cells" => "`=HENCE.FACTOR(D1, A1)` in each cell",
            _ => "`=HENCE.FACTOR(D1, A1:A100000)`, one array formula",
        };
        let time: f64 = time.parse().expect("seconds");
        println!("| {name} | {time:.3} s | {:.2} |", time / CELLS as f64 * 1e6);
    }
    println!();
}
