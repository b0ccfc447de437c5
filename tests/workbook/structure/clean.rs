//! Workbooks without mistakes have no finding: random ones filled in both ways, the samples, and real ones.

use std::path::{Path, PathBuf};

use hence_core::Catalogue;
use hence_workbook::check::{CheckRequest, check};
use hence_workbook::diagnose::Seen;
use hence_workbook::diagnose::structure::findings;
use hence_workbook::fill::{FillRequest, fill};
use hence_workbook::findings::Kind;
use hence_workbook::model::Workbook;
use hence_workbook::package::Package;
use hence_workbook::resolve::Options;

use crate::corpus::prepared;
use crate::numbers::random;
use crate::small::Small;

/// What a package is said to hold that is wrong.
fn said(package: &Package, roles: &[(String, String)]) -> Vec<String> {
    let book = Workbook::read(package).expect("a workbook");
    let catalogue = Catalogue::builtin();
    let seen = Seen::look(package, &book, &Options { roles, ..Options::default() }, &catalogue)
        .unwrap_or_else(|error| panic!("{error}"));
    let mut found = findings(&seen).expect("cells are read");
    // Some of the random workbooks leave a year out on purpose, of which hence warns.
    let gap = seen.problems.iter().any(|problem| problem.code == "years-gap");
    found.retain(|finding| !(gap && finding.kind == Kind::YearsBroken));
    found.iter().map(|f| format!("{} {}: {}; {}", f.kind.code(), f.place, f.found, f.words)).collect()
}

#[test]
fn random_workbooks_filled_with_formulas_or_numbers() {
    let mut wrong = Vec::new();
    for seed in 0..12 {
        let (package, request) = random(seed);
        for formulas in [true, false] {
            let request = FillRequest { formulas, ..request.clone() };
            let Ok(filled) = fill(&package, &request, &Catalogue::builtin()) else { continue };
            let output = Package::from_bytes("book.xlsx", filled.bytes).expect("a package");
            wrong.extend(said(&output, &request.roles).into_iter().map(|found| format!("{seed}: {found}")));
        }
    }
    assert!(wrong.is_empty(), "{wrong:#?}");
}

#[test]
fn samples() {
    for name in ["mine-drainage.xlsx", "mine-drainage-libreoffice.xlsx"] {
        let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../samples").join(name);
        let package = Package::open(&path).expect("the sample opens");
        assert_eq!(said(&package, &[]), Vec::<String>::new(), "{name}");
        let filled = fill(&package, &FillRequest::default(), &Catalogue::builtin()).expect("it is filled");
        let output = Package::from_bytes(name, filled.bytes).expect("a package");
        assert_eq!(said(&output, &[]), Vec::<String>::new(), "{name}, filled");
    }
}

#[test]
fn real_workbooks() {
    let Some(corpus) = std::env::var_os("HENCE_CORPUS") else {
        println!("HENCE_CORPUS is not set: no real workbook was tried");
        return;
    };
    let mut files: Vec<PathBuf> =
        std::fs::read_dir(corpus).expect("the folder").map(|e| e.unwrap().path()).collect();
    files.sort();
    let (mut tried, mut wrong) = (0, Vec::new());
    for file in files {
        for (package, roles) in prepared(&file) {
            let request = FillRequest { roles: roles.clone(), ..FillRequest::default() };
            let Ok(filled) = fill(&package, &request, &Catalogue::builtin()) else { continue };
            let output = Package::from_bytes(package.file_name(), filled.bytes).expect("a package");
            tried += 1;
            wrong.extend(
                said(&output, &roles).into_iter().map(|found| format!("{}: {found}", file.display())),
            );
        }
    }
    assert!(tried > 60, "{tried} workbooks were tried");
    assert!(wrong.is_empty(), "{wrong:#?}");
}

#[test]
fn capital_before_running_costs_and_clearing_away_after_them_are_no_units() {
    // 900 at first, then 1 a year, and 900 again at the end: numbers of one unit.
    let years: Vec<String> = (0..30).map(|i| (2026 + i).to_string()).collect();
    let row = |at: &dyn Fn(usize) -> f64| (0..30).map(|i| at(i).to_string()).collect::<Vec<_>>().join(" | ");
    let costs: [&dyn Fn(usize) -> f64; 5] = [
        &|i| if i == 0 { 900.0 } else { 1.0 },
        &|i| if i == 29 { 900.0 } else { 1.0 },
        &|i| if i == 0 { 1_000_000.0 } else { 1000.0 },
        &|i| if i == 0 { 900_000.0 } else { 1000.0 },
        &|i| if i == 0 { 1500.0 } else { 1.4 },
    ];
    for cost in costs {
        let npv: f64 = (0..30).map(|i| (40.0 - cost(i)) * 1.035_f64.powi(-(i as i32))).sum();
        let cells = format!(
            "B1: 2026\nB2: '3.5%\nB4: {}\nB5: {}\nB6: {}\nB8: {npv}",
            years.join(" | "),
            row(cost),
            row(&|_| 40.0)
        );
        let small = Small::default().sheet("Plan", &cells).names(
            "hence_base B1, hence_basis B2, hence_years B4:AE4, hence_cost_works B5:AE5, hence_benefit_water B6:AE6, \
             hence_npv B8",
        );
        let report =
            check(&small.open().0, &CheckRequest::default(), &Catalogue::builtin()).expect("checked");
        assert!(report.findings.is_empty(), "{:?}", report.findings);
    }
}
