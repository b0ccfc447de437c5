//! `hence plan`: a plan proposed for a workbook, to be looked over and used with `--plan`.

use hence_workbook::package::write_atomically;
use hence_workbook::planfile::{Proposal, propose};
use hence_workbook::problem::{Place, Problem, Result as BookResult};

use crate::args::Plan;
use crate::input::is_dash;
use crate::numbers::count;
use crate::terminal::{self, Terminal};
use crate::{Failure, Outcome, input, render};

/// Prints the plan, or writes it; warnings say what a fill with it would stop at.
pub fn run(args: &Plan, terminal: &Terminal) -> Result<Outcome, Failure> {
    let shown = input::shown(&args.source.book);
    let proposal = match examine(args) {
        Ok(proposal) => proposal,
        Err(error) => {
            render::problems(terminal, &shown, error.problems());
            return Ok(Outcome::of(&error));
        }
    };
    render::problems(terminal, &shown, &proposal.problems);
    match args.out.as_deref().filter(|out| !is_dash(out)) {
        None => terminal::print(&proposal.text)?,
        Some(out) => terminal::print(&terminal::escape(&format!(
            "{}: {} found; look every line over, fill in what is missing, then run\n    hence fill {shown} --plan {}\n",
            out.display(),
            count(proposal.found, "role"),
            out.display()
        )))?,
    }
    Ok(Outcome::Done)
}

/// Makes the proposal, and writes it where a file is named.
fn examine(args: &Plan) -> BookResult<Proposal> {
    let proposal = propose(&input::open(&args.source.book)?)?;
    if let Some(out) = args.out.as_deref().filter(|out| !is_dash(out)) {
        if !out.extension().is_some_and(|extension| extension.eq_ignore_ascii_case("toml")) {
            let message = format!("the plan {} is a .toml file", out.display());
            let hint = out.with_extension("toml").display().to_string();
            return Err(Problem::error("cannot-write", Place::default(), message).hint(hint).into());
        }
        write_atomically(out, proposal.text.as_bytes(), args.overwrite.force)?;
    }
    Ok(proposal)
}
