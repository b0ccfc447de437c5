//! What may follow the curve of a rate line after a semicolon.
use super::cursor::Parser;
use super::{Fault, Positions};
use crate::{ErrorKind, HorizonRule, Position};

/// A clause as it was found: its meaning, and the character it stands at.
type Found<T> = Option<(T, usize)>;

/// The clauses of one curve. What suits the curve is taken out; what is left over is an error.
#[derive(Default)]
pub(super) struct Clauses {
    pub horizon: Found<HorizonRule>,
    pub interpolated: Found<()>,
    pub stepped: Found<()>,
    pub exact: Found<()>,
    pub continuous: Found<()>,
    pub edges_from: Found<i32>,
    flows: Found<Position>,
    base: Found<Position>,
}

/// The first words of the clauses about the curve, then those about timing.
const CURVE_WORDS: [&str; 6] = ["whole", "interpolated", "stepped", "exact", "continuous", "edges"];
const TIMING_WORDS: [&str; 2] = ["flows", "base"];

/// Which clauses may stand here.
#[derive(Clone, Copy, PartialEq, Eq)]
pub(super) enum Allowed {
    /// All: a whole line.
    All,
    /// Those about the curve: inside a mixture.
    Curve,
    /// Those about timing: after the id of a schedule.
    Timing,
}

impl Clauses {
    /// The positions stated.
    pub fn positions(&self) -> Positions {
        Positions { flows: self.flows.map(|found| found.0), base: self.base.map(|found| found.0) }
    }

    /// Reads `; clause, clause; clause` up to the end or a closing bracket.
    pub fn read(parser: &mut Parser, allowed: Allowed) -> Result<Self, Fault> {
        let mut clauses = Clauses::default();
        if parser.sign(';') {
            // A line may end with its semicolon.
            while !parser.finished() {
                clauses.one(parser, allowed)?;
                if !parser.sign(';') && !parser.sign(',') {
                    break;
                }
            }
        }
        Ok(clauses)
    }

    fn one(&mut self, parser: &mut Parser, allowed: Allowed) -> Result<(), Fault> {
        let at = parser.at();
        let expected: Vec<&str> = match allowed {
            Allowed::All => CURVE_WORDS.into_iter().chain(TIMING_WORDS).collect(),
            Allowed::Curve => CURVE_WORDS.into(),
            Allowed::Timing => TIMING_WORDS.into(),
        };
        match parser.one_of(&expected)? {
            "whole" => {
                parser.one_of(&["horizon"])?;
                parser.one_of(&["by"])?;
                let rule = match parser.one_of(&["flow", "length"])? {
                    "flow" => HorizonRule::ByFlow,
                    _ => HorizonRule::ByLength,
                };
                set(parser, &mut self.horizon, rule, at)
            }
            "interpolated" => set(parser, &mut self.interpolated, (), at),
            "stepped" => set(parser, &mut self.stepped, (), at),
            "exact" => set(parser, &mut self.exact, (), at),
            "continuous" => set(parser, &mut self.continuous, (), at),
            "edges" => {
                parser.one_of(&["from"])?;
                let year = parser.year()?;
                set(parser, &mut self.edges_from, year, at)
            }
            "flows" => {
                let position = match parser.one_of(&["start", "middle", "end", "averaged"])? {
                    "averaged" => Position::Averaged,
                    other => plain_position(other),
                };
                set(parser, &mut self.flows, position, at)
            }
            _ => {
                if parser.is_word("averaged") {
                    let error = parser.error("the base stands at one point of its year, not `averaged`");
                    return Err(error.with_hint("`start`, `middle` or `end`").into());
                }
                let position = plain_position(parser.one_of(&["start", "middle", "end"])?);
                set(parser, &mut self.base, position, at)
            }
        }
    }

    /// Refuses the clauses that nobody took; `curve` names what they do not suit.
    pub fn refuse_rest(&self, parser: &Parser, curve: &str) -> Result<(), Fault> {
        let rest = [
            (self.horizon.map(|found| found.1), "whole horizon", "bands or points of rates"),
            (self.interpolated.map(|found| found.1), "interpolated", "points of rates: 3.9% at 3, 4% at 10"),
            (self.stepped.map(|found| found.1), "stepped", "bands with `whole horizon`"),
            (self.exact.map(|found| found.1), "exact", "the Ramsey rule with certain growth"),
            (self.continuous.map(|found| found.1), "continuous", "a flat rate or the linear Ramsey rule"),
            (self.edges_from.map(|found| found.1), "edges from", "banded forward rates"),
        ];
        match rest.into_iter().find_map(|(at, clause, suits)| at.map(|at| (at, clause, suits))) {
            None => Ok(()),
            Some((at, clause, suits)) => {
                let message = format!("`{clause}` does not go with {curve}; it goes with {suits}");
                Err(parser.error_at(ErrorKind::Syntax, at, message).into())
            }
        }
    }
}

fn plain_position(word: &str) -> Position {
    match word {
        "start" => Position::Start,
        "middle" => Position::Middle,
        _ => Position::End,
    }
}

fn set<T>(parser: &Parser, place: &mut Found<T>, value: T, at: usize) -> Result<(), Fault> {
    if place.is_some() {
        return Err(parser.error_at(ErrorKind::Syntax, at, "this is said twice").into());
    }
    *place = Some((value, at));
    Ok(())
}
