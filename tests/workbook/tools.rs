//! Programs that the tests ask for a second opinion: Python with its packages, the schemas, LibreOffice.
//!
//! What is absent is said and left out, unless HENCE_REQUIRE_TOOLS is set: then it is a failure.

use std::collections::{BTreeMap, BTreeSet};
use std::path::{Path, PathBuf};
use std::process::Command;

/// Says that something is absent; a failure where everything has to be there.
fn absent(what: &str) {
    assert!(std::env::var_os("HENCE_REQUIRE_TOOLS").is_none(), "{what} is needed");
    println!("{what} is not there: what needs it was not checked");
}

/// A Python that has the packages: the one of HENCE_PYTHON, else `python3`.
pub fn python(packages: &str) -> Option<PathBuf> {
    let python = PathBuf::from(std::env::var_os("HENCE_PYTHON").unwrap_or_else(|| "python3".into()));
    let works = Command::new(&python).args(["-c", &format!("import {packages}")]).output();
    if works.is_ok_and(|output| output.status.success()) {
        return Some(python);
    }
    absent(&format!("Python with {packages} (HENCE_PYTHON)"));
    None
}

/// The files that do not validate against the ISO/IEC 29500 schemas; none where that cannot be told.
///
/// HENCE_XSDVAL names a script that validates packages (with Python and lxml), HENCE_XSD the folder of the schemas.
pub fn invalid(files: &[PathBuf]) -> Option<BTreeMap<PathBuf, String>> {
    let (Some(script), Some(schemas)) = (std::env::var_os("HENCE_XSDVAL"), std::env::var_os("HENCE_XSD"))
    else {
        println!("HENCE_XSD and HENCE_XSDVAL are not set: nothing was validated");
        return None;
    };
    let mut run = Command::new(python("lxml")?);
    let output = run.arg(script).args(files).env("OOXML_XSD", schemas).output().ok()?;
    let text = String::from_utf8_lossy(&output.stdout).into_owned();
    let mut bad = BTreeMap::new();
    let (mut seen, mut open) = (0, None);
    for line in text.lines() {
        if line.starts_with("VALID") || line.starts_with("INVALID") {
            let file = files.get(seen).filter(|file| line.ends_with(&*file.to_string_lossy()));
            let file = file.unwrap_or_else(|| panic!("the validator answered {line}")).clone();
            seen += 1;
            open = line.starts_with("INVALID").then_some(file);
        }
        if let Some(file) = &open {
            *bad.entry(file.clone()).or_insert_with(String::new) += &format!("{line}\n");
        }
    }
    assert_eq!(seen, files.len(), "{}", String::from_utf8_lossy(&output.stderr));
    Some(bad)
}

/// Is there a LibreOffice?
pub fn libreoffice() -> bool {
    let found = Command::new("soffice").arg("--version").output().is_ok_and(|output| output.status.success());
    if !found {
        absent("LibreOffice (soffice)");
    }
    found
}

/// A LibreOffice of its own: it calculates every formula anew when it loads a file, whatever results are stored.
const CALCULATE_ALL: &str = r#"<?xml version="1.0" encoding="UTF-8"?>
<oor:items xmlns:oor="http://openoffice.org/2001/registry"><item oor:path="/org.openoffice.Office.Calc/Formula/Load"><prop
oor:name="OOXMLRecalcMode" oor:op="fuse"><value>0</value></prop></item></oor:items>
"#;

/// Loads files in LibreOffice, calculates everything and saves them as .xlsx in `to`: the files that came out.
///
/// One call converts all. A workbook that ends LibreOffice is left out and the rest goes through another call.
pub fn recalculated(files: &[PathBuf], to: &Path) -> BTreeSet<PathBuf> {
    let profile = tempfile::tempdir().expect("a folder for the profile");
    std::fs::create_dir_all(profile.path().join("user")).expect("the profile");
    std::fs::write(profile.path().join("user/registrymodifications.xcu"), CALCULATE_ALL)
        .expect("its settings");
    let made = |file: &PathBuf| to.join(file.with_extension("xlsx").file_name().expect("a file"));
    let mut left: Vec<PathBuf> = files.to_vec();
    let mut failed = BTreeSet::new();
    while !left.is_empty() {
        let mut run = Command::new("timeout");
        run.args(["300", "soffice"]);
        run.arg(format!("-env:UserInstallation=file://{}", profile.path().display()));
        run.args(["--headless", "--convert-to", "xlsx", "--outdir"]).arg(to).args(&left);
        run.output().expect("LibreOffice runs");
        left.retain(|file| !made(file).exists());
        if !left.is_empty() {
            failed.insert(left.remove(0));
        }
    }
    files.iter().filter(|file| !failed.contains(*file)).cloned().collect()
}
