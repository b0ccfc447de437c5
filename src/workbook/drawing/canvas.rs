//! The elements of an SVG text.

use std::fmt::Write;

use super::Frame;

/// The width of a chart, in units of a pixel.
pub(super) const WIDTH: f64 = 720.0;

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

    pub fn path(&mut self, points: &[(f64, f64)], dash: &str) {
        let mut d = String::new();
        for (i, point) in points.iter().enumerate() {
            let (x, y) = rounded(*point);
            let _ = write!(d, "{}{x} {y}", if i == 0 { "M" } else { " L" });
        }
        let dash = if dash.is_empty() { String::new() } else { format!(" stroke-dasharray=\"{dash}\"") };
        self.put(&format!("<path class=\"line\" d=\"{d}\"{dash}/>"));
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

    /// The whole text, with title and description.
    pub fn finish(self, frame: &Frame<'_>) -> String {
        const STYLE: &str = "text{font:13px sans-serif;fill:#222}.title{font-weight:bold;font-size:15px}\
            .grid{stroke:#ddd}.axis{stroke:#222}.line{fill:none;stroke:#222;stroke-width:2}\
            .bar{fill:#6b8cae;stroke:#222}.loss{fill:#fff;stroke:#222}";
        format!(
            "<svg xmlns=\"http://www.w3.org/2000/svg\" viewBox=\"0 0 {WIDTH} {}\" role=\"img\" width=\"100%\">\n\
             <title>{}</title>\n<desc>{}</desc>\n<style>{STYLE}</style>\n\
             <rect width=\"100%\" height=\"100%\" fill=\"#fff\"/>\n{}</svg>\n",
            self.height,
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

/// A text between tags or quotes; characters that XML does not allow are left out.
pub(crate) fn escaped(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.chars() {
        match c {
            '&' => out.push_str("&amp;"),
            '<' => out.push_str("&lt;"),
            '>' => out.push_str("&gt;"),
            '"' => out.push_str("&quot;"),
            '\u{fffe}' | '\u{ffff}' => {}
            c if c.is_control() && !matches!(c, '\n' | '\t') => {}
            c => out.push(c),
        }
    }
    out
}
