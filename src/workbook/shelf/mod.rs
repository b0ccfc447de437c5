//! A shelf of workbooks: what a run over many of them keeps of each, and what it says of them all.

mod flips;
mod link;
mod record;
pub mod summary;

pub use record::Record;
