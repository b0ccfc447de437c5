//! Reading a rate line token by token, and the errors that point at where it stopped.
use super::lexer::{Kind, Token, tokens};
use super::number::{in_range, move_point, of_decimal, of_percent};
use super::{Fault, nearest, percent, quoted};
use crate::{Error, ErrorKind};

pub(super) type Parsed<T> = Result<T, Fault>;

/// The tokens of a line and how far they have been read.
pub(super) struct Parser {
    tokens: Vec<Token>,
    next: usize,
}

impl Parser {
    pub fn new(text: &str) -> Parsed<Self> {
        Ok(Parser { tokens: tokens(text)?, next: 0 })
    }

    /// The token `ahead` of the next one; the end goes on for ever.
    pub fn peek(&self, ahead: usize) -> &Token {
        &self.tokens[(self.next + ahead).min(self.tokens.len() - 1)]
    }

    pub fn token(&self) -> &Token {
        self.peek(0)
    }

    pub fn skip(&mut self) {
        self.next = (self.next + 1).min(self.tokens.len() - 1);
    }

    /// The character the next token stands at.
    pub fn at(&self) -> usize {
        self.token().at
    }

    pub fn is_sign(&self, sign: char) -> bool {
        self.token().kind == Kind::Sign(sign)
    }

    /// Takes the sign if it is next.
    pub fn sign(&mut self, sign: char) -> bool {
        let found = self.is_sign(sign);
        if found {
            self.skip();
        }
        found
    }

    pub fn is_word(&self, word: &str) -> bool {
        matches!(&self.token().kind, Kind::Word(found) if found == word)
    }

    /// Takes the word if it is next.
    pub fn word(&mut self, word: &str) -> bool {
        let found = self.is_word(word);
        if found {
            self.skip();
        }
        found
    }

    /// Takes one of the words, or says which were expected.
    pub fn one_of<'a>(&mut self, words: &[&'a str]) -> Parsed<&'a str> {
        if let Some(word) = words.iter().find(|word| self.is_word(word)) {
            self.skip();
            return Ok(word);
        }
        let ticked: Vec<String> = words.iter().map(|word| format!("`{word}`")).collect();
        let expected = match ticked.split_last() {
            Some((last, rest)) if !rest.is_empty() => format!("{} or {last}", rest.join(", ")),
            _ => ticked.concat(),
        };
        Err(self.unexpected(&expected, words).into())
    }

    /// Whether the curve is over: the end of the line, or the bracket that closes it.
    pub fn finished(&self) -> bool {
        self.token().kind == Kind::End || self.is_sign(')')
    }

    /// Nothing may follow.
    pub fn end(&self) -> Parsed<()> {
        if self.token().kind == Kind::End { Ok(()) } else { Err(self.unexpected("the end", &[]).into()) }
    }

    /// An error at the next token.
    pub fn error(&self, message: impl Into<String>) -> Error {
        self.error_at(ErrorKind::Syntax, self.at(), message)
    }

    pub fn error_at(&self, kind: ErrorKind, at: usize, message: impl Into<String>) -> Error {
        Error::new(kind, "basis", message).with_at(at)
    }

    /// "expected ..., found ...", with the nearest of `words` as the hint.
    pub fn unexpected(&self, expected: &str, words: &[&str]) -> Error {
        let token = self.token();
        let error = self.error(format!("expected {expected}, found {}", token.found()));
        match &token.kind {
            Kind::Word(found) => match nearest(found, words.iter().copied()) {
                Some(word) if word != found => error.with_hint(format!("`{word}`")),
                _ => error,
            },
            _ => error,
        }
    }

    /// A percentage, as a fraction.
    pub fn percent(&mut self) -> Parsed<f64> {
        let at = self.at();
        let text = self.number_text("a rate such as `3.5%`")?;
        if self.sign('%') {
            return self.finite(of_percent(&text), at);
        }
        let number = self.next - 1;
        let comma = self.comma_after(number).or_else(|| self.comma_before(number));
        if let Some(comma) = comma {
            return Err(self.decimal_comma(comma));
        }
        let here = self.tokens[number].end;
        let error = self.error_at(ErrorKind::Syntax, here, format!("expected `%` after {}", quoted(&text)));
        let fraction = of_decimal(&text);
        let shown = move_point(&text, 0);
        Err(if in_range(fraction) && text.contains('.') {
            error.with_hint(format!(
                "`{}` if {shown} is meant as a fraction, else `{shown}%`",
                percent(fraction)
            ))
        } else {
            error.with_hint(format!("`{}%`", shown.chars().take(40).collect::<String>()))
        }
        .into())
    }

    /// A plain number, where a comma and another number may follow.
    pub fn number(&mut self, what: &str) -> Parsed<f64> {
        let at = self.at();
        let text = self.number_text(what)?;
        if self.is_sign('%') {
            return Err(self.unexpected(&format!("{what}, without `%`"), &[]).into());
        }
        self.finite(of_decimal(&text), at)
    }

    /// A plain number, where no other number may follow: a comma between digits is a decimal comma.
    pub fn decimal(&mut self, what: &str) -> Parsed<f64> {
        let number = self.number(what)?;
        self.refuse_comma()?;
        Ok(number)
    }

    /// Refuses a decimal comma after the number just read.
    pub fn refuse_comma(&self) -> Parsed<()> {
        self.comma_after(self.next - 1).map_or(Ok(()), |comma| Err(self.decimal_comma(comma)))
    }

    /// The digits of a number.
    pub fn number_text(&mut self, what: &str) -> Parsed<String> {
        let Kind::Number(text) = self.token().kind.clone() else {
            return Err(self.unexpected(what, &[]).into());
        };
        self.skip();
        Ok(text)
    }

    fn finite(&self, number: f64, at: usize) -> Parsed<f64> {
        if number.is_finite() {
            return Ok(number);
        }
        Err(self.error_at(ErrorKind::NotFinite, at, "the number is too large").into())
    }

    fn decimal_comma(&self, at: usize) -> Fault {
        let message = "expected a decimal point, found a decimal comma";
        Fault { error: self.error_at(ErrorKind::Syntax, at, message), comma: Some(at) }
    }

    /// Where a comma stands between the digits of token `i` and the digits after it.
    fn comma_after(&self, i: usize) -> Option<usize> {
        let [number, comma, digits, ..] = self.tokens.get(i..)? else { return None };
        let whole = |token: &Token| matches!(&token.kind, Kind::Number(text) if !text.contains('.'));
        let touching = number.end == comma.at && comma.end == digits.at;
        // A sign would make the second number longer than its digits.
        let unsigned = matches!(&digits.kind, Kind::Number(text) if digits.end - digits.at == text.len()
            && !text.starts_with('-'));
        (comma.kind == Kind::Sign(',') && touching && whole(number) && whole(digits) && unsigned)
            .then_some(comma.at)
    }

    fn comma_before(&self, i: usize) -> Option<usize> {
        self.comma_after(i.checked_sub(2)?)
    }
}
