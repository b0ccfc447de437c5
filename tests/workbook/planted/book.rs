//! A right appraisal drawn by lot, and its cells: formulas with the results that a spreadsheet program would store.
//!
//! Every page is an option with its years, offsets, factors, flows, present values and totals, all worked out here in
//! plain arithmetic. A mistake changes what a page says before its cells are made, so that all that rests on it follows.

use std::collections::BTreeMap;

use hence_workbook::references::{Cell, Range, SheetRange};

use super::dice::{Dice, typed};
use super::rule::{Bands, Rule};
use crate::small::Small;

#[derive(Clone, Debug)]
pub struct Stream {
    pub name: &'static str,
    pub unit: &'static str,
    pub cost: bool,
    pub flows: Vec<f64>,
}

/// What stands in one cell of a row in place of its formula.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Row {
    Factor,
    /// Present values of a stream.
    Pv(usize),
}

#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Total {
    /// Of the present values of a stream.
    Stream(usize),
    Costs,
    Benefits,
    Npv,
}

/// What is wrong with a total.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Slip {
    /// Its last years are left out.
    Without(usize),
    /// A stream (costs and benefits: of its own side) counts twice.
    Twice(usize),
    /// It is divided by a thousand.
    Thousandth,
    /// Something was typed over it.
    Typed(f64),
}

#[derive(Clone, Debug)]
pub struct Page {
    pub name: &'static str,
    pub years: Vec<i32>,
    /// The cell of a year that is text.
    pub year_as_text: Option<usize>,
    /// What the year's cell says in place of its year.
    pub labels: Vec<i32>,
    pub rule: Rule,
    /// Added to the years from the base, by year.
    pub shifts: Vec<f64>,
    /// Factors are numbers, not formulas.
    pub pasted: bool,
    /// Factors are rounded to so many decimals.
    pub places: Option<i32>,
    pub streams: Vec<Stream>,
    /// Present values stand in rows of their own.
    pub rows: bool,
    pub overwritten: Option<(Row, usize, f64)>,
    pub slip: Option<(Total, Slip)>,
    pub named: Named,
}

/// Which outputs have names.
#[derive(Clone, Copy, Debug)]
pub struct Named {
    pub factor: bool,
    pub pv_rows: bool,
    pub totals: bool,
    pub ratio: bool,
}

#[derive(Clone, Debug)]
pub struct Book {
    pub base: i32,
    pub basis: String,
    pub timing: &'static str,
    pub down: bool,
    /// A rate of inflation among the inputs, which no name points to.
    pub inflation: Option<f64>,
    pub pages: Vec<Page>,
}

/// What the basis of a drawn book is to be.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Wanted {
    Any,
    Flat,
    Banded,
    /// Banded, and no offset before the base.
    BandedFromBase,
}

const TIMINGS: [(&str, f64); 5] = [
    ("flows end, base end", 0.0),
    ("flows middle, base end", -0.5),
    ("flows end, base end", 0.0),
    ("flows middle, base start", 0.5),
    ("flows end, base start", 1.0),
];

impl Book {
    pub fn draw(dice: &mut Dice, wanted: Wanted) -> Book {
        let base = dice.whole(2020, 2030) as i32;
        let banded = matches!(wanted, Wanted::Banded | Wanted::BandedFromBase)
            || (wanted == Wanted::Any && dice.chance(0.5));
        let n = dice.whole(if banded { 45 } else { 12 }, 110) as usize;
        let (basis, rule) = if banded {
            bands(dice, n)
        } else if wanted == Wanted::Any && dice.chance(0.2) {
            let (mean, sd) = (dice.one_of(&[0.03, 0.035, 0.04]), dice.one_of(&[0.01, 0.02, 0.03]));
            (format!("gamma mean {}% sd {}%", percent(mean), percent(sd)), Rule::Gamma(mean, sd))
        } else {
            flat(dice)
        };
        let from_base = wanted == Wanted::BandedFromBase;
        let timings: Vec<(&'static str, f64)> =
            TIMINGS.into_iter().filter(|(_, shift)| !from_base || *shift >= 0.0).collect();
        let (timing, shift) = dice.one_of(&timings);
        let years: Vec<i32> = (0..n as i32).map(|i| base + i).collect();
        let named = Named {
            factor: dice.chance(0.85),
            pv_rows: dice.chance(0.6),
            totals: dice.chance(0.7),
            ratio: dice.chance(0.4),
        };
        let rows = dice.chance(0.7);
        let pasted = dice.chance(0.2);
        let pages = if dice.chance(0.6) { vec!["Raise", "Retreat"] } else { vec!["Raise"] };
        let pages = pages
            .into_iter()
            .map(|name| Page {
                name,
                year_as_text: None,
                labels: years.clone(),
                years: years.clone(),
                rule: rule.clone(),
                shifts: vec![shift; n],
                pasted,
                places: None,
                streams: streams(dice, n),
                rows,
                overwritten: None,
                slip: None,
                named,
            })
            .collect();
        let inflation = dice.chance(0.5).then(|| dice.one_of(&INFLATION));
        Book { base, basis, timing, down: dice.chance(0.25), inflation, pages }
    }

    pub fn small(&self) -> Small {
        let mut inputs = format!(
            "A1: 'Inputs\nA2: 'Base year | {}\nA3: 'Discount rate | '{}\nA4: 'Timing | '{}\nA5: 'Prices | 'real {}",
            self.base, self.basis, self.timing, self.base
        );
        if let Some(inflation) = self.inflation {
            inputs += &format!("\nA6: 'General inflation, a year | {inflation}");
        }
        let names = "hence_base B2, hence_basis B3, hence_timing B4, hence_price_basis B5";
        let mut small = Small::default().sheet("Inputs", &inputs).names(names);
        for page in &self.pages {
            let sheet = Sheet::make(self, page);
            small = small.sheet(page.name, &sheet.lines()).own_names(&sheet.names.join(","));
        }
        small
    }
}

fn percent(rate: f64) -> f64 {
    typed(rate * 100.0, 6)
}

fn flat(dice: &mut Dice) -> (String, Rule) {
    if dice.chance(0.2) {
        return ("preference 0.5%, hazard 1%, elasticity 1, growth 2%".to_owned(), Rule::flat(0.035));
    }
    let rate = typed(dice.between(0.01, 0.08), dice.one_of(&[2, 3, 3, 4]));
    (format!("{}%", percent(rate)), Rule::flat(rate))
}

/// Bands whose first edge lies well within the years.
fn bands(dice: &mut Dice, n: usize) -> (String, Rule) {
    if n > 60 && dice.chance(0.3) {
        let to = [30.0, 75.0, 125.0, 200.0, 300.0];
        let rates = [0.035, 0.03, 0.025, 0.02, 0.015, 0.01];
        let edges = to.into_iter().map(Some).chain([None]);
        return ("uk-2003".to_owned(), Rule::Forward(edges.zip(rates).collect()));
    }
    let first = dice.whole(10, n as i64 - 20);
    let second = dice.chance(0.5).then(|| first + dice.whole(8, 40));
    let mut rate = typed(dice.between(0.03, 0.06), 3);
    let mut all: Bands = Vec::new();
    for to in [Some(first), second].into_iter().flatten() {
        all.push((Some(to as f64), rate));
        rate = typed(rate - dice.one_of(&[0.005, 0.01, 0.0075]), 4);
    }
    all.push((None, rate));
    let texts: Vec<String> = all
        .iter()
        .map(|(to, rate)| {
            let to = to.map_or("after".to_owned(), |to| format!("to {to}"));
            format!("{}% {to}", percent(*rate))
        })
        .collect();
    (texts.join(", "), Rule::Forward(all))
}

fn streams(dice: &mut Dice, n: usize) -> Vec<Stream> {
    let building = dice.whole(1, 4) as usize;
    let mut works = vec![0.0; n];
    for flow in works.iter_mut().take(building) {
        *flow = typed(dice.between(8.0, 60.0), 2);
    }
    let steady = |dice: &mut Dice, size: f64| -> Vec<f64> {
        let growth = dice.between(0.0, 0.012);
        (0..n)
            .map(|i| {
                let level = size * (1.0 + growth).powi(i as i32) * dice.between(0.9, 1.1);
                if i < building { 0.0 } else { typed(level, 2) }
            })
            .collect()
    };
    let (upkeep, floods, access) = (dice.between(0.3, 1.5), dice.between(2.0, 9.0), dice.between(0.4, 3.0));
    let mut all = vec![
        Stream { name: "works", unit: UNIT, cost: true, flows: works },
        Stream { name: "upkeep", unit: UNIT, cost: true, flows: steady(dice, upkeep) },
        Stream { name: "floods avoided", unit: UNIT, cost: false, flows: steady(dice, floods) },
    ];
    if dice.chance(0.5) {
        all.push(Stream { name: "access", unit: UNIT, cost: false, flows: steady(dice, access) });
    }
    all
}

pub const INFLATION: [f64; 3] = [0.02, 0.025, 0.03];

pub const UNIT: &str = "EUR million";

const FIRST: u32 = 2;
const YEARS: u32 = 2;
const OFFSETS: u32 = 3;
const FACTOR: u32 = 4;
const STREAMS: u32 = 6;

/// Where a page's rows and totals stand; `across` is the way it was thought of, `down` turns rows into columns.
impl Page {
    fn pv_row(&self, stream: usize) -> u32 {
        STREAMS + (self.streams.len() + 1 + stream) as u32
    }

    fn total_row(&self, total: Total) -> u32 {
        let below = STREAMS + 2 * (self.streams.len() as u32 + 1);
        match total {
            Total::Stream(i) => self.pv_row(i),
            Total::Costs => below,
            Total::Benefits => below + 1,
            Total::Npv => below + 2,
        }
    }

    fn cells(&self, down: bool, row: u32, from: u32, to: u32) -> SheetRange {
        let at = |col| if down { Cell { row: col, col: row } } else { Cell { row, col } };
        SheetRange { sheet: self.name.to_owned(), range: Range { first: at(from), last: at(to) } }
    }

    fn along(&self, down: bool, row: u32) -> SheetRange {
        self.cells(down, row, FIRST, FIRST + self.years.len() as u32 - 1)
    }

    pub fn at_factors(&self, down: bool) -> SheetRange {
        self.along(down, FACTOR)
    }

    pub fn at_years(&self, down: bool) -> SheetRange {
        self.along(down, YEARS)
    }

    pub fn at_stream(&self, down: bool, stream: usize) -> SheetRange {
        self.along(down, STREAMS + stream as u32)
    }

    pub fn at_pv(&self, down: bool, stream: usize) -> SheetRange {
        self.along(down, self.pv_row(stream))
    }

    pub fn at_one(&self, down: bool, row: Row, year: usize) -> SheetRange {
        let row = match row {
            Row::Factor => FACTOR,
            Row::Pv(i) => self.pv_row(i),
        };
        self.cells(down, row, FIRST + year as u32, FIRST + year as u32)
    }

    pub fn at_total(&self, down: bool, total: Total) -> SheetRange {
        self.cells(down, self.total_row(total), 1, 1)
    }

    pub fn offset(&self, base: i32, year: usize) -> f64 {
        f64::from(self.labels[year] - base) + self.shifts[year]
    }

    fn factors(&self, base: i32) -> Vec<f64> {
        (0..self.years.len())
            .map(|i| {
                let factor = self.rule.factor(i, self.offset(base, i));
                let factor = self.places.map_or(factor, |places| typed(factor, places));
                match self.overwritten {
                    Some((Row::Factor, at, x)) if at == i => x,
                    _ => factor,
                }
            })
            .collect()
    }

    /// Present values of a stream by year.
    fn pv(&self, base: i32, stream: usize) -> Vec<f64> {
        let flows = &self.streams[stream].flows;
        let mut pv: Vec<f64> = flows.iter().zip(self.factors(base)).map(|(x, d)| x * d).collect();
        if let Some((Row::Pv(s), at, x)) = self.overwritten
            && s == stream
        {
            pv[at] = x;
        }
        pv
    }

    fn slips(&self, total: Total) -> Option<Slip> {
        self.slip.filter(|(at, _)| *at == total).map(|(_, slip)| slip)
    }

    /// The total of a stream's present values as the page has it.
    fn stream_total(&self, base: i32, stream: usize) -> f64 {
        let pv = self.pv(base, stream);
        match self.slips(Total::Stream(stream)) {
            Some(Slip::Without(k)) => pv[..pv.len() - k].iter().sum(),
            Some(Slip::Thousandth) => pv.iter().sum::<f64>() / 1000.0,
            _ => pv.iter().sum(),
        }
    }

    pub fn side(&self, cost: bool) -> Vec<usize> {
        (0..self.streams.len()).filter(|i| self.streams[*i].cost == cost).collect()
    }

    fn side_total(&self, base: i32, cost: bool) -> f64 {
        let total = if cost { Total::Costs } else { Total::Benefits };
        let all: f64 = self.side(cost).into_iter().map(|i| self.stream_total(base, i)).sum();
        match self.slips(total) {
            Some(Slip::Twice(stream)) => all + self.stream_total(base, stream),
            Some(Slip::Thousandth) => all / 1000.0,
            _ => all,
        }
    }

    pub fn npv(&self, base: i32) -> f64 {
        let npv = self.side_total(base, false) - self.side_total(base, true);
        match self.slips(Total::Npv) {
            Some(Slip::Typed(x)) => x,
            Some(Slip::Thousandth) => npv / 1000.0,
            _ => npv,
        }
    }

    /// Sum of the absolute present values.
    pub fn gross(&self, base: i32) -> f64 {
        (0..self.streams.len()).flat_map(|i| self.pv(base, i)).map(f64::abs).sum()
    }
}

/// The cells of one page, and its names.
struct Sheet<'a> {
    page: &'a Page,
    base: i32,
    down: bool,
    cells: BTreeMap<(u32, u32), String>,
    names: Vec<String>,
}

impl<'a> Sheet<'a> {
    fn make(book: &'a Book, page: &'a Page) -> Self {
        let mut sheet =
            Sheet { page, base: book.base, down: book.down, cells: BTreeMap::new(), names: Vec::new() };
        sheet.put(0, 0, format!("'{} the dyke at Ostrey", page.name));
        sheet.years(book);
        sheet.streams();
        sheet.totals();
        sheet
    }

    fn put(&mut self, row: u32, col: u32, text: String) {
        let at = if self.down { (col, row) } else { (row, col) };
        self.cells.insert(at, text);
    }

    /// A reference, with the row, the column or both fixed as they were thought of.
    fn cell(&self, row: u32, col: u32, fixed_row: bool) -> String {
        let (row, col, dollars) =
            if self.down { (col, row, (fixed_row, false)) } else { (row, col, (false, fixed_row)) };
        let text = Cell { row, col }.to_string();
        let digits = text.find(|c: char| c.is_ascii_digit()).expect("a row");
        let sign = |fixed: bool| if fixed { "$" } else { "" };
        format!("{}{}{}{}", sign(dollars.0), &text[..digits], sign(dollars.1), &text[digits..])
    }

    fn run(&self, row: u32, without: usize) -> String {
        let last = FIRST + self.page.years.len() as u32 - 1 - without as u32;
        format!("{}:{}", self.cell(row, FIRST, false), self.cell(row, last, false))
    }

    fn name(&mut self, role: &str, row: u32, from: u32, to: u32) {
        let (a, b) = (self.cell(row, from, false), self.cell(row, to, false));
        let cells = if from == to { a } else { format!("{a}:{b}") };
        self.names.push(format!("hence_{role} {cells}"));
    }

    fn name_run(&mut self, role: &str, row: u32) {
        self.name(role, row, FIRST, FIRST + self.page.years.len() as u32 - 1);
    }

    fn years(&mut self, book: &Book) {
        let page = self.page;
        self.put(YEARS, 0, "'Year".into());
        self.put(OFFSETS, 0, "'Years from base".into());
        self.put(FACTOR, 0, "'Discount factor".into());
        let factors = page.factors(book.base);
        for (i, factor) in factors.iter().enumerate() {
            let col = FIRST + i as u32;
            let quote = if page.year_as_text == Some(i) { "'" } else { "" };
            self.put(YEARS, col, format!("{quote}{}", page.labels[i]));
            let year = self.cell(YEARS, col, false);
            let shift = match page.shifts[i] {
                0.0 => String::new(),
                s => format!("{}{}", if s < 0.0 { "-" } else { "+" }, s.abs()),
            };
            self.put(OFFSETS, col, format!("={year}-Inputs!$B$2{shift}>{}", page.offset(book.base, i)));
            let t = self.cell(OFFSETS, col, false);
            let typed_over = matches!(page.overwritten, Some((Row::Factor, at, _)) if at == i);
            let text = match page.rule.formula(&t).filter(|_| !page.pasted && !typed_over) {
                Some(formula) => {
                    let formula = page.places.map_or(formula.clone(), |p| format!("ROUND({formula},{p})"));
                    format!("={formula}>{}", factor)
                }
                None => factor.to_string(),
            };
            self.put(FACTOR, col, text);
        }
        self.name_run("years", YEARS);
        if page.named.factor {
            self.name_run("factor", FACTOR);
        }
    }

    fn streams(&mut self) {
        let page = self.page;
        for (s, stream) in page.streams.iter().enumerate() {
            let row = STREAMS + s as u32;
            self.put(row, 0, format!("'{} ({})", stream.name, stream.unit));
            for (i, flow) in stream.flows.iter().enumerate() {
                self.put(row, FIRST + i as u32, flow.to_string());
            }
            let side = if stream.cost { "cost" } else { "benefit" };
            let role = stream.name.replace(' ', "_");
            self.name_run(&format!("{side}_{role}"), row);
            if page.rows {
                self.pv_row(s, row);
                if page.named.pv_rows {
                    self.name_run(&format!("pv_{role}"), page.pv_row(s));
                }
            }
        }
    }

    fn pv_row(&mut self, s: usize, flows: u32) {
        let page = self.page;
        let row = page.pv_row(s);
        self.put(row, 0, format!("'PV {} ({UNIT})", page.streams[s].name));
        for (i, pv) in page.pv(self.base, s).into_iter().enumerate() {
            let col = FIRST + i as u32;
            let (flow, factor) = (self.cell(flows, col, false), self.cell(FACTOR, col, true));
            let typed_over = page.overwritten.is_some_and(|(r, at, _)| r == Row::Pv(s) && at == i);
            self.put(row, col, if typed_over { pv.to_string() } else { format!("={flow}*{factor}>{pv}") });
        }
        let sum = self.stream_formula(s);
        self.put(row, 1, format!("={sum}>{}", page.stream_total(self.base, s)));
    }

    /// The total of a stream's present values.
    fn stream_formula(&self, s: usize) -> String {
        let slip = self.page.slips(Total::Stream(s));
        let without = if let Some(Slip::Without(k)) = slip { k } else { 0 };
        let sum = if self.page.rows {
            format!("SUM({})", self.run(self.page.pv_row(s), without))
        } else {
            let flows = self.run(STREAMS + s as u32, without);
            format!("SUMPRODUCT({flows},{})", self.run(FACTOR, without))
        };
        if slip == Some(Slip::Thousandth) { format!("{sum}/1000") } else { sum }
    }

    fn side_formula(&self, cost: bool) -> String {
        let page = self.page;
        let part = |s: usize| {
            if page.rows { self.cell(page.pv_row(s), 1, false) } else { self.stream_formula(s) }
        };
        let mut parts: Vec<String> = page.side(cost).into_iter().map(part).collect();
        let slip = page.slips(if cost { Total::Costs } else { Total::Benefits });
        if let Some(Slip::Twice(s)) = slip {
            parts.push(part(s));
        }
        let sum = parts.join("+");
        if slip == Some(Slip::Thousandth) { format!("({sum})/1000") } else { sum }
    }

    fn totals(&mut self) {
        let page = self.page;
        let (costs, benefits) = (page.side_total(self.base, true), page.side_total(self.base, false));
        let rows = [Total::Costs, Total::Benefits, Total::Npv].map(|total| page.total_row(total));
        self.put(rows[0], 0, format!("'PV of costs ({UNIT})"));
        self.put(rows[0], 1, format!("={}>{costs}", self.side_formula(true)));
        self.put(rows[1], 0, format!("'PV of benefits ({UNIT})"));
        self.put(rows[1], 1, format!("={}>{benefits}", self.side_formula(false)));
        self.put(rows[2], 0, format!("'NPV ({UNIT})"));
        let difference = format!("{}-{}", self.cell(rows[1], 1, false), self.cell(rows[0], 1, false));
        let npv = page.npv(self.base);
        let text = match page.slips(Total::Npv) {
            Some(Slip::Typed(x)) => x.to_string(),
            Some(Slip::Thousandth) => format!("=({difference})/1000>{npv}"),
            _ => format!("={difference}>{npv}"),
        };
        self.put(rows[2], 1, text);
        self.name("npv", rows[2], 1, 1);
        if page.named.totals {
            self.name("pv_costs", rows[0], 1, 1);
            self.name("pv_benefits", rows[1], 1, 1);
        }
        if page.named.ratio {
            let row = rows[2] + 1;
            self.put(row, 0, "'Benefit-cost ratio".into());
            let formula = format!("{}/{}", self.cell(rows[1], 1, false), self.cell(rows[0], 1, false));
            self.put(row, 1, format!("={formula}>{}", benefits / costs));
            self.name("ratio", row, 1, 1);
        }
    }

    fn lines(&self) -> String {
        self.cells
            .iter()
            .map(|((row, col), text)| format!("{}: {text}\n", Cell { row: *row, col: *col }))
            .collect()
    }
}
