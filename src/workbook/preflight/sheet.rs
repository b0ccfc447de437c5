//! A sheet's cells: each in its row, in order, once, in range, and with a value that reads one way only.

use std::collections::BTreeMap;

use quick_xml::events::{BytesStart, Event};

use super::stream::Stream;
use super::value::{Kind, Value};
use crate::package::Package;
use crate::problem::{Place, Problem, Result, WorkbookError};
use crate::references::{Cell, MAX_COLUMNS, MAX_ROWS, Range};
use crate::xml::attribute;

/// The largest number of a shared formula: readers make a list as long. Programs count from 0.
pub const MAX_SHARED: u64 = 1_000_000;
/// Characters of all formulas of a sheet once shared ones are written out; a million cells take 60 million.
pub const MAX_EXPANSION: u64 = 128 << 20;
/// Cells with a bad value that are listed of one sheet.
const MAX_LISTED: usize = 100;

/// Reads a sheet part to its end.
pub(super) fn check_sheet(
    package: &Package,
    part: &str,
    name: &str,
    strings: usize,
    problems: &mut Vec<Problem>,
) -> Result<()> {
    let Some(mut stream) = Stream::open(package, part)? else { return Ok(()) };
    let mut sheet = Sheet {
        part,
        name,
        strings,
        data: 0,
        inside: false,
        row: None,
        column: None,
        value: Value::default(),
        formula: None,
        shared: BTreeMap::new(),
        expansion: 0,
        bad: Vec::new(),
    };
    let mut depth = 0;
    while let Some(event) = stream.next()? {
        match &event {
            Event::Start(tag) => {
                depth += 1;
                sheet.open(depth, tag)?;
            }
            Event::Empty(tag) => {
                sheet.open(depth + 1, tag)?;
                sheet.close(depth + 1)?;
            }
            Event::End(_) => {
                sheet.close(depth)?;
                depth -= 1;
            }
            event if sheet.inside => sheet.content(depth, event)?,
            _ => {}
        }
    }
    debug_assert_eq!(depth, stream.depth());
    problems.append(&mut sheet.bad);
    if sheet.data == 0 {
        let place = Place { sheet: Some(name.to_owned()), ..Place::default() };
        return Err(Problem::error("bad-sheet", place, "it holds no sheetData, the list of its cells").into());
    }
    Ok(())
}

/// Depths of the elements that matter; the root is 1.
const DATA: usize = 2;
const ROW: usize = 3;
const CELL: usize = 4;
const VALUE: usize = 5;

struct Sheet<'a> {
    part: &'a str,
    name: &'a str,
    strings: usize,
    /// How many lists of cells were met.
    data: usize,
    inside: bool,
    /// The last row and, in it, the last column, from 0.
    row: Option<u32>,
    column: Option<u32>,
    value: Value,
    /// The formula being read: its length, and its number if it is shared.
    formula: Option<Formula>,
    shared: BTreeMap<u64, u64>,
    expansion: u64,
    bad: Vec<Problem>,
}

struct Formula {
    length: u64,
    shared: Option<u64>,
    master: bool,
}

impl Sheet<'_> {
    fn here(&self) -> Cell {
        Cell { row: self.row.unwrap_or(0), col: self.column.unwrap_or(0) }
    }

    fn fault_at(&self, cell: Cell, code: &'static str, message: String) -> WorkbookError {
        let place = Place::cells(self.name, Range { first: cell, last: cell });
        Problem::error(code, place, message)
            .hint("open the file in a spreadsheet program and save it again")
            .into()
    }

    fn fault(&self, code: &'static str, message: impl Into<String>) -> WorkbookError {
        self.fault_at(self.here(), code, message.into())
    }

    fn open(&mut self, depth: usize, tag: &BytesStart) -> Result<()> {
        let local = tag.local_name();
        let local = local.as_ref();
        if local == b"sheetData" {
            self.data += 1;
            self.inside = true;
            if self.data > 1 || depth != DATA {
                return Err(
                    self.fault("two-sheet-data", "the sheet holds a second list of cells from here on")
                );
            }
            return Ok(());
        }
        if !self.inside {
            if local == b"dimension" && self.data == 0 {
                let used = attribute(self.part, tag, "ref")?;
                if used.as_deref().and_then(parse_range).is_none() {
                    return Err(
                        self.fault("bad-range", format!("the sheet's used range is given as {used:?}"))
                    );
                }
            }
            return Ok(());
        }
        match (depth, local) {
            (ROW, b"row") => self.open_row(tag),
            (CELL, b"c") => self.open_cell(tag),
            (VALUE, b"v") => self.value.open_v().map_err(|why| self.fault("odd-value", why)),
            (VALUE, b"is") => self.value.open_is().map_err(|why| self.fault("odd-value", why)),
            (VALUE, b"f") => {
                self.value.open_f().map_err(|why| self.fault("odd-value", why))?;
                self.open_formula(tag)
            }
            // Runs and phonetic guides of a text.
            (depth, _) if depth > VALUE && self.value.in_text() => Ok(()),
            _ => {
                let name: String = String::from_utf8_lossy(local).chars().take(40).collect();
                Err(self.fault("odd-cell", format!("<{name}> stands where no such element belongs")))
            }
        }
    }

    fn close(&mut self, depth: usize) -> Result<()> {
        if !self.inside {
            return Ok(());
        }
        match depth {
            DATA => self.inside = false,
            CELL => self.close_cell(),
            VALUE => {
                self.value.close();
                if let Some(formula) = self.formula.take() {
                    self.close_formula(&formula)?;
                }
            }
            _ => {}
        }
        Ok(())
    }

    fn content(&mut self, depth: usize, event: &Event) -> Result<()> {
        if let Some(formula) = &mut self.formula {
            match event {
                Event::Text(text) => formula.length += text.len() as u64,
                Event::GeneralRef(_) => formula.length += 1,
                Event::CData(_) => return Err(self.fault("odd-value", "its formula is wrapped in CDATA")),
                _ => {}
            }
            return Ok(());
        }
        if depth >= VALUE {
            self.value.content(event);
        } else if let Event::Text(text) = event
            && !text.iter().all(u8::is_ascii_whitespace)
        {
            return Err(self.fault("odd-value", "there is text outside the cells' values"));
        } else if matches!(event, Event::CData(_) | Event::GeneralRef(_)) {
            return Err(self.fault("odd-value", "there is text outside the cells' values"));
        }
        Ok(())
    }

    fn open_row(&mut self, tag: &BytesStart) -> Result<()> {
        let next = self.row.map_or(0, |row| row + 1);
        let row = match plain(tag, b"r") {
            None => next,
            Some(text) => {
                let number = digits(&text);
                number
                    .and_then(|n| u32::try_from(n).ok()?.checked_sub(1))
                    .filter(|&n| n < MAX_ROWS)
                    .ok_or_else(|| self.out_of_range(&format!("a row is numbered {}", shown(&text))))?
            }
        };
        if row >= MAX_ROWS {
            return Err(self.out_of_range("a row follows the last one"));
        }
        let first = Cell { row, col: 0 };
        if self.row == Some(row) {
            return Err(self.fault_at(first, "duplicate-row", format!("row {} is there twice", row + 1)));
        }
        if row < next {
            return Err(self.fault_at(
                first,
                "row-order",
                format!("row {} stands after row {next}", row + 1),
            ));
        }
        (self.row, self.column) = (Some(row), None);
        Ok(())
    }

    fn out_of_range(&self, what: &str) -> WorkbookError {
        self.fault("out-of-range", format!("{what}; sheets end at XFD1048576"))
    }

    fn open_cell(&mut self, tag: &BytesStart) -> Result<()> {
        let row = self.row.unwrap_or(0);
        let column = match plain(tag, b"r") {
            None => self.column.map_or(0, |column| column + 1),
            Some(text) => {
                let cell = parse_cell(&text)
                    .ok_or_else(|| self.out_of_range(&format!("a cell is called {}", shown(&text))))?;
                if cell.row != row {
                    return Err(self.fault_at(cell, "cell-row", format!("{cell} stands in row {}", row + 1)));
                }
                cell.col
            }
        };
        if column >= MAX_COLUMNS {
            return Err(self.out_of_range("a cell follows the last one of its row"));
        }
        let cell = Cell { row, col: column };
        if self.column == Some(column) {
            return Err(self.fault_at(cell, "duplicate-cell", format!("{cell} is there twice")));
        }
        if self.column.is_some_and(|last| column < last) {
            let last = self.here();
            return Err(self.fault_at(cell, "cell-order", format!("{cell} stands after {last}")));
        }
        self.column = Some(column);
        let kind = Kind::of(plain(tag, b"t").as_deref())
            .ok_or_else(|| self.fault("odd-cell", "its type of value is not one that the format has"))?;
        self.value.reset(kind);
        Ok(())
    }

    fn close_cell(&mut self) {
        if let Err(message) = self.value.check(self.strings)
            && self.bad.len() < MAX_LISTED
        {
            let cell = self.here();
            let place = Place::cells(self.name, Range { first: cell, last: cell });
            self.bad.push(
                Problem::error("bad-value", place, message)
                    .hint("type the value again in a spreadsheet program and save the workbook"),
            );
        }
    }

    fn open_formula(&mut self, tag: &BytesStart) -> Result<()> {
        let range = plain(tag, b"ref");
        if let Some(range) = &range
            && parse_range(std::str::from_utf8(range).unwrap_or_default()).is_none()
        {
            return Err(self.fault("bad-range", format!("its formula is for the range {}", shown(range))));
        }
        let shared = plain(tag, b"t").as_deref() == Some(b"shared");
        let shared = shared.then(|| plain(tag, b"si"));
        let shared = match shared {
            None => None,
            Some(text) => {
                let number = text.as_deref().and_then(digits).filter(|&number| number < MAX_SHARED);
                Some(number.ok_or_else(|| {
                    let text = text.map_or("missing".to_owned(), |text| shown(&text));
                    self.fault("shared-formula", format!("its shared formula's number is {text}"))
                })?)
            }
        };
        self.formula = Some(Formula { length: 0, shared, master: range.is_some() });
        Ok(())
    }

    fn close_formula(&mut self, formula: &Formula) -> Result<()> {
        self.expansion += formula.length;
        if let Some(number) = formula.shared {
            if formula.master {
                self.shared.insert(number, formula.length);
            } else {
                self.expansion += self.shared.get(&number).copied().unwrap_or(0);
            }
        }
        if self.expansion > MAX_EXPANSION {
            return Err(self.fault(
                "formula-size",
                format!(
                    "the sheet's formulas up to here take more than {} MB written out",
                    MAX_EXPANSION >> 20
                ),
            ));
        }
        Ok(())
    }
}

/// An attribute without a prefix, as it stands: what is asked for holds no escapes in any sound file.
fn plain<'t>(tag: &'t BytesStart, name: &[u8]) -> Option<std::borrow::Cow<'t, [u8]>> {
    tag.attributes().with_checks(false).flatten().find(|a| a.key.as_ref() == name).map(|a| a.value)
}

fn shown(text: &[u8]) -> String {
    format!("{:?}", String::from_utf8_lossy(text).chars().take(40).collect::<String>())
}

fn digits(text: &[u8]) -> Option<u64> {
    let sound = !text.is_empty() && text.len() <= 18 && text.iter().all(u8::is_ascii_digit);
    sound.then(|| text.iter().fold(0, |n, &digit| n * 10 + u64::from(digit - b'0')))
}

/// A cell in A1 notation, without dollar signs, in range.
fn parse_cell(text: &[u8]) -> Option<Cell> {
    let letters = text.iter().take_while(|c| c.is_ascii_alphabetic()).count();
    if letters == 0 || letters > 3 {
        return None;
    }
    let column = text[..letters].iter().fold(0, |n, c| n * 26 + u32::from(c.to_ascii_uppercase() - b'A') + 1);
    let row = u32::try_from(digits(&text[letters..])?).ok()?.checked_sub(1)?;
    (column <= MAX_COLUMNS && row < MAX_ROWS).then_some(Cell { row, col: column - 1 })
}

fn parse_range(text: &str) -> Option<Range> {
    let (first, last) = text.split_once(':').unwrap_or((text, text));
    let (first, last) = (parse_cell(first.as_bytes())?, parse_cell(last.as_bytes())?);
    (first.row <= last.row && first.col <= last.col).then_some(Range { first, last })
}
