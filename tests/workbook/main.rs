//! x

mod package;
