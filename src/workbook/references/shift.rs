//! Moving a formula: relative references go along, fixed ones stay.

use std::fmt::Write;

use super::column_letters;
use super::token::{Corner, Extent, Token, Tokens};

/// The formula as it reads in a cell `d_row` rows below and `d_col` columns to the right.
///
/// Relative parts of references move and wrap at the edges of the sheet, as the references of
/// shared formulas do; parts fixed by `$`, texts, names, table references and the names of sheets
/// stay as written, even a sheet called `Q1`. Everything that does not move keeps its characters.
pub fn shift(formula: &str, d_row: i64, d_col: i64) -> String {
    let mut out = String::with_capacity(formula.len() + 8);
    for spanned in Tokens::new(formula) {
        let text = &formula[spanned.span];
        let Token::Ref(reference) = &spanned.token else {
            out.push_str(text);
            continue;
        };
        // The part after the last exclamation mark is the cells: a quoted name's marks come before it.
        let cells = text.rfind('!').map_or(0, |mark| mark + 1);
        out.push_str(&text[..cells]);
        let (from, to) = (reference.from.moved(d_row, d_col), reference.to.moved(d_row, d_col));
        match reference.extent {
            Extent::Cell => cell(&mut out, from),
            Extent::Cells => {
                cell(&mut out, from);
                out.push(':');
                cell(&mut out, to);
            }
            Extent::Columns => {
                column(&mut out, from);
                out.push(':');
                column(&mut out, to);
            }
            Extent::Rows => {
                row(&mut out, from);
                out.push(':');
                row(&mut out, to);
            }
        }
    }
    out
}

fn column(out: &mut String, corner: Corner) {
    out.push_str(if corner.col_fixed { "$" } else { "" });
    out.push_str(&column_letters(corner.col));
}

fn row(out: &mut String, corner: Corner) {
    out.push_str(if corner.row_fixed { "$" } else { "" });
    // Writing to a String cannot fail.
    let _ = write!(out, "{}", corner.row + 1);
}

fn cell(out: &mut String, corner: Corner) {
    column(out, corner);
    row(out, corner);
}

#[cfg(test)]
mod tests {
    use super::shift;

    // ISO/IEC 29500-1, 18.3.1.40 (shared formulas) and 18.17.2.3 (references).
    #[test]
    fn relative_parts_move_and_fixed_parts_stay() {
        for (formula, rows, cols, moved) in [
            ("A1+$A1+A$1+$A$1", 2, 1, "B3+$A3+B$1+$A$1"),
            ("SUM(A1:B2)", 1, 0, "SUM(A2:B3)"),
            ("SUM(A:A,$B:C,3:3,$4:5)", 1, 2, "SUM(C:C,$B:E,4:4,$4:6)"),
            ("'Q1 x'!A1+'Q1'!A1+Q!A1", 1, 1, "'Q1 x'!B2+'Q1'!B2+Q!B2"),
            ("'It''s A1!'!A1", 1, 0, "'It''s A1!'!A2"),
            ("First:Last!B2+'A1:B2'!C3", 1, 0, "First:Last!B3+'A1:B2'!C4"),
            ("\"A1\"&A1&LOG10(A1)", 1, 0, "\"A1\"&A2&LOG10(A2)"),
            ("Costs[[#This Row],[A1]]+rate_A1+#REF!A1", 1, 0, "Costs[[#This Row],[A1]]+rate_A1+#REF!A1"),
            ("A2 A1 : A3", -1, 0, "A1 A1048576 : A2"),
            ("1E5+A1*1.5e-3", 0, 26, "1E5+AA1*1.5e-3"),
            ("XFD1", 0, 1, "A1"),
            ("[1]Sheet!A1", 1, 0, "[1]Sheet!A2"),
            ("IF(A1>=B1,\"\"\"A1\",{1,2;3,4})", 1, 0, "IF(A2>=B2,\"\"\"A1\",{1,2;3,4})"),
            ("SUM(a1:A$1)", 1, 0, "SUM(A2:A$1)"),
        ] {
            assert_eq!(shift(formula, rows, cols), moved, "{formula}");
        }
    }
}
