//! The abuse table in C: run plainly, under AddressSanitizer and UndefinedBehaviorSanitizer, and under valgrind.

use crate::library::{compile, has, run};

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

/// The C side is instrumented, and every access of the library to its memory through libc's functions; what the library
/// itself is compiled to is not.
#[test]
fn the_sanitizers_find_nothing() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let flags =
        ["-O1", "-fsanitize=address,undefined", "-fno-sanitize=alignment", "-fno-sanitize-recover=all"];
    let program = compile("abuse.c", folder.path(), &flags);
    let options =
        [("ASAN_OPTIONS", "detect_leaks=1:abort_on_error=0"), ("UBSAN_OPTIONS", "print_stacktrace=1")];
    assert!(checks(&run(&[program.to_str().expect("a path in UTF-8")], &options)) > 5000);
}
