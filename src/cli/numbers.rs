//! Numbers as text: shortest round trip for machines, grouped digits for people.

/// The shortest decimal that parses back to the same double.
pub fn shortest(x: f64) -> String {
    let plain = format!("{x}");
    let exponent = format!("{x:e}");
    // Very small factors are easier to read, and as exact, with an exponent.
    if plain.len() > exponent.len() + 4 { exponent } else { plain }
}

/// As [`shortest`], or nothing.
pub fn shortest_or_blank(x: Option<f64>) -> String {
    x.map(shortest).unwrap_or_default()
}

/// A money amount to the nearest unit with grouped digits: -1,234,567; two decimals below 1,000.
pub fn money(x: f64) -> String {
    let text = if x.abs() < 1000.0 { format!("{:.2}", x.abs()) } else { format!("{:.0}", x.abs()) };
    let (whole, decimals) = text.split_once('.').map_or((text.as_str(), ""), |(w, d)| (w, d));
    let mut grouped = grouped(whole);
    if !decimals.is_empty() {
        grouped.push('.');
        grouped.push_str(decimals);
    }
    let zero = grouped.chars().all(|c| matches!(c, '0' | '.' | ','));
    if x < 0.0 && !zero { format!("-{grouped}") } else { grouped }
}

/// Digits with their thousands apart: 10,000.
pub fn grouped(digits: &str) -> String {
    let mut grouped = String::new();
    for (i, digit) in digits.chars().enumerate() {
        if i > 0 && (digits.len() - i).is_multiple_of(3) {
            grouped.push(',');
        }
        grouped.push(digit);
    }
    grouped
}

/// A number of things: "1 cell", "2 cells".
pub fn count(n: usize, thing: &str) -> String {
    if n == 1 { format!("1 {thing}") } else { format!("{n} {thing}s") }
}

/// A rate as percent with up to four decimals.
pub fn percent(x: f64) -> String {
    let text = format!("{:.4}", x * 100.0);
    let text = text.trim_end_matches('0').trim_end_matches('.');
    format!("{}%", if text == "-0" { "0" } else { text })
}

#[cfg(test)]
mod tests {
    use super::{count, money, percent, shortest};

    #[test]
    fn numbers_read_well() {
        assert_eq!(money(1_234_567.4), "1,234,567");
        assert_eq!(money(-999.994), "-999.99");
        assert_eq!(money(-0.001), "0.00");
        assert_eq!(money(1000.0), "1,000");
        assert_eq!(percent(0.035), "3.5%");
        assert_eq!(percent(0.1), "10%");
        assert_eq!((percent(0.0), percent(-0.0), percent(-1e-9)), ("0%".into(), "0%".into(), "0%".into()));
        assert_eq!((count(1, "cell"), count(0, "cell")), ("1 cell".into(), "0 cells".into()));
    }

    #[test]
    fn shortest_parses_back() {
        for x in [0.1, 1.0, 9.661835748792271e-1, 1.536966071236794e-7, 5e-324, 1e300, -2.5] {
            assert_eq!(shortest(x).parse::<f64>().unwrap().to_bits(), x.to_bits());
        }
        assert_eq!(shortest(0.035), "0.035");
    }
}
