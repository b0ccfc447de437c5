//! Marked copies: findings on a sheet and as notes, everything else as it was.

use std::collections::{BTreeMap, BTreeSet};
use std::path::Path;
use std::process::Command;

use hence_core::Catalogue;
use hence_workbook::check::{CheckReport, CheckRequest, check};
use hence_workbook::findings::{Finding, Kind};
use hence_workbook::marked::mark;
use hence_workbook::model::Workbook;
use hence_workbook::package::{Changes, Package};
use hence_workbook::patch::{CellWrite, patch_sheet};
use hence_workbook::preflight::preflight;
use hence_workbook::problem::Place;
use hence_workbook::reading::{Sheets, Value};

use crate::small::Small;
use crate::tools;

/// Eight years at 5% with a short total, and a typed factor whose cell may have a note.
fn flawed() -> Small {
    let years: Vec<String> = (2026..2034).map(|year| year.to_string()).collect();
    let flows = vec!["100"; 8].join(" | ");
    let factors: Vec<String> = (0..8)
        .map(|i| {
            let col = char::from(b'B' + i as u8);
            let factor = 1.05f64.powi(-i);
            if i == 3 { "0.9".to_owned() } else { format!("=1/1.05^({col}3-$B$1)>{factor}") }
        })
        .collect();
    let total: f64 = (0..6).map(|i| 100.0 * if i == 3 { 0.9 } else { 1.05f64.powi(-i) }).sum();
    let cells = format!(
        "A1: 'Base | 2026 | 0.05\nA3: 'Year | {}\nA4: 'Fares | {flows}\nA5: 'Factor | {}\nA7: 'NPV | \
         =SUMPRODUCT(B4:G4,B5:G5)>{total}",
        years.join(" | "),
        factors.join(" | ")
    );
    Small::default().sheet("It's a plan", &cells).names(
        "hence_base B1, hence_basis C1, hence_years B3:I3, hence_benefit_fares B4:I4, hence_factor B5:I5, hence_npv B7",
    )
}

/// The same with a note of somebody else on the typed factor and one beside, as spreadsheet programs store them.
fn with_notes() -> Small {
    let main = "http://schemas.openxmlformats.org/spreadsheetml/2006/main";
    let comments = format!(
        "<comments xmlns=\"{main}\"><authors><author>A. Reader</author></authors><commentList>\
         <comment ref=\"E5\" authorId=\"0\"><text><t>agreed in May</t></text></comment>\
         <comment ref=\"A4\" authorId=\"0\"><text><t>from the ferry's books</t></text></comment></commentList></comments>"
    );
    let shape = |number: u32, row: u32, col: u32| {
        format!(
            "<v:shape id=\"_x0000_s{number}\" type=\"#_x0000_t202\" style=\"visibility:hidden\"><x:ClientData \
             ObjectType=\"Note\"><x:Row>{row}</x:Row><x:Column>{col}</x:Column></x:ClientData></v:shape>"
        )
    };
    let drawing = format!(
        "<xml xmlns:v=\"urn:schemas-microsoft-com:vml\" xmlns:o=\"urn:schemas-microsoft-com:office:office\" \
         xmlns:x=\"urn:schemas-microsoft-com:office:excel\"><o:shapelayout v:ext=\"edit\"><o:idmap v:ext=\"edit\" \
         data=\"1\"/></o:shapelayout><v:shapetype id=\"_x0000_t202\" coordsize=\"21600,21600\" o:spt=\"202\" \
         path=\"m,l,21600r21600,l21600,xe\"/>{}{}</xml>",
        shape(1025, 4, 4),
        shape(1026, 3, 0)
    );
    flawed()
        .after_cells("<legacyDrawing r:id=\"rId2\"/>")
        .related("comments", "comments1.xml", &comments)
        .related("vmlDrawing", "drawings/vmlDrawing1.vml", &drawing)
}

fn checked(package: &Package) -> CheckReport {
    check(package, &CheckRequest::default(), &Catalogue::builtin()).unwrap_or_else(|error| panic!("{error}"))
}

fn marked(package: &Package) -> Package {
    let bytes = mark(package, &checked(package)).unwrap_or_else(|error| panic!("{error}"));
    Package::from_bytes("plan.xlsx", bytes).expect("a package")
}

fn part(package: &Package, name: &str) -> String {
    String::from_utf8(package.part(name).unwrap().unwrap_or_else(|| panic!("{name} is missing"))).unwrap()
}

/// The texts on the sheet of findings.
fn texts(package: &Package) -> Vec<String> {
    let book = Workbook::read(package).unwrap();
    let mut found = Vec::new();
    let mut sheets = Sheets::open(package, &book).unwrap();
    sheets
        .visit("Check findings", |_, value| {
            if let Value::Text(text) = value {
                found.push(text);
            }
        })
        .unwrap();
    found
}

#[test]
fn findings_stand_on_a_sheet_and_on_their_cells() {
    let (package, _) = flawed().open();
    let copy = marked(&package);
    let codes: Vec<&str> = checked(&package).findings.iter().map(|finding| finding.kind.code()).collect();
    assert_eq!(codes, ["hard-coded", "short-total"]);
    let texts = texts(&copy).join("\n");
    for wanted in [
        "small.xlsx: 2 findings",
        "'It''s a plan'!E5 [hence_factor]",
        "a typed number in a row of formulas",
        "a total that leaves out years or rows",
        "Not looked at",
        "on the cell",
    ] {
        assert!(texts.contains(wanted), "{wanted} is missing from:\n{texts}");
    }
    let comments = part(&copy, "xl/comments1.xml");
    for wanted in ["ref=\"E5\"", "ref=\"B7\"", "hence check: a typed number", "leaves out the last 2 years"] {
        assert!(comments.contains(wanted), "{wanted} is missing from:\n{comments}");
    }
    // The sheet has one element more, which names the drawing; its cells are the same.
    let (before, after) =
        (part(&package, "xl/worksheets/sheet1.xml"), part(&copy, "xl/worksheets/sheet1.xml"));
    let named = after.find("<legacyDrawing").expect("the drawing is named");
    let rest = &after[named..][after[named..].find('>').unwrap() + 1..];
    assert_eq!(format!("{}{rest}", &after[..named]), before);
    assert!(part(&copy, "xl/drawings/vmlDrawing1.vml").contains("<x:Row>4</x:Row><x:Column>4</x:Column>"));
    assert!(part(&copy, "[Content_Types].xml").contains("Extension=\"vml\""));
}

#[test]
fn notes_of_others_stay_and_are_told_of() {
    let (package, _) = with_notes().open();
    let copy = marked(&package);
    let comments = part(&copy, "xl/comments1.xml");
    for wanted in ["agreed in May", "from the ferry's books", "<author>hence check</author>", "ref=\"B7\""] {
        assert!(comments.contains(wanted), "{wanted} is missing from:\n{comments}");
    }
    assert!(!comments.contains("a typed number"), "{comments}");
    assert!(texts(&copy).contains(&"none: the cell has a note of its own".to_owned()));
    // The sheet named its drawing already.
    for same in ["xl/worksheets/sheet1.xml", "xl/worksheets/_rels/sheet1.xml.rels"] {
        assert_eq!(package.part(same).unwrap(), copy.part(same).unwrap(), "{same}");
    }
    let boxes = part(&copy, "xl/drawings/vmlDrawing1.vml");
    assert!(
        boxes.starts_with(&part(&package, "xl/drawings/vmlDrawing1.vml").replace("</xml>", "")),
        "{boxes}"
    );
    assert!(boxes.contains("_x0000_s1027") && !boxes.contains("_x0000_s1028"), "{boxes}");
}

#[test]
fn every_other_part_is_as_it_was() {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../samples/mine-drainage-libreoffice.xlsx");
    let package = Package::open(&path).unwrap();
    let copy = marked(&package);
    let may = ["[Content_Types].xml", "xl/workbook.xml", "xl/_rels/workbook.xml.rels", "xl/styles.xml"];
    for name in package.parts().filter(|name| !may.contains(name)) {
        assert!(package.part(name).unwrap() == copy.part(name).unwrap(), "{name} has changed");
    }
    assert!(texts(&copy).iter().any(|text| text.contains("no finding")));
}

#[test]
fn a_second_mark_takes_the_place_of_the_first() {
    for (small, notes) in [(flawed(), 2), (with_notes(), 3)] {
        let (package, _) = small.open();
        let first = marked(&package);
        let again = marked(&first);
        let sheets = |package: &Package| Workbook::read(package).unwrap().sheets.len();
        assert_eq!(sheets(&again), sheets(&first));
        for name in ["xl/comments1.xml", "xl/drawings/vmlDrawing1.vml", "xl/worksheets/sheet1.xml"] {
            assert_eq!(part(&again, name), part(&first, name));
        }
        assert_eq!(part(&again, "xl/comments1.xml").matches("<comment ").count(), notes);
    }
    // What somebody typed on the sheet is not lost in silence.
    let (package, _) = flawed().open();
    let first = marked(&package);
    let book = Workbook::read(&first).unwrap();
    let sheet = book.sheets[book.sheet_index("Check findings").unwrap()].part.clone();
    let writes = BTreeMap::from([("B40".parse().unwrap(), CellWrite::Text("accepted".into()))]);
    let xml = patch_sheet(&first.part(&sheet).unwrap().unwrap(), &writes).unwrap();
    let changes = Changes { replace: BTreeMap::from([(sheet, xml)]), ..Changes::default() };
    let typed = Package::from_bytes("plan.xlsx", first.write(&changes).unwrap()).unwrap();
    let error = mark(&typed, &checked(&typed)).expect_err("the sheet was typed on");
    assert_eq!(error.problems()[0].code, "own-sheet-edited", "{error}");
}

#[test]
fn a_drawing_that_cannot_be_read_is_left_alone() {
    let main = "http://schemas.openxmlformats.org/spreadsheetml/2006/main";
    let comments = format!("<comments xmlns=\"{main}\"><authors/><commentList/></comments>");
    let small = flawed()
        .after_cells("<legacyDrawing r:id=\"rId2\"/>")
        .related("comments", "comments1.xml", &comments)
        .related(
            "vmlDrawing",
            "drawings/vmlDrawing1.vml",
            "<xml><v:textbox><div><br></div></v:textbox></xml>",
        );
    let (package, _) = small.open();
    let copy = marked(&package);
    for same in ["xl/comments1.xml", "xl/drawings/vmlDrawing1.vml"] {
        assert_eq!(package.part(same).unwrap(), copy.part(same).unwrap(), "{same}");
    }
    assert!(texts(&copy).contains(&"none: the notes of the sheet cannot be read".to_owned()));
}

#[test]
fn copies_are_valid_and_their_notes_are_read_by_others() {
    let folder = tempfile::tempdir().unwrap();
    let mut files = Vec::new();
    for (name, small) in [("plain.xlsx", flawed()), ("noted.xlsx", with_notes())] {
        let path = folder.path().join(name);
        std::fs::write(&path, marked(&small.open().0).bytes()).unwrap();
        files.push(path);
    }
    if let Some(bad) = tools::invalid(&files) {
        assert!(bad.is_empty(), "{bad:#?}");
    }
    if !tools::libreoffice() {
        return;
    }
    let saved = folder.path().join("saved");
    std::fs::create_dir(&saved).unwrap();
    assert_eq!(tools::recalculated(&files, &saved).len(), 2);
    let Some(python) = tools::python("openpyxl") else { return };
    let script = "import openpyxl, sys\nfor f in sys.argv[1:]:\n for ws in openpyxl.load_workbook(f):\n  for row in ws.iter_rows():\n   \
                  for c in row:\n    if c.comment: print(f.split('/')[-1], c.coordinate, c.comment.text.split('\\n')[0])";
    let saved_files: Vec<_> = ["plain.xlsx", "noted.xlsx"].map(|name| saved.join(name)).to_vec();
    for list in [&files, &saved_files] {
        let output = Command::new(&python).args(["-c", script]).args(list).output().unwrap();
        let text = String::from_utf8_lossy(&output.stdout).into_owned();
        let found: BTreeSet<&str> = text.lines().collect();
        let expected = BTreeSet::from([
            "plain.xlsx E5 hence check: a typed number in a row of formulas",
            "plain.xlsx B7 hence check: a total that leaves out years or rows",
            "noted.xlsx B7 hence check: a total that leaves out years or rows",
            "noted.xlsx E5 agreed in May",
            "noted.xlsx A4 from the ferry's books",
        ]);
        assert_eq!(found, expected, "{}", String::from_utf8_lossy(&output.stderr));
    }
}

/// A report with a finding on the first cell of every sheet.
fn everywhere(book: &Workbook) -> CheckReport {
    let finding = |sheet: &hence_workbook::model::Sheet| Finding {
        kind: Kind::HardCoded,
        place: Place::cells(&sheet.name, "A1:B2".parse().unwrap()),
        found: "1 & 2".to_owned(),
        expected: "<3>".to_owned(),
        effect_on_npv: None,
        ranking: None,
        confidence: 0.5,
        words: "For the test.".to_owned(),
    };
    CheckReport {
        agree: 0,
        differences: Vec::new(),
        findings: book.sheets.iter().map(finding).collect(),
        not_filled: Vec::new(),
        problems: Vec::new(),
    }
}

#[test]
fn real_workbooks_take_notes_on_every_sheet() {
    let Some(corpus) = std::env::var_os("HENCE_CORPUS") else {
        println!("HENCE_CORPUS is not set: no real workbook was tried");
        return;
    };
    let folder = tempfile::tempdir().unwrap();
    let mut files: Vec<_> = std::fs::read_dir(corpus).unwrap().map(|entry| entry.unwrap().path()).collect();
    files.sort();
    let (mut before, mut after) = (Vec::new(), Vec::new());
    for file in files {
        let Ok(package) = Package::open(&file) else { continue };
        if package.graftable().is_err() || preflight(&package).is_err() {
            continue;
        }
        let report = everywhere(&Workbook::read(&package).unwrap());
        let once = mark(&package, &report).unwrap_or_else(|error| panic!("{}: {error}", file.display()));
        let copy = Package::from_bytes(package.file_name(), once.clone()).unwrap();
        let twice = mark(&copy, &report).unwrap_or_else(|error| panic!("{}, again: {error}", file.display()));
        let again = Package::from_bytes(package.file_name(), twice).unwrap();
        for name in copy.parts().filter(|name| name.contains("comments") || name.ends_with(".vml")) {
            assert_eq!(copy.part(name).unwrap(), again.part(name).unwrap(), "{}: {name}", file.display());
        }
        let path = folder.path().join(package.file_name());
        std::fs::write(&path, once).unwrap();
        before.push(file);
        after.push(path);
    }
    assert!(after.len() > 50, "{} workbooks were marked", after.len());
    let Some(bad) = tools::invalid(&before) else { return };
    let sound: Vec<_> =
        before.iter().zip(&after).filter(|(b, _)| !bad.contains_key(*b)).map(|(_, a)| a.clone()).collect();
    let bad = tools::invalid(&sound).unwrap();
    assert!(bad.is_empty(), "{bad:#?}");
}
