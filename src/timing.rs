//! Where in its year a flow and the base stand, and what offset that gives.

use std::fmt;
use std::str::FromStr;

use crate::{Error, ErrorKind, Result, check};

/// A position within a year.
///
/// The words are `start`, `middle`, `end` and `averaged`; `Display` prints them, `FromStr` reads them in any
/// case and refuses others with [`ErrorKind::Syntax`].
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Position {
    /// 0: the year's first day.
    Start,
    /// 1/2.
    Middle,
    /// 1: the year's last day.
    End,
    /// The mean of the factors at start and end (flows only).
    Averaged,
}

impl Position {
    /// The part of the year gone by: 0, 1/2 or 1; none for [`Position::Averaged`], which is two positions.
    pub fn shift(self) -> Option<f64> {
        match self {
            Position::Start => Some(0.0),
            Position::Middle => Some(0.5),
            Position::End => Some(1.0),
            Position::Averaged => None,
        }
    }
}

impl fmt::Display for Position {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            Position::Start => "start",
            Position::Middle => "middle",
            Position::End => "end",
            Position::Averaged => "averaged",
        })
    }
}

impl FromStr for Position {
    type Err = Error;

    fn from_str(text: &str) -> Result<Self> {
        match text.trim().to_ascii_lowercase().as_str() {
            "start" => Ok(Position::Start),
            "middle" => Ok(Position::Middle),
            "end" => Ok(Position::End),
            "averaged" => Ok(Position::Averaged),
            word => Err(syntax(format!("found \"{word}\", allowed: start, middle, end, averaged"))),
        }
    }
}

/// The positions of flows and base; both `End` unless said, so that the base year is undiscounted.
///
/// The text is `flows middle, base end`: either part may be missing and is then `end`, their order, case and
/// spacing do not matter, and `base averaged` is refused. `Display` prints both parts.
///
/// ```
/// use hence_core::{Position, Timing};
/// let timing: Timing = "flows middle".parse().unwrap();
/// assert_eq!(timing, Timing { flows: Position::Middle, base: Position::End });
/// assert_eq!(timing.to_string(), "flows middle, base end");
/// let error = "flows middle, base averaged".parse::<Timing>().unwrap_err();
/// assert_eq!(error.message(), "the base is one moment and cannot be averaged, allowed: start, middle, end");
/// ```
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub struct Timing {
    /// Of the flows.
    pub flows: Position,
    /// Of the base; never `Averaged`.
    pub base: Position,
}

impl Default for Timing {
    fn default() -> Self {
        Timing { flows: Position::End, base: Position::End }
    }
}

/// The offset or offsets of one flow.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum TimedOffset {
    /// One moment.
    At(f64),
    /// The factor is the mean of the factors at these two moments, the start and the end of the year.
    Averaged(f64, f64),
}

impl TimedOffset {
    /// The mean of a quantity over the moments: the quantity itself where there is one.
    ///
    /// **Errors**: whatever `at` returns.
    pub fn mean(self, at: impl Fn(f64) -> Result<f64>) -> Result<f64> {
        match self {
            TimedOffset::At(t) => at(t),
            TimedOffset::Averaged(start, end) => Ok(0.5 * at(start)? + 0.5 * at(end)?),
        }
    }
}

impl Timing {
    /// The offset of a flow whose year is a number of years after the base year.
    ///
    /// **Formula**: t = (year - base year) + position of flows - position of base, with the positions 0, 1/2, 1.
    ///
    /// **Arguments**: `years_after_base`, year - base year, any finite number; negative before the base.
    ///
    /// **Returns**: t in years; with averaged flows the offsets of the start and the end of the flow's year.
    ///
    /// **Accuracy**: exact for whole and half years.
    ///
    /// **Errors**: `NotFinite` for a NaN or an infinity; `NoMeaning` where the base is averaged.
    ///
    /// ```
    /// use hence_core::{Position, TimedOffset, Timing};
    /// let timing = Timing { flows: Position::Middle, base: Position::Start };
    /// assert_eq!(timing.offset(3.0).unwrap(), TimedOffset::At(3.5));
    /// let averaged = Timing { flows: Position::Averaged, base: Position::End };
    /// assert_eq!(averaged.offset(1.0).unwrap(), TimedOffset::Averaged(0.0, 1.0));
    /// ```
    pub fn offset(self, years_after_base: f64) -> Result<TimedOffset> {
        check::finite("years_after_base", years_after_base)?;
        let base = self.base.shift().ok_or_else(averaged_base)?;
        Ok(match self.flows.shift() {
            Some(flows) => TimedOffset::At(years_after_base + (flows - base)),
            None => TimedOffset::Averaged(years_after_base - base, years_after_base + (1.0 - base)),
        })
    }
}

fn averaged_base() -> Error {
    let message = "the base is one moment and cannot be averaged, allowed: start, middle, end";
    Error::new(ErrorKind::NoMeaning, "timing", message).with_hint("base middle")
}

fn syntax(message: String) -> Error {
    Error::new(ErrorKind::Syntax, "timing", message).with_hint("flows middle, base end")
}

impl fmt::Display for Timing {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "flows {}, base {}", self.flows, self.base)
    }
}

impl FromStr for Timing {
    type Err = Error;

    fn from_str(text: &str) -> Result<Self> {
        let (mut flows, mut base) = (None, None);
        let mut start = 0; // characters before the part
        for part in text.split(',') {
            let at = start + part.chars().take_while(|c| c.is_whitespace()).count();
            start += part.chars().count() + 1;
            let mut words = part.split_whitespace();
            let subject = words.next().unwrap_or("").to_ascii_lowercase();
            let slot = match subject.as_str() {
                "flows" => &mut flows,
                "base" => &mut base,
                _ => {
                    let message = format!("found \"{}\", expected flows or base", part.trim());
                    return Err(syntax(message).with_at(at));
                }
            };
            let (position, more) = (words.next().unwrap_or(""), words.next());
            if more.is_some() {
                let message = format!("found \"{}\", expected {subject} and one position", part.trim());
                return Err(syntax(message).with_at(at));
            }
            let position: Position = position.parse().map_err(|error: Error| error.with_at(at))?;
            if slot.replace(position).is_some() {
                return Err(syntax(format!("{subject} is stated twice")).with_at(at));
            }
            if base == Some(Position::Averaged) {
                return Err(averaged_base().with_at(at));
            }
        }
        Ok(Timing { flows: flows.unwrap_or(Position::End), base: base.unwrap_or(Position::End) })
    }
}

/// The sentence with numbers that states a timing: "a flow in 2026 has factor 1.0000, in 2027 0.9662".
///
/// **Arguments**: `years`, the label and the factor of each year to be named, the first two as a rule.
///
/// **Returns**: the sentence without a full stop, factors with four decimals; empty without years.
///
/// ```
/// let sentence = hence_core::timing_sentence(&[("2026", 1.0), ("2027", 1.0 / 1.035)]);
/// assert_eq!(sentence, "a flow in 2026 has factor 1.0000, in 2027 0.9662");
/// ```
pub fn timing_sentence(years: &[(&str, f64)]) -> String {
    let mut sentence = String::new();
    for (place, (label, factor)) in years.iter().enumerate() {
        sentence += &match place {
            0 => format!("a flow in {label} has factor {factor:.4}"),
            _ => format!(", in {label} {factor:.4}"),
        };
    }
    sentence
}
