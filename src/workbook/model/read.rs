//! Reading of the workbook part.

use std::collections::BTreeMap;

use quick_xml::events::{BytesStart, Event};

use super::{DefinedName, Sheet, SheetKind, SheetState, Table, Workbook, text_of};
use crate::package::{Package, Relationship};
use crate::problem::{Place, Problem, Result};
use crate::xml::{Scanner, attribute};

/// Problems of one kind after which the rest is only counted: a file can hold 300,000 bad names.
const MAX_PROBLEMS: usize = 20;

impl Workbook {
    /// Reads the workbook part, its relationships and the tables of its sheets.
    ///
    /// Names that occur twice in one scope and names that belong to no sheet are kept out of use and
    /// reported in [`Workbook::problems`], so that a workbook with a bad name that does not matter
    /// can still be filled.
    ///
    /// **Errors**: `no-sheets`, `duplicate-sheet`, `missing-sheet-part`, and those of reading XML.
    pub fn read(package: &Package) -> Result<Workbook> {
        let part = package.workbook_part();
        let relationships = package.relationships(part)?;
        let xml = package.part(part)?.unwrap_or_default();
        let mut book = Workbook::from_xml(part, &xml, &relationships)?;
        drop(xml);
        for index in 0..book.sheets.len() {
            let sheet = &book.sheets[index];
            if !package.has(&sheet.part) {
                return Err(missing_part(&sheet.name).into());
            }
            for table in package.relationships(&sheet.part)?.iter().filter(|r| r.kind.ends_with("/table")) {
                let Some(xml) = package.part(&table.target)? else { continue };
                match Table::read(&table.target, &xml, index)? {
                    Some(mut found) => {
                        let mut sources = package.relationships(&table.target)?.into_iter();
                        found.from_query |= sources.any(|r| r.kind.ends_with("/queryTable"));
                        book.tables.push(found);
                    }
                    None => book.problems.push(Problem::warning(
                        "bad-table",
                        Place { sheet: Some(book.sheets[index].name.clone()), ..Place::default() },
                        format!("the table in {} has no name or no cells", table.target),
                    )),
                }
            }
        }
        Ok(book)
    }

    /// Reads a workbook part alone: everything but tables.
    ///
    /// **Errors**: as [`Workbook::read`].
    pub fn from_xml(part: &str, xml: &[u8], relationships: &[Relationship]) -> Result<Workbook> {
        let mut book = Workbook { full_precision: true, ..Workbook::default() };
        book.has_calc_chain = relationships.iter().any(|r| r.kind.ends_with("/calcChain"));
        book.has_revisions = relationships.iter().any(|r| r.kind.ends_with("/revisionHeaders"));

        let mut scanner = Scanner::new(part, xml)?;
        let mut section = Vec::new();
        let mut name: Option<(DefinedName, Option<String>)> = None;
        while let Some(token) = scanner.next()? {
            let opened = matches!(token.event, Event::Start(_));
            match &token.event {
                Event::Start(tag) | Event::Empty(tag) => {
                    let depth = scanner.depth() + usize::from(!opened);
                    let local = tag.local_name();
                    match depth {
                        2 => {
                            section = local.as_ref().to_vec();
                            book.setting(part, tag)?;
                        }
                        3 if section == b"sheets" && local.as_ref() == b"sheet" => {
                            let sheet = read_sheet(part, tag, relationships)?;
                            book.sheets.push(sheet);
                        }
                        3 if section == b"definedNames" && local.as_ref() == b"definedName" => {
                            let found = read_name(part, tag)?;
                            if opened {
                                name = Some(found);
                            } else {
                                book.add_name(found);
                            }
                        }
                        _ => {}
                    }
                }
                Event::End(_) if scanner.depth() == 2 => {
                    if let Some(done) = name.take() {
                        book.add_name(done);
                    }
                }
                event => {
                    if let Some((name, _)) = &mut name {
                        text_of(part, event, &mut name.text)?;
                    }
                }
            }
        }
        book.check_sheets()?;
        book.index_names();
        Ok(book)
    }

    fn setting(&mut self, part: &str, tag: &BytesStart<'_>) -> Result<()> {
        let on = |name: &str| -> Result<bool> { Ok(attribute(part, tag, name)?.is_some_and(|v| truth(&v))) };
        match tag.local_name().as_ref() {
            b"workbookPr" => self.date1904 = on("date1904")?,
            b"workbookProtection" => self.protected = on("lockStructure")?,
            b"calcPr" => {
                self.calc_mode_manual = attribute(part, tag, "calcMode")?.as_deref() == Some("manual");
                self.full_precision = attribute(part, tag, "fullPrecision")?.is_none_or(|v| truth(&v));
            }
            _ => {}
        }
        Ok(())
    }

    /// Keeps a name for [`Workbook::index_names`]; a scope that is no number fits no sheet.
    fn add_name(&mut self, (mut name, scope): (DefinedName, Option<String>)) {
        name.scope = scope.map(|text| text.trim().parse().unwrap_or(usize::MAX));
        self.names.push(name);
    }

    fn check_sheets(&self) -> Result<()> {
        if self.sheets.is_empty() {
            return Err(Problem::error("no-sheets", Place::default(), "the workbook holds no sheets").into());
        }
        let mut seen = BTreeMap::new();
        for sheet in &self.sheets {
            if let Some(other) = seen.insert(sheet.name.to_lowercase(), &sheet.name) {
                return Err(Problem::error(
                    "duplicate-sheet",
                    Place { sheet: Some(sheet.name.clone()), ..Place::default() },
                    format!(
                        "two sheets have one name: {other} and {}; names must differ, case apart",
                        sheet.name
                    ),
                )
                .hint("rename one of them in a spreadsheet program")
                .into());
            }
        }
        Ok(())
    }

    /// Builds the index; names that cannot be told apart or belong nowhere are reported and not indexed.
    fn index_names(&mut self) {
        let sheets = self.sheets.len();
        let mut bad = Vec::new();
        let astray = |name: &DefinedName| {
            Problem::error(
                "bad-name-scope",
                Place::name(&name.name),
                format!("the name {} belongs to a sheet that the workbook does not have", name.name),
            )
            .hint("delete the name in the name manager and define it again")
        };
        let mut twice = BTreeMap::new();
        self.names.retain(|name| {
            let fits = name.scope.is_none_or(|scope| scope < sheets);
            if !fits {
                bad.push(astray(name));
            }
            fits
        });
        for (at, name) in self.names.iter().enumerate() {
            let key = (name.name.to_lowercase(), name.scope);
            if self.index.insert(key.clone(), at).is_some() {
                twice.insert(key, at);
            }
        }
        for (key, at) in twice {
            self.index.remove(&key);
            // The program's own names (print areas, filters) are repeated by careless writers, without harm.
            if key.0.starts_with("_xlnm.") {
                continue;
            }
            let name = &self.names[at];
            let scope = match name.scope {
                Some(sheet) => format!("on the sheet {}", self.sheets[sheet].name),
                None => "for the whole workbook".to_owned(),
            };
            bad.push(
                Problem::error(
                    "duplicate-name",
                    Place::name(&name.name),
                    format!("the name {} is defined more than once {scope}", name.name),
                )
                .hint("keep one of the definitions in the name manager"),
            );
        }
        let more = bad.len().saturating_sub(MAX_PROBLEMS);
        bad.truncate(MAX_PROBLEMS);
        if more > 0 {
            let message = format!("{more} more names are defined twice or belong to no sheet");
            bad.push(Problem::error("bad-names", Place::default(), message));
        }
        self.problems.extend(bad);
    }
}

/// A truth value as XML Schema writes it.
fn truth(text: &str) -> bool {
    matches!(text.trim(), "1" | "true" | "on")
}

fn missing_part(sheet: &str) -> Problem {
    Problem::error(
        "missing-sheet-part",
        Place { sheet: Some(sheet.to_owned()), ..Place::default() },
        "the file lists this sheet but does not hold it",
    )
    .hint("open the file in a spreadsheet program and save it again")
}

fn read_sheet(part: &str, tag: &BytesStart<'_>, relationships: &[Relationship]) -> Result<Sheet> {
    let name = attribute(part, tag, "name")?.unwrap_or_default();
    let rel_id = attribute(part, tag, "id")?.unwrap_or_default();
    let Some(relationship) = relationships.iter().find(|r| r.id == rel_id && !r.external) else {
        return Err(missing_part(&name).into());
    };
    let kind = match relationship.kind.rsplit('/').next().unwrap_or_default() {
        "chartsheet" => SheetKind::Chartsheet,
        "dialogsheet" => SheetKind::Dialog,
        "xlMacrosheet" | "xlIntlMacrosheet" => SheetKind::Macro,
        _ => SheetKind::Worksheet,
    };
    let state = match attribute(part, tag, "state")?.as_deref() {
        Some("hidden") => SheetState::Hidden,
        Some("veryHidden") => SheetState::VeryHidden,
        _ => SheetState::Visible,
    };
    let sheet_id = attribute(part, tag, "sheetId")?.and_then(|id| id.trim().parse().ok()).unwrap_or(0);
    Ok(Sheet { name, part: relationship.target.clone(), kind, state, sheet_id, rel_id })
}

/// A name without its text, and its scope as written.
fn read_name(part: &str, tag: &BytesStart<'_>) -> Result<(DefinedName, Option<String>)> {
    let on = |name: &str| -> Result<bool> { Ok(attribute(part, tag, name)?.is_some_and(|v| truth(&v))) };
    let name = DefinedName {
        name: attribute(part, tag, "name")?.unwrap_or_default(),
        scope: None,
        hidden: on("hidden")?,
        text: String::new(),
        function: on("function")? || on("vbProcedure")? || on("xlm")?,
        comment: attribute(part, tag, "comment")?,
    };
    Ok((name, attribute(part, tag, "localSheetId")?))
}
