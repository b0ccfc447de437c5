//! Splicing of single cells into a sheet part, everything else left byte for byte.

mod blank;
mod cell;
mod layout;

pub(crate) use blank::without_result;

use std::collections::BTreeMap;

use crate::problem::{Place, Problem, Result};
use crate::references::{Cell, Range};
use crate::splice::{Edits, with_attribute};

use layout::{Block, Layout};

/// The longest formula that spreadsheet programs read, in characters.
pub const MAX_FORMULA: usize = 8_192;
/// The longest text of a cell, in characters.
pub const MAX_TEXT: usize = 32_767;

/// The result shown with a formula until the spreadsheet program recalculates.
#[derive(Clone, Debug, PartialEq)]
pub enum Cached {
    /// A number.
    Number(f64),
    /// A text.
    Text(String),
    /// None: the program computes it when it opens the file.
    None,
}

/// What is to become of one cell. Its style stays.
#[derive(Clone, Debug, PartialEq)]
pub enum CellWrite {
    /// A plain number.
    Number(f64),
    /// A plain text (written inline).
    Text(String),
    /// A formula, without the equals sign, and its result.
    Formula(String, Cached),
    /// The formula stays, its cached value goes (a dependent of a filled cell).
    DropValue,
    /// The formula stays and gets this result.
    Result(Settled),
}

/// A result that a spreadsheet program computed.
#[derive(Clone, Debug, PartialEq)]
pub enum Settled {
    /// A number.
    Number(f64),
    /// A text.
    Text(String),
    /// True or false.
    Logical(bool),
    /// An error value, `#DIV/0!`.
    Error(String),
}

impl CellWrite {
    /// Does the cell get new content (and not just another cached value, or none)?
    pub fn overwrites(&self) -> bool {
        !self.keeps_formula()
    }

    /// Does the cell keep its formula?
    pub fn keeps_formula(&self) -> bool {
        matches!(self, CellWrite::DropValue | CellWrite::Result(_))
    }
}

/// A worksheet part with the given cells written into it.
///
/// Every byte outside the written cells stays, but for four things that may have to follow: a new
/// row, the `spans` of a row and the sheet's `dimension` where a new cell lies outside them, and
/// the dependents of an overwritten shared formula, which get the formula as their own. The style
/// of a cell stays; a new cell takes the row's, else the column's. Numbers are written with the
/// fewest digits that read back to the same double.
///
/// **Arguments**: `xml` the part's bytes (UTF-8); `writes` what becomes of which cell.
///
/// **Returns** the new part; with no writes the same bytes.
///
/// **Errors**, each with its cell: `outside-sheet` beyond the last row or column; `not-finite` a number that no cell can hold; `text-characters`,
/// `text-length` a text or formula that XML or spreadsheet programs cannot hold; `array-part` a
/// cell of an array formula or data table; `merged-away` a cell hidden under a merged one;
/// `duplicate-cell`, `misplaced-cell` a sheet that says two things about a cell; `no-formula` a
/// value to be dropped where no formula would give it again; `shared-formula` a shared formula
/// that cannot be handed on. `bad-xml` where the part cannot be read.
pub fn patch_sheet(xml: &[u8], writes: &BTreeMap<Cell, CellWrite>) -> Result<Vec<u8>> {
    if writes.is_empty() {
        return Ok(xml.to_vec());
    }
    let layout = Layout::read(xml, writes)?;
    let problems = refusals(&layout, writes);
    if !problems.is_empty() {
        return Err(problems.into());
    }
    let mut edits = Edits::default();
    for (&at, dependent) in &layout.heirs {
        let mut text = cell::unshared(dependent.raw, layout.prefix, &dependent.formula)?;
        if let Some(write) = writes.get(&at) {
            text = cell::written(&text, layout.prefix, write)?;
        }
        edits.replace(dependent.span(), text);
    }
    let mut absent: BTreeMap<u32, Vec<(Cell, &CellWrite)>> = BTreeMap::new();
    for (&at, write) in writes {
        match layout.cells.get(&at) {
            Some(_) if layout.heirs.contains_key(&at) => {}
            Some(found) => edits.replace(found.span(), cell::written(found.raw, layout.prefix, write)?),
            None if *write == CellWrite::DropValue => {}
            None => absent.entry(at.row).or_default().push((at, write)),
        }
    }
    insert(&layout, &absent, &mut edits)?;
    edits.apply(xml)
}

/// New cells, in their rows; new rows, in the sheet.
fn insert(layout: &Layout, absent: &BTreeMap<u32, Vec<(Cell, &CellWrite)>>, edits: &mut Edits) -> Result<()> {
    let prefix = layout.prefix;
    let mut new_rows = BTreeMap::<usize, String>::new();
    for (&number, cells) in absent {
        let row = layout.rows.get(&number);
        let mut texts = Vec::new();
        for &(at, write) in cells {
            let style = row.and_then(|row| row.style.as_deref()).or_else(|| layout.column_style(at.col));
            texts.push((at, cell::created(prefix, at, style, write)?));
        }
        let all = || texts.iter().map(|(_, text)| text.as_str()).collect::<String>();
        let Some(row) = row else {
            let text = format!("<{prefix}row r=\"{}\">{}</{prefix}row>", number + 1, all());
            new_rows.entry(layout.place_of_row(number)).or_default().push_str(&text);
            continue;
        };
        let mut tag = row.tag.to_owned();
        let (first, last) = (cells[0].0.col, cells[cells.len() - 1].0.col);
        if let Some(spans) = layout::widened_spans(row.tag, first, last)? {
            tag = with_attribute(&tag, "spans", Some(&spans))?;
        }
        let tag_span = row.start..row.start + row.tag.len();
        match row.end {
            None => {
                let open = tag.trim_end_matches("/>").trim_end();
                edits.replace(tag_span, format!("{open}>{}</{prefix}row>", all()));
            }
            Some(end) => {
                if tag != row.tag {
                    edits.replace(tag_span, tag);
                }
                for (at, text) in &texts {
                    let behind = row.cells.iter().find(|(col, _)| *col > at.col);
                    edits.insert(behind.map_or(end, |&(_, start)| start), text.as_str());
                }
            }
        }
    }
    let data = &layout.data;
    if data.end.is_none() && !new_rows.is_empty() {
        let rows: String = new_rows.into_values().collect();
        let open = data.tag.trim_end_matches("/>").trim_end();
        let text = format!("{open}>{rows}</{prefix}sheetData>");
        edits.replace(data.start..data.start + data.tag.len(), text);
    } else {
        for (place, text) in new_rows {
            edits.insert(place, text);
        }
    }
    if let Some((tag, start)) = layout.dimension
        && let Some(wider) = layout::widened_dimension(tag, absent.values().flatten().map(|(at, _)| *at))?
    {
        edits.replace(start..start + tag.len(), with_attribute(tag, "ref", Some(&wider))?);
    }
    Ok(())
}

/// Everything that speaks against the writes, in the order of the cells.
fn refusals(layout: &Layout, writes: &BTreeMap<Cell, CellWrite>) -> Vec<Problem> {
    let mut problems = layout.problems.clone();
    for (&at, write) in writes {
        problems.extend(cell::refusal(at, write));
        let in_the_way = |(range, block): &&(Range, Block)| match block {
            Block::Array => !range.is_single(),
            Block::Table => true,
            Block::Merged => at != range.first,
        } && range.contains(at);
        if write.overwrites()
            && let Some((range, block)) = layout.blocks.iter().find(in_the_way)
        {
            problems.push(block_refusal(at, range, *block));
        }
        if write.keeps_formula() && !layout.gives_a_value(at) {
            problems.push(problem(
                "no-formula",
                at,
                "holds no formula, so its value cannot be dropped or set",
            ));
        }
    }
    problems
}

fn block_refusal(at: Cell, range: &Range, block: Block) -> Problem {
    let (code, what) = match block {
        Block::Array => ("array-part", format!("is part of the array formula in {range}")),
        Block::Table => ("array-part", format!("is part of the data table in {range}")),
        Block::Merged => ("merged-away", format!("is hidden under the merged cells {range}")),
    };
    let hint = match block {
        Block::Merged => format!("name {} instead, or unmerge the cells", range.first),
        Block::Array | Block::Table => "clear the whole range first, or name other cells".to_owned(),
    };
    problem(code, at, &what).hint(hint)
}

/// A problem with one cell; the caller, who knows the sheet's name, may add it to the place.
fn problem(code: &'static str, at: Cell, what: &str) -> Problem {
    let place = Place { range: Some(Range::cell(at)), ..Place::default() };
    Problem::error(code, place, format!("cell {at} {what}"))
}
