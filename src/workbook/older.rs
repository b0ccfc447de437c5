//! Workbooks of other formats (.xls, .xlsb, .ods): their values as a workbook of the format that hence fills.
//!
//! The readers of these formats trust what a file says of its own sizes, and a hostile one can make them ask for more
//! memory than there is. Whoever calls [`convert`] on a file that is not their own does so in a process with limits.

use std::ffi::OsStr;
use std::io::Cursor;

use calamine::{Ods, Reader, Sheet as Listed, SheetType, SheetVisible, Xls, Xlsb};
use serde::{Deserialize, Serialize};

use crate::package::{Package, Zip};
use crate::problem::{Place, Problem, Result, WorkbookError};
use crate::writer::{self, valid_sheet_name};

mod cells;
mod names;

/// A format that is read for its values only.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum OldFormat {
    /// The binary workbook of before 2007.
    Xls,
    /// The binary workbook in a zip package.
    Xlsb,
    /// An OpenDocument spreadsheet.
    Ods,
}

impl OldFormat {
    /// The extensions that such files have, without the dot.
    pub const EXTENSIONS: [&str; 3] = ["xls", "xlsb", "ods"];

    /// Whether a file's extension is one of them.
    pub fn has_extension(extension: &OsStr) -> bool {
        Self::EXTENSIONS.iter().any(|known| extension.eq_ignore_ascii_case(known))
    }

    /// The format of a file by what it holds, whatever its name; none where it is another or damaged.
    pub fn of(bytes: &[u8]) -> Option<Self> {
        if bytes.starts_with(b"\xD0\xCF\x11\xE0\xA1\xB1\x1A\xE1") {
            let streams = |name: &str| {
                let wide: Vec<u8> = name.encode_utf16().flat_map(u16::to_le_bytes).collect();
                bytes.windows(wide.len()).any(|window| window == wide)
            };
            return (!streams("EncryptedPackage")).then_some(OldFormat::Xls);
        }
        let zip = bytes.starts_with(b"PK").then(|| Zip::read(bytes).ok()).flatten()?;
        if zip.has("xl/workbook.bin") {
            return Some(OldFormat::Xlsb);
        }
        let kind = zip.part("mimetype").ok().flatten()?;
        kind.starts_with(b"application/vnd.oasis.opendocument.spreadsheet").then_some(OldFormat::Ods)
    }

    fn words(self) -> &'static str {
        match self {
            OldFormat::Xls => "an old binary workbook (.xls)",
            OldFormat::Xlsb => "a binary workbook (.xlsb)",
            OldFormat::Ods => "an OpenDocument spreadsheet (.ods)",
        }
    }
}

/// A workbook's values, and what of it was left behind.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Converted {
    /// The bytes of an .xlsx package with the values, and names as far as they could be read.
    #[serde(skip)]
    pub bytes: Vec<u8>,
    /// What was not carried over, a sentence each.
    pub lost: Vec<String>,
}

/// A workbook of any format that is read; of an older one, its values. Not for files that could be hostile, but in a
/// process with limits.
///
/// # Errors
/// As [`convert`] and [`Package::from_bytes`].
pub fn open(name: &str, bytes: Vec<u8>) -> Result<Package> {
    if OldFormat::of(&bytes).is_none() {
        return Package::from_bytes(name, bytes);
    }
    let values = convert(name, &bytes)?;
    Package::converted(name, &bytes, values)
}

/// The values of a workbook of another format.
///
/// # Arguments
/// `name`: the file's name, for messages. `bytes`: the file.
///
/// # Errors
/// `other-format` where it is none of them, `damaged-file` where it cannot be read, and where a sheet does not fit into
/// an .xlsx workbook.
pub fn convert(name: &str, bytes: &[u8]) -> Result<Converted> {
    let Some(format) = OldFormat::of(bytes) else {
        let message = format!("{name} is no workbook of a format that is read");
        return Err(Problem::error("other-format", Place::default(), message).hint(SAVE_AS).into());
    };
    let source = Cursor::new(bytes);
    let damaged = |why: &dyn std::fmt::Display| -> WorkbookError {
        let message = format!("{name}, {}, cannot be read: {why}", format.words());
        Problem::error("damaged-file", Place::default(), message).hint(SAVE_AS).into()
    };
    unbroken(&damaged, || match format {
        OldFormat::Xls => {
            let mut book = Xls::new(source).map_err(|e| damaged(&e))?;
            let names = names::unquoted(book.defined_names());
            carried(format, &mut book, names, &damaged)
        }
        OldFormat::Xlsb => {
            let mut book = Xlsb::new(source).map_err(|e| damaged(&e))?;
            let names = names::unquoted(book.defined_names());
            carried(format, &mut book, names, &damaged)
        }
        OldFormat::Ods => {
            let content = Zip::read(bytes)?.part("content.xml")?.unwrap_or_default();
            let names = names::open_document(&content)?;
            let mut book = Ods::new(source).map_err(|e| damaged(&e))?;
            carried(format, &mut book, names, &damaged)
        }
    })
}

/// What reads the file, where a panic says that the reader did not expect what the file holds.
fn unbroken<T>(
    damaged: &dyn Fn(&dyn std::fmt::Display) -> WorkbookError,
    read: impl FnOnce() -> Result<T>,
) -> Result<T> {
    // Nothing that the reader had is used after it.
    std::panic::catch_unwind(std::panic::AssertUnwindSafe(read))
        .unwrap_or_else(|_| Err(damaged(&"it holds what such a file never does")))
}

const SAVE_AS: &str = "save it as an Excel workbook (.xlsx) in a spreadsheet program";

fn carried<'a, R>(
    format: OldFormat,
    book: &mut R,
    found: Vec<names::Found>,
    damaged: &dyn Fn(&dyn std::fmt::Display) -> WorkbookError,
) -> Result<Converted>
where
    R: Reader<Cursor<&'a [u8]>>,
    R::Error: std::fmt::Display,
{
    let listed: Vec<Listed> = book.sheets_metadata().to_vec();
    let (kept, dropped): (Vec<Listed>, Vec<Listed>) =
        listed.into_iter().partition(|sheet| sheet.typ == SheetType::WorkSheet);
    let mut counts = cells::Counts::default();
    let mut sheets = Vec::new();
    for sheet in &kept {
        if !valid_sheet_name(&sheet.name) {
            let message =
                format!("the sheet's name {:?} is none that an .xlsx workbook may have", sheet.name);
            return Err(Problem::error("sheet-name", Place::name(&sheet.name), message)
                .hint("give the sheet a name of at most 31 characters without []:*?/\\")
                .into());
        }
        let range = book.worksheet_range(&sheet.name).map_err(|e| damaged(&e))?;
        let formulas = book.worksheet_formula(&sheet.name).map_err(|e| damaged(&e))?;
        counts.formulas += formulas.used_cells().count();
        sheets.push(cells::sheet(&sheet.name, &range, &mut counts)?);
    }
    if sheets.is_empty() {
        return Err(damaged(&"it holds no sheet with cells"));
    }
    let known: Vec<&str> = kept.iter().map(|sheet| sheet.name.as_str()).collect();
    let (defined, unread) = names::defined(found, &known);
    let texts: Vec<(&str, &str)> =
        defined.iter().map(|(name, text)| (name.as_str(), text.as_str())).collect();
    let bytes = writer::workbook(&sheets, &texts)?;
    let mut lost = vec![format!(
        "this is {}: its values were read, and everything else but names was left behind (number formats other than \
         dates, fonts, colours, column widths, charts, pictures, notes, validation, macros, protection)",
        format.words()
    )];
    lost.extend(counts.words());
    let list =
        |sheets: &[&Listed]| sheets.iter().map(|sheet| sheet.name.as_str()).collect::<Vec<_>>().join(", ");
    let hidden: Vec<&Listed> = kept.iter().filter(|sheet| sheet.visible != SheetVisible::Visible).collect();
    if !hidden.is_empty() {
        lost.push(format!("hidden sheets can be seen now: {}", list(&hidden)));
    }
    if !dropped.is_empty() {
        lost.push(format!(
            "sheets without cells of their own: {}",
            list(&dropped.iter().collect::<Vec<_>>())
        ));
    }
    if !unread.is_empty() {
        lost.push(format!("names that do not point to cells of one sheet: {}", unread.join(", ")));
    }
    Ok(Converted { bytes, lost })
}

#[cfg(test)]
mod tests {
    use super::unbroken;
    use crate::problem::{Place, Problem};

    #[test]
    fn a_reader_that_panics_met_a_damaged_file() {
        let damaged = |why: &dyn std::fmt::Display| {
            Problem::error("damaged-file", Place::default(), why.to_string()).into()
        };
        let broken = unbroken(&damaged, || {
            let record: [u8; 2] = [1, 0];
            Ok(record[usize::from(record[0]) + 1..usize::from(record[1])].len())
        });
        assert_eq!(broken.unwrap_err().problems()[0].code, "damaged-file");
        assert_eq!(unbroken(&damaged, || Ok(2)).unwrap(), 2);
    }
}
