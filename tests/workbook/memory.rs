//! Large workbooks are filled in little memory: each in a process of its own, whose peak is read from the system.
#![cfg(target_os = "linux")]

use std::path::Path;
use std::process::Command;

use hence_core::Catalogue;
use hence_workbook::fill::{FillRequest, fill_file};

use crate::large;

/// The most that a fill may take, in MB.
const LIMIT: f64 = 150.0;
/// Set in the process that fills one workbook.
const BOOK: &str = "HENCE_TEST_BOOK";

/// The largest resident size of this process so far, in MB.
fn peak() -> f64 {
    let status = std::fs::read_to_string("/proc/self/status").expect("what the system says of this process");
    let line = status.lines().find(|line| line.starts_with("VmHWM:")).expect("its peak");
    let kilobytes = line.split_whitespace().nth(1).expect("a number");
    kilobytes.parse::<f64>().expect("a number") / 1e3
}

#[test]
fn a_million_cells_are_filled_in_little_memory() {
    if let Some(book) = std::env::var_os(BOOK) {
        let book = Path::new(&book);
        let output = book.with_extension("audited.xlsx");
        let report =
            fill_file(book, &output, &FillRequest::default(), &Catalogue::builtin(), true).expect("a fill");
        assert_eq!(report.filled, 201);
        println!("PEAK {}", peak());
        return;
    }
    let folder = tempfile::tempdir().unwrap();
    for sheets in [50, 1] {
        let book = folder.path().join(format!("{sheets}.xlsx"));
        large::make(&book, sheets, 1_000_000);
        let mut child = Command::new(std::env::current_exe().unwrap());
        child.args(["--exact", "memory::a_million_cells_are_filled_in_little_memory", "--nocapture"]);
        let output = child.env(BOOK, &book).output().unwrap();
        let text = String::from_utf8_lossy(&output.stdout);
        assert!(output.status.success(), "{text}{}", String::from_utf8_lossy(&output.stderr));
        let peak: f64 =
            text.lines().find_map(|line| line.split("PEAK ").nth(1)).unwrap().trim().parse().unwrap();
        println!("a million cells on {sheets} sheets: {peak:.0} MB");
        assert!(
            peak < LIMIT,
            "a million cells on {sheets} sheets take {peak:.0} MB, at most {LIMIT} MB are allowed"
        );
    }
}
