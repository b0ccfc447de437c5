//! From defined names to an appraisal: options, years, streams and targets, each problem with its cell.

mod alike;
mod blocks;
mod cells;
mod choices;
mod counted;
mod coverage;
mod dynamic;
mod find;
mod groups;
mod planned;
mod prices;
mod report;
mod series;
mod settings;
mod spans;
mod streams;
mod targets;
mod texts;
mod welfare;
mod years;

use std::collections::{BTreeMap, BTreeSet};
use std::rc::Rc;

use crate::appraisal::{Appraisal, Setting};
use crate::model::{SheetFacts, Workbook};
use crate::package::Package;
use crate::planfile::Part;
use crate::problem::{Place, Problem, Result, Severity, WorkbookError};
use crate::reading::{Grid, ReadCell, Sheets};
use crate::references::{Area, Cell, Range, SheetRange};
use crate::roles::Role;

pub(crate) use cells::text_as_number;
pub(crate) use counted::sum_of;
pub use report::{Found, NamesReport, names};
pub use series::{SeriesGrowth, growth_of_series};

/// What the run was told besides the workbook.
#[derive(Clone, Copy, Debug, Default)]
pub struct Options<'a> {
    /// `--role ROLE=RANGE`, split at the equals sign: a role as in names, with or without `hence_`, and
    /// `Sheet!A1:B2` or a defined name of the workbook. They beat names of the same role.
    pub roles: &'a [(String, String)],
    /// `--basis`: beats the workbook's.
    pub basis: Option<&'a str>,
    /// `--base`: beats the workbook's.
    pub base: Option<&'a str>,
    /// `--prices`: beats the workbook's price basis.
    pub prices: Option<&'a str>,
    /// What a plan says: it beats names, and the command line beats it.
    pub plan: Option<&'a Part>,
}

/// Reads what a workbook says of its appraisal.
///
/// # Arguments
/// `package`, `book`: the workbook, after its preflight. `options`: what the command line said.
///
/// # Returns
/// Options, years, streams and targets; warnings and notes in [`Appraisal::problems`].
///
/// # Errors
/// Every problem that was found, in sheet order, warnings too, where at least one keeps the workbook from
/// being filled.
pub fn resolve(package: &Package, book: &Workbook, options: &Options) -> Result<Appraisal> {
    let mut context = Context::open(package, book)?;
    if let Some(plan) = options.plan {
        context.problems.extend(plan.problems.iter().cloned());
        context.appraisal = plan.appraisal.clone();
        context.planned = true;
        context.lost.extend(&plan.lost);
    }
    let named = find::find(&mut context, options.roles, options.plan);
    let ranges: Vec<SheetRange> =
        named.iter().filter(|named| !named.too_large()).flat_map(find::Named::pieces).collect();
    if let Err(error) = context.sheets.load(&ranges) {
        context.problems.extend(error.problems().iter().cloned());
        return Err(context.ended());
    }
    let mut sheets: BTreeSet<String> = named.iter().map(|named| named.at.sheet.clone()).collect();
    sheets.extend(options.plan.iter().flat_map(|plan| plan.elsewhere.clone()));
    let split = groups::split(&mut context, named);
    let built = choices::build(&mut context, &split, options);
    if context.failed() {
        return Err(context.ended());
    }
    alike::tell(&mut context, &built, &sheets);
    let coverage = coverage::coverage(&mut context, &built);
    if context.failed() {
        return Err(context.ended());
    }
    let problems = context.sorted();
    let choices::Built { axes, choices, baseline, decide } = built;
    let settings = std::mem::take(&mut context.settings).into_values().collect();
    Ok(Appraisal { axes, choices, baseline, decide, settings, coverage, problems, date1904: book.date1904 })
}

/// What every step needs: the workbook, its cells, and the list of what was found wrong.
struct Context<'a> {
    package: &'a Package,
    book: &'a Workbook,
    sheets: Sheets<'a>,
    facts: BTreeMap<String, Rc<SheetFacts>>,
    settings: BTreeMap<(String, Cell), Setting>,
    problems: Vec<Problem>,
    /// Which of several appraisals of the workbook this is.
    appraisal: Option<String>,
    /// There is a plan.
    planned: bool,
    /// Roles that the plan gives to cells which are not there.
    lost: BTreeSet<Role>,
}

impl<'a> Context<'a> {
    /// The workbook with nothing reported yet but what is wrong with its names for hence.
    fn open(package: &'a Package, book: &'a Workbook) -> Result<Self> {
        let sheets = Sheets::open(package, book)?;
        let ours = |problem: &&Problem| {
            let name = problem.place.name.as_deref().unwrap_or_default();
            crate::roles::parse_name(name).is_some()
        };
        let problems = book.problems.iter().filter(ours).cloned().collect();
        let (facts, settings) = (BTreeMap::new(), BTreeMap::new());
        let (appraisal, planned, lost) = (None, false, BTreeSet::new());
        Ok(Context { package, book, sheets, facts, settings, problems, appraisal, planned, lost })
    }

    /// What a sheet holds besides values; nothing where it cannot be read, which is reported.
    fn facts(&mut self, sheet: &str) -> Option<Rc<SheetFacts>> {
        if let Some(facts) = self.facts.get(sheet) {
            return Some(facts.clone());
        }
        match self.book.facts(self.package, self.book.sheet_index(sheet)?) {
            Ok(facts) => {
                let facts = Rc::new(facts);
                self.facts.insert(sheet.to_owned(), Rc::clone(&facts));
                Some(facts)
            }
            Err(error) => {
                self.problems.extend(error.problems().iter().cloned());
                None
            }
        }
    }

    fn report(&mut self, problem: Problem) {
        self.problems.push(problem);
    }

    /// The cells of a range; where they cannot be read, that is reported and there is nothing.
    fn grid(&mut self, at: &SheetRange) -> Option<Grid> {
        match self.sheets.range(at) {
            Ok(grid) => Some(grid),
            Err(error) => {
                self.problems.extend(error.problems().iter().cloned());
                None
            }
        }
    }

    /// The cells of an area in order, likewise.
    fn along(&mut self, area: &Area) -> Option<Vec<(Cell, ReadCell)>> {
        let mut cells = Vec::new();
        for piece in area.pieces() {
            let grid = self.grid(&piece)?;
            cells.extend(grid.iter().map(|(cell, content)| (cell, content.clone())));
        }
        Some(cells)
    }

    fn failed(&self) -> bool {
        self.problems.iter().any(|problem| problem.severity == Severity::Error)
    }

    fn ended(&mut self) -> WorkbookError {
        self.sorted().into()
    }

    /// The problems once each, in sheet order, neighbouring cells of one cause as a range.
    fn sorted(&mut self) -> Vec<Problem> {
        let order: Vec<&str> = self.book.sheets.iter().map(|sheet| sheet.name.as_str()).collect();
        let mut seen = BTreeSet::new();
        let mut problems = std::mem::take(&mut self.problems);
        problems.sort_by_cached_key(|problem| {
            let sheet = problem.place.sheet.as_deref();
            let index = sheet
                .map_or(0, |name| 1 + order.iter().position(|known| *known == name).unwrap_or(order.len()));
            let (cell, line) = (problem.place.range.map(|range| range.first), problem.place.line);
            (index, cell, line, problem.code, problem.message.clone())
        });
        problems.retain(|problem| seen.insert(format!("{problem} {:?}", problem.hint)));
        merge_neighbours(problems)
    }
}

/// What a check gives: a value, or the one problem that was found.
type Checked<T> = std::result::Result<T, Box<Problem>>;

/// Something worth knowing that changes nothing.
fn note(code: &'static str, place: Place, message: impl Into<String>) -> Problem {
    Problem { severity: Severity::Note, ..Problem::error(code, place, message) }
}

/// Joins problems that differ only in their cells, where the cells lie beside each other.
fn merge_neighbours(problems: Vec<Problem>) -> Vec<Problem> {
    let mut merged: Vec<Problem> = Vec::new();
    for problem in problems {
        let joined = problem.place.range.and_then(|next| {
            merged.iter_mut().rev().find_map(|before| {
                let same = before.code == problem.code
                    && before.severity == problem.severity
                    && before.message == problem.message
                    && before.hint == problem.hint
                    && before.place.sheet == problem.place.sheet
                    && before.place.name == problem.place.name;
                let range = before.place.range.filter(|_| same)?;
                beside(&range, &next).then(|| before.place.range = Some(range.hull(&next)))
            })
        });
        if joined.is_none() {
            merged.push(problem);
        }
    }
    merged
}

/// Whether `next` continues `range` along its row or its column.
fn beside(range: &Range, next: &Range) -> bool {
    let across = range.first.row == next.first.row
        && range.last.row == next.last.row
        && next.first.col == range.last.col + 1;
    let down = range.first.col == next.first.col
        && range.last.col == next.last.col
        && next.first.row == range.last.row + 1;
    across || down
}
