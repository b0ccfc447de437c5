//! The check of an output before it is kept: a good one passes, each kind of damage is found.

use std::collections::BTreeMap;

use hence_workbook::graft::{Graft, Grafted, graft};
use hence_workbook::package::Package;
use hence_workbook::patch::{Cached, CellWrite, patch_sheet};
use hence_workbook::problem::Result;
use hence_workbook::references::Cell;
use hence_workbook::verify::{Expected, verify};

use crate::graft::{finishes, host, own_package};

const SHEET: &str = "xl/worksheets/sheet1.xml";

type Writes = BTreeMap<String, BTreeMap<Cell, CellWrite>>;

fn writes() -> Writes {
    let cells = [
        ("A1", CellWrite::Number(0.1)),
        ("B1", CellWrite::DropValue),
        ("A2", CellWrite::Formula("A1&\"<\"".to_owned(), Cached::Text(" 0.1<".to_owned()))),
        ("C2", CellWrite::Text("plain & simple".to_owned())),
    ];
    let cells = cells.into_iter().map(|(at, write)| (at.parse().unwrap(), write)).collect();
    BTreeMap::from([("Flows 1".to_owned(), cells)])
}

fn filled(host: &Package) -> Grafted {
    let (ours, charts) = (own_package(), finishes());
    let plan = Graft { ours: &ours, previous: &[], set_names: &[], remove_names: &[], charts: &charts };
    let mut grafted = graft(host, &plan).unwrap();
    let sheet = patch_sheet(&host.part(SHEET).unwrap().unwrap(), &writes()["Flows 1"]).unwrap();
    grafted.changes.replace.insert(SHEET.to_owned(), sheet);
    grafted
}

fn verified(host: &Package, grafted: &Grafted, output: &[u8], writes: &Writes) -> Result<Vec<String>> {
    verify(host, output, &Expected { changes: &grafted.changes, writes, own_sheets: &grafted.sheets })
}

#[test]
fn a_sound_output_passes_and_says_what_differs() {
    let host = host(true);
    let grafted = filled(&host);
    let output = host.write(&grafted.changes).unwrap();
    let lines = verified(&host, &grafted, &output, &writes()).unwrap();
    assert!(
        lines.contains(&format!("{SHEET}: sheet 'Flows 1', 3 cells written, 1 cached values dropped")),
        "{lines:?}"
    );
    assert!(lines.contains(&"xl/calcChain.xml: left out".to_owned()), "{lines:?}");
    assert!(lines.contains(&"xl/worksheets/sheet2.xml: new, sheet Discounting".to_owned()), "{lines:?}");
}

#[test]
fn damage_to_the_written_sheet_is_found() {
    let host = host(true);
    // What is changed after the fact in the sheet's text, and the place that is named.
    let damages = [
        ("<v>0.1</v>", "<v>0.2</v>", "'Flows 1'!A1"),
        ("<f>A1*2</f>", "<f>A1*2</f><v>2</v>", "'Flows 1'!B1"),
        ("<f>A1*2</f>", "<f>A1*3</f>", ""),
        ("plain", "Plain", "'Flows 1'!C2"),
        ("tabSelected=\"1\" ", "", "'Flows 1'"),
        ("<row r=\"1\">", "<row r=\"1\" ht=\"3\">", "'Flows 1'"),
        ("</row></sheetData>", "<c r=\"D2\"/></row></sheetData>", "'Flows 1'"),
        ("<sheetData>", "<cols/><sheetData>", "'Flows 1'"),
    ];
    for (good, bad, place) in damages {
        let mut grafted = filled(&host);
        let sheet = String::from_utf8(grafted.changes.replace[SHEET].clone()).unwrap();
        assert!(sheet.contains(good), "{good} in {sheet}");
        grafted.changes.replace.insert(SHEET.to_owned(), sheet.replace(good, bad).into_bytes());
        let output = host.write(&grafted.changes).unwrap();
        let result = verified(&host, &grafted, &output, &writes());
        if place.is_empty() {
            // The formula of a cell that lost its value is part of what has to stay.
            assert!(result.is_err(), "{bad}");
            continue;
        }
        let error = result.expect_err(bad);
        let problem = &error.problems()[0];
        assert_eq!((problem.code, problem.place.to_string().as_str()), ("output-differs", place), "{bad}");
    }
}

#[test]
fn damage_to_other_parts_is_found() {
    let host = host(true);
    let grafted = filled(&host);
    let other = "xl/worksheets/sheet3.xml";
    let codes = |output: &[u8], grafted: &Grafted, writes: &Writes| {
        verified(&host, grafted, output, writes).unwrap_err().problems()[0].to_string()
    };
    // Another part replaced, declared or not.
    let mut changed = grafted.clone();
    changed.changes.replace.insert(other.to_owned(), b"<worksheet><sheetData/></worksheet>".to_vec());
    let output = host.write(&changed.changes).unwrap();
    assert!(codes(&output, &grafted, &writes()).contains(other));
    assert!(codes(&output, &changed, &writes()).contains("which no fill may do"));
    // A part too many.
    let mut more = grafted.clone();
    more.changes.add.push(("xl/extra.xml".to_owned(), b"<a/>".to_vec()));
    let output = host.write(&more.changes).unwrap();
    assert!(codes(&output, &grafted, &writes()).contains("xl/extra.xml"));
    // A cell that was to be written and was not.
    let output = host.write(&grafted.changes).unwrap();
    let mut missing = writes();
    missing.get_mut("Flows 1").unwrap().insert(Cell::new(9, 9), CellWrite::Number(1.0));
    assert!(codes(&output, &grafted, &missing).contains("'Flows 1'!J10"));
    // The calculation chain left in.
    let mut chained = grafted.clone();
    chained.changes.remove.clear();
    let output = host.write(&chained.changes).unwrap();
    assert!(codes(&output, &grafted, &writes()).contains("still in the output"));
}
