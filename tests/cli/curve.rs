//! `hence curve`: published factors through the program.

use crate::{code, run, stderr, stdout};

fn csv(args: &[&str]) -> Vec<Vec<f64>> {
    let mut all = vec!["curve"];
    all.extend(args);
    all.push("--csv");
    let output = run(&all);
    assert_eq!(code(&output), 0, "{}", stderr(&output));
    let text = stdout(&output);
    let mut lines = text.lines();
    assert_eq!(lines.next(), Some("t,factor,forward_rate,mean_rate"));
    lines.map(|l| l.split(',').map(|x| x.parse().unwrap_or(f64::NAN)).collect()).collect()
}

/// HM Treasury, The Green Book (2003), Table 6.1, as tabulated to four places in the Northern Ireland practical
/// guide, Appendix 4, Table 1.
#[test]
fn published_factors_of_the_declining_schedule() {
    let line = "3.5% to 30, 3% to 75, 2.5% to 125, 2% to 200, 1.5% to 300, 1% after";
    let rows = csv(&[line, "--to", "125"]);
    assert_eq!(rows.len(), 126);
    for (year, published) in [(1, 0.9662), (2, 0.9335), (3, 0.9019), (4, 0.8714)] {
        assert!((rows[year][1] - published).abs() <= 5e-5, "year {year}: {}", rows[year][1]);
    }
    let text = |line: &str| stdout(&run(&["curve", line, "--to", "125", "--csv"]));
    assert_eq!(text(line), text("uk-2003"), "the schedule is that line");
    assert_eq!(rows[30][2], 0.035, "the edge year belongs to the earlier band");
    assert!((rows[31][2] - 0.03).abs() < 1e-15);
}

/// Common practice, no source: compounding decides whether a million due in 140 years at 10% is worth "less than one".
#[test]
fn a_million_in_140_years() {
    let yearly = csv(&["10%", "--at", "140"])[0][1] * 1e6;
    let continuous = csv(&["10% continuous", "--at", "140"])[0][1] * 1e6;
    assert_eq!(format!("{yearly:.3} {continuous:.3}"), "1.603 0.832");
}

#[test]
fn negative_rates_and_offsets_are_arguments() {
    let rows = csv(&["-1%", "--at", "-1,0,0.5"]);
    assert!((rows[0][1] - 0.99).abs() < 1e-15);
    assert_eq!(rows[1][1], 1.0);
    assert!((rows[2][1] - 0.99f64.powf(-0.5)).abs() < 1e-15);
}

#[test]
fn calendar_edges_need_a_base() {
    let output = run(&["curve", "2.5% to 2070, 1.5% after"]);
    assert_eq!(code(&output), 2);
    assert!(stderr(&output).contains("needs-base"), "{}", stderr(&output));
    let rows = csv(&["2.5% to 2070, 1.5% after", "--base", "2026", "--to", "45"]);
    assert!((rows[44][2] - 0.025).abs() < 1e-15 && (rows[45][2] - 0.015).abs() < 1e-15);
}

/// OMB Circular A-94, Appendix C (January 2000), real rates: 4.0% at 10 years, 4.2% at 30, interpolated between.
#[test]
fn rates_by_project_length() {
    let line = "3.8% at 3, 3.9% at 5, 4% at 7, 4% at 10, 4.2% at 30; whole horizon by length, interpolated";
    let rows = csv(&[line, "--length", "20", "--at", "1"]);
    assert!((rows[0][1] - 1.0 / 1.041).abs() < 1e-15);
}

#[test]
fn an_error_points_at_the_character() {
    let output = run(&["curve", "3,5%"]);
    assert_eq!(code(&output), 2);
    let text = stderr(&output);
    assert!(text.contains("3.5%") && text.contains('^') && text.contains("syntax"), "{text}");
    assert!(stdout(&output).is_empty());
}

#[test]
fn json_is_one_document() {
    let output = run(&["curve", "3.5%", "--to", "1", "--json"]);
    let document: serde_json::Value = serde_json::from_str(&stdout(&output)).expect("JSON");
    assert_eq!(document["schema"], 1);
    assert_eq!(document["rows"][0]["factor"], 1.0);
    assert!(document["rows"][0]["forward_rate"].is_null());
    assert!((document["rows"][1]["factor"].as_f64().unwrap() - 1.0 / 1.035).abs() < 1e-15);
}

/// Two rates at even odds: three forms of one certainty-equivalent rate, each labelled with what it is.
#[test]
fn the_forms_of_a_rate_are_labelled() {
    let line = "0.5 of (1% continuous), 0.5 of (7% continuous)";
    let text = stdout(&run(&["curve", line, "--at", "100"]));
    for part in [
        "forward_rate: of the year that ends at t, compounded yearly",
        "mean_rate: from the base to t, compounded yearly",
        "instantaneous_rate: at t, compounded continuously",
    ] {
        assert!(text.contains(part), "{part} is missing from:\n{text}");
    }
    let document: serde_json::Value =
        serde_json::from_str(&stdout(&run(&["curve", line, "--at", "100", "--json"]))).expect("JSON");
    let (low, high) = ((-1.0f64).exp(), (-7.0f64).exp());
    let expected = (0.01 * low + 0.07 * high) / (low + high);
    let found = document["rows"][0]["instantaneous_rate"].as_f64().unwrap();
    assert!((found - expected).abs() < 1e-16, "{found} and {expected}");
}

#[test]
fn growth_in_states_comes_from_a_schedule_file() {
    let folder = tempfile::tempdir().unwrap();
    let text = "id = \"ostrey-states\"\ntitle = \"Growth in two states\"\nbody = \"Ostrey Rivers Board\"\n\
                year = 2026\nplace = \"rule 5\"\naddress = \"\"\nstatus = \"current\"\ncomplete = true\n\
                checked = \"an invented body\"\n[regimes]\npreference = 0.01\nelasticity = 2\n\
                states = [{ mean = 0.03, sd = 0 }, { mean = -0.01, sd = 0 }]\n\
                transition = [[0.9, 0.1], [0.5, 0.5]]\nstart = [1, 0]\n";
    std::fs::write(folder.path().join("states.toml"), text).unwrap();
    let dir = folder.path().to_str().unwrap();
    let rows = csv(&["ostrey-states", "--schedules", dir, "--at", "1"]);
    let expected = (0.9 * (-0.06f64).exp() + 0.1 * 0.02f64.exp()) * (-0.01f64).exp();
    assert!((rows[0][1] - expected).abs() < 1e-15);
    let shown = stdout(&run(&["curve", "ostrey-states", "--schedules", dir, "--at", "1"]));
    assert!(shown.contains("log growth in 2 states: mean 3%"), "{shown}");
}

#[cfg(unix)]
#[test]
fn a_broken_pipe_ends_quietly() {
    let mut child = crate::hence()
        .args(["curve", "3.5%", "--to", "200000", "--csv"])
        .stdout(std::process::Stdio::piped())
        .stderr(std::process::Stdio::piped())
        .spawn()
        .expect("the program starts");
    drop(child.stdout.take());
    let output = child.wait_with_output().expect("it ends");
    assert_eq!(output.status.code(), Some(0));
    assert!(output.stderr.is_empty(), "{}", String::from_utf8_lossy(&output.stderr));
}
