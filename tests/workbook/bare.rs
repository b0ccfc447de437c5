//! Small workbooks made in memory, as bare as the format allows, for tests that need known contents.

use std::fmt::Write as _;
use std::io::{Cursor, Write as _};

use hence_workbook::package::Package;
use zip::write::SimpleFileOptions;

const MAIN: &str = "http://schemas.openxmlformats.org/spreadsheetml/2006/main";
const RELATIONSHIPS: &str = "http://schemas.openxmlformats.org/officeDocument/2006/relationships";
const PACKAGE: &str = "http://schemas.openxmlformats.org/package/2006";

/// A workbook to be made: sheets, what follows `<sheets>` in its main part, further parts of a sheet.
#[derive(Default)]
pub struct Small {
    sheets: Vec<(String, String)>,
    book: String,
    settings: String,
    tables: Vec<(usize, String)>,
}

impl Small {
    pub fn new() -> Self {
        Small::default()
    }

    /// Adds a sheet of formulas (`=...`), numbers and texts, each with its address.
    pub fn cells(self, name: &str, cells: &[(&str, &str)]) -> Self {
        let mut rows: Vec<(u32, String)> = Vec::new();
        for (at, content) in cells {
            let row: u32 = at.trim_start_matches(|c: char| c.is_ascii_alphabetic()).parse().unwrap();
            let cell = match content.strip_prefix('=') {
                Some(formula) => format!("<c r=\"{at}\"><f>{}</f><v>1</v></c>", escape(formula)),
                None if content.parse::<f64>().is_ok() => format!("<c r=\"{at}\"><v>{content}</v></c>"),
                None => format!("<c r=\"{at}\" t=\"inlineStr\"><is><t>{}</t></is></c>", escape(content)),
            };
            match rows.iter_mut().find(|(number, _)| *number == row) {
                Some((_, text)) => text.push_str(&cell),
                None => rows.push((row, cell)),
            }
        }
        let mut data = String::new();
        for (row, cells) in rows {
            write!(data, "<row r=\"{row}\">{cells}</row>").unwrap();
        }
        self.sheet(name, &format!("<worksheet xmlns=\"{MAIN}\"><sheetData>{data}</sheetData></worksheet>"))
    }

    /// Adds a sheet part as it is.
    pub fn sheet(mut self, name: &str, xml: &str) -> Self {
        self.sheets.push((name.to_owned(), xml.to_owned()));
        self
    }

    /// Adds a sheet whose `<sheetData>` is given, and what follows it.
    pub fn data(self, name: &str, data: &str, after: &str) -> Self {
        self.sheet(
            name,
            &format!("<worksheet xmlns=\"{MAIN}\"><sheetData>{data}</sheetData>{after}</worksheet>"),
        )
    }

    /// Adds a name for the whole workbook or for a sheet.
    pub fn name(mut self, name: &str, scope: Option<usize>, text: &str) -> Self {
        let scope = scope.map_or(String::new(), |sheet| format!(" localSheetId=\"{sheet}\""));
        write!(self.book, "<definedName name=\"{name}\"{scope}>{}</definedName>", escape(text)).unwrap();
        self
    }

    /// Puts elements before the sheets' list of the main part.
    pub fn settings(mut self, xml: &str) -> Self {
        self.settings.push_str(xml);
        self
    }

    /// Adds a table to a sheet; its first row holds the names of its columns.
    pub fn table(mut self, sheet: usize, name: &str, cells: &str, totals: bool, columns: &[&str]) -> Self {
        let mut list = String::new();
        for (i, column) in columns.iter().enumerate() {
            write!(list, "<tableColumn id=\"{}\" name=\"{column}\"/>", i + 1).unwrap();
        }
        let totals = if totals { " totalsRowCount=\"1\"" } else { "" };
        self.tables.push((
            sheet,
            format!(
                "<table xmlns=\"{MAIN}\" id=\"1\" name=\"{name}\" displayName=\"{name}\" ref=\"{cells}\"{totals}>\
                 <tableColumns count=\"{}\">{list}</tableColumns></table>",
                columns.len()
            ),
        ));
        self
    }

    /// The main part.
    pub fn workbook_xml(&self) -> String {
        let mut list = String::new();
        for (i, (name, _)) in self.sheets.iter().enumerate() {
            write!(list, "<sheet name=\"{}\" sheetId=\"{1}\" r:id=\"rId{1}\"/>", escape(name), i + 1)
                .unwrap();
        }
        let names = match self.book.as_str() {
            "" => String::new(),
            names => format!("<definedNames>{names}</definedNames>"),
        };
        format!(
            "<workbook xmlns=\"{MAIN}\" xmlns:r=\"{RELATIONSHIPS}\">{}<sheets>{list}</sheets>{names}</workbook>",
            self.settings
        )
    }

    /// The package.
    pub fn package(&self) -> Package {
        let relation = |id: usize, kind: &str, target: &str| {
            format!("<Relationship Id=\"rId{id}\" Type=\"{RELATIONSHIPS}/{kind}\" Target=\"{target}\"/>")
        };
        let list = |inside: String| {
            format!("<Relationships xmlns=\"{PACKAGE}/relationships\">{inside}</Relationships>").into_bytes()
        };
        let mut parts: Vec<(String, Vec<u8>)> = vec![
            (
                "[Content_Types].xml".into(),
                format!(
                    "<Types xmlns=\"{PACKAGE}/content-types\">\
                     <Default Extension=\"rels\" ContentType=\"application/vnd.openxmlformats-package.relationships+xml\"/>\
                     <Default Extension=\"xml\" ContentType=\"application/xml\"/>\
                     <Override PartName=\"/xl/workbook.xml\" ContentType=\"application/vnd.openxmlformats-officedocument.spreadsheetml.sheet.main+xml\"/>\
                     </Types>"
                )
                .into_bytes(),
            ),
            ("_rels/.rels".into(), list(relation(1, "officeDocument", "xl/workbook.xml"))),
            ("xl/workbook.xml".into(), self.workbook_xml().into_bytes()),
        ];
        let sheets =
            (1..=self.sheets.len()).map(|i| relation(i, "worksheet", &format!("worksheets/sheet{i}.xml")));
        parts.push(("xl/_rels/workbook.xml.rels".into(), list(sheets.collect())));
        for (i, (_, xml)) in self.sheets.iter().enumerate() {
            parts.push((format!("xl/worksheets/sheet{}.xml", i + 1), xml.clone().into_bytes()));
            let mut own = String::new();
            for (t, (_, xml)) in self.tables.iter().enumerate().filter(|(_, (sheet, _))| *sheet == i) {
                own.push_str(&relation(t + 1, "table", &format!("../tables/table{}.xml", t + 1)));
                parts.push((format!("xl/tables/table{}.xml", t + 1), xml.clone().into_bytes()));
            }
            if !own.is_empty() {
                parts.push((format!("xl/worksheets/_rels/sheet{}.xml.rels", i + 1), list(own)));
            }
        }
        let mut zip = zip::ZipWriter::new(Cursor::new(Vec::new()));
        for (name, bytes) in parts {
            zip.start_file(name, SimpleFileOptions::default()).unwrap();
            zip.write_all(&bytes).unwrap();
        }
        Package::from_bytes("small.xlsx", zip.finish().unwrap().into_inner()).unwrap()
    }
}

fn escape(text: &str) -> String {
    text.replace('&', "&amp;").replace('<', "&lt;")
}
