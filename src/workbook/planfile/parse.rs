//! The text of a plan: tables, keys and values, each with its line, and everything that is wrong with them.

use std::collections::BTreeMap;

use chrono::NaiveDate;
use toml::Spanned;
use toml::de::{DeTable, DeValue};

use crate::problem::{Place, Problem, Result};
use crate::roles::{RoleName, Way, key, parse_role};

/// What an entry says.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum What {
    /// Cells of the workbook, or a name for them.
    Cells(String),
    /// A number.
    Number(f64),
    /// A text.
    Text(String),
    /// A date.
    Date(NaiveDate),
}

/// One role and what the plan says of it.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Entry {
    pub role: RoleName,
    /// The role as it is written in the plan.
    pub word: String,
    pub what: What,
    pub line: u32,
}

/// The plan as a whole, an appraisal or an option.
#[derive(Clone, Debug, Default, PartialEq)]
pub(super) struct Section {
    /// Where it begins.
    pub line: u32,
    pub name: Option<String>,
    /// The sheet of cells without one, and its line.
    pub sheet: Option<(String, u32)>,
    /// Names and patterns of sheets of one layout, each with its line.
    pub sheets: Vec<(String, u32)>,
    pub entries: Vec<Entry>,
    pub options: Vec<Section>,
}

/// A plan.
#[derive(Clone, Debug, Default, PartialEq)]
pub(super) struct Whole {
    /// What holds for all of it.
    pub common: Section,
    /// Its appraisals; none where the workbook holds one.
    pub appraisals: Vec<Section>,
}

/// What a table of the plan is, and so which keys it may have.
#[derive(Clone, Copy, PartialEq)]
enum Kind {
    Plan,
    Appraisal,
    Option,
}

impl Kind {
    fn keys(self) -> &'static [&'static str] {
        match self {
            Kind::Plan => &["sheet", "settings", "roles", "option", "appraisal"],
            Kind::Appraisal => &["name", "sheet", "sheets", "settings", "roles", "option"],
            Kind::Option => &["name", "sheet", "sheets", "settings", "roles"],
        }
    }

    fn words(self) -> &'static str {
        match self {
            Kind::Plan => "a plan",
            Kind::Appraisal => "an appraisal",
            Kind::Option => "an option",
        }
    }
}

/// Reads the text of a plan.
///
/// **Errors**: `plan-text` and `unknown-role`, all of them, each with its line.
pub(super) fn parse(text: &str) -> Result<Whole> {
    let mut reader = Reader { text, problems: Vec::new() };
    let (table, errors) = DeTable::parse_recoverable(text);
    if !errors.is_empty() {
        for error in &errors {
            let line = error.span().map_or(1, |span| reader.line(span.start));
            let message = error.message().trim().lines().collect::<Vec<_>>().join("; ");
            reader.fault("plan-text", line, format!("is not written as TOML: {message}"), TEXT_HINT);
        }
        return Err(reader.problems.into());
    }
    let mut whole = Whole::default();
    let (common, appraisals) = reader.section(table.get_ref(), 1, Kind::Plan);
    whole.common = common;
    whole.appraisals = appraisals;
    if let (Some(option), false) = (whole.common.options.first(), whole.appraisals.is_empty()) {
        let message = "an option beside appraisals: nothing says to which of them it belongs";
        reader.fault(
            "plan-text",
            option.line,
            message,
            "write it as [[appraisal.option]] below its appraisal",
        );
    }
    for sections in std::iter::once(&whole.appraisals)
        .chain(std::iter::once(&whole.common.options))
        .chain(whole.appraisals.iter().map(|appraisal| &appraisal.options))
    {
        reader.check_names(sections);
    }
    if reader.problems.is_empty() {
        return Ok(whole);
    }
    reader.problems.sort_by_key(|problem| problem.place.line);
    Err(reader.problems.into())
}

const TEXT_HINT: &str = "texts stand in quotes: years = \"Flows!C5:Z5\"; `hence plan --help` shows a plan";

struct Reader<'t> {
    text: &'t str,
    problems: Vec<Problem>,
}

impl Reader<'_> {
    /// The line of a byte, from 1.
    fn line(&self, at: usize) -> u32 {
        let before = self.text.get(..at).unwrap_or(self.text);
        u32::try_from(before.matches('\n').count() + 1).unwrap_or(u32::MAX)
    }

    fn fault(&mut self, code: &'static str, line: u32, message: impl Into<String>, hint: impl Into<String>) {
        self.problems.push(Problem::error(code, Place::line(line), message).hint(hint));
    }

    /// A value of another kind than its key takes.
    fn wrong(&mut self, key: &str, value: &Spanned<DeValue<'_>>, wanted: &str) {
        let line = self.line(value.span().start);
        let found = kind(value.get_ref());
        self.fault("plan-text", line, format!("`{key}` is {found}, allowed is {wanted}"), TEXT_HINT);
    }

    /// One table with what is in it; of a plan, its appraisals besides.
    fn section(&mut self, table: &DeTable<'_>, line: u32, is: Kind) -> (Section, Vec<Section>) {
        let mut section = Section { line, ..Section::default() };
        let mut appraisals = Vec::new();
        for (word, value) in table {
            let at = self.line(word.span().start);
            let name = word.get_ref().as_ref();
            match name {
                _ if !is.keys().contains(&name) => self.unknown_key(name, at, is),
                "name" => section.name = self.text_of(name, value).map(|(text, _)| text),
                "sheet" => section.sheet = self.text_of(name, value),
                "sheets" => section.sheets = self.texts_of(name, value),
                "settings" | "roles" => {
                    let entries = self.entries(name, value);
                    section.entries.extend(entries);
                }
                "option" => section.options = self.sections(name, value, Kind::Option),
                _ => appraisals = self.sections(name, value, Kind::Appraisal),
            }
        }
        if section.sheet.is_some() && !section.sheets.is_empty() {
            self.fault("plan-text", line, "has both `sheet` and `sheets`", "keep one of the two");
        }
        if section.name.is_some() && !section.sheets.is_empty() {
            let what = if is == Kind::Option { "options" } else { "appraisals" };
            let message =
                format!("has both `name` and `sheets`, and {what} on several sheets are called as those");
            self.fault("plan-text", line, message, "take `name` out");
        }
        if is != Kind::Plan && section.name.is_none() && section.sheet.is_none() && section.sheets.is_empty()
        {
            let message = format!("{} has neither a name nor a sheet", is.words());
            self.fault("plan-text", line, message, "add name = \"...\", or sheet = \"...\"");
        }
        section.entries.sort_by_key(|entry| entry.line);
        if is == Kind::Option {
            for entry in section.entries.iter().filter(|entry| entry.role.option.is_some()) {
                let message = format!("`{}` names an option, and it stands below one", entry.word);
                self.fault(
                    "plan-text",
                    entry.line,
                    message,
                    "leave out the two underscores and what follows",
                );
            }
        }
        self.check_twins(&section.entries);
        (section, appraisals)
    }

    fn unknown_key(&mut self, name: &str, line: u32, is: Kind) {
        let keys = is.keys().join(", ");
        let hint = if parse_role(name).is_ok() {
            format!(
                "write it below [roles] with its cells, or below [settings] with what it says: {name} = ..."
            )
        } else {
            format!("the keys of {} are {keys}", is.words())
        };
        self.fault("plan-text", line, format!("`{name}` is no key of {}", is.words()), hint);
    }

    fn text_of(&mut self, key: &str, value: &Spanned<DeValue<'_>>) -> Option<(String, u32)> {
        match value.get_ref() {
            DeValue::String(text) if !text.trim().is_empty() => {
                Some((text.trim().to_owned(), self.line(value.span().start)))
            }
            _ => {
                self.wrong(key, value, "a text");
                None
            }
        }
    }

    fn texts_of(&mut self, key: &str, value: &Spanned<DeValue<'_>>) -> Vec<(String, u32)> {
        match value.get_ref() {
            DeValue::Array(list) if !list.is_empty() => {
                list.iter().filter_map(|text| self.text_of(key, text)).collect()
            }
            DeValue::String(_) => self.text_of(key, value).into_iter().collect(),
            _ => {
                self.wrong(key, value, "a list of names of sheets, such as [\"North\", \"Option *\"]");
                Vec::new()
            }
        }
    }

    fn sections(&mut self, key: &str, value: &Spanned<DeValue<'_>>, is: Kind) -> Vec<Section> {
        let mut sections = Vec::new();
        let list: Vec<&Spanned<DeValue<'_>>> = match value.get_ref() {
            DeValue::Array(list) => list.iter().collect(),
            _ => vec![value],
        };
        for value in list {
            match value.get_ref() {
                DeValue::Table(table) => {
                    let line = self.line(value.span().start);
                    sections.push(self.section(table, line, is).0);
                }
                _ => self.wrong(key, value, &format!("a table for each, headed [[{key}]]")),
            }
        }
        sections
    }

    /// The entries of `roles` or `settings`.
    fn entries(&mut self, table: &str, value: &Spanned<DeValue<'_>>) -> Vec<Entry> {
        let DeValue::Table(entries) = value.get_ref() else {
            self.wrong(table, value, &format!("a table, headed [{table}]"));
            return Vec::new();
        };
        entries.iter().filter_map(|(word, value)| self.entry(table, word, value)).collect()
    }

    fn entry(
        &mut self,
        table: &str,
        word: &Spanned<toml::de::DeString<'_>>,
        value: &Spanned<DeValue<'_>>,
    ) -> Option<Entry> {
        let line = self.line(word.span().start);
        let word = word.get_ref().as_ref().to_owned();
        let role = match parse_role(&word) {
            Ok(role) => role,
            Err(slip) => {
                let slip = slip.replace(crate::roles::PREFIX, "");
                self.fault("unknown-role", line, slip, "the README lists the roles");
                return None;
            }
        };
        let info = role.role.info();
        if info.way == Way::Own {
            self.fault("unknown-role", line, format!("{word} is hence's own name"), "take it out");
            return None;
        }
        let what = if table == "roles" {
            What::Cells(self.cells(&word, value)?)
        } else if role.role.is_setting() {
            self.setting(&word, &role, value)?
        } else {
            let message = format!("`{word}` is no setting: {}", info.what);
            self.fault(
                "plan-text",
                line,
                message,
                format!("write it below [roles]: {word} = \"Sheet1!C5:Z5\""),
            );
            return None;
        };
        Some(Entry { role, word, what, line })
    }

    fn cells(&mut self, word: &str, value: &Spanned<DeValue<'_>>) -> Option<String> {
        match value.get_ref() {
            DeValue::String(text) if !text.trim().is_empty() => Some(text.trim().to_owned()),
            found => {
                let line = self.line(value.span().start);
                let message = format!("`{word}` is {}, allowed are cells as a text", kind(found));
                let settings = parse_role(word).is_ok_and(|role| role.role.is_setting());
                let hint = if settings && !matches!(found, DeValue::String(_) | DeValue::Table(_)) {
                    format!(
                        "write it below [settings] if the workbook holds it in no cell; else {word} = \"Sheet1!C5\""
                    )
                } else {
                    format!("write {word} = \"Sheet1!C5:Z5\"")
                };
                self.fault("plan-text", line, message, hint);
                None
            }
        }
    }

    fn setting(&mut self, word: &str, role: &RoleName, value: &Spanned<DeValue<'_>>) -> Option<What> {
        let number = |text: &str| text.replace('_', "").parse::<f64>().ok().filter(|x| x.is_finite());
        let found = match value.get_ref() {
            DeValue::String(text) if !text.trim().is_empty() => {
                let text = text.trim();
                let share = text.strip_suffix('%').and_then(|rest| rest.trim().parse::<f64>().ok());
                match share {
                    // A rate line is a text, a share is a number.
                    Some(share) if role.role.is_number() => Some(What::Number(share / 100.0)),
                    _ => Some(What::Text(text.to_owned())),
                }
            }
            DeValue::Integer(digits) => {
                let plain = digits.as_str().replace('_', "");
                i64::from_str_radix(&plain, digits.radix()).ok().map(|n| What::Number(n as f64))
            }
            DeValue::Float(digits) => number(digits.as_str()).map(What::Number),
            DeValue::Datetime(stated) => stated.date.and_then(|date| {
                let (year, month, day) = (i32::from(date.year), u32::from(date.month), u32::from(date.day));
                NaiveDate::from_ymd_opt(year, month, day).map(What::Date)
            }),
            DeValue::Array(list) => {
                let texts: Option<Vec<&str>> = list
                    .iter()
                    .map(|one| match one.get_ref() {
                        DeValue::String(text) => Some(text.as_ref()),
                        _ => None,
                    })
                    .collect();
                texts.filter(|texts| !texts.is_empty()).map(|texts| What::Text(texts.join("\n")))
            }
            _ => None,
        };
        if found.is_none() {
            self.wrong(
                word,
                value,
                &format!("a text, a number, a date or a list of names: {}", role.role.info().what),
            );
        }
        found
    }

    /// One role said twice in one place.
    fn check_twins(&mut self, entries: &[Entry]) {
        let mut seen = BTreeMap::new();
        for entry in entries {
            let about = |name: &Option<String>| name.as_deref().map(key);
            let id = (entry.role.role, about(&entry.role.stream), about(&entry.role.option));
            if let Some(first) = seen.insert(id, entry.line) {
                let message = format!("`{}` is given on line {first} too", entry.word);
                self.fault("plan-text", entry.line, message, "keep one of the two");
            }
        }
    }

    /// Two options, or two appraisals, of one name.
    fn check_names(&mut self, sections: &[Section]) {
        let mut seen = BTreeMap::new();
        for section in sections {
            let Some(name) = &section.name else { continue };
            if let Some(first) = seen.insert(key(name), section.line) {
                let message = format!("`{name}` is described on line {first} too");
                self.fault("plan-text", section.line, message, "give each its own name");
            }
        }
    }
}

fn kind(value: &DeValue<'_>) -> &'static str {
    match value {
        DeValue::String(text) if text.trim().is_empty() => "an empty text",
        DeValue::String(_) => "a text",
        DeValue::Integer(_) | DeValue::Float(_) => "a number",
        DeValue::Boolean(_) => "true or false",
        DeValue::Datetime(_) => "a date or time",
        DeValue::Array(_) => "a list",
        DeValue::Table(_) => "a table",
    }
}
