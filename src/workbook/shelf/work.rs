//! The work on one workbook of a run, done in a process of its own: filled, or found done by an earlier run.

use std::path::Path;

use hence_core::Catalogue;
use serde::{Deserialize, Serialize};

use super::{Record, record_of, sha256, summary};
use crate::fill::{FillRequest, fill};
use crate::model::Workbook;
use crate::older;
use crate::own::own_sheets;
use crate::package::{Package, may_replace, same_file};
use crate::problem::{Place, Problem, Result, WorkbookError};

/// The extensions of the workbooks that are read, as a walk through folders finds them.
pub const EXTENSIONS: [&str; 7] = ["xlsx", "xlsm", "xltx", "xltm", "xls", "xlsb", "ods"];

/// What is to be done, besides where from and where to.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Order {
    /// What is asked for.
    pub request: FillRequest,
    /// Whatever is at the place of the output may be replaced.
    pub force: bool,
    /// An output that is what this run would make is kept; an earlier one of hence is replaced.
    pub resume: bool,
    /// The workbook was found in a folder, not named: one that hence filled before is passed over.
    pub found: bool,
}

/// What became of a workbook.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub enum Done {
    /// It was filled; the bytes of its output follow.
    Filled(Record),
    /// Its output is there already.
    Kept(Record),
    /// It was not filled, for what its record says.
    Failed(Record),
    /// It is an output of hence, by the audit sheets in it, or a summary.
    Audited,
}

/// Does it. Nothing is written: the bytes of the output come back with what became of the workbook.
pub fn work(input: &Path, output: &Path, order: &Order, catalogue: &Catalogue) -> (Done, Option<Vec<u8>>) {
    let mut input_sha256 = None;
    match attempt(input, output, order, catalogue, &mut input_sha256) {
        Ok(done) => done,
        Err(error) => {
            let record = Record::failed(order.request.sha256(catalogue), error.problems());
            (Done::Failed(Record { input_sha256, ..record }), None)
        }
    }
}

fn attempt(
    input: &Path,
    output: &Path,
    order: &Order,
    catalogue: &Catalogue,
    input_sha256: &mut Option<String>,
) -> Result<(Done, Option<Vec<u8>>)> {
    let bytes = Package::read(input)?;
    let hash = sha256(&bytes);
    *input_sha256 = Some(hash.clone());
    let package = older::open(&Package::name_of(input), bytes)?;
    if same_file(input, output) {
        return Err(output_is_input(output));
    }
    let ours = |book: Workbook| !own_sheets(&book).is_empty() || summary::is_one(&book);
    if order.found && Workbook::read(&package).is_ok_and(ours) {
        return Ok((Done::Audited, None));
    }
    let mut unknown = None;
    if order.resume && output.symlink_metadata().is_ok() {
        may_replace(output, true)?;
        let wanted = Wanted { input: package.file_name(), input_sha256: &hash, order, catalogue };
        match earlier(output, &wanted)? {
            Earlier::Done(record) => return Ok((Done::Kept(*record), None)),
            Earlier::Outdated => {}
            Earlier::Unknown(bytes) => unknown = Some(bytes).filter(|_| !order.force),
        }
    } else {
        may_replace(output, order.force)?;
    }
    let filled = fill(&package, &order.request, catalogue)?;
    if unknown.is_some_and(|bytes| !filled.bytes.starts_with(&bytes)) {
        return Err(changed(output));
    }
    let mut record = Record::filled(&filled.meta, &filled.report);
    record.output_sha256 = Some(sha256(&filled.bytes));
    Ok((Done::Filled(record), Some(filled.bytes)))
}

/// That the output would be the input.
pub fn output_is_input(output: &Path) -> WorkbookError {
    let message = format!("the output {} is the input, which is never written", output.display());
    Problem::error("output-is-input", Place::default(), message).hint("give --out another name").into()
}

/// What the output has to have been made from to be kept.
struct Wanted<'a> {
    input: &'a str,
    input_sha256: &'a str,
    order: &'a Order,
    catalogue: &'a Catalogue,
}

impl Wanted<'_> {
    fn is(&self, record: &Record) -> bool {
        record.input == self.input
            && record.input_sha256.as_deref() == Some(self.input_sha256)
            && record.request_sha256 == self.order.request.sha256(self.catalogue)
    }
}

/// What stands at the place of an output.
enum Earlier {
    /// What this run would make.
    Done(Box<Record>),
    /// What hence made from something else, not touched since.
    Outdated,
    /// Something else, with its bytes: it may be replaced where it is the beginning of the output, cut short, and else
    /// not, since what a person or another program did there would be lost.
    Unknown(Vec<u8>),
}

fn earlier(output: &Path, wanted: &Wanted<'_>) -> Result<Earlier> {
    let bytes = Package::read(output)?;
    let Ok(there) = Package::from_bytes("output", bytes.clone()) else { return Ok(Earlier::Unknown(bytes)) };
    let Some(record) = record_of(&there) else { return Ok(Earlier::Unknown(bytes)) };
    let output_sha256 = Some(sha256(&bytes));
    Ok(if wanted.is(&record) {
        Earlier::Done(Box::new(Record { output_sha256, ..record }))
    } else {
        Earlier::Outdated
    })
}

/// That another program saved an output.
fn changed(output: &Path) -> WorkbookError {
    let message = format!("{} is not as hence left it, or was not made by hence", output.display());
    Problem::error("output-changed", Place::default(), message)
        .hint("move it away, or replace it with --force")
        .into()
}
