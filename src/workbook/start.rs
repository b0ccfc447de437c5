//! A ready-named appraisal workbook to type into.

use std::path::Path;

use crate::package::write_atomically;
use crate::problem::Result;
use crate::references::{Cell, SheetRange};
use crate::writer::{Form, Look, form};

/// The sheet to type into.
const SHEET: &str = "Appraisal";
/// The sheet that explains it.
const HELP: &str = "How to fill it in";
/// The base year and the first year, until others are typed.
const FIRST_YEAR: u32 = 2026;
/// Years offered, the base year included.
const YEARS: u32 = 61;
/// Column of the first year, right of the labels.
const FIRST: u32 = 1;
/// Column of the last year.
const LAST: u32 = FIRST + YEARS - 1;
/// Settings are as wide as these columns.
const SETTING: (u32, u32) = (FIRST, FIRST + 3);
/// Lines offered in each block.
const LINES: u32 = 6;

/// Rows of the sheet, from 0.
mod row {
    use super::LINES;
    pub const BASE: u32 = 2;
    pub const BASIS: u32 = 3;
    pub const TIMING: u32 = 4;
    pub const PRICES: u32 = 5;
    pub const YEARS: u32 = 6;
    pub const COSTS: u32 = YEARS + 2;
    pub const ALL_COSTS: u32 = COSTS + LINES;
    pub const BENEFITS: u32 = ALL_COSTS + 3;
    pub const ALL_BENEFITS: u32 = BENEFITS + LINES;
    pub const NET: u32 = ALL_BENEFITS + 1;
    pub const FILLED: u32 = NET + 2;
    pub const FACTOR: u32 = FILLED + 1;
    pub const PV: u32 = FACTOR + 1;
    pub const RESULTS: u32 = PV + 2;
}

/// Timings to choose from, and what they mean.
const TIMINGS: [(&str, &str); 4] = [
    ("flows end, base end", "The base year itself is undiscounted, the next year has one year's factor."),
    (
        "flows middle, base start",
        "Flows fall in the middle of each year, values stand at the base year's start.",
    ),
    ("flows middle, base end", "Flows fall in the middle of each year, values stand at the base year's end."),
    ("flows end, base start", "Flows fall at each year's end, so the base year has one year's factor."),
];

/// Rate lines to copy, and what they mean.
const BASES: [(&str, &str); 5] = [
    ("3.5%", "One rate a year, compounded yearly."),
    (
        "3.5% to 30, 3% to 75, 2.5% after",
        "Forward rates by band: years 1 to 30, 31 to 75 and all later ones.",
    ),
    (
        "preference 0.5%, hazard 1%, elasticity 1, growth 2%",
        "From time preference, hazard, elasticity and growth.",
    ),
    ("0.5 of (1%), 0.5 of (7%)", "Two views of the rate, weighted; the factors are averaged."),
    ("uk-2026", "A published schedule by its id: `hence schedules` lists them with their sources."),
];

/// The prices of the flows, and what they mean.
const PRICES: [(&str, &str); 3] = [
    (
        "real",
        "Amounts without inflation, all in the prices of one year. This is what the sheet says until changed.",
    ),
    ("real 2026", "The same, with the year of the prices."),
    ("nominal", "Money of the day, inflation included."),
];

/// Writes the workbook.
///
/// # Errors
/// The file exists and `force` is false, or cannot be written.
pub fn start_file(path: &Path, force: bool) -> Result<()> {
    write_atomically(path, &start()?, force)
}

/// The workbook's bytes, the same every time.
///
/// # Errors
/// No temporary file can be made for it.
pub fn start() -> Result<Vec<u8>> {
    let mut sheet = Form::new(SHEET);
    let mut names = Vec::new();
    settings(&mut sheet, &mut names);
    flows(&mut sheet, &mut names);
    results(&mut sheet, &mut names);
    form(&[sheet, help()], &names)
}

type Names = Vec<(String, SheetRange)>;

fn name(names: &mut Names, sheet: &Form, role: &str, first: (u32, u32), last: (u32, u32)) {
    let cell = |(row, col)| Cell { row, col };
    names.push((format!("{}{role}", crate::roles::PREFIX), sheet.at(cell(first), cell(last))));
}

fn settings(sheet: &mut Form, names: &mut Names) {
    sheet.columns(0, 0, 32.0);
    sheet.columns(FIRST, LAST, 11.0);
    sheet.freeze(row::YEARS + 1, FIRST);
    sheet.print_wide(0, 0);
    sheet.text(0, 0, Look::Title, "Appraisal");
    sheet.text(
        0,
        FIRST,
        Look::Remark,
        &format!("Type into the shaded cells, then run hence fill on this file. See the sheet {HELP}."),
    );
    let settings = [
        (row::BASE, "Base year", "base", "the year to which values are discounted"),
        (row::BASIS, "Discount rate", "basis", "a rate, a rate line or a schedule's id"),
        (row::TIMING, "Timing", "timing", "where in their year flows and the base stand"),
        (row::PRICES, "Prices", "price_basis", "real (in the prices of one year) or nominal"),
    ];
    for (row, label, role, remark) in settings {
        sheet.text(row, 0, Look::Text, label);
        match row {
            row::BASE => sheet.number(row, SETTING.0, Look::TypedSetting, f64::from(FIRST_YEAR)),
            row::TIMING => sheet.text(row, SETTING.0, Look::TypedSetting, TIMINGS[0].0),
            row::PRICES => sheet.text(row, SETTING.0, Look::TypedSetting, PRICES[0].0),
            _ => sheet.blank(row, SETTING.0, Look::TypedSetting),
        }
        sheet.merge(row, SETTING.0, SETTING.1);
        sheet.text(row, SETTING.1 + 1, Look::Remark, remark);
        name(names, sheet, role, (row, SETTING.0), (row, SETTING.0));
    }
    let examples = "3.5%, or 3.5% to 30, 3% after, or the id of a schedule such as uk-2026. The rate to use is set by \
                    the body that funds or reviews the appraisal.";
    sheet.prompt(row::BASIS, SETTING.0, "Discount rate", examples, None);
    let choices = format!("'{HELP}'!$A${}:$A${}", TIMING_ROW + 1, TIMING_ROW + TIMINGS.len() as u32);
    let message = "The base year is undiscounted where flows and base stand at the same point.";
    sheet.prompt(row::TIMING, SETTING.0, "Timing", message, Some(&choices));
    let message = "It stands at real until changed. Write nominal where the amounts below hold inflation: real flows need a \
                   real rate, nominal ones a nominal rate.";
    sheet.prompt(row::PRICES, SETTING.0, "Prices", message, None);
}

/// One formula in every year's column, from the column's letters.
fn along(sheet: &mut Form, row: u32, look: Look, formula: impl Fn(&str) -> String) {
    for col in FIRST..=LAST {
        let column = letters(col);
        sheet.formula(row, col, look, &formula(&column), 0.0);
    }
}

fn flows(sheet: &mut Form, names: &mut Names) {
    sheet.text(row::YEARS, 0, Look::Section, "Costs and benefits by year");
    for (n, col) in (FIRST..=LAST).enumerate() {
        let text = if n == 0 {
            format!("{}{}", letters(SETTING.0), row::BASE + 1)
        } else {
            format!("{}{}+1", letters(col - 1), row::YEARS + 1)
        };
        sheet.formula(row::YEARS, col, Look::Year, &text, f64::from(FIRST_YEAR) + n as f64);
    }
    name(names, sheet, "years", (row::YEARS, FIRST), (row::YEARS, LAST));
    let blocks = [
        (
            row::COSTS,
            "Costs, as positive numbers",
            "costs",
            ["Works", "Renewals", "Upkeep"],
            row::ALL_COSTS,
            "All costs",
        ),
        (
            row::BENEFITS,
            "Benefits",
            "benefits",
            ["Users", "Others", "Environment"],
            row::ALL_BENEFITS,
            "All benefits",
        ),
    ];
    for (first, heading, role, labels, total, label) in blocks {
        let last = first + LINES - 1;
        sheet.text(first - 1, 0, Look::Text, heading);
        for row in first..=last {
            match labels.get((row - first) as usize) {
                Some(label) => sheet.text(row, 0, Look::TypedText, label),
                None => sheet.blank(row, 0, Look::TypedText),
            }
            for col in FIRST..=LAST {
                sheet.blank(row, col, Look::TypedMoney);
            }
        }
        name(names, sheet, role, (first, 0), (last, LAST));
        sheet.text(total, 0, Look::TotalLabel, label);
        along(sheet, total, Look::Total, |c| format!("SUM({c}{}:{c}{})", first + 1, last + 1));
    }
    sheet.text(row::NET, 0, Look::TotalLabel, "Benefits less costs");
    along(sheet, row::NET, Look::Total, |c| {
        format!("{c}{}-{c}{}", row::ALL_BENEFITS + 1, row::ALL_COSTS + 1)
    });
}

fn results(sheet: &mut Form, names: &mut Names) {
    sheet.text(row::FILLED, 0, Look::Section, "Filled in the audited copy");
    for col in FIRST..=LAST {
        sheet.blank(row::FILLED, col, Look::Section);
    }
    for (row, label, role, look) in [
        (row::FACTOR, "Discount factor", "factor", Look::Factor),
        (row::PV, "Present value of the net flow", "pv", Look::Money),
    ] {
        sheet.text(row, 0, Look::Text, label);
        for col in FIRST..=LAST {
            sheet.blank(row, col, look);
        }
        name(names, sheet, role, (row, FIRST), (row, LAST));
    }
    sheet.text(row::RESULTS, 0, Look::Section, "Results");
    sheet.blank(row::RESULTS, FIRST, Look::Section);
    let results = [
        ("Present value of benefits", "pv_benefits", Look::ResultMoney),
        ("Present value of costs", "pv_costs", Look::ResultMoney),
        ("Net present value", "npv", Look::ResultMoney),
        ("Benefit-cost ratio", "ratio", Look::ResultRatio),
        ("Annual equivalent", "annual", Look::ResultMoney),
        ("Internal rate of return", "irr", Look::ResultRate),
        ("Discounted payback, years", "payback", Look::ResultRatio),
    ];
    for (row, (label, role, look)) in (row::RESULTS + 1..).zip(results) {
        sheet.text(row, 0, Look::Text, label);
        sheet.blank(row, FIRST, look);
        name(names, sheet, role, (row, FIRST), (row, FIRST));
    }
}

/// Row of the first timing on the help sheet, from 0.
const TIMING_ROW: u32 = 14;

fn help() -> Form {
    let mut sheet = Form::new(HELP);
    sheet.columns(0, 0, 50.0);
    sheet.columns(1, 1, 78.0);
    sheet.text(0, 0, Look::Title, HELP);
    let steps = [
        "1. Type the base year and the discount rate. Choose the timing. Say which prices the amounts are in.",
        "2. Type over the labels of costs and benefits, and enter one amount a year. Blank cells count as 0.",
        "3. Need more lines? Insert rows between two shaded ones. More years? Insert columns before the last one and copy the formulas.",
        "4. Save and close, then run: hence fill FILE. The copy FILE.audited.xlsx holds factors, present values and the audit.",
    ];
    for (row, step) in (1..).zip(steps) {
        sheet.text(row, 0, Look::Text, step);
    }
    sheet.text(6, 0, Look::Section, "Discount rate, to copy");
    sheet.text(6, 1, Look::Section, "What it means");
    for (row, (line, meaning)) in (7..).zip(BASES) {
        sheet.text(row, 0, Look::Text, line);
        sheet.text(row, 1, Look::Text, meaning);
    }
    sheet.text(TIMING_ROW - 1, 0, Look::Section, "Timing, to choose from");
    sheet.text(TIMING_ROW - 1, 1, Look::Section, "What it means");
    for (row, (timing, meaning)) in (TIMING_ROW..).zip(TIMINGS) {
        sheet.text(row, 0, Look::Text, timing);
        sheet.text(row, 1, Look::Text, meaning);
    }
    let prices = TIMING_ROW + TIMINGS.len() as u32 + 1;
    sheet.text(prices, 0, Look::Section, "Prices, to copy");
    sheet.text(prices, 1, Look::Section, "What it means");
    for (row, (text, meaning)) in (prices + 1..).zip(PRICES) {
        sheet.text(row, 0, Look::Text, text);
        sheet.text(row, 1, Look::Text, meaning);
    }
    let names = prices + PRICES.len() as u32 + 2;
    sheet.text(names, 0, Look::Section, "Names");
    sheet.blank(names, 1, Look::Section);
    let remarks = [
        "The cells are found by their names (in Excel: Formulas, Name Manager; in Calc: Sheet, Named Ranges), which all begin with hence_.",
        "Rows and columns may be moved and the sheet renamed: names follow their cells.",
        hence_core::CAUTION,
    ];
    for (row, remark) in (names + 1..).zip(remarks) {
        sheet.text(row, 0, Look::Text, remark);
    }
    sheet
}

/// A column's letters.
fn letters(col: u32) -> String {
    Cell { row: 0, col }.to_string().trim_end_matches('1').to_owned()
}
