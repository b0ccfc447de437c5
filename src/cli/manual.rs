//! The manual page, made from the declaration of the arguments.

use clap::CommandFactory;
use clap_mangen::Man;

use crate::Failure;
use crate::args::Cli;

/// What the commands' sections leave to the section of the whole program.
const COMMON: [&str; 3] = ["color", "schedules", "help"];

/// The page as roff: one page holds the whole program, each command's options as a section of their own.
pub fn manual() -> Result<String, Failure> {
    let mut command = Cli::command();
    // Usage lines name the whole program: "hence fill", not "fill".
    command.build();
    let mut text = Vec::new();
    let page = Man::new(command.clone());
    page.render_title(&mut text)?;
    // No date: the same program prints the same page.
    let mut text = String::from_utf8_lossy(&text).replace(".TH hence 1  ", ".TH hence 1 \"\" ").into_bytes();
    page.render_name_section(&mut text)?;
    page.render_synopsis_section(&mut text)?;
    page.render_description_section(&mut text)?;
    page.render_options_section(&mut text)?;
    for sub in command.get_subcommands().filter(|sub| sub.get_name() != "help") {
        let mut shorter = sub.clone();
        for common in COMMON {
            shorter = shorter.mut_arg(common, |arg| arg.hide(true));
        }
        let page = Man::new(shorter);
        let mut part = Vec::new();
        page.render_synopsis_section(&mut part)?;
        page.render_description_section(&mut part)?;
        if sub.get_arguments().any(|arg| !COMMON.contains(&arg.get_id().as_str())) {
            page.render_options_section(&mut part)?;
        }
        text.extend_from_slice(format!(".SH \"HENCE {}\"\n", sub.get_name().to_uppercase()).as_bytes());
        // Within the command's section, the parts are subsections.
        let part = String::from_utf8_lossy(&part).replace(".SH ", ".SS ");
        text.extend_from_slice(part.as_bytes());
    }
    let mut rest = Vec::new();
    page.render_extra_section(&mut rest)?;
    page.render_version_section(&mut rest)?;
    let rest = String::from_utf8_lossy(&rest).replace(".SH EXTRA", ".SH NOTES");
    Ok(String::from_utf8_lossy(&text).into_owned() + &rest)
}
