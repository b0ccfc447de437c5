//! A real, headless LibreOffice: workbooks go in, and come back as it saves them after calculating.

use std::collections::BTreeMap;
use std::path::{Path, PathBuf};
use std::process::Command;

/// What LibreOffice computes anew when it opens a workbook.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Recalculate {
    /// Only formulas without a stored result: a new profile's setting.
    Missing,
    /// Every formula, whatever the file says.
    All,
}

/// How long one run may take, in seconds.
const PATIENCE: &str = "300";

/// The program, where it is installed. Says plainly that a test did not run without it, and fails the test where the
/// variable HENCE_REQUIRE_TOOLS is set.
pub fn soffice() -> Option<PathBuf> {
    let path = std::env::var_os("PATH").unwrap_or_default();
    let found = std::env::split_paths(&path).map(|folder| folder.join("soffice")).find(|file| file.is_file());
    if found.is_none() {
        let message =
            "LibreOffice (soffice) is not installed: nothing was recalculated, this test did not run";
        assert!(std::env::var_os("HENCE_REQUIRE_TOOLS").is_none(), "{message}");
        eprintln!("{message}");
    }
    found
}

/// Opens every workbook (by file name) in one run with a profile of its own, and returns each as .xlsx under its name.
pub fn saved(
    soffice: &Path,
    books: &[(String, Vec<u8>)],
    recalculate: Recalculate,
) -> BTreeMap<String, Vec<u8>> {
    saved_as(soffice, books, recalculate, "xlsx:Calc MS Excel 2007 XML")
}

/// The same in a format of LibreOffice's, by extension or `extension:filter`; each comes back under its .xlsx name.
pub fn saved_as(
    soffice: &Path,
    books: &[(String, Vec<u8>)],
    recalculate: Recalculate,
    format: &str,
) -> BTreeMap<String, Vec<u8>> {
    let extension = format.split(':').next().expect("an extension");
    let folder = tempfile::tempdir().expect("a temporary folder");
    let (input, output) = (folder.path().join("in"), folder.path().join("out"));
    let user = folder.path().join("profile").join("user");
    for path in [&input, &output, &user] {
        std::fs::create_dir_all(path).expect("a temporary folder");
    }
    if recalculate == Recalculate::All {
        std::fs::write(user.join("registrymodifications.xcu"), ALWAYS).expect("a settings file");
    }
    let mut command = Command::new("timeout");
    command
        .args(["--kill-after=10", PATIENCE])
        .arg(soffice)
        .arg(format!("-env:UserInstallation=file://{}", folder.path().join("profile").display()))
        .args(["--headless", "--norestore", "--convert-to", format, "--outdir"])
        .arg(&output);
    for (name, bytes) in books {
        assert!(name.ends_with(".xlsx"), "{name} would be renamed");
        std::fs::write(input.join(name), bytes).expect("a temporary file");
        command.arg(input.join(name));
    }
    let run = command.output().expect("timeout (coreutils) runs LibreOffice");
    let said = || String::from_utf8_lossy(&run.stderr).into_owned() + &String::from_utf8_lossy(&run.stdout);
    assert!(run.status.success(), "LibreOffice ended with {}: {}", run.status, said());
    let read = |(name, _): &(String, Vec<u8>)| {
        let bytes = std::fs::read(output.join(name).with_extension(extension));
        (name.clone(), bytes.unwrap_or_else(|_| panic!("LibreOffice did not open {name}: {}", said())))
    };
    books.iter().map(read).collect()
}

/// Tools, Options, Calc, Formula: "Recalculation on File Load, Excel 2007 and newer: Always recalculate".
const ALWAYS: &str = r#"<?xml version="1.0" encoding="UTF-8"?>
<oor:items xmlns:oor="http://openoffice.org/2001/registry">
<item oor:path="/org.openoffice.Office.Calc/Formula/Load"><prop oor:name="OOXMLRecalcMode" oor:op="fuse"><value>0</value></prop></item>
</oor:items>
"#;
