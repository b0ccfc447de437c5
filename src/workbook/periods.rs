//! Columns that are not a year each: where every period begins, from the role `span`, years per column.
//!
//! **Formula**: with lengths s_1, ..., s_n in years, period i begins S_i = A + s_1 + ... + s_(i-1) years after the start of
//! the base period, and a flow in it stands at offset
//!
//! t_i = S_i + p s_i - q u,
//!
//! p and q the positions of flows and base (start 0, middle 1/2, end 1), u the length of the base period. A and u follow
//! from what the columns are labelled with:
//!
//! | labels | A | u |
//! |---|---|---|
//! | calendar or financial years, in which periods begin | first year - base year | 1: the base is a year |
//! | numbers of years, in which periods begin | the first, counted from the base year 0 | 1: the base is a year |
//! | numbers of columns, one by one from 0 or 1 | 0 or s_1: period 0 is the base | s_1 |
//!
//! With one year per column this is the rule of years, (year - base year) + p - q, and likewise the base period itself is
//! undiscounted under `flows end, base end`. A month's flow at the end of month n, base at the end of month 0, has
//! t = n/12 and under a flat yearly rate the factor (1 + r)^(-n/12); five years from the base year on, at `flows middle, base
//! start`, stand at t = 2.5.
//!
//! **Conventions**: the rate stays a yearly one, whatever the length of a period. Prices are those at the middle of a
//! period, and the price base those at the middle of the base period: growth and inflation run over n_i = S_i + (s_i - u)/2
//! years, which again is the difference of years where periods are years. A flow of several years stands at one moment,
//! so eras and payback count it there; payback is linear between the moments. The length of the appraisal, and with it the
//! service years of annual equivalents, reaches to the last year of a period; where columns are parts of a year, service
//! years are the whole years nearest to it, at least one.
//!
//! **Refused**: averaged flows, whose mean is over a year; dates and offsets, which say themselves where a flow stands; a
//! tail after a last period that is not one year; a residual value after a block of years, unless flows stand at ends, as
//! it is left at the end of the block; the role `rates` with periods over a year; consumption.
//!
//! **Source**: common practice (compounding over parts of a year at the yearly rate); the moments are those of
//! [`hence_core::Timing`], with a period's length in place of a year's.

use crate::appraisal::Spans;

/// Where periods begin.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Periods {
    /// Years from the start of the base period to the start of each.
    pub starts: Vec<f64>,
    /// The length of the base period in years.
    pub base: f64,
}

impl Periods {
    /// The periods of columns of these lengths.
    ///
    /// **Arguments**: `numbered`, whether labels number the columns; `years`, from the base year to the first label (its
    /// number, where it is one).
    pub fn new(spans: &Spans, numbered: bool, years: f64) -> Periods {
        let length = spans.lengths.first().copied().unwrap_or(1.0);
        let (from, base) = if numbered { (years * length, length) } else { (years, 1.0) };
        Periods { starts: cumulated(&spans.lengths).iter().map(|start| whole(from + start)).collect(), base }
    }

    /// The offset of a moment in a period of that length: positions 0 to 1 in the period and in the base period.
    pub fn offset(&self, i: usize, length: f64, flows: f64, base: f64) -> f64 {
        whole(self.starts[i] + flows * length - base * self.base)
    }
}

/// Years from the start of the first period to the start of each. Compensated, so that twelve twelfths are one.
pub(crate) fn cumulated(lengths: &[f64]) -> Vec<f64> {
    let (mut total, mut lost) = (0.0_f64, 0.0);
    let mut starts = Vec::with_capacity(lengths.len());
    for length in lengths {
        starts.push(whole(total + lost));
        let next = total + length;
        // What the larger of the two keeps of the smaller.
        lost += if total >= *length { (total - next) + length } else { (length - next) + total };
        total = next;
    }
    starts
}

/// A number of years that is whole but for rounding, as a whole one: factors may jump there.
pub(crate) fn whole(years: f64) -> f64 {
    let nearest = years.round();
    if (years - nearest).abs() < 1e-9 { nearest } else { years }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::references::SheetRange;

    fn spans(lengths: &[f64]) -> Spans {
        let at: SheetRange = "Plan!B5:Z5".parse().unwrap();
        Spans { at: at.into(), from: "hence_span".into(), lengths: lengths.to_vec() }
    }

    #[test]
    fn twelve_twelfths_are_one() {
        let starts = cumulated(&[1.0 / 12.0; 601]);
        assert_eq!((starts[0], starts[12], starts[36], starts[600]), (0.0, 1.0, 3.0, 50.0));
        assert!((starts[7] - 7.0 / 12.0).abs() < 1e-15);
    }

    #[test]
    fn months_count_from_the_base_month() {
        let months = spans(&[1.0 / 12.0; 24]);
        // Month 0 is the base; the end of month 12 is a year after its end.
        let from_0 = Periods::new(&months, true, 0.0);
        assert_eq!(from_0.offset(0, 1.0 / 12.0, 1.0, 1.0), 0.0);
        assert_eq!(from_0.offset(12, 1.0 / 12.0, 1.0, 1.0), 1.0);
        // Counted from 1, month 12 is the last of the first year.
        let from_1 = Periods::new(&months, true, 1.0);
        assert_eq!(from_1.offset(11, 1.0 / 12.0, 1.0, 1.0), 1.0);
        assert!((from_1.offset(0, 1.0 / 12.0, 0.5, 1.0) - 0.5 / 12.0).abs() < 1e-15);
    }

    #[test]
    fn years_and_blocks_of_years() {
        // 2027, 2028, then 2029 to 2033, base 2026.
        let mixed = Periods::new(&spans(&[1.0, 1.0, 5.0]), false, 1.0);
        let offsets = |flows, base| {
            [1.0, 1.0, 5.0]
                .iter()
                .enumerate()
                .map(|(i, s)| mixed.offset(i, *s, flows, base))
                .collect::<Vec<_>>()
        };
        assert_eq!(offsets(1.0, 1.0), [1.0, 2.0, 7.0]);
        assert_eq!(offsets(0.5, 0.0), [1.5, 2.5, 5.5]);
        assert_eq!(offsets(0.0, 1.0), [0.0, 1.0, 2.0]);
    }
}
