//! Sections of README.md that tests write from tables in the source.
//!
//! `HENCE_ACCEPT=1` writes them and fails on purpose, so that an accepting run is never taken for a passing one.

use std::path::Path;

/// The text with the section between `<!-- name: ... -->` and `<!-- end -->` replaced.
fn with_section(text: &str, name: &str, section: &str) -> String {
    let start =
        text.find(&format!("<!-- {name}: ")).unwrap_or_else(|| panic!("README.md has no section {name}"));
    let from = start + text[start..].find("-->\n").expect("the comment ends") + 4;
    let to = from + text[from..].find("<!-- end -->").unwrap_or_else(|| panic!("{name}: there is no end"));
    assert!(!text[from..to].contains("<!--"), "README.md: the section {name} has no end of its own");
    format!("{}\n{section}\n{}", &text[..from], &text[to..])
}

/// Compares the sections of the README (each a name and its text) with those held.
pub fn compare(readme: &Path, sections: &[(&str, String)]) {
    let held = std::fs::read_to_string(readme).expect("README.md is text");
    let made = sections.iter().fold(held.clone(), |text, (name, section)| with_section(&text, name, section));
    if std::env::var_os("HENCE_ACCEPT").is_some() {
        std::fs::write(readme, &made).expect("README.md is writable");
        panic!("README.md was accepted: look at the difference, then run again without HENCE_ACCEPT");
    }
    let differing = held.lines().zip(made.lines()).find(|(held, made)| held != made);
    assert!(
        held == made,
        "the tables of README.md are not those of the source ({differing:?}): run once with HENCE_ACCEPT=1 and look"
    );
}
