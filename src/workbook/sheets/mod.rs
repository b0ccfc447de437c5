//! hence's own sheets: Discounting, which the filled formulas refer to, and the audit sheets.

mod adjustments;
pub(crate) mod changes;
mod charts;
mod checks;
mod coverage;
mod discounting;
mod growth_route;
mod lines;
mod multipliers;
mod nets;
mod offsets;
pub(crate) mod own;
mod own_factors;
mod periods;
mod rebuild;
mod second_route;
mod sensitivity;
mod settings;
mod several;
mod summary;
mod tails;
mod targets;
mod totals;
mod welfare;

use hence_core::{Basis, CAUTION};

use crate::appraisal::Appraisal;
use crate::compare::Sensitivity;
use crate::graft::ChartFinish;
use crate::layout::{Block, Layout};
use crate::names_edit::NewName;
use crate::outcome::ChoiceOutcome;
use crate::problem::{Problem, Result};
use crate::references::{Cell, SheetRange};
use crate::report::Companion;
use crate::writer::{Content, Sheet, Style};

pub(crate) use adjustments::adjusted;
pub(crate) use charts::era_words;
pub(crate) use lines::DIFFERS;
pub use own::{APPRAISAL, DIGEST, OWN, VERDICT};
pub use several::{Sibling, overall, package};
pub use summary::VERDICT_AGREES;
pub(crate) use targets::role_words;

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
    /// Other rates, switching values, streams by their effect, where the rate comes from.
    pub sensitivity: String,
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
    /// The file's name and SHA-256 of the plan that said what is where, if any.
    pub plan: Option<(String, String)>,
    /// Which of several appraisals of the workbook this is.
    pub appraisal: Option<String>,
    /// SHA-256 of what was asked for: [`FillRequest::sha256`](crate::fill::FillRequest::sha256).
    pub request_sha256: String,
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
    /// A formula whose result is not known until a spreadsheet program computes it.
    pub awaits: bool,
}

/// What a person had typed on an audit sheet of an earlier fill, carried over.
#[derive(Clone, Debug, PartialEq)]
pub struct Carried {
    /// The sheet's visible name.
    pub sheet: String,
    /// The cell.
    pub cell: Cell,
    /// The text, number or formula.
    pub content: Content,
    /// How it looks.
    pub style: Style,
}

impl Carried {
    fn write(&self, sheet: &mut Sheet, Cell { row, col }: Cell) {
        match &self.content {
            Content::Text(text) => sheet.text(row, col, self.style, text),
            Content::Number(x) => sheet.number(row, col, self.style, *x),
            Content::Logical(truth) => sheet.logical(row, col, self.style, *truth),
            Content::Formula(text, result) => sheet.formula(row, col, self.style, text, result.clone()),
        }
    }
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
    /// One a choice: the same under the schedule that its body wants run beside the declared one.
    pub companions: &'a [Option<Companion>],
    /// What other rates would make of the decision.
    pub sensitivity: &'a Sensitivity,
    /// Notes to put back.
    pub carried: &'a [Carried],
    /// What differs in the package by design, a sentence each.
    pub differs: &'a [String],
    /// The other appraisals, on whose summary the verdict on all of them stands; else none.
    pub siblings: &'a [Sibling],
}

/// hence's sheets, made.
#[derive(Clone, Debug)]
pub struct Built {
    /// A package of their own, to be grafted.
    pub bytes: Vec<u8>,
    /// How to finish its charts, in their order.
    pub charts: Vec<ChartFinish>,
    /// Names to set when the sheets are grafted: the marks of ownership of each. The verdict's name and
    /// print titles come with the package.
    pub names: Vec<NewName>,
    /// The verdict, evaluated here by the second route; the cell holds it live.
    pub verdict: String,
    /// Number of checks, valued totals included, and of those that differ.
    pub checks: (usize, usize),
}

/// hence's sheets as plain data, in the order in which they stand.
#[derive(Clone, Debug)]
pub struct Composed {
    /// Discounting, then the audit sheets.
    pub sheets: Vec<Sheet>,
    /// Which of several appraisals of the workbook they are of.
    pub appraisal: Option<String>,
    /// What the name of the verdict cell refers to.
    pub verdict_at: String,
    /// Where the verdict on all appraisals stands; none on the sheets of those after the first.
    pub overall_at: Option<String>,
    /// The verdict has no result until a spreadsheet program computes it.
    pub awaits: bool,
    /// All else that [`build`] gives, its bytes still empty.
    pub built: Built,
}

/// The basis whose factors a block holds.
fn block_basis<'a>(input: &AuditInput<'a>, block: &Block) -> &'a Basis {
    let outcome = &input.outcomes[block.choice];
    block.stream.map_or(&outcome.basis, |stream| outcome.basis_of(stream))
}

/// Composes the sheet Discounting and the audit sheets.
pub fn compose(input: &AuditInput<'_>, layout: &Layout) -> Composed {
    let checks = checks::sheet(input, layout);
    let coverage = coverage::sheet(input);
    let summary = summary::sheet(input, layout, &checks, &coverage);
    let (sensitivity, mut finishes) = sensitivity::sheet(input, layout, &checks);
    let (charts, more) = charts::sheet(input, layout);
    finishes.extend(more);
    let verdict_at = summary::verdict_text(&summary.sheet.name, summary::VERDICT_CELL);
    let overall_at = summary.overall.map(|cell| summary::verdict_text(&summary.sheet.name, cell));
    let discounting = discounting::sheet(input, layout);
    let mut sheets = vec![
        discounting,
        summary.sheet,
        coverage.sheet,
        checks.sheet,
        sensitivity,
        changes::sheet(input),
        charts,
    ];
    let names = sheets.iter().flat_map(|sheet| own::marks(sheet, input.meta.appraisal.as_deref())).collect();
    for sheet in &mut sheets {
        put_back(sheet, input.carried);
    }
    let built = Built {
        bytes: Vec::new(),
        charts: finishes,
        names,
        verdict: summary.verdict,
        checks: (checks.count + coverage.valued, checks.differing.len()),
    };
    let appraisal = input.meta.appraisal.clone();
    Composed { sheets, appraisal, verdict_at, overall_at, awaits: checks.awaiting > 0, built }
}

/// Makes the sheet Discounting and the audit sheets as a package.
///
/// **Errors**: `own-sheet` where a number is not finite or a formula would be too long.
pub fn build(input: &AuditInput<'_>, layout: &Layout) -> Result<Built> {
    let composed = compose(input, layout);
    let bytes = package(std::slice::from_ref(&composed))?;
    Ok(Built { bytes, ..composed.built })
}

/// Puts notes back where they stood, or in the first free row below what hence wrote there.
fn put_back(sheet: &mut Sheet, carried: &[Carried]) {
    let used = sheet.used().last;
    let mut free = used.row + 1;
    let own: Vec<&Carried> = carried.iter().filter(|note| note.sheet == sheet.name).collect();
    for note in &own {
        if note.cell.row > used.row || note.cell.col > used.col {
            note.write(sheet, note.cell);
            free = free.max(note.cell.row + 1);
        }
    }
    for note in own.iter().filter(|note| note.cell.row <= used.row && note.cell.col <= used.col) {
        note.write(sheet, Cell { row: free, col: 0 });
        free += 1;
    }
}
