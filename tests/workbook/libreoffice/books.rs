//! Small appraisals over every kind of curve, years and timing, laid out across and down.
//!
//! Figures are made up for the test.

use hence_core::Catalogue;
use hence_workbook::references::Cell;

use crate::small::Small;

/// How the years are written.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Labels {
    /// 2026
    Calendar,
    /// 2011/12, which a spreadsheet program may take for a date
    Slash,
    /// 2011-12
    Dash,
    /// FY12
    Fy,
    /// 0, 1, 2
    Numbers,
    /// 1 April of each year, and 29 February 2028 as a base
    Dates,
    /// 0, 1.25, 2.5
    Offsets,
}

/// One appraisal.
#[derive(Clone, Copy, Debug)]
pub struct Case {
    pub basis: &'static str,
    pub timing: &'static str,
    pub labels: Labels,
    pub across: bool,
    /// Factors are filled too, so that present values refer to them.
    pub factors: bool,
    /// Years before the base.
    pub past: u32,
    /// Signs, units, uplift, residual and tail.
    pub settings: bool,
    /// What the prices are, and by what flows are multiplied, in words: `inflation`, `index`, `growth`.
    pub prices: (&'static str, &'static str),
    /// A basis of two streams' own, and whether the factors of one are filled.
    pub own: (&'static str, bool),
    /// `consumption` or `income`, and the elasticity stated for it, if one is.
    pub welfare: (&'static str, &'static str),
}

const YEARS: u32 = 40;

/// A line and the way it is laid.
#[rustfmt::skip]
pub const CASES: &[Case] = {
    use Labels::*;
    const fn case(basis: &'static str, timing: &'static str, labels: Labels, across: bool, factors: bool) -> Case {
        Case { basis, timing, labels, across, factors, past: 0, settings: false, prices: ("", ""), own: ("", false), welfare: ("", "") }
    }
    const fn with(case: Case, past: u32, settings: bool) -> Case {
        Case { past, settings, ..case }
    }
    const fn priced(case: Case, basis: &'static str, by: &'static str) -> Case {
        Case { prices: (basis, by), ..case }
    }
    const fn own(case: Case, basis: &'static str, factors: bool) -> Case {
        Case { own: (basis, factors), ..case }
    }
    const fn faring(case: Case, by: &'static str, elasticity: &'static str) -> Case {
        Case { welfare: (by, elasticity), ..case }
    }
    const BANDS: &str = "3.5% to 30, 3% to 75, 2.5% after";
    &[
        case("3.5%", "flows end", Calendar, true, true),
        case("0.035", "flows middle", Slash, true, false),
        with(case("4%", "flows start, base start", Fy, false, false), 0, true),
        with(case("3.5% continuous", "flows averaged", Calendar, false, true), 3, true),
        case("3% continuous", "flows end", Dates, true, false),
        with(case("-1%", "flows middle, base start", Dash, false, true), 5, false),
        with(case(BANDS, "flows end", Calendar, true, true), 4, true),
        case(BANDS, "flows middle", Slash, false, true),
        with(case(BANDS, "flows averaged", Fy, true, false), 2, true),
        case(BANDS, "flows middle, base start", Numbers, true, true),
        case(BANDS, "flows end", Dates, false, true),
        case(BANDS, "flows end", Offsets, false, false),
        case("2.5% to 2040, 1.5% after", "flows end", Calendar, true, true),
        case("2.5% to 2040, 1.5% after", "flows middle", Numbers, false, false),
        case("2.5% to 2025, 1.5% after", "flows end", Dash, true, false),
        case("3% to 10, 2% after; edges from 2020", "flows end", Calendar, false, true),
        case("4% to 10, 3% to 30, 2% after; whole horizon by flow", "flows end", Calendar, true, true),
        case("4% to 10, 3% to 30, 2% after; whole horizon by flow", "flows middle, base start", Slash, false, false),
        case("4% to 10, 3% to 30, 2% after; whole horizon by length", "flows end", Numbers, true, false),
        case("3.9% at 3, 4% at 10, 4.2% at 30; whole horizon by length, interpolated", "flows end", Calendar, true, true),
        case("3.9% at 3, 4% at 10, 4.2% at 30; whole horizon by flow, interpolated", "flows averaged, base start", Calendar, false, true),
        with(case("preference 0.5%, hazard 1%, elasticity 1, growth 2%", "flows end", Calendar, true, true), 0, true),
        case("preference 0.5%, hazard 1%, elasticity 1.5, growth 2%; continuous", "flows middle", Dates, false, false),
        case("preference 1%, elasticity 2, growth 2%; exact", "flows averaged, base start", Slash, true, true),
        case("preference 1%, elasticity 2, growth 2% to 20, -0.5% after", "flows end", Calendar, true, false),
        case("preference 1%, elasticity 2, growth 2% to 20, 1% after; exact", "flows middle, base start", Fy, false, true),
        case("preference 1%, elasticity 2, growth 2% sd 3.6%", "flows end", Calendar, false, true),
        case("preference 1%, elasticity 2, log growth 2% sd 3.6%", "flows middle", Numbers, true, true),
        case("preference 1%, elasticity 2, log growth 2% sd 3% persistence 0.7", "flows middle, base start", Calendar, true, true),
        case("states-2026", "flows averaged, base start", Fy, false, true),
        with(case("gamma mean 4% sd 3%", "flows end", Calendar, true, true), 2, true),
        case("gamma mean 4% sd 3%", "flows averaged", Offsets, true, false),
        case("0.5 of (1%), 0.5 of (7% continuous)", "flows averaged", Calendar, false, false),
        with(case("0.25 of (3% to 10, 2% after), 0.75 of (gamma mean 4% sd 2%)", "flows middle", Slash, true, true), 0, true),
        // Streams on a basis of their own.
        own(with(case("3.5%", "flows end", Calendar, true, true), 2, true), "1.5% to 30, 1% after", true),
        own(with(case(BANDS, "flows averaged", Slash, false, false), 0, true), "2% continuous", false),
        own(case("gamma mean 4% sd 3%", "flows middle", Numbers, true, false), "0.5 of (1%), 0.5 of (3%)", true),
        own(priced(with(case("4%", "flows end", Dates, false, true), 0, true), "nominal", "inflation, growth"), "1%", false),
        own(case("3% to 10.5, 2% after", "flows end", Calendar, true, true), "1%", true),
        own(case("3%", "flows end", Calendar, true, false), "2% to 7.5, 1% after", true),
        // Flows weighted by income, and flows against consumption.
        faring(with(case("3.5%", "flows end", Calendar, true, true), 2, true), "income", "1.3"),
        faring(priced(case("preference 1%, elasticity 2, growth 2%; exact", "flows end", Slash, false, false), "nominal", "inflation, growth"), "income", ""),
        faring(case("preference 0.5%, hazard 1%, elasticity 1, growth 2%", "flows end", Calendar, true, true), "consumption", ""),
        faring(with(case(BANDS, "flows averaged", Slash, false, false), 3, true), "consumption", "1.5"),
        faring(case("4%", "flows end", Offsets, true, false), "consumption", "0.5"),
        faring(priced(with(case("3%", "flows middle, base start", Calendar, false, true), 2, false), "real 2030", "inflation"), "consumption", "2"),
        faring(case("3% to 10.5, 2% after", "flows end", Calendar, true, true), "consumption", "1.5"),
        // Without a second route: an edge within a year, and a table of factors.
        case("3% to 10.5, 2% after", "flows end", Calendar, true, true),
        case("factors-2026", "flows end", Numbers, false, true),
        // Schedules, one with a companion beyond 50 years that is not reached here.
        case("uk-2003", "flows end", Fy, true, true),
        case("uk-2018", "flows middle", Calendar, false, true),
        // Money of the day made real, and prices that grow against others.
        priced(with(case("3.5%", "flows end", Calendar, true, true), 4, true), "real 2030", "inflation, growth"),
        priced(with(case(BANDS, "flows middle", Slash, false, false), 0, true), "nominal to real 2008/09", "inflation"),
        priced(with(case("4%", "flows averaged", Calendar, true, false), 3, false), "real 2026", "index"),
        priced(case("uk-2003", "flows end", Fy, false, true), "real FY12", "index, growth"),
        priced(case("3%", "flows end", Dates, true, true), "nominal", "inflation, growth"),
        priced(case("gamma mean 4% sd 3%", "flows end", Numbers, false, false), "real 2022", "inflation"),
        priced(case("3% continuous", "flows end", Offsets, true, true), "real 2022", "growth"),
        priced(with(case("3%", "flows middle", Numbers, true, true), 0, true), "real", "growth"),
    ]
};

/// The built-in schedules, a table of factors, and growth in two states.
pub fn catalogue() -> Catalogue {
    let table = "id = \"factors-2026\"\ntitle = \"Factors made up for a test\"\nbody = \"Nobody\"\nyear = 2026\n\
                 place = \"this file\"\naddress = \"https://example.org\"\nstatus = \"current\"\ncomplete = true\n\
                 checked = \"not published\"\nnotes = \"\"\ntable = [[0, 1.0], [10, 0.8], [20, 0.7], [50, 0.5]]\n";
    let states = table
        .replace("factors-2026", "states-2026")
        .split("table =")
        .next()
        .unwrap_or_default()
        .to_owned()
        + "[regimes]\npreference = 0.01\nelasticity = 2\nstart = [1, 0]\ntransition = [[0.9, 0.1], [0.4, 0.6]]\n\
           states = [{ mean = 0.03, sd = 0.02 }, { mean = -0.02, sd = 0.04 }]\n";
    let files = [("factors-2026.toml".to_owned(), table.to_owned()), ("states-2026.toml".to_owned(), states)];
    Catalogue::builtin().with(&files).expect("schedules")
}

impl Case {
    /// The place of the i-th cell of a line.
    fn at(&self, line: u32, i: u32) -> Cell {
        if self.across { Cell { row: 12 + line, col: 2 + i } } else { Cell { row: 12 + i, col: 2 + line } }
    }

    /// The i-th cell of the years.
    pub fn label(&self, i: u32) -> String {
        self.at(0, i).to_string()
    }

    /// The i-th cell of the first stream of costs.
    pub fn flow(&self, i: u32) -> String {
        self.at(1, i).to_string()
    }

    /// The i-th level of prices.
    pub fn level(&self, i: u32) -> String {
        self.at(9, i).to_string()
    }

    /// The i-th level of consumption.
    pub fn consumption(&self, i: u32) -> String {
        self.at(11, i).to_string()
    }

    /// The i-th factor of a stream on its own basis.
    pub fn own_factor(&self, i: u32) -> String {
        self.at(10, i).to_string()
    }

    fn values(&self, line: u32, value: impl Fn(u32) -> String) -> String {
        (0..YEARS).map(|i| format!("{}: {}\n", self.at(line, i), value(i))).collect()
    }

    fn range(&self, line: u32) -> String {
        format!("{}:{}", self.at(line, 0), self.at(line, YEARS - 1))
    }

    /// The i-th label as a cell of [`Small`].
    pub fn written(&self, i: u32) -> String {
        let year = 2026 - self.past + i;
        let financial = 2010 - self.past + i;
        match self.labels {
            Labels::Calendar => year.to_string(),
            Labels::Slash => format!("'{financial}/{:02}", (financial + 1) % 100),
            Labels::Dash => format!("'{financial}-{:02}", (financial + 1) % 100),
            Labels::Fy => format!("'FY{:02}", (financial + 1) % 100),
            Labels::Numbers => i.to_string(),
            // 1 April 2026 is day 46,113.
            Labels::Dates => format!("@{}", 46_113 + i * 365 + (i + 2) / 4),
            Labels::Offsets => format!("{}", f64::from(i) * 1.25),
        }
    }

    fn base(&self) -> String {
        match self.labels {
            Labels::Calendar | Labels::Numbers | Labels::Offsets => "2026".into(),
            Labels::Slash => "'2010/11".into(),
            Labels::Dash => "'2010-11".into(),
            Labels::Fy => "'FY11".into(),
            // 29 February 2024, day 45,351.
            Labels::Dates => "@45351".into(),
        }
    }

    /// The workbook: settings at the top left, results beside them, lines of years below.
    pub fn book(&self) -> Small {
        let axis = if self.labels == Labels::Offsets { "offsets" } else { "years" };
        let basis = match self.basis.parse::<f64>() {
            Ok(rate) => rate.to_string(),
            Err(_) => format!("'{}", self.basis),
        };
        let mut cells = format!("A1: 'Base | {}\nA2: 'Basis | {basis}\n", self.base());
        let mut names = format!("hence_base B1, hence_basis B2, hence_{axis} {}", self.range(0));
        if !matches!(self.labels, Labels::Dates | Labels::Offsets) {
            cells += &format!("A3: 'Timing | '{}\n", self.timing);
            names += ", hence_timing B3";
        }
        let sign = if self.settings { "-" } else { "" };
        if self.settings {
            cells += "A4: 'Signs | 'costs negative\nA5: 'Unit | 'k\nA6: 'Uplift | 0.15\nA7: 'Left | -250\n\
                      A8: 'Tail | 'to 60\nA9: 'Site | 75\n";
            names += ", hence_signs B4, hence_unit_works B5, hence_uplift_works B6, hence_residual_works B7, \
                      hence_tail_running B8, hence_residual_access B9";
        }
        let (prices, by) = self.prices;
        if !prices.is_empty() {
            cells += &format!("A10: 'Prices | '{prices}\nA11: 'Inflation | 0.025\nA12: 'Growth | 0.012\n");
            names += ", hence_price_basis B10";
        }
        let (by_welfare, elasticity) = self.welfare;
        if !elasticity.is_empty() {
            cells += &format!("D11: 'Elasticity | {elasticity}\n");
            names += ", hence_elasticity E11";
        }
        if by_welfare == "income" {
            cells += "D12: 'Incomes | 18000 | 30000\n";
            names += ", hence_income_access E12, hence_income_running E12, hence_income_reference F12";
        }
        if by_welfare == "consumption" {
            cells += &self.values(11, |i| format!("{}", 6000.0 + 100.0 * f64::from(i)));
            names += &format!(", hence_consumption {}", self.range(11));
            if self.settings {
                names += ", hence_unit_consumption B5";
            }
        }
        let (own, own_factors) = self.own;
        if !own.is_empty() {
            cells += &format!("D10: 'Own basis | '{own}\n");
            names += ", hence_basis_access E10, hence_basis_running E10";
        }
        if own_factors {
            names += &format!(", hence_factor_access {}", self.range(10));
        }
        if by.contains("growth") {
            names += ", hence_growth_access B12, hence_growth_running B12";
        }
        if by.contains("inflation") {
            names += ", hence_prices B11";
        }
        if by.contains("index") {
            cells += &self.values(9, |i| format!("{}", 80.0 + 2.0 * f64::from(i) + f64::from(i % 3)));
            names += &format!(", hence_prices {}", self.range(9));
        }
        cells += &self.values(0, |i| self.written(i));
        cells += &self.values(1, |i| if i < 4 { format!("{sign}{}", 1000 - 100 * i) } else { String::new() });
        cells += &self.values(2, |i| format!("{sign}{}", 20 + i % 7));
        cells += &self.values(3, |i| if i > 2 { format!("{}.5", 130 + 3 * i) } else { "0".into() });
        cells += &self.values(4, |i| format!("{}", 5.0 - f64::from(i % 11)));
        for (line, name) in [
            (1, "cost_works"),
            (2, "cost_running"),
            (3, "benefit_access"),
            (4, "flow_other"),
            (6, "pv"),
            (7, "pv_works"),
        ] {
            names += &format!(", hence_{name} {}", self.range(line));
        }
        // A second route to rates needs them where a year begins and ends.
        names += &format!(", hence_rates {}", self.range(8));
        if self.factors {
            names += &format!(", hence_factor {}", self.range(5));
        }
        let results = [
            "pv_running",
            "pv_access",
            "pv_costs",
            "pv_benefits",
            "npv",
            "ratio",
            "annual",
            "irr",
            "payback",
        ];
        for (k, name) in results.iter().enumerate() {
            cells += &format!("D{}: '{name}\n", k + 1);
            names += &format!(", hence_{name} E{}", k + 1);
        }
        // The analyst's own formulas, over filled cells and over others.
        cells += "G1: =E5*2>0\nG2: =G1+B6>0\nG3: =IF(E5>0,\"go\",\"stop\")>0\n";
        Small::default().sheet("Appraisal", &cells).names(&names)
    }
}

/// Two options on sheets of their own, a baseline, damages, a residual value of a damage, an effect and a budget; years
/// down, no factors.
pub fn options() -> Small {
    let years = |from: u32| -> String { (0..20).map(|i| format!("A{}: {}\n", 5 + i, from + i)).collect() };
    let column = |col: &str, value: &dyn Fn(u32) -> f64| -> String {
        (0..20).map(|i| format!("{col}{}: {}\n", 5 + i, value(i))).collect()
    };
    let wall = column("H", &|i| 20_000.0 + 300.0 * f64::from(i))
        + &years(2026)
        + &column("B", &|i| if i < 3 { 400.0 } else { 12.0 })
        + &column("C", &|i| 60.0 - f64::from(i))
        + &column("D", &|i| f64::from(i % 3));
    let nothing = years(2026) + &column("B", &|_| 2.0) + &column("C", &|i| 110.0 + 2.0 * f64::from(i));
    let common = "hence_years A5:A24, hence_cost_works B5:B24, hence_damage_flood C5:C24, hence_npv F5, hence_ratio F6, \
                  hence_pv_costs F7, hence_pv_benefits F8, hence_annual F9, hence_irr F10, hence_payback F11, \
                  hence_pv_flood F12, hence_pv E5:E24";
    Small::default()
        .sheet(
            "Inputs",
            "A1: 'Base | 2026\nA2: 'Basis | '3.5% to 10, 3% after\nA3: 'Baseline | 'Do nothing\n\
             A4: 'Left of the works | 80\nA5: 'Damage | 'growing 1%, to 2075\nA6: 'Constrained | 'works\nA7: 'Elasticity | 1.5",
        )
        .names(
            "hence_base B1, hence_basis B2, hence_baseline B3, hence_residual_works B4, hence_tail_flood B5, \
             hence_budget B6, hence_elasticity B7",
        )
        .sheet("Do nothing", &nothing)
        .own_names(common)
        .sheet("The wall's end", &wall)
        .own_names(&format!("{common}, hence_effect_homes D5:D24, hence_consumption H5:H24"))
}

/// What hence can say of a workbook whose own formulas give some of the results.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Said {
    /// They were compared.
    Agrees,
    /// They were compared, and one differs.
    Differs,
    /// They rest on what is filled: after recalculation they agree, or not.
    Awaits(bool),
}

/// Workbooks with formulas of the analyst's own in factor and result cells: name, workbook, what is said.
pub fn own_formulas() -> Vec<(&'static str, Small, Said)> {
    let flows = [-1000.0, 250.0, 300.0, 350.0, 400.0];
    let factor = |i: i32| 1.035_f64.powi(-i);
    let npv = |from: i32| -> f64 { flows.iter().zip(from..).map(|(x, i)| x * factor(i)).sum() };
    let col = |i: usize| char::from(b'B' + i as u8);
    let line = |cell: &dyn Fn(usize) -> String| (0..5).map(cell).collect::<Vec<_>>().join(" | ");
    let years = line(&|i| (2026 + i).to_string());
    let typed = line(&|i| flows[i].to_string());
    let offset = line(&|i| format!("=OFFSET($H$5,0,{i})>{}", flows[i]));
    let factors = line(&|i| format!("=1/(1+$B$2)^({}4-$B$1)>{}", col(i), factor(i as i32)));
    let wrong = line(&|i| format!("=1/(1+$B$2)^({}4-$B$1+1)>{}", col(i), factor(i as i32 + 1)));
    let book = |flows: &str, factors: &str, result: &str| {
        let cells = format!(
            "A1: 'Base | 2026\nA2: 'Rate | 0.035\nA4: 'Year | {years}\nA5: 'Net | {flows}\nA6: 'Factor | {factors}\n\
             A7: 'Present value\nA9: 'Net present value | {result}\nH5: {typed}"
        );
        let names = "hence_base B1, hence_basis B2, hence_years B4:F4, hence_flow_net B5:F5, hence_factor B6:F6, \
                     hence_pv B7:F7, hence_npv B9";
        Small::default().sheet("Plan", &cells).names(names)
    };
    let direct = |from| format!("=SUMPRODUCT(B5:F5,B6:F6)>{}", npv(from));
    vec![
        ("own-agrees.xlsx", book(&typed, &factors, &direct(0)), Said::Agrees),
        ("own-differs.xlsx", book(&typed, &wrong, &direct(1)), Said::Differs),
        // The present values were blank, so that their sum was 0.
        ("own-follows.xlsx", book(&typed, "", "=SUM(B7:F7)>0"), Said::Awaits(true)),
        ("own-slip.xlsx", book(&typed, "", "=SUM(C7:F7)>0"), Said::Awaits(false)),
        ("own-unsaved.xlsx", book(&typed, &factors, "=SUMPRODUCT(B5:F5,B6:F6)>"), Said::Awaits(true)),
        // What OFFSET refers to cannot be told from its text.
        ("own-offset.xlsx", book(&offset, &factors, ""), Said::Awaits(true)),
    ]
}
