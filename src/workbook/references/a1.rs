//! Reading of A1 notation, and the quoting of sheet names.

use std::fmt;
use std::str::FromStr;

use super::{Cell, MAX_COLUMNS, MAX_ROWS, Range, SheetRange};

/// A text that is no reference: what it says, and what was expected.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct ReferenceError {
    text: String,
    expected: &'static str,
}

impl ReferenceError {
    pub(super) fn new(text: &str, expected: &'static str) -> Self {
        ReferenceError { text: text.to_owned(), expected }
    }
}

impl fmt::Display for ReferenceError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let shown: String = self.text.chars().take(60).collect();
        write!(f, "{shown:?} is not a reference; expected {}", self.expected)
    }
}

impl std::error::Error for ReferenceError {}

/// A row or column number with whether a `$` fixes it.
pub(super) type Part = (u32, bool);

/// Reads `$C` at the start of the bytes: the column, and how many bytes it took.
fn column(text: &[u8]) -> Option<(Part, usize)> {
    let fixed = text.first() == Some(&b'$');
    let start = usize::from(fixed);
    let letters = text[start..].iter().take_while(|c| c.is_ascii_alphabetic()).count();
    if letters == 0 || letters > 3 {
        return None;
    }
    let number = text[start..start + letters]
        .iter()
        .fold(0, |n, c| n * 26 + u32::from(c.to_ascii_uppercase() - b'A') + 1);
    (number <= MAX_COLUMNS).then_some(((number - 1, fixed), start + letters))
}

/// Reads `$7` at the start of the bytes: the row, and how many bytes it took.
fn row(text: &[u8]) -> Option<(Part, usize)> {
    let fixed = text.first() == Some(&b'$');
    let start = usize::from(fixed);
    let digits = text[start..].iter().take_while(|c| c.is_ascii_digit()).count();
    if digits == 0 || digits > 7 || text[start] == b'0' {
        return None;
    }
    let number = text[start..start + digits].iter().fold(0, |n, c| n * 10 + u32::from(c - b'0'));
    (number <= MAX_ROWS).then_some(((number - 1, fixed), start + digits))
}

/// The whole text as a column, `$C`.
pub(super) fn whole_column(text: &str) -> Option<Part> {
    column(text.as_bytes()).filter(|(_, used)| *used == text.len()).map(|(part, _)| part)
}

/// The whole text as a row, `$7`.
pub(super) fn whole_row(text: &str) -> Option<Part> {
    row(text.as_bytes()).filter(|(_, used)| *used == text.len()).map(|(part, _)| part)
}

/// The whole text as a cell, `$C$7`: row and column.
pub(super) fn whole_cell(text: &str) -> Option<(Part, Part)> {
    let (col, used) = column(text.as_bytes())?;
    whole_row(&text[used..]).map(|row| (row, col))
}

impl FromStr for Cell {
    type Err = ReferenceError;

    /// Reads `C7` or `$C$7`, in either case.
    fn from_str(text: &str) -> Result<Self, ReferenceError> {
        whole_cell(text)
            .map(|((row, _), (col, _))| Cell { row, col })
            .ok_or_else(|| ReferenceError::new(text, "a cell from A1 to XFD1048576"))
    }
}

impl FromStr for Range {
    type Err = ReferenceError;

    /// Reads `C7` or `C7:F9`; corners may come in any order and hold `$`.
    fn from_str(text: &str) -> Result<Self, ReferenceError> {
        let wrong = |_| ReferenceError::new(text, "a cell or a range such as C7 or C7:F9");
        match text.split_once(':') {
            None => text.parse().map(Range::cell).map_err(wrong),
            Some((a, b)) => Ok(Range::new(a.parse().map_err(wrong)?, b.parse().map_err(wrong)?)),
        }
    }
}

impl Range {
    /// Whole columns `A:C` or whole rows `3:5`, as a rectangle to the limits of a sheet.
    pub fn parse_whole(text: &str) -> Result<Range, ReferenceError> {
        text.split_once(':')
            .and_then(|(a, b)| {
                if let (Some((a, _)), Some((b, _))) = (whole_column(a), whole_column(b)) {
                    Some(Range::new(Cell::new(0, a), Cell::new(MAX_ROWS - 1, b)))
                } else {
                    let ((a, _), (b, _)) = (whole_row(a)?, whole_row(b)?);
                    Some(Range::new(Cell::new(a, 0), Cell::new(b, MAX_COLUMNS - 1)))
                }
            })
            .ok_or_else(|| ReferenceError::new(text, "whole columns or rows such as A:C or 3:5"))
    }

    /// A cell, a range, whole columns or whole rows.
    pub fn parse_any(text: &str) -> Result<Range, ReferenceError> {
        Range::parse_whole(text).or_else(|_| text.parse())
    }
}

impl FromStr for SheetRange {
    type Err = ReferenceError;

    /// Reads `Sheet1!A1:B2`, `'My sheet'!$A$1` or `Sheet1!A:A`.
    fn from_str(text: &str) -> Result<Self, ReferenceError> {
        let wrong =
            || ReferenceError::new(text, "a sheet and its cells, such as Sheet1!C7:F9 or 'My sheet'!C7");
        let (sheet, cells) = text.rsplit_once('!').ok_or_else(wrong)?;
        let sheet = match sheet.strip_prefix('\'') {
            Some(rest) => unquote(rest.strip_suffix('\'').ok_or_else(wrong)?).ok_or_else(wrong)?,
            None if sheet.contains(['\'', '!']) => return Err(wrong()),
            None => sheet.to_owned(),
        };
        if sheet.is_empty() {
            return Err(wrong());
        }
        Ok(SheetRange { sheet, range: Range::parse_any(cells).map_err(|_| wrong())? })
    }
}

/// Doubled quotes become single ones; a lone one inside is no quoting.
fn unquote(inner: &str) -> Option<String> {
    let mut out = String::with_capacity(inner.len());
    let mut chars = inner.chars();
    while let Some(c) = chars.next() {
        if c == '\'' && chars.next() != Some('\'') {
            return None;
        }
        out.push(c);
    }
    Some(out)
}

/// A sheet's name as formulas write it: quoted where it needs to be.
///
/// Bare names are those of ASCII letters, digits and underscores that begin with no digit and that
/// no program can take for a cell (`Q1`, `R1C1`, `RC`, `C5`) or a constant (`TRUE`). Quoting more
/// than is needed is always read back alike, so dots and letters outside ASCII are quoted too.
pub fn quote_sheet(name: &str) -> String {
    let bare = !name.is_empty()
        && name.bytes().all(|c| c == b'_' || c.is_ascii_alphanumeric())
        && !name.as_bytes()[0].is_ascii_digit()
        && !looks_like_cell(name)
        && !name.eq_ignore_ascii_case("true")
        && !name.eq_ignore_ascii_case("false");
    if bare { name.to_owned() } else { format!("'{}'", name.replace('\'', "''")) }
}

/// Whether a bare word could be a cell in A1 (of any program's size) or R1C1 notation.
fn looks_like_cell(name: &str) -> bool {
    let digits = |text: &str| text.bytes().all(|c| c.is_ascii_digit());
    let letters = name.bytes().take_while(u8::is_ascii_alphabetic).count();
    let a1 = (1..=3).contains(&letters) && letters < name.len() && digits(&name[letters..]);
    let lower = name.to_ascii_lowercase();
    let r1c1 = match (lower.strip_prefix('r'), lower.strip_prefix('c')) {
        (Some(rest), _) => match rest.split_once('c') {
            Some((row, col)) => digits(row) && digits(col),
            None => digits(rest),
        },
        (None, Some(rest)) => digits(rest),
        (None, None) => false,
    };
    a1 || r1c1
}

#[cfg(test)]
mod tests {
    use super::*;

    // ISO/IEC 29500-1, 18.17.2.3: columns A to XFD, rows 1 to 1048576.
    #[test]
    fn cells_are_read_up_to_the_limits_and_no_further() {
        for (text, row, col) in [
            ("A1", 0, 0),
            ("c7", 6, 2),
            ("$C$7", 6, 2),
            ("C$7", 6, 2),
            ("Z1", 0, 25),
            ("AA1", 0, 26),
            ("XFD1048576", 1_048_575, 16_383),
        ] {
            assert_eq!(text.parse(), Ok(Cell { row, col }), "{text}");
        }
        for text in ["", "A", "7", "A0", "A01", "XFE1", "A1048577", "A1 ", "AAAA1", "A-1", "$$A1", "A$", "Á1"]
        {
            assert!(text.parse::<Cell>().is_err(), "{text}");
        }
    }

    #[test]
    fn ranges_are_normalised_and_print_back() {
        for (text, printed) in [
            ("C7", "C7"),
            ("C7:F9", "C7:F9"),
            ("F9:C7", "C7:F9"),
            ("F7:C9", "C7:F9"),
            ("$C$7:F$9", "C7:F9"),
            ("C7:C7", "C7"),
        ] {
            assert_eq!(text.parse::<Range>().unwrap().to_string(), printed, "{text}");
        }
        for text in ["C7:", ":C7", "C7:F9:G1", "A:A", "3:3", "C7;F9"] {
            assert!(text.parse::<Range>().is_err(), "{text}");
        }
        assert_eq!(Range::parse_any("B:A").unwrap().to_string(), "A1:B1048576");
        assert_eq!(Range::parse_any("$3:$4").unwrap().to_string(), "A3:XFD4");
        assert!(Range::parse_whole("A:3").is_err());
    }

    #[test]
    fn a_range_counts_and_lists_its_cells() {
        let range: Range = "B2:C4".parse().unwrap();
        assert_eq!((range.rows(), range.cols(), range.len()), (3, 2, 6));
        let cells: Vec<_> = range.cells().map(|c| c.to_string()).collect();
        assert_eq!(cells, ["B2", "C2", "B3", "C3", "B4", "C4"]);
        assert!(range.contains("C4".parse().unwrap()) && !range.contains("D4".parse().unwrap()));
        assert!(range.intersects(&"C4:E9".parse().unwrap()) && !range.intersects(&"D2:D4".parse().unwrap()));
        assert_eq!(Range::parse_any("A:XFD").unwrap().len(), 17_179_869_184);
    }

    // Which names a spreadsheet program quotes: anything a reference, a number or an operator could begin.
    #[test]
    fn sheet_names_are_quoted_where_they_could_be_something_else() {
        for name in ["Costs", "Do_minimum", "Sheet1a", "Data2026x", "_x", "Rates", "ABCD12", "RCx"] {
            assert_eq!(quote_sheet(name), name);
        }
        for name in [
            "My sheet",
            "Q1",
            "FY26",
            "XFE1",
            "r1c1",
            "RC",
            "R",
            "c",
            "C5",
            "R5",
            "rc7",
            "2026",
            "1a",
            "TRUE",
            "false",
            "Kosten.2",
            "Überblick",
            "a-b",
            "P&L",
            "",
        ] {
            assert_eq!(quote_sheet(name), format!("'{name}'"));
        }
        assert_eq!(quote_sheet("It's"), "'It''s'");
    }

    #[test]
    fn sheet_ranges_are_read_and_printed() {
        for (text, sheet, printed) in [
            ("Costs!A1:B2", "Costs", "Costs!A1:B2"),
            ("'My sheet'!$A$1", "My sheet", "'My sheet'!A1"),
            ("'It''s'!B2:A1", "It's", "'It''s'!A1:B2"),
            ("'Q1'!Q1", "Q1", "'Q1'!Q1"),
            ("'Wow!'!A1", "Wow!", "'Wow!'!A1"),
            ("Costs!3:3", "Costs", "Costs!A3:XFD3"),
        ] {
            let read: SheetRange = text.parse().unwrap();
            assert_eq!(read.sheet, sheet);
            assert_eq!(read.to_string(), printed);
        }
        for text in ["A1", "!A1", "''!A1", "'It's'!A1", "Costs!", "'Costs!A1", "a!b!A1"] {
            assert!(text.parse::<SheetRange>().is_err(), "{text}");
        }
    }
}
