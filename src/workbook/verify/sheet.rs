//! Two versions of a sheet compared, outside the written cells and within them.

use std::collections::{BTreeMap, BTreeSet};
use std::ops::Range as Span;

use super::{differs, sheet_place};
use crate::patch::{Cached, CellWrite};
use crate::problem::{Place, Result};
use crate::references::{Cell, Range, shift};
use crate::splice::{Element, Kind, Token, Tokens, all_attributes, attribute, local};

/// Refuses a new version in which anything but the written cells has changed, or those not as they should.
pub(super) fn compare(sheet: &str, old: &[u8], new: &[u8], writes: &BTreeMap<Cell, CellWrite>) -> Result<()> {
    let mut before = Walk::new(old)?;
    let mut after = Walk::new(new)?;
    let mut masters = BTreeMap::new();
    let rows: BTreeSet<u32> = writes.keys().map(|at| at.row).collect();
    let mut found = BTreeSet::new();
    loop {
        let (mut a, mut b) = (before.next()?, after.next()?);
        // Written cells are looked at on their own; so are rows that are there only for them.
        while let Some(Piece::Cell(at, span)) = &a
            && writes.contains_key(at)
        {
            note_master(&mut masters, *at, &before.text[span.clone()])?;
            a = before.next()?;
        }
        loop {
            match &b {
                Some(Piece::Cell(at, span)) if writes.contains_key(at) => {
                    let holds = holds(&after.text[span.clone()], &writes[at])?;
                    if !holds || !found.insert(*at) {
                        let place = Place::cells(sheet, Range::cell(*at));
                        return Err(differs(place, "the cell does not hold what was to be written"));
                    }
                }
                Some(Piece::Row(row, _))
                    if rows.contains(row) && !matches!(&a, Some(Piece::Row(r, _)) if r == row) =>
                {
                    loop {
                        match after.next()? {
                            Some(Piece::EndRow) => break,
                            Some(Piece::Cell(at, span)) if writes.contains_key(&at) => {
                                if !holds(&after.text[span], &writes[&at])? || !found.insert(at) {
                                    let place = Place::cells(sheet, Range::cell(at));
                                    return Err(differs(
                                        place,
                                        "the cell does not hold what was to be written",
                                    ));
                                }
                            }
                            _ => {
                                return Err(differs(
                                    sheet_place(sheet),
                                    "a new row holds more than was written",
                                ));
                            }
                        }
                    }
                }
                _ => break,
            }
            b = after.next()?;
        }
        let same = match (&a, &b) {
            (None, None) => break,
            (Some(Piece::Row(..)), Some(Piece::Row(..))) | (Some(Piece::Data(_)), Some(Piece::Data(_))) => {
                let (a, b) = (a.as_ref().map(Piece::span), b.as_ref().map(Piece::span));
                same_tag(&before.text[a.unwrap_or_default()], &after.text[b.unwrap_or_default()])?
            }
            (Some(Piece::EndRow), Some(Piece::EndRow)) | (Some(Piece::EndData), Some(Piece::EndData)) => true,
            (Some(Piece::Cell(at, a)), Some(Piece::Cell(other, b))) => {
                let (a, b) = (&before.text[a.clone()], &after.text[b.clone()]);
                at == other && (a == b || handed_on(*at, a, b, &mut masters)?)
            }
            (Some(Piece::Other(a)), Some(Piece::Other(b))) => before.text[a.clone()] == after.text[b.clone()],
            _ => false,
        };
        if let Some(Piece::Cell(at, span)) = &a {
            note_master(&mut masters, *at, &before.text[span.clone()])?;
        }
        if !same {
            let place = match &a {
                Some(Piece::Cell(at, _)) => Place::cells(sheet, Range::cell(*at)),
                _ => sheet_place(sheet),
            };
            return Err(differs(place, "something that was not to be written has changed"));
        }
    }
    let lost = |(at, write): &(&Cell, &CellWrite)| write.overwrites() && !found.contains(at);
    match writes.iter().find(lost) {
        Some((at, _)) => {
            Err(differs(Place::cells(sheet, Range::cell(*at)), "the cell is missing from the output"))
        }
        None => Ok(()),
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
fn handed_on(at: Cell, old: &str, new: &str, masters: &mut Masters) -> Result<bool> {
    let (old_root, new_root) = (Element::root(old.as_bytes())?, Element::root(new.as_bytes())?);
    let (Some(f), Some(own)) = (old_root.child("f"), new_root.child("f")) else { return Ok(false) };
    let Some(index) = f.attribute("si")? else { return Ok(false) };
    let Some((master, formula)) = masters.get(index.as_ref()) else { return Ok(false) };
    let d_row = i64::from(at.row) - i64::from(master.row);
    let d_col = i64::from(at.col) - i64::from(master.col);
    let rest = |cell: &str, f: &Element| format!("{}{}", &cell[..f.span.start], &cell[f.span.end..]);
    Ok(own.attribute("t")?.is_none()
        && characters(new, own)? == shift(formula, d_row, d_col)
        && rest(old, f) == rest(new, own))
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

impl Piece {
    fn span(&self) -> Span<usize> {
        match self {
            Piece::Data(span) | Piece::Row(_, span) | Piece::Cell(_, span) | Piece::Other(span) => {
                span.clone()
            }
            Piece::EndData | Piece::EndRow => 0..0,
        }
    }
}

impl<'a> Walk<'a> {
    fn new(xml: &'a [u8]) -> Result<Self> {
        let text = std::str::from_utf8(xml).unwrap_or_default();
        // Rows and columns count from 1 here, 0 before the first.
        Ok(Walk { text, tokens: Tokens::new(xml)?, row: 0, col: 0, section: "", pending: None })
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
