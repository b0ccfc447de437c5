//! The summary of a run over a shelf, as a workbook: what moved, which decisions flipped, what failed.

use std::path::Path;

use hence_core::CAUTION;

use crate::graft::finish_chart;
use crate::model::Workbook;
use crate::package::{Changes, Package};
use crate::problem::{Problem, Result, Severity};
use crate::report::{OptionReport, Status};
use crate::writer::{self, Sheet, Style};

use super::Record;
use super::flips::flips;
use super::seal::{inputs_of_summary, sealed_summary};

mod bridge;
mod movers;

/// The sheets' names.
const SUMMARY: &str = "Summary";
const BRIDGE: &str = "Bridge";
const MOVERS: &str = "Largest movers";
const FAILURES: &str = "Failures";
const WARNINGS: &str = "Warnings";
const AWAITING: &str = "Awaiting recalculation";

/// The summary workbook's bytes: the same records and place give the same bytes.
///
/// # Arguments
/// `records`: one a workbook, in the order of the run. `place`: where the summary will stand; links to outputs are
/// relative to it.
///
/// # Errors
/// No temporary file can be made, or a number cannot be written.
pub fn write(records: &[Record], place: &Path) -> Result<Vec<u8>> {
    let bridge = bridge::sheet(records, place);
    let mut sheets = vec![summary(records), bridge];
    sheets.extend(movers::sheet(records));
    let failed = |record: &&Record| record.status == Status::Failed;
    sheets.push(problems(
        FAILURES,
        "Workbooks that were not filled, and why",
        records.iter().filter(failed),
        Severity::Error,
    ));
    let read = records.iter().filter(|record| !failed(record));
    sheets.push(problems(
        WARNINGS,
        "What to know of the workbooks that were filled",
        read,
        Severity::Warning,
    ));
    sheets.extend(awaiting(records));
    let inputs = records.iter().map(|record| record.input.clone()).collect();
    sealed_summary(finished(writer::workbook(&sheets, &[])?)?, inputs)
}

/// The charts with the largest on top and their labels clear of the bars.
fn finished(bytes: Vec<u8>) -> Result<Vec<u8>> {
    let package = Package::from_bytes("summary.xlsx", bytes)?;
    let mut changes = Changes::default();
    for (n, finish) in (1..).zip(movers::finishes()) {
        let part = format!("xl/charts/chart{n}.xml");
        if let Some(xml) = package.part(&part)? {
            changes.replace.insert(part, finish_chart(&xml, &finish)?);
        }
    }
    package.write(&changes)
}

/// Formulas that show nothing until a spreadsheet program opens the output; no sheet where there are none.
fn awaiting(records: &[Record]) -> Option<Sheet> {
    let mut sheet = Sheet::new(AWAITING);
    sheet.columns(0, 0, 44.0);
    sheet.columns(1, 1, 100.0);
    sheet.text(0, 0, Style::Title, "Formulas that await recalculation");
    let note = "They rest on what was filled. A spreadsheet program computes them when it opens the output; previewers and \
                scripts find no value there, and hence takes none for it. With --settle, LibreOffice computes them at once.";
    sheet.paragraph(1, 0, 1, Style::Wrapped, note);
    sheet.text(3, 0, Style::Heading, "Workbook");
    sheet.text(3, 1, Style::Heading, "Cells");
    let mut row = 3;
    for record in records.iter().filter(|record| !record.report.awaiting.is_empty()) {
        row += 1;
        sheet.paragraph(row, 0, 0, Style::Wrapped, &record.input);
        sheet.paragraph(row, 1, 1, Style::Wrapped, record.report.awaiting.join("; "));
    }
    (row > 3).then_some(sheet)
}

/// Whether a file is a summary as hence left it, of a run over some of these inputs.
pub fn is_of_run(path: &Path, inputs: &[&str]) -> bool {
    let package = Package::read(path).and_then(|bytes| Package::from_bytes("summary", bytes));
    let own = package.ok().and_then(|package| inputs_of_summary(&package));
    own.is_some_and(|own| own.iter().all(|input| inputs.contains(&input.as_str())))
}

/// Whether a workbook is a summary, touched since or not: one has these sheets.
pub(super) fn is_one(book: &Workbook) -> bool {
    let names: Vec<&str> = book.sheets.iter().map(|sheet| sheet.name.as_str()).collect();
    names.starts_with(&[SUMMARY, BRIDGE]) && names.contains(&FAILURES) && names.contains(&WARNINGS)
}

fn summary(records: &[Record]) -> Sheet {
    let mut sheet = Sheet::new(SUMMARY);
    sheet.columns(0, 0, 44.0);
    sheet.columns(1, 1, 100.0);
    sheet.text(0, 0, Style::Title, "Workbooks redone");
    let count = |status: Status| records.iter().filter(|record| record.status == status).count();
    let flipped: Vec<(&Record, Vec<String>)> =
        records.iter().map(|record| (record, flips(record))).filter(|(_, flips)| !flips.is_empty()).collect();
    let lines = [
        ("Workbooks", records.len()),
        ("filled", count(Status::Done)),
        ("filled, with something wrong in them", count(Status::Problems)),
        ("not filled", count(Status::Failed)),
        ("in which a decision flips", flipped.len()),
        ("Held numbers that were wrong before", wrong(records).count()),
    ];
    let mut row = 2;
    for (label, n) in lines {
        sheet.text(row, 0, Style::Text, label);
        sheet.paragraph(row, 1, 1, Style::Wrapped, n.to_string());
        row += 1;
    }
    for (label, texts) in [("Their own bases", bases(records, false)), ("Valued on", bases(records, true))] {
        sheet.text(row, 0, Style::Text, label);
        sheet.paragraph(row, 1, 1, Style::Wrapped, texts.join("\n"));
        row += 1;
    }
    sheet.text(row, 0, Style::Text, "Made by");
    sheet.text(row, 1, Style::Text, format!("hence {}", env!("CARGO_PKG_VERSION")));
    row += 2;
    sheet.paragraph(row, 0, 1, Style::Strong, CAUTION);
    row += 2;
    sheet.text(row, 0, Style::Section, "Decisions that flip");
    sheet.text(row, 1, Style::Section, "How");
    let none = flipped.is_empty();
    if none {
        sheet.text(row + 1, 0, Style::Text, "None.");
    }
    for (record, flips) in flipped {
        row += 1;
        sheet.paragraph(row, 0, 0, Style::Wrapped, &record.input);
        sheet.paragraph(row, 1, 1, Style::Wrapped, flips.join("; "));
    }
    row += if none { 3 } else { 2 };
    wrong_before(&mut sheet, row, records);
    sheet.upright();
    sheet
}

/// The options whose net present value was not what their own basis gives.
fn wrong(records: &[Record]) -> impl Iterator<Item = (&Record, &OptionReport)> {
    let options =
        records.iter().flat_map(|record| record.report.options.iter().map(move |own| (record, own)));
    options.filter(|(_, option)| option.bridge.wrong)
}

/// Mistakes that were put right on the way, which a comparison of before and now would not tell.
fn wrong_before(sheet: &mut Sheet, mut row: u32, records: &[Record]) {
    sheet.text(row, 0, Style::Section, "Held numbers that were wrong before");
    sheet.text(row, 1, Style::Section, "Option, net present value held, right on its own basis");
    let first = row + 1;
    for (record, option) in wrong(records) {
        let (Some(held), Some(own)) = (option.bridge.held, option.bridge.declared) else { continue };
        row += 1;
        sheet.paragraph(row, 0, 0, Style::Wrapped, &record.input);
        let text = format!("{}: held {}, right {}", option.called(), plain(held), plain(own.npv));
        sheet.paragraph(row, 1, 1, Style::Wrapped, text);
    }
    if row < first {
        sheet.text(first, 0, Style::Text, "None.");
    }
}

/// A sum to the hundredth; a small one, which may be in millions, to the millionth.
fn plain(x: f64) -> String {
    if x.abs() >= 1000.0 {
        return format!("{x:.2}");
    }
    format!("{x:.6}").trim_end_matches('0').trim_end_matches('.').to_owned()
}

/// Every basis met, once, with the number of workbooks.
fn bases(records: &[Record], now: bool) -> Vec<String> {
    let mut met: Vec<(String, usize)> = Vec::new();
    for record in records {
        let mut own: Vec<&str> = record.report.options.iter().map(|option| basis(option, now)).collect();
        own.dedup();
        for line in own {
            match met.iter_mut().find(|(text, _)| text == line) {
                Some((_, n)) => *n += 1,
                None => met.push((line.to_owned(), 1)),
            }
        }
    }
    met.sort_by(|a, b| b.1.cmp(&a.1).then_with(|| a.0.cmp(&b.0)));
    met.into_iter().map(|(line, n)| format!("{line} ({n})")).collect()
}

/// The basis that an option was valued on, or that its workbook declares.
fn basis(option: &OptionReport, now: bool) -> &str {
    match &option.declared {
        Some(declared) if !now => declared,
        _ => &option.basis,
    }
}

/// A row a problem.
fn problems<'a>(
    name: &str,
    title: &str,
    records: impl Iterator<Item = &'a Record>,
    least: Severity,
) -> Sheet {
    let mut sheet = Sheet::new(name);
    for (col, width) in [40.0, 34.0, 16.0, 80.0, 60.0].into_iter().enumerate() {
        sheet.columns(col as u32, col as u32, width);
    }
    sheet.text(0, 0, Style::Title, title);
    for (col, text) in ["Workbook", "Where", "Code", "What", "What to do"].into_iter().enumerate() {
        sheet.text(2, col as u32, Style::Heading, text);
    }
    let mut row = 3;
    for record in records {
        let told = |problem: &&Problem| problem.severity >= least;
        for problem in record.report.problems.iter().filter(told) {
            sheet.paragraph(row, 0, 0, Style::Wrapped, &record.input);
            sheet.paragraph(row, 1, 1, Style::Wrapped, problem.place.to_string());
            sheet.text(row, 2, Style::Text, problem.code);
            sheet.paragraph(row, 3, 3, Style::Wrapped, &problem.message);
            sheet.paragraph(row, 4, 4, Style::Wrapped, problem.hint.as_deref().unwrap_or(""));
            row += 1;
        }
    }
    if row == 3 {
        sheet.text(row, 0, Style::Text, "None.");
    }
    sheet.freeze(3, 1);
    sheet.repeat(2, 2);
    sheet
}
