//! The committed samples are what their generator makes.

use std::path::Path;

use hence_workbook::package::Package;

#[allow(dead_code)] // its `main` is for the command line
#[path = "../../samples/make.rs"]
mod make;

/// The writer stamps this part with the time.
const STAMPED: &str = "docProps/core.xml";

#[test]
fn the_sample_is_what_its_generator_makes() {
    let committed = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../samples/mine-drainage.xlsx");
    let committed = Package::open(&committed).expect("the sample opens");
    let folder = tempfile::tempdir().expect("a temporary folder");
    let path = folder.path().join("mine-drainage.xlsx");
    make::write(path.to_str().expect("a path in UTF-8")).expect("the sample is written");
    let made = Package::open(&path).expect("it opens");
    assert!(made.parts().eq(committed.parts()), "the same parts in the same order");
    for part in made.parts().filter(|part| *part != STAMPED) {
        assert!(
            made.part(part).unwrap() == committed.part(part).unwrap(),
            "{part} differs: run `cargo run -p hence-workbook --example make-samples`, and save the sample again by \
             LibreOffice"
        );
    }
}
