//! `hence draws`: how net present values spread where the rate is uncertain.

use std::num::NonZeroUsize;
use std::path::PathBuf;

use hence_core::{Chance, Distribution, Draws, Histogram, Quantity, Spread};
use hence_workbook::draws::{DrawsReport, DrawsRequest, OptionDraws, Origin, Part, Prepared, prepare};
use serde_json::{Value, json};

use crate::args;
use crate::json::Found;
use crate::numbers::{grouped, money, percent, shortest};
use crate::progress::Progress;
use crate::terminal::{self, Terminal, escape};
use crate::{Failure, Outcome, input, render};

/// Columns of the longest bar of a histogram.
const BAR: usize = 40;

/// Prints percentiles and probabilities, or every draw.
pub fn run(args: &args::Draws, schedules: &Option<PathBuf>, terminal: &Terminal) -> Result<Outcome, Failure> {
    let catalogue = super::catalogue(schedules)?;
    let texts = [&args.preference, &args.hazard, &args.elasticity, &args.growth];
    let mut request = DrawsRequest {
        roles: super::roles(&args.roles)?,
        plan: super::planned(&args.roles, Some(&args.of))?,
        ..DrawsRequest::default()
    };
    for (quantity, text) in Quantity::ALL.into_iter().zip(texts) {
        let Some(text) = text else { continue };
        let parsed = Distribution::parse(quantity, text).map_err(|error| super::typed(&error, text))?;
        request.distributions[quantity as usize] = Some(parsed);
    }
    let all = || std::thread::available_parallelism().unwrap_or(NonZeroUsize::MIN);
    let draws = Draws { count: args.draws, seed: args.seed, threads: args.threads.unwrap_or_else(all) };
    let shown = input::shown(&args.source.book);
    let progress = Progress::start();
    progress.doing(&format!("drawing for {shown}"));
    let prepared = input::open(&args.source.book).and_then(|package| prepare(&package, &request, &catalogue));
    let prepared = match prepared {
        Ok(prepared) => prepared,
        Err(error) => {
            drop(progress);
            render::problems(terminal, &shown, error.problems());
            if args.document.json {
                let problems: Vec<Found> = error.problems().iter().map(Found::from).collect();
                let document =
                    json!({ "schema": 1, "input": shown, "status": "failed", "problems": problems });
                terminal::print(&format!("{document:#}\n"))?;
            }
            return Ok(Outcome::of(&error));
        }
    };
    let drawn = prepared.draw(&draws, &args.percentiles);
    drop(progress);
    render::problems(terminal, &shown, &prepared.problems);
    let report = drawn.map_err(|error| super::typed(&error, ""))?;
    let text = if args.csv {
        csv(&report)
    } else if args.document.json {
        document(&shown, args, &prepared, &report)
    } else {
        escape(&page(&shown, args, &prepared, &report))
    };
    terminal::print(&text)?;
    Ok(Outcome::Done)
}

fn csv(report: &DrawsReport) -> String {
    let mut text = String::from("draw");
    let parts = Quantity::ALL.into_iter().map(Quantity::name).chain(["rate"]).map(str::to_owned);
    for heading in parts.chain(report.options.iter().map(|option| format!("npv {}", option.name))) {
        text.push(',');
        text.push_str(&quoted(&escape(&heading)));
    }
    text.push('\n');
    for (k, drawn) in report.drawn.rates.iter().enumerate() {
        text.push_str(&(k + 1).to_string());
        let values = report.drawn.values.iter().map(|values| values[k]);
        for number in drawn.parts.into_iter().chain([drawn.rate]).chain(values) {
            text.push(',');
            text.push_str(&shortest(number));
        }
        text.push('\n');
    }
    text
}

/// A cell of comma-separated values.
fn quoted(text: &str) -> String {
    if text.contains(['"', ',', '\n', '\r']) {
        format!("\"{}\"", text.replace('"', "\"\""))
    } else {
        text.to_owned()
    }
}

fn document(input: &str, args: &args::Draws, prepared: &Prepared, report: &DrawsReport) -> String {
    let problems: Vec<Found> = prepared.problems.iter().map(Found::from).collect();
    let part = |part: &Part| json!({ "part": part.quantity.name(), "distribution": part.text, "origin": origin(part) });
    let option = |option: &OptionDraws| {
        json!({
            "option": option.name,
            "baseline": option.baseline,
            "declared": option.declared(),
            "npv": spread(option.spread(), &args.percentiles),
            "absolute": spread(&option.absolute, &args.percentiles),
            "positive": chance(&option.spread().positive),
            "first": chance(&option.first.alone),
            "first_shared": chance(&option.first.shared),
            "histogram": { "edges": option.histogram.edges, "counts": option.histogram.counts },
        })
    };
    let document = json!({
        "schema": 1,
        "input": input,
        "status": "done",
        "draws": args.draws,
        "seed": args.seed,
        "parts": prepared.parts.iter().map(part).collect::<Vec<_>>(),
        "baseline": prepared.baseline(),
        "rate": spread(&report.rate, &args.percentiles),
        "options": report.options.iter().map(option).collect::<Vec<_>>(),
        "caution": hence_core::CAUTION,
        "problems": problems,
    });
    format!("{document:#}\n")
}

fn spread(spread: &Spread, percentiles: &[f64]) -> Value {
    let pairs = percentiles.iter().zip(&spread.percentiles);
    let percentiles: Vec<Value> =
        pairs.map(|(p, value)| json!({ "percentile": p, "value": value })).collect();
    json!({
        "mean": spread.mean,
        "mean_error": spread.mean_error,
        "sd": spread.sd,
        "lowest": spread.lowest,
        "highest": spread.highest,
        "percentiles": percentiles,
    })
}

fn chance(chance: &Chance) -> Value {
    json!({ "count": chance.count, "share": chance.share, "error": chance.error })
}

fn origin(part: &Part) -> String {
    match &part.origin {
        Origin::Given => "as given".to_owned(),
        Origin::Basis(place) => format!("the workbook's basis, {place}"),
        Origin::Unstated => "none stated".to_owned(),
    }
}

fn page(input: &str, args: &args::Draws, prepared: &Prepared, report: &DrawsReport) -> String {
    let mut text = format!(
        "{input}: {} draws, seed {}\n\nOne yearly rate a draw, preference + hazard + elasticity x growth, each part drawn \
         independently of the others:\n",
        grouped(&args.draws.to_string()),
        args.seed
    );
    let parts: Vec<Vec<String>> = prepared
        .parts
        .iter()
        .map(|part| vec![format!("  {}", part.quantity.name()), part.text.clone(), origin(part)])
        .collect();
    text.push_str(&render::left_table(&parts));
    text.push('\n');
    for (names, option) in grouped_options(&report.options) {
        let whose = if names.len() < report.options.len() {
            format!("{}: ", names.join(", "))
        } else {
            String::new()
        };
        text.push_str(&format!("{whose}Base {}; timing {}\n", option.base, option.timing));
    }
    text.push('\n');
    text.push_str(&spreads(args, prepared, report));
    text.push('\n');
    text.push_str(&chances(prepared, report));
    for option in report.options.iter().filter(|option| !option.baseline) {
        text.push_str(&format!("\n{}, {}, share of the draws:\n", option.name, npv_words(prepared)));
        text.push_str(&bars(&option.histogram));
    }
    text.push_str(&format!("\n{}\n", hence_core::CAUTION));
    text
}

/// Options that share base and timing.
fn grouped_options(options: &[OptionDraws]) -> Vec<(Vec<&str>, &OptionDraws)> {
    let mut groups: Vec<(Vec<&str>, &OptionDraws)> = Vec::new();
    for option in options {
        let same = |other: &OptionDraws| other.base == option.base && other.timing == option.timing;
        match groups.iter_mut().find(|(_, other)| same(other)) {
            Some((names, _)) => names.push(&option.name),
            None => groups.push((vec![&option.name], option)),
        }
    }
    groups
}

fn npv_words(prepared: &Prepared) -> String {
    match prepared.baseline() {
        Some(baseline) => format!("NPV over {baseline}"),
        None => "NPV".to_owned(),
    }
}

/// Percentiles and means: of the rate, of each option as it stands, and over the baseline where there is one.
fn spreads(args: &args::Draws, prepared: &Prepared, report: &DrawsReport) -> String {
    let mut head = vec![String::new()];
    head.extend(args.percentiles.iter().map(|p| format!("{}%", shortest(*p))));
    head.extend(["Mean", "Standard error", "Declared basis"].map(String::from));
    let mut rows = vec![head];
    let row = |name: &str, spread: &Spread, declared: Option<f64>, show: fn(f64) -> String| {
        let mut row = vec![name.to_owned()];
        row.extend(spread.percentiles.iter().copied().chain([spread.mean, spread.mean_error]).map(show));
        row.push(declared.map_or_else(|| "-".to_owned(), show));
        row
    };
    rows.push(row("Rate", &report.rate, None, percent));
    rows.push(vec![if prepared.baseline().is_some() { "NPV as it stands" } else { "NPV" }.to_owned()]);
    for option in &report.options {
        let declared = option.declared.map(|declared| declared.0);
        rows.push(row(&format!("  {}", option.name), &option.absolute, declared, money));
    }
    if prepared.baseline().is_some() {
        rows.push(vec![npv_words(prepared)]);
        for option in report.options.iter().filter(|option| !option.baseline) {
            rows.push(row(&format!("  {}", option.name), option.spread(), option.declared(), money));
        }
    }
    render::table(&rows)
}

/// Probabilities with their standard errors; one option alone has no rank.
fn chances(prepared: &Prepared, report: &DrawsReport) -> String {
    let ranked = report.options.len() > 1;
    let tied = report.options.iter().any(|option| option.first.shared.count > 0);
    let mut head = vec![String::new(), format!("{} above 0", npv_words(prepared))];
    head.extend(ranked.then(|| "Ranks first".to_owned()));
    head.extend(tied.then(|| "First with another".to_owned()));
    let mut rows = vec![head];
    let mut bound = false;
    for option in &report.options {
        let mut show = |chance: &Chance| {
            bound |= chance.bound().is_some();
            chance_words(chance)
        };
        let positive = if option.baseline { "-".to_owned() } else { show(&option.spread().positive) };
        let mut row = vec![format!("  {}", option.name), positive];
        row.extend(ranked.then(|| show(&option.first.alone)));
        row.extend(tied.then(|| show(&option.first.shared)));
        rows.push(row);
    }
    let bound = if bound { "; or a bound with 95% confidence" } else { "" };
    format!("Probability (standard error){bound}\n{}", render::table(&rows))
}

/// "62.40% (0.48%)"; where all draws agree, the bound that they leave.
fn chance_words(chance: &Chance) -> String {
    let show = |share: f64| format!("{:.2}%", share * 100.0);
    match chance.bound() {
        Some(bound) if chance.count == 0 => format!("{} (below {})", show(0.0), show(bound)),
        Some(bound) => format!("{} (above {})", show(1.0), show(1.0 - bound)),
        None => format!("{} ({})", show(chance.share), show(chance.error)),
    }
}

/// A bar for each interval, its length by its share.
fn bars(histogram: &Histogram) -> String {
    let total: usize = histogram.counts.iter().sum();
    let most = histogram.counts.iter().copied().max().unwrap_or(1).max(1);
    let mut rows = Vec::new();
    for (pair, &count) in histogram.edges.windows(2).zip(&histogram.counts) {
        rows.push(vec![
            format!("  {}", money(pair[0])),
            format!("to {}", money(pair[1])),
            format!("{:.1}%", 100.0 * count as f64 / total as f64),
            "#".repeat((count * BAR + most / 2) / most),
        ]);
    }
    aligned(&rows)
}

/// Right-aligned columns, the last one aligned on the left.
fn aligned(rows: &[Vec<String>]) -> String {
    let width = |c: usize| rows.iter().map(|row| row[c].chars().count()).max().unwrap_or(0);
    let widths = [width(0), width(1), width(2)];
    let line = |row: &Vec<String>| {
        let cells = (0..3).map(|c| format!("{:>1$}", row[c], widths[c])).collect::<Vec<_>>().join("  ");
        format!("{cells}  {}", row[3]).trim_end().to_owned() + "\n"
    };
    rows.iter().map(line).collect()
}
