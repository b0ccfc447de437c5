//! Rectangles of a sheet in a tree of bounding boxes, for the question which of them a change touches.

use crate::references::{Cell, Range};

/// A rectangle that a formula refers to, and the formula.
#[derive(Clone, Copy, Debug)]
pub(super) struct Entry {
    first_row: u32,
    last_row: u32,
    // Columns end at 16,384, so half the size will do; there are millions of these.
    first_col: u16,
    last_col: u16,
    /// The formula's number.
    pub(super) node: u32,
}

impl Entry {
    pub(super) fn new(range: Range, node: u32) -> Entry {
        Entry {
            first_row: range.first.row,
            last_row: range.last.row,
            first_col: range.first.col as u16,
            last_col: range.last.col as u16,
            node,
        }
    }

    fn range(&self) -> Range {
        Range {
            first: Cell::new(self.first_row, u32::from(self.first_col)),
            last: Cell::new(self.last_row, u32::from(self.last_col)),
        }
    }

    /// Twice the middle, by rows and by columns.
    fn middle(&self) -> (u32, u32) {
        (self.first_row + self.last_row, u32::from(self.first_col) + u32::from(self.last_col))
    }
}

/// Entries in one leaf.
const LEAF: usize = 8;

/// A box around the entries from `start` that are still there.
#[derive(Clone, Copy, Debug)]
struct Bounds {
    around: Range,
    start: u32,
    /// Entries left; for a leaf they are the first ones from `start`.
    left: u32,
    /// The second child; the first one follows its parent. None for a leaf.
    second: Option<u32>,
}

/// Rectangles that can be found by what touches them, and taken out once found.
///
/// Entries are cut in half at the median of their middles, along rows or columns, whichever spreads
/// further. As each entry is found once, a whole search costs little more than sorting them.
#[derive(Debug, Default)]
pub(super) struct Tree {
    entries: Vec<Entry>,
    boxes: Vec<Bounds>,
}

impl Tree {
    /// Builds the tree.
    pub(super) fn new(entries: Vec<Entry>) -> Tree {
        let mut tree = Tree { boxes: Vec::with_capacity(entries.len() / LEAF * 4 + 1), entries };
        if !tree.entries.is_empty() {
            tree.build(0, tree.entries.len());
        }
        tree
    }

    fn build(&mut self, start: usize, end: usize) {
        let own = self.boxes.len();
        let entries = &mut self.entries[start..end];
        let around = hull(entries.iter().map(Entry::range)).unwrap_or(Range::cell(Cell::new(0, 0)));
        let left = entries.len() as u32;
        self.boxes.push(Bounds { around, start: start as u32, left, second: None });
        if entries.len() <= LEAF {
            return;
        }
        let spread = |values: &dyn Fn(&Entry) -> u32| {
            let (mut low, mut high) = (u32::MAX, 0);
            for entry in entries.iter() {
                let value = values(entry);
                (low, high) = (low.min(value), high.max(value));
            }
            high - low
        };
        let by_rows = spread(&|entry| entry.middle().0) >= spread(&|entry| entry.middle().1);
        let half = entries.len() / 2;
        entries.select_nth_unstable_by_key(half, |entry| {
            let (row, col) = entry.middle();
            if by_rows { (row, col) } else { (col, row) }
        });
        self.build(start, start + half);
        self.boxes[own].second = Some(self.boxes.len() as u32);
        self.build(start + half, end);
    }

    /// Calls `found` with the formula of each rectangle that touches the range, and takes it out.
    pub(super) fn take(&mut self, range: &Range, found: &mut impl FnMut(u32)) {
        if !self.boxes.is_empty() {
            self.take_below(0, range, found);
        }
    }

    fn take_below(&mut self, at: usize, range: &Range, found: &mut impl FnMut(u32)) {
        let Bounds { around, start, left, second } = self.boxes[at];
        if left == 0 || !around.intersects(range) {
            return;
        }
        if let Some(second) = second {
            let children = [at + 1, second as usize];
            for child in children {
                self.take_below(child, range, found);
            }
            let now = children.map(|child| self.boxes[child]);
            let still = now.iter().filter(|child| child.left > 0).map(|child| child.around);
            self.boxes[at].around = hull(still).unwrap_or(around);
            self.boxes[at].left = now[0].left + now[1].left;
            return;
        }
        let start = start as usize;
        let mut end = start + left as usize;
        let mut i = start;
        while i < end {
            if self.entries[i].range().intersects(range) {
                found(self.entries[i].node);
                end -= 1;
                self.entries.swap(i, end);
            } else {
                i += 1;
            }
        }
        if end < start + left as usize {
            self.boxes[at].left = (end - start) as u32;
            self.boxes[at].around = hull(self.entries[start..end].iter().map(Entry::range)).unwrap_or(around);
        }
    }

    /// Whether any rectangle holds the cell.
    pub(super) fn holds(&self, cell: Cell) -> bool {
        let mut open = if self.boxes.is_empty() { Vec::new() } else { vec![0] };
        while let Some(at) = open.pop() {
            let Bounds { around, start, left, second } = self.boxes[at];
            if !around.contains(cell) {
                continue;
            }
            match second {
                Some(second) => open.extend([at + 1, second as usize]),
                None => {
                    let leaf = &self.entries[start as usize..(start + left) as usize];
                    if leaf.iter().any(|entry| entry.range().contains(cell)) {
                        return true;
                    }
                }
            }
        }
        false
    }
}

fn hull(ranges: impl Iterator<Item = Range>) -> Option<Range> {
    ranges.reduce(|all, one| all.hull(&one))
}

#[cfg(test)]
mod tests {
    use super::*;

    /// A small generator of numbers (xorshift), so that the rectangles are the same each time.
    fn numbers(mut state: u64) -> impl FnMut(u32) -> u32 {
        move |below| {
            state ^= state << 13;
            state ^= state >> 7;
            state ^= state << 17;
            (state % u64::from(below)) as u32
        }
    }

    #[test]
    fn finds_what_a_plain_search_finds_and_each_once() {
        let mut next = numbers(88_172_645_463_325_252);
        let mut rectangle = move |size: u32| {
            let first = Cell::new(next(200), next(30));
            Range { first, last: Cell::new(first.row + next(size), first.col + next(size)) }
        };
        let all: Vec<Range> = (0..2000).map(|i| rectangle(if i % 7 == 0 { 90 } else { 3 })).collect();
        let mut tree = Tree::new(all.iter().enumerate().map(|(i, r)| Entry::new(*r, i as u32)).collect());
        let mut left: Vec<u32> = (0..2000).collect();
        for _ in 0..300 {
            let query = rectangle(4);
            let cell = query.first;
            assert_eq!(tree.holds(cell), left.iter().any(|i| all[*i as usize].contains(cell)));
            let mut found = Vec::new();
            tree.take(&query, &mut |i| found.push(i));
            found.sort_unstable();
            let (hit, rest): (Vec<u32>, _) = left.iter().partition(|i| all[**i as usize].intersects(&query));
            assert_eq!(found, hit);
            left = rest;
        }
        assert!(left.len() < 2000);
    }
}
