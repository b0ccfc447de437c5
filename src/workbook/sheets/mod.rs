//! hence's own sheets: Discounting, which the filled formulas refer to, and the audit sheets.

use crate::appraisal::Appraisal;
use crate::outcome::ChoiceOutcome;
use crate::problem::Problem;
use crate::references::{Cell, SheetRange};

/// The visible names of hence's sheets in this workbook, chosen so that they clash with nothing.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct SheetNames {
    /// Permanent; the filled formulas refer to it.
    pub discounting: String,
    /// What, from what, the basis, every check, the verdict.
    pub summary: String,
    /// Every numeric row along the years: its role, or "not valued".
    pub coverage: String,
    /// Each factor and total rebuilt by a second route, live.
    pub checks: String,
    /// Sheet, cell, role, before, after.
    pub changes: String,
    /// Factor curve, PV by era, NPV against a flat rate.
    pub charts: String,
}

/// What the run was told, for the summary. Nothing here depends on time, host or place of output.
#[derive(Clone, Debug, PartialEq)]
pub struct Meta {
    /// The input's file name, without folders.
    pub input_name: String,
    /// SHA-256 of the input file, lower-case hexadecimal.
    pub input_sha256: String,
    /// SHA-256 of the canonical basis texts, one a line, by option.
    pub basis_sha256: String,
    /// The version of hence.
    pub version: String,
    /// `--as-of`, as given.
    pub as_of: Option<String>,
    /// `--by`, as given.
    pub by: Option<String>,
    /// Targets got live formulas; else plain numbers.
    pub formulas: bool,
}

/// One cell that this fill changed.
#[derive(Clone, Debug, PartialEq)]
pub struct Change {
    /// The cell.
    pub at: SheetRange,
    /// Its role in words.
    pub role: String,
    /// What it held, as text ("" for blank; formulas with their equals sign).
    pub before: String,
    /// What it holds now.
    pub after: String,
}

/// One target cell: what it shows and what the basis gives. The audit's checks are made from these.
#[derive(Clone, Debug, PartialEq)]
pub struct TargetCell {
    /// Index of the option.
    pub choice: usize,
    /// Index of the target in that option.
    pub target: usize,
    /// Index of the cell within the target.
    pub index: usize,
    /// The cell.
    pub at: SheetRange,
    /// What the basis gives; `None` where the measure has no number (text is written instead).
    pub expected: Option<f64>,
    /// Written by this fill (else found there, and compared).
    pub filled: bool,
    /// Allowed absolute difference.
    pub tolerance: f64,
}

/// What a person had typed on an audit sheet of an earlier fill, carried over.
#[derive(Clone, Debug, PartialEq)]
pub struct Carried {
    /// The sheet's visible name.
    pub sheet: String,
    /// The cell.
    pub cell: Cell,
    /// The text or number as text.
    pub text: String,
}

/// Everything the sheets are made from.
#[derive(Clone, Debug)]
pub struct AuditInput<'a> {
    /// The workbook, resolved.
    pub appraisal: &'a Appraisal,
    /// One outcome a choice, in the same order.
    pub outcomes: &'a [ChoiceOutcome],
    /// Names of the sheets to make.
    pub names: &'a SheetNames,
    /// What the run was told.
    pub meta: &'a Meta,
    /// Every target cell.
    pub cells: &'a [TargetCell],
    /// What this fill changed.
    pub changes: &'a [Change],
    /// Warnings and errors to list.
    pub problems: &'a [Problem],
    /// Notes to put back.
    pub carried: &'a [Carried],
}
