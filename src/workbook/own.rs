//! What an earlier fill left in a workbook: hence's own sheets, and the notes people typed on them.

use std::collections::BTreeMap;

use crate::model::{DefinedName, Workbook};
use crate::package::Package;
use crate::patch::Cached;
use crate::problem::{Place, Problem, Result};
use crate::reading::{ReadCell, Sheets, Value};
use crate::references::{Cell, NameTarget, Range, SheetRange};
use crate::sheets::changes::{AFTER as AFTER_COLUMN, CELL as CELL_COLUMN, SHEET as SHEET_COLUMN};
use crate::sheets::own::{APPRAISAL, DIGEST, FORMULA_MARK, OWN, digest, number_mark, text_mark};
use crate::sheets::{Carried, SheetNames};
use crate::writer::{Content, Style};

/// One of hence's own sheets, found by its mark.
#[derive(Clone, Debug)]
pub struct OwnSheet {
    /// Index of the sheet in the workbook.
    pub index: usize,
    /// Its visible name, which a person may have changed.
    pub name: String,
    /// What hence wrote on it lies here; whatever stands elsewhere was typed by a person.
    pub used: Range,
    /// The digest of what hence wrote, where the mark still has it.
    pub digest: Option<String>,
    /// The appraisal that it is of, where the workbook has several.
    pub appraisal: Option<String>,
}

/// Every own sheet of the workbook.
pub fn own_sheets(book: &Workbook) -> Vec<OwnSheet> {
    let marks = book.names.iter().filter(|name| name.name.eq_ignore_ascii_case(OWN));
    marks
        .filter_map(|mark| {
            let index = mark.scope?;
            let sheet = book.sheets.get(index)?;
            let NameTarget::Cells(at) = book.resolve(mark) else { return None };
            let kept = |word: &str| {
                let own = |n: &&DefinedName| n.scope == Some(index) && n.name.eq_ignore_ascii_case(word);
                let text = book.names.iter().find(own).map(|name| name.text.as_str())?;
                let inner = text.strip_prefix('"').and_then(|text| text.strip_suffix('"')).unwrap_or(text);
                Some(inner.replace("\"\"", "\""))
            };
            let (digest, appraisal) = (kept(DIGEST), kept(APPRAISAL));
            Some(OwnSheet { index, name: sheet.name.clone(), used: at.range, digest, appraisal })
        })
        .collect()
}

/// What people typed beside hence's cells on its own sheets, to be put back on the new ones.
///
/// # Errors
/// `own-sheet-edited` where something of hence's own was changed or typed over, or where cells have comments: nothing that
/// a person typed is lost in silence.
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
        let cells: Vec<(Cell, String)> =
            sheets.range(&at)?.iter().filter_map(|(cell, read)| Some((cell, mark(read)?))).collect();
        let mut edited = |message, hint| {
            let place = Place { sheet: Some(own.name.clone()), ..Place::default() };
            problems.push(Problem::error("own-sheet-edited", place, message).hint(hint));
        };
        if own.digest.as_ref() != Some(&digest(&cells)) {
            edited(
                "something that hence wrote on this sheet was changed, or typed between its cells",
                "move notes below or to the right of hence's own cells, or delete the sheet, and fill again",
            );
        }
        if has_comments(package, &book.sheets[own.index].part)? {
            edited(
                "cells of this sheet have comments, which would be lost with it",
                "move them into cells below hence's own, or into the workbook's other sheets, and fill again",
            );
        }
        let mut typed = Vec::new();
        sheets.visit(&own.name, |cell, _| {
            if !own.used.contains(cell) {
                typed.push(SheetRange { sheet: own.name.clone(), range: Range::cell(cell) });
            }
        })?;
        sheets.load(&typed)?;
        let sheet = kind_of(&own.name, names);
        for at in typed {
            let cell = at.range.first;
            let grid = sheets.range(&at)?;
            if let Some((content, style)) = grid.get(cell).and_then(content) {
                notes.push(Carried { sheet: sheet.clone(), cell, content, style });
            }
        }
    }
    if problems.is_empty() { Ok(notes) } else { Err(problems.into()) }
}

/// What an earlier fill wrote, by place, from its list of changes: formulas without their equals sign, numbers as text.
///
/// # Errors
/// Where that sheet cannot be read.
pub fn written(
    package: &Package,
    book: &Workbook,
    previous: &[OwnSheet],
    names: &SheetNames,
) -> Result<BTreeMap<String, String>> {
    let mut written = BTreeMap::new();
    let Some(own) = previous.iter().find(|own| kind_of(&own.name, names) == names.changes) else {
        return Ok(written);
    };
    let at = SheetRange { sheet: own.name.clone(), range: own.used };
    let grid = Sheets::open(package, book)?.range(&at)?;
    let text = |row: u32, col: u32| match grid.get(Cell { row, col }).map(|cell| &cell.value) {
        Some(Value::Text(text)) => Some(text.clone()),
        Some(Value::Number(x)) => Some(x.to_string()),
        _ => None,
    };
    for row in own.used.first.row..=own.used.last.row {
        let columns = (text(row, SHEET_COLUMN), text(row, CELL_COLUMN), text(row, AFTER_COLUMN));
        if let (Some(sheet), Some(cell), Some(after)) = columns {
            let after = after.strip_prefix('=').unwrap_or(&after).to_owned();
            written.insert(format!("{sheet}!{cell}"), after);
        }
    }
    Ok(written)
}

/// What a cell adds to the digest of its sheet.
fn mark(read: &ReadCell) -> Option<String> {
    match (&read.value, &read.formula) {
        (_, Some(_)) => Some(FORMULA_MARK.to_owned()),
        (Value::Blank, None) => None,
        (Value::Number(x) | Value::Date(x), None) => Some(number_mark(*x)),
        (Value::Text(text) | Value::Error(text), None) => (!text.is_empty()).then(|| text_mark(text)),
        (Value::Bool(truth), None) => Some(text_mark(truth_word(*truth))),
    }
}

/// Whether notes hang on cells of the sheet, old ones or threads.
fn has_comments(package: &Package, part: &str) -> Result<bool> {
    let comments = |kind: &str| kind.ends_with("/comments") || kind.ends_with("/threadedComment");
    Ok(package.relationships(part)?.iter().any(|relationship| comments(&relationship.kind)))
}

/// The new sheet that takes the notes of an old one; of a renamed one, the summary.
fn kind_of(old: &str, names: &SheetNames) -> String {
    let old = old.to_lowercase();
    let kinds = SheetNames::PLAIN.iter().zip(names.all());
    let mut fitting = kinds.filter(|(plain, _)| old.starts_with(&plain.to_lowercase()));
    fitting.next().map_or(&names.summary[..], |(_, name)| name).to_owned()
}

/// What a person typed into a cell, and how it is shown again.
fn content(read: &ReadCell) -> Option<(Content, Style)> {
    let style = match &read.value {
        Value::Date(_) => Style::Date,
        Value::Number(_) => Style::Exact,
        _ => Style::Text,
    };
    let content = match (&read.formula, &read.value) {
        (Some(text), Value::Number(x) | Value::Date(x)) => Content::Formula(text.clone(), Cached::Number(*x)),
        (Some(text), Value::Text(result)) => Content::Formula(text.clone(), Cached::Text(result.clone())),
        (Some(text), _) => Content::Formula(text.clone(), Cached::None),
        (None, Value::Number(x) | Value::Date(x)) => Content::Number(*x),
        (None, Value::Text(text) | Value::Error(text)) => Content::Text(text.clone()),
        (None, Value::Bool(truth)) => Content::Text(truth_word(*truth).to_owned()),
        (None, Value::Blank) => return None,
    };
    Some((content, style))
}

fn truth_word(truth: bool) -> &'static str {
    if truth { "TRUE" } else { "FALSE" }
}
