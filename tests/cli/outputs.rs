//! Where outputs go, and what is never written over.

use std::path::Path;

use crate::books::plan;
use crate::{code, hence, run, run_with, stderr, stdout};

#[test]
fn an_existing_output_needs_force() {
    let book = plan(&[]);
    assert_eq!(code(&run(&["fill", book.arg()])), 0);
    let filled = book.beside("plan.audited.xlsx");
    std::fs::write(&filled, "mine").unwrap();
    let refused = run(&["fill", book.arg()]);
    assert_eq!(code(&refused), 2);
    let text = stderr(&refused);
    assert!(text.contains("plan.audited.xlsx exists already (output-exists)"), "{text}");
    assert!(text.contains("--force"), "{text}");
    assert_eq!(std::fs::read(&filled).unwrap(), b"mine");
    assert_eq!(code(&run(&["fill", book.arg(), "--force"])), 0);
    assert_ne!(std::fs::read(&filled).unwrap(), b"mine");
    book.is_clean(&["plan.audited.xlsx"]);
}

#[test]
fn an_output_may_be_a_file_or_a_folder() {
    let book = plan(&[]);
    assert_eq!(code(&run(&["fill", book.arg(), "--out", &book.beside_arg("named.xlsx")])), 0);
    assert!(book.beside("named.xlsx").is_file());
    let folder = book.beside_arg("deep/er");
    assert_eq!(code(&run(&["fill", book.arg(), "--out", &folder])), 0);
    let listed: Vec<_> = std::fs::read_dir(&folder).unwrap().map(|e| e.unwrap().file_name()).collect();
    assert_eq!(listed, ["plan.audited.xlsx"], "the folder holds outputs and nothing else");
    let wrong = run(&["fill", book.arg(), "--out", &book.beside_arg("named.xlsm")]);
    assert_eq!(code(&wrong), 2);
    assert!(stderr(&wrong).contains("is .xlsx"), "{}", stderr(&wrong));
    book.is_clean(&["named.xlsx", "deep"]);
}

#[test]
fn a_folder_is_not_left_behind_for_nothing() {
    let book = plan(&[("B4", "35")]);
    let output = run(&["fill", book.arg(), "--out", &book.beside_arg("deep/er")]);
    assert_eq!(code(&output), 1);
    book.is_clean(&[]);
}

#[test]
fn two_workbooks_do_not_share_an_output() {
    let (one, two) = (plan(&[]), plan(&[]));
    let folder = one.beside_arg("out");
    let clash = run(&["fill", one.arg(), two.arg(), "--out", &folder]);
    assert_eq!(code(&clash), 2);
    assert!(stderr(&clash).contains("would both be written to"), "{}", stderr(&clash));
    let file = run(&["fill", one.arg(), two.arg(), "--out", &one.beside_arg("x.xlsx")]);
    assert_eq!(code(&file), 2);
    assert_eq!(code(&run(&["fill", one.arg(), one.arg()])), 2);
    one.is_clean(&[]);
    assert_eq!(code(&run(&["fill", one.arg(), two.arg()])), 0);
    one.is_clean(&["plan.audited.xlsx"]);
    two.is_clean(&["plan.audited.xlsx"]);
}

#[test]
fn the_input_is_never_the_output() {
    let book = plan(&[]);
    let output = run(&["fill", book.arg(), "--out", book.arg(), "--force"]);
    assert_eq!(code(&output), 2);
    assert!(stderr(&output).contains("(output-is-input)"), "{}", stderr(&output));
    #[cfg(unix)]
    {
        let link = book.beside("link.xlsx");
        std::os::unix::fs::symlink(&book.path, &link).unwrap();
        let output = run(&["fill", book.arg(), "--out", link.to_str().unwrap(), "--force"]);
        assert_eq!(code(&output), 2);
        book.is_clean(&["link.xlsx"]);
    }
}

#[test]
fn the_input_is_not_written_by_way_of_a_folder_that_is_not_there() {
    let book = plan(&[]);
    for name in ["nn/../plan.xlsx", "nn/../b.xlsx", "nn/.."] {
        let output = run(&["fill", book.arg(), "--out", &book.beside_arg(name), "--force"]);
        assert_eq!(code(&output), 2, "{name}");
        assert!(stderr(&output).contains("nn is no folder"), "{}", stderr(&output));
        assert_eq!(std::fs::read(&book.path).unwrap(), book.bytes(), "{name}");
        book.is_clean(&[]);
    }
    // Another spelling of a folder that is there.
    std::fs::create_dir(book.beside("there")).unwrap();
    let output = run(&["fill", book.arg(), "--out", &book.beside_arg("there/../plan.xlsx"), "--force"]);
    assert_eq!(code(&output), 2);
    assert!(stderr(&output).contains("(output-is-input)"), "{}", stderr(&output));
    let output = run(&["fill", book.arg(), "--out", &book.beside_arg("there/../b.xlsx")]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    book.is_clean(&["b.xlsx", "there"]);
}

#[cfg(unix)]
#[test]
fn a_file_that_comes_on_standard_input_is_not_the_output() {
    let book = plan(&[]);
    let fed = |args: &[&str]| {
        let file = std::fs::File::open(&book.path).unwrap();
        hence().args(args).stdin(file).output().unwrap()
    };
    let output = fed(&["fill", "-", "--out", book.arg(), "--force"]);
    assert_eq!(code(&output), 2, "{}", stderr(&output));
    assert!(stderr(&output).contains("(output-is-input)"), "{}", stderr(&output));
    let ledger = fed(&["fill", "-", "--ledger", book.arg(), "--force"]);
    assert_eq!(code(&ledger), 2, "{}", stderr(&ledger));
    assert_eq!(std::fs::read(&book.path).unwrap(), book.bytes());
    assert_eq!(code(&fed(&["fill", "-", "--out", &book.beside_arg("b.xlsx")])), 0);
    book.is_clean(&["b.xlsx"]);
}

#[test]
fn an_audited_copy_is_filled_only_to_another_name() {
    let book = plan(&[]);
    assert_eq!(code(&run(&["fill", book.arg()])), 0);
    let audited = book.beside_arg("plan.audited.xlsx");
    let before = std::fs::read(&audited).unwrap();
    let refused = run(&["fill", &audited, "--force"]);
    assert_eq!(code(&refused), 2);
    assert!(stderr(&refused).contains("the input is never written"), "{}", stderr(&refused));
    assert_eq!(std::fs::read(&audited).unwrap(), before);
    assert_eq!(code(&run(&["fill", &audited, "--out", &book.beside_arg("again")])), 0);
    assert!(book.beside("again/plan.audited.xlsx").is_file());
}

#[test]
fn streams_carry_workbooks() {
    let book = plan(&[]);
    assert_eq!(code(&run(&["fill", book.arg()])), 0);
    let streamed = run(&["fill", book.arg(), "--out", "-"]);
    assert_eq!(code(&streamed), 0);
    assert_eq!(streamed.stdout, std::fs::read(book.beside("plan.audited.xlsx")).unwrap());
    assert!(stderr(&streamed).contains("Verdict: arithmetic agrees"), "{}", stderr(&streamed));
    let piped = run_with(&["fill", "-"], book.bytes());
    assert_eq!(code(&piped), 0, "{}", String::from_utf8_lossy(&piped.stderr));
    assert_eq!(&piped.stdout[..2], b"PK");
    let checked = run_with(&["check", "-"], &piped.stdout);
    assert_eq!(code(&checked), 0, "{}", stderr(&checked));
    let to_file = run_with(&["fill", "-", "--out", &book.beside_arg("s.xlsx")], book.bytes());
    assert_eq!(code(&to_file), 0);
    assert_eq!(std::fs::read(book.beside("s.xlsx")).unwrap(), piped.stdout);
    for wrong in [&["fill", "-", "--json"][..], &["fill", "-", "--out", "folder"]] {
        let output = run_with(wrong, book.bytes());
        assert_eq!((code(&output), stdout(&output).len()), (2, 0), "{wrong:?}");
    }
    assert!(!Path::new("folder").exists());
    let limited = run_with(&["fill", "-", "--memory-limit", "900", "--time-limit", "60"], book.bytes());
    assert_eq!(limited.stdout, piped.stdout);
    for flag in ["--memory-limit: not kept to", "--time-limit: not kept to"] {
        assert!(stderr(&limited).contains(flag) && !stderr(&piped).contains(flag), "{}", stderr(&limited));
    }
    let broken = run_with(&["fill", "-"], b"not a workbook");
    assert_eq!((code(&broken), broken.stdout.len()), (1, 0));
    assert!(stderr(&broken).contains("standard input"), "{}", stderr(&broken));
}
