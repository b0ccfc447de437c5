//! What a run says: problems and reports in the order of the inputs, how far it is, and how it ended.

use std::collections::BTreeMap;
use std::time::Instant;

use hence_workbook::problem::{Problem, Severity, WorkbookError};
use hence_workbook::report::Status;
use hence_workbook::shelf::{Done, Record};

use super::pool::Listener;
use crate::json::FilledBook;
use crate::numbers;
use crate::progress::Progress;
use crate::terminal::{self, Terminal};
use crate::{Failure, Outcome, ledger, render};

/// Warnings of one kind that are told where workbooks are many.
const MOST_OF_A_KIND: usize = 3;

/// What is to be said and kept.
#[derive(Clone, Copy, Debug)]
pub struct How {
    /// A line or two a workbook in place of a report, since they may be many.
    pub brief: bool,
    /// Reports go to standard error, as standard output holds a workbook.
    pub aside: bool,
    /// One JSON document instead of reports.
    pub json: bool,
    /// Lines of a ledger are kept.
    pub ledger: bool,
    /// Records are kept for a summary.
    pub summary: bool,
}

/// A workbook as it is shown: input, output.
pub type Shown = (String, String);

/// The listener of a run.
pub struct Telling<'a> {
    how: How,
    terminal: &'a Terminal,
    shown: &'a [Shown],
    request_sha256: String,
    progress: Progress,
    began: Instant,
    /// For the JSON document.
    pub books: Vec<FilledBook>,
    /// For the ledger.
    pub lines: String,
    /// For the summary.
    pub records: Vec<Record>,
    /// Workbooks that hence had filled before, which a walk passes over.
    pub audited: Vec<usize>,
    /// How the run ends.
    pub ended: Outcome,
    done: usize,
    reports: usize,
    filled: usize,
    kept: usize,
    /// How many there were of a kind, where they are told in brief.
    warnings: BTreeMap<&'static str, usize>,
    /// Names and reasons.
    failed: Vec<String>,
    wrong: Vec<String>,
    /// What kept standard output from being written.
    broken: Option<Failure>,
}

impl<'a> Telling<'a> {
    /// Nothing is done yet.
    pub fn new(how: How, terminal: &'a Terminal, shown: &'a [Shown], request_sha256: String) -> Self {
        let progress = Progress::start();
        progress.doing(&match shown {
            [(input, _)] => format!("filling {input}"),
            many => format!("filling {} workbooks", many.len()),
        });
        Telling {
            how,
            terminal,
            shown,
            request_sha256,
            progress,
            began: Instant::now(),
            books: Vec::new(),
            lines: String::new(),
            records: Vec::new(),
            audited: Vec::new(),
            ended: Outcome::Done,
            done: 0,
            reports: 0,
            filled: 0,
            kept: 0,
            warnings: BTreeMap::new(),
            failed: Vec::new(),
            wrong: Vec::new(),
            broken: None,
        }
    }

    /// A workbook with its record, where it is known.
    fn book(&mut self, index: usize, mut record: Record) {
        let (input, output) = self.shown[index].clone();
        record.input.clone_from(&input);
        let mut problems = record.report.problems.clone();
        if self.how.brief {
            problems.retain(|problem| self.is_told(problem));
        }
        render::problems(self.terminal, &input, &problems);
        // What stands in the list at the end: the first error, without what to do.
        let error = problems.iter().find(|problem| problem.severity == Severity::Error);
        let worst = error.map(|problem| render::line(&input, problem, ""));
        let worst = worst.and_then(|text| text.lines().next().map(str::to_owned));
        if record.status == Status::Failed {
            self.terminal.complain(&format!("{input}: not filled"));
            self.failed.push(worst.unwrap_or_else(|| input.clone()));
        } else {
            if let Some(problem) = worst {
                self.wrong.push(problem);
                self.ended = self.ended.max(Outcome::Wrong);
            }
            record.output = Some(output.clone());
            self.report(&input, &output, &record);
        }
        if self.how.json || self.how.ledger {
            let book = FilledBook::of(&record);
            if self.how.ledger {
                self.lines.push_str(&ledger::line(&record, &book));
            }
            if self.how.json {
                self.books.push(book);
            }
        }
        if self.how.summary {
            self.records.push(record);
        }
    }

    /// Of many workbooks, the first warnings of a kind are told, and no notes: the audit sheets hold all.
    fn is_told(&mut self, problem: &Problem) -> bool {
        match problem.severity {
            Severity::Error => true,
            Severity::Warning => {
                let count = self.warnings.entry(problem.code).or_insert(0);
                *count += 1;
                *count <= MOST_OF_A_KIND
            }
            Severity::Note => false,
        }
    }

    fn report(&mut self, input: &str, output: &str, record: &Record) {
        if self.how.json {
            return;
        }
        let mut text = if self.how.brief {
            render::brief(input, output, &record.report)
        } else {
            render::report(input, output, &record.report)
        };
        if self.reports > 0 && !self.how.brief {
            text.insert(0, '\n');
        }
        self.reports += 1;
        if self.how.aside {
            self.terminal.tell(&text);
        } else if self.broken.is_none() {
            // Filling is the work: it goes on where nobody reads the reports.
            self.broken = terminal::print(&text).err();
        }
    }

    /// The run was asked to stop.
    pub fn stopped(&self) {
        self.progress.pause();
        let (done, total) = (self.done, self.shown.len());
        if total > 1 {
            let how = format!(
                "stopped: {done} of {total} workbooks are done; the same command with --resume goes on"
            );
            self.terminal.say("note", &how);
        }
    }

    /// How the run ended, after all else was said.
    pub fn close(self) -> Result<Outcome, Failure> {
        self.progress.pause();
        let total = self.shown.len() - self.audited.len();
        for (code, count) in &self.warnings {
            if let Some(more @ 1..) = count.checked_sub(MOST_OF_A_KIND) {
                let all = "--ledger, --json and the audit sheets hold all";
                self.terminal.say(
                    "warning",
                    &format!("{} of the kind {code}; {all}", numbers::count(more, "more warning")),
                );
            }
        }
        if total > 1 {
            let before =
                if self.kept > 0 { format!(", {} filled before and kept", self.kept) } else { String::new() };
            let head = format!("{}: {} filled{before}", numbers::count(total, "workbook"), self.filled);
            self.terminal.say("note", &head);
            self.list("not filled", &self.failed);
            self.list("filled, and something in them is wrong", &self.wrong);
        }
        self.broken.map_or(Ok(self.ended), Err)
    }
}

impl Telling<'_> {
    fn list(&self, what: &str, lines: &[String]) {
        if !lines.is_empty() {
            self.terminal.complain(&format!("{} {what}:\n  {}", lines.len(), lines.join("\n  ")));
        }
    }
}

impl Listener for Telling<'_> {
    fn counted(&mut self, done: usize) {
        self.done = done;
        let total = self.shown.len();
        if total > 1 {
            let left = self.began.elapsed().as_secs_f64() / done as f64 * (total - done) as f64;
            self.progress.doing(&format!("{done} of {total} workbooks done; {}", time_left(left)));
        }
    }

    fn ended(&mut self, index: usize, done: Result<Done, WorkbookError>) {
        self.progress.pause();
        match done {
            Ok(Done::Audited) => self.audited.push(index),
            Ok(Done::Filled(record)) => {
                self.filled += 1;
                self.book(index, record);
            }
            Ok(Done::Kept(record)) => {
                self.kept += 1;
                self.book(index, record);
            }
            Ok(Done::Failed(record)) => {
                let about_files = WorkbookError::from(record.report.problems.clone()).is_about_files();
                // A file that was named has to be there; one of a shelf is one of many.
                let named = !self.how.brief;
                let ended = if about_files && named { Outcome::CouldNotRun } else { Outcome::Wrong };
                self.ended = self.ended.max(ended);
                self.book(index, record);
            }
            Err(error) => {
                let record = Record::failed(self.request_sha256.clone(), error.problems());
                self.ended(index, Ok(Done::Failed(record)));
            }
        }
        self.progress.resume();
    }
}

/// Time left in words, coarse as it is.
fn time_left(seconds: f64) -> String {
    match seconds {
        s if s < 1.0 => "almost done".to_owned(),
        s if s < 90.0 => format!("about {s:.0} s left"),
        s if s < 5400.0 => format!("about {:.0} min left", s / 60.0),
        s => format!("about {:.1} hours left", s / 3600.0),
    }
}

#[cfg(test)]
mod tests {
    use super::time_left;

    #[test]
    fn time_left_is_coarse() {
        let words = [0.2, 1.2, 89.0, 91.0, 600.0, 7200.0].map(time_left);
        let due =
            ["almost done", "about 1 s left", "about 89 s left", "about 2 min left", "about 10 min left"];
        assert_eq!(words[..5], due);
        assert_eq!(words[5], "about 2.0 hours left");
    }
}
