//! Nothing counts twice: overlapping names, and a stream named beside its own total.

use std::collections::BTreeSet;

use crate::appraisal::{Choice, Direction, Stream};
use crate::problem::{Place, Problem};
use crate::references::{Area, Cell, SheetRange, Token, tokens};

use super::Context;
use super::cells::one;
use super::years::direction;

/// How far sums of sums are followed.
const DEPTH: usize = 4;
/// A sum over more cells than this is not followed, nor are more ranges of one stream.
const FOLLOWED: usize = 400;

/// The cells that a formula adds up (or subtracts), where it does nothing else.
///
/// `SUM(B5:B7)`, `B5+B7`, `SUBTOTAL(9,B5:B7)`; nothing for `B5*1.1`, which is a flow of its own.
pub(crate) fn sum_of(formula: &str, sheet: &str) -> Option<Vec<SheetRange>> {
    let mut parts = Vec::new();
    let mut code = false; // the next number is the function code of SUBTOTAL
    for spanned in tokens(formula) {
        match spanned.token {
            Token::Ref(reference) => {
                let on = match &reference.sheet {
                    None => sheet.to_owned(),
                    Some(sheets) if sheets.is_external() || sheets.last.is_some() => return None,
                    Some(sheets) => sheets.first.clone().into_owned(),
                };
                parts.push(SheetRange { sheet: on, range: reference.range() });
            }
            Token::Function(name) if name.eq_ignore_ascii_case("SUM") => {}
            Token::Function(name) if name.eq_ignore_ascii_case("SUBTOTAL") => code = true,
            Token::Number("9" | "109") if code => code = false,
            Token::Operator("(" | ")" | "+" | "-" | ",") | Token::Space => {}
            _ => return None,
        }
    }
    (!parts.is_empty()).then_some(parts)
}

/// Reports streams of an option that share cells or hold one another's sums.
pub(super) fn check(context: &mut Context, choice: &Choice) {
    for (i, stream) in choice.streams.iter().enumerate() {
        for other in &choice.streams[..i] {
            if stream.at.intersects(&other.at) {
                context.report(
                    Problem::error(
                        "overlap",
                        Place::area(&stream.at).called(&stream.from),
                        format!(
                            "shares cells with {} [{}], whose flows would count twice",
                            other.at, other.from
                        ),
                    )
                    .hint("give each stream its own cells"),
                );
            }
        }
    }
    let ranges: Vec<&Area> = choice.streams.iter().map(|stream| &stream.at).collect();
    let reached = reached(context, &ranges);
    let mut told: BTreeSet<&Area> = BTreeSet::new();
    for (stream, reached) in choice.streams.iter().zip(&reached) {
        for other in choice.streams.iter().filter(|other| other.at != stream.at) {
            let place = Place::area(&stream.at).called(&stream.from);
            let through = reached.iter().filter(|(at, _)| other.at.meets(at)).map(|(_, adds)| *adds).max();
            if through.is_some() {
                told.extend([&stream.at, &other.at]);
            }
            match through {
                Some(true) => context.report(
                    Problem::error(
                        "double-count",
                        place,
                        format!(
                            "is a total that holds {} [{}], whose flows would count twice",
                            other.at, other.from
                        ),
                    )
                    .hint("name the total or its parts, not both"),
                ),
                Some(false) => context.report(
                    Problem::warning(
                        "linked-streams",
                        place,
                        format!("only repeats {} [{}]", other.at, other.from),
                    )
                    .hint("check that the same flows are meant on both sides; else name one of the two"),
                ),
                None => {}
            }
        }
    }
    repeated(context, choice, &told);
}

/// The most streams of one kind among which sums are looked for: the work doubles with each.
const SUMMED: usize = 12;

/// Warns of a stream whose numbers are, year by year, those of another or the sum of others of its kind: values pasted
/// over formulas count twice as formulas do. What formulas have `told` already is left out.
fn repeated(context: &mut Context, choice: &Choice, told: &BTreeSet<&Area>) {
    for stream in choice.streams.iter().filter(|stream| !told.contains(&stream.at)) {
        let same_kind = |other: &&Stream| other.kind == stream.kind && other.at != stream.at;
        let others: Vec<&Stream> = choice.streams.iter().filter(same_kind).take(SUMMED).collect();
        let flows = |s: &Stream| -> Vec<f64> { s.raw.iter().map(|x| x * s.sign * s.unit).collect() };
        let own = flows(stream);
        // Flows that never change are alike by chance.
        if own.iter().all(|x| *x == own[0]) {
            continue;
        }
        let parts: Vec<Vec<f64>> = others.iter().map(|other| flows(other)).collect();
        let found = (1u32..1 << parts.len()).find(|set| {
            let chosen = || (0..parts.len()).filter(|k| set & (1 << k) != 0).map(|k| &parts[k]);
            // A stream of zeros adds nothing, and a pair of copies is told once.
            let zeros = chosen().any(|part| part.iter().all(|x| *x == 0.0));
            !zeros
                && own.iter().enumerate().all(|(year, x)| {
                    let sum: f64 = chosen().map(|part| part[year]).sum();
                    (sum - x).abs() <= 1e-9 * x.abs().max(sum.abs())
                })
        });
        let Some(set) = found else { continue };
        let names: Vec<&str> =
            (0..others.len()).filter(|k| set & (1 << k) != 0).map(|k| others[k].from.as_str()).collect();
        if names.len() == 1 && stream.at < others[set.trailing_zeros() as usize].at {
            continue;
        }
        let message = format!("holds in every year the numbers of {}", names.join(" and "));
        context.report(
            Problem::warning("same-numbers", Place::area(&stream.at).called(&stream.from), message)
                .hint("name the total or its parts, not both; leave it if the numbers are alike by chance"),
        );
    }
}

/// A formula under way: which range it belongs to, its sheet and text, and whether anything was added so far.
type Step = (usize, String, String, bool);

/// What the cells of each range add up, directly or through other sums: true where a sum stands between, false
/// for a plain link.
///
/// The first cell of a range that holds a formula stands for all of them, as rows are filled to the side.
/// All ranges are followed together, so that each depth reads each sheet once.
fn reached(context: &mut Context, ranges: &[&Area]) -> Vec<BTreeSet<(SheetRange, bool)>> {
    let mut reached = vec![BTreeSet::new(); ranges.len()];
    let mut steps: Vec<Step> = Vec::new();
    for (i, range) in ranges.iter().enumerate() {
        let formulas = range.pieces().flat_map(|piece| formulas(context, &piece));
        steps.extend(
            formulas
                .collect::<Vec<_>>()
                .into_iter()
                .take(1)
                .map(|text| (i, range.sheet.clone(), text, false)),
        );
    }
    for _ in 0..DEPTH {
        let mut next: Vec<(usize, SheetRange, bool)> = Vec::new();
        for (i, sheet, text, added) in steps.drain(..) {
            let parts = sum_of(&text, &sheet).unwrap_or_default();
            let adds = added || parts.len() > 1 || parts.iter().any(|part| part.range.len() > 1);
            for part in parts {
                let new = reached[i].len() < FOLLOWED && reached[i].insert((part.clone(), adds));
                if new && part.range.len() <= FOLLOWED as u64 && known(context, &part) {
                    next.push((i, part, adds));
                }
            }
        }
        let wanted: Vec<SheetRange> = next.iter().map(|(_, part, _)| part.clone()).collect();
        // What is wrong with cells that only lie between is no matter of the appraisal.
        if wanted.is_empty() || context.sheets.load(&wanted).is_err() {
            break;
        }
        for (i, part, adds) in next {
            let formulas = formulas(context, &part);
            steps.extend(formulas.into_iter().map(|text| (i, part.sheet.clone(), text, adds)));
        }
    }
    reached
}

/// The formulas of a range, in order.
fn formulas(context: &mut Context, at: &SheetRange) -> Vec<String> {
    let grid = context.sheets.range(at).ok();
    grid.iter().flat_map(|grid| grid.iter()).filter_map(|(_, cell)| cell.formula.clone()).collect()
}

/// Whether the sheet exists; a formula may name one that was deleted.
fn known(context: &Context, at: &SheetRange) -> bool {
    context.book.sheets.iter().any(|sheet| sheet.name == at.sheet)
}

/// Whether a range on the sheet of the years runs beside them, cell for cell.
pub(super) fn aligned(at: &Area, years: &Area) -> bool {
    let direction = direction(&years.hull());
    at.len() == years.len()
        && at.cells().zip(years.cells()).all(|(cell, year)| match direction {
            Some(Direction::Across) => cell.col == year.col,
            Some(Direction::Down) => cell.row == year.row,
            None => false,
        })
}

/// Reports a stream or target whose cells stand under other years than their own.
pub(super) fn check_aligned(context: &mut Context, at: &Area, from: &str, years: &Area) {
    if at.sheet == years.sheet && at.len() == years.len() && !aligned(at, years) {
        context.report(
            Problem::warning(
                "misaligned",
                Place::area(at).called(from),
                format!(
                    "stands beside other cells than the years {}: its first cell is taken for the first year",
                    years.cells_text()
                ),
            )
            .hint("check that the name begins at the first year"),
        );
    }
}

/// The place of a cell of a range, with its name.
pub(super) fn place(at: &SheetRange, cell: Cell, from: &str) -> Place {
    Place::cells(&at.sheet, one(cell)).called(from)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn sums_and_what_is_none() {
        let parts = |text: &str| {
            sum_of(text, "Costs").map(|parts| parts.iter().map(ToString::to_string).collect::<Vec<_>>())
        };
        assert_eq!(parts("SUM(B5:B7)"), Some(vec!["Costs!B5:B7".to_owned()]));
        assert_eq!(parts("+B5-Other!$B$6"), Some(vec!["Costs!B5".to_owned(), "Other!B6".to_owned()]));
        assert_eq!(parts("SUBTOTAL(9,B5:B7)"), Some(vec!["Costs!B5:B7".to_owned()]));
        for text in ["B5*1.1", "B5+9", "MAX(B5:B7)", "1", "SUM(B5:B7)/2", "[1]Sheet1!B5+B6"] {
            assert_eq!(parts(text), None, "{text}");
        }
    }
}
