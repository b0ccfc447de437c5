//! Reads the tables beside this file and compares values with them.

use hence_core::{Band, Compounding, Curve, Edge, Spec, Where};

/// A table of comma-separated values; lines that begin with # name the source.
pub struct Table {
    name: &'static str,
    columns: Vec<&'static str>,
    rows: Vec<Vec<&'static str>>,
}

/// A row, its cells found by the name of their column.
#[derive(Clone, Copy)]
pub struct Row<'a> {
    table: &'a Table,
    cells: &'a [&'static str],
    number: usize,
}

impl Table {
    /// `text` is the file.
    pub fn new(name: &'static str, text: &'static str) -> Table {
        assert!(text.starts_with("# "), "{name} names its source first");
        let mut lines = text.lines().filter(|line| !line.starts_with('#'));
        let columns: Vec<&str> = lines.next().expect("a heading").split(',').collect();
        let rows: Vec<Vec<&str>> = lines.map(cells).collect();
        assert!(rows.iter().all(|row| row.len() == columns.len()), "{name} is not rectangular");
        Table { name, columns, rows }
    }

    pub fn rows(&self) -> impl Iterator<Item = Row<'_>> {
        self.rows.iter().enumerate().map(|(number, cells)| Row { table: self, cells, number })
    }

    /// Prints how much was checked, and fails where that is not what the file holds.
    pub fn checked(&self, comparisons: usize, expected: usize) {
        println!("{}: {} rows, {comparisons} comparisons", self.name, self.rows.len());
        assert_eq!(comparisons, expected, "{}: comparisons made", self.name);
    }
}

/// Splits a line at its commas, those within quotation marks excepted.
fn cells(line: &'static str) -> Vec<&'static str> {
    let mut quoted = false;
    line.split(|c| {
        quoted ^= c == '"';
        c == ',' && !quoted
    })
    .map(|cell| cell.trim_matches('"'))
    .collect()
}

impl Row<'_> {
    pub fn text(&self, column: &str) -> &'static str {
        let place = self.table.columns.iter().position(|name| *name == column);
        self.cells[place.unwrap_or_else(|| panic!("{} has no column {column}", self.table.name))]
    }

    /// A number; none where the cell is empty.
    pub fn optional(&self, column: &str) -> Option<f64> {
        let text = self.text(column);
        (!text.is_empty())
            .then(|| text.parse().unwrap_or_else(|_| panic!("{} is no number", self.place(column))))
    }

    pub fn number(&self, column: &str) -> f64 {
        self.optional(column).unwrap_or_else(|| panic!("{} is empty", self.place(column)))
    }

    fn place(&self, column: &str) -> String {
        format!("{}, row {}, {column}", self.table.name, self.number + 1)
    }

    /// Compares with a column, absolutely.
    #[track_caller]
    pub fn agrees(&self, found: f64, column: &str, tolerance: f64) {
        let expected = self.number(column);
        assert!(
            (found - expected).abs() <= tolerance,
            "{}: found {found}, expected {expected} within {tolerance}",
            self.place(column)
        );
    }
}

pub fn made(spec: &Spec) -> Curve {
    spec.curve(&Where::default()).expect("a valid curve")
}

pub fn flat(rate: f64) -> Spec {
    Spec::Flat { rate, compounding: Compounding::Yearly }
}

pub fn continuous(rate: f64) -> Spec {
    Spec::Flat { rate, compounding: Compounding::Continuous }
}

/// The published bands of a schedule: the last year a rate applies to is the offset that closes its band.
pub fn bands(schedule: &str) -> Vec<Band> {
    let table = Table::new("schedule_bands.csv", include_str!("schedule_bands.csv"));
    let of = |row: &Row| row.text("schedule_id") == schedule;
    let bands: Vec<Band> = table
        .rows()
        .filter(of)
        .map(|row| Band { value: row.number("rate"), to: row.optional("last_year").map(Edge::Offset) })
        .collect();
    let firsts: Vec<f64> = table.rows().filter(of).map(|row| row.number("first_year")).collect();
    for (before, first) in bands.iter().zip(&firsts[1..]) {
        assert_eq!(before.to, Some(Edge::Offset(first - 1.0)), "{schedule}: bands meet");
    }
    bands
}
