//! What is measured on the flows of an option: rates of return, payback, mean time, eras, value per unit.

use std::collections::BTreeMap;

use hence_core::{
    Curve, Eras, IRR_INTERVAL, Tail, cost_per_effect, discounted_payback, dot, era_shares, internal_rates,
    mean_time, npv_per_budget, sum,
};

use crate::appraisal::{Choice, Stream, StreamKind};
use crate::clock::Clock;
use crate::outcome::{ChoiceOutcome, StreamOutcome};
use crate::roles::key;
use crate::valuation::side;

/// Flows without end are listed up to so many years after the base, for payback and eras.
const LISTED: f64 = 1_000.0;

/// What follows the last year of a stream.
#[derive(Default)]
pub(crate) struct Further {
    /// Years after the base, flow and factor of each.
    flows: Vec<(f64, f64, f64)>,
    /// The flows go on for ever, so those listed are not all.
    endless: bool,
}

impl Further {
    /// Lists the flows that follow, each in the stream's own direction.
    pub fn of(
        tail: &Tail,
        last_flow: f64,
        clock: &Clock,
        curve: &Curve,
        base_year: Option<i32>,
    ) -> hence_core::Result<Self> {
        let Some(&last) = clock.years.last() else { return Ok(Further::default()) };
        let endless = tail.to.is_none();
        let up_to = if endless { LISTED } else { f64::from(i32::MAX) };
        let flows = tail.flows(last, last_flow, base_year, up_to)?;
        let valued = flows.into_iter().map(|(years, flow)| {
            let factor = curve.timed_factor(years, clock.timing)?;
            Ok((years, flow, factor))
        });
        Ok(Further { flows: valued.collect::<hence_core::Result<_>>()?, endless })
    }
}

/// The net flows of an option, what follows the last year included.
pub(crate) struct Moments {
    /// Offset and flow; an averaged flow stands half at each end of its year.
    dated: Vec<(f64, f64)>,
    /// Offset of the year and present value.
    valued: Vec<(f64, f64)>,
    /// Some flows go on for ever.
    endless: bool,
}

impl Moments {
    /// Those of an option as it stands.
    pub fn of(choice: &Choice, outcome: &ChoiceOutcome, further: &[Further], clock: &Clock) -> Self {
        let mut moments = Moments { dated: Vec::new(), valued: Vec::new(), endless: false };
        for (i, (t, net)) in outcome.offsets.iter().zip(&outcome.net).enumerate() {
            let sides =
                choice.streams.iter().map(|stream| side(stream.kind)).map(|(above, below)| above - below);
            moments.add(clock, *t, *net, outcome.net_value(i, sides));
        }
        for (stream, further) in choice.streams.iter().zip(further) {
            let (above, below) = side(stream.kind);
            for (years, flow, factor) in &further.flows {
                let net = flow * (above - below);
                moments.add(clock, clock.offset(*years), net, net * factor);
            }
            moments.endless |= further.endless;
        }
        moments
    }

    fn add(&mut self, clock: &Clock, t: f64, flow: f64, value: f64) {
        self.dated.extend(clock.moments(t).into_iter().map(|(at, share)| (at, share * flow)));
        self.valued.push((t, value));
    }

    /// These less those of the baseline, whose years may differ.
    pub fn less(&self, base: &Moments) -> Moments {
        let negative = |list: &[(f64, f64)]| list.iter().map(|(t, x)| (*t, -x)).collect::<Vec<_>>();
        Moments {
            dated: [self.dated.clone(), negative(&base.dated)].concat(),
            valued: [self.valued.clone(), negative(&base.valued)].concat(),
            endless: self.endless || base.endless,
        }
    }
}

/// Sums of flows at one offset, in order; offsets that differ by rounding alone are one.
pub(crate) fn merged(list: &[(f64, f64)]) -> (Vec<f64>, Vec<f64>) {
    let mut at: BTreeMap<i64, (f64, Vec<f64>)> = BTreeMap::new();
    for (t, x) in list {
        let entry = at.entry((t * 1e6).round() as i64).or_insert((*t, Vec::new()));
        entry.1.push(*x);
    }
    at.into_values().map(|(t, values)| (t, sum(&values))).unzip()
}

/// Rates of return and payback.
pub(crate) fn measure_net(outcome: &mut ChoiceOutcome, moments: &Moments) {
    outcome.endless = moments.endless;
    outcome.irr.clear();
    outcome.irr_unresolved.clear();
    if !moments.endless {
        let (offsets, flows) = merged(&moments.dated);
        // The one error possible is that every flow is 0: no rate is special then.
        if let Ok(found) = internal_rates(&offsets, &flows, IRR_INTERVAL) {
            outcome.irr = found.rates;
            outcome.irr_unresolved = found.unresolved;
        }
    }
    let (offsets, values) = merged(&moments.valued);
    outcome.payback = discounted_payback(&offsets, &values).unwrap_or_default();
    if moments.endless && outcome.totals().npv < 0.0 {
        // Flows beyond those listed pull it below zero in the end.
        outcome.payback.last = None;
    }
}

/// Mean time and era shares of the gross present values.
pub(crate) fn measure_gross(outcome: &mut ChoiceOutcome, further: &[Further], clock: &Clock) {
    let eras = Eras::default();
    let mut years: Vec<(f64, f64)> = Vec::new();
    let mut moments: Vec<(f64, f64)> = Vec::new();
    for (s, (stream, further)) in outcome.streams.iter().zip(further).enumerate() {
        let curve = stream.own.as_ref().map_or(&outcome.curve, |own| &own.curve);
        let own = outcome.offsets.iter().zip(&stream.flows).zip(outcome.factors_of(s));
        let own = own.map(|((t, flow), factor)| (*t, *flow, *factor));
        let later = further.flows.iter().map(|(years, flow, factor)| (clock.offset(*years), *flow, *factor));
        for (t, flow, factor) in own.chain(later) {
            years.push((t, flow * factor));
            for (at, share) in clock.moments(t) {
                // Where an averaged flow's halves stand, each has the factor of its own moment.
                let factor = if share == 1.0 { factor } else { curve.factor(at).unwrap_or(factor) };
                moments.push((at, share * flow * factor));
            }
        }
        if further.endless {
            let listed: Vec<f64> = further.flows.iter().map(|(_, flow, factor)| flow * factor).collect();
            let beyond = eras.0.last().copied().unwrap_or(0.0).max(LISTED) + 1.0;
            years.push((beyond, stream.pv_tail - sum(&listed)));
        }
    }
    let endless = further.iter().any(|further| further.endless);
    let (offsets, gross): (Vec<f64>, Vec<f64>) = years.into_iter().unzip();
    outcome.era_shares = era_shares(&offsets, &gross, &eras).unwrap_or_default();
    let (offsets, gross): (Vec<f64>, Vec<f64>) = moments.into_iter().unzip();
    outcome.mean_time = if endless { None } else { mean_time(&offsets, &gross).ok() };
}

/// NPV per unit of the constrained cost, cost per unit of each effect; over the baseline where given.
pub(crate) fn measure_units(
    outcome: &mut ChoiceOutcome,
    choice: &Choice,
    baseline: Option<(&ChoiceOutcome, &Choice)>,
) {
    let spent = |streams: &[StreamOutcome], choice: &Choice| {
        let streams = choice.streams.iter().zip(streams);
        let constrained = |stream: &Stream| {
            stream.kind == StreamKind::Cost && choice.budget.iter().any(|b| key(b) == key(&stream.name))
        };
        sum(&streams.filter(|(s, _)| constrained(s)).map(|(_, o)| o.pv).collect::<Vec<_>>())
    };
    let mut budget = spent(&outcome.streams, choice);
    if let Some((base, base_choice)) = baseline {
        budget -= spent(&base.streams, base_choice);
    }
    let totals = *outcome.totals();
    outcome.npv_per_budget =
        if choice.budget.is_empty() { None } else { npv_per_budget(totals.npv, budget).ok() };
    let per_unit = |quantity: f64| cost_per_effect(totals.pv_costs, quantity).ok();
    outcome.effects = choice
        .effects
        .iter()
        .map(|effect| {
            let mut plain = sum(&effect.raw);
            let mut discounted = dot(&effect.raw, &outcome.factors);
            if let Some((base, base_choice)) = baseline
                && let Some(same) = base_choice.effects.iter().find(|e| key(&e.name) == key(&effect.name))
            {
                plain -= sum(&same.raw);
                discounted -= dot(&same.raw, &base.factors);
            }
            (per_unit(plain), per_unit(discounted))
        })
        .collect();
}
