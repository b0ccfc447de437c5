//! The Excel add-in: a library that Excel loads as an `.xll`, with the worksheet functions and the C interface of hence.
//!
//! The host and the add-in speak through one value, [`xloper::Xloper12`], declared here from the public documentation of
//! the host's interface. Arguments become ranges of cells (`arguments`), `hence::worksheet::call` answers, and the answer
//! becomes a value that the host hands back to be freed (`answer`). Nothing here computes.

#[cfg(not(target_pointer_width = "64"))]
compile_error!("the add-in is for 64-bit Excel: its values have the 64-bit layout");

mod answer;
mod arguments;
mod host;
mod lifecycle;
mod procedures;
mod registration;
pub mod xloper;
