//! x

mod model;
mod names_edit;
mod package;
mod references;
mod small;
mod stale;
