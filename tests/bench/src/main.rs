//! Benchmarks: factors and calls per second, draws, cells of LibreOffice, filling workbooks of a million cells and a
//! shelf of a thousand small ones.
//! `bash tests/bench/run` writes RESULTS.md.

/// The large workbooks, shared with the tests of the workbook crate.
#[path = "../../workbook/large.rs"]
mod books;
mod calc;
mod calls;
mod draws;
mod shelf;

use std::path::Path;
use std::time::{Duration, Instant};

use hence_core::{Basis, Catalogue, Where};
use hence_workbook::fill::{FillRequest, fill_file};

const OFFSETS: usize = 1_000_000;

fn main() {
    let args: Vec<String> = std::env::args().collect();
    match args.get(1).map(String::as_str) {
        Some("draws") => draws::draws(),
        // A fill in a process of its own, so that its peak memory is its own.
        Some("fill") => fill(Path::new(&args[2])),
        Some("calc") => calc::calc(),
        Some("shelf") => shelf::shelf(),
        Some("make-shelf") => shelf::make(Path::new(&args[2]), args[3].parse().expect("workbooks")),
        Some("make") => {
            books::make(
                Path::new(&args[2]),
                args[3].parse().expect("sheets"),
                args[4].parse().expect("cells"),
            );
        }
        _ => {
            factors();
            calls::calls();
            draws::draws();
            calc::calc();
            fills();
            shelf::shelf();
        }
    }
}

/// The shortest of some runs: the one that was disturbed least.
fn best(runs: usize, mut work: impl FnMut()) -> Duration {
    (0..runs)
        .map(|_| {
            let start = Instant::now();
            work();
            start.elapsed()
        })
        .min()
        .expect("at least one run")
}

fn factors() {
    println!("| curve | factors per second | ns per factor |");
    println!("| --- | --- | --- |");
    let offsets: Vec<f64> = (0..OFFSETS).map(|i| 300.0 * (i as f64 + 0.5) / OFFSETS as f64).collect();
    let mut out = vec![0.0; OFFSETS];
    for line in [
        "3.5%",
        "3.5% continuous",
        "3.5% to 30, 3% to 75, 2.5% to 125, 2% to 200, 1.5% to 300, 1% after",
        "gamma mean 4% sd 3%",
        "0.5 of (1%), 0.5 of (7%)",
    ] {
        let basis = Basis::parse(line, &Catalogue::builtin()).expect("a rate line");
        let curve = basis.curve(&Where::default()).expect("a curve");
        let time = best(5, || curve.factors(&offsets, &mut out).expect("offsets in the domain"));
        let ns = time.as_nanos() as f64 / OFFSETS as f64;
        println!("| {line} | {:.1} million | {ns:.1} |", 1e3 / ns);
    }
    println!();
}

fn fills() {
    println!("| workbook | file | fill | peak memory |");
    println!("| --- | --- | --- | --- |");
    let folder = tempfile::tempdir().expect("a temporary folder");
    for (sheets, what) in [
        (50, "a million cells on 50 sheets, the target a small sheet"),
        (1, "a million cells on the target sheet"),
    ] {
        let path = folder.path().join(format!("{sheets}.xlsx"));
        books::make(&path, sheets, 1_000_000);
        let program = std::env::current_exe().expect("this program");
        let output = std::process::Command::new(program).arg("fill").arg(&path).output().expect("it runs");
        assert!(output.status.success(), "{}", String::from_utf8_lossy(&output.stderr));
        let size = std::fs::metadata(&path).expect("the file").len() as f64 / 1e6;
        println!("| {what} | {size:.1} MB | {}", String::from_utf8_lossy(&output.stdout).trim());
    }
}

/// Fills one workbook and prints seconds and peak memory.
fn fill(path: &Path) {
    let output = path.with_extension("audited.xlsx");
    let start = Instant::now();
    fill_file(path, &output, &FillRequest::default(), &Catalogue::builtin(), true).expect("it can be filled");
    println!("{:.2} s | {:.0} MB |", start.elapsed().as_secs_f64(), peak_memory() as f64 / 1e6);
}

/// The largest resident size of this process so far, in bytes.
fn peak_memory() -> u64 {
    // SAFETY: an all-zero rusage is valid, and getrusage writes only into it.
    let usage = unsafe {
        let mut usage: libc::rusage = std::mem::zeroed();
        libc::getrusage(libc::RUSAGE_SELF, &mut usage);
        usage
    };
    usage.ru_maxrss as u64 * if cfg!(target_os = "macos") { 1 } else { 1024 }
}
