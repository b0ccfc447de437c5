//! What the numbers leave out, and what was found on the way.

use super::words::{count, list, plain, quoted};
use super::{Block, Facts, Section};
use crate::appraisal::StreamKind;
use crate::fill::rows_not_valued;
use crate::problem::Severity;
use crate::sheets::adjusted;

/// Rows, warnings and options of a group that are listed, at most.
const NAMED: usize = 3;
const MOST_ROWS: usize = 8;
const MOST_WARNINGS: usize = 6;

/// The section.
pub(super) fn section(facts: &Facts<'_>) -> Section {
    let mut blocks = vec![Block::Paragraph(counted(facts))];
    blocks.extend(adjustments(facts).map(Block::Paragraph));
    blocks.push(Block::Paragraph(not_valued(facts)));
    blocks.extend(warnings(facts));
    Section { title: "What was valued, and what was not".to_owned(), blocks, beside: None }
}

/// What stands in the appraisal as benefits and as costs.
fn counted(facts: &Facts<'_>) -> String {
    let names = |wanted: &dyn Fn(StreamKind) -> bool| {
        let mut names: Vec<String> = Vec::new();
        let streams = facts.appraisal.choices.iter().flat_map(|choice| &choice.streams);
        for stream in streams.filter(|stream| wanted(stream.kind)) {
            let damage = if stream.kind == StreamKind::Damage { " (damage avoided)" } else { "" };
            let name = format!("{}{damage}", plain(&stream.name));
            if !names.contains(&name) {
                names.push(name);
            }
        }
        if names.is_empty() { "nothing".to_owned() } else { list(&names, "and") }
    };
    format!(
        "Counted as benefits: {}; as costs: {}.",
        names(&|kind| kind != StreamKind::Cost),
        names(&|kind| kind == StreamKind::Cost)
    )
}

/// What was made of the flows as entered: what is the same for several options, once.
fn adjustments(facts: &Facts<'_>) -> Option<String> {
    let mut groups: Vec<(String, Vec<String>)> = Vec::new();
    for (option, stream, words) in adjusted(facts.appraisal, facts.outcomes) {
        let told = format!("{} {}", quoted(&stream), plain(&words));
        match groups.iter_mut().find(|(known, _)| *known == told) {
            Some((_, options)) => options.push(quoted(&option)),
            None => groups.push((told, vec![quoted(&option)])),
        }
    }
    let alone = facts.options.len() == 1;
    let shown = groups.iter().take(MOST_ROWS).map(|(told, options)| match options.len() {
        _ if alone => told.clone(),
        n if n <= NAMED => format!("{told} (in {})", list(options, "and")),
        n => format!("{told} (in {})", count(n, "option")),
    });
    let more = groups.len().saturating_sub(MOST_ROWS);
    let more = if more > 0 { format!("; and {more} more") } else { String::new() };
    let shown: Vec<String> = shown.collect();
    (!shown.is_empty()).then(|| format!("Adjusted from what is entered: {}{more}.", shown.join("; ")))
}

/// The rows that no role names, those with one heading together.
fn not_valued(facts: &Facts<'_>) -> String {
    let mut groups: Vec<(String, Vec<String>)> = Vec::new();
    for row in rows_not_valued(facts.appraisal) {
        let (heading, at) = (plain(&row.heading), row.at.to_string());
        match groups.iter_mut().find(|(known, _)| *known == heading && !heading.is_empty()) {
            Some((_, places)) => places.push(at),
            None => groups.push((heading, vec![at])),
        }
    }
    if groups.is_empty() {
        return "Every row of numbers along the years in the workbook is valued, or follows from what is. What is not in \
                the workbook is not in these numbers."
            .to_owned();
    }
    let shown: Vec<String> = groups
        .iter()
        .take(MOST_ROWS)
        .map(|(heading, places)| match (heading.as_str(), places.as_slice()) {
            ("", [place, ..]) => place.clone(),
            (heading, [place]) => format!("{} ({place})", quoted(heading)),
            (heading, places) => {
                format!("{} ({}, the first {})", quoted(heading), count(places.len(), "row"), places[0])
            }
        })
        .collect();
    let more = match groups.len() - shown.len() {
        0 => String::new(),
        more => format!(", and {more} more"),
    };
    format!(
        "In the workbook along the years, but named as no flow and so not valued: {}{more}. What is not in the workbook is \
         not in these numbers.",
        shown.join(", ")
    )
}
/// Warnings, the first of them; the rest as a count.
fn warnings(facts: &Facts<'_>) -> Option<Block> {
    let found: Vec<String> = facts
        .problems
        .iter()
        .filter(|problem| problem.severity >= Severity::Warning)
        .map(|problem| plain(&format!("{}: {}.", problem.place, problem.message.trim_end_matches('.'))))
        .collect();
    let mut texts: Vec<String> = found.iter().take(MOST_WARNINGS).cloned().collect();
    if found.len() > MOST_WARNINGS {
        texts.push(format!("{}.", count(found.len() - MOST_WARNINGS, "more warning")));
    }
    (!texts.is_empty()).then_some(Block::List(texts))
}
