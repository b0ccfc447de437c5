//! Formulas and the cells they refer to, and what a change reaches through them.

use std::collections::BTreeMap;

use quick_xml::events::Event;

use super::MAX_REFERENCES;
use super::tree::{Entry, Tree};
use crate::model::CellCursor;
use crate::problem::Result;
use crate::references::{Cell, Range};
use crate::xml::Scanner;

/// Formulas, each with the cells it fills, and the rectangles they refer to.
#[derive(Debug, Default)]
pub(super) struct Graph {
    /// Sheet and cell of each formula.
    formulas: Vec<(u32, Cell)>,
    /// The cells of formulas that fill more than one.
    areas: BTreeMap<u32, Range>,
    /// By sheet, what is referred to on it.
    referred: Vec<Vec<Entry>>,
    /// Formulas that count as dependents whatever is filled.
    always: Vec<u32>,
    references: usize,
    full: bool,
}

impl Graph {
    pub(super) fn new(sheets: usize) -> Graph {
        Graph { referred: vec![Vec::new(); sheets], ..Graph::default() }
    }

    /// A formula and the cells it fills; its number.
    pub(super) fn formula(&mut self, sheet: usize, cell: Cell, area: Option<Range>) -> u32 {
        let node = self.formulas.len() as u32;
        self.formulas.push((sheet as u32, cell));
        if let Some(area) = area.filter(|area| !area.is_single()) {
            self.areas.insert(node, area);
        }
        node
    }

    /// The formula refers to cells.
    pub(super) fn refer(&mut self, node: u32, sheet: usize, range: Range) {
        if self.references >= MAX_REFERENCES {
            self.full = true;
            self.always(node);
            return;
        }
        self.references += 1;
        self.referred[sheet].push(Entry::new(range, node));
    }

    /// The formula counts as a dependent.
    pub(super) fn always(&mut self, node: u32) {
        if self.always.last() != Some(&node) {
            self.always.push(node);
        }
    }

    /// Whether references were left out for their number.
    pub(super) fn is_full(&self) -> bool {
        self.full
    }

    /// Sheet and cells of every formula that a change reaches, in no particular order.
    pub(super) fn reached_from(self, changed: &[(usize, Range)]) -> Vec<(usize, Range)> {
        let Graph { formulas, areas, referred, always, .. } = self;
        let mut trees: Vec<Tree> = referred.into_iter().map(Tree::new).collect();
        let mut reached = vec![false; formulas.len()];
        let mut found = Vec::new();
        let mut open = changed.to_vec();
        let mut reach = |node: u32, open: &mut Vec<(usize, Range)>| {
            if !std::mem::replace(&mut reached[node as usize], true) {
                let (sheet, cell) = formulas[node as usize];
                let area = areas.get(&node).copied().unwrap_or(Range::cell(cell));
                found.push((sheet as usize, area));
                open.push((sheet as usize, area));
            }
        };
        for node in always {
            reach(node, &mut open);
        }
        while let Some((sheet, range)) = open.pop() {
            trees[sheet].take(&range, &mut |node| reach(node, &mut open));
        }
        found
    }
}

/// The cells of a sheet part that lie inside any of the ranges.
pub(super) fn cells_inside(part: &str, xml: &[u8], ranges: &[Range]) -> Result<Vec<Cell>> {
    let tree = Tree::new(ranges.iter().map(|range| Entry::new(*range, 0)).collect());
    let mut cells = Vec::new();
    let mut scanner = Scanner::new(part, xml)?;
    let mut cursor = CellCursor::default();
    let mut in_data = false;
    while let Some(token) = scanner.next()? {
        match &token.event {
            Event::Start(tag) | Event::Empty(tag) => {
                let opened = matches!(token.event, Event::Start(_));
                match (in_data, scanner.depth() + usize::from(!opened), tag.local_name().as_ref()) {
                    (false, 2, b"sheetData") => in_data = opened,
                    (true, 3, b"row") => _ = cursor.row(part, tag)?,
                    (true, 4, b"c") => {
                        let cell = cursor.cell(part, tag)?;
                        if tree.holds(cell) {
                            cells.push(cell);
                        }
                    }
                    _ => {}
                }
            }
            Event::End(_) if scanner.depth() == 1 => in_data = false,
            _ => {}
        }
    }
    Ok(cells)
}
