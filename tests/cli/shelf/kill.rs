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

/// Processes whose arguments name a folder: those that work on one workbook, and those that they have started.
fn at_work(folder: &Path) -> Vec<String> {
    let entries = std::fs::read_dir("/proc").expect("the list of processes");
    let arguments = entries.flatten().filter_map(|entry| std::fs::read(entry.path().join("cmdline")).ok());
    let texts = arguments.map(|bytes| String::from_utf8_lossy(&bytes).replace('\0', " "));
    let theirs = |text: &String| text.contains("fill-one-workbook") || text.contains("soffice");
    texts.filter(|text| text.contains(folder.to_str().unwrap()) && theirs(text)).collect()
}

/// Ctrl-C's signal; the other one where whoever started this test ignores it, as shells do for what runs in the background:
/// a program that is started so ignores it, too.
fn interrupt() -> i32 {
    let status = std::fs::read_to_string("/proc/self/status").expect("this process");
    let mask = status.lines().find_map(|line| line.strip_prefix("SigIgn:")).expect("the ignored signals");
    let mask = u64::from_str_radix(mask.trim(), 16).expect("a mask");
    if mask & (1 << (INT - 1)) != 0 {
        eprintln!("SIGINT is ignored here: SIGTERM is sent in its place");
        return TERM;
    }
    INT
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
    let mut takes = began.elapsed();
    let whole = shelf.files("whole");
    assert_eq!(whole.len(), names.len());

    let (mut state, mut broken) = (26, 0);
    // Where a run ends before it is killed, the machine was quicker than before: the next is killed earlier.
    for round in 0..10 * kills {
        if broken == kills {
            break;
        }
        let by = [KILL, TERM, KILL, interrupt()][round % 4];
        let before = shelf.names("out");
        // Several kills in a row break the same run, before it is brought to its end.
        let mut child = run("out", &["--resume"]).spawn().expect("the program starts");
        let began = Instant::now();
        std::thread::sleep(takes.mul_f64(next(&mut state)));
        let running = child.try_wait().unwrap().is_none();
        if running {
            signal(&child, by);
        }
        let output = child.wait_with_output().unwrap();
        let killed = output.status.signal() == Some(by);
        if !killed {
            takes = takes.min(began.elapsed());
        }
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
    assert_eq!(broken, kills, "too few runs were broken");
}

#[test]
fn a_stopped_run_ends_at_once_and_says_how_to_go_on() {
    for by in [TERM, interrupt()] {
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

/// LibreOffice, which a process starts to settle a workbook, does not outlive a run that is stopped or killed.
#[test]
fn what_a_process_has_started_ends_with_it() {
    if hence_workbook::settle::soffice().is_none() {
        assert!(std::env::var_os("HENCE_REQUIRE_TOOLS").is_none(), "LibreOffice (soffice) is not installed");
        eprintln!("not run: LibreOffice (soffice) is not installed");
        return;
    }
    for by in [TERM, KILL] {
        let shelf = Shelf::empty();
        // A formula that depends on what is filled has no result until LibreOffice computes it.
        shelf.put("a.xlsx", crate::books::plan(&[("B60", "=B34*2>")]).bytes());
        let aside = shelf.path("aside");
        std::fs::create_dir(&aside).unwrap();
        let run = || {
            let mut command = crate::hence();
            command.arg("fill").arg(shelf.path("shelf")).arg("--out").arg(shelf.path("out")).arg("--settle");
            command.env("TMPDIR", &aside).stdout(Stdio::piped()).stderr(Stdio::piped());
            command
        };
        let child = run().spawn().unwrap();
        let since = Instant::now();
        while !at_work(&aside).iter().any(|text| text.contains("soffice.bin")) {
            assert!(since.elapsed() < Duration::from_secs(120), "LibreOffice is started");
            std::thread::sleep(Duration::from_millis(5));
        }
        signal(&child, by);
        assert_eq!(child.wait_with_output().unwrap().status.signal(), Some(by));
        none_is_left(&aside);
        let output = run().arg("--resume").output().unwrap();
        assert_eq!(code(&output), 0, "{}", stderr(&output));
        assert_eq!(shelf.names("out"), ["a.audited.xlsx"]);
        assert_eq!(shelf.names("aside"), Vec::<String>::new(), "nothing is left aside");
    }
}

/// Nor does it outlive one that works in its own process, since a workbook goes to standard output.
#[test]
fn what_a_run_to_standard_output_has_started_ends_with_it() {
    if hence_workbook::settle::soffice().is_none() {
        assert!(std::env::var_os("HENCE_REQUIRE_TOOLS").is_none(), "LibreOffice (soffice) is not installed");
        eprintln!("not run: LibreOffice (soffice) is not installed");
        return;
    }
    for by in [TERM, KILL] {
        let shelf = Shelf::empty();
        shelf.put("a.xlsx", crate::books::plan(&[("B60", "=B34*2>")]).bytes());
        let aside = shelf.path("aside");
        std::fs::create_dir(&aside).unwrap();
        let mut command = crate::hence();
        command.arg("fill").arg(shelf.path("shelf/a.xlsx")).args(["--out", "-", "--settle"]);
        command.env("TMPDIR", &aside).stdout(Stdio::piped()).stderr(Stdio::piped());
        let child = command.spawn().unwrap();
        let since = Instant::now();
        while !at_work(&aside).iter().any(|text| text.contains("soffice.bin")) {
            assert!(since.elapsed() < Duration::from_secs(120), "LibreOffice is started");
            std::thread::sleep(Duration::from_millis(5));
        }
        signal(&child, by);
        assert_eq!(child.wait_with_output().unwrap().status.signal(), Some(by));
        none_is_left(&aside);
        let since = Instant::now();
        while !shelf.names("aside").is_empty() {
            assert!(since.elapsed() < Duration::from_secs(20), "left aside: {:?}", shelf.names("aside"));
            std::thread::sleep(Duration::from_millis(5));
        }
    }
}
