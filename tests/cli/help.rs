//! Help, version, manual and completions come from one declaration.

use crate::{code, run, stdout};

const COMMANDS: [&str; 11] =
    ["fill", "check", "compare", "brief", "curve", "draws", "rate", "schedules", "names", "plan", "start"];

#[test]
fn help_lists_every_command_and_the_exit_codes() {
    let text = stdout(&run(&["--help"]));
    for command in COMMANDS {
        assert!(text.contains(command), "{command} is missing from:\n{text}");
        let help = run(&[command, "--help"]);
        assert_eq!(code(&help), 0);
        assert!(stdout(&help).contains("Usage: hence"), "{command}");
    }
    assert!(text.contains("Exit status"));
    assert!(stdout(&run(&["--version"])).starts_with("hence "));
}

#[test]
fn the_manual_names_every_flag() {
    let manual = run(&["man"]);
    assert_eq!(code(&manual), 0);
    let text = stdout(&manual).replace('\\', "");
    assert!(text.contains(".TH hence 1"), "{}", &text[..200.min(text.len())]);
    for command in COMMANDS {
        let help = stdout(&run(&[command, "--help"]));
        for flag in help.split_whitespace().filter(|w| w.starts_with("--")) {
            let flag = flag.trim_end_matches(|c: char| !c.is_ascii_alphanumeric());
            assert!(text.contains(flag), "{command}: {flag} is not in the manual");
        }
    }
}

#[test]
fn completions_for_every_shell() {
    for shell in ["bash", "zsh", "fish", "powershell", "elvish"] {
        let output = run(&["completions", shell]);
        assert_eq!(code(&output), 0);
        assert!(stdout(&output).contains("replace-formulas"), "{shell}");
    }
}

#[test]
fn a_slip_is_an_error_of_usage() {
    for args in [&["flil", "x"][..], &["curve"][..], &["fill"][..], &["curve", "3%", "--csv", "--json"][..]] {
        assert_eq!(code(&run(args)), 2, "{args:?}");
    }
}
