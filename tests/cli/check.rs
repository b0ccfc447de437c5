//! `hence check`: what a workbook holds against what its basis gives.

use crate::books::{Book, SHEET, holds, plan, with};
use crate::{code, run, stderr, stdout};
use hence_workbook::package::Package;

fn filled() -> Book {
    let book = plan(&[]);
    assert_eq!(code(&run(&["fill", book.arg()])), 0);
    Book::of("plan.xlsx", std::fs::read(book.beside("plan.audited.xlsx")).unwrap())
}

fn changed(cells: &[(&str, &str)]) -> Book {
    let filled = filled();
    Book::of("plan.xlsx", with(&Package::open(&filled.path).unwrap(), SHEET, cells))
}

#[test]
fn blank_targets_are_not_filled_and_no_difference() {
    let book = plan(&[]);
    let output = run(&["check", book.arg()]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    let text = stdout(&output);
    assert!(text.contains("Appraisal!B28:BJ28 [hence_factor]: not filled"), "{text}");
    assert!(text.contains("nothing was filled, so nothing was compared"), "{text}");
    book.is_clean(&[]);
}

#[test]
fn a_filled_workbook_agrees() {
    let book = filled();
    let output = run(&["check", book.arg()]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    // 61 factors, 61 present values, seven results.
    assert!(stdout(&output).contains("all 129 filled cells agree"), "{}", stdout(&output));
    book.is_clean(&[]);
}

#[test]
fn a_difference_is_listed_with_its_cell() {
    let book = changed(&[("C28", "0.97"), ("B34", "120")]);
    let output = run(&["check", book.arg()]);
    assert_eq!(code(&output), 1);
    let text = stdout(&output);
    for part in [
        "Appraisal!C28 [hence_factor]",
        "0.97",
        "0.966183574879227",
        "Appraisal!B34 [hence_npv]",
        "2 cells differ",
    ] {
        assert!(text.contains(part), "{part} is missing from:\n{text}");
    }
    let document: serde_json::Value =
        serde_json::from_str(&stdout(&run(&["check", book.arg(), "--json"]))).unwrap();
    assert_eq!(document["schema"], 1);
    let found = &document["books"][0];
    assert_eq!((&found["status"], &found["agree"]), (&"problems".into(), &127.into()));
    let factor = &found["differences"][0];
    assert_eq!((&factor["place"], &factor["found"]), (&"Appraisal!C28 [hence_factor]".into(), &0.97.into()));
    assert!((factor["expected"].as_f64().unwrap() - 1.0 / 1.035).abs() < 1e-15);
    assert!((factor["difference"].as_f64().unwrap() - (0.97 - 1.0 / 1.035)).abs() < 1e-15);
    book.is_clean(&[]);
}

#[test]
fn another_flow_or_rate_is_a_difference() {
    assert_eq!(code(&run(&["check", changed(&[("C18", "601")]).arg()])), 1);
    assert_eq!(code(&run(&["check", changed(&[("B4", "0.036")]).arg()])), 1);
}

#[test]
fn text_and_blanks_among_the_targets() {
    let text = changed(&[("B35", "about 1.1")]);
    let output = run(&["check", text.arg()]);
    assert_eq!(code(&output), 1);
    assert!(stdout(&output).contains("about 1.1"), "{}", stdout(&output));
    // Beside a text, what is expected is a text, too.
    let document: serde_json::Value =
        serde_json::from_str(&stdout(&run(&["check", text.arg(), "--json"]))).unwrap();
    let ratio = &document["books"][0]["differences"][0];
    assert_eq!((&ratio["found"], &ratio["difference"]), (&"about 1.1".into(), &serde_json::Value::Null));
    let expected = ratio["expected"].as_str().expect("a text");
    assert!(expected.parse::<f64>().is_ok(), "{expected}");
}

#[test]
fn what_cannot_be_checked_says_why() {
    let missing = run(&["check", "no-such.xlsx"]);
    assert_eq!((code(&missing), stdout(&missing).len()), (2, 0));
    let book = plan(&[("B4", "35")]);
    let output = run(&["check", book.arg(), "--json"]);
    assert_eq!(code(&output), 1);
    let document: serde_json::Value = serde_json::from_str(&stdout(&output)).unwrap();
    assert_eq!(document["books"][0]["status"], "failed");
    assert!(stderr(&output).contains("Appraisal!B4 [hence_basis]"), "{}", stderr(&output));
}

/// Filled with plain numbers at a flat rate, after which bands were declared: factors of a flat 3.5% for bands.
fn flat_for_bands() -> Book {
    let book = plan(&[]);
    assert_eq!(code(&run(&["fill", book.arg(), "--write", "values"])), 0);
    let filled = Package::open(&book.beside("plan.audited.xlsx")).unwrap();
    Book::of("plan.xlsx", with(&filled, SHEET, &[("B4", "3.5% to 1, 3% after")]))
}

#[test]
fn a_finding_says_kind_place_evidence_effect_and_how_sure_it_is() {
    let book = flat_for_bands();
    let output = run(&["check", book.arg()]);
    assert_eq!(code(&output), 1, "{}", stderr(&output));
    let text = stdout(&output);
    for part in [
        "flat-for-bands  Appraisal!B28:BJ28 [hence_factor]\n",
        "a flat 3.5% reproduces all 61 factors",
        "the declared basis is 3.5% to 1, 3% after",
        // 600/1.035 (1/1.035 - 1/1.03)
        "the NPV is 2.72 too low",
        "1 finding;",
    ] {
        assert!(text.contains(part), "{part} is missing from:\n{text}");
    }
    let document: serde_json::Value =
        serde_json::from_str(&stdout(&run(&["check", book.arg(), "--json"]))).unwrap();
    assert_eq!(document["schema"], 1);
    let found = &document["books"][0];
    assert_eq!((&found["input"], &found["status"]), (&book.arg().into(), &"problems".into()));
    let findings = found["findings"].as_array().unwrap();
    assert_eq!(findings.len(), 1);
    let keys: Vec<&str> = findings[0].as_object().unwrap().keys().map(String::as_str).collect();
    assert_eq!(keys, ["code", "confidence", "effect_on_npv", "expected", "found", "place", "words"]);
    assert_eq!(
        (&findings[0]["code"], &findings[0]["place"]),
        (&"flat-for-bands".into(), &"Appraisal!B28:BJ28".into())
    );
    let effect = findings[0]["effect_on_npv"].as_f64().unwrap();
    let expected = 600.0 / 1.035 * (1.0 / 1.035 - 1.0 / 1.03);
    assert!((effect - expected).abs() < 1e-9, "{effect}, {expected}");
    assert!((0.9..1.0).contains(&findings[0]["confidence"].as_f64().unwrap()));
    book.is_clean(&[]);
}

#[test]
fn several_workbooks_and_a_folder() {
    let (right, wrong) = (filled(), flat_for_bands());
    let folder = tempfile::tempdir().unwrap();
    std::fs::create_dir(folder.path().join("south")).unwrap();
    std::fs::write(folder.path().join("a.xlsx"), wrong.bytes()).unwrap();
    std::fs::write(folder.path().join("south/b.xlsx"), right.bytes()).unwrap();
    std::fs::write(folder.path().join("c.xlsx"), b"not a workbook").unwrap();
    // Neither a workbook nor the mark of one that is open.
    std::fs::write(folder.path().join("notes.txt"), b"notes").unwrap();
    std::fs::write(folder.path().join("~$a.xlsx"), b"open").unwrap();
    let whole = folder.path().to_str().unwrap();
    let output = run(&["check", whole, right.arg(), "--json"]);
    assert_eq!(code(&output), 1, "{}", stderr(&output));
    let document: serde_json::Value = serde_json::from_str(&stdout(&output)).unwrap();
    let books = document["books"].as_array().unwrap();
    let told: Vec<(&str, &str, usize)> = books
        .iter()
        .map(|book| {
            let input = book["input"].as_str().unwrap();
            let name = input.rsplit(['/', '\\']).next().unwrap();
            (name, book["status"].as_str().unwrap(), book["findings"].as_array().unwrap().len())
        })
        .collect();
    let expected =
        [("a.xlsx", "problems", 1), ("c.xlsx", "failed", 0), ("b.xlsx", "done", 0), ("plan.xlsx", "done", 0)];
    assert_eq!(told, expected);
    assert!(stderr(&output).contains("c.xlsx: not checked"), "{}", stderr(&output));
    assert_eq!(code(&run(&["check", right.arg(), right.arg()])), 0);
    // Each workbook is named before what is found in it.
    let text = stdout(&run(&["check", right.arg(), wrong.arg()]));
    let at = |part: &str| text.find(part).unwrap_or_else(|| panic!("{part} is missing from:\n{text}"));
    let (of_right, of_wrong) = (at("all 129 filled cells agree"), at("1 finding;"));
    assert!(at(right.arg()) < of_right && of_right < at(wrong.arg()), "{text}");
    assert!(at(wrong.arg()) < of_wrong && of_wrong < at("flat-for-bands"), "{text}");
    let empty = tempfile::tempdir().unwrap();
    let output = run(&["check", empty.path().to_str().unwrap()]);
    assert_eq!(code(&output), 2);
    assert!(stderr(&output).contains("no workbooks are in it"), "{}", stderr(&output));
}

#[test]
fn a_folder_of_audited_outputs_is_checked() {
    let (right, wrong) = (filled(), flat_for_bands());
    let folder = tempfile::tempdir().unwrap();
    std::fs::write(folder.path().join("a.audited.xlsx"), right.bytes()).unwrap();
    let whole = folder.path().to_str().unwrap();
    let output = run(&["check", whole]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    assert!(stdout(&output).contains("all 129 filled cells agree"), "{}", stdout(&output));
    std::fs::write(folder.path().join("b.audited.xlsx"), wrong.bytes()).unwrap();
    assert_eq!(code(&run(&["check", whole])), 1);
    // What spreadsheet programs leave there is none.
    let locks = tempfile::tempdir().unwrap();
    std::fs::write(locks.path().join("~$a.xlsx"), b"open").unwrap();
    let output = run(&["check", locks.path().to_str().unwrap()]);
    assert_eq!(code(&output), 2);
    assert!(stderr(&output).contains("in it but 1 file that a run skips"), "{}", stderr(&output));
}

#[test]
fn a_marked_copy_holds_the_findings() {
    let book = changed(&[("C28", "0.97")]);
    let out = book.beside_arg("marked.xlsx");
    let output = run(&["check", book.arg(), "--out", &out]);
    assert_eq!(code(&output), 1, "{}", stderr(&output));
    assert!(stdout(&output).contains("-> "), "{}", stdout(&output));
    assert!(holds(&book.beside("marked.xlsx"), "hence check: a typed number in a row of formulas"));
    book.is_clean(&["marked.xlsx"]);
    // What is there is kept, unless told otherwise; the input is never written.
    assert_ne!(code(&run(&["check", book.arg(), "--out", &out])), 0);
    assert_eq!(code(&run(&["check", book.arg(), "--out", &out, "--force"])), 1);
    let same = run(&["check", book.arg(), "--out", book.arg(), "--force"]);
    assert!(stderr(&same).contains("output-is-input"), "{}", stderr(&same));
    book.is_clean(&["marked.xlsx"]);
}

#[test]
fn a_marked_copy_is_of_one_workbook_and_a_workbook() {
    let book = filled();
    let other = filled();
    let out = book.beside_arg("marked.xlsx");
    let output = run(&["check", book.arg(), other.arg(), "--out", &out]);
    assert_eq!(code(&output), 2);
    assert!(stderr(&output).contains("one file"), "{}", stderr(&output));
    let text = book.beside_arg("marked.txt");
    assert_eq!(code(&run(&["check", book.arg(), "--out", &text])), 2);
}
