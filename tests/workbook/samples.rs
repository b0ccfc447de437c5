//! The committed samples are what their generator makes.

use std::path::Path;

use hence_core::Catalogue;
use hence_workbook::fill::{FillRequest, fill};
use hence_workbook::package::Package;
use hence_workbook::planfile::PlanFile;
use hence_workbook::sheets::VERDICT_AGREES;

#[allow(dead_code)] // its `main` is for the command line
#[path = "../../samples/make.rs"]
mod make;
#[allow(dead_code)] // likewise
#[path = "../../samples/two-sites.rs"]
mod two_sites;

/// The writer stamps this part with the time.
const STAMPED: &str = "docProps/core.xml";

/// What the generator makes, beside what is committed.
fn compare(name: &str, example: &str, write: impl Fn(&str)) {
    let committed = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../samples").join(name);
    let committed = Package::open(&committed).expect("the sample opens");
    let folder = tempfile::tempdir().expect("a temporary folder");
    let path = folder.path().join(name);
    write(path.to_str().expect("a path in UTF-8"));
    let made = Package::open(&path).expect("it opens");
    assert!(made.parts().eq(committed.parts()), "the same parts in the same order");
    for part in made.parts().filter(|part| *part != STAMPED) {
        assert!(
            made.part(part).unwrap() == committed.part(part).unwrap(),
            "{part} differs: run `cargo run -p hence-workbook --example {example}`"
        );
    }
}

/// (After a change it has to be saved again by LibreOffice, too.)
#[test]
fn the_sample_is_what_its_generator_makes() {
    compare("mine-drainage.xlsx", "make-samples", |path| make::write(path).expect("the sample is written"));
}

#[test]
fn the_sample_for_plans_is_what_its_generator_makes() {
    compare("two-sites.xlsx", "make-two-sites", |path| {
        two_sites::write(path).expect("the sample is written")
    });
}

/// Both sites worked out by hand from the figures on their sheets: construction raised by a quarter, 3% for 30 years and
/// 2.5% after.
#[test]
fn the_sample_plan_fills_both_sites() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../samples");
    let book = Package::open(&folder.join("two-sites.xlsx")).expect("the sample opens");
    let plan = PlanFile::open(&folder.join("two-sites.toml")).expect("a plan");
    let request = FillRequest { plan: Some(plan), ..FillRequest::default() };
    let filled = fill(&book, &request, &Catalogue::builtin()).unwrap_or_else(|error| panic!("{error}"));
    assert_eq!(filled.report.verdict, VERDICT_AGREES);
    let d = |t: i32| 1.03f64.powi(-t.min(30)) * 1.025f64.powi(-(t - 30).max(0));
    let pv = |flow: &dyn Fn(i32) -> f64| (0..40).map(|t| flow(t) * d(t)).sum::<f64>();
    let sites: [(&[f64], f64, (i32, f64), f64); 2] =
        [(&[1850.0, 2400.0, 600.0], 45.0, (25, 900.0), 310.0), (&[700.0, 1100.0], 20.0, (20, 250.0), 96.0)];
    for ((works, upkeep, renewal, avoided), option) in sites.into_iter().zip(&filled.report.options) {
        let after = |t: i32, flow: f64| if (t as usize) < works.len() { 0.0 } else { flow };
        let due = |t: i32| if t == renewal.0 { renewal.1 } else { 0.0 };
        let costs =
            pv(&|t| 1.25 * works.get(t as usize).copied().unwrap_or_default() + after(t, upkeep) + due(t));
        let benefits = pv(&|t| after(t, avoided));
        let name = &option.name;
        assert!(
            (option.absolute.pv_costs - costs).abs() < 1e-6,
            "{name}: {} {costs}",
            option.absolute.pv_costs
        );
        assert!((option.absolute.pv_benefits - benefits).abs() < 1e-6, "{name}");
        assert_eq!(option.appraisal.as_ref(), Some(name));
    }
    assert_eq!(filled.report.appraisals.len(), 2);
}
