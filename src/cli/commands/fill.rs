//! `hence fill`: the main job, on one workbook, several, or a shelf of them.

use std::num::NonZeroUsize;
use std::path::{Path, PathBuf};
use std::time::Duration;

use hence_core::Catalogue;
use hence_workbook::fill::{FillRequest, fill};
use hence_workbook::package::{Identity, clear_abandoned, may_write, same_file, write_atomically};
use hence_workbook::problem::Result as BookResult;
use hence_workbook::shelf::{Done, Order, Record, summary};

use crate::args::{Fill, WriteWhat};
use crate::input::{self, Input};
use crate::json::Document;
use crate::outputs::{Folder, Output, outputs_for, stream};
use crate::shelf::gather::{gather, skipped_words};
use crate::shelf::pool::{self, Listener, Run};
use crate::shelf::scratch::Scratch;
use crate::shelf::telling::{How, Shown, Telling};
use crate::shelf::walk::For;
use crate::shelf::worker::{Limits, Task};
use crate::terminal::{self, Terminal};
use crate::{Failure, Outcome, ledger, limits};

const LEDGER: &str = "--ledger";
const SUMMARY: &str = "--summary";

/// Fills every workbook; one that fails does not keep the others from being filled.
pub fn run(args: &Fill, schedules: &Option<PathBuf>, terminal: &Terminal) -> Result<Outcome, Failure> {
    let catalogue = super::catalogue(schedules)?;
    let request = request(args, &catalogue)?;
    let order = Order { request, force: args.overwrite.force, resume: args.resume, found: false };
    let all = gather(&args.books, For::Filling(args.out.as_deref()))?;
    let outputs = outputs_for(&all.inputs, args.out.as_deref())?;
    let streams = outputs.contains(&Output::Stream);
    if streams && args.document.json {
        return Err(Failure::Message(
            "--json and a workbook both want standard output\nTry: --out with a file".into(),
        ));
    }
    for (path, flag) in [(&args.ledger, LEDGER), (&args.summary, SUMMARY)] {
        if let Some(path) = path {
            is_not_read(path, flag, args, schedules.as_deref())?;
            may_keep(path, flag, args, &all.inputs, &outputs)?;
        }
    }
    let both = args.ledger.as_deref().zip(args.summary.as_deref());
    if let Some((ledger, summary)) = both.filter(|(ledger, summary)| same_file(ledger, summary)) {
        let (ledger, summary) = (ledger.display(), summary.display());
        return Err(Failure::Message(format!("{LEDGER} {ledger} and {SUMMARY} {summary} are one file")));
    }
    let here = streams || all.inputs.iter().any(|input| input::is_dash(&input.path));
    for (flag, given) in
        [("--memory-limit", args.memory_limit.is_some()), ("--time-limit", args.time_limit.is_some())]
    {
        if here && given {
            let how = "not kept to where a workbook comes from standard input or goes to standard output";
            terminal.say("warning", &format!("{flag}: {how}"));
        }
    }
    if !limits::LIMITS_MEMORY && args.memory_limit.is_some() {
        terminal.say("warning", "--memory-limit: this system does not limit the memory of a process");
    }
    let folder = Folder::make(args.out.as_deref())?;
    if args.resume {
        clear_up(&outputs);
    }
    let ended = all.tell(terminal);
    let shown: Vec<Shown> = all
        .inputs
        .iter()
        .zip(&outputs)
        .map(|(input, output)| (input::shown(&input.path), output.shown()))
        .collect();
    let how = How {
        brief: all.walked,
        aside: streams,
        json: args.document.json,
        ledger: args.ledger.is_some(),
        summary: args.summary.is_some(),
    };
    let mut telling = Telling::new(how, terminal, &shown, order.request.sha256(&catalogue));
    telling.ended = ended;
    if here {
        for (i, (input, output)) in all.inputs.iter().zip(&outputs).enumerate() {
            let (done, bytes) = fill_here(&input.path, output, &order, &catalogue);
            if let Some(bytes) = bytes {
                stream(&bytes)?;
            }
            telling.ended(i, done);
        }
    } else {
        let run = how_to_run(args, order, schedules)?;
        pool::run(&tasks(&all.inputs, &outputs), &run, &mut telling).inspect_err(|_| telling.stopped())?;
    }
    drop(folder);
    if let Some(path) = &args.ledger {
        write_atomically(path, telling.lines.as_bytes(), args.overwrite.force || args.resume)
            .map_err(message)?;
    }
    if let Some(path) = &args.summary {
        let bytes = summary::write(&telling.records, path).map_err(message)?;
        write_atomically(path, &bytes, args.overwrite.force || args.resume).map_err(message)?;
    }
    let audited: Vec<(PathBuf, &str)> = telling
        .audited
        .iter()
        .map(|i| (all.inputs[*i].path.clone(), "it holds sheets made by hence"))
        .collect();
    for line in skipped_words(&audited) {
        terminal.say("note", &line);
    }
    if args.document.json {
        terminal::print(&Document::text(std::mem::take(&mut telling.books)))?;
    }
    telling.close()
}

fn request(args: &Fill, catalogue: &Catalogue) -> Result<FillRequest, Failure> {
    Ok(FillRequest {
        basis: args.basis.clone(),
        base: args.base.clone(),
        prices: args.prices.clone(),
        replace: args.replace.as_deref().map(|text| super::pair(text, "--replace", "OLD=NEW")).transpose()?,
        roles: super::roles(&args.roles)?,
        plan: super::planned(&args.roles, None)?,
        formulas: args.write == WriteWhat::Formulas,
        replace_formulas: args.replace_formulas,
        against: super::against(&args.against, catalogue)?,
        settle: args.settle,
        as_of: args.signature.as_of.clone(),
        by: args.signature.by.clone(),
    })
}

fn how_to_run(args: &Fill, order: Order, schedules: &Option<PathBuf>) -> Result<Run, Failure> {
    let jobs = args.jobs.or_else(|| std::thread::available_parallelism().ok());
    // Settling alone puts anything aside.
    let scratch = args.settle.then(Scratch::new).transpose();
    let scratch =
        scratch.map_err(|error| Failure::Message(format!("{}: {error}", std::env::temp_dir().display())))?;
    Ok(Run {
        order,
        scratch,
        schedules: schedules.clone(),
        limits: Limits {
            memory: args.memory_limit.unwrap_or(Limits::MEMORY_MB).get().saturating_mul(1 << 20),
            time: Duration::from_secs(args.time_limit.unwrap_or(Limits::TIME_SECONDS).get()),
        },
        jobs: jobs.unwrap_or(NonZeroUsize::MIN),
    })
}

fn tasks(inputs: &[Input], outputs: &[Output]) -> Vec<Task> {
    let pairs = inputs.iter().zip(outputs);
    let task = |(input, output): (&Input, &Output)| match output {
        Output::File(path) => {
            Some(Task { input: input.path.clone(), output: path.clone(), found: input.inside.is_some() })
        }
        Output::Stream => None,
    };
    pairs.filter_map(task).collect()
}

/// Refused where a ledger or summary would take the place of a file that says how to fill.
fn is_not_read(path: &Path, flag: &str, args: &Fill, schedules: Option<&Path>) -> Result<(), Failure> {
    let folder = schedules.and_then(|folder| std::fs::read_dir(folder).ok());
    let files = folder.into_iter().flatten().flatten().map(|entry| entry.path());
    let schedules = files.filter(|file| file.extension().is_some_and(|extension| extension == "toml"));
    if args.roles.plan.clone().into_iter().chain(schedules).any(|read| same_file(&read, path)) {
        return Err(Failure::Message(format!("{flag} {}: this file is read by the run", path.display())));
    }
    Ok(())
}

/// Whether a ledger or summary may be written, before hours go into what it is to hold.
fn may_keep(
    path: &Path,
    flag: &str,
    args: &Fill,
    inputs: &[Input],
    outputs: &[Output],
) -> Result<(), Failure> {
    let own = Identity::of(path);
    let output = |output: &Output| matches!(output, Output::File(path) if Identity::of(path) == own);
    if inputs.iter().any(|input| input::identity(&input.path) == own) || outputs.iter().any(output) {
        return Err(Failure::Message(format!("{flag} {}: this is one of the workbooks", path.display())));
    }
    let shown: Vec<String> = inputs.iter().map(|input| input::shown(&input.path)).collect();
    let shown: Vec<&str> = shown.iter().map(String::as_str).collect();
    let earlier = path.is_file()
        && if flag == LEDGER { ledger::is_of_run(path, &shown) } else { summary::is_of_run(path, &shown) };
    may_write(path, args.overwrite.force || (args.resume && earlier)).map_err(message)
}

fn message(error: hence_workbook::problem::WorkbookError) -> Failure {
    Failure::Message(error.to_string())
}

/// Takes away what a dead run left beside the outputs.
fn clear_up(outputs: &[Output]) {
    let mut last = None;
    for output in outputs {
        let Output::File(path) = output else { continue };
        let folder = path.parent().filter(|folder| !folder.as_os_str().is_empty()).unwrap_or(Path::new("."));
        if last != Some(folder) {
            clear_abandoned(folder);
        }
        last = Some(folder);
    }
}

/// Fills one in this process: what comes from standard input or goes to standard output.
fn fill_here(
    book: &Path,
    output: &Output,
    order: &Order,
    catalogue: &Catalogue,
) -> (BookResult<Done>, Option<Vec<u8>>) {
    let filled = output.is_not(book).and_then(|()| input::open(book));
    let filled = filled.and_then(|package| fill(&package, &order.request, catalogue));
    let filled = filled.and_then(|filled| {
        if let Output::File(path) = output {
            write_atomically(path, &filled.bytes, order.force)?;
        }
        Ok(filled)
    });
    match filled {
        Ok(filled) => {
            let record = Record::filled(&filled.meta, &filled.report);
            (Ok(Done::Filled(record)), (*output == Output::Stream).then_some(filled.bytes))
        }
        Err(error) => (Err(error), None),
    }
}
