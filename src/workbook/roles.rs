//! Roles: how a defined name says what its cells are to an appraisal.
//!
//! A name reads `hence_<role>[_<stream>][__<option>]`; a dot before the option is read too, and case does
//! not matter. [`ROLES`] is the one table of roles: help, documentation and checks are made from it.

mod slip;

use std::fmt;

/// What a named range is to an appraisal.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Role {
    /// The year or date to which values are discounted.
    Base,
    /// A rate line, schedule id or a number.
    Basis,
    /// Where in their years flows and base stand.
    Timing,
    /// The years of the flows.
    Years,
    /// The offsets of the flows, instead of years.
    Offsets,
    /// Years per column, where columns are not a year each.
    Span,
    /// One stream of costs.
    Cost,
    /// One stream of benefits.
    Benefit,
    /// One stream of net flows.
    Flow,
    /// A block of cost streams.
    Costs,
    /// A block of benefit streams.
    Benefits,
    /// A stream of damages, compared with the baseline's.
    Damage,
    /// The name of the baseline option.
    Baseline,
    /// The names of the streams that are the constrained cost.
    Budget,
    /// The rule by which options are ranked.
    Decide,
    /// The names of the streams that all options share.
    Shared,
    /// Physical effects.
    Effect,
    /// The signs in which streams are entered.
    Signs,
    /// The unit of a stream.
    Unit,
    /// A share added to a stream.
    Uplift,
    /// The value left at the last year.
    Residual,
    /// What follows the last year.
    Tail,
    /// Real or nominal prices, and of which year.
    PriceBasis,
    /// An index of prices or an inflation rate.
    Prices,
    /// Relative price growth of a stream.
    Growth,
    /// A path of consumption.
    Consumption,
    /// Elasticity of marginal utility.
    Elasticity,
    /// Income of a group.
    Income,
    /// A factor for each year.
    Factor,
    /// Present values by year, or their total.
    Pv,
    /// The workbook's own yearly rates.
    Rates,
    /// Net present value.
    Npv,
    /// Present value of costs.
    PvCosts,
    /// Present value of benefits.
    PvBenefits,
    /// Benefit-cost ratio.
    Ratio,
    /// Annual equivalent.
    Annual,
    /// Internal rate of return.
    Irr,
    /// Discounted payback.
    Payback,
    /// hence's own name for the verdict cell.
    Verdict,
    /// Which of several appraisals one of hence's own sheets is of.
    Appraisal,
    /// hence's own mark on the sheets it wrote.
    Own,
    /// The digest of the texts on hence's own sheets.
    Digest,
}

/// Whether a role is read, written, or hence's own.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Way {
    /// Read from the workbook.
    In,
    /// Filled or compared.
    Out,
    /// Set by hence itself; not for the user.
    Own,
}

/// Whether the name of a role carries the name of a stream.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Takes {
    /// Never: `hence_base`.
    NoStream,
    /// It may: `hence_pv`, `hence_pv_works`.
    MayStream,
    /// Always: `hence_cost_works`.
    Stream,
}

/// One row of the table of roles.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct RoleInfo {
    /// The role.
    pub role: Role,
    /// Its word in names: `cost`, `pv_costs`.
    pub word: &'static str,
    /// Read or written.
    pub way: Way,
    /// Whether a stream follows the word.
    pub takes: Takes,
    /// What it is, in one line.
    pub what: &'static str,
}

const fn row(role: Role, word: &'static str, way: Way, takes: Takes, what: &'static str) -> RoleInfo {
    RoleInfo { role, word, way, takes, what }
}

/// The one table of roles.
pub const ROLES: &[RoleInfo] = &[
    row(Role::Base, "base", Way::In, Takes::NoStream, "base year (number), financial year or date"),
    row(
        Role::Basis,
        "basis",
        Way::In,
        Takes::MayStream,
        "rate line, schedule id or a number; with a stream, a basis for that stream alone",
    ),
    row(Role::Timing, "timing", Way::In, Takes::NoStream, "positions: `flows middle, base end`"),
    row(
        Role::Years,
        "years",
        Way::In,
        Takes::NoStream,
        "a row or column of calendar years, financial years, year numbers or dates",
    ),
    row(
        Role::Offsets,
        "offsets",
        Way::In,
        Takes::NoStream,
        "instead of years: offsets in years from the base",
    ),
    row(
        Role::Span,
        "span",
        Way::In,
        Takes::NoStream,
        "years per column where columns are not a year each, in one cell or along the years: =1/12, 0.25, 1, 5",
    ),
    row(Role::Cost, "cost", Way::In, Takes::Stream, "a stream of costs, as long as the years"),
    row(Role::Benefit, "benefit", Way::In, Takes::Stream, "a stream of benefits, as long as the years"),
    row(Role::Flow, "flow", Way::In, Takes::Stream, "a stream of net flows, as long as the years"),
    row(Role::Costs, "costs", Way::In, Takes::NoStream, "a block of costs, labels first, one stream a row"),
    row(
        Role::Benefits,
        "benefits",
        Way::In,
        Takes::NoStream,
        "a block of benefits, labels first, one stream a row",
    ),
    row(
        Role::Damage,
        "damage",
        Way::In,
        Takes::Stream,
        "a stream that is a benefit where it falls below the baseline's",
    ),
    row(Role::Baseline, "baseline", Way::In, Takes::NoStream, "the name of the baseline option"),
    row(
        Role::Budget,
        "budget",
        Way::In,
        Takes::NoStream,
        "names of the streams that are the constrained cost",
    ),
    row(
        Role::Decide,
        "decide",
        Way::In,
        Takes::NoStream,
        "what ranks the options: `npv`, `ratio` or `least cost`",
    ),
    row(Role::Shared, "shared", Way::In, Takes::NoStream, "names of the streams that all options share"),
    row(
        Role::Effect,
        "effect",
        Way::In,
        Takes::Stream,
        "physical effects (tonnes, life-years), as long as the years",
    ),
    row(Role::Signs, "signs", Way::In, Takes::NoStream, "`costs negative` where costs are entered negative"),
    row(Role::Unit, "unit", Way::In, Takes::Stream, "unit of a stream: k, m, thousand, million or a number"),
    row(Role::Uplift, "uplift", Way::In, Takes::Stream, "share added to a stream (optimism bias): 20%"),
    row(
        Role::Residual,
        "residual",
        Way::In,
        Takes::Stream,
        "value left at the last year, in the stream's unit",
    ),
    row(Role::Tail, "tail", Way::In, Takes::Stream, "what follows the last year: `growing 1%, for ever`"),
    row(
        Role::PriceBasis,
        "price_basis",
        Way::In,
        Takes::NoStream,
        "prices of the flows: `real 2022`, `real` or `nominal`",
    ),
    row(
        Role::Prices,
        "prices",
        Way::In,
        Takes::NoStream,
        "an index along the years or an inflation rate, by which flows in money of the day are made real",
    ),
    row(
        Role::Growth,
        "growth",
        Way::In,
        Takes::Stream,
        "growth of a stream's price against others, a rate a year from the price base",
    ),
    row(
        Role::Consumption,
        "consumption",
        Way::In,
        Takes::NoStream,
        "consumption along the years without the project, in the unit and prices of the flows",
    ),
    row(
        Role::Elasticity,
        "elasticity",
        Way::In,
        Takes::NoStream,
        "elasticity of marginal utility for consumption and incomes, where the basis states none",
    ),
    row(
        Role::Income,
        "income",
        Way::In,
        Takes::Stream,
        "income of the group that the stream of that name falls to, for an equity weight; `income_reference` counts once",
    ),
    row(
        Role::Factor,
        "factor",
        Way::Out,
        Takes::MayStream,
        "a discount factor for each year; with a stream, on that stream's basis",
    ),
    row(Role::Pv, "pv", Way::Out, Takes::MayStream, "present value by year, or the total in one cell"),
    row(Role::Rates, "rates", Way::Out, Takes::NoStream, "the workbook's own yearly rates"),
    row(Role::Npv, "npv", Way::Out, Takes::NoStream, "net present value, one cell"),
    row(Role::PvCosts, "pv_costs", Way::Out, Takes::NoStream, "present value of costs, one cell"),
    row(Role::PvBenefits, "pv_benefits", Way::Out, Takes::NoStream, "present value of benefits, one cell"),
    row(Role::Ratio, "ratio", Way::Out, Takes::NoStream, "benefit-cost ratio, one cell"),
    row(Role::Annual, "annual", Way::Out, Takes::NoStream, "annual equivalent, one cell"),
    row(Role::Irr, "irr", Way::Out, Takes::NoStream, "internal rate of return, one cell"),
    row(Role::Payback, "payback", Way::Out, Takes::NoStream, "discounted payback in years, one cell"),
    row(
        Role::Verdict,
        "verdict",
        Way::Own,
        Takes::MayStream,
        "hence's own name for the verdict cell; with the name of an appraisal, of one among several",
    ),
    row(
        Role::Appraisal,
        "appraisal",
        Way::Own,
        Takes::NoStream,
        "hence's own note of the appraisal that such a sheet is of",
    ),
    row(Role::Own, "own", Way::Own, Takes::NoStream, "hence's own mark on the sheets it wrote"),
    row(Role::Digest, "digest", Way::Own, Takes::NoStream, "hence's own digest of the texts on such a sheet"),
];

impl Role {
    /// Its row of [`ROLES`].
    pub fn info(self) -> &'static RoleInfo {
        // Every role has its row; a test holds that.
        ROLES.iter().find(|info| info.role == self).unwrap_or(&ROLES[0])
    }

    /// Its word in names.
    pub fn word(self) -> &'static str {
        self.info().word
    }

    /// Whether it is one stream of flows (a cost, benefit, flow or damage, or a block of them).
    pub fn is_stream(self) -> bool {
        matches!(self, Role::Cost | Role::Benefit | Role::Flow | Role::Damage | Role::Costs | Role::Benefits)
    }

    /// Whether it states something once, in one cell or a list, so that it can be stated without a cell too.
    pub fn is_setting(self) -> bool {
        let texts = matches!(
            self,
            Role::Base
                | Role::Basis
                | Role::Timing
                | Role::Baseline
                | Role::Budget
                | Role::Decide
                | Role::Shared
                | Role::Signs
                | Role::Unit
                | Role::Tail
                | Role::PriceBasis
        );
        texts || self.is_number()
    }

    /// Whether it is a setting that is one number.
    pub fn is_number(self) -> bool {
        matches!(
            self,
            Role::Uplift | Role::Residual | Role::Prices | Role::Growth | Role::Elasticity | Role::Income
        )
    }

    /// Whether it is filled.
    pub fn is_output(self) -> bool {
        self.info().way == Way::Out
    }
}

/// A defined name, read: the role, and the stream and option it is about.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
pub struct RoleName {
    /// The role.
    pub role: Role,
    /// The stream, underscores as spaces.
    pub stream: Option<String>,
    /// The option, underscores as spaces.
    pub option: Option<String>,
}

impl RoleName {
    /// The role in words: `cost: works`, `base`.
    pub fn words(&self) -> String {
        let word = self.role.word().replace('_', " ");
        match &self.stream {
            Some(stream) => format!("{word}: {stream}"),
            None => word,
        }
    }
}

/// The defined name it is written as, in lower case for the role: `hence_cost_works__do_minimum`.
impl fmt::Display for RoleName {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{PREFIX}{}", self.role.word())?;
        if let Some(stream) = &self.stream {
            write!(f, "_{}", stream.replace(' ', "_"))?;
        }
        if let Some(option) = &self.option {
            write!(f, "__{}", option.replace(' ', "_"))?;
        }
        Ok(())
    }
}

/// What every name of hence begins with.
pub const PREFIX: &str = "hence_";

/// A key under which two names of streams, options or sheets are the same: only letters and digits matter,
/// not their case nor what stands between words.
pub fn key(name: &str) -> String {
    let words = name.split(|c: char| !c.is_alphanumeric()).filter(|word| !word.is_empty());
    words.collect::<Vec<_>>().join(" ").to_lowercase()
}

/// Reads a defined name.
///
/// # Arguments
/// `defined_name`: as it stands in the workbook.
///
/// # Returns
/// Nothing where the name is not one of hence's (it has no `hence_` prefix); otherwise the role, or why the
/// name looks like a slip, with the nearest role.
///
/// # Examples
/// ```
/// use hence_workbook::roles::{Role, parse_name};
/// let name = parse_name("Hence_Cost_water_works__do_minimum").unwrap().unwrap();
/// assert_eq!(name.role, Role::Cost);
/// assert_eq!(name.stream.as_deref(), Some("water works"));
/// assert_eq!(name.option.as_deref(), Some("do minimum"));
/// assert!(parse_name("Discount_Rate").is_none());
/// assert!(parse_name("hence_benifit_access").unwrap().unwrap_err().contains("hence_benefit_access"));
/// ```
pub fn parse_name(defined_name: &str) -> Option<Result<RoleName, String>> {
    let prefix = defined_name.get(..PREFIX.len())?;
    prefix.eq_ignore_ascii_case(PREFIX).then(|| parse_rest(&defined_name[PREFIX.len()..]))
}

/// Reads what follows the prefix: `cost_works__do_minimum`. A leading `hence_` is allowed.
pub fn parse_role(text: &str) -> Result<RoleName, String> {
    parse_name(text).unwrap_or_else(|| parse_rest(text))
}

fn parse_rest(rest: &str) -> Result<RoleName, String> {
    let (body, option) = split_option(rest);
    if option.is_some_and(|option| key(option).is_empty()) {
        return Err(format!("{PREFIX}{rest} ends where the name of an option should follow"));
    }
    let option = option.map(spaced);
    let lower = body.to_ascii_lowercase();
    // The longest word that fits wins, so that `pv_costs` is not the present value of a stream `costs`.
    let mut infos: Vec<&RoleInfo> = ROLES.iter().collect();
    infos.sort_by_key(|info| std::cmp::Reverse(info.word.len()));
    let mut slip = None;
    for info in infos {
        let Some(after) = lower.strip_prefix(info.word) else { continue };
        if after.is_empty() {
            if info.takes == Takes::Stream {
                return Err(format!(
                    "{PREFIX}{body} lacks the name of its stream: {PREFIX}{}_works, say",
                    info.word
                ));
            }
            return Ok(RoleName { role: info.role, stream: None, option });
        }
        if !after.starts_with('_') {
            continue;
        }
        let stream = &body[info.word.len() + 1..];
        if key(stream).is_empty() {
            return Err(format!("{PREFIX}{body} ends where the name of a stream should follow"));
        }
        if info.takes == Takes::NoStream {
            // A shorter word may still fit: `pv_costs_of_delay` is the present value of a stream.
            slip = slip.or_else(|| Some(slip::unwanted_stream(info, stream)));
            continue;
        }
        return Ok(RoleName { role: info.role, stream: Some(spaced(stream)), option });
    }
    Err(slip.unwrap_or_else(|| slip::unknown(body)))
}

/// Splits at the first double underscore or dot.
fn split_option(text: &str) -> (&str, Option<&str>) {
    let double = text.find("__").map(|at| (at, 2));
    let dot = text.find('.').map(|at| (at, 1));
    match double.into_iter().chain(dot).min() {
        Some((at, width)) => (&text[..at], Some(&text[at + width..])),
        None => (text, None),
    }
}

fn spaced(name: &str) -> String {
    name.replace('_', " ").split_whitespace().collect::<Vec<_>>().join(" ")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_role_has_one_row_and_its_word_reads_back() {
        for info in ROLES {
            assert_eq!(ROLES.iter().filter(|other| other.role == info.role).count(), 1, "{}", info.word);
            let stream = if info.takes == Takes::Stream { "_sluice_gates" } else { "" };
            let name = parse_name(&format!("hence_{}{stream}", info.word)).unwrap().unwrap();
            assert_eq!(name.role, info.role);
            assert_eq!(name.role.word(), info.word);
        }
    }

    #[test]
    fn display_parses_back() {
        for text in ["hence_pv_costs__option_a", "hence_cost_water_works", "hence_pv", "hence_base__b"] {
            let name = parse_name(text).unwrap().unwrap();
            assert_eq!(name.to_string(), text);
        }
    }
}
