//! x

mod model;
mod names_edit;
mod package;
mod small;
mod stale;
