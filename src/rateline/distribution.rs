//! The text of a distribution: what preference, hazard, elasticity or growth is drawn from.
use super::cursor::{Parsed, Parser};
use super::figures::read;
use super::lexer::Kind;
use super::number::{of_decimal, of_percent};
use super::plain;
use crate::{Compounding, Distribution, Hazard, Quantity, Result};
use crate::{hazard_from_probability, hazard_from_waiting_time};

const WORDS: [&str; 3] = ["normal", "uniform", "triangular"];

impl Distribution {
    /// Reads the text of a distribution; the grammar is that of [`Distribution`]. Case and spacing do not matter.
    ///
    /// **Arguments**: `quantity`, whose values the text states: in percent, an elasticity as plain numbers; `text`. A
    /// hazard may also be `probability 1%` or `every 100 years`, as in [`Hazard::parse`].
    ///
    /// **Errors**: `Syntax`, with the character and a hint; those of
    /// [`RateDistribution::new`](crate::RateDistribution::new). The error's argument is the quantity's name.
    ///
    /// ```
    /// use hence_core::{Distribution, Quantity};
    /// let growth = Distribution::parse(Quantity::Growth, "Normal, mean 2.0% SD 0.5%")?;
    /// assert_eq!(growth.text(Quantity::Growth), "normal mean 2% sd 0.5%");
    /// let eta = Distribution::parse(Quantity::Elasticity, "triangular 1, 1.5, 2")?;
    /// assert_eq!(eta, Distribution::Triangular { lowest: 1.0, mode: 1.5, highest: 2.0 });
    ///
    /// let error = Distribution::parse(Quantity::Growth, "normal mean 2% sd 0,5%").unwrap_err();
    /// assert_eq!((error.at(), error.hint()), (Some(19), Some("normal mean 2% sd 0.5%")));
    /// # Ok::<(), hence_core::Error>(())
    /// ```
    pub fn parse(quantity: Quantity, text: &str) -> Result<Self> {
        let first = text.split_whitespace().next().unwrap_or_default().to_ascii_lowercase();
        if quantity == Quantity::Hazard && matches!(first.as_str(), "probability" | "every") {
            let rate = match Hazard::parse(text)? {
                Hazard::Rate(rate) => rate,
                Hazard::Probability(p) => hazard_from_probability(p, Compounding::Yearly)?,
                Hazard::Every(years) => hazard_from_waiting_time(years, Compounding::Yearly)?,
            };
            return Ok(Distribution::Fixed(rate));
        }
        let distribution = read(quantity.name(), text, |parser| distribution(parser, quantity))?;
        distribution.check(quantity)?;
        Ok(distribution)
    }

    /// The canonical text, which parses back to the same distribution.
    pub fn text(&self, quantity: Quantity) -> String {
        let show = |value: &f64| quantity.text(*value);
        match self {
            Distribution::Fixed(value) => show(value),
            Distribution::Normal { mean, sd, within } => {
                let within = within.map_or(String::new(), |(low, high)| {
                    format!(" within {} to {}", show(&low), show(&high))
                });
                format!("normal mean {} sd {}{within}", show(mean), show(sd))
            }
            Distribution::Uniform { lowest, highest } => {
                format!("uniform {} to {}", show(lowest), show(highest))
            }
            Distribution::Triangular { lowest, mode, highest } => {
                format!("triangular {}, {}, {}", show(lowest), show(mode), show(highest))
            }
            Distribution::Discrete(values) => {
                let one = |(weight, value): &(f64, f64)| format!("{} at {}", plain(*weight), show(value));
                values.iter().map(one).collect::<Vec<_>>().join(", ")
            }
        }
    }
}

fn distribution(parser: &mut Parser, quantity: Quantity) -> Parsed<Distribution> {
    if parser.token().is_number() {
        return if at_follows(parser) { discrete(parser, quantity) } else { fixed(parser, quantity) };
    }
    if !WORDS.iter().any(|word| parser.is_word(word)) {
        let value = if quantity.is_share() { "1%" } else { "1.5" };
        let expected =
            format!("a value such as `{value}`, `normal`, `uniform`, `triangular` or probabilities");
        let error = parser.unexpected(&expected, &WORDS);
        return Err(match error.hint() {
            Some(_) => error,
            None => error.with_hint(example(quantity)),
        }
        .into());
    }
    match parser.one_of(&WORDS)? {
        "normal" => {
            parser.sign(',');
            parser.one_of(&["mean"])?;
            let mean = alone(parser, quantity)?;
            parser.sign(',');
            parser.one_of(&["sd"])?;
            let sd = alone(parser, quantity)?;
            let comma = parser.sign(',');
            let mut within = None;
            if comma || parser.is_word("within") {
                parser.one_of(&["within"])?;
                within = Some(interval(parser, quantity)?);
            }
            Ok(Distribution::Normal { mean, sd, within })
        }
        "uniform" => {
            let (lowest, highest) = interval(parser, quantity)?;
            Ok(Distribution::Uniform { lowest, highest })
        }
        _ => {
            let lowest = listed(parser, quantity)?;
            comma(parser, "`,` and the most likely value")?;
            let mode = listed(parser, quantity)?;
            comma(parser, "`,` and the highest value")?;
            let highest = listed(parser, quantity)?;
            Ok(Distribution::Triangular { lowest, mode, highest })
        }
    }
}

/// A text that a hint may show.
fn example(quantity: Quantity) -> &'static str {
    if quantity.is_share() { "`normal mean 1% sd 0.3%`" } else { "`normal mean 1.5 sd 0.3`" }
}

/// Whether the number that is next is a probability.
fn at_follows(parser: &Parser) -> bool {
    let after = usize::from(parser.peek(1).kind == Kind::Sign('%')) + 1;
    matches!(&parser.peek(after).kind, Kind::Word(word) if word == "at")
}

fn fixed(parser: &mut Parser, quantity: Quantity) -> Parsed<Distribution> {
    let value = alone(parser, quantity)?;
    if parser.is_word("to") {
        let error = parser.unexpected("the end", &[]);
        return Err(error.with_hint("`uniform` before the lowest value").into());
    }
    Ok(Distribution::Fixed(value))
}

fn discrete(parser: &mut Parser, quantity: Quantity) -> Parsed<Distribution> {
    let mut values = Vec::new();
    loop {
        let text = parser.number_text("a probability such as `0.3`")?;
        let weight = if parser.sign('%') { of_percent(&text) } else { of_decimal(&text) };
        parser.refuse_comma()?;
        parser.one_of(&["at"])?;
        values.push((weight, listed(parser, quantity)?));
        if !parser.sign(',') {
            return Ok(Distribution::Discrete(values));
        }
    }
}

/// `1% to 3%`.
fn interval(parser: &mut Parser, quantity: Quantity) -> Parsed<(f64, f64)> {
    let lowest = alone(parser, quantity)?;
    parser.one_of(&["to"])?;
    Ok((lowest, alone(parser, quantity)?))
}

/// A value that no other follows after a comma.
fn alone(parser: &mut Parser, quantity: Quantity) -> Parsed<f64> {
    if quantity.is_share() { parser.percent() } else { parser.decimal("a plain number such as `1.5`") }
}

/// A value that others may follow.
fn listed(parser: &mut Parser, quantity: Quantity) -> Parsed<f64> {
    if quantity.is_share() { parser.percent() } else { parser.number("a plain number such as `1.5`") }
}

fn comma(parser: &mut Parser, what: &str) -> Parsed<()> {
    if parser.sign(',') { Ok(()) } else { Err(parser.unexpected(what, &[]).into()) }
}
