//! Second fills: the same bytes but for what changed, and nothing lost that a person typed on hence's own sheets.

use hence_core::Catalogue;
use hence_workbook::fill::{FillRequest, Filled, fill};
use hence_workbook::model::Workbook;
use hence_workbook::package::{Changes, Package};
use hence_workbook::patch::{Cached, CellWrite};
use hence_workbook::problem::WorkbookError;
use hence_workbook::sheets::VERDICT_AGREES;

use crate::libreoffice::books::{self, CASES};
use crate::libreoffice::cells::{Cells, Stored, cells, changed, verdict};
use crate::libreoffice::office::{Recalculate, saved, soffice};

const SUMMARY: &str = "Audit summary";

fn package(bytes: &[u8]) -> Package {
    Package::from_bytes("book.xlsx", bytes.to_vec()).expect("a package")
}

fn try_filled(bytes: &[u8], request: &FillRequest) -> Result<Filled, WorkbookError> {
    fill(&package(bytes), request, &Catalogue::builtin())
}

fn filled(bytes: &[u8]) -> Vec<u8> {
    try_filled(bytes, &FillRequest::default()).unwrap_or_else(|error| panic!("{error}")).bytes
}

fn with_basis(bytes: &[u8], basis: &str) -> Vec<u8> {
    let request = FillRequest { basis: Some(basis.into()), ..FillRequest::default() };
    try_filled(bytes, &request).unwrap_or_else(|error| panic!("{error}")).bytes
}

/// The part of a sheet.
fn part(package: &Package, sheet: &str) -> String {
    let book = Workbook::read(package).expect("a workbook");
    book.sheets[book.sheet_index(sheet).expect("the sheet")].part.clone()
}

/// The first row below everything on the summary, as A1 counts it.
fn below(cells: &Cells) -> u32 {
    let rows = cells.keys().filter(|(sheet, _)| sheet == SUMMARY).map(|(_, cell)| cell.row + 2);
    rows.max().expect("a summary")
}

fn value(cells: &Cells, sheet: &str, at: &str) -> Option<Stored> {
    cells.get(&(sheet.to_owned(), at.parse().expect("a cell"))).map(|cell| cell.value.clone())
}

/// Every text on a sheet, with its cell.
fn texts(cells: &Cells, sheet: &str) -> Vec<(String, String)> {
    let on_sheet = cells.iter().filter(|((name, _), _)| name == sheet);
    on_sheet
        .filter_map(|((_, cell), found)| match &found.value {
            Stored::Text(text) => Some((cell.to_string(), text.clone())),
            _ => None,
        })
        .collect()
}

fn text(text: &str) -> CellWrite {
    CellWrite::Text(text.into())
}

/// The codes and sheets of a refused fill.
fn refused(bytes: &[u8]) -> Vec<(&'static str, String)> {
    let error = try_filled(bytes, &FillRequest::default()).expect_err("a refusal");
    error.problems().iter().map(|p| (p.code, p.place.sheet.clone().unwrap_or_default())).collect()
}

/// Holds a workbook that was filled again to differ only in what names its input: the hash, and what cells held before.
pub fn only_the_input_differs(name: &str, first: &[u8], second: &[u8]) {
    let (a, b) = (package(first), package(second));
    assert!(a.parts().eq(b.parts()), "{name}: the same parts in the same order");
    let differing: Vec<&str> = a.parts().filter(|p| a.part(p).unwrap() != b.part(p).unwrap()).collect();
    // The summary holds the hash of its input, the changes what stood in the cells before; the digest of both sheets
    // stands in the workbook part.
    let mut allowed = vec![
        "hence/record.json".to_owned(),
        "xl/workbook.xml".to_owned(),
        part(&a, SUMMARY),
        part(&a, "Audit changes"),
    ];
    allowed.sort();
    let mut found: Vec<String> = differing.iter().map(|part| (*part).to_owned()).collect();
    found.sort();
    assert_eq!(found, allowed, "{name}");
    // In the workbook part only the digests.
    let book = |package: &Package| {
        let xml = String::from_utf8(package.part("xl/workbook.xml").unwrap().unwrap()).unwrap();
        let names: Vec<String> = xml.split("<definedName ").map(str::to_owned).collect();
        names.into_iter().filter(|name| !name.starts_with("name=\"hence_digest\"")).collect::<Vec<_>>()
    };
    assert_eq!(book(&a), book(&b), "{name}");
    // On the summary only the hash.
    let (x, y) = (texts(&cells(first), SUMMARY), texts(&cells(second), SUMMARY));
    let apart: Vec<_> = x.iter().zip(&y).filter(|(x, y)| x != y).collect();
    assert_eq!((x.len(), apart.len()), (y.len(), 1), "{name}: {apart:?}");
    assert_eq!(apart[0].0.1.len(), 64, "{name}: {apart:?}");
}

#[test]
fn a_second_fill_changes_nothing_but_what_names_its_input() {
    let sample = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("../../samples/mine-drainage.xlsx");
    let mut inputs = vec![std::fs::read(sample).expect("the sample"), books::options().bytes()];
    // Years across and down, with and without a factor row, in words and as dates.
    inputs.extend([0, 3, 6, 8, 10].map(|i| CASES[i].book().bytes()));
    for (i, input) in inputs.into_iter().enumerate() {
        let first = filled(&input);
        if i < 2 {
            assert!(first == filled(&input), "input {i}: one input gives one output");
        }
        let second = filled(&first);
        only_the_input_differs(&format!("input {i}"), &first, &second);
        let b = package(&second);
        // A third fill has the same before and after as the second, so only the hash is new.
        let third = package(&filled(&second));
        let changes = part(&b, "Audit changes");
        assert!(b.part(&changes).unwrap() == third.part(&changes).unwrap(), "input {i}");
    }
}

#[test]
fn a_new_basis_and_the_old_one_again_give_the_first_numbers() {
    let first = filled(&CASES[6].book().bytes());
    let there = with_basis(&first, "5%");
    let back = with_basis(&there, CASES[6].basis);
    assert_eq!((verdict(&there), verdict(&back)), (VERDICT_AGREES.to_owned(), VERDICT_AGREES.to_owned()));
    let (x, y, z) = (cells(&first), cells(&there), cells(&back));
    for sheet in ["Appraisal", "Discounting"] {
        let only = |cells: &Cells| -> Cells {
            cells.iter().filter(|((name, _), _)| name == sheet).map(|(k, v)| (k.clone(), v.clone())).collect()
        };
        assert_ne!(only(&x), only(&y), "{sheet}");
        assert_eq!(only(&x), only(&z), "{sheet}");
    }
}

#[test]
fn plain_numbers_are_filled_again() {
    let input = CASES[0].book().bytes();
    let values = FillRequest { formulas: false, ..FillRequest::default() };
    let first = try_filled(&input, &values).expect("a fill").bytes;
    let second = try_filled(&first, &values).expect("a second fill");
    assert_eq!(second.report.verdict, VERDICT_AGREES);
    let formulas = |bytes: &[u8]| {
        let all = cells(bytes);
        all.iter().filter(|((sheet, _), cell)| sheet == "Appraisal" && cell.formula).count()
    };
    // The analyst's own three formulas.
    assert_eq!((formulas(&first), formulas(&second.bytes)), (3, 3));
    assert_eq!(filled(&second.bytes), filled(&second.bytes));
    assert!(formulas(&filled(&first)) > 100, "formulas again where they are asked for");
}

#[test]
fn what_a_person_types_beside_stays() {
    let first = filled(&books::options().bytes());
    let row = below(&cells(&first));
    let at = |col: &str, more: u32| format!("{col}{}", row + more);
    let formula = |text: &str, x: f64| CellWrite::Formula(text.into(), Cached::Number(x));
    let notes: Vec<(String, CellWrite)> = vec![
        (at("A", 0), text("Seen & found right: J. Reviewer <2026>")),
        (at("B", 0), CellWrite::Number(0.1 + 0.2)),
        (at("A", 1), formula("Discounting!D9*2", 1.932_367_149_758_454)),
        (at("C", 7), text("far below")),
        ("Z3".to_owned(), text("to the right")),
    ];
    let writes: Vec<(&str, CellWrite)> =
        notes.iter().map(|(at, write)| (at.as_str(), write.clone())).collect();
    let mut typed = changed(&first, SUMMARY, &writes);
    typed = changed(&typed, "Discounting", &[("A200", text("keep this sheet"))]);
    let second = filled(&typed);
    let after = cells(&second);
    for (place, write) in &notes {
        let expected = match write {
            CellWrite::Text(text) => Stored::Text(text.clone()),
            CellWrite::Number(x) | CellWrite::Formula(_, Cached::Number(x)) => Stored::Number(*x),
            other => panic!("{other:?}"),
        };
        assert_eq!(value(&after, SUMMARY, place), Some(expected), "{place}");
    }
    assert!(after[&(SUMMARY.to_owned(), at("A", 1).parse().unwrap())].formula);
    assert_eq!(value(&after, "Discounting", "A200"), Some(Stored::Text("keep this sheet".into())));
    assert_eq!(verdict(&second), VERDICT_AGREES);
    // And once more: notes are not hence's own, whoever put them there.
    let third = cells(&filled(&second));
    let own = |cells: &Cells| texts(cells, SUMMARY).len();
    assert_eq!(own(&third), own(&after));
    assert_eq!(value(&third, SUMMARY, &at("A", 0)), value(&after, SUMMARY, &at("A", 0)));
}

#[test]
fn notes_in_the_way_of_a_longer_summary_move_below() {
    // A basis whose factor jumps at three edges adds warnings, so that the summary is longer than when the note was typed.
    let first = filled(&books::options().bytes());
    let row = below(&cells(&first));
    let noted = changed(&first, SUMMARY, &[(&format!("A{row}"), text("the reviewer's note"))]);
    let second = filled(&changed(
        &noted,
        "Inputs",
        &[("B2", text("4% to 2, 3% to 4, 2% to 6, 1% after; whole horizon by flow"))],
    ));
    let after = cells(&second);
    let found: Vec<_> =
        texts(&after, SUMMARY).into_iter().filter(|(_, t)| t == "the reviewer's note").collect();
    assert_eq!(found.len(), 1, "{found:?}");
    let heading =
        texts(&after, SUMMARY).into_iter().find(|(_, t)| t.starts_with("Notes of the reviewer")).unwrap();
    let row_of = |at: &str| at.trim_start_matches(|c: char| c.is_ascii_alphabetic()).parse::<u32>().unwrap();
    assert!(row_of(&heading.0) >= row, "the summary grew");
    assert!(row_of(&found[0].0) > row_of(&heading.0), "{found:?} {heading:?}");
}

#[test]
fn a_change_of_what_hence_wrote_is_refused() {
    let first = filled(&books::options().bytes());
    let all = cells(&first);
    let of = |sheet: &str, wanted: fn(&Stored, bool) -> bool| {
        let mut on_sheet =
            all.iter().filter(|((name, _), cell)| name == sheet && wanted(&cell.value, cell.formula));
        on_sheet.next().expect("such a cell").0.1.to_string()
    };
    let number = of("Discounting", |value, formula| matches!(value, Stored::Number(_)) && !formula);
    let formula = of("Audit checks", |_, formula| formula);
    for (sheet, at, write) in [
        // A text, the verdict typed over, a text between hence's own, a number, a number between, a formula.
        (SUMMARY, "A1", text("Audit summary, approved")),
        (SUMMARY, "B3", text(VERDICT_AGREES)),
        (SUMMARY, "C4", text("squeezed in")),
        ("Discounting", number.as_str(), CellWrite::Number(0.5)),
        ("Audit coverage", "A3", CellWrite::Number(1.0)),
        ("Audit checks", formula.as_str(), CellWrite::Number(1.0)),
    ] {
        let edited = changed(&first, sheet, &[(at, write)]);
        assert_eq!(refused(&edited), [("own-sheet-edited", sheet.to_owned())], "{sheet}!{at}");
    }
    // A flow that turned the verdict is no edit of hence's sheets, and is valued anew.
    let turned = changed(&first, "The wall's end", &[("B9", CellWrite::Number(500.0))]);
    assert_eq!(verdict(&filled(&turned)), VERDICT_AGREES);
}

#[test]
fn comments_on_own_sheets_are_not_lost_in_silence() {
    let first = package(&filled(&books::options().bytes()));
    let checks = part(&first, "Audit checks");
    let (folder, name) = checks.rsplit_once('/').expect("a folder");
    let relations = format!("{folder}/_rels/{name}.rels");
    let kind = "http://schemas.openxmlformats.org/officeDocument/2006/relationships/comments";
    let list = format!(
        "<Relationships xmlns=\"http://schemas.openxmlformats.org/package/2006/relationships\">\
         <Relationship Id=\"rId1\" Type=\"{kind}\" Target=\"../comments9.xml\"/></Relationships>"
    );
    let comments = "<comments xmlns=\"http://schemas.openxmlformats.org/spreadsheetml/2006/main\"><authors>\
                    <author>R</author></authors><commentList><comment ref=\"A6\" authorId=\"0\"><text><t>why?</t>\
                    </text></comment></commentList></comments>";
    assert!(!first.has(&relations), "the sheet has no relationships of its own");
    let changes = Changes {
        add: vec![(relations, list.into_bytes()), ("xl/comments9.xml".into(), comments.as_bytes().to_vec())],
        ..Changes::default()
    };
    let commented = first.write(&changes).expect("a package");
    assert_eq!(refused(&commented), [("own-sheet-edited", "Audit checks".to_owned())]);
}

#[test]
fn notes_survive_a_save_by_libreoffice() {
    let Some(soffice) = soffice() else { return };
    let first = filled(&books::options().bytes());
    let row = below(&cells(&first));
    let note = format!("A{row}");
    let typed =
        changed(&first, SUMMARY, &[(&note, text("Seen, J. Reviewer")), ("J9", CellWrite::Number(7.25))]);
    let edited = changed(&first, SUMMARY, &[("A1", text("Audit summary, approved"))]);
    let across = filled(&CASES[0].book().bytes());
    let books = [("typed.xlsx", typed), ("edited.xlsx", edited), ("across.xlsx", across)];
    let back = saved(&soffice, &books.map(|(name, bytes)| (name.to_owned(), bytes)), Recalculate::Missing);
    let second = filled(&back["typed.xlsx"]);
    let after = cells(&second);
    assert_eq!(value(&after, SUMMARY, &note), Some(Stored::Text("Seen, J. Reviewer".into())));
    assert_eq!(value(&after, SUMMARY, "J9"), Some(Stored::Number(7.25)));
    assert_eq!(verdict(&second), VERDICT_AGREES);
    // hence's sheets are there once, and the filled cells refer to them.
    let book = Workbook::read(&package(&second)).expect("a workbook");
    let names: Vec<&str> = book.sheets.iter().map(|sheet| sheet.name.as_str()).collect();
    let own = [
        "Discounting",
        SUMMARY,
        "Audit coverage",
        "Audit checks",
        "Audit sensitivity",
        "Audit changes",
        "Audit charts",
    ];
    assert_eq!(names[..3], ["Inputs", "Do nothing", "The wall's end"]);
    assert_eq!(names[3..], own);
    assert_eq!(refused(&back["edited.xlsx"]), [("own-sheet-edited", SUMMARY.to_owned())]);
    assert_eq!(verdict(&filled(&back["across.xlsx"])), VERDICT_AGREES);
}
