//! `hence start`: a ready-named workbook to type into.

use crate::args::Start;
use crate::outputs::{self, Output};
use crate::terminal::{self, Terminal};
use crate::{Failure, Outcome, render};

/// Writes the workbook; an existing file needs `--force`.
pub fn run(args: &Start, terminal: &Terminal) -> Result<Outcome, Failure> {
    let output = Output::named(&args.file)?;
    let shown = output.shown();
    let failed = |error: hence_workbook::problem::WorkbookError| {
        render::problems(terminal, &shown, error.problems());
        Ok(Outcome::CouldNotRun)
    };
    match &output {
        Output::File(path) => {
            if !path.extension().is_some_and(|e| e.eq_ignore_ascii_case("xlsx")) {
                return Err(Failure::Message(format!(
                    "{shown}: the new workbook is an .xlsx file\nTry: {}",
                    path.with_extension("xlsx").display()
                )));
            }
            if let Err(error) = hence_workbook::start::start_file(path, args.overwrite.force) {
                return failed(error);
            }
            terminal::print(&terminal::escape(&format!(
                "{shown}: type the discount rate and the flows into the shaded cells, save it, then run\n    \
                 hence fill {shown}\n"
            )))?;
        }
        Output::Stream => match hence_workbook::start::start() {
            Ok(bytes) => outputs::stream(&bytes)?,
            Err(error) => return failed(error),
        },
    }
    Ok(Outcome::Done)
}
