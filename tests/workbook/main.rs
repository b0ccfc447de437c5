//! The workbook crate from outside: real, small and hostile workbooks.

mod bare;
mod fill;
mod formulas;
mod graft;
mod hostile;
mod model;
mod names_edit;
mod package;
mod patch;
mod preserve;
mod references;
mod resolve;
mod roles;
mod samples;
mod scenario;
mod sheets;
mod small;
mod stale;
mod suggest;
mod verify;
