//! How wide a text is drawn, near enough to keep texts apart, and texts cut to a width.

/// The size of letters, in units of a pixel.
pub(super) const SIZE: f64 = 12.0;

/// The width of a text, rather too much than too little: which font is used is the reader's affair.
pub(super) fn width(text: &str) -> f64 {
    let part = |c: char| match c {
        'i' | 'j' | 'l' | 'I' | '.' | ',' | ':' | ';' | '\'' | '|' | '!' | ' ' | 'f' | 't' | 'r' => 0.42,
        'm' | 'w' | 'M' | 'W' | '%' | '@' | '\u{2026}' => 1.0,
        c if c.is_ascii_uppercase() => 0.77,
        c if c >= '\u{1100}' => 1.05,
        _ => 0.65,
    };
    SIZE * text.chars().map(part).sum::<f64>()
}

/// A text that is no wider than this: what is too much gives way to an ellipsis.
pub(super) fn fitted(text: &str, most: f64) -> String {
    if width(text) <= most {
        return text.to_owned();
    }
    let mut out = String::new();
    for c in text.chars() {
        let mut longer = out.clone();
        longer.push(c);
        if width(&longer) + width("\u{2026}") > most {
            break;
        }
        out = longer;
    }
    format!("{}\u{2026}", out.trim_end())
}

/// A text on one line, or on two where it is too wide for one; what is too wide for those is cut.
pub(super) fn in_two(text: &str, most: f64) -> Vec<String> {
    if width(text) <= most {
        return vec![text.to_owned()];
    }
    let mut breaks = text.char_indices().filter(|(_, c)| c.is_whitespace()).map(|(at, _)| at);
    match breaks.rfind(|&at| at > 0 && width(&text[..at]) <= most) {
        Some(at) => vec![text[..at].to_owned(), fitted(text[at..].trim_start(), most)],
        None => vec![fitted(text, most)],
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn texts_are_cut_to_their_width() {
        assert_eq!(fitted("Ponds", 100.0), "Ponds");
        let cut = fitted(&"Settling ponds ".repeat(40), 100.0);
        assert!(cut.starts_with("Settling") && cut.ends_with('\u{2026}') && width(&cut) <= 100.0, "{cut}");
        assert_eq!(fitted("Settling", 0.0), "\u{2026}");
    }

    #[test]
    fn long_names_take_two_lines() {
        assert_eq!(in_two("Ponds", 100.0), ["Ponds"]);
        assert_eq!(in_two("Settling ponds and reeds", 100.0), ["Settling ponds", "and reeds"]);
        let endless = in_two(&"x".repeat(300), 100.0);
        assert_eq!(endless.len(), 1);
        assert!(width(&endless[0]) <= 100.0);
        for line in in_two("\u{3000}\u{3042}\u{3044} \u{2003} and much, much more of this kind of name", 80.0)
        {
            assert!(width(&line) <= 80.0, "{line}");
        }
    }
}
