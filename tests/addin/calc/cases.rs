//! The sheet on which the functions are tried: invented data, and calls over it.

use std::borrow::Cow;

use hence::worksheet::{Cell, CellError, Function, Range, call};

use Argument::{Number, Of, Out, Text};

/// What a cell of the sheet holds, or is due to hold.
#[derive(Clone, Copy, Debug)]
pub enum Held {
    N(f64),
    T(&'static str),
    /// A date and its number.
    D(&'static str, f64),
    Blank,
}

use Held::{Blank, D, N, T};

/// The data, by the address of the first cell: rows of cells.
const DATA: &[(&str, &[&[Held]])] = &[
    // Offsets, and offsets that are not all ones.
    ("A1", &[&[N(0.0)], &[N(1.0)], &[N(2.5)], &[N(30.0)], &[N(31.0)], &[N(76.0)], &[N(126.0)], &[N(301.0)]]),
    ("B1", &[&[N(1.0)], &[T("x")], &[Blank], &[N(2.0)], &[N(-1.0)], &[N(1000.0)]]),
    // Along rows: years, flows, flows, financial years, dates.
    ("D1", &[&[N(2026.0), N(2027.0), N(2028.0), N(2029.0), N(2030.0)]]),
    ("D2", &[&[N(-1000.0), N(300.1), Blank, N(450.25), N(500.5)], &[N(1.0), N(2.0), N(3.0), N(4.0), N(5.0)]]),
    ("D4", &[&[T("2026/27"), T("2027/28"), T("2028/29"), T("2029/30"), T("2030/31")]]),
    (
        "D5",
        &[&[
            D("2026-04-01", 46113.0),
            D("2027-04-01", 46478.0),
            D("2028-02-29", 46812.0),
            D("2028-10-01", 47027.0),
            D("2030-04-01", 47574.0),
        ]],
    ),
    // Down columns: years, flows, flows.
    (
        "J1",
        &[
            &[N(2026.0), N(-70.0), N(10.0)],
            &[N(2027.0), N(30.0), N(20.0)],
            &[N(2028.0), N(0.1), Blank],
            &[N(2029.0), N(0.2), N(40.0)],
            &[N(2030.0), N(0.3), T("much")],
        ],
    ),
    // Flows with the rates 10% and 20%; incomes; bases.
    ("N1", &[&[N(0.0), N(-100.0)], &[N(1.0), N(230.0)], &[N(2.0), N(-132.0)]]),
    ("P1", &[&[N(9000.0)], &[N(18000.0)], &[N(64000.0)]]),
    ("Q1", &[&[T("3.5%")], &[T("uk-2003")], &[T("nowhere-1")]]),
    // Shares; a series of consumption.
    ("P5", &[&[N(0.5)], &[N(0.25)], &[N(0.25)]]),
    ("Q5", &[&[N(100.0)], &[N(103.0)], &[N(104.5)], &[N(109.0)], &[N(108.0)]]),
    // R1:R2 stay blank.
];

/// An argument of a call.
#[derive(Clone, Copy, Debug)]
pub enum Argument {
    Number(f64),
    Text(&'static str),
    Of(&'static str),
    /// Left out, with another one behind it.
    Out,
}

/// Where a call stands.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Area {
    /// As large as its answer.
    Fitting,
    /// In one cell, though its answer has several.
    One,
    /// In a column of so many rows, more than its answer has.
    Rows(usize),
}

pub struct Case {
    pub function: &'static str,
    pub arguments: &'static [Argument],
    pub area: Area,
}

const fn case(function: &'static str, arguments: &'static [Argument]) -> Case {
    Case { function, arguments, area: Area::Fitting }
}

const LENGTH_LINE: &str = "3.9% at 3, 4% at 10, 4.2% at 30; whole horizon by length, interpolated";

const RAMSEY_LINE: &str = "preference 1.5%, elasticity 1, growth 2%";

/// Every function: single values, ranges in both directions, optional arguments given and left out, blanks, texts, and
/// each error value.
pub const CASES: &[Case] = &[
    case("FACTOR", &[Text("3.5%"), Number(1.0)]),
    case("FACTOR", &[Number(0.035), Number(31.0)]),
    case("FACTOR", &[Text("uk-2003"), Number(1000.0)]),
    case("FACTOR", &[Text("gamma mean 4% sd 3%"), Number(217.0)]),
    case("FACTOR", &[Text("uk-2003"), Of("A1:A8")]),
    case("FACTOR", &[Text("3% to 500"), Of("B1:B6")]),
    case("FACTOR", &[Text("3.5%"), Of("D3:H3")]),
    case("FACTOR", &[Of("Q1:Q3"), Of("D3:H3")]),
    case("FACTOR", &[Text("2.5% to 2070, 1.5% after"), Number(50.0), Number(2026.0)]),
    case("FACTOR", &[Text("2.5% to 2070, 1.5% after"), Number(50.0)]),
    case("FACTOR", &[Text(LENGTH_LINE), Of("A1:A4"), Out, Number(30.0)]),
    case("FACTOR", &[Text("3% to 10"), Number(20.0)]),
    case("FACTOR", &[Number(5.0), Number(1.0)]),
    case("FACTOR", &[Text("35oo%"), Number(1.0)]),
    case("FACTOR", &[Text("3.5%"), Text("1")]),
    case("FACTOR", &[Text("3.5%")]),
    Case { function: "FACTOR", arguments: &[Text("3.5%"), Of("A2:A4")], area: Area::One },
    Case { function: "FACTOR", arguments: &[Text("3.5%"), Of("A2:A4")], area: Area::Rows(5) },
    case("RATE", &[Text("uk-2003"), Number(31.0)]),
    case("RATE", &[Text("uk-2003"), Of("A2:A8")]),
    case("MEANRATE", &[Text("uk-2003"), Number(100.0)]),
    case("MEANRATE", &[Text("uk-2003"), Of("A1:A8")]),
    case("INSTANT", &[Text("uk-2003"), Of("A1:A8")]),
    case("VALUE", &[Text("3.5%"), Of("D1:H1"), Of("D2:H2"), Number(2026.0)]),
    case("VALUE", &[Text("3.5%"), Of("D1:H1"), Of("D2:H3"), Number(2026.0), Text("flows middle")]),
    case("VALUE", &[Text("3.5%"), Of("J1:J5"), Of("K1:L5"), Number(2026.0)]),
    case("VALUE", &[Text("uk-2003"), Of("D4:H4"), Of("D2:H2"), Text("2026/27")]),
    case("VALUE", &[Text("uk-2003"), Of("D5:H5"), Of("D2:H2"), Of("D5")]),
    case("VALUE", &[Text("3.5%"), Of("D3:H3"), Of("D2:H2")]),
    case("VALUE", &[Text("3.5%"), Of("D3:H3"), Of("D2:H2"), Out, Text("flows averaged")]),
    case("VALUE", &[Text("3.5%"), Of("D1:H1"), Of("K1:K5"), Number(2026.0)]),
    case("VALUE", &[Text("3.5%"), Of("D1:H1"), Of("D2:H2"), Of("R1:R2")]),
    case("ANNUAL", &[Text("3.5%"), Number(1_000_000.0), Number(60.0)]),
    case("ANNUAL", &[Text("3.5%"), Of("P1:P3"), Of("D3:H3")]),
    case("IRR", &[Of("N1:N3"), Of("O1:O3")]),
    case("IRR", &[Of("N1:N3"), Of("O1:O3"), Number(0.15)]),
    case("IRR", &[Of("D1:H1"), Of("D2:H2"), Out, Number(0.5)]),
    case("IRR", &[Of("D1:H1"), Of("D3:H3")]),
    case("SWITCH", &[Text("3.5%"), Text("rate"), Of("N1:N3"), Of("O1:O3")]),
    case("SWITCH", &[Text(RAMSEY_LINE), Text("elasticity"), Of("D1:H1"), Of("D2:H2"), Number(2026.0)]),
    case(
        "SWITCH",
        &[
            Text(RAMSEY_LINE),
            Text("growth"),
            Of("D1:H1"),
            Of("D2:H2"),
            Number(2026.0),
            Text("flows middle"),
            Number(0.0),
            Number(0.5),
        ],
    ),
    case("SWITCH", &[Text("3.5%"), Text("growth"), Of("D1:H1"), Of("D2:H2"), Number(2026.0)]),
    case("MULTIPLIER", &[Number(20.0), Of("O1:O3")]),
    case(
        "DRAWS",
        &[
            Text("uniform 0% to 2%"),
            Number(1.0),
            Text("normal mean 2% sd 0.5%"),
            Of("D1:H1"),
            Of("D2:H3"),
            Number(2026.0),
        ],
    ),
    case(
        "DRAWS",
        &[
            Text("1%"),
            Text("uniform 1 to 2"),
            Number(0.02),
            Of("J1:J5"),
            Of("K1:K5"),
            Number(2026.0),
            Text("flows middle"),
            Number(0.001),
            Of("A1:A4"),
            Number(500.0),
            Number(9.0),
        ],
    ),
    case("DRAWS", &[Text("wide"), Number(1.0), Number(0.02), Of("D1:H1"), Of("D2:H2"), Number(2026.0)]),
    case("RAMSEY", &[Number(0.015), Number(1.0), Number(0.02)]),
    case("RAMSEY", &[Number(0.01), Number(2.0), Number(0.02), Number(0.036)]),
    case("RAMSEY", &[Number(0.01), Of("A1:A3"), Number(0.02)]),
    case("ELASTICITY", &[Number(0.4), Number(0.25)]),
    case("ELASTICITY", &[Number(1.0), Number(0.25)]),
    case("BRACKETS", &[Of("P5:P7"), Of("P5:P7"), Of("P1:P3")]),
    case("HAZARD", &[Of("P5:P7")]),
    case("HAZARD", &[Number(0.01), Text("continuous")]),
    case("WAITING", &[Of("P1:P3"), Text("yearly")]),
    case("GROWTH", &[Of("Q5:Q9")]),
    case("GROWTH", &[Of("Q5:Q9"), Of("J1:J5")]),
    case("GROWTH", &[Of("Q5:Q9"), Of("J1:J4")]),
    case("UTILITY", &[Of("P1:P3"), Number(1.5)]),
    case("MARGINAL", &[Of("P5:P7"), Number(1.5)]),
    case("WELFARE", &[Of("Q5:Q9"), Of("A1:A5"), Number(0.015), Number(1.5)]),
    case("WELFARE", &[Of("Q5:Q9"), Of("A1:A5"), Number(0.015), Number(1.0), Text("continuous")]),
    case(
        "COMPENSATION",
        &[
            Of("A2:A4"),
            Number(100.0),
            Number(120.0),
            Number(10.0),
            Number(0.015),
            Number(1.5),
            Text("yearly"),
        ],
    ),
    case("EXACT", &[Of("D3:H3"), Of("D1:H1"), Of("D3:H3"), Number(2026.0), Number(1.5)]),
    case("EXACT", &[Of("N1:N3"), Of("P1:P3"), Of("P5:P7"), Number(9000.0), Number(1.5)]),
    case("EQUIVALENT", &[Of("P1:P3"), Of("P5:P7"), Number(1.5)]),
    case("WEIGHT", &[Of("P1:P3"), Number(32000.0), Number(1.3)]),
    case("REAL", &[Number(0.06), Number(0.02)]),
    case("SCHEDULE", &[Text("uk-2003")]),
    case("SCHEDULE", &[Text("nowhere-1")]),
    case("EXPLAIN", &[Text("uk-2003")]),
    case("EXPLAIN", &[Text("3,5 % \u{2212} \u{1F30D} \"net\"")]),
    case("EXPLAIN", &[Text("3.5%"), Of("D1:H1"), Of("D2:H2"), Number(2026.0), Text("flows middle")]),
    case("EXPLAIN", &[Text("3.5%"), Of("J1:J5"), Of("L1:L5"), Number(2026.0)]),
    case("WHY", &[Text("FACTOR"), Text("3.5%"), Of("B1:B6")]),
    case(
        "WHY",
        &[Text("HENCE.SWITCH"), Text("3.5%"), Text("growth"), Of("D1:H1"), Of("D2:H2"), Number(2026.0)],
    ),
    case("WHY", &[Text("FACTOR"), Text("3.5%"), Of("A1:A8")]),
];

/// Column (from 1) and row (from 1) of an address.
pub fn place(address: &str) -> (usize, usize) {
    let letters = address.bytes().take_while(u8::is_ascii_uppercase);
    let column = letters.fold(0, |sum, letter| sum * 26 + usize::from(letter - b'A') + 1);
    let row = address.trim_start_matches(|c: char| c.is_ascii_uppercase()).parse().expect("a row");
    (column, row)
}

pub fn address(column: usize, row: usize) -> String {
    let last = char::from(b'A' + ((column - 1) % 26) as u8);
    let before = (column - 1) / 26;
    if before == 0 {
        format!("{last}{row}")
    } else {
        address(before, row).replace(char::is_numeric, "") + &format!("{last}{row}")
    }
}

/// The cells of the data with their places.
pub fn data() -> Vec<((usize, usize), Held)> {
    let mut cells = Vec::new();
    for (first, rows) in DATA {
        let (column, row) = place(first);
        for (i, line) in rows.iter().enumerate() {
            cells.extend(line.iter().enumerate().map(|(j, held)| ((column + j, row + i), *held)));
        }
    }
    cells
}

/// The cells of a range of the sheet, as a host hands them over.
fn range(area: &str) -> Range<'static> {
    let (first, last) = area.split_once(':').unwrap_or((area, area));
    let ((left, top), (right, bottom)) = (place(first), place(last));
    let data = data();
    let cells = (top..=bottom).flat_map(|row| (left..=right).map(move |column| (column, row)));
    let cells = cells.map(|at| match data.iter().find(|(place, _)| *place == at) {
        Some((_, N(number) | D(_, number))) => Cell::Number(*number),
        Some((_, T(text))) => Cell::Text(Cow::Borrowed(*text)),
        Some((_, Blank)) | None => Cell::Blank,
    });
    Range::new(bottom - top + 1, right - left + 1, cells.collect()).expect("a range")
}

impl Case {
    /// What the library answers.
    pub fn answer(&self) -> Range<'static> {
        let function = Function::find(self.function).expect("a function of the table");
        let arguments: Vec<Option<Range<'_>>> = self.arguments.iter().map(Argument::value).collect();
        call(function, &arguments)
    }

    /// Rows and columns that the call takes on the sheet.
    pub fn shape(&self) -> (usize, usize) {
        let answer = self.answer();
        match self.area {
            Area::Fitting => (answer.rows(), answer.columns()),
            Area::One => (1, 1),
            Area::Rows(rows) => (rows, 1),
        }
    }

    /// What is due in a cell of the area.
    pub fn due(&self, row: usize, column: usize) -> Cell<'static> {
        let answer = self.answer();
        match row < answer.rows() {
            true => answer.cells()[row * answer.columns() + column].clone(),
            false => Cell::Error(CellError::NotAvailable),
        }
    }

    /// The formula as .xlsx keeps it and Calc shows it.
    pub fn formula(&self) -> String {
        let texts: Vec<String> = self.arguments.iter().map(|argument| argument.text(str::to_owned)).collect();
        format!("=HENCE.{}({})", self.function, texts.join(","))
    }

    /// The formula as .ods keeps it.
    pub fn open_formula(&self) -> String {
        let cells = |area: &str| format!("[.{}]", area.replace(':', ":."));
        let texts: Vec<String> = self.arguments.iter().map(|argument| argument.text(cells)).collect();
        format!("=HENCE.{}({})", self.function, texts.join(";"))
    }
}

impl Argument {
    fn value(&self) -> Option<Range<'static>> {
        match self {
            Number(number) => Some(Range::single(Cell::Number(*number))),
            Text(text) => Some(Range::single(Cell::Text(Cow::Borrowed(*text)))),
            Of(area) => Some(range(area)),
            Out => None,
        }
    }

    fn text(&self, cells: impl Fn(&str) -> String) -> String {
        match self {
            Number(number) => number.to_string(),
            Text(text) => format!("\"{}\"", text.replace('"', "\"\"")),
            Of(area) => cells(area),
            Out => String::new(),
        }
    }
}
