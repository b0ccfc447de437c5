//! From flows as entered to flows as valued: money of the day made real, prices that grow against others, weights.

use chrono::Datelike;
use hence_core::{Basis, PriceBasis, Tail, real_flows, real_flows_by_inflation};

use crate::appraisal::{Axis, Choice, Label, Levels, Stream};
use crate::clock::{base_year, years_between_middles};
use crate::outcome::ChoiceOutcome;
use crate::problem::{Place, Problem, Result};
use crate::valuation::{from_core, place_of};

/// Years from the price base to the year of each flow. Prices are those of a whole year, wherever in it a flow stands;
/// where columns are not a year each, those of the middle of a period.
///
/// **Errors**: a price year that years counted from 0 cannot be compared with.
pub(crate) fn years_of_prices(axis: &Axis, choice: &Choice) -> Result<Vec<f64>> {
    let (stated, base) = (choice.prices.year(), base_year(&choice.base.value));
    let from = match (stated, axis.labels.first()) {
        (Some(year), Some(Label::Number(_) | Label::Offset(_))) => match base {
            // These count from the base.
            Some(base) => year - base,
            None => {
                let given = choice.prices.declared.as_ref();
                let place = given.map_or_else(Place::default, |given| place_of(&given.at, &given.from));
                let message =
                    format!("the years are counted from 0, so prices of {year} have no place among them");
                return Err(Problem::error("price-year", place, message)
                    .hint("state the base as a calendar year in hence_base, or the prices without a year")
                    .into());
            }
        },
        (None, Some(Label::Number(_) | Label::Offset(_))) => 0,
        (stated, _) => stated.or(base).unwrap_or(0),
    };
    if let Some(middles) = years_between_middles(axis, &choice.base.value)? {
        // Calendar years count from the base's, numbers from 0.
        let counted = matches!(axis.labels.first(), Some(Label::Number(_)));
        let shift = from - if counted { 0 } else { base.unwrap_or(0) };
        return Ok(middles.iter().map(|n| n - f64::from(shift)).collect());
    }
    let year = |label: &Label| match label {
        Label::Year(year) | Label::Number(year) | Label::Financial(year, _) => f64::from(*year),
        Label::Date(date) => f64::from(date.year()),
        Label::Offset(t) => *t,
    };
    Ok(axis.labels.iter().map(|label| year(label) - f64::from(from)).collect())
}

/// What multiplies each flow of a stream as entered, besides sign, unit and uplift; none where nothing does.
pub(crate) fn multipliers(
    stream: &Stream,
    choice: &Choice,
    axis: &Axis,
    weight: Option<f64>,
) -> Result<Option<Vec<f64>>> {
    let priced = choice.prices.levels.is_some() || stream.growth.is_some();
    let weights = weight.map(|weight| vec![weight; axis.labels.len()]);
    if !priced {
        return Ok(weights);
    }
    let years = years_of_prices(axis, choice)?;
    let ones = vec![1.0; years.len()];
    let mut all = match &choice.prices.levels {
        None => ones,
        Some(given) => {
            let failed = |error: hence_core::Error| from_core(&error, place_of(&given.at, &given.from));
            match &given.value {
                Levels::Inflation(rate) => real_flows_by_inflation(&ones, &years, *rate).map_err(failed)?,
                Levels::Index(levels) => {
                    let Some(base) = price_base(&years) else { return Err(no_level(choice).into()) };
                    real_flows(&ones, levels, base).map_err(failed)?
                }
            }
        }
    };
    if let Some(growth) = &stream.growth {
        let lead = growth_lead(choice);
        for (multiplier, n) in all.iter_mut().zip(&years) {
            *multiplier *= (1.0 + growth.value).powf(n + lead);
        }
    }
    all.iter_mut().for_each(|multiplier| *multiplier *= weight.unwrap_or(1.0));
    Ok(Some(all))
}

/// Years from the year from which relative prices grow to the price base: 0 but where the command line moves that.
fn growth_lead(choice: &Choice) -> f64 {
    let base = choice.prices.year().or(base_year(&choice.base.value));
    base.zip(choice.prices.growth_from).map_or(0.0, |(base, from)| f64::from(base - from))
}

/// The place of the price base among the years.
pub(crate) fn price_base(years: &[f64]) -> Option<usize> {
    years.iter().position(|n| *n == 0.0)
}

fn no_level(choice: &Choice) -> Problem {
    let levels = choice.prices.levels.as_ref();
    let declared = choice.prices.declared.as_ref().filter(|given| given.value.year.is_some());
    let (place, what) = match (declared, levels) {
        (Some(given), _) => {
            (place_of(&given.at, &given.from), format!("prices of {}", words_of_year(choice)))
        }
        (None, Some(given)) => {
            (place_of(&given.at, &given.from), format!("prices of the base, {}", words_of_year(choice)))
        }
        (None, None) => (Place::default(), "prices of the base".to_owned()),
    };
    Problem::error(
        "price-year",
        place,
        format!("{what} are asked for, and the index has no level for that year"),
    )
    .hint("write `real` with a year that the index covers, or give one inflation rate in hence_prices")
}

/// The year of the price base in words.
pub(crate) fn words_of_year(choice: &Choice) -> String {
    year_words(choice.prices.year().or(base_year(&choice.base.value)), choice)
}

fn year_words(year: Option<i32>, choice: &Choice) -> String {
    match year {
        Some(year) => match choice.base.value {
            crate::appraisal::Base::Financial(_) => format!("{year}/{:02}", (year + 1).rem_euclid(100)),
            _ => year.to_string(),
        },
        None => "year 0".to_owned(),
    }
}

/// What follows the last year, adjusted as every flow is: growth as stated, growth of the price, less inflation.
///
/// **Errors**: an index, which ends with the years.
pub(crate) fn tail(stream: &Stream, choice: &Choice) -> Result<Option<Tail>> {
    let Some(given) = &stream.tail else { return Ok(None) };
    let mut tail = given.value.clone();
    let inflation = match choice.prices.levels.as_ref().map(|levels| &levels.value) {
        None => 0.0,
        Some(Levels::Inflation(rate)) => *rate,
        Some(Levels::Index(_)) => {
            let message = "the stream goes on after the last year, where the index of prices has no level";
            return Err(Problem::error("price-tail", place_of(&given.at, &given.from), message)
                .hint("give one inflation rate in hence_prices, or let the years run on instead of the tail")
                .into());
        }
    };
    let growth = stream.growth.as_ref().map_or(0.0, |given| given.value);
    if inflation != 0.0 || growth != 0.0 {
        tail.growth = (1.0 + tail.growth) * (1.0 + growth) / (1.0 + inflation) - 1.0;
    }
    Ok(Some(tail))
}

/// Refuses a nominal rate on real flows and the reverse, and warns where a rate records its prices and the flows do not.
///
/// **Arguments**: `place` and `whose`, the cell of the basis and what is valued on it.
pub(crate) fn check_basis(
    choice: &Choice,
    basis: &Basis,
    place: Place,
    problems: &mut Vec<Problem>,
) -> Result<()> {
    let Some(rates) = basis.price_basis() else { return Ok(()) };
    let id = basis.schedule().map(hence_core::Schedule::id).unwrap_or_default();
    let word = |prices| if prices == PriceBasis::Real { "real" } else { "nominal" };
    match choice.prices.valued() {
        Some(flows) if flows == rates => Ok(()),
        Some(flows) => {
            let given = &choice.prices;
            let from = match (&given.levels, &given.declared) {
                (Some(levels), _) => format!("made real by {}", levels.from),
                (None, Some(declared)) => format!("by {}", declared.from),
                (None, None) => String::new(),
            };
            let message =
                format!("{id} holds {} rates, and the flows are {} ({from})", word(rates), word(flows));
            let hint = match (rates, &given.levels) {
                (PriceBasis::Real, _) => {
                    "a nominal rate; or name an inflation rate or an index of prices hence_prices, which makes the flows real"
                }
                (PriceBasis::Nominal, Some(_)) => {
                    "a real rate; or leave hence_prices out and value the flows as they are, in money of the day"
                }
                (PriceBasis::Nominal, None) => "a real rate, or flows in money of the day",
            };
            Err(Problem::error("prices-differ", place, message).hint(hint).into())
        }
        None => {
            let message = format!(
                "{id} holds {} rates, and the workbook does not say which prices its flows are in",
                word(rates)
            );
            let year = base_year(&choice.base.value).map(|year| format!(" {year}")).unwrap_or_default();
            let say = if rates == PriceBasis::Real { format!("real{year}") } else { "nominal".to_owned() };
            let problem = Problem::warning("prices-unstated", place, message)
                .hint(format!("write `{say}` (or what they are) in a cell named hence_price_basis"));
            if !problems.contains(&problem) {
                problems.push(problem);
            }
            Ok(())
        }
    }
}

/// The prices of an option's flows in words, with where that is stated; none where nothing is said.
pub(crate) fn words(choice: &Choice) -> Option<String> {
    let prices = &choice.prices;
    let Some(levels) = &prices.levels else {
        let given = prices.declared.as_ref()?;
        let words = match (given.value.basis, given.value.year) {
            (PriceBasis::Nominal, _) => "nominal: flows are in money of the day".to_owned(),
            (PriceBasis::Real, Some(_)) => format!("real: flows are in prices of {}", words_of_year(choice)),
            (PriceBasis::Real, None) => "real: flows are in constant prices".to_owned(),
        };
        return Some(format!("{words} (from {})", given.from));
    };
    let by = match &levels.value {
        Levels::Inflation(rate) => format!("inflation of {} a year", hence_core::percent(*rate)),
        Levels::Index(_) => match &levels.at {
            Some(at) => format!("the index {at}"),
            None => "an index".to_owned(),
        },
    };
    let year = words_of_year(choice);
    let stated = match &prices.declared {
        Some(given) if given.value.year.is_some() => format!("prices of {year} (from {})", given.from),
        _ => format!("prices of the base, {year}"),
    };
    Some(format!(
        "real: flows are entered in money of the day and made real by {by} (from {}), in {stated}",
        levels.from
    ))
}

/// What multiplies the flows of a stream, in words.
pub(crate) fn multiplier_words(stream: &Stream, choice: &Choice, outcome: &ChoiceOutcome) -> String {
    let mut parts = Vec::new();
    let year = words_of_year(choice);
    match choice.prices.levels.as_ref().map(|levels| &levels.value) {
        Some(Levels::Inflation(rate)) => parts.push(format!(
            "to prices of {year} by inflation of {} a year: (1 + inflation)^-n, n years after {year}",
            hence_core::percent(*rate)
        )),
        Some(Levels::Index(_)) => {
            parts.push(format!("to prices of {year}: index of {year}/index of the year"))
        }
        None => {}
    }
    if let Some(growth) = &stream.growth {
        parts.push(format!(
            "relative price growth of {} a year: (1 + growth)^n, n years after {}",
            hence_core::percent(growth.value),
            year_words(choice.prices.growth_from.or(base_year(&choice.base.value)), choice)
        ));
    }
    if let (Some(income), Some(reference), Some(elasticity)) =
        (&stream.income, &choice.welfare.reference, &outcome.elasticity)
    {
        parts.push(format!(
            "weight ({}/{})^{} of a group by its income, elasticity {} (from {})",
            reference.value, income.value, elasticity.value, elasticity.value, elasticity.from
        ));
    }
    parts.join("; times ")
}
