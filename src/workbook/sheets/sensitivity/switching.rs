//! Switching values: each with the net present value there by the second route, live where one formula can tell it.

use hence_core::{Parameter, Spec, Where};

use super::super::lines::UNCHECKED;
use super::super::nets::{Band, Nets};
use super::super::second_route::{Form, Route};
use super::{Discount, Factors, Net, Page};
use crate::clock::base_year;
use crate::compare::{Entry, Moved, change_words, remark};
use crate::formulas::literal;
use crate::patch::Cached;
use crate::tolerance::RELATIVE;
use crate::writer::Style;

/// What a value is called whose net present value is still zero, and one whose is not.
const ZERO: &str = "zero";
const MOVED: &str = "moved since";
/// The same of numbers as computed at the fill.
const ZERO_AT_FILL: &str = "zero at the fill";
const NOT_ZERO: &str = "not zero";

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

    /// The value put back: live where one formula can tell it, else by the second route as at the fill.
    fn proof(&mut self, c: usize, other: Option<usize>, parameter: Parameter, x: f64) {
        let cell = self.here(3);
        let discount = match parameter {
            Parameter::Rate => Some(Discount::flat(cell, x)),
            _ => self.discount_with(c, other, parameter, &cell, x),
        };
        let net = discount.and_then(|discount| self.net_at(c, other, &discount));
        let Some(Net { formula, value, gross }) = net.filter(|net| net.value.is_finite()) else {
            self.sheet.paragraph(self.row, 4, 6, Style::Wrapped, format!("  {UNCHECKED}"));
            return;
        };
        let allowed = (RELATIVE * gross).max(1e-12);
        self.sheet.number(self.row, 5, Style::Difference, allowed);
        let zero = value.abs() <= allowed;
        let Some(text) = formula else {
            self.sheet.number(self.row, 4, Style::Difference, value.abs());
            self.sheet.text(self.row, 6, Style::Result, if zero { ZERO_AT_FILL } else { NOT_ZERO });
            return;
        };
        let distance = Cached::Number(value.abs());
        self.sheet.formula(self.row, 4, Style::Difference, format!("ABS({text})"), distance);
        let (found, most) = (self.here(4), self.here(5));
        let text = format!("IF({found}<={most},\"{ZERO}\",\"{MOVED}\")");
        let result = if zero { ZERO } else { MOVED };
        self.sheet.formula(self.row, 6, Style::Result, text, Cached::Text(result.to_owned()));
    }

    /// The second route to the Ramsey basis with a parameter at the value of a cell; none where there is none, or where the
    /// flows are dated otherwise than on the checks sheet.
    fn discount_with(
        &self,
        c: usize,
        other: Option<usize>,
        parameter: Parameter,
        cell: &str,
        x: f64,
    ) -> Option<Discount> {
        let spec = self.told.comparison.ramsey_spec.as_ref()?;
        let reach = |c: usize| self.nets[c].as_ref().map(Nets::reach);
        let (mut lowest, mut highest) = reach(c)?;
        if let Some(other) = other {
            let (low, high) = reach(other)?;
            (lowest, highest) = (lowest.min(low), highest.max(high));
        }
        let base = base_year(&self.input.appraisal.choices[c].base.value);
        let at = Where { base_year: base, length: Some(highest) };
        let route = Route::of(&parameter.at(spec, x)?, &at, lowest, highest)?;
        let bands = bands(&route, spec, parameter, cell);
        Some(Discount { bands, factors: Factors::Route(route) })
    }
}

/// The yearly rates of a second route as formulas, one parameter standing in a cell; none where they change every year.
fn bands(route: &Route, spec: &Spec, parameter: Parameter, cell: &str) -> Option<Vec<Band>> {
    let [(_, form)] = route.parts.as_slice() else { return None };
    let (rule, preferences, growths, continuous) = match form {
        Form::Rate { rule, preferences, x, continuous } => (rule, preferences, vec![(0.0, *x)], *continuous),
        Form::Chain { rule, preferences, bands } => (rule, preferences, bands.clone(), false),
        _ => return None,
    };
    let plus = |more: f64| {
        if more == 0.0 { cell.to_owned() } else { format!("({cell}+{})", literal(more)) }
    };
    let (hazard, first) = (hazard(spec)?, growths.first()?.1);
    let rho = if parameter == Parameter::Preference { plus(hazard) } else { literal(preferences.rho) };
    let eta = if parameter == Parameter::Elasticity { cell.to_owned() } else { literal(preferences.eta) };
    let rate = |growth: f64| {
        let growth = if parameter == Parameter::Growth { plus(growth - first) } else { literal(growth) };
        let text = rule.formula(&growth, &rho, &eta, &literal(preferences.sd));
        if continuous { format!("(EXP({text})-1)") } else { format!("({text})") }
    };
    Some(growths.iter().map(|(after, growth)| Band { after: *after, rate: rate(*growth) }).collect())
}

fn hazard(spec: &Spec) -> Option<f64> {
    match spec {
        Spec::Ramsey { hazard, .. }
        | Spec::UncertainGrowth { hazard, .. }
        | Spec::GrowthRegimes { hazard, .. } => Some(*hazard),
        _ => None,
    }
}
