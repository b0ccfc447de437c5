//! The one declaration of the command line: help, man page and completions derive from it.

use std::path::PathBuf;

use clap::{Args, Parser, Subcommand, ValueEnum};

/// Fills an appraisal workbook with discount factors and present values, and audits it.
///
/// The rate to use is set by the body that funds or reviews the appraisal: local guidance and
/// qualified advice come first.
#[derive(Debug, Parser)]
#[command(
    name = "hence",
    version,
    max_term_width = 100,
    after_help = "`hence BOOK` alone does what `hence fill BOOK` does.\n\
                  Exit status: 0 done; 1 ran, and something in a workbook is wrong; 2 could not run."
)]
pub struct Cli {
    /// When to use colour
    #[arg(long, global = true, value_name = "WHEN", default_value = "auto")]
    pub color: ColorWhen,
    /// A folder of schedule files of your own, which come before the built-in ones
    #[arg(long, global = true, value_name = "DIR", env = "HENCE_SCHEDULES")]
    pub schedules: Option<PathBuf>,
    #[command(subcommand)]
    pub command: Command,
}

/// When to use colour.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub enum ColorWhen {
    Auto,
    Always,
    Never,
}

#[derive(Debug, Subcommand)]
pub enum Command {
    /// Fill the named ranges of workbooks and write audited copies
    Fill(Fill),
    /// Compare what a workbook holds with what its declared basis gives
    Check(Check),
    /// Print the factors and rates of a curve
    Curve(Curve),
    /// List the schedules, or print one with its source
    Schedules(Schedules),
    /// List the roles that a workbook's names declare, or suggest names for one that has none
    Names(Names),
    /// Write a ready-named appraisal workbook to type into
    Start(Start),
    /// Print the manual page
    #[command(hide = true)]
    Man,
    /// Print completions for a shell
    #[command(hide = true)]
    Completions {
        /// bash, elvish, fish, powershell or zsh
        shell: clap_complete::Shell,
    },
}

#[derive(Debug, Args)]
pub struct Fill {
    /// The workbooks (.xlsx, .xlsm)
    #[arg(required = true, value_name = "BOOK")]
    pub books: Vec<PathBuf>,
    /// Where to write: a file when it ends in .xlsx or .xlsm (one workbook only), else a folder
    #[arg(long, value_name = "FILE|DIR")]
    pub out: Option<PathBuf>,
    /// Value on this rate line or schedule, and write it into the basis cell
    #[arg(long, value_name = "LINE|ID", allow_hyphen_values = true)]
    pub basis: Option<String>,
    /// Change the basis from OLD to NEW; a workbook on another basis is refused
    #[arg(long, value_name = "OLD=NEW", conflicts_with = "basis", allow_hyphen_values = true)]
    pub replace: Option<String>,
    /// Give a role to cells without a defined name: --role years="Sheet1!C4:Z4"
    #[arg(long = "role", value_name = "ROLE=RANGE")]
    pub roles: Vec<String>,
    /// What to write into the targets
    #[arg(long, value_name = "WHAT", default_value = "formulas")]
    pub write: WriteWhat,
    /// Replace formulas found in target cells, where they are not hence's own
    #[arg(long)]
    pub replace_formulas: bool,
    /// A text for the audit summary: the date or state of the data
    #[arg(long, value_name = "TEXT")]
    pub as_of: Option<String>,
    /// A text for the audit summary: who ran it
    #[arg(long, value_name = "TEXT")]
    pub by: Option<String>,
    /// Print one JSON document
    #[arg(long)]
    pub json: bool,
    /// Replace an existing output
    #[arg(long)]
    pub force: bool,
}

/// What goes into target cells.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub enum WriteWhat {
    /// Live formulas with their results
    Formulas,
    /// Plain numbers
    Values,
}

#[derive(Debug, Args)]
pub struct Check {
    /// The workbook
    #[arg(value_name = "BOOK")]
    pub book: PathBuf,
    /// Give a role to cells without a defined name
    #[arg(long = "role", value_name = "ROLE=RANGE")]
    pub roles: Vec<String>,
    /// Print one JSON document
    #[arg(long)]
    pub json: bool,
}

#[derive(Debug, Args)]
pub struct Curve {
    /// A rate line, a rate or the id of a schedule
    #[arg(value_name = "LINE|ID", allow_hyphen_values = true)]
    pub line: String,
    /// Print offsets 0 to N by 1
    #[arg(long, value_name = "N", default_value_t = 100, conflicts_with = "at")]
    pub to: u32,
    /// Print these offsets, in years
    #[arg(long, value_name = "T,T,...", value_delimiter = ',', allow_hyphen_values = true)]
    pub at: Vec<f64>,
    /// The base year, for edges that are calendar years
    #[arg(long, value_name = "YEAR")]
    pub base: Option<i32>,
    /// The appraisal's length, for rates by project length (else the largest offset printed)
    #[arg(long, value_name = "N")]
    pub length: Option<f64>,
    /// Comma-separated values
    #[arg(long, conflicts_with = "json")]
    pub csv: bool,
    /// Print one JSON document
    #[arg(long)]
    pub json: bool,
}

#[derive(Debug, Args)]
pub struct Schedules {
    /// The schedule to print
    pub id: Option<String>,
    /// Print one JSON document
    #[arg(long)]
    pub json: bool,
}

#[derive(Debug, Args)]
pub struct Names {
    /// The workbook
    #[arg(value_name = "BOOK")]
    pub book: PathBuf,
    /// Find years, flows and factors from headings and shapes, and write names into a copy
    #[arg(long, requires = "out")]
    pub suggest: bool,
    /// The copy to write
    #[arg(long, value_name = "COPY", requires = "suggest")]
    pub out: Option<PathBuf>,
    /// Print one JSON document
    #[arg(long)]
    pub json: bool,
    /// Replace an existing copy
    #[arg(long)]
    pub force: bool,
}

#[derive(Debug, Args)]
pub struct Start {
    /// The workbook to write (.xlsx)
    #[arg(value_name = "FILE")]
    pub file: PathBuf,
    /// Replace an existing file
    #[arg(long)]
    pub force: bool,
}

/// `hence BOOK` alone is `hence fill BOOK`, so that a workbook can be dropped on the program.
pub fn with_default_command(mut args: Vec<std::ffi::OsString>) -> Vec<std::ffi::OsString> {
    use clap::CommandFactory;
    if let Some(first) = args.get(1) {
        let text = first.to_string_lossy();
        let known = Cli::command().get_subcommands().any(|c| c.get_name() == text) || text == "help";
        let file_like = text.contains(['.', '/', '\\']) || std::path::Path::new(first).exists();
        if !known && !text.starts_with('-') && file_like {
            args.insert(1, "fill".into());
        }
    }
    args
}
