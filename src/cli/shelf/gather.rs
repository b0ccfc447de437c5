//! What a run is over: the workbooks that were named, and those in the folders that were.

use std::path::{Path, PathBuf};

use super::walk::{Walk, walk};
use crate::Failure;
use crate::input::{Input, is_dash};
use crate::numbers::count;

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

/// Gathers them. Folders are walked, but for the one that outputs go to.
pub fn gather(named: &[PathBuf], out: Option<&Path>) -> Result<Gathered, Failure> {
    let mut all = Gathered::default();
    for path in named {
        if is_dash(path) || !path.is_dir() {
            all.inputs.push(Input { path: path.clone(), inside: None });
            continue;
        }
        all.walked = true;
        let Walk { books, skipped, unreadable } = walk(path, out)
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
        let skipped = match all.skipped.len() {
            0 => String::new(),
            n => format!(" but {} that a run skips", count(n, "file or folder").replace("folders", "folder")),
        };
        let folders: Vec<String> = named.iter().map(|path| path.display().to_string()).collect();
        return Err(Failure::Message(format!("{}: no workbooks are in it{skipped}", folders.join(", "))));
    }
    Ok(all)
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
