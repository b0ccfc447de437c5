//! What the stored cells hold besides their values: formulas, styles, and the exact text of each value.

use std::collections::BTreeMap;

use quick_xml::events::Event;

use crate::model::{CellCursor, FormulaKind, FormulaTag, text_of};
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
}

/// Reads a sheet part once and keeps the cells of some ranges.
pub(super) fn scan(part: &str, xml: &[u8], ranges: &[Range]) -> Result<Scan> {
    let wanted = |cell: Cell| ranges.iter().any(|range| range.contains(cell));
    let row_wanted = |row: u32| ranges.iter().any(|range| (range.first.row..=range.last.row).contains(&row));
    let mut found = Scan::default();
    let mut scanner = Scanner::new(part, xml)?;
    let mut cursor = CellCursor::default();
    let mut open: Option<(Cell, Raw)> = None;
    let mut text: Option<String> = None;
    let mut formula: Option<FormulaTag> = None;
    while let Some(token) = scanner.next()? {
        match &token.event {
            Event::Start(tag) | Event::Empty(tag) => {
                let empty = matches!(token.event, Event::Empty(_));
                match tag.local_name().as_ref() {
                    b"row" => {
                        let row = cursor.row(part, tag)?;
                        if !empty && !row_wanted(row) {
                            scanner.pass_over(tag.name().as_ref(), &["shared"]);
                        }
                    }
                    b"c" => {
                        let at = cursor.cell(part, tag)?;
                        let mut raw = Raw::default();
                        if wanted(at) {
                            raw.kind = attribute(part, tag, "t")?.unwrap_or_default();
                        }
                        if !empty {
                            open = Some((at, raw));
                        } else if wanted(at) {
                            found.cells.insert(at, raw);
                        }
                    }
                    b"f" if open.is_some() => {
                        let read = FormulaTag::read(part, tag)?;
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
            event => {
                if let Some(text) = &mut text {
                    text_of(part, event, text)?;
                }
            }
        }
    }
    Ok(found)
}

fn keep_formula(found: &mut Scan, open: Option<&mut (Cell, Raw)>, read: FormulaTag, text: String) {
    let Some((at, raw)) = open else { return };
    raw.formula = match read.kind {
        FormulaKind::Shared(group) => {
            if !text.is_empty() {
                found.masters.insert(group, (*at, text));
            }
            Some(RawFormula::Shared(group))
        }
        _ => Some(RawFormula::Text(text)),
    };
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn formulas_and_values_are_read_as_they_are_stored() {
        let xml = br#"<worksheet><sheetData><row r="2"><c r="B2" t="str"><f>A2&amp;"x"</f><v>a</v></c>
            <c><f t="shared" ref="C2:D2" si="0">B2*2</f><v><![CDATA[7]]></v></c>
            <c r="D2"><f t="shared" si="0"/><v>&#56;</v></c></row>
            <row><c><f t="array" ref="A3:B3">TRANSPOSE(A1:A2)</f><v>1<!-- -->2</v></c></row>
            </sheetData></worksheet>"#;
        let found = scan("sheet1.xml", xml, &["A1:D9".parse().unwrap()]).unwrap();
        let raw = |a1: &str| &found.cells[&a1.parse::<Cell>().unwrap()];
        assert!(matches!(&raw("B2").formula, Some(RawFormula::Text(text)) if text == "A2&\"x\""));
        assert_eq!(raw("C2").value.as_deref(), Some("7"));
        assert_eq!(raw("D2").value.as_deref(), Some("8"));
        assert_eq!(raw("A3").value.as_deref(), Some("12"));
        assert!(matches!(raw("D2").formula, Some(RawFormula::Shared(0))));
        assert_eq!(found.masters[&0].1, "B2*2");
    }
}
