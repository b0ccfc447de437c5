//! x

mod hostile;
mod package;
mod resolve;
mod roles;
mod small;
