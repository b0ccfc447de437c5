//! Formula cells that have no stored result.

use crate::problem::Result;
use crate::references::Cell;
use crate::splice::{Kind, Tokens, attribute, local};

/// Every cell of a sheet part that has a formula and no stored result, in the order of the part.
///
/// **Errors**: `bad-xml`.
pub(crate) fn without_result(xml: &[u8]) -> Result<Vec<Cell>> {
    let mut tokens = Tokens::new(xml)?;
    let mut found = Vec::new();
    let (mut row, mut col) = (0, 0);
    // The cell that is open, and whether a formula and a result were met in it.
    let mut open: Option<(Cell, bool, bool)> = None;
    let mut in_data = false;
    while let Some(token) = tokens.next()? {
        let empty = token.kind == Kind::Empty;
        let depth = tokens.depth() + usize::from(empty);
        match (token.kind, depth) {
            (Kind::Open | Kind::Empty, 2) => in_data = local(token.name()) == "sheetData",
            (Kind::Open | Kind::Empty, 3) if in_data => {
                let r = attribute(token.raw, "r")?.and_then(|r| r.trim().parse().ok());
                row = r.unwrap_or(row + 1);
                col = 0;
            }
            (Kind::Open | Kind::Empty, 4) if in_data => {
                let r = attribute(token.raw, "r")?.and_then(|r| r.trim().parse::<Cell>().ok());
                let at = r.unwrap_or(Cell::new(u32::max(row, 1) - 1, col));
                col = at.col + 1;
                open = (!empty).then_some((at, false, false));
            }
            (Kind::Open | Kind::Empty, 5) => {
                if let Some((_, formula, result)) = &mut open {
                    match local(token.name()) {
                        "f" => *formula = true,
                        "v" | "is" => *result |= !empty,
                        _ => {}
                    }
                }
            }
            (Kind::Close, 3) => {
                if let Some((at, true, false)) = open.take() {
                    found.push(at);
                }
            }
            _ => {}
        }
    }
    Ok(found)
}

#[cfg(test)]
mod tests {
    use super::without_result;

    #[test]
    fn formulas_without_a_result_are_found() {
        let xml =
            br#"<worksheet><sheetData><row r="2"><c r="A2"><f>1+1</f></c><c r="B2"><f>1+1</f><v>2</v></c>
            <c r="C2"><v>3</v></c><c><f>A2</f><v/></c></row><row><c><f>B2</f></c></row></sheetData>
            <x><y><c><f>1</f></c></y></x></worksheet>"#;
        let found: Vec<String> = without_result(xml).unwrap().iter().map(ToString::to_string).collect();
        assert_eq!(found, ["A2", "D2", "A3"]);
    }
}
