//! The header: that of the source, and compiled alone by C and C++ compilers.

use std::process::Command;

use crate::library::{self, root};

fn generated() -> String {
    let config = cbindgen::Config::from_file(root().join("ffi/cbindgen.toml")).expect("ffi/cbindgen.toml");
    let mut text = Vec::new();
    cbindgen::Builder::new()
        .with_config(config)
        .with_crate(root().join("ffi"))
        .generate()
        .expect("cbindgen reads the crate")
        .write(&mut text);
    String::from_utf8(text).expect("a header is text")
}

/// `HENCE_ACCEPT=1` writes the new header and fails on purpose, so that an accepting run is never taken for a passing one.
#[test]
fn the_header_is_that_of_the_source() {
    let path = root().join("include/hence.h");
    let held = std::fs::read_to_string(&path).unwrap_or_default();
    let made = generated();
    if std::env::var_os("HENCE_ACCEPT").is_some() {
        std::fs::write(&path, &made).expect("include/hence.h is writable");
        panic!("include/hence.h was accepted: look at the difference, then run again without HENCE_ACCEPT");
    }
    assert!(held == made, "include/hence.h differs from the source: run once with HENCE_ACCEPT=1 and look");
}

/// Compiled alone and twice, pedantic warnings as errors.
#[test]
fn the_header_compiles_as_c_and_cpp() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    for (compiler, standard, file) in [("cc", "c99", "t.c"), ("cc", "c11", "t.c"), ("c++", "c++17", "t.cc")] {
        if !library::has(compiler) {
            continue;
        }
        let source = folder.path().join(file);
        let text = "#include \"hence.h\"\n#include \"hence.h\"\n\
                    int main(void) { return hence_abi_version() == HENCE_ABI_VERSION ? 0 : 1; }\n";
        std::fs::write(&source, text).expect("the source is writable");
        let output = Command::new(compiler)
            .arg(format!("-std={standard}"))
            .args(["-Wall", "-Wextra", "-Werror", "-pedantic", "-c", "-o"])
            .arg(folder.path().join("t.o"))
            .arg("-I")
            .arg(root().join("include"))
            .arg(&source)
            .output()
            .expect("the C compiler runs");
        assert!(output.status.success(), "{standard}: {}", String::from_utf8_lossy(&output.stderr));
    }
}

/// Each function says what its parameters are, what comes back and which threads may call it, or which function it is like.
#[test]
fn every_parameter_is_documented() {
    let header = std::fs::read_to_string(root().join("include/hence.h")).expect("include/hence.h");
    let mut functions = 0;
    for block in header.split("\n\n").filter(|block| block.trim_end().ends_with(");")) {
        let is_comment = |line: &&str| line.starts_with("//");
        let comment = block.lines().filter(is_comment).collect::<Vec<_>>().join(" ").replace(" //", "");
        let code = block.lines().filter(|line| !is_comment(line)).collect::<Vec<_>>().join(" ");
        let (declared, parameters) = code.split_once('(').expect("a function");
        let name = declared.rsplit([' ', '*']).next().expect("a name");
        functions += 1;
        let like = comment.contains(" as hence_") || comment.contains(" as for hence_");
        assert!(
            comment.contains("Threads: ") || (like && comment.contains("threads as ")),
            "{name}: threads"
        );
        let parameters = parameters.trim_end_matches(");").split(',');
        let names: Vec<&str> = parameters.filter_map(|one| one.rsplit([' ', '*']).next()).collect();
        // The frees, and functions of none or one number, say all in a sentence.
        if names.len() < 2 {
            continue;
        }
        assert!(comment.contains("Returns ") || (like && comment.contains("statuses ")), "{name}: statuses");
        for parameter in names {
            assert!(like || comment.contains(&format!("`{parameter}`")), "{name}: {parameter}");
        }
    }
    assert!(functions >= 45, "{functions} functions");
}
