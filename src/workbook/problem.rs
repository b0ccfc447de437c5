//! What is wrong with a workbook, where, and what to do: problems, and the error that ends a run.

use std::fmt;

use serde::{Deserialize, Serialize};

use crate::codes::CODES;
use crate::references::{Area, Range, SheetRange, quote_sheet};

/// How bad a problem is.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Severity {
    /// Worth knowing; changes nothing.
    Note,
    /// The run goes on; the report and the audit sheets say so.
    Warning,
    /// The workbook is not filled.
    Error,
}

/// Where in a workbook a problem is.
#[derive(Clone, Debug, Default, PartialEq, Eq, Hash, Serialize, Deserialize)]
pub struct Place {
    /// The sheet's name as the user sees it.
    pub sheet: Option<String>,
    /// The cells.
    pub range: Option<Range>,
    /// The defined name or heading it goes by.
    pub name: Option<String>,
    /// The line, of a problem that is in a text of its own: a plan file.
    pub line: Option<u32>,
}

impl Place {
    /// Cells of a sheet.
    pub fn cells(sheet: &str, range: Range) -> Self {
        Place { sheet: Some(sheet.to_owned()), range: Some(range), ..Place::default() }
    }

    /// Cells along a row or column; the rectangle around them where they come in pieces.
    pub fn area(at: &Area) -> Self {
        Place::cells(&at.sheet, at.hull().range)
    }

    /// A defined name, where it has no cells to point at.
    pub fn name(name: &str) -> Self {
        Place { name: Some(name.to_owned()), ..Place::default() }
    }

    /// A line of a text.
    pub fn line(line: u32) -> Self {
        Place { line: Some(line), ..Place::default() }
    }

    /// Whether the first of some cells is one of its.
    pub(crate) fn holds(&self, at: &SheetRange) -> bool {
        self.sheet.as_ref() == Some(&at.sheet)
            && self.range.is_some_and(|range| range.contains(at.range.first))
    }

    /// Its cells without the name they go by: `Sheet1!B2`, for programs.
    pub fn cells_words(&self) -> String {
        let name = if self.sheet.is_some() { None } else { self.name.clone() };
        Place { name, ..self.clone() }.to_string()
    }

    /// Adds the defined name or heading in brackets.
    #[must_use]
    pub fn called(mut self, name: &str) -> Self {
        self.name = Some(name.to_owned());
        self
    }
}

impl fmt::Display for Place {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match (&self.sheet, self.range, &self.name) {
            (Some(sheet), Some(range), name) => {
                write!(f, "{}!{range}", quote_sheet(sheet))?;
                name.as_ref().map_or(Ok(()), |name| write!(f, " [{name}]"))
            }
            (Some(sheet), None, name) => {
                write!(f, "{}", quote_sheet(sheet))?;
                name.as_ref().map_or(Ok(()), |name| write!(f, " [{name}]"))
            }
            (None, _, Some(name)) => write!(f, "[{name}]"),
            (None, _, None) => match self.line {
                Some(line) => write!(f, "line {line}"),
                None => write!(f, "workbook"),
            },
        }
    }
}

/// One problem. Codes are short stable kebab words, listed in [`CODES`].
#[derive(Clone, Debug, PartialEq, Eq, Hash, Serialize)]
pub struct Problem {
    /// The stable word.
    pub code: &'static str,
    /// How bad it is.
    pub severity: Severity,
    /// Where it is.
    pub place: Place,
    /// What was found and what is allowed.
    pub message: String,
    /// What to do, as a phrase after "Try:".
    pub hint: Option<String>,
}

impl Problem {
    /// A problem that keeps the workbook from being filled.
    pub fn error(code: &'static str, place: Place, message: impl Into<String>) -> Self {
        Problem { code, severity: Severity::Error, place, message: message.into(), hint: None }
    }

    /// A problem that is reported while the run goes on.
    pub fn warning(code: &'static str, place: Place, message: impl Into<String>) -> Self {
        Problem { severity: Severity::Warning, ..Problem::error(code, place, message) }
    }

    /// Adds what to do about it.
    #[must_use]
    pub fn hint(mut self, hint: impl Into<String>) -> Self {
        self.hint = Some(hint.into());
        self
    }
}

/// A problem as another process wrote it down.
#[derive(Deserialize)]
struct Written {
    #[serde(rename = "code")]
    word: String,
    severity: Severity,
    place: Place,
    message: String,
    hint: Option<String>,
}

impl<'de> Deserialize<'de> for Problem {
    fn deserialize<D: serde::Deserializer<'de>>(from: D) -> std::result::Result<Self, D::Error> {
        let Written { word, severity, place, message, hint } = Written::deserialize(from)?;
        let known = CODES.iter().find(|code| code.code == word);
        let unknown = || serde::de::Error::custom(format!("{word} is no code of a problem"));
        let known = known.ok_or_else(unknown)?;
        Ok(Problem { severity, hint, ..Problem::error(known.code, place, message) })
    }
}

impl fmt::Display for Problem {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}: {} ({})", self.place, self.message, self.code)
    }
}

/// The error of this crate: the run on this workbook ended, and no output was left.
#[derive(Debug)]
pub struct WorkbookError {
    problems: Vec<Problem>,
}

/// Codes of problems that are about files and places, or about what is asked for, not about what a workbook holds.
const FILE_CODES: [&str; 6] =
    ["cannot-read", "cannot-write", "output-changed", "output-exists", "output-is-input", "plan-appraisal"];

/// The result of a fallible function of this crate.
pub type Result<T> = std::result::Result<T, WorkbookError>;

impl WorkbookError {
    /// Everything that was found, errors and warnings, in sheet order.
    pub fn problems(&self) -> &[Problem] {
        &self.problems
    }

    /// Whether the run could not start for want of a file or a place to write, rather than for what a workbook holds.
    pub fn is_about_files(&self) -> bool {
        let about_files = |p: &Problem| FILE_CODES.contains(&p.code);
        !self.problems.is_empty() && self.problems.iter().all(about_files)
    }
}

impl From<Problem> for WorkbookError {
    fn from(problem: Problem) -> Self {
        WorkbookError { problems: vec![problem] }
    }
}

impl From<Vec<Problem>> for WorkbookError {
    fn from(problems: Vec<Problem>) -> Self {
        WorkbookError { problems }
    }
}

impl fmt::Display for WorkbookError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for (i, problem) in self.problems.iter().enumerate() {
            if i > 0 {
                writeln!(f)?;
            }
            write!(f, "{problem}")?;
        }
        Ok(())
    }
}

impl std::error::Error for WorkbookError {}
