//! Two versions of a sheet compared, outside the written cells and within them.

use std::collections::{BTreeMap, BTreeSet};
use std::ops::Range as Span;

use super::{differs, sheet_place};
use crate::patch::{Cached, CellWrite, Settled};
use crate::problem::{Place, Result};
use crate::references::{Cell, Range, shift};
use crate::splice::{Element, Kind, Token, Tokens, all_attributes, attribute, local};

/// Refuses a new version in which anything but the written cells has changed, or those not as they should.
pub(super) fn compare(sheet: &str, old: &[u8], new: &[u8], writes: &BTreeMap<Cell, CellWrite>) -> Result<()> {
    let rows = writes.keys().map(|at| at.row).collect();
    let masters = Masters::new();
    let (kept, found) = (BTreeMap::new(), BTreeSet::new());
    Comparison { sheet, before: Walk::new(old)?, after: Walk::new(new)?, writes, rows, masters, kept, found }
        .run()
}

/// Two versions of a sheet, gone through side by side.
struct Comparison<'a> {
    sheet: &'a str,
    before: Walk<'a>,
    after: Walk<'a>,
    writes: &'a BTreeMap<Cell, CellWrite>,
    /// The rows that cells were written into.
    rows: BTreeSet<u32>,
    masters: Masters,
    /// The old text of cells whose formula has to stay.
    kept: BTreeMap<Cell, &'a str>,
    /// The written cells seen in the new version.
    found: BTreeSet<Cell>,
}

impl Comparison<'_> {
    fn run(mut self) -> Result<()> {
        loop {
            let a = self.old_piece()?;
            let b = self.new_piece(a.as_ref())?;
            if a.is_none() && b.is_none() {
                break;
            }
            if let (Some(Piece::Row(row, _)), Some(Piece::Row(other, _))) = (&a, &b)
                && row == other
                && !self.rows.contains(row)
            {
                self.pass_same_row();
            }
            if !self.same(a.as_ref(), b.as_ref())? {
                let place = match a {
                    Some(Piece::Cell(at, _)) => Place::cells(self.sheet, Range::cell(at)),
                    _ => sheet_place(self.sheet),
                };
                return Err(differs(place, "something that was not to be written has changed"));
            }
        }
        let lost = |(at, write): &(&Cell, &CellWrite)| write.overwrites() && !self.found.contains(at);
        match self.writes.iter().find(lost) {
            Some((at, _)) => {
                let place = Place::cells(self.sheet, Range::cell(*at));
                Err(differs(place, "the cell is missing from the output"))
            }
            None => Ok(()),
        }
    }

    /// Goes to the end of a row that is the same in both versions, byte for byte.
    fn pass_same_row(&mut self) {
        if let (Some(old), Some(new)) = (self.before.row_content(), self.after.row_content())
            && old == new
            && !old.contains("shared")
        {
            self.before.tokens.pass(old.len());
            self.after.tokens.pass(new.len());
        }
    }

    /// The next old piece that is no written cell.
    fn old_piece(&mut self) -> Result<Option<Piece>> {
        loop {
            let piece = self.before.next()?;
            let Some(Piece::Cell(at, span)) = &piece else { return Ok(piece) };
            let text = &self.before.text[span.clone()];
            note_master(&mut self.masters, *at, text)?;
            match self.writes.get(at) {
                None => return Ok(piece),
                Some(write) if write.keeps_formula() => {
                    self.kept.insert(*at, text);
                }
                Some(_) => {}
            }
        }
    }

    /// The next new piece that is no written cell and no row that is there only for such cells.
    fn new_piece(&mut self, old: Option<&Piece>) -> Result<Option<Piece>> {
        let mut new_row = false;
        loop {
            let piece = self.after.next()?;
            match &piece {
                Some(Piece::Cell(at, span)) if self.writes.contains_key(at) => {
                    self.written(*at, span.clone())?
                }
                Some(Piece::EndRow) if new_row => new_row = false,
                _ if new_row => {
                    return Err(differs(sheet_place(self.sheet), "a new row holds more than was written"));
                }
                Some(Piece::Row(row, _)) if self.rows.contains(row) => {
                    new_row = !matches!(old, Some(Piece::Row(there, _)) if there == row);
                    if !new_row {
                        return Ok(piece);
                    }
                }
                _ => return Ok(piece),
            }
        }
    }

    /// Checks a written cell.
    fn written(&mut self, at: Cell, span: Span<usize>) -> Result<()> {
        let cell = &self.after.text[span];
        let write = &self.writes[&at];
        let formula_kept = match self.kept.get(&at) {
            Some(old) => same_formula(at, old, cell, &self.masters)?,
            None => true,
        };
        if holds(cell, write)? && formula_kept && self.found.insert(at) {
            return Ok(());
        }
        let place = Place::cells(self.sheet, Range::cell(at));
        Err(differs(place, "the cell does not hold what was to be written"))
    }

    fn same(&self, a: Option<&Piece>, b: Option<&Piece>) -> Result<bool> {
        let (before, after) = (self.before.text, self.after.text);
        Ok(match (a, b) {
            (Some(Piece::Row(_, a)), Some(Piece::Row(_, b)))
            | (Some(Piece::Data(a)), Some(Piece::Data(b))) => {
                same_tag(&before[a.clone()], &after[b.clone()])?
            }
            (Some(Piece::EndRow), Some(Piece::EndRow)) | (Some(Piece::EndData), Some(Piece::EndData)) => true,
            (Some(Piece::Cell(at, a)), Some(Piece::Cell(other, b))) => {
                let (a, b) = (&before[a.clone()], &after[b.clone()]);
                at == other && (a == b || handed_on(*at, a, b, &self.masters)?)
            }
            (Some(Piece::Other(a)), Some(Piece::Other(b))) => before[a.clone()] == after[b.clone()],
            _ => false,
        })
    }
}

/// Masters of shared formulas by index: the cell and its formula.
type Masters = BTreeMap<String, (Cell, String)>;

fn note_master(masters: &mut Masters, at: Cell, cell: &str) -> Result<()> {
    if !cell.contains("shared") {
        return Ok(());
    }
    let root = Element::root(cell.as_bytes())?;
    if let Some(f) = root.child("f")
        && let Some(index) = f.attribute("si")?
    {
        let formula = characters(cell, f)?;
        if !formula.is_empty() && (f.attribute("ref")?.is_some() || !masters.contains_key(index.as_ref())) {
            masters.insert(index.into_owned(), (at, formula));
        }
    }
    Ok(())
}

/// Is the new cell the old dependent of a shared formula, with that formula as its own?
fn handed_on(at: Cell, old: &str, new: &str, masters: &Masters) -> Result<bool> {
    let (old_root, new_root) = (Element::root(old.as_bytes())?, Element::root(new.as_bytes())?);
    let (Some(f), Some(own)) = (old_root.child("f"), new_root.child("f")) else { return Ok(false) };
    let rest = |cell: &str, f: &Element| format!("{}{}", &cell[..f.span.start], &cell[f.span.end..]);
    Ok(rest(old, f) == rest(new, own) && same_formula(at, old, new, masters)?)
}

/// Do two versions of a cell hold one formula: the same element, or the shared one as their own?
fn same_formula(at: Cell, old: &str, new: &str, masters: &Masters) -> Result<bool> {
    let (old_root, new_root) = (Element::root(old.as_bytes())?, Element::root(new.as_bytes())?);
    let (f, own) = match (old_root.child("f"), new_root.child("f")) {
        (Some(f), Some(own)) => (f, own),
        (f, own) => return Ok(f.is_none() && own.is_none()),
    };
    if old[f.span.clone()] == new[own.span.clone()] {
        return Ok(true);
    }
    let Some(index) = f.attribute("si")? else { return Ok(false) };
    let Some((master, formula)) = masters.get(index.as_ref()) else { return Ok(false) };
    let d_row = i64::from(at.row) - i64::from(master.row);
    let d_col = i64::from(at.col) - i64::from(master.col);
    Ok(own.attribute("t")?.is_none() && characters(new, own)? == shift(formula, d_row, d_col))
}

/// Does a cell hold what was written?
fn holds(cell: &str, write: &CellWrite) -> Result<bool> {
    let root = Element::root(cell.as_bytes())?;
    let text = |name| root.child(name).map(|element| characters(cell, element)).transpose();
    let (formula, value, kind) = (text("f")?, text("v")?, root.attribute("t")?);
    let kind = kind.as_deref().unwrap_or("n");
    let number = |wanted: f64| kind == "n" && value.as_deref().and_then(|v| v.parse().ok()) == Some(wanted);
    Ok(match write {
        CellWrite::Number(wanted) => formula.is_none() && number(*wanted),
        CellWrite::Text(_) => formula.is_none() && value.is_none() && root.child("is").is_some(),
        CellWrite::Formula(wanted, cached) => {
            formula.as_ref() == Some(wanted)
                && match cached {
                    Cached::Number(wanted) => number(*wanted),
                    Cached::Text(_) => kind == "str" && value.is_some(),
                    Cached::None => value.is_none(),
                }
        }
        CellWrite::DropValue => value.is_none(),
        CellWrite::Result(Settled::Number(wanted)) => number(*wanted),
        CellWrite::Result(Settled::Text(_)) => kind == "str" && value.is_some(),
        CellWrite::Result(Settled::Logical(_)) => kind == "b" && value.is_some(),
        CellWrite::Result(Settled::Error(wanted)) => kind == "e" && value.as_ref() == Some(wanted),
    })
}

fn characters(xml: &str, element: &Element) -> Result<String> {
    let mut tokens = Tokens::new(xml[element.span.clone()].as_bytes())?;
    let mut text = String::new();
    while let Some(token) = tokens.next()? {
        if token.kind == Kind::Text {
            text.push_str(&token.characters()?);
        }
    }
    Ok(text)
}

/// Are two tags of rows (or of the element around them) the same but for `spans` and `/`?
fn same_tag(a: &str, b: &str) -> Result<bool> {
    let listed = |tag| -> Result<Vec<_>> {
        Ok(all_attributes(tag)?.into_iter().filter(|(name, _)| *name != "spans").collect())
    };
    Ok(listed(a)? == listed(b)?)
}

/// A sheet in pieces: cells whole, everything else tag by tag. The dimension is passed over.
struct Walk<'a> {
    text: &'a str,
    tokens: Tokens<'a>,
    row: u32,
    col: u32,
    section: &'a str,
    /// The qualified name of the row last opened.
    row_name: &'a str,
    /// The end of an element without content, still to be given.
    pending: Option<Piece>,
}

enum Piece {
    Data(Span<usize>),
    EndData,
    Row(u32, Span<usize>),
    EndRow,
    Cell(Cell, Span<usize>),
    Other(Span<usize>),
}

impl<'a> Walk<'a> {
    fn new(xml: &'a [u8]) -> Result<Self> {
        let tokens = Tokens::new(xml)?;
        // Rows and columns count from 1 here, 0 before the first.
        Ok(Walk { text: tokens.text(), tokens, row: 0, col: 0, section: "", row_name: "", pending: None })
    }

    /// What the row just opened holds, where that can be told without reading it.
    fn row_content(&self) -> Option<&'a str> {
        if self.pending.is_some() { None } else { self.tokens.content(self.row_name) }
    }

    fn next(&mut self) -> Result<Option<Piece>> {
        if let Some(end) = self.pending.take() {
            return Ok(Some(end));
        }
        let Some(token) = self.tokens.next()? else { return Ok(None) };
        let empty = token.kind == Kind::Empty;
        let depth = self.tokens.depth() + usize::from(empty);
        match (token.kind, depth) {
            (Kind::Open | Kind::Empty, 2) if local(token.name()) == "dimension" => {
                self.skip(token)?;
                self.next()
            }
            (Kind::Open | Kind::Empty, 2) => {
                self.section = local(token.name());
                Ok(Some(if self.section == "sheetData" {
                    self.pending = empty.then_some(Piece::EndData);
                    Piece::Data(token.span())
                } else {
                    Piece::Other(token.span())
                }))
            }
            (Kind::Open | Kind::Empty, 3) if self.section == "sheetData" => {
                let r = attribute(token.raw, "r")?.and_then(|r| r.trim().parse().ok());
                self.row = r.unwrap_or(self.row + 1);
                self.col = 0;
                self.row_name = token.name();
                self.pending = empty.then_some(Piece::EndRow);
                Ok(Some(Piece::Row(self.row.saturating_sub(1), token.span())))
            }
            (Kind::Open | Kind::Empty, 4) if self.section == "sheetData" => {
                let r = attribute(token.raw, "r")?.and_then(|r| r.trim().parse::<Cell>().ok());
                let at = r.unwrap_or(Cell::new(self.row.saturating_sub(1), self.col));
                self.col = at.col + 1;
                let end = self.skip(token)?;
                Ok(Some(Piece::Cell(at, token.start..end)))
            }
            (Kind::Close, 2) if self.section == "sheetData" => Ok(Some(Piece::EndRow)),
            (Kind::Close, 1) if self.section == "sheetData" => {
                self.section = "";
                Ok(Some(Piece::EndData))
            }
            _ => Ok(Some(Piece::Other(token.span()))),
        }
    }

    /// Goes to the end of the element that this tag opens.
    fn skip(&mut self, token: Token) -> Result<usize> {
        let mut end = token.span().end;
        if token.kind == Kind::Open {
            let outside = self.tokens.depth() - 1;
            while self.tokens.depth() > outside {
                let Some(token) = self.tokens.next()? else { break };
                end = token.span().end;
            }
        }
        Ok(end)
    }
}
