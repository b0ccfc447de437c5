//! A plan proposed for a workbook: what its headings and shapes say, and lines to fill in for what they do not.

use crate::fill::rows_not_valued;
use crate::model::Workbook;
use crate::package::Package;
use crate::preflight::preflight;
use crate::problem::{Place, Problem, Result, Severity};
use crate::references::{Area, Range, SheetRange};
use crate::resolve::{Found, Options, names, resolve};
use crate::roles::{PREFIX, Role, RoleName, key, parse_name};
use crate::suggest::{Guess, slug, suggest};

use super::{PlanFile, Planned, Says};

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
/// of the workbook say, and beyond them what the names would say that
/// [`with_suggestions`](crate::naming::with_suggestions) writes.
///
/// # Errors
/// The file cannot be read as a workbook.
pub fn propose(package: &Package) -> Result<Proposal> {
    let mut problems = preflight(package)?;
    let book = Workbook::read(package)?;
    let named = names(package, &book)?;
    problems.extend(named.slips);
    let mut lines: Vec<Line> = named.found.iter().filter_map(Line::named).collect();
    lines.extend(suggest(package, &book)?.iter().filter_map(Line::guessed));
    if !lines.iter().any(|line| line.name.role.is_stream()) {
        let message = "no flows were found: no row or column of years with flows beside it";
        let problem = Problem::warning("nothing-to-suggest", Place::default(), message);
        problems.push(problem.hint("fill in the lines of the plan by hand"));
    }
    let found = lines.len();
    let base = trial_base(&lines);
    let mut page = Page::of(package.file_name(), lines);
    // The plan is tried: rows that it leaves out are offered, and what a fill would stop at is told.
    let plan = PlanFile::parse("plan", &page.text())?;
    let mut part = plan.part(&book)?;
    part.entries.extend(base);
    // Any rate will do to see which rows would be left out.
    match resolve(package, &book, &Options { basis: Some("0%"), plan: Some(&part), ..Options::default() }) {
        Ok(appraisal) => {
            page.left =
                rows_not_valued(&appraisal).map(|row| (row.heading.clone(), row.at.clone())).collect();
        }
        Err(error) => {
            let stops = error.problems().iter().filter(|p| p.severity == Severity::Error);
            let told = stops.filter(|p| p.code != "missing-role");
            problems.extend(told.map(|p| Problem { severity: Severity::Warning, ..p.clone() }));
        }
    }
    Ok(Proposal { text: page.text(), found, problems })
}

/// Where no base was found, the first year stands in for it while the plan is tried.
fn trial_base(lines: &[Line]) -> Option<Planned> {
    let years = lines.iter().find(|line| line.name.role == Role::Years)?;
    let first = SheetRange::new(&years.at.sheet, Range::cell(years.at.nth(0)));
    let name = RoleName { role: Role::Base, stream: None, option: None };
    let none = !lines.iter().any(|line| line.name.role == Role::Base);
    none.then(|| Planned {
        name,
        from: "the first year".to_owned(),
        line: 0,
        says: Says::Cells(first.to_string()),
    })
}

/// One role that was found.
#[derive(Clone, Debug, PartialEq)]
struct Line {
    name: RoleName,
    at: Area,
    why: String,
}

impl Line {
    fn guessed(guess: &Guess) -> Option<Self> {
        let name = parse_name(&guess.name)?.ok()?;
        Some(Line { name, at: guess.at.clone().into(), why: guess.why.clone() })
    }

    fn named(found: &Found) -> Option<Self> {
        let name = RoleName { option: found.option.clone(), ..parse_name(&found.name)?.ok()? };
        Some(Line { name, at: found.at.clone()?, why: format!("the name {}", found.name) })
    }

    /// As the plan has it, its cells without a sheet where that is `home`.
    fn text(&self, home: Option<&str>) -> String {
        let plain = RoleName { option: None, ..self.name.clone() };
        let word = plain.to_string().trim_start_matches(PREFIX).to_owned();
        format!("{} = {}  # {}\n", key_text(&word), quoted(&cells(&self.at, home)), remark(&self.why))
    }
}

/// Cells as text, without their sheet where that is `home`.
fn cells(at: &Area, home: Option<&str>) -> String {
    if home == Some(&at.sheet) { at.cells_text() } else { at.to_string() }
}

/// The one sheet that all are on.
fn sheet_of<'a>(mut lines: impl Iterator<Item = &'a Line>) -> Option<&'a str> {
    let sheet = lines.next()?.at.sheet.as_str();
    lines.all(|line| line.at.sheet == sheet).then_some(sheet)
}

/// An option, or several that are laid out alike on sheets of their own.
struct Alike {
    name: String,
    sheets: Vec<String>,
    lines: Vec<Line>,
}

impl Alike {
    /// Whether its sheet says all: its cells are on it, and it is called as it is.
    fn on_its_sheet(&self) -> bool {
        self.sheets.first().is_some_and(|sheet| key(sheet) == key(&self.name))
    }

    fn layout(&self) -> Vec<(Role, Option<String>, Vec<Range>)> {
        let about =
            |line: &Line| (line.name.role, line.name.stream.as_deref().map(key), line.at.parts().to_vec());
        self.lines.iter().map(about).collect()
    }
}

/// The options among the lines, those of one layout together.
fn options(lines: Vec<Line>) -> Vec<Alike> {
    let mut options: Vec<Alike> = Vec::new();
    for line in lines {
        let name = line.name.option.clone().unwrap_or_default();
        match options.iter_mut().find(|option| key(&option.name) == key(&name)) {
            Some(option) => option.lines.push(line),
            None => options.push(Alike { name, sheets: Vec::new(), lines: vec![line] }),
        }
    }
    let mut alike: Vec<Alike> = Vec::new();
    for mut option in options {
        option.sheets.extend(sheet_of(option.lines.iter()).map(str::to_owned));
        let like = |other: &&mut Alike| other.on_its_sheet() && other.layout() == option.layout();
        match alike.iter_mut().find(like).filter(|_| option.on_its_sheet()) {
            Some(other) => other.sheets.extend(option.sheets),
            None => alike.push(option),
        }
    }
    alike
}

/// What the text is made from.
struct Page<'a> {
    file: &'a str,
    /// The sheet of the lines that belong to no option, where it is one.
    home: Option<String>,
    has: Vec<Role>,
    lines: Vec<Line>,
    options: Vec<Alike>,
    /// Rows of numbers along the years that no role names.
    left: Vec<(String, Area)>,
}

impl<'a> Page<'a> {
    fn of(file: &'a str, lines: Vec<Line>) -> Self {
        let has = lines.iter().map(|line| line.name.role).collect();
        let (own, lines): (Vec<Line>, Vec<Line>) =
            lines.into_iter().partition(|line| line.name.option.is_some());
        let home = sheet_of(lines.iter()).map(str::to_owned);
        Page { file, home, has, lines, options: options(own), left: Vec::new() }
    }

    fn text(&self) -> String {
        let mut text = format!(
            "# What is where in {} and workbooks laid out like it, as its headings and shapes say.\n\
             # Look over every line, take the # from those that you fill in, and use it with\n\
             #   hence fill BOOK... --plan FILE\n",
            remark(self.file)
        );
        let home = self.home.as_deref();
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
        self.lines.iter().for_each(|line| text.push_str(&line.text(home)));
        for (word, roles, range, what) in NEEDED {
            if !self.has.iter().any(|role| roles.contains(role)) {
                let cells = if home.is_some() { range.to_owned() } else { format!("Sheet1!{range}") };
                text.push_str(&format!("# {word} = {}  # not found: {what}\n", quoted(&cells)));
            }
        }
        let own = |at: &Area| self.options.iter().any(|option| option.sheets.contains(&at.sheet));
        self.add_left(&mut text, home, |at| !own(at));
        for option in &self.options {
            text.push_str("\n[[option]]\n");
            let first = option.sheets.first().map(String::as_str);
            match &option.sheets[..] {
                _ if !option.on_its_sheet() => {
                    text.push_str(&format!("name = {}\n", quoted(&option.name)));
                    text.extend(first.map(|sheet| format!("sheet = {}\n", quoted(sheet))));
                }
                [sheet] => text.push_str(&format!("sheet = {}\n", quoted(sheet))),
                sheets => {
                    let list: Vec<String> = sheets.iter().map(|sheet| quoted(sheet)).collect();
                    text.push_str(&format!("sheets = [{}]  # laid out alike\n", list.join(", ")));
                }
            }
            text.push_str("[option.roles]\n");
            option.lines.iter().for_each(|line| text.push_str(&line.text(first)));
            // Of sheets laid out alike the first stands for all.
            self.add_left(&mut text, first, |at| first == Some(&at.sheet));
        }
        text
    }

    /// Rows that no role names, to be taken in by those who know what they are.
    fn add_left(&self, text: &mut String, home: Option<&str>, wanted: impl Fn(&Area) -> bool) {
        for (heading, at) in self.left.iter().filter(|(_, at)| wanted(at)) {
            let heading = slug(heading);
            let stream = if heading.is_empty() { "name" } else { &heading };
            let word = key_text(&format!("{}_{stream}", Role::Flow.word()));
            let cells = quoted(&cells(at, home));
            text.push_str(&format!("# {word} = {cells}  # numbers along the years that no role names\n"));
        }
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
