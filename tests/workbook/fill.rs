//! The main job on the sample, in memory.

use std::path::{Path, PathBuf};

use hence_core::Catalogue;
use hence_workbook::fill::{FillRequest, Filled, fill};
use hence_workbook::package::Package;
use hence_workbook::report::Status;
use hence_workbook::sheets::VERDICT_AGREES;

fn sample(name: &str) -> Package {
    let path: PathBuf = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../samples").join(name);
    Package::open(&path).expect("the sample opens")
}

fn filled(package: &Package, request: &FillRequest) -> Filled {
    fill(package, request, &Catalogue::builtin()).unwrap_or_else(|error| panic!("{error}"))
}

/// The same workbook saved by another program says the same.
#[test]
fn the_sample_and_its_twin_from_libreoffice_agree() {
    let ours = filled(&sample("mine-drainage.xlsx"), &FillRequest::default());
    let twin = filled(&sample("mine-drainage-libreoffice.xlsx"), &FillRequest::default());
    for report in [&ours.report, &twin.report] {
        assert_eq!(report.status(), Status::Done);
        assert_eq!(report.verdict, VERDICT_AGREES);
        // Four sheets with 200 factors, 200 present values and 7 results each.
        assert_eq!((report.filled, report.ticked), (4 * 407, 0));
    }
    assert_eq!(ours.report.options.len(), 4);
    for (a, b) in ours.report.options.iter().zip(&twin.report.options) {
        assert_eq!(a.name, b.name);
        let (a, b) = (a.totals(), b.totals());
        for (x, y) in [(a.npv, b.npv), (a.pv_costs, b.pv_costs), (a.pv_benefits, b.pv_benefits)] {
            // The other program keeps 15 digits of each flow.
            assert!((x - y).abs() <= 1e-9 * x.abs().max(1.0), "{x} {y}");
        }
    }
}

#[test]
fn values_and_formulas_give_the_same_report() {
    let package = sample("mine-drainage.xlsx");
    let formulas = filled(&package, &FillRequest::default());
    let values = filled(&package, &FillRequest { formulas: false, ..FillRequest::default() });
    assert_eq!(formulas.report, values.report);
    assert_ne!(formulas.bytes, values.bytes);
}

/// Same input, basis and options: same bytes.
#[test]
fn a_fill_can_be_repeated() {
    let package = sample("mine-drainage.xlsx");
    let request =
        FillRequest { basis: Some("4%".into()), by: Some("A. Reader".into()), ..FillRequest::default() };
    assert!(filled(&package, &request).bytes == filled(&package, &request).bytes);
}
