//! The sheet of findings.

use hence_core::CAUTION;

use super::Noted;
use crate::check::CheckReport;
use crate::findings::Finding;
use crate::patch::Cached;
use crate::references::{Range, quote_sheet};
use crate::writer::{Sheet, Style};

/// Its name, where that is free.
pub(super) const NAME: &str = "Check findings";
/// Columns: heading and width.
const COLUMNS: [(&str, f64); 9] = [
    ("Place", 24.0),
    ("What", 22.0),
    ("Found", 26.0),
    ("Expected", 26.0),
    ("Effect on NPV", 15.0),
    ("How sure", 9.0),
    ("Ranking", 22.0),
    ("Evidence", 60.0),
    ("Note", 18.0),
];

/// Makes the sheet.
pub(super) fn sheet(name: &str, file: &str, report: &CheckReport, noted: &[Noted]) -> Sheet {
    let mut sheet = Sheet::new(name);
    let last = COLUMNS.len() as u32 - 1;
    for (i, (_, width)) in COLUMNS.iter().enumerate() {
        sheet.columns(i as u32, i as u32, *width);
    }
    sheet.text(0, 0, Style::Title, "Check findings");
    let findings = &report.findings;
    let found = match findings.len() {
        0 => "no finding".to_owned(),
        1 => "one finding".to_owned(),
        n => format!("{n} findings"),
    };
    sheet.paragraph(
        1,
        0,
        last,
        Style::Strong,
        format!("{file}: {found}. Of the cells with results, {}.", compared(report)),
    );
    sheet.paragraph(2, 0, last, Style::Wrapped, CHECKED);
    sheet.paragraph(3, 0, last, Style::Wrapped, CAUTION);
    let heading = 5;
    for (i, (text, _)) in COLUMNS.iter().enumerate() {
        sheet.text(heading, i as u32, Style::Heading, text);
    }
    for (i, finding) in findings.iter().enumerate() {
        let row = heading + 1 + i as u32;
        place(&mut sheet, row, finding);
        sheet.text(row, 1, Style::Strong, finding.kind.words());
        sheet.text(row, 2, Style::Wrapped, &finding.found);
        sheet.text(row, 3, Style::Wrapped, &finding.expected);
        match finding.effect_on_npv.filter(|effect| effect.is_finite()) {
            Some(effect) => sheet.number(row, 4, Style::Money, effect),
            None => sheet.text(row, 4, Style::Instead, "not known"),
        }
        sheet.text(row, 5, Style::Result, format!("{:.0}%", 100.0 * finding.confidence));
        sheet.text(row, 6, Style::Wrapped, finding.ranking.as_deref().unwrap_or("unchanged"));
        sheet.text(row, 7, Style::Wrapped, &finding.words);
        sheet.text(
            row,
            8,
            Style::Wrapped,
            match noted.get(i) {
                Some(Noted::Placed) => "on the cell",
                Some(Noted::Taken) => "none: the cell has a note of its own",
                Some(Noted::Unreadable) => "none: the notes of the sheet cannot be read",
                Some(Noted::Nowhere) | None => "none: no cell",
            },
        );
    }
    let mut row = heading + 2 + findings.len() as u32;
    if !report.problems.is_empty() {
        sheet.text(row, 0, Style::Section, "Warnings");
        for problem in &report.problems {
            row += 1;
            sheet.paragraph(row, 0, last, Style::Wrapped, problem.to_string());
        }
    }
    sheet.freeze(heading + 1, 1);
    sheet.repeat(heading, heading);
    sheet
}

/// What the check looks at, so that nobody takes silence for more than it is.
const CHECKED: &str = "Looked at: factors, present values and totals against the declared basis; formulas of rows along the \
    years; what each flow counts in the totals; signs and units of streams; the order of the years. Not looked at: whether \
    the flows themselves are right. The effect is what the mistake adds to the NPV of the option that it changes most.";

fn compared(report: &CheckReport) -> String {
    match (report.differences.len(), report.agree) {
        (0, 0) => "none was filled, so none was compared".to_owned(),
        (0, agree) => format!("all {agree} agree with the declared basis"),
        (differ, agree) => format!("{differ} differ from the declared basis and {agree} agree"),
    }
}

/// The place as a link to its cells.
fn place(sheet: &mut Sheet, row: u32, finding: &Finding) {
    let (Some(name), Some(range)) = (&finding.place.sheet, finding.place.range) else {
        sheet.text(row, 0, Style::Wrapped, finding.place.to_string());
        return;
    };
    let (to, shown) = (target(name, range), finding.place.to_string());
    let quoted = |text: &str| format!("\"{}\"", text.replace('"', "\"\""));
    // Texts of more than 255 characters may not stand in a formula.
    if to.chars().count() > 250 || shown.chars().count() > 250 {
        sheet.text(row, 0, Style::Wrapped, shown);
        return;
    }
    let formula = format!("HYPERLINK({},{})", quoted(&to), quoted(&shown));
    sheet.formula(row, 0, Style::Wrapped, formula, Cached::Text(shown));
}

fn target(sheet: &str, range: Range) -> String {
    format!("#{}!{range}", quote_sheet(sheet))
}
