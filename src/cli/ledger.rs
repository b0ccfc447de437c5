//! The ledger of a run: a line of JSON for each workbook, with the hashes of what went in and what came out.

use std::io::Read;
use std::path::Path;

use hence_workbook::shelf::Record;
use serde::Serialize;

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

/// Whether a file is a ledger, or empty.
pub fn is_one(path: &Path) -> bool {
    let mut begin = Vec::new();
    let read = std::fs::File::open(path).map(|file| file.take(BEGIN.len() as u64).read_to_end(&mut begin));
    read.is_ok_and(|read| read.is_ok()) && (begin.is_empty() || begin == BEGIN.as_bytes())
}
