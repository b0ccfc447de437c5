//! Filled and compared cells other than factors: each against the second route, where there is one.

use super::TargetCell;
use super::checks::{Maker, absolute_cell, column, held, place};
use super::lines::{Line, Live, col};
use crate::appraisal::TargetRole;
use crate::formulas::{find, refer_cell, residual, residual_sign, scale, side};
use crate::patch::Cached;
use crate::writer::{MAX_FORMULA, Style};

impl Maker<'_> {
    /// A filled (or compared) cell other than a factor of the years' lines.
    pub(super) fn target(&self, c: usize, cell: &TargetCell, row: u32) -> Line {
        let choice = &self.input.appraisal.choices[c];
        let target = &choice.targets[cell.target];
        let expected = match cell.expected {
            Some(x) => Live::constant(x),
            None => Live { formula: String::new(), value: Cached::Text("no number".into()) },
        };
        let value = match (cell.filled, cell.expected) {
            (true, Some(x)) => Cached::Number(x),
            (true, None) => Cached::Text("text".into()),
            (false, _) if cell.awaits => Cached::None,
            (false, _) => target.held.get(cell.index).map_or(Cached::None, held),
        };
        let value = match value {
            Cached::Text(_) if cell.filled => self.text_of(c, cell),
            value => value,
        };
        let at = cell.at.range.first;
        let now = Live { formula: refer_cell(self.home, &cell.at.sheet, at), value };
        let what = role_words(&target.role);
        let mut line = Line::cell(place(&cell.at.sheet, at), what, expected, Some(now), cell.tolerance);
        line.style = match target.role {
            TargetRole::Factor | TargetRole::StreamFactor(_) => Style::Factor,
            TargetRole::Rates | TargetRole::Irr => Style::Rate,
            TargetRole::Ratio | TargetRole::Payback => Style::Ratio,
            _ => Style::Money,
        };
        line.awaits = cell.awaits;
        if cell.expected.is_some() {
            let rebuilt = self.rebuilt_target(c, cell, &target.role, row);
            line.rebuilt = rebuilt.filter(|live| matches!(live.value, Cached::Number(x) if x.is_finite()));
        }
        line
    }

    /// The text that was written where a measure has no number.
    fn text_of(&self, c: usize, cell: &TargetCell) -> Cached {
        let target = &self.input.appraisal.choices[c].targets[cell.target];
        let all =
            crate::formulas::expected(self.input.appraisal, self.input.outcomes, self.layout, c, target);
        all.into_iter().nth(cell.index).unwrap_or(Cached::None)
    }

    fn rebuilt_target(&self, c: usize, cell: &TargetCell, role: &TargetRole, row: u32) -> Option<Live> {
        let choice = &self.input.appraisal.choices[c];
        let at = self.sections[c];
        let i = cell.index;
        let refer_to = |row: u32| absolute_cell(row, col::REBUILT);
        let shift = if self.layout.rows[c].increment.is_some() { 3 } else { 0 };
        let sums = || match (self.layout.rows[c].increment, self.input.appraisal.baseline) {
            (Some(_), Some(base)) => {
                let (a, b) = (self.rebuilt_sums(c)?, self.rebuilt_sums(base)?);
                Some([a[0] - b[0], a[1] - b[1], a[2] - b[2]])
            }
            _ => self.rebuilt_sums(c),
        };
        let sum_cell = |k: u32| refer_to(at.sums + shift + k);
        let factor = |s: Option<usize>| {
            let row = self.factor_rows(c, s).0 + i as u32;
            Some((refer_to(row), self.rebuilt_factor(c, s, i).and_then(|_| self.rebuilt_of(c, s).factor(i))?))
        };
        let annuity_row = at.sums + 3 + shift;
        match role {
            TargetRole::Factor => factor(None).map(|(text, value)| Live::number(text, value)),
            TargetRole::StreamFactor(name) => {
                factor(find(choice, name)).map(|(text, value)| Live::number(text, value))
            }
            TargetRole::Rates => self.rebuilt_rate(c, i),
            TargetRole::PvByYear(name) => {
                let (flow, value, s) = match name {
                    Some(name) => {
                        let s = find(choice, name)?;
                        let (flow, value) = self.flow(c, s, i);
                        (flow, value, Some(s))
                    }
                    None if choice.streams.iter().any(|stream| stream.basis.is_some()) => {
                        return self.net_by_streams(c, &factor, i);
                    }
                    None => (absolute_cell(at.years + i as u32, self.net_column(c)), self.net(c, i)?.1, None),
                };
                let (factor_cell, d) = factor(s)?;
                Some(Live::number(format!("({flow})*{factor_cell}"), value * d))
            }
            TargetRole::PvTotal(Some(name)) => {
                let s = find(choice, name)?;
                let value = self.has_route(c, Some(s)).then(|| self.rebuilt_stream(c, s))??;
                Some(Live::number(refer_to(at.streams + s as u32), value))
            }
            TargetRole::PvTotal(None) => Some(Live::number(refer_to(at.sums + 2), self.rebuilt_sums(c)?[2])),
            TargetRole::PvCosts => Some(Live::number(sum_cell(0), sums()?[0])),
            TargetRole::PvBenefits => Some(Live::number(sum_cell(1), sums()?[1])),
            TargetRole::Npv => Some(Live::number(sum_cell(2), sums()?[2])),
            TargetRole::Ratio => {
                let sums = sums()?;
                Some(Live::number(format!("{}/{}", sum_cell(1), sum_cell(0)), sums[1] / sums[0]))
            }
            TargetRole::Annual => {
                let annuity = self.rebuilt(c).annuity()?;
                Some(Live::number(format!("{}/{}", sum_cell(2), refer_to(annuity_row)), sums()?[2] / annuity))
            }
            TargetRole::Irr => self.rebuilt_irr(c, cell.expected?, row),
            TargetRole::Payback => None,
        }
    }

    /// The present value of a year's net flow, each stream by its own factor.
    fn net_by_streams(
        &self,
        c: usize,
        factor: &dyn Fn(Option<usize>) -> Option<(String, f64)>,
        i: usize,
    ) -> Option<Live> {
        let (mut text, mut total) = (String::new(), 0.0);
        for (s, stream) in self.input.appraisal.choices[c].streams.iter().enumerate() {
            let ((flow, value), (cell, d)) = (self.flow(c, s, i), factor(Some(s))?);
            text.push_str(if side(stream.kind) < 0.0 { "-" } else { "+" });
            text.push_str(&format!("({flow})*{cell}"));
            total += side(stream.kind) * value * d;
        }
        let text = text.trim_start_matches('+').to_owned();
        (text.len() <= MAX_FORMULA).then(|| Live::number(text, total))
    }

    /// The column of net flows, after the streams'.
    pub(super) fn net_column(&self, c: usize) -> u32 {
        col::FLOWS + self.input.appraisal.choices[c].streams.len() as u32
    }

    /// A flow after sign, unit, uplift and residual, from the flows pulled to this sheet.
    fn flow(&self, c: usize, s: usize, i: usize) -> (String, f64) {
        let stream = &self.input.appraisal.choices[c].streams[s];
        let row = self.sections[c].years + i as u32;
        let mut text = format!("{}{}", scale(stream, self.home), absolute_cell(row, col::FLOWS + s as u32));
        let mut value = stream.sign * stream.unit * (1.0 + stream.uplift.value) * stream.raw[i];
        if i + 1 == stream.raw.len()
            && let (Some(more), Some(given)) = (residual(stream, self.home), &stream.residual)
        {
            text.push_str(&more);
            value += residual_sign(stream.kind) * stream.unit * given.value;
        }
        if let Some((cell, by)) = self.multiplier(c, s, i) {
            text = format!("({text})*{cell}");
            value *= by;
        }
        (text, value)
    }

    /// The net flow of a year; none where its formula would be too long.
    pub(super) fn net(&self, c: usize, i: usize) -> Option<(String, f64)> {
        let mut text = String::new();
        let mut total = 0.0;
        for (s, stream) in self.input.appraisal.choices[c].streams.iter().enumerate() {
            let (flow, value) = self.flow(c, s, i);
            text.push_str(if side(stream.kind) < 0.0 { "-" } else { "+" });
            text.push_str(&format!("({flow})"));
            total += side(stream.kind) * value;
        }
        let text = text.trim_start_matches('+').to_owned();
        (!text.is_empty() && text.len() <= MAX_FORMULA).then_some((text, total))
    }

    /// One step of Newton's method from the rate recorded: it stays where it is at a rate of return.
    fn rebuilt_irr(&self, c: usize, rate: f64, row: u32) -> Option<Live> {
        let cell = absolute_cell(row, col::RECORDED);
        // The net present value at the rate and its slope, as (formula, number) each.
        let sums = |c: usize| -> Option<[(String, f64); 2]> {
            let at = self.sections[c];
            let net = column(self.net_column(c), at.years, at.streams - 1);
            let t = column(col::OFFSET, at.years, at.streams - 1);
            // An averaged flow stands half at each end of its year.
            let ends: &[f64] = if self.rebuilt(c).averaged { &[0.0, 1.0] } else { &[0.0] };
            let share = 1.0 / ends.len() as f64;
            let (mut value, mut slope) = (0.0, 0.0);
            for (i, t) in self.rebuilt(c).offsets.iter().enumerate() {
                let flow = share * self.net(c, i)?.1;
                for t in ends.iter().map(|end| t - end) {
                    value += flow * (1.0 + rate).powf(-t);
                    slope += flow * t * (1.0 + rate).powf(-t - 1.0);
                }
            }
            let each = |term: &dyn Fn(&str) -> String| {
                let terms: Vec<String> = ends.iter().map(|end| term(&format!("({t}-{end})"))).collect();
                format!("{share}*({})", terms.join("+"))
            };
            Some([
                (each(&|t| format!("SUMPRODUCT({net},(1+{cell})^(0-{t}))")), value),
                (each(&|t| format!("SUMPRODUCT({net},{t}*(1+{cell})^(0-{t}-1))")), slope),
            ])
        };
        // What follows the last year is in no column here.
        let over = self.layout.rows[c].increment.and(self.input.appraisal.baseline);
        let tailed = |c: usize| self.input.appraisal.choices[c].streams.iter().any(|s| s.tail.is_some());
        if std::iter::once(c).chain(over).any(tailed) {
            return None;
        }
        let [value, slope] = sums(c)?;
        let (text, step) = match (self.layout.rows[c].increment, self.input.appraisal.baseline) {
            (Some(_), Some(base)) => {
                let [less, less_slope] = sums(base)?;
                let text = format!("({}-{})/({}-{})", value.0, less.0, slope.0, less_slope.0);
                (text, (value.1 - less.1) / (slope.1 - less_slope.1))
            }
            _ => (format!("({})/({})", value.0, slope.0), value.1 / slope.1),
        };
        Some(Live::number(format!("{cell}+{text}"), rate + step))
    }

    /// The forward rate D(n-1)/D(n) - 1 of the year n that holds the offset, where that is after the base.
    fn rebuilt_rate(&self, c: usize, i: usize) -> Option<Live> {
        let rebuilt = self.rebuilt(c);
        let route = rebuilt.route.as_ref().filter(|_| rebuilt.offsets[i] > 0.0)?;
        let n = rebuilt.offsets[i].ceil();
        let cell = absolute_cell(self.sections[c].years + i as u32, col::OFFSET);
        let year = format!("ROUNDUP({cell},0)");
        let (before, at) = (rebuilt.moment(&format!("({year}-1)"))?, rebuilt.moment(&year)?);
        let text = format!("({before})/({at})-1");
        (text.len() <= MAX_FORMULA).then(|| Live::number(text, route.factor(n - 1.0) / route.factor(n) - 1.0))
    }
}

/// A role in words.
pub(crate) fn role_words(role: &TargetRole) -> String {
    match role {
        TargetRole::Factor => "factor".into(),
        TargetRole::StreamFactor(name) => format!("factor: {name}"),
        TargetRole::PvByYear(None) => "PV by year: net".into(),
        TargetRole::PvByYear(Some(name)) => format!("PV by year: {name}"),
        TargetRole::PvTotal(None) => "PV: net".into(),
        TargetRole::PvTotal(Some(name)) => format!("PV: {name}"),
        TargetRole::PvCosts => "PV: costs".into(),
        TargetRole::PvBenefits => "PV: benefits".into(),
        TargetRole::Npv => "net present value".into(),
        TargetRole::Ratio => "benefit-cost ratio".into(),
        TargetRole::Annual => "annual equivalent".into(),
        TargetRole::Irr => "internal rate of return".into(),
        TargetRole::Payback => "discounted payback".into(),
        TargetRole::Rates => "yearly rate".into(),
    }
}
