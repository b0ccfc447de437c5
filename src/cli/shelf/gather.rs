//! What a run is over: the workbooks that were named, and those in the folders that were.

use std::path::{Path, PathBuf};

use super::walk::{For, Walk, walk};
use crate::input::{Input, is_dash};
use crate::numbers::count;
use crate::terminal::Terminal;
use crate::{Failure, Outcome};

/// The workbooks of a run.
#[derive(Debug, Default)]
pub struct Gathered {
    /// In the order in which they were named, and by name within a folder.
    pub inputs: Vec<Input>,
    /// A folder was among what was named.
    pub walked: bool,
    /// What was passed over, and why.
    pub skipped: Vec<(PathBuf, &'static str)>,
    /// Folders that could not be read, and why.
    pub unreadable: Vec<(PathBuf, String)>,
}

/// Gathers them. Folders are walked.
pub fn gather(named: &[PathBuf], to: For) -> Result<Gathered, Failure> {
    let mut all = Gathered::default();
    for path in named {
        if is_dash(path) || !path.is_dir() {
            all.inputs.push(Input { path: path.clone(), inside: None });
            continue;
        }
        all.walked = true;
        let Walk { books, skipped, unreadable } = walk(path, to)
            .map_err(|error| Failure::Message(format!("{} cannot be read: {error}", path.display())))?;
        all.inputs.extend(books.into_iter().map(|book| Input {
            path: path.join(&book),
            inside: Some(book.parent().unwrap_or(Path::new("")).to_owned()),
        }));
        all.skipped.extend(skipped.into_iter().map(|(skipped, why)| (path.join(skipped), why)));
        let unreadable = unreadable.into_iter();
        all.unreadable.extend(unreadable.map(|(folder, why)| (path.join(folder), why.to_string())));
    }
    if all.inputs.is_empty() {
        let folders: Vec<String> = named.iter().map(|path| path.display().to_string()).collect();
        let message = format!("{}: no workbooks are in it{}", folders.join(", "), but_skipped(&all.skipped));
        let lines: Vec<String> = std::iter::once(message).chain(unreadable_words(&all.unreadable)).collect();
        return Err(Failure::Message(lines.join("\n")));
    }
    Ok(all)
}

/// How much was passed over, where anything was.
fn but_skipped(skipped: &[(PathBuf, &'static str)]) -> String {
    let folders = skipped.iter().filter(|(path, _)| path.is_dir()).count();
    let parts = [(skipped.len() - folders, "file"), (folders, "folder")];
    let parts: Vec<String> = parts.iter().filter(|(n, _)| *n > 0).map(|(n, what)| count(*n, what)).collect();
    if parts.is_empty() { String::new() } else { format!(" but {} that a run skips", parts.join(" and ")) }
}

/// Folders that could not be read, a line for each.
fn unreadable_words(unreadable: &[(PathBuf, String)]) -> impl Iterator<Item = String> {
    unreadable.iter().map(|(folder, why)| format!("{} cannot be read: {why}", folder.display()))
}

impl Gathered {
    /// Says what was passed over and what could not be read; the latter is no success.
    pub fn tell(&self, terminal: &Terminal) -> Outcome {
        skipped_words(&self.skipped).iter().for_each(|line| terminal.say("note", line));
        unreadable_words(&self.unreadable).for_each(|line| terminal.complain(&line));
        if self.unreadable.is_empty() { Outcome::Done } else { Outcome::Wrong }
    }
}

/// What was passed over, in words: one line for each reason.
pub fn skipped_words(skipped: &[(PathBuf, &'static str)]) -> Vec<String> {
    /// Names that are told; the rest is counted.
    const MOST: usize = 3;
    let mut reasons: Vec<&str> = Vec::new();
    for (_, why) in skipped {
        if !reasons.contains(why) {
            reasons.push(why);
        }
    }
    let of = |why: &&str| {
        let paths: Vec<String> =
            skipped.iter().filter(|(_, w)| w == why).map(|(path, _)| path.display().to_string()).collect();
        let more = paths.len().saturating_sub(MOST);
        let more = if more > 0 { format!(" and {more} more") } else { String::new() };
        format!("skipped ({why}): {}{more}", paths[..paths.len().min(MOST)].join(", "))
    };
    reasons.iter().map(of).collect()
}

#[cfg(test)]
mod tests {
    use std::path::PathBuf;

    use super::{Gathered, but_skipped};
    use crate::Outcome;
    use crate::args::ColorWhen;
    use crate::terminal::Terminal;

    #[test]
    fn what_could_not_be_read_is_no_success() {
        let terminal = Terminal::new(ColorWhen::Never);
        let skipped = vec![(PathBuf::from("~$a.xlsx"), "a lock file of a spreadsheet program")];
        let mut all = Gathered { skipped, ..Gathered::default() };
        assert!(matches!(all.tell(&terminal), Outcome::Done));
        all.unreadable.push((PathBuf::from("closed"), "permission denied".to_owned()));
        assert!(matches!(all.tell(&terminal), Outcome::Wrong));
    }

    #[test]
    fn what_was_passed_over_is_counted_in_words() {
        let file = |name: &str| (PathBuf::from(name), "hidden");
        // This crate's folder, and files that need not be there.
        let folder = (PathBuf::from(env!("CARGO_MANIFEST_DIR")), "hidden");
        assert_eq!(but_skipped(&[]), "");
        assert_eq!(but_skipped(&[file(".a.xlsx")]), " but 1 file that a run skips");
        assert_eq!(but_skipped(&[file(".a.xlsx"), file(".b.xlsx")]), " but 2 files that a run skips");
        let both = [file(".a.xlsx"), folder, file(".b.xlsx")];
        assert_eq!(but_skipped(&both), " but 2 files and 1 folder that a run skips");
    }
}
