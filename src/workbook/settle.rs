//! Results for formulas that have none: LibreOffice computes a scratch copy, and what it finds is put in as stored results.
//!
//! Spreadsheet programs compute such formulas when they open the file; previewers and scripts show and read nothing there.

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};
use std::process::{Child, Command, Stdio};
use std::time::{Duration, Instant};

use crate::model::Workbook;
use crate::package::Package;
use crate::patch::{CellWrite, Settled};
use crate::problem::{Place, Problem, Result, WorkbookError};
use crate::reading::{Sheets, Value};
use crate::references::{Cell, NameTarget, Range, SheetRange};
use crate::report::Report;
use crate::roles::key;
use crate::sheets::{DIFFERS, VERDICT};

/// How long one workbook may take.
const PATIENCE: Duration = Duration::from_secs(180);
/// Where LibreOffice stands on systems that do not have it on the path of programs.
const PLACES: [&str; 3] = [
    "/usr/lib/libreoffice/program/soffice",
    "/opt/libreoffice/program/soffice",
    "/Applications/LibreOffice.app/Contents/MacOS/soffice",
];

/// What becomes of which cell, by sheet.
pub(crate) type Writes = BTreeMap<String, BTreeMap<Cell, CellWrite>>;

/// LibreOffice's program, where it is installed.
pub fn soffice() -> Option<PathBuf> {
    let path = std::env::var_os("PATH").unwrap_or_default();
    let name = if cfg!(windows) { "soffice.exe" } else { "soffice" };
    let on_path = std::env::split_paths(&path).map(|folder| folder.join(name));
    on_path.chain(PLACES.iter().map(PathBuf::from)).find(|file| file.is_file())
}

/// The results of all formulas of a workbook that have none.
///
/// # Errors
/// `no-libreoffice`, and `not-settled` where LibreOffice does not open the workbook, does not end, or leaves a formula
/// without a result.
pub(crate) fn settled(made: &Package, book: &Workbook) -> Result<Writes> {
    let blank = without_result(made, book)?;
    if blank.values().all(Vec::is_empty) {
        return Ok(Writes::new());
    }
    let again = recalculated(made)?;
    let there = Workbook::read(&again)?;
    let mut found: BTreeMap<(String, Cell), Value> = BTreeMap::new();
    let mut sheets = Sheets::open(&again, &there)?;
    for sheet in blank.keys() {
        sheets.visit(sheet, |cell, value| {
            found.insert((sheet.clone(), cell), value);
        })?;
    }
    let mut writes = Writes::new();
    for (sheet, cells) in blank {
        for cell in cells {
            // An empty text is stored as no value at all.
            let value = found.remove(&(sheet.clone(), cell)).unwrap_or_default();
            let settled = match value {
                Value::Number(x) | Value::Date(x) => Settled::Number(x),
                Value::Text(text) => Settled::Text(text),
                Value::Blank => Settled::Text(String::new()),
                Value::Bool(truth) => Settled::Logical(truth),
                Value::Error(error) => Settled::Error(error),
            };
            writes.entry(sheet.clone()).or_default().insert(cell, CellWrite::Result(settled));
        }
    }
    Ok(writes)
}

/// Verdicts that rested on results which nobody knew, as they are now; one that differs is a problem.
pub(crate) fn settle_verdicts(book: &Workbook, writes: &Writes, report: &mut Report) {
    for name in &book.names {
        let Some(rest) = name.name.strip_prefix(VERDICT) else { continue };
        let NameTarget::Cells(at) = book.resolve(name) else { continue };
        let write = writes.get(&at.sheet).and_then(|cells| cells.get(&at.range.first));
        let Some(CellWrite::Result(Settled::Text(text))) = write else { continue };
        let own =
            report.appraisals.iter_mut().find(|one| key(&one.name) == key(rest.trim_start_matches('_')));
        match own {
            Some(one) => one.verdict.clone_from(text),
            None => report.verdict.clone_from(text),
        }
        if text.starts_with(DIFFERS) {
            let place = Place::cells(&at.sheet, at.range).called(&name.name);
            let message = format!("with every formula computed, the verdict is: {text}");
            report
                .problems
                .push(Problem::error("differs", place, message).hint("look at the sheets of the audit"));
        }
    }
}

/// Every formula cell without a result, by sheet.
fn without_result(made: &Package, book: &Workbook) -> Result<BTreeMap<String, Vec<Cell>>> {
    let mut blank = BTreeMap::new();
    for sheet in &book.sheets {
        let xml = made.part(&sheet.part)?.unwrap_or_default();
        let cells = crate::patch::without_result(&xml)?;
        if !cells.is_empty() {
            blank.insert(sheet.name.clone(), cells);
        }
    }
    Ok(blank)
}

/// The cells of a sheet in words: how many, and between which corners.
pub(crate) fn in_words(sheet: &str, cells: &[Cell]) -> Option<String> {
    let hull = cells.iter().map(|cell| Range::cell(*cell)).reduce(|a, b| a.hull(&b))?;
    let at = SheetRange { sheet: sheet.to_owned(), range: hull };
    Some(if cells.len() == 1 { at.to_string() } else { format!("{} cells in {at}", cells.len()) })
}

/// A scratch copy as LibreOffice saves it after computing what has no result.
fn recalculated(made: &Package) -> Result<Package> {
    let soffice = soffice().ok_or_else(|| {
        Problem::error("no-libreoffice", Place::default(), "LibreOffice (soffice) is not installed")
            .hint("install it, or leave --settle out")
    })?;
    let folder = tempfile::tempdir().map_err(|error| failed(&error))?;
    let (input, output) = (folder.path().join("in"), folder.path().join("out"));
    for path in [&input, &output] {
        std::fs::create_dir(path).map_err(|error| failed(&error))?;
    }
    let (name, saved) = (format!("book.{}", made.format().extension()), "book.xlsx");
    let book = input.join(name);
    std::fs::write(&book, made.bytes()).map_err(|error| failed(&error))?;
    run(&soffice, folder.path(), &book, &output)?;
    let bytes =
        std::fs::read(output.join(saved)).map_err(|_| failed(&"LibreOffice did not open the workbook"))?;
    Package::from_bytes("settled.xlsx", bytes)
}

fn run(soffice: &Path, folder: &Path, book: &Path, output: &Path) -> Result<()> {
    let mut command = program(soffice);
    command
        .arg(format!("-env:UserInstallation=file://{}", folder.join("profile").display()))
        .args(["--headless", "--norestore", "--convert-to", "xlsx:Calc MS Excel 2007 XML", "--outdir"])
        .args([output, book])
        .stdin(Stdio::null())
        .stdout(Stdio::null())
        .stderr(Stdio::null());
    let (mut child, watch) = watched(&mut command, folder).map_err(|error| failed(&error))?;
    let began = Instant::now();
    loop {
        match child.try_wait().map_err(|error| failed(&error))? {
            Some(status) if status.success() => {
                watch.over();
                return Ok(());
            }
            Some(status) => return Err(failed(&format!("LibreOffice ended with {status}"))),
            None if began.elapsed() > PATIENCE => {
                drop(watch);
                let _ = child.kill();
                let _ = child.wait();
                return Err(failed(&format!("LibreOffice took longer than {} s", PATIENCE.as_secs())));
            }
            None => std::thread::sleep(Duration::from_millis(20)),
        }
    }
}

/// The program, without the limit on memory that the process which reads workbooks has: an office suite takes more.
#[cfg(unix)]
fn program(soffice: &Path) -> Command {
    let mut command = Command::new("/bin/sh");
    command.args(["-c", "ulimit -S -v unlimited 2>/dev/null; exec \"$0\" \"$@\""]).arg(soffice);
    command
}

#[cfg(not(unix))]
fn program(soffice: &Path) -> Command {
    Command::new(soffice)
}

/// Starts the program in a group of its own, and what ends the group once this process goes, however it goes.
fn watched(command: &mut Command, folder: &Path) -> std::io::Result<(Child, Watch)> {
    #[cfg(unix)]
    std::os::unix::process::CommandExt::process_group(command, 0);
    let mut child = command.spawn()?;
    match Watch::on(&child, folder) {
        Ok(watch) => Ok((child, watch)),
        Err(error) => {
            let _ = child.kill();
            let _ = child.wait();
            Err(error)
        }
    }
}

/// A shell that reads from this process. Where it reads no word before the end, it ends the group of LibreOffice, which is
/// several processes, and takes away the scratch folder.
#[cfg(unix)]
struct Watch(Child);

#[cfg(unix)]
impl Watch {
    fn on(child: &Child, folder: &Path) -> std::io::Result<Self> {
        let script = "read -r over && exit; kill -s KILL -- \"-$0\" 2>/dev/null; rm -rf -- \"$1\"";
        let mut command = Command::new("/bin/sh");
        // Whoever ends the group of this process does not end the shell.
        std::os::unix::process::CommandExt::process_group(&mut command, 0);
        command.args(["-c", script]).arg(child.id().to_string()).arg(folder);
        command.stdin(Stdio::piped()).stdout(Stdio::null()).stderr(Stdio::null()).spawn().map(Watch)
    }

    /// LibreOffice has ended.
    fn over(mut self) {
        if let Some(to) = &mut self.0.stdin {
            let _ = std::io::Write::write_all(to, b"over\n");
        }
    }
}

#[cfg(unix)]
impl Drop for Watch {
    fn drop(&mut self) {
        drop(self.0.stdin.take());
        let _ = self.0.wait();
    }
}

/// Only the program itself is ended here, by who started it.
#[cfg(not(unix))]
struct Watch;

#[cfg(not(unix))]
impl Watch {
    fn on(_child: &Child, _folder: &Path) -> std::io::Result<Self> {
        Ok(Watch)
    }

    fn over(self) {}
}

fn failed(why: &dyn std::fmt::Display) -> WorkbookError {
    let message = format!("the results of formulas could not be computed: {why}");
    Problem::error("not-settled", Place::default(), message)
        .hint("leave --settle out, and open the output in a spreadsheet program")
        .into()
}

#[cfg(test)]
mod tests {
    use super::in_words;

    #[test]
    fn cells_are_told_by_number_and_corners() {
        let cells = |texts: &[&str]| texts.iter().map(|text| text.parse().unwrap()).collect::<Vec<_>>();
        assert_eq!(in_words("Net", &[]), None);
        assert_eq!(in_words("Net", &cells(&["B2"])).unwrap(), "Net!B2");
        assert_eq!(in_words("Net", &cells(&["B2", "D9", "C1"])).unwrap(), "3 cells in Net!B1:D9");
    }
}
