//! x

mod package;
mod resolve;
mod roles;
mod small;
mod suggest;
