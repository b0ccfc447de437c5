//! A clean plan of an invented lake's dam, all by formulas, into which single mistakes are put by hand.
//!
//! Twenty years from 2026 at 3.5% stand in B to U: works and running costs and their total, two benefits, factors, present
//! values by year, and three results. Results of formulas are worked out here, in plain arithmetic.

use std::collections::BTreeMap;

use hence_core::Catalogue;
use hence_workbook::check::{CheckRequest, check};
use hence_workbook::diagnose::Seen;
use hence_workbook::diagnose::structure::findings;
use hence_workbook::findings::Finding;
use hence_workbook::references::{Cell, Range};
use hence_workbook::resolve::Options;

use crate::small::Small;

pub const YEARS: usize = 20;
pub const RATE: f64 = 0.035;

/// The plan: cells by address, each as [`Small`] writes it.
#[derive(Clone)]
pub struct Plan {
    pub cells: BTreeMap<Cell, String>,
    pub names: Vec<(String, String)>,
}

/// The cell in a row, `i` years after the first.
pub fn at(row: u32, i: usize) -> Cell {
    Cell::new(row - 1, 1 + i as u32)
}

/// A row of the years, as `B6:U6`.
pub fn row(row: u32) -> String {
    Range::new(at(row, 0), at(row, YEARS - 1)).to_string()
}

pub fn factor(i: usize) -> f64 {
    1.0 / (1.0 + RATE).powi(i as i32)
}

pub fn works(i: usize) -> f64 {
    [4200.0, 3100.0, 900.0].get(i).copied().unwrap_or(0.0)
}

pub fn running(i: usize) -> f64 {
    if i == 0 { 150.0 } else { running(i - 1) * 1.01 }
}

pub fn water(i: usize) -> f64 {
    640.0 + 10.0 * i as f64
}

pub fn fish(i: usize) -> f64 {
    90.0 + (i % 3) as f64
}

fn pv(flow: impl Fn(usize) -> f64) -> f64 {
    (0..YEARS).map(|i| flow(i) * factor(i)).sum()
}

pub fn pv_costs() -> f64 {
    pv(|i| works(i) + running(i))
}

pub fn pv_benefits() -> f64 {
    pv(|i| water(i) + fish(i))
}

impl Plan {
    /// Without any mistake.
    pub fn clean() -> Plan {
        let mut plan = Plan { cells: BTreeMap::new(), names: Vec::new() };
        for (cell, text) in [("A1", "'Base"), ("B1", "2026"), ("A2", "'Rate"), ("B2", "0.035")] {
            plan.set(cell, text);
        }
        for (n, heading) in [
            (4, "Year"),
            (6, "Works"),
            (7, "Running"),
            (8, "Costs"),
            (10, "Water"),
            (11, "Fish"),
            (12, "Benefits"),
            (14, "Factor"),
            (15, "PV of costs"),
            (16, "PV of benefits"),
            (18, "PV of costs"),
            (19, "PV of benefits"),
            (20, "NPV"),
        ] {
            plan.cells.insert(Cell::new(n - 1, 0), format!("'{heading}"));
        }
        for i in 0..YEARS {
            plan.put(at(4, i), (2026 + i).to_string());
            plan.put(at(6, i), works(i).to_string());
            plan.put(
                at(7, i),
                if i == 0 { "150".into() } else { format!("={}*1.01>{}", at(7, i - 1), running(i)) },
            );
            plan.put(at(8, i), format!("=SUM({}:{})>{}", at(6, i), at(7, i), works(i) + running(i)));
            plan.put(at(10, i), water(i).to_string());
            plan.put(at(11, i), fish(i).to_string());
            plan.put(at(12, i), format!("={}+{}>{}", at(10, i), at(11, i), water(i) + fish(i)));
            plan.put(at(14, i), format!("=1/(1+$B$2)^({}-$B$1)>{}", at(4, i), factor(i)));
            let costs = (works(i) + running(i)) * factor(i);
            plan.put(at(15, i), format!("={}*{}>{costs}", at(8, i), at(14, i)));
            let benefits = (water(i) + fish(i)) * factor(i);
            plan.put(at(16, i), format!("={}*{}>{benefits}", at(12, i), at(14, i)));
        }
        plan.set("B18", &format!("=SUM({})>{}", row(15), pv_costs()));
        plan.set("B19", &format!("=SUM({})>{}", row(16), pv_benefits()));
        plan.set("B20", &format!("=B19-B18>{}", pv_benefits() - pv_costs()));
        for (name, cells) in [
            ("hence_base", "B1".to_owned()),
            ("hence_basis", "B2".to_owned()),
            ("hence_years", row(4)),
            ("hence_cost_works", row(6)),
            ("hence_cost_running", row(7)),
            ("hence_benefit_water", row(10)),
            ("hence_benefit_fish", row(11)),
            ("hence_factor", row(14)),
            ("hence_pv_costs", "B18".to_owned()),
            ("hence_pv_benefits", "B19".to_owned()),
            ("hence_npv", "B20".to_owned()),
        ] {
            plan.names.push((name.to_owned(), cells));
        }
        plan
    }

    /// Puts something into a cell.
    pub fn set(&mut self, cell: &str, content: &str) -> &mut Self {
        self.put(cell.parse().expect("a cell"), content.to_owned())
    }

    pub fn put(&mut self, cell: Cell, content: String) -> &mut Self {
        self.cells.insert(cell, content);
        self
    }

    /// Gives a name to cells, or takes it away.
    pub fn name(&mut self, name: &str, cells: Option<&str>) -> &mut Self {
        self.names.retain(|(other, _)| other != name);
        self.names.extend(cells.map(|cells| (name.to_owned(), cells.to_owned())));
        self
    }

    /// Replaces formulas of the results by their numbers, `added` to the NPV and the PV of costs.
    pub fn typed_results(&mut self, costs: f64, benefits: f64, npv: f64) -> &mut Self {
        self.set("B18", &costs.to_string()).set("B19", &benefits.to_string()).set("B20", &npv.to_string())
    }

    pub fn small(&self) -> Small {
        let lines: Vec<String> =
            self.cells.iter().map(|(cell, content)| format!("{cell}: {content}")).collect();
        let names: Vec<String> = self.names.iter().map(|(name, cells)| format!("{name} {cells}")).collect();
        Small::default().sheet("Plan", &lines.join("\n")).names(&names.join(", "))
    }

    /// What is wrong with it by its structure.
    pub fn findings(&self) -> Vec<Finding> {
        let (package, book) = self.small().open();
        let catalogue = Catalogue::builtin();
        let seen = Seen::look(&package, &book, &Options::default(), &catalogue)
            .unwrap_or_else(|error| panic!("{error}"));
        findings(&seen).expect("cells are read")
    }

    /// What `check` finds, with all that keeps the plan from being valued as it stands.
    pub fn checked(&self) -> Vec<Finding> {
        let (package, _) = self.small().open();
        let report = check(&package, &CheckRequest::default(), &Catalogue::builtin())
            .unwrap_or_else(|error| panic!("{error}"));
        report.findings
    }

    /// The same as `code place`.
    pub fn codes(&self) -> Vec<String> {
        let found = self.findings();
        found.iter().map(|finding| format!("{} {}", finding.kind.code(), finding.place)).collect()
    }
}
