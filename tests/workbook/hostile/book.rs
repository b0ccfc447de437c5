//! A small workbook whose every part can be replaced by something bad.

use super::zip::{Entry, archive};

pub const MAIN: &str = "http://schemas.openxmlformats.org/spreadsheetml/2006/main";
pub const OFFICE: &str = "http://schemas.openxmlformats.org/officeDocument/2006/relationships";
const PACKAGE: &str = "http://schemas.openxmlformats.org/package/2006";
const SHEET_TYPE: &str = "application/vnd.openxmlformats-officedocument.spreadsheetml";

/// The parts of a workbook, in their order.
#[derive(Clone)]
pub struct Book {
    pub entries: Vec<Entry>,
}

/// A relationships part with one entry per (id, type's last word, target, more attributes).
pub fn relationships(links: &[(&str, &str, &str, &str)]) -> String {
    let links: String = links
        .iter()
        .map(|(id, kind, target, more)| {
            format!("<Relationship Id=\"{id}\" Type=\"{OFFICE}/{kind}\" Target=\"{target}\" {more}/>")
        })
        .collect();
    format!("<Relationships xmlns=\"{PACKAGE}/relationships\">{links}</Relationships>")
}

/// The main part: sheets as (name, more attributes), and what follows them.
pub fn workbook(sheets: &[(&str, &str)], after: &str) -> String {
    let sheets: String = sheets
        .iter()
        .enumerate()
        .map(|(i, (name, more))| format!("<sheet name=\"{name}\" sheetId=\"{}\" {more}/>", i + 1))
        .collect();
    format!("<workbook xmlns=\"{MAIN}\" xmlns:r=\"{OFFICE}\"><sheets>{sheets}</sheets>{after}</workbook>")
}

/// A sheet part with these rows.
pub fn sheet(rows: &str) -> String {
    format!("<worksheet xmlns=\"{MAIN}\"><sheetData>{rows}</sheetData></worksheet>")
}

impl Book {
    /// One sheet, `Sheet1`, with these rows; two shared strings, `a` and `b`.
    pub fn new(rows: &str) -> Self {
        let types = format!(
            "<Types xmlns=\"{PACKAGE}/content-types\">\
             <Default Extension=\"rels\" ContentType=\"application/vnd.openxmlformats-package.relationships+xml\"/>\
             <Default Extension=\"xml\" ContentType=\"application/xml\"/>\
             <Override PartName=\"/xl/workbook.xml\" ContentType=\"{SHEET_TYPE}.sheet.main+xml\"/>\
             <Override PartName=\"/xl/worksheets/sheet1.xml\" ContentType=\"{SHEET_TYPE}.worksheet+xml\"/>\
             <Override PartName=\"/xl/sharedStrings.xml\" ContentType=\"{SHEET_TYPE}.sharedStrings+xml\"/>\
             <Override PartName=\"/xl/styles.xml\" ContentType=\"{SHEET_TYPE}.styles+xml\"/></Types>"
        );
        let links = [
            ("rId1", "worksheet", "worksheets/sheet1.xml", ""),
            ("rId2", "styles", "styles.xml", ""),
            ("rId3", "sharedStrings", "sharedStrings.xml", ""),
        ];
        let styles = format!(
            "<styleSheet xmlns=\"{MAIN}\"><fonts count=\"1\"><font><name val=\"Calibri\"/></font></fonts>\
             <cellXfs count=\"1\"><xf numFmtId=\"0\" fontId=\"0\"/></cellXfs></styleSheet>"
        );
        let strings = format!(
            "<sst xmlns=\"{MAIN}\" count=\"2\" uniqueCount=\"2\"><si><t>a</t></si><si><t>b</t></si></sst>"
        );
        Book {
            entries: vec![
                Entry::new("[Content_Types].xml", types),
                Entry::new(
                    "_rels/.rels",
                    relationships(&[("rId1", "officeDocument", "xl/workbook.xml", "")]),
                ),
                Entry::new("xl/workbook.xml", workbook(&[("Sheet1", "r:id=\"rId1\"")], "")),
                Entry::new("xl/_rels/workbook.xml.rels", relationships(&links)),
                Entry::new("xl/worksheets/sheet1.xml", sheet(rows)),
                Entry::new("xl/styles.xml", styles),
                Entry::new("xl/sharedStrings.xml", strings),
            ],
        }
    }

    /// One cell, A1, given whole.
    pub fn cell(xml: &str) -> Self {
        Book::new(&format!("<row r=\"1\">{xml}</row>"))
    }

    /// The content of a part replaced, or a part added.
    pub fn part(mut self, name: &str, content: impl Into<Vec<u8>>) -> Self {
        match self.entries.iter_mut().find(|entry| entry.name == name) {
            Some(entry) => entry.content = content.into(),
            None => self.entries.push(Entry::new(name, content)),
        }
        self
    }

    /// The text of a part changed; what is changed has to be there.
    pub fn swap(self, name: &str, from: &str, to: &str) -> Self {
        let entry = self.entries.iter().find(|entry| entry.name == name).unwrap();
        let text = String::from_utf8(entry.content.clone()).unwrap();
        assert!(text.contains(from), "{name} holds no {from}");
        self.part(name, text.replacen(from, to, 1))
    }

    /// An entry changed in its zip properties.
    pub fn entry(mut self, name: &str, change: impl FnOnce(&mut Entry)) -> Self {
        change(self.entries.iter_mut().find(|entry| entry.name == name).unwrap());
        self
    }

    pub fn all(mut self, change: impl Fn(&mut Entry)) -> Self {
        self.entries.iter_mut().for_each(change);
        self
    }

    /// The file.
    pub fn build(&self) -> Vec<u8> {
        archive(&self.entries, false)
    }
}
