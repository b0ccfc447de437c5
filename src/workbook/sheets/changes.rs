//! The changes sheet: every cell that this fill wrote, with what it held before.

use super::AuditInput;
use crate::references::quote_sheet;
use crate::writer::{Sheet, Style};

/// The column of a change's sheet, as formulas quote it.
pub(crate) const SHEET: u32 = 0;
/// The column of its cell.
pub(crate) const CELL: u32 = 1;
/// The column of what it holds now; a formula begins with an equals sign.
pub(crate) const AFTER: u32 = 4;
/// The row of column headings.
const HEADING: u32 = 3;

/// Makes the sheet.
pub(super) fn sheet(input: &AuditInput<'_>) -> Sheet {
    let mut sheet = Sheet::new(&input.names.changes);
    for (i, width) in [24.0, 12.0, 26.0, 40.0, 60.0].into_iter().enumerate() {
        sheet.columns(i as u32, i as u32, width);
    }
    sheet.text(0, 0, Style::Title, "Audit changes");
    let cells = |n: usize| if n == 1 { "one cell".to_owned() } else { format!("{n} cells") };
    let new = input.changes.iter().filter(|change| change.before != change.after).count();
    let words = match input.changes.len() {
        0 => "This fill wrote no cell of the workbook.".to_owned(),
        n if n == new => {
            format!("This fill wrote {}; every other cell of the workbook is as it was.", cells(n))
        }
        n => format!(
            "This fill wrote {}, and {} now another text or number than before; every other cell of the workbook is \
             as it was.",
            cells(n),
            match new {
                0 => "none holds".to_owned(),
                1 => "one holds".to_owned(),
                new => format!("{new} hold"),
            }
        ),
    };
    sheet.paragraph(1, 0, 4, Style::Wrapped, words);
    for (i, heading) in ["Sheet", "Cell", "Role", "Before", "After"].iter().enumerate() {
        sheet.text(HEADING, i as u32, Style::Heading, heading);
    }
    for (i, change) in input.changes.iter().enumerate() {
        let row = HEADING + 1 + i as u32;
        sheet.text(row, SHEET, Style::Text, quote_sheet(&change.at.sheet));
        sheet.text(row, CELL, Style::Text, change.at.range.to_string());
        sheet.text(row, 2, Style::Wrapped, &change.role);
        sheet.text(row, 3, Style::Wrapped, if change.before.is_empty() { "(blank)" } else { &change.before });
        sheet.text(row, AFTER, Style::Wrapped, &change.after);
    }
    sheet.freeze(HEADING + 1, 0);
    sheet.repeat(HEADING, HEADING);
    sheet
}
