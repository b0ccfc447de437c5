//! Workbooks: reading them, finding roles, filling targets in place, and hence's audit sheets.
//!
//! The only crate that knows a spreadsheet library. Numbers come from `hence_core`; what is written
//! here is where they are read from, where they go, and the proof that comes with them.

mod adjust;
pub mod appraisal;
mod baseline;
pub mod brief;
pub mod check;
mod clock;
pub mod codes;
mod companions;
pub mod compare;
pub mod dated;
mod drawing;
pub mod draws;
pub mod fill;
pub mod findings;
mod follow;
pub mod formulas;
pub mod graft;
pub mod layout;
mod measuring;
pub mod model;
pub mod names_edit;
pub mod naming;
pub mod outcome;
mod own;
pub mod package;
pub mod patch;
mod periods;
mod plan;
pub mod preflight;
pub mod problem;
pub mod reading;
pub mod references;
pub mod report;
pub mod resolve;
pub mod roles;
pub mod schedules;
pub mod sheets;
mod splice;
pub mod stale;
pub mod start;
pub mod styles;
pub mod suggest;
pub mod tolerance;
pub mod valuation;
pub mod verify;
mod welfare;
pub mod writer;
pub mod xml;
