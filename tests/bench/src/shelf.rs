//! A shelf of 1,000 workbooks of about 100 kB, filled by the command line with one and with two processes at a time.

use std::path::{Path, PathBuf};
use std::process::{Command, Stdio};
use std::time::{Duration, Instant};

use crate::books;

const BOOKS: u32 = 1000;
/// Cells that make a workbook of about 100 kB.
const CELLS: u32 = 27_000;

/// Makes the shelf: no two workbooks are alike.
pub fn make(folder: &Path, workbooks: u32) {
    for n in 0..workbooks {
        let sub = folder.join(format!("region {}", n % 10));
        std::fs::create_dir_all(&sub).expect("a folder");
        books::make(&sub.join(format!("scheme {n:04}.xlsx")), 1, CELLS + 100 * (n % 7));
    }
}

/// The command line: `cargo build --release -p hence-cli` makes it.
fn program() -> PathBuf {
    let built = concat!(env!("CARGO_MANIFEST_DIR"), "/../../target/release/hence");
    std::env::var_os("HENCE_PROGRAM").map_or_else(|| built.into(), PathBuf::from)
}

/// Fills a shelf; the time it takes, and the largest resident size of the process that runs it, in kB.
fn fill(shelf: &Path, out: &Path, jobs: u32) -> (Duration, u64) {
    let _ = std::fs::remove_dir_all(out);
    let mut command = Command::new(program());
    command.arg("fill").arg(shelf).arg("--out").arg(out).arg("--jobs").arg(jobs.to_string());
    command.stdout(Stdio::null()).stderr(Stdio::null());
    let began = Instant::now();
    let mut child = command.spawn().expect("the command line is built: cargo build --release -p hence-cli");
    let status = format!("/proc/{}/status", child.id());
    let mut peak = 0;
    let ended = loop {
        // What the system says is the peak so far: the last answer before the end is the one that counts.
        let text = std::fs::read_to_string(&status).unwrap_or_default();
        let line = text.lines().find_map(|line| line.strip_prefix("VmHWM:"));
        let now = line.and_then(|line| line.split_whitespace().next()?.parse().ok());
        peak = peak.max(now.unwrap_or(0));
        if let Some(ended) = child.try_wait().expect("it can be waited for") {
            break ended;
        }
        std::thread::sleep(Duration::from_millis(10));
    };
    assert!(ended.success(), "{ended}");
    (began.elapsed(), peak)
}

/// One process at a time against two, and the memory of the process that runs them.
pub fn shelf() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let (all, few, out) = (folder.path().join("all"), folder.path().join("few"), folder.path().join("out"));
    make(&all, BOOKS);
    make(&few, BOOKS / 4);
    let sample = all.join("region 0/scheme 0000.xlsx");
    let size = std::fs::metadata(sample).expect("a workbook").len() / 1000;
    println!("| shelf | processes | time | workbooks a second | against one | memory of the run |");
    println!("| --- | --- | --- | --- | --- | --- |");
    let (_, peak) = fill(&few, &out, 2);
    println!("| {} workbooks of {size} kB | 2 | | | | {:.1} MB |", BOOKS / 4, peak as f64 / 1e3);
    // In turns, so that a disturbance of the machine meets both.
    let runs: Vec<[(Duration, u64); 2]> = (0..2).map(|_| [1, 2].map(|jobs| fill(&all, &out, jobs))).collect();
    let best = |k: usize| runs.iter().map(|pair| pair[k]).min().expect("two runs");
    let one = best(0).0.as_secs_f64();
    for (k, jobs) in [(0, 1), (1, 2)] {
        let (time, peak) = best(k);
        let time = time.as_secs_f64();
        let rate = f64::from(BOOKS) / time;
        println!(
            "| {BOOKS} workbooks of {size} kB | {jobs} | {time:.1} s | {rate:.0} | {:.2} | {:.1} MB |",
            one / time,
            peak as f64 / 1e3
        );
    }
    println!();
}
