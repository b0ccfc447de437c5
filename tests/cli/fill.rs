//! `hence fill`: the main job, its report and its flags.

use crate::books::{cell, holds, number, plan, typed};
use crate::{code, copy_of, run, stderr, stdout};
use hence_workbook::reading::Value;
use hence_workbook::references::Cell;

fn json(output: &std::process::Output) -> serde_json::Value {
    serde_json::from_str(&stdout(output)).expect("one JSON document")
}

/// Present values of the plan by plain arithmetic, flat rate, flows and base at year ends.
fn by_hand(rate: f64) -> (f64, f64) {
    (600.0 / (1.0 + rate) + 600.0 / (1.0 + rate).powi(2), 1000.0)
}

fn close(found: f64, expected: f64) -> bool {
    (found - expected).abs() <= 1e-9 * expected.abs()
}

#[test]
fn the_sample_is_filled_and_reported() {
    let (folder, book) = copy_of("mine-drainage.xlsx");
    let before = std::fs::read(&book).unwrap();
    let output = run(&["fill", book.to_str().unwrap()]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    let text = stdout(&output);
    for part in [
        "Settling ponds",
        "Over Do nothing",
        "PV benefits",
        "Annual equivalent",
        "a flow in 2026 has factor 1.0000, in 2027 0.9662",
        "3.5% a year for years 0 to 30",
        "arithmetic agrees with the declared basis",
        "set by the body that funds or reviews",
    ] {
        assert!(text.contains(part), "{part} is missing from:\n{text}");
    }
    // Blank years of the sample's streams are told in one line, not in one for each stream.
    assert_eq!(stderr(&output).lines().count(), 1, "{}", stderr(&output));
    assert!(stderr(&output).contains("(blank-zero); and"), "{}", stderr(&output));
    assert_eq!(std::fs::read(&book).unwrap(), before);
    assert!(folder.path().join("mine-drainage.audited.xlsx").exists());
    assert_eq!(std::fs::read_dir(folder.path()).unwrap().count(), 2, "nothing temporary is left");
}

/// LibreOffice Calc has saved the same workbook: other parts, styles and names, the same numbers.
#[test]
fn the_sample_saved_by_another_program_gives_the_same() {
    let filled = |name: &str| {
        let (_folder, book) = copy_of(name);
        let output = run(&["fill", book.to_str().unwrap(), "--json"]);
        assert_eq!(code(&output), 0, "{name}: {}", stderr(&output));
        json(&output)["books"][0]["options"].as_array().expect("options").clone()
    };
    let (ours, theirs) = (filled("mine-drainage.xlsx"), filled("mine-drainage-libreoffice.xlsx"));
    assert_eq!(ours.len(), 4);
    for (a, b) in ours.iter().zip(&theirs) {
        assert_eq!(a["option"], b["option"]);
        assert!(close(a["npv"].as_f64().unwrap(), b["npv"].as_f64().unwrap()), "{a} {b}");
    }
}

/// Benefits of 600 in money of the day, inflation of 25%: 480 and 384 in prices of 2026.
#[test]
fn the_prices_of_the_flows_are_reported() {
    let book = plan(&[("B60", "nominal"), ("B61", "0.25")]);
    let roles = ["--role", "price_basis=Appraisal!B60", "--role", "prices=Appraisal!B61"];
    let output = run(&[&["fill", book.arg(), "--json"], &roles[..]].concat());
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    let option = &json(&output)["books"][0]["options"][0];
    let words = "real: flows are entered in money of the day and made real by inflation of 25% a year (from --role \
                 prices), in prices of the base, 2026";
    assert_eq!(option["prices"], words);
    assert!(
        close(option["pv_benefits"].as_f64().unwrap(), 480.0 / 1.035 + 384.0 / 1.035_f64.powi(2)),
        "{option}"
    );
    let output = run(&[&["fill", book.arg(), "--force"], &roles[..]].concat());
    assert!(stdout(&output).contains(&format!("Prices  {words}\n")), "{}", stdout(&output));
    // A started workbook says that its prices are real.
    let output = run(&["fill", book.arg(), "--force"]);
    assert!(stdout(&output).contains("Prices  real"), "{}", stdout(&output));
    // Where nothing is said of prices, nothing is reported.
    let (_folder, sample) = copy_of("mine-drainage.xlsx");
    let output = run(&["fill", sample.to_str().unwrap()]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    assert!(!stdout(&output).contains("Prices"), "{}", stdout(&output));
}

/// Anglers on 1%, with half the reference income at an elasticity of 1: 1200 a year in 2027 and 2028.
#[test]
fn a_stream_of_its_own_basis_and_weight_is_reported() {
    let book = plan(&[("A18", "Anglers"), ("B60", "0.01"), ("B61", "20000"), ("B62", "40000"), ("B63", "1")]);
    let mut args = vec!["fill", book.arg(), "--json"];
    for role in [
        "basis_anglers=Appraisal!B60",
        "income_anglers=Appraisal!B61",
        "income_reference=Appraisal!B62",
        "elasticity=Appraisal!B63",
    ] {
        args.extend(["--role", role]);
    }
    let output = run(&args);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    let option = &json(&output)["books"][0]["options"][0];
    assert_eq!(option["stream_bases"]["Anglers"], "1%");
    assert_eq!(option["weights"]["Anglers"], 2.0);
    assert!(close(option["pv_benefits"].as_f64().unwrap(), 2.0 * by_hand(0.01).0), "{option}");
    args.retain(|arg| *arg != "--json");
    let text = stdout(&run(&[&args[..], &["--force"]].concat()));
    assert!(text.contains("Anglers on a basis of its own: 1%"), "{text}");
    assert!(text.contains("Weighted by income: Anglers 2.000"), "{text}");
}

/// Consumption of 2000 a year at an elasticity of 1: the exact amount is 2000 (exp(sum of D ln((c + x)/c)) - 1).
#[test]
fn a_project_that_is_not_small_is_told_with_its_exact_value() {
    let cells: Vec<String> = (2..63).map(|i| Cell { row: 61, col: i - 1 }.to_string()).collect();
    let mut more: Vec<(&str, &str)> = cells.iter().map(|cell| (cell.as_str(), "2000")).collect();
    more.push(("B60", "1"));
    let book = plan(&more);
    let path = format!("consumption=Appraisal!B62:{}", cells[60]);
    let output = run(&["fill", book.arg(), "--json", "--role", &path, "--role", "elasticity=Appraisal!B60"]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    let document = json(&output);
    let found = &document["books"][0];
    let gain = 0.5_f64.ln() + 1.3_f64.ln() / 1.035 + 1.3_f64.ln() / 1.035_f64.powi(2);
    let exact = &found["options"][0]["exact"];
    assert!(close(exact["equivalent"].as_f64().unwrap(), 2000.0 * (gain.exp() - 1.0)), "{exact}");
    assert!(close(exact["marginal"].as_f64().unwrap(), by_hand(0.035).0 - 1000.0), "{exact}");
    let codes: Vec<&str> =
        found["problems"].as_array().unwrap().iter().filter_map(|p| p["code"].as_str()).collect();
    assert!(codes.contains(&"not-marginal"), "{codes:?}");
}

#[test]
fn json_has_the_documented_shape_and_the_right_numbers() {
    let book = plan(&[]);
    let output = run(&["fill", book.arg(), "--json"]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    let document = json(&output);
    let keys = |value: &serde_json::Value| {
        let mut keys: Vec<String> = value.as_object().unwrap().keys().cloned().collect();
        keys.sort();
        keys.join(" ")
    };
    assert_eq!(keys(&document), "books schema");
    assert_eq!(document["schema"], 1);
    let found = &document["books"][0];
    assert_eq!(keys(found), "input options output problems status");
    assert_eq!(found["input"], book.arg());
    assert_eq!(found["output"], book.beside_arg("plan.audited.xlsx"));
    assert_eq!(found["status"], "done");
    let option = &found["options"][0];
    assert_eq!(keys(option), "annual npv option prices pv_benefits pv_costs ratio");
    assert_eq!(option["option"], "Appraisal", "a workbook without options has one, named after its sheet");
    let (benefits, costs) = by_hand(0.035);
    let annuity: f64 = (1..=60).map(|n| 1.035f64.powi(-n)).sum();
    for (key, expected) in [
        ("pv_benefits", benefits),
        ("pv_costs", costs),
        ("npv", benefits - costs),
        ("ratio", benefits / costs),
        ("annual", (benefits - costs) / annuity),
    ] {
        assert!(close(option[key].as_f64().unwrap(), expected), "{key}: {} not {expected}", option[key]);
    }
    let problem = &found["problems"][0];
    assert_eq!(keys(problem), "code message place severity try");
    assert_eq!(problem["severity"], "note");
    book.is_clean(&["plan.audited.xlsx"]);
    let filled = book.beside("plan.audited.xlsx");
    assert!(close(number(&filled, "Appraisal", "B34"), benefits - costs));
    // 1000 x^2 = 600 x + 600 for x = 1 + r: the quadratic formula.
    let rate = (600.0 + (600.0f64 * 600.0 + 4.0 * 1000.0 * 600.0).sqrt()) / 2000.0 - 1.0;
    assert!((number(&filled, "Appraisal", "B37") - rate).abs() < 1e-9);
}

#[test]
fn a_workbook_alone_is_filled() {
    let book = plan(&[]);
    assert_eq!(code(&run(&["fill", book.arg(), "--out", &book.beside_arg("a.xlsx")])), 0);
    assert_eq!(code(&run(&[book.arg(), "--out", &book.beside_arg("b.xlsx")])), 0);
    let read = |name| std::fs::read(book.beside(name)).unwrap();
    assert_eq!(read("a.xlsx"), read("b.xlsx"), "same input, same bytes");
}

#[test]
fn a_second_fill_of_the_output_changes_nothing_but_the_input() {
    let book = plan(&[]);
    assert_eq!(code(&run(&["fill", book.arg()])), 0);
    let (first, second) = (book.beside("plan.audited.xlsx"), book.beside("second.xlsx"));
    let output = run(&["fill", first.to_str().unwrap(), "--out", second.to_str().unwrap()]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    assert_eq!(cell(&first, "Appraisal", "B34"), cell(&second, "Appraisal", "B34"));
}

#[test]
fn a_basis_is_valued_on_and_written_into_its_cell() {
    let book = plan(&[]);
    let output = run(&["fill", book.arg(), "--basis", "5% to 1, 4% after", "--json"]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    let filled = book.beside("plan.audited.xlsx");
    assert_eq!(cell(&filled, "Appraisal", "B4").value, Value::Text("5% to 1, 4% after".into()));
    let expected = 600.0 / 1.05 + 600.0 / 1.05 / 1.04 - 1000.0;
    assert!(close(json(&output)["books"][0]["options"][0]["npv"].as_f64().unwrap(), expected));
    assert!(stderr(&output).contains("basis-overridden"), "{}", stderr(&output));
    book.is_clean(&["plan.audited.xlsx"]);
    let wrong = run(&["fill", book.arg(), "--basis", "3,5%", "--force"]);
    assert_eq!(code(&wrong), 1);
    assert!(stderr(&wrong).contains("3.5%"), "{}", stderr(&wrong));
}

#[test]
fn a_basis_may_be_negative() {
    let book = plan(&[]);
    let output = run(&["fill", book.arg(), "--basis", "-1%", "--json"]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    let (benefits, costs) = by_hand(-0.01);
    assert!(close(json(&output)["books"][0]["options"][0]["npv"].as_f64().unwrap(), benefits - costs));
}

#[test]
fn a_basis_is_replaced_only_where_it_is_the_old_one() {
    let book = plan(&[]);
    let refused = run(&["fill", book.arg(), "--replace", "4%=3%"]);
    assert_eq!(code(&refused), 1);
    let text = stderr(&refused);
    for part in
        ["plan.xlsx, Appraisal!B4 [hence_basis]", "the basis is 3.5%, not 4%", "(basis-differs)", "Try:"]
    {
        assert!(text.contains(part), "{part} is missing from:\n{text}");
    }
    book.is_clean(&[]);
    let done = run(&["fill", book.arg(), "--replace", "3.5% = 3%"]);
    assert_eq!(code(&done), 0, "{}", stderr(&done));
    assert!(!stderr(&done).contains("basis-overridden"), "the change was asked for: {}", stderr(&done));
    let filled = book.beside("plan.audited.xlsx");
    assert_eq!(number(&filled, "Appraisal", "B4"), 0.03, "the cell held a number, and does so again");
    let (benefits, costs) = by_hand(0.03);
    assert!(close(number(&filled, "Appraisal", "B34"), benefits - costs));
    for wrong in [&["--replace", "3%"][..], &["--replace", "=3%"], &["--replace", "3%=4%", "--basis", "4%"]] {
        let args = [&["fill", book.arg()], wrong].concat();
        assert_eq!(code(&run(&args)), 2, "{wrong:?}");
    }
}

#[test]
fn numbers_or_formulas_are_written() {
    let book = plan(&[]);
    assert_eq!(code(&run(&["fill", book.arg()])), 0);
    assert_eq!(
        code(&run(&["fill", book.arg(), "--write", "values", "--out", &book.beside_arg("v.xlsx")])),
        0
    );
    let (formulas, values) = (book.beside("plan.audited.xlsx"), book.beside("v.xlsx"));
    for at in ["C28", "C29", "B34"] {
        assert!(cell(&formulas, "Appraisal", at).formula.is_some(), "{at}");
        assert_eq!(cell(&values, "Appraisal", at).formula, None, "{at}");
        assert!(close(number(&values, "Appraisal", at), number(&formulas, "Appraisal", at)));
    }
    assert!(close(number(&values, "Appraisal", "C28"), 1.0 / 1.035));
    assert_eq!(code(&run(&["fill", book.arg(), "--write", "guesses"])), 2);
}

#[test]
fn what_is_said_of_the_data_and_of_who_ran_it_stands_on_the_summary() {
    let book = plan(&[]);
    let args = ["fill", book.arg(), "--as-of", "-30 June 2026, draft 4", "--by", "R. Ostrey"];
    assert_eq!(code(&run(&args)), 0);
    let filled = book.beside("plan.audited.xlsx");
    assert!(holds(&filled, "-30 June 2026, draft 4") && holds(&filled, "R. Ostrey"));
}

#[test]
fn a_workbook_with_problems_is_not_filled_and_says_what_to_do() {
    let book = plan(&[("E9", "12 000 or so"), ("B4", "35")]);
    let output = run(&["fill", book.arg()]);
    assert_eq!(code(&output), 1);
    assert!(stdout(&output).is_empty());
    let text = stderr(&output);
    for part in [
        "plan.xlsx, Appraisal!B4 [hence_basis]: rate is 3500% (stored 35), allowed -50% to 100% (rate-range)",
        "Appraisal!E9",
        "12 000 or so",
        "\n  Try: ",
        "plan.xlsx: not filled",
    ] {
        assert!(text.contains(part), "{part} is missing from:\n{text}");
    }
    book.is_clean(&[]);
    let document = json(&run(&["fill", book.arg(), "--json"]));
    let found = &document["books"][0];
    assert_eq!((&found["status"], &found["output"]), (&"failed".into(), &serde_json::Value::Null));
    let places: Vec<_> = found["problems"].as_array().unwrap().iter().map(|p| p["place"].clone()).collect();
    assert!(places.contains(&"Appraisal!B4 [hence_basis]".into()), "{places:?}");
}

#[test]
fn after_twenty_problems_the_rest_is_counted() {
    // Every other year, so that no two cells join into a range.
    let cells: Vec<String> = (0..25).map(|n| format!("{}10", column(1 + 2 * n))).collect();
    let cells: Vec<(&str, &str)> = cells.iter().map(|at| (at.as_str(), "n/a")).collect();
    let book = plan(&cells);
    let output = run(&["fill", book.arg()]);
    assert_eq!(code(&output), 1);
    let text = stderr(&output);
    assert_eq!(text.matches("(text-value)").count(), 20, "{text}");
    assert!(text.contains("5 more problems, with 5 errors among them"), "{text}");
    let document = json(&run(&["fill", book.arg(), "--json"]));
    assert_eq!(document["books"][0]["problems"].as_array().unwrap().len() - 25, 3, "JSON lists all");
}

fn column(col: u32) -> String {
    hence_workbook::references::Cell { row: 0, col }.to_string().trim_end_matches('1').to_owned()
}

#[test]
fn one_bad_workbook_does_not_keep_the_others_from_being_filled() {
    let (bad, good) = (typed(&[]), plan(&[]));
    let output = run(&["fill", bad.arg(), good.arg(), "--json"]);
    assert_eq!(code(&output), 1);
    let document = json(&output);
    assert_eq!(document["books"][0]["status"], "failed");
    assert_eq!(document["books"][1]["status"], "done");
    bad.is_clean(&[]);
    good.is_clean(&["plan.audited.xlsx"]);
    let output = run(&["fill", good.arg(), "no-such.xlsx", "--force"]);
    assert_eq!(code(&output), 2, "a missing file is the worse end");
    assert!(stdout(&output).contains("plan.audited.xlsx"));
}

#[test]
fn schedules_of_ones_own_are_used() {
    let book = plan(&[("B4", "ostrey-2026")]);
    let unknown = run(&["fill", book.arg()]);
    assert_eq!(code(&unknown), 1);
    assert!(stderr(&unknown).contains("unknown-schedule"), "{}", stderr(&unknown));
    let text = "id = \"ostrey-2026\"\ntitle = \"Rules for works on the Ostrey\"\nbody = \"Ostrey Rivers Board\"\n\
                year = 2026\nplace = \"rule 4\"\naddress = \"\"\nline = \"2%\"\nprices = \"real\"\n\
                status = \"current\"\ncomplete = true\nchecked = \"an invented body\"\n";
    let folder = tempfile::tempdir().unwrap();
    std::fs::write(folder.path().join("ostrey.toml"), text).unwrap();
    let output = run(&["fill", book.arg(), "--schedules", folder.path().to_str().unwrap()]);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    assert!(stdout(&output).contains("Rules for works on the Ostrey"), "{}", stdout(&output));
}

/// Works of 1000 in 2026, benefits of 600 in 2027 and 2028, where growth persists or switches, by hand.
#[test]
fn growth_that_persists_or_switches_is_filled_and_checked() {
    let folder = tempfile::tempdir().unwrap();
    let states = "id = \"ostrey-states\"\ntitle = \"Growth in two states\"\nbody = \"Ostrey Rivers Board\"\n\
                  year = 2026\nplace = \"rule 5\"\naddress = \"\"\nstatus = \"current\"\ncomplete = true\n\
                  checked = \"an invented body\"\n[regimes]\npreference = 0.01\nelasticity = 2\n\
                  states = [{ mean = 0.03, sd = 0 }, { mean = -0.01, sd = 0 }]\n\
                  transition = [[0.9, 0.1], [0.5, 0.5]]\nstart = [1, 0]\n";
    std::fs::write(folder.path().join("states.toml"), states).unwrap();
    let dir = folder.path().to_str().unwrap();
    // Shocks of 3.6% weigh 1 in year 1 and 1.7 in year 2.
    let caution: f64 = 4.0 * 0.036 * 0.036 / 2.0;
    let persistent = [(-0.05 + caution).exp(), (-0.1 + caution * (1.0 + 1.7 * 1.7)).exp()];
    let (boom, slump) = ((-0.06f64).exp(), 0.02f64.exp());
    let (a, b) = (0.9 * boom, 0.1 * slump);
    let switching = [
        (a + b) * (-0.01f64).exp(),
        ((a * 0.9 + b * 0.5) * boom + (a * 0.1 + b * 0.5) * slump) * (-0.02f64).exp(),
    ];
    let line = "preference 1%, elasticity 2, log growth 2% sd 3.6% persistence 0.7";
    for (basis, [first, second]) in [(line, persistent), ("ostrey-states", switching)] {
        let book = plan(&[("B4", basis)]);
        let output = run(&["fill", book.arg(), "--schedules", dir, "--json"]);
        assert_eq!(code(&output), 0, "{}", stderr(&output));
        let document: serde_json::Value = serde_json::from_str(&stdout(&output)).expect("JSON");
        let npv = document["books"][0]["options"][0]["npv"].as_f64().unwrap();
        assert!((npv - (600.0 * (first + second) - 1000.0)).abs() < 1e-9, "{basis}: {npv}");
        let audited = book.beside_arg("plan.audited.xlsx");
        let check = run(&["check", &audited, "--schedules", dir]);
        assert_eq!(code(&check), 0, "{}", stdout(&check));
        assert!(!holds(&book.beside("plan.audited.xlsx"), "ot independently checked: a basis"));
    }
}
