//! hence.bas in LibreOffice Basic, which reads most of the language of Excel's macros: the module compiles, and its
//! functions for texts do what they say. Its declarations are not called: they are for Windows.

use std::path::PathBuf;
use std::process::Command;

use super::macros::module;
use crate::root;
use crate::wine::{not_run, said};

/// A Python with LibreOffice's own package.
fn python() -> Option<PathBuf> {
    let has_uno = |python: &PathBuf| {
        Command::new(python).args(["-c", "import uno"]).output().is_ok_and(|output| output.status.success())
    };
    let found = ["python3", "/usr/bin/python3"].map(PathBuf::from).into_iter().find(has_uno);
    if found.is_none() || Command::new("soffice").arg("--version").output().is_err() {
        not_run("LibreOffice or its package for Python (python3-uno) is not installed");
        return None;
    }
    found
}

/// What the function Check gives, at the end of a module; empty where it does not compile.
fn check(python: &PathBuf, module: &str) -> String {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let file = folder.path().join("module.bas");
    std::fs::write(&file, module).expect("a temporary file");
    let mut command = Command::new("timeout");
    command
        .args(["--kill-after=10", "120"])
        .arg(python)
        .arg(root().join("tests/addin/excel/basic.py"))
        .arg(file);
    let output = command.output().expect("timeout (coreutils) runs");
    assert!(output.status.success(), "{}", said(&output));
    String::from_utf8(output.stdout).expect("text")
}

/// The module as LibreOffice imports it, with a function at its end.
fn with(function: &str) -> String {
    let module = module().replace("\r\n", "\n");
    let (attribute, rest) = module.split_once('\n').expect("lines");
    assert_eq!(attribute, "Attribute VB_Name = \"HenceLibrary\"");
    format!("Option VBASupport 1\n{rest}\n{function}")
}

#[test]
fn the_module_compiles_and_texts_go_both_ways() {
    let Some(python) = python() else { return };
    let texts: Vec<Vec<u16>> = ["", "3.5%", "é", "\u{7f}\u{80}\u{7ff}\u{800}\u{ffff}", "貼現 𝄞\u{10ffff}!"]
        .iter()
        .map(|text| text.encode_utf16().collect())
        .chain([vec![0xd834, 0x78], vec![0xdd1e, 0x79], vec![0x7a, 0xd834], vec![0xd834, 0xd834, 0xdd1e]])
        .collect();
    let mut function = String::from(
        "Public Function Check() As String\nDim bytes() As Byte, text As String, found As String, i As Long\n",
    );
    for text in &texts {
        let units: String = text.iter().map(|unit| format!(" & ChrW(&H{unit:X}&)")).collect();
        function.push_str(&format!("text = \"\"{units}\nHenceBytes text, bytes\n"));
        function.push_str("For i = LBound(bytes) To UBound(bytes)\n");
        function.push_str("found = found & Right(\"0\" & Hex(bytes(i)), 2)\nNext\n");
        function.push_str("found = found & \" \" & (HenceText(bytes) = text) & \";\"\n");
    }
    function.push_str("Check = found & HENCE_ERR_INTERNAL\nEnd Function\n");
    let expected: String = texts
        .iter()
        .map(|text| {
            let hexadecimal: String =
                String::from_utf16_lossy(text).bytes().map(|byte| format!("{byte:02X}")).collect();
            let same = if String::from_utf16(text).is_ok() { "True" } else { "False" };
            format!("{hexadecimal}00 {same};")
        })
        .collect();
    assert_eq!(check(&python, &with(&function)), expected + "90");
}

/// What does not compile is found out, so that the test above can fail: a constant called as a function, capitals apart.
#[test]
fn a_module_that_does_not_compile_gives_nothing() {
    let Some(python) = python() else { return };
    let check_only = "Public Function Check() As String\nCheck = \"compiled\"\nEnd Function\n";
    assert_eq!(check(&python, &with(check_only)), "compiled");
    let twice = with(check_only).replace("Const HENCE_OK ", "Const HENCE_FACTORS ");
    assert_eq!(check(&python, &twice), "");
}
