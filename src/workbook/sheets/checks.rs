//! The checks sheet: every factor, present value and filled cell against a second route, live.

use super::lines::{AGREES, DIFFERS, Line, Live, col};
use super::nets::Nets;
use super::rebuild::Rebuilt;
use super::{AuditInput, TargetCell, discounting::side_words, offsets, periods, settings};
use crate::appraisal::{Held, Label, TargetRole};
use crate::formulas::{absolute, nth, refer, refer_cell};
use crate::layout::{LabelValue, Layout, label_value};
use crate::patch::Cached;
use crate::references::{Area, Cell, Range, SheetRange, quote_sheet};
use crate::writer::{Sheet, Style};

/// The row of column headings.
const HEADING: u32 = 3;
/// The first section's row.
const FIRST: u32 = 4;

/// The checks sheet with what the summary needs of it.
pub(super) struct Checks {
    /// The sheet.
    pub sheet: Sheet,
    /// Its result column.
    pub results: Range,
    /// Number of checks.
    pub count: usize,
    /// Of which are of what the workbook states.
    pub settings: usize,
    /// Place of each check that differs, in order.
    pub differing: Vec<String>,
    /// Number of checks of formulas that have no result yet.
    pub awaiting: usize,
    /// Number of checks that have a second route.
    pub independent: usize,
    /// The net flows of each option, live, where they are whole.
    pub nets: Vec<Option<Nets>>,
    /// Of all checks, those of multipliers of flows.
    pub multipliers: usize,
    /// Of all checks, those of values against consumption.
    pub welfare: usize,
    /// Of all checks, those of factors on a stream's own basis.
    pub own_factors: usize,
}

/// Where the parts of an option's section stand.
#[derive(Clone, Copy)]
pub(super) struct Section {
    /// Its heading.
    pub top: u32,
    /// The first year.
    pub years: u32,
    /// The first stream.
    pub streams: u32,
    /// Costs; benefits, net, the increments and the sum of factors follow.
    pub sums: u32,
    /// The first factor on a stream's own basis.
    pub own_factors: u32,
    /// The first multiplier of flows.
    pub multipliers: u32,
    /// The first value against consumption.
    pub welfare: u32,
    /// The first target cell.
    pub cells: u32,
    /// The row after its end.
    pub end: u32,
}

pub(super) struct Maker<'a> {
    pub(super) input: &'a AuditInput<'a>,
    pub(super) layout: &'a Layout,
    rebuilt: Vec<Rebuilt>,
    pub(super) sections: Vec<Section>,
    settings: Vec<Line>,
    targets: Vec<Vec<&'a TargetCell>>,
    pub(super) home: &'a str,
}

/// Makes the sheet.
pub(super) fn sheet(input: &AuditInput<'_>, layout: &Layout) -> Checks {
    let rebuilt = (0..layout.blocks.len()).map(|k| Rebuilt::new(input, layout, k)).collect();
    let mut make = Maker {
        input,
        layout,
        rebuilt,
        sections: Vec::new(),
        settings: settings::lines(input, &layout.names.checks),
        targets: Vec::new(),
        home: &layout.names.checks,
    };
    make.plan();
    let mut sheet = Sheet::new(&layout.names.checks);
    head(&mut sheet, input);
    sheet.text(FIRST, 0, Style::Section, settings::HEADING);
    let mut lines: Vec<(u32, Line)> = (FIRST + 1..).zip(make.settings.clone()).collect();
    for c in 0..input.appraisal.choices.len() {
        make.section(&mut sheet, c, &mut lines);
    }
    for (k, rebuilt) in make.rebuilt.iter().enumerate() {
        let whose = layout.whose(k, input.appraisal);
        rebuilt.write(&mut sheet, &format!("Inputs of the second route: {whose}"));
    }
    for (row, line) in &lines {
        line.write(&mut sheet, *row);
    }
    let end = make.sections.last().map_or(FIRST, |s| s.end);
    let results = Range {
        first: Cell { row: FIRST, col: col::RESULT },
        last: Cell { row: end.max(FIRST + 1), col: col::RESULT },
    };
    Checks {
        nets: (0..input.appraisal.choices.len()).map(|c| Nets::of(&make, c)).collect(),
        sheet,
        results,
        count: lines.len(),
        settings: make.settings.len(),
        differing: lines.iter().filter(|(_, l)| !l.agrees()).map(|(_, l)| l.place.clone()).collect(),
        awaiting: lines.iter().filter(|(_, l)| l.awaits).count(),
        independent: lines.iter().filter(|(_, l)| l.rebuilt.is_some()).count(),
        welfare: (0..make.sections.len()).map(|c| make.welfare_rows(c) as usize).sum(),
        own_factors: (0..make.sections.len()).map(|c| make.own_blocks_in(c).len() * make.rows(c)).sum(),
        multipliers: (0..make.sections.len()).map(|c| make.series_in(c).len() * make.rows(c)).sum(),
    }
}

fn head(sheet: &mut Sheet, input: &AuditInput<'_>) {
    sheet.columns(col::PLACE, col::PLACE, 30.0);
    sheet.columns(col::WHAT, col::WHAT, 26.0);
    sheet.columns(col::OFFSET, col::OFFSET, 10.0);
    sheet.columns(col::REBUILT, col::NOW, 17.0);
    sheet.columns(col::DIFFERENCE, col::RESULT, 11.0);
    sheet.columns(col::RESULT, col::RESULT, 25.0);
    sheet.columns(9, 9, 3.0);
    let most = input.appraisal.choices.iter().map(|c| c.streams.len()).max().unwrap_or(0) as u32;
    sheet.columns(col::FLOWS, col::FLOWS + most.max(1), 14.0);
    sheet.text(0, 0, Style::Title, "Audit checks");
    let words = "Each factor and total is rebuilt here by a second route from the cells of the workbook, live: \
                 change a flow, a year or a filled cell and its line turns from \"agrees\" to \"differs\". \
                 Factors are compared relative to what was recorded, all else as an absolute difference.";
    sheet.paragraph(1, 0, col::RESULT, Style::Wrapped, words);
    let headings = [
        "Cell",
        "Year or role",
        "Offset (years)",
        "Second route",
        "Recorded",
        "Workbook now",
        "Difference",
        "Allowed",
        "Result",
    ];
    for (i, heading) in headings.iter().enumerate() {
        sheet.text(HEADING, i as u32, Style::Heading, heading);
    }
    sheet.text(HEADING, col::FLOWS, Style::Heading, "Flows as entered");
    sheet.freeze(FIRST, 2);
    sheet.repeat(HEADING, HEADING);
}

impl<'a> Maker<'a> {
    fn plan(&mut self) {
        let mut row = FIRST + 2 + self.settings.len() as u32;
        for (c, choice) in self.input.appraisal.choices.iter().enumerate() {
            let cells: Vec<&TargetCell> = self
                .input
                .cells
                .iter()
                .filter(|cell| cell.choice == c)
                .filter(|cell| Some(cell.target) != self.factor_target(c))
                .collect();
            let years = row + 1;
            let streams = years + self.layout.block(c).rows;
            let sums = streams + choice.streams.len() as u32;
            let increments = if self.layout.rows[c].increment.is_some() { 3 } else { 0 };
            let own_factors = sums + 4 + increments;
            let multipliers = own_factors + (self.own_blocks_in(c).len() * self.rows(c)) as u32;
            let welfare = multipliers + (self.series_in(c).len() * self.rows(c)) as u32;
            let start = welfare + self.welfare_rows(c);
            let end = start + cells.len() as u32;
            let top = row;
            self.sections.push(Section {
                top,
                years,
                streams,
                sums,
                own_factors,
                multipliers,
                welfare,
                cells: start,
                end,
            });
            self.targets.push(cells);
            row = end + 1;
        }
        for rebuilt in &mut self.rebuilt {
            row = rebuilt.place(row + 1);
        }
    }

    /// Number of an option's years.
    fn rows(&self, c: usize) -> usize {
        self.layout.block(c).rows as usize
    }

    /// The target whose cells stand in the lines of the years.
    fn factor_target(&self, c: usize) -> Option<usize> {
        let rows = self.layout.block(c).rows as usize;
        let targets = &self.input.appraisal.choices[c].targets;
        targets.iter().position(|t| t.role == TargetRole::Factor && t.held.len() == rows)
    }

    fn section(&self, sheet: &mut Sheet, c: usize, lines: &mut Vec<(u32, Line)>) {
        let choice = &self.input.appraisal.choices[c];
        let outcome = &self.input.outcomes[c];
        let at = self.sections[c];
        let basis = outcome.basis.canonical();
        sheet.text(
            at.top,
            0,
            Style::Section,
            format!("{} ({basis}, base {})", choice.name, outcome.base_words),
        );
        for (s, stream) in choice.streams.iter().enumerate() {
            let heading = format!("{} ({})", stream.name, side_words(stream.kind));
            sheet.text(at.top, col::FLOWS + s as u32, Style::Heading, heading);
            for (i, &raw) in stream.raw.iter().enumerate() {
                let text = refer_cell(self.home, &stream.at.sheet, stream.at.nth(i));
                let row = at.years + i as u32;
                sheet.formula(row, col::FLOWS + s as u32, Style::Money, text, Cached::Number(raw));
            }
        }
        sheet.text(at.top, self.net_column(c), Style::Heading, "net flow, adjusted");
        for i in 0..outcome.factors.len() {
            if let Some((text, net)) = self.net(c, i) {
                let row = at.years + i as u32;
                sheet.formula(row, self.net_column(c), Style::Money, text, Cached::Number(net));
            }
            lines.push((at.years + i as u32, self.year(c, i)));
        }
        for s in 0..choice.streams.len() {
            lines.push((at.streams + s as u32, self.stream(c, s)));
        }
        self.sums(c, lines);
        self.own_factor_lines(c, lines);
        self.multiplier_lines(c, lines);
        self.consumption(sheet, c);
        self.welfare_lines(c, lines);
        for (k, cell) in self.targets[c].iter().enumerate() {
            let row = at.cells + k as u32;
            lines.push((row, self.target(c, cell, row)));
        }
    }

    /// The factor of one year.
    fn year(&self, c: usize, i: usize) -> Line {
        let choice = &self.input.appraisal.choices[c];
        let outcome = &self.input.outcomes[c];
        let axis = &self.input.appraisal.axes[choice.axis];
        let label = &axis.labels[i];
        let row = self.sections[c].years + i as u32;
        let (value, style) = label_live(label, self.input.appraisal.date1904);
        let source = refer_cell(self.home, &axis.at.sheet, axis.at.nth(i));
        let target = self.factor_target(c).map(|t| &choice.targets[t]);
        let factors = self.layout.factors(c);
        let at = target.map_or_else(|| Area::from(factors.clone()), |t| t.at.clone());
        let cell = at.nth(i);
        let mut line = Line::factor(place(&at.sheet, cell), Live { formula: source, value }, style);
        let rebuilt = self.rebuilt(c);
        let label_cell = absolute_cell(row, col::WHAT);
        let offset = periods::formula(&label_cell, axis, choice, i, outcome.timing, self.home)
            .unwrap_or_else(|| offsets::formula(&label_cell, label, choice, outcome.timing, self.home));
        line.offset = Some(Live::number(offset, rebuilt.offsets[i]));
        line.rebuilt = self.rebuilt_factor(c, None, i);
        let recorded = refer_cell(self.home, &factors.sheet, nth(factors.range, i));
        line.recorded = Live::number(recorded, outcome.factors[i]);
        if let Some(t) = target {
            let same = |other: &&TargetCell| other.at.sheet == at.sheet && other.at.range.first == cell;
            let found = self.input.cells.iter().find(same);
            line.awaits = found.is_some_and(|other| other.awaits);
            let value = match found {
                Some(other) if other.awaits => Cached::None,
                Some(other) if !other.filled => held(&t.held[i]),
                _ => Cached::Number(outcome.factors[i]),
            };
            line.now = Some(Live { formula: refer_cell(self.home, &at.sheet, cell), value });
        }
        line
    }

    pub(super) fn rebuilt(&self, c: usize) -> &Rebuilt {
        &self.rebuilt[self.layout.block_of[c]]
    }

    /// The second route of an option, or of one of its streams.
    pub(super) fn rebuilt_of(&self, c: usize, stream: Option<usize>) -> &Rebuilt {
        &self.rebuilt[self.layout.block_index(c, stream)]
    }

    pub(super) fn rebuilt_factor(&self, c: usize, stream: Option<usize>, i: usize) -> Option<Live> {
        let row = self.factor_rows(c, stream).0 + i as u32;
        let rebuilt = self.rebuilt_of(c, stream);
        let factor = rebuilt.factor(i).filter(|d| d.is_finite())?;
        Some(Live::number(rebuilt.formula(&absolute_cell(row, col::OFFSET))?, factor))
    }

    pub(super) fn has_route(&self, c: usize, stream: Option<usize>) -> bool {
        !self.input.outcomes[c].factors.is_empty() && self.rebuilt_factor(c, stream, 0).is_some()
    }
}

/// The live counts of checks and of those that differ.
pub(super) fn counts(results: Range, home: &str, sheet: &str) -> (String, String) {
    let cells = refer(home, &SheetRange { sheet: sheet.to_owned(), range: results });
    let count = |text: &str| format!("COUNTIF({cells},\"{text}\")");
    (format!("{}+{}", count(AGREES), count(DIFFERS)), count(DIFFERS))
}

pub(super) fn held(held: &Held) -> Cached {
    match held {
        Held::Number(x) | Held::Formula { value: Some(x), .. } => Cached::Number(*x),
        Held::Text(text) => Cached::Text(text.clone()),
        Held::Formula { shown: Some(shown), .. } if !shown.starts_with('#') => Cached::Text(shown.clone()),
        Held::Blank | Held::Error(_) | Held::Formula { value: None, .. } => Cached::None,
    }
}

/// A label as a cell holds it, and how it looks.
pub(super) fn label_live(label: &Label, date1904: bool) -> (Cached, Style) {
    match label_value(label, date1904) {
        LabelValue::Number(x, true) => (Cached::Number(x), Style::Date),
        LabelValue::Number(x, false) => {
            (Cached::Number(x), if matches!(label, Label::Offset(_)) { Style::Offset } else { Style::Year })
        }
        LabelValue::Text(text) => (Cached::Text(text), Style::Text),
    }
}

pub(super) fn tolerance(gross: f64) -> f64 {
    // Never nothing: a stream of zeros must agree with itself.
    (crate::formulas::FACTOR_TOLERANCE * gross).max(1e-12)
}

pub(super) fn place(sheet: &str, cell: Cell) -> String {
    format!("{}!{cell}", quote_sheet(sheet))
}

pub(super) fn absolute_cell(row: u32, col: u32) -> String {
    absolute(Range { first: Cell { row, col }, last: Cell { row, col } })
}

pub(super) fn column(col: u32, first: u32, last: u32) -> String {
    absolute(Range { first: Cell { row: first, col }, last: Cell { row: last, col } })
}
