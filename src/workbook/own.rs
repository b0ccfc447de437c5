//! What an earlier fill left in a workbook: hence's own sheets, and the notes people typed on them.

use std::collections::BTreeMap;

use crate::model::Workbook;
use crate::package::Package;
use crate::problem::{Place, Problem, Result};
use crate::reading::{Sheets, Value};
use crate::references::{Cell, NameTarget, Range, SheetRange};
use crate::sheets::changes::{AFTER as AFTER_COLUMN, CELL as CELL_COLUMN, SHEET as SHEET_COLUMN};
use crate::sheets::own::{DIGEST, OWN, digest};
use crate::sheets::{Carried, SheetNames};

/// One of hence's own sheets, found by its mark.
#[derive(Clone, Debug)]
pub struct OwnSheet {
    /// Index of the sheet in the workbook.
    pub index: usize,
    /// Its visible name, which a person may have changed.
    pub name: String,
    /// What hence wrote on it lies here; whatever stands elsewhere was typed by a person.
    pub used: Range,
    /// The digest of the texts that hence wrote, where the mark still has it.
    pub digest: Option<String>,
}

/// Every own sheet of the workbook.
pub fn own_sheets(book: &Workbook) -> Vec<OwnSheet> {
    let marks = book.names.iter().filter(|name| name.name.eq_ignore_ascii_case(OWN));
    marks
        .filter_map(|mark| {
            let index = mark.scope?;
            let sheet = book.sheets.get(index)?;
            let NameTarget::Cells(at) = book.resolve(mark) else { return None };
            let kept =
                book.names.iter().find(|n| n.scope == Some(index) && n.name.eq_ignore_ascii_case(DIGEST));
            let digest = kept.map(|name| name.text.trim_matches('"').to_owned());
            Some(OwnSheet { index, name: sheet.name.clone(), used: at.range, digest })
        })
        .collect()
}

/// What people typed beside hence's cells on its own sheets, to be put back on the new ones.
///
/// # Errors
/// `own-sheet-edited` where a text of hence's own was changed or typed over: nothing a person typed is lost in silence.
pub fn carried(
    package: &Package,
    book: &Workbook,
    previous: &[OwnSheet],
    names: &SheetNames,
) -> Result<Vec<Carried>> {
    let mut notes = Vec::new();
    let mut problems = Vec::new();
    if previous.is_empty() {
        return Ok(notes);
    }
    let mut sheets = Sheets::open(package, book)?;
    for own in previous {
        let at = SheetRange { sheet: own.name.clone(), range: own.used };
        let texts: Vec<(Cell, String)> = sheets
            .range(&at)?
            .iter()
            .filter_map(|(cell, read)| match (&read.value, &read.formula) {
                (Value::Text(text), None) => Some((cell, text.clone())),
                _ => None,
            })
            .collect();
        if own.digest.as_ref() != Some(&digest(&texts)) {
            let place = Place { sheet: Some(own.name.clone()), ..Place::default() };
            problems.push(
                Problem::error(
                    "own-sheet-edited",
                    place,
                    "a text that hence wrote on this sheet was changed",
                )
                .hint("move notes outside of hence's own cells, or delete the sheet, and fill again"),
            );
            continue;
        }
        let sheet = kind_of(&own.name, names);
        sheets.visit(&own.name, |cell, value| {
            if !own.used.contains(cell)
                && let Some(text) = typed(&value)
            {
                notes.push(Carried { sheet: sheet.clone(), cell, text });
            }
        })?;
    }
    if problems.is_empty() { Ok(notes) } else { Err(problems.into()) }
}

/// The formulas that an earlier fill wrote, by place, from its list of changes.
///
/// # Errors
/// Where that sheet cannot be read.
pub fn written(
    package: &Package,
    book: &Workbook,
    previous: &[OwnSheet],
    names: &SheetNames,
) -> Result<BTreeMap<String, String>> {
    let mut formulas = BTreeMap::new();
    let Some(own) = previous.iter().find(|own| kind_of(&own.name, names) == names.changes) else {
        return Ok(formulas);
    };
    let at = SheetRange { sheet: own.name.clone(), range: own.used };
    let grid = Sheets::open(package, book)?.range(&at)?;
    let text = |row: u32, col: u32| match grid.get(Cell { row, col }).map(|cell| &cell.value) {
        Some(Value::Text(text)) => Some(text.clone()),
        _ => None,
    };
    for row in own.used.first.row..=own.used.last.row {
        let columns = (text(row, SHEET_COLUMN), text(row, CELL_COLUMN), text(row, AFTER_COLUMN));
        if let (Some(sheet), Some(cell), Some(after)) = columns
            && let Some(formula) = after.strip_prefix('=')
        {
            formulas.insert(format!("{sheet}!{cell}"), formula.to_owned());
        }
    }
    Ok(formulas)
}

/// The new sheet that takes the notes of an old one; of a renamed one, the summary.
fn kind_of(old: &str, names: &SheetNames) -> String {
    let all =
        [&names.discounting, &names.summary, &names.coverage, &names.checks, &names.changes, &names.charts];
    let stem = |name: &str| name.trim_end_matches(|c: char| c.is_ascii_digit() || c == ' ').to_lowercase();
    all.into_iter().find(|name| stem(name) == stem(old)).unwrap_or(&names.summary).clone()
}

fn typed(value: &Value) -> Option<String> {
    match value {
        Value::Blank => None,
        Value::Number(x) | Value::Date(x) => Some(x.to_string()),
        Value::Text(text) | Value::Error(text) => Some(text.clone()),
        Value::Bool(true) => Some("TRUE".to_owned()),
        Value::Bool(false) => Some("FALSE".to_owned()),
    }
}
