//! hence's sheets by name: how they are chosen, and how a later fill recognises them.

use sha2::{Digest, Sha256};

use super::SheetNames;
use crate::names_edit::NewName;
use crate::references::{Cell, quote_sheet};
use crate::writer::{Content, Sheet};

/// The sheet-scoped hidden name that marks a sheet as hence's own and spans what hence wrote on it.
pub const OWN: &str = "hence_own";
/// The sheet-scoped hidden name that keeps the digest of what hence wrote on the sheet.
pub const DIGEST: &str = "hence_digest";
/// The name of the verdict cell.
pub const VERDICT: &str = "hence_verdict";

impl SheetNames {
    /// Names that clash with no sheet of the workbook, whatever the case: `Discounting`, or
    /// `Discounting 2` and so on.
    pub fn choose(existing: &[String]) -> Self {
        let taken: Vec<String> = existing.iter().map(|name| name.to_lowercase()).collect();
        let free = |wanted: &str| {
            let mut name = wanted.to_owned();
            let mut n = 2;
            while taken.contains(&name.to_lowercase()) {
                name = format!("{wanted} {n}");
                n += 1;
            }
            name
        };
        SheetNames {
            discounting: free("Discounting"),
            summary: free("Audit summary"),
            coverage: free("Audit coverage"),
            checks: free("Audit checks"),
            sensitivity: free("Audit sensitivity"),
            changes: free("Audit changes"),
            charts: free("Audit charts"),
        }
    }
}

/// What a cell adds to the [`digest`].
pub fn text_mark(text: &str) -> String {
    format!("text {text}")
}

/// As [`text_mark`], of a number: to twelve digits of the fifteen that every spreadsheet program keeps when it saves.
pub fn number_mark(number: f64) -> String {
    let kept: f64 = format!("{number:.14e}").parse().unwrap_or(number);
    // Some programs keep the sign of a zero, others do not.
    format!("number {:.11e}", kept + 0.0)
}

/// As [`text_mark`], of a formula, which other programs write in their own way: that there is one.
pub const FORMULA_MARK: &str = "formula";

/// SHA-256, in lower-case hexadecimal, over the cells of a sheet that are not blank, each given by its mark: reference,
/// tab, mark, line feed, in order of row and column. Cells outside of the range that [`OWN`] spans are left out.
pub fn digest(cells: &[(Cell, String)]) -> String {
    let mut sorted: Vec<&(Cell, String)> = cells.iter().collect();
    sorted.sort();
    let mut hash = Sha256::new();
    for (cell, mark) in sorted {
        hash.update(format!("{cell}\t{mark}\n"));
    }
    hash.finalize().iter().map(|byte| format!("{byte:02x}")).collect()
}

/// The marks of ownership of one sheet: what hence wrote on it, and its digest. To be taken before notes
/// of a person are put back, so that they stand outside of what hence calls its own. (Print titles come with the
/// package.)
pub(crate) fn marks(sheet: &Sheet) -> [NewName; 2] {
    let cells: Vec<(Cell, String)> = sheet
        .cells()
        .filter_map(|(cell, content)| match content {
            Content::Text(text) => (!text.is_empty()).then(|| (cell, text_mark(text))),
            Content::Number(number) => Some((cell, number_mark(*number))),
            Content::Formula(..) => Some((cell, FORMULA_MARK.to_owned())),
        })
        .collect();
    let range = crate::formulas::absolute(sheet.used());
    let mark = |name: &str, text: String| NewName {
        name: name.to_owned(),
        scope: Some(sheet.name.clone()),
        text,
        hidden: true,
        comment: None,
    };
    [
        mark(OWN, format!("{}!{range}", quote_sheet(&sheet.name))),
        mark(DIGEST, format!("\"{}\"", digest(&cells))),
    ]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn names_clash_with_nothing_whatever_the_case() {
        let names = SheetNames::choose(&["discounting".into(), "DISCOUNTING 2".into(), "Data".into()]);
        assert_eq!(names.discounting, "Discounting 3");
        assert_eq!(names.summary, "Audit summary");
    }

    #[test]
    fn the_digest_does_not_depend_on_the_order_of_cells() {
        let a = (Cell { row: 0, col: 0 }, "x".to_owned());
        let b = (Cell { row: 0, col: 1 }, "y".to_owned());
        assert_eq!(digest(&[a.clone(), b.clone()]), digest(&[b.clone(), a.clone()]));
        assert_ne!(digest(&[a.clone(), b]), digest(&[a]));
        // Fifteen digits of a number are what is left of it in some programs.
        assert_eq!(number_mark(0.095_957_635_160_916_61), number_mark(0.095_957_635_160_916_6));
        assert_eq!(number_mark(1_234.564_999_999_999_9), number_mark(1_234.565));
        assert_eq!(number_mark(-0.0), number_mark(0.0));
        assert_ne!(number_mark(0.035), number_mark(0.036));
        // SHA-256 of nothing, FIPS 180-4 test vector.
        assert_eq!(digest(&[]), "e3b0c44298fc1c149afbf4c8996fb92427ae41e4649b934ca495991b7852b855");
    }
}
