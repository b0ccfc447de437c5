//! Random workbooks, the same at every run, each with what it means to the second model.

use hence_workbook::fill::FillRequest;
use hence_workbook::package::Package;
use hence_workbook::references::Cell;

use super::curves::{basis, lasting};
use super::model::{Choice, END, Side, Stream, Tail, Timing, date_offset, days};
use crate::small::Small;

/// A small generator of numbers (splitmix64), so that every run is the same.
pub struct Random(pub u64);

impl Random {
    fn next(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        z ^ (z >> 31)
    }

    /// A whole number from 0 to `n` - 1.
    pub fn below(&mut self, n: usize) -> usize {
        (self.next() % n as u64) as usize
    }

    pub fn chance(&mut self, percent: usize) -> bool {
        self.below(100) < percent
    }

    pub fn pick<T: Clone>(&mut self, of: &[T]) -> T {
        of[self.below(of.len())].clone()
    }

    /// An amount with two decimals.
    fn amount(&mut self, most: usize) -> f64 {
        self.below(most * 100) as f64 / 100.0
    }
}

/// A result cell, or a run of them.
#[derive(Clone, Debug, PartialEq)]
pub enum Wanted {
    Factor,
    Rates,
    NetByYear,
    NetTotal,
    ByYear(usize),
    Total(usize),
    Npv,
    Costs,
    Benefits,
    Ratio,
    Annual,
    Irr,
    Payback,
}

pub struct Book {
    pub small: Small,
    pub request: FillRequest,
    pub choices: Vec<Choice>,
    pub baseline: Option<usize>,
    /// Option, what, sheet, cells.
    pub targets: Vec<(usize, Wanted, String, Vec<Cell>)>,
    /// For messages: the basis and what else matters.
    pub words: String,
}

impl Book {
    pub fn package(&self) -> Package {
        Package::from_bytes("book.xlsx", self.small.bytes()).unwrap()
    }
}

#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Labels {
    Years,
    Numbers,
    Financial,
    Dates,
    Offsets,
}

const FIRST: i32 = 2026;

fn position(random: &mut Random, flows: bool) -> (String, Option<f64>) {
    let of = [("start", Some(0.0)), ("middle", Some(0.5)), ("end", Some(1.0)), ("averaged", None)];
    let (word, at) = of[random.below(if flows { 4 } else { 3 })];
    (word.to_owned(), at)
}

/// A timing as text, each part perhaps left out, and what the text says of each.
fn timing(random: &mut Random) -> (String, Option<Option<f64>>, Option<f64>) {
    let (flows, base) = (position(random, true), position(random, false));
    match random.below(3) {
        0 => (format!("flows {}", flows.0), Some(flows.1), None),
        1 => (format!("base {}", base.0), None, base.1),
        _ => (format!("flows {}, base {}", flows.0, base.0), Some(flows.1), base.1),
    }
}

/// Where the cells of a sheet stand: lines of years across or down, settings in the first row.
struct Page {
    down: bool,
    cells: String,
    names: Vec<String>,
    free: u32,
    line: u32,
}

impl Page {
    fn at(&self, line: u32, i: usize) -> Cell {
        let i = i as u32 + 2;
        if self.down { Cell { row: i, col: line } } else { Cell { row: line, col: i } }
    }

    fn name(&mut self, name: &str, first: Cell, last: Cell) {
        self.names.push(format!("{name} {first}:{last}"));
    }

    /// A setting in a cell of its own.
    fn setting(&mut self, name: &str, value: &str) -> Cell {
        let cell = Cell { row: 0, col: self.free };
        self.free += 1;
        self.cells.push_str(&format!("{cell}: {value}\n"));
        self.name(name, cell, cell);
        cell
    }

    /// A line along the years; blank cells where a value is empty.
    fn run(&mut self, name: &str, values: &[String]) -> Vec<Cell> {
        let line = self.line;
        self.line += 1;
        let cells: Vec<Cell> = (0..values.len()).map(|i| self.at(line, i)).collect();
        for (cell, value) in cells.iter().zip(values) {
            if !value.is_empty() {
                self.cells.push_str(&format!("{cell}: {value}\n"));
            }
        }
        self.name(name, cells[0], cells[cells.len() - 1]);
        cells
    }
}

/// Makes the workbook of a seed.
pub fn book(seed: u64) -> Book {
    let mut random = Random(seed.wrapping_mul(0x1000_0001).wrapping_add(7));
    let r = &mut random;
    let labels = r.pick(&[
        Labels::Years,
        Labels::Years,
        Labels::Years,
        Labels::Numbers,
        Labels::Financial,
        Labels::Dates,
        Labels::Offsets,
    ]);
    let options = r.pick(&[1, 1, 2, 3]);
    let base_year = FIRST + r.pick(&[0, 0, 0, 1, -1, 3]);
    let has_base = !matches!(labels, Labels::Numbers | Labels::Offsets) || r.chance(50);
    let (mut line, curve) = basis(r, base_year, has_base);
    let untimed = matches!(labels, Labels::Dates | Labels::Offsets);

    // Timing: the command line beats the cell, the cell the line; what a text leaves out is the end of the year.
    let in_cell = r.chance(45).then(|| timing(r));
    let in_line = r.chance(35).then(|| timing(r));
    let command = r.chance(20);
    if let Some((text, ..)) = &in_line {
        line = format!("{line}; {text}");
    }
    let whole = |t: &(String, Option<Option<f64>>, Option<f64>)| Timing {
        flows: t.1.unwrap_or(Some(1.0)),
        base: t.2.unwrap_or(1.0),
    };
    let mut timing = match (&in_cell, &in_line) {
        (Some(cell), Some(told)) if command => {
            let cell = whole(cell);
            Timing { flows: told.1.unwrap_or(cell.flows), base: told.2.unwrap_or(cell.base) }
        }
        (Some(cell), _) => whole(cell),
        (None, Some(line)) => whole(line),
        (None, None) => END,
    };
    if untimed {
        timing = END;
    }

    let mut small = Small::default();
    let (mut choices, mut targets) = (Vec::new(), Vec::new());
    let baseline = (options > 1 && r.chance(70)).then(|| r.below(options));
    let titles = ["Do nothing", "Liner", "It's a pump"];
    let years_of = |r: &mut Random| r.pick(&[2usize, 5, 12, 30, 34, 47]);
    let common_years = years_of(r);
    let negative = r.chance(25);
    let down = r.chance(25);
    let start = if curve.before_base() { r.pick(&[0, 0, 0, -2]) } else { 0 };
    for (c, title) in titles.iter().enumerate().take(options) {
        let suffix = if options == 1 {
            String::new()
        } else {
            format!("__{}", ["do_nothing", "liner", "it_s_a_pump"][c])
        };
        let mut page = Page { down, cells: String::new(), names: Vec::new(), free: 0, line: 3 };
        let named = |role: &str| format!("hence_{role}{suffix}");
        let n = if r.chance(80) { common_years } else { years_of(r) };
        let gap = r.chance(15);

        // Years, base, and what they come to.
        let first = base_year + start + if curve.before_base() { 0 } else { shortfall(timing, untimed) };
        let step = |i: usize| i as i32 + i32::from(gap && i > n / 2);
        let date = |i: usize| (first + step(i), 9u32, 15u32);
        let base_date = (base_year, 4u32, 1u32);
        let (values, years): (Vec<String>, Vec<f64>) = (0..n)
            .map(|i| {
                let year = first + step(i);
                let after = f64::from(year - base_year);
                match labels {
                    Labels::Years => (year.to_string(), after),
                    Labels::Numbers => ((year - base_year).to_string(), after),
                    Labels::Financial => (format!("'{year}/{:02}", (year + 1) % 100), after),
                    Labels::Offsets => {
                        (format!("{}", after.max(0.0) + 0.25 * i as f64), after.max(0.0) + 0.25 * i as f64)
                    }
                    Labels::Dates => {
                        let (y, m, d) = date(i);
                        let serial = days(y, m, d) - days(1899, 12, 30);
                        let offset = if (y, m, d) < base_date {
                            -date_offset((y, m, d), base_date)
                        } else {
                            date_offset(base_date, (y, m, d))
                        };
                        (format!("@{serial}"), offset)
                    }
                }
            })
            .unzip();
        let role = if labels == Labels::Offsets { "offsets" } else { "years" };
        page.run(&named(role), &values);
        if has_base {
            let base = match labels {
                Labels::Financial => format!("'{base_year}/{:02}", (base_year + 1) % 100),
                Labels::Dates => format!("@{}", days(base_year, 4, 1) - days(1899, 12, 30)),
                _ => base_year.to_string(),
            };
            page.setting(&named("base"), &base);
        }
        if c == 0 {
            let held = match (command, line.as_str()) {
                (true, _) => r.pick(&["0.07", "'6%"]).to_owned(),
                (false, "0.045") => "0.045".to_owned(),
                (false, line) => format!("'{line}"),
            };
            page.setting("hence_basis", &held);
            if let Some((text, ..)) = &in_cell {
                page.setting("hence_timing", &format!("'{text}"));
            }
            if negative {
                page.setting("hence_signs", "'costs entered negative");
            }
            if let Some(baseline) = baseline {
                page.setting("hence_baseline", &format!("'{}", titles[baseline]));
            }
        }

        // Streams with their settings.
        let mut streams = Vec::new();
        let sides = [Side::Cost, Side::Benefit, Side::Damage, Side::Flow, Side::Cost];
        let names = ["works", "water", "flood", "rent", "upkeep"];
        for (side, name) in sides.into_iter().zip(names) {
            if name != "works" && r.chance(35) {
                continue;
            }
            let role = ["cost", "benefit", "flow", "damage"][side as usize];
            let sign = if side == Side::Cost && negative { -1.0 } else { 1.0 };
            let early = name == "works";
            let mut raw: Vec<f64> = (0..n)
                .map(|i| match side {
                    Side::Flow => r.amount(60) - 30.0,
                    _ if early && i > 2 => r.amount(3),
                    _ if early => 100.0 + r.amount(100),
                    _ if r.chance(10) => 0.0,
                    _ => r.amount(40),
                })
                .map(|x| if x == 0.0 { 0.0 } else { x * sign })
                .collect();
            raw[n - 1] = sign * (1.0 + r.amount(9));
            let values: Vec<String> =
                raw.iter().map(|x| if *x == 0.0 { String::new() } else { x.to_string() }).collect();
            page.run(&named(&format!("{role}_{name}")), &values);
            let mut stream = Stream {
                name: name.to_owned(),
                side,
                raw,
                sign,
                unit: 1.0,
                uplift: 0.0,
                residual: 0.0,
                tail: None,
            };
            if r.chance(30) {
                let (text, unit) = r.pick(&[("'k", 1e3), ("'m", 1e6), ("500", 500.0)]);
                page.setting(&named(&format!("unit_{name}")), text);
                stream.unit = unit;
            }
            if r.chance(30) {
                stream.uplift = r.pick(&[0.2, 0.66, -0.1]);
                page.setting(&named(&format!("uplift_{name}")), &stream.uplift.to_string());
            }
            if r.chance(25) {
                stream.residual = 1.0 + r.amount(50);
                page.setting(&named(&format!("residual_{name}")), &stream.residual.to_string());
            }
            if r.chance(20) {
                let last = *years.last().unwrap();
                let (text, tail) =
                    tail(r, last, base_year, has_base, first + step(n - 1), labels, lasting(&curve));
                page.setting(&named(&format!("tail_{name}")), &format!("'{text}"));
                stream.tail = Some(tail);
            }
            streams.push(stream);
        }
        let mut budget = Vec::new();
        if r.chance(40) {
            page.setting(&named("budget"), "'works");
            budget.push("works".to_owned());
        }
        let effect = r.chance(40).then(|| {
            let effect: Vec<f64> = (0..n).map(|_| 5.0 + r.amount(20) + 10.0 * c as f64).collect();
            page.run(&named("effect_tonnes"), &effect.iter().map(f64::to_string).collect::<Vec<_>>());
            effect
        });

        // Targets.
        let blank = vec![String::new(); n];
        let mut want =
            |wanted: Wanted, cells: Vec<Cell>| targets.push((c, wanted, (*title).to_owned(), cells));
        let by_year = [(Wanted::Factor, "factor", 70), (Wanted::Rates, "rates", 50)];
        for (wanted, role, percent) in by_year {
            if r.chance(percent) {
                want(wanted, page.run(&named(role), &blank));
            }
        }
        if r.chance(50) {
            want(Wanted::NetByYear, page.run(&named("pv"), &blank));
        } else {
            want(Wanted::NetTotal, vec![page.setting(&named("pv"), "")]);
        }
        for (s, stream) in streams.iter().enumerate() {
            let role = named(&format!("pv_{}", stream.name));
            if r.chance(50) {
                want(Wanted::ByYear(s), page.run(&role, &blank));
            } else {
                want(Wanted::Total(s), vec![page.setting(&role, "")]);
            }
        }
        for (wanted, role) in [
            (Wanted::Npv, "npv"),
            (Wanted::Costs, "pv_costs"),
            (Wanted::Benefits, "pv_benefits"),
            (Wanted::Ratio, "ratio"),
            (Wanted::Annual, "annual"),
            (Wanted::Irr, "irr"),
            (Wanted::Payback, "payback"),
        ] {
            want(wanted, vec![page.setting(&named(role), "")]);
        }
        small = small.sheet(title, &page.cells).names(&page.names.join(","));
        let name = (*title).to_owned();
        choices.push(Choice { name, years, timing, curve: curve.clone(), streams, budget, effect });
    }
    let request = FillRequest {
        basis: command.then(|| line.clone()),
        formulas: r.chance(80),
        ..FillRequest::default()
    };
    let words = format!(
        "seed {seed}: {labels:?}, `{line}`{}, cell {in_cell:?}, {options} options, baseline {baseline:?}",
        if command { " (--basis)" } else { "" }
    );
    Book { small, request, choices, baseline, targets, words }
}

/// Years to begin later by, so that no flow stands before the base.
fn shortfall(timing: Timing, untimed: bool) -> i32 {
    match timing.flows {
        _ if untimed => 0,
        None => 1,
        Some(flows) => (timing.base - flows).max(0.0).ceil() as i32,
    }
}

/// A tail as text and as the model takes it.
fn tail(
    r: &mut Random,
    last: f64,
    base_year: i32,
    has_base: bool,
    last_year: i32,
    labels: Labels,
    lasting: bool,
) -> (String, Tail) {
    let (growth, word) =
        r.pick(&[(0.0, ""), (0.0, ", level"), (0.005, ", growing 0.5%"), (-0.02, ", growing -2%")]);
    let (every, often) = r.pick(&[(1.0, ""), (1.0, ""), (25.0, ", every 25 years")]);
    let (end, to) = match r.below(3) {
        0 if lasting => ("for ever".to_owned(), None),
        1 if has_base => {
            let end = last_year.max(base_year) + 40 + r.below(60) as i32;
            // Flows of dates go on to the calendar year; all else counts from the base.
            let to = match labels {
                Labels::Dates => last + f64::from(end - last_year),
                _ => f64::from(end - base_year),
            };
            (format!("to {end}"), Some(to))
        }
        _ => {
            let to = last.max(0.0).ceil() as i32 + 1 + r.below(90) as i32;
            (format!("to {to}"), Some(f64::from(to)))
        }
    };
    (format!("{end}{often}{word}"), Tail { growth, every, to })
}
