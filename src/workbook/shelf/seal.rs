//! The record that an output carries, and the seal by which a later run knows that nothing in it was changed since.
//!
//! The record is a part that no relationship leads to: spreadsheet programs pass over it, and leave it out when they save.
//! It comes last in the file. Its seal is a hash of the file without it, so that both can be made again and compared.

use serde::{Deserialize, Serialize};

use super::Record;
use crate::package::{Changes, Package, edit_content_types, sha256};
use crate::problem::{Place, Problem, Result};

/// The part of a summary that holds its seal.
const SUMMARY_PART: &str = "hence/summary.json";
/// The part.
const PART: &str = "hence/record.json";
/// Its content type.
const PART_TYPE: &str = "application/json";
/// The part of a package that lists content types.
const TYPES: &str = "[Content_Types].xml";

/// What the part holds.
#[derive(Serialize, Deserialize)]
struct Sealed {
    seal: String,
    record: Record,
}

/// Makes room for the part in what is to become of a package: an earlier one leaves, and its content type is listed.
pub(crate) fn prepare(package: &Package, changes: &mut Changes) -> Result<()> {
    prepare_for(PART, package, changes)
}

fn prepare_for(part: &str, package: &Package, changes: &mut Changes) -> Result<()> {
    if package.has(part) {
        changes.remove.insert(part.to_owned());
    }
    let types = match changes.replace.get(TYPES) {
        Some(types) => types.clone(),
        None => package.part(TYPES)?.unwrap_or_default(),
    };
    let types = edit_content_types(&types, &[part], &[(part, PART_TYPE)], &[])?;
    changes.replace.insert(TYPES.to_owned(), types);
    Ok(())
}

/// The name of the part, for those who check what has come into a package.
pub(crate) fn part() -> &'static str {
    PART
}

/// A package, [prepared](prepare), with its record put in. The record's places are left out: where an output lies never
/// enters it.
pub(crate) fn sealed(bytes: Vec<u8>, record: &Record) -> Result<Vec<u8>> {
    let record = Record { output: None, output_sha256: None, ..record.clone() };
    let sealed = Sealed { seal: sha256(&bytes), record };
    let text = serde_json::to_vec(&sealed).map_err(|error| {
        Problem::error("package-change", Place::default(), format!("the record cannot be written: {error}"))
    })?;
    let bare = Package::from_bytes("record", bytes)?;
    bare.write(&Changes { add: vec![(PART.to_owned(), text)], ..Changes::default() })
}

/// The record of an output of hence in which nothing was changed since; none of any other file.
pub fn record_of(output: &Package) -> Option<Record> {
    let text = output.part(PART).ok()??;
    let Sealed { record, .. } = serde_json::from_slice(&text).ok()?;
    let without = Changes { remove: [PART.to_owned()].into(), ..Changes::default() };
    let again = sealed(output.write(&without).ok()?, &record).ok()?;
    (again == output.bytes()).then_some(record)
}

/// What the part of a summary holds.
#[derive(Serialize, Deserialize)]
struct SealedSummary {
    seal: String,
    inputs: Vec<String>,
}

/// A summary with its seal and the inputs that it is over.
pub(super) fn sealed_summary(bytes: Vec<u8>, inputs: Vec<String>) -> Result<Vec<u8>> {
    let package = Package::from_bytes("summary", bytes)?;
    let mut room = Changes::default();
    prepare_for(SUMMARY_PART, &package, &mut room)?;
    let bare = Package::from_bytes("summary", package.write(&room)?)?;
    let sealed = SealedSummary { seal: sha256(bare.bytes()), inputs };
    let text = serde_json::to_vec(&sealed).map_err(|error| {
        Problem::error("package-change", Place::default(), format!("the seal cannot be written: {error}"))
    })?;
    bare.write(&Changes { add: vec![(SUMMARY_PART.to_owned(), text)], ..Changes::default() })
}

/// The inputs of a summary of hence in which nothing was changed since; none of any other file.
pub(super) fn inputs_of_summary(summary: &Package) -> Option<Vec<String>> {
    let text = summary.part(SUMMARY_PART).ok()??;
    let SealedSummary { inputs, .. } = serde_json::from_slice(&text).ok()?;
    let without = Changes { remove: [SUMMARY_PART.to_owned()].into(), ..Changes::default() };
    let again = sealed_summary(summary.write(&without).ok()?, inputs.clone()).ok()?;
    (again == summary.bytes()).then_some(inputs)
}
