//! The exact value of flows against consumption by the second route: powers (or logarithms) over the analyst's cells.

use super::checks::{Maker, absolute_cell, column, place, tolerance};
use super::lines::{Line, Live, col};
use super::rebuild::constant;
use crate::formulas::{refer, refer_cell};
use crate::outcome::ExactValue;
use crate::patch::Cached;
use crate::writer::{MAX_FORMULA, Sheet, Style};

/// Nearer than this to an elasticity of 1 (but not at it) a power of 1 - elasticity loses too many digits to check by.
const TOO_NEAR: f64 = 1e-6;

/// An amount in units of consumption at the base, as a formula and a number.
struct Parts {
    /// Consumption at the base.
    base: (String, f64),
    /// The flow at the base itself.
    base_flow: (String, f64),
    /// The sum that the amounts are made from: of D C/c_0 ln((C + x)/C) at an elasticity of 1, else of
    /// D C/c_0 (((C + x)/C)^(1 - elasticity) - 1).
    log_sum: (String, f64),
    power_sum: (String, f64),
    /// The elasticity.
    eta: (String, f64),
}

impl Maker<'_> {
    /// How many lines an option has for its exact value.
    pub(super) fn welfare_rows(&self, c: usize) -> u32 {
        let amounts =
            |value: &ExactValue| 1 + [value.equivalent, value.compensating].iter().flatten().count();
        self.input.outcomes[c].exact.as_ref().map_or(0, |value| amounts(value) as u32)
    }

    /// The column of consumption, after the net flows.
    fn consumption_column(&self, c: usize) -> u32 {
        self.net_column(c) + 1
    }

    /// Pulls consumption to this sheet.
    pub(super) fn consumption(&self, sheet: &mut Sheet, c: usize) {
        let (Some(value), Some(path)) =
            (&self.input.outcomes[c].exact, &self.input.appraisal.choices[c].welfare.consumption)
        else {
            return;
        };
        let (at, into) = (self.sections[c], self.consumption_column(c));
        sheet.text(at.top, into, Style::Heading, "consumption");
        sheet.columns(into, into, 14.0);
        for (i, level) in value.consumption.iter().enumerate() {
            let cell = refer_cell(self.home, &path.at.sheet, path.at.nth(i));
            let text = if path.unit == 1.0 { cell } else { format!("{}*{cell}", constant(path.unit)) };
            sheet.formula(at.years + i as u32, into, Style::Money, text, Cached::Number(*level));
        }
    }

    /// The marginal value and the exact ones.
    pub(super) fn welfare_lines(&self, c: usize, lines: &mut Vec<(u32, Line)>) {
        let (Some(value), Some(path)) =
            (&self.input.outcomes[c].exact, &self.input.appraisal.choices[c].welfare.consumption)
        else {
            return;
        };
        let factors = &self.input.outcomes[c].factors;
        let dot = |of: &[f64]| of.iter().zip(factors).map(|(x, d)| (x * d).abs()).sum::<f64>();
        let gross = dot(&value.flows);
        // Powers near 1 leave rounding in proportion to consumption.
        let allowed = tolerance(gross) + 1e-14 * dot(&value.consumption);
        let parts = self.parts(c, value);
        let live = |made: Option<(String, f64)>| {
            let made = made.filter(|(text, x)| text.len() <= MAX_FORMULA && x.is_finite());
            made.map(|(text, x)| Live::number(text, x))
        };
        let mut row = self.sections[c].welfare;
        let mut add = |what: &str, recorded: f64, allowed: f64, rebuilt: Option<Live>| {
            let at = place(&path.at.sheet, path.at.nth(0));
            let mut line = Line::cell(at, what, Live::constant(recorded), None, allowed);
            line.rebuilt = rebuilt;
            lines.push((row, line));
            row += 1;
        };
        add("Marginal value of the flows", value.marginal, tolerance(gross), live(self.marginal(c)));
        if let Some(amount) = value.equivalent {
            let rebuilt = parts.as_ref().and_then(|parts| live(Some(parts.equivalent())));
            add("Exact value (equivalent variation)", amount, allowed, rebuilt);
        }
        if let Some(amount) = value.compensating {
            let rebuilt = parts.as_ref().and_then(|parts| live(Some(parts.compensating())));
            add("Exact value (compensating variation)", amount, allowed, rebuilt);
        }
    }

    /// The net flows over the baseline's, as a formula over their columns and as numbers; none without a second route.
    fn net_flows(&self, c: usize) -> Option<(String, Vec<f64>)> {
        let numbers = |c: usize| -> Option<Vec<f64>> {
            (0..self.input.outcomes[c].net.len()).map(|i| self.net(c, i).map(|(_, x)| x)).collect()
        };
        let range = |c: usize| {
            let at = self.sections[c];
            column(self.net_column(c), at.years, at.streams - 1)
        };
        let mut flows = numbers(c).filter(|_| self.has_route(c, None))?;
        let Some(base) = self.input.appraisal.baseline else { return Some((range(c), flows)) };
        flows.iter_mut().zip(numbers(base)?).for_each(|(x, less)| *x -= less);
        Some((format!("({}-{})", range(c), range(base)), flows))
    }

    fn marginal(&self, c: usize) -> Option<(String, f64)> {
        let (text, flows) = self.net_flows(c)?;
        let (first, last) = self.factor_rows(c, None);
        let rebuilt = self.rebuilt(c);
        let terms = flows.iter().enumerate().map(|(i, x)| rebuilt.factor(i).map(|d| d * x));
        let sum = terms.sum::<Option<f64>>()?;
        Some((format!("SUMPRODUCT({},{text})", column(col::REBUILT, first, last)), sum))
    }

    fn parts(&self, c: usize, value: &ExactValue) -> Option<Parts> {
        let eta = value.elasticity.value;
        if eta != 1.0 && (eta - 1.0).abs() < TOO_NEAR {
            return None;
        }
        let (x, flows) = self.net_flows(c)?;
        let (at, into, years) = (self.sections[c], self.consumption_column(c), self.factor_rows(c, None));
        let path = column(into, at.years, at.streams - 1);
        let factors = column(col::REBUILT, years.0, years.1);
        let cell = |i: usize| absolute_cell(at.years + i as u32, into);
        let (before, share) = (value.at_base.before, value.at_base.share);
        let level = &value.consumption;
        let base = if share == 0.0 {
            (cell(before), level[before])
        } else {
            let text = format!("({0}*({1}/{0})^{2})", cell(before), cell(before + 1), constant(share));
            (text, level[before] * (level[before + 1] / level[before]).powf(share))
        };
        let at_base = self.rebuilt(c).offsets.iter().position(|t| *t == 0.0);
        let flow_cell =
            |c: usize, i: usize| absolute_cell(self.sections[c].years + i as u32, self.net_column(c));
        let base_flow = match (at_base, self.input.appraisal.baseline) {
            (None, _) => ("0".to_owned(), 0.0),
            (Some(i), None) => (flow_cell(c, i), flows[i]),
            (Some(i), Some(b)) => (format!("({}-{})", flow_cell(c, i), flow_cell(b, i)), flows[i]),
        };
        let rebuilt = self.rebuilt(c);
        let sum = |f: &dyn Fn(f64) -> f64| -> Option<f64> {
            let terms = flows.iter().zip(level).enumerate().map(|(i, (x, c))| {
                let d = rebuilt.factor(i)?;
                Some(d * c / base.1 * f((c + x) / c))
            });
            terms.sum()
        };
        let at = value.elasticity.at.as_ref();
        let eta_text = at.map_or_else(|| constant(eta), |at| refer(self.home, at));
        let ratio = format!("(({path}+{x})/{path})");
        Some(Parts {
            log_sum: (format!("SUMPRODUCT({factors},{path}/{}*LN{ratio})", base.0), sum(&f64::ln)?),
            power_sum: (
                format!("SUMPRODUCT({factors},{path}/{}*({ratio}^(1-{eta_text})-1))", base.0),
                sum(&|r| r.powf(1.0 - eta) - 1.0)?,
            ),
            eta: (eta_text, eta),
            base,
            base_flow,
        })
    }
}

impl Parts {
    /// c_0 (exp(S) - 1), or c_0 ((1 + S)^(1/(1 - eta)) - 1).
    fn equivalent(&self) -> (String, f64) {
        let (base, c) = (&self.base.0, self.base.1);
        let (eta, k) = (&self.eta.0, 1.0 - self.eta.1);
        let text = format!(
            "IF({eta}=1,{base}*(EXP({})-1),{base}*((1+{})^(1/(1-{eta}))-1))",
            self.log_sum.0, self.power_sum.0
        );
        let value = if k == 0.0 { self.log_sum.1.exp() } else { (1.0 + self.power_sum.1).powf(1.0 / k) };
        (text, c * (value - 1.0))
    }

    /// The same from consumption with the flow at the base, d = c_0 + x_0, downwards.
    fn compensating(&self) -> (String, f64) {
        let (eta, k) = (&self.eta.0, 1.0 - self.eta.1);
        let (with, d) = (format!("({}+{})", self.base.0, self.base_flow.0), self.base.1 + self.base_flow.1);
        let text = format!(
            "IF({eta}=1,{with}*(1-EXP(0-{})),{with}*(1-(1-{}*({}/{with})^(1-{eta}))^(1/(1-{eta}))))",
            self.log_sum.0, self.power_sum.0, self.base.0
        );
        let value = if k == 0.0 {
            (-self.log_sum.1).exp()
        } else {
            (1.0 - self.power_sum.1 * (self.base.1 / d).powf(k)).powf(1.0 / k)
        };
        (text, d * (1.0 - value))
    }
}
