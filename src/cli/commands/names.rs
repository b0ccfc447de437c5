//! `hence names`: which roles a workbook declares, and a copy with suggested names.

use hence_workbook::naming::{names_file, suggest_file};

use crate::args::Names;
use crate::json::{Document, Found};
use crate::terminal::{Terminal, escape};
use crate::{Failure, Outcome, render, terminal};

/// Lists roles; with `--suggest`, writes the guesses into a copy and lists them with their reasons.
pub fn run(args: &Names, terminal: &Terminal) -> Result<Outcome, Failure> {
    let name = super::fill::file_name(&args.book);
    let result = match &args.out {
        Some(out) => suggest_file(&args.book, out, args.force),
        None => names_file(&args.book),
    };
    let report = match result {
        Ok(report) => report,
        Err(error) => {
            render::problems(terminal, &name, error.problems());
            return Ok(if error.is_about_files() { Outcome::CouldNotRun } else { Outcome::Wrong });
        }
    };
    render::problems(terminal, &name, &report.problems);
    if args.json {
        let found: Vec<_> = report
            .found
            .iter()
            .map(
                |f| serde_json::json!({"name": f.name, "role": f.role, "place": f.place, "option": f.option}),
            )
            .collect();
        let guesses: Vec<_> = report
            .guesses
            .iter()
            .map(|g| serde_json::json!({"name": g.name, "place": g.at.to_string(), "why": g.why}))
            .collect();
        let problems: Vec<Found> = report.problems.iter().map(Found::from).collect();
        terminal::print(&Document::text(vec![serde_json::json!({
            "input": args.book.display().to_string(), "found": found, "guesses": guesses,
            "missing": report.missing, "problems": problems
        })]))?;
        return Ok(Outcome::Done);
    }
    let mut text = String::new();
    if !report.found.is_empty() {
        let mut rows = vec![["Name", "Role", "Place", "Option"].map(String::from).to_vec()];
        for f in &report.found {
            rows.push(vec![
                f.name.clone(),
                f.role.clone(),
                f.place.clone(),
                f.option.clone().unwrap_or_default(),
            ]);
        }
        text.push_str(&left_table(&rows));
    }
    for guess in &report.guesses {
        text.push_str(&format!("guess: {} = {}: {}\n", guess.name, guess.at, guess.why));
    }
    for missing in &report.missing {
        text.push_str(&format!("missing: {missing}\n"));
    }
    if let Some(out) = &args.out {
        text.push_str(&format!(
            "{}: a copy with the guessed names; look them over before filling it\n",
            out.display()
        ));
    }
    terminal::print(&escape(&text))?;
    Ok(Outcome::Done)
}

fn left_table(rows: &[Vec<String>]) -> String {
    let width = |c: usize| rows.iter().map(|r| r[c].chars().count()).max().unwrap_or(0);
    let widths: Vec<usize> = (0..rows[0].len()).map(width).collect();
    let mut text = String::new();
    for row in rows {
        let cells: Vec<String> = row.iter().zip(&widths).map(|(cell, w)| format!("{cell:w$}")).collect();
        text.push_str(cells.join("  ").trim_end());
        text.push('\n');
    }
    text
}
