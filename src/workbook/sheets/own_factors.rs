//! The factors of streams that have a basis of their own, year by year against the second route.

use super::checks::{Maker, absolute_cell, label_live, place};
use super::lines::{Line, Live, col};
use crate::formulas::{nth, refer_cell};

impl Maker<'_> {
    /// The blocks that an option's streams have of their own, in the order of its streams.
    pub(super) fn own_blocks_in(&self, c: usize) -> Vec<usize> {
        let mut all = Vec::new();
        for s in 0..self.input.appraisal.choices[c].streams.len() {
            if let Some(&block) = self.layout.own_block_of.get(&(c, s)).filter(|block| !all.contains(*block))
            {
                all.push(block);
            }
        }
        all
    }

    /// The first and last row of the factors of an option, or of one of its streams.
    pub(super) fn factor_rows(&self, c: usize, stream: Option<usize>) -> (u32, u32) {
        let (section, years) = (self.sections[c], self.layout.block(c).rows);
        let own = stream.and_then(|s| self.layout.own_block_of.get(&(c, s)));
        let first = match own {
            None => section.years,
            Some(block) => {
                let position = self.own_blocks_in(c).iter().position(|k| k == block).unwrap_or(0) as u32;
                section.own_factors + position * years
            }
        };
        (first, first + years - 1)
    }

    /// A line for each year of each basis of streams.
    pub(super) fn own_factor_lines(&self, c: usize, lines: &mut Vec<(u32, Line)>) {
        for block in self.own_blocks_in(c) {
            let streams = 0..self.input.appraisal.choices[c].streams.len();
            let uses = |s: &usize| self.layout.own_block_of.get(&(c, *s)) == Some(&block);
            let Some(s) = streams.clone().find(uses) else { continue };
            for i in 0..self.layout.block(c).rows as usize {
                lines.push((self.factor_rows(c, Some(s)).0 + i as u32, self.own_factor(c, s, i)));
            }
        }
    }

    fn own_factor(&self, c: usize, s: usize, i: usize) -> Line {
        let axis = &self.input.appraisal.axes[self.input.appraisal.choices[c].axis];
        let (value, style) = label_live(&axis.labels[i], self.input.appraisal.date1904);
        let source = refer_cell(self.home, &axis.at.sheet, axis.at.nth(i));
        let factors = self.layout.stream_factors(c, s);
        let cell = nth(factors.range, i);
        let mut line = Line::factor(place(&factors.sheet, cell), Live { formula: source, value }, style);
        let offset = absolute_cell(self.sections[c].years + i as u32, col::OFFSET);
        line.offset = Some(Live::number(offset, self.rebuilt(c).offsets[i]));
        line.rebuilt = self.rebuilt_factor(c, Some(s), i);
        let recorded = self.input.outcomes[c].factors_of(s)[i];
        line.recorded = Live::number(refer_cell(self.home, &factors.sheet, cell), recorded);
        line
    }
}
