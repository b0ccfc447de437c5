//! The rate line: the one-line text of a curve, parsed and printed.

mod clauses;
mod cursor;
mod distribution;
mod figures;
mod lexer;
mod number;
mod parser;
mod print;
mod suggest;
mod words;

pub use figures::{parse_number, parse_percentage};
pub(crate) use number::check_flat;
pub use number::percent;
pub(crate) use number::{plain, rounded_number, rounded_percent};
pub use suggest::distance;
pub(crate) use suggest::nearest;
pub(crate) use words::{in_words, is_word};

use crate::{Error, Position, Result, Spec, Timing};
use std::fmt;

/// The longest rate line that is read, in characters; a longer curve belongs into a schedule file.
pub(crate) const MAX_CHARS: usize = 4096;

/// How deep mixtures may be nested.
pub(crate) const MAX_DEPTH: usize = 8;

/// The positions that a text states; an unsaid one stays open, so that a schedule may supply it.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub(crate) struct Positions {
    pub flows: Option<Position>,
    pub base: Option<Position>,
}

impl Positions {
    /// These positions, and those of `other` where these are silent.
    pub fn or(self, other: Positions) -> Positions {
        Positions { flows: self.flows.or(other.flows), base: self.base.or(other.base) }
    }

    /// The timing, `end` where nothing is said; none where neither is stated.
    pub fn timing(self) -> Option<Timing> {
        (self != Positions::default()).then(|| Timing {
            flows: self.flows.unwrap_or(Position::End),
            base: self.base.unwrap_or(Position::End),
        })
    }
}

/// A parsed rate line: a curve, and the timing where the line states one.
///
/// ```text
/// 3.5%    3.5% continuous                                 a flat rate; 0.035 is read too
/// 3.5% to 30, 3% to 75, 2% after                          forward rates by band; `; edges from 2026`
/// 2.5% to 2070, 1.5% after                                an edge of 1000 or more is a calendar year
/// 4% to 10, 3% after; whole horizon by flow               or `by length`; stepped
/// 3.9% at 3, 4% at 10; whole horizon by length, interpolated
/// preference 1%, hazard 0.5%, elasticity 1, growth 2%     `; exact` or `; continuous`
/// preference 1%, elasticity 2, growth 2% to 50, 1% after
/// preference 1%, elasticity 2, growth 2% sd 3.6%          or `log growth`, with `persistence 0.7`
/// gamma mean 4% sd 3%
/// 0.5 of (1%), 0.5 of (7% continuous)
/// ```
///
/// After any of them: `; flows middle, base start` (start, middle, end; flows averaged).
///
/// `Display` prints the canonical line, which parses back to the same rate line: lower case, one space, `;`
/// between the curve, what qualifies it, and the timing; each rate the shortest percentage of its double.
///
/// ```
/// use hence_core::{Position, RateLine};
/// let line = RateLine::parse("3.50% TO 30,3% after ;flows MIDDLE")?;
/// assert_eq!(line.to_string(), "3.5% to 30, 3% after; flows middle");
/// assert_eq!(line.timing().map(|timing| timing.flows), Some(Position::Middle));
/// # Ok::<(), hence_core::Error>(())
/// ```
#[derive(Clone, Debug, PartialEq)]
pub struct RateLine {
    pub(crate) spec: Spec,
    pub(crate) positions: Positions,
}

impl RateLine {
    /// Reads a rate line.
    ///
    /// **Arguments**: `text`, at most 4,096 characters; case and spacing do not matter. A number without `%` is a
    /// flat yearly rate in (-0.5, 1], as in a number cell; mixtures may be nested 8 deep.
    /// **Errors**: `Syntax`, `RateRange`, `Edges` or `Weights` about the argument "basis", each with the character
    /// it points at ([`Error::at`]) and, where one helps, what to write instead ([`Error::hint`]).
    ///
    /// ```
    /// use hence_core::RateLine;
    /// let error = RateLine::parse("3,5% to 30, 3% after").unwrap_err();
    /// assert_eq!(error.at(), Some(1));
    /// assert_eq!(error.hint(), Some("3.5% to 30, 3% after"));
    /// ```
    pub fn parse(text: &str) -> Result<Self> {
        let line = parser::line(text).map_err(|fault| fault.explained(text))?;
        // What is accepted must also be accepted in its canonical form.
        let chars = line.to_string().chars().count();
        if chars > MAX_CHARS { Err(lexer::too_long(chars)) } else { Ok(line) }
    }

    /// What the line says of the curve.
    pub fn spec(&self) -> &Spec {
        &self.spec
    }

    /// The timing it states; a position that it leaves out is `end`. None where it states neither.
    pub fn timing(&self) -> Option<Timing> {
        self.positions.timing()
    }
}

impl fmt::Display for RateLine {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}{}", self.spec, print::timing_clauses(self.positions))
    }
}

/// Reads the timing clauses that follow the character `from` of `text`, and nothing else.
///
/// What stands before is not looked at; errors point into the whole text.
pub(crate) fn positions(text: &str, from: usize) -> Result<Positions> {
    parser::positions(text, from).map_err(|fault| fault.error)
}

/// The timing clauses as they follow a curve or an id: "", or "; flows middle, base start".
pub(crate) fn timing_clauses(positions: Positions) -> String {
    print::timing_clauses(positions)
}

/// An error on its way out, with the decimal comma that caused it.
#[derive(Debug)]
pub(crate) struct Fault {
    pub error: Error,
    comma: Option<usize>,
}

impl From<Error> for Fault {
    fn from(error: Error) -> Self {
        Fault { error, comma: None }
    }
}

impl Fault {
    /// The error, with the corrected text as its hint where decimal commas are the cause.
    fn explained(self, text: &str) -> Error {
        let Some(first) = self.comma else { return self.error };
        let mut chars: Vec<char> = text.trim_end().chars().collect();
        let mut comma = Some(first);
        // One comma is mended at a time; the bound keeps hostile texts cheap.
        for _ in 0..64 {
            let Some(at) = comma else { break };
            chars[at] = '.';
            comma = parser::line(&chars.iter().collect::<String>()).err().and_then(|fault| fault.comma);
        }
        self.error.with_hint(chars.iter().collect::<String>().trim().to_string())
    }
}

/// A piece of the user's text as a message may show it: short, without control characters.
pub(crate) fn quoted(text: &str) -> String {
    let shown: String = text.chars().take(40).flat_map(char::escape_debug).collect();
    let more = if text.chars().nth(40).is_some() { "..." } else { "" };
    format!("`{shown}{more}`")
}
