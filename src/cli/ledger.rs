//! The ledger of a run: a line of JSON for each workbook, with the hashes of what went in and what came out.

use std::path::Path;

use hence_workbook::shelf::Record;
use serde::Serialize;
use serde_json::Value;

use crate::json::FilledBook;

/// How every line begins.
const BEGIN: &str = "{\"schema\":1,";

#[derive(Serialize)]
struct Line<'a> {
    schema: u32,
    #[serde(flatten)]
    book: &'a FilledBook,
    version: &'a str,
    sha256: Hashes<'a>,
    bases: Vec<Bases<'a>>,
}

#[derive(Serialize)]
struct Hashes<'a> {
    input: Option<&'a str>,
    output: Option<&'a str>,
    basis: Option<&'a str>,
    request: &'a str,
}

#[derive(Serialize)]
struct Bases<'a> {
    option: &'a str,
    /// What the workbook declares, where it was valued on another.
    declared: Option<&'a str>,
    basis: &'a str,
}

/// The line of one workbook.
pub fn line(record: &Record, book: &FilledBook) -> String {
    let bases = record.report.options.iter().map(|option| Bases {
        option: &option.name,
        declared: option.declared.as_deref(),
        basis: &option.basis,
    });
    let line = Line {
        schema: 1,
        book,
        version: &record.version,
        sha256: Hashes {
            input: record.input_sha256.as_deref(),
            output: record.output_sha256.as_deref(),
            basis: record.basis_sha256.as_deref(),
            request: &record.request_sha256,
        },
        bases: bases.collect(),
    };
    let mut text = serde_json::to_string(&line).unwrap_or_default();
    text.push('\n');
    text
}

/// Whether a file is the ledger of a run over some of these inputs, or empty.
pub fn is_of_run(path: &Path, inputs: &[&str]) -> bool {
    let Ok(text) = std::fs::read_to_string(path) else { return false };
    text.lines().all(|line| {
        let line: Option<Value> = line.starts_with(BEGIN).then(|| serde_json::from_str(line).ok()).flatten();
        line.is_some_and(|line| {
            line["sha256"]["request"].is_string()
                && line["input"].as_str().is_some_and(|input| inputs.contains(&input))
        })
    })
}
