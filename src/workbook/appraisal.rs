//! What a workbook says, resolved: options, years, streams and targets, each with its cells.

use chrono::NaiveDate;
use hence_core::{PriceBasis, Timing};

use crate::decide::Rule;
use crate::problem::Problem;
use crate::references::{Area, SheetRange};

/// The direction in which the years run.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Direction {
    /// Along a row.
    Across,
    /// Down a column.
    Down,
}

/// One entry of the years.
#[derive(Clone, Debug, PartialEq)]
pub enum Label {
    /// A calendar year, 1000 to 9999.
    Year(i32),
    /// A year number (0, 1, 2, ...), counted from the base.
    Number(i32),
    /// A financial year by its first calendar year, with the text in the cell (2025/26, FY26).
    Financial(i32, String),
    /// A date.
    Date(NaiveDate),
    /// An offset in years, from the role `offsets`.
    Offset(f64),
}

/// The years of one or more options: one range of cells and what each cell says.
#[derive(Clone, Debug, PartialEq)]
pub struct Axis {
    /// The cells.
    pub at: Area,
    /// Which way they run.
    pub direction: Direction,
    /// One label a cell, in order.
    pub labels: Vec<Label>,
    /// How long each column is, where they are not a year each.
    pub spans: Option<Spans>,
}

impl Axis {
    /// Whether the labels number the columns one by one; else they say years, those of numbers counted from the base.
    pub fn numbers_columns(&self) -> bool {
        let Some(Label::Number(first)) = self.labels.first() else { return false };
        (*first..).zip(&self.labels).all(|(n, label)| *label == Label::Number(n))
    }
}

/// Years per column, from the role `span`.
#[derive(Clone, Debug, PartialEq)]
pub struct Spans {
    /// One cell for all columns, or a cell each.
    pub at: Area,
    /// The defined name it was found by.
    pub from: String,
    /// Years, above 0, one a column: 1/12 is a month.
    pub lengths: Vec<f64>,
}

/// Something the workbook states, with the cell it was read from (none when it came from elsewhere).
#[derive(Clone, Debug, PartialEq)]
pub struct Given<T> {
    /// What it says.
    pub value: T,
    /// Its cell.
    pub at: Option<SheetRange>,
    /// In words: `hence_base`, `command line`, `schedule uk-2003`, `default`.
    pub from: String,
}

/// Where something comes from that the command line said.
pub const COMMAND_LINE: &str = "command line";

/// The base as stated.
#[derive(Clone, Debug, PartialEq)]
pub enum Base {
    /// A calendar year.
    Year(i32),
    /// A financial year by its first calendar year.
    Financial(i32),
    /// A date.
    Date(NaiveDate),
    /// Year number 0 of years that are numbers.
    Zero,
}

/// Which side of the ledger a stream is on.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum StreamKind {
    /// Counts against (below the line of the ratio).
    Cost,
    /// Counts for (above the line).
    Benefit,
    /// Net: positive counts for, negative against; above the line of the ratio.
    Flow,
    /// A damage: counts as a benefit where it falls below the baseline's.
    Damage,
}

/// One stream of flows.
#[derive(Clone, Debug, PartialEq)]
pub struct Stream {
    /// Its name with underscores as spaces: "works".
    pub name: String,
    /// Its side.
    pub kind: StreamKind,
    /// The defined name (or block and row) it was found by.
    pub from: String,
    /// Its cells, as many as the years and in their direction.
    pub at: Area,
    /// The numbers in the cells; a blank is 0.
    pub raw: Vec<f64>,
    /// What multiplies every flow: +1 or -1, from `signs`.
    pub sign: f64,
    /// Units of one: 1, 1e3, 1e6, from `unit_<stream>`.
    pub unit: f64,
    /// A share added (optimism bias): 0.2 is 20%, from `uplift_<stream>`.
    pub uplift: Given<f64>,
    /// A value at the last year, in the stream's unit: it lowers a cost and raises anything else, whatever `signs` says.
    pub residual: Option<Given<f64>>,
    /// What follows the last year.
    pub tail: Option<Given<hence_core::Tail>>,
    /// Growth of its price against other prices, a fraction a year from the price base, from `growth_<stream>`.
    pub growth: Option<Given<f64>>,
    /// A basis of its own, from `basis_<stream>`; else it is discounted on the option's.
    pub basis: Option<Given<String>>,
    /// Income of the group that it falls to, from `income_<stream>`.
    pub income: Option<Given<f64>>,
}

/// The prices that flows are entered and valued in, as far as they are stated.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Prices {
    /// From `price_basis`.
    pub declared: Option<Given<Declared>>,
    /// From `prices`: where it is given, flows are entered in money of the day and made real by it.
    pub levels: Option<Given<Levels>>,
    /// The year from which prices of streams grow against others: the workbook's own price base, else its own base. A
    /// base or a price year from the command line moves what values are expressed in, not what a price will be.
    pub growth_from: Option<i32>,
}

/// What `price_basis` says.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Declared {
    /// Constant prices, or money of the day.
    pub basis: PriceBasis,
    /// The year whose prices are meant; a financial year by its first calendar year.
    pub year: Option<i32>,
}

/// What welfare measures need, as far as it is stated.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Welfare {
    /// Elasticity of marginal utility, from `elasticity`; else it is the basis's, where that states one.
    pub elasticity: Option<Given<f64>>,
    /// The income that counts once, from `income_reference`.
    pub reference: Option<Given<f64>>,
    /// Consumption without the project.
    pub consumption: Option<Consumption>,
}

/// A path of consumption along the years.
#[derive(Clone, Debug, PartialEq)]
pub struct Consumption {
    /// Its cells.
    pub at: Area,
    /// The defined name it was found by.
    pub from: String,
    /// The numbers in the cells, above 0.
    pub raw: Vec<f64>,
    /// Units of one, from `unit_consumption`.
    pub unit: f64,
}

/// The level of prices over the years.
#[derive(Clone, Debug, PartialEq)]
pub enum Levels {
    /// One level a year, above 0.
    Index(Vec<f64>),
    /// A steady rate of inflation, a fraction a year.
    Inflation(f64),
}

impl Prices {
    /// The prices in which flows are valued, where that is known.
    pub fn valued(&self) -> Option<PriceBasis> {
        match &self.levels {
            Some(_) => Some(PriceBasis::Real),
            None => self.declared.as_ref().map(|given| given.value.basis),
        }
    }

    /// The year of the price base, where one is stated; else it is that of the base.
    pub fn year(&self) -> Option<i32> {
        self.declared.as_ref().and_then(|given| given.value.year)
    }
}

/// A physical effect (tonnes, life-years), for cost per unit.
#[derive(Clone, Debug, PartialEq)]
pub struct Effect {
    /// Its name.
    pub name: String,
    /// Its cells.
    pub at: Area,
    /// Its quantities.
    pub raw: Vec<f64>,
}

/// What is to be written into a target.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
pub enum TargetRole {
    /// A factor a year.
    Factor,
    /// A factor a year, on the basis of a stream.
    StreamFactor(String),
    /// PV by year of a stream, or of the net where there is no stream.
    PvByYear(Option<String>),
    /// PV in one cell, of a stream or of the net.
    PvTotal(Option<String>),
    /// PV of costs.
    PvCosts,
    /// PV of benefits.
    PvBenefits,
    /// Net present value.
    Npv,
    /// Benefit-cost ratio.
    Ratio,
    /// Annual equivalent.
    Annual,
    /// The internal rate of return, or text.
    Irr,
    /// The discounted payback in years, or text.
    Payback,
    /// The workbook's own yearly rates.
    Rates,
}

/// What a target cell holds now.
#[derive(Clone, Debug, PartialEq)]
pub enum Held {
    /// Nothing.
    Blank,
    /// A number, typed.
    Number(f64),
    /// A text, typed.
    Text(String),
    /// A formula with its cached value.
    Formula {
        /// Its text, without the equals sign.
        text: String,
        /// Its cached value, where that is a number.
        value: Option<f64>,
        /// Its cached text, logical value or error; nothing where it has a number or no result at all.
        shown: Option<String>,
    },
    /// An error value.
    Error(String),
}

/// A range to be filled.
#[derive(Clone, Debug, PartialEq)]
pub struct Target {
    /// What goes in.
    pub role: TargetRole,
    /// The defined name it was found by.
    pub from: String,
    /// Its cells.
    pub at: Area,
    /// What each cell holds now, in order.
    pub held: Vec<Held>,
    /// Each cell's number format code, where it has one ("0.0000"); for the tolerance of totals.
    pub formats: Vec<Option<String>>,
}

/// One of the alternatives compared.
#[derive(Clone, Debug, PartialEq)]
pub struct Choice {
    /// Its name; the sheet's where the workbook names no option.
    pub name: String,
    /// The base.
    pub base: Given<Base>,
    /// The basis: a rate line, a schedule id or a number as text.
    pub basis: Given<String>,
    /// The timing as stated in the workbook, where it is.
    pub timing: Option<Given<Timing>>,
    /// The prices of its flows.
    pub prices: Prices,
    /// What welfare measures need.
    pub welfare: Welfare,
    /// Index into [`Appraisal::axes`].
    pub axis: usize,
    /// Its streams, shared ones included.
    pub streams: Vec<Stream>,
    /// Its physical effects.
    pub effects: Vec<Effect>,
    /// Names of the streams that are the constrained cost.
    pub budget: Vec<String>,
    /// What is to be filled.
    pub targets: Vec<Target>,
}

/// A numeric row along the years, for the coverage sheet.
#[derive(Clone, Debug, PartialEq)]
pub struct Covered {
    /// The cells, as long as the years.
    pub at: Area,
    /// The text beside it.
    pub heading: String,
    /// Its roles in words ("cost: works"), or empty for "not valued".
    pub roles: Vec<String>,
    /// The undiscounted sum of its numbers.
    pub total: f64,
    /// Its numbers are results, or follow filled cells, so that their total before the fill says nothing.
    pub follows: bool,
}

/// What a cell with a setting holds.
#[derive(Clone, Debug, PartialEq)]
pub enum Stated {
    /// A number.
    Number(f64),
    /// The serial number of a date.
    Date(f64),
    /// A text.
    Text(String),
}

/// A cell that states something once (base, basis, timing, units and the like), so that a later change shows.
#[derive(Clone, Debug, PartialEq)]
pub struct Setting {
    /// The cell.
    pub at: SheetRange,
    /// The name it was found by.
    pub from: String,
    /// What it holds.
    pub value: Stated,
}

/// Everything that fill and check need of a workbook.
#[derive(Clone, Debug, PartialEq)]
pub struct Appraisal {
    /// Every distinct range of years.
    pub axes: Vec<Axis>,
    /// The options, in the order of their sheets or names.
    pub choices: Vec<Choice>,
    /// Which of them is the baseline.
    pub baseline: Option<usize>,
    /// What ranks the options.
    pub decide: Rule,
    /// Every cell that was read for a setting, by sheet and place.
    pub settings: Vec<Setting>,
    /// Every numeric row along the years, valued or not.
    pub coverage: Vec<Covered>,
    /// Warnings and notes found on the way.
    pub problems: Vec<Problem>,
    /// The workbook counts days from 1904.
    pub date1904: bool,
}
