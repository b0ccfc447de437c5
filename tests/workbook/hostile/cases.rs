//! Every hostile file and the answer it must get. What must happen is set down here from what harm each
//! file would do, before and apart from the code that answers.

use std::fmt::Write;

use super::book::{Book, MAIN, relationships, sheet, workbook};
use super::zip::{Entry, archive};

/// The answer a file must get.
#[derive(Clone, Debug, PartialEq)]
pub enum Answer {
    /// Refused with a code at a place ("workbook" where there is none).
    Refused(&'static str, &'static str),
    /// Read, with these warnings; the number of cells, and the text of the first.
    Read(&'static [&'static str], usize, &'static str),
}

/// A hostile file.
pub struct Case {
    pub name: &'static str,
    pub make: Box<dyn Fn() -> Vec<u8>>,
    pub answer: Answer,
}

use Answer::{Read, Refused};

const SHEET: &str = "xl/worksheets/sheet1.xml";
const STRINGS: &str = "xl/sharedStrings.xml";
const STYLES: &str = "xl/styles.xml";
const BOOK: &str = "xl/workbook.xml";
const LINKS: &str = "xl/_rels/workbook.xml.rels";
const TYPES: &str = "[Content_Types].xml";
const NONE: &str = "workbook";
const ONE: &str = "<c r=\"A1\"><v>1</v></c>";

fn case(name: &'static str, answer: Answer, make: impl Fn() -> Vec<u8> + 'static) -> Case {
    Case { name, make: Box::new(make), answer }
}

pub fn all() -> Vec<Case> {
    let mut cases = amplification();
    cases.extend(bombs());
    cases.extend(order());
    cases.extend(xml());
    cases.extend(names());
    cases.extend(containers());
    cases.extend(values());
    cases.extend(outside());
    cases.extend(bulk());
    cases.extend(unusual());
    cases
}

/// Small files that make a careless reader reserve gigabytes.
fn amplification() -> Vec<Case> {
    vec![
        case("cells at both corners", Read(&[], 2, "1"), || {
            Book::new("<row r=\"1\"><c r=\"A1\"><v>1</v></c></row><row r=\"1048576\"><c r=\"XFD1048576\"><v>2</v></c></row>").build()
        }),
        case("huge shared formula number", Refused("shared-formula", "Sheet1!A1"), || {
            Book::cell("<c r=\"A1\"><f t=\"shared\" ref=\"A1:A2\" si=\"4000000000000\">1</f></c>").build()
        }),
        case("shared formula without a number", Refused("shared-formula", "Sheet1!A1"), || {
            Book::cell("<c r=\"A1\"><f t=\"shared\" ref=\"A1:A2\">1</f></c>").build()
        }),
        case("formula amplification", Refused("formula-size", "Sheet1!A16776"), || {
            let long = "1+".repeat(4_000) + "1";
            let mut rows = format!(
                "<row r=\"1\"><c r=\"A1\"><f t=\"shared\" ref=\"A1:A18000\" si=\"0\">{long}</f></c></row>"
            );
            for row in 2..=18_000 {
                write!(rows, "<row r=\"{row}\"><c r=\"A{row}\"><f t=\"shared\" si=\"0\"/></c></row>")
                    .unwrap();
            }
            // Formulas of 8,001 characters: 16,775 of them are below 128 MB, the next is above.
            Book::new(&rows).build()
        }),
        case("lying uniqueCount", Refused("string-count", NONE), || {
            Book::cell(ONE).swap(STRINGS, "uniqueCount=\"2\"", "uniqueCount=\"4000000000\"").build()
        }),
        case("used range upside down", Refused("bad-range", "Sheet1!A1"), || {
            Book::cell(ONE).swap(SHEET, "<sheetData>", "<dimension ref=\"B9:A1\"/><sheetData>").build()
        }),
        case("used range beyond all numbers", Refused("bad-range", "Sheet1!A1"), || {
            Book::cell(ONE)
                .swap(SHEET, "<sheetData>", "<dimension ref=\"A1:A99999999999\"/><sheetData>")
                .build()
        }),
        case("formula range upside down", Refused("bad-range", "Sheet1!A1"), || {
            Book::cell("<c r=\"A1\"><f t=\"shared\" ref=\"B9:A1\" si=\"0\">1</f></c>").build()
        }),
        case("font name of 500 KB", Refused("too-many-formats", NONE), || {
            Book::cell(ONE).swap(STYLES, "Calibri", &"x".repeat(500_000)).build()
        }),
        case("number format of many brackets", Refused("too-many-formats", NONE), || {
            let format = "[".repeat(300);
            let formats =
                format!("<numFmts><numFmt numFmtId=\"164\" formatCode=\"{format}\"/></numFmts><fonts");
            Book::cell(ONE).swap(STYLES, "<fonts", &formats).build()
        }),
    ]
}

fn blanks(megabytes: usize) -> Vec<u8> {
    vec![b' '; megabytes << 20]
}

/// Files that unpack to far more than they are, or than they say.
fn bombs() -> Vec<Case> {
    vec![
        case("entry of 200 MB, declared", Refused("zip-bomb", NONE), || {
            Book::cell(ONE).part("xl/media/image1.png", blanks(200)).build()
        }),
        case("entry that grows a thousand times", Refused("zip-bomb", NONE), || {
            Book::cell(ONE)
                .part("xl/media/image1.png", blanks(100))
                .entry("xl/media/image1.png", |entry| entry.level = 9)
                .build()
        }),
        case("bomb that claims to be small", Refused("damaged-zip", NONE), || {
            Book::cell(ONE)
                .part("xl/media/image1.png", blanks(100))
                .entry("xl/media/image1.png", |entry| entry.claim = Some(1000))
                .build()
        }),
        case("sheet that claims to be small", Refused("damaged-zip", NONE), || {
            Book::cell(ONE).entry(SHEET, |entry| entry.claim = Some(100)).build()
        }),
        case("sheet that claims to be large", Refused("damaged-zip", NONE), || {
            Book::cell(ONE).entry(SHEET, |entry| entry.claim = Some(4_000_000)).build()
        }),
        case("many entries over the same bytes", Refused("damaged-zip", NONE), || {
            let mut book = Book::cell(ONE).part("xl/media/a.png", blanks(7));
            let first = book.entries.len() - 1;
            for _ in 0..50 {
                let mut entry = Entry::new("xl/media/a.png", Vec::new());
                entry.alias = Some(first);
                book.entries.push(entry);
            }
            book.build()
        }),
        case("more than 20,000 entries", Refused("zip-bomb", NONE), || {
            let mut book = Book::cell(ONE);
            book.entries.extend((0..20_001).map(|i| Entry::new(&format!("x{i}"), Vec::new())));
            book.build()
        }),
        case("attribute of 100 MB", Refused("long-token", NONE), || {
            let attribute = format!("<sheetData x=\"{}\">", "y".repeat(100 << 20));
            Book::cell(ONE)
                .swap(SHEET, "<sheetData>", &attribute)
                .entry(SHEET, |entry| entry.stored = true)
                .build()
        }),
        case("text of 100 MB", Refused("long-token", NONE), || {
            let text = format!("<t>{}</t>", "y".repeat(100 << 20));
            Book::cell(ONE)
                .swap(STRINGS, "<t>a</t>", &text)
                .entry(STRINGS, |entry| entry.stored = true)
                .build()
        }),
        case("three million strings", Refused("too-many-strings", NONE), || {
            let mut strings = format!("<sst xmlns=\"{MAIN}\">");
            for i in 0..3_000_000 {
                write!(strings, "<si><t>{i}</t></si>").unwrap();
            }
            Book::cell(ONE).part(STRINGS, strings + "</sst>").build()
        }),
    ]
}

/// Cells where they cannot be.
fn order() -> Vec<Case> {
    let rows =
        |name, code, place, rows: &'static str| case(name, Refused(code, place), || Book::new(rows).build());
    vec![
        rows("row past the end", "out-of-range", "Sheet1!A1", "<row r=\"1048577\"/>"),
        rows("row zero", "out-of-range", "Sheet1!A1", "<row r=\"0\"/>"),
        rows("row beyond all numbers", "out-of-range", "Sheet1!A1", "<row r=\"99999999999999999999\"/>"),
        rows("column past the end", "out-of-range", "Sheet1!A1", "<row r=\"1\"><c r=\"XFE1\"/></row>"),
        rows("cell in row zero", "out-of-range", "Sheet1!A1", "<row r=\"1\"><c r=\"A0\"/></row>"),
        rows("cell without a row", "out-of-range", "Sheet1!A1", "<row r=\"1\"><c r=\"A\"/></row>"),
        rows(
            "duplicate cell",
            "duplicate-cell",
            "Sheet1!B1",
            "<row r=\"1\"><c r=\"B1\"/><c r=\"B1\"/></row>",
        ),
        rows(
            "cells out of order",
            "cell-order",
            "Sheet1!A1",
            "<row r=\"1\"><c r=\"B1\"/><c r=\"A1\"/></row>",
        ),
        rows("cell in another row", "cell-row", "Sheet1!C7", "<row r=\"1\"><c r=\"C7\"/></row>"),
        rows("duplicate row", "duplicate-row", "Sheet1!A2", "<row r=\"2\"/><row r=\"2\"/>"),
        rows("rows out of order", "row-order", "Sheet1!A1", "<row r=\"2\"/><row r=\"1\"/>"),
        rows("two lists of cells", "two-sheet-data", "Sheet1!A1", "<row r=\"1\"/></sheetData><sheetData>"),
        rows("cell outside a row", "odd-cell", "Sheet1!A1", "<c r=\"A1\"><v>1</v></c>"),
        rows("row inside a row", "odd-cell", "Sheet1!A1", "<row r=\"1\"><row r=\"2\"/></row>"),
        rows(
            "unknown type of value",
            "odd-cell",
            "Sheet1!A1",
            "<row r=\"1\"><c r=\"A1\" t=\"q\"><v>1</v></c></row>",
        ),
        case("more cells than columns", Refused("out-of-range", "Sheet1!XFD1"), || {
            Book::cell(&"<c/>".repeat(16_385)).build()
        }),
        case("sheet without cells", Refused("bad-sheet", "Sheet1"), || {
            Book::cell(ONE).part(SHEET, format!("<worksheet xmlns=\"{MAIN}\"/>")).build()
        }),
    ]
}

const ENTITY: &str = "<!DOCTYPE x [<!ENTITY e SYSTEM \"file:///etc/passwd\">]>";
const LAUGHS: &str = "<!DOCTYPE x [<!ENTITY a \"ha\"><!ENTITY b \"&a;&a;&a;&a;&a;&a;&a;&a;\">]>";

/// XML that is not XML, or too much of it.
fn xml() -> Vec<Case> {
    let before = |name, part: &'static str, text: &'static str| {
        case(name, Refused("doctype", NONE), move || {
            let book = Book::cell(ONE);
            let old = book.entries.iter().find(|entry| entry.name == part).unwrap().content.clone();
            book.part(part, [text.as_bytes(), &old].concat()).build()
        })
    };
    vec![
        before("document type in a sheet", SHEET, "<!DOCTYPE worksheet>"),
        before("external entity in a sheet", SHEET, ENTITY),
        before("external entity in the strings", STRINGS, ENTITY),
        before("external entity in the styles", STYLES, ENTITY),
        before("external entity in the main part", BOOK, ENTITY),
        before("external entity in the relationships", LINKS, ENTITY),
        before("external entity in the content types", TYPES, ENTITY),
        before("entities of entities", STRINGS, LAUGHS),
        case("unknown entity", Refused("bad-xml", NONE), || {
            Book::cell(ONE).swap(STRINGS, "<t>a</t>", "<t>&e;</t>").build()
        }),
        case("unknown entity in an attribute", Refused("bad-xml", NONE), || {
            Book::cell(ONE).swap(BOOK, "name=\"Sheet1\"", "name=\"&e;\"").build()
        }),
        case("truncated XML", Refused("bad-xml", NONE), || {
            let whole = sheet(&format!("<row r=\"1\">{ONE}</row>"));
            Book::cell(ONE).part(SHEET, &whole.as_bytes()[..whole.len() - 30]).build()
        }),
        case("elements closed crosswise", Refused("bad-xml", NONE), || {
            Book::cell("<c r=\"A1\"><v>1</c></v>").build()
        }),
        case("two values of one attribute", Refused("bad-xml", NONE), || {
            Book::cell("<c r=\"A1\" r=\"B1\"><v>1</v></c>").build()
        }),
        case("two root elements", Refused("bad-xml", NONE), || {
            Book::cell(ONE).part(SHEET, format!("{}{}", sheet(""), sheet(""))).build()
        }),
        case("bad UTF-8", Refused("bad-utf8", NONE), || {
            let text = format!("<sst xmlns=\"{MAIN}\"><si><t>\u{1}</t></si></sst>").into_bytes();
            let text: Vec<u8> = text.into_iter().map(|c| if c == 1 { 0xFF } else { c }).collect();
            Book::cell(ONE).part(STRINGS, text).build()
        }),
        case("UTF-16", Refused("encoding", NONE), || {
            let text: Vec<u8> =
                format!("\u{FEFF}{}", sheet("")).encode_utf16().flat_map(u16::to_le_bytes).collect();
            Book::cell(ONE).part(SHEET, text).build()
        }),
        case("another encoding declared", Refused("encoding", NONE), || {
            let text = format!("<?xml version=\"1.0\" encoding=\"windows-1252\"?>{}", sheet(""));
            Book::cell(ONE).part(SHEET, text).build()
        }),
    ]
}

/// Names and sheets without one meaning.
fn names() -> Vec<Case> {
    let named = |names: &str| {
        Book::cell(ONE)
            .part(
                BOOK,
                workbook(&[("Sheet1", "r:id=\"rId1\"")], &format!("<definedNames>{names}</definedNames>")),
            )
            .build()
    };
    let sheets = |sheets: &[(&str, &str)]| {
        let links = [
            ("rId1", "worksheet", "worksheets/sheet1.xml", ""),
            ("rId2", "worksheet", "worksheets/sheet2.xml", ""),
            ("rId3", "xlMacrosheet", "worksheets/sheet3.xml", ""),
            ("rId4", "worksheet", "worksheets/sheet4.xml", ""),
        ];
        Book::cell(ONE)
            .part(BOOK, workbook(sheets, ""))
            .part(LINKS, relationships(&links))
            .part("xl/worksheets/sheet2.xml", sheet(""))
            .part("xl/worksheets/sheet3.xml", sheet(""))
            .build()
    };
    const FIRST: (&str, &str) = ("Sheet1", "r:id=\"rId1\"");
    vec![
        case("name without a name", Refused("bad-name", NONE), move || {
            named("<definedName>Sheet1!$A$1</definedName>")
        }),
        case("duplicate name", Refused("duplicate-name", "[HENCE_base]"), move || {
            named(
                "<definedName name=\"hence_base\">Sheet1!$A$1</definedName><definedName name=\"HENCE_base\">Sheet1!$B$1</definedName>",
            )
        }),
        case("duplicate name in one sheet", Refused("duplicate-name", "[rate]"), move || {
            named(
                "<definedName name=\"rate\" localSheetId=\"0\">1</definedName><definedName name=\"rate\" localSheetId=\"0\">2</definedName>",
            )
        }),
        case("one name in two scopes", Read(&[], 1, "1"), move || {
            named(
                "<definedName name=\"rate\">1</definedName><definedName name=\"rate\" localSheetId=\"0\">2</definedName>",
            )
        }),
        case("name of a sheet that is not there", Refused("name-scope", "[rate]"), move || {
            named("<definedName name=\"rate\" localSheetId=\"7\">1</definedName>")
        }),
        case("duplicate sheets", Refused("duplicate-sheet", "SHEET1"), move || {
            sheets(&[FIRST, ("SHEET1", "r:id=\"rId2\"")])
        }),
        case("two sheets in one part", Refused("bad-sheet", "Other"), move || {
            sheets(&[FIRST, ("Other", "r:id=\"rId1\"")])
        }),
        case("sheet without a part", Refused("bad-sheet", "Other"), move || sheets(&[FIRST, ("Other", "")])),
        case("sheet with an unlisted part", Refused("bad-sheet", "Other"), move || {
            sheets(&[FIRST, ("Other", "r:id=\"rId9\"")])
        }),
        case("sheet with a missing part", Refused("bad-sheet", "Other"), move || {
            sheets(&[FIRST, ("Other", "r:id=\"rId4\"")])
        }),
        case("macro sheet", Refused("macro-sheet", "Other"), move || {
            sheets(&[FIRST, ("Other", "r:id=\"rId3\"")])
        }),
        case("no sheet", Refused("no-sheets", NONE), move || sheets(&[])),
        case("strings somewhere else", Refused("odd-layout", NONE), || {
            Book::cell(ONE)
                .swap(LINKS, "sharedStrings.xml", "texts.xml")
                .part("xl/texts.xml", "<sst/>")
                .build()
        }),
    ]
}

fn compound(stream: &str) -> Vec<u8> {
    let mut file = b"\xD0\xCF\x11\xE0\xA1\xB1\x1A\xE1".to_vec();
    file.resize(512, 0);
    file.extend(stream.encode_utf16().flat_map(u16::to_le_bytes));
    file.resize(4096, 0);
    file
}

/// Files that are no workbook, each for its own reason.
fn containers() -> Vec<Case> {
    let typed = |kind: &'static str| {
        let usual = "application/vnd.openxmlformats-officedocument.spreadsheetml.sheet.main+xml";
        Book::cell(ONE).swap(TYPES, usual, kind).build()
    };
    vec![
        case("empty file", Refused("empty-file", NONE), Vec::new),
        case("no package", Refused("not-a-package", NONE), || b"year;cost\n2026;5\n".to_vec()),
        case("web page", Refused("html-file", NONE), || {
            b"\n<html><table><tr><td>1</td></tr></table></html>".to_vec()
        }),
        case("single XML file", Refused("other-format", NONE), || {
            b"<?xml version=\"1.0\"?><Workbook/>".to_vec()
        }),
        case("password", Refused("password-protected", NONE), || compound("EncryptedPackage")),
        case("old binary workbook", Refused("old-format", NONE), || compound("Workbook")),
        case("encrypted entry", Refused("encrypted-entry", NONE), || {
            Book::cell(ONE).entry(SHEET, |entry| entry.encrypted = true).build()
        }),
        case("truncated in the middle", Refused("truncated", NONE), || {
            let file = Book::cell(ONE).build();
            file[..file.len() / 2].to_vec()
        }),
        case("truncated by one byte", Refused("truncated", NONE), || {
            let file = Book::cell(ONE).build();
            file[..file.len() - 1].to_vec()
        }),
        case("bytes after the end", Refused("damaged-zip", NONE), || {
            [Book::cell(ONE).build(), vec![0; 10]].concat()
        }),
        case("bytes before the start", Refused("not-a-package", NONE), || {
            [vec![0; 10], Book::cell(ONE).build()].concat()
        }),
        case("duplicate entry", Refused("duplicate-entry", NONE), || {
            let mut book = Book::cell(ONE);
            book.entries.push(Entry::new(SHEET, sheet("")));
            book.build()
        }),
        case("duplicate entry but for case", Refused("duplicate-entry", NONE), || {
            Book::cell(ONE).part("XL/Workbook.xml", workbook(&[], "")).build()
        }),
        case("duplicate entry by backslash", Refused("duplicate-entry", NONE), || {
            Book::cell(ONE).part("xl\\workbook.xml", workbook(&[], "")).build()
        }),
        case("zip of something else", Refused("not-a-workbook", NONE), || {
            archive(&[Entry::new("a.txt", "a")], false)
        }),
        case("OpenDocument", Refused("other-format", NONE), || {
            archive(&[Entry::new("mimetype", "application/vnd.oasis.opendocument.spreadsheet")], false)
        }),
        case("text document", Refused("not-a-workbook", NONE), move || {
            typed("application/vnd.openxmlformats-officedocument.wordprocessingml.document.main+xml")
        }),
        case("binary workbook", Refused("other-format", NONE), move || {
            typed("application/vnd.ms-excel.sheet.binary.macroEnabled.main")
        }),
        case("two main parts", Refused("not-a-workbook", NONE), || {
            let links =
                [("a", "officeDocument", "xl/workbook.xml", ""), ("b", "officeDocument", "xl/b.xml", "")];
            Book::cell(ONE).part("_rels/.rels", relationships(&links)).build()
        }),
        case("main part missing", Refused("not-a-workbook", NONE), || {
            Book::cell(ONE)
                .part("_rels/.rels", relationships(&[("a", "officeDocument", "xl/b.xml", "")]))
                .build()
        }),
    ]
}

/// Values that programs read in different ways, and values that must be read exactly.
fn values() -> Vec<Case> {
    let bad =
        |name, xml: &'static str| case(name, Refused("bad-value", "Sheet1!A1"), || Book::cell(xml).build());
    let odd =
        |name, xml: &'static str| case(name, Refused("odd-value", "Sheet1!A1"), || Book::cell(xml).build());
    let good = |name, text, xml: &'static str| case(name, Read(&[], 1, text), || Book::cell(xml).build());
    vec![
        bad("CDATA in a number", "<c r=\"A1\"><v><![CDATA[1]]></v></c>"),
        bad("character reference in a number", "<c r=\"A1\"><v>1&#50;</v></c>"),
        bad("comment in a number", "<c r=\"A1\"><v>1<!-- -->2</v></c>"),
        bad("blanks around a number", "<c r=\"A1\"><v> 7 </v></c>"),
        bad("not a number", "<c r=\"A1\"><v>NaN</v></c>"),
        bad("infinity", "<c r=\"A1\" t=\"n\"><v>INF</v></c>"),
        bad("number too large", "<c r=\"A1\"><v>1e400</v></c>"),
        bad("decimal comma", "<c r=\"A1\"><v>1,5</v></c>"),
        bad("text past the table", "<c r=\"A1\" t=\"s\"><v>2</v></c>"),
        bad("text number below zero", "<c r=\"A1\" t=\"s\"><v>-1</v></c>"),
        bad("text number that is none", "<c r=\"A1\" t=\"s\"><v>x</v></c>"),
        bad("truth value two", "<c r=\"A1\" t=\"b\"><v>2</v></c>"),
        bad("unknown error value", "<c r=\"A1\" t=\"e\"><v>#WHAT!</v></c>"),
        bad("CDATA in a formula's text", "<c r=\"A1\" t=\"str\"><f>1</f><v><![CDATA[x]]></v></c>"),
        bad("cell's own text as a value", "<c r=\"A1\" t=\"inlineStr\"><v>x</v></c>"),
        odd("two values", "<c r=\"A1\"><v>1</v><v>2</v></c>"),
        odd("value before the formula", "<c r=\"A1\"><v>1</v><f>1</f></c>"),
        odd("value beside a text", "<c r=\"A1\" t=\"inlineStr\"><is><t>x</t></is><v>1</v></c>"),
        odd("text in a number cell", "<c r=\"A1\"><is><t>x</t></is></c>"),
        odd("text outside a value", "<c r=\"A1\">5</c>"),
        odd("CDATA in a formula", "<c r=\"A1\"><f><![CDATA[1+1]]></f></c>"),
        case("extension in a cell", Refused("odd-cell", "Sheet1!A1"), || {
            Book::cell("<c r=\"A1\"><extLst/></c>").build()
        }),
        case("two bad values", Refused("bad-value", "Sheet1!B1"), || {
            Book::cell("<c r=\"A1\"><v>1</v></c><c r=\"B1\"><v>NaN</v></c><c r=\"C1\"><v>INF</v></c>").build()
        }),
        good("references in a text", "a<b", "<c r=\"A1\" t=\"str\"><v>a&lt;b</v></c>"),
        good("comment in a text", "ab", "<c r=\"A1\" t=\"str\"><v>a<!-- -->b</v></c>"),
        good(
            "CDATA in the cell's own text",
            "a<b",
            "<c r=\"A1\" t=\"inlineStr\"><is><t><![CDATA[a<b]]></t></is></c>",
        ),
        good("number with an exponent", "0.0000012", "<c r=\"A1\"><v>1.2E-6</v></c>"),
        good("number to the last digit", "0.30000000000000004", "<c r=\"A1\"><v>0.30000000000000004</v></c>"),
        good("shared text", "b", "<c r=\"A1\" t=\"s\"><v>1</v></c>"),
        good("empty value", "", "<c r=\"A1\"><v></v></c>"),
    ]
}

/// Names and addresses that lead out of the file.
fn outside() -> Vec<Case> {
    vec![
        case("path traversal", Read(&["unsafe-name"], 1, "1"), || {
            Book::cell(ONE).part("../../etc/passwd", "x").part("/abs.txt", "x").part("C:\\x.txt", "x").build()
        }),
        case("external links", Read(&["external-link"], 1, "1"), || {
            let link = ("rId9", "externalLinkPath", "file:///etc/passwd", "TargetMode=\"External\"");
            let page = ("rId8", "hyperlink", "https://example.org/", "TargetMode=\"External\"");
            Book::cell(ONE).part("xl/worksheets/_rels/sheet1.xml.rels", relationships(&[link, page])).build()
        }),
    ]
}

/// A lot of something small.
fn bulk() -> Vec<Case> {
    vec![
        case("200,000 nested elements", Refused("xml-depth", NONE), || {
            let nest = format!("{}{}", "<a>".repeat(200_000), "</a>".repeat(200_000));
            Book::cell(ONE).swap(SHEET, "<sheetData>", &format!("{nest}<sheetData>")).build()
        }),
        case("300,000 names", Refused("too-many-names", NONE), || {
            let mut names = String::from("<definedNames>");
            for i in 0..300_000 {
                write!(names, "<definedName name=\"n{i}\">Sheet1!$A$1</definedName>").unwrap();
            }
            let names = workbook(&[("Sheet1", "r:id=\"rId1\"")], &(names + "</definedNames>"));
            Book::cell(ONE).part(BOOK, names).build()
        }),
        case("two million tiny cells", Read(&[], 2_000_000, "0"), || {
            let mut rows = String::with_capacity(64 << 20);
            for row in 1..=200_000 {
                write!(rows, "<row r=\"{row}\">").unwrap();
                for column in 'A'..='J' {
                    write!(rows, "<c r=\"{column}{row}\"><v>{}</v></c>", row - 1).unwrap();
                }
                rows.push_str("</row>");
            }
            Book::new(&rows).build()
        }),
    ]
}

/// Sound files that are written in an unusual way.
fn unusual() -> Vec<Case> {
    vec![
        case("cells without references", Read(&[], 3, "1"), || {
            Book::new("<row><c><v>1</v></c><c/></row><row/><row><c><v>2</v></c></row>").build()
        }),
        case("prefixed elements", Read(&[], 1, "1"), || {
            let text = format!(
                "<x:worksheet xmlns:x=\"{MAIN}\"><x:sheetData><x:row r=\"1\"><x:c r=\"A1\"><x:v>1</x:v></x:c></x:row></x:sheetData></x:worksheet>"
            );
            Book::cell(ONE).part(SHEET, text).build()
        }),
        case("byte-order marks", Read(&[], 1, "1"), || {
            Book::cell(ONE).all(|entry| entry.content.splice(0..0, *b"\xEF\xBB\xBF").for_each(drop)).build()
        }),
        case("data descriptors", Read(&[], 1, "1"), || {
            Book::cell(ONE).all(|entry| entry.descriptor = true).build()
        }),
        case("large-file records", Read(&[], 1, "1"), || {
            archive(&Book::cell(ONE).all(|entry| entry.wide = true).entries, true)
        }),
        case("absolute targets", Read(&[], 1, "1"), || {
            Book::cell(ONE).swap(LINKS, "\"worksheets/", "\"/xl/worksheets/").build()
        }),
        case("namespace declared on the sheet element", Read(&[], 1, "1"), || {
            let office = super::book::OFFICE;
            let text = format!(
                "<workbook xmlns=\"{MAIN}\"><sheets><sheet xmlns:q=\"{office}\" name=\"Sheet1\" sheetId=\"1\" q:id=\"rId1\"/></sheets></workbook>"
            );
            Book::cell(ONE).part(BOOK, text).build()
        }),
    ]
}
