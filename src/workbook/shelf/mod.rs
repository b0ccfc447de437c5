//! A shelf of workbooks: what a run over many of them asks for, and what it keeps of each.

mod record;
mod request;
mod seal;

pub use record::Record;
pub use seal::{record_of, sha256};

pub(crate) use seal::{part as record_part, prepare, sealed};
