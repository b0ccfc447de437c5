//! From names and `--role` to ranges: what each role refers to, and why some names cannot be used.

use crate::formulas::absolute;
use crate::model::DefinedName;
use crate::planfile::{Part, Planned, Says};
use crate::problem::{Place, Problem};
use crate::reading::{MAX_CELLS, Value};
use crate::references::{
    Cell, MAX_COLUMNS, MAX_ROWS, NameTarget, Range, SheetRange, parse_target, quote_sheet,
};
use crate::roles::{self, Role, RoleName, Way};

use super::dynamic::cells_now;
use super::{Checked, Context};

/// Names of tables or columns that a hint lists, at most.
const SHOWN: usize = 12;

/// A role with its cells.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Named {
    /// The role, stream and option as the name states them.
    pub name: RoleName,
    /// The defined name as written, or `--role cost_works`.
    pub from: String,
    /// Its cells.
    pub at: SheetRange,
    /// The sheet that the name is scoped to.
    pub scope: Option<String>,
    /// What it says, where a plan states it without a cell; `at` is then no place.
    pub stated: Option<Value>,
}

impl Named {
    /// Its cells, with the name in brackets.
    pub(super) fn place(&self) -> Place {
        match self.cells() {
            Some(at) => Place::cells(&at.sheet, at.range).called(&self.from),
            None => Place::name(&self.from),
        }
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
        Named::without_cell(name, from.to_owned(), value)
    }

    /// Stated by a plan in no cell.
    fn without_cell(name: RoleName, from: String, value: Value) -> Self {
        let at = SheetRange::new("", Range::cell(Cell::new(0, 0)));
        Named { name, from, at, scope: None, stated: Some(value) }
    }

    /// More cells than are read as one range.
    pub(super) fn too_large(&self) -> bool {
        self.at.range.len() > MAX_CELLS
    }
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
            Err(problem) => context.report(*problem),
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
            (Ok(at), None) => {
                let scope = scope(context, defined);
                found.push(Named { name, from: defined.name.clone(), at, scope, stated: None });
            }
            (Ok(at), Some((_, planned))) => disagreement(context, &planned, &defined.name, &at),
            (Err(problem), None) => context.report(*problem),
            (Err(_), Some(_)) => {}
        }
    }
    let mut kept = Vec::new();
    for mut named in found {
        shrink_to_merged(context, &mut named);
        match whole(&named) {
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

/// Whether a name of the workbook can hold for each of several appraisals: it states something, or years, for all.
fn belongs_to_all(name: &RoleName, defined: &DefinedName) -> bool {
    let along = matches!(name.role, Role::Years | Role::Offsets | Role::Prices | Role::Consumption);
    name.option.is_none() && defined.scope.is_none() && (along || name.role.is_setting())
}

/// Where plan and workbook state another base, basis, timing or price basis, the plan counts, and a warning says so.
fn disagreement(context: &mut Context, planned: &Named, name: &str, at: &SheetRange) {
    let weighty = [Role::Base, Role::Basis, Role::Timing, Role::PriceBasis];
    if !weighty.contains(&planned.name.role) || planned.cells().as_ref() == Some(at) {
        return;
    }
    let named = Named { from: name.to_owned(), at: at.clone(), stated: None, ..planned.clone() };
    let (held, said) = (held(context, &named), held(context, planned));
    if held.is_empty() || held.eq_ignore_ascii_case(&said) {
        return;
    }
    let message = format!(
        "the workbook says `{}`, and {} says `{}`: the plan counts",
        super::cells::shown(&held),
        planned.from,
        super::cells::shown(&said)
    );
    context.report(
        Problem::warning("plan-overrides", named.place(), message)
            .hint("take the role out of the plan to use what the workbook says"),
    );
}

/// What the first cell of a role holds, or a plan states, as text.
pub(super) fn held(context: &mut Context, named: &Named) -> String {
    let value = match &named.stated {
        Some(value) => Some(value.clone()),
        None => {
            context.grid(&named.at).and_then(|grid| grid.iter().next().map(|(_, cell)| cell.value.clone()))
        }
    };
    match value {
        Some(Value::Text(text)) => text.trim().to_owned(),
        Some(Value::Number(number) | Value::Date(number)) => number.to_string(),
        _ => String::new(),
    }
}

fn from_plan(context: &mut Context, planned: &Planned) -> Checked<Named> {
    let (name, from) = (planned.name.clone(), planned.from.clone());
    match &planned.says {
        Says::Value(value) => Ok(Named::without_cell(name, from, value.clone())),
        Says::Cells(text) => {
            let at = located(context, Place::name(&from), text)?;
            Ok(Named { name, from, at, scope: None, stated: None })
        }
    }
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
    Ok(Named { name, from, at: located(context, place, range)?, scope: None, stated: None })
}

/// The cells that a text such as `Sheet1!C7:F7`, `Table1[Works]`, or a defined name, stands for; `place` is where the text
/// comes from.
pub(super) fn located(context: &mut Context, place: Place, range: &str) -> Checked<SheetRange> {
    if let Ok(at) = range.parse::<SheetRange>()
        && let Some(sheet) = context.book.sheets.iter().find(|sheet| same_text(&sheet.name, &at.sheet))
    {
        return Ok(SheetRange { sheet: sheet.name.clone(), ..at });
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

/// The one rectangle a name refers to, or why it has none.
pub(super) fn cells(context: &mut Context, defined: &DefinedName) -> Checked<SheetRange> {
    let refuse = |code, message: String, hint: &str| {
        Err(Problem::error(code, Place::name(&defined.name), message).hint(hint).into())
    };
    let again = "let the name refer to one range of cells with $ signs, such as Sheet1!$C$7:$F$7";
    match context.book.resolve(defined) {
        NameTarget::Cells(at) => Ok(at),
        NameTarget::Union(parts) => refuse(
            "name-union",
            format!("refers to {} separate ranges, which are not joined", parts.len()),
            "name one range; give each part its own stream, or put the cells side by side",
        ),
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
fn table_cells(context: &Context, place: Place, name: &str, part: &str) -> Checked<SheetRange> {
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
        return Ok(SheetRange { sheet: context.book.sheets[table.sheet].name.clone(), range });
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
