//! The command line for Windows, under Wine: a fill gives what it gives here.

#[path = "../wine.rs"]
mod wine;

use std::path::{Path, PathBuf};

use hence_workbook::package::Package;

use crate::{hence, stderr, stdout};
use wine::{Windows, said, script, target};

const BOOK: &str = "mine-drainage.xlsx";
const AUDITED: &str = "mine-drainage.audited.xlsx";

/// The parts of a package by name.
fn parts(file: &Path) -> Vec<(String, String)> {
    let package = Package::open(file).expect("a workbook");
    let text = |name: &str| {
        let bytes = package.part(name).expect("it can be read").expect("it is there");
        String::from_utf8(bytes).expect("a part is text")
    };
    package.parts().map(|name| (name.to_owned(), text(name))).collect()
}

/// The cells of a part that differ.
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

/// The sample in an empty folder of that name.
fn folder_with_book(folder: PathBuf) -> PathBuf {
    let _ = std::fs::remove_dir_all(&folder);
    std::fs::create_dir_all(&folder).expect("a temporary folder");
    let sample = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../samples").join(BOOK);
    std::fs::copy(sample, folder.join(BOOK)).expect("the sample");
    folder
}

/// The same report, the same parts, and the same bytes in all but the audit's second route: that is plain arithmetic
/// with the machine's own powers, whose last digit differs between machines. There, results agree to 1e-13.
#[test]
fn a_fill_on_windows_is_a_fill_here() {
    let Some(windows) = Windows::new() else { return };
    if script("build.sh", &["exe"]).is_none() {
        return;
    }
    for file in ["hence.exe", "drop-workbooks-here.cmd"] {
        std::fs::copy(target().join("addin").join(file), windows.folder().join(file)).expect("it was built");
    }
    let here = folder_with_book(windows.folder().join("filled here"));
    let there = folder_with_book(windows.folder().join("dropped there"));
    let expected = hence().current_dir(&here).arg(BOOK).output().expect("the program starts");
    assert!(expected.status.success(), "{}", stderr(&expected));

    // As a workbook is dropped: its whole path is handed over, blanks and all.
    let dropped = format!("Z:{}", there.join(BOOK).display()).replace('/', "\\");
    let found = windows.run("cmd", &["/c", "drop-workbooks-here.cmd", &dropped]);
    let report = said(&found);
    assert!(found.status.success(), "{report}");
    let expected = stdout(&expected);
    assert!(expected.contains("Verdict: arithmetic agrees with the declared basis."), "{expected}");
    // The first line names the file as it was given.
    for line in expected.lines().skip(1) {
        assert!(report.contains(line), "{line:?} in {report}");
    }

    let (here, there) = (parts(&here.join(AUDITED)), parts(&there.join(AUDITED)));
    assert!(here.len() > 10 && here.len() == there.len(), "{} and {} parts", here.len(), there.len());
    let mut cells = Vec::new();
    for ((name, text), (other, found)) in here.iter().zip(&there) {
        assert_eq!(name, other);
        if name.ends_with("record.json") {
            // Its seal is a hash of all the other bytes.
            let record = |text: &str| {
                serde_json::from_str::<serde_json::Value>(text).expect("a record")["record"].clone()
            };
            assert!(record(text)["report"].is_object());
            assert_eq!(record(text), record(found));
            continue;
        }
        cells.extend(differing(text, found));
    }
    assert!(cells.len() <= 60, "{cells:?}");
    for (here, there) in cells {
        let ((here, rest), (there, rest_there)) = (result(here), result(there));
        assert_eq!(rest, rest_there);
        // What is left of a subtraction that ends at nothing has no digits to agree in.
        let nothing = here.abs().max(there.abs()) < 1e-6;
        let near = (here - there).abs() <= 1e-13 * here.abs();
        assert!(near || nothing, "{here} here, {there} on Windows: {rest}");
    }
}
