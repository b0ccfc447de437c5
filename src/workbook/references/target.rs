//! What a defined name refers to.

use super::token::{Spanned, Token, tokens};
use super::{ReferenceError, SheetRange};

/// A constant that a defined name stands for.
#[derive(Clone, Debug, PartialEq)]
pub enum Constant {
    /// A number, a percent sign applied.
    Number(f64),
    /// A text.
    Text(String),
    /// TRUE or FALSE.
    Logical(bool),
    /// An error value other than a lost reference.
    Error(String),
}

/// What a defined name refers to.
#[derive(Clone, Debug, PartialEq)]
pub enum NameTarget {
    /// One rectangle on one sheet.
    Cells(SheetRange),
    /// Several rectangles.
    Union(Vec<SheetRange>),
    /// A constant.
    Constant(Constant),
    /// A formula, which may give different cells each time (OFFSET, INDEX, an intersection).
    Formula(String),
    /// Cells relative to the cell that uses the name.
    Relative,
    /// Cells that were deleted (`#REF!`).
    RefError,
    /// Another workbook, as written.
    External(String),
    /// A sheet that the workbook does not have.
    MissingSheet(String),
    /// Part of a table.
    Table {
        /// The table's name.
        table: String,
        /// What stands between its brackets; empty for the whole.
        part: String,
    },
    /// The same cells on several sheets (`First:Last!A1`).
    ThreeD,
}

/// Reads the text of a defined name.
///
/// Sheets are taken at their word here: whether they exist, and whether a bare word is a table or
/// another name, only [`Workbook::resolve`](crate::model::Workbook::resolve) can know.
///
/// # Errors
/// The text is empty or is no formula (an unclosed quote or bracket, a stray character).
pub fn parse_target(text: &str) -> Result<NameTarget, ReferenceError> {
    let text = text.trim();
    let text = text.strip_prefix('=').unwrap_or(text);
    let all: Vec<Spanned<'_>> = tokens(text);
    if all.is_empty() {
        return Err(ReferenceError::new(text, "cells such as Sheet1!$C$7:$C$9"));
    }
    if let Some(other) = all.iter().find(|t| matches!(t.token, Token::Other(_))) {
        return Err(ReferenceError::new(&text[other.span.clone()], "cells such as Sheet1!$C$7:$C$9"));
    }
    if all.iter().any(|t| matches!(&t.token, Token::Error(e) if e.contains("#REF!"))) {
        return Ok(NameTarget::RefError);
    }
    let external = |t: &Spanned<'_>| match &t.token {
        Token::Ref(reference) => reference.sheet.as_ref().is_some_and(|s| s.is_external()),
        Token::Name(Some(sheets), _) => sheets.is_external(),
        _ => false,
    };
    if all.iter().any(external) {
        return Ok(NameTarget::External(text.to_owned()));
    }
    if let Some(constant) = constant(&all) {
        return Ok(NameTarget::Constant(constant));
    }
    Ok(union(&all).unwrap_or_else(|| NameTarget::Formula(text.to_owned())))
}

/// A number with its signs and percent signs, or one text, truth value or error.
fn constant(all: &[Spanned<'_>]) -> Option<Constant> {
    if let [one] = all {
        match &one.token {
            Token::Text(text) => {
                return Some(Constant::Text(text[1..text.len() - 1].replace("\"\"", "\"")));
            }
            Token::Logical(truth) => return Some(Constant::Logical(*truth)),
            Token::Error(error) => return Some(Constant::Error((*error).to_owned())),
            _ => {}
        }
    }
    let mut value = None;
    let mut sign = 1.0;
    for t in all {
        match (&t.token, value) {
            (Token::Operator("-"), None) => sign = -sign,
            (Token::Operator("+"), None) | (Token::Space, _) => {}
            (Token::Number(number), None) => value = number.parse::<f64>().ok(),
            (Token::Operator("%"), Some(number)) => value = Some(number / 100.0),
            _ => return None,
        }
    }
    value.map(|number| Constant::Number(sign * number))
}

/// References between commas, perhaps in brackets; none for anything more.
fn union(all: &[Spanned<'_>]) -> Option<NameTarget> {
    if let [Spanned { token: Token::TableRef(part), .. }] = all {
        return Some(NameTarget::Table { table: part.table?.to_owned(), part: part.part.to_owned() });
    }
    let mut found = Vec::new();
    let mut unfit = None;
    let mut wanted = true;
    for t in all {
        match &t.token {
            Token::Space | Token::Operator("(" | ")") => {}
            // LibreOffice saves a union in brackets with its own operator.
            Token::Operator("," | "~") if !wanted => wanted = true,
            Token::Ref(reference) if wanted => {
                wanted = false;
                match &reference.sheet {
                    Some(sheets) if sheets.last.is_some() => unfit = Some(NameTarget::ThreeD),
                    Some(sheets) if reference.is_absolute() => {
                        let sheet = sheets.first.clone().into_owned();
                        found.push(SheetRange { sheet, range: reference.range() });
                    }
                    _ => unfit = unfit.or(Some(NameTarget::Relative)),
                }
            }
            _ => return None,
        }
    }
    if wanted {
        return None;
    }
    unfit.or_else(|| {
        if found.len() == 1 { found.pop().map(NameTarget::Cells) } else { Some(NameTarget::Union(found)) }
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    fn cells(text: &str) -> SheetRange {
        text.parse().unwrap()
    }

    // Forms that defined names take in files: ISO/IEC 29500-1, 18.2.5, and public workbooks.
    #[test]
    fn names_refer_to_what_their_text_says() {
        use NameTarget::*;
        let table = |part: &str| Table { table: "Costs".into(), part: part.into() };
        for (text, target) in [
            ("Sheet1!$A$1", Cells(cells("Sheet1!A1"))),
            ("=Sheet1!$A$1:$C$1", Cells(cells("Sheet1!A1:C1"))),
            ("'My sheet'!$C$9:$A$1", Cells(cells("'My sheet'!A1:C9"))),
            ("'It''s'!$A:$B", Cells(cells("'It''s'!A:B"))),
            ("Sheet1!$1:$4", Cells(cells("Sheet1!1:4"))),
            ("'TABLE'!$A$1:$B$2", Cells(cells("TABLE!A1:B2"))),
            ("Sheet1!$A$1,Sheet2!$B$2", Union(vec![cells("Sheet1!A1"), cells("Sheet2!B2")])),
            ("(Sheet1!$A$1,Sheet1!$C$1)", Union(vec![cells("Sheet1!A1"), cells("Sheet1!C1")])),
            ("(Sheet1!$A$1~Sheet1!$C$1)", Union(vec![cells("Sheet1!A1"), cells("Sheet1!C1")])),
            ("Data!A1", Relative),
            ("Data!$A1:$B$2", Relative),
            ("Data!A:A", Relative),
            ("$A$1", Relative),
            ("#REF!", RefError),
            ("Sheet1!#REF!", RefError),
            ("#REF!$A$1", RefError),
            ("SUM(Sheet1!$A$1,#REF!)", RefError),
            ("[1]Inputs!$E$13", External("[1]Inputs!$E$13".into())),
            ("'C:\\data\\[plan.xlsx]Sheet 1'!$A$1", External("'C:\\data\\[plan.xlsx]Sheet 1'!$A$1".into())),
            ("[2]!rate", External("[2]!rate".into())),
            ("9.99", Constant(super::Constant::Number(9.99))),
            ("-3.5%", Constant(super::Constant::Number(-0.035))),
            ("\"uk-\"\"2003\"", Constant(super::Constant::Text("uk-\"2003".into()))),
            ("TRUE", Constant(super::Constant::Logical(true))),
            ("#N/A", Constant(super::Constant::Error("#N/A".into()))),
            ("SUM(tblExpenses[Amount])", Formula("SUM(tblExpenses[Amount])".into())),
            ("Sheet1!A1*2", Formula("Sheet1!A1*2".into())),
            ("OFFSET(Sheet1!$A$1,0,0,3)", Formula("OFFSET(Sheet1!$A$1,0,0,3)".into())),
            ("Sheet1!$A$1:$C$1 Sheet1!$B:$B", Formula("Sheet1!$A$1:$C$1 Sheet1!$B:$B".into())),
            ("{1,2}", Formula("{1,2}".into())),
            ("other_name", Formula("other_name".into())),
            ("Costs[Works]", table("Works")),
            ("Costs[[#Data],[Works]]", table("[#Data],[Works]")),
            ("First:Last!$A$1", ThreeD),
            ("'First one:Last'!$A$1", ThreeD),
        ] {
            assert_eq!(parse_target(text), Ok(target), "{text}");
        }
        for text in ["", " ", "[0]!Sheet1!$A$1", "'Sheet1!$A$1", "\"open", "Costs[Works"] {
            assert!(parse_target(text).is_err(), "{text}");
        }
    }
}
