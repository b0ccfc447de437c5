//! The grammar of the rate line.
use super::clauses::{Allowed, Clauses};
use super::cursor::{Parsed, Parser};
use super::lexer::Kind;
use super::number::{check_flat, in_range, of_decimal, of_percent, out_of_range};
use super::{MAX_DEPTH, Positions, RateLine, percent, plain};
use crate::{Band, Compounding, Edge, ErrorKind, Persistence, Spec};

/// Edges from this number on are calendar years.
const FIRST_YEAR: f64 = 1000.0;
const LAST_YEAR: f64 = 9999.0;

/// Weights must sum to 1 within this, which leaves room for the rounding of their doubles only.
const WEIGHT_TOLERANCE: f64 = 1e-12;

/// Reads a whole line.
pub(super) fn line(text: &str) -> Parsed<RateLine> {
    let mut parser = Parser::new(text)?;
    let (spec, positions) = parser.curve(Allowed::All, 0)?;
    parser.end()?;
    Ok(RateLine { spec, positions })
}

/// Reads the timing clauses after the character `from`.
pub(super) fn positions(text: &str, from: usize) -> Parsed<Positions> {
    // Blanks keep the characters where they are, so that errors point into the whole text.
    let rest: String = text.chars().enumerate().map(|(i, c)| if i < from { ' ' } else { c }).collect();
    let mut parser = Parser::new(&rest)?;
    let clauses = Clauses::read(&mut parser, Allowed::Timing)?;
    parser.end()?;
    Ok(clauses.positions())
}

/// A curve before its clauses are known.
enum Head {
    Flat(f64, Compounding),
    Bands(Vec<Band>),
    Points(Vec<(f64, f64)>),
    Ramsey(Ramsey),
    Gamma { mean: f64, sd: f64 },
    Mixture(Vec<(f64, Spec)>),
}

struct Ramsey {
    preference: f64,
    hazard: f64,
    elasticity: f64,
    growth: Growth,
}

enum Growth {
    Path(Vec<Band>),
    Uncertain { mean: f64, sd: f64, log: bool, persistence: Option<Persistence> },
}

impl Parser {
    /// A curve with its clauses: the line, or what stands between the brackets of a mixture.
    fn curve(&mut self, allowed: Allowed, depth: usize) -> Parsed<(Spec, Positions)> {
        let head = self.head(depth)?;
        if !self.finished() && !self.is_sign(';') {
            return Err(self.unexpected("`;` or the end", &[]).into());
        }
        let end = self.at();
        let mut clauses = Clauses::read(self, allowed)?;
        let spec = self.qualified(head, &mut clauses, end)?;
        Ok((spec, clauses.positions()))
    }

    /// The curve that a head and its clauses make.
    fn qualified(&self, head: Head, clauses: &mut Clauses, end: usize) -> Parsed<Spec> {
        let mut compounding = Compounding::Yearly;
        let (spec, name) = match head {
            Head::Flat(rate, stated) => {
                compounding =
                    if clauses.continuous.take().is_some() { Compounding::Continuous } else { stated };
                (Spec::Flat { rate, compounding }, "a flat rate")
            }
            Head::Bands(bands) => match clauses.horizon.take() {
                None => {
                    let edges_from = clauses.edges_from.take().map(|found| found.0);
                    (Spec::Bands { bands, edges_from }, "banded forward rates")
                }
                Some((rule, _)) => {
                    clauses.stepped.take();
                    (Spec::HorizonSteps { bands, rule }, "stepped whole-horizon rates")
                }
            },
            Head::Points(points) => {
                let horizon = clauses.horizon.take();
                let (Some((rule, _)), Some(_)) = (horizon, clauses.interpolated.take()) else {
                    let message = "points of rates (`at`) need `whole horizon by flow` or `by length`, and \
                                   `interpolated`";
                    let error = self.error_at(ErrorKind::Syntax, end, message);
                    return Err(error
                        .with_hint("`; whole horizon by length, interpolated` after the rates")
                        .into());
                };
                (Spec::HorizonPoints { points, rule }, "interpolated whole-horizon rates")
            }
            Head::Ramsey(ramsey) => {
                let continuous = clauses.continuous.take();
                if continuous.is_some() {
                    compounding = Compounding::Continuous;
                }
                let Ramsey { preference, hazard, elasticity, growth } = ramsey;
                match growth {
                    Growth::Path(growth) => {
                        let exact = clauses.exact.take().is_some();
                        if let (true, Some((_, at))) = (exact, continuous) {
                            let message = "the exact Ramsey rule compounds yearly, it cannot be `continuous`";
                            return Err(self.error_at(ErrorKind::Syntax, at, message).into());
                        }
                        let spec =
                            Spec::Ramsey { preference, hazard, elasticity, growth, exact, compounding };
                        (spec, "the Ramsey rule")
                    }
                    Growth::Uncertain { mean, sd, log, persistence } => {
                        if log {
                            compounding = Compounding::Continuous;
                        }
                        #[rustfmt::skip]
                        let spec = Spec::UncertainGrowth {
                            preference, hazard, elasticity, mean, sd, log, persistence, compounding,
                        };
                        (spec, "uncertain growth")
                    }
                }
            }
            Head::Gamma { mean, sd } => (Spec::Gamma { mean, sd }, "gamma-distributed rates"),
            Head::Mixture(parts) => (Spec::Mixture(parts), "a mixture"),
        };
        clauses.refuse_rest(self, name)?;
        Ok(spec)
    }

    fn head(&mut self, depth: usize) -> Parsed<Head> {
        if matches!(self.token().kind, Kind::Number(_)) {
            let weight = match (&self.peek(1).kind, &self.peek(2).kind) {
                (Kind::Word(word), _) => word == "of",
                (Kind::Sign('%'), Kind::Word(word)) => word == "of",
                _ => false,
            };
            return if weight { self.mixture(depth) } else { self.rates() };
        }
        const STARTS: [&str; 6] = ["preference", "hazard", "elasticity", "growth", "log", "gamma"];
        if self.word("gamma") {
            return self.gamma();
        }
        match &self.token().kind {
            Kind::Word(word) if STARTS.contains(&word.as_str()) => self.ramsey(),
            _ => {
                let what = "a rate such as `3.5%`, `preference`, `gamma` or the id of a schedule";
                Err(self.unexpected(what, &STARTS).into())
            }
        }
    }

    /// A flat rate, bands (`to`, `after`) or points (`at`).
    fn rates(&mut self) -> Parsed<Head> {
        if let Some(flat) = self.bare_fraction()? {
            return Ok(flat);
        }
        let at = self.at();
        let first = self.percent()?;
        self.check_rate(first, at)?;
        if self.word("continuous") {
            return Ok(Head::Flat(first, Compounding::Continuous));
        }
        if self.is_word("at") {
            return self.points(first);
        }
        if self.is_word("to") || self.is_word("after") {
            return Ok(Head::Bands(self.bands(first, false)?));
        }
        if self.finished() || self.is_sign(';') {
            return Ok(Head::Flat(first, Compounding::Yearly));
        }
        let words = ["to", "at", "after", "continuous", "of"];
        Err(self.unexpected("`to`, `at`, `after`, `continuous`, `;` or the end", &words).into())
    }

    /// A number without `%`, as in a number cell: a flat yearly rate as a fraction.
    fn bare_fraction(&mut self) -> Parsed<Option<Head>> {
        let Kind::Number(text) = self.token().kind.clone() else { return Ok(None) };
        let ends = matches!(self.peek(1).kind, Kind::End | Kind::Sign(';' | ')'));
        let continuous = self.peek(1).kind == Kind::Word("continuous".into());
        if !ends && !continuous {
            return Ok(None);
        }
        let rate = of_decimal(&text);
        check_flat(rate, &text).map_err(|error| error.with_at(self.at()))?;
        self.skip();
        self.word("continuous");
        let compounding = if continuous { Compounding::Continuous } else { Compounding::Yearly };
        Ok(Some(Head::Flat(rate, compounding)))
    }

    /// Bands of rates or of growth, their first value read and its `to` or `after` next.
    fn bands(&mut self, first: f64, growth: bool) -> Parsed<Vec<Band>> {
        let mut bands = Vec::new();
        let mut value = first;
        loop {
            if self.one_of(&["to", "after"])? == "after" {
                bands.push(Band { value, to: None });
                return Ok(bands);
            }
            let at = self.at();
            let edge = self.edge()?;
            let before = bands.iter().rev().find_map(|band: &Band| match (band.to, edge) {
                (Some(Edge::Offset(before)), Edge::Offset(now)) => Some(before >= now),
                (Some(Edge::Year(before)), Edge::Year(now)) => Some(before >= now),
                _ => None,
            });
            if before == Some(true) {
                let message = format!("the edge {edge} does not come after the edge before it");
                return Err(self.error_at(ErrorKind::Edges, at, message).into());
            }
            bands.push(Band { value, to: Some(edge) });
            // After growth and a comma may come the next parameter instead of the next band.
            if !self.is_sign(',') || (growth && matches!(self.peek(1).kind, Kind::Word(_))) {
                return Ok(bands);
            }
            self.sign(',');
            let at = self.at();
            value = self.percent()?;
            if !growth {
                self.check_rate(value, at)?;
            }
            if self.finished() || self.is_sign(';') {
                let error = self.unexpected("`to` with the edge of the band, or `after`", &[]);
                return Err(error
                    .with_hint(format!("`{} after` where it holds for ever", percent(value)))
                    .into());
            }
        }
    }

    /// Points, the first rate read and its `at` next.
    fn points(&mut self, first: f64) -> Parsed<Head> {
        let mut points: Vec<(f64, f64)> = Vec::new();
        let mut rate = first;
        loop {
            self.one_of(&["at"])?;
            let at = self.at();
            let years = self.number("a number of years")?;
            if !(0.0..FIRST_YEAR).contains(&years) {
                let message =
                    format!("a point stands at {} years, allowed from 0 to under 1000", plain(years));
                return Err(self.error_at(ErrorKind::Edges, at, message).into());
            }
            if points.last().is_some_and(|last| last.0 >= years) {
                let message =
                    format!("the point at {} does not come after the point before it", plain(years));
                return Err(self.error_at(ErrorKind::Edges, at, message).into());
            }
            points.push((years, rate));
            if !self.sign(',') {
                return Ok(Head::Points(points));
            }
            let at = self.at();
            rate = self.percent()?;
            self.check_rate(rate, at)?;
        }
    }

    /// `preference`, `hazard`, `elasticity` and `growth` in any order.
    fn ramsey(&mut self) -> Parsed<Head> {
        const WORDS: [&str; 5] = ["preference", "hazard", "elasticity", "growth", "log"];
        let (mut preference, mut hazard, mut elasticity, mut growth) = (None, None, None, None);
        loop {
            let at = self.at();
            let twice = match self.one_of(&WORDS)? {
                "preference" => preference.replace(self.percent()?).is_some(),
                "hazard" => hazard.replace(self.percent()?).is_some(),
                "elasticity" => elasticity.replace(self.decimal("a plain number such as `1.5`")?).is_some(),
                "growth" => growth.replace(self.growth(false)?).is_some(),
                _ => {
                    self.one_of(&["growth"])?;
                    growth.replace(self.growth(true)?).is_some()
                }
            };
            if twice {
                return Err(self.error_at(ErrorKind::Syntax, at, "this parameter is given twice").into());
            }
            if !self.sign(',') {
                break;
            }
        }
        let missing = |name: &str, hint: &str| self.error(format!("`{name}` is missing")).with_hint(hint);
        let ramsey = Ramsey {
            preference: preference.ok_or_else(|| {
                missing("preference", "`preference 0%` where there is no pure time preference")
            })?,
            hazard: hazard.unwrap_or(0.0),
            elasticity: elasticity
                .ok_or_else(|| missing("elasticity", "`elasticity 1` and the growth, or a flat rate"))?,
            growth: growth.ok_or_else(|| missing("growth", "`growth 2%`, or `growth 2% to 50, 1% after`"))?,
        };
        Ok(Head::Ramsey(ramsey))
    }

    /// What follows `growth`.
    fn growth(&mut self, log: bool) -> Parsed<Growth> {
        let mean = self.percent()?;
        if self.is_word("sd") || log {
            self.one_of(&["sd"])?;
            let sd = self.percent()?;
            let persistence = if log && self.word("persistence") {
                Some(Persistence { phi: self.decimal("a number between -1 and 1")?, start: 0.0 })
            } else {
                None
            };
            if self.is_word("persistence") {
                let error = self.error("`persistence` is that of log growth");
                return Err(error.with_hint("`log growth` in place of `growth`").into());
            }
            return Ok(Growth::Uncertain { mean, sd, log, persistence });
        }
        if self.is_word("to") || self.is_word("after") {
            return Ok(Growth::Path(self.bands(mean, true)?));
        }
        if self.finished() || self.is_sign(';') || self.is_sign(',') {
            return Ok(Growth::Path(vec![Band { value: mean, to: None }]));
        }
        Err(self.unexpected("`to`, `after`, `sd`, `,`, `;` or the end", &["to", "after", "sd"]).into())
    }

    fn gamma(&mut self) -> Parsed<Head> {
        self.one_of(&["mean"])?;
        let mean = self.percent()?;
        self.sign(',');
        self.one_of(&["sd"])?;
        let sd = self.percent()?;
        Ok(Head::Gamma { mean, sd })
    }

    /// `0.5 of (1%), 0.5 of (7% continuous)`.
    fn mixture(&mut self, depth: usize) -> Parsed<Head> {
        let start = self.at();
        if depth == MAX_DEPTH {
            return Err(self.error(format!("mixtures are nested more than {MAX_DEPTH} deep")).into());
        }
        let mut parts = Vec::new();
        loop {
            let at = self.at();
            let text = self.number_text("a weight such as `0.5`")?;
            let weight = if self.sign('%') { of_percent(&text) } else { of_decimal(&text) };
            if !(0.0..=1.0).contains(&weight) {
                let message = format!("a weight is {}, allowed 0 to 1", plain(weight));
                return Err(self.error_at(ErrorKind::Weights, at, message).into());
            }
            self.refuse_comma()?;
            self.one_of(&["of"])?;
            if !self.sign('(') {
                let error = self.unexpected("`(` before the curve", &[]);
                return Err(error.with_hint("`0.5 of (1%), 0.5 of (7%)`").into());
            }
            let (spec, _) = self.curve(Allowed::Curve, depth + 1)?;
            if !self.sign(')') {
                return Err(self.unexpected("`)` after the curve", &[]).into());
            }
            parts.push((weight, spec));
            if !self.sign(',') {
                break;
            }
        }
        let total: f64 = parts.iter().map(|part| part.0).sum();
        if (total - 1.0).abs() > WEIGHT_TOLERANCE {
            let message = format!("the weights sum to {}, and must sum to 1", plain(total));
            return Err(self.error_at(ErrorKind::Weights, start, message).into());
        }
        Ok(Head::Mixture(parts))
    }

    /// An edge: years from the base, or a calendar year.
    fn edge(&mut self) -> Parsed<Edge> {
        let at = self.at();
        let number = self.number("the edge of the band, in years or as a calendar year")?;
        if number >= FIRST_YEAR {
            return Ok(Edge::Year(self.whole_year(number, at)?));
        }
        if number <= 0.0 {
            let message = format!("the edge of a band is {}, allowed above 0", plain(number));
            return Err(self.error_at(ErrorKind::Edges, at, message).into());
        }
        Ok(Edge::Offset(number))
    }

    /// A calendar year.
    pub(super) fn year(&mut self) -> Parsed<i32> {
        let at = self.at();
        let number = self.number("a calendar year")?;
        self.whole_year(number, at)
    }

    fn whole_year(&self, number: f64, at: usize) -> Parsed<i32> {
        if (FIRST_YEAR..=LAST_YEAR).contains(&number) && number.fract() == 0.0 {
            return Ok(number as i32);
        }
        let message = format!("the year is {}, allowed are whole years from 1000 to 9999", plain(number));
        Err(self.error_at(ErrorKind::Edges, at, message).into())
    }

    fn check_rate(&self, rate: f64, at: usize) -> Parsed<()> {
        if in_range(rate) {
            return Ok(());
        }
        Err(self.error_at(ErrorKind::RateRange, at, out_of_range(rate, None)).into())
    }
}
