//! Splicing of cells: every case of `patch_cases.txt`, byte for byte, and one large sheet.

use std::collections::BTreeMap;
use std::fmt::Write as _;

use hence_workbook::patch::{Cached, CellWrite, patch_sheet};
use hence_workbook::references::Cell;

fn unquoted(text: &str) -> String {
    let text = text.replace("\\r", "\r").replace("\\n", "\n");
    let inside = |mark: &str| text.strip_prefix(mark).and_then(|t| t.strip_suffix(')'));
    if let Some(rows) = inside("S(") {
        format!("<worksheet xmlns=\"m\"><sheetData>{rows}</sheetData></worksheet>")
    } else if let Some(parts) = inside("W(") {
        format!("<worksheet xmlns=\"m\">{parts}</worksheet>")
    } else {
        text
    }
}

fn number_or_text(text: &str) -> Cached {
    match text.split_once(' ') {
        Some(("number", number)) => Cached::Number(number.parse().unwrap()),
        Some(("text", text)) => Cached::Text(text.to_owned()),
        _ => Cached::None,
    }
}

fn write(text: &str) -> (Cell, CellWrite) {
    let (cell, what) = text.split_once(' ').unwrap();
    let write = match what.split_once(' ') {
        None => CellWrite::DropValue,
        Some(("formula", rest)) => {
            let (formula, result) = rest.rsplit_once(" = ").unwrap();
            CellWrite::Formula(formula.to_owned(), number_or_text(result))
        }
        Some(("text", text)) => CellWrite::Text(text.replace("\\0", "\0")),
        Some(("number", number)) => CellWrite::Number(number.parse().unwrap()),
        Some(_) => panic!("{text}"),
    };
    (cell.parse().unwrap(), write)
}

#[test]
fn every_case_of_the_file() {
    let mut failures = String::new();
    let mut count = 0;
    for case in include_str!("patch_cases.txt").split("\n## ").skip(1) {
        let mut lines = case.lines();
        let title = lines.next().unwrap();
        let mut writes = BTreeMap::new();
        let (mut part, mut wanted) = (String::new(), String::new());
        for line in lines.filter(|line| !line.is_empty()) {
            match line.split_once(' ').unwrap() {
                ("write", text) => writes.extend([write(text)]),
                ("in", text) => part = unquoted(text.trim_start()),
                ("out", text) => wanted = unquoted(text),
                ("refused", text) => wanted = format!("refused {text}"),
                _ => panic!("{title}: {line}"),
            }
        }
        count += 1;
        let got = match patch_sheet(part.as_bytes(), &writes) {
            Ok(bytes) => String::from_utf8(bytes).unwrap(),
            Err(error) => {
                let problem = &error.problems()[0];
                let cell = problem.place.range.map(|range| format!(" {range}"));
                format!("refused {}{}", problem.code, cell.unwrap_or_default())
            }
        };
        if got != wanted {
            writeln!(failures, "{title}\n  wanted {wanted}\n  got    {got}").unwrap();
        }
    }
    assert!(count > 30, "only {count} cases were read");
    assert!(failures.is_empty(), "\n{failures}");
}

#[test]
fn no_write_changes_nothing_and_every_refusal_is_reported() {
    let part = b"<worksheet><sheetData><row r=\"1\"><c r=\"A1\"/></row></sheetData></worksheet>";
    assert_eq!(patch_sheet(part, &BTreeMap::new()).unwrap(), part);
    let writes = [write("A1 number NaN"), write("A2 drop"), write("B1 number 1")];
    let error = patch_sheet(part, &BTreeMap::from(writes)).unwrap_err();
    let codes: Vec<_> = error.problems().iter().map(|p| p.code).collect();
    assert_eq!(codes, ["not-finite", "no-formula"]);
}

#[test]
fn a_cell_outside_the_sheet_is_refused() {
    let writes = BTreeMap::from([(Cell::new(1_048_576, 0), CellWrite::Number(1.0))]);
    let error = patch_sheet(b"<worksheet><sheetData/></worksheet>", &writes).unwrap_err();
    assert_eq!(error.problems()[0].code, "outside-sheet");
}

#[test]
fn a_byte_order_mark_stays() {
    let part = "\u{feff}<worksheet><sheetData/></worksheet>";
    let out = patch_sheet(part.as_bytes(), &BTreeMap::from([write("A1 number 1")])).unwrap();
    assert!(String::from_utf8(out).unwrap().starts_with("\u{feff}<worksheet><sheetData><row"));
}

#[test]
fn a_long_shared_formula_column_is_handed_on() {
    let mut rows = String::from(
        "<row r=\"1\"><c r=\"A1\"><f t=\"shared\" ref=\"A1:A20000\" si=\"0\">B1+1</f></c></row>",
    );
    for row in 2..=20_000 {
        write!(rows, "<row r=\"{row}\"><c r=\"A{row}\"><f t=\"shared\" si=\"0\"/><v>1</v></c></row>")
            .unwrap();
    }
    let part = format!("<worksheet><sheetData>{rows}</sheetData></worksheet>");
    let out = patch_sheet(part.as_bytes(), &BTreeMap::from([write("A1 number 1")])).unwrap();
    let out = String::from_utf8(out).unwrap();
    assert!(out.contains("<c r=\"A20000\"><f>B20000+1</f><v>1</v></c>"));
    assert!(!out.contains("shared"));
}
