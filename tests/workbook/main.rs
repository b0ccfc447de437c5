//! Tests of the workbook crate.
mod formulas;
mod graft;
mod package;
mod patch;
mod scenario;
