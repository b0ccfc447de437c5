//! The workbook crate from outside: real, small and hostile workbooks.

mod bare;
mod codes;
mod corpus;
mod fill;
mod formulas;
mod graft;
mod hostile;
mod libreoffice;
mod model;
mod names_edit;
mod numbers;
mod own;
mod package;
mod patch;
mod readme;
mod references;
mod resolve;
mod roles;
mod samples;
mod scenario;
mod sheets;
mod small;
mod stale;
mod suggest;
mod tools;
mod verify;
