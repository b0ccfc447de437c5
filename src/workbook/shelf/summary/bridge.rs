//! The bridge: every option from what its workbook held to what it comes to now, step by step.

use std::path::Path;

use crate::decide::Stand;
use crate::patch::Cached;
use crate::problem::Severity;
use crate::references::Cell;
use crate::report::{OptionReport, Status};
use crate::tolerance::RELATIVE;
use crate::writer::{Sheet, Style};

use super::super::{Record, flips::flips, link};
use super::{BRIDGE, basis};

const HEADINGS: [(&str, f64); 18] = [
    ("Workbook", 40.0),
    ("Option", 24.0),
    ("NPV as held", 15.0),
    ("NPV recomputed on its own basis", 15.0),
    ("NPV at the base and in the prices asked for", 15.0),
    ("NPV now", 15.0),
    ("By arithmetic", 14.0),
    ("By base and prices", 14.0),
    ("By the basis", 14.0),
    ("Ratio before", 9.0),
    ("Ratio now", 9.0),
    ("Rank before", 8.0),
    ("Rank now", 8.0),
    ("Ranked by", 18.0),
    ("Its own basis", 26.0),
    ("Valued on", 26.0),
    ("Decisions that flip", 60.0),
    ("Warnings", 10.0),
];
/// The row of headings.
const TOP: u32 = 3;
/// Where the four values begin, and the three steps between them.
const VALUES: u32 = 2;
const STEPS: u32 = 6;

pub(super) fn sheet(records: &[Record], place: &Path) -> Sheet {
    let mut sheet = Sheet::new(BRIDGE);
    for (col, (_, width)) in HEADINGS.iter().enumerate() {
        sheet.columns(col as u32, col as u32, *width);
    }
    sheet.text(0, 0, Style::Title, "From what the workbooks held to what their options come to now");
    let note = "In each workbook's own unit; over its baseline where it has one. A step is the difference of the values \
                beside it, 0 where that is rounding alone, and blank where one of the two is not known.";
    sheet.text(1, 0, Style::Text, note);
    for (col, (text, _)) in HEADINGS.iter().enumerate() {
        sheet.text(TOP, col as u32, Style::Heading, text);
    }
    let mut row = TOP;
    for record in records.iter().filter(|record| record.status != Status::Failed) {
        let flips = flips(record).join("; ");
        let warnings = record.report.problems.iter().filter(|p| p.severity == Severity::Warning).count();
        for (i, option) in record.report.options.iter().enumerate() {
            row += 1;
            workbook(&mut sheet, row, record, place);
            sheet.text(row, 1, Style::Text, option.called());
            values(&mut sheet, row, option);
            standing(&mut sheet, row, option);
            if i == 0 {
                sheet.paragraph(row, 16, 16, Style::Wrapped, &flips);
                sheet.number(row, 17, Style::Year, warnings as f64);
            }
        }
    }
    sheet.freeze(TOP + 1, 2);
    sheet.repeat(TOP, TOP);
    sheet
}

/// The workbook's name, which opens its output.
fn workbook(sheet: &mut Sheet, row: u32, record: &Record, place: &Path) {
    let output = record.output.as_deref().map(Path::new);
    match output.and_then(|output| link::formula(place, output, &record.input)) {
        Some(formula) => sheet.formula(row, 0, Style::Text, formula, Cached::Text(record.input.clone())),
        None => sheet.text(row, 0, Style::Text, &record.input),
    }
}

fn values(sheet: &mut Sheet, row: u32, option: &OptionReport) {
    let bridge = &option.bridge;
    let npv = |stand: Option<Stand>| stand.map(|stand| stand.npv);
    let values = [bridge.held, npv(bridge.declared), npv(bridge.moved), Some(bridge.now.npv)];
    for (col, value) in (VALUES..).zip(values) {
        if let Some(value) = value {
            sheet.number(row, col, Style::Money, value);
        }
    }
    for (step, pair) in (0..).zip(values.windows(2)) {
        if let [Some(from), Some(to)] = *pair {
            let at = |col| Cell { row, col }.to_string();
            let difference = format!("{}-{}", at(VALUES + step + 1), at(VALUES + step));
            let gross = option.absolute.pv_benefits.abs() + option.absolute.pv_costs.abs();
            let dust = RELATIVE * gross.max(from.abs()).max(to.abs());
            // Two digits are enough for a tolerance, and the same on every machine.
            let formula = format!("IF(ABS({difference})<={dust:.1e},0,{difference})");
            let moved = if (to - from).abs() <= dust { 0.0 } else { to - from };
            sheet.formula(row, STEPS + step, Style::Money, formula, Cached::Number(moved));
        }
    }
}

fn standing(sheet: &mut Sheet, row: u32, option: &OptionReport) {
    let (before, now) = (option.bridge.declared, option.bridge.now);
    let ratios = [before.and_then(|stand| stand.ratio), now.ratio];
    for (col, ratio) in (9..).zip(ratios) {
        if let Some(ratio) = ratio {
            sheet.number(row, col, Style::Ratio, ratio);
        }
    }
    let ranks = [before.and_then(|stand| stand.rank), now.rank];
    for (col, rank) in (11..).zip(ranks) {
        if let Some(rank) = rank {
            sheet.number(row, col, Style::Year, rank as f64);
        }
    }
    sheet.text(row, 13, Style::Text, option.decide.words());
    sheet.paragraph(row, 14, 14, Style::Wrapped, basis(option, false));
    sheet.paragraph(row, 15, 15, Style::Wrapped, basis(option, true));
}
