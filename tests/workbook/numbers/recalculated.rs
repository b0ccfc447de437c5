//! LibreOffice computes the formulas of filled random workbooks, and finds what the cells hold.

use std::collections::BTreeMap;
use std::io::{Cursor, Read, Write};
use std::process::Command;

use calamine::Data;
use hence_core::Catalogue;
use hence_workbook::fill::fill;
use hence_workbook::references::Cell;
use zip::write::SimpleFileOptions;

use super::book::book;
use super::cells;

/// The package with the result of every formula taken out, so that a program has to compute it.
fn unevaluated(bytes: &[u8]) -> Vec<u8> {
    let mut from = zip::ZipArchive::new(Cursor::new(bytes)).unwrap();
    let mut to = zip::ZipWriter::new(Cursor::new(Vec::new()));
    for i in 0..from.len() {
        let mut entry = from.by_index(i).unwrap();
        let name = entry.name().unwrap().into_owned();
        let mut content = Vec::new();
        entry.read_to_end(&mut content).unwrap();
        if name.starts_with("xl/worksheets/sheet") {
            let text = String::from_utf8(content).unwrap();
            let bare = text.split("<c ").map(|cell| {
                match (cell.contains("<f"), cell.find("<v>"), cell.find("</v>")) {
                    (true, Some(start), Some(end)) => format!("{}{}", &cell[..start], &cell[end + 4..]),
                    _ => cell.to_owned(),
                }
            });
            content = bare.collect::<Vec<_>>().join("<c ").into_bytes();
        }
        to.start_file(name, SimpleFileOptions::default()).unwrap();
        to.write_all(&content).unwrap();
    }
    to.finish().unwrap().into_inner()
}

#[test]
fn libreoffice_finds_what_the_cells_of_random_workbooks_hold() {
    let folder = tempfile::tempdir().unwrap();
    let (from, to) = (folder.path().join("from"), folder.path().join("to"));
    std::fs::create_dir_all(&from).unwrap();
    let mut command = Command::new("soffice");
    command.arg(format!("-env:UserInstallation=file://{}", folder.path().join("profile").display()));
    command.args(["--headless", "--convert-to", "xlsx", "--outdir"]).arg(&to);
    let mut outputs = Vec::new();
    for seed in 1000..1024 {
        let book = book(seed);
        let filled = fill(&book.package(), &book.request, &Catalogue::builtin())
            .unwrap_or_else(|error| panic!("{}: {error}", book.words));
        let path = from.join(format!("book{seed}.xlsx"));
        std::fs::write(&path, unevaluated(&filled.bytes)).unwrap();
        command.arg(path);
        outputs.push((seed, book.words, filled.bytes));
    }
    match command.output() {
        Ok(output) => assert!(output.status.success(), "{}", String::from_utf8_lossy(&output.stderr)),
        Err(_) => {
            eprintln!("LibreOffice (soffice) is not installed: its recalculation was not compared");
            return;
        }
    }
    let mut compared = 0;
    for (seed, words, bytes) in outputs {
        let held = cells(&bytes);
        let found = cells(&std::fs::read(to.join(format!("book{seed}.xlsx"))).unwrap());
        compared += compare(&held, &found, &words);
    }
    assert!(compared > 20_000, "{compared}");
}

fn compare(
    held: &BTreeMap<(String, Cell), Data>,
    found: &BTreeMap<(String, Cell), Data>,
    words: &str,
) -> usize {
    let mut compared = 0;
    for ((sheet, cell), data) in held {
        let other = found.get(&(sheet.clone(), *cell));
        // What is left of a difference of two sums is rounding on both sides.
        let difference =
            sheet.ends_with("checks") && cell.col == 6 || sheet.ends_with("coverage") && cell.col == 5;
        match (data, other) {
            _ if difference => continue,
            (Data::Float(a), Some(Data::Float(b))) => {
                let near = (a - b).abs() <= 1e-9 * a.abs().max(b.abs()).max(1.0);
                assert!(near, "{words}: {sheet}!{cell} holds {a}, LibreOffice finds {b}");
            }
            (Data::String(a), Some(Data::String(b))) => {
                assert_eq!(a.trim(), b.trim(), "{words}: {sheet}!{cell}");
            }
            (Data::String(text), None) if text.trim().is_empty() => continue,
            (Data::DateTime(_), _) => continue,
            (a, b) => panic!("{words}: {sheet}!{cell} holds {a:?}, LibreOffice finds {b:?}"),
        }
        compared += 1;
    }
    compared
}
