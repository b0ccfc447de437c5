//! Options side by side under several bases, and where the decision switches.

mod changes;
mod map;
mod picture;
mod search;
mod tables;

use hence_core::{Basis, Catalogue, Parameter, Spec};

use crate::appraisal::{Appraisal, COMMAND_LINE, Given};
use crate::model::Workbook;
use crate::outcome::{ChoiceOutcome, Totals};
use crate::package::Package;
use crate::planfile::PlanFile;
use crate::preflight::preflight;
use crate::problem::{Place, Problem, Result, WorkbookError};
use crate::ranking::{Worth, best, over, ranks};
use crate::report::Status;
use crate::resolve::{Options, resolve};
use crate::valuation::{from_core, value};

pub use tables::{book, change_words, heading, map_words, remark, shown, words};

pub use changes::Change;
pub use map::{Map, ZeroRow, option_letter};
pub use picture::picture;
pub use search::{Entry, MULTIPLIERS, Moved};
use search::{ramsey_basis, search, worths_at};

/// What takes part in a comparison, besides what the workbook declares.
#[derive(Clone, Debug, Default)]
pub struct CompareRequest {
    /// Rate lines or ids of schedules.
    pub against: Vec<String>,
    /// Roles for cells without a defined name: role, range.
    pub roles: Vec<(String, String)>,
    /// What is where, for a workbook without names.
    pub plan: Option<PlanFile>,
    /// Make a map over preference and this part of the rate: elasticity or growth.
    pub map: Option<Parameter>,
}

/// Why a basis takes part.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Why {
    /// The workbook declares it.
    Declared,
    /// The schedule that the declared one's body wants run beside it.
    Companion,
    /// It was asked for.
    Against,
}

impl Why {
    /// In one word.
    pub fn word(self) -> &'static str {
        match self {
            Why::Declared => "declared",
            Why::Companion => "companion",
            Why::Against => "against",
        }
    }
}

/// What one option comes to under one basis.
#[derive(Clone, Debug, PartialEq)]
pub struct Standing {
    /// The canonical basis it was valued on.
    pub basis: String,
    /// Totals, over the baseline where there is one.
    pub totals: Totals,
    /// The net present value, and how far rounding may have moved it.
    pub worth: Worth,
    /// 1 for the highest net present value; those that differ by rounding alone share a rank.
    pub rank: usize,
}

/// Every option under one basis.
#[derive(Clone, Debug)]
pub struct Side {
    /// Why it takes part.
    pub why: Why,
    /// The canonical basis; of options that declare several, all of them.
    pub basis: String,
    /// In words, with its source.
    pub words: String,
    /// One an option, in their order.
    pub standings: Vec<Standing>,
    /// The option that ranks first; none where several share that rank.
    pub best: Option<usize>,
}

/// A comparison.
#[derive(Clone, Debug)]
pub struct Comparison {
    /// Names of the options.
    pub options: Vec<String>,
    /// Which of them is the baseline.
    pub baseline: Option<usize>,
    /// The bases, the declared one first.
    pub sides: Vec<Side>,
    /// The basis whose preference, elasticity and growth were searched, where any is stated by them.
    pub ramsey: Option<String>,
    /// Its spec, where it dates the flows as the declared basis does.
    pub ramsey_spec: Option<Spec>,
    /// Switching values: an entry for every option, what it is held against and every parameter.
    pub switching: Vec<Entry>,
    /// Where the best option changes, as one parameter moves.
    pub changes: Vec<Change>,
    /// Which option is best where, as parts of the rate move.
    pub map: Option<Map>,
    /// Everything found.
    pub problems: Vec<Problem>,
}

impl Comparison {
    /// Done, unless a problem is an error.
    pub fn status(&self) -> Status {
        Status::of(&self.problems)
    }
}

/// A workbook valued on one basis.
struct Valued {
    why: Why,
    /// With that basis in it.
    appraisal: Appraisal,
    /// One an option.
    outcomes: Vec<ChoiceOutcome>,
}

/// Compares the options of one workbook; nothing is written.
///
/// # Errors
/// Everything that keeps the workbook from being read, or valued on any basis but a companion, each with its cell.
pub fn compare(package: &Package, request: &CompareRequest, catalogue: &Catalogue) -> Result<Comparison> {
    let mut problems = preflight(package)?;
    let book = Workbook::read(package)?;
    let plan = PlanFile::part_of(request.plan.as_ref(), &book)?;
    let mut appraisal = resolve(
        package,
        &book,
        &Options { roles: &request.roles, plan: plan.as_ref(), ..Options::default() },
    )?;
    problems.append(&mut appraisal.problems);
    let (outcomes, found) = value(&appraisal, catalogue)?;
    problems.extend(found);
    let declared = Valued { why: Why::Declared, appraisal, outcomes };
    let valued = value_all(declared, &request.against, catalogue, &mut problems)?;
    let map = request.map.map(|up| Map::of(ramsey_basis(&valued), up)).transpose()?;
    Ok(Comparison { map, ..comparison(&valued, problems) })
}

/// What the audit sheets tell of other rates.
#[derive(Clone, Debug)]
pub struct Sensitivity {
    /// The options under each basis, and where the decision switches.
    pub comparison: Comparison,
    /// Points added to every rate of the declared basis, and what every option then comes to; none where the basis is not
    /// made of rates, or they would leave their range.
    pub shifted: Vec<(f64, Option<Vec<Worth>>)>,
}

/// What every rate is moved by for the sensitivity table.
const SHIFTS: [f64; 2] = [-0.01, 0.01];

/// The comparison of a workbook that has been valued on its declared basis, and that basis moved.
///
/// # Errors
/// A basis asked for cannot value the workbook.
pub fn sensitivity(
    appraisal: &Appraisal,
    outcomes: &[ChoiceOutcome],
    against: &[String],
    catalogue: &Catalogue,
) -> Result<Sensitivity> {
    let declared = Valued { why: Why::Declared, appraisal: appraisal.clone(), outcomes: outcomes.to_vec() };
    // What the companion cannot do has been said where it is reported.
    let mut problems = Vec::new();
    let valued = value_all(declared, against, catalogue, &mut problems)?;
    let moved = |by: f64| Some(over(worths_at(&valued[0], &|spec| spec.shifted(by))?, appraisal.baseline));
    let shifted = SHIFTS.map(|by| (by, moved(by))).to_vec();
    problems.retain(|problem| problem.code != "companion");
    Ok(Sensitivity { comparison: comparison(&valued, problems), shifted })
}

/// With more options than so many, they are held against zero (or the baseline) alone, not against each other.
const MOST_PAIRED: usize = 24;

/// The comparison of a workbook valued on every basis, the declared one first.
fn comparison(valued: &[Valued], problems: Vec<Problem>) -> Comparison {
    let declared = &valued[0];
    let ramsey = ramsey_basis(valued);
    let pairs = declared.outcomes.len() <= MOST_PAIRED;
    let (switching, changes) = search(declared, ramsey, pairs);
    Comparison {
        options: declared.appraisal.choices.iter().map(|choice| choice.name.clone()).collect(),
        baseline: declared.appraisal.baseline,
        sides: valued.iter().map(side).collect(),
        ramsey: ramsey.map(|valued| valued.outcomes[0].basis.canonical()),
        ramsey_spec: ramsey
            .filter(|valued| dated_alike(valued, declared))
            .map(|valued| valued.outcomes[0].basis.spec().clone()),
        switching,
        changes,
        map: None,
        problems,
    }
}

/// Whether the flows of two stand at the same offsets.
fn dated_alike(a: &Valued, b: &Valued) -> bool {
    a.outcomes.iter().zip(&b.outcomes).all(|(a, b)| a.dated.offsets == b.dated.offsets)
}

/// The workbook on its declared basis, on the companion of that, and on every basis asked for; each once.
fn value_all(
    declared: Valued,
    against: &[String],
    catalogue: &Catalogue,
    problems: &mut Vec<Problem>,
) -> Result<Vec<Valued>> {
    let mut valued = vec![declared];
    match beside(&valued[0], catalogue) {
        Ok(companion) => valued.extend(companion),
        Err(error) => {
            let why = error.problems().iter().map(|problem| problem.message.as_str()).collect::<Vec<_>>();
            let message =
                format!("the schedule to be run beside cannot value the workbook: {}", why.join("; "));
            let problem = Problem::warning("companion", Place::default(), message);
            problems
                .push(problem.hint("value the workbook on the companion schedule by itself, with --basis"));
        }
    }
    let mut errors = Vec::new();
    for line in against {
        match on_basis(&valued[0].appraisal, line, catalogue) {
            Ok((appraisal, outcomes, found)) => {
                let same = |other: &Valued| {
                    other
                        .outcomes
                        .iter()
                        .zip(&outcomes)
                        .all(|(a, b)| a.basis == b.basis && a.timing == b.timing)
                };
                if !valued.iter().any(same) {
                    problems.extend(
                        found.into_iter().filter(|problem| !problems.contains(problem)).collect::<Vec<_>>(),
                    );
                    valued.push(Valued { why: Why::Against, appraisal, outcomes });
                }
            }
            Err(error) => errors.extend(error.problems().iter().map(|problem| Problem {
                message: format!("on {line}: {}", problem.message),
                ..problem.clone()
            })),
        }
    }
    if errors.is_empty() { Ok(valued) } else { Err(errors.into()) }
}

type OnBasis = (Appraisal, Vec<ChoiceOutcome>, Vec<Problem>);

/// Every option on one basis.
fn on_basis(appraisal: &Appraisal, line: &str, catalogue: &Catalogue) -> Result<OnBasis> {
    let place = || Place::name(COMMAND_LINE);
    let basis = Basis::parse(line, catalogue)
        .map_err(|error| WorkbookError::from(from_core(&error, place())))?
        .canonical();
    let mut appraisal = appraisal.clone();
    for choice in &mut appraisal.choices {
        choice.basis = Given { value: basis.clone(), at: None, from: COMMAND_LINE.to_owned() };
    }
    let (outcomes, problems) = value(&appraisal, catalogue)?;
    Ok((appraisal, outcomes, problems))
}

/// Every option on the companion of its schedule, those without one on their own basis; none where none has one.
fn beside(declared: &Valued, catalogue: &Catalogue) -> Result<Option<Valued>> {
    let mut appraisal = declared.appraisal.clone();
    let mut any = false;
    for (choice, outcome) in appraisal.choices.iter_mut().zip(&declared.outcomes) {
        let own = choice.streams.iter_mut().zip(&outcome.streams);
        let own =
            own.filter_map(|(stream, valued)| Some((stream.basis.as_mut()?, &valued.own.as_ref()?.basis)));
        for (given, basis) in std::iter::once((&mut choice.basis, &outcome.basis)).chain(own) {
            let companion = basis.beside(catalogue);
            let companion = companion.map_err(|error| from_core(&error, Place::name(&choice.name)))?;
            if let Some(basis) = companion {
                given.value = basis.canonical();
                any = true;
            }
        }
    }
    if !any {
        return Ok(None);
    }
    let (outcomes, _) = value(&appraisal, catalogue)?;
    Ok(Some(Valued { why: Why::Companion, appraisal, outcomes }))
}

fn side(valued: &Valued) -> Side {
    let worths = Worth::of_outcomes(&valued.outcomes, valued.appraisal.baseline);
    let ranked = valued.outcomes.iter().zip(&worths).zip(ranks(&worths));
    let standing = |((outcome, worth), rank): ((&ChoiceOutcome, &Worth), usize)| Standing {
        basis: outcome.basis.canonical(),
        totals: *outcome.totals(),
        worth: *worth,
        rank,
    };
    let distinct = |text: &dyn Fn(&ChoiceOutcome) -> String| {
        let mut texts: Vec<String> = Vec::new();
        for outcome in &valued.outcomes {
            let text = text(outcome);
            if !texts.contains(&text) {
                texts.push(text);
            }
        }
        texts.join("; or ")
    };
    Side {
        why: valued.why,
        basis: distinct(&|outcome| outcome.basis.canonical()),
        words: distinct(&|outcome| outcome.basis.words()),
        standings: ranked.map(standing).collect(),
        best: best(&worths),
    }
}
