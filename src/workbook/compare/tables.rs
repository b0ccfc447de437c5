//! A comparison as a workbook of its own: the options under each basis, and where the decision switches.

use hence_core::{CAUTION, Parameter};

use super::changes::Change;
use super::map::{Map, option_letter};
use super::search::{Entry, Moved};
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
    let mut sheets = vec![sides(package, comparison), switching(comparison)];
    sheets.extend(comparison.map.as_ref().map(|map| letters(comparison, map)));
    writer::workbook(&sheets, &[])
}

/// Every so many points of a map, across and up, stand on its sheet.
const EVERY: (usize, usize) = (4, 3);

/// A map in letters.
fn letters(comparison: &Comparison, map: &Map) -> Sheet {
    let mut sheet = Sheet::new("Map");
    let columns: Vec<usize> = (0..map.xs.len()).step_by(EVERY.0).collect();
    sheet.columns(0, 0, 24.0);
    sheet.columns(1, columns.len() as u32, 7.0);
    sheet.text(0, 0, Style::Title, format!("Best option by preference and {}", map.up));
    sheet.paragraph(1, 0, columns.len() as u32, Style::Wrapped, map_words(map));
    let mut row = 3;
    for (i, option) in comparison.options.iter().enumerate() {
        sheet.text(row, 0, Style::Text, format!("{}: {option}", option_letter(i)));
        row += 1;
    }
    row += 1;
    let here = map.here_point();
    for j in (0..map.ys.len()).step_by(EVERY.1).rev() {
        let style = if map.up == Parameter::Elasticity { Style::Ratio } else { Style::Rate };
        sheet.number(row, 0, style, map.ys[j]);
        for (col, &i) in columns.iter().enumerate() {
            // The nearest of those shown.
            let near = |k: usize, at: usize, every: usize| k.abs_diff(at) * 2 <= every;
            let mark = if near(i, here.0, EVERY.0) && near(j, here.1, EVERY.1) { "*" } else { "" };
            sheet.text(row, col as u32 + 1, Style::Result, map.letter(i, j) + mark);
        }
        row += 1;
    }
    sheet.text(row, 0, Style::Heading, format!("{} up, preference across", map.up));
    for (col, &i) in columns.iter().enumerate() {
        sheet.number(row, col as u32 + 1, Style::Rate, map.xs[i]);
    }
    zero_lines(&mut sheet, comparison, map, row + 2);
    sheet
}

/// The zero lines of a map: the preference at which each option is worth nothing, by rows.
fn zero_lines(sheet: &mut Sheet, comparison: &Comparison, map: &Map, mut row: u32) {
    let worth =
        comparison.baseline.map_or("nothing".to_owned(), |i| format!("as much as {}", comparison.options[i]));
    sheet.text(
        row,
        0,
        Style::Section,
        format!("Zero lines: the preference at which an option is worth {worth}"),
    );
    row += 1;
    sheet.text(row, 0, Style::Heading, map.up.to_string());
    let shown_options: Vec<usize> =
        (0..comparison.options.len()).filter(|option| comparison.baseline != Some(*option)).collect();
    // Each option's column is as wide as three of the map's.
    for (k, &option) in shown_options.iter().enumerate() {
        let col = 3 * k as u32 + 1;
        sheet.paragraph(row, col, col + 2, Style::Heading, &comparison.options[option]);
    }
    for zero in map.zero.iter().rev() {
        row += 1;
        let style = if map.up == Parameter::Elasticity { Style::Ratio } else { Style::Rate };
        sheet.number(row, 0, style, map.ys[zero.up]);
        for (k, &option) in shown_options.iter().enumerate() {
            let moved = Moved::Parameter(Parameter::Preference);
            let mut texts: Vec<String> = zero.values[option].iter().map(|x| shown(&moved, *x)).collect();
            if zero.open[option] {
                texts.push("not settled".to_owned());
            }
            let text = if texts.is_empty() { "-".to_owned() } else { texts.join(", ") };
            let col = 3 * k as u32 + 1;
            sheet.paragraph(row, col, col + 2, Style::Instead, text);
        }
    }
}

/// What a map in letters shows.
pub fn map_words(map: &Map) -> String {
    format!(
        "The letter of the option with the highest net present value where preference and {} of {} are those of the column \
         and the row, all else as it is. In brackets: even the best is worth less than nothing. An equals sign: several are \
         best. A dot: no curve has those parts, or a value has no end. A star: nearest to the basis as stated.",
        map.up, map.basis
    )
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
        sheet.text(row, 1, Style::Wrapped, format!("below: {}", names(comparison, &change.from)));
        sheet.text(row, 2, Style::Wrapped, format!("above: {}", names(comparison, &change.to)));
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
            // Apart from the number before it.
            let text = format!("  {} to {}", shown(&entry.moved, low), shown(&entry.moved, high));
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
        "{} {}: below it {} {} best, above it {}",
        change.parameter,
        shown(&Moved::Parameter(change.parameter), change.at),
        names(comparison, &change.from),
        if change.from.len() == 1 { "is" } else { "are" },
        names(comparison, &change.to)
    )
}

/// The names of options that are equally good.
fn names(comparison: &Comparison, options: &[usize]) -> String {
    let names: Vec<&str> = options.iter().map(|i| comparison.options[*i].as_str()).collect();
    names.join(" and ")
}
