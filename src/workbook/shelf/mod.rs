//! A shelf of workbooks: the work on each, what a run keeps of it, and how a later run knows what was done.

pub mod mishap;
mod record;
mod request;
mod seal;
mod work;

pub use record::Record;
pub use seal::{record_of, sha256};
pub use work::{Done, EXTENSIONS, Order, work};

pub(crate) use seal::{part as record_part, prepare, sealed};
pub(crate) use work::output_is_input;
