//! The cells that a formula gives now: what a name with OFFSET, INDEX and the like stands for, to be named instead.
//!
//! Evaluated are OFFSET, INDEX, CHOOSE, INDIRECT of a text, and for their arguments numbers, cells, `+ - * /`, COUNT, COUNTA,
//! ROWS, COLUMNS, MATCH, MIN and MAX, on the stored values. Anything else gives nothing: an address is only printed
//! where it is certain.

use crate::reading::Value;
use crate::references::{Cell, MAX_COLUMNS, MAX_ROWS, NameTarget, Range, SheetRange, Token, tokens};

use super::Context;

/// How far names inside names, and brackets inside brackets, are followed.
const MAX_DEPTH: usize = 32;

/// What a part of a formula gives.
#[derive(Clone, Debug, PartialEq)]
enum Part {
    Cells(SheetRange),
    Number(f64),
    Text(String),
    /// An argument left out.
    Nothing,
}

/// The cells that a formula gives with the values that the workbook holds; none where that is not certain.
///
/// **Arguments**: the text of a defined name, without an equals sign.
pub(super) fn cells_now(context: &mut Context, formula: &str) -> Option<SheetRange> {
    match evaluated(context, formula, 0)? {
        Part::Cells(at) => Some(at),
        _ => None,
    }
}

fn evaluated(context: &mut Context, formula: &str, depth: usize) -> Option<Part> {
    if depth > MAX_DEPTH {
        return None;
    }
    let all: Vec<Token<'_>> =
        tokens(formula).into_iter().map(|t| t.token).filter(|token| *token != Token::Space).collect();
    let mut reader = Reader { context, rest: &all, depth };
    let part = reader.sum()?;
    reader.rest.is_empty().then_some(part)
}

struct Reader<'r, 'c, 't> {
    context: &'r mut Context<'c>,
    rest: &'t [Token<'t>],
    depth: usize,
}

impl Reader<'_, '_, '_> {
    fn taken(&mut self, operator: &str) -> bool {
        let found = matches!(self.rest.first(), Some(Token::Operator(found)) if *found == operator);
        if found {
            self.rest = &self.rest[1..];
        }
        found
    }

    fn sum(&mut self) -> Option<Part> {
        let mut part = self.product()?;
        loop {
            let sign = if self.taken("+") {
                1.0
            } else if self.taken("-") {
                -1.0
            } else {
                return Some(part);
            };
            let next = self.product()?;
            part = Part::Number(self.number(part)? + sign * self.number(next)?);
        }
    }

    fn product(&mut self) -> Option<Part> {
        let mut part = self.range()?;
        loop {
            if self.taken("*") {
                let next = self.range()?;
                part = Part::Number(self.number(part)? * self.number(next)?);
            } else if self.taken("/") {
                let next = self.range()?;
                let by = self.number(next)?;
                part = Part::Number(self.number(part)? / by);
            } else {
                return Some(part);
            }
        }
    }

    /// Cells, or the rectangle between two of them: `INDEX(a,1):INDEX(a,9)`.
    fn range(&mut self) -> Option<Part> {
        let mut part = self.single()?;
        while self.taken(":") {
            let (Part::Cells(from), Part::Cells(to)) = (part, self.single()?) else { return None };
            if from.sheet != to.sheet {
                return None;
            }
            part = Part::Cells(SheetRange { range: from.range.hull(&to.range), sheet: from.sheet });
        }
        Some(part)
    }

    fn single(&mut self) -> Option<Part> {
        let (token, rest) = self.rest.split_first()?;
        self.rest = rest;
        self.depth += 1;
        let part = if self.depth > MAX_DEPTH { None } else { self.operand(token) };
        self.depth -= 1;
        part
    }

    fn operand(&mut self, token: &Token<'_>) -> Option<Part> {
        match token {
            Token::Number(text) => text.parse().ok().map(Part::Number),
            Token::Text(text) => Some(Part::Text(text[1..text.len() - 1].replace("\"\"", "\""))),
            Token::Operator("-") => {
                let part = self.single()?;
                self.number(part).map(|number| Part::Number(-number))
            }
            Token::Operator("(") => {
                let part = self.sum()?;
                self.taken(")").then_some(part)
            }
            Token::Ref(reference) => {
                // Without a sheet, or without `$`, the cells depend on the cell that uses the name.
                let sheets = reference.sheet.as_ref().filter(|s| !s.is_external() && s.last.is_none())?;
                let found = reference.is_absolute().then(|| self.sheet(&sheets.first)).flatten()?;
                Some(Part::Cells(SheetRange { sheet: found, range: reference.range() }))
            }
            Token::TableRef(part) => {
                let table = self.context.book.find_table(part.table?)?;
                let sheet = self.context.book.sheets[table.sheet].name.clone();
                table.cells(part.part, None).map(|range| Part::Cells(SheetRange { sheet, range }))
            }
            Token::Name(sheets, word) => {
                let book = self.context.book;
                let scope = match sheets {
                    Some(sheets) if !sheets.first.is_empty() => Some(book.sheet_index(&sheets.first)?),
                    _ => None,
                };
                match book.resolve(book.find_name(word, scope)?) {
                    NameTarget::Cells(at) => Some(Part::Cells(at)),
                    NameTarget::Formula(text) => evaluated(self.context, &text, self.depth + 1),
                    NameTarget::Constant(crate::references::Constant::Number(n)) => Some(Part::Number(n)),
                    _ => None,
                }
            }
            Token::Function(name) => {
                let arguments = self.arguments()?;
                self.call(&name.to_ascii_uppercase(), &arguments)
            }
            _ => None,
        }
    }

    fn sheet(&self, name: &str) -> Option<String> {
        self.context.book.sheet_index(name).map(|index| self.context.book.sheets[index].name.clone())
    }

    fn arguments(&mut self) -> Option<Vec<Part>> {
        if !self.taken("(") {
            return None;
        }
        let mut arguments = Vec::new();
        loop {
            let empty = matches!(self.rest.first(), Some(Token::Operator("," | ")")));
            arguments.push(if empty { Part::Nothing } else { self.sum()? });
            if self.taken(")") {
                return Some(arguments);
            }
            if !self.taken(",") {
                return None;
            }
        }
    }

    fn call(&mut self, name: &str, arguments: &[Part]) -> Option<Part> {
        match (name, arguments) {
            ("OFFSET", [Part::Cells(from), rest @ ..]) if (2..=4).contains(&rest.len()) => {
                let mut whole = |i: usize, otherwise: i64| match rest.get(i) {
                    None | Some(Part::Nothing) => Some(otherwise),
                    Some(part) => self.whole(part.clone()),
                };
                let (down, right) = (whole(0, 0)?, whole(1, 0)?);
                let rows = whole(2, i64::from(from.range.rows()))?;
                let cols = whole(3, i64::from(from.range.cols()))?;
                moved(from, down, right, rows, cols).map(Part::Cells)
            }
            ("INDEX", [Part::Cells(from), rest @ ..]) if (1..=2).contains(&rest.len()) => {
                let places = rest.iter().map(|part| self.whole_or_zero(part)).collect::<Option<Vec<_>>>()?;
                let one_row = from.range.rows() == 1 && from.range.cols() > 1;
                let (row, col) = match places[..] {
                    [place] if one_row => (1, place),
                    [row] if from.range.cols() == 1 => (row, 1),
                    [row, col] => (row, col),
                    _ => return None,
                };
                let Range { first, last } = from.range;
                let (top, bottom) = chosen(first.row, last.row, row)?;
                let (left, right) = chosen(first.col, last.col, col)?;
                let range = Range { first: Cell::new(top, left), last: Cell::new(bottom, right) };
                Some(Part::Cells(SheetRange { sheet: from.sheet.clone(), range }))
            }
            ("CHOOSE", [which, rest @ ..]) => {
                let which = self.whole(which.clone())?;
                rest.get(usize::try_from(which.checked_sub(1)?).ok()?).cloned()
            }
            ("INDIRECT", [Part::Text(text)]) => {
                let at = text.parse::<SheetRange>().ok()?;
                let sheet = self.sheet(&at.sheet)?;
                Some(Part::Cells(SheetRange { sheet, range: at.range }))
            }
            ("ROWS", [Part::Cells(at)]) => Some(Part::Number(f64::from(at.range.rows()))),
            ("COLUMNS", [Part::Cells(at)]) => Some(Part::Number(f64::from(at.range.cols()))),
            ("COUNT" | "COUNTA" | "MIN" | "MAX", parts) => {
                let mut values = Vec::new();
                for part in parts {
                    match part {
                        Part::Cells(at) => {
                            values.extend(self.values(at)?.into_iter().map(|(_, value)| value));
                        }
                        Part::Number(number) => values.push(Value::Number(*number)),
                        _ => return None,
                    }
                }
                let numbers: Vec<f64> = values.iter().filter_map(number_in).collect();
                Some(Part::Number(match name {
                    "COUNT" => numbers.len() as f64,
                    "COUNTA" => values.len() as f64,
                    "MIN" => numbers.into_iter().reduce(f64::min).unwrap_or(0.0),
                    _ => numbers.into_iter().reduce(f64::max).unwrap_or(0.0),
                }))
            }
            ("MATCH", [wanted, Part::Cells(at), rest @ ..]) if rest.len() <= 1 => {
                let kind = match rest.first() {
                    None => 1,
                    Some(part) => self.whole_or_zero(part)?,
                };
                self.place_of(wanted.clone(), at, kind).map(Part::Number)
            }
            _ => None,
        }
    }

    /// Where in a row or column a value stands, from 1: exactly, or the last number not above it.
    fn place_of(&mut self, wanted: Part, at: &SheetRange, kind: i64) -> Option<f64> {
        if at.range.rows() > 1 && at.range.cols() > 1 {
            return None;
        }
        let values = self.values(at)?;
        let wanted = match wanted {
            Part::Text(text) => Value::Text(text),
            Part::Cells(cell) if cell.range.is_single() => self.values(&cell)?.pop()?.1,
            part => Value::Number(self.number(part)?),
        };
        let fits = |value: &Value| match (&wanted, value) {
            (Value::Text(a), Value::Text(b)) => kind == 0 && a.to_lowercase() == b.to_lowercase(),
            (a, b) => match (number_in(a), number_in(b)) {
                (Some(a), Some(b)) => {
                    if kind == 0 {
                        a == b
                    } else {
                        b <= a
                    }
                }
                _ => false,
            },
        };
        let mut found = values.iter().filter(|(_, value)| fits(value));
        let cell = match kind {
            0 => found.next()?.0,
            1 => found.next_back()?.0,
            _ => return None,
        };
        let first = at.range.first;
        Some(f64::from(cell.row - first.row + cell.col - first.col + 1))
    }

    /// A number, that of one cell too; a blank cell counts 0.
    fn number(&mut self, part: Part) -> Option<f64> {
        match part {
            Part::Number(number) => Some(number),
            Part::Cells(at) if at.range.is_single() => match self.values(&at)?.pop() {
                Some((_, value)) => number_in(&value),
                None => Some(0.0),
            },
            _ => None,
        }
    }

    /// A whole number, as places and sizes are cut to one.
    fn whole(&mut self, part: Part) -> Option<i64> {
        let number = self.number(part)?.trunc();
        (number.abs() <= f64::from(MAX_ROWS)).then_some(number as i64)
    }

    fn whole_or_zero(&mut self, part: &Part) -> Option<i64> {
        if *part == Part::Nothing { Some(0) } else { self.whole(part.clone()) }
    }

    /// What is stored in a range, whole columns too, in order; blanks are left out.
    fn values(&mut self, at: &SheetRange) -> Option<Vec<(Cell, Value)>> {
        let mut values = Vec::new();
        let see = |cell: Cell, value: Value| {
            if at.range.contains(cell) {
                values.push((cell, value));
            }
        };
        self.context.sheets.visit(&at.sheet, see).ok()?;
        values.sort_by_key(|(cell, _)| *cell);
        Some(values)
    }
}

fn number_in(value: &Value) -> Option<f64> {
    match value {
        Value::Number(number) | Value::Date(number) => Some(*number),
        _ => None,
    }
}

/// The rows (or columns) that INDEX means by a place: all of them by 0.
fn chosen(first: u32, last: u32, place: i64) -> Option<(u32, u32)> {
    if place == 0 {
        return Some((first, last));
    }
    let at = i64::from(first) + place - 1;
    (place > 0 && at <= i64::from(last)).then_some((at as u32, at as u32))
}

/// A rectangle moved and resized; a negative size reaches back, and 0 is an error in spreadsheets.
fn moved(from: &SheetRange, down: i64, right: i64, rows: i64, cols: i64) -> Option<SheetRange> {
    let span = |first: u32, by: i64, size: i64, limit: u32| {
        let start = i64::from(first) + by;
        let end = start + size - size.signum();
        let (start, end) = (start.min(end), start.max(end));
        let inside = size != 0 && start >= 0 && end < i64::from(limit);
        inside.then_some((start as u32, end as u32))
    };
    let (top, bottom) = span(from.range.first.row, down, rows, MAX_ROWS)?;
    let (left, right) = span(from.range.first.col, right, cols, MAX_COLUMNS)?;
    let range = Range { first: Cell::new(top, left), last: Cell::new(bottom, right) };
    Some(SheetRange { sheet: from.sheet.clone(), range })
}
