//! The main job on the sample and on small workbooks, in memory.

use std::path::{Path, PathBuf};

use hence_core::Catalogue;
use hence_workbook::fill::{FillRequest, Filled, fill};
use hence_workbook::package::Package;

fn sample(name: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("../../samples").join(name)
}

fn filled(package: &Package, request: &FillRequest) -> Filled {
    fill(package, request, &Catalogue::builtin()).unwrap_or_else(|error| panic!("{error}"))
}

#[test]
fn the_sample_is_filled() {
    let package = Package::open(&sample("mine-drainage.xlsx")).expect("the sample opens");
    let result = filled(&package, &FillRequest::default());
    std::fs::write("/tmp/out/mine.audited.xlsx", &result.bytes).unwrap();
    for o in &result.report.options {
        println!("{:?} {:?}", o.name, o.totals());
    }
    for p in &result.report.problems {
        println!("{p}");
    }
    println!("{} {} {}", result.report.verdict, result.report.filled, result.report.ticked);
}
