//! Runs over a shelf of workbooks, each in a process of its own, so that one bad workbook never ends a run.

pub mod child;
pub mod gather;
pub mod pool;
pub mod telling;
pub mod values;
pub mod walk;
mod wire;
pub mod worker;
