//! What headings mean, in the general words of the trade.

use crate::roles::{Role, key};

/// What a heading says of its row or of the cell beside it.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Meaning {
    /// A stream of flows, and the word that says so.
    Flow(Role, &'static str),
    /// A line of factors or present values.
    Line(Role, &'static str),
    /// One cell with a result.
    Result(Role, &'static str),
    /// One cell with the base or the rate.
    Setting(Role, &'static str),
    /// A total or a line made of others.
    Total(&'static str),
}

/// Phrases in the order in which they are tried; each must stand as whole words.
const PHRASES: &[(&str, Meaning)] = &[
    ("net present value", Meaning::Result(Role::Npv, "net present value")),
    ("npv", Meaning::Result(Role::Npv, "npv")),
    ("benefit cost ratio", Meaning::Result(Role::Ratio, "benefit cost ratio")),
    ("bcr", Meaning::Result(Role::Ratio, "bcr")),
    ("present value of costs", Meaning::Result(Role::PvCosts, "present value of costs")),
    ("pv of costs", Meaning::Result(Role::PvCosts, "pv of costs")),
    ("pv costs", Meaning::Result(Role::PvCosts, "pv costs")),
    ("present value of benefits", Meaning::Result(Role::PvBenefits, "present value of benefits")),
    ("pv of benefits", Meaning::Result(Role::PvBenefits, "pv of benefits")),
    ("pv benefits", Meaning::Result(Role::PvBenefits, "pv benefits")),
    ("internal rate of return", Meaning::Result(Role::Irr, "internal rate of return")),
    ("irr", Meaning::Result(Role::Irr, "irr")),
    ("discounted payback", Meaning::Result(Role::Payback, "discounted payback")),
    ("annual equivalent", Meaning::Result(Role::Annual, "annual equivalent")),
    ("equivalent annual", Meaning::Result(Role::Annual, "equivalent annual")),
    ("discount rate", Meaning::Setting(Role::Basis, "discount rate")),
    ("base year", Meaning::Setting(Role::Base, "base year")),
    ("discount factor", Meaning::Line(Role::Factor, "discount factor")),
    ("discount factors", Meaning::Line(Role::Factor, "discount factors")),
    ("factor", Meaning::Line(Role::Factor, "factor")),
    ("present value", Meaning::Line(Role::Pv, "present value")),
    ("pv", Meaning::Line(Role::Pv, "pv")),
    ("discounted", Meaning::Line(Role::Pv, "discounted")),
    ("total", Meaning::Total("total")),
    ("totals", Meaning::Total("totals")),
    ("subtotal", Meaning::Total("subtotal")),
    ("sub total", Meaning::Total("sub total")),
    ("sum", Meaning::Total("sum")),
    ("cumulative", Meaning::Total("cumulative")),
    ("balance", Meaning::Total("balance")),
    ("net cash flow", Meaning::Total("net cash flow")),
    ("net benefits", Meaning::Total("net benefits")),
    ("inflation", Meaning::Total("inflation")),
    ("index", Meaning::Total("index")),
    ("avoided damage", Meaning::Flow(Role::Benefit, "avoided damage")),
    ("avoided damages", Meaning::Flow(Role::Benefit, "avoided damages")),
    ("avoided costs", Meaning::Flow(Role::Benefit, "avoided costs")),
    ("avoided", Meaning::Flow(Role::Benefit, "avoided")),
    ("cost savings", Meaning::Flow(Role::Benefit, "cost savings")),
    ("damage", Meaning::Flow(Role::Damage, "damage")),
    ("damages", Meaning::Flow(Role::Damage, "damages")),
    ("benefit", Meaning::Flow(Role::Benefit, "benefit")),
    ("benefits", Meaning::Flow(Role::Benefit, "benefits")),
    ("saving", Meaning::Flow(Role::Benefit, "saving")),
    ("savings", Meaning::Flow(Role::Benefit, "savings")),
    ("revenue", Meaning::Flow(Role::Benefit, "revenue")),
    ("revenues", Meaning::Flow(Role::Benefit, "revenues")),
    ("receipts", Meaning::Flow(Role::Benefit, "receipts")),
    ("income", Meaning::Flow(Role::Benefit, "income")),
    ("sales", Meaning::Flow(Role::Benefit, "sales")),
    ("sold", Meaning::Flow(Role::Benefit, "sold")),
    ("cost", Meaning::Flow(Role::Cost, "cost")),
    ("costs", Meaning::Flow(Role::Cost, "costs")),
    ("capex", Meaning::Flow(Role::Cost, "capex")),
    ("opex", Meaning::Flow(Role::Cost, "opex")),
    ("expenditure", Meaning::Flow(Role::Cost, "expenditure")),
    ("expenses", Meaning::Flow(Role::Cost, "expenses")),
    ("investment", Meaning::Flow(Role::Cost, "investment")),
    ("construction", Meaning::Flow(Role::Cost, "construction")),
    ("maintenance", Meaning::Flow(Role::Cost, "maintenance")),
    ("operation", Meaning::Flow(Role::Cost, "operation")),
    ("operating", Meaning::Flow(Role::Cost, "operating")),
    ("replacement", Meaning::Flow(Role::Cost, "replacement")),
    ("replacements", Meaning::Flow(Role::Cost, "replacements")),
    ("renewal", Meaning::Flow(Role::Cost, "renewal")),
    ("renewals", Meaning::Flow(Role::Cost, "renewals")),
    ("upkeep", Meaning::Flow(Role::Cost, "upkeep")),
    ("repairs", Meaning::Flow(Role::Cost, "repairs")),
    ("monitoring", Meaning::Flow(Role::Cost, "monitoring")),
    ("treatment", Meaning::Flow(Role::Cost, "treatment")),
    ("works", Meaning::Flow(Role::Cost, "works")),
];

/// What a heading means, where one of the phrases stands in it as whole words.
pub(super) fn meaning(heading: &str) -> Option<Meaning> {
    let heading = format!(" {} ", key(heading));
    PHRASES.iter().find(|(phrase, _)| heading.contains(&format!(" {phrase} "))).map(|(_, meaning)| *meaning)
}

/// The side of the ledger that a total's heading says: costs in `Total costs`, nothing in `Benefits less costs`.
pub(super) fn side(heading: &str) -> Option<Role> {
    let heading = format!(" {} ", key(heading));
    let says = |phrase: &str| heading.contains(&format!(" {phrase} "));
    let mut roles =
        PHRASES.iter().filter(|(phrase, _)| says(phrase)).filter_map(|(_, meaning)| match meaning {
            Meaning::Flow(role, _) => Some(*role),
            _ => None,
        });
    let first = roles.next()?;
    roles.all(|role| role == first).then_some(first)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn headings() {
        assert_eq!(meaning("Capital cost (£k)"), Some(Meaning::Flow(Role::Cost, "cost")));
        assert_eq!(meaning("Avoided damage"), Some(Meaning::Flow(Role::Benefit, "avoided damage")));
        assert_eq!(meaning("Flood damage avoided"), Some(Meaning::Flow(Role::Benefit, "avoided")));
        assert_eq!(meaning("Discount factor @ 3.5%"), Some(Meaning::Line(Role::Factor, "discount factor")));
        assert_eq!(meaning("Benefit-cost ratio"), Some(Meaning::Result(Role::Ratio, "benefit cost ratio")));
        assert_eq!(meaning("Total costs"), Some(Meaning::Total("total")));
        assert_eq!(meaning("Costume hire"), None);
        assert_eq!(side("Total costs"), Some(Role::Cost));
        assert_eq!(side("Benefits less costs"), None);
        assert_eq!(side("Total"), None);
    }
}
