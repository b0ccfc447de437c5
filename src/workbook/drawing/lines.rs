//! Line charts: each line has a pattern of its own and its name at its end.

use super::Frame;
use super::canvas::{Anchor, Canvas, WIDTH};
use super::ticks::Ticks;

/// One line.
pub(crate) struct Line {
    /// Its name.
    pub name: String,
    /// Its points, from left to right.
    pub points: Vec<(f64, f64)>,
}

const HEIGHT: f64 = 340.0;
/// Left, right, top and bottom of the axes.
const BOX: (f64, f64, f64, f64) = (90.0, WIDTH - 150.0, 50.0, HEIGHT - 50.0);
/// The least distance between two names.
const APART: f64 = 15.0;
const DASHES: [&str; 6] = ["", "8 4", "2 3", "8 3 2 3", "14 4", "4 8"];

/// A line chart. `percent` labels the horizontal axis in percent.
pub(crate) fn lines(frame: &Frame<'_>, lines: &[Line], percent: bool) -> String {
    let (left, right, top, bottom) = BOX;
    let points = || lines.iter().flat_map(|line| &line.points);
    let xs = Ticks::over(points().map(|p| p.0), 8.0);
    let ys = Ticks::over(points().map(|p| p.1), 5.0);
    let x = |v: f64| left + xs.share(v) * (right - left);
    let y = |v: f64| bottom - ys.share(v) * (bottom - top);

    let mut canvas = Canvas::new(HEIGHT);
    canvas.text((left, 20.0), Anchor::Start, "title", frame.title);
    canvas.text((left, 40.0), Anchor::Start, "label", frame.y);
    for tick in ys.all() {
        canvas.line((left, y(tick)), (right, y(tick)), if tick == 0.0 { "axis" } else { "grid" });
        canvas.text((left - 8.0, y(tick) + 4.0), Anchor::End, "label", &ys.label(tick));
    }
    for tick in xs.all() {
        canvas.line((x(tick), bottom), (x(tick), bottom + 5.0), "axis");
        let label = if percent { hence_core::percent(near(tick)) } else { xs.label(tick) };
        canvas.text((x(tick), bottom + 20.0), Anchor::Middle, "label", &label);
    }
    canvas.line((left, bottom), (right, bottom), "axis");
    canvas.line((left, top), (left, bottom), "axis");
    canvas.text(((left + right) / 2.0, HEIGHT - 8.0), Anchor::Middle, "label", frame.x);

    let mut names: Vec<(f64, &str)> = Vec::new();
    for (i, line) in lines.iter().enumerate() {
        let drawn: Vec<(f64, f64)> = line.points.iter().map(|p| (x(p.0), y(p.1))).collect();
        canvas.path(&drawn, DASHES[i % DASHES.len()]);
        names.extend(drawn.last().map(|end| (end.1, line.name.as_str())));
    }
    names.sort_by(|a, b| a.0.total_cmp(&b.0));
    let mut below = f64::NEG_INFINITY;
    for (end, name) in names {
        let at = end.max(below + APART);
        canvas.text((right + 8.0, at + 4.0), Anchor::Start, "label", &shortened(name));
        below = at;
    }
    canvas.finish(frame)
}

/// A tick without the dust of its multiplication.
fn near(tick: f64) -> f64 {
    (tick * 1e9).round() / 1e9
}

/// A name that fits beside the chart.
fn shortened(name: &str) -> String {
    const MOST: usize = 20;
    match name.chars().count() > MOST {
        true => name.chars().take(MOST - 1).chain(['\u{2026}']).collect(),
        false => name.to_owned(),
    }
}
