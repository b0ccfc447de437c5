//! Benchmarks: factors and calls per second, draws, cells of LibreOffice, filling workbooks of a million cells and a
//! shelf of a thousand small ones.
//! `bash tests/bench/run` writes RESULTS.md.

mod arrays;
/// The large workbooks, shared with the tests of the workbook crate.
#[path = "../../workbook/large.rs"]
mod books;

mod calc;
mod calls;
mod draws;
mod shelf;

use std::io::Write;
use std::path::Path;
use std::process::{Command, Stdio};
use std::time::{Duration, Instant};

use hence_core::{Basis, Catalogue, Where};
use hence_workbook::fill::{FillRequest, fill_file};

const OFFSETS: usize = 1_000_000;

fn main() {
    let args: Vec<String> = std::env::args().collect();
    match args.get(1).map(String::as_str) {
        Some("draws") => draws::draws(),
        Some("arrays") => arrays::arrays(),
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
            arrays::arrays();
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

/// Offsets in years, none whole.
fn fractional() -> Vec<f64> {
    (0..OFFSETS).map(|i| 300.0 * (i as f64 + 0.5) / OFFSETS as f64).collect()
}

/// The lines that a script of this folder prints, in one thread; none where there is no numpy.
fn numpy(script: &str, args: &[String], input: &str) -> Vec<String> {
    let python = std::env::var_os("HENCE_PYTHON").unwrap_or_else(|| "python3".into());
    let asked = Command::new(&python).args(["-c", "import numpy"]).stderr(Stdio::null()).status();
    if !asked.is_ok_and(|status| status.success()) {
        return Vec::new();
    }
    let mut child = Command::new(&python)
        .arg(Path::new(env!("CARGO_MANIFEST_DIR")).join(script))
        .args(args)
        // One core for the products of matrices too.
        .envs([("OPENBLAS_NUM_THREADS", "1"), ("OMP_NUM_THREADS", "1"), ("MKL_NUM_THREADS", "1")])
        .stdin(Stdio::piped())
        .stdout(Stdio::piped())
        .spawn()
        .expect("Python starts");
    child.stdin.take().expect("a pipe").write_all(input.as_bytes()).expect("Python reads");
    let output = child.wait_with_output().expect("Python ends");
    assert!(output.status.success(), "{script} failed");
    String::from_utf8(output.stdout).expect("text").lines().map(str::to_owned).collect()
}

fn factors() {
    println!("| curve | factors per second | ns per factor |");
    println!("| --- | --- | --- |");
    let offsets = fractional();
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
        let output = Command::new(program).arg("fill").arg(&path).output().expect("it runs");
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
