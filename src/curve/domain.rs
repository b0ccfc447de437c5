//! The offsets at which a curve is defined.

use std::fmt;

/// The largest offset either way, in years: beyond it a double no longer tells a year from the next quarter.
pub(super) const FARTHEST: f64 = 1e15;

/// An interval of offsets in years, its upper end always included.
///
/// An unbounded end is infinite; even so offsets beyond 1e15 years are refused, because a double no longer tells
/// such an offset from one a fraction of a year away.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Domain {
    /// The smallest offset, or minus infinity.
    pub lower: f64,
    /// Whether `lower` itself is included (it is not for gamma curves, whose factor is infinite there).
    pub lower_included: bool,
    /// The largest offset, included, or infinity.
    pub upper: f64,
}

impl Domain {
    pub(super) const ALL: Domain =
        Domain { lower: f64::NEG_INFINITY, lower_included: true, upper: f64::INFINITY };
    pub(super) const FROM_ZERO: Domain = Domain { lower: 0.0, ..Domain::ALL };

    pub(super) fn to(self, upper: f64) -> Domain {
        Domain { upper, ..self }
    }

    /// Whether the curve is defined at offset t; false for NaN.
    pub fn contains(&self, t: f64) -> bool {
        let above = if self.lower_included { t >= self.lower } else { t > self.lower };
        above && t <= self.upper && t.abs() <= FARTHEST
    }

    /// What both domains have in common.
    pub(super) fn and(self, other: Domain) -> Domain {
        let lower = self.lower.max(other.lower);
        let included = |domain: Domain| domain.lower_included || domain.lower < lower;
        Domain {
            lower,
            lower_included: included(self) && included(other),
            upper: self.upper.min(other.upper),
        }
    }
}

impl fmt::Display for Domain {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let from = if self.lower_included { "from" } else { "above" };
        match (self.lower.is_finite(), self.upper.is_finite()) {
            (true, true) => write!(f, "{from} {} to {} years", self.lower, self.upper),
            (true, false) => write!(f, "{from} {} years", self.lower),
            (false, true) => write!(f, "up to {} years", self.upper),
            (false, false) => write!(f, "up to {FARTHEST:e} years either way"),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_ends_belong_or_not_as_stated() {
        let closed = Domain::FROM_ZERO.to(30.0);
        assert!(closed.contains(0.0) && closed.contains(30.0));
        assert!(!closed.contains(-0.1) && !closed.contains(30.000001) && !closed.contains(f64::NAN));
        let open = Domain { lower: -44.5, lower_included: false, upper: f64::INFINITY };
        assert!(!open.contains(-44.5) && open.contains(-44.4) && !open.contains(1e16));
        assert_eq!(open.and(closed), closed);
        assert_eq!(open.and(Domain { lower_included: true, ..open }), open);
        assert_eq!(closed.to_string(), "from 0 to 30 years");
        assert_eq!(open.to_string(), "above -44.5 years");
    }
}
