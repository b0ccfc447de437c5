//! What kind of mistake a workbook's numbers and formulas show, each kind in a module of its own.

mod calc;
mod cells;
pub mod effect;
mod expr;
mod lines;
mod rows;
pub mod seen;
mod signs;
pub mod structure;
mod sums;
mod totals;
mod units;

pub use seen::{Compared, Seen, Standing};
