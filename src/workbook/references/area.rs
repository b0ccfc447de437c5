//! Cells along one row or column of a sheet, in one piece or in several.

use std::fmt;

use super::{Cell, Range, SheetRange, quote_sheet};

/// The cells that a name with one role means: a rectangle, or pieces of one row or one column with other cells between
/// them (`Plan!C4:M4,P4:Z4`, where N and O hold subtotals).
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Area {
    /// The sheet's name.
    pub sheet: String,
    /// In order along the sheet; none touches the next.
    parts: Vec<Range>,
}

/// Why several ranges are no area.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Apart {
    /// They lie on several sheets.
    Sheets,
    /// They lie neither in one row nor in one column.
    Lines,
    /// Two of them share a cell.
    Overlap,
}

impl Area {
    /// The pieces of one row or column as one area, in the order in which they stand on the sheet.
    ///
    /// **Errors**: they do not lie in one row or one column of one sheet, or share a cell; there are none.
    pub fn join(ranges: &[SheetRange]) -> Result<Area, Apart> {
        let Some(first) = ranges.first() else { return Err(Apart::Lines) };
        if ranges.len() == 1 {
            return Ok(Area::from(first.clone()));
        }
        if ranges.iter().any(|range| range.sheet != first.sheet) {
            return Err(Apart::Sheets);
        }
        let mut all: Vec<Range> = ranges.iter().map(|range| range.range).collect();
        all.sort_unstable();
        let row = all.iter().all(|r| r.first.row == all[0].first.row && r.last.row == all[0].first.row);
        let column = all.iter().all(|r| r.first.col == all[0].first.col && r.last.col == all[0].first.col);
        if !row && !column {
            return Err(Apart::Lines);
        }
        let mut parts: Vec<Range> = Vec::new();
        for range in all {
            let Some(last) = parts.last_mut().filter(|last| touches(last, &range)) else {
                parts.push(range);
                continue;
            };
            if last.intersects(&range) {
                return Err(Apart::Overlap);
            }
            *last = last.hull(&range);
        }
        Ok(Area { sheet: first.sheet.clone(), parts })
    }

    /// The same cells of another sheet.
    #[must_use]
    pub fn on_sheet(&self, sheet: &str) -> Area {
        Area { sheet: sheet.to_owned(), parts: self.parts.clone() }
    }

    /// Its pieces in order.
    pub fn parts(&self) -> &[Range] {
        &self.parts
    }

    /// Its pieces with their sheet.
    pub fn pieces(&self) -> impl Iterator<Item = SheetRange> + '_ {
        self.parts.iter().map(|range| SheetRange { sheet: self.sheet.clone(), range: *range })
    }

    /// Its cells without the sheet: `C4:M4,P4:Z4`.
    pub fn cells_text(&self) -> String {
        self.parts.iter().map(Range::to_string).collect::<Vec<_>>().join(",")
    }

    /// The smallest rectangle that holds it.
    pub fn hull(&self) -> SheetRange {
        let range = self.parts.iter().copied().reduce(|all, part| all.hull(&part));
        // An area has at least one piece.
        SheetRange { sheet: self.sheet.clone(), range: range.unwrap_or(Range::cell(Cell::new(0, 0))) }
    }

    /// Number of cells; at least 1.
    #[expect(clippy::len_without_is_empty, reason = "an area holds at least one cell")]
    pub fn len(&self) -> u64 {
        self.parts.iter().map(Range::len).sum()
    }

    /// Its cells in order.
    pub fn cells(&self) -> impl Iterator<Item = Cell> + '_ {
        self.parts.iter().flat_map(Range::cells)
    }

    /// The cell at a place along it, from 0; past the end, where it would go on.
    pub fn nth(&self, i: usize) -> Cell {
        let mut left = i as u64;
        for (k, part) in self.parts.iter().enumerate() {
            if left < part.len() || k + 1 == self.parts.len() {
                let left = left as u32;
                let Cell { row, col } = part.first;
                return if self.is_column() {
                    Cell::new(row + left, col)
                } else {
                    Cell::new(row, col + left)
                };
            }
            left -= part.len();
        }
        Cell::new(0, 0)
    }

    /// Whether it runs down one column, over more than one cell.
    pub fn is_column(&self) -> bool {
        let Range { first, last } = self.hull().range;
        last.row > first.row && last.col == first.col
    }

    /// Whether it holds a cell of a sheet.
    pub fn contains(&self, sheet: &str, cell: Cell) -> bool {
        self.sheet == sheet && self.parts.iter().any(|part| part.contains(cell))
    }

    /// Whether the two share a cell.
    pub fn intersects(&self, other: &Area) -> bool {
        self.sheet == other.sheet
            && self.parts.iter().any(|part| other.parts.iter().any(|theirs| part.intersects(theirs)))
    }

    /// Whether it shares a cell with a rectangle.
    pub fn meets(&self, at: &SheetRange) -> bool {
        self.sheet == at.sheet && self.parts.iter().any(|part| part.intersects(&at.range))
    }

    /// Where areas of one length come apart: pieces that are unbroken in every one of them, by their first place and
    /// number of cells.
    pub fn unbroken(areas: &[&Area]) -> Vec<(usize, usize)> {
        let mut breaks: Vec<usize> = Vec::new();
        for area in areas {
            let mut at = 0;
            for part in &area.parts {
                at += part.len() as usize;
                breaks.push(at);
            }
        }
        breaks.sort_unstable();
        breaks.dedup();
        let mut from = 0;
        breaks.into_iter().map(|to| (std::mem::replace(&mut from, to), to)).map(|(a, b)| (a, b - a)).collect()
    }

    /// So many cells from a place on, which lie in one piece.
    pub fn slice(&self, from: usize, count: usize) -> SheetRange {
        let range = Range { first: self.nth(from), last: self.nth(from + count.max(1) - 1) };
        SheetRange { sheet: self.sheet.clone(), range }
    }
}

fn touches(last: &Range, next: &Range) -> bool {
    let after = Range {
        first: last.first,
        last: Cell::new(last.last.row.saturating_add(1), last.last.col.saturating_add(1)),
    };
    after.intersects(next)
}

impl From<SheetRange> for Area {
    fn from(at: SheetRange) -> Area {
        Area { sheet: at.sheet, parts: vec![at.range] }
    }
}

impl fmt::Display for Area {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}!{}", quote_sheet(&self.sheet), self.cells_text())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn area(parts: &[&str]) -> Result<Area, Apart> {
        Area::join(&parts.iter().map(|part| part.parse().unwrap()).collect::<Vec<_>>())
    }

    #[test]
    fn pieces_of_one_row_or_column_are_joined_in_the_order_of_the_sheet() {
        for (parts, printed) in [
            (&["Plan!C4:M4", "Plan!P4:Z4"][..], "Plan!C4:M4,P4:Z4"),
            (&["Plan!P4:Z4", "Plan!C4:M4"], "Plan!C4:M4,P4:Z4"),
            (&["Plan!C4:D4", "Plan!E4:F4", "Plan!H4"], "Plan!C4:F4,H4"),
            (&["Plan!B9:B12", "Plan!B3:B5"], "Plan!B3:B5,B9:B12"),
            (&["'My sheet'!A1", "'My sheet'!C1"], "'My sheet'!A1,C1"),
            (&["Plan!B2:D9"], "Plan!B2:D9"),
        ] {
            assert_eq!(area(parts).unwrap().to_string(), printed);
        }
        assert_eq!(area(&["Plan!C4:M4", "Costs!P4:Z4"]), Err(Apart::Sheets));
        assert_eq!(area(&["Plan!C4:M4", "Plan!P5:Z5"]), Err(Apart::Lines));
        assert_eq!(area(&["Plan!C4:M5", "Plan!P4:Z5"]), Err(Apart::Lines));
        assert_eq!(area(&["Plan!C4:M4", "Plan!M4:Z4"]), Err(Apart::Overlap));
        assert_eq!(area(&["Plan!C4:M4", "Plan!D4:E4"]), Err(Apart::Overlap));
    }

    #[test]
    fn cells_by_their_place() {
        let row = area(&["Plan!C4:E4", "Plan!H4:I4"]).unwrap();
        let cells: Vec<String> = (0..5).map(|i| row.nth(i).to_string()).collect();
        assert_eq!(cells, ["C4", "D4", "E4", "H4", "I4"]);
        assert_eq!(row.cells().map(|c| c.to_string()).collect::<Vec<_>>(), cells);
        assert_eq!((row.len(), row.hull().to_string()), (5, "Plan!C4:I4".to_owned()));
        assert!(row.contains("Plan", "I4".parse().unwrap()) && !row.contains("Plan", "F4".parse().unwrap()));
        let column = area(&["Plan!B3:B4", "Plan!B7:B9"]).unwrap();
        assert_eq!(column.nth(2).to_string(), "B7");
        assert_eq!(column.slice(2, 3).to_string(), "Plan!B7:B9");
        let whole = Area::from("Flows!B2:F2".parse::<SheetRange>().unwrap());
        assert_eq!(Area::unbroken(&[&row, &whole]), [(0, 3), (3, 2)]);
        let other = area(&["Plan!C9:D9", "Plan!F9:H9"]).unwrap();
        assert_eq!(Area::unbroken(&[&row, &other, &whole]), [(0, 2), (2, 1), (3, 2)]);
    }
}
