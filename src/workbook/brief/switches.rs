//! What would change the answer: other rates, other parameters, other bases, and streams that turn out otherwise.

use hence_core::Parameter;

use super::words::{count, money, parameter_value, times};
use super::{Block, Facts, Section, Table, words};
use crate::compare::{Change, Entry, Moved, Side, Why, heading};
use crate::ranking::{Worth, level};

/// Streams that are listed, at most.
const MOST_STREAMS: usize = 6;

/// The section.
pub(super) fn section(facts: &Facts<'_>) -> Section {
    let mut points = vec![over_parameter(facts, Parameter::Rate)];
    if facts.found.comparison.ramsey.is_some() {
        let rest = [Parameter::Preference, Parameter::Elasticity, Parameter::Growth];
        points.extend(rest.map(|parameter| over_parameter(facts, parameter)));
    }
    points.extend(zero_rate(facts));
    points.extend(shifted(facts));
    points.extend(companion(facts));
    let mut blocks = vec![Block::List(points)];
    blocks.extend(other_bases(facts).map(Block::Table));
    blocks.extend(streams(facts));
    Section { title: "What would change it".to_owned(), blocks, beside: None }
}

/// What moves, in words.
fn told(facts: &Facts<'_>, parameter: Parameter) -> (String, String) {
    match parameter {
        Parameter::Rate => {
            let declared = facts.outcomes[0].basis.spec();
            let now = parameter.of(declared).filter(|_| facts.one_basis());
            let now =
                now.map(|x| format!(" (declared: {})", parameter_value(parameter, x))).unwrap_or_default();
            (format!("At a flat rate in place of the basis{now}"), "flat rate".to_owned())
        }
        _ => {
            let basis = facts.found.comparison.ramsey.as_deref().unwrap_or_default();
            (format!("With another {parameter} in \u{201c}{basis}\u{201d}"), parameter.to_string())
        }
    }
}

/// The entries of one parameter: option against option, or option against zero (the baseline).
fn entries<'a>(facts: &'a Facts<'_>, parameter: Parameter, pairs: bool) -> impl Iterator<Item = &'a Entry> {
    let moved = Moved::Parameter(parameter);
    let all = facts.found.comparison.switching.iter();
    all.filter(move |entry| entry.moved == moved && entry.against.is_some() == pairs)
}

/// Which option has the highest net present value over the values of one parameter.
fn over_parameter(facts: &Facts<'_>, parameter: Parameter) -> String {
    let (told, word) = told(facts, parameter);
    let comparison = &facts.found.comparison;
    let changes: Vec<&Change> = comparison.changes.iter().filter(|c| c.parameter == parameter).collect();
    let pairs: Vec<&Entry> = entries(facts, parameter, true).collect();
    if comparison.options.len() < 2 {
        return one_option(facts, parameter, &told);
    }
    if pairs.is_empty() {
        return format!("{told}: the options are too many to be held against each other.");
    }
    let low = pairs.iter().map(|entry| entry.interval.0).fold(f64::NEG_INFINITY, f64::max);
    let high = pairs.iter().map(|entry| entry.interval.1).fold(f64::INFINITY, f64::min);
    let interval = format!("{} to {}", parameter_value(parameter, low), parameter_value(parameter, high));
    let open = pairs.iter().any(|entry| !entry.unresolved.is_empty() || searched_not(entry));
    let reserve = if open { "; for some options not every switching value could be settled" } else { "" };
    let text = match changes.as_slice() {
        [] => no_change(facts, parameter, &word, &pairs, &interval),
        changes => chain(facts, parameter, changes) + &format!(" (searched: {interval})"),
    };
    format!("{told}, {text}{reserve}.")
}

/// That the highest net present value stays with one option, or what is known where that cannot be said.
fn no_change(
    facts: &Facts<'_>,
    parameter: Parameter,
    word: &str,
    pairs: &[&Entry],
    interval: &str,
) -> String {
    let comparison = &facts.found.comparison;
    let best = match (parameter, &comparison.ramsey) {
        (Parameter::Rate, _) => facts.flat.always_best,
        (_, Some(basis)) => {
            comparison.sides.iter().find(|side| side.basis == *basis).and_then(|side| side.best)
        }
        _ => None,
    };
    let Some(best) = best else {
        return format!(
            "no {word} from {interval} was found at which the highest net present value passes to another option"
        );
    };
    // Where it equals another and yet nothing is known beyond, the basis has no curve there.
    let equal: Vec<String> = pairs
        .iter()
        .filter(|entry| entry.option == best && !entry.values.is_empty())
        .filter_map(|entry| {
            let values: Vec<String> = entry.values.iter().map(|x| parameter_value(parameter, *x)).collect();
            Some(format!("{} at {}", facts.name(entry.against?), words::list(&values, "and")))
        })
        .collect();
    if equal.is_empty() {
        return format!(
            "{} has the highest net present value at every {word} from {interval}",
            facts.name(best)
        );
    }
    format!(
        "the net present value of {} equals that of {}; which is the highest beyond was not settled",
        facts.name(best),
        words::list(&equal, "and")
    )
}

/// Whether a pair was left unsearched for a reason that leaves the matter open.
fn searched_not(entry: &Entry) -> bool {
    entry.values.is_empty() && entry.note.as_deref().is_some_and(|note| note.contains("different bases"))
}

/// "A has the highest net present value below 2%, B from 2% to 5%, C above 5%".
fn chain(facts: &Facts<'_>, parameter: Parameter, changes: &[&Change]) -> String {
    let value = |change: &Change| parameter_value(parameter, change.at);
    let names =
        |options: &[usize]| words::list(&options.iter().map(|&i| facts.name(i)).collect::<Vec<_>>(), "and");
    let has = |options: &[usize]| if options.len() == 1 { "has" } else { "have" };
    let unbroken = changes.windows(2).all(|pair| pair[0].to == pair[1].from);
    if !unbroken {
        let parts: Vec<String> = changes
            .iter()
            .map(|change| {
                format!(
                    "{} just below {} and {} just above",
                    names(&change.from),
                    value(change),
                    names(&change.to)
                )
            })
            .collect();
        return format!("the highest net present value is that of {}", parts.join("; "));
    }
    let mut text = format!(
        "{} {} the highest net present value below {}",
        names(&changes[0].from),
        has(&changes[0].from),
        value(changes[0])
    );
    for pair in changes.windows(2) {
        text.push_str(&format!(", {} from {} to {}", names(&pair[0].to), value(pair[0]), value(pair[1])));
    }
    if let Some(last) = changes.last() {
        text.push_str(&format!(", {} above {}", names(&last.to), value(last)));
    }
    text
}

/// Where the net present value of the one option is zero.
fn one_option(facts: &Facts<'_>, parameter: Parameter, told: &str) -> String {
    let zero = entries(facts, parameter, false).next().map(|entry| zeros(parameter, entry));
    let zero = zero.unwrap_or_else(|| "nothing was searched".to_owned());
    format!("{told}, the net present value of {} {zero}.", facts.name(0))
}

/// "is zero at 4.2%", or that it nowhere is.
fn zeros(parameter: Parameter, entry: &Entry) -> String {
    let value = |x: f64| parameter_value(parameter, x);
    let found: Vec<String> = entry.values.iter().map(|x| value(*x)).collect();
    let interval = format!("from {} to {}", value(entry.interval.0), value(entry.interval.1));
    match (found.as_slice(), &entry.note) {
        ([], Some(note)) => format!("has no zero that could be told: {note}"),
        ([], None) if entry.unresolved.is_empty() => format!("is nowhere zero {interval}"),
        ([], None) => format!("may be zero in places {interval} that could not be settled"),
        (found, _) => {
            let open = if entry.unresolved.is_empty() { "" } else { ", and perhaps elsewhere" };
            format!("is zero at {}{open}", words::list(found, "and"))
        }
    }
}

/// The flat rate at which the highest net present value is zero; with a baseline the change to it says so already.
fn zero_rate(facts: &Facts<'_>) -> Option<String> {
    let first = *facts.ranked().first()?;
    if facts.baseline().is_some() || facts.options.len() < 2 {
        return None;
    }
    let entry = entries(facts, Parameter::Rate, false).find(|entry| entry.option == first)?;
    Some(format!(
        "At a flat rate, the net present value of {} {}.",
        facts.name(first),
        zeros(Parameter::Rate, entry)
    ))
}

/// Which option is highest with every rate of the basis a point lower or higher.
fn shifted(facts: &Facts<'_>) -> Option<String> {
    let tell = |by: f64, worths: &[Worth]| {
        let level = level(worths);
        let most = level.first().map_or(0.0, |&i| worths[i].npv);
        let best: Vec<String> = level.iter().map(|&i| facts.name(i)).collect();
        let way = if by < 0.0 { "lower" } else { "higher" };
        let points = parameter_value(Parameter::Rate, by.abs());
        let points = points.trim_end_matches('%');
        let unit = if points == "1" { "point" } else { "points" };
        let highest =
            if worths.len() > 1 { "the highest net present value is" } else { "the net present value is" };
        let whose =
            if worths.len() > 1 { format!(", that of {}", words::list(&best, "and")) } else { String::new() };
        format!("{points} {unit} {way}, {highest} {}{whose}", money(most))
    };
    let told: Vec<String> = facts
        .found
        .shifted
        .iter()
        .filter_map(|(by, worths)| worths.as_ref().map(|worths| tell(*by, worths)))
        .collect();
    (!told.is_empty()).then(|| format!("With every rate of the basis {}.", told.join("; ")))
}
/// The schedule that the declared one's body wants run beside it, and whether the order of the options changes.
fn companion(facts: &Facts<'_>) -> Option<String> {
    let (own, (id, beyond)) =
        facts.outcomes.iter().find_map(|outcome| Some((outcome, outcome.basis.companion()?)))?;
    let reach = facts.outcomes.iter().flat_map(|o| o.offsets.iter().copied()).fold(0.0, f64::max);
    let schedule = own.basis.schedule().map(|schedule| schedule.id()).unwrap_or_default();
    let told = format!(
        "{schedule} has {id} run beside it over more than {} years; this appraisal reaches {} years",
        words::times(beyond).trim_end_matches('0').trim_end_matches('.'),
        words::times(reach).trim_end_matches('0').trim_end_matches('.')
    );
    let sides = &facts.found.comparison.sides;
    let Some(side) = sides.iter().find(|side| side.why == Why::Companion) else {
        return Some(format!("{told}, and it could not be valued on it (hence compare says why)."));
    };
    Some(format!("{told}. On it, {}.", order(facts, side)))
}

/// Whether the order of the options is that of the declared basis.
fn order(facts: &Facts<'_>, side: &Side) -> String {
    let declared = &facts.found.comparison.sides[0];
    if side.standings.len() < 2 {
        return format!("the net present value is {}", money(side.standings[0].totals.npv));
    }
    let ranks = |side: &Side| side.standings.iter().map(|standing| standing.rank).collect::<Vec<_>>();
    if ranks(side) == ranks(declared) {
        return "the order of the options is the same".to_owned();
    }
    match (side.best, declared.best) {
        (Some(best), Some(own)) if best == own => {
            format!("the order of the options changes, but {} stays first", facts.name(best))
        }
        (Some(best), _) => format!("{} comes first", facts.name(best)),
        (None, _) => "several options share the first place".to_owned(),
    }
}

/// The result on every other basis, where there is one.
fn other_bases(facts: &Facts<'_>) -> Option<Table> {
    let sides = &facts.found.comparison.sides;
    let subject = sides[0].best.or_else(|| facts.ranked().first().copied());
    if sides.len() < 2 {
        return None;
    }
    let many = facts.options.len() > 1;
    let mut headings = vec!["Basis".to_owned()];
    if many {
        headings.extend(["Highest".to_owned(), "Order of the options".to_owned()]);
    }
    headings.extend(subject.map(|i| format!("Net present value of {}", facts.name(i))));
    let declared: Vec<usize> = sides[0].standings.iter().map(|standing| standing.rank).collect();
    let rows = sides.iter().map(|side| {
        let mut row = vec![heading(side)];
        if many {
            let most = side.standings.iter().map(|s| s.totals.npv).fold(f64::NEG_INFINITY, f64::max);
            let same = side.standings.iter().map(|s| s.rank).eq(declared.iter().copied());
            let best = side.best.map_or_else(|| "several".to_owned(), |i| facts.name(i));
            row.push(format!("{best}, {}", money(most)));
            row.push(match (side.why, same) {
                (Why::Declared, _) => "-".to_owned(),
                (_, true) => "the same".to_owned(),
                (_, false) => "changes".to_owned(),
            });
        }
        row.extend(subject.map(|i| money(side.standings[i].totals.npv)));
        row
    });
    Some(Table {
        caption: format!("Net present value{} on other bases", facts.over()),
        words: if many { 3 } else { 1 },
        rows: rows.collect(),
        headings,
    })
}

/// By how much one stream of the highest option would have to change.
fn streams(facts: &Facts<'_>) -> Vec<Block> {
    let ranked = facts.ranked();
    let Some(&first) = ranked.first() else { return Vec::new() };
    let second = ranked.get(1).copied();
    let all = &facts.found.comparison.switching;
    let value = |stream: &Moved, against: Option<usize>| {
        let entry = all.iter().find(|e| e.option == first && e.against == against && e.moved == *stream);
        entry.and_then(|entry| entry.values.first().copied())
    };
    let own = all.iter().filter(|e| e.option == first && e.against.is_none());
    let mut found: Vec<(String, Option<f64>, Option<f64>)> = own
        .filter_map(|entry| match &entry.moved {
            Moved::Multiplier(stream) => {
                let other = second.and_then(|second| value(&entry.moved, Some(second)));
                Some((stream.clone(), value(&entry.moved, None), other))
            }
            Moved::Parameter(_) => None,
        })
        .collect();
    // The stream of which the least change is enough comes first.
    let far = |x: Option<f64>| x.map_or(f64::INFINITY, |x| (x - 1.0).abs());
    let least = |row: &(String, Option<f64>, Option<f64>)| far(row.1).min(far(row.2));
    found.sort_by(|a, b| least(a).total_cmp(&least(b)));
    let rest = found.len().saturating_sub(MOST_STREAMS);
    found.truncate(MOST_STREAMS);
    if found.is_empty() {
        return Vec::new();
    }
    let equal = facts
        .baseline()
        .map_or_else(|| "Net present value of zero".to_owned(), |i| format!("Equal to {}", facts.name(i)));
    let mut headings = vec!["Stream".to_owned(), equal];
    headings.extend(second.map(|i| format!("Equal to {}", facts.name(i))));
    let shown = |x: Option<f64>| x.map_or_else(|| "none".to_owned(), |x| format!("\u{d7} {}", times(x)));
    let rows = found.into_iter().map(|(stream, zero, other)| {
        let mut row = vec![words::plain(&stream), shown(zero)];
        row.extend(second.map(|_| shown(other)));
        row
    });
    let more = if rest > 0 { format!("; {} left out", count(rest, "stream")) } else { String::new() };
    vec![Block::Table(Table {
        caption: format!(
            "How many times as large one stream of {} would have to be, all else unchanged (below 0: its sign turned){more}",
            facts.name(first)
        ),
        headings,
        words: 1,
        rows: rows.collect(),
    })]
}
