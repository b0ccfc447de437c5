//! x

mod graft;
mod package;
mod patch;
