//! The abuse table in C: run plainly, under AddressSanitizer and UndefinedBehaviorSanitizer, and under valgrind.

use std::path::{Path, PathBuf};
use std::process::Command;

use crate::library::{compile, has, root, run, said};

/// The number of checks that a run made.
fn checks(printed: &str) -> u32 {
    let number = printed.strip_suffix(" checks\n").and_then(|number| number.parse().ok());
    number.unwrap_or_else(|| panic!("found {printed:?}"))
}

#[test]
fn every_abuse_has_its_answer() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let program = compile("abuse.c", folder.path(), &["-O1"]);
    let program = program.to_str().expect("a path in UTF-8");
    let made = checks(&run(&[program], &[]));
    assert!(made > 5000, "{made} checks");
    println!("{made} checks");
    if has("valgrind") {
        let line = [
            "valgrind",
            "-q",
            "--leak-check=full",
            "--show-leak-kinds=all",
            "--errors-for-leak-kinds=definite,indirect,possible",
            "--error-exitcode=9",
            program,
        ];
        assert_eq!(checks(&run(&line, &[])), made);
    }
}

/// With room for a quarter of the results.
#[test]
fn memory_that_runs_out_is_a_status() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let program = compile("memory.c", folder.path(), &["-O1"]);
    assert_eq!(run(&[program.to_str().expect("a path in UTF-8")], &[]), "done\n");
}

/// The C side is instrumented.
#[test]
fn the_sanitizers_find_nothing_in_the_calls() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let flags =
        ["-O1", "-fsanitize=address,undefined", "-fno-sanitize=alignment", "-fno-sanitize-recover=all"];
    let program = compile("abuse.c", folder.path(), &flags);
    assert!(checks(&run(&[program.to_str().expect("a path in UTF-8")], &[])) > 5000);
}

/// The library itself is instrumented, by the runtime that comes with the Rust toolchain; a program that hands over an
/// array shorter than it says shows that the instrument works.
#[test]
fn the_address_sanitizer_finds_nothing_in_the_library() {
    let Some(runtime) = runtime() else {
        println!("this Rust toolchain brings no AddressSanitizer: the library did not run under it");
        return;
    };
    if !has("c++") {
        return;
    }
    let target = Path::new(env!("CARGO_TARGET_TMPDIR")).join("asan");
    let mut build = Command::new(env!("CARGO"));
    build.current_dir(root()).args(["build", "--locked", "-p", "hence-ffi", "--lib", "--target", TRIPLE]);
    build
        .arg("--target-dir")
        .arg(&target)
        .env("RUSTC_BOOTSTRAP", "1")
        .env("RUSTFLAGS", "-Zsanitizer=address");
    let output = build.output().expect("cargo runs");
    assert!(output.status.success(), "{}", said(&output));

    let folder = tempfile::tempdir().expect("a temporary folder");
    let linked = |source: &Path| {
        let program = folder.path().join(source.file_stem().expect("a name"));
        let mut compiler = Command::new("cc");
        compiler.args(["-std=c11", "-g", "-O1", "-I"]).arg(root().join("include")).arg("-o").arg(&program);
        compiler.arg(source).arg(target.join(TRIPLE).join("debug/libhence.a"));
        compiler.arg("-Wl,--whole-archive").arg(&runtime).arg("-Wl,--no-whole-archive");
        compiler.args(["-lstdc++", "-lgcc_s", "-lutil", "-lrt", "-lpthread", "-lm", "-ldl", "-rdynamic"]);
        let output = compiler.output().expect("the C compiler runs");
        assert!(output.status.success(), "{}", said(&output));
        program
    };
    let program = linked(&root().join("tests/capi/c/abuse.c"));
    assert!(checks(&run(&[program.to_str().expect("a path in UTF-8")], &[])) > 5000);
    let output = Command::new(linked(&root().join("tests/capi/c/short_array.c"))).output().expect("it runs");
    assert!(!output.status.success(), "an array too short went unseen");
    assert!(said(&output).contains("heap-buffer-overflow"), "{}", said(&output));
}

const TRIPLE: &str = "x86_64-unknown-linux-gnu";

/// The AddressSanitizer of the Rust toolchain.
fn runtime() -> Option<PathBuf> {
    let output = Command::new("rustc").args(["--print", "sysroot"]).output().ok()?;
    let sysroot = PathBuf::from(String::from_utf8_lossy(&output.stdout).trim());
    let folder = sysroot.join("lib/rustlib").join(TRIPLE).join("lib");
    let runtime = folder.join("librustc-stable_rt.asan.a");
    runtime.is_file().then_some(runtime)
}
