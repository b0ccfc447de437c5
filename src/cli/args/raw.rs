//! The arguments as a shell hands them over, made into what the parser takes.

use std::ffi::{OsStr, OsString};

use clap::CommandFactory;

use super::Cli;

/// Whether an argument begins with a minus sign and a digit: a number or a file, never an option.
pub(super) fn is_negative(argument: &OsStr) -> bool {
    let text = argument.to_string_lossy();
    let rest = text.strip_prefix('-').map(|rest| rest.strip_prefix('.').unwrap_or(rest));
    rest.is_some_and(|rest| rest.starts_with(|c: char| c.is_ascii_digit()))
}

/// The option after which several values may stand, once the workbook has been named.
const SEVERAL: &str = "--against";

/// The arguments as the parser wants them: `hence BOOK` alone is `hence fill BOOK`, so that a workbook can be
/// dropped on the program, and arguments that begin with a minus sign and a digit are no options.
pub fn prepared(args: Vec<OsString>) -> Vec<OsString> {
    let cli = Cli::command();
    let mut prepared: Vec<OsString> = Vec::with_capacity(args.len() + 1);
    let mut command: Option<String> = None;
    let mut wants_value = false;
    let (mut against, mut book) = (false, false);
    for (i, arg) in args.into_iter().enumerate() {
        let text = arg.to_string_lossy().into_owned();
        if i == 0 {
            prepared.push(arg);
            continue;
        }
        if wants_value {
            wants_value = false;
            match prepared.pop() {
                Some(mut option) if is_negative(&arg) => {
                    option.push("=");
                    option.push(arg);
                    prepared.push(option);
                }
                option => prepared.extend(option.into_iter().chain([arg])),
            }
            continue;
        }
        if text.starts_with('-') && text != "-" && !is_negative(&arg) {
            wants_value = takes_value(&cli, &text);
            against = text == SEVERAL || text.starts_with(&format!("{SEVERAL}="));
            prepared.push(arg);
            continue;
        }
        if command.is_none() {
            let known = cli.get_subcommands().any(|c| c.get_name() == text) || text == "help";
            if !known
                && (text == "-" || text.contains(['.', '/', '\\']) || std::path::Path::new(&arg).exists())
            {
                prepared.insert(1, "fill".into());
                command = Some("fill".to_owned());
            } else {
                command = Some(text);
                prepared.push(arg);
                continue;
            }
        }
        let mut named = OsString::new();
        if against && book && matches!(command.as_deref(), Some("compare" | "brief")) {
            named.push(format!("{SEVERAL}="));
            named.push(arg);
            prepared.push(named);
            continue;
        }
        book = true;
        if is_negative(&arg) && command.as_deref() != Some("curve") {
            // A file: "./-1.xlsx" cannot be taken for an option.
            named.push("./");
        }
        named.push(arg);
        prepared.push(named);
    }
    prepared
}

/// Whether an option of any command is followed by its value as an argument of its own.
fn takes_value(cli: &clap::Command, option: &str) -> bool {
    let Some(long) = option.strip_prefix("--") else { return false };
    let commands = std::iter::once(cli).chain(cli.get_subcommands());
    commands
        .flat_map(clap::Command::get_arguments)
        .any(|a| a.get_long() == Some(long) && a.get_action().takes_values())
}

/// What `--color` asks for, before the arguments are parsed: errors of usage heed it too.
pub fn color_asked(args: &[OsString]) -> clap::ColorChoice {
    let texts: Vec<_> = args.iter().map(|arg| arg.to_string_lossy()).collect();
    let after = texts.windows(2).find(|pair| pair[0] == "--color").map(|pair| pair[1].to_string());
    let joined = texts.iter().find_map(|text| text.strip_prefix("--color=").map(str::to_owned));
    match after.or(joined).as_deref() {
        Some("always") => clap::ColorChoice::Always,
        Some("never") => clap::ColorChoice::Never,
        _ => clap::ColorChoice::Auto,
    }
}

#[cfg(test)]
mod tests {
    use super::prepared;
    use crate::args::Cli;
    use clap::CommandFactory;

    fn after(args: &[&str]) -> Vec<String> {
        let args = std::iter::once(&"hence").chain(args).map(Into::into).collect();
        prepared(args).into_iter().skip(1).map(|arg| arg.into_string().unwrap()).collect()
    }

    #[test]
    fn the_declaration_is_sound() {
        Cli::command().debug_assert();
    }

    #[test]
    fn a_workbook_alone_is_filled() {
        assert_eq!(after(&["plan.xlsx", "--json"]), ["fill", "plan.xlsx", "--json"]);
        assert_eq!(after(&["--color", "never", "plan.xlsx"]), ["fill", "--color", "never", "plan.xlsx"]);
        assert_eq!(after(&["-"]), ["fill", "-"]);
        assert_eq!(after(&["check", "plan.xlsx"]), ["check", "plan.xlsx"]);
        assert_eq!(after(&["flil"]), ["flil"]);
        assert_eq!(after(&["--version"]), ["--version"]);
    }

    #[test]
    fn a_minus_sign_and_a_digit_begin_no_option() {
        assert_eq!(after(&["curve", "-1%", "--at", "-1,0"]), ["curve", "-1%", "--at=-1,0"]);
        assert_eq!(after(&["fill", "-1.xlsx", "--basis", "-0.5%"]), ["fill", "./-1.xlsx", "--basis=-0.5%"]);
        assert_eq!(after(&["-1.xlsx"]), ["fill", "./-1.xlsx"]);
        let compared =
            ["compare", "a.xlsx", "--against", "3%", "-1%", "--json", "--against", "-0.5%", "uk-2003"];
        let due = [
            "compare",
            "a.xlsx",
            "--against",
            "3%",
            "--against=-1%",
            "--json",
            "--against=-0.5%",
            "--against=uk-2003",
        ];
        assert_eq!(after(&compared), due);
        assert_eq!(
            after(&["compare", "--against", "3%", "a.xlsx"]),
            ["compare", "--against", "3%", "a.xlsx"]
        );
        assert_eq!(
            after(&["brief", "a.xlsx", "--against", "3%", "4%", "--out", "b.md"]),
            ["brief", "a.xlsx", "--against", "3%", "--against=4%", "--out", "b.md"]
        );
        assert_eq!(after(&["fill", "--by", "x", "-2.xlsx"]), ["fill", "--by", "x", "./-2.xlsx"]);
    }
}
