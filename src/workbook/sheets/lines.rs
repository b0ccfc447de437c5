//! One line of the checks: what was recorded, what the workbook holds now, what the second route gives.

use crate::formulas::FACTOR_TOLERANCE;
use crate::patch::Cached;
use crate::writer::{Sheet, Style};

/// What "agrees" and "differs" are written as.
pub(super) const AGREES: &str = "agrees";
/// See [`AGREES`].
pub(crate) const DIFFERS: &str = "differs";
/// Written where there is no second route.
pub(super) const UNCHECKED: &str = "not independently checked";

/// Columns of the checks sheet.
pub(super) mod col {
    pub const PLACE: u32 = 0;
    pub const WHAT: u32 = 1;
    pub const OFFSET: u32 = 2;
    pub const REBUILT: u32 = 3;
    pub const RECORDED: u32 = 4;
    pub const NOW: u32 = 5;
    pub const DIFFERENCE: u32 = 6;
    pub const ALLOWED: u32 = 7;
    pub const RESULT: u32 = 8;
    pub const FLOWS: u32 = 10;
}

/// A formula and what it comes to.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Live {
    /// Without its equals sign; a plain value where it is empty.
    pub formula: String,
    /// Its result.
    pub value: Cached,
}

impl Live {
    /// A formula with a number.
    pub fn number(formula: impl Into<String>, value: f64) -> Self {
        Live { formula: formula.into(), value: Cached::Number(value) }
    }

    /// A constant.
    pub fn constant(value: f64) -> Self {
        Live { formula: String::new(), value: Cached::Number(value) }
    }

    fn write(&self, sheet: &mut Sheet, row: u32, column: u32, style: Style) {
        match (&self.value, self.formula.is_empty()) {
            (Cached::Number(x), true) => sheet.number(row, column, style, *x),
            (Cached::Text(text), true) => sheet.text(row, column, Style::Wrapped, text),
            (Cached::None, true) => {}
            (value, false) => sheet.formula(row, column, style, &self.formula, value.clone()),
        }
    }
}

/// A line of the checks.
#[derive(Clone, Debug)]
pub(super) struct Line {
    /// The cell it is about, as text.
    pub place: String,
    /// Its role, or the analyst's label pulled live.
    pub what: Live,
    /// How the label looks.
    pub what_style: Style,
    /// Its offset, for a factor.
    pub offset: Option<Live>,
    /// By the second route.
    pub rebuilt: Option<Live>,
    /// As the library computed it; a text where the measure has no number.
    pub recorded: Live,
    /// What the workbook's cell holds now; none where no cell holds it.
    pub now: Option<Live>,
    /// Allowed difference.
    pub allowed: f64,
    /// The difference is relative to what was recorded.
    pub relative: bool,
    /// A recorded text has to stand in the cell as it is; else any text will do.
    pub exact: bool,
    /// The cell's formula has no result until a spreadsheet program computes it: neither has the line.
    pub awaits: bool,
    /// How the numbers look.
    pub style: Style,
}

impl Line {
    /// A line about a factor.
    pub fn factor(place: String, what: Live, what_style: Style) -> Self {
        Line {
            place,
            what,
            what_style,
            offset: None,
            rebuilt: None,
            recorded: Live::constant(0.0),
            now: None,
            allowed: FACTOR_TOLERANCE,
            relative: true,
            exact: false,
            awaits: false,
            style: Style::Factor,
        }
    }

    /// A line about a cell.
    pub fn cell(
        place: String,
        what: impl Into<String>,
        recorded: Live,
        now: Option<Live>,
        allowed: f64,
    ) -> Self {
        let what = Live { formula: String::new(), value: Cached::Text(what.into()) };
        Line {
            recorded,
            now,
            allowed,
            relative: false,
            style: Style::Money,
            ..Line::factor(place, what, Style::Wrapped)
        }
    }

    /// The largest difference from what was recorded, and whether it is allowed. None where a value
    /// that should be a number is none.
    fn judge(&self) -> (Option<f64>, bool) {
        // The rest of the line speaks for itself until the cell has a result.
        let now = self.now.as_ref().filter(|_| !self.awaits);
        let Cached::Number(recorded) = self.recorded.value else {
            let stands = |now: &Live| match &now.value {
                Cached::Text(_) if self.exact => now.value == self.recorded.value,
                value => matches!(value, Cached::Text(_)),
            };
            return (None, now.is_none_or(stands));
        };
        let mut worst = 0.0_f64;
        for live in self.rebuilt.iter().chain(now) {
            let Cached::Number(x) = live.value else { return (None, false) };
            let relative = self.relative && recorded != 0.0;
            let difference = if relative { (x / recorded - 1.0).abs() } else { (x - recorded).abs() };
            // `max` would pass over a difference that is no number.
            if difference.is_nan() {
                return (None, false);
            }
            worst = worst.max(difference);
        }
        (worst.is_finite().then_some(worst), worst <= self.allowed)
    }

    /// Whether the line agrees.
    pub fn agrees(&self) -> bool {
        self.judge().1
    }

    /// Writes the line with its live difference and result.
    pub fn write(&self, sheet: &mut Sheet, row: u32) {
        sheet.text(row, col::PLACE, Style::Text, &self.place);
        self.what.write(sheet, row, col::WHAT, self.what_style);
        if let Some(offset) = &self.offset {
            offset.write(sheet, row, col::OFFSET, Style::Offset);
        }
        match &self.rebuilt {
            Some(live) => live.write(sheet, row, col::REBUILT, self.style),
            None => sheet.text(row, col::REBUILT, Style::Text, UNCHECKED),
        }
        self.recorded.write(sheet, row, col::RECORDED, self.style);
        if let Some(now) = &self.now {
            now.write(sheet, row, col::NOW, self.style);
        }
        sheet.number(row, col::ALLOWED, Style::Difference, self.allowed);
        let cell = |column| crate::references::Cell { row, col: column }.to_string();
        let (difference, agrees) = self.judge();
        let pending = |result: Cached| if self.awaits { Cached::None } else { result };
        let result = pending(Cached::Text(if agrees { AGREES } else { DIFFERS }.to_owned()));
        let quote = |yes: &str, no: &str| format!("\"{yes}\",\"{no}\"");
        if !matches!(self.recorded.value, Cached::Number(_)) {
            let now = cell(col::NOW);
            let test = match self.exact {
                true => format!("EXACT(TRIM({now}),TRIM({}))", cell(col::RECORDED)),
                false => format!("ISTEXT({now})"),
            };
            let text = format!("IF({test},{})", quote(AGREES, DIFFERS));
            sheet.formula(row, col::RESULT, Style::Result, text, result);
            return;
        }
        let recorded = cell(col::RECORDED);
        let mut terms = Vec::new();
        if self.rebuilt.is_some() {
            terms.push(cell(col::REBUILT));
        }
        if self.now.is_some() {
            terms.push(cell(col::NOW));
        }
        let terms: Vec<String> = terms
            .iter()
            .map(|x| {
                // A factor too small for a number is recorded as 0.
                let relative = self.relative && self.recorded.value != Cached::Number(0.0);
                if relative { format!("ABS({x}/{recorded}-1)") } else { format!("ABS({x}-{recorded})") }
            })
            .collect();
        let text = match terms.as_slice() {
            [] => "0".to_owned(),
            terms => format!("IFERROR(MAX({}),\"not a number\")", terms.join(",")),
        };
        let shown = pending(difference.map_or_else(|| Cached::Text("not a number".into()), Cached::Number));
        sheet.formula(row, col::DIFFERENCE, Style::Difference, text, shown);
        let difference = cell(col::DIFFERENCE);
        let within = format!("IF({difference}<={},{})", cell(col::ALLOWED), quote(AGREES, DIFFERS));
        let text = format!("IF(ISNUMBER({difference}),{within},\"{DIFFERS}\")");
        sheet.formula(row, col::RESULT, Style::Result, text, result);
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn line(rebuilt: f64, now: Cached) -> Line {
        let now = Some(Live { formula: "A1".into(), value: now });
        let mut line = Line::cell("S!A1".into(), "net", Live::constant(100.0), now, 0.5);
        line.rebuilt = Some(Live::number("B1", rebuilt));
        line
    }

    #[test]
    fn a_line_agrees_up_to_what_is_allowed() {
        assert!(line(100.5, Cached::Number(99.5)).agrees());
        assert!(!line(100.6, Cached::Number(100.0)).agrees());
        assert!(!line(100.0, Cached::Number(99.0)).agrees());
        assert!(!line(100.0, Cached::Text("none".into())).agrees());
        assert!(!line(100.0, Cached::None).agrees());
    }

    #[test]
    fn a_measure_without_a_number_wants_text() {
        let mut line = line(0.0, Cached::Text("no ratio".into()));
        line.recorded.value = Cached::Text("no ratio".into());
        assert!(line.agrees());
        line.now = Some(Live::number("A1", 3.0));
        assert!(!line.agrees());
    }
}
