//! Small workbooks written out by hand, for the rules of names and roles.
//!
//! Cells are lines of `B3: 2025 | 2026 | 2027`, placed to the right of their first cell: a number, a `'text`,
//! `=formula>result`, `=formula>` without a result,
//! `=[attributes]formula>result`, `#REF!`, `TRUE`, `@45748` (a date), `{2}5` (with a style:
//! 1 is a date, 2 is text, 3 is `#,##0.00`), or nothing.

use std::fmt::Write as _;
use std::io::{Cursor, Write as _};

use hence_workbook::appraisal::Appraisal;
use hence_workbook::model::Workbook;
use hence_workbook::package::Package;
use hence_workbook::problem::{Problem, Severity};
use hence_workbook::references::{Cell, quote_sheet};
use hence_workbook::resolve::{NamesReport, Options, names, resolve};

/// A workbook under construction.
#[derive(Clone, Default)]
pub struct Small {
    sheets: Vec<Page>,
    names: Vec<(String, Option<usize>, String)>,
    date1904: bool,
}

/// One sheet: its name, and the XML of and around its cells.
#[derive(Clone, Default)]
struct Page {
    name: String,
    before: String,
    cells: String,
    after: String,
    /// Kind of relationship, part and its XML.
    related: Vec<(String, String, String)>,
}

impl Small {
    /// Adds a sheet with its cells.
    pub fn sheet(mut self, name: &str, cells: &str) -> Self {
        self.sheets.push(Page { name: name.to_owned(), cells: sheet_data(cells), ..Page::default() });
        self
    }

    /// Adds XML after the cells of the last sheet.
    pub fn after_cells(mut self, xml: &str) -> Self {
        if let Some(sheet) = self.sheets.last_mut() {
            sheet.after.push_str(xml);
        }
        self
    }

    /// Adds XML before the cells of the last sheet.
    pub fn before_cells(mut self, xml: &str) -> Self {
        if let Some(sheet) = self.sheets.last_mut() {
            sheet.before.push_str(xml);
        }
        self
    }

    /// Adds a part (`tables/table1.xml`) that the last sheet has a relationship of that kind to.
    pub fn related(mut self, kind: &str, part: &str, xml: &str) -> Self {
        if let Some(sheet) = self.sheets.last_mut() {
            sheet.related.push((kind.to_owned(), part.to_owned(), xml.to_owned()));
        }
        self
    }

    /// Adds names of the last sheet, `hence_base B1, hence_years B3:D3`, for the whole workbook.
    pub fn names(self, list: &str) -> Self {
        self.add_names(list, false)
    }

    /// Adds names of the last sheet, scoped to it.
    pub fn own_names(self, list: &str) -> Self {
        self.add_names(list, true)
    }

    /// Adds one name with its text as it is.
    pub fn raw_name(mut self, name: &str, text: &str) -> Self {
        self.names.push((name.to_owned(), None, text.to_owned()));
        self
    }

    /// Counts days from 1904.
    pub fn counting_from_1904(mut self) -> Self {
        self.date1904 = true;
        self
    }

    fn add_names(mut self, list: &str, own: bool) -> Self {
        let at = self.sheets.len() - 1;
        for item in list.split(',') {
            let (name, cells) = item.trim().split_once(' ').expect("a name and its cells");
            let fixed: Vec<String> = cells
                .trim()
                .split(':')
                .map(|cell| {
                    let digits = cell.find(|c: char| c.is_ascii_digit()).expect("a row");
                    format!("${}${}", &cell[..digits], &cell[digits..])
                })
                .collect();
            let text = format!("{}!{}", quote_sheet(&self.sheets[at].name), fixed.join(":"));
            self.names.push((name.to_owned(), own.then_some(at), text));
        }
        self
    }

    /// The package as bytes.
    pub fn bytes(&self) -> Vec<u8> {
        let mut parts =
            vec![("_rels/.rels".to_owned(), relationships(&[("officeDocument", "xl/workbook.xml")]))];
        let mut types = String::new();
        let (mut sheets, mut targets) = (String::new(), Vec::new());
        for (i, Page { name, before, cells, after, related }) in self.sheets.iter().enumerate() {
            let n = i + 1;
            let _ = write!(sheets, r#"<sheet name="{}" sheetId="{n}" r:id="rId{n}"/>"#, escape(name));
            targets.push(("worksheet", format!("worksheets/sheet{n}.xml")));
            let kind = "application/vnd.openxmlformats-officedocument.spreadsheetml.worksheet+xml";
            let _ =
                write!(types, r#"<Override PartName="/xl/worksheets/sheet{n}.xml" ContentType="{kind}"/>"#);
            let sheet = format!(
                "<worksheet xmlns=\"{MAIN}\" xmlns:r=\"{RELATIONS}\">{before}<sheetData>{cells}</sheetData>{after}</worksheet>"
            );
            parts.push((format!("xl/worksheets/sheet{n}.xml"), sheet));
            if !related.is_empty() {
                let list: Vec<(String, String)> =
                    related.iter().map(|(kind, part, _)| (kind.clone(), format!("/xl/{part}"))).collect();
                let list: Vec<(&str, &str)> = list.iter().map(|(a, b)| (a.as_str(), b.as_str())).collect();
                parts.push((format!("xl/worksheets/_rels/sheet{n}.xml.rels"), relationships(&list)));
                parts.extend(related.iter().map(|(_, part, xml)| (format!("xl/{part}"), xml.clone())));
            }
        }
        targets.push(("styles", "styles.xml".to_owned()));
        let mut names = String::new();
        for (name, scope, text) in &self.names {
            let scope = scope.map(|at| format!(" localSheetId=\"{at}\"")).unwrap_or_default();
            let _ = write!(names, r#"<definedName name="{name}"{scope}>{}</definedName>"#, escape(text));
        }
        let properties = if self.date1904 { r#"<workbookPr date1904="1"/>"# } else { "" };
        let names = if names.is_empty() { names } else { format!("<definedNames>{names}</definedNames>") };
        parts.push((
            "xl/workbook.xml".to_owned(),
            format!(
                "<workbook xmlns=\"{MAIN}\" xmlns:r=\"{RELATIONS}\">{properties}<sheets>{sheets}</sheets>{names}</workbook>"
            ),
        ));
        let targets: Vec<(&str, &str)> =
            targets.iter().map(|(kind, target)| (*kind, target.as_str())).collect();
        parts.push(("xl/_rels/workbook.xml.rels".to_owned(), relationships(&targets)));
        parts.push(("xl/styles.xml".to_owned(), STYLES.to_owned()));
        let content_types = format!(
            "<Types xmlns=\"http://schemas.openxmlformats.org/package/2006/content-types\">\
             <Default Extension=\"rels\" ContentType=\"application/vnd.openxmlformats-package.relationships+xml\"/>\
             <Default Extension=\"xml\" ContentType=\"application/xml\"/>\
             <Override PartName=\"/xl/workbook.xml\" ContentType=\"{BOOK}.sheet.main+xml\"/>\
             <Override PartName=\"/xl/styles.xml\" ContentType=\"{BOOK}.styles+xml\"/>{types}</Types>"
        );
        parts.insert(0, ("[Content_Types].xml".to_owned(), content_types));
        let mut zip = zip::ZipWriter::new(Cursor::new(Vec::new()));
        for (name, xml) in parts {
            zip.start_file(name, zip::write::SimpleFileOptions::default()).expect("a new entry");
            zip.write_all(xml.as_bytes()).expect("memory");
        }
        zip.finish().expect("memory").into_inner()
    }

    /// The package and the model of its workbook part.
    pub fn open(&self) -> (Package, Workbook) {
        let package = Package::from_bytes("small.xlsx", self.bytes()).expect("a package");
        let book = Workbook::read(&package).expect("a workbook");
        (package, book)
    }

    /// What hence reads of it; a failed run gives its problems.
    pub fn resolve_with(&self, options: &Options) -> Result<Appraisal, Vec<Problem>> {
        let (package, book) = self.open();
        resolve(&package, &book, options).map_err(|error| error.problems().to_vec())
    }

    /// The same without options, expected to succeed.
    pub fn resolved(&self) -> Appraisal {
        self.resolve_with(&Options::default())
            .unwrap_or_else(|problems| panic!("{}", lines(&problems).join("\n")))
    }

    /// Errors and warnings as `code place`, whether the run succeeds or not.
    pub fn problems(&self) -> Vec<String> {
        let problems = match self.resolve_with(&Options::default()) {
            Ok(appraisal) => appraisal.problems,
            Err(problems) => problems,
        };
        codes(&problems)
    }

    /// The report on its names.
    pub fn report(&self) -> NamesReport {
        let (package, book) = self.open();
        names(&package, &book).expect("a report")
    }
}

/// Errors and warnings as `code place`; notes are left out.
pub fn codes(problems: &[Problem]) -> Vec<String> {
    let loud = problems.iter().filter(|problem| problem.severity > Severity::Note);
    loud.map(|problem| format!("{} {}", problem.code, problem.place)).collect()
}

/// Every problem in full, with what to try.
pub fn lines(problems: &[Problem]) -> Vec<String> {
    problems.iter().map(|p| format!("{p} try: {}", p.hint.as_deref().unwrap_or("-"))).collect()
}

const MAIN: &str = "http://schemas.openxmlformats.org/spreadsheetml/2006/main";
const RELATIONS: &str = "http://schemas.openxmlformats.org/officeDocument/2006/relationships";
const BOOK: &str = "application/vnd.openxmlformats-officedocument.spreadsheetml";
const STYLES: &str = r#"<styleSheet xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main"><fonts count="1"><font/></fonts><fills count="1"><fill><patternFill patternType="none"/></fill></fills><borders count="1"><border/></borders><cellStyleXfs count="1"><xf/></cellStyleXfs><cellXfs count="4"><xf numFmtId="0" fontId="0" fillId="0" borderId="0"/><xf numFmtId="14" fontId="0" fillId="0" borderId="0" applyNumberFormat="1"/><xf numFmtId="49" fontId="0" fillId="0" borderId="0" applyNumberFormat="1"/><xf numFmtId="4" fontId="0" fillId="0" borderId="0" applyNumberFormat="1"/></cellXfs></styleSheet>"#;

fn relationships(targets: &[(&str, &str)]) -> String {
    let mut xml =
        "<Relationships xmlns=\"http://schemas.openxmlformats.org/package/2006/relationships\">".to_owned();
    for (i, (kind, target)) in targets.iter().enumerate() {
        let n = i + 1;
        let _ = write!(xml, r#"<Relationship Id="rId{n}" Type="{RELATIONS}/{kind}" Target="{target}"/>"#);
    }
    xml + "</Relationships>"
}

fn escape(text: &str) -> String {
    text.replace('&', "&amp;").replace('<', "&lt;").replace('>', "&gt;").replace('"', "&quot;")
}

fn sheet_data(cells: &str) -> String {
    let mut rows: std::collections::BTreeMap<u32, Vec<(Cell, String)>> = Default::default();
    for line in cells.lines().map(str::trim).filter(|line| !line.is_empty()) {
        let (first, rest) = line.split_once(':').expect("a cell and its values");
        let first: Cell = first.parse().expect("a cell");
        for (i, value) in rest.split('|').map(str::trim).enumerate().filter(|(_, value)| !value.is_empty()) {
            let cell = Cell { row: first.row, col: first.col + i as u32 };
            rows.entry(cell.row).or_default().push((cell, stored(cell, value)));
        }
    }
    rows.into_iter().fold(String::new(), |mut xml, (row, mut cells)| {
        cells.sort();
        let cells: String = cells.into_iter().map(|(_, xml)| xml).collect();
        let _ = write!(xml, r#"<row r="{}">{cells}</row>"#, row + 1);
        xml
    })
}

fn stored(cell: Cell, value: &str) -> String {
    let (style, value) = match value.strip_prefix('{').and_then(|rest| rest.split_once('}')) {
        Some((style, value)) => (format!(" s=\"{style}\""), value),
        None => (String::new(), value),
    };
    let start = format!("<c r=\"{cell}\"{style}");
    if value.is_empty() {
        return format!("{start}/>");
    }
    if let Some(text) = value.strip_prefix('\'') {
        return format!("{start} t=\"inlineStr\"><is><t>{}</t></is></c>", escape(text));
    }
    if let Some(formula) = value.strip_prefix('=') {
        let (formula, result) = formula.rsplit_once('>').expect("a formula and its result");
        let result = if result.is_empty() { String::new() } else { format!("<v>{result}</v>") };
        let attributes = formula.strip_prefix('[').and_then(|rest| rest.split_once(']'));
        let (attributes, formula) =
            attributes.filter(|(list, _)| list.contains('=')).unwrap_or(("", formula));
        return format!("{start}><f {attributes}>{}</f>{result}</c>", escape(formula));
    }
    if value.starts_with('#') {
        return format!("{start} t=\"e\"><v>{value}</v></c>");
    }
    if matches!(value, "TRUE" | "FALSE") {
        return format!("{start} t=\"b\"><v>{}</v></c>", u8::from(value == "TRUE"));
    }
    if let Some(serial) = value.strip_prefix('@') {
        return format!("<c r=\"{cell}\" s=\"1\"><v>{serial}</v></c>");
    }
    format!("{start}><v>{value}</v></c>")
}
