//! An output compared with the file it was made from, by readers other than hence's.

use std::collections::{BTreeMap, BTreeSet};
use std::io::{Cursor, Read};

use hence_workbook::model::Workbook;
use hence_workbook::package::{Package, relationships_part};
use hence_workbook::references::Cell;
use quick_xml::Reader;
use quick_xml::events::{BytesStart, Event};

use super::appraisal::{HEIGHT, Prepared, block, results};

/// What was found of one output.
pub struct Counts {
    /// Parts that are as they were, with their packed bytes.
    pub kept: usize,
    pub replaced: usize,
    pub added: usize,
    pub removed: usize,
    /// Formulas whose stored results are gone.
    pub dropped: usize,
    /// Where the appraisal stands.
    pub sheet: String,
    pub row: u32,
    /// What is not as it should be.
    pub faults: Vec<String>,
}

/// One entry of a zip file.
#[derive(PartialEq)]
struct Entry {
    packed: Vec<u8>,
    content: Vec<u8>,
    /// Method, checksum, time and attributes.
    header: String,
}

fn entries(bytes: &[u8]) -> BTreeMap<String, Entry> {
    let mut zip = zip::ZipArchive::new(Cursor::new(bytes)).expect("a zip file");
    let mut found = BTreeMap::new();
    for i in 0..zip.len() {
        let (name, header, packed) = {
            let mut raw = zip.by_index_raw(i).expect("an entry");
            let mut packed = Vec::new();
            raw.read_to_end(&mut packed).expect("its bytes");
            let header = format!(
                "{:?} {:x} {:?} {:?} {:?} {:?}",
                raw.compression(),
                raw.crc32(),
                raw.last_modified(),
                raw.unix_mode(),
                raw.extra_data(),
                raw.comment()
            );
            (raw.name().expect("its name").into_owned(), header, packed)
        };
        let mut content = Vec::new();
        zip.by_index(i).expect("an entry").read_to_end(&mut content).expect("its content");
        assert!(found.insert(name, Entry { packed, content, header }).is_none(), "two entries of one name");
    }
    found
}

/// Compares an output with the file as it came.
pub fn compare(original: &Package, prepared: &Prepared, output: &[u8]) -> Counts {
    let (old, new) = (entries(original.bytes()), entries(output));
    let book = Workbook::read(original).expect("the workbook");
    let links = original.relationships(original.workbook_part()).expect("its relationships");
    let kind = |end: &'static str| {
        links.iter().filter(move |l| l.kind.ends_with(end)).map(|l| l.target.to_lowercase())
    };
    let rewritten: BTreeSet<String> = [
        "[content_types].xml".to_owned(),
        original.workbook_part().to_lowercase(),
        relationships_part(original.workbook_part()).to_lowercase(),
    ]
    .into_iter()
    .chain(kind("/styles"))
    .collect();
    let chains: BTreeSet<String> = kind("/calcChain").collect();
    let sheets: BTreeSet<String> = book.sheets.iter().map(|sheet| sheet.part.to_lowercase()).collect();

    let (row, sheet) = (prepared.row, prepared.sheet.clone());
    let mut counts =
        Counts { kept: 0, replaced: 0, added: 0, removed: 0, dropped: 0, sheet, row, faults: Vec::new() };
    for (name, before) in &old {
        let key = name.trim_start_matches('/').to_lowercase();
        match new.get(name) {
            Some(after) if after == before => counts.kept += 1,
            Some(_) if rewritten.contains(&key) => counts.replaced += 1,
            Some(after) if sheets.contains(&key) => {
                counts.replaced += 1;
                let own = prepared.existing && prepared.part.eq_ignore_ascii_case(&key);
                let written: BTreeSet<Cell> = if own { block(row).collect() } else { BTreeSet::new() };
                compare_sheets(
                    name,
                    &before.content,
                    &after.content,
                    &written,
                    prepared.existing,
                    &mut counts,
                );
            }
            Some(_) => counts.faults.push(format!("{name} has changed")),
            None if chains.contains(&key) => counts.removed += 1,
            None => counts.faults.push(format!("{name} is gone")),
        }
    }
    counts.added = new.keys().filter(|name| !old.contains_key(*name)).count();
    if !prepared.existing {
        let before = prepared.package.part(&prepared.part).expect("a part").expect("the sheet");
        let written = results(row).into_iter().map(|(at, _)| at).collect();
        compare_sheets("the appraisal", &before, &new[&prepared.part].content, &written, false, &mut counts);
    }
    counts
}

/// `existing`: the file's own formulas may refer to the written cells, which they cannot to a sheet of our own.
fn compare_sheets(
    name: &str,
    before: &[u8],
    after: &[u8],
    written: &BTreeSet<Cell>,
    existing: bool,
    counts: &mut Counts,
) {
    let rows: BTreeSet<u32> = written.iter().map(|at| at.row).collect();
    assert!(rows.len() <= HEIGHT as usize);
    let (old, new) = (Pieces::read(before), Pieces::read(after));
    let held = sheet_rows(before).into_iter().map(|row| row - 1).collect::<BTreeSet<u32>>();
    let fresh: BTreeSet<u32> = rows.difference(&held).copied().collect();
    if old.around(&fresh) != new.around(&fresh) {
        counts.faults.push(format!("{name}: what stands around the cells has changed"));
    }
    for (at, cell) in &old.cells {
        match new.cells.get(at) {
            _ if written.contains(at) => {}
            Some(same) if same == cell => {}
            Some(other) if cell.contains("<f") || cell.contains(":f") => {
                if without_result(cell) == *other && (existing || changes_by_itself(cell)) {
                    counts.dropped += 1;
                } else {
                    counts.faults.push(format!("{name}!{at} was {cell} and is {other}"));
                }
            }
            Some(other) => counts.faults.push(format!("{name}!{at} was {cell} and is {other}")),
            None => counts.faults.push(format!("{name}!{at} is gone")),
        }
    }
    let extra = new.cells.keys().filter(|at| !old.cells.contains_key(at) && !written.contains(at));
    counts.faults.extend(extra.map(|at| format!("{name}!{at} has come")));
    counts.faults.extend(
        written.iter().filter(|at| !new.cells.contains_key(at)).map(|at| format!("{name}!{at} is missing")),
    );
}

/// A sheet's cells by address, and what stands around them.
struct Pieces {
    cells: BTreeMap<Cell, String>,
    /// Text outside of cells: within a row (from 0), or elsewhere. The dimension and the rows' spans are left out.
    rest: Vec<(Option<u32>, String)>,
}

impl Pieces {
    fn read(xml: &[u8]) -> Pieces {
        let text = std::str::from_utf8(xml).expect("UTF-8").trim_start_matches('\u{feff}');
        let mut reader = Reader::from_str(text);
        let mut pieces = Pieces { cells: BTreeMap::new(), rest: Vec::new() };
        let (mut depth, mut row, mut at, mut start, mut last_row) = (0, None, Cell::new(0, 0), None, 0);
        loop {
            let from = reader.buffer_position() as usize;
            let event = reader.read_event().expect("well-formed XML");
            let raw = &text[from..reader.buffer_position() as usize];
            let opens = matches!(event, Event::Start(_));
            match &event {
                Event::Eof => return pieces,
                Event::Start(tag) | Event::Empty(tag) => {
                    let local = tag.local_name();
                    match (depth, local.as_ref()) {
                        (2, b"row") => {
                            let number =
                                attribute(tag, "r").map_or(last_row + 1, |r| r.parse().expect("a row"));
                            last_row = number;
                            (row, at) = (Some(number - 1), Cell::new(number - 1, 0));
                            let tag = without_attribute(raw, "spans");
                            pieces.put(row, tag.trim_end_matches('>').trim_end_matches('/').trim_end());
                            if !opens {
                                row = None;
                            }
                        }
                        (3, b"c") if row.is_some() => {
                            at = attribute(tag, "r").map_or(at, |r| r.parse().expect("a cell"));
                            if opens {
                                start = Some(from);
                            } else {
                                pieces.cells.insert(at, raw.to_owned());
                                at.col += 1;
                            }
                        }
                        (1, b"dimension") => {}
                        (1, b"sheetData") => {
                            pieces.put(None, raw.trim_end_matches('>').trim_end_matches('/').trim_end());
                        }
                        _ if start.is_none() => pieces.put(row, raw),
                        _ => {}
                    }
                    depth += usize::from(opens);
                }
                Event::End(tag) => {
                    depth -= 1;
                    match (depth, tag.local_name().as_ref()) {
                        (3, b"c") if start.is_some() => {
                            let from = start.take().expect("a start");
                            pieces.cells.insert(at, text[from..reader.buffer_position() as usize].to_owned());
                            at.col += 1;
                        }
                        (2, b"row") => row = None,
                        (1, b"sheetData" | b"dimension") => {}
                        _ if start.is_none() => pieces.put(row, raw),
                        _ => {}
                    }
                }
                _ if start.is_none() => pieces.put(row, raw),
                _ => {}
            }
        }
    }

    fn put(&mut self, row: Option<u32>, text: &str) {
        self.rest.push((row, text.to_owned()));
    }

    /// What stands around the cells, but for rows that came with a fill.
    fn around(&self, fresh: &BTreeSet<u32>) -> String {
        let kept = self.rest.iter().filter(|(row, _)| !row.is_some_and(|row| fresh.contains(&row)));
        kept.map(|(_, text)| text.as_str()).collect()
    }
}

fn attribute(tag: &BytesStart, name: &str) -> Option<String> {
    let found = tag.try_get_attribute(name).expect("attributes")?;
    Some(String::from_utf8(found.value.to_vec()).expect("UTF-8"))
}

fn without_attribute(tag: &str, name: &str) -> String {
    for quote in ['"', '\''] {
        if let Some(from) = tag.find(&format!(" {name}={quote}")) {
            let value = from + name.len() + 3;
            let until = value + tag[value..].find(quote).expect("the end of a value") + 1;
            return format!("{}{}", &tag[..from], &tag[until..]);
        }
    }
    tag.to_owned()
}

/// Is it a formula whose cells cannot be told from its text, or whose result changes without them?
fn changes_by_itself(cell: &str) -> bool {
    let cell = cell.to_uppercase();
    ["INDIRECT(", "OFFSET(", "TODAY(", "NOW(", "RAND(", "RANDBETWEEN(", "CELL(", "INFO("]
        .iter()
        .any(|f| cell.contains(f))
}

/// A formula cell without its stored result and without the type of that.
fn without_result(cell: &str) -> String {
    let end = cell.find('>').expect("a tag") + 1;
    let mut out = without_attribute(&cell[..end], "t") + &cell[end..];
    let prefix = out[1..].split(['c', ' ']).next().unwrap_or_default().to_owned();
    let (open, close) = (format!("<{prefix}v"), format!("</{prefix}v>"));
    if let Some(from) = out.find(&open) {
        let until = out
            .find(&close)
            .map_or_else(|| from + out[from..].find("/>").unwrap() + 2, |at| at + close.len());
        out.replace_range(from..until, "");
    }
    out
}

/// The numbers of a sheet's rows, from 1.
pub fn sheet_rows(xml: &[u8]) -> Vec<u32> {
    let text = std::str::from_utf8(xml).unwrap_or_default();
    let mut reader = Reader::from_str(text);
    let mut rows = Vec::new();
    loop {
        match reader.read_event() {
            Ok(Event::Start(tag) | Event::Empty(tag)) if tag.local_name().as_ref() == b"row" => {
                let next = rows.last().map_or(1, |last| last + 1);
                rows.push(attribute(&tag, "r").and_then(|r| r.parse().ok()).unwrap_or(next));
            }
            Ok(Event::Eof) | Err(_) => return rows,
            Ok(_) => {}
        }
    }
}
