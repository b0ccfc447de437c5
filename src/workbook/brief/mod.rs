//! A brief for those who decide: one page on the question, the options, the basis, the answer and what would change it.
//!
//! What stands in it is computed once, as plain sections; the page and the text are two ways of printing them.

mod answer;
mod basis;
mod charts;
mod flat;
mod html;
mod markdown;
mod options;
mod question;
mod remarks;
mod switches;
mod words;

use hence_core::Catalogue;
use sha2::{Digest, Sha256};

use crate::appraisal::Appraisal;
use crate::compare::{Sensitivity, sensitivity};
use crate::fill::not_valued;
use crate::follow;
use crate::model::Workbook;
use crate::outcome::ChoiceOutcome;
use crate::package::Package;
use crate::plan::Stale;
use crate::planfile::PlanFile;
use crate::preflight::preflight;
use crate::problem::{Problem, Result};
use crate::ranking::Worth;
use crate::references::SheetRange;
use crate::report::{OptionReport, Status, option_reports};
use crate::resolve::{Options, resolve};
use crate::stale::dependents;
use crate::valuation::value;

use flat::FlatRates;

pub use html::html;
pub use markdown::markdown;

/// What the run is told besides the workbook.
#[derive(Clone, Debug, Default)]
pub struct BriefRequest {
    /// The question; else the workbook's title, else one made from the names of the options.
    pub question: Option<String>,
    /// Rate lines or ids of schedules to hold the result against.
    pub against: Vec<String>,
    /// Roles for cells without a defined name: role, range.
    pub roles: Vec<(String, String)>,
    /// What is where, for a workbook without names.
    pub plan: Option<PlanFile>,
    /// The date or state of the data.
    pub as_of: Option<String>,
    /// Who ran it.
    pub by: Option<String>,
}

/// A brief, ready to be printed.
#[derive(Clone, Debug)]
pub struct Brief {
    /// What is to be decided.
    pub question: String,
    /// What the numbers say to it, a sentence each.
    pub answer: Vec<String>,
    /// All else, in order.
    pub sections: Vec<Section>,
    /// From what it was made, a sentence each.
    pub sources: Vec<String>,
    /// What every option comes to.
    pub options: Vec<OptionReport>,
    /// The rank of each by net present value, from 1.
    pub ranks: Vec<usize>,
    /// Rows of numbers along the years that no role names.
    pub not_valued: Vec<String>,
    /// Everything found.
    pub problems: Vec<Problem>,
}

impl Brief {
    /// Done, unless a problem is an error.
    pub fn status(&self) -> Status {
        Status::of(&self.problems)
    }
}

/// A part of the page under a heading.
#[derive(Clone, Debug, PartialEq)]
pub struct Section {
    /// Its heading.
    pub title: String,
    /// What stands in it.
    pub blocks: Vec<Block>,
    /// A chart beside that.
    pub beside: Option<Figure>,
}

/// A piece of a section.
#[derive(Clone, Debug, PartialEq)]
pub enum Block {
    /// Words.
    Paragraph(String),
    /// Points, none of which comes first.
    List(Vec<String>),
    /// Words and what they mean here.
    Terms(Vec<(String, String)>),
    /// Numbers.
    Table(Table),
    /// Charts side by side.
    Figures(Vec<Figure>),
}

/// A table: a row of headings, then rows that begin with theirs.
#[derive(Clone, Debug, PartialEq)]
pub struct Table {
    /// What it shows.
    pub caption: String,
    /// One a column.
    pub headings: Vec<String>,
    /// How many columns hold words; the others hold numbers.
    pub words: usize,
    /// As many cells each as there are headings.
    pub rows: Vec<Vec<String>>,
}

/// A chart, and the numbers in it for where no picture can be shown.
#[derive(Clone, Debug, PartialEq)]
pub struct Figure {
    /// The picture.
    pub svg: String,
    /// Its numbers, where no other table of the brief has them.
    pub table: Option<Table>,
}

/// Everything that the sections are made from.
struct Facts<'a> {
    appraisal: &'a Appraisal,
    outcomes: &'a [ChoiceOutcome],
    options: &'a [OptionReport],
    found: &'a Sensitivity,
    flat: &'a FlatRates,

    problems: &'a [Problem],
}

impl Facts<'_> {
    fn name(&self, option: usize) -> String {
        words::quoted(&self.options[option].name)
    }

    /// The name without quotes, for tables and charts; with its number before it where the beginnings of names do not
    /// tell the options apart.
    fn label(&self, option: usize) -> String {
        const BEGINNING: usize = 12;
        let begins =
            |i: usize| -> String { words::plain(&self.options[i].name).chars().take(BEGINNING).collect() };
        let alike = (0..self.options.len()).any(|i| (0..i).any(|j| begins(i) == begins(j)));
        let name = words::plain(&self.options[option].name);
        if alike { format!("{}. {name}", option + 1) } else { name }
    }

    fn npv(&self, option: usize) -> f64 {
        self.options[option].totals().npv
    }

    /// The options in order of their net present value, the highest first, without the baseline.
    fn ranked(&self) -> Vec<usize> {
        let mut order: Vec<usize> = (0..self.options.len()).filter(|&i| !self.options[i].baseline).collect();
        order.sort_by(|a, b| self.npv(*b).total_cmp(&self.npv(*a)));
        order
    }

    fn baseline(&self) -> Option<usize> {
        self.appraisal.baseline
    }

    /// " over “Do nothing”", where there is a baseline.
    fn over(&self) -> String {
        self.baseline().map(|i| format!(" over {}", self.name(i))).unwrap_or_default()
    }

    /// What an option is worth on the declared basis, and how far rounding may have moved that.
    fn worth(&self, option: usize) -> Worth {
        self.found.comparison.sides[0].standings[option].worth
    }

    /// Whether all options stand on one basis, from one base, with one timing.
    fn one_basis(&self) -> bool {
        let first = &self.options[0];
        self.options.iter().zip(self.outcomes).all(|(option, outcome)| {
            option.basis == first.basis
                && option.stream_bases == first.stream_bases
                && option.base == first.base
                && outcome.timing == self.outcomes[0].timing
        })
    }
}

/// Makes the brief on one workbook; nothing is written.
///
/// # Errors
/// Everything that keeps the workbook from being read, or valued on its basis or one that it is held against, each with
/// its cell.
pub fn brief(package: &Package, request: &BriefRequest, catalogue: &Catalogue) -> Result<Brief> {
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
    mark_results(&mut appraisal, package, &book)?;
    let found = sensitivity(&appraisal, &outcomes, &request.against, catalogue)?;
    for problem in &found.comparison.problems {
        if !problems.contains(problem) {
            problems.push(problem.clone());
        }
    }
    let options = option_reports(&appraisal, &outcomes, &[]);
    let not_valued = not_valued(&appraisal);
    let flat = FlatRates::of(&appraisal, &outcomes);
    let facts = Facts {
        appraisal: &appraisal,
        outcomes: &outcomes,
        options: &options,
        found: &found,
        flat: &flat,

        problems: &problems,
    };
    let question = question::question(package, &facts, request.question.as_deref());
    let answer = answer::answer(&facts);
    let sections = vec![
        options::section(&facts),
        basis::section(&facts),
        switches::section(&facts),
        charts::section(&facts),
        remarks::section(&facts),
    ];
    let ranks = found.comparison.sides[0].standings.iter().map(|standing| standing.rank).collect();
    let sources = sources(package, request);
    Ok(Brief { question, answer, sections, sources, ranks, options, not_valued, problems })
}

/// Marks rows that follow from cells which hence fills, as a fill does: they are results, and not flows left out.
fn mark_results(appraisal: &mut Appraisal, package: &Package, book: &Workbook) -> Result<()> {
    let targets = appraisal.choices.iter().flat_map(|choice| &choice.targets);
    let cells: Vec<SheetRange> = targets.flat_map(|target| target.at.pieces()).collect();
    let dependents = dependents(package, book, &cells)?.cells;
    let follow: Stale =
        dependents.into_iter().map(|(sheet, cells)| (book.sheets[sheet].name.clone(), cells)).collect();
    // The warnings are those of a fill, which changes the cells; nothing is changed here.
    follow::mark(appraisal, &follow, &cells, &mut Vec::new());
    Ok(())
}

/// From what the brief was made. Nothing here depends on time, host or place of output.
fn sources(package: &Package, request: &BriefRequest) -> Vec<String> {
    let hash: String = Sha256::digest(package.bytes()).iter().map(|byte| format!("{byte:02x}")).collect();
    let mut texts = vec![format!(
        "Made by hence {} from {}, SHA-256 {hash}.",
        env!("CARGO_PKG_VERSION"),
        words::plain(package.file_name())
    )];
    if let Some(plan) = &request.plan {
        texts.push(format!("Roles from the plan {}, SHA-256 {}.", words::plain(plan.name()), plan.sha256()));
    }
    texts.extend(request.as_of.as_deref().map(|text| format!("As of {}.", words::plain(text))));
    texts.extend(request.by.as_deref().map(|text| format!("By {}.", words::plain(text))));
    texts
}
