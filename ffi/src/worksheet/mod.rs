//! The worksheet functions behind both add-ins: one table, one set of argument rules.
//!
//! A host hands its arguments over as ranges of cells and gets a range back; [`call`] is all it needs. The
//! arithmetic is `hence_core`'s.

mod arguments;
mod cells;
mod curve;
mod draws;
mod evidence;
mod explain;
mod fault;
mod flows;
mod functions;
mod spread;
mod switching;
mod table;
mod welfare;

pub use cells::{Cell, CellError, Range};
pub use table::{Argument, CATEGORY, FUNCTIONS, Function};

/// Calls a worksheet function.
///
/// `arguments` are those given, in order; `None` (or an argument beyond the last one given) is one left out. Never
/// fails as a whole: what is wrong becomes an error value in the cells concerned.
///
/// ```
/// use hence::worksheet::{Cell, CellError, Function, Range, call};
/// let factor = Function::find("FACTOR").expect("it is in the table");
/// let basis = || Some(Range::single(Cell::Text("100%".into())));
/// let offsets = Range::new(3, 1, vec![Cell::Number(1.0), Cell::Number(2.0), Cell::Text("x".into())]);
/// let answer = call(factor, &[basis(), offsets]);
/// assert_eq!(answer.cells(), [Cell::Number(0.5), Cell::Number(0.25), Cell::Error(CellError::Value)]);
/// assert_eq!(call(factor, &[basis()]).cells(), [Cell::Error(CellError::Value)]);
/// ```
pub fn call(function: &'static Function, arguments: &[Option<Range<'_>>]) -> Range<'static> {
    let answer = arguments::Arguments::new(function, arguments)
        .and_then(|arguments| functions::run(function.name, &arguments));
    match answer {
        Ok(answer) => answer,
        Err(fault) if matches!(function.name, "EXPLAIN" | "WHY") => {
            Range::single(Cell::Text(fault.words.into()))
        }
        Err(fault) => Range::single(Cell::Error(fault.error)),
    }
}
