//! The coverage sheet: every numeric row along the years, its role, and totals that tie.

use super::AuditInput;
use super::lines::{AGREES, DIFFERS};
use crate::appraisal::Covered;
use crate::formulas::{one, refer, refer_area};
use crate::patch::Cached;
use crate::references::{Cell, Range, SheetRange};
use crate::writer::{Sheet, Style};

/// The row of column headings.
const HEADING: u32 = 3;

/// The sheet, and the result cells of valued rows (those that count for the verdict).
pub(super) struct Coverage {
    /// The sheet.
    pub sheet: Sheet,
    /// The result column.
    pub results: Range,
    /// How many rows are valued.
    pub valued: usize,
}

/// Makes the sheet: valued rows first, then the others.
pub(super) fn sheet(input: &AuditInput<'_>) -> Coverage {
    let mut sheet = Sheet::new(&input.names.coverage);
    for (i, width) in [34.0, 34.0, 30.0, 18.0, 18.0, 14.0, 12.0, 24.0].into_iter().enumerate() {
        sheet.columns(i as u32, i as u32, width);
    }
    sheet.text(0, 0, Style::Title, "Audit coverage");
    let words = "Every row (or column) of numbers that runs along the years: the role it has, or \"not valued\". \
                 Totals are undiscounted; the one in the workbook now is a live sum. Rows that are valued count \
                 for the verdict.";
    sheet.paragraph(1, 0, 7, Style::Wrapped, words);
    let headings =
        ["Cells", "Heading", "Role", "Total recorded", "Total now", "Difference", "Allowed", "Result"];
    for (i, heading) in headings.iter().enumerate() {
        sheet.text(HEADING, i as u32, Style::Heading, heading);
    }
    let (valued, other): (Vec<_>, Vec<_>) =
        input.appraisal.coverage.iter().partition(|c| !c.roles.is_empty() && !c.follows);
    let first = HEADING + 1;
    for (i, covered) in valued.iter().chain(&other).enumerate() {
        row(&mut sheet, first + i as u32, covered);
    }
    sheet.freeze(first, 1);
    sheet.repeat(HEADING, HEADING);
    let last = first + (valued.len() as u32).max(1) - 1;
    let results = Range { first: Cell { row: first, col: 7 }, last: Cell { row: last, col: 7 } };
    Coverage { sheet, results, valued: valued.len() }
}

/// One row of numbers.
fn row(sheet: &mut Sheet, at: u32, covered: &Covered) {
    sheet.text(at, 0, Style::Text, covered.at.to_string());
    sheet.text(at, 1, Style::Wrapped, &covered.heading);
    let valued = !covered.roles.is_empty();
    let role = if valued { covered.roles.join("; ") } else { "not valued".to_owned() };
    sheet.text(at, 2, Style::Wrapped, role);
    if covered.follows {
        // What it came to before says nothing of what it comes to now.
        let text = if valued { "a result, or follows filled cells" } else { "follows filled cells" };
        sheet.text(at, 7, Style::Wrapped, text);
        return;
    }
    sheet.number(at, 3, Style::Money, covered.total);
    let sum = format!("SUM({})", refer_area(&sheet.name, &covered.at));
    sheet.formula(at, 4, Style::Money, sum, Cached::Number(covered.total));
    let cell = |col| Cell { row: at, col }.to_string();
    let text = format!("ABS({}-{})", cell(4), cell(3));
    sheet.formula(at, 5, Style::Difference, text, Cached::Number(0.0));
    sheet.number(at, 6, Style::Difference, (1e-9 * covered.total.abs()).max(1e-6));
    let (text, result) = if valued {
        let within = format!("IF({}<={},\"{AGREES}\",\"{DIFFERS}\")", cell(5), cell(6));
        (format!("IF(ISNUMBER({}),{within},\"{DIFFERS}\")", cell(5)), AGREES)
    } else {
        (format!("IF({}<={},\"ties\",\"changed since\")", cell(5), cell(6)), "ties")
    };
    sheet.formula(at, 7, Style::Result, text, Cached::Text(result.into()));
}

/// The cell of the place beside a result, as another sheet refers to it.
pub(super) fn places(results: Range, home: &str, sheet: &str) -> String {
    let column = |cell: Cell| Cell { row: cell.row, col: 0 };
    let range = Range { first: column(results.first), last: column(results.last) };
    let range = if range.first == range.last { one(range.first) } else { range };
    refer(home, &SheetRange { sheet: sheet.to_owned(), range })
}
