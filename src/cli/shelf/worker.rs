//! One workbook, worked on in a process of its own: started, given its order, listened to, ended where it must.

use std::ffi::OsString;
use std::io::{BufReader, Read, Write};
use std::num::NonZeroU64;
use std::path::{Path, PathBuf};
use std::process::{Child, ChildStderr, ChildStdin, ChildStdout, Command, ExitStatus, Stdio};
use std::sync::atomic::{AtomicBool, Ordering};
use std::sync::{Mutex, MutexGuard, PoisonError};
use std::thread::JoinHandle;
use std::time::{Duration, Instant};

use hence_workbook::package::{Pending, same_file};
use hence_workbook::problem::{Problem, WorkbookError};
use hence_workbook::shelf::{Done, Order, mishap, output_is_input};

use super::pool::Run;
use super::scratch::Scratch;
use super::{child, wire};
use crate::limits;

/// What a process may use.
#[derive(Clone, Copy, Debug)]
pub struct Limits {
    /// Bytes of memory.
    pub memory: u64,
    /// Time for one workbook.
    pub time: Duration,
}

impl Default for Limits {
    fn default() -> Self {
        Limits {
            memory: Limits::MEMORY_MB.get() << 20,
            time: Duration::from_secs(Limits::TIME_SECONDS.get()),
        }
    }
}

impl Limits {
    /// The memory of a process in MB, where none is given: a million cells with formulas take a fifth of it.
    pub const MEMORY_MB: NonZeroU64 = NonZeroU64::new(1024).unwrap();
    /// Its time in seconds, where none is given.
    pub const TIME_SECONDS: NonZeroU64 = NonZeroU64::new(600).unwrap();
}

/// The most of a process's complaints that is kept.
const MOST_WORDS: u64 = 16 << 10;

/// A process at work, as those see it who may have to end it.
struct Running {
    child: Child,
    since: Instant,
    /// It was ended for the time it took.
    late: bool,
}

/// The place of one process at work.
#[derive(Default)]
pub struct Slot(Mutex<Option<Running>>);

impl Slot {
    fn lock(&self) -> MutexGuard<'_, Option<Running>> {
        self.0.lock().unwrap_or_else(PoisonError::into_inner)
    }

    /// Ends its process, if one is at work.
    pub fn end(&self) {
        if let Some(running) = &mut *self.lock() {
            let _ = limits::end_group(&mut running.child);
        }
    }

    /// Ends its process if it takes longer than it may.
    pub fn end_if_late(&self, limit: Duration) {
        if let Some(running) = &mut *self.lock()
            && running.since.elapsed() > limit
            && limits::end_group(&mut running.child).is_ok()
        {
            running.late = true;
        }
    }

    /// Waits for the end of a process that has closed its output.
    pub(super) fn wait(&self) -> (Option<ExitStatus>, bool) {
        loop {
            let mut slot = self.lock();
            let Some(running) = &mut *slot else { return (None, false) };
            match running.child.try_wait() {
                Ok(None) => {}
                ended => {
                    let late = running.late;
                    *slot = None;
                    return (ended.ok().flatten(), late);
                }
            }
            drop(slot);
            std::thread::sleep(Duration::from_millis(1));
        }
    }
}

/// One workbook's way.
#[derive(Clone, Debug)]
pub struct Task {
    /// The workbook.
    pub input: PathBuf,
    /// Where its output goes.
    pub output: PathBuf,
    /// It was found in a folder.
    pub found: bool,
}

/// Works on one workbook. Its output gets its name once all of it has come and the process ended well.
pub fn work(task: &Task, run: &Run, slot: &Slot, stop: &AtomicBool) -> Result<Done, WorkbookError> {
    let Run { order, limits, .. } = run;
    let arguments: [OsString; 6] = [
        child::FILL.into(),
        std::process::id().to_string().into(),
        limits.memory.to_string().into(),
        run.schedules.as_ref().map_or_else(OsString::new, Into::into),
        task.input.clone().into(),
        task.output.clone().into(),
    ];
    let Started { stdin, stdout, words } = start(&arguments, run.scratch.as_ref().map(Scratch::path), slot)?;
    if stop.load(Ordering::SeqCst) {
        // Those that were at work when the run was stopped have been ended; this one was not among them yet.
        slot.end();
    }

    let order = Order { found: task.found, ..order.clone() };
    // Its standard input stays open until it has ended: by that it knows that this process lives.
    let mut stdin = stdin;
    if let Some(to) = &mut stdin {
        // A process that does not read has ended, which is seen below.
        let _ = wire::send(to, &order);
    }
    let received = stdout.map(|from| receive(BufReader::new(from), &task.output));
    if let Some(Err(Broken::Output(_))) = &received {
        // It waits for someone to take the rest.
        slot.end();
    }
    let (status, late) = slot.wait();
    drop(stdin);
    let words = words.join().unwrap_or_default();
    match received {
        Some(Err(Broken::Output(error))) => Err(error),
        Some(Ok((done, pending))) if status.is_some_and(|status| status.success()) => {
            if let Some(pending) = pending {
                // Folders may have come to be since the process compared the two.
                if same_file(&task.input, &task.output) {
                    return Err(output_is_input(&task.output));
                }
                // An earlier output of hence was looked at by the process: it may be replaced.
                pending.commit(order.force || order.resume)?;
            }
            Ok(done)
        }
        _ if late => Err(mishap::out_of_time(limits.time).into()),
        _ => Err(why(status, &words, limits).into()),
    }
}

/// A process that was started, in its slot.
pub(super) struct Started {
    pub(super) stdin: Option<ChildStdin>,
    pub(super) stdout: Option<ChildStdout>,
    /// What it says on standard error, once it has ended.
    pub(super) words: JoinHandle<String>,
}

/// Starts a process of this program, which may put things aside in a folder.
pub(super) fn start(
    arguments: &[OsString],
    scratch: Option<&Path>,
    slot: &Slot,
) -> Result<Started, WorkbookError> {
    let mut command = Command::new(program().map_err(|error| mishap::not_started(&error))?);
    command.args(arguments).stdin(Stdio::piped()).stdout(Stdio::piped()).stderr(Stdio::piped());
    command.env("RUST_BACKTRACE", "0");
    if let Some(scratch) = scratch {
        command.env(if cfg!(windows) { "TMP" } else { "TMPDIR" }, scratch);
    }
    #[cfg(unix)]
    {
        use std::os::unix::process::CommandExt;
        // Ctrl-C on a terminal goes to this process alone, which ends the others.
        command.process_group(0);
    }
    let mut child = command.spawn().map_err(|error| mishap::not_started(&error))?;
    let (stdin, stdout, stderr) = (child.stdin.take(), child.stdout.take(), child.stderr.take());
    *slot.lock() = Some(Running { child, since: Instant::now(), late: false });
    let words = std::thread::spawn(move || stderr.map(words_of).unwrap_or_default());
    Ok(Started { stdin, stdout, words })
}

/// Why a process sent less than it should.
enum Broken {
    /// It ended.
    Pipe,
    /// The output could not be written.
    Output(WorkbookError),
}

/// Takes the answer, and the output into a file that has no name yet.
fn receive(mut from: impl Read, output: &Path) -> Result<(Done, Option<Pending>), Broken> {
    let done: Done = wire::receive(&mut from).map_err(|_| Broken::Pipe)?;
    if !matches!(done, Done::Filled(_)) {
        return Ok((done, None));
    }
    let mut left = wire::length(&mut from).map_err(|_| Broken::Pipe)?;
    if let Some(folder) = output.parent().filter(|folder| !folder.as_os_str().is_empty()) {
        // Where it cannot be made, neither can the file.
        let _ = std::fs::create_dir_all(folder);
    }
    let mut pending = Pending::beside(output).map_err(Broken::Output)?;
    let mut buffer = vec![0; 64 << 10];
    while left > 0 {
        let most = buffer.len().min(usize::try_from(left).unwrap_or(usize::MAX));
        let got = from.read(&mut buffer[..most]).map_err(|_| Broken::Pipe)?;
        if got == 0 {
            return Err(Broken::Pipe);
        }
        pending.write_all(&buffer[..got]).map_err(|error| Broken::Output(pending.cannot_write(error)))?;
        left -= got as u64;
    }
    Ok((done, Some(pending)))
}

/// This program, even where a newer one has taken its place since.
fn program() -> std::io::Result<PathBuf> {
    let own = Path::new("/proc/self/exe");
    if cfg!(target_os = "linux") && own.exists() { Ok(own.to_owned()) } else { std::env::current_exe() }
}

/// What it said on standard error.
fn words_of(mut stderr: ChildStderr) -> String {
    let mut words = Vec::new();
    let _ = stderr.by_ref().take(MOST_WORDS).read_to_end(&mut words);
    let _ = std::io::copy(&mut stderr, &mut std::io::sink());
    String::from_utf8_lossy(&words).into_owned()
}

/// Why a process did not finish.
pub(super) fn why(status: Option<ExitStatus>, words: &str, limits: &Limits) -> Problem {
    // What Rust says where memory is refused, before it aborts.
    if words.lines().any(|line| line.starts_with("memory allocation of ") && line.ends_with(" failed")) {
        return mishap::out_of_memory(limits.memory);
    }
    let ended = status.map_or_else(|| "its end is not known".to_owned(), |status| status.to_string());
    // A panic's place, then its words.
    let said: Vec<String> =
        words.lines().map(str::trim).filter(|line| !line.is_empty()).take(2).map(without_folders).collect();
    let said = if said.is_empty() { String::new() } else { format!("; {}", said.join(" ")) };
    mishap::broke_off(&format!("{ended}{said}"))
}

/// A line that says where a panic was, without the folders of the machine on which hence was built.
fn without_folders(line: &str) -> String {
    let Some((before, place)) = line.split_once("panicked at ") else { return line.to_owned() };
    let place = place.replace('\\', "/");
    let relative = !place.starts_with('/') && !place.contains(":/");
    // Of a library's file, the library's folder stays.
    let end = place.rfind("/src/").unwrap_or(place.len());
    let begin = if relative { 0 } else { place[..end].rfind('/').map_or(0, |slash| slash + 1) };
    format!("{before}panicked at {}", &place[begin..])
}

#[cfg(test)]
mod tests {
    use super::without_folders;

    #[test]
    fn a_panic_says_no_folders_of_a_machine() {
        for (place, due) in [
            ("src/cli/shelf/child.rs:80:25:", "src/cli/shelf/child.rs:80:25:"),
            ("/any/folder/reader-0.26.1/src/xls.rs:9:1:", "reader-0.26.1/src/xls.rs:9:1:"),
            ("C:\\any\\reader-0.26.1\\src\\xls.rs:9:1:", "reader-0.26.1/src/xls.rs:9:1:"),
            ("/any/target/out/made.rs:3:1:", "made.rs:3:1:"),
            ("/rustc/0ab/library/core/src/slice.rs:1:2:", "core/src/slice.rs:1:2:"),
        ] {
            let line = without_folders(&format!("thread 'main' panicked at {place}"));
            assert_eq!(line, format!("thread 'main' panicked at {due}"));
        }
        assert_eq!(without_folders("as the test wants"), "as the test wants");
    }
}
