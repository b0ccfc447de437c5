//! Totals that are typed, or whose formulas say nothing of the flows: what they lack or hold too much, by numbers.

use std::collections::HashSet;

use super::structure::{Look, figure};
use super::{Compared, Standing};
use crate::appraisal::{Held, StreamKind, Target, TargetRole};
use crate::clock::label_words;
use crate::findings::{Finding, Kind};
use crate::patch::Cached;
use crate::problem::Place;

/// A total has to miss what the basis gives by so many times its tolerance before a reading of it says anything.
const CLEAR: f64 = 20.0;

/// The most readings that a number may fit by chance, for one that it fits to tell anything.
const CHANCE: f64 = 0.02;
/// How many tolerances away a reading is near.
const NEAR: f64 = 100.0;

/// What a total may hold instead of what it should.
struct Reading {
    kind: Kind,
    value: f64,
    found: String,
    /// What it adds to the NPV.
    added: f64,
}

/// Totals whose held numbers are those of a total without its last or first years, without a stream, with one counted
/// twice or with the other sign, or a thousand or a million times too large or small.
///
/// Totals that follow from other numbers of the workbook are left out.
pub(super) fn findings(look: &Look, told: &[Finding], follows: impl Fn(&Compared) -> bool) -> Vec<Finding> {
    let mut found: Vec<Finding> = Vec::new();
    let mut differing: Vec<&Compared> = look
        .seen
        .compared
        .iter()
        .filter(|c| c.standing == Standing::Differs && is_total(&look.seen.target(c).role))
        .collect();
    differing.sort_by_key(|c| match look.seen.target(c).role {
        TargetRole::PvTotal(Some(_)) => 0,
        TargetRole::PvCosts | TargetRole::PvBenefits => 1,
        _ => 2,
    });
    for compared in differing {
        let target = look.seen.target(compared);
        let Some(held) = look.seen.held(compared).number() else { continue };
        if explained(look, compared, told) || follows(compared) {
            continue;
        }
        let Some(finding) = read(look, compared, target, held) else { continue };
        // The NPV follows the total of costs that it was taken from: one mistake, told where it begins.
        let follows = found.iter().any(|other| same(other, &finding));
        if !follows {
            found.push(finding);
        }
    }
    found
}

/// Whether two findings are one mistake, by what it is and what it does.
pub(super) fn same(a: &Finding, b: &Finding) -> bool {
    let alike = match (a.effect_on_npv, b.effect_on_npv) {
        (Some(a), Some(b)) => (a - b).abs() <= 1e-6 * a.abs().max(b.abs()),
        _ => false,
    };
    a.kind == b.kind && alike
}

fn is_total(role: &TargetRole) -> bool {
    matches!(role, TargetRole::PvTotal(_) | TargetRole::PvCosts | TargetRole::PvBenefits | TargetRole::Npv)
}

/// Whether a finding by formulas lies in the total or in what it rests on.
fn explained(look: &Look, compared: &Compared, told: &[Finding]) -> bool {
    let Some(&at) = look.cells.each(&compared.at.clone().into()).first() else { return false };
    if !matches!(look.seen.held(compared), Held::Formula { .. }) {
        return false;
    }
    let slopes = super::calc::Slopes::of(at, &look.cells, &HashSet::new());
    told.iter().any(|finding| {
        let sheet = finding.place.sheet.as_deref().and_then(|name| look.cells.sheet(name));
        match (sheet, finding.place.range) {
            (Some(sheet), Some(range)) if range.len() < 100_000 => {
                range.cells().any(|cell| slopes.reaches((sheet, cell)))
            }
            _ => false,
        }
    })
}

fn read(look: &Look, compared: &Compared, target: &Target, held: f64) -> Option<Finding> {
    let c = compared.choice;
    let choice = &look.seen.appraisal.choices[c];
    let own = choice.targets.iter().find(|t| t.role == TargetRole::Factor);
    let own: Option<Vec<f64>> = own.and_then(|t| t.held.iter().map(Held::number).collect());
    let tolerance = compared.tolerance.max(rounding(held));
    let Cached::Number(expected) = compared.expected else { return None };
    let mut bases = vec![Totals::new(look, c, target, None)?];
    bases.extend(own.and_then(|own| Totals::new(look, c, target, Some(&own))));
    // Over a baseline a total holds that of the baseline, too.
    let beside = expected - bases[0].whole;
    if beside.abs() > 1e-9 * bases[0].whole.abs().max(expected.abs()) {
        bases.iter_mut().for_each(|totals| totals.whole += beside);
    }
    let right =
        |totals: &Totals| (held - totals.whole).abs() <= CLEAR * tolerance.max(1e-9 * totals.whole.abs());
    // What follows from the factors beside it is right for them.
    if bases.iter().any(right) {
        return None;
    }
    for totals in bases {
        let tolerance = tolerance.max(1e-9 * totals.whole.abs());
        let readings = totals.readings(look, c);
        let tells = |x: f64| x.abs() > CLEAR * tolerance;
        let fits = |reading: &&Reading| tells(reading.value) && (reading.value - held).abs() <= tolerance;
        let Some(reading) = readings.iter().find(fits) else { continue };
        if by_chance(&readings, held, tolerance) > CHANCE {
            continue;
        }
        let mut added = vec![0.0; look.seen.appraisal.choices.len()];
        added[c] = reading.added;
        let effect = look.in_results(&added);
        return Some(Finding {
            kind: reading.kind,
            place: Place::cells(&compared.at.sheet, compared.at.range).called(&target.from),
            found: format!("{}: {}", figure(held), reading.found),
            expected: figure(totals.whole),
            effect_on_npv: effect.npv,
            ranking: effect.ranking,
            confidence: if tolerance <= 1e-6 * held.abs() { 0.9 } else { 0.75 },
            words: format!(
                "The number is what the total would be if it {}: {}, within {}.",
                reading.found,
                figure(reading.value),
                figure((reading.value - held).abs())
            ),
        });
    }
    None
}

/// How many readings a number would fit that stood anywhere near it: where many lie close together, and a number has few
/// decimals, it fits one of them by chance.
fn by_chance(readings: &[Reading], held: f64, tolerance: f64) -> f64 {
    let near = readings.iter().filter(|reading| (reading.value - held).abs() <= NEAR * tolerance).count();
    near.saturating_sub(1) as f64 / NEAR
}

/// Half of the last digit of a number that was typed with few decimals.
fn rounding(held: f64) -> f64 {
    let text = format!("{held}");
    let decimals = text.split_once('.').map_or(0, |(_, part)| part.len());
    if decimals <= 6 { 0.5 / 10f64.powi(decimals as i32) } else { 0.0 }
}

/// The present values that a total is made of, year by year, each with its side.
struct Totals<'a> {
    /// Stream by its place, +1 or -1, and its present values.
    parts: Vec<(usize, f64, Vec<f64>)>,
    whole: f64,
    names: Vec<&'a str>,
    costs: Vec<bool>,
    role: &'a TargetRole,
}

impl<'a> Totals<'a> {
    fn new(look: &Look<'a, '_>, c: usize, target: &'a Target, factors: Option<&[f64]>) -> Option<Self> {
        let choice = &look.seen.appraisal.choices[c];
        let outcome = &look.seen.outcomes[c];
        let mut parts = Vec::new();
        for (s, stream) in choice.streams.iter().enumerate() {
            let side = match (&target.role, stream.kind) {
                (TargetRole::PvTotal(Some(name)), _) if *name != stream.name => continue,
                (TargetRole::PvTotal(Some(_)), _) => 1.0,
                (TargetRole::PvCosts, StreamKind::Cost) => 1.0,
                (TargetRole::PvCosts, _) | (TargetRole::PvBenefits, StreamKind::Cost) => continue,
                (TargetRole::PvBenefits, StreamKind::Damage) => -1.0,
                (TargetRole::PvBenefits, _) => 1.0,
                (_, kind) => crate::formulas::side(kind),
            };
            let valued = &outcome.streams[s];
            let mut by_year: Vec<f64> = match factors {
                Some(factors) => {
                    valued.flows.iter().zip(factors).map(|(flow, factor)| flow * factor).collect()
                }
                None => valued.pv_by_year.clone(),
            };
            if let Some(last) = by_year.last_mut() {
                *last += valued.pv_tail;
            }
            parts.push((s, side, by_year));
        }
        let whole = parts.iter().map(|(_, side, all)| side * all.iter().sum::<f64>()).sum();
        let names = choice.streams.iter().map(|stream| stream.name.as_str()).collect();
        let costs = choice.streams.iter().map(|stream| stream.kind == StreamKind::Cost).collect();
        Some(Totals { parts, whole, names, costs, role: &target.role })
    }

    /// Every reading, the simplest first.
    fn readings(&self, look: &Look, c: usize) -> Vec<Reading> {
        let choice = &look.seen.appraisal.choices[c];
        let labels = &look.seen.appraisal.axes[choice.axis].labels;
        // A total of costs moves the NPV the other way.
        let on_npv = if *self.role == TargetRole::PvCosts { -1.0 } else { 1.0 };
        let on_npv = match self.role {
            TargetRole::PvTotal(Some(_)) => {
                self.parts.first().map_or(1.0, |(s, ..)| if self.costs[*s] { -1.0 } else { 1.0 })
            }
            _ => on_npv,
        };
        let mut all = Vec::new();
        let mut add = |kind, value: f64, found: String| {
            if value != self.whole {
                all.push(Reading { kind, value, found, added: on_npv * (value - self.whole) });
            }
        };
        for (scale, words) in [
            (1e-3, "were in thousands"),
            (1e3, "were a thousand times itself"),
            (1e-6, "were in millions"),
            (1e6, "were a million times itself"),
        ] {
            add(Kind::UnitMismatch, self.whole * scale, words.to_owned());
        }
        let several = self.parts.len() > 1;
        for (s, side, by_year) in &self.parts {
            let pv: f64 = by_year.iter().sum();
            let name = self.names[*s];
            add(Kind::DoubleCount, self.whole + side * pv, format!("counted {name} twice"));
            if several {
                add(Kind::ShortTotal, self.whole - side * pv, format!("left out {name}"));
            }
        }
        let years = labels.len();
        let net: Vec<f64> =
            (0..years).map(|i| self.parts.iter().map(|(_, side, all)| side * all[i]).sum()).collect();
        let mut rows: Vec<(String, Vec<f64>)> = vec![(String::new(), net)];
        if several {
            rows.extend(self.parts.iter().map(|(s, side, all)| {
                (format!(" of {}", self.names[*s]), all.iter().map(|x| side * x).collect())
            }));
        }
        for (of, row) in &rows {
            let (mut first, mut last) = (0.0, 0.0);
            for k in 1..=years / 2 {
                first += row[k - 1];
                last += row[years - k];
                let count = if k == 1 { "year".to_owned() } else { format!("{k} years") };
                let (until, from) = (label_words(&labels[years - k]), label_words(&labels[k - 1]));
                add(
                    Kind::ShortTotal,
                    self.whole - last,
                    format!("left out the last {count}{of} (from {until})"),
                );
                add(
                    Kind::ShortTotal,
                    self.whole - first,
                    format!("left out the first {count}{of} (to {from})"),
                );
            }
        }
        for (s, side, by_year) in self.parts.iter().filter(|(s, ..)| self.costs[*s]) {
            let pv: f64 = by_year.iter().sum();
            let name = self.names[*s];
            add(
                Kind::NegativeCost,
                self.whole - 2.0 * side * pv,
                format!("counted {name} with the other sign"),
            );
        }
        all
    }
}
