//! Makes the sample for plan files: a workbook with two appraisals and without a single name of hence's.
//!
//! `cargo run -p hence-workbook --example make-two-sites -- samples/two-sites.xlsx`. `two-sites.toml` says what is where
//! in it: `hence fill samples/two-sites.xlsx --plan samples/two-sites.toml`. The places and every figure are invented.

use xlsxwriter::prelude::*;
use xlsxwriter::worksheet::PaperType;

type Outcome<T> = Result<T, XlsxError>;

const START: u32 = 2026;
const YEARS: u32 = 40;
const FIRST_COLUMN: u16 = 2;

/// One site, in thousands of marks at 2026 prices.
struct Site {
    name: &'static str,
    about: &'static str,
    /// Works in the first years.
    works: &'static [f64],
    upkeep: f64,
    renewal: f64,
    renewal_year: u32,
    avoided: f64,
}

const SITES: [Site; 2] = [
    Site {
        name: "Ellmere sluice",
        about: "New gates and a control house where the Ell meets the tide.",
        works: &[1_850.0, 2_400.0, 600.0],
        upkeep: 45.0,
        renewal: 900.0,
        renewal_year: 2051,
        avoided: 310.0,
    },
    Site {
        name: "Tarn bank",
        about: "Three kilometres of bank raised by half a metre, with a borrow pit beside it.",
        works: &[700.0, 1_100.0],
        upkeep: 20.0,
        renewal: 250.0,
        renewal_year: 2046,
        avoided: 96.0,
    },
];

/// Rows of a site's sheet, from 0.
mod row {
    pub const YEARS: u32 = 3;
    pub const WORKS: u32 = 4;
    pub const UPKEEP: u32 = 5;
    pub const RENEWALS: u32 = 6;
    pub const AVOIDED: u32 = 8;
    pub const FACTOR: u32 = 10;
    pub const PV: u32 = 11;
    pub const RESULTS: u32 = 13;
}

const RESULTS: [(&str, &str); 4] = [
    ("Present value of costs", "#,##0"),
    ("Present value of benefits", "#,##0"),
    ("Net present value", "#,##0"),
    ("Benefits to costs", "0.00"),
];

fn main() -> Outcome<()> {
    write(&std::env::args().nth(1).unwrap_or_else(|| "samples/two-sites.xlsx".to_owned()))
}

/// Writes the workbook; but for the time in `docProps/core.xml`, always the same.
pub fn write(path: &str) -> Outcome<()> {
    let book = Workbook::new(path)?;
    both(&book)?;
    SITES.iter().try_for_each(|site| one(&book, site))?;
    book.define_name("Start_year", "='Both sites'!$B$3")?;
    book.close()
}

fn format(bold: bool, number: &str) -> Format {
    let mut format = Format::new();
    format.set_num_format(number);
    if bold {
        format.set_bold();
    }
    format
}

fn page(sheet: &mut Worksheet) {
    sheet.set_landscape();
    sheet.set_paper(PaperType::A4);
    sheet.fit_to_pages(1, 0);
}

/// The sheet for the board: it takes its figures from the sites' own sheets.
fn both(book: &Workbook) -> Outcome<()> {
    let mut sheet = book.add_worksheet(Some("Both sites"))?;
    page(&mut sheet);
    sheet.set_column(0, 0, 26.0, None)?;
    sheet.set_column(1, RESULTS.len() as u16, 18.0, None)?;
    let (title, plain, year) = (format(true, "General"), format(false, "General"), format(false, "0"));
    sheet.write_string(0, 0, "Sea defences of Lower Sarn: what the board is asked for", Some(&title))?;
    sheet.write_string(2, 0, "Values as of", Some(&plain))?;
    sheet.write_number(2, 1, f64::from(START), Some(&year))?;
    sheet.write_string(4, 0, "Site (thousand marks)", Some(&title))?;
    for (i, (label, number)) in RESULTS.iter().enumerate() {
        let column = i as u16 + 1;
        sheet.write_string(4, column, label, Some(&title))?;
        for (k, site) in SITES.iter().enumerate() {
            let cell = format!("='{}'!B{}", site.name, row::RESULTS + i as u32 + 1);
            sheet.write_formula_num(5 + k as u32, column, &cell, Some(&format(false, number)), 0.0)?;
            sheet.write_string(5 + k as u32, 0, site.name, Some(&plain))?;
        }
    }
    Ok(())
}

/// The sheet of one site; all are laid out alike.
fn one(book: &Workbook, site: &Site) -> Outcome<()> {
    let mut sheet = book.add_worksheet(Some(site.name))?;
    page(&mut sheet);
    sheet.freeze_panes(row::YEARS + 1, FIRST_COLUMN);
    sheet.set_column(0, 0, 30.0, None)?;
    sheet.set_column(1, 1, 12.0, None)?;
    let (bold, plain) = (format(true, "General"), format(false, "General"));
    let (year, money, factor) = (format(true, "0"), format(false, "#,##0"), format(false, "0.0000"));
    sheet.write_string(0, 0, site.name, Some(&bold))?;
    sheet.write_string(1, 0, site.about, Some(&plain))?;
    let labels = [
        (row::YEARS, "Thousand marks at 2026 prices"),
        (row::WORKS, "Construction"),
        (row::UPKEEP, "Upkeep"),
        (row::RENEWALS, "Renewal of gates and pumps"),
        (row::AVOIDED, "Flood damage avoided"),
        (row::FACTOR, "Factor"),
        (row::PV, "Present value, net"),
    ];
    for (line, label) in labels {
        sheet.write_string(line, 0, label, Some(if line == row::YEARS { &bold } else { &plain }))?;
    }
    let built = site.works.len() as u32;
    for n in 0..YEARS {
        let column = FIRST_COLUMN + n as u16;
        sheet.write_number(row::YEARS, column, f64::from(START + n), Some(&year))?;
        let works = site.works.get(n as usize).copied().unwrap_or_default();
        let upkeep = if n < built { 0.0 } else { site.upkeep };
        let renewal = if START + n == site.renewal_year { site.renewal } else { 0.0 };
        let avoided = if n < built { 0.0 } else { site.avoided };
        let flows =
            [(row::WORKS, works), (row::UPKEEP, upkeep), (row::RENEWALS, renewal), (row::AVOIDED, avoided)];
        for (line, flow) in flows {
            sheet.write_number(line, column, flow, Some(&money))?;
        }
        sheet.write_blank(row::FACTOR, column, Some(&factor))?;
        sheet.write_blank(row::PV, column, Some(&money))?;
    }
    for (i, (label, number)) in RESULTS.iter().enumerate() {
        let line = row::RESULTS + i as u32;
        sheet.write_string(line, 0, label, Some(&plain))?;
        sheet.write_blank(line, 1, Some(&format(true, number)))?;
    }
    Ok(())
}
