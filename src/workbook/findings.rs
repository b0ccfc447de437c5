//! What kind of mistake a workbook's own numbers and formulas show: one finding a mistake, with its evidence.

use crate::problem::Place;

/// The kinds of mistake that are told apart.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Kind {
    /// One flat rate where the declared basis has bands.
    FlatForBands,
    /// Factors a whole or half year off the declared timing.
    OffByPeriod,
    /// Part of a row follows one timing and part another.
    MixedTiming,
    /// Continuous compounding of a yearly rate.
    ContinuousForYearly,
    /// A band begins in the wrong year.
    BandEdge,
    /// The rate of a band applied over the whole horizon, for a forward rate.
    WholeHorizonForForward,
    /// Factors rounded to a table's places.
    RoundedFactors,
    /// A nominal rate on real flows.
    NominalOnReal,
    /// A typed number in a row of formulas.
    HardCoded,
    /// A total that leaves out years.
    ShortTotal,
    /// A total that counts a stream twice.
    DoubleCount,
    /// A cost entered negative.
    NegativeCost,
    /// Thousands against millions.
    UnitMismatch,
    /// Years missing, repeated or as text.
    YearsBroken,
    /// Factors that follow no rate at all.
    NoKnownRate,
    /// Something else than the declared basis gives, and nothing better is known.
    Differs,
}

impl Kind {
    /// Every kind.
    pub const ALL: [Kind; 16] = [
        Kind::FlatForBands,
        Kind::OffByPeriod,
        Kind::MixedTiming,
        Kind::ContinuousForYearly,
        Kind::BandEdge,
        Kind::WholeHorizonForForward,
        Kind::RoundedFactors,
        Kind::NominalOnReal,
        Kind::HardCoded,
        Kind::ShortTotal,
        Kind::DoubleCount,
        Kind::NegativeCost,
        Kind::UnitMismatch,
        Kind::YearsBroken,
        Kind::NoKnownRate,
        Kind::Differs,
    ];

    /// The stable word.
    pub fn code(self) -> &'static str {
        match self {
            Kind::FlatForBands => "flat-for-bands",
            Kind::OffByPeriod => "off-by-period",
            Kind::MixedTiming => "mixed-timing",
            Kind::ContinuousForYearly => "continuous-for-yearly",
            Kind::BandEdge => "band-edge",
            Kind::WholeHorizonForForward => "whole-horizon-for-forward",
            Kind::RoundedFactors => "rounded-factors",
            Kind::NominalOnReal => "nominal-on-real",
            Kind::HardCoded => "hard-coded",
            Kind::ShortTotal => "short-total",
            Kind::DoubleCount => "double-count",
            Kind::NegativeCost => "negative-cost",
            Kind::UnitMismatch => "unit-mismatch",
            Kind::YearsBroken => "years-broken",
            Kind::NoKnownRate => "no-known-rate",
            Kind::Differs => "differs",
        }
    }

    /// In words, for a heading.
    pub fn words(self) -> &'static str {
        match self {
            Kind::FlatForBands => "one flat rate where bands were declared",
            Kind::OffByPeriod => "factors a period off the declared timing",
            Kind::MixedTiming => "timings mixed",
            Kind::ContinuousForYearly => "continuous compounding for yearly",
            Kind::BandEdge => "a band begins in the wrong year",
            Kind::WholeHorizonForForward => "a rate for the whole horizon where it is a forward rate",
            Kind::RoundedFactors => "factors rounded",
            Kind::NominalOnReal => "a nominal rate on real flows",
            Kind::HardCoded => "a typed number in a row of formulas",
            Kind::ShortTotal => "a total that leaves out years or rows",
            Kind::DoubleCount => "a stream counted twice",
            Kind::NegativeCost => "a cost with the other sign",
            Kind::UnitMismatch => "thousands against millions",
            Kind::YearsBroken => "years missing, repeated or as text",
            Kind::NoKnownRate => "factors that follow no rate",
            Kind::Differs => "not what the declared basis gives",
        }
    }
}

/// One mistake.
#[derive(Clone, Debug, PartialEq)]
pub struct Finding {
    /// What kind of mistake it is.
    pub kind: Kind,
    /// The cells that show it.
    pub place: Place,
    /// What they hold, in words.
    pub found: String,
    /// What they should hold under the declared basis, in words.
    pub expected: String,
    /// What the mistake adds to the NPV of the option that it changes most, in the option's unit; none where it
    /// cannot be told.
    pub effect_on_npv: Option<f64>,
    /// What it does to the ranking of the options, where it changes it.
    pub ranking: Option<String>,
    /// How sure it is, from 0 to 1.
    pub confidence: f64,
    /// The mistake and its evidence in a sentence or two: what the numbers would be under that reading, and how closely
    /// they fit.
    pub words: String,
}
