//! Line charts: each line has a pattern of its own and its name at its end.

use super::Frame;
use super::canvas::{Anchor, Canvas, WIDTH};
use super::measure::{fitted, width};
use super::ticks::Ticks;

/// One line.
pub(crate) struct Line {
    /// Its name.
    pub name: String,
    /// Its points, from left to right.
    pub points: Vec<(f64, f64)>,
}

const HEIGHT: f64 = 226.0;
const TOP: f64 = 44.0;
const BOTTOM: f64 = HEIGHT - 42.0;
/// Between a text and what it belongs to.
const GAP: f64 = 6.0;
/// From the end of a line to its name.
const LEAD: f64 = 22.0;
/// The most that names take.
const NAMES: f64 = 112.0;
/// The least distance between two names.
const APART: f64 = 14.0;
const DASHES: [&str; 6] = ["", "7 3", "2 3", "9 3 2 3", "14 4", "3 7"];

/// A line chart. `percent` labels the horizontal axis in percent.
pub(crate) fn lines(frame: &Frame<'_>, lines: &[Line], percent: bool) -> String {
    let points = || lines.iter().flat_map(|line| &line.points);
    // From zero, or to it: what is below it, and how far, is to be seen.
    let ys = Ticks::over(points().map(|p| p.1).chain([0.0]), 5.0);
    let widest = |texts: &mut dyn Iterator<Item = String>| texts.map(|t| width(&t)).fold(0.0, f64::max);
    let left = GAP * 2.0 + widest(&mut ys.all().iter().map(|tick| ys.label(*tick)));
    // A line that is alone is told by the title.
    let named = lines.len() > 1;
    let names: Vec<String> = lines.iter().map(|line| fitted(&line.name, NAMES)).collect();
    let right =
        if named { WIDTH - LEAD - GAP - widest(&mut names.iter().cloned()) } else { WIDTH - GAP * 4.0 };
    let across: Vec<f64> = points().map(|p| if percent { p.0 * 100.0 } else { p.0 }).collect();
    let xs = Ticks::along(&across, right - left);
    let x = |v: f64| left + xs.share(if percent { v * 100.0 } else { v }) * (right - left);
    let y = |v: f64| BOTTOM - ys.share(v) * (BOTTOM - TOP);

    let mut canvas = Canvas::new(HEIGHT);
    canvas.text((GAP, 16.0), Anchor::Start, "title", &fitted(frame.title, WIDTH - GAP * 4.0));
    canvas.text((GAP, 33.0), Anchor::Start, "label", &fitted(&ys.measure(frame.y), WIDTH - GAP * 4.0));
    for tick in ys.all() {
        canvas.line((left, y(tick)), (right, y(tick)), if ys.is_zero(tick) { "axis" } else { "grid" });
        canvas.text((left - GAP, y(tick) + 4.0), Anchor::End, "label", &ys.label(tick));
    }
    for tick in xs.all() {
        let at = left + xs.share(tick) * (right - left);
        canvas.line((at, BOTTOM), (at, BOTTOM + 4.0), "axis");
        let label = if percent { format!("{}%", xs.label(tick)) } else { xs.label(tick) };
        canvas.text((at, BOTTOM + 17.0), Anchor::Middle, "label", &label);
    }
    canvas.line((left, BOTTOM), (right, BOTTOM), "axis");
    canvas.line((left, TOP), (left, BOTTOM), "axis");
    canvas.text(((left + right) / 2.0, HEIGHT - 8.0), Anchor::Middle, "label", &xs.measure(frame.x));

    let mut ends: Vec<(usize, (f64, f64))> = Vec::new();
    for (i, line) in lines.iter().enumerate() {
        let drawn: Vec<(f64, f64)> = line.points.iter().map(|p| (x(p.0), y(p.1))).collect();
        canvas.path(&drawn, DASHES[i % DASHES.len()], "line");
        ends.extend(drawn.last().map(|end| (i, *end)));
    }
    ends.sort_by(|a, b| a.1.1.total_cmp(&b.1.1));
    let places = spread(&ends.iter().map(|(_, end)| end.1).collect::<Vec<_>>());
    for ((i, end), at) in ends.into_iter().zip(places).filter(|_| named) {
        let lead = [end, (right + LEAD * 0.5, at), (right + LEAD - 4.0, at)];
        canvas.path(&lead, DASHES[i % DASHES.len()], "lead");
        canvas.text((right + LEAD, at + 4.0), Anchor::Start, "label", &names[i]);
    }
    canvas.finish(frame)
}

/// Heights for names, near those wanted (which rise) and apart from each other; within the chart, where they fit into
/// it.
fn spread(wanted: &[f64]) -> Vec<f64> {
    let lowest = BOTTOM + 4.0;
    let mut places = Vec::with_capacity(wanted.len());
    let mut least = f64::NEG_INFINITY;
    for at in wanted {
        least = at.max(least);
        places.push(least);
        least += APART;
    }
    let mut most = lowest;
    for place in places.iter_mut().rev() {
        *place = place.min(most);
        most = *place - APART;
    }
    places
}

#[cfg(test)]
mod tests {
    use super::*;

    fn frame() -> Frame<'static> {
        Frame { id: "c", title: "Lines", description: "Lines.", x: "Years", y: "Factor" }
    }

    #[test]
    fn names_are_spread_and_stay_inside() {
        assert_eq!(spread(&[50.0, 100.0]), [50.0, 100.0]);
        assert_eq!(spread(&[50.0, 50.0]), [50.0, 64.0]);
        let crowded = spread(&[BOTTOM; 10]);
        assert!(crowded.windows(2).all(|pair| pair[1] - pair[0] >= APART - 1e-9), "{crowded:?}");
        assert!(crowded[0] > TOP && crowded[9] <= BOTTOM + 4.0, "{crowded:?}");
    }

    #[test]
    fn lines_differ_by_their_pattern_not_by_colour() {
        let line = |name: &str, slope: f64| Line {
            name: name.to_owned(),
            points: (0..5).map(|i| (f64::from(i), slope * f64::from(i))).collect(),
        };
        let list: Vec<Line> = ["a", "b", "c"].iter().zip([1.0, 2.0, -1.0]).map(|(n, s)| line(n, s)).collect();
        let svg = lines(&frame(), &list, false);
        let paths: Vec<&str> = svg.lines().filter(|l| l.starts_with("<path class=\"line\"")).collect();
        assert_eq!(paths.len(), 3);
        let dashes: Vec<&str> =
            paths.iter().map(|p| p.split("stroke-dasharray").nth(1).unwrap_or("")).collect();
        assert!(dashes[0].is_empty() && dashes[1] != dashes[2] && !dashes[1].is_empty(), "{dashes:?}");
        assert!(!svg.contains("NaN"));
        for name in ["a", "b", "c"] {
            assert!(svg.contains(&format!(">{name}</text>")), "{svg}");
        }
    }

    #[test]
    fn percent_labels_are_of_rates() {
        let points = vec![(0.0, 1.0), (0.1, 2.0)];
        let svg = lines(&frame(), &[Line { name: "x".into(), points }], true);
        assert!(svg.contains(">0%</text>") && svg.contains(">10%</text>"), "{svg}");
        // A chart of nothing is an empty pair of axes.
        assert!(!lines(&frame(), &[], false).contains("NaN"));
    }
}
