//! Social discounting: curves, rate lines, schedules, timing and the measures of an appraisal.
//!
//! The library is pure: it opens no file, knows no sheet and prints nothing. Texts (rate lines,
//! schedules) come in as strings, numbers as slices, and every failure is an [`Error`] that names the
//! argument and the index it is about.
//!
//! Rates are fractions per year (0.035 is 3.5%), offsets are years from the base. Nothing is rounded.

mod error;
mod spec;

pub use error::{Error, ErrorKind, Result};
pub use spec::{Band, Compounding, Edge, HorizonRule, Spec, Where};
