//! Where everything stands on the sheet Discounting, known before a formula or the sheet is made.

use std::collections::BTreeMap;

use crate::appraisal::{Appraisal, Axis, Label};
use crate::outcome::ChoiceOutcome;
use crate::references::{Cell, Range, SheetRange};
use crate::sheets::SheetNames;

/// The row of column headings, from 0; everything above it is said of the block below.
pub const HEADING_ROW: u32 = 6;
/// The first row of numbers.
pub const DATA_ROW: u32 = 7;
/// Columns of a block, and of the gap after it.
const BLOCK_WIDTH: u32 = 5;
/// Columns of a series of multipliers, and of the gap after it.
const SERIES_WIDTH: u32 = 3;

/// A block of four columns (year, offset, forward rate, factor), shared by all options whose years,
/// base, curve and timing are the same.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Block {
    /// The first option that uses it, whose axis and outcome give its numbers.
    pub choice: usize,
    /// The stream of that option whose own basis it holds; else it is the option's.
    pub stream: Option<usize>,
    /// All options that use it, or one of whose streams does.
    pub choices: Vec<usize>,
    /// Its first column.
    pub column: u32,
    /// Its number of years.
    pub rows: u32,
}

/// Two columns (year, multiplier), shared by all streams whose flows are multiplied alike, year by year.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Series {
    /// Option and stream that use it, the first of which gives its numbers.
    pub users: Vec<(usize, usize)>,
    /// Its first column.
    pub column: u32,
    /// Its number of years.
    pub rows: u32,
}

/// Rows of one option in the table of present values.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct ChoiceRows {
    /// One a stream.
    pub streams: Vec<u32>,
    /// Costs, benefits and net present value as they stand.
    pub absolute: Sums,
    /// The same over the baseline.
    pub increment: Option<Sums>,
    /// The sum of the factors of the service years.
    pub annuity: u32,
    /// Annual equivalent.
    pub annual: u32,
    /// Benefit-cost ratio.
    pub ratio: u32,
}

/// Rows of costs, benefits and their difference.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Sums {
    /// Costs.
    pub costs: u32,
    /// Benefits (and net flows, less damages).
    pub benefits: u32,
    /// Benefits less costs.
    pub net: u32,
}

/// Columns of the table of present values, from its first.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Column {
    /// The option.
    Option,
    /// The stream, or the total.
    Stream,
    /// Cost, benefit, net flow or damage.
    Side,
    /// The undiscounted total.
    Undiscounted,
    /// Present value of what follows the last year.
    Tail,
    /// The present value.
    Value,
}

/// All positions on the sheet Discounting.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Layout {
    /// The names of hence's sheets.
    pub names: SheetNames,
    /// Blocks from the left.
    pub blocks: Vec<Block>,
    /// The block of each option.
    pub block_of: Vec<usize>,
    /// The block of each stream that has a basis of its own, by option and stream.
    pub own_block_of: BTreeMap<(usize, usize), usize>,
    /// Multipliers of flows, after the blocks; none where no flow is adjusted by year.
    pub series: Vec<Series>,
    /// The first column of the table of present values.
    pub table: u32,
    /// Rows of each option in that table.
    pub rows: Vec<ChoiceRows>,
}

impl Layout {
    /// Plans the sheet: a pure function of the appraisal and its outcomes.
    pub fn new(appraisal: &Appraisal, outcomes: &[ChoiceOutcome], names: &SheetNames) -> Self {
        let mut blocks: Vec<Block> = Vec::new();
        let mut block_of = Vec::new();
        for (i, choice) in appraisal.choices.iter().enumerate() {
            let Axis { labels, spans, .. } = &appraisal.axes[choice.axis];
            let same = |block: &Block| {
                let other = &appraisal.choices[block.choice];
                let (a, b) = (&outcomes[i], &outcomes[block.choice]);
                block.stream.is_none()
                    && appraisal.axes[other.axis].labels == *labels
                    && appraisal.axes[other.axis].spans == *spans
                    && other.base.value == choice.base.value
                    && a.curve == b.curve
                    && a.basis == b.basis
                    && a.timing == b.timing
            };
            let found = blocks.iter().position(same).unwrap_or_else(|| {
                let column = blocks.len() as u32 * BLOCK_WIDTH;
                let rows = labels.len() as u32;
                blocks.push(Block { choice: i, stream: None, choices: Vec::new(), column, rows });
                blocks.len() - 1
            });
            blocks[found].choices.push(i);
            block_of.push(found);
        }
        let own_block_of = own_blocks(appraisal, outcomes, &mut blocks);
        let series = series(appraisal, outcomes, blocks.len() as u32 * BLOCK_WIDTH);
        let table = blocks.len() as u32 * BLOCK_WIDTH + series.len() as u32 * SERIES_WIDTH;
        let mut free = DATA_ROW..;
        let mut next = || free.next().unwrap_or(u32::MAX);
        let mut rows = Vec::new();
        for (choice, outcome) in appraisal.choices.iter().zip(outcomes) {
            let streams = choice.streams.iter().map(|_| next()).collect();
            let absolute = Sums { costs: next(), benefits: next(), net: next() };
            let increment =
                outcome.increment.is_some().then(|| Sums { costs: next(), benefits: next(), net: next() });
            let (annuity, annual, ratio) = (next(), next(), next());
            rows.push(ChoiceRows { streams, absolute, increment, annuity, annual, ratio });
            // A blank row between options.
            next();
        }
        Layout { names: names.clone(), blocks, block_of, own_block_of, series, table, rows }
    }

    /// The block of an option.
    pub fn block(&self, choice: usize) -> &Block {
        &self.blocks[self.block_of[choice]]
    }

    /// The block of a stream: that of its own basis, else its option's.
    pub fn block_index(&self, choice: usize, stream: Option<usize>) -> usize {
        let own = stream.and_then(|stream| self.own_block_of.get(&(choice, stream)));
        own.copied().unwrap_or(self.block_of[choice])
    }

    /// The factors that a stream is discounted with.
    pub fn stream_factors(&self, choice: usize, stream: usize) -> SheetRange {
        let block = &self.blocks[self.block_index(choice, Some(stream))];
        self.down(block.column + 3, block.rows)
    }

    /// Whose factors a block holds, in words: options, or a stream with its option where there are several.
    pub fn whose(&self, k: usize, appraisal: &Appraisal) -> String {
        let block = &self.blocks[k];
        let name = |c: usize| appraisal.choices[c].name.clone();
        let Some(_) = block.stream else {
            return block.choices.iter().map(|&c| name(c)).collect::<Vec<_>>().join(", ");
        };
        let users = self.own_block_of.iter().filter(|(_, own)| **own == k).map(|((c, s), _)| {
            let stream = &appraisal.choices[*c].streams[*s].name;
            if appraisal.choices.len() > 1 { format!("{stream} ({})", name(*c)) } else { stream.clone() }
        });
        users.collect::<Vec<_>>().join(", ")
    }

    /// A cell of the table of present values.
    pub fn cell(&self, row: u32, column: Column) -> Cell {
        Cell { row, col: self.table + column as u32 }
    }

    /// The cells of a block's labels.
    pub fn labels(&self, choice: usize) -> SheetRange {
        self.column(choice, 0)
    }

    /// The cells of a block's offsets.
    pub fn offsets(&self, choice: usize) -> SheetRange {
        self.column(choice, 1)
    }

    /// The cells of a block's forward rates.
    pub fn forward(&self, choice: usize) -> SheetRange {
        self.column(choice, 2)
    }

    /// The cells of a block's factors.
    pub fn factors(&self, choice: usize) -> SheetRange {
        self.column(choice, 3)
    }

    /// The sums that rank, ratio and net present value use: the increment where there is one.
    pub fn sums(&self, choice: usize) -> Sums {
        self.rows[choice].increment.unwrap_or(self.rows[choice].absolute)
    }

    /// The series of a stream, where its flows are multiplied by year.
    pub fn series_of(&self, choice: usize, stream: usize) -> Option<usize> {
        self.series.iter().position(|series| series.users.contains(&(choice, stream)))
    }

    /// The cells of the multipliers of a stream.
    pub fn multipliers(&self, choice: usize, stream: usize) -> Option<SheetRange> {
        let series = &self.series[self.series_of(choice, stream)?];
        Some(self.down(series.column + 1, series.rows))
    }

    fn column(&self, choice: usize, k: u32) -> SheetRange {
        let block = self.block(choice);
        self.down(block.column + k, block.rows)
    }

    /// So many cells of a column of numbers.
    fn down(&self, col: u32, rows: u32) -> SheetRange {
        let cell = |row| Cell { row, col };
        let range = Range { first: cell(DATA_ROW), last: cell(DATA_ROW + rows.max(1) - 1) };
        SheetRange { sheet: self.names.discounting.clone(), range }
    }
}

/// Adds a block for every distinct basis that streams have of their own.
fn own_blocks(
    appraisal: &Appraisal,
    outcomes: &[ChoiceOutcome],
    blocks: &mut Vec<Block>,
) -> BTreeMap<(usize, usize), usize> {
    let mut own_block_of = BTreeMap::new();
    for (c, choice) in appraisal.choices.iter().enumerate() {
        for (s, stream) in outcomes[c].streams.iter().enumerate() {
            let Some(own) = &stream.own else { continue };
            let same = |block: &Block| {
                let Some(other) = block.stream else { return false };
                let from = &appraisal.choices[block.choice];
                from.axis == choice.axis
                    && from.base == choice.base
                    && outcomes[block.choice].timing == outcomes[c].timing
                    && outcomes[block.choice].streams[other].own.as_ref() == Some(own)
            };
            let found = blocks.iter().position(same).unwrap_or_else(|| {
                let column = blocks.len() as u32 * BLOCK_WIDTH;
                let rows = own.factors.len() as u32;
                blocks.push(Block { choice: c, stream: Some(s), choices: Vec::new(), column, rows });
                blocks.len() - 1
            });
            if !blocks[found].choices.contains(&c) {
                blocks[found].choices.push(c);
            }
            own_block_of.insert((c, s), found);
        }
    }
    own_block_of
}

/// Every distinct series of multipliers, from column `first` on.
fn series(appraisal: &Appraisal, outcomes: &[ChoiceOutcome], first: u32) -> Vec<Series> {
    let mut all: Vec<Series> = Vec::new();
    for (c, choice) in appraisal.choices.iter().enumerate() {
        for (s, stream) in choice.streams.iter().enumerate() {
            let Some(values) = &outcomes[c].streams[s].multipliers else { continue };
            let same = |series: &&mut Series| {
                let (other_choice, other) = series.users[0];
                let from = &appraisal.choices[other_choice];
                from.axis == choice.axis
                    && from.base == choice.base
                    && from.prices == choice.prices
                    && from.streams[other].growth == stream.growth
                    && from.streams[other].income == stream.income
                    && from.welfare.reference == choice.welfare.reference
                    && outcomes[other_choice].elasticity == outcomes[c].elasticity
                    && outcomes[other_choice].streams[other].multipliers.as_ref() == Some(values)
            };
            match all.iter_mut().find(same) {
                Some(series) => series.users.push((c, s)),
                None => {
                    let column = first + all.len() as u32 * SERIES_WIDTH;
                    all.push(Series { users: vec![(c, s)], column, rows: values.len() as u32 });
                }
            }
        }
    }
    all
}

/// A label as a cell holds it.
#[derive(Clone, Debug, PartialEq)]
pub enum LabelValue {
    /// A number; `true` for a date's serial number.
    Number(f64, bool),
    /// A text.
    Text(String),
}

/// What the analyst's cell holds for a label, so that a look-up finds it on Discounting.
pub fn label_value(label: &Label, date1904: bool) -> LabelValue {
    match label {
        Label::Year(y) => LabelValue::Number(f64::from(*y), false),
        Label::Number(n) => LabelValue::Number(f64::from(*n), false),
        Label::Financial(_, text) => LabelValue::Text(text.clone()),
        Label::Date(date) => LabelValue::Number(serial(*date, date1904), true),
        Label::Offset(t) => LabelValue::Number(*t, false),
    }
}

/// The serial number of a date: days since 30 December 1899, or 1 January 1904.
pub fn serial(date: chrono::NaiveDate, date1904: bool) -> f64 {
    // 719,163 days from 0000-12-31 to 1970-01-01, which is serial number 25,569.
    let days = i64::from(chrono::Datelike::num_days_from_ce(&date)) - 719_163 + 25_569;
    (days - if date1904 { 1_462 } else { 0 }) as f64
}

/// A label in words.
pub fn label_text(label: &Label) -> String {
    match label {
        Label::Year(y) => y.to_string(),
        Label::Number(n) => n.to_string(),
        Label::Financial(_, text) => text.clone(),
        Label::Date(date) => date.format("%Y-%m-%d").to_string(),
        Label::Offset(t) => t.to_string(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn serial_numbers_are_those_of_spreadsheet_programs() {
        // Known pairs: 1 January 2000 is 36526; 1904 workbooks count 1,462 days less.
        let date = chrono::NaiveDate::from_ymd_opt(2000, 1, 1).unwrap();
        assert_eq!(serial(date, false), 36_526.0);
        assert_eq!(serial(date, true), 35_064.0);
    }
}
