//! A plan on one workbook: its sheets found, its options and appraisals told apart, every entry with its line.

use std::collections::BTreeSet;

use crate::layout::serial;
use crate::model::{SheetKind, Workbook};
use crate::own::own_sheets;
use crate::problem::{Place, Problem, Result};
use crate::reading::Value;
use crate::references::{Range, SheetRange, quote_sheet};
use crate::roles::{Role, RoleName, key};

use super::PlanFile;
use super::parse::{Entry, Section, What};

/// What an entry says.
#[derive(Clone, Debug, PartialEq)]
pub(crate) enum Says {
    /// Cells, or a name for them, as `--role` takes them.
    Cells(String),
    /// What a cell would hold.
    Value(Value),
}

/// One entry, with the option and the place it has in this workbook.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Planned {
    /// Role, stream and option.
    pub name: RoleName,
    /// `shelf.toml line 7, cost_works`.
    pub from: String,
    /// Its line.
    pub line: u32,
    /// What it says.
    pub says: Says,
}

/// The plan of one appraisal of one workbook.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Part {
    /// Its name; none where the workbook holds one appraisal.
    pub(crate) appraisal: Option<String>,
    /// Its entries, those of options first.
    pub(crate) entries: Vec<Planned>,
    /// What of the plan does not fit the workbook.
    pub(crate) problems: Vec<Problem>,
    /// Roles among what does not fit: they are wrong, not missing.
    pub(crate) lost: Vec<Role>,
    /// Sheets that other appraisals of the plan stand on.
    pub(crate) elsewhere: BTreeSet<String>,
}

impl Planned {
    /// Where the plan says it.
    pub(crate) fn place(&self) -> Place {
        in_plan(&self.from, self.line)
    }
}

fn in_plan(from: &str, line: u32) -> Place {
    Place { line: Some(line), ..Place::name(from) }
}

impl PlanFile {
    /// The plan's appraisals on a workbook, at least one.
    ///
    /// # Errors
    /// `plan-sheet` where an appraisal's sheets are not found; `plan-appraisal` where the one asked for is none of them.
    /// What else does not fit the workbook is told when the part is resolved.
    pub fn parts(&self, book: &Workbook) -> Result<Vec<Part>> {
        let sheets = Sheets::of(self, book);
        if self.whole.appraisals.is_empty() {
            if let Some(wanted) = self.chosen() {
                let message = format!("{} has one appraisal, and `{wanted}` is asked for", self.name());
                return Err(Problem::error("plan-appraisal", Place::default(), message)
                    .hint("leave --appraisal out")
                    .into());
            }
            return Ok(vec![sheets.part(None, &[&self.whole.common], &self.whole.common.options)]);
        }
        let mut parts: Vec<Part> = Vec::new();
        let mut problems = Vec::new();
        for appraisal in &self.whole.appraisals {
            for (name, own) in sheets.each(appraisal, &mut problems) {
                if let Some(twin) =
                    parts.iter().find(|part| part.appraisal.as_deref().map(key) == Some(key(&name)))
                {
                    let twin = twin.appraisal.as_deref().unwrap_or_default();
                    let message = format!("the appraisal `{name}` bears the name of another, `{twin}`");
                    problems.push(
                        Problem::error("plan-appraisal", sheets.place(appraisal.line), message)
                            .hint("give each appraisal its own name, or its sheets once"),
                    );
                    continue;
                }
                let options = own.options.clone();
                parts.push(sheets.part(Some(name), &[&own, &self.whole.common], &options));
            }
        }
        if !problems.is_empty() {
            return Err(problems.into());
        }
        let on: Vec<BTreeSet<String>> = parts.iter().map(|part| sheets.of_part(part)).collect();
        for (i, part) in parts.iter_mut().enumerate() {
            let others = on.iter().enumerate().filter(|(other, _)| *other != i);
            part.elsewhere = others.flat_map(|(_, sheets)| sheets.clone()).collect();
        }
        if let Some(wanted) = self.chosen() {
            let names: Vec<String> = parts.iter().filter_map(|part| part.appraisal.clone()).collect();
            parts.retain(|part| part.appraisal.as_deref().map(key) == Some(key(wanted)));
            if parts.is_empty() {
                let message = format!("{} has no appraisal `{wanted}`", self.name());
                return Err(Problem::error("plan-appraisal", Place::default(), message)
                    .hint(format!("its appraisals are {}", names.join(", ")))
                    .into());
            }
        }
        Ok(parts)
    }

    /// The one appraisal that a command about one is to be run on.
    ///
    /// # Errors
    /// As [`PlanFile::parts`]; `plan-appraisal` where there are several.
    pub fn part(&self, book: &Workbook) -> Result<Part> {
        let mut parts = self.parts(book)?;
        if parts.len() > 1 {
            let names: Vec<&str> = parts.iter().filter_map(|part| part.appraisal.as_deref()).collect();
            let message = format!("{} has {} appraisals: {}", self.name(), names.len(), names.join(", "));
            return Err(Problem::error("plan-appraisal", Place::default(), message)
                .hint(format!("choose one: --appraisal \"{}\"", names[0]))
                .into());
        }
        Ok(parts.swap_remove(0))
    }
}

/// The sheets of a workbook that a plan may name, and what is needed to place its entries.
struct Sheets<'a> {
    file: &'a str,
    book: &'a Workbook,
    names: Vec<&'a str>,
}

impl<'a> Sheets<'a> {
    fn of(plan: &'a PlanFile, book: &'a Workbook) -> Self {
        let own: BTreeSet<usize> = own_sheets(book).into_iter().map(|own| own.index).collect();
        let foreign =
            book.sheets.iter().enumerate().filter(|(i, _)| !own.contains(i)).map(|(_, sheet)| sheet);
        let names =
            foreign.filter(|sheet| sheet.kind == SheetKind::Worksheet).map(|sheet| sheet.name.as_str());
        Sheets { file: plan.name(), book, names: names.collect() }
    }

    fn place(&self, line: u32) -> Place {
        in_plan(&format!("{} line {line}", self.file), line)
    }

    fn no_sheet(&self, line: u32, wanted: &str) -> Problem {
        let what = if is_pattern(wanted) { "no sheet fits" } else { "there is no sheet" };
        Problem::error("plan-sheet", self.place(line), format!("{what} `{wanted}`"))
            .hint(format!("the sheets are {}", listed(&self.names)))
    }

    /// An option or an appraisal once for every sheet of its layout, each with its name.
    fn each(&self, section: &Section, problems: &mut Vec<Problem>) -> Vec<(String, Section)> {
        if section.sheets.is_empty() {
            let name = section.name.clone().or(section.sheet.as_ref().map(|(sheet, _)| sheet.clone()));
            return vec![(name.unwrap_or_default(), section.clone())];
        }
        let mut found: Vec<&str> = Vec::new();
        for (wanted, line) in &section.sheets {
            let fitting: Vec<&str> =
                self.names.iter().copied().filter(|name| fits(&fold(wanted), &fold(name))).collect();
            if fitting.is_empty() {
                problems.push(self.no_sheet(*line, wanted));
            }
            found.extend(fitting.into_iter().filter(|name| !found.contains(name)).collect::<Vec<_>>());
        }
        let on = |sheet: &str| {
            let sheet = sheet.to_owned();
            let own = Section { sheet: Some((sheet.clone(), section.line)), ..section.clone() };
            (sheet, own)
        };
        found.into_iter().map(on).collect()
    }

    /// The entries of one appraisal: its sections from the innermost to the plan's own, and its options.
    fn part(&self, appraisal: Option<String>, within: &[&Section], options: &[Section]) -> Part {
        let mut part = Part { appraisal, ..Part::default() };
        let mut named: Vec<String> = Vec::new();
        for option in options {
            for (name, own) in self.each(option, &mut part.problems) {
                if named.contains(&key(&name)) {
                    let message = format!("the option `{name}` is described twice");
                    let problem = Problem::error("plan-sheet", self.place(option.line), message);
                    part.problems.push(problem.hint("name each sheet once"));
                    continue;
                }
                named.push(key(&name));
                let chain: Vec<&Section> = std::iter::once(&own).chain(within.iter().copied()).collect();
                for entry in &own.entries {
                    self.add(&mut part, &chain, entry, Some(&name));
                }
            }
        }
        let mut seen: Vec<RoleName> = Vec::new();
        for section in within {
            for entry in &section.entries {
                // What an appraisal says comes before what the plan says for all.
                if !seen.iter().any(|said| same(said, &entry.role)) {
                    seen.push(entry.role.clone());
                    // On the appraisal's sheet, wherever the entry stands.
                    self.add(&mut part, within, entry, None);
                }
            }
        }
        part
    }

    /// The sheets that cells of an appraisal stand on.
    fn of_part(&self, part: &Part) -> BTreeSet<String> {
        let cells = part.entries.iter().filter_map(|entry| match &entry.says {
            Says::Cells(text) => text.split(',').next()?.parse::<SheetRange>().ok(),
            Says::Value(_) => None,
        });
        let index = |at: SheetRange| self.book.sheet_index(&at.sheet);
        cells.filter_map(index).map(|index| self.book.sheets[index].name.clone()).collect()
    }

    fn add(&self, part: &mut Part, within: &[&Section], entry: &Entry, option: Option<&str>) {
        let mut name = entry.role.clone();
        if let Some(option) = option {
            name.option = Some(option.to_owned());
        }
        let from = format!("{} line {}, {}", self.file, entry.line, entry.word);
        let says = match &entry.what {
            What::Number(x) => Says::Value(Value::Number(*x)),
            What::Text(text) => Says::Value(Value::Text(text.clone())),
            What::Date(date) => Says::Value(Value::Date(serial(*date, self.book.date1904))),
            What::Cells(text) => match self.cells(text, &in_plan(&from, entry.line), within) {
                Ok(text) => Says::Cells(text),
                Err(problem) => {
                    part.problems.push(*problem);
                    part.lost.push(name.role);
                    return;
                }
            },
        };
        part.entries.push(Planned { name, from, line: entry.line, says });
    }

    /// Cells with their sheet: as given, or that of the option, the appraisal or the plan.
    fn cells(
        &self,
        text: &str,
        place: &Place,
        within: &[&Section],
    ) -> std::result::Result<String, Box<Problem>> {
        // Pieces of a row or column stand between commas: a sheet counts until another is named.
        let first = text.split(',').next().unwrap_or_default().trim();
        let is_cells = first.parse::<Range>().is_ok();
        if let (false, Ok(at)) = (is_cells, text.parse::<SheetRange>())
            && self.book.sheet_index(&at.sheet).is_none()
        {
            let problem =
                Problem::error("plan-sheet", place.clone(), format!("there is no sheet `{}`", at.sheet));
            return Err(problem.hint(format!("the sheets are {}", listed(&self.names))).into());
        }
        if !is_cells && text.contains('!') {
            return Ok(text.to_owned());
        }
        let home = within.iter().find_map(|section| section.sheet.as_ref());
        let Some((sheet, line)) = home else {
            if is_cells {
                let problem = Problem::error("plan-sheet", place.clone(), format!("`{text}` names no sheet"));
                return Err(problem
                    .hint(format!("write Sheet1!{text}, or add sheet = \"Sheet1\" above"))
                    .into());
            }
            return Ok(text.to_owned());
        };
        let Some(index) = self.book.sheet_index(sheet) else {
            return Err(self.no_sheet(*line, sheet).into());
        };
        // A name of the sheet's own comes before the workbook's.
        let scoped = self.book.names.iter().any(|defined| {
            defined.scope == Some(index) && defined.name.to_lowercase() == text.to_lowercase()
        });
        Ok(if is_cells || scoped { format!("{}!{text}", quote_sheet(sheet)) } else { text.to_owned() })
    }
}

/// Whether two entries are about the same.
fn same(a: &RoleName, b: &RoleName) -> bool {
    let about = |name: &RoleName| (name.stream.as_deref().map(key), name.option.as_deref().map(key));
    a.role == b.role && about(a) == about(b)
}

fn listed(names: &[&str]) -> String {
    const MOST: usize = 12;
    let mut text = names.iter().take(MOST).copied().collect::<Vec<_>>().join(", ");
    if names.len() > MOST {
        text.push_str(&format!(" and {} more", names.len() - MOST));
    }
    text
}

fn is_pattern(text: &str) -> bool {
    text.contains(['*', '?'])
}

fn fold(text: &str) -> Vec<char> {
    text.to_lowercase().chars().collect()
}

/// Whether a text fits a pattern: `*` any characters, `?` one. Neither may stand in the name of a sheet.
fn fits(pattern: &[char], text: &[char]) -> bool {
    // Where the last star was, and where what it stands for ends: on a mismatch it takes one more.
    let (mut p, mut t, mut star) = (0, 0, None);
    while t < text.len() {
        match pattern.get(p) {
            Some('*') => {
                star = Some((p, t));
                p += 1;
            }
            Some(&c) if c == '?' || c == text[t] => {
                p += 1;
                t += 1;
            }
            _ => {
                let Some((at, end)) = star else { return false };
                star = Some((at, end + 1));
                p = at + 1;
                t = end + 1;
            }
        }
    }
    pattern[p..].iter().all(|&c| c == '*')
}

#[cfg(test)]
mod tests {
    use super::{fits, fold};

    #[test]
    fn patterns_of_sheets() {
        let fit = |pattern: &str, text: &str| fits(&fold(pattern), &fold(text));
        for (pattern, text) in [
            ("North", "north"),
            ("*", ""),
            ("Option *", "Option 12"),
            ("O*n ?", "option a"),
            ("*b*b", "abcabab"),
        ] {
            assert!(fit(pattern, text), "{pattern} {text}");
        }
        for (pattern, text) in [("North", "North 2"), ("Option ?", "Option 12"), ("*b", "abc"), ("?", "")] {
            assert!(!fit(pattern, text), "{pattern} {text}");
        }
    }
}
