//! The whole job against a real LibreOffice, which recalculates every filled workbook.
//!
//! Workbooks are the samples and small ones made here. Without LibreOffice each test says that it did not run, and
//! fails where HENCE_REQUIRE_TOOLS is set.

mod books;
mod cells;
mod office;

use std::path::Path;

use hence_core::Catalogue;
use hence_workbook::fill::{FillRequest, fill};
use hence_workbook::package::Package;
use hence_workbook::patch::CellWrite;
use hence_workbook::references::Cell;
use hence_workbook::sheets::VERDICT_AGREES;

use books::{CASES, Case, Labels, catalogue};
use cells::{Cells, FileCell, Stored, cells, changed, verdict};
use office::{Recalculate, saved, soffice};

/// The samples: as it was made, and as LibreOffice saved it.
const SAMPLES: [&str; 2] = ["mine-drainage.xlsx", "mine-drainage-libreoffice.xlsx"];

fn sample(name: &str) -> Vec<u8> {
    std::fs::read(Path::new(env!("CARGO_MANIFEST_DIR")).join("../../samples").join(name)).expect("the sample")
}

/// The workbook filled, its verdict agreeing; or what is wrong.
fn try_filled(
    name: &str,
    bytes: &[u8],
    request: &FillRequest,
    catalogue: &Catalogue,
) -> Result<Vec<u8>, String> {
    let package = Package::from_bytes(name, bytes.to_vec()).map_err(|error| format!("{name}: {error}"))?;
    let filled = fill(&package, request, catalogue).map_err(|error| format!("{name}: {error}"))?;
    let cell = verdict(&filled.bytes);
    if filled.report.verdict != VERDICT_AGREES || cell != VERDICT_AGREES {
        return Err(format!("{name}: the verdict is {:?}, in the cell {cell:?}", filled.report.verdict));
    }
    Ok(filled.bytes)
}

fn filled(name: &str, bytes: &[u8]) -> Vec<u8> {
    try_filled(name, bytes, &FillRequest::default(), &catalogue()).unwrap_or_else(|wrong| panic!("{wrong}"))
}

/// Whether a column of differences stands there: tiny numbers, compared with what is allowed beside them.
fn is_difference(sheet: &str, cell: Cell) -> bool {
    (sheet == "Audit checks" && cell.col == 6) || (sheet == "Audit coverage" && cell.col == 5)
}

/// How far two stored values lie apart, in words; nothing where they agree within 1e-9 of their size.
fn apart(before: &Stored, after: &Stored) -> Option<String> {
    match (before, after) {
        (Stored::Number(a), Stored::Number(b)) if (a - b).abs() <= 1e-9 * a.abs().max(b.abs()) => None,
        (a, b) if a == b => None,
        (a, b) => Some(format!("{a:?} became {b:?}")),
    }
}

/// Every formula's result in `before` against the one in `after`; how many were compared, and what differs.
fn compare(before: &Cells, after: &Cells) -> (usize, Vec<String>) {
    let mut compared = 0;
    let mut wrong = Vec::new();
    for ((sheet, cell), old) in before.iter().filter(|(_, c)| c.formula && c.value != Stored::Nothing) {
        let stands = |cell| after.get(&(sheet.clone(), cell)).map(|c| &c.value);
        let difference = match stands(*cell) {
            None => Some("is gone".to_owned()),
            Some(new) if is_difference(sheet, *cell) => {
                match (new, stands(Cell { col: cell.col + 1, ..*cell })) {
                    (Stored::Number(x), Some(Stored::Number(most))) if x <= most => None,
                    (value, most) => Some(format!("{value:?}, allowed {most:?}")),
                }
            }
            Some(new) => apart(&old.value, new),
        };
        compared += 1;
        wrong.extend(difference.map(|words| format!("{sheet}!{cell}: {words}")));
    }
    (compared, wrong)
}

/// Every appraisal of this file: name, workbook.
fn appraisals() -> Vec<(String, Vec<u8>)> {
    let mut books: Vec<(String, Vec<u8>)> =
        SAMPLES.iter().map(|name| ((*name).to_owned(), sample(name))).collect();
    books.push(("options.xlsx".into(), books::options().bytes()));
    books.extend(CASES.iter().enumerate().map(|(i, case)| (format!("case{i:02}.xlsx"), case.book().bytes())));
    books
}

#[test]
fn libreoffice_recalculates_what_was_written() {
    let Some(soffice) = soffice() else { return };
    let catalogue = catalogue();
    let mut wrong = Vec::new();
    let mut books = Vec::new();
    for (name, bytes) in appraisals() {
        match try_filled(&name, &bytes, &FillRequest::default(), &catalogue) {
            Ok(bytes) => books.push((name, bytes)),
            Err(error) => wrong.push(error),
        }
    }
    for (n, b) in &books {
        std::fs::write(format!("/tmp/out/{n}"), b).unwrap();
    } // SCRATCH
    let back = saved(&soffice, &books, Recalculate::All);
    for (n, b) in &back {
        std::fs::write(format!("/tmp/out/lo-{n}"), b).unwrap();
    } // SCRATCH
    let mut compared = 0;
    for (name, bytes) in &books {
        let after = &back[name];
        let (count, differ) = compare(&cells(bytes), &cells(after));
        compared += count;
        if !differ.is_empty() {
            let shown = differ[..differ.len().min(6)].join("\n  ");
            wrong.push(format!("{name}: {} of {count} results differ\n  {shown}", differ.len()));
        }
        if verdict(after) != VERDICT_AGREES {
            wrong.push(format!("{name}: recalculated, the verdict is {:?}", verdict(after)));
        }
    }
    println!("{} workbooks, {compared} results of formulas recalculated", books.len());
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}
