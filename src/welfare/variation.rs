//! The exact value of a project that is not small against consumption.

use super::utility::{add_up, back, complement, each_positive, log_ratio, positive, power_mean};
use crate::curve::{check_elasticity, check_finite as finite};
use crate::dd::{Dd, exp2_m1, two_sum};
use crate::{Error, ErrorKind, Result, check};

/// The amount at the base, without the project, that changes welfare as much as the project does.
///
/// **Formula**: the E for which U(c_0 + E) - U(c_0) = sum over t of d_t [U(c_t + x_t) - U(c_t)], where d_t is the
/// discount factor of utility. It is known from the discount factors D(t) of small flows, D(t) = d_t U'(c_t)/U'(c_0):
/// with u(z) = ((1 + z)^(1-eta) - 1)/(1 - eta) the equation reads u(E/c_0) = sum of D(t) (c_t/c_0) u(x_t/c_t).
///
/// **Arguments**: `flows`, x_t, benefits less costs, in the unit of consumption; `consumption`, c_t, at the date of each
/// flow without the project, above 0; `factors`, D(t), 0 or more: those of the basis, or [`crate::welfare_factors`]
/// where rho is known; all three as long as each other. `base`, c_0, the consumption at the base, above 0;
/// `elasticity`, eta, 0 to 20.
///
/// **Returns**: money at the base: what society would have to be given instead of the project to be as well off
/// (negative: what it would have to lose). The marginal method's value, the sum of D(t) x_t, is its limit for flows
/// small against consumption, and its value at an elasticity of 0.
///
/// **Conventions**: flows and consumption are both totals or both a head.
///
/// **Edge cases**: no flow gives 0.
///
/// **Accuracy**: within 2 units in the last place where the flows have one sign; where gains and losses cancel, of the
/// larger of them.
///
/// **Errors**: `Shape` where lengths differ; `NotFinite`, with the index; `NoMeaning` for a consumption of 0 or less, with
/// or without the project (argument "flows" and the index of the flow), for a factor below 0, and where no amount at the
/// base is enough: above an elasticity of 1 utility has a ceiling, below it a floor at 0 consumption; `RateRange` for the
/// elasticity.
///
/// **Source**: J. R. Hicks, "The four consumer's surpluses", Review of Economic Studies 11, 1943 (equivalent
/// variation), applied to one good at many dates.
///
/// ```
/// use hence_core::{equivalent_variation, net_present_value};
/// // U(c) = 1 - 1/c. In a year, 4 becomes 5; the factor 0.8 is that of a small flow.
/// // 1 - 1/(1 + E/4) = 0.8 x (1 - 1/1.25) = 0.16, so E = 4 x (1/0.84 - 1).
/// let value = equivalent_variation(&[1.0], &[4.0], &[0.8], 4.0, 2.0)?;
/// assert!((value - 4.0 * (1.0 / 0.84 - 1.0)).abs() < 1e-15);
/// // Damage of a fifth of consumption in 100 years counts for more than its marginal value.
/// let damage = equivalent_variation(&[-20_000.0], &[100_000.0], &[0.05], 40_000.0, 1.5)?;
/// assert!(damage < -1_000.0 && damage > -1_300.0);
/// let error = equivalent_variation(&[1.0, -4.0], &[4.0, 4.0], &[1.0, 0.8], 4.0, 2.0).unwrap_err();
/// assert_eq!(error.to_string(), "flows[1]: the flow of -4 leaves nothing of a consumption of 4, and utility needs a \
///     consumption above 0 (no-meaning)");
/// # Ok::<(), hence_core::Error>(())
/// ```
pub fn equivalent_variation(
    flows: &[f64],
    consumption: &[f64],
    factors: &[f64],
    base: f64,
    elasticity: f64,
) -> Result<f64> {
    let gain = gain(flows, consumption, factors, base, elasticity)?;
    let k = complement(elasticity);
    let share = back(k, gain).ok_or_else(|| beyond(k))?;
    check::result("flows", (share * base).hi)
}

/// The amount which, taken at the base from those who have the project, leaves them as well off as without it.
///
/// **Formula**: the C for which U(c_0 + x_0) - U(c_0 + x_0 - C) = sum over t of d_t [U(c_t + x_t) - U(c_t)], with d_t as
/// for [`equivalent_variation`] and x_0 the flow at the base itself.
///
/// **Arguments**: as for [`equivalent_variation`]; `base_flow`, x_0, which the flows hold too: 0 where none stands at
/// the base.
///
/// **Returns**: money at the base: the most that could be paid for the project (negative: what must be received for
/// bearing it). Not above the equivalent variation; equal to it, and to the marginal value, in the limit of small flows.
///
/// **Accuracy**: as for [`equivalent_variation`].
///
/// **Errors**: as for [`equivalent_variation`]; `NoMeaning` where the base flow leaves no consumption, and where a gain
/// is worth more than all consumption at the base, which happens below an elasticity of 1 only.
///
/// **Source**: as for [`equivalent_variation`] (compensating variation).
///
/// ```
/// use hence_core::compensating_variation;
/// // 1/(1 - C/4) - 1 = 0.8 x (1 - 1/1.25) = 0.16, so C = 4 x (1 - 1/1.16).
/// let value = compensating_variation(&[1.0], &[4.0], &[0.8], 4.0, 0.0, 2.0)?;
/// assert!((value - 4.0 * (1.0 - 1.0 / 1.16)).abs() < 1e-15);
/// // A project of the base alone is worth what it brings.
/// assert_eq!(compensating_variation(&[3.0], &[4.0], &[1.0], 4.0, 3.0, 2.0)?, 3.0);
/// assert!(compensating_variation(&[1.0], &[4.0], &[0.8], 4.0, -5.0, 2.0).is_err());
/// # Ok::<(), hence_core::Error>(())
/// ```
pub fn compensating_variation(
    flows: &[f64],
    consumption: &[f64],
    factors: &[f64],
    base: f64,
    base_flow: f64,
    elasticity: f64,
) -> Result<f64> {
    let gain = gain(flows, consumption, factors, base, elasticity)?;
    finite("base_flow", base_flow)?;
    let with = base + base_flow;
    if with < f64::MIN_POSITIVE {
        return Err(leaves_nothing("base_flow", base_flow, base));
    }
    let k = complement(elasticity);
    // In units of utility at c_0 + x_0: (c_0/(c_0 + x_0))^(1-eta).
    let scale = exp2_m1(-(log_ratio(base, base_flow) * k)) + Dd::ONE;
    let share = back(k, -(gain * scale)).ok_or_else(|| beyond(k))?;
    // Adding zero turns -0 into 0.
    check::result("flows", -(share * two_sum(base, base_flow)).hi + 0.0)
}

/// The change of welfare over c_0 U'(c_0).
fn gain(flows: &[f64], consumption: &[f64], factors: &[f64], base: f64, elasticity: f64) -> Result<Dd> {
    check::same_length(("flows", flows), ("consumption", consumption))?;
    check::same_length(("flows", flows), ("factors", factors))?;
    check::finite_all("flows", flows)?;
    check::finite_all("factors", factors)?;
    each_positive("consumption", consumption)?;
    positive("base", base)?;
    check_elasticity(elasticity)?;
    if let Some(place) = factors.iter().position(|&factor| factor < 0.0) {
        let message = format!("the factor is {}, allowed 0 or more", factors[place]);
        return Err(Error::new(ErrorKind::NoMeaning, "factors", message).with_index(place));
    }
    let k = complement(elasticity);
    let mut terms = Vec::with_capacity(flows.len());
    for (index, ((&x, &c), &factor)) in flows.iter().zip(consumption).zip(factors).enumerate() {
        if c + x < f64::MIN_POSITIVE {
            return Err(leaves_nothing("flows", x, c).with_index(index));
        }
        terms.push(Dd::of(c) / Dd::of(base) * factor * power_mean(k, log_ratio(c, x)));
    }
    let total = add_up(terms.into_iter());
    check::result("flows", total.hi)?;
    Ok(total)
}

fn leaves_nothing(argument: &'static str, flow: f64, consumption: f64) -> Error {
    let message = format!(
        "the flow of {flow} leaves nothing of a consumption of {consumption}, and utility needs a consumption above 0"
    );
    Error::new(ErrorKind::NoMeaning, argument, message)
        .with_hint("state flows and consumption in one unit, both totals or both a head")
}

/// No amount at the base is worth as much.
fn beyond(k: Dd) -> Error {
    let message = if k.hi < 0.0 {
        "no amount at the base is worth as much: utility has a ceiling above an elasticity of 1"
    } else {
        "all consumption at the base is not worth as much"
    };
    Error::new(ErrorKind::NoMeaning, "flows", message)
        .with_hint("state flows and consumption in one unit, both totals or both a head")
}
