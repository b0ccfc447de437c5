//! The release library, built once for the programs that are linked with it, and the tools that build them.

use std::path::{Path, PathBuf};
use std::process::{Command, Output};
use std::sync::OnceLock;

/// The top of the source tree.
pub fn root() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("..")
}

/// The folder that holds libhence.so and libhence.a, built as users build it.
pub fn folder() -> &'static Path {
    static FOLDER: OnceLock<PathBuf> = OnceLock::new();
    FOLDER.get_or_init(|| {
        let mut build = Command::new(env!("CARGO"));
        build.current_dir(root()).args(["build", "--release", "--locked", "-p", "hence-ffi"]);
        let output = build.output().expect("cargo runs");
        assert!(output.status.success(), "{}", said(&output));
        let target = std::env::var_os("CARGO_TARGET_DIR").unwrap_or_else(|| "target".into());
        root().join(target).join("release")
    })
}

/// Whether a tool answers; where it does not, the tests that need it fail under HENCE_REQUIRE_TOOLS, and otherwise say
/// that they did not run.
pub fn has(tool: &str) -> bool {
    let found = Command::new(tool).arg("--version").output().is_ok_and(|output| output.status.success());
    if !found {
        let message = format!("{tool} is not here: what needs it did not run");
        assert!(std::env::var_os("HENCE_REQUIRE_TOOLS").is_none(), "{message}");
        println!("{message}");
    }
    found
}

/// What a program printed, on both streams.
pub fn said(output: &Output) -> String {
    String::from_utf8_lossy(&output.stdout).into_owned() + &String::from_utf8_lossy(&output.stderr)
}

/// Compiles a C program of this folder against the header and the shared library.
pub fn compile(program: &str, into: &Path, flags: &[&str]) -> PathBuf {
    let built = into.join(Path::new(program).file_stem().expect("a name"));
    let mut compiler = Command::new("cc");
    compiler.args(["-std=c11", "-Wall", "-Wextra", "-Werror", "-pedantic", "-g"]).args(flags);
    compiler.arg("-I").arg(root().join("include")).arg("-o").arg(&built);
    compiler.arg(root().join("tests/capi/c").join(program));
    compiler.arg("-L").arg(folder()).args(["-lhence", "-lpthread", "-lm"]);
    let output = compiler.output().expect("the C compiler runs");
    assert!(output.status.success(), "{program} {flags:?}: {}", said(&output));
    built
}

/// Runs a command line that ends in a program linked with the shared library; it has to succeed.
pub fn run(line: &[&str], environment: &[(&str, &str)]) -> String {
    let mut command = Command::new(line[0]);
    command.args(&line[1..]).env("LD_LIBRARY_PATH", folder()).envs(environment.iter().copied());
    let output = command.output().expect("the program runs");
    assert!(output.status.success(), "{line:?}: {}", said(&output));
    String::from_utf8(output.stdout).expect("a program prints text")
}
