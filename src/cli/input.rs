//! Where workbooks come from: files, or standard input for `-`.

use std::io::Read;
use std::path::{Path, PathBuf};

use hence_workbook::package::{MAX_FILE, Package};
use hence_workbook::problem::{Place, Problem, Result};

use crate::Failure;

/// What stands for standard input or output.
pub const DASH: &str = "-";

/// Whether a path stands for standard input or output.
pub fn is_dash(path: &Path) -> bool {
    path.as_os_str() == DASH
}

/// A workbook's name in messages: as it was given.
pub fn shown(path: &Path) -> String {
    if is_dash(path) { "standard input".to_owned() } else { path.display().to_string() }
}

/// The workbooks that paths stand for: a folder stands for all in it and in the folders below, in the order of their
/// names, without those that a spreadsheet program keeps open or hides.
pub fn books(paths: &[PathBuf]) -> std::result::Result<Vec<PathBuf>, Failure> {
    let mut books = Vec::new();
    for path in paths {
        if !path.is_dir() {
            books.push(path.clone());
            continue;
        }
        let before = books.len();
        below(path, &mut books)?;
        if books.len() == before {
            let message = format!("{}: the folder holds no workbook (.xlsx or .xlsm)", path.display());
            return Err(Failure::Message(message));
        }
    }
    Ok(books)
}

fn below(folder: &Path, books: &mut Vec<PathBuf>) -> std::result::Result<(), Failure> {
    let failed = |error: std::io::Error| Failure::Message(format!("{}: {error}", folder.display()));
    let entries = std::fs::read_dir(folder).map_err(failed)?;
    let entries = entries.collect::<std::io::Result<Vec<_>>>().map_err(failed)?;
    let mut paths: Vec<PathBuf> = entries.into_iter().map(|entry| entry.path()).collect();
    paths.sort();
    for path in paths {
        let name = path.file_name().unwrap_or_default().to_string_lossy();
        if name.starts_with(['.', '~']) {
            continue;
        }
        let kind = path.extension().unwrap_or_default().to_ascii_lowercase();
        if path.is_dir() && !path.is_symlink() {
            below(&path, books)?;
        } else if kind == "xlsx" || kind == "xlsm" {
            books.push(path);
        }
    }
    Ok(())
}

/// Opens a workbook for reading.
pub fn open(path: &Path) -> Result<Package> {
    if !is_dash(path) {
        return Package::open(path);
    }
    let mut bytes = Vec::new();
    let read = std::io::stdin().lock().take(MAX_FILE + 1).read_to_end(&mut bytes);
    read.map_err(|error| {
        Problem::error("cannot-read", Place::default(), format!("standard input cannot be read: {error}"))
    })?;
    Package::from_bytes("standard input", bytes)
}
