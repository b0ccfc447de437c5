//! The sensitivity sheet: other rates, switching values, streams by their effect, and where the rate comes from.

mod derivation;
mod streams;
mod switching;

use super::AuditInput;
use super::checks::{Checks, absolute_cell};
use super::discounting::table_ref;
use super::lines::UNCHECKED;
use super::nets::{Band, Nets};
use super::second_route::Route;
use crate::compare::{Sensitivity, Side, Why};
use crate::formulas::{absolute, literal};
use crate::graft::ChartFinish;
use crate::layout::{Column, Layout};
use crate::patch::Cached;
use crate::ranking::{Worth, level};
use crate::references::{Cell, Range};
use crate::writer::{MAX_FORMULA, Sheet, Style};

/// Flat yearly rates of the table.
const FLAT: [f64; 9] = [0.0, 0.01, 0.02, 0.03, 0.04, 0.05, 0.06, 0.08, 0.1];

/// What stands where there is no number.
const NO_VALUE: &str = "no value";

/// The sheet while it is made.
struct Page<'a> {
    sheet: Sheet,
    row: u32,
    input: &'a AuditInput<'a>,
    layout: &'a Layout,
    nets: &'a [Option<Nets>],
    told: &'a Sensitivity,
    finishes: Vec<ChartFinish>,
}

/// Makes the sheet and what its charts need to be finished.
pub(super) fn sheet(input: &AuditInput<'_>, layout: &Layout, checks: &Checks) -> (Sheet, Vec<ChartFinish>) {
    let mut sheet = Sheet::new(&input.names.sensitivity);
    let options = input.appraisal.choices.len() as u32;
    sheet.columns(0, 0, 44.0);
    sheet.columns(1, (options + 2).max(7), 19.0);
    sheet.columns(options + 2, options + 2, 32.0);
    sheet.text(0, 0, Style::Title, "Audit sensitivity");
    let words = "What the options come to on other rates, where the decision switches, which streams move it most, and \
                 where the rate comes from. Numbers marked live are formulas over the cells of the workbook; the others \
                 are as computed at the fill.";
    sheet.paragraph(1, 0, 6, Style::Wrapped, words);
    let told = input.sensitivity;
    let mut page = Page { sheet, row: 3, input, layout, nets: &checks.nets, told, finishes: Vec::new() };
    page.rates();
    page.switching();
    page.derivations();
    page.streams();
    (page.sheet, page.finishes)
}

/// Rates other than those of the basis.
struct Discount {
    /// As formulas; none where one formula cannot tell them.
    bands: Option<Vec<Band>>,
    factors: Factors,
}

enum Factors {
    Flat(f64),
    Route(Route),
}

impl Discount {
    /// One yearly rate, which stands in a cell.
    fn flat(cell: String, rate: f64) -> Discount {
        Discount { bands: Some(vec![Band { after: 0.0, rate: cell }]), factors: Factors::Flat(rate) }
    }

    fn factor(&self, t: f64) -> f64 {
        match &self.factors {
            Factors::Flat(rate) => (1.0 + rate).powf(-t),
            Factors::Route(route) => route.factor(t),
        }
    }
}

/// A net present value by plain arithmetic.
struct Net {
    /// Live, where one formula can tell it.
    formula: Option<String>,
    value: f64,
    /// The gross present value.
    gross: f64,
}

impl Page<'_> {
    fn section(&mut self, title: &str, words: &str) {
        self.sheet.text(self.row, 0, Style::Section, title);
        self.row += 1;
        if !words.is_empty() {
            self.sheet.paragraph(self.row, 0, 6, Style::Wrapped, words);
            self.row += 1;
        }
    }

    fn headings(&mut self, headings: &[&str]) {
        for (i, heading) in headings.iter().enumerate() {
            self.sheet.text(self.row, i as u32, Style::Heading, heading);
        }
        self.row += 1;
    }

    fn options(&self) -> u32 {
        self.input.appraisal.choices.len() as u32
    }

    /// Of one option alone none is the best.
    fn several(&self) -> bool {
        self.options() > 1
    }

    /// Net present values under other rates.
    fn rates(&mut self) {
        let over = self.input.appraisal.baseline.map(|i| &self.input.appraisal.choices[i].name);
        let over = over.map(|name| format!(" over {name}")).unwrap_or_default();
        let best = if self.several() {
            " Best is the option with the highest, if no other has as much."
        } else {
            ""
        };
        self.section("Other rates", &format!("Net present value{over}.{best}"));
        let heading = self.row;
        let names: Vec<&str> =
            self.input.appraisal.choices.iter().map(|choice| choice.name.as_str()).collect();
        let ends: &[&str] = if self.several() { &["Best", "Checked"] } else { &["Checked"] };
        self.headings(&[&["Basis"], names.as_slice(), ends].concat());
        let sides = &self.told.comparison.sides;
        for side in sides.iter().filter(|side| side.why == Why::Declared) {
            self.sheet.text(self.row, 0, Style::Wrapped, format!("Declared: {}", side.basis));
            for (c, outcome) in self.input.outcomes.iter().enumerate() {
                let text = table_ref(
                    &self.input.names.sensitivity,
                    self.layout,
                    self.layout.sums(c).net,
                    Column::Value,
                );
                let result = Cached::Number(outcome.totals().npv);
                self.sheet.formula(self.row, c as u32 + 1, Style::Money, text, result);
            }
            self.ends(heading, "live", &worths(side));
        }
        for (by, worths) in &self.told.shifted {
            let moved = if *by < 0.0 { "lower" } else { "higher" };
            let text = format!("Declared, every rate a point {moved} (of a Ramsey basis its preference)");
            self.fixed(heading, &text, worths.as_deref());
        }
        for side in sides.iter().filter(|side| side.why != Why::Declared) {
            let why = if side.why == Why::Companion { "Companion" } else { "Against" };
            self.fixed(heading, &format!("{why}: {}", side.basis), Some(&worths(side)));
        }
        self.sheet.text(self.row, 0, Style::Strong, "Flat yearly rate in place of the basis:");
        self.row += 1;
        for rate in FLAT {
            self.flat(heading, rate);
        }
        self.row += 1;
    }

    /// A row of numbers as computed at the fill.
    fn fixed(&mut self, heading: u32, label: &str, worths: Option<&[Worth]>) {
        self.sheet.text(self.row, 0, Style::Wrapped, label);
        let Some(worths) = worths.filter(|worths| worths.iter().all(|worth| worth.npv.is_finite())) else {
            self.sheet.text(self.row, 1, Style::Wrapped, NO_VALUE);
            self.row += 1;
            return;
        };
        for (c, worth) in worths.iter().enumerate() {
            self.sheet.number(self.row, c as u32 + 1, Style::Money, worth.npv);
        }
        self.ends(heading, UNCHECKED, worths);
    }

    /// A row at a flat rate: live where the net flows are.
    fn flat(&mut self, heading: u32, rate: f64) {
        self.sheet.number(self.row, 0, Style::Rate, rate);
        let cell = format!("$A{}", self.row + 1);
        let discount = Discount::flat(cell, rate);
        let base = self.input.appraisal.baseline;
        let mut values = Vec::new();
        for c in 0..self.input.appraisal.choices.len() {
            let live = self.net_at(c, base, &discount).filter(|net| net.value.is_finite());
            match live.and_then(|net| Some((net.formula?, net.value, net.gross))) {
                Some((text, x, gross)) => {
                    self.sheet.formula(self.row, c as u32 + 1, Style::Money, text, Cached::Number(x));
                    values.push(Worth::of(x, gross));
                }
                None => {
                    self.sheet.text(self.row, c as u32 + 1, Style::Instead, self.why_not(c));
                }
            }
        }
        if values.len() == self.input.appraisal.choices.len() {
            self.ends(heading, "live", &values);
        } else {
            self.row += 1;
        }
    }

    /// Why an option has no live value at a flat rate.
    fn why_not(&self, c: usize) -> &'static str {
        let options = std::iter::once(c).chain(self.input.appraisal.baseline);
        let own = |c: usize| self.input.outcomes[c].streams.iter().any(|stream| stream.own.is_some());
        if options.into_iter().any(own) { "a stream has its own basis" } else { "flows follow the last year" }
    }

    /// The net present value of an option, less that of another, by plain arithmetic.
    fn net_at(&self, c: usize, less: Option<usize>, discount: &Discount) -> Option<Net> {
        if less == Some(c) {
            return Some(Net { formula: Some("0".to_owned()), value: 0.0, gross: 0.0 });
        }
        let (home, own) = (&self.input.names.sensitivity, self.nets[c].as_ref()?);
        let factor = |t: f64| discount.factor(t);
        let (mut value, mut gross) = own.value(&factor);
        let text = |nets: &Nets| discount.bands.as_ref().map(|bands| nets.formula(home, bands));
        let mut formula = text(own);
        if let Some(base) = less {
            let base = self.nets[base].as_ref()?;
            let (theirs, more) = base.value(&factor);
            (value, gross) = (value - theirs, gross + more);
            formula = formula.zip(text(base)).map(|(own, theirs)| format!("{own}-{theirs}"));
        }
        let fits = |text: &String| text.len() <= MAX_FORMULA - "ABS()".len();
        Some(Net { formula: formula.filter(fits), value, gross })
    }

    /// The best option of a row where there are several, live, and how its numbers stand.
    fn ends(&mut self, heading: u32, checked: &str, worths: &[Worth]) {
        let count = self.options();
        if self.several() {
            self.best(heading, worths);
        }
        let col = count + 1 + u32::from(self.several());
        self.sheet.text(self.row, col, Style::Result, checked);
        self.row += 1;
    }

    /// The best option of a row, live.
    fn best(&mut self, heading: u32, worths: &[Worth]) {
        let count = self.options();
        let cells =
            |row: u32| absolute(Range { first: Cell { row, col: 1 }, last: Cell { row, col: count } });
        let (row, names) = (cells(self.row), cells(heading));
        // What rounding may make of a difference from the highest, as at the fill.
        let level = level(worths);
        let highest = level.first().map_or(0.0, |&i| worths[i].dust);
        // Two digits are enough for a tolerance, and the same on every machine, whose last digits may differ.
        let short = |x: f64| format!("{x:.1e}").parse().unwrap_or(x);
        let dust: Vec<String> = worths.iter().map(|worth| literal(short(worth.dust.max(highest)))).collect();
        let text = format!(
            "IF(SUMPRODUCT(({row}+{{{}}}>=MAX({row}))*1)>1,\"several\",INDEX({names},1,MATCH(MAX({row}),{row},0)))",
            dust.join(",")
        );
        let best = match level.as_slice() {
            [i] => self.input.appraisal.choices[*i].name.clone(),
            _ => "several".to_owned(),
        };
        self.sheet.formula(self.row, count + 1, Style::Instead, text, Cached::Text(best));
    }

    /// The cell of a column in the present row.
    fn here(&self, col: u32) -> String {
        absolute_cell(self.row, col)
    }
}

fn worths(side: &Side) -> Vec<Worth> {
    side.standings.iter().map(|standing| standing.worth).collect()
}
