//! Workbooks for these tests: the one that `hence start` writes, with things typed into it.

use std::collections::{BTreeMap, BTreeSet};
use std::path::{Path, PathBuf};

use hence_workbook::model::Workbook;
use hence_workbook::package::{Changes, Package};
use hence_workbook::patch::{Cached, CellWrite, patch_sheet};
use hence_workbook::reading::{ReadCell, Sheets, Value};
use hence_workbook::references::{Cell, Range, SheetRange};

/// The sheet to type into.
pub const SHEET: &str = "Appraisal";

/// A workbook in a folder of its own.
pub struct Book {
    folder: tempfile::TempDir,
    /// The file.
    pub path: PathBuf,
    bytes: Vec<u8>,
}

impl Book {
    /// A file of these bytes.
    pub fn of(name: &str, bytes: Vec<u8>) -> Self {
        let folder = tempfile::tempdir().expect("a temporary folder");
        let path = folder.path().join(name);
        std::fs::write(&path, &bytes).expect("the workbook is written");
        Book { folder, path, bytes }
    }

    /// Its path as an argument.
    pub fn arg(&self) -> &str {
        self.path.to_str().expect("a path in UTF-8")
    }

    /// A path beside it.
    pub fn beside(&self, name: &str) -> PathBuf {
        self.folder.path().join(name)
    }

    /// A path beside it, as an argument.
    pub fn beside_arg(&self, name: &str) -> String {
        self.beside(name).to_str().expect("a path in UTF-8").to_owned()
    }

    /// The bytes it was made of.
    pub fn bytes(&self) -> &[u8] {
        &self.bytes
    }

    /// The input is as it was, and only these files stand beside it.
    pub fn is_clean(&self, outputs: &[&str]) {
        assert_eq!(
            std::fs::read(&self.path).expect("the input is there"),
            self.bytes,
            "the input was written"
        );
        let own = self.path.file_name().unwrap().to_str().unwrap();
        let expected: BTreeSet<&str> = outputs.iter().copied().chain([own]).collect();
        let listed: Vec<String> = std::fs::read_dir(self.folder.path())
            .expect("the folder is there")
            .map(|entry| entry.unwrap().file_name().into_string().unwrap())
            .collect();
        assert_eq!(listed.iter().map(String::as_str).collect::<BTreeSet<_>>(), expected);
    }
}

/// The workbook of `hence start` with cells of its first sheet changed: a number, `=formula>result`, or a text.
pub fn typed(cells: &[(&str, &str)]) -> Book {
    let start =
        Package::from_bytes("plan.xlsx", hence_workbook::start::start().expect("a workbook")).unwrap();
    Book::of("plan.xlsx", with(&start, SHEET, cells))
}

/// A plan with figures that are checked by hand: works of 1000 in 2026, benefits of 600 in 2027 and 2028, at 3.5%.
pub fn plan(more: &[(&str, &str)]) -> Book {
    let mut cells = vec![("B4", "0.035"), ("B9", "1000"), ("C18", "600"), ("D18", "600")];
    cells.extend(more);
    typed(&cells)
}

/// A package with cells of a sheet changed.
pub fn with(package: &Package, sheet: &str, cells: &[(&str, &str)]) -> Vec<u8> {
    let book = Workbook::read(package).expect("a workbook");
    let part = &book.sheets[book.sheet_index(sheet).expect("the sheet")].part;
    let mut writes = BTreeMap::new();
    for (at, content) in cells {
        let write = match (content.strip_prefix('='), content.parse::<f64>()) {
            (Some(formula), _) => {
                let (text, result) = formula.rsplit_once('>').expect("a formula with its result");
                let cached = result.parse().map_or(Cached::None, Cached::Number);
                CellWrite::Formula(text.to_owned(), cached)
            }
            (None, Ok(number)) => CellWrite::Number(number),
            (None, Err(_)) => CellWrite::Text((*content).to_owned()),
        };
        writes.insert(at.parse::<Cell>().expect("a cell"), write);
    }
    let xml = patch_sheet(&package.part(part).unwrap().unwrap(), &writes).expect("the sheet takes it");
    let replace = BTreeMap::from([(part.clone(), xml)]);
    package.write(&Changes { replace, ..Changes::default() }).expect("a package")
}

/// The same package without any defined name.
pub fn without_names(package: &Package) -> Vec<u8> {
    let part = package.workbook_part().to_owned();
    let xml = String::from_utf8(package.part(&part).unwrap().unwrap()).unwrap();
    let (start, end) = (xml.find("<definedNames>").unwrap(), xml.find("</definedNames>").unwrap());
    let bare = format!("{}{}", &xml[..start], &xml[end + "</definedNames>".len()..]);
    let replace = BTreeMap::from([(part, bare.into_bytes())]);
    package.write(&Changes { replace, ..Changes::default() }).expect("a package")
}

/// What a cell of a file holds.
pub fn cell(path: &Path, sheet: &str, at: &str) -> ReadCell {
    let package = Package::open(path).expect("the workbook opens");
    let book = Workbook::read(&package).expect("a workbook");
    let cell: Cell = at.parse().expect("a cell");
    let range = SheetRange { sheet: sheet.to_owned(), range: Range { first: cell, last: cell } };
    let grid = Sheets::open(&package, &book).unwrap().range(&range).expect("the cell can be read");
    grid.get(cell).cloned().unwrap_or_default()
}

/// The number in a cell.
pub fn number(path: &Path, sheet: &str, at: &str) -> f64 {
    match cell(path, sheet, at).value {
        Value::Number(number) => number,
        other => panic!("{sheet}!{at} holds {other:?}"),
    }
}

/// Whether any part of a file holds a text.
pub fn holds(path: &Path, text: &str) -> bool {
    let package = Package::open(path).expect("the workbook opens");
    let parts: Vec<String> = package.parts().map(str::to_owned).collect();
    parts.iter().any(|part| {
        let bytes = package.part(part).unwrap().unwrap_or_default();
        bytes.windows(text.len()).any(|window| window == text.as_bytes())
    })
}
