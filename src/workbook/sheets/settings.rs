//! The checks of what the workbook states: base, basis, timing, units and the like, as they were when it was filled.

use super::AuditInput;
use super::lines::{Line, Live};
use crate::appraisal::{Setting, Stated};
use crate::formulas::refer_cell;
use crate::patch::Cached;
use crate::references::quote_sheet;
use crate::writer::Style;

/// The heading over the lines.
pub(super) const HEADING: &str = "What the workbook states";

/// A line for every cell that states something. The factors and present values were computed from these, so a cell
/// that says something else later has to turn the verdict, whatever the formulas make of it.
pub(super) fn lines(input: &AuditInput<'_>, home: &str) -> Vec<Line> {
    input.appraisal.settings.iter().map(|setting| line(setting, home)).collect()
}

fn line(setting: &Setting, home: &str) -> Line {
    let (value, style) = match &setting.value {
        Stated::Number(x) => (Cached::Number(*x), Style::Exact),
        Stated::Date(x) => (Cached::Number(*x), Style::Date),
        Stated::Text(text) => (Cached::Text(text.clone()), Style::Wrapped),
    };
    let cell = setting.at.range.first;
    let place = format!("{}!{cell}", quote_sheet(&setting.at.sheet));
    let size = if let Cached::Number(x) = value { x.abs() } else { 0.0 };
    let recorded = Live { formula: String::new(), value: value.clone() };
    let now = Live { formula: refer_cell(home, &setting.at.sheet, cell), value };
    let allowed = (crate::formulas::FACTOR_TOLERANCE * size).max(1e-12);
    let line = Line::cell(place, setting.from.clone(), recorded, Some(now), allowed);
    Line { exact: true, style, ..line }
}
