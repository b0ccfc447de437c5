//! Curve, timing and prices together, with their source: all that repeats a present value.
use crate::{Curve, Result, Schedule, Spec, Timing, Where};

/// The price basis of a rate.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum PriceBasis {
    /// Inflation taken out.
    Real,
    /// Money of the day.
    Nominal,
}

/// A basis: what a rate line, a number or a schedule id stands for.
#[derive(Clone, Debug, PartialEq)]
pub struct Basis {
    spec: Spec,
    timing: Option<Timing>,
    schedule: Option<Schedule>,
}

/// The schedules that ids are looked up in: the user's first, then the built-in ones.
#[derive(Clone, Debug, Default)]
pub struct Catalogue {}

impl Catalogue {
    /// The built-in schedules.
    pub fn builtin() -> Self {
        Catalogue {}
    }
    /// Adds user schedules (file name, TOML text), which come before the built-in ones.
    pub fn with(self, _texts: &[(String, String)]) -> Result<Self> {
        Ok(self)
    }
    /// All schedules.
    pub fn schedules(&self) -> Vec<&Schedule> {
        Vec::new()
    }
    /// By id.
    pub fn get(&self, _id: &str) -> Option<&Schedule> {
        None
    }
}

impl Basis {
    /// Parses a rate line, a number as text, or a schedule id.
    pub fn parse(_text: &str, _catalogue: &Catalogue) -> Result<Self> {
        unreachable!()
    }
    /// A number cell: a flat yearly rate in (-0.5, 1].
    pub fn from_rate(_rate: f64) -> Result<Self> {
        unreachable!()
    }
    /// The curve at this base and length.
    pub fn curve(&self, _at: &Where) -> Result<Curve> {
        unreachable!()
    }
    /// What it says of the curve.
    pub fn spec(&self) -> &Spec {
        &self.spec
    }
    /// The timing it states, where it does (the line, else its schedule).
    pub fn timing(&self) -> Option<Timing> {
        self.timing
    }
    /// The schedule it names, if any.
    pub fn schedule(&self) -> Option<&Schedule> {
        self.schedule.as_ref()
    }
    /// The canonical rate line (of a schedule: its id).
    pub fn canonical(&self) -> String {
        unreachable!()
    }
    /// The curve in words, with title, year and place of its source.
    pub fn words(&self) -> String {
        unreachable!()
    }
    /// Superseded, second hand, not complete, jumps at edges.
    pub fn warnings(&self) -> Vec<String> {
        Vec::new()
    }
}
