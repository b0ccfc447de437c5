//! The figures of a rate as texts of their own: percentages, hazards, tax brackets.
use super::cursor::{Parsed, Parser};
use super::number::{of_decimal, of_percent};
use crate::{Error, Hazard, Result, Stated, TaxBracket};

/// Reads a percentage such as `0.5%`, as a rate line does.
///
/// **Arguments**: `argument`, the name that an error is about; `text`.
/// **Returns**: a fraction.
/// **Errors**: `Syntax`, with the character and a hint: a number without `%` is refused, since 0.5 may mean either.
///
/// ```
/// use hence_core::parse_percentage;
/// assert_eq!(parse_percentage("preference", "0.5%")?, 0.005);
/// let error = parse_percentage("preference", "0.5").unwrap_err();
/// assert_eq!(error.hint(), Some("`50%` if 0.5 is meant as a fraction, else `0.5%`"));
/// # Ok::<(), hence_core::Error>(())
/// ```
pub fn parse_percentage(argument: &'static str, text: &str) -> Result<f64> {
    read(argument, text, Parser::percent)
}

/// Reads a plain number such as `1.5`.
///
/// **Arguments**: as for [`parse_percentage`].
/// **Errors**: `Syntax`, with the character and a hint.
pub fn parse_number(argument: &'static str, text: &str) -> Result<f64> {
    read(argument, text, |parser| parser.decimal("a plain number such as `1.5`"))
}

impl Stated {
    /// Reads `estimated`, or else what `parse` reads.
    pub(crate) fn read(text: &str, parse: impl FnOnce(&str) -> Result<f64>) -> Result<Self> {
        if text.trim().eq_ignore_ascii_case("estimated") {
            return Ok(Stated::Estimated);
        }
        parse(text).map(Stated::Given)
    }
}

impl Hazard {
    /// Reads `1%`, `probability 1%` or `every 100 years`.
    ///
    /// **Errors**: `Syntax` about the argument "hazard", with the character and a hint.
    ///
    /// ```
    /// use hence_core::Hazard;
    /// assert_eq!(Hazard::parse("1%")?, Hazard::Rate(0.01));
    /// assert_eq!(Hazard::parse("Probability 1%")?, Hazard::Probability(0.01));
    /// assert_eq!(Hazard::parse("every 100 years")?, Hazard::Every(100.0));
    /// assert!(Hazard::parse("once in 100 years").is_err());
    /// # Ok::<(), hence_core::Error>(())
    /// ```
    pub fn parse(text: &str) -> Result<Self> {
        read("hazard", text, |parser| {
            if parser.word("probability") {
                return Ok(Hazard::Probability(parser.percent()?));
            }
            if parser.word("every") {
                let years = parser.decimal("a number of years")?;
                parser.one_of(&["years", "year"])?;
                return Ok(Hazard::Every(years));
            }
            if parser.token().is_number() {
                return Ok(Hazard::Rate(parser.percent()?));
            }
            let what = "a rate such as `1%`, `probability 1%` or `every 100 years`";
            Err(parser.unexpected(what, &["probability", "every"]).into())
        })
    }
}

impl TaxBracket {
    /// Reads `MARGINAL,AVERAGE` or `MARGINAL,AVERAGE,WEIGHT`; tax rates as `40%` or `0.4`, the weight a plain number, 1
    /// where it is left out.
    ///
    /// **Errors**: `Syntax` about the argument "taxes", with the character and a hint.
    ///
    /// ```
    /// use hence_core::TaxBracket;
    /// let bracket = TaxBracket::parse("40%, 25%, 1200")?;
    /// assert_eq!(bracket, TaxBracket { marginal: 0.4, average: 0.25, weight: 1200.0 });
    /// assert_eq!(TaxBracket::parse("0.4,0.25")?, TaxBracket { weight: 1.0, ..bracket });
    /// assert!(TaxBracket::parse("40%").is_err());
    /// # Ok::<(), hence_core::Error>(())
    /// ```
    pub fn parse(text: &str) -> Result<Self> {
        read("taxes", text, |parser| {
            let marginal = tax(parser)?;
            comma(parser, "`,` and the average rate")?;
            let average = tax(parser)?;
            let mut weight = 1.0;
            if parser.sign(',') {
                weight = of_decimal(&parser.number_text("the weight of the bracket, a plain number")?);
            }
            Ok(TaxBracket { marginal, average, weight })
        })
    }
}

fn tax(parser: &mut Parser) -> Parsed<f64> {
    let text = parser.number_text("a tax rate such as `40%`")?;
    Ok(if parser.sign('%') { of_percent(&text) } else { of_decimal(&text) })
}

fn comma(parser: &mut Parser, what: &str) -> Parsed<()> {
    if parser.sign(',') { Ok(()) } else { Err(parser.unexpected(what, &[]).into()) }
}

/// Reads the whole text; an error is about `argument`.
pub(super) fn read<T>(
    argument: &'static str,
    text: &str,
    value: impl FnOnce(&mut Parser) -> Parsed<T>,
) -> Result<T> {
    let whole = || {
        let mut parser = Parser::new(text).map_err(|fault| not_a_line(&fault.error))?;
        let value = value(&mut parser)?;
        parser.end()?;
        Ok(value)
    };
    whole().map_err(|fault: super::Fault| fault.explained(text).about(argument))
}

/// The lexer's error about a stray character, which speaks of rate lines.
fn not_a_line(error: &Error) -> Error {
    let message = error.message().replace(" in a rate line", " here").replace("the rate line", "the text");
    let made = Error::new(error.kind(), error.argument(), message);
    error.at().map_or(made.clone(), |at| made.with_at(at))
}
