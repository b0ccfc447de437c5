//! From what a workbook says to its numbers: every option valued on its basis, and over the baseline.

use chrono::{Datelike, NaiveDate};
use hence_core::{
    Basis, Catalogue, Curve, DayCount, Eras, IRR_INTERVAL, Payback, Position, Timing, Where,
    annual_equivalent, benefit_cost_ratio, discounted_payback, dot, era_shares, internal_rates, mean_time,
    offset_of_dates, sum,
};

use crate::appraisal::{Appraisal, Axis, Base, Choice, Label, Stream, StreamKind};
use crate::outcome::{ChoiceOutcome, StreamOutcome, Totals};
use crate::problem::{Place, Problem, Result, WorkbookError};
use crate::references::{Cell, Range, SheetRange};

/// Values every option; all problems are reported together.
pub fn value(appraisal: &Appraisal, catalogue: &Catalogue) -> Result<(Vec<ChoiceOutcome>, Vec<Problem>)> {
    let mut problems = Vec::new();
    let mut outcomes = Vec::new();
    for choice in &appraisal.choices {
        match value_choice(appraisal, choice, catalogue, &mut problems) {
            Ok(outcome) => outcomes.push(outcome),
            Err(error) => problems.extend(error.problems().iter().cloned()),
        }
    }
    if outcomes.len() < appraisal.choices.len() {
        return Err(WorkbookError::from(problems));
    }
    if let Some(baseline) = appraisal.baseline {
        let base = outcomes[baseline].clone();
        for (i, outcome) in outcomes.iter_mut().enumerate() {
            if i != baseline {
                increment(outcome, &base, &appraisal.choices[i], &appraisal.choices[baseline], &mut problems);
            }
        }
    }
    warn_unequal_lives(appraisal, &outcomes, &mut problems);
    Ok((outcomes, problems))
}

/// The place of what was given: its cell, else where it came from.
fn place_of(at: &Option<SheetRange>, from: &str) -> Place {
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
pub(crate) fn cell_of(at: &SheetRange, index: usize) -> SheetRange {
    let first = at.range.first;
    let across = at.range.last.row == first.row;
    let step = index as u32;
    let cell = if across {
        Cell { row: first.row, col: first.col + step }
    } else {
        Cell { row: first.row + step, col: first.col }
    };
    SheetRange { sheet: at.sheet.clone(), range: Range { first: cell, last: cell } }
}

/// Timing in force: the cell beats the line, the line its schedule; a disagreement is a warning.
fn timing_in_force(choice: &Choice, basis: &Basis, problems: &mut Vec<Problem>) -> Timing {
    match (&choice.timing, basis.timing()) {
        (Some(cell), Some(line)) => {
            if cell.value != line {
                problems.push(
                    Problem::warning(
                        "timing-differs",
                        place_of(&cell.at, &cell.from),
                        format!("says {}, while the basis says {line}; the first is used", cell.value),
                    )
                    .hint("make the two agree, or leave one out"),
                );
            }
            cell.value
        }
        (Some(cell), None) => cell.value,
        (None, Some(line)) => line,
        (None, None) => Timing::default(),
    }
}

/// Years from the base year to each label, and whether timing still applies to them.
fn years_after_base(axis: &Axis, base: &Base) -> Result<(Vec<f64>, bool)> {
    let mut problems = Vec::new();
    let mut years = Vec::with_capacity(axis.labels.len());
    let mut timed = true;
    for (i, label) in axis.labels.iter().enumerate() {
        let place = || {
            let at = cell_of(&axis.at, i);
            Place::cells(&at.sheet, at.range)
        };
        let value = match (label, base) {
            (Label::Offset(t), _) => {
                timed = false;
                Ok(*t)
            }
            (Label::Number(n), _) => Ok(f64::from(*n)),
            (Label::Year(y), Base::Year(b)) => Ok(f64::from(y - b)),
            (Label::Financial(y, _), Base::Financial(b)) => Ok(f64::from(y - b)),
            (Label::Date(date), Base::Date(b)) => {
                timed = false;
                offset_of_dates(*b, *date, DayCount::Anniversary).map_err(|e| from_core(&e, place()))
            }
            _ => Err(Problem::error(
                "base-kind",
                place(),
                format!("the year is {}, while the base is {}", label_kind(label), base_kind(base)),
            )
            .hint("state the base in the same kind as the years")),
        };
        match value {
            Ok(value) => years.push(value),
            Err(problem) => {
                problems.push(problem);
                break;
            }
        }
    }
    if problems.is_empty() { Ok((years, timed)) } else { Err(problems.into()) }
}

fn label_kind(label: &Label) -> &'static str {
    match label {
        Label::Year(_) => "a calendar year",
        Label::Number(_) => "a year number",
        Label::Financial(..) => "a financial year",
        Label::Date(_) => "a date",
        Label::Offset(_) => "an offset",
    }
}

fn base_kind(base: &Base) -> &'static str {
    match base {
        Base::Year(_) => "a calendar year",
        Base::Financial(_) => "a financial year",
        Base::Date(_) => "a date",
        Base::Zero => "year number 0",
    }
}

/// The base in words.
pub fn base_words(base: &Base) -> String {
    match base {
        Base::Year(year) => year.to_string(),
        Base::Financial(year) => format!("{year}/{:02}", (year + 1).rem_euclid(100)),
        Base::Date(date) => date_words(*date),
        Base::Zero => "year 0".to_owned(),
    }
}

fn date_words(date: NaiveDate) -> String {
    const MONTHS: [&str; 12] = [
        "January",
        "February",
        "March",
        "April",
        "May",
        "June",
        "July",
        "August",
        "September",
        "October",
        "November",
        "December",
    ];
    format!("{} {} {}", date.day(), MONTHS[date.month0() as usize], date.year())
}

/// A label in words.
pub fn label_words(label: &Label) -> String {
    match label {
        Label::Year(year) => year.to_string(),
        Label::Number(n) => format!("year {n}"),
        Label::Financial(_, text) => text.clone(),
        Label::Date(date) => date_words(*date),
        Label::Offset(t) => format!("offset {t}"),
    }
}

fn base_year(base: &Base) -> Option<i32> {
    match base {
        Base::Year(year) | Base::Financial(year) => Some(*year),
        Base::Date(date) => Some(date.year()),
        Base::Zero => None,
    }
}

/// The offsets in force: `offsets` are those of the flows (their ends where averaged).
struct Clock {
    timing: Timing,
    timed: bool,
    years: Vec<f64>,
    offsets: Vec<f64>,
}

impl Clock {
    fn new(axis: &Axis, base: &Base, timing: Timing) -> Result<Self> {
        let (years, timed) = years_after_base(axis, base)?;
        // Dates and offsets say themselves where the flow stands.
        let timing = if timed { timing } else { Timing::default() };
        let shift = shift_of(timing);
        let offsets = years.iter().map(|y| y + shift).collect();
        Ok(Clock { timing, timed, years, offsets })
    }

    fn factor(&self, curve: &Curve, i: usize) -> hence_core::Result<f64> {
        curve.timed_factor(self.years[i], self.timing)
    }

    /// The flows as an internal rate sees them: an averaged flow stands half at each end of its year.
    fn dated_flows(&self, flows: &[f64]) -> (Vec<f64>, Vec<f64>) {
        if self.timing.flows != Position::Averaged {
            return (self.offsets.clone(), flows.to_vec());
        }
        let ends = self.offsets.iter().zip(flows);
        ends.flat_map(|(t, x)| [(t - 1.0, x / 2.0), (*t, x / 2.0)]).unzip()
    }
}

/// Position of the flows less position of the base; an averaged flow counts at its year's end.
fn shift_of(timing: Timing) -> f64 {
    let position = |p: Position| match p {
        Position::Start => 0.0,
        Position::Middle => 0.5,
        Position::End | Position::Averaged => 1.0,
    };
    position(timing.flows) - position(timing.base)
}

fn value_choice(
    appraisal: &Appraisal,
    choice: &Choice,
    catalogue: &Catalogue,
    problems: &mut Vec<Problem>,
) -> Result<ChoiceOutcome> {
    let axis = &appraisal.axes[choice.axis];
    let basis_place = || place_of(&choice.basis.at, &choice.basis.from);
    let basis =
        Basis::parse(&choice.basis.value, catalogue).map_err(|error| from_core(&error, basis_place()))?;
    for warning in basis.warnings() {
        push_once(problems, Problem::warning("basis-note", basis_place(), warning));
    }
    let timing = timing_in_force(choice, &basis, problems);
    let clock = Clock::new(axis, &choice.base.value, timing)?;
    let length = clock.offsets.iter().copied().fold(0.0, f64::max);
    let at = Where { base_year: base_year(&choice.base.value), length: Some(length) };
    let curve = basis.curve(&at).map_err(|error| from_core(&error, basis_place()))?;
    for warning in curve.warnings() {
        push_once(problems, Problem::warning("curve-note", basis_place(), warning));
    }
    let mut factors = Vec::with_capacity(clock.offsets.len());
    for i in 0..clock.offsets.len() {
        let factor = clock.factor(&curve, i).map_err(|error| {
            let at = cell_of(&axis.at, i);
            from_core(&error, Place::cells(&at.sheet, at.range).called(&label_words(&axis.labels[i])))
        })?;
        factors.push(factor);
    }
    let forward = clock
        .offsets
        .iter()
        .map(|t| if *t > 0.0 { curve.forward_rate(t.ceil()).ok() } else { None })
        .collect();
    let mut streams = Vec::new();
    for stream in &choice.streams {
        streams.push(value_stream(stream, &clock, &curve, &factors, base_year(&choice.base.value))?);
    }
    let service_years = length.ceil().max(1.0) as u32;
    let (_, annuity) =
        annual_equivalent(&curve, 0.0, service_years).map_err(|error| from_core(&error, basis_place()))?;
    let absolute = totals(choice, &streams, annuity);
    let net = net_flows(choice, &streams, clock.offsets.len());
    let mut outcome = ChoiceOutcome {
        base_words: base_words(&choice.base.value),
        timing_sentence: sentence(axis, &clock, &factors),
        timing: clock.timing,
        offsets: clock.offsets.clone(),
        forward,
        service_years,
        annuity,
        absolute,
        increment: None,
        irr: Vec::new(),
        payback: Payback::default(),
        mean_time: None,
        era_shares: Vec::new(),
        npv_per_budget: None,
        effects: Vec::new(),
        net,
        streams,
        factors,
        basis,
        curve,
    };
    measure_net(&mut outcome, &clock);
    measure_gross(&mut outcome);
    measure_units(&mut outcome, choice, None);
    Ok(outcome)
}

fn push_once(problems: &mut Vec<Problem>, problem: Problem) {
    if !problems.contains(&problem) {
        problems.push(problem);
    }
}

/// "a flow in 2026 has factor 1.0000, in 2027 0.9662".
fn sentence(axis: &Axis, clock: &Clock, factors: &[f64]) -> String {
    let mut text = format!("a flow in {} has factor {:.4}", label_words(&axis.labels[0]), factors[0]);
    if let (Some(label), Some(factor)) = (axis.labels.get(1), factors.get(1)) {
        text.push_str(&format!(", in {} {factor:.4}", label_words(label)));
    }
    if clock.timed { format!("{}: {text}", clock.timing) } else { text }
}

fn value_stream(
    stream: &Stream,
    clock: &Clock,
    curve: &Curve,
    factors: &[f64],
    base_year: Option<i32>,
) -> Result<StreamOutcome> {
    let scale = stream.sign * stream.unit * (1.0 + stream.uplift.value);
    let mut flows: Vec<f64> = stream.raw.iter().map(|x| x * scale).collect();
    let last = flows.len() - 1;
    let last_flow = flows[last];
    if let Some(residual) = &stream.residual {
        let amount = residual.value * stream.unit;
        flows[last] += if stream.kind == StreamKind::Cost { -amount } else { amount };
    }
    let pv_tail = match &stream.tail {
        None => 0.0,
        Some(tail) => tail
            .value
            .timed_present_value(curve, clock.years[last], clock.timing, last_flow, base_year)
            .map_err(|error| from_core(&error, place_of(&tail.at, &tail.from)))?,
    };
    let pv_by_year: Vec<f64> = flows.iter().zip(factors).map(|(x, d)| x * d).collect();
    let pv = sum(&[dot(&flows, factors), pv_tail]);
    let outcome = StreamOutcome { undiscounted: sum(&flows), flows, pv_by_year, pv_tail, pv };
    if outcome.pv.is_finite() && outcome.undiscounted.is_finite() {
        Ok(outcome)
    } else {
        let place = Place::cells(&stream.at.sheet, stream.at.range).called(&stream.from);
        Err(Problem::error("not-finite", place, "the present value is too large to be held as a number")
            .hint("look for a slip in units or a stray large number")
            .into())
    }
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
fn finish_totals(mut totals: Totals, annuity: f64) -> Totals {
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
            sum(&terms)
        })
        .collect()
}

/// Rates of return and payback of the net flows.
fn measure_net(outcome: &mut ChoiceOutcome, clock: &Clock) {
    let (offsets, flows) = clock.dated_flows(&outcome.net);
    outcome.irr = internal_rates(&offsets, &flows, IRR_INTERVAL).map(|found| found.rates).unwrap_or_default();
    let pv: Vec<f64> = outcome.net.iter().zip(&outcome.factors).map(|(x, d)| x * d).collect();
    outcome.payback = discounted_payback(&outcome.offsets, &pv).unwrap_or_default();
}

/// Mean time and era shares of the gross present values.
fn measure_gross(outcome: &mut ChoiceOutcome) {
    let gross: Vec<f64> = (0..outcome.offsets.len())
        .map(|i| sum(&outcome.streams.iter().map(|s| s.pv_by_year[i].abs()).collect::<Vec<_>>()))
        .collect();
    outcome.mean_time = mean_time(&outcome.offsets, &gross).ok();
    outcome.era_shares = era_shares(&outcome.offsets, &gross, &Eras::default()).unwrap_or_default();
}

/// NPV per unit of the constrained cost, cost per unit of each effect; over the baseline where given.
fn measure_units(outcome: &mut ChoiceOutcome, choice: &Choice, baseline: Option<(&ChoiceOutcome, &Choice)>) {
    let budget = |outcome: &ChoiceOutcome, choice: &Choice, names: &[String]| {
        let streams = choice.streams.iter().zip(&outcome.streams);
        sum(&streams.filter(|(s, _)| names.contains(&s.name)).map(|(_, o)| o.pv).collect::<Vec<_>>())
    };
    let mut spent = budget(outcome, choice, &choice.budget);
    if let Some((base, base_choice)) = baseline {
        spent -= budget(base, base_choice, &choice.budget);
    }
    outcome.npv_per_budget = (!choice.budget.is_empty() && spent > 0.0).then(|| outcome.totals().npv / spent);
    let cost = outcome.totals().pv_costs;
    let per_unit = |quantity: f64| (quantity != 0.0).then(|| cost / quantity);
    outcome.effects = choice
        .effects
        .iter()
        .map(|effect| {
            let mut plain = sum(&effect.raw);
            let mut discounted = dot(&effect.raw, &outcome.factors);
            if let Some((base, base_choice)) = baseline
                && let Some(same) = base_choice.effects.iter().find(|e| e.name == effect.name)
            {
                plain -= sum(&same.raw);
                discounted -= dot(&same.raw, &base.factors);
            }
            (per_unit(plain), per_unit(discounted))
        })
        .collect();
}

/// Sets the increments of an option over the baseline, and what is measured on them.
fn increment(
    outcome: &mut ChoiceOutcome,
    base: &ChoiceOutcome,
    choice: &Choice,
    base_choice: &Choice,
    problems: &mut Vec<Problem>,
) {
    let less = Totals {
        benefits: outcome.absolute.benefits - base.absolute.benefits,
        costs: outcome.absolute.costs - base.absolute.costs,
        pv_benefits: outcome.absolute.pv_benefits - base.absolute.pv_benefits,
        pv_costs: outcome.absolute.pv_costs - base.absolute.pv_costs,
        ..Totals::default()
    };
    outcome.increment = Some(finish_totals(less, outcome.annuity));
    if outcome.basis != base.basis || outcome.base_words != base.base_words {
        problems.push(
            Problem::warning(
                "baseline-basis",
                Place::name(&choice.name),
                format!("its basis or base year is not that of the baseline {:?}", base_choice.name),
            )
            .hint("value both on one basis from one base year, or the increment has no meaning"),
        );
    }
    // Years of the two may differ: flows are matched by their offsets.
    let mut flows: std::collections::BTreeMap<i64, (f64, f64, f64)> = std::collections::BTreeMap::new();
    let key = |t: f64| (t * 1e6).round() as i64;
    for (o, sign) in [(&*outcome, 1.0), (base, -1.0)] {
        for (i, t) in o.offsets.iter().enumerate() {
            let entry = flows.entry(key(*t)).or_insert((*t, 0.0, 0.0));
            entry.1 += sign * o.net[i];
            entry.2 += sign * o.net[i] * o.factors[i];
        }
    }
    let offsets: Vec<f64> = flows.values().map(|v| v.0).collect();
    let net: Vec<f64> = flows.values().map(|v| v.1).collect();
    let pv: Vec<f64> = flows.values().map(|v| v.2).collect();
    let clock = Clock { timing: outcome.timing, timed: true, years: Vec::new(), offsets: offsets.clone() };
    let (dated, dated_net) = clock.dated_flows(&net);
    outcome.irr = internal_rates(&dated, &dated_net, IRR_INTERVAL).map(|f| f.rates).unwrap_or_default();
    outcome.payback = discounted_payback(&offsets, &pv).unwrap_or_default();
    measure_units(outcome, choice, Some((base, base_choice)));
}

/// Annual equivalents over unequal lives are not comparable under a declining curve.
fn warn_unequal_lives(appraisal: &Appraisal, outcomes: &[ChoiceOutcome], problems: &mut Vec<Problem>) {
    let lives: std::collections::BTreeSet<u32> = outcomes.iter().map(|o| o.service_years).collect();
    let declining = outcomes.iter().any(|o| {
        let end = f64::from(o.service_years);
        let rate = |t: f64| o.curve.mean_rate(t).unwrap_or(0.0);
        (rate(1.0) - rate(end)).abs() > 1e-9
    });
    if lives.len() > 1 && declining {
        let names: Vec<&str> = appraisal.choices.iter().map(|c| c.name.as_str()).collect();
        problems.push(
            Problem::warning(
                "unequal-lives",
                Place::name(&names.join(", ")),
                "annual equivalents over unequal lives are not comparable under a declining curve",
            )
            .hint("appraise every option over the same years"),
        );
    }
}
