//! A map as a picture: regions with their letters, zero lines told apart by their dashes, in plain SVG.

use std::fmt::Write as _;

use hence_core::Parameter;

use super::Comparison;
use super::map::{Map, option_letter};
use super::search::Moved;
use super::tables::shown;
use crate::ranking::Worth;

/// The plot within the picture, in points.
const LEFT: f64 = 80.0;
const TOP: f64 = 56.0;
const WIDTH: f64 = 640.0;
const HEIGHT: f64 = 420.0;
/// A line of the legend.
const LINE: f64 = 22.0;
/// Letters in a region stand so far apart.
const APART: (usize, usize) = (10, 9);

/// Light fills, told apart by lightness, too; letters say the same without colour.
const FILLS: [&str; 6] = ["#ffffff", "#dbe9f4", "#f6e0c9", "#d5ebe1", "#f3deea", "#f8ecc2"];
/// Fills of regions where even the best option is worth less than nothing.
const WORTHLESS: &str = "#d0d0d0";
const DASHES: [&str; 6] = ["none", "10 4", "2 4", "10 4 2 4", "16 6", "5 5"];

/// The picture, the same bytes every time.
pub fn picture(comparison: &Comparison, map: &Map) -> String {
    let lines = comparison.options.len() as f64 + 2.5;
    let (width, height) = (LEFT + WIDTH + 40.0, TOP + HEIGHT + 70.0 + LINE * lines);
    let mut svg = format!(
        "<svg xmlns=\"http://www.w3.org/2000/svg\" width=\"{width}\" height=\"{height}\" viewBox=\"0 0 {width} {height}\" \
         font-family=\"sans-serif\" font-size=\"13\">\n<rect width=\"{width}\" height=\"{height}\" fill=\"#ffffff\"/>\n"
    );
    text(
        &mut svg,
        LEFT,
        24.0,
        "start",
        "font-size=\"16\" font-weight=\"bold\"",
        &format!("Best option by preference and {}", map.up),
    );
    text(&mut svg, LEFT, 43.0, "start", "", &map.basis);
    let frame = Frame { map };
    frame.regions(&mut svg);
    frame.borders(&mut svg);
    frame.zero_lines(&mut svg);
    frame.axes(&mut svg);
    frame.letters(&mut svg);
    frame.here(&mut svg);
    legend(&mut svg, comparison, map);
    svg.push_str("</svg>\n");
    svg
}

struct Frame<'a> {
    map: &'a Map,
}

/// A text; characters that XML keeps for itself are escaped.
fn text(svg: &mut String, x: f64, y: f64, anchor: &str, more: &str, words: &str) {
    let words: String = words
        .chars()
        .map(|c| match c {
            '&' => "&amp;".to_owned(),
            '<' => "&lt;".to_owned(),
            '>' => "&gt;".to_owned(),
            c if c.is_control() => " ".to_owned(),
            c => c.to_string(),
        })
        .collect();
    let _ = writeln!(svg, "<text x=\"{x:.1}\" y=\"{y:.1}\" text-anchor=\"{anchor}\" {more}>{words}</text>");
}

impl Frame<'_> {
    /// The place of a point of the grid, which need not be whole.
    fn x(&self, i: f64) -> f64 {
        LEFT + WIDTH * i / (self.map.xs.len() - 1) as f64
    }

    fn y(&self, j: f64) -> f64 {
        TOP + HEIGHT * (1.0 - j / (self.map.ys.len() - 1) as f64)
    }

    /// A strip a row, from where an option becomes the best to where it is no longer.
    fn regions(&self, svg: &mut String) {
        let (columns, rows) = (self.map.xs.len(), self.map.ys.len());
        for j in 0..rows {
            let (top, bottom) =
                (self.y((j as f64 + 0.5).min((rows - 1) as f64)), self.y((j as f64 - 0.5).max(0.0)));
            let mut from = 0.0;
            for i in 0..columns {
                let own = self.map.best(i, j);
                let next = (i + 1 < columns).then(|| self.map.best(i + 1, j));
                if next == Some(own) {
                    continue;
                }
                let to = if next.is_some() { self.border(i, j) } else { (columns - 1) as f64 };
                let fill = match own {
                    None => "none",
                    Some((_, true)) => WORTHLESS,
                    Some((best, false)) => best.map_or("#ffffff", |best| FILLS[best % FILLS.len()]),
                };
                let (left, right) = (self.x(from), self.x(to));
                // A little over the edge, so that no hair line shows between strips.
                let _ = writeln!(
                    svg,
                    "<rect x=\"{left:.2}\" y=\"{top:.2}\" width=\"{:.2}\" height=\"{:.2}\" fill=\"{fill}\"/>",
                    right - left,
                    bottom - top + 0.3
                );
                from = to;
            }
        }
    }

    /// Where between two points of a row the best option changes: where their values are equal, by straight lines.
    fn border(&self, i: usize, j: usize) -> f64 {
        let values = (self.map.at(i, j), self.map.at(i + 1, j));
        let bests = (self.map.best(i, j), self.map.best(i + 1, j));
        let share = match (values, bests) {
            ((Some(a), Some(b)), (Some((Some(p), _)), Some((Some(q), _)))) => {
                // The same option on both sides of zero, or two that swap.
                let npv = |values: &[Worth], option: usize| values[option].npv;
                let gap = |at: &[Worth]| if p == q { npv(at, p) } else { npv(at, p) - npv(at, q) };
                let (left, right) = (gap(&a), gap(&b));
                if left == right { 0.5 } else { left / (left - right) }
            }
            _ => 0.5,
        };
        i as f64 + share.clamp(0.0, 1.0)
    }

    /// A thin line where the best option changes, so that regions are told apart without colour.
    fn borders(&self, svg: &mut String) {
        let (columns, rows) = (self.map.xs.len(), self.map.ys.len());
        let best: Vec<Vec<Option<usize>>> = (0..rows)
            .map(|j| (0..columns).map(|i| self.map.best(i, j).and_then(|best| best.0)).collect())
            .collect();
        for q in 1..self.map.worth.len() {
            for p in 0..q {
                let gap = |i: usize, j: usize| {
                    let own = best[j][i].is_some_and(|best| best == p || best == q);
                    let values = self.map.at(i, j).filter(|_| own)?;
                    Some(values[p].npv - values[q].npv)
                };
                let gaps: Vec<Vec<Option<f64>>> =
                    (0..rows).map(|j| (0..columns).map(|i| gap(i, j)).collect()).collect();
                let path = self.path(&gaps);
                if !path.is_empty() {
                    let _ = writeln!(
                        svg,
                        "<path d=\"{path}\" fill=\"none\" stroke=\"#606060\" stroke-width=\"0.8\"/>"
                    );
                }
            }
        }
    }

    /// The zero line of a grid as a path.
    fn path(&self, grid: &[Vec<Option<f64>>]) -> String {
        let mut path = String::new();
        for line in chained(&pieces(grid)) {
            for (k, point) in line.iter().enumerate() {
                let letter = if k == 0 { 'M' } else { 'L' };
                let _ = write!(path, "{letter}{:.2} {:.2}", self.x(point.0), self.y(point.1));
            }
        }
        path
    }

    /// Where an option's value is zero: straight within each cell of the grid, between points of different sign.
    fn zero_lines(&self, svg: &mut String) {
        for option in 0..self.map.worth.len() {
            let path = self.path(&self.map.npv(option));
            if !path.is_empty() {
                let dash = DASHES[option % DASHES.len()];
                let _ = writeln!(
                    svg,
                    "<path d=\"{path}\" fill=\"none\" stroke=\"#000000\" stroke-width=\"1.6\" stroke-dasharray=\"{dash}\"/>"
                );
            }
        }
    }

    fn axes(&self, svg: &mut String) {
        let _ = writeln!(
            svg,
            "<rect x=\"{LEFT}\" y=\"{TOP}\" width=\"{WIDTH}\" height=\"{HEIGHT}\" fill=\"none\" stroke=\"#000000\"/>"
        );
        let (bottom, left) = (TOP + HEIGHT, LEFT);
        for (share, label) in ticks(Parameter::Preference, &self.map.xs) {
            let x = LEFT + share * WIDTH;
            let _ = writeln!(svg, "<path d=\"M{x:.1} {bottom:.1}v5\" stroke=\"#000000\"/>");
            text(svg, x, bottom + 19.0, "middle", "", &label);
        }
        for (share, label) in ticks(self.map.up, &self.map.ys) {
            let y = TOP + (1.0 - share) * HEIGHT;
            let _ = writeln!(svg, "<path d=\"M{left:.1} {y:.1}h-5\" stroke=\"#000000\"/>");
            text(svg, left - 9.0, y + 4.5, "end", "", &label);
        }
        text(svg, LEFT + WIDTH / 2.0, TOP + HEIGHT + 40.0, "middle", "", "Pure time preference");
        let name = if self.map.up == Parameter::Growth { "Growth" } else { "Elasticity of marginal utility" };
        let (x, y) = (20.0, TOP + HEIGHT / 2.0);
        text(svg, x, y, "middle", &format!("transform=\"rotate(-90 {x:.1} {y:.1})\""), name);
    }

    fn letters(&self, svg: &mut String) {
        for j in (APART.1 / 2..self.map.ys.len()).step_by(APART.1) {
            for i in (APART.0 / 2..self.map.xs.len()).step_by(APART.0) {
                let letter = self.map.letter(i, j);
                text(svg, self.x(i as f64), self.y(j as f64) + 4.5, "middle", "fill=\"#404040\"", &letter);
            }
        }
    }

    /// A cross where the basis itself stands.
    fn here(&self, svg: &mut String) {
        let share = |points: &[f64], at: f64| {
            (at - points[0]) / (points[points.len() - 1] - points[0]) * (points.len() - 1) as f64
        };
        let (x, y) =
            (self.x(share(&self.map.xs, self.map.here.0)), self.y(share(&self.map.ys, self.map.here.1)));
        let _ = writeln!(
            svg,
            "<path d=\"M{x:.1} {y:.1}m-7 -7l14 14m0 -14l-14 14\" stroke=\"#000000\" stroke-width=\"2.4\" fill=\"none\"/>"
        );
    }
}

/// Marks along an axis: the share of it and the label; as many as make the labels shortest.
fn ticks(parameter: Parameter, points: &[f64]) -> Vec<(f64, String)> {
    let (low, high) = (points[0], points[points.len() - 1]);
    let marks = |count: usize| -> Vec<(f64, String)> {
        let share = |k: usize| k as f64 / count as f64;
        let label = |k: usize| shown(&Moved::Parameter(parameter), low + share(k) * (high - low));
        (0..=count).map(|k| (share(k), label(k))).collect()
    };
    let longest = |marks: &[(f64, String)]| marks.iter().map(|(_, label)| label.len()).max();
    (4..=8).rev().map(marks).min_by_key(|marks| longest(marks)).unwrap_or_default()
}

/// All pieces of the zero line of an option.
fn pieces(npv: &[Vec<Option<f64>>]) -> Vec<(Point, Point)> {
    let columns = npv.first().map_or(0, Vec::len);
    let cells = (1..npv.len()).flat_map(|j| (1..columns).map(move |i| (i - 1, j - 1)));
    cells.flat_map(|(i, j)| crossings(npv, i, j)).collect()
}

/// Pieces joined at their ends, so that dashes run on.
fn chained(pieces: &[(Point, Point)]) -> Vec<Vec<Point>> {
    let same = |a: Point, b: Point| (a.0 - b.0).abs() < 1e-6 && (a.1 - b.1).abs() < 1e-6;
    let mut left = pieces.to_vec();
    let mut lines = Vec::new();
    while let Some((a, b)) = left.pop() {
        let mut line = std::collections::VecDeque::from([a, b]);
        // At the end, then at the beginning.
        for back in [true, false] {
            loop {
                let end = if back { line[line.len() - 1] } else { line[0] };
                let Some(next) = left.iter().position(|(a, b)| same(*a, end) || same(*b, end)) else { break };
                let (a, b) = left.remove(next);
                let point = if same(a, end) { b } else { a };
                if back { line.push_back(point) } else { line.push_front(point) }
            }
        }
        lines.push(line.into());
    }
    lines
}

type Point = (f64, f64);

/// The pieces of a zero line within one cell of the grid; none where a corner has no value.
fn crossings(npv: &[Vec<Option<f64>>], i: usize, j: usize) -> Vec<(Point, Point)> {
    let (x, y) = (i as f64, j as f64);
    let corners = [(npv[j][i], (x, y)), (npv[j][i + 1], (x + 1.0, y))]
        .into_iter()
        .chain([(npv[j + 1][i + 1], (x + 1.0, y + 1.0)), (npv[j + 1][i], (x, y + 1.0))]);
    let corners: Option<Vec<(f64, Point)>> = corners.map(|(value, at)| Some((value?, at))).collect();
    let Some(corners) = corners else { return Vec::new() };
    // A baseline is worth nothing everywhere, and has no line.
    if corners.iter().all(|(value, _)| *value == 0.0) {
        return Vec::new();
    }
    let mut cuts = Vec::new();
    for k in 0..4 {
        let ((a, from), (b, to)) = (corners[k], corners[(k + 1) % 4]);
        if (a > 0.0) != (b > 0.0) {
            let share = a / (a - b);
            cuts.push((from.0 + share * (to.0 - from.0), from.1 + share * (to.1 - from.1)));
        }
    }
    // Two cuts, or four where the line passes twice.
    cuts.chunks_exact(2).map(|pair| (pair[0], pair[1])).collect()
}

fn legend(svg: &mut String, comparison: &Comparison, map: &Map) {
    let mut y = TOP + HEIGHT + 68.0;
    for (option, name) in comparison.options.iter().enumerate() {
        let fill = FILLS[option % FILLS.len()];
        let _ = writeln!(
            svg,
            "<rect x=\"{LEFT}\" y=\"{:.1}\" width=\"26\" height=\"15\" fill=\"{fill}\" stroke=\"#808080\"/>",
            y - 12.0
        );
        text(svg, LEFT + 13.0, y, "middle", "fill=\"#404040\"", &option_letter(option));
        text(svg, LEFT + 36.0, y, "start", "", name);
        if !pieces(&map.npv(option)).is_empty() {
            let dash = DASHES[option % DASHES.len()];
            let (from, to) = (LEFT + 330.0, LEFT + 380.0);
            let line = y - 4.5;
            let _ = writeln!(
                svg,
                "<path d=\"M{from:.1} {line:.1}L{to:.1} {line:.1}\" stroke=\"#000000\" stroke-width=\"1.6\" \
                 stroke-dasharray=\"{dash}\" fill=\"none\"/>"
            );
            let over = comparison
                .baseline
                .map_or("nothing".to_owned(), |i| format!("as much as {}", comparison.options[i]));
            text(svg, to + 10.0, y, "start", "", &format!("worth {over}"));
        }
        y += LINE;
    }
    for words in [
        "Thin line: another option becomes the best. Cross: the basis as stated.",
        "In brackets and dark: even the best is worth less than nothing.",
    ] {
        text(svg, LEFT, y, "start", "", words);
        y += LINE;
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_zero_line_is_straight_where_values_are_and_runs_on() {
        // x + y - 2.5 on a grid of 4 by 4: from (2.5, 0) to (0, 2.5), in five pieces.
        let npv: Vec<Vec<Option<f64>>> =
            (0..4).map(|j| (0..4).map(|i| Some(f64::from(i) + f64::from(j) - 2.5)).collect()).collect();
        let lines = chained(&pieces(&npv));
        assert_eq!((lines.len(), lines[0].len()), (1, 6), "{lines:?}");
        assert!(lines[0].iter().all(|(x, y)| (x + y - 2.5).abs() < 1e-12));
        let ends = [lines[0][0], lines[0][5]];
        assert!(ends.contains(&(2.5, 0.0)) && ends.contains(&(0.0, 2.5)), "{ends:?}");
        // Nothing is drawn beside a point without a value, nor for a value of 0 everywhere.
        let hole = vec![vec![Some(-1.0), None], vec![Some(1.0), Some(1.0)]];
        assert_eq!(pieces(&hole), []);
        assert_eq!(pieces(&vec![vec![Some(0.0); 3]; 3]), []);
    }

    #[test]
    fn marks_read_well() {
        let labels = |parameter, low, high| {
            ticks(parameter, &[low, high]).into_iter().map(|(_, label)| label).collect::<Vec<_>>().join(" ")
        };
        assert_eq!(labels(Parameter::Preference, 0.0, 0.06), "0% 1% 2% 3% 4% 5% 6%");
        assert_eq!(labels(Parameter::Elasticity, 0.0, 4.0), "0 1 2 3 4");
        assert_eq!(labels(Parameter::Growth, -0.01, 0.05), "-1% 0% 1% 2% 3% 4% 5%");
    }
}
