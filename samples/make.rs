//! Makes the sample appraisal workbook: a closed mine whose drainage must be treated for centuries.
//!
//! `cargo run -p hence-workbook --example make-samples -- samples/mine-drainage.xlsx`. The place and every figure are
//! invented. `mine-drainage-libreoffice.xlsx` is the same workbook, opened and saved by LibreOffice Calc 7.4.

use std::collections::BTreeMap;

use xlsxwriter::prelude::*;
use xlsxwriter::worksheet::PaperType;
use xlsxwriter::worksheet::conditional_format::ConditionalFormat;
use xlsxwriter::worksheet::validation::{DataValidation, DataValidationType, ErrorAlertOptions};

type Outcome<T> = Result<T, XlsxError>;

const BASE_YEAR: u32 = 2026;
const YEARS: u32 = 200;
const FIRST_COLUMN: u16 = 3;
const LAST_COLUMN: u16 = FIRST_COLUMN + YEARS as u16 - 1;
const BASIS: &str = "3.5% to 30, 3% to 75, 2.5% to 125, 2% to 200, 1.5% to 300, 1% after";

/// Rows of an option's sheet, from 0.
mod row {
    pub const YEARS: u32 = 3;
    pub const WORKS: u32 = 5;
    pub const RUNNING: u32 = 6;
    pub const RENEWAL: u32 = 7;
    pub const COSTS: u32 = 8;
    pub const WATER: u32 = 10;
    pub const RIVER: u32 = 11;
    pub const NET: u32 = 12;
    pub const FACTOR: u32 = 14;
    pub const PV: u32 = 15;
    pub const RESULTS: u32 = 18;
}

/// One way of dealing with the drainage, in crowns of 2026.
struct Way {
    name: &'static str,
    about: &'static str,
    /// (year, amount)
    works: &'static [(u32, f64)],
    running: f64,
    renewal: f64,
    renewal_every: u32,
    water: f64,
    /// Share of the damage that remains once the works are done.
    damage_left: f64,
}

const WAYS: [Way; 4] = [
    Way {
        name: "Do nothing",
        about: "The adit drains into the Ostrey untreated; the outflow is only watched.",
        works: &[],
        running: 35_000.0,
        renewal: 0.0,
        renewal_every: 0,
        water: 0.0,
        damage_left: 1.0,
    },
    Way {
        name: "Settling ponds",
        about: "Ponds and reed beds below the adit, dredged and relined every 25 years.",
        works: &[(2027, 6_500_000.0), (2028, 4_000_000.0)],
        running: 240_000.0,
        renewal: 2_100_000.0,
        renewal_every: 25,
        water: 150_000.0,
        damage_left: 0.55,
    },
    Way {
        name: "Lime plant",
        about: "A lime dosing plant with sludge presses, renewed every 30 years, for as long as the mine drains.",
        works: &[(2027, 5_000_000.0), (2028, 6_000_000.0), (2029, 3_000_000.0)],
        running: 820_000.0,
        renewal: 6_000_000.0,
        renewal_every: 30,
        water: 420_000.0,
        damage_left: 0.1,
    },
    Way {
        name: "Plug and divert",
        about: "Concrete plugs flood the workings; a cut-off tunnel leads clean water past them.",
        works: &[
            (2027, 6_000_000.0),
            (2028, 9_000_000.0),
            (2029, 9_000_000.0),
            (2030, 8_000_000.0),
            (2031, 6_000_000.0),
        ],
        running: 90_000.0,
        renewal: 4_000_000.0,
        renewal_every: 60,
        water: 300_000.0,
        damage_left: 0.18,
    },
];

/// Inputs that the option sheets refer to: label, value, note, number format.
const DAMAGE_NOW: f64 = 1_600_000.0;
const DAMAGE_GROWTH: f64 = 0.003;
const UPLIFT: f64 = 0.2;

struct Styles {
    title: Format,
    heading: Format,
    number_heading: Format,
    unit_heading: Format,
    text: Format,
    unit: Format,
    input: Format,
    input_text: Format,
    percent: Format,
    year: Format,
    money: Format,
    total: Format,
    factor: Format,
    result: Format,
    ratio: Format,
    rate: Format,
}

impl Styles {
    fn new() -> Self {
        let make = |change: &dyn Fn(&mut Format)| {
            let mut format = Format::new();
            change(&mut format);
            format
        };
        let shade = FormatColor::Custom(0xFFF6DD);
        Styles {
            title: make(&|f| {
                f.set_bold().set_font_size(14.0);
            }),
            heading: make(&|f| {
                f.set_bold().set_border_bottom(FormatBorder::Thin);
            }),
            number_heading: make(&|f| {
                f.set_bold().set_border_bottom(FormatBorder::Thin).set_align(FormatAlignment::Right);
            }),
            unit_heading: make(&|f| {
                f.set_bold().set_border_bottom(FormatBorder::Thin).set_indent(1);
            }),
            text: make(&|f| {
                f.set_text_wrap().set_vertical_align(FormatVerticalAlignment::VerticalTop).set_indent(1);
            }),
            unit: make(&|f| {
                f.set_indent(1);
            }),
            input: make(&|f| {
                f.set_num_format("#,##0").set_bg_color(shade);
            }),
            input_text: make(&|f| {
                f.set_bg_color(shade);
            }),
            percent: make(&|f| {
                f.set_num_format("0.0%").set_bg_color(shade);
            }),
            year: make(&|f| {
                f.set_bold().set_num_format("0").set_border_bottom(FormatBorder::Thin);
            }),
            money: make(&|f| {
                f.set_num_format("#,##0;-#,##0;-");
            }),
            total: make(&|f| {
                f.set_bold().set_num_format("#,##0;-#,##0;-").set_border_top(FormatBorder::Thin);
            }),
            factor: make(&|f| {
                f.set_num_format("0.0000");
            }),
            result: make(&|f| {
                f.set_bold().set_num_format("#,##0");
            }),
            ratio: make(&|f| {
                f.set_bold().set_num_format("0.00");
            }),
            rate: make(&|f| {
                f.set_bold().set_num_format("0.0%");
            }),
        }
    }
}

fn column(index: u16) -> String {
    let mut letters = String::new();
    let mut n = u32::from(index) + 1;
    while n > 0 {
        letters.insert(0, char::from(b'A' + ((n - 1) % 26) as u8));
        n = (n - 1) / 26;
    }
    letters
}

/// A row's cells along the years, absolute.
fn along(sheet: &str, row: u32) -> String {
    format!("='{sheet}'!${}${}:${}${}", column(FIRST_COLUMN), row + 1, column(LAST_COLUMN), row + 1)
}

fn main() -> Outcome<()> {
    write(&std::env::args().nth(1).unwrap_or_else(|| "samples/mine-drainage.xlsx".to_owned()))
}

/// Writes the workbook; but for the time in `docProps/core.xml`, always the same.
pub fn write(path: &str) -> Outcome<()> {
    let book = Workbook::new(path)?;
    let styles = Styles::new();
    summary(&book, &styles)?;
    inputs(&book, &styles)?;
    for way in &WAYS {
        option(&book, &styles, way)?;
    }
    book.close()
}

fn summary(book: &Workbook, styles: &Styles) -> Outcome<()> {
    let mut sheet = book.add_worksheet(Some("Summary"))?;
    sheet.set_column(0, 0, 22.0, None)?;
    sheet.set_column(1, 4, 20.0, None)?;
    sheet.set_landscape();
    sheet.set_paper(PaperType::A4);
    sheet.fit_to_pages(1, 0);
    sheet.set_footer("&L&A&RPage &P of &N")?;
    sheet.write_string(0, 0, "Hollin Rigg mine: treating the drainage", Some(&styles.title))?;
    sheet.write_string(1, 0, "Invented figures, in crowns at 2026 prices.", None)?;
    for (c, head) in
        ["Option", "PV of benefits", "PV of costs", "NPV over do nothing", "Rank"].iter().enumerate()
    {
        let style = if c == 0 { &styles.heading } else { &styles.number_heading };
        sheet.write_string(3, c as u16, head, Some(style))?;
    }
    for (i, way) in WAYS.iter().enumerate() {
        let row = 4 + i as u32;
        sheet.write_string(row, 0, way.name, None)?;
        // These cells wait for the option sheets to be filled: nothing there yet is 0 here.
        for (c, result) in [(1, 1), (2, 0), (3, 2)] {
            let cell = format!("='{}'!$B${}", way.name, row::RESULTS + 1 + result);
            sheet.write_formula_num(row, c, &cell, Some(&styles.money), 0.0)?;
        }
        sheet.write_formula_num(row, 4, &format!("=RANK(D{},$D$5:$D$8)", row + 1), None, 1.0)?;
    }
    let mut good = Format::new();
    good.set_bold().set_bg_color(FormatColor::Custom(0xDDEEFF));
    sheet.conditional_format_range(4, 3, 7, 3, &ConditionalFormat::cell_greater_than(0.0, &good))?;
    let mut chart = book.add_chart(ChartType::Column);
    let mut series = chart.add_series(Some("=Summary!$A$5:$A$8"), Some("=Summary!$D$5:$D$8"))?;
    series.set_name("NPV over do nothing, crowns")?;
    chart.add_title("Which way of treating the drainage?")?;
    sheet.insert_chart(10, 0, &chart)?;
    Ok(())
}

fn inputs(book: &Workbook, styles: &Styles) -> Outcome<()> {
    let mut sheet = book.add_worksheet(Some("Inputs"))?;
    sheet.set_column(0, 0, 34.0, None)?;
    sheet.set_column(1, 1, 66.0, None)?;
    sheet.set_landscape();
    sheet.set_paper(PaperType::A4);
    sheet.fit_to_pages(1, 0);
    sheet.set_footer("&L&A&RPage &P of &N")?;
    sheet.set_column(2, 2, 60.0, None)?;
    sheet.write_string(0, 0, "Inputs", Some(&styles.title))?;
    sheet.write_string(2, 0, "Base year", None)?;
    sheet.write_number(
        2,
        1,
        f64::from(BASE_YEAR),
        Some(&{
            let mut f = Format::new();
            f.set_num_format("0")
                .set_bg_color(FormatColor::Custom(0xFFF6DD))
                .set_align(FormatAlignment::Left);
            f
        }),
    )?;
    sheet.write_string(3, 0, "Discount rate", None)?;
    sheet.write_string(3, 1, BASIS, Some(&styles.input_text))?;
    sheet.write_comment(
        3,
        1,
        "Set by the body that funds the works. A rate line, or the id of a schedule.",
    )?;
    let lines = [BASIS, "uk-2003", "dk-2018", "3.5%"];
    sheet.data_validation_cell(
        3,
        1,
        &DataValidation::new(
            DataValidationType::ListFormula { formula: "=$E$4:$E$7".to_owned(), ignore_blank: true },
            None,
            Some(ErrorAlertOptions {
                style: xlsxwriter::worksheet::validation::DataValidationErrorType::Warning,
                title: "Discount rate".to_owned(),
                message: "Not one of the usual bases: is it meant?".to_owned(),
            }),
        ),
    )?;
    sheet.set_column(4, 4, 30.0, None)?;
    sheet.write_string(2, 4, "Usual bases", Some(&styles.heading))?;
    for (i, line) in lines.iter().enumerate() {
        sheet.write_string(3 + i as u32, 4, line, None)?;
    }
    sheet.write_string(4, 0, "Timing", None)?;
    sheet.write_string(4, 1, "flows end, base end", Some(&styles.input_text))?;
    sheet.write_string(5, 0, "Baseline", None)?;
    sheet.write_string(5, 1, WAYS[0].name, Some(&styles.input_text))?;
    sheet.write_string(6, 0, "Added to the works for optimism", None)?;
    sheet.write_number(6, 1, UPLIFT, Some(&styles.percent))?;
    sheet.write_string(6, 2, "From the outturn of five earlier schemes of the kind.", Some(&styles.text))?;
    sheet.write_string(7, 0, "River damage in 2026, crowns a year", None)?;
    sheet.write_number(7, 1, DAMAGE_NOW, Some(&styles.input))?;
    sheet.write_string(
        7,
        2,
        "Lost abstraction, fisheries and bathing on 31 km of the Ostrey.",
        Some(&styles.text),
    )?;
    sheet.write_string(8, 0, "Growth of the damage a year", None)?;
    sheet.write_number(8, 1, DAMAGE_GROWTH, Some(&styles.percent))?;
    sheet.write_comment(8, 1, "Follows the number of households downstream.")?;
    for (name, row) in [
        ("hence_base", 3),
        ("hence_basis", 4),
        ("hence_timing", 5),
        ("hence_baseline", 6),
        ("hence_uplift_works", 7),
    ] {
        book.define_name(name, &format!("=Inputs!$B${row}"))?;
    }
    Ok(())
}

fn option(book: &Workbook, styles: &Styles, way: &Way) -> Outcome<()> {
    let mut sheet = book.add_worksheet(Some(way.name))?;
    sheet.set_column(0, 0, 30.0, None)?;
    sheet.set_column(1, 1, 16.0, None)?;
    sheet.set_column(2, 2, 9.0, None)?;
    sheet.set_column(FIRST_COLUMN, LAST_COLUMN, 11.0, None)?;
    sheet.freeze_panes(row::YEARS + 1, FIRST_COLUMN);
    sheet.set_landscape();
    // Two centuries on eight sheets of A3, 25 years each.
    sheet.set_paper(PaperType::A3);
    sheet.fit_to_pages(8, 1);
    sheet.set_footer("&L&A&RPage &P of &N")?;
    sheet.repeat_columns(0, 2)?;
    sheet.write_string(0, 0, way.name, Some(&styles.title))?;
    sheet.write_string(1, 0, way.about, None)?;
    for (c, head) in ["Crowns at 2026 prices", "Total", "Unit"].iter().enumerate() {
        let style = [&styles.heading, &styles.number_heading, &styles.unit_heading][c];
        sheet.write_string(row::YEARS, c as u16, head, Some(style))?;
    }
    let labels = [
        (row::WORKS, "Works"),
        (row::RUNNING, if way.works.is_empty() { "Watching the outflow" } else { "Running the works" }),
        (row::RENEWAL, "Renewals"),
        (row::COSTS, "All costs"),
        (row::WATER, "Clean water sold"),
        (row::RIVER, "Damage to the river"),
        (row::NET, "Benefits less costs and damage"),
        (row::FACTOR, "Discount factor"),
        (row::PV, "Present value of the net flow"),
    ];
    for (r, label) in labels {
        let style = if matches!(r, row::COSTS | row::NET) { Some(&styles.total) } else { None };
        sheet.write_string(r, 0, label, style)?;
    }
    let flows = flows(way);
    for (r, values) in &flows {
        let style = if matches!(*r, row::COSTS | row::NET) { &styles.total } else { &styles.money };
        let (first, last) = (column(FIRST_COLUMN), column(LAST_COLUMN));
        let total = format!("=SUM({first}{r1}:{last}{r1})", r1 = r + 1);
        sheet.write_formula_num(*r, 1, &total, Some(style), values.iter().sum())?;
        sheet.write_string(*r, 2, "crowns", Some(&styles.unit))?;
    }
    for n in 0..YEARS {
        year(&mut sheet, styles, way, &flows, n)?;
    }
    let results = [
        ("PV of costs", "pv_costs"),
        ("PV of benefits", "pv_benefits"),
        ("Net present value", "npv"),
        ("Benefit-cost ratio", "ratio"),
        ("Annual equivalent", "annual"),
        ("Internal rate of return", "irr"),
        ("Discounted payback, years", "payback"),
    ];
    sheet.write_string(row::RESULTS - 1, 0, "Results", Some(&styles.heading))?;
    for (i, (label, role)) in results.iter().enumerate() {
        let r = row::RESULTS + i as u32;
        sheet.write_string(r, 0, label, None)?;
        let style = match *role {
            "ratio" | "payback" => &styles.ratio,
            "irr" => &styles.rate,
            _ => &styles.result,
        };
        sheet.write_blank(r, 1, Some(style))?;
        book.define_name(&format!("'{}'!hence_{role}", way.name), &format!("='{}'!$B${}", way.name, r + 1))?;
    }
    let mut names: Vec<(&str, u32)> = vec![
        ("years", row::YEARS),
        ("cost_running", row::RUNNING),
        ("damage_river", row::RIVER),
        ("factor", row::FACTOR),
        ("pv", row::PV),
    ];
    if !way.works.is_empty() {
        names.extend([
            ("cost_works", row::WORKS),
            ("cost_renewal", row::RENEWAL),
            ("benefit_water", row::WATER),
        ]);
    }
    for (role, r) in names {
        book.define_name(&format!("'{}'!hence_{role}", way.name), &along(way.name, r))?;
    }
    Ok(())
}

/// The numbers of every row, as the formulas give them.
fn flows(way: &Way) -> BTreeMap<u32, Vec<f64>> {
    let done = way.works.last().map_or(BASE_YEAR, |(year, _)| *year);
    let mut rows: BTreeMap<u32, Vec<f64>> = BTreeMap::new();
    for n in 0..YEARS {
        let year = BASE_YEAR + n;
        let works = way.works.iter().find(|(y, _)| *y == year).map_or(0.0, |(_, x)| *x);
        let running = if year > done { way.running } else { 0.0 };
        let due = way.renewal_every > 0 && year > done && (year - done).is_multiple_of(way.renewal_every);
        let renewal = if due { way.renewal } else { 0.0 };
        let water = if year > done { way.water } else { 0.0 };
        let left = if year > done { way.damage_left } else { 1.0 };
        let river = DAMAGE_NOW * (1.0 + DAMAGE_GROWTH).powi(n as i32) * left;
        let costs = works + running + renewal;
        let values = [
            (row::WORKS, works),
            (row::RUNNING, running),
            (row::RENEWAL, renewal),
            (row::COSTS, costs),
            (row::WATER, water),
            (row::RIVER, river),
            (row::NET, water - costs - river),
        ];
        for (r, value) in values {
            rows.entry(r).or_default().push(value);
        }
    }
    rows
}

/// One year's cells: typed amounts where an amount was planned, formulas elsewhere.
fn year(
    sheet: &mut Worksheet,
    styles: &Styles,
    way: &Way,
    flows: &BTreeMap<u32, Vec<f64>>,
    n: u32,
) -> Outcome<()> {
    let c = FIRST_COLUMN + n as u16;
    let here = column(c);
    let value = |r: u32| flows[&r][n as usize];
    let label = f64::from(BASE_YEAR + n);
    let formula =
        if n == 0 { "=Inputs!$B$3".to_owned() } else { format!("={}{}+1", column(c - 1), row::YEARS + 1) };
    sheet.write_formula_num(row::YEARS, c, &formula, Some(&styles.year), label)?;
    for r in [row::WORKS, row::RUNNING, row::RENEWAL, row::WATER] {
        if value(r) != 0.0 {
            sheet.write_number(r, c, value(r), Some(&styles.money))?;
        } else {
            sheet.write_blank(r, c, Some(&styles.money))?;
        }
    }
    let done = way.works.last().map_or(BASE_YEAR, |(year, _)| *year);
    let left = if BASE_YEAR + n > done { way.damage_left } else { 1.0 };
    let share = if left == 1.0 { String::new() } else { format!("*{left}") };
    let river = format!("=Inputs!$B$8*(1+Inputs!$B$9)^({here}{}-Inputs!$B$3){share}", row::YEARS + 1);
    sheet.write_formula_num(row::RIVER, c, &river, Some(&styles.money), value(row::RIVER))?;
    let costs = format!("=SUM({here}{}:{here}{})", row::WORKS + 1, row::RENEWAL + 1);
    sheet.write_formula_num(row::COSTS, c, &costs, Some(&styles.total), value(row::COSTS))?;
    let net = format!("={here}{}-{here}{}-{here}{}", row::WATER + 1, row::COSTS + 1, row::RIVER + 1);
    sheet.write_formula_num(row::NET, c, &net, Some(&styles.total), value(row::NET))?;
    sheet.write_blank(row::FACTOR, c, Some(&styles.factor))?;
    sheet.write_blank(row::PV, c, Some(&styles.money))?;
    Ok(())
}
