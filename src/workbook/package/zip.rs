//! A zip file that is no .xlsx package, read under the same limits.

use super::container::{self, Entry};
use crate::problem::Result;

/// The entries of a zip file.
pub(crate) struct Zip<'a> {
    bytes: &'a [u8],
    entries: Vec<Entry>,
}

impl<'a> Zip<'a> {
    /// Reads the directory.
    ///
    /// **Errors**: as for a package.
    pub(crate) fn read(bytes: &'a [u8]) -> Result<Self> {
        Ok(Zip { bytes, entries: container::entries(bytes)? })
    }

    /// Whether there is an entry of that name.
    pub(crate) fn has(&self, name: &str) -> bool {
        self.entries.iter().any(|entry| entry.name == name)
    }

    /// The bytes of an entry, or none.
    ///
    /// **Errors**: `damaged-zip`.
    pub(crate) fn part(&self, name: &str) -> Result<Option<Vec<u8>>> {
        self.entries.iter().find(|entry| entry.name == name).map(|entry| entry.read(self.bytes)).transpose()
    }
}
