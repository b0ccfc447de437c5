//! What an earlier fill left in a workbook: hence's own sheets, and the notes people typed on them.

use crate::model::{DefinedName, Workbook};

/// The scoped, hidden name that marks a sheet as hence's own.
pub const OWN_NAME: &str = "hence_own";
/// The name of the verdict cell.
pub const VERDICT_NAME: &str = "hence_verdict";

/// One of hence's own sheets, found by its mark.
#[derive(Clone, Debug)]
pub struct OwnSheet {
    /// Index of the sheet in the workbook.
    pub index: usize,
    /// Its visible name, which a person may have changed.
    pub name: String,
    /// The mark.
    pub mark: DefinedName,
}

/// Every own sheet of the workbook.
pub fn own_sheets(book: &Workbook) -> Vec<OwnSheet> {
    book.names
        .iter()
        .filter(|name| name.name.eq_ignore_ascii_case(OWN_NAME))
        .filter_map(|name| {
            let index = name.scope?;
            let sheet = book.sheets.get(index)?;
            Some(OwnSheet { index, name: sheet.name.clone(), mark: name.clone() })
        })
        .collect()
}
