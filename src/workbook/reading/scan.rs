//! What the stored cells hold besides their values: formulas, styles, and the exact text of each value.

use std::collections::BTreeMap;

use quick_xml::events::{BytesStart, Event};

use crate::problem::Result;
use crate::references::{Cell, Range};
use crate::xml::{Scanner, attribute};

/// One stored cell.
#[derive(Clone, Debug, Default)]
pub(super) struct Raw {
    /// The `t` attribute; empty where there is none.
    pub kind: String,
    /// The text of `<v>`, character data and references resolved.
    pub value: Option<String>,
    /// Its formula.
    pub formula: Option<RawFormula>,
}

/// A formula as it is stored.
#[derive(Clone, Debug)]
pub(super) enum RawFormula {
    /// Its own text.
    Text(String),
    /// One of a group that shares a text, by the group's number.
    Shared(u32),
}

/// What a pass over one sheet found.
#[derive(Debug, Default)]
pub(super) struct Scan {
    /// The wanted cells that are stored.
    pub cells: BTreeMap<Cell, Raw>,
    /// Shared formulas by number: the cell that holds the text, and the text.
    pub masters: BTreeMap<u32, (Cell, String)>,
    /// The cells of array formulas and data tables.
    pub arrays: Vec<Range>,
}

/// Reads a sheet part once and keeps the cells that are wanted.
pub(super) fn scan(part: &str, xml: &[u8], wanted: impl Fn(Cell) -> bool) -> Result<Scan> {
    let mut found = Scan::default();
    let mut scanner = Scanner::new(part, xml)?;
    let (mut row, mut next_col, mut next_row) = (0, 0, 0);
    let mut open: Option<(Cell, Raw)> = None;
    let mut text: Option<String> = None;
    let mut formula: Option<Formula> = None;
    while let Some(token) = scanner.next()? {
        match &token.event {
            Event::Start(tag) | Event::Empty(tag) => {
                let empty = matches!(token.event, Event::Empty(_));
                match tag.local_name().as_ref() {
                    b"row" => {
                        row = number(part, tag, "r")?.map_or(next_row, |r| r.saturating_sub(1));
                        (next_row, next_col) = (row + 1, 0);
                    }
                    b"c" => {
                        let at = attribute(part, tag, "r")?.and_then(|r| r.parse::<Cell>().ok());
                        let at = at.unwrap_or(Cell { row, col: next_col });
                        next_col = at.col + 1;
                        let kind = attribute(part, tag, "t")?.unwrap_or_default();
                        let raw = Raw { kind, ..Raw::default() };
                        if !empty {
                            open = Some((at, raw));
                        } else if wanted(at) {
                            found.cells.insert(at, raw);
                        }
                    }
                    b"f" if open.is_some() => {
                        let read = Formula::read(part, tag)?;
                        if empty {
                            keep_formula(&mut found, open.as_mut(), read, String::new());
                        } else {
                            (formula, text) = (Some(read), Some(String::new()));
                        }
                    }
                    b"v" if open.is_some() && !empty => text = Some(String::new()),
                    _ => {}
                }
            }
            Event::Text(part_text) => {
                if let Some(text) = &mut text {
                    text.push_str(&String::from_utf8_lossy(part_text));
                }
            }
            Event::CData(data) => {
                if let Some(text) = &mut text {
                    text.push_str(&String::from_utf8_lossy(data));
                }
            }
            Event::GeneralRef(name) => {
                if let Some(text) = &mut text {
                    text.push(resolved(name));
                }
            }
            Event::End(tag) => match tag.local_name().as_ref() {
                b"f" => {
                    if let (Some(read), Some(text)) = (formula.take(), text.take()) {
                        keep_formula(&mut found, open.as_mut(), read, text);
                    }
                }
                b"v" => {
                    if let Some((_, raw)) = &mut open {
                        raw.value = text.take();
                    }
                }
                b"c" => {
                    if let Some((at, raw)) = open.take()
                        && wanted(at)
                    {
                        found.cells.insert(at, raw);
                    }
                }
                b"sheetData" => break,
                _ => {}
            },
            _ => {}
        }
    }
    Ok(found)
}

/// The attributes of `<f>`.
struct Formula {
    kind: String,
    group: Option<u32>,
    range: Option<Range>,
}

impl Formula {
    fn read(part: &str, tag: &BytesStart) -> Result<Self> {
        Ok(Formula {
            kind: attribute(part, tag, "t")?.unwrap_or_default(),
            group: number(part, tag, "si")?,
            range: attribute(part, tag, "ref")?.and_then(|r| r.parse().ok()),
        })
    }
}

fn keep_formula(found: &mut Scan, open: Option<&mut (Cell, Raw)>, read: Formula, text: String) {
    let Some((at, raw)) = open else { return };
    if matches!(read.kind.as_str(), "array" | "dataTable") {
        found.arrays.push(read.range.unwrap_or(Range { first: *at, last: *at }));
    }
    raw.formula = match (read.kind.as_str(), read.group) {
        ("shared", Some(group)) => {
            if !text.is_empty() {
                found.masters.insert(group, (*at, text));
            }
            Some(RawFormula::Shared(group))
        }
        _ => Some(RawFormula::Text(text)),
    };
}

fn number(part: &str, tag: &BytesStart, name: &str) -> Result<Option<u32>> {
    Ok(attribute(part, tag, name)?.and_then(|text| text.trim().parse().ok()))
}

/// A character reference or one of the five entities of XML; the scanner has refused all others.
fn resolved(name: &quick_xml::events::BytesRef) -> char {
    match name.as_ref() {
        b"lt" => '<',
        b"gt" => '>',
        b"amp" => '&',
        b"apos" => '\'',
        b"quot" => '"',
        _ => name.resolve_char_ref().ok().flatten().unwrap_or(char::REPLACEMENT_CHARACTER),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn formulas_values_and_arrays_are_read_as_they_are_stored() {
        let xml = br#"<worksheet><sheetData><row r="2"><c r="B2" t="str"><f>A2&amp;"x"</f><v>a</v></c>
            <c><f t="shared" ref="C2:D2" si="0">B2*2</f><v><![CDATA[7]]></v></c>
            <c r="D2"><f t="shared" si="0"/><v>&#56;</v></c></row>
            <row><c><f t="array" ref="A3:B3">TRANSPOSE(A1:A2)</f><v>1<!-- -->2</v></c></row>
            </sheetData></worksheet>"#;
        let found = scan("sheet1.xml", xml, |_| true).unwrap();
        let raw = |a1: &str| &found.cells[&a1.parse::<Cell>().unwrap()];
        assert!(matches!(&raw("B2").formula, Some(RawFormula::Text(text)) if text == "A2&\"x\""));
        assert_eq!(raw("C2").value.as_deref(), Some("7"));
        assert_eq!(raw("D2").value.as_deref(), Some("8"));
        assert_eq!(raw("A3").value.as_deref(), Some("12"));
        assert!(matches!(raw("D2").formula, Some(RawFormula::Shared(0))));
        assert_eq!(found.masters[&0].1, "B2*2");
        assert_eq!(found.arrays.len(), 1);
        assert_eq!(found.arrays[0].to_string(), "A3:B3");
    }
}
