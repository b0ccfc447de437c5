//! What kind of mistake a workbook's numbers and formulas show, each kind in a module of its own.

pub mod effect;
pub mod seen;

pub use seen::{Compared, Seen, Standing};
