//! A comparison as text, comma-separated values and JSON.

use hence_core::Parameter;
use hence_workbook::compare::{
    Comparison, Entry, Map, Moved, change_words, heading, map_words, option_letter, remark, shown, words,
};
use hence_workbook::problem::Problem;
use serde_json::{Value, json};

use crate::json::Found;
use crate::numbers::{money, shortest, shortest_or_blank};
use crate::render::{left_table, table};
use crate::terminal::escape;

/// The JSON document.
pub fn json(found: &Comparison) -> String {
    let name = |i: usize| found.options[i].as_str();
    let mut results = Vec::new();
    for side in &found.sides {
        for (i, standing) in side.standings.iter().enumerate() {
            results.push(json!({
                "option": name(i), "basis": standing.basis, "why": side.why.word(), "npv": standing.totals.npv,
                "pv_benefits": standing.totals.pv_benefits, "pv_costs": standing.totals.pv_costs,
                "ratio": standing.totals.ratio, "rank": standing.rank
            }));
        }
    }
    let pairs = |list: &[(f64, f64)]| list.iter().map(|(a, b)| json!([a, b])).collect::<Vec<_>>();
    let switching: Vec<Value> = found
        .switching
        .iter()
        .map(|entry| {
            json!({
                "option": name(entry.option), "against": entry.against.map(name),
                "parameter": entry.moved.to_string(), "values": entry.values,
                "unresolved": pairs(&entry.unresolved), "interval": [entry.interval.0, entry.interval.1],
                "note": entry.note
            })
        })
        .collect();
    let bases: Vec<Value> = found
        .sides
        .iter()
        .map(|side| {
            json!({
                "basis": side.basis, "why": side.why.word(), "words": side.words, "best": side.best.map(name)
            })
        })
        .collect();
    // One name; a list of those that are equally good.
    let all = |options: &[usize]| match options {
        [one] => json!(name(*one)),
        several => json!(several.iter().map(|i| name(*i)).collect::<Vec<_>>()),
    };
    let changes: Vec<Value> = found
        .changes
        .iter()
        .map(|change| {
            json!({
                "parameter": change.parameter.to_string(), "value": change.at, "below": all(&change.from),
                "above": all(&change.to)
            })
        })
        .collect();
    let problems: Vec<Found> = found.problems.iter().map(Found::from).collect();
    let map = found.map.as_ref().map(|map| {
        let best: Vec<Vec<Option<&str>>> = (0..map.ys.len())
            .map(|j| (0..map.xs.len()).map(|i| map.best(i, j).and_then(|best| best.0).map(name)).collect())
            .collect();
        let zero: Vec<Value> = map
            .zero
            .iter()
            .flat_map(|row| {
                let up = map.ys[row.up];
                row.values.iter().zip(&row.open).enumerate().map(move |(option, (values, open))| {
                    json!({"option": name(option), "up": up, "preference": values, "settled": !open})
                })
            })
            .collect();
        json!({
            "basis": map.basis, "across": "preference", "up": map.up.to_string(), "preference": map.xs,
            map.up.to_string(): map.ys, "best": best, "zero": zero
        })
    });
    document(json!({
        "schema": 1, "results": results, "switching": switching, "bases": bases, "baseline": found.baseline.map(name),
        "ramsey": found.ramsey, "map": map, "changes": changes, "problems": problems, "caution": hence_core::CAUTION
    }))
}

/// The JSON document of a workbook that could not be compared.
pub fn failed(problems: &[Problem]) -> String {
    let problems: Vec<Found> = problems.iter().map(Found::from).collect();
    document(json!({"schema": 1, "results": [], "switching": [], "problems": problems}))
}

fn document(value: Value) -> String {
    format!("{value:#}\n")
}

/// One table: a row a result, then a row a switching value (one without a value where there is none).
pub fn csv(found: &Comparison) -> String {
    let mut text = String::from("kind,option,basis,npv,ratio,rank,against,parameter,value,note\n");
    let name = |i: usize| field(&found.options[i]);
    for side in &found.sides {
        for (i, standing) in side.standings.iter().enumerate() {
            let totals = &standing.totals;
            text.push_str(&format!(
                "result,{},{},{},{},{},,,,{}\n",
                name(i),
                field(&standing.basis),
                shortest(totals.npv),
                shortest_or_blank(totals.ratio),
                standing.rank,
                side.why.word()
            ));
        }
    }
    for entry in &found.switching {
        for value in values(entry) {
            text.push_str(&format!(
                "switching,{},,,,,{},{},{},{}\n",
                name(entry.option),
                entry.against.map(name).unwrap_or_default(),
                field(&entry.moved.to_string()),
                shortest_or_blank(value),
                field(&remark(entry))
            ));
        }
    }
    text
}

/// Each value, or one none.
fn values(entry: &Entry) -> Vec<Option<f64>> {
    if entry.values.is_empty() { vec![None] } else { entry.values.iter().copied().map(Some).collect() }
}

/// A field, in quotes where it needs them.
fn field(text: &str) -> String {
    if text.contains([',', '"', '\n', '\r']) {
        format!("\"{}\"", text.replace('"', "\"\""))
    } else {
        text.to_owned()
    }
}

/// A letter for each basis, so that its column is narrow: A to Z, then A1 and on.
fn letter(k: usize) -> String {
    let letter = char::from(b'A' + (k % 26) as u8);
    if k < 26 { letter.to_string() } else { format!("{letter}{}", k / 26) }
}

/// The report for people.
pub fn text(input: &str, output: Option<&str>, found: &Comparison) -> String {
    let mut text = match output {
        Some(output) => format!("{input} -> {output}\n\n"),
        None => format!("{input}\n\n"),
    };
    for (k, side) in found.sides.iter().enumerate() {
        text.push_str(&format!("{}  {}: {}\n", letter(k), heading(side), side.words));
    }
    let over = found.baseline.map(|i| format!(" over {}", found.options[i])).unwrap_or_default();
    text.push_str(&format!("\nNet present value{over}, with its rank, under each basis\n"));
    let letters = || (0..found.sides.len()).map(letter);
    let mut rows = vec![std::iter::once("Option".to_owned()).chain(letters()).collect::<Vec<_>>()];
    for (i, option) in found.options.iter().enumerate() {
        let cells = found.sides.iter().map(|side| {
            let standing = &side.standings[i];
            format!("{} ({})", money(standing.totals.npv), standing.rank)
        });
        rows.push(std::iter::once(option.clone()).chain(cells).collect());
    }
    let best =
        found.sides.iter().map(|side| side.best.map_or("several".to_owned(), |i| found.options[i].clone()));
    if found.options.len() > 1 {
        rows.push(std::iter::once("Best".to_owned()).chain(best).collect());
    }
    text.push_str(&table(&rows));
    text.push_str(&format!("\nRatio of benefits to costs{over}\n"));
    rows.truncate(1);
    for (i, option) in found.options.iter().enumerate() {
        let cells = found.sides.iter().map(|side| side.standings[i].totals.ratio);
        let cells = cells.map(|ratio| ratio.map_or_else(|| "-".to_owned(), |ratio| format!("{ratio:.2}")));
        rows.push(std::iter::once(option.clone()).chain(cells).collect());
    }
    text.push_str(&table(&rows));
    text.push_str("\nWhere the best option changes\n");
    for change in &found.changes {
        text.push_str(&format!("  {}\n", change_words(found, change)));
    }
    if found.changes.is_empty() {
        let why =
            if found.options.len() > 1 { "nowhere in the intervals searched" } else { "there is one option" };
        text.push_str(&format!("  {why}\n"));
    }
    text.push_str(&switching(found));
    text.push_str(&found.map.as_ref().map(|map| map_text(found, map)).unwrap_or_default());
    text.push_str(&format!("\n{}.\n{}\n", words(found).trim_end_matches('.'), hence_core::CAUTION));
    escape(&text)
}

/// Switching values in two tables: parameters by pair, each pair once, then the multipliers of each option's streams.
fn switching(found: &Comparison) -> String {
    let mut parameters = vec![Parameter::Rate];
    if found.ramsey.is_some() {
        parameters.extend([Parameter::Preference, Parameter::Elasticity, Parameter::Growth]);
    }
    let name = |i: usize| found.options[i].clone();
    let zero = found.baseline.map_or_else(|| "zero".to_owned(), name);
    let told = |entry: &&Entry| match entry.against {
        None => found.baseline != Some(entry.option),
        // Over the baseline, what is held against zero is held against the baseline.
        Some(other) => {
            entry.option < other && found.baseline != Some(entry.option) && found.baseline != Some(other)
        }
    };
    let mut rows = vec![["Option", "Equal to"].map(String::from).to_vec()];
    rows[0].extend(parameters.iter().map(|parameter| in_capitals(&parameter.to_string())));
    let mut notes = Vec::new();
    let (mut row, mut before) = (Vec::new(), None);
    for entry in found.switching.iter().filter(told) {
        let Moved::Parameter(parameter) = entry.moved else { continue };
        if !parameters.contains(&parameter) {
            continue;
        }
        if before != Some((entry.option, entry.against)) {
            before = Some((entry.option, entry.against));
            rows.push(std::mem::take(&mut row));
            row = vec![name(entry.option), entry.against.map_or_else(|| zero.clone(), name)];
        }
        let values: Vec<String> = entry.values.iter().map(|x| shown(&entry.moved, *x)).collect();
        row.push(if values.is_empty() { "-".to_owned() } else { values.join(", ") });
        if !remark(entry).is_empty() {
            notes.push(format!("  {} and {}, {parameter}: {}\n", row[0], row[1], remark(entry)));
        }
        if entry.interval != parameter.interval() {
            let (low, high) = entry.interval;
            let interval = format!("{} to {}", shown(&entry.moved, low), shown(&entry.moved, high));
            notes.push(format!("  {} and {}, {parameter}: searched {interval}\n", row[0], row[1]));
        }
    }
    rows.push(row);
    rows.retain(|row| !row.is_empty());
    let intervals: Vec<String> = parameters
        .iter()
        .map(|&parameter| {
            let (low, high) = parameter.interval();
            let moved = Moved::Parameter(parameter);
            format!("{parameter} {} to {}", shown(&moved, low), shown(&moved, high))
        })
        .collect();
    let mut text = format!("\nSwitching values ({})\n", intervals.join(", "));
    text.push_str(&left_table(&rows));
    text.extend(notes);
    text.push_str(&format!("\nMultiplier of a stream at which the option equals {zero}\n"));
    let mut rows = vec![["Option", "Stream", "Multiplier"].map(String::from).to_vec()];
    for entry in found.switching.iter().filter(|entry| entry.against.is_none()).filter(told) {
        if let Moved::Multiplier(stream) = &entry.moved {
            let value = entry.values.first().map_or_else(|| remark(entry), |x| shown(&entry.moved, *x));
            rows.push(vec![name(entry.option), stream.clone(), value]);
        }
    }
    text + &left_table(&rows)
}

/// Every so many points of the map are shown on a terminal, across and up.
const EVERY: (usize, usize) = (8, 6);

/// The map in letters.
fn map_text(found: &Comparison, map: &Map) -> String {
    let up = Moved::Parameter(map.up);
    let columns: Vec<usize> = (0..map.xs.len()).step_by(EVERY.0).collect();
    let mut rows = Vec::new();
    for j in (0..map.ys.len()).step_by(EVERY.1).rev() {
        let cells = columns.iter().map(|&i| map.letter(i, j));
        rows.push(std::iter::once(shown(&up, map.ys[j])).chain(cells).collect::<Vec<_>>());
    }
    let preferences = columns.iter().map(|&i| shown(&Moved::Parameter(Parameter::Preference), map.xs[i]));
    rows.push(std::iter::once(String::new()).chain(preferences).collect());
    let options = found.options.iter().enumerate();
    let options: Vec<String> = options.map(|(i, name)| format!("{} {name}", option_letter(i))).collect();
    format!(
        "\nBest option by preference (across) and {} (up): {}\n{}{}\n",
        map.up,
        options.join(", "),
        table(&rows),
        map_words(map).replace(" A star: nearest to the basis as stated.", "")
    )
}

fn in_capitals(word: &str) -> String {
    let mut letters = word.chars();
    letters.next().map_or_else(String::new, |first| first.to_uppercase().chain(letters).collect())
}
