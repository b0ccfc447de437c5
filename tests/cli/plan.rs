//! `hence plan` and `--plan`: a plan proposed, used by every command that reads a workbook, and explained where it is wrong.

use hence_workbook::package::Package;

use crate::books::{Book, SHEET, number, plan, with, without_names};
use crate::{code, run, run_with, sample, stderr, stdout};

/// A workbook with names, the same without, and the plan of the first in a file beside the second.
fn both() -> (Book, Book, String) {
    let named = plan(&[]);
    let bare = Book::of("plan.xlsx", without_names(&Package::open(&named.path).unwrap()));
    let file = bare.beside_arg("shelf.toml");
    let output = run(&["plan", named.arg(), "--out", &file]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    assert!(stdout(&output).contains(&format!("--plan {file}")), "{}", stdout(&output));
    (named, bare, file)
}

fn json(output: &std::process::Output) -> serde_json::Value {
    serde_json::from_str(&stdout(output)).unwrap_or_else(|_| panic!("no JSON: {}", stderr(output)))
}

/// A document without the path of its input, and without what cells go by: `Appraisal!B34 [hence_npv]`,
/// `(from hence_price_basis)`.
fn without_names_of_cells(mut document: serde_json::Value) -> String {
    let several = document.get("books").is_some();
    let books = match several {
        true => document["books"].as_array_mut().unwrap().iter_mut().collect(),
        false => vec![&mut document],
    };
    for book in books {
        for key in ["problems", "input", "output"] {
            book.as_object_mut().unwrap().remove(key);
        }
    }
    let named = |name: &str| name.contains("hence_") || name.contains("shelf.toml line ");
    let without = |text: String, open: &str, close: char| {
        let mut parts = text.split(open);
        let first = parts.next().unwrap().to_owned();
        parts.fold(first, |text, part| match part.split_once(close) {
            Some((name, rest)) if named(name) => text + rest,
            _ => text + open + part,
        })
    };
    without(without(document.to_string(), " [", ']'), " (from ", ')')
}

#[test]
fn a_plan_is_printed_or_written_and_not_over_another() {
    let book = plan(&[]);
    let printed = run(&["plan", book.arg()]);
    assert_eq!(code(&printed), 0, "{}", stderr(&printed));
    let text = stdout(&printed);
    for part in ["sheet = \"Appraisal\"", "years = \"B7:BJ7\"", "npv = \"B34\"", "# flow_all_costs = "] {
        assert!(text.contains(part), "{part} is missing from:\n{text}");
    }
    assert_eq!(
        stdout(&run_with(&["plan", "-"], book.bytes())).lines().skip(1).collect::<Vec<_>>(),
        text.lines().skip(1).collect::<Vec<_>>()
    );
    let file = book.beside_arg("a.toml");
    assert_eq!(code(&run(&["plan", book.arg(), "--out", &file])), 0);
    assert_eq!(std::fs::read_to_string(&file).unwrap(), text);
    let again = run(&["plan", book.arg(), "--out", &file]);
    assert_eq!((code(&again), stderr(&again).contains("(output-exists)")), (2, true), "{}", stderr(&again));
    assert_eq!(code(&run(&["plan", book.arg(), "--out", &file, "--force"])), 0);
    let other = run(&["plan", book.arg(), "--out", &book.beside_arg("a.xlsx")]);
    assert_eq!((code(&other), stderr(&other).contains("a.toml")), (2, true), "{}", stderr(&other));
    book.is_clean(&["a.toml"]);
}

#[test]
fn every_command_reads_by_a_plan_what_it_reads_by_names() {
    let (named, bare, file) = both();
    let commands: [&[&str]; 4] = [
        &["check", "--json"],
        &["compare", "--against", "5%", "--json"],
        &["draws", "--preference", "uniform 1% to 3%", "--elasticity", "1", "--growth", "1%", "--json"],
        &["fill", "--json", "--force"],
    ];
    for command in commands {
        let (head, rest) = command.split_first().unwrap();
        let by_names = run(&[&[*head, named.arg()], rest].concat());
        let by_plan = run(&[&[*head, bare.arg()], rest, &["--plan", &file]].concat());
        assert_eq!(code(&by_plan), code(&by_names), "{head}: {}", stderr(&by_plan));
        let (a, b) = (json(&by_names), json(&by_plan));
        assert!(a.to_string().len() > 200, "{head}: {a}");
        assert_eq!(without_names_of_cells(a), without_names_of_cells(b), "{head}");
    }
    let page = |book: &Book, more: &[&str]| {
        let out = book.beside_arg("page.md");
        let output = run(&[&["brief", book.arg(), "--out", &out], more].concat());
        assert_eq!(code(&output), 0, "{}", stderr(&output));
        let text = std::fs::read_to_string(out).unwrap();
        text.lines().filter(|line| line.contains("| ")).map(str::to_owned).collect::<Vec<_>>()
    };
    let (a, b) = (page(&named, &[]), page(&bare, &["--plan", &file]));
    assert!(a.len() > 5 && a == b, "{a:?}\n{b:?}");
    // Of the two files only the one without names says where its roles come from.
    let audited = bare.beside("plan.audited.xlsx");
    assert!(crate::books::holds(&audited, "shelf.toml line"));
    assert_eq!(number(&audited, SHEET, "B34"), number(&named.beside("plan.audited.xlsx"), SHEET, "B34"));
}

#[test]
fn a_plan_that_is_wrong_in_itself_ends_the_run_before_any_workbook_is_read() {
    let book = plan(&[]);
    let file = book.beside_arg("wrong.toml");
    std::fs::write(&file, "[roles]\nyeers = \"A!B1:C1\"\nbase = 2026\n").unwrap();
    for command in ["fill", "check", "compare", "draws"] {
        let output = run(&[command, book.arg(), "--plan", &file]);
        assert_eq!(code(&output), 2);
        let text = stderr(&output);
        for part in [
            "wrong.toml line 2: yeers is no role of hence; the nearest is years",
            "wrong.toml line 3: ",
            "Try: ",
        ] {
            assert!(text.contains(part), "{command}: {part} is missing from:\n{text}");
        }
    }
    let missing = run(&["fill", book.arg(), "--plan", "nowhere.toml"]);
    assert_eq!(
        (code(&missing), stderr(&missing).contains("nowhere.toml")),
        (2, true),
        "{}",
        stderr(&missing)
    );
    book.is_clean(&["wrong.toml"]);
}

#[test]
fn a_plan_that_does_not_fit_a_workbook_is_explained_by_line_and_cell() {
    let (_, bare, file) = both();
    let text = std::fs::read_to_string(&file).unwrap();
    let line = |text: &str, start: &str| 1 + text.lines().position(|l| l.starts_with(start)).unwrap();
    let text = text
        .replace("years = \"B7:BJ7\"", "years = \"B7:BI7\"")
        .replace("npv = \"B34\"", "npv = \"Result!B34\"");
    std::fs::write(&file, &text).unwrap();
    let output = run(&["fill", bare.arg(), "--plan", &file]);
    assert_eq!(code(&output), 1);
    let told = stderr(&output);
    let npv = format!("plan.xlsx, [shelf.toml line {}, npv]: there is no sheet `Result`", line(&text, "npv"));
    let factor = format!(
        "plan.xlsx, Appraisal!B28:BJ28 [shelf.toml line {}, factor]: has 61 cells across, allowed are 60 across",
        line(&text, "factor")
    );
    for part in [&npv, &factor, "Try: the sheets are Appraisal", "refer to Appraisal!B28:BI28"] {
        assert!(told.contains(part), "{part} is missing from:\n{told}");
    }
    bare.is_clean(&["shelf.toml"]);
}

#[test]
fn one_plan_serves_a_shelf() {
    let (named, bare, file) = both();
    let (b, c) = (bare.beside_arg("b.xlsx"), bare.beside_arg("c.xlsx"));
    for (path, works) in [(&b, "900"), (&c, "1100")] {
        std::fs::write(path, with(&Package::open(&bare.path).unwrap(), SHEET, &[("B9", works)])).unwrap();
    }
    let out = bare.beside_arg("out");
    let output = run(&["fill", bare.arg(), &b, &c, "--plan", &file, "--out", &out]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    assert_eq!(code(&run(&["fill", named.arg()])), 0);
    let npv = number(&named.beside("plan.audited.xlsx"), SHEET, "B34");
    let of = |name: &str| number(&bare.beside("out").join(name), SHEET, "B34");
    for (name, more) in [("plan.audited.xlsx", 0.0), ("b.audited.xlsx", 100.0), ("c.audited.xlsx", -100.0)] {
        // Works of the base year itself are undiscounted.
        assert!((of(name) - npv - more).abs() < 1e-9, "{name}");
    }
}

#[test]
fn the_sample_with_two_appraisals() {
    let (book, file) = (sample("two-sites.xlsx"), sample("two-sites.toml"));
    let (book, file) = (book.to_str().unwrap(), file.to_str().unwrap());
    let folder = tempfile::tempdir().unwrap();
    let out = folder.path().join("two.xlsx");
    let output = run(&["fill", book, "--plan", file, "--out", out.to_str().unwrap(), "--json"]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    let document = json(&output);
    let filled = &document["books"][0];
    let names: Vec<&str> =
        filled["appraisals"].as_array().unwrap().iter().map(|a| a["appraisal"].as_str().unwrap()).collect();
    assert_eq!(names, ["Ellmere sluice", "Tarn bank"]);
    assert_eq!(filled["options"][1]["appraisal"], "Tarn bank");
    let text = stdout(&run(&["fill", book, "--plan", file, "--out", out.to_str().unwrap(), "--force"]));
    for part in ["Appraisal Ellmere sluice", "Verdict of Tarn bank: arithmetic agrees", "168 cells filled"] {
        assert!(text.contains(part), "{part} is missing from:\n{text}");
    }
    let checked = run(&["check", out.to_str().unwrap(), "--plan", file]);
    assert_eq!(code(&checked), 0, "{}", stderr(&checked));
    assert!(stdout(&checked).contains("all 168 filled cells agree"), "{}", stdout(&checked));
    // A comparison is about one of them.
    let which = run(&["compare", book, "--plan", file]);
    assert_eq!(code(&which), 2);
    assert!(stderr(&which).contains("--appraisal \"Ellmere sluice\""), "{}", stderr(&which));
    let one = run(&["compare", book, "--plan", file, "--appraisal", "tarn bank", "--against", "5%"]);
    assert_eq!(code(&one), 0, "{}", stderr(&one));
    assert!(stdout(&one).contains("Tarn bank") && !stdout(&one).contains("Ellmere"));
    let none = run(&["compare", book, "--plan", file, "--appraisal", "Mill"]);
    assert_eq!(code(&none), 2);
    assert!(stderr(&none).contains("Ellmere sluice, Tarn bank"), "{}", stderr(&none));
}
