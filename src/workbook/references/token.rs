//! The tokens of a formula, as far as dependencies and shifting need them.
//!
//! The grammar is that of stored formulas (ISO/IEC 29500-1, 18.17): commas between arguments, A1
//! references, names of functions in English. Whatever is not understood becomes [`Token::Other`],
//! which callers take for a dependence on everything.

use std::borrow::Cow;
use std::ops;

use super::a1::{whole_cell, whole_column, whole_row};
use super::{Cell, MAX_COLUMNS, MAX_ROWS, Range};

/// One piece of a formula.
#[derive(Clone, Debug, PartialEq)]
pub enum Token<'a> {
    /// Cells: `A1`, `$A$1:B2`, `A:A`, `3:3`, with their sheet where it is written.
    Ref(Reference<'a>),
    /// A defined name (or a table named as a whole), with its sheet where it is written.
    Name(Option<Sheets<'a>>, &'a str),
    /// The name of a function; its opening bracket is the next token.
    Function(&'a str),
    /// Part of a table: `Costs[[#This Row],[Works]]`.
    TableRef(TableRef<'a>),
    /// A text in quotes, quotes included.
    Text(&'a str),
    /// A number.
    Number(&'a str),
    /// TRUE or FALSE.
    Logical(bool),
    /// An operator, bracket or separator.
    Operator(&'a str),
    /// An error value such as `#REF!`, with the sheet or cells written around it.
    Error(&'a str),
    /// White space (which may stand for the intersection operator).
    Space,
    /// Not understood.
    Other(&'a str),
}

/// A token and the bytes of the formula that it stands in.
#[derive(Clone, Debug, PartialEq)]
pub struct Spanned<'a> {
    /// What it is.
    pub token: Token<'a>,
    /// Where it is.
    pub span: ops::Range<usize>,
}

/// The sheets before an exclamation mark.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Sheets<'a> {
    /// The other workbook, `1` or a file's name; `0` is the workbook itself.
    pub book: Option<Cow<'a, str>>,
    /// The sheet, or the first of several; empty for a name of the workbook (`[0]!name`).
    pub first: Cow<'a, str>,
    /// The last of several sheets (`First:Last!A1`).
    pub last: Option<Cow<'a, str>>,
}

/// One corner of a reference.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub struct Corner {
    /// Row from 0.
    pub row: u32,
    /// Column from 0.
    pub col: u32,
    /// Whether `$` fixes the row.
    pub row_fixed: bool,
    /// Whether `$` fixes the column.
    pub col_fixed: bool,
}

/// How a reference is written.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Extent {
    /// `A1`
    Cell,
    /// `A1:B2`
    Cells,
    /// `A:B`
    Columns,
    /// `1:2`
    Rows,
}

/// A reference to cells.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Reference<'a> {
    /// Its sheets, where written.
    pub sheet: Option<Sheets<'a>>,
    /// The corner written first.
    pub from: Corner,
    /// The corner written second; the same for one cell.
    pub to: Corner,
    /// How it is written.
    pub extent: Extent,
}

/// A reference to part of a table.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct TableRef<'a> {
    /// The table; none inside the table itself.
    pub table: Option<&'a str>,
    /// What stands between the outer brackets.
    pub part: &'a str,
}

impl Sheets<'_> {
    /// Whether another workbook is meant.
    pub fn is_external(&self) -> bool {
        self.book.as_deref().is_some_and(|book| book != "0")
    }
}

impl Corner {
    /// Where it comes to stand when its formula moves: relative parts go along, and wrap at the
    /// edges of the sheet as shared formulas and relative names do.
    #[must_use]
    pub fn moved(self, d_row: i64, d_col: i64) -> Corner {
        let step = |at: u32, fixed: bool, by: i64, size: u32| {
            if fixed { at } else { (i64::from(at) + by).rem_euclid(i64::from(size)) as u32 }
        };
        Corner {
            row: step(self.row, self.row_fixed, d_row, MAX_ROWS),
            col: step(self.col, self.col_fixed, d_col, MAX_COLUMNS),
            ..self
        }
    }
}

impl Reference<'_> {
    /// Its cells, corners in order.
    pub fn range(&self) -> Range {
        let cell = |corner: Corner| Cell { row: corner.row, col: corner.col };
        Range::new(cell(self.from), cell(self.to))
    }

    /// Whether every part that can move is fixed by `$`.
    pub fn is_absolute(&self) -> bool {
        [self.from, self.to].iter().all(|corner| corner.row_fixed && corner.col_fixed)
    }
}

/// The tokens of a formula, with or without its equals sign. Joined, their spans give the formula.
pub fn tokens(formula: &str) -> Vec<Spanned<'_>> {
    Tokens::new(formula).collect()
}

/// Iterator over the tokens of a formula.
#[derive(Clone, Debug)]
pub struct Tokens<'a> {
    text: &'a str,
    at: usize,
}

impl<'a> Tokens<'a> {
    /// Starts at the beginning of the formula.
    pub fn new(formula: &'a str) -> Self {
        Tokens { text: formula, at: 0 }
    }
}

impl<'a> Iterator for Tokens<'a> {
    type Item = Spanned<'a>;

    fn next(&mut self) -> Option<Spanned<'a>> {
        if self.at >= self.text.len() {
            return None;
        }
        let (token, end) = next_token(self.text, self.at);
        let span = self.at..end;
        self.at = end;
        Some(Spanned { token, span })
    }
}

/// Bytes of bare words. Everything outside ASCII may be part of a name, so slices never cut a character.
fn in_word(c: u8) -> bool {
    c.is_ascii_alphanumeric() || matches!(c, b'_' | b'.' | b'\\' | b'?' | b'$') || c >= 0x80
}

fn word_end(text: &str, at: usize) -> usize {
    at + text.as_bytes()[at..].iter().take_while(|c| in_word(**c)).count()
}

fn byte(text: &str, at: usize) -> u8 {
    text.as_bytes().get(at).copied().unwrap_or(0)
}

/// The token at a position before the end, and where it ends.
fn next_token(text: &str, at: usize) -> (Token<'_>, usize) {
    match byte(text, at) {
        b' ' | b'\t' | b'\r' | b'\n' => {
            let blanks = text.as_bytes()[at..].iter().take_while(|c| c.is_ascii_whitespace()).count();
            (Token::Space, at + blanks)
        }
        b'"' => match quoted_end(text, at, b'"') {
            Some(end) => (Token::Text(&text[at..end]), end),
            None => rest(text, at),
        },
        b'#' => error_value(text, at).unwrap_or((Token::Operator("#"), at + 1)),
        b'\'' => match sheets(text, at) {
            Some((sheets, end)) => qualified(text, at, sheets, end),
            None => rest(text, at),
        },
        b'[' => match sheets(text, at) {
            Some((sheets, end)) => qualified(text, at, sheets, end),
            None => match bracket_end(text, at) {
                Some(end) => (Token::TableRef(TableRef { table: None, part: &text[at + 1..end - 1] }), end),
                None => rest(text, at),
            },
        },
        b'<' if matches!(byte(text, at + 1), b'=' | b'>') => (Token::Operator(&text[at..at + 2]), at + 2),
        b'>' if byte(text, at + 1) == b'=' => (Token::Operator(&text[at..at + 2]), at + 2),
        b'+' | b'-' | b'*' | b'/' | b'^' | b'&' | b'=' | b'<' | b'>' | b'%' | b'(' | b')' | b',' | b'~'
        | b';' | b':' | b'{' | b'}' | b'@' => (Token::Operator(&text[at..at + 1]), at + 1),
        c if in_word(c) => word(text, at),
        _ => (Token::Other(&text[at..at + 1]), at + 1),
    }
}

/// An unclosed quote or bracket: nothing after it can be trusted.
fn rest(text: &str, at: usize) -> (Token<'_>, usize) {
    (Token::Other(&text[at..]), text.len())
}

/// The end of a quoted stretch, doubled quotes skipped.
fn quoted_end(text: &str, at: usize, quote: u8) -> Option<usize> {
    let bytes = text.as_bytes();
    let mut i = at + 1;
    while i < bytes.len() {
        if bytes[i] == quote {
            if byte(text, i + 1) != quote {
                return Some(i + 1);
            }
            i += 1;
        }
        i += 1;
    }
    None
}

/// The end of a bracketed stretch; brackets nest, and an apostrophe takes away a bracket's meaning.
fn bracket_end(text: &str, at: usize) -> Option<usize> {
    let bytes = text.as_bytes();
    let (mut i, mut depth) = (at, 0usize);
    while i < bytes.len() {
        match bytes[i] {
            b'\'' => i += 1,
            b'[' => depth += 1,
            b']' => {
                depth -= 1;
                if depth == 0 {
                    return Some(i + 1);
                }
            }
            _ => {}
        }
        i += 1;
    }
    None
}

/// What stands before an exclamation mark, and the position after that mark.
fn sheets(text: &str, at: usize) -> Option<(Sheets<'_>, usize)> {
    let (first, end) = sheet_word(text, at)?;
    let (second, end) = if byte(text, end) == b':' {
        let (last, end) = sheet_word(text, end + 1)?;
        (Some(last), end)
    } else {
        (None, end)
    };
    if byte(text, end) != b'!' {
        return None;
    }
    let (book, sheet) = split_book(first);
    let (first, last) = match second {
        Some(last) => (sheet, Some(last)),
        None => split_pair(sheet),
    };
    Some((Sheets { book, first, last }, end + 1))
}

/// One sheet's name, quoted or bare, perhaps with its workbook in brackets.
fn sheet_word(text: &str, at: usize) -> Option<(Cow<'_, str>, usize)> {
    match byte(text, at) {
        b'\'' => {
            let end = quoted_end(text, at, b'\'')?;
            let inner = &text[at + 1..end - 1];
            let name = if inner.contains('\'') {
                Cow::Owned(inner.replace("''", "'"))
            } else {
                Cow::Borrowed(inner)
            };
            Some((name, end))
        }
        b'[' => {
            let close = at + text[at..].find(']')? + 1;
            let end = word_end(text, close);
            Some((Cow::Borrowed(&text[at..end]), end))
        }
        _ => {
            let end = word_end(text, at);
            (end > at).then(|| (Cow::Borrowed(&text[at..end]), end))
        }
    }
}

/// Applies a split to borrowed and owned text alike.
fn split<'a>(name: Cow<'a, str>, at: usize, skip: usize) -> (Cow<'a, str>, Cow<'a, str>) {
    match name {
        Cow::Borrowed(text) => (Cow::Borrowed(&text[..at]), Cow::Borrowed(&text[at + skip..])),
        Cow::Owned(text) => (Cow::Owned(text[..at].to_owned()), Cow::Owned(text[at + skip..].to_owned())),
    }
}

/// `[1]Costs` or `C:\folder\[plan.xlsx]Costs`: the workbook and the sheet.
fn split_book(name: Cow<'_, str>) -> (Option<Cow<'_, str>>, Cow<'_, str>) {
    let Some((open, close)) = name.find('[').zip(name.rfind(']')).filter(|(open, close)| open < close) else {
        return (None, name);
    };
    let (book, sheet) = split(name, close, 1);
    let book = if open == 0 { split(book, 0, 1).1 } else { Cow::Owned(book.replacen('[', "", 1)) };
    (Some(book), sheet)
}

/// `First:Last` inside one pair of quotes; no sheet's name can hold a colon.
fn split_pair(name: Cow<'_, str>) -> (Cow<'_, str>, Option<Cow<'_, str>>) {
    match name.find(':') {
        Some(colon) => {
            let (first, last) = split(name, colon, 1);
            (first, Some(last))
        }
        None => (name, None),
    }
}

/// What follows `Sheet!`: cells, a name, or what is left of them.
fn qualified<'a>(text: &'a str, start: usize, sheets: Sheets<'a>, at: usize) -> (Token<'a>, usize) {
    if byte(text, at) == b'#' {
        return match error_value(text, at) {
            Some((_, end)) => (Token::Error(&text[start..end]), end),
            None => rest(text, start),
        };
    }
    let end = word_end(text, at);
    if end == at {
        return rest(text, start);
    }
    // A function of another workbook or of a sheet's code, a table named with its workbook: unknown cells.
    if matches!(byte(text, end), b'(' | b'[' | b'!') {
        return (Token::Other(&text[start..end]), end);
    }
    if let Some((mut reference, end)) = cells(text, at, end) {
        reference.sheet = Some(sheets);
        return (Token::Ref(reference), end);
    }
    (Token::Name(Some(sheets), &text[at..end]), end)
}

/// A token that begins with a letter, a digit or the like.
fn word(text: &str, at: usize) -> (Token<'_>, usize) {
    let end = word_end(text, at);
    let whole = &text[at..end];
    // A 3-D reference begins like a range, but no sheet that looks like a cell stands bare.
    let may_be_sheet = match byte(text, end) {
        b'!' => true,
        b':' => whole_cell(whole).is_none(),
        _ => false,
    };
    if may_be_sheet && let Some((sheets, end)) = sheets(text, at) {
        return qualified(text, at, sheets, end);
    }
    match byte(text, end) {
        b'(' => return (Token::Function(whole), end),
        b'[' => {
            return match bracket_end(text, end) {
                Some(close) => {
                    let part = &text[end + 1..close - 1];
                    (Token::TableRef(TableRef { table: Some(whole), part }), close)
                }
                None => rest(text, at),
            };
        }
        _ => {}
    }
    if let Some((reference, end)) = cells(text, at, end) {
        return (Token::Ref(reference), end);
    }
    if whole.starts_with(|c: char| c.is_ascii_digit() || c == '.') {
        return number(text, at);
    }
    if whole.eq_ignore_ascii_case("true") || whole.eq_ignore_ascii_case("false") {
        return (Token::Logical(whole.eq_ignore_ascii_case("true")), end);
    }
    (Token::Name(None, whole), end)
}

/// Cells at a word: `A1`, `A1:B2`, `A:B` or `1:2`, and where they end.
fn cells(text: &str, at: usize, end: usize) -> Option<(Reference<'_>, usize)> {
    let first = &text[at..end];
    let second_end = if byte(text, end) == b':' { word_end(text, end + 1) } else { end };
    // A word after the colon that is a sheet, a function or a table is an operand of its own.
    let joined = second_end > end + 1 && !matches!(byte(text, second_end), b'!' | b'(' | b'[');
    let second = if joined { &text[end + 1..second_end] } else { "" };
    let reference = |from, to, extent| Reference { sheet: None, from, to, extent };
    let corner = |((row, row_fixed), (col, col_fixed))| Corner { row, col, row_fixed, col_fixed };

    if let Some(from) = whole_cell(first) {
        let from = corner(from);
        return Some(match whole_cell(second) {
            Some(to) => (reference(from, corner(to), Extent::Cells), second_end),
            None => (reference(from, from, Extent::Cell), end),
        });
    }
    // The open side of whole columns and rows never moves, so it counts as fixed.
    if let Some((from, to)) = whole_column(first).zip(whole_column(second)) {
        let (from, to) = (corner(((0, true), from)), corner(((MAX_ROWS - 1, true), to)));
        return Some((reference(from, to, Extent::Columns), second_end));
    }
    if let Some((from, to)) = whole_row(first).zip(whole_row(second)) {
        let (from, to) = (corner((from, (0, true))), corner((to, (MAX_COLUMNS - 1, true))));
        return Some((reference(from, to, Extent::Rows), second_end));
    }
    None
}

/// A number: digits, a point, an exponent with its sign.
fn number(text: &str, at: usize) -> (Token<'_>, usize) {
    let digits = |at: usize| at + text.as_bytes()[at..].iter().take_while(|c| c.is_ascii_digit()).count();
    let mut end = digits(at);
    if byte(text, end) == b'.' {
        end = digits(end + 1);
    }
    if matches!(byte(text, end), b'e' | b'E') {
        let sign = usize::from(matches!(byte(text, end + 1), b'+' | b'-'));
        let exponent = digits(end + 1 + sign);
        if exponent > end + 1 + sign {
            end = exponent;
        }
    }
    if word_end(text, end) > end || end == at + 1 && byte(text, at) == b'.' {
        let end = word_end(text, end);
        return (Token::Other(&text[at..end]), end);
    }
    (Token::Number(&text[at..end]), end)
}

/// The error values of stored formulas; a deleted reference takes the cells written after it along.
fn error_value(text: &str, at: usize) -> Option<(Token<'_>, usize)> {
    const ERRORS: [&str; 17] = [
        "#REF!",
        "#N/A",
        "#VALUE!",
        "#DIV/0!",
        "#NAME?",
        "#NUM!",
        "#NULL!",
        "#GETTING_DATA",
        "#SPILL!",
        "#CALC!",
        "#FIELD!",
        "#BLOCKED!",
        "#CONNECT!",
        "#BUSY!",
        "#UNKNOWN!",
        "#EXTERNAL!",
        "#PYTHON!",
    ];
    let found = ERRORS.iter().find(|error| {
        text.as_bytes()
            .get(at..at + error.len())
            .is_some_and(|here| here.eq_ignore_ascii_case(error.as_bytes()))
    })?;
    let mut end = at + found.len();
    if *found == "#REF!" {
        let word = word_end(text, end);
        if let Some((_, after)) = cells(text, end, word) {
            end = after;
        } else if byte(text, end) == b'#'
            && let Some((_, after)) = error_value(text, end)
        {
            end = after;
        }
    }
    Some((Token::Error(&text[at..end]), end))
}
