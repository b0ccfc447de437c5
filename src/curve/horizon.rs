//! Whole-horizon rates: one rate for all the years up to t (or up to the appraisal's length).

use super::checks::percent;
use super::edges::Edges;
use crate::dd::{Dd, log2_1p, two_diff};

/// r(t): stepped by bands, or interpolated between points.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum RatePath {
    Steps { edges: Edges, rates: Vec<f64> },
    Points(Vec<(f64, f64)>),
}

impl RatePath {
    /// The rate at t, and its slope r'(t): 0 on steps; at a point that of the stretch before it.
    fn at(&self, t: f64) -> (Dd, Dd) {
        match self {
            RatePath::Steps { edges, rates } => (Dd::of(rates[edges.band(t)]), Dd::ZERO),
            RatePath::Points(points) => {
                let next = points.partition_point(|point| point.0 < t);
                if next == 0 {
                    return (Dd::of(points[0].1), Dd::ZERO);
                }
                let (from, rate) = points[next - 1];
                let Some(&(to, next_rate)) = points.get(next) else { return (Dd::of(rate), Dd::ZERO) };
                let slope = two_diff(next_rate, rate) / two_diff(to, from);
                (Dd::of(rate) + slope * two_diff(t, from), slope)
            }
        }
    }

    pub(super) fn rate(&self, t: f64) -> Dd {
        self.at(t).0
    }

    /// The rate just after 0, which an edge at 0 would otherwise hide.
    fn initial(&self) -> Dd {
        match self {
            RatePath::Steps { edges, rates } => Dd::of(rates[edges.band_after_zero()]),
            RatePath::Points(_) => self.rate(0.0),
        }
    }

    fn rates(&self) -> Vec<f64> {
        match self {
            RatePath::Steps { rates, .. } => rates.clone(),
            RatePath::Points(points) => points.iter().map(|point| point.1).collect(),
        }
    }
}

/// D(t) = (1 + r(t))^-t.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct ByFlow {
    path: RatePath,
    /// log2(1 + rate) of each step; empty where rates are interpolated.
    logs: Vec<Dd>,
}

impl ByFlow {
    pub(super) fn new(path: RatePath) -> ByFlow {
        let logs = match &path {
            RatePath::Steps { rates, .. } => rates.iter().map(|&rate| log2_1p(Dd::of(rate))).collect(),
            RatePath::Points(_) => Vec::new(),
        };
        ByFlow { path, logs }
    }

    pub(super) fn log2(&self, t: f64) -> Dd {
        match &self.path {
            RatePath::Steps { edges, .. } => -(self.logs[edges.band(t)] * t),
            RatePath::Points(_) => -(log2_1p(self.path.rate(t)) * t),
        }
    }

    /// -D'/D = ln(1 + r) + t r' / (1 + r).
    pub(super) fn instantaneous(&self, t: f64) -> Dd {
        let (rate, slope) = self.path.at(t);
        log2_1p(rate) * Dd::LN2 + slope * t / (Dd::ONE + rate)
    }

    pub(super) fn initial(&self) -> Dd {
        log2_1p(self.path.initial()) * Dd::LN2
    }

    /// Whether no factor exceeds 1.
    pub(super) fn bounded(&self) -> bool {
        self.path.rates().iter().all(|&rate| rate >= 0.0)
    }

    /// One sentence for every edge or stretch where a later unit is worth more than an earlier one.
    pub(super) fn warnings(&self) -> Vec<String> {
        match &self.path {
            RatePath::Steps { edges, rates } => (0..rates.len() - 1)
                .filter(|&k| rates[k + 1] < rates[k] && edges.uppers()[k] > 0.0)
                .map(|k| {
                    format!(
                        "the factor jumps up just after offset {}, where the whole-horizon rate falls from {} to \
                         {}: a flow after that edge is worth more than the same flow before it",
                        edges.uppers()[k],
                        percent(rates[k]),
                        percent(rates[k + 1])
                    )
                })
                .collect(),
            RatePath::Points(points) => points
                .windows(2)
                // Where the rate falls, -D'/D falls along the stretch, so its end decides.
                .filter(|pair| pair[1].1 < pair[0].1 && self.instantaneous(pair[1].0).hi < 0.0)
                .map(|pair| {
                    format!(
                        "the factor rises before offset {}, because the whole-horizon rate falls from {} to {} \
                         between offsets {} and {}",
                        pair[1].0,
                        percent(pair[0].1),
                        percent(pair[1].1),
                        pair[0].0,
                        pair[1].0
                    )
                })
                .collect(),
        }
    }
}
