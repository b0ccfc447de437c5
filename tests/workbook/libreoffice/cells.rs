//! Cells as a file stores them, read without hence's own reader; and small changes to them.

use std::collections::BTreeMap;

use hence_workbook::model::Workbook;
use hence_workbook::package::{Changes, Package};
use hence_workbook::patch::{CellWrite, patch_sheet};
use hence_workbook::references::Cell;
use quick_xml::Reader;
use quick_xml::events::Event;

/// A stored value.
#[derive(Clone, Debug, PartialEq)]
pub enum Stored {
    Nothing,
    Number(f64),
    Text(String),
    Error(String),
}

/// A cell of a file.
#[derive(Clone, Debug, PartialEq)]
pub struct FileCell {
    /// It holds a formula.
    pub formula: bool,
    /// Its value, of a formula the stored result.
    pub value: Stored,
}

/// Every stored cell by sheet name and place.
pub type Cells = BTreeMap<(String, Cell), FileCell>;

pub fn package(bytes: &[u8]) -> Package {
    Package::from_bytes("book.xlsx", bytes.to_vec()).expect("a package")
}

/// Reads all cells of a workbook.
pub fn cells(bytes: &[u8]) -> Cells {
    let package = package(bytes);
    let book = Workbook::read(&package).expect("a workbook");
    let strings = match package.part("xl/sharedStrings.xml").expect("a readable part") {
        Some(xml) => texts(&String::from_utf8(xml).expect("UTF-8")),
        None => Vec::new(),
    };
    let mut cells = Cells::new();
    for sheet in &book.sheets {
        let xml = package.part(&sheet.part).expect("a readable part").expect("a sheet part");
        sheet_cells(&String::from_utf8(xml).expect("UTF-8"), &strings, |cell, read| {
            cells.insert((sheet.name.clone(), cell), read);
        });
    }
    cells
}

/// The texts of the shared strings, runs joined.
fn texts(xml: &str) -> Vec<String> {
    let mut reader = Reader::from_str(xml);
    let (mut texts, mut inside) = (Vec::new(), false);
    loop {
        match reader.read_event().expect("well-formed") {
            Event::Start(tag) if tag.local_name().as_ref() == b"si" => texts.push(String::new()),
            Event::Empty(tag) if tag.local_name().as_ref() == b"si" => texts.push(String::new()),
            Event::Start(tag) if tag.local_name().as_ref() == b"t" => inside = true,
            Event::End(tag) if tag.local_name().as_ref() == b"t" => inside = false,
            event => {
                if let (true, Some(last)) = (inside, texts.last_mut()) {
                    last.push_str(&text_of(&event));
                }
                if matches!(event, Event::Eof) {
                    return texts;
                }
            }
        }
    }
}

fn text_of(event: &Event) -> String {
    match event {
        Event::Text(text) => text.decode().expect("UTF-8").into_owned(),
        Event::GeneralRef(reference) => {
            let name = reference.decode().expect("UTF-8");
            let whole = format!("&{name};");
            quick_xml::escape::unescape(&whole).expect("a known entity").into_owned()
        }
        _ => String::new(),
    }
}

fn sheet_cells(xml: &str, strings: &[String], mut keep: impl FnMut(Cell, FileCell)) {
    let mut reader = Reader::from_str(xml);
    let (mut at, mut kind, mut formula, mut value, mut inside) =
        (None, String::new(), false, None::<String>, false);
    let attribute = |tag: &quick_xml::events::BytesStart, name: &str| {
        let found = tag.try_get_attribute(name).expect("well-formed");
        found.map(|a| String::from_utf8(a.value.into_owned()).expect("UTF-8"))
    };
    loop {
        let event = reader.read_event().expect("well-formed");
        match &event {
            Event::Start(tag) if tag.local_name().as_ref() == b"c" => {
                at = attribute(tag, "r").map(|r| r.parse::<Cell>().expect("a cell"));
                kind = attribute(tag, "t").unwrap_or_default();
                (formula, value) = (false, None);
            }
            Event::Start(tag) | Event::Empty(tag) if tag.local_name().as_ref() == b"f" => formula = true,
            Event::Start(tag) if matches!(tag.local_name().as_ref(), b"v" | b"t") => {
                inside = true;
                value.get_or_insert_default();
            }
            Event::End(tag) if matches!(tag.local_name().as_ref(), b"v" | b"t") => inside = false,
            Event::End(tag) if tag.local_name().as_ref() == b"c" => {
                let stored = match (value.take(), kind.as_str()) {
                    (None, _) => Stored::Nothing,
                    (Some(v), "s") => Stored::Text(strings[v.parse::<usize>().expect("an index")].clone()),
                    (Some(v), "str" | "inlineStr") => Stored::Text(v),
                    (Some(v), "e") => Stored::Error(v),
                    // openpyxl writes an empty element for what it did not compute.
                    (Some(v), _) if v.is_empty() => Stored::Nothing,
                    (Some(v), _) => Stored::Number(v.parse().expect("a number")),
                };
                if let Some(cell) = at.take() {
                    keep(cell, FileCell { formula, value: stored });
                }
            }
            Event::Eof => return,
            event if inside => {
                if let Some(value) = &mut value {
                    value.push_str(&text_of(event));
                }
            }
            _ => {}
        }
    }
}

/// The workbook with other contents in some cells of a sheet; all else stays.
pub fn changed(bytes: &[u8], sheet: &str, writes: &[(&str, CellWrite)]) -> Vec<u8> {
    let package = package(bytes);
    let book = Workbook::read(&package).expect("a workbook");
    let part = &book.sheets[book.sheet_index(sheet).expect("the sheet")].part;
    let xml = package.part(part).expect("a readable part").expect("a sheet part");
    let writes = writes.iter().map(|(cell, write)| (cell.parse().expect("a cell"), write.clone())).collect();
    let xml = patch_sheet(&xml, &writes).unwrap_or_else(|error| panic!("{error}"));
    let mut changes = Changes::default();
    changes.replace.insert(part.clone(), xml);
    package.write(&changes).unwrap_or_else(|error| panic!("{error}"))
}

/// What the verdict cell, a formula, has stored.
pub fn stored_verdict(bytes: &[u8]) -> Stored {
    let package = package(bytes);
    let book = Workbook::read(&package).expect("a workbook");
    let name = book.find_name("hence_verdict", None).expect("the verdict's name");
    let hence_workbook::references::NameTarget::Cells(at) = book.resolve(name) else {
        panic!("the verdict's name is no cell")
    };
    let cell = cells(bytes).remove(&(at.sheet.clone(), at.range.first)).expect("the verdict's cell");
    assert!(cell.formula, "the verdict is live");
    cell.value
}

/// The verdict cell's text.
pub fn verdict(bytes: &[u8]) -> String {
    match stored_verdict(bytes) {
        Stored::Text(text) => text,
        other => panic!("the verdict cell holds {other:?}"),
    }
}
