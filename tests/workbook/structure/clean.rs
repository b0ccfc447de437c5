//! Workbooks without mistakes have no finding: random ones filled in both ways, the samples, and real ones.

use std::path::{Path, PathBuf};

use hence_core::Catalogue;
use hence_workbook::diagnose::Seen;
use hence_workbook::diagnose::structure::findings;
use hence_workbook::fill::{FillRequest, fill};
use hence_workbook::findings::Kind;
use hence_workbook::model::Workbook;
use hence_workbook::package::Package;
use hence_workbook::resolve::Options;

use crate::corpus::prepared;
use crate::numbers::random;

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
