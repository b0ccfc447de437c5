//! A shelf of workbooks: what a run over many of them asks for, keeps of each, and says of them all.

mod flips;
mod link;
mod record;
mod request;
mod seal;
pub mod summary;

pub use crate::package::sha256;
pub use record::Record;
pub use seal::record_of;

pub(crate) use seal::{part as record_part, prepare, sealed};
