//! The table of worksheet functions is sound, and each of its C symbols is in the header.

#[path = "../sections.rs"]
mod sections;

use hence::worksheet::{FUNCTIONS, Function};

use crate::root;

/// The call as a formula writes it, what may be left out in brackets.
fn call(function: &Function) -> String {
    let arguments: Vec<String> = function
        .arguments
        .iter()
        .map(|argument| if argument.optional { format!("[{}]", argument.name) } else { argument.name.into() })
        .collect();
    format!("{}({})", function.full_name(), arguments.join(", "))
}

#[test]
fn the_readme_has_every_function() {
    let cell = |text: &str| text.replace('|', "\\|");
    let rows: String = FUNCTIONS
        .iter()
        .map(|f| format!("| `{}` | {} | `{}` |\n", call(f), cell(f.help), cell(f.example)))
        .collect();
    let table = format!("| function | gives | example |\n| --- | --- | --- |\n{rows}");
    sections::compare(&root().join("README.md"), &[("functions", table)]);
}

/// The header documents each C symbol, and names the function that cells call for it.
#[test]
fn every_symbol_is_in_the_header() {
    let header = std::fs::read_to_string(root().join("include/hence.h")).expect("include/hence.h");
    for function in FUNCTIONS {
        let declaration = format!("int32_t {}(", function.symbol);
        let (before, _) =
            header.split_once(&declaration).unwrap_or_else(|| panic!("{declaration} is missing"));
        let comment = before.rsplit("\n\n").next().unwrap_or_default();
        let said = format!("// In cells: {}.", function.full_name());
        assert!(comment.contains(&said), "{declaration} lacks: {said}");
    }
    assert_eq!(header.matches("// In cells: ").count(), FUNCTIONS.len());
}

/// The same text works in both programs: letters after one dot, never shaped like a cell, and arguments that may be
/// left out stand last.
#[test]
fn names_and_arguments_are_as_both_programs_need_them() {
    assert_eq!(FUNCTIONS.len(), 27);
    for function in FUNCTIONS {
        let name = function.name;
        assert!(name.len() >= 3 && name.bytes().all(|b| b.is_ascii_uppercase()), "{name}");
        assert!(!function.arguments.is_empty() && function.arguments.len() <= 12, "{name}");
        let optional: Vec<bool> = function.arguments.iter().map(|argument| argument.optional).collect();
        assert!(optional.is_sorted(), "{name}: {optional:?}");
        // 255 characters are the most that a string constant of an .xll registration or a formula may have.
        let texts = function.arguments.iter().map(|argument| argument.help).chain([function.help]);
        for text in texts {
            assert!(text.len() <= 255 && text.is_ascii(), "{name}: {text}");
        }
        assert!(function.example.starts_with(&format!("=HENCE.{name}(")), "{name}");
        assert!(function.required() >= 1, "{name}");
    }
}
