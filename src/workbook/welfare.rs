//! Welfare in a workbook: weights by income, and the exact value of a project that is not small against consumption.

use hence_core::{Basis, ErrorKind, Spec, compensating_variation, dot, equity_weight, equivalent_variation};

use crate::appraisal::{Appraisal, COMMAND_LINE, Choice, Consumption, Given, Stream};
use crate::clock::Clock;
use crate::outcome::{AtBase, ChoiceOutcome, ExactValue};
use crate::problem::{Place, Problem, Result};
use crate::references::SheetRange;
use crate::valuation::{cell_of, from_core, place_of};

/// How far the marginal method may be from the exact value before it is a warning.
pub const MARGINAL: f64 = 0.01;

/// The elasticity of marginal utility in force: the workbook's cell, else what the basis states. A disagreement is a
/// warning.
pub(crate) fn elasticity(choice: &Choice, basis: &Basis, problems: &mut Vec<Problem>) -> Option<Given<f64>> {
    let stated = match basis.spec() {
        Spec::Ramsey { elasticity, .. } | Spec::UncertainGrowth { elasticity, .. } => Some(*elasticity),
        _ => None,
    };
    match (&choice.welfare.elasticity, stated) {
        (Some(cell), Some(basis)) if cell.value != basis => {
            let message = format!("says {}, while the basis says {basis}: the cell counts", cell.value);
            let problem = Problem::warning("elasticity-differs", place_of(&cell.at, &cell.from), message)
                .hint("make the two agree, or leave the cell out");
            if !problems.contains(&problem) {
                problems.push(problem);
            }
            Some(cell.clone())
        }
        (Some(cell), _) => Some(cell.clone()),
        (None, Some(value)) => {
            let from = if choice.basis.from == COMMAND_LINE { COMMAND_LINE } else { &choice.basis.from };
            Some(Given { value, at: None, from: from.to_owned() })
        }
        (None, None) => None,
    }
}

fn no_elasticity(place: Place) -> Problem {
    Problem::error(
        "elasticity-missing",
        place,
        "needs the elasticity of marginal utility, which the basis does not state",
    )
    .hint(
        "enter it in a cell named hence_elasticity, or state the basis by preference, elasticity and growth",
    )
}

/// The weight of a stream's flows by the income of its group; none where no income is given.
pub(crate) fn weight(
    stream: &Stream,
    choice: &Choice,
    elasticity: Option<&Given<f64>>,
) -> Result<Option<f64>> {
    let (Some(income), Some(reference)) = (&stream.income, &choice.welfare.reference) else {
        return Ok(None);
    };
    let place = || place_of(&income.at, &income.from);
    let Some(elasticity) = elasticity else { return Err(no_elasticity(place()).into()) };
    let weight = equity_weight(income.value, reference.value, elasticity.value);
    Ok(Some(weight.map_err(|error| from_core(&error, place()))?))
}

/// The exact value of every option over the baseline, or as it stands, where a path of consumption is given.
pub(crate) fn exact_values(
    appraisal: &Appraisal,
    outcomes: &[ChoiceOutcome],
    problems: &mut Vec<Problem>,
) -> Result<Vec<Option<ExactValue>>> {
    let each = appraisal.choices.iter().enumerate().map(|(c, choice)| {
        let Some(path) = choice.welfare.consumption.as_ref().filter(|_| appraisal.baseline != Some(c)) else {
            return Ok(None);
        };
        let value = exact_value(appraisal, outcomes, c, path)?;
        problems.extend(not_marginal(choice, path, &value));
        Ok(Some(value))
    });
    each.collect()
}

fn exact_value(
    appraisal: &Appraisal,
    outcomes: &[ChoiceOutcome],
    c: usize,
    path: &Consumption,
) -> Result<ExactValue> {
    let (choice, outcome) = (&appraisal.choices[c], &outcomes[c]);
    let place = || Place::area(&path.at).called(&path.from);
    let refuse =
        |code, message: &str, hint: &str| Err(Problem::error(code, place(), message).hint(hint).into());
    let baseline = appraisal.baseline.map(|b| (&appraisal.choices[b], &outcomes[b]));
    let options = || std::iter::once((choice, outcome)).chain(baseline);
    if options().any(|(_, outcome)| outcome.streams.iter().any(|s| s.weight.is_some())) {
        return refuse(
            "consumption-mixed",
            "cannot be compared with flows that are weighted by income",
            "leave hence_consumption or the incomes out",
        );
    }
    if options().any(|(_, outcome)| outcome.streams.iter().any(|s| s.own.is_some())) {
        return refuse(
            "consumption-mixed",
            "needs one factor a year, and a stream has a basis of its own",
            "leave hence_consumption or the basis of the stream out",
        );
    }
    let Some(elasticity) = &outcome.elasticity else { return Err(no_elasticity(place()).into()) };
    let mut flows = outcome.net.clone();
    if let Some((base_choice, base)) = baseline {
        let labels = |choice: &Choice| &appraisal.axes[choice.axis].labels;
        if labels(choice) != labels(base_choice) || choice.base.value != base_choice.base.value {
            return refuse(
                "consumption-years",
                "needs an option and its baseline over the same years from one base",
                "let both run over the same years, blank where nothing flows",
            );
        }
        flows.iter_mut().zip(&base.net).for_each(|(flow, less)| *flow -= less);
    }
    let consumption: Vec<f64> = path.raw.iter().map(|c| c * path.unit).collect();
    let clock = Clock::new(&appraisal.axes[choice.axis], &choice.base.value, outcome.timing)?;
    let Some(at_base) = AtBase::find(&clock.years) else {
        return refuse(
            "consumption-base",
            "does not hold the base, whose consumption the amount is compared with",
            "let the years begin at the base, 0 where nothing flows",
        );
    };
    let base = at_base.of(&consumption);
    let base_flow: f64 = clock.offsets.iter().zip(&flows).filter(|(t, _)| **t == 0.0).map(|(_, x)| x).sum();
    let failed = |error: &hence_core::Error| {
        let place = match error.index() {
            Some(i) => cells(&cell_of(&path.at, i), &path.from),
            None => place(),
        };
        from_core(error, place)
    };
    let eta = elasticity.value;
    // No amount may be enough where utility has a ceiling, or a floor; the error without a place among the flows says so.
    let settled = |found: hence_core::Result<f64>| match found {
        Err(error) if error.kind() == ErrorKind::NoMeaning && error.index().is_none() => Ok(None),
        found => found.map(Some),
    };
    let factors = &outcome.factors;
    Ok(ExactValue {
        marginal: dot(&flows, factors),
        equivalent: settled(equivalent_variation(&flows, &consumption, factors, base, eta))
            .map_err(|e| failed(&e))?,
        compensating: settled(compensating_variation(&flows, &consumption, factors, base, base_flow, eta))
            .map_err(|e| failed(&e))?,
        elasticity: elasticity.clone(),
        at_base,
        base,
        base_flow,
        flows,
        consumption,
        tail: options().any(|(choice, _)| choice.streams.iter().any(|s| s.tail.is_some())),
    })
}

fn not_marginal(choice: &Choice, path: &Consumption, value: &ExactValue) -> Option<Problem> {
    let off = value.off();
    if off.is_some_and(|off| off.abs() <= MARGINAL) {
        return None;
    }
    let place = Place::area(&path.at).called(&path.from);
    let message = match off {
        Some(off) => format!(
            "`{}` is not small against consumption: the marginal method values its flows at {}, which is {:.1}% {} the \
             exact {}",
            choice.name,
            amount(value.marginal),
            100.0 * off.abs(),
            if off < 0.0 { "below" } else { "above" },
            amount(value.equivalent.unwrap_or_default()),
        ),
        None => format!(
            "`{}` is not small against consumption: no amount at the base is worth as much as its flows",
            choice.name
        ),
    };
    Some(
        Problem::warning("not-marginal", place, message)
            .hint("report the exact value beside the net present value, and check that flows and consumption are in one unit"),
    )
}

/// The exact values in words, with what they rest on.
pub(crate) fn words(value: &ExactValue) -> String {
    let settled = |found: Option<f64>| found.map_or_else(|| "none is as much".to_owned(), amount);
    let off = value.off().map(|off| format!(", {:.2}% off", 100.0 * off)).unwrap_or_default();
    let tail = if value.tail { "; what follows the last year is not part of these values" } else { "" };
    format!(
        "exact value {} (the amount at the base that changes welfare as much), {} (the amount at the base that undoes \
         the change), by the marginal method {}{off}; elasticity {} (from {}), consumption at the base {}{tail}",
        settled(value.equivalent),
        settled(value.compensating),
        amount(value.marginal),
        value.elasticity.value,
        value.elasticity.from,
        amount(value.base)
    )
}

/// An amount to about the digits that matter.
fn amount(x: f64) -> String {
    if x.abs() >= 1_000.0 { format!("{x:.0}") } else { format!("{x:.3}") }
}

fn cells(at: &SheetRange, from: &str) -> Place {
    Place::cells(&at.sheet, at.range).called(from)
}
