//! Bar charts: one bar below the other, losses drawn hollow to the left of zero.

use super::Frame;
use super::canvas::{Anchor, Canvas, WIDTH};
use super::ticks::Ticks;

/// One bar.
pub(crate) struct Bar {
    /// What it stands for.
    pub name: String,
    /// Its length.
    pub value: f64,
    /// The value as the report writes it.
    pub label: String,
}

const STEP: f64 = 34.0;
const LEFT: f64 = 190.0;
const RIGHT: f64 = WIDTH - 120.0;
const TOP: f64 = 44.0;

/// A bar chart from 0.
pub(crate) fn bars(frame: &Frame<'_>, bars: &[Bar]) -> String {
    let ticks = Ticks::over(bars.iter().map(|bar| bar.value).chain([0.0]), 5.0);
    let x = |v: f64| LEFT + ticks.share(v) * (RIGHT - LEFT);
    let bottom = TOP + STEP * bars.len() as f64;
    let mut canvas = Canvas::new(bottom + 50.0);
    canvas.text((12.0, 20.0), Anchor::Start, "title", frame.title);
    for tick in ticks.all() {
        canvas.line((x(tick), TOP - 6.0), (x(tick), bottom), if tick == 0.0 { "axis" } else { "grid" });
        canvas.text((x(tick), bottom + 18.0), Anchor::Middle, "label", &ticks.label(tick));
    }
    for (i, bar) in bars.iter().enumerate() {
        let y = TOP + STEP * i as f64;
        let (from, to) = (x(bar.value.min(0.0)), x(bar.value.max(0.0)));
        let class = if bar.value < 0.0 { "loss" } else { "bar" };
        canvas.rect((from, y + 5.0), (to - from, STEP - 14.0), class);
        canvas.text((LEFT - 60.0, y + 19.0), Anchor::End, "label", &bar.name);
        canvas.text((to + 6.0, y + 19.0), Anchor::Start, "label", &bar.label);
    }
    canvas.text(((LEFT + RIGHT) / 2.0, bottom + 40.0), Anchor::Middle, "label", frame.x);
    canvas.finish(frame)
}
