//! The library's one error: what kind, which argument, which index, and what to do about it.

use std::fmt;

/// The result of a fallible function of this library.
pub type Result<T> = std::result::Result<T, Error>;

/// What went wrong, as a short stable word ([`ErrorKind::code`]).
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
#[non_exhaustive]
pub enum ErrorKind {
    /// A rate, or another parameter of a curve, is outside its allowed range.
    RateRange,
    /// An offset lies outside the curve's domain (before its start, or past its last edge).
    OutsideDomain,
    /// A number is NaN or infinite, or the result would be.
    NotFinite,
    /// Arrays differ in length, or an array is empty where it may not be.
    Shape,
    /// A text does not follow its grammar; [`Error::at`] is the character.
    Syntax,
    /// No schedule of that id is known.
    UnknownSchedule,
    /// A schedule file is not valid.
    BadSchedule,
    /// Weights of a mixture, or chances, do not sum to 1, or one of them is negative.
    Weights,
    /// Band edges are not increasing, overlap or are missing.
    Edges,
    /// The curve has calendar edges and no base year was given.
    NeedsBase,
    /// The curve needs the appraisal's length and none was given.
    NeedsLength,
    /// Asked for something this version does not offer.
    Unsupported,
    /// A date, year or financial year cannot be read.
    Date,
    /// A sum to infinity does not converge.
    Diverges,
    /// The quantity has no meaning for these inputs (a ratio over zero cost, say).
    NoMeaning,
}

impl ErrorKind {
    /// The stable word for this kind, the same in every program and language.
    pub fn code(self) -> &'static str {
        match self {
            ErrorKind::RateRange => "rate-range",
            ErrorKind::OutsideDomain => "outside-domain",
            ErrorKind::NotFinite => "not-finite",
            ErrorKind::Shape => "shape",
            ErrorKind::Syntax => "syntax",
            ErrorKind::UnknownSchedule => "unknown-schedule",
            ErrorKind::BadSchedule => "bad-schedule",
            ErrorKind::Weights => "weights",
            ErrorKind::Edges => "edges",
            ErrorKind::NeedsBase => "needs-base",
            ErrorKind::NeedsLength => "needs-length",
            ErrorKind::Unsupported => "unsupported",
            ErrorKind::Date => "date",
            ErrorKind::Diverges => "diverges",
            ErrorKind::NoMeaning => "no-meaning",
        }
    }
}

/// An error of this library. No result is returned beside it.
#[derive(Clone, Debug, PartialEq)]
pub struct Error(Box<Inner>);

#[derive(Clone, Debug, PartialEq)]
struct Inner {
    kind: ErrorKind,
    argument: &'static str,
    index: Option<usize>,
    at: Option<usize>,
    message: String,
    hint: Option<String>,
}

impl Error {
    /// An error about `argument`, with a message that says what was found and what is allowed.
    pub fn new(kind: ErrorKind, argument: &'static str, message: impl Into<String>) -> Self {
        Error(Box::new(Inner { kind, argument, index: None, at: None, message: message.into(), hint: None }))
    }

    /// Adds the index within an array argument, counted from 0.
    #[must_use]
    pub fn with_index(mut self, index: usize) -> Self {
        self.0.index = Some(index);
        self
    }

    /// Adds the character of a text (counted from 0, in characters) that the error points at.
    #[must_use]
    pub fn with_at(mut self, at: usize) -> Self {
        self.0.at = Some(at);
        self
    }

    /// Adds what to do about it, as a phrase after "Try:".
    #[must_use]
    pub fn with_hint(mut self, hint: impl Into<String>) -> Self {
        self.0.hint = Some(hint.into());
        self
    }

    /// The same error about another argument, as the caller names it.
    #[must_use]
    pub(crate) fn about(mut self, argument: &'static str) -> Self {
        self.0.argument = argument;
        self
    }

    /// What kind of error this is.
    pub fn kind(&self) -> ErrorKind {
        self.0.kind
    }

    /// The stable word for the kind.
    pub fn code(&self) -> &'static str {
        self.0.kind.code()
    }

    /// The name of the argument the error is about.
    pub fn argument(&self) -> &'static str {
        self.0.argument
    }

    /// The index within that argument, where it is an array.
    pub fn index(&self) -> Option<usize> {
        self.0.index
    }

    /// The character within that argument, where it is a text.
    pub fn at(&self) -> Option<usize> {
        self.0.at
    }

    /// The message, without argument, index and hint.
    pub fn message(&self) -> &str {
        &self.0.message
    }

    /// What to do about it.
    pub fn hint(&self) -> Option<&str> {
        self.0.hint.as_deref()
    }
}

impl fmt::Display for Error {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}", self.0.argument)?;
        if let Some(index) = self.0.index {
            write!(f, "[{index}]")?;
        }
        write!(f, ": {} ({})", self.0.message, self.code())
    }
}

impl std::error::Error for Error {}
