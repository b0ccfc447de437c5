//! The main part: sheets, their names and parts, and the defined names' scopes.

use std::collections::BTreeSet;

use quick_xml::events::{BytesStart, Event};

use super::stream::Stream;
use crate::package::{Package, Relationship};
use crate::problem::{Place, Problem, Result};
use crate::xml::attribute;

/// Sheets, at most: hosts run out of memory long before.
pub const MAX_SHEETS: usize = 10_000;
/// Defined names, at most. Workbooks spoilt by copying reach 60,000; more is no appraisal.
pub const MAX_NAMES: usize = 200_000;

/// A sheet of cells.
pub(super) struct Sheet {
    pub(super) name: String,
    pub(super) part: String,
}

/// The sheets of cells in their order, and what is wrong with the main part.
pub(super) fn check_workbook(package: &Package, problems: &mut Vec<Problem>) -> Result<Vec<Sheet>> {
    let part = package.workbook_part();
    let links = package.relationships(part)?;
    check_layout(package, &links, problems);
    let Some(mut stream) = Stream::open(package, part)? else { return Ok(Vec::new()) };
    let mut book =
        Book { part, names: BTreeSet::new(), parts: BTreeSet::new(), sheets: Vec::new(), count: 0 };
    let mut defined = BTreeSet::new();
    let mut scopes = Vec::new();
    while let Some(event) = stream.next()? {
        let (Event::Start(tag) | Event::Empty(tag)) = event else { continue };
        match tag.local_name().as_ref() {
            b"sheet" => book.sheet(package, &links, &tag, problems)?,
            b"definedName" => {
                let Some(name) = attribute(part, &tag, "name")?.filter(|name| !name.is_empty()) else {
                    problems.push(Problem::error("bad-name", Place::default(), "a defined name has no name"));
                    continue;
                };
                let scope = attribute(part, &tag, "localSheetId")?;
                if !defined.insert((name.to_lowercase(), scope.clone())) {
                    let message =
                        "the defined name is there twice in one scope, so that it has no one meaning";
                    problems.push(
                        Problem::error("duplicate-name", Place::name(&name), message)
                            .hint("delete one of the two in the name manager"),
                    );
                }
                scopes.extend(scope.map(|scope| (name, scope)));
                if defined.len() > MAX_NAMES {
                    let message = format!("the workbook holds more than {MAX_NAMES} defined names");
                    return Err(Problem::error("too-many-names", Place::default(), message)
                        .hint("delete unused names in the name manager")
                        .into());
                }
            }
            _ => {}
        }
    }
    for (name, scope) in scopes {
        if !scope.parse::<usize>().is_ok_and(|scope| scope < book.count) {
            let message = format!("the defined name belongs to sheet number {scope:?}, which is not there");
            problems.push(
                Problem::error("name-scope", Place::name(&name), message)
                    .hint("delete the name in the name manager"),
            );
        }
    }
    if book.count == 0 {
        problems.push(Problem::error("no-sheets", Place::default(), "the workbook holds no sheet"));
    }
    Ok(book.sheets)
}

struct Book<'a> {
    part: &'a str,
    names: BTreeSet<String>,
    parts: BTreeSet<String>,
    sheets: Vec<Sheet>,
    count: usize,
}

impl Book<'_> {
    fn sheet(
        &mut self,
        package: &Package,
        links: &[Relationship],
        tag: &BytesStart,
        problems: &mut Vec<Problem>,
    ) -> Result<()> {
        self.count += 1;
        if self.count > MAX_SHEETS {
            let message = format!("the workbook holds more than {MAX_SHEETS} sheets");
            return Err(Problem::error("too-many-sheets", Place::default(), message).into());
        }
        let name = attribute(self.part, tag, "name")?.unwrap_or_default();
        let place = || Place { sheet: Some(name.clone()), ..Place::default() };
        let mut fault =
            |code, message: String| problems.push(Problem::error(code, place(), message).hint(RESAVE));
        if name.is_empty() {
            fault("bad-sheet", format!("sheet number {} has no name", self.count));
        } else if !self.names.insert(name.to_lowercase()) {
            fault("duplicate-sheet", "two sheets have this name; case makes no difference".to_owned());
        }
        let state = attribute(self.part, tag, "state")?;
        if state.as_deref().is_some_and(|state| !matches!(state, "visible" | "hidden" | "veryHidden")) {
            fault("bad-sheet", "it is neither visible nor hidden".to_owned());
        }
        let Some(id) = attribute(self.part, tag, "id")? else {
            fault("bad-sheet", "it does not say which part of the file holds it".to_owned());
            return Ok(());
        };
        let Some(link) = links.iter().find(|link| link.id == id && !link.external) else {
            fault("bad-sheet", format!("its part of the file, {id:?}, is not listed"));
            return Ok(());
        };
        if !package.has(&link.target) {
            fault("bad-sheet", format!("its part of the file, {}, is missing", link.target));
        } else if !self.parts.insert(link.target.to_lowercase()) {
            fault("bad-sheet", format!("it shares {} with another sheet", link.target));
        } else {
            match link.kind.rsplit('/').next() {
                Some("worksheet") => self.sheets.push(Sheet { name, part: link.target.clone() }),
                Some("chartsheet" | "dialogsheet") => {}
                _ => problems.push(
                    Problem::error(
                        "macro-sheet",
                        place(),
                        "it is a macro sheet of an old kind, or of a kind that is not known",
                    )
                    .hint("delete the sheet, or move its macros into a module"),
                ),
            }
        }
        Ok(())
    }
}

const RESAVE: &str = "open the file in a spreadsheet program and save it again";

/// Strings and styles have to be where every reader looks for them: one that looked elsewhere would read
/// dates as numbers and texts as nothing.
fn check_layout(package: &Package, links: &[Relationship], problems: &mut Vec<Problem>) {
    for (kind, file) in [("/sharedStrings", "sharedStrings.xml"), ("/styles", "styles.xml")] {
        let usual = in_folder(package, file);
        let elsewhere =
            links.iter().find(|link| link.kind.ends_with(kind) && !link.target.eq_ignore_ascii_case(&usual));
        if let Some(link) = elsewhere.filter(|link| package.has(&link.target)) {
            let message = format!("{} is used for what stands in {usual} as a rule", link.target);
            problems.push(Problem::error("odd-layout", Place::default(), message).hint(RESAVE));
        }
    }
}

/// A part beside the main part.
pub(super) fn in_folder(package: &Package, file: &str) -> String {
    let folder = package.workbook_part().rsplit_once('/').map(|(folder, _)| folder);
    folder.map_or_else(|| file.to_owned(), |folder| format!("{folder}/{file}"))
}
