//! Large workbooks with a small appraisal in them, written as plain parts.

use std::fmt::Write as _;
use std::io::Write as _;
use std::path::Path;

use zip::write::SimpleFileOptions;

const MAIN: &str = "http://schemas.openxmlformats.org/spreadsheetml/2006/main";
const RELATIONS: &str = "http://schemas.openxmlformats.org/officeDocument/2006/relationships";
const PACKAGE: &str = "http://schemas.openxmlformats.org/package/2006";
const TYPE: &str = "application/vnd.openxmlformats-officedocument.spreadsheetml";
const YEARS: u32 = 100;
const COLUMNS: u32 = 100;

/// `cells` numbers over `sheets` sheets of 100 columns; the appraisal stands on top of the first.
pub fn make(path: &Path, sheets: u32, cells: u32) {
    let file = std::fs::File::create(path).expect("the workbook can be made");
    let mut zip = zip::ZipWriter::new(std::io::BufWriter::new(file));
    let options = SimpleFileOptions::default();
    let mut put = |name: &str, text: &str| {
        zip.start_file(name, options).expect("an entry");
        zip.write_all(text.as_bytes()).expect("its text");
    };
    let head = "<?xml version=\"1.0\" encoding=\"UTF-8\" standalone=\"yes\"?>\n";
    let all = if sheets > 1 { sheets + 1 } else { 1 };
    let mut types = format!(
        "{head}<Types xmlns=\"{PACKAGE}/content-types\"><Default Extension=\"rels\" \
         ContentType=\"application/vnd.openxmlformats-package.relationships+xml\"/><Override PartName=\"/xl/workbook.xml\" \
         ContentType=\"{TYPE}.sheet.main+xml\"/>"
    );
    let mut listed = String::new();
    let mut relations = String::new();
    for n in 1..=all {
        write!(
            types,
            "<Override PartName=\"/xl/worksheets/sheet{n}.xml\" ContentType=\"{TYPE}.worksheet+xml\"/>"
        )
        .unwrap();
        write!(listed, "<sheet name=\"S{n}_\" sheetId=\"{n}\" r:id=\"rId{n}\"/>").unwrap();
        write!(
            relations,
            "<Relationship Id=\"rId{n}\" Type=\"{RELATIONS}/worksheet\" Target=\"worksheets/sheet{n}.xml\"/>"
        )
        .unwrap();
    }
    put("[Content_Types].xml", &(types + "</Types>"));
    put(
        "_rels/.rels",
        &format!(
            "{head}<Relationships xmlns=\"{PACKAGE}/relationships\"><Relationship Id=\"rId1\" Type=\"{RELATIONS}/officeDocument\" Target=\"xl/workbook.xml\"/></Relationships>"
        ),
    );
    put(
        "xl/_rels/workbook.xml.rels",
        &format!("{head}<Relationships xmlns=\"{PACKAGE}/relationships\">{relations}</Relationships>"),
    );
    let names: String = [("years", 3), ("cost_works", 4), ("benefit_all", 5), ("factor", 6), ("pv", 7)]
        .iter()
        .map(|(role, row)| format!("<definedName name=\"hence_{role}\">S1_!$B${row}:$CW${row}</definedName>"))
        .chain(
            [("base", "$B$1"), ("basis", "$C$1"), ("npv", "$B$8")]
                .iter()
                .map(|(role, at)| format!("<definedName name=\"hence_{role}\">S1_!{at}</definedName>")),
        )
        .collect();
    put(
        "xl/workbook.xml",
        &format!(
            "{head}<workbook xmlns=\"{MAIN}\" xmlns:r=\"{RELATIONS}\"><sheets>{listed}</sheets><definedNames>{names}</definedNames></workbook>"
        ),
    );
    let per_sheet = cells / sheets;
    for n in 1..=all {
        let mut xml = format!("{head}<worksheet xmlns=\"{MAIN}\"><sheetData>");
        if n == 1 {
            appraisal(&mut xml);
        }
        if n > 1 || sheets == 1 {
            numbers(&mut xml, 10, per_sheet);
        }
        xml.push_str("</sheetData></worksheet>");
        put(&format!("xl/worksheets/sheet{n}.xml"), &xml);
    }
    zip.finish().expect("the workbook is whole");
}

fn column(mut n: u32) -> String {
    let mut letters = String::new();
    n += 1;
    while n > 0 {
        letters.insert(0, char::from(b'A' + ((n - 1) % 26) as u8));
        n = (n - 1) / 26;
    }
    letters
}

fn appraisal(xml: &mut String) {
    xml.push_str("<row r=\"1\"><c r=\"A1\" t=\"inlineStr\"><is><t>Base, basis</t></is></c><c r=\"B1\"><v>2026</v></c><c r=\"C1\" t=\"inlineStr\"><is><t>3.5% to 30, 3% after</t></is></c></row>");
    for (row, label) in [(3, "Year"), (4, "Works"), (5, "Benefits")] {
        write!(xml, "<row r=\"{row}\"><c r=\"A{row}\" t=\"inlineStr\"><is><t>{label}</t></is></c>").unwrap();
        for i in 0..YEARS {
            let value = match row {
                3 => 2026 + i,
                4 => 1000 - 7 * i,
                _ => 900 + 5 * i,
            };
            write!(xml, "<c r=\"{}{row}\"><v>{value}</v></c>", column(1 + i)).unwrap();
        }
        xml.push_str("</row>");
    }
}

fn numbers(xml: &mut String, first_row: u32, count: u32) {
    let letters: Vec<String> = (0..COLUMNS).map(column).collect();
    for i in 0..count {
        let (row, col) = (first_row + i / COLUMNS, i % COLUMNS);
        if col == 0 {
            write!(xml, "<row r=\"{row}\">").unwrap();
        }
        write!(xml, "<c r=\"{}{row}\"><v>{}.{}</v></c>", letters[col as usize], i % 9973, i % 89 + 1)
            .unwrap();
        if col == COLUMNS - 1 || i == count - 1 {
            xml.push_str("</row>");
        }
    }
}
