//! The one wrapper over the spreadsheet writer: sheets as plain data, checked before they are written.
//!
//! The writer below aborts on NaN, takes invalid names and characters, and does not escape text that
//! looks like an escape, so nothing reaches it here that was not checked first.

use std::collections::BTreeMap;

use xlsxwriter::format::{
    FormatAlignment, FormatBorder, FormatColor, FormatPatterns, FormatVerticalAlignment,
};
use xlsxwriter::prelude::{Format, Workbook, Worksheet};
use xlsxwriter::worksheet::PaperType;

use crate::patch::Cached;
use crate::problem::{Place, Problem, Result};
use crate::references::{Cell, Range};

mod chart;
mod form;

pub use chart::{Chart, ChartKind, Series};
pub use form::{Form, Look, form};

/// The longest text a cell holds, in UTF-16 units.
const MAX_TEXT: usize = 32_767;
/// The longest formula a cell holds, in characters.
pub const MAX_FORMULA: usize = 8_192;

/// How a cell looks: each stands for a number format, weight, wrapping and borders.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Style {
    /// The sheet's title.
    Title,
    /// A heading over a part of the sheet.
    Section,
    /// A column heading: bold, wrapped, underlined.
    Heading,
    /// Text on one line.
    Text,
    /// Text that wraps.
    Wrapped,
    /// A text that stands where a number is looked for: to the right, wrapped.
    Instead,
    /// Bold text that wraps: a label, a verdict.
    Strong,
    /// The verdict: bold, large, on one line.
    Verdict,
    /// A whole number such as a year.
    Year,
    /// A date.
    Date,
    /// An offset in years.
    Offset,
    /// A rate, as a percentage.
    Rate,
    /// A switching value, as a percentage with four decimals.
    Percent,
    /// A switching value that is no percentage, with four decimals.
    Value,
    /// A share, as a percentage without decimals.
    Share,
    /// A discount factor.
    Factor,
    /// Money.
    Money,
    /// Money in a line of totals.
    Total,
    /// A short word such as "agrees", in the middle of its cell.
    Result,
    /// A ratio, or years.
    Ratio,
    /// A small difference or tolerance.
    Difference,
    /// A number at full precision.
    Exact,
}

impl Style {
    fn wraps(self) -> bool {
        matches!(self, Style::Heading | Style::Wrapped | Style::Instead | Style::Strong)
    }

    fn format(self, decimals: bool) -> Format {
        let mut format = Format::new();
        format.set_font_name("Calibri").set_font_size(10.0);
        format.set_vertical_align(FormatVerticalAlignment::VerticalTop);
        match self {
            Style::Title => {
                format.set_bold().set_font_size(14.0);
            }
            Style::Section => {
                format.set_bold().set_font_size(11.0).set_border_bottom(FormatBorder::Medium);
            }
            Style::Heading => {
                format.set_bold().set_text_wrap().set_border_bottom(FormatBorder::Thin);
                format.set_align(FormatAlignment::Center);
                format.set_pattern(FormatPatterns::Solid).set_fg_color(FormatColor::Custom(0xE7_E6_E6));
            }
            Style::Verdict => {
                format.set_bold().set_font_size(12.0);
            }
            Style::Wrapped => {
                format.set_text_wrap().set_align(FormatAlignment::Left);
            }
            Style::Instead => {
                format.set_text_wrap().set_align(FormatAlignment::Right);
            }
            Style::Strong => {
                format.set_text_wrap().set_bold().set_align(FormatAlignment::Left);
            }
            Style::Result => {
                format.set_align(FormatAlignment::Center);
            }
            Style::Total => {
                format.set_bold().set_border_top(FormatBorder::Thin);
            }
            _ => {}
        }
        if let Some(code) = self.number_format(decimals) {
            format.set_num_format(code);
        }
        format
    }

    /// Small sums of money (in millions, say) are shown with decimals.
    fn number_format(self, decimals: bool) -> Option<&'static str> {
        Some(match self {
            Style::Year => "0",
            Style::Date => "yyyy\\-mm\\-dd",
            Style::Offset => "0.0##",
            Style::Rate => "0.00%",
            Style::Percent => "0.0000%",
            Style::Value => "0.0000",
            Style::Share => "0%",
            Style::Factor => "0.000000",
            Style::Money | Style::Total if decimals => "#,##0.00;\\-#,##0.00;0.00",
            Style::Money | Style::Total => "#,##0;\\-#,##0;0",
            Style::Ratio => "#,##0.00",
            Style::Difference => "0.0E+00",
            Style::Exact => "0.###############",
            _ => return None,
        })
    }
}

/// What a cell holds.
#[derive(Clone, Debug, PartialEq)]
pub enum Content {
    /// A text.
    Text(String),
    /// A number.
    Number(f64),
    /// True or false.
    Logical(bool),
    /// A formula without its equals sign, and its result.
    Formula(String, Cached),
}

impl Content {
    fn magnitude(&self) -> f64 {
        match self {
            Content::Number(x) | Content::Formula(_, Cached::Number(x)) => x.abs(),
            _ => 0.0,
        }
    }
}

/// A sheet to be written.
#[derive(Clone, Debug, Default)]
pub struct Sheet {
    /// Its visible name.
    pub name: String,
    cells: BTreeMap<Cell, (Content, Style)>,
    merges: Vec<(Range, String, Style)>,
    widths: Vec<(u32, u32, f64)>,
    heights: BTreeMap<u32, f64>,
    freeze: Option<(u32, u32)>,
    repeat: Option<(u32, u32)>,
    charts: Vec<(Cell, Chart)>,
    upright: bool,
}

impl Sheet {
    /// An empty sheet.
    pub fn new(name: &str) -> Self {
        Sheet { name: name.to_owned(), ..Sheet::default() }
    }

    /// Writes a text; characters that no file may hold are shown escaped, and a text too long is cut.
    pub fn text(&mut self, row: u32, col: u32, style: Style, text: impl AsRef<str>) {
        let text = legal(text.as_ref());
        if !text.is_empty() {
            if style.wraps() {
                self.make_room(row, self.width(col), &text);
            }
            self.cells.insert(Cell { row, col }, (Content::Text(text), style));
        }
    }

    /// Writes a number.
    pub fn number(&mut self, row: u32, col: u32, style: Style, number: f64) {
        self.cells.insert(Cell { row, col }, (Content::Number(number), style));
    }

    /// Writes true or false.
    pub fn logical(&mut self, row: u32, col: u32, style: Style, truth: bool) {
        self.cells.insert(Cell { row, col }, (Content::Logical(truth), style));
    }

    /// Writes a formula with its result.
    pub fn formula(&mut self, row: u32, col: u32, style: Style, text: impl Into<String>, result: Cached) {
        if let (true, Cached::Text(result)) = (style.wraps(), &result) {
            self.make_room(row, self.width(col), result);
        }
        self.cells.insert(Cell { row, col }, (Content::Formula(text.into(), result), style));
    }

    /// Writes a text across columns `col` to `last` of one row, wrapped, the row as high as it needs.
    pub fn paragraph(&mut self, row: u32, col: u32, last: u32, style: Style, text: impl AsRef<str>) {
        let text = legal(text.as_ref());
        if text.is_empty() {
            return;
        }
        self.make_room(row, (col..=last).map(|c| self.width(c)).sum(), &text);
        if last > col {
            let range = Range { first: Cell { row, col }, last: Cell { row, col: last } };
            self.merges.push((range, text.clone(), style));
        }
        self.cells.insert(Cell { row, col }, (Content::Text(text), style));
    }

    /// Sets the width of columns `first` to `last`, in characters; before any paragraph in them.
    /// A later width counts: ranges of columns that overlap would have a program take the sheet for damaged.
    pub fn columns(&mut self, first: u32, last: u32, width: f64) {
        for (a, b, earlier) in std::mem::take(&mut self.widths) {
            if a < first {
                self.widths.push((a, b.min(first - 1), earlier));
            }
            if b > last {
                self.widths.push((a.max(last + 1), b, earlier));
            }
        }
        self.widths.push((first, last, width));
    }

    /// Makes a row high enough for a wrapped text: programs do not do it for rows of a grafted sheet.
    fn make_room(&mut self, row: u32, width: f64, text: &str) {
        let lines = |line: &str| (line.chars().count() as f64 * 0.9 / width).ceil().max(1.0);
        let needed = text.lines().map(lines).sum::<f64>();
        if needed > 1.0 {
            let height = self.heights.entry(row).or_insert(15.0);
            *height = height.max(needed * 13.5 + 2.0).min(400.0);
        }
    }

    /// Prints upright instead of across.
    pub fn upright(&mut self) {
        self.upright = true;
    }

    /// Freezes the rows above `row` and the columns before `col`.
    pub fn freeze(&mut self, row: u32, col: u32) {
        self.freeze = Some((row, col));
    }

    /// Repeats rows `first` to `last` on every printed page.
    pub fn repeat(&mut self, first: u32, last: u32) {
        self.repeat = Some((first, last));
    }

    /// Puts a chart with its upper left corner in a cell.
    pub fn chart(&mut self, row: u32, col: u32, chart: Chart) {
        self.charts.push((Cell { row, col }, chart));
    }

    /// What a cell holds.
    pub fn content(&self, cell: Cell) -> Option<&Content> {
        self.cells.get(&cell).map(|(content, _)| content)
    }

    /// Every cell in order of row and column.
    pub fn cells(&self) -> impl Iterator<Item = (Cell, &Content)> {
        self.cells.iter().map(|(&cell, (content, _))| (cell, content))
    }

    /// The rectangle from A1 that holds everything on the sheet.
    pub fn used(&self) -> Range {
        let cells = self.cells.keys().copied().chain(self.merges.iter().map(|(range, ..)| range.last));
        let last =
            cells.fold(Cell { row: 0, col: 0 }, |a, b| Cell { row: a.row.max(b.row), col: a.col.max(b.col) });
        Range { first: Cell { row: 0, col: 0 }, last }
    }

    fn width(&self, col: u32) -> f64 {
        let set = self.widths.iter().rev().find(|(first, last, _)| (*first..=*last).contains(&col));
        set.map_or(8.43, |(.., width)| *width)
    }
}

/// Writes the sheets as a package of their own, with names for the whole workbook: (name, what it
/// refers to).
///
/// # Errors
/// A number that is not finite, a formula that is too long, or a name the format does not allow.
pub fn package(sheets: &[Sheet], names: &[(&str, &str)]) -> Result<Vec<u8>> {
    for sheet in sheets {
        check(sheet)?;
    }
    let file = tempfile::NamedTempFile::new().map_err(|e| unwritten("no temporary file can be made", &e))?;
    let path = file.path().to_str().ok_or_else(|| failed("the temporary folder's path is not text", &""))?;
    let book = Workbook::new(path).map_err(|e| failed("the audit sheets cannot be started", &e))?;
    let mut written = Ok(());
    for sheet in sheets {
        written = written.and_then(|()| write_sheet(&book, sheet));
    }
    for (name, text) in names {
        written = written.and_then(|()| book.define_name(name, &format!("={text}")));
    }
    // Closed even after a failure: a drop would write the file all the same.
    let closed = book.close();
    written.map_err(|e| failed("the audit sheets cannot be written", &e))?;
    closed.map_err(|e| unwritten("the audit sheets cannot be written", &e))?;
    std::fs::read(path).map_err(|e| unwritten("the audit sheets cannot be read back", &e))
}

/// Writes the sheets as a workbook to be opened as it is, the same bytes every time, with names as [`package`] takes
/// them; a name of one sheet reads `Sheet!name`.
///
/// # Errors
/// As [`package`].
pub fn workbook(sheets: &[Sheet], names: &[(&str, &str)]) -> Result<Vec<u8>> {
    form::unstamped(package(sheets, names)?)
}

fn failed(what: &str, why: &dyn std::fmt::Display) -> crate::problem::WorkbookError {
    Problem::error("own-sheet", Place::default(), format!("{what}: {why}")).into()
}

/// The error for a temporary file, which the writer cannot do without.
fn unwritten(what: &str, why: &dyn std::fmt::Display) -> crate::problem::WorkbookError {
    Problem::error("cannot-write", Place::default(), format!("{what}: {why}"))
        .hint("make room in the folder for temporary files, or name another one in TMPDIR")
        .into()
}

fn check(sheet: &Sheet) -> Result<()> {
    let complain = |cell: Cell, what: String| {
        let range = Range { first: cell, last: cell };
        Err(Problem::error("own-sheet", Place::cells(&sheet.name, range), what).into())
    };
    if !valid_sheet_name(&sheet.name) {
        return Err(failed("not a name a sheet may have", &sheet.name));
    }
    for (&cell, (content, _)) in &sheet.cells {
        match content {
            Content::Number(x) if !x.is_finite() => return complain(cell, format!("the number is {x}")),
            Content::Formula(text, cached) => {
                let length = text.chars().count();
                if length > MAX_FORMULA || text.contains('\0') {
                    return complain(cell, format!("the formula has {length} characters, allowed 8192"));
                }
                if let Cached::Number(x) = cached
                    && !x.is_finite()
                {
                    return complain(cell, format!("the formula's result is {x}"));
                }
            }
            _ => {}
        }
    }
    Ok(())
}

/// Whether spreadsheet programs take this as a sheet's name.
pub fn valid_sheet_name(name: &str) -> bool {
    let units = name.encode_utf16().count();
    (1..=31).contains(&units)
        && !name.chars().any(|c| "[]:*?/\\".contains(c) || illegal(c))
        && !name.starts_with('\'')
        && !name.ends_with('\'')
        && !name.eq_ignore_ascii_case("history")
}

type Written = std::result::Result<(), xlsxwriter::XlsxError>;

fn write_sheet(book: &Workbook, sheet: &Sheet) -> Written {
    let mut out = book.add_worksheet(Some(&sheet.name))?;
    let largest = sheet.cells.values().filter(|(_, style)| matches!(style, Style::Money | Style::Total));
    let largest = largest.map(|(content, _)| content.magnitude()).fold(0.0, f64::max);
    let format = |style: Style| style.format(largest < 10_000.0);
    let base = format(Style::Text);
    for &(first, last, width) in &sheet.widths {
        out.set_column(first as u16, last as u16, width, Some(&base))?;
    }
    for (&row, &height) in &sheet.heights {
        out.set_row(row, height, None)?;
    }
    for (range, text, style) in &sheet.merges {
        let (a, b) = (range.first, range.last);
        out.merge_range(a.row, a.col as u16, b.row, b.col as u16, &escaped(text), Some(&format(*style)))?;
    }
    for (cell, (content, style)) in &sheet.cells {
        write_cell(&mut out, *cell, content, &format(*style))?;
    }
    for (cell, chart) in &sheet.charts {
        chart.insert(book, &mut out, *cell)?;
    }
    if let Some((row, col)) = sheet.freeze {
        out.freeze_panes(row, col as u16);
    }
    if sheet.upright {
        out.set_portrait();
    } else {
        out.set_landscape();
    }
    out.set_paper(PaperType::A4);
    out.fit_to_pages(1, 0);
    out.set_footer("&L&A&RPage &P of &N")?;
    if let Some((first, last)) = sheet.repeat {
        out.repeat_rows(first, last)?;
    }
    Ok(())
}

fn write_cell(out: &mut Worksheet<'_>, cell: Cell, content: &Content, format: &Format) -> Written {
    let (row, col) = (cell.row, cell.col as u16);
    match content {
        Content::Text(text) => out.write_string(row, col, &escaped(text), Some(format)),
        Content::Number(x) => out.write_number(row, col, *x, Some(format)),
        Content::Logical(truth) => out.write_boolean(row, col, *truth, Some(format)),
        Content::Formula(text, cached) => {
            let text = format!("={text}");
            match cached {
                Cached::Number(x) => out.write_formula_num(row, col, &text, Some(format), *x),
                Cached::Text(s) => out.write_formula_str(row, col, &text, Some(format), &escaped(&legal(s))),
                // An empty result: zero would be believed by programs that do not recalculate.
                Cached::None => out.write_formula_str(row, col, &text, Some(format), ""),
            }
        }
    }
}

/// Whether XML 1.0 refuses the character, or a cell would not keep it.
fn illegal(c: char) -> bool {
    matches!(c, '\0'..='\x08' | '\x0B'..='\x1F' | '\u{FFFE}' | '\u{FFFF}')
}

/// The text with characters that no file may hold shown as `\u{1B}`, cut to what a cell holds.
pub fn legal(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.chars() {
        if illegal(c) {
            out.extend(c.escape_unicode());
        } else {
            out.push(c);
        }
    }
    // Bytes, because the writer counts them so; escapes below can make a text a little longer still.
    if out.len() > MAX_TEXT - 2_000 {
        let mut end = MAX_TEXT - 2_100;
        while !out.is_char_boundary(end) {
            end -= 1;
        }
        out.truncate(end);
        out.push_str(" (cut here)");
    }
    out
}

/// `_x0041_` would be read back as A; the underscore itself is escaped to keep the text.
fn escaped(text: &str) -> String {
    let bytes = text.as_bytes();
    let mut out = String::with_capacity(text.len());
    for (i, c) in text.char_indices() {
        let looks = c == '_'
            && bytes.len() >= i + 7
            && bytes[i + 1] == b'x'
            && bytes[i + 2..i + 6].iter().all(u8::is_ascii_hexdigit)
            && bytes[i + 6] == b'_';
        out.push_str(if looks { "_x005F_" } else { "" });
        if !looks {
            out.push(c);
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn text_that_looks_like_an_escape_keeps_its_letters() {
        assert_eq!(escaped("a _x0041_ b_x12_"), "a _x005F_x0041_ b_x12_");
    }

    #[test]
    fn characters_no_file_may_hold_are_shown() {
        assert_eq!(legal("a\0b\u{1B}\u{FFFE}\n"), "a\\u{0}b\\u{1b}\\u{fffe}\n");
        assert!(legal(&"x".repeat(40_000)).ends_with("(cut here)"));
    }

    #[test]
    fn a_number_that_is_not_finite_is_refused_by_cell() {
        let mut sheet = Sheet::new("S");
        sheet.number(1, 2, Style::Money, f64::NAN);
        let error = package(&[sheet], &[]).unwrap_err();
        assert_eq!(error.to_string(), "S!C2: the number is NaN (own-sheet)");
    }

    #[test]
    fn sheet_names_follow_the_rules_of_the_format() {
        for bad in ["", "a/b", "'a", "History", "a\u{1}", &"x".repeat(32)] {
            assert!(!valid_sheet_name(bad), "{bad}");
        }
        assert!(valid_sheet_name("Audit summary"));
    }

    #[test]
    fn a_package_is_written_and_reads_back() {
        let mut sheet = Sheet::new("It's");
        sheet.text(0, 0, Style::Title, "_x0041_");
        sheet.formula(1, 0, Style::Money, "1+1", Cached::Number(2.0));
        let bytes = package(&[sheet], &[]).unwrap();
        assert_eq!(&bytes[..2], b"PK");
    }
}
