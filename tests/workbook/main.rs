//! x

mod graft;
mod package;
mod patch;
mod preserve;
mod verify;
