//! What each formula of a workbook refers to, read from the sheet parts one after another.

use std::collections::{HashMap, HashSet};
use std::rc::Rc;

use quick_xml::events::Event;

use super::graph::Graph;
use crate::model::{CellCursor, FormulaKind, FormulaTag, Workbook, text_of};
use crate::problem::Result;
use crate::references::{Cell, Corner, Range, Sheets, Token, Tokens};
use crate::xml::{FORMULA_MARKS, Scanner};

/// Functions whose cells or results the formula's text does not settle.
const UNSETTLED: [&str; 9] =
    ["INDIRECT", "OFFSET", "NOW", "TODAY", "RAND", "RANDBETWEEN", "RANDARRAY", "CELL", "INFO"];

/// How far names inside names are followed.
const MAX_NAMES_DEEP: usize = 16;

/// The most references of one formula with its names: each of several names can stand for many more.
const MAX_NEEDS: usize = 20_000;

/// What a formula or a name refers to.
#[derive(Debug, Default)]
struct Needs {
    cells: Vec<Need>,
    /// Tables, by place, and the part of them; none for the table that holds the formula.
    tables: Vec<(Option<usize>, String)>,
    /// It cannot be known.
    unsettled: bool,
}

/// Cells on one or more sheets.
#[derive(Clone, Copy, Debug)]
struct Need {
    first_sheet: usize,
    last_sheet: usize,
    from: Corner,
    to: Corner,
    /// Written in a name, so relative to the first cell of a sheet, not to the formula's.
    in_name: bool,
}

/// Reads formulas into a graph.
pub(super) struct Reader<'a> {
    book: &'a Workbook,
    sheets: HashMap<String, usize>,
    tables: HashMap<String, usize>,
    /// By sheet and word as written, what names stand for there.
    names: HashMap<usize, HashMap<String, Rc<Needs>>>,
    /// Every defined name, in lower case.
    named: HashSet<String>,
    /// Whether a word called as a function is a defined name, not the program's own.
    functions: HashMap<String, bool>,
    graph: Graph,
}

/// A formula element under way.
struct Open {
    tag: FormulaTag,
    cell: Cell,
    text: String,
}

/// The groups of shared formulas of one sheet.
#[derive(Default)]
struct Groups {
    masters: HashMap<u32, (Cell, Rc<Needs>)>,
    /// Dependents met before their master.
    waiting: Vec<(u32, u32, Cell)>,
}

impl<'a> Reader<'a> {
    pub(super) fn new(book: &'a Workbook) -> Reader<'a> {
        let by_name =
            |names: Vec<&String>| names.iter().enumerate().map(|(i, n)| (n.to_lowercase(), i)).collect();
        Reader {
            book,
            sheets: by_name(book.sheets.iter().map(|sheet| &sheet.name).collect()),
            tables: by_name(book.tables.iter().map(|table| &table.name).collect()),
            names: HashMap::new(),
            named: book.names.iter().map(|name| name.name.to_lowercase()).collect(),
            functions: HashMap::new(),
            graph: Graph::new(book.sheets.len()),
        }
    }

    pub(super) fn finish(self) -> Graph {
        self.graph
    }

    /// Reads the formulas of a sheet; its values are passed over.
    pub(super) fn read_sheet(&mut self, sheet: usize, part: &str, xml: &[u8]) -> Result<()> {
        let mut scanner = Scanner::new(part, xml)?;
        let mut cursor = CellCursor::default();
        let mut cell = Cell::new(0, 0);
        let mut in_data = false;
        let mut open: Option<Open> = None;
        let mut groups = Groups::default();
        while let Some(token) = scanner.next()? {
            match &token.event {
                Event::Start(tag) | Event::Empty(tag) => {
                    let opened = matches!(token.event, Event::Start(_));
                    match (in_data, scanner.depth() + usize::from(!opened), tag.local_name().as_ref()) {
                        (false, 2, b"sheetData") => in_data = opened,
                        (true, 3, b"row") => {
                            cursor.row(part, tag)?;
                            if opened {
                                scanner.pass_over(tag.name().as_ref(), FORMULA_MARKS);
                            }
                        }
                        (true, 4, b"c") => cell = cursor.cell(part, tag)?,
                        (true, 5, b"f") => {
                            let found = Open { tag: FormulaTag::read(part, tag)?, cell, text: String::new() };
                            if opened {
                                open = Some(found);
                            } else {
                                self.formula(sheet, found, &mut groups);
                            }
                        }
                        _ => {}
                    }
                }
                Event::End(_) => {
                    if scanner.depth() == 4
                        && let Some(done) = open.take()
                    {
                        self.formula(sheet, done, &mut groups);
                    }
                    in_data &= scanner.depth() > 1;
                }
                event => {
                    if let Some(open) = &mut open {
                        text_of(part, event, &mut open.text)?;
                    }
                }
            }
        }
        for (index, node, cell) in groups.waiting {
            match groups.masters.get(&index) {
                Some((master, needs)) => self.refer(node, sheet, cell, *master, needs),
                None => self.graph.always(node),
            }
        }
        Ok(())
    }

    fn formula(&mut self, sheet: usize, Open { tag, cell, text }: Open, groups: &mut Groups) {
        let area = match tag.kind {
            FormulaKind::Array | FormulaKind::DataTable(..) => tag.range,
            FormulaKind::Normal | FormulaKind::Shared(_) => None,
        };
        let node = self.graph.formula(sheet, cell, area);
        match tag.kind {
            FormulaKind::DataTable(a, b) => {
                for input in [a, b].into_iter().flatten() {
                    self.graph.refer(node, sheet, Range::cell(input));
                }
                // The values to be tried and the formulas stand above it and to its left.
                let area = area.unwrap_or(Range::cell(cell));
                let first = Cell::new(area.first.row.saturating_sub(1), area.first.col.saturating_sub(1));
                self.graph.refer(node, sheet, Range { first, last: area.last });
            }
            FormulaKind::Shared(index) if text.trim().is_empty() => match groups.masters.get(&index) {
                Some((master, needs)) => self.refer(node, sheet, cell, *master, &Rc::clone(needs)),
                None => groups.waiting.push((index, node, cell)),
            },
            kind => {
                let needs = Rc::new(self.needs(&text, sheet, false, 0));
                self.refer(node, sheet, cell, cell, &needs);
                if let FormulaKind::Shared(index) = kind
                    && (tag.range.is_some() || !groups.masters.contains_key(&index))
                {
                    groups.masters.insert(index, (cell, needs));
                }
            }
        }
    }

    /// Puts a formula's references into the graph; it stands in `cell` and was written for `master`.
    fn refer(&mut self, node: u32, sheet: usize, cell: Cell, master: Cell, needs: &Needs) {
        if needs.unsettled || self.graph.is_full() {
            self.graph.always(node);
            return;
        }
        let moves = |to: u32, from: u32| i64::from(to) - i64::from(from);
        for need in &needs.cells {
            let (rows, cols) = if need.in_name {
                (i64::from(cell.row), i64::from(cell.col))
            } else {
                (moves(cell.row, master.row), moves(cell.col, master.col))
            };
            let (from, to) = (need.from.moved(rows, cols), need.to.moved(rows, cols));
            let range = Range::new(Cell::new(from.row, from.col), Cell::new(to.row, to.col));
            for referred in need.first_sheet..=need.last_sheet {
                self.graph.refer(node, referred, range);
            }
        }
        for (table, part) in &needs.tables {
            let table = match table {
                Some(table) => Some(&self.book.tables[*table]),
                None => self.book.tables.iter().find(|t| t.sheet == sheet && t.range.contains(cell)),
            };
            match table {
                Some(table) => {
                    let at = (table.sheet == sheet).then_some(cell);
                    self.graph.refer(node, table.sheet, table.cells(part, at).unwrap_or(table.range));
                }
                None => self.graph.always(node),
            }
        }
    }

    /// What a formula on a sheet, or a name used there, refers to.
    fn needs(&mut self, text: &str, sheet: usize, in_name: bool, depth: usize) -> Needs {
        let mut needs = Needs::default();
        for spanned in Tokens::new(text) {
            match spanned.token {
                Token::Ref(reference) => {
                    let sheets = match &reference.sheet {
                        None if in_name => None,
                        None => Some((sheet, sheet)),
                        Some(sheets) if sheets.is_external() => continue,
                        Some(sheets) => self.sheets_of(sheets),
                    };
                    match sheets {
                        Some((first_sheet, last_sheet)) => needs.cells.push(Need {
                            first_sheet,
                            last_sheet,
                            from: reference.from,
                            to: reference.to,
                            in_name,
                        }),
                        None => needs.unsettled = true,
                    }
                }
                Token::Name(sheets, word) => {
                    let scope = match &sheets {
                        Some(sheets) if sheets.is_external() => continue,
                        Some(sheets) if !sheets.first.is_empty() => {
                            self.sheets_of(sheets).map(|(first, _)| first)
                        }
                        _ => Some(sheet),
                    };
                    match scope {
                        Some(scope) => needs.add(&self.name(word, scope, depth)),
                        None => needs.unsettled = true,
                    }
                }
                Token::Function(word) => {
                    let plain = word.trim_start_matches("_xlfn.").trim_start_matches("_xlws.");
                    needs.unsettled |= UNSETTLED.iter().any(|name| name.eq_ignore_ascii_case(plain));
                    if self.is_named(word) {
                        needs.add(&self.name(word, sheet, depth));
                    }
                }
                Token::TableRef(part) => match part.table.map(|name| self.tables.get(&name.to_lowercase())) {
                    Some(None) => needs.unsettled = true,
                    Some(Some(table)) => needs.tables.push((Some(*table), part.part.to_owned())),
                    None => needs.tables.push((None, part.part.to_owned())),
                },
                // A range between anything but two plain cells, and what is no formula at all.
                Token::Operator(":") | Token::Other(_) => needs.unsettled = true,
                _ => {}
            }
            if needs.unsettled {
                break;
            }
        }
        needs
    }

    fn is_named(&mut self, word: &str) -> bool {
        if let Some(known) = self.functions.get(word) {
            return *known;
        }
        let named = self.named.contains(&word.to_lowercase());
        self.functions.insert(word.to_owned(), named);
        named
    }

    /// The first and last of the sheets meant.
    fn sheets_of(&self, sheets: &Sheets<'_>) -> Option<(usize, usize)> {
        let first = *self.sheets.get(&sheets.first.to_lowercase())?;
        let last = match &sheets.last {
            Some(last) => *self.sheets.get(&last.to_lowercase())?,
            None => first,
        };
        Some((first.min(last), first.max(last)))
    }

    /// What a name stands for when a sheet uses it.
    fn name(&mut self, word: &str, sheet: usize, depth: usize) -> Rc<Needs> {
        if let Some(known) = self.names.get(&sheet).and_then(|names| names.get(word)) {
            return Rc::clone(known);
        }
        let unsettled = Needs { unsettled: true, ..Needs::default() };
        let book = self.book;
        let needs = if word.starts_with("_xlpm.") {
            // A parameter of LET or LAMBDA: what it stands for is written beside it.
            Needs::default()
        } else if let Some(name) = book.find_name(word, Some(sheet)) {
            if depth < MAX_NAMES_DEEP { self.needs(&name.text, sheet, true, depth + 1) } else { unsettled }
        } else if let Some(table) = self.tables.get(&word.to_lowercase()) {
            Needs { tables: vec![(Some(*table), String::new())], ..Needs::default() }
        } else {
            unsettled
        };
        let needs = Rc::new(needs);
        self.names.entry(sheet).or_default().insert(word.to_owned(), Rc::clone(&needs));
        needs
    }
}

impl Needs {
    fn add(&mut self, other: &Needs) {
        self.cells.extend_from_slice(&other.cells);
        self.tables.extend_from_slice(&other.tables);
        self.unsettled |= other.unsettled || self.cells.len() + self.tables.len() > MAX_NEEDS;
    }
}
