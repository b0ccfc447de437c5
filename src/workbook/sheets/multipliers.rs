//! What multiplies flows year by year, by a second route: from the analyst's own years, index and rates.

use chrono::Datelike;

use super::checks::{Maker, absolute_cell, label_live, place};
use super::lines::{Line, Live, col};
use super::periods;
use super::rebuild::{base_year, constant};
use crate::appraisal::{Axis, Base, Choice, Given, Label, Levels, Stream};
use crate::formulas::{nth, refer, refer_cell};

impl Maker<'_> {
    /// The series that an option's streams use, in the order of its streams.
    pub(super) fn series_in(&self, c: usize) -> Vec<usize> {
        let mut all = Vec::new();
        for s in 0..self.input.appraisal.choices[c].streams.len() {
            if let Some(series) = self.layout.series_of(c, s).filter(|series| !all.contains(series)) {
                all.push(series);
            }
        }
        all
    }

    /// The multiplier of a stream's flow: its cell by the second route, and its value; none where there is none.
    pub(super) fn multiplier(&self, c: usize, s: usize, i: usize) -> Option<(String, f64)> {
        let (first, _) = self.multiplier_rows(c, s)?;
        let cell = absolute_cell(first + i as u32, col::REBUILT);
        Some((cell, self.rebuilt_multiplier(c, s, i)))
    }

    /// The first and last row of a stream's multipliers.
    pub(super) fn multiplier_rows(&self, c: usize, s: usize) -> Option<(u32, u32)> {
        let series = self.layout.series_of(c, s)?;
        let position = self.series_in(c).iter().position(|k| *k == series)? as u32;
        let years = self.layout.block(c).rows;
        let first = self.sections[c].multipliers + position * years;
        Some((first, first + years - 1))
    }

    /// A line for each year of each series.
    pub(super) fn multiplier_lines(&self, c: usize, lines: &mut Vec<(u32, Line)>) {
        let years = self.layout.block(c).rows;
        for (position, k) in self.series_in(c).into_iter().enumerate() {
            let users = &self.layout.series[k].users;
            let Some(&(_, s)) = users.iter().find(|(choice, _)| *choice == c) else { continue };
            for i in 0..years {
                let row = self.sections[c].multipliers + position as u32 * years + i;
                lines.push((row, self.multiplier_line(c, s, i as usize, row)));
            }
        }
    }

    fn multiplier_line(&self, c: usize, s: usize, i: usize, row: u32) -> Line {
        let choice = &self.input.appraisal.choices[c];
        let stream = &choice.streams[s];
        let axis = &self.input.appraisal.axes[choice.axis];
        let label = &axis.labels[i];
        let (value, style) = label_live(label, self.input.appraisal.date1904);
        let source = refer_cell(self.home, &axis.at.sheet, axis.at.nth(i));
        let cells = self.layout.multipliers(c, s).unwrap_or_else(|| axis.at.hull());
        let cell = nth(cells.range, i);
        let mut line = Line::factor(place(&cells.sheet, cell), Live { formula: source, value }, style);
        let label_cell = absolute_cell(row, col::WHAT);
        let years = match periods::formula(&label_cell, axis, choice, i, periods::MIDDLES, self.home) {
            Some(middles) => format!("{middles}-{}", constant(price_shift(choice))),
            None => years_formula(&label_cell, label, choice, self.home),
        };
        line.offset = Some(Live::number(years, price_years(axis, i, choice)));
        let mut text =
            formula(stream, choice, i, self.price_base(c), &absolute_cell(row, col::OFFSET), self.home);
        if let Some(weight) = self.weight_formula(c, s) {
            text = if text.is_empty() { weight } else { format!("{text}*{weight}") };
        }
        line.rebuilt = Some(Live::number(text, self.rebuilt_multiplier(c, s, i)));
        let recorded = self.input.outcomes[c].streams[s].multipliers.as_ref().map_or(1.0, |all| all[i]);
        line.recorded = Live::number(refer_cell(self.home, &cells.sheet, cell), recorded);
        line
    }

    /// The weight of a stream's flows from the cells of incomes and elasticity.
    fn weight_formula(&self, c: usize, s: usize) -> Option<String> {
        let choice = &self.input.appraisal.choices[c];
        let cell = |given: &Given<f64>| {
            given.at.as_ref().map_or_else(|| constant(given.value), |at| refer(self.home, at))
        };
        let income = choice.streams[s].income.as_ref()?;
        let reference = choice.welfare.reference.as_ref()?;
        let eta = self.input.outcomes[c].elasticity.as_ref()?;
        Some(format!("({}/{})^{}", cell(reference), cell(income), cell(eta)))
    }

    /// The place among the years of the price base.
    fn price_base(&self, c: usize) -> usize {
        let choice = &self.input.appraisal.choices[c];
        let axis = &self.input.appraisal.axes[choice.axis];
        (0..axis.labels.len()).position(|i| price_years(axis, i, choice) == 0.0).unwrap_or(0)
    }

    fn rebuilt_multiplier(&self, c: usize, s: usize, i: usize) -> f64 {
        let choice = &self.input.appraisal.choices[c];
        let n = price_years(&self.input.appraisal.axes[choice.axis], i, choice);
        let deflator = match choice.prices.levels.as_ref().map(|given| &given.value) {
            None => 1.0,
            Some(Levels::Inflation(rate)) => 1.0 / (1.0 + rate).powf(n),
            Some(Levels::Index(levels)) => levels[self.price_base(c)] / levels[i],
        };
        let growth = choice.streams[s].growth.as_ref().map_or(0.0, |given| given.value);
        let elasticity = self.input.outcomes[c].elasticity.as_ref();
        let weight = match (&choice.streams[s].income, &choice.welfare.reference, elasticity) {
            (Some(income), Some(reference), Some(eta)) => (reference.value / income.value).powf(eta.value),
            _ => 1.0,
        };
        deflator * (1.0 + growth).powf(n + growth_lead(choice)) * weight
    }
}

/// The multiplier from the cells that it is made of; `n` holds the years from the price base.
fn formula(stream: &Stream, choice: &Choice, i: usize, base: usize, n: &str, home: &str) -> String {
    let mut parts = Vec::new();
    if let Some(given) = &choice.prices.levels {
        parts.push(match (&given.value, &given.at) {
            (Levels::Inflation(rate), at) => {
                let rate = at.as_ref().map_or_else(|| constant(*rate), |at| refer(home, at));
                format!("(1+{rate})^(-{n})")
            }
            (Levels::Index(_), Some(at)) => {
                let level = |i| refer_cell(home, &at.sheet, nth(at.range, i));
                format!("{}/{}", level(base), level(i))
            }
            (Levels::Index(levels), None) => format!("{}/{}", constant(levels[base]), constant(levels[i])),
        });
    }
    if let Some(given) = &stream.growth {
        let growth = given.at.as_ref().map_or_else(|| constant(given.value), |at| refer(home, at));
        parts.push(match choice.prices.growth_from.filter(|_| growth_lead(choice) != 0.0) {
            Some(from) => format!("(1+{growth})^({n}+{}-{from})", price_base_cell(choice, home)),
            None => format!("(1+{growth})^{n}"),
        });
    }
    parts.join("*")
}

/// Years to the price base from the year from which prices grow, where the command line gave another base or prices.
fn growth_lead(choice: &Choice) -> f64 {
    let to = choice.prices.year().or(base_year(&choice.base.value));
    match (to, choice.prices.growth_from) {
        (Some(to), Some(from)) => f64::from(to) - f64::from(from),
        _ => 0.0,
    }
}

/// Years from the base year to the year of the price base.
fn price_shift(choice: &Choice) -> f64 {
    let base = base_year(&choice.base.value);
    choice.prices.year().map_or(0.0, |year| f64::from(year - base.unwrap_or(0)))
}

/// Years from the price base to a label.
fn price_years(axis: &Axis, i: usize, choice: &Choice) -> f64 {
    if let Some(spans) = &axis.spans {
        return periods::rebuilt(axis, spans, choice, periods::MIDDLES)[i] - price_shift(choice);
    }
    let label = &axis.labels[i];
    let base = base_year(&choice.base.value);
    let from = f64::from(choice.prices.year().or(base).unwrap_or(0));
    match label {
        Label::Year(year) | Label::Financial(year, _) => f64::from(*year) - from,
        Label::Date(date) => f64::from(date.year()) - from,
        Label::Number(n) => f64::from(*n) + f64::from(base.unwrap_or(0)) - from,
        Label::Offset(t) => t + f64::from(base.unwrap_or(0)) - from,
    }
}

/// The year of the price base as stated or, where no price year is, from the base's cell.
fn price_base_cell(choice: &Choice, home: &str) -> String {
    let base_cell = choice.base.at.as_ref().map(|at| refer(home, at));
    match (choice.prices.year(), &choice.base.value, base_cell) {
        (Some(year), ..) => year.to_string(),
        (None, Base::Year(_), Some(cell)) => cell,
        (None, Base::Date(_), Some(cell)) => format!("YEAR({cell})"),
        (None, ..) => base_year(&choice.base.value).unwrap_or(0).to_string(),
    }
}

/// The same from the label's cell and, where no price year is stated, the base's.
fn years_formula(label_cell: &str, label: &Label, choice: &Choice, home: &str) -> String {
    let stated = choice.prices.year();
    let base = base_year(&choice.base.value).unwrap_or(0);
    let from = price_base_cell(choice, home);
    match label {
        Label::Year(_) => format!("{label_cell}-{from}"),
        Label::Date(_) => format!("YEAR({label_cell})-{from}"),
        Label::Financial(year, text) if text.starts_with(&year.to_string()) => {
            format!("VALUE(LEFT({label_cell},4))-{from}")
        }
        // The text is compared, so that the constant counts only while the label stands.
        Label::Financial(year, text) => {
            format!("IF({label_cell}=\"{}\",{year},NA())-{from}", text.replace('"', "\"\""))
        }
        Label::Number(_) | Label::Offset(_) => match stated {
            None => label_cell.to_owned(),
            Some(year) => format!("{label_cell}-{}", constant(f64::from(year - base))),
        },
    }
}
