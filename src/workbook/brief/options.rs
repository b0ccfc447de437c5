//! The options: what each comes to, and when its costs and benefits occur.

use hence_core::Eras;

use super::words::{money, ratio, share};
use super::{Block, Facts, Section, Table};
use crate::sheets::era_words;

/// The section.
pub(super) fn section(facts: &Facts<'_>) -> Section {
    let mut blocks = vec![Block::Table(totals(facts))];
    if let Some(baseline) = facts.baseline() {
        let own = &facts.options[baseline].absolute;
        blocks.push(Block::Paragraph(format!(
            "As it stands, the net present value of the baseline {} is {}.",
            facts.name(baseline),
            money(own.npv)
        )));
    }
    blocks.extend(exact(facts).map(Block::List));
    blocks.push(Block::Table(eras(facts)));
    Section { title: "The options".to_owned(), blocks, beside: None }
}

fn totals(facts: &Facts<'_>) -> Table {
    let headings = [
        "Option",
        "PV of benefits",
        "PV of costs",
        "Net present value",
        "Benefits / costs",
        "Annual equivalent",
        "Rank",
    ];
    let standings = &facts.found.comparison.sides[0].standings;
    let rows = facts.options.iter().zip(standings).enumerate().map(|(i, (option, standing))| {
        let totals = option.totals();
        let name = facts.label(i);
        vec![
            if option.baseline { format!("{name} (baseline)") } else { name },
            money(totals.pv_benefits),
            money(totals.pv_costs),
            money(totals.npv),
            if option.baseline { "-".to_owned() } else { ratio(totals.ratio) },
            totals.annual.map_or_else(|| "-".to_owned(), money),
            standing.rank.to_string(),
        ]
    });
    Table {
        caption: format!(
            "Present values (PV){}, in the workbook's own money; {}",
            facts.over(),
            service(facts)
        ),
        headings: headings.map(String::from).to_vec(),
        words: 1,
        rows: rows.collect(),
    }
}

/// The years of the annual equivalent.
fn service(facts: &Facts<'_>) -> String {
    let years: Vec<u32> = facts.options.iter().map(|option| option.service_years).collect();
    let (least, most) = (years.iter().min().unwrap_or(&0), years.iter().max().unwrap_or(&0));
    let years = if least == most { most.to_string() } else { format!("{least} to {most}") };
    format!("annual equivalent over {years} years")
}

/// What flows that are not small against consumption are worth, where a path of consumption is given.
fn exact(facts: &Facts<'_>) -> Option<Vec<String>> {
    let told = facts.options.iter().enumerate().filter_map(|(i, option)| {
        let (_, words) = option.exact.as_ref()?;
        Some(format!("{} against consumption: {words}.", facts.name(i)))
    });
    Some(told.collect::<Vec<_>>()).filter(|texts| !texts.is_empty())
}

/// What share of the gross present value falls into each era.
fn eras(facts: &Facts<'_>) -> Table {
    let edges = Eras::default().0;
    let mut headings = vec!["Option".to_owned()];
    headings.extend((0..=edges.len()).map(|k| in_capitals(&era_words(&edges, k))));
    headings.push("Mean time".to_owned());
    let rows = facts.options.iter().enumerate().map(|(i, option)| {
        let mut row = vec![facts.label(i)];
        row.extend(
            (0..=edges.len()).map(|k| option.era_shares.get(k).map_or_else(|| "-".to_owned(), |x| share(*x))),
        );
        row.push(option.mean_time.map_or_else(|| "-".to_owned(), |years| format!("{years:.1} years")));
        row
    });
    Table {
        caption: "When: shares of the present value of all costs and benefits, by years after the base"
            .to_owned(),
        headings,
        words: 1,
        rows: rows.collect(),
    }
}

fn in_capitals(word: &str) -> String {
    let mut letters = word.chars();
    letters.next().map_or_else(String::new, |first| first.to_uppercase().chain(letters).collect())
}
