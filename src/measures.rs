//! The measures of an appraisal: totals, present values, ratios, annual equivalents, payback, eras.

use crate::sum::Compensated;
use crate::{Curve, Error, ErrorKind, ExactSum, Result, check, dot, sum};

/// The undiscounted total of a stream.
///
/// **Formula**: sum of the flows.
///
/// **Arguments**: `flows`, in one unit of money, any sign.
///
/// **Returns**: the total; 0 without flows.
///
/// **Accuracy**: the correctly rounded exact sum, so the order of the flows does not matter.
///
/// **Errors**: `NotFinite`, with the index, or where the total is too large for a number.
///
/// ```
/// assert_eq!(hence_core::undiscounted_total(&[1e16, 1.0, -1e16]).unwrap(), 1.0);
/// ```
pub fn undiscounted_total(flows: &[f64]) -> Result<f64> {
    check::finite_all("flows", flows)?;
    check::result("flows", sum(flows))
}

/// The present value of a stream.
///
/// **Formula**: sum of D(t_i) × flow_i.
///
/// **Arguments**: `curve`, the discount factors D; `offsets`, t_i in years, in any order, repeats allowed; `flows`,
/// money at those offsets, as many.
///
/// **Returns**: money at the base; 0 without flows. A flow of 0 still needs a factor.
///
/// **Accuracy**: the factors' 2 units in the last place; their products are added exactly and rounded once, so the
/// order of the flows does not matter.
///
/// **Errors**: `Shape` where lengths differ; `NotFinite`, with the index; `OutsideDomain` from the curve.
///
/// ```
/// use hence_core::{Compounding, Spec, Where, present_value};
/// let curve = Spec::Flat { rate: 1.0, compounding: Compounding::Yearly }.curve(&Where::default()).unwrap();
/// assert_eq!(present_value(&curve, &[1.0, 2.0, 3.0], &[8.0, 8.0, 8.0]).unwrap(), 7.0);
/// // 1,000,000 due in 140 years at 10%: 1.603 with yearly compounding.
/// let curve = Spec::Flat { rate: 0.1, compounding: Compounding::Yearly }.curve(&Where::default()).unwrap();
/// assert!((present_value(&curve, &[140.0], &[1e6]).unwrap() - 1.603).abs() < 5e-4);
/// let error = present_value(&curve, &[1.0, 2.0], &[8.0, f64::NAN]).unwrap_err();
/// assert_eq!(error.to_string(), "flows[1]: found NaN, allowed: finite numbers (not-finite)");
/// ```
pub fn present_value(curve: &Curve, offsets: &[f64], flows: &[f64]) -> Result<f64> {
    check::same_length(("offsets", offsets), ("flows", flows))?;
    if let Some(value) = quick_present_value(curve, offsets, flows) {
        return Ok(value);
    }
    check::finite_all("offsets", offsets)?;
    check::finite_all("flows", flows)?;
    let mut factors = vec![0.0; offsets.len()];
    curve.factors(offsets, &mut factors)?;
    check::result("flows", dot(&factors, flows))
}

/// The present value in one pass over offsets and flows, a block at a time, so that factors stay near the processor; none
/// where anything is amiss, or the rounding of the sum is in doubt.
fn quick_present_value(curve: &Curve, offsets: &[f64], flows: &[f64]) -> Option<f64> {
    const BLOCK: usize = 1024;
    let batch = curve.batch(offsets);
    let mut factors = [0.0; BLOCK];
    let mut sum = Compensated::new();
    for (offsets, flows) in offsets.chunks(BLOCK).zip(flows.chunks(BLOCK)) {
        if batch.vanish(offsets) && check::all_finite(flows) {
            continue;
        }
        let factors = &mut factors[..offsets.len()];
        batch.factors(offsets, factors)?;
        sum.add_products(factors, flows);
    }
    sum.total()
}

/// The present value of each flow.
///
/// **Formula**: factor_i × flow_i.
///
/// **Arguments**: `factors`, discount factors; `flows`, money, as many.
///
/// **Returns**: money at the base, in the order of the flows.
///
/// **Accuracy**: one rounding each.
///
/// **Errors**: `Shape` where lengths differ; `NotFinite`, with the index.
///
/// ```
/// let error = hence_core::present_values(&[1.0, 0.9], &[100.0]).unwrap_err();
/// assert_eq!(error.to_string(), "flows: found 1 numbers, due are 2, one for each of factors (shape)");
/// ```
pub fn present_values(factors: &[f64], flows: &[f64]) -> Result<Vec<f64>> {
    check::same_length(("factors", factors), ("flows", flows))?;
    check::finite_all("factors", factors)?;
    check::finite_all("flows", flows)?;
    let values = factors.iter().zip(flows).map(|(factor, flow)| check::result("flows", factor * flow));
    values.enumerate().map(|(place, value)| value.map_err(|error| error.with_index(place))).collect()
}

/// The net present value of an option.
///
/// **Formula**: sum of factor_i × benefit_i - sum of factor_i × cost_i.
///
/// **Arguments**: `factors`, discount factors by year; `benefits` and `costs`, money by year, both positive as a
/// rule, as many as factors.
///
/// **Returns**: money at the base; 0 without years.
///
/// **Accuracy**: all products are added exactly and rounded once.
///
/// **Errors**: `Shape` where lengths differ; `NotFinite`, with the index.
///
/// ```
/// let npv = hence_core::net_present_value(&[1.0, 0.5], &[0.0, 300.0], &[100.0, 20.0]).unwrap();
/// assert_eq!(npv, 40.0);
/// ```
pub fn net_present_value(factors: &[f64], benefits: &[f64], costs: &[f64]) -> Result<f64> {
    for (name, flows) in [("benefits", benefits), ("costs", costs)] {
        check::same_length(("factors", factors), (name, flows))?;
        check::finite_all(name, flows)?;
    }
    check::finite_all("factors", factors)?;
    let twice = [factors, factors].concat();
    let flows: Vec<f64> = benefits.iter().copied().chain(costs.iter().map(|cost| -cost)).collect();
    check::result("benefits", dot(&twice, &flows))
}

/// The benefit-cost ratio.
///
/// **Formula**: PV of benefits / PV of costs.
///
/// **Arguments**: both present values, in one unit; costs positive.
///
/// **Returns**: a number without unit; above 1 where the net present value is positive.
///
/// **Errors**: `NotFinite`; `NoMeaning` where the costs are 0 or negative.
///
/// ```
/// assert_eq!(hence_core::benefit_cost_ratio(150.0, 100.0).unwrap(), 1.5);
/// let error = hence_core::benefit_cost_ratio(150.0, 0.0).unwrap_err();
/// assert_eq!(error.to_string(), "pv_costs: found 0, a ratio needs more than 0 (no-meaning)");
/// ```
pub fn benefit_cost_ratio(pv_benefits: f64, pv_costs: f64) -> Result<f64> {
    ratio(("pv_benefits", pv_benefits), ("pv_costs", pv_costs))
}

/// The net present value per unit of the constrained cost, by which projects are ranked under a budget.
///
/// **Formula**: NPV / PV of the constrained cost.
///
/// **Arguments**: both at the base, in one unit; the budget positive.
///
/// **Returns**: a number without unit.
///
/// **Errors**: `NotFinite`; `NoMeaning` where the budget is 0 or negative.
///
/// ```
/// assert_eq!(hence_core::npv_per_budget(30.0, 120.0).unwrap(), 0.25);
/// ```
pub fn npv_per_budget(npv: f64, pv_budget: f64) -> Result<f64> {
    ratio(("npv", npv), ("pv_budget", pv_budget))
}

/// The cost per unit of a physical effect (a tonne, a life-year).
///
/// **Formula**: PV of costs / effect.
///
/// **Arguments**: `pv_costs`, money at the base; `effect`, the sum of the effect over the years, positive, either
/// discounted (its [`present_value`]) or not (its [`undiscounted_total`]); a report says which.
///
/// **Returns**: money per unit.
///
/// **Errors**: `NotFinite`; `NoMeaning` where the effect is 0 or negative.
///
/// ```
/// assert_eq!(hence_core::cost_per_effect(500.0, 20.0).unwrap(), 25.0);
/// ```
pub fn cost_per_effect(pv_costs: f64, effect: f64) -> Result<f64> {
    ratio(("pv_costs", pv_costs), ("effect", effect))
}

fn ratio(above: (&'static str, f64), below: (&'static str, f64)) -> Result<f64> {
    check::finite(above.0, above.1)?;
    check::finite(below.0, below.1)?;
    if below.1 <= 0.0 {
        let message = format!("found {}, a ratio needs more than 0", below.1);
        return Err(Error::new(ErrorKind::NoMeaning, below.0, message)
            .with_hint("check the signs, or report the net present value instead"));
    }
    check::result(above.0, above.1 / below.1)
}

/// The constant amount a year, over the service years, that has the same present value.
///
/// **Formula**: NPV / S with S = D(1) + D(2) + ... + D(N).
///
/// **Arguments**: `curve`, the discount factors D; `npv`, money at the base; `service_years`, N, 1 to 100,000.
///
/// **Returns**: (money per year, S). Under a curve whose rate changes, lives of different length are not
/// comparable by it.
///
/// **Accuracy**: S is the exact sum of the factors, rounded once.
///
/// **Errors**: `NotFinite`; `NoMeaning` for N outside 1 to 100,000, or a sum that vanishes; `OutsideDomain` where the
/// curve ends before N.
///
/// **Source**: for one rate, the capital recovery factor r/(1 - (1+r)^-N); E. L. Grant, Principles of Engineering
/// Economy, 1930.
///
/// ```
/// use hence_core::{Compounding, Spec, Where, annual_equivalent};
/// let curve = Spec::Flat { rate: 1.0, compounding: Compounding::Yearly }.curve(&Where::default()).unwrap();
/// assert_eq!(annual_equivalent(&curve, 7.0, 3).unwrap(), (8.0, 0.875));
/// assert_eq!(annual_equivalent(&curve, 7.0, 0).unwrap_err().code(), "no-meaning");
/// ```
pub fn annual_equivalent(curve: &Curve, npv: f64, service_years: u32) -> Result<(f64, f64)> {
    check::finite("npv", npv)?;
    if !(1..=100_000).contains(&service_years) {
        let message = format!("found {service_years} service years, allowed 1 to 100000");
        return Err(Error::new(ErrorKind::NoMeaning, "service_years", message)
            .with_hint("the years in which the project serves, the appraisal's length as a rule"));
    }
    let offsets: Vec<f64> = (1..=service_years).map(f64::from).collect();
    let mut factors = vec![0.0; offsets.len()];
    curve.factors(&offsets, &mut factors)?;
    let annuity = check::result("curve", sum(&factors))?;
    if annuity <= 0.0 {
        let message = "the factors of the service years are all 0";
        return Err(Error::new(ErrorKind::NoMeaning, "curve", message).with_hint("a lower rate"));
    }
    Ok((check::result("npv", npv / annuity)?, annuity))
}

/// Discounted payback: when the cumulated present value reaches zero.
#[derive(Clone, Copy, Debug, Default, PartialEq, serde::Serialize, serde::Deserialize)]
pub struct Payback {
    /// The offset at which cumulated PV first reaches zero from below; none where it never does.
    pub first: Option<f64>,
    /// The offset from which it stays at or above zero; none where it ends below.
    pub last: Option<f64>,
}

/// The discounted payback, linear within its year.
///
/// **Formula**: t = t_(k-1) + (t_k - t_(k-1)) × (-C_(k-1))/(C_k - C_(k-1)), C_k the present value cumulated to t_k,
/// where C_(k-1) < 0 and C_k >= 0.
///
/// **Arguments**: `offsets`, years, in any order, repeats allowed; `pv_by_year`, the net present value at each.
///
/// **Returns**: the first crossing from below and the last one, in offset years; they differ where a later cost
/// (a renewal, a clean-up) pulls the total below zero again.
///
/// **Edge cases**: a total that is never below zero has nothing to pay back: both are the first offset. Without
/// years both are none.
///
/// **Accuracy**: each C_k is an exact sum, rounded once.
///
/// **Errors**: `Shape` where lengths differ; `NotFinite`, with the index.
///
/// ```
/// use hence_core::discounted_payback;
/// let back = discounted_payback(&[0.0, 1.0, 2.0], &[-100.0, 80.0, 80.0]).unwrap();
/// assert_eq!((back.first, back.last), (Some(1.25), Some(1.25)));
/// let back = discounted_payback(&[0.0, 1.0], &[-100.0, 80.0]).unwrap();
/// assert_eq!((back.first, back.last), (None, None));
/// ```
pub fn discounted_payback(offsets: &[f64], pv_by_year: &[f64]) -> Result<Payback> {
    check::same_length(("offsets", offsets), ("pv_by_year", pv_by_year))?;
    check::finite_all("offsets", offsets)?;
    check::finite_all("pv_by_year", pv_by_year)?;
    let cumulated = cumulate(offsets, pv_by_year)?;
    let (mut first, mut last) = (None, None);
    let mut before: Option<(f64, f64)> = None;
    for &(t, total) in &cumulated {
        match before {
            Some((start, below)) if below < 0.0 && total >= 0.0 => {
                let crossing = start + (t - start) * (-below / (total - below));
                first = first.or(Some(crossing));
                last = Some(crossing);
            }
            None if total >= 0.0 => last = Some(t),
            _ if total < 0.0 => last = None,
            _ => {}
        }
        before = Some((t, total));
    }
    if cumulated.iter().all(|&(_, total)| total >= 0.0) {
        first = last;
    }
    Ok(Payback { first, last })
}

/// (offset, total to and with it), offsets rising, each once.
fn cumulate(offsets: &[f64], values: &[f64]) -> Result<Vec<(f64, f64)>> {
    let mut order: Vec<usize> = (0..offsets.len()).collect();
    order.sort_by(|&a, &b| offsets[a].total_cmp(&offsets[b]));
    let mut exact = ExactSum::new();
    let mut cumulated: Vec<(f64, f64)> = Vec::new();
    for place in order {
        exact.add(values[place]);
        let total = check::result("pv_by_year", exact.total())?;
        match cumulated.last_mut() {
            Some(last) if last.0 == offsets[place] => last.1 = total,
            _ => cumulated.push((offsets[place], total)),
        }
    }
    Ok(cumulated)
}

/// The mean time of a stream's value: how far ahead its weight lies.
///
/// **Formula**: sum of |PV_i| t_i / sum of |PV_i|.
///
/// **Arguments**: `offsets`, t_i in years, any order; `gross_pv`, present values, taken without their signs, so that
/// costs and benefits both count.
///
/// **Returns**: years from the base.
///
/// **Accuracy**: both sums exact, rounded once each.
///
/// **Errors**: `Shape` where lengths differ; `NotFinite`, with the index; `NoMeaning` where every value is 0.
///
/// **Source**: F. R. Macaulay, Some Theoretical Problems Suggested by the Movements of Interest Rates, 1938 (duration),
/// here of gross values.
///
/// ```
/// assert_eq!(hence_core::mean_time(&[0.0, 10.0], &[-50.0, 150.0]).unwrap(), 7.5);
/// ```
pub fn mean_time(offsets: &[f64], gross_pv: &[f64]) -> Result<f64> {
    let (weights, total) = gross(offsets, gross_pv)?;
    check::result("gross_pv", dot(&weights, offsets) / total)
}

/// The absolute values and their sum, which is above 0.
fn gross(offsets: &[f64], gross_pv: &[f64]) -> Result<(Vec<f64>, f64)> {
    check::same_length(("offsets", offsets), ("gross_pv", gross_pv))?;
    check::finite_all("offsets", offsets)?;
    check::finite_all("gross_pv", gross_pv)?;
    let weights: Vec<f64> = gross_pv.iter().map(|value| value.abs()).collect();
    let total = check::result("gross_pv", sum(&weights))?;
    if total == 0.0 {
        let message = "every present value is 0, so there is nothing to weigh";
        return Err(Error::new(ErrorKind::NoMeaning, "gross_pv", message).with_hint("a stream with flows"));
    }
    Ok((weights, total))
}

/// Edges of eras in offset years; the edge year belongs to the earlier era.
#[derive(Clone, Debug, PartialEq)]
pub struct Eras(pub Vec<f64>);

impl Default for Eras {
    /// 30 and 100 years.
    fn default() -> Self {
        Eras(vec![30.0, 100.0])
    }
}

/// The share of a stream's gross present value that falls in each era.
///
/// **Formula**: sum of |PV_i| with edge_(k-1) < t_i <= edge_k, over the sum of all |PV_i|.
///
/// **Arguments**: `offsets`, t_i in years, any order; `gross_pv`, present values, taken without their signs; `eras`, the
/// edges, rising.
///
/// **Returns**: fractions that sum to 1, one more than there are edges; the first era also holds what lies before the
/// base.
///
/// **Errors**: `Shape` where lengths differ; `NotFinite`, with the index; `Edges` where edges do not rise; `NoMeaning`
/// where every value is 0.
///
/// ```
/// use hence_core::{Eras, era_shares};
/// let shares = era_shares(&[0.0, 30.0, 31.0, 200.0], &[-50.0, 10.0, 30.0, 10.0], &Eras::default()).unwrap();
/// assert_eq!(shares, [0.6, 0.3, 0.1]);
/// ```
pub fn era_shares(offsets: &[f64], gross_pv: &[f64], eras: &Eras) -> Result<Vec<f64>> {
    check::finite_all("eras", &eras.0)?;
    if let Some(place) = eras.0.windows(2).position(|pair| pair[0] >= pair[1]) {
        let message = format!("found {} after {}, edges must rise", eras.0[place + 1], eras.0[place]);
        return Err(Error::new(ErrorKind::Edges, "eras", message).with_index(place + 1).with_hint("30, 100"));
    }
    let (weights, total) = gross(offsets, gross_pv)?;
    let mut held = vec![Vec::new(); eras.0.len() + 1];
    for (&t, weight) in offsets.iter().zip(weights) {
        held[eras.0.partition_point(|&edge| edge < t)].push(weight);
    }
    Ok(held.iter().map(|weights| sum(weights) / total).collect())
}

/// One step from an option to the next dearer one.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Increment {
    /// The place of the cheaper option in the input.
    pub from: usize,
    /// The place of the dearer option in the input.
    pub to: usize,
    /// What it costs more, 0 or positive.
    pub cost: f64,
    /// What it yields more, or less where negative.
    pub benefit: f64,
    /// benefit/cost; none where the costs are equal.
    pub ratio: Option<f64>,
}

/// The incremental benefit-cost ratios between options in order of cost.
///
/// **Formula**: (benefit_k - benefit_(k-1)) / (cost_k - cost_(k-1)), options sorted by cost.
///
/// **Arguments**: `options`, (PV of costs, PV of benefits) of each, any order.
///
/// **Returns**: one step fewer than there are options, cheapest first; options of equal cost are ordered by benefit,
/// then by their place. Dominated options stay in; their steps have a ratio below 0.
///
/// **Accuracy**: two roundings and a division.
///
/// **Errors**: `NotFinite`, with the index.
///
/// ```
/// let steps = hence_core::incremental_ratios(&[(200.0, 290.0), (100.0, 150.0)]).unwrap();
/// assert_eq!((steps[0].from, steps[0].to, steps[0].ratio), (1, 0, Some(1.4)));
/// ```
pub fn incremental_ratios(options: &[(f64, f64)]) -> Result<Vec<Increment>> {
    for (place, &(cost, benefit)) in options.iter().enumerate() {
        check::finite("options", cost)
            .and(check::finite("options", benefit))
            .map_err(|e| e.with_index(place))?;
    }
    let mut order: Vec<usize> = (0..options.len()).collect();
    order.sort_by(|&a, &b| {
        options[a].0.total_cmp(&options[b].0).then(options[a].1.total_cmp(&options[b].1)).then(a.cmp(&b))
    });
    let step = |pair: &[usize]| {
        let (from, to) = (pair[0], pair[1]);
        let cost = check::result("options", options[to].0 - options[from].0)?;
        let benefit = check::result("options", options[to].1 - options[from].1)?;
        let ratio = if cost > 0.0 { Some(check::result("options", benefit / cost)?) } else { None };
        Ok(Increment { from, to, cost, benefit, ratio })
    };
    order.windows(2).map(step).collect()
}
