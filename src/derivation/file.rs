//! A derived rate as a schedule file of its user's own.

use super::{Derivation, Figure};
use crate::rateline::{plain, rounded_number, rounded_percent};
use crate::{Result, Schedule, percent};

impl Derivation {
    /// The rate as the text of a schedule file, every figure's origin among its notes.
    ///
    /// **Arguments**: `id`, lower-case letters, digits and hyphens, a letter first; `year`, the year to cite it by.
    ///
    /// **Returns**: TOML that [`Schedule::parse`] reads back to the same curve.
    ///
    /// **Errors**: `BadSchedule` for an id or a year that a schedule cannot have.
    pub fn schedule(&self, id: &str, year: i32) -> Result<String> {
        let origins = self.figures.iter().map(origin).collect::<Vec<_>>().join("; ");
        let fields = [
            ("id", quoted(id)),
            ("title", quoted("Rate from time preference, elasticity and growth")),
            ("body", quoted("as stated by its user")),
            ("year", year.to_string()),
            ("place", quoted("derivation in the notes")),
            ("address", quoted("")),
            ("line", quoted(&self.spec.to_string())),
            ("prices", quoted("real")),
            ("status", quoted("current")),
            ("complete", "true".to_string()),
            ("checked", quoted("nothing: it is derived, not published")),
            ("notes", quoted(&format!("{} {origins}.", self.sentences.join(" ")))),
        ];
        let text: String = fields.iter().map(|(name, value)| format!("{name} = {value}\n")).collect();
        Schedule::parse(&format!("{id}.toml"), &text)?;
        Ok(text)
    }
}

/// "growth of consumption (g) 1.36% (standard error 0.13%): ...".
fn origin(figure: &Figure) -> String {
    let shown = |value| {
        if figure.share { percent(rounded_percent(value, 4)) } else { plain(rounded_number(value, 4)) }
    };
    let symbol = if figure.symbol.is_empty() { String::new() } else { format!(" ({})", figure.symbol) };
    let error = figure.error.map_or(String::new(), |error| format!(" (standard error {})", shown(error)));
    format!("{}{symbol} {}{error}: {}", figure.name, shown(figure.value), figure.origin)
}

/// A basic string of TOML.
fn quoted(text: &str) -> String {
    let mut quoted = String::from("\"");
    for c in text.chars() {
        match c {
            '"' | '\\' => quoted.extend(['\\', c]),
            c if c.is_control() => quoted.push_str(&format!("\\u{:04X}", c as u32)),
            c => quoted.push(c),
        }
    }
    quoted + "\""
}
