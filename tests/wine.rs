//! Building for Windows and running under Wine.

use std::path::{Path, PathBuf};
use std::process::{Command, Output};
use std::sync::OnceLock;

/// The top of the source tree.
fn top() -> &'static Path {
    let here = Path::new(env!("CARGO_MANIFEST_DIR"));
    here.ancestors()
        .find(|folder| folder.join("include/hence.h").is_file())
        .expect("a folder within the tree")
}

/// Where cargo puts what it builds: the folder above the one that it sets aside for tests.
pub fn target() -> PathBuf {
    Path::new(env!("CARGO_TARGET_TMPDIR")).parent().expect("a folder of the target directory").to_owned()
}

/// Says plainly that a test did not run; fails where HENCE_REQUIRE_TOOLS is set.
pub fn not_run(what: &str) {
    assert!(std::env::var_os("HENCE_REQUIRE_TOOLS").is_none(), "{what}");
    println!("{what}: this test did not run");
}

/// A program on the path or in a folder where packages put it.
fn found(name: &str) -> Option<PathBuf> {
    let path = std::env::var_os("PATH").unwrap_or_default();
    let folders =
        std::env::split_paths(&path).chain(["/usr/lib/wine", "/opt/wine-stable/bin"].map(PathBuf::from));
    let found = folders.map(|folder| folder.join(name)).find(|file| file.is_file());
    if found.is_none() {
        not_run(&format!("{name} is not installed"));
    }
    found
}

/// The output of a run as text, what it printed first.
pub fn said(output: &Output) -> String {
    String::from_utf8_lossy(&output.stdout).into_owned() + &String::from_utf8_lossy(&output.stderr)
}

/// What runs programs for Windows: Wine with a folder of its own, and in it the programs and the stand-in library.
pub struct Windows {
    wine: PathBuf,
    folder: PathBuf,
}

impl Windows {
    /// None where a tool is missing, which is then said.
    pub fn new() -> Option<&'static Windows> {
        static ONCE: OnceLock<Option<Windows>> = OnceLock::new();
        ONCE.get_or_init(Windows::made).as_ref()
    }

    fn made() -> Option<Windows> {
        let wine = found("wine64")?;
        found("x86_64-w64-mingw32-gcc")?;
        let folder = Path::new(env!("CARGO_TARGET_TMPDIR")).join("windows");
        std::fs::create_dir_all(&folder).expect("a temporary folder");
        let windows = Windows { wine, folder };
        windows.compile(&["bcryptprimitives.c"], "bcryptprimitives.dll", &["-shared", "-ladvapi32"]);
        // The first run makes Wine's own folder, which two at a time would spoil.
        let first = windows.command().args(["cmd", "/c", "exit 0"]).output().expect("wine runs");
        assert!(first.status.success(), "wine: {}", said(&first));
        Some(windows)
    }

    /// The folder of the programs.
    pub fn folder(&self) -> &Path {
        &self.folder
    }

    /// Compiles C sources of this test into a program or library of the folder.
    pub fn compile(&self, sources: &[&str], output: &str, options: &[&str]) {
        let here = top().join("tests/addin/excel");
        let output = Command::new("x86_64-w64-mingw32-gcc")
            .args(["-std=c11", "-O1", "-Wall", "-Wextra", "-Werror", "-o"])
            .arg(self.folder.join(output))
            .arg("-I")
            .arg(top().join("include"))
            .args(sources.iter().map(|source| here.join(source)))
            .args(options)
            .output()
            .expect("the compiler runs");
        assert!(output.status.success(), "{}", said(&output));
    }

    fn command(&self) -> Command {
        let mut command = Command::new("timeout");
        command
            .args(["--kill-after=10", "600"])
            .arg(&self.wine)
            .current_dir(&self.folder)
            .env("WINEDEBUG", "-all")
            .env("WINEPREFIX", self.folder.join("wine"))
            // Where Wine looks for the stand-in of a library that it may lack.
            .env("WINEPATH", format!("Z:{}", self.folder.display()));
        command
    }

    /// Runs a program in the folder.
    pub fn run(&self, program: impl AsRef<std::ffi::OsStr>, arguments: &[&str]) -> Output {
        self.command().arg(program).args(arguments).output().expect("timeout (coreutils) runs wine")
    }
}

/// Runs a script of the add-ins' folder; none where it says that a tool is missing.
pub fn script(name: &str, arguments: &[&str]) -> Option<Output> {
    let output = Command::new("bash")
        .arg(top().join("ffi/addin").join(name))
        .args(arguments)
        .current_dir(top())
        .env("CARGO_TARGET_DIR", target())
        .output()
        .expect("bash runs");
    if output.status.code() == Some(2) {
        not_run(&said(&output));
        return None;
    }
    assert!(output.status.success(), "{name}: {}", said(&output));
    Some(output)
}
