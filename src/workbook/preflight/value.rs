//! One cell's value: what it says must be read exactly or not at all.

use quick_xml::events::Event;

/// The type of a cell's value.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub(super) enum Kind {
    #[default]
    Number,
    Shared,
    Boolean,
    Error,
    Text,
    Date,
    Inline,
}

impl Kind {
    pub(super) fn of(text: Option<&[u8]>) -> Option<Kind> {
        Some(match text {
            None | Some(b"n") => Kind::Number,
            Some(b"s") => Kind::Shared,
            Some(b"b") => Kind::Boolean,
            Some(b"e") => Kind::Error,
            Some(b"str") => Kind::Text,
            Some(b"d") => Kind::Date,
            Some(b"inlineStr") => Kind::Inline,
            Some(_) => return None,
        })
    }
}

/// The error values that a file may hold.
pub(crate) const ERRORS: [&str; 8] =
    ["#DIV/0!", "#N/A", "#NAME?", "#NULL!", "#NUM!", "#REF!", "#VALUE!", "#GETTING_DATA"];

/// Longest text of a number, error, index or truth value.
const SHORT: usize = 400;

#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
enum Inside {
    #[default]
    Nothing,
    Value,
    Text,
}

/// The value of the cell being read.
#[derive(Default)]
pub(super) struct Value {
    kind: Kind,
    inside: Inside,
    formula: bool,
    value: bool,
    inline: bool,
    /// The text of `<v>`, as far as it matters.
    text: Vec<u8>,
    /// Something other than plain text stands in `<v>`: what.
    odd: Option<&'static str>,
}

impl Value {
    pub(super) fn reset(&mut self, kind: Kind) {
        self.text.clear();
        *self = Value { kind, text: std::mem::take(&mut self.text), ..Value::default() };
    }

    pub(super) fn open_f(&mut self) -> Result<(), &'static str> {
        if self.formula || self.value || self.inline {
            return Err("a formula stands twice or after the value");
        }
        self.formula = true;
        Ok(())
    }

    pub(super) fn open_v(&mut self) -> Result<(), &'static str> {
        if self.value || self.inline {
            return Err("it holds two values");
        }
        (self.value, self.inside) = (true, Inside::Value);
        Ok(())
    }

    pub(super) fn open_is(&mut self) -> Result<(), &'static str> {
        if self.value || self.inline {
            return Err("it holds two values");
        }
        if self.kind != Kind::Inline {
            return Err("it holds a text, but its type says otherwise");
        }
        (self.inline, self.inside) = (true, Inside::Text);
        Ok(())
    }

    pub(super) fn in_text(&self) -> bool {
        self.inside == Inside::Text
    }

    pub(super) fn close(&mut self) {
        self.inside = Inside::Nothing;
    }

    pub(super) fn content(&mut self, event: &Event) {
        if self.inside != Inside::Value {
            return;
        }
        match event {
            Event::Text(text) => {
                let room = (SHORT + 1).saturating_sub(self.text.len());
                self.text.extend_from_slice(&text[..text.len().min(room)]);
            }
            Event::CData(_) => self.odd = Some("CDATA"),
            // Texts may hold references and comments: readers put the pieces together.
            Event::GeneralRef(_) if self.long() => {}
            Event::GeneralRef(_) => self.odd = self.odd.or(Some("a character reference")),
            _ if self.long() => {}
            _ => self.odd = self.odd.or(Some("a comment")),
        }
    }

    fn long(&self) -> bool {
        matches!(self.kind, Kind::Text | Kind::Date | Kind::Inline)
    }

    /// What is wrong with the value, once the cell is read.
    pub(super) fn check(&self, strings: usize) -> Result<(), String> {
        if let Some(odd) = self.odd {
            return Err(format!("the stored value holds {odd}, which programs read in different ways"));
        }
        let text = String::from_utf8_lossy(&self.text);
        let wrong = |what: &str| {
            let text: String = text.chars().take(40).collect();
            Err(format!("the stored value is {text:?}, which is no {what}"))
        };
        // `<v/>` and `<v></v>` say that there is no value.
        if text.is_empty() {
            return Ok(());
        }
        match self.kind {
            Kind::Number if !is_number(&text) => wrong("finite number"),
            Kind::Shared => match text.parse::<usize>() {
                Ok(index) if text.bytes().all(|c| c.is_ascii_digit()) && index < strings => Ok(()),
                _ => wrong(&format!("number of one of the workbook's {strings} texts")),
            },
            Kind::Boolean if !matches!(&*text, "0" | "1" | "true" | "false") => wrong("truth value"),
            Kind::Error if !ERRORS.contains(&&*text) => wrong("error value that the format has"),
            Kind::Inline => wrong("text of a cell that should hold its own text"),
            _ => Ok(()),
        }
    }
}

/// Digits, a point, an exponent: what the format's schema and every reader take for a number, and finite.
fn is_number(text: &str) -> bool {
    let plain = |c: u8| c.is_ascii_digit() || matches!(c, b'.' | b'-' | b'+' | b'e' | b'E');
    text.len() <= SHORT && text.bytes().all(plain) && text.parse::<f64>().is_ok_and(f64::is_finite)
}

#[cfg(test)]
mod tests {
    use super::is_number;

    #[test]
    fn numbers_are_finite_and_plain() {
        for good in ["0", "-0", "1.5", "-1.5E-3", "1e308", "4.9E-324", ".5", "+3", "5."] {
            assert!(is_number(good), "{good}");
        }
        for bad in
            ["NaN", "INF", "inf", "-Infinity", "1e400", " 7", "7 ", "1,5", "0x10", "1_000", "--1", "1e", "e5"]
        {
            assert!(!is_number(bad), "{bad}");
        }
    }
}
