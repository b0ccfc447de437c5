//! Curves given at whole years, log-linear between: growth that persists, growth that switches between states.

use super::persistent::Persistent;
use super::regimes::Regimes;
use crate::dd::Dd;

/// Powers of two up to here reach every year of the farthest offset, 1e15.
pub(super) const DOUBLINGS: usize = 50;

/// What gives the factor at a whole year.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum Years {
    Persistent(Persistent),
    Regimes(Regimes),
}

/// A year in which the forward rate has come as near to its limit as it will.
const LATE: u64 = 1 << 20;

impl Years {
    fn whole(&self, n: u64) -> Dd {
        match self {
            Years::Persistent(growth) => growth.log2(n),
            Years::Regimes(growth) => growth.log2(n),
        }
    }

    /// log2 D(t), t from 0.
    pub(super) fn log2(&self, t: f64) -> Dd {
        let n = t.floor();
        let before = self.whole(n as u64);
        if n == t {
            return before;
        }
        before + (self.whole(n as u64 + 1) - before) * (t - n)
    }

    /// The continuous rate of the year that ends at n.
    fn rate(&self, n: u64) -> Dd {
        (self.whole(n - 1) - self.whole(n)) * Dd::LN2
    }

    /// -D'/D at t; at the end of a year that of the year.
    pub(super) fn instantaneous(&self, t: f64) -> Dd {
        self.rate((t.ceil() as u64).max(1))
    }

    /// -D'/D just after 0.
    pub(super) fn initial(&self) -> Dd {
        self.rate(1)
    }

    /// Whether no factor exceeds 1; false where that is not plain.
    pub(super) fn bounded(&self) -> bool {
        match self {
            Years::Persistent(growth) => growth.bounded(),
            Years::Regimes(growth) => growth.bounded(),
        }
    }

    /// A whole year after which every year has the same continuous rate to within rounding, and that rate; none where the
    /// years never settle.
    pub(super) fn settled(&self) -> Option<(f64, f64)> {
        match self {
            Years::Persistent(growth) => Some((growth.settled(), growth.last_rate())),
            Years::Regimes(growth) => growth.settled(),
        }
    }

    /// The continuous forward rate that far years tend to.
    pub(super) fn last_rate(&self) -> f64 {
        match self {
            Years::Persistent(growth) => growth.last_rate(),
            Years::Regimes(_) => self.rate(LATE).hi,
        }
    }
}
