//! Sheets for people to type into: shaded inputs, blank cells with formats, names and drop-down lists.

use std::collections::BTreeMap;

use xlsxwriter::format::{
    FormatAlignment, FormatBorder, FormatColor, FormatPatterns, FormatVerticalAlignment,
};
use xlsxwriter::prelude::{Format, Workbook, Worksheet};
use xlsxwriter::worksheet::PaperType;
use xlsxwriter::worksheet::validation::{
    DataValidation, DataValidationErrorType, DataValidationType, ErrorAlertOptions, InputMessageOptions,
};

use super::{Written, escaped, failed, legal, unwritten};
use crate::package::{Changes, Package};
use crate::problem::Result;
use crate::references::{Cell, Range, SheetRange};

/// The part in which the writer states the time of writing.
const STAMPED: &str = "docProps/core.xml";
/// The same part without a time, so that the same form always has the same bytes.
const UNSTAMPED: &str = "<?xml version=\"1.0\" encoding=\"UTF-8\" standalone=\"yes\"?>\n\
    <cp:coreProperties xmlns:cp=\"http://schemas.openxmlformats.org/package/2006/metadata/core-properties\" \
    xmlns:dc=\"http://purl.org/dc/elements/1.1/\"><dc:creator>hence</dc:creator></cp:coreProperties>";

/// How a cell of a form looks.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Look {
    /// The sheet's title.
    Title,
    /// A heading over a part of the sheet.
    Section,
    /// A year over its column.
    Year,
    /// Plain text.
    Text,
    /// Text that wraps.
    Wrapped,
    /// A remark, small and grey.
    Remark,
    /// A line of totals: its label.
    TotalLabel,
    /// A line of totals: its money.
    Total,
    /// A label to type over.
    TypedText,
    /// A setting to type, on the left of its cell.
    TypedSetting,
    /// Money to type.
    TypedMoney,
    /// A factor, to be filled.
    Factor,
    /// Money, to be filled.
    Money,
    /// A result in money, to be filled.
    ResultMoney,
    /// A ratio or a number of years, to be filled.
    ResultRatio,
    /// A rate, to be filled.
    ResultRate,
}

impl Look {
    fn format(self) -> Format {
        let mut format = Format::new();
        format.set_font_name("Calibri").set_font_size(11.0);
        match self {
            Look::Title => {
                format.set_bold().set_font_size(16.0);
            }
            Look::Section => {
                format.set_bold().set_border_bottom(FormatBorder::Medium);
            }
            Look::Year => {
                format.set_bold().set_align(FormatAlignment::Right).set_border_bottom(FormatBorder::Medium);
            }
            Look::Wrapped => {
                format.set_text_wrap().set_vertical_align(FormatVerticalAlignment::VerticalTop);
            }
            Look::Remark => {
                format.set_font_size(10.0).set_font_color(FormatColor::Custom(0x59_59_59)).set_indent(1);
            }
            Look::TotalLabel | Look::Total => {
                format.set_bold().set_border_top(FormatBorder::Thin);
            }
            Look::TypedText | Look::TypedSetting | Look::TypedMoney => {
                format.set_pattern(FormatPatterns::Solid).set_fg_color(FormatColor::Custom(0xFF_F2_CC));
                format.set_border(FormatBorder::Hair).set_border_color(FormatColor::Custom(0xBF_BF_BF));
            }
            Look::ResultMoney | Look::ResultRatio | Look::ResultRate => {
                format.set_bold();
            }
            Look::Text | Look::Factor | Look::Money => {}
        }
        if self == Look::TypedSetting {
            format.set_align(FormatAlignment::Left);
        }
        if let Some(code) = self.number_format() {
            format.set_num_format(code);
        }
        format
    }

    fn number_format(self) -> Option<&'static str> {
        Some(match self {
            Look::Year => "0",
            Look::Factor => "0.0000",
            Look::Money | Look::Total | Look::TypedMoney | Look::ResultMoney => "#,##0;\\-#,##0;0",
            Look::ResultRatio => "0.00",
            Look::ResultRate => "0.00%",
            _ => return None,
        })
    }
}

/// What a cell of a form holds.
#[derive(Clone, Debug, PartialEq)]
enum Entry {
    Blank,
    Text(String),
    Number(f64),
    /// Without its equals sign, and its result.
    Formula(String, f64),
}

/// What a cell says while someone types into it, and what it offers.
#[derive(Clone, Debug, PartialEq)]
struct Prompt {
    title: String,
    message: String,
    /// Cells with texts to choose from; others are questioned, not refused.
    choices: Option<String>,
}

/// A sheet to type into.
#[derive(Clone, Debug, Default)]
pub struct Form {
    name: String,
    cells: BTreeMap<Cell, (Entry, Look)>,
    merges: Vec<Range>,
    widths: Vec<(u32, u32, f64)>,
    heights: BTreeMap<u32, f64>,
    prompts: Vec<(Cell, Prompt)>,
    freeze: Option<Cell>,
    /// Columns repeated on every printed page; the sheet is then one page high.
    repeat: Option<(u32, u32)>,
}

impl Form {
    /// An empty sheet.
    pub fn new(name: &str) -> Self {
        Form { name: name.to_owned(), ..Form::default() }
    }

    /// A cell of this sheet, as a target of a name.
    pub fn at(&self, first: Cell, last: Cell) -> SheetRange {
        SheetRange { sheet: self.name.clone(), range: Range { first, last } }
    }

    /// Writes a text.
    pub fn text(&mut self, row: u32, col: u32, look: Look, text: &str) {
        self.cells.insert(Cell { row, col }, (Entry::Text(legal(text)), look));
    }

    /// Writes a number.
    pub fn number(&mut self, row: u32, col: u32, look: Look, number: f64) {
        self.cells.insert(Cell { row, col }, (Entry::Number(number), look));
    }

    /// Writes a formula with its result.
    pub fn formula(&mut self, row: u32, col: u32, look: Look, text: &str, result: f64) {
        self.cells.insert(Cell { row, col }, (Entry::Formula(text.to_owned(), result), look));
    }

    /// A cell with a look and nothing in it.
    pub fn blank(&mut self, row: u32, col: u32, look: Look) {
        self.cells.insert(Cell { row, col }, (Entry::Blank, look));
    }

    /// Joins the cells of a row from one column to another; the first of them holds what is typed.
    pub fn merge(&mut self, row: u32, col: u32, last: u32) {
        self.merges.push(Range { first: Cell { row, col }, last: Cell { row, col: last } });
    }

    /// Sets the width of columns, in characters.
    pub fn columns(&mut self, first: u32, last: u32, width: f64) {
        self.widths.push((first, last, width));
    }

    /// Sets a row's height in points.
    pub fn height(&mut self, row: u32, points: f64) {
        self.heights.insert(row, points);
    }

    /// Freezes the rows above and the columns before a cell.
    pub fn freeze(&mut self, row: u32, col: u32) {
        self.freeze = Some(Cell { row, col });
    }

    /// Prints the sheet one page high and as wide as it needs, with these columns on every page.
    pub fn print_wide(&mut self, first: u32, last: u32) {
        self.repeat = Some((first, last));
    }

    /// A message beside a cell while it is chosen; `choices` is a range of texts for its drop-down list.
    pub fn prompt(&mut self, row: u32, col: u32, title: &str, message: &str, choices: Option<&str>) {
        let prompt = Prompt {
            title: title.to_owned(),
            message: message.to_owned(),
            choices: choices.map(|range| format!("={range}")),
        };
        self.prompts.push((Cell { row, col }, prompt));
    }
}

/// Writes the sheets with names for the whole workbook; the same forms give the same bytes.
///
/// # Errors
/// The writer refuses a name or a text, or no temporary file can be made.
pub fn form(sheets: &[Form], names: &[(String, SheetRange)]) -> Result<Vec<u8>> {
    let file = tempfile::NamedTempFile::new().map_err(|e| unwritten("no temporary file can be made", &e))?;
    let path = file.path().to_str().ok_or_else(|| failed("the temporary folder's path is not text", &""))?;
    let book = Workbook::new(path).map_err(|e| failed("the workbook cannot be started", &e))?;
    let mut written = Ok(());
    for sheet in sheets {
        written = written.and_then(|()| write_sheet(&book, sheet));
    }
    for (name, at) in names {
        let text =
            format!("={}!{}", crate::references::quote_sheet(&at.sheet), crate::formulas::absolute(at.range));
        written = written.and_then(|()| book.define_name(name, &text));
    }
    let closed = book.close();
    written.map_err(|e| failed("the workbook cannot be written", &e))?;
    closed.map_err(|e| unwritten("the workbook cannot be written", &e))?;
    let bytes = std::fs::read(path).map_err(|e| unwritten("the workbook cannot be read back", &e))?;
    unstamped(bytes)
}

/// A workbook without the time at which it was made: the same bytes every time.
pub(super) fn unstamped(bytes: Vec<u8>) -> Result<Vec<u8>> {
    let package = Package::from_bytes("form.xlsx", bytes)?;
    let replace = BTreeMap::from([(STAMPED.to_owned(), UNSTAMPED.as_bytes().to_vec())]);
    package.write(&Changes { replace, ..Changes::default() })
}

fn write_sheet(book: &Workbook, sheet: &Form) -> Written {
    let mut out = book.add_worksheet(Some(&sheet.name))?;
    let base = Look::Text.format();
    for &(first, last, width) in &sheet.widths {
        out.set_column(first as u16, last as u16, width, Some(&base))?;
    }
    for (&row, &height) in &sheet.heights {
        out.set_row(row, height, None)?;
    }
    for range in &sheet.merges {
        let (a, b) = (range.first, range.last);
        let look = sheet.cells.get(&a).map_or(Look::Text, |(_, look)| *look);
        out.merge_range(a.row, a.col as u16, b.row, b.col as u16, "", Some(&look.format()))?;
    }
    for (cell, (entry, look)) in &sheet.cells {
        let (row, col, format) = (cell.row, cell.col as u16, look.format());
        match entry {
            Entry::Blank => out.write_blank(row, col, Some(&format))?,
            Entry::Text(text) => out.write_string(row, col, &escaped(text), Some(&format))?,
            Entry::Number(x) => out.write_number(row, col, *x, Some(&format))?,
            Entry::Formula(text, result) => {
                out.write_formula_num(row, col, &format!("={text}"), Some(&format), *result)?;
            }
        }
    }
    for (cell, prompt) in &sheet.prompts {
        write_prompt(&mut out, *cell, prompt)?;
    }
    if let Some(cell) = sheet.freeze {
        out.freeze_panes(cell.row, cell.col as u16);
    }
    out.set_paper(PaperType::A4);
    out.set_footer("&L&A&RPage &P of &N")?;
    out.set_landscape();
    match sheet.repeat {
        Some((first, last)) => {
            out.fit_to_pages(0, 1);
            out.repeat_columns(first as u16, last as u16)?;
        }
        None => out.fit_to_pages(1, 0),
    }
    Ok(())
}

fn write_prompt(out: &mut Worksheet<'_>, cell: Cell, prompt: &Prompt) -> Written {
    let kind = match &prompt.choices {
        Some(formula) => DataValidationType::ListFormula { formula: formula.clone(), ignore_blank: true },
        None => DataValidationType::Any,
    };
    let alert = prompt.choices.is_some().then(|| ErrorAlertOptions {
        style: DataValidationErrorType::Warning,
        title: prompt.title.clone(),
        message: "Not one of the usual texts: is it meant?".to_owned(),
    });
    let message = InputMessageOptions { title: prompt.title.clone(), message: prompt.message.clone() };
    out.data_validation_cell(cell.row, cell.col as u16, &DataValidation::new(kind, Some(message), alert))
}
