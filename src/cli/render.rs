//! Reports as text for people.

use std::collections::BTreeMap;

use hence_workbook::outcome::Totals;
use hence_workbook::problem::{Place, Problem, Severity};
use hence_workbook::report::{OptionReport, Report};

use crate::numbers::{count, money, percent};
use crate::terminal::{Terminal, escape};

/// After so many problems only a count of the rest is printed.
const MOST_PROBLEMS: usize = 20;

/// Problems to standard error: file, place, what was found, the code; then what to do. Notes of one kind are told once,
/// with how many more there are.
pub fn problems(terminal: &Terminal, file: &str, problems: &[Problem]) {
    let (notes, graver): (Vec<&Problem>, Vec<&Problem>) =
        problems.iter().partition(|problem| problem.severity == Severity::Note);
    for problem in graver.iter().take(MOST_PROBLEMS) {
        terminal.say(word(problem.severity), &line(file, problem, ""));
    }
    if let Some(rest) = graver.get(MOST_PROBLEMS..).filter(|rest| !rest.is_empty()) {
        let errors = rest.iter().filter(|problem| problem.severity == Severity::Error).count();
        let severity = if errors > 0 { "error" } else { "warning" };
        let (more, errors) = (count(rest.len(), "more problem"), count(errors, "error"));
        let how = format!("{more}, with {errors} among them; --json lists all");
        terminal.say(severity, &format!("{file}: {how}"));
    }
    let mut kinds: BTreeMap<&str, (&Problem, usize)> = BTreeMap::new();
    for note in notes {
        kinds.entry(note.code).or_insert((note, 0)).1 += 1;
    }
    for (note, count) in kinds.values() {
        let more = match count - 1 {
            0 => String::new(),
            more => format!("; and {more} more of the kind"),
        };
        terminal.say("note", &line(file, note, &more));
    }
}

fn word(severity: Severity) -> &'static str {
    match severity {
        Severity::Error => "error",
        Severity::Warning => "warning",
        Severity::Note => "note",
    }
}

/// One problem: file, place, what was found, the code; then what to do.
pub fn line(file: &str, problem: &Problem, more: &str) -> String {
    let mut line = if problem.place == Place::default() {
        let named = problem.message.starts_with(file);
        let before = if named { String::new() } else { format!("{file}: ") };
        format!("{before}{} ({})", problem.message, problem.code)
    } else {
        format!("{file}, {problem}")
    };
    line.push_str(more);
    if let Some(hint) = &problem.hint {
        line.push_str(&format!("\n  Try: {hint}"));
    }
    line
}

/// A table of texts, aligned on the left.
pub fn left_table(rows: &[Vec<String>]) -> String {
    let widths = widths(rows);
    let mut text = String::new();
    for row in rows {
        let cells: Vec<String> = row.iter().zip(&widths).map(|(cell, w)| format!("{cell:w$}")).collect();
        text.push_str(cells.join("  ").trim_end());
        text.push('\n');
    }
    text
}

fn widths(rows: &[Vec<String>]) -> Vec<usize> {
    let columns = rows.iter().map(Vec::len).max().unwrap_or(0);
    let width = |c: usize| rows.iter().filter_map(|r| r.get(c)).map(|s| s.chars().count()).max().unwrap_or(0);
    (0..columns).map(width).collect()
}

/// A table with a left-aligned first column and right-aligned others.
pub fn table(rows: &[Vec<String>]) -> String {
    let widths = widths(rows);
    let mut text = String::new();
    for row in rows {
        let mut line = String::new();
        for (c, cell) in row.iter().enumerate() {
            let pad = " ".repeat(widths[c] - cell.chars().count());
            if c == 0 {
                line.push_str(&format!("{cell}{pad}"));
            } else {
                line.push_str(&format!("  {pad}{cell}"));
            }
        }
        text.push_str(line.trim_end());
        text.push('\n');
    }
    text
}

/// The report on one filled workbook.
pub fn report(input: &str, output: &str, report: &Report) -> String {
    let mut text = format!("{input} -> {output}\n");
    for own in report.options.chunk_by(|a, b| a.appraisal == b.appraisal) {
        let appraisal = report.appraisals.iter().find(|a| own[0].appraisal.as_ref() == Some(&a.name));
        text.extend(appraisal.map(|appraisal| format!("\nAppraisal {}\n\n", appraisal.name)));
        text.push_str(&options(own));
        text.extend(appraisal.map(|a| format!("\nVerdict of {}: {}.\n", a.name, a.verdict)));
    }
    text.push_str(&not_valued(&report.not_valued));
    text.push_str(&format!(
        "\n{} filled, {} ticked. Verdict: {}.\n{}\n",
        count(report.filled, "cell"),
        count(report.ticked, "formula"),
        report.verdict,
        hence_core::CAUTION
    ));
    escape(&text)
}

/// The options of one appraisal: on what they are valued, and what each comes to.
fn options(options: &[OptionReport]) -> String {
    let mut text = String::new();
    for (names, option) in grouped(options) {
        if names.len() < options.len() {
            text.push_str(&format!("\n{}:\n", names.join(", ")));
        }
        text.push_str(&format!("Basis   {}\n        {}\n", option.basis, option.basis_words));
        text.push_str(&format!("Base    {}\nTiming  {}\n", option.base, option.timing));
        if let Some(prices) = &option.prices {
            text.push_str(&format!("Prices  {prices}\n"));
        }
    }
    text.push('\n');
    let over = options.iter().find(|o| o.baseline && options.iter().any(|o| o.increment.is_some()));
    if let Some(baseline) = over {
        text.push_str(&absolute(options, "As it stands"));
        text.push('\n');
        text.push_str(&increments(options, &format!("Over {}", baseline.name)));
    } else {
        text.push_str(&absolute(options, "Option"));
    }
    text.push('\n');
    for option in options {
        text.push_str(&details(option));
    }
    text
}

/// The report on one workbook of many: where it went, the verdict, and a line for each option.
pub fn brief(input: &str, output: &str, report: &Report) -> String {
    let mut text = format!("{input} -> {output}: {}\n", report.verdict);
    let row = |option: &OptionReport| {
        let totals = option.totals();
        let ratio = totals.ratio.map_or_else(|| "-".into(), |ratio| format!("{ratio:.2}"));
        let over = if option.increment.is_some() { " over the baseline" } else { "" };
        vec![
            format!("  {}", option.name),
            format!("NPV{over} {}", money(totals.npv)),
            format!("ratio {ratio}"),
        ]
    };
    text.push_str(&table(&report.options.iter().map(row).collect::<Vec<_>>()));
    escape(&text)
}

/// Rows that were left out of the appraisal, so that a forgotten benefit is seen.
fn not_valued(rows: &[String]) -> String {
    const MOST: usize = 5;
    if rows.is_empty() {
        return String::new();
    }
    let shown = rows.iter().take(MOST).cloned().collect::<Vec<_>>().join(", ");
    let more = if rows.len() > MOST {
        format!(", and {} more (Audit coverage has all)", rows.len() - MOST)
    } else {
        String::new()
    };
    format!("\nNot valued: {shown}{more}.\n")
}

/// Options that share basis, base and timing.
fn grouped(options: &[OptionReport]) -> Vec<(Vec<&str>, &OptionReport)> {
    let mut groups: Vec<(Vec<&str>, &OptionReport)> = Vec::new();
    for option in options {
        let of = |o: &OptionReport| (o.basis.clone(), o.base.clone(), o.timing.clone(), o.prices.clone());
        let same = |o: &OptionReport| of(o) == of(option);
        match groups.iter_mut().find(|(_, o)| same(o)) {
            Some((names, _)) => names.push(&option.name),
            None => groups.push((vec![&option.name], option)),
        }
    }
    groups
}

/// The totals of every option as it stands.
fn absolute(options: &[OptionReport], title: &str) -> String {
    let mut rows = vec![headings(title)];
    rows.extend(options.iter().map(|option| totals(&option.name, &option.absolute)));
    table(&rows)
}

/// The totals of every option over the baseline, with its rank by net present value.
fn increments(options: &[OptionReport], title: &str) -> String {
    let mut head = headings(title);
    head.push("Rank".to_owned());
    let mut rows = vec![head];
    let npv = |option: &OptionReport| option.totals().npv;
    for option in options {
        let Some(increment) = &option.increment else { continue };
        let mut row = totals(&option.name, increment);
        row.push((1 + options.iter().filter(|other| npv(other) > npv(option)).count()).to_string());
        rows.push(row);
    }
    table(&rows)
}

fn headings(title: &str) -> Vec<String> {
    let rest = ["Benefits", "Costs", "PV benefits", "PV costs", "NPV", "Ratio", "Annual equivalent"];
    std::iter::once(title).chain(rest).map(String::from).collect()
}

fn totals(name: &str, totals: &Totals) -> Vec<String> {
    let mut row = vec![name.to_owned()];
    row.extend([totals.benefits, totals.costs, totals.pv_benefits, totals.pv_costs, totals.npv].map(money));
    row.push(totals.ratio.map_or_else(|| "-".into(), |ratio| format!("{ratio:.2}")));
    row.push(totals.annual.map_or_else(|| "-".into(), money));
    row
}

/// Annual equivalent, rates of return and payback, over the baseline where there is one.
fn measures(option: &OptionReport) -> String {
    let mut text = String::from(if option.increment.is_some() { "; over the baseline: " } else { "; " });
    text.push_str(&match option.service_years {
        0 => "no annual equivalent".to_owned(),
        years => format!("annual equivalent over service years 1 to {years} from the base"),
    });
    let open = option.irr_unresolved.iter().map(|(low, _)| format!("perhaps {}", percent(*low)));
    let rates: Vec<String> = option.irr.iter().map(|r| percent(*r)).chain(open).collect();
    text.push_str(&match rates.len() {
        _ if option.endless => ", no internal rate of return, as flows go on for ever".to_owned(),
        0 => ", no internal rate of return between -50% and 100%".to_owned(),
        1 => format!(", internal rate of return {}", rates[0]),
        _ => format!(", internal rates of return {}", rates.join(", ")),
    });
    text.push_str(&match (option.payback.first, option.payback.last) {
        (Some(first), Some(last)) if first == last => {
            format!(", discounted payback {first:.1} years after the base")
        }
        (Some(first), Some(last)) => {
            format!(", discounted payback first {first:.1}, for good {last:.1} years after the base")
        }
        (Some(first), None) => {
            format!(", discounted payback {first:.1} years after the base, but not for good")
        }
        _ => ", no discounted payback".to_owned(),
    });
    text
}

/// What stands behind the table, a few lines an option.
fn details(option: &OptionReport) -> String {
    let mut text = format!("{}:", option.name);
    if option.baseline {
        text.push_str(" the baseline;");
    }
    let list = |names: &[String]| if names.is_empty() { "nothing".to_owned() } else { names.join(", ") };
    text.push_str(&format!(" above the line {}; below it {}", list(&option.above), list(&option.below)));
    if !option.baseline {
        text.push_str(&measures(option));
    }
    if let Some(mean) = option.mean_time {
        text.push_str(&format!("; mean time of gross present value {mean:.1} years"));
    }
    if let Some(value) = option.npv_per_budget {
        text.push_str(&format!("; NPV per unit of budget {value:.3}"));
    }
    for (name, plain, discounted) in &option.effects {
        let show = |x: &Option<f64>| x.map_or_else(|| "-".into(), money);
        text.push_str(&format!(
            "; cost per unit of {name} {} (effect undiscounted), {} (discounted)",
            show(plain),
            show(discounted)
        ));
    }
    text.push_str(".\n");
    for (stream, basis, words) in &option.stream_bases {
        text.push_str(&format!("    {stream} on a basis of its own: {basis}. {words}\n"));
    }
    if !option.weights.is_empty() {
        let weights = option.weights.iter().map(|(stream, weight)| format!("{stream} {weight:.3}"));
        let weights = weights.collect::<Vec<_>>().join(", ");
        text.push_str(&format!("    Weighted by income: {weights}; totals are weighted\n"));
    }
    if let Some((_, words)) = &option.exact {
        text.push_str(&format!("    Against consumption: {words}\n"));
    }
    if let Some(companion) = &option.companion {
        text.push_str(&format!(
            "    Beside it, on {}: PV benefits {}, PV costs {}, NPV {}. {}\n",
            companion.id,
            money(companion.totals.pv_benefits),
            money(companion.totals.pv_costs),
            money(companion.totals.npv),
            companion.words
        ));
    }
    text
}
