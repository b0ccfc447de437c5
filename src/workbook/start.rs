//! A ready-named appraisal workbook to type into.

use std::path::Path;

use crate::package::write_atomically;
use crate::problem::Result;
use crate::references::{Cell, Range, quote_sheet};
use crate::writer::{Name, Sheet, Style, package_with_names};

/// The sheet to type into.
const SHEET: &str = "Appraisal";
/// Years offered, the base year included.
const YEARS: u32 = 61;
/// First column of the years.
const FIRST: u32 = 3;
/// Row of the years.
const YEAR_ROW: u32 = 8;

/// Writes the workbook.
///
/// # Errors
/// The file exists and `force` is false, or cannot be written.
pub fn start_file(path: &Path, force: bool) -> Result<()> {
    write_atomically(path, &start()?, force)
}

/// The workbook's bytes.
pub fn start() -> Result<Vec<u8>> {
    let mut sheet = Sheet::new(SHEET);
    let mut names = Vec::new();
    let mut name = |text: &str, first: Cell, last: Cell| {
        names.push(Name { name: text.to_owned(), text: format!("{}!{}", quote_sheet(SHEET), fixed(first, last)) });
    };
    let cell = |row, col| Cell { row, col };
    sheet.columns(0, 0, 34.0);
    sheet.columns(1, 1, 40.0);
    sheet.columns(2, 2, 14.0);
    sheet.columns(FIRST, FIRST + YEARS - 1, 11.0);
    sheet.freeze(YEAR_ROW + 1, FIRST);
    sheet.text(0, 0, Style::Title, "Appraisal");
    sheet.text(1, 0, Style::Text, "Type into the shaded cells. Insert rows and years where you need them, and keep the names");
    sheet.text(2, 0, Style::Text, "(Formulas, Name Manager) in step. Then run: hence fill on this file.");
    let settings: [(&str, &str, Option<&str>); 3] = [
        ("Base year", "base", None),
        ("Basis: a rate line or a schedule id", "basis", Some("3.5%")),
        ("Timing", "timing", Some("flows end, base end")),
    ];
    for (i, (label, role, value)) in settings.iter().enumerate() {
        let row = 4 + i as u32;
        sheet.text(row, 0, Style::Text, label);
        match value {
            Some(text) => sheet.text(row, 1, Style::Input, text),
            None => sheet.number(row, 1, Style::InputYear, 2026.0),
        }
        name(&format!("hence_{role}"), cell(row, 1), cell(row, 1));
    }
    sheet.text(YEAR_ROW, 0, Style::Heading, "Year");
    sheet.text(YEAR_ROW, 2, Style::Heading, "Total");
    let rows = [
        (YEAR_ROW + 2, "Cost: works", "cost_works", true),
        (YEAR_ROW + 3, "Cost: upkeep", "cost_upkeep", true),
        (YEAR_ROW + 5, "Benefit: users", "benefit_users", true),
        (YEAR_ROW + 6, "Benefit: others", "benefit_others", true),
        (YEAR_ROW + 8, "Discount factor", "factor", false),
        (YEAR_ROW + 9, "Present value of the net flow", "pv", false),
    ];
    name("hence_years", cell(YEAR_ROW, FIRST), cell(YEAR_ROW, FIRST + YEARS - 1));
    for (row, label, role, input) in rows {
        sheet.text(row, 0, Style::Text, label);
        if input {
            let cells = fixed(cell(row, FIRST), cell(row, FIRST + YEARS - 1)).replace('$', "");
            sheet.formula(row, 2, Style::Money, format!("SUM({cells})"), crate::patch::Cached::Number(0.0));
        }
        name(&format!("hence_{role}"), cell(row, FIRST), cell(row, FIRST + YEARS - 1));
    }
    for n in 0..YEARS {
        let col = FIRST + n;
        let year = f64::from(2026 + n);
        let text = if n == 0 {
            "$B$5".to_owned()
        } else {
            format!("{}+1", cell(YEAR_ROW, col - 1))
        };
        sheet.formula(YEAR_ROW, col, Style::HeadingYear, text, crate::patch::Cached::Number(year));
        for (row, _, _, input) in rows {
            sheet.blank(row, col, if !input && row == YEAR_ROW + 8 { Style::Factor } else if input { Style::InputMoney } else { Style::Money });
        }
    }
    let results = [
        ("PV of costs", "pv_costs", Style::Money),
        ("PV of benefits", "pv_benefits", Style::Money),
        ("Net present value", "npv", Style::Money),
        ("Benefit-cost ratio", "ratio", Style::Ratio),
        ("Annual equivalent", "annual", Style::Money),
        ("Internal rate of return", "irr", Style::Percent),
        ("Discounted payback, years", "payback", Style::Ratio),
    ];
    for (i, (label, role, style)) in results.iter().enumerate() {
        let row = YEAR_ROW + 11 + i as u32;
        sheet.text(row, 0, Style::Text, label);
        sheet.blank(row, 1, *style);
        name(&format!("hence_{role}"), cell(row, 1), cell(row, 1));
    }
    sheet.text(YEAR_ROW + 19, 0, Style::Text, hence_core::CAUTION);
    package_with_names(&[sheet], &names)
}

/// `$D$9:$BL$9`
fn fixed(first: Cell, last: Cell) -> String {
    crate::formulas::absolute(Range { first, last })
}
