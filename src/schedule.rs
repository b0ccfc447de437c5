//! Named bases with their published source, one TOML text each.

/// Whether a schedule is in force.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum ScheduleStatus {
    /// In force when last checked.
    Current,
    /// Replaced.
    Superseded,
    /// Not known.
    Unknown,
}

/// A schedule.
#[derive(Clone, Debug, PartialEq)]
pub struct Schedule {
    id: String,
}

impl Schedule {
    /// Its id.
    pub fn id(&self) -> &str {
        &self.id
    }
}
