//! Every value at which an option's net present value is zero, or equals another's.

use std::fmt;

use hence_core::{ErrorKind, Parameter, Spec, Switching, Where, switching_multiplier, switching_values};

use super::Valued;
use super::changes::{Change, best_changes};
use crate::appraisal::{Choice, Stream};
use crate::clock::base_year;
use crate::outcome::ChoiceOutcome;
use crate::ranking::Worth;
use crate::valuation::{side, worth_on};

/// The multipliers of a stream that are stated.
pub const MULTIPLIERS: (f64, f64) = (-1000.0, 1000.0);

/// What moves.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Moved {
    /// A parameter of the basis.
    Parameter(Parameter),
    /// One stream of the option, multiplied.
    Multiplier(String),
}

impl fmt::Display for Moved {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Moved::Parameter(parameter) => write!(f, "{parameter}"),
            Moved::Multiplier(stream) => write!(f, "multiplier:{stream}"),
        }
    }
}

/// The switching values of one option in one parameter.
#[derive(Clone, Debug, PartialEq)]
pub struct Entry {
    /// Index of the option.
    pub option: usize,
    /// The other option; none where it is held against zero.
    pub against: Option<usize>,
    /// What moves.
    pub moved: Moved,
    /// Every value found, rising.
    pub values: Vec<f64>,
    /// Intervals in which the number of values could not be settled.
    pub unresolved: Vec<(f64, f64)>,
    /// The interval searched.
    pub interval: (f64, f64),
    /// Why there is no value, where that needs saying.
    pub note: Option<String>,
}

/// The first basis that is stated by preference, elasticity and growth, and is that of all options.
pub(super) fn ramsey_basis(valued: &[Valued]) -> Option<&Valued> {
    valued.iter().find(|valued| {
        let first = &valued.outcomes[0].basis;
        let same = valued.outcomes.iter().all(|outcome| outcome.basis == *first);
        same && Parameter::Elasticity.of(first.spec()).is_some()
    })
}

/// Every entry, and where the best option changes. The rate and the multipliers are searched with the flows as the
/// declared basis dates them, the other parameters with those of the Ramsey basis.
pub(super) fn search(declared: &Valued, ramsey: Option<&Valued>, pairs: bool) -> (Vec<Entry>, Vec<Change>) {
    let count = declared.outcomes.len();
    let mut entries = Vec::new();
    for option in 0..count {
        let others = (0..count).filter(|other| pairs && *other != option).map(Some);
        for other in std::iter::once(None).chain(others) {
            for parameter in Parameter::ALL {
                // Where two options swap does not depend on which is named first.
                let mirrored = entries.iter().find(|entry: &&Entry| {
                    other.is_some()
                        && entry.moved == Moved::Parameter(parameter)
                        && (Some(entry.option), entry.against) == (other, Some(option))
                });
                let entry = match mirrored {
                    Some(entry) => Entry { option, against: other, ..entry.clone() },
                    None => parameter_entry(declared, ramsey, option, other, parameter),
                };
                entries.push(entry);
            }
            for stream in 0..declared.appraisal.choices[option].streams.len() {
                entries.push(multiplier(declared, option, other, stream));
            }
        }
    }
    if !pairs {
        return (entries, Vec::new());
    }
    let changes = Parameter::ALL
        .into_iter()
        .flat_map(|parameter| {
            let valued = if parameter == Parameter::Rate { Some(declared) } else { ramsey };
            valued.map(|valued| best_changes(valued, &entries, parameter)).unwrap_or_default()
        })
        .collect();
    (entries, changes)
}

/// What an option is held against: another, else the baseline where there is one, else zero. None for the baseline
/// itself, which is nothing over itself.
fn opposite(valued: &Valued, option: usize, other: Option<usize>) -> Option<Option<usize>> {
    match (other, valued.appraisal.baseline) {
        (Some(other), _) => Some(Some(other)),
        (None, Some(baseline)) if baseline == option => None,
        (None, baseline) => Some(baseline),
    }
}

const BASELINE: &str = "the baseline, which is nothing over itself";

fn parameter_entry(
    declared: &Valued,
    ramsey: Option<&Valued>,
    option: usize,
    other: Option<usize>,
    parameter: Parameter,
) -> Entry {
    let entry = Entry {
        option,
        against: other,
        moved: Moved::Parameter(parameter),
        values: Vec::new(),
        unresolved: Vec::new(),
        interval: parameter.interval(),
        note: None,
    };
    let noted = |note: &str| Entry { note: Some(note.to_owned()), ..entry.clone() };
    let valued = if parameter == Parameter::Rate { Some(declared) } else { ramsey };
    let Some(valued) = valued else {
        return noted(
            "no basis that takes part is stated by preference, elasticity and growth for all options",
        );
    };
    let Some(opposite) = opposite(valued, option, other) else { return noted(BASELINE) };
    let own = &valued.outcomes[option];
    let base = opposite.map(|i| &valued.outcomes[i]);
    if base.is_some_and(|base| base.base_words != own.base_words) {
        return noted("the two are valued at different bases");
    }
    let at = place(valued, option, opposite);
    let flows = base.map_or_else(|| own.dated.clone(), |base| own.dated.less(&base.dated));
    match switching_values(&flows.net(), own.basis.spec(), &at, parameter, parameter.interval()) {
        Ok(Switching { values, unresolved, interval, moves }) => {
            let note = (!moves).then(|| format!("{parameter} moves nothing"));
            Entry { values, unresolved, interval, note, ..entry }
        }
        Err(error) if error.kind() == ErrorKind::NoMeaning => {
            noted(if base.is_some() { "the two are equal at every value" } else { "every flow is 0" })
        }
        Err(error) => {
            let unresolved = vec![entry.interval];
            let note = Some(format!("not searched: {}", error.message()));
            Entry { unresolved, note, ..entry }
        }
    }
}

/// What the curves of an option and its opposite may need to know: the base year, and the longer of their lengths.
fn place(valued: &Valued, option: usize, opposite: Option<usize>) -> Where {
    let choices = std::iter::once(option).chain(opposite);
    let length = choices.map(|i| valued.outcomes[i].length).fold(0.0, f64::max);
    Where { base_year: base_year(&valued.appraisal.choices[option].base.value), length: Some(length) }
}

/// A stream's present value with its sign in the net.
fn signed(stream: &Stream, pv: f64) -> f64 {
    let (above, below) = side(stream.kind);
    (above - below) * pv
}

/// The name of a stream among those of its option: with its kind where another bears the same.
fn stream_name(choice: &Choice, stream: &Stream) -> String {
    let same = choice.streams.iter().filter(|other| other.name == stream.name).count();
    if same < 2 {
        return stream.name.clone();
    }
    format!("{} ({})", stream.name, format!("{:?}", stream.kind).to_lowercase())
}

fn multiplier(declared: &Valued, option: usize, other: Option<usize>, stream: usize) -> Entry {
    let choice = &declared.appraisal.choices[option];
    let entry = Entry {
        option,
        against: other,
        moved: Moved::Multiplier(stream_name(choice, &choice.streams[stream])),
        values: Vec::new(),
        unresolved: Vec::new(),
        interval: MULTIPLIERS,
        note: None,
    };
    let Some(opposite) = opposite(declared, option, other) else {
        return Entry { note: Some(BASELINE.to_owned()), ..entry };
    };
    let own = &declared.outcomes[option];
    let mut net = own.absolute.npv;
    let mut part = signed(&choice.streams[stream], own.streams[stream].pv);
    if let Some(i) = opposite {
        let (base_choice, base) = (&declared.appraisal.choices[i], &declared.outcomes[i]);
        net -= base.absolute.npv;
        // Cells that both options share move in both.
        let shared = |other: &Stream| {
            other.at == choice.streams[stream].at && other.kind == choice.streams[stream].kind
        };
        let theirs = base_choice.streams.iter().zip(&base.streams).filter(|(other, _)| shared(other));
        part -= theirs.map(|(other, outcome)| signed(other, outcome.pv)).sum::<f64>();
    }
    match switching_multiplier(net, part) {
        Ok(Some(x)) if x >= MULTIPLIERS.0 && x <= MULTIPLIERS.1 => Entry { values: vec![x], ..entry },
        Ok(Some(x)) => Entry { note: Some(format!("it would take {x:.0} times as much")), ..entry },
        _ => Entry { note: Some("the stream makes no difference".to_owned()), ..entry },
    }
}

/// What the options are worth as they stand, their spec changed.
pub(super) fn worths_at(valued: &Valued, change: &dyn Fn(&Spec) -> Option<Spec>) -> Option<Vec<Worth>> {
    let choices = valued.appraisal.choices.iter().zip(&valued.outcomes);
    choices
        .map(|(choice, outcome): (&Choice, &ChoiceOutcome)| {
            let length = Some(outcome.length);
            let at = Where { base_year: base_year(&choice.base.value), length };
            let curve = change(outcome.basis.spec())?.curve(&at).ok()?;
            let worth = worth_on(&valued.appraisal, choice, outcome, &curve).ok();
            worth.filter(|worth| worth.npv.is_finite())
        })
        .collect()
}
