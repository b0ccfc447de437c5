//! The schedules in force: the user's folder, read here since the library opens no file, then the built-in ones.

use std::io::Read;
use std::path::Path;

use chrono::Datelike;
use hence_core::Catalogue;

use crate::problem::{Place, Problem, Result};

/// A schedule file larger than this is not one.
const MAX_SCHEDULE_BYTES: u64 = 1 << 20;

/// The calendar year (UTC) so many seconds after the start of 1970, by which a new schedule is cited.
pub fn year_of(seconds: u64) -> i32 {
    let time = i64::try_from(seconds).ok().and_then(|seconds| chrono::DateTime::from_timestamp(seconds, 0));
    time.map_or(9999, |time| time.year())
}

/// Built-in schedules, with those of `folder` (every `*.toml`) before them.
pub fn catalogue(folder: Option<&Path>) -> Result<Catalogue> {
    let Some(folder) = folder else { return Ok(Catalogue::builtin()) };
    let shown = folder.display().to_string();
    let unreadable = |name: &str, why: &dyn std::fmt::Display| {
        Problem::error("unreadable", Place::name(name), format!("cannot be read: {why}"))
            .hint("look at --schedules and the variable HENCE_SCHEDULES")
    };
    let entries = std::fs::read_dir(folder).map_err(|e| unreadable(&shown, &e))?;
    let mut texts = Vec::new();
    for entry in entries {
        let path = entry.map_err(|e| unreadable(&shown, &e))?.path();
        if path.extension().is_none_or(|e| e != "toml") {
            continue;
        }
        let name = path.file_name().unwrap_or_default().to_string_lossy().into_owned();
        let mut bytes = Vec::new();
        std::fs::File::open(&path)
            .and_then(|file| file.take(MAX_SCHEDULE_BYTES + 1).read_to_end(&mut bytes))
            .map_err(|e| unreadable(&name, &e))?;
        if bytes.len() as u64 > MAX_SCHEDULE_BYTES {
            return Err(unreadable(&name, &format!("more than {MAX_SCHEDULE_BYTES} bytes")).into());
        }
        texts.push((name.clone(), String::from_utf8(bytes).map_err(|e| unreadable(&name, &e))?));
    }
    texts.sort();
    Catalogue::builtin().with(&texts).map_err(|e| crate::valuation::from_core(&e, Place::name(&shown)).into())
}

#[cfg(test)]
mod tests {
    use super::year_of;

    #[test]
    fn years_end_with_their_last_second() {
        // 2000-01-01T00:00:00Z is 946,684,800 seconds after the start of 1970.
        assert_eq!((year_of(0), year_of(946_684_799), year_of(946_684_800)), (1970, 1999, 2000));
        assert_eq!(year_of(u64::MAX), 9999);
    }
}
