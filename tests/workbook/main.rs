//! Tests of the workbook crate.
mod formulas;
mod scenario;
