//! The command line for Windows, under Wine: a fill gives what it gives here.

use std::path::Path;
use std::process::Command;

use crate::excel::wine::{Windows, said, script, target};
use crate::root;

const BOOK: &str = "mine-drainage.xlsx";
const AUDITED: &str = "mine-drainage.audited.xlsx";

/// The parts of a package, unpacked by Python, which needs no more than its own library: name and text of each.
fn parts(package: &Path) -> Vec<(String, String)> {
    let program = "import sys, zipfile\nfor part in zipfile.ZipFile(sys.argv[1]).infolist():\n    \
                   print(part.filename, zipfile.ZipFile(sys.argv[1]).read(part).hex())";
    let output = Command::new("python3").args(["-c", program]).arg(package).output().expect("python3 runs");
    assert!(output.status.success(), "{}", said(&output));
    let bytes = |hexadecimal: &str| {
        let pairs = hexadecimal.as_bytes().chunks(2).map(|pair| str::from_utf8(pair).expect("hexadecimal"));
        pairs.map(|pair| char::from(u8::from_str_radix(pair, 16).expect("hexadecimal"))).collect()
    };
    said(&output)
        .lines()
        .map(|line| line.rsplit_once(' ').expect("a name and bytes"))
        .map(|(name, text)| (name.to_owned(), bytes(text)))
        .collect()
}

/// The cells of a part that differ, as their reference and both texts with the stored result taken out.
fn differing<'a>(here: &'a str, there: &'a str) -> Vec<(&'a str, &'a str)> {
    let (here, there): (Vec<&str>, Vec<&str>) = (here.split("<c ").collect(), there.split("<c ").collect());
    assert_eq!(here.len(), there.len(), "as many cells");
    here.into_iter().zip(there).filter(|(a, b)| a != b).collect()
}

/// The stored result of a cell, and the rest of it.
fn result(cell: &str) -> (f64, String) {
    let (before, rest) = cell.split_once("<v>").expect("a stored result");
    let (result, after) = rest.split_once("</v>").expect("its end");
    (result.parse().expect("a number"), format!("{before}{after}"))
}

/// The same report, the same parts, and the same bytes in all but the audit's second route: that is plain arithmetic
/// with the machine's own powers, whose last digit differs between machines. There, results agree to 1e-15.
#[test]
fn a_fill_on_windows_is_a_fill_here() {
    let Some(windows) = Windows::new() else { return };
    if script("build.sh", &["exe"]).is_none() {
        return;
    }
    let built = Command::new(env!("CARGO"))
        .current_dir(root())
        .args(["build", "--locked", "--package", "hence-cli", "--target-dir"])
        .arg(target())
        .output()
        .expect("cargo runs");
    assert!(built.status.success(), "{}", said(&built));

    let here = tempfile::tempdir().expect("a temporary folder");
    let there = windows.folder().join("dropped here");
    std::fs::create_dir_all(&there).expect("a temporary folder");
    for folder in [here.path(), &there] {
        std::fs::copy(root().join("samples").join(BOOK), folder.join(BOOK)).expect("the sample");
    }
    for file in ["hence.exe", "drop-workbooks-here.cmd"] {
        std::fs::copy(target().join("addin").join(file), windows.folder().join(file)).expect("it was built");
    }
    let _ = std::fs::remove_file(there.join(AUDITED));
    let expected = Command::new(target().join("debug/hence"))
        .current_dir(here.path())
        .arg(BOOK)
        .output()
        .expect("hence runs");
    assert!(expected.status.success(), "{}", said(&expected));

    // As a workbook is dropped: the whole path is handed over, blanks and all.
    let dropped = format!("Z:{}", there.join(BOOK).display()).replace('/', "\\");
    let found = windows.run("cmd", &["/c", "drop-workbooks-here.cmd", &dropped]);
    let report = said(&found);
    assert!(found.status.success(), "{report}");
    let verdict = "Verdict: arithmetic agrees with the declared basis.";
    for line in String::from_utf8_lossy(&expected.stdout).lines().skip(1) {
        assert!(report.contains(line), "{line:?} in {report}");
    }
    assert!(report.contains(verdict), "{report}");

    let (here, there) = (parts(&here.path().join(AUDITED)), parts(&there.join(AUDITED)));
    assert!(here.len() > 10, "{} parts", here.len());
    let mut cells = Vec::new();
    for ((name, text), (other, found)) in here.iter().zip(&there) {
        assert_eq!(name, other);
        cells.extend(differing(text, found));
    }
    assert_eq!(here.len(), there.len());
    assert!(cells.len() <= 20, "{cells:?}");
    for (here, there) in cells {
        let ((here, rest), (there, rest_there)) = (result(here), result(there));
        assert_eq!(rest, rest_there);
        assert!((here - there).abs() <= 1e-15, "{here} here, {there} on Windows: {rest}");
    }
}
