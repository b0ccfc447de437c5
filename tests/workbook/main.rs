//! The workbook crate from outside: real, small and hostile workbooks.

mod bare;
mod corpus;
mod files;
mod fill;
mod formulas;
mod graft;
mod hostile;
mod large;
mod memory;
mod model;
mod names_edit;
mod package;
mod patch;
mod references;
mod resolve;
mod roles;
mod scenario;
mod sheets;
mod small;
mod stale;
mod suggest;
mod tools;
mod verify;
