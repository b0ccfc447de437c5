//! A map over two parts of a Ramsey rate: which option is best where, and where each is worth nothing.

use hence_core::{Curve, ErrorKind, Parameter, Spec, Tail, Where, switching_values};

use super::Valued;
use crate::clock::base_year;
use crate::dated::Flows;
use crate::problem::{Place, Problem, Result};
use crate::ranking::{Worth, best, over};

/// Points across and up.
const ACROSS: usize = 81;
const UP: usize = 61;

/// The net present value of every option at the points of a grid.
#[derive(Clone, Debug, PartialEq)]
pub struct Map {
    /// The basis whose parts move.
    pub basis: String,
    /// What moves up the map: elasticity or growth. Preference moves across it.
    pub up: Parameter,
    /// Preferences, rising.
    pub xs: Vec<f64>,
    /// Elasticities or growths, rising.
    pub ys: Vec<f64>,
    /// Where the basis itself stands.
    pub here: (f64, f64),
    /// By option, then up, then across: what it is worth, over the baseline where there is one; none where no curve has
    /// those parts, or a value has no end.
    pub worth: Vec<Vec<Vec<Option<Worth>>>>,
    /// Where the zero lines run, by rows of the map.
    pub zero: Vec<ZeroRow>,
}

/// Where each option is worth nothing (or as much as the baseline) in one row of a map.
#[derive(Clone, Debug, PartialEq)]
pub struct ZeroRow {
    /// The row.
    pub up: usize,
    /// By option: every preference on the map at which its value is zero.
    pub values: Vec<Vec<f64>>,
    /// By option: whether the number of those could not be settled.
    pub open: Vec<bool>,
}

/// Zero lines are followed in every so many rows.
pub const ZERO_ROWS: usize = 3;

impl Map {
    /// The map of what was valued on a Ramsey basis.
    ///
    /// # Errors
    /// There is no such basis.
    pub(super) fn of(valued: Option<&Valued>, up: Parameter) -> Result<Map> {
        let spec = valued.map(|valued| valued.outcomes[0].basis.spec());
        let parts = spec.and_then(|spec| Some((Parameter::Preference.of(spec)?, up.of(spec)?)));
        let (Some(valued), Some(here)) = (valued, parts) else {
            let message =
                "a map needs a basis stated by preference, elasticity and growth, the same for all options";
            return Err(Problem::error("map-basis", Place::default(), message)
                .hint("--against with such a line: preference 1%, elasticity 1.5, growth 2%")
                .into());
        };
        let (xs, ys) = (points(Parameter::Preference, here.0, ACROSS), points(up, here.1, UP));
        let mut worth = vec![vec![vec![None; xs.len()]; ys.len()]; valued.outcomes.len()];
        for (j, &y) in ys.iter().enumerate() {
            for (i, &x) in xs.iter().enumerate() {
                let change = |spec: &Spec| up.at(&Parameter::Preference.at(spec, x)?, y);
                if let Some(values) = worth_of_all(valued, &change) {
                    for (option, value) in values.into_iter().enumerate() {
                        worth[option][j][i] = Some(value);
                    }
                }
            }
        }
        let rows = (0..ys.len()).step_by(ZERO_ROWS);
        let zero = rows.map(|j| zero_row(valued, up, &xs, (j, ys[j]))).collect();
        Ok(Map { basis: valued.outcomes[0].basis.canonical(), up, xs, ys, here, worth, zero })
    }

    /// The net present value of an option, up then across.
    pub(super) fn npv(&self, option: usize) -> Vec<Vec<Option<f64>>> {
        let row = |row: &Vec<Option<Worth>>| row.iter().map(|worth| worth.map(|worth| worth.npv)).collect();
        self.worth[option].iter().map(row).collect()
    }

    /// The values of all options at a point.
    pub fn at(&self, i: usize, j: usize) -> Option<Vec<Worth>> {
        self.worth.iter().map(|rows| rows[j][i]).collect()
    }

    /// The best option at a point, none where several are; and whether even the best is worth less than nothing.
    pub fn best(&self, i: usize, j: usize) -> Option<(Option<usize>, bool)> {
        let values = self.at(i, j)?;
        Some((best(&values), values.iter().all(|value| value.sign() < 0)))
    }

    /// What a point shows: the letter of the best option, in brackets where it is worth less than nothing; `=` where several
    /// are best, a dot where nothing has a value.
    pub fn letter(&self, i: usize, j: usize) -> String {
        match self.best(i, j) {
            None => ".".to_owned(),
            Some((best, negative)) => {
                let letter = best.map_or_else(|| "=".to_owned(), option_letter);
                if negative { format!("({letter})") } else { letter }
            }
        }
    }

    /// The point nearest to where the basis stands.
    pub fn here_point(&self) -> (usize, usize) {
        let nearest = |points: &[f64], at: f64| {
            let apart = |k: &usize| (points[*k] - at).abs();
            (0..points.len()).min_by(|a, b| apart(a).total_cmp(&apart(b))).unwrap_or(0)
        };
        (nearest(&self.xs, self.here.0), nearest(&self.ys, self.here.1))
    }
}

/// The letter of an option on a map: A to Z, then A1 and on.
pub fn option_letter(option: usize) -> String {
    let letter = char::from(b'A' + (option % 26) as u8);
    if option < 26 { letter.to_string() } else { format!("{letter}{}", option / 26) }
}

/// Values of a part from where it is small to twice what it is, at least to what is often met, by steps that read well.
fn points(parameter: Parameter, here: f64, count: usize) -> Vec<f64> {
    let (low, high): (f64, f64) = match parameter {
        Parameter::Elasticity => (0.0, 4.0),
        Parameter::Growth => (-0.01, 0.05),
        _ => (0.0, 0.06),
    };
    let low = low.min(2.0 * here);
    let mut high = high;
    while high < 2.0 * here {
        high *= 2.0;
    }
    // The last point is the end itself, not what rounding leaves of it.
    let point = |k| if k + 1 == count { high } else { low + (high - low) * k as f64 / (count - 1) as f64 };
    (0..count).map(point).collect()
}

/// The zero lines in one row, found as switching values are.
fn zero_row(valued: &Valued, up: Parameter, xs: &[f64], (j, y): (usize, f64)) -> ZeroRow {
    let interval = (xs[0], xs[xs.len() - 1]);
    let baseline = valued.appraisal.baseline;
    let mut row = ZeroRow { up: j, values: Vec::new(), open: Vec::new() };
    for (option, outcome) in valued.outcomes.iter().enumerate() {
        let flows = match baseline {
            Some(baseline) => outcome.dated.less(&valued.outcomes[baseline].dated),
            None => outcome.dated.clone(),
        };
        let length = Some(outcome.length);
        let at = Where { base_year: base_year(&valued.appraisal.choices[option].base.value), length };
        let preference = Parameter::Preference;
        let found = up
            .at(outcome.basis.spec(), y)
            .map(|spec| switching_values(&flows.net(), &spec, &at, preference, interval));
        let (values, open) = match found {
            Some(Ok(found)) => (found.values, !found.unresolved.is_empty()),
            // Nothing but zeros, or no curve there: no line.
            Some(Err(error)) => (Vec::new(), error.kind() == ErrorKind::Unsupported),
            None => (Vec::new(), false),
        };
        row.values.push(values);
        row.open.push(open);
    }
    row
}

/// What every option is worth with its spec changed, over the baseline where there is one.
fn worth_of_all(valued: &Valued, change: &dyn Fn(&Spec) -> Option<Spec>) -> Option<Vec<Worth>> {
    let mut values = Vec::with_capacity(valued.outcomes.len());
    for (choice, outcome) in valued.appraisal.choices.iter().zip(&valued.outcomes) {
        let length = Some(outcome.length);
        let at = Where { base_year: base_year(&choice.base.value), length };
        let curve = change(outcome.basis.spec())?.curve(&at).ok()?;
        values.push(worth(&outcome.dated, &curve)?);
    }
    let values = over(values, valued.appraisal.baseline);
    values.iter().all(|value| value.npv.is_finite()).then_some(values)
}

/// The present value of dated flows, and their size.
fn worth(flows: &Flows, curve: &Curve) -> Option<Worth> {
    let mut factors = vec![0.0; flows.offsets.len()];
    curve.factors(&flows.offsets, &mut factors).ok()?;
    let mut terms: Vec<f64> = factors.iter().zip(&flows.flows).map(|(factor, flow)| factor * flow).collect();
    for perpetual in &flows.perpetual {
        let tail = Tail { growth: perpetual.growth, every: perpetual.every, to: None };
        terms.push(tail.present_value(curve, perpetual.start, perpetual.flow, None).ok()?);
    }
    Some(Worth::of_streams(&terms))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_map_reaches_twice_as_far_as_the_basis() {
        let reach = |parameter, here| {
            let points = points(parameter, here, 5);
            (points[0], points[4])
        };
        assert_eq!(reach(Parameter::Preference, 0.01), (0.0, 0.06));
        assert_eq!(reach(Parameter::Preference, 0.05), (0.0, 0.12));
        assert_eq!(reach(Parameter::Preference, -0.01), (-0.02, 0.06));
        assert_eq!(reach(Parameter::Elasticity, 1.5), (0.0, 4.0));
        assert_eq!(reach(Parameter::Growth, -0.02), (-0.04, 0.05));
    }

    #[test]
    fn letters_go_on_after_the_alphabet() {
        assert_eq!([0, 25, 26, 53].map(option_letter), ["A", "Z", "A1", "B2"]);
    }
}
