//! Where workbooks come from: files, or standard input for `-`.

use std::io::Read;
use std::path::{Path, PathBuf};

use hence_workbook::older::OldFormat;
use hence_workbook::package::{Identity, MAX_FILE, Package};
use hence_workbook::problem::{Place, Problem, Result};

use crate::shelf::values::values;

/// What stands for standard input or output.
pub const DASH: &str = "-";

/// A workbook to be read.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Input {
    /// The file.
    pub path: PathBuf,
    /// Where a folder was walked: the folders in it that lead to the file. None for a workbook that was named.
    pub inside: Option<PathBuf>,
}

/// Whether a path stands for standard input or output.
pub fn is_dash(path: &Path) -> bool {
    path.as_os_str() == DASH
}

/// What a workbook's path names; of standard input, the file that it was redirected from.
pub fn identity(path: &Path) -> Identity {
    #[cfg(unix)]
    if is_dash(path) {
        use std::os::fd::AsFd;
        let own = std::io::stdin().as_fd().try_clone_to_owned().map(std::fs::File::from);
        if let Ok(there) = own.and_then(|file| file.metadata()) {
            return Identity::of_file(&there);
        }
    }
    Identity::of(path)
}

/// A workbook's name in messages: as it was given.
pub fn shown(path: &Path) -> String {
    if is_dash(path) { "standard input".to_owned() } else { path.display().to_string() }
}

/// Opens a workbook for reading; one of an older format by its values, which a process with limits takes out of it.
pub fn open(path: &Path) -> Result<Package> {
    let (name, bytes) = if is_dash(path) {
        let mut bytes = Vec::new();
        let read = std::io::stdin().lock().take(MAX_FILE + 1).read_to_end(&mut bytes);
        read.map_err(|error| {
            Problem::error("cannot-read", Place::default(), format!("standard input cannot be read: {error}"))
        })?;
        ("standard input".to_owned(), bytes)
    } else {
        (Package::name_of(path), Package::read(path)?)
    };
    if OldFormat::of(&bytes).is_some() {
        return values(&name, &bytes);
    }
    Package::from_bytes(&name, bytes)
}
