//! Grafting: hence's sheets, as xlsxwriter makes them, in a workbook made by hand.

use std::io::Write as _;

use hence_workbook::graft::{ChartFinish, Graft, Legend, graft};
use hence_workbook::package::Package;
use xlsxwriter::prelude::*;

/// A package of two sheets: one with formats, a formula, a condition and print titles, one with two charts.
pub fn own_package() -> Package {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("own.xlsx");
    let book = Workbook::new(path.to_str().unwrap()).unwrap();
    let mut factors = book.add_worksheet(Some("Discounting")).unwrap();
    let mut bold = Format::new();
    bold.set_bold().set_bg_color(FormatColor::Custom(0x00DD_EEFF));
    let mut number = Format::new();
    number.set_num_format("0.0000");
    factors.write_string(0, 0, "Year", Some(&bold)).unwrap();
    factors.write_string(0, 1, "Factor <1>", Some(&bold)).unwrap();
    factors.set_column(1, 1, 14.0, Some(&number)).unwrap();
    for year in 0..10_u32 {
        factors.write_number(year + 1, 0, f64::from(2026 + year), None).unwrap();
        let factor = 1.035_f64.powi(-i32::try_from(year).unwrap());
        let formula = format!("=1.035^-(A{}-2026)", year + 2);
        factors.write_formula_num(year + 1, 1, &formula, Some(&number), factor).unwrap();
    }
    factors.write_string(12, 0, " spaced ", None).unwrap();
    factors.freeze_panes(1, 0);
    factors.repeat_rows(0, 0).unwrap();
    factors.print_area(0, 0, 12, 1).unwrap();

    let mut audit = book.add_worksheet(Some("Audit's charts")).unwrap();
    audit.write_string(0, 0, "agrees", None).unwrap();
    for (row, kind) in [(2, ChartType::ScatterStraightWithMarkers), (20, ChartType::Column)] {
        let mut chart = book.add_chart(kind);
        chart.add_series(Some("=Discounting!$A$2:$A$11"), Some("=Discounting!$B$2:$B$11")).unwrap();
        chart.add_series(Some("=Discounting!$A$2:$A$11"), Some("=Discounting!$B$2:$B$11")).unwrap();
        chart.add_title("Discount factor").unwrap();
        audit.insert_chart(row, 1, &chart).unwrap();
    }
    book.define_name("hence_verdict", "='Audit''s charts'!$A$1").unwrap();
    book.close().unwrap();
    Package::open(&path).unwrap()
}

const HOST_STYLES: &str = "<styleSheet xmlns=\"http://schemas.openxmlformats.org/spreadsheetml/2006/main\">\
    <fonts count=\"1\"><font><sz val=\"10\"/><name val=\"Arial\"/></font></fonts><fills count=\"1\"><fill/></fills>\
    <borders count=\"1\"><border/></borders><cellStyleXfs count=\"1\"><xf/></cellStyleXfs>\
    <cellXfs count=\"1\"><xf xfId=\"0\"/></cellXfs></styleSheet>";

/// A workbook of two sheets with a calculation chain; with or without a styles part.
pub fn host(styles: bool) -> Package {
    let kind = "http://schemas.openxmlformats.org/officeDocument/2006/relationships";
    let main = "application/vnd.openxmlformats-officedocument.spreadsheetml";
    let sheet = |n: u32| format!("<sheet name=\"Flows {n}\" sheetId=\"{}\" r:id=\"rId{n}\"/>", n * 3);
    let mut parts = vec![
        ("[Content_Types].xml", format!("<Types xmlns=\"http://schemas.openxmlformats.org/package/2006/content-types\">\
            <Default Extension=\"xml\" ContentType=\"application/xml\"/>\
            <Default Extension=\"rels\" ContentType=\"application/vnd.openxmlformats-package.relationships+xml\"/>\
            <Override PartName=\"/xl/workbook.xml\" ContentType=\"{main}.sheet.main+xml\"/>\
            <Override PartName=\"/xl/worksheets/sheet1.xml\" ContentType=\"{main}.worksheet+xml\"/>\
            <Override PartName=\"/xl/worksheets/sheet3.xml\" ContentType=\"{main}.worksheet+xml\"/>\
            {}<Override PartName=\"/xl/calcChain.xml\" ContentType=\"{main}.calcChain+xml\"/></Types>",
            if styles { format!("<Override PartName=\"/xl/styles.xml\" ContentType=\"{main}.styles+xml\"/>") } else { String::new() })),
        ("_rels/.rels", format!("<Relationships xmlns=\"http://schemas.openxmlformats.org/package/2006/relationships\">\
            <Relationship Id=\"rId1\" Type=\"{kind}/officeDocument\" Target=\"xl/workbook.xml\"/></Relationships>")),
        ("xl/workbook.xml", format!("<workbook xmlns=\"http://schemas.openxmlformats.org/spreadsheetml/2006/main\" \
            xmlns:r=\"{kind}\"><sheets>{}{}</sheets><definedNames><definedName name=\"a\" localSheetId=\"1\">1</definedName>\
            </definedNames></workbook>", sheet(1), sheet(2))),
        ("xl/_rels/workbook.xml.rels", format!("<Relationships xmlns=\"http://schemas.openxmlformats.org/package/2006/relationships\">\
            <Relationship Id=\"rId1\" Type=\"{kind}/worksheet\" Target=\"worksheets/sheet1.xml\"/>\
            <Relationship Id=\"rId2\" Type=\"{kind}/worksheet\" Target=\"/xl/worksheets/sheet3.xml\"/>\
            <Relationship Id=\"rId4\" Type=\"{kind}/calcChain\" Target=\"calcChain.xml\"/>{}</Relationships>",
            if styles { format!("<Relationship Id=\"rId5\" Type=\"{kind}/styles\" Target=\"styles.xml\"/>") } else { String::new() })),
        ("xl/worksheets/sheet1.xml", "<worksheet xmlns=\"http://schemas.openxmlformats.org/spreadsheetml/2006/main\"><sheetViews>\
            <sheetView tabSelected=\"1\" workbookViewId=\"0\"/></sheetViews><sheetData><row r=\"1\"><c r=\"A1\"><v>1</v></c>\
            <c r=\"B1\"><f>A1*2</f><v>2</v></c></row></sheetData></worksheet>".to_owned()),
        ("xl/worksheets/sheet3.xml", "<worksheet xmlns=\"http://schemas.openxmlformats.org/spreadsheetml/2006/main\"><sheetData/></worksheet>".to_owned()),
        ("xl/calcChain.xml", "<calcChain xmlns=\"http://schemas.openxmlformats.org/spreadsheetml/2006/main\"><c r=\"B1\" i=\"3\"/></calcChain>".to_owned()),
    ];
    if styles {
        parts.push(("xl/styles.xml", HOST_STYLES.to_owned()));
    }
    let mut zip = zip::ZipWriter::new(std::io::Cursor::new(Vec::new()));
    for (name, text) in parts {
        zip.start_file(name, zip::write::SimpleFileOptions::default()).unwrap();
        zip.write_all(text.as_bytes()).unwrap();
    }
    Package::from_bytes("host.xlsx", zip.finish().unwrap().into_inner()).unwrap()
}

/// How the charts of [`own_package`] are finished.
pub fn finishes() -> Vec<ChartFinish> {
    let first = ChartFinish {
        title: Some("Discount factor & rate".to_owned()),
        x_title: Some("Year".to_owned()),
        y_title: Some("Factor".to_owned()),
        y_format: Some("0.00".to_owned()),
        x_range: Some((2026.0, 2035.0)),
        legend: Some(Legend::Bottom),
        markers: true,
        size: Some((9, 18)),
        ..ChartFinish::default()
    };
    vec![first, ChartFinish::default()]
}

fn plan<'a>(ours: &'a Package, charts: &'a [ChartFinish], previous: &'a [String]) -> Graft<'a> {
    Graft { ours, previous, set_names: &[], remove_names: &[], charts }
}

fn text(package: &Package, part: &str) -> String {
    String::from_utf8(package.part(part).unwrap().unwrap_or_else(|| panic!("{part} is missing"))).unwrap()
}

#[test]
fn sheets_strings_styles_names_and_charts_come_along() {
    let (host, ours, charts) = (host(true), own_package(), finishes());
    let grafted = graft(&host, &plan(&ours, &charts, &[])).unwrap();
    let out = Package::from_bytes("out.xlsx", host.write(&grafted.changes).unwrap()).unwrap();

    let parts: Vec<_> = grafted.sheets.iter().map(|s| (s.rel_id.as_str(), s.part.as_str())).collect();
    assert_eq!(parts, [("rId3", "xl/worksheets/sheet2.xml"), ("rId4", "xl/worksheets/sheet4.xml")]);
    let sheet = text(&out, "xl/worksheets/sheet2.xml");
    assert!(sheet.contains("t=\"inlineStr\"><is><t>Factor &lt;1&gt;</t></is></c>"), "{sheet}");
    assert!(sheet.contains("<is><t xml:space=\"preserve\"> spaced </t></is>"), "{sheet}");
    assert!(!sheet.contains("t=\"s\"") && !sheet.contains("tabSelected"), "{sheet}");
    // Of three formats of hence's none is the host's only one, so they are 1 to 3; a plain cell is number 1.
    assert!(sheet.contains("<c r=\"A2\" s=\"1\"><v>2026</v></c>"), "{sheet}");
    assert!(sheet.contains("width=\"14.7109375\" style=\"2\""), "{sheet}");
    assert!(text(&out, "xl/styles.xml").contains("<cellXfs count=\"4\"><xf xfId=\"0\"/><xf "));

    let book = text(&out, "xl/workbook.xml");
    assert!(book.contains("<sheet name=\"Discounting\" sheetId=\"7\" r:id=\"rId3\"/>"), "{book}");
    assert!(book.contains("name=\"_xlnm.Print_Titles\" localSheetId=\"2\""), "{book}");
    assert!(book.contains("'Audit''s charts'!$A$1") && book.contains("fullCalcOnLoad=\"1\""), "{book}");

    assert!(!out.has("xl/calcChain.xml"));
    assert!(!text(&out, "[Content_Types].xml").contains("calcChain"));
    assert!(!text(&out, "xl/_rels/workbook.xml.rels").contains("calcChain"));
    assert!(text(&out, "xl/worksheets/_rels/sheet4.xml.rels").contains("\"../drawings/drawing1.xml\""));
    assert!(text(&out, "xl/drawings/drawing1.xml").contains("descr=\"Discount factor &amp; rate\""));
    let chart = text(&out, "xl/charts/chart1.xml");
    assert!(chart.contains("<a:t>Year</a:t>") && chart.contains("<c:delete val=\"0\"/>"), "{chart}");
    assert!(!chart.contains("numCache"), "{chart}");
    assert!(!text(&out, "xl/charts/chart2.xml").contains("<c:legend>"));
}

#[test]
fn a_second_graft_gives_the_same_bytes() {
    for styles in [true, false] {
        let (host, ours, charts) = (host(styles), own_package(), finishes());
        let first = host.write(&graft(&host, &plan(&ours, &charts, &[])).unwrap().changes).unwrap();
        let again = Package::from_bytes("out.xlsx", first.clone()).unwrap();
        let previous = ["discounting".to_owned(), "Audit's charts".to_owned()];
        let second = again.write(&graft(&again, &plan(&ours, &charts, &previous)).unwrap().changes).unwrap();
        assert!(first == second, "styles part: {styles}");
        let error = graft(&again, &plan(&ours, &charts, &[])).unwrap_err();
        assert_eq!(error.problems()[0].code, "sheet-name-taken");
    }
}

#[test]
fn charts_and_finishes_must_match() {
    let (host, ours) = (host(true), own_package());
    let one = [ChartFinish::default()];
    let error = graft(&host, &plan(&ours, &one, &[])).unwrap_err();
    assert_eq!(error.problems()[0].code, "chart-count");
}
