//! `hence compare`: options under several bases, switching values, and the forms in which they are told.

use serde_json::Value;

use crate::books::{cell, plan};
use crate::{code, copy_of, run, run_with, stderr, stdout};

const RAMSEY: &str = "preference 1%, elasticity 1.5, growth 2%";

fn json(output: &std::process::Output) -> Value {
    serde_json::from_str(&stdout(output)).expect("one JSON document")
}

fn compared(book: &str, against: &[&str]) -> Value {
    let mut args = vec!["compare", book, "--json"];
    args.extend(against.iter().flat_map(|line| ["--against", line]));
    let output = run(&args);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    json(&output)
}

fn values(document: &Value, option: &str, against: Option<&str>, parameter: &str) -> Vec<f64> {
    let entries = document["switching"].as_array().unwrap();
    let wanted: Vec<&Value> = entries
        .iter()
        .filter(|entry| {
            entry["option"] == option
                && entry["against"].as_str() == against
                && entry["parameter"] == parameter
        })
        .collect();
    assert_eq!(wanted.len(), 1, "{option}, {against:?}, {parameter}");
    wanted[0]["values"].as_array().unwrap().iter().map(|x| x.as_f64().unwrap()).collect()
}

fn close(found: &[f64], due: &[f64]) {
    assert_eq!(found.len(), due.len(), "{found:?}, due {due:?}");
    for (found, due) in found.iter().zip(due) {
        assert!((found - due).abs() <= 1e-12 * (1.0 + due.abs()), "{found} is not {due}");
    }
}

/// Works of 1000 in 2026, benefits of 600 in 2027 and 2028: the value is zero where 1000 q^2 = 600 q + 600, q = 1 + rate.
#[test]
fn one_option_has_its_switching_values() {
    let book = plan(&[]);
    let document = compared(book.arg(), &[RAMSEY]);
    let option = document["results"][0]["option"].as_str().unwrap();
    let rate = (600.0 + (600.0f64 * 600.0 + 4.0 * 1000.0 * 600.0).sqrt()) / 2000.0 - 1.0;
    close(&values(&document, option, None, "rate"), &[rate]);
    close(&values(&document, option, None, "preference"), &[rate - 0.03]);
    close(&values(&document, option, None, "elasticity"), &[(rate - 0.01) / 0.02]);
    close(&values(&document, option, None, "growth"), &[(rate - 0.01) / 1.5]);
    let benefits = 600.0 / 1.035 + 600.0 / (1.035 * 1.035);
    let streams: Vec<&str> = document["switching"]
        .as_array()
        .unwrap()
        .iter()
        .filter_map(|entry| entry["parameter"].as_str()?.strip_prefix("multiplier:"))
        .collect();
    assert_eq!(streams.len(), 2, "{streams:?}");
    close(&values(&document, option, None, &format!("multiplier:{}", streams[0])), &[benefits / 1000.0]);
    close(&values(&document, option, None, &format!("multiplier:{}", streams[1])), &[1000.0 / benefits]);
    for result in document["results"].as_array().unwrap() {
        assert_eq!(result["rank"], 1);
    }
    // The second basis by hand: 1% + 1.5 x 2% = 4%.
    assert_eq!(document["results"][1]["basis"], RAMSEY);
    let at_four = 600.0 / 1.04 + 600.0 / (1.04 * 1.04) - 1000.0;
    assert!((document["results"][1]["npv"].as_f64().unwrap() - at_four).abs() < 1e-9);
    book.is_clean(&[]);
}

#[test]
fn the_mine_has_two_rates_and_an_empty_list_where_there_is_none() {
    let book = plan(&[("B9", "350"), ("C18", "950"), ("D9", "620"), ("D18", "0")]);
    let document = compared(book.arg(), &[]);
    let option = document["results"][0]["option"].as_str().unwrap();
    let found = values(&document, option, None, "rate");
    assert_eq!(
        found.iter().map(|r| format!("{:.4}%", r * 100.0)).collect::<Vec<_>>(),
        ["9.1797%", "62.2488%"]
    );
    for parameter in ["preference", "elasticity", "growth"] {
        close(&values(&document, option, None, parameter), &[]);
    }
    let loss = plan(&[("C18", "1"), ("D18", "1")]);
    let document = compared(loss.arg(), &[RAMSEY]);
    let option = document["results"][0]["option"].as_str().unwrap();
    // 1000 q^2 = q + 1 has its root at a rate below -90%.
    for parameter in ["rate", "preference", "elasticity", "growth"] {
        close(&values(&document, option, None, parameter), &[]);
    }
}

/// Every result is what `fill` gives on that basis, and ranks follow the increments over the baseline.
#[test]
fn the_sample_ranks_as_fill_values_it() {
    let (folder, book) = copy_of("mine-drainage.xlsx");
    let book = book.to_str().unwrap();
    let document = compared(book, &["3%", "uk-2003", RAMSEY]);
    assert_eq!(document["schema"], 1);
    let results = document["results"].as_array().unwrap();
    assert_eq!(results.len(), 16);
    for (k, line) in ["3%", "uk-2003", RAMSEY].into_iter().enumerate() {
        let out = folder.path().join(format!("{k}.xlsx"));
        let filled = run(&["fill", book, "--basis", line, "--json", "--out", out.to_str().unwrap()]);
        let filled = json(&filled);
        let filled = filled["books"][0]["options"].as_array().unwrap();
        let ours = &results[4 * (k + 1)..4 * (k + 2)];
        for (own, filled) in ours.iter().zip(filled) {
            assert_eq!((&own["basis"], &own["option"]), (&Value::from(line), &filled["option"]));
            assert_eq!((&own["npv"], &own["ratio"]), (&filled["npv"], &filled["ratio"]));
            let above = |other: &&Value| other["npv"].as_f64().unwrap() > own["npv"].as_f64().unwrap();
            assert_eq!(own["rank"], 1 + ours.iter().filter(above).count());
        }
    }
    let options: Vec<&str> = results[..4].iter().map(|result| result["option"].as_str().unwrap()).collect();
    let streams = |option: &str| {
        let entries = document["switching"].as_array().unwrap().iter();
        let own = entries.filter(|entry| entry["option"] == option && entry["against"].is_null());
        own.filter(|entry| entry["parameter"].as_str().unwrap().starts_with("multiplier:")).count()
    };
    let due: usize = options.iter().map(|option| 4 * (4 + streams(option))).sum();
    assert_eq!(
        document["switching"].as_array().unwrap().len(),
        due,
        "an entry for every option and parameter"
    );
}

/// Put back through `fill`, a switching value makes two options equal, or one worth nothing over the baseline.
#[test]
fn switching_values_put_back_give_zero() {
    let (folder, book) = copy_of("mine-drainage.xlsx");
    let book = book.to_str().unwrap();
    let line = "preference 1%, elasticity 1.5, growth 2% to 50, 1% after";
    let document = compared(book, &[line]);
    let with = |parameter: &str, x: f64| match parameter {
        "rate" => format!("{}%", x * 100.0),
        "preference" => format!("preference {}%, elasticity 1.5, growth 2% to 50, 1% after", x * 100.0),
        "elasticity" => format!("preference 1%, elasticity {x}, growth 2% to 50, 1% after"),
        _ => {
            let (first, then) = (x * 100.0, x * 100.0 - 1.0);
            format!("preference 1%, elasticity 1.5, growth {first}% to 50, {then}% after")
        }
    };
    let mut seen = 0;
    for entry in document["switching"].as_array().unwrap() {
        let parameter = entry["parameter"].as_str().unwrap();
        let (option, against) = (entry["option"].as_str().unwrap(), entry["against"].as_str());
        if parameter.starts_with("multiplier") || !matches!(option, "Settling ponds") {
            continue;
        }
        for x in entry["values"].as_array().unwrap() {
            let basis = with(parameter, x.as_f64().unwrap());
            let out = folder.path().join("put-back.xlsx");
            let filled =
                run(&["fill", book, "--basis", &basis, "--json", "--force", "--out", out.to_str().unwrap()]);
            if code(&filled) != 0 {
                // A line states less than the search covers: here growth that makes rates above 100%.
                assert!(x.as_f64().unwrap() > 0.5, "{basis}: {}", stderr(&filled));
                continue;
            }
            let filled = json(&filled);
            let options = filled["books"][0]["options"].as_array().unwrap();
            let find = |name: &str| options.iter().find(|found| found["option"] == name).unwrap();
            let npv = |name: &str| find(name)["npv"].as_f64().unwrap();
            let gross: f64 = [option]
                .into_iter()
                .chain(against)
                .map(|name| {
                    find(name)["pv_benefits"].as_f64().unwrap().abs()
                        + find(name)["pv_costs"].as_f64().unwrap()
                })
                .sum();
            let net = npv(option) - against.map_or(0.0, npv);
            assert!(net.abs() <= 1e-9 * gross, "{option}, {against:?}, {basis}: {net} of {gross}");
            seen += 1;
        }
    }
    assert!(seen >= 12, "{seen}");
}

#[test]
fn the_declared_basis_and_its_companion_take_part() {
    let book = plan(&[("B4", "uk-2018")]);
    let document = compared(book.arg(), &["uk-2018", "3.5%", "0.035"]);
    let bases: Vec<(&str, &str)> = document["bases"]
        .as_array()
        .unwrap()
        .iter()
        .map(|basis| (basis["why"].as_str().unwrap(), basis["basis"].as_str().unwrap()))
        .collect();
    // One that takes part already is not told twice.
    assert_eq!(bases, [("declared", "uk-2018"), ("companion", "uk-2018-reduced"), ("against", "3.5%")]);
}

#[test]
fn the_best_option_changes_where_it_is_said_to() {
    let (_folder, book) = copy_of("mine-drainage.xlsx");
    let document = compared(book.to_str().unwrap(), &[]);
    let changes = document["changes"].as_array().unwrap();
    assert!(!changes.is_empty());
    for change in changes {
        let at = change["value"].as_f64().unwrap();
        for (rate, best) in [(at - 1e-4, &change["below"]), (at + 1e-4, &change["above"])] {
            let near = compared(book.to_str().unwrap(), &[&format!("{}%", rate * 100.0)]);
            assert_eq!(near["bases"][1]["best"], *best, "{change}");
        }
    }
}

#[test]
fn text_says_what_matters() {
    let (_folder, book) = copy_of("mine-drainage.xlsx");
    let output = run(&["compare", book.to_str().unwrap(), "--against", "3%", RAMSEY, "-0.5%"]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    let text = stdout(&output);
    for part in [
        "(declared)",
        "D  -0.5% (against)",
        "Net present value over Do nothing, with its rank",
        "Ratio of benefits to costs",
        "Where the best option changes",
        "Switching values (rate -50% to 100%, preference",
        "Multiplier of a stream at which the option equals Do nothing",
        "set by the body that funds or reviews",
    ] {
        assert!(text.contains(part), "{part} is missing from:\n{text}");
    }
}

#[test]
fn csv_is_one_table() {
    let book = plan(&[]);
    let output = run(&["compare", book.arg(), "--against", RAMSEY, "--csv"]);
    assert_eq!(code(&output), 0);
    let text = stdout(&output);
    let lines: Vec<&str> = text.lines().collect();
    assert_eq!(lines[0], "kind,option,basis,npv,ratio,rank,against,parameter,value,note");
    assert!(lines[2].contains(&format!("\"{RAMSEY}\"")), "{}", lines[2]);
    // Two results, four parameters and two streams, each with one value.
    assert_eq!(lines.len(), 1 + 2 + 6, "{text}");
    let fields = |line: &str| {
        let mut quoted = false;
        1 + line
            .chars()
            .filter(|c| {
                quoted ^= *c == '"';
                *c == ',' && !quoted
            })
            .count()
    };
    assert!(lines.iter().all(|line| fields(line) == 10), "{text}");
}

#[test]
fn tables_are_written_into_a_workbook() {
    let (folder, book) = copy_of("mine-drainage.xlsx");
    let book = book.to_str().unwrap().to_owned();
    let out = folder.path().join("compared.xlsx");
    let arg = out.to_str().unwrap();
    let first = run(&["compare", &book, "--against", "3%", "--out", arg]);
    assert_eq!(code(&first), 0, "{}", stderr(&first));
    assert!(stdout(&first).starts_with(&format!("{book} -> {arg}")), "{}", stdout(&first));
    let bytes = std::fs::read(&out).unwrap();
    let refused = run(&["compare", &book, "--against", "3%", "--out", arg]);
    assert_eq!(code(&refused), 2);
    assert!(stderr(&refused).contains("(output-exists)"), "{}", stderr(&refused));
    assert_eq!(code(&run(&["compare", &book, "--against", "3%", "--out", arg, "--force"])), 0);
    assert!(std::fs::read(&out).unwrap() == bytes, "same input, same bytes");
    let document = compared(&book, &["3%"]);
    // The second column holds the declared basis, the third the other; the options stand below.
    let found = (0..40).map(|row| (cell(&out, "Compare", &format!("A{}", row + 1)), row + 1));
    let row =
        found.filter(|(cell, _)| cell.value == hence_workbook::reading::Value::Text("Lime plant".into()));
    let row = row.map(|(_, row)| row).next().expect("the option's row");
    let npv = document["results"][6]["npv"].as_f64().unwrap();
    assert_eq!(document["results"][6]["option"], "Lime plant");
    assert_eq!(crate::books::number(&out, "Compare", &format!("C{row}")), npv);
    // To standard output, the report goes to standard error.
    let piped = run(&["compare", &book, "--against", "3%", "--out", "-"]);
    assert_eq!(code(&piped), 0);
    assert!(piped.stdout == bytes);
    assert!(stderr(&piped).contains("Where the best option changes"));
}

#[test]
fn what_cannot_run_says_so() {
    let book = plan(&[]);
    let slip = run(&["compare", book.arg(), "--against", "3,5%"]);
    assert_eq!(code(&slip), 2);
    assert!(stderr(&slip).contains("Try: 3.5%"), "{}", stderr(&slip));
    let out = run(&["compare", book.arg(), "--out", &book.beside_arg("x.ods")]);
    assert_eq!(code(&out), 2);
    assert!(stderr(&out).contains("x.xlsx"), "{}", stderr(&out));
    let own = run(&["compare", book.arg(), "--out", book.arg(), "--force"]);
    assert_eq!(code(&own), 2);
    assert!(stderr(&own).contains("(output-is-input)"), "{}", stderr(&own));
    assert_eq!(code(&run(&["compare", book.arg(), "--json", "--out", "-"])), 2);
    let missing = run(&["compare", "no-such.xlsx", "--json"]);
    assert_eq!(code(&missing), 2);
    assert_eq!(json(&missing)["switching"].as_array().unwrap().len(), 0);
    // A basis that ends before the flows do.
    let short = run(&["compare", book.arg(), "--against", "3% to 1"]);
    assert_eq!(code(&short), 1);
    assert!(
        stderr(&short).contains("on 3% to 1") && stderr(&short).contains("(outside-domain)"),
        "{}",
        stderr(&short)
    );
    book.is_clean(&[]);
}

#[test]
fn a_workbook_may_come_from_standard_input() {
    let book = plan(&[]);
    let output = run_with(&["compare", "-", "--against", "3%", "--json"], book.bytes());
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    assert_eq!(json(&output)["results"].as_array().unwrap().len(), 2);
}

/// The map says of a point what a comparison on the basis of that point says; its zero lines are switching values there.
#[test]
fn a_map_agrees_with_the_basis_of_its_points() {
    let (folder, book) = copy_of("mine-drainage.xlsx");
    let book = book.to_str().unwrap();
    let picture = folder.path().join("map.svg");
    let args = [
        "compare",
        book,
        "--against",
        RAMSEY,
        "--map",
        "preference,elasticity",
        "--picture",
        picture.to_str().unwrap(),
    ];
    let output = run(&[&args[..], &["--json"]].concat());
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    let map = &json(&output)["map"];
    let numbers = |key: &str| -> Vec<f64> {
        map[key].as_array().unwrap().iter().map(|x| x.as_f64().unwrap()).collect()
    };
    let (preferences, elasticities) = (numbers("preference"), numbers("elasticity"));
    assert_eq!((preferences[0], elasticities[0]), (0.0, 0.0));
    let mut seen = std::collections::BTreeSet::new();
    for (i, j) in [(0, 0), (20, 10), (40, 30), (70, 50)] {
        let line =
            format!("preference {}%, elasticity {}, growth 2%", preferences[i] * 100.0, elasticities[j]);
        let there = compared(book, &[&line]);
        assert_eq!(map["best"][j][i], there["bases"][1]["best"], "{line}");
        seen.insert(there["bases"][1]["best"].to_string());
    }
    assert!(seen.len() >= 2, "the points are in several regions: {seen:?}");
    // Up at an elasticity of 1.2: preference + 1.2 x 2% is the flat rate at which the option is worth as much.
    let document = json(&output);
    let rate = values(&document, "Lime plant", None, "rate")[0];
    let zero = map["zero"]
        .as_array()
        .unwrap()
        .iter()
        .find(|zero| zero["option"] == "Lime plant" && (zero["up"].as_f64().unwrap() - 1.2).abs() < 1e-9);
    let zero = zero.expect("a row of the map at 1.2");
    close(&[zero["preference"][0].as_f64().unwrap()], &[rate - 0.024]);
    assert_eq!(zero["settled"], true);

    // The picture is a document of its own, the same every time.
    let svg = std::fs::read_to_string(&picture).unwrap();
    assert!(svg.starts_with("<svg xmlns=\"http://www.w3.org/2000/svg\"") && svg.ends_with("</svg>\n"));
    for part in [
        "Best option by preference and elasticity",
        RAMSEY,
        ">Lime plant<",
        "worth as much as Do nothing",
        "stroke-dasharray",
    ] {
        assert!(svg.contains(part), "{part}");
    }
    assert_eq!(code(&run(&args)), 2, "an existing picture needs --force");
    assert_eq!(code(&run(&[&args[..], &["--force"]].concat())), 0);
    assert!(std::fs::read_to_string(&picture).unwrap() == svg);
}

#[test]
fn a_map_stands_in_the_workbook_and_in_the_text() {
    // Works of 1000, benefits of 600 twice: worth nothing where preference + elasticity x 2% is 13.066...%.
    let book = plan(&[("C18", "530"), ("D18", "530")]);
    let out = book.beside_arg("map.xlsx");
    let args = ["compare", book.arg(), "--against", RAMSEY, "--map", "preference,growth", "--out", &out];
    let output = run(&args);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    let text = stdout(&output);
    assert!(text.contains("Best option by preference (across) and growth (up): A "), "{text}");
    // 530 twice is worth 1000 at 3.97...%: A in the corner of low rates, (A) in that of high ones.
    let rows: Vec<&str> = text.lines().skip_while(|line| !line.starts_with("Best option by")).collect();
    let words = |line: &str| line.split_whitespace().map(str::to_owned).collect::<Vec<_>>();
    assert_eq!(words(rows[1]).last().map(String::as_str), Some("(A)"), "{text}");
    assert_eq!(words(rows[11])[1], "A", "{text}");
    let sheet = (0..60).map(|row| cell(std::path::Path::new(&out), "Map", &format!("B{}", row + 1)).value);
    let held: Vec<_> = sheet.collect();
    let is = |text: &str| held.contains(&hence_workbook::reading::Value::Text(text.into()));
    assert!(is("A") && is("(A)"), "{held:?}");
    // Without such a basis there is nothing to map.
    let refused = run(&["compare", book.arg(), "--map", "preference,growth"]);
    assert_eq!(code(&refused), 1);
    assert!(stderr(&refused).contains("(map-basis)"), "{}", stderr(&refused));
    assert_eq!(code(&run(&["compare", book.arg(), "--picture", "x.svg"])), 2);
    let wrong = run(&["compare", book.arg(), "--map", "preference,growth", "--picture", "x.png"]);
    assert_eq!(code(&wrong), 2);
    assert!(stderr(&wrong).contains("x.svg"), "{}", stderr(&wrong));
}
