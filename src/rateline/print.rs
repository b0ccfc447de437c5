//! The canonical rate line of a curve.
use super::{Positions, percent, plain};
use crate::{Band, Compounding, Edge, GrowthState, HorizonRule, Persistence, Spec};
use std::fmt;

/// "", or the timing clauses with the `; ` before them.
pub(super) fn timing_clauses(positions: Positions) -> String {
    let stated: Vec<String> = [("flows", positions.flows), ("base", positions.base)]
        .into_iter()
        .filter_map(|(what, position)| position.map(|position| format!("{what} {position}")))
        .collect();
    if stated.is_empty() { String::new() } else { format!("; {}", stated.join(", ")) }
}

impl fmt::Display for Edge {
    /// The edge as a number: years from the base, or a calendar year.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Edge::Offset(years) => f.write_str(&plain(*years)),
            Edge::Year(year) => write!(f, "{year}"),
        }
    }
}

/// "3.5% to 30, 3% after".
fn bands(bands: &[Band]) -> String {
    let one = |band: &Band| match band.to {
        Some(edge) => format!("{} to {edge}", percent(band.value)),
        None => format!("{} after", percent(band.value)),
    };
    bands.iter().map(one).collect::<Vec<_>>().join(", ")
}

fn rule_words(rule: HorizonRule) -> &'static str {
    match rule {
        HorizonRule::ByFlow => "; whole horizon by flow",
        HorizonRule::ByLength => "; whole horizon by length",
    }
}

/// "preference 0.5%, hazard 1%, elasticity 1".
fn preferences(preference: f64, hazard: f64, elasticity: f64) -> String {
    let hazard = if hazard == 0.0 { String::new() } else { format!(", hazard {}", percent(hazard)) };
    format!("preference {}{hazard}, elasticity {}", percent(preference), plain(elasticity))
}

impl fmt::Display for Spec {
    /// The canonical rate line: it parses back to the same curve, unless the curve is or holds one that no line can
    /// state ([`Spec::fits_a_line`]), or its parameters are outside what a line may say.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let continuous = |compounding: &Compounding, words| match compounding {
            Compounding::Yearly => "",
            Compounding::Continuous => words,
        };
        match self {
            Spec::Flat { rate, compounding } => {
                write!(f, "{}{}", percent(*rate), continuous(compounding, " continuous"))
            }
            Spec::Bands { bands: list, edges_from } => {
                f.write_str(&bands(list))?;
                edges_from.map_or(Ok(()), |year| write!(f, "; edges from {year}"))
            }
            Spec::HorizonSteps { bands: list, rule } => write!(f, "{}{}", bands(list), rule_words(*rule)),
            Spec::HorizonPoints { points, rule } => {
                let one = |&(years, rate): &(f64, f64)| format!("{} at {}", percent(rate), plain(years));
                let points: Vec<String> = points.iter().map(one).collect();
                write!(f, "{}{}, interpolated", points.join(", "), rule_words(*rule))
            }
            Spec::Ramsey { preference, hazard, elasticity, growth, exact, compounding } => {
                let path = match growth.as_slice() {
                    [Band { value, to: None }] => percent(*value),
                    path => bands(path),
                };
                let exact = if *exact { "; exact" } else { "" };
                let start = preferences(*preference, *hazard, *elasticity);
                write!(f, "{start}, growth {path}{exact}{}", continuous(compounding, "; continuous"))
            }
            Spec::UncertainGrowth {
                preference,
                hazard,
                elasticity,
                mean,
                sd,
                log,
                persistence,
                compounding,
            } => {
                let start = preferences(*preference, *hazard, *elasticity);
                let log_word = if *log { "log " } else { "" };
                write!(f, "{start}, {log_word}growth {} sd {}", percent(*mean), percent(*sd))?;
                if let Some(Persistence { phi, start }) = persistence {
                    write!(f, " persistence {}", plain(*phi))?;
                    if *start != 0.0 {
                        write!(f, " from a departure of {}", percent(*start))?;
                    }
                }
                // Log growth is continuous without saying so.
                f.write_str(if *log { "" } else { continuous(compounding, "; continuous") })
            }
            Spec::GrowthRegimes { preference, hazard, elasticity, states, .. } => {
                let start = preferences(*preference, *hazard, *elasticity);
                let one = |state: &GrowthState| format!("{} sd {}", percent(state.mean), percent(state.sd));
                let states: Vec<String> = states.iter().map(one).collect();
                write!(f, "{start}, log growth in states {}", states.join(" and "))
            }
            Spec::Gamma { mean, sd } => write!(f, "gamma mean {} sd {}", percent(*mean), percent(*sd)),
            Spec::Mixture(parts) => {
                let one = |(weight, spec): &(f64, Spec)| format!("{} of ({spec})", plain(*weight));
                f.write_str(&parts.iter().map(one).collect::<Vec<_>>().join(", "))
            }
            Spec::Table(rows) => {
                let last = rows.last().map_or(0.0, |row| row.0);
                write!(f, "table of {} factors to {}", rows.len(), plain(last))
            }
        }
    }
}
