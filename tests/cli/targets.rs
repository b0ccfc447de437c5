//! What a fill does with target cells that already hold something, and with cells that have no names.

use crate::books::{Book, cell, number, plan, without_names};
use crate::{code, run, stderr, stdout};
use hence_workbook::package::Package;
use hence_workbook::reading::Value;

/// The factor of 2027 as an analyst's formula, with this stored result.
fn with_factor(formula: &str, result: f64) -> Book {
    plan(&[("C28", &format!("={formula}>{result}"))])
}

#[test]
fn a_formula_that_agrees_is_ticked_and_left() {
    let formula = "1/(1+$B$4)^(C7-$B$3)";
    let book = with_factor(formula, 1.0 / 1.035);
    let output = run(&["fill", book.arg()]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    assert!(stdout(&output).contains("1 formula ticked"), "{}", stdout(&output));
    let filled = book.beside("plan.audited.xlsx");
    assert_eq!(cell(&filled, "Appraisal", "C28").formula.as_deref(), Some(formula));
}

#[test]
fn a_formula_that_differs_is_reported_and_left() {
    let book = with_factor("1/1.04", 1.0 / 1.04);
    let output = run(&["fill", book.arg(), "--json"]);
    assert_eq!(code(&output), 1);
    let text = stderr(&output);
    for part in ["plan.xlsx, Appraisal!C28 [hence_factor]", "(differs)", "--replace-formulas"] {
        assert!(text.contains(part), "{part} is missing from:\n{text}");
    }
    let document: serde_json::Value = serde_json::from_str(&stdout(&output)).unwrap();
    assert_eq!(document["books"][0]["status"], "problems");
    let filled = book.beside("plan.audited.xlsx");
    assert_eq!(cell(&filled, "Appraisal", "C28").formula.as_deref(), Some("1/1.04"));
    assert_eq!(document["books"][0]["output"], filled.to_str().unwrap());
    book.is_clean(&["plan.audited.xlsx"]);
}

#[test]
fn formulas_are_replaced_only_when_told_to() {
    let book = with_factor("1/1.04", 1.0 / 1.04);
    let output = run(&["fill", book.arg(), "--replace-formulas"]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    let filled = book.beside("plan.audited.xlsx");
    assert_ne!(cell(&filled, "Appraisal", "C28").formula.as_deref(), Some("1/1.04"));
    assert!((number(&filled, "Appraisal", "C28") - 1.0 / 1.035).abs() < 1e-15);
}

#[test]
fn text_is_never_overwritten() {
    for more in [&[][..], &["--replace-formulas"]] {
        let book = plan(&[("B34", "see the memo")]);
        let output = run(&[&["fill", book.arg()], more].concat());
        assert_eq!(code(&output), 1);
        let text = stderr(&output);
        assert!(text.contains("Appraisal!B34 [hence_npv]") && text.contains("(target-text)"), "{text}");
        assert!(stdout(&output).contains("Verdict: differs"), "a text is no result: {}", stdout(&output));
        let filled = book.beside("plan.audited.xlsx");
        assert_eq!(cell(&filled, "Appraisal", "B34").value, Value::Text("see the memo".into()));
    }
}

#[test]
fn a_typed_number_is_replaced_with_a_warning() {
    let book = plan(&[("B34", "12345")]);
    let output = run(&["fill", book.arg()]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    let text = stderr(&output);
    assert!(text.contains("Appraisal!B34 [hence_npv]") && text.contains("B34 held 12345"), "{text}");
    assert!(text.contains("(number-replaced)"), "{text}");
    // What a fill wrote as a number is its own, and replaced in silence.
    let values = run(&["fill", book.arg(), "--force", "--write", "values"]);
    assert_eq!(code(&values), 0);
    let audited = book.beside("plan.audited.xlsx");
    let again =
        run(&["fill", audited.to_str().unwrap(), "--basis", "7%", "--out", &book.beside_arg("again.xlsx")]);
    assert_eq!(code(&again), 0, "{}", stderr(&again));
    assert!(!stderr(&again).contains("number-replaced"), "{}", stderr(&again));
}

/// The plan without a single name, its cells given on the command line instead.
#[test]
fn roles_on_the_command_line_stand_for_names() {
    let plan = plan(&[]);
    let bare = Book::of("bare.xlsx", without_names(&Package::open(&plan.path).unwrap()));
    let nothing = run(&["fill", bare.arg()]);
    assert_eq!(code(&nothing), 1);
    assert!(stderr(&nothing).contains("missing-role"), "{}", stderr(&nothing));
    let roles = [
        "base=Appraisal!B3",
        "basis=Appraisal!B4",
        "years=Appraisal!B7:BJ7",
        "cost_works=Appraisal!B9:BJ9",
        "hence_benefit_users = 'Appraisal'!$B$18:$BJ$18",
        "factor=Appraisal!B28:BJ28",
        "npv=Appraisal!B34",
    ];
    let mut args = vec!["fill", bare.arg()];
    roles.iter().for_each(|role| args.extend(["--role", role]));
    let output = run(&args);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    let npv = 600.0 / 1.035 + 600.0 / 1.035f64.powi(2) - 1000.0;
    assert!((number(&bare.beside("bare.audited.xlsx"), "Appraisal", "B34") - npv).abs() < 1e-9);
    let mut checked =
        vec!["check", bare.beside("bare.audited.xlsx").to_str().unwrap().to_owned().leak() as &str];
    roles.iter().for_each(|role| checked.extend(["--role", role]));
    assert_eq!(code(&run(&checked)), 0);
    for (wrong, status) in [("years", 2), ("yeers=Appraisal!B7:BJ7", 1), ("years=Nowhere!B7:BJ7", 1)] {
        let output = run(&["fill", bare.arg(), "--force", "--role", wrong]);
        assert_eq!(code(&output), status, "{wrong}: {}", stderr(&output));
    }
    bare.is_clean(&["bare.audited.xlsx"]);
}
