//! What a file is that is no workbook of the formats read here, so that each gets its own message.

use super::{Format, Package, not_a_workbook};
use crate::problem::{Place, Problem, Result, WorkbookError};

fn refuse(code: &'static str, message: impl Into<String>, hint: &str) -> WorkbookError {
    Problem::error(code, Place::default(), message).hint(hint).into()
}

const SAVE_AS: &str = "save it as an Excel workbook (.xlsx) in a spreadsheet program";

/// Passes files that begin as a zip archive does.
pub(super) fn check_zip(name: &str, bytes: &[u8]) -> Result<()> {
    if bytes.starts_with(b"PK\x03\x04") || bytes.starts_with(b"PK\x05\x06") {
        return Ok(());
    }
    if bytes.is_empty() {
        return Err(refuse("empty-file", format!("{name} is empty"), "get the file again from its source"));
    }
    if bytes.starts_with(b"\xD0\xCF\x11\xE0\xA1\xB1\x1A\xE1") {
        return Err(compound_file(name, bytes));
    }
    let start = bytes[..bytes.len().min(1024)].trim_ascii_start().to_ascii_lowercase();
    let start = start.strip_prefix(b"\xEF\xBB\xBF").unwrap_or(&start);
    let text = |mark: &[u8]| start.windows(mark.len()).any(|window| window == mark);
    if start.starts_with(b"<") && (text(b"<html") || text(b"<!doctype html")) {
        return Err(refuse(
            "html-file",
            format!("{name} is a web page (HTML) under a workbook's name"),
            "open it in a spreadsheet program and save it as .xlsx, or download the workbook again",
        ));
    }
    if start.starts_with(b"<?xml") {
        return Err(refuse("other-format", format!("{name} is an XML file and no .xlsx workbook"), SAVE_AS));
    }
    Err(refuse("not-a-package", format!("{name} is no .xlsx workbook: it is not a zip package"), SAVE_AS))
}

/// OLE compound files are old .xls workbooks or the wrapping of an encrypted one, told by stream names.
fn compound_file(name: &str, bytes: &[u8]) -> WorkbookError {
    let holds = |stream: &str| {
        let wide: Vec<u8> = stream.encode_utf16().flat_map(u16::to_le_bytes).collect();
        bytes.windows(wide.len()).any(|window| window == wide)
    };
    if holds("EncryptedPackage") || holds("EncryptionInfo") {
        return refuse(
            "password-protected",
            format!("{name} is protected by a password"),
            "open it in a spreadsheet program, remove the password, save it, and give hence that copy",
        );
    }
    refuse("old-format", format!("{name} is an old binary workbook (.xls) or another OLE file"), SAVE_AS)
}

/// The error for a zip file without content types.
pub(super) fn other_package(package: &Package) -> WorkbookError {
    let document = package.part("mimetype").ok().flatten();
    if document.is_some_and(|kind| kind.starts_with(b"application/vnd.oasis.opendocument")) {
        return refuse("other-format", "the file is an OpenDocument file (.ods or the like)", SAVE_AS);
    }
    not_a_workbook("it is a zip file without the list of content types that a workbook has")
}

/// The format by the main part's content type, and whether it is that of a template.
pub(super) fn format_of(kind: &str) -> Result<(Format, bool)> {
    let lower = kind.to_ascii_lowercase();
    for format in [Format::Xlsx, Format::Xlsm] {
        for (known, template) in [(format.content_type(), false), (format.template_type(), true)] {
            if lower == known.to_ascii_lowercase() {
                return Ok((format, template));
            }
        }
    }
    let kind = lower;
    if kind.contains("ms-excel.addin") {
        return Err(refuse("other-format", "the file is an add-in and no workbook", SAVE_AS));
    }
    if kind.contains("ms-excel.sheet.binary") {
        return Err(refuse("other-format", "the file is a binary workbook (.xlsb)", SAVE_AS));
    }
    if kind.contains("wordprocessingml") || kind.contains("presentationml") {
        return Err(not_a_workbook("it is a text document or a presentation"));
    }
    Err(not_a_workbook(&format!(
        "its main part is of the type {:?}",
        kind.chars().take(100).collect::<String>()
    )))
}
