//! A workbook's options under many draws of an uncertain rate.

use hence_core::{
    Band, Catalogue, Compounding, Distribution, Drawn, Draws, FirstPlace, Histogram, OptionFlows, PriceBasis,
    Quantity, RateDistribution, Spec, Spread, draw_values, histogram, spread,
};

use crate::appraisal::{Appraisal, Base, Choice, Label};
use crate::clock::base_words;
use crate::dated::Flows;
use crate::model::Workbook;
use crate::outcome::ChoiceOutcome;
use crate::package::Package;
use crate::planfile::PlanFile;
use crate::preflight::preflight;
use crate::problem::{Place, Problem, Result};
use crate::resolve::{Options, resolve};
use crate::valuation::{from_core, place_of, value};

/// What the run is told besides the workbook.
#[derive(Clone, Debug, Default)]
pub struct DrawsRequest {
    /// A distribution for each of [`Quantity::ALL`]; where there is none, the workbook's own Ramsey rule states the value.
    pub distributions: [Option<Distribution>; 4],
    /// Roles for cells without a defined name: role, range.
    pub roles: Vec<(String, String)>,
    /// What is where, for a workbook without names.
    pub plan: Option<PlanFile>,
}

/// Where a part of the rate comes from.
#[derive(Clone, Debug, PartialEq)]
pub enum Origin {
    /// It was given with the run.
    Given,
    /// The workbook's basis states it: its cell or name.
    Basis(String),
    /// Nothing states it and it counts as 0, as a hazard does.
    Unstated,
}

/// A part of the rate.
#[derive(Clone, Debug, PartialEq)]
pub struct Part {
    /// Which.
    pub quantity: Quantity,
    /// The canonical text of its distribution.
    pub text: String,
    /// Where it comes from.
    pub origin: Origin,
}

/// A workbook made ready to draw.
#[derive(Debug)]
pub struct Prepared {
    /// The parts of the rate, as [`Quantity::ALL`].
    pub parts: Vec<Part>,
    /// Warnings and notes.
    pub problems: Vec<Problem>,
    rate: RateDistribution,
    options: Vec<Listed>,
    baseline: Option<usize>,
}

/// An option's net flows, one by one.
#[derive(Debug)]
struct Listed {
    name: String,
    base: String,
    timing: String,
    declared: Option<(f64, Option<f64>)>,
    flows: Flows,
}

/// One option under the draws.
#[derive(Clone, Debug, PartialEq)]
pub struct OptionDraws {
    /// Its name.
    pub name: String,
    /// It is the baseline.
    pub baseline: bool,
    /// The base in words.
    pub base: String,
    /// The timing.
    pub timing: String,
    /// The net present value on the basis that the workbook declares, and over the baseline, where it declares one.
    pub declared: Option<(f64, Option<f64>)>,
    /// Its net present value as it stands.
    pub absolute: Spread,
    /// Over the baseline, where there is one.
    pub increment: Option<Spread>,
    /// How probable it is that it ranks first.
    pub first: FirstPlace,
    /// Of the net present value, over the baseline where there is one.
    pub histogram: Histogram,
}

impl OptionDraws {
    /// The spread that the report is about: over the baseline where there is one.
    pub fn spread(&self) -> &Spread {
        self.increment.as_ref().unwrap_or(&self.absolute)
    }

    /// The net present value on the declared basis, likewise.
    pub fn declared(&self) -> Option<f64> {
        self.declared.map(|(absolute, increment)| increment.unwrap_or(absolute))
    }
}

/// What came of the draws.
#[derive(Clone, Debug, PartialEq)]
pub struct DrawsReport {
    /// Of the rate.
    pub rate: Spread,
    /// The options, in the workbook's order.
    pub options: Vec<OptionDraws>,
    /// Every draw.
    pub drawn: Drawn,
}

/// Reads a workbook and makes it ready to draw; nothing is written.
///
/// # Errors
/// Everything that keeps the workbook from being read and valued, each with its cell; a part of the rate that neither the
/// run nor the workbook's basis states.
pub fn prepare(package: &Package, request: &DrawsRequest, catalogue: &Catalogue) -> Result<Prepared> {
    let mut problems = preflight(package)?;
    let book = Workbook::read(package)?;
    let (mut appraisal, declared) = read(package, &book, request)?;
    problems.append(&mut appraisal.problems);
    let (outcomes, found) = value(&appraisal, catalogue)?;
    problems.extend(found);
    let (rate, parts) = rate(&appraisal, &outcomes, request, declared, &mut problems)?;
    warn(&appraisal, &rate, &mut problems);
    let listed = appraisal.choices.iter().zip(&outcomes);
    let options = listed.map(|(choice, outcome)| list(&appraisal, choice, outcome, declared));
    Ok(Prepared { parts, problems, rate, options: options.collect(), baseline: appraisal.baseline })
}

/// What the workbook says, and whether it declares a basis. Where it does not and all parts of the rate are given, their
/// medians stand in for one.
fn read(package: &Package, book: &Workbook, request: &DrawsRequest) -> Result<(Appraisal, bool)> {
    let roles = &request.roles;
    let plan = PlanFile::part_of(request.plan.as_ref(), book)?;
    let plan = plan.as_ref();
    let error = match resolve(package, book, &Options { roles, plan, ..Options::default() }) {
        Ok(appraisal) => return Ok((appraisal, true)),
        Err(error) => error,
    };
    let median = |quantity: Quantity| {
        let given = request.distributions[quantity as usize].as_ref();
        let middle = given.and_then(|distribution| distribution.quantile(quantity, 0.5).ok())?;
        Some(format!("{} {}", quantity.name(), quantity.text(middle)))
    };
    let stated = [Quantity::Preference, Quantity::Elasticity, Quantity::Growth].map(median);
    if let [Some(preference), Some(elasticity), Some(growth)] = stated {
        let line = [preference, elasticity, growth].join(", ");
        // A basis that is there and cannot be read has to be mended.
        if let Ok(appraisal) =
            resolve(package, book, &Options { roles, basis: Some(&line), plan, ..Options::default() })
            && appraisal.problems.iter().all(|problem| problem.code != "basis-overridden")
        {
            return Ok((appraisal, false));
        }
    }
    Err(error)
}

/// The distribution of the rate, and where each part of it comes from.
fn rate(
    appraisal: &Appraisal,
    outcomes: &[ChoiceOutcome],
    request: &DrawsRequest,
    declared: bool,
    problems: &mut Vec<Problem>,
) -> Result<(RateDistribution, Vec<Part>)> {
    let basis = &appraisal.choices[0].basis;
    let place = place_of(&basis.at, &basis.from);
    let specs: Vec<&Spec> =
        outcomes.iter().filter(|_| declared).map(|outcome| outcome.basis.spec()).collect();
    let (mut parts, mut missing) = (Vec::new(), Vec::new());
    let mut distributions = [const { Distribution::Fixed(0.0) }; 4];
    for quantity in Quantity::ALL {
        let (distribution, origin) =
            match (&request.distributions[quantity as usize], common(&specs, quantity)) {
                (Some(given), _) => (given.clone(), Origin::Given),
                (None, Common::Value(value)) => {
                    (Distribution::Fixed(value), Origin::Basis(place.to_string()))
                }
                (None, Common::None) if quantity == Quantity::Hazard => {
                    (Distribution::Fixed(0.0), Origin::Unstated)
                }
                (None, _) => {
                    missing.push(quantity.name());
                    continue;
                }
            };
        parts.push(Part { quantity, text: distribution.text(quantity), origin });
        distributions[quantity as usize] = distribution;
    }
    if !missing.is_empty() {
        let flags: Vec<String> = missing.iter().map(|name| format!("--{name}")).collect();
        let message = format!(
            "the basis `{}` does not state one value of {} for all options, as a Ramsey rule with one growth does",
            basis.value,
            missing.join(", ")
        );
        let hint = format!("{} with a value or a distribution", flags.join(", "));
        problems.push(Problem::error("part-missing", place, message).hint(hint));
        return Err(std::mem::take(problems).into());
    }
    let rate = RateDistribution::new(distributions).map_err(|error| from_core(&error, place))?;
    Ok((rate, parts))
}

/// What the bases of all options have in common.
enum Common {
    /// One value.
    Value(f64),
    /// None of them states it.
    None,
    /// They differ, or state it as something other than one value.
    Differs,
}

/// What all options' bases state of a part of the rate.
fn common(specs: &[&Spec], quantity: Quantity) -> Common {
    let stated: Vec<Common> = specs.iter().map(|spec| stated(spec, quantity)).collect();
    let mut found = Common::None;
    for (i, one) in stated.into_iter().enumerate() {
        found = match (i, found, one) {
            (0, _, one) => one,
            (_, Common::None, Common::None) => Common::None,
            (_, Common::Value(a), Common::Value(b)) if a == b => Common::Value(a),
            _ => Common::Differs,
        };
    }
    found
}

/// What a basis states of a part of the rate. Growth counts only where one rate holds for all years.
fn stated(spec: &Spec, quantity: Quantity) -> Common {
    let (preference, hazard, elasticity) = match spec {
        Spec::Ramsey { preference, hazard, elasticity, .. }
        | Spec::UncertainGrowth { preference, hazard, elasticity, .. }
        | Spec::GrowthRegimes { preference, hazard, elasticity, .. } => (*preference, *hazard, *elasticity),
        _ => return Common::None,
    };
    match (quantity, spec) {
        (Quantity::Preference, _) => Common::Value(preference),
        (Quantity::Hazard, _) if hazard == 0.0 => Common::None,
        (Quantity::Hazard, _) => Common::Value(hazard),
        (Quantity::Elasticity, _) => Common::Value(elasticity),
        (Quantity::Growth, Spec::Ramsey { growth, exact: false, compounding: Compounding::Yearly, .. }) => {
            match growth.as_slice() {
                [Band { value, to: None }] => Common::Value(*value),
                _ => Common::Differs,
            }
        }
        (Quantity::Growth, _) => Common::Differs,
    }
}

/// What keeps the draws from saying what they seem to.
fn warn(appraisal: &Appraisal, rate: &RateDistribution, problems: &mut Vec<Problem>) {
    if Quantity::ALL.into_iter().all(|quantity| rate.of(quantity).is_fixed()) {
        let message = "every part of the rate is one value, so that all draws are the same";
        let hint = "a distribution, as in --growth \"normal mean 2% sd 0.5%\"";
        problems.push(Problem::warning("nothing-uncertain", Place::default(), message).hint(hint));
    }
    for choice in &appraisal.choices {
        for (stream, basis) in choice.streams.iter().filter_map(|s| s.basis.as_ref().map(|basis| (s, basis)))
        {
            let message = format!(
                "`{}` is discounted on `{}`, not on the rate that is drawn: its present value is the same in every draw",
                stream.name, basis.value
            );
            let problem = Problem::warning("not-drawn", place_of(&basis.at, &basis.from), message);
            let problem =
                problem.hint("leave its basis out, where its rate is as uncertain as that of the others");
            if !problems.contains(&problem) {
                problems.push(problem);
            }
        }
        if choice.prices.valued() == Some(PriceBasis::Nominal) {
            let message = "the flows are in money of the day, and a rate made of preference and the growth of real \
                           consumption is a real one";
            let problem = Problem::warning("prices-differ", Place::name(&choice.name), message);
            problems.push(problem.hint("name an inflation rate or an index of prices hence_prices"));
        }
    }
    let bases: Vec<&Base> = appraisal.choices.iter().map(|choice| &choice.base.value).collect();
    if bases.windows(2).any(|pair| pair[0] != pair[1]) {
        let names: Vec<&str> = appraisal.choices.iter().map(|choice| choice.name.as_str()).collect();
        let message =
            "the options have different base years, so their values do not compare and no rank has a meaning";
        let problem = Problem::warning("base-differs", Place::name(&names.join(", ")), message);
        problems.push(problem.hint("one base year for all options"));
    }
}

/// The net flows of an option, those of its tails included.
fn list(appraisal: &Appraisal, choice: &Choice, outcome: &ChoiceOutcome, declared: bool) -> Listed {
    let dates = |label: &Label| matches!(label, Label::Date(_) | Label::Offset(_));
    let timed = !appraisal.axes[choice.axis].labels.iter().any(dates);
    let npv = (outcome.absolute.npv, outcome.increment.map(|increment| increment.npv));
    Listed {
        name: choice.name.clone(),
        base: base_words(&choice.base.value),
        timing: if timed { outcome.timing.to_string() } else { "as the dates or offsets say".to_owned() },
        declared: declared.then_some(npv),
        flows: outcome.dated.clone(),
    }
}

impl Prepared {
    /// The name of the baseline, where there is one.
    pub fn baseline(&self) -> Option<&str> {
        self.baseline.map(|baseline| self.options[baseline].name.as_str())
    }

    /// Draws, and says what came of it.
    ///
    /// # Errors
    /// Those of [`draw_values`] and of percentiles outside 0 to 100.
    pub fn draw(&self, draws: &Draws, percentiles: &[f64]) -> hence_core::Result<DrawsReport> {
        // Bad percentiles are told before the work, not after it.
        spread(&[0.0], percentiles)?;
        let flows: Vec<OptionFlows> = self.options.iter().map(|listed| listed.flows.net()).collect();
        let drawn = draw_values(&self.rate, &flows, draws)?;
        let summary = drawn.summary(percentiles, draws.threads)?;
        let mut options = Vec::with_capacity(self.options.len());
        for (i, (listed, absolute)) in self.options.iter().zip(summary.values).enumerate() {
            let values = &drawn.values[i];
            let over = self.baseline.map(|baseline| less(values, &drawn.values[baseline]));
            options.push(OptionDraws {
                name: listed.name.clone(),
                baseline: self.baseline == Some(i),
                base: listed.base.clone(),
                timing: listed.timing.clone(),
                declared: listed.declared,
                absolute,
                increment: over.as_ref().map(|over| spread(over, percentiles)).transpose()?,
                first: summary.first[i],
                histogram: histogram(over.as_ref().unwrap_or(values))?,
            });
        }
        Ok(DrawsReport { rate: summary.rate, options, drawn })
    }
}

/// The values of each draw less those of the baseline.
fn less(values: &[f64], baseline: &[f64]) -> Vec<f64> {
    values.iter().zip(baseline).map(|(value, base)| value - base).collect()
}
