//! A shelf of workbooks: the work on each, what a run keeps of it, how a later run knows what was done, and what is said of
//! them all.

mod flips;
mod link;
pub mod mishap;
mod record;
mod request;
mod seal;
pub mod summary;
mod work;

pub use crate::package::sha256;
pub use record::Record;
pub use seal::record_of;
pub use work::{Done, EXTENSIONS, Order, output_is_input, work};

pub(crate) use seal::{part as record_part, prepare, sealed};
