//! Planted mistakes: right appraisals are drawn by lot, one mistake is planted in each, and the check has to find it and
//! call it by its name; right ones have to pass without a word.
//!
//! Numbers are worked out by `planted/` in plain arithmetic. The runs print how many of each kind are found, misnamed and
//! missed. A short form runs by default; with HENCE_DEEP set, ten times as many.

mod book;
mod dice;
mod mistakes;
mod rule;

use hence_core::Catalogue;
use hence_workbook::check::{CheckRequest, check};
use hence_workbook::findings::{Finding, Kind};
use hence_workbook::references::SheetRange;

use book::{Book, Wanted};
use dice::Dice;
use mistakes::{Planted, plant};

/// How many workbooks of each kind.
fn each() -> u64 {
    if std::env::var_os("HENCE_DEEP").is_some() { 200 } else { 20 }
}

fn findings(book: &Book) -> Vec<Finding> {
    let (package, _) = book.small().open();
    let report = check(&package, &CheckRequest::default(), &Catalogue::builtin())
        .unwrap_or_else(|error| panic!("{error}"));
    report.findings
}

fn meets(finding: &Finding, areas: &[SheetRange]) -> bool {
    let place = &finding.place;
    areas.iter().any(|area| {
        place.sheet.as_deref() == Some(&area.sheet)
            && place.range.is_some_and(|range| {
                let (a, b) = (range, area.range);
                a.first.row <= b.last.row
                    && b.first.row <= a.last.row
                    && a.first.col <= b.last.col
                    && b.first.col <= a.last.col
            })
    })
}

/// What became of the planted mistakes of one kind.
#[derive(Default)]
struct Tally {
    planted: usize,
    found: usize,
    misnamed: usize,
    missed: usize,
    /// Findings besides the right one.
    besides: usize,
    /// Right ones that state the effect on the NPV, and those that state it truly.
    stated: usize,
    true_effect: usize,
}

fn run(kind: Kind, each: u64, told: &mut Vec<String>) -> Tally {
    let mut tally = Tally::default();
    for seed in 0..each {
        let Planted { book, what, areas, effect, gross } = plant(kind, seed);
        let found = findings(&book);
        let right = found.iter().find(|f| f.kind == kind && meets(f, &areas));
        tally.planted += 1;
        tally.besides += found.len() - usize::from(right.is_some());
        match right {
            Some(finding) => {
                tally.found += 1;
                if let (Some(said), Some(truth)) = (finding.effect_on_npv, effect) {
                    tally.stated += 1;
                    let close = (said - truth).abs() <= 1e-6 * gross.max(truth.abs());
                    tally.true_effect += usize::from(close);
                    if !close {
                        told.push(format!("{} {seed}: {what}: effect {truth}, said {said}", kind.code()));
                    }
                }
            }
            None => {
                if found.is_empty() {
                    tally.missed += 1
                } else {
                    tally.misnamed += 1
                }
                let said: Vec<String> =
                    found.iter().map(|f| format!("{} {} {}", f.kind.code(), f.place, f.words)).collect();
                told.push(format!("{} {seed}: {what}: {said:?}", kind.code()));
            }
        }
    }
    tally
}

#[test]
fn planted_mistakes_are_found_and_named() {
    let mut told = Vec::new();
    let mut table = format!(
        "{:<26}{:>8}{:>7}{:>10}{:>8}{:>9}{:>16}\n",
        "kind", "planted", "found", "misnamed", "missed", "besides", "effect true"
    );
    let (mut planted, mut found, mut weak) = (0, 0, Vec::new());
    for kind in Kind::ALL {
        let t = run(kind, each(), &mut told);
        table += &format!(
            "{:<26}{:>8}{:>7}{:>10}{:>8}{:>9}{:>10} of {:>2}\n",
            kind.code(),
            t.planted,
            t.found,
            t.misnamed,
            t.missed,
            t.besides,
            t.true_effect,
            t.stated
        );
        planted += t.planted;
        found += t.found;
        if t.found * 100 < t.planted * 85 {
            weak.push(kind.code());
        }
    }
    println!("{table}\n{}", told.join("\n"));
    assert!(found * 100 >= planted * 95, "{found} of {planted} found and rightly named\n{table}");
    assert!(weak.is_empty(), "found too seldom: {weak:?}\n{table}");
}

#[test]
fn right_workbooks_pass_without_a_finding() {
    let count = each() * 10;
    let mut alarms = Vec::new();
    for seed in 0..count {
        let book = Book::draw(&mut Dice::new(1_000_000 + seed), Wanted::Any);
        let found = findings(&book);
        alarms.extend(found.iter().map(|f| format!("{seed}: {} {} {}", f.kind.code(), f.place, f.words)));
    }
    println!("{count} right workbooks, {} false alarms", alarms.len());
    assert!(alarms.is_empty(), "{}", alarms.join("\n"));
}
