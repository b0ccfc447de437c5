//! Numbers and names as a brief writes them.

use hence_core::Parameter;

use crate::drawing::grouped;

/// A text on one line.
pub(super) fn plain(text: &str) -> String {
    text.split_whitespace().collect::<Vec<_>>().join(" ")
}

/// A name in quotes, so that it is seen where it ends.
pub(super) fn quoted(name: &str) -> String {
    format!("\u{201c}{}\u{201d}", plain(name))
}

/// Money to the nearest unit, two decimals below 1,000; in powers of ten where digits would not be read.
pub(super) fn money(x: f64) -> String {
    match x.abs() {
        size if size >= 1e15 => format!("{x:.3e}"),
        size if size < 1e-2 && size > 0.0 => format!("{x:.1e}"),
        size => grouped(x, if size < 1000.0 { 2 } else { 0 }),
    }
}

/// A ratio of money to money.
pub(super) fn ratio(x: Option<f64>) -> String {
    x.map_or_else(|| "no ratio".to_owned(), |x| if x.abs() < 1e6 { grouped(x, 2) } else { money(x) })
}

/// A multiplier with two decimals, or four where two would hide that it is not 1.
pub(super) fn times(x: f64) -> String {
    let decimals = if x != 1.0 && (x - 1.0).abs() < 0.005 { 4 } else { 2 };
    grouped(x, decimals)
}

/// A value of a parameter: a rate as percent with two decimals, an elasticity with two.
pub(super) fn parameter_value(parameter: Parameter, x: f64) -> String {
    let shown = |x: f64| {
        let text = grouped(x, 2);
        text.trim_end_matches('0').trim_end_matches('.').to_owned()
    };
    if parameter == Parameter::Elasticity { shown(x) } else { format!("{}%", shown(x * 100.0)) }
}

/// A share as percent without decimals; what is not nothing is not written as nothing.
pub(super) fn share(x: f64) -> String {
    match x * 100.0 {
        x if x > 0.0 && x < 0.5 => "below 1%".to_owned(),
        x => format!("{}%", grouped(x, 0)),
    }
}

/// "a, b and c".
pub(super) fn list(items: &[String], last: &str) -> String {
    match items {
        [] => String::new(),
        [one] => one.clone(),
        [rest @ .., end] => format!("{} {last} {end}", rest.join(", ")),
    }
}

/// "1 row", "2 rows".
pub(super) fn count(n: usize, thing: &str) -> String {
    if n == 1 { format!("1 {thing}") } else { format!("{n} {thing}s") }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn numbers_read_well() {
        for (x, due) in [
            (16_211_446.2, "16,211,446"),
            (-999.994, "-999.99"),
            (0.0, "0.00"),
            (0.004, "4.0e-3"),
            (-1.5e18, "-1.500e18"),
        ] {
            assert_eq!(money(x), due);
        }
        assert_eq!((ratio(Some(1.386)), ratio(None)), ("1.39".into(), "no ratio".into()));
        assert_eq!(
            (times(1.0968), times(1.0004), times(1.0)),
            ("1.10".into(), "1.0004".into(), "1.00".into())
        );
        assert_eq!(parameter_value(Parameter::Rate, 0.061123), "6.11%");
        assert_eq!(parameter_value(Parameter::Rate, -0.5), "-50%");
        assert_eq!(parameter_value(Parameter::Elasticity, 2.5562), "2.56");
        assert_eq!(parameter_value(Parameter::Rate, 0.0), "0%");
        assert_eq!((share(0.0), share(0.002), share(0.994)), ("0%".into(), "below 1%".into(), "99%".into()));
    }

    #[test]
    fn lists_end_in_their_word() {
        let items = ["a", "b", "c"].map(String::from);
        assert_eq!(list(&items, "or"), "a, b or c");
        assert_eq!(list(&items[..1], "or"), "a");
        assert_eq!(quoted(" a\n b"), "\u{201c}a b\u{201d}");
    }
}
