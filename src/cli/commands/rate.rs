//! `hence rate`: a Ramsey rate from its parts, with where every figure comes from.

use std::path::Path;
use std::time::{SystemTime, UNIX_EPOCH};

use hence_core::{
    Derivation, ElasticitySource, Figure, FigureKind, GrowthSource, Hazard, RateParts, Stated, TaxBracket,
    parse_number, parse_percentage,
};
use hence_workbook::package::write_atomically;
use hence_workbook::problem::WorkbookError;
use hence_workbook::resolve::{SeriesGrowth, growth_of_series};
use serde_json::{Value, json};

use crate::args::{GrowthBy, Rate};
use crate::input::{self, is_dash};
use crate::json::Found;
use crate::numbers::{percent, shortest};
use crate::terminal::{self, Terminal, escape};
use crate::{Failure, Outcome, render};

/// The offsets at which the first factors are shown.
const SHOWN: [f64; 8] = [1.0, 2.0, 3.0, 10.0, 30.0, 50.0, 100.0, 200.0];

/// Prints the derivation and a rate line; with `--schedule` writes a schedule file.
pub fn run(args: &Rate, terminal: &Terminal) -> Result<Outcome, Failure> {
    let output = args.schedule.as_deref();
    let streams = output.is_some_and(is_dash);
    if streams && args.document.json {
        return Err(Failure::Message(
            "--json and --schedule - both want standard output\nTry: --schedule with a file".into(),
        ));
    }
    let id = output.map(id).transpose()?;
    let series = match args.growth_from.as_deref().map(series).transpose()? {
        None => None,
        Some((book, Ok(series))) => {
            render::problems(terminal, &book, &series.problems);
            Some((book, series))
        }
        Some((book, Err(error))) => return refused(args, terminal, &book, &error),
    };
    let derived = parts(args, series.as_ref())?.derive().map_err(|e| super::typed(&e, ""))?;
    for warning in derived.curve().warnings() {
        terminal.say("warning", &format!("{}: {warning}", derived.spec()));
    }
    let mut file = None;
    if let (Some(path), Some(id)) = (output, id) {
        let year = args.year.unwrap_or_else(this_year);
        let text = derived.schedule(&id, year).map_err(|e| super::typed(&e, ""))?;
        if !streams && let Err(error) = write_atomically(path, text.as_bytes(), args.overwrite.force) {
            render::problems(terminal, &path.display().to_string(), error.problems());
            return Ok(Outcome::of(&error));
        }
        file = Some(text);
    }
    let written = output.filter(|_| !streams).map(|path| path.display().to_string());
    if args.document.json {
        terminal::print(&document(&derived, written.as_deref(), series.as_ref())?)?;
    } else if streams {
        terminal.tell(&text(&derived, None));
    } else {
        terminal::print(&text(&derived, written.as_deref()))?;
    }
    if let Some(file) = file.filter(|_| streams) {
        terminal::print(&file)?;
    }
    Ok(Outcome::Done)
}

/// The end of a run on a workbook that has no series to estimate from.
fn refused(args: &Rate, terminal: &Terminal, book: &str, error: &WorkbookError) -> Result<Outcome, Failure> {
    render::problems(terminal, book, error.problems());
    if args.document.json {
        let problems: Vec<Found> = error.problems().iter().map(Found::from).collect();
        let document = json!({"schema": 1, "line": null, "figures": [], "problems": problems});
        terminal::print(&format!("{document:#}\n"))?;
    }
    Ok(Outcome::of(error))
}

type Read = Result<SeriesGrowth, WorkbookError>;

/// The workbook as it is called, and what its series says.
fn series(text: &str) -> Result<(String, Read), Failure> {
    let Some((book, cells)) = book_and_cells(text) else {
        return Err(Failure::Message(format!(
            "--growth-from {text}: a workbook and its cells are needed, with `!` between\nTry: \
             --growth-from \"plan.xlsx!Data!B2:B40\", or a defined name in place of the cells"
        )));
    };
    let path = Path::new(book);
    Ok((input::shown(path), input::open(path).and_then(|package| growth_of_series(&package, cells))))
}

/// Cuts "plan.xlsx!Data!B2:B40" after the extension, so that folders may hold an exclamation mark, else at the first one.
fn book_and_cells(text: &str) -> Option<(&str, &str)> {
    let lower = text.to_ascii_lowercase();
    let after = [".xlsx!", ".xlsm!"].iter().filter_map(|end| lower.find(end).map(|at| at + end.len())).min();
    let at = after.map_or_else(|| text.find('!'), |after| Some(after - 1))?;
    let (book, cells) = (&text[..at], &text[at + 1..]);
    (!book.is_empty() && !cells.is_empty()).then_some((book, cells))
}

/// What the arguments say.
fn parts(args: &Rate, series: Option<&(String, SeriesGrowth)>) -> Result<RateParts, Failure> {
    fn read<T>(text: &str, parse: impl Fn(&str) -> hence_core::Result<T>) -> Result<T, Failure> {
        parse(text).map_err(|error| super::typed(&error, text))
    }
    let elasticity = match &args.elasticity {
        Some(text) => ElasticitySource::Given(read(text, |text| parse_number("elasticity", text))?),
        None => {
            let brackets: Result<Vec<_>, _> =
                args.taxes.iter().map(|text| read(text, TaxBracket::parse)).collect();
            ElasticitySource::Taxes(brackets?)
        }
    };
    let growth = match (&args.growth, series) {
        (Some(text), _) => GrowthSource::Given(read(text, |text| parse_percentage("growth", text))?),
        (None, Some((book, series))) => GrowthSource::Series {
            estimate: series.estimate,
            name: name(book, series),
            by: match args.growth_by {
                GrowthBy::Trend => hence_core::GrowthBy::Trend,
                GrowthBy::Mean => hence_core::GrowthBy::Mean,
            },
        },
        (None, None) => return Err(Failure::Message("no growth is given\nTry: --growth 2%".into())),
    };
    Ok(RateParts {
        preference: read(&args.preference, |text| parse_percentage("preference", text))?,
        hazard: read(&args.hazard, Hazard::parse)?,
        elasticity,
        growth,
        sd: args.sd.as_deref().map(|text| read(text, Stated::parse_sd)).transpose()?,
        persistence: args
            .persistence
            .as_deref()
            .map(|text| read(text, Stated::parse_persistence))
            .transpose()?,
        log: args.log,
        continuous: args.continuous,
        decimals: args.decimals,
    })
}

/// "plan.xlsx!Data!B2:B40 (1990 to 2028)"; the file without its folder, which is another on another machine.
fn name(book: &str, series: &SeriesGrowth) -> String {
    let file = Path::new(book).file_name().map_or(book.into(), |name| name.to_string_lossy());
    let years = series.years.map_or(String::new(), |(first, last)| format!(" ({first} to {last})"));
    format!("{file}!{}{years}", series.at)
}

/// The id that a schedule file's name gives.
fn id(path: &Path) -> Result<String, Failure> {
    if is_dash(path) {
        return Ok("own-rate".to_owned());
    }
    if path.extension().is_none_or(|e| e != "toml") {
        return Err(Failure::Message(format!(
            "--schedule {}: a schedule is a .toml file\nTry: {}",
            path.display(),
            path.with_extension("toml").display()
        )));
    }
    Ok(path.file_stem().unwrap_or_default().to_string_lossy().into_owned())
}

fn this_year() -> i32 {
    let seconds = SystemTime::now().duration_since(UNIX_EPOCH).map_or(0, |since| since.as_secs());
    hence_workbook::schedules::year_of(seconds)
}

/// A value as people read it.
fn shown(figure: &Figure, value: f64) -> String {
    if figure.share { percent(value) } else { shortest((value * 1e4).round() / 1e4) }
}

fn text(derived: &Derivation, written: Option<&str>) -> String {
    let heading = ["Figure", "Symbol", "Value", "Standard error", "Where it comes from"];
    let mut rows = vec![heading.map(String::from).to_vec()];
    for figure in derived.figures() {
        let indent = if figure.kind == FigureKind::Evidence { "  " } else { "" };
        rows.push(vec![
            format!("{indent}{}", figure.name),
            figure.symbol.to_owned(),
            shown(figure, figure.value),
            figure.error.map_or_else(String::new, |error| shown(figure, error)),
            figure.origin.clone(),
        ]);
    }
    let mut text = render::left_table(&rows);
    text.push('\n');
    for sentence in derived.sentences() {
        text.push_str(&format!("{sentence}\n"));
    }
    let mut rows = vec![["Year", "Factor", "Forward rate", "Mean rate"].map(String::from).to_vec()];
    for row in factors(derived) {
        let rate = |rate: f64| percent(rate);
        rows.push(vec![shortest(row.t), format!("{:.6}", row.factor), rate(row.forward), rate(row.mean)]);
    }
    text.push_str(&format!(
        "\n{}\nForward rates are those of the year that ends there, mean rates those from the base, both compounded \
         yearly.\n{}\n\n{}\n",
        render::table(&rows),
        hence_core::CAUTION,
        derived.spec()
    ));
    if let Some(written) = written {
        text.push_str(&format!(
            "{written}: written; put it into your folder of schedules to call it by name\n"
        ));
    }
    escape(&text)
}

struct Row {
    t: f64,
    factor: f64,
    forward: f64,
    mean: f64,
}

/// The first factors; those that no number can hold are left out, which a warning about the curve goes with.
fn factors(derived: &Derivation) -> Vec<Row> {
    let curve = derived.curve();
    let row = |t: f64| {
        let (factor, forward, mean) = (curve.factor(t)?, curve.forward_rate(t)?, curve.mean_rate(t)?);
        hence_core::Result::Ok(Row { t, factor, forward, mean })
    };
    SHOWN.into_iter().filter_map(|t| row(t).ok()).collect()
}

fn document(
    derived: &Derivation,
    written: Option<&str>,
    series: Option<&(String, SeriesGrowth)>,
) -> Result<String, Failure> {
    let kind = |kind| match kind {
        FigureKind::Part => "part",
        FigureKind::Evidence => "evidence",
        FigureKind::Step => "step",
        FigureKind::Rate => "rate",
    };
    let figures: Vec<Value> = derived
        .figures()
        .iter()
        .map(|f| {
            json!({
                "kind": kind(f.kind), "name": f.name, "symbol": f.symbol, "value": f.value,
                "standard_error": f.error, "origin": f.origin
            })
        })
        .collect();
    let rows: Vec<Value> = factors(derived)
        .iter()
        .map(|r| json!({"t": r.t, "factor": r.factor, "forward_rate": r.forward, "mean_rate": r.mean}))
        .collect();
    let first = |e: hence_core::Error| super::typed(&e, "");
    let curve = derived.curve();
    let problems: Vec<Found> =
        series.map_or(&[][..], |(_, series)| &series.problems).iter().map(Found::from).collect();
    let document = json!({
        "schema": 1,
        "line": derived.spec().to_string(),
        "rate": {
            "yearly": curve.forward_rate(1.0).map_err(first)?,
            "continuous": curve.instantaneous_rate(1.0).map_err(first)?
        },
        "figures": figures,
        "sentences": derived.sentences(),
        "warnings": curve.warnings(),
        "rows": rows,
        "caution": hence_core::CAUTION,
        "schedule": written,
        "problems": problems
    });
    Ok(format!("{document:#}\n"))
}

#[cfg(test)]
mod tests {
    use super::book_and_cells;

    #[test]
    fn a_workbook_and_its_cells_are_told_apart() {
        assert_eq!(book_and_cells("plan.xlsx!Data!B2:B40"), Some(("plan.xlsx", "Data!B2:B40")));
        assert_eq!(book_and_cells("a!b/plan.XLSM!'My data'!B2"), Some(("a!b/plan.XLSM", "'My data'!B2")));
        assert_eq!(book_and_cells("-!consumption"), Some(("-", "consumption")));
        assert_eq!(book_and_cells("plan.xlsx"), None);
        assert_eq!(book_and_cells("plan.xlsx!"), None);
        assert_eq!(book_and_cells("!B2:B40"), None);
    }
}
