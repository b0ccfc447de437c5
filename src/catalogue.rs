//! The schedules that ids are looked up in: the user's own first, then those compiled in.
use crate::rateline::{nearest, quoted};
use crate::{Error, ErrorKind, Result, Schedule};
use std::collections::BTreeMap;
use std::sync::LazyLock;

macro_rules! texts {
    ($($id:literal),* $(,)?) => {
        [$((concat!($id, ".toml"), include_str!(concat!("schedules/", $id, ".toml")))),*]
    };
}

/// The built-in schedules, in the order of their ids.
static BUILTIN: LazyLock<BTreeMap<String, Schedule>> = LazyLock::new(|| {
    let texts = texts![
        "de-abbv-2010",
        "dk-2013",
        "dk-2018",
        "echa-2011",
        "ie-2018",
        "ie-2019",
        "nl-2020",
        "nl-2020-fixed",
        "nl-2020-nonlinear",
        "no-2005",
        "no-2005-high-risk",
        "nz-2010-default",
        "nz-2010-infrastructure",
        "nz-2010-office",
        "nz-2010-technology",
        "uk-2003",
        "uk-2018",
        "uk-2018-health",
        "uk-2018-health-reduced",
        "uk-2018-reduced",
        "uk-2026",
        "uk-2026-health",
        "uk-2026-sensitivity",
        "us-a94c-1999-nominal",
        "us-a94c-1999-real",
        "us-a94c-2000-nominal",
        "us-a94c-2000-real",
    ];
    let parsed = texts.into_iter().map(|(name, text)| {
        // The texts are part of the program: a test parses each, so this cannot fail for a user.
        let schedule = Schedule::parse_builtin(name, text).expect("a built-in schedule is valid");
        (schedule.id().to_string(), schedule)
    });
    parsed.collect()
});

/// The schedules that ids are looked up in: the user's first, then the built-in ones.
///
/// The default catalogue is empty.
///
/// ```
/// use hence_core::Catalogue;
/// let catalogue = Catalogue::builtin();
/// assert_eq!(catalogue.get("uk-2003").map(|schedule| schedule.year()), Some(2003));
/// assert!(catalogue.get("UK-2003").is_some(), "case does not matter");
/// ```
#[derive(Clone, Debug, Default)]
pub struct Catalogue {
    schedules: BTreeMap<String, Schedule>,
    replaced: Vec<String>,
}

impl Catalogue {
    /// The built-in schedules.
    pub fn builtin() -> Self {
        Catalogue { schedules: BUILTIN.clone(), replaced: Vec::new() }
    }

    /// Adds user schedules (file name, TOML text), which come before the built-in ones.
    ///
    /// A text whose id is that of a built-in schedule replaces it: see [`Catalogue::replaced`].
    ///
    /// **Errors**: `BadSchedule` about the argument "schedule", with the index of the text, where a text is not
    /// valid, two texts have one id, or a companion is not known.
    pub fn with(mut self, texts: &[(String, String)]) -> Result<Self> {
        let mut added: BTreeMap<String, usize> = BTreeMap::new();
        for (index, (name, text)) in texts.iter().enumerate() {
            let schedule = Schedule::parse(name, text).map_err(|error| error.with_index(index))?;
            let id = schedule.id().to_string();
            if let Some(&before) = added.get(&id) {
                let message = format!(
                    "{}: id: {} is the id of {} too",
                    schedule.file(),
                    quoted(&id),
                    quoted(&texts[before].0)
                );
                return Err(Error::new(ErrorKind::BadSchedule, "schedule", message).with_index(index));
            }
            added.insert(id.clone(), index);
            if self.schedules.insert(id.clone(), schedule).is_some_and(|old| old.is_builtin()) {
                self.replaced.push(id);
            }
        }
        self.replaced.sort();
        for (id, &index) in &added {
            let schedule = &self.schedules[id];
            let unknown =
                schedule.companion().filter(|(companion, _)| !self.schedules.contains_key(*companion));
            if let Some((companion, _)) = unknown {
                let message =
                    format!("{}: companion.id: no schedule {} is known", schedule.file(), quoted(companion));
                return Err(Error::new(ErrorKind::BadSchedule, "schedule", message).with_index(index));
            }
        }
        Ok(self)
    }

    /// All schedules, sorted by id.
    pub fn schedules(&self) -> Vec<&Schedule> {
        self.schedules.values().collect()
    }

    /// The ids of built-in schedules that a user's text has replaced, sorted.
    pub fn replaced(&self) -> &[String] {
        &self.replaced
    }

    /// By id; case does not matter.
    pub fn get(&self, id: &str) -> Option<&Schedule> {
        self.schedules.get(&id.to_ascii_lowercase())
    }

    /// Up to three ids that are near to `id`: one a slip away, else those that share its first word.
    pub(crate) fn near(&self, id: &str) -> Vec<&str> {
        let ids = || self.schedules.keys().map(String::as_str);
        let first = id.split('-').next().unwrap_or(id);
        let alike = ids().filter(|known| known.split('-').next() == Some(first));
        let slip = nearest(id, ids());
        let mut near: Vec<&str> = slip.into_iter().collect();
        near.extend(alike.filter(|known| Some(*known) != slip));
        near.truncate(3);
        near
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn near_ids_are_offered() {
        let catalogue = Catalogue::builtin();
        assert_eq!(catalogue.near("uk-2030")[0], "uk-2003");
        assert_eq!(catalogue.near("dk-1999"), ["dk-2013", "dk-2018"]);
        assert!(catalogue.near("zz").is_empty());
    }
}
