//! A curve in words, for reports.
use super::{percent, plain};
use crate::{Band, Compounding, Edge, GrowthState, HorizonRule, Persistence, Spec};

/// The words of the grammar, so that a mistyped one is not taken for the id of a schedule.
const WORDS: [&str; 27] = [
    "after",
    "at",
    "averaged",
    "base",
    "by",
    "continuous",
    "edges",
    "elasticity",
    "end",
    "exact",
    "flow",
    "flows",
    "from",
    "gamma",
    "growth",
    "hazard",
    "horizon",
    "interpolated",
    "length",
    "log",
    "mean",
    "middle",
    "of",
    "persistence",
    "preference",
    "sd",
    "start",
];

/// How growth that is not the same every year is meant within a year.
const BETWEEN_YEARS: &str = "factors at whole years, log-linear between";

/// Whether a word belongs to the grammar, or is near enough to one that does to be meant.
pub(crate) fn is_word(word: &str) -> bool {
    super::nearest(word, WORDS).is_some()
}

/// The curve as a phrase, without its source.
pub(crate) fn in_words(spec: &Spec) -> String {
    match spec {
        Spec::Flat { rate, compounding: Compounding::Yearly } => format!("{} a year", percent(*rate)),
        Spec::Flat { rate, compounding: Compounding::Continuous } => {
            format!("{} a year, continuously compounded", percent(*rate))
        }
        Spec::Bands { bands, edges_from } => {
            let from = edges_from.map_or(String::new(), |year| format!(", years counted from {year}"));
            match bands.as_slice() {
                [_] => format!("{}{from}", band_words(bands)),
                _ => {
                    format!("{}{from}; each rate compounds over the years of its own band", band_words(bands))
                }
            }
        }
        Spec::HorizonSteps { bands, rule } => format!("{}; {}", band_words(bands), rule_words(*rule)),
        Spec::HorizonPoints { points, rule } => {
            let of = match rule {
                HorizonRule::ByFlow => "at year",
                HorizonRule::ByLength => "for a length of",
            };
            let unit = if *rule == HorizonRule::ByLength { " years" } else { "" };
            let one = |&(years, rate): &(f64, f64)| format!("{} {of} {}{unit}", percent(rate), plain(years));
            let points: Vec<String> = points.iter().map(one).collect();
            format!("{}, interpolated between; {}", points.join(", "), rule_words(*rule))
        }
        Spec::Ramsey { preference, hazard, elasticity, growth, exact, compounding } => {
            let growth = match growth.as_slice() {
                [Band { value, to: None }] => percent(*value),
                path => band_words(path),
            };
            let how = match (exact, compounding) {
                (true, _) => "in its exact form, a year's factor being 1/((1+rho)(1+g)^eta)",
                (false, Compounding::Yearly) => "yearly rate rho + eta g",
                (false, Compounding::Continuous) => "rate rho + eta g, continuously compounded",
            };
            format!(
                "the Ramsey rule with {}, growth {growth}; {how}",
                preferences(*preference, *hazard, *elasticity)
            )
        }
        #[rustfmt::skip]
        Spec::UncertainGrowth { preference, hazard, elasticity, mean, sd, log, persistence, compounding } => {
            let what = if *log { "log growth" } else { "growth" };
            let persistence = persistence.map_or(", independent from year to year".into(), |persistence| {
                let Persistence { phi, start } = persistence;
                let departure = if start == 0.0 {
                    String::new()
                } else {
                    format!(", growth departing from its mean by {} at the base", percent(start))
                };
                format!(" of the yearly shock, and a persistence of {}{departure}; {BETWEEN_YEARS}", plain(phi))
            });
            let continuous = if *log || *compounding == Compounding::Continuous {
                ", continuously compounded"
            } else {
                ""
            };
            format!(
                "the Ramsey rule with {}, uncertain {what} of mean {} and standard deviation {}{persistence}{continuous}",
                preferences(*preference, *hazard, *elasticity), percent(*mean), percent(*sd),
            )
        }
        Spec::GrowthRegimes { preference, hazard, elasticity, states, transition, start } => {
            let one = |(i, state): (usize, &GrowthState)| {
                let stay = transition.get(i).and_then(|row| row.get(i)).copied().unwrap_or_default();
                let chance = start.get(i).copied().unwrap_or_default();
                format!(
                    "mean {} and standard deviation {} (chance {} at the base, {} to stay for another year)",
                    percent(state.mean),
                    percent(state.sd),
                    percent(chance),
                    percent(stay)
                )
            };
            format!(
                "the Ramsey rule with {}, log growth in {} states: {}; {BETWEEN_YEARS}, continuously compounded",
                preferences(*preference, *hazard, *elasticity),
                states.len(),
                states.iter().enumerate().map(one).collect::<Vec<_>>().join("; ")
            )
        }
        Spec::Gamma { mean, sd } => format!(
            "gamma-distributed continuous rates of mean {} and standard deviation {}",
            percent(*mean),
            percent(*sd)
        ),
        Spec::Mixture(parts) => {
            let one = |(weight, spec): &(f64, Spec)| {
                format!("{} of the factor at ({})", plain(*weight), in_words(spec))
            };
            format!("a weighted sum of factors: {}", parts.iter().map(one).collect::<Vec<_>>().join(", "))
        }
        Spec::Table(rows) => format!(
            "a table of {} factors up to year {}, log-linear between",
            rows.len(),
            plain(rows.last().map_or(0.0, |row| row.0))
        ),
    }
}

fn preferences(preference: f64, hazard: f64, elasticity: f64) -> String {
    let hazard = if hazard == 0.0 { String::new() } else { format!(", hazard {}", percent(hazard)) };
    format!("pure time preference {}{hazard}, elasticity {}", percent(preference), plain(elasticity))
}

fn rule_words(rule: HorizonRule) -> &'static str {
    match rule {
        HorizonRule::ByFlow => "the rate of a flow's year applies to its whole time from the base",
        HorizonRule::ByLength => "one rate for all flows, by the length of the appraisal",
    }
}

/// "3.5% a year for years 0 to 30, then 3% to year 75, then 2.5% after".
fn band_words(bands: &[Band]) -> String {
    let one = |(i, band): (usize, &Band)| {
        let rate = percent(band.value);
        match (i, band.to) {
            (0, Some(Edge::Offset(years))) => format!("{rate} a year for years 0 to {}", plain(years)),
            (0, Some(Edge::Year(year))) => format!("{rate} a year to the end of {year}"),
            (0, None) => format!("{rate} a year"),
            (_, Some(Edge::Offset(years))) => format!("then {rate} to year {}", plain(years)),
            (_, Some(Edge::Year(year))) => format!("then {rate} to the end of {year}"),
            (_, None) => format!("then {rate} after"),
        }
    };
    bands.iter().enumerate().map(one).collect::<Vec<_>>().join(", ")
}
