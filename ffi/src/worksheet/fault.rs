//! What is wrong with an argument: the error value that a cell shows, and the words that HENCE.EXPLAIN gives.

use hence_core::{Error, ErrorKind};

use super::CellError;

/// Why there is no number.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Fault {
    pub error: CellError,
    pub words: String,
}

pub(super) type Outcome<T> = Result<T, Fault>;

impl Fault {
    /// A wrong type, shape or text.
    pub fn value(words: impl Into<String>) -> Self {
        Fault { error: CellError::Value, words: words.into() }
    }

    /// Out of range.
    pub fn number(words: impl Into<String>) -> Self {
        Fault { error: CellError::Number, words: words.into() }
    }

    /// An error value that an argument holds comes back as it is.
    pub fn passed_on(error: CellError, place: &str) -> Self {
        Fault { error, words: format!("{place} holds {}", error.text()) }
    }

    /// The error value and the words.
    pub fn told(&self) -> String {
        format!("{} - {}", self.error.text(), self.words)
    }

    /// With what to do about it.
    pub fn hint(mut self, hint: &str) -> Self {
        self.words = format!("{}. Try: {hint}", self.words);
        self
    }

    /// An error of the library, about the argument (and cell) named.
    pub fn core(error: &Error, place: &str) -> Self {
        let mut words = format!("{place}: {}", error.message());
        if let Some(at) = error.at() {
            words = format!("{words} (at character {})", at + 1);
        }
        let fault = Fault { error: value_of(error.kind()), words };
        match error.hint() {
            Some(hint) => fault.hint(hint),
            None => fault,
        }
    }
}

/// The error value of a kind: `#N/A` outside the curve, `#VALUE!` for a text or a shape that does not fit, `#NUM!` for
/// numbers out of range.
fn value_of(kind: ErrorKind) -> CellError {
    match kind {
        ErrorKind::OutsideDomain => CellError::NotAvailable,
        ErrorKind::RateRange
        | ErrorKind::NotFinite
        | ErrorKind::Weights
        | ErrorKind::Edges
        | ErrorKind::Diverges
        | ErrorKind::NoMeaning => CellError::Number,
        _ => CellError::Value,
    }
}
