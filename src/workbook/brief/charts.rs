//! The charts: net present value by option, by flat rate, and the factors.

use super::words::{list, money, parameter_value};
use super::{Block, Facts, Figure, Section, Table, words};
use crate::drawing::{Bar, Frame, Line, bars, lines};
use hence_core::Parameter;

/// Options that a chart shows, at most: those with the highest net present value.
const MOST_BARS: usize = 12;
const MOST_LINES: usize = 6;
/// Numbers beyond these have no place on an axis.
const DRAWN: (f64, f64) = (1e-280, 1e280);

/// The section.
pub(super) fn section(facts: &Facts<'_>) -> Section {
    let figures: Vec<Figure> = [by_option(facts), by_rate(facts)].into_iter().flatten().collect();
    let blocks = match figures.is_empty() {
        true => vec![Block::Paragraph("The numbers are too large or too small to be drawn.".to_owned())],
        false => std::iter::once(Block::Figures(figures)).chain(left_out(facts)).collect(),
    };
    Section { title: "In pictures".to_owned(), blocks, beside: None }
}

/// That not every option is drawn.
fn left_out(facts: &Facts<'_>) -> Option<Block> {
    let options = facts.ranked().len();
    let told = |most: usize| if options > most { most } else { options };
    (options > MOST_LINES).then(|| {
        Block::Paragraph(format!(
            "Of {options} options, the first chart shows the {} with the highest net present value, the second {}.",
            told(MOST_BARS),
            told(MOST_LINES)
        ))
    })
}

fn can_be_drawn(mut values: impl Iterator<Item = f64>) -> bool {
    values.all(|x| x == 0.0 || (x.abs() > DRAWN.0 && x.abs() < DRAWN.1))
}

/// The options drawn, in their own order: without the baseline, which is nothing over itself.
fn drawn(facts: &Facts<'_>, most: usize) -> (Vec<usize>, String) {
    let mut order = facts.ranked();
    let left_out = order.len().saturating_sub(most);
    order.truncate(most);
    order.sort_unstable();
    let note = match left_out {
        0 => String::new(),
        n => format!(" The {} with the lowest are left out.", n),
    };
    (order, note)
}

fn by_option(facts: &Facts<'_>) -> Option<Figure> {
    let (options, note) = drawn(facts, MOST_BARS);
    let list_of: Vec<Bar> = options
        .iter()
        .map(|&i| Bar { name: facts.label(i), value: facts.npv(i), label: money(facts.npv(i)) })
        .collect();
    if list_of.is_empty() || !can_be_drawn(list_of.iter().map(|bar| bar.value)) {
        return None;
    }
    let title = format!("Net present value{}", facts.over());
    let told: Vec<String> =
        list_of.iter().map(|bar| format!("{} {}", words::quoted(&bar.name), bar.label)).collect();
    let description = format!("A bar an option: {}.{note}", list(&told, "and"));
    let frame =
        Frame { id: "by-option", title: &title, description: &description, x: "Net present value", y: "" };
    Some(Figure { svg: bars(&frame, &list_of), table: None })
}

fn by_rate(facts: &Facts<'_>) -> Option<Figure> {
    let (options, note) = drawn(facts, MOST_LINES);
    let flat = facts.flat;
    let from = first_drawn(facts, &options);
    let drawn: Vec<Line> = options
        .iter()
        .map(|&i| {
            let points = flat.rates.iter().zip(&flat.values[i]).skip(from);
            Line {
                name: facts.label(i),
                points: points.filter_map(|(rate, value)| value.map(|value| (*rate, value))).collect(),
            }
        })
        .collect();
    let points = || drawn.iter().flat_map(|line| &line.points);
    if points().next().is_none() || !can_be_drawn(points().map(|point| point.1)) {
        return None;
    }
    let title = format!("Net present value{} by flat rate", facts.over());
    let told: Vec<String> = drawn.iter().filter_map(ends).collect();
    let description = format!("A line an option, against a flat rate a year: {}.{note}", told.join("; "));
    let frame = Frame {
        id: "by-rate",
        title: &title,
        description: &description,
        x: "Flat rate a year",
        y: "Net present value",
    };
    Some(Figure { svg: lines(&frame, &drawn, true), table: Some(rate_table(facts, &options, &title)) })
}

/// The first rate drawn: at low rates values can be so large that nothing could be told apart at the others.
fn first_drawn(facts: &Facts<'_>, options: &[usize]) -> usize {
    const LARGE: f64 = 4.0;
    let flat = facts.flat;
    let most = options.iter().map(|&i| facts.npv(i).abs()).fold(0.0, f64::max);
    let large =
        |k: usize| options.iter().any(|&i| flat.values[i][k].is_some_and(|value| value.abs() > LARGE * most));
    let from = (0..flat.rates.len()).rev().find(|&k| large(k)).map_or(0, |k| k + 1);
    // Half of the rates at least, or else all of them.
    if from <= flat.rates.len() / 2 { from } else { 0 }
}
/// The ends of a line in words.
fn ends(line: &Line) -> Option<String> {
    let (first, last) = (line.points.first()?, line.points.last()?);
    let rate = |x: f64| parameter_value(Parameter::Rate, x);
    Some(format!(
        "{} from {} at {} to {} at {}",
        words::quoted(&line.name),
        money(first.1),
        rate(first.0),
        money(last.1),
        rate(last.0)
    ))
}

/// Every second whole rate.
fn rate_table(facts: &Facts<'_>, options: &[usize], title: &str) -> Table {
    let flat = facts.flat;
    let wanted: Vec<usize> = (0..flat.rates.len()).step_by(8).collect();
    let mut headings = vec!["Option".to_owned()];
    headings.extend(wanted.iter().map(|&k| parameter_value(Parameter::Rate, flat.rates[k])));
    let rows = options.iter().map(|&i| {
        let values = wanted.iter().map(|&k| flat.values[i][k].map_or_else(|| "none".to_owned(), money));
        std::iter::once(facts.label(i)).chain(values).collect()
    });
    Table { caption: title.to_owned(), headings, words: 1, rows: rows.collect() }
}

/// What one unit counts for over the years, a line a basis.
pub(super) fn factors(facts: &Facts<'_>) -> Option<Figure> {
    let mut drawn: Vec<Line> = Vec::new();
    for (option, outcome) in facts.options.iter().zip(facts.outcomes) {
        let mut points: Vec<(f64, f64)> =
            outcome.offsets.iter().copied().zip(outcome.factors.iter().copied()).collect();
        points.sort_by(|a, b| a.0.total_cmp(&b.0));
        let known = drawn.iter().any(|line| line.name == option.basis && line.points == points);
        if !known && drawn.len() < MOST_LINES {
            drawn.push(Line { name: option.basis.clone(), points });
        }
    }
    let points = || drawn.iter().flat_map(|line| &line.points);
    if points().count() < 2 || !can_be_drawn(points().map(|point| point.1)) {
        return None;
    }
    let told: Vec<String> = drawn
        .iter()
        .filter_map(|line| {
            let (first, last) = (line.points.first()?, line.points.last()?);
            Some(format!(
                "{} from {:.4} at {} to {:.4} at {} years",
                words::quoted(&line.name),
                first.1,
                first.0,
                last.1,
                last.0
            ))
        })
        .collect();
    let description = format!("What one unit counts for, by years after the base: {}.", told.join("; "));
    let frame = Frame {
        id: "factors",
        title: "Discount factor",
        description: &description,
        x: "Years after the base",
        y: "What one unit counts for",
    };
    let table = factor_table(&drawn);
    Some(Figure { svg: lines(&frame, &drawn, false), table: Some(table) })
}

/// The factors at a few offsets, as they stand in the appraisal.
fn factor_table(drawn: &[Line]) -> Table {
    const WANTED: [f64; 6] = [0.0, 10.0, 30.0, 50.0, 100.0, 200.0];
    let mut rows: Vec<Vec<String>> = Vec::new();
    for line in drawn {
        let near = WANTED.iter().filter_map(|wanted| line.points.iter().find(|point| point.0 >= *wanted));
        for (t, factor) in near.chain(line.points.last()) {
            let row = vec![line.name.clone(), format!("{t}"), format!("{factor:.4}")];
            if !rows.contains(&row) {
                rows.push(row);
            }
        }
    }
    let mut headings = ["Basis", "Years after the base", "Factor"].map(String::from).to_vec();
    let mut words = 1;
    if drawn.len() == 1 {
        headings.remove(0);
        words = 0;
        for row in &mut rows {
            row.remove(0);
        }
    }
    Table { caption: "Discount factor".to_owned(), headings, words, rows }
}
