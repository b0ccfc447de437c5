//! The sheet Discounting: offsets, forward rates and factors by year, and the present values.

use super::{AuditInput, block_basis};
use crate::adjust;
use crate::appraisal::{Label, StreamKind};
use crate::formulas::{NO_ANNUAL, no_ratio, one, pv_expression, refer, sum_expression};
use crate::layout::{Column, DATA_ROW, HEADING_ROW, LabelValue, Layout, Series, label_value};
use crate::patch::Cached;
use crate::references::{Cell, SheetRange};
use crate::writer::{Sheet, Style};

const BASIS_ROW: u32 = 2;
const WORDS_ROW: u32 = 3;
const TIMING_ROW: u32 = 4;

/// Makes the sheet.
pub(super) fn sheet(input: &AuditInput<'_>, layout: &Layout) -> Sheet {
    let mut sheet = Sheet::new(&layout.names.discounting);
    for block in &layout.blocks {
        sheet.columns(block.column, block.column + 3, 12.0);
        sheet.columns(block.column + 4, block.column + 4, 3.0);
    }
    for (column, width) in [
        (Column::Option, 18.0),
        (Column::Stream, 42.0),
        (Column::Side, 10.0),
        (Column::Undiscounted, 16.0),
        (Column::Tail, 16.0),
        (Column::Value, 20.0),
    ] {
        let col = layout.table + column as u32;
        sheet.columns(col, col, width);
    }
    sheet.text(0, 0, Style::Title, "Discounting");
    let note = "The filled cells refer to this sheet: keep it. ";
    sheet.text(1, 0, Style::Text, format!("{note}{}", super::CAUTION));
    for k in 0..layout.blocks.len() {
        block(&mut sheet, input, layout, k);
    }
    for series in &layout.series {
        multipliers(&mut sheet, input, series);
    }
    table(&mut sheet, input, layout);
    sheet.freeze(DATA_ROW, 0);
    sheet.repeat(BASIS_ROW, HEADING_ROW);
    sheet
}

fn block(sheet: &mut Sheet, input: &AuditInput<'_>, layout: &Layout, k: usize) {
    let block = &layout.blocks[k];
    let choice = &input.appraisal.choices[block.choice];
    let outcome = &input.outcomes[block.choice];
    let basis = block_basis(input, block);
    let (factors, forward, timing) = match block.stream.and_then(|s| outcome.streams[s].own.as_ref()) {
        Some(own) => (&own.factors, &own.forward, &own.timing_sentence),
        None => (&outcome.factors, &outcome.forward, &outcome.timing_sentence),
    };
    let (first, last) = (block.column, block.column + 3);
    let canonical = format!("Basis: {} ({})", basis.canonical(), layout.whose(k, input.appraisal));
    sheet.paragraph(BASIS_ROW, first, last, Style::Strong, canonical);
    sheet.paragraph(WORDS_ROW, first, last, Style::Wrapped, basis.words());
    let timing = format!("Base {}; {}.", outcome.base_words, timing.trim_end_matches('.'));
    sheet.paragraph(TIMING_ROW, first, last, Style::Wrapped, timing);
    for (i, heading) in ["Year", "Offset (years)", "Forward rate", "Factor"].iter().enumerate() {
        sheet.text(HEADING_ROW, first + i as u32, Style::Heading, heading);
    }
    let labels = &input.appraisal.axes[choice.axis].labels;
    for (i, label) in labels.iter().enumerate() {
        let row = DATA_ROW + i as u32;
        put_label(sheet, input, label, (row, first));
        sheet.number(row, first + 1, Style::Offset, outcome.offsets[i]);
        if let Some(rate) = forward[i] {
            sheet.number(row, first + 2, Style::Rate, rate);
        }
        sheet.number(row, first + 3, Style::Factor, factors[i]);
    }
}

fn put_label(sheet: &mut Sheet, input: &AuditInput<'_>, label: &Label, (row, col): (u32, u32)) {
    match label_value(label, input.appraisal.date1904) {
        LabelValue::Number(x, true) => sheet.number(row, col, Style::Date, x),
        LabelValue::Number(x, false) if x.fract() == 0.0 => sheet.number(row, col, Style::Year, x),
        LabelValue::Number(x, false) => sheet.number(row, col, Style::Offset, x),
        LabelValue::Text(text) => sheet.text(row, col, Style::Text, text),
    }
}

/// What multiplies flows year by year.
fn multipliers(sheet: &mut Sheet, input: &AuditInput<'_>, series: &Series) {
    let (first, last) = (series.column, series.column + 1);
    sheet.columns(first, last, 18.0);
    sheet.columns(last + 1, last + 1, 3.0);
    let (c, s) = series.users[0];
    let choice = &input.appraisal.choices[c];
    sheet.paragraph(BASIS_ROW, first, last, Style::Strong, format!("Multiplies {}", users(input, series)));
    sheet.paragraph(
        WORDS_ROW,
        first,
        last,
        Style::Wrapped,
        adjust::multiplier_words(&choice.streams[s], choice, &input.outcomes[c]),
    );
    for (i, heading) in ["Year", "Multiplier"].iter().enumerate() {
        sheet.text(HEADING_ROW, first + i as u32, Style::Heading, heading);
    }
    let labels = &input.appraisal.axes[choice.axis].labels;
    let values = input.outcomes[c].streams[s].multipliers.iter().flatten();
    for (i, (label, value)) in labels.iter().zip(values).enumerate() {
        let row = DATA_ROW + i as u32;
        put_label(sheet, input, label, (row, first));
        sheet.number(row, last, Style::Factor, *value);
    }
}

/// The streams of a series in words, with their options where there are several.
fn users(input: &AuditInput<'_>, series: &Series) -> String {
    let many = input.appraisal.choices.len() > 1;
    let name = |&(c, s): &(usize, usize)| {
        let choice = &input.appraisal.choices[c];
        let stream = &choice.streams[s].name;
        if many { format!("{stream} ({})", choice.name) } else { stream.clone() }
    };
    series.users.iter().map(name).collect::<Vec<_>>().join(", ")
}

/// The side of a stream in words.
pub(super) fn side_words(kind: StreamKind) -> &'static str {
    match kind {
        StreamKind::Cost => "cost",
        StreamKind::Benefit => "benefit",
        StreamKind::Flow => "net flow",
        StreamKind::Damage => "damage",
    }
}

fn table(sheet: &mut Sheet, input: &AuditInput<'_>, layout: &Layout) {
    let col = |column: Column| layout.table + column as u32;
    let last = col(Column::Value);
    sheet.paragraph(BASIS_ROW, layout.table, last, Style::Strong, "Present values");
    let words = "Formulas over the cells of the workbook and the factors. Costs are positive; benefits hold net \
                 flows, less damages. What follows the last year is a constant, and part of the present value.";
    sheet.paragraph(WORDS_ROW, layout.table, last, Style::Wrapped, words);
    for (column, heading) in [
        (Column::Option, "Option"),
        (Column::Stream, "Stream"),
        (Column::Side, "Side"),
        (Column::Undiscounted, "Undiscounted total"),
        (Column::Tail, "After the last year"),
        (Column::Value, "Present value"),
    ] {
        sheet.text(HEADING_ROW, col(column), Style::Heading, heading);
    }
    for c in 0..input.appraisal.choices.len() {
        streams(sheet, input, layout, c);
        sums(sheet, input, layout, c);
    }
}

fn streams(sheet: &mut Sheet, input: &AuditInput<'_>, layout: &Layout, c: usize) {
    let home = sheet.name.clone();
    let choice = &input.appraisal.choices[c];
    let outcome = &input.outcomes[c];
    for (s, stream) in choice.streams.iter().enumerate() {
        let row = layout.rows[c].streams[s];
        let at = |column: Column| layout.cell(row, column).col;
        let result = &outcome.streams[s];
        sheet.text(row, at(Column::Option), Style::Text, &choice.name);
        sheet.text(row, at(Column::Stream), Style::Text, &stream.name);
        sheet.text(row, at(Column::Side), Style::Text, side_words(stream.kind));
        let sum = sum_expression(input.appraisal, layout, c, s, &home);
        sheet.formula(row, at(Column::Undiscounted), Style::Money, sum, Cached::Number(result.undiscounted));
        if stream.tail.is_some() {
            sheet.number(row, at(Column::Tail), Style::Money, result.pv_tail);
        }
        let (a, o) = (input.appraisal, input.outcomes);
        match pv_expression(a, o, layout, c, s, &home) {
            Some(text) => {
                sheet.formula(row, at(Column::Value), Style::Money, text, Cached::Number(result.pv))
            }
            None => sheet.number(row, at(Column::Value), Style::Money, result.pv),
        }
    }
}

fn sums(sheet: &mut Sheet, input: &AuditInput<'_>, layout: &Layout, c: usize) {
    let outcome = &input.outcomes[c];
    let rows = &layout.rows[c];
    let value = |row| layout.cell(row, Column::Value);
    let undiscounted = |row| layout.cell(row, Column::Undiscounted);
    let line = |sheet: &mut Sheet, row: u32, name: &str| {
        sheet.text(row, layout.cell(row, Column::Option).col, Style::Text, &input.appraisal.choices[c].name);
        sheet.text(row, layout.cell(row, Column::Stream).col, Style::Strong, name);
    };
    let put = |sheet: &mut Sheet, cell: Cell, style, text: String, result: f64| {
        sheet.formula(cell.row, cell.col, style, text, Cached::Number(result));
    };
    let totals = &outcome.absolute;
    let sums = &rows.absolute;
    line(sheet, sums.costs, "Costs");
    line(sheet, sums.benefits, "Benefits");
    line(sheet, sums.net, "Net present value");
    for (column, costs, benefits) in [
        (Column::Undiscounted, totals.costs, totals.benefits),
        (Column::Value, totals.pv_costs, totals.pv_benefits),
    ] {
        let at = |row| layout.cell(row, column);
        let net = if column == Column::Value { totals.npv } else { benefits - costs };
        put(sheet, at(sums.costs), Style::Total, sum_of(input, layout, c, column, true), costs);
        put(sheet, at(sums.benefits), Style::Money, sum_of(input, layout, c, column, false), benefits);
        let text = format!("{}-{}", at(sums.benefits), at(sums.costs));
        put(sheet, at(sums.net), Style::Total, text, net);
    }
    if let (Some(over), Some(baseline), Some(increment)) =
        (&rows.increment, input.appraisal.baseline, &outcome.increment)
    {
        let base = &layout.rows[baseline].absolute;
        for (row, from, less, name, plain, discounted) in [
            (
                over.costs,
                sums.costs,
                base.costs,
                "Costs over the baseline",
                increment.costs,
                increment.pv_costs,
            ),
            (
                over.benefits,
                sums.benefits,
                base.benefits,
                "Benefits over the baseline",
                increment.benefits,
                increment.pv_benefits,
            ),
            (
                over.net,
                sums.net,
                base.net,
                "Net present value over the baseline",
                increment.benefits - increment.costs,
                increment.npv,
            ),
        ] {
            line(sheet, row, name);
            let text = format!("{}-{}", undiscounted(from), undiscounted(less));
            put(sheet, undiscounted(row), Style::Money, text, plain);
            put(sheet, value(row), Style::Money, format!("{}-{}", value(from), value(less)), discounted);
        }
    }
    measures(sheet, input, layout, c, &line);
}

fn measures(
    sheet: &mut Sheet,
    input: &AuditInput<'_>,
    layout: &Layout,
    c: usize,
    line: &dyn Fn(&mut Sheet, u32, &str),
) {
    let outcome = &input.outcomes[c];
    let rows = &layout.rows[c];
    let used = layout.sums(c);
    let value = |row| layout.cell(row, Column::Value);
    let (annuity, annual, ratio) = (value(rows.annuity), value(rows.annual), value(rows.ratio));
    let years = outcome.service_years;
    line(sheet, annuity.row, &format!("Sum of factors of service years 1 to {years}"));
    sheet.number(annuity.row, annuity.col, Style::Factor, outcome.annuity);
    line(sheet, annual.row, "Annual equivalent");
    let text = format!("IF({annuity}>0,{}/{annuity},\"{NO_ANNUAL}\")", value(used.net));
    let result = outcome.totals().annual.map_or_else(|| Cached::Text(NO_ANNUAL.into()), Cached::Number);
    let shown =
        |result: &Cached, style| if matches!(result, Cached::Text(_)) { Style::Wrapped } else { style };
    sheet.formula(annual.row, annual.col, shown(&result, Style::Money), text, result);
    line(sheet, ratio.row, "Benefit-cost ratio");
    let (costs, benefits, none) = (value(used.costs), value(used.benefits), no_ratio(outcome));
    let text = format!("IF({costs}>0,{benefits}/{costs},\"{none}\")");
    let result = outcome.totals().ratio.map_or_else(|| Cached::Text(none.into()), Cached::Number);
    sheet.formula(ratio.row, ratio.col, shown(&result, Style::Ratio), text, result);
}

/// The sum of an option's costs, or of its benefits and net flows less damages.
fn sum_of(input: &AuditInput<'_>, layout: &Layout, c: usize, column: Column, costs: bool) -> String {
    let mut text = String::new();
    for (stream, &row) in input.appraisal.choices[c].streams.iter().zip(&layout.rows[c].streams) {
        let (counts, minus) = match stream.kind {
            StreamKind::Cost => (costs, false),
            StreamKind::Benefit | StreamKind::Flow => (!costs, false),
            StreamKind::Damage => (!costs, true),
        };
        if counts {
            if minus || !text.is_empty() {
                text.push(if minus { '-' } else { '+' });
            }
            text.push_str(&layout.cell(row, column).to_string());
        }
    }
    if text.is_empty() { "0".to_owned() } else { text }
}

/// A cell of the table as another sheet refers to it.
pub(super) fn table_ref(home: &str, layout: &Layout, row: u32, column: Column) -> String {
    let range = one(layout.cell(row, column));
    refer(home, &SheetRange { sheet: layout.names.discounting.clone(), range })
}
