//! A small appraisal put into a workbook that has none, and its results by plain arithmetic.

use std::collections::{BTreeMap, BTreeSet};
use std::path::Path;

use hence_workbook::model::{SheetKind, Workbook};
use hence_workbook::names_edit::{BookEdit, NewName, NewSheet, edit_workbook};
use hence_workbook::package::{
    Changes, NewRelationship, Package, edit_content_types, edit_relationships, relationships_part,
};
use hence_workbook::patch::{CellWrite, patch_sheet};
use hence_workbook::problem::Result;
use hence_workbook::reading::{Sheets, Value};
use hence_workbook::references::{Cell, MAX_ROWS, NameTarget, Range, SheetRange, quote_sheet};

use super::compare::{Counts, sheet_rows};

const YEARS: u32 = 10;
const BASE: f64 = 2026.0;
const BASIS: &str = "3.5% to 5, 3% after";
const COST: [f64; YEARS as usize] = [1200.0, 300.0, 0.0, 0.0, 0.0, 45.5, 0.0, 0.0, 0.0, 0.0];
const BENEFIT: [f64; YEARS as usize] = [0.0, 80.0, 190.25, 210.0, 210.0, 210.0, 260.0, 260.0, 260.0, 301.0];
/// A name that needs quotes in formulas and escapes in XML.
const SHEET: &str = "Flows & years' end";

/// Rows of the block, from its first.
const HEAD: u32 = 0;
const TIME: u32 = 1;
const WORKS: u32 = 2;
const SAVED: u32 = 3;
const FACTOR: u32 = 4;
const PV: u32 = 5;
const RESULTS: u32 = 6;
/// How many rows the block takes.
pub const HEIGHT: u32 = 7;

/// A workbook with an appraisal in it.
pub struct Prepared {
    /// The workbook.
    pub package: Package,
    /// Roles for the command line, where the workbook has no names for them.
    pub roles: Vec<(String, String)>,
    /// The sheet that the appraisal stands on, and its part.
    pub sheet: String,
    pub part: String,
    /// The first row of the block.
    pub row: u32,
    /// The sheet is one that the file had.
    pub existing: bool,
}

/// Role and cells, for a block that starts at a row: columns and rows from 0.
fn roles(row: u32) -> Vec<(&'static str, Range)> {
    let line = |down: u32| Range { first: Cell::new(row + down, 1), last: Cell::new(row + down, YEARS) };
    let cell = |down: u32, col| Range::cell(Cell::new(row + down, col));
    vec![
        ("base", cell(HEAD, 1)),
        ("basis", cell(HEAD, 2)),
        ("years", line(TIME)),
        ("cost_works", line(WORKS)),
        ("benefit_saved", line(SAVED)),
        ("factor", line(FACTOR)),
        ("pv", line(PV)),
        ("npv", cell(RESULTS, 1)),
        ("ratio", cell(RESULTS, 2)),
    ]
}

/// The cells that a fill writes, with what they have to hold.
pub fn results(row: u32) -> Vec<(Cell, f64)> {
    // The factor of a year is that of the year before over one plus the year's rate.
    let mut factor = 1.0;
    let mut found = Vec::new();
    let (mut costs, mut benefits) = (0.0, 0.0);
    for t in 0..YEARS {
        if t > 0 {
            factor /= if t <= 5 { 1.035 } else { 1.03 };
        }
        let (cost, benefit) = (COST[t as usize], BENEFIT[t as usize]);
        costs += cost * factor;
        benefits += benefit * factor;
        found.push((Cell::new(row + FACTOR, 1 + t), factor));
        found.push((Cell::new(row + PV, 1 + t), (benefit - cost) * factor));
    }
    found.push((Cell::new(row + RESULTS, 1), benefits - costs));
    found.push((Cell::new(row + RESULTS, 2), benefits / costs));
    found
}

fn inputs(row: u32) -> BTreeMap<Cell, CellWrite> {
    let mut cells = BTreeMap::new();
    let labels = ["Base, basis", "Year", "Works", "Saved", "Factor", "Present value", "NPV, ratio"];
    for (down, label) in (0..).zip(labels) {
        cells.insert(Cell::new(row + down, 0), CellWrite::Text(label.to_owned()));
    }
    cells.insert(Cell::new(row + HEAD, 1), CellWrite::Number(BASE));
    cells.insert(Cell::new(row + HEAD, 2), CellWrite::Text(BASIS.to_owned()));
    for t in 0..YEARS {
        cells.insert(Cell::new(row + TIME, 1 + t), CellWrite::Number(BASE + f64::from(t)));
        cells.insert(Cell::new(row + WORKS, 1 + t), CellWrite::Number(COST[t as usize]));
        cells.insert(Cell::new(row + SAVED, 1 + t), CellWrite::Number(BENEFIT[t as usize]));
    }
    cells
}

/// The appraisal on a sheet of its own, with defined names.
pub fn on_a_sheet(host: &Package) -> Result<Option<Prepared>> {
    const MAIN: &str = "http://schemas.openxmlformats.org/spreadsheetml/2006/main";
    const RELATIONS: &str = "http://schemas.openxmlformats.org/officeDocument/2006/relationships";
    let blank = format!("<worksheet xmlns=\"{MAIN}\"><sheetData/></worksheet>");
    let sheet = patch_sheet(blank.as_bytes(), &inputs(0))?;
    let folder =
        host.workbook_part().rsplit_once('/').map_or(String::new(), |(folder, _)| format!("{folder}/"));
    let part = format!("{folder}worksheets/flows-of-the-test.xml");
    let replaced = |name: &str, edit: &dyn Fn(&[u8]) -> Result<Vec<u8>>| -> Result<(String, Vec<u8>)> {
        Ok((name.to_owned(), edit(&host.part(name)?.unwrap_or_default())?))
    };
    let target = format!("/{part}");
    let kind = "application/vnd.openxmlformats-officedocument.spreadsheetml.worksheet+xml";
    let link =
        NewRelationship { id: "flowsOfTheTest", kind: &format!("{RELATIONS}/worksheet"), target: &target };
    let names = roles(0).into_iter().map(|(role, at)| NewName {
        name: format!("hence_{role}"),
        scope: None,
        text: format!("{}!{}", quote_sheet(SHEET), fixed(at)),
        hidden: false,
        comment: None,
    });
    let edit = BookEdit {
        add_sheets: vec![NewSheet { name: SHEET.to_owned(), rel_id: link.id.to_owned(), hidden: false }],
        set_names: names.collect(),
        ..BookEdit::default()
    };
    let changes = Changes {
        replace: BTreeMap::from([
            replaced("[Content_Types].xml", &|xml| edit_content_types(xml, &[], &[(&part, kind)], &[]))?,
            replaced(&relationships_part(host.workbook_part()), &|xml| {
                edit_relationships(xml, &[], &[link])
            })?,
            replaced(host.workbook_part(), &|xml| edit_workbook(xml, &edit))?,
        ]),
        add: vec![(part.clone(), sheet)],
        ..Changes::default()
    };
    let package = Package::from_bytes(host.file_name(), host.write(&changes)?)?;
    let sheet = SHEET.to_owned();
    Ok(Some(Prepared { package, roles: Vec::new(), sheet, part, row: 0, existing: false }))
}

fn fixed(at: Range) -> String {
    let cell = |cell: Cell| {
        let a1 = cell.to_string();
        let digits = a1.find(|c: char| c.is_ascii_digit()).unwrap();
        format!("${}${}", &a1[..digits], &a1[digits..])
    };
    format!("{}:{}", cell(at.first), cell(at.last))
}

/// The appraisal in free rows below the cells of the file's first worksheet, with roles for the command line.
/// None where there is no worksheet, or no room.
pub fn in_a_sheet(host: &Package) -> Result<Option<Prepared>> {
    let book = Workbook::read(host)?;
    let Some(sheet) = book.sheets.iter().find(|sheet| sheet.kind == SheetKind::Worksheet) else {
        return Ok(None);
    };
    let xml = host.part(&sheet.part)?.unwrap_or_default();
    let merged = book.facts(host, book.sheet_index(&sheet.name).unwrap())?.merged;
    let tables = book.tables.iter().filter(|table| book.sheets[table.sheet].name == sheet.name);
    // Rows from 0 that hold something or belong to something.
    let taken: BTreeSet<u32> = sheet_rows(&xml)
        .into_iter()
        .map(|row| row - 1)
        .chain(merged.iter().flat_map(|range| range.first.row..=range.last.row))
        .chain(tables.flat_map(|table| table.range.first.row..=table.range.last.row))
        .collect();
    // Below all of that with a blank row between, or where the sheet is full to its end in the first gap.
    let below = taken.last().map_or(0, |last| last + 2);
    let gap = || (0..MAX_ROWS - HEIGHT).find(|&row| taken.range(row..row + HEIGHT).next().is_none());
    let Some(row) = Some(below).filter(|row| row + HEIGHT <= MAX_ROWS).or_else(gap) else { return Ok(None) };
    let changes = Changes {
        replace: BTreeMap::from([(sheet.part.clone(), patch_sheet(&xml, &inputs(row))?)]),
        ..Changes::default()
    };
    let package = Package::from_bytes(host.file_name(), host.write(&changes)?)?;
    let given = |(role, at): (&str, Range)| {
        (role.to_owned(), SheetRange { sheet: sheet.name.clone(), range: at }.to_string())
    };
    let roles = roles(row).into_iter().map(given).collect();
    let (sheet, part) = (sheet.name.clone(), sheet.part.clone());
    Ok(Some(Prepared { package, roles, sheet, part, row, existing: true }))
}

/// Every cell of the block that holds or may hold something.
pub fn block(row: u32) -> impl Iterator<Item = Cell> {
    inputs(row).into_keys().chain(results(row).into_iter().map(|(at, _)| at))
}

/// In a workbook that LibreOffice has calculated and saved, every result and the verdict are right.
pub fn recalculated_agrees(path: &Path, counts: &Counts) -> std::result::Result<(), String> {
    let said = |error: hence_workbook::problem::WorkbookError| {
        format!("what LibreOffice saved cannot be read: {error}")
    };
    let package = Package::open(path).map_err(said)?;
    let book = Workbook::read(&package).map_err(said)?;
    let mut sheets = Sheets::open(&package, &book).map_err(said)?;
    let mut value = |at: &SheetRange| -> std::result::Result<Value, String> {
        let grid = sheets.range(at).map_err(said)?;
        Ok(grid.get(at.range.first).cloned().unwrap_or_default().value)
    };
    for (cell, expected) in results(counts.row) {
        let at = SheetRange { sheet: counts.sheet.clone(), range: Range::cell(cell) };
        match value(&at)? {
            Value::Number(found) | Value::Date(found)
                if (found - expected).abs() <= 1e-9 * expected.abs() => {}
            found => return Err(format!("LibreOffice shows {found:?} in {at}, expected {expected}")),
        }
    }
    let name = book.find_name("hence_verdict", None).ok_or("the verdict has no name")?;
    let NameTarget::Cells(at) = book.resolve(name) else {
        return Err("the verdict's name leads nowhere".into());
    };
    match value(&at)? {
        Value::Text(text) if text == "arithmetic agrees with the declared basis" => Ok(()),
        found => Err(format!("LibreOffice shows the verdict {found:?}")),
    }
}
