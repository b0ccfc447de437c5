//! Coverage: every numeric row that runs along the years, and whether it was valued.

use std::collections::{BTreeMap, BTreeSet};

use hence_core::sum;

use crate::appraisal::{Choice, Covered, Direction, Given, Levels, StreamKind, TargetRole};
use crate::problem::Place;
use crate::reading::Value;
use crate::references::{Area, Cell, Range, SheetRange};

use super::choices::Built;
use super::counted::aligned;
use super::{Context, note};

/// Rows that are listed, at most; a sheet of data can hold a million.
const MAX_ROWS_LISTED: usize = 5_000;
/// Rows of one sheet that are looked at, at most.
const MAX_ROWS_SEEN: usize = 100_000;

/// Columns (or rows) of a sheet that years stand over.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
struct Band {
    /// The first and the last column of each stretch, or row where the years run down.
    stretches: Vec<(u32, u32)>,
    /// The years run down.
    down: bool,
    /// The row (or column) of the years, on their own sheet.
    years: Option<u32>,
}

/// What was seen of one row.
#[derive(Default)]
struct Line {
    heading: String,
    heading_is_word: bool,
    numbers: Vec<f64>,
}

/// Every numeric row along the years of every option, in sheet order.
pub(super) fn coverage(context: &mut Context, built: &Built) -> Vec<Covered> {
    let roles = roles(built);
    let targets: Vec<SheetRange> = built
        .choices
        .iter()
        .flat_map(|choice| &choice.targets)
        .flat_map(|target| target.at.pieces())
        .collect();
    let mut covered = Vec::new();
    let order: Vec<String> = context.book.sheets.iter().map(|sheet| sheet.name.clone()).collect();
    let bands = bands(built);
    for sheet in order {
        let Some(bands) = bands.get(&sheet) else { continue };
        for band in bands {
            let named = roles.keys().filter(|at| at.sheet == sheet).filter_map(|at| band.index(at));
            let lines = match lines(context, &sheet, band, &targets, named.collect()) {
                Ok(lines) => lines,
                Err(error) => {
                    context.problems.extend(error.problems().iter().cloned());
                    continue;
                }
            };
            covered.extend(lines.into_iter().filter_map(|(index, line)| {
                let at = band.line(&sheet, index)?;
                let roles = roles.get(&at).cloned().unwrap_or_default();
                let is_target = at.pieces().all(|piece| targets.contains(&piece));
                let after_years = band.years.is_none_or(|years| index > years);
                let wanted = !roles.is_empty() || line.numbers.len() > usize::from(!after_years);
                (wanted && Some(index) != band.years).then(|| Covered {
                    at,
                    heading: line.heading,
                    roles,
                    total: sum(&line.numbers),
                    follows: is_target,
                })
            }));
        }
    }
    if covered.len() > MAX_ROWS_LISTED {
        context.report(note(
            "coverage-cut",
            Place::default(),
            format!(
                "{} numeric rows run along the years; the first {MAX_ROWS_LISTED} are listed",
                covered.len()
            ),
        ));
        covered.truncate(MAX_ROWS_LISTED);
    }
    covered
}

impl Band {
    /// The cells of one row of the band.
    fn line(&self, sheet: &str, index: u32) -> Option<Area> {
        let pieces = self.stretches.iter().map(|&(first, last)| {
            let range = if self.down {
                Range { first: Cell { row: first, col: index }, last: Cell { row: last, col: index } }
            } else {
                Range { first: Cell { row: index, col: first }, last: Cell { row: index, col: last } }
            };
            SheetRange { sheet: sheet.to_owned(), range }
        });
        Area::join(&pieces.collect::<Vec<_>>()).ok()
    }

    /// Whether the years stand over a column.
    fn holds(&self, across: u32) -> bool {
        self.stretches.iter().any(|&(first, last)| (first..=last).contains(&across))
    }

    /// The row that cells are, where they are exactly one row of the band.
    fn index(&self, at: &Area) -> Option<u32> {
        let first = at.nth(0);
        let index = if self.down { first.col } else { first.row };
        self.line(&at.sheet, index).is_some_and(|line| line == *at).then_some(index)
    }

    /// A cell as (row along the years, position across it).
    fn turned(&self, cell: Cell) -> (u32, u32) {
        if self.down { (cell.col, cell.row) } else { (cell.row, cell.col) }
    }
}

/// Where years run: on their own sheets, and on the sheets of streams that stand elsewhere.
fn bands(built: &Built) -> BTreeMap<String, Vec<Band>> {
    let mut bands: BTreeMap<String, Vec<Band>> = BTreeMap::new();
    let band = |at: &Area, direction: Direction, years: bool| {
        let stretch = |piece: &Range| match direction {
            Direction::Across => (piece.first.col, piece.last.col),
            Direction::Down => (piece.first.row, piece.last.row),
        };
        let (down, first) = (direction == Direction::Down, at.nth(0));
        let index = if down { first.col } else { first.row };
        Band { stretches: at.parts().iter().map(stretch).collect(), down, years: years.then_some(index) }
    };
    for axis in &built.axes {
        let own = bands.entry(axis.at.sheet.clone()).or_default();
        own.push(band(&axis.at, axis.direction, true));
    }
    for choice in &built.choices {
        let axis = &built.axes[choice.axis];
        for stream in &choice.streams {
            if stream.at.sheet == axis.at.sheet && aligned(&stream.at, &axis.at) {
                continue;
            }
            let found = band(&stream.at, axis.direction, false);
            let known = bands.entry(stream.at.sheet.clone()).or_default();
            let same = |b: &Band| b.stretches == found.stretches && b.down == found.down;
            if !known.iter().any(same) {
                known.push(found);
            }
        }
    }
    for list in bands.values_mut() {
        list.sort_unstable();
        list.dedup_by(|b, a| a.stretches == b.stretches && a.down == b.down);
    }
    bands
}

/// Streams the sheet once and sums each row of the band. Cells that are filled are left out, whatever they hold before,
/// and rows that have a name are kept, so that a second fill lists what the first did.
fn lines(
    context: &mut Context,
    sheet: &str,
    band: &Band,
    targets: &[SheetRange],
    named: BTreeSet<u32>,
) -> crate::problem::Result<BTreeMap<u32, Line>> {
    let targets: Vec<Range> = targets.iter().filter(|at| at.sheet == sheet).map(|at| at.range).collect();
    let filled = |cell: Cell| targets.iter().any(|range| range.contains(cell));
    let mut lines: BTreeMap<u32, Line> = BTreeMap::new();
    let first = band.stretches.first().map_or(0, |(first, _)| *first);
    context.sheets.visit(sheet, |cell, value| {
        let (index, across) = band.turned(cell);
        if filled(cell) {
            return;
        }
        if lines.len() >= MAX_ROWS_SEEN && !lines.contains_key(&index) {
            return;
        }
        match value {
            Value::Number(number) if number.is_finite() && band.holds(across) => {
                let line = lines.entry(index).or_default();
                line.numbers.push(number);
            }
            Value::Text(text) if across < first => {
                let line = lines.entry(index).or_default();
                // The first text that reads like a word: units stand after the label; marks only where there is no other.
                let is_word = text.chars().filter(|c| c.is_alphabetic()).count() >= 3;
                if !line.heading_is_word {
                    line.heading = text.split_whitespace().collect::<Vec<_>>().join(" ");
                    line.heading_is_word = is_word;
                }
            }
            _ => {}
        }
    })?;
    for index in &named {
        lines.entry(*index).or_default();
    }
    lines.retain(|index, line| !line.numbers.is_empty() || named.contains(index));
    Ok(lines)
}

/// The roles of every named row in words; with several options, each with its option.
fn roles(built: &Built) -> BTreeMap<Area, Vec<String>> {
    let mut roles: BTreeMap<Area, Vec<String>> = BTreeMap::new();
    for spans in built.axes.iter().filter_map(|axis| axis.spans.as_ref()) {
        roles.insert(spans.at.clone(), vec!["years per column".to_owned()]);
    }
    let many = built.choices.len() > 1;
    for choice in &built.choices {
        let mut add = |at: Area, words: String| {
            let list = roles.entry(at).or_default();
            let words = if many { format!("{words} ({})", choice.name) } else { words };
            if !list.contains(&words) {
                list.push(words);
            }
        };
        for (at, words) in words(choice) {
            add(at, words);
        }
    }
    roles
}

fn words(choice: &Choice) -> Vec<(Area, String)> {
    let mut words = Vec::new();
    for stream in &choice.streams {
        let kind = match stream.kind {
            StreamKind::Cost => "cost",
            StreamKind::Benefit => "benefit",
            StreamKind::Flow => "flow",
            StreamKind::Damage => "damage",
        };
        words.push((stream.at.clone(), format!("{kind}: {}", stream.name)));
    }
    words.extend(choice.effects.iter().map(|effect| (effect.at.clone(), format!("effect: {}", effect.name))));
    if let Some(Given { value: Levels::Index(_), at: Some(at), .. }) = &choice.prices.levels {
        words.push((at.clone().into(), "prices".to_owned()));
    }
    if let Some(path) = &choice.welfare.consumption {
        words.push((path.at.clone(), "consumption".to_owned()));
    }
    for target in &choice.targets {
        let role = match &target.role {
            TargetRole::Factor => "factor".to_owned(),
            TargetRole::StreamFactor(stream) => format!("factor: {stream}"),
            TargetRole::Rates => "rates".to_owned(),
            TargetRole::PvByYear(None) => "pv".to_owned(),
            TargetRole::PvByYear(Some(stream)) => format!("pv: {stream}"),
            _ => continue,
        };
        words.push((target.at.clone(), role));
    }
    words
}
