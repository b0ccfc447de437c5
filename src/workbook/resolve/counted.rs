//! Nothing counts twice: overlapping names, and a stream named beside its own total.

use crate::appraisal::{Choice, Direction};
use crate::problem::{Place, Problem};
use crate::references::{Cell, SheetRange, Token, tokens};

use super::Context;
use super::cells::one;
use super::years::direction;

/// How far sums of sums are followed.
const DEPTH: usize = 4;
/// A sum over more cells than this is not followed into each of them.
const FOLLOWED: u64 = 400;

/// The cells that a formula adds up (or subtracts), where it does nothing else.
///
/// `SUM(B5:B7)`, `B5+B7`, `SUBTOTAL(9,B5:B7)`; nothing for `B5*1.1`, which is a flow of its own.
pub(super) fn sum_of(formula: &str, sheet: &str) -> Option<Vec<SheetRange>> {
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
            if overlap(&stream.at, &other.at) {
                context.report(
                    Problem::error(
                        "overlap",
                        Place::cells(&stream.at.sheet, stream.at.range).called(&stream.from),
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
    for stream in &choice.streams {
        for other in &choice.streams {
            if stream.at == other.at {
                continue;
            }
            match holds(context, &stream.at, &other.at) {
                Some(true) => context.report(
                    Problem::error(
                        "double-count",
                        Place::cells(&stream.at.sheet, stream.at.range).called(&stream.from),
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
                        Place::cells(&stream.at.sheet, stream.at.range).called(&stream.from),
                        format!("only repeats {} [{}]", other.at, other.from),
                    )
                    .hint("check that the same flows are meant on both sides; else name one of the two"),
                ),
                None => {}
            }
        }
    }
}

/// Whether the cells of `whole` are sums that hold those of `part`: true for a sum, false for a plain link.
///
/// The first cell of `whole` with a formula stands for the row, as rows are filled to the side.
fn holds(context: &mut Context, whole: &SheetRange, part: &SheetRange) -> Option<bool> {
    let grid = context.grid(whole)?;
    let (at, formula) = grid.iter().find_map(|(cell, content)| Some((cell, content.formula.clone()?)))?;
    reaches(context, &whole.sheet, at, &formula, part, DEPTH)
}

fn reaches(
    context: &mut Context,
    sheet: &str,
    at: Cell,
    formula: &str,
    part: &SheetRange,
    depth: usize,
) -> Option<bool> {
    let parts = sum_of(formula, sheet)?;
    let adds = parts.len() > 1 || parts[0].range.len() > 1;
    if parts.iter().any(|found| overlap(found, part)) {
        return Some(adds);
    }
    let cells: u64 = parts.iter().map(|found| found.range.len()).sum();
    if depth == 0 || cells > FOLLOWED {
        return None;
    }
    for found in parts {
        let Some(grid) = known(context, &found).then(|| context.grid(&found)).flatten() else { continue };
        let inner: Vec<(Cell, String)> =
            grid.iter().filter_map(|(cell, content)| Some((cell, content.formula.clone()?))).collect();
        for (cell, text) in inner {
            if cell == at && found.sheet == sheet {
                continue;
            }
            if let Some(sums) = reaches(context, &found.sheet, cell, &text, part, depth - 1) {
                return Some(adds || sums);
            }
        }
    }
    None
}

/// Whether the sheet exists; a formula may name one that was deleted.
fn known(context: &Context, at: &SheetRange) -> bool {
    context.book.sheets.iter().any(|sheet| sheet.name == at.sheet)
}

/// Whether two ranges share a cell.
pub(super) fn overlap(a: &SheetRange, b: &SheetRange) -> bool {
    a.sheet == b.sheet && a.range.intersects(&b.range)
}

/// Whether a range on the sheet of the years runs beside them, cell for cell.
pub(super) fn aligned(at: &SheetRange, years: &SheetRange) -> bool {
    match direction(years) {
        Some(Direction::Across) => {
            at.range.first.col == years.range.first.col && at.range.last.col == years.range.last.col
        }
        Some(Direction::Down) => {
            at.range.first.row == years.range.first.row && at.range.last.row == years.range.last.row
        }
        None => false,
    }
}

/// Reports a stream or target whose cells stand under other years than their own.
pub(super) fn check_aligned(context: &mut Context, at: &SheetRange, from: &str, years: &SheetRange) {
    if at.sheet == years.sheet && at.range.len() == years.range.len() && !aligned(at, years) {
        context.report(
            Problem::warning(
                "misaligned",
                Place::cells(&at.sheet, at.range).called(from),
                format!(
                    "stands beside other cells than the years {}: its first cell is taken for the first year",
                    years.range
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
