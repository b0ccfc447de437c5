//! The one table of problem codes: what each short word at the end of a message means.

/// What a problem is about: the heading that its code stands under.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Group {
    /// The file and the parts of its package.
    File,
    /// What the workbook is made of: sheets, cells, names as the file has them.
    Structure,
    /// Names, and the roles they give to cells.
    Names,
    /// Years, base, basis, timing and other settings.
    Settings,
    /// Streams of costs, benefits and net flows, and blocks of them.
    Flows,
    /// Cells to be filled.
    Targets,
    /// Filling, comparing and the audit.
    Fill,
    /// Words that the library has for its errors.
    Library,
}

impl Group {
    /// Every group, in the order of the table.
    pub const ALL: [Group; 8] = [
        Group::File,
        Group::Structure,
        Group::Names,
        Group::Settings,
        Group::Flows,
        Group::Targets,
        Group::Fill,
        Group::Library,
    ];

    /// Its heading.
    pub fn title(self) -> &'static str {
        match self {
            Group::File => "File and package",
            Group::Structure => "Workbook structure",
            Group::Names => "Names and roles",
            Group::Settings => "Years, base and settings",
            Group::Flows => "Flows",
            Group::Targets => "Targets",
            Group::Fill => "Fill and audit",
            Group::Library => "Rates and numbers",
        }
    }
}

/// One code. It is the same in messages, in JSON and in the README, and never changes its meaning.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Code {
    /// The word.
    pub code: &'static str,
    /// What it is about.
    pub group: Group,
    /// What it means, in one sentence.
    pub what: &'static str,
}

/// Every code that a [`Problem`](crate::problem::Problem) can have, sorted within its group.
pub const CODES: &[Code] = &[];
