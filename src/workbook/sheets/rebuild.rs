//! The second route as cells: inputs, yearly chains, and the formula of a factor at an offset.

use hence_core::Where;

use super::growth_route::{Persistent, Regimes};
use super::periods;
use super::second_route::{Form, Route, Rule};
use crate::appraisal::{Base, Label};
use crate::formulas::{absolute, literal};
use crate::layout::Layout;
use crate::patch::Cached;
use crate::references::{Cell, Range};
use crate::sheets::AuditInput;
use crate::writer::{MAX_FORMULA, Sheet, Style};
use chrono::Datelike;

/// The second route of one block, and where it stands on the checks sheet.
pub(super) struct Rebuilt {
    /// None where the basis has no second route.
    pub route: Option<Route>,
    /// Offsets rebuilt from the labels.
    pub offsets: Vec<f64>,
    factors: Option<Vec<f64>>,
    /// N of the annual equivalent: years begun from the base to the last flow, the nearest where columns are parts of one.
    service_years: u32,
    /// Every factor is the mean of those at start and end of its year.
    pub averaged: bool,
    /// The first row of the block's inputs on the checks sheet.
    pub top: u32,
    /// Where each part's inputs begin, from `top`.
    parts: Vec<u32>,
    /// The row of year 0 of the yearly grid, from `top`.
    grid: u32,
}

/// The calendar year of a base.
pub(super) fn base_year(base: &Base) -> Option<i32> {
    match base {
        Base::Year(y) | Base::Financial(y) => Some(*y),
        Base::Date(date) => Some(date.year()),
        Base::Zero => None,
    }
}

impl Rebuilt {
    /// The second route of block `k`.
    pub fn new(input: &AuditInput<'_>, layout: &Layout, k: usize) -> Self {
        let block = &layout.blocks[k];
        let choice = &input.appraisal.choices[block.choice];
        let outcome = &input.outcomes[block.choice];
        let axis = &input.appraisal.axes[choice.axis];
        let labels = &axis.labels;
        let offsets: Vec<f64> = match &axis.spans {
            Some(spans) => periods::rebuilt(axis, spans, choice, outcome.timing),
            None => labels
                .iter()
                .map(|l| super::offsets::rebuilt(l, &choice.base.value, outcome.timing))
                .collect(),
        };
        let averaged = outcome.timing.flows == hence_core::Position::Averaged
            && !labels.iter().any(|l| matches!(l, Label::Offset(_) | Label::Date(_)));
        let fold = |f: fn(f64, f64) -> f64, start| offsets.iter().copied().fold(start, f);
        // An averaged flow needs the factor a year earlier, too.
        let lowest = (fold(f64::min, f64::INFINITY) - if averaged { 1.0 } else { 0.0 }).min(0.0);
        // The length of the appraisal, from these offsets alone; as many service years begin in it.
        let length = match &axis.spans {
            Some(spans) => periods::length(&offsets, spans, outcome.timing),
            None => fold(f64::max, 0.0),
        };
        let shortest = axis.spans.iter().flat_map(|spans| &spans.lengths).copied().fold(1.0, f64::min);
        let service_years = match length {
            // Parts of a year: the nearest whole year, the first one even where it is not reached by half.
            years if years > 1e-9 && shortest < 1.0 - 1e-9 => ((years + 0.5).floor() as u32).max(1),
            years => (years - 1e-9).ceil().max(0.0) as u32,
        };
        let reach = length.max(1.0).max(f64::from(service_years));
        let at = Where { base_year: base_year(&choice.base.value), length: Some(length) };
        let route = Route::of(super::block_basis(input, block).spec(), &at, lowest, reach);
        let factor = |route: &Route, t: f64| {
            let at = route.factor(t);
            if averaged { (at + route.factor(t - 1.0)) / 2.0 } else { at }
        };
        let factors = route.as_ref().map(|route| offsets.iter().map(|&t| factor(route, t)).collect());
        Rebuilt { route, offsets, factors, averaged, service_years, top: 0, parts: Vec::new(), grid: 0 }
    }

    /// Places the inputs from row `top` down; returns the first free row.
    pub fn place(&mut self, top: u32) -> u32 {
        self.top = top;
        let mut row = 1;
        self.parts.clear();
        if let Some(route) = &self.route {
            for (_, form) in &route.parts {
                self.parts.push(row);
                row += 1 + match form {
                    Form::Rate { .. } => 5,
                    Form::Gamma { .. } => 2,
                    Form::Chain { bands, .. } => 3 + bands.len() as u32,
                    Form::Persistent(growth) => growth.inputs().len() as u32,
                    Form::Regimes(growth) => 3 + growth.states.len() as u32,
                    Form::Steps(rows, _) | Form::Points(rows, _) => 2 + rows.len() as u32,
                };
            }
            row += 1;
            self.grid = row;
            row += route.years as u32 + 1;
        } else {
            row += 1;
        }
        top + row + 1
    }

    /// The rebuilt factor of row i.
    pub fn factor(&self, i: usize) -> Option<f64> {
        self.factors.as_ref().map(|factors| factors[i])
    }

    /// The sum of rebuilt factors of service years 1 to N.
    pub fn annuity(&self) -> Option<f64> {
        let route = self.route.as_ref()?;
        Some((1..=self.service_years).map(|n| route.factor(f64::from(n))).sum())
    }

    /// The same as a formula over the grid.
    pub fn annuity_formula(&self) -> Option<String> {
        let route = self.route.as_ref()?;
        let years = self.service_years;
        if years == 0 {
            return Some("0".to_owned());
        }
        let col = column(route, route.parts.len());
        let row = |n: u32| self.top + self.grid + n;
        Some(format!("SUM({})", span(row(1), col, row(years), col)))
    }

    /// The formula of the rebuilt factor at the offset in cell `t`.
    pub fn formula(&self, t: &str) -> Option<String> {
        let route = self.route.as_ref()?;
        let at = self.sum(route, t);
        let text =
            if self.averaged { format!("(({at})+({}))/2", self.sum(route, &format!("({t}-1)"))) } else { at };
        (text.len() <= MAX_FORMULA).then_some(text)
    }

    /// The formula of the factor at one moment, never averaged.
    pub fn moment(&self, t: &str) -> Option<String> {
        Some(self.sum(self.route.as_ref()?, t))
    }

    fn sum(&self, route: &Route, t: &str) -> String {
        let single = route.parts.len() == 1;
        let terms = route.parts.iter().enumerate().map(|(k, (_, form))| {
            let term = self.term(k, form, t);
            if single { term } else { format!("{}*{term}", at(self.row(k), 2)) }
        });
        terms.collect::<Vec<_>>().join("+")
    }

    /// The first row of a part: its weight stands in column C.
    pub fn row(&self, part: usize) -> u32 {
        self.top + self.parts[part]
    }

    /// The factor of one part at the offset `t`.
    pub fn term(&self, k: usize, form: &Form, t: &str) -> String {
        let top = self.row(k);
        match form {
            Form::Rate { continuous, .. } => {
                let rate = at(top + 5, 1);
                if *continuous { format!("EXP(-{rate}*{t})") } else { format!("(1+{rate})^(-{t})") }
            }
            Form::Gamma { .. } => {
                let (mean, sd) = (at(top + 1, 1), at(top + 2, 1));
                format!("(1+{t}*{sd}^2/{mean})^(-{mean}^2/{sd}^2)").replace(
                    &format!("(-{mean}^2/{sd}^2)"),
                    // A minus sign binds before a power in spreadsheets.
                    &format!("(0-{mean}^2/{sd}^2)"),
                )
            }
            Form::Chain { .. } | Form::Persistent(_) | Form::Regimes(_) => {
                let Some(route) = &self.route else { return String::new() };
                let (first, last) = (self.top + self.grid, self.top + self.grid + route.years as u32);
                let rate = column(route, k);
                let rates = span(first, rate, last, rate);
                let chain = span(first, rate + 1, last, rate + 1);
                let after = format!("INDEX({chain},INT({t})+1)/(1+INDEX({rates},INT({t})+2))^({t}-INT({t}))");
                if let Form::Chain { .. } = form {
                    let year_one = at(first + 1, rate);
                    return format!("IF({t}<0,(1+{year_one})^(-{t}),{after})");
                }
                after
            }
            Form::Steps(rows, fixed) => {
                let x = if fixed.is_some() { at(top + 1, 1) } else { t.to_owned() };
                let (edges, rates) = table(top + 3, rows.len());
                format!("(1+INDEX({rates},1+SUMPRODUCT(({edges}<{x})*1)))^(-{t})")
            }
            Form::Points(rows, fixed) => {
                let x = if fixed.is_some() { at(top + 1, 1) } else { t.to_owned() };
                let (xs, ys) = table(top + 3, rows.len());
                let m = format!("MATCH({x},{xs},1)");
                format!(
                    "(1+INDEX({ys},{m})+({x}-INDEX({xs},{m}))*(INDEX({ys},{m}+1)-INDEX({ys},{m}))\
                     /(INDEX({xs},{m}+1)-INDEX({xs},{m})))^(-{t})"
                )
            }
        }
    }

    /// Writes the inputs and the grid.
    pub fn write(&self, sheet: &mut Sheet, title: &str) {
        sheet.text(self.top, 0, Style::Section, title);
        let Some(route) = &self.route else {
            let text = "Not independently checked: a basis of this kind has no second route here.";
            sheet.text(self.top + 1, 0, Style::Text, text);
            return;
        };
        for (k, (weight, form)) in route.parts.iter().enumerate() {
            self.part(sheet, k, *weight, form);
        }
        self.grid(sheet, route);
    }

    fn part(&self, sheet: &mut Sheet, k: usize, weight: f64, form: &Form) {
        let top = self.row(k);
        sheet.text(top, 0, Style::Strong, words(form));
        sheet.text(top, 1, Style::Text, "weight");
        sheet.number(top, 2, Style::Exact, weight);
        let mut given = |row: u32, name: &str, x: f64| {
            sheet.text(top + row, 0, Style::Text, name);
            sheet.number(top + row, 1, Style::Exact, x);
        };
        match form {
            Form::Rate { rule, preferences, x, .. } => {
                let name = if *rule == Rule::Given { "rate stated" } else { "growth" };
                given(1, name, *x);
                if *rule != Rule::Given {
                    given(2, "time preference and hazard", preferences.rho);
                    given(3, "elasticity", preferences.eta);
                    given(4, "standard deviation of growth", preferences.sd);
                }
                let cell = |row| at(top + row, 1);
                let text = rule.formula(&cell(1), &cell(2), &cell(3), &cell(4));
                sheet.text(top + 5, 0, Style::Text, "rate used");
                let rate = rule.rate(*x, *preferences);
                sheet.formula(top + 5, 1, Style::Exact, text, Cached::Number(rate));
            }
            Form::Gamma { mean, sd } => {
                given(1, "mean rate", *mean);
                given(2, "standard deviation of the rate", *sd);
            }
            Form::Chain { rule, preferences, bands } => {
                if *rule != Rule::Given {
                    given(1, "time preference and hazard", preferences.rho);
                    given(2, "elasticity", preferences.eta);
                }
                let name = if *rule == Rule::Given { "Rate stated" } else { "Growth" };
                headings(sheet, top + 3, &["After offset", name, "Rate"]);
                for (i, &(lower, x)) in bands.iter().enumerate() {
                    let row = top + 4 + i as u32;
                    sheet.number(row, 0, Style::Offset, lower);
                    sheet.number(row, 1, Style::Exact, x);
                    let text = rule.formula(&at(row, 1), &at(top + 1, 1), &at(top + 2, 1), "0");
                    sheet.formula(row, 2, Style::Exact, text, Cached::Number(rule.rate(x, *preferences)));
                }
            }
            Form::Persistent(growth) => {
                for (row, (name, value)) in growth.inputs().into_iter().enumerate() {
                    given(row as u32 + 1, name, value);
                }
            }
            Form::Regimes(growth) => {
                given(1, "time preference and hazard", growth.rho);
                given(2, "elasticity", growth.eta);
                let words = [
                    "State",
                    "Mean of log growth",
                    "Standard deviation",
                    "Chance at the base",
                    "Chance from 1",
                ];
                headings(sheet, top + 3, &words);
                for (j, state) in growth.states.iter().enumerate() {
                    let row = top + 4 + j as u32;
                    sheet.number(row, 0, Style::Year, j as f64 + 1.0);
                    let chances = growth.into[j].iter().copied();
                    let cells = [state.mean, state.sd, growth.start[j]].into_iter().chain(chances);
                    for (i, value) in cells.enumerate() {
                        sheet.number(row, i as u32 + 1, Style::Exact, value);
                    }
                    if j > 0 {
                        sheet.text(top + 3, 4 + j as u32, Style::Heading, format!("from {}", j + 1));
                    }
                }
            }
            Form::Steps(rows, fixed) | Form::Points(rows, fixed) => {
                if let Some(length) = fixed {
                    given(1, "length of the appraisal", *length);
                }
                let heading = if matches!(form, Form::Steps(..)) { "Up to offset" } else { "At offset" };
                headings(sheet, top + 2, &[heading, "Rate"]);
                for (i, &(edge, rate)) in rows.iter().enumerate() {
                    sheet.number(top + 3 + i as u32, 0, Style::Offset, edge);
                    sheet.number(top + 3 + i as u32, 1, Style::Exact, rate);
                }
            }
        }
    }

    fn grid(&self, sheet: &mut Sheet, route: &Route) {
        let first = self.top + self.grid;
        let combined = column(route, route.parts.len());
        headings(sheet, first - 1, &["Year n"]);
        for (k, (_, form)) in route.parts.iter().enumerate().filter(|(_, (_, form))| form.is_chain()) {
            let rate = column(route, k);
            sheet.text(first - 1, rate, Style::Heading, "Rate of the year");
            sheet.text(first - 1, rate + 1, Style::Heading, "Chain");
            for c in 0..route.columns(k).len() {
                let heading = match (form, c) {
                    (Form::Persistent(_), 0) => "Departure".to_owned(),
                    (Form::Persistent(_), _) => "Weight of a shock".to_owned(),
                    _ => format!("State {}", c + 1),
                };
                sheet.text(first - 1, rate + 2 + c as u32, Style::Heading, heading);
            }
        }
        sheet.text(first - 1, combined, Style::Heading, "Factor at n");
        for n in 0..=route.years as u32 {
            let row = first + n;
            sheet.number(row, 0, Style::Year, f64::from(n));
            for (k, (_, form)) in route.parts.iter().enumerate().filter(|(_, (_, form))| form.is_chain()) {
                self.year(sheet, route, k, form, n);
            }
            // The last year only closes the chain: a fraction of it is never asked for.
            if n < route.years as u32 {
                let text = self.sum(route, &at(row, 0));
                sheet.formula(row, combined, Style::Factor, text, Cached::Number(route.factor(f64::from(n))));
            }
        }
    }

    /// One year of a chain: what it rests on, its rate, and the chain itself.
    fn year(&self, sheet: &mut Sheet, route: &Route, k: usize, form: &Form, n: u32) {
        let (row, rate) = (self.top + self.grid + n, column(route, k));
        let (factor, held) = (rate + 1, rate + 2);
        let top = self.row(k);
        let columns = route.columns(k);
        let states = |row: u32| span(row, held, row, held + columns.len() as u32 - 1);
        let input = |row: u32| at(top + row, 1);
        let inputs: Vec<String> = (1..=6).map(input).collect();
        for (c, values) in columns.iter().enumerate() {
            let col = held + c as u32;
            let before = if n == 0 { String::new() } else { at(row - 1, col) };
            let text = match form {
                Form::Regimes(growth) => {
                    let own = top + 4 + c as u32;
                    let into = span(own, 4, own, 3 + growth.states.len() as u32);
                    let cells = [at(own, 1), at(own, 2), at(own, 3), into];
                    let before = if n == 0 { String::new() } else { states(row - 1) };
                    Regimes::column(n, &inputs[1], &cells, &before)
                }
                _ => Persistent::column(c, n, &inputs, &before),
            };
            sheet.formula(row, col, Style::Exact, text, Cached::Number(values[n as usize]));
        }
        if n == 0 {
            sheet.number(row, factor, Style::Factor, 1.0);
            return;
        }
        let text = match form {
            Form::Persistent(_) => Persistent::rate_formula(&inputs, &[at(row, held), at(row, held + 1)]),
            Form::Regimes(_) => Regimes::rate_formula(&inputs[0], &states(row - 1), &states(row)),
            _ => {
                let bands = if let Form::Chain { bands, .. } = form { bands.len() as u32 } else { 0 };
                let (from, to) = (top + 4, top + 3 + bands);
                format!("LOOKUP({}-1,{},{})", at(row, 0), span(from, 0, to, 0), span(from, 2, to, 2))
            }
        };
        sheet.formula(row, rate, Style::Rate, text, Cached::Number(route.yearly(k, n as usize)));
        let text = format!("{}/(1+{})", at(row - 1, factor), at(row, rate));
        sheet.formula(row, factor, Style::Factor, text, Cached::Number(route.chain(k)[n as usize]));
    }
}

/// The grid's column of a part's yearly rate, its chain after it, then what these rest on; of the number of parts, the
/// column after them all.
fn column(route: &Route, part: usize) -> u32 {
    1 + (0..part).map(|k| 2 + route.columns(k).len() as u32).sum::<u32>()
}

fn headings(sheet: &mut Sheet, row: u32, texts: &[&str]) {
    for (i, text) in texts.iter().enumerate() {
        sheet.text(row, i as u32, Style::Heading, text);
    }
}

fn words(form: &Form) -> &'static str {
    match form {
        Form::Rate { continuous: false, .. } => "One rate: (1 + r)^-t",
        Form::Rate { continuous: true, .. } => "One rate: exp(-r t)",
        Form::Gamma { .. } => "Gamma: (1 + t s^2/m)^-(m^2/s^2)",
        Form::Chain { .. } => "Yearly chain: C(n) = C(n-1)/(1 + r(n))",
        Form::Persistent(_) => "Yearly chain: r(n) = exp(rho + eta (m + y(n)) - (eta s w(n))^2/2) - 1",
        Form::Regimes(_) => "Yearly chain: r(n) = exp(rho) (sum of states at n-1)/(sum at n) - 1",
        Form::Steps(_, None) => "Whole horizon by flow, stepped: (1 + r(t))^-t",
        Form::Steps(_, Some(_)) => "Whole horizon by length, stepped: (1 + r(T))^-t",
        Form::Points(_, None) => "Whole horizon by flow, interpolated: (1 + r(t))^-t",
        Form::Points(_, Some(_)) => "Whole horizon by length, interpolated: (1 + r(T))^-t",
    }
}

fn at(row: u32, col: u32) -> String {
    absolute(Range { first: Cell { row, col }, last: Cell { row, col } })
}

fn span(row: u32, col: u32, last_row: u32, last_col: u32) -> String {
    absolute(Range { first: Cell { row, col }, last: Cell { row: last_row, col: last_col } })
}

fn table(top: u32, rows: usize) -> (String, String) {
    let end = top + rows as u32 - 1;
    (span(top, 0, end, 0), span(top, 1, end, 1))
}

/// A number in a formula's text, for values that have no cell.
pub(super) fn constant(x: f64) -> String {
    if x < 0.0 { format!("({})", literal(x)) } else { literal(x) }
}
