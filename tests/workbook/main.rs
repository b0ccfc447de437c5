//! x

mod hostile;
mod package;
