//! Tables: their cells, and what a structured reference means in them.

use quick_xml::events::Event;

use crate::problem::Result;
use crate::references::{Cell, Range};
use crate::xml::{Scanner, attribute};

/// A table of a sheet.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Table {
    /// The name that formulas use.
    pub name: String,
    /// The sheet it is on (its place in [`Workbook::sheets`](super::Workbook::sheets)).
    pub sheet: usize,
    /// All its cells, headers and totals included.
    pub range: Range,
    /// Number of header rows, 0 or 1.
    pub header_rows: u32,
    /// Number of total rows, 0 or 1.
    pub totals_rows: u32,
    /// The names of its columns.
    pub columns: Vec<String>,
    /// A query fills it.
    pub from_query: bool,
}

impl Table {
    /// Reads a table part; none where it has no name or no range.
    pub(super) fn read(part: &str, xml: &[u8], sheet: usize) -> Result<Option<Table>> {
        let mut scanner = Scanner::new(part, xml)?;
        let mut table = None;
        while let Some(token) = scanner.next()? {
            let (Event::Start(tag) | Event::Empty(tag)) = &token.event else { continue };
            let count = |name, otherwise: u32| -> Result<u32> {
                let text = attribute(part, tag, name)?;
                Ok(text.and_then(|text| text.trim().parse().ok()).unwrap_or(otherwise))
            };
            match (tag.local_name().as_ref(), &mut table) {
                (b"table", None) => {
                    let name = match attribute(part, tag, "displayName")? {
                        Some(name) => Some(name),
                        None => attribute(part, tag, "name")?,
                    };
                    let range = attribute(part, tag, "ref")?.and_then(|text| text.parse::<Range>().ok());
                    let Some((name, range)) = name.zip(range) else { return Ok(None) };
                    table = Some(Table {
                        name,
                        sheet,
                        range,
                        header_rows: count("headerRowCount", 1)?,
                        totals_rows: count("totalsRowCount", 0)?,
                        columns: Vec::new(),
                        from_query: attribute(part, tag, "tableType")?.as_deref() == Some("queryTable"),
                    });
                }
                (b"tableColumn", Some(table)) => {
                    table.columns.push(attribute(part, tag, "name")?.unwrap_or_default());
                }
                _ => {}
            }
        }
        Ok(table)
    }

    /// Its cells without headers and totals; none where that leaves nothing.
    pub fn data(&self) -> Option<Range> {
        let first = self.range.first.row.checked_add(self.header_rows)?;
        let last = self.range.last.row.checked_sub(self.totals_rows)?;
        (first <= last).then_some(Range {
            first: Cell { row: first, ..self.range.first },
            last: Cell { row: last, ..self.range.last },
        })
    }

    /// The header cells and the total cells, which are not for numbers.
    pub fn headers_and_totals(&self) -> Vec<Range> {
        [self.rows(Item::Headers, None), self.rows(Item::Totals, None)].into_iter().flatten().collect()
    }

    /// The cells that a structured reference means.
    ///
    /// **Arguments**: what stands between its outer brackets; the cell that holds it, for "this row".
    /// **Returns**: one rectangle (the hull, where headers and totals are named together); none where
    /// the reference is not understood, names no column of the table, or says "this row" from outside.
    pub fn cells(&self, part: &str, at: Option<Cell>) -> Option<Range> {
        let part = Part::parse(part)?;
        let mut rows: Option<Range> = None;
        for item in &part.items {
            let here = self.rows(*item, at)?;
            rows = Some(rows.map_or(here, |rows| rows.hull(&here)));
        }
        let rows = match rows {
            Some(rows) => rows,
            None => self.data()?,
        };
        let Some((first, last)) = &part.columns else { return Some(rows) };
        let (first, last) = (self.column(first)?, self.column(last)?);
        Some(Range::new(
            Cell { row: rows.first.row, col: self.range.first.col + first },
            Cell { row: rows.last.row, col: self.range.first.col + last },
        ))
    }

    fn column(&self, name: &str) -> Option<u32> {
        let name = name.to_lowercase();
        let found = self.columns.iter().position(|column| column.to_lowercase() == name)? as u32;
        (found < self.range.cols()).then_some(found)
    }

    fn rows(&self, item: Item, at: Option<Cell>) -> Option<Range> {
        let Range { first, last } = self.range;
        let rows =
            |from: u32, to: u32| Range { first: Cell { row: from, ..first }, last: Cell { row: to, ..last } };
        match item {
            Item::All => Some(self.range),
            Item::Data => self.data(),
            Item::Headers if self.header_rows > 0 => {
                Some(rows(first.row, last.row.min(first.row + self.header_rows - 1)))
            }
            Item::Totals if self.totals_rows > 0 => {
                Some(rows(first.row.max(last.row.saturating_sub(self.totals_rows - 1)), last.row))
            }
            Item::Headers | Item::Totals => None,
            Item::ThisRow => {
                let row = at?.row;
                (first.row <= row && row <= last.row).then(|| rows(row, row))
            }
        }
    }
}

/// The rows of a table that a structured reference can name.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Item {
    All,
    Data,
    Headers,
    Totals,
    ThisRow,
}

/// A structured reference, taken apart.
#[derive(Debug, PartialEq, Eq)]
struct Part {
    items: Vec<Item>,
    columns: Option<(String, String)>,
}

impl Part {
    /// Reads `Works`, `#All`, `@Works`, `[#This Row],[Works]`, `[a]:[b]` and the like.
    fn parse(text: &str) -> Option<Part> {
        let text = text.trim();
        let mut part = Part { items: Vec::new(), columns: None };
        let mut text = match text.strip_prefix('@') {
            Some(rest) => {
                part.items.push(Item::ThisRow);
                rest.trim_start()
            }
            None => text,
        };
        if !text.starts_with('[') {
            if !text.is_empty() {
                part.add(text, false)?;
            }
            return Some(part);
        }
        let mut to_column = false;
        while let Some(rest) = text.strip_prefix('[') {
            let end = closing(rest)?;
            part.add(&rest[..end], to_column)?;
            text = rest[end + 1..].trim_start();
            if text.is_empty() {
                return Some(part);
            }
            to_column = text.starts_with(':');
            text = text.strip_prefix([',', ':'])?.trim_start();
        }
        None
    }

    fn add(&mut self, word: &str, to_column: bool) -> Option<()> {
        if let Some(item) = word.strip_prefix('#') {
            self.items.push(match item.to_ascii_lowercase().as_str() {
                "all" => Item::All,
                "data" => Item::Data,
                "headers" => Item::Headers,
                "totals" => Item::Totals,
                "this row" => Item::ThisRow,
                _ => return None,
            });
            return Some(());
        }
        let name = unescape(word);
        match (&mut self.columns, to_column) {
            (columns @ None, false) => *columns = Some((name.clone(), name)),
            (Some((_, last)), true) => *last = name,
            _ => return None,
        }
        Some(())
    }
}

/// The closing bracket; an apostrophe takes away the next character's meaning.
fn closing(text: &str) -> Option<usize> {
    let mut chars = text.char_indices();
    while let Some((at, c)) = chars.next() {
        match c {
            '\'' => {
                chars.next();
            }
            ']' => return Some(at),
            _ => {}
        }
    }
    None
}

fn unescape(word: &str) -> String {
    let mut out = String::with_capacity(word.len());
    let mut chars = word.chars();
    while let Some(c) = chars.next() {
        out.push(if c == '\'' { chars.next().unwrap_or('\'') } else { c });
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    // Structured references of ISO/IEC 29500-1, 18.17.2.5, on a table B2:D6 with headers and totals.
    #[test]
    fn structured_references_mean_cells() {
        let table = Table {
            name: "Costs".into(),
            sheet: 0,
            range: "B2:D6".parse().unwrap(),
            header_rows: 1,
            totals_rows: 1,
            columns: ["Year", "Works", "It's [odd] #1"].map(str::to_owned).to_vec(),
            from_query: false,
        };
        let at = "F4".parse().ok();
        for (part, cells) in [
            ("", "B3:D5"),
            ("Works", "C3:C5"),
            ("works", "C3:C5"),
            ("#All", "B2:D6"),
            ("#Data", "B3:D5"),
            ("#Headers", "B2:D2"),
            ("#Totals", "B6:D6"),
            ("[Works]", "C3:C5"),
            ("[Year]:[Works]", "B3:C5"),
            ("[#This Row],[Works]", "C4"),
            ("@Works", "C4"),
            ("@", "B4:D4"),
            ("@[Year]:[Works]", "B4:C4"),
            ("[#Headers],[#Data],[Works]", "C2:C5"),
            ("[#All],[Works]:[It''s '[odd'] '#1]", "C2:D6"),
            ("[#This Row], [Works]", "C4"),
        ] {
            assert_eq!(table.cells(part, at).map(|r| r.to_string()).as_deref(), Some(cells), "{part}");
        }
        for part in ["None", "#Sums", "[Works", "[Works]x", "[Works],[Year]"] {
            assert_eq!(table.cells(part, at), None, "{part}");
        }
        assert_eq!(table.cells("@Works", "A9".parse().ok()), None);
        assert_eq!(table.headers_and_totals(), ["B2:D2".parse().unwrap(), "B6:D6".parse().unwrap()]);
    }
}
