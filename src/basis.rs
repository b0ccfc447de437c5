//! Curve, timing and prices together, with their source: all that repeats a present value.
use crate::rateline::{Positions, check_flat, in_words, is_word, positions, quoted, timing_clauses};
use crate::schedule::is_id;
use crate::{
    Catalogue, Compounding, Curve, Error, ErrorKind, Position, RateLine, Result, Schedule, ScheduleStatus,
    Spec, Timing, Where,
};
use serde::Deserialize;

/// The sentence that every report prints beside its basis.
pub const CAUTION: &str = "The discount rate to use is set by the body that funds or reviews the appraisal: its \
                           brief, local guidance and qualified advice come before anything printed here.";

/// The price basis of a rate.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum PriceBasis {
    /// Inflation taken out.
    Real,
    /// Money of the day.
    Nominal,
}

/// A basis: what a rate line, a number or a schedule id stands for.
///
/// ```
/// use hence_core::{Basis, Catalogue};
/// let catalogue = Catalogue::builtin();
/// let basis = Basis::parse("UK-2003; flows middle", &catalogue)?;
/// assert_eq!(basis.canonical(), "uk-2003; flows middle");
/// assert!(basis.words().starts_with("3.5% a year for years 0 to 30, then 3% to year 75"));
/// assert_eq!(Basis::parse("0.035", &catalogue)?.canonical(), "3.5%");
/// # Ok::<(), hence_core::Error>(())
/// ```
#[derive(Clone, Debug, PartialEq)]
pub struct Basis {
    spec: Spec,
    /// As the line states them, without those of the schedule.
    stated: Positions,
    schedule: Option<Schedule>,
}

impl Basis {
    /// Parses a rate line, a number as text, or a schedule id, after which timing clauses may follow.
    ///
    /// **Arguments**: `text`, as [`RateLine::parse`] takes it; an id may be in any case.
    /// **Errors**: those of the rate line; `UnknownSchedule` where the text has the shape of an id.
    ///
    /// ```
    /// use hence_core::{Basis, Catalogue};
    /// let error = Basis::parse("uk-2030", &Catalogue::builtin()).unwrap_err();
    /// assert_eq!(error.code(), "unknown-schedule");
    /// assert_eq!(error.hint(), Some("`uk-2003`, `uk-2018` or `uk-2018-health`"));
    /// ```
    pub fn parse(text: &str, catalogue: &Catalogue) -> Result<Self> {
        let head = text.split(';').next().unwrap_or_default();
        let id: String = head.trim().chars().map(plain_hyphen).collect();
        let id = id.to_ascii_lowercase();
        if let Some(schedule) = catalogue.get(&id) {
            let stated = positions(text, head.chars().count())?;
            return Ok(Basis { spec: schedule.spec().clone(), stated, schedule: Some(schedule.clone()) });
        }
        match RateLine::parse(text) {
            Ok(line) => Ok(Basis { spec: line.spec, stated: line.positions, schedule: None }),
            Err(_) if is_id(&id) && (id.contains('-') || !is_word(&id)) => {
                let at = head.chars().take_while(|c| c.is_whitespace()).count();
                let message = format!("no schedule {} is known", quoted(&id));
                let error = Error::new(ErrorKind::UnknownSchedule, "basis", message).with_at(at);
                let near: Vec<String> = catalogue.near(&id).into_iter().map(quoted).collect();
                Err(match near.as_slice() {
                    [] => error
                        .with_hint("a rate line such as `3.5%`, or the id of a schedule file of your own"),
                    [one] => error.with_hint(one.as_str()),
                    [rest @ .., last] => error.with_hint(format!("{} or {last}", rest.join(", "))),
                })
            }
            Err(error) => Err(without_semicolon(head, catalogue).unwrap_or(error)),
        }
    }

    /// A number cell: a flat yearly rate.
    ///
    /// **Arguments**: `rate`, a fraction per year in (-0.5, 1].
    /// **Errors**: `NotFinite`; `RateRange`, with the percentage that was probably meant.
    ///
    /// ```
    /// use hence_core::Basis;
    /// assert_eq!(Basis::from_rate(0.035)?.canonical(), "3.5%");
    /// let error = Basis::from_rate(3.5).unwrap_err();
    /// assert_eq!(error.message(), "rate is 350% (stored 3.5), allowed -50% to 100%");
    /// assert_eq!(error.hint(), Some("enter 3.5% or 0.035"));
    /// # Ok::<(), hence_core::Error>(())
    /// ```
    pub fn from_rate(rate: f64) -> Result<Self> {
        check_flat(rate, &rate.to_string())?;
        // Adding zero turns -0 into 0.
        let spec = Spec::Flat { rate: rate + 0.0, compounding: Compounding::Yearly };
        Ok(Basis { spec, stated: Positions::default(), schedule: None })
    }

    /// The curve at this base and length.
    ///
    /// **Errors**: those of [`Spec::curve`].
    pub fn curve(&self, at: &Where) -> Result<Curve> {
        self.spec.curve(at)
    }

    /// What it says of the curve.
    pub fn spec(&self) -> &Spec {
        &self.spec
    }

    /// The timing it states, where it does: the line's word, else its schedule's, else `end`.
    pub fn timing(&self) -> Option<Timing> {
        let schedule = self.schedule.as_ref().map(Schedule::positions).unwrap_or_default();
        self.stated.or(schedule).timing()
    }

    /// The positions of flows and base that the line itself states, without those of its schedule.
    ///
    /// ```
    /// use hence_core::{Basis, Catalogue, Position};
    /// let basis = Basis::parse("uk-2003; flows middle", &Catalogue::builtin())?;
    /// assert_eq!(basis.stated(), (Some(Position::Middle), None));
    /// # Ok::<(), hence_core::Error>(())
    /// ```
    pub fn stated(&self) -> (Option<Position>, Option<Position>) {
        (self.stated.flows, self.stated.base)
    }

    /// The schedule it names, if any.
    pub fn schedule(&self) -> Option<&Schedule> {
        self.schedule.as_ref()
    }

    /// The schedule to be run beside this one, as a basis with the timing that this line states.
    ///
    /// **Errors**: those of [`Basis::parse`], where the catalogue does not know the schedule.
    ///
    /// ```
    /// use hence_core::{Basis, Catalogue};
    /// let catalogue = Catalogue::builtin();
    /// let basis = Basis::parse("uk-2018; flows middle", &catalogue)?;
    /// let beside = basis.beside(&catalogue)?.expect("a companion");
    /// assert_eq!(beside.canonical(), "uk-2018-reduced; flows middle");
    /// # Ok::<(), hence_core::Error>(())
    /// ```
    pub fn beside(&self, catalogue: &Catalogue) -> Result<Option<Self>> {
        let Some((id, _)) = self.companion() else { return Ok(None) };
        Basis::parse(&format!("{id}{}", timing_clauses(self.stated)), catalogue).map(Some)
    }

    /// The id of the schedule to be run beside this one, and the length in years beyond which.
    pub fn companion(&self) -> Option<(&str, f64)> {
        self.schedule.as_ref().and_then(Schedule::companion)
    }

    /// Whether its rates are real or nominal, where its schedule records that.
    pub fn price_basis(&self) -> Option<PriceBasis> {
        self.schedule.as_ref().and_then(Schedule::prices)
    }

    /// The canonical text, which parses back to the same basis: the rate line or the schedule's id, then the timing
    /// that the line states.
    pub fn canonical(&self) -> String {
        let curve = self
            .schedule
            .as_ref()
            .map_or_else(|| self.spec.to_string(), |schedule| schedule.id().to_string());
        format!("{curve}{}", timing_clauses(self.stated))
    }

    /// The curve in words, with title, body, year and place of its source.
    pub fn words(&self) -> String {
        let curve = in_words(&self.spec);
        match &self.schedule {
            Some(schedule) => format!("{curve} ({})", schedule.source()),
            None => format!("{curve} (as stated, no published source)"),
        }
    }

    /// What to say of its source: superseded, second hand, not complete, overruled by the line's timing.
    ///
    /// What is to be said of the curve itself (factors that jump at an edge) is in [`Curve::warnings`].
    pub fn warnings(&self) -> Vec<String> {
        let Some(schedule) = &self.schedule else { return Vec::new() };
        let id = schedule.id();
        let mut warnings = Vec::new();
        if schedule.status() == ScheduleStatus::Superseded {
            warnings.push(format!("{id} is superseded: its body has issued other rates since"));
        }
        if schedule.is_second_hand() {
            warnings.push(format!("{id} is known second hand: {}", schedule.checked()));
        }
        if let Some(missing) = schedule.missing() {
            warnings.push(format!("{id} is not complete: {missing}"));
        }
        let theirs = schedule.positions();
        let differs =
            |mine: Option<_>, theirs: Option<_>| mine.is_some() && theirs.is_some() && mine != theirs;
        if differs(self.stated.flows, theirs.flows) || differs(self.stated.base, theirs.base) {
            let said = |positions| timing_clauses(positions).trim_start_matches("; ").to_string();
            warnings.push(format!(
                "the line's timing ({}) is used, not that of {id} ({})",
                said(self.stated),
                said(theirs)
            ));
        }
        warnings
    }
}

/// The error for an id whose timing follows without the semicolon.
fn without_semicolon(head: &str, catalogue: &Catalogue) -> Option<Error> {
    let (id, rest) = head.trim().split_once(|c: char| c.is_whitespace() || c == ',')?;
    let schedule = catalogue.get(id)?;
    let at = head.chars().take_while(|c| c.is_whitespace()).count() + id.chars().count();
    let error = Error::new(ErrorKind::Syntax, "basis", "expected `;` or the end after the id of a schedule");
    Some(error.with_at(at).with_hint(format!("`{}; {}`", schedule.id(), rest.trim())))
}

/// The hyphens that spreadsheets put in place of the plain one.
fn plain_hyphen(c: char) -> char {
    if matches!(c, '\u{2010}'..='\u{2013}' | '\u{2212}') { '-' } else { c }
}
