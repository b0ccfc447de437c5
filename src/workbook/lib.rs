//! Workbooks: reading them, finding roles, filling targets in place, and hence's audit sheets.
//!
//! The only crate that knows a spreadsheet library. Numbers come from `hence_core`; what is written
//! here is where they are read from, where they go, and the proof that comes with them.

pub mod appraisal;
pub mod formulas;
pub mod layout;
pub mod outcome;
pub mod patch;
pub mod problem;
pub mod references;
pub mod sheets;
pub mod writer;
