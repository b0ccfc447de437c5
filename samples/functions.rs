//! Makes the sample for the worksheet functions: a sluice that is renewed, its costs and benefits over sixty years.
//!
//! `cargo run -p hence-ffi --example make-functions -- samples/functions.xlsx`. The place and every figure are
//! invented. Results are stored beside the formulas, for programs that read files without computing.

use std::io::{Cursor, Write};

use hence::worksheet::{Cell, Function, Range, call};
use zip::write::SimpleFileOptions;

const BASE: f64 = 2026.0;
const YEARS: usize = 61;
const RAMSEY: &str = "preference 1.5%, elasticity 1, growth 2%";
/// The row of the first year.
const FIRST: usize = 7;

/// The row of the basis in words, and the cells that it is spread over.
const WORDS: usize = 27;
const MERGED: &str =
    "<mergeCells count=\"2\"><mergeCell ref=\"D3:K3\"/><mergeCell ref=\"I27:K34\"/></mergeCells>";

/// Numbers of the cell formats in STYLES.
mod style {
    pub const PLAIN: u8 = 0;
    pub const HEADING: u8 = 1;
    pub const INPUT: u8 = 2;
    pub const FACTOR: u8 = 3;
    pub const PERCENT: u8 = 4;
    pub const AMOUNT: u8 = 5;
    pub const INPUT_AMOUNT: u8 = 6;
    pub const WRAPPED: u8 = 7;
    pub const COLUMN_HEADING: u8 = 8;
}

/// One cell of the sheet.
struct Placed {
    column: char,
    row: usize,
    style: u8,
    formula: Option<String>,
    /// The area of an array formula.
    area: Option<String>,
    held: Cell<'static>,
}

fn main() -> std::io::Result<()> {
    std::fs::write(std::env::args().nth(1).unwrap_or_else(|| "samples/functions.xlsx".to_owned()), book())
}

/// The workbook.
pub fn book() -> Vec<u8> {
    let mut zip = zip::ZipWriter::new(Cursor::new(Vec::new()));
    let options = SimpleFileOptions::default().last_modified_time(zip::DateTime::default());
    let sheet = sheet(&cells());
    for (name, text) in [
        ("[Content_Types].xml", TYPES),
        ("_rels/.rels", ROOT),
        ("xl/workbook.xml", WORKBOOK),
        ("xl/_rels/workbook.xml.rels", PARTS),
        ("xl/styles.xml", STYLES),
        ("xl/worksheets/sheet1.xml", sheet.as_str()),
    ] {
        zip.start_file(name, options).expect("memory takes it");
        zip.write_all(text.as_bytes()).expect("memory takes it");
    }
    zip.finish().expect("memory takes it").into_inner()
}

/// Building in the first two years, upkeep, a new gate every 20 years; less damage by floods from the third year on.
fn flows(year: usize) -> (f64, f64) {
    let cost = match year {
        0 => 1_800_000.0,
        1 => 950_000.0,
        _ if year.is_multiple_of(20) => 140_000.0,
        _ => 21_000.0,
    };
    (cost, if year < 2 { 0.0 } else { 152_000.0 })
}

fn text(value: &str) -> Cell<'static> {
    Cell::Text(value.to_owned().into())
}

fn one(cell: Cell<'static>) -> Option<Range<'static>> {
    Some(Range::single(cell))
}

fn number(value: f64) -> Option<Range<'static>> {
    one(Cell::Number(value))
}

/// What a function answers.
fn answer(name: &str, arguments: &[Option<Range<'static>>]) -> Vec<Cell<'static>> {
    call(Function::find(name).expect("a function of the table"), arguments).cells().to_vec()
}

fn cells() -> Vec<Placed> {
    let mut all = Vec::new();
    let mut put = |column, row, style, held| {
        all.push(Placed { column, row, style, formula: None, area: None, held });
    };
    let last = FIRST + YEARS - 1;
    let down =
        |f: &dyn Fn(usize) -> f64| Range::new(YEARS, 1, (0..YEARS).map(|i| Cell::Number(f(i))).collect());
    let years = || down(&|i| BASE + i as f64);
    let offsets = || down(&|i| i as f64);
    let (costs, benefits) = (|| down(&|i| flows(i).0), || down(&|i| flows(i).1));
    let net = || down(&|i| flows(i).1 - flows(i).0);
    let basis = || one(text("uk-2003"));

    put(
        'A',
        1,
        style::HEADING,
        text("The functions of hence: the sluice at Tarn Hollow (invented), in crowns of 2026"),
    );
    put(
        'A',
        2,
        style::PLAIN,
        text("Shaded cells are yours to change. The formulas need the add-in of hence."),
    );
    put('A', 3, style::PLAIN, text("Basis"));
    put('B', 3, style::INPUT, text("uk-2003"));
    put('A', 4, style::PLAIN, text("Base year"));
    put('B', 4, style::INPUT, Cell::Number(BASE));
    put('A', 5, style::PLAIN, text("A rate by its parts"));
    put('B', 5, style::INPUT, text(RAMSEY));
    for (column, heading) in [
        ('A', "Year"),
        ('B', "Offset"),
        ('C', "Costs"),
        ('D', "Benefits"),
        ('E', "Net"),
        ('F', "Factor"),
        ('G', "Rate of the year"),
    ] {
        put(column, FIRST - 1, style::COLUMN_HEADING, text(heading));
    }
    for i in 0..YEARS {
        let (cost, benefit) = flows(i);
        let row = FIRST + i;
        put('A', row, style::PLAIN, Cell::Number(BASE + i as f64));
        put('C', row, style::INPUT_AMOUNT, Cell::Number(cost));
        put('D', row, style::INPUT_AMOUNT, Cell::Number(benefit));
    }
    let own = |column: char, formula: &dyn Fn(usize) -> String, value: &dyn Fn(usize) -> f64| {
        (0..YEARS)
            .map(|i| Placed {
                column,
                row: FIRST + i,
                style: if column == 'E' { style::AMOUNT } else { style::PLAIN },
                formula: Some(formula(FIRST + i)),
                area: None,
                held: Cell::Number(value(i)),
            })
            .collect::<Vec<_>>()
    };
    all.extend(own('B', &|row| format!("A{row}-$B$4"), &|i| i as f64));
    all.extend(own('E', &|row| format!("D{row}-C{row}"), &|i| flows(i).1 - flows(i).0));

    let mut array = |column: char, first: usize, style, formula: String, held: Vec<Cell<'static>>| {
        let area = format!("{column}{first}:{column}{}", first + held.len() - 1);
        for (i, held) in held.into_iter().enumerate() {
            let (formula, area) =
                if i == 0 { (Some(formula.clone()), Some(area.clone())) } else { (None, None) };
            all.push(Placed { column, row: first + i, style, formula, area, held });
        }
    };
    array(
        'F',
        FIRST,
        style::FACTOR,
        format!("HENCE.FACTOR($B$3,B{FIRST}:B{last})"),
        answer("FACTOR", &[basis(), offsets()]),
    );
    let range = |column: char| format!("{column}{FIRST}:{column}{last}");
    let rates = Range::new(YEARS - 1, 1, (1..YEARS).map(|i| Cell::Number(i as f64)).collect());
    array(
        'G',
        FIRST + 1,
        style::PERCENT,
        format!("HENCE.RATE($B$3,B{}:B{last})", FIRST + 1),
        answer("RATE", &[basis(), rates]),
    );

    let mut row = FIRST;
    let mut result = |label: &str, style, formula: String, held: Vec<Cell<'static>>| {
        all.push(Placed {
            column: 'I',
            row,
            style: style::PLAIN,
            formula: None,
            area: None,
            held: text(label),
        });
        let held = held.into_iter().next().expect("an answer has a cell");
        all.push(Placed { column: 'J', row, style, formula: Some(formula.clone()), area: None, held });
        all.push(Placed {
            column: 'K',
            row,
            style: style::PLAIN,
            formula: None,
            area: None,
            held: text(&format!("={formula}")),
        });
        row += 1;
    };
    let base = || number(BASE);
    let flow = |column: char| format!("HENCE.VALUE($B$3,{},{},$B$4)", range('A'), range(column));
    let value = |flows| answer("VALUE", &[basis(), years(), flows, base()]);
    result("Present value of costs", style::AMOUNT, flow('C'), value(costs()));
    result("Present value of benefits", style::AMOUNT, flow('D'), value(benefits()));
    result("Net present value", style::AMOUNT, flow('E'), value(net()));
    result(
        "The same, flows in the middle of the year",
        style::AMOUNT,
        format!("HENCE.VALUE($B$3,{},{},$B$4,\"flows middle\")", range('A'), range('E')),
        answer("VALUE", &[basis(), years(), net(), base(), one(text("flows middle"))]),
    );
    let net_value = value(net()).remove(0);
    result(
        "A year, over 60 service years",
        style::AMOUNT,
        format!("HENCE.ANNUAL($B$3,J{},60)", FIRST + 2),
        answer("ANNUAL", &[basis(), one(net_value), number(60.0)]),
    );
    result(
        "Internal rate of return",
        style::PERCENT,
        format!("HENCE.IRR({},{})", range('A'), range('E')),
        answer("IRR", &[years(), net()]),
    );
    result(
        "One rate with the factor of year 60",
        style::PERCENT,
        "HENCE.MEANRATE($B$3,60)".into(),
        answer("MEANRATE", &[basis(), number(60.0)]),
    );
    result(
        "Ramsey rate",
        style::PERCENT,
        "HENCE.RAMSEY(1.5%,1,2%)".into(),
        answer("RAMSEY", &[number(0.015), number(1.0), number(0.02)]),
    );
    result(
        "Elasticity from tax rates",
        style::FACTOR,
        "HENCE.ELASTICITY(40%,25%)".into(),
        answer("ELASTICITY", &[number(0.4), number(0.25)]),
    );
    result(
        "Equity weight",
        style::FACTOR,
        "HENCE.WEIGHT(18000,32000,1.3)".into(),
        answer("WEIGHT", &[number(18000.0), number(32000.0), number(1.3)]),
    );
    result(
        "Real rate",
        style::PERCENT,
        "HENCE.REAL(6%,2%)".into(),
        answer("REAL", &[number(0.06), number(0.02)]),
    );
    result(
        "Growth at which it is worth nothing",
        style::PERCENT,
        format!("HENCE.SWITCH($B$5,\"growth\",{},{},$B$4)", range('A'), range('E')),
        answer("SWITCH", &[one(text(RAMSEY)), one(text("growth")), years(), net(), base()]),
    );
    result(
        "Multiple of the costs that it could bear",
        style::FACTOR,
        format!("HENCE.MULTIPLIER(J{},-J{FIRST})", FIRST + 2),
        answer("MULTIPLIER", &[one(value(net()).remove(0)), one(negative(value(costs()).remove(0)))]),
    );
    let elasticity = "uniform 1 to 1.5";
    result(
        "Mean value where the rate is uncertain",
        style::AMOUNT,
        format!("HENCE.DRAWS(1.5%,\"{elasticity}\",2%,{},{},$B$4)", range('A'), range('E')),
        answer("DRAWS", &[number(0.015), one(text(elasticity)), number(0.02), years(), net(), base()]),
    );
    result(
        "Instantaneous rate in year 60",
        style::PERCENT,
        "HENCE.INSTANT($B$3,60)".into(),
        answer("INSTANT", &[basis(), number(60.0)]),
    );
    result(
        "Hazard of an end in 200 years",
        style::PERCENT,
        "HENCE.WAITING(200)".into(),
        answer("WAITING", &[number(200.0)]),
    );
    result(
        "Due in 10 years for 1,000 given up now",
        style::AMOUNT,
        "HENCE.COMPENSATION(1000,26000,31700,10,1.5%,1.5)".into(),
        answer("COMPENSATION", &[1000.0, 26000.0, 31700.0, 10.0, 0.015, 1.5].map(number)),
    );
    let words = format!("HENCE.EXPLAIN($B$3,{},{},$B$4)", range('A'), range('E'));
    for (column, row, formula, held) in [
        ('D', 3, "HENCE.SCHEDULE($B$3)".to_owned(), answer("SCHEDULE", &[basis()])),
        ('I', WORDS, words, answer("EXPLAIN", &[basis(), years(), net(), base()])),
    ] {
        let held = held.into_iter().next().expect("an answer has a cell");
        all.push(Placed { column, row, style: style::WRAPPED, formula: Some(formula), area: None, held });
    }
    all
}

fn negative(cell: Cell<'static>) -> Cell<'static> {
    if let Cell::Number(number) = cell { Cell::Number(-number) } else { cell }
}

/// The sheet's part of the package.
fn sheet(cells: &[Placed]) -> String {
    let mut rows: std::collections::BTreeMap<usize, Vec<&Placed>> = std::collections::BTreeMap::new();
    for cell in cells {
        rows.entry(cell.row).or_default().push(cell);
    }
    let mut out = String::from(SHEET);
    for (row, mut cells) in rows {
        cells.sort_by_key(|cell| cell.column);
        out.push_str(&format!("<row r=\"{row}\">"));
        cells.iter().for_each(|cell| out.push_str(&cell_xml(cell)));
        out.push_str("</row>");
    }
    format!("{out}</sheetData>{MERGED}<pageSetup orientation=\"landscape\" fitToHeight=\"0\"/></worksheet>")
}

fn cell_xml(cell: &Placed) -> String {
    let formula = match (&cell.formula, &cell.area) {
        (Some(formula), Some(area)) => format!("<f t=\"array\" ref=\"{area}\">{}</f>", escaped(formula)),
        (Some(formula), None) => format!("<f>{}</f>", escaped(formula)),
        _ => String::new(),
    };
    let place = format!("<c r=\"{}{}\" s=\"{}\"", cell.column, cell.row, cell.style);
    match &cell.held {
        Cell::Number(number) => format!("{place}>{formula}<v>{number}</v></c>"),
        Cell::Text(text) if formula.is_empty() => {
            format!("{place} t=\"inlineStr\"><is><t>{}</t></is></c>", escaped(text))
        }
        Cell::Text(text) => format!("{place} t=\"str\">{formula}<v>{}</v></c>", escaped(text)),
        Cell::Error(error) => format!("{place} t=\"e\">{formula}<v>{}</v></c>", error.text()),
        Cell::Blank | Cell::Logical(_) => format!("{place}/>"),
    }
}

fn escaped(text: &str) -> String {
    text.replace('&', "&amp;").replace('<', "&lt;").replace('>', "&gt;")
}

const TYPES: &str = r#"<?xml version="1.0" encoding="UTF-8" standalone="yes"?>
<Types xmlns="http://schemas.openxmlformats.org/package/2006/content-types"><Default Extension="rels" ContentType="application/vnd.openxmlformats-package.relationships+xml"/><Default Extension="xml" ContentType="application/xml"/><Override PartName="/xl/workbook.xml" ContentType="application/vnd.openxmlformats-officedocument.spreadsheetml.sheet.main+xml"/><Override PartName="/xl/styles.xml" ContentType="application/vnd.openxmlformats-officedocument.spreadsheetml.styles+xml"/><Override PartName="/xl/worksheets/sheet1.xml" ContentType="application/vnd.openxmlformats-officedocument.spreadsheetml.worksheet+xml"/></Types>"#;
const ROOT: &str = r#"<?xml version="1.0" encoding="UTF-8" standalone="yes"?>
<Relationships xmlns="http://schemas.openxmlformats.org/package/2006/relationships"><Relationship Id="rId1" Type="http://schemas.openxmlformats.org/officeDocument/2006/relationships/officeDocument" Target="xl/workbook.xml"/></Relationships>"#;
const WORKBOOK: &str = r#"<?xml version="1.0" encoding="UTF-8" standalone="yes"?>
<workbook xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main" xmlns:r="http://schemas.openxmlformats.org/officeDocument/2006/relationships"><sheets><sheet name="Functions" sheetId="1" r:id="rId1"/></sheets></workbook>"#;
const PARTS: &str = r#"<?xml version="1.0" encoding="UTF-8" standalone="yes"?>
<Relationships xmlns="http://schemas.openxmlformats.org/package/2006/relationships"><Relationship Id="rId1" Type="http://schemas.openxmlformats.org/officeDocument/2006/relationships/worksheet" Target="worksheets/sheet1.xml"/><Relationship Id="rId2" Type="http://schemas.openxmlformats.org/officeDocument/2006/relationships/styles" Target="styles.xml"/></Relationships>"#;
const STYLES: &str = r#"<?xml version="1.0" encoding="UTF-8" standalone="yes"?>
<styleSheet xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main"><numFmts count="1"><numFmt numFmtId="164" formatCode="0.0000"/></numFmts><fonts count="2"><font><sz val="11"/><name val="Calibri"/></font><font><b/><sz val="11"/><name val="Calibri"/></font></fonts><fills count="3"><fill><patternFill patternType="none"/></fill><fill><patternFill patternType="gray125"/></fill><fill><patternFill patternType="solid"><fgColor rgb="FFFFF2CC"/><bgColor indexed="64"/></patternFill></fill></fills><borders count="1"><border><left/><right/><top/><bottom/><diagonal/></border></borders><cellStyleXfs count="1"><xf numFmtId="0" fontId="0" fillId="0" borderId="0"/></cellStyleXfs><cellXfs count="9"><xf numFmtId="0" fontId="0" fillId="0" borderId="0" xfId="0"/><xf numFmtId="0" fontId="1" fillId="0" borderId="0" xfId="0" applyFont="1"/><xf numFmtId="0" fontId="0" fillId="2" borderId="0" xfId="0" applyFill="1"/><xf numFmtId="164" fontId="0" fillId="0" borderId="0" xfId="0" applyNumberFormat="1"/><xf numFmtId="10" fontId="0" fillId="0" borderId="0" xfId="0" applyNumberFormat="1"/><xf numFmtId="3" fontId="0" fillId="0" borderId="0" xfId="0" applyNumberFormat="1"/><xf numFmtId="3" fontId="0" fillId="2" borderId="0" xfId="0" applyNumberFormat="1" applyFill="1"/><xf numFmtId="0" fontId="0" fillId="0" borderId="0" xfId="0" applyAlignment="1"><alignment vertical="top" wrapText="1"/></xf><xf numFmtId="0" fontId="1" fillId="0" borderId="0" xfId="0" applyFont="1" applyAlignment="1"><alignment horizontal="right"/></xf></cellXfs></styleSheet>"#;
const SHEET: &str = r#"<?xml version="1.0" encoding="UTF-8" standalone="yes"?>
<worksheet xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main"><sheetPr><pageSetUpPr fitToPage="1"/></sheetPr><cols><col min="1" max="7" width="15" customWidth="1"/><col min="8" max="8" width="3" customWidth="1"/><col min="9" max="9" width="38" customWidth="1"/><col min="10" max="10" width="16" customWidth="1"/><col min="11" max="11" width="56" customWidth="1"/></cols><sheetData>"#;
