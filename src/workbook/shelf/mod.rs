//! A shelf of workbooks: what a run over many of them keeps of each.

mod record;

pub use record::Record;
