//! The charts sheet: the factor curve, present value by era, and net present value against a flat rate.

use hence_core::{Basis, Eras, Where};

use super::{AuditInput, block_basis};
use crate::clock::base_year;
use crate::formulas::side;
use crate::graft::{ChartFinish, Legend};
use crate::layout::Layout;
use crate::references::{Cell, Range, SheetRange};
use crate::valuation::worth_on;
use crate::writer::{Chart, ChartKind, Series, Sheet, Style};

/// Columns and rows of a chart.
const SIZE: (u32, u32) = (7, 19);
/// The rows at which the charts stand, and the first row of the data below them.
const TOPS: [u32; 3] = [3, 23, 43];
const DATA: u32 = 64;
/// Flat rates from 0% to 10% by 0.5%.
const RATES: usize = 21;

/// Makes the sheet and what its charts need to be finished.
pub(super) fn sheet(input: &AuditInput<'_>, layout: &Layout) -> (Sheet, Vec<ChartFinish>) {
    let mut sheet = Sheet::new(&input.names.charts);
    let options = input.appraisal.choices.len() as u32;
    sheet.columns(0, 0, 22.0);
    sheet.columns(1, options.max(7), 16.0);
    sheet.upright();
    sheet.text(0, 0, Style::Title, "Audit charts");
    sheet.text(1, 0, Style::Text, "The numbers behind each chart stand below.");
    let mut finishes = Vec::new();
    let mut row = DATA;
    factor_curve(&mut sheet, input, layout, &mut finishes);
    eras(&mut sheet, input, &mut row, &mut finishes);
    flat_rates(&mut sheet, input, &mut row, &mut finishes);
    (sheet, finishes)
}

fn finish(title: &str, x: &str, y: &str, x_format: &str, y_format: &str) -> ChartFinish {
    ChartFinish {
        title: Some(title.to_owned()),
        x_title: Some(x.to_owned()),
        y_title: Some(y.to_owned()),
        x_format: Some(x_format.to_owned()),
        y_format: Some(y_format.to_owned()),
        legend: Some(Legend::Bottom),
        size: Some(SIZE),
        ..ChartFinish::default()
    }
}

fn factor_curve(sheet: &mut Sheet, input: &AuditInput<'_>, layout: &Layout, finishes: &mut Vec<ChartFinish>) {
    let title = "Discount factor by year";
    let series = layout.blocks.iter().enumerate().map(|(k, block)| {
        let basis = block_basis(input, block).canonical();
        let whose = layout.whose(k, input.appraisal);
        let name = if layout.blocks.len() == 1 { basis } else { format!("{whose}: {basis}") };
        let y = block.stream.map_or_else(
            || layout.factors(block.choice),
            |stream| layout.stream_factors(block.choice, stream),
        );
        Series { name, x: layout.offsets(block.choice), y }
    });
    let chart = Chart { kind: ChartKind::Lines, title: title.to_owned(), series: series.collect() };
    if !chart.series.is_empty() {
        sheet.chart(TOPS[0], 0, chart);
        finishes.push(finish(title, "Offset from the base (years)", "Factor", "0", "0.0"));
    }
}

fn eras(sheet: &mut Sheet, input: &AuditInput<'_>, row: &mut u32, finishes: &mut Vec<ChartFinish>) {
    let title = "Net present value by era";
    let edges = Eras::default().0;
    sheet.text(*row, 0, Style::Section, title);
    let words = "Net present value of the flows in each block of years from the base; the edge year belongs to \
                 the earlier block. What follows the last year is not in it.";
    sheet.paragraph(*row + 1, 0, 6, Style::Wrapped, words);
    let top = *row + 3;
    sheet.text(top - 1, 0, Style::Heading, "Era");
    for k in 0..=edges.len() {
        sheet.text(top + k as u32, 0, Style::Text, era_words(&edges, k));
    }
    for (c, outcome) in input.outcomes.iter().enumerate() {
        let col = c as u32 + 1;
        sheet.text(top - 1, col, Style::Heading, &input.appraisal.choices[c].name);
        let mut totals = vec![0.0; edges.len() + 1];
        for (i, t) in outcome.offsets.iter().enumerate() {
            let sides = input.appraisal.choices[c].streams.iter().map(|stream| side(stream.kind));
            totals[edges.iter().filter(|&&edge| *t > edge).count()] += outcome.net_value(i, sides);
        }
        for (k, total) in totals.into_iter().enumerate() {
            sheet.number(top + k as u32, col, Style::Money, total);
        }
    }
    table_chart(sheet, input, (TOPS[1], top, edges.len() as u32 + 1), ChartKind::Columns, title, None);
    finishes.push(finish(title, "Years from the base", "Net present value", "General", "#,##0"));
    *row = top + edges.len() as u32 + 3;
}

/// A block of years in words, from the edges of eras.
pub(crate) fn era_words(edges: &[f64], k: usize) -> String {
    match (k.checked_sub(1).map(|i| edges[i]), edges.get(k)) {
        (None, Some(to)) => format!("to year {to}"),
        (Some(from), Some(to)) => format!("after {from} to {to}"),
        (Some(from), None) => format!("after year {from}"),
        (None, None) => "all years".to_owned(),
    }
}

/// A chart over a table whose labels or numbers stand in column A and whose columns are options.
fn table_chart(
    sheet: &mut Sheet,
    input: &AuditInput<'_>,
    (at, top, rows): (u32, u32, u32),
    kind: ChartKind,
    title: &str,
    without: Option<usize>,
) {
    let column = |col: u32| SheetRange {
        sheet: input.names.charts.clone(),
        range: Range { first: Cell { row: top, col }, last: Cell { row: top + rows - 1, col } },
    };
    let options = input.appraisal.choices.iter().enumerate().filter(|(c, _)| Some(*c) != without);
    let series = options.map(|(c, choice)| Series {
        name: choice.name.clone(),
        x: column(0),
        y: column(c as u32 + 1),
    });
    sheet.chart(at, 0, Chart { kind, title: title.to_owned(), series: series.collect() });
}

fn flat_rates(sheet: &mut Sheet, input: &AuditInput<'_>, row: &mut u32, finishes: &mut Vec<ChartFinish>) {
    let over = input.outcomes.iter().any(|o| o.increment.is_some());
    // The baseline's own increment is nothing: it is no line of the chart.
    let flat = input.appraisal.baseline.filter(|_| over);
    let title = if over {
        "Net present value over the baseline, by flat rate"
    } else {
        "Net present value by flat rate"
    };
    sheet.text(*row, 0, Style::Section, title);
    let top = *row + 2;
    sheet.text(top - 1, 0, Style::Heading, "Flat rate");
    let rates: Vec<f64> = (0..RATES).map(|k| k as f64 / 200.0).collect();
    let mut table: Vec<Vec<Option<f64>>> =
        (0..input.outcomes.len()).map(|c| rates.iter().map(|&r| npv_at(input, c, r)).collect()).collect();
    if let Some(base) = input.appraisal.baseline {
        let baseline = table[base].clone();
        for (c, column) in
            table.iter_mut().enumerate().filter(|(c, _)| input.outcomes[*c].increment.is_some())
        {
            for (value, less) in column.iter_mut().zip(&baseline) {
                *value = if c == base { value.map(|_| 0.0) } else { value.zip(*less).map(|(a, b)| a - b) };
            }
        }
    }
    for (k, rate) in rates.iter().enumerate() {
        sheet.number(top + k as u32, 0, Style::Rate, *rate);
    }
    for (c, column) in table.iter().enumerate() {
        let name = &input.appraisal.choices[c].name;
        sheet.text(top - 1, c as u32 + 1, Style::Heading, name);
        for (k, value) in column.iter().enumerate() {
            if let Some(x) = value.filter(|x| x.is_finite()) {
                sheet.number(top + k as u32, c as u32 + 1, Style::Money, x);
            }
        }
    }
    table_chart(sheet, input, (TOPS[2], top, RATES as u32), ChartKind::Lines, title, flat);
    let range = Some((0.0, 0.1));
    let base = finish(title, "Flat rate a year", "Net present value", "0%", "#,##0");
    finishes.push(ChartFinish { markers: true, x_range: range, ..base });
    *row = top + RATES as u32 + 1;
    for (c, column) in table.iter().enumerate().filter(|(c, _)| flat != Some(*c)) {
        let text = declared(input, c, &rates, column);
        sheet.paragraph(*row, 0, 6, Style::Wrapped, text);
        *row += 1;
    }
}

/// Where the declared basis falls among the flat rates.
fn declared(input: &AuditInput<'_>, c: usize, rates: &[f64], column: &[Option<f64>]) -> String {
    let npv = input.outcomes[c].totals().npv;
    let name = &input.appraisal.choices[c].name;
    let within = |pair: &[Option<f64>]| match pair {
        [Some(a), Some(b)] => a != b && (a - npv) * (b - npv) <= 0.0,
        _ => false,
    };
    let places: Vec<String> = column
        .windows(2)
        .zip(rates.windows(2))
        .filter(|(pair, _)| within(pair))
        .map(|(_, r)| format!("{:.1}% and {:.1}%", r[0] * 100.0, r[1] * 100.0))
        .collect();
    let falls = match places.as_slice() {
        [] => "no flat rate from 0% to 10% gives the same".to_owned(),
        places => format!("the same as at a flat rate between {}", places.join(", or between ")),
    };
    format!("{name}: on its declared basis {}; {falls}.", thousands(npv))
}

/// A number with commas between thousands.
pub(super) fn thousands(x: f64) -> String {
    let digits = format!("{:.0}", x.abs());
    let mut out = String::new();
    for (i, c) in digits.chars().enumerate() {
        if i > 0 && (digits.len() - i).is_multiple_of(3) {
            out.push(',');
        }
        out.push(c);
    }
    if x < 0.0 && digits != "0" { format!("-{out}") } else { out }
}

/// Net present value of an option at a flat yearly rate; none where a tail does not converge.
fn npv_at(input: &AuditInput<'_>, c: usize, rate: f64) -> Option<f64> {
    let choice = &input.appraisal.choices[c];
    let at = Where { base_year: base_year(&choice.base.value), length: None };
    let curve = Basis::from_rate(rate).ok()?.curve(&at).ok()?;
    worth_on(input.appraisal, choice, &input.outcomes[c], &curve).ok().map(|worth| worth.npv)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn eras_have_words() {
        assert_eq!(era_words(&[30.0, 100.0], 0), "to year 30");
        assert_eq!(era_words(&[30.0, 100.0], 1), "after 30 to 100");
        assert_eq!(era_words(&[30.0, 100.0], 2), "after year 100");
        assert_eq!(era_words(&[], 0), "all years");
    }

    #[test]
    fn thousands_are_set_apart() {
        assert_eq!(thousands(-1_234_567.6), "-1,234,568");
        assert_eq!(thousands(999.0), "999");
        assert_eq!(thousands(-0.2), "0");
    }
}
