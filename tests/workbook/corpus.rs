//! Real workbooks are filled and keep everything, or are refused with a reason.
//!
//! Every file of the folder HENCE_CORPUS (saved by many programs, some malformed on purpose) gets an appraisal twice:
//! on a sheet of its own with defined names, and in free rows of its first worksheet with roles from the command line.
//! Each output is compared with the file as it came from the folder, entry by entry and cell by cell, by readers that
//! are not hence's; validated against the schemas; and calculated anew by LibreOffice, whose numbers are compared with
//! plain arithmetic done here. HENCE_KEEP_OUTPUTS names a folder for the outputs, to look at.

mod appraisal;
mod compare;

use std::collections::{BTreeMap, BTreeSet};
use std::fmt::Write as _;
use std::path::{Path, PathBuf};
use std::process::Command;

use hence_core::Catalogue;
use hence_workbook::fill::{FillRequest, fill};
use hence_workbook::package::Package;
use hence_workbook::problem::{Result, Severity};
use hence_workbook::shelf::record_of;

use crate::tools;
use appraisal::{Prepared, in_a_sheet, on_a_sheet};
use compare::{Counts, compare};

/// A file that is refused: how its name begins, where the appraisal stands (anywhere if empty), the code.
type Refusal = (&'static str, &'static str, &'static str);

/// Files of the corpus that are refused, and why that is right. Everything else has to be filled.
const REFUSED: &[Refusal] = &[
    // The columns under the block are formatted as dates, so the flows read as dates.
    ("03-", ITS_SHEET, "date-value"),
    // Part names with backslashes, which LibreOffice and Excel resolve differently.
    ("05-", "", "backslash-name"),
    // Saved in the strict variant, whose namespaces differ from those of the grafted sheets.
    ("18-", "", "strict-format"),
    ("30-", "", "strict-format"),
    // Digitally signed.
    ("60-", "", "signed"),
    ("62-", "", "signed"),
];

const OWN_SHEET: &str = "own sheet";
const ITS_SHEET: &str = "its sheet";

/// How an appraisal is put into a workbook; none where there is no room.
type Prepare = fn(&Package) -> Result<Option<Prepared>>;

/// What became of one file.
struct Row {
    file: PathBuf,
    how: &'static str,
    outcome: std::result::Result<(PathBuf, Counts), String>,
}

fn try_one(file: &Path, prepare: Prepare) -> Result<Option<(Vec<u8>, Counts)>> {
    let original = Package::open(file)?;
    let Some(prepared) = prepare(&original)? else { return Ok(None) };
    let request = FillRequest { roles: prepared.roles.clone(), ..FillRequest::default() };
    let filled = fill(&prepared.package, &request, &Catalogue::builtin())?;
    let mut counts = compare(&original, &prepared, &filled.bytes);
    // Entries of other programs, with descriptors and odd flags, come back byte for byte without the record and with it.
    if record_of(&Package::from_bytes(original.file_name(), filled.bytes.clone())?).is_none() {
        counts.faults.push("the record of the output does not match it".to_owned());
    }
    // An output is a workbook like any other: filled again, it takes the place of the first.
    if prepared.existing {
        let again = Package::from_bytes(original.file_name(), filled.bytes.clone())?;
        let second = fill(&again, &request, &Catalogue::builtin())?;
        let recounted = compare(&original, &prepared, &second.bytes);
        if (recounted.kept, recounted.added) != (counts.kept, counts.added)
            || second.report.verdict != filled.report.verdict
        {
            counts.faults.push("the second fill differs from the first".to_owned());
        }
        counts.faults.extend(recounted.faults.into_iter().map(|fault| format!("second fill: {fault}")));
    }
    Ok(Some((filled.bytes, counts)))
}

/// A file with an appraisal in it, on a sheet of its own and on one of its sheets, and the roles; for other tests.
pub fn prepared(file: &Path) -> Vec<(Package, Vec<(String, String)>)> {
    let Ok(original) = Package::open(file) else { return Vec::new() };
    let made = [on_a_sheet as Prepare, in_a_sheet]
        .into_iter()
        .filter_map(|prepare| prepare(&original).ok().flatten());
    made.map(|prepared| (prepared.package, prepared.roles)).collect()
}

fn try_all(files: &[PathBuf], folder: &Path, refused: &[Refusal]) -> (Vec<Row>, Vec<String>) {
    let (mut rows, mut faults) = (Vec::new(), Vec::new());
    for file in files {
        let name = file.file_name().unwrap().to_string_lossy().into_owned();
        for (how, prepare) in [(OWN_SHEET, on_a_sheet as Prepare), (ITS_SHEET, in_a_sheet)] {
            let expected =
                refused.iter().find(|(start, at, _)| name.starts_with(start) && how.starts_with(at));
            let outcome = match try_one(file, prepare) {
                Ok(Some((bytes, counts))) => {
                    faults.extend(counts.faults.iter().map(|fault| format!("{name}, {how}: {fault}")));
                    if let Some((.., code)) = expected {
                        faults.push(format!("{name}, {how}: filled, but was to be refused ({code})"));
                    }
                    let output =
                        folder.join(format!("{}-{name}", if how == OWN_SHEET { "own" } else { "its" }));
                    std::fs::write(&output, bytes).unwrap();
                    Ok((output, counts))
                }
                Ok(None) => Err("no free rows".to_owned()),
                Err(error) => {
                    let errors = error.problems().iter().filter(|p| p.severity == Severity::Error);
                    let codes: BTreeSet<&str> = errors.map(|p| p.code).collect();
                    if !expected.is_some_and(|(.., code)| codes.contains(code)) {
                        faults.push(format!("{name}, {how}: refused, {error}"));
                    }
                    Err(format!("refused: {}", codes.into_iter().collect::<Vec<_>>().join(" ")))
                }
            };
            rows.push(Row { file: file.clone(), how, outcome });
        }
    }
    (rows, faults)
}

/// Fills all files, checks everything and prints the table.
fn check(files: &[PathBuf], refused: &[Refusal]) {
    let folder = tempfile::tempdir().unwrap();
    let (rows, mut faults) = try_all(files, folder.path(), refused);
    let made: Vec<PathBuf> =
        rows.iter().filter_map(|row| Some(row.outcome.as_ref().ok()?.0.clone())).collect();

    let (before, after) = (tools::invalid(files), tools::invalid(&made));
    let office = tools::libreoffice();
    let opened_folder = tempfile::tempdir().unwrap();
    let opened = if office { tools::recalculated(&made, opened_folder.path()) } else { BTreeSet::new() };
    let closed: Vec<PathBuf> = rows
        .iter()
        .filter(|row| row.outcome.as_ref().is_ok_and(|(output, _)| office && !opened.contains(output)))
        .map(|row| row.file.clone())
        .collect();
    let opened_before = tools::recalculated(&closed, tempfile::tempdir().unwrap().path());

    let valid = |bad: &Option<BTreeMap<PathBuf, String>>, file: &PathBuf| match bad {
        None => "-",
        Some(bad) if bad.contains_key(file) => "no",
        Some(_) => "yes",
    };
    let mut table = String::from(
        "file | where | result | parts kept | replaced | added | removed | values dropped | valid before | after | LibreOffice\n",
    );
    for row in &rows {
        let name = row.file.file_name().unwrap().to_string_lossy();
        let (output, counts) = match &row.outcome {
            Ok(found) => found,
            Err(why) => {
                writeln!(table, "{name} | {} | {why}", row.how).unwrap();
                continue;
            }
        };
        let (was, is) = (valid(&before, &row.file), valid(&after, output));
        if (was, is) == ("yes", "no") {
            faults.push(format!("{name}, {}: no longer valid\n{}", row.how, after.as_ref().unwrap()[output]));
        }
        let shown = if !office {
            "-".to_owned()
        } else if opened.contains(output) {
            let found = appraisal::recalculated_agrees(
                &opened_folder.path().join(output.with_extension("xlsx").file_name().unwrap()),
                counts,
            );
            match found {
                Ok(()) => "agrees".to_owned(),
                Err(fault) => {
                    faults.push(format!("{name}, {}: {fault}", row.how));
                    "differs".to_owned()
                }
            }
        } else if opened_before.contains(&row.file) {
            faults.push(format!("{name}, {}: LibreOffice opens the file but not the output", row.how));
            "does not open".to_owned()
        } else {
            "opens neither".to_owned()
        };
        let Counts { kept, replaced, added, removed, dropped, .. } = counts;
        writeln!(table, "{name} | {} | filled | {kept} | {replaced} | {added} | {removed} | {dropped} | {was} | {is} | {shown}", row.how).unwrap();
    }
    let filled = made.len();
    println!(
        "{} files, {} fills, {filled} done, {} refused or without room, {} faults\n{table}",
        files.len(),
        rows.len(),
        rows.len() - filled,
        faults.len()
    );
    if let Some(keep) = std::env::var_os("HENCE_KEEP_OUTPUTS") {
        for output in &made {
            std::fs::copy(output, Path::new(&keep).join(output.file_name().unwrap())).unwrap();
        }
    }
    assert!(faults.is_empty(), "{} faults\n{}", faults.len(), faults.join("\n"));
    let missed: Vec<&str> = refused
        .iter()
        .filter(|(start, ..)| {
            !files.iter().any(|f| f.file_name().unwrap().to_string_lossy().starts_with(start))
        })
        .map(|(start, ..)| *start)
        .collect();
    assert!(missed.is_empty(), "files that were to be refused are not there: {missed:?}");
}

#[test]
fn every_workbook_of_the_corpus_is_filled_or_refused_with_a_reason() {
    let Some(corpus) = std::env::var_os("HENCE_CORPUS") else {
        println!("HENCE_CORPUS is not set: no real workbook was tried");
        return;
    };
    check(&workbooks(Path::new(&corpus)), REFUSED);
}

#[test]
fn workbooks_of_openpyxl_and_libreoffice_are_filled() {
    let Some(python) = tools::python("openpyxl") else { return };
    let folder = tempfile::tempdir().unwrap();
    let script = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../tests/workbook/make_openpyxl.py");
    let corpus =
        std::env::var_os("HENCE_CORPUS").map(|corpus| workbooks(Path::new(&corpus))).unwrap_or_default();
    let macros = corpus.iter().find(|file| file.ends_with("59-macro04.xlsm"));
    let output = Command::new(python).arg(script).arg(folder.path()).args(macros).output().unwrap();
    assert!(output.status.success(), "{}", String::from_utf8_lossy(&output.stderr));
    let mut files = workbooks(folder.path());
    assert!(files.len() >= 8, "{files:?}");
    if tools::libreoffice() {
        let saved = folder.path().join("saved by LibreOffice");
        std::fs::create_dir(&saved).unwrap();
        let plain: Vec<PathBuf> =
            files.iter().filter(|f| f.extension().is_some_and(|e| e == "xlsx")).cloned().collect();
        assert_eq!(
            tools::recalculated(&plain, &saved).len(),
            plain.len(),
            "LibreOffice did not open all of {plain:?}"
        );
        for file in workbooks(&saved) {
            let name = format!("lo-{}", file.file_name().unwrap().to_string_lossy());
            std::fs::rename(&file, saved.join(&name)).unwrap();
            files.push(saved.join(name));
        }
    }
    check(&files, &[]);
}

/// The workbooks of a folder, by name.
fn workbooks(folder: &Path) -> Vec<PathBuf> {
    let entries = std::fs::read_dir(folder).expect("a folder of workbooks");
    let mut files: Vec<PathBuf> = entries.map(|entry| entry.unwrap().path()).collect();
    files.retain(|path| path.extension().is_some_and(|e| e == "xlsx" || e == "xlsm"));
    files.sort();
    assert!(!files.is_empty(), "{} holds no workbook", folder.display());
    files
}
