//! `hence brief`: the page, its text and its JSON, and what cannot be written.

use crate::books::plan;
use crate::{code, copy_of, run, run_with, stderr, stdout};

fn json(output: &std::process::Output) -> serde_json::Value {
    serde_json::from_str(&stdout(output)).expect("one JSON document")
}

#[test]
fn the_sample_makes_a_page() {
    let (folder, book) = copy_of("mine-drainage.xlsx");
    let before = std::fs::read(&book).unwrap();
    let (book, out) = (book.to_str().unwrap().to_owned(), folder.path().join("brief.html"));
    let args =
        ["brief", &book, "--out", out.to_str().unwrap(), "--against", "3.5%", "uk-2003", "--by", "A. Reader"];
    let output = run(&args);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    let text = stdout(&output);
    assert!(text.starts_with(&format!("{book} -> {}", out.display())), "{text}");
    for part in [
        "Which of “Settling ponds”",
        "has the highest net present value over “Do nothing”",
        hence_core::CAUTION,
    ] {
        assert!(text.contains(part), "{part} is missing from:\n{text}");
    }
    let page = std::fs::read_to_string(&out).unwrap();
    assert!(page.starts_with("<!DOCTYPE html>\n<html lang=\"en\">"));
    for part in ["<svg", "3.5% (against)", "By A. Reader.", hence_core::CAUTION] {
        assert!(page.contains(part), "{part}");
    }
    // What is printed is what stands on the page.
    let answer = text.lines().find(|line| line.starts_with("On the declared basis")).expect("the answer");
    assert!(page.contains(answer), "{answer}");
    let refused = run(&args);
    assert_eq!(code(&refused), 2);
    assert!(stderr(&refused).contains("(output-exists)"), "{}", stderr(&refused));
    let again = run(&[&args[..], &["--force"]].concat());
    assert_eq!(code(&again), 0);
    assert!(std::fs::read_to_string(&out).unwrap() == page, "same input, same bytes");
    assert_eq!(std::fs::read(&book).unwrap(), before, "the input is never written");
    assert_eq!(std::fs::read_dir(folder.path()).unwrap().count(), 2, "nothing temporary is left");
}

/// The net present value in the page is the one that a fill finds.
#[test]
fn a_brief_and_a_fill_agree() {
    let (folder, book) = copy_of("mine-drainage.xlsx");
    let book = book.to_str().unwrap().to_owned();
    let out = folder.path().join("brief.html");
    let briefed = run(&["brief", &book, "--out", out.to_str().unwrap(), "--json"]);
    let filled = run(&["fill", &book, "--json"]);
    assert_eq!((code(&briefed), code(&filled)), (0, 0), "{}", stderr(&briefed));
    let (briefed, filled) = (json(&briefed), json(&filled));
    let (briefed, filled) = (&briefed["books"][0], &filled["books"][0]);
    let ours = briefed["options"].as_array().unwrap();
    let theirs = filled["options"].as_array().unwrap();
    assert_eq!(ours.len(), 4);
    for (a, b) in ours.iter().zip(theirs) {
        for key in ["option", "npv", "pv_benefits", "pv_costs", "ratio", "annual"] {
            assert_eq!(a[key], b[key], "{key} of {a}");
        }
    }
    assert_eq!(briefed["status"], "done");
    assert_eq!(briefed["output"], out.to_str().unwrap());
    // Ranks by plain comparison of those values.
    for option in ours {
        let above = ours.iter().filter(|other| other["npv"].as_f64() > option["npv"].as_f64()).count();
        assert_eq!(option["rank"].as_u64(), Some(1 + above as u64), "{option}");
    }
    assert_eq!(ours[0]["baseline"], true);
}

#[test]
fn markdown_by_its_extension() {
    let book = plan(&[]);
    let out = book.beside_arg("brief.md");
    let output =
        run(&["brief", book.arg(), "--out", &out, "--question", "Shall | we?", "--as-of", "1 May 2026"]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    let text = std::fs::read_to_string(&out).unwrap();
    assert!(text.starts_with("# Shall \\| we?\n\nOn the declared basis"), "{text}");
    // 600 / 1.035 + 600 / 1.035^2 - 1000 = 139.82.
    assert!(text.contains("| Appraisal | 1,140 | 1,000 | 139.82 | 1.14 |"), "{text}");
    assert!(text.contains("As of 1 May 2026.") && text.contains(hence_core::CAUTION), "{text}");
    assert!(!text.contains("<svg"));
    book.is_clean(&["brief.md"]);
}

#[test]
fn a_page_may_go_to_standard_output() {
    let book = plan(&[]);
    let out = book.beside_arg("brief.html");
    assert_eq!(code(&run(&["brief", book.arg(), "--out", &out])), 0);
    let piped = run(&["brief", book.arg(), "--out", "-"]);
    assert_eq!(code(&piped), 0);
    assert!(stdout(&piped) == std::fs::read_to_string(&out).unwrap(), "one page, wherever it goes");
    assert!(stderr(&piped).contains("On the declared basis"), "{}", stderr(&piped));
    let both = run_with(&["brief", "-", "--out", "-"], book.bytes());
    assert_eq!(code(&both), 0, "{}", stderr(&both));
    assert!(stdout(&both).contains("from standard input, SHA-256"));
    assert_eq!(code(&run(&["brief", book.arg(), "--out", "-", "--json"])), 2);
}

#[test]
fn what_cannot_run_says_so() {
    let book = plan(&[]);
    let html = book.beside_arg("x.html");
    assert_eq!(code(&run(&["brief", book.arg()])), 2, "--out is needed");
    let pdf = run(&["brief", book.arg(), "--out", &book.beside_arg("x.pdf")]);
    assert_eq!(code(&pdf), 2);
    assert!(stderr(&pdf).contains("Try: --out") && stderr(&pdf).contains("x.html"), "{}", stderr(&pdf));
    let slip = run(&["brief", book.arg(), "--out", &html, "--against", "3,5%"]);
    assert_eq!(code(&slip), 2);
    assert!(stderr(&slip).contains("Try: 3.5%"), "{}", stderr(&slip));
    // A basis that ends before the flows do.
    let short = run(&["brief", book.arg(), "--out", &html, "--against", "3% to 1", "--json"]);
    assert_eq!(code(&short), 1);
    assert!(stderr(&short).contains("(outside-domain)"), "{}", stderr(&short));
    assert_eq!(json(&short)["books"][0]["status"], "failed");
    let missing = run(&["brief", "no-such.xlsx", "--out", &html]);
    assert_eq!(code(&missing), 2);
    assert!(stderr(&missing).contains("(cannot-read)"), "{}", stderr(&missing));
    let role = run(&["brief", book.arg(), "--out", &html, "--role", "years"]);
    assert_eq!(code(&role), 2);
    let folder = run(&["brief", book.arg(), "--out", &book.beside_arg("no-folder/x.html")]);
    assert_eq!(code(&folder), 2);
    assert!(stderr(&folder).contains("(cannot-write)"), "{}", stderr(&folder));
    book.is_clean(&[]);
}

#[test]
fn an_audited_workbook_gives_the_same_answer() {
    let book = plan(&[]);
    assert_eq!(code(&run(&["fill", book.arg()])), 0);
    let answer = |book: &str, out: &str| {
        let output = run(&["brief", book, "--out", out, "--json"]);
        assert_eq!(code(&output), 0, "{}", stderr(&output));
        let document = json(&output);
        (document["books"][0]["answer"].clone(), document["books"][0]["not_valued"].clone())
    };
    let first = answer(book.arg(), &book.beside_arg("a.html"));
    assert_eq!(first, answer(&book.beside_arg("plan.audited.xlsx"), &book.beside_arg("b.html")));
}
