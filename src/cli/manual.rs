//! The manual page, made from the declaration of the arguments.

use clap::CommandFactory;
use clap_mangen::Man;

use crate::Failure;
use crate::args::Cli;

/// The page as roff: one page holds the whole program, each command's options as a section of their own.
pub fn manual() -> Result<String, Failure> {
    let mut command = Cli::command();
    // Usage lines name the whole program: "hence fill", not "fill".
    command.build();
    let mut text = Vec::new();
    let page = Man::new(command.clone());
    page.render_title(&mut text)?;
    page.render_name_section(&mut text)?;
    page.render_synopsis_section(&mut text)?;
    page.render_description_section(&mut text)?;
    page.render_options_section(&mut text)?;
    for sub in command.get_subcommands().filter(|sub| sub.get_name() != "help") {
        let mut part = Vec::new();
        let page = Man::new(sub.clone());
        page.render_synopsis_section(&mut part)?;
        page.render_description_section(&mut part)?;
        page.render_options_section(&mut part)?;
        text.extend_from_slice(format!(".SH \"HENCE {}\"\n", sub.get_name().to_uppercase()).as_bytes());
        // Within the command's section, the parts are subsections.
        let part = String::from_utf8_lossy(&part).replace(".SH ", ".SS ");
        text.extend_from_slice(part.as_bytes());
    }
    page.render_extra_section(&mut text)?;
    page.render_version_section(&mut text)?;
    Ok(String::from_utf8_lossy(&text).into_owned())
}
