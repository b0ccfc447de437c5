//! Basis, timing, signs, units, uplifts, residual values and tails.

use hence_core::{Tail, Timing};

use crate::appraisal::{COMMAND_LINE, Given, StreamKind};
use crate::problem::{Place, Problem};
use crate::reading::Value;

use super::cells::{number, shown, single};
use super::find::Named;
use super::planned::held;
use super::{Context, texts};

/// Lowest and highest flat rate of a number cell.
const RATES: (f64, f64) = (-0.5, 1.0);
/// Lowest and highest share that an uplift may add.
const UPLIFTS: (f64, f64) = (-1.0, 5.0);

/// The basis: the command line's, else the workbook's. Nothing where neither states one.
pub(super) fn basis(
    context: &mut Context,
    named: Option<&Named>,
    told: Option<&str>,
) -> Option<Given<String>> {
    let Some(told) = told else {
        let named = named?;
        let value = basis_text(context, named)?;
        return Some(Given { value, at: named.cells(), from: named.from.clone() });
    };
    if let Some(named) = named {
        // The cell is only compared here, so what is wrong with it does not matter.
        let held = held(context, named);
        let whose = if named.stated.is_some() { "plan" } else { "workbook" };
        if !held.is_empty() && !held.eq_ignore_ascii_case(told.trim()) {
            context.report(
                Problem::warning(
                    "basis-overridden",
                    named.place(),
                    format!(
                        "the {whose} says `{}`, the command line `{}`: the command line counts",
                        shown(&held),
                        shown(told)
                    ),
                )
                .hint(format!("leave --basis out to use the {whose}'s own")),
            );
        }
    }
    let at = named.and_then(Named::cells);
    Some(Given { value: told.trim().to_owned(), at, from: COMMAND_LINE.to_owned() })
}

fn basis_text(context: &mut Context, named: &Named) -> Option<String> {
    let cell = single(context, named)?;
    match cell.value {
        Value::Number(rate) if rate > RATES.0 && rate <= RATES.1 => Some(rate.to_string()),
        Value::Number(rate) => {
            let percent = (rate * 1e6).round() / 1e4;
            context.report(
                Problem::error(
                    "rate-range",
                    named.place(),
                    format!("rate is {percent}% (stored {rate}), allowed -50% to 100%"),
                )
                .hint(format!("enter {rate}% or {}", rate / 100.0)),
            );
            None
        }
        Value::Date(_) => {
            context.report(
                Problem::error(
                    "basis-value",
                    named.place(),
                    "holds a date, allowed is a rate line, a schedule id or a number",
                )
                .hint("enter 3.5% with a percent format, or a rate line as text"),
            );
            None
        }
        _ => texts::text(context, named),
    }
}

/// Where in their years flows and base stand, where the workbook says so.
pub(super) fn timing(context: &mut Context, named: &Named) -> Option<Given<Timing>> {
    let text = texts::text(context, named)?;
    match text.parse::<Timing>() {
        Ok(value) => Some(Given { value, at: named.cells(), from: named.from.clone() }),
        Err(error) => {
            context.report(core_problem(&error, &text, named.place()));
            None
        }
    }
}

/// What follows the last year of a stream.
pub(super) fn tail(context: &mut Context, named: &Named) -> Option<Given<Tail>> {
    let text = texts::text(context, named)?;
    match Tail::parse(&text) {
        Ok(value) => Some(Given { value, at: named.cells(), from: named.from.clone() }),
        Err(error) => {
            context.report(core_problem(&error, &text, named.place()));
            None
        }
    }
}

/// An error of the library about a text in a cell, the character shown.
fn core_problem(error: &hence_core::Error, text: &str, place: Place) -> Problem {
    let at =
        error.at().map(|at| format!(" at character {} of `{}`", at + 1, shown(text))).unwrap_or_default();
    let problem = Problem::error(error.code(), place, format!("{}{at}", error.message()));
    match error.hint() {
        Some(hint) => problem.hint(hint),
        None => problem,
    }
}

/// Which sides of the ledger are entered negative.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub(super) struct Signs {
    /// A cell says something of signs.
    pub declared: bool,
    /// Costs are entered negative.
    pub costs: bool,
    /// Damages are entered negative.
    pub damages: bool,
}

impl Signs {
    /// What multiplies the flows of a stream.
    pub(super) fn of(self, kind: StreamKind) -> f64 {
        let negative = match kind {
            StreamKind::Cost => self.costs,
            StreamKind::Damage => self.damages,
            StreamKind::Benefit | StreamKind::Flow => false,
        };
        if negative { -1.0 } else { 1.0 }
    }
}

/// Reads `costs entered negative`, `costs and damages negative`, `costs positive`.
pub(super) fn signs(context: &mut Context, named: &Named) -> Option<Signs> {
    let text = texts::text(context, named)?;
    let parsed = parse_signs(&text);
    if parsed.is_none() {
        context.report(
            Problem::error(
                "signs",
                named.place(),
                format!("`{}` does not say which flows are negative", shown(&text)),
            )
            .hint("write `costs negative`, `costs and damages negative` or `costs positive`"),
        );
    }
    parsed
}

fn parse_signs(text: &str) -> Option<Signs> {
    let mut signs = Signs { declared: true, ..Signs::default() };
    let (mut costs, mut damages, mut negative) = (false, false, None);
    for word in text.to_lowercase().split(|c: char| !c.is_alphanumeric()).filter(|word| !word.is_empty()) {
        match word {
            "cost" | "costs" => costs = true,
            "damage" | "damages" => damages = true,
            "all" => (costs, damages) = (true, true),
            "negative" | "minus" if negative.is_none() => negative = Some(true),
            "positive" | "plus" if negative.is_none() => negative = Some(false),
            "entered" | "are" | "is" | "as" | "and" | "in" | "numbers" | "with" | "a" | "sign" => {}
            _ => return None,
        }
    }
    (signs.costs, signs.damages) = match negative? {
        true if !costs && !damages => return None,
        true => (costs, damages),
        false => (false, false),
    };
    Some(signs)
}

/// Units of one, from `k`, `£m`, `thousand`, `£000` or a number.
pub(super) fn unit(context: &mut Context, named: &Named) -> Option<f64> {
    let cell = single(context, named)?;
    let (unit, held) = match &cell.value {
        Value::Number(number) => (Some(*number).filter(|n| n.is_finite() && *n > 0.0), number.to_string()),
        Value::Text(text) => (parse_unit(text), text.clone()),
        Value::Blank => {
            context.report(texts::blank(named));
            return None;
        }
        other => (None, texts::kind(other).to_owned()),
    };
    if unit.is_none() {
        context.report(
            Problem::error("unit", named.place(), format!("`{}` is no unit", shown(&held)))
                .hint("write k, m, thousand, million, bn, billion or a number above 0"),
        );
    }
    unit
}

fn parse_unit(text: &str) -> Option<f64> {
    let word: String = text.trim().chars().filter(|c| c.is_ascii_alphanumeric()).collect();
    match word.to_lowercase().as_str() {
        "k" | "000" | "000s" | "1000" | "thousand" | "thousands" => Some(1e3),
        "m" | "mn" | "1000000" | "million" | "millions" => Some(1e6),
        "bn" | "b" | "billion" | "billions" => Some(1e9),
        "1" | "one" | "unit" | "units" => Some(1.0),
        _ => None,
    }
}

/// The share added to a stream; 0 where nothing is said.
pub(super) fn uplift(context: &mut Context, named: Option<&Named>) -> Option<Given<f64>> {
    let Some(named) = named else {
        return Some(Given { value: 0.0, at: None, from: "default".to_owned() });
    };
    let value = amount(context, named)?;
    if !(UPLIFTS.0..=UPLIFTS.1).contains(&value) {
        context.report(
            Problem::error(
                "uplift-range",
                named.place(),
                format!("uplift is {}% (stored {value}), allowed -100% to 500%", value * 100.0),
            )
            .hint(format!("enter {value}% or {}", value / 100.0)),
        );
        return None;
    }
    Some(Given { value, at: named.cells(), from: named.from.clone() })
}

/// A residual value.
pub(super) fn residual(context: &mut Context, named: &Named) -> Option<Given<f64>> {
    let value = amount(context, named)?;
    Some(Given { value, at: named.cells(), from: named.from.clone() })
}

/// The number of a role's one cell.
pub(super) fn amount(context: &mut Context, named: &Named) -> Option<f64> {
    let cell = single(context, named)?;
    match number(&cell, named.place()) {
        Ok(Some(number)) => Some(number),
        Ok(None) => {
            context.report(texts::blank(named));
            None
        }
        Err(problem) => {
            context.report(*problem);
            None
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn signs_in_words() {
        for text in ["costs negative", "Costs entered negative", "costs are entered as negative numbers"] {
            assert_eq!(
                parse_signs(text),
                Some(Signs { declared: true, costs: true, damages: false }),
                "{text}"
            );
        }
        assert_eq!(
            parse_signs("costs positive"),
            Some(Signs { declared: true, costs: false, damages: false })
        );
        assert!(parse_signs("costs and damages negative").unwrap().damages);
        for text in ["yes", "negative", "costs", "benefits negative", "costs negative, benefits positive"] {
            assert_eq!(parse_signs(text), None, "{text}");
        }
    }

    #[test]
    fn units_in_words() {
        for (text, unit) in [
            ("k", 1e3),
            ("£k", 1e3),
            ("£'000", 1e3),
            ("£m", 1e6),
            ("Million", 1e6),
            ("bn", 1e9),
            ("1000", 1e3),
        ] {
            assert_eq!(parse_unit(text), Some(unit), "{text}");
        }
        assert_eq!(parse_unit("dozen"), None);
        assert_eq!(parse_unit(""), None);
    }
}
