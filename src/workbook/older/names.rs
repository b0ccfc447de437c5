//! Defined names of other formats in the syntax of .xlsx workbooks.

use std::collections::BTreeSet;

use quick_xml::Reader;
use quick_xml::events::{BytesStart, Event};

use crate::formulas::absolute;
use crate::problem::{Place, Problem, Result};
use crate::references::{NameTarget, SheetRange, parse_target, quote_sheet};

/// A name as it was found: the sheet it is of where the format says so, and its text in the syntax of .xlsx.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Found {
    sheet: Option<String>,
    name: String,
    text: String,
}

/// Names whose sheets stand unquoted before an exclamation mark, and without their scope.
pub(super) fn unquoted(names: &[(String, String)]) -> Vec<Found> {
    names
        .iter()
        .map(|(name, text)| {
            let text = match text.rsplit_once('!') {
                Some((sheet, cells)) if !sheet.starts_with('\'') && !sheet.contains('[') => {
                    format!("{}!{cells}", quote_sheet(sheet))
                }
                _ => text.clone(),
            };
            Found { sheet: None, name: name.clone(), text }
        })
        .collect()
}

/// Names of an OpenDocument spreadsheet, those of a table with the table they are of.
///
/// # Errors
/// Damaged XML.
pub(super) fn open_document(content: &[u8]) -> Result<Vec<Found>> {
    let mut reader = Reader::from_reader(content);
    let mut found = Vec::new();
    let mut sheet: Option<String> = None;
    let failed = |why: &dyn std::fmt::Display| {
        Problem::error("damaged-file", Place::default(), format!("content.xml cannot be read: {why}"))
    };
    loop {
        match reader.read_event().map_err(|e| failed(&e))? {
            Event::Start(e) if e.name().as_ref() == b"table:table" => sheet = attribute(&e, b"table:name"),
            Event::End(e) if e.name().as_ref() == b"table:table" => sheet = None,
            Event::Start(e) | Event::Empty(e) if e.name().as_ref() == b"table:named-range" => {
                let (name, cells) =
                    (attribute(&e, b"table:name"), attribute(&e, b"table:cell-range-address"));
                if let (Some(name), Some(cells)) = (name, cells) {
                    found.push(Found { sheet: sheet.clone(), text: exclaimed(&cells), name });
                }
            }
            Event::Start(e) | Event::Empty(e) if e.name().as_ref() == b"table:named-expression" => {
                if let Some(name) = attribute(&e, b"table:name") {
                    let text = attribute(&e, b"table:expression").unwrap_or_default();
                    found.push(Found { sheet: sheet.clone(), name, text });
                }
            }
            Event::DocType(_) => return Err(failed(&"it declares a document type").into()),
            Event::Eof => return Ok(found),
            _ => {}
        }
    }
}

fn attribute(element: &BytesStart<'_>, name: &[u8]) -> Option<String> {
    let attribute = element.attributes().flatten().find(|a| a.key.as_ref() == name)?;
    attribute.normalized_value(quick_xml::XmlVersion::default()).ok().map(|text| text.into_owned())
}

/// `$'Do nothing'.$D$7:.$GU$7` as `'Do nothing'!$D$7:$GU$7`.
fn exclaimed(address: &str) -> String {
    let address = address.strip_prefix('$').unwrap_or(address);
    let (sheet, cells) = match address.strip_prefix('\'') {
        // A quote inside a quoted name is doubled, so the name ends at the first quote before a dot.
        Some(rest) => match rest.find("'.") {
            Some(end) => (rest[..end].replace("''", "'"), &rest[end + 2..]),
            None => return address.to_owned(),
        },
        None => match address.split_once('.') {
            Some((sheet, cells)) => (sheet.to_owned(), cells),
            None => return address.to_owned(),
        },
    };
    let quoted = quote_sheet(&sheet);
    let same = [format!("${quoted}."), format!("{quoted}."), ".".to_owned()];
    let last = |cells: &str| {
        let repeated = same.iter().find_map(|prefix| cells.strip_prefix(prefix.as_str()));
        repeated.unwrap_or(cells).to_owned()
    };
    let cells = match cells.split_once(':') {
        Some((first, end)) => format!("{first}:{}", last(end)),
        None => cells.to_owned(),
    };
    format!("{quoted}!{cells}")
}

/// Names to define (name, text), and those that were left behind.
///
/// Where a format does not say of which sheet a name is, one that stands once is the workbook's, and one that several
/// sheets have is each sheet's.
pub(super) fn defined(found: Vec<Found>, sheets: &[&str]) -> (Vec<(String, String)>, Vec<String>) {
    let times = |name: &str| found.iter().filter(|other| other.name.eq_ignore_ascii_case(name)).count();
    let (mut kept, mut unread, mut seen) = (Vec::new(), Vec::new(), BTreeSet::new());
    for each in &found {
        // The format's own: print areas and the like, under a name of one control character.
        if each.name.starts_with("_xlnm.") || each.name.chars().any(char::is_control) {
            continue;
        }
        let cells = match parse_target(&each.text) {
            Ok(NameTarget::Cells(SheetRange { sheet, range })) if sheets.contains(&sheet.as_str()) => {
                Some(SheetRange { sheet, range })
            }
            _ => None,
        };
        let Some(cells) = cells.filter(|_| plain(&each.name)) else {
            unread.push(each.name.clone());
            continue;
        };
        let scope = each.sheet.clone().or_else(|| (times(&each.name) > 1).then(|| cells.sheet.clone()));
        let name = scope.map_or(each.name.clone(), |sheet| format!("{}!{}", quote_sheet(&sheet), each.name));
        if seen.insert(name.to_lowercase()) {
            kept.push((name, format!("{}!{}", quote_sheet(&cells.sheet), absolute(cells.range))));
        } else {
            unread.push(each.name.clone());
        }
    }
    unread.sort();
    unread.dedup();
    (kept, unread)
}

/// Letters, digits, underscores and dots: what every program takes as a name.
fn plain(name: &str) -> bool {
    let first = name.chars().next().is_some_and(|c| c.is_alphabetic() || c == '_');
    first && name.chars().all(|c| c.is_alphanumeric() || "_.".contains(c))
}

#[cfg(test)]
mod tests {
    use super::{Found, defined, exclaimed, open_document, unquoted};

    #[test]
    fn addresses_of_open_documents_are_turned() {
        assert_eq!(exclaimed("$Inputs.$B$3"), "Inputs!$B$3");
        assert_eq!(exclaimed("$'Do nothing'.$D$7:.$GU$7"), "'Do nothing'!$D$7:$GU$7");
        assert_eq!(exclaimed("$'It''s'.$A$1:$'It''s'.$A$9"), "'It''s'!$A$1:$A$9");
        assert_eq!(exclaimed("$Plan.$A$1:$Plan.$A$9"), "Plan!$A$1:$A$9");
    }

    #[test]
    fn names_of_tables_keep_their_table() {
        let xml = br#"<a><table:table table:name="Raise &amp; hold"><table:named-expressions><table:named-range
            table:name="hence_npv" table:cell-range-address="$'Raise &amp; hold'.$B$2"/></table:named-expressions>
            </table:table><table:named-expressions><table:named-expression table:name="x" table:expression="1+1"/>
            </table:named-expressions></a>"#;
        let found = open_document(xml).unwrap();
        let (kept, unread) = defined(found, &["Raise & hold"]);
        assert_eq!(kept, [("'Raise & hold'!hence_npv".into(), "'Raise & hold'!$B$2".into())]);
        assert_eq!(unread, ["x"]);
    }

    #[test]
    fn a_name_on_several_sheets_is_each_sheets_own() {
        let given = [("hence_base", "In!$B$3"), ("hence_npv", "Low dyke!$B$2"), ("hence_npv", "High!$B$2")];
        let given = given.map(|(name, text)| (name.to_owned(), text.to_owned()));
        let (kept, unread) = defined(unquoted(&given), &["In", "Low dyke", "High"]);
        let names: Vec<&str> = kept.iter().map(|(name, _)| name.as_str()).collect();
        assert_eq!(names, ["hence_base", "'Low dyke'!hence_npv", "High!hence_npv"]);
        assert_eq!(kept[1].1, "'Low dyke'!$B$2");
        assert!(unread.is_empty());
    }

    #[test]
    fn names_without_cells_of_a_sheet_are_said_to_be_left() {
        let lost = Found { sheet: None, name: "gone".into(), text: "Elsewhere!$A$1".into() };
        assert_eq!(defined(vec![lost], &["Plan"]), (Vec::new(), vec!["gone".to_owned()]));
    }
}
