//! Workbooks: reading them, finding roles, filling targets in place, and hence's audit sheets.
//!
//! The only crate that knows a spreadsheet library. Numbers come from `hence_core`; what is written
//! here is where they are read from, where they go, and the proof that comes with them.

pub mod appraisal;
pub mod model;
pub mod outcome;
pub mod package;
pub mod patch;
pub mod preflight;
pub mod problem;
pub mod reading;
pub mod references;
pub mod resolve;
pub mod roles;
pub mod sheets;
pub mod suggest;
pub mod xml;
