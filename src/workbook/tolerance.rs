//! How far a cell may be from the exact number: 1e-9 of a factor, half of the last displayed unit of a total.

use crate::appraisal::{Target, TargetRole};

/// Relative tolerance of factors, and of totals whose format shows every digit.
pub const RELATIVE: f64 = 1e-9;

/// The absolute tolerance of one cell of a target.
pub fn of_cell(target: &Target, index: usize, expected: f64) -> f64 {
    let relative = RELATIVE * expected.abs();
    match target.role {
        TargetRole::Factor | TargetRole::StreamFactor(_) | TargetRole::Rates => relative,
        _ => match target.formats.get(index).and_then(|f| f.as_deref()).and_then(half_unit) {
            Some(half) => half.max(relative),
            None => relative,
        },
    }
}

/// In words, for the audit sheets and the README.
pub fn words() -> String {
    format!(
        "factors within {RELATIVE:e} of their size; totals within half of the last displayed unit, or {RELATIVE:e} \
         of their size where the format shows all digits"
    )
}

/// Half of the last unit that a number format displays; none for General, text and dates.
pub fn half_unit(format: &str) -> Option<f64> {
    let section = first_section(format);
    let mut decimals = 0i32;
    let mut after_point = false;
    let mut digits = false;
    let mut scale = 0i32;
    let mut pending_commas = 0i32;
    let mut percents = 0i32;
    for c in section.chars() {
        match c {
            '0' | '#' | '?' => {
                digits = true;
                pending_commas = 0;
                if after_point {
                    decimals += 1;
                }
            }
            '.' => {
                after_point = true;
                scale += pending_commas;
                pending_commas = 0;
            }
            // Commas between digits group; commas after the last digit divide by a thousand each.
            ',' if digits => pending_commas += 1,
            '%' => percents += 1,
            // Scientific and fraction formats show significant digits instead.
            'E' | 'e' | '/' => return None,
            _ => {}
        }
    }
    scale += pending_commas;
    // Powers of ten are exact, powers of a tenth are not: dividing gives the same on every machine.
    let exponent = 3 * scale - decimals - 2 * percents;
    let power = 10f64.powi(exponent.abs());
    digits.then(|| if exponent < 0 { 0.5 / power } else { 0.5 * power })
}

/// The positive section without quoted text, brackets, escapes, padding and fill.
fn first_section(format: &str) -> String {
    let mut out = String::new();
    let mut chars = format.chars();
    while let Some(c) = chars.next() {
        match c {
            ';' => break,
            '"' => {
                for q in chars.by_ref() {
                    if q == '"' {
                        break;
                    }
                }
            }
            '[' => {
                for q in chars.by_ref() {
                    if q == ']' {
                        break;
                    }
                }
            }
            '\\' | '_' | '*' => {
                chars.next();
            }
            _ => out.push(c),
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use super::half_unit;

    // The format codes' meaning is that of ISO/IEC 29500-1, 18.8.31 (numFmts).
    #[test]
    fn formats_show_units() {
        // To the bit: the audit sheet prints them.
        let shows = |format: &str, expected: f64| assert_eq!(half_unit(format), Some(expected), "{format}");
        shows("0", 0.5);
        shows("#,##0", 0.5);
        shows("#,##0.00", 0.005);
        shows("0.0%", 0.0005);
        shows("#,##0,", 500.0);
        shows("#,##0.0,,", 50_000.0);
        shows("#,##0.0,,\"m\"", 50_000.0);
        shows("[$\u{a3}-809]#,##0.00;[Red]-#,##0", 0.005);
        shows("_-* #,##0_-;-* #,##0_-", 0.5);
        shows("0.0000", 0.00005);
        for none in ["General", "@", "yyyy-mm-dd", "0.00E+00", "# ?/?"] {
            assert_eq!(half_unit(none), None, "{none}");
        }
    }
}
