//! `hence rate`: rates from their parts, with the origin of every figure.

use serde_json::Value;

use crate::books::{Book, typed};
use crate::{code, run, run_with, stderr, stdout};

/// Runs it, and gives what it printed.
fn rate(args: &[&str]) -> String {
    let output = run(&[&["rate"], args].concat());
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    stdout(&output)
}

fn json(args: &[&str]) -> Value {
    serde_json::from_str(&rate(&[args, &["--json"]].concat())).expect("JSON")
}

/// The message of a run that could not go on.
fn refused(args: &[&str]) -> String {
    let output = run(&[&["rate"], args].concat());
    assert_eq!(code(&output), 2, "{}", stdout(&output));
    assert!(stdout(&output).is_empty());
    stderr(&output)
}

fn near(found: &Value, expected: f64) {
    let found = found.as_f64().expect("a number");
    assert!((found - expected).abs() < 1e-14, "{found} and {expected}");
}

/// HM Treasury, The Green Book (2003), Annex 6: 0.5% + 1% + 1 x 2% = 3.5%.
const GREEN_BOOK: [&str; 8] =
    ["--preference", "0.5%", "--hazard", "1%", "--elasticity", "1", "--growth", "2%"];

#[test]
fn a_published_rate_from_its_parts() {
    let text = rate(&GREEN_BOOK);
    for part in [
        "pure time preference",
        "as given",
        "rho 1.5% + eta g 2% (1 x 2%) = 3.5% a year, compounded yearly.",
        "rate, compounded continuously   r       3.4401%",
        "0.966184",
        "set by the body",
    ] {
        assert!(text.contains(part), "{part} is missing from:\n{text}");
    }
    let line = "preference 0.5%, hazard 1%, elasticity 1, growth 2%";
    assert_eq!(text.lines().last(), Some(line));
    let curve = stdout(&run(&["curve", line, "--at", "1", "--csv"]));
    assert!(curve.ends_with("1,0.966183574879227,0.035,0.035\n"), "{curve}");
    let document = json(&GREEN_BOOK);
    assert_eq!((&document["schema"], &document["line"]), (&1.into(), &line.into()));
    near(&document["rate"]["yearly"], 0.035);
    near(&document["rate"]["continuous"], 1.035f64.ln());
    assert!(
        document["figures"].as_array().unwrap().iter().all(|f| !f["origin"].as_str().unwrap().is_empty())
    );
    near(&document["rows"][0]["factor"], 1.0 / 1.035);
}

/// 1% + 2 x 2% less 2 x 3 x 0.036^2/2 in yearly terms; of log growth less 4 x 0.036^2/2.
#[test]
fn uncertain_growth_lowers_the_rate() {
    let spread = ["--preference", "1%", "--elasticity", "2", "--growth", "2%", "--sd", "3.6%"];
    near(&json(&spread)["rate"]["yearly"], 0.046112);
    let with = |more: &[&'static str]| [&spread, more].concat();
    near(&json(&with(&["--continuous"]))["rate"]["continuous"], 0.046112);
    near(&json(&with(&["--log"]))["rate"]["continuous"], 0.047408);
    let persistent = with(&["--persistence", "0.7"]);
    let text = rate(&persistent);
    assert!(text.contains("in the long run the rate is 2.12%"), "{text}");
    assert!(text.contains("the growth given is taken as the mean of yearly log growth"), "{text}");
    let line = "preference 1%, elasticity 2, log growth 2% sd 3.6% persistence 0.7";
    assert_eq!(text.lines().last(), Some(line));
    let rows = json(&persistent)["rows"].clone();
    let forward: Vec<f64> =
        rows.as_array().unwrap().iter().map(|row| row["forward_rate"].as_f64().unwrap()).collect();
    assert!(forward.is_sorted_by(|a, b| a >= b), "{forward:?}");
    // Uncertainty that grows beyond all bounds is said, and what no number can hold is left out.
    let wild = run(&[&["rate"], &with(&["--persistence", "0.99"])[..]].concat());
    assert_eq!(code(&wild), 0);
    assert!(stderr(&wild).contains("far factors rise"), "{}", stderr(&wild));
}

#[test]
fn hazards_and_taxes_are_turned_into_rates() {
    let with = |hazard: &str, more: &[&str]| {
        json(
            &[&["--preference", "0%", "--hazard", hazard, "--elasticity", "1", "--growth", "0%"], more]
                .concat(),
        )
    };
    near(&with("probability 1%", &[])["rate"]["yearly"], 0.01 / 0.99);
    near(&with("every 100 years", &[])["rate"]["yearly"], 1.0 / 99.0);
    near(&with("every 100 years", &["--continuous"])["rate"]["continuous"], 0.01);
    let taxes = |brackets: &[&str]| {
        let mut args = vec!["--preference", "0%", "--growth", "1%"];
        args.extend(brackets.iter().flat_map(|bracket| ["--elasticity-from-tax", bracket]));
        json(&args)
    };
    // By equal absolute sacrifice ln(0.6)/ln(0.75); three times as many pay in proportion.
    let eta = 0.6f64.ln() / 0.75f64.ln();
    near(&taxes(&["40%,25%"])["rate"]["yearly"], 0.01 * eta);
    let two = taxes(&["0.4,0.25,1", "30%,30%,3"]);
    near(&two["rate"]["yearly"], 0.01 * (eta + 3.0) / 4.0);
    let evidence: Vec<&Value> =
        two["figures"].as_array().unwrap().iter().filter(|f| f["kind"] == "evidence").collect();
    assert_eq!(evidence.len(), 2);
    assert_eq!(evidence[0]["origin"], "ln(1 - 40%)/ln(1 - 25%), marginal and average rate of tax");
}

/// Years 1996 to 2000 in B42 to B46 and consumption beside them: growth of e^0.01, e^0.03, e^0.02, e^0.02.
fn series(more: &[(&str, &str)]) -> Book {
    let logs: [f64; 5] = [0.0, 0.01, 0.04, 0.06, 0.08];
    let texts: Vec<(String, String)> = (0..5)
        .flat_map(|i| {
            let (row, year) = (i + 42, 1996 + i);
            [(format!("B{row}"), year.to_string()), (format!("C{row}"), (1000.0 * logs[i].exp()).to_string())]
        })
        .collect();
    let mut cells: Vec<(&str, &str)> = texts.iter().map(|(at, text)| (at.as_str(), text.as_str())).collect();
    cells.extend(more);
    typed(&cells)
}

const REST: [&str; 4] = ["--preference", "1%", "--elasticity", "2"];

fn from_series(book: &Book, cells: &str, more: &[&str]) -> std::process::Output {
    let from = format!("{}!{cells}", book.arg());
    run(&[&["rate"], &REST[..], &["--growth-from", &from], more].concat())
}

#[test]
fn growth_is_estimated_from_a_series() {
    let book = series(&[]);
    let output = from_series(&book, "Appraisal!B42:C46", &["--json"]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    let document: Value = serde_json::from_str(&stdout(&output)).unwrap();
    // Slope of 0, 0.01, 0.04, 0.06, 0.08 on -2 to 2: (0 - 0.01 + 0.06 + 0.16)/10.
    near(&document["rate"]["yearly"], 0.01 + 2.0 * 0.021f64.exp_m1());
    let figure = |name: &str| {
        let figures = document["figures"].as_array().unwrap();
        figures.iter().find(|figure| figure["name"] == name).unwrap_or_else(|| panic!("no {name}")).clone()
    };
    near(&figure("log-linear trend")["value"], 0.021);
    near(&figure("mean of yearly log growth")["value"], 0.02);
    near(&figure("geometric mean growth")["value"], 0.02f64.exp_m1());
    // Departures -0.01, 0.01, 0, 0.
    near(&figure("standard deviation of yearly log growth")["value"], (0.0002f64 / 3.0).sqrt());
    near(&figure("mean of yearly log growth")["standard_error"], (0.0002f64 / 3.0).sqrt() / 2.0);
    near(&figure("persistence of yearly log growth")["value"], -0.5);
    let origin = figure("growth of consumption")["origin"].as_str().unwrap().to_owned();
    assert!(origin.ends_with("of the 5 values of plan.xlsx!Appraisal!B42:C46 (1996 to 2000)"), "{origin}");

    let estimated =
        ["--growth-by", "mean", "--sd", "estimated", "--persistence", "estimated", "--decimals", "3"];
    let text = stdout(&from_series(&book, "Appraisal!C42:C46", &estimated));
    // The shock: 0.8165% x sqrt(1 - 0.25).
    let line = "preference 1%, elasticity 2, log growth 2% sd 0.707% persistence -0.5";
    assert_eq!(text.lines().last(), Some(line));
    // Through a defined name, and from standard input: the years 2026 to 2086 are a series, too.
    let from = ["--growth-from", "-!hence_years", "--growth-by", "mean", "--json"];
    let output = run_with(&[&["rate"], &REST[..], &from].concat(), book.bytes());
    let document: Value = serde_json::from_str(&stdout(&output)).expect("JSON");
    near(&document["rate"]["yearly"], 0.01 + 2.0 * ((2086.0f64 / 2026.0).powf(1.0 / 60.0) - 1.0));
    book.is_clean(&[]);
}

#[test]
fn a_series_with_a_fault_is_refused_with_its_cell() {
    for (cell, content, cells, message) in [
        (
            "C44",
            "n/a",
            "Appraisal!C42:C46",
            "Appraisal!C44: holds the text `n/a`, allowed is a number (text-value)",
        ),
        ("C44", "1,000", "Appraisal!C42:C46", "Appraisal!C44: looks like a number"),
        ("C44", "0", "Appraisal!C42:C46", "Appraisal!C44: consumption is 0, which has no growth"),
        (
            "C44",
            "=1/0>none",
            "Appraisal!C42:C46",
            "Appraisal!C44: the formula has no stored result (no-result)",
        ),
        ("B44", "1999", "Appraisal!B42:C46", "Appraisal!B44: the year after 1997 is 1999"),
        ("B44", "soon", "Appraisal!B42:C46", "Appraisal!B44: holds the text `soon`, which is no year"),
        (
            "A1",
            "1",
            "Appraisal!C42:C47",
            "Appraisal!C47: is blank, and growth from year to year needs a value",
        ),
        ("A1", "1", "Appraisal!C42:C44", "Appraisal!C42:C44: the series has 3 values"),
        ("A1", "1", "Appraisal!A42:C46", "has 5 rows and 3 columns"),
        ("A1", "1", "Appraisal!C:C", "covers a whole column"),
        ("A1", "1", "hence_pv", "Appraisal!B29:BJ29 [hence_pv]: is blank"),
        ("A1", "1", "hence_income", "`hence_income` is neither cells of this workbook nor one of its names"),
    ] {
        let book = series(&[(cell, content)]);
        let output = from_series(&book, cells, &[]);
        assert_eq!(code(&output), 1, "{cells}: {}", stderr(&output));
        assert!(stderr(&output).contains(message), "{message} is missing from {}", stderr(&output));
        assert!(stdout(&output).is_empty());
        let document: Value =
            serde_json::from_str(&stdout(&from_series(&book, cells, &["--json"]))).expect("JSON");
        assert_eq!(document["line"], Value::Null);
        assert_eq!(document["problems"][0]["severity"], "error");
    }
    let absent = from_series(&series(&[]), "x", &[]);
    assert_eq!(code(&absent), 1);
    let output = run(&[&["rate"], &REST[..], &["--growth-from", "/no/such/plan.xlsx!Data!A1:A9"]].concat());
    assert_eq!(code(&output), 2, "{}", stderr(&output));
    assert!(refused(&[&REST[..], &["--growth-from", "plan.xlsx"]].concat()).contains("with `!` between"));
}

#[test]
fn a_schedule_file_of_ones_own_is_called_by_its_name() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("ostrey-rate.toml");
    let (dir, file) = (folder.path().to_str().unwrap(), path.to_str().unwrap());
    let schedule = ["--schedule", file, "--year", "2026"];
    let text = rate(&[&GREEN_BOOK[..], &schedule].concat());
    assert!(text.contains("ostrey-rate.toml: written"), "{text}");
    let shown = stdout(&run(&["schedules", "ostrey-rate", "--schedules", dir]));
    for part in ["preference 0.5%, hazard 1%, elasticity 1, growth 2%", "hazard (L) 1%: as given", "2026"] {
        assert!(shown.contains(part), "{part} is missing from:\n{shown}");
    }
    let curve = run(&["curve", "ostrey-rate", "--schedules", dir, "--at", "1", "--csv"]);
    assert!(stdout(&curve).ends_with("1,0.966183574879227,0.035,0.035\n"), "{}", stderr(&curve));
    // An existing file is kept, unless it is to be replaced.
    let before = std::fs::read(&path).unwrap();
    let again = run(&[&["rate"], &GREEN_BOOK[..], &schedule].concat());
    assert_eq!(code(&again), 2);
    assert!(stderr(&again).contains("output-exists"), "{}", stderr(&again));
    rate(&[&GREEN_BOOK[..], &schedule, &["--force"]].concat());
    assert_eq!(std::fs::read(&path).unwrap(), before, "the same parts give the same bytes");
    // To standard output: the file alone, the derivation beside it.
    let output = run(&[&["rate"], &GREEN_BOOK[..], &["--schedule", "-", "--year", "2026"]].concat());
    let streamed = stdout(&output);
    assert_eq!(streamed, String::from_utf8(before).unwrap().replace("ostrey-rate", "own-rate"));
    assert!(stderr(&output).contains("3.5% a year"), "{}", stderr(&output));
    for name in ["Ostrey.toml", "ostrey.txt"] {
        let file = folder.path().join(name);
        let message = refused(&[&GREEN_BOOK[..], &["--schedule", file.to_str().unwrap()]].concat());
        assert!(message.contains(name.split('.').next().unwrap()), "{message}");
        assert!(!file.exists());
    }
}

#[test]
fn slips_are_pointed_at() {
    let with = |flag: &str, text: &str| {
        let mut args: Vec<&str> = GREEN_BOOK.to_vec();
        match args.iter().position(|arg| *arg == flag) {
            Some(at) => args[at + 1] = text,
            None => args.extend([flag, text]),
        }
        refused(&args)
    };
    for (flag, text, part) in [
        ("--preference", "0.5", "Try: `50%` if 0.5 is meant as a fraction, else `0.5%`"),
        ("--preference", "0,5%", "Try: 0.5%"),
        ("--preference", "150%", "preference is 150% (stored 1.5), allowed above -50% to 100% (rate-range)"),
        ("--hazard", "evry 100 years", "Try: `every`"),
        ("--hazard", "probability 100%", "probability is 1, allowed 0 to below 1"),
        ("--elasticity", "40", "elasticity is 40, allowed 0 to 20"),
        ("--growth", "two", "growth: expected a rate"),
        ("--sd", "estimated", "growth is given without a series"),
    ] {
        let message = with(flag, text);
        assert!(message.contains(part), "{flag} {text}: {part} is missing from\n{message}");
    }
    assert!(with("--elasticity-from-tax", "40%,25%").contains("cannot be used with"));
    assert!(with("--persistence", "0.7").contains("--sd"));
    assert!(refused(&["--preference", "1%", "--elasticity", "1"]).contains("--growth"));
    assert!(refused(&["--growth", "-1%", "--elasticity", "1"]).contains("--preference"));
    let tax = ["--preference", "1%", "--growth", "1%", "--elasticity-from-tax"];
    assert!(refused(&[&tax[..], &["40,25"]].concat()).contains("0.4 for 40%"));
    assert!(refused(&[&tax[..], &["40%"]].concat()).contains("expected `,` and the average rate"));
}
