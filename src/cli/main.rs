//! The hence command line: arguments, progress and rendering. It never computes and never parses cells.

mod args;
mod commands;
mod json;
mod numbers;
mod outputs;
mod render;
mod terminal;

use std::process::ExitCode;

use clap::{CommandFactory, Parser};

use args::{Cli, Command};
use terminal::Terminal;

/// How a run ends, in the words of the shell.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Outcome {
    /// Everything was done.
    Done,
    /// It ran, and something in a workbook is wrong.
    Wrong,
    /// It could not run.
    CouldNotRun,
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

fn main() -> ExitCode {
    let cli = Cli::parse_from(args::with_default_command(std::env::args_os().collect()));
    let terminal = Terminal::new(cli.color);
    let result = match &cli.command {
        Command::Fill(fill) => commands::fill::run(fill, &cli.schedules, &terminal),
        Command::Check(check) => commands::check::run(check, &cli.schedules, &terminal),
        Command::Curve(curve) => commands::curve::run(curve, &cli.schedules),
        Command::Schedules(schedules) => commands::schedules::run(schedules, &cli.schedules),
        Command::Names(names) => commands::names::run(names, &terminal),
        Command::Start(start) => commands::start::run(start),
        Command::Man => manual(),
        Command::Completions { shell } => {
            let mut text = Vec::new();
            clap_complete::generate(*shell, &mut Cli::command(), "hence", &mut text);
            terminal::print(&String::from_utf8_lossy(&text)).map(|()| Outcome::Done)
        }
    };
    match result {
        Ok(outcome) => outcome.into(),
        // The reader went away: nothing is left to say to it.
        Err(Failure::BrokenPipe) => ExitCode::SUCCESS,
        Err(Failure::Message(message)) => {
            terminal.complain(&message);
            Outcome::CouldNotRun.into()
        }
    }
}

/// Why a command could not go on.
#[derive(Debug)]
pub enum Failure {
    /// Standard output was closed by its reader.
    BrokenPipe,
    /// In words.
    Message(String),
}

impl From<std::io::Error> for Failure {
    fn from(error: std::io::Error) -> Self {
        if error.kind() == std::io::ErrorKind::BrokenPipe {
            Failure::BrokenPipe
        } else {
            Failure::Message(error.to_string())
        }
    }
}

fn manual() -> Result<Outcome, Failure> {
    let mut text = Vec::new();
    let command = Cli::command();
    clap_mangen::Man::new(command.clone()).render(&mut text)?;
    // One page holds the whole program: each command's options follow as a section of their own.
    for sub in command.get_subcommands().filter(|c| !c.is_hide_set()) {
        let heading = format!(".SH \"HENCE {}\"\n", sub.get_name().to_uppercase());
        text.extend_from_slice(heading.as_bytes());
        let page = clap_mangen::Man::new(sub.clone());
        page.render_synopsis_section(&mut text)?;
        page.render_description_section(&mut text)?;
        page.render_options_section(&mut text)?;
    }
    let text =
        String::from_utf8_lossy(&text).replace(".SH SYNOPSIS\n\\fBhence\\fR", ".SH SYNOPSIS\n\\fBhence\\fR");
    terminal::print(&text)?;
    Ok(Outcome::Done)
}
