//! The one declaration of the command line: help, man page and completions derive from it.

use std::ffi::OsStr;
use std::num::{NonZeroU64, NonZeroUsize};
use std::path::PathBuf;

use clap::{Args, Parser, Subcommand, ValueEnum};
use hence_workbook::planfile::{EXAMPLE, KEYS};

mod raw;

use raw::is_negative;
pub use raw::{color_asked, prepared};

/// Fills an appraisal workbook with discount factors and present values, and audits it.
///
/// The rate to use is set by the body that funds or reviews the appraisal: local guidance and
/// qualified advice come first.
#[derive(Debug, Parser)]
#[command(
    name = "hence",
    version,
    max_term_width = 100,
    after_help = "`hence BOOK` alone does what `hence fill BOOK` does.\n\n\
                  Exit status: 0 done; 1 ran, and something in a workbook is wrong; 2 could not run."
)]
pub struct Cli {
    /// When to use colour
    #[arg(long, global = true, value_name = "WHEN", default_value = "auto")]
    pub color: ColorWhen,
    /// A folder of schedule files of your own, which come before the built-in ones; else the variable HENCE_SCHEDULES
    #[arg(long, global = true, value_name = "DIR", env = "HENCE_SCHEDULES", hide_env = true)]
    pub schedules: Option<PathBuf>,
    #[command(subcommand)]
    pub command: Command,
}

/// When to use colour.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub enum ColorWhen {
    /// On a terminal, unless NO_COLOR is set or TERM is dumb
    Auto,
    /// Wherever the output goes
    Always,
    /// Nowhere
    Never,
}

#[derive(Debug, Subcommand)]
pub enum Command {
    /// Fill the named ranges of workbooks and write audited copies
    Fill(Fill),
    /// Compare what a workbook holds with what its declared basis gives
    Check(Check),
    /// Compare the options under several bases, and find where the decision switches
    Compare(Compare),
    /// Write one page for those who decide: question, options, basis, answer, what would change it
    Brief(Brief),
    /// Print the factors and rates of a curve
    Curve(Curve),
    /// Draw the rate from distributions, and print how the net present values spread
    Draws(Draws),
    /// Build a Ramsey rate from its parts, and show where every figure comes from
    Rate(Rate),
    /// List the schedules, or print one with its source
    Schedules(Schedules),
    /// List the roles that a workbook's names declare, or suggest names for one that has none
    Names(Names),
    /// Propose a plan file, which says what is where in workbooks without names
    Plan(Plan),
    /// Write a ready-named appraisal workbook to type into
    Start(Start),
    /// Print the manual page
    Man,
    /// Print completions for a shell
    Completions {
        /// The shell
        shell: clap_complete::Shell,
    },
}

// What several commands take, written once. Plain comments: clap would print others as the help of the command.

#[derive(Debug, Args)]
pub struct Source {
    /// The workbook; - reads it from standard input
    #[arg(value_name = "BOOK")]
    pub book: PathBuf,
}

#[derive(Debug, Args)]
pub struct Roles {
    /// Give a role to cells without a defined name: --role years="Sheet1!C4:Z4"
    #[arg(long = "role", value_name = "ROLE=RANGE")]
    pub roles: Vec<String>,
    /// A plan file (.toml) that says what is where in a workbook without names; `hence plan` proposes one
    #[arg(long, value_name = "FILE")]
    pub plan: Option<PathBuf>,
}

#[derive(Debug, Args)]
pub struct OfSeveral {
    /// Which of several appraisals in the plan
    #[arg(long, value_name = "NAME", requires = "plan")]
    pub appraisal: Option<String>,
}

#[derive(Debug, Args)]
pub struct Against {
    /// A rate line or schedule to value it on besides the one it declares and the companion of that; may be given
    /// several times
    #[arg(long, value_name = "LINE|ID")]
    pub against: Vec<String>,
}

#[derive(Debug, Args)]
pub struct Signature {
    /// A text for the output: the date or state of the data
    #[arg(long, value_name = "TEXT")]
    pub as_of: Option<String>,
    /// A text for the output: who ran it
    #[arg(long, value_name = "TEXT")]
    pub by: Option<String>,
}

#[derive(Debug, Args)]
pub struct Document {
    /// Print one JSON document
    #[arg(long)]
    pub json: bool,
}

#[derive(Debug, Args)]
pub struct Overwrite {
    /// Replace an existing output
    #[arg(long)]
    pub force: bool,
}

#[derive(Debug, Args)]
pub struct Fill {
    /// The workbooks (.xlsx, .xlsm) or templates (.xltx, .xltm), or folders to find them in; - reads one from standard input
    #[arg(required = true, value_name = "BOOK|DIR")]
    pub books: Vec<PathBuf>,
    /// Where to write: a file when it ends in .xlsx or .xlsm (one workbook only), - for standard output, else a
    /// folder, with the same folders in it as in the one that is walked
    #[arg(long, value_name = "FILE|DIR")]
    pub out: Option<PathBuf>,
    /// Value on this rate line or schedule, and write it into the basis cell
    #[arg(long, value_name = "LINE|ID")]
    pub basis: Option<String>,
    /// Change the basis from OLD to NEW; a workbook on another basis is refused
    #[arg(long, value_name = "OLD=NEW", conflicts_with = "basis")]
    pub replace: Option<String>,
    /// Have LibreOffice compute what the fill leaves without a result, so that previewers and scripts see numbers
    #[arg(long)]
    pub settle: bool,
    /// Value at this base (a year, a financial year or a date), and write it into the base cell
    #[arg(long, value_name = "YEAR")]
    pub base: Option<String>,
    /// Value in these prices, `real 2026`, and write them into the price basis cell; the workbook has to say how prices
    /// change
    #[arg(long, value_name = "PRICES")]
    pub prices: Option<String>,
    #[command(flatten)]
    pub roles: Roles,
    /// What to write into the targets
    #[arg(long, value_name = "WHAT", default_value = "formulas")]
    pub write: WriteWhat,
    /// Replace formulas found in target cells, where they are not hence's own
    #[arg(long)]
    pub replace_formulas: bool,
    #[command(flatten)]
    pub against: Against,
    #[command(flatten)]
    pub signature: Signature,
    /// Write a workbook that says what moved and which decisions flipped, with a bridge for every option
    #[arg(long, value_name = "FILE.xlsx")]
    pub summary: Option<PathBuf>,
    /// Write a line of JSON for each workbook, with hashes of input, output, basis and what was asked for
    #[arg(long, value_name = "FILE")]
    pub ledger: Option<PathBuf>,
    /// Go on with a run that was stopped: keep the outputs that are as it would make them, make the others
    #[arg(long)]
    pub resume: bool,
    /// Workbooks to fill at a time (else as many as the machine runs at once)
    #[arg(long, value_name = "N")]
    pub jobs: Option<NonZeroUsize>,
    /// The most memory for one workbook, in MB (else 1024); not on Windows and macOS
    #[arg(long, value_name = "MB")]
    pub memory_limit: Option<NonZeroU64>,
    /// The most time for one workbook, in seconds (else 600)
    #[arg(long, value_name = "SECONDS")]
    pub time_limit: Option<NonZeroU64>,
    #[command(flatten)]
    pub document: Document,
    #[command(flatten)]
    pub overwrite: Overwrite,
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
    /// Workbooks, and folders of them; - reads one from standard input
    #[arg(value_name = "BOOK|DIR", required = true)]
    pub books: Vec<PathBuf>,
    #[command(flatten)]
    pub roles: Roles,
    #[command(flatten)]
    pub of: OfSeveral,
    #[command(flatten)]
    pub document: Document,
    /// Write a marked copy (.xlsx, .xlsm): the findings on a sheet of their own and as notes on their cells; one workbook only
    #[arg(long, value_name = "FILE")]
    pub out: Option<PathBuf>,
    #[command(flatten)]
    pub overwrite: Overwrite,
}

#[derive(Debug, Args)]
pub struct Compare {
    #[command(flatten)]
    pub source: Source,
    #[command(flatten)]
    pub against: Against,
    #[command(flatten)]
    pub roles: Roles,
    #[command(flatten)]
    pub of: OfSeveral,
    /// Map which option is best where, over two parts of a Ramsey basis
    #[arg(long, value_name = "PARTS")]
    pub map: Option<MapOver>,
    /// Draw the map as a picture (.svg)
    #[arg(long, value_name = "FILE", requires = "map")]
    pub picture: Option<PathBuf>,
    /// Write the tables into a workbook of their own (.xlsx); - for standard output
    #[arg(long, value_name = "FILE")]
    pub out: Option<PathBuf>,
    /// Comma-separated values
    #[arg(long, conflicts_with = "json")]
    pub csv: bool,
    #[command(flatten)]
    pub document: Document,
    #[command(flatten)]
    pub overwrite: Overwrite,
}

/// The two parts of the rate that a map is over.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub enum MapOver {
    /// Preference across, elasticity up
    #[value(name = "preference,elasticity")]
    Elasticity,
    /// Preference across, growth up
    #[value(name = "preference,growth")]
    Growth,
}

#[derive(Debug, Args)]
pub struct Brief {
    #[command(flatten)]
    pub source: Source,
    /// The page to write: .html, or .md for Markdown; - for HTML on standard output
    #[arg(long, value_name = "FILE")]
    pub out: PathBuf,
    /// The question on the page; else the workbook's title, else one made from the names of the options
    #[arg(long, value_name = "TEXT")]
    pub question: Option<String>,
    #[command(flatten)]
    pub against: Against,
    #[command(flatten)]
    pub roles: Roles,
    #[command(flatten)]
    pub of: OfSeveral,
    #[command(flatten)]
    pub signature: Signature,
    #[command(flatten)]
    pub document: Document,
    #[command(flatten)]
    pub overwrite: Overwrite,
}

#[derive(Debug, Args)]
pub struct Curve {
    /// A rate line, a rate or the id of a schedule
    #[arg(value_name = "LINE|ID", allow_hyphen_values = true, value_parser = not_an_option)]
    pub line: String,
    /// Print offsets 0 to N by 1
    #[arg(long, value_name = "N", default_value_t = 100, conflicts_with = "at")]
    pub to: u32,
    /// Print these offsets, in years
    #[arg(long, value_name = "T,T,...", value_delimiter = ',')]
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
    #[command(flatten)]
    pub document: Document,
}

#[derive(Debug, Args)]
#[command(
    after_help = "A distribution is a value (1%, an elasticity 1.5), `normal mean 1% sd 0.3%` (with `within 0% to \
                        2%`), `uniform 1% to 3%`, `triangular 1%, 1.5%, 2%` (lowest, most likely, highest) or `0.3 at 1%, \
                        0.7 at 2%`. What is left out is taken from the workbook's own Ramsey rule."
)]
pub struct Draws {
    #[command(flatten)]
    pub source: Source,
    /// Pure time preference: a distribution, or a value such as 1%
    #[arg(long, value_name = "DISTRIBUTION")]
    pub preference: Option<String>,
    /// Hazard (else 0%, where the workbook states none)
    #[arg(long, value_name = "DISTRIBUTION")]
    pub hazard: Option<String>,
    /// Elasticity of marginal utility, in plain numbers
    #[arg(long, value_name = "DISTRIBUTION")]
    pub elasticity: Option<String>,
    /// Growth of consumption per head
    #[arg(long, value_name = "DISTRIBUTION")]
    pub growth: Option<String>,
    /// How many draws, 1 to 10,000,000
    #[arg(long, value_name = "N", default_value_t = 10_000)]
    pub draws: usize,
    /// Another seed gives other random numbers
    #[arg(long, value_name = "N", default_value_t = 1)]
    pub seed: u64,
    /// Threads that share the work, which do not change the results (else as many as the machine runs at once)
    #[arg(long, value_name = "N")]
    pub threads: Option<NonZeroUsize>,
    /// The percentiles to print
    #[arg(long, value_name = "P,P,...", value_delimiter = ',', default_value = "5,25,50,75,95")]
    pub percentiles: Vec<f64>,
    #[command(flatten)]
    pub roles: Roles,
    #[command(flatten)]
    pub of: OfSeveral,
    /// Every draw as comma-separated values: its parts, its rate, the net present value of each option as it stands
    #[arg(long, conflicts_with = "json")]
    pub csv: bool,
    #[command(flatten)]
    pub document: Document,
}

#[derive(Debug, Args)]
#[command(group = clap::ArgGroup::new("whose_elasticity").args(["elasticity", "taxes"]).required(true))]
#[command(group = clap::ArgGroup::new("whose_growth").args(["growth", "growth_from"]).required(true))]
pub struct Rate {
    /// Pure time preference: 0.5%
    #[arg(long, value_name = "RATE")]
    pub preference: String,
    /// Hazard, the chance that all ends: a rate, a yearly probability ("probability 1%") or an expected waiting
    /// time ("every 100 years")
    #[arg(long, value_name = "HAZARD", default_value = "0%", hide_default_value = true)]
    pub hazard: String,
    /// Elasticity of marginal utility: 1.5
    #[arg(long, value_name = "NUMBER")]
    pub elasticity: Option<String>,
    /// Elasticity from the marginal and the average rate of tax on an income, by equal absolute sacrifice: 40%,25%;
    /// given for several brackets, each with its weight, the weighted mean
    #[arg(long = "elasticity-from-tax", value_name = "MARGINAL,AVERAGE[,WEIGHT]")]
    pub taxes: Vec<String>,
    /// Growth of real consumption per head: 2%
    #[arg(long, value_name = "RATE")]
    pub growth: Option<String>,
    /// Growth estimated from a series of real consumption per head in a workbook: plan.xlsx!Data!B2:B40, or a
    /// defined name in place of the cells; of two columns or rows the first holds the years
    #[arg(long, value_name = "BOOK!CELLS", allow_hyphen_values = true)]
    pub growth_from: Option<String>,
    /// Which estimate counts as growth
    #[arg(long, value_name = "ESTIMATE", default_value = "trend", requires = "growth_from")]
    pub growth_by: GrowthBy,
    /// Standard deviation of yearly growth (with --persistence of its yearly shock): 3.6%, or `estimated`
    #[arg(long, value_name = "RATE")]
    pub sd: Option<String>,
    /// First-order persistence of log growth: 0.7, or `estimated`
    #[arg(long, value_name = "NUMBER", requires = "sd")]
    pub persistence: Option<String>,
    /// Growth and its standard deviation are those of log growth
    #[arg(long, requires = "sd")]
    pub log: bool,
    /// Compound continuously (log growth always is)
    #[arg(long)]
    pub continuous: bool,
    /// Round estimated figures to so many decimals, rates as percentages
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u8).range(0..=12))]
    pub decimals: Option<u8>,
    /// Write the rate as a schedule file of your own (.toml), called by the file's name; - for standard output
    #[arg(long, value_name = "FILE")]
    pub schedule: Option<PathBuf>,
    /// The year to cite the schedule file by (else this year)
    #[arg(long, requires = "schedule")]
    pub year: Option<i32>,
    #[command(flatten)]
    pub document: Document,
    #[command(flatten)]
    pub overwrite: Overwrite,
}

/// Which estimate of a series is its growth.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub enum GrowthBy {
    /// The log-linear trend, by least squares
    Trend,
    /// The mean, from the first value to the last
    Mean,
}

#[derive(Debug, Args)]
pub struct Schedules {
    /// The schedule to print
    pub id: Option<String>,
    #[command(flatten)]
    pub document: Document,
}

#[derive(Debug, Args)]
pub struct Names {
    #[command(flatten)]
    pub source: Source,
    /// Find years, flows and factors from headings and shapes, and write names into a copy
    #[arg(long, requires = "out")]
    pub suggest: bool,
    /// The copy to write; - for standard output
    #[arg(long, value_name = "COPY", requires = "suggest")]
    pub out: Option<PathBuf>,
    #[command(flatten)]
    pub document: Document,
    #[command(flatten)]
    pub overwrite: Overwrite,
}

#[derive(Debug, Args)]
#[command(
    after_help = "The years, flows, factors and results that headings and shapes show stand in the plan with the \
                  reason; what was not found is a line to fill in.",
    after_long_help = format!("A plan:\n\n{}\nIts keys:\n\n{}", indented(EXAMPLE), indented(KEYS))
)]
pub struct Plan {
    #[command(flatten)]
    pub source: Source,
    /// The plan to write (.toml); else it is printed
    #[arg(long, value_name = "FILE")]
    pub out: Option<PathBuf>,
    #[command(flatten)]
    pub overwrite: Overwrite,
}

fn indented(text: &str) -> String {
    text.lines().map(|line| format!("  {line}\n")).collect()
}

#[derive(Debug, Args)]
pub struct Start {
    /// The workbook to write (.xlsx); - for standard output
    #[arg(value_name = "FILE")]
    pub file: PathBuf,
    #[command(flatten)]
    pub overwrite: Overwrite,
}

/// A rate line may begin with a minus sign and a digit; anything else that begins with one is a slip in an option.
fn not_an_option(text: &str) -> Result<String, String> {
    if text.starts_with('-') && !is_negative(OsStr::new(text)) {
        return Err("no such option, and no rate line begins so".to_owned());
    }
    Ok(text.to_owned())
}
