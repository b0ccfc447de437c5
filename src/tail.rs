//! What follows the last year of a stream: flows that go on to a year or for ever.

use std::fmt;
use std::str::FromStr;

use crate::perpetuity::{MOST, Perpetuity};
use crate::{Curve, Error, ErrorKind, Result, Timing, check, dot, percent};

/// A stream that goes on after its last year.
///
/// The text holds phrases between commas, in any order, case and spacing: `for ever` or `to 2300` (a calendar year
/// from 1000, else an offset in years), and, where wanted, `growing 1%` (or `growing -1%`; `level` says that
/// it does not), `every 25 years` (else every year). `Display` prints the canonical form, which parses back.
#[derive(Clone, Debug, PartialEq)]
pub struct Tail {
    /// Growth of the flows, a fraction per year, above -1 to 1; it compounds over the years between two flows.
    pub growth: f64,
    /// A flow every so many years, 1 to 1000.
    pub every: u32,
    /// The last offset or calendar year, included; none is for ever.
    pub to: Option<i32>,
}

/// What a tail text may say.
const GRAMMAR: &str = "for ever, to 2300, growing 1%, every 25 years or level";

impl Tail {
    /// Reads a tail.
    ///
    /// **Errors**: `Syntax`, pointing at the phrase, for an unknown phrase, one stated twice, and a text that has
    /// neither `for ever` nor `to`; `RateRange` for growth outside -100% to 100%.
    ///
    /// ```
    /// use hence_core::Tail;
    /// let tail = Tail::parse("For ever, growing 1%").unwrap();
    /// assert_eq!(tail, Tail { growth: 0.01, every: 1, to: None });
    /// assert_eq!(tail.to_string(), "growing 1%, for ever");
    /// let error = Tail::parse("every 25 years").unwrap_err();
    /// assert_eq!(error.message(), "the tail does not say how long it goes on");
    /// ```
    pub fn parse(text: &str) -> Result<Self> {
        let (mut growth, mut every, mut end) = (None, None, None);
        let mut start = 0; // characters before the phrase
        for phrase in text.split(',') {
            let at = start + phrase.chars().take_while(|c| c.is_whitespace()).count();
            start += phrase.chars().count() + 1;
            let lower = phrase.to_ascii_lowercase();
            let words: Vec<&str> = lower.split_whitespace().collect();
            let fresh = match words.as_slice() {
                ["for", "ever"] | ["forever"] => end.replace(None).is_none(),
                ["to", year] => end.replace(Some(whole(year, 1..=9999, at)? as i32)).is_none(),
                ["level"] => growth.replace(0.0).is_none(),
                ["growing", share] => growth.replace(percentage(share, at)?).is_none(),
                ["every", years, "year" | "years"] => every.replace(whole(years, 1..=1000, at)?).is_none(),
                ["every", "year"] => every.replace(1).is_none(),
                _ => return Err(syntax(format!("found \"{}\", expected {GRAMMAR}", phrase.trim()), at)),
            };
            if !fresh {
                return Err(syntax(format!("\"{}\" says again what was said before", phrase.trim()), at));
            }
        }
        let to = end.ok_or_else(|| {
            syntax("the tail does not say how long it goes on".into(), 0).with_hint("for ever, or to 2300")
        })?;
        let tail = Tail { growth: growth.unwrap_or(0.0), every: every.unwrap_or(1), to };
        tail.check()?;
        Ok(tail)
    }

    /// The present value of what follows the last flow of a stream.
    ///
    /// **Formula**: sum over k = 1, 2, ... of D(t + k m) × F × (1 + x)^(k m), with F the last flow, t its offset, m
    /// the years between flows, x the growth per year.
    ///
    /// **Arguments**: `curve`, the discount factors D; `last_offset`, t in years; `last_flow`, F, any sign;
    /// `base_year`, the calendar year of the base, needed only where the tail ends in a calendar year.
    ///
    /// **Returns**: money at the base, in the unit of the flow. It holds nothing of the last flow itself.
    ///
    /// **Conventions**: the end of a tail is compared with t, so t must be (year - base year). Where timing moves the
    /// flows from that, use [`Tail::timed_present_value`].
    ///
    /// **Edge cases**: an end before the next flow is due gives 0.
    ///
    /// **Accuracy**: a tail that ends is summed flow by flow, exactly but for its factors and growth. For ever: 1e-12
    /// relative, by a geometric series from where the curve's rate stays constant (under growth that persists or switches,
    /// to within rounding), under a gamma curve by the
    /// Hurwitz zeta function.
    ///
    /// **Errors**: `NotFinite`; `NeedsBase`; `Diverges` for ever, unless the curve's last forward rate exceeds x (of a
    /// mixture, the lowest of its components' last rates; a gamma curve's is 0, and it converges for x = 0 only if its
    /// mean exceeds its standard deviation); `OutsideDomain` for ever under a table or a curve that ends, and past the
    /// end of such a curve; `NoMeaning` where the tail ends before t; `RateRange` for fields outside their limits;
    /// `Unsupported` for ever under a gamma curve where -0.01% < x < 0, and under growth in states whose yearly rates
    /// never settle (states that take turns for ever, or that are never left).
    ///
    /// **Source**: geometric series, as for the growing perpetuity F (1+x)/(r - x), M. J. Gordon, The Investment,
    /// Financing and Valuation of the Corporation, 1962; gamma curve, M. L. Weitzman, Gamma Discounting, American Economic
    /// Review 91, 2001.
    ///
    /// ```
    /// use hence_core::{Compounding, Spec, Tail, Where};
    /// let curve = Spec::Flat { rate: 0.04, compounding: Compounding::Yearly }.curve(&Where::default()).unwrap();
    /// let value = |text: &str| Tail::parse(text).unwrap().present_value(&curve, 0.0, 100.0, None);
    /// assert!((value("for ever").unwrap() - 2500.0).abs() < 1e-9);
    /// assert!((value("growing 2%, for ever").unwrap() - 102.0 / 0.02).abs() < 1e-9);
    /// assert_eq!(value("growing 5%, for ever").unwrap_err().to_string(), "tail: the flows grow by 5% a year for ever \
    ///     and the curve's last rate is 4%, so their value has no end (diverges)");
    /// ```
    pub fn present_value(
        &self,
        curve: &Curve,
        last_offset: f64,
        last_flow: f64,
        base_year: Option<i32>,
    ) -> Result<f64> {
        self.timed_present_value(curve, last_offset, Timing::default(), last_flow, base_year)
    }

    /// The present value of what follows the last flow, where flows and base stand somewhere in their years.
    ///
    /// As [`Tail::present_value`], with t from `years_after_base` (year of the last flow - base year) and `timing`; under
    /// averaged flows it is the mean of the values at the start and the end of each year.
    ///
    /// **Errors**: as there, and those of [`Timing::offset`].
    pub fn timed_present_value(
        &self,
        curve: &Curve,
        years_after_base: f64,
        timing: Timing,
        last_flow: f64,
        base_year: Option<i32>,
    ) -> Result<f64> {
        self.check()?;
        check::finite("last_flow", last_flow)?;
        let offset = timing.offset(years_after_base)?;
        let flows = self.further_flows(years_after_base, base_year)?;
        let per_unit = offset.mean(|t| match flows {
            Some(flows) => self.ending(curve, t, flows),
            None => self.for_ever(curve, t),
        })?;
        check::result("last_flow", per_unit * last_flow)
    }

    /// The flows that follow the last one, one by one, up to an offset.
    ///
    /// **Formula**: F × (1 + x)^(k m) in the year t + k m, k = 1, 2, ..., to the tail's end.
    ///
    /// **Arguments**: `years_after_base`, t, the year of the last flow - the base year; `last_flow`, F, any sign;
    /// `base_year` as in [`Tail::present_value`]; `up_to`, no flow after this many years from the base is listed, which
    /// a tail without end needs.
    ///
    /// **Returns**: (years after the base, flow), in order.
    ///
    /// **Errors**: as [`Tail::present_value`]; `Unsupported` for more than a million flows.
    ///
    /// ```
    /// let tail = hence_core::Tail::parse("every 10 years, to 30").unwrap();
    /// assert_eq!(tail.flows(5.0, 2.0, None, 1000.0).unwrap(), [(15.0, 2.0), (25.0, 2.0)]);
    /// ```
    pub fn flows(
        &self,
        years_after_base: f64,
        last_flow: f64,
        base_year: Option<i32>,
        up_to: f64,
    ) -> Result<Vec<(f64, f64)>> {
        self.check()?;
        check::finite("years_after_base", years_after_base)?;
        check::finite("last_flow", last_flow)?;
        check::finite("up_to", up_to)?;
        let every = f64::from(self.every);
        let within = ((up_to - years_after_base) / every).floor().max(0.0);
        let count = match self.further_flows(years_after_base, base_year)? {
            Some(flows) => within.min(f64::from(flows)),
            None => within,
        };
        if count > MOST {
            let message = format!("{count} flows up to {up_to} years, allowed up to {MOST}");
            return Err(refuse(ErrorKind::Unsupported, message).with_hint("fewer years"));
        }
        (1..=count as u32)
            .map(|k| {
                let years = f64::from(k) * every;
                let flow = check::result("last_flow", last_flow * (1.0 + self.growth).powf(years))?;
                Ok((years_after_base + years, flow))
            })
            .collect()
    }

    /// How many flows follow; none is without end.
    fn further_flows(&self, last: f64, base_year: Option<i32>) -> Result<Option<u32>> {
        let Some(to) = self.to else { return Ok(None) };
        let end = match (to, base_year) {
            (..1000, _) => f64::from(to),
            (year, Some(base)) => f64::from(year) - f64::from(base),
            (year, None) => {
                let message = format!("it ends in the calendar year {year}, which needs a base year");
                return Err(
                    refuse(ErrorKind::NeedsBase, message).with_hint("a base year, or the end as an offset")
                );
            }
        };
        let flows = ((end - last) / f64::from(self.every)).floor();
        if flows < 0.0 {
            let message = format!("it ends at offset {end}, before the stream's last flow at {last}");
            return Err(refuse(ErrorKind::NoMeaning, message).with_hint("a later year, or no tail"));
        }
        if flows > MOST {
            let message = format!("it has {flows} flows, allowed up to {MOST}");
            return Err(refuse(ErrorKind::Unsupported, message).with_hint("for ever"));
        }
        Ok(Some(flows as u32))
    }

    /// The value of so many further flows, per unit of the last flow.
    fn ending(&self, curve: &Curve, last: f64, flows: u32) -> Result<f64> {
        let years: Vec<f64> = (1..=flows).map(|k| f64::from(k) * f64::from(self.every)).collect();
        let offsets: Vec<f64> = years.iter().map(|years| last + years).collect();
        let growth: Vec<f64> = years.iter().map(|&years| (1.0 + self.growth).powf(years)).collect();
        let mut factors = vec![0.0; offsets.len()];
        curve.factors(&offsets, &mut factors)?;
        check::finite_all("tail", &growth)?;
        check::result("tail", dot(&factors, &growth))
    }

    /// The value of further flows without end, per unit of the last flow.
    fn for_ever(&self, curve: &Curve, last: f64) -> Result<f64> {
        let perpetuity = Perpetuity { start: last, growth: self.growth, every: f64::from(self.every) };
        let value = perpetuity.value(curve)?;
        // The curve's own word on offsets it does not cover.
        curve.factor(last + f64::from(self.every))?;
        check::result("tail", value)
    }

    /// The limits of the fields.
    fn check(&self) -> Result<()> {
        check::finite("tail", self.growth)?;
        if !(self.growth > -1.0 && self.growth <= 1.0) {
            let found = percent(self.growth);
            let message = format!("growth is {found}, allowed above -100% to 100%");
            return Err(refuse(ErrorKind::RateRange, message).with_hint("growing 1%"));
        }
        if !(1..=1000).contains(&self.every) {
            let message = format!("a flow every {} years, allowed 1 to 1000", self.every);
            return Err(refuse(ErrorKind::RateRange, message).with_hint("every 25 years"));
        }
        Ok(())
    }
}

fn refuse(kind: ErrorKind, message: String) -> Error {
    Error::new(kind, "tail", message)
}

fn syntax(message: String, at: usize) -> Error {
    refuse(ErrorKind::Syntax, message).with_at(at).with_hint("growing 1%, every 25 years, to 2300")
}

fn whole(word: &str, allowed: std::ops::RangeInclusive<u32>, at: usize) -> Result<u32> {
    match word.parse() {
        Ok(number) if allowed.contains(&number) => Ok(number),
        _ => {
            let (from, to) = (allowed.start(), allowed.end());
            Err(syntax(format!("found \"{word}\", expected a whole number from {from} to {to}"), at))
        }
    }
}

/// "1%" as 0.01, to the nearest number.
fn percentage(word: &str, at: usize) -> Result<f64> {
    let digits = word.strip_suffix('%').unwrap_or("");
    let plain = digits.bytes().all(|b| b.is_ascii_digit() || matches!(b, b'.' | b'-' | b'+'));
    // Scaled as text: 0.7/100 is not the number nearest to 0.007.
    match format!("{digits}e-2").parse::<f64>() {
        Ok(share) if plain && share.is_finite() => Ok(share + 0.0), // -0 becomes 0
        _ => Err(syntax(format!("found \"{word}\", expected a percentage such as 1% or -0.5%"), at)),
    }
}

impl FromStr for Tail {
    type Err = Error;

    fn from_str(text: &str) -> Result<Self> {
        Tail::parse(text)
    }
}

impl fmt::Display for Tail {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        if self.growth != 0.0 {
            write!(f, "growing {}, ", percent(self.growth))?;
        }
        if self.every != 1 {
            write!(f, "every {} years, ", self.every)?;
        }
        match self.to {
            Some(year) => write!(f, "to {year}"),
            None => f.write_str("for ever"),
        }
    }
}
