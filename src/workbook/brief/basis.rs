//! The basis: the rate, where it comes from, and when the flows stand.

use hence_core::{CAUTION, PriceBasis};

use super::words::{list, plain};
use super::{Block, Facts, Section, words};
use crate::appraisal::Given;

/// The section.
pub(super) fn section(facts: &Facts<'_>) -> Section {
    let mut blocks = Vec::new();
    for (members, first) in groups(facts) {
        if members.len() < facts.options.len() {
            let names: Vec<String> = members.iter().map(|&i| facts.name(i)).collect();
            blocks.push(Block::Paragraph(format!("For {}:", list(&names, "and"))));
        }
        blocks.push(Block::Terms(terms(facts, first)));
    }
    blocks.push(Block::Paragraph(CAUTION.to_owned()));
    Section { title: "The basis".to_owned(), blocks, beside: super::charts::factors(facts) }
}

/// Options that share basis, base, timing and what they count, with one of them.
fn groups(facts: &Facts<'_>) -> Vec<(Vec<usize>, usize)> {
    let mut groups: Vec<(Vec<usize>, usize)> = Vec::new();
    for i in 0..facts.options.len() {
        let told = terms(facts, i);
        match groups.iter_mut().find(|(_, first)| terms(facts, *first) == told) {
            Some((members, _)) => members.push(i),
            None => groups.push((vec![i], i)),
        }
    }
    groups
}

fn terms(facts: &Facts<'_>, option: usize) -> Vec<(String, String)> {
    let (choice, own) = (&facts.appraisal.choices[option], &facts.options[option]);
    let prices = match facts.outcomes[option].basis.price_basis() {
        Some(PriceBasis::Real) => "; for real prices",
        Some(PriceBasis::Nominal) => "; for nominal prices",
        None => "",
    };
    let mut terms = vec![
        ("Discount rate", format!("{}{prices}", own.basis_words)),
        ("As declared", format!("\u{201c}{}\u{201d}, {}", own.basis, from(&choice.basis))),
        ("Base", format!("{}, {}", own.base, from(&choice.base))),
        ("Timing", own.timing.clone()),
    ];
    if let Some(timing) = &choice.timing {
        terms[3].1.push_str(&format!(" ({})", from(timing)));
    }
    terms.extend(own.prices.clone().map(|prices| ("Prices", prices)));
    for (stream, basis, words) in &own.stream_bases {
        terms.push((
            "Another basis",
            format!("{} on \u{201c}{basis}\u{201d}: {words}", words::quoted(stream)),
        ));
    }
    terms.into_iter().map(|(term, text)| (term.to_owned(), plain(&text))).collect()
}

/// Where something stated was read.
fn from<T>(given: &Given<T>) -> String {
    match &given.at {
        Some(at) => format!("from {} at {at}", words::plain(&given.from)),
        None => format!("from {}", words::plain(&given.from)),
    }
}
