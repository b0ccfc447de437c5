//! The prices of flows: in which they are entered, what makes them real, and how a stream's price grows.

use hence_core::{PriceBasis, parse_financial_year};

use crate::appraisal::{Axis, COMMAND_LINE, Declared, Given, Levels, Prices};
use crate::problem::{Place, Problem};
use crate::roles::Role;

use super::cells::{number, shown};
use super::counted::{check_aligned, place};
use super::find::Named;
use super::groups::{Group, Split};
use super::{Context, settings, streams, texts};

/// Lowest and highest rate of inflation, and of growth of a price against others.
const RATES: (f64, f64) = (-0.5, 1.0);

/// What an option says of its prices.
pub(super) fn prices(
    context: &mut Context,
    split: &Split,
    group: &Group,
    told: Option<&str>,
    axis: &Axis,
) -> Prices {
    let declared = split.of(group, Role::PriceBasis);
    let levels = split.of(group, Role::Prices).and_then(|named| levels(context, named, axis));
    let instead = told.map(|told| Named::told(Role::PriceBasis, "--prices", told));
    let declares = declared.and_then(|named| price_basis(context, named));
    let growth_from = declares.as_ref().and_then(|given| given.value.year);
    let mut prices = Prices { declared: declares, levels, growth_from };
    if let Some(given) = instead.and_then(|named| price_basis(context, &named)) {
        if prices.levels.is_none() && year_differs(&prices, &given) {
            context.report(unconverted(&given, declared));
        }
        let at = declared.and_then(Named::cells);
        prices.declared = Some(Given { at, from: COMMAND_LINE.to_owned(), ..given });
    }
    if let (Some(given), None) = (&prices.declared, split.of(group, Role::Prices))
        && given.value.basis == PriceBasis::Nominal
        && given.value.year.is_some()
        && let Some(named) = declared
    {
        context.report(
            Problem::error(
                "price-basis",
                named.place(),
                "asks for nominal flows in the prices of a year, and nothing says how prices change",
            )
            .hint("name an index of prices or an inflation rate hence_prices, or write `nominal`"),
        );
    }
    prices
}

/// Whether another year of prices is asked for than the workbook states.
fn year_differs(stated: &Prices, asked: &Given<Declared>) -> bool {
    let was = stated.declared.as_ref().map(|given| given.value);
    was.is_none_or(|was| was != asked.value)
}

fn unconverted(asked: &Given<Declared>, declared: Option<&Named>) -> Problem {
    let place = declared.map_or_else(|| Place::name("--prices"), Named::place);
    let year = asked.value.year.map(|year| format!(" of {year}")).unwrap_or_default();
    Problem::error(
        "price-basis",
        place,
        format!("--prices asks for prices{year}, and nothing in the workbook says how prices change"),
    )
    .hint("name an index of prices or an inflation rate hence_prices, or leave --prices out")
}

/// `real 2022`, `nominal`, `nominal to real 2022`.
fn price_basis(context: &mut Context, named: &Named) -> Option<Given<Declared>> {
    let text = texts::text(context, named)?;
    let parsed = parse_price_basis(&text);
    if parsed.is_none() {
        context.report(
            Problem::error(
                "price-basis",
                named.place(),
                format!("`{}` does not say which prices the flows are in", shown(&text)),
            )
            .hint("write `real 2022` (the year of the prices), `real` or `nominal`"),
        );
    }
    parsed.map(|value| Given { value, at: named.cells(), from: named.from.clone() })
}

fn parse_price_basis(text: &str) -> Option<Declared> {
    let (mut real, mut nominal, mut year) = (false, false, None);
    let separators = |c: char| c.is_whitespace() || matches!(c, ',' | ';' | ':' | '(' | ')');
    for word in text.split(separators).filter(|word| !word.is_empty()) {
        match word.to_lowercase().as_str() {
            "real" | "constant" if !real => real = true,
            "nominal" if !nominal && !real => nominal = true,
            "prices" | "in" | "of" | "to" | "terms" | "year" | "flows" => {}
            other if year.is_none() => year = Some(price_year(other)?),
            _ => return None,
        }
    }
    let basis = match (real, nominal) {
        (_, true) => PriceBasis::Nominal,
        (true, false) => PriceBasis::Real,
        (false, false) => return None,
    };
    // `nominal 2022` says nothing: money of the day has no year. With `real` it is a conversion.
    let sound = basis == PriceBasis::Real || real == year.is_some();
    sound.then_some(Declared { basis, year })
}

fn price_year(word: &str) -> Option<i32> {
    match word.parse::<i32>() {
        Ok(year) => (1000..=9999).contains(&year).then_some(year),
        Err(_) => parse_financial_year(word).ok(),
    }
}

/// An index along the years, or an inflation rate in one cell.
fn levels(context: &mut Context, named: &Named, axis: &Axis) -> Option<Given<Levels>> {
    let given = |value| Some(Given { value, at: named.cells(), from: named.from.clone() });
    if named.stated.is_some() || named.at.range.is_single() {
        return given(Levels::Inflation(rate(context, named, "inflation")?));
    }
    if let Some(problem) = streams::wrong_shape(named, axis) {
        context.report(problem);
        return None;
    }
    check_aligned(context, &named.area, &named.from, &axis.at);
    let grid = context.grid(&named.at)?;
    let mut levels = Vec::new();
    for (cell, content) in grid.iter() {
        let place = place(&named.at, cell, &named.from);
        match number(content, place.clone()) {
            Ok(Some(level)) if level > 0.0 => levels.push(level),
            Ok(level) => {
                let found = level.map_or_else(|| "is blank".to_owned(), |level| format!("is {level}"));
                context.report(
                    Problem::error(
                        "price-index",
                        place,
                        format!("{found}, and a level of prices is above 0"),
                    )
                    .hint("enter the level of prices of every year (100, 102, ...), not its change"),
                );
            }
            Err(problem) => context.report(*problem),
        }
    }
    if levels.len() == axis.labels.len() { given(Levels::Index(levels)) } else { None }
}

/// Growth of a stream's price against others.
pub(super) fn growth(context: &mut Context, named: &Named) -> Option<Given<f64>> {
    let value = rate(context, named, "growth")?;
    Some(Given { value, at: named.cells(), from: named.from.clone() })
}

/// A rate a year in one cell.
fn rate(context: &mut Context, named: &Named, what: &str) -> Option<f64> {
    let value = settings::amount(context, named)?;
    if (RATES.0..=RATES.1).contains(&value) {
        return Some(value);
    }
    let message = format!("{what} is {}% a year (stored {value}), allowed -50% to 100%", value * 100.0);
    context.report(
        Problem::error("price-rate", named.place(), message)
            .hint(format!("enter {value}% or {}", value / 100.0)),
    );
    None
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn price_bases_in_words() {
        let of = |basis, year| Some(Declared { basis, year });
        for (text, declared) in [
            ("real 2022", of(PriceBasis::Real, Some(2022))),
            ("Real, 2022/23 prices", of(PriceBasis::Real, Some(2022))),
            ("real", of(PriceBasis::Real, None)),
            ("constant prices of 2022", of(PriceBasis::Real, Some(2022))),
            ("nominal", of(PriceBasis::Nominal, None)),
            ("nominal to real 2022", of(PriceBasis::Nominal, Some(2022))),
            ("2022", None),
            ("nominal 2022", None),
            ("real 22", None),
            ("real 2022 2023", None),
            ("real or nominal", None),
            ("", None),
        ] {
            assert_eq!(parse_price_basis(text), declared, "{text}");
        }
    }
}
