//! The workbooks in a folder and the folders in it, in order of their names.

use std::collections::BTreeSet;
use std::io;
use std::path::{Path, PathBuf};

use hence_workbook::shelf::EXTENSIONS;

/// What stands before the extension of an output.
pub const AUDITED: &str = ".audited";

/// What a walk found.
#[derive(Debug, Default)]
pub struct Walk {
    /// Workbooks, relative to the folder.
    pub books: Vec<PathBuf>,
    /// What was passed over, and why.
    pub skipped: Vec<(PathBuf, &'static str)>,
    /// Folders that could not be read.
    pub unreadable: Vec<(PathBuf, io::Error)>,
}

/// What workbooks are looked for.
#[derive(Clone, Copy, Debug)]
pub enum For<'a> {
    /// To fill them: no audited outputs, and none in the folder that outputs go to.
    Filling(Option<&'a Path>),
    /// To check them: audited outputs, too.
    Checking,
}

/// Whether a file is a workbook, by its extension.
pub fn is_workbook(path: &Path) -> bool {
    let extension = path.extension().unwrap_or_default();
    EXTENSIONS.iter().any(|known| extension.eq_ignore_ascii_case(known))
}

/// Walks through a folder, following links, but never twice into the same folder and never into that of the outputs.
///
/// **Errors**: that the folder itself cannot be read.
pub fn walk(root: &Path, to: For) -> io::Result<Walk> {
    let mut found = Walk::default();
    let mut seen = BTreeSet::from([root.canonicalize()?]);
    // An output folder that is the walked one holds the inputs too.
    if let For::Filling(Some(out)) = to {
        seen.extend(out.canonicalize());
    }
    std::fs::read_dir(root)?;
    folder(root, Path::new(""), to, &mut seen, &mut found);
    Ok(found)
}

fn folder(root: &Path, inside: &Path, to: For, seen: &mut BTreeSet<PathBuf>, found: &mut Walk) {
    let entries = std::fs::read_dir(root.join(inside)).and_then(Iterator::collect::<io::Result<Vec<_>>>);
    let mut names = match entries {
        Ok(entries) => entries.into_iter().map(|entry| entry.file_name()).collect::<Vec<_>>(),
        Err(error) => {
            found.unreadable.push((inside.to_owned(), error));
            return;
        }
    };
    names.sort();
    for name in names {
        let path = inside.join(&name);
        let name = name.to_string_lossy();
        let full = root.join(&path);
        if full.is_dir() {
            let real = full.canonicalize();
            if name.starts_with('.') {
                found.skipped.push((path, "hidden"));
            } else if real.is_ok_and(|real| seen.insert(real)) {
                folder(root, &path, to, seen, found);
            } else {
                found.skipped.push((path, "the output folder, or walked already"));
            }
        } else if is_workbook(&path) {
            let stem = path.file_stem().unwrap_or_default().to_string_lossy().to_lowercase();
            if name.starts_with("~$") {
                found.skipped.push((path, "a lock file of a spreadsheet program"));
            } else if name.starts_with('.') {
                found.skipped.push((path, "hidden"));
            } else if matches!(to, For::Filling(_)) && stem.ends_with(AUDITED) {
                found.skipped.push((path, "an audited output"));
            } else if full.metadata().is_ok_and(|there| !there.is_file()) {
                // One that waits for a writer would never end.
                found.skipped.push((path, "no ordinary file"));
            } else {
                found.books.push(path);
            }
        }
    }
}
