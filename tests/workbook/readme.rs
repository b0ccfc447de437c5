//! The README against the program: its tables are made from the tables in the source, and what it shows is true.

#[path = "../sections.rs"]
mod sections;

use std::path::{Path, PathBuf};

use hence_core::{Basis, Catalogue, ScheduleStatus};
use hence_workbook::codes::{CODES, Group};
use hence_workbook::fill::{FillRequest, fill};
use hence_workbook::findings::Kind;
use hence_workbook::model::Workbook;
use hence_workbook::package::Package;
use hence_workbook::roles::{ROLES, RoleInfo, Takes, Way, parse_name};

fn root() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("../..")
}

fn readme() -> String {
    std::fs::read_to_string(root().join("README.md")).expect("README.md is text")
}

/// A text as the cell of a table.
fn cell(text: &str) -> String {
    text.replace('|', "\\|")
}

fn role_row(info: &RoleInfo) -> String {
    let word = info.word;
    let names = match info.takes {
        Takes::NoStream => format!("`{word}`"),
        Takes::MayStream => format!("`{word}`, `{word}_<stream>`"),
        Takes::Stream => format!("`{word}_<stream>`"),
    };
    let way = match info.way {
        Way::In => "in",
        Way::Out => "out",
        _ => "hence's",
    };
    format!("| {names} | {way} | {} |\n", cell(info.what))
}

fn roles() -> String {
    let rows: String = ROLES.iter().map(role_row).collect();
    format!("| role | in or out | what |\n| --- | --- | --- |\n{rows}")
}

fn schedules() -> String {
    let catalogue = Catalogue::builtin();
    let mut rows: Vec<(Vec<String>, String)> = Vec::new();
    for schedule in catalogue.schedules() {
        let mut status = vec![match schedule.status() {
            ScheduleStatus::Current => "current",
            ScheduleStatus::Superseded => "superseded",
            ScheduleStatus::Unknown => "unknown",
        }];
        status.extend((!schedule.is_complete()).then_some("incomplete"));
        status.extend(schedule.is_second_hand().then_some("second hand"));
        let source = cell(&format!("{}: {}", schedule.body(), schedule.title()));
        let rest = format!("{source} | {} | {}", schedule.year(), status.join(", "));
        let id = format!("`{}`", schedule.id());
        // Neighbours from one document share a row.
        match rows.last_mut().filter(|(_, last)| *last == rest) {
            Some((ids, _)) => ids.push(id),
            None => rows.push((vec![id], rest)),
        }
    }
    let rows: String = rows.iter().map(|(ids, rest)| format!("| {} | {rest} |\n", ids.join(", "))).collect();
    format!("| id | body and title | year | status |\n| --- | --- | --- | --- |\n{rows}")
}

fn codes() -> String {
    let group = |group: Group| {
        let codes: Vec<_> = CODES.iter().filter(|code| code.group == group).collect();
        let rows: String =
            codes.iter().map(|code| format!("| `{}` | {} |\n", code.code, cell(code.what))).collect();
        let (title, count) = (group.title(), codes.len());
        format!(
            "<details><summary>{title} ({count})</summary>\n\n| code | meaning |\n| --- | --- |\n{rows}\n</details>\n"
        )
    };
    Group::ALL.map(group).concat()
}

fn findings() -> String {
    let rows: String =
        Kind::ALL.iter().map(|kind| format!("| `{}` | {} |\n", kind.code(), cell(kind.words()))).collect();
    format!("| finding | what it is |\n| --- | --- |\n{rows}")
}

#[test]
fn the_tables_are_those_of_the_source() {
    let sections =
        [("roles", roles()), ("findings", findings()), ("schedules", schedules()), ("codes", codes())];
    sections::compare(&root().join("README.md"), &sections);
}

#[test]
fn the_tables_hold_every_row() {
    assert_eq!(roles().lines().count(), ROLES.len() + 2);
    assert!(roles().contains("| `cost_<stream>` | in | a stream of costs"));
    assert!(
        roles()
            .contains("| `basis`, `basis_<stream>` | in | rate line, schedule id or a number; with a stream")
    );
    for schedule in Catalogue::builtin().schedules() {
        assert!(schedules().contains(&format!("`{}`", schedule.id())), "{}", schedule.id());
    }
    assert!(schedules().contains("| `uk-2003` | HM Treasury (UK): The Green Book"));
    assert!(schedules().contains("| 2026 | unknown, second hand |"));
    assert_eq!(codes().lines().filter(|line| line.starts_with("| `")).count(), CODES.len());
}

/// The fenced `sh` blocks of a section, in order.
fn commands(text: &str, heading: &str) -> Vec<String> {
    let start =
        text.find(&format!("\n## {heading}\n")).unwrap_or_else(|| panic!("there is no section {heading}"));
    let section = text[start + 4..].split("\n## ").next().unwrap_or_default();
    let blocks = section.split("```sh\n").skip(1);
    blocks.map(|block| block.split("```").next().unwrap_or_default().to_owned()).collect()
}

#[test]
fn start_has_two_commands() {
    let blocks = commands(&readme(), "Start");
    assert_eq!(blocks.len(), 2, "section Start has to hold exactly two sh blocks: {blocks:?}");
    let line = blocks[0].lines().next().unwrap_or_default();
    assert!(line.contains("--bin hence -- fill samples/") && line.ends_with("--force"), "{line}");
    assert_eq!(blocks[1], "bash tests/run\n");
}

/// Texts between single backticks, outside fenced blocks.
fn spans(text: &str) -> Vec<&str> {
    let mut fence = false;
    let prose = text.lines().filter(|line| {
        let mark = line.starts_with("```");
        fence ^= mark;
        !fence && !mark
    });
    prose.flat_map(|line| line.split('`').skip(1).step_by(2)).collect()
}

#[test]
fn names_and_rate_lines_shown_are_valid() {
    let text = readme();
    let crates = ["hence_core", "hence_workbook"];
    let shown: Vec<&str> = spans(&text)
        .into_iter()
        .filter(|span| span.starts_with("hence_") && !span.contains('<') && !crates.contains(span))
        .collect();
    assert!(shown.len() >= 8, "only {shown:?} were found");
    for name in shown {
        assert!(
            parse_name(name).is_some_and(|read| read.is_ok()),
            "README.md shows {name}, which is no name"
        );
    }
    let section = text.split("\n## The rate line\n").nth(1).and_then(|rest| rest.split("\n## ").next());
    let lines: Vec<&str> =
        section.expect("a section").lines().filter_map(|l| l.strip_prefix("    ")).collect();
    assert!(lines.len() >= 12, "only {} rate lines were found", lines.len());
    for line in lines {
        // A remark stands far to the right of its line.
        let line = line.split("    ").next().unwrap_or_default();
        let basis = Basis::parse(line, &Catalogue::builtin());
        assert!(basis.is_ok(), "README.md shows `{line}`: {}", basis.unwrap_err());
    }
}

/// What the README quotes of the sample's output is there when the sample is filled.
#[test]
fn the_sample_comes_out_as_shown() {
    let text = readme();
    let sample = Package::open(&root().join("samples/mine-drainage.xlsx")).expect("the sample opens");
    let filled = fill(&sample, &FillRequest::default(), &Catalogue::builtin()).expect("the sample is filled");
    let output = Package::from_bytes("readme.xlsx", filled.bytes).expect("the output opens");
    let formula = spans(&text).into_iter().find_map(|span| span.strip_prefix("=INDEX(")).expect("a formula");
    let formula = format!(">INDEX({formula}<");
    let parts: Vec<String> =
        output.parts().filter(|part| part.starts_with("xl/worksheets/")).map(str::to_owned).collect();
    let holds = |part: &String| {
        let bytes = output.part(part).expect("the part can be read").unwrap_or_default();
        String::from_utf8_lossy(&bytes).contains(&formula)
    };
    assert!(parts.iter().any(holds), "no cell of the filled sample holds {formula}");
    // Overlapping ranges of columns make a program take a sheet for damaged.
    for part in &parts {
        let text = String::from_utf8_lossy(&output.part(part).expect("it can be read").unwrap_or_default())
            .into_owned();
        let number = |column: &str, name: &str| -> u32 {
            let rest = column.split(&format!("{name}=\"")).nth(1).and_then(|rest| rest.split('"').next());
            rest.and_then(|number| number.parse().ok()).expect("a column")
        };
        let mut last = 0;
        for column in text.split("<col ").skip(1) {
            assert!(number(column, "min") > last, "{part}: columns overlap");
            last = number(column, "max");
        }
    }
    let book = Workbook::read(&output).expect("the output is a workbook");
    let section = text.split("\n## What comes out\n").nth(1).and_then(|rest| rest.split("\n## ").next());
    let rows = section.expect("a section").lines().filter_map(|line| line.strip_prefix("| Audit "));
    let sheets: Vec<String> =
        rows.map(|row| format!("Audit {}", row.split(" |").next().unwrap_or_default())).collect();
    assert_eq!(sheets.len(), 6, "{sheets:?}");
    for sheet in sheets.iter().map(String::as_str).chain(["Discounting"]) {
        assert!(book.sheets.iter().any(|held| held.name == sheet), "the filled sample has no sheet {sheet}");
    }
    let timing = filled.report.options[0].timing.rsplit(": ").next().unwrap_or_default();
    for quoted in [filled.report.verdict.as_str(), timing] {
        assert!(text.contains(quoted), "README.md does not quote {quoted:?}");
    }
}

#[test]
fn links_lead_somewhere() {
    for page in ["README.md", "DEVELOPERS.md"] {
        let text = std::fs::read_to_string(root().join(page)).expect("a page is text");
        let targets = text.split("](").skip(1).map(|rest| rest.split(')').next().unwrap_or_default());
        for target in targets.filter(|target| !target.contains("://") && !target.starts_with('#')) {
            assert!(root().join(target).exists(), "{page} links to {target}, which is not there");
        }
    }
}
