//! `hence start`: a ready-named workbook to type into.

use crate::args::Start;
use crate::{Failure, Outcome, terminal};

/// Writes the workbook; an existing file needs `--force`.
pub fn run(args: &Start) -> Result<Outcome, Failure> {
    if !args.file.extension().is_some_and(|e| e.eq_ignore_ascii_case("xlsx")) {
        return Err(Failure::Message(format!("{}: the new workbook is an .xlsx file", args.file.display())));
    }
    hence_workbook::start::start_file(&args.file, args.force)
        .map_err(|error| Failure::Message(format!("{}: {error}", args.file.display())))?;
    let file = args.file.display();
    terminal::print(&format!(
        "{file}: type base year, basis, years and flows into the shaded cells, then run\n    hence fill {file}\n"
    ))?;
    Ok(Outcome::Done)
}
