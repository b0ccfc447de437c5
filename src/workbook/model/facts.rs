//! What a sheet holds besides values: merged cells, tables, array formulas, protection and the like.

use quick_xml::events::{BytesStart, Event};

use super::{CellCursor, FormulaKind, FormulaTag, Table, Workbook, text_of};
use crate::package::Package;
use crate::problem::Result;
use crate::references::{Cell, NameTarget, Range};
use crate::xml::{FORMULA_MARKS, Scanner, attribute};

/// What decides whether cells of a sheet may be filled, and what to warn of.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct SheetFacts {
    /// Merged cells; only the first of each shows.
    pub merged: Vec<Range>,
    /// Its tables.
    pub tables: Vec<Table>,
    /// Cells that one array formula fills.
    pub array_formulas: Vec<Range>,
    /// Cells that a what-if table fills.
    pub data_tables: Vec<Range>,
    /// The first cells of groups of shared formulas.
    pub shared_masters: Vec<SharedMaster>,
    /// The sheet is protected.
    pub protected: bool,
    /// Hidden rows, first and last of each run, from 0.
    pub hidden_rows: Vec<(u32, u32)>,
    /// Hidden columns, first and last of each run, from 0.
    pub hidden_columns: Vec<(u32, u32)>,
    /// Validation rules.
    pub validations: Vec<Validation>,
    /// Cells that pivot tables fill.
    pub pivots: Vec<Range>,
    /// Cells that queries fill.
    pub query_tables: Vec<Range>,
}

/// The cell that holds the text of a group of shared formulas.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct SharedMaster {
    /// Its address.
    pub cell: Cell,
    /// The group's number.
    pub index: u32,
    /// The cells within which its dependents lie.
    pub range: Range,
}

/// A validation rule.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Validation {
    /// Its cells.
    pub ranges: Vec<Range>,
    /// `whole`, `decimal`, `list`, `date`, `time`, `textLength`, `custom` or `none`.
    pub kind: String,
    /// `between`, `notBetween`, `equal`, `notEqual`, `lessThan`, `lessThanOrEqual`, `greaterThan`, `greaterThanOrEqual`.
    pub operator: String,
    /// The first limit, or the list.
    pub formula1: String,
    /// The second limit.
    pub formula2: String,
}

impl SheetFacts {
    /// Whether a row is hidden.
    pub fn row_hidden(&self, row: u32) -> bool {
        self.hidden_rows.iter().any(|&(first, last)| first <= row && row <= last)
    }

    /// Whether a column is hidden.
    pub fn column_hidden(&self, col: u32) -> bool {
        self.hidden_columns.iter().any(|&(first, last)| first <= col && col <= last)
    }
}

impl Workbook {
    /// Reads what a sheet holds besides values, in one pass and without keeping its cells.
    ///
    /// **Arguments**: the sheet's place in [`Workbook::sheets`].
    /// **Returns**: everything in the order of the part; nothing for a sheet without cells.
    /// **Errors**: `cell-address`, and those of reading XML.
    pub fn facts(&self, package: &Package, sheet: usize) -> Result<SheetFacts> {
        let part = &self.sheets[sheet].part;
        let mut facts = SheetFacts::read(part, &package.part(part)?.unwrap_or_default())?;
        facts.tables = self.tables.iter().filter(|table| table.sheet == sheet).cloned().collect();
        facts.query_tables = facts.tables.iter().filter(|t| t.from_query).map(|t| t.range).collect();
        for relationship in package.relationships(part)? {
            let kind = relationship.kind.rsplit('/').next().unwrap_or_default();
            if relationship.external || !matches!(kind, "pivotTable" | "queryTable") {
                continue;
            }
            let Some(xml) = package.part(&relationship.target)? else { continue };
            if kind == "pivotTable" {
                let range = first_attribute(&relationship.target, &xml, b"location", "ref")?;
                facts.pivots.extend(range.and_then(|text| Range::parse_any(&text).ok()));
            } else if let Some(name) = first_attribute(&relationship.target, &xml, b"queryTable", "name")? {
                // A query's cells are those of the sheet's name that is called after it.
                let name = self.find_name(&name.replace(' ', "_"), Some(sheet));
                if let Some(NameTarget::Cells(at)) = name.map(|name| self.resolve(name)) {
                    facts.query_tables.push(at.range);
                }
            }
        }
        Ok(facts)
    }
}

/// An attribute of the first element of that local name.
fn first_attribute(part: &str, xml: &[u8], element: &[u8], name: &str) -> Result<Option<String>> {
    let mut scanner = Scanner::new(part, xml)?;
    while let Some(token) = scanner.next()? {
        if let Event::Start(tag) | Event::Empty(tag) = &token.event
            && tag.local_name().as_ref() == element
        {
            return attribute(part, tag, name);
        }
    }
    Ok(None)
}

/// The text of a validation rule that is being read.
#[derive(Clone, Copy, PartialEq)]
enum Reading {
    Formula1,
    Formula2,
    Cells,
}

impl SheetFacts {
    /// Reads a sheet part alone: everything but tables, pivot tables and queries.
    pub(super) fn read(part: &str, xml: &[u8]) -> Result<SheetFacts> {
        let mut facts = SheetFacts::default();
        let mut scanner = Scanner::new(part, xml)?;
        let mut cursor = CellCursor::default();
        let mut cell = Cell::new(0, 0);
        let mut in_data = false;
        let mut rule: Option<(Validation, String)> = None;
        let mut reading = None;
        while let Some(token) = scanner.next()? {
            let opened = matches!(token.event, Event::Start(_));
            match &token.event {
                Event::Start(tag) | Event::Empty(tag) => {
                    let depth = scanner.depth() + usize::from(!opened);
                    match (in_data, depth, tag.local_name().as_ref()) {
                        (false, 2, b"sheetData") => in_data = opened,
                        (true, 3, b"row") => {
                            let row = cursor.row(part, tag)?;
                            if on(part, tag, "hidden")? {
                                add_run(&mut facts.hidden_rows, row, row);
                            }
                            if opened {
                                scanner.pass_over(tag.name().as_ref(), FORMULA_MARKS);
                            }
                        }
                        (true, 4, b"c") => cell = cursor.cell(part, tag)?,
                        (true, 5, b"f") => facts.formula(cell, FormulaTag::read(part, tag)?),
                        (true, ..) => {}
                        (false, _, b"col") => facts.column(part, tag)?,
                        (false, _, b"sheetProtection") => facts.protected = on(part, tag, "sheet")?,
                        (false, _, b"mergeCell") => {
                            let range = attribute(part, tag, "ref")?;
                            facts.merged.extend(range.and_then(|text| Range::parse_any(&text).ok()));
                        }
                        (false, _, b"dataValidation") => {
                            let found = read_rule(part, tag)?;
                            if opened {
                                rule = Some(found);
                            } else {
                                facts.add_rule(found);
                            }
                        }
                        (false, _, local) if rule.is_some() && opened => {
                            reading = match local {
                                b"formula1" => Some(Reading::Formula1),
                                b"formula2" => Some(Reading::Formula2),
                                b"sqref" => Some(Reading::Cells),
                                _ => reading,
                            };
                        }
                        _ => {}
                    }
                }
                Event::End(tag) => match tag.local_name().as_ref() {
                    b"sheetData" if scanner.depth() == 1 => in_data = false,
                    b"formula1" | b"formula2" | b"sqref" => reading = None,
                    b"dataValidation" => {
                        if let Some(done) = rule.take() {
                            facts.add_rule(done);
                        }
                    }
                    _ => {}
                },
                event => {
                    if let (Some((rule, cells)), Some(reading)) = (&mut rule, reading) {
                        let text = match reading {
                            Reading::Formula1 => &mut rule.formula1,
                            Reading::Formula2 => &mut rule.formula2,
                            Reading::Cells => cells,
                        };
                        text_of(part, event, text)?;
                    }
                }
            }
        }
        Ok(facts)
    }

    fn formula(&mut self, cell: Cell, tag: FormulaTag) {
        match (tag.kind, tag.range) {
            (FormulaKind::Array, range) => self.array_formulas.push(range.unwrap_or(Range::cell(cell))),
            (FormulaKind::DataTable(..), range) => self.data_tables.push(range.unwrap_or(Range::cell(cell))),
            (FormulaKind::Shared(index), Some(range)) => {
                self.shared_masters.push(SharedMaster { cell, index, range });
            }
            (FormulaKind::Shared(_), None) | (FormulaKind::Normal, _) => {}
        }
    }

    fn column(&mut self, part: &str, tag: &BytesStart<'_>) -> Result<()> {
        let number = |name| -> Result<Option<u32>> {
            Ok(attribute(part, tag, name)?.and_then(|text| text.trim().parse::<u32>().ok()?.checked_sub(1)))
        };
        if let (true, Some(first), Some(last)) = (on(part, tag, "hidden")?, number("min")?, number("max")?) {
            add_run(&mut self.hidden_columns, first, last);
        }
        Ok(())
    }

    fn add_rule(&mut self, (mut rule, cells): (Validation, String)) {
        rule.ranges = cells.split_whitespace().filter_map(|text| Range::parse_any(text).ok()).collect();
        self.validations.push(rule);
    }
}

/// A rule without its formulas, and its cells as written.
fn read_rule(part: &str, tag: &BytesStart<'_>) -> Result<(Validation, String)> {
    let or = |name, otherwise: &str| -> Result<String> {
        Ok(attribute(part, tag, name)?.unwrap_or_else(|| otherwise.to_owned()))
    };
    let rule = Validation {
        kind: or("type", "none")?,
        operator: or("operator", "between")?,
        ..Validation::default()
    };
    Ok((rule, or("sqref", "")?))
}

fn on(part: &str, tag: &BytesStart<'_>, name: &str) -> Result<bool> {
    Ok(attribute(part, tag, name)?.is_some_and(|value| matches!(value.trim(), "1" | "true" | "on")))
}

/// Adds a run, joined to the one before where they touch.
fn add_run(runs: &mut Vec<(u32, u32)>, first: u32, last: u32) {
    match runs.last_mut() {
        Some((_, end)) if end.checked_add(1) == Some(first) => *end = last,
        _ => runs.push((first, last)),
    }
}
