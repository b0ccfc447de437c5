//! Net flows and offsets as they stand live on the checks sheet, for values at other rates by plain arithmetic.

use super::checks::Maker;
use super::lines::col;
use crate::formulas::refer;
use crate::references::{Cell, Range, SheetRange};

/// The net flows of one option, live.
pub(super) struct Nets {
    flows: SheetRange,
    offsets: SheetRange,
    /// An averaged flow stands half at each end of its year.
    averaged: bool,
    /// Offset and flow of each year.
    values: Vec<(f64, f64)>,
}

impl Nets {
    /// Those of an option; none where flows follow its last year, where a stream has a basis of its own, or where a year's
    /// formula would be too long.
    pub fn of(maker: &Maker<'_>, c: usize) -> Option<Self> {
        let choice = &maker.input.appraisal.choices[c];
        let tailed = choice.streams.iter().any(|stream| stream.tail.is_some());
        if tailed || maker.input.outcomes[c].streams.iter().any(|stream| stream.own.is_some()) {
            return None;
        }
        let at = maker.sections[c];
        let column = |col| SheetRange {
            sheet: maker.home.to_owned(),
            range: Range { first: Cell { row: at.years, col }, last: Cell { row: at.streams - 1, col } },
        };
        let rebuilt = maker.rebuilt(c);
        let values = rebuilt.offsets.iter().enumerate().map(|(i, &t)| Some((t, maker.net(c, i)?.1)));
        Some(Nets {
            flows: column(maker.net_column(c)),
            offsets: column(col::OFFSET),
            averaged: rebuilt.averaged,
            values: values.collect::<Option<_>>()?,
        })
    }

    fn ends(&self) -> &'static [f64] {
        if self.averaged { &[0.0, 1.0] } else { &[0.0] }
    }

    /// The net present value at a flat yearly rate, which stands in a cell or is a formula in brackets.
    pub fn formula(&self, home: &str, rate: &str) -> String {
        let (flows, offsets) = (refer(home, &self.flows), refer(home, &self.offsets));
        let terms: Vec<String> = self
            .ends()
            .iter()
            .map(|end| {
                let offsets = if *end == 0.0 { offsets.clone() } else { format!("({offsets}-{end})") };
                format!("SUMPRODUCT({flows},(1+{rate})^(0-{offsets}))")
            })
            .collect();
        match terms.as_slice() {
            [one] => one.clone(),
            terms => format!("({})/{}", terms.join("+"), terms.len()),
        }
    }

    /// What the formula comes to, and the same of the flows without their signs.
    pub fn value(&self, rate: f64) -> (f64, f64) {
        let share = 1.0 / self.ends().len() as f64;
        let (mut net, mut gross) = (0.0, 0.0);
        for (t, flow) in &self.values {
            for end in self.ends() {
                let value = share * flow * (1.0 + rate).powf(end - t);
                net += value;
                gross += value.abs();
            }
        }
        (net, gross)
    }
}
