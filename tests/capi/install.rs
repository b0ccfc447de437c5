//! The installed library: what is put where, and a program built with what its pkg-config file says.

use std::path::Path;
use std::process::Command;

use crate::library::{has, root, said};

const PROGRAM: &str = "#include <hence.h>
#include <stdio.h>
int main(void) {
  hence_basis *basis = NULL;
  hence_error error = {sizeof error, 0, 0, 0, {0}};
  double offset = 1.0, factor = 0.0;
  if (hence_abi_version() != HENCE_ABI_VERSION) return 2;
  if (hence_basis_parse(\"100%\", &basis, &error) || hence_factors(basis, &offset, 1, &factor, &error)) return 1;
  printf(\"%.17g\\n\", factor);
  hence_basis_free(basis);
  return 0;
}
";

fn words(command: &mut Command) -> Vec<String> {
    let output = command.output().expect("the program runs");
    assert!(output.status.success(), "{command:?}: {}", said(&output));
    String::from_utf8_lossy(&output.stdout).split_whitespace().map(str::to_owned).collect()
}

#[test]
fn an_installed_library_is_found_linked_and_run() {
    if !has("pkg-config") {
        return;
    }
    let folder = tempfile::tempdir().expect("a temporary folder");
    let staged = folder.path().join("staged");
    let install = |arguments: &[&str]| {
        let mut command = Command::new("bash");
        command.arg(root().join("ffi/install.sh")).args(arguments).env("DESTDIR", &staged);
        command.output().expect("bash runs")
    };
    let output = install(&["--prefix", "/opt/hence"]);
    assert!(output.status.success(), "{}", said(&output));
    let lib = staged.join("opt/hence/lib");
    let abi = hence::HENCE_ABI_VERSION;
    let versioned = format!("libhence.so.{abi}");
    for file in ["libhence.so", &versioned, "libhence.a", "pkgconfig/hence.pc", "../include/hence.h"] {
        assert!(lib.join(file).is_file(), "{file} is missing");
    }
    assert_eq!(std::fs::read_link(lib.join("libhence.so")).expect("a link"), Path::new(&versioned));

    let config = || {
        let mut command = Command::new("pkg-config");
        command.env("PKG_CONFIG_PATH", lib.join("pkgconfig")).env("PKG_CONFIG_SYSROOT_DIR", &staged);
        command
    };
    assert_eq!(words(config().args(["--modversion", "hence"])), [env!("CARGO_PKG_VERSION")]);
    let source = folder.path().join("program.c");
    std::fs::write(&source, PROGRAM).expect("the source is writable");
    let build = |name: &str, flags: Vec<String>, with: &[String]| {
        let built = folder.path().join(name);
        let mut compiler = Command::new("cc");
        words(compiler.arg(&source).arg("-o").arg(&built).args(flags).args(with));
        built
    };
    let shared = build("shared", words(config().args(["--cflags", "--libs", "hence"])), &[]);
    assert_eq!(words(Command::new(&shared).env("LD_LIBRARY_PATH", &lib)), ["0.5"]);
    // A program asks for the interface that it was built for, by its number.
    let needed = words(Command::new("readelf").arg("-d").arg(&shared)).join(" ");
    assert!(needed.contains(&format!("[{versioned}]")), "{needed}");

    // Statically: the archive instead of the library, and what it needs.
    let all = words(config().args(["--static", "--libs", "hence"]));
    let rest: Vec<String> =
        all.into_iter().filter(|flag| flag != "-lhence" && !flag.starts_with("-L")).collect();
    let archive = lib.join("libhence.a").to_str().expect("a path in UTF-8").to_owned();
    let fixed = build("static", words(config().args(["--cflags", "hence"])), &[vec![archive], rest].concat());
    assert_eq!(words(&mut Command::new(&fixed)), ["0.5"]);

    for wrong in [&["--where", "/opt"][..], &["--prefix"], &["--prefix", "relative"]] {
        let output = install(wrong);
        assert_eq!(output.status.code(), Some(2), "{wrong:?}: {}", said(&output));
        assert!(said(&output).starts_with("install: "), "{}", said(&output));
    }
}
