//! Edits of the workbook part: what changes, and that nothing else does.
//!
//! Source: the order of elements is that of CT_Workbook in ISO/IEC 29500-1, 18.2.27.

use hence_workbook::names_edit::{BookEdit, NewName, NewSheet, OldName, edit_workbook};

use hence_workbook::model::Workbook;
use hence_workbook::package::Package;

fn edited(xml: &str, edit: &BookEdit) -> String {
    String::from_utf8(edit_workbook(xml.as_bytes(), edit).unwrap()).unwrap()
}

fn name(name: &str, scope: Option<&str>, text: &str) -> NewName {
    NewName {
        name: name.into(),
        scope: scope.map(str::to_owned),
        text: text.into(),
        hidden: false,
        comment: None,
    }
}

fn sheet(name: &str, rel_id: &str) -> NewSheet {
    NewSheet { name: name.into(), rel_id: rel_id.into(), hidden: false }
}

const R: &str = "http://schemas.openxmlformats.org/officeDocument/2006/relationships";

#[test]
fn no_edit_changes_no_byte() {
    let xml = "\u{feff}<?xml version='1.0'?>\r\n<workbook ><sheets>\n<sheet name = 'S' sheetId='1' r:id='a'/></sheets>\
        <definedNames/><calcPr calcId='1' /></workbook>\n<!-- end -->";
    assert_eq!(edited(xml, &BookEdit::default()), xml);
}

#[test]
fn sheets_names_and_calculation_go_where_the_schema_wants_them() {
    let xml = format!(
        "<workbook xmlns:r=\"{R}\"><sheets><sheet name=\"S\" sheetId=\"3\" r:id=\"rId1\"/></sheets>\
         <externalReferences><externalReference r:id=\"rId9\"/></externalReferences><oleSize ref=\"A1\"/></workbook>"
    );
    let edit = BookEdit {
        add_sheets: vec![sheet("P&L", "rId7"), NewSheet { hidden: true, ..sheet("H", "rId8") }],
        set_names: vec![
            NewName {
                hidden: true,
                comment: Some("a \"b\"".into()),
                ..name("x", Some("p&l"), "'P&L'!$A$1<2")
            },
            name("y", None, "3"),
        ],
        full_calc_on_load: true,
        ..BookEdit::default()
    };
    let expected = format!(
        "<workbook xmlns:r=\"{R}\"><sheets><sheet name=\"S\" sheetId=\"3\" r:id=\"rId1\"/>\
         <sheet name=\"P&amp;L\" sheetId=\"4\" r:id=\"rId7\"/>\
         <sheet name=\"H\" sheetId=\"5\" state=\"hidden\" r:id=\"rId8\"/></sheets>\
         <externalReferences><externalReference r:id=\"rId9\"/></externalReferences>\
         <definedNames><definedName name=\"x\" comment=\"a &quot;b&quot;\" localSheetId=\"1\" hidden=\"1\">\
         'P&amp;L'!$A$1&lt;2</definedName><definedName name=\"y\">3</definedName></definedNames>\
         <calcPr fullCalcOnLoad=\"1\"/><oleSize ref=\"A1\"/></workbook>"
    );
    assert_eq!(edited(&xml, &edit), expected);
}

#[test]
fn prefixes_are_kept_and_declared_where_they_are_missing() {
    let xml = format!(
        "<x:workbook xmlns:x=\"m\"><x:sheets><x:sheet xmlns:q=\"{R}\" name=\"S\" sheetId=\"65534\" q:id=\"a\"/></x:sheets>\
         <x:calcPr/></x:workbook>"
    );
    let edit = BookEdit {
        add_sheets: vec![sheet("T", "b")],
        set_names: vec![name("n", None, "1")],
        full_calc_on_load: true,
        ..BookEdit::default()
    };
    let expected = format!(
        "<x:workbook xmlns:x=\"m\"><x:sheets><x:sheet xmlns:q=\"{R}\" name=\"S\" sheetId=\"65534\" q:id=\"a\"/>\
         <x:sheet name=\"T\" sheetId=\"1\" xmlns:r=\"{R}\" r:id=\"b\"/></x:sheets>\
         <x:definedNames><x:definedName name=\"n\">1</x:definedName></x:definedNames>\
         <x:calcPr fullCalcOnLoad=\"1\"/></x:workbook>"
    );
    assert_eq!(edited(&xml, &edit), expected);
    let bound = xml.replace("<x:sheets>", &format!("<x:sheets xmlns:z=\"{R}\">"));
    assert!(edited(&bound, &edit).contains("sheetId=\"1\" z:id=\"b\"/>"));
}

#[test]
fn scopes_and_tabs_follow_when_sheets_go() {
    let xml = "<workbook><bookViews><workbookView firstSheet=\"2\" activeTab=\"3\"/><workbookView activeTab=\"1\"/>\
        </bookViews><sheets><sheet name=\"A\" sheetId=\"1\" r:id=\"a\"/><sheet name=\"B\" sheetId=\"2\" r:id=\"b\"/>\
        <sheet name=\"C\" sheetId=\"3\" r:id=\"c\"/><sheet name=\"D\" sheetId=\"9\" r:id=\"d\"></sheet></sheets>\
        <definedNames><definedName name=\"n\" localSheetId=\"0\">1</definedName>\
        <definedName localSheetId='1' name=\"n\">2</definedName><definedName name=\"n\" localSheetId=\"2\">3</definedName>\
        <definedName name=\"n\">4</definedName><definedName name=\"m\" localSheetId=\"3\">5</definedName>\
        </definedNames><calcPr fullCalcOnLoad=\"0\"/></workbook>";
    let edit = BookEdit {
        remove_sheets: vec!["b".into()],
        add_sheets: vec![sheet("B", "b2")],
        set_names: vec![name("N", Some("c"), "33"), name("n", Some("B"), "22")],
        remove_names: vec![
            OldName { name: "N".into(), scope: None },
            OldName { name: "x".into(), scope: None },
        ],
        full_calc_on_load: true,
    };
    let expected = "<workbook><bookViews><workbookView firstSheet=\"1\" activeTab=\"2\"/><workbookView activeTab=\"0\"/>\
        </bookViews><sheets><sheet name=\"A\" sheetId=\"1\" r:id=\"a\"/>\
        <sheet name=\"C\" sheetId=\"3\" r:id=\"c\"/><sheet name=\"D\" sheetId=\"9\" r:id=\"d\"></sheet>\
        <sheet name=\"B\" sheetId=\"10\" xmlns:r=\"R\" r:id=\"b2\"/></sheets>\
        <definedNames><definedName name=\"n\" localSheetId=\"0\">1</definedName>\
        <definedName name=\"N\" localSheetId=\"1\">33</definedName>\
        <definedName name=\"m\" localSheetId=\"2\">5</definedName>\
        <definedName name=\"n\" localSheetId=\"3\">22</definedName>\
        </definedNames><calcPr fullCalcOnLoad=\"1\"/></workbook>"
        .replace("xmlns:r=\"R\"", &format!("xmlns:r=\"{R}\""));
    assert_eq!(edited(xml, &edit), expected);
    assert_eq!(edited(xml, &edit), edited(xml, &edit));
}

#[test]
fn an_emptied_list_of_names_goes_and_an_empty_one_is_opened() {
    let xml = "<workbook><sheets><sheet name=\"A\" sheetId=\"1\" r:id=\"a\"/></sheets>\
        <definedNames><definedName name=\"n\">1</definedName></definedNames></workbook>";
    let remove =
        BookEdit { remove_names: vec![OldName { name: "n".into(), scope: None }], ..BookEdit::default() };
    assert_eq!(
        edited(xml, &remove),
        "<workbook><sheets><sheet name=\"A\" sheetId=\"1\" r:id=\"a\"/></sheets></workbook>"
    );
    let empty =
        "<workbook><sheets><sheet name=\"A\" sheetId=\"1\" r:id=\"a\"/></sheets><definedNames/></workbook>";
    let add = BookEdit { set_names: vec![name("n", None, "1")], ..BookEdit::default() };
    assert_eq!(edited(empty, &add), xml);
}

#[test]
fn what_cannot_be_is_refused() {
    let xml = "<workbook><sheets><sheet name=\"A\" sheetId=\"1\" r:id=\"a\"/></sheets></workbook>";
    let code = |edit: BookEdit| edit_workbook(xml.as_bytes(), &edit).unwrap_err().problems()[0].code;
    assert_eq!(code(BookEdit { remove_sheets: vec!["a".into()], ..BookEdit::default() }), "no-sheets");
    assert_eq!(
        code(BookEdit { add_sheets: vec![sheet("a", "b")], ..BookEdit::default() }),
        "duplicate-sheet"
    );
    let astray = BookEdit { set_names: vec![name("n", Some("B"), "1")], ..BookEdit::default() };
    assert_eq!(code(astray), "unknown-sheet");
    assert!(edit_workbook(b"<workbook><sheets></workbook>", &BookEdit::default()).is_err());
}

/// A name put into a real workbook is read back, and everything read before is still there.
#[test]
fn real_workbooks_take_names_and_keep_the_rest() {
    for path in crate::model::corpus() {
        let Ok(package) = Package::open(&path) else { continue };
        let Ok(before) = Workbook::read(&package) else { continue };
        let part = package.workbook_part();
        let xml = package.part(part).unwrap().unwrap();
        let edit = BookEdit {
            set_names: vec![
                name("hence_base", None, "2026"),
                name("hence_npv", Some(&before.sheets[0].name), "1"),
            ],
            full_calc_on_load: true,
            ..BookEdit::default()
        };
        let after = edit_workbook(&xml, &edit).unwrap();
        let relationships = package.relationships(part).unwrap();
        let mut read = Workbook::from_xml(part, &after, &relationships).unwrap();
        assert_eq!(
            read.find_name("hence_npv", Some(0)).map(|n| n.text.as_str()),
            Some("1"),
            "{}",
            path.display()
        );
        assert_eq!(read.sheets, before.sheets);
        read.names.retain(|name| !name.name.starts_with("hence_"));
        assert_eq!(read.names, before.names, "{}", path.display());
        assert_eq!(
            String::from_utf8_lossy(&after).matches("fullCalcOnLoad=\"1\"").count(),
            1,
            "{}",
            path.display()
        );
        let gone = BookEdit {
            remove_names: vec![
                OldName { name: "hence_base".into(), scope: None },
                OldName { name: "hence_npv".into(), scope: Some(before.sheets[0].name.clone()) },
            ],
            ..BookEdit::default()
        };
        let again = edit_workbook(&after, &gone).unwrap();
        assert!(!String::from_utf8_lossy(&again).contains("hence_"), "{}", path.display());
    }
}
