//! The flows whose net present value is searched, and what becomes of those without end.

use super::law::Law;
use crate::perpetuity::MOST;
use crate::{Error, ErrorKind, OptionFlows, Perpetual, Result, check};

/// Flow, and the years that multiply each part of the law.
pub(super) type Row = (f64, Vec<f64>);

/// The net present value as a sum of flow x exp(-(years . parts)), multiplied by a factor above 0 that makes flows without
/// end few.
pub(super) struct Terms {
    pub rows: Vec<Row>,
    /// The growth of the flows without end, as logarithms.
    growth: Vec<f64>,
    /// What one year adds to the years, where the last rate holds.
    lasting: Vec<f64>,
}

/// Kinds of endless flows (growth and step) allowed together: each doubles the terms.
const MOST_KINDS: usize = 6;

impl OptionFlows<'_> {
    pub(super) fn check(&self) -> Result<()> {
        check::same_length(("offsets", self.offsets), ("flows", self.flows))?;
        check::finite_all("offsets", self.offsets)?;
        check::finite_all("flows", self.flows)?;
        for (index, endless) in self.perpetual.iter().enumerate() {
            let numbers = [endless.start, endless.flow, endless.growth];
            check::finite_all("perpetual", &numbers).map_err(|error| error.with_index(index))?;
            if !(endless.growth > -1.0 && endless.every > 0) {
                let message = format!("growth is {}, every {} years", endless.growth, endless.every);
                return Err(Error::new(ErrorKind::RateRange, "perpetual", message)
                    .with_index(index)
                    .with_hint("growth above -1, every year or more rarely"));
            }
        }
        Ok(())
    }

    /// The terms under a law.
    ///
    /// Flows without end, from where the last rate L holds, are first/(1 - z), z = (1 + growth)^every exp(-every L):
    /// multiplied by 1 - z for every kind, the whole is a finite sum again, with the same sign.
    pub(super) fn terms(&self, law: &Law) -> Result<Terms> {
        let mut rows = Vec::with_capacity(self.flows.len());
        for (index, (&t, &flow)) in self.offsets.iter().zip(self.flows).enumerate() {
            if flow != 0.0 {
                rows.push((flow, law.weights(t).map_err(|error| error.with_index(index))?));
            }
        }
        let endless: Vec<&Perpetual> = self.perpetual.iter().filter(|endless| endless.flow != 0.0).collect();
        let mut terms = Terms { rows, growth: Vec::new(), lasting: Vec::new() };
        if endless.is_empty() {
            return Ok(terms);
        }
        let Some((edge, lasting)) = law.lasting() else {
            let message = "flows for ever are not searched under a curve without a rate that lasts";
            return Err(Error::new(ErrorKind::Unsupported, "perpetual", message).with_hint("flows that end"));
        };
        let mut kinds: Vec<(f64, u32)> = endless.iter().map(|e| (e.growth, e.every)).collect();
        kinds.sort_by(|a, b| a.0.total_cmp(&b.0).then(a.1.cmp(&b.1)));
        kinds.dedup();
        if kinds.len() > MOST_KINDS {
            let message = format!("{} kinds of flows for ever, allowed up to {MOST_KINDS}", kinds.len());
            return Err(
                Error::new(ErrorKind::Unsupported, "perpetual", message).with_hint("fewer kinds of tails")
            );
        }
        let mut firsts: Vec<Vec<Row>> = vec![Vec::new(); kinds.len()];
        for (index, flow) in self.perpetual.iter().enumerate().filter(|(_, flow)| flow.flow != 0.0) {
            let kind = kinds.iter().position(|kind| *kind == (flow.growth, flow.every)).unwrap_or(0);
            let first = flow.until(edge, law, &mut terms.rows).map_err(|error| error.with_index(index))?;
            firsts[kind].push(first);
        }
        let spread = |rows, without: Option<usize>| {
            let others = kinds.iter().enumerate().filter(|(kind, _)| Some(*kind) != without);
            others.fold(rows, |rows, (_, kind)| less_next(rows, *kind, &lasting))
        };
        terms.rows = spread(terms.rows, None);
        for (kind, first) in firsts.into_iter().enumerate() {
            terms.rows.extend(spread(first, Some(kind)));
        }
        terms.growth = kinds.iter().map(|kind| kind.0.ln_1p()).collect();
        terms.lasting = lasting;
        Ok(terms)
    }
}

impl Perpetual {
    /// Lists the flows before the last rate holds among the rows; the first of the others comes back.
    fn until(&self, edge: f64, law: &Law, rows: &mut Vec<Row>) -> Result<Row> {
        let every = f64::from(self.every);
        if (edge - self.start) / every > MOST {
            let message = format!("the curve's last edge at offset {edge} is too far for flows for ever");
            return Err(
                Error::new(ErrorKind::Unsupported, "perpetual", message).with_hint("an earlier last edge")
            );
        }
        let mut k = 1.0;
        loop {
            let t = self.start + k * every;
            let flow = self.flow * (k * every * self.growth.ln_1p()).exp();
            let row = (flow, law.weights(t)?);
            if t >= edge {
                return Ok(row);
            }
            rows.push(row);
            k += 1.0;
        }
    }
}

impl Terms {
    /// The part of an interval where every rate is in range and every flow without end has a value.
    pub(super) fn clip(&self, law: &Law, interval: (f64, f64)) -> Option<(f64, f64)> {
        let clipped = law.clip(interval)?;
        self.growth
            .iter()
            .try_fold(clipped, |interval, &rate| law.clip_lasting(&self.lasting, rate, interval))
    }
}

/// The rows times 1 - z.
fn less_next(rows: Vec<Row>, (growth, every): (f64, u32), lasting: &[f64]) -> Vec<Row> {
    let every = f64::from(every);
    let ratio = (every * growth.ln_1p()).exp();
    let next = |(flow, years): &Row| {
        let years = years.iter().zip(lasting).map(|(a, b)| a + every * b).collect();
        (-flow * ratio, years)
    };
    let later: Vec<_> = rows.iter().map(next).collect();
    rows.into_iter().chain(later).collect()
}
