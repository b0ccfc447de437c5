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
/// The sheet-scoped hidden name that keeps which of several appraisals the sheet is of.
pub const APPRAISAL: &str = "hence_appraisal";
/// The name of the verdict cell; of several appraisals, each has one that ends in its name.
pub const VERDICT: &str = "hence_verdict";

impl SheetNames {
    /// The names where nothing clashes, in the order of [`SheetNames::all`].
    pub const PLAIN: [&str; 7] = [
        "Discounting",
        "Audit summary",
        "Audit coverage",
        "Audit checks",
        "Audit sensitivity",
        "Audit changes",
        "Audit charts",
    ];

    /// Names that clash with no sheet of the workbook, whatever the case: `Discounting`, or
    /// `Discounting 2` and so on.
    pub fn choose(existing: &[String]) -> Self {
        SheetNames::choose_for(None, existing)
    }

    /// The same for one of several appraisals: `Discounting North`, cut to what fits the tab.
    pub fn choose_for(appraisal: Option<&str>, existing: &[String]) -> Self {
        let taken: Vec<String> = existing.iter().map(|name| name.to_lowercase()).collect();
        let label = appraisal.map(on_tab).unwrap_or_default();
        let free = |plain: &str| {
            let named = |number: &str| {
                let room = MAX_TAB - plain.len() - number.len() - 1;
                match cut(&label, room) {
                    "" => format!("{plain}{number}"),
                    label => format!("{plain} {label}{number}"),
                }
            };
            let numbered = (2..).map(|n| named(&format!(" {n}")));
            let mut names = std::iter::once(named("")).chain(numbered);
            names.find(|name| !taken.contains(&name.to_lowercase())).unwrap_or_default()
        };
        let [discounting, summary, coverage, checks, sensitivity, changes, charts] = Self::PLAIN.map(free);
        SheetNames { discounting, summary, coverage, checks, sensitivity, changes, charts }
    }

    /// Every one of them, in the order in which they stand.
    pub fn all(&self) -> impl Iterator<Item = &str> {
        let Self { discounting, summary, coverage, checks, sensitivity, changes, charts } = self;
        [discounting, summary, coverage, checks, sensitivity, changes, charts].into_iter().map(String::as_str)
    }
}

/// The longest name of a sheet, in UTF-16 units.
const MAX_TAB: usize = 31;

/// An appraisal's name without what the name of a sheet may not hold.
fn on_tab(name: &str) -> String {
    let kept = name.chars().map(|c| if c.is_control() || r"[]:*?/\'".contains(c) { ' ' } else { c });
    kept.collect::<String>().split_whitespace().collect::<Vec<_>>().join(" ")
}

/// As much of a text as fits so many UTF-16 units.
fn cut(text: &str, room: usize) -> &str {
    let mut used = 0;
    let end = text.char_indices().find(|(_, c)| {
        used += c.len_utf16();
        used > room
    });
    end.map_or(text, |(at, _)| &text[..at]).trim_end()
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
pub(crate) fn marks(sheet: &Sheet, appraisal: Option<&str>) -> Vec<NewName> {
    let cells: Vec<(Cell, String)> = sheet
        .cells()
        .filter_map(|(cell, content)| match content {
            Content::Text(text) => (!text.is_empty()).then(|| (cell, text_mark(text))),
            Content::Number(number) => Some((cell, number_mark(*number))),
            Content::Logical(_) => None,
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
    let own = appraisal.map(|name| mark(APPRAISAL, format!("\"{}\"", name.replace('"', "\"\""))));
    own.into_iter()
        .chain([
            mark(OWN, format!("{}!{range}", quote_sheet(&sheet.name))),
            mark(DIGEST, format!("\"{}\"", digest(&cells))),
        ])
        .collect()
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
    fn names_of_appraisals_fit_their_tabs() {
        let long = "The eastern: embankment, all of it";
        let first = SheetNames::choose_for(Some(long), &[]);
        assert_eq!(first.discounting, "Discounting The eastern embankm");
        assert_eq!(first.sensitivity, "Audit sensitivity The eastern e");
        let taken: Vec<String> = first.all().map(str::to_owned).collect();
        let second = SheetNames::choose_for(Some(long), &taken);
        assert_eq!(second.discounting, "Discounting The eastern emban 2");
        assert!(first.all().chain(second.all()).all(|name| name.chars().count() <= 31));
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
