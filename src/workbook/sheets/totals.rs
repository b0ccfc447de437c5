//! Present values of streams and their sums, each against the second route.

use super::checks::{Maker, Section, absolute_cell, column, place, tolerance};
use super::discounting::table_ref;
use super::lines::{Line, Live, col};
use crate::appraisal::StreamKind;
use crate::formulas::{residual, residual_sign, scale};
use crate::layout::Column;
use crate::writer::{MAX_FORMULA, Style};

impl Maker<'_> {
    /// The present value of a stream by the second route.
    pub(super) fn rebuilt_stream(&self, c: usize, s: usize) -> Option<f64> {
        let stream = &self.input.appraisal.choices[c].streams[s];
        let rebuilt = self.rebuilt_of(c, Some(s));
        let multiplier = stream.sign * stream.unit * (1.0 + stream.uplift.value);
        let mut sum = 0.0;
        let by = |i| self.multiplier(c, s, i).map_or(1.0, |(_, by)| by);
        for (i, raw) in stream.raw.iter().enumerate() {
            sum += raw * rebuilt.factor(i)? * by(i);
        }
        let mut total = multiplier * sum;
        if let Some(given) = &stream.residual {
            let year = stream.raw.len().checked_sub(1)?;
            let last = rebuilt.factor(year)?;
            total += residual_sign(stream.kind) * stream.unit * given.value * last * by(year);
        }
        let tail = match (&stream.tail, self.rebuilt_tail(c, s)) {
            (None, _) => 0.0,
            (Some(_), Some((_, value))) => value,
            // No second route: its line says so.
            (Some(_), None) => self.input.outcomes[c].streams[s].pv_tail,
        };
        Some(total + tail)
    }

    pub(super) fn stream(&self, c: usize, s: usize) -> Line {
        let stream = &self.input.appraisal.choices[c].streams[s];
        let outcome = &self.input.outcomes[c].streams[s];
        let at = self.sections[c];
        let row = self.layout.rows[c].streams[s];
        let tail = self.rebuilt_tail(c, s);
        let what = match (&stream.tail, &tail) {
            (None, _) => format!("PV: {}", stream.name),
            (Some(_), Some(_)) => format!("PV: {} (with what follows the last year)", stream.name),
            (Some(_), None) => {
                format!("PV: {} (what follows the last year is not independently checked)", stream.name)
            }
        };
        let gross: f64 = outcome.pv_by_year.iter().map(|x| x.abs()).sum::<f64>() + outcome.pv_tail.abs();
        let now = Live::number(table_ref(self.home, self.layout, row, Column::Value), outcome.pv);
        let table = place(&self.layout.names.discounting, self.layout.cell(row, Column::Value));
        let mut line = Line::cell(table, what, Live::constant(outcome.pv), Some(now), tolerance(gross));
        if self.has_route(c, Some(s))
            && let Some(value) = self.rebuilt_stream(c, s)
        {
            let flows = column(col::FLOWS + s as u32, at.years, at.streams - 1);
            let (first, last) = self.factor_rows(c, Some(s));
            let factors = column(col::REBUILT, first, last);
            let multipliers = self.multiplier_rows(c, s);
            let by = multipliers.map(|(from, to)| format!(",{}", column(col::REBUILT, from, to)));
            let mut text = format!(
                "{}SUMPRODUCT({flows},{factors}{})",
                scale(stream, self.home),
                by.unwrap_or_default()
            );
            if let Some(residual) = residual(stream, self.home) {
                text.push_str(&format!("{residual}*{}", absolute_cell(last, col::REBUILT)));
                if let Some((_, last)) = multipliers {
                    text.push_str(&format!("*{}", absolute_cell(last, col::REBUILT)));
                }
            }
            if let Some((tail, _)) = tail {
                text.push_str(&format!("+{tail}"));
            } else if stream.tail.is_some() {
                text.push_str(&format!("+{}", table_ref(self.home, self.layout, row, Column::Tail)));
            }
            line.rebuilt = (text.len() <= MAX_FORMULA).then(|| Live::number(text, value));
        }
        line
    }

    /// Costs, benefits, net and the same over the baseline, by the second route.
    pub(super) fn rebuilt_sums(&self, c: usize) -> Option<[f64; 3]> {
        let (mut costs, mut benefits) = (0.0, 0.0);
        for (s, stream) in self.input.appraisal.choices[c].streams.iter().enumerate() {
            let pv = self.rebuilt_stream(c, s)?;
            match stream.kind {
                StreamKind::Cost => costs += pv,
                StreamKind::Benefit | StreamKind::Flow => benefits += pv,
                StreamKind::Damage => benefits -= pv,
            }
        }
        self.has_route(c, None).then_some([costs, benefits, benefits - costs])
    }

    pub(super) fn sums(&self, c: usize, lines: &mut Vec<(u32, Line)>) {
        let outcome = &self.input.outcomes[c];
        let at = self.sections[c];
        let rows = &self.layout.rows[c];
        let gross: f64 = outcome
            .streams
            .iter()
            .map(|s| s.pv_by_year.iter().map(|x| x.abs()).sum::<f64>() + s.pv_tail.abs())
            .sum();
        let mut add = |row: u32, table: u32, what: &str, value: f64, allowed: f64, rebuilt: Option<Live>| {
            let now = Live::number(table_ref(self.home, self.layout, table, Column::Value), value);
            let cell = place(&self.layout.names.discounting, self.layout.cell(table, Column::Value));
            let mut line = Line::cell(cell, what, Live::constant(value), Some(now), allowed);
            line.rebuilt = rebuilt;
            lines.push((row, line));
        };
        let rebuilt = self.rebuilt_sums(c);
        let value = |k: usize| rebuilt.map(|r| r[k]);
        let live = |text: String, value: Option<f64>| value.map(|v| Live::number(text, v));
        let totals = &outcome.absolute;
        let sums = rows.absolute;
        let (costs, benefits) =
            (absolute_cell(at.sums, col::REBUILT), absolute_cell(at.sums + 1, col::REBUILT));
        let allowed = tolerance(gross);
        let text = self.sum_formula(c, true);
        add(at.sums, sums.costs, "PV: costs", totals.pv_costs, allowed, live(text, value(0)));
        let text = self.sum_formula(c, false);
        add(at.sums + 1, sums.benefits, "PV: benefits", totals.pv_benefits, allowed, live(text, value(1)));
        let text = format!("{benefits}-{costs}");
        add(at.sums + 2, sums.net, "Net present value", totals.npv, allowed, live(text, value(2)));
        let mut next = at.sums + 3;
        if let (Some(over), Some(base), Some(increment)) =
            (rows.increment, self.input.appraisal.baseline, &outcome.increment)
        {
            let base_rebuilt = self.rebuilt_sums(base);
            let parts = [
                (over.costs, "PV: costs over the baseline", increment.pv_costs),
                (over.benefits, "PV: benefits over the baseline", increment.pv_benefits),
                (over.net, "Net present value over the baseline", increment.npv),
            ];
            let other: f64 = self.input.outcomes[base].absolute.pv_costs.abs()
                + self.input.outcomes[base].absolute.pv_benefits.abs();
            for (k, (table, what, recorded)) in parts.into_iter().enumerate() {
                let cell = |section: Section| absolute_cell(section.sums + k as u32, col::REBUILT);
                let text = format!("{}-{}", cell(at), cell(self.sections[base]));
                let value = rebuilt.zip(base_rebuilt).map(|(a, b)| a[k] - b[k]);
                add(next, table, what, recorded, tolerance(gross + other), live(text, value));
                next += 1;
            }
        }
        let years = outcome.service_years;
        let what = format!("Sum of factors of service years 1 to {years}");
        let block = self.rebuilt(c);
        let text = block.annuity_formula().unwrap_or_default();
        let annuity = live(text, block.annuity());
        add(next, rows.annuity, &what, outcome.annuity, tolerance(outcome.annuity), annuity);
        if let Some((_, line)) = lines.last_mut() {
            line.style = Style::Factor;
        }
    }

    /// Costs, or benefits and net flows less damages, from the lines of the streams.
    fn sum_formula(&self, c: usize, costs: bool) -> String {
        let mut text = String::new();
        for (s, stream) in self.input.appraisal.choices[c].streams.iter().enumerate() {
            if (stream.kind == StreamKind::Cost) != costs {
                continue;
            }
            let minus = stream.kind == StreamKind::Damage;
            if minus || !text.is_empty() {
                text.push(if minus { '-' } else { '+' });
            }
            text.push_str(&absolute_cell(self.sections[c].streams + s as u32, col::REBUILT));
        }
        if text.is_empty() { "0".to_owned() } else { text }
    }
}
