//! A marked copy of a workbook: the findings of a check on a sheet of their own, and as notes on the cells concerned.

mod sheet;

use std::collections::{BTreeMap, BTreeSet};
use std::path::Path;

use crate::check::CheckReport;
use crate::findings::Finding;
use crate::graft::{Graft, graft};
use crate::model::{SheetKind, Workbook};
use crate::names_edit::NewName;
use crate::notes::{self, Note};
use crate::own::{OwnSheet, carried};
use crate::package::{Changes, Package, may_write, same_file, write_atomically};
use crate::problem::{Place, Problem, Result, WorkbookError};
use crate::references::{Cell, NameTarget};
use crate::sheets::SheetNames;
use crate::sheets::own::marks;
use crate::verify::verify_marked;
use crate::writer;

/// The sheet-scoped hidden name that marks the sheet of findings, and spans what hence wrote on it. It is no role.
const MARK: &str = "_hence_findings";
/// The sheet-scoped hidden name that keeps the digest of that.
const DIGEST: &str = "_hence_findings_digest";

/// What became of the note of a finding.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Noted {
    /// It hangs on the first cell of the place.
    Placed,
    /// The cell has a note of somebody else, which stays.
    Taken,
    /// The sheet's notes cannot be read, and stay as they are.
    Unreadable,
    /// The place has no cell.
    Nowhere,
}

/// Writes a marked copy of a workbook; it appears whole under its name, or not at all, and the input is never written.
///
/// **Errors**: those of [`mark`]; that the output exists and `force` is false, or is the input.
pub fn mark_file(
    package: &Package,
    report: &CheckReport,
    input: Option<&Path>,
    output: &Path,
    force: bool,
) -> Result<()> {
    if input.is_some_and(|input| same_file(input, output)) {
        let message = format!("the output {} is the input, which is never written", output.display());
        return Err(Problem::error("output-is-input", Place::default(), message)
            .hint("give --out another name")
            .into());
    }
    may_write(output, force)?;
    write_atomically(output, &mark(package, report)?, force)
}

/// A copy of the workbook with the findings of its check; everything else is byte for byte the same.
///
/// The sheet and the notes of an earlier mark are replaced. A cell that has a note of somebody else keeps it, and the sheet
/// says so.
///
/// **Errors**: those of [`Package::graftable`]; `own-sheet-edited` where somebody typed on the sheet of an earlier mark;
/// `output-differs`.
pub fn mark(package: &Package, report: &CheckReport) -> Result<Vec<u8>> {
    package.graftable().map_err(|problem| WorkbookError::from(*problem))?;
    let book = Workbook::read(package)?;
    let previous = previous(&book);
    untouched(package, &book, &previous)?;

    // Tried first: the sheet says what became of each note.
    let mut tried = Changes::default();
    let noted = put_notes(package, &book, &report.findings, &mut tried)?;
    let mut parts: BTreeSet<String> = tried.replace.into_keys().collect();

    let taken = |name: &str| {
        let other = |sheet: &crate::model::Sheet| previous.iter().all(|own| own.name != sheet.name);
        book.sheets.iter().any(|sheet| other(sheet) && sheet.name.to_lowercase() == name.to_lowercase())
    };
    let mut names =
        (1..).map(|n| if n == 1 { sheet::NAME.to_owned() } else { format!("{} {n}", sheet::NAME) });
    let name = names.find(|name| !taken(name)).unwrap_or_default();
    let made = sheet::sheet(&name, package.file_name(), report, &noted);
    let set_names: Vec<NewName> = marks(&made, None)
        .into_iter()
        .zip([MARK, DIGEST])
        .map(|(mark, name)| NewName { name: name.to_owned(), ..mark })
        .collect();
    let ours = Package::from_bytes("findings.xlsx", writer::package(&[made], &[])?)?;
    let leaving: Vec<String> = previous.iter().map(|own| own.name.clone()).collect();
    let grafted = graft(
        package,
        &Graft { ours: &ours, previous: &leaving, set_names: &set_names, remove_names: &[], charts: &[] },
    )?;
    let mut changes = grafted.changes;
    put_notes(package, &book, &report.findings, &mut changes)?;
    let bytes = package.write(&changes)?;
    parts.extend(changes.add.iter().map(|(name, _)| name.clone()));
    verify_marked(package, &bytes, &changes, &grafted.sheets, &parts)?;
    Ok(bytes)
}

/// The sheets of earlier marks.
fn previous(book: &Workbook) -> Vec<OwnSheet> {
    let named = |scope: usize, wanted: &str| {
        book.names.iter().find(|name| name.scope == Some(scope) && name.name.eq_ignore_ascii_case(wanted))
    };
    let of = |index: usize| {
        let NameTarget::Cells(at) = book.resolve(named(index, MARK)?) else { return None };
        let digest = named(index, DIGEST).map(|name| name.text.trim_matches('"').to_owned());
        Some(OwnSheet {
            index,
            name: book.sheets[index].name.clone(),
            used: at.range,
            digest,
            appraisal: None,
        })
    };
    (0..book.sheets.len()).filter_map(of).collect()
}

/// Nothing that somebody typed on the sheet of an earlier mark is lost in silence.
fn untouched(package: &Package, book: &Workbook, previous: &[OwnSheet]) -> Result<()> {
    let typed = carried(package, book, previous, &SheetNames::choose(&[]))?;
    match previous.first().filter(|_| !typed.is_empty()) {
        Some(own) => {
            let place = Place { sheet: Some(own.name.clone()), ..Place::default() };
            Err(Problem::error("own-sheet-edited", place, "somebody typed beside the findings on this sheet")
                .hint("move what was typed to another sheet, or check the workbook as it was before it was marked")
                .into())
        }
        None => Ok(()),
    }
}

/// Puts a note on the first cell of every finding; what became of each.
fn put_notes(
    package: &Package,
    book: &Workbook,
    findings: &[Finding],
    changes: &mut Changes,
) -> Result<Vec<Noted>> {
    let mut noted = vec![Noted::Nowhere; findings.len()];
    for sheet in book.sheets.iter().filter(|sheet| sheet.kind == SheetKind::Worksheet) {
        let mut texts: BTreeMap<Cell, (String, Vec<usize>)> = BTreeMap::new();
        for (i, finding) in findings.iter().enumerate() {
            if let (Some(name), Some(range)) = (&finding.place.sheet, finding.place.range)
                && *name == sheet.name
            {
                let (text, own) = texts.entry(range.first).or_default();
                text.push_str(if text.is_empty() { "" } else { "\n\n" });
                text.push_str(&note(finding));
                own.push(i);
            }
        }
        let notes: Vec<Note> =
            texts.iter().map(|(at, (text, _))| Note { at: *at, text: writer::legal(text) }).collect();
        let mut tried = changes.clone();
        let result = notes::put(package, &sheet.part, &notes, &mut tried);
        let (taken, readable) = match result {
            Ok(taken) => {
                *changes = tried;
                (taken, true)
            }
            Err(_) => (BTreeSet::new(), false),
        };
        for (at, (_, own)) in &texts {
            let what = match (readable, taken.contains(at)) {
                (false, _) => Noted::Unreadable,
                (true, true) => Noted::Taken,
                (true, false) => Noted::Placed,
            };
            own.iter().for_each(|i| noted[*i] = what);
        }
    }
    Ok(noted)
}

/// A finding as a note says it.
fn note(finding: &Finding) -> String {
    let cells = finding.place.range.filter(|range| !range.is_single());
    let cells = cells.map(|range| format!(" ({range})")).unwrap_or_default();
    format!(
        "{}{cells}\nFound: {}\nExpected: {}\n{}\n{:.0}% sure",
        finding.kind.words(),
        finding.found,
        finding.expected,
        finding.words,
        100.0 * finding.confidence
    )
}
