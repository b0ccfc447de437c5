//! The Excel add-in against a stand-in host, a C program under Wine. It was never tried in Excel itself.
//!
//! The host declares Excel's interface on its own (`excel/values.h`), so that a slip in the add-in's declarations shows.
//! Which results are due comes from the library called here; a few are worked out by hand.

mod basic;
mod cases;
mod header;
mod macros;
mod mutants;

use std::collections::BTreeSet;
use std::path::{Path, PathBuf};
use std::process::{Command, Output};
use std::sync::OnceLock;

use hence::worksheet::{CATEGORY, FUNCTIONS};

use crate::root;
use crate::wine::{self, Windows, said};

/// The add-in, built with the project's own script; none where a tool for that is missing.
fn xll() -> Option<&'static Path> {
    static ONCE: OnceLock<Option<PathBuf>> = OnceLock::new();
    let built = ONCE.get_or_init(|| {
        wine::script("build.sh", &["excel"])?;
        Some(wine::target().join("addin/hence64.xll"))
    });
    built.as_deref()
}

/// What must be registered for each function, from the table and the host's documentation: the procedure, a `Q` for the
/// result and each argument with a `$` for any thread, the name, the arguments' names, 1 for a worksheet function, the
/// category, no shortcut, no help topic, the help, and a help for each argument, the last with two spaces to lose.
fn registrations() -> String {
    let mut lines = String::new();
    for function in FUNCTIONS {
        let names: Vec<&str> = function.arguments.iter().map(|argument| argument.name).collect();
        let mut fields = vec![
            cases::text_text(&format!("hence_xll_{}", function.name.to_lowercase())),
            cases::text_text(&format!("Q{}$", "Q".repeat(names.len()))),
            cases::text_text(&format!("HENCE.{}", function.name)),
            cases::text_text(&names.join(",")),
            "i:1".to_owned(),
        ];
        fields.extend([CATEGORY, "", "", function.help].map(cases::text_text));
        fields.extend(function.arguments.iter().map(|argument| cases::text_text(argument.help)));
        let last = fields.last_mut().expect("a function has arguments");
        last.push_str("00200020");
        lines.push_str(&(fields.join(" ") + "\n"));
    }
    lines
}

/// Runs the stand-in host over an add-in in the folder.
fn host(windows: &Windows, xll: &str, cases: &str, threads: u32, calls: u32) -> Output {
    let folder = windows.folder();
    let (registered, called) = (format!("{xll}.registrations"), format!("{xll}.cases"));
    std::fs::write(folder.join(&registered), registrations()).expect("a temporary file");
    std::fs::write(folder.join(&called), cases).expect("a temporary file");
    let host = format!("{xll}.host.exe");
    windows.compile(&["host.c", "entry.c", "values.c"], &host, &["-Wno-cast-function-type"]);
    windows.run(host, &[xll, &registered, &called, &threads.to_string(), &calls.to_string()])
}

/// Registrations, every case, from four threads, a million calls, and nothing kept.
#[test]
fn the_addin_in_a_stand_in_host() {
    let (Some(windows), Some(xll)) = (Windows::new(), xll()) else { return };
    std::fs::copy(xll, windows.folder().join("hence64.xll")).expect("the add-in was built");
    let cases = cases::all();
    let output = host(windows, "hence64.xll", &cases, 4, 1_000_000);
    let said = said(&output);
    assert!(output.status.success(), "{said}");
    for line in [
        format!("registered {}\r\n", FUNCTIONS.len()),
        format!("cases {}\r\n", cases.lines().count()),
        "threads 4\r\n".to_owned(),
        "calls 1000000,".to_owned(),
        "faults 0\r\n".to_owned(),
    ] {
        assert!(said.contains(&line), "{line:?} in {said}");
    }
}

/// The names exported are the host's four, one a function, the count of results and the C interface; the libraries
/// imported are part of Windows.
#[test]
fn what_the_library_exports_and_imports() {
    let Some(xll) = xll() else { return };
    let output =
        Command::new("x86_64-w64-mingw32-objdump").arg("-p").arg(xll).output().expect("objdump runs");
    let said = said(&output);
    let exported: BTreeSet<&str> = said
        .lines()
        .skip_while(|line| !line.contains("[Ordinal/Name Pointer] Table"))
        .skip(1)
        .map_while(|line| line.trim().strip_prefix('[')?.split_whitespace().last())
        .collect();
    let header = std::fs::read_to_string(root().join("include/hence.h")).expect("include/hence.h");
    let mut due: BTreeSet<String> = declared(&header);
    due.extend(["xlAutoOpen", "xlAutoClose", "xlAutoFree12", "xlAddInManagerInfo12"].map(str::to_owned));
    due.insert("hence_xll_live".to_owned());
    due.extend(FUNCTIONS.iter().map(|function| format!("hence_xll_{}", function.name.to_lowercase())));
    assert_eq!(exported, due.iter().map(String::as_str).collect());

    let windows =
        ["kernel32", "ntdll", "msvcrt", "bcryptprimitives", "userenv", "ws2_32", "advapi32", "shell32"];
    let imported: Vec<String> = said
        .lines()
        .filter_map(|line| line.trim().strip_prefix("DLL Name: "))
        .map(|name| name.to_lowercase().trim_end_matches(".dll").to_owned())
        .collect();
    assert!(imported.iter().any(|name| name == "kernel32"), "{said}");
    for name in imported {
        assert!(
            name.starts_with("api-ms-win-") || windows.contains(&name.as_str()),
            "{name}.dll is no part of Windows"
        );
    }
}

/// The functions that the header declares.
fn declared(header: &str) -> BTreeSet<String> {
    let code = header.lines().filter(|line| !line.trim_start().starts_with("//"));
    let words = code.flat_map(|line| line.split(|c: char| !c.is_alphanumeric() && c != '_' && c != '('));
    let functions = words.filter_map(|word| word.split_once('(')).map(|(name, _)| name.to_owned());
    functions.filter(|name| name.starts_with("hence_")).collect()
}
