//! What the shared library exports: the functions of the header, and nothing else.

use std::collections::BTreeSet;
use std::process::Command;

use crate::library;

/// The functions that the header declares.
fn declared() -> BTreeSet<String> {
    let header = std::fs::read_to_string(library::root().join("include/hence.h")).expect("include/hence.h");
    let code: String =
        header.lines().filter(|line| !line.trim_start().starts_with("//")).collect::<Vec<_>>().join("\n");
    let words = code.split(|c: char| !(c.is_ascii_alphanumeric() || c == '_' || c == '(')).map(str::to_owned);
    words
        .filter_map(|word| word.strip_suffix('(').or(word.split_once('(').map(|w| w.0)).map(str::to_owned))
        .filter(|name| name.starts_with("hence_"))
        .collect()
}

#[test]
fn the_library_exports_what_the_header_declares() {
    if !library::has("nm") {
        return;
    }
    let file = library::folder().join("libhence.so");
    let output = Command::new("nm").args(["-D", "--defined-only"]).arg(&file).output().expect("nm runs");
    assert!(output.status.success(), "{}", library::said(&output));
    let listed = String::from_utf8(output.stdout).expect("nm prints text");
    let exported: BTreeSet<String> =
        listed.lines().filter_map(|line| line.split_whitespace().nth(2)).map(str::to_owned).collect();
    assert_eq!(exported, declared());
    assert!(exported.len() >= 45, "{} functions", exported.len());
}
