//! x

mod graft;
mod hostile;
mod model;
mod names_edit;
mod package;
mod patch;
mod preserve;
mod references;
mod small;
mod stale;
mod verify;
