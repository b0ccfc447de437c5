//! Workbooks with factors, present values and totals that were worked out by plain arithmetic, right or wrong.

use std::collections::BTreeMap;

use hence_core::Catalogue;
use hence_workbook::check::{CheckReport, CheckRequest, check};
use hence_workbook::findings::{Finding, Kind};

use crate::small::Small;

/// The basis of the United Kingdom's 2003 schedule, as a line.
pub const UK: &str = "3.5% to 30, 3% to 75, 2.5% to 125, 2% to 200, 1.5% to 300, 1% after";
const UK_BANDS: [(f64, f64); 6] =
    [(30.0, 0.035), (75.0, 0.03), (125.0, 0.025), (200.0, 0.02), (300.0, 0.015), (f64::INFINITY, 0.01)];

/// (1 + r)^-years of each band, multiplied; before the base the first rate extends backwards.
pub fn banded(bands: &[(f64, f64)], t: f64) -> f64 {
    if t < 0.0 {
        return (1.0 + bands[0].1).powf(-t);
    }
    let mut factor = 1.0;
    let mut from = 0.0;
    for &(to, rate) in bands {
        let years = t.min(to) - from;
        if years > 0.0 {
            factor /= (1.0 + rate).powf(years);
        }
        from = to;
    }
    factor
}

/// The factor of [`UK`].
pub fn uk(t: f64) -> f64 {
    banded(&UK_BANDS, t)
}

/// One rate.
pub fn flat(rate: f64) -> impl Fn(f64) -> f64 {
    move |t| (1.0 + rate).powf(-t)
}

/// Rounded to so many places.
pub fn rounded(x: f64, places: i32) -> f64 {
    (x * 10f64.powi(places)).round() / 10f64.powi(places)
}

/// Which of its numbers a workbook shows.
#[derive(Clone, Copy, PartialEq)]
pub enum Shows {
    /// Factors, present values by year, and totals.
    All,
    /// Present values by year and totals.
    Present,
    /// The net present value alone.
    Npv,
}

/// An appraisal of 2026 to 2026 + years: 1000 spent in the first year, 20 in every other, 40 a year and more gained.
pub struct Plan {
    pub basis: String,
    /// Text of the timing's cell, or empty.
    pub timing: String,
    /// The factor that the workbook uses in year i.
    pub factors: Vec<f64>,
    pub shows: Shows,
    /// Further cells, which come in place of those of the same address, and names.
    pub more: (String, String),
}

impl Plan {
    pub fn new(basis: &str, years: usize, factor: impl Fn(f64) -> f64) -> Plan {
        Plan {
            basis: basis.to_owned(),
            timing: String::new(),
            factors: (0..=years).map(|i| factor(i as f64)).collect(),
            shows: Shows::All,
            more: Default::default(),
        }
    }

    pub fn timed(self, timing: &str) -> Plan {
        Plan { timing: timing.to_owned(), ..self }
    }

    pub fn shows(self, shows: Shows) -> Plan {
        Plan { shows, ..self }
    }

    pub fn with(self, cells: &str, names: &str) -> Plan {
        Plan { more: (cells.to_owned(), names.to_owned()), ..self }
    }

    /// Cost and benefit of year i.
    pub fn flows(i: usize) -> (f64, f64) {
        let cost = if i == 0 { 1000.0 } else { 20.0 };
        (cost, if i == 0 { 0.0 } else { 40.0 + 0.25 * i as f64 })
    }

    /// The net present value with other factors.
    pub fn npv(factors: &[f64]) -> f64 {
        factors.iter().enumerate().map(|(i, d)| (Plan::flows(i).1 - Plan::flows(i).0) * d).sum()
    }

    pub fn small(&self) -> Small {
        let n = self.factors.len();
        let (first, last) = (10, 9 + n);
        let mut cells = format!("B1: 2026\nB2: '{}\n", self.basis);
        let mut names = format!(
            "hence_base B1, hence_basis B2, hence_years A{first}:A{last}, hence_cost_works B{first}:B{last}, \
             hence_benefit_water C{first}:C{last}, hence_npv B4"
        );
        if !self.timing.is_empty() {
            cells.push_str(&format!("B3: '{}\n", self.timing));
            names.push_str(", hence_timing B3");
        }
        let present = |pick: &dyn Fn((f64, f64)) -> f64| -> f64 {
            self.factors.iter().enumerate().map(|(i, d)| pick(Plan::flows(i)) * d).sum()
        };
        let (costs, benefits) = (present(&|f| f.0), present(&|f| f.1));
        cells.push_str(&format!("B4: {}\n", benefits - costs));
        if self.shows != Shows::Npv {
            cells.push_str(&format!("B5: {costs}\nB6: {benefits}\nB7: {}\n", benefits / costs));
            names.push_str(", hence_pv_costs B5, hence_pv_benefits B6, hence_ratio B7");
            names.push_str(&format!(", hence_pv_works E{first}:E{last}, hence_pv_water F{first}:F{last}"));
        }
        if self.shows == Shows::All {
            names.push_str(&format!(", hence_factor D{first}:D{last}"));
        }
        for (i, d) in self.factors.iter().enumerate() {
            let (row, (cost, benefit)) = (first + i, Plan::flows(i));
            cells.push_str(&format!("A{row}: {} | {cost} | {benefit}", 2026 + i));
            if self.shows == Shows::All {
                cells.push_str(&format!(" | {d}"));
            }
            cells.push('\n');
            if self.shows != Shows::Npv {
                cells.push_str(&format!("E{row}: {} | {}\n", cost * d, benefit * d));
            }
        }
        let cells = over(&cells, &self.more.0);
        if !self.more.1.is_empty() {
            names.push_str(&format!(", {}", self.more.1));
        }
        Small::default().sheet("Plan", &cells).names(&names)
    }

    pub fn checked(&self) -> CheckReport {
        checked(&self.small())
    }

    /// The findings' codes.
    pub fn codes(&self) -> Vec<&'static str> {
        codes(&self.checked())
    }

    /// The one finding, of that kind.
    #[track_caller]
    pub fn only(&self, kind: Kind) -> Finding {
        let report = self.checked();
        let shown: Vec<String> = report.findings.iter().map(show).collect();
        assert_eq!(codes(&report), [kind.code()], "{}", shown.join("\n"));
        report.findings[0].clone()
    }
}

pub fn checked(small: &Small) -> CheckReport {
    check(&small.open().0, &CheckRequest::default(), &Catalogue::builtin())
        .unwrap_or_else(|error| panic!("{error}"))
}

pub fn codes(report: &CheckReport) -> Vec<&'static str> {
    report.findings.iter().map(|finding| finding.kind.code()).collect()
}

pub fn show(finding: &Finding) -> String {
    format!("{} {}: {}", finding.kind.code(), finding.place, finding.words)
}

/// Cells, those of the second text in place of those of the first.
fn over(cells: &str, more: &str) -> String {
    let mut all = BTreeMap::new();
    for line in cells.lines().chain(more.lines()) {
        let (at, values) = line.split_once(':').expect("a cell and its values");
        let (column, row) = at.split_at(1);
        for (i, value) in values.split('|').enumerate().filter(|(_, value)| !value.trim().is_empty()) {
            let column = char::from(column.as_bytes()[0] + i as u8);
            all.insert(format!("{column}{row}"), value.trim().to_owned());
        }
    }
    all.iter().map(|(at, value)| format!("{at}: {value}\n")).collect()
}
