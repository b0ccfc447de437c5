//! `hence start`: a workbook to type into.

use crate::books::{Book, cell, plan, typed};
use crate::{code, run, stderr, stdout};
use hence_workbook::reading::Value;
use hence_workbook::start::start;

#[test]
fn it_is_written_once_and_the_same_every_time() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("new.xlsx");
    let arg = path.to_str().unwrap();
    let output = run(&["start", arg]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    assert!(stdout(&output).contains("hence fill"), "{}", stdout(&output));
    let first = std::fs::read(&path).unwrap();
    let again = run(&["start", arg]);
    assert_eq!(code(&again), 2);
    assert!(stderr(&again).contains("output-exists"), "{}", stderr(&again));
    // The format stamps files with two-second steps; the clock is given time to show.
    std::thread::sleep(std::time::Duration::from_millis(2100));
    assert_eq!(code(&run(&["start", arg, "--force"])), 0);
    assert_eq!(std::fs::read(&path).unwrap(), first, "same bytes at any time");
    assert_eq!(run(&["start", "-"]).stdout, first);
    assert_eq!(std::fs::read_dir(folder.path()).unwrap().count(), 1);
    for wrong in ["new.xlsm", "new.ods", "new"] {
        let output = run(&["start", folder.path().join(wrong).to_str().unwrap()]);
        assert_eq!(code(&output), 2, "{wrong}");
    }
}

#[test]
fn its_names_are_complete() {
    let book = Book::of("new.xlsx", start().unwrap());
    let output = run(&["names", book.arg()]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    assert!(!stdout(&output).contains("missing:"), "{}", stdout(&output));
    assert!(stdout(&output).contains("hence_benefits"), "{}", stdout(&output));
}

#[test]
fn filled_untouched_it_says_what_to_type() {
    let book = typed(&[]);
    let output = run(&["fill", book.arg()]);
    assert_eq!(code(&output), 1);
    let text = stderr(&output);
    assert!(text.contains("Appraisal!B4 [hence_basis]: is blank"), "{text}");
    let book = typed(&[("B4", "3.5%")]);
    let output = run(&["fill", book.arg()]);
    assert_eq!(code(&output), 1);
    let text = stderr(&output);
    assert!(text.contains("Appraisal!A9:BJ14 [hence_costs]") && text.contains("(no-flows)"), "{text}");
    book.is_clean(&[]);
}

#[test]
fn typed_into_it_fills_and_checks() {
    let labelled = [("A12", "Sludge"), ("E12", "40"), ("A18", "Anglers"), ("B5", "flows middle, base start")];
    let book = plan(&labelled);
    let output = run(&["fill", book.arg()]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    let text = stdout(&output);
    assert!(text.contains("above the line Anglers; below it Works, Sludge"), "{text}");
    assert!(text.contains("in 2026 has factor 0.9829"), "1.035^-0.5: {text}");
    let filled = book.beside("plan.audited.xlsx");
    // The internal rate of return and the payback have no closed form: they are numbers.
    for at in ["B28", "B29", "B32", "B33", "B34", "B35", "B36"] {
        assert!(cell(&filled, "Appraisal", at).formula.is_some(), "{at}");
    }
    assert_eq!(code(&run(&["check", filled.to_str().unwrap()])), 0);
}

#[test]
fn costs_alone_can_be_filled() {
    let book = typed(&[("B4", "3.5%"), ("B9", "1000")]);
    let output = run(&["fill", book.arg()]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    assert!(stderr(&output).contains("[hence_benefits]: holds no numbers"), "{}", stderr(&output));
}

/// The workbook says which prices it holds, so that schedules of real rates have nothing to warn of, and nominal ones refuse.
#[test]
fn it_says_which_prices_it_holds() {
    let stated = |basis: &str, prices: &[(&str, &str)]| {
        let book = plan(&[&[("B4", basis)], prices].concat());
        let output = run(&["fill", book.arg()]);
        (code(&output), stderr(&output))
    };
    let (ended, said) = stated("uk-2026", &[]);
    assert!(ended == 0 && !said.contains("prices"), "{said}");
    let (ended, said) = stated("us-a94c-2000-nominal", &[]);
    assert!(ended == 1 && said.contains("(prices-differ)"), "{said}");
    let (ended, said) = stated("us-a94c-2000-nominal", &[("B6", "nominal")]);
    assert!(ended == 0 && !said.contains("prices"), "{said}");
    assert_eq!(cell(&plan(&[]).path, "Appraisal", "A6").value, Value::Text("Prices".into()));
}
