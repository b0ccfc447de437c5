//! Edits of the workbook part: sheets and names put in or taken out, full calculation on load, all else
//! left byte for byte.

mod outline;

use std::collections::BTreeMap;
use std::fmt::Write;
use std::ops::Range;

use outline::{Outline, SheetTag, Tag};

use crate::problem::{Place, Problem, Result, WorkbookError};
use crate::xml::{escape_attribute, escape_text};

/// The namespace of relationship ids.
const RELATIONSHIPS: &str = "http://schemas.openxmlformats.org/officeDocument/2006/relationships";
/// The largest sheet number that spreadsheet programs accept.
const MAX_SHEET_ID: u32 = 65_534;

/// A sheet to be listed at the end.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewSheet {
    /// Its name, unlike every other.
    pub name: String,
    /// The id of its relationship.
    pub rel_id: String,
    /// Whether it is hidden.
    pub hidden: bool,
}

/// A defined name to be written; one of that name in that scope is replaced in its place.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NewName {
    /// The name.
    pub name: String,
    /// The name of the sheet it belongs to; none for the whole workbook.
    pub scope: Option<String>,
    /// What it refers to, without an equals sign.
    pub text: String,
    /// Not listed for the user.
    pub hidden: bool,
    /// A remark.
    pub comment: Option<String>,
}

/// A defined name to be removed.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct OldName {
    /// The name, case apart.
    pub name: String,
    /// The name of the sheet it belongs to; none for the whole workbook.
    pub scope: Option<String>,
}

/// What is to change in a workbook part.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct BookEdit {
    /// Sheets put in at the end.
    pub add_sheets: Vec<NewSheet>,
    /// Sheets taken out, by the ids of their relationships, with the names that belong to them.
    pub remove_sheets: Vec<String>,
    /// Names put in or replaced.
    pub set_names: Vec<NewName>,
    /// Names taken out. One that is not there is no error.
    pub remove_names: Vec<OldName>,
    /// Spreadsheet programs that heed it calculate everything when they open the file.
    pub full_calc_on_load: bool,
}

/// A workbook part with edits made.
///
/// Elements that go and come are spliced into the text at the places the schema gives them, in the
/// prefix that the part uses; the scopes of names and the active tab follow their sheets.
///
/// **Errors**: `no-sheets` where none would be left, `unknown-sheet` for a scope that is no sheet,
/// `duplicate-sheet` for a new sheet's name that is taken, and those of reading XML.
pub fn edit_workbook(xml: &[u8], edit: &BookEdit) -> Result<Vec<u8>> {
    let book = Outline::read(xml)?;
    let sheets = book.sheets_after(edit)?;
    let mut splices = Splices { xml, changes: Vec::new() };
    book.edit_sheets(edit, &mut splices);
    book.edit_views(edit, &sheets, &mut splices);
    book.edit_names(edit, &sheets, &mut splices)?;
    if edit.full_calc_on_load {
        book.edit_calculation(&mut splices);
    }
    Ok(splices.apply())
}

/// Replacements of stretches of a text, none of which overlap.
struct Splices<'a> {
    xml: &'a [u8],
    changes: Vec<(Range<usize>, String)>,
}

impl Splices<'_> {
    fn replace(&mut self, at: Range<usize>, with: impl Into<String>) {
        self.changes.push((at, with.into()));
    }

    /// Sets attributes of a tag; absent ones go before its end.
    fn set_attribute(&mut self, tag: &Tag, name: &str, value: &str) {
        let found = tag.attributes.iter().find(|(key, _)| &self.xml[key.clone()] == name.as_bytes());
        match found {
            Some((_, at)) => self.replace(at.clone(), value),
            None => {
                let end = tag.open.end - if tag.empty { 2 } else { 1 };
                self.replace(end..end, format!(" {name}=\"{value}\""));
            }
        }
    }

    fn apply(mut self) -> Vec<u8> {
        // A stable sort: insertions at one place come in the order they were made.
        self.changes.sort_by_key(|(at, _)| (at.start, at.end));
        let mut out = Vec::with_capacity(self.xml.len() + 1024);
        let mut done = 0;
        for (at, with) in &self.changes {
            out.extend_from_slice(&self.xml[done..at.start]);
            out.extend_from_slice(with.as_bytes());
            done = at.end;
        }
        out.extend_from_slice(&self.xml[done..]);
        out
    }
}

impl Outline {
    /// Where each old sheet will stand (none if it goes), and the names of all that will be there.
    fn sheets_after(&self, edit: &BookEdit) -> Result<After> {
        let mut after = After { place: Vec::new(), names: BTreeMap::new() };
        for sheet in &self.sheets {
            let goes = edit.remove_sheets.contains(&sheet.rel_id);
            after.place.push((!goes).then_some(after.names.len()));
            if !goes {
                after.add(&sheet.name)?;
            }
        }
        if after.names.is_empty() {
            return Err(no_sheets());
        }
        for sheet in &edit.add_sheets {
            after.add(&sheet.name)?;
        }
        Ok(after)
    }

    fn edit_sheets(&self, edit: &BookEdit, splices: &mut Splices<'_>) {
        let stays = |sheet: &&SheetTag| !edit.remove_sheets.contains(&sheet.rel_id);
        for sheet in self.sheets.iter().filter(|sheet| !stays(sheet)) {
            splices.replace(sheet.tag.whole.clone(), "");
        }
        let mut used: Vec<u32> = self.sheets.iter().filter(stays).map(|sheet| sheet.id).collect();
        let mut new = String::new();
        for sheet in &edit.add_sheets {
            let next = used.iter().max().map_or(1, |id| id.saturating_add(1));
            let id = if next <= MAX_SHEET_ID {
                next
            } else {
                (1..=MAX_SHEET_ID).find(|id| !used.contains(id)).unwrap_or(next)
            };
            used.push(id);
            let state = if sheet.hidden { " state=\"hidden\"" } else { "" };
            let rel_id = escape_attribute(&sheet.rel_id);
            let relation = match &self.rel_prefix {
                Some(prefix) => format!("{prefix}:id=\"{rel_id}\""),
                None => format!("xmlns:r=\"{RELATIONSHIPS}\" r:id=\"{rel_id}\""),
            };
            // Writing to a String cannot fail.
            let _ = write!(
                new,
                "<{}sheet name=\"{}\" sheetId=\"{id}\"{state} {relation}/>",
                self.prefix,
                escape_attribute(&sheet.name)
            );
        }
        if let Some(last) = self.sheets.last() {
            splices.replace(last.tag.whole.end..last.tag.whole.end, new);
        }
    }

    /// Active and first tabs count sheets, so they follow when sheets before them go.
    fn edit_views(&self, edit: &BookEdit, after: &After, splices: &mut Splices<'_>) {
        if edit.remove_sheets.is_empty() {
            return;
        }
        for (tag, first, active) in &self.views {
            for (name, tab) in [("firstSheet", first), ("activeTab", active)] {
                let Some(tab) = *tab else { continue };
                let new = after.place.get(tab).copied().flatten().unwrap_or(0);
                if new != tab {
                    splices.set_attribute(tag, name, &new.to_string());
                }
            }
        }
    }

    fn edit_names(&self, edit: &BookEdit, after: &After, splices: &mut Splices<'_>) -> Result<()> {
        let key = |name: &str, scope: Option<&String>| -> Result<(String, Option<usize>)> {
            let scope = scope.map(|sheet| after.sheet(sheet)).transpose()?;
            Ok((name.to_lowercase(), scope))
        };
        let mut new = BTreeMap::new();
        let mut order = Vec::new();
        for name in &edit.set_names {
            let key = key(&name.name, name.scope.as_ref())?;
            if new.insert(key.clone(), (name, key.1)).is_none() {
                order.push(key);
            }
        }
        let mut gone = Vec::new();
        for name in &edit.remove_names {
            // A sheet that is not there has no names to remove.
            gone.extend(key(&name.name, name.scope.as_ref()).ok());
        }
        gone.sort();

        let mut left = 0;
        for name in &self.names {
            let Some(scope) = name.scope.map_or(Some(None), |old| after.moved(old).map(Some)) else {
                splices.replace(name.tag.whole.clone(), "");
                continue;
            };
            let key = (name.name.to_lowercase(), scope);
            if let Some((name_to_write, scope)) = new.remove(&key) {
                splices.replace(name.tag.whole.clone(), self.name_element(name_to_write, scope));
                left += 1;
            } else if gone.binary_search(&key).is_ok() {
                splices.replace(name.tag.whole.clone(), "");
            } else {
                left += 1;
                if let Some(scope) = scope.filter(|_| scope != name.scope) {
                    splices.set_attribute(&name.tag, "localSheetId", &scope.to_string());
                }
            }
        }

        let mut added = String::new();
        for key in order {
            if let Some((name, scope)) = new.remove(&key) {
                added.push_str(&self.name_element(name, scope));
            }
        }
        let list = |inside: &str| format!("<{0}definedNames>{inside}</{0}definedNames>", self.prefix);
        match &self.names_list {
            // An empty list is not written: programs call it damage.
            Some(tag) if left == 0 && added.is_empty() => {
                if !self.names.is_empty() {
                    splices.changes.retain(|(at, _)| at.start < tag.whole.start || at.end > tag.whole.end);
                    splices.replace(tag.whole.clone(), "");
                }
            }
            Some(tag) if tag.empty => splices.replace(tag.whole.clone(), list(&added)),
            Some(tag) => {
                let end = self.names.last().map_or(tag.open.end, |name| name.tag.whole.end);
                splices.replace(end..end, added);
            }
            None if added.is_empty() => {}
            None => splices.replace(self.names_place..self.names_place, list(&added)),
        }
        Ok(())
    }

    fn name_element(&self, name: &NewName, scope: Option<usize>) -> String {
        let mut out = format!("<{}definedName name=\"{}\"", self.prefix, escape_attribute(&name.name));
        if let Some(comment) = &name.comment {
            let _ = write!(out, " comment=\"{}\"", escape_attribute(comment));
        }
        if let Some(scope) = scope {
            let _ = write!(out, " localSheetId=\"{scope}\"");
        }
        if name.hidden {
            out.push_str(" hidden=\"1\"");
        }
        let _ = write!(out, ">{}</{}definedName>", escape_text(&name.text), self.prefix);
        out
    }

    fn edit_calculation(&self, splices: &mut Splices<'_>) {
        match &self.calculation {
            Some(tag) => splices.set_attribute(tag, "fullCalcOnLoad", "1"),
            None => {
                let place = self.names_list.as_ref().map_or(self.names_place, |tag| tag.whole.end);
                splices.replace(place..place, format!("<{}calcPr fullCalcOnLoad=\"1\"/>", self.prefix));
            }
        }
    }
}

/// The sheets as they will be.
struct After {
    /// Where each old sheet goes.
    place: Vec<Option<usize>>,
    /// The place of each by its name in lower case.
    names: BTreeMap<String, usize>,
}

impl After {
    fn add(&mut self, name: &str) -> Result<()> {
        let place = self.names.len();
        match self.names.insert(name.to_lowercase(), place) {
            None => Ok(()),
            Some(_) => Err(Problem::error(
                "duplicate-sheet",
                Place { sheet: Some(name.to_owned()), ..Place::default() },
                "the workbook has a sheet of this name already",
            )
            .hint("rename the sheet in a spreadsheet program")
            .into()),
        }
    }

    fn sheet(&self, name: &str) -> Result<usize> {
        self.names.get(&name.to_lowercase()).copied().ok_or_else(|| {
            Problem::error(
                "unknown-sheet",
                Place { sheet: Some(name.to_owned()), ..Place::default() },
                "a name is to belong to this sheet, which the workbook does not have",
            )
            .into()
        })
    }

    /// The new number of an old sheet; a number that fitted no sheet stays as it is.
    fn moved(&self, old: usize) -> Option<usize> {
        self.place.get(old).copied().unwrap_or(Some(old))
    }
}

fn no_sheets() -> WorkbookError {
    Problem::error("no-sheets", Place::default(), "the workbook holds no sheets").into()
}
