//! A plan proposed for a workbook: what its headings and shapes say, and lines to fill in for what they do not.

use crate::fill::rows_not_valued;
use crate::model::Workbook;
use crate::package::Package;
use crate::preflight::preflight;
use crate::problem::{Place, Problem, Result, Severity};
use crate::references::SheetRange;
use crate::resolve::{Options, names, resolve};
use crate::roles::{PREFIX, Role, RoleName, key, parse_name};
use crate::suggest::{Guess, slug, suggest};

use super::PlanFile;

/// A proposed plan.
#[derive(Clone, Debug, PartialEq)]
pub struct Proposal {
    /// Its text.
    pub text: String,
    /// How many roles it states.
    pub found: usize,
    /// What a fill with it would stop at, and warnings about the file.
    pub problems: Vec<Problem>,
}

/// Proposes a plan for a workbook and those laid out like it.
///
/// What was found stands in it with the reason; what was not is a line to fill in, behind a `#`. It says what the names
/// would say that [`with_suggestions`](crate::naming::with_suggestions) writes. Roles that names of the workbook state
/// already are listed, and not stated again.
///
/// # Errors
/// The file cannot be read as a workbook.
pub fn propose(package: &Package) -> Result<Proposal> {
    let mut problems = preflight(package)?;
    let book = Workbook::read(package)?;
    let named = names(package, &book)?;
    problems.extend(named.slips);
    let mut lines: Vec<Line> = suggest(package, &book)?.iter().filter_map(Line::of).collect();
    if lines.is_empty() {
        let message = "no row of years with flows beside it was found that has no names yet";
        let problem = Problem::warning("nothing-to-suggest", Place::default(), message);
        problems.push(problem.hint("fill in the lines of the plan by hand"));
    }
    let known: Vec<String> =
        named.found.iter().map(|found| format!("{} is {}", found.name, found.place)).collect();
    let mut page =
        Page { known: &known, has: named.found.iter().filter_map(role_of).collect(), left: Vec::new() };
    page.has.extend(lines.iter().map(|line| line.name.role));
    let home = sheet_of_all(&lines);
    let options = options(&mut lines);
    let text = page.text(package.file_name(), home.as_deref(), &lines, &options);
    // The plan is tried: rows that it leaves out are offered, and what a fill would stop at is told.
    let plan = PlanFile::parse("plan", &text)?;
    let part = plan.part(&book)?;
    let found =
        lines.len() + options.iter().map(|option| option.sheets.len() * option.lines.len()).sum::<usize>();
    // Any rate will do to see which rows would be left out.
    match resolve(package, &book, &Options { basis: Some("0%"), plan: Some(&part), ..Options::default() }) {
        Ok(appraisal) => {
            let rows = rows_not_valued(&appraisal);
            page.left = rows.map(|row| (row.heading.clone(), row.at.clone())).collect();
        }
        Err(error) => {
            let stops = error.problems().iter().filter(|p| p.severity == Severity::Error);
            let told = stops.filter(|p| !["missing-role", "plan-sheet"].contains(&p.code));
            problems.extend(told.map(|p| Problem { severity: Severity::Warning, ..p.clone() }));
        }
    }
    Ok(Proposal { text: page.text(package.file_name(), home.as_deref(), &lines, &options), found, problems })
}

fn role_of(found: &crate::resolve::Found) -> Option<Role> {
    parse_name(&found.name)?.ok().map(|name| name.role)
}

/// One role that was found.
#[derive(Clone, Debug, PartialEq)]
struct Line {
    name: RoleName,
    at: SheetRange,
    why: String,
}

impl Line {
    fn of(guess: &Guess) -> Option<Self> {
        let name = parse_name(&guess.name)?.ok()?;
        Some(Line { name, at: guess.at.clone(), why: guess.why.clone() })
    }

    /// As the plan has it, its cells without a sheet where that is `home`.
    fn text(&self, home: Option<&str>) -> String {
        let cells =
            if home == Some(&self.at.sheet) { self.at.range.to_string() } else { self.at.to_string() };
        let plain = RoleName { option: None, ..self.name.clone() };
        let word = plain.to_string().trim_start_matches(PREFIX).to_owned();
        format!("{} = {}  # {}\n", key_text(&word), quoted(&cells), remark(&self.why))
    }
}

/// Options that are laid out alike, on sheets of their own.
struct Alike {
    sheets: Vec<String>,
    lines: Vec<Line>,
}

/// Takes the lines of options out, those of one layout together.
fn options(lines: &mut Vec<Line>) -> Vec<Alike> {
    let (own, shared): (Vec<Line>, Vec<Line>) = lines.drain(..).partition(|line| line.name.option.is_some());
    *lines = shared;
    let mut options: Vec<Alike> = Vec::new();
    for line in own {
        match options.iter_mut().find(|option| option.sheets[0] == line.at.sheet) {
            Some(option) => option.lines.push(line),
            None => options.push(Alike { sheets: vec![line.at.sheet.clone()], lines: vec![line] }),
        }
    }
    let layout = |option: &Alike| -> Vec<(Role, Option<String>, crate::references::Range)> {
        let about = |line: &Line| (line.name.role, line.name.stream.as_deref().map(key), line.at.range);
        option.lines.iter().map(about).collect()
    };
    let mut alike: Vec<Alike> = Vec::new();
    for option in options {
        match alike.iter_mut().find(|other| layout(other) == layout(&option)) {
            Some(other) => other.sheets.extend(option.sheets),
            None => alike.push(option),
        }
    }
    alike
}

/// The sheet that every line is on.
fn sheet_of_all(lines: &[Line]) -> Option<String> {
    let shared = || lines.iter().filter(|line| line.name.option.is_none());
    let sheet = &shared().next()?.at.sheet;
    shared().all(|line| line.at.sheet == *sheet).then(|| sheet.clone())
}

/// What the text is made from, besides the lines.
struct Page<'a> {
    known: &'a [String],
    has: Vec<Role>,
    left: Vec<(String, SheetRange)>,
}

impl Page<'_> {
    fn text(&self, file: &str, home: Option<&str>, lines: &[Line], options: &[Alike]) -> String {
        let mut text = format!(
            "# What is where in {} and workbooks laid out like it, as its headings and shapes say.\n\
             # Look over every line, take the # from those that you fill in, and use it with\n\
             #   hence fill BOOK... --plan FILE\n",
            remark(file)
        );
        for known in self.known {
            text.push_str(&format!("# A name of the workbook counts, too: {}\n", remark(known)));
        }
        if let Some(home) = home {
            text.push_str(&format!("\n# Cells without a sheet are on this one.\nsheet = {}\n", quoted(home)));
        }
        text.push_str("\n# What the workbook states in no cell.\n[settings]\n");
        for (role, value, what) in SETTINGS {
            if !self.has.contains(&role) {
                text.push_str(&format!("# {} = {value}  # not found: {what}\n", role.word()));
            }
        }
        text.push_str("\n# What it does: cells, a defined name or a table's column.\n[roles]\n");
        lines.iter().for_each(|line| text.push_str(&line.text(home)));
        let cells =
            |range: &str| quoted(&if home.is_some() { range.to_owned() } else { format!("Sheet1!{range}") });
        for (word, roles, range, what) in NEEDED {
            if !self.has.iter().any(|role| roles.contains(role)) {
                text.push_str(&format!("# {word} = {}  # not found: {what}\n", cells(range)));
            }
        }
        let single = options.is_empty();
        for (heading, at) in self.left.iter().filter(|_| single) {
            let stream = match slug(heading) {
                word if word.is_empty() => "name".to_owned(),
                word => word,
            };
            let cells = if home == Some(&at.sheet) { at.range.to_string() } else { at.to_string() };
            let word = key_text(&format!("benefit_{stream}"));
            text.push_str(&format!(
                "# {word} = {}  # numbers along the years that no role names\n",
                quoted(&cells)
            ));
        }
        for option in options {
            text.push_str("\n[[option]]\n");
            match &option.sheets[..] {
                [sheet] => text.push_str(&format!("sheet = {}\n", quoted(sheet))),
                sheets => {
                    let list: Vec<String> = sheets.iter().map(|sheet| quoted(sheet)).collect();
                    text.push_str(&format!("sheets = [{}]  # laid out alike\n", list.join(", ")));
                }
            }
            text.push_str("[option.roles]\n");
            let home = Some(option.sheets[0].as_str());
            option.lines.iter().for_each(|line| text.push_str(&line.text(home)));
            for (_, at) in self.left.iter().filter(|(_, at)| option.sheets.contains(&at.sheet)) {
                text.push_str(&format!(
                    "# {} holds numbers along the years that no role names\n",
                    remark(&at.to_string())
                ));
            }
        }
        text
    }
}

/// What a plan may state without a cell: role, an example, what it is.
const SETTINGS: [(Role, &str, &str); 4] = [
    (Role::Base, "2026", "the year to which values are discounted"),
    (Role::Basis, "\"3.5%\"", "a rate line, or the id of a schedule that `hence schedules` lists"),
    (
        Role::Timing,
        "\"flows end, base end\"",
        "where in their years flows and base stand; so unless said otherwise",
    ),
    (Role::PriceBasis, "\"real 2026\"", "the prices of the flows"),
];

/// What an appraisal needs in cells: a role to write, those that fill the need, an example, what it is.
const NEEDED: [(&str, &[Role], &str, &str); 5] = [
    ("years", &[Role::Years, Role::Offsets], "C5:Z5", "the years of the flows, in a row or column"),
    (
        "cost_works",
        &[Role::Cost, Role::Costs, Role::Flow, Role::Damage],
        "C7:Z7",
        "a stream of costs, as long as the years",
    ),
    (
        "benefit_users",
        &[Role::Benefit, Role::Benefits, Role::Flow, Role::Damage],
        "C9:Z9",
        "a stream of benefits, as long as the years",
    ),
    ("factor", &[Role::Factor], "C11:Z11", "cells for a discount factor each year"),
    ("npv", &[Role::Npv], "C13", "a cell for the net present value"),
];

/// A key as TOML has it: bare where it may be.
fn key_text(word: &str) -> String {
    let bare = word.chars().all(|c| c.is_ascii_alphanumeric() || c == '_' || c == '-');
    if bare { word.to_owned() } else { quoted(word) }
}

/// A text in quotes.
fn quoted(text: &str) -> String {
    let mut out = String::from("\"");
    for c in text.chars() {
        match c {
            '"' | '\\' => out.extend(['\\', c]),
            c if c.is_control() => out.push_str(&format!("\\u{:04X}", u32::from(c))),
            c => out.push(c),
        }
    }
    out.push('"');
    out
}

/// A text within a line's remark.
fn remark(text: &str) -> String {
    text.chars().map(|c| if c.is_control() { ' ' } else { c }).collect()
}
