//! The README's C program and the lines that build it, run as they stand.

use std::process::Command;

use crate::library::{folder, root, said};

/// The fenced block of a kind, in the README's section on C.
fn block(readme: &str, kind: &str) -> String {
    let section = readme.split("\n## From C and other languages\n").nth(1).expect("the section");
    let section = section.split("\n## ").next().expect("its text");
    let block = section.split(&format!("```{kind}\n")).nth(1).expect("a block").split("```").next();
    block.expect("its end").to_owned()
}

#[test]
fn the_program_runs_as_the_readme_says() {
    let readme = std::fs::read_to_string(root().join("README.md")).expect("README.md");
    let here = tempfile::tempdir().expect("a temporary folder");
    std::fs::write(here.path().join("example.c"), block(&readme, "c")).expect("the program is writable");
    std::os::unix::fs::symlink(root().join("include"), here.path().join("include")).expect("a link");
    std::fs::create_dir(here.path().join("target")).expect("a folder");
    std::os::unix::fs::symlink(folder(), here.path().join("target/release")).expect("a link");
    let lines = block(&readme, "sh");
    let (build, rest) = lines.split_once('\n').expect("two lines");
    // What `folder` has built.
    assert_eq!(build, "cargo build --release -p hence-ffi");
    let output = Command::new("sh").args(["-ec", rest]).current_dir(here.path()).output().expect("sh runs");
    assert!(output.status.success(), "{}", said(&output));
    // 1.035^-1, 1.035^-2, and 1.035^-30 x 1.03^-70 by hand.
    let far = 1.035f64.powi(-30) * 1.03f64.powi(-70);
    let due = format!("0 1.000000\n1 {:.6}\n2 {:.6}\n100 {far:.6}\n", 1.0 / 1.035, 1.0 / 1.035 / 1.035);
    assert_eq!(said(&output), due);
}
