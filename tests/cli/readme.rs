//! The README's commands: every one shown is a command of the program, with options that it has.

use std::collections::BTreeSet;

use crate::{code, run, stdout};

fn readme() -> String {
    let path = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("../../README.md");
    std::fs::read_to_string(path).expect("README.md is text")
}

/// Texts between single backticks, outside fenced blocks.
fn spans(text: &str) -> Vec<String> {
    let prose: Vec<&str> = text.split("```").step_by(2).collect();
    prose.concat().lines().flat_map(|line| line.split('`').skip(1).step_by(2)).map(str::to_owned).collect()
}

/// What follows `hence` in every command shown: in running text, and in fenced blocks through cargo or alone.
fn commands(text: &str) -> Vec<String> {
    let fenced: Vec<&str> = text.split("```").skip(1).step_by(2).flat_map(str::lines).collect();
    let through_cargo =
        fenced.iter().filter_map(|line| line.split_once("--bin hence -- ").map(|(_, rest)| rest));
    let alone = fenced.iter().filter_map(|line| line.trim().strip_prefix("hence "));
    let shown = through_cargo.chain(alone).map(str::to_owned);
    let spans = spans(text);
    shown.chain(spans.iter().filter_map(|span| span.strip_prefix("hence ").map(str::to_owned))).collect()
}

/// The words of a command as a shell would split them, up to a pipe.
fn words(command: &str) -> Vec<String> {
    let mut words = vec![String::new()];
    let mut quoted = false;
    for c in command.chars() {
        match c {
            '"' => quoted = !quoted,
            '|' | '&' if !quoted => break,
            c if c.is_whitespace() && !quoted => words.push(String::new()),
            c => words.last_mut().expect("there is a word").push(c),
        }
    }
    words.retain(|word| !word.is_empty());
    words
}

/// The option that a word is, without its value.
fn option(word: &str) -> Option<&str> {
    let named =
        word.strip_prefix("--").is_some_and(|rest| rest.starts_with(|c: char| c.is_ascii_alphabetic()));
    named.then(|| word.split('=').next().unwrap_or(word))
}

/// The options that a command's help lists.
fn options_of(command: &str) -> BTreeSet<String> {
    let help = run(&[command, "--help"]);
    assert_eq!(code(&help), 0, "README.md shows `hence {command}`, which is no command");
    let text = stdout(&help);
    assert!(
        text.contains(&format!("hence {command}")),
        "`hence {command} --help` is about something else:\n{text}"
    );
    let words = text.split_whitespace().map(|w| w.trim_end_matches(|c: char| !c.is_ascii_alphanumeric()));
    words.filter_map(option).map(str::to_owned).collect()
}

#[test]
fn every_command_shown_exists_with_its_options() {
    let shown = commands(&readme());
    assert!(shown.len() >= 12, "only {shown:?} were found");
    let mut seen = BTreeSet::new();
    let mut options = 0;
    for line in &shown {
        let words = words(line);
        // A workbook alone is filled.
        let command = if words[0].contains('.') { "fill" } else { words[0].as_str() };
        if command.starts_with('-') {
            continue;
        }
        let known = options_of(command);
        for option in words.iter().filter_map(|word| option(word)) {
            assert!(known.contains(option), "README.md shows `hence {line}`: {command} has no {option}");
            options += 1;
        }
        seen.insert(command.to_owned());
    }
    assert!(options >= 4, "only {options} options were found");
    for command in ["fill", "check", "curve", "schedules", "names", "start"] {
        assert!(seen.contains(command), "README.md does not show `hence {command}`");
    }
}

#[test]
fn every_option_named_exists() {
    let commands =
        ["fill", "brief", "check", "compare", "curve", "draws", "names", "rate", "schedules", "start"];
    let known: BTreeSet<String> = commands.into_iter().flat_map(options_of).collect();
    let text = readme();
    let spans = spans(&text);
    let named: Vec<&str> =
        spans.iter().filter_map(|span| option(words(span).first()?).map(|o| &span[..o.len()])).collect();
    assert!(named.len() >= 5, "only {named:?} were found");
    for option in named {
        assert!(known.contains(option), "README.md names {option}, which no command has");
    }
}

#[test]
fn commands_are_read_as_a_shell_reads_them() {
    assert_eq!(words("man | man -l -"), ["man"]);
    assert_eq!(
        words("curve \"3.5% to 30, 3% after\" --to 40"),
        ["curve", "3.5% to 30, 3% after", "--to", "40"]
    );
    assert_eq!(words("x --role years=\"Costs!D4:BZ4\"")[2], "years=Costs!D4:BZ4");
    assert_eq!(option("--at=1,2"), Some("--at"));
    assert_eq!((option("-1%"), option("---"), option("book.xlsx")), (None, None, None));
    let text =
        "a `hence a` b\n```sh\ncargo run --bin hence -- b --force\nhence c\n```\n`d` and `hence e --f`\n";
    assert_eq!(commands(text), ["b --force", "c", "a", "e --f"]);
}
