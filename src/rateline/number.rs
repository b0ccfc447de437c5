//! Decimal numbers and percentages without any arithmetic: the decimal point is moved in the text.
use crate::{Error, ErrorKind, Result};

/// Moves the decimal point of a plain decimal by `places` to the right (to the left where negative).
///
/// Moving it in the text keeps "3.5%" the double nearest to 0.035, which a division by 100 does not promise.
pub(crate) fn move_point(decimal: &str, places: i32) -> String {
    let (sign, digits) = match decimal.strip_prefix('-') {
        Some(rest) => ("-", rest),
        None => ("", decimal),
    };
    let (whole, part) = digits.split_once('.').unwrap_or((digits, ""));
    let mut all = format!("{whole}{part}");
    let mut point = whole.len() as i64 + i64::from(places);
    while point < 1 {
        all.insert(0, '0');
        point += 1;
    }
    while (all.len() as i64) < point {
        all.push('0');
    }
    let (whole, part) = all.split_at(point as usize);
    let whole = whole.trim_start_matches('0');
    let part = part.trim_end_matches('0');
    let whole = if whole.is_empty() { "0" } else { whole };
    let sign = if whole == "0" && part.is_empty() { "" } else { sign };
    if part.is_empty() { format!("{sign}{whole}") } else { format!("{sign}{whole}.{part}") }
}

/// The double nearest to `decimal` percent; infinite where it is too large for a double.
pub(crate) fn of_percent(decimal: &str) -> f64 {
    of_decimal(&move_point(decimal, -2))
}

/// The double nearest to `decimal`, which the lexer has found to be a plain decimal.
pub(crate) fn of_decimal(decimal: &str) -> f64 {
    // Adding zero turns -0 into 0, so that equal curves print alike.
    decimal.parse::<f64>().unwrap_or(f64::NAN) + 0.0
}

/// A rate as the shortest percentage that reads back as the same double.
///
/// **Arguments**: `rate`, a fraction per year.
/// **Returns**: the shortest decimal of the double with its point moved two places, and a percent sign; not
/// rounded. Not a number and the infinities print as such.
///
/// ```
/// assert_eq!(hence_core::percent(0.035), "3.5%");
/// assert_eq!(hence_core::percent(-0.0025), "-0.25%");
/// ```
pub fn percent(rate: f64) -> String {
    if rate.is_finite() { format!("{}%", move_point(&rate.to_string(), 2)) } else { rate.to_string() }
}

/// A plain number, the shortest that reads back; never "-0".
pub(crate) fn plain(number: f64) -> String {
    (number + 0.0).to_string()
}

/// A rate rounded to so many decimals of a percent: the double that the shorter percentage reads back as.
pub(crate) fn rounded_percent(rate: f64, decimals: u8) -> f64 {
    of_percent(&move_point(&format!("{rate:.*}", usize::from(decimals) + 2), 2))
}

/// A number rounded to so many decimals.
pub(crate) fn rounded_number(number: f64, decimals: u8) -> f64 {
    of_decimal(&format!("{number:.*}", usize::from(decimals)))
}

/// Whether a yearly rate is allowed: above -50%, at most 100%.
pub(crate) fn in_range(rate: f64) -> bool {
    rate > -0.5 && rate <= 1.0
}

/// What to say of a rate that is not allowed, with what was written or stored where that was no percentage.
pub(crate) fn out_of_range(rate: f64, stored: Option<&str>) -> String {
    let stored = stored.map_or(String::new(), |text| format!(" (stored {text})"));
    let least = if rate == -0.5 { "more than -50%, up to" } else { "-50% to" };
    format!("rate is {}{stored}, allowed {least} 100%", percent(rate))
}

/// Checks a rate that is given as a number, `text` as it is written.
pub(crate) fn check_flat(rate: f64, text: &str) -> Result<()> {
    if !rate.is_finite() {
        return Err(Error::new(
            ErrorKind::NotFinite,
            "basis",
            format!("rate is {rate}, and must be a number"),
        ));
    }
    if in_range(rate) {
        return Ok(());
    }
    let error = Error::new(ErrorKind::RateRange, "basis", out_of_range(rate, Some(text)));
    // Percent typed without its sign is the usual slip.
    let slip = rate > 1.0 && rate <= 100.0;
    Err(if slip {
        error.with_hint(format!("enter {}% or {}", move_point(text, 0), move_point(text, -2)))
    } else {
        error
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_point_moves_in_the_text() {
        for (from, places, to) in [
            ("3.5", -2, "0.035"),
            ("0.035", 2, "3.5"),
            ("-12", -2, "-0.12"),
            ("100", -2, "1"),
            ("1", 2, "100"),
            ("0", 2, "0"),
            ("-0", -2, "0"),
            ("0.001", 2, "0.1"),
            ("007", -2, "0.07"),
        ] {
            assert_eq!(move_point(from, places), to, "{from} by {places}");
        }
    }

    #[test]
    fn percent_is_exact_where_division_is_not() {
        // 2.9/100 and 0.029 differ in the last place.
        assert_ne!(2.9 / 100.0, 0.029);
        assert_eq!(of_percent("2.9"), 0.029);
        assert_eq!(percent(0.029), "2.9%");
        assert_eq!(percent(0.1 + 0.2), "30.000000000000004%");
    }

    #[test]
    fn rounding_is_of_the_text() {
        assert_eq!(rounded_percent(0.013_590_674, 2), 0.0136);
        assert_eq!(percent(rounded_percent(-0.000_04, 2)), "0%");
        assert_eq!(rounded_number(1.775_66, 2), 1.78);
    }

    #[test]
    fn zero_has_no_sign_and_overflow_is_infinite() {
        assert!(of_percent("-0").is_sign_positive());
        assert_eq!(percent(-0.0), "0%");
        assert!(of_percent(&"9".repeat(400)).is_infinite());
        assert_eq!(percent(f64::NAN), "NaN");
    }
}
