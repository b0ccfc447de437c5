//! The worksheet functions behind both add-ins: one table, one set of argument rules.
//!
//! A host hands its arguments over as ranges of cells and gets a range back; [`call`] is all it needs. The
//! arithmetic is `hence_core`'s.

mod cells;
mod table;

pub use cells::{Cell, CellError, Range};
pub use table::{Argument, CATEGORY, FUNCTIONS, Function};

/// Calls a worksheet function.
///
/// `arguments` are those given, in order; `None` (or an argument beyond the last one given) is one left out. Never
/// fails as a whole: what is wrong becomes an error value in the cells concerned.
pub fn call(_function: &Function, _arguments: &[Option<Range<'_>>]) -> Range<'static> {
    Range::single(Cell::Error(CellError::Value))
}
