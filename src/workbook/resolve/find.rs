//! From names and `--role` to ranges: what each role refers to, and why some names cannot be used.

use crate::formulas::absolute;
use crate::model::DefinedName;
use crate::planfile::{Part, Planned};
use crate::problem::{Place, Problem};
use crate::reading::{MAX_CELLS, Value};
use crate::references::{
    Apart, Area, Cell, MAX_COLUMNS, MAX_ROWS, NameTarget, Range, SheetRange, Token, parse_target,
    quote_sheet, tokens,
};
use crate::roles::{self, Role, RoleName, Way};

use super::dynamic::cells_now;
use super::planned::{belongs_to_all, disagreement, from_plan};
use super::{Checked, Context};

/// Pieces of one role, at most: formulas have to hold an address of each.
const MAX_PIECES: usize = 100;

/// Names of tables or columns that a hint lists, at most.
const SHOWN: usize = 12;

/// A role with its cells.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Named {
    /// The role, stream and option as the name states them.
    pub name: RoleName,
    /// The defined name as written, or `--role cost_works`.
    pub from: String,
    /// Its cells; the rectangle around them where they come in pieces.
    pub at: SheetRange,
    /// The same along the years, in one piece or several.
    pub area: Area,
    /// The sheet that the name is scoped to.
    pub scope: Option<String>,
    /// What it says, where a plan or the command line states it without a cell; `at` is then no place.
    pub stated: Option<Value>,
    /// The line of the plan that it comes from.
    pub line: Option<u32>,
}

impl Named {
    /// Its cells, with the name in brackets.
    pub(super) fn place(&self) -> Place {
        match self.cells() {
            Some(at) => Place::cells(&at.sheet, at.range).called(&self.from),
            None => Place { line: self.line, ..Place::name(&self.from) },
        }
    }

    /// Found at these cells, for the whole workbook.
    pub(super) fn at(name: RoleName, from: String, area: Area) -> Self {
        Named { name, from, at: area.hull(), area, scope: None, stated: None, line: None }
    }

    /// Its pieces; none where it is stated without cells.
    pub(super) fn pieces(&self) -> impl Iterator<Item = SheetRange> + '_ {
        self.area.pieces().filter(|_| self.stated.is_none())
    }

    /// Its cells; none where it is stated without one.
    pub(super) fn cells(&self) -> Option<SheetRange> {
        self.stated.is_none().then(|| self.at.clone())
    }

    /// One cell of its range, with the name in brackets.
    pub(super) fn cell(&self, cell: Cell) -> Place {
        match self.cells() {
            Some(at) => Place::cells(&at.sheet, Range::cell(cell)).called(&self.from),
            None => self.place(),
        }
    }

    /// Stated by the command line: a number where the text is one.
    pub(super) fn told(role: Role, from: &str, text: &str) -> Self {
        let text = text.trim();
        let value = text.parse().map_or_else(|_| Value::Text(text.to_owned()), Value::Number);
        let name = RoleName { role, stream: None, option: None };
        Named { stated: Some(value), ..Named::at(name, from.to_owned(), nowhere()) }
    }

    /// Stated by a plan in no cell.
    pub(super) fn without_cell(planned: &Planned, value: Value) -> Self {
        let (name, from) = (planned.name.clone(), planned.from.clone());
        Named { stated: Some(value), line: Some(planned.line), ..Named::at(name, from, nowhere()) }
    }

    /// More cells than are read as one range.
    pub(super) fn too_large(&self) -> bool {
        self.at.range.len() > MAX_CELLS
    }
}

/// The place of what is stated in no cell.
fn nowhere() -> Area {
    Area::from(SheetRange::new("", Range::cell(Cell::new(0, 0))))
}

/// Every role of the workbook: those of the command line, those of the plan that it does not give, and the names that
/// neither gives.
pub(super) fn find(context: &mut Context, given: &[(String, String)], plan: Option<&Part>) -> Vec<Named> {
    let mut found = Vec::new();
    for (role, range) in given {
        match from_command_line(context, role, range) {
            Ok(named) => found.push(named),
            Err(problem) => context.report(*problem),
        }
    }
    let typed = found.len();
    for planned in plan.iter().flat_map(|plan| &plan.entries) {
        if beaten(&found[..typed], &planned.name).is_some() {
            continue;
        }
        match from_plan(context, planned) {
            Ok(named) => found.push(named),
            Err(problem) => {
                context.lost.insert(planned.name.role);
                context.report(*problem);
            }
        }
    }
    let several = plan.is_some_and(|plan| plan.appraisal.is_some());
    let told = found.len();
    let book = context.book;
    for defined in &book.names {
        let Some(parsed) = roles::parse_name(&defined.name) else { continue };
        let place = Place::name(&defined.name);
        let name = match parsed {
            Ok(name) => name,
            Err(slip) => {
                context.report(unknown_name(place, &slip));
                continue;
            }
        };
        if name.role.info().way == Way::Own || (several && !belongs_to_all(&name, defined)) {
            continue;
        }
        let stronger = beaten(&found[..told], &name).map(|at| (at < typed, found[at].clone()));
        if matches!(stronger, Some((true, _))) {
            continue;
        }
        match (cells(context, defined), stronger) {
            (Ok(area), None) => {
                let (from, scope) = (defined.name.clone(), scope(context, defined));
                found.push(Named { scope, ..Named::at(name, from, area) });
            }
            (Ok(area), Some((_, planned))) => disagreement(context, &planned, &defined.name, area),
            (Err(problem), None) => context.report(*problem),
            (Err(_), Some(_)) => {}
        }
    }
    let mut kept = Vec::new();
    for mut named in found {
        shrink_to_merged(context, &mut named);
        match in_pieces(&named).or_else(|| whole(&named)) {
            Some(problem) => context.report(problem),
            None => kept.push(named),
        }
    }
    // Programs write names in orders of their own; that of the cells is the analyst's.
    kept.sort_by_cached_key(|named| {
        (context.book.sheet_index(&named.at.sheet), named.at.range, named.name.role, named.from.clone())
    });
    kept
}

/// A name that looks like a slip.
pub(super) fn unknown_name(place: Place, slip: &str) -> Problem {
    Problem::warning("unknown-name", place, slip).hint("correct the name, or delete it in the name manager")
}

/// The sheet a name is scoped to.
pub(super) fn scope(context: &Context, defined: &DefinedName) -> Option<String> {
    defined.scope.and_then(|index| context.book.sheets.get(index)).map(|sheet| sheet.name.clone())
}

/// Which of the stronger ones has the same role, stream and option.
fn beaten(stronger: &[Named], name: &RoleName) -> Option<usize> {
    let same =
        |a: &Option<String>, b: &Option<String>| a.as_deref().map(roles::key) == b.as_deref().map(roles::key);
    stronger.iter().position(|named| {
        named.name.role == name.role
            && same(&named.name.stream, &name.stream)
            && (named.name.option.is_none() || same(&named.name.option, &name.option))
    })
}

fn from_command_line(context: &mut Context, role: &str, range: &str) -> Checked<Named> {
    let from = format!("--role {role}");
    let place = Place::name(&from);
    let name = roles::parse_role(role).map_err(|slip| {
        Problem::error("unknown-role", place.clone(), slip)
            .hint("the README lists the roles, and `hence names BOOK` those that a workbook has")
    })?;
    if name.role.info().way == Way::Own {
        return Err(Problem::error("unknown-role", place, "is hence's own name and cannot be given").into());
    }
    Ok(Named::at(name, from, located(context, place, range)?))
}

/// The cells that a text such as `Sheet1!C7:F7`, `Table1[Works]`, or a defined name, stands for; `place` is where the text
/// comes from.
pub(super) fn located(context: &mut Context, place: Place, range: &str) -> Checked<Area> {
    if let Ok(at) = range.parse::<SheetRange>()
        && let Some(sheet) = context.book.sheets.iter().find(|sheet| same_text(&sheet.name, &at.sheet))
    {
        return Ok(SheetRange { sheet: sheet.name.clone(), ..at }.into());
    }
    if let Some(pieces) = pieces(context, range) {
        return joined(place, &pieces);
    }
    let (sheet, wanted) = match range.rsplit_once('!') {
        Some((sheet, wanted)) => (Some(sheet.trim_matches('\'').replace("''", "'")), wanted),
        None => (None, range),
    };
    let defined = context.book.names.iter().find(|defined| {
        same_text(&defined.name, wanted)
            && match (&sheet, scope(context, defined)) {
                (Some(sheet), Some(scope)) => same_text(sheet, &scope),
                (None, None) => true,
                _ => false,
            }
    });
    if let Some(defined) = defined {
        return cells(context, defined);
    }
    match parse_target(range) {
        Ok(NameTarget::Table { table, part }) => table_cells(context, place, &table, &part),
        Ok(NameTarget::Formula(text)) if context.book.find_table(&text).is_some() => {
            table_cells(context, place, &text, "")
        }
        Ok(NameTarget::Formula(text)) if text.contains('(') => Err(changing(context, place, &text).into()),
        _ => Err(Problem::error(
            "role-range",
            place,
            format!("`{range}` is neither cells of this workbook nor one of its names or tables"),
        )
        .hint("write the cells as Sheet1!C7:F7, 'My sheet'!C7:F7 or Table1[Works]")
        .into()),
    }
}

fn same_text(a: &str, b: &str) -> bool {
    a.to_lowercase() == b.to_lowercase()
}

/// Ranges between commas, such as `Plan!C4:M4,P4:Z4`: a sheet counts until another is named.
fn pieces(context: &Context, text: &str) -> Option<Vec<SheetRange>> {
    let mut pieces: Vec<SheetRange> = Vec::new();
    for spanned in tokens(text) {
        match spanned.token {
            Token::Ref(reference) => {
                let sheet = match &reference.sheet {
                    Some(sheets) if sheets.is_external() || sheets.last.is_some() => return None,
                    Some(sheets) => {
                        context.book.sheets[context.book.sheet_index(&sheets.first)?].name.clone()
                    }
                    None => pieces.last()?.sheet.clone(),
                };
                pieces.push(SheetRange { sheet, range: reference.range() });
            }
            Token::Operator("," | "~") | Token::Space => {}
            _ => return None,
        }
    }
    (pieces.len() > 1).then_some(pieces)
}

/// Pieces of one row or column as one area, or why they are none.
fn joined(place: Place, pieces: &[SheetRange]) -> Checked<Area> {
    if pieces.len() > MAX_PIECES {
        let message = format!("refers to {} ranges, allowed {MAX_PIECES}", pieces.len());
        return Err(Problem::error("name-union", place, message)
            .hint("put the years side by side on a sheet of their own, and name that")
            .into());
    }
    Area::join(pieces).map_err(|apart| {
        let why = match apart {
            Apart::Sheets => "of several sheets, and the cells of a role stand on one",
            Apart::Lines => "that lie neither in one row nor in one column",
            Apart::Overlap => "that share cells",
        };
        Problem::error("name-union", place, format!("refers to {} ranges {why}", pieces.len()))
            .hint("name pieces of one row or of one column; give each other row its own stream")
            .into()
    })
}

/// Pieces where one range is needed.
fn in_pieces(named: &Named) -> Option<Problem> {
    let role = named.name.role;
    let along = matches!(
        role,
        Role::Years
            | Role::Offsets
            | Role::Span
            | Role::Cost
            | Role::Benefit
            | Role::Flow
            | Role::Damage
            | Role::Effect
            | Role::Consumption
            | Role::Factor
            | Role::Pv
            | Role::Rates
    );
    (!along && named.area.parts().len() > 1).then(|| {
        let message = format!("`{}` comes in {} pieces, and one range is needed", role.word(), named.area.parts().len());
        Problem::error("name-union", named.place(), message)
            .hint("name one range; only years, offsets, single streams and what is filled along them may come in pieces")
    })
}

/// The cells a name refers to, or why it has none.
pub(super) fn cells(context: &mut Context, defined: &DefinedName) -> Checked<Area> {
    let refuse = |code, message: String, hint: &str| {
        Err(Problem::error(code, Place::name(&defined.name), message).hint(hint).into())
    };
    let again = "let the name refer to one range of cells with $ signs, such as Sheet1!$C$7:$F$7";
    match context.book.resolve(defined) {
        NameTarget::Cells(at) => Ok(at.into()),
        NameTarget::Union(pieces) => joined(Place::name(&defined.name), &pieces),
        NameTarget::Constant(constant) => refuse(
            "name-constant",
            format!("is the constant {constant:?}, and cells are needed"),
            "enter it in a cell and let the name refer to that cell",
        ),
        NameTarget::Formula(text) => Err(changing(context, Place::name(&defined.name), &text).into()),
        NameTarget::Relative => {
            refuse("name-relative", "refers to other cells from every cell that uses it".to_owned(), again)
        }
        NameTarget::RefError => {
            refuse("name-lost", "refers to cells that were deleted (#REF!)".to_owned(), again)
        }
        NameTarget::External(text) => refuse(
            "name-external",
            format!("refers to another workbook, `{}`", super::cells::shown(&text)),
            "bring the cells into this workbook and name them here",
        ),
        NameTarget::MissingSheet(sheet) => refuse(
            "name-missing-sheet",
            format!("refers to the sheet `{sheet}`, which does not exist"),
            again,
        ),
        NameTarget::Table { table, part } => table_cells(context, Place::name(&defined.name), &table, &part),
        NameTarget::ThreeD => refuse("name-sheets", "refers to several sheets at once".to_owned(), again),
    }
}

/// A formula that gives cells is refused, as it may give others tomorrow, with the cells that it gives today.
fn changing(context: &mut Context, place: Place, text: &str) -> Problem {
    let message = format!("is the formula `{}`, whose cells may change", super::cells::shown(text));
    let role = place.name.clone().unwrap_or_default();
    match cells_now(context, text) {
        Some(at) => {
            let address = format!("{}!{}", quote_sheet(&at.sheet), absolute(at.range));
            let hint = match role.strip_prefix("--role ") {
                Some(role) => format!("--role {role}={at}, the cells that it gives now"),
                None => format!("let {role} refer to {address}, the cells that it gives now"),
            };
            Problem::error("name-dynamic", place, message).hint(hint)
        }
        None => Problem::error("name-dynamic", place, message)
            .hint("let the name refer to one range of cells with $ signs, such as Sheet1!$C$7:$F$7"),
    }
}

/// The cells of a structured reference, such as `Table1[Works]` or `Table1[[#Headers],[#Data],[Works]]`.
fn table_cells(context: &Context, place: Place, name: &str, part: &str) -> Checked<Area> {
    let wrong = |message: String, hint: String| {
        Err(Problem::error("name-table", place.clone(), message).hint(hint).into())
    };
    let Some(table) = context.book.find_table(name) else {
        let tables: Vec<String> = context.book.tables.iter().map(|table| table.name.clone()).collect();
        let hint = match tables.as_slice() {
            [] => "the workbook has no tables: name cells, such as Sheet1!$C$7:$C$20".to_owned(),
            tables => format!("its tables are {}", listed(tables)),
        };
        return wrong(format!("refers to the table `{name}`, which the workbook does not have"), hint);
    };
    if let Some(range) = table.cells(part, None) {
        return Ok(SheetRange { sheet: context.book.sheets[table.sheet].name.clone(), range }.into());
    }
    let shown = super::cells::shown(part);
    let lower = part.to_lowercase();
    if part.trim_start().starts_with('@') || lower.contains("#this row") {
        let column = table.columns.first().map_or("Works", String::as_str);
        return wrong(
            format!("refers to `{name}[{shown}]`, another row of the table from every cell that uses it"),
            format!("refer to a whole column of the table, such as {name}[{column}], or to one cell"),
        );
    }
    for (rows, word, has) in
        [("headers", "headings", table.header_rows > 0), ("totals", "totals", table.totals_rows > 0)]
    {
        if lower.contains(&format!("#{rows}")) && !has {
            return wrong(
                format!("refers to `{name}[{shown}]`, and the table has no row of {word}"),
                format!("show the row of {word}, or name cells of the table's body"),
            );
        }
    }
    wrong(
        format!("refers to `{name}[{shown}]`, which is no part of the table"),
        format!("its columns are {}", listed(&table.columns)),
    )
}

/// Names in one phrase, the first of many.
fn listed(names: &[String]) -> String {
    let more = if names.len() > SHOWN { ", ..." } else { "" };
    format!("{}{more}", names.iter().take(SHOWN).map(String::as_str).collect::<Vec<_>>().join(", "))
}

/// A name on exactly one merged area means its upper left cell, the only one that holds anything.
pub(super) fn shrink_to_merged(context: &mut Context, named: &mut Named) {
    let several = matches!(named.name.role, Role::Budget | Role::Shared | Role::Costs | Role::Benefits);
    if several || named.at.range.is_single() {
        return;
    }
    if context.facts(&named.at.sheet).is_some_and(|facts| facts.merged.contains(&named.at.range)) {
        named.at.range.last = named.at.range.first;
        named.area = named.at.clone().into();
    }
}

/// Whole rows and columns reach past the appraisal, and so do ranges of millions of cells.
pub(super) fn whole(named: &Named) -> Option<Problem> {
    let Range { first, last } = named.at.range;
    let whole_row = first.col == 0 && last.col + 1 == MAX_COLUMNS;
    let whole_column = first.row == 0 && last.row + 1 == MAX_ROWS;
    if whole_row || whole_column {
        let what = if whole_row { "row" } else { "column" };
        return Some(
            Problem::error("whole-range", named.place(), format!("covers a whole {what}, headings too"))
                .hint("name only the cells from the first year to the last"),
        );
    }
    named.too_large().then(|| {
        Problem::error(
            "range-too-large",
            named.place(),
            format!("the range has {} cells, allowed {MAX_CELLS}", named.at.range.len()),
        )
        .hint("name only the cells that hold the appraisal")
    })
}
