//! Net flows and offsets as they stand live on the checks sheet, for values at other rates by plain arithmetic.

use super::checks::Maker;
use super::lines::col;
use crate::formulas::{literal, refer};
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

    /// The net present value at yearly rates, band by band, in one formula.
    pub fn formula(&self, home: &str, bands: &[Band]) -> String {
        let (flows, offsets) = (refer(home, &self.flows), refer(home, &self.offsets));
        let terms: Vec<String> = self
            .ends()
            .iter()
            .map(|end| {
                let offsets = if *end == 0.0 { offsets.clone() } else { format!("({offsets}-{end})") };
                let uppers = bands.iter().skip(1).map(|band| Some(band.after)).chain([None]);
                let factors = bands.iter().zip(uppers).enumerate().map(|(k, (band, upper))| {
                    let lower = (k > 0).then_some(band.after);
                    format!("(1+{})^(0-{})", band.rate, years_in(lower, upper, &offsets))
                });
                format!("SUMPRODUCT({flows},{})", factors.collect::<Vec<_>>().join("*"))
            })
            .collect();
        match terms.as_slice() {
            [one] => one.clone(),
            terms => format!("({})/{}", terms.join("+"), terms.len()),
        }
    }

    /// What the net present value comes to with a factor for each offset, and the same of the flows without their signs.
    pub fn value(&self, factor: &dyn Fn(f64) -> f64) -> (f64, f64) {
        let share = 1.0 / self.ends().len() as f64;
        let (mut net, mut gross) = (0.0, 0.0);
        for (t, flow) in &self.values {
            for end in self.ends() {
                let value = share * flow * factor(t - end);
                net += value;
                gross += value.abs();
            }
        }
        (net, gross)
    }

    /// The lowest and the highest offset that a factor is asked for.
    pub fn reach(&self) -> (f64, f64) {
        let ends = |t: f64| self.ends().iter().map(move |end| t - end);
        let all = || self.values.iter().flat_map(|(t, _)| ends(*t));
        (all().fold(f64::INFINITY, f64::min), all().fold(f64::NEG_INFINITY, f64::max))
    }
}

/// One yearly rate: the offset after which it holds (the first one holds before that, too), and the cell or the formula in
/// brackets that gives it.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Band {
    pub after: f64,
    pub rate: String,
}

/// The years of (0, t] between two offsets: half of what |t - a| and |t - b| differ by, which works on whole ranges.
fn years_in(lower: Option<f64>, upper: Option<f64>, t: &str) -> String {
    let far = |edge: f64| format!("ABS({t}-{})", literal(edge));
    match (lower, upper) {
        (None, None) => t.to_owned(),
        (None, Some(b)) => format!("({t}+{}-{})/2", literal(b), far(b)),
        (Some(a), None) => format!("({}+{t}-{})/2", far(a), literal(a)),
        (Some(a), Some(b)) => format!("({}-{}+{})/2", far(a), far(b), literal(b - a)),
    }
}
