//! A typed number in a row of formulas.

use std::collections::HashMap;

use super::calc::value;
use super::expr::{At, Expr};
use super::lines::Line;
use super::structure::{Look, exact, figure};
use crate::appraisal::Direction;
use crate::findings::{Finding, Kind};
use crate::patch::Cached;
use crate::problem::Place;
use crate::references::{Range, shift};

/// The most typed numbers beside each other that are a slip and no choice.
const MOST_TYPED: usize = 3;
/// Formulas of one shape that make a row of formulas, at least.
const FEWEST_FORMULAS: usize = 4;

/// Every typed number that stands in a row (or column) of formulas of one shape.
///
/// Rows of inputs are all typed and are none; nor is a row that begins with typed numbers (actuals, or an opening value that
/// the next formula counts on from) or ends with several (a break that somebody meant).
pub(super) fn findings(look: &Look) -> Vec<Finding> {
    let mut found: Vec<Finding> = Vec::new();
    for line in &look.lines {
        for slip in slips(look, line) {
            let finding = finding(look, line, &slip);
            if !found.iter().any(|other| other.place == finding.place) {
                found.push(finding);
            }
        }
    }
    found
}

/// Typed numbers side by side among formulas.
struct Slip {
    cells: Vec<At>,
    /// The shape of the formulas around them.
    shape: String,
    /// How many formulas of the row have that shape.
    alike: usize,
    confidence: f64,
}

/// What stands in one cell of a line.
#[derive(Clone, Copy, PartialEq)]
enum Stands<'a> {
    Formula(&'a str),
    Typed,
    Else,
}

fn slips(look: &Look, line: &Line) -> Vec<Slip> {
    let cells: Vec<At> = line.each().collect();
    let stands: Vec<Stands> = cells
        .iter()
        .map(|at| match look.cells.get(*at) {
            Some(content) if content.shape.is_some() => {
                Stands::Formula(content.shape.as_deref().unwrap_or_default())
            }
            Some(content) if content.typed().is_some() => Stands::Typed,
            _ => Stands::Else,
        })
        .collect();
    let mut counts: HashMap<&str, usize> = HashMap::new();
    for stand in &stands {
        if let Stands::Formula(shape) = stand {
            *counts.entry(shape).or_insert(0) += 1;
        }
    }
    let formulas: usize = counts.values().sum();
    let typed = stands.iter().filter(|stand| **stand == Stands::Typed).count();
    if formulas < FEWEST_FORMULAS || typed == 0 || typed * 3 > formulas {
        return Vec::new();
    }
    let (first, last) = (0, cells.len() - 1);
    let mut slips = Vec::new();
    let mut at = 0;
    while at < cells.len() {
        if stands[at] != Stands::Typed {
            at += 1;
            continue;
        }
        let end = at + stands[at..].iter().take_while(|stand| **stand == Stands::Typed).count() - 1;
        let shape = |i: Option<usize>| match i.and_then(|i| stands.get(i)) {
            Some(Stands::Formula(shape)) => Some(*shape),
            _ => None,
        };
        let (before, after) = (shape(at.checked_sub(1)), shape(Some(end + 1)));
        let alike = |shape: &str| counts.get(shape).copied().unwrap_or(0);
        let found = match (before, after) {
            (Some(a), Some(b)) if a == b => Some((a, 0.95)),
            // Between an opening (or a closing) formula and the others.
            (Some(_), Some(b)) if at == first + 1 && alike(b) >= FEWEST_FORMULAS => Some((b, 0.8)),
            (Some(a), Some(_)) if end + 1 == last && alike(a) >= FEWEST_FORMULAS => Some((a, 0.8)),
            // The first cell: an opening value where the formulas count on from it.
            (None, Some(b)) if at == first && end == first && !counts_on(look, line, cells[end + 1]) => {
                let own = expected(look, cells[at], b);
                let held = look.cells.get(cells[at]).and_then(|content| content.typed());
                let near = matches!((own, held), (Some(a), Some(b)) if (b - a).abs() <= 0.6 * a.abs());
                (alike(b) + 1 >= stands.len() && near).then_some((b, 0.7))
            }
            // In a row of factors or present values only the first may be an opening value.
            (None, Some(b)) if at == first && end > first && is_result(look, &cells) => {
                at += 1;
                Some((b, 0.85))
            }
            (Some(a), None) if end == last && at == last && alike(a) + 2 >= stands.len() => Some((a, 0.7)),
            _ => None,
        };
        if let Some((shape, confidence)) = found.filter(|_| end - at < MOST_TYPED) {
            let confidence = confidence - 0.05 * (end - at) as f64;
            slips.push(Slip {
                cells: cells[at..=end].to_vec(),
                shape: shape.to_owned(),
                alike: alike(shape),
                confidence,
            });
        }
        at = end + 1;
    }
    slips
}

/// Whether cells are the whole of a target.
fn is_result(look: &Look, cells: &[At]) -> bool {
    let choices = look.seen.appraisal.choices.iter();
    choices.flat_map(|choice| &choice.targets).any(|target| look.cells.each(&target.at) == cells)
}

/// Whether a formula of a line draws on the cell before it.
fn counts_on(look: &Look, line: &Line, (sheet, cell): At) -> bool {
    let Some(expr) = look.cells.get((sheet, cell)).and_then(|content| content.expr.as_ref()) else {
        return false;
    };
    let before = |range: &Range| match line.direction {
        Direction::Across => {
            range.first.row <= cell.row && cell.row <= range.last.row && range.last.col < cell.col
        }
        Direction::Down => {
            range.first.col <= cell.col && cell.col <= range.last.col && range.last.row < cell.row
        }
    };
    expr.ranges()
        .iter()
        .any(|(other, range)| *other == sheet && line.range.intersects(range) && before(range))
}

/// The formula of a shape as it reads in a cell.
fn formula(shape: &str, (_, cell): At) -> String {
    shift(shape, i64::from(cell.row), i64::from(cell.col))
}

/// What the formula of a shape would give in a cell; where it is not understood, what the basis gives there.
fn expected(look: &Look, at: At, shape: &str) -> Option<f64> {
    let own = value(&Expr::read(&formula(shape, at), at.0, look.seen.book), &look.cells);
    own.or_else(|| {
        let name = &look.seen.book.sheets[at.0].name;
        let cell = |c: &&super::Compared| c.at.sheet == *name && c.at.range.first == at.1;
        match look.seen.compared.iter().find(cell)?.expected {
            Cached::Number(x) => Some(x),
            _ => None,
        }
    })
}

fn finding(look: &Look, line: &Line, slip: &Slip) -> Finding {
    let (first, last) = (slip.cells[0], slip.cells[slip.cells.len() - 1]);
    let place: Place = look.cells.place_of(first.0, Range::new(first.1, last.1));
    let held: Vec<f64> =
        slip.cells.iter().filter_map(|at| look.cells.get(*at).and_then(|content| content.typed())).collect();
    let own: Vec<Option<f64>> = slip.cells.iter().map(|at| expected(look, *at, &slip.shape)).collect();
    let list = |numbers: &[f64]| numbers.iter().map(|x| figure(*x)).collect::<Vec<_>>().join(", ");
    let text = formula(&slip.shape, first);
    let give = match own.iter().copied().collect::<Option<Vec<f64>>>() {
        Some(own) => {
            let exact: Vec<String> = own.iter().map(|x| exact(*x)).collect();
            format!("={text}, which gives {}", exact.join(", "))
        }
        None => format!("={text}"),
    };
    // The mistake moves the result by what the cell holds beyond its formula; several cells add up.
    let mut effect = super::effect::Effect::default();
    if let ([held], [Some(own)]) = (&held[..], &own[..]) {
        effect = look.changed(first, held - own).unwrap_or_default();
    }
    let cells = line.range;
    Finding {
        kind: Kind::HardCoded,
        place,
        found: format!("{}, typed", list(&held)),
        expected: give,
        effect_on_npv: effect.npv,
        ranking: effect.ranking,
        confidence: slip.confidence,
        words: format!(
            "{} of the {} cells of {cells} hold one formula, and here a number is typed over it, which no longer follows \
             when inputs change.",
            slip.alike,
            line.len()
        ),
    }
}
