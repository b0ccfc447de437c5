//! The options that move most, with a chart of each measure.

use crate::graft::ChartFinish;
use crate::references::{Cell, Range, SheetRange};
use crate::report::OptionReport;
use crate::writer::{Chart, ChartKind, Series, Sheet, Style};

use super::super::Record;
use super::MOVERS;

/// How many stand in a chart.
const MOST: usize = 12;
/// Rows that a chart covers.
const CHART: u32 = 18;
/// The column of shares.
const SHARE: u32 = 4;
/// Of the largest value in a workbook: a share of less says little, and its bar would squash all others.
const LEAST: f64 = 0.01;

/// One option that moves.
struct Mover {
    label: String,
    before: f64,
    now: f64,
    /// Whether the value before is so near to nothing that a share of it says little.
    small: bool,
}

impl Mover {
    fn change(&self) -> f64 {
        self.now - self.before
    }

    fn share(&self) -> f64 {
        self.change() / self.before.abs()
    }
}

/// The sheet; none where nothing moves.
pub(super) fn sheet(records: &[Record]) -> Option<Sheet> {
    let movers: Vec<Mover> = records
        .iter()
        .flat_map(|record| {
            let options = &record.report.options;
            let largest = options.iter().filter_map(before).map(f64::abs).fold(0.0, f64::max);
            options.iter().filter_map(move |option| mover(record, option, largest))
        })
        .collect();
    if movers.is_empty() {
        return None;
    }
    let mut sheet = Sheet::new(MOVERS);
    for (col, width) in [52.0, 16.0, 16.0, 16.0, 12.0].into_iter().enumerate() {
        sheet.columns(col as u32, col as u32, width);
    }
    sheet.text(0, 0, Style::Title, "Options whose net present value moves most");
    let note = "From the workbook's own basis (where it states none, from what its cell held) to now. Sums of money \
                are in each workbook's own unit, so that shares compare better across workbooks. Left out of the shares are \
                options whose value before is below 1% of the largest in their workbook.";
    sheet.paragraph(1, 0, 4, Style::Wrapped, note);
    let row =
        part(&mut sheet, 3, "By share of the value before", &movers, Mover::share, (SHARE, "Change, share"));
    part(&mut sheet, row, "By amount", &movers, Mover::change, (3, "Change"));
    Some(sheet)
}

/// What the charts still lack, by their order.
pub(super) fn finishes() -> [ChartFinish; 2] {
    [("By share of the value before", "0%"), ("By amount", "#,##0")].map(|(title, format)| ChartFinish {
        title: Some(title.to_owned()),
        y_format: Some(format.to_owned()),
        tornado: true,
        ..ChartFinish::default()
    })
}

fn before(option: &OptionReport) -> Option<f64> {
    option.bridge.declared.map(|stand| stand.npv).or(option.bridge.held)
}

fn mover(record: &Record, option: &OptionReport, largest: f64) -> Option<Mover> {
    let (before, now) = (before(option)?, option.bridge.now.npv);
    (before != now && before != 0.0).then(|| Mover {
        label: format!("{}: {}", record.input, option.called()),
        before,
        now,
        small: before.abs() < LEAST * largest,
    })
}

/// A table of the largest by a measure with its chart; gives the next free row.
fn part(
    sheet: &mut Sheet,
    mut row: u32,
    title: &str,
    movers: &[Mover],
    measure: fn(&Mover) -> f64,
    (charted, name): (u32, &str),
) -> u32 {
    sheet.text(row, 0, Style::Section, title);
    row += 1;
    for (col, text) in ["Workbook and option", "Before", "Now", "Change", "Share"].into_iter().enumerate() {
        sheet.text(row, col as u32, Style::Heading, text);
    }
    let mut order: Vec<&Mover> = movers.iter().collect();
    order.retain(|mover| charted != SHARE || !mover.small);
    order.sort_by(|a, b| measure(b).abs().total_cmp(&measure(a).abs()));
    order.truncate(MOST);
    let first = row + 1;
    for mover in &order {
        row += 1;
        sheet.text(row, 0, Style::Text, &mover.label);
        sheet.number(row, 1, Style::Money, mover.before);
        sheet.number(row, 2, Style::Money, mover.now);
        sheet.number(row, 3, Style::Money, mover.change());
        sheet.number(row, 4, Style::Rate, mover.share());
    }
    if order.is_empty() {
        sheet.text(row + 1, 0, Style::Text, "None.");
        return row + 3;
    }
    let column = |col: u32| SheetRange {
        sheet: MOVERS.to_owned(),
        range: Range { first: Cell { row: first, col }, last: Cell { row, col } },
    };
    let series = Series { name: name.to_owned(), x: column(0), y: column(charted) };
    let chart = Chart { kind: ChartKind::Bars, title: title.to_owned(), series: vec![series] };
    sheet.chart(row + 2, 0, chart);
    row + 2 + CHART
}
