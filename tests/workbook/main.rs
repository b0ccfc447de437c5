//! Tests of the workbook crate.
mod formulas;
mod graft;
mod model;
mod names_edit;
mod package;
mod patch;
mod references;
mod scenario;
mod sheets;
mod small;
mod stale;
