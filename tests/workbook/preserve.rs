//! Real workbooks keep everything: each file of the folder HENCE_CORPUS gets a number and hence's
//! sheets, is verified, validated against the schemas and opened in LibreOffice, or is refused with a reason.
//!
//! HENCE_XSDVAL names a script that validates packages (with Python and lxml) against the schemas in
//! HENCE_XSD. HENCE_KEEP_OUTPUTS names a folder for the outputs, to look at. What is absent is said in the table's heading, and that check is left out.

use std::collections::{BTreeMap, BTreeSet};
use std::fmt::Write as _;
use std::path::{Path, PathBuf};
use std::process::Command;

use hence_workbook::graft::{Graft, graft};
use hence_workbook::model::{SheetKind, Workbook};
use hence_workbook::package::Package;
use hence_workbook::patch::{CellWrite, patch_sheet};
use hence_workbook::preflight::preflight;
use hence_workbook::problem::Result;
use hence_workbook::references::{Cell, MAX_ROWS};
use hence_workbook::verify::{Expected, verify};

use crate::graft::{finishes, own_package};

/// A row that the sheet does not hold: the one below the last, or else the first that is missing.
fn free_row(xml: &[u8]) -> u32 {
    let text = String::from_utf8_lossy(xml);
    let rows = text.split("row ").skip(1).filter_map(|rest| {
        let pieces: Vec<_> = rest[..rest.find('>')?].split(['"', '\'']).collect();
        let at = pieces.iter().position(|name| name.trim_start() == "r=")?;
        pieces.get(at + 1)?.parse::<u32>().ok()
    });
    let rows: BTreeSet<u32> = rows.collect();
    let below = rows.last().map_or(1_000, |last| last + 1);
    let free = if below <= MAX_ROWS { Some(below) } else { (1..MAX_ROWS).find(|row| !rows.contains(row)) };
    free.unwrap() - 1
}

fn filled(path: &Path, ours: &Package) -> Result<Vec<u8>> {
    let host = Package::open(path)?;
    preflight(&host)?;
    let book = Workbook::read(&host)?;
    let charts = finishes();
    let plan = Graft { ours, previous: &[], set_names: &[], remove_names: &[], charts: &charts };
    let mut grafted = graft(&host, &plan)?;
    let mut writes = BTreeMap::new();
    if let Some(sheet) = book.sheets.iter().find(|sheet| sheet.kind == SheetKind::Worksheet) {
        let xml = host.part(&sheet.part)?.unwrap_or_default();
        let cell = Cell::new(free_row(&xml), 2);
        let cells = BTreeMap::from([(cell, CellWrite::Number(0.1 + 0.2))]);
        grafted.changes.replace.insert(sheet.part.clone(), patch_sheet(&xml, &cells)?);
        writes.insert(sheet.name.clone(), cells);
    }
    let output = host.write(&grafted.changes)?;
    let expected = Expected { changes: &grafted.changes, writes: &writes, own_sheets: &grafted.sheets };
    verify(&host, &output, &expected)?;

    // Filling the output again gives the same bytes.
    let again = Package::from_bytes("again.xlsx", output.clone())?;
    let previous: Vec<String> = grafted.sheets.iter().map(|sheet| sheet.name.clone()).collect();
    let second = graft(&again, &Graft { previous: &previous, ..plan })?;
    assert!(again.write(&second.changes)? == output, "{}: a second fill differs", path.display());
    Ok(output)
}

/// The files that the script finds invalid; none where it cannot run.
fn invalid(files: &[PathBuf]) -> Option<BTreeSet<PathBuf>> {
    let script = std::env::var_os("HENCE_XSDVAL")?;
    let schemas = std::env::var_os("HENCE_XSD")?;
    let mut run = Command::new("python3");
    let output = run.arg(script).arg("--q").args(files).env("OOXML_XSD", schemas).output().ok()?;
    let text = String::from_utf8_lossy(&output.stdout).into_owned();
    let verdicts = text.lines().filter(|line| line.starts_with("VALID") || line.starts_with("INVALID"));
    assert_eq!(verdicts.clone().count(), files.len(), "{}", String::from_utf8_lossy(&output.stderr));
    let bad = verdicts.filter(|line| line.starts_with("INVALID"));
    Some(
        files
            .iter()
            .filter(|file| bad.clone().any(|l| l.ends_with(&*file.to_string_lossy())))
            .cloned()
            .collect(),
    )
}

/// Is there a LibreOffice?
fn libreoffice() -> bool {
    Command::new("soffice").arg("--version").output().is_ok_and(|output| output.status.success())
}

/// The files that LibreOffice converts in one call.
fn converted(files: &[PathBuf], folder: &Path) -> BTreeSet<PathBuf> {
    let profile = format!("-env:UserInstallation=file://{}", folder.join("profile").display());
    let out = tempfile::tempdir_in(folder).unwrap();
    let mut run = Command::new("timeout");
    run.args(["120", "soffice", &profile, "--headless", "--convert-to", "csv", "--outdir"]);
    run.arg(out.path()).args(files).output().unwrap();
    let csv = |file: &PathBuf| format!("{}.csv", file.file_stem().unwrap().to_string_lossy());
    files.iter().filter(|file| out.path().join(csv(file)).exists()).cloned().collect()
}

/// The outputs that LibreOffice does not open though it opens the inputs. One call converts all,
/// unless a workbook crashes it: then that one is tried alone and the rest in another call.
fn unopened(outputs: &[(PathBuf, PathBuf)], folder: &Path) -> (BTreeSet<PathBuf>, BTreeSet<PathBuf>) {
    let (mut spoilt, mut never) = (BTreeSet::new(), BTreeSet::new());
    let mut left: Vec<_> = outputs.to_vec();
    while !left.is_empty() {
        let batch: Vec<PathBuf> = left.iter().map(|(_, output)| output.clone()).collect();
        let done = converted(&batch, folder);
        left.retain(|(_, output)| !done.contains(output));
        if left.is_empty() {
            break;
        }
        let (input, output) = left.remove(0);
        if converted(std::slice::from_ref(&output), folder).is_empty() {
            let before = !converted(&[input], folder).is_empty();
            if before { &mut spoilt } else { &mut never }.insert(output);
        }
    }
    (spoilt, never)
}

#[test]
fn every_workbook_of_the_corpus_keeps_everything_or_is_refused() {
    let Some(corpus) = std::env::var_os("HENCE_CORPUS") else {
        println!("HENCE_CORPUS is not set: no real workbook was tried");
        return;
    };
    let mut files: Vec<PathBuf> =
        std::fs::read_dir(corpus).unwrap().map(|entry| entry.unwrap().path()).collect();
    files.retain(|path| path.extension().is_some_and(|e| e == "xlsx" || e == "xlsm"));
    files.sort();
    assert!(!files.is_empty(), "HENCE_CORPUS holds no workbook");
    let folder = tempfile::tempdir().unwrap();
    let ours = own_package();
    let (mut refused, mut outputs) = (BTreeMap::new(), Vec::new());
    for file in &files {
        match filled(file, &ours) {
            Ok(bytes) => {
                let output = folder.path().join(file.file_name().unwrap());
                std::fs::write(&output, bytes).unwrap();
                outputs.push((file.clone(), output));
            }
            Err(error) => {
                refused.insert(file.clone(), error.problems()[0].clone());
            }
        }
    }
    let (inputs, made): (Vec<_>, Vec<_>) = outputs.iter().cloned().unzip();
    let (bad_before, bad_after) = (invalid(&inputs), invalid(&made));
    let office = libreoffice();
    let (closed, never) = if office { unopened(&outputs, folder.path()) } else { Default::default() };

    let mut table = String::new();
    let mut failed = 0;
    for (input, output) in &outputs {
        let name = input.file_name().unwrap().to_string_lossy();
        let invalid_before = bad_before.as_ref().is_some_and(|bad| bad.contains(input));
        let spoilt = bad_after.as_ref().is_some_and(|bad| bad.contains(output)) && !invalid_before;
        let closed = closed.contains(output);
        let verdict = match (spoilt, closed) {
            (false, false) if never.contains(output) => "ok (LibreOffice does not open the input either)",
            (false, false) if invalid_before => "ok (not valid before either)",
            (false, false) => "ok",
            (true, _) => "FAILED: no longer valid",
            (false, true) => "FAILED: LibreOffice does not open it",
        };
        failed += usize::from(spoilt || closed);
        writeln!(table, "{name}: {verdict}").unwrap();
    }
    for (file, problem) in &refused {
        writeln!(table, "{}: refused, {problem}", file.file_name().unwrap().to_string_lossy()).unwrap();
        // A refusal has a reason other than that hence damaged the file.
        failed += usize::from(matches!(problem.code, "output-differs" | "package-change"));
    }
    let said =
        |checked: bool, what: &str| if checked { String::new() } else { format!("; {what} not checked") };
    println!(
        "{} workbooks: {} filled, {} refused, {failed} failed{}{}\n{table}",
        files.len(),
        outputs.len(),
        refused.len(),
        said(bad_after.is_some(), "schemas (HENCE_XSDVAL, HENCE_XSD, lxml)"),
        said(office, "opening in LibreOffice (soffice)"),
    );
    assert_eq!(failed, 0, "{table}");
    assert!(outputs.len() > refused.len(), "most workbooks were refused:\n{table}");
    if let Some(keep) = std::env::var_os("HENCE_KEEP_OUTPUTS") {
        for (_, output) in &outputs {
            std::fs::copy(output, Path::new(&keep).join(output.file_name().unwrap())).unwrap();
        }
    }
}
