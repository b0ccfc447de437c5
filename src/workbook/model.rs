//! The workbook part as it is: sheets, names with their scopes, tables, calculation settings.

mod cells;
mod facts;
mod read;
mod tables;

use std::collections::BTreeMap;

pub use facts::{SharedMaster, SheetFacts, Validation};
pub use tables::Table;

pub(crate) use cells::{CellCursor, FormulaKind, FormulaTag, text_of};

use crate::problem::Problem;
use crate::references::{NameTarget, SheetRange, Token, parse_target, tokens};

/// A workbook: what its main part and the tables of its sheets say.
#[derive(Clone, Debug, Default)]
pub struct Workbook {
    /// All sheets, charts included, in the order of their tabs.
    pub sheets: Vec<Sheet>,
    /// All defined names, in the order of the file.
    pub names: Vec<DefinedName>,
    /// All tables, in the order of their sheets.
    pub tables: Vec<Table>,
    /// Days are counted from 1904.
    pub date1904: bool,
    /// Results are kept as computed; `false` is "precision as displayed".
    pub full_precision: bool,
    /// The workbook recalculates only when told to.
    pub calc_mode_manual: bool,
    /// The workbook's structure is protected.
    pub protected: bool,
    /// There is a calculation chain.
    pub has_calc_chain: bool,
    /// The workbook is shared and keeps its revisions.
    pub has_revisions: bool,
    /// What is wrong with its names and tables; errors concern the name or table they give as their place.
    pub problems: Vec<Problem>,
    /// From a name in lower case and its scope to its place in `names`.
    index: BTreeMap<(String, Option<usize>), usize>,
}

/// One sheet.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Sheet {
    /// The name on its tab.
    pub name: String,
    /// The part that holds it.
    pub part: String,
    /// What it is.
    pub kind: SheetKind,
    /// Whether it shows.
    pub state: SheetState,
    /// Its number, which stays when sheets move.
    pub sheet_id: u32,
    /// The id of its relationship from the workbook part.
    pub rel_id: String,
}

/// What a sheet is.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum SheetKind {
    /// Cells.
    Worksheet,
    /// A chart that fills its sheet.
    Chartsheet,
    /// A dialog of old.
    Dialog,
    /// Macros of old, in cells.
    Macro,
}

/// Whether a sheet shows.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum SheetState {
    /// It does.
    Visible,
    /// Hidden; a user can show it.
    Hidden,
    /// Hidden; only a program can show it.
    VeryHidden,
}

/// A defined name.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct DefinedName {
    /// The name as written.
    pub name: String,
    /// The sheet it belongs to (its place in [`Workbook::sheets`]); none for the whole workbook.
    pub scope: Option<usize>,
    /// Not listed for the user.
    pub hidden: bool,
    /// What it refers to, without an equals sign.
    pub text: String,
    /// It names a function or a procedure.
    pub function: bool,
    /// The remark kept with it.
    pub comment: Option<String>,
}

/// How far names that stand for other names are followed.
const MAX_ALIASES: usize = 16;

impl Workbook {
    /// The sheet of that name, case apart: its place in [`Workbook::sheets`].
    pub fn sheet_index(&self, name: &str) -> Option<usize> {
        let name = name.to_lowercase();
        self.sheets.iter().position(|sheet| sheet.name.to_lowercase() == name)
    }

    /// The name as a formula on that sheet sees it: the sheet's own first, then the workbook's.
    pub fn find_name(&self, name: &str, sheet: Option<usize>) -> Option<&DefinedName> {
        let name = name.to_lowercase();
        let own = sheet.and_then(|sheet| self.index.get(&(name.clone(), Some(sheet))));
        own.or_else(|| self.index.get(&(name, None))).map(|&at| &self.names[at])
    }

    /// The table of that name, case apart.
    pub fn find_table(&self, name: &str) -> Option<&Table> {
        let name = name.to_lowercase();
        self.tables.iter().find(|table| table.name.to_lowercase() == name)
    }

    /// What a name refers to in this workbook.
    ///
    /// Names that stand for other names are followed; sheets are given as their tabs spell them.
    /// A text that is no formula comes back as [`NameTarget::Formula`].
    pub fn resolve(&self, name: &DefinedName) -> NameTarget {
        let mut name = name;
        for _ in 0..MAX_ALIASES {
            let target = match parse_target(&name.text) {
                Ok(target) => target,
                Err(_) => return NameTarget::Formula(name.text.clone()),
            };
            let text = match target {
                NameTarget::Formula(text) => text,
                other => return self.with_sheets(other),
            };
            let [only] = &tokens(&text)[..] else { return NameTarget::Formula(text) };
            let Token::Name(sheets, word) = &only.token else { return NameTarget::Formula(text) };
            let scope = match sheets {
                Some(sheets) if !sheets.first.is_empty() => self.sheet_index(&sheets.first),
                _ => name.scope,
            };
            match self.find_name(word, scope) {
                Some(next) => name = next,
                None if self.find_table(word).is_some() => {
                    return NameTarget::Table { table: (*word).to_owned(), part: String::new() };
                }
                None => return NameTarget::Formula(text),
            }
        }
        NameTarget::Formula(name.text.clone())
    }

    /// Sheets as their tabs spell them, or the first one that is missing.
    fn with_sheets(&self, target: NameTarget) -> NameTarget {
        let known = |at: SheetRange| match self.sheet_index(&at.sheet) {
            Some(sheet) => Ok(SheetRange { sheet: self.sheets[sheet].name.clone(), range: at.range }),
            None => Err(NameTarget::MissingSheet(at.sheet)),
        };
        match target {
            NameTarget::Cells(at) => known(at).map_or_else(|missing| missing, NameTarget::Cells),
            NameTarget::Union(all) => all
                .into_iter()
                .map(known)
                .collect::<Result<_, _>>()
                .map_or_else(|missing| missing, NameTarget::Union),
            other => other,
        }
    }
}
