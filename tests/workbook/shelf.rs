//! Records: what an output says of itself, and that a change of anything in it is noticed.

use std::path::Path;

use hence_core::Catalogue;
use hence_workbook::fill::{FillRequest, Filled, fill};
use hence_workbook::package::{Changes, Package};
use hence_workbook::shelf::{Record, record_of, sha256};

fn sample() -> Package {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../samples/mine-drainage.xlsx");
    Package::open(&path).expect("the sample")
}

fn filled(package: &Package) -> Filled {
    let request = FillRequest { basis: Some("3%".into()), ..FillRequest::default() };
    fill(package, &request, &Catalogue::builtin()).unwrap_or_else(|error| panic!("{error}"))
}

fn read(bytes: &[u8]) -> Option<Record> {
    record_of(&Package::from_bytes("mine-drainage.audited.xlsx", bytes.to_vec()).ok()?)
}

#[test]
fn an_output_says_what_it_was_made_from() {
    let input = sample();
    let output = filled(&input);
    let record = read(&output.bytes).expect("a record");
    assert_eq!(record.input, "mine-drainage.xlsx");
    assert_eq!(record.input_sha256, Some(sha256(input.bytes())));
    assert_eq!(record.report, output.report, "every number comes back as it was");
    assert_eq!(record.report.options.len(), 4);
    for option in &record.report.options {
        let declared = "3.5% to 30, 3% to 75, 2.5% to 125, 2% to 200, 1.5% to 300, 1% after";
        assert_eq!((option.basis.as_str(), option.declared.as_deref()), ("3%", Some(declared)));
    }
    assert_eq!((record.output, record.output_sha256), (None, None), "where it lies is not in it");
}

#[test]
fn whatever_is_changed_in_an_output_breaks_its_seal() {
    let output = filled(&sample()).bytes;
    let made = Package::from_bytes("made.xlsx", output.clone()).unwrap();
    let parts: Vec<&str> = made.parts().collect();
    assert!(parts.len() > 15 && parts.last() == Some(&"hence/record.json"), "{parts:?}");
    for part in &parts {
        let mut bytes = made.part(part).unwrap().unwrap();
        bytes.push(b' ');
        let replace = [((*part).to_owned(), bytes)].into();
        let changed = made.write(&Changes { replace, ..Changes::default() }).unwrap();
        assert_eq!(read(&changed), None, "{part}");
    }
    let added = Changes { add: vec![("xl/more.xml".into(), b"<a/>".to_vec())], ..Changes::default() };
    assert_eq!(read(&made.write(&added).unwrap()), None, "a part more");
    let removed = Changes { remove: ["docProps/app.xml".into()].into(), ..Changes::default() };
    assert_eq!(read(&made.write(&removed).unwrap()), None, "a part less");
    assert_eq!(read(&[&output[..], &[0]].concat()), None, "a byte more");
    assert_eq!(read(&output[..output.len() - 1]), None, "a byte less");
    for at in (0..output.len()).step_by(output.len() / 300) {
        let mut flipped = output.clone();
        flipped[at] ^= 1;
        assert_eq!(read(&flipped), None, "byte {at}");
    }
    assert!(read(&output).is_some());
}

#[test]
fn a_second_fill_has_a_record_of_its_own() {
    let first = Package::from_bytes("plan.audited.xlsx", filled(&sample()).bytes).unwrap();
    let second = filled(&first);
    let record = read(&second.bytes).expect("a record");
    assert_eq!(record.input_sha256, Some(sha256(first.bytes())));
    assert_eq!(record_of(&sample()), None);
}
