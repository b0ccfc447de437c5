//! Runs that are killed at some moment and then resumed: only whole outputs stand at any time, no process goes on, and in
//! the end all is as after an unbroken run. With HENCE_DEEP set, many more are killed.
#![cfg(target_os = "linux")]

use std::os::unix::process::ExitStatusExt;
use std::path::Path;
use std::process::{Child, Command, Stdio};
use std::time::{Duration, Instant};

use super::Shelf;
use crate::{code, stderr};

const KILL: i32 = 9;
const TERM: i32 = 15;
const INT: i32 = 2;

/// Processes whose arguments name a folder.
fn at_work(folder: &Path) -> Vec<String> {
    let entries = std::fs::read_dir("/proc").expect("the list of processes");
    let arguments = entries.flatten().filter_map(|entry| std::fs::read(entry.path().join("cmdline")).ok());
    let texts = arguments.map(|bytes| String::from_utf8_lossy(&bytes).replace('\0', " "));
    texts.filter(|text| text.contains(folder.to_str().unwrap()) && text.contains("fill-one")).collect()
}

/// Waits until no process is left over; the system takes a moment to end those of a killed parent.
fn none_is_left(folder: &Path) {
    let since = Instant::now();
    while !at_work(folder).is_empty() {
        assert!(since.elapsed() < Duration::from_secs(20), "still there: {:?}", at_work(folder));
        std::thread::sleep(Duration::from_millis(5));
    }
}

fn signal(child: &Child, signal: i32) {
    let sent = Command::new("kill").args([format!("-{signal}"), child.id().to_string()]).status();
    assert!(sent.expect("kill runs").success());
}

fn temporaries(names: &[String]) -> Vec<&String> {
    names.iter().filter(|name| name.ends_with(".tmp")).collect()
}

/// The next of a sequence of moments between 0 and 1; the same in every run of the test.
fn next(state: &mut u64) -> f64 {
    *state = state.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
    (*state >> 11) as f64 / (1_u64 << 53) as f64
}

#[test]
fn killed_runs_are_resumed_to_what_an_unbroken_run_makes() {
    let kills = if std::env::var_os("HENCE_DEEP").is_some() { 200 } else { 6 };
    let names: Vec<String> = (0..12).map(|i| format!("{}/{i}.xlsx", ["dams", "weirs"][i % 2])).collect();
    let shelf = Shelf::of(&names.iter().map(String::as_str).collect::<Vec<_>>());
    // Whole paths, so that processes of this test are told from others.
    let run = |out: &str, more: &[&str]| {
        let mut command = crate::hence();
        command.args(["fill", "--jobs", "2", "--basis", "3%"]).arg(shelf.path("shelf"));
        command.arg("--out").arg(shelf.path(out)).args(more);
        command.stdout(Stdio::piped()).stderr(Stdio::piped());
        command
    };
    let began = Instant::now();
    assert_eq!(code(&run("whole", &[]).output().unwrap()), 0);
    let takes = began.elapsed();
    let whole = shelf.files("whole");
    assert_eq!(whole.len(), names.len());

    let (mut state, mut broken) = (26, 0);
    for round in 0..kills {
        let by = [KILL, TERM, KILL, INT][round % 4];
        let before = shelf.names("out");
        // Several kills in a row break the same run, before it is brought to its end.
        let mut child = run("out", &["--resume"]).spawn().expect("the program starts");
        std::thread::sleep(takes.mul_f64(next(&mut state)));
        let running = child.try_wait().unwrap().is_none();
        if running {
            signal(&child, by);
        }
        let output = child.wait_with_output().unwrap();
        let killed = output.status.signal() == Some(by);
        assert!(killed || output.status.success(), "{}: {}", output.status, stderr(&output));
        broken += usize::from(killed);
        none_is_left(&shelf.path("shelf"));
        let files = shelf.files("out");
        for (name, bytes) in &files {
            // A run that is told to stop clears up; one that is killed leaves that to the next.
            let left = || by == KILL || before.contains(name);
            let sound = if name.ends_with(".tmp") { left() } else { *bytes == whole[name] };
            assert!(sound, "round {round}: {name}");
        }
        if round % 3 == 2 {
            let output = run("out", &["--resume"]).output().unwrap();
            assert_eq!(code(&output), 0, "{}", stderr(&output));
            assert!(shelf.files("out") == whole, "round {round}: all is as after an unbroken run");
            std::fs::remove_dir_all(shelf.path("out")).unwrap();
        }
    }
    assert!(broken * 2 >= kills, "only {broken} of {kills} runs were broken");
}

#[test]
fn a_stopped_run_ends_at_once_and_says_how_to_go_on() {
    for by in [TERM, INT] {
        let shelf = Shelf::of(&["a.xlsx", "hangs.xlsx", "z.xlsx"]);
        let mut command = shelf.command("out", &["--jobs", "2", "--ledger", "ledger.jsonl"]);
        let child = command.stdout(Stdio::piped()).stderr(Stdio::piped()).spawn().unwrap();
        let since = Instant::now();
        while shelf.files("out").keys().filter(|name| !name.ends_with(".tmp")).count() < 2 {
            assert!(since.elapsed() < Duration::from_secs(120), "two of three are filled");
            std::thread::sleep(Duration::from_millis(10));
        }
        signal(&child, by);
        let output = child.wait_with_output().unwrap();
        assert_eq!(output.status.signal(), Some(by), "whoever started it sees what ended it");
        let text = stderr(&output);
        assert!(text.contains("of 3 workbooks are done") && text.contains("--resume"), "{text}");
        let names = shelf.names("out");
        assert_eq!(names, ["a.audited.xlsx", "z.audited.xlsx"]);
        assert!(temporaries(&names).is_empty());
        assert!(!shelf.path("ledger.jsonl").exists());
    }
}

#[test]
fn a_stopped_run_that_made_nothing_leaves_nothing() {
    let shelf = Shelf::of(&["hangs.xlsx"]);
    let mut command = crate::hence();
    command.current_dir(shelf.path("")).arg("fill").arg(shelf.path("shelf")).args(["--out", "deep/out"]);
    command.env("HENCE_TEST_MISHAPS", "1").stdout(Stdio::piped()).stderr(Stdio::piped());
    let child = command.spawn().unwrap();
    let since = Instant::now();
    while at_work(&shelf.path("shelf")).is_empty() {
        assert!(since.elapsed() < Duration::from_secs(120), "it is begun");
        std::thread::sleep(Duration::from_millis(5));
    }
    signal(&child, TERM);
    assert_eq!(child.wait_with_output().unwrap().status.signal(), Some(TERM));
    none_is_left(&shelf.path("shelf"));
    assert!(!shelf.path("deep").exists());
}
