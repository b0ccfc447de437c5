//! Offsets of periods of any length by a second route: from the analyst's own first label, base and years per column.

use hence_core::{Position, Timing};

use super::rebuild::{base_year, constant};
use crate::appraisal::{Axis, Base, Choice, Label, Spans};
use crate::formulas::{literal, refer, refer_area, refer_cell};
use crate::references::{Area, Range, SheetRange};

/// Flows and base at the middle of their periods: what prices count from and to.
pub(super) const MIDDLES: Timing = Timing { flows: Position::Middle, base: Position::Middle };

/// Positions of flows and base in their periods.
fn positions(timing: Timing) -> (f64, f64) {
    let position = |position| match position {
        Position::Start => 0.0,
        Position::Middle => 0.5,
        Position::End | Position::Averaged => 1.0,
    };
    (position(timing.flows), position(timing.base))
}

/// The offset of every period, in plain arithmetic: the years before it, its part of itself, less the base's.
pub(super) fn rebuilt(axis: &Axis, spans: &Spans, choice: &Choice, timing: Timing) -> Vec<f64> {
    let (flows, base) = positions(timing);
    let first = spans.lengths[0];
    let (mut start, unit) = match &axis.labels[0] {
        Label::Number(n) if axis.numbers_columns() => (f64::from(*n) * first, first),
        Label::Number(n) => (f64::from(*n), 1.0),
        Label::Year(year) | Label::Financial(year, _) => {
            (f64::from(*year) - f64::from(base_year(&choice.base.value).unwrap_or(0)), 1.0)
        }
        Label::Date(_) | Label::Offset(_) => (0.0, 1.0),
    };
    let mut offsets = Vec::with_capacity(spans.lengths.len());
    for length in &spans.lengths {
        offsets.push(((start + flows * length - base * unit) * 1e10).round() / 1e10);
        start += length;
    }
    offsets
}

/// The length of the appraisal: a period of several years counts to where a flow in its last year would stand.
pub(super) fn length(offsets: &[f64], spans: &Spans, timing: Timing) -> f64 {
    let (flows, _) = positions(timing);
    let mut length = 0.0_f64;
    for (offset, years) in offsets.iter().zip(&spans.lengths) {
        let last = if *years > 1.0 { offset - flows * years + (years - 1.0) + flows } else { *offset };
        length = length.max(last);
    }
    length
}

/// The offset as a formula; it counts only while the label in `label_cell` is what it was.
pub(super) fn formula(
    label_cell: &str,
    axis: &Axis,
    choice: &Choice,
    i: usize,
    timing: Timing,
    home: &str,
) -> Option<String> {
    let spans = axis.spans.as_ref()?;
    let (flows, base) = positions(timing);
    let one = spans.at.len() == 1;
    let length = |i: usize| refer_cell(home, &spans.at.sheet, spans.at.nth(if one { 0 } else { i }));
    let before = match (one, i) {
        (_, 0) => "0".to_owned(),
        (true, _) => format!("{i}*{}", length(0)),
        (false, _) => format!("SUM({})", refer_area(home, &first_cells(&spans.at, i)?)),
    };
    let first = refer_cell(home, &axis.at.sheet, axis.at.nth(0));
    let (from, unit) = match &axis.labels[0] {
        Label::Number(_) if axis.numbers_columns() => (format!("{first}*{}", length(0)), length(0)),
        Label::Number(_) => (first, "1".to_owned()),
        label => {
            let year = match label {
                Label::Financial(year, _) => year.to_string(),
                _ => first,
            };
            let base = match (&choice.base.value, &choice.base.at) {
                (Base::Year(_), Some(at)) => refer(home, at),
                (base, _) => base_year(base).unwrap_or(0).to_string(),
            };
            (format!("{year}-{base}"), "1".to_owned())
        }
    };
    let offset = format!("{from}+{before}+{}*{}-{}*{unit}", constant(flows), length(i), constant(base));
    let label = match &axis.labels[i] {
        Label::Year(n) | Label::Number(n) => literal(f64::from(*n)),
        Label::Financial(_, text) => format!("\"{}\"", text.replace('"', "\"\"")),
        Label::Date(_) | Label::Offset(_) => return None,
    };
    Some(format!("IF({label_cell}={label},ROUND({offset},10),NA())"))
}

/// So many cells from the beginning of an area.
fn first_cells(at: &Area, count: usize) -> Option<Area> {
    let (mut pieces, mut left) = (Vec::new(), count as u64);
    for piece in at.pieces() {
        if left == 0 {
            break;
        }
        let taken = piece.range.len().min(left);
        let place = count as u64 - left;
        let range = Range { first: piece.range.first, last: at.nth((place + taken - 1) as usize) };
        pieces.push(SheetRange { sheet: piece.sheet, range });
        left -= taken;
    }
    Area::join(&pieces).ok()
}
