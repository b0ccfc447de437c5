//! What follows the last year by the second route: geometric sums, band by band, in plain arithmetic and as cells.

use chrono::Datelike;
use hence_core::Tail;

use super::checks::{Maker, absolute_cell};
use super::lines::col;
use super::offsets::shift;
use super::rebuild::{Rebuilt, base_year, constant};
use super::second_route::Form;
use crate::adjust;
use crate::appraisal::{Label, Stream};
use crate::formulas::scale;
use crate::writer::MAX_FORMULA;

/// A number with the formula that gives it.
type Priced = (String, f64);

impl Maker<'_> {
    /// The value of what follows the last year of a stream; none without a tail, and where there is no second route
    /// (gamma and whole-horizon rates, flows before the base).
    pub(super) fn rebuilt_tail(&self, c: usize, s: usize) -> Option<Priced> {
        let stream = &self.input.appraisal.choices[c].streams[s];
        let choice = &self.input.appraisal.choices[c];
        let tail = &adjust::tail(stream, choice).ok()??;
        let count = self.further(c, tail)?;
        let rebuilt = self.rebuilt_of(c, Some(s));
        let last = rebuilt.offsets.len().checked_sub(1)?;
        let row = self.sections[c].years + last as u32;
        let cell = absolute_cell(row, col::OFFSET);
        // An averaged flow stands half at each end of its year.
        let starts: &[f64] = if rebuilt.averaged { &[0.0, 1.0] } else { &[0.0] };
        let share = 1.0 / starts.len() as f64;
        let (mut texts, mut value) = (Vec::new(), 0.0);
        for start in starts {
            let t = rebuilt.offsets[last] - start;
            let (text, unit) = self.per_unit(rebuilt, tail, count, &format!("({cell}-{start})"), t)?;
            texts.push(text);
            value += share * unit;
        }
        let flow = absolute_cell(row, col::FLOWS + s as u32);
        let (by, times) = self.multiplier(c, s, last).unwrap_or((String::new(), 1.0));
        let by = if by.is_empty() { by } else { format!("*{by}") };
        let text = format!("{}{flow}{by}*{share}*({})", scale(stream, self.home), texts.join("+"));
        let total = last_flow(stream)? * times * value;
        (text.len() <= MAX_FORMULA && total.is_finite()).then_some((text, total))
    }

    /// How many flows follow; none of the inner option is without end.
    fn further(&self, c: usize, tail: &Tail) -> Option<Option<f64>> {
        let Some(to) = tail.to else { return Some(None) };
        let choice = &self.input.appraisal.choices[c];
        let label = self.input.appraisal.axes[choice.axis].labels.last()?;
        let years = match (to, label) {
            (1000.., Label::Date(date)) => f64::from(to - date.year()),
            (_, label) => {
                let end = if to < 1000 { to } else { to - base_year(&choice.base.value)? };
                let timed = !matches!(label, Label::Date(_) | Label::Offset(_));
                let shift = if timed { shift(self.input.outcomes[c].timing) } else { 0.0 };
                f64::from(end) - (self.rebuilt(c).offsets.last()? - shift)
            }
        };
        Some(Some((years / f64::from(tail.every)).floor()))
    }

    /// The value per unit of the last flow, which stands at offset `t` (in cell `cell`).
    fn per_unit(
        &self,
        rebuilt: &Rebuilt,
        tail: &Tail,
        count: Option<f64>,
        cell: &str,
        t: f64,
    ) -> Option<Priced> {
        let route = rebuilt.route.as_ref()?;
        let (mut texts, mut value) = (Vec::new(), 0.0);
        for (k, (weight, form)) in route.parts.iter().enumerate() {
            let at = rebuilt.term(k, form, cell);
            let mut part = Part { tail, count, t, texts: Vec::new(), value: 0.0 };
            match form {
                Form::Rate { rule, preferences, x, continuous } => {
                    let rate = rule.rate(*x, *preferences);
                    let yearly = if *continuous { rate.exp() } else { 1.0 + rate };
                    let cell = absolute_cell(rebuilt.row(k) + 5, 1);
                    let text = if *continuous { format!("EXP({cell})") } else { format!("(1+{cell})") };
                    part.stretch(&[(text, yearly, f64::INFINITY)])?;
                }
                Form::Chain { rule, preferences, bands } if t >= 0.0 => {
                    let uppers = bands.iter().skip(1).map(|band| band.0).chain([f64::INFINITY]);
                    let stretches: Vec<(String, f64, f64)> = bands
                        .iter()
                        .zip(uppers)
                        .enumerate()
                        .map(|(i, (band, upper))| {
                            let cell = absolute_cell(rebuilt.row(k) + 4 + i as u32, 2);
                            (format!("(1+{cell})"), 1.0 + rule.rate(band.1, *preferences), upper)
                        })
                        .collect();
                    part.stretch(&stretches)?;
                }
                _ => return None,
            }
            let weight_cell = absolute_cell(rebuilt.row(k), 2);
            texts.push(format!("{weight_cell}*{at}*({})", part.texts.join("+")));
            value += weight * route.part_factor(k, t) * part.value;
        }
        Some((texts.join("+"), value))
    }
}

/// The last flow after sign, unit and uplift; a residual value is not part of what goes on.
fn last_flow(stream: &Stream) -> Option<f64> {
    Some(stream.sign * stream.unit * (1.0 + stream.uplift.value) * stream.raw.last()?)
}

/// A tail under one curve, relative to the factor at its last flow.
struct Part<'a> {
    tail: &'a Tail,
    count: Option<f64>,
    t: f64,
    texts: Vec<String>,
    value: f64,
}

impl Part<'_> {
    /// Adds the flows of each stretch of one yearly divisor: (its text, its value, the last offset).
    fn stretch(&mut self, stretches: &[(String, f64, f64)]) -> Option<()> {
        let every = f64::from(self.tail.every);
        let growth = 1.0 + self.tail.growth;
        let (mut gone, mut passed, mut divisor) = (0.0, String::from("1"), 1.0);
        let mut from = self.t;
        for (text, yearly, upper) in stretches {
            if *upper <= self.t {
                continue;
            }
            let all = self.count.unwrap_or(f64::INFINITY);
            let until = ((upper - self.t) / every).floor().min(all);
            let flows = until - gone;
            if flows > 0.0 {
                let first = gone + 1.0;
                let inside = self.t + first * every - from;
                let step = format!("({}/{text})^{every}", constant(growth));
                let ratio = (growth / yearly).powf(every);
                let lead =
                    format!("{}^{}/({passed}*{text}^{})", constant(growth), first * every, constant(inside));
                let lead_value = growth.powf(first * every) / (divisor * yearly.powf(inside));
                let (sum, sum_value) = if flows.is_finite() {
                    let level = (ratio - 1.0).abs() < 1e-12;
                    let value = if level { flows } else { (1.0 - ratio.powf(flows)) / (1.0 - ratio) };
                    let text =
                        if level { flows.to_string() } else { format!("(1-{step}^{flows})/(1-{step})") };
                    (text, value)
                } else if ratio < 1.0 {
                    (format!("1/(1-{step})"), 1.0 / (1.0 - ratio))
                } else {
                    return None;
                };
                self.texts.push(format!("{lead}*{sum}"));
                self.value += lead_value * sum_value;
                gone = until;
            }
            if upper.is_infinite() || gone >= all {
                break;
            }
            let inside = upper - from;
            passed.push_str(&format!("*{text}^{}", constant(inside)));
            divisor *= yearly.powf(inside);
            from = *upper;
        }
        if self.texts.is_empty() {
            self.texts.push("0".to_owned());
        }
        Some(())
    }
}
