//! Streams by their effect on the net present value, live, with a bar chart for each option.

use super::super::charts::thousands;
use super::super::discounting::{side_words, table_ref};
use super::{NO_VALUE, Page};
use crate::appraisal::Stream;
use crate::formulas::side;
use crate::graft::{ChartFinish, Legend};
use crate::layout::Column;
use crate::patch::Cached;
use crate::references::{Cell, Range, SheetRange};
use crate::writer::{Chart, ChartKind, Series, Style};

/// How much less or more of a stream the table shows.
const SHARE: f64 = 0.1;
/// The most streams in a chart, and the most charts.
const BARS: usize = 12;
const CHARTS: usize = 6;
/// Columns of a chart, and rows: some for each bar, some for the rest.
const WIDTH: u32 = 6;
const HEIGHT: (u32, u32) = (7, 2);

/// A stream that moves the net present value of an option.
struct Mover {
    label: String,
    kind: &'static str,
    /// Its present value with its sign in the net, as formula and number.
    signed: (String, f64),
}

impl Page<'_> {
    pub(super) fn streams(&mut self) {
        let over = self.input.appraisal.baseline.is_some();
        let mut words = "What a tenth less or more of each stream does to the net present value, largest first, and \
                         how many times the stream would have to be as large for the option to come out at zero: \
                         below 0, it would have to turn into its opposite."
            .to_owned();
        if over {
            words.push_str(" Over the baseline its streams count, too, the other way round.");
        }
        self.section("Streams by their effect", &words);
        let mut tables = Vec::new();
        for c in 0..self.input.appraisal.choices.len() {
            if self.input.appraisal.baseline != Some(c) {
                tables.push((c, self.table(c)));
            }
        }
        for (c, rows) in tables.into_iter().take(CHARTS) {
            self.bars(c, rows);
        }
    }

    /// Every stream of an option, and of the baseline where it is held against one.
    fn movers(&self, c: usize) -> Vec<Mover> {
        let appraisal = self.input.appraisal;
        let home = &self.input.names.sensitivity;
        let part = |c: usize, s: usize| {
            let stream = &appraisal.choices[c].streams[s];
            let sign = side(stream.kind);
            let row = self.layout.rows[c].streams[s];
            let cell = table_ref(home, self.layout, row, Column::Value);
            (sign, cell, sign * self.input.outcomes[c].streams[s].pv)
        };
        let shown = |sign: f64, cell: &str| if sign < 0.0 { format!("-{cell}") } else { cell.to_owned() };
        let base = appraisal.baseline.filter(|base| *base != c);
        let shared = |a: &Stream, b: &Stream| a.at == b.at && a.kind == b.kind;
        let mut movers = Vec::new();
        for (s, stream) in appraisal.choices[c].streams.iter().enumerate() {
            let (sign, cell, mut value) = part(c, s);
            let mut text = shown(sign, &cell);
            let theirs = base.iter().flat_map(|&base| {
                let streams = appraisal.choices[base].streams.iter().enumerate();
                streams.filter(|(_, other)| shared(other, stream)).map(move |(other, _)| (base, other))
            });
            for (base, other) in theirs {
                let (sign, cell, pv) = part(base, other);
                text.push_str(&if sign < 0.0 { format!("+{cell}") } else { format!("-{cell}") });
                value -= pv;
            }
            movers.push(Mover {
                label: stream.name.clone(),
                kind: side_words(stream.kind),
                signed: (text, value),
            });
        }
        if let Some(base) = base {
            let choice = &appraisal.choices[base];
            for (s, stream) in choice.streams.iter().enumerate() {
                if appraisal.choices[c].streams.iter().any(|own| shared(own, stream)) {
                    continue;
                }
                let (sign, cell, value) = part(base, s);
                movers.push(Mover {
                    label: format!("{} of {}", stream.name, choice.name),
                    kind: side_words(stream.kind),
                    signed: (shown(-sign, &cell), -value),
                });
            }
        }
        movers.sort_by(|a, b| b.signed.1.abs().total_cmp(&a.signed.1.abs()));
        movers
    }

    /// The table of one option; its rows come back.
    fn table(&mut self, c: usize) -> (u32, u32) {
        let name = self.input.appraisal.choices[c].name.clone();
        let npv = self.input.outcomes[c].totals().npv;
        let title = format!("{name}: net present value {}", thousands(npv));
        self.sheet.paragraph(self.row, 0, 5, Style::Strong, title);
        self.row += 1;
        self.headings(&["Stream", "Side", "In the net", "A tenth less", "A tenth more", "Zero at times"]);
        let first = self.row;
        let home = self.input.names.sensitivity.clone();
        let net = table_ref(&home, self.layout, self.layout.sums(c).net, Column::Value);
        for mover in self.movers(c) {
            self.sheet.text(self.row, 0, Style::Wrapped, &mover.label);
            self.sheet.text(self.row, 1, Style::Text, mover.kind);
            let (text, value) = mover.signed;
            self.sheet.formula(self.row, 2, Style::Money, text, Cached::Number(value));
            let cell = self.here(2);
            for (col, share) in [(3, -SHARE), (4, SHARE)] {
                let result = Cached::Number(share * value + 0.0);
                self.sheet.formula(self.row, col, Style::Money, format!("{share}*{cell}"), result);
            }
            let text = format!("IF({cell}=0,\"{NO_VALUE}\",1-{net}/{cell})");
            let times = 1.0 - npv / value + 0.0;
            if times.is_finite() {
                self.sheet.formula(self.row, 5, Style::Ratio, text, Cached::Number(times));
            } else {
                self.sheet.formula(self.row, 5, Style::Instead, text, Cached::Text(NO_VALUE.to_owned()));
            }
            self.row += 1;
        }
        let last = self.row;
        self.row += 1;
        (first, last)
    }

    /// The bar chart of a table.
    fn bars(&mut self, c: usize, (first, last): (u32, u32)) {
        let last = last.min(first + BARS as u32);
        if last == first {
            return;
        }
        let column = |col: u32| SheetRange {
            sheet: self.input.names.sensitivity.clone(),
            range: Range { first: Cell { row: first, col }, last: Cell { row: last - 1, col } },
        };
        let series = [(3, "A tenth less"), (4, "A tenth more")];
        let title = format!("{}: what a tenth of each stream does", self.input.appraisal.choices[c].name);
        let chart = Chart {
            kind: ChartKind::Bars,
            title: title.clone(),
            series: series
                .map(|(col, name)| Series { name: name.to_owned(), x: column(0), y: column(col) })
                .to_vec(),
        };
        self.sheet.chart(self.row, 0, chart);
        let height = HEIGHT.0 + HEIGHT.1 * (last - first);
        self.finishes.push(ChartFinish {
            title: Some(title),
            y_title: Some("Change of the net present value".to_owned()),
            y_format: Some("#,##0".to_owned()),
            legend: Some(Legend::Bottom),
            tornado: true,
            size: Some((WIDTH, height)),
            ..ChartFinish::default()
        });
        self.row += height + 1;
    }
}
