//! Where in its year a flow and the base stand.

/// A position within a year.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Position {
    /// 0: the year's first day.
    Start,
    /// 1/2.
    Middle,
    /// 1: the year's last day.
    End,
    /// The mean of the factors at start and end (flows only).
    Averaged,
}

/// The positions of flows and base; both `End` unless said, so that the base year is undiscounted.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub struct Timing {
    /// Of the flows.
    pub flows: Position,
    /// Of the base; never `Averaged`.
    pub base: Position,
}

impl Default for Timing {
    fn default() -> Self {
        Timing { flows: Position::End, base: Position::End }
    }
}
