//! The sample for the worksheet functions is what its generator makes, and computes to the results stored in it.

use super::office::Office;
use super::{Kept, extension, read, sheets};
use crate::root;

#[allow(dead_code)] // its `main` is for the command line
#[path = "../../../samples/functions.rs"]
mod make;

#[test]
fn the_sample_is_what_its_generator_makes() {
    let committed = std::fs::read(root().join("samples/functions.xlsx")).expect("the sample");
    assert!(
        make::book() == committed,
        "run `cargo run -p hence-ffi --example make-functions -- samples/functions.xlsx`"
    );
}

/// Calc computes every formula anew, and gets what the library stored, to the last bit.
#[test]
fn the_sample_computes_to_its_stored_results() {
    let Some(office) = Office::new(None) else { return };
    office.install(extension()).unwrap_or_else(|said| panic!("{said}"));
    let file = office.give("functions.xlsx", &make::book());
    let Some(stored) = read(std::slice::from_ref(&file)).map(|mut sheets| sheets.remove(0)) else { return };
    let computed = sheets(&office.ask(&["cells", &file.to_string_lossy()])).remove(0);
    assert_eq!(stored.keys().collect::<Vec<_>>(), computed.keys().collect::<Vec<_>>());
    let mut formulas = 0;
    for (at, stored) in &stored {
        let computed = &computed[at];
        let same = match stored.kind.as_str() {
            "n" => Kept::Bits.agrees(stored.value.parse().expect("a number"), &computed.value),
            _ => stored.value == computed.value,
        };
        assert!(same && stored.kind == computed.kind && stored.kind != "e", "{at}: {stored:?}, {computed:?}");
        formulas += usize::from(computed.formula.contains("HENCE."));
    }
    assert!(formulas >= 18, "{formulas}");
}
