//! Plan files: which cells of a workbook, or of a shelf of alike workbooks, are what to an appraisal.
//!
//! A plan is a TOML text for workbooks that have no names of hence's and cannot be given any. One plan serves every
//! workbook that is laid out alike. Roles are written as in names, without `hence_`:
//!
//! ```toml
#![doc = include_str!("planfile/example.toml")]
//! ```
//!
//! ```text
#![doc = include_str!("planfile/keys.txt")]
//! ```
//!
//! An option's entry comes before its appraisal's, that before the plan's. What the command line says comes before the
//! plan, the plan before the names of the workbook; where plan and workbook state another base, basis, timing or price
//! basis, a warning says so. Beside `[[appraisal]]`, names of the workbook count only for settings and years that the
//! plan leaves out, since nothing says to which appraisal their flows belong.

mod apply;
mod parse;
mod propose;

use std::io::Read;
use std::path::Path;

use serde::{Deserialize, Serialize};
use sha2::{Digest, Sha256};

use crate::model::Workbook;
use crate::problem::{Place, Problem, Result, WorkbookError};

pub use apply::Part;
pub(crate) use apply::{Planned, Says};
use parse::Whole;
pub use propose::{Proposal, propose};

/// A plan, as an example.
pub const EXAMPLE: &str = include_str!("planfile/example.toml");
/// The keys of a plan, and what each is.
pub const KEYS: &str = include_str!("planfile/keys.txt");

/// The longest plan that is read, in bytes.
const MAX_BYTES: u64 = 1 << 20;

/// A plan file, read. Stored, it is its text.
#[derive(Clone, Debug, Serialize, Deserialize)]
#[serde(try_from = "Stored", into = "Stored")]
pub struct PlanFile {
    stored: Stored,
    whole: Whole,
}

/// All that a plan is made from.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
struct Stored {
    name: String,
    text: String,
    only: Option<String>,
}

impl PartialEq for PlanFile {
    fn eq(&self, other: &Self) -> bool {
        self.stored == other.stored
    }
}

impl Eq for PlanFile {}

impl From<PlanFile> for Stored {
    fn from(plan: PlanFile) -> Self {
        plan.stored
    }
}

impl TryFrom<Stored> for PlanFile {
    type Error = WorkbookError;

    fn try_from(stored: Stored) -> Result<Self> {
        Ok(PlanFile { whole: parse::parse(&stored.text)?, stored })
    }
}

impl PlanFile {
    /// Reads a plan from a file.
    ///
    /// # Errors
    /// As [`PlanFile::parse`]; `cannot-read`.
    pub fn open(path: &Path) -> Result<Self> {
        let unreadable =
            |what: String| Problem::error("cannot-read", Place::default(), format!("the plan {what}"));
        let mut bytes = Vec::new();
        // Of a file without an end, no more than shows that it is too long.
        std::fs::File::open(path)
            .and_then(|file| file.take(MAX_BYTES + 1).read_to_end(&mut bytes))
            .map_err(|e| unreadable(format!("cannot be read: {e}")))?;
        if bytes.len() as u64 > MAX_BYTES {
            return Err(unreadable(format!("is longer than {MAX_BYTES} bytes, the most that is read")).into());
        }
        let text = String::from_utf8(bytes).map_err(|_| {
            unreadable("is no text in UTF-8".to_owned()).hint("save it as plain text with the encoding UTF-8")
        })?;
        let name = path.file_name().unwrap_or_default().to_string_lossy();
        PlanFile::parse(&name, &text)
    }

    /// Reads the text of a plan.
    ///
    /// # Arguments
    /// `name`: the file's name without folders, for messages and the audit. `text`: its content.
    ///
    /// # Errors
    /// Everything that is wrong with the text, each with its line: `plan-text`, `unknown-role`.
    ///
    /// # Examples
    /// ```
    /// use hence_workbook::planfile::PlanFile;
    /// let plan = PlanFile::parse("shelf.toml", "[settings]\nbasis = \"3.5%\"\n")?;
    /// assert_eq!(plan.name(), "shelf.toml");
    /// let error = PlanFile::parse("shelf.toml", "[roles]\nyeers = \"Flows!C5:Z5\"\n").unwrap_err();
    /// assert!(error.to_string().starts_with("line 2: yeers is no role of hence"), "{error}");
    /// # Ok::<(), hence_workbook::problem::WorkbookError>(())
    /// ```
    pub fn parse(name: &str, text: &str) -> Result<Self> {
        Stored { name: name.to_owned(), text: text.to_owned(), only: None }.try_into()
    }

    /// The file's name, without folders.
    pub fn name(&self) -> &str {
        &self.stored.name
    }

    /// SHA-256 of its text, lower-case hexadecimal: part of what determines an output.
    pub fn sha256(&self) -> String {
        Sha256::digest(self.stored.text.as_bytes()).iter().map(|byte| format!("{byte:02x}")).collect()
    }

    /// The one of its appraisals that it is for, where one was chosen.
    fn chosen(&self) -> Option<&str> {
        self.stored.only.as_deref()
    }

    /// The part that a command about one appraisal reads.
    pub(crate) fn part_of(plan: Option<&PlanFile>, book: &Workbook) -> Result<Option<Part>> {
        plan.map(|plan| plan.part(book)).transpose()
    }

    /// The same plan for one of its appraisals alone.
    #[must_use]
    pub fn only(mut self, appraisal: Option<String>) -> Self {
        self.stored.only = appraisal;
        self
    }
}
