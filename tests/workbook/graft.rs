//! Grafting: hence's sheets, as xlsxwriter makes them, in a workbook made by hand.

use hence_workbook::package::Package;
use xlsxwriter::prelude::*;

/// A package of two sheets: one with formats, a formula, a condition and print titles, one with two charts.
pub fn own_package() -> Package {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("own.xlsx");
    let book = Workbook::new(path.to_str().unwrap()).unwrap();
    let mut factors = book.add_worksheet(Some("Discounting")).unwrap();
    let mut bold = Format::new();
    bold.set_bold().set_bg_color(FormatColor::Custom(0x00DD_EEFF));
    let mut number = Format::new();
    number.set_num_format("0.0000");
    factors.write_string(0, 0, "Year", Some(&bold)).unwrap();
    factors.write_string(0, 1, "Factor <1>", Some(&bold)).unwrap();
    factors.set_column(1, 1, 14.0, Some(&number)).unwrap();
    for year in 0..10_u32 {
        factors.write_number(year + 1, 0, f64::from(2026 + year), None).unwrap();
        let factor = 1.035_f64.powi(-i32::try_from(year).unwrap());
        let formula = format!("=1.035^-(A{}-2026)", year + 2);
        factors.write_formula_num(year + 1, 1, &formula, Some(&number), factor).unwrap();
    }
    factors.write_string(12, 0, " spaced ", None).unwrap();
    factors.freeze_panes(1, 0);
    factors.repeat_rows(0, 0).unwrap();
    factors.print_area(0, 0, 12, 1).unwrap();

    let mut audit = book.add_worksheet(Some("Audit's charts")).unwrap();
    audit.write_string(0, 0, "agrees", None).unwrap();
    for (row, kind) in [(2, ChartType::ScatterStraightWithMarkers), (20, ChartType::Column)] {
        let mut chart = book.add_chart(kind);
        chart.add_series(Some("=Discounting!$A$2:$A$11"), Some("=Discounting!$B$2:$B$11")).unwrap();
        chart.add_series(Some("=Discounting!$A$2:$A$11"), Some("=Discounting!$B$2:$B$11")).unwrap();
        chart.add_title("Discount factor").unwrap();
        audit.insert_chart(row, 1, &chart).unwrap();
    }
    book.define_name("hence_verdict", "='Audit''s charts'!$A$1").unwrap();
    book.close().unwrap();
    Package::open(&path).unwrap()
}

#[test]
fn dump() {
    let p = own_package();
    std::fs::write("/tmp/h6x/own.xlsx", p.bytes()).unwrap();
}
