//! Where the rate comes from: preference, hazard, elasticity and growth, the steps between, and the rate, live.

use hence_core::{Band, Compounding, Edge, Spec};

use super::super::lines::{AGREES, DIFFERS, UNCHECKED};
use super::Page;
use crate::formulas::{FACTOR_TOLERANCE, nth, refer_cell};
use crate::patch::Cached;
use crate::writer::Style;

/// A figure: what it is, its formula (none for a figure of the basis), its value, and how it looks.
type Figure = (String, Option<String>, f64, Style);

impl Page<'_> {
    /// One derivation for each basis that is stated by its parts.
    pub(super) fn derivations(&mut self) {
        self.section("Where the rate comes from", "");
        for k in 0..self.layout.blocks.len() {
            self.derivation(k);
        }
        self.row += 1;
    }

    fn derivation(&mut self, k: usize) {
        let choice = self.layout.blocks[k].choice;
        let basis = &self.input.outcomes[choice].basis;
        let words = format!("{}: {}", basis.canonical(), basis.words());
        self.sheet.paragraph(self.row, 0, 6, Style::Strong, words);
        self.row += 1;
        match basis.spec().clone() {
            Spec::Ramsey { preference, hazard, elasticity, growth, exact, compounding } => {
                let rho = self.parts(preference, hazard, elasticity);
                for b in 0..growth.len() {
                    self.band(
                        k,
                        &growth,
                        b,
                        (rho.0.as_str(), rho.1),
                        (&rho.2, elasticity),
                        (exact, compounding),
                    );
                }
            }
            Spec::UncertainGrowth {
                preference,
                hazard,
                elasticity,
                mean,
                sd,
                log,
                persistence,
                compounding,
            } => {
                let (rho, rho_value, eta) = self.parts(preference, hazard, elasticity);
                let (name, more) = if log { ("Mean of log growth", 0.0) } else { ("Growth", 1.0) };
                let g = self.figure((name.to_owned(), None, mean, Style::Percent));
                let s = self.figure(("Standard deviation".to_owned(), None, sd, Style::Percent));
                let wealth = elasticity * mean;
                let text = Some(format!("{eta}*{g}"));
                let wealth_cell = self.figure(("Wealth effect".to_owned(), text, wealth, Style::Percent));
                if let Some(persistence) = persistence {
                    self.figure(("Persistence".to_owned(), None, persistence.phi, Style::Exact));
                    let text = "The rate changes from year to year: forward rates stand on Discounting, and their second \
                                route on the checks sheet.";
                    self.sheet.paragraph(self.row, 0, 6, Style::Wrapped, text);
                    self.row += 1;
                    return;
                }
                let caution = -elasticity * (elasticity + more) * sd * sd / 2.0;
                let text = Some(format!("-{eta}*({eta}+{more})*{s}^2/2"));
                let caution_cell =
                    self.figure(("Precautionary effect".to_owned(), text, caution, Style::Percent));
                let compounding = if log { Compounding::Continuous } else { compounding };
                let sum = format!("{rho}+{wealth_cell}+{caution_cell}");
                self.rate(k, "Rate", (&sum, rho_value + wealth + caution), compounding, (0.0, f64::INFINITY));
            }
            _ => {
                let text =
                    "The basis states rates, not the preference, elasticity and growth that they come from.";
                self.sheet.paragraph(self.row, 0, 6, Style::Wrapped, text);
                self.row += 1;
            }
        }
    }

    /// Preference, hazard and elasticity; the cell and value of preference and hazard together, the cell of the elasticity.
    fn parts(&mut self, preference: f64, hazard: f64, elasticity: f64) -> (String, f64, String) {
        self.headings(&["Figure", "Value", "Rate on Discounting", "Result"]);
        let delta = self.figure(("Pure time preference".to_owned(), None, preference, Style::Percent));
        let l = self.figure(("Hazard".to_owned(), None, hazard, Style::Percent));
        let eta = self.figure(("Elasticity of marginal utility".to_owned(), None, elasticity, Style::Exact));
        let text = Some(format!("{delta}+{l}"));
        let rho =
            self.figure(("Preference and hazard".to_owned(), text, preference + hazard, Style::Percent));
        (rho, preference + hazard, eta)
    }

    /// One figure; its cell.
    fn figure(&mut self, (label, text, value, style): Figure) -> String {
        self.sheet.text(self.row, 0, Style::Wrapped, label);
        match text {
            Some(text) => self.sheet.formula(self.row, 1, style, text, Cached::Number(value)),
            None => self.sheet.number(self.row, 1, style, value),
        }
        let cell = self.here(1);
        self.row += 1;
        cell
    }

    /// Growth of one band, the wealth effect and the rate.
    fn band(
        &mut self,
        k: usize,
        growth: &[Band],
        b: usize,
        (rho, rho_value): (&str, f64),
        (eta, elasticity): (&str, f64),
        (exact, compounding): (bool, Compounding),
    ) {
        let g = growth[b].value;
        let (words, within) = self.stretch(k, growth, b);
        let cell = self.figure((format!("Growth{words}"), None, g, Style::Percent));
        if exact {
            let text = format!("(1+{rho})*(1+{cell})^{eta}-1");
            let value = (1.0 + rho_value) * (1.0 + g).powf(elasticity) - 1.0;
            self.rate(k, &format!("Rate{words}"), (&text, value), Compounding::Yearly, within);
            return;
        }
        let wealth = elasticity * g;
        let text = Some(format!("{eta}*{cell}"));
        let wealth_cell = self.figure((format!("Wealth effect{words}"), text, wealth, Style::Percent));
        let text = format!("{rho}+{wealth_cell}");
        self.rate(k, &format!("Rate{words}"), (&text, rho_value + wealth), compounding, within);
    }

    /// The years of a band in words, and as offsets.
    fn stretch(&self, k: usize, growth: &[Band], b: usize) -> (String, (f64, f64)) {
        if growth.len() == 1 && growth[0].to.is_none() {
            return (String::new(), (0.0, f64::INFINITY));
        }
        let choice = &self.input.appraisal.choices[self.layout.blocks[k].choice];
        let base = crate::clock::base_year(&choice.base.value).unwrap_or(0);
        let offset = |edge: Edge| match edge {
            Edge::Offset(t) => t,
            Edge::Year(year) => f64::from(year - base),
        };
        let from = b.checked_sub(1).and_then(|before| growth[before].to).map_or(0.0, offset);
        match growth[b].to.map(offset) {
            Some(to) => (format!(", years {from} to {to}"), (from, to)),
            None => (format!(", after year {from}"), (from, f64::INFINITY)),
        }
    }

    /// The rate, and the forward rate on Discounting of a year that it holds in.
    fn rate(
        &mut self,
        k: usize,
        label: &str,
        (text, value): (&str, f64),
        compounding: Compounding,
        within: (f64, f64),
    ) {
        let (text, value, label) = match compounding {
            Compounding::Yearly => (text.to_owned(), value, format!("{label}, compounded yearly")),
            Compounding::Continuous => {
                self.figure((format!("{label}, continuous"), Some(text.to_owned()), value, Style::Percent));
                let cell = super::absolute_cell(self.row - 1, 1);
                (format!("EXP({cell})-1"), value.exp_m1(), format!("{label}, compounded yearly"))
            }
        };
        self.sheet.text(self.row, 0, Style::Strong, label);
        self.sheet.formula(self.row, 1, Style::Percent, text, Cached::Number(value));
        let choice = self.layout.blocks[k].choice;
        let outcome = &self.input.outcomes[choice];
        // A whole year inside of the band.
        let held = outcome.offsets.iter().position(|t| {
            *t > 0.0 && t.ceil() > within.0 && t.ceil() <= within.1 && t.ceil() - 1.0 >= within.0
        });
        match held.and_then(|i| Some((i, outcome.forward[i]?))) {
            Some((i, forward)) => {
                let at = self.layout.forward(choice);
                let text = refer_cell(&self.input.names.sensitivity, &at.sheet, nth(at.range, i));
                self.sheet.formula(self.row, 2, Style::Percent, text, Cached::Number(forward));
                let text = format!(
                    "IF(ABS({}-{})<={FACTOR_TOLERANCE:E},\"{AGREES}\",\"{DIFFERS}\")",
                    self.here(1),
                    self.here(2)
                );
                let agrees = (value - forward).abs() <= FACTOR_TOLERANCE;
                let result = Cached::Text(if agrees { AGREES } else { DIFFERS }.to_owned());
                self.sheet.formula(self.row, 3, Style::Result, text, result);
            }
            None => self.sheet.text(self.row, 2, Style::Wrapped, UNCHECKED),
        }
        self.row += 1;
    }
}
