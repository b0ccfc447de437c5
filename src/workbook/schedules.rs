//! The schedules in force: the user's folder, read here since the library opens no file, then the built-in ones.

use std::path::Path;

use hence_core::Catalogue;

use crate::problem::{Place, Problem, Result};

/// A schedule file larger than this is not one.
const MAX_SCHEDULE_BYTES: u64 = 1 << 20;

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
        let size = std::fs::metadata(&path).map_err(|e| unreadable(&name, &e))?.len();
        if size > MAX_SCHEDULE_BYTES {
            return Err(unreadable(&name, &format!("{size} bytes, allowed {MAX_SCHEDULE_BYTES}")).into());
        }
        texts.push((name.clone(), std::fs::read_to_string(&path).map_err(|e| unreadable(&name, &e))?));
    }
    texts.sort();
    Catalogue::builtin().with(&texts).map_err(|e| crate::valuation::from_core(&e, Place::name(&shown)).into())
}
