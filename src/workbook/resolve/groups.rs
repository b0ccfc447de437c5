//! Which names belong to which option, and which are shared by all of them.

use std::collections::{BTreeMap, BTreeSet};

use crate::problem::Problem;
use crate::references::{Cell, Range};
use crate::roles::{Role, key};

use super::find::Named;
use super::{Context, texts};

/// The names of one option.
pub(super) struct Group {
    /// Its name as shown.
    pub name: String,
    /// What belongs to it alone.
    pub named: Vec<Named>,
}

/// All names of a workbook by option.
pub(super) struct Split {
    /// The options in order.
    pub groups: Vec<Group>,
    /// What has no option.
    pub shared: Vec<Named>,
    /// The keys of the streams that all options share, from the role `shared`.
    pub common: BTreeSet<String>,
}

impl Split {
    /// The one name of a role for an option: its own, else the shared one.
    pub(super) fn of<'s>(&'s self, group: &'s Group, role: Role) -> Option<&'s Named> {
        let plain = |named: &&Named| named.name.role == role && named.name.stream.is_none();
        group.named.iter().find(plain).or_else(|| self.shared.iter().find(plain))
    }

    /// The name of a role about a stream for an option: its own, else the shared one.
    pub(super) fn about<'s>(&'s self, group: &'s Group, role: Role, stream: &str) -> Option<&'s Named> {
        let fits = |named: &&Named| {
            named.name.role == role && named.name.stream.as_deref().map(key) == Some(key(stream))
        };
        group.named.iter().find(fits).or_else(|| self.shared.iter().find(fits))
    }
}

/// Splits the names of a workbook by option.
pub(super) fn split(context: &mut Context, named: Vec<Named>) -> Split {
    let sheets = option_sheets(&named);
    let copied = copied(&named, &sheets);
    let mut groups: BTreeMap<String, Group> = BTreeMap::new();
    let mut shared: Vec<Named> = Vec::new();
    for named in named {
        let from_sheet = named.scope.clone().filter(|sheet| sheets.contains(sheet));
        let from_sheet =
            from_sheet.or_else(|| copied.contains(&what(&named)).then(|| named.at.sheet.clone()));
        match named.name.option.clone().or(from_sheet) {
            Some(option) => {
                let group = groups
                    .entry(key(&option))
                    .or_insert_with(|| Group { name: option.clone(), named: vec![] });
                add(context, &mut group.named, named);
            }
            None => add(context, &mut shared, named),
        }
    }
    let mut groups: Vec<Group> = groups.into_values().collect();
    for group in &mut groups {
        name_after_sheet(context, group);
    }
    groups.sort_by_key(|group| first_cell(context, &group.named));
    let common = shared
        .iter()
        .find(|named| named.name.role == Role::Shared)
        .cloned()
        .map(|named| texts::list(context, &named).into_iter().map(|(text, _)| key(&text)).collect())
        .unwrap_or_default();
    if groups.is_empty() {
        let name = only_name(context, &shared);
        groups.push(Group { name, named: std::mem::take(&mut shared) });
    } else {
        refuse_loose(context, &shared, &common, &groups);
    }
    Split { groups, shared, common }
}

/// The sheets whose own names hold both a stream and an output.
fn option_sheets(named: &[Named]) -> BTreeSet<String> {
    let of = |test: fn(Role) -> bool| -> BTreeSet<&String> {
        let own = named.iter().filter(|named| named.name.option.is_none() && test(named.name.role));
        own.filter_map(|named| named.scope.as_ref()).collect()
    };
    of(Role::is_stream).intersection(&of(Role::is_output)).map(|sheet| (*sheet).clone()).collect()
}

/// What a name says, and where it stands.
type What = (String, Role, Option<String>);

fn what(named: &Named) -> What {
    (named.at.sheet.clone(), named.name.role, named.name.stream.as_deref().map(key))
}

/// Names of the whole workbook that belong to a sheet all the same, as other sheets were copied from it: a spreadsheet
/// program keeps the names of the first sheet for the whole workbook, and gives each copy the same names of its own.
///
/// **Returns**: those of sheets that hold both a stream and an output among them, and that have copies with names.
fn copied(named: &[Named], options: &BTreeSet<String>) -> BTreeSet<What> {
    let whole = |named: &&Named| {
        named.scope.is_none() && named.name.option.is_none() && !options.contains(&named.at.sheet)
    };
    let own = named.iter().filter(|named| {
        named.name.option.is_none() && named.scope.as_ref().is_some_and(|scope| options.contains(scope))
    });
    let repeated: BTreeSet<(Role, Option<String>, Range)> = own.map(place_of).collect();
    let kept: Vec<&Named> =
        named.iter().filter(whole).filter(|named| repeated.contains(&place_of(named))).collect();
    let both = |sheet: &str| {
        let has = |test: fn(Role) -> bool| {
            kept.iter().any(|named| named.at.sheet == sheet && test(named.name.role))
        };
        has(Role::is_stream) && has(Role::is_output)
    };
    kept.iter().filter(|named| both(&named.at.sheet)).map(|named| what(named)).collect()
}

/// What a name says, and of which cells, whatever their sheet.
fn place_of(named: &Named) -> (Role, Option<String>, Range) {
    (named.name.role, named.name.stream.as_deref().map(key), named.at.range)
}

/// Adds a name, unless another has the same role and stream: two ranges for one role are a question.
fn add(context: &mut Context, list: &mut Vec<Named>, named: Named) {
    let twin = list.iter().find(|other| {
        other.name.role == named.name.role
            && other.name.stream.as_deref().map(key) == named.name.stream.as_deref().map(key)
    });
    match twin {
        None => list.push(named),
        Some(twin) if (&twin.at, &twin.stated) == (&named.at, &named.stated) => {}
        Some(twin) => {
            let problem = Problem::error(
                "duplicate-role",
                named.place(),
                format!("`{}` is also {}", named.name.words(), twin.place()),
            )
            .hint(
                "keep one of the two names, or give each its option: two underscores and the option's name",
            );
            context.report(problem);
        }
    }
}

/// An option named by suffix that is also a sheet shows the sheet's spelling.
fn name_after_sheet(context: &Context, group: &mut Group) {
    if let Some(sheet) = context.book.sheets.iter().find(|sheet| key(&sheet.name) == key(&group.name)) {
        group.name = sheet.name.clone();
    }
}

/// Options come in the order of their sheets, then of their cells.
fn first_cell(context: &Context, named: &[Named]) -> Option<(usize, Cell)> {
    let first = |streams: bool| {
        let wanted = named.iter().filter(|named| !streams || named.name.role.is_stream());
        wanted
            .filter_map(|named| Some((context.book.sheet_index(&named.at.sheet)?, named.at.range.first)))
            .min()
    };
    first(true).or_else(|| first(false))
}

/// Without options, the one there is bears the name of its appraisal, where there are several, else of the sheet its
/// streams stand on.
fn only_name(context: &Context, shared: &[Named]) -> String {
    let first = |streams: bool| {
        let wanted = shared.iter().filter(|named| !streams || named.name.role.is_stream());
        wanted.filter_map(|named| Some((context.book.sheet_index(&named.at.sheet)?, &named.at))).min()
    };
    let any = first(true).or_else(|| first(false)).map(|(_, at)| at.sheet.clone());
    let any = context.appraisal.clone().or(any);
    any.or_else(|| context.book.sheets.first().map(|sheet| sheet.name.clone())).unwrap_or_default()
}

/// Beside options, a stream without one is a question unless the workbook lists it as shared.
fn refuse_loose(context: &mut Context, shared: &[Named], common: &BTreeSet<String>, groups: &[Group]) {
    let example = groups.first().map(|group| group.name.replace(' ', "_").to_lowercase()).unwrap_or_default();
    for named in shared {
        let role = named.name.role;
        if !role.is_stream() && role != Role::Effect {
            continue;
        }
        let listed = named.name.stream.as_deref().unwrap_or(role.word());
        if !common.contains(&key(listed)) {
            context.report(
                Problem::error(
                    "loose-stream",
                    named.place(),
                    format!("has no option, and the workbook has options ({})", names_of(groups)),
                )
                .hint(format!(
                    "name it {}__{example}, or list `{listed}` in cells named hence_shared",
                    named.name
                )),
            );
        }
    }
}

/// The names of the options in one phrase.
pub(super) fn names_of(groups: &[Group]) -> String {
    groups.iter().map(|group| group.name.as_str()).collect::<Vec<_>>().join(", ")
}
