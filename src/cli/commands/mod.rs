//! One module a command.

pub mod brief;
pub mod check;
pub mod compare;
pub mod curve;
pub mod draws;
pub mod fill;
pub mod names;
pub mod rate;
pub mod schedules;
pub mod start;

use std::path::PathBuf;

use hence_core::Catalogue;

use crate::Failure;

/// The schedules in force: the user's folder first, then the built-in ones.
pub fn catalogue(folder: &Option<PathBuf>) -> Result<Catalogue, Failure> {
    hence_workbook::schedules::catalogue(folder.as_deref())
        .map_err(|error| Failure::Message(error.to_string()))
}

/// A library error about something typed on the command line, with the character it points at.
pub fn typed(error: &hence_core::Error, text: &str) -> Failure {
    let mut message = format!("{}: {} ({})", error.argument(), error.message(), error.code());
    if let Some(at) = error.at() {
        message.push_str(&format!("\n  {text}\n  {}^", " ".repeat(at)));
    }
    if let Some(hint) = error.hint() {
        message.push_str(&format!("\nTry: {hint}"));
    }
    Failure::Message(message)
}
