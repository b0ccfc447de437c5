//! Re-opening the output before it gets its final name: what had to stay has stayed, what was written is there.

mod sheet;
mod values;

use std::collections::{BTreeMap, BTreeSet};
use std::io::Cursor;

use calamine::{Reader as _, Xlsx};

use crate::graft::GraftedSheet;
use crate::model::Workbook;
use crate::package::{Changes, Package, relationships_part};
use crate::patch::CellWrite;
use crate::problem::{Place, Problem, Result, WorkbookError};
use crate::references::{Cell, quote_sheet};

/// What the output is meant to be.
#[derive(Clone, Copy)]
pub struct Expected<'a> {
    /// The changes that made it from the input.
    pub changes: &'a Changes,
    /// What was written, by the sheet's name.
    pub writes: &'a BTreeMap<String, BTreeMap<Cell, CellWrite>>,
    /// hence's sheets in it.
    pub own_sheets: &'a [GraftedSheet],
}

/// Something in the output is not as it should be; it must not be kept.
fn differs(place: Place, what: impl Into<String>) -> WorkbookError {
    Problem::error("output-differs", place, what)
        .hint("nothing was written; please report this workbook as one that hence cannot fill")
        .into()
}

/// Checks an output against the input it was made from.
///
/// Every part that was not meant to change is byte for byte the same; only the workbook part, its
/// relationships, the styles, the content types and the sheets that were written into have changed;
/// in those sheets every other cell and all around the cells is the same; every written cell holds
/// exactly what it was given, read by a second reader (calamine) where that can read the workbook;
/// hence's sheets are listed and well-formed.
///
/// **Returns** what differs from the input by design, a line for each part, in words.
///
/// **Errors**: `output-differs`, with the place; those of opening a package.
pub fn verify(input: &Package, output: &[u8], expected: &Expected) -> Result<Vec<String>> {
    let made = Package::from_bytes(input.file_name(), output.to_vec())?;
    let before = Workbook::read(input)?;
    let after = Workbook::read(&made)?;
    same_parts(input, &made, expected.changes)?;
    allowed_parts(input, &before, expected)?;
    for (name, writes) in expected.writes {
        let (Some(old), Some(new)) = (before.sheet_index(name), after.sheet_index(name)) else {
            return Err(differs(sheet_place(name), "the sheet is missing from the output"));
        };
        let part = |package: &Package, part: &str| package.part(part).map(Option::unwrap_or_default);
        let old = part(input, &before.sheets[old].part)?;
        let new = part(&made, &after.sheets[new].part)?;
        sheet::compare(name, &old, &new, writes)?;
    }
    for own in expected.own_sheets {
        let listed =
            after.sheets.iter().any(|s| s.name == own.name && s.part.eq_ignore_ascii_case(&own.part));
        if !listed {
            return Err(differs(sheet_place(&own.name), "the sheet is not listed in the output"));
        }
        crate::splice::Element::root(&made.part(&own.part)?.unwrap_or_default())?;
    }
    second_reader(input, output, expected)?;
    Ok(by_design(input, &before, expected))
}

/// Checks a marked copy against the workbook it was made from: as [`verify`], of an output in which no cell is written.
///
/// Sheets with notes name their drawing and are else the same; every cell of the workbook reads as before.
///
/// **Arguments**: `noted` are the parts of notes (comments, their drawings, relationships and sheets) that may change.
/// **Errors**: `output-differs`, with the place; those of opening a package.
pub fn verify_marked(
    input: &Package,
    output: &[u8],
    changes: &Changes,
    own: &[GraftedSheet],
    noted: &BTreeSet<String>,
) -> Result<()> {
    let made = Package::from_bytes(input.file_name(), output.to_vec())?;
    let before = Workbook::read(input)?;
    same_parts(input, &made, changes)?;
    for name in changes.replace.keys().filter(|name| book_part(input, name).is_none()) {
        let sheet = before.sheets.iter().find(|sheet| sheet.part.eq_ignore_ascii_case(name));
        if !noted.contains(name) {
            return Err(differs(Place::name(name), "the part was changed, which no mark may do"));
        }
        if let Some(sheet) = sheet {
            let part = |package: &Package| package.part(name).map(Option::unwrap_or_default);
            let (old, new) = (part(input)?, part(&made)?);
            if !adds_a_drawing(&old, &new) {
                return Err(differs(sheet_place(&sheet.name), "the sheet is not the same but for its notes"));
            }
        }
    }
    for name in noted.iter().filter(|name| made.has(name) && !name.ends_with(".vml")) {
        crate::splice::Element::root(&made.part(name)?.unwrap_or_default())?;
    }
    let (changes, writes) = (&Changes::default(), &BTreeMap::new());
    second_reader(input, output, &Expected { changes, writes, own_sheets: own })
}

/// Whether one element that names a drawing is all that a sheet has more than before.
fn adds_a_drawing(old: &[u8], new: &[u8]) -> bool {
    let same = old.iter().zip(new).take_while(|(a, b)| a == b).count();
    let more = new.len().saturating_sub(old.len());
    // Where the bytes behind the insertion begin alike, the place found lies behind the true one.
    (0..=same).rev().take(64).any(|at| {
        let inserted = new.get(at..at + more).unwrap_or_default();
        let named = String::from_utf8_lossy(inserted);
        named.starts_with('<')
            && named.ends_with("/>")
            && named.matches('<').count() == 1
            && named.contains("legacyDrawing ")
            && new[at + more..] == old[at..]
    })
}

fn sheet_place(name: &str) -> Place {
    Place { sheet: Some(name.to_owned()), ..Place::default() }
}

/// All parts but the changed ones are the same, and nothing else has come or gone.
fn same_parts(input: &Package, made: &Package, changes: &Changes) -> Result<()> {
    let lower = |name: &String| name.to_lowercase();
    let replaced: BTreeSet<String> = changes.replace.keys().map(lower).collect();
    let removed: BTreeSet<String> = changes.remove.iter().map(lower).collect();
    let added: BTreeSet<String> = changes.add.iter().map(|(name, _)| name.to_lowercase()).collect();
    for name in input.parts() {
        let key = name.to_lowercase();
        let was = || Place::name(name);
        match (made.has(name), removed.contains(&key) && !added.contains(&key)) {
            (false, true) => {}
            (false, false) => return Err(differs(was(), "the part is missing from the output")),
            (true, true) => return Err(differs(was(), "the part is still in the output")),
            (true, false) => {
                let kept = !replaced.contains(&key) && !removed.contains(&key);
                if kept && !input.packs_alike(made, name) && input.part(name)? != made.part(name)? {
                    return Err(differs(was(), "the part is not the same in the output"));
                }
            }
        }
    }
    match made.parts().find(|name| !input.has(name) && !added.contains(&name.to_lowercase())) {
        Some(extra) => Err(differs(Place::name(extra), "the part has come into the output")),
        None => Ok(()),
    }
}

/// Only parts of the kinds that may change have changed.
fn allowed_parts(input: &Package, before: &Workbook, expected: &Expected) -> Result<()> {
    for name in expected.changes.replace.keys() {
        let written = before
            .sheets
            .iter()
            .any(|sheet| sheet.part.eq_ignore_ascii_case(name) && expected.writes.contains_key(&sheet.name));
        if !written && book_part(input, name).is_none() {
            return Err(differs(Place::name(name), "the part was changed, which no fill may do"));
        }
    }
    Ok(())
}

/// What changes in a part that belongs to the whole workbook.
fn book_part(input: &Package, name: &str) -> Option<&'static str> {
    let styles = || {
        let links = input.relationships(input.workbook_part()).unwrap_or_default();
        links.iter().any(|r| r.kind.ends_with("/styles") && r.target.eq_ignore_ascii_case(name))
    };
    if name.eq_ignore_ascii_case(input.workbook_part()) {
        Some("sheets listed, names set, full calculation when opened")
    } else if name.eq_ignore_ascii_case(&relationships_part(input.workbook_part())) {
        Some("relationships of the new sheets")
    } else if name.eq_ignore_ascii_case("[Content_Types].xml") {
        Some("content types of the new parts")
    } else if styles() {
        Some("cell formats of the new sheets appended")
    } else {
        None
    }
}

/// Reads the written cells with calamine, if that can read the input at all.
fn second_reader(input: &Package, output: &[u8], expected: &Expected) -> Result<()> {
    let mut book = match Xlsx::new(Cursor::new(output)) {
        Ok(book) => book,
        Err(_) if Xlsx::new(Cursor::new(input.bytes())).is_err() => return Ok(()),
        Err(error) => {
            let what = format!("a second reader cannot open the output: {error}");
            return Err(differs(Place::default(), what));
        }
    };
    let names = book.sheet_names();
    if let Some(own) = expected.own_sheets.iter().find(|own| !names.contains(&own.name)) {
        return Err(differs(sheet_place(&own.name), "a second reader does not find the sheet"));
    }
    for (name, writes) in expected.writes {
        values::check(&mut book, name, writes)?;
    }
    Ok(())
}

/// What differs, a line for each part.
fn by_design(input: &Package, before: &Workbook, expected: &Expected) -> Vec<String> {
    let mut lines = Vec::new();
    for name in expected.changes.replace.keys() {
        let sheet = before.sheets.iter().find(|sheet| sheet.part.eq_ignore_ascii_case(name));
        let Some((sheet, writes)) = sheet.and_then(|s| Some((s, expected.writes.get(&s.name)?))) else {
            lines.extend(book_part(input, name).map(|what| format!("{name}: {what}")));
            continue;
        };
        let written = writes.values().filter(|write| write.overwrites()).count();
        let dropped = writes.len() - written;
        let sheet = quote_sheet(&sheet.name);
        lines
            .push(format!("{name}: sheet {sheet}, {written} cells written, {dropped} cached values dropped"));
    }
    let added: BTreeSet<String> = expected.changes.add.iter().map(|(name, _)| name.to_lowercase()).collect();
    for name in expected.changes.remove.iter().filter(|name| !added.contains(&name.to_lowercase())) {
        lines.push(format!("{name}: left out"));
    }
    for (name, _) in &expected.changes.add {
        let sheet = expected.own_sheets.iter().find(|sheet| sheet.part == *name);
        let what = sheet.map_or(String::new(), |sheet| format!(", sheet {}", quote_sheet(&sheet.name)));
        lines.push(format!("{name}: new{what}"));
    }
    lines
}
