//! Switching values: each with the net present value there, live where the curve is one yearly rate.

use hence_core::{Compounding, Parameter, Spec};

use super::super::lines::UNCHECKED;
use super::Page;
use crate::compare::{Entry, Moved, change_words, remark};
use crate::patch::Cached;
use crate::writer::Style;

/// What a value is called whose net present value is still zero, and one whose is not.
const ZERO: &str = "zero";
const MOVED: &str = "moved since";

impl Page<'_> {
    pub(super) fn switching(&mut self) {
        let told = &self.told.comparison;
        let words = match &told.ramsey {
            Some(basis) => format!(
                "Every value at which two options are equal: of a flat rate in place of the basis, and of preference, \
                 elasticity and growth of {basis}, each moved by itself."
            ),
            None => "Every flat yearly rate, in place of the basis, at which two options are equal. No basis here is \
                     stated by preference, elasticity and growth, so these have none."
                .to_owned(),
        };
        self.section("Switching values", &words);
        for change in &told.changes {
            let text = format!("The best option changes at {}.", change_words(told, change));
            self.sheet.paragraph(self.row, 0, 6, Style::Strong, text);
            self.row += 1;
        }
        if told.changes.is_empty() && told.options.len() > 1 {
            let text = "The best option changes nowhere in the intervals searched.";
            self.sheet.paragraph(self.row, 0, 6, Style::Strong, text);
            self.row += 1;
        }
        self.headings(&[
            "Option",
            "Equal to",
            "Parameter",
            "Value",
            "Distance from zero",
            "Allowed",
            "Result",
        ]);
        for entry in &told.switching {
            let Moved::Parameter(parameter) = entry.moved else { continue };
            let searched = parameter == Parameter::Rate || told.ramsey.is_some();
            let own = told.baseline == Some(entry.option)
                || told.baseline.is_some_and(|b| entry.against == Some(b));
            let again = entry.against.is_some_and(|other| other < entry.option);
            if searched && !own && !again {
                self.values(entry, parameter);
            }
        }
        self.row += 1;
    }

    fn values(&mut self, entry: &Entry, parameter: Parameter) {
        let told = &self.told.comparison;
        let other = entry.against.or(told.baseline);
        let head = |page: &mut Page<'_>| {
            page.sheet.text(page.row, 0, Style::Wrapped, &told.options[entry.option]);
            page.sheet.text(page.row, 1, Style::Wrapped, other.map_or("zero", |i| told.options[i].as_str()));
            page.sheet.text(page.row, 2, Style::Wrapped, parameter.to_string());
        };
        for &x in &entry.values {
            head(self);
            let style = if parameter == Parameter::Elasticity { Style::Value } else { Style::Percent };
            self.sheet.number(self.row, 3, style, x);
            self.proof(entry.option, other, parameter, x);
            self.row += 1;
        }
        let left = remark(entry);
        if entry.values.is_empty() || !left.is_empty() {
            head(self);
            self.sheet.text(self.row, 3, Style::Instead, "none");
            if !left.is_empty() {
                if !entry.values.is_empty() {
                    self.sheet.text(self.row, 3, Style::Instead, "and perhaps");
                }
                self.sheet.paragraph(self.row, 4, 6, Style::Wrapped, format!("  {left}"));
            }
            self.row += 1;
        }
    }

    /// The value put back, live.
    fn proof(&mut self, c: usize, other: Option<usize>, parameter: Parameter, x: f64) {
        let cell = self.here(3);
        let rate = match parameter {
            Parameter::Rate => Some((cell, x)),
            _ => self.rate_with(parameter, &cell, x),
        };
        let home = self.input.names.sensitivity.clone();
        let live = rate.and_then(|(text, rate)| self.net_at(&home, c, other, &text, rate));
        let Some((text, net, gross)) = live.filter(|(_, net, _)| net.is_finite()) else {
            self.sheet.paragraph(self.row, 4, 6, Style::Wrapped, format!("  {UNCHECKED}"));
            return;
        };
        let allowed = (1e-9 * gross).max(1e-12);
        self.sheet.formula(self.row, 4, Style::Difference, format!("ABS({text})"), Cached::Number(net.abs()));
        self.sheet.number(self.row, 5, Style::Difference, allowed);
        let (found, most) = (self.here(4), self.here(5));
        let text = format!("IF({found}<={most},\"{ZERO}\",\"{MOVED}\")");
        let result = if net.abs() <= allowed { ZERO } else { MOVED };
        self.sheet.formula(self.row, 6, Style::Result, text, Cached::Text(result.to_owned()));
    }

    /// The yearly rate with a parameter at the value of a cell, in brackets; none where the curve is not one yearly rate,
    /// or where the flows are dated otherwise than on the checks sheet.
    fn rate_with(&self, parameter: Parameter, cell: &str, x: f64) -> Option<(String, f64)> {
        let declared = &self.input.outcomes[0].basis;
        if self.told.comparison.ramsey.as_ref() != Some(&declared.canonical()) {
            return None;
        }
        let number = |value: f64, own: Parameter| {
            if own == parameter { cell.to_owned() } else { crate::formulas::literal(value) }
        };
        let with = |value: f64, own: Parameter| if own == parameter { x } else { value };
        let (head, growth, caution, compounding) = match declared.spec() {
            Spec::Ramsey { preference, hazard, elasticity, growth, exact: false, compounding } => {
                let [band] = growth.as_slice() else { return None };
                if band.to.is_some() {
                    return None;
                }
                ((*preference, *hazard, *elasticity), band.value, (0.0, 0.0), *compounding)
            }
            Spec::UncertainGrowth {
                preference,
                hazard,
                elasticity,
                mean,
                sd,
                log,
                persistence: None,
                compounding,
            } => {
                let compounding = if *log { Compounding::Continuous } else { *compounding };
                let more = if *log { 0.0 } else { 1.0 };
                ((*preference, *hazard, *elasticity), *mean, (*sd, more), compounding)
            }
            _ => return None,
        };
        let (preference, hazard, elasticity) = head;
        let eta = number(elasticity, Parameter::Elasticity);
        let mut text = format!(
            "{}+{}+{eta}*{}",
            number(preference, Parameter::Preference),
            crate::formulas::literal(hazard),
            number(growth, Parameter::Growth)
        );
        let e = with(elasticity, Parameter::Elasticity);
        let (sd, more) = caution;
        let mut rate = with(preference, Parameter::Preference) + hazard + e * with(growth, Parameter::Growth);
        if sd != 0.0 {
            let sd_text = crate::formulas::literal(sd);
            text.push_str(&format!("-{eta}*({eta}+{more})*{sd_text}^2/2"));
            rate -= e * (e + more) * sd * sd / 2.0;
        }
        Some(match compounding {
            Compounding::Yearly => (format!("({text})"), rate),
            Compounding::Continuous => (format!("(EXP({text})-1)"), rate.exp_m1()),
        })
    }
}
