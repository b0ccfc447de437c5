//! Files made to do harm, each checked in a process of its own with 512 MB of memory and a time limit.
//!
//! The files are built by the generator beside this file from the public descriptions of the zip and
//! workbook formats. What is let in is then read with the spreadsheet library as well, every cell and every
//! formula: what the checks pass must be harmless to it.

use std::io::Cursor;
use std::path::Path;
use std::process::Command;
use std::time::{Duration, Instant};

use calamine::{Data, DataRef, Reader, SheetType, Xlsx};
use hence_workbook::package::{Changes, Package};
use hence_workbook::preflight::preflight;

pub mod book;
pub mod cases;
pub mod zip;

use cases::Answer;

/// The variable by which the test tells its own child which file to check.
const FILE: &str = "HENCE_HOSTILE_FILE";
/// Memory of the child in kilobytes, address space and all.
const MEMORY: u32 = 512 * 1024;
/// Wall time of one check. Builds without optimisation on a busy machine are slow; a hang is far slower.
const TIME: Duration = Duration::from_secs(60);

#[test]
fn every_hostile_file_gets_its_answer() {
    if let Some(file) = std::env::var_os(FILE) {
        println!("\nANSWER {}", answer(Path::new(&file)));
        return;
    }
    let folder = tempfile::tempdir().unwrap();
    let mut wrong = Vec::new();
    for case in cases::all() {
        let path = folder.path().join("hostile.xlsx");
        std::fs::write(&path, (case.make)()).unwrap();
        let start = Instant::now();
        let (found, memory) = in_child(&path);
        let took = start.elapsed();
        println!("{:45} {:5.2} s {memory:>4} MB  {}", case.name, took.as_secs_f64(), found);
        let expected = match &case.answer {
            Answer::Refused(code, place) => format!("refused {code} {place}"),
            Answer::Read(warnings, cells, first) => format!("read {warnings:?} {cells} {first}"),
        };
        if found != expected || took > TIME {
            wrong.push(format!("{}: expected {expected}, found {found} in {took:?}", case.name));
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}

/// Runs this very test in a child with limited memory; its answer and its peak memory in MB.
fn in_child(path: &Path) -> (String, u64) {
    let program = std::env::current_exe().unwrap();
    let output = Command::new("sh")
        .arg("-c")
        .arg(format!(
            "ulimit -v {MEMORY}; exec \"$0\" --exact hostile::every_hostile_file_gets_its_answer --nocapture --test-threads=1"
        ))
        .arg(program)
        .env(FILE, path)
        .env("RUST_BACKTRACE", "0")
        .output()
        .unwrap();
    let text = String::from_utf8_lossy(&output.stdout).into_owned();
    let line = |mark: &str| text.lines().find_map(|line| line.strip_prefix(mark)).map(str::to_owned);
    let found = line("ANSWER ").unwrap_or_else(|| {
        format!("no answer, {}: {}", output.status, String::from_utf8_lossy(&output.stderr))
    });
    (found, line("PEAK ").and_then(|kb| kb.parse::<u64>().ok()).unwrap_or(0) / 1024)
}

fn answer(path: &Path) -> String {
    let answer = Package::open(path)
        .and_then(|package| Ok((preflight(&package)?, package)))
        .map(|(warnings, package)| {
            let codes: Vec<&str> = warnings.iter().map(|problem| problem.code).collect();
            let (cells, first) = read_all(&package);
            // A file that is let in can be copied.
            let copy = package.write(&Changes::default()).unwrap();
            assert_eq!(
                Package::from_bytes("copy.xlsx", copy).unwrap().parts().count(),
                package.parts().count()
            );
            format!("read {codes:?} {cells} {first}")
        })
        .unwrap_or_else(|error| {
            let problem = &error.problems()[0];
            assert!(problem.message.len() < 600, "a message must not quote a bomb");
            format!("refused {} {}", problem.code, problem.place)
        });
    let status = std::fs::read_to_string("/proc/self/status").unwrap_or_default();
    let peak = status.lines().find_map(|line| line.strip_prefix("VmHWM:"));
    println!("\nPEAK {}", peak.unwrap_or("").trim().trim_end_matches(" kB"));
    answer
}

/// The number of cells by the spreadsheet library, and the first one's value as text.
pub fn read_all(package: &Package) -> (usize, String) {
    let mut book: Xlsx<_> = Xlsx::new(Cursor::new(package.bytes())).unwrap();
    let (mut cells, mut first) = (0, String::new());
    let metadata = book.sheets_metadata().to_vec();
    for sheet in metadata.into_iter().filter(|sheet| sheet.typ == SheetType::WorkSheet) {
        let name = sheet.name;
        let mut reader = book.worksheet_cells_reader(&name).unwrap();
        while let Some(cell) = reader.next_cell().unwrap() {
            if cells == 0 {
                first = match Data::from(DataRef::clone(cell.get_value())) {
                    Data::Empty => String::new(),
                    value => value.to_string(),
                };
            }
            cells += 1;
        }
        drop(reader);
        let mut reader = book.worksheet_cells_reader(&name).unwrap();
        while reader.next_formula().unwrap().is_some() {}
    }
    (cells, first)
}
