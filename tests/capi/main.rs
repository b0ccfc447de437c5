//! The C interface as C sees it: header, symbols, layout, abuse, threads, and the reference rows.

mod abuse;
mod examples;
mod header;
mod install;
mod layout;
mod library;
mod loaded;
mod readme;
mod reference;
mod symbols;
mod threads;
mod welfare;
