//! Streams and colour: results on standard output, everything else on standard error.

use std::io::{IsTerminal, Write};

use crate::Failure;
use crate::args::ColorWhen;

/// How to write to standard error.
pub struct Terminal {
    color: bool,
}

impl Terminal {
    /// `--color`, then `NO_COLOR`, then `TERM=dumb`, then whether the stream is a terminal.
    pub fn new(when: ColorWhen) -> Self {
        let color = match when {
            ColorWhen::Always => true,
            ColorWhen::Never => false,
            ColorWhen::Auto => {
                let set = std::env::var_os("NO_COLOR").is_some_and(|v| !v.is_empty());
                let dumb = std::env::var_os("TERM").is_some_and(|v| v == "dumb");
                !set && !dumb && std::io::stderr().is_terminal()
            }
        };
        Terminal { color }
    }

    /// A line to standard error. Colour never carries meaning: the words do.
    pub fn say(&self, severity: &str, text: &str) {
        let code = match severity {
            "error" => "31",
            "warning" => "33",
            _ => "2",
        };
        let line = if self.color {
            format!("\x1b[{code}m{severity}:\x1b[0m {}", escape(text))
        } else {
            format!("{severity}: {}", escape(text))
        };
        // Nothing can be done where standard error is closed.
        let _ = writeln!(std::io::stderr(), "{line}");
    }

    /// A text to standard error as it is: a report, where standard output holds something else.
    pub fn tell(&self, text: &str) {
        let _ = std::io::stderr().write_all(text.as_bytes());
    }

    /// Why the run could not go on.
    pub fn complain(&self, text: &str) {
        self.say("error", text);
    }
}

/// Writes to standard output; a closed pipe is told apart from other failures.
pub fn print(text: &str) -> Result<(), Failure> {
    let mut out = std::io::stdout().lock();
    out.write_all(text.as_bytes())?;
    out.flush()?;
    Ok(())
}

/// Control characters that came from a file are shown, not obeyed; line breaks of ours stay.
pub fn escape(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.chars() {
        let bidi = matches!(c, '\u{202a}'..='\u{202e}' | '\u{2066}'..='\u{2069}');
        if c == '\n' || !(c.is_control() || bidi) {
            out.push(c);
        } else {
            out.extend(c.escape_unicode());
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use super::escape;

    #[test]
    fn control_characters_are_shown() {
        assert_eq!(escape("a\u{1b}[31mb\r\n"), "a\\u{1b}[31mb\\u{d}\n");
        assert_eq!(escape("x\u{202e}y"), "x\\u{202e}y");
        assert_eq!(escape("caf\u{e9} \u{2013}"), "caf\u{e9} \u{2013}");
    }
}
