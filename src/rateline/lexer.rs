//! The words, numbers and signs of a rate line, each with the character it stands at.
use super::{Fault, MAX_CHARS, quoted};
use crate::{Error, ErrorKind};

/// What a token is.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum Kind {
    /// A plain decimal, with its sign.
    Number(String),
    /// A word, in lower case.
    Word(String),
    /// One of `% , ; ( )`.
    Sign(char),
    /// The end of the text.
    End,
}

/// A token, from character `at` up to (not including) character `end`.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Token {
    pub kind: Kind,
    pub at: usize,
    pub end: usize,
}

impl Token {
    /// Whether it is a number.
    pub fn is_number(&self) -> bool {
        matches!(self.kind, Kind::Number(_))
    }

    /// The token as an error quotes it.
    pub fn found(&self) -> String {
        match &self.kind {
            Kind::Number(text) | Kind::Word(text) => quoted(text),
            Kind::Sign(sign) => format!("`{sign}`"),
            Kind::End => "the end".into(),
        }
    }
}

/// The minus signs that people and programs write.
fn is_minus(c: char) -> bool {
    matches!(c, '-' | '\u{2212}' | '\u{2013}')
}

/// Cuts a rate line into tokens; the last one is always [`Kind::End`].
pub(super) fn tokens(text: &str) -> Result<Vec<Token>, Fault> {
    let chars: Vec<char> = text.chars().collect();
    if chars.len() > MAX_CHARS {
        return Err(too_long(chars.len()).into());
    }
    let mut tokens = Vec::new();
    let mut at = 0;
    while at < chars.len() {
        let c = chars[at];
        let starts_number = |i: usize| {
            chars.get(i).is_some_and(char::is_ascii_digit)
                || (chars.get(i) == Some(&'.') && chars.get(i + 1).is_some_and(char::is_ascii_digit))
        };
        let mut end = at + 1;
        let kind = if c.is_whitespace() {
            at += 1;
            continue;
        } else if starts_number(at) || ((is_minus(c) || c == '+') && starts_number(at + 1)) {
            let mut number = if is_minus(c) { "-".to_string() } else { String::new() };
            let mut i = if is_minus(c) || c == '+' { at + 1 } else { at };
            let mut point = false;
            while i < chars.len()
                && (chars[i].is_ascii_digit() || (chars[i] == '.' && !point && starts_number(i)))
            {
                if chars[i] == '.' {
                    point = true;
                    if number.is_empty() || number == "-" {
                        number.push('0');
                    }
                }
                number.push(chars[i]);
                i += 1;
            }
            end = i;
            Kind::Number(number)
        } else if c.is_alphabetic() {
            while end < chars.len() && chars[end].is_alphabetic() {
                end += 1;
            }
            Kind::Word(chars[at..end].iter().flat_map(|c| c.to_lowercase()).collect())
        } else if matches!(c, '%' | ',' | ';' | '(' | ')') {
            Kind::Sign(c)
        } else {
            let message = format!("{} has no meaning in a rate line", quoted(&c.to_string()));
            let hint = "a rate such as `3.5%`, bands such as `3.5% to 30, 3% after`, or the id of a schedule";
            return Err(Error::new(ErrorKind::Syntax, "basis", message).with_at(at).with_hint(hint).into());
        };
        tokens.push(Token { kind, at, end });
        at = end;
    }
    tokens.push(Token { kind: Kind::End, at: chars.len(), end: chars.len() });
    Ok(tokens)
}

/// The error for a text over the limit.
pub(super) fn too_long(chars: usize) -> Error {
    let message = format!("the rate line has {chars} characters, allowed are {MAX_CHARS}");
    Error::new(ErrorKind::Syntax, "basis", message)
        .with_at(MAX_CHARS)
        .with_hint("put the curve into a schedule file and write its id")
}

#[cfg(test)]
mod tests {
    use super::*;

    fn kinds(text: &str) -> Vec<Kind> {
        tokens(text).map(|list| list.into_iter().map(|token| token.kind).collect()).unwrap_or_default()
    }

    #[test]
    fn spacing_case_and_minus_signs_do_not_matter() {
        assert_eq!(kinds("3.5% TO 30"), kinds("3.5 %to30"));
        assert_eq!(kinds("-1%"), kinds("\u{2212}1 %"));
        assert_eq!(kinds(".5%"), kinds("+0.5%"));
    }

    #[test]
    fn a_token_knows_its_characters() {
        let list = tokens("\u{a0} 3.5% to").unwrap();
        assert_eq!((list[0].at, list[0].end), (2, 5));
        assert_eq!((list[2].at, list[2].end), (7, 9));
        assert_eq!(list[3].at, 9);
    }

    #[test]
    fn a_stray_character_is_pointed_at() {
        let error = tokens("3.5% \u{20ac}").unwrap_err().error;
        assert_eq!((error.at(), error.kind()), (Some(5), ErrorKind::Syntax));
        assert!(tokens("3.").is_err());
    }

    #[test]
    fn the_limit_is_in_characters() {
        assert!(tokens(&"\u{e9}".repeat(MAX_CHARS)).is_ok());
        let error = tokens(&"1".repeat(MAX_CHARS + 1)).unwrap_err().error;
        assert_eq!(error.at(), Some(MAX_CHARS));
    }
}
