//! The extension for LibreOffice Calc, built, installed into a throw-away profile and run by a real LibreOffice.
//!
//! Workbooks come from openpyxl and from plain XML; what LibreOffice saves is read back without it, and compared with
//! the library. The data are invented.

mod cases;
mod office;
mod package;
mod sample;
mod values;

use std::collections::BTreeMap;
use std::io::{Cursor, Read, Write};
use std::path::{Path, PathBuf};
use std::process::Command;
use std::sync::OnceLock;

use hence::worksheet::Cell;
use zip::write::SimpleFileOptions;

use crate::root;
use office::absent;

/// The extension's own name.
const IDENTIFIER: &str = "hence.addin.calc";

/// The folder of everything built.
fn target() -> PathBuf {
    Path::new(env!("CARGO_TARGET_TMPDIR")).parent().expect("a folder").to_owned()
}

fn build() -> Vec<u8> {
    let mut command = Command::new("bash");
    command.arg("ffi/addin/build.sh").arg("calc").current_dir(root()).env("CARGO_TARGET_DIR", target());
    let run = command.output().expect("bash runs");
    assert!(run.status.success(), "build.sh: {}", String::from_utf8_lossy(&run.stderr));
    std::fs::read(target().join("addin/hence.oxt")).expect("the extension")
}

/// The extension, built once.
fn extension() -> &'static [u8] {
    static BUILT: OnceLock<Vec<u8>> = OnceLock::new();
    BUILT.get_or_init(build)
}

/// The parts of a package, in their order.
fn parts(package: &[u8]) -> Vec<(String, Vec<u8>)> {
    let mut package = zip::ZipArchive::new(Cursor::new(package)).expect("a zip");
    let count = package.len();
    let part = |i| {
        let mut part = package.by_index(i).expect("a part");
        let mut bytes = Vec::new();
        part.read_to_end(&mut bytes).expect("its bytes");
        (part.name().expect("a name").into_owned(), bytes)
    };
    (0..count).map(part).collect()
}

/// The extension with each part as `change` leaves it.
fn changed(change: impl Fn(&mut String, &mut Vec<u8>)) -> Vec<u8> {
    let mut out = zip::ZipWriter::new(Cursor::new(Vec::new()));
    for (mut name, mut bytes) in parts(extension()) {
        change(&mut name, &mut bytes);
        out.start_file(name, SimpleFileOptions::default()).expect("a part");
        out.write_all(&bytes).expect("its bytes");
    }
    out.finish().expect("a zip").into_inner()
}

/// Runs books.py.
fn books(arguments: &[&Path], what: &str) -> Option<String> {
    let python = std::env::var_os("HENCE_PYTHON").unwrap_or_else(|| "python3".into());
    if !Command::new(&python).args(["-c", "import openpyxl"]).output().is_ok_and(|run| run.status.success()) {
        absent("Python with openpyxl (HENCE_PYTHON)");
        return None;
    }
    let script = root().join("tests/addin/calc/books.py");
    let run = Command::new(&python).arg(script).arg(what).args(arguments).output().expect("Python runs");
    assert!(run.status.success(), "books.py: {}", String::from_utf8_lossy(&run.stderr));
    Some(String::from_utf8(run.stdout).expect("text"))
}

/// What a cell was found to hold, and its formula.
#[derive(Clone, Debug, Default, PartialEq)]
struct Found {
    kind: String,
    value: String,
    formula: String,
}

type Sheet = BTreeMap<String, Found>;

/// The cells of each file, from what a script printed.
fn sheets(said: &str) -> Vec<Sheet> {
    let mut all = Vec::new();
    for line in said.lines() {
        let fields: Vec<&str> = line.split('\t').collect();
        match fields[..] {
            ["file", _] => all.push(Sheet::new()),
            [address, kind, value, formula] => {
                let found = Found { kind: kind.into(), value: value.into(), formula: formula.into() };
                all.last_mut().expect("a file first").insert(address.into(), found);
            }
            _ => panic!("a script said {line:?}"),
        }
    }
    all
}

/// A formula as every reader gives it alike: without what a format puts around it.
fn plain(formula: &str) -> String {
    formula
        .trim_start_matches('{')
        .trim_end_matches('}')
        .replace("of:=", "=")
        .replace("[.", "")
        .replace(":.", ":")
        .replace(']', "")
}

/// How numbers are told.
#[derive(Clone, Copy)]
enum Kept {
    /// By their bits.
    Bits,
    /// In the 15 digits that LibreOffice writes into files.
    Digits,
}

impl Kept {
    fn agrees(self, due: f64, found: &str) -> bool {
        match self {
            Kept::Bits => found == format!("{:016x}", due.to_bits()),
            Kept::Digits => found.parse().is_ok_and(|found: f64| {
                let unit = 10f64.powf(due.abs().log10().floor() - 14.0);
                found == due || (found - due).abs() <= 0.5 * unit + f64::EPSILON * due.abs()
            }),
        }
    }
}

/// Whether a cell is as due.
fn agrees(due: &Cell<'_>, found: &Found, kept: Kept) -> bool {
    match due {
        Cell::Number(number) => found.kind == "n" && kept.agrees(*number, &found.value),
        Cell::Text(text) => found.kind == "s" && found.value == *text,
        Cell::Error(error) => found.kind == "e" && found.value == error.text(),
        Cell::Blank | Cell::Logical(_) => false,
    }
}

/// The cells of files, read without a spreadsheet program.
fn read(files: &[PathBuf]) -> Option<Vec<Sheet>> {
    let paths: Vec<&Path> = files.iter().map(PathBuf::as_path).collect();
    books(&paths, "read").map(|said| sheets(&said))
}
