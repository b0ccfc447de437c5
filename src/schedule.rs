//! Named bases with their published source, one TOML text each.
mod growth;

use crate::rateline::{Positions, plain, positions, quoted, timing_clauses};
use crate::{Error, ErrorKind, PriceBasis, RateLine, Result, Spec, Timing};
use growth::{GrowthByYear, PersistentGrowth, Regimes};
use serde::Deserialize;
use std::fmt;

/// The longest schedule text that is read, in bytes.
const MAX_BYTES: usize = 1 << 20;

/// Whether a schedule is in force.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum ScheduleStatus {
    /// In force when last checked.
    Current,
    /// Replaced.
    Superseded,
    /// Not known.
    Unknown,
}

impl fmt::Display for ScheduleStatus {
    /// The word that a schedule file uses.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            ScheduleStatus::Current => "current",
            ScheduleStatus::Superseded => "superseded",
            ScheduleStatus::Unknown => "unknown",
        })
    }
}

/// A schedule: a curve with the published document it comes from.
///
/// The text is TOML. Required are `id` (lower-case letters, digits and hyphens, a letter first), `title`, `body`, `year`,
/// `place`, `address`, `status` (current, superseded, unknown), `complete`, `checked` (what was compared with
/// the document), and one of `line` (a rate line), `table` (pairs of offset and factor), `growth_by_year`,
/// `persistent_growth` and `regimes`.
/// Optional: `timing` ("flows middle, base start"), `prices` ("real" or "nominal"), `second_hand` (read in
/// another body's text), `missing` (what is not in it; required where `complete` is false), `notes`, and
/// `companion` (`id`, `beyond`: the schedule that its body wants run beside it over so many years).
///
/// `growth_by_year` has `first` (1, or a calendar year), `growth` (fractions, a year each), `after` (growth past
/// the last one), `preference`, `hazard`, `elasticity` and `exact`. The first year's growth also holds before it.
///
/// `persistent_growth` has `preference`, `hazard`, `elasticity`, `mean` (of log growth), `sd` (of the yearly shock),
/// `persistence`, and `start`, the departure of log growth from its mean in the year that ends at the base (0 where left
/// out).
///
/// `regimes` has `preference`, `hazard`, `elasticity`, `states` (a list of `{ mean, sd }` of log growth), `transition`
/// (a row for each state: the chances of passing from it to each state before the next year's growth is drawn)
/// and `start` (the chances of each state at the base):
///
/// ```text
/// [regimes]
/// preference = 0.01
/// elasticity = 2
/// states = [{ mean = 0.025, sd = 0.02 }, { mean = -0.01, sd = 0.04 }]
/// transition = [[0.95, 0.05], [0.3, 0.7]]
/// start = [1, 0]
/// ```
///
/// ```
/// use hence_core::Schedule;
/// let text = r#"
///     id = "house-rate"
///     title = "House guidance"
///     body = "Our board"
///     year = 2024
///     place = "section 3"
///     address = "https://example.org"
///     line = "3% to 40, 2% after"
///     status = "current"
///     complete = true
///     checked = "both bands, against section 3"
/// "#;
/// let schedule = Schedule::parse("house.toml", text)?;
/// assert_eq!(schedule.spec().to_string(), "3% to 40, 2% after");
/// let error = Schedule::parse("house.toml", &text.replace("board", "board\"\nlien = \"")).unwrap_err();
/// assert!(error.message().starts_with("house.toml, line 5: unknown field `lien`"));
/// # Ok::<(), hence_core::Error>(())
/// ```
#[derive(Clone, Debug, PartialEq)]
pub struct Schedule {
    file: String,
    builtin: bool,
    raw: Raw,
    spec: Spec,
    positions: Positions,
}

/// The fields as they stand in the text.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
struct Raw {
    id: String,
    title: String,
    body: String,
    year: i32,
    place: String,
    address: String,
    line: Option<String>,
    table: Option<Vec<(f64, f64)>>,
    growth_by_year: Option<GrowthByYear>,
    persistent_growth: Option<PersistentGrowth>,
    regimes: Option<Regimes>,
    timing: Option<String>,
    prices: Option<PriceBasis>,
    status: ScheduleStatus,
    complete: bool,
    missing: Option<String>,
    checked: String,
    #[serde(default)]
    second_hand: bool,
    companion: Option<Companion>,
    #[serde(default)]
    notes: String,
}

#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
struct Companion {
    id: String,
    beyond: f64,
}

impl Schedule {
    /// Reads a schedule; `name` is the file's name, which errors begin with.
    ///
    /// **Errors**: `BadSchedule` about the argument "schedule", naming the file, the field, and the line where the
    /// text is no valid TOML or a field is unknown.
    pub fn parse(name: &str, text: &str) -> Result<Self> {
        Self::read(name, text, false)
    }

    /// Reads one of the library's own texts.
    pub(crate) fn parse_builtin(name: &str, text: &str) -> Result<Self> {
        Self::read(name, text, true)
    }

    fn read(name: &str, text: &str, builtin: bool) -> Result<Self> {
        let shown: String = name.chars().flat_map(char::escape_debug).collect();
        let name = shown.as_str();
        if text.len() > MAX_BYTES {
            return Err(bad(name, format!("the text has {} bytes, allowed are {MAX_BYTES}", text.len())));
        }
        let raw: Raw = toml::from_str(text).map_err(|error| {
            let line = error.span().map(|span| 1 + text[..span.start].matches('\n').count());
            let place = line.map_or(String::new(), |line| format!(", line {line}"));
            Error::new(ErrorKind::BadSchedule, "schedule", format!("{name}{place}: {}", error.message()))
        })?;
        let field = |field: &str, message: String| bad(name, format!("{field}: {message}"));
        check_fields(&raw).map_err(|(name, message)| field(name, message))?;
        let curves = (&raw.line, &raw.table, &raw.growth_by_year, &raw.persistent_growth, &raw.regimes);
        let spec = match curves {
            (Some(line), None, None, None, None) => {
                let line = RateLine::parse(line).map_err(|error| field("line", in_line(&error)))?;
                if line.timing().is_some() {
                    let message = "timing stands in the line, it belongs into the field `timing`";
                    return Err(field("line", message.into()));
                }
                line.spec
            }
            (None, Some(table), None, None, None) => {
                Spec::Table(checked_table(table).map_err(|text| field("table", text))?)
            }
            (None, None, Some(path), None, None) => {
                path.spec().map_err(|text| field("growth_by_year", text))?
            }
            (None, None, None, Some(growth), None) => {
                growth.spec().map_err(|text| field("persistent_growth", text))?
            }
            (None, None, None, None, Some(regimes)) => {
                regimes.spec().map_err(|text| field("regimes", text))?
            }
            _ => {
                let message = "give exactly one of `line`, `table`, `growth_by_year`, `persistent_growth` and \
                               `regimes`";
                return Err(bad(name, message.into()));
            }
        };
        let timing = raw.timing.as_ref().map_or(Ok(Positions::default()), |text| {
            // The clauses begin with a semicolon, which the field does not have.
            positions(&format!(";{text}"), 0).map_err(|error| field("timing", error.message().to_string()))
        })?;
        Ok(Schedule { file: name.to_string(), builtin, raw, spec, positions: timing })
    }

    /// Its id: lower-case letters, digits and hyphens.
    pub fn id(&self) -> &str {
        &self.raw.id
    }
    /// The title of the document.
    pub fn title(&self) -> &str {
        &self.raw.title
    }
    /// The body that issued it.
    pub fn body(&self) -> &str {
        &self.raw.body
    }
    /// The year it was issued.
    pub fn year(&self) -> i32 {
        self.raw.year
    }
    /// Where in the document the rates stand.
    pub fn place(&self) -> &str {
        &self.raw.place
    }
    /// A public address of the document; empty where none is known.
    pub fn address(&self) -> &str {
        &self.raw.address
    }
    /// "title, body, year, place".
    pub fn source(&self) -> String {
        format!("{}, {}, {}, {}", self.title(), self.body(), self.year(), self.place())
    }
    /// Its curve.
    pub fn spec(&self) -> &Spec {
        &self.spec
    }
    /// The timing it states, if any.
    pub fn timing(&self) -> Option<Timing> {
        self.positions.timing()
    }
    /// Its rate line with the timing it states, which parses to the same curve and timing.
    ///
    /// **Errors**: `Unsupported` for a curve that no line can state ([`Spec::fits_a_line`]).
    pub fn line(&self) -> Result<String> {
        if !self.spec.fits_a_line() {
            let what = match self.spec {
                Spec::Table(_) => "a table of factors, which has",
                Spec::GrowthRegimes { .. } => "a curve of growth in states, which has",
                _ => "a curve of growth that starts apart from its mean, which has",
            };
            let message = format!("{} is {what} no rate line", self.id());
            return Err(Error::new(ErrorKind::Unsupported, "id", message).with_hint("its id"));
        }
        Ok(format!("{}{}", self.spec, timing_clauses(self.positions)))
    }
    pub(crate) fn positions(&self) -> Positions {
        self.positions
    }
    /// Whether its rates are real or nominal; none where that is not recorded.
    pub fn prices(&self) -> Option<PriceBasis> {
        self.raw.prices
    }
    /// Whether it is in force.
    pub fn status(&self) -> ScheduleStatus {
        self.raw.status
    }
    /// Whether it holds all that its document prints for every year from 0.
    pub fn is_complete(&self) -> bool {
        self.raw.complete
    }
    /// What is not in it, where it is not complete.
    pub fn missing(&self) -> Option<&str> {
        self.raw.missing.as_deref()
    }
    /// What was compared with the published document.
    pub fn checked(&self) -> &str {
        &self.raw.checked
    }
    /// Whether it was read in another body's text only.
    pub fn is_second_hand(&self) -> bool {
        self.raw.second_hand
    }
    /// The id of the schedule that its body wants run beside it, and the length in years beyond which.
    pub fn companion(&self) -> Option<(&str, f64)> {
        self.raw.companion.as_ref().map(|companion| (companion.id.as_str(), companion.beyond))
    }
    /// Notes; empty where there are none.
    pub fn notes(&self) -> &str {
        &self.raw.notes
    }
    /// The name of the file it was read from.
    pub fn file(&self) -> &str {
        &self.file
    }
    /// Whether it is one of the library's own.
    pub fn is_builtin(&self) -> bool {
        self.builtin
    }
}

fn bad(name: &str, message: String) -> Error {
    Error::new(ErrorKind::BadSchedule, "schedule", format!("{name}: {message}"))
}

/// Whether a text has the shape of an id.
pub(crate) fn is_id(text: &str) -> bool {
    text.len() <= 64
        && text.starts_with(|c: char| c.is_ascii_lowercase())
        && text.split('-').all(|part| {
            !part.is_empty() && part.chars().all(|c| c.is_ascii_lowercase() || c.is_ascii_digit())
        })
}

/// The fields beside the curve; the first that is wrong, with what is wrong.
fn check_fields(raw: &Raw) -> std::result::Result<(), (&'static str, String)> {
    let id = |id: &str| {
        let message = "lower-case letters, digits and single hyphens, a letter first, at most 64 characters";
        if is_id(id) { Ok(()) } else { Err(format!("{} is no id, which is {message}", quoted(id))) }
    };
    id(&raw.id).map_err(|message| ("id", message))?;
    #[rustfmt::skip]
    let required = [
        ("title", &raw.title), ("body", &raw.body), ("place", &raw.place), ("checked", &raw.checked),
    ];
    for (name, text) in required {
        if text.trim().is_empty() {
            return Err((name, "is empty".into()));
        }
    }
    if !(1000..=9999).contains(&raw.year) {
        return Err(("year", format!("is {}, allowed 1000 to 9999", raw.year)));
    }
    if raw.complete == raw.missing.is_some() {
        let message = "say what is missing exactly where `complete` is false";
        return Err(("missing", message.into()));
    }
    if let Some(companion) = &raw.companion {
        id(&companion.id).map_err(|message| ("companion.id", message))?;
        if !(companion.beyond >= 0.0 && companion.beyond.is_finite()) {
            return Err(("companion.beyond", format!("is {}, allowed 0 or more years", companion.beyond)));
        }
    }
    Ok(())
}

/// An error of the rate line as a schedule reports it.
fn in_line(error: &Error) -> String {
    let place = error.at().map_or(String::new(), |at| format!(" at character {}", at + 1));
    let hint = error.hint().map_or(String::new(), |hint| format!("; try {hint}"));
    format!("{}{place}{hint}", error.message())
}

/// Factors start at offset 0 with 1, offsets increase, factors are above 0.
fn checked_table(rows: &[(f64, f64)]) -> std::result::Result<Vec<(f64, f64)>, String> {
    if rows.first() != Some(&(0.0, 1.0)) {
        return Err("the first pair must be [0, 1]".into());
    }
    if rows.len() < 2 {
        return Err("there must be a second pair, up to which the table holds".into());
    }
    for (i, pair) in rows.windows(2).enumerate() {
        let ((before, _), (offset, factor)) = (pair[0], pair[1]);
        // Written so that a value that is no number fails too.
        let good = offset > before && offset.is_finite() && factor >= f64::MIN_POSITIVE && factor.is_finite();
        if !good {
            return Err(format!(
                "pair {} is [{}, {}]: offsets must increase, factors must be above 0",
                i + 2,
                plain(offset),
                plain(factor)
            ));
        }
    }
    Ok(rows.to_vec())
}
