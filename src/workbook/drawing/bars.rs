//! Bar charts: one bar below the other, losses drawn hollow to the left of zero.

use super::Frame;
use super::canvas::{Anchor, Canvas, WIDTH};
use super::measure::{fitted, in_two, width};
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

const STEP: f64 = 32.0;
const TOP: f64 = 34.0;
/// Between a text and what it belongs to.
const GAP: f64 = 6.0;
/// The most that names take, and values.
const NAMES: f64 = 130.0;
const VALUES: f64 = 130.0;

/// A bar chart from 0.
pub(crate) fn bars(frame: &Frame<'_>, bars: &[Bar]) -> String {
    let names: Vec<Vec<String>> = bars.iter().map(|bar| in_two(&bar.name, NAMES)).collect();
    let widest = |texts: &mut dyn Iterator<Item = &str>| texts.map(width).fold(0.0, f64::max);
    let left = GAP * 2.0 + widest(&mut names.iter().flatten().map(String::as_str)).max(24.0);
    let labels: Vec<String> = bars.iter().map(|bar| fitted(&bar.label, VALUES)).collect();
    let right = WIDTH - GAP * 2.0 - widest(&mut labels.iter().map(String::as_str)).max(16.0);
    let values: Vec<f64> = bars.iter().map(|bar| bar.value).chain([0.0]).collect();
    let ticks = Ticks::along(&values, right - left);
    let x = |v: f64| left + ticks.share(v) * (right - left);
    let bottom = TOP + STEP * bars.len() as f64;
    let mut canvas = Canvas::new(bottom + 42.0);
    canvas.text((GAP, 16.0), Anchor::Start, "title", &fitted(frame.title, WIDTH - GAP * 4.0));
    for tick in ticks.all() {
        let class = if ticks.is_zero(tick) { "axis" } else { "grid" };
        canvas.line((x(tick), TOP - 4.0), (x(tick), bottom), class);
        canvas.text((x(tick), bottom + 15.0), Anchor::Middle, "label", &ticks.label(tick));
    }
    for (i, (bar, name)) in bars.iter().zip(&names).enumerate() {
        let y = TOP + STEP * i as f64;
        let (from, to) = (x(bar.value.min(0.0)), x(bar.value.max(0.0)));
        let class = if bar.value < 0.0 { "loss" } else { "gain" };
        canvas.rect((from, y + 5.0), (to - from, STEP - 12.0), class);
        let first = if name.len() == 1 { y + 19.0 } else { y + 12.0 };
        for (k, line) in name.iter().enumerate() {
            canvas.text((left - GAP, first + 14.0 * k as f64), Anchor::End, "label", line);
        }
        // Beside the end of a gain; of a loss, on the free side of zero.
        canvas.text((to + GAP, y + 19.0), Anchor::Start, "value", &labels[i]);
    }
    let across = (left + right) / 2.0;
    canvas.text((across, bottom + 34.0), Anchor::Middle, "label", &ticks.measure(frame.x));
    canvas.finish(frame)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn frame() -> Frame<'static> {
        Frame { id: "c", title: "Values", description: "Two bars.", x: "Value", y: "" }
    }

    fn bar(name: &str, value: f64) -> Bar {
        Bar { name: name.to_owned(), value, label: format!("{value}") }
    }

    /// (x, width) of every bar of a class.
    fn drawn(svg: &str, class: &str) -> Vec<(f64, f64)> {
        let number = |line: &str, key: &str| {
            let rest = line.split(&format!(" {key}=\"")).nth(1).expect("the attribute");
            rest.split('"').next().unwrap().parse::<f64>().expect("a number")
        };
        let mark = format!("<rect class=\"{class}\"");
        svg.lines()
            .filter(|line| line.starts_with(&mark))
            .map(|line| (number(line, "x"), number(line, "width")))
            .collect()
    }

    #[test]
    fn lengths_are_in_proportion_and_losses_lie_left_of_zero() {
        let svg = bars(&frame(), &[bar("a", 300.0), bar("b", -150.0), bar("c", 0.0)]);
        let (gains, losses) = (drawn(&svg, "gain"), drawn(&svg, "loss"));
        assert_eq!((gains.len(), losses.len()), (2, 1));
        assert!((gains[0].1 - 2.0 * losses[0].1).abs() < 0.3, "{svg}");
        assert!((losses[0].0 + losses[0].1 - gains[0].0).abs() < 0.3, "the loss ends at zero");
        assert_eq!(gains[1].1, 0.0);
    }

    #[test]
    fn everything_stays_inside() {
        let long = "A name that goes on and on, as names of options in workbooks sometimes do, for ever";
        let many: Vec<Bar> = (0..10).map(|i| bar(long, -1e9 * f64::from(i))).collect();
        for list in [many, vec![bar("x", 5.0)], vec![bar("x", 1e290)], vec![]] {
            let svg = bars(&frame(), &list);
            for word in ["NaN", "inf"] {
                assert!(!svg.contains(word), "{svg}");
            }
            for (x, width) in drawn(&svg, "gain").into_iter().chain(drawn(&svg, "loss")) {
                assert!(x >= 0.0 && width >= 0.0 && x + width <= WIDTH, "{svg}");
            }
        }
    }
}
