//! Wrong add-ins: the stand-in host must find each of them out, and a panic must end in `#VALUE!`.
//!
//! Each is the add-in's own source with one passage replaced, built beside the real one; what is shipped holds no switch
//! for any of it.

use std::path::{Path, PathBuf};

use super::{cases, host};
use crate::root;
use crate::wine::{self, Windows, said};

/// A passage of a file, which must be there once, and what stands there instead.
struct Change {
    file: &'static str,
    from: &'static str,
    to: &'static str,
}

const PANIC: Change = Change {
    file: "procedures.rs",
    from: "let arguments: Vec<Option<Range<'_>>> =",
    to: "assert!(arguments.is_empty(), \"forced\");\n        let arguments: Vec<Option<Range<'_>>> =",
};

/// Calls what the guard runs, without the guard.
const UNGUARDED: Change = Change {
    file: "procedures.rs",
    from: "let answered = catch_unwind(AssertUnwindSafe(|| {",
    to: "let bare = |body: &dyn Fn() -> Answer| std::thread::Result::Ok(body());\n    let answered = bare(&(|| {",
};

/// What is wrong, how, and a word that the host must say.
const WRONG: &[(&str, Change, &str)] = &[
    (
        "the kind of a text result",
        Change {
            file: "answer.rs",
            from: "Xloper12::text(std::ptr::null())",
            to: "Xloper12 { kind: kind::INTEGER, ..Xloper12::text(std::ptr::null()) }",
        },
        "got      [type 4800]",
    ),
    (
        "a text counted in bytes",
        Change { file: "answer.rs", from: "text.encode_utf16().count()", to: "text.len()" },
        "HENCE.EXPLAIN",
    ),
    (
        "nothing asks for freeing",
        Change {
            file: "answer.rs",
            from: "self.value.kind |= kind::ADDIN_FREES;",
            to: "self.value.kind |= 0;",
        },
        "a result that nobody frees",
    ),
    (
        "nothing is freed",
        Change { file: "lifecycle.rs", from: "unsafe { answer::free(value) }", to: "let _ = value;" },
        "results are still counted",
    ),
    (
        "results are counted back but kept",
        Change {
            file: "answer.rs",
            from: "drop(unsafe { Box::from_raw(pointer.cast::<Answer>()) });",
            to: "std::mem::forget(unsafe { Box::from_raw(pointer.cast::<Answer>()) });",
        },
        "blocks in use before the calls",
    ),
    (
        "rows and columns of a result",
        Change {
            file: "answer.rs",
            from: "rows: rows as i32, columns: columns as i32",
            to: "rows: columns as i32, columns: rows as i32",
        },
        "HENCE.FACTOR",
    ),
    (
        "rows and columns of an argument",
        Change {
            file: "arguments.rs",
            from: "Range::new(rows, columns, cells)",
            to: "Range::new(columns, rows, cells)",
        },
        "HENCE.VALUE",
    ),
    (
        "one unit too many of a text",
        Change {
            file: "arguments.rs",
            from: "from_raw_parts(text.add(1), count)",
            to: "from_raw_parts(text.add(1), count + 1)",
        },
        "HENCE.SCHEDULE",
    ),
    (
        "an error's number",
        Change { file: "xloper.rs", from: "NOT_AVAILABLE: i32 = 42", to: "NOT_AVAILABLE: i32 = 41" },
        "error 41",
    ),
    (
        "a logical taken for a number",
        Change {
            file: "arguments.rs",
            from: "Cell::Logical(unsafe { content.logical } != 0)",
            to: "Cell::Number(f64::from(unsafe { content.logical }))",
        },
        "HENCE.FACTOR",
    ),
    (
        "functions for one thread only",
        Change { file: "registration.rs", from: "\"{}$\"", to: "\"{}\"" },
        "types QQQQQ",
    ),
    (
        "the last help is not padded",
        Change { file: "registration.rs", from: "last.push_str(\"  \");", to: "last.push_str(\"\");" },
        "of the registration is another",
    ),
    (
        "the host's text is kept",
        Change { file: "registration.rs", from: "host.free(&module);", to: "" },
        "texts of the host's were not given back",
    ),
    (
        "registrations are left behind",
        Change {
            file: "lifecycle.rs",
            from: "unregister(host, &numbers);",
            to: "let _ = (host, unregister);",
        },
        "is left behind",
    ),
    (
        "a function calls the host",
        Change {
            file: "procedures.rs",
            from: "match Function::find(function) {",
            to: "crate::host::Host::find().map(|host| host.call(0x4009, &[]));\n        match Function::find(function) {",
        },
        "called from within a worksheet function",
    ),
];

/// The add-in's own source with changes, built into the folder under the name given.
fn build(windows: &Windows, name: &str, changes: &[&Change]) -> bool {
    let folder = Path::new(env!("CARGO_TARGET_TMPDIR")).join("mutant");
    let source = root().join("ffi/addin/excel/src");
    std::fs::create_dir_all(folder.join("src")).expect("a temporary folder");
    for file in std::fs::read_dir(&source).expect("the add-in's source") {
        let file = file.expect("a file").path();
        let mut text = std::fs::read_to_string(&file).expect("Rust source");
        for change in changes.iter().filter(|change| file.ends_with(change.file)) {
            assert_eq!(text.matches(change.from).count(), 1, "{}: {}", change.file, change.from);
            text = text.replace(change.from, change.to);
        }
        write(folder.join("src").join(file.file_name().expect("a file")), &text);
    }
    let library = root().join("ffi").canonicalize().expect("the C interface");
    write(folder.join("Cargo.toml"), &MANIFEST.replace("LIBRARY", &library.display().to_string()));
    let lock = std::fs::read_to_string(root().join("Cargo.lock")).expect("Cargo.lock");
    if !folder.join("Cargo.lock").exists() {
        write(folder.join("Cargo.lock"), &lock);
    }
    let manifest = folder.join("Cargo.toml").display().to_string();
    let built = wine::script("cross.sh", &["build", "--release", "--offline", "--manifest-path", &manifest]);
    let made = wine::target().join("cross/x86_64-pc-windows-gnu/release/hence_mutant.dll");
    built.is_some() && std::fs::copy(made, windows.folder().join(name)).is_ok()
}

/// Writes a file unless it holds the text already, so that cargo builds only what changed.
fn write(path: PathBuf, text: &str) {
    if std::fs::read_to_string(&path).is_ok_and(|held| held == text) {
        return;
    }
    std::fs::write(&path, text).expect("a temporary file");
}

const MANIFEST: &str = r#"[package]
name = "hence-mutant"
version = "0.1.0"
edition = "2024"

[lib]
name = "hence_mutant"
path = "src/lib.rs"
crate-type = ["cdylib"]

[dependencies]
hence-ffi = { path = "LIBRARY" }

[workspace]
"#;

/// Every wrong add-in is found out, each for its own fault; and where the library panics, every function gives
/// `#VALUE!`, from several threads too, and keeps nothing.
#[test]
fn wrong_addins_are_found_out_and_a_panic_is_an_error_value() {
    let Some(windows) = Windows::new() else { return };
    let cases = cases::all();
    let mut missed = Vec::new();
    for (i, (what, change, word)) in WRONG.iter().enumerate() {
        let name = format!("wrong{i}.xll");
        if !build(windows, &name, &[change]) {
            return;
        }
        let output = host(windows, &name, &cases, 2, 5_000);
        let said = said(&output);
        if output.status.code() != Some(1) || !said.contains(word) {
            missed.push(format!("{what}: {}\n{said}", output.status));
        }
    }
    assert!(missed.is_empty(), "{}", missed.join("\n"));

    // Each would have another result than `#VALUE!`.
    let panics = [
        cases::case("FACTOR", &[cases::n(1.0), cases::n(1.0)], "e:15"),
        cases::case("REAL", &[cases::n(0.06), cases::n(0.02)], "e:15"),
        cases::case("SCHEDULE", &[cases::s("uk-2003")], "e:15"),
    ]
    .concat();
    assert!(build(windows, "panic.xll", &[&PANIC]), "as the others");
    let output = host(windows, "panic.xll", &panics, 2, 5_000);
    assert!(output.status.success() && said(&output).contains("forced"), "{}", said(&output));
    // Without the guard the host does not live to tell.
    assert!(build(windows, "unguarded.xll", &[&PANIC, &UNGUARDED]), "as the others");
    let output = host(windows, "unguarded.xll", &panics, 2, 5_000);
    assert!(!output.status.success() && said(&output).contains("forced"), "{}", said(&output));
}
