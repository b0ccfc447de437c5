//! Where things stand in a sheet part: the written cells, their rows, and what limits them.

use std::borrow::Cow;
use std::collections::{BTreeMap, BTreeSet};
use std::ops::Range as Span;

use super::{CellWrite, problem};
use crate::problem::{Problem, Result};
use crate::references::{Cell, MAX_COLUMNS, MAX_ROWS, Range, shift};
use crate::splice::{Kind, Token, Tokens, attribute, bad_xml, local, prefix};
use crate::xml::FORMULA_MARKS;

/// More text than this added by handing a shared formula on is refused.
const MAX_HANDED_ON: usize = 64 << 20;

/// Ranges that a single cell cannot be taken out of.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Block {
    Array,
    Table,
    Merged,
}

/// A written cell that is there already.
pub(super) struct Found<'a> {
    pub(super) raw: &'a str,
    start: usize,
    formula: bool,
}

impl Found<'_> {
    pub(super) fn span(&self) -> Span<usize> {
        self.start..self.start + self.raw.len()
    }
}

/// A cell that loses the master of its shared formula, and what it gets instead.
pub(super) struct Dependent<'a> {
    pub(super) raw: &'a str,
    start: usize,
    pub(super) formula: String,
}

impl Dependent<'_> {
    pub(super) fn span(&self) -> Span<usize> {
        self.start..self.start + self.raw.len()
    }
}

/// A row that cells are written into.
pub(super) struct Row<'a> {
    pub(super) tag: &'a str,
    pub(super) start: usize,
    /// Where its end tag begins; none for `<row/>`.
    pub(super) end: Option<usize>,
    /// What its new cells take.
    pub(super) style: Option<String>,
    /// Column and place of each of its cells.
    pub(super) cells: Vec<(u32, usize)>,
}

/// The element that holds the rows.
pub(super) struct Data<'a> {
    pub(super) tag: &'a str,
    pub(super) start: usize,
    /// Where its end tag begins; none for `<sheetData/>`.
    pub(super) end: Option<usize>,
}

/// What one pass over the part finds.
pub(super) struct Layout<'a> {
    /// Of the part's elements, with its colon.
    pub(super) prefix: &'a str,
    /// The dimension's tag and its place.
    pub(super) dimension: Option<(&'a str, usize)>,
    pub(super) data: Data<'a>,
    pub(super) rows: BTreeMap<u32, Row<'a>>,
    pub(super) cells: BTreeMap<Cell, Found<'a>>,
    pub(super) heirs: BTreeMap<Cell, Dependent<'a>>,
    pub(super) blocks: Vec<(Range, Block)>,
    pub(super) problems: Vec<Problem>,
    columns: Vec<(u32, u32, String)>,
    before: BTreeMap<u32, usize>,
}

impl<'a> Layout<'a> {
    pub(super) fn read(xml: &'a [u8], writes: &BTreeMap<Cell, CellWrite>) -> Result<Layout<'a>> {
        let mut pass = Pass::new(xml, writes)?;
        while pass.step()? {}
        pass.finish()
    }

    /// The style of a column's new cells.
    pub(super) fn column_style(&self, col: u32) -> Option<&str> {
        let column = self.columns.iter().find(|(first, last, _)| (*first..=*last).contains(&col));
        column.map(|(.., style)| style.as_str())
    }

    /// Where a row that is not there yet belongs.
    pub(super) fn place_of_row(&self, row: u32) -> usize {
        let end = self.data.end.unwrap_or(self.data.start);
        self.before.get(&row).copied().unwrap_or(end)
    }

    /// Does a formula give this cell its value?
    pub(super) fn gives_a_value(&self, at: Cell) -> bool {
        self.cells.get(&at).is_some_and(|found| found.formula)
            || self.blocks.iter().any(|(range, block)| *block != Block::Merged && range.contains(at))
    }
}

/// A shared formula whose master is overwritten, and the cells that lose it.
struct Group<'a> {
    master: Cell,
    formula: String,
    dependents: Vec<(Cell, usize, &'a str)>,
}

struct OpenCell {
    at: Cell,
    start: usize,
    formula: bool,
    /// The group that the cell depends on, if that lost its master.
    group: Option<usize>,
}

struct Pass<'a, 'w> {
    text: &'a str,
    tokens: Tokens<'a>,
    writes: &'w BTreeMap<Cell, CellWrite>,
    layout: Layout<'a>,
    section: &'a str,
    row: Option<u32>,
    last_row: Option<u32>,
    open_row: Option<Row<'a>>,
    last_col: Option<u32>,
    cell: Option<OpenCell>,
    /// The group whose master's formula is being read.
    reading: Option<usize>,
    groups: Vec<Group<'a>>,
    /// By shared index: the latest master seen, as a group if it is overwritten.
    shared: BTreeMap<u32, Option<usize>>,
    /// Shared indices used before any master.
    early: BTreeSet<u32>,
    waiting: BTreeSet<u32>,
    data_seen: bool,
}

impl<'a, 'w> Pass<'a, 'w> {
    fn new(xml: &'a [u8], writes: &'w BTreeMap<Cell, CellWrite>) -> Result<Self> {
        let tokens = Tokens::new(xml)?;
        Ok(Pass {
            text: tokens.text(),
            tokens,
            writes,
            layout: Layout {
                prefix: "",
                dimension: None,
                data: Data { tag: "", start: 0, end: None },
                rows: BTreeMap::new(),
                cells: BTreeMap::new(),
                heirs: BTreeMap::new(),
                blocks: Vec::new(),
                problems: Vec::new(),
                columns: Vec::new(),
                before: BTreeMap::new(),
            },
            section: "",
            row: None,
            last_row: None,
            open_row: None,
            last_col: None,
            cell: None,
            reading: None,
            groups: Vec::new(),
            shared: BTreeMap::new(),
            early: BTreeSet::new(),
            waiting: writes.keys().map(|at| at.row).collect(),
            data_seen: false,
        })
    }

    fn step(&mut self) -> Result<bool> {
        let Some(token) = self.tokens.next()? else { return Ok(false) };
        match token.kind {
            Kind::Open => self.open(token, self.tokens.depth())?,
            Kind::Empty => {
                let depth = self.tokens.depth() + 1;
                self.open(token, depth)?;
                self.close(token, depth, true)?;
            }
            Kind::Close => self.close(token, self.tokens.depth() + 1, false)?,
            Kind::Text => {
                if let Some(group) = self.reading {
                    self.groups[group].formula.push_str(&token.characters()?);
                }
            }
            Kind::Other => {}
        }
        Ok(true)
    }

    /// Is this an element of the part's own vocabulary and of that name?
    fn is(&self, name: &str, wanted: &str) -> bool {
        name.len() == self.layout.prefix.len() + wanted.len()
            && name.ends_with(wanted)
            && name.starts_with(self.layout.prefix)
    }

    fn open(&mut self, token: Token<'a>, depth: usize) -> Result<()> {
        let name = token.name();
        match depth {
            1 if local(name) == "worksheet" => self.layout.prefix = prefix(name),
            1 => return Err(bad_xml(format!("the sheet is a {}, not a worksheet", local(name)))),
            2 => {
                self.section = name.strip_prefix(self.layout.prefix).unwrap_or_default();
                if self.section == "dimension" {
                    self.layout.dimension = Some((token.raw, token.start));
                } else if self.section == "sheetData" {
                    if self.data_seen {
                        return Err(bad_xml("the sheet has two sheetData elements"));
                    }
                    self.data_seen = true;
                    self.layout.data = Data { tag: token.raw, start: token.start, end: None };
                }
            }
            3 if self.section == "cols" && self.is(name, "col") => self.column(token.raw)?,
            3 if self.section == "mergeCells" && self.is(name, "mergeCell") => {
                self.block(attribute(token.raw, "ref")?, Block::Merged)?;
            }
            3 if self.section == "sheetData" && self.is(name, "row") => self.open_row(token)?,
            4 if self.row.is_some() && self.is(name, "c") => self.open_cell(token)?,
            5 if self.cell.is_some() && self.is(name, "f") => self.formula(token.raw)?,
            _ => {}
        }
        Ok(())
    }

    fn close(&mut self, token: Token<'a>, depth: usize, empty: bool) -> Result<()> {
        match depth {
            2 => {
                if self.section == "sheetData" && !empty {
                    self.layout.data.end = Some(token.start);
                }
                self.section = "";
            }
            3 => {
                if let (Some(number), Some(mut row)) = (self.row, self.open_row.take()) {
                    row.end = (!empty).then_some(token.start);
                    if self.layout.rows.insert(number, row).is_some() {
                        return Err(bad_xml(format!("row {} stands twice in the sheet", number + 1)));
                    }
                }
                self.row = None;
            }
            4 => self.close_cell(token.span().end)?,
            5 => self.reading = None,
            _ => {}
        }
        Ok(())
    }

    fn column(&mut self, raw: &str) -> Result<()> {
        let number = |name| -> Result<Option<u32>> {
            Ok(attribute(raw, name)?.and_then(|v| v.parse::<u32>().ok()).filter(|n| *n > 0))
        };
        if let (Some(first), Some(last), Some(style)) = (number("min")?, number("max")?, number("style")?) {
            self.layout.columns.push((first - 1, last - 1, style.to_string()));
        }
        Ok(())
    }

    fn open_row(&mut self, token: Token<'a>) -> Result<()> {
        let number = match attribute(token.raw, "r")? {
            Some(r) => r.trim().parse::<u32>().ok().and_then(|r| r.checked_sub(1)),
            None => Some(self.last_row.map_or(0, |last| last + 1)),
        };
        let Some(number) = number.filter(|n| *n < MAX_ROWS) else {
            return Err(bad_xml(format!("a row is numbered outside 1 to {MAX_ROWS}: {}", token.raw)));
        };
        (self.row, self.last_row, self.last_col) = (Some(number), Some(number), None);
        let later = self.waiting.split_off(&number);
        for row in std::mem::replace(&mut self.waiting, later) {
            self.layout.before.insert(row, token.start);
        }
        let row_start = Cell { row: number, col: 0 };
        let row_end = Cell { row: number, col: MAX_COLUMNS };
        if self.writes.range(row_start..row_end).next().is_some() {
            let custom = matches!(attribute(token.raw, "customFormat")?.as_deref(), Some("1" | "true"));
            let style = attribute(token.raw, "s")?.filter(|_| custom).map(Cow::into_owned);
            let (tag, start) = (token.raw, token.start);
            self.open_row = Some(Row { tag, start, end: None, style, cells: Vec::new() });
        } else if token.kind == Kind::Open {
            self.tokens.pass_over(token.name(), FORMULA_MARKS);
        }
        Ok(())
    }

    fn open_cell(&mut self, token: Token<'a>) -> Result<()> {
        let Some(row) = self.row else { return Ok(()) };
        let at = match attribute(token.raw, "r")? {
            Some(r) => r
                .trim()
                .parse()
                .map_err(|_| bad_xml(format!("a cell of row {} is addressed as {r}", row + 1)))?,
            None => Cell { row, col: self.last_col.map_or(0, |last| last + 1) },
        };
        if at.row != row || at.col >= MAX_COLUMNS {
            let what = format!("stands in row {} of the sheet part", row + 1);
            return Err(problem("misplaced-cell", at, &what).into());
        }
        self.last_col = Some(at.col);
        if let Some(row) = &mut self.open_row {
            row.cells.push((at.col, token.start));
        }
        self.cell = Some(OpenCell { at, start: token.start, formula: false, group: None });
        Ok(())
    }

    fn close_cell(&mut self, end: usize) -> Result<()> {
        let Some(cell) = self.cell.take() else { return Ok(()) };
        let raw = &self.text[cell.start..end];
        if let Some(group) = cell.group {
            self.groups[group].dependents.push((cell.at, cell.start, raw));
        }
        if self.writes.contains_key(&cell.at) {
            let found = Found { raw, start: cell.start, formula: cell.formula };
            if self.layout.cells.insert(cell.at, found).is_some() {
                return Err(problem("duplicate-cell", cell.at, "stands twice in the sheet part").into());
            }
        }
        Ok(())
    }

    fn formula(&mut self, raw: &'a str) -> Result<()> {
        let Some(cell) = &mut self.cell else { return Ok(()) };
        cell.formula = true;
        match attribute(raw, "t")?.as_deref() {
            Some("array") => self.block(attribute(raw, "ref")?, Block::Array)?,
            Some("dataTable") => self.block(attribute(raw, "ref")?, Block::Table)?,
            Some("shared") => {
                let Some(si) = attribute(raw, "si")?.and_then(|si| si.parse::<u32>().ok()) else {
                    return Ok(());
                };
                let overwritten = self.writes.get(&cell.at).is_some_and(CellWrite::overwrites);
                let master = attribute(raw, "ref")?.is_some()
                    || (!raw.ends_with("/>") && !self.shared.contains_key(&si));
                if master {
                    if overwritten && self.early.contains(&si) {
                        let what = "is the master of a shared formula that stands before it";
                        return Err(problem("shared-formula", cell.at, what)
                            .hint("save the workbook again in a spreadsheet program")
                            .into());
                    }
                    let group = overwritten.then_some(self.groups.len());
                    if overwritten {
                        let (master, formula) = (cell.at, String::new());
                        self.groups.push(Group { master, formula, dependents: Vec::new() });
                        self.reading = group.filter(|_| !raw.ends_with("/>"));
                    }
                    self.shared.insert(si, group);
                } else if let Some(known) = self.shared.get(&si) {
                    cell.group = known.filter(|_| !overwritten);
                } else {
                    self.early.insert(si);
                }
            }
            _ => {}
        }
        Ok(())
    }

    /// Notes a block if a written cell lies in it.
    fn block(&mut self, range: Option<Cow<str>>, block: Block) -> Result<()> {
        let Some(range) = range else { return Ok(()) };
        let Ok(range) = range.trim().parse::<Range>() else {
            return Err(bad_xml(format!("{range} is no range of cells")));
        };
        let mut between = self.writes.range(range.first..=range.last);
        if between.any(|(at, _)| range.contains(*at)) {
            self.layout.blocks.push((range, block));
        }
        Ok(())
    }

    fn finish(mut self) -> Result<Layout<'a>> {
        if !self.data_seen {
            return Err(bad_xml("the sheet has no sheetData element"));
        }
        let mut handed_on = 0;
        for group in self.groups {
            for (at, start, raw) in group.dependents {
                let from = group.master;
                let d_row = i64::from(at.row) - i64::from(from.row);
                let d_col = i64::from(at.col) - i64::from(from.col);
                let formula = shift(&group.formula, d_row, d_col);
                handed_on += formula.len();
                if formula.is_empty() || handed_on > MAX_HANDED_ON {
                    let what = format!("is the master of a shared formula that {at} cannot be given");
                    self.layout.problems.push(problem("shared-formula", from, &what));
                    break;
                }
                self.layout.heirs.insert(at, Dependent { raw, start, formula });
            }
        }
        Ok(self.layout)
    }
}

/// The `spans` of a row with room for new cells, where it has one that does not suffice.
pub(super) fn widened_spans(tag: &str, first: u32, last: u32) -> Result<Option<String>> {
    let Some(spans) = attribute(tag, "spans")? else { return Ok(None) };
    let parsed = spans.split_once(':').and_then(|(a, b)| Some((a.parse().ok()?, b.parse().ok()?)));
    let Some((low, high)) = parsed else { return Ok(None) };
    let wider = (u32::min(low, first + 1), u32::max(high, last + 1));
    Ok((wider != (low, high)).then(|| format!("{}:{}", wider.0, wider.1)))
}

/// The sheet's dimension with room for new cells, where it has one that does not suffice.
pub(super) fn widened_dimension(tag: &str, cells: impl Iterator<Item = Cell>) -> Result<Option<String>> {
    let old = attribute(tag, "ref")?;
    let Some(old) = old.and_then(|old| old.parse::<Range>().ok()) else { return Ok(None) };
    let wider = cells.fold(old, |range, at| range.hull(&Range::cell(at)));
    Ok((wider != old).then(|| wider.to_string()))
}
