//! A comparison as a workbook of its own: the options under each basis, and where the decision switches.

use hence_core::{CAUTION, Parameter};

use super::search::{Change, Entry, Moved};
use super::{Comparison, Side};
use crate::package::Package;
use crate::problem::Result;
use crate::writer::{self, Sheet, Style};

/// The last column that texts reach across.
const LAST: u32 = 6;

/// The workbook's bytes, the same every time.
///
/// # Errors
/// A number is too large, or no temporary file can be made.
pub fn book(package: &Package, comparison: &Comparison) -> Result<Vec<u8>> {
    writer::workbook(&[sides(package, comparison), switching(comparison)])
}

fn sides(package: &Package, comparison: &Comparison) -> Sheet {
    let mut sheet = Sheet::new("Compare");
    let columns = comparison.sides.len() as u32;
    sheet.columns(0, 0, 34.0);
    sheet.columns(1, columns.max(LAST), 17.0);
    sheet.text(0, 0, Style::Title, "Options under several bases");
    sheet.text(1, 0, Style::Text, format!("Made from {}, which is not changed.", package.file_name()));
    let mut row = 3;
    sheet.text(row, 0, Style::Section, "Bases");
    for side in &comparison.sides {
        row += 1;
        sheet.text(row, 0, Style::Strong, heading(side));
        sheet.paragraph(row, 1, LAST, Style::Wrapped, &side.words);
    }
    row += 1;
    sheet.paragraph(row, 0, LAST, Style::Strong, CAUTION);
    let over = comparison.baseline.map(|i| format!(" over {}", comparison.options[i])).unwrap_or_default();
    for (title, style) in [
        (format!("Net present value{over}"), Style::Money),
        (format!("Ratio of benefits to costs{over}"), Style::Ratio),
        ("Rank by net present value".to_owned(), Style::Year),
    ] {
        row += 2;
        sheet.text(row, 0, Style::Section, &title);
        row += 1;
        sheet.text(row, 0, Style::Heading, "Option");
        for (k, side) in comparison.sides.iter().enumerate() {
            sheet.text(row, k as u32 + 1, Style::Heading, heading(side));
        }
        for (i, option) in comparison.options.iter().enumerate() {
            row += 1;
            sheet.text(row, 0, Style::Wrapped, option);
            for (k, side) in comparison.sides.iter().enumerate() {
                let standing = &side.standings[i];
                let value = match style {
                    Style::Money => Some(standing.totals.npv),
                    Style::Ratio => standing.totals.ratio,
                    _ => Some(standing.rank as f64),
                };
                match value {
                    Some(x) => sheet.number(row, k as u32 + 1, style, x),
                    None => sheet.text(row, k as u32 + 1, Style::Instead, "no ratio"),
                }
            }
        }
    }
    row += 1;
    sheet.text(row, 0, Style::Strong, "Best");
    for (k, side) in comparison.sides.iter().enumerate() {
        let best = side.best.map_or("several", |i| comparison.options[i].as_str());
        sheet.text(row, k as u32 + 1, Style::Instead, best);
    }
    sheet
}

/// A basis and why it takes part.
pub fn heading(side: &Side) -> String {
    format!("{} ({})", side.basis, side.why.word())
}

fn switching(comparison: &Comparison) -> Sheet {
    let mut sheet = Sheet::new("Switching");
    for (i, width) in [30.0, 30.0, 30.0, 18.0, 34.0, 44.0].into_iter().enumerate() {
        sheet.columns(i as u32, i as u32, width);
    }
    sheet.text(0, 0, Style::Title, "Where the decision switches");
    sheet.paragraph(1, 0, 5, Style::Wrapped, words(comparison));
    let mut row = 3;
    sheet.text(row, 0, Style::Section, "Where the best option changes");
    for change in &comparison.changes {
        row += 1;
        sheet.text(row, 0, Style::Text, change.parameter.to_string());
        put(&mut sheet, row, 3, &Moved::Parameter(change.parameter), change.at);
        sheet.text(row, 1, Style::Wrapped, format!("below: {}", comparison.options[change.from]));
        sheet.text(row, 2, Style::Wrapped, format!("above: {}", comparison.options[change.to]));
    }
    if comparison.changes.is_empty() {
        row += 1;
        sheet.text(row, 0, Style::Text, "Nowhere in the intervals searched.");
    }
    row += 2;
    sheet.text(row, 0, Style::Section, "Every switching value");
    row += 1;
    for (i, heading) in ["Option", "Equal to", "Parameter", "Value", "Searched", "Note"].iter().enumerate() {
        sheet.text(row, i as u32, Style::Heading, heading);
    }
    sheet.repeat(row, row);
    for entry in &comparison.switching {
        for value in entry.values.iter().map(Some).chain(entry.values.is_empty().then_some(None)) {
            row += 1;
            sheet.text(row, 0, Style::Wrapped, &comparison.options[entry.option]);
            sheet.text(
                row,
                1,
                Style::Wrapped,
                entry.against.map_or("zero", |i| comparison.options[i].as_str()),
            );
            sheet.text(row, 2, Style::Wrapped, entry.moved.to_string());
            match value {
                Some(&x) => put(&mut sheet, row, 3, &entry.moved, x),
                None => sheet.text(row, 3, Style::Instead, "none"),
            }
            let (low, high) = entry.interval;
            let text = format!("{} to {}", shown(&entry.moved, low), shown(&entry.moved, high));
            sheet.text(row, 4, Style::Wrapped, text);
            sheet.text(row, 5, Style::Wrapped, remark(entry));
        }
    }
    sheet
}

/// What the search did, in words.
pub fn words(comparison: &Comparison) -> String {
    let ramsey = match &comparison.ramsey {
        Some(basis) => {
            format!("preference, elasticity and growth are those of {basis}, each moved by itself")
        }
        None => "no basis here is stated by preference, elasticity and growth, so these were not searched"
            .to_owned(),
    };
    format!(
        "Every value in the interval searched at which a net present value is zero or two options are equal. The rate is a \
         flat yearly one in place of the basis; {ramsey}; a multiplier scales one stream of the option (cells that options share move in all of them). A \
         value that could not be settled is noted."
    )
}

fn put(sheet: &mut Sheet, row: u32, col: u32, moved: &Moved, x: f64) {
    sheet.number(row, col, if in_percent(moved) { Style::Percent } else { Style::Value }, x);
}

fn in_percent(moved: &Moved) -> bool {
    !matches!(moved, Moved::Parameter(Parameter::Elasticity) | Moved::Multiplier(_))
}

/// A value of what moves, for people: up to four decimals.
pub fn shown(moved: &Moved, x: f64) -> String {
    let text = |x: f64| {
        let text = format!("{x:.4}");
        let text = text.trim_end_matches('0').trim_end_matches('.');
        if text == "-0" { "0".to_owned() } else { text.to_owned() }
    };
    if in_percent(moved) { format!("{}%", text(x * 100.0)) } else { text(x) }
}

/// The note on an entry, unsettled places included.
pub fn remark(entry: &Entry) -> String {
    let mut notes: Vec<String> = entry.note.iter().cloned().collect();
    let open = entry.unresolved.iter().filter(|_| entry.note.is_none());
    notes.extend(open.map(|&(low, high)| {
        let (low, high) = (shown(&entry.moved, low), shown(&entry.moved, high));
        let place = if low == high { low } else { format!("{low} to {high}") };
        format!("none, one or several at {place} (the flows do not settle it)")
    }));
    notes.join("; ")
}

/// A change of the best option in words.
pub fn change_words(comparison: &Comparison, change: &Change) -> String {
    format!(
        "{} {}: below it {} is best, above it {}",
        change.parameter,
        shown(&Moved::Parameter(change.parameter), change.at),
        comparison.options[change.from],
        comparison.options[change.to]
    )
}
