//! From what a workbook says to its numbers: every option valued on its basis, and over the baseline.

use hence_core::{
    Basis, Catalogue, Curve, ErrorKind, Payback, Position, Timing, Where, annual_equivalent,
    benefit_cost_ratio, dot, sum,
};

use crate::adjust;
use crate::appraisal::{Appraisal, Axis, COMMAND_LINE, Choice, Given, Label, Stream, StreamKind};
use crate::baseline::{increment, warn_baseline, warn_unequal_lives};
use crate::clock::{Clock, base_words, base_year, label_words, sentence};
use crate::dated;
use crate::measuring::{Further, Moments, measure_gross, measure_net, measure_units};
use crate::outcome::{ChoiceOutcome, OwnBasis, StreamOutcome, Totals};
use crate::problem::{Place, Problem, Result, WorkbookError};
use crate::ranking::Worth;
use crate::references::{Area, Range, SheetRange};
use crate::welfare;

/// Values every option; all problems are reported together.
pub fn value(appraisal: &Appraisal, catalogue: &Catalogue) -> Result<(Vec<ChoiceOutcome>, Vec<Problem>)> {
    let mut problems = Vec::new();
    let (mut outcomes, mut moments) = (Vec::new(), Vec::new());
    for choice in &appraisal.choices {
        match value_choice(appraisal, choice, catalogue, &mut problems) {
            Ok((outcome, own)) => {
                outcomes.push(outcome);
                moments.push(own);
            }
            Err(error) => problems.extend(error.problems().iter().cloned()),
        }
    }
    if outcomes.len() < appraisal.choices.len() {
        return Err(WorkbookError::from(problems));
    }
    if let Some(baseline) = appraisal.baseline {
        let base = outcomes[baseline].clone();
        let base_choice = &appraisal.choices[baseline];
        // The baseline's own increment is nothing, so that what stands in cells can be compared and ranked.
        for (i, outcome) in outcomes.iter_mut().enumerate() {
            let choice = &appraisal.choices[i];
            outcome.increment = Some(increment(outcome, &base));
            measure_net(outcome, &moments[i].less(&moments[baseline]));
            measure_units(outcome, choice, Some((&base, base_choice)));
            if i == baseline {
                // Nothing is never paid back, and never owed.
                outcome.payback = Payback::default();
            } else {
                warn_baseline(outcome, &base, choice, base_choice, &mut problems);
            }
        }
    }
    match welfare::exact_values(appraisal, &outcomes, &mut problems) {
        Ok(values) => outcomes.iter_mut().zip(values).for_each(|(outcome, value)| outcome.exact = value),
        Err(error) => {
            problems.extend(error.problems().iter().cloned());
            return Err(WorkbookError::from(problems));
        }
    }
    for (choice, outcome) in appraisal.choices.iter().zip(&outcomes) {
        problems.extend(overflow(choice, outcome));
    }
    if problems.iter().any(|p| p.code == TOO_LARGE) {
        return Err(WorkbookError::from(problems));
    }
    warn_unequal_lives(appraisal, &outcomes, &mut problems);
    Ok((outcomes, problems))
}

/// The code of a result that no number can hold.
const TOO_LARGE: &str = "not-finite";

fn too_large(place: Place, what: &str) -> Problem {
    Problem::error(TOO_LARGE, place, format!("{what} is too large to be held as a number"))
        .hint("look for a slip in units or a stray large number")
}

/// Sums of numbers that can be held may be too large themselves.
fn overflow(choice: &Choice, outcome: &ChoiceOutcome) -> Option<Problem> {
    let sums = |t: &Totals| [t.benefits, t.costs, t.pv_benefits, t.pv_costs, t.npv, t.benefits - t.costs];
    let totals = std::iter::once(&outcome.absolute).chain(&outcome.increment);
    let whole = totals.flat_map(sums).chain(outcome.net.iter().copied()).all(f64::is_finite);
    (!whole).then(|| too_large(Place::name(&choice.name), "a total of the option"))
}

/// The place of what was given: its cell, else where it came from.
pub(crate) fn place_of(at: &Option<SheetRange>, from: &str) -> Place {
    match at {
        Some(at) => Place::cells(&at.sheet, at.range).called(from),
        None => Place::name(from),
    }
}

/// A library error as a problem at a place.
pub(crate) fn from_core(error: &hence_core::Error, place: Place) -> Problem {
    let at = error.at().map(|at| format!(" at character {}", at + 1)).unwrap_or_default();
    let problem = Problem::error(error.code(), place, format!("{}{at}", error.message()));
    match error.hint() {
        Some(hint) => problem.hint(hint),
        None => problem,
    }
}

/// The cell of the axis' (or a stream's) entry `index`.
pub(crate) fn cell_of(at: &Area, index: usize) -> SheetRange {
    SheetRange { sheet: at.sheet.clone(), range: Range::cell(at.nth(index)) }
}

/// Timing in force: the command line beats the cell, the cell the line, the line its schedule; a disagreement is a
/// warning.
fn timing_in_force(choice: &Choice, basis: &Basis, problems: &mut Vec<Problem>) -> Timing {
    let line = basis.timing();
    let Some(cell) = &choice.timing else { return line.unwrap_or_default() };
    let (flows, base) = basis.stated();
    let told = choice.basis.from == COMMAND_LINE && (flows.is_some() || base.is_some());
    let (timing, words) = if told {
        let told = Timing { flows: flows.unwrap_or(cell.value.flows), base: base.unwrap_or(cell.value.base) };
        (told, format!("the command line says {told}: the command line counts"))
    } else {
        let words = line.map(|line| format!("the basis says {line}: the cell counts"));
        (cell.value, words.unwrap_or_default())
    };
    let other = if told { Some(timing) } else { line };
    if other.is_some_and(|other| other != cell.value) {
        problems.push(
            Problem::warning(
                "timing-differs",
                place_of(&cell.at, &cell.from),
                format!("says {}, while {words}", cell.value),
            )
            .hint("make the two agree, or leave one out"),
        );
    }
    timing
}

/// A timing that was stated and cannot apply, as dates and offsets say themselves where a flow stands.
fn warn_timing(choice: &Choice, timing: Timing, basis: &Basis, clock: &Clock, problems: &mut Vec<Problem>) {
    let stated = choice.timing.is_some() || basis.stated() != (None, None);
    if clock.timed || !stated || timing == Timing::default() {
        return;
    }
    let place = match &choice.timing {
        Some(cell) => place_of(&cell.at, &cell.from),
        None => place_of(&choice.basis.at, &choice.basis.from),
    };
    let message = format!("{timing} does not apply: dates and offsets say themselves where a flow stands");
    push_once(
        problems,
        Problem::warning("timing-ignored", place, message).hint("leave the timing out, or give years"),
    );
}

fn value_choice(
    appraisal: &Appraisal,
    choice: &Choice,
    catalogue: &Catalogue,
    problems: &mut Vec<Problem>,
) -> Result<(ChoiceOutcome, Moments)> {
    let axis = &appraisal.axes[choice.axis];
    let basis_place = || place_of(&choice.basis.at, &choice.basis.from);
    let basis =
        Basis::parse(&choice.basis.value, catalogue).map_err(|error| from_core(&error, basis_place()))?;
    for warning in basis.warnings() {
        push_once(problems, Problem::warning("basis-note", basis_place(), warning));
    }
    adjust::check_basis(choice, &basis, basis_place(), problems)?;
    let elasticity = welfare::elasticity(choice, &basis, problems);
    let timing = timing_in_force(choice, &basis, problems);
    let clock = Clock::new(axis, &choice.base.value, timing)?;
    warn_timing(choice, timing, &basis, &clock, problems);
    let at = Where { base_year: base_year(&choice.base.value), length: Some(clock.length()) };
    let curve = basis.curve(&at).map_err(|error| from_core(&error, basis_place()))?;
    for warning in curve.warnings() {
        push_once(problems, Problem::warning("curve-note", basis_place(), warning));
    }
    let factors = factors(axis, &clock, &curve)?;
    let (mut streams, mut further) = (Vec::new(), Vec::new());
    for stream in &choice.streams {
        let own = own_basis(stream, (choice, axis), &clock, at, catalogue, problems)?;
        let (curve, factors) = own.as_ref().map_or((&curve, &factors), |own| (&own.curve, &own.factors));
        let weight = welfare::weight(stream, choice, elasticity.as_ref())?;
        let (mut outcome, later) = value_stream(stream, (choice, axis, weight), &clock, curve, factors)?;
        outcome.own = own;
        streams.push(outcome);
        further.push(later);
    }
    let service_years = service_years(axis, clock.length());
    let annuity = match service_years {
        0 => 0.0,
        n => annual_equivalent(&curve, 0.0, n).map_err(|error| from_core(&error, basis_place()))?.1,
    };
    let absolute = totals(choice, &streams, annuity);
    let net = net_flows(choice, &streams, clock.offsets.len());
    let mut outcome = ChoiceOutcome {
        base_words: base_words(&choice.base.value),
        timing_sentence: sentence(axis, &clock, &factors),
        prices: adjust::words(choice),
        elasticity,
        exact: None,
        timing: clock.timing,
        offsets: clock.offsets.clone(),
        forward: clock.offsets.iter().map(|t| yearly_rate(&curve, *t)).collect(),
        length: clock.length(),
        service_years,
        annuity,
        absolute,
        increment: None,
        irr: Vec::new(),
        irr_unresolved: Vec::new(),
        endless: false,
        payback: Payback::default(),
        mean_time: None,
        era_shares: Vec::new(),
        npv_per_budget: None,
        effects: Vec::new(),
        net,
        dated: dated::flows(choice, axis, &clock, &streams)?,
        streams,
        factors,
        basis,
        curve,
    };
    let moments = Moments::of(choice, &outcome, &further, &clock);
    measure_net(&mut outcome, &moments);
    measure_gross(&mut outcome, &further, &clock);
    measure_units(&mut outcome, choice, None);
    Ok((outcome, moments))
}

/// Service years of the annual equivalent: years begun, or the whole years nearest where columns are parts of a year, so
/// that one part alone does not add a year.
fn service_years(axis: &Axis, length: f64) -> u32 {
    let parts = axis.spans.as_ref().is_some_and(|spans| spans.lengths.iter().any(|s| *s < 1.0 - 1e-9));
    // Rounding in an offset must not add a year; time that passes is a year at least.
    let begun = (length - 1e-9).ceil().max(0.0);
    if parts && begun > 0.0 { length.round().max(1.0) as u32 } else { begun as u32 }
}

/// The factor of every year.
fn factors(axis: &Axis, clock: &Clock, curve: &Curve) -> Result<Vec<f64>> {
    let mut factors = Vec::with_capacity(clock.offsets.len());
    for i in 0..clock.offsets.len() {
        let factor = clock.factor(curve, i).map_err(|error| {
            let at = cell_of(&axis.at, i);
            from_core(&error, Place::cells(&at.sheet, at.range).called(&label_words(&axis.labels[i])))
        })?;
        factors.push(factor);
    }
    Ok(factors)
}

/// The basis that a stream has of its own. Its timing is the option's: a flow stands where it stands.
fn own_basis(
    stream: &Stream,
    (choice, axis): (&Choice, &Axis),
    clock: &Clock,
    at: Where,
    catalogue: &Catalogue,
    problems: &mut Vec<Problem>,
) -> Result<Option<OwnBasis>> {
    let Some(given) = &stream.basis else { return Ok(None) };
    let place = || place_of(&given.at, &given.from);
    let basis = Basis::parse(&given.value, catalogue).map_err(|error| from_core(&error, place()))?;
    let curve = basis.curve(&at).map_err(|error| from_core(&error, place()))?;
    adjust::check_basis(choice, &basis, place(), problems)?;
    for warning in basis.warnings() {
        push_once(problems, Problem::warning("basis-note", place(), warning));
    }
    for warning in curve.warnings() {
        push_once(problems, Problem::warning("curve-note", place(), warning));
    }
    if let Some(timing) = basis.timing().filter(|timing| clock.timed && *timing != clock.timing) {
        let message = format!("says {timing}, while the flows stand at {}: that counts", clock.timing);
        push_once(
            problems,
            Problem::warning("timing-differs", place(), message)
                .hint("leave the timing out of the basis of a stream"),
        );
    }
    let factors = factors(axis, clock, &curve)?;
    let forward = clock.offsets.iter().map(|t| yearly_rate(&curve, *t)).collect();
    let timing_sentence = sentence(axis, clock, &factors);
    Ok(Some(OwnBasis { basis, curve, factors, forward, timing_sentence }))
}

/// The forward rate of the year that holds an offset. At the base and before it the first rate extends backwards,
/// where the curve itself does not say.
fn yearly_rate(curve: &Curve, t: f64) -> Option<f64> {
    match curve.forward_rate(t.ceil()) {
        Err(error) if t <= 0.0 && error.kind() == ErrorKind::OutsideDomain => curve.forward_rate(1.0).ok(),
        rate => rate.ok(),
    }
}

/// The base year from which the end of a tail counts: where years are dates, such that the end is a year of theirs.
pub(crate) fn tail_base(labels: &[Label], clock: &Clock, choice: &Choice) -> Option<i32> {
    match (labels.last(), clock.years.last()) {
        (Some(Label::Date(date)), Some(years)) => Some(chrono::Datelike::year(date) - years.ceil() as i32),
        _ => base_year(&choice.base.value),
    }
}

pub(crate) fn push_once(problems: &mut Vec<Problem>, problem: Problem) {
    if !problems.contains(&problem) {
        problems.push(problem);
    }
}

/// What is left over is left at the end of the last column: refused where the flows of a block stand before that.
fn left_within(residual: &Given<f64>, axis: &Axis, clock: &Clock) -> Option<Problem> {
    let spans = axis.spans.as_ref()?;
    let last = spans.lengths.last().copied()?;
    if last < 1.0 + 1e-9 || clock.timing.flows == Position::End {
        return None;
    }
    let message = format!(
        "what is left over is left at the end of the last column, which is {last} years ({}), and its flows stand before that",
        spans.from
    );
    Some(
        Problem::error("span-role", place_of(&residual.at, &residual.from), message).hint(
            "add a last column of one year, or let flows stand at the end of their periods (flows end)",
        ),
    )
}

fn value_stream(
    stream: &Stream,
    (choice, axis, weight): (&Choice, &Axis, Option<f64>),
    clock: &Clock,
    curve: &Curve,
    factors: &[f64],
) -> Result<(StreamOutcome, Further)> {
    let base_year = tail_base(&axis.labels, clock, choice);
    let (multipliers, tail) =
        (adjust::multipliers(stream, choice, axis, weight)?, adjust::tail(stream, choice)?);
    let multiplier = |i: usize| multipliers.as_ref().map_or(1.0, |all| all[i]);
    let scale = stream.sign * stream.unit * (1.0 + stream.uplift.value);
    // Adding zero turns -0 into 0, which no cell should show.
    let mut flows: Vec<f64> =
        stream.raw.iter().enumerate().map(|(i, x)| x * scale * multiplier(i) + 0.0).collect();
    let last = flows.len() - 1;
    let last_flow = flows[last];
    if let Some(residual) = &stream.residual {
        if let Some(problem) = left_within(residual, axis, clock) {
            return Err(problem.into());
        }
        // Left over in the prices of the last year, as its flow is.
        let amount = residual.value * stream.unit * multiplier(last);
        flows[last] += if stream.kind == StreamKind::Cost { -amount } else { amount };
    }
    let place = || Place::area(&stream.at).called(&stream.from);
    if !flows.iter().all(|x| x.is_finite()) {
        return Err(too_large(place(), "a flow").into());
    }
    let (pv_tail, further) = match (&stream.tail, &tail) {
        (None, _) | (_, None) => (0.0, Further::default()),
        (Some(given), Some(tail)) => {
            let failed = |error: hence_core::Error| from_core(&error, place_of(&given.at, &given.from));
            let years = clock.years[last];
            let value = tail.timed_present_value(curve, years, clock.timing, last_flow, base_year);
            let further = Further::of(tail, last_flow, clock, curve, base_year);
            (value.map_err(failed)?, further.map_err(failed)?)
        }
    };
    let pv_by_year: Vec<f64> = flows.iter().zip(factors).map(|(x, d)| x * d).collect();
    let pv = sum(&[dot(&flows, factors), pv_tail]);
    let outcome = StreamOutcome {
        undiscounted: sum(&flows),
        flows,
        pv_by_year,
        pv_tail,
        pv,
        multipliers,
        own: None,
        weight,
    };
    if outcome.pv.is_finite() && outcome.undiscounted.is_finite() {
        Ok((outcome, further))
    } else {
        Err(too_large(place(), "the present value").into())
    }
}

/// What an option is worth as it stands on another curve; streams with a basis of their own keep it.
pub(crate) fn worth_on(
    appraisal: &Appraisal,
    choice: &Choice,
    outcome: &ChoiceOutcome,
    curve: &Curve,
) -> Result<Worth> {
    let timing = outcome.timing;
    let axis = &appraisal.axes[choice.axis];
    let clock = Clock::new(axis, &choice.base.value, timing)?;
    let factors: hence_core::Result<Vec<f64>> =
        (0..clock.offsets.len()).map(|i| clock.factor(curve, i)).collect();
    let factors = factors.map_err(|error| from_core(&error, Place::name(&choice.name)))?;
    let mut terms = Vec::new();
    for (stream, valued) in choice.streams.iter().zip(&outcome.streams) {
        let (above, below) = side(stream.kind);
        if valued.own.is_some() {
            terms.push((above - below) * valued.pv);
            continue;
        }
        terms.push(
            (above - below)
                * value_stream(stream, (choice, axis, valued.weight), &clock, curve, &factors)?.0.pv,
        );
    }
    Ok(Worth::of_streams(&terms))
}

/// The part of a stream that stands above (benefits) or below (costs) the line: (benefit, cost) signs.
pub(crate) fn side(kind: StreamKind) -> (f64, f64) {
    match kind {
        StreamKind::Cost => (0.0, 1.0),
        StreamKind::Benefit | StreamKind::Flow => (1.0, 0.0),
        StreamKind::Damage => (-1.0, 0.0),
    }
}

fn totals(choice: &Choice, streams: &[StreamOutcome], annuity: f64) -> Totals {
    let gather = |pick: &dyn Fn(&StreamOutcome) -> f64, benefit: bool| {
        let terms: Vec<f64> = choice
            .streams
            .iter()
            .zip(streams)
            .map(|(stream, outcome)| {
                let (above, below) = side(stream.kind);
                pick(outcome) * if benefit { above } else { below }
            })
            .collect();
        sum(&terms)
    };
    finish_totals(
        Totals {
            benefits: gather(&|s| s.undiscounted, true),
            costs: gather(&|s| s.undiscounted, false),
            pv_benefits: gather(&|s| s.pv, true),
            pv_costs: gather(&|s| s.pv, false),
            ..Totals::default()
        },
        annuity,
    )
}

/// NPV, ratio and annual equivalent from the present values.
pub(crate) fn finish_totals(mut totals: Totals, annuity: f64) -> Totals {
    totals.npv = totals.pv_benefits - totals.pv_costs;
    totals.ratio = benefit_cost_ratio(totals.pv_benefits, totals.pv_costs).ok();
    totals.annual = (annuity > 0.0).then(|| totals.npv / annuity);
    totals
}

fn net_flows(choice: &Choice, streams: &[StreamOutcome], years: usize) -> Vec<f64> {
    (0..years)
        .map(|i| {
            let terms: Vec<f64> = choice
                .streams
                .iter()
                .zip(streams)
                .map(|(stream, outcome)| {
                    let (above, below) = side(stream.kind);
                    outcome.flows[i] * (above - below)
                })
                .collect();
            sum(&terms) + 0.0
        })
        .collect()
}
