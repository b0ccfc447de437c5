//! The elements of an SVG text.

use std::fmt::Write;

use super::Frame;
use super::measure::SIZE;

/// The width of a chart, in units of a pixel: two stand side by side on a printed page with letters that can be read.
pub(super) const WIDTH: f64 = 420.0;

/// An SVG text in the making.
pub(super) struct Canvas {
    height: f64,
    body: String,
}

/// How a text is set to its point.
#[derive(Clone, Copy)]
pub(super) enum Anchor {
    Start,
    Middle,
    End,
}

impl Canvas {
    pub fn new(height: f64) -> Self {
        Canvas { height, body: String::new() }
    }

    pub fn line(&mut self, from: (f64, f64), to: (f64, f64), class: &str) {
        let ((x1, y1), (x2, y2)) = (rounded(from), rounded(to));
        self.put(&format!("<line class=\"{class}\" x1=\"{x1}\" y1=\"{y1}\" x2=\"{x2}\" y2=\"{y2}\"/>"));
    }

    /// A line through points; one with a pattern of dashes, and its class.
    pub fn path(&mut self, points: &[(f64, f64)], dash: &str, class: &str) {
        let mut d = String::new();
        for (i, point) in points.iter().enumerate() {
            let (x, y) = rounded(*point);
            let _ = write!(d, "{}{x} {y}", if i == 0 { "M" } else { " L" });
        }
        let dash = if dash.is_empty() { String::new() } else { format!(" stroke-dasharray=\"{dash}\"") };
        self.put(&format!("<path class=\"{class}\" d=\"{d}\"{dash}/>"));
    }

    pub fn rect(&mut self, (x, y): (f64, f64), (width, height): (f64, f64), class: &str) {
        let ((x, y), (width, height)) = (rounded((x, y)), rounded((width, height)));
        let place = format!("x=\"{x}\" y=\"{y}\" width=\"{width}\" height=\"{height}\"");
        self.put(&format!("<rect class=\"{class}\" {place}/>"));
    }

    pub fn text(&mut self, at: (f64, f64), anchor: Anchor, class: &str, words: &str) {
        let (x, y) = rounded(at);
        let anchor = match anchor {
            Anchor::Start => "start",
            Anchor::Middle => "middle",
            Anchor::End => "end",
        };
        let words = escaped(words);
        self.put(&format!(
            "<text class=\"{class}\" x=\"{x}\" y=\"{y}\" text-anchor=\"{anchor}\">{words}</text>"
        ));
    }

    fn put(&mut self, element: &str) {
        self.body.push_str(element);
        self.body.push('\n');
    }

    /// The whole text, with title and description. Its rules reach no element outside it.
    pub fn finish(self, frame: &Frame<'_>) -> String {
        let rules = format!(
            ".chart text{{font:{SIZE}px sans-serif;fill:#222}}.chart .title{{font-weight:bold}}\
             .chart .grid{{stroke:#ccc}}.chart .axis{{stroke:#222}}\
             .chart .line{{fill:none;stroke:#222;stroke-width:2}}\
             .chart .lead{{fill:none;stroke:#222}}\
             .chart .value{{paint-order:stroke;stroke:#fff;stroke-width:3px}}\
             .chart .gain{{fill:#6b8cae;stroke:#222}}.chart .loss{{fill:#fff;stroke:#222}}"
        );
        let (id, height) = (escaped(frame.id), self.height);
        format!(
            "<svg xmlns=\"http://www.w3.org/2000/svg\" class=\"chart\" viewBox=\"0 0 {WIDTH} {height}\" role=\"img\" \
             aria-labelledby=\"{id}-title {id}-text\">\n\
             <title id=\"{id}-title\">{}</title>\n<desc id=\"{id}-text\">{}</desc>\n<style>{rules}</style>\n{}</svg>\n",
            escaped(frame.title),
            escaped(frame.description),
            self.body
        )
    }
}

/// To a tenth of a pixel, so that texts stay short and the same everywhere.
fn rounded((x, y): (f64, f64)) -> (f64, f64) {
    let tenth = |v: f64| (v * 10.0).round() / 10.0 + 0.0;
    (tenth(x), tenth(y))
}

/// A text between tags or quotes. Control characters, and those that turn the direction of what follows, are shown, not
/// obeyed; characters that XML does not know are shown too.
pub(crate) fn escaped(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.chars() {
        match c {
            '&' => out.push_str("&amp;"),
            '<' => out.push_str("&lt;"),
            '>' => out.push_str("&gt;"),
            '"' => out.push_str("&quot;"),
            '\'' => out.push_str("&#39;"),
            '\n' | '\t' => out.push(c),
            '\u{202a}'..='\u{202e}' | '\u{2066}'..='\u{2069}' | '\u{fffe}' | '\u{ffff}' => {
                out.extend(c.escape_unicode());
            }
            c if c.is_control() => out.extend(c.escape_unicode()),
            c => out.push(c),
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn texts_are_escaped() {
        let text = escaped("<b a='1' b=\"2\">&\u{0}\u{202e}\u{ffff}\u{85}\n</b>");
        let due = "&lt;b a=&#39;1&#39; b=&quot;2&quot;&gt;&amp;\\u{0}\\u{202e}\\u{ffff}\\u{85}\n&lt;/b&gt;";
        assert_eq!(text, due);
    }

    #[test]
    fn places_are_rounded_without_a_negative_zero() {
        assert_eq!(rounded((-0.04, 12.3456)), (0.0, 12.3));
        assert!(rounded((-0.04, 0.0)).0.is_sign_positive());
    }
}
