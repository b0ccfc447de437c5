//! Guesses at the names a workbook could be given, from its headings and shapes.

mod runs;
mod words;

use std::collections::{BTreeMap, BTreeSet};

use crate::appraisal::Direction;
use crate::model::{SheetKind, Workbook};
use crate::package::Package;
use crate::problem::Result;
use crate::reading::{Sheets, Value};
use crate::references::{Cell, NameTarget, Range, SheetRange};
use crate::resolve::sum_of;
use crate::roles::{self, Role, Way, key};
use runs::Run;
use words::Meaning;

/// Whether a heading says that its row holds discount factors.
pub(crate) fn reads_as_factors(heading: &str) -> bool {
    matches!(words::meaning(heading), Some(Meaning::Line(Role::Factor, _)))
}

/// Cells beyond these are not looked at: an appraisal begins near the corner of its sheet.
const ROWS: u32 = 1_000;
/// See [`ROWS`].
const COLUMNS: u32 = 400;

/// One guess: a name, its cells and why.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Guess {
    /// The defined name: `hence_cost_works`.
    pub name: String,
    /// Its cells.
    pub at: SheetRange,
    /// What it was guessed from, in words.
    pub why: String,
}

/// Finds the years, the flows, the factors and the results of a workbook that has no names yet.
///
/// # Returns
/// Guesses in sheet order, the years of a sheet first. Roles and cells that the workbook already names are left out. Where
/// several sheets hold flows, each is taken for an option and its names end in `__<sheet>`. Rows whose
/// headings say nothing and whose signs say nothing are not guessed.
///
/// # Errors
/// Only where cells cannot be read.
pub fn suggest(package: &Package, book: &Workbook) -> Result<Vec<Guess>> {
    let mut sheets = Sheets::open(package, book)?;
    let (known, at, own) = already(book);
    let mut found = Vec::new();
    for sheet in book.sheets.iter().filter(|sheet| sheet.kind == SheetKind::Worksheet) {
        if own.contains(&sheet.name) {
            continue;
        }
        let page = Page::read(&mut sheets, &sheet.name)?;
        let guesses = page.guesses(&mut sheets)?;
        if !guesses.is_empty() {
            found.push((sheet.name.clone(), guesses));
        }
    }
    let has_flows = |guesses: &[Draft]| guesses.iter().any(|guess| guess.role.is_stream());
    let sheets_with_flows = found.iter().filter(|(_, guesses)| has_flows(guesses)).count();
    let mut taken: BTreeSet<String> = known;
    let mut named = Vec::new();
    for (sheet, guesses) in found {
        let flows = has_flows(&guesses);
        let option = (sheets_with_flows > 1 && flows).then(|| slug(&sheet));
        for guess in guesses {
            // Years beside no flows are those of some other table.
            if !flows && sheets_with_flows > 0 && guess.role == Role::Years {
                continue;
            }
            let suffix = option.as_ref().map(|option| format!("__{option}")).unwrap_or_default();
            let name = format!("{}{}{suffix}", roles::PREFIX, guess.word());
            let covered = at.iter().any(|at| at.sheet == sheet && at.range.intersects(&guess.range));
            let reads_back =
                roles::parse_name(&name).is_some_and(|read| read.is_ok_and(|read| read.role == guess.role));
            if !covered && reads_back && taken.insert(key(&name)) {
                let at = SheetRange { sheet: sheet.clone(), range: guess.range };
                named.push(Guess { name, at, why: guess.why });
            }
        }
    }
    Ok(named)
}

/// The names there are, the cells that have one, and the sheets that are hence's own.
fn already(book: &Workbook) -> (BTreeSet<String>, Vec<SheetRange>, BTreeSet<String>) {
    let (mut known, mut cells, mut own) = (BTreeSet::new(), Vec::new(), BTreeSet::new());
    for defined in &book.names {
        let Some(Ok(name)) = roles::parse_name(&defined.name) else { continue };
        known.insert(key(&defined.name));
        let at = match book.resolve(defined) {
            NameTarget::Cells(at) => vec![at],
            NameTarget::Union(pieces) => pieces,
            NameTarget::Table { table, part } => {
                let table = book.find_table(&table);
                let part = table
                    .and_then(|t| Some(SheetRange::new(&book.sheets[t.sheet].name, t.cells(&part, None)?)));
                part.into_iter().collect()
            }
            _ => Vec::new(),
        };
        if name.role.info().way == Way::Own {
            own.extend(at.into_iter().map(|at| at.sheet));
        } else {
            cells.extend(at);
        }
    }
    (known, cells, own)
}

/// A guess before it has its name.
struct Draft {
    role: Role,
    stream: Option<String>,
    range: Range,
    why: String,
}

impl Draft {
    fn word(&self) -> String {
        match &self.stream {
            Some(stream) => format!("{}_{stream}", self.role.word()),
            None => self.role.word().to_owned(),
        }
    }
}

/// The cells of a sheet near its corner.
struct Page {
    name: String,
    cells: BTreeMap<Cell, Value>,
}

/// One row (or column) along the years.
struct Line {
    heading: String,
    /// What else stands before the years: a unit, the side of the ledger.
    beside: String,
    range: Range,
    numbers: Vec<f64>,
}

impl Page {
    fn read(sheets: &mut Sheets, name: &str) -> Result<Self> {
        let mut cells = BTreeMap::new();
        sheets.visit(name, |cell, value| {
            if cell.row < ROWS && cell.col < COLUMNS {
                cells.insert(cell, value);
            }
        })?;
        Ok(Page { name: name.to_owned(), cells })
    }

    fn guesses(&self, sheets: &mut Sheets) -> Result<Vec<Draft>> {
        let mut drafts = self.settings();
        let Some(run) = runs::longest(&self.cells) else { return Ok(drafts) };
        drafts.insert(0, Draft { role: Role::Years, stream: None, range: run.range, why: run.why() });
        let lines = self.lines(&run);
        let flows = self.flows(sheets, &run, &lines)?;
        let streams: Vec<String> = flows.iter().filter_map(|draft| draft.stream.clone()).collect();
        drafts.extend(flows);
        drafts.extend(lines.iter().filter_map(|line| by_year(line, &streams)));
        drafts.extend(self.results(&run, &drafts));
        Ok(drafts)
    }

    /// Every headed line after the years, whether it holds numbers or not.
    fn lines(&self, run: &Run) -> Vec<Line> {
        let (first, last) = (run.first(), run.last());
        let mut texts: BTreeMap<u32, Vec<(u32, String)>> = BTreeMap::new();
        let mut numbers: BTreeMap<u32, Vec<f64>> = BTreeMap::new();
        let mut others: BTreeSet<u32> = BTreeSet::new();
        for (cell, value) in &self.cells {
            let (line, across) = run.turned(*cell);
            if line <= run.line() {
                // Along a column, the headings of the flows stand above the first year, in the same columns.
                continue;
            }
            match value {
                Value::Text(text) if across < first => {
                    texts.entry(line).or_default().push((across, text.trim().to_owned()));
                }
                Value::Number(number) if (first..=last).contains(&across) => {
                    numbers.entry(line).or_default().push(*number)
                }
                Value::Blank => {}
                _ if (first..=last).contains(&across) => {
                    others.insert(line);
                }
                _ => {}
            }
        }
        // A text that many lines have in one place is a unit or the side of the ledger, not a line's own heading.
        let mut times: BTreeMap<(u32, String), usize> = BTreeMap::new();
        for text in texts.values().flatten() {
            *times.entry(text.clone()).or_default() += 1;
        }
        let lines = texts.into_iter().filter(|(line, _)| !others.contains(line));
        lines
            .map(|(line, mut texts)| {
                let word = |text: &str| text.chars().filter(|c| c.is_alphabetic()).count() >= 3;
                let own = texts.iter().rposition(|text| word(&text.1) && times[text] < 3);
                let own = own.or_else(|| texts.iter().rposition(|text| word(&text.1)));
                let (_, heading) = texts.remove(own.unwrap_or(texts.len() - 1));
                let beside: Vec<String> = texts.into_iter().map(|(_, text)| text).collect();
                Line {
                    heading,
                    beside: beside.join(", "),
                    range: run.along(line),
                    numbers: numbers.remove(&line).unwrap_or_default(),
                }
            })
            .collect()
    }

    /// The lines that are flows, by their own words, by the heading of their section, or by their signs.
    fn flows(&self, sheets: &mut Sheets, run: &Run, lines: &[Line]) -> Result<Vec<Draft>> {
        let mut section = None;
        let mut drafts: Vec<Draft> = Vec::new();
        let mut sums: Vec<Option<Vec<SheetRange>>> = Vec::new();
        for line in lines {
            sums.push(self.sums(sheets, line)?);
        }
        for (line, sum) in lines.iter().zip(&sums) {
            let meaning = words::meaning(&line.heading).or_else(|| words::meaning(&line.beside));
            if line.numbers.is_empty() {
                if let Some(Meaning::Flow(role, word)) = meaning {
                    section = Some((role, word));
                }
                continue;
            }
            if sum.is_some() {
                continue;
            }
            let total = lines.iter().zip(&sums).find_map(|(total, parts)| {
                let holds = parts.as_ref()?.iter().any(|part| part.range.intersects(&line.range));
                let role = words::side(&total.heading)?;
                holds.then(|| (role, total.heading.clone()))
            });
            let (role, why) = match meaning {
                Some(Meaning::Flow(role, word)) => {
                    (role, format!("its heading `{}` says `{word}`", line.heading))
                }
                Some(_) => continue,
                None => match (total, section, signs(&line.numbers)) {
                    (Some((role, total)), ..) => (role, format!("it is added up in `{total}`")),
                    (None, Some((role, word)), _) => {
                        (role, format!("it stands in a section headed `{word}`"))
                    }
                    (None, None, (true, false)) => (Role::Cost, "its numbers are all negative".to_owned()),
                    (None, None, (true, true)) => (Role::Flow, "its numbers have both signs".to_owned()),
                    (None, None, _) => continue,
                },
            };
            let years = run.years();
            let why = format!("{why}, and it has {} numbers beside the years {years}", line.numbers.len());
            drafts.push(Draft { role, stream: Some(slug(&line.heading)), range: line.range, why });
        }
        Ok(drafts)
    }

    /// The cells that a line of formulas adds up, where it does nothing else; nothing for a line of flows.
    fn sums(&self, sheets: &mut Sheets, line: &Line) -> Result<Option<Vec<SheetRange>>> {
        let grid = sheets.range(&SheetRange { sheet: self.name.clone(), range: line.range })?;
        let mut all = Vec::new();
        for (_, cell) in grid.iter().filter(|(_, cell)| cell.formula.is_some()) {
            let parts = cell.formula.as_deref().and_then(|text| sum_of(text, &self.name)).unwrap_or_default();
            if parts.len() <= 1 && parts.iter().all(|part| part.range.len() <= 1) {
                return Ok(None);
            }
            // Subtracted cells are no parts of a total.
            if cell.formula.as_deref().is_some_and(|text| !text.contains('-')) {
                all.extend(parts);
            }
        }
        let formulas = grid.iter().any(|(_, cell)| cell.formula.is_some());
        Ok(formulas.then_some(all))
    }

    /// Cells with one number beside a heading: the base year and the rate.
    fn settings(&self) -> Vec<Draft> {
        let mut drafts: Vec<Draft> = Vec::new();
        for (cell, text) in self.texts() {
            let Some(Meaning::Setting(role, word)) = words::meaning(text) else { continue };
            let next = Cell { row: cell.row, col: cell.col + 1 };
            let fits = match (role, self.cells.get(&next)) {
                (Role::Base, Some(Value::Number(year))) => {
                    year.fract() == 0.0 && (1000.0..=9999.0).contains(year)
                }
                (Role::Base, Some(Value::Text(text))) => hence_core::parse_financial_year(text).is_ok(),
                (Role::Base, Some(Value::Date(_))) => true,
                (Role::Basis, Some(Value::Number(rate))) => *rate > -0.5 && *rate <= 1.0,
                (Role::Basis, Some(Value::Text(text))) => text.contains('%'),
                _ => false,
            };
            if fits && !drafts.iter().any(|draft| draft.role == role) {
                let why = format!("the cell before it says `{word}`");
                drafts.push(Draft { role, stream: None, range: Range::cell(next), why });
            }
        }
        drafts
    }

    /// Single cells beside a heading that names a result.
    fn results(&self, run: &Run, taken: &[Draft]) -> Vec<Draft> {
        let mut drafts: Vec<Draft> = Vec::new();
        for (cell, text) in self.texts() {
            let Some(Meaning::Result(role, word)) = words::meaning(text) else { continue };
            let next = Cell { row: cell.row, col: cell.col + 1 };
            let free = !matches!(self.cells.get(&next), Some(Value::Text(_) | Value::Bool(_)));
            let clash = |draft: &&Draft| draft.range.contains(next);
            let numbers = self.cells.range(next..).take_while(|(at, _)| at.row == cell.row);
            let row = run.direction == Direction::Across
                && numbers.filter(|(_, v)| matches!(v, Value::Number(_))).count() > 1;
            if free
                && !row
                && !taken.iter().any(|draft| clash(&draft))
                && !drafts.iter().any(|d| d.role == role)
            {
                let why = format!("the cell before it says `{word}`");
                drafts.push(Draft { role, stream: None, range: Range::cell(next), why });
            }
        }
        drafts
    }

    fn texts(&self) -> impl Iterator<Item = (Cell, &str)> {
        self.cells.iter().filter_map(|(cell, value)| match value {
            Value::Text(text) => Some((*cell, text.as_str())),
            _ => None,
        })
    }
}

/// Lines of factors and of present values.
fn by_year(line: &Line, streams: &[String]) -> Option<Draft> {
    let Meaning::Line(role, word) = words::meaning(&line.heading)? else { return None };
    let mut stream = None;
    if role == Role::Pv {
        let heading = format!(" {} ", key(&line.heading));
        stream = streams.iter().find(|stream| heading.contains(&format!(" {} ", key(stream)))).cloned();
        if stream.is_none() && !heading.contains(" net ") {
            return None;
        }
    }
    let why = format!("its heading `{}` says `{word}`", line.heading);
    Some(Draft { role, stream, range: line.range, why })
}

/// Whether there are negative and positive numbers.
fn signs(numbers: &[f64]) -> (bool, bool) {
    (numbers.iter().any(|n| *n < 0.0), numbers.iter().any(|n| *n > 0.0))
}

/// A heading as part of a name: letters, digits and single underscores, at most 40 characters.
pub(crate) fn slug(heading: &str) -> String {
    let long = key(heading).replace(' ', "_");
    let cut: String = long.chars().take(40).collect();
    cut.trim_matches('_').to_owned()
}
