//! The workbook part and the facts of sheets: written by hand, and read from real workbooks.
//!
//! Source: small parts after ISO/IEC 29500-1, 18.2 and 18.3; real workbooks from the folder named by
//! HENCE_CORPUS.

use std::path::PathBuf;

use hence_workbook::model::{SheetKind, SheetState, Workbook};
use hence_workbook::package::{Package, Relationship};
use hence_workbook::references::NameTarget;

use crate::bare::Small;

#[test]
fn names_keep_their_scopes_and_resolve_by_them() {
    let package = Small::new()
        .cells("Costs", &[("A1", "1")])
        .cells("Do minimum", &[("A1", "1")])
        .name("rate", None, "Costs!$A$1")
        .name("Rate", Some(1), "'do minimum'!$B$2:$C$3")
        .name("alias", None, "rate")
        .name("lost", None, "Gone!$A$1")
        .name("a", None, "b")
        .name("b", None, "a")
        .name("whole", None, "Flows")
        .table(0, "Flows", "A1:B3", false, &["x", "y"])
        .package();
    let book = Workbook::read(&package).unwrap();
    assert!(book.problems.is_empty(), "{:?}", book.problems);
    let resolve = |name: &str, sheet| book.find_name(name, sheet).map(|name| book.resolve(name));
    let cells = |text: &str| Some(NameTarget::Cells(text.parse().unwrap()));
    assert_eq!(resolve("RATE", None), cells("Costs!A1"));
    assert_eq!(resolve("rate", Some(0)), cells("Costs!A1"));
    assert_eq!(resolve("rate", Some(1)), cells("'Do minimum'!B2:C3"));
    assert_eq!(resolve("alias", Some(1)), cells("Costs!A1"));
    assert_eq!(resolve("lost", None), Some(NameTarget::MissingSheet("Gone".into())));
    assert!(matches!(resolve("a", None), Some(NameTarget::Formula(_))));
    assert_eq!(
        resolve("whole", None),
        Some(NameTarget::Table { table: "Flows".into(), part: String::new() })
    );
    assert_eq!(resolve("none", None), None);
}

#[test]
fn every_attribute_of_the_workbook_part_is_read() {
    let xml = "<x:workbook xmlns:x=\"m\" xmlns:q=\"r\"><x:workbookPr date1904=\"true\"/>\
        <x:workbookProtection lockStructure=\"1\"/><x:sheets>\
        <x:sheet name=\"A &amp; B\" sheetId=\"7\" q:id=\"a\"/>\
        <x:sheet name=\"C\" sheetId=\"8\" state=\"hidden\" q:id=\"b\"/>\
        <x:sheet name=\"D\" sheetId=\"9\" state=\"veryHidden\" q:id=\"c\"/></x:sheets>\
        <x:definedNames><x:definedName name=\"n\" hidden=\"1\" comment=\"why\" localSheetId=\"2\">\
        'A &amp; B'!<![CDATA[$A$1]]></x:definedName><x:definedName name=\"f\" function=\"1\">#NAME?</x:definedName>\
        </x:definedNames><x:calcPr calcMode=\"manual\" fullPrecision=\"0\"/></x:workbook>";
    let relation = |id: &str, kind: &str| Relationship {
        id: id.into(),
        kind: format!("http://schemas.openxmlformats.org/officeDocument/2006/relationships/{kind}"),
        target: format!("xl/{id}.xml"),
        external: false,
    };
    let relations = [
        relation("a", "worksheet"),
        relation("b", "chartsheet"),
        relation("c", "xlMacrosheet"),
        relation("d", "calcChain"),
    ];
    let book = Workbook::from_xml("xl/workbook.xml", xml.as_bytes(), &relations).unwrap();
    let sheets: Vec<_> = book.sheets.iter().map(|s| (s.name.as_str(), s.kind, s.state, s.sheet_id)).collect();
    assert_eq!(
        sheets,
        [
            ("A & B", SheetKind::Worksheet, SheetState::Visible, 7),
            ("C", SheetKind::Chartsheet, SheetState::Hidden, 8),
            ("D", SheetKind::Macro, SheetState::VeryHidden, 9)
        ]
    );
    assert_eq!(book.sheets[0].part, "xl/a.xml");
    let name = &book.names[0];
    assert_eq!((name.name.as_str(), name.scope, name.hidden, name.function), ("n", Some(2), true, false));
    assert_eq!((name.text.as_str(), name.comment.as_deref()), ("'A & B'!$A$1", Some("why")));
    assert!(book.names[1].function && !book.names[1].hidden);
    assert!(book.date1904 && book.protected && book.calc_mode_manual && book.has_calc_chain);
    assert!(!book.full_precision && !book.has_revisions);
}

#[test]
fn bad_names_are_kept_out_and_reported_and_bad_sheets_refused() {
    let package = Small::new()
        .cells("S", &[("A1", "1")])
        .name("twice", None, "S!$A$1")
        .name("TWICE", None, "S!$A$2")
        .name("twice", Some(0), "S!$A$3")
        .name("astray", Some(5), "S!$A$4")
        .name("_xlnm.Print_Area", Some(0), "S!$A$1")
        .name("_xlnm.Print_Area", Some(0), "S!$A$1")
        .package();
    let book = Workbook::read(&package).unwrap();
    let found: Vec<_> =
        book.problems.iter().map(|p| (p.code, p.place.name.as_deref().unwrap_or(""))).collect();
    assert_eq!(found, [("bad-name-scope", "astray"), ("duplicate-name", "TWICE")]);
    assert!(book.find_name("twice", None).is_none() && book.find_name("twice", Some(0)).is_some());
    assert!(book.find_name("astray", None).is_none());

    let code = |xml: &str| {
        let relation =
            Relationship { id: "a".into(), kind: "worksheet".into(), target: "a".into(), external: false };
        Workbook::from_xml("w", xml.as_bytes(), &[relation]).unwrap_err().problems()[0].code
    };
    assert_eq!(code("<workbook/>"), "no-sheets");
    assert_eq!(
        code("<workbook><sheets><sheet name='S' id='a'/><sheet name='s' id='a'/></sheets></workbook>"),
        "duplicate-sheet"
    );
    assert_eq!(code("<workbook><sheets><sheet name='S' id='b'/></sheets></workbook>"), "missing-sheet-part");
    assert_eq!(code("<workbook><sheets><sheet name='S'/></sheets></workbook>"), "missing-sheet-part");
}

#[test]
fn hundreds_of_thousands_of_names_are_read_and_their_problems_counted() {
    let mut names = String::new();
    for i in 0..100_000 {
        names.push_str(&format!("<definedName name='n{}'>S!$A${}</definedName>", i / 2, i + 1));
    }
    let xml = format!(
        "<workbook><sheets><sheet name='S' id='a'/></sheets><definedNames>{names}</definedNames></workbook>"
    );
    let relation =
        Relationship { id: "a".into(), kind: "worksheet".into(), target: "a".into(), external: false };
    let book = Workbook::from_xml("w", xml.as_bytes(), &[relation]).unwrap();
    assert_eq!(book.names.len(), 100_000);
    assert_eq!(book.problems.len(), 21);
    assert!(book.problems[20].message.starts_with("49980 more"), "{}", book.problems[20].message);
}

#[test]
fn facts_of_a_sheet() {
    let package = Small::new()
        .data(
            "S",
            "<row r=\"2\" hidden=\"1\"/><row hidden=\"true\"><c r=\"A3\"><f t=\"array\" ref=\"A3:B4\">1</f></c>\
             <c><f t=\"shared\" si=\"4\" ref=\"B3:B9\">A1</f></c><c><f t=\"shared\" si=\"4\"/></c></row>\
             <row r=\"9\" hidden=\"1\"><c r=\"D9\"><f t=\"dataTable\" ref=\"D9:E9\" r1=\"A1\"/></c></row>",
            "<sheetProtection sheet=\"1\"/><mergeCells><mergeCell ref=\"F1:G2\"/></mergeCells>\
             <dataValidations><dataValidation type=\"decimal\" operator=\"lessThan\" sqref=\"A1:A3 C1\">\
             <formula1>10</formula1></dataValidation></dataValidations>\
             <extLst><ext><x14:dataValidations xmlns:x14=\"y\" xmlns:xm=\"z\"><x14:dataValidation type=\"list\">\
             <x14:formula1><xm:f>Lists!A1:A3</xm:f></x14:formula1><xm:sqref>D4</xm:sqref></x14:dataValidation>\
             </x14:dataValidations></ext></extLst>",
        )
        .table(0, "Flows", "J1:K5", true, &["x", "y"])
        .package();
    let book = Workbook::read(&package).unwrap();
    let facts = book.facts(&package, 0).unwrap();
    let text = |ranges: &[hence_workbook::references::Range]| -> Vec<String> {
        ranges.iter().map(|range| range.to_string()).collect()
    };
    assert_eq!(text(&facts.merged), ["F1:G2"]);
    assert_eq!(text(&facts.array_formulas), ["A3:B4"]);
    assert_eq!(text(&facts.data_tables), ["D9:E9"]);
    assert_eq!(facts.hidden_rows, [(1, 2), (8, 8)]);
    assert!(facts.row_hidden(2) && !facts.row_hidden(3) && facts.protected);
    let [master] = &facts.shared_masters[..] else { panic!("{:?}", facts.shared_masters) };
    assert_eq!(
        (master.cell.to_string(), master.index, master.range.to_string()),
        ("B3".into(), 4, "B3:B9".into())
    );
    let [decimal, list] = &facts.validations[..] else { panic!("{:?}", facts.validations) };
    assert_eq!(
        (text(&decimal.ranges), decimal.kind.as_str()),
        (vec!["A1:A3".into(), "C1".into()], "decimal")
    );
    assert_eq!((decimal.operator.as_str(), decimal.formula1.as_str()), ("lessThan", "10"));
    assert_eq!((text(&list.ranges), list.formula1.as_str()), (vec!["D4".into()], "Lists!A1:A3"));
    let [table] = &facts.tables[..] else { panic!("{:?}", facts.tables) };
    assert_eq!((table.name.as_str(), table.data().unwrap().to_string()), ("Flows", "J2:K4".into()));
}

/// The real workbooks, or none with a plain word about it.
pub fn corpus() -> Vec<PathBuf> {
    let Some(folder) = std::env::var_os("HENCE_CORPUS") else {
        println!("HENCE_CORPUS is not set: no real workbooks are read here");
        return Vec::new();
    };
    let mut files: Vec<PathBuf> = std::fs::read_dir(folder)
        .unwrap()
        .map(|entry| entry.unwrap().path())
        .filter(|path| path.extension().is_some_and(|e| e == "xlsx" || e == "xlsm"))
        .collect();
    files.sort();
    assert!(!files.is_empty(), "HENCE_CORPUS holds no workbooks");
    files
}

/// Another reader of the same files must see the same sheets and the same names.
#[test]
fn real_workbooks_give_what_another_reader_sees() {
    use calamine::Reader;
    let mut compared = 0;
    for path in corpus() {
        let Ok(package) = Package::open(&path) else { continue };
        let book = match Workbook::read(&package) {
            Ok(book) => book,
            Err(error) => {
                println!("{}: {error}", path.display());
                continue;
            }
        };
        for sheet in 0..book.sheets.len() {
            if let Err(error) = book.facts(&package, sheet) {
                println!("{}: {error}", path.display());
            }
        }
        for name in &book.names {
            book.resolve(name);
        }
        let Ok(other) = calamine::open_workbook::<calamine::Xlsx<_>, _>(&path) else { continue };
        let sheets: Vec<String> = book.sheets.iter().map(|sheet| sheet.name.clone()).collect();
        assert_eq!(sheets, other.sheet_names(), "{}", path.display());
        let names: Vec<&str> = book.names.iter().map(|name| name.name.as_str()).collect();
        let others: Vec<&str> = other.defined_names().iter().map(|(name, _)| name.as_str()).collect();
        assert_eq!(names, others, "{}", path.display());
        compared += 1;
    }
    if std::env::var_os("HENCE_CORPUS").is_some() {
        assert!(compared > 40, "only {compared} workbooks could be compared");
    }
}
