//! The net flows of an option one by one, dated by offset: what rates are searched and drawn over.

use hence_core::{OptionFlows, Perpetual};

use crate::adjust::tail;
use crate::appraisal::{Axis, Choice, Stream};
use crate::clock::Clock;
use crate::measuring::merged;
use crate::outcome::StreamOutcome;
use crate::problem::{Place, Result};
use crate::valuation::{from_core, place_of, side, tail_base};

/// Net flows, what follows the last year included.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Flows {
    /// Offsets in years, any order; an averaged flow stands half at each end of its year.
    pub offsets: Vec<f64>,
    /// As many flows, benefits positive.
    pub flows: Vec<f64>,
    /// What goes on for ever.
    pub perpetual: Vec<Perpetual>,
}

impl Flows {
    /// As the library takes them.
    pub fn net(&self) -> OptionFlows<'_> {
        OptionFlows { offsets: &self.offsets, flows: &self.flows, perpetual: &self.perpetual }
    }

    fn add(&mut self, t: f64, flow: f64) {
        self.offsets.push(t);
        self.flows.push(flow);
    }

    /// These less those of another option, each offset once.
    pub(crate) fn less(&self, other: &Flows) -> Flows {
        let dated = |flows: &Flows, sign: f64| {
            flows.offsets.iter().zip(&flows.flows).map(|(t, x)| (*t, sign * x)).collect::<Vec<_>>()
        };
        let (offsets, flows) = merged(&[dated(self, 1.0), dated(other, -1.0)].concat());
        let mut perpetual = self.perpetual.clone();
        for theirs in &other.perpetual {
            // What both have for ever is nothing between them.
            match perpetual.iter().position(|own| own == theirs) {
                Some(same) => {
                    perpetual.remove(same);
                }
                None => perpetual.push(Perpetual { flow: -theirs.flow, ..*theirs }),
            }
        }
        Flows { offsets, flows, perpetual }
    }
}

/// Those of an option as it stands. A stream with a basis of its own is what it is worth, at the base: no other rate
/// changes that.
pub(crate) fn flows(choice: &Choice, axis: &Axis, clock: &Clock, streams: &[StreamOutcome]) -> Result<Flows> {
    let mut all = Flows::default();
    for (stream, valued) in choice.streams.iter().zip(streams) {
        let (above, below) = side(stream.kind);
        let sign = above - below;
        if valued.own.is_some() {
            all.add(0.0, sign * valued.pv);
            continue;
        }
        for (t, flow) in clock.offsets.iter().zip(&valued.flows) {
            for (at, share) in clock.moments(*t) {
                all.add(at, share * sign * flow);
            }
        }
        let Some(tail) = tail(stream, choice)? else { continue };
        let (Some(&years), Some(last)) = (clock.years.last(), last_flow(stream, valued)) else { continue };
        if tail.to.is_none() {
            for (start, share) in clock.moments(clock.offset(years)) {
                let flow = share * sign * last;
                all.perpetual.push(Perpetual { start, flow, growth: tail.growth, every: tail.every });
            }
            continue;
        }
        let base_year = tail_base(&axis.labels, clock, choice);
        let further = tail.flows(years, last, base_year, f64::from(i32::MAX));
        let place =
            || stream.tail.as_ref().map_or_else(Place::default, |given| place_of(&given.at, &given.from));
        for (years, flow) in further.map_err(|error| from_core(&error, place()))? {
            for (at, share) in clock.moments(clock.offset(years)) {
                all.add(at, share * sign * flow);
            }
        }
    }
    Ok(all)
}

/// The last flow of a stream as valued, its residual value not counted: what a tail goes on from.
fn last_flow(stream: &Stream, valued: &StreamOutcome) -> Option<f64> {
    let multiplier = valued.multipliers.as_ref().and_then(|all| all.last()).copied().unwrap_or(1.0);
    let scale = stream.sign * stream.unit * (1.0 + stream.uplift.value) * multiplier;
    stream.raw.last().map(|last| last * scale)
}
