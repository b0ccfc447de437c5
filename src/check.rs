//! The checks that every numerical function makes of its arguments, with one wording.

use multiversion::multiversion;

use crate::{Error, ErrorKind, Result};

/// Refuses a NaN or an infinity in an array, naming its index.
pub(crate) fn finite_all(argument: &'static str, values: &[f64]) -> Result<()> {
    if all_finite(values) {
        return Ok(());
    }
    match values.iter().position(|value| !value.is_finite()) {
        Some(index) => Err(not_finite(argument, values[index]).with_index(index)),
        None => Ok(()),
    }
}

/// Whether no number is NaN or infinite.
#[multiversion(targets = "simd")]
pub(crate) fn all_finite(values: &[f64]) -> bool {
    values.iter().fold(true, |all, value| all & value.is_finite())
}

/// Refuses a NaN or an infinity.
pub(crate) fn finite(argument: &'static str, value: f64) -> Result<()> {
    if value.is_finite() { Ok(()) } else { Err(not_finite(argument, value)) }
}

fn not_finite(argument: &'static str, value: f64) -> Error {
    Error::new(ErrorKind::NotFinite, argument, format!("found {value}, allowed: finite numbers"))
        .with_hint("replace it with a number; a flow that is not there is 0")
}

/// Refuses a second array whose length differs from the first's.
pub(crate) fn same_length(first: (&'static str, &[f64]), second: (&'static str, &[f64])) -> Result<()> {
    let (found, due) = (second.1.len(), first.1.len());
    if found == due {
        return Ok(());
    }
    let message = format!("found {found} numbers, due are {due}, one for each of {}", first.0);
    Err(Error::new(ErrorKind::Shape, second.0, message).with_hint("give both arrays the same length"))
}

/// Passes a result on unless it has overflowed.
pub(crate) fn result(argument: &'static str, value: f64) -> Result<f64> {
    if value.is_finite() {
        return Ok(value);
    }
    Err(Error::new(ErrorKind::NotFinite, argument, "the result is too large for a number")
        .with_hint("state the flows in larger units (thousands, millions)"))
}
