//! The command line as a user meets it: a spawned program, its streams and its exit status.

mod books;
mod brief;
mod check;
mod compare;
mod curve;
mod draws;
mod errors;
mod fill;
mod help;
mod names;
mod outputs;
mod plan;
mod rate;
mod readme;
mod schedules;
mod shelf;
mod start;
mod targets;
mod windows;

use std::io::Write;
use std::path::{Path, PathBuf};
use std::process::{Command, Output, Stdio};

/// The program, with nothing of the caller's environment that changes its words.
pub fn hence() -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_hence"));
    command.env_remove("HENCE_SCHEDULES").env_remove("NO_COLOR").env("TERM", "dumb");
    command
}

/// Runs it with these arguments.
pub fn run(args: &[&str]) -> Output {
    hence().args(args).output().expect("the program starts")
}

/// Runs it with these arguments and bytes on standard input.
pub fn run_with(args: &[&str], input: &[u8]) -> Output {
    let mut child = hence()
        .args(args)
        .stdin(Stdio::piped())
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .expect("the program starts");
    // A program that refuses its arguments does not read; what it says then is looked at below.
    let _ = child.stdin.take().expect("a pipe").write_all(input);
    child.wait_with_output().expect("it ends")
}

/// What it printed on standard output.
pub fn stdout(output: &Output) -> String {
    String::from_utf8(output.stdout.clone()).expect("standard output is UTF-8")
}

/// What it printed on standard error.
pub fn stderr(output: &Output) -> String {
    String::from_utf8(output.stderr.clone()).expect("standard error is UTF-8")
}

/// Its exit status.
pub fn code(output: &Output) -> i32 {
    output.status.code().expect("the program was not killed")
}

/// A committed sample.
pub fn sample(name: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("../../samples").join(name)
}

/// A copy of a sample in a folder of its own.
pub fn copy_of(name: &str) -> (tempfile::TempDir, PathBuf) {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let path = folder.path().join(name);
    std::fs::copy(sample(name), &path).expect("the sample can be copied");
    (folder, path)
}
