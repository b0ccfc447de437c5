//! `hence names`: roles that are there, and suggestions for a workbook that has none.

use crate::books::{Book, number, plan, without_names};
use crate::{code, run, run_with, sample, stderr, stdout};
use hence_workbook::package::Package;

fn json(output: &std::process::Output) -> serde_json::Value {
    serde_json::from_str(&stdout(output)).expect("one JSON document")
}

/// The sample without a single name.
fn bare() -> Book {
    Book::of("bare.xlsx", without_names(&Package::open(&sample("mine-drainage.xlsx")).unwrap()))
}

#[test]
fn the_samples_roles_are_listed() {
    let path = sample("mine-drainage.xlsx");
    let output = run(&["names", path.to_str().unwrap()]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    let text = stdout(&output);
    for part in ["hence_cost_works", "'Settling ponds'!D6:GU6", "Lime plant", "hence_baseline"] {
        assert!(text.contains(part), "{part} is missing from:\n{text}");
    }
    assert!(!text.contains("missing:"), "{text}");
    let document = json(&run(&["names", path.to_str().unwrap(), "--json"]));
    let book = &document["books"][0];
    assert!(
        book["found"].as_array().unwrap().iter().all(|f| f["place"].is_string() && f["role"].is_string())
    );
    assert!(book["guesses"].as_array().unwrap().is_empty() && book["missing"].as_array().unwrap().is_empty());
}

#[test]
fn what_is_missing_is_listed() {
    let book = bare();
    let output = run(&["names", book.arg()]);
    assert_eq!(code(&output), 0);
    let text = stdout(&output);
    assert_eq!(text.matches("missing: ").count(), 5, "{text}");
    assert!(text.contains("hence_years"), "{text}");
}

/// The sample's names are taken away, suggested again, and the copy is filled. Nobody says which option is the baseline
/// or that works are uplifted, so the two agree on the present values of the baseline as it stands, whose only costs are not works.
#[test]
fn suggested_names_can_be_filled() {
    let book = bare();
    let copy = book.beside_arg("named.xlsx");
    let output = run(&["names", book.arg(), "--suggest", "--out", &copy]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    let text = stdout(&output);
    assert!(text.contains("guess: hence_years__lime_plant = 'Lime plant'!D4:GU4: 200 cells"), "{text}");
    assert!(!text.contains("missing:"), "{text}");
    book.is_clean(&["named.xlsx"]);
    assert_eq!(code(&run(&["fill", &copy])), 0);
    let whole = sample("mine-drainage.xlsx");
    assert_eq!(code(&run(&["fill", whole.to_str().unwrap(), "--out", &book.beside_arg("whole.xlsx")])), 0);
    for cell in ["D16", "E16", "GU16"] {
        let value = |name: &str| number(&book.beside(name), "Do nothing", cell);
        assert!(value("whole.xlsx") < 0.0, "{cell} holds the present value of a damage");
        assert_eq!(value("named.audited.xlsx"), value("whole.xlsx"), "{cell}");
    }
}

#[test]
fn a_copy_is_written_with_the_same_care_as_any_output() {
    let book = bare();
    let copy = book.beside_arg("named.xlsx");
    assert_eq!(code(&run(&["names", book.arg(), "--suggest"])), 2, "--suggest wants --out");
    assert_eq!(code(&run(&["names", book.arg(), "--out", &copy])), 2, "--out wants --suggest");
    let own = run(&["names", book.arg(), "--suggest", "--out", book.arg(), "--force"]);
    assert_eq!(code(&own), 2);
    assert!(stderr(&own).contains("output-is-input"), "{}", stderr(&own));
    assert_eq!(code(&run(&["names", book.arg(), "--suggest", "--out", &copy])), 0);
    let again = run(&["names", book.arg(), "--suggest", "--out", &copy]);
    assert_eq!(code(&again), 2);
    assert!(stderr(&again).contains("output-exists"), "{}", stderr(&again));
    assert_eq!(code(&run(&["names", book.arg(), "--suggest", "--out", &copy, "--force"])), 0);
    let streamed = run_with(&["names", "-", "--suggest", "--out", "-"], book.bytes());
    assert_eq!(code(&streamed), 0);
    assert_eq!(streamed.stdout, std::fs::read(&copy).unwrap());
    book.is_clean(&["named.xlsx"]);
}

#[test]
fn suggestions_as_json() {
    let book = bare();
    let copy = book.beside_arg("named.xlsx");
    let document = json(&run(&["names", book.arg(), "--suggest", "--out", &copy, "--json"]));
    let found = &document["books"][0];
    assert_eq!(found["output"], copy.as_str());
    let guess = &found["guesses"][0];
    assert!(guess["name"].as_str().unwrap().starts_with("hence_") && guess["why"].is_string());
    assert!(found["missing"].as_array().unwrap().is_empty());
}

#[test]
fn slips_are_reported() {
    let book = plan(&[]);
    let package = Package::open(&book.path).unwrap();
    let part = package.workbook_part().to_owned();
    let xml = String::from_utf8(package.part(&part).unwrap().unwrap()).unwrap();
    let slipped = xml.replace("hence_npv", "hence_nvp").into_bytes();
    let changes = hence_workbook::package::Changes {
        replace: [(part, slipped)].into(),
        ..hence_workbook::package::Changes::default()
    };
    let slip = Book::of("slip.xlsx", package.write(&changes).unwrap());
    let output = run(&["names", slip.arg()]);
    assert!(stderr(&output).contains("hence_nvp"), "{}", stderr(&output));
    assert!(stderr(&output).contains("hence_npv"), "what was meant: {}", stderr(&output));
}

#[test]
fn nothing_to_suggest_is_an_error() {
    let book = plan(&[]);
    let output = run(&["names", book.arg(), "--suggest", "--out", &book.beside_arg("x.xlsx"), "--json"]);
    assert_eq!(code(&output), 1);
    assert_eq!(json(&output)["books"][0]["problems"][0]["code"], "nothing-to-suggest");
    book.is_clean(&[]);
}
