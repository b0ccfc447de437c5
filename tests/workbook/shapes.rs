//! Workbooks of every shape, filled twice, checked, and recalculated by a real LibreOffice.
//!
//! Names and figures are invented. What each comes to is worked out here in plain arithmetic.

use std::collections::BTreeMap;
use std::path::Path;
use std::process::Command;
use std::sync::OnceLock;

use hence_core::Catalogue;
use hence_workbook::fill::{FillRequest, fill};
use hence_workbook::package::Package;
use hence_workbook::patch::CellWrite;
use hence_workbook::references::{Cell, SheetRange};
use hence_workbook::sheets::VERDICT_AGREES;

use crate::libreoffice::cells::{Cells, Stored, cells, changed, verdict};
use crate::libreoffice::office::{Recalculate, saved, soffice};
use crate::libreoffice::{compare, found};
use crate::own::only_the_input_differs;
use crate::small::{Small, lines};
use crate::tools;

/// A workbook, and what cells of it come to when it is filled: `Plan!B9`, number.
struct Shape {
    name: &'static str,
    bytes: Vec<u8>,
    expected: Vec<(String, f64)>,
    /// Formulas over filled cells, which have no result until LibreOffice computes it.
    after: Vec<(String, f64)>,
}

/// Flat 3.5%, flows and base at the ends of their years.
fn factor(years: f64) -> f64 {
    1.035_f64.powf(-years)
}

fn cell_of(cells: &Cells, at: &str) -> Stored {
    let at: SheetRange = at.parse().expect("a cell");
    let place: (String, Cell) = (at.sheet, at.range.first);
    cells.get(&place).unwrap_or_else(|| panic!("{}!{} is not there", place.0, place.1)).value.clone()
}

/// Fills a shape and holds it to what it should come to: by the formulas' stored results, by a second fill, by check.
fn filled(shape: &Shape) -> Vec<u8> {
    let name = shape.name;
    let catalogue = Catalogue::builtin();
    let package = Package::from_bytes("book.xlsx", shape.bytes.clone()).expect("a package");
    let request = FillRequest::default();
    let first = fill(&package, &request, &catalogue)
        .unwrap_or_else(|error| panic!("{name}: {}", lines(error.problems()).join("\n")));
    assert_eq!(first.report.verdict, VERDICT_AGREES, "{name}");
    let stored = cells(&first.bytes);
    for (at, x) in &shape.expected {
        let Stored::Number(held) = cell_of(&stored, at) else { panic!("{name}: {at} holds no number") };
        assert!((held - x).abs() <= 1e-9 * x.abs(), "{name}: {at} holds {held}, expected {x}");
    }
    for (at, _) in &shape.after {
        assert_eq!(cell_of(&stored, at), Stored::Nothing, "{name}: {at} rests on filled cells");
    }
    assert_eq!(found(&first.bytes), [""; 0], "{name}");
    let again = Package::from_bytes("book.xlsx", first.bytes.clone()).expect("a package");
    let second = fill(&again, &request, &catalogue).unwrap_or_else(|error| panic!("{name}: {error}"));
    if package.is_template() {
        // The first output remarks that its input is a template, the second does not.
        assert_eq!(compare(&stored, &cells(&second.bytes)).1, Vec::<String>::new(), "{name}");
    } else {
        only_the_input_differs(name, &first.bytes, &second.bytes);
    }
    first.bytes
}

/// Every shape and what it is filled to, once for all tests.
fn all() -> &'static [(Shape, Vec<u8>)] {
    static ALL: OnceLock<Vec<(Shape, Vec<u8>)>> = OnceLock::new();
    let made = |shape: Shape| {
        let bytes = filled(&shape);
        (shape, bytes)
    };
    ALL.get_or_init(|| shapes().into_iter().map(made).collect())
}

#[test]
fn every_shape_comes_to_what_it_should_and_again_in_libreoffice() {
    let books: Vec<(String, Vec<u8>)> =
        all().iter().map(|(shape, bytes)| (format!("{}.xlsx", shape.name), bytes.clone())).collect();
    let Some(soffice) = soffice() else { return };
    let opened: BTreeMap<String, Vec<u8>> = saved(&soffice, &books, Recalculate::All);
    for ((shape, _), (name, bytes)) in all().iter().zip(&books) {
        let after = &opened[name];
        let (count, differ) = compare(&cells(bytes), &cells(after));
        assert!(count > 20, "{name}: {count} results");
        assert_eq!(differ, Vec::<String>::new(), "{name}");
        assert_eq!(verdict(after), VERDICT_AGREES, "{name}");
        assert_eq!(found(after), [""; 0], "{name} as LibreOffice saves it");
        for (at, x) in shape.expected.iter().chain(&shape.after) {
            let Stored::Number(held) = cell_of(&cells(after), at) else { panic!("{name}: {at}") };
            assert!((held - x).abs() <= 1e-9 * x.abs(), "{name}: {at} became {held}, expected {x}");
        }
    }
}

#[test]
fn the_verdict_turns_when_a_cell_of_a_shape_is_changed() {
    let Some(soffice) = soffice() else { return };
    let number = CellWrite::Number;
    let turns = [
        // A flow, a year and a factor beyond the gap; what stands in the gap counts for nothing.
        ("unions", "E6", number(1e6), true),
        ("unions", "F4", number(2030.0), true),
        ("unions", "E7", number(0.5), true),
        ("unions", "D5", number(4711.0), false),
        ("pieces-that-differ", "G6", number(1e6), true),
        ("unions-down", "B7", number(1.0), true),
        // A cell of a table, a date from 1904.
        ("tables", "C9", number(1e6), true),
        ("tables", "D9", number(0.5), true),
        // 1 April 2026 is day 44,651 from 1904.
        ("from-1904", "B1", number(44_651.0), false),
        ("from-1904", "B1", number(46_113.0), true),
        ("from-1904", "E4", number(46_000.0), true),
        // Years per column, of one and of all; a label.
        ("months", "E1", number(0.1), true),
        ("months", "C3", number(7.0), true),
        ("mixed", "G3", number(4.0), true),
        ("mixed", "H4", number(2037.0), true),
        ("mixed", "B1", number(2024.0), true),
        ("quarters", "C2", number(0.5), true),
        ("halves", "B5", number(2.0), true),
        ("halves", "A6", CellWrite::Text("2031/32".into()), true),
    ];
    let mut edited = Vec::new();
    for (i, (name, cell, write, _)) in turns.iter().enumerate() {
        let Some((_, book)) = all().iter().find(|(shape, _)| shape.name == *name) else { continue };
        let book = changed(book, "Plan", &[(*cell, write.clone())]);
        edited.push((format!("turn{i:02}.xlsx"), book));
    }
    let back = saved(&soffice, &edited, Recalculate::All);
    for (i, (name, cell, write, turns)) in turns.iter().enumerate() {
        let Some(after) = back.get(&format!("turn{i:02}.xlsx")) else { continue };
        let verdict = verdict(after);
        assert_eq!(verdict.starts_with("differs: "), *turns, "{name} {cell} {write:?}: {verdict}");
    }
}

fn shapes() -> Vec<Shape> {
    let mut all = vec![unions(), pieces_that_differ(), unions_down()];
    all.extend(of_openpyxl());
    all
}

/// Shapes that openpyxl saves: a table, and days counted from 1904.
fn of_openpyxl() -> Vec<Shape> {
    let Some(python) = tools::python("openpyxl") else { return Vec::new() };
    let folder = tempfile::tempdir().expect("a folder");
    let script = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../tests/workbook/make_shapes.py");
    let output = Command::new(python).arg(script).arg(folder.path()).output().expect("Python runs");
    assert!(output.status.success(), "{}", String::from_utf8_lossy(&output.stderr));
    let bytes = |name: &str| std::fs::read(folder.path().join(name)).expect("a workbook");
    let works = |i: i32| f64::from(100 - 10 * i) * factor(f64::from(i));
    let gain = |i: i32| f64::from(60 + 5 * i) * factor(f64::from(i));
    let sum = |of: &dyn Fn(i32) -> f64| (0..6).map(of).sum::<f64>();
    // From 1 April 2026: 183 of 365 days, one year, two years.
    let half = factor(183.0 / 365.0);
    let table = Shape {
        name: "tables",
        bytes: bytes("tables.xlsx"),
        expected: vec![at("B3", sum(&gain) - sum(&works)), at("D11", factor(5.0)), at("E8", works(2))],
        after: vec![
            at("F8", works(2) / 10.0),
            at("E12", sum(&works)),
            at("H2", sum(&works)),
            at("I2", factor(5.0)),
        ],
    };
    let dated = Shape {
        name: "from-1904",
        bytes: bytes("from-1904.xlsx"),
        expected: vec![
            at("C6", half),
            at("D6", factor(1.0)),
            at("B7", 100.0 + 50.0 * half + 25.0 * factor(1.0) + 5.0 * factor(2.0)),
        ],
        after: Vec::new(),
    };
    let mut all = vec![table, dated];
    // Columns that are not a year each, or are dates, and a template, with what Python makes of them.
    let said = String::from_utf8(output.stdout).expect("text");
    for name in ["months", "month_ends", "mixed", "quarters", "halves", "template"] {
        let own = said.lines().filter_map(|line| line.strip_prefix(name)?.strip_prefix(' ')?.split_once(' '));
        let expected: Vec<(String, f64)> =
            own.map(|(at, x)| (at.to_owned(), x.parse().expect("a number"))).collect();
        assert!(expected.len() > 3, "{name}: {said}");
        all.push(Shape { name, bytes: bytes(&format!("{name}.xlsx")), expected, after: Vec::new() });
    }
    all
}

fn at(cell: &str, x: f64) -> (String, f64) {
    (format!("Plan!{cell}"), x)
}

/// Years in two pieces along a row, a subtotal between them; factors, present values by year, totals.
fn unions() -> Shape {
    let small = Small::default()
        .sheet(
            "Plan",
            "A1: 'Base | 2026
             A2: 'Basis | '3.5%
             A4: 'Year | 2026 | 2027 | 'Subtotal | 2028 | 2029
             A5: 'Works | 100 | 50 | =SUM(B5:C5)>150 | 25 | 5
             A6: 'Gain | 0 | 60 | =SUM(B6:C6)>60 | 70 | 80
             A7: 'Factor | | | 'n/a
             A8: 'PV of works | | | =SUM(B8:C8)>
             A10: 'Costs
             A11: 'Gain
             A12: 'NPV",
        )
        .names("hence_base B1, hence_basis B2, hence_pv_costs B10, hence_pv_gain B11, hence_npv B12")
        .raw_name("hence_years", "Plan!$B$4:$C$4,Plan!$E$4:$F$4")
        .raw_name("hence_cost_works", "Plan!$B$5:$C$5,Plan!$E$5:$F$5")
        .raw_name("hence_benefit_gain", "(Plan!$E$6:$F$6,Plan!$B$6:$C$6)")
        .raw_name("hence_factor", "Plan!$B$7:$C$7,Plan!$E$7:$F$7")
        .raw_name("hence_pv_works", "Plan!$B$8:$C$8,Plan!$E$8:$F$8");
    let costs = 100.0 + 50.0 * factor(1.0) + 25.0 * factor(2.0) + 5.0 * factor(3.0);
    let gain = 60.0 * factor(1.0) + 70.0 * factor(2.0) + 80.0 * factor(3.0);
    Shape {
        name: "unions",
        bytes: small.bytes(),
        expected: vec![
            at("C7", factor(1.0)),
            at("E7", factor(2.0)),
            at("F7", factor(3.0)),
            at("F8", 5.0 * factor(3.0)),
            at("B10", costs),
            at("B11", gain),
            at("B12", gain - costs),
        ],
        after: vec![at("D8", 100.0 + 50.0 * factor(1.0))],
    }
}

/// Flows unbroken on one sheet, years in pieces on another, no factors of the analyst's, a block, growing prices.
fn pieces_that_differ() -> Shape {
    let small = Small::default()
        .sheet(
            "Plan",
            "A1: 'Base | 2026
             A2: 'Basis | '3.5%
             A4: 'Year | 2026 | 'Part | 2027 | 2028 | 'Part | 2029
             A5: 'Upkeep | 1 | 'x | 2 | 3 | 'y | 4
             A6: 'Power | 10 | 'x | 20 | 30 | 'y | 40
             A8: 'PV | | 'a | | | 'b
             A9: 'NPV
             A10: 'Access
             A11: 'Growth | 0.02",
        )
        .names("hence_base B1, hence_basis B2, hence_costs A5:G6, hence_npv B9, hence_pv_access B10")
        .names("hence_growth_access B11")
        .raw_name("hence_years", "Plan!$B$4,Plan!$D$4:$E$4,Plan!$G$4")
        .raw_name("hence_pv", "Plan!$B$8,Plan!$D$8:$E$8,Plan!$G$8")
        .sheet("Flows", "A1: 'Access | 7 | 8 | 9 | 10")
        .names("hence_benefit_access B1:E1");
    let grown = |i: usize| 1.02_f64.powi(i as i32) * [7.0, 8.0, 9.0, 10.0][i];
    let cost = |i: usize| [11.0, 22.0, 33.0, 44.0][i];
    let net = |i: usize| (grown(i) - cost(i)) * factor(i as f64);
    Shape {
        name: "pieces-that-differ",
        bytes: small.bytes(),
        expected: vec![
            at("D8", net(1)),
            at("G8", net(3)),
            at("B9", (0..4).map(net).sum()),
            at("B10", (0..4).map(|i| grown(i) * factor(i as f64)).sum()),
        ],
        after: Vec::new(),
    }
}

/// The same down a column.
fn unions_down() -> Shape {
    let small = Small::default()
        .sheet(
            "Plan",
            "A1: 'Base | 2026
             A2: 'Basis | '3.5%
             A4: 2026 | 100
             A5: 2027 | 50
             A6: 'Sum | =SUM(B4:B5)>150
             A7: 2028 | 25
             E1: 'Works",
        )
        .names("hence_base B1, hence_basis B2, hence_pv_works F1")
        .raw_name("hence_years", "Plan!$A$4:$A$5,Plan!$A$7")
        .raw_name("hence_cost_works", "Plan!$B$4:$B$5,Plan!$B$7")
        .raw_name("hence_factor", "Plan!$D$4:$D$5,Plan!$D$7");
    Shape {
        name: "unions-down",
        bytes: small.bytes(),
        expected: vec![at("D7", factor(2.0)), at("F1", 100.0 + 50.0 * factor(1.0) + 25.0 * factor(2.0))],
        after: Vec::new(),
    }
}
