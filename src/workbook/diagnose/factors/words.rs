//! The evidence of a finding about factors, in words.

use hence_core::percent;

use super::candidates::Known;
use super::law::{Bands, Law, When};
use super::mixed::Mixed;
use super::reading::Rounding;
use super::search::Found;
use super::series::{Point, Series, Source};
use super::totals::{Second, Total};
use crate::appraisal::Held;
use crate::clock::label_words;
use crate::diagnose::Seen;
use crate::findings::Kind;
use crate::patch::Cached;
use crate::tolerance;

/// What a finding says.
pub struct Said {
    /// What the cells hold.
    pub found: String,
    /// What they should hold.
    pub expected: String,
    /// The mistake and its evidence.
    pub words: String,
}

/// Whether a reading gives the row less closely than factors are compared.
pub fn nearly(found: &Found) -> bool {
    found.reading.rounding.is_none() && found.fit.worst > 10.0 * tolerance::RELATIVE
}

/// One departure of a reading.
pub fn of_reading(
    seen: &Seen,
    row: &Series,
    known: &Known,
    found: &Found,
    kind: Kind,
    effect: Option<f64>,
) -> Said {
    let reading = &found.reading;
    let what = match kind {
        Kind::OffByPeriod | Kind::MixedTiming => timing(known.declared, reading.when),
        Kind::RoundedFactors => reading.rounding.map(rounding).unwrap_or_default(),
        _ => law(&reading.law, known),
    };
    let basis = basis(seen, row);
    let given = row.points.len() - found.fit.off.len();
    let all = if found.fit.off.is_empty() { "all ".to_owned() } else { format!("{given} of ") };
    let close = match (reading.rounding, found.fit.worst) {
        (Some(_), _) => "to the last place".to_owned(),
        (None, 0.0) => "exactly".to_owned(),
        (None, worst) => format!("to {worst:.0e}"),
    };
    let others: Vec<Kind> = reading.kinds(known.declared).into_iter().filter(|k| *k != kind).collect();
    let others = match others.as_slice() {
        [] => String::new(),
        rest => format!(" (together with {})", codes(rest)),
    };
    let mut words = format!(
        "{what}{others} reproduces {all}{} {} {close}; the declared basis is {basis}",
        row.points.len(),
        noun(row),
    );
    if kind == Kind::RoundedFactors {
        let moves = effect.map_or_else(String::new, |x| format!(", which adds {} to the NPV", amount(x)));
        words = format!(
            "the {} are those of {} {what}: {all}{} agree {close}{moves}",
            noun(row),
            if others.is_empty() {
                "the declared basis".to_owned()
            } else {
                format!("the row's basis{others}")
            },
            row.points.len(),
        );
    }
    if let Some(formula) = formula(seen, row) {
        words.push_str(&format!("; the first of them is `{formula}`"));
    }
    if row.ranges.len() > 1 {
        let others = row.ranges[1..].iter().map(ToString::to_string).collect::<Vec<_>>();
        words.push_str(&format!("; {} likewise", others.join(", ")));
    }
    if kind == Kind::MixedTiming {
        words.push_str("; other streams of the option are timed as declared");
    }
    if !found.ties.is_empty() {
        words.push_str(&format!("; {} would fit as well", codes(&found.ties)));
    }
    let widest = widest(row);
    Said {
        found: format!("{what}: {}", value(seen, row, widest, widest.found)),
        expected: format!("{basis}: {}", value(seen, row, widest, widest.declared)),
        words,
    }
}

/// Two timings in one row.
pub fn of_mixed(seen: &Seen, row: &Series, found: &Mixed) -> Said {
    let years: Vec<String> = found.others.iter().map(|&i| year(seen, row, &row.points[i])).collect();
    let which = match years.as_slice() {
        [one] => one.clone(),
        [first, .., last] => format!("{} years from {first} to {last}", years.len()),
        [] => String::new(),
    };
    let declared = When::declared(row.timing);
    let rounded = found.rounding.map(|r| format!(", {}", rounding(r))).unwrap_or_default();
    let said = |when: When| {
        if when == declared { "the declared timing".to_owned() } else { timing(declared, when) }
    };
    let words = format!(
        "{which} of {} {} follow {}, the rest {}{rounded}; the declared timing is {}",
        row.points.len(),
        noun(row),
        said(found.rest),
        said(found.most),
        row.timing,
    );
    let widest = widest(row);
    Said {
        found: format!("two timings: {}", value(seen, row, widest, widest.found)),
        expected: format!("{}: {}", row.timing, value(seen, row, widest, widest.declared)),
        words,
    }
}

/// A reading that gives the totals.
pub fn of_total(seen: &Seen, total: &Total, known: &Known, effect: Option<f64>) -> Said {
    let (row, reading) = (&total.rows[0], &total.reading);
    let timed = |when: When| {
        if when == known.declared { "the declared timing".to_owned() } else { timing(known.declared, when) }
    };
    let what = match (total.kinds[0], total.second) {
        (_, Some(Second::Others(when))) => {
            format!("costs by {}, all else by {}", timed(reading.when), timed(when))
        }
        (_, Some(Second::From(index, when))) => {
            let year = year(seen, row, &row.points[index]);
            format!("{} until, and from {year} on {}", timed(reading.when), timed(when))
        }
        (Kind::OffByPeriod, None) => timing(known.declared, reading.when),
        (Kind::RoundedFactors, None) => {
            format!("the declared factors {}", reading.rounding.map(rounding).unwrap_or_default())
        }
        _ => law(&reading.law, known),
    };
    let basis = basis(seen, row);
    let totals =
        if total.given == 1 { "the total".to_owned() } else { format!("all {} totals", total.given) };
    let mut words = format!("{what} would give {totals}; the declared basis is {basis}");
    if let (Kind::RoundedFactors, Some(effect)) = (total.kinds[0], effect) {
        words.push_str(&format!("; that adds {} to the NPV", amount(effect)));
    }
    if let Held::Formula { text, .. } = seen.held(&total.cell) {
        words.push_str(&format!("; the cell holds `={text}`"));
    }
    if !total.ties.is_empty() {
        words.push_str(&format!("; {} would fit as well", codes(&total.ties)));
    }
    let expected = match &total.cell.expected {
        Cached::Number(x) => x.to_string(),
        _ => "no number".to_owned(),
    };
    let found = seen.held(&total.cell).number().map_or_else(String::new, |x| x.to_string());
    Said { found: format!("{what}: {found}"), expected: format!("{basis}: {expected}"), words }
}

/// A few factors that are off.
pub fn some_off(seen: &Seen, row: &Series, off: &[usize]) -> Said {
    if row.source == Source::Rates {
        return rates_off(seen, row, off);
    }
    let first = &row.points[off[0]];
    let (off, n) = (off.len(), row.points.len());
    let are = if off == 1 { "is" } else { "are" };
    let words = format!("{off} of {n} {} {are} not as the rest of the row; no reason is known", noun(row));
    let exact = |factor: f64| format!("{factor} in {}", year(seen, row, first));
    Said { found: exact(first.found), expected: exact(first.declared), words }
}

/// A few yearly rates that are off.
fn rates_off(seen: &Seen, row: &Series, off: &[usize]) -> Said {
    let first = row.cell(&row.points[off[0]]);
    let cell = seen.compared.iter().find(|cell| cell.at == first);
    let found = cell.and_then(|cell| seen.held(cell).number());
    let expected = cell.and_then(|cell| match cell.expected {
        Cached::Number(x) => Some(x),
        _ => None,
    });
    let shown = |x: Option<f64>| {
        x.map_or_else(
            || "no number".to_owned(),
            |x| format!("{} in {}", rate(x), year(seen, row, &row.points[off[0]])),
        )
    };
    let are = if off.len() == 1 { "is" } else { "are" };
    let words = format!(
        "{} of {} yearly rates {are} not as declared; no reason is known",
        off.len(),
        row.points.len()
    );
    Said { found: shown(found), expected: shown(expected), words }
}

/// A row that nothing gives.
pub fn unknown(seen: &Seen, row: &Series) -> Said {
    let yearly = row
        .points
        .windows(2)
        .map(|pair| (pair[0].found / pair[1].found).powf(1.0 / (pair[1].t - pair[0].t)) - 1.0);
    let yearly: Vec<f64> = yearly.filter(|rate| rate.is_finite()).collect();
    let low = yearly.iter().copied().fold(f64::INFINITY, f64::min);
    let high = yearly.iter().copied().fold(f64::NEG_INFINITY, f64::max);
    let mut words = format!(
        "{} of {} {} are not as declared, and no rate, band, timing, inflation, rounding or known schedule gives them",
        row.off().len(),
        row.points.len(),
        noun(row)
    );
    if low <= high {
        words.push_str(&format!(
            "; from one to the next they imply yearly rates from {} to {}",
            rate(low),
            rate(high)
        ));
    }
    let widest = widest(row);
    Said {
        found: value(seen, row, widest, widest.found),
        expected: format!("{}: {}", basis(seen, row), value(seen, row, widest, widest.declared)),
        words,
    }
}

fn noun(row: &Series) -> &'static str {
    match row.source {
        Source::Factors => "factors",
        Source::Rates => "factors that these rates make",
        Source::Totals => "factors behind the totals",
        Source::Present => "factors (present values over flows)",
    }
}

/// The declared basis of a row.
fn basis(seen: &Seen, row: &Series) -> String {
    let (choice, stream) = row.users[0];
    let outcome = &seen.outcomes[choice];
    let basis = stream.map_or(&outcome.basis, |s| outcome.basis_of(s));
    match basis.schedule() {
        Some(_) => format!("{} ({})", basis.canonical(), basis.spec()),
        None => basis.canonical(),
    }
}

fn law(law: &Law, known: &Known) -> String {
    match law {
        Law::Declared(_) => "the declared curve".to_owned(),
        Law::Schedule(id, _) => format!("the schedule {id}"),
        Law::Flat(flat) => format!("a flat {}", rate(*flat)),
        Law::Continuous(bands) => match bands.several() {
            true => "continuous compounding of the declared rates".to_owned(),
            false => format!("continuous compounding of {}", rate(bands.rates[0])),
        },
        Law::Bands(bands) => match known.forward.as_ref().filter(|known| known.rates == bands.rates) {
            Some(declared) => edges(declared, bands),
            None if known.horizon.is_some() => "the rates as forward rates, year by year,".to_owned(),
            None => format!("bands of its own ({})", list(bands)),
        },
        Law::WholeHorizon { bands, .. } => {
            match known.horizon.as_ref().filter(|known| known.rates == bands.rates) {
                Some(declared) => edges(declared, bands),
                None => "each band's rate over the whole time from the base".to_owned(),
            }
        }
        Law::Inflated(_, inflation) => {
            format!("the declared rate compounded with inflation of {}", rate(*inflation))
        }
    }
}

/// Where the edges of bands lie, and where they should.
fn edges(declared: &Bands, found: &Bands) -> String {
    let moved = declared.edges.iter().zip(&found.edges).filter(|(a, b)| a != b && b.is_finite());
    let moved: Vec<String> = moved.map(|(a, b)| format!("{b} years instead of {a}")).collect();
    match moved.as_slice() {
        [one] => format!("an edge of the bands at {one}"),
        many => format!("edges of the bands at {}", many.join(", ")),
    }
}

fn list(bands: &Bands) -> String {
    let rates = bands.rates.iter().enumerate().map(|(k, r)| match bands.edges.get(k) {
        Some(edge) => format!("{} to {edge}", rate(*r)),
        None => format!("{} after", rate(*r)),
    });
    rates.collect::<Vec<_>>().join(", ")
}

fn timing(declared: When, found: When) -> String {
    let mut words = match found.later {
        0.0 => "the declared curve".to_owned(),
        later => {
            let (by, way) = (later.abs(), if later > 0.0 { "later" } else { "earlier" });
            let by = match by {
                0.5 => "half a year".to_owned(),
                1.0 => "a whole year".to_owned(),
                by => format!("{by} years"),
            };
            format!("discounting every flow as if it stood {by} {way} than declared")
        }
    };
    if found.averaged && !declared.averaged {
        words.push_str(" with the mean of the factors at the start and the end of the year");
    } else if declared.averaged && !found.averaged {
        words.push_str(" with one moment of the year instead of the mean of its start and end");
    }
    if found.clamped {
        words.push_str(", and nothing before the base");
    }
    words
}

fn rounding(rounding: Rounding) -> String {
    match rounding {
        Rounding::Places(places) => format!("rounded to {places} places"),
        Rounding::Cut(places) => format!("cut off after {places} places"),
        Rounding::Digits(digits) => format!("rounded to {digits} significant digits"),
    }
}

fn codes(kinds: &[Kind]) -> String {
    kinds.iter().map(|kind| kind.code()).collect::<Vec<_>>().join(", ")
}

/// A rate to a tenth of a thousandth of a percent.
fn rate(rate: f64) -> String {
    percent((rate * 1e6).round() / 1e6)
}

/// An amount to six digits.
fn amount(x: f64) -> String {
    let digits = if x == 0.0 { 0 } else { (5 - x.abs().log10().floor() as i32).clamp(0, 12) };
    format!("{x:.*}", digits as usize)
}

/// The point that is farthest from what is declared, relative to it.
fn widest(row: &Series) -> &Point {
    let apart = |p: &Point| (p.found / p.declared - 1.0).abs();
    let widest = row.points.iter().max_by(|a, b| apart(a).total_cmp(&apart(b)));
    widest.expect("a row that differs has points")
}

fn value(seen: &Seen, row: &Series, point: &Point, factor: f64) -> String {
    format!("{factor:.6} in {}", year(seen, row, point))
}

fn year(seen: &Seen, row: &Series, point: &Point) -> String {
    let axis = &seen.appraisal.axes[seen.appraisal.choices[row.users[0].0].axis];
    label_words(&axis.labels[point.index])
}

/// The formula of the first point that is off.
fn formula(seen: &Seen, row: &Series) -> Option<String> {
    let first = row.off().first().map(|p| row.cell(p))?;
    let grid = seen.grid(&first)?;
    let formula = grid.get(first.range.first)?.formula.clone()?;
    Some(format!("={formula}"))
}
