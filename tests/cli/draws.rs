//! `hence draws`: a workbook of known figures under distributions whose answers are known.

use std::path::Path;

use crate::books::{Book, plan};
use crate::{code, copy_of, run, stderr, stdout};
use serde_json::Value;

/// Works of 1000 in 2026, 600 a year in 2027 and 2028: 600 (v + v^2) = 1000 at v = 0.884437, a rate of 13.0662%.
const RATE_OF_RETURN: f64 = 0.130_662;

fn npv(rate: f64) -> f64 {
    -1_000.0 + 600.0 / (1.0 + rate) + 600.0 / (1.0 + rate).powi(2)
}

/// A preference alone makes the rate.
const FLAT: [&str; 4] = ["--elasticity", "1", "--growth", "0%"];

fn args<'a>(book: &'a Book, more: &[&'a str]) -> Vec<&'a str> {
    [&["draws", book.arg()], more].concat()
}

fn json(book: &Book, more: &[&str]) -> Value {
    let output = run(&args(book, &[more, &["--json"]].concat()));
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    serde_json::from_str(&stdout(&output)).expect("one document")
}

fn number(value: &Value) -> f64 {
    value.as_f64().unwrap_or_else(|| panic!("{value} is no number"))
}

#[test]
fn the_chance_of_a_positive_value_is_that_of_a_rate_below_the_rate_of_return() {
    let book = plan(&[]);
    let document =
        json(&book, &[&["--preference", "uniform 5% to 20%", "--percentiles", "10,50"], &FLAT[..]].concat());
    assert_eq!((&document["schema"], &document["status"]), (&1.into(), &"done".into()));
    assert_eq!((&document["draws"], &document["seed"]), (&10_000.into(), &1.into()));
    let option = &document["options"][0];
    let (share, error) = (number(&option["positive"]["share"]), number(&option["positive"]["error"]));
    let expected = (RATE_OF_RETURN - 0.05) / 0.15;
    assert!((share - expected).abs() < 4.0 * error, "{share} is not {expected}");
    assert!((error - (share * (1.0 - share) / 10_000.0).sqrt()).abs() < 1e-15);
    assert!((number(&option["declared"]) - npv(0.035)).abs() < 1e-10);
    // The median of a falling function is its value at the median; 4 standard errors are 2% of the draws.
    let [tenth, median] = [0, 1].map(|i| number(&option["npv"]["percentiles"][i]["value"]));
    let at = |p: f64| npv(0.2 - 0.15 * p);
    assert!(at(0.48) < median && median < at(0.52), "{median}");
    assert!(at(0.088) < tenth && tenth < at(0.112), "{tenth}");
    assert_eq!(number(&option["first"]["share"]), 1.0);
    let counts = option["histogram"]["counts"].as_array().unwrap();
    assert_eq!(counts.iter().map(number).sum::<f64>(), 10_000.0);
    book.is_clean(&[]);
}

#[test]
fn values_with_probabilities_give_values_with_probabilities() {
    let book = plan(&[]);
    let document = json(
        &book,
        &[&["--preference", "0.3 at 5%, 0.7 at 20%", "--percentiles", "1,99", "--draws", "5000"], &FLAT[..]]
            .concat(),
    );
    let option = &document["options"][0];
    for (i, rate) in [(0, 0.2), (1, 0.05)] {
        assert!((number(&option["npv"]["percentiles"][i]["value"]) - npv(rate)).abs() < 1e-9);
    }
    let (share, error) = (number(&option["positive"]["share"]), number(&option["positive"]["error"]));
    assert!((share - 0.3).abs() < 4.0 * error, "{share}");
    let mean = 0.3 * npv(0.05) + 0.7 * npv(0.2);
    let (found, error) = (number(&option["npv"]["mean"]), number(&option["npv"]["mean_error"]));
    assert!((found - mean).abs() < 4.0 * error, "{found} is not {mean}");
}

#[test]
fn what_is_left_out_comes_from_the_workbook_and_says_so() {
    let line = "preference 0.5%, hazard 1%, elasticity 1, growth 2%";
    let book = plan(&[("B4", line), ("B5", "flows middle, base end")]);
    let document = json(&book, &["--growth", "normal mean 2% sd 0.5%"]);
    let parts: Vec<[&str; 3]> = document["parts"]
        .as_array()
        .unwrap()
        .iter()
        .map(|part| ["part", "distribution", "origin"].map(|key| part[key].as_str().unwrap()))
        .collect();
    let from = "the workbook's basis, Appraisal!B4 [hence_basis]";
    assert_eq!(
        parts,
        [
            ["preference", "0.5%", from],
            ["hazard", "1%", from],
            ["elasticity", "1", from],
            ["growth", "normal mean 2% sd 0.5%", "as given"],
        ]
    );
    let rate = &document["rate"];
    assert!((number(&rate["mean"]) - 0.035).abs() < 4.0 * number(&rate["mean_error"]));
    assert!((number(&rate["sd"]) - 0.005).abs() < 4.0 * 0.005 / 20_000f64.sqrt());
    let text = stdout(&run(&args(&book, &["--growth", "normal mean 2% sd 0.5%"])));
    for part in [
        "10,000 draws, seed 1",
        "preference + hazard + elasticity x growth",
        from,
        "normal mean 2% sd 0.5%  as given",
        "timing flows middle, base end",
        "Probability (standard error)",
        "NPV above 0",
        "100.00% (above 99.97%)",
        hence_core::CAUTION,
    ] {
        assert!(text.contains(part), "{part} is missing from:\n{text}");
    }
    assert!(!text.contains("Ranks first"), "one option has no rank:\n{text}");
    // Another hazard than the workbook's, in place of it.
    let other = json(&book, &["--growth", "normal mean 2% sd 0.5%", "--hazard", "every 51 years"]);
    assert_eq!(
        (&other["parts"][1]["distribution"], &other["parts"][1]["origin"]),
        (&"2%".into(), &"as given".into())
    );
    assert!((number(&other["rate"]["mean"]) - number(&rate["mean"]) - 0.01).abs() < 1e-12);
}

#[test]
fn a_part_that_nothing_states_is_asked_for() {
    for (basis, given, asked) in [
        ("0.035", &["--growth", "uniform 1% to 3%"][..], "Try: --preference, --elasticity with"),
        (
            "preference 1%, elasticity 2, growth 2% to 50, 1% after",
            &["--preference", "uniform 0% to 1%"][..],
            "Try: --growth with",
        ),
        (
            "preference 1%, elasticity 2, growth 2%; exact",
            &["--preference", "uniform 0% to 1%"][..],
            "Try: --growth with",
        ),
    ] {
        let book = plan(&[("B4", basis)]);
        let output = run(&args(&book, given));
        assert_eq!((code(&output), stdout(&output).as_str()), (1, ""), "{basis}");
        let text = stderr(&output);
        assert!(text.contains("Appraisal!B4 [hence_basis]") && text.contains("(part-missing)"), "{text}");
        assert!(text.contains(asked), "{text}");
        let output = run(&args(&book, &[given, &["--json"]].concat()));
        let document: Value = serde_json::from_str(&stdout(&output)).unwrap();
        assert_eq!(document["status"], "failed");
        let problems = document["problems"].as_array().unwrap();
        assert!(problems.iter().any(|problem| problem["code"] == "part-missing"));
    }
}

#[test]
fn a_workbook_without_a_basis_needs_all_parts() {
    let book = plan(&[("B4", "")]);
    let all = [&["--preference", "uniform 5% to 20%"], &FLAT[..]].concat();
    let document = json(&book, &all);
    assert!(document["options"][0]["declared"].is_null());
    assert!(number(&document["options"][0]["positive"]["share"]) > 0.5);
    let output = run(&args(&book, &all[..4]));
    assert_eq!(code(&output), 1);
    assert!(stderr(&output).contains("Appraisal!B4 [hence_basis]"), "{}", stderr(&output));
    // A basis that is there and wrong is not passed over.
    let output = run(&args(&plan(&[("B4", "35")]), &all));
    assert_eq!(code(&output), 1);
    assert!(stderr(&output).contains("rate-range"), "{}", stderr(&output));
}

#[test]
fn the_same_bytes_for_any_number_of_threads_and_every_run() {
    let (_folder, path) = copy_of("mine-drainage.xlsx");
    let path = path.to_str().unwrap();
    let parts = ["--preference", "uniform 0% to 1.5%", "--elasticity", "normal mean 1.5 sd 0.3"];
    let growth = ["--growth", "triangular 1%, 1.5%, 2.5%"];
    let of = |more: &[&str]| {
        let output = run(&[&["draws", path], &parts[..], &growth[..], more].concat());
        assert_eq!(code(&output), 0, "{}", stderr(&output));
        stdout(&output)
    };
    for form in [&[][..], &["--json"][..], &["--csv", "--draws", "1000"][..]] {
        let one = of(&[form, &["--threads", "1"]].concat());
        for threads in [&["--threads", "2"][..], &["--threads", "7"][..], &[][..], &["--threads", "1"][..]] {
            assert!(of(&[form, threads].concat()) == one, "{form:?} {threads:?}");
        }
        assert!(of(&[form, &["--seed", "2"]].concat()) != one, "{form:?}");
    }
    let document: Value = serde_json::from_str(&of(&["--json"])).unwrap();
    let options = document["options"].as_array().unwrap();
    assert_eq!((options.len(), &document["baseline"]), (4, &"Do nothing".into()));
    let alone: f64 = options.iter().map(|option| number(&option["first"]["share"])).sum();
    assert!((alone - 1.0).abs() < 1e-12, "{alone}");
    // Nothing is above nothing.
    assert_eq!((number(&options[0]["npv"]["highest"]), number(&options[0]["positive"]["share"])), (0.0, 0.0));
    let text = of(&[]);
    assert!(text.contains("NPV over Do nothing") && text.contains("Ranks first"), "{text}");
}

#[test]
fn every_draw_as_comma_separated_values() {
    let book = plan(&[]);
    let given = ["--preference", "uniform 0% to 3%", "--hazard", "0.5%", "--elasticity", "uniform 1 to 2"];
    let output = run(&args(
        &book,
        &[&given[..], &["--growth", "uniform -1% to 3%", "--draws", "250", "--csv"]].concat(),
    ));
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    let text = stdout(&output);
    let mut lines = text.lines();
    let name = Path::new(book.arg()).file_stem().unwrap().to_str().unwrap().to_owned();
    let head = lines.next().unwrap();
    assert!(head.starts_with("draw,preference,hazard,elasticity,growth,rate,npv "), "{head} of {name}");
    let rows: Vec<Vec<f64>> =
        lines.map(|line| line.split(',').map(|cell| cell.parse().unwrap()).collect()).collect();
    assert_eq!(rows.len(), 250);
    for (k, row) in rows.iter().enumerate() {
        let [draw, preference, hazard, elasticity, growth, rate, value] = row[..] else { panic!("{row:?}") };
        assert_eq!((draw, hazard), (k as f64 + 1.0, 0.005));
        assert!((0.0..=0.03).contains(&preference) && (1.0..=2.0).contains(&elasticity));
        assert!((preference + hazard + elasticity * growth - rate).abs() < 1e-16);
        assert!((value - npv(rate)).abs() < 1e-9, "{value} at {rate}");
    }
}

#[test]
fn what_cannot_be_drawn_says_why() {
    let book = plan(&[]);
    let refused = |more: &[&str], parts: &[&str]| {
        let output = run(&args(&book, more));
        assert_eq!((code(&output), stdout(&output).as_str()), (2, ""), "{more:?}: {}", stderr(&output));
        let text = stderr(&output);
        for part in parts {
            assert!(text.contains(part), "{part} is missing from: {text}");
        }
    };
    let wide = [&["--preference", "normal mean 0% sd 30%"], &FLAT[..]].concat();
    refused(
        &wide,
        &[
            "preference: preference is outside its range in ",
            " of 10,000 draws",
            "above -50% to 100%",
            "within",
        ],
    );
    let high = [&["--preference", "0.5 at 90%, 0.5 at 1%", "--hazard", "20%"], &FLAT[..]].concat();
    refused(&high, &["rate: the rate is outside its range in ", "110% in draw"]);
    refused(&["--growth", "normal mean 2% sd 0,5%"], &["syntax", "normal mean 2% sd 0.5%", "^"]);
    refused(&["--elasticity", "normal mean 1.5"], &["expected `sd`, found the end", "^"]);
    refused(&["--growth", "uniform 3% to 1%"], &["the highest value, 1%, is not above the lowest, 3%"]);
    let fine = [&["--preference", "uniform 1% to 2%"], &FLAT[..]].concat();
    refused(&[&fine[..], &["--percentiles", "5,101"]].concat(), &["a percentile is 101, allowed 0 to 100"]);
    refused(&[&fine[..], &["--draws", "0"]].concat(), &["0 draws, allowed 1 to 10,000,000"]);
    refused(&[&fine[..], &["--threads", "0"]].concat(), &["--threads"]);
    refused(&[&fine[..], &["--csv", "--json"]].concat(), &["--csv"]);
    let missing = run(&["draws", "no-such.xlsx"]);
    assert_eq!((code(&missing), stdout(&missing).len()), (2, 0));
}

#[test]
fn values_without_a_distribution_warn() {
    let book = plan(&[]);
    let output = run(&args(&book, &[&["--preference", "-1%"], &FLAT[..]].concat()));
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    assert!(stderr(&output).contains("nothing-uncertain"), "{}", stderr(&output));
    assert!(stdout(&output).contains("218.24"), "600/0.99 + 600/0.9801 - 1000:\n{}", stdout(&output));
}
