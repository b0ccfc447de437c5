//! `hence names`: which roles a workbook declares, and a copy with suggested names.

use hence_workbook::naming::{Naming, roles_of, with_suggestions};
use hence_workbook::package::write_atomically;
use hence_workbook::problem::{Result as BookResult, Severity};

use crate::args::Names;
use crate::json::{Document, Found};
use crate::outputs::{self, Output};
use crate::terminal::{self, Terminal, escape};
use crate::{Failure, Outcome, input, render};

/// Lists roles; with `--suggest`, writes the guesses into a copy and lists them with their reasons.
pub fn run(args: &Names, terminal: &Terminal) -> Result<Outcome, Failure> {
    let shown = input::shown(&args.source.book);
    let output = args.out.as_deref().map(Output::named).transpose()?;
    let streams = output == Some(Output::Stream);
    if streams && args.document.json {
        return Err(Failure::Message(
            "--json and --out - both want standard output\nTry: --out with a file".into(),
        ));
    }
    let (report, bytes) = match examine(args, output.as_ref()) {
        Ok(result) => result,
        Err(error) => {
            render::problems(terminal, &shown, error.problems());
            if args.document.json {
                let problems: Vec<Found> = error.problems().iter().map(Found::from).collect();
                terminal::print(&Document::text(vec![serde_json::json!({
                    "input": shown, "output": null, "found": [], "guesses": [], "missing": [], "problems": problems
                })]))?;
            }
            return Ok(Outcome::of(&error));
        }
    };
    render::problems(terminal, &shown, &report.problems);
    let written = output.as_ref().map(Output::shown);
    if args.document.json {
        terminal::print(&json(&shown, written.as_deref(), &report))?;
    } else if streams {
        terminal.tell(&text(written.as_deref(), &report));
    } else {
        terminal::print(&text(written.as_deref(), &report))?;
    }
    if streams {
        outputs::stream(&bytes)?;
    }
    let wrong = report.problems.iter().any(|problem| problem.severity == Severity::Error);
    Ok(if wrong { Outcome::Wrong } else { Outcome::Done })
}

/// The report, and the copy's bytes where one was asked for.
fn examine(args: &Names, output: Option<&Output>) -> BookResult<(Naming, Vec<u8>)> {
    let package = input::open(&args.source.book)?;
    let Some(output) = output else { return Ok((roles_of(&package)?, Vec::new())) };
    output.may_write(&args.source.book, args.overwrite.force)?;
    let (report, bytes) = with_suggestions(&package)?;
    if let Output::File(path) = output {
        write_atomically(path, &bytes, args.overwrite.force)?;
    }
    Ok((report, bytes))
}

fn json(shown: &str, written: Option<&str>, report: &Naming) -> String {
    let found: Vec<_> = report
        .found
        .iter()
        .map(|f| {
            let place = f.place.to_string();
            serde_json::json!({"name": f.name, "role": f.role, "place": place, "option": f.option})
        })
        .collect();
    let guesses: Vec<_> = report
        .guesses
        .iter()
        .map(|g| serde_json::json!({"name": g.name, "place": g.at.to_string(), "why": g.why}))
        .collect();
    let problems: Vec<Found> = report.problems.iter().map(Found::from).collect();
    Document::text(vec![serde_json::json!({
        "input": shown, "output": written, "found": found, "guesses": guesses, "missing": report.missing, "not_named": report.not_named,
        "problems": problems
    })])
}

fn text(written: Option<&str>, report: &Naming) -> String {
    let mut text = String::new();
    if !report.found.is_empty() {
        let mut rows = vec![["Name", "Role", "Place", "Option"].map(String::from).to_vec()];
        for f in &report.found {
            let option = f.option.clone().unwrap_or_default();
            rows.push(vec![f.name.clone(), f.role.clone(), f.place.to_string(), option]);
        }
        text.push_str(&render::left_table(&rows));
    }
    for guess in &report.guesses {
        text.push_str(&format!("guess: {} = {}: {}\n", guess.name, guess.at, guess.why));
    }
    for row in &report.not_named {
        text.push_str(&format!("no name: {row}\n"));
    }
    for missing in &report.missing {
        text.push_str(&format!("missing: {missing}\n"));
    }
    if let Some(written) = written {
        text.push_str(&format!(
            "{written}: a copy with the guessed names; look them over before filling it\n"
        ));
    }
    escape(&text)
}
