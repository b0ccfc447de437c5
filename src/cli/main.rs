//! The hence command line: arguments, progress and rendering. It never computes and never parses cells.

mod args;
mod commands;
mod comparison;
mod input;
mod json;
mod ledger;
mod limits;
mod manual;
mod numbers;
mod outputs;
mod progress;
mod render;
mod shelf;
mod terminal;

use std::process::ExitCode;

use clap::{CommandFactory, FromArgMatches};

use args::{Cli, Command};
use terminal::Terminal;

/// How a run ends, in the words of the shell.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Outcome {
    /// Everything was done.
    Done,
    /// It ran, and something in a workbook is wrong.
    Wrong,
    /// It could not run.
    CouldNotRun,
}

impl Outcome {
    /// How a run ends that failed on a workbook.
    pub fn of(error: &hence_workbook::problem::WorkbookError) -> Self {
        if error.is_about_files() { Outcome::CouldNotRun } else { Outcome::Wrong }
    }
}

impl From<Outcome> for ExitCode {
    fn from(outcome: Outcome) -> Self {
        ExitCode::from(match outcome {
            Outcome::Done => 0,
            Outcome::Wrong => 1,
            Outcome::CouldNotRun => 2,
        })
    }
}

/// Why a command could not go on.
#[derive(Debug)]
pub enum Failure {
    /// Standard output was closed by its reader.
    BrokenPipe,
    /// In words.
    Message(String),
    /// By a signal.
    Stopped(i32),
}

impl From<std::io::Error> for Failure {
    fn from(error: std::io::Error) -> Self {
        if error.kind() == std::io::ErrorKind::BrokenPipe {
            Failure::BrokenPipe
        } else {
            Failure::Message(format!("standard output cannot be written: {error}"))
        }
    }
}

fn main() -> ExitCode {
    let arguments: Vec<_> = std::env::args_os().collect();
    if shelf::child::is_asked_for(&arguments) {
        return shelf::child::run(&arguments);
    }
    let arguments = args::prepared(arguments);
    let command = Cli::command().color(args::color_asked(&arguments));
    let cli = match Cli::from_arg_matches(&command.get_matches_from(arguments)) {
        Ok(cli) => cli,
        Err(error) => error.exit(),
    };
    let terminal = Terminal::new(cli.color);
    match run(&cli, &terminal) {
        Ok(outcome) => outcome.into(),
        // The reader went away: nothing is left to say to it.
        Err(Failure::BrokenPipe) => ExitCode::SUCCESS,
        Err(Failure::Message(message)) => {
            terminal.complain(&message);
            Outcome::CouldNotRun.into()
        }
        Err(Failure::Stopped(signal)) => limits::end_by(signal),
    }
}

fn run(cli: &Cli, terminal: &Terminal) -> Result<Outcome, Failure> {
    match &cli.command {
        Command::Fill(fill) => commands::fill::run(fill, &cli.schedules, terminal),
        Command::Check(check) => commands::check::run(check, &cli.schedules, terminal),
        Command::Compare(compare) => commands::compare::run(compare, &cli.schedules, terminal),
        Command::Brief(brief) => commands::brief::run(brief, &cli.schedules, terminal),
        Command::Curve(curve) => commands::curve::run(curve, &cli.schedules, terminal),
        Command::Draws(draws) => commands::draws::run(draws, &cli.schedules, terminal),
        Command::Rate(rate) => commands::rate::run(rate, terminal),
        Command::Schedules(schedules) => commands::schedules::run(schedules, &cli.schedules),
        Command::Names(names) => commands::names::run(names, terminal),
        Command::Plan(plan) => commands::plan::run(plan, terminal),
        Command::Start(start) => commands::start::run(start, terminal),
        Command::Man => printed(&manual::manual()?),
        Command::Completions { shell } => {
            let mut text = Vec::new();
            clap_complete::generate(*shell, &mut Cli::command(), "hence", &mut text);
            printed(&String::from_utf8_lossy(&text))
        }
    }
}

fn printed(text: &str) -> Result<Outcome, Failure> {
    terminal::print(text)?;
    Ok(Outcome::Done)
}
