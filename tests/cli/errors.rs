//! Exit status, streams and colour where something is wrong.

use crate::books::{Book, plan};
use crate::{code, hence, run, stderr, stdout};

#[test]
fn a_missing_file_could_not_run() {
    for command in ["fill", "check", "names"] {
        let output = run(&[command, "no-such.xlsx"]);
        assert_eq!(code(&output), 2, "{command}");
        assert!(stderr(&output).contains("no-such.xlsx cannot be read"), "{}", stderr(&output));
        assert_eq!(stderr(&output).matches("no-such.xlsx cannot").count(), 1);
        assert!(stdout(&output).is_empty());
    }
    let output = run(&["no-such.xlsx"]);
    assert_eq!(code(&output), 2);
    let folder = tempfile::tempdir().unwrap();
    assert_eq!(code(&run(&["fill", folder.path().to_str().unwrap()])), 2);
}

#[test]
fn what_is_no_workbook_is_wrong_and_says_so() {
    let old = [0xD0, 0xCF, 0x11, 0xE0, 0xA1, 0xB1, 0x1A, 0xE1, 0, 0, 0, 0];
    for (name, bytes) in [
        ("letter.xlsx", b"Dear Sir".to_vec()),
        ("page.xlsx", b"<html><body>1</body></html>".to_vec()),
        ("empty.xlsx", Vec::new()),
        ("old.xls", [&old[..], &[0; 600]].concat()),
        ("table.csv", b"year,cost\n2026,1\n".to_vec()),
    ] {
        let book = Book::of(name, bytes);
        for command in ["fill", "check", "names"] {
            let output = run(&[command, book.arg()]);
            assert_eq!(code(&output), 1, "{command} {name}: {}", stderr(&output));
            assert!(stderr(&output).contains(name), "{command} {name}: {}", stderr(&output));
            assert!(stderr(&output).contains("Try:"), "{command} {name}: {}", stderr(&output));
        }
        book.is_clean(&[]);
    }
}

#[test]
fn control_characters_of_a_file_do_not_reach_the_terminal() {
    let book = plan(&[("A10", "Pumps\u{202e}smup"), ("C10", "12\u{202e}")]);
    let output = run(&["fill", book.arg()]);
    assert_eq!(code(&output), 1);
    assert!(!stderr(&output).contains('\u{202e}'));
    assert!(stderr(&output).contains("Pumps\\u{202e}smup"), "{}", stderr(&output));
}

#[test]
fn colour_is_asked_for_or_shown_on_terminals_only() {
    let escape = |args: &[&str]| stderr(&run(args)).contains('\u{1b}');
    assert!(!escape(&["fill", "no-such.xlsx"]));
    assert!(escape(&["fill", "no-such.xlsx", "--color", "always"]));
    assert!(escape(&["--color=always", "fill", "no-such.xlsx"]));
    assert!(!escape(&["fill", "no-such.xlsx", "--color", "never"]));
    assert!(escape(&["flil", "--color", "always"]), "errors of usage heed it too");
    let output = hence().args(["fill", "x.xlsx", "--color", "always"]).env("NO_COLOR", "1").output().unwrap();
    assert!(stderr(&output).contains('\u{1b}'), "--color comes before NO_COLOR");
    assert_eq!(code(&run(&["fill", "x.xlsx", "--color", "often"])), 2);
}

#[test]
fn slips_in_options_are_errors_of_usage() {
    for args in [
        &["fill", "x.xlsx", "--jsn"][..],
        &["curve", "--csw", "3%"],
        &["curve", "-x"],
        &["start"],
        &["check"],
        &["check", "a.xlsx", "b.xlsx"],
        &["curve", "3%", "--at", "1", "--to", "3"],
        &[],
    ] {
        let output = run(args);
        assert_eq!(code(&output), 2, "{args:?}");
        assert!(stdout(&output).is_empty(), "{args:?}");
    }
}

#[test]
fn a_file_may_begin_with_a_minus_sign_and_a_digit() {
    let book = plan(&[]);
    std::fs::rename(&book.path, book.beside("-1.xlsx")).unwrap();
    let within = |args: &[&str]| hence().args(args).current_dir(book.beside("")).output().unwrap();
    let output = within(&["fill", "-1.xlsx"]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    assert_eq!(code(&within(&["check", "-1.audited.xlsx"])), 0);
}

#[cfg(target_os = "linux")]
#[test]
fn a_full_disk_is_told() {
    let full = std::fs::OpenOptions::new().write(true).open("/dev/full").unwrap();
    let output =
        hence().args(["curve", "3.5%"]).stdout(full).stderr(std::process::Stdio::piped()).output().unwrap();
    assert_eq!(code(&output), 2);
    assert!(stderr(&output).contains("standard output cannot be written"), "{}", stderr(&output));
}
