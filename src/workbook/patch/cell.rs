//! The text of one cell element: rewritten, created, or given a formula of its own.

use super::{Cached, CellWrite, MAX_FORMULA, MAX_TEXT, Settled, problem};
use crate::problem::{Problem, Result};
use crate::references::{Cell, MAX_COLUMNS, MAX_ROWS};
use crate::splice::{Kind, Tokens, bad_xml, escape, prefix, with_attribute};

/// A number with the fewest digits that read back to the same double.
pub(crate) fn shortest(number: f64) -> String {
    if number == 0.0 {
        return "0".to_owned();
    }
    let text = format!("{number:?}");
    text.strip_suffix(".0").map_or(text.clone(), str::to_owned)
}

/// What keeps a write from being made into any cell.
pub(super) fn refusal(at: Cell, write: &CellWrite) -> Option<Problem> {
    if at.row >= MAX_ROWS || at.col >= MAX_COLUMNS {
        let what = format!("lies outside the sheet, which has {MAX_ROWS} rows and {MAX_COLUMNS} columns");
        return Some(problem("outside-sheet", at, &what));
    }
    let text = |what: &str, text: &str, longest: usize| {
        let length = text.chars().map(char::len_utf16).sum::<usize>();
        if escape(text).is_none() {
            let what = format!("would get a {what} with a character that XML does not allow");
            Some(problem("text-characters", at, &what).hint("take control characters out"))
        } else if length > longest {
            let what = format!("would get a {what} of {length} characters; {longest} are allowed");
            Some(problem("text-length", at, &what).hint("shorten it"))
        } else {
            None
        }
    };
    let number = |number: f64| {
        (!number.is_finite()).then(|| {
            problem("not-finite", at, &format!("would get {number}, which no cell can hold"))
                .hint("check the flows and rates that lead to it")
        })
    };
    match write {
        CellWrite::Number(value) => number(*value),
        CellWrite::Text(value) => text("text", value, MAX_TEXT),
        CellWrite::Formula(formula, cached) => {
            text("formula", formula, MAX_FORMULA).or_else(|| match cached {
                Cached::Number(value) => number(*value),
                Cached::Text(value) => text("text", value, MAX_TEXT),
                Cached::None => None,
            })
        }
        CellWrite::DropValue => None,
        CellWrite::Result(Settled::Number(value)) => number(*value),
        CellWrite::Result(Settled::Text(value) | Settled::Error(value)) => text("text", value, MAX_TEXT),
        CellWrite::Result(Settled::Logical(_)) => None,
    }
}

/// A cell that was not there before.
pub(super) fn created(prefix: &str, at: Cell, style: Option<&str>, write: &CellWrite) -> Result<String> {
    let style = style.map_or(String::new(), |s| format!(" s=\"{s}\""));
    written(&format!("<{prefix}c r=\"{at}\"{style}/>"), prefix, write)
}

/// A cell with new content. Of the old one, its place, style and extensions stay.
pub(super) fn written(raw: &str, prefix: &str, write: &CellWrite) -> Result<String> {
    let parts = Parts::read(raw, prefix)?;
    let mut tag = with_attribute(parts.tag, "t", None)?;
    tag = with_attribute(&tag, "vm", None)?;
    let mut content = String::new();
    match write {
        CellWrite::DropValue | CellWrite::Result(_) => content.push_str(parts.formula),
        _ => tag = with_attribute(&tag, "cm", None)?,
    }
    match write {
        CellWrite::DropValue => {}
        CellWrite::Result(settled) => {
            let (kind, text) = match settled {
                Settled::Number(number) => (None, shortest(*number)),
                Settled::Text(text) => (Some("str"), escaped(&coded(text))?),
                Settled::Logical(truth) => (Some("b"), u8::from(*truth).to_string()),
                Settled::Error(error) => (Some("e"), escaped(error)?),
            };
            tag = with_attribute(&tag, "t", kind)?;
            content += &value(prefix, &text);
        }
        CellWrite::Number(number) => content = value(prefix, &shortest(*number)),
        CellWrite::Text(text) => {
            tag = with_attribute(&tag, "t", Some("inlineStr"))?;
            content = format!("<{prefix}is>{}</{prefix}is>", inline(prefix, text)?);
        }
        CellWrite::Formula(formula, cached) => {
            content = format!("<{prefix}f>{}</{prefix}f>", escaped(formula)?);
            match cached {
                Cached::Number(number) => content += &value(prefix, &shortest(*number)),
                Cached::Text(text) => {
                    tag = with_attribute(&tag, "t", Some("str"))?;
                    content += &value(prefix, &escaped(&coded(text))?);
                }
                Cached::None => {}
            }
        }
    }
    Ok(parts.assembled(&tag, &content))
}

/// A dependent of a shared formula with that formula as its own; its value stays.
pub(super) fn unshared(raw: &str, prefix: &str, formula: &str) -> Result<String> {
    let parts = Parts::read(raw, prefix)?;
    let mut tag = parts.formula_tag.trim_end_matches('>').trim_end_matches('/').to_owned() + ">";
    for name in ["t", "ref", "si"] {
        tag = with_attribute(&tag, name, None)?;
    }
    let content = format!("{tag}{}</{prefix}f>{}", escaped(formula)?, parts.value);
    Ok(parts.assembled(parts.tag, &content))
}

fn value(prefix: &str, escaped: &str) -> String {
    format!("<{prefix}v>{escaped}</{prefix}v>")
}

fn escaped(text: &str) -> Result<String> {
    escape(text).ok_or_else(|| bad_xml("a text holds a character that XML does not allow"))
}

/// The text element of an inline string.
pub(crate) fn inline(prefix: &str, text: &str) -> Result<String> {
    let kept = text.starts_with(char::is_whitespace) || text.ends_with(char::is_whitespace);
    let space = if kept || text.contains(['\n', '\t']) { " xml:space=\"preserve\"" } else { "" };
    Ok(format!("<{prefix}t{space}>{}</{prefix}t>", escaped(&coded(text))?))
}

/// A text as cells store it: what would be read as a code (`_x0041_`) has its underscore coded,
/// and so has the carriage return, which XML would turn into a line feed.
fn coded(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for (i, c) in text.char_indices() {
        let rest = &text.as_bytes()[i..];
        let code = rest.len() >= 7
            && rest[1] == b'x'
            && rest[2..6].iter().all(u8::is_ascii_hexdigit)
            && rest[6] == b'_';
        match c {
            '_' if code => out.push_str("_x005F_"),
            '\r' => out.push_str("_x000D_"),
            _ => out.push(c),
        }
    }
    out
}

/// A cell element taken apart.
struct Parts<'a> {
    tag: &'a str,
    name: &'a str,
    /// The `f` element, empty without one.
    formula: &'a str,
    formula_tag: &'a str,
    /// `v` and `is`, as they stand.
    value: String,
    /// Other children: extensions, comments.
    rest: String,
}

impl<'a> Parts<'a> {
    fn read(raw: &'a str, own: &str) -> Result<Parts<'a>> {
        let mut tokens = Tokens::new(raw.as_bytes())?;
        let Some(first) = tokens.next()? else { return Err(bad_xml("a cell is empty")) };
        let (tag, name) = (&raw[first.span()], &raw[first.span()][1..=first.name().len()]);
        let mut parts =
            Parts { tag, name, formula: "", formula_tag: "", value: String::new(), rest: String::new() };
        let mut child = None;
        while let Some(token) = tokens.next()? {
            let depth = tokens.depth();
            match token.kind {
                Kind::Open if depth == 2 => child = Some((token.start, token.name())),
                Kind::Open => {}
                Kind::Empty if depth > 1 => {}
                Kind::Other if depth == 1 => parts.rest.push_str(token.raw),
                Kind::Close if depth == 1 => {
                    if let Some((start, name)) = child.take() {
                        parts.keep(&raw[start..token.span().end], name, own);
                    }
                }
                Kind::Empty => parts.keep(&raw[token.span()], token.name(), own),
                Kind::Close | Kind::Text | Kind::Other => {}
            }
        }
        Ok(parts)
    }

    fn keep(&mut self, element: &'a str, name: &str, own: &str) {
        match name.strip_prefix(own).filter(|_| prefix(name) == own) {
            Some("f") => {
                self.formula = element;
                self.formula_tag = &element[..element.find('>').map_or(element.len(), |i| i + 1)];
            }
            Some("v" | "is") => self.value.push_str(element),
            _ => self.rest.push_str(element),
        }
    }

    fn assembled(&self, tag: &str, content: &str) -> String {
        let open = tag.trim_end_matches('>').trim_end_matches('/').trim_end();
        let rest = &self.rest;
        if content.is_empty() && rest.is_empty() {
            format!("{open}/>")
        } else {
            format!("{open}>{content}{rest}</{}>", self.name)
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn numbers_are_shortest_and_round_trip() {
        let numbers = [0.1, 1.0, -2.5, 1e300, 5e-324, 0.1 + 0.2, 1e15, 1e16, 123_456_789.0, -1e-7, f64::MAX];
        for number in numbers {
            assert_eq!(shortest(number).parse::<f64>().unwrap(), number);
        }
        assert_eq!(shortest(1.0), "1");
        assert_eq!(shortest(0.1 + 0.2), "0.30000000000000004");
        assert_eq!(shortest(-0.0), "0");
        assert_eq!(shortest(1e300), "1e300");
    }

    #[test]
    fn codes_in_texts_are_escaped() {
        assert_eq!(coded("a_x0041_b"), "a_x005F_x0041_b");
        assert_eq!(coded("_x00zz_ é\r\n"), "_x00zz_ é_x000D_\n");
    }
}
